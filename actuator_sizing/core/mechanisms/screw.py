"""Ball screw and lead screw."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import Complaint, Parameter
from actuator_sizing.core.mechanisms.linear_load import (
    GUIDE_PARAMETERS,
    STAGE_PARAMETERS,
    RotatingDriveOfLinearLoad,
)
from actuator_sizing.core.screws import STEEL_DENSITY_KG_M3
from actuator_sizing.errors import InputError, Problem

_EFFICIENCY, _BACK, _INERTIA, _FRICTION = STAGE_PARAMETERS

SCREW_PARAMETERS = (
    Parameter("lead", "lead", "travel per screw turn (pitch times number of starts)", positive=True, minimum=0.0,
              maximum=1.0, example="10 mm"),
    Parameter("screw diameter", "length", "nominal diameter; gives the screw's inertia and the lead angle",
              optional=True, positive=True, minimum=0.0, example="25 mm"),
    Parameter("screw length", "length", "length of the turning screw; gives its inertia", optional=True,
              positive=True, minimum=0.0, example="900 mm"),
    Parameter("thread friction coefficient", "ratio", "friction in the thread; gives both efficiencies through "
              "the lead angle", optional=True, minimum=0.0, maximum=2.0, example=""),
    Parameter("thread mean diameter", "length", "mean diameter of the thread (default: the screw diameter)",
              optional=True, positive=True, minimum=0.0, example=""),
    Parameter("flank angle", "angle", "half of the thread angle: 0 square, 15° trapezoidal, 30° metric", default=0.0,
              minimum=0.0, maximum=1.0, example="0 deg"),
    Parameter("collar friction coefficient", "ratio", "friction of a plain thrust collar, with the thread friction",
              default=0.0, minimum=0.0, maximum=2.0, example="0"),
    Parameter("collar mean diameter", "length", "mean diameter of the thrust collar", default=0.0, minimum=0.0,
              example="0 mm"),
)  # fmt: skip


def screw_efficiencies(
    lead_m: float,
    mean_diameter_m: float,
    friction_coefficient: float,
    flank_angle_rad: float = 0.0,
    collar_friction_coefficient: float = 0.0,
    collar_diameter_m: float = 0.0,
) -> tuple[float, float]:
    """Forward and back-driving efficiency of a screw from lead angle and friction angle.

    Parameters
    ----------
    lead_m : float
        Travel per turn. [m]
    mean_diameter_m : float
        Mean thread diameter. [m]
    friction_coefficient : float
        Coefficient in the thread. [-]
    flank_angle_rad : float
        Half of the thread angle; a sloped flank presses harder, ``μ' = μ/cos α``. [rad]
    collar_friction_coefficient : float
        Coefficient of the thrust collar. [-]
    collar_diameter_m : float
        Mean diameter of the collar: mean of outer and inner one for uniform wear. [m]

    Returns
    -------
    tuple of float
        Forward and back-driving efficiency; a back-driving efficiency ≤ 0 means self-locking. [-]

    Notes
    -----
    ``η_f = tan λ / (tan(λ + ρ) + μ_c d_c/d_m)``, ``η_b = (tan(λ − ρ) − μ_c d_c/d_m) / tan λ`` with
    ``tan λ = lead/(π d_m)``, ``tan ρ = μ'``. Thread statics, e.g. Budynas & Nisbett, Shigley's Mechanical
    Engineering Design, power screws (the flank angle taken in the axial plane).

    Examples
    --------
    >>> screw_efficiencies(0.020, 0.020, 0.15)
    (0.6472, 0.5047)
    """
    slope = lead_m / (np.pi * mean_diameter_m)
    lead_angle = np.arctan(slope)
    friction_angle = np.arctan(friction_coefficient / np.cos(flank_angle_rad))
    collar = collar_friction_coefficient * collar_diameter_m / mean_diameter_m
    return (
        float(slope / (np.tan(lead_angle + friction_angle) + collar)),
        float((np.tan(lead_angle - friction_angle) - collar) / slope),
    )


def solid_cylinder_inertia(diameter_m: float, length_m: float, density_kg_m3: float) -> float:
    """Moment of inertia of a solid cylinder about its axis.

    Parameters
    ----------
    diameter_m : float
        Diameter. [m]
    length_m : float
        Length. [m]
    density_kg_m3 : float
        Density. [kg/m³]

    Returns
    -------
    float
        ``π ρ L d⁴ / 32``. [kg·m²]

    Examples
    --------
    >>> solid_cylinder_inertia(0.025, 1.0, 7850.0)
    0.000301
    """
    return np.pi * density_kg_m3 * length_m * diameter_m**4 / 32.0


def _jammed(lead_m: float, diameter_m: float, friction_coefficient: float, flank_angle_rad: float) -> Problem:
    """What to say of a thread whose lead angle and friction angle together reach 90°: turning cannot move it."""
    most = np.pi * diameter_m / lead_m * np.cos(flank_angle_rad)
    return Problem(
        "axis",
        None,
        "thread friction coefficient",
        got=f"{friction_coefficient:g} with a lead of {1e3 * lead_m:g} mm on {1e3 * diameter_m:g} mm diameter",
        allowed=f"below {most:.3g}, from where on the nut jams however hard the screw turns",
        remedy="Check lead, screw diameter and friction coefficient.",
    )


@dataclass(frozen=True, kw_only=True)
class Screw(RotatingDriveOfLinearLoad):
    """Screw and nut: ``φ = 2π x / lead``."""

    parameters: ClassVar[tuple[Parameter, ...]] = (*SCREW_PARAMETERS, *STAGE_PARAMETERS, *GUIDE_PARAMETERS)

    lead: float
    screw_diameter: float = np.nan
    screw_length: float = np.nan
    thread_friction_coefficient: float = np.nan
    thread_mean_diameter: float = np.nan
    flank_angle: float = 0.0
    collar_friction_coefficient: float = 0.0
    collar_mean_diameter: float = 0.0

    @property
    def shaft_ratio(self) -> float:
        """``2π / lead``. [rad/m]"""
        return 2.0 * np.pi / self.lead

    @property
    def _from_friction(self) -> tuple[float, float] | None:
        stated = self.thread_mean_diameter
        diameter = self.screw_diameter if np.isnan(stated) else stated
        if np.isnan(self.thread_friction_coefficient) or np.isnan(diameter):
            return None
        if self._jams(diameter):
            raise InputError(
                [_jammed(self.lead, diameter, self.thread_friction_coefficient, self.flank_angle)]
            )
        return screw_efficiencies(
            self.lead,
            diameter,
            self.thread_friction_coefficient,
            self.flank_angle,
            self.collar_friction_coefficient,
            self.collar_mean_diameter,
        )

    def _jams(self, diameter: float) -> bool:
        pressed = self.thread_friction_coefficient / np.cos(self.flank_angle)
        return bool(pressed * self.lead >= np.pi * diameter)  # lead angle plus friction angle reach 90°

    def complaints(self) -> Iterable[Complaint]:
        """A thread that jams, a collar without size; self-locking is worth knowing."""
        try:
            pair = self._from_friction
        except InputError as error:
            for problem in error.problems:
                yield Complaint(problem.column, problem.got, problem.allowed, problem.remedy)
            return
        if self.collar_friction_coefficient > 0.0 and self.collar_mean_diameter == 0.0:
            yield Complaint("collar mean diameter", "no value beside a collar friction coefficient",
                            "a diameter above zero", "State it, or leave the collar friction out.")  # fmt: skip
        if self.collar_friction_coefficient > 0.0 and pair is None:
            yield Complaint("collar friction coefficient", "no thread friction coefficient",
                            "both, since they act together",
                            "State the thread's friction, or put all into the efficiency.")  # fmt: skip
        if self.efficiency_back <= 0.0:
            yield Complaint("efficiency" if pair is None else "thread friction coefficient",
                            f"a self-locking screw (back-driving efficiency {self.efficiency_back:.3g})",
                            "worth knowing: at rest the screw holds the load by itself",
                            "Vibration can unlock it; lowering takes torque.", "note")  # fmt: skip

    @property
    def efficiency_forward(self) -> float:
        """From thread friction where stated, times the stated efficiency of the rest. [-]"""
        pair = self._from_friction
        return self.efficiency if pair is None else self.efficiency * pair[0]

    @property
    def efficiency_back(self) -> float:
        """From thread friction where stated; else stated; else by equal friction both ways. [-]"""
        pair = self._from_friction
        if pair is None or not np.isnan(self.back_driving_efficiency):
            return super().efficiency_back
        if pair[1] > 0.0:
            return pair[1] * (2.0 - 1.0 / self.efficiency)
        return pair[1] / self.efficiency  # self-locking: the rest transmits from the motor both ways

    @property
    def shaft_inertia_kg_m2(self) -> float:
        """Stated inertia plus the screw as a solid steel cylinder where its size is known. [kg·m²]"""
        if np.isnan(self.screw_diameter) or np.isnan(self.screw_length):
            return self.driven_shaft_inertia
        return self.driven_shaft_inertia + solid_cylinder_inertia(
            self.screw_diameter, self.screw_length, STEEL_DENSITY_KG_M3
        )


@dataclass(frozen=True, kw_only=True)
class BallScrew(Screw):
    """Rolling contact; the efficiency is usually stated (0.9 is common)."""

    name: ClassVar[str] = "ball screw"
    help: ClassVar[str] = "load on a guide, moved by a ball screw"
    parameters: ClassVar[tuple[Parameter, ...]] = Screw.parameters


@dataclass(frozen=True, kw_only=True)
class LeadScrew(Screw):
    """Sliding contact; friction coefficient or efficiency must be known, and self-locking is possible."""

    name: ClassVar[str] = "lead screw"
    help: ClassVar[str] = "load on a guide, moved by a sliding (trapezoidal or square) screw"
    parameters: ClassVar[tuple[Parameter, ...]] = Screw.parameters
