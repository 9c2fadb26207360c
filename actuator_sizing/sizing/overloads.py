"""Events that heat the winding from its warm state, and holds that load one phase: studies of S sets."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.machine import current_of_torque, judge, resistance_at
from actuator_sizing.core.overload_heat import after_current, phase_excess, standstill_phase_factor
from actuator_sizing.core.transmission import STANDSTILL, stage_factor
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.checks.motor import peak_current
from actuator_sizing.sizing.stops import controlled_stops
from actuator_sizing.sizing.thermal_data import thermal_network

FloatArray = NDArray[np.float64]


def after_peak_current(sets: Sets, duration_s: FloatArray, phase_factor: FloatArray | float) -> FloatArray:
    """Winding temperature after the peak current has flowed, from the hottest state of the cycle.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    duration_s : ndarray, shape (S,)
        How long it flows. [s]
    phase_factor : ndarray or float
        Heat of the hottest phase over the mean of all. [-]

    Returns
    -------
    ndarray, shape (S,)
        NaN where data is missing or the cycle itself has no equilibrium. [°C]
    """
    p, surroundings = sets.pairs, sets.surroundings
    network = thermal_network(sets.motors, surroundings)
    start = (p.winding_max_degc, p.housing_max_degc)
    return after_current(
        network, sets.motors, surroundings.ambient_degc, start, peak_current(sets), duration_s, phase_factor
    )


def jam_temperature(sets: Sets) -> FloatArray:
    """Hottest phase after the axis is blocked at the peak current for the jam duration, shape (S,). [°C]"""
    duration = np.full(len(sets), sets.option("jam duration"))
    return after_peak_current(sets, duration, standstill_phase_factor(sets.motors.commutation))


def stop_heating_time(sets: Sets) -> FloatArray:
    """Time at the peak current of the stops in a row and the starts between them, shape (S,). [s]"""
    count = sets.option("stops in a row")
    braking = sets.once(controlled_stops).time_s - sets.option("stop reaction time")
    return np.asarray((2.0 * count - 1.0) * np.maximum(braking, 0.0))


def stops_temperature(sets: Sets) -> FloatArray:
    """Winding after the stops in a row, from the hottest state of the cycle, shape (S,). [°C]"""
    return after_peak_current(sets, stop_heating_time(sets), 1.0)


def held_stretches(sets: Sets) -> list[tuple[NDArray[np.intp], float]]:
    """Stretches of the cycle at rest without a closed brake: their pieces, and how long each lasts [s]."""
    demand = sets.demand
    held = (demand.direction == 0.0) & ~demand.brake_closed
    if held.all():
        return [(np.arange(len(held)), demand.cycle_s)]
    first = int(np.flatnonzero(~held)[0])  # the cycle repeats: begin where it moves
    order = np.roll(np.arange(len(held)), -first)
    borders = np.flatnonzero(np.diff(held[order].astype(int))) + 1
    runs = [run for run in np.split(order, borders) if held[run[0]]]
    return [(run, float(demand.duration_s[run].sum())) for run in runs]


def hold_excess(sets: Sets) -> tuple[FloatArray, FloatArray]:
    """How much hotter than the mean of the winding its hottest phase gets while the motor holds.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    excess_k : ndarray, shape (S,)
        Largest over the holds of the cycle, at the worst angle; NaN where data is missing. [K]
    current_a : ndarray, shape (S,)
        Holding current of that hold. [A]
    """
    demand, motors, gearheads = sets.demand, sets.motors, sets.gearheads
    judged = judge(motors, sets.surroundings)
    rest = np.full(len(sets), STANDSTILL, dtype=np.int8)
    factor = stage_factor(rest, gearheads.efficiency, gearheads.efficiency_back) / gearheads.ratio
    hot = resistance_at(motors, judged.winding_degc)
    network = thermal_network(motors, sets.surroundings)
    tau = network.winding_resistance_k_w * network.winding_capacity_j_k
    phase = standstill_phase_factor(motors.commutation)
    excess, holding = np.zeros(len(sets)), np.zeros(len(sets))
    for pieces, lasts in held_stretches(sets):
        torque = factor[:, None] * demand.shaft_torque[pieces].reshape(1, -1)
        own = motors.rotor_inertia_kg_m2[:, None] * demand.motor_acceleration[pieces].reshape(1, -1)
        largest = np.abs(torque + np.where(motors.is_linear[:, None], own, 0.0)).max(axis=1)
        current = current_of_torque(largest, judged.torque_constant_nm_per_a, judged.saturation_per_a2)
        found = phase_excess(
            hot * current**2, phase, network.winding_resistance_k_w, tau, lasts, demand.cycle_s
        )
        worse = ~(found <= excess)
        excess, holding = np.where(worse, found, excess), np.where(worse, current, holding)
    return np.where(network.has_housing, excess, np.nan), holding
