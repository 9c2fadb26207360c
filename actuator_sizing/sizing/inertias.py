"""The inertia inventory referred to driven shaft and motor: what each part contributes."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from actuator_sizing.case.inertias import DRIVEN_SHAFT, LOAD
from actuator_sizing.core.inertias import Part
from actuator_sizing.core.mechanisms import LINEAR
from actuator_sizing.sizing.results import InertiaShare

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.demand import Demand


def inertia_shares(case: Case, demand: Demand, ratio: float) -> tuple[InertiaShare, ...]:
    """Each part of the inventory and the rest of the axis, at driven shaft and motor.

    Parameters
    ----------
    case : Case
        The axis; its parts are already in mechanism and gearheads. [-]
    demand : Demand
        The cycle, which says how far the load's lever goes. [-]
    ratio : float
        Motor turns per turn of the driven shaft. [-]

    Returns
    -------
    tuple of InertiaShare
        Empty without an inventory. Where the ratio changes along the stroke, a part at the load counts with
        the largest one. Rotor, brake and gearhead are not among them. [-]
    """
    if not case.parts:
        return ()
    lever = _largest_lever(demand)
    at_shaft = [_at_shaft(case, part, lever, ratio) for part in case.parts]
    behind = sum(
        J for part, J in zip(case.parts, at_shaft, strict=True) if part.referred_to in (LOAD, DRIVEN_SHAFT)
    )
    at_motor = sum(
        J
        for part, J in zip(case.parts, at_shaft, strict=True)
        if part.referred_to not in (LOAD, DRIVEN_SHAFT)
    )
    total = demand.load_inertia + at_motor
    shares = [
        InertiaShare(
            part.name,
            part.shape,
            part.referred_to,
            part.rule,
            part.mass_kg,
            part.inertia_kg_m2,
            J,
            J / ratio**2,
            J / total if total > 0.0 else 0.0,
        )
        for part, J in zip(case.parts, at_shaft, strict=True)
    ]
    rest = max(demand.load_inertia - behind, 0.0)
    shares.append(
        InertiaShare(
            "rest of the axis", "", DRIVEN_SHAFT, "stated with the quantities of the axis, and payload",
            np.nan, rest, rest, rest / ratio**2, rest / total if total > 0.0 else 0.0,
        )
    )  # fmt: skip
    return tuple(shares)


def _largest_lever(demand: Demand) -> float:
    """Largest dx/dφ over the cycle, at the nodes; nothing turns in an axis that never moves."""
    fastest = float(np.max(np.abs(demand.shaft_speed)))
    if fastest == 0.0:
        return 0.0
    turning = np.abs(demand.shaft_speed) > 1e-6 * fastest
    return float(np.max(np.abs(demand.speed[turning] / demand.shaft_speed[turning])))


def _at_shaft(case: Case, part: Part, lever: float, ratio: float) -> float:
    if part.referred_to == LOAD:
        own = part.mass_kg if case.mechanism.coordinate == LINEAR else part.inertia_kg_m2
        return own * lever**2
    return part.inertia_kg_m2 if part.referred_to == DRIVEN_SHAFT else part.inertia_kg_m2 * ratio**2
