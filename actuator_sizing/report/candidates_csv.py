"""The list of candidates as a file of comma-separated values."""

from __future__ import annotations

import csv
import io
import math
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.headings import heading

if TYPE_CHECKING:
    import pandas as pd

    from actuator_sizing.sizing.results import Comparison

_STARTS_FORMULA = ("=", "+", "-", "@", "\t", "\r")


def render_candidates(comparison: Comparison) -> bytes:
    """Write one line for each listed candidate: UTF-8 with byte-order mark, decimal point, empty for not known.

    Parameters
    ----------
    comparison : Comparison
        The answer.

    Notes
    -----
    Spreadsheets compute a text that begins with ``=``, ``+``, ``-`` or ``@``. Such a text gets an apostrophe in
    front, which they take for "this is text".
    """
    table = comparison.candidates
    stream = io.StringIO(newline="")
    writer = csv.writer(stream, lineterminator="\r\n")
    writer.writerow([heading(str(name)) for name in table.columns])
    writer.writerows(zip(*(_column(table[name]) for name in table.columns), strict=True))
    return stream.getvalue().encode("utf-8-sig", "replace")


def _column(values: pd.Series) -> list[Any]:
    """Cells of one column; numbers, of which there are millions, take the short way."""
    if values.dtype.kind == "f":
        return ["" if value != value else value for value in values.tolist()]
    return [_cell(value) for value in values.tolist()]


def _cell(value: Any) -> Any:
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return ""
    if isinstance(value, str):
        text = value.replace("\x00", "\ufffd")
        return f"'{text}" if text.startswith(_STARTS_FORMULA) else text
    return value
