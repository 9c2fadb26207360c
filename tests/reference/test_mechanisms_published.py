"""Published and defined values by the mechanisms themselves: collar screws, winch, conveyor, inventory.

Each row names its source; a tolerance is half the last printed digit, or that of the source's own arithmetic.
"""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.core.inertias import about_offset_axis, block_inertia, cylinder_inertia, cylinder_mass
from actuator_sizing.core.mechanisms import GRAVITY_M_S2, MECHANISMS
from actuator_sizing.core.mechanisms.screw import screw_efficiencies
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.evaluation import evaluate_pairs
from tests.made_cases import DIRECT, GEARHEAD, MOTOR, case, cycle

TEXTBOOK_G = 9.81  # the gravity that the textbooks below calculate with
INCH, POUND_INCH = 0.0254, 4.4482216 * 0.0254


def torques(lead, mean, mu, force, flank=0.0, collar_mu=0.0, collar=0.0):
    """Torque that raises and torque that lowers a load."""
    forward, back = screw_efficiencies(lead, mean, mu, flank, collar_mu, collar)
    return force * lead / (2 * np.pi * forward), -force * lead / (2 * np.pi) * back, forward


@pytest.mark.published("A3.1")
def test_square_thread_with_collar():
    # Budynas & Nisbett, Shigley's Mechanical Engineering Design, Example 8-1 (quoted from memory)
    up, down, eta = torques(8e-3, 30e-3, 0.08, 6400.0, 0.0, 0.08, 40e-3)
    assert up == pytest.approx(26.18, abs=0.01)
    assert down == pytest.approx(9.77, abs=0.01)
    assert eta == pytest.approx(0.311, abs=0.0005)


@pytest.mark.published("A3.2")
def test_square_thread_in_inches():
    # Wentzell, Machine Design, Ex. 18.1-18.2 pp. 399-400: two screws share 5800 lb
    up, down, eta = torques(INCH / 3, 1.354 * INCH, 0.15, 2900 * 4.4482216)
    assert up / POUND_INCH == pytest.approx(453.68, abs=0.5)
    assert 100 * eta == pytest.approx(33.91, abs=0.05)
    assert down > 0.0  # self-locking, as printed


@pytest.mark.published("A3.3")
def test_triple_start_screw_with_wide_collar():
    # Bhandari, Design of Machine Elements, Ex. 6.1: collar 100/65 mm, uniform wear
    up, down, _ = torques(24e-3, 46e-3, 0.15, 15e3, 0.0, 0.15, 82.5e-3)
    assert up == pytest.approx(204.644, abs=0.005)
    assert down == pytest.approx(87.402, abs=0.005)


@pytest.mark.published("A3.4")
def test_trapezoidal_thread_with_collar():
    # Jindal, Machine Design, Ex. 16-2 p. 451 (inputs); values follow from the definition, μ/cos 15°
    up, down, eta = torques(21e-3, 46.5e-3, 0.12, 20e3, np.radians(15.0), 0.15, 40e-3)
    assert up == pytest.approx(186.879, abs=0.001)
    assert down == pytest.approx(51.0826, abs=0.001)
    assert eta == pytest.approx(0.357691, abs=1e-5)


@pytest.mark.published("A3.14")
def test_square_thread_with_collar_again():
    # Jindal, Machine Design, Ex. 16-1 p. 450
    assert torques(6e-3, 27e-3, 0.2, 20e3, 0.0, 0.15, 24e-3)[0] == pytest.approx(110.148, abs=0.02)


@pytest.mark.published("A3.15")
def test_screw_jack():
    # adaptivebooks.org, Statics 5.6.1 problem 2: 10 000 lb, two threads per inch
    up = torques(0.5 * INCH, 2 * INCH, 0.2, 1e4 * 4.4482216)[0]
    assert up / POUND_INCH == pytest.approx(2840.0, abs=10.0)


@pytest.mark.published("A3.13")
def test_self_locking_limit():
    # Textbook result, by definition: η at the limit is (1 − μ²)/2
    lead = np.pi * 0.02 * 0.15
    forward, back = screw_efficiencies(lead, 0.02, 0.15)
    assert back == pytest.approx(0.0, abs=1e-12)
    assert forward == pytest.approx(0.48875, abs=1e-6)


