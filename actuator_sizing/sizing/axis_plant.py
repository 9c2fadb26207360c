"""One set as a plant for simulation, and what its cycle commands, both at the motor shaft."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.machine import motor_amperes_per_drive_ampere
from actuator_sizing.core.plant import Plant, series_stiffness
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.loop_commands import Commands
from actuator_sizing.sizing.set_model import SetModel

FloatArray = NDArray[np.float64]

#: Sampling rate where the drive states none. [Hz]
ASSUMED_RATE_HZ = 16_000.0
#: Damping of the drive train where the axis states none; machine structures have 0.01 to 0.05.
ASSUMED_DAMPING_RATIO = 0.02


def option_number(case: Case, name: str) -> float:
    """A numeric quantity of the axis table by its name; NaN where it is not stated. [-]"""
    value = case.options.get(name)
    return float(value) if isinstance(value, int | float) else math.nan


@dataclass(frozen=True)
class AxisPlant:
    """One set of a case, ready to be simulated."""

    model: SetModel
    rate_hz: float
    notes: tuple[str, ...]

    @property
    def case(self) -> Case:
        """The case."""
        return self.model.case

    @property
    def ratio(self) -> float:
        """Gearhead ratio. [-]"""
        return float(self.model.gearhead.ratio[0])

    @property
    def motor_side_inertia_kg_m2(self) -> float:
        """Rotor and gearhead input. [kg·m²]"""
        return float(self.model.motor.rotor_inertia_kg_m2[0] + self.model.gearhead.inertia_kg_m2[0])

    @property
    def stiffness_at_shaft_nm_per_rad(self) -> float:
        """Gearhead and driven shaft in series; NaN where neither is known. [N·m/rad]"""
        stated = option_number(self.case, "driven shaft stiffness")
        return series_stiffness(float(self.model.gearhead.stiffness_nm_per_rad[0]), stated)

    def plant(self, segment: Segment | None = None) -> Plant:
        """The plant with the payload of one segment; by default the largest inertia of the cycle.

        Parameters
        ----------
        segment : Segment or None
            Where in the cycle.

        Returns
        -------
        Plant
            At judged temperatures, referred to the motor shaft.
        """
        model, n = self.model, self.ratio
        mechanism = self.case.mechanism
        payload = max(s.payload for s in self.case.segments) if segment is None else segment.payload
        load = float(mechanism.inertia_at_shaft(np.array([payload]))[0]) / n**2
        coulomb, viscous = self._load_friction(payload)
        stiffness = self.stiffness_at_shaft_nm_per_rad / n**2
        rotor = self.motor_side_inertia_kg_m2
        if not load > 0.0:
            stiffness = math.nan
        damping = 0.0
        if not math.isnan(stiffness):
            stated = option_number(self.case, "damping ratio")
            ratio = ASSUMED_DAMPING_RATIO if math.isnan(stated) else stated
            damping = 2.0 * ratio * math.sqrt(stiffness * rotor * load / (rotor + load))
        resistance, inductance = float(model.judged.resistance_ohm[0]), float(model.judged.inductance_h[0])
        if not inductance > 0.0:
            inductance = resistance / self.rate_hz
        backlash = float(np.nan_to_num(model.gearhead.backlash_rad[0])) * n
        return Plant(
            resistance_ohm=resistance,
            inductance_h=inductance,
            torque_constant_nm_per_a=float(model.judged.torque_constant_nm_per_a[0]),
            motor_inertia_kg_m2=rotor,
            load_inertia_kg_m2=load,
            stiffness_nm_per_rad=stiffness,
            damping_nm_s=damping,
            motor_viscous_nm_s=float(model.motor.viscous_friction_nm_s[0]),
            load_viscous_nm_s=viscous,
            motor_coulomb_nm=float(model.motor.friction_torque_nm[0] + model.gearhead.no_load_torque_nm[0]),
            load_coulomb_nm=coulomb,
            backlash_rad=0.0 if math.isnan(stiffness) else backlash,
            reactance_ohm_s=float(model.judged.reactance_per_speed[0]),
        )

    def _load_friction(self, payload: float) -> tuple[float, float]:
        """Coulomb and viscous friction of the mechanism at the motor shaft, without the stage's losses."""
        mechanism, n = self.case.mechanism, self.ratio
        start = self.model.demand.position[:1, :1].ravel()
        zero, one, load = np.zeros(1), np.ones(1), np.array([payload])
        ratio = abs(float(mechanism.ratio_at(start)[0][0]))
        coulomb = float(mechanism.efforts(start, zero, zero, one, load, zero).friction[0])
        viscous = float(mechanism.efforts(start, one, zero, zero, load, zero).friction[0])
        rotor = float(self.model.motor.rotor_inertia_kg_m2[0])
        own = mechanism.specific_friction_m_s2 * rotor
        return (coulomb / ratio + mechanism.shaft_friction_nm) / n + own, viscous / (ratio * n) ** 2

    @property
    def current_limit_a(self) -> float:
        """Peak current of motor and drive in the motor's kind of ampere; infinite where neither is known. [A]"""
        motor, drive = self.model.motor, self.model.drive
        to_motor = motor_amperes_per_drive_ampere(motor, drive)
        limit = float(np.fmin(motor.peak_current_a, drive.peak_current_a * to_motor)[0])
        return math.inf if math.isnan(limit) else limit

    @property
    def voltage_limit_v(self) -> float:
        """Voltage of the model at minimum bus. [V]"""
        return float(self.model.judged.voltage_available_v[0])

    @cached_property
    def commands(self) -> Commands:
        """What the cycle commands."""
        return Commands.of(self.model, [self.plant(segment) for segment in self.case.segments])


def axis_plant(
    case: Case, demand: Demand, parts: tuple[int, int, int], *, winding_degc: float, rate_hz: float
) -> AxisPlant:
    """Prepare one set for simulation.

    Parameters
    ----------
    case : Case
        The case. [-]
    demand : Demand
        Its cycle. [-]
    parts : tuple of int
        Motor, gearhead and drive by their index in the catalogs. [-]
    winding_degc : float
        Winding temperature; NaN: as judged by the case. [°C]
    rate_hz : float
        Sampling rate; NaN: that of the drive, else 16 kHz. [Hz]

    Returns
    -------
    AxisPlant
        With notes on everything that was assumed. [-]
    """
    if not math.isnan(winding_degc):
        case = replace(case, surroundings=replace(case.surroundings, judged_winding_degc=winding_degc))
    model = SetModel(case, demand, *parts)
    notes = [f"winding at {float(model.judged.winding_degc[0]):.5g} °C, lowest bus voltage"]
    if math.isnan(rate_hz):
        rate_hz = float(np.asarray(case.drives.values["control_rate"], dtype=float)[parts[2]])
        if math.isnan(rate_hz):
            rate_hz = ASSUMED_RATE_HZ
            notes.append("control rate of the drive not stated: 16 kHz assumed")
    axis = AxisPlant(model, rate_hz, ())
    if math.isnan(axis.stiffness_at_shaft_nm_per_rad):
        notes.append("no stiffness known: motor and load turn as one mass, resonance not seen")
    elif math.isnan(option_number(case, "damping ratio")):
        notes.append("damping ratio of the drive train not stated: 0.02 assumed")
    if not float(model.judged.inductance_h[0]) > 0.0:
        notes.append("inductance not stated: an electrical time constant of one sample assumed")
    return AxisPlant(model, rate_hz, tuple(notes))
