"""How copper, magnets and insulation change with temperature."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

#: Temperature at which a straight line through the resistance of the metal would reach zero, with the sign
#: turned: ``R ∝ constant + ϑ``. IEC 60034-1, temperature rise by the resistance method. [K]
COPPER_CONSTANT_K = 235.0
ALUMINIUM_CONSTANT_K = 225.0

#: Highest temperature of the insulation by letter. IEC 60085. [°C]
THERMAL_CLASSES: dict[str, float] = {
    "A": 105.0,
    "E": 120.0,
    "B": 130.0,
    "F": 155.0,
    "H": 180.0,
    "N": 200.0,
    "R": 220.0,
}

#: Typical reversible change of remanence, hence of torque constant, per kelvin. Handbook values: the
#: spread between grades is about ±20 %, so a figure of the supplier goes before these. [1/K]
MAGNET_COEFFICIENTS_PER_K: dict[str, float] = {
    "NdFeB": -0.0011,
    "ferrite": -0.002,
    "SmCo": -0.0004,
    "AlNiCo": -0.0002,
}

#: Life of insulation halves for each step of this size. Montsinger (1930), rule of thumb. [K]
LIFE_HALVING_K = 10.0


def _plain(value: Any) -> Any:
    """Turn a zero-dimensional result into a float."""
    return float(value) if np.ndim(value) == 0 else value


def resistance_factor(
    temperature_degc: ArrayLike, reference_degc: ArrayLike, constant_k: ArrayLike = COPPER_CONSTANT_K
) -> Any:
    """Resistance at a temperature over resistance at the reference temperature.

    Parameters
    ----------
    temperature_degc : array_like
        Temperature of the conductor. [°C]
    reference_degc : array_like
        Temperature at which the resistance is stated. [°C]
    constant_k : array_like
        235 for copper, 225 for aluminium. [K]

    Returns
    -------
    float or ndarray
        ``(constant + ϑ) / (constant + ϑ_ref)``. [-]

    Notes
    -----
    IEC 60034-1, resistance method. IEC 60228 uses 234.5 K for copper, which differs by less than 0.1 %
    of the resistance up to 150 °C.

    Examples
    --------
    >>> resistance_factor(120.0, 20.0)
    1.3922
    """
    constant = np.asarray(constant_k, dtype=float)
    factor = (constant + np.asarray(temperature_degc, dtype=float)) / (
        constant + np.asarray(reference_degc, dtype=float)
    )
    return _plain(factor)


def resistance_coefficient(reference_degc: ArrayLike, constant_k: ArrayLike = COPPER_CONSTANT_K) -> Any:
    """Temperature coefficient of resistance that belongs to a reference temperature.

    Parameters
    ----------
    reference_degc : array_like
        Temperature at which the resistance is stated. [°C]
    constant_k : array_like
        235 for copper, 225 for aluminium. [K]

    Returns
    -------
    float or ndarray
        ``1 / (constant + ϑ_ref)``: the same straight line as `resistance_factor`. [1/K]

    Notes
    -----
    IEC 60034-1, resistance method, written as ``1 + α (ϑ − ϑ_ref)``.

    Examples
    --------
    >>> resistance_coefficient(20.0)
    0.003922
    """
    return _plain(1.0 / (np.asarray(constant_k, dtype=float) + np.asarray(reference_degc, dtype=float)))


def temperature_from_resistance(
    resistance_ratio: ArrayLike, cold_degc: ArrayLike, constant_k: ArrayLike = COPPER_CONSTANT_K
) -> Any:
    """Winding temperature from the ratio of hot to cold resistance.

    Parameters
    ----------
    resistance_ratio : array_like
        Hot resistance over cold resistance. [-]
    cold_degc : array_like
        Temperature of the winding at the cold measurement. [°C]
    constant_k : array_like
        235 for copper, 225 for aluminium. [K]

    Returns
    -------
    float or ndarray
        Mean temperature of the winding, hot. [°C]

    Notes
    -----
    IEC 60034-1, resistance method: ``(c + ϑ₂)/(c + ϑ₁) = R₂/R₁``.

    Examples
    --------
    >>> temperature_from_resistance(1.56 / 1.2, 22.0)
    99.1
    """
    constant = np.asarray(constant_k, dtype=float)
    hot = (
        np.asarray(resistance_ratio, dtype=float) * (constant + np.asarray(cold_degc, dtype=float)) - constant
    )
    return _plain(hot)


def magnet_factor(
    temperature_degc: ArrayLike, reference_degc: ArrayLike, coefficient_per_k: ArrayLike
) -> Any:
    """Torque constant at a magnet temperature over torque constant at the reference temperature.

    Parameters
    ----------
    temperature_degc : array_like
        Temperature of the magnet. [°C]
    reference_degc : array_like
        Temperature at which the torque constant is stated. [°C]
    coefficient_per_k : array_like
        Relative change of remanence, zero or negative; see `MAGNET_COEFFICIENTS_PER_K`. [1/K]

    Returns
    -------
    float or ndarray
        ``1 + a (ϑ − ϑ_ref)``; the back-EMF constant follows the same factor. [-]

    Notes
    -----
    Reversible part only; near the demagnetisation knee it does not hold. First-order form of the
    magnet handbooks.

    Examples
    --------
    >>> magnet_factor(120.0, 20.0, -0.0011)
    0.89
    """
    rise = np.asarray(temperature_degc, dtype=float) - np.asarray(reference_degc, dtype=float)
    return _plain(1.0 + np.asarray(coefficient_per_k, dtype=float) * rise)


def insulation_life_factor(temperature_degc: ArrayLike, class_degc: ArrayLike) -> Any:
    """Life of the insulation relative to its life at the temperature of its class; a rule of thumb.

    Parameters
    ----------
    temperature_degc : array_like
        Temperature at which the winding lives. [°C]
    class_degc : array_like
        Temperature of the thermal class. [°C]

    Returns
    -------
    float or ndarray
        ``2^((ϑ_class − ϑ)/10)``: 2 at 10 K below the class, 0.5 at 10 K above. [-]

    Notes
    -----
    Montsinger (1930). Not a guarantee: it orders alternatives, it does not predict a life.

    Examples
    --------
    >>> insulation_life_factor(145.0, 155.0)
    2.0
    """
    reserve = np.asarray(class_degc, dtype=float) - np.asarray(temperature_degc, dtype=float)
    return _plain(np.exp2(reserve / LIFE_HALVING_K))
