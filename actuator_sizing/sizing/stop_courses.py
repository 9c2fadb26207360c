"""Courses of every way of stopping one set, from its worst instant; what the stop diagram is drawn from."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.braking import shorted_torque
from actuator_sizing.core.machine import judge
from actuator_sizing.core.stop_course import StopCourse, stop_course
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.checks.motor import current_limited_torque
from actuator_sizing.sizing.stop_instants import ShaftBalance, stop_instants
from actuator_sizing.sizing.stops import (
    StopResults,
    brake_stops,
    brake_torque,
    coasting_stops,
    controlled_stops,
    drops,
    shorted_stops,
)

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

CONTROLLED, SHORTED, BRAKE, COASTING, DROP = (
    "controlled stop", "shorted winding", "holding brake", "coasting", "drop from rest"
)  # fmt: skip
_LEAST_HORIZON_S = 0.2


@dataclass(frozen=True)
class StopCourses:
    """Courses of one set.

    Attributes
    ----------
    frame : DataFrame
        kind, time_s, speed, way: of the load, from where the command came, positive in the sense of the motion.
    reaction_s : float
        Reaction time. [s]
    closing_s : float
        Closing time of the holding brake; NaN: none known. [s]
    at_s : dict
        Instant of the cycle that each kind starts from. [s]
    """

    frame: pd.DataFrame
    reaction_s: float
    closing_s: float
    at_s: dict[str, float]


def is_asked(sets: Sets) -> bool:
    """Whether the case says how far the load may move, or the first set has a brake whose closing time is known."""
    if sets.states("allowed stopping distance", "allowed drop distance"):
        return True
    return bool(np.isfinite(sets.catalog_values("motors", "brake_closing_time")[0] * brake_torque(sets)[0]))


def stop_courses(sets: Sets) -> StopCourses | None:
    """Every way of stopping the first of the sets, from the worst instant of that way.

    Parameters
    ----------
    sets : Sets
        Evaluated sets; the first counts. [-]

    Returns
    -------
    StopCourses or None
        None where nobody asks, or where the reaction time is not known. [-]
    """
    import pandas as pd

    own = sets.only(0)
    reaction = own.option("stop reaction time")
    if np.isnan(reaction) or not is_asked(own):
        return None
    closing = float(own.catalog_values("motors", "brake_closing_time")[0])
    ways = {
        CONTROLLED: (controlled_stops, 0.0, _constant(current_limited_torque(own))),
        SHORTED: (shorted_stops, 0.0, _shorted(own)),
        BRAKE: (brake_stops, closing, _constant(brake_torque(own))),
        COASTING: (coasting_stops, 0.0, _constant(np.zeros(1))),
        DROP: (drops, closing, _constant(brake_torque(own))),
    }
    found = {kind: own.once(study) for kind, (study, _, _) in ways.items()}
    known = {kind: result for kind, result in found.items() if not np.isnan(result.distance[0])}
    lasting = [float(result.time_s[0]) for kind, result in known.items() if kind != COASTING]
    finite = [time for time in lasting if np.isfinite(time)]
    horizon = max([1.25 * max(finite, default=0.0), reaction + _LEAST_HORIZON_S])
    instants = own.once(stop_instants)
    parts, starts = [], {}
    for kind, result in known.items():
        _, extra, braking = ways[kind]
        if kind == DROP and not float(result.distance[0]) > 0.0:
            continue  # nothing pulls: a held load stays
        course = _course(own, kind, result, reaction + extra, braking, horizon)
        index = int(result.instant[0])
        starts[kind] = float(instants.at_s[index])
        scale = float(own.gearheads.ratio[0] * instants.ratio[index])
        parts.append(
            pd.DataFrame(
                {
                    "kind": kind,
                    "time_s": course.time_s,
                    "speed": course.speed_rad_s / scale,
                    "way": course.angle_rad / scale,
                }
            )
        )
    return StopCourses(pd.concat(parts, ignore_index=True), reaction, closing, starts) if parts else None


def _course(
    own: Sets,
    kind: str,
    result: StopResults,
    delay_s: float,
    braking: Callable[[FloatArray], FloatArray],
    horizon_s: float,
) -> StopCourse:
    instants = own.once(stop_instants)
    instants = instants.at_rest() if kind == DROP else instants
    at, i = ShaftBalance.of(instants, own.motors, own.gearheads), int(result.instant[0])
    return stop_course(
        float(at.speed_rad_s[0, i]),
        float(at.inertia_kg_m2[0, i]),
        float(at.load_nm[0, i]),
        float(at.friction_nm[0, i]),
        delay_s,
        braking,
        horizon_s,
    )


def _constant(torque_nm: FloatArray) -> Callable[[FloatArray], FloatArray]:
    return lambda omega: np.full_like(omega, float(torque_nm[0]))


def _shorted(own: Sets) -> Callable[[FloatArray], FloatArray]:
    judged = judge(own.motors, own.surroundings)
    return lambda omega: shorted_torque(
        omega, judged.resistance_ohm[0], judged.torque_constant_nm_per_a[0], judged.reactance_per_speed[0]
    )
