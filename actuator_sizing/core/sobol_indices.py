"""Variance-based sensitivity: how much of the spread of a result each group of inputs explains."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_NOTHING = 1e-12  # a spread below this part of the value is rounding


@dataclass(frozen=True)
class Indices:
    """Sensitivity of M results to G groups of inputs; NaN for a result that does not spread.

    Attributes
    ----------
    first, total : ndarray, shape (M, G)
        Share of the variance that a group explains alone, and with all its interactions. [-]
    first_error, total_error : ndarray, shape (M, G)
        Standard errors. [-]
    """

    first: FloatArray
    total: FloatArray
    first_error: FloatArray
    total_error: FloatArray


def exchanged(a: FloatArray, b: FloatArray, groups: tuple[tuple[int, ...], ...]) -> FloatArray:
    """Rows of A with the columns of one group taken from B, for each group.

    Parameters
    ----------
    a, b : ndarray, shape (n, d)
        Two independent designs of independent inputs. [-]
    groups : tuple of tuple of int
        Columns of each group. [-]

    Returns
    -------
    ndarray, shape (G, n, d)
        The designs ``A_B^(i)``. [-]
    """
    mixed = np.repeat(a[None], len(groups), axis=0)
    for index, columns in enumerate(groups):
        mixed[index][:, columns] = b[:, columns]
    return mixed


def sobol_indices(
    first_results: FloatArray, second_results: FloatArray, mixed_results: FloatArray
) -> Indices:
    """First-order and total indices from replicated designs.

    Parameters
    ----------
    first_results, second_results : ndarray, shape (R, n, M)
        Results on the designs A and B of R independent replicates. [-]
    mixed_results : ndarray, shape (R, G, n, M)
        Results on the designs ``A_B^(i)`` of `exchanged`. [-]

    Returns
    -------
    Indices
        Means over the replicates, and the standard error of that mean. [-]

    Notes
    -----
    First order ``V_i = mean f_B (f_ABi − f_A)`` (Saltelli et al., Computer Physics Communications 181 (2010) 259),
    total ``E_i = ½ mean (f_A − f_ABi)²`` (Jansen, Computer Physics Communications 117 (1999) 35), both from memory,
    over the variance of A and B together, replicate by replicate. Results are centred first, which changes no index
    and takes the mean's share out of the error.
    """
    replicates = len(first_results)
    both = np.concatenate([first_results, second_results], axis=1)
    middle = both.mean(axis=(0, 1))
    variance = ((both - middle) ** 2).mean(axis=1)  # (R, M)
    spreads = np.sqrt(variance.mean(axis=0)) > _NOTHING * np.abs(middle)
    a, b, mixed = (f - middle for f in (first_results, second_results, mixed_results))
    with np.errstate(divide="ignore", invalid="ignore"):
        scale = np.where(spreads, variance, np.nan)[:, None]  # of each replicate: its errors cancel in part
        first = (b[:, None] * (mixed - a[:, None])).mean(axis=2) / scale  # (R, G, M)
        total = 0.5 * ((a[:, None] - mixed) ** 2).mean(axis=2) / scale
    error = [each.std(axis=0, ddof=1) / np.sqrt(replicates) for each in (first, total)]
    return Indices(first.mean(axis=0).T, total.mean(axis=0).T, error[0].T, error[1].T)
