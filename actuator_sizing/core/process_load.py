"""Process effort along a segment: straight between instants or positions, with jumps where two coincide."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

TIME, POSITION = "time", "position"


@dataclass(frozen=True)
class ProcessLoad:
    """Effort of the process over time or position, linear between knots.

    Attributes
    ----------
    over : str
        ``"time"`` from the start of the segment [s], or ``"position"`` of the load from the start of the
        cycle [m]. [-]
    knots : tuple of float
        Ascending; two alike make a jump. Radians stand for metres on a rotary axis. [-]
    efforts : tuple of float
        Effort at the knots; zero before the first and after the last. Positive opposes positive motion. [N]
    reverses : bool
        The effort opposes motion in either direction, and is nothing at rest. [-]
    """

    over: str
    knots: tuple[float, ...]
    efforts: tuple[float, ...]
    reverses: bool = False

    def values(self, at: FloatArray, direction: float) -> FloatArray:
        """Effort at points that all lie between the same two knots.

        Parameters
        ----------
        at : ndarray, shape (K,)
            Times [s] or positions [m] of the points; the middle of their range tells between which knots. [-]
        direction : float
            Sign of motion; 0 at rest. [-]

        Returns
        -------
        ndarray, shape (K,)
            Effort along +x that the axis must give. [N]

        Notes
        -----
        At a jump the two sides differ, so that a point at a border takes the value of its own side.

        Examples
        --------
        >>> ProcessLoad("time", (0.0, 1.0, 1.0, 2.0), (0.0, 10.0, 4.0, 4.0)).values(np.array([0.0, 1.0]), 1.0)
        array([ 0., 10.])
        """
        sign = direction if self.reverses else 1.0
        middle = 0.5 * (float(at[0]) + float(at[-1]))
        right = int(np.searchsorted(self.knots, middle, side="right"))
        if sign == 0.0 or right == 0 or right == len(self.knots):
            if right == len(self.knots) and sign != 0.0 and middle == self.knots[-1]:
                return np.full_like(at, sign * self.efforts[-1])  # standing at the end of the window
            return np.zeros_like(at)
        low, high = self.knots[right - 1], self.knots[right]
        f_low, f_high = self.efforts[right - 1], self.efforts[right]
        if f_low == f_high:
            return np.full_like(at, sign * f_low)
        return np.asarray(sign * (f_low + (f_high - f_low) * (at - low) / (high - low)))

    def kinks_between(self, low: float, high: float) -> FloatArray:
        """Knots strictly between two instants [s] or positions [m], each once [-]."""
        knots = np.unique(self.knots)
        return np.asarray(knots[(knots > low) & (knots < high)])
