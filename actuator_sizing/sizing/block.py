"""M motors against N gearheads: the quantities that the lower bounds of the checks are made of."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.machine import JudgedMotor, torque_constant_at
from actuator_sizing.core.moments import SupportPoints, gearhead_rows
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters, Surroundings
from actuator_sizing.core.thermal import ThermalNetwork
from actuator_sizing.sizing.demand import Demand

FloatArray = NDArray[np.float64]

_TEMPERATURE_SLACK_K = 0.5  # the averaged balance may lie this much above the exact mean


@dataclass(frozen=True)
class Block:
    """M motors against N gearheads; what the bounds of the checks are made of, each (M, N) or narrower."""

    demand: Demand
    surroundings: Surroundings
    recommended_inertia_ratio: float
    motors: MotorParameters
    judged: JudgedMotor
    network: ThermalNetwork
    torque_limit: FloatArray  # (M, 1) at the motor's peak current
    gearheads: GearheadParameters
    mean_square: FloatArray  # (M, N) exact
    support: SupportPoints
    voltage_support: SupportPoints

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

    def _torque(self, points: SupportPoints) -> Iterator[tuple[FloatArray, FloatArray]]:
        """Signed torque at each support point, and motor speed there in the same sense."""
        J, T_c, b = (
            self.motors.rotor_inertia_kg_m2[:, None],
            self.motors.friction_torque_nm[:, None],
            self.motors.viscous_friction_nm_s[:, None],
        )
        n = self.gearheads.ratio
        rows = gearhead_rows(self.gearheads)[:, 0, :] @ points.functions.T  # (N, V)
        for v, sign in enumerate(points.sign):
            alpha, direction, omega = points.functions[v, [0, 4, 5]]
            yield (
                (sign * rows[:, v])[None, :]
                + J * (sign * alpha * n)[None, :]
                + (sign * direction) * T_c
                + b * (sign * omega * n)[None, :],
                (sign * omega * n)[None, :],
            )

    @cached_property
    def torque_peak(self) -> FloatArray:
        """Lower bound of the largest air-gap torque, magnitude. [N·m]"""
        peak = np.zeros_like(self.mean_square)
        for torque, _ in self._torque(self.support):
            np.maximum(peak, torque, out=peak)
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
        for torque, omega in self._torque(self.voltage_support):
            drop = per_torque * torque
            emf = K * omega
            np.maximum(voltage, drop + emf, out=voltage)
            with np.errstate(divide="ignore", invalid="ignore"):
                ratio = drop / (available - emf)
            # Motoring only; above the no-load speed there is no torque at all.
            np.maximum(plane, np.where(available > emf, ratio, np.where(drop > 0.0, np.inf, 0.0)), out=plane)
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
        R_2 = self.network.housing_resistance_k_w
        total = self.network.winding_resistance_k_w + np.nan_to_num(R_2, nan=0.0)
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
