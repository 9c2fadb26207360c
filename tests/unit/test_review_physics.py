"""Cases at the edge of the physics: what fails must be said to fail, and a bound must be a bound."""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.core.machine import judge, torque_of_current
from actuator_sizing.core.quadrature import interpolate
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.block import Block, GearheadSide, MotorSide
from actuator_sizing.sizing.checks.motor import VOLTAGE
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.judging import ORDER, active_checks, judge_sets
from actuator_sizing.sizing.pair_course import course
from actuator_sizing.sizing.results import FAILS, NOT_CHECKED
from actuator_sizing.sizing.shortlist import evaluate_sets
from actuator_sizing.sizing.tile import BlockBounds, TileWorker
from tests.made_cases import DIRECT, GEARHEAD, MOTOR, SURROUNDINGS, case, cycle


def judged(made):
    """Evaluated sets of all combinations and their verdicts."""
    sizes = (len(made.motor_parameters), len(made.gearhead_parameters), len(made.drive_parameters))
    index = np.stack(np.meshgrid(*(np.arange(n) for n in sizes), indexing="ij"), axis=-1).reshape(-1, 3)
    sets = evaluate_sets(made, build_demand(made), index)
    checks, limits = active_checks(made.limits)
    return sets, judge_sets(sets, checks, limits)


def column(verdicts, key):
    return [check.key for check in verdicts.checks].index(key)


def table(**options):
    """A rotary table that turns a quarter and rests."""
    return case(
        "rotary load",
        {"load inertia": 0.02},
        cycle(
            {"law": "cycloidal", "displacement": 1.5, "duration_s": 0.6},
            {"law": "dwell", "duration_s": 0.8},
        ),
        gearheads=[GEARHEAD],
        **options,
    )


def test_an_ambient_above_the_winding_limit_fails_the_winding_temperature():
    made = table(surroundings=replace(SURROUNDINGS, ambient_degc=160.0))
    _, verdicts = judged(made)
    at = column(verdicts, "winding_temperature")
    assert ORDER[verdicts.codes[0, at]] == FAILS
    assert np.isinf(verdicts.utilisation[0, at])


def block_of(made):
    """Every gearhead against every motor, as the screening sees them."""
    demand = build_demand(made)
    gearheads = GearheadSide.of(made.gearhead_parameters, demand)
    motors = MotorSide.of(made.motor_parameters, made.surroundings)
    return Block(demand, made.surroundings, 10.0, motors, gearheads)


def test_the_bound_of_the_voltage_holds_for_a_saturated_motor_that_brakes():
    # Lowering a heavy load fast, never lifting it: at top speed the motor brakes with much current.
    made = case(
        "belt",
        {"pulley diameter": 0.06, "moving mass": 30.0, "inclination": -np.pi / 2},
        cycle(
            {"law": "speed ramp", "end_speed": 2.4, "duration_s": 2.0},
            {"law": "constant speed", "end_speed": 2.4, "duration_s": 0.5},
            {"law": "speed ramp", "end_speed": 0.0, "duration_s": 0.2},
            {"law": "dwell", "duration_s": 3.0, "brake_closed": True},
        ),
        motors=[
            {**MOTOR, "peak_torque_nm": 6.1, "resistance_ohm": 0.4, "pole_pairs": np.nan, "inductance_h": 0.0}
        ],
        gearheads=[{**GEARHEAD, "ratio": 5.0}],
    )
    sets, verdicts = judged(made)
    bounds = BlockBounds.of((block_of(made),), (VOLTAGE,), {"voltage": 1.0})
    bound = TileWorker(1).work(bounds, slice(0, 1)).by_motor[0][1][0, 0]
    exact = verdicts.utilisation[0, column(verdicts, "voltage")]
    # 1e-5: rounding of single precision, as the screening allows.
    assert bound <= exact * (1.0 + 1e-5)
    assert sets.pairs.voltage_peak_v[0] > 0.0


def test_braking_above_the_no_load_speed_is_beyond_the_speed_torque_plane():
    # The load overhauls the motor at a speed whose EMF alone exceeds the voltage, with hardly any torque.
    made = case(
        "rotary load",
        {"load inertia": 0.01},
        cycle(
            {"law": "speed ramp", "end_speed": 70.0, "duration_s": 4.0, "process_effort": -8.0},
            {"law": "constant speed", "end_speed": 70.0, "duration_s": 0.5, "process_effort": -8.0},
            {"law": "speed ramp", "end_speed": 0.0, "duration_s": 4.0, "process_effort": -8.0},
        ),
        motors=[{**MOTOR, "torque_constant_nm_per_a": 1.2}],
        gearheads=[{**GEARHEAD, "ratio": 5.0}],
    )
    sets, verdicts = judged(made)
    assert sets.pairs.torque_peak_nm[0] < 0.25 * MOTOR["peak_torque_nm"]
    assert sets.pairs.voltage_peak_without_inductance_v[0] > sets.pairs.voltage_available_v[0]
    at = column(verdicts, "speed_torque")
    assert ORDER[verdicts.codes[0, at]] == FAILS
    assert "braking current of at least" in verdicts.checks[at].working(sets, 0)


