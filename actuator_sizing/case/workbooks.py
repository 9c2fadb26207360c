"""Workbooks: every sheet as a raw table, with the cells that hold no plain number or text marked.

A workbook is a zip of XML files from someone else: its declared size is checked before anything is unpacked
(a zip cannot give more than it declares), and `workbook_xml` refuses document type definitions.
"""

from __future__ import annotations

import re
import struct
import zipfile
import zlib
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import IO

from actuator_sizing.case.cells import COMMA, POINT, evidence
from actuator_sizing.case.columns import fold
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.raw_tables import MAX_COLUMNS, MAX_ROWS, RawTable, TableBuilder
from actuator_sizing.case.text_columns import OddCell
from actuator_sizing.case.workbook_cells import CellReader
from actuator_sizing.case.workbook_xml import WorkbookError, open_parts, sheet_rows

MAX_UNPACKED_BYTES = 1_000_000_000
MAX_PACKING_RATIO = 200  # honest sheets pack 10 to 30 times
SMALL_BYTES = 20_000_000  # below this the ratio does not matter
MAX_PARTS = 5000
_OLE_SIGNATURE = b"\xd0\xcf\x11\xe0"
_MERGED = re.compile(rb"<(?:\w+:)?mergeCell\s[^>]*?ref=\"([A-Z]{1,3}\d{1,7}:[A-Z]{1,3}\d{1,7})\"")
_ZIP_FAULTS = (zipfile.BadZipFile, zlib.error, struct.error, EOFError, RuntimeError, NotImplementedError)


def read_workbook(path: Path, wanted: Iterable[str], problems: ProblemList) -> dict[str, RawTable]:
    """Read the sheets of a workbook that hold tables of a case.

    Parameters
    ----------
    path : Path
        File to read.
    wanted : iterable of str
        Names of the tables looked for; sheet names are compared without case, blanks and underscores.
    problems : ProblemList
        Takes what is wrong with the file and its sheets.

    Returns
    -------
    dict of str to RawTable
        Tables by name; empty where the file is no workbook, and the problem says why.
    """
    if not _is_safe(path, problems):
        return {}
    tables: dict[str, RawTable] = {}
    try:
        with zipfile.ZipFile(path) as archive:
            parts = open_parts(archive)
            reader = CellReader(parts)
            for name, title in _matching(parts.sheets, wanted, path.name, problems).items():
                place = f"{path.name}, sheet {title}"
                table = _read_sheet(archive, parts.sheets[title], reader, name, place, problems)
                if table is not None:
                    tables[name] = table
    except WorkbookError as fault:
        _report_no_workbook(path, str(fault), problems)
        return {}
    except (*_ZIP_FAULTS, OSError, KeyError, ValueError, IndexError, OverflowError) as error:
        _report_no_workbook(path, f"a workbook that cannot be read ({type(error).__name__})", problems)
        return {}
    return tables


def _report_no_workbook(path: Path, got: str, problems: ProblemList) -> None:
    problems.report(
        path.name,
        None,
        got=got,
        allowed="an .xlsx workbook",
        remedy="Open it in a spreadsheet program and save it as .xlsx, without password.",
    )


def _is_safe(path: Path, problems: ProblemList) -> bool:
    """Check signature and declared sizes before anything is unpacked."""
    try:
        with path.open("rb") as stream:
            if stream.read(4) == _OLE_SIGNATURE:
                _report_no_workbook(path, "an old .xls file or a workbook with a password", problems)
                return False
        with zipfile.ZipFile(path) as archive:
            parts = archive.infolist()
    except (zipfile.BadZipFile, ValueError, NotImplementedError):
        _report_no_workbook(path, "a file that is no workbook", problems)
        return False
    except OSError as error:
        problems.report(path.name, got=error.strerror or str(error), allowed="a file that can be read",
                        remedy="Check that the file exists and that you may read it.")  # fmt: skip
        return False
    unpacked = sum(part.file_size for part in parts)
    packed = max(sum(part.compress_size for part in parts), 1)
    bomb = unpacked > SMALL_BYTES and unpacked > MAX_PACKING_RATIO * packed
    if unpacked > MAX_UNPACKED_BYTES or bomb or len(parts) > MAX_PARTS:
        problems.report(
            path.name,
            None,
            got=f"{unpacked / 1e6:.0f} MB unpacked from {packed / 1e6:.2f} MB in {len(parts)} parts",
            allowed=f"at most {MAX_UNPACKED_BYTES / 1e6:.0f} MB, packed at most {MAX_PACKING_RATIO} times",
            remedy="It was not opened. Save only the tables of the case, large catalogs as CSV.",
        )
        return False
    return True


