"""A number as people type it: decimal point or comma, thousands separators, minus signs, blanks.

A cell that could be read in two ways is a problem, never a guess.
"""

from __future__ import annotations

import math
import re
from fractions import Fraction

from actuator_sizing.case.text_columns import OddCell

MISSING_WORDS = frozenset(
    {"", "-", "--", "n/a", "na", "n.a.", "none", "nil", "tbd", "?", "\u2013", "\u2014", "\u2212"}
)
POINT, COMMA = ".", ","

_BLANKS = dict.fromkeys(map(ord, "\u00a0\u2007\u2009\u202f\u200a\u2002\u2003"), " ")
_INVISIBLE = dict.fromkeys(map(ord, "\u200b\u200e\u200f\ufeff\u2060"), None)
_FOLDED = str.maketrans({"\u2212": "-", "\u2012": "-", "\u2013": "-", "\ufe63": "-", "\uff0d": "-",
                         "\uff0b": "+", "\u2019": "'", "\uff0e": ".", "\uff0c": ","})  # fmt: skip
_PLAIN = re.compile(r"[-+]?(\d+(\.\d*)?|\.\d+)([eE][-+]?\d+)?", re.ASCII)
_GROUPED = {
    " ": re.compile(r"[-+]?\d{1,3}( \d{3})+([.,]\d+)?", re.ASCII),
    "'": re.compile(r"[-+]?\d{1,3}('\d{3})+([.,]\d+)?", re.ASCII),
    ",": re.compile(r"[-+]?\d{1,3}(,\d{3})+(\.\d*)?", re.ASCII),
    ".": re.compile(r"[-+]?\d{1,3}(\.\d{3})+(,\d*)?", re.ASCII),
}
_AMBIGUOUS = re.compile(r"[-+]?[1-9]\d{0,2}([.,])\d{3}", re.ASCII)
_COMMA_NUMBER = re.compile(r"[-+]?\d*,\d+([eE][-+]?\d+)?|[-+]?\d+,([eE][-+]?\d+)?", re.ASCII)
_RANGE = re.compile(r"[-+]?[\d.,]+\s*(\.\.\.?|\u2026|~|to|bis|/|-)\s*[-+]?[\d.,]+\s*\S*", re.ASCII)
_FRACTION = re.compile(r"([-+]?\d{1,12})\s*[/:]\s*(\d{1,12})", re.ASCII)
_WITH_UNIT = re.compile(r"([-+]?\d[\d.,]*(?:[eE][-+]?\d+)?)\s*([^\W\d_].*|[%°‰\"'].*)", re.DOTALL)
_EVIDENCE = re.compile(r"[-+]?(?:0|[1-9]\d*|)([.,])(\d+)", re.ASCII)


class CellError(ValueError):
    """A cell that is no plain number; `allowed` and `remedy` go into the problem."""

    def __init__(self, remedy: str, allowed: str = "a number"):
        self.allowed, self.remedy = allowed, remedy
        super().__init__(remedy)


def remedy_for(error: CellError, default: float | str | None, assumed: str) -> str:
    """Advice for a wrong cell of a column; an empty cell is no way out where it counts as a value.

    Parameters
    ----------
    error : CellError
        What is wrong.
    default : float, str or None
        Value that an empty cell counts as, in SI; None: it means not known. [-]
    assumed : str
        That value in words.
    """
    if default is None or "the cell empty if the value is not known" not in error.remedy:
        return error.remedy
    counts = assumed or f"{default}"
    return f"Write a number; where it is not known the worst case, for an empty cell counts as a value: {counts}."


def tidy(text: str) -> str:
    """Cell text without outer, doubled or exotic blanks and invisible characters; minus and quotes folded."""
    return " ".join(text.translate(_INVISIBLE).translate(_BLANKS).translate(_FOLDED).split())


def is_missing(text: str) -> bool:
    """Whether a cell says that nothing is known: empty, ``-``, ``n/a``.

    Examples
    --------
    >>> is_missing(" n/a "), is_missing("0")
    (True, False)
    """
    return text == "" or text.strip().casefold() in MISSING_WORDS


def evidence(text: str) -> str:
    """Decimal mark that a cell proves beyond doubt: ``"."``, ``","`` or ``""``.

    Examples
    --------
    >>> evidence("1,5"), evidence("1.25"), evidence("1,500")
    (',', '.', '')
    """
    match = _EVIDENCE.fullmatch(text.strip())
    if match is None or _AMBIGUOUS.fullmatch(text.strip()):
        return ""
    return match.group(1)


