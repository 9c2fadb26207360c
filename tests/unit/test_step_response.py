"""Closed form of the voltage step against numerical libraries and limits."""

import math

import numpy as np
import pytest

from actuator_sizing.core.step_response import voltage_step

NAN = math.nan

#: R, L, K, J, b, u: real poles, complex poles, nearly double poles, stiff poles, slow electrical side.
MOTORS = {
    "real": (1.0, 0.5, 0.01, 0.01, 0.1, 1.0),
    "complex": (10.0, 1.0, 1.0, 0.01, 0.001, 24.0),
    "undamped almost": (0.01, 1e-2, 0.5, 1e-3, 0.0, 12.0),
    "double": (1.0, 1.0, 0.5, 1.0, 0.0, 1.0),
    "almost double": (1.0, 1.0, 0.5 * (1 + 1e-9), 1.0, 0.0, 1.0),
    "stiff": (0.5, 1e-5, 0.05, 1e-3, 1e-5, 48.0),
    "friction faster than current": (1.0, 0.5, 0.05, 0.01, 0.1, 10.0),
}
NAMES = pytest.mark.parametrize("motor", MOTORS.values(), ids=MOTORS.keys())


def system(R, L, K, J, b, _u):
    A = np.array([[-R / L, -K / L], [K / J, -b / J]])
    return A, np.array([[1 / L], [0.0]])


@NAMES
def test_agrees_with_scipy_signal(motor):
    from scipy import signal

    response = voltage_step(*motor)
    A, B = system(*motor)
    end = 3.0 * max(response.settling_time_s, response.electrical_time_constant_s)
    t, out = signal.step(signal.StateSpace(A, B, np.eye(2), np.zeros((2, 1))), T=np.linspace(0.0, end, 801))
    scale_i, scale_w = np.abs(out).max(axis=0) * motor[-1]
    np.testing.assert_allclose(response.current_at(t), out[:, 0] * motor[-1], atol=1e-9 * scale_i)
    np.testing.assert_allclose(response.speed_at(t), out[:, 1] * motor[-1], atol=1e-9 * scale_w)


@pytest.mark.filterwarnings("ignore::DeprecationWarning")
@NAMES
def test_figures_agree_with_python_control(motor):
    import control

    response = voltage_step(*motor)
    A, B = system(*motor)
    speed = control.ss(A, B, [[0.0, 1.0]], [[0.0]])
    poles = sorted(control.poles(speed), key=lambda p: (p.real, p.imag))
    mine = sorted(response.poles_per_s, key=lambda p: (p.real, p.imag))
    # a double pole is found by a general eigenvalue routine to the root of the rounding only
    accuracy = 1e-7 if abs(mine[0] - mine[1]) < 1e-3 * abs(mine[0]) else 1e-9
    np.testing.assert_allclose(mine, poles, rtol=accuracy)
    t = np.linspace(0.0, 1.5 * response.settling_time_s, 20_001)
    info = control.step_info(speed * motor[-1], T=t, SettlingTimeThreshold=0.02)
    grid = t[1]  # sampled figures are late by up to one step, rise by up to two
    assert response.settling_time_s == pytest.approx(info["SettlingTime"], abs=1.01 * grid)
    assert response.rise_time_s == pytest.approx(info["RiseTime"], abs=1.01 * grid)
    # the sampled top is low by the curvature over half a step at most
    curvature = 0.5 * (0.5 * grid * abs(mine[0])) ** 2
    assert response.overshoot_ratio == pytest.approx(0.01 * info["Overshoot"], abs=2.0 * curvature)
    assert response.final_speed_rad_s == pytest.approx(info["SteadyStateValue"], rel=1e-9)


@NAMES
def test_peaks_are_those_of_a_dense_sampling(motor):
    response = voltage_step(*motor)
    # settling is about four time constants: at eight times that, what is only approached is there
    end = 8.0 * max(response.settling_time_s, response.electrical_time_constant_s)
    t = np.unique(np.concatenate([np.linspace(0.0, end, 400_001), np.geomspace(1e-6 * end, end, 20_001)]))
    current, speed = response.current_at(t), response.speed_at(t)
    assert response.peak_current_a >= current.max() - 1e-12 * current.max()
    assert response.peak_current_a == pytest.approx(current.max(), rel=1e-5)
    if not math.isnan(response.peak_current_time_s):
        assert response.current_at(response.peak_current_time_s) == pytest.approx(
            response.peak_current_a, rel=1e-12
        )
    assert response.peak_speed_rad_s >= speed.max() - 1e-12 * speed.max()
    assert response.peak_speed_rad_s == pytest.approx(speed.max(), rel=1e-5)


