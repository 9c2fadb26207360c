"""One table on one sheet: heading with units, frozen head, filter, number formats, widths, print titles."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from textwrap import wrap
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.formatting import NOT_KNOWN, percent

if TYPE_CHECKING:
    from xlsxwriter.format import Format
    from xlsxwriter.workbook import Workbook
    from xlsxwriter.worksheet import Worksheet

# The format allows 32767 letters in a cell; a longer text says that it was cut.
_MOST_LETTERS = 32_767
_WIDEST = 42
_CLEAR_OF_LIMIT = 6e-4  # further from a limit, a tenth of a percent cannot cross it by rounding
_LETTERS_OF_A_PAGE = 260  # across A4 on its side; more would be too small to read
FONT = "Calibri"
_BAR_COLOR, _HEAD_COLOR = "#7DB3D8", "#E9EEF2"


@dataclass(frozen=True)
class Field:
    """One column of a sheet.

    Attributes
    ----------
    title : str
        Heading, with the unit in brackets.
    style : str
        ``"text"``, ``"number"``, ``"integer"``, ``"percent"`` or ``"money"``.
    bar : bool
        Draw a data bar behind the numbers.
    formula : callable or None
        Makes the live formula from the row number of the spreadsheet; the value is stored beside it.
    """

    title: str
    style: str = "text"
    bar: bool = False
    formula: Callable[[int], str] | None = None


class Sheets:
    """Writes tables as sheets of one workbook with one set of formats."""

    def __init__(self, book: Workbook):
        self.book = book
        self._formats: dict[tuple[Any, ...], Format] = {}
        self._number_formats: dict[str, Format] = {}
        self._text_formats: dict[tuple[bool, bool], Format] = {}

    def format(self, **properties: Any) -> Format:
        """Make a format once, with the house font."""
        key = tuple(sorted(properties.items()))
        if key not in self._formats:
            properties = {"font_name": FONT, "font_size": 10, "valign": "top"} | properties
            self._formats[key] = self.book.add_format(properties)
        return self._formats[key]

    def add_table(self, name: str, fields: Sequence[Field], rows: Sequence[Sequence[Any]]) -> Worksheet:
        """Write a sheet with one table that starts in A1.

        Parameters
        ----------
        name : str
            Name of the sheet.
        fields : sequence of Field
            Columns.
        rows : sequence of sequence
            Values by column; None, NaN and infinities become text, for the format has no number for them.
        """
        sheet = self.book.add_worksheet(name)
        head = self.format(bold=True, bg_color=_HEAD_COLOR, bottom=2, text_wrap=True)
        for column, field in enumerate(fields):
            sheet.write_string(0, column, field.title, head)
        widths = [min(max(len(word) for word in field.title.split()) + 2, _WIDEST) for field in fields]
        for index, values in enumerate(rows, 1):
            longest = 0
            for column, (field, value) in enumerate(zip(fields, values, strict=True)):
                shown = self.write(sheet, index, column, field, value)
                widths[column] = max(widths[column], min(shown + 2, _WIDEST))
                longest = max(longest, shown)
            if longest > _WIDEST:
                sheet.set_row(index, row_height(longest, _WIDEST))
        for column, width in enumerate(widths):
            sheet.set_column(column, column, max(width, 8))
        self.set_head_height(sheet, fields, [max(width, 8) for width in widths])
        sheet.freeze_panes(1, 1)
        sheet.autofilter(0, 0, max(len(rows), 1), len(fields) - 1)
        for column, field in enumerate(fields):
            if field.bar and rows:
                sheet.conditional_format(1, column, len(rows), column, _bar())
        self._set_print(sheet, name, sum(max(width, 8) for width in widths))
        self.set_print_area(sheet, len(rows), len(fields))
        return sheet

    def set_print_area(self, sheet: Worksheet, rows: int, columns: int) -> None:
        """Print the table and nothing beside it."""
        sheet.print_area(0, 0, max(rows, 1), columns - 1)

    def set_head_height(self, sheet: Worksheet, fields: Sequence[Field], widths: Sequence[int]) -> None:
        """Make the heading row as high as its longest heading, which wraps within its column."""
        lines = [len(wrap(field.title, width - 1)) for field, width in zip(fields, widths, strict=True)]
        sheet.set_row(0, 14.0 * max(lines, default=1) + 3.0)

    def write(self, sheet: Worksheet, row: int, column: int, field: Field, value: Any) -> int:
        """Write one cell by the style of its column; return how many letters it shows."""
        if isinstance(value, bool):
            value = "yes" if value else "no"
        if value is None or (isinstance(value, float) and math.isnan(value)):
            if field.style == "text":
                sheet.write_blank(row, column, None, self.format())
                return 0
            value = NOT_KNOWN
        if isinstance(value, float) and math.isinf(value):
            value = "infinite" if value > 0 else "-infinite"
        if isinstance(value, str) or field.style == "text":
            text = cell_text(value)
            sheet.write_string(
                row, column, text, self._text_format(field.style == "text", len(text) > _WIDEST)
            )
            return len(text)
        number_format = self._number_format(_pattern(field.style, float(value)))
        if field.formula is not None:
            sheet.write_formula(row, column, field.formula(row + 1), number_format, float(value))
        else:
            sheet.write_number(row, column, float(value), number_format)
        return 10

    def _text_format(self, is_text: bool, wraps: bool) -> Format:
        """Format of a text; one in the place of a number stands quiet, where the number would."""
        key = (is_text, wraps)
        if key not in self._text_formats:
            layout: dict[str, Any] = (
                {"align": "left", "indent": 1} if is_text else {"font_color": "#595959", "align": "right"}
            )
            self._text_formats[key] = self.format(**layout, **({"text_wrap": True} if wraps else {}))
        return self._text_formats[key]

    def _number_format(self, pattern: str) -> Format:
        if pattern not in self._number_formats:
            self._number_formats[pattern] = self.format(num_format=pattern)
        return self._number_formats[pattern]

    def _set_print(self, sheet: Worksheet, name: str, letters: int) -> None:
        sheet.set_landscape()
        sheet.set_paper(9)  # A4
        sheet.fit_to_pages(math.ceil(letters / _LETTERS_OF_A_PAGE), 0)
        sheet.repeat_rows(0)
        sheet.repeat_columns(0)
        sheet.set_margins(left=0.4, right=0.4, top=0.7, bottom=0.6)
        sheet.set_header(f"&L&10{name}")
        sheet.set_footer("&R&9&P / &N")


def row_height(letters: int, width: int) -> float:
    """Height of a row for a text that wraps in a column; a very long text is not shown whole. [pt]"""
    return 13.5 * min(math.ceil(1.1 * letters / width), 12) + 2.0


def _bar() -> dict[str, Any]:
    """Fix the scale of the bar: full is what may be used."""
    return {
        "type": "data_bar",
        "bar_solid": True,
        "bar_color": _BAR_COLOR,
        "bar_negative_color_same": True,
        "min_type": "num",
        "min_value": 0,
        "max_type": "num",
        "max_value": 1,
    }


def _pattern(style: str, value: float) -> str:
    """Choose decimals that keep a number on its side of the limit and do not drown it in digits."""
    if style == "integer":
        return "0"
    if style == "money":
        return "#,##0.00"
    if style == "percent":
        if abs(value) > _CLEAR_OF_LIMIT and abs(value - 1.0) > _CLEAR_OF_LIMIT:
            return "0.0%"
        # a margin is held against 0, a utilisation against 1: keep to the stricter of the two
        decimals = max(_decimals(percent(value, limit)) for limit in (0.0, 1.0))
        return f"0.{'0' * decimals}%"
    size = abs(value)
    if size == 0.0:
        return "0"
    if not 1e-4 <= size < 1e7:
        return "0.000E+00"
    decimals = max(0, min(8, 4 - math.floor(math.log10(size))))
    used = len(
        f"{value:.{decimals}f}".rstrip("0").partition(".")[2]
    )  # a fixed count of # would leave a bare point
    return f"0.{'0' * used}" if used else "0"


def _decimals(text: str) -> int:
    if text[0] in "<>":
        return 10
    return max(1, len(text.removesuffix(" %").partition(".")[2]))


def cell_text(value: Any) -> str:
    r"""Make any text fit a cell: no lone surrogates, no control characters, bounded length.

    Examples
    --------
    >>> cell_text("=1+1"), cell_text("a\x00b\ud800"), len(cell_text("x" * 40000))
    ('=1+1', 'a\ufffdb\ufffd', 32767)
    """
    text = str(value)
    if not text.isprintable():
        text = re.sub("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\ud800-\udfff\ufffe\uffff]", "\ufffd", text)
    if len(text) <= _MOST_LETTERS:
        return text
    ending = f"… ({len(text)} characters)"
    return text[: _MOST_LETTERS - len(ending)] + ending
