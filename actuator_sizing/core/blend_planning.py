"""From a row of the duty cycle to a move that does not start or end at rest, or that slows down otherwise."""

from __future__ import annotations

import math

from actuator_sizing.core.blending import Blend, shared_blend
from actuator_sizing.core.phases import Phase
from actuator_sizing.core.segment_request import ABSURD_ABOVE, ABSURD_BELOW, Request
from actuator_sizing.errors import MotionError

_ROUNDING = 1e-9  # a limit exceeded by less than this part is met
_SHARES = ("acceleration share", "deceleration share", "jerk share")


def is_blend(request: Request) -> bool:
    """Whether a move starts or ends at speed, or has a limit of its own for slowing down [-]."""
    return bool(request.start_speed != 0.0 or request.get("end speed") or request.has("maximum deceleration"))


def plan_blend(request: Request, default_share: float, jerk_share: float) -> tuple[Phase, ...]:
    """Plan a trapezoid or jerk-limited move between any two speeds.

    Parameters
    ----------
    request : Request
        The row. [-]
    default_share : float
        Part of the duration of each change of speed where nothing says more. [-]
    jerk_share : float
        Part of each change of speed that each jerk ramp takes; 0 for the trapezoid. [-]

    Returns
    -------
    tuple of Phase
        From position zero. [-]

    Raises
    ------
    MotionError
        When the columns say too little or cannot be met together.
    """
    displacement = request.get("displacement")
    if not displacement:
        raise MotionError(
            "displacement",
            "nothing" if displacement is None else "0",
            f"a signed distance; '{request.law}' needs {request.needs}",
            "Enter the displacement, or use 'speed ramp' to change speed alone.",
        )
    sign = math.copysign(1.0, displacement)
    end_speed = request.get("end speed") or 0.0
    _check_direction(request, sign, end_speed)
    stage_limit = "maximum jerk" if jerk_share > 0.0 else "maximum acceleration"
    if any(request.has(share) for share in _SHARES) or not request.has(stage_limit):
        return _plan_shares(request, displacement, end_speed, default_share, jerk_share, stage_limit)
    return _plan_limits(request, displacement, end_speed, sign)


def _check_direction(request: Request, sign: float, end_speed: float) -> None:
    for column, speed in (("displacement", request.start_speed), ("end speed", end_speed)):
        if speed * sign < 0.0:
            which = "the speed of the segment before" if column == "displacement" else "this end speed"
            raise MotionError(
                column,
                f"{request.get(column):.6g}",
                f"displacement and speeds of one sign; {which} is {speed:.6g} (SI)",
                "Reverse with a 'speed ramp' of its own.",
            )
    limit = request.limit("maximum speed")
    for speed in (abs(request.start_speed), abs(end_speed)):
        if speed > limit * (1.0 + _ROUNDING):
            raise MotionError(
                "maximum speed",
                f"{limit:.6g}",
                f"at least {speed:.6g} (SI), a speed at the ends of this segment",
                "Raise the limit or lower the speed.",
            )


def _plan_limits(request: Request, displacement: float, end_speed: float, sign: float) -> tuple[Phase, ...]:
    """Fastest move under limits, or a slower cruise for a stated duration."""
    a_max = request.limit("maximum acceleration")
    d_max = request.limit("maximum deceleration") if request.has("maximum deceleration") else a_max
    v0, v1 = abs(request.start_speed), abs(end_speed)
    v_max = max(request.limit("maximum speed"), v0, v1)
    blend = Blend(abs(displacement), v0, v1, v_max, a_max, d_max, request.limit("maximum jerk"))
    if blend.shortest_distance > blend.distance * (1.0 + _ROUNDING):
        raise MotionError(
            "displacement",
            f"{displacement:.6g}",
            f"at least {blend.shortest_distance:.6g} (SI) to go from {v0:.6g} to {v1:.6g} (SI) within the limits",
            "Lengthen the displacement, raise the limits, or bring the two speeds closer.",
        )
    cruise: float | None = blend.fastest_cruise()
    assert cruise is not None
    duration, shortest = request.get("duration"), blend.duration(cruise)
    if duration is not None and duration < shortest * (1.0 - _ROUNDING):
        raise MotionError(
            "duration",
            f"{duration:.6g} s",
            f"at least {shortest:.6g} s within these limits",
            "Lengthen the duration or raise the limits.",
        )
    if duration is not None:
        cruise = blend.cruise_for(duration)
        if cruise is None:
            raise MotionError(
                "duration",
                f"{duration:.6g} s",
                f"a time near the shortest one of {shortest:.6g} s that a cruise between these speeds can take",
                "Shorten the duration, or add a 'dwell' or a stop of its own.",
            )
    if not ABSURD_BELOW <= blend.duration(cruise) <= ABSURD_ABOVE:
        raise MotionError(
            "displacement",
            f"a move of {blend.duration(cruise):.6g} s",
            f"a move of {ABSURD_BELOW:g} s to {ABSURD_ABOVE:g} s",
            "Check the units of displacement and limits.",
        )
    return blend.phases(cruise, sign)


def _plan_shares(
    request: Request,
    displacement: float,
    end_speed: float,
    default_share: float,
    jerk_share: float,
    stage_limit: str,
) -> tuple[Phase, ...]:
    """Move of a stated duration whose shape the shares fix; limits are checked."""
    duration = request.get("duration")
    if duration is None:
        raise MotionError(
            "duration",
            "nothing",
            f"for '{request.law}' between two speeds: the duration (with or without shares), or "
            f"'{stage_limit}' without shares",
            f"Fill in 'duration', or '{stage_limit}' and leave the shares empty.",
        )
    shares = (*request.stage_shares(default_share), jerk_share)
    phases = shared_blend(displacement, request.start_speed, end_speed, duration, shares)
    sign = math.copysign(1.0, displacement)
    ends = [(phase.kinematics(0.0), phase.kinematics(phase.duration_s)) for phase in phases]
    slowest = min(sign * float(point[1]) for pair in ends for point in pair)
    fastest = max(abs(float(point[1])) for pair in ends for point in pair)
    if slowest < -_ROUNDING * fastest:
        raise MotionError(
            "duration",
            f"{duration:.6g} s",
            "a time in which the move need not turn back between these speeds",
            "Shorten the duration, lower the speeds at the ends, or reverse with a 'speed ramp'.",
        )
    for column, order in (("maximum speed", 1), ("maximum acceleration", 2), ("maximum jerk", 3)):
        largest = max(abs(float(point[order])) for pair in ends for point in pair)
        _check_limit(request, column, largest)
    if request.has("maximum deceleration"):
        slowing = max(0.0, *(-sign * float(point[2]) for pair in ends for point in pair))
        _check_limit(request, "maximum deceleration", slowing)
    return phases


def _check_limit(request: Request, column: str, largest: float) -> None:
    limit = request.limit(column)
    if largest > limit * (1.0 + 1e-6):
        raise MotionError(
            column,
            f"{limit:.6g}",
            f"at least {largest:.6g} (SI), which the duration and the shares ask for",
            f"Raise '{column}', lengthen the duration, or leave the shares empty.",
        )
