"""A load carried by a linear motor: no transmission at all."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import GRAVITY_M_S2, FloatArray, Parameter
from actuator_sizing.core.mechanisms.linear_load import GUIDE_PARAMETERS, LinearLoad


@dataclass(frozen=True, kw_only=True)
class DirectLinearMotor(LinearLoad):
    """Linear motor: the driven "shaft" is the carriage, in metres and newtons.

    The motor's own moving mass is part of each candidate; gravity and guide friction act on it too.
    """

    name: ClassVar[str] = "linear motor"
    help: ClassVar[str] = "load carried by a linear motor, without transmission"
    drives_linear_motor: ClassVar[bool] = True
    parameters: ClassVar[tuple[Parameter, ...]] = GUIDE_PARAMETERS

    def ratio_at(self, position: FloatArray) -> tuple[FloatArray, FloatArray]:
        """One to one."""
        return np.ones_like(position), np.zeros_like(position)

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Moving mass and payload. [kg]"""
        return self._mass(payload)

    @property
    def specific_gravity_m_s2(self) -> float:
        """``g sin(inclination)``. [m/s²]"""
        return GRAVITY_M_S2 * float(np.sin(self.inclination))

    @property
    def specific_friction_m_s2(self) -> float:
        """``μ g cos(inclination)``. [m/s²]"""
        return self.guide_friction_coefficient * GRAVITY_M_S2 * float(np.cos(self.inclination))
