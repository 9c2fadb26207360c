"""Gears, hoists and conveyors against worked examples, through demand and evaluation of a made case.

Codes: S printed number seen in the source or in an openly published solution of that textbook; I inputs seen,
output computed from the stated definition; M quoted from memory; D follows from the definition. Where a source
takes 9.81 m/s² for gravity, the difference to standard gravity is added as a force.
"""

import math

import numpy as np
import pytest

from actuator_sizing.core.mechanisms.base import GRAVITY_M_S2
from actuator_sizing.core.moments import gearhead_rows, mean_products, motor_columns
from actuator_sizing.core.ratio_windows import load_factor, torque_moments
from actuator_sizing.sizing.motor_limits import one_gearhead
from tests.bare_axis import POUND_INCH_NM, RPM, axis, ramp, steady
from tests.made_cases import segment

BOOK_GRAVITY_M_S2 = 9.81


def _moments(made, efficiency):
    """Torque moments of the first motor of an axis on a transmission without inertia."""
    m = made.case.motor_parameters
    columns = motor_columns(m.rotor_inertia_kg_m2, m.friction_torque_nm, m.viscous_friction_nm_s)
    products = mean_products(made.demand.duration_s, made.demand.functions)
    return torque_moments(products, gearhead_rows(one_gearhead(1.0, efficiency=efficiency))[0], columns[0])


@pytest.mark.published("A3.7")
def test_geared_load_and_hoist_on_one_motor():
    """G. K. Dubey, Fundamentals of Electrical Drives, Ex. 2.1 p. 16 [S]: 0.4 kg·m² and 117.53 N·m.

    The motor of 0.2 kg·m² turns 10 kg·m² at 10 N·m through a gear of 10:1 at 90 %, and lifts 1000 kg at 1.5 m/s
    at 85 %, both at 1420 rpm.
    """
    omega = 1420.0 * RPM
    geared = {"ratio": 10.0, "efficiency": 0.9}
    turned = axis(
        "rotary load", {"load inertia": 10.0}, steady(omega / 10.0, process_effort=10.0), gearheads=[geared]
    )
    hoist = {"pulley diameter": 2.0 * 1.5 / omega, "moving mass": 1000.0, "inclination": math.pi / 2,
             "efficiency": 0.85}  # fmt: skip
    excess = 1000.0 * (BOOK_GRAVITY_M_S2 - GRAVITY_M_S2)
    lifted = axis("belt", hoist, steady(1.5, process_effort=excess))
    torque = turned.pairs.torque_peak_nm[0] + lifted.pairs.torque_peak_nm[0]
    assert torque == pytest.approx(117.53, abs=5e-3)
    inertia = 0.2 + turned.demand.load_inertia / 10.0**2 + lifted.demand.load_inertia
    assert inertia == pytest.approx(0.4, abs=0.05)
    assert inertia == pytest.approx(0.401753, abs=5e-7)


@pytest.mark.published("A3.8")
def test_ratio_of_largest_acceleration():
    """Khurmi & Gupta, Theory of Machines, Ex. 3.14 p. 51 [S]; √(J_L/J_M) also Pasch & Seering 1984 [M].

    2 and 32 kg·m², 100 N·m: ratio 4, load at 6.25 rad/s², motor at 25 rad/s². At that acceleration every other
    ratio asks for more than the 100 N·m.
    """
    ratios = np.array([1.0, 2.0, 3.0, 3.9, 4.0, 4.1, 5.0, 8.0, 16.0])
    made = axis(
        "rotary load", {"load inertia": 32.0}, ramp(0.0, 6.25, duration_s=1.0),
        motor={"rotor_inertia_kg_m2": 2.0}, gearheads=[{"ratio": ratio} for ratio in ratios],
    )  # fmt: skip
    torque = made.pairs.torque_peak_nm
    assert torque[4] == pytest.approx(100.0, rel=1e-12)
    assert ratios[torque.argmin()] == 4.0
    assert np.all(np.delete(torque, 4) > 100.01)
    assert made.pairs.speed_peak_rad_s[4] == pytest.approx(25.0, rel=1e-12)  # after one second
    assert made.pairs.inertia_ratio[4] == pytest.approx(1.0, rel=1e-12)  # matched inertias
    # The same from the closed form of the ratio windows.
    assert _moments(made, 1.0).best_ratio() == pytest.approx(4.0, rel=1e-12)


