"""M motors against N gearheads: the quantities that the lower bounds of the checks are made of."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.machine import JudgedMotor, judge, torque_constant_at, torque_of_current
from actuator_sizing.core.moments import (
    SupportPoints,
    gearhead_products,
    gearhead_rows,
    motor_columns,
    motor_products,
)
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters, Surroundings
from actuator_sizing.core.thermal import ThermalNetwork
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.thermal_data import thermal_network

FloatArray = NDArray[np.float64]

_NO_VOLTAGE = 1e-200
_TEMPERATURE_SLACK_K = 0.5  # the averaged balance may lie this much above the exact mean


@dataclass(frozen=True)
class MotorSide:
    """M motors with everything about them that does not depend on the gearhead."""

    motors: MotorParameters
    judged: JudgedMotor
    network: ThermalNetwork
    torque_limit: FloatArray  # (M, 1) at the motor's peak current
    columns: FloatArray  # (M, 4)
    products: FloatArray  # (M, 10)

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
            np.fmin(by_current, motors.peak_torque_nm)[:, None],
            columns,
            motor_products(columns),
        )


@dataclass(frozen=True)
class GearheadSide:
    """N gearheads with the demand brought to their input."""

    gearheads: GearheadParameters
    products: FloatArray  # (10, N)
    torque: FloatArray  # (V, 4, N) parts of the torque at each support point
    torque_for_voltage: FloatArray  # (W, 4, N) the same where voltage can govern
    speed_for_voltage: FloatArray  # (W, 1, N) motor speed there, in the sense of the torque

    @classmethod
    def of(
        cls, gearheads: GearheadParameters, products: FloatArray, peak: SupportPoints, voltage: SupportPoints
    ) -> GearheadSide:
        """Prepare N gearheads for mean products and support points of a demand."""
        rows = gearhead_rows(gearheads)
        at_peak, at_voltage = (
            (rows @ points.functions.T * points.sign).transpose(2, 1, 0) for points in (peak, voltage)
        )
        speed = (voltage.functions[:, 5] * voltage.sign)[:, None] * gearheads.ratio
        return cls(gearheads, gearhead_products(products, rows), at_peak, at_voltage, speed[:, None, :])

    def part(self, which: slice) -> GearheadSide:
        """Some of the gearheads."""
        return GearheadSide(
            self.gearheads.take(which),
            self.products[:, which],
            np.ascontiguousarray(self.torque[:, :, which]),
            np.ascontiguousarray(self.torque_for_voltage[:, :, which]),
            self.speed_for_voltage[:, :, which],
        )


@dataclass(frozen=True)
class Block:
    """M motors against N gearheads; what the bounds of the checks are made of, each (M, N) or narrower."""

    demand: Demand
    surroundings: Surroundings
    recommended_inertia_ratio: float
    motor_side: MotorSide
    gearhead_side: GearheadSide

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
        """Torque at the motor's peak current, shape (M, 1). [N·m]"""
        return self.motor_side.torque_limit

    @cached_property
    def mean_square(self) -> FloatArray:
        """Mean square of the air-gap torque, exact, shape (M, N). [N²·m²]"""
        product = self.motor_side.products @ self.gearhead_side.products
        return np.maximum(product, 0.0, out=product)

    @cached_property
    def speed_peak(self) -> FloatArray:
        """Largest motor speed, shape (1, N). [rad/s]"""
        return np.asarray(self.gearheads.ratio * self.demand.shaft_speed_peak)[None, :]

    @cached_property
    def speed_rms(self) -> FloatArray:
        """RMS motor speed, shape (1, N). [rad/s]"""
        return np.asarray(self.gearheads.ratio * self.demand.shaft_speed_rms)[None, :]

    @cached_property
    def current_rms(self) -> FloatArray:
        """RMS current without saturation: exact for a linear machine, else a lower bound. [A]"""
        return np.asarray(np.sqrt(self.mean_square) / self.judged.torque_constant_nm_per_a[:, None])

    @cached_property
    def torque_peak(self) -> FloatArray:
        """Lower bound of the largest air-gap torque, magnitude. [N·m]"""
        peak = np.zeros_like(self.mean_square)
        for part in self.gearhead_side.torque:
            np.maximum(peak, self.motor_side.columns @ part, out=peak)
        return peak

    @cached_property
    def current_peak(self) -> FloatArray:
        """Lower bound of the largest current, magnitude. [A]"""
        return np.asarray(self.torque_peak / self.judged.torque_constant_nm_per_a[:, None])

    @cached_property
    def _voltage(self) -> tuple[FloatArray, FloatArray]:
        K = self.judged.torque_constant_nm_per_a[:, None]
        per_torque = self.judged.resistance_ohm[:, None] / K
        available = self.judged.voltage_available_v[:, None]
        voltage = np.zeros_like(self.mean_square)
        plane = np.zeros_like(self.mean_square)
        side = self.gearhead_side
        for part, omega in zip(side.torque_for_voltage, side.speed_for_voltage, strict=True):
            drop, emf = per_torque * (self.motor_side.columns @ part), K * omega
            np.maximum(voltage, drop + emf, out=voltage)
            # Above the no-load speed there is no motoring torque at all: the ratio becomes immense.
            left = np.maximum(np.subtract(available, emf, out=emf), _NO_VOLTAGE)
            np.maximum(plane, np.divide(drop, left, out=drop), out=plane)
        return voltage, plane

    @property
    def voltage_peak(self) -> FloatArray:
        """Lower bound of the largest voltage, inductance left out. [V]"""
        return self._voltage[0]

    @property
    def voltage_plane_utilisation(self) -> FloatArray:
        """Lower bound of torque over voltage-limited torque. [-]"""
        return self._voltage[1]

    @cached_property
    def mean_winding_rise(self) -> FloatArray:
        """Lower bound of the winding's mean rise in periodic steady state; infinite on runaway. [K]"""
        ambient = self.surroundings.ambient_degc
        m = self.motors
        cold_K = torque_constant_at(m, np.full(len(m), ambient))  # the magnet is never colder
        R_2 = self.motor_side.network.housing_resistance_k_w
        total = self.motor_side.network.winding_resistance_k_w + np.nan_to_num(R_2, nan=0.0)
        path = np.where(np.isnan(R_2), total, R_2)
        start = m.resistance_ohm * (
            1.0 + m.resistance_coefficient_per_k * (ambient - m.resistance_reference_degc)
        )
        n = self.gearheads.ratio
        speed_loss = (
            m.friction_torque_nm[:, None] * (n * self.demand.shaft_speed_mean)
            + m.viscous_friction_nm_s[:, None] * (n * self.demand.shaft_speed_rms) ** 2
        )
        gain = total * m.resistance_ohm * m.resistance_coefficient_per_k / cold_K**2
        rise = (total * start / cold_K**2)[:, None] * self.mean_square + path[:, None] * speed_loss
        left = 1.0 - gain[:, None] * self.mean_square
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.where(left > 0.0, rise / left, np.inf) - _TEMPERATURE_SLACK_K
