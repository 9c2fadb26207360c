"""The levers: every quantity that a user may change to make a set pass, declared once."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from actuator_sizing.case.model import Case
from actuator_sizing.sizing import case_changes as change
from actuator_sizing.sizing.acceleration_share import (
    acceleration_share,
    largest_share,
    with_acceleration_share,
)
from actuator_sizing.units import si_unit

_LONGEST_DWELL = 10.0  # cycles: a machine that waits longer is another machine
_SLOWEST, _STIFFEST = 4.0, 100.0  # times the present value
_COOLER_K = 40.0
_SMALLEST_RISE_K = 10.0


@dataclass(frozen=True)
class Lever:
    """One quantity that may be changed.

    Attributes
    ----------
    key, title : str
        Name in results; as printed.
    unit : callable
        Case of one set → SI unit of the value, "-" for a factor or a part.
    present : callable
        Case of one set → present value; None where the lever does not exist.
    changed : callable
        (case of one set, value) → the case with that value.
    bounds : callable
        (case of one set, present value) → the furthest values tried, one per direction.
    whole : callable
        (case of one set, present value) → the change that costs 1. [-]
    entered : tuple of str
        Table and column or quantity where the user states it, for its unit; empty where there is none.
    """

    key: str
    title: str
    unit: Callable[[Case], str]
    present: Callable[[Case], float | None]
    changed: Callable[[Case, float], Case]
    bounds: Callable[[Case, float], tuple[float, ...]]
    whole: Callable[[Case, float], float] = lambda case, present: abs(present)
    entered: tuple[str, str] = ("", "")

    def cost(self, case: Case, present: float, value: float) -> float:
        """What a change costs: its size against the present value, or against what the lever says instead [-]."""
        return abs(value - present) / self.whole(case, present)


def _unit(text: str) -> Callable[[Case], str]:
    return lambda case: text


# -- motion ------------------------------------------------------------------------------------------
def _move_time(case: Case) -> float | None:
    total = change.move_time_s(case)
    return total if change.is_planned(case) and total > 0.0 else None


def _with_move_time(case: Case, total_s: float) -> Case:
    present = _move_time(case)
    assert present is not None, "only asked for where something moves"
    return change.with_move_time(case, total_s / present)


# -- load --------------------------------------------------------------------------------------------
def _payload(case: Case) -> float | None:
    heaviest = change.heaviest_payload(case)
    return heaviest if change.is_planned(case) and heaviest > 0.0 else None


def _friction(case: Case) -> float | None:
    """The one friction that is stated, or the factor 1 on several; a measured effort holds its friction."""
    stated = change.friction_fields(case)
    if not stated or not change.is_planned(case):
        return None
    return float(getattr(case.mechanism, stated[0])) if len(stated) == 1 else 1.0


def _friction_unit(case: Case) -> str:
    stated = change.friction_fields(case)
    if len(stated) != 1:
        return "-"
    kinds = {parameter.field: parameter.kind for parameter in case.mechanism.parameters}
    return si_unit(kinds[stated[0]]) or "-"


def _with_friction(case: Case, value: float) -> Case:
    return change.with_friction(case, value / (_friction(case) or 1.0))


# -- surroundings ------------------------------------------------------------------------------------
def _permitted_rise(case: Case, ambient_degc: float) -> float:
    """Rise of the winding that the ambient leaves; what a change of ambient is held against. [K]"""
    limit = float(case.motor_parameters.winding_limit_degc[0])
    return max(limit - ambient_degc, _SMALLEST_RISE_K) if not np.isnan(limit) else 100.0


LEVERS: tuple[Lever, ...] = (
    Lever(
        "ratio", "gearhead ratio, all else equal", _unit("-"), change.gearhead_ratio, change.with_ratio,
        lambda case, ratio: (ratio / 5.0, ratio * 5.0), entered=("gearheads", "ratio"),
    ),
    Lever(
        "move_time", "time of all moves together", _unit("s"), _move_time, _with_move_time,
        lambda case, time: (_SLOWEST * time,), entered=("duty_cycle", "duration"),
    ),
    Lever(
        "acceleration_share", "part of each move spent accelerating, braking in proportion", _unit("-"),
        acceleration_share, with_acceleration_share,
        lambda case, share: (largest_share(case), 0.1 * share), entered=("duty_cycle", "acceleration share"),
    ),
    Lever(
        "payload", "heaviest payload, the others in proportion", change.payload_unit, _payload,
        change.with_payload, lambda case, payload: (0.0,), entered=("duty_cycle", "payload"),
    ),
    Lever(
        "bus_voltage", "minimum bus voltage, the others in proportion", _unit("V"),
        lambda case: case.surroundings.bus_min_v, change.with_bus,
        lambda case, volts: (2.0 * volts, 0.5 * volts), entered=("axis", "minimum bus voltage"),
    ),
    Lever(
        "ambient", "ambient temperature", _unit("°C"), lambda case: case.surroundings.ambient_degc,
        change.with_ambient, lambda case, ambient: (ambient - _COOLER_K,), _permitted_rise,
        entered=("axis", "ambient temperature"),
    ),
    Lever(
        "cooling", "thermal resistance housing to ambient", _unit("K/W"), change.housing_resistance,
        change.with_housing_resistance, lambda case, resistance: (0.2 * resistance,),
        entered=("motors", "thermal_resistance_housing_ambient"),
    ),
    Lever(
        "dwell", "dwell added at the end of the cycle", _unit("s"),
        lambda case: 0.0 if change.is_planned(case) else None, change.with_dwell_added,
        lambda case, zero: (_LONGEST_DWELL * case.cycle_duration_s,), lambda case, zero: case.cycle_duration_s,
        entered=("duty_cycle", "duration"),
    ),
    Lever(
        "friction", "friction of guide and bearings", _friction_unit, _friction, _with_friction,
        lambda case, friction: (0.0,),
    ),
    Lever(
        "stiffness", "torsional stiffness of gearhead and driven shaft", _unit("N·m/rad"),
        change.stiffness_at_shaft, change.with_stiffness, lambda case, stiffness: (_STIFFEST * stiffness,),
    ),
)  # fmt: skip
