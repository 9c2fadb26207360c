"""Resistance of the motor cable, and the voltage of a cold motor, against closed forms."""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.case.reading import read_case
from actuator_sizing.core.cable import cable_resistance
from actuator_sizing.core.machine import judge, judge_cold
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.checks import CHECKS
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.made_cases import DIRECT, MOTOR, SURROUNDINGS, case, segment
from tests.unit.case_files import small_case, write_folder

VOLTAGE = next(check for check in CHECKS if check.key == "voltage")
SPEED, TORQUE = 250.0, 1.0
PLAIN = dict(MOTOR, friction_torque_nm=0.0, viscous_friction_nm_s=0.0, peak_torque_nm=np.nan)


def steady(motor, torque=TORQUE, **surroundings):
    """A rotary load turned at one speed against one torque: current and voltage do not change."""
    one = segment(2, "constant speed", start_speed=SPEED, duration_s=1.0, process_effort=torque)
    made = case("rotary load", {"load inertia": 1e-3}, (one,), motors=(motor,), gearheads=(DIRECT,),
                surroundings=replace(SURROUNDINGS, **surroundings))  # fmt: skip
    return evaluate_sets(made, build_demand(made), np.zeros((1, 3), dtype=np.intp))


def voltage(judged, torque=TORQUE, p=4.0):
    K, R, L = (
        float(x[0]) for x in (judged.torque_constant_nm_per_a, judged.resistance_ohm, judged.inductance_h)
    )
    return np.hypot(R * torque / K + K * SPEED, p * SPEED * L * torque / K)


@pytest.mark.parametrize("torque", [0.2, 1.0, 5.0, -1.0])
def test_the_worse_of_hot_and_cold_is_judged(torque):
    sets = steady(PLAIN, torque)
    hot, cold = (voltage(f(sets.motors, sets.surroundings), torque) for f in (judge, judge_cold))
    assert float(sets.pairs.voltage_peak_v[0]) == pytest.approx(max(hot, cold), rel=1e-12)
    assert bool(sets.pairs.voltage_is_cold[0]) == (cold > hot)
    assert ("cold, at the lowest ambient" in VOLTAGE.working(sets, 0)) == (cold > hot)


def test_both_states_govern_somewhere():
    # Cold magnets win at light load, the hot winding at heavy load; else the test above would prove half.
    assert bool(steady(PLAIN, 0.2).pairs.voltage_is_cold[0])
    assert not bool(steady(dict(PLAIN, resistance_ohm=20.0), 1.0).pairs.voltage_is_cold[0])


def test_the_cold_motor_is_at_ambient():
    sets = steady(PLAIN)
    cold = judge_cold(sets.motors, sets.surroundings)
    assert cold.winding_degc.tolist() == cold.magnet_degc.tolist() == [SURROUNDINGS.ambient_degc]
    K = MOTOR["torque_constant_nm_per_a"] * (1.0 - 0.0011 * 10.0)  # 10 K above the reference of 25 °C
    assert float(cold.torque_constant_nm_per_a[0]) == pytest.approx(K, rel=1e-12)


def test_a_stated_lowest_ambient_is_the_cold_one(tmp_path):
    usual, cold = steady(PLAIN, 0.2), steady(PLAIN, 0.2, lowest_ambient_degc=5.0)
    K = MOTOR["torque_constant_nm_per_a"] * (1.0 + 0.0011 * 20.0)  # 20 K below the reference of 25 °C
    judged = judge_cold(cold.motors, cold.surroundings)
    assert float(judged.torque_constant_nm_per_a[0]) == pytest.approx(K, rel=1e-12)
    assert float(cold.pairs.voltage_peak_v[0]) == pytest.approx(voltage(judged, 0.2), rel=1e-12)
    assert float(cold.pairs.voltage_peak_v[0]) > float(usual.pairs.voltage_peak_v[0])
    assert cold.pairs.winding_max_degc[0] == usual.pairs.winding_max_degc[0]  # heat stays with the hot room
    made = read_case(write_folder(tmp_path / "case", with_axis(("lowest ambient temperature", 5, "°C", ""))))
    assert made.surroundings.lowest_ambient_degc == pytest.approx(5.0)
    assert any("lowest ambient of 5 °C" in text for _, text in compare(made).assumptions)


def test_a_lowest_ambient_above_the_ambient_is_a_slip(tmp_path):
    with pytest.raises(InputError, match="lowest ambient temperature"):
        read_case(write_folder(tmp_path / "case", with_axis(("lowest ambient temperature", 90, "°C", ""))))


def test_a_constant_magnet_is_judged_hot_where_the_motor_drives():
    assert not bool(steady(dict(PLAIN, magnet_coefficient_per_k=0.0)).pairs.voltage_is_cold[0])


def test_cable_adds_voltage_and_loss_but_no_heat():
    ohm = cable_resistance(20.0, 1.5e-6)
    # 2 · 20 m of 0.020 Ω·mm²/m at 20 °C, 50 K warmer.
    assert ohm == pytest.approx(2.0 * 20.0 * 0.020 / 1.5 * (1.0 + 0.00393 * 50.0), rel=1e-12)
    without, with_cable = steady(PLAIN), steady(PLAIN, cable_ohm=ohm)
    judged = judge(with_cable.motors, with_cable.surroundings)
    assert float(judged.cable_ohm[0]) == pytest.approx(1.5 * ohm, rel=1e-12)  # per A rms, as the winding
    current = float(with_cable.pairs.current_rms_a[0])
    a, b = without.pairs, with_cable.pairs
    assert float(b.cable_loss_mean_w[0]) == pytest.approx(1.5 * ohm * current**2, rel=1e-12)
    gained = float(b.energy_terminals_motoring_j[0] - a.energy_terminals_motoring_j[0])
    assert gained == pytest.approx(1.5 * ohm * current**2, rel=1e-9)  # over the cycle of one second
    assert float(b.voltage_peak_v[0]) > float(a.voltage_peak_v[0])
    for name in ("winding_max_degc", "copper_loss_mean_w", "resistance_ohm", "current_peak_a"):
        assert getattr(a, name)[0] == pytest.approx(getattr(b, name)[0], rel=1e-12), name
    assert float(a.cable_loss_mean_w[0]) == 0.0


def with_axis(*rows):
    tables = small_case()
    tables["axis"] += [list(row) for row in rows]
    return tables


def test_cable_of_a_case(tmp_path):
    rows = [("motor cable length", 20, "m", ""), ("motor cable cross-section", 1.5, "mm²", "")]
    made = read_case(write_folder(tmp_path / "case", with_axis(*rows)))
    assert made.surroundings.cable_ohm == pytest.approx(cable_resistance(20.0, 1.5e-6), rel=1e-12)


def test_half_a_cable_is_a_problem(tmp_path):
    with pytest.raises(InputError, match="motor cable cross-section"):
        read_case(write_folder(tmp_path / "case", with_axis(("motor cable length", 20, "m", ""))))
