"""The sampled cascade against an independent loop, its linear picture and its limits."""

import math
from dataclasses import replace

import control
import numpy as np
import pytest
from scipy import signal

from actuator_sizing.core.cascade_kernel import compiled_loop
from actuator_sizing.core.control import CONDITIONAL, Cascade, LoopSettings
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.tuning import LinearCascade, bandwidth_settings, default_tuning

RIGID = Plant(
    resistance_ohm=1.2, inductance_h=4e-3, torque_constant_nm_per_a=0.5, motor_inertia_kg_m2=2e-4,
    load_inertia_kg_m2=8e-4, motor_viscous_nm_s=1e-4, load_viscous_nm_s=2e-4,
)  # fmt: skip
SOFT = replace(RIGID, stiffness_nm_per_rad=500.0, damping_nm_s=5e-3)
BASE = LoopSettings(
    sample_time_s=1 / 16_000, position_gain_per_s=0.0, speed_gain_a_s_per_rad=0.0, speed_reset_time_s=math.inf,
    current_gain_v_per_a=0.0, current_reset_time_s=math.inf,
)  # fmt: skip
N = 4000


def commands(count=N, h=BASE.sample_time_s):
    """A smooth move, its speed, a current in advance and a load that jumps."""
    t = np.arange(count) * h
    end = count * h
    angle = 20.0 * (t / end - np.sin(2 * np.pi * t / end) / (2 * np.pi))
    speed = 20.0 / end * (1.0 - np.cos(2 * np.pi * t / end))
    load = np.where(t > 0.4 * end, -0.2, 0.1)
    return angle, speed, 0.05 * np.sin(9.0 * t), load


def independent(plant, s, angle, speed, feedforward, load):
    """The same cascade written with matrices and scipy's hold, without any limit or friction."""
    A, B = plant.matrices()
    Phi, Gamma, *_ = signal.cont2discrete((A, B, np.eye(5), np.zeros((5, 3))), s.sample_time_s)
    K, h = plant.torque_constant_nm_per_a, s.sample_time_s
    held = load[0]
    i0 = -held / K
    x = np.array([i0, 0.0, 0.0 if plant.is_rigid else -held / plant.stiffness_nm_per_rad, 0.0, 0.0])
    speed_part, current_part, last = 0.0, plant.resistance_ohm * i0, plant.resistance_ohm * i0
    states = np.empty((len(angle), 5))
    for k in range(len(angle)):
        states[k] = x
        w_ref = s.speed_feedforward_ratio * speed[k] + s.position_gain_per_s * (angle[k] - x[4])
        e = w_ref - x[1]
        i_ref = s.speed_gain_a_s_per_rad * e + speed_part + feedforward[k]
        speed_part += s.speed_gain_a_s_per_rad * h / s.speed_reset_time_s * e
        d = i_ref - x[0]
        u = s.current_gain_v_per_a * d + current_part + s.back_emf_feedforward_ratio * K * x[1]
        current_part += s.current_gain_v_per_a * h / s.current_reset_time_s * d
        applied, last = (last, u) if s.is_delayed else (u, last)
        x = Phi @ x + Gamma @ np.array([applied, 0.0, load[k]])
    return states


@pytest.mark.parametrize("delayed", [True, False])
@pytest.mark.parametrize("plant", [RIGID, SOFT])
def test_states_agree_with_an_independent_loop(plant, delayed):
    """1e-8 of the largest value of each state: rounding gathered over 4000 samples."""
    s = default_tuning(plant, replace(BASE, is_delayed=delayed)).settings
    inputs = commands()
    mine = Cascade(plant, s, load_torque_nm=float(inputs[3][0])).advance(*inputs)
    reference = independent(plant, s, *inputs)
    for name, column in (("current", 0), ("motor_speed", 1), ("twist", 2), ("motor_angle", 4)):
        scale = max(np.abs(reference[:, column]).max(), 1e-30)
        assert np.abs(mine[name] - reference[:, column]).max() <= 1e-8 * scale, name


