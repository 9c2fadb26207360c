"""The chain: demand, screening, evaluation, checks, ranking, comparison."""

from actuator_sizing.sizing.comparison import compare

__all__ = ["compare"]
