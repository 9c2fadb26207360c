"""Run the command line with ``python -m actuator_sizing``."""

from actuator_sizing.cli import main

if __name__ == "__main__":
    main()
