"""Every check, declared once; screening, evaluation, report and the limits table read this list.

To add one: declare a `Check` in the file of its group and list it here.
"""

from actuator_sizing.sizing.checks.base import Check, Measure, Need, Sets
from actuator_sizing.sizing.checks.bus import BUS_CHECKS
from actuator_sizing.sizing.checks.drive import DRIVE_BUS, DRIVE_CONTINUOUS, DRIVE_PEAK, DRIVE_PEAK_TIME
from actuator_sizing.sizing.checks.drive_limits import DRIVE_LIMIT_CHECKS
from actuator_sizing.sizing.checks.dynamics import (
    FOLLOWING_ERROR,
    RESONANCE,
    SETTLING,
    STABILITY_RESERVE,
)
from actuator_sizing.sizing.checks.gearhead import (
    GEARHEAD_EQUIVALENT,
    GEARHEAD_MAX_SPEED,
    GEARHEAD_MEAN_SPEED,
    GEARHEAD_PEAK,
    INERTIA_RATIO,
)
from actuator_sizing.sizing.checks.gearhead_life import GEARHEAD_LIFE_CHECKS
from actuator_sizing.sizing.checks.holding import HOLDING_CHECKS
from actuator_sizing.sizing.checks.motor import (
    MOTOR_PEAK_CURRENT,
    MOTOR_SPEED,
    RMS_CURRENT,
    SPEED_TORQUE,
    VOLTAGE,
    WINDING_TEMPERATURE,
)
from actuator_sizing.sizing.checks.overload import OVERLOAD_CHECKS
from actuator_sizing.sizing.checks.screw import SCREW_CHECKS
from actuator_sizing.sizing.checks.shaft import SHAFT_CHECKS
from actuator_sizing.sizing.checks.stopping import STOPPING_CHECKS
from actuator_sizing.sizing.checks.traction import TRACTION_CHECKS

CHECKS: tuple[Check, ...] = (
    SPEED_TORQUE,
    RMS_CURRENT,
    WINDING_TEMPERATURE,
    MOTOR_PEAK_CURRENT,
    MOTOR_SPEED,
    VOLTAGE,
    *OVERLOAD_CHECKS,
    DRIVE_CONTINUOUS,
    DRIVE_PEAK,
    DRIVE_PEAK_TIME,
    DRIVE_BUS,
    *DRIVE_LIMIT_CHECKS,
    *BUS_CHECKS,
    GEARHEAD_EQUIVALENT,
    GEARHEAD_PEAK,
    GEARHEAD_MEAN_SPEED,
    GEARHEAD_MAX_SPEED,
    *GEARHEAD_LIFE_CHECKS,
    *SHAFT_CHECKS,
    *SCREW_CHECKS,
    *TRACTION_CHECKS,
    *STOPPING_CHECKS,
    *HOLDING_CHECKS,
    INERTIA_RATIO,
    SETTLING,
    FOLLOWING_ERROR,
    STABILITY_RESERVE,
    RESONANCE,
)

__all__ = ["CHECKS", "Check", "Measure", "Need", "Sets"]
