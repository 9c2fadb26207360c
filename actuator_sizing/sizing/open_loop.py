"""Motor and load without a controller: steps of voltage and load, a sinusoid, files of samples."""

from __future__ import annotations

import math
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.frequency import step_figures, transfer
from actuator_sizing.core.machine import model_voltage
from actuator_sizing.core.plant import CURRENT, LOAD_SPEED, MOTOR_ANGLE, MOTOR_SPEED, TWIST, VOLTAGE, Plant
from actuator_sizing.core.switching import Course, Held, run_open_loop
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.axis_plant import AxisPlant
from actuator_sizing.sizing.cycle_run import Run

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

_POINTS = 1200
_SETTLED = 6.0  # slowest time constants shown after each step
_LONGEST_S = 20.0
_PERIODS, _PER_PERIOD = 20, 60
_SINE_SHARE = 0.2  # amplitude of the sinusoid over the steady voltage
_MOST_FILE_ROWS = 100_000


def no_moves() -> pd.DataFrame:
    """An empty table of stops."""
    import pandas as pd

    return pd.DataFrame(
        columns=["segment", "start_s", "available_s", "settling_time_s", "overshoot", "end_error"]
    )


def course_frame(course: Course) -> pd.DataFrame:
    """States of a run as a table in SI.

    Parameters
    ----------
    course : Course
        The run. [-]

    Returns
    -------
    DataFrame
        Columns with their unit in the name. [-]
    """
    import pandas as pd

    x = course.states
    return pd.DataFrame(
        {
            "time_s": course.time_s,
            "current_a": x[:, CURRENT],
            "motor_speed_rad_s": x[:, MOTOR_SPEED],
            "load_speed_rad_s": x[:, LOAD_SPEED],
            "motor_angle_rad": x[:, MOTOR_ANGLE],
            "load_angle_rad": x[:, MOTOR_ANGLE] - x[:, TWIST],
        }
    )


def left_early(course: Course) -> tuple[str, ...]:
    """A note where a run was given up before its end.

    Parameters
    ----------
    course : Course
        The run. [-]

    Returns
    -------
    tuple of str
        Empty for a complete run.
    """
    if course.is_complete:
        return ()
    at = f"given up at {course.time_s[-1]:.4g} s"
    if course.steps > course.events * 100:
        return (
            f"{at} after {course.steps} steps, each a part of the fastest oscillation; ask for a shorter run",
        )
    return (
        f"{at} after {course.events} changes between stick, slip and contact; state more damping, a smaller "
        "backlash, or fewer samples",
    )


def run_step(axis: AxisPlant, plant: Plant) -> Run:
    """Step of the nominal voltage from rest, then a step of load torque; friction and backlash act.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    plant : Plant
        Its plant. [-]

    Returns
    -------
    Run
        Series; rise, peak, overshoot and settling of the speed; the drop of speed under the load. [-]
    """
    voltage = _nominal_voltage(axis)
    decay = float(-plant.poles_per_s().real.max())
    lasts = min(_SETTLED / max(decay, 1e-9), _LONGEST_S)
    continuous = float(axis.model.motor.continuous_current_a[0])
    torque = plant.torque_constant_nm_per_a * (continuous if math.isfinite(continuous) else 0.0)
    # A step must resolve the current too, which is over long before the speed is.
    fast = min(lasts, 10.0 * plant.inductance_h / plant.resistance_ohm)
    course = run_open_loop(plant, [Held(fast, voltage)], fast / _POINTS)
    rest = run_open_loop(
        plant,
        [Held(max(lasts - fast, fast), voltage), Held(lasts, voltage, -torque)],
        lasts / _POINTS,
        course.end,
    )
    states = np.concatenate([course.states, rest.states[1:]])
    time = np.concatenate([course.time_s, fast + rest.time_s[1:]])
    whole = Course(time, states, course.events + rest.events, course.is_complete and rest.is_complete)
    loaded = fast + max(lasts - fast, fast)
    before = time <= loaded
    speed = states[:, MOTOR_SPEED]
    final = float(speed[before][-1])
    figures = step_figures(time[before], speed[before], final) if final > 0.0 else None
    top = int(np.abs(states[:, CURRENT][before]).argmax())
    quantities = {
        "step_voltage_v": voltage,
        "step_final_speed_rad_s": final,
        "step_rise_time_s": figures.rise_time_s if figures else math.nan,
        "step_peak_time_s": figures.peak_time_s if figures else math.nan,
        "step_overshoot_ratio": figures.overshoot_ratio if figures else math.nan,
        "step_settling_time_s": figures.settling_time_s if figures else math.nan,
        "step_peak_current_a": float(states[top, CURRENT]),
        "step_peak_current_time_s": float(time[top]),
        "load_step_nm": torque,
        "load_step_speed_change_rad_s": float(speed[-1]) - final,
    }
    notes = (
        f"voltage step of {voltage:.5g} V at rest, load torque step of {torque:.5g} at {loaded:.4g} s; "
        "no controller, no limit of current; gravity left out",
    )
    return Run(course_frame(whole), quantities, no_moves(), notes + left_early(whole))


