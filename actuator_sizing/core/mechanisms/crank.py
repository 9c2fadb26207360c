"""Crank–slider and toggle lever: a turning link, a rod, a slider."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import GRAVITY_M_S2, Complaint, FloatArray, Parameter, Transfer
from actuator_sizing.core.mechanisms.driven_slider import SLIDER_PARAMETERS, DrivenSlider
from actuator_sizing.core.mechanisms.links import MovingLink, link_parameters


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
class LinkedSlider(DrivenSlider):
    """A slider behind a driven link and a rod with mass, whose lengths and masses the subclass names."""

    @property
    @abstractmethod
    def links(self) -> tuple[float, float, MovingLink]:
        """Length of the driven link and offset of the slide line [m], and the rod."""

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Slider position from the axis of the driven link."""
        driven, offset, rod = self.links
        return crank_slider(angle, driven, rod.length_m, offset)

    def _hanging(self, payload: FloatArray) -> FloatArray:
        return np.asarray(super()._hanging(payload) + self.links[2].far_pin_kg)

    @property
    def shaft_inertia_kg_m2(self) -> float:
        """Stated inertia at the driven shaft, and the rod's mass at the pin of the driven link. [kg·m²]"""
        driven, _, rod = self.links
        return self.driven_shaft_inertia + rod.driven_pin_kg * driven**2

    def inertia_over(self, position: FloatArray, lever: FloatArray, payload: float) -> float:
        """As of every slider; a rod that turns more inertia than its pins hold counts at its fastest."""
        driven, offset, rod = self.links
        fastest = driven**2 / max(rod.length_m**2 - (driven + abs(offset)) ** 2, rod.length_m**2 * 1e-6)
        return super().inertia_over(position, lever, payload) + max(rod.turning_kg_m2, 0.0) * fastest

    def shaft_torques(
        self, geometry: Transfer, speed: FloatArray, acceleration: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Rod: its mass at the pin of the driven link, and its turning, ``ΔJ (β'² φ̈ + β' β'' φ̇²)``."""
        driven, offset, rod = self.links
        inertia, gravity = super().shaft_torques(geometry, speed, acceleration)
        if geometry.shaft_angle is None or rod.mass_kg == 0.0:
            return inertia, gravity
        sine, cosine = np.sin(geometry.shaft_angle), np.cos(geometry.shaft_angle)
        w, dw, ddw = driven * sine - offset, driven * cosine, -driven * sine
        R = np.sqrt(rod.length_m**2 - w**2)  # sin β = w/b, b cos β = R
        turn, bend = dw / R, ddw / R + w * dw**2 / R**3
        inertia = inertia + rod.turning_kg_m2 * turn * (turn * acceleration + bend * speed**2)
        along, across = np.sin(self.inclination), np.cos(self.inclination)
        weight = rod.driven_pin_kg * GRAVITY_M_S2 * driven
        return inertia, gravity + weight * (cosine * across - sine * along)


@dataclass(frozen=True, kw_only=True)
class CrankSlider(LinkedSlider):
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
        *link_parameters("rod", "crank pin"),
        *SLIDER_PARAMETERS,
    )  # fmt: skip

    crank_radius: float
    rod_length: float
    slide_offset: float = 0.0
    rod_mass: float = 0.0
    rod_centre: float = np.nan
    rod_inertia: float = np.nan

    @property
    def links(self) -> tuple[float, float, MovingLink]:
        """Crank radius and slide offset [m], and the connecting rod."""
        rod = MovingLink(self.rod_mass, self.rod_length, self.rod_centre, self.rod_inertia)
        return self.crank_radius, self.slide_offset, rod

    def complaints(self) -> Iterable[Complaint]:
        """A rod too short for the crank to turn."""
        least = self.crank_radius + abs(self.slide_offset)
        if self.rod_length <= least:
            yield Complaint("rod length", f"{self.rod_length * 1e3:.6g} mm",
                            f"above crank radius plus slide offset, {least * 1e3:.6g} mm",
                            "The crank cannot turn past: lengthen the rod or shorten the crank.")  # fmt: skip
        yield from self.links[2].complaints("rod")


@dataclass(frozen=True, kw_only=True)
class ToggleLever(LinkedSlider):
    """Driven lever and link that stretch into one line; +x is the way of the slider towards that line."""

    name: ClassVar[str] = "toggle lever"
    help: ClassVar[str] = "slider pushed by a lever and a link that stretch: clamp, toggle press"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("lever length", "length", "driven lever, from its axis to the knee", positive=True, minimum=0.0,
                  example="60 mm"),
        Parameter("link length", "length", "link from the knee to the slider", positive=True, minimum=0.0,
                  example="60 mm"),
        *link_parameters("link", "knee"),
        *(p if p.name != "start angle" else
          Parameter("start angle", "angle", "angle of the lever before the stretched position (negative: not "
                    "stretched yet) at the start of the cycle", minimum=-np.pi, maximum=np.pi, example="-60 deg")
          for p in SLIDER_PARAMETERS),
    )  # fmt: skip

    lever_length: float
    link_length: float
    link_mass: float = 0.0
    link_centre: float = np.nan
    link_inertia: float = np.nan

    @property
    def links(self) -> tuple[float, float, MovingLink]:
        """Lever length and no offset [m], and the link."""
        return (
            self.lever_length,
            0.0,
            MovingLink(self.link_mass, self.link_length, self.link_centre, self.link_inertia),
        )

    def complaints(self) -> Iterable[Complaint]:
        """A start outside the geometry; a link whose inertia has no mass."""
        yield from super().complaints()
        yield from self.links[2].complaints("link")

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