@pytest.mark.skipif(compiled_loop() is None, reason="the optional compiler is not installed")
def test_machine_code_gives_the_same_states():
    plant = replace(SOFT, motor_coulomb_nm=0.02, load_coulomb_nm=0.1, backlash_rad=1e-3)
    s = replace(default_tuning(plant, BASE).settings, current_limit_a=3.0, voltage_limit_v=20.0)
    plain, fast = (Cascade(plant, s, is_compiled=c).advance(*commands()) for c in (False, True))
    for name, values in plain.items():
        np.testing.assert_allclose(fast[name], values, rtol=1e-9, atol=1e-12)


def test_one_run_is_the_same_in_pieces():
    s = default_tuning(SOFT, BASE).settings
    inputs = commands()
    whole = Cascade(SOFT, s).advance(*inputs)
    parts = Cascade(SOFT, s)
    pieces = [parts.advance(*(x[a:b] for x in inputs)) for a, b in ((0, 700), (700, 701), (701, N))]
    for name, values in whole.items():
        assert np.array_equal(np.concatenate([piece[name] for piece in pieces]), values)


def test_the_linear_picture_predicts_the_loop():
    """States of the matrices and of the loop agree to rounding."""
    s = replace(default_tuning(SOFT, BASE).settings, setpoint_filter_s=2e-3, notch_rad_s=800.0)
    linear = LinearCascade(SOFT, s)
    A, B = linear.matrices()
    x = np.zeros(len(A))
    inputs = [np.asarray(c) for c in commands()]
    inputs[3] = np.zeros(N)
    mine = Cascade(SOFT, s).advance(*inputs)["motor_angle"]
    angle = []
    for k in range(N):
        angle.append(x[linear.states().index(4)])
        x = A @ x + B @ np.array([c[k] for c in inputs])
    np.testing.assert_allclose(mine, angle, rtol=0.0, atol=1e-9 * np.abs(mine).max())


def test_margins_agree_with_python_control():
    """The current loop opened by hand: sampled plant, PI, one sample of delay; 1e-6 by their grids."""
    s = replace(default_tuning(RIGID, BASE).settings, back_emf_feedforward_ratio=0.0)
    h = s.sample_time_s
    A, B = RIGID.matrices()
    plant = control.c2d(control.ss(A[:2, :2], B[:2, :1], [[1.0, 0.0]], 0.0), h)
    z = control.tf("z")
    z = control.tf([1, 0], [1], h)
    pi = s.current_gain_v_per_a * (1 + h / s.current_reset_time_s / (z - 1)) / z
    gain, phase, _, crossover = control.margin(control.ss(pi) * plant)
    mine = LinearCascade(RIGID, s).margins("current")
    assert math.degrees(mine.phase_margin_rad) == pytest.approx(phase, rel=1e-6)
    assert mine.crossover_rad_s == pytest.approx(crossover, rel=1e-6)
    assert mine.gain_margin_ratio == pytest.approx(gain, rel=1e-6)


@pytest.mark.parametrize("anti_windup", ["back-calculation", CONDITIONAL])
def test_limits_hold_and_are_counted(anti_windup):
    s = replace(
        default_tuning(RIGID, BASE).settings,
        current_limit_a=2.0,
        voltage_limit_v=9.0,
        anti_windup=anti_windup,
    )
    n = 8000
    seen = Cascade(RIGID, s).advance(np.full(n, 5.0), np.zeros(n), np.zeros(n), np.zeros(n))
    assert np.abs(seen["current_reference"]).max() <= 2.0
    assert np.abs(seen["voltage"]).max() <= 9.0
    flags = seen["saturated"].astype(int)
    assert (flags & 1).any()
    assert (flags & 2).any()
    assert not flags[-100:].any()
    assert seen["motor_angle"][-1] == pytest.approx(5.0, abs=1e-3)
    assert seen["motor_angle"].max() < 5.5  # without anti-windup it runs past by a turn


