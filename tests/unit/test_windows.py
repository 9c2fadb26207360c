"""Windowed RMS and i²t accumulator against dense sampling, quadrature and closed forms."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from actuator_sizing.core.quadrature import lobatto
from actuator_sizing.core.windows import overload_accumulator, rms_of_samples, windowed_rms


class Signal:
    """Pieces of a + b sin(ω τ + φ), with its exact running integral of the square."""

    def __init__(self, seed, pieces):
        draw = np.random.default_rng(seed)
        self.duration = draw.uniform(0.05, 1.0, pieces)
        self.a, self.b = draw.normal(size=(2, pieces)) * (draw.random((2, pieces)) > 0.2)
        self.w, self.p = draw.uniform(0.5, 3.0, pieces), draw.uniform(0.0, 6.0, pieces)
        self.borders = np.concatenate([[0.0], np.cumsum(self.duration)])
        self.cycle = self.borders[-1]
        tau = 0.5 * (lobatto(16)[0] + 1.0) * self.duration[:, None]
        self.squared = (
            self.a[:, None] + self.b[:, None] * np.sin(self.w[:, None] * tau + self.p[:, None])
        ) ** 2
        self.before = np.concatenate([[0.0], np.cumsum(self._primitive(np.arange(pieces), self.duration))])

    def _primitive(self, k, tau):
        """∫ (a + b sin)² from 0 to τ on piece k, in closed form."""

        def at(t):
            angle = self.w[k] * t + self.p[k]
            sine = -2.0 * self.a[k] * self.b[k] * np.cos(angle) / self.w[k]
            square = self.b[k] ** 2 * (0.5 * t - np.sin(2.0 * angle) / (4.0 * self.w[k]))
            return self.a[k] ** 2 * t + sine + square

        return at(tau) - at(np.zeros_like(tau))

    def running(self, t):
        """∫ i² from 0 to t, periodic."""
        turns = np.floor(t / self.cycle)
        local = t - turns * self.cycle
        k = np.clip(np.searchsorted(self.borders, local, side="right") - 1, 0, len(self.duration) - 1)
        return turns * self.before[-1] + self.before[k] + self._primitive(k, local - self.borders[k])

    def square(self, t):
        local = np.mod(t, self.cycle)
        k = np.clip(np.searchsorted(self.borders, local, side="right") - 1, 0, len(self.duration) - 1)
        return (self.a[k] + self.b[k] * np.sin(self.w[k] * (local - self.borders[k]) + self.p[k])) ** 2


@pytest.mark.parametrize("seed", range(8))
@pytest.mark.parametrize("share", [0.01, 0.13, 0.5, 0.97, 1.4, 3.3])
def test_windowed_rms_against_dense_sampling(seed, share):
    signal = Signal(seed, 1 + 3 * seed)
    window = share * signal.cycle
    rms, start = windowed_rms(signal.duration, signal.squared, window)
    starts = np.concatenate([np.linspace(0.0, signal.cycle, 20001), signal.borders, signal.borders - window])
    sampled = np.sqrt((signal.running(starts + window) - signal.running(starts)) / window)
    # The interpolant of 16 nodes is exact to 1e-13 here; a dense grid can only be below the maximum, by at
    # most the half spacing squared times the slope of i² over the window.
    assert float(rms) >= sampled.max() * (1.0 - 1e-12)
    reached = math.sqrt((signal.running(start + window) - signal.running(start)) / window)
    assert float(rms) == pytest.approx(reached, rel=1e-12)
    assert 0.0 <= float(start) <= signal.cycle


def test_windowed_rms_against_quadrature():
    signal = Signal(3, 5)
    window = 0.7
    rms, start = windowed_rms(signal.duration, signal.squared, window)
    ends = [b + n * signal.cycle for n in (0, 1) for b in signal.borders]
    inside = [b for b in ends if start < b < start + window]
    integral, _ = quad(
        signal.square, float(start), float(start) + window, points=inside, epsabs=1e-12, epsrel=1e-12
    )
    assert float(rms) == pytest.approx(math.sqrt(integral / window), rel=1e-11)  # tolerances of quad


def test_windowed_rms_of_a_pulse():
    duration, squared = [1.0, 3.0], np.array([[16.0] * 5, [0.0] * 5])
    assert float(windowed_rms(duration, squared, 0.5)[0]) == pytest.approx(4.0, rel=1e-14)  # inside the pulse
    assert float(windowed_rms(duration, squared, 2.0)[0]) == pytest.approx(math.sqrt(8.0), rel=1e-14)
    assert float(windowed_rms(duration, squared, 4.0)[0]) == pytest.approx(2.0, rel=1e-14)  # one cycle
    # Five seconds from the start of a pulse hold two of them.
    assert float(windowed_rms(duration, squared, 5.0)[0]) == pytest.approx(math.sqrt(32.0 / 5.0), rel=1e-14)
    assert float(windowed_rms(duration, squared, 8.0)[0]) == pytest.approx(2.0, rel=1e-14)


def test_window_across_the_end_of_the_cycle():
    duration, squared = [1.0, 2.0, 1.0], np.array([[9.0] * 3, [0.0] * 3, [9.0] * 3])
    rms, start = windowed_rms(duration, squared, 2.0)
    assert float(rms) == pytest.approx(3.0, rel=1e-14)
    assert float(start) == pytest.approx(3.0, rel=1e-14)


def test_maximum_between_borders_in_closed_form():
    # i² = 2 − (x − 0.1)² on one piece of 2 s; the best window of 0.5 s is centred on x = 0.1.
    nodes = lobatto(8)[0]
    rms, start = windowed_rms([2.0, 1.0], np.stack([2.0 - (nodes - 0.1) ** 2, 0.0 * nodes]), 0.5)
    assert float(rms) == pytest.approx(math.sqrt(2.0 - 0.25**2 / 3.0), rel=1e-13)
    assert float(start) == pytest.approx(0.85, abs=1e-8)  # the maximum is flat


def test_candidates_at_once_are_those_one_by_one():
    signal = Signal(5, 7)
    draw = np.random.default_rng(0)
    batch = signal.squared * draw.uniform(0.2, 3.0, (9, 7, 1))
    limits = batch.mean(axis=(1, 2)) * draw.uniform(0.9, 2.0, 9)
    rms, start = windowed_rms(signal.duration, batch, 0.9)
    top, time = overload_accumulator(signal.duration, batch, limits)
    assert rms.shape == start.shape == top.shape == time.shape == (9,)
    for row in range(9):
        one, at = windowed_rms(signal.duration, batch[row], 0.9)
        # Products of matrices of another shape round otherwise.
        assert (rms[row], start[row]) == (
            pytest.approx(float(one), rel=1e-13),
            pytest.approx(float(at), abs=1e-7),
        )
        one, at = overload_accumulator(signal.duration, batch[row], limits[row])
        assert top[row] == pytest.approx(float(one), rel=1e-12)
        assert time[row] == pytest.approx(float(at), abs=1e-7, nan_ok=True)


@pytest.mark.parametrize("seed", range(8))
@pytest.mark.parametrize("above", [1.02, 1.3, 2.5])
def test_accumulator_against_a_fine_simulation(seed, above):
    signal = Signal(seed, 2 + 2 * seed)
    limit = above * signal.before[-1] / signal.cycle
    top, time = overload_accumulator(signal.duration, signal.squared, limit)
    # Exact rises of the accumulator between the instants of a fine grid and the borders, from empty,
    # over enough cycles to be periodic.
    one = np.unique(np.concatenate([np.linspace(0.0, signal.cycle, 4001), signal.borders]))[:-1]
    rises = np.diff(signal.running(np.append(one, signal.cycle))) - limit * np.diff(
        np.append(one, signal.cycle)
    )
    level, highest = 0.0, 0.0
    for rise in np.tile(rises, 3):
        level = max(0.0, level + rise)
        highest = max(highest, level)
    # The simulation misses the top or the bottom by at most slope × spacing²/8 each; slopes stay below 100.
    allowed = 2.0 * 100.0 * (signal.cycle / 4000) ** 2 / 8.0
    assert highest - 1e-12 <= float(top) <= highest + allowed
    assert 0.0 <= float(time) <= signal.cycle


def test_accumulator_of_a_pulse():
    duration, squared = [2.0, 18.0], np.array([[9.0] * 3, [0.0] * 3])
    top, time = overload_accumulator(duration, squared, 1.0)
    assert (float(top), float(time)) == (16.0, 2.0)
    # Two pulses: the second starts from what the first has left, 2 (9 − 4) − 1 · 4 = 6.
    top, time = overload_accumulator(
        [2.0, 1.0, 2.0, 9.0], np.repeat([[9.0], [0.0], [9.0], [0.0]], 3, axis=1), 4.0
    )
    assert (float(top), float(time)) == (16.0, 5.0)


def test_accumulator_across_the_end_of_the_cycle():
    # The pulse is cut in two by the end of the cycle and rises by 5 A² for 3 s all the same.
    top, time = overload_accumulator([1.0, 5.0, 2.0], np.repeat([[9.0], [0.0], [9.0]], 3, axis=1), 4.0)
    assert (float(top), float(time)) == (15.0, 1.0)


def test_accumulator_between_roots_in_closed_form():
    # i² = 2 − (x − 0.1)² exceeds 1.91 within 0.3 of x = 0.1, by an area of 2 (0.09 · 0.3 − 0.3³/3) = 0.036.
    nodes = lobatto(8)[0]
    top, time = overload_accumulator([2.0, 1.0], np.stack([2.0 - (nodes - 0.1) ** 2, 0.0 * nodes]), 1.91)
    assert float(top) == pytest.approx(0.036, rel=1e-12)
    assert float(time) == pytest.approx(1.4, abs=1e-8)


def test_accumulator_at_and_beyond_its_limit():
    constant = np.full((3, 4), 2.0**2)
    assert float(overload_accumulator([1.0, 0.3, 0.1], constant, 4.0)[0]) == pytest.approx(0.0, abs=1e-12)
    top, time = overload_accumulator([1.0, 0.3, 0.1], constant, 3.9)
    assert math.isinf(top)
    assert math.isnan(time)
    top, _ = overload_accumulator([1.0, 0.3, 0.1], constant, 4.1)
    assert float(top) == pytest.approx(0.0, abs=1e-15)  # rounding of the running integral


def test_rms_of_samples():
    assert rms_of_samples([0.0, 1.0, 2.0, 3.0], [0.0, 3.0, 3.0, 0.0]) == pytest.approx(
        math.sqrt(5.0), rel=1e-15
    )
    # The jump of two equal instants adds nothing.
    assert rms_of_samples([0.0, 1.0, 1.0, 2.0], [4.0, 4.0, 0.0, 0.0]) == pytest.approx(
        math.sqrt(8.0), rel=1e-15
    )


@given(
    time=st.lists(st.integers(0, 1000), min_size=2, max_size=8, unique=True).map(sorted),
    data=st.data(),
)
def test_a_sample_on_the_line_changes_nothing(time, data):
    value = data.draw(st.lists(st.floats(-1e3, 1e3), min_size=len(time), max_size=len(time)))
    before = data.draw(st.integers(0, len(time) - 2))
    middle = 0.5 * (time[before] + time[before + 1])
    more_time = np.insert(np.array(time, dtype=float), before + 1, middle)
    more_value = np.insert(np.array(value), before + 1, 0.5 * (value[before] + value[before + 1]))
    # Rounding against the largest value, since values may cancel on a line through zero.
    scale = 1e-9 * max(map(abs, value))
    assert rms_of_samples(more_time, more_value) == pytest.approx(
        rms_of_samples(time, value), rel=1e-9, abs=scale
    )


signals = st.builds(Signal, seed=st.integers(0, 10**6), pieces=st.integers(1, 8))
shares = st.floats(min_value=0.01, max_value=4.0)


@settings(deadline=None)
@given(signal=signals, share=shares)
def test_window_lies_between_rms_and_peak(signal, share):
    rms = math.sqrt(signal.before[-1] / signal.cycle)
    top, _ = windowed_rms(signal.duration, signal.squared, share * signal.cycle)
    peak = math.sqrt(signal.square(np.linspace(0.0, signal.cycle, 5001)).max())
    assert float(top) >= rms * (1.0 - 1e-12)
    assert float(top) <= max(peak, math.sqrt(signal.squared.max())) * (1.0 + 1e-6)  # grid of the peak
    whole, _ = windowed_rms(signal.duration, signal.squared, math.ceil(share) * signal.cycle)
    assert float(whole) == pytest.approx(rms, rel=1e-12, abs=1e-15)


@settings(deadline=None)
@given(signal=signals, share=shares, factor=st.floats(1e-3, 1e3))
def test_scaling(signal, share, factor):
    window, limit = share * signal.cycle, 1.1 * signal.before[-1] / signal.cycle
    rms, _ = windowed_rms(signal.duration, signal.squared, window)
    top, _ = overload_accumulator(signal.duration, signal.squared, limit)
    current, _ = windowed_rms(signal.duration, factor**2 * signal.squared, window)
    slow, _ = windowed_rms(factor * signal.duration, signal.squared, factor * window)
    # Rounding grows as the cycle over the window, up to a hundred here.
    assert float(current) == pytest.approx(factor * float(rms), rel=1e-11, abs=1e-14)
    assert float(slow) == pytest.approx(float(rms), rel=1e-11, abs=1e-14)
    energy, _ = overload_accumulator(factor * signal.duration, signal.squared, limit)
    whole = float(signal.before[-1])
    assert float(energy) == pytest.approx(factor * float(top), rel=1e-11, abs=1e-12 * factor * whole)


@settings(deadline=None)
@given(signal=signals, share=shares, cut=st.floats(0.05, 0.95), data=st.data())
def test_start_of_the_cycle_and_cuts_change_nothing(signal, share, cut, data):
    window, limit = share * signal.cycle, 1.1 * signal.before[-1] / signal.cycle
    rms, _ = windowed_rms(signal.duration, signal.squared, window)
    top, _ = overload_accumulator(signal.duration, signal.squared, limit)
    whole = float(signal.before[-1])

    def same(duration, squared):
        again, _ = windowed_rms(duration, squared, window)
        assert float(again) == pytest.approx(float(rms), rel=1e-11, abs=1e-14)
        again, _ = overload_accumulator(duration, squared, limit)
        assert float(again) == pytest.approx(float(top), rel=1e-11, abs=1e-12 * whole)

    turn = data.draw(st.integers(0, len(signal.duration) - 1))
    same(np.roll(signal.duration, turn), np.roll(signal.squared, turn, axis=0))

    k, nodes = turn, 0.5 * (lobatto(16)[0] + 1.0)
    length = signal.duration[k]
    local = np.stack([nodes * cut * length, (cut + nodes * (1.0 - cut)) * length])
    halves = (signal.a[k] + signal.b[k] * np.sin(signal.w[k] * local + signal.p[k])) ** 2
    same(
        np.concatenate([signal.duration[:k], [cut * length, (1.0 - cut) * length], signal.duration[k + 1 :]]),
        np.concatenate([signal.squared[:k], halves, signal.squared[k + 1 :]]),
    )
