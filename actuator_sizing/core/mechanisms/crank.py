"""Crank–slider and toggle lever: a turning link, a rod, a slider."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import Complaint, FloatArray, Parameter
from actuator_sizing.core.mechanisms.driven_slider import SLIDER_PARAMETERS, DrivenSlider


def crank_slider(
    angle: FloatArray, crank_m: float, rod_m: float, offset_m: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Position of a slider driven by crank and rod, with two derivatives by the crank angle.

    Parameters
    ----------
    angle : ndarray
        Crank angle from the direction of the slide line. [rad]
    crank_m : float
        Crank radius a. [m]
    rod_m : float
        Rod length b. [m]
    offset_m : float
        Distance e of the slide line from the crank axis. [m]

    Returns
    -------
    position, slope, bend : ndarray
        ``x = a cos φ + √(b² − (a sin φ − e)²)`` from the crank axis, x' and x''. [m]

    Notes
    -----
    Exact geometry, first principles; NaN where the rod cannot reach.

    Examples
    --------
    >>> import numpy as np
    >>> [part.round(4).tolist() for part in crank_slider(np.array([0.0, np.pi]), 0.1, 0.4, 0.0)]
    [[0.5, 0.3], [-0.0, -0.0], [-0.125, 0.075]]
    """
    sine, cosine = np.sin(angle), np.cos(angle)
    w, dw, ddw = crank_m * sine - offset_m, crank_m * cosine, -crank_m * sine
    with np.errstate(invalid="ignore", divide="ignore"):
        R = np.sqrt(rod_m**2 - w**2)
        x = crank_m * cosine + R
        slope = -crank_m * sine - w * dw / R
        bend = -crank_m * cosine - (dw**2 + w * ddw) / R - (w * dw) ** 2 / R**3
    return x, slope, bend


@dataclass(frozen=True, kw_only=True)
class CrankSlider(DrivenSlider):
    """Crank, rod and slider; +x points away from the crank, φ = 0 is the outer dead centre (without offset)."""

    name: ClassVar[str] = "crank-slider"
    help: ClassVar[str] = "slider moved by crank and connecting rod: press, saw, compressor"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("crank radius", "length", "distance of the crank pin from the axis", positive=True, minimum=0.0,
                  example="40 mm"),
        Parameter("rod length", "length", "distance between the pins of the connecting rod", positive=True,
                  minimum=0.0, example="180 mm"),
        Parameter("slide offset", "length", "distance of the slide line from the crank axis", default=0.0,
                  example="0 mm"),
        *SLIDER_PARAMETERS,
    )  # fmt: skip

    crank_radius: float
    rod_length: float
    slide_offset: float = 0.0

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Slider position from the crank axis."""
        return crank_slider(angle, self.crank_radius, self.rod_length, self.slide_offset)

    def complaints(self) -> Iterable[Complaint]:
        """A rod too short for the crank to turn."""
        least = self.crank_radius + abs(self.slide_offset)
        if self.rod_length <= least:
            yield Complaint("rod length", f"{self.rod_length * 1e3:.6g} mm",
                            f"above crank radius plus slide offset, {least * 1e3:.6g} mm",
                            "The crank cannot turn past: lengthen the rod or shorten the crank.")  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class ToggleLever(DrivenSlider):
    """Driven lever and link that stretch into one line; +x is the way of the slider towards that line."""

    name: ClassVar[str] = "toggle lever"
    help: ClassVar[str] = "slider pushed by a lever and a link that stretch: clamp, toggle press"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("lever length", "length", "driven lever, from its axis to the knee", positive=True, minimum=0.0,
                  example="60 mm"),
        Parameter("link length", "length", "link from the knee to the slider", positive=True, minimum=0.0,
                  example="60 mm"),
        *(p if p.name != "start angle" else
          Parameter("start angle", "angle", "angle of the lever before the stretched position (negative: not "
                    "stretched yet) at the start of the cycle", minimum=-np.pi, maximum=np.pi, example="-60 deg")
          for p in SLIDER_PARAMETERS),
    )  # fmt: skip

    lever_length: float
    link_length: float

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Slider position from the axis of the lever."""
        return crank_slider(angle, self.lever_length, self.link_length, 0.0)

    def shaft_range(self) -> tuple[float, float]:
        """All the way round if the link is the longer one, else as far as it reaches."""
        if self.link_length > self.lever_length:
            return -np.inf, np.inf
        # At the end itself the slider would need infinite speed.
        widest = (
            np.arcsin(self.link_length / self.lever_length)
            if self.link_length < self.lever_length
            else 0.5 * np.pi
        )
        return -widest * (1.0 - 1e-6), widest * (1.0 - 1e-6)
