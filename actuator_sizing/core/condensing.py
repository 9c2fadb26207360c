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
_ROUNDS = 30  # per moment; some two are the rule


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
    The algorithm of Lawson and Hanson for least squares with weights not below zero (Solving Least Squares
    Problems, ch. 23, quoted from memory) ends at such a set. The columns are centred and scaled first, so
    that the match is to rounding in each.
    """
    total = weight.sum()
    z = np.array(columns.T, order="C")  # sums along a row are quick
    z -= (z @ weight / total)[:, None]
    spread = np.maximum(z.max(axis=1), -z.min(axis=1))
    z = z[spread > 0.0] / spread[spread > 0.0, None]
    if z.shape[1] <= (len(z) + 1) * (len(z) + 2) // 2:
        return np.arange(z.shape[1]), weight
    share = weight / total
    products = (z * share) @ z.T
    wanted = np.concatenate([[1.0], z @ share, products[np.triu_indices(len(z))]])
    index, kept = _fitting(z, wanted)
    return index, kept * total


def _moments(z: FloatArray) -> FloatArray:
    """One, the columns and their products at each point, shape (m, n)."""
    count = len(z)
    return np.stack([np.ones(z.shape[1]), *z, *(z[i] * z[j] for i in range(count) for j in range(i, count))])


def _fitting(z: FloatArray, wanted: FloatArray) -> tuple[IndexArray, FloatArray]:
    """Weights that give the wanted sums; looked for among few of the points first."""
    count = z.shape[1]
    outer = np.concatenate([z.argmax(axis=1), z.argmin(axis=1)])
    step = max(1, count // _FIRST_TRY)
    while True:
        tried = np.unique(np.concatenate([np.arange(0, count, step), outer]))
        kept, found, residual = _not_below_zero(_moments(z[:, tried]), wanted)
        if step == 1 or residual <= _MATCHED:
            return tried[kept], found
        step = max(1, step // 4)


def _not_below_zero(design: FloatArray, wanted: FloatArray) -> tuple[IndexArray, FloatArray, float]:
    """Columns with weights above zero whose sum comes nearest to `wanted`, and how far it stays away."""
    chosen: list[int] = []
    weights: FloatArray = np.zeros(0)
    barred = np.zeros(design.shape[1], dtype=bool)  # of no help, by rounding
    for _ in range(_ROUNDS * len(wanted)):
        missing = wanted - design[:, chosen] @ weights
        residual = float(np.linalg.norm(missing))
        gain = missing @ design
        gain[chosen] = -np.inf
        gain[barred] = -np.inf
        best = int(np.argmax(gain))
        if residual <= _MATCHED or not gain[best] > 0.0:
            break
        chosen, weights = [*chosen, best], np.append(weights, 0.0)
        while True:
            free = np.linalg.lstsq(design[:, chosen], wanted, rcond=None)[0]
            if free.min() > 0.0:
                weights = np.asarray(free, dtype=np.float64)
                break
            falling = free <= 0.0
            reach = np.min(weights[falling] / np.maximum(weights[falling] - free[falling], 1e-300))
            weights = np.maximum(weights + reach * (free - weights), 0.0)
            stays = ~falling | (weights > 1e-15)
            if stays.all():
                stays[np.argmin(weights)] = False
            if not stays[-1] and reach == 0.0:
                barred[best] = True
            chosen = [c for c, stay in zip(chosen, stays, strict=True) if stay]
            weights = weights[stays]
    return (
        np.array(chosen, dtype=np.intp),
        weights,
        float(np.linalg.norm(wanted - design[:, chosen] @ weights)),
    )