def _matching(
    titles: Iterable[str], wanted: Iterable[str], file: str, problems: ProblemList
) -> dict[str, str]:
    """Table name -> sheet title."""
    names = {fold(name): name for name in wanted}
    found: dict[str, str] = {}
    for title in titles:
        name = names.get(fold(title))
        if name is None:
            continue
        if name in found:
            problems.report(file, None, title, got=f"two sheets for the table {name}", allowed="one sheet",
                            remedy="Remove or rename one of them.")  # fmt: skip
            continue
        found[name] = title
    return found


def _merged_ranges(archive: zipfile.ZipFile, part: str) -> tuple[str, ...]:
    """Merged ranges of a sheet; they stand behind the cells, so the sheet is scanned for them first."""
    merged: list[str] = []
    with archive.open(part) as stream:
        for chunk in _overlapping(stream):
            merged += [match.decode("ascii") for match in _MERGED.findall(chunk)]
    return tuple(dict.fromkeys(merged))


def _overlapping(stream: IO[bytes], size: int = 1 << 20, overlap: int = 200) -> Iterator[bytes]:
    """Chunks that overlap, so that nothing short is cut in two."""
    tail = b""
    while chunk := stream.read(size):
        yield tail + chunk
        tail = chunk[-overlap:]


def _read_sheet(
    archive: zipfile.ZipFile, part: str, reader: CellReader, name: str, place: str, problems: ProblemList
) -> RawTable | None:
    merged = _merged_ranges(archive, part)
    covered = _covered_cells(merged)
    builder: TableBuilder | None = None
    headings: list[str] = []
    marks: set[str] = set()
    for number, cells in sheet_rows(archive, part):
        texts = {cell.column: text for cell in cells if (text := reader.text(cell, number))}
        if not texts or number > MAX_ROWS:
            continue
        if builder is None:
            headings = _headings(texts)
            if len(headings) > MAX_COLUMNS:
                problems.report(name, number, got=f"{len(headings)} columns",
                                allowed=f"at most {MAX_COLUMNS} columns",
                                remedy="Remove columns that are not needed.")  # fmt: skip
                return None
            _report_merged(name, merged, number, problems)
            builder = TableBuilder(headings)
            continue
        _add_row(builder, name, number, texts, covered.get(number, {}), problems)
        marks.update(evidence(text) for text in reader.typed if "," in text or "." in text)
        reader.typed.clear()
    if builder is None:
        problems.report(name, None, got="an empty sheet", allowed="a heading row",
                        remedy="Write the column names in the first row.")  # fmt: skip
        return None
    proven = marks & {COMMA, POINT}
    return builder.finish(name, place, proven.pop() if len(proven) == 1 else "")


def _headings(texts: dict[int, str]) -> list[str]:
    return [str(texts.get(column, "")).strip() for column in range(max(texts) + 1)]


def _add_row(
    builder: TableBuilder,
    name: str,
    number: int,
    texts: dict[int, str],
    covered: dict[int, str],
    problems: ProblemList,
) -> None:
    width = len(builder.headings)
    extra = sum(column >= width for column in texts)
    if extra:
        problems.report(name, number, got=f"{extra} cells beyond the last heading",
                        allowed=f"{width} cells, one for each heading",
                        remedy="Remove them or give them a heading.")  # fmt: skip
    builder.add(number, [texts.get(column, "") for column in range(width)])
    for column, text in texts.items():
        if isinstance(text, OddCell) and column < width:
            builder.mark_odd(column, text)
    for column, area in covered.items():
        if column < width and column not in texts:
            builder.mark_odd(column, OddCell("", f"part of the merged cells {area}",
                                             "Unmerge the cells and fill in each row."))  # fmt: skip


def _covered_cells(merged: Iterable[str]) -> dict[int, dict[int, str]]:
    """Row number -> column index -> merged range, for the cells that a merged range hides."""
    from openpyxl.utils import range_boundaries

    covered: dict[int, dict[int, str]] = {}
    for area in merged:
        left, top, right, bottom = range_boundaries(area)
        if (bottom - top + 1) * (right - left + 1) > MAX_ROWS:
            continue
        for row in range(top, bottom + 1):
            for column in range(left, min(right, MAX_COLUMNS) + 1):
                if (row, column) != (top, left):
                    covered.setdefault(row, {})[column - 1] = area
    return covered


def _report_merged(name: str, merged: Iterable[str], heading_row: int, problems: ProblemList) -> None:
    from openpyxl.utils import range_boundaries

    for area in merged:
        _, top, _, bottom = range_boundaries(area)
        if top <= heading_row <= bottom:
            problems.report(name, heading_row, got=f"the merged cells {area} in the heading row",
                            allowed="one heading in each cell", remedy="Unmerge the cells.")  # fmt: skip
