"""The DC bus of S sets: voltage, brake resistor and supply over the cycle."""

from __future__ import annotations

from dataclasses import dataclass

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
    needed_voltage,
    power_at_bus,
    terminal_power,
)
from actuator_sizing.sizing.bus_sag import BusUnderLoad, bus_under_load, is_soft, sag
from actuator_sizing.sizing.bus_side import (
    BusSide,
    bus_side,
    clamping_threshold,
    supply_feeds_back,
)
from actuator_sizing.sizing.checks.base import Sets

FloatArray = NDArray[np.float64]

_PAIRS_PER_CHUNK = 128


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


def own_results(sets: Sets) -> BusResults:
    """The bus of every set over the cycle, in periodic steady state, as if the axis had it to itself.

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
    side = bus_side(sets, clamping_threshold(sets))
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
    return BusResults.joined(parts).take(back)


def _of_pairs(
    sets: Sets, members: NDArray[np.intp], terminals: TerminalPower, pair: NDArray[np.intp], side: BusSide
) -> BusResults:
    cycle_s = sets.demand.cycle_s
    if is_soft(sets) or np.any(side.steady_w > 0.0):
        power = power_at_bus(terminals, pair, side)
        under = None
        if is_soft(sets):
            under = bus_under_load(sets, needed_voltage(terminals, pair), power, side)
        return results_of(sets, members, side, drawn(sets, power, cycle_s, side.room_j), cycle_s, under)
    # Nothing but the drive between terminals and bus: the runs of the pairs serve all their drives.
    peak, piece, position = largest(terminals.power_w)
    draw = Drawn(
        cycle=bus_cycle(terminals.runs.take(pair), side.efficiency, side.room_j),
        peak_w=np.maximum(peak, 0.0)[pair] / side.efficiency,
        peak_at_s=sets.demand.instant(piece, position)[pair],
        mean_square_w2=mean_square_through_drive(terminals, pair, side, sets.demand.duration_s),
        gives_back=np.any(terminals.runs.energy_j < 0.0, axis=1)[pair],
        returned_peak_w=_returned_peak(sets, terminals)[pair] * side.efficiency,
    )
    return results_of(sets, members, side, draw, cycle_s, None)


@dataclass(frozen=True)
class Drawn:
    """What S sets draw from the bus and give back; each field but `cycle` has shape (S,)."""

    cycle: BusCycle
    peak_w: FloatArray
    peak_at_s: FloatArray
    mean_square_w2: FloatArray
    gives_back: NDArray[np.bool_]
    returned_peak_w: FloatArray  # zero where the supply takes nothing back


def _returned_peak(sets: Sets, terminals: TerminalPower) -> FloatArray:
    """Largest power that comes back at the terminals, where a supply takes it. [W]"""
    if not supply_feeds_back(sets):
        return np.zeros(len(terminals.power_w))
    return np.maximum(largest(-terminals.power_w)[0], 0.0)


def drawn(sets: Sets, power: BusPower, cycle_s: float, room_j: FloatArray) -> Drawn:
    """What sets draw whose power at the bus is known on pieces.

    Parameters
    ----------
    sets : Sets
        Says whether the supply takes anything back. [-]
    power : BusPower
        At the bus of S sets. [-]
    cycle_s : float
        Time after which it repeats. [s]
    room_j : ndarray, shape (S,)
        Of the capacitors, as in `bus_cycle`. [J]

    Returns
    -------
    Drawn
        Shape (S,). [-]
    """
    most, peak_at = power.largest()
    back = np.zeros(len(most))
    if supply_feeds_back(sets):
        back = BusPower(power.duration_s, -power.power_w).largest()[0]
    return Drawn(
        cycle=bus_cycle(power.runs, np.ones(len(most)), room_j),
        peak_w=np.maximum(most, 0.0),
        peak_at_s=peak_at,
        mean_square_w2=power.mean_square(cycle_s),
        gives_back=np.any(power.runs.energy_j < 0.0, axis=1),
        returned_peak_w=np.maximum(back, 0.0),
    )


def results_of(
    sets: Sets,
    members: NDArray[np.intp],
    side: BusSide,
    draw: Drawn,
    cycle_s: float,
    under: BusUnderLoad | None,
) -> BusResults:
    """Results from what sets draw.

    Parameters
    ----------
    sets : Sets
        All sets. [-]
    members : ndarray of int, shape (S,)
        Which of them the rest is about. [-]
    side : BusSide
        What their bus is made of. [-]
    draw : Drawn
        What they draw. [-]
    cycle_s : float
        Time after which it repeats. [s]
    under : BusUnderLoad or None
        Their voltage under load; None where the supply is stiff. [-]

    Returns
    -------
    BusResults
        Shape (S,). [-]
    """
    cycle, feeds_back = draw.cycle, supply_feeds_back(sets)
    droop = sag(sets, members, under)
    known = np.where(np.isnan(side.stated_efficiency), np.nan, 1.0)
    returned = cycle.dumped_energy_j if feeds_back else np.zeros(len(side))
    returned_peak = draw.returned_peak_w if feeds_back else np.zeros(len(side))
    burnt = _resistor(sets, side, cycle, cycle_s, feeds_back=feeds_back)
    extra = np.where(burnt["brake_energy_j"] > 0.0, burnt["brake_energy_j"] - cycle.dumped_energy_j, 0.0)
    return BusResults(
        capacitance_f=side.capacitance_f,
        threshold_v=side.threshold_v,
        release_v=side.release_v,
        steady_power_w=side.steady_w,
        room_j=side.room_j,
        voltage_max_v=_highest_voltage(sets, side, cycle, draw.gives_back, returned_peak),
        voltage_max_at_s=cycle.peak_at_s,
        **burnt,
        returned_power_mean_w=returned / cycle_s,
        returned_power_peak_w=returned_peak,
        supply_power_mean_w=known * (cycle.supply_energy_j + extra - returned) / cycle_s,
        supply_power_peak_w=known * draw.peak_w,
        supply_power_peak_at_s=draw.peak_at_s,
        supply_power_rms_w=known * np.sqrt(draw.mean_square_w2),
        sag_utilisation=known * droop.utilisation,
        sag_voltage_needed_v=known * droop.needed_v,
        sag_voltage_available_v=known * droop.available_v,
        sag_at_s=known * droop.at_s,
        voltage_min_v=known * droop.lowest_v,
        voltage_min_at_s=known * droop.lowest_at_s,
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


def _resistor(
    sets: Sets, side: BusSide, cycle: BusCycle, cycle_s: float, *, feeds_back: bool
) -> dict[str, FloatArray]:
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
        "brake_power_mean_w": energy / cycle_s,
        "brake_power_peak_w": np.where(clamps, cycle.dumped_power_peak_w, 0.0),
    }
