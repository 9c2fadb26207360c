"""The DC bus of S sets: voltage, brake resistor and supply over the cycle."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.bus import BusCycle, bus_cycle, stored_voltage
from actuator_sizing.core.parameters import _Columns
from actuator_sizing.core.quadrature import largest
from actuator_sizing.core.supply import charged_voltage, permitted_pulse
from actuator_sizing.sizing.bus_power import (
    BusPower,
    TerminalPower,
    mean_square_through_drive,
    power_at_bus,
    terminal_power,
)
from actuator_sizing.sizing.bus_sag import bus_under_load, is_soft, sag
from actuator_sizing.sizing.bus_side import (
    BusSide,
    bus_side,
    chopper_threshold,
    clamping_threshold,
    supply_feeds_back,
)
from actuator_sizing.sizing.checks.base import Sets

FloatArray = NDArray[np.float64]

_PAIRS_PER_CHUNK = 128
#: Continuous power of a brake resistor over the mean that it burns; common practice asks for 30 to 50 %.
RESISTOR_RESERVE = 1.3


@dataclass(frozen=True)
class BusResults(_Columns):
    """The bus of S sets; each field has shape (S,). NaN where data is missing."""

    capacitance_f: FloatArray
    threshold_v: FloatArray  # NaN: nothing clamps the bus
    release_v: FloatArray
    steady_power_w: FloatArray
    room_j: FloatArray
    voltage_max_v: FloatArray
    voltage_max_at_s: FloatArray
    brake_energy_j: FloatArray  # per cycle, with what each pulse takes more by the hysteresis
    brake_pulse_j: FloatArray
    brake_pulse_s: FloatArray  # time it takes
    brake_pulse_ratio: FloatArray  # largest pulse over what the pulse curve permits; NaN without curve
    brake_power_mean_w: FloatArray
    brake_power_peak_w: FloatArray
    returned_power_mean_w: FloatArray  # to a supply that takes it
    returned_power_peak_w: FloatArray
    supply_power_mean_w: FloatArray
    supply_power_peak_w: FloatArray
    supply_power_peak_at_s: FloatArray
    supply_power_rms_w: FloatArray
    sag_utilisation: FloatArray  # NaN where the supply is stiff
    sag_voltage_needed_v: FloatArray
    sag_voltage_available_v: FloatArray
    sag_at_s: FloatArray
    voltage_min_v: FloatArray
    voltage_min_at_s: FloatArray


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
    the capacitors help; its mean power is what it really gives. Sag is judged from the minimum bus voltage.
    """
    return _results(sets, clamping_threshold(sets))


def results_with_resistor(sets: Sets) -> BusResults:
    """The bus of every set if its chopper had a resistor, to recommend one, shape (S,). [-]"""
    return _results(sets, chopper_threshold(sets))


def _results(sets: Sets, threshold_v: FloatArray) -> BusResults:
    side = bus_side(sets, threshold_v)
    pairs, pair_of_set = np.unique(sets.index[:, :2], axis=0, return_inverse=True)
    pair_of_set = pair_of_set.reshape(-1)
    parts, order = [], []
    for start in range(0, len(pairs), _PAIRS_PER_CHUNK):
        chunk = pairs[start : start + _PAIRS_PER_CHUNK]
        members = np.flatnonzero((pair_of_set >= start) & (pair_of_set < start + len(chunk)))
        pair = pair_of_set[members] - start
        parts.append(_of_pairs(sets, members, terminal_power(sets, chunk), pair, side.take(members)))
        order.append(members)
    back = np.argsort(np.concatenate(order), kind="stable")
    names = [f.name for f in fields(BusResults)]
    return BusResults(**{n: np.concatenate([getattr(part, n) for part in parts])[back] for n in names})


