"""Drives as the screening sees them: limits as amplitudes, so that any current basis compares."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import amplitude_per_unit_current
from actuator_sizing.sizing.derating import derated_drives

FloatArray = NDArray[np.float64]

_NOTHING = 1e-30  # in place of the current that derating leaves none of


class DriveSide:
    """The drives' limits as amplitudes over the allowed utilisation."""

    def __init__(self, case: Case, allowed: Mapping[str, float]):
        d, s = derated_drives(case), case.surroundings
        amplitude = amplitude_per_unit_current(d.current_basis)
        self.peak, self.continuous = (
            np.where(np.isnan(current), np.inf, np.maximum(current * amplitude, _NOTHING))
            for current in (d.peak_current_a, d.continuous_current_a)
        )
        # The drive's peak current also bounds the torque over speed; the stricter of the two allowed values counts.
        strict = min(allowed.get("drive_peak_current", np.inf), allowed.get("speed_torque", np.inf))
        self.peak_allowed = strict
        self.peak_check = "drive_peak_current" if "drive_peak_current" in allowed else "speed_torque"
        self.continuous_allowed = allowed.get("drive_continuous_current", np.inf)
        with np.errstate(invalid="ignore"):
            bus = np.fmax(s.bus_max_v / d.bus_voltage_max_v, d.bus_voltage_min_v / s.bus_min_v)
        self.bus = np.nan_to_num(bus, nan=0.0) / allowed.get("drive_bus_voltage", np.inf)
        self.names = ("drive_bus_voltage", "drive_continuous_current", self.peak_check)

    def __len__(self) -> int:
        return len(self.peak)

    def utilisations(self, peak_a: FloatArray, rms_a: FloatArray, drives: NDArray[np.intp]) -> FloatArray:
        """Lower bounds over the allowed utilisation of K pairs on D drives, in the order of `names`.

        Parameters
        ----------
        peak_a, rms_a : ndarray, shape (K,)
            Lower bounds of largest and RMS motor current, as amplitudes. [A]
        drives : ndarray of int, shape (D,)
            Which drives. [-]

        Returns
        -------
        ndarray, shape (3, K, D)
            Bus voltage range, continuous current, peak current. [-]
        """
        bus = np.broadcast_to(self.bus[drives][None, :], (len(peak_a), len(drives)))
        continuous = rms_a[:, None] / (self.continuous * self.continuous_allowed)[drives][None, :]
        top = peak_a[:, None] / (self.peak * self.peak_allowed)[drives][None, :]
        return np.stack([bus, continuous, top])