def motor_torque(made):
    demand = build_demand(made)
    pair = evaluate_pairs(demand, made.motor_parameters, made.gearhead_parameters, made.surroundings)
    return pair.torque_peak_nm[0]


@pytest.mark.published("A3.9")
def test_inclined_haulage():
    # Khurmi & Gupta, Theory of Machines, Ex. 3.4 p. 35: 14 t up 1:20 with 0.1 m/s²; motor behind 40:1, 85 %
    values = {
        "drum diameter": 1.0,
        "moving mass": 14000.0,
        "inclination": np.arcsin(TEXTBOOK_G / GRAVITY_M_S2 / 20.0),
        "guide friction force": 1200.0,
        "driven shaft inertia": 1250.0 * 0.45**2,
    }
    made = case(
        "winch",
        values,
        cycle({"law": "speed ramp", "end_speed": 1.8, "duration_s": 18.0}),
        motors=[{**MOTOR, "rotor_inertia_kg_m2": 110 * 0.125**2, "friction_torque_nm": 0.0,
                 "viscous_friction_nm_s": 0.0}],
        gearheads=[{**GEARHEAD, "ratio": 40.0, "efficiency": 0.85, "no_load_torque_nm": 0.0, "inertia_kg_m2": 0.0}],
    )  # fmt: skip
    assert motor_torque(made) == pytest.approx(154.46, abs=0.01)


@pytest.mark.parametrize(("efficiency", "printed"), [(1.0, 0.231), (0.9, 0.216)])
@pytest.mark.published("A3.10")
def test_falling_mass_drives_a_geared_rotor(efficiency, printed):
    # Khurmi & Gupta, Theory of Machines, Ex. 3.13 p. 50: at the printed acceleration the motor gives nothing
    def torque(acceleration):
        values = {"drum diameter": 0.6, "moving mass": 75.0, "driven shaft inertia": 100.0}
        made = case(
            "winch", values, cycle({"law": "speed ramp", "end_speed": -acceleration, "duration_s": 1.0}),
            motors=[{**MOTOR, "rotor_inertia_kg_m2": 5.0, "friction_torque_nm": 0.0, "viscous_friction_nm_s": 0.0}],
            gearheads=[{**GEARHEAD, "ratio": 6.0, "efficiency": efficiency, "efficiency_back": efficiency,
                        "no_load_torque_nm": 0.0, "inertia_kg_m2": 0.0}],
        )  # fmt: skip
        demand = build_demand(made)
        T_shaft, alpha = demand.shaft_torque[0, 8], demand.shaft_acceleration[0, 8]
        assert T_shaft * alpha < 0.0  # the load drives
        return T_shaft * efficiency / 6.0 + 5.0 * 6.0 * alpha

    a = printed * GRAVITY_M_S2 / TEXTBOOK_G
    assert torque(a - 0.0006) * torque(a + 0.0006) < 0.0  # half a printed digit and its own rounding


@pytest.mark.published("A3.7")
def test_hoist_with_gear():
    # Dubey, Fundamentals of Electrical Drives, Ex. 2.1 p. 16: 1000 kg at 1.5 m/s and 1420 rpm, 85 %
    speed = 1420 * 2 * np.pi / 60
    hoist = MECHANISMS["winch"].from_values(
        {"drum diameter": 2 * 1.5 / speed, "moving mass": 1000.0, "efficiency": 0.85}
    )
    made = replace(
        case("rotary load", {"load inertia": 1.0},
             cycle({"law": "speed ramp", "end_speed": 1.5, "duration_s": 1.0},
                   {"law": "constant speed", "end_speed": 1.5, "duration_s": 1.0})), mechanism=hoist)  # fmt: skip
    demand = build_demand(made)
    torque = demand.shaft_torque[-1, 0] * TEXTBOOK_G / GRAVITY_M_S2 + 0.1 * 10.0 / 0.9
    assert torque == pytest.approx(117.53, abs=0.02)
    assert 0.2 + 0.1**2 * 10.0 + demand.load_inertia == pytest.approx(0.401753, abs=1e-6)


