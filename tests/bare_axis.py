"""One axis with a motor that adds nothing of its own, to hold textbook drives against the sizing chain."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.mechanisms.base import GRAVITY_M_S2
from actuator_sizing.sizing.demand import Demand, build_demand
from actuator_sizing.sizing.evaluation import PairResults, evaluate_pairs
from tests.made_cases import DIRECT, GEARHEAD, MOTOR, case, segment

RPM = math.tau / 60.0
INCH_M = 0.0254
POUND_FORCE_N = 0.45359237 * GRAVITY_M_S2
POUND_INCH_NM = POUND_FORCE_N * INCH_M
HORSEPOWER_W = 550.0 * 12.0 * POUND_INCH_NM
KILOGRAM_FORCE_N = GRAVITY_M_S2
KM_H = 1.0 / 3.6

#: No friction, a rotor too light to matter (not zero: the inertia ratio divides by it), constant K, no saturation.
BARE_MOTOR = dict(
    MOTOR, friction_torque_nm=0.0, viscous_friction_nm_s=0.0, rotor_inertia_kg_m2=1e-12,
    magnet_coefficient_per_k=0.0, peak_torque_nm=np.nan,
)  # fmt: skip
BARE_GEARHEAD = dict(
    GEARHEAD, ratio=1.0, efficiency=1.0, efficiency_back=1.0, no_load_torque_nm=0.0, inertia_kg_m2=0.0
)


@dataclass(frozen=True)
class Axis:
    """What the driven shaft must do, and what that asks of each motor and gearhead."""

    case: Case
    demand: Demand
    pairs: PairResults

    @property
    def shaft_torque_nm(self) -> float:
        """Torque at the driven shaft in the middle of the first segment. [N·m]"""
        return float(self.demand.shaft_torque[0, self.demand.shaft_torque.shape[1] // 2])


def axis(
    mechanism: str,
    values: dict[str, float],
    *segments: Segment,
    motor: dict[str, Any] | None = None,
    gearheads: list[dict[str, Any]] | None = None,
) -> Axis:
    """Demand and evaluation of a bare motor with each of the gearheads; without any, driven directly."""
    rows = [DIRECT] if gearheads is None else [{**BARE_GEARHEAD, **row} for row in gearheads]
    motors = [{**BARE_MOTOR, **(motor or {})}] * len(rows)
    made = case(mechanism, values, segments, motors=motors, gearheads=rows)
    demand = build_demand(made)
    pairs = evaluate_pairs(demand, made.motor_parameters, made.gearhead_parameters, made.surroundings)
    return Axis(made, demand, pairs)


def steady(speed: float, **load: Any) -> Segment:
    """A second at constant speed."""
    return segment(2, "constant speed", start_speed=speed, duration_s=1.0, **load)


def ramp(start: float, end: float, **given: Any) -> Segment:
    """A constant acceleration from one speed to another, by time, acceleration or distance."""
    return segment(2, "speed ramp", start_speed=start, end_speed=end, **given)
