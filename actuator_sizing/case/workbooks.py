"""Workbooks: every sheet as a raw table, with the cells that hold no plain number or text marked.

A workbook is a zip of XML files from someone else, so its declared size is checked before anything is
unpacked, and entity tricks in the XML are refused by defusedxml (which openpyxl uses when it is installed).
"""

from __future__ import annotations

import datetime
import re
import struct
import warnings
import zipfile
import zlib
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import IO, Any
from xml.etree.ElementTree import ParseError

from actuator_sizing.case.cells import COMMA, POINT, evidence
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.raw_tables import MAX_COLUMNS, MAX_ROWS, RawTable, TableBuilder
from actuator_sizing.case.text_columns import OddCell

MAX_UNPACKED_BYTES = 1_000_000_000
MAX_PACKING_RATIO = 200  # honest sheets pack 10 to 30 times
SMALL_BYTES = 20_000_000  # below this the ratio does not matter
MAX_PARTS = 5000
_OLE_SIGNATURE = b"\xd0\xcf\x11\xe0"
_MERGED = re.compile(rb"<(?:\w+:)?mergeCell\s[^>]*?ref=\"([A-Z]+\d+:[A-Z]+\d+)\"")
_FORMULA = re.compile(rb"<(?:\w+:)?f[\s>/]")
_FAULTS = (
    zipfile.BadZipFile, zipfile.LargeZipFile, zlib.error, struct.error, ParseError, KeyError, ValueError,
    TypeError, AttributeError, IndexError, OSError, EOFError, RuntimeError, NotImplementedError,
    OverflowError,
)  # fmt: skip


@dataclass(frozen=True)
class _Sheet:
    name: str
    merged: tuple[str, ...]
    has_formulas: bool


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
    from openpyxl import load_workbook

    tables: dict[str, RawTable] = {}
    try:
        with warnings.catch_warnings(), path.open("rb") as first, path.open("rb") as second:
            warnings.simplefilter("ignore")  # what openpyxl cannot keep does not matter for reading
            values = load_workbook(first, read_only=True, data_only=True)
            formulas = load_workbook(second, read_only=True, data_only=False)
            for name, title in _matching(values.sheetnames, wanted, path.name, problems).items():
                sheet = _inspect(path, values[title])
                table = _read_sheet(name, path, sheet, values[title], formulas[title], problems)
                if table is not None:
                    tables[name] = table
    except _FAULTS as error:
        cause = error.__cause__ or error.__context__ or error  # openpyxl wraps what it met
        _report_no_workbook(path, f"a workbook that cannot be read ({type(cause).__name__})", problems)
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
    from actuator_sizing.case.columns import fold

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


def _inspect(path: Path, worksheet: Any) -> _Sheet:
    """Find merged ranges and formulas by scanning the sheet's XML once, without keeping it."""
    part = str(getattr(worksheet, "_worksheet_path", "")).lstrip("/")
    merged: list[str] = []
    has_formulas = False
    with zipfile.ZipFile(path) as archive, archive.open(part) as stream:
        for chunk in _overlapping(stream):
            has_formulas = has_formulas or _FORMULA.search(chunk) is not None
            merged += [match.decode("ascii") for match in _MERGED.findall(chunk)]
    return _Sheet(worksheet.title, tuple(dict.fromkeys(merged)), has_formulas)


def _overlapping(stream: IO[bytes], size: int = 1 << 20, overlap: int = 200) -> Iterator[bytes]:
    """Chunks that overlap, so that nothing short is cut in two."""
    tail = b""
    while chunk := stream.read(size):
        yield tail + chunk
        tail = chunk[-overlap:]


