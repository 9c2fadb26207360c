"""Courses of torque, current, voltage and loss over the cycle, for motor × gearhead pairs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.capability import terminal_voltage
from actuator_sizing.core.machine import JudgedMotor, current_of_torque
from actuator_sizing.core.moments import gearhead_rows, motor_columns
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.core.quadrature import differentiation_matrix
from actuator_sizing.core.record_slices import RecordSlices
from actuator_sizing.core.thermal import HeatLoss, subpiece_counts, subpiece_durations, subpiece_means
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.thermal_data import fastest_time_constant

FloatArray = NDArray[np.float64]

_PARTS_PER_CONSTANT = 20  # of the winding's time constant, in which the loss of a record is averaged
_FEWEST_PARTS = 24  # of its cycle


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


def per_pair(values: FloatArray) -> FloatArray:
    """Values of B pairs against pieces and nodes, shape (B, 1, 1). [-]"""
    return values[:, None, None]


def air_gap_coefficients(motors: MotorParameters, gearheads: GearheadParameters) -> FloatArray:
    """How the air-gap torque depends on the six functions of `core.moments`.

    Parameters
    ----------
    motors, gearheads : MotorParameters, GearheadParameters
        B rows each: the pairs. [-]

    Returns
    -------
    ndarray, shape (B, 6)
        Coefficients in SI. [-]
    """
    motor = motor_columns(motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s)
    return np.asarray(np.einsum("bi,bij->bj", motor, gearhead_rows(gearheads)))


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
    functions = demand.functions.reshape(6, -1)
    shape = (len(motors), *demand.shaft_speed.shape)
    at_shaft = (gearhead_rows(gearheads)[:, 0] @ functions).reshape(shape)
    torque = (air_gap_coefficients(motors, gearheads) @ functions).reshape(shape)
    omega = per_pair(gearheads.ratio) * demand.shaft_speed
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
    return electrical_course(demand, *air_gap_torque(demand, motors, gearheads), judged)


def electrical_course(
    demand: Demand, torque: FloatArray, omega: FloatArray, at_shaft: FloatArray, judged: JudgedMotor
) -> PairCourse:
    """Current and voltage at the nodes for what `air_gap_torque` gives, at the temperatures of `judged`."""
    current = current_of_torque(
        torque, per_pair(judged.torque_constant_nm_per_a), per_pair(judged.saturation_per_a2)
    )
    slope = (current @ differentiation_matrix(current.shape[-1]).T) * (2.0 / demand.duration_s[:, None])
    electrical = (
        per_pair(judged.resistance_ohm),
        per_pair(judged.inductance_h),
        per_pair(judged.torque_constant_nm_per_a),
        per_pair(judged.reactance_per_speed),
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


def speed_loss(motors: MotorParameters, speed_rad_s: FloatArray) -> FloatArray:
    """Friction and iron loss ``T_c |ω| + c ω²`` at the nodes, shape (B, P, K). [W]"""
    T_c, c = per_pair(motors.friction_torque_nm), per_pair(motors.viscous_friction_nm_s)
    return np.asarray(T_c * np.abs(speed_rad_s) + c * speed_rad_s**2)


def heat_loss(
    demand: Demand,
    motors: MotorParameters,
    gearheads: GearheadParameters,
    judged: JudgedMotor,
    c: PairCourse,
) -> HeatLoss:
    """Losses on each piece at reference temperatures, as the thermal model wants them.

    Parameters
    ----------
    demand : Demand
        The cycle. [-]
    motors, gearheads : MotorParameters, GearheadParameters
        B pairs. [-]
    judged : JudgedMotor
        The same motors at judged temperatures, at which the current of `c` was found. [-]
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
    copper = per_pair(motors.resistance_ohm) * (c.current_a * cold) ** 2
    released = ~(
        demand.brake_closed & (demand.direction == 0.0)
    )  # the coil of the brake heats the housing too
    by_speed = speed_loss(motors, c.motor_speed_rad_s) + per_pair(motors.brake_coil_w) * released[:, None]
    tau = fastest_time_constant(motors)
    shortest = float(np.nanmin(tau)) if np.isfinite(tau).any() else np.inf
    duration = demand.duration_s
    if demand.slices is not None:
        duration, copper, by_speed = _loss_of_slices(
            demand, demand.slices, motors, gearheads, copper, shortest
        )
    counts = subpiece_counts(duration, copper, shortest)
    return HeatLoss(
        duration_s=subpiece_durations(duration, counts),
        copper_loss_w=subpiece_means(copper, counts),
        speed_loss_w=subpiece_means(by_speed, counts),
        resistance_coefficient_per_k=motors.resistance_coefficient_per_k,
        resistance_reference_degc=motors.resistance_reference_degc,
        magnet_coefficient_per_k=motors.magnet_coefficient_per_k,
        magnet_reference_degc=motors.magnet_reference_degc,
    )


def _loss_of_slices(
    demand: Demand,
    slices: RecordSlices,
    motors: MotorParameters,
    gearheads: GearheadParameters,
    copper: FloatArray,
    time_constant_s: float,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Copper and speed loss of a condensed record as constant pieces, groups of its slices in order of time.

    Copper loss is laid out as the square of the torque; its mean over the cycle is that of the condensed
    instants, where saturation is solved.
    """
    first = slices.grouped(min(time_constant_s / _PARTS_PER_CONSTANT, demand.cycle_s / _FEWEST_PARTS))
    duration = np.add.reduceat(slices.duration_s, first)
    squared = np.add.reduceat(slices.squared_torque(air_gap_coefficients(motors, gearheads)), first, axis=1)
    total = squared.sum(axis=1, keepdims=True)
    heat = demand.mean(copper)[:, None] * demand.cycle_s
    heat = heat * np.divide(squared, total, out=np.zeros_like(squared), where=total > 0.0)
    by_speed = slices.speed_loss(motors.friction_torque_nm, motors.viscous_friction_nm_s, gearheads.ratio)
    by_speed = np.add.reduceat(by_speed, first, axis=1)
    heat, by_speed = (
        np.repeat((energy / duration)[..., None], copper.shape[2], axis=2) for energy in (heat, by_speed)
    )
    return duration, heat, by_speed
