"""Screws against worked examples: torque at the screw shaft from force, thread and collar friction.

Codes: S printed number seen in the source or in an openly published solution of that textbook; I inputs seen,
output computed from the stated definition; M quoted from memory; D follows from the definition. The mean
thread diameter of the sources is what counts for the lead angle, and is entered as the screw's diameter.
"""

import math

import pytest

from actuator_sizing.core.mechanisms.screw import screw_efficiencies
from tests.bare_axis import HORSEPOWER_W, INCH_M, POUND_FORCE_N, POUND_INCH_NM, RPM, axis, steady


def torques(lead, mean_diameter, friction, force, collar_torque=0.0):
    """Torque to raise and to lower against a force, both as the sources count them: positive is driving."""
    values = {"lead": lead, "moving mass": 0.0, "screw diameter": mean_diameter,
              "thread friction coefficient": friction, "driven shaft friction torque": collar_torque}  # fmt: skip
    up = axis("lead screw", values, steady(lead, process_effort=force)).shaft_torque_nm
    # The force still opposes positive motion; downwards the torque is negative where the screw must be driven.
    down = -axis("lead screw", values, steady(-lead, process_effort=force)).shaft_torque_nm
    return up, down


@pytest.mark.published("A3.1")
def test_double_start_square_thread_with_collar():
    """Budynas & Nisbett, Shigley's Mechanical Engineering Design, Example 8-1 [M]: 26.18, 9.77 N·m, 0.311."""
    up, down = torques(8e-3, 30e-3, 0.08, 6400.0, 6400.0 * 0.08 * 20e-3)
    # half of the last printed digit, then the digits of the recomputed figure
    assert up == pytest.approx(26.18, abs=5e-3)
    assert up == pytest.approx(26.1770, abs=5e-5)
    assert down == pytest.approx(9.77, abs=5e-3)
    assert down == pytest.approx(9.77443, abs=5e-6)
    assert 6400.0 * 8e-3 / (math.tau * up) == pytest.approx(0.311294, abs=5e-7)


@pytest.mark.published("A3.2")
def test_square_thread_in_inches():
    """Wentzell, Machine Design, Ex. 18.1-18.2 pp. 399-400 [S]: two screws share 5800 lb."""
    lead, mean, friction = INCH_M / 3.0, 1.354 * INCH_M, 0.15
    up, down = torques(lead, mean, friction, 2900.0 * POUND_FORCE_N)
    assert up / POUND_INCH_NM == pytest.approx(453.68, abs=5e-3)
    assert math.degrees(math.atan(lead / (math.pi * mean))) == pytest.approx(4.48, abs=5e-3)
    forward, back = screw_efficiencies(lead, mean, friction)
    assert 100.0 * forward == pytest.approx(33.91, abs=5e-3)
    assert up * 175.0 * RPM / HORSEPOWER_W == pytest.approx(1.26, abs=5e-3)
    # said to be self-locking: it must be driven down, and holds without torque
    assert back < 0.0
    assert down > 0.0


@pytest.mark.published("A3.3")
def test_triple_start_square_thread():
    """Bhandari, Design of Machine Elements, Ex. 6.1 [S]: 204.644 and 87.402 N·m, collar 100/65 mm, uniform wear."""
    collar = 15e3 * 0.15 * (0.100 + 0.065) / 4.0
    up, down = torques(24e-3, 46e-3, 0.15, 15e3, collar)
    assert up == pytest.approx(204.644, abs=5e-4)
    assert down == pytest.approx(
        87.402, abs=5e-3
    )  # printed 87.402, recomputed 87.4015: within its last digit
    assert down == pytest.approx(87.4015, abs=5e-5)


@pytest.mark.published("A3.4")
def test_triple_start_trapezoidal_thread():
    """Jindal, Machine Design, Ex. 16-2 p. 451 [I]: half flank angle 15°, hence friction 0.12/cos 15°.

    The open solution of this example divides integers, so that its own figures are off; recomputed ones here.
    """
    up, down = torques(21e-3, 46.5e-3, 0.12 / math.cos(math.radians(15.0)), 20e3, 20e3 * 0.15 * 20e-3)
    assert up == pytest.approx(186.879, abs=5e-4)
    assert down == pytest.approx(51.0826, abs=5e-5)
    assert 20e3 * 21e-3 / (math.tau * up) == pytest.approx(0.357691, abs=5e-7)


