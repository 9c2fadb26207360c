"""Sinusoid and spline through points: course, joints, refusals."""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.interpolate import make_interp_spline

from actuator_sizing.core.motion_laws import plan_segment
from actuator_sizing.core.phases import position_range
from actuator_sizing.errors import MotionError


def test_sinusoid_swings_from_one_extreme():
    (phase,) = plan_segment("sinusoid", start_speed=0.0, amplitude=0.02, frequency_hz=5.0, cycles=2.5)
    assert phase.duration_s == pytest.approx(0.5, rel=1e-15)
    x, v, a, _ = phase.kinematics(np.array([0.0, 0.05, 0.1, 0.5]))
    # After 0, a quarter, half and 2.5 periods; rounding of a cosine.
    np.testing.assert_allclose(x, [0.0, 0.02, 0.04, 0.04], atol=1e-16)
    np.testing.assert_allclose(v, [0.0, 0.02 * 10 * np.pi, 0.0, 0.0], atol=1e-14)
    assert a[0] == pytest.approx(0.02 * (10 * np.pi) ** 2)
    assert position_range((phase,)) == pytest.approx((0.0, 0.04), abs=1e-15)


def test_sinusoid_by_duration():
    by_time = plan_segment("sinusoid", start_speed=0.0, amplitude=-1.0, duration_s=3.0, cycles=1.0)
    assert by_time == plan_segment(
        "sinusoid", start_speed=0.0, amplitude=-1.0, duration_s=3.0, frequency_hz=1 / 3
    )


POINTS = ((0.0, 0.1), (0.3, 0.4), (0.5, 0.35), (1.1, 0.6), (1.2, 0.7))


@pytest.mark.parametrize(("start", "end"), [(0.0, 0.0), (0.4, -0.2)])
def test_spline_agrees_with_another_basis(start, end):
    phases = plan_segment("spline", start_speed=start, end_speed=end, points=POINTS)
    t, x = np.array(POINTS).T
    other = make_interp_spline(t, x, k=3, bc_type=([(1, start)], [(1, end)]))  # B-splines: another algorithm
    for phase, begin in zip(phases, t[:-1], strict=True):
        tau = np.linspace(0.0, phase.duration_s, 5)
        for order, ours in enumerate(phase.kinematics(tau)[:3]):
            expected = other(begin + tau, nu=order) - (x[0] if order == 0 else 0.0)
            if order == 2:  # the spline of scipy gives the right limit at a point: compare inside
                ours, expected = ours[:-1], expected[:-1]
            np.testing.assert_allclose(ours, expected, rtol=1e-10, atol=1e-10)


def test_spline_is_the_smoothest():
    """Any other curve through the points with these ends has a larger mean square of acceleration."""
    phases = plan_segment("spline", start_speed=0.0, points=POINTS)

    def cost(bump):
        total = 0.0
        for phase in phases:
            h = phase.duration_s

            def integrand(s, phase=phase, h=h):
                u = s / h  # u²(1−u)² vanishes with its slope at both points
                return (float(phase.kinematics(s)[2]) + bump * (2 - 12 * u + 12 * u * u) / h**2) ** 2

            total += quad(integrand, 0.0, h)[0]
        return total

    assert cost(0.0) < min(cost(0.01), cost(-0.01))


@pytest.mark.parametrize(
    ("law", "start", "columns", "column", "text"),
    [
        ("sinusoid", 0.0, {"amplitude": 1.0, "frequency_hz": 1.0}, "cycles", "two of"),
        ("sinusoid", 0.0, {"frequency_hz": 1.0, "cycles": 1.0}, "amplitude", "Fill in"),
        ("sinusoid", 0.0, {"amplitude": 1.0, "frequency_hz": 1.0, "cycles": 0.3}, "cycles", "half a cycle"),
        ("sinusoid", 0.0, {"amplitude": 1.0, "frequency_hz": 1.0, "duration_s": 2.2}, "duration", "half a cycle"),
        ("sinusoid", 0.0, {"amplitude": 1.0, "frequency_hz": 1.0, "cycles": 1.0, "duration_s": 2.0}, "duration",
         "1 s, which follows"),
        ("sinusoid", 0.0, {"amplitude": 1.0, "frequency_hz": 1.0, "cycles": 1.0, "speed_max": 6.0}, "maximum speed",
         "6.28319"),
        ("sinusoid", 1.0, {"amplitude": 1.0, "frequency_hz": 1.0, "cycles": 1.0}, "motion law", "start from rest"),
        ("spline", 0.0, {"points": ((0.0, 0.0),)}, "motion law", "two rows"),
        ("spline", 0.0, {"points": ((0.0, 0.0), (1.0, 1.0), (1.0, 2.0))}, "duration", "point 3"),
        ("spline", 0.0, {"points": ((0.5, 0.0), (1.0, 1.0))}, "duration", "start at 0"),
        ("spline", 0.0, {"points": ((0.0, 0.0), (1.0, 1e300))}, "displacement", "unit"),
    ],
)  # fmt: skip
def test_refusals(law, start, columns, column, text):
    with pytest.raises(MotionError) as caught:
        plan_segment(law, start_speed=start, **columns)
    assert caught.value.column == column
    assert text in str(caught.value)
