"""The same case with one thing changed: motion, load, supply, surroundings, transmission.

What levers and headroom try out. The motion changes in planned segments only; a measured cycle stays as recorded.
"""

from __future__ import annotations

from collections.abc import Callable, Collection
from dataclasses import dataclass, fields, replace

import numpy as np

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.phases import Phase, speed_after
from actuator_sizing.core.process_load import TIME
from actuator_sizing.sizing.cycles import CycleDemand

_STIFFNESS = "driven shaft stiffness"


def single(case: Case, motor: int, gearhead: int, drive: int) -> Case:
    """The case with one motor, gearhead and drive only.

    Parameters
    ----------
    case : Case
        The whole case. [-]
    motor, gearhead, drive : int
        The set, by index into the catalogs. [-]

    Returns
    -------
    Case
        With the parameters of one set; the catalogs' other columns go along. [-]
    """
    return replace(
        case,
        motors=case.motors.row(motor),
        gearheads=case.gearheads.row(gearhead),
        drives=case.drives.row(drive),
        motor_parameters=case.motor_parameters.take(slice(motor, motor + 1)),
        gearhead_parameters=case.gearhead_parameters.take(slice(gearhead, gearhead + 1)),
        drive_parameters=case.drive_parameters.take(slice(drive, drive + 1)),
    )


def whole_case(cycles: tuple[CycleDemand, ...]) -> Case:
    """The case that these are all the cycles of."""
    first = cycles[0].case
    if len(cycles) < 2:
        return first
    return replace(first, cycles=tuple(each.cycle for each in cycles))


# -- motion ------------------------------------------------------------------------------------------
def is_planned(case: Case) -> bool:
    """Whether the cycle is planned, so that its times can be changed; a measured one is as it is. [-]"""
    return case.recording is None


def moves(segment: Segment) -> bool:
    """Whether the load moves in a segment. [-]"""
    return any(np.any(phase.kinematics([0.0, 0.4 * phase.duration_s])[1] != 0.0) for phase in segment.phases)


@dataclass(frozen=True)
class Move:
    """Consecutive segments from one standstill to the next."""

    name: str
    segments: tuple[int, ...]
    duration_s: float


def moves_of(case: Case) -> tuple[Move, ...]:
    """Every move of a cycle; one alone where the axis never stands still. [-]"""
    runs: list[list[int]] = []
    open_ = False
    for index, segment in enumerate(case.segments):
        if not moves(segment):
            open_ = False
            continue
        if open_:
            runs[-1].append(index)
        else:
            runs.append([index])
        open_ = speed_after(segment.phases) != 0.0
    begins_moving = bool(runs) and runs[0][0] == 0 and _start_speed(case.segments[0]) != 0.0
    if len(runs) > 1 and open_ and begins_moving:
        runs[0] = [*runs.pop(), *runs[0]]
    return tuple(
        Move(
            case.segments[run[0]].name
            + ("" if len(run) == 1 else f" to {case.segments[run[-1]].name}"),
            tuple(run),
            sum(case.segments[i].duration_s for i in run),
        )
        for run in runs
    )  # fmt: skip


def _start_speed(segment: Segment) -> float:
    return float(segment.phases[0].kinematics(0.0)[1]) if segment.phases else 0.0


def restarted(segments: tuple[Segment, ...]) -> tuple[Segment, ...]:
    """Segments one after the other again, with the durations of their phases."""
    made, start = [], 0.0
    for segment in segments:
        duration = sum(phase.duration_s for phase in segment.phases)
        made.append(replace(segment, start_s=start, duration_s=duration))
        start += duration
    return tuple(made)


def stretched(segment: Segment, factor: float) -> Segment:
    """A segment that takes `factor` times as long; a process load over time goes along."""
    process = segment.process
    if process is not None and process.over == TIME:
        process = replace(process, knots=tuple(t * factor for t in process.knots))
    return replace(
        segment, phases=tuple(phase.scaled(1.0, factor) for phase in segment.phases), process=process
    )


