"""Moves between any two speeds: joints, limits, the fastest of its kind, every regime."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import linprog

from actuator_sizing.core.motion_laws import plan_segment
from actuator_sizing.errors import MotionError


def planned(law, **columns):
    """Phases, or the column that cannot be met."""
    try:
        return plan_segment(law, **columns), ""
    except MotionError as error:
        return (), error.column


def ends(phases):
    return [(phase.kinematics(0.0), phase.kinematics(phase.duration_s)) for phase in phases]


def check_course(phases, start, end, distance, *, smooth):
    """Position, speed and, for the jerk-limited law, acceleration join; the ends are those asked for."""
    points = ends(phases)
    scale = [abs(distance), max(abs(float(q[1])) for pair in points for q in pair)]
    scale.append(max(abs(float(q[2])) for pair in points for q in pair))
    state = [0.0, start, 0.0]
    for first, last in points:
        for order in range(3 if smooth else 2):
            # Sums of seven phases: some hundred roundings of the largest magnitude.
            assert float(first[order]) == pytest.approx(state[order], abs=1e-9 * scale[order] + 1e-300)
        state = [float(q) for q in last[:3]]
    assert state[0] == pytest.approx(distance, rel=1e-9)
    assert state[1] == pytest.approx(end, abs=1e-9 * scale[1])
    if smooth:
        assert state[2] == pytest.approx(0.0, abs=1e-9 * scale[2])


def peak(phases, order):
    return max(abs(float(q[order])) for pair in ends(phases) for q in pair)


speeds = st.just(0.0) | st.floats(1e-6, 1.0)
limits = st.floats(0.05, 20.0)


@given(
    speeds,
    speeds,
    st.floats(1.0, 3.0),
    limits,
    limits,
    limits,
    st.floats(0.01, 50.0),
    st.sampled_from([1, -1]),
)
def test_jerk_limited_blend_keeps_limits_and_ends(v0, v1, v_max, a, d, j, distance, sign):
    columns = {"displacement": sign * distance, "end_speed": sign * v1, "speed_max": v_max,
               "acceleration_max": a, "deceleration_max": d, "jerk_max": j}  # fmt: skip
    phases, refused = planned("jerk-limited", start_speed=sign * v0, **columns)
    if refused:
        assert refused == "displacement"
        stage = Stage(v0, v1, a if v1 > v0 else d, j)
        assert 0.5 * (v0 + v1) * stage.time > distance * (1.0 - 1e-9)
        return
    check_course(phases, sign * v0, sign * v1, sign * distance, smooth=True)
    assert peak(phases, 1) <= v_max * (1.0 + 1e-9)
    assert peak(phases, 3) <= j * (1.0 + 1e-6)
    along = [sign * float(q[2]) for pair in ends(phases) for q in pair]
    assert max(along) <= a * (1.0 + 1e-9)
    assert -min(along) <= d * (1.0 + 1e-9)


class Stage:
    """Length of the fastest jerk-limited change of speed, by hand."""

    def __init__(self, v0, v1, a, j):
        dv = abs(v1 - v0)
        self.time = dv / a + a / j if dv >= a * a / j else 2.0 * math.sqrt(dv / j)


@given(speeds, speeds, limits, limits, st.floats(0.05, 20.0), st.floats(1.0, 3.0))
def test_stretched_trapezoid_takes_its_time(v0, v1, a, d, distance, stretch):
    columns = {"displacement": distance, "end_speed": v1, "speed_max": 1.0, "acceleration_max": a,
               "deceleration_max": d}  # fmt: skip
    fast, refused = planned("trapezoid", start_speed=v0, **columns)
    if refused:
        assert refused == "displacement"
        assert abs(v1 * v1 - v0 * v0) / (2.0 * (a if v1 > v0 else d)) > distance * (1.0 - 1e-9)
        return
    check_course(fast, v0, v1, distance, smooth=False)
    duration = stretch * sum(phase.duration_s for phase in fast)
    slow, refused = planned("trapezoid", start_speed=v0, duration_s=duration, **columns)
    if refused:
        assert refused == "duration"  # it would have to stop on the way
        assert v0 * v0 / (2.0 * d) + v1 * v1 / (2.0 * a) > distance * (1.0 - 1e-6)
        return
    check_course(slow, v0, v1, distance, smooth=False)
    assert sum(phase.duration_s for phase in slow) == pytest.approx(duration, rel=1e-9)


@pytest.mark.parametrize(
    ("v0", "v1", "distance"),
    [(0.0, 0.0, 2.0), (1.0, 0.5, 3.0), (0.2, 1.5, 1.2), (1.5, 0.0, 0.9), (1.0, 1.0, 0.4), (0.0, 0.0, 0.05)],
)
def test_the_fastest_by_linear_programming(v0, v1, distance):
    """On a fine grid the largest distance that limits allow in the planned time is the planned distance."""
    v_max, a, d, j = 2.0, 4.0, 2.5, 20.0
    phases = plan_segment("jerk-limited", start_speed=v0, displacement=distance, end_speed=v1, speed_max=v_max,
                          acceleration_max=a, deceleration_max=d, jerk_max=j)  # fmt: skip
    duration = sum(phase.duration_s for phase in phases)
    n = 400
    h = duration / n
    # unknown: acceleration at n+1 instants, linear between; speed and distance are sums of it
    area = np.zeros((n + 1, n + 1))
    for i in range(n):
        area[i + 1] = area[i]
        area[i + 1, i] += 0.5 * h
        area[i + 1, i + 1] += 0.5 * h
    gain = np.zeros(n + 1)
    for i in range(n):  # exact distance of linear acceleration
        gain += h * area[i]
        gain[i] += h * h / 3.0
        gain[i + 1] += h * h / 6.0
    jerk = (np.eye(n + 1)[1:] - np.eye(n + 1)[:-1]) / h
    found = linprog(
        -gain,
        A_ub=np.vstack([area, jerk, -jerk]),
        b_ub=np.concatenate([np.full(n + 1, v_max - v0), np.full(2 * n, j)]),
        A_eq=np.vstack([area[-1], np.eye(n + 1)[0], np.eye(n + 1)[-1]]),
        b_eq=[v1 - v0, 0.0, 0.0],
        bounds=[(-d, a)] * (n + 1),
    )
    assert found.status == 0
    # Grid of T/400: corners are cut by at most one step, which costs distance of the order (T/400)·v.
    assert v0 * duration - found.fun == pytest.approx(distance, rel=5e-3)


def test_blending_through_a_waypoint_keeps_the_speed():
    first = plan_segment("trapezoid", start_speed=0.0, displacement=1.0, end_speed=0.5, speed_max=1.0,
                         acceleration_max=2.0)  # fmt: skip
    assert first[-1].end()[1] == pytest.approx(0.5, rel=1e-14)
    assert [p.duration_s for p in first] == pytest.approx(
        [0.5, 0.5625, 0.25]
    )  # by hand: 0.25 + 0.5625 + 0.1875 m
    second = plan_segment(
        "trapezoid", start_speed=0.5, displacement=0.25, end_speed=0.0, acceleration_max=2.0
    )
    check_course(second, 0.5, 0.0, 0.25, smooth=False)


def test_shares_between_two_speeds():
    phases = plan_segment("jerk-limited", start_speed=0.3, displacement=2.0, end_speed=0.6, duration_s=2.0,
                          acceleration_share=0.25, jerk_share=0.4)  # fmt: skip
    check_course(phases, 0.3, 0.6, 2.0, smooth=True)
    assert [p.duration_s for p in phases] == pytest.approx([0.2, 0.1, 0.2, 1.0, 0.2, 0.1, 0.2])


def test_asymmetric_rest_to_rest():
    phases = plan_segment("trapezoid", start_speed=0.0, displacement=-3.0, speed_max=2.0, acceleration_max=4.0,
                          deceleration_max=1.0)  # fmt: skip
    assert [p.duration_s for p in phases] == pytest.approx([0.5, 0.25, 2.0])
    check_course(phases, 0.0, 0.0, -3.0, smooth=False)


@pytest.mark.parametrize(
    ("law", "start", "columns", "column", "text"),
    [
        ("trapezoid", 1.0, {"displacement": 0.1, "acceleration_max": 1.0}, "displacement", "at least 0.5"),
        ("trapezoid", 1.0, {"displacement": -1.0, "acceleration_max": 1.0}, "displacement", "one sign"),
        ("trapezoid", 0.0, {"displacement": 1.0, "end_speed": -1.0, "acceleration_max": 1.0}, "end speed",
         "one sign"),
        ("trapezoid", 0.0, {"displacement": 1.0, "end_speed": 2.0, "speed_max": 1.0, "acceleration_max": 9.0},
         "maximum speed", "at least 2"),
        ("trapezoid", 1.0, {"displacement": 1.0}, "duration", "Fill in 'duration'"),
        ("trapezoid", 1.0, {"acceleration_max": 1.0}, "displacement", "signed distance"),
        ("trapezoid", 1.0, {"displacement": 1.0, "acceleration_max": 1.0, "duration_s": 0.2}, "duration", "at least"),
        ("trapezoid", 1.0, {"displacement": 0.9, "acceleration_max": 1.0, "end_speed": 1.0, "duration_s": 60.0},
         "duration", "near the shortest"),
        ("jerk-limited", 1.0, {"displacement": 1.0, "duration_s": 30.0}, "duration", "turn back"),
        ("jerk-limited", 1.0, {"displacement": 1.0, "duration_s": 1.0, "acceleration_share": 0.3,
                               "acceleration_max": 0.1}, "maximum acceleration", "at least"),
        ("triangular", 0.0, {"displacement": 1.0, "acceleration_max": 1.0, "deceleration_max": 1.0},
         "maximum deceleration", "does not use it"),
    ],
)  # fmt: skip
def test_refusals(law, start, columns, column, text):
    with pytest.raises(MotionError) as caught:
        plan_segment(law, start_speed=start, **columns)
    assert caught.value.column == column
    assert text in str(caught.value)
