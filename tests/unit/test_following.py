"""Whole stretches of the cascade against its loop, sample by sample."""

import math
from dataclasses import replace

import numpy as np
import pytest
from numpy.polynomial import Polynomial, legendre
from scipy.linalg import expm

from actuator_sizing.core.control import Cascade, LoopSettings
from actuator_sizing.core.following import Follower, has_lasting_modes
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.propagation import exponential
from actuator_sizing.core.stretches import polynomials, shift_matrix
from actuator_sizing.core.tuning import default_tuning

RATE_HZ = 16_000
LINEAR = Plant(
    resistance_ohm=1.2, inductance_h=4e-3, torque_constant_nm_per_a=0.5, motor_inertia_kg_m2=2e-4,
    load_inertia_kg_m2=8e-4, motor_viscous_nm_s=1e-4,
)  # fmt: skip
SOFT = replace(LINEAR, stiffness_nm_per_rad=500.0, damping_nm_s=5e-3)
STICKY = replace(SOFT, motor_coulomb_nm=0.02, load_coulomb_nm=0.05)
LOOSE = replace(STICKY, backlash_rad=1e-3)
BASE = LoopSettings(
    sample_time_s=1.0 / RATE_HZ, position_gain_per_s=0.0, speed_gain_a_s_per_rad=0.0, speed_reset_time_s=math.inf,
    current_gain_v_per_a=0.0, current_reset_time_s=math.inf, current_limit_a=18.0, voltage_limit_v=300.0,
)  # fmt: skip


def quintic(start, end, duration):
    """A rest-to-rest move: its inputs as Legendre series over one piece, and its number of samples."""
    count = round(duration * RATE_HZ)
    rows = np.zeros((4, 6))
    rows[3, 0] = -0.1
    law, half = Polynomial([0.0, 0.0, 0.0, 10.0, -15.0, 6.0]), Polynomial([0.5, 0.5])
    for row, curve in enumerate((start + (end - start) * law, (end - start) / duration * law.deriv(),
                                 2e-3 * (end - start) / duration**2 * law.deriv(2))):  # fmt: skip
        series = legendre.poly2leg(curve(half).coef)
        rows[row, : len(series)] = series
    return rows, count


def cycle():
    dwells = [(np.array([[angle], [0.0], [0.0], [-0.1]]), 1600) for angle in (20.0, 0.0)]
    return [quintic(0.0, 20.0, 0.25), dwells[0], quintic(20.0, 0.0, 0.25), dwells[1]]


def both(plant, change):
    """Through the loop, and in stretches."""
    s = replace(default_tuning(plant, BASE).settings, **change)
    loop, follower = Cascade(plant, s, load_torque_nm=-0.1), Follower(Cascade(plant, s, load_torque_nm=-0.1))
    one, other = [], []
    for series, count in cycle():
        inputs = series @ legendre.legvander(-1.0 + 2.0 / count * np.arange(count), series.shape[1] - 1).T
        seen = loop.advance(*inputs)
        one.append({**seen, "lag": inputs[0] - (seen["motor_angle"] - seen["twist"])})
        found = follower.follow(series, -1.0, 2.0 / count, count)
        other.append({name: values.copy() for name, values in found.items()})
    joined = [
        {name: np.concatenate([part[name] for part in parts]) for name in one[0]} for parts in (one, other)
    ]
    return *joined, follower


@pytest.mark.parametrize(
    ("plant", "change"),
    [
        (LINEAR, {}),
        (SOFT, {}),
        (SOFT, {"setpoint_filter_s": 1e-3, "notch_rad_s": 3000.0, "is_delayed": False}),
        (replace(LINEAR, motor_coulomb_nm=0.07), {}),
        (STICKY, {}),
        (LOOSE, {}),
        (LOOSE, {"current_limit_a": 1.0, "voltage_limit_v": 60.0}),
        (STICKY, {"voltage_limit_v": 70.0, "reactance_ohm_s": 0.3}),
    ],
)
def test_every_sample_is_that_of_the_loop(plant, change):
    """1e-6 of the largest current (1e-8 of angles): rounding of 20 rad, times both gains, held by friction."""
    loop, found, _ = both(plant, change)
    for name in ("motor_angle", "motor_speed", "voltage", "current", "current_reference"):
        scale = np.abs(loop[name]).max()
        allowed = 1e-8 if name in ("motor_angle", "motor_speed") else 1e-6
        assert np.abs(found[name] - loop[name]).max() <= allowed * scale, name
    assert np.abs(found["lag"] - loop["lag"]).max() <= 1e-9
    assert np.array_equal(found["saturated"], loop["saturated"])


@pytest.mark.parametrize("plant", [LINEAR, SOFT])
def test_a_linear_cycle_never_needs_the_loop(plant):
    loop, found, follower = both(plant, {})
    assert follower.in_loop == 0
    for name, values in loop.items():
        assert np.abs(found[name] - values).max() <= 1e-8 * max(np.abs(values).max(), 1.0), name


def test_limits_send_samples_to_the_loop():
    loop, _, follower = both(LOOSE, {"current_limit_a": 1.0})
    assert (loop["saturated"] == 1).any()
    assert follower.in_loop > np.count_nonzero(loop["saturated"])


def test_an_encoder_with_steps_has_no_lasting_modes():
    assert has_lasting_modes(BASE)
    assert not has_lasting_modes(replace(BASE, encoder_step_rad=1e-4))


@pytest.mark.parametrize("step", [1e-4, 0.3, -0.7])
def test_shifted_polynomials(step):
    at = np.linspace(-1.0, 1.0, 7)
    np.testing.assert_allclose(
        polynomials(at, 17) @ shift_matrix(17, step).T, polynomials(at + step, 17),
        atol=1e-12 * np.abs(polynomials(at + step, 17)).max(),
    )  # fmt: skip
    np.testing.assert_allclose(polynomials(at, 17), legendre.legvander(at, 16), atol=1e-14)


@pytest.mark.parametrize("step_s", [1e-5, 1e-3, 0.05])
@pytest.mark.parametrize("plant", [LINEAR, SOFT, replace(SOFT, stiffness_nm_per_rad=1e6)])
def test_exponential_agrees_with_scipy(plant, step_s):
    A = plant.matrices()[0] * step_s
    reference = expm(A)
    np.testing.assert_allclose(exponential(A), reference, rtol=0.0, atol=1e-10 * np.abs(reference).max())


def test_exponential_refuses_what_is_not_finite():
    with pytest.raises(ValueError, match="finite"):
        exponential(np.array([[math.nan]]))
