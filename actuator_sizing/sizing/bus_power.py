"""Power of S sets at the DC bus over the cycle, from the motor terminals through the drive."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.machine import judge, judge_cold
from actuator_sizing.core.power_runs import PowerRuns, bus_energy, bus_pieces, power_runs
from actuator_sizing.core.quadrature import largest, lobatto, to_series
from actuator_sizing.sizing.bus_side import BusSide
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.pair_course import course, electrical_course

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class TerminalPower:
    """Power and voltage at the terminals of B motor × gearhead pairs over the cycle."""

    runs: PowerRuns
    power_w: FloatArray  # (B, P, K)
    voltage_v: FloatArray  # (B, P, K) the larger of hot and cold, with and without L di/dt


@dataclass(frozen=True)
class BusPower:
    """Power at the bus of S sets on smooth pieces of their own; lengths may be zero."""

    duration_s: FloatArray  # (S, N)
    power_w: FloatArray  # (S, N, K)

    @cached_property
    def runs(self) -> PowerRuns:
        """The same, cut where the power changes sign."""
        return power_runs(self.duration_s, self.power_w)

    def mean_square(self, cycle_s: float) -> FloatArray:
        """Mean square of what is taken, shape (S,). [W²]"""
        weights = 0.5 * lobatto(self.power_w.shape[2])[1]
        taken = np.maximum(self.power_w, 0.0) ** 2
        total = np.einsum("snk,k,sn->s", taken, weights, self.duration_s, optimize=True)
        return np.asarray(total / cycle_s)

    def largest(self) -> tuple[FloatArray, FloatArray]:
        """Largest power and when, each of shape (S,)."""
        lasts = self.duration_s > 0.0
        # A piece of no length is a border that its neighbours hold too.
        power = np.where(lasts[..., None], self.power_w, -np.inf)
        lowest = np.where(np.isinf(power), self.power_w.min(axis=(1, 2))[:, None, None], power)
        value, piece, position = largest(lowest)
        row = np.arange(len(value))
        start = np.cumsum(self.duration_s, axis=1) - self.duration_s
        return value, start[row, piece] + 0.5 * (position + 1.0) * self.duration_s[row, piece]


def terminal_power(sets: Sets, pairs: NDArray[np.intp]) -> TerminalPower:
    """Power at the motor terminals of motor × gearhead pairs.

    Parameters
    ----------
    sets : Sets
        Holds case and cycle. [-]
    pairs : ndarray of int, shape (B, 2)
        Motor and gearhead of each pair. [-]

    Returns
    -------
    TerminalPower
        Hot power; for the voltage the worse of hot and cold. [-]
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
    return TerminalPower(power_runs(sets.demand.duration_s, power), power, voltage)


def power_at_bus(terminals: TerminalPower, pair: NDArray[np.intp], side: BusSide) -> BusPower:
    """Power at the bus of sets, each with its own drive.

    Parameters
    ----------
    terminals : TerminalPower
        Of B pairs. [-]
    pair : ndarray of int, shape (S,)
        Pair of each set. [-]
    side : BusSide
        Of the sets. [-]

    Returns
    -------
    BusPower
        Shape (S, ...). [-]
    """
    return BusPower(*bus_pieces(terminals.runs.take(pair), side.efficiency, side.steady_w))


def needed_voltage(terminals: TerminalPower, pair: NDArray[np.intp]) -> FloatArray:
    """Voltage that the motor of each set needs, at the nodes of the pieces of `power_at_bus`, (S, N, K). [V]"""
    series = terminals.voltage_v @ to_series(terminals.voltage_v.shape[2]).T
    return terminals.runs.take(pair).values(series[pair])


def mean_square_through_drive(
    terminals: TerminalPower, pair: NDArray[np.intp], side: BusSide, duration_s: FloatArray
) -> FloatArray:
    """Mean square of the power taken where the drive takes nothing of its own, shape (S,). [W²]"""
    taken = np.maximum(bus_energy(terminals.power_w[pair], side.efficiency), 0.0) ** 2
    weights = 0.5 * lobatto(taken.shape[2])[1]
    total = np.einsum("snk,k,n->s", taken, weights, duration_s, optimize=True)
    return np.asarray(total / duration_s.sum())
