"""Properties of the sizing chain on random axes."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from actuator_sizing.core.machine import judge
from actuator_sizing.core.phases import Phase
from actuator_sizing.core.quadrature import integrate
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.evaluation import evaluate_pairs
from actuator_sizing.sizing.pair_course import course, speed_loss
from tests.made_cases import DIRECT, GEARHEAD, MOTOR, SURROUNDINGS, case, cycle

LAWS = (
    "trapezoid", "triangular", "jerk-limited", "3-4-5 polynomial", "4-5-6-7 polynomial", "cycloidal",
    "modified sine", "modified trapezoid", "simple harmonic",
)  # fmt: skip

axes = st.fixed_dictionaries(
    {
        "law": st.sampled_from(LAWS),
        "stroke": st.floats(0.01, 2.0),
        "speed": st.floats(0.05, 1.5),
        "back": st.floats(0.05, 1.5),
        "payload": st.floats(0.0, 80.0),
        "process": st.floats(-300.0, 300.0),
        "inclination": st.floats(-1.5, 1.5),
        "efficiency": st.floats(0.3, 1.0),
        "friction": st.floats(0.0, 100.0),
        "viscous": st.floats(0.0, 200.0),
        "dwell": st.floats(0.01, 3.0),
        "brake": st.booleans(),
        "ratio": st.floats(1.0, 20.0),
        "gear_efficiency": st.floats(0.4, 1.0),
    }
)


def built(a, scale=1.0, split=False):
    dwell = [{"law": "dwell", "duration_s": a["dwell"], "brake_closed": a["brake"], "payload": a["payload"]}]
    if split:
        dwell = [{**dwell[0], "duration_s": a["dwell"] * part} for part in (0.25, 0.75)]
    segments = cycle(
        {
            "law": a["law"],
            "displacement": a["stroke"],
            "duration_s": scale * a["stroke"] / a["speed"],
            "payload": a["payload"],
            "process_effort": a["process"],
        },
        *dwell,
        {"law": a["law"], "displacement": -a["stroke"], "duration_s": scale * a["stroke"] / a["back"]},
    )
    return case(
        "ball screw",
        {
            "lead": 0.01, "moving mass": 12.0, "inclination": a["inclination"], "efficiency": a["efficiency"],
            "guide friction force": a["friction"], "viscous friction": a["viscous"],
            "driven shaft inertia": 1e-4, "driven shaft friction torque": 0.02,
        },
        segments,
        gearheads=[
            {**GEARHEAD, "ratio": a["ratio"], "efficiency": a["gear_efficiency"],
             "efficiency_back": 2.0 - 1.0 / a["gear_efficiency"]}
        ],
    )  # fmt: skip


def evaluated(made, surroundings=SURROUNDINGS):
    demand = build_demand(made)
    return demand, evaluate_pairs(demand, made.motor_parameters, made.gearhead_parameters, surroundings)


@settings(max_examples=40, deadline=None)
@given(axes)
def test_energy_taken_at_the_terminals_is_work_and_losses(a):
    """Over a closed cycle gravity and inertia return what they took: terminals = process + friction + losses."""
    made = built(a)
    demand, result = evaluated(made)
    motors, gearheads = made.motor_parameters, made.gearhead_parameters
    judged = judge(motors, made.surroundings)
    c = course(demand, motors, gearheads, judged)
    t = demand.duration_s
    net = result.energy_terminals_motoring_j - result.energy_terminals_regenerated_j
    copper = result.copper_loss_mean_w * demand.cycle_s
    motor_friction = integrate(t, speed_loss(motors, c.motor_speed_rad_s))
    drag = gearheads.no_load_torque_nm * integrate(t, np.abs(c.motor_speed_rad_s))
    # Losses of gearhead and screw: power in less power out, each from its own torques.
    mechanism = made.mechanism
    rod_power = demand.effort * demand.speed
    shaft_power = demand.shaft_torque * demand.shaft_speed
    inertia_power = mechanism.shaft_inertia_kg_m2 * demand.shaft_acceleration * demand.shaft_speed
    bearing = mechanism.shaft_friction_nm * np.abs(demand.shaft_speed)
    screw_loss = integrate(t, shaft_power - inertia_power - bearing - rod_power)
    assert screw_loss >= -1e-9 * integrate(t, np.abs(rod_power))
    gear_in = (
        c.shaft_torque_nm[0]
        - gearheads.inertia_kg_m2 * gearheads.ratio * demand.motor_acceleration
        - gearheads.no_load_torque_nm * demand.direction[:, None]
    ) * c.motor_speed_rad_s[0]
    gear_loss = integrate(t, gear_in - shaft_power)
    assert gear_loss >= -1e-9 * integrate(t, np.abs(shaft_power))
    guide = a["friction"] * integrate(t, np.abs(demand.speed)) + a["viscous"] * integrate(t, demand.speed**2)
    process = a["process"] * a["stroke"]
    payload_lifted = a["payload"] * 9.80665 * np.sin(a["inclination"]) * a["stroke"]  # it stays up there
    bearings = integrate(t, bearing)
    account = (
        copper + motor_friction + drag + screw_loss + gear_loss + guide + process + payload_lifted + bearings
    )
    scale = result.energy_terminals_motoring_j + result.energy_terminals_regenerated_j
    # 1e-9 of the energy that flows: the promised accuracy of every integral.
    assert net[0] == pytest.approx(account[0], abs=1e-9 * scale[0] + 1e-12)


@settings(max_examples=25, deadline=None)
@given(axes)
def test_splitting_a_dwell_changes_nothing(a):
    _, whole = evaluated(built(a))
    _, split = evaluated(built(a, split=True))
    for name in ("torque_rms_nm", "torque_peak_nm", "copper_loss_mean_w", "energy_terminals_motoring_j"):
        # Rounding of a few hundred terms.
        np.testing.assert_allclose(getattr(split, name), getattr(whole, name), rtol=1e-12, atol=1e-12)
    # The thermal map takes the dwell in two exact steps instead of one.
    np.testing.assert_allclose(split.winding_max_degc, whole.winding_max_degc, atol=1e-6)


@settings(max_examples=25, deadline=None)
@given(axes)
def test_rms_lies_between_mean_and_peak(a):
    demand, result = evaluated(built(a))
    mean = abs(float(demand.mean(demand.shaft_torque)))
    assert np.sqrt(demand.mean(demand.shaft_torque**2)) >= mean * (1 - 1e-12)
    assert result.torque_rms_nm[0] <= result.torque_peak_nm[0] * (1 + 1e-12)
    assert result.current_rms_a[0] <= result.current_peak_a[0] * (1 + 1e-12)


@settings(max_examples=25, deadline=None)
@given(axes)
def test_a_slower_cycle_never_needs_more_speed_or_acceleration(a):
    fast, _ = evaluated(built(a))
    slow, _ = evaluated(built(a, scale=2.0))
    # Time scaling by two: speeds by 1/2, accelerations by 1/4, exactly.
    assert slow.peak(slow.speed) == pytest.approx(fast.peak(fast.speed) / 2.0, rel=1e-9)
    assert slow.peak(slow.acceleration) == pytest.approx(fast.peak(fast.acceleration) / 4.0, rel=1e-9)


@settings(max_examples=25, deadline=None)
@given(axes, st.floats(0.1, 10.0))
def test_a_winding_with_more_turns_needs_the_same_heat(a, turns):
    """K ∝ N and R, L ∝ N²: torque, loss and temperature stay, current goes down, voltage up."""
    made = built(a)
    rewound = {
        **MOTOR,
        "torque_constant_nm_per_a": MOTOR["torque_constant_nm_per_a"] * turns,
        "resistance_ohm": MOTOR["resistance_ohm"] * turns**2,
        "inductance_h": MOTOR["inductance_h"] * turns**2,
        "peak_current_a": MOTOR["peak_current_a"] / turns,
        "continuous_current_a": MOTOR["continuous_current_a"] / turns,
    }
    other = case("rotary load", {"load inertia": 1.0}, made.segments[:1], motors=[MOTOR, rewound])
    demand = build_demand(made)
    gear = made.gearhead_parameters.take(np.array([0, 0]))
    both = evaluate_pairs(demand, other.motor_parameters, gear, made.surroundings)
    for name, power in (
        ("torque_rms_nm", 0), ("copper_loss_mean_w", 0), ("current_rms_a", -1), ("voltage_peak_v", 1),
        ("energy_terminals_motoring_j", 0),
    ):  # fmt: skip
        first, second = getattr(both, name)
        assert second == pytest.approx(first * turns**power, rel=1e-9)
    if both.has_equilibrium.all():
        assert both.winding_max_degc[1] == pytest.approx(both.winding_max_degc[0], rel=1e-9)


def test_direct_drive_is_a_gearhead_of_ratio_one_without_losses():
    segments = cycle(
        {"law": "cycloidal", "displacement": 1.0, "duration_s": 0.5}, {"law": "dwell", "duration_s": 0.2}
    )
    made = case("rotary load", {"load inertia": 0.01, "friction torque": 0.3}, segments, gearheads=[DIRECT])
    demand, result = evaluated(made)
    # Kinetic energy of load and rotor comes back, friction does not: shaft energy is friction work.
    net = result.energy_shaft_motoring_j[0] - result.energy_shaft_regenerated_j[0]
    assert net == pytest.approx(0.3 * 1.0, rel=1e-9)
    assert isinstance(segments[0].phases[0], Phase)
    assert demand.load_inertia == pytest.approx(0.01)
