"""Heat in closed form, and the one place from which the thermal functions are imported."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from actuator_sizing.core.thermal_network import HeatLoss, ThermalNetwork
from actuator_sizing.core.thermal_periodic import PeriodicState, periodic_state
from actuator_sizing.core.thermal_pieces import subpiece_counts, subpiece_durations, subpiece_means

__all__ = [
    "HeatLoss",
    "PeriodicState",
    "ThermalNetwork",
    "altitude_factor",
    "continuous_copper_loss",
    "periodic_state",
    "subpiece_counts",
    "subpiece_durations",
    "subpiece_means",
]

#: Up to this altitude the permissible rise is not reduced. IEC 60034-1, reference site (from memory). [m]
REFERENCE_ALTITUDE_M = 1000.0
_RISE_LOST_PER_M = 0.01 / 100.0


def altitude_factor(altitude_m: ArrayLike) -> Any:
    """Permissible rise at an altitude over permissible rise up to 1000 m.

    Parameters
    ----------
    altitude_m : array_like
        Height of the site above sea level; meant for sites up to about 4000 m. [m]

    Returns
    -------
    float or ndarray
        1 up to 1000 m, then 1 % less per 100 m. Divide the housing resistance by it. [-]

    Notes
    -----
    Common practice around IEC 60034-1, coolant kept at its reference temperature (from memory). The
    straight line is not meant far above 4000 m and reaches zero at 11 000 m.

    Examples
    --------
    >>> altitude_factor(2500.0)
    0.85
    """
    above = np.maximum(np.asarray(altitude_m, dtype=float) - REFERENCE_ALTITUDE_M, 0.0)
    factor = 1.0 - _RISE_LOST_PER_M * above
    return float(factor) if np.ndim(factor) == 0 else factor


def continuous_copper_loss(
    rise_permitted_k: ArrayLike,
    winding_resistance_k_w: ArrayLike,
    housing_resistance_k_w: ArrayLike,
    speed_loss_w: ArrayLike,
) -> Any:
    """Copper loss that holds the winding just at its permitted rise; arguments broadcast.

    Parameters
    ----------
    rise_permitted_k : array_like
        Permitted steady rise of the winding over ambient. [K]
    winding_resistance_k_w : array_like
        Winding to housing; with one body, the total to ambient. [K/W]
    housing_resistance_k_w : array_like
        Housing to ambient; NaN: one body. [K/W]
    speed_loss_w : array_like
        Friction and iron loss at the speed in question. [W]

    Returns
    -------
    float or ndarray
        ``(ΔT − R_2 P_ω)/(R_1 + R_2)``, with one body ``ΔT/R_1 − P_ω``; negative where the speed loss alone
        is too much. At the temperatures of that state, hence with the hot resistance. [W]

    Notes
    -----
    Steady balance of the two-body network; derived from first principles.

    Examples
    --------
    >>> continuous_copper_loss(100.0, 1.0, 1.5, 10.0)
    34.0
    """
    R_1, R_2 = (
        np.asarray(winding_resistance_k_w, dtype=float),
        np.asarray(housing_resistance_k_w, dtype=float),
    )
    one_body = np.isnan(R_2)
    total = R_1 + np.where(one_body, 0.0, R_2)
    by_speed = np.where(one_body, R_1, R_2) * np.asarray(speed_loss_w, dtype=float)
    loss = (np.asarray(rise_permitted_k, dtype=float) - by_speed) / total
    return float(loss) if np.ndim(loss) == 0 else loss
