"""The plant and its exact propagation against scipy and against event-located integration."""

import math
from dataclasses import replace

import control
import numpy as np
import pytest
from scipy import signal
from scipy.integrate import solve_ivp

from actuator_sizing.core.frequency import transfer
from actuator_sizing.core.plant import Plant, series_stiffness
from actuator_sizing.core.propagation import respond, zero_order_hold
from actuator_sizing.core.switching import Held, run_open_loop

RIGID = Plant(
    resistance_ohm=1.2, inductance_h=4e-3, torque_constant_nm_per_a=0.5, motor_inertia_kg_m2=2e-4,
    load_inertia_kg_m2=8e-4, motor_viscous_nm_s=1e-4, load_viscous_nm_s=2e-4,
)  # fmt: skip
SOFT = replace(RIGID, stiffness_nm_per_rad=5.0, damping_nm_s=2e-3)


@pytest.mark.parametrize("plant", [RIGID, SOFT])
def test_held_steps_agree_with_scipy(plant):
    """1e-9 of the largest value: both are exact up to rounding of the exponential."""
    A, B = plant.matrices()
    Phi, Gamma, *_ = signal.cont2discrete((A, B, np.eye(5), np.zeros((5, 3))), 1e-3)
    mine = zero_order_hold(A, B, 1e-3)
    np.testing.assert_allclose(mine[0], Phi, rtol=1e-9, atol=1e-9 * np.abs(Phi).max())
    np.testing.assert_allclose(mine[1], Gamma, rtol=1e-9, atol=1e-9 * np.abs(Gamma).max())
    inputs = np.random.default_rng(1).normal(size=(300, 3))
    _, reference, _ = signal.dlsim((Phi, Gamma, np.eye(5), np.zeros((5, 3)), 1e-3), inputs)
    states = respond(A, B, np.zeros(5), inputs, 1e-3)
    np.testing.assert_allclose(states, reference, rtol=1e-9, atol=1e-9 * np.abs(reference).max())


@pytest.mark.parametrize("plant", [RIGID, SOFT])
def test_frequency_response_agrees_with_python_control(plant):
    keep = [0, 1, 2, 3]
    A, B = plant.matrices()
    A, b, c = A[np.ix_(keep, keep)], B[keep, 0], np.eye(4)[1]
    w = np.geomspace(1.0, 1e4, 50)
    reference = control.ss(A, b[:, None], c[None, :], 0.0)(1j * w)
    np.testing.assert_allclose(transfer(A, b, c, w), reference, rtol=1e-9)


def test_the_two_masses_ring_at_their_frequencies():
    """Free–free frequency without motor torque; a locked motor leaves the load on its spring."""
    free = replace(SOFT, damping_nm_s=0.0, motor_viscous_nm_s=0.0, load_viscous_nm_s=0.0)
    A = free.matrices()[0][1:4, 1:4]
    assert np.abs(np.linalg.eigvals(A)).max() == pytest.approx(free.resonance_rad_s, rel=1e-12)
    assert free.resonance_rad_s == pytest.approx(math.sqrt(5.0 * (1 / 2e-4 + 1 / 8e-4)), rel=1e-14)
    assert free.antiresonance_rad_s == pytest.approx(math.sqrt(5.0 / 8e-4), rel=1e-14)
    # The numerator of voltage to motor speed vanishes at the antiresonance.
    keep = [0, 1, 2, 3]
    A, B = free.matrices()
    near = transfer(
        A[np.ix_(keep, keep)], B[keep, 0], np.eye(4)[1], np.array([free.antiresonance_rad_s, 10.0])
    )
    assert abs(near[0]) < 1e-10 * abs(near[1])


def test_a_very_stiff_spring_is_rigid():
    stiff = replace(SOFT, stiffness_nm_per_rad=1e7, damping_nm_s=0.5)
    held = [Held(0.1, 5.0, 0.1)]
    soft, hard = (run_open_loop(p, held, 1e-3).end for p in (stiff, SOFT.rigid()))
    assert soft[[0, 1, 4]] == pytest.approx(hard[[0, 1, 4]], rel=1e-6)  # twist of 1e-8 rad is left out


