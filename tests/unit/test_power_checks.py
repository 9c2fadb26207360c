"""Checks of bus, supply, stopping and holding: at the limit, on each side, and with a datum missing."""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.core.mechanisms.base import GRAVITY_M_S2
from actuator_sizing.sizing.checks import CHECKS
from actuator_sizing.sizing.checks.motor import current_limited_torque
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.joint_bus import bus_results
from actuator_sizing.sizing.judging import active_checks, check_results, judge_sets
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, NOT_CHECKED, PASSES
from actuator_sizing.sizing.shortlist import evaluate_sets
from actuator_sizing.sizing.stops import brake_stops, controlled_stops, drop_distance, stop_quantities
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, case, cycle

LIFT = {"lead": 0.02, "moving mass": 30.0, "inclination": np.pi / 2, "driven shaft inertia": 2e-4}
MOVES = cycle(
    {"law": "trapezoid", "displacement": 0.6, "duration_s": 1.0, "payload": 20.0},
    {"law": "dwell", "duration_s": 0.5, "payload": 20.0},
    {"law": "trapezoid", "displacement": -0.6, "duration_s": 1.0, "payload": 20.0},
    {"law": "dwell", "duration_s": 0.5},
)
RECTIFIER = {"supply feeds back": "no", "stop reaction time": 0.05}
BRAKED = dict(MOTOR, brake_torque_nm=6.0)


def sets_of(
    *, motor=MOTOR, gearhead=DIRECT, drive=DRIVE, values=LIFT, segments=MOVES, columns=None, **options
):
    made = case("ball screw", values, segments, motors=(motor,), gearheads=(gearhead,), drives=(drive,),
                options={**RECTIFIER, **options})  # fmt: skip
    if columns:
        known = {key: np.array([value]) for key, value in columns.items()}
        made = replace(made, motors=replace(made.motors, values={**made.motors.values, **known}))
    return evaluate_sets(made, build_demand(made), np.zeros((1, 3), dtype=np.intp))


def verdict(sets, key):
    checks, limits = active_checks(sets.case.limits)
    results = check_results(sets, judge_sets(sets, checks, limits), 0)
    found = [result for result in results if result.check == key]
    return found[0] if found else None


BRAKE = {"brake_closing_time": 0.04, "brake_energy_per_stop": 500.0}
RESISTOR = {"brake resistor": 60.0, "chopper threshold": 380.0, "brake resistor continuous power": 500.0,
            "brake resistor pulse energy": 1000.0}  # fmt: skip


def test_without_chopper_the_lowered_load_pumps_up_the_bus():
    sets = sets_of()
    found = verdict(sets, "bus_maximum_voltage")
    assert found.verdict == FAILS
    # What comes back at the terminals, times the drive's efficiency, all stays on the capacitors.
    regenerated = float(sets.pairs.energy_terminals_regenerated_j[0]) * 0.95
    expected = np.sqrt(360.0**2 + 2.0 * regenerated / 5e-4)
    assert found.demand == pytest.approx(expected, rel=1e-9)
    assert found.segment == "segment 4"


def test_without_capacitance_or_clamp_the_bus_is_not_checked():
    found = verdict(sets_of(drive=dict(DRIVE, capacitance_f=np.nan)), "bus_maximum_voltage")
    assert found.verdict == NOT_CHECKED
    assert found.missing == ("internal capacitance",)
    clamped = sets_of(drive=dict(DRIVE, capacitance_f=np.nan), **RESISTOR)
    assert verdict(clamped, "bus_maximum_voltage").demand == 380.0


@pytest.mark.parametrize(("limit", "expected"), [(381.0, PASSES), (380.0, PASSES), (379.9, FAILS)])
def test_a_chopper_within_the_range_of_the_drive_is_a_matter_of_fit(limit, expected):
    sets = sets_of(drive=dict(DRIVE, bus_voltage_max_v=limit), **RESISTOR)
    found = verdict(sets, "bus_maximum_voltage")
    assert found.demand == 380.0
    assert found.verdict == expected  # no reserve is asked of a level that the cycle cannot raise
    checks, limits = active_checks(sets.case.limits)
    verdicts = judge_sets(sets, checks, limits)
    governs = checks[int(verdicts.governing[0])].key == "bus_maximum_voltage"
    assert governs == (expected == FAILS)


