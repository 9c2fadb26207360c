"""Windowed RMS and i²t accumulator of periodic signals held as smooth pieces; exact, not sampled.

A square i² is known by its node values on pieces (see `quadrature`), so its running integral is a polynomial
on each piece. Extremes over every instant then lie at borders of pieces or at roots of a polynomial.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import ArrayLike, NDArray

from actuator_sizing.core.quadrature import antiderivative_matrix, to_series

FloatArray = NDArray[np.float64]

_GRID = 25  # Chebyshev points per interval on which roots are bracketed; above the degree of the pieces
_STEPS = 40  # bound of the root search; some 6 steps are the rule
_ROOT = 1e-9  # of an interval; the extremes are stationary there, so their error is its square
_ROUNDING = 1e-12  # of a cycle or of a mean square, taken for equal


def windowed_rms(duration_s: ArrayLike, squared: ArrayLike, window_s: float) -> tuple[FloatArray, FloatArray]:
    """Largest RMS over a window of given length, over every start time of a periodic signal.

    Parameters
    ----------
    duration_s : array_like, shape (P,)
        Length of each piece; they follow each other and repeat. [s]
    squared : array_like, shape (P, K) or (B, P, K)
        Square of the signal at the Gauss–Lobatto nodes of each piece; one row per candidate. [A²]
    window_s : float
        Length of the window, positive; it may be longer than the cycle. [s]

    Returns
    -------
    rms : ndarray, shape () or (B,)
        Largest windowed RMS. [A]
    start_s : ndarray, shape () or (B,)
        Where that window starts, within the first cycle. [s]

    Notes
    -----
    The integral over the window, ``W(t) = C(t + w) − C(t)`` with C the running integral, is a polynomial
    between the instants at which either end of the window crosses a border. There its maxima are the roots
    of ``W' = i²(t + w) − i²(t)`` from plus to minus. Whole cycles inside the window are constant. From
    first principles. The relative rounding error grows as the ratio of cycle to window.

    Examples
    --------
    >>> pulse = np.array([[9.0] * 3, [0.0] * 3])  # 3 A for 2 s, then 98 s at rest
    >>> rms, start = windowed_rms([2.0, 98.0], pulse, 10.0)
    >>> float(rms)  # √(9 · 2 / 10)
    1.3416
    """
    signal = _Running(duration_s, squared)
    turns, rest = divmod(window_s, signal.cycle)
    near_whole = min(rest, signal.cycle - rest) <= _ROUNDING * signal.cycle
    if near_whole:
        whole = np.sqrt(signal.total / signal.cycle)
        return signal.shaped(whole), signal.shaped(np.zeros_like(whole))
    integral, start = _largest_window(signal, rest)
    rms = np.sqrt(np.maximum(integral + turns * signal.total, 0.0) / window_s)
    return signal.shaped(rms), signal.shaped(start)


def overload_accumulator(
    duration_s: ArrayLike, squared: ArrayLike, continuous_squared: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Largest value of the i²t accumulator in its periodic regime.

    Parameters
    ----------
    duration_s : array_like, shape (P,)
        Length of each piece; they follow each other and repeat. [s]
    squared : array_like, shape (P, K) or (B, P, K)
        Square of the current at the Gauss–Lobatto nodes of each piece; one row per candidate. [A²]
    continuous_squared : array_like, shape () or (B,)
        Square of the continuous current, in the same basis. [A²]

    Returns
    -------
    maximum : ndarray, shape () or (B,)
        Largest accumulator; infinite where the mean square is above the continuous one. [A²·s]
    time_s : ndarray, shape () or (B,)
        When it is reached, within the cycle; NaN where it is infinite. [s]

    Notes
    -----
    The accumulator follows ``dS/dt = i² − I_c²`` and stops at zero, so in the periodic regime S(t) is the
    largest rise of ``E = ∫ (i² − I_c²) dt`` over any stretch that ends at t. Stretches start and end at
    borders or at roots of ``i² = I_c²``; with a mean square below I_c² none longer than a cycle counts.
    From first principles.

    Examples
    --------
    >>> pulse = np.array([[9.0] * 3, [0.0] * 3])  # 3 A for 2 s, then 18 s at rest
    >>> maximum, time = overload_accumulator([2.0, 18.0], pulse, 1.0)
    >>> float(maximum), float(time)
    (16.0, 2.0)
    """
    signal = _Running(duration_s, squared)
    limit = np.broadcast_to(np.asarray(continuous_squared, dtype=np.float64), signal.total.shape)
    time, rise = _excess_course(signal, limit)
    surplus = np.minimum(signal.total - limit * signal.cycle, 0.0)
    twice = np.concatenate([rise, rise + surplus[:, None]], axis=1)
    accumulated = twice - np.minimum.accumulate(twice, axis=1)
    at = accumulated.argmax(axis=1)
    rows = np.arange(len(at))
    maximum, when = accumulated[rows, at], time[rows, at % time.shape[1]]
    diverges = signal.total > limit * signal.cycle * (1.0 + _ROUNDING)
    return (
        signal.shaped(np.where(diverges, np.inf, maximum)),
        signal.shaped(np.where(diverges, np.nan, when)),
    )


