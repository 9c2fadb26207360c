"""What a segment takes from elsewhere: points of a spline, a process load over its course, the pace of a cycle."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.columns import fold
from actuator_sizing.case.model import Segment
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.parsing import report_empty_cells
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.core.process_load import POSITION, TIME, ProcessLoad

_TABLE = "duty_cycle"
_LIMITS = ("maximum_speed", "maximum_acceleration", "maximum_deceleration", "maximum_jerk")
_TYPED = 1e-6  # relative difference below which two statements agree: typed figures are rounded


@dataclass(frozen=True)
class Courses:
    """Tables beside the duty cycle, and its pace.

    Attributes
    ----------
    points, process : ParsedTable or None
        The optional tables.
    cycle_s : float
        Duration of the cycle that 'cycles per minute' asks for; NaN where nothing is said.
    pace_table, pace_row : str and int or None
        Where that was said.
    """

    points: ParsedTable | None = None
    process: ParsedTable | None = None
    cycle_s: float = float("nan")
    pace_table: str = "axis"
    pace_row: int | None = None

    def rows_of(self, parsed: ParsedTable | None, segment: str) -> NDArray[np.intp]:
        """Rows of a side table that name a segment."""
        if parsed is None:
            return np.empty(0, dtype=np.intp)
        wanted = fold(segment)
        return np.flatnonzero([fold(str(name)) == wanted for name in parsed.text("segment")])

    def points_of(self, segment: str) -> tuple[tuple[float, float], ...]:
        """Points of a spline, as they stand in the table."""
        rows = self.rows_of(self.points, segment)
        if self.points is None or not len(rows):
            return ()
        t, angle = (self.points.number(key)[rows] for key in ("time", "master_angle"))
        t = np.where(np.isnan(t), angle / (2.0 * np.pi) * self.cycle_s, t)
        return tuple(zip(t.tolist(), self.points.number("position")[rows].tolist(), strict=True))

    def turn_of(self, segment: str) -> float:
        """Turn of the master shaft that the points of a spline take; NaN where they are stated over time."""
        rows = self.rows_of(self.points, segment)
        return float(self.points.number("master_angle")[rows[-1]]) if self.points and len(rows) else np.nan


def check_side_tables(duty_cycle: ParsedTable, courses: Courses, problems: ProblemList) -> None:
    """Report empty cells of the side tables and names that no segment bears.

    Parameters
    ----------
    duty_cycle : ParsedTable
        The segments.
    courses : Courses
        The side tables.
    problems : ProblemList
        Takes what is wrong.
    """
    known = {fold(str(name)) for name in duty_cycle.text("segment")}
    laws = {
        fold(str(name)): str(law)
        for name, law in zip(duty_cycle.text("segment"), duty_cycle.text("motion_law"), strict=True)
    }
    for table in (courses.points, courses.process):
        if table is None:
            continue
        for column in table.table.columns:
            if column.required:
                report_empty_cells(table, column)
        if table is courses.points:
            _check_point_instants(table, problems)
        names = [fold(str(name)) for name in table.text("segment")]
        stray = np.array([bool(name) and name not in known for name in names], dtype=bool)
        if table is courses.points:
            stray |= np.array([laws.get(name, "spline") != "spline" for name in names], dtype=bool)
        problems.report_rows(
            table.table.name,
            table.rows,
            table.heading("segment"),
            stray,
            got=lambda i, table=table: shown(table.text("segment")[i]),  # type: ignore[misc]
            allowed="the name of a segment of the duty cycle"
            + (" whose motion law is 'spline'" if table is courses.points else ""),
            remedy="Correct the name, or remove the row.",
        )


def _check_point_instants(points: ParsedTable, problems: ProblemList) -> None:
    """Each point of a spline has a time or a master angle, all points of a segment the same of the two."""
    has_time, has_angle = (
        np.isfinite(points.number(key)) | points.is_bad(key) for key in ("time", "master_angle")
    )
    problems.report_rows("points", points.rows, points.heading("time"), has_time == has_angle,
                         got=lambda i: "a time and a master angle" if has_time[i]
                         else "neither time nor master angle",
                         allowed="one of the two", remedy="Fill in one of the cells.")  # fmt: skip
    first: dict[str, int] = {}
    mixed = np.zeros(len(points), dtype=bool)
    for index, name in enumerate(points.text("segment")):
        mixed[index] = has_time[index] != has_time[first.setdefault(fold(str(name)), index)]
    problems.report_rows("points", points.rows, points.heading("time"), mixed & (has_time != has_angle),
                         got="a time after master angles, or the other way round",
                         allowed="the same for every point of a segment",
                         remedy="Use one of the two columns for the segment.")  # fmt: skip


def pace_durations(
    parsed: ParsedTable, rows: NDArray[np.intp], courses: Courses, problems: ProblemList
) -> bool:
    """Turn master angles into durations; says whether the rows give the duration of the cycle themselves.

    Parameters
    ----------
    parsed : ParsedTable
        The duty cycle; its durations are filled in.
    rows : ndarray of int
        Rows of the cycle. [-]
    courses : Courses
        The pace.
    problems : ProblemList
        Takes angles without a pace, or that do not make one turn.
    """
    turns = np.full(len(parsed), np.nan)
    for index in rows[parsed.word_is("motion_law", "spline")[rows]].tolist():
        turns[index] = courses.turn_of(str(parsed.text("segment")[index]))
    splines = np.isfinite(turns)
    parsed.derive("master_angle", splines, turns, "master angle of the last point")
    angles = parsed.number("master_angle")
    used = np.zeros(len(parsed), dtype=bool)
    used[rows] = np.isfinite(angles[rows])
    if not used.any():
        return False
    row = int(parsed.rows[int(np.argmax(used))])
    heading = parsed.heading("master_angle")
    if not np.isfinite(courses.cycle_s):
        problems.report(_TABLE, row, heading, got="a master angle without pace",
                        allowed="'cycles per minute' in the axis table",
                        remedy="State how many turns the master makes, or give durations.")  # fmt: skip
        return True
    both = used & np.isfinite(parsed.number("duration"))
    problems.report_rows(_TABLE, parsed.rows, heading, both, got=lambda i: "a master angle and a duration",
                         allowed="one of them", remedy="Clear one of the cells.")  # fmt: skip
    turned = float(angles[rows].sum())
    if used[rows].all() and abs(turned - 2.0 * np.pi) > _TYPED * 2.0 * np.pi:
        problems.report(_TABLE, int(parsed.rows[rows[-1]]), heading, got=f"{np.degrees(turned):.6g}° in all",
                        allowed="360° of the master shaft", remedy="Correct the angles.")  # fmt: skip
    parsed.derive("duration", used & ~both & ~splines, angles / (2.0 * np.pi) * courses.cycle_s,
                  "master angle / 360° of the time of one cycle")  # fmt: skip
    return True


def paced(
    segments: tuple[Segment, ...],
    parsed: ParsedTable,
    rows: NDArray[np.intp],
    courses: Courses,
    by_angle: bool,
    problems: ProblemList,
) -> tuple[Segment, ...]:
    """Stretch the cycle evenly to the pace; check that no limit forbids it.

    Parameters
    ----------
    segments : tuple of Segment
        As the rows give them.
    parsed : ParsedTable
        The duty cycle.
    rows : ndarray of int
        Rows of the cycle. [-]
    courses : Courses
        The pace.
    by_angle : bool
        Whether the rows already follow the pace by their master angles.
    problems : ProblemList
        Takes a pace that cannot be kept.
    """
    total = sum(segment.duration_s for segment in segments)
    if not np.isfinite(courses.cycle_s) or not segments:
        return segments
    factor = courses.cycle_s / total
    if abs(factor - 1.0) <= _TYPED or np.isfinite(parsed.number("master_angle")[rows]).all():
        return segments
    limited = [key for key in _LIMITS if np.isfinite(parsed.number(key)[rows]).any()]
    if by_angle or (factor < 1.0 and limited):
        problems.report(courses.pace_table, courses.pace_row, "cycles per minute",
                        got=f"a cycle of {courses.cycle_s:.6g} s",
                        allowed=f"{total:.6g} s, which the rows take" if by_angle
                        else f"at least {total:.6g} s within the limits of the duty cycle",
                        remedy="Give every segment a master angle." if by_angle
                        else "Lower the pace, or raise the limits.")  # fmt: skip
        return segments
    scaled, start = [], 0.0
    for segment in segments:
        phases = tuple(phase.scaled(1.0, factor) for phase in segment.phases)
        load = segment.process
        if load is not None and load.over == TIME:
            load = replace(load, knots=tuple(factor * knot for knot in load.knots))
        duration = segment.duration_s * factor
        scaled.append(replace(segment, phases=phases, start_s=start, duration_s=duration, process=load))
        start += duration
    return tuple(scaled)


def process_load(
    parsed: ParsedTable, index: int, courses: Courses, segment: Segment, origin: float, problems: ProblemList
) -> ProcessLoad | None:
    """Process load of one segment; None where it is constant and keeps its sign.

    Parameters
    ----------
    parsed : ParsedTable
        The duty cycle.
    index : int
        Row of the segment. [-]
    courses : Courses
        With the table `process`.
    segment : Segment
        As planned.
    origin : float
        Position at which the segment starts, from the start of the cycle. [m or rad]
    problems : ProblemList
        Takes contradictions, with the remedy.
    """
    reverses = parsed.text("process_reverses")[index] == "yes"
    rows = courses.rows_of(courses.process, segment.name)
    positions = _positions(segment, origin)
    if courses.process is not None and len(rows):
        return _tabulated(courses.process, rows, segment, positions, reverses, problems)
    begin = segment.process_effort
    end = float(parsed.number("process_force_end")[index])
    window = tuple(float(parsed.number(key)[index]) for key in ("process_from", "process_to"))
    over = str(parsed.text("process_over")[index]) or (TIME if np.isnan(window).all() else POSITION)
    number = int(parsed.rows[index])
    if not np.isnan(window).all():
        if np.isnan(window).any() or window[0] >= window[1] or over == TIME:
            problems.report(_TABLE, number, parsed.heading("process_from"),
                            got="half a window" if np.isnan(window).any() else "a window without width"
                            if window[0] >= window[1] else "a window of position for a load over time",
                            allowed="'process from' below 'process to', both positions",
                            remedy="Fill in both cells, the smaller one first.")  # fmt: skip
            return None
        if positions[1] <= window[0] or positions[0] >= window[1]:
            problems.report(_TABLE, number, parsed.heading("process_from"), got="a window that the segment "
                            "never enters",
                            allowed=f"a part of {positions[0]:.6g} to {positions[1]:.6g} (SI, from the start "
                            "of the cycle)",
                            remedy="Correct the window; positions count from the start of the cycle.")  # fmt: skip
            return None
        last = begin if np.isnan(end) else end
        return ProcessLoad(POSITION, window, (begin, last), reverses)
    if np.isnan(end) or end == begin:
        return ProcessLoad(TIME, (0.0, segment.duration_s), (begin, begin), True) if reverses else None
    if over == TIME:
        return ProcessLoad(TIME, (0.0, segment.duration_s), (begin, end), reverses)
    start, stop = origin, origin + _travel(segment)
    if start == stop or positions != (min(start, stop), max(start, stop)):
        problems.report(_TABLE, number, parsed.heading("process_over"), got="a segment that does not go one way",
                        allowed="a segment from one position to another, without turning back",
                        remedy="State a window ('process from', 'process to') or use the table "
                        "'process'.")  # fmt: skip
        return None
    ends = (begin, end) if start < stop else (end, begin)
    return ProcessLoad(POSITION, positions, ends, reverses)


def _tabulated(
    table: ParsedTable,
    rows: NDArray[np.intp],
    segment: Segment,
    positions: tuple[float, float],
    reverses: bool,
    problems: ProblemList,
) -> ProcessLoad | None:
    columns = {key: table.number(key)[rows] for key in (TIME, POSITION)}
    used = [key for key, values in columns.items() if np.isfinite(values).all()]
    effort = table.number("process_force")[rows]
    first = int(table.rows[rows[0]])
    if len(used) != 1 or any(np.isfinite(columns[key]).any() for key in columns if key not in used):
        problems.report("process", first, "time", got="time or position is missing, or both are there",
                        allowed=f"for '{segment.name}', either a time or a position in every row",
                        remedy="Use one of the two columns for all rows of a segment.")  # fmt: skip
        return None
    over = used[0]
    at = columns[over]
    falling = np.flatnonzero(np.diff(at) < 0.0)
    if len(falling) or len(at) < 2:
        row = int(table.rows[rows[falling[0] + 1]]) if len(falling) else first
        problems.report("process", row, over, got=f"{at[falling[0] + 1]:.6g} (SI) after "
                        f"{at[falling[0]]:.6g}" if len(falling) else "a single row",
                        allowed="at least two rows in rising order; two alike make a jump",
                        remedy="Sort the rows of the segment.")  # fmt: skip
        return None
    needed = (0.0, segment.duration_s) if over == TIME else positions
    slack = _TYPED * (needed[1] - needed[0])
    if at[0] > needed[0] + slack or at[-1] < needed[1] - slack:
        problems.report("process", first, over, got=f"values from {at[0]:.6g} to {at[-1]:.6g} (SI)",
                        allowed=f"a table that covers {needed[0]:.6g} to {needed[1]:.6g} (SI), where "
                        f"'{segment.name}' is", remedy="Add rows; nothing is extrapolated.")  # fmt: skip
        return None
    at = at.copy()
    at[0], at[-1] = min(at[0], needed[0]), max(at[-1], needed[1])
    return ProcessLoad(over, tuple(at.tolist()), tuple(effort.tolist()), reverses)


def _travel(segment: Segment) -> float:
    return segment.phases[-1].end()[0] if segment.phases else 0.0


def _positions(segment: Segment, origin: float) -> tuple[float, float]:
    """Lowest and highest position of a segment from the start of the cycle, at rest one and the same."""
    from actuator_sizing.core.phases import position_range

    low, high = position_range(segment.phases)
    return origin + low, origin + high


def side_tables(tables: Mapping[str, ParsedTable], cycles_per_minute: float) -> Courses:
    """Gather what stands beside the duty cycle.

    Parameters
    ----------
    tables : mapping of str to ParsedTable
        Every table of the case.
    cycles_per_minute : float
        Pace, NaN where nothing is said. [-]
    """
    pace = 60.0 / cycles_per_minute if cycles_per_minute > 0.0 else float("nan")
    return Courses(tables.get("points"), tables.get("process"), pace)