def run_sine(axis: AxisPlant, plant: Plant) -> Run:
    """Half the nominal voltage plus a sinusoid at the mechanical corner frequency.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    plant : Plant
        Its plant. [-]

    Returns
    -------
    Run
        Series of the last periods; amplitude and phase of the steady ripple, from the linear plant. [-]
    """
    steady = 0.5 * _nominal_voltage(axis)
    amplitude = _SINE_SHARE * steady
    w = _slowest(plant)
    period = 2.0 * math.pi / w
    h = period / _PER_PERIOD
    count = _PERIODS * _PER_PERIOD
    middle = (np.arange(count) + 0.5) * h
    voltage = steady + amplitude * np.sin(w * middle)
    course = run_open_loop(plant, [Held(h, float(u)) for u in voltage], h)
    current, speed = ripple(plant, w)
    quantities = {
        "sine_steady_voltage_v": steady,
        "sine_amplitude_v": amplitude,
        "sine_frequency_hz": w / (2.0 * math.pi),
        "ripple_current_a": abs(current) * amplitude,
        "ripple_current_phase_rad": float(np.angle(current)),
        "ripple_speed_rad_s": abs(speed) * amplitude,
        "ripple_speed_phase_rad": float(np.angle(speed)),
    }
    notes = (
        f"voltage held for {h:.3g} s at a time; amplitude and phase of the ripple without friction, from the "
        "response at the frequency itself",
    )
    return Run(course_frame(course), quantities, no_moves(), notes + left_early(course))


def ripple(plant: Plant, frequency_rad_s: float) -> tuple[complex, complex]:
    """Steady ripple of current and motor speed per volt of a sinusoid.

    Parameters
    ----------
    plant : Plant
        Its linear part. [-]
    frequency_rad_s : float
        Angular frequency. [rad/s]

    Returns
    -------
    current, speed : complex
        Magnitude and phase against the voltage, in A/V and rad/s per V. [-]
    """
    A, B = plant.matrices()
    keep = [0, 1, 2, 3]
    w = np.array([frequency_rad_s])
    rows = np.eye(4)
    current, speed = (
        complex(transfer(A[np.ix_(keep, keep)], B[keep, VOLTAGE], rows[k], w)[0])
        for k in (CURRENT, MOTOR_SPEED)
    )
    return current, speed


def run_file(path: str | Path, plant: Plant, axis: AxisPlant, most_samples: int) -> Run:
    """Samples of voltage and load torque from a CSV file, each held until the next.

    Parameters
    ----------
    path : str or Path
        File with ``time [s]``, ``voltage [V]`` and perhaps ``load torque [Nm]``.
    plant : Plant
        What is moved. [-]
    axis : AxisPlant
        The set. [-]
    most_samples : int
        Longest file. [-]

    Returns
    -------
    Run
        Series at every sample and event. [-]

    Raises
    ------
    InputError
        If the file cannot be read or a value is missing or out of order.
    """
    from actuator_sizing.case.simulation_samples import read_samples

    samples = read_samples(Path(path), {"time": "time", "voltage": "voltage", "load torque": "torque"},
                           required=("time", "voltage"), most_rows=min(most_samples, _MOST_FILE_ROWS))  # fmt: skip
    time, voltage = samples["time"], samples["voltage"]
    torque = samples.get("load torque", np.zeros(len(time)))
    steps = np.diff(time)
    inputs = [
        Held(float(h), float(u), -float(d)) for h, u, d in zip(steps, voltage[:-1], torque[:-1], strict=True)
    ]
    course = run_open_loop(plant, inputs, max(float(steps.max()), 1e-12))
    limit = axis.voltage_limit_v
    notes = [f"{len(time)} samples, each held until the next; no controller, gravity left out"]
    if float(np.abs(voltage).max()) > limit:
        notes.append(f"the file asks for more than the {limit:.5g} V of the lowest bus; it was not limited")
    notes += left_early(course)
    end = course.end
    quantities = {
        "final_speed_rad_s": float(end[MOTOR_SPEED]),
        "final_angle_rad": float(end[MOTOR_ANGLE]),
        "current_peak_a": float(np.abs(course.states[:, CURRENT]).max()),
        "speed_peak_rad_s": float(np.abs(course.states[:, MOTOR_SPEED]).max()),
        "events": course.events,
    }
    return Run(course_frame(course), quantities, no_moves(), tuple(notes))


def _nominal_voltage(axis: AxisPlant) -> float:
    s = axis.case.surroundings
    return float(model_voltage(s.bus_nominal_v, s.modulation_limit, axis.model.motor.current_basis)[0])


def _slowest(plant: Plant) -> float:
    """Slowest pole that is not zero. [1/s]"""
    poles = np.abs(plant.poles_per_s())
    if poles[0] > 0.0:
        return float(poles[0])
    raise InputError([Problem("simulate", None, "motor", "no torque constant", "a motor that turns",
                              "Choose another motor.")])  # fmt: skip
