"""A smooth periodic motion from samples: a spline with even knots, fitted with a stated cut-off.

Everything here is linear in the samples and holds for uneven sampling. Even knots make every B-spline the same
curve, moved; its six polynomials are one small matrix.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

DEGREE = 5  # of the spline of position: its acceleration is smooth
_PER_KNOT = 24  # groups of samples between two knots that are kept; denser samples are averaged in groups
_LEAST = 1e-12  # part of the largest diagonal element that keeps what the samples do not decide at its least


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

    @cached_property
    def _polynomials(self) -> FloatArray:
        """Coefficients of each knot interval in powers of its local coordinate 0 to 1, shape (6, n)."""
        n = len(self.coefficients)
        neighbours = self.coefficients[(np.arange(n)[:, None] + np.arange(DEGREE + 1)) % n]
        return np.ascontiguousarray((neighbours @ basis_polynomials(DEGREE)).T)

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
        n = len(self.coefficients)
        at = np.clip(time_s, 0.0, self.period_s) * (n / self.period_s)
        knot = np.minimum(at.astype(np.int64), n - 1)
        return self._value(self._polynomials[:, knot], at - knot, time_s, order)

    def kinematics(self, time_s: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Position, speed and acceleration on stretches between knots.

        Parameters
        ----------
        time_s : ndarray, shape (S, K)
            Instants; those of one row lie between two neighbouring knots. [s]

        Returns
        -------
        position, speed, acceleration : ndarray, shape (S, K)
            In m, m/s and m/s², or with rad for m. [-]
        """
        n = len(self.coefficients)
        at = time_s * (n / self.period_s)
        knot = np.clip(at.mean(axis=1).astype(np.int64), 0, n - 1)
        polynomial = self._polynomials[:, knot, None]
        local = at - knot[:, None]
        return (
            self._value(polynomial, local, time_s, 0),
            self._value(polynomial, local, time_s, 1),
            self._value(polynomial, local, time_s, 2),
        )

    def _value(self, polynomial: FloatArray, local: FloatArray, time_s: FloatArray, order: int) -> FloatArray:
        """Horner's scheme for a derivative; coefficients by rising power along the first axis."""
        per_second = len(self.coefficients) / self.period_s
        powers = np.arange(DEGREE + 1)
        factor = np.prod([powers - j for j in range(order)], axis=0) * np.ones(DEGREE + 1)
        value = factor[-1] * polynomial[-1]
        for power in range(DEGREE - 1, order - 1, -1):
            value = value * local + factor[power] * polynomial[power]
        if order == 0:
            return np.asarray(value + (self.drift / self.period_s) * time_s)
        value = value * per_second**order
        return np.asarray(value + self.drift / self.period_s) if order == 1 else np.asarray(value)


@lru_cache(maxsize=4)
def basis_polynomials(degree: int) -> FloatArray:
    """Polynomials of the B-splines that are not zero on one interval of even knots.

    Parameters
    ----------
    degree : int
        Of the spline. [-]

    Returns
    -------
    ndarray, shape (degree + 1, degree + 1)
        Row p: coefficients in powers of the local coordinate u from 0 to 1, of the B-spline that began
        ``degree − p`` intervals before. [-]

    Notes
    -----
    Recurrence of Cox and de Boor for even knots:
    ``d N_p^d = (u + d − p) N_{p−1}^{d−1} + (p + 1 − u) N_p^{d−1}`` (de Boor, A Practical Guide to Splines,
    ch. IX, quoted from memory).

    Examples
    --------
    >>> basis_polynomials(1).tolist()  # 1 − u and u
    [[1.0, -1.0], [0.0, 1.0]]
    """
    found = np.ones((1, 1))
    for d in range(1, degree + 1):
        raised = np.zeros((d + 1, d + 1))
        for p in range(d + 1):
            if p > 0:
                raised[p, :d] += (d - p) * found[p - 1]
                raised[p, 1:] += found[p - 1]
            if p < d:
                raised[p, :d] += (p + 1) * found[p]
                raised[p, 1:] -= found[p]
        found = raised / d
    return found


def knots_for(period_s: float, cut_off_hz: float) -> int:
    """Knots in one period for a cut-off: two for each period of that frequency, at least eight [-]."""
    return max(8, int(np.ceil(2.0 * period_s * cut_off_hz)))


