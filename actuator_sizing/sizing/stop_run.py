"""Stops from the fastest instant of the cycle: under control at the current limit, and with a shorted winding."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.control import Cascade, LoopSettings
from actuator_sizing.core.plant import CURRENT, LOAD_SPEED, MOTOR_ANGLE, MOTOR_SPEED, TWIST
from actuator_sizing.core.switching import Held, run_open_loop
from actuator_sizing.sizing.axis_plant import AxisPlant
from actuator_sizing.sizing.cycle_run import Run
from actuator_sizing.sizing.open_loop import left_early, no_moves

FloatArray = NDArray[np.float64]

_STANDS = 0.01  # of the speed at the start: the load counts as stopped
_LONGEST_S = 10.0
_ROUGH_PARTS = 400


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
        Stopping time and distance of the load from the command, gravity and process included, losses of the
        transmission left out (they would help); no reaction time. [-]
    """
    import pandas as pd

    start = _start(axis)
    plant = axis.plant(axis.case.segments[start["segment"]])
    speed, load, ratio = start["speed"], start["load"], start["ratio"]
    stiff = settings.current_limit_a * plant.torque_constant_nm_per_a
    rough = (
        plant.total_inertia_kg_m2 * abs(speed) / max(stiff - abs(load), 1e-3 * stiff)
        if stiff < math.inf
        else 0.1
    )
    lasts = min(4.0 * rough + 40.0 * settings.speed_reset_time_s, _LONGEST_S)
    n = max(int(lasts / settings.sample_time_s), 20)
    held = replace(settings, position_gain_per_s=0.0)
    cascade = Cascade(plant, held, speed_rad_s=speed, load_torque_nm=load)
    zero = np.zeros(n)
    seen = cascade.advance(zero, zero, zero, np.full(n, load))
    time = np.asarray(np.arange(n) * settings.sample_time_s, dtype=float)
    angle = seen["motor_angle"] - seen["twist"]
    controlled = _figures("controlled_stop", time, seen["motor_speed"], angle, speed, ratio)

    x = np.zeros(5)
    x[CURRENT] = (plant.motor_viscous_nm_s * speed + plant.load_viscous_nm_s * speed - load) / max(
        plant.torque_constant_nm_per_a, 1e-300
    )
    x[MOTOR_SPEED] = x[LOAD_SPEED] = speed
    if not plant.is_rigid:
        x[TWIST] = (plant.load_viscous_nm_s * speed - load) / plant.stiffness_nm_per_rad
        x[TWIST] += math.copysign(0.5 * plant.backlash_rad, x[TWIST])
    slow = plant.resistance_ohm * plant.total_inertia_kg_m2 / plant.torque_constant_nm_per_a**2
    shorted_s = min(12.0 * slow + 5.0 * plant.inductance_h / plant.resistance_ohm, _LONGEST_S)
    course = run_open_loop(plant, [Held(shorted_s, 0.0, load)], shorted_s / _ROUGH_PARTS, x)
    states = course.states
    shorted = _figures(
        "shorted_stop", course.time_s, states[:, MOTOR_SPEED], states[:, MOTOR_ANGLE] - states[:, TWIST],
        speed, ratio,
    )  # fmt: skip
    shorted["shorted_stop_peak_current_a"] = float(np.abs(states[:, CURRENT]).max())
    stride = max(1, n // 4000)
    series = pd.concat(
        [
            pd.DataFrame(
                {"stop": "controlled", "time_s": time[::stride], "motor_speed_rad_s": seen["motor_speed"][::stride],
                 "current_a": seen["current"][::stride], "load_angle_rad": angle[::stride],
                 "saturated": seen["saturated"][::stride]}
            ),
            pd.DataFrame(
                {"stop": "shorted winding", "time_s": course.time_s, "motor_speed_rad_s": states[:, MOTOR_SPEED],
                 "current_a": states[:, CURRENT], "load_angle_rad": states[:, MOTOR_ANGLE] - states[:, TWIST],
                 "saturated": 0}
            ),
        ],
        ignore_index=True,
    )  # fmt: skip
    quantities: dict[str, Any] = {
        "stop_from_s": start["time"],
        "stop_from_speed_rad_s": speed,
        "stop_load_torque_nm": load,
        **controlled,
        **shorted,
    }
    notes: tuple[str, ...] = (
        "stops from the instant of the largest speed, counted from the command without a reaction time; gravity "
        "and process act, losses of the transmission are left out; stopped: below 1 % of that speed",
        "shorted winding: resistance and inductance of the winding alone, no current limit",
    )
    return Run(series, quantities, no_moves(), notes + left_early(course))


def _start(axis: AxisPlant) -> dict[str, Any]:
    """Where the motor is fastest, and what pulls at the load there."""
    demand, n = axis.model.demand, axis.ratio
    speed = n * demand.shaft_speed
    piece, node = np.unravel_index(int(np.abs(speed).argmax()), speed.shape)
    load = -(demand.torque_by_cause["gravity"] + demand.torque_by_cause["process"])[piece, node] / n
    position = demand.position[piece : piece + 1, node]
    return {
        "segment": int(demand.segment[piece]),
        "time": float(demand.time_s[piece, node]),
        "speed": float(speed[piece, node]),
        "load": float(load),
        "ratio": float(n * axis.case.mechanism.ratio_at(position)[0][0]),
    }


def _figures(
    name: str, time: FloatArray, speed: FloatArray, angle: FloatArray, start: float, ratio: float
) -> dict[str, float]:
    """Time and distance until the speed stays near zero; NaN if it does not."""
    moving = np.flatnonzero(np.abs(speed) > _STANDS * abs(start))
    if not len(moving) or moving[-1] == len(speed) - 1:
        return {f"{name}_s": math.nan, f"{name}_distance": math.nan,
                f"{name}_final_speed_rad_s": float(speed[-1])}  # fmt: skip
    last = int(moving[-1]) + 1
    return {
        f"{name}_s": float(time[last]),
        f"{name}_distance": float(angle[last] - angle[0]) / ratio,
        f"{name}_final_speed_rad_s": float(speed[-1]),
    }