def with_times(case: Case, factor: float, segments: Collection[int]) -> Case:
    """Some segments of a case with one cycle last `factor` times as long, over the same way.

    Parameters
    ----------
    case : Case
        A planned cycle. [-]
    factor : float
        On their duration; positive. [-]
    segments : collection of int
        Their indices. [-]

    Returns
    -------
    Case
        Changed; the other segments follow at once. [-]
    """
    made = (stretched(s, factor) if i in segments else s for i, s in enumerate(case.segments))
    return replace(case, segments=restarted(tuple(made)))


def _where(case: Case, factor: float, chosen: Callable[[Segment], bool]) -> Case:
    """The segments that are chosen, of every cycle, last `factor` times as long."""
    return case.with_segments(
        lambda segments: restarted(tuple(stretched(s, factor) if chosen(s) else s for s in segments))
    )


def every_segment(case: Case) -> tuple[Segment, ...]:
    """The segments of every cycle."""
    return tuple(segment for one in case.by_cycle() for segment in one.segments)


def move_time_s(case: Case) -> float:
    """Time of all moves of every cycle together. [s]"""
    return sum(segment.duration_s for segment in every_segment(case) if moves(segment))


def with_move_time(case: Case, factor: float) -> Case:
    """Every move takes `factor` times as long; dwells stay."""
    return _where(case, factor, moves)


def with_cycle_time(case: Case, factor: float) -> Case:
    """Every cycle takes `factor` times as long, dwells too."""
    return _where(case, factor, lambda segment: True)


def dwell_time_s(case: Case) -> float:
    """Time at standstill in every cycle together. [s]"""
    return sum(segment.duration_s for segment in every_segment(case) if not moves(segment))


def with_dwell_time(case: Case, factor: float) -> Case:
    """Every dwell lasts `factor` times as long; at zero there is none."""
    if factor > 0.0:
        return _where(case, factor, lambda segment: not moves(segment))
    return case.with_segments(lambda segments: restarted(tuple(s for s in segments if moves(s))))


def _longer(segment: Segment, added_s: float) -> Segment:
    end = segment.phases[-1]
    return replace(segment, phases=(*segment.phases[:-1], replace(end, duration_s=end.duration_s + added_s)))


def with_dwell_added(case: Case, added_s: float) -> Case:
    """A dwell more at the end of every cycle; the last dwell lasts longer where there is one."""
    return case.with_segments(lambda segments: _dwelling(segments, added_s))


def _dwelling(segments: tuple[Segment, ...], added_s: float) -> tuple[Segment, ...]:
    last = segments[-1]
    if not moves(last):
        return restarted((*segments[:-1], _longer(last, added_s)))
    pause = replace(
        last, law="dwell", name="added dwell", phases=(Phase(added_s),), brake_closed=False,
        process_effort=0.0, process=None,
    )  # fmt: skip
    return restarted((*segments, pause))


def with_hold(case: Case, after: int, added_s: float) -> Case:
    """The motor holds the load for `added_s` longer after a segment, its brake open.

    Parameters
    ----------
    case : Case
        A planned cycle. [-]
    after : int
        Index of a segment that ends at standstill; a dwell without brake lasts longer itself. [-]
    added_s : float
        How much longer. [s]

    Returns
    -------
    Case
        Changed. [-]
    """
    segments = list(case.segments)
    here = segments[after]
    if not moves(here) and not here.brake_closed:
        segments[after] = _longer(here, added_s)
    else:
        hold = replace(here, law="dwell", name=f"hold after {here.name}", phases=(Phase(added_s),),
                       brake_closed=False, process_effort=0.0, process=None)  # fmt: skip
        segments.insert(after + 1, hold)
    return replace(case, segments=restarted(tuple(segments)))


# -- load --------------------------------------------------------------------------------------------
def payload_unit(case: Case) -> str:
    """SI unit of a payload: kg, or kg·m² where it is an inertia."""
    return "kg" if case.mechanism.carries_mass() else "kg·m²"


def heaviest_payload(case: Case) -> float:
    """Largest payload of every cycle. [kg]"""
    return max(segment.payload for segment in every_segment(case))


def with_payload(case: Case, heaviest: float) -> Case:
    """The heaviest payload becomes `heaviest`, the others in proportion; all alike where there was none."""
    present = heaviest_payload(case)
    return case.with_segments(
        lambda segments: tuple(
            replace(s, payload=s.payload * (heaviest / present) if present > 0.0 else heaviest)
            for s in segments
        )
    )


