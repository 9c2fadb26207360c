"""Which transmission ratios a motor can live with: the closed set that keeps its continuous rating, and the best one.

Air-gap torque through a ratio n is ``T = n A + B/n + C`` at every instant: A what the motor's own inertia and
viscous friction ask per unit of ratio, B the load through the efficiency, C what does not depend on the ratio. Its
mean square is then a polynomial in n and 1/n, and so is the square of a continuous rating that friction and iron
loss reduce with speed. The set where one stays below the other is bounded by roots of one polynomial of the fourth
degree; without friction that is quadratic in n², the published closed form.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_REAL = 1e-7  # imaginary part of a root, relative, that is rounding of a double root
_POLISHES = 3


@dataclass(frozen=True)
class TorqueMoments:
    """Mean products over the cycle of the three parts of the air-gap torque ``n A + B/n + C``.

    Attributes
    ----------
    aa, ab, ac, bb, bc, cc : float
        ``⟨A A⟩`` and so on. Torque times torque, A counted per unit of ratio. [N²·m²]
    """

    aa: float
    ab: float
    ac: float
    bb: float
    bc: float
    cc: float

    def mean_square(self, ratio: FloatArray | float) -> FloatArray:
        """Mean square of the torque at a ratio.

        Parameters
        ----------
        ratio : array_like
            Input turns per output turn. [-]

        Returns
        -------
        ndarray
            ``⟨T²⟩``. [N²·m²]
        """
        n = np.asarray(ratio, dtype=float)
        return np.asarray(
            n**2 * self.aa + 2.0 * n * self.ac + self.cc + 2.0 * self.ab + 2.0 * self.bc / n + self.bb / n**2
        )

    def best_ratio(self) -> float:
        """Ratio of the smallest RMS torque.

        Returns
        -------
        float
            ``(⟨BB⟩/⟨AA⟩)^{1/4}`` without friction; infinite where the motor's inertia costs nothing, zero where the
            load does not. [-]

        Notes
        -----
        Positive root of ``⟨AA⟩ n⁴ + ⟨AC⟩ n³ − ⟨BC⟩ n − ⟨BB⟩ = 0``. For a load of inertia only it is
        ``√(J_load/J_motor)``, the match of inertias.

        Examples
        --------
        >>> TorqueMoments(aa=4.0, ab=0.0, ac=0.0, bb=1024.0, bc=0.0, cc=0.0).best_ratio()
        4.0
        """
        if self.aa <= 0.0:
            return np.inf if self.bb > 0.0 else np.nan
        found = _positive_roots([self.aa, self.ac, 0.0, -self.bc, -self.bb])
        if not len(found):
            return 0.0
        return float(found[self.mean_square(found).argmin()])

    def ratios_within(self, limit: tuple[float, float, float]) -> tuple[tuple[float, float], ...]:
        """Closed set of the ratios whose RMS torque keeps a limit.

        Parameters
        ----------
        limit : tuple of float
            Coefficients of 1, n and n² of the square of the permitted RMS torque: a rating that falls with speed
            has negative ones after the first. [N²·m²]

        Returns
        -------
        tuple of (float, float)
            Intervals of ratios, ascending, both ends included; the last may be unbounded. Empty where no ratio
            keeps it. [-]

        Notes
        -----
        Roots of ``(⟨AA⟩ − l₂) n⁴ + (2⟨AC⟩ − l₁) n³ + (⟨CC⟩ + 2⟨AB⟩ − l₀) n² + 2⟨BC⟩ n + ⟨BB⟩``. Without friction and
        with a constant limit this is the range of ratios of Giberti, Clerici and Cinquemani, The Role of the
        Gearbox in an Automatic Machine, 2012.

        Examples
        --------
        >>> TorqueMoments(aa=1.0, ab=0.0, ac=0.0, bb=4.0, bc=0.0, cc=0.0).ratios_within((5.0, 0.0, 0.0))
        ((1.0, 2.0),)
        """
        l_0, l_1, l_2 = limit
        polynomial = [
            self.aa - l_2,
            2.0 * self.ac - l_1,
            self.cc + 2.0 * self.ab - l_0,
            2.0 * self.bc,
            self.bb,
        ]
        found = _positive_roots(polynomial)
        borders = np.concatenate([[0.0], found, [np.inf]])
        inside = []
        for low, high in zip(borders[:-1], borders[1:], strict=True):
            middle = _between(low, high)
            if np.polyval(polynomial, middle) <= 0.0:
                inside.append((float(low), float(high)))
        # A root that only touches joins two intervals, or is a set of one ratio by itself.
        joined: list[tuple[float, float]] = []
        for low, high in inside:
            if joined and joined[-1][1] == low:
                joined[-1] = (joined[-1][0], high)
            else:
                joined.append((low, high))
        return tuple(joined)


def torque_moments(products: FloatArray, rows: FloatArray, motor: FloatArray) -> TorqueMoments:
    """Moments of one motor on a transmission of unit ratio.

    Parameters
    ----------
    products : ndarray, shape (6, 6)
        Mean products of the six functions of `core.moments`. [-]
    rows : ndarray, shape (4, 6)
        From `core.moments.gearhead_rows` for the transmission with its ratio set to 1. [-]
    motor : ndarray, shape (4,)
        Its row of `core.moments.motor_columns`. [-]

    Returns
    -------
    TorqueMoments
        Acceleration and speed count per unit of ratio, load torque per its inverse. [-]
    """
    weights = motor @ rows
    parts = np.zeros((3, 6))
    for part, functions in enumerate(((0, 5), (1, 2, 3), (4,))):
        parts[part, list(functions)] = weights[list(functions)]
    gram = parts @ products @ parts.T
    return TorqueMoments(
        aa=float(gram[0, 0]),
        ab=float(gram[0, 1]),
        ac=float(gram[0, 2]),
        bb=float(gram[1, 1]),
        bc=float(gram[1, 2]),
        cc=float(gram[2, 2]),
    )


def load_factor(acceleration_rms: float, torque_rms_nm: float, power_rate: float, efficiency: float) -> float:
    """Power rate that a motor must have at least to move a load of this kind through any ratio.

    Parameters
    ----------
    acceleration_rms : float
        RMS acceleration of the driven shaft. [rad/s²]
    torque_rms_nm : float
        RMS torque at the driven shaft. [N·m]
    power_rate : float
        Mean of acceleration times torque there, in W/s. [-]
    efficiency : float
        Of the transmission. [-]

    Returns
    -------
    float
        ``β/η = 2 (α_rms T_rms + ⟨α T⟩)/η``: a frictionless motor has a suitable ratio where the square of its RMS
        torque over its inertia is at least this, in W/s. [-]

    Notes
    -----
    Giberti, Clerici and Cinquemani, The Role of the Gearbox in an Automatic Machine, 2012 (accelerating factor of
    the motor against load factor). It is the mean square of the torque at `TorqueMoments.best_ratio`, over inertia.

    Examples
    --------
    >>> load_factor(60.0, 20.0, 300.0, 1.0)
    3000.0
    """
    return 2.0 * (acceleration_rms * torque_rms_nm + power_rate) / efficiency


def _between(low: float, high: float) -> float:
    if np.isinf(high):
        return 2.0 * low if low > 0.0 else 1.0
    return float(np.sqrt(low * high)) if low > 0.0 else 0.5 * high


def _positive_roots(polynomial: list[float]) -> FloatArray:
    """Positive real roots, ascending, polished by Newton's method."""
    coefficients = np.trim_zeros(np.asarray(polynomial, dtype=float), "f")
    if len(coefficients) < 2:
        return np.empty(0)
    # Scaled so that the first and last coefficients agree: ratios of any size are then near one.
    last = np.flatnonzero(coefficients)[-1]
    scale = abs(coefficients[last] / coefficients[0]) ** (1.0 / last) if last else 1.0
    scaled = coefficients * scale ** np.arange(len(coefficients) - 1, -1, -1.0)
    scaled = scaled / np.max(np.abs(scaled))
    found = np.roots(scaled)
    real = np.sort(found.real[(np.abs(found.imag) <= _REAL * np.abs(found)) & (found.real > 0.0)])
    slope = np.polyder(scaled)
    for _ in range(_POLISHES):
        steep = np.polyval(slope, real)
        step = np.polyval(scaled, real) / np.where(steep == 0.0, 1.0, steep)
        real = np.where(np.abs(step) < 1e-3 * real, real - step, real)
    return np.asarray(real * scale)
