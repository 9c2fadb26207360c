"""Braking against printed examples.

Sources
-------
[D] G. K. Dubey, Fundamentals of Electrical Drives, Ex. 5.9 p. 84, rheostatic braking with armature inductance;
    printed digits as seen in an open solution notebook of the textbook. The notebook calls 0.44 s the stopping
    time; by its own equations it is the time of the largest current.
[G] J. B. Gupta, Elements of Electric Drives: Ex. 42 p. 125 (stop by constant torque), Ex. 44 p. 127 (rheostatic
    brake with friction), Ex. 22 p. 80 (run-up, the same integral with the sign of the torque changed).
"""

import numpy as np
import pytest

from actuator_sizing.core.braking import rheostatic_stop, stop

RPM = np.pi / 30.0
KGF_M = 9.81  # N·m, as the book rounds it


@pytest.mark.published("A4.7")
def test_rheostatic_braking_with_inductance():  # [D]
    K = (220.0 - 175.0 * 0.08) / (1000.0 * RPM)
    speed = 1050.0 * RPM
    total = K * speed / 350.0  # limits the current to 350 A at the start
    # The book prints 0.538: half of its last digit.
    assert total - 0.08 == pytest.approx(0.538, abs=5e-4)
    found = rheostatic_stop(total, 0.12, K, 8.0, 0.15 * 175.0 * K, speed)
    assert found.rates_per_s[0].real == pytest.approx(0.963, abs=1e-3)
    assert found.rates_per_s[1].real == pytest.approx(4.187, abs=2e-3)
    assert found.final_speed_rad_s == pytest.approx(-8.247, abs=2e-3)  # the book rounds K
    assert found.peak_current_a == pytest.approx(-272.2, abs=0.5)
    assert found.peak_current_time_s == pytest.approx(0.44, abs=5e-3)
    assert found.time_to_rest_s == pytest.approx(3.02362, abs=1e-3)  # recomputed, not printed


def stopped(speed, inertia, friction, braking):
    values = (np.array([value]) for value in (speed, inertia, 0.0, friction, 0.0))
    return stop(*values, braking)


@pytest.mark.published("A8.4")
def test_constant_torque_stop():  # [G] Ex. 42
    found = stopped(750.0 * RPM, 630.0, 1.4 * KGF_M, lambda w: np.full(w.shape, 165.0 * KGF_M))
    assert found.time_s[0] == pytest.approx(30.3, abs=0.05)
    assert found.angle_rad[0] / (2.0 * np.pi) == pytest.approx(
        189.0, abs=0.6
    )  # the book rounds the time first


@pytest.mark.published("A8.9")
def test_rheostatic_decay_with_friction():  # [G] Ex. 44
    K = 240.0 / (1500.0 * RPM)

    # Down to 600 rpm: the difference of two stops.
    def braking(w):
        return K**2 * w / 15.0

    times = [stopped(n * RPM, 20.0, 1.5 * KGF_M, braking).time_s[0] for n in (1500.0, 600.0)]
    assert times[0] - times[1] == pytest.approx(60.3, abs=0.1)


@pytest.mark.published("A4.8")
def test_run_up_with_constant_surplus_torque():  # [G] Ex. 22: time = J ω / surplus
    rated = 37500.0 / (500.0 * RPM)
    found = stopped(500.0 * RPM, 20.0, 0.25 * rated, lambda w: np.zeros(w.shape))
    assert found.time_s[0] == pytest.approx(5.85, abs=0.01)
