"""Smooth functions on pieces, held by their values at Gauss–Lobatto nodes.

A piece is an interval on which a function is analytic; it is known by its values at `NODES` Legendre–Gauss–
Lobatto nodes, both end points included, so that the two one-sided values at a jump are both kept. Integrals
are exact for polynomials up to degree ``2 NODES − 3``; extrema and roots are those of the interpolant.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

NODES = 16  # relative interpolation error below 1e-10 on half a sine period, products of two included
_DENSE = 65  # points per piece on which extrema and sign changes are bracketed
_NOTHING = 1e-12  # a value this small against the largest one has no sign
_BORDER = 1e-6  # roots closer than this part of a piece to its border are the border (rounding)
_MOST_STEPS = 60  # of a search for a root
_ROUNDING = 4.0 * float(np.finfo(float).eps)  # of a value, against the sum of its terms; of a position


@lru_cache(maxsize=8)
def lobatto(count: int = NODES) -> tuple[FloatArray, FloatArray]:
    """Gauss–Lobatto nodes and weights on [−1, 1].

    Parameters
    ----------
    count : int
        Number of nodes, end points included; at least 3. [-]

    Returns
    -------
    nodes, weights : ndarray, shape (count,)
        Ascending nodes, and weights that sum to 2. [-]

    Notes
    -----
    Nodes are ±1 and the roots of ``P'_{n−1}``; weights ``2 / (n (n−1) P_{n−1}(x)²)``.
    Abramowitz & Stegun, Handbook of Mathematical Functions, 25.4.32 (from memory).

    Examples
    --------
    >>> lobatto(3)[1]
    array([0.3333, 1.3333, 0.3333])
    """
    coefficients = np.zeros(count)
    coefficients[-1] = 1.0
    inner = legendre.legroots(legendre.legder(coefficients))
    nodes = np.concatenate([[-1.0], np.sort(inner.real), [1.0]])
    weights = 2.0 / (count * (count - 1) * legendre.legval(nodes, coefficients) ** 2)
    return nodes, weights


@lru_cache(maxsize=8)
def to_series(count: int = NODES) -> FloatArray:
    """Matrix from node values to Legendre coefficients, shape (count, count). [-]"""
    return np.asarray(np.linalg.inv(legendre.legvander(lobatto(count)[0], count - 1)), dtype=float)


@lru_cache(maxsize=8)
def differentiation_matrix(count: int = NODES) -> FloatArray:
    """Matrix from node values to node values of the derivative on [−1, 1], shape (count, count). [-]"""
    nodes = lobatto(count)[0]
    derivative = legendre.legder(np.eye(count))  # columns: coefficients of each P'_k
    return legendre.legvander(nodes, count - 2) @ derivative @ to_series(count)


@lru_cache(maxsize=8)
def antiderivative_matrix(count: int = NODES) -> FloatArray:
    """Matrix from Legendre coefficients to those of the integral from −1, shape (count + 1, count). [-]"""
    return np.asarray(legendre.legint(np.eye(count), lbnd=-1))


@lru_cache(maxsize=8)
def cumulative_matrix(count: int = NODES) -> FloatArray:
    """Matrix from node values to the integrals from −1 to each node, shape (count, count). [-]"""
    at_nodes = legendre.legvander(lobatto(count)[0], count)
    return np.asarray(at_nodes @ antiderivative_matrix(count) @ to_series(count))


@lru_cache(maxsize=8)
def _dense_matrix(count: int) -> tuple[FloatArray, FloatArray]:
    points = np.cos(np.pi * np.arange(_DENSE - 1, -1, -1) / (_DENSE - 1))
    return points, legendre.legvander(points, count - 1) @ to_series(count)


def interpolate(values: FloatArray, at: FloatArray) -> FloatArray:
    """Interpolant of node values at points of [−1, 1].

    Parameters
    ----------
    values : ndarray, shape (..., K)
        Node values; the unit is the caller's. [-]
    at : ndarray, shape (n,)
        Points on [−1, 1]. [-]

    Returns
    -------
    ndarray, shape (..., n)
        Values at those points, in the unit of `values`. [-]
    """
    count = values.shape[-1]
    return values @ (legendre.legvander(at, count - 1) @ to_series(count)).T


def integrate(duration_s: FloatArray, values: FloatArray) -> FloatArray:
    """Integral over all pieces.

    Parameters
    ----------
    duration_s : ndarray, shape (P,)
        Length of each piece. [s]
    values : ndarray, shape (..., P, K)
        Node values; the unit is the caller's. [-]

    Returns
    -------
    ndarray, shape (...)
        Integral in the unit of `values` times seconds. [-]
    """
    weights = lobatto(values.shape[-1])[1]
    return np.asarray(0.5 * np.einsum("...pk,k,p->...", values, weights, duration_s, optimize=True))


def piece_means(values: FloatArray) -> FloatArray:
    """Mean over each piece: shape (..., P, K) to (..., P), in the unit of `values`. [-]"""
    return np.asarray(0.5 * (values @ lobatto(values.shape[-1])[1]))


def roots(values: FloatArray) -> FloatArray:
    """Roots of the interpolant of one piece inside (−1, 1), borders left out.

    Parameters
    ----------
    values : ndarray, shape (K,)
        Node values. [-]

    Returns
    -------
    ndarray, shape (n,)
        Ascending positions where the interpolant changes sign. [-]

    Notes
    -----
    Roots are eigenvalues of the companion matrix of the Legendre series, so that two close roots are
    both found; one that only touches zero is dropped, since no kink follows from it.
    """
    scale = np.max(np.abs(values))
    if scale == 0.0:
        return np.empty(0)
    series = to_series(len(values)) @ (values / scale)
    if abs(series[0]) > np.sum(np.abs(series[1:])):
        return np.empty(0)
    # Coefficients at rounding level would put spurious roots near the interval.
    keep = np.flatnonzero(np.abs(series) > 1e-13)
    series = series[: keep[-1] + 1]
    if len(series) < 2:
        return np.empty(0)
    found = legendre.legroots(series)
    inside = np.sort(found.real[(np.abs(found.imag) < 1e-7) & (np.abs(found.real) < 1.0 - 2.0 * _BORDER)])
    if not len(inside):
        return np.empty(0)
    borders = np.concatenate([[-1.0], inside, [1.0]])
    middle = legendre.legval(0.5 * (borders[1:] + borders[:-1]), series)
    # A multiple root at a border splits, by rounding, into roots nearby; between them the function is nothing.
    real = np.flatnonzero(np.abs(middle) > _NOTHING)
    changes = real[1:][np.sign(middle[real[1:]]) != np.sign(middle[real[:-1]])]
    return np.asarray(inside[changes - 1])


def largest(values: FloatArray) -> tuple[FloatArray, NDArray[np.intp], FloatArray]:
    """Largest value of the interpolants over all pieces, refined between the nodes.

    Parameters
    ----------
    values : ndarray, shape (B, P, K)
        Node values, one row per candidate. [-]

    Returns
    -------
    maximum : ndarray, shape (B,)
        Largest value, in the unit of `values`. [-]
    piece : ndarray of int, shape (B,)
        Piece in which it lies. [-]
    position : ndarray, shape (B,)
        Where in that piece, on [−1, 1]. [-]

    Notes
    -----
    A piece whose Legendre coefficients sum to less than the largest node value cannot hold the maximum. The
    others are bracketed on a dense Chebyshev grid and refined by Newton's method on the derivative.
    """
    batch, _, count = values.shape
    if count == 2:  # straight lines: at an end
        left, right = values[..., 0], values[..., 1]
        peak = np.maximum(left, right)
        piece = peak.argmax(axis=1)
        rows = np.arange(batch)
        rises = right[rows, piece] > left[rows, piece]
        return peak[rows, piece], piece, np.where(rises, 1.0, -1.0)
    points, dense_matrix = _dense_matrix(count)
    series = values @ to_series(count).T
    ceiling = np.abs(series[..., 1:]).sum(axis=2) + series[..., 0]  # |P_k| ≤ 1
    node_peak = values.max(axis=2)  # exact at piece ends, where the dense grid carries rounding
    best_node = node_peak.max(axis=1)
    spans = np.ptp(values, axis=2)
    flat = spans <= 1e-14 * np.abs(best_node)[:, None]  # nothing to gain between the nodes
    row, column = np.nonzero((ceiling >= best_node[:, None]) & ~flat)
    dense = values[row, column] @ dense_matrix.T  # (n, D)
    top = dense.argmax(axis=1)
    # Between two points of the grid a polynomial of this degree rises by less than this part of its span.
    near = dense[np.arange(len(row)), top] >= best_node[row] - 2e-2 * spans[row, column]
    row, column, top = row[near], column[near], top[near]
    mine = series[row, column]
    x = _newton_extremum(mine, points[top], points)
    refined = series_value(mine.T, x)

    piece = node_peak.argmax(axis=1)
    node = values[np.arange(batch), piece].argmax(axis=1)
    maximum, position = best_node.copy(), lobatto(count)[0][node]
    order = np.argsort(refined, kind="stable")  # the last write below is the largest
    order = order[refined[order] > best_node[row[order]]]
    maximum[row[order]] = refined[order]
    piece[row[order]] = column[order]
    position[row[order]] = x[order]
    return maximum, piece, position


def largest_magnitude(values: FloatArray) -> tuple[FloatArray, NDArray[np.intp], FloatArray]:
    """Largest magnitude over all pieces: `largest` of the square, which has no kink where the sign changes.

    Parameters
    ----------
    values : ndarray, shape (B, P, K)
        Node values, one row per candidate. [-]

    Returns
    -------
    maximum, piece, position : ndarray, shape (B,)
        As in `largest`. [-]
    """
    squared, piece, position = largest(values**2)
    return np.sqrt(np.maximum(squared, 0.0)), piece, position


def _newton_extremum(series: FloatArray, start: FloatArray, grid: FloatArray) -> FloatArray:
    """Newton's method on the derivative, kept within the neighbouring grid points of the start."""
    nearest = np.searchsorted(grid, start)
    low = grid[np.clip(nearest - 1, 0, len(grid) - 1)]
    high = grid[np.clip(nearest + 1, 0, len(grid) - 1)]
    return refined_maximum(series, start, low, high)


