"""Exact evaluation of motor × gearhead pairs: currents, voltages, temperatures, energies over the cycle.

Everything here is independent of the drive; a check that needs one combines these columns with it.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.capability import terminal_voltage, voltage_limited_current
from actuator_sizing.core.machine import JudgedMotor, current_of_torque, judge, torque_of_current
from actuator_sizing.core.moments import gearhead_rows, motor_columns
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters, Surroundings, _Columns
from actuator_sizing.core.quadrature import (
    differentiation_matrix,
    largest,
    largest_magnitude,
    series_value,
    signed_integrals,
    to_series,
)
from actuator_sizing.core.thermal import (
    HeatLoss,
    periodic_state,
    subpiece_counts,
    subpiece_durations,
    subpiece_means,
)
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.thermal_data import fastest_time_constant, thermal_network

FloatArray = NDArray[np.float64]

_CHUNK = 128  # pairs at a time: keeps the (pairs, pieces, nodes) arrays in cache


@dataclass(frozen=True)
class PairCourse:
    """Courses over the cycle of B pairs at the nodes, shape (B, P, K), at judged temperatures."""

    motor_speed_rad_s: FloatArray
    torque_nm: FloatArray  # air gap
    shaft_torque_nm: FloatArray  # motor shaft
    current_a: FloatArray  # in the motor's basis
    current_slope_a_s: FloatArray
    voltage_v: FloatArray
    voltage_without_inductance_v: FloatArray


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
    plane_utilisation: FloatArray  # torque over voltage-limited torque, largest over the cycle
    plane_torque_nm: FloatArray  # torque there
    plane_capacity_nm: FloatArray
    plane_at_s: FloatArray
    copper_loss_mean_w: FloatArray  # at judged temperatures
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
    resistance_ohm: FloatArray  # at judged temperatures
    torque_constant_nm_per_a: FloatArray
    judged_winding_degc: FloatArray
    magnet_degc: FloatArray


def _column(values: FloatArray) -> FloatArray:
    return values[:, None, None]


def air_gap_torque(
    demand: Demand, motors: MotorParameters, gearheads: GearheadParameters
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Air-gap torque, motor speed and motor shaft torque at the nodes for B pairs.

    Parameters
    ----------
    demand : Demand
        The cycle at the driven shaft. [-]
    motors, gearheads : MotorParameters, GearheadParameters
        B rows each: the pairs. [-]

    Returns
    -------
    torque_nm : ndarray, shape (B, P, K)
        Torque at the air gap. [N·m]
    speed_rad_s : ndarray, shape (B, P, K)
        Motor speed. [rad/s]
    shaft_torque_nm : ndarray, shape (B, P, K)
        Torque at the motor shaft. [N·m]

    Notes
    -----
    ``T = (J_m + J_g) n α + k T_shaft/n + (T_c + T_0) sgn ω + c n ω`` with k by the direction of power of the
    gearhead; with the holding brake closed there is no torque. Linear in the six functions of `core.moments`,
    so that one product of matrices serves all pairs.
    """
    rows = gearhead_rows(gearheads)
    motor = motor_columns(motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s)
    functions = demand.functions.reshape(6, -1)
    shape = (len(motors), *demand.shaft_speed.shape)
    at_shaft = (rows[:, 0] @ functions).reshape(shape)
    torque = (np.einsum("bi,bij->bj", motor, rows) @ functions).reshape(shape)
    omega = _column(gearheads.ratio) * demand.shaft_speed
    return torque, omega, at_shaft


def course(
    demand: Demand, motors: MotorParameters, gearheads: GearheadParameters, judged: JudgedMotor
) -> PairCourse:
    """Torque, current and voltage at the nodes for B pairs.

    Parameters
    ----------
    demand : Demand
        The cycle at the driven shaft. [-]
    motors, gearheads : MotorParameters, GearheadParameters
        B rows each: the pairs. [-]
    judged : JudgedMotor
        The same motors at judged temperatures. [-]

    Returns
    -------
    PairCourse
        Arrays of shape (B, P, K). [-]

    Notes
    -----
    ``i = T/K`` (saturation solved), ``u = √((R i + K ω + L di/dt)² + (p ω L i)²)``.
    """
    torque, omega, at_shaft = air_gap_torque(demand, motors, gearheads)
    current = current_of_torque(
        torque, _column(judged.torque_constant_nm_per_a), _column(judged.saturation_per_a2)
    )
    slope = (current @ differentiation_matrix().T) * (2.0 / demand.duration_s[:, None])
    electrical = (
        _column(judged.resistance_ohm),
        _column(judged.inductance_h),
        _column(judged.torque_constant_nm_per_a),
        _column(judged.reactance_per_speed),
    )
    return PairCourse(
        omega,
        torque,
        at_shaft,
        current,
        slope,
        terminal_voltage(current, omega, slope, *electrical),
        terminal_voltage(current, omega, np.zeros(1), *electrical),
    )


