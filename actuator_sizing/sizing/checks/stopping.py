"""Checks of stopping. What they compute must be measured; none of it makes an axis safe."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.transmission import MOTORING, stage_factor
from actuator_sizing.sizing.checks.base import (
    WAY,
    Check,
    Measure,
    Need,
    Sets,
    digits,
    everywhere,
    has_gearhead,
    way_unit,
)
from actuator_sizing.sizing.checks.motor import current_limited_torque
from actuator_sizing.sizing.stops import (
    StopResults,
    brake_stops,
    coasting_stops,
    controlled_stops,
    shorted_stops,
)

FloatArray = NDArray[np.float64]

REACTION = Need("axis", "stop reaction time", "stop reaction time")
_PEAK_NEEDS = (
    Need("motors", "peak_current_a", "peak current"),
    Need("drives", "peak_current_a", "peak current"),
)
BRAKE_TORQUE = Need("motors", "brake_torque_nm", "brake torque", "brake force")
CLOSING = Need("motors", "brake_closing_time", "brake closing time")
STOP_SOURCE = "J dω/dt = −T_brake − T_load − T_friction after the reaction time; losses of stages left out; " \
    "first principles. Computed: measure it on the machine"  # fmt: skip


def has_brake(sets: Sets) -> NDArray[np.bool_]:
    """Sets whose motor has a holding brake, shape (S,). [-]"""
    return np.nan_to_num(sets.motors.brake_torque_nm, nan=0.0) > 0.0


def _way_is_limited(sets: Sets) -> NDArray[np.bool_]:
    return np.full(len(sets), not np.isnan(sets.option("allowed stopping distance")))


def _distance_measure(study: Callable[[Sets], StopResults]) -> Callable[[Sets], Measure]:
    def measure(sets: Sets) -> Measure:
        found = sets.once(study)
        return Measure(
            found.distance, everywhere(sets.option("allowed stopping distance"), sets), found.distance_at_s
        )

    return measure


def _distance_working(study: Callable[[Sets], StopResults]) -> Callable[[Sets, int], str]:
    def working(sets: Sets, i: int) -> str:
        found, allowed = sets.once(study), sets.option("allowed stopping distance")
        way, reaction = way_unit(sets), sets.option("stop reaction time")
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
        unit=WAY,
        formula=formula,
        source=STOP_SOURCE,
        needs=(REACTION, *needs),
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
    (BRAKE_TORQUE, CLOSING),
    lambda sets: _way_is_limited(sets) & has_brake(sets),
    is_advice=True,
)


# -- short-circuit current --------------------------------------------------------------------------
def _magnet_limit(sets: Sets) -> FloatArray:
    """Demagnetisation current of the sheet, else its peak current, shape (S,). [A]"""
    stated = sets.catalog_values("motors", "demagnetisation_current")
    return np.where(np.isnan(stated), sets.motors.peak_current_a, stated)


def _shorted_measure(sets: Sets) -> Measure:
    return Measure(sets.once(coasting_stops).current_peak_a, _magnet_limit(sets))


def _shorted_working(sets: Sets, i: int) -> str:
    m = _shorted_measure(sets)
    return (
        f"first peak {digits(float(m.demand[i]))} A at the highest speed when the winding is shorted; "
        f"{digits(float(m.demand[i]))} / {digits(float(m.capacity[i]))} = {digits(float(m.ratio()[i]))}"
    )


SHORTED_CURRENT = Check(
    key="motor_shorted_current",
    title="Short-circuit current",
    group="motor",
    unit="A",
    formula="first peak of K ω/√(R² + (p ω L)²) · |1 − e^(−(R/L + j p ω) t)| at the highest speed ≤ demagnetisation "
    "current, where none is stated I_peak",
    source="dq equations with shorted terminals, no current before; peak current stands for the demagnetisation "
    "limit where none is stated",
    needs=(
        REACTION,
        Need(
            "motors", "peak_current_a", "peak current", known_by=lambda sets: ~np.isnan(_magnet_limit(sets))
        ),
    ),
    measure=_shorted_measure,
    working=_shorted_working,
    is_advice=True,
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
    needs=(REACTION, *_PEAK_NEEDS, _EMERGENCY),
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
    GEARHEAD_EMERGENCY,
    GEARHEAD_JAM,
)
