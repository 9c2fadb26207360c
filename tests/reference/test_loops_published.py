"""Loops and resonances as published; codes S: printed number seen, I: inputs seen, M: from memory, D: derived."""

import math

import numpy as np
import pytest

from actuator_sizing.core.frequency import margins, step_figures
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.propagation import respond
from actuator_sizing.core.tuning import absolute_optimum, symmetrical_optimum


def step_of(numerator, denominator, duration, step):
    """Unit step response of a transfer function by its controllable form, exact at every instant."""
    den = np.asarray(denominator, dtype=float) / denominator[0]
    num = np.zeros(len(den) - 1)
    num[len(num) - len(numerator) :] = np.asarray(numerator, dtype=float) / denominator[0]
    n = len(den) - 1
    A = np.zeros((n, n))
    A[:-1, 1:] = np.eye(n - 1)
    A[-1] = -den[:0:-1]
    B = np.zeros((n, 1))
    B[-1, 0] = 1.0
    count = int(round(duration / step)) + 1
    states = respond(A, B, np.zeros(n), np.ones((count, 1)), step)
    return np.arange(count) * step, states @ num[::-1]


@pytest.mark.published("A7.2")
def test_absolute_optimum():
    """4.3 % overshoot (M, D; W. Leonhard, Control of Electrical Drives): e^-pi, peak at 2 pi T, 65.53 deg."""
    T = 1e-3
    time, value = step_of([1.0], [2 * T * T, 2 * T, 1.0], 40 * T, T / 200)
    found = step_figures(time, value, 1.0)
    assert 100 * found.overshoot_ratio == pytest.approx(4.32139, abs=0.005)
    assert found.peak_time_s / T == pytest.approx(6.28319, abs=1e-4)  # parabola through points T/200 apart
    loop = margins(lambda w: 1.0 / (2 * T * (1j * w) * (1.0 + 1j * w * T)), 1.0, 1e5)
    assert math.degrees(loop.phase_margin_rad) == pytest.approx(65.5302, abs=1e-4)
    assert math.isinf(loop.gain_margin_ratio)


@pytest.mark.published("A7.3")
def test_symmetrical_optimum():
    """43.4 %, 8.1 % with prefilter, 36.87 deg (M, D; the same book)."""
    T = 1e-3
    den = [8 * T**3, 8 * T**2, 4 * T, 1.0]
    time, value = step_of([4 * T, 1.0], den, 80 * T, T / 200)
    assert 100 * step_figures(time, value, 1.0).overshoot_ratio == pytest.approx(43.4104, abs=0.005)
    time, value = step_of([1.0], den, 80 * T, T / 200)
    assert 100 * step_figures(time, value, 1.0).overshoot_ratio == pytest.approx(8.14654, abs=0.005)
    loop = margins(lambda w: (1 + 4j * w * T) / (8 * (1j * w * T) ** 2 * (1 + 1j * w * T)), 1.0, 1e5)
    assert math.degrees(loop.phase_margin_rad) == pytest.approx(36.8699, abs=1e-4)


@pytest.mark.published("A7.3")
def test_symmetrical_optimum_settings_give_that_loop():
    """Our gains put into ``K_p (1 + 1/(s T_i)) K/(s J)/(1 + s T)`` give the loop above (D)."""
    J, K, T = 3e-3, 0.6, 2e-3
    gain, reset, prefilter = symmetrical_optimum(J, K, T)
    s = 1j * 70.0
    mine = gain * (1 + 1 / (s * reset)) * K / (s * J) / (1 + s * T)
    assert mine == pytest.approx((1 + 4 * s * T) / (8 * (s * T) ** 2 * (1 + s * T)), rel=1e-12)
    assert prefilter == 4 * T


@pytest.mark.published("A7.4")
def test_current_loop_by_absolute_optimum():
    """0.75 V/A and 30 ms (I; Modelica Standard Library, DCMachines.DCPM_CurrentControlled; our arithmetic)."""
    assert absolute_optimum(0.05, 1.5e-3, 1e-3) == pytest.approx((0.75, 0.03), rel=1e-12)


@pytest.mark.published("A7.5")
def test_second_order_figures():
    """16/(s²+4s+16): 16.3 %, 0.907 s, 51.83 deg (I; A. Nagoor Kani, Control Systems, Ex. 3.6)."""
    time, value = step_of([16.0], [1.0, 4.0, 16.0], 6.0, 1e-3)
    found = step_figures(time, value, 1.0)
    assert 100 * found.overshoot_ratio == pytest.approx(16.3034, abs=0.001)
    assert found.peak_time_s == pytest.approx(0.906900, abs=1e-5)
    first = np.flatnonzero(value >= 1.0)[0]
    assert time[first] == pytest.approx(0.604600, abs=1e-3)  # one sample
    loop = margins(lambda w: 16.0 / (1j * w * (1j * w + 4.0)), 1e-2, 1e3)
    assert math.degrees(loop.phase_margin_rad) == pytest.approx(51.8273, abs=1e-4)


