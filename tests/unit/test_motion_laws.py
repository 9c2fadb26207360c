"""Closed forms, regimes and refusals of the motion laws."""

import math

import numpy as np
import pytest

from actuator_sizing.core.motion_laws import LAWS, plan_segment, speed_after
from actuator_sizing.core.phases import Phase
from actuator_sizing.errors import MotionError

REST_TO_REST = [name for name, law in LAWS.items() if law.peak_speed is not None]
SMOOTH = [name for name in REST_TO_REST if math.isfinite(LAWS[name].peak_jerk)]


def plan(law, start_speed=0.0, **columns):
    return plan_segment(law, start_speed=start_speed, **columns)


def total(phases):
    return sum(phase.duration_s for phase in phases)


def durations(phases):
    return [phase.duration_s for phase in phases]


def course(phases, order, points=4001):
    """Position, speed, acceleration or jerk on a grid of every phase, both borders included."""
    return [phase.kinematics(np.linspace(0.0, phase.duration_s, points))[order] for phase in phases]


def peak(phases, order):
    return max(float(np.abs(values).max()) for values in course(phases, order))


def test_the_words_of_the_duty_cycle():
    assert list(LAWS) == [
        "trapezoid", "triangular", "jerk-limited", "3-4-5 polynomial", "4-5-6-7 polynomial", "cycloidal",
        "modified sine", "modified trapezoid", "simple harmonic", "sinusoid", "spline", "constant speed",
        "speed ramp", "dwell",
    ]  # fmt: skip
    assert all(law.name == name and law.help and law.needs for name, law in LAWS.items())


def test_kinematics_are_derivatives_of_each_other():
    phase = Phase(2.0, (0.3, -1.0, 0.5, 0.25, -0.125), 0.7, 1.9, 0.4)
    step = 1e-4
    middle = np.linspace(0.1, 1.9, 7)
    before, at, after = (phase.kinematics(middle + shift) for shift in (-step, 0.0, step))
    for order in range(3):
        slope = (after[order] - before[order]) / (2.0 * step)
        # Central difference: step² / 6 times the third derivative, here below 10.
        np.testing.assert_allclose(slope, at[order + 1], atol=2e-8)


def test_kinematics_keep_the_shape_of_time():
    x, v, a, j = Phase(1.0, (0.0, 1.0)).kinematics(np.zeros((2, 3)))
    assert x.shape == v.shape == a.shape == j.shape == (2, 3)
    assert Phase(1.0).kinematics(0.5)[0].shape == ()


@pytest.mark.parametrize("law", REST_TO_REST)
@pytest.mark.parametrize("displacement", [0.4, -3.0])
def test_distance_rest_and_joints(law, displacement):
    phases = plan(law, displacement=displacement, duration_s=0.8)
    assert total(phases) == pytest.approx(0.8, rel=1e-14)
    assert phases[-1].end()[0] == pytest.approx(displacement, rel=1e-14)  # rounding
    speed_scale = abs(displacement) / 0.8
    position, speed = 0.0, 0.0
    for phase in phases:
        x, v, _, _ = phase.kinematics(0.0)
        assert float(x) == pytest.approx(position, abs=1e-14 * abs(displacement))
        assert float(v) == pytest.approx(speed, abs=1e-14 * speed_scale)
        position, speed = phase.end()
    assert speed == pytest.approx(0.0, abs=1e-14 * speed_scale)
    assert speed_after(phases) == 0.0


@pytest.mark.parametrize("law", SMOOTH)
def test_smooth_laws_have_no_jump_of_acceleration(law):
    phases = plan(law, displacement=2.0, duration_s=0.5)
    ends = [(a[0], a[-1]) for a in course(phases, 2)]
    joints = [0.0, *(value for pair in ends for value in pair), 0.0]
    scale = LAWS[law].peak_acceleration * 2.0 / 0.5**2
    for left, right in zip(joints[::2], joints[1::2], strict=True):
        assert left == pytest.approx(right, abs=1e-13 * scale)


@pytest.mark.parametrize("law", REST_TO_REST)
def test_coefficients_are_the_peaks_of_the_phases(law):
    phases = plan(law, displacement=1.0, duration_s=1.0)
    # The grid of 4001 points misses a smooth peak by at most its curvature times (1/8000)²/2: below 3e-6.
    assert peak(phases, 1) == pytest.approx(LAWS[law].peak_speed, rel=3e-6)
    assert peak(phases, 2) == pytest.approx(LAWS[law].peak_acceleration, rel=3e-6)
    if math.isfinite(LAWS[law].peak_jerk):
        assert peak(phases, 3) == pytest.approx(LAWS[law].peak_jerk, rel=3e-6)


