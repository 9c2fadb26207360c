"""A load that turns with the driven shaft."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import ROTARY, Efforts, FloatArray, Mechanism, Parameter


@dataclass(frozen=True, kw_only=True)
class RotaryLoad(Mechanism):
    """Turntable, indexing table, spindle: ``φ = x``; the payload is an inertia."""

    name: ClassVar[str] = "rotary load"
    help: ClassVar[str] = "load that turns with the driven shaft: indexing table, turntable, roll"
    coordinate: ClassVar[str] = ROTARY
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("load inertia", "inertia", "everything that turns with the driven shaft, without payload",
                  minimum=0.0, example="1.8 kg·m²"),
        Parameter("friction torque", "torque", "constant (Coulomb) friction of bearing and seals at the driven "
                  "shaft", default=0.0, minimum=0.0, example="2 Nm"),
        Parameter("viscous friction", "rotary damping", "friction in proportion to speed at the driven shaft",
                  default=0.0, minimum=0.0, example="0 Nm·s/rad"),
    )  # fmt: skip

    load_inertia: float
    friction_torque: float = 0.0
    viscous_friction: float = 0.0

    def ratio_at(self, position: FloatArray) -> tuple[FloatArray, FloatArray]:
        """One to one."""
        return np.ones_like(position), np.zeros_like(position)

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Euler's law about a fixed axis; friction only where the load moves."""
        zero = 0.0 * position
        return Efforts(
            inertia=(self.load_inertia + payload) * acceleration,
            gravity=zero,
            friction=self.friction_torque * direction + self.viscous_friction * speed,
            process=process + zero,
        )

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Stated inertia plus payload."""
        return np.asarray(self.load_inertia + payload)