@pytest.mark.published("A3.9")
def test_inclined_haulage():
    """Khurmi & Gupta, Ex. 3.4 p. 35 [S]: 154.46 N·m and 22.24 kW; the rotor is not behind the gear's losses."""
    slope = math.asin(1.0 / 20.0)
    values = {
        "pulley diameter": 1.0, "moving mass": 14e3, "inclination": slope, "guide friction force": 1200.0,
        "driven shaft inertia": 1250.0 * 0.45**2,
    }  # fmt: skip
    excess = 14e3 * math.sin(slope) * (BOOK_GRAVITY_M_S2 - GRAVITY_M_S2)
    speeding = ramp(0.0, 1.8, acceleration_max=0.1, process_effort=excess)
    made = axis(
        "belt", values, speeding,
        motor={"rotor_inertia_kg_m2": 110.0 * 0.125**2}, gearheads=[{"ratio": 40.0, "efficiency": 0.85}],
    )  # fmt: skip
    torque, speed = made.pairs.torque_peak_nm[0], made.pairs.speed_peak_rad_s[0]
    assert torque == pytest.approx(154.46, abs=5e-3)
    assert 1e-3 * torque * speed == pytest.approx(22.24, abs=5e-3)
    assert 1e-3 * torque * speed == pytest.approx(22.2422, abs=5e-5)


@pytest.mark.published("A3.10")
@pytest.mark.parametrize(
    ("efficiency", "printed", "acceleration"), [(1.0, 0.231, 0.230924), (0.9, 0.216, 0.215868)]
)
def test_falling_mass_drives_the_gear(efficiency, printed, acceleration):
    """Khurmi & Gupta, Ex. 3.13 p. 50 [S]: 75 kg on a drum of 0.3 m, 100 kg·m² there, 5 kg·m² behind 6:1.

    The motor stands for the inertia behind the gear: at the printed acceleration it has nothing to do.
    """
    values = {"pulley diameter": 0.6, "moving mass": 75.0, "inclination": -math.pi / 2,
              "driven shaft inertia": 100.0}  # fmt: skip

    def missing(a):
        pull = -75.0 * (BOOK_GRAVITY_M_S2 - GRAVITY_M_S2)
        made = axis(
            "belt", values, ramp(0.0, a, duration_s=1.0, process_effort=pull),
            motor={"rotor_inertia_kg_m2": 5.0}, gearheads=[{"ratio": 6.0, "efficiency_back": efficiency}],
        )  # fmt: skip
        return made.pairs.torque_min_nm[0]

    # Nothing within the six digits of the recomputed figure, a push or a pull half a printed digit off.
    assert missing(acceleration - 5e-7) < 0.0 < missing(acceleration + 5e-7)
    assert missing(printed - 5e-4) < 0.0 < missing(printed + 5e-4)


@pytest.mark.published("A3.11")
def test_gear_train():
    """Wentzell, Machine Design, Ex. 11.5 p. 241 [S]: 36/12 times 64/16, 54 lb·in at 1750 rpm to 648 at 145.83."""
    load = steady(145.833333 * RPM, process_effort=648.0 * POUND_INCH_NM)
    made = axis("rotary load", {"load inertia": 0.0}, load, gearheads=[{"ratio": 36.0 / 12.0 * 64.0 / 16.0}])
    assert made.pairs.torque_peak_nm[0] / POUND_INCH_NM == pytest.approx(54.0, rel=1e-12)
    # printed to 0.01 rpm at the output, twelve times that here
    assert made.pairs.speed_peak_rad_s[0] / RPM == pytest.approx(1750.0, abs=12 * 0.005)


