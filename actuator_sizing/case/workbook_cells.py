"""What a stored cell shows: number, text, or something that is neither, with what to do about it."""

from __future__ import annotations

import datetime

from actuator_sizing.case.text_columns import OddCell
from actuator_sizing.case.workbook_xml import RawCell, WorkbookError, WorkbookParts, column_letters

_LARGEST_WHOLE = 1e15  # beyond it a float is no longer exact to one


class CellReader:
    """Turns stored cells of one workbook into text.

    `typed` collects the texts that people typed, as opposed to numbers, which are stored with a decimal
    point everywhere and so prove nothing about the decimal mark.
    """

    def __init__(self, parts: WorkbookParts):
        from openpyxl.styles.numbers import is_date_format

        self._texts = parts.texts
        self._is_date = [is_date_format(code) for code in parts.formats]
        self._is_percent = ["%" in code and '"' not in code for code in parts.formats]
        self._counts_from_1904 = parts.counts_from_1904
        self.typed: list[str] = []

    def text(self, cell: RawCell, row: int) -> str:
        """Text of a cell; an `OddCell` where it holds neither number nor text.

        Parameters
        ----------
        cell : RawCell
            The cell as stored.
        row : int
            Its row, for the message. [-]
        """
        kind, stored = cell.kind, cell.text
        if kind == "n" and stored:
            return self._number(cell, row, stored)
        if kind in ("s", "str", "inlineStr") and stored is not None:
            text = (self._shared(stored) if kind == "s" else stored).strip()
            self.typed.append(text)
            return text
        where = f"{column_letters(cell.column)}{row}"
        if not stored:
            return _formula_without_value(where) if cell.has_formula else ""
        if kind == "e":
            return OddCell(stored, f"the spreadsheet error {stored} in {where}",
                           "Mend the formula or type the number.")  # fmt: skip
        if kind == "b":
            return OddCell(
                "FALSE" if stored == "0" else "TRUE", f"a truth value in {where}", "Type a number."
            )
        if kind == "d":
            return _date(stored, where)
        raise WorkbookError(f"a workbook with a cell of unknown type {kind[:20]!r} in {where}")

    def _shared(self, stored: str) -> str:
        index = int(stored)
        if not 0 <= index < len(self._texts):
            raise WorkbookError("a workbook with a text that is not there")
        return self._texts[index]

    def _number(self, cell: RawCell, row: int, stored: str) -> str:
        value = float(stored)
        style = cell.style
        if 0 <= style < len(self._is_date):
            if self._is_date[style]:
                return _date(self._shown_date(value), f"{column_letters(cell.column)}{row}")
            if self._is_percent[style]:
                return f"{value * 100.0:.15g}%"
        if value.is_integer() and abs(value) < _LARGEST_WHOLE:
            return str(int(value))
        return repr(value)

    def _shown_date(self, value: float) -> str:
        from openpyxl.utils.datetime import CALENDAR_MAC_1904, CALENDAR_WINDOWS_1900, from_excel

        epoch = CALENDAR_MAC_1904 if self._counts_from_1904 else CALENDAR_WINDOWS_1900
        try:
            moment = from_excel(value, epoch)
        except (ValueError, OverflowError):
            return repr(value)
        if isinstance(moment, datetime.datetime) and moment.time() == datetime.time():
            return moment.date().isoformat()
        return str(moment)


def _date(shown: str, where: str) -> OddCell:
    return OddCell(shown, f"a date or time in {where}",
                   "Format the cell as a number and type the number again.")  # fmt: skip


def _formula_without_value(where: str) -> OddCell:
    return OddCell(
        f"formula in {where}",
        f"the formula in {where} without a stored value",
        "Open the workbook in a spreadsheet program, let it calculate and save it; or type the number.",
    )
