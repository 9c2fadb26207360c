"""Numbers in the units in which the user typed the quantity, where that is known."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from actuator_sizing.report.formatting import DisplayUnit, display_unit, number

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case

_CATALOGS = ("motors", "gearheads", "drives")


def entered_unit(case: Case, place: tuple[str, str], si_label: str) -> DisplayUnit | None:
    """Find the unit in which a quantity was typed.

    Parameters
    ----------
    case : Case
        The case.
    place : tuple of str
        Table, and the column or the quantity of the table `axis`.
    si_label : str
        SI unit of the quantity.

    Returns
    -------
    DisplayUnit or None
        None where it was not typed, or has no unit.
    """
    from actuator_sizing.units import KINDS, UnitError, parse_unit, si_unit

    table, name = place
    if table in _CATALOGS:
        spelling = getattr(case, table).entered_units.get(name, "")
    else:
        typed = [
            entry.as_entered.partition(" ")[2].strip()
            for entry in case.entries
            if entry.table == table and name in (entry.label, entry.column) and entry.origin == "stated"
        ]
        spelling = next((text for text in typed if text), "")
    if not spelling:
        return None
    kinds = tuple(kind for kind in KINDS if (si_unit(kind) or "-") == si_label)
    try:
        unit = parse_unit(spelling, kinds)
    except UnitError:
        return None
    return DisplayUnit(spelling, unit.factor, unit.offset)


def user_unit(case: Case, place: tuple[str, str], si_label: str, *values: float | None) -> DisplayUnit:
    """The unit in which the user typed a quantity, else the usual one for these SI values."""
    return entered_unit(case, place, si_label) or display_unit(si_label, values)


def beyond(value: float, present: float, unit: DisplayUnit, digits: int = 4) -> str:
    """Write a value that a change must reach, rounded away from the present value so that the printed one does.

    Parameters
    ----------
    value, present : float
        What is needed and what is, in SI.
    unit : DisplayUnit
        Unit to print in.
    digits : int
        Significant digits; more where the change is small against the value. [-]

    Examples
    --------
    >>> beyond(83.1193, 104.0, DisplayUnit("kg")), beyond(1.68299, 1.6, DisplayUnit("s"))
    ('83.11 kg', '1.683 s')
    """
    shown, now = float(unit.convert(value)), float(unit.convert(present))
    if shown != now and shown != 0.0:
        # Three digits of the change itself must be told apart.
        finest = math.floor(math.log10(abs(shown - now))) - 2
        coarsest = math.floor(math.log10(abs(shown))) - (digits - 1)
        step = min(finest, coarsest)
        scaled = shown * 10.0**-step
        nearest = round(scaled)
        away = math.ceil(scaled) if shown > now else math.floor(scaled)
        shown = (nearest if math.isclose(nearest, scaled, rel_tol=1e-13) else away) * 10.0**step
        digits = max(digits, math.floor(math.log10(abs(shown))) - step + 1) if shown != 0.0 else digits
    return f"{number(shown, digits)} {unit.label}".rstrip()
