"""Mechanisms between the load and the driven shaft, one short file each.

To add one: write a frozen dataclass derived from the nearest base (`LinearLoad`, `TurningLoad`, `DrivenSlider`,
`DrivenLever`, or `Mechanism` itself), state its `parameters` and geometry, and list it in `MECHANISMS`. Reader,
template and documentation follow by themselves.
"""

from actuator_sizing.core.mechanisms.base import (
    GRAVITY_M_S2,
    INERTIA,
    LINEAR,
    LOAD,
    MASS,
    ROTARY,
    SHAFT,
    Complaint,
    Efforts,
    Mechanism,
    Parameter,
    Transfer,
    back_driving_efficiency,
)
from actuator_sizing.core.mechanisms.belt import BeltAxis, RackAndPinion
from actuator_sizing.core.mechanisms.crank import CrankSlider, ToggleLever
from actuator_sizing.core.mechanisms.fluid import DisplacementPump, Fan
from actuator_sizing.core.mechanisms.linear_motor import DirectLinearMotor
from actuator_sizing.core.mechanisms.linkage import FourBar
from actuator_sizing.core.mechanisms.rolling import Conveyor, Gantry, WheelDrive
from actuator_sizing.core.mechanisms.rotary import Arm, RotaryLoad, UnbalancedTable
from actuator_sizing.core.mechanisms.screw import BallScrew, LeadScrew
from actuator_sizing.core.mechanisms.tabulated import TabulatedLever, TabulatedSlider
from actuator_sizing.core.mechanisms.web import Unwinder, Winder
from actuator_sizing.core.mechanisms.winch import Winch
from actuator_sizing.core.mechanisms.yoke import Eccentric, ScotchYoke

_LISTED: tuple[type[Mechanism], ...] = (
    RotaryLoad, BallScrew, LeadScrew, BeltAxis, RackAndPinion, DirectLinearMotor,
    Winch, Conveyor, WheelDrive, Gantry, Arm, UnbalancedTable,
    CrankSlider, ScotchYoke, ToggleLever, Eccentric, FourBar, TabulatedSlider, TabulatedLever,
    Fan, DisplacementPump, Winder, Unwinder,
)  # fmt: skip
MECHANISMS: dict[str, type[Mechanism]] = {cls.name: cls for cls in _LISTED}

__all__ = [
    "GRAVITY_M_S2",
    "INERTIA",
    "LINEAR",
    "LOAD",
    "MASS",
    "MECHANISMS",
    "ROTARY",
    "SHAFT",
    "Arm",
    "BallScrew",
    "BeltAxis",
    "Complaint",
    "Conveyor",
    "CrankSlider",
    "DirectLinearMotor",
    "DisplacementPump",
    "Eccentric",
    "Efforts",
    "Fan",
    "FourBar",
    "Gantry",
    "LeadScrew",
    "Mechanism",
    "Parameter",
    "RackAndPinion",
    "RotaryLoad",
    "ScotchYoke",
    "TabulatedLever",
    "TabulatedSlider",
    "ToggleLever",
    "Transfer",
    "UnbalancedTable",
    "Unwinder",
    "WheelDrive",
    "Winch",
    "Winder",
    "back_driving_efficiency",
]
