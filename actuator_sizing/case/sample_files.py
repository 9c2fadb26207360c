"""Fast way for a file of a million samples: numbers only. Anything else takes the way of every other table."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.raw_tables import MAX_ROWS, RawTable

_DELIMITERS = ",;\t"
_HEAD = 20_000  # characters that show how the rows are written
_FEW_BYTES = 200_000  # below this the ordinary way is as quick, and its messages name the cell


@dataclass(frozen=True)
class NumberTable(RawTable):
    """A table whose cells are all numbers; `columns` is empty."""

    numbers: tuple[NDArray[np.float64], ...] = ()


def read_samples(path: Path, name: str) -> NumberTable | None:
    """Read a long file of plain numbers; None where it is short, or holds anything else.

    Parameters
    ----------
    path : Path
        CSV file.
    name : str
        Table it holds.
    """
    try:
        if path.stat().st_size < _FEW_BYTES:
            return None
        with path.open(encoding="utf-8-sig", errors="strict", newline="") as stream:
            line = stream.readline().rstrip("\r\n")
            head = stream.read(_HEAD).splitlines()[:-1]
    except (OSError, UnicodeDecodeError):
        return None
    delimiter = max(_DELIMITERS, key=line.count)  # of the headings: a comma in the rows may be a decimal one
    headings = tuple(cell.strip().strip('"').strip() for cell in line.split(delimiter))
    if (
        not all(headings)
        or any(len(headings) != row.count(delimiter) + 1 for row in head)
        or len(headings) < 2
    ):
        return None
    marks = {mark for mark in ".," if mark != delimiter and any(mark in row for row in head)}
    if len(marks) > 1:
        return None  # thousands separators
    import pandas as pd

    decimal = marks.pop() if marks else "."
    try:
        frame = pd.read_csv(path, sep=delimiter, decimal=decimal, header=0, names=list(range(len(headings))),
                            dtype=np.float64, encoding="utf-8-sig", na_filter=False, nrows=MAX_ROWS + 1,
                            index_col=False, skip_blank_lines=False)  # fmt: skip
    except (ValueError, UnicodeDecodeError):  # ParserError is a ValueError
        return None
    if not 0 < len(frame) < MAX_ROWS:
        return None
    numbers = tuple(frame[k].to_numpy() for k in range(len(headings)))
    if not all(np.isfinite(column).all() for column in numbers):
        return None
    rows = np.arange(2, len(frame) + 2)
    return NumberTable(name, path.name, headings, rows, (), decimal, numbers)
