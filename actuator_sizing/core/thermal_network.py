"""Thermal data and losses of candidates, columns as the thermal functions take them."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class ThermalNetwork:
    """Thermal data of candidates; one body where the housing pair is NaN. Each field has shape (B,).

    Attributes
    ----------
    winding_resistance_k_w : ndarray, shape (B,)
        Winding to housing; with one body, the total to ambient. [K/W]
    housing_resistance_k_w : ndarray, shape (B,)
        Housing to ambient, altitude included; NaN: one body. [K/W]
    winding_capacity_j_k : ndarray, shape (B,)
        Time constant of the winding over its resistance; with one body, of the only body. [J/K]
    housing_capacity_j_k : ndarray, shape (B,)
        Time constant of the housing over its resistance; NaN: one body. [J/K]
    """

    winding_resistance_k_w: FloatArray
    housing_resistance_k_w: FloatArray
    winding_capacity_j_k: FloatArray
    housing_capacity_j_k: FloatArray

    @property
    def has_housing(self) -> NDArray[np.bool_]:
        """Whether the housing is a body of its own, shape (B,)."""
        return np.isfinite(self.housing_resistance_k_w) & np.isfinite(self.housing_capacity_j_k)

    @property
    def total_resistance_k_w(self) -> FloatArray:
        """Winding to ambient [K/W], shape (B,)."""
        housing = np.where(self.has_housing, self.housing_resistance_k_w, 0.0)
        return np.asarray(self.winding_resistance_k_w + housing)

    @property
    def speed_resistance_k_w(self) -> FloatArray:
        """Rise of the winding per watt of speed loss [K/W], shape (B,)."""
        return np.where(self.has_housing, self.housing_resistance_k_w, self.winding_resistance_k_w)


@dataclass(frozen=True)
class HeatLoss:
    """Losses of candidates over one cycle of P pieces.

    Attributes
    ----------
    duration_s : ndarray, shape (P,)
        Length of each piece. [s]
    copper_loss_w : ndarray, shape (B, P)
        Mean of ``R_ref i_ref²`` over each piece, both at their reference temperatures. [W]
    speed_loss_w : ndarray, shape (B, P)
        Mean friction and iron loss over each piece; heats the housing. [W]
    resistance_coefficient_per_k : ndarray, shape (B,)
        α ≥ 0 at its reference temperature. [1/K]
    resistance_reference_degc : ndarray, shape (B,)
        Temperature at which the resistance is stated. [°C]
    magnet_coefficient_per_k : ndarray, shape (B,)
        β ≤ 0, relative change of the torque constant; 0 where the current, not the torque, is given. [1/K]
    magnet_reference_degc : ndarray, shape (B,)
        Temperature at which the torque constant is stated. [°C]
    """

    duration_s: FloatArray
    copper_loss_w: FloatArray
    speed_loss_w: FloatArray
    resistance_coefficient_per_k: FloatArray
    resistance_reference_degc: FloatArray
    magnet_coefficient_per_k: FloatArray
    magnet_reference_degc: FloatArray


def known_candidates(network: ThermalNetwork, loss: HeatLoss) -> NDArray[np.bool_]:
    """Candidates whose data suffice: everything finite except a missing housing, shape (B,)."""
    columns = (
        network.winding_resistance_k_w,
        network.winding_capacity_j_k,
        loss.resistance_coefficient_per_k,
        loss.resistance_reference_degc,
        loss.magnet_coefficient_per_k,
        loss.magnet_reference_degc,
    )
    known = np.ones(len(network.winding_resistance_k_w), dtype=bool)
    for column in columns:
        known &= np.isfinite(column)
    return np.asarray(known & np.isfinite(loss.copper_loss_w + loss.speed_loss_w).all(axis=1))


def select_candidates(
    network: ThermalNetwork, loss: HeatLoss, rows: NDArray[np.intp] | NDArray[np.bool_]
) -> tuple[ThermalNetwork, HeatLoss]:
    """Network and loss of some candidates, by index or mask."""
    return (
        ThermalNetwork(*(getattr(network, f.name)[rows] for f in fields(ThermalNetwork))),
        HeatLoss(loss.duration_s, *(getattr(loss, f.name)[rows] for f in fields(HeatLoss)[1:])),
    )
