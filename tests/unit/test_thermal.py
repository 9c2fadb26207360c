"""Periodic state, runaway and closed forms of the thermal network against independent routes."""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from actuator_sizing.core import thermal_periodic
from actuator_sizing.core.quadrature import lobatto
from actuator_sizing.core.thermal import (
    altitude_factor,
    continuous_copper_loss,
    periodic_state,
    steady_state,
    subpiece_counts,
    subpiece_durations,
    subpiece_means,
    temperature_course,
    warm_up,
)
from tests.thermal_networks import ALPHA, AMBIENT, NAN, affine_cycle, losses, network, random_losses

# -- periodic state ---------------------------------------------------------------------------------------


def test_two_bodies_agree_with_matrix_exponentials():
    net, loss = network(), random_losses(alpha=ALPHA)
    M, offset = affine_cycle(net, loss)
    expected = AMBIENT + np.linalg.solve(np.eye(2) - M, offset)
    state = periodic_state(net, loss, AMBIENT)
    # both routes are exact; the solve amplifies rounding by 1/(1 - rho), about 1e3
    assert state.winding_start_degc[0] == pytest.approx(expected[0], abs=1e-9)
    assert state.housing_start_degc[0] == pytest.approx(expected[1], abs=1e-9)
    assert state.spectral_radius[0] == pytest.approx(max(np.linalg.eigvals(M).real), abs=1e-12)


def test_one_body_on_off_has_its_closed_form():
    R, C, q, on, off = 2.0, 30.0, 25.0, 20.0, 35.0
    tau = R * C
    top = q * R * (1 - math.exp(-on / tau)) / (1 - math.exp(-(on + off) / tau))
    state = periodic_state(network(R, NAN, C, NAN), losses([on, off], [q, 0.0]), AMBIENT)
    assert state.winding_max_degc[0] == pytest.approx(AMBIENT + top, abs=1e-10)
    assert state.winding_min_degc[0] == pytest.approx(AMBIENT + top * math.exp(-off / tau), abs=1e-10)
    assert state.winding_mean_degc[0] == pytest.approx(AMBIENT + q * R * on / (on + off), abs=1e-10)
    assert state.winding_max_time_s[0] == pytest.approx(on)
    assert np.isnan(state.housing_max_degc[0])


@pytest.mark.parametrize("housing", [(2.0, 300.0), (NAN, NAN)])
def test_magnet_term_agrees_with_brute_force_integration(housing):
    R_2, C_2 = housing
    net = network(1.0, R_2, 25.0, C_2)
    loss = losses([3.0, 5.0, 8.0], [55.0, 15.0, 0.0], speed=[[2.0, 6.0, 0.0]], alpha=ALPHA, beta=-0.0011)
    two = not math.isnan(R_2)

    def rates(q, p):
        def right(_t, x):
            magnet = x[1] if two else x[0]
            copper = q * (1 + ALPHA * (x[0] - 20.0)) / (1 - 0.0011 * (magnet - 20.0)) ** 2
            if not two:
                return [(copper + p - (x[0] - AMBIENT)) / 25.0, 0.0]
            return [(copper - (x[0] - x[1])) / 25.0, (x[0] - x[1] - (x[1] - AMBIENT) / R_2 + p) / C_2]

        return right

    x, top, at = [AMBIENT, AMBIENT], -np.inf, 0.0
    for cycle in range(700 if two else 40):
        clock = 0.0
        for h, q, p in zip(loss.duration_s, loss.copper_loss_w[0], loss.speed_loss_w[0], strict=True):
            last = cycle == (699 if two else 39)
            solution = solve_ivp(
                rates(q, p),
                (0.0, h),
                x,
                rtol=1e-9 if last else 1e-8,
                atol=1e-9,
                max_step=h / 200 if last else h,
            )
            x = solution.y[:, -1]
            if last and solution.y[0].max() > top:
                top = solution.y[0].max()
                at = clock + solution.t[np.argmax(solution.y[0])]
            clock += h
    state = periodic_state(net, loss, AMBIENT)
    assert state.winding_max_degc[0] == pytest.approx(top, abs=5e-3)  # second order in steps of tau/20
    assert state.winding_max_time_s[0] == pytest.approx(at, abs=0.05)
    assert state.winding_start_degc[0] == pytest.approx(x[0], abs=5e-3)


