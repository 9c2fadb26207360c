"""Curves of one set, for figures and tables."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.capability import voltage_limited_current
from actuator_sizing.core.machine import model_voltage, motor_amperes_per_drive_ampere, torque_of_current
from actuator_sizing.core.quadrature import piece_means
from actuator_sizing.core.thermal_run import single_run
from actuator_sizing.core.warm_up import (
    TemperatureCourse,
    WarmUp,
    run_course,
    temperature_course,
    warm_up,
)
from actuator_sizing.sizing.bus_detail import bus_frame, bus_levels
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.checks.motor import current_limited_torque, rerated_continuous_current
from actuator_sizing.sizing.results import SetDetail
from actuator_sizing.sizing.set_model import SetModel
from actuator_sizing.sizing.stop_courses import stop_courses
from actuator_sizing.sizing.thermal_start import with_following

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

_SPEEDS = 241  # points of the speed–torque plane
_STEP_POINTS = 400
_TEMPERATURES = ("time_s", "winding_degc", "housing_degc")


def set_detail(model: SetModel, sets: Sets, index: int) -> SetDetail:
    """Curves of one set.

    Parameters
    ----------
    model : SetModel
        The set. [-]
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which of them the model is. [-]

    Returns
    -------
    SetDetail
        Data frames whose column names end in their SI unit. [-]
    """
    import pandas as pd

    periodic, warming = _temperatures(model, sets, index)
    step = model.step().series(_STEP_POINTS)
    return SetDetail(
        cycle=_cycle_frame(model.in_time),
        periodic_temperature=_frame(periodic, _TEMPERATURES),
        warm_up=_frame(
            warming,
            _TEMPERATURES
            if isinstance(warming, TemperatureCourse)
            else (*_TEMPERATURES, "winding_low_degc", "winding_high_degc"),
        ),
        envelope=_envelope(model),
        step_response=pd.DataFrame(dict(zip(("time_s", "current_a", "speed_rad_s"), step, strict=True))),
        levels=_levels(model, sets, index),
        segments=_segment_frame(model),
        bus=bus_frame(sets.only(index)),
        stops=stop_courses(sets.only(index)),
    )


def _temperatures(
    model: SetModel, sets: Sets, index: int
) -> tuple[TemperatureCourse | None, TemperatureCourse | WarmUp | None]:
    """The periodic state and the way there; of a cycle that does not repeat nothing and its one run."""
    ambient = model.case.surroundings.ambient_degc
    if sets.start is None:
        limit = float(model.motor.winding_limit_degc[0])
        return (
            temperature_course(model.network, model.loss, ambient),
            warm_up(model.network, model.loss, ambient, limit),
        )
    before = sets.start.take(slice(index, index + 1))
    state, loss = (float(before.winding_degc[0]), float(before.housing_degc[0])), model.loss
    after = before.losses_after(model.motor, model.gearhead, model.judged)
    if after:
        run = single_run(model.network, loss, ambient, *state, after)
        if run.known[0]:
            loss = with_following(loss, after[int(run.follower[0])], float(run.winding_max_time_s[0]))
    return None, run_course(model.network, loss, ambient, *state)


def _frame(series: TemperatureCourse | WarmUp | None, names: tuple[str, ...]) -> pd.DataFrame | None:
    """Some series of a course as columns of the same names."""
    import pandas as pd

    return None if series is None else pd.DataFrame({name: getattr(series, name) for name in names})


def _cycle_frame(model: SetModel) -> pd.DataFrame:
    import pandas as pd

    d, c = model.demand, model.course
    n = float(model.gearhead.ratio[0])
    nodes = d.speed.shape[1]
    held = np.where(d.brake_closed & (d.direction == 0.0), 0.0, 1.0)[:, None]
    alpha = n * d.motor_acceleration
    inertia_rotor = (model.motor.rotor_inertia_kg_m2[0] + model.gearhead.inertia_kg_m2[0]) * alpha
    parts = {cause: held * torque / n for cause, torque in d.torque_by_cause.items()}
    parts["losses"] = (
        c.torque_nm[0]
        - inertia_rotor
        - sum(parts[cause] for cause in ("inertia", "gravity", "friction", "process"))
    )
    flat = {
        "time_s": d.time_s,
        "segment": np.repeat(d.segment, nodes),
        "position": d.position,
        "speed": d.speed,
        "acceleration": d.acceleration,
        "effort": d.effort,
        "shaft_torque_nm": d.shaft_torque,
        "motor_speed_rad_s": c.motor_speed_rad_s[0],
        "motor_torque_nm": c.torque_nm[0],
        "motor_shaft_torque_nm": c.shaft_torque_nm[0],
        "current_a": c.current_a[0],
        "voltage_v": c.voltage_v[0],
        "inertia_load_nm": parts["inertia"],
        "inertia_rotor_nm": inertia_rotor,
        "gravity_nm": parts["gravity"],
        "friction_nm": parts["friction"],
        "process_nm": parts["process"],
        "losses_nm": parts["losses"],
    }
    return pd.DataFrame({name: np.ravel(values) for name, values in flat.items()})


def _segment_frame(model: SetModel) -> pd.DataFrame:
    """RMS torque and current of every segment, and the integral that the RMS current of the cycle is made of."""
    import pandas as pd

    d, c = model.demand, model.course
    count = len(model.case.segments)

    def sums(values: FloatArray) -> FloatArray:
        weights = piece_means(values) * d.duration_s
        return np.bincount(d.segment, weights, minlength=count).astype(float)

    duration = np.bincount(d.segment, d.duration_s, minlength=count)
    torque, current = sums(c.torque_nm[0] ** 2), sums(c.current_a[0] ** 2)
    lasting = np.where(duration > 0.0, duration, 1.0)
    return pd.DataFrame(
        {
            "torque_rms_nm": np.sqrt(torque / lasting),
            "current_rms_a": np.sqrt(current / lasting),
            "current_squared_a2_s": current,
        }
    )


def _envelope(model: SetModel) -> pd.DataFrame:
    import pandas as pd

    s = model.case.surroundings
    motor, judged = model.motor, model.judged
    K, sat = judged.torque_constant_nm_per_a, judged.saturation_per_a2
    volts = {
        name: model_voltage(bus, s.modulation_limit, motor.current_basis)
        for name, bus in (("min", s.bus_min_v), ("nominal", s.bus_nominal_v), ("max", s.bus_max_v))
    }
    top = float(motor.speed_max_rad_s[0])
    no_load = float(volts["max"][0] / K[0])
    used = float(np.abs(model.course.motor_speed_rad_s).max())
    reach = max(1.05 * used, min(top, 1.02 * no_load) if np.isfinite(top) else 1.02 * no_load)
    speed = np.linspace(0.0, reach, _SPEEDS)
    to_motor = motor_amperes_per_drive_ampere(motor, model.drive)
    peak = np.fmin(motor.peak_current_a, model.drive.peak_current_a * to_motor)
    frame = {"speed_rad_s": speed}

    def torque(current: FloatArray, voltage: FloatArray) -> FloatArray:
        by_voltage, _ = voltage_limited_current(
            voltage, speed, judged.resistance_ohm, K, judged.reactance_per_speed
        )
        allowed = np.fmin(current, np.where(by_voltage >= 0.0, by_voltage, np.nan))
        allowed = np.where(np.isnan(by_voltage) | (by_voltage < 0.0), np.nan, allowed)
        curve = np.fmin(torque_of_current(allowed, K, sat), motor.peak_torque_nm)
        return np.where(np.isnan(allowed) | (speed > top), np.nan, curve)

    for name, voltage in volts.items():
        frame[f"torque_peak_{name}_bus_nm"] = torque(peak, voltage)
    continuous = rerated_continuous_current(motor, s, speed)
    frame["torque_continuous_nm"] = np.where(np.isnan(continuous), np.nan, torque(continuous, volts["min"]))
    return pd.DataFrame(frame)


def _levels(model: SetModel, sets: Sets, index: int) -> dict[str, float]:
    motor, drive, s = model.motor, model.drive, model.case.surroundings
    to_motor = float(motor_amperes_per_drive_ampere(motor, drive)[0])
    return {
        "motor_peak_current_a": float(motor.peak_current_a[0]),
        "motor_continuous_current_a": float(
            rerated_continuous_current(motor, s, sets.pairs.speed_rms_rad_s[index : index + 1])[0]
        ),
        "drive_peak_current_a": float(drive.peak_current_a[0]) * to_motor,
        "drive_continuous_current_a": float(drive.continuous_current_a[0]) * to_motor,
        "current_rms_a": float(sets.pairs.current_rms_a[index]),
        "torque_rms_nm": float(sets.pairs.torque_rms_nm[index]),
        "speed_rms_rad_s": float(sets.pairs.speed_rms_rad_s[index]),
        "current_limited_torque_nm": float(current_limited_torque(sets)[index]),
        "speed_max_rad_s": float(motor.speed_max_rad_s[0]),
        "winding_limit_degc": float(motor.winding_limit_degc[0]),
        "ambient_degc": s.ambient_degc,
        "voltage_available_v": float(model.judged.voltage_available_v[0]),
        "bus_min_v": s.bus_min_v,
        "bus_nominal_v": s.bus_nominal_v,
        "bus_max_v": s.bus_max_v,
        **bus_levels(sets, index),
    }
