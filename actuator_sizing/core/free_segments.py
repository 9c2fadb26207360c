"""Segments whose course the user states: a sinusoid, and a spline through points."""

from __future__ import annotations

import math

import numpy as np

from actuator_sizing.core.phases import Phase
from actuator_sizing.core.segment_request import ABSURD_ABOVE, ABSURD_BELOW, Request
from actuator_sizing.errors import MotionError

MOST_CYCLES = 1000.0  # more are stated as one cycle that repeats
_TYPED = 1e-6  # relative difference below which two statements agree: typed figures are rounded
_WHOLE = 1e-6  # a number of half cycles this near a whole one is that one


def plan_sinusoid(request: Request) -> tuple[Phase, ...]:
    """Swing to and fro from one extreme: ``x = A (1 − cos 2π f t)``.

    Parameters
    ----------
    request : Request
        The row. [-]

    Returns
    -------
    tuple of Phase
        One phase from rest to rest. [-]

    Raises
    ------
    MotionError
        When amplitude, or the time, is missing or contradictory, or a limit is exceeded.

    Notes
    -----
    Half cycles are allowed: each half starts and ends at rest, the second half brings the axis back.
    """
    if request.start_speed != 0.0:
        raise MotionError(
            "motion law",
            f"'{request.law}' after a segment that ends at {request.start_speed:.6g} (SI)",
            "a start from rest, at one extreme of the swing",
            "Put a 'speed ramp' with end speed 0 before it.",
        )
    A = request.get("amplitude")
    if not A:
        raise MotionError("amplitude", "nothing" if A is None else "0", request.needs, "Fill in 'amplitude'.")
    cycles, frequency, duration = (request.get(c) for c in ("cycles", "frequency", "duration"))
    if [cycles, frequency, duration].count(None) > 1:
        empty = "frequency" if frequency is None else "cycles"
        raise MotionError(empty, "nothing", request.needs, "Fill in two of: frequency, cycles, duration.")
    if cycles is None:
        assert frequency is not None
        assert duration is not None
        cycles = frequency * duration
    halves = round(2.0 * cycles)
    column = "cycles" if request.has("cycles") else "duration"
    if halves < 1 or abs(2.0 * cycles - halves) > _WHOLE * max(halves, 1) or cycles > MOST_CYCLES:
        raise MotionError(
            column,
            f"{cycles:.6g} cycles",
            f"a multiple of half a cycle, at most {MOST_CYCLES:g}",
            "Only whole and half cycles end at rest; state many cycles as one that repeats.",
        )
    cycles = 0.5 * halves
    follows = cycles / frequency if frequency is not None else duration
    assert follows is not None
    if duration is not None and abs(follows - duration) > _TYPED * duration:
        raise MotionError(
            "duration",
            f"{duration:.6g} s",
            f"{follows:.6g} s, which follows from cycles and frequency",
            "Leave one of the three empty.",
        )
    if not ABSURD_BELOW <= follows <= ABSURD_ABOVE:
        raise MotionError("frequency", f"a swing of {follows:.6g} s", request.needs, "Check the unit.")
    w = 2.0 * math.pi * cycles / follows
    for limit, peak in (("maximum speed", w * abs(A)), ("maximum acceleration", w * w * abs(A))):
        if peak > request.limit(limit) * (1.0 + 1e-9):
            raise MotionError(
                limit,
                f"{request.limit(limit):.6g}",
                f"at least {peak:.6g} (SI), the peak of this swing",
                f"Raise '{limit}', or lower frequency or amplitude.",
            )
    return (Phase(follows, (A,), -A, w, 0.5 * math.pi),)


def plan_spline(request: Request) -> tuple[Phase, ...]:
    """Pass through points on a cubic spline, with the speeds of the neighbours at both ends.

    Parameters
    ----------
    request : Request
        The row with its points: time and position from the start of the segment. [-]

    Returns
    -------
    tuple of Phase
        One phase between two points each; speed and acceleration are continuous. [-]

    Raises
    ------
    MotionError
        When there are too few points, or their times do not rise from zero.

    Notes
    -----
    The curve through the points with continuous acceleration and the stated end slopes is unique; of all
    curves through the points with these slopes it has the smallest mean square of acceleration.
    """
    from scipy.interpolate import CubicSpline

    points = request.points
    if len(points) < 2:
        raise MotionError(
            "motion law",
            f"'{request.law}' with {len(points)} points",
            "at least two rows of the table 'points' that name this segment",
            "Add the table 'points' with segment, time and position.",
        )
    t, x = (np.array(column) for column in zip(*points, strict=True))
    if t[0] != 0.0 or np.any(np.diff(t) <= 0.0) or not np.all(np.isfinite([*t, *x])):
        at = 0 if t[0] != 0.0 else int(np.argmax(np.diff(t) <= 0.0)) + 1
        raise MotionError(
            "duration",
            f"point {at + 1} of '{request.law}' at {t[at]:.6g} s",
            "times that start at 0 and rise from point to point",
            "Sort the rows of the table 'points', and count time from the start of the segment.",
        )
    if not (ABSURD_BELOW <= float(np.min(np.diff(t))) and t[-1] <= ABSURD_ABOVE):
        raise MotionError("duration", f"{t[-1]:.6g} s", request.needs, "Check the unit of time.")
    if np.max(np.abs(x)) > ABSURD_ABOVE:
        raise MotionError("displacement", f"{np.max(np.abs(x)):.6g}", request.needs, "Check the unit.")
    end = request.get("end speed") or 0.0
    curve = CubicSpline(t, x - x[0], bc_type=((1, request.start_speed), (1, end)))
    return tuple(
        Phase(float(step), tuple(float(c) for c in curve.c[::-1, k])) for k, step in enumerate(np.diff(t))
    )