def test_reactance_takes_voltage_away():
    s = replace(
        default_tuning(RIGID, BASE).settings, voltage_limit_v=20.0, reactance_ohm_s=0.05, current_limit_a=5.0
    )
    n = 3000
    seen = Cascade(RIGID, s).advance(np.zeros(n), np.full(n, 30.0), np.zeros(n), np.full(n, -1.0))
    cross = s.reactance_ohm_s * seen["motor_speed"] * seen["current"]
    later = slice(1, None)  # the voltage that acts was limited one sample before
    assert np.abs(np.hypot(seen["voltage"][later], cross[:-1])).max() <= 20.0 * (1 + 1e-12)


def test_friction_sticks_under_the_loop():
    """A load below the Coulomb level moves nothing at all while the command stands still."""
    plant = replace(SOFT, load_coulomb_nm=0.5)
    s = replace(default_tuning(SOFT, BASE).settings, speed_reset_time_s=math.inf)
    n = 2000
    cascade = Cascade(plant, s)
    seen = cascade.advance(np.zeros(n), np.zeros(n), np.zeros(n), np.full(n, 0.3))
    assert np.abs(seen["motor_angle"] - seen["twist"]).max() < 1e-15


def test_a_coarse_encoder_leaves_an_error_of_its_step():
    step = 2 * math.pi / 1000
    s = replace(default_tuning(RIGID, BASE).settings, encoder_step_rad=step)
    angle, speed, _, _ = commands()
    zero = np.zeros(N)
    coarse, fine = (
        Cascade(RIGID, x).advance(angle, speed, zero, zero)["motor_angle"]
        for x in (s, replace(s, encoder_step_rad=0.0))
    )
    gap = np.abs(coarse - fine).max()
    assert 0.05 * step < gap < 4.0 * step


def test_equilibrium_at_the_start_stays():
    s = default_tuning(SOFT, BASE).settings
    plant = replace(SOFT, backlash_rad=1e-3)
    held = Cascade(plant, s, speed_rad_s=10.0, load_torque_nm=-0.4)
    n = 400
    t = np.arange(n) * s.sample_time_s
    K = plant.torque_constant_nm_per_a
    forward = (0.4 + 10.0 * (plant.motor_viscous_nm_s + plant.load_viscous_nm_s)) / K
    seen = held.advance(10.0 * t, np.full(n, 10.0), np.full(n, forward), np.full(n, -0.4))
    assert np.abs(seen["motor_speed"] - 10.0).max() < 1e-9


def test_default_tuning_names_what_limits():
    assert default_tuning(RIGID, BASE).limited_by == "current loop"
    assert (
        default_tuning(replace(SOFT, damping_nm_s=0.3), BASE).limited_by == "antiresonance of motor and load"
    )
    assert default_tuning(replace(SOFT, damping_nm_s=1e-4), BASE, current_rise_s=1e-3).limited_by == (
        "stability reserve"
    )


@pytest.mark.parametrize("plant", [RIGID, SOFT, replace(SOFT, stiffness_nm_per_rad=5.0)])
def test_default_tuning_is_stable_with_reserve(plant):
    tuning = default_tuning(plant, BASE)
    linear = LinearCascade(plant, tuning.settings)
    assert linear.spectral_radius < 1.0
    assert linear.margins("speed").sensitivity_peak_ratio <= 1.75  # 1.7 on a coarser grid
    assert linear.margins("position").phase_margin_rad > math.radians(45.0)


def test_too_fast_loops_are_unstable():
    s = bandwidth_settings(RIGID, BASE, 40_000.0, 500.0, 50.0)
    assert LinearCascade(RIGID, s).spectral_radius > 1.0


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"sample_time_s": 0.0}, "sample_time_s"),
        ({"position_gain_per_s": math.nan}, "position_gain_per_s"),
        ({"current_limit_a": -1.0}, "current_limit_a"),
        ({"speed_gain_a_s_per_rad": math.inf}, "speed_gain_a_s_per_rad"),
        ({"anti_windup": "none"}, "anti_windup"),
        ({"notch_rad_s": 60_000.0}, "notch"),
    ],
)
def test_bad_settings_are_refused_by_name(change, words):
    with pytest.raises(ValueError, match=words):
        replace(BASE, **change)