def test_a_long_overload_is_not_smoothed_out_where_only_the_total_thermal_resistance_is_known():
    # 60 s at 1.7 times the continuous torque, then 180 s at rest: the RMS is below the rating, the winding is not.
    stated = {**MOTOR, "mass_kg": 2.6, "magnet_coefficient_per_k": 0.0, "continuous_ambient_degc": 35.0,
              "thermal_resistance_winding_k_w": 0.5, "winding_time_constant_s": 40.0}  # fmt: skip
    total = {**stated, "thermal_resistance_winding_k_w": 1.6, "thermal_resistance_housing_k_w": np.nan}
    made = case(
        "rotary load",
        {"load inertia": 1e-4},
        cycle(
            {"law": "dwell", "duration_s": 60.0, "process_effort": 5.6},
            {"law": "dwell", "duration_s": 180.0},
        ),
        motors=[stated, total],
        gearheads=[DIRECT],
    )
    sets, verdicts = judged(made)
    at = column(verdicts, "winding_temperature")
    assert [ORDER[code] for code in verdicts.codes[:, at]] == [FAILS, FAILS]
    # Copper of 8 % of the mass is 80 J/K, which is what the full sheet says too (40 s over 0.5 K/W).
    assert sets.pairs.winding_max_degc[1] == pytest.approx(sets.pairs.winding_max_degc[0], rel=0.01)


def test_a_winding_time_constant_from_the_mass_resolves_a_long_move_as_a_stated_one_does():
    # One move of a minute, many time constants of a light winding: its mean loss does not stand for its course.
    light = {
        **MOTOR,
        "mass_kg": 0.8,
        "winding_time_constant_s": np.nan,
        "thermal_resistance_winding_k_w": 0.6,
    }
    stated = {**light, "winding_time_constant_s": 0.08 * 0.8 * 385.0 * 0.6}
    values = {"load inertia": 100.0}
    move = {"law": "simple harmonic", "displacement": 25.0, "duration_s": 60.0}
    peaks = []
    for motor in (light, stated):
        made = case("rotary load", values, cycle(move), motors=[motor], gearheads=[DIRECT])
        peaks.append(float(judged(made)[0].pairs.winding_max_degc[0]))
    assert peaks[0] == pytest.approx(peaks[1], rel=1e-9)  # the same network, so only rounding


STEEP = {"lead": 0.1, "screw diameter": 0.008, "thread friction coefficient": 0.3, "moving mass": 50.0}


def test_a_thread_that_jams_is_refused():
    # tan(lead angle) · friction = 3.98 · 0.3 > 1: the torque would come out negative, as if the load helped.
    made = case("lead screw", STEEP, cycle({"law": "trapezoid", "displacement": 0.5, "duration_s": 1.0}))
    with pytest.raises(InputError, match=r"below 0.251"):
        build_demand(made)


def test_bearings_of_a_self_locking_screw_cost_torque_in_both_directions():
    values = {"lead": 0.004, "screw diameter": 0.02, "thread friction coefficient": 0.15, "moving mass": 60.0,
              "inclination": np.pi / 2}  # fmt: skip
    down = {"law": "constant speed", "displacement": -0.1, "end_speed": -0.05}
    demands = [
        build_demand(case("lead screw", {**values, "efficiency": rest}, cycle(
            {"law": "speed ramp", "end_speed": -0.05, "duration_s": 0.5}, down)))
        for rest in (1.0, 0.9)
    ]  # fmt: skip
    free, lossy = (float(demand.shaft_torque[-1, 0]) for demand in demands)
    assert free < 0.0  # the screw is driven down
    assert lossy == pytest.approx(free / 0.9, rel=1e-12)  # the motor gives what the bearings take, too


def test_the_peak_current_of_a_saturated_motor_belongs_to_the_peak_torque():
    made = case(
        "rotary load",
        {"load inertia": 0.02, "friction torque": 0.3},
        cycle(
            {"law": "cycloidal", "displacement": 6.0, "duration_s": 0.42}, {"law": "dwell", "duration_s": 1.0}
        ),
        motors=[{**MOTOR, "peak_torque_nm": 5.0}],
        gearheads=[DIRECT],
    )
    sets, _ = judged(made)
    motor = judge(made.motor_parameters, made.surroundings)
    torque = torque_of_current(
        sets.pairs.current_peak_a, motor.torque_constant_nm_per_a, motor.saturation_per_a2
    )
    assert 0.9 * 5.0 < sets.pairs.torque_peak_nm[0] < 5.0  # close to saturation
    assert torque[0] == pytest.approx(sets.pairs.torque_peak_nm[0], rel=1e-12)  # an inverse, only rounding


