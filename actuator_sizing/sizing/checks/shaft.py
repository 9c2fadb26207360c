"""Checks of the bearings that carry the driven shaft: those of the gearhead, without one those of the motor."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.life import stated_life
from actuator_sizing.sizing.checks.base import (
    OFTEN,
    Check,
    Measure,
    Need,
    Sets,
    digits,
    everywhere,
    quotient_working,
)
from actuator_sizing.sizing.shaft_loads import (
    equivalent_radial_force,
    radial_force,
    shaft_bearings,
    states_radial_force,
)

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


def _of_shaft(column: str) -> tuple[Need, Need]:
    """One datum, to ask of the gearhead or, without one, of the motor."""
    field = column.replace(" ", "_")
    return (
        Need("gearheads", field, column,
             known_by=lambda sets: sets.gearheads.is_direct | ~np.isnan(sets.catalog_values("gearheads", field))),
        Need("motors", field, column,
             known_by=lambda sets: ~sets.gearheads.is_direct | ~np.isnan(sets.catalog_values("motors", field))),
    )  # fmt: skip


def _turns(sets: Sets) -> BoolArray:
    return np.asarray(~sets.motors.is_linear)


def _lever_known(sets: Sets) -> BoolArray:
    """Stated, or not needed to find the permissible force where the load acts."""
    needs = (*_of_shaft("permissible radial force"), *_of_shaft("radial force position"))
    rest = np.logical_and.reduce([need.known(sets) for need in needs]) & sets.states("shaft force position")
    return np.asarray(~rest | ~np.isnan(shaft_bearings(sets).radial_n))


_RADIAL_NEEDS = (
    Need("axis", "shaft force position", "shaft force position"),
    *_of_shaft("permissible radial force"),
    *_of_shaft("radial force position"),
    Need("gearheads", "bearing_lever", "bearing lever",
         known_by=lambda sets: sets.gearheads.is_direct | _lever_known(sets)),
    Need("motors", "bearing_lever", "bearing lever",
         known_by=lambda sets: ~sets.gearheads.is_direct | _lever_known(sets)),
)  # fmt: skip


def _radial_measure(sets: Sets) -> Measure:
    force = radial_force(sets)
    piece, node = np.unravel_index(force.argmax(), force.shape)
    return Measure(
        everywhere(float(force[piece, node]), sets),
        shaft_bearings(sets).radial_n,
        everywhere(float(sets.demand.time_s[piece, node]), sets),
    )


SHAFT_RADIAL = Check(
    key="shaft_radial_force",
    title="Radial force on the shaft",
    group="gearhead",
    unit="N",
    formula="max F_radial ≤ F_permissible (a + x_sheet)/(a + x) at the output shaft of the gearhead, without one of "
    "the motor",
    source="Permissible force of the data sheet, moved at equal moment about the bearings; belt "
    "max(2 F_pretension, K_A |F|), rack K_A |F|/cos α",
    needs=_RADIAL_NEEDS,
    measure=_radial_measure,
    working=quotient_working("F_radial / F_permissible", "N", _radial_measure),
    applies=lambda sets: _turns(sets) & states_radial_force(sets),
)


def _axial_measure(sets: Sets) -> Measure:
    return Measure(everywhere(sets.option("shaft axial force"), sets), shaft_bearings(sets).axial_n)


SHAFT_AXIAL = Check(
    key="shaft_axial_force",
    title="Axial force on the shaft",
    group="gearhead",
    unit="N",
    formula="F_axial ≤ F_permissible at the output shaft of the gearhead, without one of the motor",
    source="Permissible force of the data sheet",
    needs=_of_shaft("permissible axial force"),
    measure=_axial_measure,
    working=quotient_working("F_axial / F_permissible", "N", _axial_measure),
    applies=lambda sets: _turns(sets) & sets.states("shaft axial force"),
)


def _axial(sets: Sets) -> float:
    return float(np.nan_to_num(sets.option("shaft axial force"), nan=0.0))


def _used(sets: Sets) -> FloatArray:
    """Equivalent radial and axial force, each over its permissible value, added, shape (S,)."""
    bearings, axial = shaft_bearings(sets), _axial(sets)
    by_axial = axial / bearings.axial_n if axial > 0.0 else 0.0
    return np.asarray(equivalent_radial_force(sets, bearings.exponent) / bearings.radial_n + by_axial)


def _life_measure(sets: Sets) -> Measure:
    b = shaft_bearings(sets)
    speed = everywhere(sets.demand.shaft_speed_mean, sets)
    life = stated_life(b.life_s, np.ones(len(sets)), b.life_speed_rad_s, _used(sets), speed, b.exponent)
    return Measure(everywhere(sets.option("required life"), sets), life)


def _life_working(sets: Sets, i: int) -> str:
    m, b = _life_measure(sets), shaft_bearings(sets)
    return (
        f"forces over permissible ones = {digits(float(_used(sets)[i]))}, mean speed "
        f"{digits(sets.demand.shaft_speed_mean)} rad/s; L = {digits(float(b.life_s[i]))} s · "
        f"(1/{digits(float(_used(sets)[i]))})^{digits(float(b.exponent[i]))} · "
        f"{digits(float(b.life_speed_rad_s[i]))} / {digits(sets.demand.shaft_speed_mean)}; {m.quotient(i)}"
    )


def _needed_with_axial(need: Need) -> Need:
    """The same datum, not asked for where nothing pushes along the shaft."""
    return replace(need, known_by=lambda sets: need.known(sets) | (_axial(sets) == 0.0))


SHAFT_LIFE = Check(
    key="shaft_bearing_life",
    title="Life of the shaft bearings",
    group="gearhead",
    unit="s",
    formula="required life ≤ L_sheet (F_radial,eq/F_permissible + F_axial/F_permissible)^(−p) ω_sheet/ω_mean, p "
    "= 3 for "
    "balls, 10/3 for rollers",
    source="ISO 281; radial and axial shares are added, which is on the safe side",
    needs=(
        *_RADIAL_NEEDS,
        *_of_shaft("bearing life"),
        *_of_shaft("bearing life speed"),
        *map(_needed_with_axial, _of_shaft("permissible axial force")),
    ),
    measure=_life_measure,
    working=_life_working,
    applies=lambda sets: _turns(sets) & states_radial_force(sets) & sets.states("required life"),
    concerns=OFTEN,
)

SHAFT_CHECKS = (SHAFT_RADIAL, SHAFT_AXIAL, SHAFT_LIFE)
