"""Ratio windows against brute force over ratios, the closed forms against what they are the form of."""

import numpy as np
import pytest

from actuator_sizing.core.moments import gearhead_rows, mean_products, motor_columns
from actuator_sizing.core.ratio_windows import TorqueMoments, load_factor, torque_moments
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.cycles import cycle_demands
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.evaluation import evaluate_pairs
from actuator_sizing.sizing.motor_limits import one_gearhead
from actuator_sizing.sizing.ratio_windows import ratio_windows
from tests.bare_axis import BARE_GEARHEAD, BARE_MOTOR
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, case, cycle

TABLE = {"load inertia": 0.6, "friction torque": 4.0, "viscous friction": 0.3}
SEGMENTS = cycle(
    {"law": "trapezoid", "displacement": 4.0, "duration_s": 0.5, "process_effort": 6.0},
    {"law": "dwell", "duration_s": 0.2},
    {"law": "cycloidal", "displacement": -4.0, "duration_s": 0.7},
    {"law": "dwell", "duration_s": 0.1},
)
LINEAR = {**MOTOR, "peak_torque_nm": np.nan, "peak_current_a": 14.0}
SATURATED = {**MOTOR, "peak_torque_nm": 3.6, "peak_current_a": 9.0}
LOW_VOLTAGE = {**MOTOR, "torque_constant_nm_per_a": 0.9, "speed_max_rad_s": 900.0}
WEAK = {**MOTOR, "continuous_current_a": 0.8}
UNKNOWN = {**MOTOR, "continuous_current_a": np.nan}
MOTORS = [LINEAR, SATURATED, LOW_VOLTAGE, WEAK, UNKNOWN]


def turning(
    motors=MOTORS, gearheads=(DIRECT, *({**GEARHEAD, "ratio": r} for r in (3.0, 8.0, 12.0, 20.0, 40.0)))
):
    return case("rotary load", TABLE, SEGMENTS, motors=motors, gearheads=list(gearheads), drives=[DRIVE])


@pytest.fixture(scope="module")
def made():
    return turning()


@pytest.fixture(scope="module")
def demand(made):
    return build_demand(made)


@pytest.fixture(scope="module")
def windows(made, demand):
    return ratio_windows(cycle_demands(made))


def passes(made, demand, motor, ratios, transmission):
    """What the four limits say at each ratio, from the exact evaluation and the definitions of the checks."""
    row = np.full(len(ratios), motor)
    motors = made.motor_parameters.take(row)
    gearheads = transmission.take(np.zeros(len(ratios), dtype=int))
    gearheads = type(gearheads)(**{**vars(gearheads), "ratio": ratios})
    p = evaluate_pairs(demand, motors, gearheads, made.surroundings)
    m, s = motors, made.surroundings
    hot = m.resistance_ohm * (
        1.0 + m.resistance_coefficient_per_k * (m.winding_limit_degc - m.resistance_reference_degc)
    )
    rating = (m.winding_limit_degc - m.continuous_ambient_degc) / (hot * m.continuous_current_a**2)
    loss = m.friction_torque_nm * p.speed_rms_rad_s + m.viscous_friction_nm_s * p.speed_rms_rad_s**2
    left = m.winding_limit_degc - s.ambient_degc - np.fmin(m.thermal_resistance_housing_k_w, rating) * loss
    return (
        (p.current_rms_a**2 <= left / (rating * hot))
        & (p.current_peak_a <= m.peak_current_a)
        & ~(p.torque_peak_nm > m.peak_torque_nm)
        & (p.plane_utilisation <= 1.0)
        & (p.speed_peak_rad_s <= m.speed_max_rad_s)
        & (p.voltage_peak_v <= p.voltage_available_v)
    )


@pytest.mark.parametrize("motor", range(4))
def test_windows_are_what_ten_thousand_ratios_say(made, demand, windows, motor):
    ratios = np.geomspace(
        0.5, 200.0, 10_000 if motor == 1 else 1_500
    )  # the one with saturation is the hardest
    brute = passes(made, demand, motor, ratios, windows.transmission)
    window = windows.motors[motor]
    claimed = np.zeros(len(ratios), dtype=bool)
    for part in window.intervals:
        claimed |= (ratios >= part.low) & (ratios <= part.high)
    assert np.array_equal(brute, claimed)
    assert window.intervals or window.reason


@pytest.mark.parametrize("motor", range(3))
def test_ends_pass_and_a_millionth_beyond_fails(made, demand, windows, motor):
    for part in windows.motors[motor].intervals:
        ends = np.array([part.low, part.high, part.low * (1 - 1e-6), part.high * (1 + 1e-6)])
        # The ends are roots to 2e-13 of a ratio; evaluation rounds at about 1e-14.
        assert passes(made, demand, motor, ends, windows.transmission).tolist() == [True, True, False, False]
        assert part.low_check
        assert part.high_check


def test_different_checks_bound_the_windows(windows):
    bounds = [(p.low_check, p.high_check) for w in windows.motors[:3] for p in w.intervals]
    assert bounds[0] == ("rms_current", "motor_speed")
    assert bounds[1][0] in ("motor_peak_current", "speed_torque")
    assert bounds[2][1] in ("voltage", "speed_torque")


def test_a_weak_motor_has_no_window_and_an_unknown_one_is_not_judged(windows):
    weak, unknown = windows.motors[3], windows.motors[4]
    assert weak.intervals == ()
    assert "every ratio" in weak.reason
    assert weak.power_rate < weak.power_rate_needed
    assert unknown.intervals == ()
    assert unknown.missing == ("continuous current",)
    assert unknown.catalog == ()


