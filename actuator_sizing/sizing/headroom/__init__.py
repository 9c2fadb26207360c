"""What one set can do: fastest cycle, heaviest payload, hottest ambient, longest hold, shortest dwell, and a map.

Each quantity is driven outwards, all else as it is, until a check fails; the answer is the last value that passes,
with the check that fails beyond it. A set that fails as it is, is driven inwards until it passes.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from actuator_sizing.case.model import Case
from actuator_sizing.sizing.case_changes import single, whole_case
from actuator_sizing.sizing.cycles import CycleDemand, cycle_demands
from actuator_sizing.sizing.edge_search import narrowed, walk
from actuator_sizing.sizing.headroom.declared import Extent, extents
from actuator_sizing.sizing.headroom.payload_map import MapRow, PayloadMap, changed_case, payload_map
from actuator_sizing.sizing.resizing import Outcome, Resizing
from actuator_sizing.sizing.simulation_request import find_set

if TYPE_CHECKING:
    import pandas as pd

__all__ = [
    "Headroom",
    "HeadroomAnswer",
    "MapRow",
    "PayloadMap",
    "changed_case",
    "extents",
    "headroom",
    "headroom_of",
]

_RESOLUTION = 2e-4  # of a value: a thousandth beyond is outside


@dataclass(frozen=True)
class HeadroomAnswer:
    """How far one quantity can go.

    Attributes
    ----------
    key, title, unit : str
        Name in results; as printed; SI unit.
    present : float
        Value as it is. [-]
    limit : float or None
        Last value that passes; None where none passes, or where nothing failed up to `tried_to`. [-]
    check : str
        What fails beyond the limit; empty where nothing does.
    tried_to : float
        Furthest value tried. [-]
    """

    key: str
    title: str
    unit: str
    present: float
    limit: float | None
    check: str
    tried_to: float

    @property
    def is_free(self) -> bool:
        """Whether every value that was tried passes."""
        return not self.check

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json."""
        return {
            "quantity": self.key,
            "title": self.title,
            "unit": self.unit,
            "present": self.present,
            "limit": self.limit,
            "bounded_by": self.check or None,
            "tried_to": self.tried_to,
        }


@dataclass(frozen=True)
class Headroom:
    """What one set can do.

    Attributes
    ----------
    case : Case
        The case of this one set.
    motor, gearhead, drive : str
        Its parts; "direct" without gearhead.
    present : Outcome
        How it stands as it is.
    answers : tuple of HeadroomAnswer
        One per quantity.
    map : PayloadMap or None
        Payload against cycle time, where it was asked for and exists.
    """

    case: Case
    motor: str
    gearhead: str
    drive: str
    present: Outcome
    answers: tuple[HeadroomAnswer, ...]
    map: PayloadMap | None = None

    @property
    def label(self) -> str:
        """Motor, gearhead and drive in one line."""
        return " + ".join([self.motor, self.gearhead, self.drive])

    def of(self, key: str) -> HeadroomAnswer:
        """The answer for one quantity by its key.

        Raises
        ------
        KeyError
            If the set has no such quantity.
        """
        for answer in self.answers:
            if answer.key == key:
                return answer
        raise KeyError(key)

    @property
    def table(self) -> pd.DataFrame:
        """One row per quantity, SI, with the unit beside it."""
        import pandas as pd

        return pd.DataFrame([answer.as_mapping() for answer in self.answers])

    def _repr_html_(self) -> str:
        from html import escape

        table = self.table.to_html(index=False, escape=True, float_format="{:.5g}".format, na_rep="-")
        return f"<p><b>{escape(self.label)}</b></p>{table}"

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json."""
        return {
            "motor": self.motor,
            "gearhead": self.gearhead,
            "drive": self.drive,
            "passes": self.present.is_met,
            "quantities": [answer.as_mapping() for answer in self.answers],
            "payload_against_cycle_time": None if self.map is None else self.map.as_mapping(),
        }


def headroom(
    case: Case,
    *,
    motor: str | None = None,
    gearhead: str | None = None,
    drive: str | None = None,
    with_map: bool = False,
    progress: Callable[[str, float], None] | None = None,
) -> Headroom:
    """Find what one set can do at most.

    Parameters
    ----------
    case : Case
        The case. [-]
    motor, gearhead, drive : str, optional
        Parts by their names; no gearhead is direct drive, no part at all the best set of `compare`.
    with_map : bool
        Work out the map of payload against cycle time too.
    progress : callable, optional
        Called with a stage and the part of it that is done, 0 to 1. [-]

    Returns
    -------
    Headroom
        Limits with the check that bounds each.

    Raises
    ------
    InputError
        If a name is not in its catalog.
    """
    parts = find_set(case, motor, gearhead, drive)
    return headroom_of(cycle_demands(case), parts, with_map=with_map, progress=progress)


def headroom_of(
    cycles: tuple[CycleDemand, ...],
    parts: tuple[int, int, int],
    *,
    with_map: bool,
    progress: Callable[[str, float], None] | None = None,
) -> Headroom:
    """The same for a set by its indices, the cycles known.

    Parameters
    ----------
    cycles : tuple of CycleDemand
        The cycles of the whole case. [-]
    parts : tuple of int
        Motor, gearhead and drive by index into the catalogs. [-]
    with_map : bool
        Work out the map too.
    progress : callable, optional
        Called with a stage and the part of it that is done, 0 to 1. [-]

    Returns
    -------
    Headroom
        Limits with the check that bounds each.
    """
    one = single(whole_case(cycles), *parts)
    resizing = Resizing.known(one, cycles)
    present = resizing.outcome(one)
    wanted = extents(one)
    answers = []
    for number, extent in enumerate(wanted, start=1):
        answers.append(_limit(resizing, extent, present))
        if progress is not None:
            progress("headroom", number / len(wanted))
    heaviest = next((answer.limit for answer in answers if answer.key == "heaviest_payload"), None)
    names = one.motors.names[0], one.gearheads.names[0] or "direct", one.drives.names[0]
    drawn = None
    if with_map:
        stage = None if progress is None else (lambda done: progress("payload against cycle time", done))
        drawn = payload_map(resizing, heaviest, stage)
    return Headroom(one, *names, present, tuple(answers), drawn)


def _limit(resizing: Resizing, extent: Extent, present: Outcome) -> HeadroomAnswer:
    def at(value: float) -> Outcome:
        return resizing.at(extent.changed, value)

    def answered(limit: float | None, check: str, tried_to: float) -> HeadroomAnswer:
        return HeadroomAnswer(extent.key, extent.title, extent.unit, extent.present, limit, check, tried_to)

    bound = extent.outward if present.is_met else extent.inward
    tried = walk(at, extent.present, present, bound, extent.steps)
    if tried.bracket is not None:
        scale = 1.0 if extent.unit == "°C" else 0.0
        edge = narrowed(at, tried.bracket, lambda value: _RESOLUTION * max(abs(value), scale))
        return answered(edge.passing, edge.check, bound)
    if present.is_met:
        return answered(bound if bound == 0.0 else None, "", bound)
    return answered(None, tried.tried[-1][1].check, bound)
