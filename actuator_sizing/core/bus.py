"""DC bus over a cycle in periodic steady state: what the capacitors keep, the resistor burns, the supply gives.

A rectifier, a DC supply or a battery holds the bus at its own voltage and takes nothing back; regenerated
energy raises the voltage until a chopper, taken as an ideal clamp, sends the rest to its resistor. The state is
the energy stored above the level of the supply. Power is positive where the axis takes it from the bus.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.power_runs import PowerRuns, bus_energy
from actuator_sizing.core.quadrature import (
    antiderivative_matrix,
    bracketed_roots,
    cumulative_matrix,
    refined_maximum,
    series_value,
)

FloatArray = NDArray[np.float64]

_POINTS = 33  # per clamped run on which the peak power is bracketed
_NOTHING = 1e-12  # energy below this part of the largest run is rounding, not a pulse


@dataclass(frozen=True)
class BusCycle:
    """The bus over one periodic cycle; each field has shape (B,) unless said otherwise."""

    start_energy_j: FloatArray  # stored above the level of the supply when the cycle starts
    peak_energy_j: FloatArray  # largest stored; infinite where each cycle leaves more than the last
    peak_at_s: FloatArray
    supply_energy_j: FloatArray  # per cycle
    dumped_energy_j: FloatArray  # per cycle: into the resistor, or back to a supply that takes it
    dumped_power_peak_w: FloatArray
    dumped_pulse_j: FloatArray  # largest between two times of motoring
    pulses: NDArray[np.intp]  # how many of them in a cycle
    pulse_energy_j: FloatArray  # (B, N) of the pulse that ends with each run, zero for the other runs
    pulse_time_s: FloatArray  # (B, N) how long that pulse took
    energy_at_run_j: FloatArray  # (B, N) stored when each run starts


def bus_cycle(runs: PowerRuns, efficiency: FloatArray, room_j: FloatArray) -> BusCycle:
    """Stored energy of the bus over one cycle in periodic steady state.

    Parameters
    ----------
    runs : PowerRuns
        Power at the terminals of B candidates. [-]
    efficiency : ndarray, shape (B,)
        Of the drive, in the direction power flows. [-]
    room_j : ndarray, shape (B,)
        Energy that the capacitors take between the level of the supply and the chopper threshold,
        ``½ C (U_ch² − U_0²)``; infinite without chopper, zero for a supply that takes everything back. [J]

    Returns
    -------
    BusCycle
        Exact for the interpolated power. [-]

    Notes
    -----
    Within a run the stored energy moves one way, so that the run maps ``w`` to ``clip(w − e, 0, room)``. Such
    maps compose to ``clip(w + a, low, high)``, whose fixed point is `low` where the cycle takes more than it
    gives, `high` where it gives more: the start is what the last dwell left, found without simulating cycles.
    Below the level of the supply the rectifier conducts; it never feeds back. First principles.
    """
    energy = bus_energy(runs.energy_j, efficiency)
    batch, count = energy.shape
    shift, low, high = np.zeros(batch), np.zeros(batch), np.array(room_j, dtype=float)
    for n in range(count):
        e = energy[:, n]
        shift, low, high = (
            shift - e,
            np.clip(low - e, 0.0, room_j),
            np.clip(high - e, 0.0, room_j),
        )
    start = np.where(shift > 0.0, high, low)
    unbounded = np.isinf(start)
    stored = np.where(unbounded, 0.0, start)
    at_run, supplied, dumped = (np.zeros((batch, count)) for _ in range(3))
    for n in range(count):
        at_run[:, n] = stored
        after = stored - energy[:, n]
        stored = np.clip(after, 0.0, room_j)
        supplied[:, n] = np.maximum(-after, 0.0)
        dumped[:, n] = np.maximum(after - room_j, 0.0)
    floor = _NOTHING * np.abs(energy).max(axis=1, initial=0.0)[:, None]
    dumped[dumped <= floor] = 0.0
    clamping = _clamping(runs, efficiency, room_j, at_run, dumped)
    pulses = _pulses(energy, dumped, clamping.lasts_s)
    reached = np.concatenate([at_run[:, 1:], stored[:, None]], axis=1)
    latest = reached.argmax(axis=1)
    row = np.arange(batch)
    peak = np.where(unbounded, np.inf, np.maximum(reached[row, latest], at_run[:, 0]))
    return BusCycle(
        start_energy_j=np.where(unbounded, np.inf, start),
        peak_energy_j=peak,
        peak_at_s=np.where(peak > 0.0, runs.end_time_s()[row, latest], np.nan),
        supply_energy_j=supplied.sum(axis=1),
        dumped_energy_j=dumped.sum(axis=1),
        dumped_power_peak_w=_dumped_power_peak(runs, efficiency, clamping),
        dumped_pulse_j=pulses[1].max(axis=1, initial=0.0),
        pulses=pulses[0],
        pulse_energy_j=pulses[1],
        pulse_time_s=pulses[2],
        energy_at_run_j=at_run,
    )


@dataclass(frozen=True)
class _Clamping:
    """The stretches in which the chopper clamps, one entry each, and how long that is in every run."""

    row: NDArray[np.intp]
    run: NDArray[np.intp]
    start: FloatArray  # position in the piece of the run
    lasts_s: FloatArray  # (B, N)


def _clamping(
    runs: PowerRuns, efficiency: FloatArray, room_j: FloatArray, at_run: FloatArray, dumped: FloatArray
) -> _Clamping:
    """Where in each run the room is full."""
    row, run = np.nonzero(dumped > 0.0)
    lasts = np.zeros_like(dumped)
    if not len(row):
        return _Clamping(row, run, np.empty(0), lasts)
    series = runs.series[row, runs.piece[run]].T
    half = 0.5 * np.broadcast_to(runs.piece_duration_s(), dumped.shape)[row, run]
    low, high = runs.begin[row, run], runs.end[row, run]
    # Terminal energy that fills the room which is left when the run starts.
    filling = (room_j[row] - at_run[row, run]) / efficiency[row]
    late = filling > 0.0
    given = -(antiderivative_matrix(len(series)) @ series[:, late])
    given[0] -= series_value(given, low[late]) + filling[late] / half[late]
    start = low.copy()
    start[late] = bracketed_roots(
        given, low[late], high[late], np.ones(int(late.sum()), dtype=bool), 0.5 * (low + high)[late]
    )
    lasts[row, run] = half * (runs.end[row, run] - start)
    return _Clamping(row, run, start, lasts)


def _pulses(
    energy: FloatArray, dumped: FloatArray, lasts_s: FloatArray
) -> tuple[NDArray[np.intp], FloatArray, FloatArray]:
    """Count of pulses, and energy and time of each at the run that ends it; the cycle wraps, so it is walked twice.

    A bus that never motors dumps one pulse per cycle.
    """
    batch, runs = energy.shape
    so_far, taking = np.zeros(batch), np.zeros(batch)
    pulse, time = np.zeros((batch, runs)), np.zeros((batch, runs))
    never = ~np.any(energy > 0.0, axis=1)
    goes_on = np.zeros(batch, dtype=bool)
    ends = np.zeros((batch, runs), dtype=bool)
    for walk in range(2):
        if walk == 1:
            so_far, taking = np.where(never, 0.0, so_far), np.where(never, 0.0, taking)
            goes_on &= ~never
        for n in reversed(range(runs)):
            dumps = dumped[:, n] > 0.0
            ends[:, n] = dumps & ~goes_on
            goes_on = (goes_on | dumps) & ~(energy[:, n] > 0.0)
        for n in range(runs):
            motors = energy[:, n] > 0.0
            so_far, taking = np.where(motors, 0.0, so_far), np.where(motors, 0.0, taking)
            so_far, taking = so_far + dumped[:, n], taking + lasts_s[:, n]
            pulse[:, n], time[:, n] = so_far, taking
    return ends.sum(axis=1), np.where(ends, pulse, 0.0), np.where(ends, time, 0.0)


def _dumped_power_peak(runs: PowerRuns, efficiency: FloatArray, clamping: _Clamping) -> FloatArray:
    """Largest power while the chopper clamps, for each candidate."""
    peak = np.zeros(len(clamping.lasts_s))
    row, run = clamping.row, clamping.run
    if not len(row):
        return peak
    series = runs.series[row, runs.piece[run]].T
    clamped_from, end = clamping.start, runs.end[row, run]
    grid = 0.5 * (1.0 - np.cos(np.pi * np.arange(_POINTS) / (_POINTS - 1)))
    x = clamped_from + grid[:, None] * (end - clamped_from)
    values = -series_value(series, x)
    top = values.argmax(axis=0)
    column = np.arange(len(row))
    best = values[top, column]
    left = x[np.maximum(top - 1, 0), column]
    right = x[np.minimum(top + 1, _POINTS - 1), column]
    inner = (top > 0) & (top < _POINTS - 1)
    mine = -series[:, inner]
    at = refined_maximum(mine.T, x[top, column][inner], left[inner], right[inner])
    best[inner] = np.maximum(best[inner], series_value(mine, at))
    np.maximum.at(peak, row, best * efficiency[row])
    return peak


def stored_at_nodes(runs: PowerRuns, cycle: BusCycle) -> FloatArray:
    """Stored energy at the nodes of every run, for a bus without chopper whose runs are those of its own power.

    Parameters
    ----------
    runs : PowerRuns
        Power at the bus of B candidates. [-]
    cycle : BusCycle
        What `bus_cycle` found for it with an efficiency of one and infinite room. [-]

    Returns
    -------
    ndarray, shape (B, N, K)
        Energy above the level of the supply. [J]
    """
    half = 0.5 * runs.run_duration_s()[..., None]
    given = -half * (runs.values(runs.series) @ cumulative_matrix(runs.series.shape[2]).T)
    stored = cycle.energy_at_run_j[..., None] + given
    nothing = _NOTHING * np.abs(runs.energy_j).max(axis=1, initial=0.0)[:, None, None]
    return np.where(stored > nothing, stored, 0.0)


def bus_course(
    runs: PowerRuns, efficiency: FloatArray, room_j: FloatArray, cycle: BusCycle, points: int = 9
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Stored energy and power at the bus over one cycle, for one candidate.

    Parameters
    ----------
    runs : PowerRuns
        One row. [-]
    efficiency : ndarray, shape (1,)
        As in `bus_cycle`. [-]
    room_j : ndarray, shape (1,)
        As in `bus_cycle`. [J]
    cycle : BusCycle
        What `bus_cycle` found for it. [-]
    points : int
        Points per run, both ends included. [-]

    Returns
    -------
    time_s : ndarray, shape (n,)
        Instants; both sides of each border are kept. [s]
    stored_j : ndarray, shape (n,)
        Energy above the level of the supply. [J]
    power_w : ndarray, shape (n,)
        Power that the axis takes from the bus. [W]
    """
    integral = antiderivative_matrix(runs.series.shape[2]) @ runs.series[0].T
    durations = np.ravel(runs.duration_s)
    start = np.concatenate([[0.0], np.cumsum(durations)[:-1]])
    time, stored, power = [], [], []
    for n, piece in enumerate(runs.piece):
        if runs.end[0, n] <= runs.begin[0, n] or durations[piece] <= 0.0:
            continue
        x = np.linspace(runs.begin[0, n], runs.end[0, n], points)
        half = 0.5 * durations[piece]
        area = series_value(np.repeat(integral[:, piece : piece + 1], points, axis=1), x)
        taken = bus_energy((half * (area - area[0]))[None], efficiency)[0]
        values = series_value(np.repeat(runs.series[0, piece][:, None], points, axis=1), x)
        time.append(start[piece] + half * (x + 1.0))
        stored.append(np.clip(cycle.energy_at_run_j[0, n] - taken, 0.0, room_j[0]))
        power.append(bus_energy(values[None], efficiency)[0])
    return np.concatenate(time), np.concatenate(stored), np.concatenate(power)