@pytest.mark.parametrize(
    ("law", "order", "column"),
    [(law, 1, "speed_max") for law in REST_TO_REST]
    + [(law, 2, "acceleration_max") for law in REST_TO_REST]
    + [(law, 3, "jerk_max") for law in SMOOTH],
)
def test_one_limit_is_reached_and_not_exceeded(law, order, column):
    columns = {column: 0.7}
    if law in ("trapezoid", "jerk-limited"):
        columns["acceleration_share"] = 0.3  # a fixed shape, so that any limit gives the time
    phases = plan(law, displacement=-0.2, **columns)
    assert peak(phases, order) == pytest.approx(0.7, rel=3e-6)  # grid, as above


def test_duration_alone_gives_thirds():
    assert durations(plan("trapezoid", displacement=1.0, duration_s=0.9)) == pytest.approx([0.3, 0.3, 0.3])
    assert durations(plan("jerk-limited", displacement=1.0, duration_s=1.2)) == pytest.approx(
        [0.2, 0.2, 0.4, 0.2, 0.2]
    )


def test_shares():
    phases = plan(
        "trapezoid", displacement=1.0, duration_s=1.0, acceleration_share=0.2, deceleration_share=0.5
    )
    assert durations(phases) == pytest.approx([0.2, 0.3, 0.5])
    assert peak(phases, 1) == pytest.approx(1.0 / 0.65)  # area: v (0.1 + 0.3 + 0.25) = 1
    assert durations(plan("trapezoid", displacement=1.0, duration_s=1.0, deceleration_share=0.5)) == [
        0.5,
        0.5,
    ]
    assert durations(plan("triangular", displacement=1.0, duration_s=1.0, acceleration_share=0.25)) == [
        0.25,
        0.75,
    ]
    assert durations(plan("triangular", displacement=1.0, duration_s=1.0, deceleration_share=0.25)) == [
        0.75,
        0.25,
    ]
    phases = plan("jerk-limited", displacement=1.0, duration_s=1.0, acceleration_share=0.4, jerk_share=0.25)
    assert durations(phases) == pytest.approx([0.1, 0.2, 0.1, 0.2, 0.1, 0.2, 0.1])


def test_shares_that_fill_the_move_leave_no_sliver_of_cruise():
    for tiny in (0.0, 1e-12, -1e-12):
        phases = plan(
            "trapezoid",
            displacement=1.0,
            duration_s=1.0,
            acceleration_share=0.7,
            deceleration_share=0.3 + tiny,
        )
        assert len(phases) == 2


def test_fastest_trapezoid_on_both_sides_of_its_border():
    # v²/a = 0.25 m is the shortest move that reaches the speed limit.
    for distance, count in [(0.2, 2), (0.25, 2), (0.25 * (1 + 1e-12), 2), (0.25 * (1 - 1e-12), 2), (0.3, 3)]:
        phases = plan("trapezoid", displacement=distance, speed_max=1.0, acceleration_max=4.0)
        expected = 2.0 * math.sqrt(distance / 4.0) if distance <= 0.25 else distance + 0.25
        assert len(phases) == count
        assert total(phases) == pytest.approx(expected, rel=1e-12)
        assert peak(phases, 1) <= 1.0 + 1e-12
        # A cruise below 1e-9 of the move is left out, which costs as little of the acceleration.
        assert peak(phases, 2) == pytest.approx(4.0, rel=1e-9)


JERK_ONLY = math.cbrt(1.0 / 32.0)  # h = 2 j T_j³ with h = 1, j = 16
STAGE = 0.5 * (0.25 + math.sqrt(0.25**2 + 0.75))  # a T_a² − (a²/j) T_a = h with h = 0.75, a = 4, j = 16


