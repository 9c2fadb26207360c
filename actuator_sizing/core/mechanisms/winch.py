"""Winch and hoist: rope on a drum, in layers, over falls."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import LOAD, Complaint, FloatArray, Parameter, direction_of
from actuator_sizing.core.mechanisms.driven_slider import DrivenSlider
from actuator_sizing.core.mechanisms.linear_load import GUIDE_PARAMETERS, STAGE_PARAMETERS


def _upright(parameter: Parameter) -> Parameter:
    """A hoist lifts straight up unless something else is stated."""
    return replace(parameter, default=np.pi / 2) if parameter.name == "inclination" else parameter


@dataclass(frozen=True, kw_only=True)
class Winch(DrivenSlider):
    """Drum with rope: ``x = (r_1 φ + c φ²/2)/k``, φ counted from the empty drum.

    The rope lies in layers of z turns; its radius ``r_1 + c φ`` with ``c = d/(2π z)`` grows by one rope
    diameter d in z turns, spread evenly over the layer: a single step at its end would ask for an infinite
    torque. k is the number of falls that carry the load.
    """

    name: ClassVar[str] = "winch"
    help: ClassVar[str] = "rope on a drum, in layers and over falls: hoist, haulage, shade"
    motion_at: ClassVar[str] = LOAD
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("drum diameter", "length", "diameter of the bare drum", positive=True, minimum=0.0,
                  example="120 mm"),
        Parameter("rope diameter", "length", "diameter of rope or thickness of strap", default=0.0, minimum=0.0,
                  example="6 mm"),
        Parameter("turns per layer", "count", "turns of rope side by side; empty: one layer holds all", optional=True,
                  positive=True, minimum=0.0, example="12"),
        Parameter("turns at start", "ratio", "turns of rope on the drum at the start of the cycle", default=0.0,
                  minimum=0.0, maximum=10000.0, example="3"),
        Parameter("falls", "count", "ropes that carry the load (reeving); the drum winds so many times its way",
                  default=1.0, minimum=1.0, maximum=100.0, example="1"),
        *STAGE_PARAMETERS,
        *(_upright(p) for p in GUIDE_PARAMETERS),
    )  # fmt: skip

    inclination: float = np.pi / 2
    drum_diameter: float
    rope_diameter: float = 0.0
    turns_per_layer: float = np.nan
    turns_at_start: float = 0.0
    falls: float = 1.0

    def __post_init__(self) -> None:
        """The start angle follows from the turns on the drum."""
        object.__setattr__(self, "start_angle", 2.0 * np.pi * self.turns_at_start)

    @property
    def first_radius_m(self) -> float:
        """Radius of the rope's centre in the first layer. [m]"""
        return 0.5 * (self.drum_diameter + self.rope_diameter)

    @property
    def growth_m_per_rad(self) -> float:
        """Growth c of that radius with the angle of the drum. [m/rad]"""
        if np.isnan(self.turns_per_layer):
            return 0.0
        return self.rope_diameter / (2.0 * np.pi * self.turns_per_layer)

    @property
    def resolved_by_nodes(self) -> bool:
        """One layer is a constant ratio."""
        return self.growth_m_per_rad == 0.0 and not self.friction.is_curved

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Way of the load from the empty drum."""
        r, c, k = self.first_radius_m, self.growth_m_per_rad, self.falls
        return (r * angle + 0.5 * c * angle**2) / k, (r + c * angle) / k, np.full_like(angle, c / k)

    def shaft_of_load(self, position: FloatArray) -> FloatArray:
        """Root of the quadratic, in the form that also holds for one layer."""
        r, c, k = self.first_radius_m, self.growth_m_per_rad, self.falls
        return np.asarray(2.0 * k * position / (r + np.sqrt(r**2 + 2.0 * c * k * position)))

    def shaft_range(self) -> tuple[float, float]:
        """Not below the empty drum where layers are stated."""
        return (0.0 if self.growth_m_per_rad > 0.0 else -np.inf), np.inf

    def reach(self, at_shaft: bool) -> tuple[float, float]:
        """Down to the empty drum where layers are stated."""
        if at_shaft:
            return super().reach(at_shaft)
        return (-self.start_position if self.growth_m_per_rad > 0.0 else -np.inf), np.inf

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Moving mass at the radius of the start, plus what turns with the shaft."""
        lever = self.load_of_shaft(np.array([self.start_angle]))[1][0]
        return np.asarray(self._mass(payload) * lever**2 + self.shaft_inertia_kg_m2)

    def motion_complaints(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        payload: float,
        process: float,
    ) -> Iterable[Complaint]:
        """A slack rope: it cannot push the load."""
        efforts = self.efforts(
            position, speed, acceleration, direction_of(speed), np.asarray(payload), np.asarray(process)
        )
        least, largest = float(np.min(efforts.total)), float(np.max(np.abs(efforts.total)))
        if least < -1e-9 * largest:
            yield Complaint("", f"a rope force of {least:.4g} N", "a rope that stays taut, force ≥ 0 N",
                            "The rope cannot push: lower more gently, or load the hook.")  # fmt: skip
