"""The `duty_cycle` table: every row planned as a segment, and how the segments join."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.columns import Column
from actuator_sizing.case.courses import Courses, check_side_tables, pace_durations, paced, process_load
from actuator_sizing.case.model import ORIGINS, STATED, Entry, Segment
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.core.mechanisms import LINEAR
from actuator_sizing.core.motion_laws import Phase, plan_segment
from actuator_sizing.errors import NOTE, WARNING, MotionError
from actuator_sizing.units import from_si, si_unit

_TABLE = "duty_cycle"
NO_COURSES = Courses()
_CONSTANT, _RAMP = "constant speed", "speed ramp"
_BLENDING = ("trapezoid", "jerk-limited", "spline")  # may end at speed, end at rest where nothing is said
_SPEED_TOLERANCE = 1e-6  # of the largest speed of the cycle: typed figures are rounded
_CLOSING_TOLERANCE = 1e-6  # of the travel


def prepare_motion(parsed: ParsedTable, courses: Courses, problems: ProblemList) -> None:
    """Report what is missing in any row, and put the defaults.

    Parameters
    ----------
    parsed : ParsedTable
        The table `duty_cycle` with each cell judged.
    courses : Courses
        Tables beside the duty cycle.
    problems : ProblemList
        Takes what is wrong.
    """
    check_required(parsed)
    assume_defaults(parsed)
    check_side_tables(parsed, courses, problems)


def plan_cycle(
    parsed: ParsedTable,
    rows: NDArray[np.intp],
    coordinate: str,
    problems: ProblemList,
    courses: Courses = NO_COURSES,
) -> tuple[Segment, ...]:
    """Plan every segment of one cycle.

    Parameters
    ----------
    parsed : ParsedTable
        The table `duty_cycle`, prepared.
    rows : ndarray of int, shape (n,)
        Which of its rows make the cycle, in their order. [-]
    coordinate : str
        ``"linear"`` or ``"rotary"``.
    problems : ProblemList
        Takes what cannot be planned and what does not join.
    courses : Courses
        Tables beside the duty cycle, and the pace of this cycle.

    Returns
    -------
    tuple of Segment
        In the order of the rows; incomplete where a problem was reported.
    """
    by_angle = pace_durations(parsed, rows, courses, problems)
    segments: list[Segment] = []
    start_s, position, speed = 0.0, 0.0, _speed_before_first(parsed, rows)
    for index in rows.tolist():
        if _is_bad(parsed, index):
            speed = np.nan  # the rest can be planned, but not joined to this row
            continue
        if np.isnan(speed) and parsed.text("motion_law")[index] in (_CONSTANT, _RAMP):
            # What the row before would hand over is not known: whatever was said here might not be true.
            with np.errstate(divide="ignore", invalid="ignore"):
                own = _own_end_speed(parsed, index)
            speed = np.nan if own is None else own
            continue
        phases = _plan(parsed, index, 0.0 if np.isnan(speed) else speed, courses, problems)
        if phases is None:
            speed = np.nan
            continue
        begin, end = _speed_at_ends(phases)
        if not np.isnan(speed):
            _check_join(parsed, index, speed, begin, phases, problems)
        segment = _segment(parsed, index, phases, start_s)
        segment = replace(segment, process=process_load(parsed, index, courses, segment, position, problems))
        _check_brake(parsed, index, phases, problems)
        segments.append(segment)
        start_s += segment.duration_s
        position += phases[-1].end()[0]
        speed = 0.0 if abs(end) <= _SPEED_TOLERANCE * _largest_speed(phases) else end
    if len(segments) == len(rows) > 0:
        _check_closing(segments, coordinate, problems)
        return paced(tuple(segments), parsed, rows, courses, by_angle, problems)
    return tuple(segments)


def _is_bad(parsed: ParsedTable, index: int) -> bool:
    """Whether a row has no law or a cell that was reported."""
    return not parsed.text("motion_law")[index] or any(bad[index] for bad in parsed.bad.values())


def assume_defaults(parsed: ParsedTable) -> None:
    """Put the default of every number column where nothing is stated."""
    for column in parsed.table.columns:
        if isinstance(column.default, float):
            parsed.assume(column.key, np.ones(len(parsed), dtype=bool), column.default, column.assumed)


def _own_end_speed(parsed: ParsedTable, index: int) -> float | None:
    """Speed in which a row ends by itself; None for a constant speed taken over from before."""
    law = parsed.text("motion_law")[index]
    if law not in (_CONSTANT, _RAMP, *_BLENDING):
        return 0.0
    stated = float(parsed.number("end_speed")[index])
    if np.isfinite(stated):
        return stated
    if law in _BLENDING:
        return 0.0
    if law == _CONSTANT:
        speed = float(parsed.number("displacement")[index] / parsed.number("duration")[index])
        if np.isfinite(speed):
            return speed
    return None


def _speed_before_first(parsed: ParsedTable, rows: NDArray[np.intp]) -> float:
    """Speed at the start of the cycle: the one in which its last row ends; NaN where that row is wrong."""
    with np.errstate(divide="ignore", invalid="ignore"):
        for index in reversed(rows.tolist()):
            if _is_bad(parsed, index):
                return np.nan
            speed = _own_end_speed(parsed, index)
            if speed is not None:
                return speed
    return 0.0


def _plan(
    parsed: ParsedTable, index: int, start_speed: float, courses: Courses, problems: ProblemList
) -> tuple[Phase, ...] | None:
    def given(key: str) -> float | None:
        value = float(parsed.number(key)[index])
        return value if np.isfinite(value) else None

    law = str(parsed.text("motion_law")[index])
    try:
        return plan_segment(
            law,
            start_speed=start_speed,
            displacement=given("displacement"),
            end_speed=given("end_speed"),
            duration_s=given("duration"),
            speed_max=given("maximum_speed"),
            acceleration_max=given("maximum_acceleration"),
            deceleration_max=given("maximum_deceleration"),
            jerk_max=given("maximum_jerk"),
            acceleration_share=given("acceleration_share"),
            deceleration_share=given("deceleration_share"),
            jerk_share=given("jerk_share"),
            amplitude=given("amplitude"),
            frequency_hz=given("frequency"),
            cycles=given("cycles"),
            points=courses.points_of(str(parsed.text("segment")[index])) if law == "spline" else (),
        )
    except MotionError as error:
        column = parsed.table.find(error.column)
        heading, got = error.column, error.got
        if column is not None:
            heading = parsed.heading(column.key)
            if column.is_number and parsed.stated(column.key)[index]:
                got = f"{parsed.shown_cell(column.key, index)} ({error.got} in SI)"
        problems.report(_TABLE, int(parsed.rows[index]), heading, got=got, allowed=error.allowed,
                        remedy=error.remedy)  # fmt: skip
        return None


def _speed_at_ends(phases: tuple[Phase, ...]) -> tuple[float, float]:
    first = phases[0].kinematics(np.array([0.0]))[1]
    last = phases[-1].kinematics(np.array([phases[-1].duration_s]))[1]
    return float(first[0]), float(last[0])


def _largest_speed(phases: tuple[Phase, ...]) -> float:
    """Largest speed at the ends of phases, an estimate good enough for a tolerance. [m/s or rad/s]."""
    speeds = [phase.kinematics(np.array([0.0, 0.5, 1.0]) * phase.duration_s)[1] for phase in phases]
    return float(np.max(np.abs(speeds)))


def _check_join(
    parsed: ParsedTable,
    index: int,
    before: float,
    begin: float,
    phases: tuple[Phase, ...],
    problems: ProblemList,
) -> None:
    scale = max(abs(before), abs(begin), _largest_speed(phases))
    if abs(begin - before) <= _SPEED_TOLERANCE * scale:
        return
    problems.report(
        _TABLE,
        int(parsed.rows[index]),
        parsed.heading("motion_law"),
        got=f"a start at {_speed_text(parsed, begin)} after an end at {_speed_text(parsed, before)}",
        allowed="segments that join without a jump of speed",
        remedy="Put a speed ramp between them, or correct the end speed.",
    )


def _speed_text(parsed: ParsedTable, speed: float) -> str:
    unit = parsed.units.get("end_speed") or parsed.units.get("maximum_speed")
    if unit is not None:
        return f"{from_si(speed, unit):.6g} {unit.spelling}"
    return f"{speed:.6g} (SI)"


def _check_brake(parsed: ParsedTable, index: int, phases: tuple[Phase, ...], problems: ProblemList) -> None:
    if parsed.text("brake_closed")[index] == "yes" and _largest_speed(phases) > 0.0:
        problems.report(_TABLE, int(parsed.rows[index]), parsed.heading("brake_closed"), got="yes while moving",
                        allowed="yes only at standstill",
                        remedy="A holding brake is not for braking: write no, or make it a dwell.")  # fmt: skip


def _segment(parsed: ParsedTable, index: int, phases: tuple[Phase, ...], start_s: float) -> Segment:
    return Segment(
        row=int(parsed.rows[index]),
        name=str(parsed.text("segment")[index]),
        law=str(parsed.text("motion_law")[index]),
        phases=phases,
        start_s=start_s,
        duration_s=float(sum(phase.duration_s for phase in phases)),
        payload=float(parsed.number("payload")[index]),
        process_effort=float(parsed.number("process_force")[index]),
        brake_closed=parsed.text("brake_closed")[index] == "yes",
        note=str(parsed.text("note")[index]),
    )


def _check_closing(segments: list[Segment], coordinate: str, problems: ProblemList) -> None:
    """Say by how much the end of the cycle misses its start."""
    unit = "m" if coordinate == LINEAR else "rad"
    begin, _ = _speed_at_ends(segments[0].phases)
    _, end = _speed_at_ends(segments[-1].phases)
    fastest = max(_largest_speed(segment.phases) for segment in segments)
    if abs(end - begin) > _SPEED_TOLERANCE * fastest:
        problems.report(_TABLE, segments[-1].row, "end speed", got=f"{end:.6g} {unit}/s",
                        allowed=f"the speed of {begin:.6g} {unit}/s at which the cycle starts",
                        remedy="The repeated cycle jumps there; close it with a speed ramp.",
                        severity=WARNING)  # fmt: skip
    moved = [_displacement(segment.phases) for segment in segments]
    gap, travel = sum(moved), max(np.ptp(np.cumsum([0.0, *moved])), 0.0)
    if abs(gap) > _CLOSING_TOLERANCE * travel:
        rotary = coordinate != LINEAR
        shown = f"{gap:.6g} m" if not rotary else f"{np.degrees(gap):.6g}°"
        problems.report(
            _TABLE, segments[-1].row, "displacement",
            got=f"an end {shown} away from the start",
            allowed="a closed cycle" if not rotary else "a closed cycle, or an axis that turns on",
            remedy="The axis walks on with every cycle: right for a conveyor, else add the way back."
            if not rotary
            else "Taken as an axis that turns on by this angle every cycle.",
            severity=NOTE if rotary else WARNING,
        )  # fmt: skip


def _displacement(phases: tuple[Phase, ...]) -> float:
    total = 0.0
    for phase in phases:
        position = phase.kinematics(np.array([0.0, phase.duration_s]))[0]
        total += float(position[1] - position[0])
    return total


def motion_entries(parsed: ParsedTable, coordinate: str) -> list[Entry]:
    """Every value of the duty cycle as entered and as understood."""
    entries = []
    columns = parsed.table.columns[1:]
    for index, name in enumerate(parsed.names):
        for column in columns:
            entry = _entry(parsed, index, str(name), column, coordinate)
            if entry is not None:
                entries.append(entry)
    return entries


def _entry(parsed: ParsedTable, index: int, name: str, column: Column, coordinate: str) -> Entry | None:
    key = column.key
    if key not in parsed.origins or not parsed.origins[key][index]:
        return None
    value = parsed.values[key][index]
    origin = int(parsed.origins[key][index])
    rule = parsed.rules[key].get(index, "") if key in parsed.rules else ""
    return Entry(
        parsed.table.name,
        int(parsed.rows[index]),
        name,
        column.name,
        parsed.shown_cell(key, index) if origin == STATED else "",
        float(value) if column.is_number else str(value),
        si_unit(column.kind_for(coordinate)) if column.is_number else "",
        ORIGINS[origin],
        rule,
        "",
    )
