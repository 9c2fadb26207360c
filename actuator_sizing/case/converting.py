"""Rewrite a case as the other of its two forms, folder or workbook, without loss."""

from __future__ import annotations

import os
import re
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any

from actuator_sizing.case.cells import COMMA, POINT, CellError, evidence, is_missing, parse_number
from actuator_sizing.case.columns import Column, Table, find, fold
from actuator_sizing.case.headings import split_heading
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.reading import CSV_ENDINGS
from actuator_sizing.case.sheets import Sheet, is_workbook
from actuator_sizing.case.tables import TABLES, axis_quantities
from actuator_sizing.case.writing import write_sheets
from actuator_sizing.errors import InputError, Problem

_DECIMALS = re.compile(r"0\.(0+)")  # number format with a fixed count of decimals
_COMMA_NUMBER = re.compile(r"[-+]?\d+,\d+")
_DOUBTFUL = re.compile(r"-?[1-9]\d{0,2}\.\d{3}")  # 1.234 could be meant as 1234


def convert_case(source: str | Path, target: str | Path, *, overwrite: bool = False) -> tuple[Path, ...]:
    """Rewrite a case as a workbook or as a folder of CSV files.

    Parameters
    ----------
    source : str or Path
        The case to read: a folder or an ``.xlsx`` workbook.
    target : str or Path
        The other form to write.
    overwrite : bool
        Replace what exists under that name; files of a folder that the case does not have stay.

    Returns
    -------
    tuple of Path
        The files written.

    Raises
    ------
    InputError
        If the source cannot be read, both are of the same form, or the target exists.
    OutputError
        If a file cannot be written; what was there before is untouched.

    Notes
    -----
    Tables and columns that the package does not know are kept, as are notes, blank rows and the decimals of
    every number. Text stays text: part numbers keep their zeros, and text that begins with ``=`` never
    becomes a formula. Two things change spelling but not meaning: a decimal comma becomes a decimal point,
    and a formula becomes the value that was stored with it.
    """
    source, target = Path(source), Path(target)
    _check_paths(source, target, overwrite)
    problems = ProblemList()
    sheets = list(
        _workbook_sheets(source, problems) if source.is_file() else _folder_sheets(source, problems)
    )
    if not sheets and not problems.has_errors:
        problems.report(source.name, got="no tables", allowed="at least one table", remedy="Choose a case.")
    if problems.has_errors:
        raise InputError(problems.finished())
    if not is_workbook(target):
        sheets = [Sheet(sheet.name, _without_doubt(sheet)) for sheet in sheets]
    return write_sheets(target, [_moved(sheet, source, target) for sheet in sheets])


def _check_paths(source: Path, target: Path, overwrite: bool) -> None:
    if source.is_file() == is_workbook(target):
        form = "workbook" if source.is_file() else "folder"
        raise InputError(
            [
                Problem(
                    str(target),
                    got=f"a {form} to be made from a {form}",
                    allowed="a folder from a workbook, or an .xlsx workbook from a folder",
                    remedy="Copy it instead, or change the ending of the name.",
                )
            ]
        )
    taken = target.exists() and (not target.is_dir() or any(target.iterdir()))
    if taken and not overwrite:
        raise InputError(
            [
                Problem(
                    str(target),
                    got="a path where something exists already",
                    allowed="a new name or an empty folder",
                    remedy="Choose another name, or overwrite it (--force).",
                )
            ]
        )


# -- reading -----------------------------------------------------------------------------------------


def _folder_sheets(folder: Path, problems: ProblemList) -> Iterator[Sheet]:
    from actuator_sizing.case.csv_files import read_csv

    for path in sorted(folder.iterdir()):
        if path.suffix.lower() not in CSV_ENDINGS or not path.is_file():
            continue
        table = _table_of(path.stem)
        spellings = (
            (name for column in table.columns for name in (column.name, *column.aliases)) if table else ()
        )
        known = frozenset(split_heading(name)[0] for name in spellings)
        raw = read_csv(path, path.stem, known, problems)
        if raw is not None:
            yield Sheet(path.stem, tuple(_plain_rows(_grid(raw), table, raw.decimal)))


def _grid(raw: RawTable) -> list[tuple[str, ...]]:
    """Heading and rows with the blank ones put back, so that row numbers stay what the user knows."""
    rows: list[tuple[str, ...]] = [raw.headings]
    for number, cells in raw.records():
        rows += [()] * (number - len(rows) - 1)
        rows.append(tuple(cells))
    return rows


def _workbook_sheets(path: Path, problems: ProblemList) -> Iterator[Sheet]:
    from openpyxl import load_workbook

    from actuator_sizing.case.workbooks import read_workbook

    understood = read_workbook(path, tuple(TABLES), problems)  # also refuses what is unsafe to open
    if problems.has_errors:
        return
    values = load_workbook(path, data_only=True)
    formulas = load_workbook(path, data_only=False)
    for page in values.worksheets:
        table = _table_of(page.title)
        rows = _page_rows(page, formulas[page.title], problems)
        decimal = understood[table.name].decimal if table is not None and table.name in understood else ""
        yield Sheet(page.title, tuple(_plain_rows(rows, table, decimal)))


