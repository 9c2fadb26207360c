"""Operating points of DC machines printed by others; S seen, I inputs seen, M from memory, D derived."""

import math

import numpy as np
import pytest

from actuator_sizing.core.capability import terminal_voltage, voltage_limited_current
from actuator_sizing.core.materials import resistance_factor
from actuator_sizing.core.step_response import voltage_step
from actuator_sizing.units import parse_unit, to_si

RPM = math.tau / 60.0


def voltage(current, speed, R, K):
    return float(terminal_voltage(*(np.float64(value) for value in (current, speed, 0.0, R, 0.0, K, 0.0))))


@pytest.mark.published("A4.2")
def test_no_load_point_with_viscous_loss():
    """Krause, Wasynczuk & Sudhoff, Analysis of Electric Machinery, PM motor example [I; 3350 rpm, 0.15 A from M]."""
    step = voltage_step(7.0, 0.120, 1.41e-2, 1e-6, 6.04e-6, 6.0)
    assert step.final_speed_rad_s / RPM == pytest.approx(3350.0, abs=5.0)  # printed to three digits
    assert step.final_speed_rad_s / RPM == pytest.approx(3350.91, abs=0.005)
    assert step.final_current_a == pytest.approx(0.15, abs=1e-3)
    assert step.final_current_a == pytest.approx(0.150317, abs=5e-7)
    assert step.electrical_time_constant_s == pytest.approx(0.0171429, abs=5e-8)


@pytest.mark.published("A4.3")
def test_speed_torque_line():
    """Textbook formulas [D]: 6 V, 7 Ω, 1.41e-2 V·s/rad, no-load current 0.15 A."""
    R, K, U, I_0 = 7.0, 1.41e-2, 6.0, 0.15
    stall = voltage_step(R, 0.0, K, 1e-6, 0.0, U).peak_current_a  # at standstill, without inductance
    assert stall == pytest.approx(0.857143, abs=5e-7)
    assert K * stall == pytest.approx(0.0120857, abs=5e-8)
    speed = np.linspace(0.0, U / K, 20001)
    current = voltage_limited_current(np.float64(U), speed, np.float64(R), np.float64(K), np.float64(0.0))[0]
    assert np.max(K * current * speed) == pytest.approx(U**2 / (4 * R), abs=1e-6)
    assert np.max(K * current * speed) == pytest.approx(1.28571, abs=5e-6)
    shaft = K * (current - I_0) * speed
    running = current > 1e-6
    efficiency = shaft[running] / (U * current[running])
    best = np.argmax(efficiency)
    assert efficiency[best] == pytest.approx(0.338340, abs=1e-6)
    assert current[running][best] == pytest.approx(0.358569, abs=2e-4)  # flat top on a grid of 4e-5 A


@pytest.mark.published("A4.4")
def test_constant_from_a_no_load_test():
    """Fitzgerald, Kingsley & Umans, Electric Machinery, 6th ed., Ex. 7.9 p. 389 [S]: 0.22 V·s/rad, 61 W, 275 W.

    The book rounds the constant to 0.22 before its last step, which is why the shaft power uses 0.22 here.
    """
    R = 1.03
    K = (50.0 - 1.25 * R) / (2100.0 * RPM)
    assert K == pytest.approx(0.22, abs=0.005)
    assert voltage(1.25, 2100.0 * RPM, R, K) == pytest.approx(50.0, abs=1e-12)
    rotational = K * 1.25 * 2100.0 * RPM
    assert rotational == pytest.approx(61.0, abs=0.5)
    assert rotational == pytest.approx(60.8906, abs=5e-5)
    speed = 1700.0 * RPM
    current = voltage_limited_current(*(np.float64(v) for v in (48.0, speed, R, 0.22, 0.0)))[0]
    assert 0.22 * speed * current - 61.0 == pytest.approx(275.0, abs=1.0)


@pytest.mark.published("A4.5")
def test_nominal_point():
    """Modelica Standard Library (BSD-3), DcPermanentMagnetData and DCPM_Start [S]: 95 V, 63.66 N·m, 1500 rpm."""
    K = 95.0 / (1425.0 * RPM)
    assert pytest.approx(0.636620, abs=5e-7) == K
    assert pytest.approx(63.66, abs=0.005) == K * 100.0
    assert voltage(100.0, 1425.0 * RPM, 0.05, K) == pytest.approx(100.0, abs=1e-12)
    step = voltage_step(0.05, 1.5e-3, K, 0.15, 0.0, 100.0)
    assert step.final_speed_rad_s / RPM == pytest.approx(1500.0, abs=1e-6)
    assert step.electrical_time_constant_s == pytest.approx(0.03, abs=1e-12)
    assert step.mechanical_time_constant_s == pytest.approx(0.0185055, abs=5e-8)


@pytest.mark.published("A4.6")
def test_nominal_point_with_all_losses():
    """Modelica Standard Library, DCMachines.DCPM_withLosses, documentation [S]: 94.5 V, 9100 W, 61.3 N·m."""
    hot = 0.03864 * resistance_factor(95.0, 20.0, 1.0 / 0.00392 - 20.0)  # coefficient stated at 20 °C
    assert hot == pytest.approx(0.05, abs=1e-5)
    assert hot * 100.0**2 == pytest.approx(500.0, abs=0.05)
    speed, brush, stray_core_friction = 1417.5 * RPM, 0.5, 50.0 + 200.0 + 100.0
    inner = 100.0 - brush - hot * 100.0
    assert voltage(100.0, speed, hot, inner / speed) == pytest.approx(100.0 - brush, abs=1e-12)
    assert inner == pytest.approx(94.5, abs=0.005)
    shaft = inner * 100.0 - stray_core_friction
    assert shaft == pytest.approx(9100.0, abs=0.5)
    assert shaft / speed == pytest.approx(61.3, abs=0.005)


@pytest.mark.published("A6.7")
def test_no_load_speed_from_a_speed_constant():
    """Wikipedia, Motor constants, as carried by fxsolver.com [S]: 5700 rpm/V at 11.1 V turn at 63 270 rpm."""
    K = 1.0 / to_si(5700.0, parse_unit("rpm/V", "speed constant"))
    step = voltage_step(0.1, 0.0, K, 1e-6, 0.0, 11.1)
    assert step.final_speed_rad_s / RPM == pytest.approx(63270.0, rel=1e-12)
