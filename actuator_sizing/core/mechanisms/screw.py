"""Ball screw and lead screw."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import Parameter
from actuator_sizing.core.mechanisms.linear_load import (
    GUIDE_PARAMETERS,
    STAGE_PARAMETERS,
    RotatingDriveOfLinearLoad,
)
from actuator_sizing.errors import InputError, Problem

STEEL_DENSITY_KG_M3 = 7850.0  # common practice for plain and alloyed steel

_EFFICIENCY, _BACK, _INERTIA, _FRICTION = STAGE_PARAMETERS

SCREW_PARAMETERS = (
    Parameter("lead", "lead", "travel per screw turn (pitch times number of starts)", positive=True, minimum=0.0,
              maximum=1.0, example="10 mm"),
    Parameter("screw diameter", "length", "nominal diameter; gives the screw's inertia and the lead angle",
              optional=True, positive=True, minimum=0.0, example="25 mm"),
    Parameter("screw length", "length", "length of the turning screw; gives its inertia", optional=True,
              positive=True, minimum=0.0, example="900 mm"),
    Parameter("thread friction coefficient", "ratio", "friction in the thread, flank angle included; gives both "
              "efficiencies through the lead angle", optional=True, minimum=0.0, maximum=2.0, example=""),
)  # fmt: skip


def screw_efficiencies(
    lead_m: float, mean_diameter_m: float, friction_coefficient: float
) -> tuple[float, float]:
    """Forward and back-driving efficiency of a screw from lead angle and friction angle.

    Parameters
    ----------
    lead_m : float
        Travel per turn. [m]
    mean_diameter_m : float
        Mean thread diameter. [m]
    friction_coefficient : float
        Coefficient in the thread; for a sloped flank divide by the cosine of the half flank angle first. [-]

    Returns
    -------
    tuple of float
        Forward and back-driving efficiency; a back-driving efficiency ≤ 0 means self-locking. [-]

    Notes
    -----
    ``η_f = tan λ / tan(λ + ρ)``, ``η_b = tan(λ − ρ) / tan λ``, ``tan λ = lead/(π d_m)``, ``tan ρ = μ``.
    Square-thread statics, e.g. Budynas & Nisbett, Shigley's Mechanical Engineering Design, power screws.

    Examples
    --------
    >>> screw_efficiencies(0.020, 0.020, 0.15)
    (0.6472, 0.5047)
    """
    lead_angle = np.arctan(lead_m / (np.pi * mean_diameter_m))
    friction_angle = np.arctan(friction_coefficient)
    return (
        float(np.tan(lead_angle) / np.tan(lead_angle + friction_angle)),
        float(np.tan(lead_angle - friction_angle) / np.tan(lead_angle)),
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


def _jammed(lead_m: float, diameter_m: float, friction_coefficient: float) -> Problem:
    """What to say of a thread whose lead angle and friction angle together reach 90°: turning cannot move it."""
    return Problem(
        "axis",
        None,
        "thread friction coefficient",
        got=f"{friction_coefficient:g} with a lead of {1e3 * lead_m:g} mm on {1e3 * diameter_m:g} mm diameter",
        allowed=f"below {np.pi * diameter_m / lead_m:.3g}, from where on the nut jams however hard the screw turns",
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

    @property
    def shaft_ratio(self) -> float:
        """``2π / lead``. [rad/m]"""
        return 2.0 * np.pi / self.lead

    @property
    def _from_friction(self) -> tuple[float, float] | None:
        if np.isnan(self.thread_friction_coefficient) or np.isnan(self.screw_diameter):
            return None
        pair = screw_efficiencies(self.lead, self.screw_diameter, self.thread_friction_coefficient)
        if not pair[0] > 0.0:
            raise InputError([_jammed(self.lead, self.screw_diameter, self.thread_friction_coefficient)])
        return pair

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
