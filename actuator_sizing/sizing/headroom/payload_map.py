"""Payload against cycle time: for which of both together a set passes, and what bounds it."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.case.model import Case
from actuator_sizing.sizing import case_changes as change
from actuator_sizing.sizing.edge_search import narrowed, walk
from actuator_sizing.sizing.headroom.declared import FASTEST, SLOWEST
from actuator_sizing.sizing.resizing import Outcome, Resizing

if TYPE_CHECKING:
    import pandas as pd

_ROWS = 10
_WIDER = 1.15  # of the heaviest payload: how far the map goes beyond
_RESOLUTION = 2e-4  # of a time


@dataclass(frozen=True)
class MapRow:
    """The cycle times at which a set passes with one payload; None where it passes at none, or has no limit.

    Attributes
    ----------
    payload : float
        Heaviest payload of the cycle, in kg or kg·m². [-]
    shortest_s, longest_s : float or None
        Ends of the times at which every check passes. [s]
    shortest_by, longest_by : str
        Key of the check beyond each end; without a passing time, what fails at the slowest.
    """

    payload: float
    shortest_s: float | None
    shortest_by: str
    longest_s: float | None
    longest_by: str


@dataclass(frozen=True)
class PayloadMap:
    """The map of one set: one row per payload.

    Attributes
    ----------
    rows : tuple of MapRow
        Payload ascending.
    payload_unit : str
        "kg" or "kg·m²".
    present_payload : float
        Heaviest payload as it is, in that unit. [-]
    present_s, slowest_s : float
        Cycle time as it is, and the longest that was tried. [s]
    """

    rows: tuple[MapRow, ...]
    payload_unit: str
    present_payload: float
    present_s: float
    slowest_s: float

    @property
    def table(self) -> pd.DataFrame:
        """One row per payload, SI."""
        import pandas as pd

        return pd.DataFrame([asdict(row) for row in self.rows])

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json."""
        return {
            "payload_unit": self.payload_unit,
            "present_payload": self.present_payload,
            "present_cycle_s": self.present_s,
            "slowest_cycle_tried_s": self.slowest_s,
            "rows": [asdict(row) for row in self.rows],
        }


def payload_map(
    resizing: Resizing,
    heaviest: float | None,
    progress: Callable[[float], None] | None = None,
) -> PayloadMap | None:
    """Find the cycle times at which a set passes, payload by payload.

    Parameters
    ----------
    resizing : Resizing
        The one set of a case. [-]
    heaviest : float or None
        Heaviest payload at the present cycle time, where that is known, in kg or kg·m². [-]
    progress : callable, optional
        Called with the part done, 0 to 1. [-]

    Returns
    -------
    PayloadMap or None
        None for a measured cycle, or one without moves.
    """
    case = resizing.case
    if not change.is_planned(case) or change.move_time_s(case) == 0.0:
        return None
    present = change.heaviest_payload(case)
    top = _WIDER * max(present, heaviest or 0.0)
    if top <= 0.0:
        return None
    # The present payload is a row of its own.
    payloads = sorted({*np.linspace(0.0, top, _ROWS).tolist(), present})
    rows, guess = [], case.cycle_duration_s
    for number, payload in enumerate(payloads, start=1):
        row = _row(resizing, payload, guess)
        rows.append(row)
        guess = row.shortest_s or guess
        if progress is not None:
            progress(number / len(payloads))
    slowest = SLOWEST * case.cycle_duration_s
    return PayloadMap(tuple(rows), change.payload_unit(case), present, case.cycle_duration_s, slowest)


def _row(resizing: Resizing, payload: float, guess_s: float) -> MapRow:
    cycle = resizing.case.cycle_duration_s
    loaded = change.with_payload(resizing.case, payload)
    slowest = SLOWEST * cycle

    def at(time_s: float) -> Outcome:
        return resizing.outcome(change.with_cycle_time(loaded, time_s / cycle))

    def tolerance(time_s: float) -> float:
        return _RESOLUTION * time_s

    start = at(guess_s)
    tried = walk(at, guess_s, start, FASTEST * cycle if start.is_met else slowest)
    if tried.bracket is None:
        if start.is_met:
            return MapRow(payload, None, "", None, "")
        return MapRow(payload, None, tried.tried[-1][1].check, None, tried.tried[-1][1].check)
    shortest = narrowed(at, tried.bracket, tolerance)
    beyond = walk(at, shortest.passing, shortest.outcome, slowest)
    if beyond.bracket is None:
        return MapRow(payload, shortest.passing, shortest.check, None, "")
    longest = narrowed(at, beyond.bracket, tolerance)
    return MapRow(payload, shortest.passing, shortest.check, longest.passing, longest.check)


def changed_case(case: Case, payload: float, cycle_s: float) -> Case:
    """The case at one point of the map.

    Parameters
    ----------
    case : Case
        A planned cycle. [-]
    payload : float
        Heaviest payload, in kg or kg·m². [-]
    cycle_s : float
        Cycle time. [s]

    Returns
    -------
    Case
        Changed. [-]
    """
    return change.with_cycle_time(change.with_payload(case, payload), cycle_s / case.cycle_duration_s)
