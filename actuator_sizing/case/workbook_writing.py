"""One workbook of a case: frozen headings, comments and lists of words from the declarations."""

from __future__ import annotations

import io
import re
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

from actuator_sizing.case.columns import TEXT, WORDS, YES_NO, Column, Table, fold
from actuator_sizing.case.documentation import column_facts
from actuator_sizing.case.headings import split_heading
from actuator_sizing.case.sheets import Sheet
from actuator_sizing.case.tables import TABLES, axis_quantities, table_for
from actuator_sizing.errors import InputError, Problem

if TYPE_CHECKING:
    from xlsxwriter.format import Format
    from xlsxwriter.workbook import Workbook
    from xlsxwriter.worksheet import Worksheet

    from actuator_sizing.core.mechanisms import Mechanism

_MAX_ROWS, _MAX_COLUMNS, _MAX_CELL, _MAX_SHEET_NAME = 1_048_576, 16_384, 32_767, 31  # of the xlsx format
_MAX_LIST = 255  # characters of a data-validation list
_BAD_SHEET_NAME = re.compile(r"[\[\]:*?/\\]")
_WIDEST = 44  # characters of a column
_LINE_POINTS = 15  # height of a text line
_SPARE_ROWS = 500  # rows below the last one that still offer their words

# A number that a spreadsheet shows exactly as it was typed, given a format with as many decimals.
_EXACT_NUMBER = re.compile(r"-?(0|[1-9]\d*)(\.\d+)?")
_MAX_DIGITS = 15  # decimal digits that a double keeps


def workbook_bytes(sheets: Sequence[Sheet]) -> bytes:
    """Write tables as a workbook with frozen headings, comments and lists of allowed words.

    Parameters
    ----------
    sheets : sequence of Sheet
        The tables; those that the package knows are dressed from their declarations.

    Raises
    ------
    InputError
        If a table does not fit into the format; every fault is listed.
    """
    from datetime import datetime

    from xlsxwriter.workbook import Workbook

    problems = list(_misfits(sheets))
    if problems:
        raise InputError(problems)
    stream = io.BytesIO()
    options = {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False}
    book = Workbook(stream, options)
    book.set_properties({"created": datetime(2000, 1, 1)})  # the same tables give the same bytes
    mechanism, stated_at = mechanism_of(sheets)
    for sheet in sheets:
        _write_sheet(book, sheet, mechanism, stated_at)
    book.close()
    return stream.getvalue()


def mechanism_of(sheets: Iterable[Sheet]) -> tuple[type[Mechanism] | None, str]:
    """Mechanism, and where the motion is stated, as the `axis` table says; None and empty if it says nothing."""
    from actuator_sizing.core.mechanisms import MECHANISMS

    words = {fold(name): mechanism for name, mechanism in MECHANISMS.items()}
    rows = [row for sheet in sheets if fold(sheet.name) == "axis" for row in sheet.rows if len(row) > 1]
    said = {fold(row[0]): fold(row[1]) for row in reversed(rows)}
    return words.get(said.get("mechanism", "")), said.get("motion stated at", "")


def _misfits(sheets: Iterable[Sheet]) -> Iterable[Problem]:
    for sheet in sheets:
        if len(sheet.name) > _MAX_SHEET_NAME or _BAD_SHEET_NAME.search(sheet.name) or "'" in sheet.name:
            yield Problem(
                sheet.name,
                got="this name",
                allowed="at most 31 characters without [ ] : * ? / \\ ' in a workbook",
                remedy="Rename the table.",
            )
        widest = max((len(row) for row in sheet.rows), default=0)
        if len(sheet.rows) > _MAX_ROWS or widest > _MAX_COLUMNS:
            yield Problem(
                sheet.name,
                got=f"{len(sheet.rows)} rows and {widest} columns",
                allowed=f"at most {_MAX_ROWS} rows and {_MAX_COLUMNS} columns in a workbook",
                remedy="Keep this case as a folder.",
            )
        for index, row in enumerate(sheet.rows, start=1):
            if any(len(cell) > _MAX_CELL for cell in row):
                yield Problem(
                    sheet.name,
                    index,
                    got=f"a cell of {max(map(len, row))} characters",
                    allowed=f"at most {_MAX_CELL} characters in a workbook cell",
                    remedy="Shorten it, or keep this case as a folder.",
                )


