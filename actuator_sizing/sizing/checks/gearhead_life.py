"""Checks of the gearhead over hours: heat and life."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.life import stated_life
from actuator_sizing.sizing.checks.base import (
    OFTEN,
    SUSTAINED,
    Check,
    Measure,
    Need,
    Sets,
    digits,
    everywhere,
    has_gearhead,
    quotient_working,
)
from actuator_sizing.sizing.checks.gearhead import equivalent_exponent, equivalent_output_torque

FloatArray = NDArray[np.float64]


def _thermal_measure(sets: Sets) -> Measure:
    p = sets.pairs
    energy = p.energy_shaft_motoring_j + p.energy_shaft_regenerated_j
    return Measure(energy / sets.demand.cycle_s, sets.catalog_values("gearheads", "thermal_power"))


GEARHEAD_THERMAL = Check(
    key="gearhead_thermal_power",
    title="Gearhead thermal power",
    group="gearhead",
    unit="W",
    formula="(1/T) ∫ |T_in ω_in| dt ≤ P_thermal, dwell included",
    source="Thermal power of the data sheet (defined as in ISO/TR 14179): mean power that heats no further",
    needs=(Need("gearheads", "thermal_power", "thermal power"),),
    measure=_thermal_measure,
    working=quotient_working("P_mean / P_thermal", "W", _thermal_measure),
    applies=lambda sets: has_gearhead(sets) & sets.catalog_asks("gearheads", "thermal_power"),
    concerns=SUSTAINED,
)


def _rated_torque(sets: Sets) -> FloatArray:
    stated = sets.catalog_values("gearheads", "rated_torque")
    return np.where(np.isnan(stated), sets.gearheads.continuous_torque_nm, stated)


def _life_measure(sets: Sets) -> Measure:
    life = stated_life(
        sets.catalog_values("gearheads", "rated_life"),
        _rated_torque(sets),
        sets.catalog_values("gearheads", "rated_input_speed"),
        equivalent_output_torque(sets),
        sets.pairs.speed_mean_abs_rad_s,
        equivalent_exponent(sets),
    )
    return Measure(everywhere(sets.option("required life"), sets), life)


def _life_working(sets: Sets, i: int) -> str:
    m, rated = _life_measure(sets), float(_rated_torque(sets)[i])
    torque, speed = float(equivalent_output_torque(sets)[i]), float(sets.pairs.speed_mean_abs_rad_s[i])
    life, at = (float(sets.catalog_values("gearheads", c)[i]) for c in ("rated_life", "rated_input_speed"))
    return (
        f"L = {digits(life)} s · ({digits(rated)} / "
        f"{digits(torque)})^{digits(float(equivalent_exponent(sets)[i]))} · "
        f"{digits(at)} / {digits(speed)} = {digits(float(m.capacity[i]))} s; {m.quotient(i)}"
    )


GEARHEAD_LIFE = Check(
    key="gearhead_life",
    title="Gearhead life",
    group="gearhead",
    unit="s",
    formula="required life ≤ L_rated (T_rated/(K_A T_eq))^p ω_rated/ω_mean at the input, p = 3 for ball, 10/3 "
    "for roller "
    "bearings",
    source="ISO 281; for strain-wave gears the bearing of the wave generator, from rated torque and speed",
    needs=(
        Need("gearheads", "rated_life", "rated life"),
        Need("gearheads", "rated_input_speed", "rated input speed"),
    ),
    measure=_life_measure,
    working=_life_working,
    applies=lambda sets: (
        has_gearhead(sets) & sets.states("required life") & sets.catalog_asks("gearheads", "rated_life")
    ),
    concerns=OFTEN,
)

GEARHEAD_LIFE_CHECKS = (GEARHEAD_THERMAL, GEARHEAD_LIFE)