def sampled_plane_utilisation(made):
    """Largest torque over voltage-limited torque of the only pair while motoring, on many points of each piece."""
    demand, motor = build_demand(made), judge(made.motor_parameters, made.surroundings)
    c = course(demand, made.motor_parameters, made.gearhead_parameters, motor)
    R, K, s, X, U = (
        float(value[0])
        for value in (motor.resistance_ohm, motor.torque_constant_nm_per_a, motor.saturation_per_a2,
                      motor.reactance_per_speed, motor.voltage_available_v)
    )  # fmt: skip
    points = np.linspace(-1.0, 1.0, 20_001)
    omega = np.abs(interpolate(c.motor_speed_rad_s[0], points))
    torque = (
        interpolate(c.torque_nm[0], points)
        * np.where(demand.direction == 0.0, 1.0, demand.direction)[:, None]
    )
    a, b = R**2 + (X * omega) ** 2, R * K * omega
    with np.errstate(invalid="ignore"):
        limit = np.nan_to_num((np.sqrt(b**2 - a * ((K * omega) ** 2 - U**2)) - b) / a, nan=0.0)
    current = np.clip(limit, 0.0, (3.0 * s) ** -0.5)
    available = K * current * (1.0 - s * current**2)
    out_of_reach = np.where(torque > 0.0, np.inf, 0.0)
    return float(np.max(np.where(available > 0.0, torque / np.maximum(available, 1e-12), out_of_reach)))


@pytest.mark.parametrize("constant", [0.5, 0.6, 0.66, 0.68, 0.7])
def test_the_speed_torque_plane_is_searched_between_the_nodes(constant):
    # Close to the no-load speed and to saturation: the ratio has a pole and a kink, which no polynomial follows.
    made = case(
        "rotary load",
        {"load inertia": 0.05, "friction torque": 0.2},
        cycle(
            {"law": "3-4-5 polynomial", "displacement": 1.5, "duration_s": 0.12},
            {"law": "dwell", "duration_s": 1.0},
        ),
        motors=[{**MOTOR, "torque_constant_nm_per_a": constant, "peak_torque_nm": 0.72 * 18.0 * constant}],
        gearheads=[{**GEARHEAD, "ratio": 20.0}],
    )
    exact = judged(made)[0].pairs.plane_utilisation[0]
    # The largest between samples is above both of its neighbours by their distance squared, 1e-4 of a piece.
    assert exact == pytest.approx(sampled_plane_utilisation(made), rel=1e-6)


def test_a_judged_temperature_for_voltage_does_not_soften_the_continuous_rating():
    made = _rated_lift()
    cold = replace(made, surroundings=replace(made.surroundings, judged_winding_degc=20.0))
    hot_use, cold_use = (
        dict(zip((c.key for c in v.checks), v.utilisation[0], strict=True))
        for v in map(_judged, (made, cold))
    )
    assert cold_use["rms_current"] == pytest.approx(hot_use["rms_current"], rel=1e-12)
    assert cold_use["voltage"] != hot_use["voltage"]


def test_what_only_fits_or_not_does_not_govern_while_it_fits():
    made = _rated_lift()
    verdicts = _judged(made)
    assert verdicts.checks[int(verdicts.governing[0])].key != "drive_bus_voltage"
    tight = replace(made, surroundings=replace(made.surroundings, bus_max_v=450.0))
    verdicts = _judged(tight)
    assert verdicts.verdict[0] == ORDER.index(FAILS)


def test_a_set_that_no_binding_check_concerns_is_not_passed():
    made = _rated_lift()
    only = {
        key: replace(limit, applies="yes" if key == "gearhead_peak_torque" else "no")
        for key, limit in made.limits.items()
    }
    verdicts = _judged(replace(made, limits=only))  # direct drive: no gearhead to judge
    assert ORDER[int(verdicts.verdict[0])] == NOT_CHECKED


def _rated_lift():
    segments = cycle(
        {"law": "trapezoid", "displacement": 0.4, "duration_s": 1.0, "payload": 10.0},
        {"law": "trapezoid", "displacement": -0.4, "duration_s": 1.0},
        {"law": "dwell", "duration_s": 0.5},
    )
    values = {"lead": 0.01, "moving mass": 10.0, "inclination": np.pi / 2, "efficiency": 0.9}
    # Without saturation current goes as one over K, and the comparison is exact.
    return case("ball screw", values, segments, motors=[{**MOTOR, "peak_torque_nm": np.nan}])


def _judged(made):
    index = np.zeros((1, 3), dtype=int)
    return judge_sets(evaluate_sets(made, build_demand(made), index), *active_checks(made.limits))
