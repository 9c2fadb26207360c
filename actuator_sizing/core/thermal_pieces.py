"""Pieces whose loss varies, divided so that the mean loss of a part stands for its course."""

from __future__ import annotations

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import antiderivative_matrix, to_series

FloatArray = NDArray[np.float64]


def subpiece_counts(
    duration_s: FloatArray,
    values: FloatArray,
    winding_time_constant_s: float,
    parts_per_constant: int = 20,
    most: int = 32,
) -> NDArray[np.intp]:
    """How many equal parts each piece needs so that the mean loss of a part stands for its course.

    Parameters
    ----------
    duration_s : ndarray, shape (P,)
        Length of each piece. [s]
    values : ndarray, shape (..., P, K)
        The loss, or anything proportional to it, at Gauss–Lobatto nodes. [-]
    winding_time_constant_s : float
        Smallest winding time constant of the candidates. [s]
    parts_per_constant : int
        Parts per time constant. [-]
    most : int
        Largest number of parts of one piece. [-]

    Returns
    -------
    ndarray, shape (P,)
        Number of parts; 1 where the loss is constant, because the step is exact there. [-]
    """
    spread = np.ptp(values, axis=-1)
    scale = np.max(np.abs(values), axis=-1)
    varies = np.any(spread > 1e-9 * scale, axis=tuple(range(values.ndim - 2)))
    counts = np.ceil(np.asarray(duration_s) * (parts_per_constant / winding_time_constant_s))
    return np.where(varies, np.clip(np.nan_to_num(counts, nan=1.0), 1, most), 1).astype(np.intp)


def subpiece_means(values: FloatArray, counts: NDArray[np.intp]) -> FloatArray:
    """Mean of the interpolant over equal parts of each piece.

    Parameters
    ----------
    values : ndarray, shape (..., P, K)
        Values at Gauss–Lobatto nodes; the unit is the caller's. [-]
    counts : ndarray, shape (P,)
        Number of parts of each piece, as from `subpiece_counts`. [-]

    Returns
    -------
    ndarray, shape (..., S)
        Means of all parts in order, in the unit of `values`; ``S = counts.sum()``. [-]
    """
    nodes = values.shape[-1]
    integral = antiderivative_matrix(nodes) @ to_series(nodes)
    parts = []
    for count in np.unique(counts):
        edges = np.linspace(-1.0, 1.0, int(count) + 1)
        primitive = legendre.legvander(edges, nodes) @ integral  # node values -> integral from −1
        parts.append((count, np.diff(primitive, axis=0) * (0.5 * count)))
    matrices = dict(parts)
    columns = [values[..., piece, :] @ matrices[count].T for piece, count in enumerate(counts)]
    return np.concatenate(columns, axis=-1)


def subpiece_durations(duration_s: FloatArray, counts: NDArray[np.intp]) -> FloatArray:
    """Lengths of the equal parts of each piece [s], shape (S,)."""
    return np.repeat(np.asarray(duration_s, dtype=float) / counts, counts)