def test_maximum_inside_a_piece_is_found():
    # the housing goes on rising in the dwell after a short burst: its maximum lies inside the dwell
    net, loss = network(C_2=60.0), losses([4.0, 200.0], [300.0, 0.0], alpha=ALPHA)
    state = periodic_state(net, loss, AMBIENT)
    course = temperature_course(net, loss, AMBIENT, points=5000)
    border = max(course.housing_degc[0], np.interp(4.0, course.time_s, course.housing_degc))
    assert state.housing_max_degc[0] > border + 1.0
    # 5000 points over 204 s leave the sampled top low by the curvature over one interval only
    assert state.housing_max_degc[0] == pytest.approx(course.housing_degc.max(), abs=2e-3)
    assert state.housing_max_degc[0] >= course.housing_degc.max()


@pytest.mark.parametrize(("alpha", "beta"), [(0.0, 0.0), (ALPHA, 0.0), (ALPHA, -0.0011)])
@pytest.mark.parametrize("housing", [(2.0, 1200.0), (NAN, NAN)])
def test_heat_in_equals_heat_out(alpha, beta, housing):
    net, loss = network(1.0, housing[0], 25.0, housing[1]), random_losses(alpha=alpha, beta=beta)
    state = periodic_state(net, loss, AMBIENT)
    heat_in = state.mean_copper_loss_w + state.mean_speed_loss_w
    two = not math.isnan(housing[0])
    body, resistance = (state.housing_mean_degc, housing[0]) if two else (state.winding_mean_degc, 1.0)
    assert heat_in[0] == pytest.approx((body[0] - AMBIENT) / resistance, rel=1e-9)


def test_plain_floats_and_arrays_give_the_same(monkeypatch):
    net, loss = network(count=40), random_losses(40, alpha=ALPHA, beta=-0.0011)
    many = periodic_state(net, loss, AMBIENT)
    monkeypatch.setattr(thermal_periodic, "_FEW", 1000)
    alone = periodic_state(net, loss, AMBIENT)
    for name, column in vars(many).items():
        np.testing.assert_allclose(column, getattr(alone, name), rtol=1e-10, err_msg=name)


@pytest.mark.parametrize("count", [4, 60])
def test_missing_data_are_not_known_and_do_not_disturb(count):
    net, loss = network(count=count), random_losses(count, alpha=ALPHA, beta=-0.0011)
    net.winding_resistance_k_w[1] = NAN
    loss.copper_loss_w[2, 3] = NAN
    state = periodic_state(net, loss, AMBIENT)
    assert not state.known[[1, 2]].any()
    assert not state.has_equilibrium[[1, 2]].any()
    assert np.isnan(state.winding_max_degc[[1, 2]]).all()
    assert state.known.sum() == count - 2
    whole = periodic_state(network(count=count), random_losses(count, alpha=ALPHA, beta=-0.0011), AMBIENT)
    kept = state.known
    np.testing.assert_allclose(state.winding_max_degc[kept], whole.winding_max_degc[kept], rtol=1e-12)
    assert state.has_equilibrium[0]


def test_no_loss_stays_at_ambient():
    state = periodic_state(network(), losses([1.0, 2.0], [0.0, 0.0], alpha=ALPHA, beta=-0.002), AMBIENT)
    assert state.winding_max_degc[0] == AMBIENT
    assert state.winding_min_degc[0] == AMBIENT
    assert state.cycles_to_95[0] == 0.0


# -- runaway ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("housing", [(2.0, 1200.0), (NAN, NAN)])
@pytest.mark.parametrize("count", [1, 50])
def test_runaway_is_told_at_its_analytic_limit(housing, count):
    R_total = 1.0 + (0.0 if math.isnan(housing[0]) else housing[0])
    limit = 1.0 / (ALPHA * R_total)  # constant loss: α q (R_1 + R_2) = 1
    net = network(1.0, housing[0], 25.0, housing[1], count=count)
    for factor, stands in ((1 - 1e-6, True), (1 + 1e-6, False)):
        loss = losses([1.0, 4.0], np.full((count, 2), limit * factor), alpha=ALPHA)
        state = periodic_state(net, loss, AMBIENT)
        assert (state.has_equilibrium == stands).all()
        assert (np.isnan(state.winding_max_degc) == (not stands)).all()
        assert state.loop_gain == pytest.approx(factor)
    assert state.known.all()


def test_rippling_loss_runs_away_where_its_mean_does_within_a_thousandth():
    limit = 1.0 / (ALPHA * 3.0)
    for factor, stands in ((0.999, True), (1.001, False)):
        loss = losses([0.5, 1.5], [4.0 * limit * factor, 0.0], alpha=ALPHA)
        assert periodic_state(network(), loss, AMBIENT).has_equilibrium[0] == stands


