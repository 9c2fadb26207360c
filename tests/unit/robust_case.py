"""The small case with spreads, for the tests of the robustness study."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache
from pathlib import Path
from tempfile import TemporaryDirectory

from actuator_sizing.case.model import Case, Tolerance
from actuator_sizing.case.reading import read_case
from actuator_sizing.sizing.case_changes import single
from actuator_sizing.sizing.robustness.evaluator import SetEvaluator
from tests.unit.case_files import small_case, write_folder

PARTS = {"motor": "M-10", "gearhead": "G-3", "drive": "D-1"}

_HEAT = (
    ["thermal resistance winding-housing [K/W]", "thermal resistance housing-ambient [K/W]",
     "winding time constant [s]", "housing time constant [min]"],
    [0.5, 1.4, 25, 18],
    [0.7, 1.6, 20, 15],
)  # fmt: skip


@lru_cache(maxsize=1)
def plain_case() -> Case:
    """The small case without spreads, its motors with two thermal bodies."""
    tables = small_case()
    for row, cells in zip(tables["motors"], _HEAT, strict=True):
        row.extend(cells)
    with TemporaryDirectory() as folder:
        return read_case(write_folder(Path(folder) / "case", tables))


def spread(quantity, width, table, *, relative=True, shape="normal", truncation=3.0, correlations=()):
    """One row of the table `tolerances`."""
    return Tolerance(2, quantity, shape, width, relative, table, truncation, tuple(correlations))


def with_spreads(*spreads: Tolerance) -> Case:
    """The small case with spreads."""
    return replace(plain_case(), tolerances=spreads)


@lru_cache(maxsize=32)
def evaluator(*spreads: Tolerance) -> SetEvaluator:
    """The set of `PARTS`, prepared."""
    case = with_spreads(*spreads)
    parts = (
        case.motors.names.index(PARTS["motor"]),
        case.gearheads.names.index(PARTS["gearhead"]),
        case.drives.names.index(PARTS["drive"]),
    )
    return SetEvaluator.of(single(case, *parts))
