"""Continuous current of the drives in the surroundings of the case."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.drive_limits import RATED_ALTITUDE_M, derating_factor
from actuator_sizing.core.parameters import DriveParameters

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Derating:
    """What is left of the continuous current of D drives; NaN where the surroundings exceed what is stated."""

    by_ambient: FloatArray  # (D,)
    by_altitude: FloatArray  # (D,)


def derating_of(case: Case) -> Derating:
    """Derating of every drive of the catalog by ambient temperature and altitude.

    Parameters
    ----------
    case : Case
        The case. [-]

    Returns
    -------
    Derating
        Shape (D,). [-]
    """
    drives, s = case.drive_parameters, case.surroundings
    per_kelvin = np.asarray(case.drives.values["ambient_derating"], dtype=float)
    per_hundred = np.asarray(case.drives.values["altitude_derating_per_100_m"], dtype=float)
    return Derating(
        derating_factor(s.ambient_degc - drives.continuous_ambient_degc, per_kelvin),
        derating_factor((s.altitude_m - RATED_ALTITUDE_M) / 100.0, per_hundred),
    )


def derated_drives(case: Case) -> DriveParameters:
    """Drives of the catalog with the continuous current that is left in the surroundings of the case.

    Parameters
    ----------
    case : Case
        The case. [-]

    Returns
    -------
    DriveParameters
        Shape (D,); the continuous current is NaN where the sheet does not say what is left. The peak current
        is that of the sheet: it heats for too short a time. [-]
    """
    left = derating_of(case)
    drives = case.drive_parameters
    return replace(
        drives, continuous_current_a=drives.continuous_current_a * left.by_ambient * left.by_altitude
    )
