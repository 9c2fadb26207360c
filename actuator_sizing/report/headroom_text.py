"""What a limit of a set says, in the user's units; shared by page, workbook, console and results file."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, NamedTuple

from actuator_sizing.report.entered_units import entered_unit, user_unit
from actuator_sizing.report.formatting import DisplayUnit, number
from actuator_sizing.report.text import check_name, clean, in_sentence

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.headroom import HeadroomAnswer, PayloadMap

_PLACES = {
    "heaviest_payload": ("duty_cycle", "payload"),
    "hottest_ambient": ("axis", "ambient temperature"),
}
_MOTION = "what the mechanism can move"
_DIGITS = 4


class HeadroomText(NamedTuple):
    """One limit in words: the quantity, its value now, its limit, what bounds it, and how far away it is."""

    quantity: str
    now: str
    limit: str
    bounded_by: str
    words: str


def headroom_text(case: Case, answer: HeadroomAnswer, titles: Mapping[str, str]) -> HeadroomText:
    """Word one limit.

    Parameters
    ----------
    case : Case
        The case, for the units in which the user typed the quantity.
    answer : HeadroomAnswer
        The limit.
    titles : mapping of str to str
        Titles of the checks by key.
    """
    place = _PLACES.get(answer.key, ("", ""))
    unit = user_unit(case, place, answer.unit, answer.present or answer.limit)
    title, now = clean(answer.title), _shown(answer.present, unit)
    bound = bounded_by(answer.check, titles)
    if answer.limit is None:
        if answer.is_free:
            far = user_unit(case, place, answer.unit, answer.tried_to)
            return HeadroomText(
                title, now, "none", "-", f"passes up to {_shown(answer.tried_to, far)}, the last tried"
            )
        return HeadroomText(title, now, "-", bound, "passes at no value")
    limit_unit = unit if place[0] and entered_unit(case, place, answer.unit) else user_unit(
        case, place, answer.unit, answer.limit
    )  # fmt: skip
    if answer.is_free:
        return HeadroomText(title, now, _shown(answer.limit, limit_unit), "-", "none is needed")
    largest = not answer.key.startswith(("fastest", "shortest"))
    shown = safe_side(answer.limit, limit_unit, down=largest)
    return HeadroomText(title, now, shown, bound, _distance(answer, unit))


def bounded_by(check: str, titles: Mapping[str, str]) -> str:
    """Name what fails beyond a limit; empty for nothing."""
    if check == "motion":
        return _MOTION
    return in_sentence(titles.get(check, check_name(check))) if check else ""


def safe_side(value: float, unit: DisplayUnit, *, down: bool) -> str:
    """Write a limit rounded to the side that passes.

    Examples
    --------
    >>> safe_side(195.2487, DisplayUnit("kg"), down=True), safe_side(9.70431, DisplayUnit("s"), down=False)
    ('195.2 kg', '9.705 s')
    """
    shown = float(unit.convert(value))
    if shown != 0.0:
        step = 10.0 ** (math.floor(math.log10(abs(shown))) - _DIGITS + 1)
        turns = shown / step
        shown = step * (math.floor(turns + 1e-9) if down else math.ceil(turns - 1e-9))
    return f"{number(shown, _DIGITS)} {unit.label}".rstrip()


def payload_unit(case: Case, drawn: PayloadMap) -> DisplayUnit:
    """The unit in which the map shows its payload: the one in which it was typed."""
    top = max(r.payload for r in drawn.rows)
    return user_unit(case, _PLACES["heaviest_payload"], drawn.payload_unit, top)


def map_rows(case: Case, drawn: PayloadMap, titles: Mapping[str, str]) -> Iterator[tuple[str, ...]]:
    """Rows of the map as texts: payload, shortest and longest cycle, each with what bounds it."""
    unit = payload_unit(case, drawn)
    seconds = DisplayUnit("s")
    for one in drawn.rows:
        payload = _shown(one.payload, unit) + (" (as stated)" if one.payload == drawn.present_payload else "")
        if one.shortest_s is None:
            yield payload, "-", bounded_by(one.shortest_by, titles) or "-", "-", "passes at no time tried"
            continue
        longest = "none" if one.longest_s is None else safe_side(one.longest_s, seconds, down=True)
        yield (
            payload,
            safe_side(one.shortest_s, seconds, down=False),
            bounded_by(one.shortest_by, titles),
            longest,
            bounded_by(one.longest_by, titles) or f"nothing up to {_shown(drawn.slowest_s, seconds)}",
        )


def _shown(value: float, unit: DisplayUnit) -> str:
    return f"{number(float(unit.convert(value)), _DIGITS)} {unit.label}".rstrip()


def _distance(answer: HeadroomAnswer, unit: DisplayUnit) -> str:
    assert answer.limit is not None
    change = answer.limit - answer.present
    sense = "more" if change > 0.0 else "less"
    if answer.unit == "°C":
        return f"{number(abs(change), 3)} K {sense}"
    if answer.present == 0.0:
        return f"{_shown(abs(change), unit)} {sense}"
    return f"{number(100.0 * abs(change / answer.present), 3)} % {sense}"
