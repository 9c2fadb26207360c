"""DC bus over a cycle in periodic steady state: what the capacitors keep, the resistor burns, the supply gives.

A rectifier, a DC supply or a battery holds the bus at its own voltage and takes nothing back; regenerated
energy raises the voltage until a chopper, taken as an ideal clamp, sends the rest to its resistor. The state is
the energy stored above the level of the supply. Power is positive where the axis takes it from the bus.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import antiderivative_matrix, series_value, to_series
from actuator_sizing.core.sign_changes import sign_changes

FloatArray = NDArray[np.float64]

_HALVINGS = 52  # of a piece: to rounding
_POINTS = 33  # per clamped run on which the peak power is bracketed
_NOTHING = 1e-12  # energy below this part of the largest run is rounding, not a pulse


@dataclass(frozen=True)
class PowerRuns:
    """Power of B candidates over one cycle, cut where it changes sign; N runs in the order of time.

    Runs of no length pad candidates with fewer changes of sign; they carry no energy.
    """

    piece: NDArray[np.intp]  # (N,)
    begin: FloatArray  # (B, N) position in the piece, on [−1, 1]
    end: FloatArray
    energy_j: FloatArray  # (B, N) taken from the terminals; negative: given back
    series: FloatArray  # (B, P, K) Legendre coefficients of the power
    duration_s: FloatArray  # (P,)

    def take(self, index: NDArray[np.intp]) -> PowerRuns:
        """Rows `index` of the candidates."""
        return PowerRuns(
            self.piece,
            self.begin[index],
            self.end[index],
            self.energy_j[index],
            self.series[index],
            self.duration_s,
        )

    def end_time_s(self) -> FloatArray:
        """When each run ends, shape (B, N). [s]"""
        start = np.concatenate([[0.0], np.cumsum(self.duration_s)[:-1]])
        return np.asarray(start[self.piece] + 0.5 * (self.end + 1.0) * self.duration_s[self.piece])


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
    energy_at_run_j: FloatArray  # (B, N) stored when each run starts


def power_runs(duration_s: FloatArray, power_w: FloatArray) -> PowerRuns:
    """Cut the power of B candidates into runs of one sign.

    Parameters
    ----------
    duration_s : ndarray, shape (P,)
        Length of each smooth piece. [s]
    power_w : ndarray, shape (B, P, K)
        Power at the motor terminals at the nodes; positive motoring. [W]

    Returns
    -------
    PowerRuns
        Runs in the order of time, with their energy in closed form of the interpolant. [-]
    """
    batch, pieces, count = power_w.shape
    series = power_w @ to_series(count).T
    row, piece, position = sign_changes(series)
    key = row * pieces + piece
    first = np.searchsorted(key, key, side="left")
    rank = np.arange(len(key)) - first
    most = int(rank.max()) + 1 if len(rank) else 0
    borders = np.ones((batch, pieces, most + 2))
    borders[:, :, 0] = -1.0
    borders[row, piece, rank + 1] = position
    integral = (series @ antiderivative_matrix(count).T).transpose(2, 0, 1)
    area = np.stack([series_value(integral, borders[:, :, k]) for k in range(most + 2)], axis=2)
    energy = 0.5 * duration_s[:, None] * np.diff(area, axis=2)
    shape = (batch, pieces * (most + 1))
    return PowerRuns(
        piece=np.repeat(np.arange(pieces), most + 1),
        begin=borders[:, :, :-1].reshape(shape),
        end=borders[:, :, 1:].reshape(shape),
        energy_j=energy.reshape(shape),
        series=series,
        duration_s=duration_s,
    )


def bus_energy(terminal_j: FloatArray, efficiency: FloatArray) -> FloatArray:
    """Energy or power at the bus from that at the motor terminals, by the drive's efficiency.

    Parameters
    ----------
    terminal_j : ndarray, shape (B, ...)
        At the terminals; positive motoring. [J]
    efficiency : ndarray, shape (B,)
        Of the drive, in the direction power flows. [-]

    Returns
    -------
    ndarray, shape as `terminal_j`
        ``E/η`` motoring, ``E η`` regenerating. [J]

    Examples
    --------
    >>> import numpy as np
    >>> bus_energy(np.array([[9.0, -10.0]]), np.array([0.9])).tolist()
    [[10.0, -9.0]]
    """
    eta = efficiency.reshape(-1, *[1] * (terminal_j.ndim - 1))
    return np.asarray(np.where(terminal_j > 0.0, terminal_j / eta, terminal_j * eta))


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
        dumped_power_peak_w=_dumped_power_peak(runs, efficiency, room_j, at_run, dumped),
        dumped_pulse_j=_largest_pulse(energy, dumped),
        energy_at_run_j=at_run,
    )


def _largest_pulse(energy: FloatArray, dumped: FloatArray) -> FloatArray:
    """Largest energy dumped between two runs of motoring; the cycle wraps, so it is walked twice."""
    pulse = np.zeros(len(energy))
    largest = np.zeros(len(energy))
    motoring = bool(np.any(energy > 0.0))
    for _ in range(2 if motoring else 1):
        for n in range(energy.shape[1]):
            pulse = np.where(energy[:, n] > 0.0, 0.0, pulse) + dumped[:, n]
            largest = np.maximum(largest, pulse)
    never = ~np.any(energy > 0.0, axis=1)
    return np.where(never, dumped.sum(axis=1), largest)


def _dumped_power_peak(
    runs: PowerRuns, efficiency: FloatArray, room_j: FloatArray, at_run: FloatArray, dumped: FloatArray
) -> FloatArray:
    """Largest power while the chopper clamps, for each candidate."""
    peak = np.zeros(len(dumped))
    row, run = np.nonzero(dumped > 0.0)
    if not len(row):
        return peak
    piece = runs.piece[run]
    series = runs.series[row, piece].T
    half = 0.5 * runs.duration_s[piece]
    begin, end = runs.begin[row, run], runs.end[row, run]
    # Terminal energy that fills the room which is left when the run starts.
    filling = (room_j[row] - at_run[row, run]) / efficiency[row]
    integral = antiderivative_matrix(len(series)) @ series
    at_begin = series_value(integral, begin)
    low, high = begin.copy(), end.copy()
    late = filling > 0.0
    for _ in range(_HALVINGS if late.any() else 0):
        middle = 0.5 * (low + high)
        before = half * (at_begin - series_value(integral, middle)) < filling
        low, high = np.where(before, middle, low), np.where(before, high, middle)
    clamped_from = np.where(late, low, begin)
    grid = 0.5 * (1.0 - np.cos(np.pi * np.arange(_POINTS) / (_POINTS - 1)))
    x = clamped_from + grid[:, None] * (end - clamped_from)
    values = np.stack([-series_value(series, points) for points in x])
    top = values.argmax(axis=0)
    column = np.arange(len(row))
    best = values[top, column]
    left = x[np.maximum(top - 1, 0), column]
    right = x[np.minimum(top + 1, _POINTS - 1), column]
    inner = (top > 0) & (top < _POINTS - 1)
    for _ in range(40 if inner.any() else 0):  # thirds: the maximum between neighbours of the grid
        a, b = left + (right - left) / 3.0, right - (right - left) / 3.0
        f_a, f_b = -series_value(series, a), -series_value(series, b)
        best = np.maximum(best, np.where(inner, np.maximum(f_a, f_b), best))
        left, right = np.where(f_a < f_b, a, left), np.where(f_a < f_b, right, b)
    np.maximum.at(peak, row, best * efficiency[row])
    return peak


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
    start = np.concatenate([[0.0], np.cumsum(runs.duration_s)[:-1]])
    time, stored, power = [], [], []
    for n, piece in enumerate(runs.piece):
        if runs.end[0, n] <= runs.begin[0, n]:
            continue
        x = np.linspace(runs.begin[0, n], runs.end[0, n], points)
        half = 0.5 * runs.duration_s[piece]
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


def sagged_voltage(no_load_v: float, resistance_ohm: float, power_w: FloatArray) -> FloatArray:
    """Bus voltage of a supply with internal resistance that feeds a power, without help from the capacitors.

    Parameters
    ----------
    no_load_v : float
        Voltage of the supply without load. [V]
    resistance_ohm : float
        Internal resistance of supply and leads. [Ω]
    power_w : ndarray
        Power taken from the bus; a negative power does not lift the voltage of a rectifier. [W]

    Returns
    -------
    ndarray
        ``U_0/2 + √(U_0²/4 − R P)``; zero beyond the largest power ``U_0²/(4 R)`` that the supply can give. [V]

    Notes
    -----
    The stable root of ``P = U (U_0 − U)/R``. First principles.

    Examples
    --------
    >>> import numpy as np
    >>> float(sagged_voltage(48.0, 0.1, np.array(1000.0)))
    45.817
    """
    under = 0.25 * no_load_v**2 - resistance_ohm * np.maximum(power_w, 0.0)
    return np.asarray(np.where(under >= 0.0, 0.5 * no_load_v + np.sqrt(np.maximum(under, 0.0)), 0.0))
