"""Heat in closed form, and the one place from which the thermal functions are imported."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from actuator_sizing.core.thermal_network import FloatArray, HeatLoss, ThermalNetwork
from actuator_sizing.core.thermal_periodic import PeriodicState, periodic_state
from actuator_sizing.core.thermal_pieces import subpiece_counts, subpiece_durations, subpiece_means
from actuator_sizing.core.warm_up import (
    TemperatureCourse,
    WarmUp,
    temperature_course,
    temperatures_after,
    warm_up,
)

__all__ = [
    "HeatLoss",
    "PeriodicState",
    "SteadyState",
    "TemperatureCourse",
    "ThermalNetwork",
    "WarmUp",
    "altitude_factor",
    "continuous_copper_loss",
    "periodic_state",
    "steady_state",
    "subpiece_counts",
    "subpiece_durations",
    "subpiece_means",
    "temperature_course",
    "temperatures_after",
    "warm_up",
]

#: Up to this altitude the permissible rise is not reduced. IEC 60034-1, reference site (from memory). [m]
REFERENCE_ALTITUDE_M = 1000.0
_RISE_LOST_PER_M = 0.01 / 100.0
_MOST_ITERATIONS = 60


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


@dataclass(frozen=True)
class SteadyState:
    """Steady state of candidates under constant loss; each field has shape (B,).

    Attributes
    ----------
    has_equilibrium : ndarray of bool
        Whether a steady state exists; False: thermal runaway, or not known.
    winding_degc, housing_degc : ndarray
        Temperatures; NaN without equilibrium, the housing also with one body. [°C]
    copper_loss_w : ndarray
        Copper loss at those temperatures. [W]
    loop_gain : ndarray
        Further loss that a loss causes through temperature; ≥ 1 is runaway. [-]
    """

    has_equilibrium: NDArray[np.bool_]
    winding_degc: FloatArray
    housing_degc: FloatArray
    copper_loss_w: FloatArray
    loop_gain: FloatArray


def steady_state(network: ThermalNetwork, loss: HeatLoss, ambient_degc: float) -> SteadyState:
    """Steady state under the mean loss of the cycle, without ripple.

    Parameters
    ----------
    network, loss : ThermalNetwork, HeatLoss
        As for `periodic_state`; only the means over the cycle count.
    ambient_degc : float
        Temperature of the surroundings. [°C]

    Returns
    -------
    SteadyState
        Fields of shape (B,).

    Notes
    -----
    Balance ``P = q r(ϑ(P))`` in the one unknown P, with ``ϑ_h = ϑ_a + R_2 (P + P_ω)`` and
    ``ϑ_w = ϑ_h + R_1 P``. Without magnet term it is linear, ``P = q r_0/(1 − g)`` with the loop gain
    ``g = α q (R_1 + R_2)``; with it the right side is convex, and Newton from P = 0 rises to the least
    root if there is one. Stands for the periodic state where the cycle is short against the winding's
    time constant. Derived from first principles.
    """
    duration = np.asarray(loss.duration_s, dtype=float)
    q, by_speed = (column @ duration / duration.sum() for column in (loss.copper_loss_w, loss.speed_loss_w))
    two = network.has_housing
    R_total, R_speed = network.total_resistance_k_w, network.speed_resistance_k_w
    R_magnet = np.where(two, R_speed, R_total)
    alpha, beta = loss.resistance_coefficient_per_k, loss.magnet_coefficient_per_k
    P = np.zeros_like(q)
    lost = ~np.isfinite(q + by_speed + R_total + alpha + beta)
    with np.errstate(all="ignore"):
        for _ in range(_MOST_ITERATIONS):
            winding = ambient_degc + R_total * P + R_speed * by_speed
            magnet = 1.0 + beta * (
                ambient_degc + R_magnet * P + R_speed * by_speed - loss.magnet_reference_degc
            )
            copper = 1.0 + alpha * (winding - loss.resistance_reference_degc)
            gain = q * (alpha * R_total - 2.0 * beta * R_magnet * copper / magnet) / magnet**2
            move = (q * copper / magnet**2 - P) / (1.0 - gain)
            lost |= ~(gain < 1.0) | ~(magnet > 0.0) | ~np.isfinite(move)
            P = np.where(lost, P, P + move)
            if np.all(lost | (np.abs(move) <= 1e-13 * np.abs(P))):
                break
    temperatures = [
        np.where(lost, np.nan, ambient_degc + R * P + R_speed * by_speed) for R in (R_total, R_magnet)
    ]
    housing = np.where(two, temperatures[1], np.nan)
    return SteadyState(~lost, temperatures[0], housing, np.where(lost, np.nan, P), gain)
