"""Motion laws: from one row of the duty cycle to smooth phases of motion."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from actuator_sizing.core.blend_planning import is_blend, plan_blend
from actuator_sizing.core.free_segments import plan_sinusoid, plan_spline
from actuator_sizing.core.law_shapes import (
    FIXED,
    SHORTEST_SHARE,
    Shape,
    double_s,
    fastest_double_s,
    fastest_trapezoid,
    trapezoid,
)
from actuator_sizing.core.phases import Phase, speed_after
from actuator_sizing.core.segment_request import ABSURD_ABOVE, ABSURD_BELOW, Request
from actuator_sizing.core.speed_segments import plan_constant_speed, plan_dwell, plan_speed_ramp
from actuator_sizing.errors import MotionError

__all__ = ["LAWS", "MotionLaw", "Phase", "plan_segment", "speed_after"]

DEFAULT_SHARE = 1.0 / 3.0  # acceleration, cruise and deceleration alike
DEFAULT_JERK_SHARE = 0.5  # no stretch of constant acceleration
_ROUNDING = 1e-9  # a limit exceeded by less than this part is met

Planner = Callable[[Request], tuple[Phase, ...]]


@dataclass(frozen=True)
class MotionLaw:
    """One word of the column 'motion law'.

    Attributes
    ----------
    name : str
        The word. [-]
    help : str
        What it does. [-]
    needs : str
        Which columns describe it. [-]
    uses : frozenset of str
        Columns that mean something to it. [-]
    plan : callable
        From a checked request to phases. [-]
    peak_speed, peak_acceleration, peak_jerk : float or None
        Largest magnitudes over distance 1 in time 1 with the usual shares; None where the law is not from
        rest to rest, infinite jerk where acceleration jumps. [-]
    """

    name: str
    help: str
    needs: str
    uses: frozenset[str]
    plan: Planner
    peak_speed: float | None = None
    peak_acceleration: float | None = None
    peak_jerk: float | None = None


def plan_segment(
    law: str,
    *,
    start_speed: float,
    displacement: float | None = None,
    end_speed: float | None = None,
    duration_s: float | None = None,
    speed_max: float | None = None,
    acceleration_max: float | None = None,
    deceleration_max: float | None = None,
    jerk_max: float | None = None,
    acceleration_share: float | None = None,
    deceleration_share: float | None = None,
    jerk_share: float | None = None,
    amplitude: float | None = None,
    frequency_hz: float | None = None,
    cycles: float | None = None,
    points: tuple[tuple[float, float], ...] = (),
) -> tuple[Phase, ...]:
    """Plan one segment of the duty cycle.

    Parameters
    ----------
    law : str
        One of `LAWS`. [-]
    start_speed : float
        Speed at which the segment before ends; zero for every law from rest to rest. [m/s]
    displacement : float, optional
        Signed distance. [m]
    end_speed : float, optional
        Signed speed at the end of a speed ramp, of a segment of constant speed, or of a trapezoid or
        jerk-limited move that blends into the next segment. [m/s]
    duration_s : float, optional
        Time of the segment. [s]
    speed_max : float, optional
        Limit of the magnitude, not a target. [m/s]
    acceleration_max : float, optional
        Limit of the magnitude, not a target. [m/s²]
    deceleration_max : float, optional
        Limit of the magnitude while slowing down; the limit of acceleration when empty. [m/s²]
    jerk_max : float, optional
        Limit of the magnitude, not a target. [m/s³]
    acceleration_share, deceleration_share : float, optional
        Parts of the duration spent speeding up and slowing down; one third each when nothing says more. [-]
    jerk_share : float, optional
        Part of the stage of acceleration that each jerk ramp takes; 1/2 when nothing says more. [-]
    amplitude : float, optional
        Signed amplitude of a sinusoid: half of the way between its extremes. [m]
    frequency_hz : float, optional
        Of a sinusoid. [Hz]
    cycles : float, optional
        Periods of a sinusoid, whole or half. [-]
    points : tuple of (float, float), optional
        Time [s] and position [m] of the points of a spline, from the start of the segment. [-]

    Returns
    -------
    tuple of Phase
        Smooth phases from position zero; radians stand for metres on a rotary axis. [-]

    Raises
    ------
    MotionError
        When the columns say too little, contradict each other, exceed a limit, or are absurd.

    Notes
    -----
    A duration together with limits gives the fastest profile stretched evenly to that duration. Trapezoid
    and jerk-limited law have a fastest profile of their own when their limit of acceleration or of jerk is
    given and no share is; otherwise the shares fix the shape.

    Examples
    --------
    >>> [phase.duration_s for phase in plan_segment("trapezoid", start_speed=0.0, displacement=0.6,
    ...     speed_max=1.0, acceleration_max=5.0)]
    [0.2, 0.4, 0.2]
    """
    if law not in LAWS:
        raise MotionError(
            "motion law", f"'{law}'", "one of: " + ", ".join(LAWS), "Choose one of these words."
        )
    request = Request(
        law,
        start_speed,
        {
            "displacement": displacement,
            "end speed": end_speed,
            "duration": duration_s,
            "maximum speed": speed_max,
            "maximum acceleration": acceleration_max,
            "maximum deceleration": deceleration_max,
            "maximum jerk": jerk_max,
            "acceleration share": acceleration_share,
            "deceleration share": deceleration_share,
            "jerk share": jerk_share,
            "amplitude": amplitude,
            "frequency": frequency_hz,
            "cycles": cycles,
        },
        LAWS[law].needs,
        tuple(points),
    )
    request.check(LAWS[law].uses)
    return LAWS[law].plan(request)


def _rest_to_rest(request: Request, displacement: float, shape: Shape) -> tuple[Phase, ...]:
    """Give a shape its distance and time, and check both against the limits."""
    limits = [request.limit(f"maximum {quantity}") for quantity in ("speed", "acceleration", "jerk")]
    by_limit = shape.durations(abs(displacement), *limits)
    shortest = max(by_limit)
    governing = ("maximum speed", "maximum acceleration", "maximum jerk")[by_limit.index(shortest)]
    duration = request.get("duration")
    if duration is None:
        duration = shortest
    elif duration < shortest * (1.0 - _ROUNDING):
        raise MotionError(
            "duration",
            f"{duration:.6g} s",
            f"at least {shortest:.6g} s with this '{governing}'",
            f"Lengthen the duration or raise '{governing}'.",
        )
    if not ABSURD_BELOW <= duration <= ABSURD_ABOVE:
        raise MotionError(
            governing,
            f"a move of {duration:.6g} s",
            f"a move of {ABSURD_BELOW:g} s to {ABSURD_ABOVE:g} s",
            "Check the units of displacement and limits.",
        )
    if min(phase.duration_s for phase in shape.phases) < SHORTEST_SHARE:
        raise MotionError(
            "motion law",
            f"{request.law} with a phase shorter than {SHORTEST_SHARE:g} of the move",
            "phases that can be told from a jump",
            "Check the units of the limits, or choose a law with fewer phases.",
        )
    return shape.spread(displacement, duration)


def _plan_fixed(shape: Shape) -> Planner:
    def plan(request: Request) -> tuple[Phase, ...]:
        displacement = request.require_move()
        if math.isinf(shape.peak_jerk):
            request.refuse_jerk_limit()
        request.require_any(("duration", "maximum speed", "maximum acceleration", "maximum jerk"))
        return _rest_to_rest(request, displacement, shape)

    return plan


def _plan_trapezoid(request: Request) -> tuple[Phase, ...]:
    if is_blend(request):
        request.refuse_jerk_limit()
        return plan_blend(request, DEFAULT_SHARE, 0.0)
    displacement = request.require_move()
    request.refuse_jerk_limit()
    a_max = request.limit("maximum acceleration")
    if request.has("acceleration share") or request.has("deceleration share"):
        request.require_any(("duration", "maximum speed", "maximum acceleration"))
        return _rest_to_rest(request, displacement, trapezoid(*request.stage_shares(DEFAULT_SHARE)))
    if math.isfinite(a_max):
        return _rest_to_rest(
            request, displacement, fastest_trapezoid(abs(displacement), request.limit("maximum speed"), a_max)
        )
    request.require_any(("duration",), instead="maximum acceleration")
    return _rest_to_rest(request, displacement, trapezoid(DEFAULT_SHARE, DEFAULT_SHARE))


def _plan_triangular(request: Request) -> tuple[Phase, ...]:
    displacement = request.require_move()
    request.refuse_jerk_limit()
    request.require_any(("duration", "maximum speed", "maximum acceleration"))
    shares = (request.get("acceleration share"), request.get("deceleration share"))
    k_a, k_d = shares
    if k_a is None:
        k_a = 0.5 if k_d is None else 1.0 - k_d
    if k_d is None:
        k_d = 1.0 - k_a
    if abs(k_a + k_d - 1.0) > _ROUNDING or not 0.0 < k_a < 1.0:
        raise MotionError(
            "acceleration share" if shares[0] is not None else "deceleration share",
            " and ".join(f"{share:.6g}" for share in shares if share is not None),
            "two shares above 0 that add up to 1",
            "Leave one of the shares empty, or choose the trapezoid.",
        )
    return _rest_to_rest(request, displacement, trapezoid(k_a, 1.0 - k_a))


def _plan_jerk_limited(request: Request) -> tuple[Phase, ...]:
    if is_blend(request):
        return plan_blend(request, DEFAULT_SHARE, _jerk_share(request))
    displacement = request.require_move()
    j_max = request.limit("maximum jerk")
    shares = ("acceleration share", "deceleration share", "jerk share")
    if math.isfinite(j_max) and not any(request.has(share) for share in shares):
        limits = request.limit("maximum speed"), request.limit("maximum acceleration")
        return _rest_to_rest(request, displacement, fastest_double_s(abs(displacement), *limits, j_max))
    if any(request.has(share) for share in shares):
        request.require_any(("duration", "maximum speed", "maximum acceleration", "maximum jerk"))
    else:
        request.require_any(("duration",), instead="maximum jerk")
    return _rest_to_rest(
        request, displacement, double_s(*request.stage_shares(DEFAULT_SHARE), _jerk_share(request))
    )


def _jerk_share(request: Request) -> float:
    s = request.get("jerk share")
    s = DEFAULT_JERK_SHARE if s is None else s
    if not 0.0 < s <= 0.5:
        raise MotionError(
            "jerk share",
            f"{s:.6g}",
            "above 0, at most 0.5",
            "For acceleration that jumps, choose the trapezoid.",
        )
    return s


_ANY_LIMIT = "displacement, and duration or at least one maximum (speed, acceleration, jerk)"
_MOVE = frozenset(
    {"displacement", "end speed", "duration", "maximum speed", "maximum acceleration", "maximum jerk"}
)
_STAGES = frozenset({"acceleration share", "deceleration share"})
_BLENDS = frozenset({"maximum deceleration"})


def _from_shape(
    name: str, text: str, needs: str, uses: frozenset[str], plan: Planner, shape: Shape
) -> MotionLaw:
    return MotionLaw(
        name, text, needs, uses, plan, shape.peak_speed, shape.peak_acceleration, shape.peak_jerk
    )


_FIXED_HELP = {
    "3-4-5 polynomial": "smooth move; acceleration zero at both ends",
    "4-5-6-7 polynomial": "very smooth move; acceleration and jerk zero at both ends",
    "cycloidal": "one period of sine acceleration",
    "modified sine": "low peak speed, smooth acceleration; usual for indexing tables",
    "modified trapezoid": "low peak acceleration with smooth edges",
    "simple harmonic": "half a period of cosine acceleration; acceleration jumps at both ends",
}

_LAWS = (
    _from_shape(
        "trapezoid",
        "constant acceleration, constant speed, constant deceleration",
        "displacement, and either duration (shares default to one third) or maximum acceleration (with or "
        "without maximum speed); with shares, any maximum will do. 'end speed' and the speed of the segment "
        "before blend it with its neighbours; 'maximum deceleration' limits slowing down on its own",
        _MOVE | _STAGES | _BLENDS,
        _plan_trapezoid,
        trapezoid(DEFAULT_SHARE, DEFAULT_SHARE),
    ),
    _from_shape(
        "triangular",
        "constant acceleration, then constant deceleration, without cruise",
        "displacement, and duration, maximum speed or maximum acceleration; shares default to one half",
        _MOVE | _STAGES,
        _plan_triangular,
        trapezoid(0.5, 0.5),
    ),
    _from_shape(
        "jerk-limited",
        "seven phases of constant jerk, fewer where a limit is not reached",
        "displacement, and either duration (shares default to one third, jerk share to one half) or maximum "
        "jerk (with or without maximum speed and acceleration); with shares, any maximum will do. 'end speed' "
        "and the speed of the segment before blend it with its neighbours; 'maximum deceleration' limits "
        "slowing down on its own",
        _MOVE | _STAGES | _BLENDS | {"jerk share"},
        _plan_jerk_limited,
        double_s(DEFAULT_SHARE, DEFAULT_SHARE, DEFAULT_JERK_SHARE),
    ),
    *(
        _from_shape(name, _FIXED_HELP[name], _ANY_LIMIT, _MOVE, _plan_fixed(build()), build())
        for name, build in FIXED.items()
    ),
    MotionLaw(
        "sinusoid",
        "swings to and fro from one extreme, any number of half periods",
        "amplitude, and two of frequency, cycles and duration",
        frozenset({"amplitude", "frequency", "cycles", "duration", "maximum speed", "maximum acceleration"}),
        plan_sinusoid,
    ),
    MotionLaw(
        "spline",
        "cubic spline through the rows of the table 'points'",
        "rows of the table 'points' that name the segment; 'end speed' where it does not end at rest",
        frozenset({"end speed"}),
        plan_spline,
    ),
    MotionLaw(
        "constant speed",
        "carries on at the speed of the segment before",
        "duration or displacement; 'end speed' may repeat the speed, and must state it where the cycle "
        "starts with this segment",
        frozenset({"displacement", "end speed", "duration", "maximum speed"}),
        plan_constant_speed,
    ),
    MotionLaw(
        "speed ramp",
        "constant acceleration from the speed of the segment before to the end speed",
        "end speed, and one of duration, maximum acceleration and displacement",
        frozenset({"displacement", "end speed", "duration", "maximum speed", "maximum acceleration"}),
        plan_speed_ramp,
    ),
    MotionLaw(
        "dwell",
        "stands still",
        "duration",
        frozenset({"displacement", "end speed", "duration"}),
        plan_dwell,
    ),
)

LAWS: dict[str, MotionLaw] = {law.name: law for law in _LAWS}
