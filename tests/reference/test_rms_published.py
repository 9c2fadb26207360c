"""RMS values against worked examples.

Sources
-------
[S] Gupta & Singhal, Fundamentals of Electric Drives and Control, Ex. 4.6, p. 59.
[J] J. B. Gupta, Elements of Electric Drives, Ex. 58, p. 152 (inputs; the result follows from the definition)
    and Ex. 60, p. 153; the latter also in C. L. Wadhwa, Generation, Distribution and Utilization, Ch. 4 Ex. 12.
[K] G. K. Dubey, Fundamentals of Electrical Drives, Ex. 4.2, p. 52; the figure printed in the book is known to
    be wrong, the recomputed one is used.
[D] From the definition, nothing printed.
"""

import math
from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.core.motion_laws import plan_segment
from actuator_sizing.core.quadrature import lobatto
from actuator_sizing.core.windows import rms_of_samples, windowed_rms
from tests.bare_axis import RPM, axis, ramp
from tests.made_cases import segment


def staircase(levels, durations):
    """Samples of a signal that is constant on each piece; equal instants make the jumps."""
    ends = np.cumsum(durations)
    times = np.stack([ends - durations, ends], axis=1).reshape(-1)
    return times, np.repeat(levels, 2)


def over_one_cycle(levels, durations):
    """The same from pieces with nodes, over a window of one cycle."""
    squared = np.repeat(np.square(levels)[:, None], 4, axis=1)
    return float(windowed_rms(np.array(durations), squared, float(np.sum(durations)))[0])


@pytest.mark.published("A2.1", "A2.2")
@pytest.mark.parametrize("rms", [lambda level, time: rms_of_samples(*staircase(level, time)), over_one_cycle])
def test_staircases(rms):
    # [S]; two printed decimals.
    power = rms(np.array([50.0, 100.0, 150.0, 120.0, 0.0]), np.array([20.0, 20.0, 10.0, 20.0, 15.0]))
    assert power == pytest.approx(94.74, abs=5e-3)
    # [J]; the rating at 720 rpm is printed without decimals.
    torque = rms(np.array([240.0, 140.0, 300.0, 200.0]), 60.0 * np.array([20.0, 10.0, 10.0, 20.0]))
    assert torque == pytest.approx(225.389, abs=5e-4)
    assert torque * 720.0 * 2.0 * math.pi / 60.0 == pytest.approx(16994.0, abs=0.5)


@pytest.mark.published("A2.3")
def test_ramps_with_regeneration_and_rest():
    # [J]: printed without decimals in both books.
    time = [0.0, 15.0, 15.0, 85.0, 85.0, 95.0, 95.0, 120.0]
    power = [0.0, 1050.0, 600.0, 600.0, -200.0, 0.0, 0.0, 0.0]
    assert rms_of_samples(time, power) == pytest.approx(507.0, abs=0.5)


@pytest.mark.published("A2.4")
def test_move_with_friction_and_dwell():
    # [D]; six printed decimals.
    inertia, friction = 1e-3, 0.2
    move = plan_segment("trapezoid", start_speed=0.0, displacement=2.0 * math.pi, duration_s=0.3)
    nodes = 0.5 * (lobatto()[0] + 1.0)
    torque = [inertia * phase.kinematics(nodes * phase.duration_s)[2] + friction for phase in move]
    torque.append(np.zeros_like(nodes))
    duration = np.array([*(phase.duration_s for phase in move), 0.3])
    assert max(float(values.max()) for values in torque) == pytest.approx(0.514159, abs=5e-7)
    rms, _ = windowed_rms(duration, np.array(torque) ** 2, 0.6)
    assert float(rms) == pytest.approx(0.229997, abs=5e-7)


@pytest.mark.published("A2.5")
def test_reversing_mill():
    # [K]: reversal from 200 to -200 rpm in 5 s with 10 000 kg·m²; T_rev [D], T_rms printed without decimals.
    speed = 200.0 * math.pi / 30.0
    (ramp,) = plan_segment("speed ramp", start_speed=speed, end_speed=-speed, duration_s=5.0)
    reversal = 1e4 * abs(float(ramp.kinematics(1.0)[2]))
    assert reversal == pytest.approx(83775.8, abs=0.05)
    torque = np.array([25e3, 0.0, reversal, 0.0, 20e3, 0.0, reversal, 0.0])
    rms = over_one_cycle(torque, np.array([10.0, 1.0, 5.0, 1.0, 15.0, 1.0, 5.0, 1.0]))
    assert rms == pytest.approx(45975.0, abs=0.5)
    assert 1e-3 * rms * speed == pytest.approx(962.895, abs=0.01)  # the printed power carries T_rms rounded


@pytest.mark.published("A2.2")
def test_staircase_as_a_duty_cycle():
    # [J] as a cycle of the sizing chain, load torque as process torque; the digits given.
    torque, minutes = (240.0, 140.0, 300.0, 200.0), (20.0, 10.0, 10.0, 20.0)
    starts = 60.0 * np.cumsum((0.0, *minutes))
    segments = [
        segment(row, "constant speed", start_s=starts[row], start_speed=720.0 * RPM, duration_s=60.0 * time,
                process_effort=level)
        for row, (level, time) in enumerate(zip(torque, minutes, strict=True))
    ]  # fmt: skip
    made = axis("rotary load", {"load inertia": 0.0}, *segments)
    assert made.pairs.torque_rms_nm[0] == pytest.approx(225.389, abs=5e-4)
    assert made.pairs.current_rms_a[0] == pytest.approx(225.389 / 0.5, abs=1e-3)  # K of the bare motor: 0.5


@pytest.mark.published("A2.4")
def test_move_with_friction_and_dwell_as_a_duty_cycle():
    # [D] once more through demand and evaluation.
    move = segment(2, "trapezoid", start_speed=0.0, displacement=2.0 * math.pi, duration_s=0.3)
    rest = segment(3, "dwell", start_s=0.3, start_speed=0.0, duration_s=0.3)
    pairs = axis("rotary load", {"load inertia": 1e-3, "friction torque": 0.2}, move, rest).pairs
    assert pairs.torque_peak_nm[0] == pytest.approx(0.514159, abs=5e-7)
    assert pairs.torque_rms_nm[0] == pytest.approx(0.229997, abs=5e-7)


@pytest.mark.published("A2.5")
def test_reversing_mill_as_a_duty_cycle():
    # [K]: rolling at 200 rpm, coasting and reversing by the inertia alone.
    speed = 200.0 * RPM
    rows = [
        (speed, 10.0, 25e3), (speed, 1.0, 0.0), (None, 5.0, 0.0), (-speed, 1.0, 0.0),
        (-speed, 15.0, -20e3), (-speed, 1.0, 0.0), (None, 5.0, 0.0), (speed, 1.0, 0.0),
    ]  # fmt: skip
    segments, start, now = [], 0.0, speed
    for held, duration, torque in rows:
        if held is None:
            one = ramp(now, -now, duration_s=duration)
            now = -now
        else:
            one = segment(2, "constant speed", start_speed=held, duration_s=duration, process_effort=torque)
        segments.append(replace(one, start_s=start))
        start += duration
    pairs = axis("rotary load", {"load inertia": 1e4}, *segments).pairs
    assert pairs.torque_peak_nm[0] == pytest.approx(83775.8, abs=0.05)
    assert pairs.torque_rms_nm[0] == pytest.approx(45975.0, abs=0.5)
