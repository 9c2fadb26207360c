"""Checks of the holding brake: what it holds, how far a load drops, what it turns into heat and wears.

What they compute must be measured; none of it makes an axis safe.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.sizing.checks.base import (
    WAY,
    Check,
    Measure,
    Need,
    Sets,
    digits,
    everywhere,
    quotient_working,
    way_unit,
)
from actuator_sizing.sizing.checks.stopping import (
    BRAKE_TORQUE,
    CLOSING,
    REACTION,
    STOP_SOURCE,
    has_brake,
)
from actuator_sizing.sizing.stops import brake_stops, brake_torque, drop_distance, gravity_torque

FloatArray = NDArray[np.float64]


def _gravity_acts(sets: Sets) -> NDArray[np.bool_]:
    return sets.once(gravity_torque)[0] > 0.0


def _needs_brake(sets: Sets) -> NDArray[np.bool_]:
    """Gravity acts, and there is a brake or the duty cycle counts on one."""
    closes = any(segment.brake_closed for segment in sets.case.segments)
    return np.asarray(_gravity_acts(sets) & (has_brake(sets) | closes))


def _static_measure(sets: Sets) -> Measure:
    torque, at = sets.once(gravity_torque)
    return Measure(torque, brake_torque(sets), at)


def _static_working(sets: Sets, i: int) -> str:
    m = _static_measure(sets)
    unit = "N" if sets.motors.is_linear[i] else "N·m"
    return (
        f"T_gravity at the motor shaft, without losses = {digits(float(m.demand[i]))} {unit}; brake "
        f"{digits(float(m.capacity[i]))} {unit}; {digits(float(m.demand[i]))} / {digits(float(m.capacity[i]))} "
        f"= {digits(float(m.ratio()[i]))}"
    )


BRAKE_STATIC = Check(
    key="holding_brake_static",
    title="Holding brake torque",
    group="motor",
    unit="N·m",
    linear_unit="N",
    formula="max |T_gravity|/n without losses and without help from friction ≤ static torque of the brake, "
    "hot and worn (brake torque factor)",
    source="Statics; a factor of 1.5 to 2 is common practice (recommended reserve). A holding brake is a parking "
    "brake; what protects persons follows from the risk assessment (ISO 12100)",
    needs=(BRAKE_TORQUE,),
    measure=_static_measure,
    working=_static_working,
    applies=_needs_brake,
)


def _energy_measure(sets: Sets) -> Measure:
    return Measure(
        sets.once(brake_stops).braking_energy_j, sets.catalog_values("motors", "brake_energy_per_stop")
    )


def _energy_working(sets: Sets, i: int) -> str:
    m = _energy_measure(sets)
    if np.isinf(m.demand[i]):
        return "the brake does not bring the axis to rest"
    return (
        f"T_brake · angle turned while it brakes = {digits(float(m.demand[i]))} J; "
        f"{digits(float(m.demand[i]))} / {digits(float(m.capacity[i]))} = {digits(float(m.ratio()[i]))}"
    )


BRAKE_ENERGY = Check(
    key="holding_brake_energy",
    title="Holding brake energy",
    group="motor",
    unit="J",
    formula="∫ T_brake ω dt of a stop by the brake alone from the worst instant ≤ energy per stop",
    source=STOP_SOURCE,
    needs=(
        REACTION,
        BRAKE_TORQUE,
        CLOSING,
        Need("motors", "brake_energy_per_stop", "brake energy per stop"),
    ),
    measure=_energy_measure,
    working=_energy_working,
    # On a level axis too: where the catalog states the energy, or where the brake shall stop a load.
    applies=lambda sets: (
        has_brake(sets)
        & (_gravity_acts(sets) | ~np.isnan(sets.catalog_values("motors", "brake_energy_per_stop")))
    ),
)


def _drop_measure(sets: Sets) -> Measure:
    return Measure(sets.once(drop_distance), everywhere(sets.option("allowed drop distance"), sets))


def _drop_working(sets: Sets, i: int) -> str:
    m = _drop_measure(sets)
    closing = float(sets.catalog_values("motors", "brake_closing_time")[i])
    return (
        f"no torque for {digits(sets.option('stop reaction time'))} s + {digits(closing)} s, then the brake: "
        f"{digits(float(m.demand[i]))} {way_unit(sets)}; {digits(float(m.demand[i]))} / "
        f"{digits(float(m.capacity[i]))} = {digits(float(m.ratio()[i]))}"
    )


DROP_DISTANCE = Check(
    key="drop_distance",
    title="Drop distance",
    group="motor",
    unit=WAY,
    formula="way of the held load from rest over reaction and closing time and until the brake has stopped it "
    "≤ allowed drop distance",
    source=STOP_SOURCE + ". Removing torque (STO of IEC 61800-5-2) does not hold a load",
    needs=(REACTION, BRAKE_TORQUE, CLOSING),
    measure=_drop_measure,
    working=_drop_working,
    applies=lambda sets: _needs_brake(sets) & (not np.isnan(sets.option("allowed drop distance"))),
)


# -- wear over the life -----------------------------------------------------------------------------
def _wear_measure(sets: Sets) -> Measure:
    work = sets.option("brake stops in life") * sets.once(brake_stops).braking_energy_j
    return Measure(work, sets.catalog_values("motors", "brake_work_until_wear"))


def _wears(column: str) -> Callable[[Sets], NDArray[np.bool_]]:
    """Sets with a brake, where the case says how often it stops the axis and the catalog how much it stands."""
    return lambda sets: (
        has_brake(sets) & sets.states("brake stops in life") & sets.catalog_asks("motors", column)
    )


BRAKE_WEAR = Check(
    key="holding_brake_wear",
    title="Wear of the holding brake",
    group="motor",
    unit="J",
    formula="brake stops in life · ∫ T_brake ω dt of a stop from the worst instant ≤ brake work until wear",
    source=STOP_SOURCE + "; work of friction of the data sheet",
    needs=(
        REACTION,
        BRAKE_TORQUE,
        CLOSING,
        Need("motors", "brake_work_until_wear", "brake work until wear"),
    ),
    measure=_wear_measure,
    working=quotient_working("N W_stop / W_wear", "J", _wear_measure),
    applies=_wears("brake_work_until_wear"),
)


def _count_measure(sets: Sets) -> Measure:
    return Measure(
        everywhere(sets.option("brake stops in life"), sets),
        sets.catalog_values("motors", "brake_stops_allowed"),
    )


BRAKE_COUNT = Check(
    key="holding_brake_stops",
    title="Stops of the holding brake",
    group="motor",
    unit="-",
    formula="brake stops in life ≤ stops from speed that the brake stands",
    source="Number of emergency stops of the data sheet",
    needs=(Need("motors", "brake_stops_allowed", "brake stops allowed"),),
    measure=_count_measure,
    working=quotient_working("N / N_allowed", "", _count_measure),
    applies=_wears("brake_stops_allowed"),
)

HOLDING_CHECKS = (BRAKE_STATIC, BRAKE_ENERGY, DROP_DISTANCE, BRAKE_WEAR, BRAKE_COUNT)