def test_catalog_ratios_are_those_that_pass_with_their_own_losses(made, demand, windows):
    for motor in range(4):
        gearheads = made.gearhead_parameters
        good = [
            float(gearheads.ratio[g])
            for g in range(len(gearheads))
            if passes(made, demand, motor, gearheads.ratio[g : g + 1], gearheads.take(slice(g, g + 1)))[0]
        ]
        assert [c.ratio for c in windows.motors[motor].catalog] == good


def test_the_best_ratio_has_the_smallest_rms_torque(made, demand, windows):
    for motor in range(3):
        window = windows.motors[motor]
        near = window.best_ratio * np.array([0.99, 0.999, 1.0, 1.001, 1.01])
        rows = np.full(5, motor)
        gearheads = windows.transmission.take(np.zeros(5, dtype=int))
        gearheads = type(gearheads)(**{**vars(gearheads), "ratio": near})
        rms = evaluate_pairs(
            demand, made.motor_parameters.take(rows), gearheads, made.surroundings
        ).torque_rms_nm
        assert rms.argmin() == 2
        assert rms[2] == pytest.approx(window.best_torque_rms_nm, rel=1e-10)  # quadrature of the chain


def test_moments_are_the_mean_square_at_every_ratio(made, demand):
    gearhead = one_gearhead(
        1.0, efficiency=0.9, efficiency_back=0.85, no_load_torque_nm=0.03, inertia_kg_m2=4e-5
    )
    motors = made.motor_parameters
    columns = motor_columns(
        motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s
    )
    products = mean_products(demand.duration_s, demand.functions)
    moments = torque_moments(products, gearhead_rows(gearhead)[0], columns[0])
    for ratio in (0.7, 5.0, 60.0):
        row = type(gearhead)(**{**vars(gearhead), "ratio": np.array([ratio])})
        exact = evaluate_pairs(demand, motors.take(slice(0, 1)), row, made.surroundings).torque_rms_nm[0]
        assert np.sqrt(moments.mean_square(ratio)) == pytest.approx(exact, rel=1e-10)


def test_matching_curve():
    """Frictionless, n² T_rms² depends on n² J alone: motors of one n² J share a curve, least at its one minimum."""
    motors = [{**BARE_MOTOR, "rotor_inertia_kg_m2": 4e-4 / n**2} for n in (1.0, 2.0, 5.0)]
    made = case("rotary load", {"load inertia": 0.02}, SEGMENTS, motors=motors, gearheads=[BARE_GEARHEAD])
    demand = build_demand(made)
    products = mean_products(demand.duration_s, demand.functions)
    rows = gearhead_rows(one_gearhead(1.0))[0]
    m = made.motor_parameters
    columns = motor_columns(m.rotor_inertia_kg_m2, m.friction_torque_nm, m.viscous_friction_nm_s)
    curves = [torque_moments(products, rows, column) for column in columns]
    at_same_z = [n**2 * float(c.mean_square(n)) for n, c in zip((1.0, 2.0, 5.0), curves, strict=True)]
    assert at_same_z == pytest.approx([at_same_z[0]] * 3, rel=1e-12)
    # At the best ratio the power rate asked of the motor is the load factor, whatever its inertia.
    alpha = np.sqrt(demand.mean(demand.shaft_acceleration**2))
    torque = np.sqrt(demand.mean(demand.shaft_torque**2))
    rate = float(demand.mean(demand.shaft_acceleration * demand.shaft_torque))
    for curve, inertia in zip(curves, m.rotor_inertia_kg_m2, strict=True):
        needed = float(curve.mean_square(curve.best_ratio())) / inertia
        assert needed == pytest.approx(load_factor(alpha, torque, rate, 1.0), rel=1e-9)


def test_two_separate_intervals_and_none():
    # Friction that falls out of step with a limit that grows with speed: the set need not be connected.
    moments = TorqueMoments(aa=1.0, ab=0.0, ac=0.0, bb=4.0, bc=0.0, cc=0.0)
    (one,) = moments.ratios_within((5.0, 0.0, 0.0))
    assert one == pytest.approx((1.0, 2.0), rel=1e-12)
    assert moments.ratios_within((3.9, 0.0, 0.0)) == ()
    # (n − 1)(n − 2)(n − 3)(n − 4) = n⁴ − 10 n³ + 35 n² − 50 n + 24, negative between 1 and 2, 3 and 4.
    forced = TorqueMoments(aa=1.0, ab=0.0, ac=-5.0, bb=24.0, bc=-25.0, cc=35.0)
    (a, b), (c, d) = forced.ratios_within((0.0, 0.0, 0.0))
    assert (a, b, c, d) == pytest.approx((1.0, 2.0, 3.0, 4.0), rel=1e-9)


def test_an_axis_that_only_holds_has_no_upper_limit():
    held = cycle({"law": "dwell", "duration_s": 2.0, "process_effort": 30.0})
    made = case("rotary load", TABLE, held, motors=[MOTOR], gearheads=[DIRECT, GEARHEAD])
    window = ratio_windows(cycle_demands(made)).motors[0]
    (part,) = window.intervals
    assert part.high_check == ""
    assert part.as_mapping()["to"] is None
    assert window.best_ratio == np.inf


def test_a_linear_motor_and_an_empty_catalog_are_told_apart(made):
    carriage = cycle(
        {"law": "trapezoid", "displacement": 0.4, "duration_s": 0.4}, {"law": "dwell", "duration_s": 0.2}
    )
    linear = case("linear motor", {"moving mass": 6.0}, carriage, motors=[{**MOTOR, "is_linear": True}])
    with pytest.raises(InputError, match="linear motor has no transmission"):
        ratio_windows(cycle_demands(linear))
    nothing = turning(motors=[{**MOTOR, "is_linear": True}])
    with pytest.raises(InputError, match="no motor that fits the axis"):
        ratio_windows(cycle_demands(nothing))
