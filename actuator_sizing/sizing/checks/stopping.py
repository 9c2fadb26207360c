"""Checks of stopping, holding and dropping. What they compute must be measured; none of it makes an axis safe."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.transmission import MOTORING, stage_factor
from actuator_sizing.sizing.checks.base import Check, Measure, Need, Sets, digits, has_gearhead
from actuator_sizing.sizing.checks.motor import current_limited_torque
from actuator_sizing.sizing.stops import (
    StopResults,
    brake_stops,
    coasting_stops,
    controlled_stops,
    drop_distance,
    gravity_torque,
    shorted_stops,
)

FloatArray = NDArray[np.float64]

_REACTION = Need("axis", "stop reaction time", "stop reaction time")
_PEAK_NEEDS = (
    Need("motors", "peak_current_a", "peak current"),
    Need("drives", "peak_current_a", "peak current"),
)
_BRAKE_TORQUE = Need("motors", "brake_torque_nm", "brake torque", "brake force")
_CLOSING = Need("motors", "brake_closing_time", "brake closing time")
_STOP = "J dω/dt = −T_brake − T_load − T_friction after the reaction time; losses of stages left out; " \
    "first principles. Computed: measure it on the machine"  # fmt: skip


def _same(value: float, sets: Sets) -> FloatArray:
    return np.full(len(sets), value)


def _way(sets: Sets) -> str:
    return "m" if sets.case.mechanism.coordinate == "linear" else "rad"


def _has_brake(sets: Sets) -> NDArray[np.bool_]:
    return np.nan_to_num(sets.motors.brake_torque_nm, nan=0.0) > 0.0


def _gravity_acts(sets: Sets) -> NDArray[np.bool_]:
    return sets.once(gravity_torque)[0] > 0.0


def _needs_brake(sets: Sets) -> NDArray[np.bool_]:
    """Gravity acts, and there is a brake or the duty cycle counts on one."""
    closes = any(segment.brake_closed for segment in sets.case.segments)
    return np.asarray(_gravity_acts(sets) & (_has_brake(sets) | closes))


def _way_is_limited(sets: Sets) -> NDArray[np.bool_]:
    return np.full(len(sets), not np.isnan(sets.option("allowed stopping distance")))


def _distance_measure(study: Callable[[Sets], StopResults]) -> Callable[[Sets], Measure]:
    def measure(sets: Sets) -> Measure:
        found = sets.once(study)
        return Measure(
            found.distance, _same(sets.option("allowed stopping distance"), sets), found.distance_at_s
        )

    return measure


def _distance_working(study: Callable[[Sets], StopResults]) -> Callable[[Sets, int], str]:
    def working(sets: Sets, i: int) -> str:
        found, allowed = sets.once(study), sets.option("allowed stopping distance")
        way, reaction = _way(sets), sets.option("stop reaction time")
        distance = float(found.distance[i])
        if np.isinf(distance):
            return f"after {digits(reaction)} s of reaction nothing brings the axis to rest"
        return (
            f"{digits(reaction)} s of reaction, at rest after {digits(float(found.time_s[i]))} s and "
            f"{digits(distance)} {way} from the worst instant; {digits(distance)} / {digits(allowed)} "
            f"= {digits(distance / allowed)}"
        )

    return working


def _stop_check(
    key: str,
    title: str,
    study: Callable[[Sets], StopResults],
    formula: str,
    needs: tuple[Need, ...],
    applies: Callable[[Sets], NDArray[np.bool_]],
    *,
    is_advice: bool,
) -> Check:
    return Check(
        key=key,
        title=title,
        group="motor",
        unit="m or rad",
        formula=formula,
        source=_STOP,
        needs=(_REACTION, *needs),
        measure=_distance_measure(study),
        working=_distance_working(study),
        applies=applies,
        is_advice=is_advice,
    )


STOP_CONTROLLED = _stop_check(
    "stop_controlled",
    "Controlled stop",
    controlled_stops,
    "way from the worst instant with the smaller peak torque of motor and drive (stop category 1 or 2 of "
    "IEC 60204-1) ≤ allowed stopping distance",
    _PEAK_NEEDS,
    _way_is_limited,
    is_advice=False,
)

STOP_SHORTED = _stop_check(
    "stop_shorted",
    "Stop by shorted winding",
    shorted_stops,
    "way from the worst instant with T = K² R ω/(R² + (p ω L)²), hot winding (stop category 0 of IEC 60204-1) "
    "≤ allowed stopping distance",
    (),
    _way_is_limited,
    is_advice=True,
)

STOP_BRAKE = _stop_check(
    "stop_brake",
    "Stop by the holding brake",
    brake_stops,
    "way from the worst instant with the static torque of the holding brake after its closing time (stop "
    "category 0 of IEC 60204-1) ≤ allowed stopping distance",
    (_BRAKE_TORQUE, _CLOSING),
    lambda sets: _way_is_limited(sets) & _has_brake(sets),
    is_advice=True,
)


# -- short-circuit current --------------------------------------------------------------------------
def _shorted_measure(sets: Sets) -> Measure:
    return Measure(sets.once(coasting_stops).current_peak_a, sets.motors.peak_current_a)


def _shorted_working(sets: Sets, i: int) -> str:
    m = _shorted_measure(sets)
    return (
        f"I_sc = {digits(float(m.demand[i]))} A at the highest speed when the winding is shorted; "
        f"{digits(float(m.demand[i]))} / {digits(float(m.capacity[i]))} = {digits(float(m.ratio()[i]))}"
    )


SHORTED_CURRENT = Check(
    key="motor_shorted_current",
    title="Short-circuit current",
    group="motor",
    unit="A",
    formula="K ω/√(R² + (p ω L)²) at the highest speed ≤ I_peak",
    source="dq equations with shorted terminals, quasi-steady; peak current stands for the demagnetisation limit",
    needs=(_REACTION, _PEAK_NEEDS[0]),
    measure=_shorted_measure,
    working=_shorted_working,
    is_advice=True,
)


# -- holding brake ----------------------------------------------------------------------------------
def _static_measure(sets: Sets) -> Measure:
    torque, at = sets.once(gravity_torque)
    return Measure(torque, sets.motors.brake_torque_nm, at)


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
    formula="max |T_gravity|/n without losses and without help from friction ≤ static torque of the brake",
    source="Statics; a factor of 1.5 to 2 is common practice (recommended reserve). A holding brake is a parking "
    "brake; what protects persons follows from the risk assessment (ISO 12100)",
    needs=(_BRAKE_TORQUE,),
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
    source=_STOP,
    needs=(
        _REACTION,
        _BRAKE_TORQUE,
        _CLOSING,
        Need("motors", "brake_energy_per_stop", "brake energy per stop"),
    ),
    measure=_energy_measure,
    working=_energy_working,
    applies=lambda sets: _gravity_acts(sets) & _has_brake(sets),
)


def _drop_measure(sets: Sets) -> Measure:
    return Measure(sets.once(drop_distance), _same(sets.option("allowed drop distance"), sets))


def _drop_working(sets: Sets, i: int) -> str:
    m = _drop_measure(sets)
    closing = float(sets.catalog_values("motors", "brake_closing_time")[i])
    return (
        f"no torque for {digits(sets.option('stop reaction time'))} s + {digits(closing)} s, then the brake: "
        f"{digits(float(m.demand[i]))} {_way(sets)}; {digits(float(m.demand[i]))} / "
        f"{digits(float(m.capacity[i]))} = {digits(float(m.ratio()[i]))}"
    )


DROP_DISTANCE = Check(
    key="drop_distance",
    title="Drop distance",
    group="motor",
    unit="m or rad",
    formula="way of the held load from rest over reaction and closing time and until the brake has stopped it "
    "≤ allowed drop distance",
    source=_STOP + ". Removing torque (STO of IEC 61800-5-2) does not hold a load",
    needs=(_REACTION, _BRAKE_TORQUE, _CLOSING),
    measure=_drop_measure,
    working=_drop_working,
    applies=lambda sets: _needs_brake(sets) & (not np.isnan(sets.option("allowed drop distance"))),
)


# -- gearhead in an emergency -----------------------------------------------------------------------
_EMERGENCY = Need("gearheads", "emergency_torque_nm", "emergency-stop torque")


def _emergency_measure(sets: Sets) -> Measure:
    return Measure(sets.once(controlled_stops).gearhead_torque_nm, sets.gearheads.emergency_torque_nm)


def _jam_measure(sets: Sets) -> Measure:
    g = sets.gearheads
    factor = stage_factor(np.full(len(sets), MOTORING, dtype=np.int8), g.efficiency, g.efficiency_back)
    return Measure(current_limited_torque(sets) * g.ratio / factor, g.emergency_torque_nm)


def _emergency_working(sets: Sets, i: int) -> str:
    m = _emergency_measure(sets)
    return (
        f"n (T_peak − (J_m + J_g) α) = {digits(float(m.demand[i]))} N·m; {digits(float(m.demand[i]))} / "
        f"{digits(float(m.capacity[i]))} = {digits(float(m.ratio()[i]))}"
    )


def _jam_working(sets: Sets, i: int) -> str:
    m, g = _jam_measure(sets), sets.gearheads
    ratio = float(m.ratio()[i])
    T = float(current_limited_torque(sets)[i])
    keep = (
        ""
        if ratio <= 1.0
        else f"; a current limit that keeps the motor below {digits(T / ratio)} N·m protects the gearhead"
    )
    return (
        f"T_peak n η = {digits(T)} N·m · {digits(float(g.ratio[i]))} · {digits(float(g.efficiency[i]))} = "
        f"{digits(float(m.demand[i]))} N·m; {digits(float(m.demand[i]))} / {digits(float(m.capacity[i]))} "
        f"= {digits(ratio)}{keep}"
    )


GEARHEAD_EMERGENCY = Check(
    key="gearhead_emergency_torque",
    title="Gearhead emergency torque",
    group="gearhead",
    unit="N·m",
    formula="output torque of a controlled stop at the current limit, n (T_peak − (J_m + J_g) α) ≤ T_emergency",
    source="Torque of the motor less what slows the rotor; emergency torque of the data sheet",
    needs=(_REACTION, *_PEAK_NEEDS, _EMERGENCY),
    measure=_emergency_measure,
    working=_emergency_working,
    applies=has_gearhead,
    is_advice=True,
)

GEARHEAD_JAM = Check(
    key="gearhead_jam_torque",
    title="Gearhead torque in a jam",
    group="gearhead",
    unit="N·m",
    formula="T_peak n η with the output blocked ≤ T_emergency; the blow of the rotor comes on top",
    source="Common practice where a jam is possible: limit the current",
    needs=(*_PEAK_NEEDS, _EMERGENCY),
    measure=_jam_measure,
    working=_jam_working,
    applies=has_gearhead,
    is_advice=True,
)

STOPPING_CHECKS = (
    STOP_CONTROLLED,
    STOP_SHORTED,
    STOP_BRAKE,
    SHORTED_CURRENT,
    BRAKE_STATIC,
    BRAKE_ENERGY,
    DROP_DISTANCE,
    GEARHEAD_EMERGENCY,
    GEARHEAD_JAM,
)
