"""What the drive sees: windowed RMS current and i²t accumulator of many sets, periodic in the cycle."""

from __future__ import annotations

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import NODES, antiderivative_matrix, lobatto, to_series

FloatArray = NDArray[np.float64]

_PER_INTERVAL = 9  # points between breakpoints; the maximum is then refined by a parabola


class SquaredCurrent:
    """Running integral of i² of B pairs on one common grid of pieces.

    The grid is common to all pairs, so that reading the integral at any instants is one matrix product.
    """

    def __init__(self, duration_s: FloatArray, squared: FloatArray):
        """Hold `squared` of shape (B, P, K) on pieces of length `duration_s`, shape (P,)."""
        self.duration_s = duration_s
        self.borders = np.concatenate([[0.0], np.cumsum(duration_s)])
        self.cycle_s = float(self.borders[-1])
        series = squared @ to_series(NODES).T
        self._series = 0.5 * duration_s[:, None] * (series @ antiderivative_matrix(NODES).T)
        per_piece = 0.5 * (squared @ lobatto(NODES)[1]) * duration_s
        self._before = np.concatenate([np.zeros((len(squared), 1)), np.cumsum(per_piece, axis=1)], axis=1)
        self.total = self._before[:, -1]

    def integral(self, at_s: FloatArray) -> FloatArray:
        """∫ i² dt from 0 to each instant, periodic; shape (B, n). [A²·s]"""
        turns = np.floor(at_s / self.cycle_s)
        local = at_s - turns * self.cycle_s
        piece = np.clip(np.searchsorted(self.borders, local, side="right") - 1, 0, len(self.duration_s) - 1)
        x = np.clip(2.0 * (local - self.borders[piece]) / self.duration_s[piece] - 1.0, -1.0, 1.0)
        basis = legendre.legvander(x, NODES)
        inside = np.einsum("bnk,nk->bn", self._series[:, piece], basis)
        return np.asarray(self._before[:, piece] + inside + turns * self.total[:, None])


def windowed_rms(current: SquaredCurrent, window_s: float) -> tuple[FloatArray, FloatArray]:
    """Largest RMS over any window of a given length, for B pairs.

    Parameters
    ----------
    current : SquaredCurrent
        Running integral of i². [-]
    window_s : float
        Window; may be longer than the cycle. [s]

    Returns
    -------
    rms_a : ndarray, shape (B,)
        Largest windowed RMS. [A]
    start_s : ndarray, shape (B,)
        Where that window starts. [s]

    Notes
    -----
    The window integral is smooth between the instants at which either end crosses a border of a piece; it is
    read on a grid within each such interval and its maximum refined by the parabola through three points.
    """
    borders = current.borders[:-1]
    breaks = np.unique(
        np.concatenate([borders, np.mod(borders - window_s, current.cycle_s), [current.cycle_s]])
    )
    breaks = breaks[np.concatenate([[True], np.diff(breaks) > 1e-12 * current.cycle_s])]
    step = np.linspace(0.0, 1.0, _PER_INTERVAL)
    start = (breaks[:-1, None] + np.diff(breaks)[:, None] * step).reshape(-1)
    value = current.integral(start + window_s) - current.integral(start)
    batch = len(value)
    grid = value.reshape(batch, -1, _PER_INTERVAL)
    low, mid, high = grid[..., :-2], grid[..., 1:-1], grid[..., 2:]
    bend = low - 2.0 * mid + high
    peaked = (mid >= low) & (mid >= high) & (bend < 0.0)
    shift = np.where(peaked, 0.5 * (low - high) / np.where(peaked, bend, 1.0), 0.0)
    refined = np.where(peaked, mid - 0.25 * (low - high) * shift, -np.inf)
    best_grid = value.max(axis=1)
    best_refined = refined.reshape(batch, -1).max(axis=1)
    best = np.maximum(best_grid, best_refined)
    at = np.mod(start[value.argmax(axis=1)], current.cycle_s)
    return np.sqrt(np.maximum(best, 0.0) / window_s), at


def overload(
    current: SquaredCurrent, continuous_a: FloatArray, pair: NDArray[np.intp]
) -> tuple[FloatArray, FloatArray]:
    """Largest i²t accumulator of S sets in the periodic regime.

    Parameters
    ----------
    current : SquaredCurrent
        Running integral of i² of B pairs, in the basis of the drives. [-]
    continuous_a : ndarray, shape (S,)
        Continuous current of the drive. [A]
    pair : ndarray of int, shape (S,)
        Pair of each set. [-]

    Returns
    -------
    accumulated_a2s : ndarray, shape (S,)
        ``max S`` with ``dS/dt = i² − I_c²``, ``S ≥ 0``; infinite where the mean of i² is above I_c². [A²·s]
    at_s : ndarray, shape (S,)
        When it is reached. [s]

    Notes
    -----
    The largest rise ``D(t_2) − D(t_1)`` of ``D = ∫ (i² − I_c²) dt`` over two cycles; read on a grid of the
    pieces, borders included.
    """
    step = np.linspace(0.0, 1.0, 2 * _PER_INTERVAL, endpoint=False)
    one = (current.borders[:-1, None] + current.duration_s[:, None] * step).reshape(-1)
    at = np.concatenate([one, one + current.cycle_s, [2.0 * current.cycle_s]])
    squared = current.integral(at)
    accumulated = np.empty(len(pair))
    when = np.empty(len(pair))
    for start in range(0, len(pair), 512):
        part = slice(start, start + 512)
        D = squared[pair[part]] - (continuous_a[part] ** 2)[:, None] * at
        rise = D - np.minimum.accumulate(D, axis=1)
        accumulated[part] = rise.max(axis=1)
        when[part] = np.mod(at[rise.argmax(axis=1)], current.cycle_s)
    diverges = current.total[pair] > continuous_a**2 * current.cycle_s * (1.0 + 1e-12)
    return np.where(diverges, np.inf, accumulated), when
