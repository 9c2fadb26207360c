"""Stops against closed forms and an independent simulation."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from actuator_sizing.core.braking import rheostatic_stop, shorted_current, shorted_torque, stop


def constant(torque):
    return lambda omega: np.broadcast_to(torque, omega.shape)


def one(*values):
    return (np.array([value], dtype=float) for value in values)


@pytest.mark.parametrize("load", [3.0, 0.0, -2.0])
@pytest.mark.parametrize("torque", [np.array([8.0]), constant(8.0)], ids=["closed form", "quadrature"])
def test_constant_torque_stops_in_closed_form(load, torque):
    omega, J, gravity, friction, delay = one(200.0, 0.02, load, 0.5, 0.05)
    found = stop(omega, J, gravity, friction, delay, torque)
    slow = (load + 0.5) / 0.02
    left = 200.0 - slow * 0.05
    hard = (8.0 + 0.5 + load) / 0.02
    # 1e-9: quadrature of a constant and of a straight line, rounding over nine panels.
    assert found.time_s[0] == pytest.approx(0.05 + left / hard, rel=1e-9)
    assert found.angle_rad[0] == pytest.approx(200 * 0.05 - slow * 0.05**2 / 2 + left**2 / 2 / hard, rel=1e-9)


def test_work_of_the_brake_is_kinetic_energy_and_gravity():
    omega, J, gravity, friction, delay = one(150.0, 0.01, -1.5, 0.2, 0.0)
    found = stop(omega, J, gravity, friction, delay, constant(4.0))
    work = 4.0 * found.braking_angle_rad[0]
    assert work == pytest.approx(0.5 * 0.01 * 150**2 + (1.5 - 0.2) * found.braking_angle_rad[0], rel=1e-9)


def test_gravity_stronger_than_the_brake_never_stops():
    omega, J, gravity, friction, delay = one(10.0, 0.01, -5.0, 0.2, 0.0)
    found = stop(omega, J, gravity, friction, delay, constant(4.0))
    assert np.isinf(found.time_s[0])
    assert np.isinf(found.angle_rad[0])


def test_a_lifted_load_falls_back_within_the_delay():
    # Rest after 10/(3.2/0.01) s; then it falls with (3 − 0.2)/0.01 until 0.2 s, and the brake stops the fall.
    omega, J, gravity, friction, delay = one(10.0, 0.01, 3.0, 0.2, 0.2)
    found = stop(omega, J, gravity, friction, delay, constant(5.0))
    rest = 10.0 / 320.0
    up = 10.0 * rest / 2.0
    fallen = 0.2 - rest
    speed = 280.0 * fallen
    down = 280.0 * fallen**2 / 2.0 + speed**2 / 2.0 / ((5.0 - 3.0 + 0.2) / 0.01)
    assert found.angle_rad[0] == pytest.approx(max(up, down - up), rel=1e-9)
    assert found.braking_speed_rad_s[0] == pytest.approx(speed, rel=1e-12)


@pytest.mark.parametrize(("load", "reactance"), [(0.4, 0.0), (0.4, 0.02), (0.02, 0.02), (5.0, 0.005)])
def test_shorted_winding_agrees_with_a_simulation(load, reactance):
    R, K, J = 1.7, 0.6, 0.004

    def rate(t, y):
        return [-(shorted_torque(y[0], R, K, reactance) + load) / J, y[0]]

    def rest(t, y):
        return y[0]

    rest.terminal = True
    run = solve_ivp(rate, (0.0, 100.0), [400.0, 0.0], events=rest, rtol=1e-11, atol=1e-11)
    omega, inertia, gravity, friction, delay = one(400.0, J, load, 0.0, 0.0)
    found = stop(omega, inertia, gravity, friction, delay, lambda w: shorted_torque(w, R, K, reactance))
    # 1e-7: the simulation's own tolerance after some hundred steps.
    assert found.time_s[0] == pytest.approx(run.t[-1], rel=1e-7)
    assert found.angle_rad[0] == pytest.approx(run.y[1, -1], rel=1e-7)


def test_shorted_torque_is_largest_where_reactance_is_resistance():
    R, K, X = 2.0, 0.5, 0.01
    speed = np.linspace(1.0, 800.0, 8001)
    torque = shorted_torque(speed, R, K, X)
    assert speed[torque.argmax()] == pytest.approx(R / X, rel=1e-3)  # step of the grid
    assert torque.max() == pytest.approx(K**2 / (2.0 * X), rel=1e-6)
    # All the mechanical power becomes heat.
    np.testing.assert_allclose(torque * speed, R * shorted_current(speed, R, K, X) ** 2, rtol=1e-12)


def test_rheostatic_stop_without_load_only_approaches_rest():
    found = rheostatic_stop(1.0, 1e-3, 0.5, 0.01, 0.0, 100.0)
    assert np.isinf(found.time_to_rest_s)
    # Slow rate K²/(R J) to first order in the ratio of the two time constants.
    assert found.rates_per_s[0].real == pytest.approx(25.0, rel=0.03)
