"""Exact evaluation of motor × gearhead pairs: currents, voltages, temperatures, energies over the cycle.

Everything here is independent of the drive; a check that needs one combines these columns with it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.capability import terminal_voltage
from actuator_sizing.core.machine import JudgedMotor, current_of_torque, judge, judge_cold
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters, Surroundings, _Columns
from actuator_sizing.core.quadrature import largest, largest_magnitude, signed_integrals
from actuator_sizing.core.thermal import PeriodicState, periodic_state
from actuator_sizing.core.thermal_run import SingleRun, single_run
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.pair_course import (
    PairCourse,
    course,
    electrical_course,
    heat_loss,
    per_pair,
    speed_loss,
)
from actuator_sizing.sizing.thermal_data import thermal_network
from actuator_sizing.sizing.thermal_start import ThermalStart
from actuator_sizing.sizing.torque_plane import torque_plane

FloatArray = NDArray[np.float64]

_CHUNK = 128  # pairs at a time: keeps the (pairs, pieces, nodes) arrays in cache
_MOST_NODES = 250_000  # in such an array, for a record of hundreds of pieces


@dataclass(frozen=True)
class PairResults(_Columns):
    """What the cycle asks of B motor × gearhead pairs; each field has shape (B,)."""

    torque_peak_nm: FloatArray  # air gap, magnitude
    torque_peak_at_s: FloatArray
    torque_min_nm: FloatArray
    torque_rms_nm: FloatArray
    shaft_torque_peak_nm: FloatArray
    current_peak_a: FloatArray
    current_rms_a: FloatArray
    speed_peak_rad_s: FloatArray
    speed_peak_at_s: FloatArray
    speed_rms_rad_s: FloatArray
    speed_mean_abs_rad_s: FloatArray
    voltage_peak_v: FloatArray
    voltage_peak_at_s: FloatArray
    voltage_peak_without_inductance_v: FloatArray
    voltage_peak_at_steps_v: FloatArray
    voltage_available_v: FloatArray
    voltage_is_cold: NDArray[np.bool_]  # whether the motor at ambient needs more than the hot one
    plane_is_cold: NDArray[np.bool_]
    plane_utilisation: FloatArray  # torque over voltage-limited torque, largest over the cycle
    plane_torque_nm: FloatArray  # torque there
    plane_capacity_nm: FloatArray
    plane_at_s: FloatArray
    copper_loss_mean_w: FloatArray  # winding, at judged temperatures
    cable_loss_mean_w: FloatArray
    friction_loss_mean_w: FloatArray
    energy_shaft_motoring_j: FloatArray
    energy_shaft_regenerated_j: FloatArray
    energy_airgap_motoring_j: FloatArray
    energy_airgap_regenerated_j: FloatArray
    energy_terminals_motoring_j: FloatArray
    energy_terminals_regenerated_j: FloatArray
    power_terminals_peak_w: FloatArray
    thermal_known: NDArray[np.bool_]
    has_equilibrium: NDArray[np.bool_]
    winding_max_degc: FloatArray
    winding_max_at_s: FloatArray
    winding_min_degc: FloatArray
    winding_mean_degc: FloatArray
    housing_max_degc: FloatArray
    housing_mean_degc: FloatArray
    inertia_ratio: FloatArray
    resistance_ohm: FloatArray  # winding, at judged temperatures
    cable_ohm: FloatArray  # motor cable in the motor's basis
    torque_constant_nm_per_a: FloatArray
    judged_winding_degc: FloatArray
    magnet_degc: FloatArray


def evaluate_pairs(
    demand: Demand,
    motors: MotorParameters,
    gearheads: GearheadParameters,
    surroundings: Surroundings,
    start: ThermalStart | None = None,
) -> PairResults:
    """Evaluate B pairs exactly.

    Parameters
    ----------
    demand : Demand
        The cycle at the driven shaft. [-]
    motors, gearheads : MotorParameters, GearheadParameters
        B rows each: row b of both is pair b. [-]
    surroundings : Surroundings
        Ambient, altitude, bus voltages, judged temperature. [-]
    start : ThermalStart, optional
        State of the B pairs before a cycle that runs once; a cycle repeats until its temperatures do. [-]

    Returns
    -------
    PairResults
        Shape (B,). Integrals are exact on smooth pieces; extrema are refined between the nodes. [-]
    """
    chunk = int(np.clip(_MOST_NODES // demand.position.size, 8, _CHUNK))
    parts = [
        _evaluate_chunk(
            demand,
            motors.take(slice(first, first + chunk)),
            gearheads.take(slice(first, first + chunk)),
            surroundings,
            None if start is None else start.take(slice(first, first + chunk)),
        )
        for first in range(0, len(motors), chunk)
    ]
    return PairResults.joined(parts)


def _evaluate_chunk(
    demand: Demand,
    motors: MotorParameters,
    gearheads: GearheadParameters,
    surroundings: Surroundings,
    start: ThermalStart | None,
) -> PairResults:
    judged = judge(motors, surroundings)
    c = course(demand, motors, gearheads, judged)
    duration = demand.duration_s
    i, omega, T = c.current_a, c.motor_speed_rad_s, c.torque_nm

    torque_peak, piece, position = largest_magnitude(T)
    torque_peak_at = demand.instant(piece, position)
    cold = judge_cold(motors, surroundings)
    c_cold = electrical_course(demand, T, omega, c.shaft_torque_nm, cold)
    voltage = worse_of(voltage_extremes(demand, c), voltage_extremes(demand, c_cold), "voltage_peak_v")
    plane = worse_of(torque_plane(demand, c, judged), torque_plane(demand, c_cold, cold), "plane_utilisation")
    speed_peak, speed_piece, speed_position = largest_magnitude(omega)

    squared = i**2
    airgap = T * omega
    terminals = airgap + per_pair(judged.resistance_ohm) * squared
    winding_ohm, mean_square = judged.resistance_ohm - judged.cable_ohm, demand.mean(squared)
    shaft = c.shaft_torque_nm * omega
    energy_shaft = signed_integrals(duration, shaft)
    energy_airgap = signed_integrals(duration, airgap)
    energy_terminals = signed_integrals(duration, terminals)

    network, loss = thermal_network(motors, surroundings), heat_loss(demand, motors, gearheads, judged, c)
    temperatures: PeriodicState | SingleRun
    if start is None:
        temperatures = periodic_state(network, loss, surroundings.ambient_degc)
    else:
        state = start.winding_degc, start.housing_degc
        after = start.losses_after(motors, gearheads, judged)
        temperatures = single_run(network, loss, surroundings.ambient_degc, *state, after)
    reflected = demand.load_inertia / gearheads.ratio**2
    return PairResults(
        torque_peak_nm=torque_peak,
        torque_peak_at_s=torque_peak_at,
        torque_min_nm=-largest(-T)[0],
        torque_rms_nm=np.sqrt(demand.mean(T**2)),
        shaft_torque_peak_nm=largest_magnitude(c.shaft_torque_nm)[0],
        # From the largest torque, since current rises with it: near saturation i itself is hard to interpolate.
        current_peak_a=current_of_torque(
            torque_peak, judged.torque_constant_nm_per_a, judged.saturation_per_a2
        ),
        current_rms_a=np.sqrt(mean_square),
        speed_peak_rad_s=speed_peak,
        speed_peak_at_s=demand.instant(speed_piece, speed_position),
        speed_rms_rad_s=gearheads.ratio * demand.shaft_speed_rms,
        speed_mean_abs_rad_s=gearheads.ratio * demand.shaft_speed_mean,
        voltage_peak_at_steps_v=np.maximum(
            _voltage_at_steps(c, judged, surroundings.current_loop_rise_s),
            _voltage_at_steps(c_cold, cold, surroundings.current_loop_rise_s),
        ),
        voltage_available_v=judged.voltage_available_v,
        **voltage,
        **plane,
        copper_loss_mean_w=winding_ohm * mean_square,
        cable_loss_mean_w=judged.cable_ohm * mean_square,
        friction_loss_mean_w=demand.mean(speed_loss(motors, omega)),
        energy_shaft_motoring_j=energy_shaft[0],
        energy_shaft_regenerated_j=energy_shaft[1],
        energy_airgap_motoring_j=energy_airgap[0],
        energy_airgap_regenerated_j=energy_airgap[1],
        energy_terminals_motoring_j=energy_terminals[0],
        energy_terminals_regenerated_j=energy_terminals[1],
        power_terminals_peak_w=largest(terminals)[0],
        thermal_known=temperatures.known,
        has_equilibrium=temperatures.has_equilibrium,
        winding_max_degc=temperatures.winding_max_degc,
        winding_max_at_s=temperatures.winding_max_time_s,
        winding_min_degc=temperatures.winding_min_degc,
        winding_mean_degc=temperatures.winding_mean_degc,
        housing_max_degc=temperatures.housing_max_degc,
        housing_mean_degc=temperatures.housing_mean_degc,
        inertia_ratio=reflected / motors.rotor_inertia_kg_m2,
        resistance_ohm=winding_ohm,
        cable_ohm=judged.cable_ohm,
        torque_constant_nm_per_a=judged.torque_constant_nm_per_a,
        judged_winding_degc=judged.winding_degc,
        magnet_degc=judged.magnet_degc,
    )


def voltage_extremes(demand: Demand, c: PairCourse) -> dict[str, FloatArray]:
    """Largest voltage with and without ``L di/dt``, and when."""
    with_L, without_L = largest_magnitude(c.voltage_v), largest_magnitude(c.voltage_without_inductance_v)
    return {
        "voltage_peak_v": np.maximum(with_L[0], without_L[0]),
        "voltage_peak_at_s": np.where(
            with_L[0] >= without_L[0], demand.instant(*with_L[1:]), demand.instant(*without_L[1:])
        ),
        "voltage_peak_without_inductance_v": without_L[0],
    }


def worse_of(hot: dict[str, FloatArray], cold: dict[str, FloatArray], decides: str) -> dict[str, Any]:
    """Pair by pair what is larger, hot or cold, and which it is."""
    is_cold = cold[decides] > hot[decides]
    chosen = {name: np.where(is_cold, cold[name], value) for name, value in hot.items()}
    return {**chosen, f"{decides.split('_')[0]}_is_cold": is_cold}


def _voltage_at_steps(c: PairCourse, judged: JudgedMotor, rise_s: float) -> FloatArray:
    """Largest voltage where acceleration jumps and the current loop takes `rise_s` to follow. [V]"""
    after = c.current_a[:, :, 0]
    before = np.roll(c.current_a[:, :, -1], 1, axis=1)
    slope = (after - before) / rise_s
    return np.asarray(
        terminal_voltage(
            after,
            c.motor_speed_rad_s[:, :, 0],
            slope,
            judged.resistance_ohm[:, None],
            judged.inductance_h[:, None],
            judged.torque_constant_nm_per_a[:, None],
            judged.reactance_per_speed[:, None],
        ).max(axis=1)
    )
