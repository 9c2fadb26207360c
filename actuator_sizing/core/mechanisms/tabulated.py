"""Any single-valued map from driven shaft to load, from the table `map`."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import ROTARY, Complaint, FloatArray, Parameter
from actuator_sizing.core.mechanisms.driven_slider import SLIDER_PARAMETERS, DrivenSlider
from actuator_sizing.core.mechanisms.linkage import LEVER_PARAMETERS, DrivenLever
from actuator_sizing.core.mechanisms.shaft_map import ShaftMap

if TYPE_CHECKING:
    from scipy.interpolate import CubicSpline

_CLOSES = 1e-9  # of the stroke: the ends of a period must agree to that

PERIOD = Parameter("map period", "angle", "angle after which the map repeats, usually 360°; empty: the map ends",
                   optional=True, positive=True, minimum=0.0, maximum=1000.0, example="360 deg")  # fmt: skip


class TabulatedMap(ShaftMap):
    """``x(φ)`` as the cubic spline through the rows of `map`, with two continuous derivatives."""

    needs_map = True
    points: tuple[tuple[float, float], ...]
    map_period: float

    @property
    def is_periodic(self) -> bool:
        """Whether the map repeats."""
        return bool(np.isfinite(self.map_period))

    @cached_property
    def spline(self) -> CubicSpline:
        """Cubic spline: periodic, or not-a-knot at its ends (natural conditions would flatten them)."""
        from scipy.interpolate import CubicSpline

        angle, x = np.array(self.points).T
        if self.is_periodic:
            x = np.append(x[:-1], x[0])  # equal to rounding, as the check says
            return CubicSpline(angle, x, bc_type="periodic")
        return CubicSpline(angle, x)

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Spline and its exact derivatives; beyond a map that ends, its last cubic goes on."""
        if self.is_periodic:
            first = self.points[0][0]
            angle = first + np.mod(angle - first, self.map_period)
        return self.spline(angle), self.spline(angle, 1), self.spline(angle, 2)

    def shaft_range(self) -> tuple[float, float]:
        """First and last row, unless the map repeats."""
        if self.is_periodic:
            return -np.inf, np.inf
        return self.points[0][0], self.points[-1][0]

    def shaft_kinks(self, low: float, high: float) -> FloatArray:
        """The rows of the table: the third derivative jumps there."""
        angles = np.array([angle for angle, _ in self.points])
        if self.is_periodic:
            turns = np.arange(
                np.floor((low - angles[-1]) / self.map_period),
                np.ceil((high - angles[0]) / self.map_period) + 1,
            )
            angles = np.unique((angles[:-1, None] + turns * self.map_period).ravel())
        return np.asarray(angles[(angles > low) & (angles < high)])

    def complaints(self) -> Iterable[Complaint]:
        """A period that the rows do not span, or a map that does not come back."""
        span = self.points[-1][0] - self.points[0][0]
        if self.is_periodic and abs(span - self.map_period) > _CLOSES * self.map_period:
            yield Complaint("map period",
                            f"{np.degrees(self.map_period):.6g}°, rows that span {np.degrees(span):.6g}°",
                            "first and last row one period apart",
                            "Add a last row one period after the first, or clear the period.")  # fmt: skip
            return
        x = np.array([position for _, position in self.points])
        if self.is_periodic and abs(x[-1] - x[0]) > _CLOSES * np.ptp(x):
            yield Complaint("map period", f"a last position {x[-1] - x[0]:.4g} (SI) away from the first",
                            "the same position in the first and the last row",
                            "Correct the map, or clear the period.")  # fmt: skip
            return
        yield from super().complaints()


@dataclass(frozen=True, kw_only=True)
class TabulatedSlider(TabulatedMap, DrivenSlider):
    """Slider by any cam, linkage or curve that was measured or drawn."""

    name: ClassVar[str] = "tabulated slider"
    help: ClassVar[str] = "slider that follows the driven shaft by the table map: cam, any linkage"
    parameters: ClassVar[tuple[Parameter, ...]] = (PERIOD, *SLIDER_PARAMETERS)

    points: tuple[tuple[float, float], ...]
    map_period: float = np.nan


@dataclass(frozen=True, kw_only=True)
class TabulatedLever(TabulatedMap, DrivenLever):
    """Lever by any cam, linkage or curve that was measured or drawn."""

    name: ClassVar[str] = "tabulated lever"
    help: ClassVar[str] = "lever that follows the driven shaft by the table map: cam, any linkage"
    coordinate: ClassVar[str] = ROTARY
    parameters: ClassVar[tuple[Parameter, ...]] = (PERIOD, *LEVER_PARAMETERS)

    points: tuple[tuple[float, float], ...]
    map_period: float = np.nan
