"""Winder and unwinder: a roll that grows or shrinks under constant web tension."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import (
    INERTIA,
    LINEAR,
    LOAD,
    Complaint,
    Efforts,
    FloatArray,
    Parameter,
    back_driving_efficiency,
)
from actuator_sizing.core.mechanisms.linear_load import STAGE_PARAMETERS
from actuator_sizing.core.mechanisms.shaft_map import ShaftMap

ROLL_PARAMETERS = (
    Parameter("web tension", "force", "pull of the web, kept constant", minimum=0.0, example="60 N"),
    Parameter("web thickness", "length", "thickness of one layer on the roll", positive=True, minimum=0.0,
              example="0.2 mm"),
    Parameter("web width", "length", "width of the web; gives the roll's inertia", positive=True, minimum=0.0,
              example="300 mm"),
    Parameter("web density", "density", "mass of the roll per volume; gives its inertia", minimum=0.0,
              example="900 kg/m³"),
    Parameter("core diameter", "length", "outer diameter of the bare core", positive=True, minimum=0.0,
              example="76 mm"),
    Parameter("start diameter", "length", "diameter of the roll at the start of the cycle", positive=True,
              minimum=0.0, example="200 mm"),
    *STAGE_PARAMETERS,
)  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class Roll(ShaftMap):
    """Roll whose radius changes by one thickness h in a turn: ``r² = r_0² ± h x/π``.

    The torque is ``J(r) α ± F r``, without ``½ J'ω²``: the roll is an open system, and the web that it takes
    up brings the angular momentum ``ṁ r² ω`` of its own speed, which is J̇ ω exactly. Tension is that in
    the web at the roll. Angular momentum of an open system, first principles.
    """

    coordinate: ClassVar[str] = LINEAR
    payload_kind: ClassVar[str] = INERTIA
    motion_at: ClassVar[str] = LOAD
    shaft_parts_field: ClassVar[str] = "driven_shaft_inertia"
    parameters: ClassVar[tuple[Parameter, ...]] = ROLL_PARAMETERS
    growth: ClassVar[float]  # +1 winds, −1 unwinds

    web_tension: float
    web_thickness: float
    web_width: float
    web_density: float
    core_diameter: float
    start_diameter: float
    efficiency: float = 1.0
    back_driving_efficiency: float = np.nan
    driven_shaft_inertia: float = 0.0
    driven_shaft_friction_torque: float = 0.0
    start_angle: float = 0.0

    @property
    def efficiency_forward(self) -> float:
        """Stated forward efficiency of the stage. [-]"""
        return self.efficiency

    @property
    def efficiency_back(self) -> float:
        """Stated back-driving efficiency, else the relation for equal friction both ways. [-]"""
        if np.isnan(self.back_driving_efficiency):
            return back_driving_efficiency(self.efficiency)
        return self.back_driving_efficiency

    @property
    def shaft_inertia_kg_m2(self) -> float:
        """Stated inertia of core, shaft and coupling. [kg·m²]"""
        return self.driven_shaft_inertia

    @property
    def shaft_friction_nm(self) -> float:
        """Stated friction torque at the driven shaft. [N·m]"""
        return self.driven_shaft_friction_torque

    @property
    def _slope(self) -> float:
        return self.growth * self.web_thickness / (2.0 * np.pi)

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Length of web since the start of the cycle."""
        r, c = 0.5 * self.start_diameter, self._slope
        return r * angle + 0.5 * c * angle**2, r + c * angle, np.full_like(angle, c)

    def shaft_of_load(self, position: FloatArray) -> FloatArray:
        """Root of the quadratic."""
        r = 0.5 * self.start_diameter
        return np.asarray(2.0 * position / (r + self.radius(position)))

    def radius(self, position: FloatArray) -> FloatArray:
        """Radius of the roll after a length of web. [m]"""
        return np.sqrt(np.maximum(0.25 * self.start_diameter**2 + 2.0 * self._slope * position, 0.0))

    def roll_inertia(self, radius: FloatArray) -> FloatArray:
        """Inertia of the wound web alone, ``π ρ b (r⁴ − r_c⁴)/2``. [kg·m²]"""
        core = 0.5 * self.core_diameter
        return np.asarray(0.5 * np.pi * self.web_density * self.web_width * (radius**4 - core**4))

    def reach(self, at_shaft: bool) -> tuple[float, float]:
        """Until the core is bare."""
        core, r = 0.5 * self.core_diameter, 0.5 * self.start_diameter
        bare = (core - r) / self._slope if at_shaft else (core**2 - r**2) / (2.0 * self._slope)
        return (bare, np.inf) if self.growth > 0.0 else (-np.inf, bare)

    def complaints(self) -> Iterable[Complaint]:
        """A roll smaller than its core."""
        if self.start_diameter < self.core_diameter:
            yield Complaint("start diameter", f"{self.start_diameter * 1e3:.6g} mm",
                            f"at least the core diameter, {self.core_diameter * 1e3:.6g} mm",
                            "Correct one of them.")  # fmt: skip

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Inertia of the roll referred to the web, and its tension."""
        r = self.radius(position)
        alpha = acceleration / r - self._slope * speed**2 / r**3
        zero = 0.0 * position
        return Efforts(
            inertia=(self.roll_inertia(r) + payload) * alpha / r,
            gravity=zero,
            friction=zero,
            process=process + self.growth * self.web_tension + zero,
        )

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Inertia of the roll at the start of the cycle, core and payload."""
        roll = self.roll_inertia(np.asarray(0.5 * self.start_diameter))
        return np.asarray(roll + payload + self.driven_shaft_inertia)

    def inertia_over(self, position: FloatArray, lever: FloatArray, payload: float) -> float:
        """Largest inertia of the roll there, core and payload."""
        return float(np.max(self.roll_inertia(lever)) + payload + self.driven_shaft_inertia)


@dataclass(frozen=True, kw_only=True)
class Winder(Roll):
    """The roll takes up web; +x winds."""

    name: ClassVar[str] = "winder"
    help: ClassVar[str] = "roll that winds a web at constant tension and grows"
    growth: ClassVar[float] = 1.0


@dataclass(frozen=True, kw_only=True)
class Unwinder(Roll):
    """The roll gives off web and is pulled by it; +x unwinds."""

    name: ClassVar[str] = "unwinder"
    help: ClassVar[str] = "roll that gives off a web at constant tension and shrinks: the motor brakes"
    growth: ClassVar[float] = -1.0
