"""A mass moved along a straight guide at any inclination: shared by every linear mechanism."""

from __future__ import annotations

from abc import abstractmethod
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.friction import Friction
from actuator_sizing.core.mechanisms.base import (
    GRAVITY_M_S2,
    LINEAR,
    Efforts,
    FloatArray,
    Mechanism,
    Parameter,
)

GUIDE_PARAMETERS = (
    Parameter("moving mass", "mass", "carriage, table, cable chain: everything that moves, without payload",
              minimum=0.0, example="18 kg"),
    Parameter("inclination", "angle", "angle of +x above the horizontal: 0 level, 90° straight up",
              default=0.0, minimum=-np.pi / 2, maximum=np.pi / 2, example="90 deg"),
    Parameter("counterweight mass", "mass", "mass that moves against the load over a cable (0 = none)",
              default=0.0, minimum=0.0, example="0 kg"),
    Parameter("guide friction coefficient", "ratio", "friction in proportion to the normal force on the guide",
              default=0.0, minimum=0.0, maximum=5.0, example="0.01"),
    Parameter("guide friction force", "force", "constant (Coulomb) friction of guide, seals and cables",
              default=0.0, minimum=0.0, example="25 N"),
    Parameter("viscous friction", "linear damping", "friction in proportion to speed",
              default=0.0, minimum=0.0, example="0 N·s/m"),
    Parameter("breakaway friction force", "force", "friction of guide and seals at the very start of motion; "
              "counts where it is above the guide friction force", default=0.0, minimum=0.0, example="0 N"),
    Parameter("Stribeck speed", "linear speed", "speed at which breakaway has mostly given way to sliding",
              default=0.005, positive=True, minimum=0.0, maximum=100.0, example="5 mm/s"),
    Parameter("cold grease factor", "ratio", "factor on constant, breakaway and viscous friction while cold",
              default=1.0, minimum=0.1, maximum=20.0, example="1"),
)  # fmt: skip

STAGE_PARAMETERS = (
    Parameter("efficiency", "ratio", "power out over power in of the stage when it drives the load",
              default=1.0, minimum=0.01, maximum=1.0, example="90 %"),
    Parameter("back-driving efficiency", "ratio", "the same when the load drives; 0 or below is self-locking "
              "(default 2 − 1/efficiency)", optional=True, minimum=-1000.0, maximum=1.0, example=""),
    Parameter("driven shaft inertia", "inertia", "inertia of what turns with the driven shaft: coupling, pulley",
              default=0.0, minimum=0.0, example="1.2 kg·cm²"),
    Parameter("driven shaft friction torque", "torque", "bearing, seal and preload torque at the driven shaft",
              default=0.0, minimum=0.0, example="0.1 Nm"),
)  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class LinearLoad(Mechanism):
    """Mass on a straight guide; the subclass says how the driven shaft is connected to it."""

    coordinate: ClassVar[str] = LINEAR
    load_parts_field: ClassVar[str] = "moving_mass"

    moving_mass: float
    inclination: float = 0.0
    counterweight_mass: float = 0.0
    guide_friction_coefficient: float = 0.0
    guide_friction_force: float = 0.0
    viscous_friction: float = 0.0
    breakaway_friction_force: float = 0.0
    stribeck_speed: float = 0.005
    cold_grease_factor: float = 1.0

    @property
    def friction(self) -> Friction:
        """Friction of the guide that does not depend on the load."""
        return Friction(
            self.guide_friction_force,
            self.breakaway_friction_force,
            self.stribeck_speed,
            self.viscous_friction,
            self.cold_grease_factor,
        )

    @property
    def resolved_by_nodes(self) -> bool:
        """Not where friction bends with speed."""
        return not self.friction.is_curved

    def _hanging(self, payload: FloatArray) -> FloatArray:
        """What weighs on the guide."""
        return np.asarray(self.moving_mass + payload)

    def _mass(self, payload: FloatArray) -> FloatArray:
        return np.asarray(self._hanging(payload) + self.counterweight_mass)

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Newton's second law along the guide; friction only where the load moves."""
        weight = self._hanging(payload) * GRAVITY_M_S2
        normal = weight * np.cos(self.inclination)
        return Efforts(
            inertia=self._mass(payload) * acceleration,
            gravity=weight * np.sin(self.inclination)
            - self.counterweight_mass * GRAVITY_M_S2
            + 0.0 * position,
            friction=self.friction.effort(speed, direction, self.guide_friction_coefficient * normal),
            process=process + 0.0 * position,
        )


@dataclass(frozen=True, kw_only=True)
class DrivenLinearLoad(LinearLoad):
    """A linear load driven by a turning shaft through one lossy stage."""

    shaft_parts_field: ClassVar[str] = "driven_shaft_inertia"

    efficiency: float = 1.0
    back_driving_efficiency: float = np.nan
    driven_shaft_inertia: float = 0.0
    driven_shaft_friction_torque: float = 0.0

    @property
    def efficiency_forward(self) -> float:
        """Stated forward efficiency of the stage. [-]"""
        return self.efficiency

    @property
    def efficiency_back(self) -> float:
        """Stated back-driving efficiency, else the relation for equal friction both ways. [-]"""
        from actuator_sizing.core.mechanisms.base import back_driving_efficiency

        if np.isnan(self.back_driving_efficiency):
            return back_driving_efficiency(self.efficiency_forward)
        return self.back_driving_efficiency

    @property
    def shaft_inertia_kg_m2(self) -> float:
        """Stated inertia at the driven shaft. [kg·m²]"""
        return self.driven_shaft_inertia

    @property
    def shaft_friction_nm(self) -> float:
        """Stated friction torque at the driven shaft, grease cold or not. [N·m]"""
        return self.driven_shaft_friction_torque * self.cold_grease_factor


@dataclass(frozen=True, kw_only=True)
class RotatingDriveOfLinearLoad(DrivenLinearLoad):
    """A driven linear load whose shaft turns in proportion to the displacement."""

    @property
    @abstractmethod
    def shaft_ratio(self) -> float:
        """Angle of the driven shaft per displacement of the load. [rad/m]"""

    def ratio_at(self, position: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Constant ratio, zero derivative."""
        return np.full_like(position, self.shaft_ratio), np.zeros_like(position)

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Moving mass over ratio squared, plus what turns with the shaft."""
        return self._mass(payload) / self.shaft_ratio**2 + self.shaft_inertia_kg_m2
