"""Checks of the moving axis; they apply where the case states a band, an error or a bandwidth."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.tuning import LARGEST_SENSITIVITY
from actuator_sizing.sizing.checks.base import Check, Measure, Need, Sets, digits

FloatArray = NDArray[np.float64]

_STIFFNESS = Need(
    "dynamics", "stiffness_nm_per_rad", "torsional stiffness (or driven shaft stiffness of the axis)"
)
_SIMULATED = Need(
    "dynamics",
    "is_simulated",
    "simulation: only leading sets with a cycle of at most four million samples are simulated",
)


def _column(sets: Sets, name: str) -> FloatArray:
    if sets.dynamics is None:
        return np.full(len(sets), np.nan)
    return np.broadcast_to(np.asarray(getattr(sets.dynamics, name), dtype=float), (len(sets),))


def _where(*wishes: str) -> Callable[[Sets], NDArray[np.bool_]]:
    """Sets to which a check applies: all that fail nothing else, if one of the wishes is stated."""

    def applies(sets: Sets) -> NDArray[np.bool_]:
        if sets.dynamics is None or all(np.isnan(getattr(sets.dynamics, wish)) for wish in wishes):
            return np.zeros(len(sets), dtype=bool)
        return ~sets.dynamics.is_left_out

    return applies


def _settling_measure(sets: Sets) -> Measure:
    return Measure(
        _column(sets, "settling_time_s"),
        _column(sets, "settling_available_s"),
        _column(sets, "settling_at_s"),
    )


def _settling_working(sets: Sets, i: int) -> str:
    m = _settling_measure(sets)
    return (
        f"t_settle / t_dwell = {digits(float(m.demand[i]))} s / {digits(float(m.capacity[i]))} s, last exit from "
        f"±{digits(float(_column(sets, 'settling_band')[i]))} m or rad of the load around its target"
    )


SETTLING = Check(
    key="settling",
    title="Settling within dwell",
    group="axis",
    unit="s",
    formula="time after each move until the load stays in the settling band ≤ dwell that follows",
    source="Simulation of the sampled cascade with friction and limits; default tuning",
    needs=(_STIFFNESS, _SIMULATED),
    measure=_settling_measure,
    working=_settling_working,
    applies=_where("settling_band"),
)


def _error_measure(sets: Sets) -> Measure:
    return Measure(
        _column(sets, "following_error"), _column(sets, "allowed_following_error"),
        _column(sets, "following_error_at_s"),
    )  # fmt: skip


def _error_working(sets: Sets, i: int) -> str:
    m = _error_measure(sets)
    return (
        f"max |x_command − x_load| / allowed = {digits(float(m.demand[i]))} / {digits(float(m.capacity[i]))} "
        "(m or rad of the load)"
    )


FOLLOWING_ERROR = Check(
    key="following_error",
    title="Following error",
    group="axis",
    unit="",
    formula="max |x_command − x_load| over the cycle ≤ allowed following error",
    source="Simulation of the sampled cascade with friction and limits; default tuning",
    needs=(_STIFFNESS, _SIMULATED),
    measure=_error_measure,
    working=_error_working,
    applies=_where("allowed_following_error"),
)


def _reserve_measure(sets: Sets) -> Measure:
    peak = _column(sets, "sensitivity_peak_ratio")
    return Measure(peak, np.full(len(sets), LARGEST_SENSITIVITY))


def _reserve_working(sets: Sets, i: int) -> str:
    peak = float(_reserve_measure(sets).demand[i])
    return f"M_s / 2 = {digits(peak)} / {digits(LARGEST_SENSITIVITY)} of the speed loop"


STABILITY_RESERVE = Check(
    key="stability_reserve",
    title="Stability reserve",
    group="axis",
    unit="-",
    formula="M_s = max |1/(1 + L(jω))| of the speed loop ≤ 2: at least 29° and a factor of 2",
    source="Åström and Murray, Feedback Systems, maximum sensitivity (from memory)",
    needs=(_STIFFNESS, _SIMULATED),
    measure=_reserve_measure,
    working=_reserve_working,
    applies=_where("settling_band", "allowed_following_error"),
)


def _resonance_measure(sets: Sets) -> Measure:
    return Measure(_column(sets, "required_bandwidth_rad_s"), _column(sets, "achievable_bandwidth_rad_s"))


def _resonance_working(sets: Sets, i: int) -> str:
    m = _resonance_measure(sets)
    return (
        f"ω_required / ω_achievable = {digits(float(m.demand[i]))} rad/s / "
        f"{digits(float(m.capacity[i]))} rad/s"
    )


RESONANCE = Check(
    key="resonance",
    title="Resonance against bandwidth",
    group="axis",
    unit="rad/s",
    formula="required bandwidth of the speed loop ≤ min(√(k/J_L)/3, ω_c/4), less where the stability reserve asks",
    source="Two-mass model; factors are common practice",
    needs=(_STIFFNESS,),
    measure=_resonance_measure,
    working=_resonance_working,
    applies=_where("required_bandwidth_rad_s"),
)