def _write_sheet(book: Workbook, sheet: Sheet, mechanism: type[Mechanism] | None, stated_at: str) -> None:
    page = book.add_worksheet(sheet.name)
    coordinate = mechanism.coordinate if mechanism else "rotary"
    known = next((name for name in TABLES if fold(name) == fold(sheet.name)), None)
    table = None if known is None else table_for(known, mechanism, stated_at)
    head = book.add_format({"bold": True, "text_wrap": True, "valign": "top", "bottom": 1})
    decimals: dict[int, Format] = {}
    headings = sheet.rows[0] if sheet.rows else ()
    columns = [_column_of(table, heading) for heading in headings]
    for column, heading in enumerate(headings):
        page.write_string(0, column, heading, head)
    for index, row in enumerate(sheet.rows[1:], start=1):
        for column, text in enumerate(row):
            declared = columns[column] if column < len(columns) else None
            # What a table calls text stays text; the `axis` table has numbers and words in one column.
            is_text = (
                declared is not None and declared.kind == TEXT and declared.name not in ("value", "width")
            )
            _write_cell(book, page, index, column, text, is_text, decimals)
    page.freeze_panes(1, 1)
    page.set_landscape()
    page.fit_to_pages(1, 0)
    page.repeat_rows(0)
    _set_widths(page, sheet.rows)
    for column, declared in enumerate(columns):
        if declared is not None:
            page.write_comment(0, column, "\n".join(column_facts(declared, coordinate)), _comment_shape())
            _offer_words(page, declared, 1, len(sheet.rows) + _SPARE_ROWS, column)
    if table is not None and table.name == "axis":
        _dress_axis(page, sheet, coordinate)


def _write_cell(
    book: Workbook,
    page: Worksheet,
    row: int,
    column: int,
    text: str,
    is_text: bool,
    decimals: dict[int, Format],
) -> None:
    """Write a number where a number shows exactly what was typed, else text."""
    if not text:
        return
    if is_text or not shows_exactly(text):
        page.write_string(row, column, text)
        return
    places = len(text.partition(".")[2])
    if places not in decimals:
        decimals[places] = book.add_format({"num_format": "0." + "0" * places if places else "0"})
    page.write_number(row, column, float(text), decimals[places])


def shows_exactly(text: str) -> bool:
    """Whether a spreadsheet number with as many decimals as typed shows exactly this text.

    Examples
    --------
    >>> [shows_exactly(t) for t in ("12", "0.10", "-3.5")]
    [True, True, True]
    >>> [shows_exactly(t) for t in ("007", "1e-3", "1,5", "+2", "-0", "12345678901234567", "=1+1")]
    [False, False, False, False, False, False, False]
    """
    if not _EXACT_NUMBER.fullmatch(text) or sum(c.isdigit() for c in text) > _MAX_DIGITS:
        return False
    places = len(text.partition(".")[2])
    return f"{float(text):.{places}f}" == text and not (text.startswith("-") and float(text) == 0.0)


def _column_of(table: Table | None, heading: str) -> Column | None:
    return table.find(split_heading(heading)[0]) if table is not None else None


def _comment_shape() -> dict[str, Any]:
    return {"x_scale": 2.2, "y_scale": 1.3, "author": "actuator_sizing"}


def _offer_words(page: Worksheet, column: Column, first: int, last: int, at: int) -> None:
    """Offer the allowed words of a column as a list to choose from."""
    words = ("yes", "no") if column.kind == YES_NO else column.words
    if column.kind not in (YES_NO, WORDS) or column.several or len(",".join(words)) > _MAX_LIST:
        return
    page.data_validation(
        first,
        at,
        min(last, _MAX_ROWS - 1),
        at,
        {
            "validate": "list",
            "source": list(words),
            "error_title": column.name[:32],
            "error_message": f"Choose one of the list for '{column.name}'."[:255],
        },
    )


def _dress_axis(page: Worksheet, sheet: Sheet, coordinate: str) -> None:
    """Explain every quantity of the `axis` table, and offer words beside those that take a word."""
    known = {fold(column.name): column for column in axis_quantities()}
    headings = [split_heading(heading)[0] for heading in sheet.rows[0]]
    if not {"quantity", "value"} <= set(headings):
        return
    name_at, value_at = headings.index("quantity"), headings.index("value")
    for index, row in enumerate(sheet.rows[1:], start=1):
        column = known.get(fold(row[name_at])) if name_at < len(row) else None
        if column is not None:
            page.write_comment(index, name_at, "\n".join(column_facts(column, coordinate)), _comment_shape())
            _offer_words(page, column, index, index, value_at)


def _set_widths(page: Worksheet, rows: Sequence[Sequence[str]]) -> None:
    """Wide enough for the first rows; headings wrap, and long remarks are cut off by the screen, not by us."""
    from textwrap import wrap

    lines = 1
    for column in range(max((len(row) for row in rows[:50]), default=0)):
        longest = max((len(row[column]) for row in rows[1:50] if column < len(row)), default=0)
        heading = rows[0][column] if column < len(rows[0]) else ""
        longest_word = max(map(len, heading.split()), default=0)
        width = min(max(longest, longest_word, 8) + 2, _WIDEST)
        page.set_column(column, column, width)
        lines = max(lines, len(wrap(heading, width - 2)))
    page.set_row(0, _LINE_POINTS * lines + 1)
