"""How far one set can go: every quantity that is driven to its limit, declared once."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.phases import speed_after
from actuator_sizing.sizing import case_changes as change
from actuator_sizing.sizing.demand import build_demand

#: Parts of the way to the furthest value at which the set is tried.
_EVEN = (0.02, 0.06, 0.15, 0.35, 0.65, 1.0)
_WIDE = (1e-4, 1e-3, 1e-2, 0.1, 1.0)

FASTEST, SLOWEST = 0.02, 4.0  # times the present time
_HEAVIEST = 20.0  # times the present payload, or the moving mass where there is none
_HOTTEST_K, _COLDEST_DEGC = 150.0, -40.0  # over the present ambient
_LONGEST_HOLD_S = 86_400.0
_LONGEST_DWELL = 10.0  # times the present dwell


@dataclass(frozen=True)
class Extent:
    """One quantity of one case of a single set.

    Attributes
    ----------
    key, title, unit : str
        Name in results; as printed; SI unit.
    present : float
        Value as it is, in that unit. [-]
    outward, inward : float
        Furthest values tried where the set passes as it is, and where it fails. [-]
    changed : callable
        (case of one set, value) → the case with that value.
    steps : tuple of float
        Parts of the way outwards that are tried. [-]
    """

    key: str
    title: str
    unit: str
    present: float
    outward: float
    inward: float
    changed: Callable[[Case, float], Case]
    steps: tuple[float, ...] = _EVEN


def extents(case: Case) -> tuple[Extent, ...]:
    """Every quantity that the one set of a case has.

    Parameters
    ----------
    case : Case
        A case of one set. [-]

    Returns
    -------
    tuple of Extent
        A measured cycle has only the ambient: its motion is as it was recorded.
    """
    ambient = case.surroundings.ambient_degc
    made = [
        Extent(
            "hottest_ambient", "hottest ambient", "°C", ambient, ambient + _HOTTEST_K, _COLDEST_DEGC,
            change.with_ambient,
        )
    ]  # fmt: skip
    if change.is_planned(case):
        made = [*_times(case), *_payload(case), *made, *_hold(case)]
    return tuple(made)


def _times(case: Case) -> Iterator[Extent]:
    if change.move_time_s(case) == 0.0:
        return
    cycle = case.cycle_duration_s
    yield Extent(
        "fastest_cycle", "fastest cycle, moves and dwells in proportion", "s", cycle, FASTEST * cycle,
        SLOWEST * cycle, lambda one, value: change.with_cycle_time(one, value / cycle),
    )  # fmt: skip
    if len(case.by_cycle()) == 1:
        for number, move in enumerate(change.moves_of(case), start=1):
            yield _move(number, move)
    dwell = change.dwell_time_s(case)
    if dwell > 0.0:
        yield Extent(
            "shortest_dwell", "shortest time at standstill, every dwell in proportion", "s", dwell, 0.0,
            _LONGEST_DWELL * dwell, lambda one, value: change.with_dwell_time(one, value / dwell),
        )  # fmt: skip


def _move(number: int, move: change.Move) -> Extent:
    def changed(case: Case, value: float) -> Case:
        return change.with_times(case, value / move.duration_s, move.segments)

    return Extent(
        f"fastest_move_{number}", f"fastest move '{move.name}' alone", "s", move.duration_s,
        FASTEST * move.duration_s, SLOWEST * move.duration_s, changed,
    )  # fmt: skip


def _payload(case: Case) -> Iterator[Extent]:
    """A payload that no effort depends on would have no limit."""
    present = change.heaviest_payload(case)
    reference = present or _own_load(case)
    if reference <= 0.0:
        return
    yield Extent(
        "heaviest_payload", "heaviest payload, the others in proportion", change.payload_unit(case), present,
        _HEAVIEST * reference, 0.0, change.with_payload,
    )  # fmt: skip


def _own_load(case: Case) -> float:
    """Mass or inertia of the axis itself, in the unit of a payload; zero where it has none."""
    field = case.mechanism.load_parts_field
    value = getattr(case.mechanism, field, 0.0) if field else 0.0
    return float(value) if np.isfinite(value) else 0.0


def _hold(case: Case) -> Iterator[Extent]:
    """Holding the load by the motor at the standstill that takes the most torque, of one cycle."""
    if len(case.by_cycle()) > 1:
        return
    torque = {
        i: _holding_torque(case, i) for i, s in enumerate(case.segments) if speed_after(s.phases) == 0.0
    }
    if not torque or max(torque.values()) <= 0.0:
        return
    most = max(torque.values())
    alike = [i for i, value in torque.items() if value >= most * (1.0 - 1e-9)]
    after = next((i for i in alike if _holds(case.segments[i])), alike[0])
    segment = case.segments[after]
    holds = _holds(segment)
    present = segment.duration_s if holds else 0.0

    def changed(one: Case, value: float) -> Case:
        return change.with_hold(one, after, value - present) if value != present else one

    where = f"'{segment.name}'" if holds else f"after '{segment.name}'"
    yield Extent(
        "longest_hold", f"longest hold by the motor {where}, once a cycle", "s", present, _LONGEST_HOLD_S,
        0.05 * present, changed, _WIDE,
    )  # fmt: skip


def _holds(segment: Segment) -> bool:
    return not change.moves(segment) and not segment.brake_closed


def _holding_torque(case: Case, after: int) -> float:
    """Torque at the driven shaft while the motor holds after a segment. [N·m]"""
    longer = change.with_hold(case, after, 1.0)
    demand = build_demand(longer)
    index = after if len(longer.segments) == len(case.segments) else after + 1
    mine = demand.segment == index
    return float(np.max(np.abs(demand.shaft_torque[mine]))) if mine.any() else 0.0
