"""What the bus of S sets is made of: supply, capacitance, chopper, and what is drawn from it all the time."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.bus import clamp_room
from actuator_sizing.core.parameters import _Columns
from actuator_sizing.core.supply import hysteresis_energy
from actuator_sizing.sizing.checks.base import Sets

FloatArray = NDArray[np.float64]

RECTIFIER, DC_SUPPLY, BATTERY = "rectified mains", "DC supply", "battery"
_HALF = 0.5  # of the voltage without load: below it no supply gives more power


@dataclass(frozen=True)
class BusSide(_Columns):
    """The bus of S sets; each field has shape (S,), NaN where nothing is known."""

    capacitance_f: FloatArray  # of supply, drive and partners
    stored_f: FloatArray  # the same, what is not known counted as nothing
    threshold_v: FloatArray  # NaN: nothing clamps the bus
    release_v: FloatArray  # at which the chopper switches off
    efficiency: FloatArray  # 1 where the sheet states none: all that comes back reaches the bus
    stated_efficiency: FloatArray
    steady_w: FloatArray  # stand-by of the drive and other loads
    room_j: FloatArray
    hysteresis_j: FloatArray
    limit_w: FloatArray  # that the supply gives at its current limit; infinite without one


def supply_kind(sets: Sets) -> str:
    """What feeds the bus: one of the words of the quantity 'supply'."""
    return str(sets.case.options.get("supply") or RECTIFIER)


def supply_feeds_back(sets: Sets) -> bool:
    """Whether the supply takes regenerated energy; a battery does."""
    return sets.case.options.get("supply feeds back") == "yes" or supply_kind(sets) == BATTERY


def clamping_threshold(sets: Sets) -> FloatArray:
    """Bus voltage at which a chopper with its resistor holds the bus, shape (S,); NaN where there is none. [V]

    The threshold of the `axis` table counts before the drive's own; without a brake resistor nothing clamps.
    """
    if np.isnan(sets.option("brake resistor")):
        return np.full(len(sets), np.nan)
    stated = sets.option("chopper threshold")
    return sets.drives.chopper_threshold_v if np.isnan(stated) else np.full(len(sets), stated)


def steady_power(sets: Sets) -> FloatArray:
    """Power that drive and other loads take from the bus all the time, zero where none is stated, shape (S,). [W]"""
    standby = np.nan_to_num(sets.catalog_values("drives", "stand_by_power"), nan=0.0)
    return standby + float(np.nan_to_num(sets.option("other power on the bus"), nan=0.0))


def bus_side(sets: Sets, threshold_v: FloatArray) -> BusSide:
    """Gather what the bus of each set is made of.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    threshold_v : ndarray, shape (S,)
        Where the bus is clamped; NaN where it is not. [V]

    Returns
    -------
    BusSide
        Shape (S,). [-]
    """
    s, drives = sets.surroundings, sets.drives
    outside = sets.option("bus capacitance")
    known = ~np.isnan(drives.capacitance_f) | ~np.isnan(outside)
    stored = np.nan_to_num(outside, nan=0.0) + np.nan_to_num(drives.capacitance_f, nan=0.0)
    own = sets.catalog_values("drives", "chopper_hysteresis")
    stated = sets.option("chopper hysteresis")
    hysteresis = np.nan_to_num(own if np.isnan(stated) else np.full(len(sets), stated), nan=0.0)
    # With no capacitance stated nothing is stored: all of it reaches the resistor.
    room = np.zeros(len(sets)) if supply_feeds_back(sets) else clamp_room(stored, s.bus_max_v, threshold_v)
    limit = sets.option("supply current limit")
    # At its limit a supply gives the current at whatever voltage is left: at least the lowest that still works.
    lowest = np.fmax(drives.bus_voltage_min_v, _HALF * s.bus_min_v)
    return BusSide(
        capacitance_f=np.where(known, stored, np.nan),
        stored_f=stored,
        threshold_v=threshold_v,
        release_v=threshold_v - hysteresis,
        efficiency=np.where(np.isnan(drives.efficiency), 1.0, drives.efficiency),
        stated_efficiency=drives.efficiency,
        steady_w=steady_power(sets),
        room_j=room,
        hysteresis_j=np.nan_to_num(hysteresis_energy(stored, threshold_v, hysteresis, s.bus_max_v), nan=0.0),
        limit_w=np.where(np.isnan(limit), np.inf, limit * lowest),
    )