@pytest.mark.published("A7.1")
def test_geared_two_rotor_system():
    """4.2 Hz (S; B. K. Sarkar, Theory of Machines, illustration 12 p. 298); ratio of both frequencies (D)."""
    G = 84e9
    polar = [math.pi * d**4 / 32 for d in (0.045, 0.090)]
    k_motor, k_pump = G * polar[0] / 0.18, G * polar[1] / 0.45 / 9.0  # the pump turns at a third
    k = 1.0 / (1.0 / k_motor + 1.0 / k_pump)
    plant = Plant(
        resistance_ohm=1.0, inductance_h=1.0, torque_constant_nm_per_a=1.0, motor_inertia_kg_m2=400.0,
        load_inertia_kg_m2=1400.0 / 9.0, stiffness_nm_per_rad=k,
    )  # fmt: skip
    two_pi = 2 * math.pi
    assert plant.resonance_rad_s / plant.antiresonance_rad_s == pytest.approx(1.17851, abs=1e-5)
    assert plant.resonance_rad_s / two_pi == pytest.approx(4.20213, abs=0.01)
    assert plant.antiresonance_rad_s / two_pi == pytest.approx(3.56562, abs=0.01)


@pytest.mark.published("A7.6")
def test_geared_two_rotor_system_in_pounds_and_inches():
    """84.8 Hz (S; T. Bevan, The Theory of Machines, ch. 15, Ex. 11(a), p. 587), gears without inertia.

    The open solution takes g = 32.3 ft/s², which is kept here; with 32.2 ft/s² it is 84.6 Hz.
    """
    g = 32.3 * 12.0  # in/s²
    k = 12e6 * math.pi * 2.75**4 / 32 / 66.5  # lbf·in/rad of the equivalent shaft
    plant = Plant(
        resistance_ohm=1.0, inductance_h=1.0, torque_constant_nm_per_a=1.0, motor_inertia_kg_m2=1500.0 / g,
        load_inertia_kg_m2=50_000.0 * 0.6**2 / g, stiffness_nm_per_rad=k,
    )  # fmt: skip
    assert plant.resonance_rad_s / (2 * math.pi) == pytest.approx(
        84.8, abs=0.05
    )  # half the last printed digit
    assert plant.resonance_rad_s / (2 * math.pi) == pytest.approx(84.7603, abs=5e-4)


@pytest.mark.published("A4.1")
def test_dc_motor_speed_tutorial():
    """Poles −2.0025 and −9.9975, 0.1 rad/s, 2.07 s (S; Control Tutorials, Univ. of Michigan, CC BY-SA)."""
    plant = Plant(
        resistance_ohm=1.0, inductance_h=0.5, torque_constant_nm_per_a=0.01, motor_inertia_kg_m2=0.01,
        motor_viscous_nm_s=0.1,
    )  # fmt: skip
    assert np.sort(plant.poles_per_s().real) == pytest.approx([-9.9975, -2.0025], abs=1e-4)
    step = 1e-3
    states = respond(*plant.matrices(), np.zeros(5), np.tile([1.0, 0.0, 0.0], (6000, 1)), step)
    speed = states[:, 1]
    assert speed[-1] == pytest.approx(0.0999, abs=1e-4)
    figures = step_figures(np.arange(6000) * step, speed, 0.1 * 0.999001)
    assert figures.settling_time_s == pytest.approx(2.0651, abs=2e-3)


@pytest.mark.published("A4.9")
def test_dc_motor_transfer_function():
    """s² + 10.1 s + 101, gain 0.990 (S; Franklin, Powell, Emami-Naeini, 6th ed., Example 3.17)."""
    plant = Plant(
        resistance_ohm=10.0, inductance_h=1.0, torque_constant_nm_per_a=1.0, motor_inertia_kg_m2=0.01,
        motor_viscous_nm_s=0.001,
    )  # fmt: skip
    A = plant.matrices()[0][:2, :2]
    assert np.poly(A) == pytest.approx([1.0, 10.1, 101.0], rel=1e-12)
    gain = -np.linalg.inv(A)[1, 0] / plant.inductance_h
    assert gain == pytest.approx(0.990099, abs=1e-6)
