"""What holds for every move: it arrives, keeps its limits, and is as fast as they allow."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from actuator_sizing.core.motion_laws import LAWS, plan_segment
from actuator_sizing.errors import MotionError

ORDERS = {"speed_max": 1, "acceleration_max": 2, "jerk_max": 3}

laws = st.sampled_from([name for name, law in LAWS.items() if law.peak_speed is not None])
sizes = st.floats(min_value=1e-3, max_value=1e3)
limits_alike = st.floats(min_value=0.03, max_value=30.0)  # so that no phase is too short to be planned
signs = st.sampled_from([-1.0, 1.0])


def courses(phases, points=41):
    """Position, speed, acceleration and jerk of each phase, borders included."""
    return [phase.kinematics(np.linspace(0.0, phase.duration_s, points)) for phase in phases]


def peak(phases, order):
    return max(float(np.abs(course[order]).max()) for course in courses(phases))


def total(phases):
    return sum(phase.duration_s for phase in phases)


def attempt(law, start_speed, columns):
    """Phases, or the reason why there are none."""
    try:
        return plan_segment(law, start_speed=start_speed, **columns), None
    except MotionError as error:
        return (), error


def check_joints(phases, displacement):
    """Position and speed never jump; the move starts at zero, ends at the displacement, both at rest."""
    # Rounding: a few units in the last place of the distance and of the peak speed.
    close_x, close_v = 1e-12 * abs(displacement), 1e-12 * peak(phases, 1)
    x, v = 0.0, 0.0
    for course in courses(phases):
        assert abs(course[0][0] - x) <= close_x
        assert abs(course[1][0] - v) <= close_v
        x, v = course[0][-1], course[1][-1]
    assert abs(x - displacement) <= close_x
    assert abs(v) <= close_v


@given(law=laws, size=sizes, sign=signs, duration=sizes)
def test_every_move_arrives(law, size, sign, duration):
    phases = plan_segment(law, start_speed=0.0, displacement=sign * size, duration_s=duration)
    assert total(phases) == pytest.approx(duration, rel=1e-12)
    check_joints(phases, sign * size)
    direction = np.concatenate([course[1] for course in courses(phases)]) * sign
    assert np.all(direction >= -1e-12 * peak(phases, 1))  # never backs up


@settings(max_examples=300)
@given(
    size=limits_alike,
    sign=signs,
    v=limits_alike,
    a=limits_alike,
    j=limits_alike,
    left_out=st.sets(st.sampled_from(["v", "a"])),
)
def test_jerk_limited_moves_are_the_fastest(size, sign, v, a, j, left_out):
    limits = {"jerk_max": j}
    limits |= {} if "v" in left_out else {"speed_max": v}
    limits |= {} if "a" in left_out else {"acceleration_max": a}
    phases = plan_segment("jerk-limited", start_speed=0.0, displacement=sign * size, **limits)
    check_joints(phases, sign * size)
    for column, limit in limits.items():
        assert peak(phases, ORDERS[column]) <= limit * (1.0 + 1e-9)
    # Of time-optimal motion at least one limit is reached in every phase.
    for phase, course in zip(phases, courses(phases), strict=True):
        if phase.duration_s < 1e-6 * total(phases):
            continue  # next to a border of two regimes a phase may miss its limit by its own share
        use = max(
            float(np.abs(course[order]).min()) / limits[column]
            for column, order in ORDERS.items()
            if column in limits
        )
        assert use == pytest.approx(1.0, rel=1e-6)


@given(size=limits_alike, v=limits_alike, a=limits_alike)
def test_trapezoids_are_the_fastest(size, v, a):
    phases = plan_segment("trapezoid", start_speed=0.0, displacement=size, speed_max=v, acceleration_max=a)
    check_joints(phases, size)
    reached = min(v, math.sqrt(a * size))
    assert peak(phases, 1) == pytest.approx(reached, rel=1e-8)
    assert total(phases) == pytest.approx(size / reached + reached / a, rel=1e-8)


@given(law=laws, size=sizes, limit=sizes, column=st.sampled_from(list(ORDERS)), factor=st.floats(0.1, 10.0))
def test_stretching_time_scales_the_derivatives(law, size, limit, column, factor):
    columns = {column: limit}
    if column == "jerk_max" and math.isinf(LAWS[law].peak_jerk):
        columns = {"duration_s": 1.0}
    if law in ("trapezoid", "jerk-limited"):
        columns["acceleration_share"] = 0.25
    phases = plan_segment(law, start_speed=0.0, displacement=size, **columns)
    shares = {key: value for key, value in columns.items() if key == "acceleration_share"}
    duration = factor * total(phases)
    slow = plan_segment(law, start_speed=0.0, displacement=size, duration_s=duration, **shares)
    for order in (1, 2, 3):
        # Rounding of a sum of a few terms, the third derivative of a seventh-degree polynomial among them.
        assert peak(slow, order) * factor**order == pytest.approx(peak(phases, order), rel=1e-9, abs=1e-300)


@given(
    law=laws,
    size=sizes,
    duration=sizes,
    limit=sizes,
    column=st.sampled_from(list(ORDERS)),
)
def test_limits_are_kept_or_the_move_is_refused(law, size, duration, limit, column):
    columns = {"displacement": size, "duration_s": duration, column: limit}
    phases, refusal = attempt(law, 0.0, columns)
    if refusal is not None:
        assert refusal.column in ("duration", "maximum jerk", "motion law")
        return
    assert peak(phases, ORDERS[column]) <= limit * (1.0 + 1e-8)
    check_joints(phases, size)


@given(law=laws, size=sizes, limit=sizes)
def test_mirrored_moves(law, size, limit):
    forth = plan_segment(law, start_speed=0.0, displacement=size, duration_s=limit)
    back = plan_segment(law, start_speed=0.0, displacement=-size, duration_s=limit)
    for one, other in zip(courses(forth), courses(back), strict=True):
        for order in range(4):
            np.testing.assert_array_equal(one[order], -other[order])


numbers = st.one_of(st.none(), st.floats(), st.sampled_from([0.0, 1.0, -1.0, 1e-12, 1e15]))
NAMES = (
    "displacement", "end_speed", "duration_s", "speed_max", "acceleration_max", "jerk_max",
    "acceleration_share", "deceleration_share", "jerk_share",
)  # fmt: skip


@settings(max_examples=500)
@given(law=st.sampled_from(list(LAWS)), start=st.sampled_from([0.0, 1.0, -2.5, math.nan]), data=st.data())
def test_any_row_gives_finite_motion_or_a_motion_error(law, start, data):
    columns = {name: data.draw(numbers) for name in data.draw(st.sets(st.sampled_from(NAMES)))}
    phases, refusal = attempt(law, start, columns)
    if refusal is not None:
        assert refusal.remedy.endswith(".")
        return
    assert all(phase.duration_s > 0.0 and math.isfinite(phase.duration_s) for phase in phases)
    assert all(np.all(np.isfinite(values)) for course in courses(phases) for values in course)
