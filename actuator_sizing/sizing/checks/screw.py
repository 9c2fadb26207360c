"""Checks of a screw: whirling, nominal speed, buckling, static load, life, pressure times speed."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.life import BALL_EXPONENT, rating_life
from actuator_sizing.core.mechanisms.screw import Screw
from actuator_sizing.core.quadrature import largest_magnitude
from actuator_sizing.core.screws import (
    buckling_force,
    critical_speed,
    is_slender,
    nut_half_loads,
    nut_life,
    sliding_speed_per_turn,
)
from actuator_sizing.sizing.checks.base import (
    OFTEN,
    SUSTAINED,
    Check,
    Measure,
    Need,
    Sets,
    applies_if,
    digits,
    everywhere,
    quotient_working,
)

FloatArray = NDArray[np.float64]

_SLENDER = ("screw root diameter", "screw unsupported length", "screw end fixity")
_SLENDER_NEEDS = tuple(Need("axis", name, name) for name in _SLENDER)


def _screw(sets: Sets) -> Screw | None:
    return sets.case.mechanism if isinstance(sets.case.mechanism, Screw) else None


def _beam(sets: Sets) -> tuple[float, float, str] | None:
    """Root diameter, free length and fixity; None where one is not known."""
    if not all(sets.states(name) for name in _SLENDER):
        return None
    return sets.option(_SLENDER[0]), sets.option(_SLENDER[1]), sets.word(_SLENDER[2])


def _fastest(sets: Sets) -> tuple[float, float]:
    """Largest speed of the screw and its instant."""
    demand = sets.demand
    speed, piece, position = largest_magnitude(demand.shaft_speed[None])
    return float(speed[0]), float(demand.instant(piece, position)[0])


def _heaviest(sets: Sets) -> tuple[float, float]:
    """Largest axial force and its instant."""
    demand = sets.demand
    force, piece, position = largest_magnitude(demand.effort[None])
    return float(force[0]), float(demand.instant(piece, position)[0])


# -- whirling ---------------------------------------------------------------------------------------
def _critical_measure(sets: Sets) -> Measure:
    beam = _beam(sets)
    speed, at = _fastest(sets)
    capacity = np.nan if beam is None else critical_speed(*beam)
    return Measure(everywhere(speed, sets), everywhere(capacity, sets), everywhere(at, sets))


SCREW_CRITICAL_SPEED = Check(
    key="screw_critical_speed",
    title="Critical speed of the screw",
    group="mechanism",
    unit="rad/s",
    formula="max |ω| ≤ (λ/L)² √(E/ρ) d_root/4, λ by the way the ends are held",
    source="First bending frequency of a uniform beam; up to 80 % of it is common practice (allowed utilisation)",
    needs=_SLENDER_NEEDS,
    measure=_critical_measure,
    working=quotient_working("ω_max / ω_critical", "rad/s", _critical_measure),
    applies=applies_if(lambda sets: _screw(sets) is not None and sets.states(*_SLENDER)),
)


# -- nominal speed ----------------------------------------------------------------------------------
def _dn_measure(sets: Sets) -> Measure:
    screw = _screw(sets)
    diameter = np.nan if screw is None else screw.screw_diameter
    speed, at = _fastest(sets)
    dn = 1e3 * diameter * speed * 60.0 / (2.0 * np.pi)
    return Measure(
        everywhere(dn, sets), everywhere(sets.option("screw DN limit"), sets), everywhere(at, sets)
    )


SCREW_DN = Check(
    key="screw_dn_value",
    title="DN value of the screw",
    group="mechanism",
    unit="mm/min",
    formula="nominal diameter in mm · max speed in 1/min ≤ DN limit",
    source="DN limit of the data sheet: speed at which the balls may be turned round",
    needs=(
        Need(
            "axis",
            "screw diameter",
            "screw diameter",
            known_by=lambda sets: ~np.isnan(_dn_measure(sets).demand),
        ),
    ),
    measure=_dn_measure,
    working=quotient_working("d_0 n / DN", "mm/min", _dn_measure),
    applies=applies_if(lambda sets: sets.states("screw DN limit")),
)


# -- buckling ---------------------------------------------------------------------------------------
def _buckling_measure(sets: Sets) -> Measure:
    beam = _beam(sets)
    force, at = _heaviest(sets)
    capacity = np.nan if beam is None else buckling_force(*beam, sets.option("screw yield strength"))
    return Measure(everywhere(force, sets), everywhere(capacity, sets), everywhere(at, sets))


def _has_strength(sets: Sets) -> NDArray[np.bool_]:
    """Stated, or not needed since Euler holds for the softest steel."""
    beam = _beam(sets)
    enough = sets.states("screw yield strength") or beam is None or is_slender(*beam)
    return np.full(len(sets), enough)


SCREW_BUCKLING = Check(
    key="screw_buckling",
    title="Buckling of the screw",
    group="mechanism",
    unit="N",
    formula="max |F| ≤ π² E I/(K L)², or A σ_y (1 − σ_y s²/(4 π² E)) below a slenderness s of √(2 π² E/σ_y); "
    "the whole force taken as pressing",
    source="Euler and J. B. Johnson; twofold safety against it is common practice (allowed utilisation)",
    needs=(
        *_SLENDER_NEEDS,
        Need("axis", "screw yield strength", "screw yield strength", known_by=_has_strength),
    ),
    measure=_buckling_measure,
    working=quotient_working("F_max / F_buckling", "N", _buckling_measure),
    applies=applies_if(lambda sets: _screw(sets) is not None and sets.states(*_SLENDER)),
)


# -- loads of the nut -------------------------------------------------------------------------------
def _halves(sets: Sets) -> tuple[FloatArray, FloatArray]:
    """Axial loads of both halves of a preloaded nut at the nodes; without preload, of the one that carries."""
    preload = np.nan_to_num(sets.option("screw preload"), nan=0.0)
    return nut_half_loads(sets.demand.effort, float(preload))


def _static_measure(sets: Sets) -> Measure:
    force, at = _heaviest(sets)
    most = max(float(np.max(half)) for half in _halves(sets))
    capacity = sets.option("screw static load rating")
    return Measure(everywhere(max(force, most), sets), everywhere(capacity, sets), everywhere(at, sets))


SCREW_STATIC = Check(
    key="screw_static_load",
    title="Static load of the screw",
    group="mechanism",
    unit="N",
    formula="max |F|, preload of the nut included, ≤ C_0a",
    source="Static rating of the data sheet (ISO 3408-5 for ball screws); 1.5-fold safety is common practice "
    "(allowed utilisation)",
    needs=(Need("axis", "screw static load rating", "screw static load rating"),),
    measure=_static_measure,
    working=quotient_working("F_max / C_0a", "N", _static_measure),
    applies=applies_if(lambda sets: sets.states("screw static load rating", "screw dynamic load rating")),
)


def _life(sets: Sets) -> tuple[float, tuple[float, float]]:
    """Life of the nut in turns, and the equivalent loads of its halves."""
    loads = np.array([sets.demand.equivalent(half, BALL_EXPONENT) for half in _halves(sets)])
    rating = np.array(sets.option("screw dynamic load rating"))
    first, second = rating_life(rating, loads, BALL_EXPONENT).tolist()
    return nut_life(first, second), (float(loads[0]), float(loads[1]))


def _life_measure(sets: Sets) -> Measure:
    turns_per_s = sets.demand.shaft_speed_mean / (2.0 * np.pi)
    life = _life(sets)[0] / turns_per_s if turns_per_s > 0.0 else np.inf
    return Measure(everywhere(sets.option("required life"), sets), everywhere(life, sets))


def _life_working(sets: Sets, i: int) -> str:
    m, (turns, loads) = _life_measure(sets), _life(sets)
    equivalent = " and ".join(f"{digits(load)} N" for load in loads if load > 0.0) or "no load"
    return (
        f"F_m = {equivalent}; C_a = {digits(sets.option('screw dynamic load rating'))} N gives "
        f"{digits(turns)} turns; mean speed {digits(sets.demand.shaft_speed_mean)} rad/s, dwell included; "
        f"{digits(float(m.demand[i]))} s / {digits(float(m.capacity[i]))} s = {digits(float(m.ratio()[i]))}"
    )


SCREW_LIFE = Check(
    key="screw_life",
    title="Life of the screw",
    group="mechanism",
    unit="s",
    formula="required life ≤ 10⁶ (C_a/F_m)³ turns / mean speed, F_m = (∫ |ω| |F|³ dt / ∫ |ω| dt)^(1/3); with preload "
    "both halves of the nut, L = (L_1^(−10/9) + L_2^(−10/9))^(−9/10)",
    source="Form of ISO 3408-5 as public texts give it; preload from memory; life that nine of ten reach",
    needs=(
        Need("axis", "required life", "required life"),
        Need("axis", "screw dynamic load rating", "screw dynamic load rating"),
    ),
    measure=_life_measure,
    working=_life_working,
    applies=applies_if(
        lambda sets: (
            sets.case.mechanism.name == "ball screw"
            and sets.states("screw dynamic load rating", "screw static load rating")
        )
    ),
    concerns=OFTEN,
)


# -- pressure times speed ---------------------------------------------------------------------------
_PRESSURE = ("nut contact area", "allowed nut pressure times speed")


def _pressure_measure(sets: Sets) -> Measure:
    screw, demand = _screw(sets), sets.demand
    product = np.nan
    if screw is not None:
        stated = screw.thread_mean_diameter
        diameter = screw.screw_diameter if np.isnan(stated) else stated
        slides = sliding_speed_per_turn(diameter, screw.lead)
        pressed = np.abs(demand.effort) * np.abs(demand.shaft_speed) * slides
        product = float(demand.mean(pressed)) / sets.option("nut contact area")
    return Measure(everywhere(product, sets), everywhere(sets.option(_PRESSURE[1]), sets))


def _has_diameter(sets: Sets) -> NDArray[np.bool_]:
    screw = _screw(sets)
    known = screw is not None and not np.isnan([screw.thread_mean_diameter, screw.screw_diameter]).all()
    return np.full(len(sets), known)


SCREW_PRESSURE = Check(
    key="screw_pressure_speed",
    title="Pressure times speed of the nut",
    group="mechanism",
    unit="W/m²",
    formula="mean over the cycle of |F|/A · |ω| √((d_m/2)² + (lead/2π)²) ≤ allowed pressure times speed",
    source="Limit of the pair of materials; its mean stands for the heat, dwell included: common practice",
    needs=(
        Need("axis", "thread mean diameter", "thread mean diameter", known_by=_has_diameter),
        *(Need("axis", name, name) for name in _PRESSURE),
    ),
    measure=_pressure_measure,
    working=quotient_working("p v / (p v)_allowed", "W/m²", _pressure_measure),
    applies=applies_if(lambda sets: sets.states(*_PRESSURE)),
    concerns=SUSTAINED,
)

SCREW_CHECKS = (
    SCREW_CRITICAL_SPEED,
    SCREW_DN,
    SCREW_BUCKLING,
    SCREW_STATIC,
    SCREW_LIFE,
    SCREW_PRESSURE,
)
