"""Robot axes from openly published parameter sets, through demand, evaluation and verdict.

Sources
-------
[P] P. Corke & B. Armstrong-Helouvry, ICRA 1994, pp. 1608-1613: Puma 560, as packaged in roboticstoolbox-python
    (MIT, version 1.5.0). Friction and gravity are the printed output of that library, inertias follow from inputs.
[R] Modelica Standard Library (BSD-3), MultiBody.Examples.Systems.RobotR3.OneAxis with its Motor and GearType1;
    data Tuerk 1990 and Otter 1995. Inputs seen, outputs computed from the stated equations.
"""

import numpy as np
import pytest

from actuator_sizing.sizing.judging import ORDER, active_checks, judge_sets
from actuator_sizing.sizing.results import FAILS
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.bare_axis import axis, ramp, steady

PUMA_ROTOR_KG_M2 = 200e-6
PUMA_RATIOS = (62.6111, 107.815, 53.7063)  # magnitudes; two of them turn the other way


@pytest.mark.published("A12.1")
@pytest.mark.parametrize(
    ("ratio", "inertia"), list(zip(PUMA_RATIOS, (0.784030, 2.32481, 0.576873), strict=True))
)
def test_rotor_seen_at_the_joint(ratio, inertia):
    """[P] n² J_m: torque at the motor times ratio for one radian per second squared of the joint; five decimals."""
    made = axis(
        "rotary load", {"load inertia": 0.0}, ramp(0.0, 1.0, duration_s=1.0),
        motor={"rotor_inertia_kg_m2": PUMA_ROTOR_KG_M2}, gearheads=[{"ratio": ratio}],
    )  # fmt: skip
    assert ratio * made.pairs.torque_peak_nm[0] == pytest.approx(inertia, abs=5e-6)


@pytest.mark.published("A12.2")
@pytest.mark.parametrize(
    ("ratio", "viscous", "coulomb", "friction"),
    [
        (PUMA_RATIOS[0], 1.48e-3, 0.395, 30.533),
        (PUMA_RATIOS[1], 0.817e-3, 0.126, 23.082),
        (PUMA_RATIOS[2], 1.38e-3, 0.132, 11.07),
    ],
)
def test_friction_of_the_joints(ratio, viscous, coulomb, friction):
    """[P] n² B ω + n T_c at one radian per second; printed to 0.001, the last one to 0.01 N·m in effect."""
    made = axis(
        "rotary load", {"load inertia": 0.0}, steady(1.0),
        motor={"viscous_friction_nm_s": viscous, "friction_torque_nm": coulomb}, gearheads=[{"ratio": ratio}],
    )  # fmt: skip
    assert ratio * made.pairs.torque_peak_nm[0] == pytest.approx(friction, abs=5e-4)
    # All of it is heat: the friction loss at the motor is the power at the joint.
    assert made.pairs.friction_loss_mean_w[0] == pytest.approx(
        ratio * made.pairs.torque_peak_nm[0], rel=1e-12
    )


@pytest.mark.published("A12.3")
def test_gravity_and_inertia_of_the_shoulder():
    """[P] nominal pose: gravity 31.640 N·m and inertia 4.4137 kg·m² with the rotor, printed to five digits."""
    ratio = PUMA_RATIOS[1]
    made = axis(
        "rotary load", {"load inertia": 4.4137 - ratio**2 * PUMA_ROTOR_KG_M2}, steady(0.1, process_effort=31.640),
        motor={"rotor_inertia_kg_m2": PUMA_ROTOR_KG_M2}, gearheads=[{"ratio": ratio}],
    )  # fmt: skip
    assert made.pairs.torque_peak_nm[0] == pytest.approx(0.293465, abs=5e-6)
    # half of the last printed digit of 4.4137, over the rotor's part for the ratio
    assert made.demand.load_inertia == pytest.approx(2.08893, abs=5e-5)
    assert made.pairs.inertia_ratio[0] == pytest.approx(0.898535, abs=5e-5 / 2.32)


@pytest.mark.published("A12.4")
def test_robot_axis_is_told_to_turn_too_fast():
    """[R] 15 kg at 1.14 m behind 210:1, 3 rad/s and 10 rad/s²: the cycle asks for twice the stated 315 rad/s."""
    motor = {
        "rotor_inertia_kg_m2": 0.0013, "torque_constant_nm_per_a": 1.1616, "friction_torque_nm": 0.5,
        "viscous_friction_nm_s": 0.1 / 130.0, "peak_current_a": 9.0, "speed_max_rad_s": 315.0,
    }  # fmt: skip
    load = {"load inertia": 15.0 * 1.14**2}
    move = ramp(0.0, 3.0, acceleration_max=10.0)
    gear = [{"ratio": 210.0}]
    frictionless = axis("rotary load", load, move, motor={**motor, "friction_torque_nm": 0.0,
                                                          "viscous_friction_nm_s": 0.0}, gearheads=gear)  # fmt: skip
    assert frictionless.pairs.torque_peak_nm[0] == pytest.approx(3.65829, abs=5e-6)
    made = axis("rotary load", load, move, motor=motor, gearheads=gear)
    pairs = made.pairs
    # largest at the end of the acceleration, where viscous friction is
    assert pairs.torque_peak_nm[0] == pytest.approx(4.64290, abs=5e-6)
    assert pairs.torque_peak_at_s[0] == pytest.approx(0.3, rel=1e-12)
    assert pairs.current_peak_a[0] == pytest.approx(3.99699, abs=5e-6)
    assert pairs.speed_peak_rad_s[0] == pytest.approx(630.0, rel=1e-12)

    checks, limits = active_checks(made.case.limits)
    verdicts = judge_sets(evaluate_sets(made.case, made.demand, np.array([[0, 0, 0]])), checks, limits)
    column = {check.key: number for number, check in enumerate(checks)}
    assert verdicts.utilisation[0, column["motor_speed"]] == pytest.approx(2.0, rel=1e-12)
    assert ORDER[verdicts.codes[0, column["motor_speed"]]] == FAILS
    assert verdicts.utilisation[0, column["motor_peak_current"]] == pytest.approx(3.99699 / 9.0, abs=1e-6)
    assert ORDER[verdicts.codes[0, column["motor_peak_current"]]] != FAILS
