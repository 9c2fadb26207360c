"""A recorded motion as a smooth periodic one: period, closure, drift, and a spline with a stated cut-off.

Everything here is linear in the samples and holds for uneven sampling. Efforts are never smoothed.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

DEGREE = 5  # of the spline of position: its acceleration is smooth
_PER_KNOT = 24  # samples between two knots that are kept; denser ones are averaged in groups
_GRID = 4096  # points on which the period is looked for
_ALIKE = 0.02  # mean square difference of two periods, as part of twice the variance, that counts as a repeat


@dataclass(frozen=True)
class PeriodicSpline:
    """Periodic spline with evenly spaced knots, plus a steady drift.

    Attributes
    ----------
    period_s : float
        Length of one cycle. [s]
    coefficients : ndarray, shape (n,)
        Of the periodic B-splines of degree `DEGREE`. [m]
    drift : float
        Way gained in each period. [m]
    """

    period_s: float
    coefficients: FloatArray
    drift: float

    @property
    def knots_s(self) -> FloatArray:
        """Borders between its polynomials, from 0 to the period, shape (n + 1,). [s]"""
        return np.linspace(0.0, self.period_s, len(self.coefficients) + 1)

    def values(self, time_s: FloatArray, order: int = 0) -> FloatArray:
        """Position or a derivative.

        Parameters
        ----------
        time_s : ndarray
            Instants within the period, any shape. [s]
        order : int
            0 for position, 1 for speed, 2 for acceleration. [-]

        Returns
        -------
        ndarray, shape of `time_s`
            In m, m/s or m/s², or with rad for m. [-]
        """
        from scipy.interpolate import BSpline

        n, h = len(self.coefficients), self.period_s / len(self.coefficients)
        knots = h * np.arange(-DEGREE, n + DEGREE + 1)
        wrapped = np.concatenate([self.coefficients, self.coefficients[:DEGREE]])
        value = BSpline(knots, wrapped, DEGREE)(np.clip(time_s, 0.0, self.period_s), nu=order)
        trend = (self.drift / self.period_s) * (time_s if order == 0 else 1.0) if order < 2 else 0.0
        return np.asarray(value + trend)


def knots_for(period_s: float, cut_off_hz: float) -> int:
    """Knots in one period for a cut-off: two for each period of that frequency, at least eight [-]."""
    return max(8, int(np.ceil(2.0 * period_s * cut_off_hz)))


def largest_gap(time_s: FloatArray, period_s: float) -> tuple[float, int]:
    """Longest time without a sample and the sample after it; the wrap from end to start counts.

    Parameters
    ----------
    time_s : ndarray, shape (n,)
        Ascending instants, from 0 to below the period. [s]
    period_s : float
        Length of the cycle. [s]

    Returns
    -------
    gap_s : float
        Its length. [s]
    index : int
        Sample at its end, 0 for the wrap. [-]
    """
    gaps = np.diff(time_s, prepend=time_s[-1] - period_s)
    index = int(np.argmax(gaps))
    return float(gaps[index]), index


def smooth_position(
    time_s: FloatArray, value: FloatArray, period_s: float, cut_off_hz: float, drift: float, order: int = 0
) -> PeriodicSpline:
    """Least-squares periodic spline of position from samples of position or of speed.

    Parameters
    ----------
    time_s : ndarray, shape (n,)
        Ascending instants from 0 to below the period. [s]
    value : ndarray, shape (n,)
        Position [m], or speed [m/s] when `order` is 1. [-]
    period_s : float
        Length of the cycle. [s]
    cut_off_hz : float
        Frequency above which nothing is followed: the spline has two knots for each of its periods. [Hz]
    drift : float
        Way gained in each period. [m]
    order : int
        0 for samples of position, 1 for samples of speed. [-]

    Returns
    -------
    PeriodicSpline
        The spline nearest to the samples, each weighted with the time it stands for. [-]

    Notes
    -----
    Samples much denser than the knots are averaged in groups first, time and value alike, which is exact for
    a straight line and errs by ``h²/24`` times the curvature over a group of length h, far below the knots'
    own resolution.
    """
    from scipy.interpolate import BSpline
    from scipy.sparse import diags
    from scipy.sparse.linalg import spsolve

    n = knots_for(period_s, cut_off_hz)
    weight = 0.5 * (
        np.diff(time_s, append=time_s[0] + period_s) + np.diff(time_s, prepend=time_s[-1] - period_s)
    )
    target = value - (drift / period_s) * (time_s if order == 0 else 1.0)
    group = np.floor(time_s * (n * _PER_KNOT / period_s)).astype(np.int64)
    first = np.flatnonzero(np.diff(group, prepend=-1))
    if len(first) < len(time_s):
        total = np.add.reduceat(weight, first)
        time_s = np.add.reduceat(weight * time_s, first) / total
        target = np.add.reduceat(weight * target, first) / total
        weight = total
    h = period_s / n
    knots = h * np.arange(-DEGREE, n + DEGREE + 1)
    if order == 0:
        design = BSpline.design_matrix(np.clip(time_s, 0.0, period_s), knots, DEGREE).tocsc()
    else:  # the derivative of B-splines of even knots: difference of those one degree lower
        lower = BSpline.design_matrix(np.clip(time_s, 0.0, period_s), knots[1:-1], DEGREE - 1).tocsc()
        design = lower @ diags([-1.0, 1.0], [0, 1], shape=(n + DEGREE - 1, n + DEGREE)).tocsc() / h
    folded = design[:, :n].tolil()
    folded[:, :DEGREE] += design[:, n:]
    matrix = folded.tocsr()
    weighted = matrix.multiply(weight[:, None]).tocsr()
    gram = (matrix.T @ weighted).tocsc()
    scale = gram.diagonal().max()
    # A speed does not know where the axis stands, nor sparse samples every knot: the least position is taken.
    gram = gram + diags(np.full(n, 1e-12 * scale)).tocsc()
    solved = np.asarray(spsolve(gram, weighted.T @ target))
    start = PeriodicSpline(period_s, solved, 0.0).values(np.zeros(1))[0]
    return PeriodicSpline(period_s, solved - start, drift)


def find_period(time_s: FloatArray, value: FloatArray) -> float:
    """Shortest time after which a record repeats itself.

    Parameters
    ----------
    time_s : ndarray, shape (n,)
        Ascending instants. [s]
    value : ndarray, shape (n,)
        What repeats; any unit. [-]

    Returns
    -------
    float
        Period; NaN where the record holds no two alike. [s]

    Notes
    -----
    The mean square difference of the record and itself, moved by the period, is smallest there. It is looked
    for on an even grid, then refined by a parabola through the three values around the smallest.
    """
    span = float(time_s[-1] - time_s[0])
    grid = np.interp(np.linspace(time_s[0], time_s[-1], _GRID), time_s, value)
    grid = grid - grid.mean()
    variance = float(np.mean(grid**2))
    if variance == 0.0:
        return float("nan")
    size = 2 * _GRID
    spectrum = np.fft.rfft(grid, size)
    products = np.fft.irfft(spectrum * np.conj(spectrum), size)[:_GRID]
    cumulated = np.concatenate([[0.0], np.cumsum(grid**2)])
    lag = np.arange(_GRID)
    count = _GRID - lag
    energy = cumulated[_GRID - lag] + (cumulated[_GRID] - cumulated[lag])
    difference = (energy - 2.0 * products) / (2.0 * variance * count)
    most = _GRID // 2 + 1
    apart = np.flatnonzero(difference[:most] > 0.3)  # first leave the neighbourhood of no shift at all
    if not len(apart):
        return float("nan")
    begin = int(apart[0])
    inside = difference[begin:most]
    near = np.flatnonzero(inside <= max(_ALIKE, 1.5 * float(inside.min())))
    if not len(near) or float(inside.min()) > _ALIKE:
        return float("nan")
    stop = near[0]
    while stop + 1 < len(inside) and inside[stop + 1] < inside[stop]:
        stop += 1
    k = begin + int(stop)
    if 0 < k < _GRID - 1:
        left, middle, right = difference[k - 1 : k + 2]
        bend = left - 2.0 * middle + right
        shift = 0.5 * (left - right) / bend if bend > 0.0 else 0.0
        k = k + float(np.clip(shift, -0.5, 0.5))  # type: ignore[assignment]
    return span * k / (_GRID - 1)