def _of_pairs(
    sets: Sets, members: NDArray[np.intp], terminals: TerminalPower, pair: NDArray[np.intp], side: BusSide
) -> BusResults:
    demand = sets.demand
    soft = is_soft(sets)
    power = power_at_bus(terminals, pair, side) if soft or np.any(side.steady_w > 0.0) else None
    if power is None:
        # Nothing but the drive between terminals and bus: the runs of the pairs serve all their drives.
        peak, piece, position = largest(terminals.power_w)
        peak_at = demand.instant(piece, position)[pair]
        most = np.maximum(peak, 0.0)[pair] / side.efficiency
        square = mean_square_through_drive(terminals, pair, side, demand.duration_s)
        cycle = bus_cycle(terminals.runs.take(pair), side.efficiency, side.room_j)
        gives_back = np.any(terminals.runs.energy_j < 0.0, axis=1)[pair]
        returned_peak = np.maximum(largest(-terminals.power_w)[0], 0.0)[pair] * side.efficiency
    else:
        most, peak_at = power.largest()
        most = np.maximum(most, 0.0)
        square = power.mean_square(demand.cycle_s)
        cycle = bus_cycle(power.runs, np.ones(len(side)), side.room_j)
        gives_back = np.any(power.runs.energy_j < 0.0, axis=1)
        returned_peak = np.maximum(BusPower(power.duration_s, -power.power_w).largest()[0], 0.0)
    under = bus_under_load(sets, terminals, pair, power, side) if soft and power is not None else None
    droop = sag(sets, members, under)
    known = np.where(np.isnan(side.stated_efficiency), np.nan, 1.0)
    feeds_back = supply_feeds_back(sets)
    returned = cycle.dumped_energy_j if feeds_back else np.zeros(len(side))
    returned_peak = returned_peak if feeds_back else np.zeros(len(side))
    burnt = _resistor(sets, side, cycle, feeds_back=feeds_back)
    extra = np.where(burnt["brake_energy_j"] > 0.0, burnt["brake_energy_j"] - cycle.dumped_energy_j, 0.0)
    highest = _highest_voltage(sets, side, cycle, gives_back, returned_peak)
    return BusResults(
        capacitance_f=side.capacitance_f,
        threshold_v=side.threshold_v,
        release_v=side.release_v,
        steady_power_w=side.steady_w,
        room_j=side.room_j,
        voltage_max_v=highest,
        voltage_max_at_s=cycle.peak_at_s,
        **burnt,
        returned_power_mean_w=returned / demand.cycle_s,
        returned_power_peak_w=returned_peak,
        supply_power_mean_w=known * (cycle.supply_energy_j + extra - returned) / demand.cycle_s,
        supply_power_peak_w=known * most,
        supply_power_peak_at_s=peak_at,
        supply_power_rms_w=known * np.sqrt(square),
        sag_utilisation=droop.utilisation,
        sag_voltage_needed_v=droop.needed_v,
        sag_voltage_available_v=droop.available_v,
        sag_at_s=droop.at_s,
        voltage_min_v=droop.lowest_v,
        voltage_min_at_s=droop.lowest_at_s,
    )


def _highest_voltage(
    sets: Sets, side: BusSide, cycle: BusCycle, gives_back: NDArray[np.bool_], returned_peak_w: FloatArray
) -> FloatArray:
    top = sets.surroundings.bus_max_v
    if supply_feeds_back(sets):
        resistance = float(np.nan_to_num(sets.option("supply internal resistance"), nan=0.0))
        return charged_voltage(top, resistance, returned_peak_w)
    highest = stored_voltage(top, side.capacitance_f, cycle.peak_energy_j)
    clamped = np.maximum(side.threshold_v, top)
    known = ~np.isnan(side.capacitance_f)
    held = np.where(known, np.fmin(highest, clamped), clamped)
    highest = np.where(np.isnan(side.threshold_v), highest, held)
    return np.where(gives_back, highest, top)  # nothing comes back: the capacitance does not matter


