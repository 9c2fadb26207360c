"""Write tables as CSV files or as one workbook: every cell as typed, and text never becomes a formula."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from pathlib import Path

from actuator_sizing.case.sheets import Sheet, is_workbook
from actuator_sizing.case.workbook_writing import workbook_bytes
from actuator_sizing.files import replace_folder_files, write_atomically


def write_sheets(
    path: Path, sheets: Sequence[Sheet], extras: dict[str, bytes] | None = None
) -> tuple[Path, ...]:
    """Write the tables of a case to a folder or a workbook, whole or not at all.

    Parameters
    ----------
    path : Path
        A folder, or a file that ends in ``.xlsx``.
    sheets : sequence of Sheet
        The tables.
    extras : dict of str to bytes or None
        Further files of a folder; a workbook has no place for them.

    Returns
    -------
    tuple of Path
        The files written.

    Raises
    ------
    InputError
        If a table does not fit into a workbook.
    OutputError
        If a file cannot be written; what was there before is untouched.
    """
    if is_workbook(path):
        write_atomically(path, workbook_bytes(sheets))
        return (path,)
    contents = {f"{sheet.name}.csv": csv_bytes(sheet.rows) for sheet in sheets}
    return replace_folder_files(path, contents | (extras or {}))


def csv_bytes(rows: Iterable[Sequence[str]]) -> bytes:
    """Rows as comma-separated values in UTF-8; the mark in front lets spreadsheets read Ω and µ rightly."""
    stream = io.StringIO(newline="")
    writer = csv.writer(stream, lineterminator="\n")
    for row in rows:
        # One empty cell alone would be written as a line that readers skip.
        writer.writerow(row if len(row) != 1 or row[0] else [None, None])
    return stream.getvalue().encode("utf-8-sig")