@pytest.mark.parametrize(
    ("distance", "v", "a", "j", "expected"),
    [
        # Durations worked out by hand from the areas of the profile.
        (3.0, 2.0, 4.0, 16.0, [0.25, 0.25, 0.25, 0.75, 0.25, 0.25, 0.25]),  # all limits reached
        (3.0, 1.0, 8.0, 16.0, [0.25, 0.25, 2.5, 0.25, 0.25]),  # speed and jerk
        (0.75, 9.0, 4.0, 16.0, [0.25, STAGE - 0.5, 0.25] * 2),  # acceleration and jerk
        (1.0, 2.0, 8.0, 16.0, [JERK_ONLY] * 4),  # jerk alone
    ],
)
def test_regimes_of_the_jerk_limited_law(distance, v, a, j, expected):
    phases = plan("jerk-limited", displacement=distance, speed_max=v, acceleration_max=a, jerk_max=j)
    assert durations(phases) == pytest.approx(expected, rel=1e-12)
    assert phases[-1].end()[0] == pytest.approx(distance, rel=1e-13)


@pytest.mark.parametrize("nudge", [0.0, 1e-15, -1e-15, 1e-11, -1e-11])
def test_no_slivers_at_the_borders_of_the_regimes(nudge):
    # v j = a² and h = 2 a³/j²: ramps just reach acceleration and speed.
    phases = plan(
        "jerk-limited",
        displacement=2.0 * (1 + nudge),
        speed_max=1.0,
        acceleration_max=1.0,
        jerk_max=1.0 + nudge,
    )
    assert min(durations(phases)) > 0.5
    assert peak(phases, 1) <= 1.0 + 1e-9
    assert peak(phases, 2) <= 1.0 + 1e-9
    assert peak(phases, 3) <= 1.0 + 1e-9


def test_limits_left_out():
    only_jerk = plan("jerk-limited", displacement=2.0, jerk_max=64.0)
    assert durations(only_jerk) == pytest.approx([0.25] * 4)  # h = 2 j T_j³
    no_speed = plan("jerk-limited", displacement=2.0, jerk_max=64.0, acceleration_max=1e6)
    assert durations(no_speed) == pytest.approx([0.25] * 4)
    only_acceleration = plan("trapezoid", displacement=2.0, acceleration_max=8.0)
    assert durations(only_acceleration) == pytest.approx([0.5, 0.5])


@pytest.mark.parametrize("law", ["trapezoid", "jerk-limited"])
def test_duration_stretches_the_fastest_profile(law):
    limits = {"speed_max": 1.0, "acceleration_max": 4.0}
    if law == "jerk-limited":
        limits["jerk_max"] = 40.0
    fastest = plan(law, displacement=1.0, **limits)
    slow = plan(law, displacement=1.0, duration_s=2.0 * total(fastest), **limits)
    assert durations(slow) == pytest.approx([2.0 * d for d in durations(fastest)])
    assert peak(slow, 1) == pytest.approx(0.5 * peak(fastest, 1))
    exactly = plan(law, displacement=1.0, duration_s=total(fastest), **limits)
    assert durations(exactly) == pytest.approx(durations(fastest))
    with pytest.raises(MotionError, match=r"'duration'.*at least .* s with this 'maximum") as caught:
        plan(law, displacement=1.0, duration_s=0.99 * total(fastest), **limits)
    assert caught.value.column == "duration"


def test_constant_speed():
    (by_time,) = plan("constant speed", 2.0, duration_s=3.0)
    assert by_time.end() == (6.0, 2.0)
    (by_distance,) = plan("constant speed", -2.0, displacement=-6.0)
    assert by_distance.duration_s == 3.0
    (stated,) = plan("constant speed", -2.0, displacement=-6.0, end_speed=-2.0, duration_s=3.0, speed_max=2.0)
    assert stated == by_distance
    (rounded,) = plan("constant speed", 0.3, displacement=0.1, duration_s=0.3333333)
    assert rounded.end() == pytest.approx((0.1, 0.3), rel=1e-14)  # speed and displacement hold exactly


def test_speed_ramp():
    (by_time,) = plan("speed ramp", 1.0, end_speed=-3.0, duration_s=2.0)
    assert by_time.end() == (-2.0, -3.0)
    (by_limit,) = plan("speed ramp", 0.0, end_speed=-3.0, acceleration_max=6.0)
    assert (by_limit.duration_s, by_limit.end()) == (0.5, (-0.75, -3.0))
    (by_distance,) = plan("speed ramp", 4.0, end_speed=0.0, displacement=3.0, acceleration_max=10.0)
    assert by_distance.duration_s == 1.5
    assert by_distance.end() == pytest.approx((3.0, 0.0))
    (both,) = plan("speed ramp", 4.0, end_speed=0.0, displacement=3.0, duration_s=1.5)
    assert both == by_distance
    assert speed_after((by_time,)) == -3.0


