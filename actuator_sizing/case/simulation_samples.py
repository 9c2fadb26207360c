"""Samples over time from a CSV file: columns with units, no gaps, time ascending."""

from __future__ import annotations

import math
from collections.abc import Mapping
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.cells import CellError, parse_number
from actuator_sizing.case.csv_files import read_csv
from actuator_sizing.case.headings import split_heading
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.errors import ERROR, InputError, Problem
from actuator_sizing.units import UnitError, parse_unit, to_si

FloatArray = NDArray[np.float64]


def read_samples(
    path: Path, kinds: Mapping[str, str], *, required: tuple[str, ...], most_rows: int
) -> dict[str, FloatArray]:
    """Read samples, in SI.

    Parameters
    ----------
    path : Path
        CSV file with one heading row.
    kinds : mapping of str to str
        Kind of quantity of every known column by its name; other columns are ignored.
    required : tuple of str
        Columns that must be there; the first one is time and must ascend.
    most_rows : int
        Longest file. [-]

    Returns
    -------
    dict of str to ndarray, shape (n,)
        By column name. [-]

    Raises
    ------
    InputError
        With the row and column of what is wrong.
    """
    problems = ProblemList()
    raw = read_csv(path, path.name, frozenset(kinds), problems)
    if raw is None:
        raise InputError(p for p in problems.finished() if p.severity == ERROR)
    found: dict[str, FloatArray] = {}
    names = {}
    for index, heading in enumerate(raw.headings):
        name, unit_text = split_heading(heading)
        if name in kinds:
            names[name] = (index, unit_text, heading)
    for name in required:
        if name not in names:
            raise _wrong(path, None, name, "no such column", f"a column '{name} [unit]'",
                         "Add the column, with its unit in the heading.")  # fmt: skip
    rows = list(raw.records())
    if not 2 <= len(rows) <= most_rows:
        raise _wrong(path, None, "", f"{len(rows)} samples", f"2 to {most_rows} samples",
                     "Thin the samples out, or add some.")  # fmt: skip
    for name, (index, unit_text, heading) in names.items():
        if unit_text is None:
            raise _wrong(path, None, heading, "no unit", f"a unit of {kinds[name]} in brackets",
                         f"Write for example '{name} [s]'.")  # fmt: skip
        try:
            unit = parse_unit(unit_text, kinds[name])
        except UnitError as error:
            raise _wrong(
                path, None, heading, shown(unit_text), f"a unit of {kinds[name]}", str(error)
            ) from None
        values = np.empty(len(rows))
        for position, (number, cells) in enumerate(rows):
            try:
                values[position] = parse_number(cells[index], raw.decimal)[0]
            except CellError as error:
                raise _wrong(path, number, heading, shown(cells[index]) or "an empty cell", "a number",
                             error.remedy) from None  # fmt: skip
            if not math.isfinite(values[position]):
                raise _wrong(path, number, heading, shown(cells[index]), "a finite number",
                             "Samples must have no gaps.")  # fmt: skip
        found[name] = np.asarray(to_si(values, unit), dtype=float)
    time = found[required[0]]
    back = np.flatnonzero(np.diff(time) <= 0.0)
    if len(back):
        raise _wrong(path, rows[int(back[0]) + 1][0], required[0], f"{time[back[0] + 1]:g} s",
                     f"more than the {time[back[0]]:g} s before it", "Sort the samples by time.")  # fmt: skip
    return found


def _wrong(path: Path, row: int | None, column: str, got: str, allowed: str, remedy: str) -> InputError:
    return InputError([Problem(path.name, row, column, got, allowed, remedy)])
