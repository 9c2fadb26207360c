"""A mass on a straight guide that follows the driven shaft by a curve."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import FloatArray, Parameter
from actuator_sizing.core.mechanisms.linear_load import GUIDE_PARAMETERS, STAGE_PARAMETERS, DrivenLinearLoad
from actuator_sizing.core.mechanisms.shaft_map import ShaftMap

START_ANGLE = Parameter("start angle", "angle", "angle of the driven shaft at the start of the cycle",
                        default=0.0, minimum=-10.0, maximum=10.0, example="0 deg")  # fmt: skip
SLIDER_PARAMETERS = (START_ANGLE, *STAGE_PARAMETERS, *GUIDE_PARAMETERS)


@dataclass(frozen=True, kw_only=True)
class DrivenSlider(ShaftMap, DrivenLinearLoad):
    """Slider with mass, friction and inclination; the subclass states ``x(φ)``."""

    parameters: ClassVar[tuple[Parameter, ...]] = SLIDER_PARAMETERS

    start_angle: float = 0.0

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Moving mass times the square of the largest dx/dφ of one turn, plus what turns with the shaft."""
        low, high = self.shaft_range()
        angles = np.linspace(max(low, self.start_angle - np.pi), min(high, self.start_angle + np.pi), 721)
        lever = np.max(np.abs(self.load_of_shaft(angles)[1]))
        return np.asarray(self._mass(payload) * lever**2 + self.shaft_inertia_kg_m2)

    def inertia_over(self, position: FloatArray, lever: FloatArray, payload: float) -> float:
        """Moving mass times the square of the largest dx/dφ there, plus what turns with the shaft."""
        return float(self._mass(np.asarray(payload)) * np.max(lever**2) + self.shaft_inertia_kg_m2)