def refined_maximum(series: FloatArray, start: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
    """Where Legendre series are largest near a start, by Newton's method on the derivative.

    Parameters
    ----------
    series : ndarray, shape (n, K)
        Coefficients of n series, one per row; the unit is the caller's. [-]
    start, low, high : ndarray, shape (n,)
        Best point of a grid, and its neighbours, which the search does not leave. [-]

    Returns
    -------
    ndarray, shape (n,)
        Positions on [−1, 1]. [-]
    """
    first, second = _derivative_matrices(series.shape[1])
    slope_series, bend_series = (series @ first).T, (series @ second).T
    x = start
    for _ in range(3):  # the grid is within 1/60 of a piece: three steps reach rounding
        slope, bend = series_value(slope_series, x), series_value(bend_series, x)
        move = np.where(bend < 0.0, -slope / np.where(bend < 0.0, bend, 1.0), 0.0)
        x = np.clip(x + move, low, high)
    return x


@lru_cache(maxsize=8)
def _derivative_matrices(count: int) -> tuple[FloatArray, FloatArray]:
    """From Legendre coefficients (in rows) to those of the first and second derivative."""
    first = np.asarray(legendre.legder(np.eye(count)), dtype=float)
    second = np.asarray(legendre.legder(first), dtype=float)
    return first.T, second.T


def series_value(series: FloatArray, x: FloatArray) -> FloatArray:
    """Legendre series evaluated point by point, by Clenshaw's recurrence.

    Parameters
    ----------
    series : ndarray, shape (K, n)
        Coefficients of n series, one per column; the unit is the caller's. [-]
    x : ndarray, shape (n,) or (m, n)
        Where to evaluate each of them, on [−1, 1]. [-]

    Returns
    -------
    ndarray, shape of `x`
        Values, in the unit of `series`. [-]
    """
    shape = np.broadcast_shapes(series.shape[1:], x.shape)
    ahead, now, spare = (np.zeros(shape) for _ in range(3))
    for k in range(len(series) - 1, 0, -1):  # in place: this is the innermost loop of the package
        np.multiply(x, now, out=spare)
        spare *= (2 * k + 1) / (k + 1)
        ahead *= (k + 1) / (k + 2)
        spare += series[k]
        spare -= ahead
        ahead, now, spare = now, spare, ahead
    return np.asarray(series[0] + x * now - 0.5 * ahead)


def signed_integrals(duration_s: FloatArray, values: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Integrals of the positive and of the negative part over all pieces.

    Parameters
    ----------
    duration_s : ndarray, shape (P,)
        Length of each piece. [s]
    values : ndarray, shape (B, P, K)
        Node values, e.g. power in watt. [W]

    Returns
    -------
    positive, negative : ndarray, shape (B,)
        Integral of ``max(f, 0)`` and of ``max(−f, 0)``; both are positive numbers. [J]

    Notes
    -----
    Pieces that change sign are cut at the roots of their interpolant; each part is integrated in closed form.
    """
    count = values.shape[2]
    points, dense_matrix = _dense_matrix(count)
    series = values @ to_series(count).T
    total = series[..., 0] * duration_s  # (B, P): the first coefficient is the mean
    positive = np.maximum(total, 0.0)
    # Where the mean outweighs all the rest there is no change of sign.
    row, column = np.nonzero(np.abs(series[..., 1:]).sum(axis=2) > np.abs(series[..., 0]))
    dense = values[row, column] @ dense_matrix.T
    nothing = 1e-13 * np.abs(dense).max(axis=1, initial=0.0)
    mixed = (dense.min(axis=1, initial=0.0) < -nothing) & (dense.max(axis=1, initial=0.0) > nothing)
    row, column = row[mixed], column[mixed]
    if len(row):
        mine = series[row, column]
        integral = mine @ antiderivative_matrix(count).T  # (n, K + 1)
        parts = _positive_parts(mine, integral, dense[mixed], points)
        positive[row, column] = 0.5 * duration_s[column] * parts
    positive_sum = positive.sum(axis=1)
    return positive_sum, positive_sum - total.sum(axis=1)


def _positive_parts(
    series: FloatArray, integral: FloatArray, dense: FloatArray, points: FloatArray
) -> FloatArray:
    """Integral over [−1, 1] of the positive part of each series that changes sign."""
    result = np.where(dense[:, 0] > 0.0, -0.0, 0.0)
    changes = np.signbit(dense[:, 1:]) != np.signbit(dense[:, :-1])
    row, bracket = np.nonzero(changes)
    low, high = points[bracket], points[bracket + 1]
    f_low, f_high = dense[row, bracket], dense[row, bracket + 1]
    value_series, integral_series = series[row].T, integral[row].T
    secant = low - f_low * (high - low) / (f_high - f_low)
    x = bracketed_roots(value_series, low, high, f_high > f_low, secant)
    area = series_value(integral_series, x)
    rising = f_high > f_low
    # From -1 to 1: each falling root ends a positive stretch (+F), each rising root starts one (-F).
    np.add.at(result, row, np.where(rising, -area, area))
    at_end = integral.sum(axis=1)  # every Legendre polynomial is 1 at 1
    return result + np.where(dense[:, -1] > 0.0, at_end, 0.0)


def bracketed_roots(
    series: FloatArray, low: FloatArray, high: FloatArray, rising: NDArray[np.bool_], start: FloatArray
) -> FloatArray:
    """Root of each Legendre series between two points of unlike sign, to rounding.

    Parameters
    ----------
    series : ndarray, shape (K, n)
        Coefficients of n series, one per column; the unit is the caller's. [-]
    low, high : ndarray, shape (n,)
        Brackets on [−1, 1]. [-]
    rising : ndarray of bool, shape (n,)
        Whether the series is positive at `high`. [-]
    start : ndarray, shape (n,)
        First guess within the bracket. [-]

    Returns
    -------
    ndarray, shape (n,)
        Roots within the brackets. [-]

    Notes
    -----
    Newton's method, halving the bracket where a step would leave it; those that have settled drop out.
    """
    result = np.array(start)
    if not len(result):
        return result
    slopes = _derivative_matrices(len(series))[0].T @ series
    noise = _ROUNDING * np.abs(series).sum(axis=0)
    active, x, low, high = np.arange(len(result)), result, np.array(low), np.array(high)
    for _ in range(_MOST_STEPS):
        value, slope = series_value(series, x), series_value(slopes, x)
        above = (value > 0.0) == rising
        low, high = np.where(above, low, x), np.where(above, x, high)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = x - value / slope
        step = np.where((step >= low) & (step <= high), step, 0.5 * (low + high))
        moving = (np.abs(value) > noise) & (np.abs(step - x) > _ROUNDING)
        result[active] = step
        if not moving.any():
            break
        active, x, rising, noise = active[moving], step[moving], rising[moving], noise[moving]
        low, high, series, slopes = low[moving], high[moving], series[:, moving], slopes[:, moving]
    return result
