"""In which units and words the axis and its motor are drawn."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from actuator_sizing.report.formatting import DisplayUnit, display_unit

_MANY_TURNS = 20  # beyond which an angle is counted in turns


@dataclass(frozen=True)
class AxisUnits:
    """Units of the load coordinate and of the machine, and the words that go with them.

    A rotary machine has torque and turns; a linear motor has force and moves, in the same columns.
    """

    linear_load: bool
    linear_motor: bool

    @classmethod
    def of(cls, case: Any) -> AxisUnits:
        """Read them off the mechanism of a case."""
        mechanism = case.mechanism
        return cls(mechanism.coordinate == "linear", bool(mechanism.drives_linear_motor))

    @property
    def effort_word(self) -> str:
        """Say torque or force."""
        return "force" if self.linear_motor else "torque"

    def effort(self, values: Any) -> DisplayUnit:
        """Choose the unit of motor torque or force for these SI values."""
        return DisplayUnit("N") if self.linear_motor else display_unit("N·m", values)

    def load_effort(self, values: Any) -> DisplayUnit:
        """Choose the unit of force or torque at the load for these SI values."""
        return display_unit("N" if self.linear_load else "N·m", values)

    def motor_speed(self) -> DisplayUnit:
        """Choose the unit of motor speed."""
        return DisplayUnit("m/s") if self.linear_motor else display_unit("rad/s", (1.0,))

    def position(self, values: Any) -> DisplayUnit:
        """Choose the unit of the load's position."""
        if self.linear_load:
            return display_unit("m", values)
        many = max((abs(value) for value in values), default=0.0) > _MANY_TURNS * math.tau
        return DisplayUnit("turns", math.tau) if many else display_unit("rad", values)

    def speed(self) -> DisplayUnit:
        """Choose the unit of the load's speed."""
        return DisplayUnit("m/s") if self.linear_load else display_unit("rad/s", (1.0,))

    def acceleration(self) -> DisplayUnit:
        """Choose the unit of the load's acceleration."""
        return DisplayUnit("m/s²" if self.linear_load else "rad/s²")


def current_label(basis: str | None) -> str:
    """Name a current axis with the kind of ampere.

    Examples
    --------
    >>> current_label("rms"), current_label(None)
    ('current [A rms]', 'current [A]')
    """
    return f"current [A {basis}]" if basis in ("rms", "peak", "DC") else "current [A]"
