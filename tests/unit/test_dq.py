"""The sinusoidal machine in dq states: against integration of its equations, and within its limits."""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from actuator_sizing.core.cascade_kernel import CURRENT_INTEGRATOR, DIRECT_INTEGRATOR, compiled_loop
from actuator_sizing.core.control import Cascade, LoopSettings
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.tuning import default_tuning

POLE_PAIRS = 5
PLANT = Plant(
    resistance_ohm=1.2, inductance_h=4e-3, torque_constant_nm_per_a=0.5, motor_inertia_kg_m2=2e-4,
    load_inertia_kg_m2=8e-4, motor_viscous_nm_s=1e-3, reactance_ohm_s=POLE_PAIRS * 4e-3,
)  # fmt: skip
BASE = LoopSettings(
    sample_time_s=1 / 16_000, position_gain_per_s=0.0, speed_gain_a_s_per_rad=0.0, speed_reset_time_s=math.inf,
    current_gain_v_per_a=0.0, current_reset_time_s=math.inf, back_emf_feedforward_ratio=0.0, is_delayed=False,
    is_dq=True,
)  # fmt: skip


def integrated(voltages, duration):
    """End of the textbook equations of both axes with equal inductances, voltages held."""
    p = PLANT
    L, J, b = p.inductance_h, p.total_inertia_kg_m2, p.motor_viscous_nm_s

    def right(_t, y):
        i_d, i_q, w = y
        return [
            (voltages[0] - p.resistance_ohm * i_d + POLE_PAIRS * w * L * i_q) / L,
            (voltages[1] - p.resistance_ohm * i_q - POLE_PAIRS * w * L * i_d
             - p.torque_constant_nm_per_a * w) / L,
            (p.torque_constant_nm_per_a * i_q - b * w) / J,
        ]  # fmt: skip

    return solve_ivp(right, (0.0, duration), np.zeros(3), rtol=1e-11, atol=1e-12, method="DOP853").y[:, -1]


def held(voltages, duration, rate):
    """The loop with all gains at zero: its integrators hold the voltages."""
    cascade = Cascade(PLANT, replace(BASE, sample_time_s=1.0 / rate))
    cascade.state[DIRECT_INTEGRATOR], cascade.state[CURRENT_INTEGRATOR] = voltages
    n = round(duration * rate) + 1
    zero = np.zeros(n)
    seen = cascade.advance(zero, zero, zero, zero)
    return np.array([seen["direct_current"][-1], seen["current"][-1], seen["motor_speed"][-1]])


@pytest.mark.parametrize("voltages", [(0.0, 60.0), (-20.0, 60.0)])
def test_held_voltages_agree_with_integration_to_second_order(voltages):
    """The splitting errs by the square of the step: a tenth of it by a hundredth, down to 1e-6 at 1 MHz."""
    reference = integrated(voltages, 0.03)
    scale = np.abs(reference).max()
    coarse, fine, finest = (
        np.abs(held(voltages, 0.03, rate) - reference).max() / scale for rate in (16_000, 160_000, 1_000_000)
    )
    assert coarse < 1e-3
    assert fine == pytest.approx(coarse / 100.0, rel=0.05)
    assert finest < 1e-6


def moved(settings, plant=PLANT):
    n = 6000
    t = np.arange(n) * settings.sample_time_s
    end = n * settings.sample_time_s
    angle = 60.0 * (t / end - np.sin(2 * np.pi * t / end) / (2 * np.pi))
    speed = 60.0 / end * (1.0 - np.cos(2 * np.pi * t / end))
    zero = np.zeros(n)
    seen = Cascade(plant, settings).advance(angle, speed, zero, zero)
    return angle, seen


def test_the_loop_holds_the_direct_axis_near_zero_and_moves_as_the_equivalent_machine():
    """Decoupled: 5 % of the torque current left by delay; the error of the angle within 5 % of the equivalent's."""
    s = replace(default_tuning(PLANT, replace(BASE, is_dq=False)).settings, back_emf_feedforward_ratio=1.0)
    angle, one = moved(s)
    _, both = moved(replace(s, is_dq=True))
    assert "direct_current" not in one
    assert 0.0 < np.abs(both["direct_current"]).max() < 0.05 * np.abs(both["current"]).max()
    lags = [np.abs(angle - seen["motor_angle"]).max() for seen in (one, both)]
    assert lags[1] == pytest.approx(lags[0], rel=0.05)


@pytest.mark.parametrize("limit", [110.0, 150.0])
def test_the_voltage_stays_within_its_circle(limit):
    s = replace(default_tuning(PLANT, replace(BASE, is_dq=False)).settings, back_emf_feedforward_ratio=1.0,
                is_dq=True, voltage_limit_v=limit)  # fmt: skip
    _, seen = moved(s)
    size = np.hypot(seen["voltage"], seen["direct_voltage"])
    assert size.max() <= limit * (1.0 + 1e-12)
    assert (seen["saturated"] & 2).any()
    assert np.abs(seen["direct_voltage"]).max() > 1.0


def test_without_reactance_there_is_no_direct_axis():
    plant = replace(PLANT, reactance_ohm_s=0.0)
    s = default_tuning(plant, replace(BASE, is_dq=False)).settings
    (_, one), (_, both) = moved(s, plant), moved(replace(s, is_dq=True), plant)
    assert np.array_equal(one["motor_angle"], both["motor_angle"])
    assert not both["direct_current"].any()


@pytest.mark.skipif(compiled_loop() is None, reason="the optional compiler is not installed")
def test_machine_code_gives_the_same_states():
    s = replace(default_tuning(PLANT, replace(BASE, is_dq=False)).settings, is_dq=True, voltage_limit_v=90.0)
    zero, speed = np.zeros(3000), np.full(3000, 60.0)
    plain, fast = (
        Cascade(PLANT, s, is_compiled=c).advance(zero, speed, zero, zero) for c in (False, True)
    )  # fmt: skip
    for name, values in plain.items():
        np.testing.assert_allclose(fast[name], values, rtol=1e-9, atol=1e-12)