@pytest.mark.published("A3.5")
def test_ball_screw_drive_torque():
    """Wentzell, Ex. 18.4 p. 405 [S]: 256.65 lb·in and 0.48 hp with the coefficient 0.177 for 1/(2π 0.9)."""
    load = steady(0.5 * INCH_M * 116.67 / 60.0, process_effort=2900.0 * POUND_FORCE_N)
    values = {"lead": 0.5 * INCH_M, "moving mass": 0.0, "efficiency": 0.9}
    torque = axis("ball screw", values, load).shaft_torque_nm
    assert torque / POUND_INCH_NM == pytest.approx(256.416, abs=5e-4)
    assert torque / POUND_INCH_NM == pytest.approx(256.65, rel=5e-4 / 0.177)  # 0.177 has three digits
    assert torque * 116.67 * RPM / HORSEPOWER_W == pytest.approx(0.48, abs=0.005 + 1e-3)  # the same rounding


@pytest.mark.published("A3.6")
def test_torque_from_the_definition_of_efficiency():
    """engineeringprep.com, problem 516 [S]: 20 kN on 10 mm lead at 70 % ask for 45.5 N·m."""
    values = {"lead": 10e-3, "moving mass": 0.0, "efficiency": 0.7}
    torque = axis("lead screw", values, steady(0.01, process_effort=20e3)).shaft_torque_nm
    assert torque == pytest.approx(45.5, abs=0.05)
    assert torque == pytest.approx(45.4728, abs=5e-5)


@pytest.mark.published("A3.13")
def test_limit_of_self_locking():
    """Statics textbooks, e.g. adaptivebooks.org 5.6.1 [S: below 50 %; D]: lead angle = friction angle."""
    friction, mean = 0.15, 20e-3
    lead = math.pi * mean * friction
    assert math.degrees(math.atan(lead / (math.pi * mean))) == pytest.approx(8.53077, abs=5e-6)
    forward, back = screw_efficiencies(lead, mean, friction)
    assert forward == pytest.approx(0.488750, abs=5e-7)  # (1 − μ²)/2
    assert back == pytest.approx(0.0, abs=1e-14)  # rounding of tan(λ − ρ)
    assert (
        screw_efficiencies(0.99 * lead, mean, friction)[1]
        < 0.0
        < screw_efficiencies(1.01 * lead, mean, friction)[1]
    )


@pytest.mark.published("A3.14")
def test_single_start_square_thread_with_collar():
    """Jindal, Ex. 16-1 p. 450 [S]: 110.148 N·m."""
    up, _ = torques(6e-3, 27e-3, 0.2, 20e3, 20e3 * 0.15 * 12e-3)
    assert up == pytest.approx(110.148, abs=5e-4)


@pytest.mark.published("A3.15")
def test_screw_jack():
    """adaptivebooks.org, Statics 5.6.1 problem 2 [S]: 2840 lb·in, printed to three digits."""
    up, _ = torques(0.5 * INCH_M, 2.0 * INCH_M, 0.2, 10_000.0 * POUND_FORCE_N)
    assert up / POUND_INCH_NM == pytest.approx(2840.0, abs=5.0)
    assert up / POUND_INCH_NM == pytest.approx(2840.99, abs=5e-3)


@pytest.mark.published("A3.17")
def test_worm_drive():
    """Wentzell, Ex. 13.6 p. 294 [S]: 0.73 at 4.77° and 0.03; 180 lb·in times 60 times 0.73 = 7884 lb·in."""
    mean = 50e-3  # cancels out
    forward, _ = screw_efficiencies(math.pi * mean * math.tan(math.radians(4.77)), mean, 0.03)
    assert forward == pytest.approx(0.73, abs=5e-3)
    assert forward == pytest.approx(0.733714, abs=5e-7)
    # The book goes on with 0.73 as rounded; 5 hp at 1750 rpm are 180.08 lb·in, printed 180.
    load = steady(1750.0 * RPM / 60.0, process_effort=7884.0 * POUND_INCH_NM)
    made = axis("rotary load", {"load inertia": 0.0}, load, gearheads=[{"ratio": 60.0, "efficiency": 0.73}])
    assert made.pairs.torque_peak_nm[0] / POUND_INCH_NM == pytest.approx(180.0, rel=1e-12)
    assert 5.0 * HORSEPOWER_W / (1750.0 * RPM) / POUND_INCH_NM == pytest.approx(180.0, abs=0.5)
