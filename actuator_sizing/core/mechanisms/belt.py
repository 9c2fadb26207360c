"""Toothed belt over pulleys, and rack and pinion."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import FloatArray, Parameter
from actuator_sizing.core.mechanisms.linear_load import (
    GUIDE_PARAMETERS,
    STAGE_PARAMETERS,
    RotatingDriveOfLinearLoad,
)


@dataclass(frozen=True, kw_only=True)
class BeltAxis(RotatingDriveOfLinearLoad):
    """Belt and pulley: ``φ = x / r`` with the pitch radius r. The belt moves with the load."""

    name: ClassVar[str] = "belt"
    help: ClassVar[str] = "load on a guide, pulled by a belt over pulleys"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("pulley diameter", "length", "pitch diameter of the driven pulley", positive=True, minimum=0.0,
                  example="60 mm"),
        Parameter("belt mass", "mass", "mass of the whole belt; it moves with the load but is not lifted",
                  default=0.0, minimum=0.0, example="0.4 kg"),
        *STAGE_PARAMETERS,
        *GUIDE_PARAMETERS,
    )  # fmt: skip

    pulley_diameter: float
    belt_mass: float = 0.0

    @property
    def shaft_ratio(self) -> float:
        """``1 / radius``. [rad/m]"""
        return 2.0 / self.pulley_diameter

    def _mass(self, payload: FloatArray) -> FloatArray:
        return np.asarray(super()._mass(payload) + self.belt_mass)


@dataclass(frozen=True, kw_only=True)
class RackAndPinion(RotatingDriveOfLinearLoad):
    """Rack and pinion: ``φ = x / r`` with the pitch radius r."""

    name: ClassVar[str] = "rack and pinion"
    help: ClassVar[str] = "load on a guide, moved by a pinion on a rack (motor on the carriage: add its mass)"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("pinion diameter", "length", "pitch diameter of the pinion", positive=True, minimum=0.0,
                  example="50 mm"),
        *STAGE_PARAMETERS,
        *GUIDE_PARAMETERS,
    )  # fmt: skip

    pinion_diameter: float

    @property
    def shaft_ratio(self) -> float:
        """``1 / radius``. [rad/m]"""
        return 2.0 / self.pinion_diameter