def rms_of_samples(time_s: ArrayLike, value: ArrayLike) -> float:
    """RMS of a signal that is linear between samples.

    Parameters
    ----------
    time_s : array_like, shape (n,)
        Instants, ascending; two equal ones make a jump. [s]
    value : array_like, shape (n,)
        Signal at those instants, in any unit. [-]

    Returns
    -------
    float
        RMS from the first to the last instant, in the unit of `value`. [-]

    Notes
    -----
    The mean square of a straight line from a to b is ``(a² + a b + b²)/3``; from first principles.

    Examples
    --------
    >>> rms_of_samples([0.0, 3.0], [0.0, 3.0])  # √3
    1.7321
    """
    t, v = np.asarray(time_s, dtype=np.float64), np.asarray(value, dtype=np.float64)
    left, right = v[:-1], v[1:]
    integral = np.sum(np.diff(t) * (left * left + left * right + right * right)) / 3.0
    return float(np.sqrt(integral / (t[-1] - t[0])))


class _Running:
    """Squares of B candidates as Legendre series on common pieces, with their running integrals."""

    def __init__(self, duration_s: ArrayLike, squared: ArrayLike):
        values = np.asarray(squared, dtype=np.float64)
        self.single = values.ndim == 2
        values = values[None] if self.single else values
        self.count = values.shape[-1]
        self.duration = np.asarray(duration_s, dtype=np.float64)
        self.borders = np.concatenate([[0.0], np.cumsum(self.duration)])
        self.cycle = float(self.borders[-1])
        self.series = values @ to_series(self.count).T  # (B, P, K)
        scale = 0.5 * self.duration[:, None]
        self.integral = scale * (self.series @ antiderivative_matrix(self.count).T)  # (B, P, K + 1)
        after = np.cumsum(self.series[..., 0] * self.duration, axis=1)
        self.before = np.concatenate([np.zeros((len(values), 1)), after], axis=1)  # (B, P + 1)
        self.total = np.maximum(self.before[:, -1], 0.0)

    def shaped(self, result: FloatArray) -> FloatArray:
        """Drop the candidate axis when there was none."""
        return np.asarray(result[0]) if self.single else result

    def piece(self, at: FloatArray) -> NDArray[np.intp]:
        """Piece that holds an instant of the cycle."""
        return np.clip(np.searchsorted(self.borders, at, side="right") - 1, 0, len(self.duration) - 1)

    def local(self, piece: NDArray[np.intp], at: FloatArray) -> FloatArray:
        """Position of an instant on its piece, on [−1, 1]."""
        x = 2.0 * (at - self.borders[piece]) / self.duration[piece] - 1.0
        return np.asarray(np.clip(x, -1.0, 1.0))


@lru_cache(maxsize=1)
def _grid() -> FloatArray:
    """Chebyshev points on [0, 1], ends included."""
    angle: FloatArray = np.pi * np.arange(_GRID, dtype=np.float64) / (_GRID - 1)
    return np.asarray(0.5 - 0.5 * np.cos(angle), dtype=np.float64)


