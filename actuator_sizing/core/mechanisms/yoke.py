"""Scotch yoke and eccentric: a pin or a disc off the axis pushes a slider."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import Complaint, Efforts, FloatArray, Parameter, direction_of
from actuator_sizing.core.mechanisms.crank import crank_slider
from actuator_sizing.core.mechanisms.driven_slider import SLIDER_PARAMETERS, DrivenSlider


@dataclass(frozen=True, kw_only=True)
class ScotchYoke(DrivenSlider):
    """Crank pin in a slot across the slide line: ``x = a cos φ``."""

    name: ClassVar[str] = "Scotch yoke"
    help: ClassVar[str] = "slider moved by a crank pin in a straight slot: harmonic stroke"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("crank radius", "length", "distance of the crank pin from the axis", positive=True, minimum=0.0,
                  example="40 mm"),
        *SLIDER_PARAMETERS,
    )  # fmt: skip

    crank_radius: float

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Slider position from the crank axis."""
        x = self.crank_radius * np.cos(angle)
        return x, -self.crank_radius * np.sin(angle), -x


@dataclass(frozen=True, kw_only=True)
class Eccentric(DrivenSlider):
    """Round disc off its axis against a roller, held by a spring; φ = 0 lifts the roller highest.

    The centres of disc and roller stay at the sum of the radii, which is a rod: ``x`` is that of a
    crank–slider. The spring presses the roller towards the axis.
    """

    name: ClassVar[str] = "eccentric"
    help: ClassVar[str] = "roller follower lifted by an eccentric disc against a spring"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("eccentricity", "length", "distance of the disc's centre from the axis", positive=True,
                  minimum=0.0, example="8 mm"),
        Parameter("disc radius", "length", "radius of the eccentric disc", positive=True, minimum=0.0,
                  example="30 mm"),
        Parameter("roller radius", "length", "radius of the follower roller (0 = knife edge)", default=0.0,
                  minimum=0.0, example="12 mm"),
        Parameter("return spring rate", "linear stiffness", "rate of the spring that presses the roller on",
                  default=0.0, minimum=0.0, example="5 N/mm"),
        Parameter("return spring preload", "force", "force of that spring at the lowest position", default=0.0,
                  minimum=0.0, example="100 N"),
        *SLIDER_PARAMETERS,
    )  # fmt: skip

    eccentricity: float
    disc_radius: float
    roller_radius: float = 0.0
    return_spring_rate: float = 0.0
    return_spring_preload: float = 0.0

    @property
    def _centres(self) -> float:
        return self.disc_radius + self.roller_radius

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Position of the roller's centre from the axis."""
        return crank_slider(angle, self.eccentricity, self._centres, 0.0)

    def complaints(self) -> Iterable[Complaint]:
        """A disc that does not reach round its axis."""
        if self.eccentricity >= self.disc_radius:
            yield Complaint("eccentricity", f"{self.eccentricity * 1e3:.6g} mm",
                            f"below the disc radius, {self.disc_radius * 1e3:.6g} mm",
                            "The axis must lie within the disc.")  # fmt: skip

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Slider on its guide, and the spring with gravity."""
        plain = super().efforts(position, speed, acceleration, direction, payload, process)
        lifted = position + self.start_position - (self._centres - self.eccentricity)
        spring = self.return_spring_preload + self.return_spring_rate * lifted
        return replace(plain, gravity=plain.gravity + spring)

    def motion_complaints(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        payload: float,
        process: float,
    ) -> Iterable[Complaint]:
        """A roller that lifts off, because nothing pulls it down."""
        efforts = self.efforts(
            position, speed, acceleration, direction_of(speed), np.asarray(payload), np.asarray(process)
        )
        least = float(np.min(efforts.total))
        if least < 0.0:
            yield Complaint("", f"a follower that lifts off (contact force {least:.4g} N)",
                            "a contact force that stays positive",
                            "Strengthen the return spring or slow down.")  # fmt: skip
