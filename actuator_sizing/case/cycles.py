"""Named cycles: rows of the duty cycle and duty types grouped by name, and how each cycle runs."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.columns import fold
from actuator_sizing.case.courses import Courses
from actuator_sizing.case.duty_types import understand_duty_types
from actuator_sizing.case.model import ONCE_WARM, Cycle
from actuator_sizing.case.motion import assume_defaults, plan_cycle, prepare_motion
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList, shown

_ROUNDING = 1e-6  # by which typed shares may exceed the whole


def understand_cycles(
    tables: Mapping[str, ParsedTable], coordinate: str, problems: ProblemList, courses: Courses
) -> tuple[Cycle, ...]:
    """Plan every cycle of a case.

    Parameters
    ----------
    tables : mapping of str to ParsedTable
        Every table of the case, each cell judged.
    coordinate : str
        ``"linear"`` or ``"rotary"``: how the motion is stated.
    problems : ProblemList
        Takes what is wrong.
    courses : Courses
        Tables beside the duty cycle, and the pace of the axis.

    Returns
    -------
    tuple of Cycle
        In the order in which they are first named; a case that names none has one without a name.
    """
    listed = tables.get("cycles")
    if listed is not None:
        check_required(listed)
    paces = _paces(listed, courses)
    made: list[Cycle] = []
    motion, types = tables.get("duty_cycle"), tables.get("duty_types")
    if motion is not None:
        prepare_motion(motion, courses, problems)
        for name, rows in _groups(motion, types is not None, problems):
            segments = plan_cycle(motion, rows, coordinate, problems, paces.get(fold(name), courses))
            made.append(Cycle(name, segments))
    if types is not None:
        made += understand_duty_types(types, {fold(cycle.name) for cycle in made}, coordinate, problems)
    return _as_listed(tuple(made), listed, problems)


def _groups(parsed: ParsedTable, others: bool, problems: ProblemList) -> list[tuple[str, NDArray[np.intp]]]:
    """Rows of each cycle by its name; an empty cell means the cycle of the row above."""
    groups: dict[str, tuple[str, list[int]]] = {}
    name = ""
    for index, stated in enumerate(parsed.text("cycle")):
        name = str(stated) or name
        groups.setdefault(fold(name), (name, []))[1].append(index)
    if (len(groups) > 1 or others) and "" in groups:
        problems.report("duty_cycle", int(parsed.rows[0]), parsed.heading("cycle"), got="an empty cell",
                        allowed="the name of a cycle, since there are several",
                        remedy="Name the cycle that this row belongs to.")  # fmt: skip
    return [(name, np.array(rows, dtype=np.intp)) for name, rows in groups.values()]


def _paces(listed: ParsedTable | None, courses: Courses) -> dict[str, Courses]:
    """Side tables with the pace of each cycle that states one."""
    if listed is None:
        return {}
    pace = listed.number("cycles_per_minute")
    return {
        fold(str(name)): replace(
            courses, cycle_s=60.0 / pace[i], pace_table="cycles", pace_row=int(listed.rows[i])
        )
        for i, name in enumerate(listed.text("cycle"))
        if np.isfinite(pace[i])
    }


def _as_listed(
    made: tuple[Cycle, ...], listed: ParsedTable | None, problems: ProblemList
) -> tuple[Cycle, ...]:
    """The cycles with what the table `cycles` says of them."""
    if listed is None:
        return made
    known = {fold(cycle.name): cycle for cycle in made if cycle.name}
    assume_defaults(listed)
    names = [fold(str(name)) for name in listed.text("cycle")]
    stray = np.array([bool(name) and name not in known for name in names], dtype=bool)
    problems.report_rows(
        "cycles", listed.rows, listed.heading("cycle"), stray,
        got=lambda i: shown(listed.text("cycle")[i]),
        allowed=f"the name of a cycle: {', '.join(c.name for c in known.values()) or 'none is named yet'}",
        remedy="Correct the name, or name the rows of the duty cycle in its column 'cycle'.",
    )  # fmt: skip
    share, often = listed.number("share_of_time"), listed.number("repetitions_per_hour")
    problems.report_rows(
        "cycles", listed.rows, listed.heading("share_of_time"), np.isfinite(share) & np.isfinite(often),
        got="a share and repetitions per hour", allowed="one of them", remedy="Clear one of the cells.",
    )  # fmt: skip
    for index, name in enumerate(names):
        if name not in known or any(bad[index] for bad in listed.bad.values()):
            continue
        cycle = known[name]
        given = float(share[index])
        if np.isnan(given) and np.isfinite(often[index]):
            given = float(often[index]) * cycle.duration_s / 3600.0
        known[name] = replace(
            cycle,
            runs=str(listed.text("runs")[index]) or cycle.runs,
            share=cycle.share if np.isnan(given) else given,
            row=int(listed.rows[index]),
        )
    answer = tuple(known.get(fold(cycle.name), cycle) for cycle in made)
    _check_shares(answer, listed, problems)
    warm = next((cycle for cycle in answer if cycle.runs == ONCE_WARM), None)
    if warm is not None and not any(cycle.repeats for cycle in answer):
        problems.report("cycles", warm.row, "runs", got=f"'{ONCE_WARM}' where no cycle repeats",
                        allowed="a cycle that repeats, from whose temperatures this one starts",
                        remedy="Choose 'once from cold', or let another cycle repeat.")  # fmt: skip
    return answer


def _check_shares(cycles: tuple[Cycle, ...], listed: ParsedTable, problems: ProblemList) -> None:
    """A mix needs the share of every repeating cycle, and no more than the whole time."""
    shares = np.array([cycle.share for cycle in cycles])
    if np.isnan(shares).all():
        return
    row = int(listed.rows[0])
    missing = [cycle.name for cycle in cycles if cycle.repeats and np.isnan(cycle.share)]
    if missing:
        problems.report("cycles", row, "share of time", got=f"no share for {', '.join(map(shown, missing))}",
                        allowed="a share or repetitions per hour for every cycle that repeats, or for none",
                        remedy="Fill in the cells; 0 for a cycle that hardly ever runs.")  # fmt: skip
    total = float(np.nansum(shares))
    if total > 1.0 + _ROUNDING:
        problems.report("cycles", row, "share of time", got=f"shares that add up to {100.0 * total:.6g} %",
                        allowed="at most 100 %; what is left over is rest",
                        remedy="Lower the shares, or the repetitions per hour times the durations.")  # fmt: skip
