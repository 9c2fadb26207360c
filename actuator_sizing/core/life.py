"""Equivalent loads and rating lives of what rolls: bearings, ball screws, gears."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import integrate

FloatArray = NDArray[np.float64]

BALL_EXPONENT = 3.0  # ball bearings and ball screws, ISO 281 and ISO 3408-5; gears by common practice
ROLLER_EXPONENT = 10.0 / 3.0  # roller bearings, ISO 281


def equivalent_load(
    duration_s: FloatArray, speed_rad_s: FloatArray, load: FloatArray, exponent: float
) -> tuple[float, float]:
    """Constant load that wears as much as a varying one: weighted by revolutions.

    Parameters
    ----------
    duration_s : ndarray, shape (P,)
        Length of each smooth piece. [s]
    speed_rad_s : ndarray, shape (P, K)
        Speed of the shaft at the nodes of each piece. [rad/s]
    load : ndarray, shape (P, K)
        Force or torque, either sign. [-]
    exponent : float
        3 for gears, ball screws and ball bearings, 10/3 for roller bearings. [-]

    Returns
    -------
    load : float
        ``(∫ |ω| |F|^p dt / ∫ |ω| dt)^{1/p}`` in the unit of the load; zero for a shaft that never turns. [-]
    angle_rad : float
        Angle turned per cycle, both directions added. [rad]

    Notes
    -----
    Weighting by revolutions as in the equivalent load of ISO 3408-5; for gears common practice.

    Examples
    --------
    >>> import numpy as np
    >>> speed = np.full((2, 3), 100.0)
    >>> torque = np.array([[10.0] * 3, [20.0] * 3])
    >>> equivalent_load(np.array([1.0, 1.0]), speed, torque, 3.0)[0]
    16.5096
    """
    turned = float(integrate(duration_s, np.abs(speed_rad_s)))
    if turned == 0.0:
        return 0.0, 0.0
    # Scaled by the largest load: the cube of a very small or large one would leave the number range.
    scale = float(np.max(np.abs(load)))
    if scale == 0.0:
        return 0.0, turned
    worked = float(integrate(duration_s, np.abs(speed_rad_s) * np.abs(load / scale) ** exponent))
    return scale * (worked / turned) ** (1.0 / exponent), turned


def rating_life(rating: FloatArray, load: FloatArray, exponent: FloatArray | float) -> FloatArray:
    """Basic rating life, reached by nine of ten.

    Parameters
    ----------
    rating : ndarray
        Dynamic load rating, in the unit of the load. [-]
    load : ndarray
        Equivalent load. [-]
    exponent : ndarray or float
        3 for balls, 10/3 for rollers. [-]

    Returns
    -------
    ndarray
        ``L10 = 10⁶ (C/P)^p`` revolutions; infinite without load. [-]

    Notes
    -----
    ISO 281 for bearings, ISO 3408-5 for ball screws, both in the form that public texts give.

    Examples
    --------
    >>> float(rating_life(2.0, 1.0, 3.0))
    8000000.0
    """
    with np.errstate(divide="ignore", over="ignore"):
        return np.asarray(1e6 * (np.asarray(rating, dtype=float) / load) ** exponent)


def stated_life(
    life_s: FloatArray,
    stated_load: FloatArray,
    stated_speed_rad_s: FloatArray,
    load: FloatArray,
    speed_rad_s: FloatArray,
    exponent: FloatArray | float,
) -> FloatArray:
    """Life under another load and speed than those that a stated life belongs to.

    Parameters
    ----------
    life_s : ndarray
        Stated life. [s]
    stated_load : ndarray
        Load that it belongs to, in any unit. [-]
    stated_speed_rad_s : ndarray
        Speed that it belongs to. [rad/s]
    load : ndarray
        Equivalent load, in the same unit. [-]
    speed_rad_s : ndarray
        Mean speed. [rad/s]
    exponent : ndarray or float
        3 for balls, 10/3 for rollers. [-]

    Returns
    -------
    ndarray
        ``L (F_L/F)^p ω_L/ω``: ISO 281 twice; infinite without load or speed. [s]
    """
    with np.errstate(divide="ignore", over="ignore", invalid="ignore"):
        life = life_s * (stated_load / load) ** exponent * stated_speed_rad_s / speed_rad_s
    idle = (np.asarray(load) == 0.0) | (np.asarray(speed_rad_s) == 0.0)
    return np.asarray(np.where(idle & ~np.isnan(life_s), np.inf, life))
