"""From screened survivors to exactly evaluated sets."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import amplitude_per_unit_current, judge, motor_amplitude_per_unit_current
from actuator_sizing.core.parameters import DriveParameters, _Columns
from actuator_sizing.core.quadrature import piece_means
from actuator_sizing.core.window_bounds import overload_bound, windowed_rms_bound
from actuator_sizing.core.windows import overload_accumulator, windowed_rms
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.demand import Demand, build_demand
from actuator_sizing.sizing.derating import derated_drives
from actuator_sizing.sizing.evaluation import PairResults, evaluate_pairs
from actuator_sizing.sizing.joint_bus import PartnerPower, partner_axis, partner_power
from actuator_sizing.sizing.pair_course import air_gap_coefficients, course
from actuator_sizing.sizing.thermal_start import ThermalStart

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

_PAIRS_PER_CHUNK = 256
_MOST_NODES = 100_000  # sets times nodes for which an accumulator is followed at a time


@dataclass(frozen=True)
class _DriveView(_Columns):
    peak: FloatArray
    rms: FloatArray
    rms_at: FloatArray
    overload: FloatArray
    overload_at: FloatArray


def evaluate_sets(
    case: Case,
    demand: Demand,
    index: IndexArray,
    progress: Callable[[float], None] | None = None,
    start: ThermalStart | None = None,
) -> Sets:
    """Evaluate sets exactly; each distinct motor × gearhead pair only once.

    Parameters
    ----------
    case : Case
        The case with its catalogs. [-]
    demand : Demand
        The cycle. [-]
    index : ndarray of int, shape (S, 3)
        Motor, gearhead and drive of each set. [-]
    progress : callable, optional
        Called with the part done, 0 to 1. [-]
    start : ThermalStart, optional
        State of the S sets before a cycle that runs once. [-]

    Returns
    -------
    Sets
        Everything the checks measure, in the order of `index`. [-]
    """
    pairs, first_set, pair_of_set = np.unique(index[:, :2], axis=0, return_index=True, return_inverse=True)
    pair_of_set = pair_of_set.reshape(-1)
    results: list[PairResults] = []
    order: list[IndexArray] = []
    views: list[_DriveView] = []
    for first in range(0, len(pairs), _PAIRS_PER_CHUNK):
        some = slice(first, first + _PAIRS_PER_CHUNK)
        chunk = pairs[some]
        motors = case.motor_parameters.take(chunk[:, 0])
        gearheads = case.gearhead_parameters.take(chunk[:, 1])
        before = None if start is None else start.take(first_set[some])
        results.append(evaluate_pairs(demand, motors, gearheads, case.surroundings, before))
        members = np.flatnonzero((pair_of_set >= first) & (pair_of_set < first + len(chunk)))
        order.append(members)
        views.append(
            _drive_view(case, demand, chunk, pair_of_set[members] - first, index[members, 2], results[-1])
        )
        if progress is not None:
            progress(min(1.0, (first + _PAIRS_PER_CHUNK) / len(pairs)))
    all_pairs = PairResults.joined(results)
    view = _DriveView.joined(views).take(np.argsort(np.concatenate(order), kind="stable"))
    return Sets(
        case=case,
        index=index,
        demand=demand,
        surroundings=case.surroundings,
        recommended_inertia_ratio=case.number("recommended inertia ratio"),
        motors=case.motor_parameters.take(index[:, 0]),
        gearheads=case.gearhead_parameters.take(index[:, 1]),
        drives=derated_drives(case).take(index[:, 2]),
        pairs=all_pairs.take(pair_of_set),
        drive_current_peak_a=view.peak,
        drive_current_rms_a=view.rms,
        drive_current_rms_at_s=view.rms_at,
        overload_a2s=view.overload,
        overload_at_s=view.overload_at,
        start=start,
        partners=_partner_powers(case),
    )


def _partner_powers(case: Case) -> tuple[PartnerPower, ...]:
    """What the other axes on the bus draw from it."""
    found = []
    for partner in case.partners:
        axis, index = partner_axis(case, partner)
        found.append(partner_power(partner, evaluate_sets(axis, build_demand(axis), index)))
    return tuple(found)


def _drive_view(
    case: Case,
    demand: Demand,
    pairs: IndexArray,
    pair: IndexArray,
    drive: IndexArray,
    results: PairResults,
) -> _DriveView:
    """Currents as the drives see them: amplitudes compared, expressed in the basis of each drive."""
    motors = case.motor_parameters.take(pairs[:, 0])
    gearheads = case.gearhead_parameters.take(pairs[:, 1])
    drives = derated_drives(case).take(drive)
    amplitude = motor_amplitude_per_unit_current(motors)
    per_drive = amplitude_per_unit_current(drives.current_basis)
    signal: _Course | _Slices
    if demand.slices is None:
        current = course(demand, motors, gearheads, judge(motors, case.surroundings)).current_a
        duration, squared = demand.duration_s, (current * amplitude[:, None, None]) ** 2
        if not case.cycle.repeats:
            duration, squared = _with_rest(duration, squared, drives, per_drive)
        signal = _Course(duration, squared)
    else:
        peak = results.current_peak_a
        torque = np.where(results.torque_peak_nm > 0.0, results.torque_peak_nm, 1.0)
        # The current per torque is largest at the peak: with saturation this is above the true square.
        factor = (amplitude * peak / torque) ** 2
        squared = demand.slices.squared_torque(air_gap_coefficients(motors, gearheads)) * factor[:, None]
        signal = _Slices(demand.slices.duration_s, squared, amplitude * peak)
    rms = results.current_rms_a[pair] * amplitude[pair] / per_drive
    rms_at = np.full(len(pair), np.nan)
    for window in np.unique(drives.rms_window_s[np.isfinite(drives.rms_window_s)]):
        mine = np.flatnonzero(drives.rms_window_s == window)
        wanted, place = np.unique(pair[mine], return_inverse=True)
        largest, start = signal.windowed_rms(wanted, float(window))
        rms[mine] = largest[place] / per_drive[mine]
        rms_at[mine] = start[place]
    accumulated, when = _overload(signal, results, pair, amplitude, drives.continuous_current_a * per_drive)
    return _DriveView(
        peak=results.current_peak_a[pair] * amplitude[pair] / per_drive,
        rms=rms,
        rms_at=rms_at,
        overload=accumulated / per_drive**2,
        overload_at=when,
    )


@dataclass(frozen=True)
class _Course:
    """Squares of currents over the cycle: windows are exact."""

    duration_s: FloatArray
    squared: FloatArray  # (B, P, K)

    def windowed_rms(self, pairs: IndexArray, window_s: float) -> tuple[FloatArray, FloatArray]:
        return windowed_rms(self.duration_s, self.squared[pairs], window_s)

    def overload(self, pairs: IndexArray, continuous_squared: FloatArray) -> tuple[FloatArray, FloatArray]:
        return overload_accumulator(self.duration_s, self.squared[pairs], continuous_squared)


@dataclass(frozen=True)
class _Slices:
    """Squares of currents in slices of a condensed record: windows are bounded from above."""

    duration_s: FloatArray
    squared: FloatArray  # (B, M), integrals
    peak: FloatArray  # (B,)

    def windowed_rms(self, pairs: IndexArray, window_s: float) -> tuple[FloatArray, FloatArray]:
        return windowed_rms_bound(self.duration_s, self.squared[pairs], self.peak[pairs], window_s)

    def overload(self, pairs: IndexArray, continuous_squared: FloatArray) -> tuple[FloatArray, FloatArray]:
        return overload_bound(self.duration_s, self.squared[pairs], continuous_squared)


def _with_rest(
    duration_s: FloatArray, squared: FloatArray, drives: DriveParameters, per_drive: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """The run with a rest so long that no window and no accumulator reaches from one run to the next."""
    window = float(np.nanmax(drives.rms_window_s, initial=0.0))
    least = float(np.nanmin((drives.continuous_current_a * per_drive) ** 2, initial=np.inf))
    heat = float(np.max(piece_means(squared) @ duration_s))
    rest = max(window, heat / least if least > 0.0 else 0.0, float(duration_s.max()))
    nothing = np.zeros((len(squared), 1, squared.shape[2]))
    return np.append(duration_s, rest), np.concatenate([squared, nothing], axis=1)


def _overload(
    signal: _Course | _Slices,
    results: PairResults,
    pair: IndexArray,
    amplitude: FloatArray,
    continuous_a: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Largest i²t accumulator per set; asked for only where the peak exceeds the rating."""
    peak = results.current_peak_a[pair] * amplitude[pair]
    accumulated, when = np.zeros(len(pair)), np.full(len(pair), np.nan)
    accumulated[np.isnan(continuous_a)] = np.nan
    above = np.flatnonzero(peak > continuous_a)
    size = max(1, _MOST_NODES // signal.squared[0].size)
    for start in range(0, len(above), size):
        some = above[start : start + size]
        accumulated[some], when[some] = signal.overload(pair[some], continuous_a[some] ** 2)
    return accumulated, when