def smooth_position(
    time_s: FloatArray,
    value: FloatArray,
    period_s: float,
    cut_off_hz: Sequence[float],
    drift: float,
    order: int = 0,
) -> tuple[PeriodicSpline, ...]:
    """Least-squares periodic splines of position from samples of position or of speed.

    Parameters
    ----------
    time_s : ndarray, shape (n,)
        Ascending instants from 0 to below the period. [s]
    value : ndarray, shape (n,)
        Position [m], or speed [m/s] when `order` is 1. [-]
    period_s : float
        Length of the cycle. [s]
    cut_off_hz : sequence of float
        Frequencies above which nothing is followed, one for each spline: it has two knots for each of the
        periods of that frequency. [Hz]
    drift : float
        Way gained in each period. [m]
    order : int
        0 for samples of position, 1 for samples of speed. [-]

    Returns
    -------
    tuple of PeriodicSpline
        The splines nearest to the samples, each sample weighted with the time it stands for. [-]

    Notes
    -----
    Samples much denser than the knots are averaged in groups first, time and value alike, which is exact for
    a straight line and errs by ``h²/24`` times the curvature over a group of length h, far below the knots'
    own resolution.
    """
    weight = 0.5 * (
        np.diff(time_s, append=time_s[0] + period_s) + np.diff(time_s, prepend=time_s[-1] - period_s)
    )
    target = value - (drift / period_s) * (time_s if order == 0 else 1.0)
    groups = _PER_KNOT * max(knots_for(period_s, frequency) for frequency in cut_off_hz)
    group = (time_s * (groups / period_s)).astype(np.int64)
    first = np.flatnonzero(np.diff(group, prepend=-1))
    if len(first) < len(time_s):
        total = np.add.reduceat(weight, first)
        time_s = np.add.reduceat(weight * time_s, first) / total
        target = np.add.reduceat(weight * target, first) / total
        weight = total
    return tuple(
        _fitted(time_s, target, weight, period_s, knots_for(period_s, frequency), drift, order)
        for frequency in cut_off_hz
    )


def _fitted(
    time_s: FloatArray,
    target: FloatArray,
    weight: FloatArray,
    period_s: float,
    n: int,
    drift: float,
    order: int,
) -> PeriodicSpline:
    """The spline with n knots that is nearest to weighted samples, from its normal equations."""
    at = np.clip(time_s, 0.0, period_s) * (n / period_s)
    knot = np.minimum(at.astype(np.int64), n - 1)
    design = _derivative_basis(order, n / period_s) @ np.vander(at - knot, DEGREE + 1, increasing=True).T
    member = (knot + np.arange(DEGREE + 1)[:, None]) % n  # (6, samples): the B-splines that each one sees
    band = np.zeros((DEGREE + 1, n))  # band[d, i]: product of B-splines i and i + d
    right = np.zeros(n)
    for p in range(DEGREE + 1):
        right += np.bincount(member[p], weight * target * design[p], n)
        for q in range(p, DEGREE + 1):
            band[q - p] += np.bincount(member[p], weight * design[p] * design[q], n)
    # A speed does not know where the axis stands, nor sparse samples every knot: the least position is taken.
    band[0] += _LEAST * band[0].max()
    solved = _solve_periodic(band, right)
    start = PeriodicSpline(period_s, solved, 0.0).values(np.zeros(1))[0]
    return PeriodicSpline(period_s, solved - start, drift)


def _derivative_basis(order: int, per_second: float) -> FloatArray:
    """`basis_polynomials` of a derivative, in as many powers, shape (6, 6)."""
    polynomials = basis_polynomials(DEGREE)
    for _ in range(order):
        slope = np.zeros_like(polynomials)
        slope[:, :-1] = polynomials[:, 1:] * np.arange(1, DEGREE + 1) * per_second
        polynomials = slope
    return polynomials


def _solve_periodic(band: FloatArray, right: FloatArray) -> FloatArray:
    """Solve a symmetric positive definite system whose band closes round the end.

    Blocks of consecutive unknowns, taken alternately from both ends of the ring (0, last, 1, last but one …),
    each meet only their neighbours: the ring becomes a block tridiagonal matrix, solved by block elimination.
    """
    n, width = len(right), DEGREE
    count = n // width
    if count < 4:
        dense = np.zeros((n, n))
        for d, row in enumerate(band):
            i = np.arange(n)
            np.add.at(dense, (i, (i + d) % n), row)
            if d:
                np.add.at(dense, ((i + d) % n, i), row)
        return np.asarray(np.linalg.solve(dense, right))
    ring = np.array_split(np.arange(n), count)  # each at least as wide as the band
    pairs = [(k, count - 1 - k) for k in range((count + 1) // 2)]
    blocks = [np.concatenate([ring[k] for k in dict.fromkeys(pair)]) for pair in pairs]

    def part(rows: NDArray[np.int64], columns: NDArray[np.int64]) -> FloatArray:
        ahead = (columns - rows[:, None]) % n
        behind = (rows[:, None] - columns) % n
        near = np.minimum(ahead, behind)
        first = np.where(ahead <= behind, rows[:, None], columns)
        return np.where(near <= width, band[np.minimum(near, width), first], 0.0)

    diagonal: list[FloatArray] = []
    load: list[FloatArray] = []
    upper: list[FloatArray] = []
    for k, block in enumerate(blocks):
        own, wanted = part(block, block), right[block]
        if k:
            carried = np.linalg.solve(diagonal[-1], np.column_stack([upper[-1], load[-1]]))
            own = own - upper[-1].T @ carried[:, :-1]
            wanted = wanted - upper[-1].T @ carried[:, -1]
        diagonal.append(own)
        load.append(wanted)
        if k + 1 < len(blocks):
            upper.append(part(block, blocks[k + 1]))
    solved = np.empty(n)
    for k in range(len(blocks) - 1, -1, -1):
        wanted = load[k] if k + 1 == len(blocks) else load[k] - upper[k] @ solved[blocks[k + 1]]
        solved[blocks[k]] = np.linalg.solve(diagonal[k], wanted)
    return solved