def test_magnet_brings_runaway_forward():
    weak, strong = (
        periodic_state(network(), losses([1.0], [60.0], alpha=ALPHA, beta=b), AMBIENT) for b in (0.0, -0.002)
    )
    assert weak.has_equilibrium[0]
    assert not strong.has_equilibrium[0]
    assert np.isnan(strong.winding_max_degc[0])


def test_fold_of_the_magnet_curve_is_found_as_by_the_steady_balance():
    # constant loss: the periodic state is the steady state, so both must lose it at the same loss
    low, high = 1.0, 60.0
    for _ in range(40):
        middle = 0.5 * (low + high)
        loss = losses([2.0], [middle], alpha=ALPHA, beta=-0.002)
        low, high = (
            (middle, high) if steady_state(network(), loss, AMBIENT).has_equilibrium[0] else (low, middle)
        )
    for factor, stands in ((0.9995, True), (1.0005, False)):
        loss = losses([2.0], [low * factor], alpha=ALPHA, beta=-0.002)
        assert periodic_state(network(), loss, AMBIENT).has_equilibrium[0] == stands


@pytest.mark.parametrize("count", [1, 50])
@pytest.mark.parametrize("shift", [0, 1, 2])
def test_growth_within_a_piece_is_runaway_although_the_dwell_forgets_it(shift, count):
    # 40 s of growth at e^36 before 78 s of decay: the cycle map shrinks, but over 1e15 °C
    duration, copper = np.roll([1.0, 78.0, 40.0], shift), np.roll([91.0, 0.0, 178.0], shift)
    net = network(4.15625, NAN, 0.5, NAN, count=count)
    state = periodic_state(net, losses(duration, np.tile(copper, (count, 1)), alpha=ALPHA), AMBIENT)
    assert state.known.all()
    assert not state.has_equilibrium.any()


@pytest.mark.parametrize("duration", [1e-5, 1e-3, 10.0, 1e3])
@pytest.mark.parametrize("count", [1, 50])
def test_cycles_of_any_length_settle(duration, count):
    net = network(C_2=5e6, count=count)  # housing 1e7 s: up to 1e12 cycles long
    loss = losses(
        np.array([0.3, 0.2, 0.5]) * duration,
        np.tile([40.0, 10.0, 0.0], (count, 1)),
        alpha=ALPHA,
        beta=-0.0011,
    )
    state, steady = periodic_state(net, loss, AMBIENT), steady_state(net, loss, AMBIENT)
    assert state.has_equilibrium.all()
    heat_out = (state.housing_mean_degc - AMBIENT) / 2.0
    np.testing.assert_allclose(state.mean_copper_loss_w, heat_out, rtol=1e-9)
    if duration < 0.1:  # almost without ripple its mean is the steady state of the mean loss
        np.testing.assert_allclose(state.winding_mean_degc, steady.winding_degc, rtol=1e-8)


@pytest.mark.parametrize("watt", [1e6, 1e150, 1e300])
@pytest.mark.parametrize("count", [1, 50])
def test_absurd_losses_run_away_quietly(watt, count):
    loss = losses([1.0, 1e6], np.full((count, 2), watt), alpha=ALPHA, beta=-0.0011)
    assert not periodic_state(network(count=count), loss, AMBIENT).has_equilibrium.any()
    course = warm_up(network(count=count), loss, AMBIENT, 155.0)
    assert course.is_runaway
    assert 0.0 <= course.time_to_limit_s < 1.0
    assert np.isfinite(course.winding_degc).all()


# -- own figures of the design table (two-node example, resistance feedback) ----------------------------


@pytest.mark.parametrize(
    ("overload", "percent"),
    [
        (2, [101, 104, 111, 122, 143, 187]),
        (3, [103, 112, 132, 168, 231, 338]),
        (4, [105, 123, 167, 242, 358, 549]),
    ],
)
def test_peak_rise_at_equal_rms_grows_with_the_length_of_the_burst(overload, percent):
    """Torque m times rated at duty 1/m², cold resistance: RMS is rated, the winding is not."""
    net, rated = network(1.0, 2.0, 25.0, 1200.0), 20.0
    for on, expected in zip([0.5, 2.0, 5.0, 10.0, 20.0, 60.0], percent, strict=True):
        loss = losses([on, (overload**2 - 1) * on], [overload**2 * rated, 0.0])
        rise = periodic_state(net, loss, AMBIENT).winding_max_degc[0] - AMBIENT
        assert 100.0 * rise / (3.0 * rated) == pytest.approx(expected, abs=0.5)  # printed as whole percent