def reference(plant, voltage, load, duration, x, sticks):
    """Two masses with friction on the load alone, integrated tightly with every stick and slip located."""
    level = plant.load_coulomb_nm
    A, B = plant.matrices()

    def pull(x):
        return float(A[3] @ x + B[3, 2] * load) * plant.load_inertia_kg_m2

    time = 0.0
    mode = 0 if sticks else int(np.sign(x[3]))
    while time < duration - 1e-13:
        stuck = mode == 0

        def right(_t, y, stuck=stuck, mode=mode):
            dy = A @ y + B[:, 0] * voltage + B[:, 2] * (load - mode * level)
            if stuck:
                dy[3] = 0.0
            return dy

        event = (lambda _t, y: abs(pull(y)) - level) if stuck else (lambda _t, y: y[3])
        event.terminal, event.direction = True, (1.0 if stuck else -mode)
        done = solve_ivp(
            right, (time, duration), x, events=event, rtol=1e-11, atol=1e-13, method="DOP853", max_step=1e-3
        )
        x, time = done.y[:, -1].copy(), done.t[-1]
        if done.status != 1:
            break
        if stuck:
            mode = int(np.sign(pull(x)))
        else:
            x[3] = 0.0
            mode = 0 if abs(pull(x)) <= level else int(np.sign(pull(x)))
    return x, mode == 0


def test_stick_and_slip_agree_with_located_integration():
    """1e-6 relative: the integrator's own tolerance, over seven changes between stick and slip."""
    plant = replace(SOFT, load_coulomb_nm=0.3)
    course = [(0.05, 1.0), (0.2, 0.8), (0.2, -2.0), (0.3, 0.2)]
    mine = run_open_loop(plant, [Held(t, u) for t, u in course], 1e-3)
    x, sticks = np.zeros(5), True
    for duration, voltage in course:
        x, sticks = reference(plant, voltage, 0.0, duration, x, sticks)
    assert mine.events >= 4
    np.testing.assert_allclose(mine.end, x, rtol=1e-6, atol=1e-6 * np.abs(x).max())


def test_what_sticks_is_exactly_at_rest():
    plant = replace(RIGID, motor_coulomb_nm=0.3, load_coulomb_nm=0.1)
    course = run_open_loop(plant, [Held(0.2, 0.9 * 0.4 * 1.2 / 0.5), Held(0.2, 2.0), Held(0.5, 0.0)], 1e-3)
    states = course.states[course.time_s <= 0.2]
    assert (states[:, 1] == 0.0).all()
    assert course.states[:, 1].max() > 0.1
    assert course.end[1] == 0.0


@pytest.mark.parametrize("gap", [0.0, 0.02])
def test_the_result_does_not_depend_on_the_step(gap):
    plant = replace(SOFT, motor_coulomb_nm=0.02, load_coulomb_nm=0.3, backlash_rad=gap)
    held = [Held(0.05, 1.0), Held(0.2, 0.8), Held(0.2, -2.0), Held(0.3, 0.2)]
    ends = [run_open_loop(plant, held, step).end for step in (1e-3, 2.3e-4)]
    np.testing.assert_allclose(ends[0], ends[1], rtol=1e-9, atol=1e-9)


def test_backlash_lets_the_motor_turn_alone():
    plant = replace(SOFT, backlash_rad=0.04)
    course = run_open_loop(plant, [Held(0.1, 0.2)], 1e-4)
    first = int(np.flatnonzero(np.abs(course.states[:, 2]) > 0.0199999)[0])
    assert first > 10
    assert (course.states[:first, 3] == 0.0).all()
    assert course.states[-1, 3] > 0.0
    assert np.abs(course.states[:, 2]).max() > 0.02


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"stiffness_nm_per_rad": 0.0}, "stiffness_nm_per_rad"),
        ({"stiffness_nm_per_rad": -1.0}, "stiffness_nm_per_rad"),
        ({"load_inertia_kg_m2": 0.0}, "load_inertia_kg_m2"),
        ({"inductance_h": 0.0}, "inductance_h"),
        ({"resistance_ohm": math.nan}, "resistance_ohm"),
        ({"load_coulomb_nm": math.inf}, "load_coulomb_nm"),
    ],
)
def test_bad_plants_are_refused_by_name(change, words):
    with pytest.raises(ValueError, match=words):
        replace(SOFT, **change)


def test_springs_in_series():
    assert series_stiffness(3.0, 6.0) == pytest.approx(2.0, rel=1e-15)
    assert series_stiffness(3.0, math.nan) == 3.0
    assert math.isnan(series_stiffness(math.nan))