def stored_voltage(
    supply_v: FloatArray | float, capacitance_f: FloatArray, stored_j: FloatArray
) -> FloatArray:
    """Bus voltage with an energy stored above the level of the supply.

    Parameters
    ----------
    supply_v : array_like
        Voltage of the supply. [V]
    capacitance_f : ndarray
        Capacitance on the bus. [F]
    stored_j : ndarray
        Energy above that level. [J]

    Returns
    -------
    ndarray
        ``√(U_0² + 2 W/C)``. [V]

    Examples
    --------
    >>> import numpy as np
    >>> float(stored_voltage(325.0, np.array(470e-6), np.array(15.0)))
    411.649
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        rise = np.where(stored_j > 0.0, 2.0 * stored_j / capacitance_f, 0.0)
    return np.asarray(np.sqrt(np.square(supply_v) + rise))


def clamp_room(capacitance_f: FloatArray, supply_v: float, threshold_v: FloatArray) -> FloatArray:
    """Energy the capacitors take between the supply's voltage and the chopper threshold.

    Parameters
    ----------
    capacitance_f : ndarray
        Capacitance on the bus. [F]
    supply_v : float
        Highest voltage of the supply. [V]
    threshold_v : ndarray
        Chopper threshold; NaN without chopper. [V]

    Returns
    -------
    ndarray
        ``½ C (U_ch² − U_0²)``, zero if the threshold is below the supply, infinite without chopper. [J]

    Examples
    --------
    >>> import numpy as np
    >>> float(clamp_room(np.array(470e-6), 325.0, np.array(400.0)))
    12.7781
    """
    room = 0.5 * capacitance_f * np.maximum(np.square(threshold_v) - supply_v**2, 0.0)
    return np.asarray(np.where(np.isnan(threshold_v), np.inf, room))