def parse_number(text: str, decimal: str = "", *, fraction: bool = False) -> tuple[float, bool]:
    """Read the number in a cell.

    Parameters
    ----------
    text : str
        Cell as typed.
    decimal : str
        Decimal mark of the table where known, ``"."`` or ``","``; decides what ``1,500`` means.
    fraction : bool
        Accept an exact fraction such as ``91/6``.

    Returns
    -------
    value : float
        The number. [-]
    grouped : bool
        Whether a lone separator was taken as a thousands separator because of `decimal`.

    Raises
    ------
    CellError
        If the cell is no number, is infinite, or could be read in two ways.

    Examples
    --------
    >>> parse_number("1.234,5"), parse_number("91/6", fraction=True)
    ((1234.5, False), (15.1667, False))
    """
    if isinstance(text, OddCell):
        raise CellError(text.remedy, allowed=f"a number, not {text.fault}")
    cell = tidy(text)
    if cell.endswith("%") and _is_number_like(cell[:-1]):
        raise CellError("Leave the % sign out of the cell and put it in the heading or unit.")
    grouped = False
    plain = cell.replace("- ", "-") if cell.startswith("- ") else cell
    if not _PLAIN.fullmatch(plain) or (decimal == COMMA and _AMBIGUOUS.fullmatch(plain)):
        fitting = _FRACTION.fullmatch(plain) if fraction else None
        if fitting:
            if int(fitting.group(2)) == 0:
                raise CellError("Write a fraction with a denominator above zero.")
            return float(Fraction(int(fitting.group(1)), int(fitting.group(2)))), False
        plain, grouped = _resolve(plain, decimal)
    value = float(plain)
    if not math.isfinite(value):
        raise CellError("Write a finite number.", allowed="a finite number")
    return value, grouped


def _is_number_like(text: str) -> bool:
    return bool(re.fullmatch(r"[-+]?[\d.,]+\s*", text, re.ASCII))


def _resolve(cell: str, decimal: str) -> tuple[str, bool]:
    """Plain spelling of a number with a comma or thousands separators."""
    match = _AMBIGUOUS.fullmatch(cell)
    if match:
        mark = match.group(1)
        if decimal == "":
            raise CellError(
                f"It may mean {cell.replace(mark, '.')} or {cell.replace(mark, '')}: write it with a decimal "
                "point or without any separator.",
                allowed="a number that can be read in one way only",
            )
        if mark == decimal:
            return cell.replace(mark, "."), False
        return cell.replace(mark, ""), True
    if _COMMA_NUMBER.fullmatch(cell):
        return cell.replace(",", "."), False
    for separator, pattern in _GROUPED.items():
        if pattern.fullmatch(cell):
            return cell.replace(separator, "").replace(",", "."), False
    raise _not_a_number(cell)


def _not_a_number(cell: str) -> CellError:
    """Explain why a cell is no number and what to write instead."""
    low = cell.casefold()
    if low.lstrip("+-") in ("inf", "infinity", "\u221e", "nan", "1.#inf", "1.#qnan"):
        return CellError("Leave the cell empty if the value is not known.", allowed="a finite number")
    if cell.startswith("#"):
        return CellError("The spreadsheet's formula failed: mend the formula or type the number.",
                         allowed="a number, not a spreadsheet error")  # fmt: skip
    if cell[:1] in ("<", ">", "\u2264", "\u2265", "~", "\u2248", "\u00b1") or low.startswith(
        ("approx", "ca.", "max", "min", "up to")
    ):
        return CellError("Write the one number to calculate with; put the remark in a note column.",
                         allowed="one number without a comparison sign")  # fmt: skip
    if _RANGE.fullmatch(cell):
        return CellError("A range cannot be calculated with: write the one number that is on the safe side.",
                         allowed="one number, not a range")  # fmt: skip
    if cell.startswith("="):
        return CellError("Text that starts with = is not calculated: type the number.")
    unit = _WITH_UNIT.fullmatch(cell)
    if unit:
        return CellError(
            f"Write the number only; '{unit.group(2)[:20]}' belongs in the heading or the unit column."
        )
    return CellError("Write a number, or leave the cell empty if the value is not known.")
