"""Bus voltage under load: droop of the supply, its current limit, and what that leaves for the motor."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.bus import bus_cycle, stored_at_nodes
from actuator_sizing.core.parameters import _Columns
from actuator_sizing.core.power_runs import power_runs
from actuator_sizing.core.quadrature import lobatto, to_series
from actuator_sizing.core.supply import sagged_voltage
from actuator_sizing.sizing.bus_power import BusPower
from actuator_sizing.sizing.bus_side import BATTERY, DC_SUPPLY, BusSide, supply_kind
from actuator_sizing.sizing.checks.base import Sets

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Sag(_Columns):
    """The bus of S sets under load; each field has shape (S,), NaN where the supply is taken as stiff."""

    utilisation: FloatArray  # largest ratio of voltage needed to voltage left
    needed_v: FloatArray
    available_v: FloatArray
    at_s: FloatArray
    lowest_v: FloatArray
    lowest_at_s: FloatArray


@dataclass(frozen=True)
class BusUnderLoad:
    """Bus voltage of S sets at the nodes of smooth pieces."""

    time_s: FloatArray  # (S, N, K)
    voltage_v: FloatArray  # (S, N, K)
    needed_v: FloatArray  # (S, N, K) at the terminals


def is_soft(sets: Sets) -> bool:
    """Whether the case says how the supply gives way, or names one that does."""
    stated = (sets.option("supply internal resistance"), sets.option("supply current limit"))
    return not np.all(np.isnan(stated)) or supply_kind(sets) in (DC_SUPPLY, BATTERY)


def bus_under_load(sets: Sets, needed_v: FloatArray, power: BusPower, side: BusSide) -> BusUnderLoad:
    """Lowest bus voltage that the supply leaves, from its minimum voltage, over the cycle.

    Parameters
    ----------
    sets : Sets
        Holds supply and surroundings. [-]
    needed_v : ndarray, shape (S, N, K)
        Voltage that the motor needs, at the nodes of the pieces of `power`. [V]
    power : BusPower
        At the bus of the sets. [-]
    side : BusSide
        Of the sets. [-]

    Returns
    -------
    BusUnderLoad
        NaN where the capacitors must help and none are known. [-]

    Notes
    -----
    Up to its current limit the supply follows its internal resistance, without help from the capacitors. Beyond it
    the supply gives no more than the limit times the lowest voltage that still works, and the capacitors the rest:
    their deficit is the energy of a store that fills with ``p − P_limit`` and empties into nothing below zero, in
    periodic steady state. Safe side: a higher voltage means more power at the same current.
    """
    resistance = float(np.nan_to_num(sets.option("supply internal resistance"), nan=0.0))
    needed = needed_v
    duration, watts = power.duration_s, power.power_w
    deficit = np.zeros_like(watts)
    limited = np.isfinite(side.limit_w)
    if limited.any():
        short = power_runs(duration, np.where(limited, side.limit_w, 0.0)[:, None, None] - watts)
        cycle = bus_cycle(short, np.ones(len(side)), np.full(len(side), np.inf))
        endless = np.isinf(cycle.start_energy_j)  # the cycle asks for more than the supply ever gives
        deficit = np.where(endless[:, None, None], np.inf, stored_at_nodes(short, cycle))
        duration, count = short.run_duration_s(), watts.shape[2]
        needed, watts = (short.values(values @ to_series(count).T) for values in (needed, watts))
    given = np.minimum(watts, side.limit_w[:, None, None])
    steady = sagged_voltage(sets.surroundings.bus_min_v, resistance, given)
    with np.errstate(divide="ignore", invalid="ignore"):
        lost = np.where(deficit > 0.0, 2.0 * deficit / side.capacitance_f[:, None, None], 0.0)
    start = (np.cumsum(duration, axis=1) - duration)[..., None]
    time = start + 0.5 * (lobatto(watts.shape[2])[0] + 1.0) * duration[..., None]
    return BusUnderLoad(time, np.sqrt(np.maximum(steady**2 - lost, 0.0)), needed)


def sag(sets: Sets, members: NDArray[np.intp], under: BusUnderLoad | None) -> Sag:
    """Where the voltage needed comes closest to what is left, and the lowest bus voltage.

    Parameters
    ----------
    sets : Sets
        All sets. [-]
    members : ndarray of int, shape (S,)
        Which of them `under` is about. [-]
    under : BusUnderLoad or None
        None where the supply is taken as stiff. [-]

    Returns
    -------
    Sag
        Shape (S,). [-]
    """
    if under is None:
        return Sag(*(np.full(len(members), np.nan) for _ in range(6)))
    per_bus = sets.pairs.voltage_available_v[members] / sets.surroundings.bus_min_v
    available = per_bus[:, None, None] * under.voltage_v
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(
            available > 0.0, under.needed_v / available, np.where(available == 0.0, np.inf, np.nan)
        )
    flat = (len(members), -1)
    unknown = np.isnan(under.voltage_v).any(axis=(1, 2))
    worst = np.nan_to_num(ratio.reshape(flat), nan=-1.0).argmax(axis=1)
    lowest = np.nan_to_num(under.voltage_v.reshape(flat), nan=np.inf).argmin(axis=1)
    row = np.arange(len(members))

    def at(values: FloatArray, place: NDArray[np.intp]) -> FloatArray:
        return np.where(unknown, np.nan, values.reshape(flat)[row, place])

    return Sag(
        at(ratio, worst), at(under.needed_v, worst), at(available, worst), at(under.time_s, worst),
        at(under.voltage_v, lowest), at(under.time_s, lowest),
    )  # fmt: skip
