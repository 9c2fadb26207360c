"""Motion laws against printed coefficients.

Sources
-------
[N] R. L. Norton, Cam Design and Manufacturing Handbook, 2nd ed. 2009, factor table of the family of
    sine–constant–cosine accelerations. The acceleration coefficients were read in a reproduction of the
    table; speed and jerk coefficients are quoted from memory and agree with the definition.
[B] L. Biagiotti, C. Melchiorri, Trajectory Planning for Automatic Machines and Robots, Springer 2008,
    Example 3.9, quoted from memory.
[G] Gupta, Manglik & Manglik, Utilization of Electrical Energy and Traction, Ex. 7.3, p. 204.
[M] Modelica Standard Library, Blocks.Sources.KinematicPTP and MultiBody.Examples.Systems.RobotR3.OneAxis:
    the inputs; the result follows from the documented formula T = q/v + v/a.
[D] Pure mathematics from the definition, nothing printed.
"""

import math

import numpy as np
import pytest

from actuator_sizing.core.motion_laws import LAWS, plan_segment
from actuator_sizing.core.quadrature import integrate, lobatto

# law, columns, (C_v, tolerance), (C_a, tolerance), (C_j, tolerance) or None, (RMS acceleration, tolerance), source
COEFFICIENTS = [
    # Half the last printed digit, or rounding where the value is exact; the RMS values are all [D].
    ("modified trapezoid", {}, (2.0, 1e-3), (4.8881, 5e-5), (61.43, 5e-3), (4.23324, 5e-6)),  # [N]
    ("triangular", {}, (2.0, 1e-12), (4.0, 1e-12), None, (4.0, 1e-12)),  # [N]
    ("trapezoid", {}, (1.5, 1e-12), (4.5, 1e-12), None, (3.67423, 5e-6)),  # [D]
    ("cycloidal", {}, (2.0, 1e-12), (6.2832, 5e-5), (39.478, 5e-4), (4.44288, 5e-6)),  # [N]
    ("simple harmonic", {}, (1.571, 5e-4), (4.9348, 5e-5), None, (3.48943, 5e-6)),  # [N]
    # 60 is printed exactly; 5.7735 is 10/√3 to its digits.
    ("3-4-5 polynomial", {}, (1.875, 1e-12), (5.7735, 5e-5), (60.0, 1e-12), (4.14039, 5e-6)),  # [N]
    # Four equal quarters of constant jerk. [D]
    (
        "jerk-limited", {"acceleration_share": 0.5, "jerk_share": 0.5},
        (2.0, 1e-12), (8.0, 1e-12), (32.0, 1e-11), (4.6188, 5e-6),
    ),
]  # fmt: skip


def maximum(phases, order):
    """Largest magnitude on a grid that holds the ends and the middle of each phase, where these laws peak."""
    grid = np.concatenate([np.linspace(0.0, 1.0, 20001), [0.5 - math.sqrt(3.0) / 6.0]])  # peak of 3-4-5
    return max(float(np.abs(phase.kinematics(grid * phase.duration_s)[order]).max()) for phase in phases)


def rms_acceleration(phases):
    nodes = 0.5 * (lobatto()[0] + 1.0)
    duration = np.array([phase.duration_s for phase in phases])
    squared = np.array([phase.kinematics(nodes * phase.duration_s)[2] ** 2 for phase in phases])
    return math.sqrt(integrate(duration, squared) / duration.sum())


@pytest.mark.published("A1.1", "A1.2", "A1.3", "A1.4", "A1.5", "A1.6", "A1.10")
@pytest.mark.parametrize(("law", "columns", "speed", "acceleration", "jerk", "rms"), COEFFICIENTS)
def test_coefficients(law, columns, speed, acceleration, jerk, rms):
    phases = plan_segment(law, start_speed=0.0, displacement=1.0, duration_s=1.0, **columns)
    assert maximum(phases, 1) == pytest.approx(speed[0], abs=speed[1])
    assert maximum(phases, 2) == pytest.approx(acceleration[0], abs=acceleration[1])
    if jerk is not None:
        assert maximum(phases, 3) == pytest.approx(jerk[0], abs=jerk[1])
    assert rms_acceleration(phases) == pytest.approx(rms[0], abs=rms[1])


@pytest.mark.parametrize(
    ("law", "speed", "acceleration", "rms"),
    # Computed from the definitions to three decimals. [D]
    [("modified sine", 1.760, 5.528, 3.909), ("4-5-6-7 polynomial", 2.188, 7.513, 5.045)],
)
def test_coefficients_from_the_definition(law, speed, acceleration, rms):
    phases = plan_segment(law, start_speed=0.0, displacement=1.0, duration_s=1.0)
    assert LAWS[law].peak_speed == pytest.approx(speed, abs=5.01e-4)  # 2.1875 is printed 2.188
    assert LAWS[law].peak_acceleration == pytest.approx(acceleration, abs=5e-4)
    assert rms_acceleration(phases) == pytest.approx(rms, abs=5e-4)


@pytest.mark.published("A1.7")
def test_double_s_stage_lengths():
    """[B]: limits 5, 10, 30 give a stop in 0.8333 s with jerk ramps of 0.3333 s.

    The example starts at speed 1; only its stop from full speed to rest is a stage of a move from rest.
    """
    phases = plan_segment(
        "jerk-limited",
        start_speed=0.0,
        displacement=10.0,
        speed_max=5.0,
        acceleration_max=10.0,
        jerk_max=30.0,
    )
    stop = [phase.duration_s for phase in phases[-3:]]
    assert sum(stop) == pytest.approx(0.8333, abs=5e-5)
    assert stop[0] == pytest.approx(0.3333, abs=5e-5)
    assert stop[2] == pytest.approx(0.3333, abs=5e-5)


@pytest.mark.published("A1.8")
def test_asymmetric_trapezoid():
    """[G]: 1.5 km in 100 s at 2.4 and 3.2 km/h/s asks for 74 km/h (73.92 by the formula)."""
    speed = 73.9231  # km/h; gives the shares below, of which the peak speed must be the same again
    phases = plan_segment(
        "trapezoid",
        start_speed=0.0,
        displacement=1500.0,
        duration_s=100.0,
        acceleration_share=speed / 2.4 / 100.0,
        deceleration_share=speed / 3.2 / 100.0,
    )
    # m/s to km/h: 3.6. The printed speed has no decimals; the recomputed one has four.
    assert 3.6 * maximum(phases, 1) == pytest.approx(74.0, abs=0.5)
    assert 3.6 * maximum(phases, 1) == pytest.approx(speed, abs=1e-3)
    rates = [3.6 * abs(float(phases[k].kinematics(0.0)[2])) for k in (0, 2)]
    assert rates == pytest.approx([2.4, 3.2], abs=1e-4)


@pytest.mark.published("A1.9")
def test_fastest_trapezoid():
    """[M]: 120° at 3 rad/s and 10 rad/s²."""
    phases = plan_segment(
        "trapezoid", start_speed=0.0, displacement=math.radians(120.0), speed_max=3.0, acceleration_max=10.0
    )
    assert phases[0].duration_s == pytest.approx(0.3, rel=1e-12)
    assert sum(phase.duration_s for phase in phases) == pytest.approx(0.998132, abs=5e-7)
