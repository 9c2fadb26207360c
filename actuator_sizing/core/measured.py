"""What a record tells of itself: the period after which it repeats, and its longest gap."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_GRID = 4096  # points on which the period is looked for
_ALIKE = 0.02  # mean square difference of two periods, as part of twice the variance, that counts as a repeat


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
