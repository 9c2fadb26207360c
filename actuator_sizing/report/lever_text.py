"""What a lever says, in the user's units; shared by page, workbook and results file."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, NamedTuple

from actuator_sizing.report.entered_units import beyond, user_unit
from actuator_sizing.report.formatting import DisplayUnit, number
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case

NO_HELP = "no change of this lever helps"
PERCENT = DisplayUnit("%", 0.01)


class LeverText(NamedTuple):
    """One lever in words: what changes, what it is now, what is needed, and the change."""

    change: str
    now: str
    needed: str
    words: str


def lever_text(case: Case, lever: Mapping[str, Any]) -> LeverText:
    """Word one entry of `SetResult.levers`.

    Parameters
    ----------
    case : Case
        The case, for the units in which the user typed the quantity.
    lever : mapping
        The entry.
    """
    title = clean(lever["title"])
    if lever["lever"] == "pair":
        parts = [lever_text(case, change) for change in lever["changes"]]
        both = "; ".join(f"{part.change}: {part.needed}" for part in parts)
        words = " and ".join(part.words for part in parts)
        return LeverText("Cheapest pair of levers", "; ".join(p.now for p in parts), both, words)
    if isinstance(lever["present"], str):
        return _part_text(title, lever)
    unit = _unit(case, lever)
    now = f"{number(unit.convert(float(lever['present'])), 4)} {unit.label}".rstrip()
    if lever["needed"] is None:
        return LeverText(title, now, "-", NO_HELP)
    return LeverText(title, now, beyond(lever["needed"], lever["present"], unit), _words(lever, unit))


def _part_text(title: str, lever: Mapping[str, Any]) -> LeverText:
    present = clean(lever["present"])
    if lever["needed"] is None:
        return LeverText(title, present, "-", "no other part alone helps")
    words = "cheapest that passes"
    if lever["next_step"] == lever["needed"]:
        words += f", and next in {lever['ordered_by']}"
    elif lever["next_step"]:
        words += f"; next in {lever['ordered_by']}: {clean(lever['next_step'])}"
    return LeverText(title, present, clean(lever["needed"]), words)


def _unit(case: Case, lever: Mapping[str, Any]) -> DisplayUnit:
    if lever["lever"] == "acceleration_share" or (lever["unit"] == "-" and lever["lever"] != "ratio"):
        return PERCENT
    table, column = lever["entered"]
    return user_unit(case, (table, column), lever["unit"], lever["present"], lever["needed"])


def _words(lever: Mapping[str, Any], unit: DisplayUnit) -> str:
    change, present = lever["needed"] - lever["present"], lever["present"]
    sense = "more" if change > 0.0 else "less"
    if unit.offset or present == 0.0:  # a temperature has no share, and nothing has none of nothing
        label = {"°C": "K", "°F": "°F"}.get(unit.label, unit.label)
        return f"{number(abs(change) / unit.factor, 3)} {label} {sense}"
    if lever["unit"] == "°C":
        return f"{number(abs(change) / unit.factor, 3)} K {sense}"
    return f"{number(100.0 * abs(change / present), 3)} % {sense}"