def test_dwell():
    (phase,) = plan("dwell", duration_s=0.4)
    assert [float(part) for part in phase.kinematics(0.2)] == [0.0, 0.0, 0.0, 0.0]
    assert plan("dwell", duration_s=0.4, displacement=0.0, end_speed=0.0) == (phase,)
    assert speed_after(()) == 0.0


MOVE = {"displacement": 1.0, "duration_s": 1.0}
REFUSED = [
    # law, start speed, columns, column at fault, part of the message
    ("hop", 0.0, MOVE, "motion law", "one of: trapezoid"),
    ("trapezoid", 0.0, {"duration_s": 1.0}, "displacement", "a signed distance"),
    ("cycloidal", 0.0, {"displacement": 0.0, "duration_s": 1.0}, "displacement", "'dwell'"),
    ("cycloidal", 0.5, MOVE, "motion law", "Put a 'speed ramp' with end speed 0 before it"),
    ("cycloidal", 0.0, {**MOVE, "end_speed": 1.0}, "end speed", "ends at rest"),
    ("cycloidal", 0.0, {"displacement": 1.0}, "duration", "Fill in 'duration', 'maximum speed'"),
    ("cycloidal", 0.0, {**MOVE, "speed_max": 1.9}, "duration", "at least 1.05263 s with this 'maximum speed'"),
    ("cycloidal", 0.0, {**MOVE, "acceleration_max": 6.0}, "duration", "'maximum acceleration'"),
    ("cycloidal", 0.0, {**MOVE, "jerk_max": 39.0}, "duration", "'maximum jerk'"),
    ("cycloidal", 0.0, {**MOVE, "acceleration_share": 0.3}, "acceleration share", "does not use it"),
    ("trapezoid", 0.0, {"displacement": 1.0}, "duration", "Fill in 'duration' or 'maximum acceleration'"),
    ("trapezoid", 0.0, {"displacement": 1.0, "speed_max": 1.0}, "duration", "or 'maximum acceleration'"),
    ("trapezoid", 0.0, {"displacement": 1.0, "acceleration_share": 0.2}, "duration", "'maximum speed'"),
    ("trapezoid", 0.0, {**MOVE, "jerk_max": 9.0}, "maximum jerk", "jumps"),
    ("simple harmonic", 0.0, {**MOVE, "jerk_max": 9.0}, "maximum jerk", "jumps"),
    ("trapezoid", 0.0, {**MOVE, "jerk_share": 0.2}, "jerk share", "does not use it"),
    ("trapezoid", 0.0, {**MOVE, "acceleration_share": 0.6}, "acceleration share", "at most 1"),
    ("trapezoid", 0.0, {**MOVE, "deceleration_share": 0.0}, "deceleration share", "above 0"),
    ("trapezoid", 0.0, {**MOVE, "acceleration_share": 1.2}, "acceleration share", "0 to 1"),
    ("trapezoid", 0.0, {**MOVE, "acceleration_share": 1e-300}, "acceleration share", "0 to 1"),
    ("trapezoid", 0.0, {**MOVE, "acceleration_share": math.nan}, "acceleration share", "got nan"),
    (
        "triangular", 0.0, {**MOVE, "acceleration_share": 0.3, "deceleration_share": 0.3},
        "acceleration share", "add up to 1",
    ),
    ("triangular", 0.0, {**MOVE, "deceleration_share": 1.0}, "deceleration share", "add up to 1"),
    ("jerk-limited", 0.0, {"displacement": 1.0, "speed_max": 1.0}, "duration", "or 'maximum jerk'"),
    ("jerk-limited", 0.0, {"displacement": 1.0, "jerk_share": 0.3}, "duration", "'maximum speed'"),
    ("jerk-limited", 0.0, {**MOVE, "jerk_share": 0.6}, "jerk share", "at most 0.5"),
    ("jerk-limited", 0.0, {**MOVE, "jerk_share": 0.0}, "jerk share", "above 0"),
    (
        "jerk-limited", 0.0, {"displacement": 1.0, "acceleration_max": 1e-3, "jerk_max": 1e14},
        "motion law", "told from a jump",
    ),
    ("trapezoid", 0.0, {"displacement": 1.0, "speed_max": 1e-6, "acceleration_max": 1e6}, "motion law", "jump"),
    ("constant speed", 0.0, {"duration_s": 1.0}, "motion law", "a segment before it"),
    ("constant speed", 1.0, {"duration_s": 1.0, "end_speed": 2.0}, "end speed", "1 (SI), the speed at which"),
    ("constant speed", 1.0, {}, "duration", "Fill in 'duration' or 'displacement'"),
    ("constant speed", 1.0, {"displacement": -1.0}, "displacement", "the sign of the speed"),
    ("constant speed", 1.0, {"displacement": 1.0, "duration_s": 2.0}, "duration", "1 s, which follows"),
    ("constant speed", 1.0, {"duration_s": 1.0, "speed_max": 0.9}, "maximum speed", "at least 1"),
    ("constant speed", 1e-12, {"displacement": 1e15}, "duration", "Check the units"),
    ("speed ramp", 0.0, {"duration_s": 1.0}, "end speed", "0 stops the axis"),
    ("speed ramp", 2.0, {"duration_s": 1.0, "end_speed": 2.0}, "end speed", "another speed"),
    ("speed ramp", 0.0, {"duration_s": 1.0, "end_speed": 0.0}, "end speed", "another speed"),
    ("speed ramp", 0.0, {"end_speed": 2.0}, "duration", "Fill in 'duration', 'maximum acceleration'"),
    ("speed ramp", 0.0, {"end_speed": 2.0, "displacement": -1.0}, "displacement", "the sign of the mean speed"),
    ("speed ramp", 2.0, {"end_speed": -2.0, "displacement": 1.0}, "displacement", "mean speed"),
    (
        "speed ramp", 0.0, {"end_speed": 2.0, "displacement": 1.0, "duration_s": 2.0},
        "duration", "1 s, which follows from displacement",
    ),
    ("speed ramp", 0.0, {"end_speed": 2.0, "duration_s": 1.0, "acceleration_max": 1.9}, "duration", "at least"),
    (
        "speed ramp", 0.0, {"end_speed": 2.0, "displacement": 1.0, "acceleration_max": 1.9},
        "displacement", "at least 1.05263 s",
    ),
    ("speed ramp", 0.0, {"end_speed": 2.0, "duration_s": 1.0, "speed_max": 1.0}, "maximum speed", "at least 2"),
    ("dwell", 0.0, {}, "duration", "the time of the dwell"),
    ("dwell", 1.0, {"duration_s": 1.0}, "motion law", "Put a 'speed ramp'"),
    ("dwell", 0.0, {"duration_s": 1.0, "displacement": 0.1}, "displacement", "0 or empty"),
    ("dwell", 0.0, {"duration_s": 1.0, "speed_max": 0.1}, "maximum speed", "does not use it"),
    ("cycloidal", math.nan, MOVE, "start speed", "got nan"),
]  # fmt: skip