def _read_sheet(
    name: str, path: Path, sheet: _Sheet, values: Any, formulas: Any, problems: ProblemList
) -> RawTable | None:
    place = f"{path.name}, sheet {sheet.name}"
    values.reset_dimensions()
    formulas.reset_dimensions()
    rows: Iterable[tuple[Any, ...]] = values.iter_rows()
    twins: Iterator[tuple[Any, ...]] | None = iter(formulas.iter_rows()) if sheet.has_formulas else None
    inner = _covered_cells(sheet.merged)
    headings: list[str] = []
    builder: TableBuilder | None = None
    marks = {COMMA: False, POINT: False}
    for number, row in enumerate(rows, start=1):
        twin = next(twins, ()) if twins is not None else ()
        hidden = {column: area for column, area in inner.get(number, {}).items() if column < len(headings)}
        filled = any(cell.value is not None for cell in row) or any(cell.value is not None for cell in twin)
        if number > MAX_ROWS or not (filled or hidden):
            continue
        texts = [_text(cell, twin[i] if i < len(twin) else None) for i, cell in enumerate(row)]
        if not (hidden or any(texts)):
            continue
        if builder is None:
            headings = [str(text).strip() for text in texts]
            while headings and not headings[-1]:
                headings.pop()
            if len(headings) > MAX_COLUMNS:
                problems.report(name, number, got=f"{len(headings)} columns",
                                allowed=f"at most {MAX_COLUMNS} columns",
                                remedy="Remove columns that are not needed.")  # fmt: skip
                return None
            if headings:
                _report_merged(name, sheet, number, problems)
                builder = TableBuilder(headings)
            continue
        _add_row(builder, name, number, len(headings), texts, hidden, problems)
        for text in texts:
            if "," in text or "." in text:
                mark = evidence(text)
                if mark and text.__class__ is not _NumberText:
                    marks[mark] = True
    if builder is None:
        problems.report(name, None, got="an empty sheet", allowed="a heading row",
                        remedy="Write the column names in the first row.")  # fmt: skip
        return None
    decimal = (COMMA if marks[COMMA] else POINT) if marks[COMMA] != marks[POINT] else ""
    return builder.finish(name, place, decimal)


class _NumberText(str):
    """Text of a number cell: always with a decimal point, so it proves nothing about typed text."""

    __slots__ = ()


def _add_row(
    builder: TableBuilder,
    name: str,
    number: int,
    width: int,
    texts: list[str],
    merged: dict[int, str],
    problems: ProblemList,
) -> None:
    extra = [text for text in texts[width:] if text]
    if extra:
        problems.report(name, number, got=f"{len(extra)} cells beyond the last heading",
                        allowed=f"{width} cells, one for each heading",
                        remedy="Remove them or give them a heading.")  # fmt: skip
    cells = (texts + [""] * width)[:width]
    odd = [(i, cell) for i, cell in enumerate(cells) if isinstance(cell, OddCell)]
    for column, area in merged.items():
        if column < width and not cells[column]:
            odd.append((column, OddCell("", f"part of the merged cells {area}",
                                        "Unmerge the cells and fill in each row.")))  # fmt: skip
    builder.add(number, cells)
    for column, cell in odd:
        builder.mark_odd(column, cell)


def _text(cell: Any, twin: Any) -> str:
    """Text of a cell; `twin` is the same cell with its formula instead of its value."""
    value = cell.value
    where = getattr(cell, "coordinate", "")
    if value is None:
        if twin is not None and twin.value is not None and twin.data_type == "f":
            return OddCell(
                f"formula in {where}",
                f"the formula in {where} without a stored value",
                "Open the workbook in a spreadsheet program, let it calculate and save it; or type the number.",
            )
        return ""
    if cell.data_type == "e":
        return OddCell(str(value), f"the spreadsheet error {value} in {where}",
                       "Mend the formula or type the number.")  # fmt: skip
    if isinstance(value, bool):
        return OddCell("TRUE" if value else "FALSE", f"a truth value in {where}", "Type a number.")
    if isinstance(value, int | float):
        return _number_text(value, str(getattr(cell, "number_format", "") or ""))
    if isinstance(value, datetime.datetime | datetime.date | datetime.time | datetime.timedelta):
        return OddCell(_date_text(value), f"a date or time in {where}",
                       "Format the cell as a number and type the number again.")  # fmt: skip
    return str(value).strip()


def _number_text(value: float, number_format: str) -> str:
    if isinstance(value, float) and value.is_integer() and abs(value) < 1e15:
        value = int(value)
    if "%" in number_format and '"' not in number_format:
        return _NumberText(f"{value * 100:.15g}%")
    return _NumberText(repr(value))


def _date_text(value: Any) -> str:
    if isinstance(value, datetime.datetime) and value.time() == datetime.time():
        return value.date().isoformat()
    return str(value)


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


def _report_merged(name: str, sheet: _Sheet, heading_row: int, problems: ProblemList) -> None:
    from openpyxl.utils import range_boundaries

    for area in sheet.merged:
        _, top, _, bottom = range_boundaries(area)
        if top <= heading_row <= bottom:
            problems.report(name, heading_row, got=f"the merged cells {area} in the heading row",
                            allowed="one heading in each cell", remedy="Unmerge the cells.")  # fmt: skip
