"""N gearheads against M motors: the quantities that the lower bounds of the checks are made of."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import REPEATS
from actuator_sizing.core.machine import JudgedMotor, judge, torque_constant_at, torque_of_current
from actuator_sizing.core.moments import (
    SupportPoints,
    gearhead_products,
    gearhead_rows,
    mean_products,
    motor_columns,
    motor_products,
    support_points,
)
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters, Surroundings
from actuator_sizing.core.thermal import ThermalNetwork
from actuator_sizing.sizing.bounds import SINGLE_SLACK, Form, Ratio, form, single
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.thermal_data import thermal_network

FloatArray = NDArray[np.float64]

_TEMPERATURE_SLACK_K = 0.5  # the averaged balance may lie this much above the exact mean


@dataclass(frozen=True)
class MotorSide:
    """M motors with everything about them that does not depend on the gearhead."""

    motors: MotorParameters
    judged: JudgedMotor
    network: ThermalNetwork
    torque_limit: FloatArray  # (M,) at the motor's peak current
    columns: FloatArray  # (4, M)
    products: FloatArray  # (10, M)

    @classmethod
    def of(cls, motors: MotorParameters, surroundings: Surroundings) -> MotorSide:
        """Prepare M motors."""
        judged = judge(motors, surroundings)
        by_current = torque_of_current(
            motors.peak_current_a, judged.torque_constant_nm_per_a, judged.saturation_per_a2
        )
        columns = motor_columns(
            motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s
        )
        return cls(
            motors,
            judged,
            thermal_network(motors, surroundings),
            np.fmin(by_current, motors.peak_torque_nm),
            np.ascontiguousarray(columns.T),
            np.ascontiguousarray(motor_products(columns).T),
        )


def voltage_points(demand: Demand) -> SupportPoints:
    """Instants of largest ``|ω|`` mixed with torque, where the voltage can govern."""
    flat = demand.functions.reshape(6, -1)
    direction = np.repeat(demand.direction, demand.shaft_speed.shape[1])
    moving = np.flatnonzero(direction != 0.0)
    if not len(moving):
        return SupportPoints(np.empty((0, 6)), np.empty(0))
    speed = direction[moving] * flat[5, moving]
    torque = direction[moving] * (flat[1] + flat[2])[moving]
    along = direction[moving] * flat[0, moving]
    speed, torque, along = (x / (np.max(np.abs(x)) or 1.0) for x in (speed, torque, along))
    chosen = {int(moving[(speed + w * torque + u * along).argmax()]) for w, u in ((1e-6, 0.0), (0.3, 0.3))}
    index = np.array(sorted(chosen))
    return SupportPoints(flat[:, index].T, direction[index])


@dataclass(frozen=True)
class GearheadSide:
    """N gearheads with the demand brought to their input."""

    gearheads: GearheadParameters
    products: FloatArray  # (N, 10)
    torque: FloatArray  # (V, N, 4) parts of the torque at each support point
    torque_for_voltage: FloatArray  # (W, N, 4) the same where voltage can govern
    speed_for_voltage: FloatArray  # (W, N, 1) motor speed there, in the sense of the torque

    @classmethod
    def of(cls, gearheads: GearheadParameters, demand: Demand) -> GearheadSide:
        """Prepare N gearheads for a demand."""
        products = mean_products(demand.duration_s, demand.functions)
        peak, voltage = support_points(demand.functions, demand.flow), voltage_points(demand)
        rows = gearhead_rows(gearheads)
        at_peak, at_voltage = (
            np.ascontiguousarray((rows @ points.functions.T * points.sign).transpose(2, 0, 1))
            for points in (peak, voltage)
        )
        speed = (voltage.functions[:, 5] * voltage.sign)[:, None] * gearheads.ratio
        gram = np.ascontiguousarray(gearhead_products(products, rows).T)
        return cls(gearheads, gram, at_peak, at_voltage, speed[:, :, None])


@dataclass(frozen=True)
class Block:
    """N gearheads against M motors; what the bounds of the checks are made of.

    Motors lie along the last axis, since there are more of them: long rows are what numpy is fast on. Nothing of
    shape (N, M) is worked out here.
    """

    demand: Demand
    surroundings: Surroundings
    recommended_inertia_ratio: float
    motor_side: MotorSide
    gearhead_side: GearheadSide
    runs: str = REPEATS  # how the cycle runs

    @property
    def repeats(self) -> bool:
        """Whether the cycle runs until its temperatures are periodic."""
        return self.runs == REPEATS

    @property
    def motors(self) -> MotorParameters:
        """The motors, shape (M,)."""
        return self.motor_side.motors

    @property
    def gearheads(self) -> GearheadParameters:
        """The gearheads, shape (N,)."""
        return self.gearhead_side.gearheads

    @property
    def judged(self) -> JudgedMotor:
        """The motors at judged temperatures, shape (M,)."""
        return self.motor_side.judged

    @property
    def torque_limit(self) -> FloatArray:
        """Torque at the motor's peak current, shape (M,). [N·m]"""
        return self.motor_side.torque_limit

    @cached_property
    def mean_square(self) -> Form:
        """Mean square of the air-gap torque, exact. [N²·m²]"""
        return form(self.gearhead_side.products, self.motor_side.products)

    @cached_property
    def torque_peak(self) -> tuple[Form, ...]:
        """Air-gap torque at instants that can govern; the largest is a lower bound of the peak. [N·m]"""
        return tuple(form(rows, self.motor_side.columns) for rows in self.gearhead_side.torque)

    @property
    def speed_rms(self) -> FloatArray:
        """RMS motor speed, shape (N,). [rad/s]"""
        return np.asarray(self.gearheads.ratio * self.demand.shaft_speed_rms)

    def of_speed(self, shaft_speed_rad_s: float, limit_rad_s: FloatArray) -> Ratio:
        """Motor speed over a limit of the motor, shape (M,)."""
        rows = single(self.gearheads.ratio * shaft_speed_rad_s)[:, None]
        with np.errstate(divide="ignore"):
            return Ratio(top=Form(rows, single(1.0 / limit_rad_s)[None, :]))

    def of_square(self, per_square: FloatArray, share: FloatArray, share_viscous: FloatArray) -> Ratio:
        """RMS over its limit, squared: ``c q / (1 − a ω − b ω²)`` at the RMS speed.

        Parameters
        ----------
        per_square : ndarray, shape (M,)
            Square of current over continuous current, per mean square torque. [1/(N²·m²)]
        share, share_viscous : ndarray, shape (M,)
            What speed takes of the permitted rise, a and b. [-]

        Returns
        -------
        Ratio
            A lower bound: the rounding of the denominator is added to it. [-]
        """
        omega = self.speed_rms
        rows = single(np.stack([np.ones_like(omega), omega, omega**2], axis=1))
        columns = np.stack([np.full_like(share, 1.0 + SINGLE_SLACK), -share, -share_viscous])
        return Ratio(per_square=single(per_square), bottom=Form(rows, single(columns)), is_squared=True)

    @cached_property
    def voltage(self) -> tuple[Ratio, ...]:
        """Voltage over available voltage, inductance left out. [-]"""
        j = self.judged
        per_torque = j.resistance_ohm / (j.torque_constant_nm_per_a * j.voltage_available_v)
        emf = single(j.torque_constant_nm_per_a / j.voltage_available_v)[None, :]
        drop = per_torque * self.motor_side.columns
        # While braking a larger current means less voltage: there the bound needs the most current there can be.
        # Saturated current over T/K, at most: the turning point of the cubic is at 3/2 of the linear current.
        saturated = j.saturation_per_a2 > 0.0
        most = single(np.where(saturated, 1.5, 1.0)) if saturated.any() else None
        side = self.gearhead_side
        return tuple(
            Ratio(top=form(torque, drop), braking=most, offset=Form(single(speed), emf))
            for torque, speed in zip(side.torque_for_voltage, side.speed_for_voltage, strict=True)
        )

    @cached_property
    def voltage_plane(self) -> tuple[Ratio, ...]:
        """Torque over the torque that the voltage leaves at that speed. [-]"""
        j = self.judged
        per_torque = j.resistance_ohm / (j.torque_constant_nm_per_a * j.voltage_available_v)
        emf = j.torque_constant_nm_per_a / j.voltage_available_v
        columns = per_torque * self.motor_side.columns
        left = single(np.stack([np.full_like(emf, 1.0 + SINGLE_SLACK), -emf]))
        side = self.gearhead_side
        return tuple(
            # Above the no-load speed there is no motoring torque at all: the ratio becomes immense.
            Ratio(
                top=form(torque, columns),
                bottom=Form(single(np.concatenate([np.ones_like(speed), speed], axis=1)), left),
            )
            for torque, speed in zip(side.torque_for_voltage, side.speed_for_voltage, strict=True)
        )

    @cached_property
    def winding_rise(self) -> Ratio:
        """The winding's mean rise in periodic steady state over the permitted one; immense on runaway. [-]"""
        m, ambient = self.motors, self.surroundings.ambient_degc
        K = torque_constant_at(m, np.full(len(m), ambient))  # the magnet is never colder
        R_2 = self.motor_side.network.housing_resistance_k_w
        total = self.motor_side.network.winding_resistance_k_w + np.nan_to_num(R_2, nan=0.0)
        path = np.where(np.isnan(R_2), total, R_2)
        start = m.resistance_ohm * (
            1.0 + m.resistance_coefficient_per_k * (ambient - m.resistance_reference_degc)
        )
        feedback = total * m.resistance_ohm * m.resistance_coefficient_per_k / K**2
        permitted = m.winding_limit_degc - ambient
        scale = np.where(permitted > 0.0, 1.0 / np.where(permitted > 0.0, permitted, 1.0), 0.0)
        n, demand = self.gearheads.ratio, self.demand
        rows = np.stack(
            [np.ones_like(n), n * demand.shaft_speed_mean, (n * demand.shaft_speed_rms) ** 2], axis=1
        )
        slack = np.full_like(path, _TEMPERATURE_SLACK_K)
        columns = np.stack([-slack, path * m.friction_torque_nm, path * m.viscous_friction_nm_s])
        # The slack comes off the rise, not off the numerator of what the feedback raises.
        per_square = total * start / K**2 + _TEMPERATURE_SLACK_K * feedback
        unknown = np.isnan(total) | np.isnan(permitted)
        return Ratio(
            top=Form(single(rows), single(np.where(unknown, 0.0, scale * columns))),
            per_square=single(np.where(unknown, 0.0, scale * per_square)),
            drain=single(np.where(unknown, 0.0, feedback)),
        )

    def of_peak(self, limit: FloatArray) -> Ratio:
        """Peak of the air-gap torque over a limit of the motor, shape (M,)."""
        with np.errstate(divide="ignore"):
            return Ratio(per_peak=single(1.0 / limit))
