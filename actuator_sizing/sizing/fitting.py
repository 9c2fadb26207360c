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
    motors = np.flatnonzero(_moves_as_the_axis(case) & ~_overfed(case))
    gearheads = np.arange(len(case.gearhead_parameters))
    if case.mechanism.drives_linear_motor:
        gearheads = np.flatnonzero(case.gearhead_parameters.is_direct)
    return motors, gearheads


def _moves_as_the_axis(case: Case) -> NDArray[np.bool_]:
    return np.asarray(case.motor_parameters.is_linear == case.mechanism.drives_linear_motor)


def _overfed(case: Case) -> NDArray[np.bool_]:
    """Windings whose stated nominal voltage is too far below the bus."""
    allowed = case.number("largest bus over nominal voltage")
    with np.errstate(invalid="ignore"):
        return case.surroundings.bus_nominal_v > allowed * case.motor_parameters.nominal_voltage_v


def misfits(case: Case) -> dict[str, int]:
    """Count the sets that cannot be built by the first reason met; reasons without a set are left out.

    Parameters
    ----------
    case : Case
        The case. [-]

    Returns
    -------
    dict
        Words to number of sets; the numbers add up to the sets that are not screened. [-]
    """
    gearheads, drives = len(case.gearhead_parameters), len(case.drive_parameters)
    moves, overfed = _moves_as_the_axis(case), _overfed(case)
    motors, usable = fits_axis(case)
    unserved = ~compatible(case.motor_parameters.take(motors), case.drive_parameters)
    kind = "rotary" if case.mechanism.drives_linear_motor else "linear"
    found = {
        f"a {kind} motor does not drive this mechanism": int(np.sum(~moves)) * gearheads * drives,
        "the bus is too high for the nominal voltage of the winding": int(np.sum(moves & overfed))
        * gearheads
        * drives,
        "a linear motor has no gearhead": len(motors) * (gearheads - len(usable)) * drives,
        "the drive does not commutate the motor": int(unserved.sum()) * len(usable),
    }
    return {reason: count for reason, count in found.items() if count}
