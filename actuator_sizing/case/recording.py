"""A measured or simulated cycle as understood: SI, closed, from 0 to its period."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.measured import PeriodicSpline

FloatArray = NDArray[np.float64]

RECORDED_PROCESS, RECORDED_EFFORT, RECORDED_SHAFT = "process force", "load force", "shaft torque"

EXACT_INTERVALS = 400  # stretches between instants that are evaluated one by one; more are condensed


@dataclass(frozen=True)
class Recording:
    """One cycle of a record.

    Attributes
    ----------
    time_s : ndarray, shape (n,)
        Instants of the effort, from 0 to the period, both included. [s]
    effort : ndarray, shape (n,)
        Effort there, straight in between; the last equals the first. N, or N·m for a rotary load or shaft. [-]
    kind : str
        What the effort is: `RECORDED_PROCESS`, `RECORDED_EFFORT` or `RECORDED_SHAFT`.
    motion : PeriodicSpline
        Smoothed position. [-]
    at_rest : bool
        No motion was recorded: the axis holds.
    speed_peak : float
        Largest speed of the smoothed motion at its knots. [m/s]
    payload : float
        Carried all along, kg or kg·m². [-]
    """

    time_s: FloatArray
    effort: FloatArray
    kind: str
    motion: PeriodicSpline
    at_rest: bool
    speed_peak: float
    payload: float = 0.0

    def effort_at(self, time_s: FloatArray) -> FloatArray:
        """Effort at any instants within the period, straight between samples [-]."""
        return np.asarray(np.interp(time_s, self.time_s, self.effort))
