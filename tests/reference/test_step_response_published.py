"""Step responses printed by others; S seen, I inputs seen, M from memory, D derived."""

import math

import pytest

from actuator_sizing.core.step_response import voltage_step


def second_order(natural_frequency, damping):
    """A motor whose speed answers as ``ω_n²/(s² + 2 ζ ω_n s + ω_n²)`` to a unit step: u = K, R = L·2ζω_n, b = 0."""
    L, J, K = 1.0, 1.0, natural_frequency
    return voltage_step(2.0 * damping * natural_frequency * L, L, K, J, 0.0, K)


@pytest.mark.published("A4.1")
def test_small_motor_of_the_control_tutorials():
    """Control Tutorials for MATLAB and Simulink, Univ. of Michigan (CC BY-SA), DC motor speed [S, poles M]."""
    step = voltage_step(1.0, 0.5, 0.01, 0.01, 0.1, 1.0)
    assert step.poles_per_s[0] == pytest.approx(-2.0025, abs=1e-4)  # printed digits
    assert step.poles_per_s[1] == pytest.approx(-9.9975, abs=1e-4)
    assert step.final_speed_rad_s == pytest.approx(0.0999, abs=1e-4)
    assert step.final_speed_rad_s == pytest.approx(0.0999001, abs=5e-8)  # 0.01/0.1001
    assert step.settling_time_s == pytest.approx(2.07, abs=0.01)
    assert step.settling_time_s == pytest.approx(2.06510, abs=1e-2)  # read off a plot there
    assert step.overshoot_ratio == 0.0


@pytest.mark.published("A4.9")
def test_speed_transfer_function_of_a_lightly_damped_motor():
    """Franklin, Powell & Emami-Naeini, Feedback Control of Dynamic Systems, 6th ed., Ex. 3.17 [S, parameters M].

    ``100/(s² + 10.1 s + 101)``.
    """
    step = voltage_step(10.0, 1.0, 1.0, 0.01, 0.001, 1.0)
    total, product = sum(step.poles_per_s), math.prod(step.poles_per_s)
    assert -total.real == pytest.approx(10.1, abs=1e-9)
    assert product.real == pytest.approx(101.0, abs=1e-9)
    assert step.final_speed_rad_s == pytest.approx(0.990099, abs=1e-6)
    damping = -step.poles_per_s[0].real / abs(step.poles_per_s[0])
    assert damping == pytest.approx(0.502494, abs=1e-6)
    assert step.overshoot_ratio == pytest.approx(
        math.exp(-math.pi * damping / math.sqrt(1 - damping**2)), rel=1e-12
    )


@pytest.mark.published("A7.2")
def test_magnitude_optimum():
    """Leonhard, Control of Electrical Drives; Schröder [M, D]: ``1/(1 + 2Ts + 2T²s²)`` overshoots by 4.32 %."""
    T = 0.003
    step = second_order(1.0 / (math.sqrt(2.0) * T), 1.0 / math.sqrt(2.0))
    assert 100.0 * step.overshoot_ratio == pytest.approx(4.32, abs=0.005)
    assert 100.0 * step.overshoot_ratio == pytest.approx(100.0 * math.exp(-math.pi), rel=1e-9)
    assert step.peak_time_s / T == pytest.approx(6.28319, abs=5e-6)


@pytest.mark.published("A7.5")
def test_second_order_figures():
    """Nagoor Kani, Control Systems, Ex. 3.6 [I]: ``16/(s² + 4s + 16)``: 16.3 %, 0.907 s, settling estimate 2 s."""
    step = second_order(4.0, 0.5)
    assert 100.0 * step.overshoot_ratio == pytest.approx(16.3, abs=0.05)  # half of the last printed digit
    assert 100.0 * step.overshoot_ratio == pytest.approx(16.3034, abs=5e-5)
    assert step.peak_time_s == pytest.approx(0.907, abs=5e-4)
    # 0 to 100 % in the book, read off our curve: it passes the final speed at 0.6046 s
    assert step.speed_at(0.604600) == pytest.approx(step.final_speed_rad_s, abs=2e-6)
    # 4/(ζ ω_n) = 2 s is the usual estimate; the last exit lies within one half wave before the envelope's
    envelope = math.log(50.0 / math.sqrt(0.75)) / 2.0
    assert envelope == pytest.approx(2.0, abs=0.03)
    assert envelope - math.pi / (4.0 * math.sqrt(0.75)) < step.settling_time_s <= envelope
