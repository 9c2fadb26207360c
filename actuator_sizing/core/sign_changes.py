"""Where smooth functions on pieces change sign, for many candidates at once."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import bracketed_roots

FloatArray = NDArray[np.float64]

_DENSE = 65  # points per piece on which sign changes are bracketed, as for extrema
_NOTHING = 1e-13  # a value this small against the largest one has no sign


@lru_cache(maxsize=8)
def _grid(count: int) -> tuple[FloatArray, FloatArray]:
    points = np.cos(np.pi * np.arange(_DENSE - 1, -1, -1) / (_DENSE - 1))
    return points, np.asarray(legendre.legvander(points, count - 1).T, dtype=np.float64)


def sign_changes(series: FloatArray) -> tuple[NDArray[np.intp], NDArray[np.intp], FloatArray]:
    """Positions where Legendre series change sign.

    Parameters
    ----------
    series : ndarray, shape (B, P, K)
        Coefficients of each piece of each candidate; the unit is the caller's. [-]

    Returns
    -------
    candidate, piece : ndarray of int, shape (n,)
        Where each change is; ascending by candidate, piece and position. [-]
    position : ndarray, shape (n,)
        On (−1, 1). [-]

    Notes
    -----
    Bracketed on a Chebyshev grid and refined by Newton's method. Two changes within one step of the grid
    (1/2000 of a piece at its ends, 1/40 in its middle) may be missed together; what they enclose is
    then next to nothing.
    """
    points, matrix = _grid(series.shape[2])
    row, piece = np.nonzero(np.abs(series[..., 1:]).sum(axis=2) > np.abs(series[..., 0]))
    mine = series[row, piece]
    dense = mine @ matrix
    dense[np.abs(dense) <= _NOTHING * np.abs(mine).sum(axis=1)[:, None]] = 0.0
    sign = np.sign(dense)
    for k in range(1, _DENSE):  # a zero keeps the sign before it
        sign[:, k] = np.where(sign[:, k] == 0.0, sign[:, k - 1], sign[:, k])
    which, bracket = np.nonzero((sign[:, 1:] * sign[:, :-1]) < 0.0)
    low, high = points[bracket], points[bracket + 1]
    value = mine[which].T
    rising = sign[which, bracket + 1] > 0.0
    return row[which], piece[which], bracketed_roots(value, low, high, rising, 0.5 * (low + high))