def evaluate_pairs(
    demand: Demand, motors: MotorParameters, gearheads: GearheadParameters, surroundings: Surroundings
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

    Returns
    -------
    PairResults
        Shape (B,). Integrals are exact on smooth pieces; extrema are refined between the nodes. [-]
    """
    parts = [
        _evaluate_chunk(
            demand,
            motors.take(slice(start, start + _CHUNK)),
            gearheads.take(slice(start, start + _CHUNK)),
            surroundings,
        )
        for start in range(0, len(motors), _CHUNK)
    ]
    return PairResults(
        **{f.name: np.concatenate([getattr(part, f.name) for part in parts]) for f in fields(PairResults)}
    )


def _evaluate_chunk(
    demand: Demand, motors: MotorParameters, gearheads: GearheadParameters, surroundings: Surroundings
) -> PairResults:
    judged = judge(motors, surroundings)
    c = course(demand, motors, gearheads, judged)
    duration = demand.duration_s
    i, omega, T = c.current_a, c.motor_speed_rad_s, c.torque_nm

    torque_peak, piece, position = largest_magnitude(T)
    torque_peak_at = demand.instant(piece, position)
    with_L, without_L = largest_magnitude(c.voltage_v), largest_magnitude(c.voltage_without_inductance_v)
    voltage_peak = np.maximum(with_L[0], without_L[0])
    voltage_at = np.where(
        with_L[0] >= without_L[0], demand.instant(*with_L[1:]), demand.instant(*without_L[1:])
    )
    plane = _plane(demand, c, judged)
    speed_peak, speed_piece, speed_position = largest_magnitude(omega)

    copper = _column(judged.resistance_ohm) * i**2
    airgap = T * omega
    terminals = airgap + copper
    shaft = c.shaft_torque_nm * omega
    energy_shaft = signed_integrals(duration, shaft)
    energy_airgap = signed_integrals(duration, airgap)
    energy_terminals = signed_integrals(duration, terminals)

    thermal = periodic_state(
        thermal_network(motors, surroundings), heat_loss(demand, motors, judged, c), surroundings.ambient_degc
    )
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
        current_rms_a=np.sqrt(demand.mean(i**2)),
        speed_peak_rad_s=speed_peak,
        speed_peak_at_s=demand.instant(speed_piece, speed_position),
        speed_rms_rad_s=gearheads.ratio * demand.shaft_speed_rms,
        speed_mean_abs_rad_s=gearheads.ratio * demand.shaft_speed_mean,
        voltage_peak_v=voltage_peak,
        voltage_peak_at_s=voltage_at,
        voltage_peak_without_inductance_v=without_L[0],
        voltage_peak_at_steps_v=_voltage_at_steps(c, judged, surroundings.current_loop_rise_s),
        voltage_available_v=judged.voltage_available_v,
        **plane,
        copper_loss_mean_w=demand.mean(copper),
        friction_loss_mean_w=demand.mean(speed_loss(motors, omega)),
        energy_shaft_motoring_j=energy_shaft[0],
        energy_shaft_regenerated_j=energy_shaft[1],
        energy_airgap_motoring_j=energy_airgap[0],
        energy_airgap_regenerated_j=energy_airgap[1],
        energy_terminals_motoring_j=energy_terminals[0],
        energy_terminals_regenerated_j=energy_terminals[1],
        power_terminals_peak_w=largest(terminals)[0],
        thermal_known=thermal.known,
        has_equilibrium=thermal.has_equilibrium,
        winding_max_degc=thermal.winding_max_degc,
        winding_max_at_s=thermal.winding_max_time_s,
        winding_min_degc=thermal.winding_min_degc,
        winding_mean_degc=thermal.winding_mean_degc,
        housing_max_degc=thermal.housing_max_degc,
        housing_mean_degc=thermal.housing_mean_degc,
        inertia_ratio=reflected / motors.rotor_inertia_kg_m2,
        resistance_ohm=judged.resistance_ohm,
        torque_constant_nm_per_a=judged.torque_constant_nm_per_a,
        judged_winding_degc=judged.winding_degc,
        magnet_degc=judged.magnet_degc,
    )


def speed_loss(motors: MotorParameters, speed_rad_s: FloatArray) -> FloatArray:
    """Friction and iron loss ``T_c |ω| + c ω²`` at the nodes, shape (B, P, K). [W]"""
    T_c, c = _column(motors.friction_torque_nm), _column(motors.viscous_friction_nm_s)
    return np.asarray(T_c * np.abs(speed_rad_s) + c * speed_rad_s**2)


def heat_loss(demand: Demand, motors: MotorParameters, judged: JudgedMotor, c: PairCourse) -> HeatLoss:
    """Losses on each piece at reference temperatures, as the thermal model wants them.

    Parameters
    ----------
    demand : Demand
        The cycle. [-]
    motors : MotorParameters
        B motors. [-]
    judged : JudgedMotor
        The same at judged temperatures, at which the current of `c` was found. [-]
    c : PairCourse
        Courses of the pairs. [-]

    Returns
    -------
    HeatLoss
        Pieces on the last axis; a piece that lasts long against the winding's time constant is divided. [-]

    Notes
    -----
    The torque is what is given: the current at reference temperatures is the judged one times K over its
    reference value, and the thermal model scales the loss by the temperatures of each instant.
    """
    cold = (judged.torque_constant_nm_per_a / motors.torque_constant_nm_per_a)[:, None, None]
    copper = _column(motors.resistance_ohm) * (c.current_a * cold) ** 2
    by_speed = speed_loss(motors, c.motor_speed_rad_s)
    tau = fastest_time_constant(motors)
    shortest = float(np.nanmin(tau)) if np.isfinite(tau).any() else np.inf
    counts = subpiece_counts(demand.duration_s, copper, shortest)
    return HeatLoss(
        duration_s=subpiece_durations(demand.duration_s, counts),
        copper_loss_w=subpiece_means(copper, counts),
        speed_loss_w=subpiece_means(by_speed, counts),
        resistance_coefficient_per_k=motors.resistance_coefficient_per_k,
        resistance_reference_degc=motors.resistance_reference_degc,
        magnet_coefficient_per_k=motors.magnet_coefficient_per_k,
        magnet_reference_degc=motors.magnet_reference_degc,
    )


def _plane(demand: Demand, c: PairCourse, judged: JudgedMotor) -> dict[str, FloatArray]:
    """Where the torque comes closest to what the voltage allows at that speed.

    Motoring and braking have limits of their own; each branch is smooth, so each is searched by itself.
    """
    K, s = _column(judged.torque_constant_nm_per_a), _column(judged.saturation_per_a2)
    motoring, braking = voltage_limited_current(
        _column(judged.voltage_available_v),
        np.abs(c.motor_speed_rad_s),
        _column(judged.resistance_ohm),
        K,
        _column(judged.reactance_per_speed),
    )
    # Torque rises with current only up to the turning point of the saturation curve.
    turning = 1.0 / np.sqrt(3.0 * np.where(s > 0.0, s, np.finfo(float).tiny))
    direction = demand.direction[:, None]
    torque = c.torque_nm * np.where(direction == 0.0, 1.0, direction)
    answer: dict[str, FloatArray] = {}
    for current_limit, demanded in ((motoring, torque), (braking, -torque)):
        demanded = np.where(direction == 0.0, np.abs(torque), demanded)
        reachable = np.nan_to_num(current_limit, nan=0.0)
        capacity = torque_of_current(np.clip(reachable, 0.0, turning), K, s)
        # Above the no-load speed only braking torque keeps within the voltage, and of it a least one is needed.
        most = torque_of_current(np.clip(current_limit, -turning, 0.0), K, s)
        beyond = (capacity <= 0.0) & ~(demanded <= most)  # NaN: no current at all
        ratio = demanded / np.where(capacity > 0.0, capacity, np.inf)
        utilisation, piece, position = largest(ratio)
        at = demand.instant(piece, position)
        row = np.arange(len(at))
        there = series_value((demanded[row, piece] @ to_series(demanded.shape[2]).T).T, position)
        hopeless = beyond.reshape(len(at), -1)
        first = hopeless.argmax(axis=1)
        never = hopeless.any(axis=1)
        utilisation = np.where(never, np.inf, np.maximum(utilisation, 0.0))
        at = np.where(never, demand.time_s.reshape(-1)[first], at)
        there = np.where(never, np.abs(demanded.reshape(len(at), -1)[np.arange(len(at)), first]), there)
        with np.errstate(invalid="ignore", divide="ignore"):
            available = np.where(never, 0.0, there / utilisation)
        branch = {
            "plane_utilisation": utilisation,
            "plane_torque_nm": there,
            "plane_capacity_nm": available,
            "plane_at_s": at,
        }
        if not answer:
            answer = branch
        worse = utilisation > answer["plane_utilisation"]
        answer = {key: np.where(worse, branch[key], value) for key, value in answer.items()}
    return answer


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
