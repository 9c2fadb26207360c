"""Checks of the gearhead and of the inertia seen through it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.life import BALL_EXPONENT, ROLLER_EXPONENT
from actuator_sizing.core.quadrature import integrate
from actuator_sizing.sizing.block import Block
from actuator_sizing.sizing.bounds import Bound, Form, Ratio, single
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
from actuator_sizing.sizing.checks.traction import application_factor

FloatArray = NDArray[np.float64]


def equivalent_exponent(sets: Sets) -> FloatArray:
    """Power of the torque in its equivalent, 3 or 10/3 by the bearings of the gears, shape (S,). [-]"""
    roller = sets.catalog_word_is("gearheads", "gear_bearings", "roller")
    return np.where(roller, ROLLER_EXPONENT, BALL_EXPONENT)


def equivalent_output_torque(sets: Sets) -> FloatArray:
    """Equivalent torque at the output times the application factor, shape (S,). [N·m]"""
    demand = sets.demand
    exponent = equivalent_exponent(sets)
    ball, roller = demand.shaft_torque_equivalent, demand.shaft_torque_equivalent
    if np.any(exponent != BALL_EXPONENT):
        roller = demand.equivalent(demand.shaft_torque, ROLLER_EXPONENT)
    return application_factor(sets) * np.where(exponent == BALL_EXPONENT, ball, roller)


def _equivalent_measure(sets: Sets) -> Measure:
    return Measure(equivalent_output_torque(sets), sets.gearheads.continuous_torque_nm)


def _equivalent_working(sets: Sets, i: int) -> str:
    d, m, p = sets.demand, _equivalent_measure(sets), float(equivalent_exponent(sets)[i])
    power = "3" if p == BALL_EXPONENT else "(10/3)"
    turned = float(integrate(d.duration_s, np.abs(d.shaft_speed)))
    worked = float(integrate(d.duration_s, np.abs(d.shaft_speed) * np.abs(d.shaft_torque) ** p))
    factor = application_factor(sets)
    return (
        f"∫ |ω| |T|^{power} dt = {digits(worked)} rad·(N·m)^{power}, ∫ |ω| dt = {digits(turned)} rad per cycle; "
        f"T_eq = {digits(factor)} · ({digits(worked)} / {digits(turned)})^(1/{power}) = "
        f"{digits(float(m.demand[i]))} N·m; {m.quotient(i)}"
    )


GEARHEAD_EQUIVALENT = Check(
    key="gearhead_equivalent_torque",
    title="Gearhead equivalent torque",
    group="gearhead",
    unit="N·m",
    formula="T_eq = K_A (∫ |ω| |T|^p dt / ∫ |ω| dt)^(1/p) at the output ≤ T_continuous; p = 3, with roller "
    "bearings 10/3",
    source="Equivalent load weighted by revolutions (form of ISO 3408-5), exponents of ISO 281: common practice",
    needs=(Need("gearheads", "continuous_torque_nm", "continuous torque"),),
    measure=_equivalent_measure,
    # A power mean rises with its exponent and the application factor is at least 1: 3 and 1 give a bound.
    bound=lambda block: block.demand.shaft_torque_equivalent / block.gearheads.continuous_torque_nm[:, None],
    working=_equivalent_working,
    applies=has_gearhead,
    concerns=OFTEN,
)


def _peak_measure(sets: Sets) -> Measure:
    torque = sets.demand.shaft_torque
    piece, node = np.unravel_index(np.abs(torque).argmax(), torque.shape)
    return Measure(
        everywhere(application_factor(sets) * sets.demand.shaft_torque_peak, sets),
        sets.gearheads.peak_torque_nm,
        everywhere(float(sets.demand.time_s[piece, node]), sets),
    )


_peak_quotient = quotient_working("K_A T_max / T_peak", "N·m", _peak_measure)


def _peak_working(sets: Sets, i: int) -> str:
    return f"application factor {digits(application_factor(sets))}; {_peak_quotient(sets, i)}"


GEARHEAD_PEAK = Check(
    key="gearhead_peak_torque",
    title="Gearhead peak torque",
    group="gearhead",
    unit="N·m",
    formula="K_A max |T_output| ≤ T_peak",
    source="Repeated peak torque of the data sheet",
    needs=(Need("gearheads", "peak_torque_nm", "peak torque"),),
    measure=_peak_measure,
    # The application factor is at least 1: 1 gives a bound.
    bound=lambda block: block.demand.shaft_torque_peak / block.gearheads.peak_torque_nm[:, None],
    working=_peak_working,
    applies=has_gearhead,
)


def _mean_speed_measure(sets: Sets) -> Measure:
    return Measure(sets.pairs.speed_mean_abs_rad_s, sets.gearheads.speed_mean_max_rad_s)


GEARHEAD_MEAN_SPEED = Check(
    key="gearhead_mean_speed",
    title="Gearhead mean input speed",
    group="gearhead",
    unit="rad/s",
    formula="n · (1/T) ∫ |ω_shaft| dt ≤ ω_mean,max, dwell included",
    source="Mean (nominal) input speed of the data sheet",
    needs=(Need("gearheads", "speed_mean_max_rad_s", "mean input speed"),),
    measure=_mean_speed_measure,
    bound=lambda block: (
        block.gearheads.ratio * block.demand.shaft_speed_mean / block.gearheads.speed_mean_max_rad_s
    )[:, None],
    working=quotient_working("ω_mean / ω_mean,max", "rad/s", _mean_speed_measure),
    applies=has_gearhead,
    concerns=SUSTAINED,
)


def _max_speed_measure(sets: Sets) -> Measure:
    return Measure(sets.pairs.speed_peak_rad_s, sets.gearheads.speed_max_rad_s, sets.pairs.speed_peak_at_s)


GEARHEAD_MAX_SPEED = Check(
    key="gearhead_maximum_speed",
    title="Gearhead maximum input speed",
    group="gearhead",
    unit="rad/s",
    formula="n · max |ω_shaft| ≤ ω_max",
    source="Maximum input speed of the data sheet",
    needs=(Need("gearheads", "speed_max_rad_s", "maximum input speed"),),
    measure=_max_speed_measure,
    bound=lambda block: (
        block.gearheads.ratio * block.demand.shaft_speed_peak / block.gearheads.speed_max_rad_s
    )[:, None],
    working=quotient_working("ω_max / ω_limit", "rad/s", _max_speed_measure),
    applies=has_gearhead,
)


def _inertia_measure(sets: Sets) -> Measure:
    return Measure(sets.pairs.inertia_ratio, everywhere(sets.recommended_inertia_ratio, sets))


def _inertia_bound(block: Block) -> Bound:
    reflected = block.demand.load_inertia / block.gearheads.ratio**2 / block.recommended_inertia_ratio
    with np.errstate(divide="ignore"):
        per_rotor = 1.0 / block.motors.rotor_inertia_kg_m2
    return (Ratio(top=Form(single(reflected)[:, None], single(per_rotor)[None, :])),)


def _inertia_working(sets: Sets, i: int) -> str:
    m = _inertia_measure(sets)
    unit = "kg" if sets.motors.is_linear[i] else "kg·m²"
    return (
        f"(J_load/n²) / J_m = ({digits(sets.demand.load_inertia)} {unit} / "
        f"{digits(float(sets.gearheads.ratio[i]))}²) / {digits(float(sets.motors.rotor_inertia_kg_m2[i]))} {unit} "
        f"= {digits(float(m.demand[i]))}; recommended {digits(float(m.capacity[i]))}"
    )


INERTIA_RATIO = Check(
    key="inertia_ratio",
    title="Inertia ratio",
    group="axis",
    unit="-",
    formula="(J_load/n²) / J_motor against the recommended ratio",
    source="Rule of thumb, common practice, no source; stiffness and bandwidth decide",
    needs=(),
    measure=_inertia_measure,
    bound=_inertia_bound,
    working=_inertia_working,
    is_advice=True,
)
