"""The mechanism of a case, held against itself, its map and the motion that it is asked to make."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from actuator_sizing.case.axis import Axis
from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.columns import key_of
from actuator_sizing.case.model import Segment
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.core.mechanisms import LINEAR, Complaint, Mechanism
from actuator_sizing.errors import ERROR, NOTE

_FEWEST_POINTS = 4  # a cubic spline needs as many
_INSTANTS = (
    129  # of a phase: a smooth extremum between two of them is missed by less than a part in a thousand
)
_ROUNDING = 1e-9  # of the reach: typed displacements are rounded

Points = tuple[tuple[float, float], ...]


def understand_map(parsed: ParsedTable | None, axis: Axis, problems: ProblemList) -> Points:
    """Rows of the table `map`: shaft angle and position, or nothing where something is wrong.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table with each cell judged; None where there is none.
    axis : Axis
        Says whether the mechanism takes a map.
    problems : ProblemList
        Takes rows out of order, and a map too many or too few.
    """
    needed = axis.mechanism is not None and axis.mechanism.needs_map
    if parsed is None:
        if needed:
            problems.report("map", None, got="no such table", allowed="a table for a tabulated mechanism",
                            remedy="Add a sheet 'map' or a file map.csv with the columns shaft angle and "
                            "position.")  # fmt: skip
        return ()
    if not needed:
        problems.report("map", None, got=f"{len(parsed)} rows",
                        allowed="a map only for a tabulated mechanism", remedy="It is left out.",
                        severity=NOTE)  # fmt: skip
        return ()
    check_required(parsed)
    angle, position = parsed.number("shaft_angle"), parsed.number("position")
    known = np.isfinite(angle) & np.isfinite(position)
    falls = np.zeros(len(parsed), dtype=bool)
    with np.errstate(invalid="ignore"):
        falls[1:] = np.diff(angle) <= 0.0
    problems.report_rows(
        "map", parsed.rows, parsed.heading("shaft_angle"), falls,
        got=lambda i: parsed.shown_cell("shaft_angle", i),
        allowed=lambda i: f"above the angle of the row before, {parsed.shown_cell('shaft_angle', i - 1)}",
        remedy="Sort the rows and remove repeated angles.",
    )  # fmt: skip
    if len(parsed) < _FEWEST_POINTS:
        problems.report("map", None, got=f"{len(parsed)} rows", allowed=f"at least {_FEWEST_POINTS} rows",
                        remedy="Give more points; a smooth curve goes through them.")  # fmt: skip
        return ()
    if not known.all() or falls.any():
        return ()
    if np.ptp(position) == 0.0:
        problems.report("map", None, parsed.heading("position"), got="the same position in every row",
                        allowed="positions that change", remedy="Check the column.")  # fmt: skip
        return ()
    return tuple(zip(angle.tolist(), position.tolist(), strict=True))


def build_mechanism(axis: Axis, points: Points, problems: ProblemList) -> Mechanism | None:
    """Mechanism from the axis quantities, its geometry checked; None where a quantity is missing or wrong."""
    if axis.mechanism is None or (axis.mechanism.needs_map and not points):
        return None
    values = {p.name: axis.number(key_of(p.name)) for p in axis.mechanism.parameters}
    given = {name: None if np.isnan(value) else value for name, value in values.items()}
    try:
        mechanism = axis.mechanism.from_values(given, points)
    except KeyError:
        return None  # reported as missing
    wrong = False
    for complaint in mechanism.complaints():
        problems.report("axis", axis.rows.get(key_of(complaint.quantity)), complaint.quantity, got=complaint.got,
                        allowed=complaint.allowed, remedy=complaint.remedy,
                        severity=complaint.severity)  # fmt: skip
        wrong |= complaint.severity == ERROR
    return None if wrong else mechanism


def check_motion(
    mechanism: Mechanism,
    at_shaft: bool,
    segments: Iterable[Segment],
    problems: ProblemList,
    table: str = "duty_cycle",
) -> None:
    """Report segments that leave the geometry or ask for what the load cannot do.

    Parameters
    ----------
    mechanism : Mechanism
        Geometry without contradictions.
    at_shaft : bool
        The motion is that of the driven shaft.
    segments : iterable of Segment
        One cycle as planned.
    problems : ProblemList
        Takes one problem a segment at most.
    table : str
        Where the segments stand.
    """
    origin = 0.0
    for segment in segments:
        complaint, end = _first_complaint(mechanism, at_shaft, segment, origin)
        if complaint is not None:
            column = complaint.quantity
            if table == "duty_types" and column == "displacement":
                column = "operating time"  # which makes the way there
            problems.report(table, segment.row, column, got=complaint.got,
                            allowed=complaint.allowed, remedy=complaint.remedy,
                            severity=complaint.severity)  # fmt: skip
        origin = end


def _first_complaint(
    mechanism: Mechanism, at_shaft: bool, segment: Segment, origin: float
) -> tuple[Complaint | None, float]:
    low, high = mechanism.reach(at_shaft)
    margin = _ROUNDING * (high - low) if np.isfinite(high - low) else 0.0
    complaint: Complaint | None = None
    end = origin
    astray = not low - margin <= origin <= high + margin  # told at the segment that went there
    for phase in segment.phases:
        tau = np.linspace(0.0, phase.duration_s, _INSTANTS)
        q, dq, ddq, _ = phase.kinematics(tau)
        q = q + origin
        end = float(q[-1])
        if complaint is not None or astray:
            continue
        if np.min(q) < low - margin or np.max(q) > high + margin:
            complaint = out_of_reach(mechanism, at_shaft, q, low, high)
            continue
        geometry = mechanism.transfer(q, at_shaft)
        v = geometry.load_rate * dq
        a = geometry.load_rate * ddq + geometry.load_bend * dq**2
        found = mechanism.motion_complaints(geometry.position, v, a, segment.payload, segment.process_effort)
        complaint = next(iter(found), None)
    return complaint, end


def out_of_reach(mechanism: Mechanism, at_shaft: bool, q: np.ndarray, low: float, high: float) -> Complaint:
    """What to say of a motion q that leaves the reach from `low` to `high`, in m or rad of the stated motion."""

    def shown(value: float) -> str:
        if not np.isfinite(value):
            return "any distance"
        value += 0.0  # no minus before zero
        straight = mechanism.coordinate == LINEAR and not at_shaft
        return f"{value * 1e3:.6g} mm" if straight else f"{np.degrees(value):.6g}°"

    far = float(np.max(q)) if np.max(q) > high else float(np.min(q))
    if low == high == 0.0:
        return Complaint("displacement", "a motion of the load that starts at a dead centre",
                         "a start where the driven shaft moves the load",
                         "Change the start angle, or state the motion at the shaft.")  # fmt: skip
    return Complaint("displacement", f"a way to {shown(far)} from the start of the cycle",
                     f"from {shown(low)} to {shown(high)}: there the geometry ends or has a dead centre",
                     "Shorten the stroke or move the start." if at_shaft
                     else "Shorten the stroke, move the start, or state the motion at the shaft.")  # fmt: skip