def _resistor(sets: Sets, side: BusSide, cycle: BusCycle, *, feeds_back: bool) -> dict[str, FloatArray]:
    """What the resistor burns; each pulse takes what the hysteresis costs on top of the ideal clamp."""
    clamps = ~np.isnan(side.threshold_v) & (not feeds_back)
    burns = clamps & (cycle.dumped_energy_j > 0.0)
    more = np.where(burns, side.hysteresis_j, 0.0)
    energy = np.where(clamps, cycle.dumped_energy_j, 0.0) + more * cycle.pulses
    row = np.arange(len(side))
    longest = cycle.pulse_energy_j.argmax(axis=1)
    ratio = np.full(len(side), np.nan)
    curve = sets.case.resistor_pulses
    if curve:
        seconds, joules = (np.array(column) for column in zip(*curve, strict=True))
        permitted = permitted_pulse(seconds, joules, cycle.pulse_time_s)
        pulse = np.where(cycle.pulse_energy_j > 0.0, cycle.pulse_energy_j + more[:, None], 0.0)
        ratios = pulse / permitted
        longest = ratios.argmax(axis=1)
        ratio = np.where(clamps, ratios[row, longest], 0.0)
    pulse_j = np.where(clamps, cycle.pulse_energy_j[row, longest], 0.0) + more
    return {
        "brake_energy_j": energy,
        "brake_pulse_j": pulse_j,
        "brake_pulse_s": np.where(burns, cycle.pulse_time_s[row, longest], 0.0),
        "brake_pulse_ratio": ratio,
        "brake_power_mean_w": energy / sets.demand.cycle_s,
        "brake_power_peak_w": np.where(clamps, cycle.dumped_power_peak_w, 0.0),
    }


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
    answer = {
        "bus_voltage_max_v": b.voltage_max_v[index],
        "bus_voltage_min_v": b.voltage_min_v[index],
        "bus_capacitance_f": b.capacitance_f[index],
        "bus_steady_power_w": b.steady_power_w[index],
        "brake_energy_per_cycle_j": b.brake_energy_j[index],
        "brake_pulse_energy_j": b.brake_pulse_j[index],
        "brake_power_mean_w": b.brake_power_mean_w[index],
        "brake_power_peak_w": b.brake_power_peak_w[index],
        "returned_power_mean_w": b.returned_power_mean_w[index],
        "returned_power_peak_w": b.returned_power_peak_w[index],
        "supply_power_mean_w": b.supply_power_mean_w[index],
        "supply_power_peak_w": b.supply_power_peak_w[index],
        "supply_power_rms_w": b.supply_power_rms_w[index],
        "supply_current_mean_a": b.supply_power_mean_w[index] / low,
        "supply_current_peak_a": b.supply_power_peak_w[index] / low,
        "supply_current_rms_a": b.supply_power_rms_w[index] / low,
        **_recommended_resistor(sets.only(index)),
    }
    return {name: float(value) if np.isfinite(value) else None for name, value in answer.items()}


def _recommended_resistor(sets: Sets) -> dict[str, float]:
    """What a brake resistor must be, for one set: from the smallest to the largest value, pulse and continuous power.

    Nothing but the smallest value where no chopper is known, or where nothing has to be burnt.
    """
    answer = {"brake_resistor_smallest_ohm": float(sets.drives.brake_resistor_min_ohm[0])}
    if supply_feeds_back(sets):
        return answer
    b = results_with_resistor(sets)
    peak = float(b.brake_power_peak_w[0])
    if not peak > 0.0:
        return answer
    U, C = float(b.threshold_v[0]), float(b.capacitance_f[0])
    span = float(np.nan_to_num(U**2 - b.release_v[0] ** 2))
    stated = sets.option("brake resistor")
    strongest = peak if np.isnan(stated) else U**2 / stated
    return answer | {
        "brake_resistor_largest_ohm": U**2 / peak,
        "brake_resistor_recommended_power_w": RESISTOR_RESERVE * float(b.brake_power_mean_w[0]),
        "brake_resistor_recommended_pulse_j": float(b.brake_pulse_j[0]),
        # It switches most often while half the power of the resistor comes back.
        "chopper_switching_frequency_max_hz": strongest / (2.0 * C * span) if span > 0.0 else np.nan,
    }