@NAMES
def test_settling_is_the_last_exit_from_the_band(motor):
    response = voltage_step(*motor)
    final = response.final_speed_rad_s
    after = response.settling_time_s * (1.0 + np.linspace(1e-9, 3.0, 50_001))
    assert np.abs(response.speed_at(after) / final - 1.0).max() <= 0.02 + 1e-9
    assert abs(response.speed_at(response.settling_time_s) / final - 1.0) == pytest.approx(0.02, abs=1e-12)
    assert abs(response.speed_at((1.0 - 1e-6) * response.settling_time_s) / final - 1.0) > 0.02


def test_sign_of_the_voltage_only_mirrors():
    up, down = voltage_step(*MOTORS["complex"]), voltage_step(*MOTORS["complex"][:-1], -24.0)
    assert down.peak_current_a == -up.peak_current_a
    assert down.peak_speed_rad_s == -up.peak_speed_rad_s
    assert (down.settling_time_s, down.overshoot_ratio) == (up.settling_time_s, up.overshoot_ratio)


@pytest.mark.parametrize("inductance", [0.0, NAN])
def test_without_inductance_it_is_first_order(inductance):
    R, K, J, b, u = 2.0, 0.1, 1e-4, 1e-3, 24.0
    response = voltage_step(R, inductance, K, J, b, u)
    tau = R * J / (K * K + R * b)
    t = np.linspace(0.0, 5 * tau, 11)
    final = K * u / (K * K + R * b)
    np.testing.assert_allclose(response.speed_at(t), -final * np.expm1(-t / tau), rtol=1e-12)
    np.testing.assert_allclose(response.current_at(t), (u - K * response.speed_at(t)) / R, rtol=1e-12)
    assert response.rise_time_s == pytest.approx(tau * math.log(9.0))
    assert response.settling_time_s == pytest.approx(tau * math.log(50.0))
    assert (response.peak_current_a, response.peak_current_time_s) == (u / R, 0.0)
    assert response.mechanical_time_constant_s == pytest.approx(R * J / K**2)
    assert response.electrical_time_constant_s == 0.0


def test_small_inductance_tends_to_first_order():
    small, none = (voltage_step(2.0, L, 0.1, 1e-4, 1e-3, 24.0) for L in (1e-10, 0.0))
    assert small.settling_time_s == pytest.approx(none.settling_time_s, rel=1e-6)
    assert small.peak_current_a == pytest.approx(none.peak_current_a, rel=1e-5)


def test_no_voltage_is_no_step():
    still = voltage_step(1.0, 1e-3, 0.1, 1e-4, 1e-4, 0.0)
    assert (still.final_speed_rad_s, still.peak_speed_rad_s, still.peak_current_a) == (0.0, 0.0, 0.0)
    assert math.isnan(still.rise_time_s)
    assert math.isnan(still.settling_time_s)
    time, current, speed = still.series(50)
    assert len(time) == 50
    assert not current.any()
    assert not speed.any()


@pytest.mark.parametrize("viscous", [0.0, 1e-3])
def test_no_torque_leaves_the_winding_alone(viscous):
    response = voltage_step(2.0, 1e-2, 0.0, 1e-4, viscous, 24.0)
    t = np.array([0.0, 1e-3, 1e-2])
    np.testing.assert_allclose(response.current_at(t), -12.0 * np.expm1(-t * 200.0), rtol=1e-12)
    assert not response.speed_at(t).any()
    assert response.final_current_a == 12.0
    assert math.isnan(response.settling_time_s)
    assert math.isinf(response.mechanical_time_constant_s)


def test_tiny_torque_constant_does_not_lose_the_final_speed():
    response = voltage_step(1.0, 1e-3, 1e-6, 1e-4, 0.0, 24.0)
    assert response.final_speed_rad_s == pytest.approx(2.4e7)
    assert response.settling_time_s == pytest.approx(1e8 * math.log(50.0), rel=1e-9)  # R J/K² = 1e8 s
    assert response.peak_current_a == pytest.approx(24.0, rel=1e-9)


def test_series_starts_at_rest_and_ends_settled():
    for motor in MOTORS.values():
        response = voltage_step(*motor)
        time, current, speed = response.series(300)
        assert (time[0], speed[0]) == (0.0, 0.0)
        assert current[0] == pytest.approx(0.0, abs=1e-12)
        assert (np.diff(time) > 0.0).all()
        assert speed[-1] == pytest.approx(response.final_speed_rad_s, rel=0.0201)
    assert voltage_step(*MOTORS["real"]).series(10, end_s=3.0)[0][-1] == 3.0
