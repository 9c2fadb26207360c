"""Dynamics of the evaluated sets: what follows from the parts, and the simulation of those that lead."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.tuning import (
    ANTIRESONANCE_RATIO,
    NESTING_RATIO,
    LinearCascade,
    current_bandwidth,
)
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.axis_plant import ASSUMED_RATE_HZ, AxisPlant, axis_plant, option_number
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.cycle_run import run_cycle
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.loop_tuning import tuned
from actuator_sizing.sizing.simulation import MOST_REPORT_SAMPLES, in_order

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

#: What one comparison simulates at most: sets, and samples of all of them (seconds, tens of them at worst).
_MOST_SIMULATIONS, _MOST_SAMPLES = 60, 2e7


@dataclass(frozen=True)
class DynamicResults:
    """What is asked of the moving axis (NaN: nothing), and what S sets do; NaN where not simulated."""

    settling_band: float
    allowed_following_error: float
    required_bandwidth_rad_s: float
    is_left_out: NDArray[np.bool_]  # fails another check
    is_simulated: FloatArray  # 1, else NaN
    stiffness_nm_per_rad: FloatArray  # at the driven shaft; infinite for a linear motor
    achievable_bandwidth_rad_s: FloatArray
    settling_time_s: FloatArray
    settling_available_s: FloatArray
    settling_at_s: FloatArray
    following_error: FloatArray
    following_error_at_s: FloatArray
    sensitivity_peak_ratio: FloatArray

    def take(self, rows: slice) -> DynamicResults:
        """Some of the sets."""
        values = {f.name: getattr(self, f.name) for f in fields(self)}
        taken: dict[str, Any] = {n: v[rows] for n, v in values.items() if isinstance(v, np.ndarray)}
        return replace(self, **taken)


def wishes(case: Case) -> DynamicResults:
    """What a case asks of the moving axis, as of one set that nothing is known of yet."""
    band, error = option_number(case, "settling band"), option_number(case, "allowed following error")
    required = 2.0 * math.pi * option_number(case, "required speed bandwidth")
    unknown = (np.full(1, np.nan) for _ in range(9))
    return DynamicResults(band, error, required, np.zeros(1, dtype=bool), *unknown)


def add_dynamics(
    case: Case,
    demand: Demand,
    sets: Sets,
    index: IndexArray,
    leading: Callable[[Sets], tuple[IndexArray, NDArray[np.bool_]]],
    progress: Callable[[float], None] | None = None,
) -> Sets:
    """Add the dynamics where the case asks for them; the leading sets are simulated until enough of them stand.

    Parameters
    ----------
    case : Case
        The case. [-]
    demand : Demand
        Its cycle. [-]
    sets : Sets
        Evaluated sets. [-]
    index : ndarray of int, shape (S, 3)
        Their parts. [-]
    leading : callable
        Judges the sets: which lead, and which fail a check.
    progress : callable, optional
        Called with the part done, 0 to 1. [-]

    Returns
    -------
    Sets
        Unchanged where the case asks for nothing. [-]
    """
    band, error = option_number(case, "settling band"), option_number(case, "allowed following error")
    required = 2.0 * math.pi * option_number(case, "required speed bandwidth")
    if all(math.isnan(wish) for wish in (band, error, required)):
        return sets
    nothing = np.full(len(sets), np.nan)
    stiffness = _stiffness(case, sets)
    known = DynamicResults(
        band, error, required, leading(sets)[1], nothing, stiffness,
        _achievable(case, demand, sets, index, stiffness),
        *(nothing.copy() for _ in range(6)),
    )  # fmt: skip
    sets = replace(sets, dynamics=known)
    if math.isnan(band) and math.isnan(error):
        return sets
    demand = in_order(case, demand)
    tried: set[int] = set()
    samples = 0.0
    while len(tried) < _MOST_SIMULATIONS and samples < _MOST_SAMPLES:
        first = leading(sets)[0]
        waiting = [int(i) for i in first if int(i) not in tried and not np.isnan(stiffness[i])]
        if not waiting:
            break
        columns = {name: getattr(known, name).copy() for name in _SIMULATED}
        for i in waiting[: _MOST_SIMULATIONS - len(tried)]:
            motor, gearhead, drive = (int(p) for p in index[i])
            axis = axis_plant(case, demand, (motor, gearhead, drive), winding_degc=math.nan, rate_hz=math.nan)
            tried.add(i)
            length = demand.cycle_s * axis.rate_hz
            if samples < _MOST_SAMPLES and length <= MOST_REPORT_SAMPLES:
                samples += length
                for name, value in _simulated(axis, band).items():
                    columns[name][i] = value
            if progress is not None:
                progress(min(1.0, len(tried) / (len(tried) + len(waiting))))
        known = replace(known, **columns)
        sets = replace(sets, dynamics=known)
    return sets


_SIMULATED = (
    "is_simulated", "settling_time_s", "settling_available_s", "settling_at_s", "following_error",
    "following_error_at_s", "sensitivity_peak_ratio", "achievable_bandwidth_rad_s",
)  # fmt: skip


def _simulated(axis: AxisPlant, band: float) -> dict[str, float]:
    """One set over its cycle; loops that cannot be made stable settle never."""
    try:
        tuning = tuned(axis, {})
    except InputError:
        return {"is_simulated": 1.0, "settling_time_s": math.inf, "settling_available_s": 1.0,
                "following_error": math.inf, "sensitivity_peak_ratio": math.inf}  # fmt: skip
    q = run_cycle(axis, tuning.settings, band, 1, rows=1).quantities
    reserve = LinearCascade(axis.plant(), tuning.settings).margins("speed")
    has_stop = not math.isnan(q["settling_time_s"])
    return {
        "is_simulated": 1.0,
        "settling_time_s": q["settling_time_s"] if has_stop else 0.0,
        "settling_available_s": q["settling_available_s"] if has_stop else axis.case.cycle_duration_s,
        "settling_at_s": q["settling_at_s"],
        "following_error": q["following_error_peak"],
        "following_error_at_s": q["following_error_peak_at_s"],
        "sensitivity_peak_ratio": reserve.sensitivity_peak_ratio,
        "achievable_bandwidth_rad_s": tuning.speed_rad_s,
    }


def _stiffness(case: Case, sets: Sets) -> FloatArray:
    """Gearhead and driven shaft in series at the driven shaft; NaN where neither is known."""
    if case.mechanism.drives_linear_motor:
        return np.full(len(sets), np.inf)
    own = 1.0 / sets.gearheads.stiffness_nm_per_rad
    shaft = 1.0 / option_number(case, "driven shaft stiffness")
    compliance = np.nan_to_num(own, nan=0.0) + (0.0 if math.isnan(shaft) else shaft)
    # A gearhead without a stated stiffness is not known, however stiff the shaft behind it.
    unknown = (np.isnan(own) & ~sets.gearheads.is_direct) | (compliance == 0.0)
    with np.errstate(divide="ignore"):
        return np.where(unknown, np.nan, 1.0 / compliance)


def _achievable(
    case: Case, demand: Demand, sets: Sets, index: IndexArray, stiffness: FloatArray
) -> FloatArray:
    """Bandwidth of the speed loop before the reserve of stability is looked at."""
    rate = np.asarray(case.drives.values["control_rate"], dtype=float)[index[:, 2]]
    rate = np.where(np.isnan(rate), ASSUMED_RATE_HZ, rate)
    current = np.array([current_bandwidth(1.0 / f, case.surroundings.current_loop_rise_s) for f in rate])
    antiresonance = np.sqrt(stiffness / demand.load_inertia)
    return np.minimum(current / NESTING_RATIO, antiresonance / ANTIRESONANCE_RATIO)