@pytest.mark.published("A3.12")
def test_range_of_feasible_ratios():
    """Giberti, Clerici & Cinquemani, The Role of the Gearbox in an Automatic Machine, 2012, eqs. 22-28 [I].

    Rotor 3e-4 kg·m², 2 N·m continuous; load torque 20 N·m rms, 60 rad/s² rms, mean product 300 N·m/s², 90 %.
    Formulas of the source, numbers ours: at both ends of the range the motor's RMS torque is just 2 N·m.
    """
    # Two equal ramps at ±60 rad/s² have these means with load torques T and T − 10, T² + (T − 10)² = 800.
    up = 5.0 + math.sqrt(375.0)
    first = segment(2, "speed ramp", start_speed=0.0, end_speed=60.0, duration_s=1.0, process_effort=up)
    second = segment(3, "speed ramp", start_s=1.0, start_speed=60.0, end_speed=0.0, duration_s=1.0,
                     process_effort=up - 10.0)  # fmt: skip
    # load speed over motor speed; six digits printed, so that the torque is good to 1e-6 of its slope
    smallest, largest, best = 0.00928598, 0.0872283, 0.0284605
    around = [smallest, largest, best, 0.99 * smallest, 1.01 * largest, 0.99 * best, 1.01 * best]
    made = axis(
        "rotary load", {"load inertia": 0.0}, first, second,
        motor={"rotor_inertia_kg_m2": 3e-4}, gearheads=[{"ratio": 1 / tau, "efficiency": 0.9} for tau in around],
    )  # fmt: skip
    rms = made.pairs.torque_rms_nm
    assert rms[:2] == pytest.approx([2.0, 2.0], abs=2e-6)
    assert np.all(rms[3:5] > 2.01)
    assert np.all(rms[2] < rms[5:])
    # the smallest is √(J β/η) with the load factor β = 3000 W/s of the source
    assert rms[2] == pytest.approx(math.sqrt(3e-4 * 3000.0 / 0.9), rel=1e-6)
    # The same from the closed form of the ratio windows.
    moments = _moments(made, 0.9)
    ((low, high),) = moments.ratios_within((4.0, 0.0, 0.0))
    assert (1.0 / high, 1.0 / low, 1.0 / moments.best_ratio()) == pytest.approx(
        (smallest, largest, best), abs=1e-6
    )
    assert load_factor(60.0, 20.0, 300.0, 1.0) == pytest.approx(3000.0, abs=1e-6)


@pytest.mark.published("A3.16")
def test_belt_conveyor():
    """Gupta & Singhal, Fundamentals of Electric Drives and Control, Ex. 3.6 p. 36 [S]: 0.4222 kg·m², 8.2 N·m."""
    speed, omega = 1.2, 1200.0 * RPM
    on_belt = 100e3 / 3600.0 * 200.0 / speed
    made = axis(
        "belt", {"pulley diameter": 2.0 * speed / omega, "moving mass": on_belt}, ramp(0.0, speed, duration_s=8.0),
        motor={"rotor_inertia_kg_m2": 0.1},
    )  # fmt: skip
    assert made.demand.load_inertia == pytest.approx(0.4222, abs=5e-5)
    assert made.pairs.torque_peak_nm[0] == pytest.approx(8.2, abs=0.05)
    assert made.pairs.torque_peak_nm[0] == pytest.approx(8.20225, abs=5e-6)


@pytest.mark.published("A9.3")
def test_equivalent_load_of_a_ball_screw():
    """ISO 3408-5:2006 [I: scope seen, formula in public texts]: 4, 1.5, 0.5 kN at 20, 50, 30 %.

    The screw is driven by a torque in proportion to the force, so that the equivalent torque over the lead is
    the equivalent force; weights are revolutions.
    """
    lead, rates, forces, shares = 10e-3, (200.0, 1000.0, 2000.0), (4e3, 1.5e3, 500.0), (2.0, 5.0, 3.0)
    starts = np.cumsum([0.0, *shares])
    segments = [
        segment(row, "constant speed", start_s=starts[row], start_speed=rate / 60.0 * lead, duration_s=share,
                process_effort=force)
        for row, (rate, force, share) in enumerate(zip(rates, forces, shares, strict=True))
    ]  # fmt: skip
    demand = axis("ball screw", {"lead": lead, "moving mass": 0.0}, *segments).demand
    force = demand.shaft_torque_equivalent * math.tau / lead
    assert demand.shaft_speed_mean / RPM == pytest.approx(1140.0, rel=1e-12)
    assert force == pytest.approx(1559.35, abs=5e-3)
    assert (20e3 / force) ** 3 == pytest.approx(2109.89, abs=5e-3)  # million revolutions


@pytest.mark.published("A9.4")
def test_equivalent_torque_of_a_gearhead():
    """The same weighting, exponent 3 [D]: 30, 8, 25 N·m at 3000, 3000, 1500 rpm for 15, 50, 35 %."""
    starts = (0.0, 15.0, 65.0)
    segments = [
        segment(
            row,
            "constant speed",
            start_s=start,
            start_speed=rate * RPM,
            duration_s=share,
            process_effort=torque,
        )
        for row, start, (torque, rate, share) in zip(
            (2, 3, 4), starts, ((30.0, 3000.0, 15.0), (8.0, 3000.0, 50.0), (25.0, 1500.0, 35.0)), strict=True
        )
    ]
    demand = axis("rotary load", {"load inertia": 0.0}, *segments).demand
    assert demand.shaft_torque_equivalent == pytest.approx(20.4353, abs=5e-5)
    assert demand.shaft_speed_mean / RPM == pytest.approx(2475.0, rel=1e-12)