@pytest.mark.published("A3.16")
def test_belt_conveyor():
    # Gupta & Singhal, Ex. 3.6 p. 36: 100 t/h over 200 m at 1.2 m/s, motor at 1200 rpm, up in 8 s
    speed = 1200 * 2 * np.pi / 60
    values = {"drum diameter": 2 * 1.2 / speed, "moving mass": 1e5 / 3600 * 200 / 1.2}
    made = case(
        "conveyor", values, cycle({"law": "speed ramp", "end_speed": 1.2, "duration_s": 8.0}),
        motors=[{**MOTOR, "rotor_inertia_kg_m2": 0.1, "friction_torque_nm": 0.0, "viscous_friction_nm_s": 0.0}],
        gearheads=[DIRECT],
    )  # fmt: skip
    assert build_demand(made).load_inertia == pytest.approx(0.4222, abs=1e-4)
    assert motor_torque(made) == pytest.approx(8.2, abs=0.01)


@pytest.mark.published("A10.1")
def test_disc_with_masses_at_the_rim():
    # Physics textbook problem with printed solution: 560 kg disc, two of 25 kg at 2.5 m, to 15 rpm in 11 s
    disc = cylinder_inertia(560.0, 5.0, 0.0)
    total = disc + 2 * about_offset_axis(0.0, 25.0, 2.5)
    assert (disc, total) == (1750.0, 2062.5)
    assert total * 15 * 2 * np.pi / 60 / 11 == pytest.approx(294.5, abs=0.1)


@pytest.mark.published("A10.2")
def test_disc_with_child():
    # OpenStax College Physics, Example 10.7 (quoted from memory): 250 N at the rim
    disc = cylinder_inertia(50.0, 3.0, 0.0)
    with_child = disc + about_offset_axis(0.0, 18.0, 1.25)
    assert disc == pytest.approx(56.25)
    assert with_child == pytest.approx(84.38, abs=0.005)
    assert 250 * 1.5 / disc == pytest.approx(6.67, abs=0.005)
    assert 250 * 1.5 / with_child == pytest.approx(4.44, abs=0.005)


@pytest.mark.published("A10.3", "A10.4", "A10.6")
def test_steel_and_aluminium_parts():
    # By definition m (D² + d²)/8 and m (a² + b²)/12; printed to six digits
    assert cylinder_mass(0.025, 0.0, 1.0, 7850.0) == pytest.approx(3.85336, abs=1e-5)
    assert cylinder_inertia(3.85336, 0.025, 0.0) == pytest.approx(3.01044e-4, abs=1e-9)
    ring = cylinder_mass(0.08, 0.05, 0.06, 7850.0)
    assert cylinder_inertia(ring, 0.08, 0.05) == pytest.approx(1.60500e-3, abs=1e-8)
    screw = cylinder_mass(0.032, 0.0, 1.4, 7850.0)
    assert cylinder_inertia(screw, 0.032, 0.0) == pytest.approx(1.13135e-3, abs=1e-8)
    hub = cylinder_mass(0.07, 0.032, 0.066, 2700.0)
    assert cylinder_inertia(hub, 0.07, 0.032) == pytest.approx(4.01704e-4, abs=1e-9)
    assert block_inertia(4.0, 0.2, 0.1) == pytest.approx(0.0166667, abs=1e-7)
    assert about_offset_axis(block_inertia(4.0, 0.2, 0.1), 4.0, 0.15) == pytest.approx(0.106667, abs=1e-6)


@pytest.mark.published("A10.5")
def test_mass_on_screw_and_belt():
    # By definition m (l/2π)² and m r²
    screw = MECHANISMS["ball screw"].from_values({"lead": 0.01, "moving mass": 120.0})
    belt = MECHANISMS["belt"].from_values({"pulley diameter": 0.06, "moving mass": 12.0})
    assert float(screw.inertia_at_shaft(np.zeros(1))[0]) == pytest.approx(3.03964e-4, abs=1e-9)
    assert float(belt.inertia_at_shaft(np.zeros(1))[0]) == pytest.approx(0.0108, abs=1e-12)
