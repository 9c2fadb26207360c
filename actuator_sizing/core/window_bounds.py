"""Windowed RMS and i²t accumulator of a periodic signal known by its integrals over slices: upper bounds.

No window of the signal itself is worse. The bounds exceed the true values by what two slices can hold.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_ROUNDING = 1e-12  # of a cycle, taken for equal


def windowed_rms_bound(
    duration_s: FloatArray, integral: FloatArray, peak: FloatArray, window_s: float
) -> tuple[FloatArray, FloatArray]:
    """Upper bound of the largest RMS over a window, over every start time.

    Parameters
    ----------
    duration_s : ndarray, shape (M,)
        Length of each slice; they follow each other and repeat. [s]
    integral : ndarray, shape (B, M)
        Integral of the square over each slice; one row per candidate. [A²·s]
    peak : ndarray, shape (B,)
        Largest magnitude, which no window exceeds. [A]
    window_s : float
        Length of the window, positive; it may be longer than the cycle. [s]

    Returns
    -------
    rms : ndarray, shape (B,)
        No windowed RMS is larger. [A]
    start_s : ndarray, shape (B,)
        Start of the slice in which the worst window starts. [s]

    Notes
    -----
    A window that starts in slice a and ends in slice b holds no more than the slices a to b together. From
    first principles.

    Examples
    --------
    >>> pulse = np.array([[9.0, 9.0, 0.0, 0.0]])  # 3 A for 2 s, then 2 s at rest, in slices of 1 s
    >>> bound, _ = windowed_rms_bound(np.ones(4), pulse, np.array([3.0]), 3.0)
    >>> float(bound[0])  # the true value is √(18/3) = 2.449
    2.4495
    """
    borders = np.concatenate([[0.0], np.cumsum(duration_s)])
    cycle, count = float(borders[-1]), len(duration_s)
    turns, rest = divmod(window_s, cycle)
    total = integral.sum(axis=1)
    before = np.concatenate([np.zeros((len(integral), 1)), np.cumsum(integral, axis=1)], axis=1)
    twice = np.concatenate([before, before[:, 1:] + total[:, None]], axis=1)
    ends = np.concatenate([borders, borders[1:] + cycle])
    latest = np.searchsorted(ends, borders[1:] + rest - _ROUNDING * cycle)  # after the latest end
    latest = np.minimum(latest, np.arange(count) + count)
    held = twice[:, latest] - twice[:, :count] if rest > _ROUNDING * cycle else np.zeros_like(integral)
    worst = held.argmax(axis=1)
    largest = held[np.arange(len(held)), worst]
    rms = np.sqrt((largest + turns * total) / window_s)
    return np.minimum(rms, peak), borders[worst]


def overload_bound(
    duration_s: FloatArray, integral: FloatArray, continuous_squared: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Upper bound of the largest i²t accumulator in its periodic regime.

    Parameters
    ----------
    duration_s : ndarray, shape (M,)
        Length of each slice; they follow each other and repeat. [s]
    integral : ndarray, shape (B, M)
        Integral of the square of the current over each slice. [A²·s]
    continuous_squared : ndarray, shape (B,)
        Square of the continuous current. [A²]

    Returns
    -------
    maximum : ndarray, shape (B,)
        No accumulator is larger; infinite where the mean square is above the continuous one. [A²·s]
    time_s : ndarray, shape (B,)
        End of the slice in which it is reached; NaN where it is infinite. [s]

    Notes
    -----
    ``dS/dt = i² − I_c²``, stopped at zero: S is the largest rise of ``∫ (i² − I_c²) dt`` over any stretch. A
    stretch from slice a to slice b gains no more than those slices together, and is shorter than they by no
    more than both. From first principles.

    Examples
    --------
    >>> pulse = np.array([[9.0, 9.0, 0.0, 0.0]])
    >>> bound, _ = overload_bound(np.ones(4), pulse, np.array([5.0]))
    >>> float(bound[0])  # the true value is 2 · (9 − 5) = 8
    18.0
    """
    cycle = float(duration_s.sum())
    total = integral.sum(axis=1)
    rise = np.cumsum(integral - continuous_squared[:, None] * duration_s, axis=1)
    surplus = np.minimum(total - continuous_squared * cycle, 0.0)
    course = np.concatenate([np.zeros((len(rise), 1)), rise, rise + surplus[:, None]], axis=1)
    accumulated = course - np.minimum.accumulate(course, axis=1)
    worst = accumulated.argmax(axis=1)
    largest = accumulated[np.arange(len(accumulated)), worst]
    borders = np.concatenate([[0.0], np.cumsum(duration_s)])
    when = np.where(worst > len(duration_s), worst - len(duration_s), worst)
    both = 2.0 * float(duration_s.max()) * continuous_squared
    diverges = total > continuous_squared * cycle * (1.0 + _ROUNDING)
    return np.where(diverges, np.inf, largest + both), np.where(diverges, np.nan, borders[when])
