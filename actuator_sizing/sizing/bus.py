"""The DC bus of S sets: voltage, brake resistor and supply over the cycle."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.bus import (
    PowerRuns,
    bus_cycle,
    bus_energy,
    clamp_room,
    power_runs,
    sagged_voltage,
    stored_voltage,
)
from actuator_sizing.core.machine import judge, judge_cold
from actuator_sizing.core.parameters import _Columns
from actuator_sizing.core.quadrature import integrate, largest
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.pair_course import course, electrical_course

FloatArray = NDArray[np.float64]

_PAIRS_PER_CHUNK = 128


@dataclass(frozen=True)
class BusResults(_Columns):
    """The bus of S sets; each field has shape (S,). NaN where data is missing."""

    capacitance_f: FloatArray
    threshold_v: FloatArray  # NaN: nothing clamps the bus
    efficiency: FloatArray  # 1 where the sheet states none: all that comes back reaches the bus
    room_j: FloatArray
    voltage_max_v: FloatArray
    voltage_max_at_s: FloatArray
    brake_energy_j: FloatArray  # per cycle
    brake_pulse_j: FloatArray
    brake_power_mean_w: FloatArray
    brake_power_peak_w: FloatArray
    supply_power_mean_w: FloatArray
    supply_power_peak_w: FloatArray
    supply_power_peak_at_s: FloatArray
    supply_power_rms_w: FloatArray
    sag_utilisation: FloatArray  # NaN without internal resistance
    sag_voltage_needed_v: FloatArray
    sag_voltage_available_v: FloatArray
    sag_at_s: FloatArray


def bus_results(sets: Sets) -> BusResults:
    """The bus of every set over the cycle, in periodic steady state.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    BusResults
        Shape (S,). [-]

    Notes
    -----
    Regeneration starts from the highest voltage of the supply. Peak and RMS power of the supply leave out what
    the capacitors help; its mean power is what it really gives. Sag is judged from the minimum bus voltage,
    without help from the capacitors.
    """
    pairs, pair_of_set = np.unique(sets.index[:, :2], axis=0, return_inverse=True)
    pair_of_set = pair_of_set.reshape(-1)
    parts, order = [], []
    for start in range(0, len(pairs), _PAIRS_PER_CHUNK):
        chunk = pairs[start : start + _PAIRS_PER_CHUNK]
        members = np.flatnonzero((pair_of_set >= start) & (pair_of_set < start + len(chunk)))
        parts.append(_of_pairs(sets, chunk, members, pair_of_set[members] - start))
        order.append(members)
    back = np.argsort(np.concatenate(order), kind="stable")
    names = BusResults.__dataclass_fields__
    return BusResults(**{n: np.concatenate([getattr(part, n) for part in parts])[back] for n in names})


def clamping_threshold(sets: Sets) -> FloatArray:
    """Bus voltage at which a chopper with its resistor holds the bus, shape (S,); NaN where there is none. [V]

    The threshold of the `axis` table counts before the drive's own; without a brake resistor nothing clamps.
    """
    if np.isnan(sets.option("brake resistor")):
        return np.full(len(sets), np.nan)
    stated = sets.option("chopper threshold")
    return sets.drives.chopper_threshold_v if np.isnan(stated) else np.full(len(sets), stated)


def supply_feeds_back(sets: Sets) -> bool:
    """Whether the supply returns regenerated energy."""
    return sets.case.options.get("supply feeds back") == "yes"


def terminal_runs(sets: Sets, pairs: NDArray[np.intp]) -> tuple[PowerRuns, FloatArray, FloatArray]:
    """Power at the motor terminals of motor × gearhead pairs.

    Parameters
    ----------
    sets : Sets
        Holds case and cycle. [-]
    pairs : ndarray of int, shape (B, 2)
        Motor and gearhead of each pair. [-]

    Returns
    -------
    runs : PowerRuns
        Cut where the power changes sign. [-]
    power_w : ndarray, shape (B, P, K)
        At the nodes. [W]
    voltage_v : ndarray, shape (B, P, K)
        Larger of the voltages with and without L di/dt at the nodes, in the motor's basis. [V]
    """
    motors = sets.case.motor_parameters.take(pairs[:, 0])
    gearheads = sets.case.gearhead_parameters.take(pairs[:, 1])
    judged = judge(motors, sets.surroundings)
    c = course(sets.demand, motors, gearheads, judged)
    power = c.torque_nm * c.motor_speed_rad_s + judged.resistance_ohm[:, None, None] * c.current_a**2
    cold = electrical_course(
        sets.demand,
        c.torque_nm,
        c.motor_speed_rad_s,
        c.shaft_torque_nm,
        judge_cold(motors, sets.surroundings),
    )
    voltage = np.maximum.reduce(
        [v for each in (c, cold) for v in (each.voltage_v, each.voltage_without_inductance_v)]
    )
    return power_runs(sets.demand.duration_s, power), power, voltage


def _of_pairs(
    sets: Sets, pairs: NDArray[np.intp], members: NDArray[np.intp], pair: NDArray[np.intp]
) -> BusResults:
    s, demand = sets.surroundings, sets.demand
    runs, power, voltage = terminal_runs(sets, pairs)
    drives = sets.drives.take(members)
    efficiency = np.where(np.isnan(drives.efficiency), 1.0, drives.efficiency)
    stated = drives.efficiency
    outside = np.nan_to_num(sets.option("bus capacitance"), nan=0.0)
    inside = np.nan_to_num(drives.capacitance_f, nan=0.0)
    known = ~np.isnan(drives.capacitance_f) | ~np.isnan(sets.option("bus capacitance"))
    capacitance = np.where(known, outside + inside, np.nan)
    threshold = clamping_threshold(sets)[members]
    feeds_back = supply_feeds_back(sets)
    if feeds_back:
        room = np.zeros(len(members))
    else:
        # With no capacitance stated nothing is stored: all of it reaches the resistor.
        room = clamp_room(outside + inside, s.bus_max_v, threshold)
    cycle = bus_cycle(runs.take(pair), efficiency, room)
    highest = stored_voltage(s.bus_max_v, capacitance, cycle.peak_energy_j)
    clamped = np.maximum(threshold, s.bus_max_v)
    highest = np.where(np.isnan(threshold), highest, np.where(known, np.fmin(highest, clamped), clamped))
    # Nothing comes back: the capacitance does not matter.
    highest = np.where(np.any(runs.energy_j < 0.0, axis=1)[pair], highest, s.bus_max_v)
    if feeds_back:
        highest = np.full(len(members), s.bus_max_v)
    burns = not feeds_back and not np.isnan(sets.option("brake resistor"))
    clamps = ~np.isnan(threshold) & burns
    dumped, pulse, peak = (
        np.where(clamps, value, 0.0)
        for value in (cycle.dumped_energy_j, cycle.dumped_pulse_j, cycle.dumped_power_peak_w)
    )
    returned = cycle.dumped_energy_j if feeds_back else 0.0
    supply_peak, piece, position = largest(power)
    taken = np.maximum(bus_energy(power[pair], np.where(np.isnan(stated), 1.0, stated)), 0.0)
    unknown = np.where(np.isnan(stated), np.nan, 1.0)
    sag = _sag(sets, members, pair, power, voltage, efficiency)
    return BusResults(
        capacitance_f=capacitance,
        threshold_v=threshold,
        efficiency=efficiency,
        room_j=room,
        voltage_max_v=highest,
        voltage_max_at_s=cycle.peak_at_s,
        brake_energy_j=dumped,
        brake_pulse_j=pulse,
        brake_power_mean_w=dumped / demand.cycle_s,
        brake_power_peak_w=peak,
        supply_power_mean_w=unknown * (cycle.supply_energy_j - returned) / demand.cycle_s,
        supply_power_peak_w=unknown * np.maximum(supply_peak, 0.0)[pair] / efficiency,
        supply_power_peak_at_s=demand.instant(piece, position)[pair],
        supply_power_rms_w=unknown * np.sqrt(integrate(demand.duration_s, taken**2) / demand.cycle_s),
        **sag,
    )


def _sag(
    sets: Sets,
    members: NDArray[np.intp],
    pair: NDArray[np.intp],
    power: FloatArray,
    voltage: FloatArray,
    efficiency: FloatArray,
) -> dict[str, FloatArray]:
    """Voltage needed over voltage left, at the nodes, where the supply has an internal resistance."""
    names = ("sag_utilisation", "sag_voltage_needed_v", "sag_voltage_available_v", "sag_at_s")
    resistance = sets.option("supply internal resistance")
    if np.isnan(resistance):
        return {name: np.full(len(members), np.nan) for name in names}
    s = sets.surroundings
    sagged = sagged_voltage(s.bus_min_v, resistance, bus_energy(power[pair], efficiency))
    available = sets.pairs.voltage_available_v[members][:, None, None] * sagged / s.bus_min_v
    needed = voltage[pair]
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(available > 0.0, needed / available, np.inf).reshape(len(members), -1)
    worst = ratio.argmax(axis=1)
    row = np.arange(len(members))
    found = (
        ratio[row, worst],
        needed.reshape(len(members), -1)[row, worst],
        available.reshape(len(members), -1)[row, worst],
        sets.demand.time_s.reshape(-1)[worst],
    )
    return dict(zip(names, found, strict=True))


def bus_quantities(sets: Sets, index: int) -> dict[str, float | None]:
    """Quantities of the bus of one set for results.json.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which set. [-]

    Returns
    -------
    dict
        SI values; None where not known. [-]
    """
    b = sets.once(bus_results)
    low = sets.surroundings.bus_min_v
    smallest = float(sets.drives.brake_resistor_min_ohm[index])
    peak, threshold = float(b.brake_power_peak_w[index]), float(b.threshold_v[index])
    answer = {
        "bus_voltage_max_v": b.voltage_max_v[index],
        "brake_energy_per_cycle_j": b.brake_energy_j[index],
        "brake_pulse_energy_j": b.brake_pulse_j[index],
        "brake_power_mean_w": b.brake_power_mean_w[index],
        "brake_power_peak_w": peak,
        "brake_resistor_smallest_ohm": smallest,
        "brake_resistor_largest_ohm": threshold**2 / peak if peak > 0.0 else np.nan,
        "supply_power_mean_w": b.supply_power_mean_w[index],
        "supply_power_peak_w": b.supply_power_peak_w[index],
        "supply_power_rms_w": b.supply_power_rms_w[index],
        "supply_current_mean_a": b.supply_power_mean_w[index] / low,
        "supply_current_peak_a": b.supply_power_peak_w[index] / low,
        "supply_current_rms_a": b.supply_power_rms_w[index] / low,
    }
    return {name: float(value) if np.isfinite(value) else None for name, value in answer.items()}