@pytest.mark.parametrize(
    ("cold_rise", "true_rise"),
    [(60, 78.5), (80, 116.7), (100, 164.7), (120, 227.1), (150, 365.4), (200, 934.6)],
)
def test_resistance_feedback_at_constant_current(cold_rise, true_rise):
    loss = losses([10.0], [cold_rise / 3.0], alpha=0.00393, reference=AMBIENT)
    state = periodic_state(network(), loss, AMBIENT)
    assert state.winding_max_degc[0] - AMBIENT == pytest.approx(true_rise, abs=0.05)  # one printed decimal
    for rise, stands in ((254.4, True), (254.5, False)):  # printed runaway limit 254.5 K, exactly 1/0.00393
        loss = losses([10.0], [rise / 3.0], alpha=0.00393)
        assert periodic_state(network(), loss, AMBIENT).has_equilibrium[0] == stands


# -- closed forms and helpers -----------------------------------------------------------------------------


@pytest.mark.parametrize("beta", [0.0, -0.0011])
def test_steady_state_is_the_periodic_state_of_constant_loss(beta):
    net = network(count=2)
    net.housing_resistance_k_w[1] = net.housing_capacity_j_k[1] = NAN
    loss = losses([3.0, 4.0], [[20.0, 20.0]] * 2, speed=4.0, alpha=ALPHA, beta=beta)
    steady, periodic = steady_state(net, loss, AMBIENT), periodic_state(net, loss, AMBIENT)
    np.testing.assert_allclose(steady.winding_degc, periodic.winding_max_degc, rtol=1e-9)
    np.testing.assert_allclose(steady.housing_degc, periodic.housing_max_degc, rtol=1e-9)
    np.testing.assert_allclose(steady.copper_loss_w, periodic.mean_copper_loss_w, rtol=1e-9)
    np.testing.assert_allclose(steady.loop_gain, periodic.loop_gain, rtol=1e-6)


def test_continuous_copper_loss_holds_the_winding_at_its_limit():
    for R_2, C_2 in ((2.0, 1200.0), (NAN, NAN)):
        cold = continuous_copper_loss(115.0, 1.0, R_2, 12.0)
        state = steady_state(network(1.0, R_2, 25.0, C_2), losses([1.0], [cold], speed=12.0), AMBIENT)
        assert state.winding_degc[0] - AMBIENT == pytest.approx(115.0, rel=1e-12)
    assert continuous_copper_loss(10.0, 1.0, 2.0, 12.0) < 0.0


def test_altitude():
    np.testing.assert_allclose(altitude_factor([0.0, 1000.0, 1100.0, 3000.0]), [1.0, 1.0, 0.99, 0.8])


def test_parts_of_a_varying_piece():
    nodes = lobatto(12)[0]
    values = np.stack([np.full(12, 3.0), 0.5 * (nodes + 1.0) ** 2])[None]  # a constant piece and a parabola
    duration = np.array([4.0, 10.0])
    counts = subpiece_counts(duration, values, winding_time_constant_s=40.0)
    assert counts.tolist() == [1, 5]
    means = subpiece_means(values, counts)[0]
    edges = np.linspace(-1.0, 1.0, 6)
    expected = np.diff((edges + 1.0) ** 3 / 6.0) / np.diff(edges)
    np.testing.assert_allclose(means, np.concatenate([[3.0], expected]), atol=1e-12)
    np.testing.assert_allclose(subpiece_durations(duration, counts), [4.0] + [2.0] * 5)


def test_parts_bring_the_peak_of_a_varying_loss():
    # one half-sine burst of 40 s against a winding of 25 s: the mean over the burst misses its shape
    nodes = lobatto(16)[0]
    values = np.stack([np.sin(0.5 * np.pi * (nodes + 1.0)), np.zeros(16)])[None] * 60.0
    duration = np.array([40.0, 80.0])

    def peak(parts):
        counts = subpiece_counts(duration, values, 25.0, parts_per_constant=parts, most=400)
        loss = losses(subpiece_durations(duration, counts), subpiece_means(values, counts))
        return periodic_state(network(), loss, AMBIENT).winding_max_degc[0]

    fine = peak(200)
    assert abs(peak(1) - fine) > 0.2
    assert peak(20) == pytest.approx(fine, abs=0.05)  # goal of the method at 20 parts per time constant
