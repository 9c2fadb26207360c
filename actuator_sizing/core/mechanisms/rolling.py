"""Conveyor, wheel drive, gantry: loads carried by what turns at a constant ratio."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import (
    GRAVITY_M_S2,
    Complaint,
    Efforts,
    FloatArray,
    Parameter,
    direction_of,
)
from actuator_sizing.core.mechanisms.linear_load import (
    GUIDE_PARAMETERS,
    STAGE_PARAMETERS,
    RotatingDriveOfLinearLoad,
)

_LOAD = tuple(p for p in GUIDE_PARAMETERS if p.name != "counterweight mass")


@dataclass(frozen=True, kw_only=True)
class Conveyor(RotatingDriveOfLinearLoad):
    """Endless belt or chain: goods (the moving mass) ride on it, belt and rollers only turn round."""

    name: ClassVar[str] = "conveyor"
    help: ClassVar[str] = "endless belt or chain that carries goods, level or inclined"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("drum diameter", "length", "diameter of the driven drum, or pitch diameter of the sprocket",
                  positive=True, minimum=0.0, example="120 mm"),
        Parameter("belt mass", "mass", "mass of the whole belt, both strands; it is not lifted", default=0.0,
                  minimum=0.0, example="6 kg"),
        Parameter("roller mass", "mass", "mass at the belt that has the inertia of rollers and idle drum, J/r²",
                  default=0.0, minimum=0.0, example="2 kg"),
        *STAGE_PARAMETERS,
        *_LOAD,
    )  # fmt: skip

    drum_diameter: float
    belt_mass: float = 0.0
    roller_mass: float = 0.0

    @property
    def shaft_ratio(self) -> float:
        """``1 / radius``. [rad/m]"""
        return 2.0 / self.drum_diameter

    def _mass(self, payload: FloatArray) -> FloatArray:
        return np.asarray(super()._mass(payload) + self.belt_mass + self.roller_mass)

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Goods and belt rub with the stated coefficient; only the goods are lifted."""
        plain = super().efforts(position, speed, acceleration, direction, payload, process)
        belt = self.guide_friction_coefficient * self.belt_mass * GRAVITY_M_S2 * np.cos(self.inclination)
        return replace(plain, friction=plain.friction + belt * direction)


@dataclass(frozen=True, kw_only=True)
class WheelDrive(RotatingDriveOfLinearLoad):
    """Vehicle on driven wheels: ``φ = x/r`` while the wheels do not slip."""

    name: ClassVar[str] = "wheel drive"
    help: ClassVar[str] = "vehicle or trolley on driven wheels, with the slip limit checked"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("wheel diameter", "length", "rolling diameter of the driven wheels", positive=True, minimum=0.0,
                  example="120 mm"),
        Parameter("adhesion coefficient", "ratio", "largest traction of the driven wheels over their load",
                  positive=True, minimum=0.0, maximum=5.0, example="0.5"),
        Parameter("driven weight share", "ratio", "part of the weight that rests on driven wheels", default=1.0,
                  positive=True, minimum=0.0, maximum=1.0, example="100 %"),
        *STAGE_PARAMETERS,
        *_LOAD,
    )  # fmt: skip

    wheel_diameter: float
    adhesion_coefficient: float
    driven_weight_share: float = 1.0

    @property
    def shaft_ratio(self) -> float:
        """``1 / radius``. [rad/m]"""
        return 2.0 / self.wheel_diameter

    def traction_limit_n(self, payload: float) -> float:
        """Largest force before the wheels slip, ``μ s m g cos γ``. [N]"""
        weight = (self.moving_mass + payload) * GRAVITY_M_S2 * float(np.cos(self.inclination))
        return self.adhesion_coefficient * self.driven_weight_share * weight

    def motion_complaints(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        payload: float,
        process: float,
    ) -> Iterable[Complaint]:
        """Wheels that would slip."""
        efforts = self.efforts(
            position, speed, acceleration, direction_of(speed), np.asarray(payload), np.asarray(process)
        )
        needed, limit = float(np.max(np.abs(efforts.total))), self.traction_limit_n(payload)
        if needed > limit:
            yield Complaint("", f"a traction of {needed:.4g} N",
                            f"at most {limit:.4g} N, where the driven wheels slip",
                            "Accelerate more gently, or put more weight on driven wheels.")  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class Gantry(RotatingDriveOfLinearLoad):
    """One of two motors that move a beam together; each takes the part that stands on its side.

    The beam (the moving mass) counts half. The carriage with its payload stands at the stated part of the
    span; process force acts on the carriage; friction force and pinion are those of one side.
    """

    name: ClassVar[str] = "gantry"
    help: ClassVar[str] = "beam moved by two motors in step; sizes one of them with its share of the load"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("pinion diameter", "length", "pitch diameter of the pinion or pulley of each side", positive=True,
                  minimum=0.0, example="60 mm"),
        Parameter("carriage mass", "mass", "carriage on the beam, without payload", default=0.0, minimum=0.0,
                  example="6 kg"),
        Parameter("carriage share", "ratio", "part of carriage and payload that this side carries: 50 % in the "
                  "middle, 100 % at its end", default=1.0, minimum=0.0, maximum=1.0, example="90 %"),
        *STAGE_PARAMETERS,
        *_LOAD,
    )  # fmt: skip

    pinion_diameter: float
    carriage_mass: float = 0.0
    carriage_share: float = 1.0

    @property
    def shaft_ratio(self) -> float:
        """``1 / radius``. [rad/m]"""
        return 2.0 / self.pinion_diameter

    def _mass(self, payload: FloatArray) -> FloatArray:
        return np.asarray(0.5 * self.moving_mass + self.carriage_share * (self.carriage_mass + payload))

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Newton's second law for the share of this side."""
        side = replace(
            self, moving_mass=float(self._mass(np.zeros(()))), carriage_mass=0.0, carriage_share=0.0
        )
        plain = super(Gantry, side).efforts(
            position,
            speed,
            acceleration,
            direction,
            self.carriage_share * payload,
            self.carriage_share * process,
        )
        return replace(plain, inertia=self._mass(payload) * acceleration)
