"""The list of candidates as a file of comma-separated values."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any, NamedTuple

from actuator_sizing.report.headings import heading

if TYPE_CHECKING:
    import pandas as pd

    from actuator_sizing.sizing.results import Comparison

#: The file ends with the row before it would grow beyond this: a report has to fit into a mail.
MOST_BYTES = 2_000_000
_BLOCK = 1000  # rows
_STARTS_FORMULA = ("=", "+", "-", "@", "\t", "\r")
_QUOTED = frozenset(',"\r\n')


class CandidateFile(NamedTuple):
    """The file and how many candidates it lists, best first."""

    content: bytes
    rows: int


def render_candidates(comparison: Comparison) -> CandidateFile:
    """Write one line for each listed candidate: UTF-8 with byte-order mark, decimal point, empty for not known.

    Parameters
    ----------
    comparison : Comparison
        The answer.

    Notes
    -----
    Numbers are written to the last digit, for a rounded one could lie on the other side of its limit.
    Spreadsheets compute a text that begins with ``=``, ``+``, ``-`` or ``@``. Such a text gets an apostrophe in
    front, which they take for "this is text".
    """
    table = comparison.candidates
    known: dict[Any, str] = {}
    lines = [",".join(_quoted(heading(str(name))) for name in table.columns)]
    size = len(lines[0].encode()) + 5  # with byte-order mark and line end
    for start in range(0, len(table), _BLOCK):
        block = table.iloc[start : start + _BLOCK]
        columns = [_column(block[name], known) for name in table.columns]
        for cells in zip(*columns, strict=True):
            line = ",".join(cells)
            size += len(line.encode("utf-8", "replace")) + 2
            if size > MOST_BYTES:
                return _file(lines)
            lines.append(line)
    return _file(lines)


def _file(lines: list[str]) -> CandidateFile:
    text = "\r\n".join((*lines, ""))
    return CandidateFile(text.encode("utf-8-sig", "replace"), len(lines) - 1)


def _column(values: pd.Series, known: dict[Any, str]) -> list[str]:
    """Cells of one column; a text, of which there are few different ones, is made once."""
    if values.dtype.kind == "f":
        return ["" if value != value else repr(value) for value in values.tolist()]
    if values.dtype.kind in "iu":
        return list(map(str, values.tolist()))
    cells = []
    for value in values.tolist():
        key = (value.__class__, value)
        if key not in known:
            known[key] = _quoted(_cell(value))
        cells.append(known[key])
    return cells


def _cell(value: Any) -> str:
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return ""
    if isinstance(value, str):
        text = value.replace("\x00", "\ufffd")
        return f"'{text}" if text.startswith(_STARTS_FORMULA) else text
    return str(value)


def _quoted(text: str) -> str:
    """Put a text into quotes where it holds what would end its cell (RFC 4180)."""
    return '"' + text.replace('"', '""') + '"' if _QUOTED & set(text) else text