def friction_fields(case: Case) -> tuple[str, ...]:
    """Fields of the mechanism that state a friction above zero."""
    return tuple(
        f.name
        for f in fields(case.mechanism)  # type: ignore[arg-type]
        if "friction" in f.name and getattr(case.mechanism, f.name) > 0.0
    )


def with_friction(case: Case, factor: float) -> Case:
    """Every friction of guide, bearings and thread times `factor`."""
    less = {name: getattr(case.mechanism, name) * factor for name in friction_fields(case)}
    return replace(case, mechanism=replace(case.mechanism, **less))  # type: ignore[type-var]


# -- supply and surroundings -------------------------------------------------------------------------
def with_bus(case: Case, minimum_v: float) -> Case:
    """Another bus: its lowest voltage as given, nominal and highest in proportion."""
    s = case.surroundings
    factor = minimum_v / s.bus_min_v
    bus = replace(
        s, bus_min_v=minimum_v, bus_nominal_v=s.bus_nominal_v * factor, bus_max_v=s.bus_max_v * factor
    )
    return replace(case, surroundings=bus)


def with_ambient(case: Case, ambient_degc: float) -> Case:
    """Air of another temperature around the motor."""
    return replace(case, surroundings=replace(case.surroundings, ambient_degc=ambient_degc))


# -- the one set of a case ---------------------------------------------------------------------------
def housing_resistance(case: Case) -> float | None:
    """Thermal resistance housing to ambient of the one motor of a case, None where not known. [K/W]"""
    value = float(case.motor_parameters.thermal_resistance_housing_k_w[0])
    return None if np.isnan(value) else value


def with_housing_resistance(case: Case, value_k_w: float) -> Case:
    """Better or worse cooling of the housing; its heat capacity stays, so the time constant follows."""
    m = case.motor_parameters
    kept = m.thermal_resistance_housing_k_w / value_k_w
    cooled = replace(
        m,
        thermal_resistance_housing_k_w=np.array([value_k_w]),
        housing_time_constant_s=m.housing_time_constant_s / kept,
    )
    return replace(case, motor_parameters=cooled)


def gearhead_ratio(case: Case) -> float | None:
    """Ratio of the one gearhead of a case, None for direct drive. [-]"""
    g = case.gearhead_parameters
    return None if g.is_direct[0] else float(g.ratio[0])


def with_ratio(case: Case, ratio: float) -> Case:
    """Another ratio of the gearhead, all else of it equal."""
    return replace(case, gearhead_parameters=replace(case.gearhead_parameters, ratio=np.array([ratio])))


def stiffness_at_shaft(case: Case) -> float | None:
    """Stiffness of gearhead and driven shaft in series, None where not known or not asked for. [N·m/rad]"""
    wishes = ("settling band", "allowed following error", "required speed bandwidth")
    if case.mechanism.drives_linear_motor or not any(_number(case, wish) is not None for wish in wishes):
        return None
    own = None if case.gearhead_parameters.is_direct[0] else case.gearhead_parameters.stiffness_nm_per_rad[0]
    shaft = _number(case, _STIFFNESS)
    if own is not None and np.isnan(own):
        return None
    compliance = sum(1.0 / part for part in (own, shaft) if part is not None)
    return 1.0 / float(compliance) if compliance > 0.0 else None


def with_stiffness(case: Case, value_nm_per_rad: float) -> Case:
    """Gearhead and driven shaft stiffer in proportion, until both in series have the stiffness given."""
    present = stiffness_at_shaft(case)
    assert present is not None, "only asked for where a stiffness is known"
    factor = value_nm_per_rad / present
    g, shaft = case.gearhead_parameters, _number(case, _STIFFNESS)
    options = dict(case.options) if shaft is None else {**case.options, _STIFFNESS: shaft * factor}
    stiffer = replace(g, stiffness_nm_per_rad=g.stiffness_nm_per_rad * factor)
    return replace(case, gearhead_parameters=stiffer, options=options)


def _number(case: Case, option: str) -> float | None:
    value = case.options.get(option)
    return float(value) if isinstance(value, int | float) and not np.isnan(value) else None
