"""The `duty_types` table: duty types of IEC 60034-1 made into cycles.

The names of the types and the factor of S3 and S6 are those of the standard; that starting and braking count as
time under load in S4 and S5, and the cycle of 10 min where nothing else is said, are quoted from memory.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace

import numpy as np

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.columns import fold
from actuator_sizing.case.model import REPEATS, SHORT_TIME, Cycle, Segment
from actuator_sizing.case.motion import assume_defaults
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.core.duty_types import loaded_time, usual_times
from actuator_sizing.core.mechanisms import ROTARY, Mechanism
from actuator_sizing.core.motion_laws import Phase
from actuator_sizing.core.permissible_load import rest_time
from actuator_sizing.core.phases import constant_jerk_phases
from actuator_sizing.errors import NOTE

_TABLE = "duty_types"
_CONTINUOUS_S = 60.0  # of a constant load on a straight axis: any time gives the same state
_MOST_TURNS = 20  # that are worked out one by one where the ratio changes within a turn
#: Times that each type takes beside speed and load.
USED_TIMES = {
    "S1": (),
    "S2": ("operating_time", "starting_time", "braking_time"),
    "S3": ("operating_time", "rest_time", "cyclic_duration_factor"),
    "S4": ("operating_time", "rest_time", "cyclic_duration_factor", "starting_time"),
    "S5": ("operating_time", "rest_time", "cyclic_duration_factor", "starting_time", "braking_time"),
    "S6": ("operating_time", "rest_time", "cyclic_duration_factor"),
    "S8": ("operating_time", "starting_time"),
    "S10": ("share_of_time",),
}
ALL_TIMES = tuple(dict.fromkeys(key for keys in USED_TIMES.values() for key in keys))
_NEEDS = {
    "S2": ("operating_time",),
    "S4": ("starting_time",),
    "S5": ("starting_time", "braking_time"),
    "S8": ("operating_time",),
}
SEVERAL_LOADS = ("S8", "S10")  # types with one row for each load
_LEFT_OUT = (
    "How the speed is reached and left is left out, as the duty type has it: peak torque is that of the load."
)
_CARRIED = "The payload is carried at rest too; only the process force ends with the time under load."


@dataclass(frozen=True)
class _Load:
    """One row: a load at a speed, and its times; NaN where nothing is said."""

    row: int
    duty_type: str
    speed: float
    effort: float
    payload: float
    operating_s: float
    rest_s: float
    factor: float
    start_s: float
    brake_s: float
    share: float
    brake_closed: bool
    note: str


def understand_duty_types(
    parsed: ParsedTable, taken: set[str], coordinate: str, problems: ProblemList
) -> tuple[Cycle, ...]:
    """Make the cycles of every duty type.

    Parameters
    ----------
    parsed : ParsedTable
        The table with each cell judged.
    taken : set of str
        Names of cycles, folded, that the duty cycle has already.
    coordinate : str
        ``"linear"`` or ``"rotary"``: how the motion is stated.
    problems : ProblemList
        Takes times that are missing, too many or contradict each other.

    Returns
    -------
    tuple of Cycle
        In the order of the rows; S10 makes one for each of its loads.
    """
    check_required(parsed)
    assume_defaults(parsed)
    rows = [index for index in range(len(parsed)) if _is_usable(parsed, index, problems)]
    groups: dict[str, list[int]] = {}
    for index in rows:
        groups.setdefault(fold(str(parsed.text("cycle")[index])), []).append(index)
    cycles: list[Cycle] = []
    for key, members in groups.items():
        name = str(parsed.text("cycle")[members[0]])
        kinds = {str(parsed.text("duty_type")[index]) for index in members}
        first = int(parsed.rows[members[0]])
        if key in taken:
            problems.report(_TABLE, first, "cycle", got=f"'{name}', a cycle of the duty cycle",
                            allowed="a name of its own", remedy="Rename one of them.")  # fmt: skip
        elif len(kinds) > 1 or (len(members) > 1 and kinds.isdisjoint(SEVERAL_LOADS)):
            problems.report(_TABLE, int(parsed.rows[members[1]]), "cycle",
                            got=f"a further row of '{name}'",
                            allowed="several rows of one cycle only for S8 or S10, all of the same type",
                            remedy="Give the row a cycle of its own.")  # fmt: skip
        else:
            cycles += _cycles(name, [_load(parsed, index) for index in members], coordinate, problems)
    return tuple(cycles)


def check_turns(cycle: Cycle, mechanism: Mechanism, at_shaft: bool, problems: ProblemList) -> None:
    """Refuse a duty type of many turns of a mechanism whose ratio changes within each of them.

    Parameters
    ----------
    cycle : Cycle
        Made from a duty type.
    mechanism : Mechanism
        What it drives.
    at_shaft : bool
        The motion is that of the driven shaft.
    problems : ProblemList
        Takes the problem.
    """
    if mechanism.resolved_by_nodes or not at_shaft:
        return
    turned = sum(abs(phase.end()[0] - phase.kinematics(0.0)[0]) for s in cycle.segments for phase in s.phases)
    if turned > _MOST_TURNS * 2.0 * np.pi:
        problems.report(_TABLE, cycle.segments[0].row, "operating time",
                        got=f"{turned / (2.0 * np.pi):.0f} turns of a {mechanism.name}",
                        allowed=f"at most {_MOST_TURNS} turns, since its ratio changes within each of them",
                        remedy="Use S1 for the load itself; for heating, state a shorter cycle with the same cyclic "
                        "duration factor.")  # fmt: skip


def _is_usable(parsed: ParsedTable, index: int, problems: ProblemList) -> bool:
    """Whether a row says all that its type needs and nothing that the type leaves out; reports it where not."""
    kind = str(parsed.text("duty_type")[index])
    if not kind or not parsed.text("cycle")[index] or any(bad[index] for bad in parsed.bad.values()):
        return False
    row, known = int(parsed.rows[index]), True

    def wrong(key: str, got: str, allowed: str, remedy: str) -> None:
        nonlocal known
        known = False
        problems.report(_TABLE, row, parsed.heading(key), got=got, allowed=allowed, remedy=remedy)

    def has(key: str) -> bool:
        return bool(np.isfinite(parsed.number(key)[index]))

    for key in ALL_TIMES:
        if has(key) and key not in USED_TIMES[kind]:
            wrong(key, f"{parsed.shown_cell(key, index)} in {kind}", f"no such value, which {kind} leaves out",
                  _other_type(key))  # fmt: skip
        if not has(key) and key in _NEEDS.get(kind, ()):
            wrong(key, f"nothing in {kind}", f"a value, which {kind} needs", "Fill in the cell.")
    speed = float(parsed.number("speed")[index])
    if not np.isfinite(speed):
        known = False  # reported as missing
    elif speed == 0.0 and kind != "S10":
        wrong("speed", "0", f"a speed other than zero in {kind}", "Use S10 for a load at standstill.")
    if kind in ("S3", "S4", "S5", "S6"):
        known &= _times_agree(parsed, index, wrong)
    return known


def _other_type(key: str) -> str:
    return {
        "starting_time": "Use S4 or S5 where the start counts, or clear the cell.",
        "braking_time": "Use S5 where electric braking counts, or clear the cell.",
    }.get(key, "Clear the cell, or choose the type that it belongs to.")


def _times_agree(parsed: ParsedTable, index: int, wrong: object) -> bool:
    """Whether operating time, rest and factor make one cycle."""
    assert callable(wrong)
    load = _load(parsed, index)
    known = [np.isfinite(value) for value in (load.operating_s, load.rest_s, load.factor)]
    if sum(known) == 3:
        wrong("cyclic_duration_factor", "operating time, rest time and factor", "two of the three",
              "Clear one of the cells; it follows from the others.")  # fmt: skip
        return False
    if not known[2] and sum(known) < 2:
        wrong("cyclic_duration_factor", "too few times", "two of operating time, rest time and factor, or the factor "
              "alone", "Fill in the cyclic duration factor.")  # fmt: skip
        return False
    if load.factor == 1.0:
        wrong("cyclic_duration_factor", "100 %", f"below 100 % in {load.duty_type}",
              "Use S1 for a load without rest.")  # fmt: skip
        return False
    if known[2] and not known[0] and _times(load)[0] <= 0.0:
        wrong("cyclic_duration_factor", parsed.shown_cell("cyclic_duration_factor", index),
              "a time under load longer than starting and braking",
              "Raise the factor, or shorten starting and braking.")  # fmt: skip
        return False
    return True


def _load(parsed: ParsedTable, index: int) -> _Load:
    def number(key: str) -> float:
        return float(parsed.number(key)[index])

    return _Load(
        int(parsed.rows[index]),
        str(parsed.text("duty_type")[index]),
        number("speed"),
        number("process_force"),
        number("payload"),
        number("operating_time"),
        number("rest_time"),
        number("cyclic_duration_factor"),
        number("starting_time"),
        number("braking_time"),
        number("share_of_time"),
        parsed.text("brake_closed")[index] == "yes",
        str(parsed.text("note")[index]),
    )


def _times(load: _Load) -> tuple[float, float]:
    """Operating time and rest of a periodic type, from whichever two were stated."""
    ramps = float(np.nansum([load.start_s, load.brake_s]))
    if np.isfinite(load.operating_s) and np.isfinite(load.rest_s):
        return load.operating_s, load.rest_s
    if np.isfinite(load.operating_s):
        return load.operating_s, rest_time(load.operating_s + ramps, load.factor)
    if np.isfinite(load.rest_s):
        return loaded_time(load.rest_s, load.factor) - ramps, load.rest_s
    loaded, rest = usual_times(load.factor)
    return loaded - ramps, rest


def _cycles(name: str, loads: list[_Load], coordinate: str, problems: ProblemList) -> Iterator[Cycle]:
    kind = loads[0].duty_type
    if kind == "S10":
        for number, load in enumerate(loads, start=1):
            own = name if len(loads) == 1 else f"{name}, load {number}"
            yield Cycle(own, _row_up([_continuous(load, coordinate)]), REPEATS, load.share, kind)
        return
    if kind != "S1" and not any(np.isfinite(load.start_s) for load in loads):
        problems.report(_TABLE, loads[0].row, "duty type", got=kind, allowed="worth knowing", remedy=_LEFT_OUT,
                        severity=NOTE)  # fmt: skip
    if kind in ("S3", "S4", "S5") and loads[0].payload > 0.0:
        problems.report(_TABLE, loads[0].row, "payload", got=kind, allowed="worth knowing", remedy=_CARRIED,
                        severity=NOTE)  # fmt: skip
    runs = SHORT_TIME if kind == "S2" else REPEATS
    if kind == "S1":
        parts: Iterable[Segment] = [_continuous(loads[0], coordinate)]
    else:
        parts = _changes(loads) if kind == "S8" else _one_load(loads[0])
    yield Cycle(name, _row_up(list(parts)), runs, duty_type=kind)


def _one_load(load: _Load) -> Iterator[Segment]:
    """Start, load, braking and rest of one load, as far as its type has them."""
    operating, rest = (load.operating_s, 0.0) if load.duty_type == "S2" else _times(load)
    if np.isfinite(load.start_s):
        yield _ramp(load, 0.0, load.speed, load.start_s, "start")
    yield _steady(load, operating, "load")
    if np.isfinite(load.brake_s):
        yield _ramp(load, load.speed, 0.0, load.brake_s, "electric braking")
    if load.duty_type == "S6":
        yield replace(_steady(load, rest, "no load"), payload=0.0, process_effort=0.0)
    elif rest > 0.0:
        still = _segment(load, "rest", "dwell", (Phase(rest),))
        # What is carried stays on at rest: gravity acts on it still, and to leave it out would be the unsafe side.
        yield replace(still, process_effort=0.0, brake_closed=load.brake_closed)


def _changes(loads: list[_Load]) -> Iterator[Segment]:
    """One speed and load after the other; the first is reached from the last."""
    before = loads[-1].speed
    for number, load in enumerate(loads, start=1):
        if np.isfinite(load.start_s) and load.speed != before:
            yield _ramp(load, before, load.speed, load.start_s, f"change to load {number}")
        yield _steady(load, load.operating_s, f"load {number}")
        before = load.speed


def _continuous(load: _Load, coordinate: str) -> Segment:
    """A load that never ends: one turn of it, where it turns, stands for all."""
    turns = coordinate == ROTARY and load.speed != 0.0
    return _steady(load, 2.0 * np.pi / abs(load.speed) if turns else _CONTINUOUS_S, "load")


def _steady(load: _Load, duration_s: float, name: str) -> Segment:
    law = "dwell" if load.speed == 0.0 else "constant speed"
    return _segment(load, name, law, (Phase(duration_s, (0.0, load.speed)),))


def _ramp(load: _Load, begin: float, end: float, duration_s: float, name: str) -> Segment:
    phases = constant_jerk_phases([(duration_s, (end - begin) / duration_s, 0.0)], start_speed=begin)
    return _segment(load, name, "speed ramp", phases)


def _segment(load: _Load, name: str, law: str, phases: tuple[Phase, ...]) -> Segment:
    duration = float(sum(phase.duration_s for phase in phases))
    return Segment(load.row, name, law, phases, 0.0, duration, load.payload, load.effort, False, load.note)


def _row_up(segments: list[Segment]) -> tuple[Segment, ...]:
    """Segments one after the other in time."""
    starts = np.cumsum([0.0, *(segment.duration_s for segment in segments[:-1])])
    return tuple(
        replace(segment, start_s=float(start)) for segment, start in zip(segments, starts, strict=True)
    )
