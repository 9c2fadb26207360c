"""Numbers as people read them: rounded, with a unit of the trade, and never rounded across a limit."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

NOT_KNOWN = "not known"
INFINITE = "infinite"

# Decimals of a percentage that are tried before the text falls back to ">limit".
_PERCENT_DECIMALS = range(1, 5)
# Extra significant digits that are tried before the text falls back to ">limit".
_EXTRA_DIGITS = range(0, 5)


def _same_side(shown: float, value: float, limit: float, shown_limit: float) -> bool:
    """Whether a rounded value lies where the true one lies, seen against the limit as it is printed."""
    if value > limit:
        return shown > max(limit, shown_limit)
    if value < limit:
        return shown < limit and shown <= shown_limit
    return True


def percent(value: float | None, limit: float = 1.0) -> str:
    """Write a ratio as a percentage that is never rounded onto or across `limit`.

    Parameters
    ----------
    value : float or None
        Ratio, 1 = 100 %; None or NaN where not known. [-]
    limit : float
        Ratio that the reader compares with; 0 for a margin. [-]

    Returns
    -------
    str
        One decimal where that is honest, up to four where it is needed, else ``">100.0 %"``.

    Examples
    --------
    >>> percent(0.873)
    '87.3 %'
    >>> percent(1.0004), percent(0.9999), percent(1.0)
    ('100.04 %', '99.99 %', '100.0 %')
    >>> percent(-0.0004, limit=0.0), percent(1.0000000001), percent(None)
    ('-0.04 %', '>100.0 %', 'not known')
    """
    if value is None or math.isnan(value):
        return NOT_KNOWN
    if math.isinf(value):
        return INFINITE if value > 0 else f"-{INFINITE}"
    limit_text = _plain(100.0 * limit)
    shown_limit = round(100.0 * limit, 1)
    decimals = range(0, 5) if abs(value) >= 10.0 else _PERCENT_DECIMALS
    for count in decimals:
        text = f"{100.0 * value:.{count}f}"
        if _same_side(float(text), 100.0 * value, 100.0 * limit, shown_limit):
            return f"{_without_negative_zero(text)} %"
    return f"{'>' if value > limit else '<'}{limit_text} %"


def number(value: float | None, digits: int = 4, limit: float | None = None) -> str:
    """Write a number with `digits` significant digits that is never rounded onto or across `limit`.

    Parameters
    ----------
    value : float or None
        Any unit, the same as `limit`; None or NaN where not known.
    digits : int
        Significant digits; whole digits left of the point are never replaced by zeros below 10⁶. [-]
    limit : float or None
        What the reader compares with; None where there is nothing to cross.

    Examples
    --------
    >>> number(3.14159), number(1234567.0), number(0.00001234, 3), number(float("nan"))
    ('3.142', '1.235e+06', '1.23e-05', 'not known')
    >>> number(10.00049, 4, limit=10.0), number(12345.6, 3)
    ('10.0005', '12346')
    """
    if value is None or math.isnan(value):
        return NOT_KNOWN
    if math.isinf(value):
        return INFINITE if value > 0 else f"-{INFINITE}"
    if limit is None or not math.isfinite(limit):
        return _significant(value, digits)
    shown_limit = float(_significant(limit, digits))
    for extra in _EXTRA_DIGITS:
        text = _significant(value, digits + extra)
        if _same_side(float(text), value, limit, shown_limit):
            return text
    return f"{'>' if value > limit else '<'}{_plain(limit)}"


def compared(demand: float | None, capacity: float | None, digits: int = 4) -> tuple[str, str]:
    """Demand and capacity as a pair of texts that a reader orders as the true numbers are ordered.

    Examples
    --------
    >>> compared(10.006, 10.0051)
    ('10.006', '10.005')
    >>> compared(9.5, None)
    ('9.5', 'not known')
    """
    if demand is None or capacity is None or not (math.isfinite(demand) and math.isfinite(capacity)):
        return number(demand, digits), number(capacity, digits)
    for extra in _EXTRA_DIGITS:
        pair = _significant(demand, digits + extra), _significant(capacity, digits + extra)
        if _order(float(pair[0]), float(pair[1])) == _order(demand, capacity):
            return pair
    return f"{demand:.17g}", f"{capacity:.17g}"  # the digits that tell any two numbers apart


def _order(a: float, b: float) -> int:
    return (a > b) - (a < b)


def _significant(value: float, digits: int) -> str:
    """`digits` significant digits, plain between 10⁻⁴ and 10⁶, trailing zeros after the point dropped."""
    if value == 0.0:
        return "0"
    exponent = math.floor(math.log10(abs(value)))
    if not -4 <= exponent < 6:
        return f"{value:.{digits - 1}e}"
    decimals = max(digits - 1 - exponent, 0)
    text = f"{value:.{decimals}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    return _without_negative_zero(text)


def _plain(value: float) -> str:
    """Write a limit with at least one decimal, without the noise of the last bits."""
    text = f"{value:.12g}"
    return text if "." in text or "e" in text else f"{text}.0"


def _without_negative_zero(text: str) -> str:
    return text[1:] if text.startswith("-") and not text.strip("-0.") else text


# -- units of the trade ------------------------------------------------------------------------------


@dataclass(frozen=True)
class DisplayUnit:
    """A unit to print, and how an SI value becomes a number in it: (value − offset) / factor."""

    label: str
    factor: float = 1.0
    offset: float = 0.0

    def convert(self, value_si: Any) -> Any:
        """Value or array in this unit; NaN stays NaN."""
        return (value_si - self.offset) / self.factor


#: SI label -> (kind in units.py, ((spelling, smallest SI magnitude it is used for), ...), largest first)
_DISPLAY: dict[str, tuple[str, tuple[tuple[str, float], ...]]] = {
    "N·m": ("torque", (("N·m", 0.5), ("mN·m", 0.0))),
    "rad/s": ("angular speed", (("1/min", 0.0),)),
    "rad": ("angle", (("°", 0.0),)),
    "m": ("length", (("m", 10.0), ("mm", 0.0))),
    "kg·m²": ("inertia", (("kg·m²", 1.0), ("kg·cm²", 1e-6), ("g·cm²", 0.0))),
    "kg": ("mass", (("kg", 1.0), ("g", 0.0))),
    "s": ("time", (("h", 36000.0), ("min", 600.0), ("s", 1.0), ("ms", 0.0))),
    "H": ("inductance", (("mH", 0.0),)),
    "F": ("capacitance", (("mF", 1e-3), ("µF", 0.0))),
    "Ω": ("resistance", (("Ω", 0.1), ("mΩ", 0.0))),
    "N·m/A": ("torque constant", (("N·m/A", 0.5), ("mN·m/A", 0.0))),
    "W": ("power", (("kW", 1e4), ("W", 0.0))),
    "J": ("energy", (("kJ", 1e4), ("J", 0.0))),
    "1/K": ("temperature coefficient", (("%/K", 0.0),)),
}

#: Labels that mean a plain ratio.
RATIO_LABELS = ("", "-", "1")


@lru_cache(maxsize=256)
def _converted(kind: str, spelling: str) -> DisplayUnit:
    from actuator_sizing.units import parse_unit

    unit = parse_unit(spelling, kind)
    return DisplayUnit(spelling, unit.factor, unit.offset)


def display_unit(si_label: str, values: Iterable[Any] = (), fixed: str | None = None) -> DisplayUnit:
    """Choose the unit in which values of an SI unit are printed.

    Parameters
    ----------
    si_label : str
        SI unit as in `units.py`, e.g. ``"N·m"``; a label without a display unit is printed as it is.
    values : iterable of float or None
        Values that share the unit, e.g. demand and capacity; the largest decides between N·m and mN·m.
    fixed : str or None
        Take this spelling whatever the values are.
    """
    if si_label in RATIO_LABELS:
        return DisplayUnit("")
    if si_label not in _DISPLAY:
        return DisplayUnit(si_label)
    kind, choices = _DISPLAY[si_label]
    if fixed is not None:
        return _converted(kind, fixed)
    sizes = [abs(v) for v in values if isinstance(v, int | float) and math.isfinite(v)]
    largest = max(sizes, default=0.0)
    if largest == 0.0 and si_label in dict(choices):
        return _converted(kind, si_label)
    for spelling, smallest in choices:
        if largest >= smallest:
            return _converted(kind, spelling)
    raise AssertionError(f"the smallest display unit of {si_label} starts at 0")


def quantity(value_si: float | None, si_label: str, digits: int = 4) -> str:
    """Write number and unit of the trade, e.g. ``"850 mN·m"``; ``"not known"`` without a value."""
    if value_si is None or math.isnan(value_si):
        return NOT_KNOWN
    unit = display_unit(si_label, (value_si,))
    return f"{number(unit.convert(float(value_si)), digits)} {unit.label}".rstrip()
