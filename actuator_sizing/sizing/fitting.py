"""Which parts can work together at all, before any bound is asked."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.parameters import BRUSHED, SINUSOIDAL, SIX_STEP, DriveParameters, MotorParameters


def compatible(motors: MotorParameters, drives: DriveParameters) -> NDArray[np.bool_]:
    """Which drive can commutate which motor, shape (M, D). [-]"""
    served = {
        BRUSHED: drives.serves_brushed,
        SIX_STEP: drives.serves_six_step,
        SINUSOIDAL: drives.serves_sinusoidal,
    }
    answer = np.zeros((len(motors), len(drives)), dtype=bool)
    for commutation, mask in served.items():
        answer |= (motors.commutation == commutation)[:, None] & mask[None, :]
    return answer


def fits_axis(case: Case) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Indices of the motors and gearheads that the axis can use at all.

    Parameters
    ----------
    case : Case
        The case. [-]

    Returns
    -------
    motors, gearheads : ndarray of int
        Linear motors where the mechanism is one, rotary ones elsewhere; no winding whose stated nominal
        voltage is far below the bus, since its insulation is not made for it. [-]
    """
    wants_linear = case.mechanism.drives_linear_motor
    allowed = case.number("largest bus over nominal voltage")
    with np.errstate(invalid="ignore"):
        overfed = case.surroundings.bus_nominal_v > allowed * case.motor_parameters.nominal_voltage_v
    motors = np.flatnonzero((case.motor_parameters.is_linear == wants_linear) & ~overfed)
    gearheads = np.arange(len(case.gearhead_parameters))
    if wants_linear:
        gearheads = np.flatnonzero(case.gearhead_parameters.is_direct)
    return motors, gearheads
