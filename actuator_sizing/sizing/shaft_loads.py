"""Forces across and along the driven shaft, and what the bearings of gearhead or motor stand there."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.life import BALL_EXPONENT, ROLLER_EXPONENT
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.checks.traction import application_factor

FloatArray = NDArray[np.float64]


def states_radial_force(sets: Sets) -> bool:
    """Whether a force across the shaft is stated, or follows from belt or rack."""
    return sets.states("shaft radial force", "belt pretension", "pressure angle")


def radial_force(sets: Sets) -> FloatArray:
    """Force across the driven shaft at the nodes of the cycle.

    Parameters
    ----------
    sets : Sets
        Holds case and cycle. [-]

    Returns
    -------
    ndarray, shape (P, K)
        As stated; else of both strands of a belt, ``max(2 F_pretension, K_A |F|)``; else of the teeth of a rack,
        ``K_A |F|/cos α``; with the application factor. Never negative. [N]

    Notes
    -----
    While both strands of a belt are tight the load does not change their sum; beyond twice the pretension one is
    slack and the other carries the whole force. First principles, strands taken as parallel.
    """
    shape = sets.demand.effort.shape
    stated = sets.option("shaft radial force")
    if not np.isnan(stated):
        return np.full(shape, stated)
    force = np.asarray(application_factor(sets) * np.abs(sets.demand.effort))
    pretension = sets.option("belt pretension")
    if not np.isnan(pretension):
        return np.maximum(2.0 * pretension, force)
    return np.asarray(force / np.cos(sets.option("pressure angle")))


@dataclass(frozen=True)
class ShaftBearings:
    """Bearings of the shaft that carries the load, gearhead's or direct-drive motor's; each field shape (S,)."""

    radial_n: FloatArray  # permissible where the load acts; NaN: not known
    axial_n: FloatArray
    life_s: FloatArray
    life_speed_rad_s: FloatArray
    exponent: FloatArray


def shaft_bearings(sets: Sets) -> ShaftBearings:
    """What the data sheets say of those bearings.

    Parameters
    ----------
    sets : Sets
        Holds case, motors and gearheads. [-]

    Returns
    -------
    ShaftBearings
        The radial force holds where the load acts: ``F (a + x_sheet)/(a + x)`` with the lever a back to the bearings;
        without the lever the force of the sheet up to its own position. [-]

    Notes
    -----
    Equal moment about the bearings; the bearing next to the load is loaded a little less evenly. Common practice.
    """
    direct = sets.gearheads.is_direct

    def column(name: str) -> FloatArray:
        return np.where(direct, sets.catalog_values("motors", name), sets.catalog_values("gearheads", name))

    force, at, lever = (
        column(name) for name in ("permissible_radial_force", "radial_force_position", "bearing_lever")
    )
    x = sets.option("shaft force position")
    with np.errstate(invalid="ignore"):
        moved = force * (lever + at) / (lever + x)
        radial = np.where(np.isnan(lever), np.where(x <= at, force, np.nan), moved)
    roller = np.where(
        direct,
        sets.catalog_word_is("motors", "shaft_bearings", "roller"),
        sets.catalog_word_is("gearheads", "shaft_bearings", "roller"),
    )
    return ShaftBearings(
        radial,
        column("permissible_axial_force"),
        column("bearing_life"),
        column("bearing_life_speed"),
        np.where(roller, ROLLER_EXPONENT, BALL_EXPONENT),
    )


def equivalent_radial_force(sets: Sets, exponent: FloatArray) -> FloatArray:
    """Equivalent of the radial force for the life of bearings of each kind, shape (S,). [N]"""
    force = radial_force(sets)
    ball, roller = (sets.demand.equivalent(force, p) for p in (BALL_EXPONENT, ROLLER_EXPONENT))
    return np.where(exponent == BALL_EXPONENT, ball, roller)
