"""A lever moved by the driven shaft through a linkage; four-bar."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import (
    GRAVITY_M_S2,
    Complaint,
    FloatArray,
    Parameter,
    Transfer,
    back_driving_efficiency,
)
from actuator_sizing.core.mechanisms.driven_slider import START_ANGLE
from actuator_sizing.core.mechanisms.linear_load import STAGE_PARAMETERS
from actuator_sizing.core.mechanisms.links import MovingLink, link_parameters
from actuator_sizing.core.mechanisms.rotary import TURNING_PARAMETERS, TurningLoad
from actuator_sizing.core.mechanisms.shaft_map import ShaftMap

_WEIGHT = (
    Parameter("lever mass", "mass", "mass whose weight turns the lever; its inertia is in the load inertia",
              default=0.0, minimum=0.0, example="0 kg"),
    Parameter("lever mass radius", "length", "distance of the lever's centre of mass from its axis", default=0.0,
              minimum=0.0, example="0 mm"),
    Parameter("lever mass angle", "angle", "angle of that centre above the horizontal where the lever's angle "
              "is zero", default=0.0, minimum=-10.0, maximum=10.0, example="0 deg"),
)  # fmt: skip
LEVER_PARAMETERS = (START_ANGLE, *STAGE_PARAMETERS, *_WEIGHT, *TURNING_PARAMETERS)


@dataclass(frozen=True, kw_only=True)
class DrivenLever(ShaftMap, TurningLoad):
    """Lever with inertia, friction and weight; the subclass states its angle over the driven shaft's."""

    parameters: ClassVar[tuple[Parameter, ...]] = LEVER_PARAMETERS
    shaft_parts_field: ClassVar[str] = "driven_shaft_inertia"

    start_angle: float = 0.0
    efficiency: float = 1.0
    back_driving_efficiency: float = np.nan
    driven_shaft_inertia: float = 0.0
    driven_shaft_friction_torque: float = 0.0
    lever_mass: float = 0.0
    lever_mass_radius: float = 0.0
    lever_mass_angle: float = 0.0

    @property
    def efficiency_forward(self) -> float:
        """Stated forward efficiency of the linkage. [-]"""
        return self.efficiency

    @property
    def efficiency_back(self) -> float:
        """Stated back-driving efficiency, else the relation for equal friction both ways. [-]"""
        if np.isnan(self.back_driving_efficiency):
            return back_driving_efficiency(self.efficiency)
        return self.back_driving_efficiency

    @property
    def shaft_inertia_kg_m2(self) -> float:
        """Stated inertia at the driven shaft. [kg·m²]"""
        return self.driven_shaft_inertia

    @property
    def shaft_friction_nm(self) -> float:
        """Stated friction torque at the driven shaft, grease cold or not. [N·m]"""
        return self.driven_shaft_friction_torque * self.cold_grease_factor

    def _held(self, position: FloatArray, payload: FloatArray) -> FloatArray:
        angle = position + self.start_position + self.lever_mass_angle
        return np.asarray(self.lever_mass * self.lever_mass_radius * GRAVITY_M_S2 * np.cos(angle))

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Inertia times the square of the largest ratio of one turn, plus what turns with the shaft."""
        low, high = self.shaft_range()
        angles = np.linspace(max(low, self.start_angle - np.pi), min(high, self.start_angle + np.pi), 721)
        lever = np.max(np.abs(self.load_of_shaft(angles)[1]))
        return np.asarray(self._inertia(payload) * lever**2 + self.shaft_inertia_kg_m2)

    def inertia_over(self, position: FloatArray, lever: FloatArray, payload: float) -> float:
        """Inertia times the square of the largest dx/dφ there, plus what turns with the shaft."""
        return float(self._inertia(np.asarray(payload)) * np.max(lever**2) + self.shaft_inertia_kg_m2)


@dataclass(frozen=True, kw_only=True)
class FourBar(DrivenLever):
    """Crank a, coupler b, rocker c, ground d; angles of crank and rocker from the line of the axes.

    Loop ``a e^{iφ} + b e^{iβ} = d + c e^{iψ}``; the open branch (coupler not crossing the ground line).
    """

    name: ClassVar[str] = "four-bar"
    help: ClassVar[str] = "rocker moved by a crank and a coupler: wiper, shaker, swing door"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("crank radius", "length", "driven link", positive=True, minimum=0.0, example="40 mm"),
        Parameter("coupler length", "length", "link between crank and rocker", positive=True, minimum=0.0,
                  example="150 mm"),
        Parameter("rocker length", "length", "link that carries the load", positive=True, minimum=0.0,
                  example="100 mm"),
        Parameter("ground length", "length", "distance of the axes of crank and rocker", positive=True, minimum=0.0,
                  example="160 mm"),
        *link_parameters("coupler", "crank pin"),
        Parameter("ground inclination", "angle", "of the line from crank axis to rocker axis above the horizontal; "
                  "only the coupler's weight asks", default=0.0, minimum=-10.0, maximum=10.0, example="0 deg"),
        *LEVER_PARAMETERS,
    )  # fmt: skip

    crank_radius: float
    coupler_length: float
    rocker_length: float
    ground_length: float
    coupler_mass: float = 0.0
    coupler_centre: float = np.nan
    coupler_inertia: float = np.nan
    ground_inclination: float = 0.0

    @property
    def coupler(self) -> MovingLink:
        """The link between crank and rocker."""
        return MovingLink(self.coupler_mass, self.coupler_length, self.coupler_centre, self.coupler_inertia)

    @property
    def shaft_inertia_kg_m2(self) -> float:
        """Stated inertia at the driven shaft, and the coupler's mass at the crank pin. [kg·m²]"""
        return self.driven_shaft_inertia + self.coupler.driven_pin_kg * self.crank_radius**2

    def _inertia(self, payload: FloatArray) -> FloatArray:
        return np.asarray(super()._inertia(payload) + self.coupler.far_pin_kg * self.rocker_length**2)

    def _held(self, position: FloatArray, payload: FloatArray) -> FloatArray:
        psi = position + self.start_position + self.ground_inclination
        weight = self.coupler.far_pin_kg * GRAVITY_M_S2 * self.rocker_length
        return np.asarray(super()._held(position, payload) + weight * np.cos(psi))

    def shaft_torques(
        self, geometry: Transfer, speed: FloatArray, acceleration: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Coupler: its mass at the crank pin, and its turning, ``ΔJ (β'² φ̈ + β' β'' φ̇²)``."""
        inertia, gravity = super().shaft_torques(geometry, speed, acceleration)
        coupler = self.coupler
        if geometry.shaft_angle is None or coupler.mass_kg == 0.0:
            return inertia, gravity
        _, (turn, bend) = self._angles(geometry.shaft_angle)
        inertia = inertia + coupler.turning_kg_m2 * turn * (turn * acceleration + bend * speed**2)
        weight = coupler.driven_pin_kg * GRAVITY_M_S2 * self.crank_radius
        return inertia, gravity + weight * np.cos(geometry.shaft_angle + self.ground_inclination)

    def load_of_shaft(self, angle: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Rocker angle with two derivatives."""
        return self._angles(angle)[0]

    def _angles(
        self, angle: FloatArray
    ) -> tuple[tuple[FloatArray, FloatArray, FloatArray], tuple[FloatArray, FloatArray]]:
        """ψ, ψ', ψ'' of the rocker and β', β'' of the coupler, by differentiating the loop.

        ``ψ' = a sin(φ − β)/(c sin(ψ − β))``, ``β' = a sin(φ − ψ)/(b sin(ψ − β))``; the second derivatives from
        the same.
        """
        a, b, c, d = self.crank_radius, self.coupler_length, self.rocker_length, self.ground_length
        X, Y = a * np.cos(angle) - d, a * np.sin(angle)  # crank pin seen from the rocker's axis
        with np.errstate(invalid="ignore", divide="ignore"):
            toward = np.arctan2(Y, X)
            opening = np.arccos((X**2 + Y**2 + c**2 - b**2) / (2.0 * c * np.hypot(X, Y)))
            psi = toward - opening
            psi = np.where(psi < -0.5 * np.pi, psi + 2.0 * np.pi, psi)
            beta = np.arctan2(c * np.sin(psi) - Y, c * np.cos(psi) - X)
            apart = np.sin(psi - beta)
            dpsi = a * np.sin(angle - beta) / (c * apart)
            dbeta = a * np.sin(angle - psi) / (b * apart)
            lean = np.cos(psi - beta) * (dpsi - dbeta)
            ddpsi = a * np.cos(angle - beta) * (1.0 - dbeta) / (c * apart) - dpsi * lean / apart
            ddbeta = a * np.cos(angle - psi) * (1.0 - dpsi) / (b * apart) - dbeta * lean / apart
        return (psi, dpsi, ddpsi), (dbeta, ddbeta)

    def complaints(self) -> Iterable[Complaint]:
        """Links with which the crank cannot turn all the way round (Grashof)."""
        a, b, c, d = self.crank_radius, self.coupler_length, self.rocker_length, self.ground_length
        near, far = abs(d - a), d + a
        if near <= abs(b - c) or far >= b + c:
            yield Complaint("coupler length",
                            "links of " + ", ".join(f"{link * 1e3:.6g}" for link in (a, b, c, d))
                            + " mm (crank, coupler, rocker, ground)",
                            "coupler and rocker that close at every crank angle: their sum above ground plus "
                            "crank, their difference below ground minus crank",
                            "Change a length, or describe the part of a turn that is used by a map.")  # fmt: skip
        yield from self.coupler.complaints("coupler")
