"""Checks of the drive: continuous, peak and peak time, bus voltage range."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.sizing.checks.base import Check, Measure, Need, Sets, digits
from actuator_sizing.sizing.derating import derating_of

FloatArray = NDArray[np.float64]


def _left(sets: Sets, which: str) -> FloatArray:
    """What is left of the continuous current of each set's drive."""
    return np.asarray(getattr(derating_of(sets.case), which)[sets.index[:, 2]])


_CONTINUOUS = (
    Need(
        "drives",
        "continuous_current_a",
        "continuous current",
        known_by=lambda sets: ~np.isnan(sets.case.drive_parameters.continuous_current_a[sets.index[:, 2]]),
    ),
    Need(
        "drives", "ambient_derating", "ambient derating", known_by=lambda s: ~np.isnan(_left(s, "by_ambient"))
    ),
    Need(
        "drives",
        "altitude_derating_per_100_m",
        "altitude derating per 100 m",
        known_by=lambda s: ~np.isnan(_left(s, "by_altitude")),
    ),
)
_PEAK = Need("drives", "peak_current_a", "peak current")


def _continuous_measure(sets: Sets) -> Measure:
    return Measure(sets.drive_current_rms_a, sets.drives.continuous_current_a, sets.drive_current_rms_at_s)


def _has_mean(sets: Sets) -> NDArray[np.bool_]:
    """Whether there is a time to take the mean over: a cycle that repeats, else the drive's own window."""
    return sets.case.cycle.repeats | np.isfinite(sets.drives.rms_window_s)


def _continuous_working(sets: Sets, i: int) -> str:
    m = _continuous_measure(sets)
    window = sets.drives.rms_window_s[i]
    over = f"over any {digits(window)} s" if np.isfinite(window) else "over the cycle"
    return (
        f"I_rms {over} = {digits(m.demand[i])} A in the drive's basis "
        f"(motor {digits(sets.pairs.current_rms_a[i])} A over the cycle); {_derating_working(sets, i)}"
        f"{m.quotient(i)}"
    )


def _derating_working(sets: Sets, i: int) -> str:
    """What ambient and altitude leave of the rating; empty where they leave all of it."""
    ambient, altitude = (float(_left(sets, which)[i]) for which in ("by_ambient", "by_altitude"))
    if ambient == altitude == 1.0:
        return ""
    rated = float(sets.case.drive_parameters.continuous_current_a[sets.index[i, 2]])
    return (
        f"I_cont = {digits(rated)} A · {digits(ambient)} by the ambient of "
        f"{digits(sets.surroundings.ambient_degc)} °C · {digits(altitude)} by the altitude of "
        f"{digits(sets.surroundings.altitude_m)} m = {digits(sets.drives.continuous_current_a[i])} A; "
    )


DRIVE_CONTINUOUS = Check(
    key="drive_continuous_current",
    title="Drive continuous current",
    group="drive",
    unit="A",
    formula="max over t of √(1/w ∫ i² dt over [t, t + w]) ≤ I_cont,drive (1 − k_ϑ (ϑ_a − ϑ_rated)) "
    "(1 − k_h (h − 1000 m)); w the drive's window, else the cycle",
    source="Continuous rating and derating of the data sheet; sliding window, periodic in the cycle",
    needs=_CONTINUOUS,
    measure=_continuous_measure,
    working=_continuous_working,
    applies=_has_mean,
)


def _peak_measure(sets: Sets) -> Measure:
    return Measure(sets.drive_current_peak_a, sets.drives.peak_current_a, sets.pairs.torque_peak_at_s)


def _peak_working(sets: Sets, i: int) -> str:
    m = _peak_measure(sets)
    return (
        f"i_max = {digits(m.demand[i])} A in the drive's basis (motor {digits(sets.pairs.current_peak_a[i])} A); "
        f"{m.quotient(i)}"
    )


DRIVE_PEAK = Check(
    key="drive_peak_current",
    title="Drive peak current",
    group="drive",
    unit="A",
    formula="max |i| ≤ I_peak,drive, compared as amplitudes (A rms · √2)",
    source="Peak rating of the data sheet",
    needs=(_PEAK,),
    measure=_peak_measure,
    working=_peak_working,
)


def _time_measure(sets: Sets) -> Measure:
    d = sets.drives
    capacity = (d.peak_current_a**2 - d.continuous_current_a**2) * d.peak_time_s
    return Measure(sets.overload_a2s, capacity, sets.overload_at_s)


def _time_working(sets: Sets, i: int) -> str:
    d = sets.drives
    m = _time_measure(sets)
    return (
        f"S_max = {digits(m.demand[i])} A²s; (({digits(d.peak_current_a[i])} A)² − "
        f"({digits(d.continuous_current_a[i])} A)²) · {digits(d.peak_time_s[i])} s = {digits(m.capacity[i])} A²s; "
        f"ratio {digits(m.ratio()[i])}"
    )


DRIVE_PEAK_TIME = Check(
    key="drive_peak_time",
    title="Drive peak time",
    group="drive",
    unit="A²·s",
    formula="dS/dt = i² − I_cont², S ≥ 0, periodic: max S ≤ (I_peak² − I_cont²) t_peak",
    source="i²t accumulator; common practice of drive protection",
    needs=(*_CONTINUOUS, _PEAK, Need("drives", "peak_time_s", "peak time")),
    measure=_time_measure,
    working=_time_working,
    # The accumulator grows for ever when the mean of i² exceeds I_cont²; the largest windowed mean is never below
    # the mean of the cycle, so the continuous current fails as well, with a number.
    yields_to="drive_continuous_current",
)


def _bus_measure(sets: Sets) -> Measure:
    s, d = sets.surroundings, sets.drives
    high, low = s.bus_max_v / d.bus_voltage_max_v, d.bus_voltage_min_v / s.bus_min_v
    low = np.nan_to_num(low, nan=0.0)
    governs_high = high >= low
    return Measure(
        demand=np.where(governs_high, s.bus_max_v, d.bus_voltage_min_v),
        capacity=np.where(governs_high, d.bus_voltage_max_v, s.bus_min_v),
    )


def _bus_working(sets: Sets, i: int) -> str:
    s, d = sets.surroundings, sets.drives
    low = d.bus_voltage_min_v[i]
    return (
        f"bus {digits(s.bus_min_v)} to {digits(s.bus_max_v)} V within the drive's "
        f"{digits(low) if np.isfinite(low) else 'unstated minimum'} to {digits(d.bus_voltage_max_v[i])} V; "
        f"governing ratio {digits(_bus_measure(sets).ratio()[i])}"
    )


DRIVE_BUS = Check(
    key="drive_bus_voltage",
    title="Drive bus voltage range",
    group="drive",
    unit="V",
    formula="U_bus,max ≤ U_drive,max and U_drive,min ≤ U_bus,min",
    source="Bus voltage range of the data sheet against the tolerance band of the supply",
    needs=(Need("drives", "bus_voltage_max_v", "maximum bus voltage"),),
    measure=_bus_measure,
    working=_bus_working,
    is_fit=True,
)
