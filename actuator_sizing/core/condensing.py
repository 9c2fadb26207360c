"""Many points with weights replaced by few of them, such that all means of products stay what they were.

A mean square of any linear combination of the columns depends only on the mean products; so does the mean. A
set of at most ``m`` of the points, with weights not below zero, has the same m means (Carathéodory's theorem;
for integrals Tchakaloff's). The points kept are points of the record: no extreme is exceeded.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

_FIRST_TRY = 300  # points; the means of thousands nearly always lie within the hull of some hundred
_MATCHED = 1e-12  # residual of the scaled means: rounding


def condense(columns: FloatArray, weight: FloatArray) -> tuple[IndexArray, FloatArray]:
    """Few points with the weight, the means and the mean products of all.

    Parameters
    ----------
    columns : ndarray, shape (n, c)
        One row per point; any unit. [-]
    weight : ndarray, shape (n,)
        Not below zero. [-]

    Returns
    -------
    index : ndarray of int, shape (m,)
        Points kept, at most ``(c + 1)(c + 2)/2``. [-]
    kept_weight : ndarray, shape (m,)
        Their weights; the sum is that of `weight`. [-]

    Notes
    -----
    Lawson & Hanson's algorithm for least squares with weights not below zero ends at such a set. The columns
    are centred and scaled first, so that the match is to rounding in each.
    """
    total = weight.sum()
    centre = weight @ columns / total
    spread = np.abs(columns - centre).max(axis=0)
    moving = spread > 0.0
    z = (columns[:, moving] - centre[moving]) / spread[moving]
    count = z.shape[1]
    pairs = [z[:, i] * z[:, j] for i in range(count) for j in range(i, count)]
    design = np.stack([np.ones(len(z)), *z.T, *pairs])
    if len(z) <= len(design):
        return np.arange(len(z)), weight
    wanted = design @ (weight / total)
    return _fitting(design, wanted, total)


def _fitting(design: FloatArray, wanted: FloatArray, total: float) -> tuple[IndexArray, FloatArray]:
    """Weights that give the wanted sums; looked for among few of the points first."""
    from scipy.optimize import nnls

    count = design.shape[1]
    outer = np.unique(np.concatenate([design.argmax(axis=1), design.argmin(axis=1)]))
    step = max(1, count // _FIRST_TRY)
    while True:
        tried = np.union1d(np.arange(0, count, step), outer)
        found, residual = nnls(design[:, tried], wanted, maxiter=100 * len(design))
        if step == 1 or residual <= _MATCHED:
            break
        step = max(1, step // 4)
    kept = np.flatnonzero(found > 0.0)
    return tried[kept], found[kept] * total
