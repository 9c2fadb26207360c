r"""From the conventions of a data sheet to the DC-equivalent model of a motor.

Data sheets differ in which ampere, which volt and which ohm they mean. Everything here follows from three
definitions of the sinusoidal machine, with phase EMF :math:`\hat e = k\,\omega` and current in phase with it:
power :math:`\tfrac32 \hat e \hat i = T\omega`, line-to-line voltage :math:`\sqrt3` times phase voltage,
terminal resistance twice that of the equivalent star's phase.

Current basis codes are those of `core.parameters`; arrays are one entry per motor.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from actuator_sizing.core.materials import resistance_coefficient
from actuator_sizing.core.parameters import BASIS_DC, BASIS_PEAK, BASIS_RMS

FloatArray = NDArray[np.float64]

SQRT2, SQRT3 = np.sqrt(2.0), np.sqrt(3.0)

#: Peak line-to-line volts per volt of each basis; ``"DC"`` is the flat top of a trapezoidal line voltage.
PEAK_LINE_VOLTS: dict[str, float] = {
    "DC": 1.0,
    "peak line-to-line": 1.0,
    "rms line-to-line": float(SQRT2),
    "peak phase": float(SQRT3),
    "rms phase": float(SQRT2 * SQRT3),
}

#: Mean of a line-to-line sine over the 60° in which six-step commutation uses it, per peak.
SIX_STEP_MEAN_OF_SINE = 3.0 / np.pi

_MODEL_FACTOR = {BASIS_DC: 1.0, BASIS_RMS: 1.5, BASIS_PEAK: 0.75}


def model_factor(current_basis: ArrayLike) -> FloatArray:
    r"""DC-equivalent resistance or inductance over its terminal-to-terminal value.

    Parameters
    ----------
    current_basis : array_like of int, shape (n,)
        Current basis of the sheet. [-]

    Returns
    -------
    ndarray, shape (n,)
        1 for a DC basis, 1.5 for A rms, 0.75 for A peak. [-]

    Notes
    -----
    Copper loss :math:`3 R_{ph} I^2 = 1.5 R_{tt} I_{rms}^2 = 0.75 R_{tt} \hat I^2`, since
    :math:`R_{tt} = 2 R_{ph}` for a star and for the star that is equivalent to a delta.
    Derived from first principles.

    Examples
    --------
    >>> model_factor([0, 1, 2])
    array([1.  , 1.5 , 0.75])
    """
    basis = np.asarray(current_basis)
    return np.select([basis == code for code in _MODEL_FACTOR], list(_MODEL_FACTOR.values()), default=np.nan)


def torque_constant_from_back_emf(
    back_emf_v_s_per_rad: ArrayLike, volt_basis: str, current_basis: ArrayLike
) -> FloatArray:
    r"""Torque constant in the current basis of the sheet from a back-EMF constant.

    Parameters
    ----------
    back_emf_v_s_per_rad : array_like, shape (n,)
        Back-EMF constant in the stated volts. [V·s/rad]
    volt_basis : str
        Which volt: a key of `PEAK_LINE_VOLTS`.
    current_basis : array_like of int, shape (n,)
        Which ampere the torque constant is to be per. [-]

    Returns
    -------
    ndarray, shape (n,)
        Torque constant; NaN where a volt that does not exist in such a machine is stated
        (``"DC"`` for a sinusoidal current basis). [N·m/A]

    Notes
    -----
    With :math:`k` in peak line-to-line volts: per A rms :math:`K = k\sqrt{3/2}`, per A peak
    :math:`K = k\sqrt3/2`, both from :math:`3 E I = T\omega`; per A DC :math:`K = 3k/\pi` (six-step
    commutation of a sinusoidal EMF), or :math:`K = k` where the sheet states DC volts, i.e. a brushed machine
    or the flat top of a trapezoidal EMF. Derived from first principles.

    Examples
    --------
    >>> torque_constant_from_back_emf([1.0], "rms line-to-line", [1])
    array([1.7321])
    """
    k = np.asarray(back_emf_v_s_per_rad, dtype=float) * PEAK_LINE_VOLTS[volt_basis]
    basis = np.asarray(current_basis)
    is_dc_volt = volt_basis == "DC"
    per_dc = k if is_dc_volt else k * SIX_STEP_MEAN_OF_SINE
    per_rms = np.full_like(k, np.nan) if is_dc_volt else k * SQRT3 / SQRT2
    return np.select([basis == BASIS_DC, basis == BASIS_RMS], [per_dc, per_rms], default=per_rms / SQRT2)


def ampere_ratio(stated: str, current_basis: ArrayLike) -> FloatArray:
    """Amperes of the row's basis per ampere of the heading, for a sinusoidal current.

    Parameters
    ----------
    stated : str
        Ampere of the heading: ``"rms"`` or ``"peak"``.
    current_basis : array_like of int, shape (n,)
        Ampere of the row. [-]

    Returns
    -------
    ndarray, shape (n,)
        √2 from rms to peak, 1/√2 from peak to rms, 1 where they agree, NaN where the row is DC. A current is
        multiplied by it, a torque constant divided. [-]

    Examples
    --------
    >>> ampere_ratio("rms", [1, 2]).round(4)
    array([1.    , 1.4142])
    """
    basis = np.asarray(current_basis)
    to_rms, to_peak = (1.0, SQRT2) if stated == "rms" else (1.0 / SQRT2, 1.0)
    return np.select([basis == BASIS_RMS, basis == BASIS_PEAK], [to_rms, to_peak], default=np.nan)


def friction_from_no_load(
    torque_constant_nm_per_a: ArrayLike,
    no_load_current_a: ArrayLike,
    no_load_speed_rad_s: ArrayLike,
    viscous_friction_nm_s: ArrayLike,
) -> FloatArray:
    """Constant friction torque from the no-load point.

    Parameters
    ----------
    torque_constant_nm_per_a : array_like, shape (n,)
        Torque constant. [N·m/A]
    no_load_current_a : array_like, shape (n,)
        Current at no load. [A]
    no_load_speed_rad_s : array_like, shape (n,)
        Speed at no load; NaN where not known. [rad/s]
    viscous_friction_nm_s : array_like, shape (n,)
        Stated viscous friction, NaN or 0 where none is stated. [N·m·s/rad]

    Returns
    -------
    ndarray, shape (n,)
        ``K I0 − c ω0``, not below zero; all of ``K I0`` where speed or viscous friction is not known. [N·m]

    Notes
    -----
    One no-load point cannot split the friction: counted as constant it is too large at low speed and too
    small above the no-load speed. First principles.

    Examples
    --------
    >>> friction_from_no_load([0.05], [0.2], [300.0], [1e-5])
    array([0.007])
    """
    total = np.asarray(torque_constant_nm_per_a, dtype=float) * np.asarray(no_load_current_a, dtype=float)
    viscous = np.asarray(viscous_friction_nm_s, dtype=float) * np.asarray(no_load_speed_rad_s, dtype=float)
    return np.asarray(np.maximum(total - np.nan_to_num(viscous, nan=0.0), 0.0))


def thermal_resistance_from_rating(
    resistance_ohm: ArrayLike,
    resistance_reference_degc: ArrayLike,
    resistance_coefficient_per_k: ArrayLike,
    continuous_current_a: ArrayLike,
    winding_limit_degc: ArrayLike,
    ambient_degc: ArrayLike,
) -> FloatArray:
    """Thermal resistance winding to ambient that the continuous rating implies.

    Parameters
    ----------
    resistance_ohm : array_like, shape (n,)
        DC-equivalent resistance at the reference temperature. [Ω]
    resistance_reference_degc : array_like, shape (n,)
        That temperature. [°C]
    resistance_coefficient_per_k : array_like, shape (n,)
        Temperature coefficient there. [1/K]
    continuous_current_a : array_like, shape (n,)
        Continuous current in the same basis. [A]
    winding_limit_degc : array_like, shape (n,)
        Winding temperature that the rating just reaches. [°C]
    ambient_degc : array_like, shape (n,)
        Ambient of the rating. [°C]

    Returns
    -------
    ndarray, shape (n,)
        ``(ϑ_limit − ϑ_ambient) / (R(ϑ_limit) I²)``; NaN where that is not positive. [K/W]

    Notes
    -----
    Copper loss only, as at standstill; common practice where a sheet states no thermal resistance.

    Examples
    --------
    >>> thermal_resistance_from_rating([1.0], [25.0], [1 / 260], [5.0], [155.0], [25.0])
    array([3.4667])
    """
    limit, ambient = np.asarray(winding_limit_degc, dtype=float), np.asarray(ambient_degc, dtype=float)
    rise = limit - np.asarray(resistance_reference_degc, dtype=float)
    R = np.asarray(resistance_ohm, dtype=float) * (1.0 + np.asarray(resistance_coefficient_per_k) * rise)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        result = (limit - ambient) / (R * np.asarray(continuous_current_a, dtype=float) ** 2)
        return np.asarray(np.where(np.isfinite(result) & (result > 0.0), result, np.nan))


def copper_coefficient(reference_degc: ArrayLike) -> FloatArray:
    """Temperature coefficient of copper at each reference temperature, shape (n,). [1/K]."""
    return np.asarray(resistance_coefficient(np.asarray(reference_degc, dtype=float)), dtype=float)


def motor_constant(torque_constant_nm_per_a: ArrayLike, resistance_ohm: ArrayLike) -> FloatArray:
    """Motor constant ``K/√R`` from torque constant and DC-equivalent resistance; the same in every basis.

    Parameters
    ----------
    torque_constant_nm_per_a : array_like
        Torque constant in any current basis. [N·m/A]
    resistance_ohm : array_like
        DC-equivalent resistance in the same basis. [Ω]

    Returns
    -------
    ndarray
        Torque per square root of copper loss. [N·m/√W]

    Examples
    --------
    >>> motor_constant([0.5, 1.0], [3.0, 12.0])
    array([0.2887, 0.2887])
    """
    K, R = np.asarray(torque_constant_nm_per_a, dtype=float), np.asarray(resistance_ohm, dtype=float)
    return np.asarray(K / np.sqrt(R), dtype=float)
