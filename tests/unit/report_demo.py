"""The demo cases, compared once for all tests of the writers."""

from functools import lru_cache
from pathlib import Path

import actuator_sizing as act

FOLDER = Path(__file__).parents[2] / "catalogs_demo"
DEMO_CASES = ("tray_lift", "tray_shuttle", "potting_table")


@lru_cache(maxsize=len(DEMO_CASES))
def demo_comparison(name: str):
    return act.compare(act.read_case(FOLDER / name))
