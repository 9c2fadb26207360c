"""Mechanisms whose load follows the driven shaft by a curve: x = x(φ), with dead centres."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Iterable
from functools import cached_property

import numpy as np

from actuator_sizing.core.mechanisms.base import (
    SHAFT,
    Complaint,
    FloatArray,
    Mechanism,
    Transfer,
)

_SCAN = 1441  # points over two turns on which dead centres are bracketed: half a degree apart
_TABLE = 2049  # points of the inverse's first guess
_NEAR_DEAD_CENTRE = 1e-6  # of a turn; closer than this the load cannot be said to lead the shaft


class ShaftMap(Mechanism):
    """A mechanism that states ``x(φ)`` with two derivatives; the rest follows.

    Torque at the driven shaft is ``F dx/dφ``. With motion stated at the load, φ(x) is the branch that holds
    the start angle, between two dead centres.
    """

    motion_at = SHAFT
    start_angle: float

    @abstractmethod
    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """x, dx/dφ and d²x/dφ² at angles of the driven shaft. [m and rad, or rad]"""

    def shaft_range(self) -> tuple[float, float]:
        """Angles between which the geometry closes. [rad]"""
        return -np.inf, np.inf

    def shaft_kinks(self, low: float, high: float) -> FloatArray:
        """Angles between `low` and `high` at which x(φ) is not smooth. [rad]"""
        return np.empty(0)

    @property
    def resolved_by_nodes(self) -> bool:
        """Not: the curve bends along the stroke."""
        return False

    @cached_property
    def start_position(self) -> float:
        """Load coordinate of the geometry at the start of the cycle. [m or rad]"""
        return float(self.load_of_shaft(np.array([self.start_angle]))[0][0])

    @cached_property
    def branch(self) -> tuple[float, float]:
        """Angles of the dead centres, or ends of the geometry, on either side of the start. [rad]"""
        low, high = self.shaft_range()
        return self._next_dead_centre(-1.0, low), self._next_dead_centre(1.0, high)

    def _next_dead_centre(self, side: float, end: float) -> float:
        from scipy.optimize import brentq

        reach = min(2.0 * np.pi, abs(end - self.start_angle)) * (1.0 - 1e-12)
        angles = self.start_angle + side * np.linspace(0.0, reach, _SCAN)
        u = self.load_of_shaft(angles)[1]
        changes = np.flatnonzero(np.sign(u[1:]) != np.sign(u[0]))
        if not len(changes):
            return float(angles[-1])
        k = int(changes[0])
        if u[k + 1] == 0.0 or np.sign(u[k]) == np.sign(u[k + 1]):
            return float(angles[k + 1])
        return float(
            brentq(
                lambda a: float(self.load_of_shaft(np.array([a]))[1][0]), angles[k], angles[k + 1], xtol=1e-15
            )
        )

    def _starts_dead(self) -> bool:
        low, high = self.branch
        least = _NEAR_DEAD_CENTRE * 2.0 * np.pi
        return self.start_angle - low < least or high - self.start_angle < least

    def shaft_of_load(self, position: FloatArray) -> FloatArray:
        """Angle of the driven shaft at load coordinates of the geometry, on the branch of the start. [rad]

        Newton's method from a table, kept between the neighbouring points of the table.
        """
        low, high = self.branch
        # Finer towards the ends, where the angle goes with the square root of the distance.
        angles = low + (high - low) * 0.5 * (1.0 - np.cos(np.linspace(0.0, np.pi, _TABLE)))
        x = self.load_of_shaft(angles)[0]
        if x[0] > x[-1]:
            angles, x = angles[::-1], x[::-1]
        k = np.clip(np.searchsorted(x, position), 1, _TABLE - 1)
        below, above = np.minimum(angles[k - 1], angles[k]), np.maximum(angles[k - 1], angles[k])
        phi = 0.5 * (below + above)
        for _ in range(12):
            value, slope, _ = self.load_of_shaft(phi)
            with np.errstate(divide="ignore", invalid="ignore"):
                step = (value - position) / slope
            before, phi = phi, np.clip(phi - np.nan_to_num(step), below, above)
            if np.array_equal(before, phi):
                break
        return np.asarray(phi)

    def ratio_at(self, position: FloatArray) -> tuple[FloatArray, FloatArray]:
        """``1/x'`` and ``−x''/x'³`` on the branch of the start; `position` counts from there."""
        _, u, du = self.load_of_shaft(self.shaft_of_load(position + self.start_position))
        return 1.0 / u, -du / u**3

    def transfer(self, stated: FloatArray, at_shaft: bool) -> Transfer:
        """Load and shaft over the stated coordinate."""
        one, zero = np.ones_like(stated), np.zeros_like(stated)
        if at_shaft:
            angle = self.start_angle + stated
            x, u, du = self.load_of_shaft(angle)
            return Transfer(x - self.start_position, u, du, one, zero, angle)
        angle = self.shaft_of_load(stated + self.start_position)
        _, u, du = self.load_of_shaft(angle)
        return Transfer(stated, one, zero, 1.0 / u, -du / u**3, angle)

    def borders(self, stated: FloatArray, at_shaft: bool) -> FloatArray:
        """Kinks of the curve, in the stated coordinate."""
        low, high = float(stated.min()), float(stated.max())
        if at_shaft:
            return self.shaft_kinks(self.start_angle + low, self.start_angle + high) - self.start_angle
        ends = self.shaft_of_load(np.array([low, high]) + self.start_position)
        kinks = self.shaft_kinks(float(ends.min()), float(ends.max()))
        return np.sort(self.load_of_shaft(kinks)[0] - self.start_position)

    def reach(self, at_shaft: bool) -> tuple[float, float]:
        """Ends of the geometry or, for motion stated at the load, dead centres, counted from the start."""
        if at_shaft:
            low, high = self.shaft_range()
            return low - self.start_angle, high - self.start_angle
        if self._starts_dead():
            return 0.0, 0.0
        x = np.sort(self.load_of_shaft(np.array(self.branch))[0]) - self.start_position
        margin = 1e-9 * float(x[1] - x[0])  # at a dead centre itself the ratio is infinite
        return float(x[0]) + margin, float(x[1]) - margin

    def complaints(self) -> Iterable[Complaint]:
        """A start outside the geometry."""
        low, high = self.shaft_range()
        if not low <= self.start_angle <= high:
            yield Complaint("start angle", f"{np.degrees(self.start_angle):.6g}°",
                            f"from {np.degrees(low):.6g}° to {np.degrees(high):.6g}°, where the geometry closes",
                            "Start within it.")  # fmt: skip