def test_what_is_not_clamped_governs_by_its_number():
    big = sets_of(drive=dict(DRIVE, capacitance_f=0.05))
    found = verdict(big, "bus_maximum_voltage")
    assert 360.0 < found.demand < 420.0
    checks, limits = active_checks(big.case.limits)
    verdicts = judge_sets(big, checks, limits)
    column = [c.key for c in checks].index("bus_maximum_voltage")
    assert verdicts.utilisation[0, column] == found.utilisation
    governing = checks[int(verdicts.governing[0])].key
    assert governing == "bus_maximum_voltage"


def test_a_level_axis_with_friction_gives_nothing_back():
    level = {"lead": 0.02, "moving mass": 5.0, "guide friction force": 900.0}
    sets = sets_of(values=level, segments=cycle({"law": "cycloidal", "displacement": 0.1, "duration_s": 3.0}))
    assert float(sets.pairs.energy_terminals_regenerated_j[0]) == 0.0
    assert verdict(sets, "bus_maximum_voltage").demand == 360.0


def test_brake_resistor_account():
    sets = sets_of(**RESISTOR)
    b = sets.once(bus_results)
    stored = 0.5 * 5e-4 * (380.0**2 - 360.0**2)
    regenerated = float(sets.pairs.energy_terminals_regenerated_j[0]) * 0.95
    assert float(b.brake_energy_j[0]) == pytest.approx(regenerated - stored, rel=1e-9)
    assert float(b.brake_power_mean_w[0]) == pytest.approx(float(b.brake_energy_j[0]) / 3.0, rel=1e-12)
    motoring = float(sets.pairs.energy_terminals_motoring_j[0]) / 0.95
    # The account of the bus closes: what the supply gives, less what the resistor burns, is what the axis took.
    supplied = float(b.supply_power_mean_w[0]) * 3.0
    assert supplied - float(b.brake_energy_j[0]) == pytest.approx(motoring - regenerated, rel=1e-9)
    assert supplied == pytest.approx(motoring - stored, rel=1e-9)


@pytest.mark.parametrize(
    ("key", "option", "demand"),
    [
        ("brake_resistor_mean_power", "brake resistor continuous power", "brake_power_mean_w"),
        ("brake_resistor_pulse_energy", "brake resistor pulse energy", "brake_pulse_j"),
    ],
)
def test_resistor_ratings(key, option, demand):
    limit = float(getattr(sets_of(**RESISTOR).once(bus_results), demand)[0])
    for factor, expected in ((1.2, PASSES), (1.0, LOW_RESERVE), (0.999, FAILS), (np.nan, NOT_CHECKED)):
        found = verdict(sets_of(**{**RESISTOR, option: limit * factor}), key)
        assert found.verdict == expected
    assert found.missing == (option,)


def test_a_resistor_too_large_cannot_take_the_peak():
    peak = float(sets_of(**RESISTOR).once(bus_results).brake_power_peak_w[0])
    largest = 380.0**2 / peak
    for factor, expected in ((0.8, PASSES), (1.001, FAILS)):
        sets = sets_of(**{**RESISTOR, "brake resistor": largest * factor})
        assert verdict(sets, "brake_resistor_peak_power").verdict == expected


@pytest.mark.parametrize(("smallest", "expected"), [(60.0, PASSES), (60.1, FAILS), (np.nan, NOT_CHECKED)])
def test_a_resistor_too_small_harms_the_chopper(smallest, expected):
    sets = sets_of(drive=dict(DRIVE, brake_resistor_min_ohm=smallest), **RESISTOR)
    assert verdict(sets, "brake_resistor_value").verdict == expected


def test_a_supply_that_feeds_back_needs_no_resistor():
    sets = sets_of(**{**RESISTOR, "supply feeds back": "yes"})
    assert verdict(sets, "bus_maximum_voltage").demand == 360.0
    assert verdict(sets, "brake_resistor_mean_power") is None
    b = sets.once(bus_results)
    net = (float(sets.pairs.energy_terminals_motoring_j[0]) / 0.95
           - float(sets.pairs.energy_terminals_regenerated_j[0]) * 0.95)  # fmt: skip
    assert float(b.supply_power_mean_w[0]) == pytest.approx(net / 3.0, rel=1e-9)


def test_supply_ratings_are_judged_where_one_is_stated():
    assert verdict(sets_of(), "supply_mean_power") is None
    b = sets_of().once(bus_results)
    rated = {"supply continuous power": float(b.supply_power_mean_w[0]),
             "supply peak power": 0.9 * float(b.supply_power_peak_w[0])}  # fmt: skip
    sets = sets_of(**rated)
    assert verdict(sets, "supply_mean_power").verdict == LOW_RESERVE
    assert verdict(sets, "supply_peak_power").verdict == FAILS
    unknown = sets_of(drive=dict(DRIVE, efficiency=np.nan), **rated)
    assert verdict(unknown, "supply_mean_power").missing == ("efficiency",)