def _page_rows(page: Any, formulas: Any, problems: ProblemList) -> list[tuple[str, ...]]:
    rows: list[tuple[str, ...]] = []
    for number, row in enumerate(page.iter_rows(), start=1):
        texts = [_cell_text(cell) for cell in row]
        for cell in row:
            twin = formulas.cell(cell.row, cell.column)
            if cell.value is None and twin.data_type == "f":
                problems.report(
                    page.title,
                    number,
                    got=f"the formula in {cell.coordinate} without a stored value",
                    allowed="a value",
                    remedy="Open the workbook in a spreadsheet program, let it calculate, and save it.",
                )
        while texts and not texts[-1]:
            texts.pop()
        rows.append(tuple(texts))
    while rows and not rows[-1]:
        rows.pop()
    return rows


def _cell_text(cell: Any) -> str:
    """Text of a workbook cell: numbers with the decimals that their format shows, if it shows them all."""
    value = cell.value
    if value is None:
        return ""
    if isinstance(value, bool):
        return "TRUE" if value else "FALSE"
    if isinstance(value, int | float):
        return _number_text(value, str(cell.number_format or ""))
    return str(value)


class _Number(str):
    """Text of a number cell: a point in it is a decimal point, whatever the text cells use."""

    __slots__ = ()


def _number_text(value: float, number_format: str) -> str:
    from decimal import Decimal

    if "%" in number_format and '"' not in number_format:
        return f"{value * 100:.15g}%"  # as it is shown; the reader asks for the unit in the heading
    text = format(Decimal(repr(value)), "f")  # never 1e-07, which a workbook would keep as text only
    if isinstance(value, float) and value.is_integer():
        text = text.removesuffix(".0")
    fixed = _DECIMALS.fullmatch(number_format)
    if fixed:
        shown = f"{value:.{len(fixed.group(1))}f}"
        if float(shown) == value:
            return _Number(shown)
    return _Number(text)


# -- meaning kept while the form changes -------------------------------------------------------------


def _table_of(name: str) -> Table | None:
    return next((table for key, table in TABLES.items() if fold(key) == fold(name)), None)


def _number_cells(rows: Sequence[Sequence[str]], table: Table | None) -> Iterator[tuple[int, int]]:
    """Row and column index of the cells that the reader takes for numbers."""
    if table is None or not rows:
        return
    columns = [table.find(split_heading(heading)[0]) for heading in rows[0]]
    quantities = axis_quantities() if table.name == "axis" else ()
    for index, row in enumerate(rows[1:], start=1):
        for at, column in enumerate(columns[: len(row)]):
            if column is not None and _is_number(column, table, row, columns, quantities):
                yield index, at


def _is_number(
    column: Column,
    table: Table,
    row: Sequence[str],
    columns: Sequence[Column | None],
    quantities: Sequence[Column],
) -> bool:
    if table.name == "axis" and column.name == "value":
        names = [
            cell for cell, other in zip(row, columns, strict=False) if other and other.name == "quantity"
        ]
        quantity = find(names[0], quantities) if names else None
        return quantity is not None and quantity.is_number
    return column.is_number or (table.name, column.name) == ("tolerances", "width")


def _plain_rows(rows: Sequence[tuple[str, ...]], table: Table | None, decimal: str) -> list[tuple[str, ...]]:
    """Numbers with a decimal point and without grouping, where the table proves what its marks mean.

    A lone ``1,500`` means 1.5 in one file and 1500 in another; beside the file's other cells that is
    clear, in the converted file it might not be.
    """
    result = [list(row) for row in rows]
    if decimal:
        for index, at in _number_cells(rows, table):
            result[index][at] = _plain_number(result[index][at], decimal)
    return [tuple(row) for row in result]


def _plain_number(text: str, decimal: str) -> str:
    cell = text.strip()
    if isinstance(text, _Number) or is_missing(cell):
        return text
    if decimal == COMMA and _COMMA_NUMBER.fullmatch(cell):
        return cell.replace(",", ".")
    try:
        value, grouped = parse_number(cell, decimal)
    except CellError:
        return text
    return f"{value:.15g}" if grouped else text


def _without_doubt(sheet: Sheet) -> tuple[tuple[str, ...], ...]:
    """Write 1.234 as 1.2340 where a stray decimal comma would make a reader take it for 1234."""
    marks = {evidence(cell) for row in sheet.rows for cell in row if "," in cell or "." in cell}
    if COMMA not in marks or POINT in marks:
        return sheet.rows
    result = [list(row) for row in sheet.rows]
    for index, at in _number_cells(sheet.rows, _table_of(sheet.name)):
        if _DOUBTFUL.fullmatch(result[index][at]):
            result[index][at] += "0"
    return tuple(tuple(row) for row in result)


def _moved(sheet: Sheet, source: Path, target: Path) -> Sheet:
    """Let a relative `catalog folder` still name the same folder, seen from where the case is now."""
    before = source.parent if source.is_file() else source
    after = target.parent if is_workbook(target) else target
    if _table_of(sheet.name) is not TABLES["axis"] or before.resolve() == after.resolve():
        return sheet
    folded = [split_heading(heading)[0] for heading in sheet.rows[0]]
    if not {"quantity", "value"} <= set(folded):
        return sheet
    name_at, value_at = folded.index("quantity"), folded.index("value")
    rows = [list(row) for row in sheet.rows]
    for row in rows[1:]:
        if (
            len(row) > max(name_at, value_at)
            and fold(row[name_at]) == "catalog folder"
            and row[value_at].strip()
        ):
            folder = Path(row[value_at].strip())
            if not folder.is_absolute():
                row[value_at] = Path(os.path.relpath(before / folder, after)).as_posix()
    return Sheet(sheet.name, tuple(tuple(row) for row in rows))
