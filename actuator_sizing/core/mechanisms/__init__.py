"""Mechanisms between the load and the driven shaft, one short file each.

To add one: write a frozen dataclass derived from `Mechanism`, state its `parameters`, `ratio_at`, `efforts`
and `inertia_at_shaft`, and list it in `MECHANISMS`. Reader, template and documentation follow by themselves.
"""

from actuator_sizing.core.mechanisms.base import (
    GRAVITY_M_S2,
    LINEAR,
    ROTARY,
    Efforts,
    Mechanism,
    Parameter,
    back_driving_efficiency,
)
from actuator_sizing.core.mechanisms.belt import BeltAxis, RackAndPinion
from actuator_sizing.core.mechanisms.linear_motor import DirectLinearMotor
from actuator_sizing.core.mechanisms.rotary import RotaryLoad
from actuator_sizing.core.mechanisms.screw import BallScrew, LeadScrew

MECHANISMS: dict[str, type[Mechanism]] = {
    cls.name: cls for cls in (RotaryLoad, BallScrew, LeadScrew, BeltAxis, RackAndPinion, DirectLinearMotor)
}

__all__ = [
    "GRAVITY_M_S2",
    "LINEAR",
    "MECHANISMS",
    "ROTARY",
    "BallScrew",
    "BeltAxis",
    "DirectLinearMotor",
    "Efforts",
    "LeadScrew",
    "Mechanism",
    "Parameter",
    "RackAndPinion",
    "RotaryLoad",
    "back_driving_efficiency",
]