@pytest.mark.parametrize(("law", "start", "columns", "column", "words"), REFUSED)
def test_refusals_name_the_column_and_a_way_out(law, start, columns, column, words):
    with pytest.raises(MotionError) as caught:
        plan(law, start, **columns)
    assert caught.value.column == column
    assert words in str(caught.value)
    assert caught.value.remedy


@pytest.mark.parametrize("absurd", [math.nan, math.inf, -math.inf, 1e300, 5e-324, -1.0, 0.0])
@pytest.mark.parametrize("column", ["duration_s", "speed_max", "acceleration_max", "jerk_max"])
def test_absurd_durations_and_limits(column, absurd):
    with pytest.raises(MotionError, match="above zero"):
        plan("cycloidal", displacement=1.0, **{column: absurd})


@pytest.mark.parametrize("absurd", [math.nan, math.inf, -math.inf, 1e300, -1e300, 5e-324])
def test_absurd_displacements_and_speeds(absurd):
    with pytest.raises(MotionError, match="'displacement'.*either sign"):
        plan("cycloidal", displacement=absurd, duration_s=1.0)
    with pytest.raises(MotionError, match="'end speed'.*either sign"):
        plan("speed ramp", end_speed=absurd, duration_s=1.0)
    with pytest.raises(MotionError, match="'start speed'"):
        plan("constant speed", absurd, duration_s=1.0)


@pytest.mark.parametrize("law", REST_TO_REST)
@pytest.mark.parametrize(("displacement", "duration"), [(1e15, 1e-12), (1e-12, 1e15), (-1e15, 1e15)])
def test_the_corners_of_what_is_allowed_stay_finite(law, displacement, duration):
    for phase in plan(law, displacement=displacement, duration_s=duration):
        values = phase.kinematics(np.linspace(0.0, phase.duration_s, 5))
        assert all(np.all(np.isfinite(v)) for v in values)
