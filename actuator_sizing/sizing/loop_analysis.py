"""The loops of one set in the frequency domain, and their unit steps."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.cascade_kernel import MOTOR_ANGLE, TWIST
from actuator_sizing.core.frequency import bandwidth, step_figures, transfer
from actuator_sizing.core.plant import MOTOR_SPEED, VOLTAGE
from actuator_sizing.core.tuning import LinearCascade

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

LOOPS = ("current", "speed", "position")
_POINTS = 400
_STEP_POINTS = 500


@dataclass(frozen=True)
class LoopAnalysis:
    """Tables and quantities of the loops."""

    quantities: Mapping[str, Any]
    frequency: pd.DataFrame
    steps: pd.DataFrame


def loop_analysis(linear: LinearCascade) -> LoopAnalysis:
    """Margins, bandwidths, step figures and stiffness against disturbance.

    Parameters
    ----------
    linear : LinearCascade
        Plant and settings, without limits and friction. [-]

    Returns
    -------
    LoopAnalysis
        Phases in rad, unwrapped; frequencies up to half the sampling rate. [-]
    """
    import pandas as pd

    quantities: dict[str, Any] = {"spectral_radius": linear.spectral_radius}
    top = 0.999 * math.pi / linear.settings.sample_time_s
    low = min(1e-2 * max(linear.settings.position_gain_per_s, 1e-3 * top), 1e-3 * top)
    w = _grid(linear, low, top)
    table: dict[str, FloatArray] = {"frequency_hz": w / (2.0 * math.pi)}
    steps: dict[str, FloatArray] = {}
    for loop in LOOPS:
        if loop == "position" and linear.settings.position_gain_per_s == 0.0:
            continue
        if loop == "speed" and linear.settings.speed_gain_a_s_per_rad == 0.0:
            continue
        found = linear.margins(loop)
        closed = linear.closed(loop, w)
        opened = closed / (1.0 - closed)
        table[f"{loop}_open_gain"] = np.abs(opened)
        table[f"{loop}_open_phase_rad"] = np.unwrap(np.angle(opened))
        quantities |= {
            f"{loop}_phase_margin_rad": found.phase_margin_rad,
            f"{loop}_crossover_hz": found.crossover_rad_s / (2.0 * math.pi),
            f"{loop}_gain_margin_ratio": found.gain_margin_ratio,
            f"{loop}_sensitivity_peak_ratio": found.sensitivity_peak_ratio,
            f"{loop}_closed_bandwidth_hz": bandwidth(w, closed) / (2.0 * math.pi),
        }
        time, value = unit_step(linear, loop)
        figures = step_figures(time, value, 1.0)
        quantities |= {
            f"{loop}_step_rise_time_s": figures.rise_time_s,
            f"{loop}_step_overshoot_ratio": figures.overshoot_ratio,
            f"{loop}_step_settling_time_s": figures.settling_time_s,
        }
        steps[f"{loop}_time_s"], steps[f"{loop}_response"] = _thin(time, value)
    plant = linear.plant
    A, B = plant.matrices()
    keep = [0, 1, 2, 3]
    output = np.zeros(4)
    output[MOTOR_SPEED] = 1.0
    response = transfer(A[np.ix_(keep, keep)], B[keep, VOLTAGE], output, w)
    table["plant_gain_rad_per_v_s"] = np.abs(response)
    table["plant_phase_rad"] = np.unwrap(np.angle(response))
    stiffness = disturbance_stiffness(linear, w)
    weakest = int(stiffness.argmin())
    table["disturbance_stiffness_nm_per_rad"] = stiffness
    quantities["disturbance_stiffness_min_nm_per_rad"] = float(stiffness[weakest])
    quantities["disturbance_stiffness_min_at_hz"] = float(table["frequency_hz"][weakest])
    return LoopAnalysis(quantities, pd.DataFrame(table), _frame(steps))


def disturbance_stiffness(linear: LinearCascade, frequency_rad_s: FloatArray) -> FloatArray:
    """Torque on the load over its deflection, position loop closed.

    Parameters
    ----------
    linear : LinearCascade
        Plant and settings. [-]
    frequency_rad_s : ndarray, shape (m,)
        Angular frequencies. [rad/s]

    Returns
    -------
    ndarray, shape (m,)
        ``|T_load / θ_load|`` at the motor shaft; infinite at rest with an integrator. [N·m/rad]
    """
    A, B = linear.matrices()
    output = np.zeros(len(A))
    alive = linear.states()
    output[alive.index(MOTOR_ANGLE)] = 1.0
    if TWIST in alive:
        output[alive.index(TWIST)] = -1.0
    response = transfer(A, B[:, 3], output, frequency_rad_s, step_s=linear.settings.sample_time_s)
    return np.asarray(1.0 / np.abs(response))


def unit_step(linear: LinearCascade, loop: str) -> tuple[FloatArray, FloatArray]:
    """Response of one loop to a unit step of its set point, what is outside it open.

    Parameters
    ----------
    linear : LinearCascade
        Plant and settings. [-]
    loop : str
        ``"current"``, ``"speed"`` or ``"position"``.

    Returns
    -------
    time_s : ndarray, shape (n,)
        Until it has settled by the gains; at most 40 000 samples. [s]
    response : ndarray, shape (n,)
        The controlled value. [-]
    """
    A, B, C = linear.system(loop)
    h = linear.settings.sample_time_s
    slowest = float(np.abs(np.linalg.eigvals(A)).max())
    settled = -8.0 / math.log(min(slowest, 1.0 - 1e-9)) if slowest < 1.0 else 1000.0
    by_gain = {
        "current": 12.0 * linear.plant.inductance_h / max(linear.settings.current_gain_v_per_a, 1e-300) / h,
        "speed": 3.0 * linear.settings.speed_reset_time_s / h,
        "position": 12.0 / max(linear.settings.position_gain_per_s, 1e-300) / h,
    }[loop]
    count = int(min(max(min(settled, by_gain), 50.0), 40_000.0))
    x, values = np.zeros(len(A)), np.empty(count)
    for k in range(count):
        values[k] = C @ x
        x = A @ x + B
    return np.asarray(np.arange(count) * h, dtype=float), values


def _grid(linear: LinearCascade, low: float, top: float) -> FloatArray:
    """Logarithmic, with the neighbourhood of resonance and antiresonance resolved."""
    w = [np.geomspace(low, top, _POINTS)]
    if not linear.plant.is_rigid:
        for centre in (linear.plant.antiresonance_rad_s, linear.plant.resonance_rad_s):
            w.append(centre * np.geomspace(0.8, 1.25, 101))
    grid = np.unique(np.concatenate(w))
    return np.asarray(grid[(grid >= low) & (grid <= top)])


def _thin(time: FloatArray, value: FloatArray) -> tuple[FloatArray, FloatArray]:
    stride = max(1, len(time) // _STEP_POINTS)
    return time[::stride], value[::stride]


def _frame(columns: Mapping[str, FloatArray]) -> pd.DataFrame:
    import pandas as pd

    return pd.DataFrame({name: pd.Series(values) for name, values in columns.items()})
