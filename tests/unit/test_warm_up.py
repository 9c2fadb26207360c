"""Warm-up from cold against cycles counted one by one, logarithms and the periodic state."""

import math

import numpy as np
import pytest

from actuator_sizing.core.thermal import (
    HeatLoss,
    periodic_state,
    temperature_course,
    temperatures_after,
    warm_up,
)
from tests.thermal_networks import ALPHA, AMBIENT, NAN, affine_cycle, losses, network, random_losses


def simulated(net, loss, cycles):
    """States at cycle starts by multiplying the independent cycle map."""
    M, offset = affine_cycle(net, loss)
    states = [np.zeros(2)]
    for _ in range(cycles):
        states.append(M @ states[-1] + offset)
    return AMBIENT + np.array(states)


def test_temperatures_after_agree_with_repeated_cycles():
    net, loss = network(), random_losses(alpha=ALPHA)
    span = loss.duration_s.sum()
    cycles = np.array([0, 1, 7, 60, 300])
    states = simulated(net, loss, 300)[cycles]
    found = temperatures_after(net, loss, AMBIENT, cycles * span * (1 + 1e-15))
    np.testing.assert_allclose(found.winding_degc, states[:, 0], atol=1e-8)
    np.testing.assert_allclose(found.housing_degc, states[:, 1], atol=1e-8)


def test_cycles_to_95_percent_by_counting():
    net, loss = network(C_2=400.0), random_losses(alpha=ALPHA)
    state = periodic_state(net, loss, AMBIENT)
    target = AMBIENT + 0.95 * (state.winding_max_degc[0] - AMBIENT)
    span, at = loss.duration_s.sum(), state.winding_max_time_s[0]
    lower = int(state.cycles_to_95[0])
    below, above = temperatures_after(
        net, loss, AMBIENT, np.array([lower, lower + 1]) * span + at
    ).winding_degc
    assert lower > 10
    assert below <= target <= above


def test_time_to_limit_of_constant_loss_is_the_logarithm():
    R, C, q = 2.0, 30.0, 40.0
    course = warm_up(network(R, NAN, C, NAN), losses([7.0, 11.0], [q, q]), AMBIENT, AMBIENT + 60.0)
    assert course.time_to_limit_s == pytest.approx(-R * C * math.log(1 - 60.0 / (q * R)), rel=1e-12)
    assert not course.is_runaway


def test_time_to_limit_within_a_burst_of_a_late_cycle():
    net, loss = network(), random_losses(alpha=ALPHA)
    state = periodic_state(net, loss, AMBIENT)
    limit = AMBIENT + 0.9 * (state.winding_max_degc[0] - AMBIENT)
    time = warm_up(net, loss, AMBIENT, limit).time_to_limit_s
    at, before = (
        temperatures_after(net, loss, AMBIENT, [time]),
        temperatures_after(net, loss, AMBIENT, [time - 0.05]),
    )
    assert at.winding_degc[0] == pytest.approx(limit, abs=1e-8)
    assert before.winding_degc[0] < limit
    # and no earlier cycle reached it
    span = loss.duration_s.sum()
    earlier = np.arange(int(time / span)) * span + state.winding_max_time_s[0]
    assert temperatures_after(net, loss, AMBIENT, earlier).winding_degc.max() < limit


def test_warm_up_with_magnet_jumps_as_accurately_as_walking():
    net, loss = network(), random_losses(alpha=ALPHA, beta=-0.0011)
    span = loss.duration_s.sum()
    one_by_one = temperatures_after(net, loss, AMBIENT, np.arange(1, 201) * span)
    at_once = temperatures_after(net, loss, AMBIENT, [200 * span])
    assert at_once.winding_degc[0] == pytest.approx(one_by_one.winding_degc[-1], abs=0.02)  # jumps of 2 K


@pytest.mark.parametrize("limit", [155.0, NAN])
def test_warm_up_ends_at_the_periodic_state(limit):
    for scale in (0.01, 1.0, 1000.0):  # from drawn step by step to drawn by cycles
        loss = random_losses(alpha=ALPHA)
        loss = HeatLoss(loss.duration_s / scale, *list(vars(loss).values())[1:])
        state, course = periodic_state(network(), loss, AMBIENT), warm_up(network(), loss, AMBIENT, limit)
        assert course.by_cycles == (scale > 0.01)
        assert (np.diff(course.time_s) > 0.0).all()
        assert len(course.time_s) <= 1000
        assert (course.winding_low_degc <= course.winding_high_degc).all()
        rise = state.winding_max_degc[0] - AMBIENT
        assert course.winding_degc[0] == AMBIENT
        assert 0.98 * rise < course.winding_high_degc.max() - AMBIENT <= rise * (1 + 1e-12)
        assert np.isnan(course.time_to_limit_s) == (not state.winding_max_degc[0] >= limit)


def test_runaway_is_drawn_past_the_limit():
    loss = losses([1.0, 3.0], [600.0, 0.0], alpha=ALPHA)
    course = warm_up(network(), loss, AMBIENT, 155.0)
    assert course.is_runaway
    assert course.winding_high_degc[-1] > 155.0
    assert course.time_s[-1] >= course.time_to_limit_s
    at = temperatures_after(network(), loss, AMBIENT, [course.time_to_limit_s])
    assert at.winding_degc[0] == pytest.approx(155.0, abs=1e-7)
    assert temperature_course(network(), loss, AMBIENT) is None


def test_course_is_periodic_and_holds_the_maximum():
    net, loss = network(), random_losses(alpha=ALPHA, beta=-0.0011)
    state, course = periodic_state(net, loss, AMBIENT), temperature_course(net, loss, AMBIENT)
    assert course.winding_degc[0] == pytest.approx(course.winding_degc[-1], abs=1e-8)
    assert course.time_s[-1] == pytest.approx(loss.duration_s.sum())
    assert set(np.round(np.cumsum(loss.duration_s), 9)) <= set(np.round(course.time_s, 9))
    assert course.winding_degc.max() <= state.winding_max_degc[0] + 1e-9
    assert course.winding_degc.max() == pytest.approx(state.winding_max_degc[0], abs=0.05)


def test_missing_data_have_no_course():
    net, loss = network(C_1=NAN), random_losses()
    assert warm_up(net, loss, AMBIENT, 155.0) is None
    assert temperature_course(net, loss, AMBIENT) is None
    assert temperatures_after(net, loss, AMBIENT, [600.0]) is None