def test_a_soft_supply_takes_voltage_from_the_motor():
    stiff = sets_of()
    assert verdict(stiff, "bus_sag") is None
    plain = float(verdict(stiff, "voltage").utilisation)
    almost = verdict(sets_of(**{"supply internal resistance": 1e-6}), "bus_sag")
    # Nodes against refined extrema: the voltage peaks at the end of a piece, so both agree to the sag itself.
    assert almost.utilisation == pytest.approx(plain, rel=1e-6)
    soft = verdict(sets_of(**{"supply internal resistance": 5.0}), "bus_sag")
    assert soft.utilisation > plain
    assert verdict(sets_of(**{"supply internal resistance": 100.0}), "bus_sag").verdict == FAILS


# -- stopping -----------------------------------------------------------------------------------------
def test_controlled_stop_downwards_is_worst_and_in_closed_form():
    sets = sets_of(**{"allowed stopping distance": 1.0})
    found = sets.once(controlled_stops)
    r = 2.0 * np.pi / 0.02
    speed = 0.9 * r  # 0.6 m in 1 s with thirds peaks at 0.9 m/s
    inertia = 1.2e-4 + 2e-4 + 50.0 / r**2
    gravity = 50.0 * GRAVITY_M_S2 / r
    torque = float(current_limited_torque(sets)[0])
    faster = speed + (gravity - 0.02) / inertia * 0.05
    delay_way = (speed + faster) / 2.0 * 0.05
    way = delay_way + faster**2 / 2.0 * inertia / (torque - gravity + 0.02)
    assert float(found.distance[0]) == pytest.approx(way / r, rel=1e-9)
    check = verdict(sets, "stop_controlled")
    assert check.segment == "segment 4"
    assert check.verdict == PASSES
    tight = sets_of(**{"allowed stopping distance": 0.999 * way / r})
    assert verdict(tight, "stop_controlled").verdict == FAILS
    assert verdict(sets_of(), "stop_controlled") is None


def test_stop_without_data_is_not_checked():
    sets = sets_of(motor=dict(MOTOR, peak_current_a=np.nan), **{"allowed stopping distance": 1.0})
    assert verdict(sets, "stop_controlled").missing == ("peak current",)
    braked = sets_of(motor=BRAKED, **{"allowed stopping distance": 1.0})
    assert verdict(braked, "stop_brake").missing == ("brake closing time",)


def test_a_lifted_load_on_a_shorted_winding_creeps_down_for_ever():
    quantities = stop_quantities(sets_of(), 0)
    assert quantities["stop_shorted_distance_m"] is None
    assert quantities["stop_coasting_distance_m"] is None
    assert quantities["stop_controlled_distance_m"] > 0.0


def test_brake_stop_energy_is_kinetic_plus_gravity():
    sets = sets_of(motor=BRAKED, columns=BRAKE)
    found = sets.once(brake_stops)
    r = 2.0 * np.pi / 0.02
    inertia = 1.2e-4 + 2e-4 + 50.0 / r**2
    gravity = 50.0 * GRAVITY_M_S2 / r
    faster = 0.9 * r + (gravity - 0.02) / inertia * 0.09
    angle = faster**2 / 2.0 * inertia / (6.0 - gravity + 0.02)
    assert float(found.braking_energy_j[0]) == pytest.approx(6.0 * angle, rel=1e-9)
    for factor, expected in ((1.2, PASSES), (0.999, FAILS), (np.nan, NOT_CHECKED)):
        columns = {**BRAKE, "brake_energy_per_stop": 6.0 * angle * factor}
        assert verdict(sets_of(motor=BRAKED, columns=columns), "holding_brake_energy").verdict == expected


def test_holding_brake_counts_on_no_friction_and_no_losses():
    gravity = 50.0 * GRAVITY_M_S2 * 0.02 / (2.0 * np.pi)
    values = {**LIFT, "efficiency": 0.5, "guide friction force": 400.0}
    for torque, expected in ((1.6 * gravity, PASSES), (1.2 * gravity, LOW_RESERVE), (0.99 * gravity, FAILS)):
        found = verdict(
            sets_of(motor=dict(MOTOR, brake_torque_nm=torque), values=values), "holding_brake_static"
        )
        assert found.demand == pytest.approx(gravity, rel=1e-12)
        assert found.verdict == expected


