"""Distributions of one input about its value, drawn from normal scores so that inputs may vary together."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

NORMAL, UNIFORM, TRIANGULAR, TRUNCATED = "normal", "uniform", "triangular", "truncated normal"

#: Negative eigenvalue of a correlation matrix that is rounding of the figures typed, and no contradiction.
_ROUNDING = 1e-9


@dataclass(frozen=True)
class Distribution:
    """One input: symmetric about its value.

    Attributes
    ----------
    shape : str
        ``"normal"``, ``"uniform"``, ``"triangular"`` or ``"truncated normal"``.
    centre : float
        The value. [-]
    width : float
        Standard deviation (normal, before truncation) or half width (uniform, triangular). [-]
    truncation : float
        Standard deviations at which a truncated normal distribution ends. [-]
    """

    shape: str
    centre: float
    width: float
    truncation: float = 3.0

    @property
    def bounds(self) -> tuple[float, float]:
        """Smallest and largest value; infinite for a normal distribution. [-]"""
        if self.shape == NORMAL:
            return -np.inf, np.inf
        reach = self.width * (self.truncation if self.shape == TRUNCATED else 1.0)
        return self.centre - reach, self.centre + reach

    @property
    def standard_deviation(self) -> float:
        """Standard deviation of what is drawn. [-]"""
        if self.shape == UNIFORM:
            return float(self.width / np.sqrt(3.0))
        if self.shape == TRIANGULAR:
            return float(self.width / np.sqrt(6.0))
        if self.shape == NORMAL:
            return self.width
        k = self.truncation
        density = np.exp(-0.5 * k * k) / np.sqrt(2.0 * np.pi)
        # 2 Φ(k) − 1 = erf(k/√2); the variance lost with the tails is 2 k φ(k) over it.
        return float(self.width * np.sqrt(1.0 - 2.0 * k * density / math.erf(k / math.sqrt(2.0))))

    def of_scores(self, scores: FloatArray) -> FloatArray:
        """Values whose ranks are those of standard normal scores.

        Parameters
        ----------
        scores : ndarray
            Standard normal scores. [-]

        Returns
        -------
        ndarray
            Values, in the unit of `centre`. [-]

        Notes
        -----
        ``F⁻¹(Φ(z))``, taken from the nearer tail so that far scores keep their digits. First principles.

        Examples
        --------
        >>> import numpy as np
        >>> Distribution("uniform", 10.0, 2.0).of_scores(np.array([-40.0, 0.0, 40.0])).tolist()
        [8.0, 10.0, 12.0]
        """
        if self.shape == NORMAL:
            return np.asarray(self.centre + self.width * scores)
        from scipy.special import ndtr, ndtri

        tail = ndtr(-np.abs(scores))  # at most one half
        if self.shape == UNIFORM:
            distance = 1.0 - 2.0 * tail
        elif self.shape == TRIANGULAR:
            distance = 1.0 - np.sqrt(2.0 * tail)
        else:
            outside = ndtr(-self.truncation)
            distance = -ndtri(outside + tail * (1.0 - 2.0 * outside))
        return np.asarray(self.centre + self.width * np.copysign(distance, scores))


def smallest_eigenvalue(correlation: FloatArray) -> float:
    """Smallest eigenvalue of a correlation matrix of shape (n, n); negative: no inputs can vary like that. [-]"""
    return float(np.linalg.eigvalsh(correlation)[0])


def is_possible(correlation: FloatArray) -> bool:
    """Whether a correlation matrix of shape (n, n) is positive semidefinite, up to rounding. [-]"""
    return smallest_eigenvalue(correlation) >= -_ROUNDING


def mixing_matrix(correlation: FloatArray) -> FloatArray:
    """Matrix L with ``L Lᵀ`` the correlation, so that ``z Lᵀ`` are scores that vary together.

    Parameters
    ----------
    correlation : ndarray, shape (n, n)
        Positive semidefinite, ones on the diagonal; inputs that move as one (±1) are allowed. [-]

    Returns
    -------
    ndarray, shape (n, n)
        Symmetric square root of the matrix: unchanged where inputs are independent. [-]
    """
    values, vectors = np.linalg.eigh(correlation)
    return np.asarray((vectors * np.sqrt(np.maximum(values, 0.0))) @ vectors.T)
