"""Stops from the fastest instant of the cycle: under control at the current limit, and with a shorted winding."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.cascade_kernel import CURRENT_INTEGRATOR, LAST_VOLTAGE, STATES
from actuator_sizing.core.control import Cascade, LoopSettings
from actuator_sizing.core.parameters import BRUSHED
from actuator_sizing.core.plant import CURRENT, LOAD_SPEED, MOTOR_ANGLE, MOTOR_SPEED, TWIST, Plant
from actuator_sizing.core.switching import Course, Held, run_open_loop
from actuator_sizing.sizing.axis_plant import AxisPlant, option_number
from actuator_sizing.sizing.cycle_run import Run
from actuator_sizing.sizing.open_loop import left_early, no_moves

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

_STANDS = 0.01  # of the speed at the start: the load counts as stopped
_LONGEST_S = 10.0
_ROUGH_PARTS = 400
_MOST_STEPS = 3_000_000  # some seconds
_TURN_PER_STEP = 0.05  # electrical radians: the splitting of both axes then errs by a few 1e-4
_PARTS_OF_PERIOD = 20.0  # steps per period of the resonance, so that no contact is missed


def run_stop(axis: AxisPlant, settings: LoopSettings) -> Run:
    """Stop from the instant of the largest motor speed in two ways.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    settings : LoopSettings
        The loops; the speed loop is commanded to zero. [-]

    Returns
    -------
    Run
        Stopping time and distance of the load from the command, the reaction time of the case included, gravity
        and a process that drives included, losses of the transmission left out (they would help). [-]
    """
    import pandas as pd

    start = _start(axis)
    plant = axis.plant(axis.case.segments[start["segment"]])
    reaction_s = option_number(axis.case, "stop reaction time")
    early: tuple[str, ...] = ()
    coast = _coast(plant, start, 0.0 if math.isnan(reaction_s) else reaction_s)
    controlled = _joined(coast, *_controlled(plant, settings, coast, start["load"]))
    if plant.reactance_ohm_s > 0.0:
        shorted = _shorted_in_dq(plant, settings, coast, start["load"])
        model = "shorted winding: both axes of the machine with its reactance"
    else:
        shorted, early = _shorted(plant, coast, start["load"])
        model = "shorted winding: without reactance"
        if int(axis.model.motor.commutation[0]) != BRUSHED:
            model += (
                ", as pole pairs or inductance are not known; with it the machine brakes less at speed and may "
                "stop much later"
            )
    quantities: dict[str, Any] = {
        "stop_from_s": start["time"],
        "stop_from_speed_rad_s": start["speed"],
        "stop_load_torque_nm": start["load"],
        "stop_reaction_s": coast.time_s[-1],
        **_figures("controlled_stop", controlled, start),
        **_figures("shorted_stop", shorted, start),
        "shorted_stop_peak_current_a": float(
            np.hypot(shorted.current_a, shorted.direct_current_a)[len(coast.time_s) - 1 :].max()
        ),
    }
    notes: tuple[str, ...] = (
        "stops from the instant of the largest speed, counted from the command"
        + (", stop reaction time not stated: taken as none" if math.isnan(reaction_s) else
           f", {reaction_s:.4g} s of reaction included in which the motor gives no torque")
        + "; gravity acts, and process where it drives; losses of the transmission are left out; "
        "stopped: below 1 % of that speed",
        f"{model}; resistance and inductance of the winding alone, no current limit",
    )  # fmt: skip
    series = pd.concat(
        [_thinned(controlled, "controlled"), _thinned(shorted, "shorted winding")], ignore_index=True
    )
    return Run(series, quantities, no_moves(), notes + early)


def _coast(plant: Plant, start: Mapping[str, Any], reaction_s: float) -> Course:
    """From the command until the drive acts: no torque of the motor; without reaction time the start alone."""
    speed, load = start["speed"], start["load"]
    x = np.zeros(5)
    x[MOTOR_SPEED] = x[LOAD_SPEED] = speed
    if not plant.is_rigid:
        x[TWIST] = (plant.load_viscous_nm_s * speed - load) / plant.stiffness_nm_per_rad
        x[TWIST] += math.copysign(0.5 * plant.backlash_rad, x[TWIST])
    if reaction_s > 0.0:
        idle = replace(plant, torque_constant_nm_per_a=0.0)
        return run_open_loop(idle, [Held(reaction_s, 0.0, load)], reaction_s / _ROUGH_PARTS, x)
    viscous = plant.motor_viscous_nm_s + plant.load_viscous_nm_s
    x[CURRENT] = (viscous * speed - load) / max(plant.torque_constant_nm_per_a, 1e-300)
    return Course(np.zeros(1), x[None], 0, is_complete=True)


def _controlled(
    plant: Plant, settings: LoopSettings, coast: Course, load: float
) -> tuple[FloatArray, FloatArray, NDArray[np.int64]]:
    """The speed loop commanded to zero: time, states, and where a limit acted."""
    x = coast.end
    stiff = settings.current_limit_a * plant.torque_constant_nm_per_a
    rough = (
        plant.total_inertia_kg_m2 * abs(x[MOTOR_SPEED]) / max(stiff - abs(load), 1e-3 * stiff)
        if stiff < math.inf
        else 0.1
    )
    lasts = min(4.0 * rough + 40.0 * settings.speed_reset_time_s, _LONGEST_S)
    n = max(int(lasts / settings.sample_time_s), 20)
    held = replace(settings, position_gain_per_s=0.0)
    cascade = Cascade(plant, held, speed_rad_s=float(x[MOTOR_SPEED]), load_torque_nm=load)
    if len(coast.time_s) > 1:  # the drive begins with a winding without current
        emf = plant.torque_constant_nm_per_a * float(x[MOTOR_SPEED])
        cascade.state[:5] = [0.0, *x[1:].tolist()]
        cascade.state[LAST_VOLTAGE] = emf
        cascade.state[CURRENT_INTEGRATOR] = emf * (1.0 - held.back_emf_feedforward_ratio)
    zero = np.zeros(n)
    seen = cascade.advance(zero, zero, zero, np.full(n, load))
    states = _states(seen, n)
    time = np.asarray(np.arange(n) * settings.sample_time_s, dtype=float)
    return time, states, np.asarray(seen["saturated"], dtype=np.int64)


def _shorted(plant: Plant, coast: Course, load: float) -> tuple[_Way, tuple[str, ...]]:
    """The winding of a machine without reactance shorted: the current starts from its value."""
    lasts = _shorted_lasts_s(plant, coast)
    course = run_open_loop(plant, [Held(lasts, 0.0, load)], lasts / _ROUGH_PARTS, coast.end)
    way = _joined(coast, course.time_s, course.states, np.zeros(len(course.time_s), dtype=np.int64))
    return way, left_early(course)


def _shorted_in_dq(plant: Plant, settings: LoopSettings, coast: Course, load: float) -> _Way:
    """The winding of a machine with reactance shorted: the loop with all gains at zero holds both voltages at zero.

    At speed the reactance limits current and torque: ``K² R ω / (R² + (p ω L)²)`` once the transient is over.
    """
    lasts = _shorted_lasts_s(plant, coast)
    electrical = plant.reactance_ohm_s / plant.inductance_h * abs(float(coast.end[MOTOR_SPEED]))
    step = min(settings.sample_time_s, lasts / _ROUGH_PARTS, _TURN_PER_STEP / max(electrical, 1e-300))
    if not plant.is_rigid:
        step = min(step, 2.0 * math.pi / plant.resonance_rad_s / _PARTS_OF_PERIOD)
    n = min(math.ceil(lasts / step), _MOST_STEPS)
    idle = LoopSettings(
        sample_time_s=step, position_gain_per_s=0.0, speed_gain_a_s_per_rad=0.0, speed_reset_time_s=math.inf,
        current_gain_v_per_a=0.0, current_reset_time_s=math.inf, back_emf_feedforward_ratio=0.0,
        is_delayed=False, is_dq=True,
    )  # fmt: skip
    cascade = Cascade(plant, idle)
    cascade.state = [*coast.end.tolist(), *[0.0] * (STATES - len(coast.end))]
    zero = np.zeros(n)
    seen = cascade.advance(zero, zero, zero, np.full(n, load))
    states = _states(seen, n)
    time = np.asarray(np.arange(n) * step, dtype=float)
    return _joined(coast, time, states, np.zeros(n, dtype=np.int64), seen["direct_current"])


def _shorted_lasts_s(plant: Plant, coast: Course) -> float:
    """Long enough for a stop by the shorted winding without load, with room for a load that drives. [s]"""
    slow = plant.resistance_ohm * plant.total_inertia_kg_m2 / plant.torque_constant_nm_per_a**2
    # Without load the steady torque takes slow · (ln(ω₀/ω) + (X/R)²/2), X the reactance at ω₀.
    part = plant.reactance_ohm_s * float(coast.end[MOTOR_SPEED]) / plant.resistance_ohm
    return min(slow * (12.0 + part**2) + 5.0 * plant.inductance_h / plant.resistance_ohm, _LONGEST_S)


def _states(seen: Mapping[str, Any], n: int) -> FloatArray:
    states = np.zeros((n, 5))
    for column, name in ((CURRENT, "current"), (MOTOR_SPEED, "motor_speed"), (TWIST, "twist"),
                         (MOTOR_ANGLE, "motor_angle")):  # fmt: skip
        states[:, column] = seen[name]
    return states


@dataclass(frozen=True)
class _Way:
    """A stop from its command on."""

    time_s: FloatArray
    speed_rad_s: FloatArray
    current_a: FloatArray
    load_angle_rad: FloatArray
    saturated: NDArray[np.int64]
    direct_current_a: FloatArray


def _joined(
    coast: Course,
    time: FloatArray,
    states: FloatArray,
    saturated: NDArray[np.int64],
    direct_a: FloatArray | None = None,
) -> _Way:
    before = len(coast.time_s) - 1
    x = np.concatenate([coast.states[:before], states])
    return _Way(
        np.concatenate([coast.time_s[:before], coast.time_s[-1] + time]),
        x[:, MOTOR_SPEED], x[:, CURRENT], x[:, MOTOR_ANGLE] - x[:, TWIST],
        np.concatenate([np.zeros(before, dtype=np.int64), saturated]),
        np.concatenate([np.zeros(before), np.zeros(len(time)) if direct_a is None else direct_a]),
    )  # fmt: skip


def _thinned(way: _Way, name: str) -> pd.DataFrame:
    import pandas as pd

    every = slice(None, None, max(1, len(way.time_s) // 4000))
    return pd.DataFrame(
        {"stop": name, "time_s": way.time_s[every], "motor_speed_rad_s": way.speed_rad_s[every],
         "current_a": way.current_a[every], "load_angle_rad": way.load_angle_rad[every],
         "saturated": way.saturated[every]}
    )  # fmt: skip


def _start(axis: AxisPlant) -> dict[str, Any]:
    """Where the motor is fastest, and what pulls at the load there."""
    demand, n = axis.model.demand, axis.ratio
    speed = n * demand.shaft_speed
    piece, node = np.unravel_index(int(np.abs(speed).argmax()), speed.shape)
    process = float(demand.torque_by_cause["process"][piece, node])
    if process * speed[piece, node] > 0.0:
        process = 0.0  # it opposes the motion, which shortens a stop, and would turn round what is at rest
    load = -(float(demand.torque_by_cause["gravity"][piece, node]) + process) / n
    position = demand.position[piece : piece + 1, node]
    return {
        "segment": int(demand.segment[piece]),
        "time": float(demand.time_s[piece, node]),
        "speed": float(speed[piece, node]),
        "load": float(load),
        "ratio": float(n * axis.case.mechanism.ratio_at(position)[0][0]),
    }


def _figures(name: str, way: _Way, start: Mapping[str, Any]) -> dict[str, float]:
    """Time and distance until the speed stays near zero; NaN if it does not."""
    moving = np.flatnonzero(np.abs(way.speed_rad_s) > _STANDS * abs(start["speed"]))
    answer = {f"{name}_s": math.nan, f"{name}_distance": math.nan, f"{name}_watched_s": float(way.time_s[-1]),
              f"{name}_final_speed_rad_s": float(way.speed_rad_s[-1])}  # fmt: skip
    if len(moving) and moving[-1] < len(way.speed_rad_s) - 1:
        last = int(moving[-1]) + 1
        gone = float(way.load_angle_rad[last] - way.load_angle_rad[0])
        answer |= {f"{name}_s": float(way.time_s[last]), f"{name}_distance": gone / start["ratio"]}
    return answer
