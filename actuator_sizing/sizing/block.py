"""N gearheads against M motors: the quantities that the lower bounds of the checks are made of."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import Any

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
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.thermal_data import thermal_network

FloatArray = NDArray[np.float64]

# The arrays of a block are in single precision, twice as fast; sums that may cancel (mean square, torque) are made
# in double first. Whoever compares the bounds allows for the rounding (`screening._ROUNDING`).
_SINGLE = np.float32
_NOTHING = 1e-30  # in place of zero and less in a denominator
_TEMPERATURE_SLACK_K = 0.5  # the averaged balance may lie this much above the exact mean


def _single(columns: Any) -> Any:
    """A class of columns with its float arrays in single precision."""
    values = {f.name: getattr(columns, f.name) for f in fields(columns)}
    return replace(
        columns, **{name: v.astype(_SINGLE) for name, v in values.items() if v.dtype == np.float64}
    )


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
            _single(motors),
            _single(judged),
            _single(thermal_network(motors, surroundings)),
            np.fmin(by_current, motors.peak_torque_nm).astype(_SINGLE),
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
            (rows @ points.functions.T * points.sign).transpose(2, 0, 1) for points in (peak, voltage)
        )
        speed = (voltage.functions[:, 5] * voltage.sign)[:, None] * gearheads.ratio
        return cls(gearheads, gearhead_products(products, rows).T, at_peak, at_voltage, speed[:, :, None])

    def part(self, which: slice) -> GearheadSide:
        """Some of the gearheads."""
        return GearheadSide(
            _single(self.gearheads.take(which)),
            np.ascontiguousarray(self.products[which]),
            np.ascontiguousarray(self.torque[:, which]),
            np.ascontiguousarray(self.torque_for_voltage[:, which]),
            self.speed_for_voltage[:, which].astype(_SINGLE),
        )


@dataclass(frozen=True)
class Block:
    """N gearheads against M motors; what the bounds of the checks are made of, each (N, M) or narrower.

    Motors lie along the last axis, since there are more of them: long rows are what numpy is fast on.
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
    def mean_square(self) -> FloatArray:
        """Mean square of the air-gap torque, exact, shape (N, M). [N²·m²]"""
        product = self.gearhead_side.products @ self.motor_side.products
        return np.maximum(product, 0.0).astype(_SINGLE)

    @cached_property
    def speed_peak(self) -> FloatArray:
        """Largest motor speed, shape (N, 1). [rad/s]"""
        return np.asarray(self.gearheads.ratio * self.demand.shaft_speed_peak)[:, None]

    @cached_property
    def speed_rms(self) -> FloatArray:
        """RMS motor speed, shape (N, 1). [rad/s]"""
        return np.asarray(self.gearheads.ratio * self.demand.shaft_speed_rms)[:, None]

    @cached_property
    def current_rms(self) -> FloatArray:
        """RMS current without saturation: exact for a linear machine, else a lower bound. [A]"""
        return np.asarray(np.sqrt(self.mean_square) / self.judged.torque_constant_nm_per_a)

    @cached_property
    def torque_peak(self) -> FloatArray:
        """Lower bound of the largest air-gap torque, magnitude. [N·m]"""
        peak = np.zeros_like(self.mean_square)
        for part in self.gearhead_side.torque:
            np.maximum(peak, (part @ self.motor_side.columns).astype(_SINGLE), out=peak)
        return peak

    @cached_property
    def current_peak(self) -> FloatArray:
        """Lower bound of the largest current, magnitude. [A]"""
        return np.asarray(self.torque_peak / self.judged.torque_constant_nm_per_a)

    @cached_property
    def _voltage(self) -> tuple[FloatArray, FloatArray]:
        K = self.judged.torque_constant_nm_per_a
        per_torque = self.judged.resistance_ohm / K
        available = self.judged.voltage_available_v
        # Saturated current over T/K, at most: the turning point of the cubic is at 3/2 of the linear current.
        most_current = np.where(self.judged.saturation_per_a2 > 0.0, _SINGLE(1.5), _SINGLE(1.0))
        voltage = np.zeros_like(self.mean_square)
        plane = np.zeros_like(self.mean_square)
        side = self.gearhead_side
        for part, omega in zip(side.torque_for_voltage, side.speed_for_voltage, strict=True):
            drop, emf = per_torque * (part @ self.motor_side.columns).astype(_SINGLE), K * omega
            # While braking a larger current means less voltage: there the bound needs the most current there can be.
            np.maximum(voltage, np.minimum(drop, most_current * drop) + emf, out=voltage)
            # Above the no-load speed there is no motoring torque at all: the ratio becomes immense.
            left = np.maximum(np.subtract(available, emf, out=emf), _NOTHING)
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
        cold_K = torque_constant_at(m, np.full(len(m), ambient, dtype=_SINGLE))  # the magnet is never colder
        R_2 = self.motor_side.network.housing_resistance_k_w
        total = self.motor_side.network.winding_resistance_k_w + np.nan_to_num(R_2, nan=0.0)
        path = np.where(np.isnan(R_2), total, R_2)
        start = m.resistance_ohm * (
            1.0 + m.resistance_coefficient_per_k * (ambient - m.resistance_reference_degc)
        )
        n = self.gearheads.ratio
        by_speed = np.stack(
            [n * self.demand.shaft_speed_mean, (n * self.demand.shaft_speed_rms) ** 2], axis=1
        )
        rise = by_speed @ (path * np.stack([m.friction_torque_nm, m.viscous_friction_nm_s]))
        rise += (total * start / cold_K**2) * self.mean_square
        gain = total * m.resistance_ohm * m.resistance_coefficient_per_k / cold_K**2
        left = np.subtract(1.0, gain * self.mean_square)
        # A feedback of one or more is runaway: the rise becomes immense.
        np.divide(rise, np.maximum(left, _NOTHING, out=left), out=rise)
        return np.asarray(np.subtract(rise, _TEMPERATURE_SLACK_K, out=rise))