def _largest_window(signal: _Running, window: float) -> tuple[FloatArray, FloatArray]:
    """Largest integral over a window shorter than the cycle, and where it starts, per candidate."""
    cycle, K = signal.cycle, signal.count
    breaks = np.sort(np.concatenate([signal.borders, np.mod(signal.borders[:-1] - window, cycle)]))
    breaks = breaks[np.concatenate([[True], np.diff(breaks) > _ROUNDING * cycle])]
    left, length = breaks[:-1], np.append(breaks[1:-1], cycle) - breaks[:-1]
    middle = left + 0.5 * length
    wraps = middle + window >= cycle
    shift = window - cycle * wraps
    tail, head = signal.piece(middle), signal.piece(middle + shift)  # where the window starts and ends

    at = left[:, None] + length[:, None] * _grid()  # (M, D)
    basis_tail: FloatArray = np.asarray(legendre.legvander(signal.local(tail[:, None], at), K))
    basis_head: FloatArray = np.asarray(
        legendre.legvander(signal.local(head[:, None], at + shift[:, None]), K)
    )
    slope = _at_grid(signal.series, head, basis_head) - _at_grid(signal.series, tail, basis_tail)
    constant = signal.before[:, head] - signal.before[:, tail] + signal.total[:, None] * wraps
    value = (
        constant[..., None]
        + _at_grid(signal.integral, head, basis_head)
        - _at_grid(signal.integral, tail, basis_tail)
    )
    rows = np.arange(len(value))
    flat = value.reshape(len(value), -1)
    best_at = flat.argmax(axis=1)
    best, start = flat[rows, best_at], at.reshape(-1)[best_at]

    # Maxima between grid points, where they can still be the largest (W is below its tangents there).
    width = length[:, None] * np.diff(_grid())
    steepest = np.maximum(np.abs(slope[..., :-1]), np.abs(slope[..., 1:]))
    reach = np.maximum(value[..., :-1], value[..., 1:]) + steepest * width
    row, m, d = np.nonzero((slope[..., :-1] > 0.0) & (slope[..., 1:] < 0.0) & (reach > best[:, None, None]))
    if not len(row):
        return best, start
    p, q = tail[m], head[m]
    series_tail, series_head = signal.series[row, p], signal.series[row, q]

    def slope_at(t: FloatArray) -> FloatArray:
        ahead = _series_value(series_head, signal.local(q, t + shift[m]))
        return ahead - _series_value(series_tail, signal.local(p, t))

    t = _roots(slope_at, at[m, d], at[m, d + 1], slope[row, m, d], slope[row, m, d + 1])
    refined = constant[row, m] + _series_value(signal.integral[row, q], signal.local(q, t + shift[m]))
    refined -= _series_value(signal.integral[row, p], signal.local(p, t))
    order = np.argsort(refined, kind="stable")  # the last write below is the largest
    order = order[refined[order] > best[row[order]]]
    best[row[order]], start[row[order]] = refined[order], t[order]
    return best, start


def _excess_course(signal: _Running, limit: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Instants in order and the integral of ``i² − limit`` there, borders and roots included; (B, n) each."""
    x = 2.0 * _grid() - 1.0
    basis = legendre.legvander(x, signal.count)
    excess = signal.series @ basis[:, :-1].T - limit[:, None, None]  # (B, P, D)
    level = signal.before[:, :-1, None] + signal.integral @ basis.T
    at = signal.borders[:-1, None] + signal.duration[:, None] * _grid()
    batch, pieces, points = excess.shape
    time, value = np.empty((2, batch, pieces, 2 * points - 1))
    time[..., ::2], value[..., ::2] = at, level
    time[..., 1::2], value[..., 1::2] = at[:, :-1], level[..., :-1]  # repeated where there is no root
    low, high = excess[..., :-1], excess[..., 1:]
    row, p, d = np.nonzero(low * high < 0.0)
    if len(row):
        series = signal.series[row, p]
        root = _roots(
            lambda y: _series_value(series, y) - limit[row], x[d], x[d + 1], low[row, p, d], high[row, p, d]
        )
        slot = (row, p, 2 * d + 1)
        time[slot] = signal.borders[p] + 0.5 * (root + 1.0) * signal.duration[p]
        value[slot] = signal.before[row, p] + _series_value(signal.integral[row, p], root)
    value -= limit[:, None, None] * time
    return time.reshape(batch, -1), value.reshape(batch, -1)


def _at_grid(series: FloatArray, piece: NDArray[np.intp], basis: FloatArray) -> FloatArray:
    """Series (B, P, n) of chosen pieces (M,) on a basis (M, D, n or more) as (B, M, D)."""
    chosen = series[:, piece].transpose(1, 0, 2)  # (M, B, n)
    return np.asarray((chosen @ basis[..., : series.shape[-1]].transpose(0, 2, 1)).transpose(1, 0, 2))


def _series_value(series: FloatArray, x: FloatArray) -> FloatArray:
    """Legendre series row by row: (n, K) at (n,) gives (n,)."""
    return np.asarray(np.einsum("nk,nk->n", series, legendre.legvander(x, series.shape[1] - 1)))


def _roots(
    function: Callable[[FloatArray], FloatArray],
    low: FloatArray,
    high: FloatArray,
    f_low: FloatArray,
    f_high: FloatArray,
) -> FloatArray:
    """Roots in brackets with a change of sign, all at once: secants that halve a stale end (Illinois rule)."""
    low, high, f_low, f_high = low.copy(), high.copy(), f_low.copy(), f_high.copy()
    tolerance = _ROOT * (high - low)
    x = low
    for _ in range(_STEPS):
        before = x
        x = high - f_high * (high - low) / (f_high - f_low)
        f = function(x)
        crossed = f * f_high < 0.0
        low, f_low = np.where(crossed, high, low), np.where(crossed, f_high, 0.5 * f_low)
        high, f_high = x, f
        if np.all((np.abs(x - before) <= tolerance) | (f == 0.0)):
            break
        still = f == 0.0
        f_high = np.where(still, np.copysign(np.finfo(float).tiny, -f_low), f_high)
    return x
