"""Segments that hold or change a speed: constant speed, speed ramp, dwell."""

from __future__ import annotations

import math

from actuator_sizing.core.phases import Phase, constant_jerk_phases
from actuator_sizing.core.segment_request import ABSURD_ABOVE, ABSURD_BELOW, Request
from actuator_sizing.errors import MotionError

_ROUNDING = 1e-9  # a limit exceeded by less than this part is met
_TYPED = 1e-6  # relative difference below which two statements agree: typed figures are rounded


def plan_dwell(request: Request) -> tuple[Phase, ...]:
    """Stand still for a duration.

    Parameters
    ----------
    request : Request
        The row. [-]

    Returns
    -------
    tuple of Phase
        One phase at position zero. [-]

    Raises
    ------
    MotionError
        When the segment before does not end at rest, or the duration is missing.
    """
    if request.start_speed != 0.0:
        raise MotionError(
            "motion law",
            f"'dwell' after a segment that ends at {request.start_speed:.6g} (SI)",
            "a start from rest",
            "Put a 'speed ramp' with end speed 0 before it.",
        )
    for column in ("displacement", "end speed"):
        if request.get(column):
            raise MotionError(
                column, f"{request.get(column):.6g}", "0 or empty for 'dwell'", "Clear the cell."
            )
    duration = request.get("duration")
    if duration is None:
        raise MotionError("duration", "nothing", "the time of the dwell", "Fill in 'duration'.")
    return (Phase(duration, (0.0,)),)


def plan_constant_speed(request: Request) -> tuple[Phase, ...]:
    """Carry on at the speed of the segment before.

    Parameters
    ----------
    request : Request
        The row. [-]

    Returns
    -------
    tuple of Phase
        One phase. [-]

    Raises
    ------
    MotionError
        When the speed is zero or would jump, or time and distance do not follow or disagree.
    """
    v, displacement, duration = request.start_speed, request.get("displacement"), request.get("duration")
    if v == 0.0:
        raise MotionError(
            "motion law",
            "'constant speed' after a segment that ends at rest",
            "a segment before it that ends at this speed",
            "Put a 'speed ramp' before it, or use 'dwell' to stand still.",
        )
    stated = request.get("end speed")
    if stated is not None and not _agree(stated, v):
        raise MotionError(
            "end speed",
            f"{stated:.6g}",
            f"{v:.6g} (SI), the speed at which the segment before ends",
            "Leave the cell empty, or put a 'speed ramp' before it.",
        )
    _check_speed_limit(request, v)
    if displacement is None and duration is None:
        raise MotionError("duration", "nothing", request.needs, "Fill in 'duration' or 'displacement'.")
    if displacement is not None:
        if displacement * v <= 0.0:
            raise MotionError(
                "displacement",
                f"{displacement:.6g}",
                f"the sign of the speed {v:.6g} (SI)",
                "Correct the sign, or reverse with a 'speed ramp' first.",
            )
        duration = _time_to_cover(displacement, v, duration)
    assert duration is not None
    _check_result(request, duration)
    return (Phase(duration, (0.0, v)),)


def plan_speed_ramp(request: Request) -> tuple[Phase, ...]:
    """Change speed at constant acceleration.

    Parameters
    ----------
    request : Request
        The row. [-]

    Returns
    -------
    tuple of Phase
        One phase. [-]

    Raises
    ------
    MotionError
        When the end speed is missing or not another one, or time, distance and limit do not fit.
    """
    start, end = request.start_speed, request.get("end speed")
    if end is None:
        raise MotionError("end speed", "nothing", request.needs, "Fill in 'end speed'; 0 stops the axis.")
    if _agree(start, end):
        raise MotionError(
            "end speed",
            f"{end:.6g}",
            "another speed than that of the segment before",
            "Use 'constant speed' to hold a speed, 'dwell' to stand still.",
        )
    _check_speed_limit(request, max(abs(start), abs(end)))
    limit = request.limit("maximum acceleration")
    shortest = abs(end - start) / limit
    duration, displacement = request.get("duration"), request.get("displacement")
    if displacement is not None:
        duration = _ramp_duration(displacement, start, end, duration)
    elif duration is None:
        if math.isinf(limit):
            raise MotionError(
                "duration",
                "nothing",
                request.needs,
                "Fill in 'duration', 'maximum acceleration' or 'displacement'.",
            )
        duration = shortest
    if duration < shortest * (1.0 - _ROUNDING):
        column = "duration" if displacement is None else "displacement"
        raise MotionError(
            column,
            f"a ramp of {duration:.6g} s",
            f"at least {shortest:.6g} s with this 'maximum acceleration'",
            f"Enlarge '{column}' or raise 'maximum acceleration'.",
        )
    _check_result(request, duration)
    return constant_jerk_phases([(duration, (end - start) / duration, 0.0)], start_speed=start)


def _ramp_duration(displacement: float, start: float, end: float, duration: float | None) -> float:
    """Time in which the mean speed covers the displacement; must agree with a duration that is stated."""
    mean = 0.5 * (start + end)
    if displacement * mean <= 0.0 or abs(mean) < _ROUNDING * abs(end - start):
        raise MotionError(
            "displacement",
            f"{displacement:.6g}",
            f"the sign of the mean speed {mean:.6g} (SI) of the ramp",
            "Correct the sign, or give 'duration' or 'maximum acceleration' instead.",
        )
    return _time_to_cover(displacement, mean, duration)


def _time_to_cover(displacement: float, mean_speed: float, duration: float | None) -> float:
    """Time that follows from distance and mean speed; a stated duration must agree with it."""
    follows = displacement / mean_speed
    if duration is not None and not _agree(duration, follows):
        raise MotionError(
            "duration",
            f"{duration:.6g} s",
            f"{follows:.6g} s, which follows from displacement and speed",
            "Leave 'duration' or 'displacement' empty.",
        )
    return follows


def _agree(one: float, other: float) -> bool:
    return abs(one - other) <= _TYPED * max(abs(one), abs(other))


def _check_speed_limit(request: Request, speed: float) -> None:
    limit = request.limit("maximum speed")
    if abs(speed) > limit * (1.0 + _ROUNDING):
        raise MotionError(
            "maximum speed",
            f"{limit:.6g}",
            f"at least {abs(speed):.6g} (SI), a speed of this segment",
            "Raise the limit or lower the speed.",
        )


def _check_result(request: Request, duration: float) -> None:
    if not ABSURD_BELOW <= duration <= ABSURD_ABOVE:
        raise MotionError(
            "duration",
            f"{duration:.6g} s, as it follows from the row",
            f"{ABSURD_BELOW:g} s to {ABSURD_ABOVE:g} s",
            f"Check the units of the row '{request.law}'.",
        )
