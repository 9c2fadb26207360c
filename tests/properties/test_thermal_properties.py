"""Laws that hold for every network and every loss."""

import math

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from actuator_sizing.core.thermal import HeatLoss, ThermalNetwork, periodic_state, warm_up

AMBIENT = 25.0

resistances = st.floats(0.05, 20.0)
housings = st.one_of(st.just(math.nan), resistances)
networks = st.tuples(resistances, housings, st.floats(0.5, 500.0), st.floats(5.0, 5e4)).map(
    lambda values: ThermalNetwork(*(np.array([value]) for value in values))
)
pieces = st.lists(
    st.tuples(st.floats(1e-3, 300.0), st.floats(0.0, 200.0), st.floats(0.0, 20.0)), min_size=1, max_size=8
)


def is_well_conditioned(state):
    """Whether the periodic state exists well away from runaway and from temperatures of no meaning."""
    return (
        state.has_equilibrium[0] and state.spectral_radius[0] < 1.0 - 1e-6 and state.winding_max_degc[0] < 1e5
    )


def loss_of(rows, alpha=1 / 255, beta=0.0, scale=1.0):
    duration, copper, speed = (np.array(column) for column in zip(*rows, strict=True))
    one = np.ones(1)
    return HeatLoss(
        duration, scale * copper[None], speed[None], alpha * one, 20.0 * one, beta * one, 20.0 * one
    )


@settings(deadline=None)
@given(networks, pieces, st.sampled_from([0.0, -0.0004, -0.0011, -0.002]))
def test_order_and_energy_balance(network, rows, beta):
    state = periodic_state(network, loss_of(rows, beta=beta), AMBIENT)
    assert state.known.all()
    if not state.has_equilibrium[0]:
        assert np.isnan(state.winding_max_degc[0])
        return
    low, mean, high = state.winding_min_degc[0], state.winding_mean_degc[0], state.winding_max_degc[0]
    rounding = 1e-9 * (1.0 + high - AMBIENT)
    assert AMBIENT - rounding <= low <= mean + rounding
    assert mean <= high + rounding
    assert low - rounding <= state.winding_start_degc[0] <= high + rounding
    assert 0.0 <= state.winding_max_time_s[0] <= sum(row[0] for row in rows) * (1 + 1e-12)
    assert 0.0 <= state.spectral_radius[0] < 1.0
    heat = state.mean_copper_loss_w[0] + state.mean_speed_loss_w[0]
    if network.has_housing[0]:
        out = (state.housing_mean_degc[0] - AMBIENT) / network.housing_resistance_k_w[0]
    else:
        out = (mean - AMBIENT) / network.winding_resistance_k_w[0]
    # closer to runaway the fixed point answers to rounding more strongly
    assert math.isclose(heat, out, rel_tol=1e-9 / max(1.0 - state.loop_gain[0], 1e-3), abs_tol=1e-9)


@settings(deadline=None)
@given(networks, pieces, st.floats(1.01, 5.0))
def test_more_loss_is_hotter_or_runs_away(network, rows, factor):
    low = periodic_state(network, loss_of(rows, beta=-0.0011), AMBIENT)
    high = periodic_state(network, loss_of(rows, beta=-0.0011, scale=factor), AMBIENT)
    if high.has_equilibrium[0]:
        assert low.has_equilibrium[0]
        assert high.winding_max_degc[0] >= low.winding_max_degc[0] - 1e-9


@settings(deadline=None)
@given(networks, pieces, st.integers(1, 8))
def test_the_maximum_does_not_ask_where_the_cycle_starts(network, rows, shift):
    turned = rows[shift % len(rows) :] + rows[: shift % len(rows)]
    one, other = (periodic_state(network, loss_of(r), AMBIENT) for r in (rows, turned))
    assert one.has_equilibrium[0] == other.has_equilibrium[0] or abs(one.spectral_radius[0] - 1.0) < 1e-6
    if is_well_conditioned(one):
        rise = one.winding_max_degc[0] - AMBIENT
        assert math.isclose(one.winding_max_degc[0], other.winding_max_degc[0], abs_tol=1e-6 * (1.0 + rise))


@settings(deadline=None)
@given(networks, pieces)
def test_a_piece_cut_in_two_changes_nothing(network, rows):
    cut = [(0.5 * h, q, p) for h, q, p in rows for _ in range(2)]
    one, other = (periodic_state(network, loss_of(r), AMBIENT) for r in (rows, cut))
    if is_well_conditioned(one):
        rise = one.winding_max_degc[0] - AMBIENT
        assert math.isclose(one.winding_max_degc[0], other.winding_max_degc[0], abs_tol=1e-6 * (1.0 + rise))


@settings(deadline=None, max_examples=50)
@given(networks, pieces, st.floats(30.0, 400.0))
def test_time_to_limit_exists_exactly_when_the_periodic_state_passes_it(network, rows, limit):
    loss = loss_of(rows)
    state, course = periodic_state(network, loss, AMBIENT), warm_up(network, loss, AMBIENT, limit)
    reached = not state.winding_max_degc[0] < limit  # NaN: runaway passes every limit
    assert course.is_runaway == (not state.has_equilibrium[0])
    near = abs(state.winding_max_degc[0] - limit) < 1e-6 * limit
    assert near or math.isfinite(course.time_to_limit_s) == reached
    assert len(course.time_s) <= 1000