def test_a_cycle_that_counts_on_a_brake_asks_for_its_torque():
    closed = cycle({"law": "cycloidal", "displacement": 0.2, "duration_s": 1.0},
                   {"law": "dwell", "duration_s": 0.5, "brake_closed": True},
                   {"law": "cycloidal", "displacement": -0.2, "duration_s": 1.0})  # fmt: skip
    assert verdict(sets_of(segments=closed), "holding_brake_static").missing == ("brake torque",)
    assert verdict(sets_of(), "holding_brake_static") is None
    level = {"lead": 0.02, "moving mass": 5.0}
    assert verdict(sets_of(motor=BRAKED, values=level), "holding_brake_static") is None


def test_drop_from_rest():
    r = 2.0 * np.pi / 0.02
    inertia = 1.2e-4 + 2e-4 + 50.0 / r**2
    gravity = 50.0 * GRAVITY_M_S2 / r
    a = (gravity - 0.02) / inertia
    speed = a * 0.09
    way = (a * 0.09**2 / 2.0 + speed**2 / 2.0 * inertia / (6.0 - gravity + 0.02)) / r
    sets = sets_of(motor=BRAKED, columns=BRAKE, **{"allowed drop distance": 1.2 * way})
    assert float(sets.once(drop_distance)[0]) == pytest.approx(way, rel=1e-9)
    assert verdict(sets, "drop_distance").verdict == PASSES
    assert verdict(sets_of(motor=BRAKED, columns=BRAKE, **{"allowed drop distance": 0.999 * way}),
                   "drop_distance").verdict == FAILS  # fmt: skip
    assert verdict(sets_of(motor=BRAKED, **{"allowed drop distance": 1.0}), "drop_distance").missing == (
        "brake closing time",
    )


def test_jam_says_what_current_limit_protects_the_gearhead():
    weak = dict(GEARHEAD, emergency_torque_nm=20.0)
    sets = sets_of(gearhead=weak)
    found = verdict(sets, "gearhead_jam_torque")
    torque = float(current_limited_torque(sets)[0])
    assert found.demand == pytest.approx(torque * 5.0 * 0.94, rel=1e-12)
    assert found.verdict == LOW_RESERVE  # advice never fails a set
    assert "4.2553 N·m" in found.working
    assert verdict(
        sets_of(gearhead=dict(GEARHEAD, emergency_torque_nm=np.nan)), "gearhead_jam_torque"
    ).missing == ("emergency-stop torque",)
    assert verdict(sets_of(), "gearhead_jam_torque") is None


def test_gearhead_in_a_stop_carries_what_slows_the_load():
    sets = sets_of(gearhead=GEARHEAD)
    r = 2.0 * np.pi / 0.02
    own = 1.2e-4 + 2e-5
    torque, through = float(current_limited_torque(sets)[0]), []
    for mass in (50.0, 30.0):
        for_load = (2e-4 + mass / r**2) / 25.0
        gravity = mass * GRAVITY_M_S2 / r / 5.0
        for load in (gravity, -gravity):
            slowing = (torque + load + 0.02 + 0.02) / (own + for_load)
            through.append(5.0 * abs(torque - own * slowing))
    demand = verdict(sets, "gearhead_emergency_torque").demand
    assert demand == pytest.approx(max(through), rel=1e-12)


def test_every_check_of_these_files_is_in_the_list():
    keys = {check.key for check in CHECKS}
    assert {"bus_maximum_voltage", "supply_peak_power", "drop_distance", "gearhead_jam_torque"} <= keys


def test_a_resistor_too_small_fails_also_where_the_cycle_gives_nothing_back():
    """A stop from speed fires the chopper all the same."""
    slow = cycle(
        {"law": "cycloidal", "displacement": 0.1, "duration_s": 20.0}, {"law": "dwell", "duration_s": 1.0},
        {"law": "cycloidal", "displacement": -0.1, "duration_s": 20.0},
    )  # fmt: skip
    values = {"lead": 0.02, "moving mass": 5.0, "guide friction force": 200.0}
    drive = dict(DRIVE, brake_resistor_min_ohm=80.0)
    sets = sets_of(values=values, segments=slow, drive=drive, **RESISTOR)
    assert float(bus_results(sets).brake_energy_j[0]) == 0.0
    found = verdict(sets, "brake_resistor_value")
    assert (found.verdict, found.utilisation) == (FAILS, pytest.approx(80.0 / 60.0))
