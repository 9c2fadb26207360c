"""A measured or simulated cycle as understood: SI, closed, from 0 to its period."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.periodic_spline import PeriodicSpline

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
    standstill : ndarray of bool, shape (k,)
        Intervals between knots of the motion in which the axis stands: what is left of speed is noise.
    payload : ndarray, shape (n,) or (0,)
        Carried at the instants, straight in between, kg or kg·m²; empty where there is none. [-]
    """

    time_s: FloatArray
    effort: FloatArray
    kind: str
    motion: PeriodicSpline
    at_rest: bool
    speed_peak: float
    standstill: NDArray[np.bool_]
    payload: FloatArray

    def effort_at(self, time_s: FloatArray) -> FloatArray:
        """Effort at any instants within the period, straight between samples [-]."""
        return np.asarray(np.interp(time_s, self.time_s, self.effort))

    def payload_at(self, time_s: FloatArray) -> FloatArray:
        """Payload at any instants within the period, straight between samples, kg or kg·m² [-]."""
        if not len(self.payload):
            return np.zeros_like(time_s)
        return np.asarray(np.interp(time_s, self.time_s, self.payload))

    def motion_at(self, time_s: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Stated coordinate, speed and acceleration on stretches between knots, shape (S, K) each [-]."""
        if self.at_rest:
            return np.zeros_like(time_s), np.zeros_like(time_s), np.zeros_like(time_s)
        return self.motion.kinematics(time_s)

    def stands(self, time_s: FloatArray) -> NDArray[np.bool_]:
        """Whether the axis stands at instants between knots, shape of `time_s`."""
        count = len(self.standstill)
        knot = (time_s * (count / self.motion.period_s)).astype(np.int64)
        return np.asarray(self.standstill[np.clip(knot, 0, count - 1)])
