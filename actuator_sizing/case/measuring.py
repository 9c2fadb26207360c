"""The `measured` table: samples checked, period found, motion smoothed, and what the smoothing decides."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.axis import Axis
from actuator_sizing.case.measured_samples import EFFORTS, MEASURED, read_samples_of
from actuator_sizing.case.model import Entry, Segment
from actuator_sizing.case.plausible_motion import ABSURD
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.recording import (
    EXACT_INTERVALS,
    RECORDED_EFFORT,
    RECORDED_PROCESS,
    RECORDED_SHAFT,
    Recording,
)
from actuator_sizing.core.measured import find_period, largest_gap
from actuator_sizing.core.periodic_spline import PeriodicSpline, knots_for, smooth_position
from actuator_sizing.errors import NOTE, WARNING

FloatArray = NDArray[np.float64]

_OPEN = 0.02  # part of the range by which the ends of one cycle may differ unnoticed
_MOST_KNOTS = 20_000
_GAP = 10.0  # times the usual spacing
_STANDSTILL = (
    1e-3,
    1e-2,
)  # of the largest speed: slower than the first an axis stands, than the second perhaps
_CERTAIN = 4.0  # standard deviations that noise of the speed does not exceed
_FEW_SAMPLES = 20_000  # tell the scatter of all
_PER_INTERVAL = 8  # instants between knots at which a motion is looked at


@dataclass(frozen=True)
class UnderstoodRecording:
    """The record, the segment that stands for it, and its entries."""

    recording: Recording
    segment: Segment
    entries: tuple[Entry, ...]
    rows: NDArray[np.int64]  # of the samples used
    instants_s: FloatArray
    fits: tuple[
        tuple[float, PeriodicSpline], ...
    ]  # cut-off [Hz] and motion: half of the stated one, itself, twice

    def row_at(self, time_s: float) -> int:
        """Spreadsheet row of the sample at or after an instant of the cycle."""
        return int(self.rows[min(int(np.searchsorted(self.instants_s, time_s)), len(self.rows) - 1)])


def understand_recording(
    raw: RawTable, axis: Axis, problems: ProblemList, has_duty_cycle: bool
) -> UnderstoodRecording | None:
    """Make a closed cycle of the samples.

    Parameters
    ----------
    raw : RawTable
        The table as it stands in the file.
    axis : Axis
        With period, cut-off and what else is said about the record.
    problems : ProblemList
        Takes what is wrong, with row and remedy.
    has_duty_cycle : bool
        Whether the case states segments too.

    Returns
    -------
    UnderstoodRecording or None
        None where a problem was reported.
    """
    if has_duty_cycle:
        problems.report(MEASURED, None, got="a measured cycle beside a duty cycle", allowed="one of the two",
                        remedy="Move one of the tables out of the case.")  # fmt: skip
        return None
    before = len(problems.finished())
    samples = read_samples_of(raw, axis, problems)
    if samples is None or len(problems.finished()) > before and problems.has_errors:
        return None
    rows, values = samples
    t = values["time"] - values["time"][0]
    period = _period(rows, t, values, axis, problems)
    if period is None:
        return None
    kept = t < period * (1.0 - 1e-9)
    used = {key: column[kept] for key, column in values.items()}
    found = _motion(rows[kept], t[kept], used, period, axis, problems)
    if found is None:
        return None
    motion, fits = found
    stretches = int(kept.sum()) + len(motion.coefficients)
    if stretches > EXACT_INTERVALS:
        problems.report(MEASURED, None, got=f"{stretches} stretches between instants",
                        allowed=f"up to {EXACT_INTERVALS} one by one",
                        remedy="Condensed: means, RMS values and losses stay exact, windowed RMS and overload are "
                        "upper bounds; the voltage that a changing current takes is left out, and bus voltage goes "
                        "by 24 parts of the cycle.",
                        severity=NOTE)  # fmt: skip
    understood = _understood(t[kept], used, period, motion, axis, problems)
    return UnderstoodRecording(*understood, rows[kept], t[kept], fits)


def _period(
    rows: NDArray[np.int64], t: FloatArray, values: dict[str, FloatArray], axis: Axis, problems: ProblemList
) -> float | None:
    """Time of the whole cycles that are used."""
    spacing = float(np.median(np.diff(t)))
    span = float(t[-1]) + spacing
    stated = axis.number("measured_period")
    key = next(k for k in ("speed", *EFFORTS, "position") if k in values)
    if np.isfinite(stated):
        if stated > span + 2.0 * spacing:
            problems.report("axis", axis.rows.get("measured_period"), "measured period", got=f"{stated:.6g} s",
                            allowed=f"at most the {span:.6g} s of the record",
                            remedy="Correct the period, or record a whole cycle.")  # fmt: skip
            return None
        return float(stated * max(1.0, np.floor((span + spacing) / stated)))
    signal = values[key]
    if "position" in values:
        signal = values["position"] - (values["position"][-1] - values["position"][0]) * t / t[-1]
    found = find_period(t, signal)
    if np.isfinite(found):
        whole = found * np.floor(span / found * (1.0 + 1e-3))
        problems.report(MEASURED, None, "time", got=f"a cycle that repeats every {found:.6g} s",
                        allowed="one cycle or several",
                        remedy=f"{whole / found:.0f} whole cycles are used; 'measured period' in the axis table "
                        "overrules this.", severity=NOTE)  # fmt: skip
        return float(min(whole, span))
    gap = abs(signal[-1] - signal[0]) / max(float(np.ptp(signal)), 1e-300)
    if gap > 0.1 and np.ptp(signal) > 0.0:
        problems.report(MEASURED, int(rows[-1]), key.replace("_", " "),
                        got=f"a record that neither repeats nor ends where it began ({gap:.0%} of its range "
                        "apart)".replace("%", " %"),
                        allowed="a whole cycle, or several alike",
                        remedy="Cut the record to one cycle, or state 'measured period'.")  # fmt: skip
        return None
    problems.report(MEASURED, None, "time", got="no repetition", allowed="one cycle or several",
                    remedy=f"The whole record of {span:.6g} s is taken as one cycle.", severity=NOTE)  # fmt: skip
    return span


def _motion(
    rows: NDArray[np.int64],
    t: FloatArray,
    values: dict[str, FloatArray],
    period: float,
    axis: Axis,
    problems: ProblemList,
) -> tuple[PeriodicSpline, tuple[tuple[float, PeriodicSpline], ...]] | None:
    """The smoothed motion, and with which cut-offs it was tried."""
    still = PeriodicSpline(period, np.zeros(8), 0.0)
    key = next((k for k in ("position", "speed") if k in values and np.any(values[k] != values[k][0])), None)
    gap, after = largest_gap(t, period)
    usual = float(np.median(np.diff(t)))
    if gap > _GAP * usual:
        problems.report(MEASURED, int(rows[after]), "time", got=f"a gap of {gap:.6g} s before this row",
                        allowed=f"samples about every {usual:.3g} s",
                        remedy="Values are taken as straight across the gap; is that what happened?",
                        severity=WARNING)  # fmt: skip
    if key is None:
        steady = "speed" in values and values["speed"][0] != 0.0 and "position" not in values
        return (
            PeriodicSpline(period, np.zeros(8), float(values["speed"][0]) * period) if steady else still
        ), ()
    cut_off = axis.number("smoothing_cut_off")
    if knots_for(period, cut_off) > _MOST_KNOTS or period / knots_for(period, cut_off) < gap:
        highest = min(0.5 / gap, 0.5 * _MOST_KNOTS / period)
        problems.report("axis", axis.rows.get("smoothing_cut_off"), "smoothing cut-off", got=f"{cut_off:.6g} Hz",
                        allowed=f"at most {highest:.6g} Hz with a longest step of {gap:.3g} s and a cycle of "
                        f"{period:.6g} s",
                        remedy=f"Lower the cut-off, or record more densely (row {int(rows[after])} follows the "
                        "longest step).")  # fmt: skip
        return None
    order = 0 if key == "position" else 1
    drift = _drift(rows, t, values[key], period, order, axis, problems)
    factors = [
        factor
        for factor in (0.5, 1.0, 2.0)
        if period / knots_for(period, factor * cut_off) >= gap
        and knots_for(period, factor * cut_off) < _MOST_KNOTS
    ]
    frequencies = [factor * cut_off for factor in factors]
    fitted = smooth_position(t, values[key], period, frequencies, drift, order)
    fits = tuple(zip(frequencies, fitted, strict=True))
    chosen = fitted[factors.index(1.0)]
    _report_effect(fits, chosen, axis.motion_coordinate, problems)
    return chosen, fits


def _drift(
    rows: NDArray[np.int64],
    t: FloatArray,
    value: FloatArray,
    period: float,
    order: int,
    axis: Axis,
    problems: ProblemList,
) -> float:
    """Way gained in each cycle; nothing where the drift is to be removed."""
    if order == 0:
        tail = value[-1] + (value[-1] - value[-2]) * (period - t[-1]) / (t[-1] - t[-2])
        drift, travel = float(tail - value[0]), float(np.ptp(value))
    else:
        mean = float(np.sum(0.5 * (value[1:] + value[:-1]) * np.diff(t))) + 0.5 * (value[-1] + value[0]) * (
            period - t[-1]
        )
        drift = mean
        way = np.concatenate([[0.0], np.cumsum(0.5 * (value[1:] + value[:-1]) * np.diff(t))])
        travel = float(np.ptp(way))
    if abs(drift) <= 1e-12 * travel:
        return 0.0
    removed = axis.word("remove_drift") == "yes"
    linear = axis.motion_coordinate == "linear"
    shown = f"{drift:.6g} m" if linear else f"{np.degrees(drift):.6g}°"
    part = abs(drift) / max(travel, 1e-300)
    if removed:
        problems.report(MEASURED, int(rows[-1]), got=f"an end {shown} away from the start", allowed="a closed cycle",
                        remedy="The drift is removed evenly over the cycle, as the axis table asks.",
                        severity=NOTE)  # fmt: skip
        return 0.0
    if part > _OPEN or linear:
        problems.report(MEASURED, int(rows[-1]), got=f"an end {shown} away from the start", allowed="a closed cycle",
                        remedy="Taken as an axis that moves on by this with every cycle; 'remove drift' in the axis "
                        "table closes it.", severity=WARNING if linear and part > _OPEN else NOTE)  # fmt: skip
    return drift


def _report_effect(
    fits: tuple[tuple[float, PeriodicSpline], ...],
    chosen: PeriodicSpline,
    coordinate: str,
    problems: ProblemList,
) -> None:
    """Say what the cut-off decides: RMS and peak of the acceleration with half and twice of it."""
    unit = "m/s²" if coordinate == "linear" else "rad/s²"
    parts = []
    for frequency, fit in fits:
        rms, peak = acceleration_figures(fit)
        parts.append(f"{rms:.4g} and {peak:.4g} {unit} at {frequency:g} Hz")
    rms, peak = acceleration_figures(chosen)
    absurd = peak > ABSURD[coordinate == "linear"][0]
    problems.report(MEASURED, None, got="acceleration (RMS and peak) " + "; ".join(parts),
                    allowed="a cut-off above which there is only noise" if not absurd
                    else "an acceleration that an axis can have",
                    remedy="Raise the cut-off while these figures still grow by more than noise explains."
                    if not absurd else "Lower 'smoothing cut-off', or check the units of the columns.",
                    severity=WARNING if absurd else NOTE)  # fmt: skip


def acceleration_figures(motion: PeriodicSpline) -> tuple[float, float]:
    """RMS and peak of the acceleration of a smoothed motion [m/s²]."""
    a = motion.values(between_knots(motion), 2)
    return float(np.sqrt(np.mean(a[:, :-1] ** 2))), float(np.abs(a).max())


def between_knots(motion: PeriodicSpline) -> FloatArray:
    """Instants in each interval between knots of a motion, one row each, both ends included. [s]"""
    step = motion.period_s / len(motion.coefficients)
    return np.asarray(motion.knots_s[:-1, None] + step * np.linspace(0.0, 1.0, _PER_INTERVAL + 1))


def speed_noise(motion: PeriodicSpline, time_s: FloatArray, value: FloatArray, order: int) -> float:
    """Standard deviation of the smoothed speed that the scatter of the samples leaves.

    Parameters
    ----------
    motion : PeriodicSpline
        Fitted to the samples. [-]
    time_s : ndarray, shape (n,)
        Instants of the samples. [s]
    value : ndarray, shape (n,)
        Position [m], or speed [m/s] when `order` is 1. [-]
    order : int
        0 for position, 1 for speed. [-]

    Returns
    -------
    float
        In m/s, or with rad for m. [-]

    Notes
    -----
    White scatter σ of samples Δt apart has the density ``2 σ² Δt`` up to half the sampling frequency; of
    position, ``σ_v² = 2 σ² Δt (2π)² f_c³/3`` passes a cut-off f_c, of speed ``2 σ² Δt f_c``. First principles.
    """
    some = slice(None, None, max(1, len(time_s) // _FEW_SAMPLES))
    apart = value[some] - motion.values(time_s[some], order)
    spacing, cut_off = motion.period_s / len(time_s), 0.5 * len(motion.coefficients) / motion.period_s
    passed = (2.0 * np.pi) ** 2 * cut_off**3 / 3.0 if order == 0 else cut_off
    return float(np.std(apart) * np.sqrt(2.0 * spacing * passed))


def _standstill(
    motion: PeriodicSpline, t: FloatArray, values: dict[str, FloatArray], axis: Axis, problems: ProblemList
) -> NDArray[np.bool_]:
    """Intervals between knots in which the axis stands: what is left of its speed is noise."""
    speed = np.abs(motion.values(between_knots(motion), 1)).max(axis=1)
    threshold = axis.number("standstill_speed")
    if not np.isfinite(threshold):
        noise = (
            speed_noise(motion, t, values["position"], 0)
            if "position" in values
            else (speed_noise(motion, t, values["speed"], 1))
        )
        threshold = float(np.clip(_CERTAIN * noise, *(part * speed.max() for part in _STANDSTILL)))
    stands = speed <= threshold
    if stands.any():
        linear = axis.motion_coordinate == "linear"
        shown = f"{threshold:.3g} m/s" if linear else f"{np.degrees(threshold):.3g}°/s"
        problems.report(MEASURED, None, got=f"{stands.mean() * motion.period_s:.6g} s in which the speed stays below "
                        f"{shown}", allowed="a motion, or a standstill",
                        remedy="Taken as standstill, where friction does not act; 'standstill speed' in the axis "
                        "table overrules this.", severity=NOTE)  # fmt: skip
    return np.asarray(stands)


def _understood(
    t: FloatArray,
    values: dict[str, FloatArray],
    period: float,
    motion: PeriodicSpline,
    axis: Axis,
    problems: ProblemList,
) -> tuple[Recording, Segment, tuple[Entry, ...]]:
    key = next((k for k in EFFORTS if k in values), None)
    kind = {"load_force": RECORDED_EFFORT, "shaft_torque": RECORDED_SHAFT, "current": RECORDED_SHAFT}.get(
        key or "", RECORDED_PROCESS
    )
    time = np.append(t, period) if key or "payload" in values else np.array([0.0, period])
    factor = axis.number("recorded_torque_constant") if key == "current" else 1.0
    effort = factor * _closed(values[key]) if key else np.zeros(len(time))
    payload = _closed(values["payload"]) if "payload" in values else np.empty(0)
    speed_peak = float(np.abs(motion.values(motion.knots_s, 1)).max())
    stands = _standstill(motion, t, values, axis, problems) if speed_peak > 0.0 else np.ones(1, dtype=bool)
    recording = Recording(time, effort, kind, motion, speed_peak == 0.0, speed_peak, stands, payload)
    digest = hashlib.sha256()
    for name in sorted(values):
        digest.update(name.encode())
        digest.update(np.ascontiguousarray(values[name]).data)
    segment = Segment(row=1, name="measured cycle", law="measured", phases=(), start_s=0.0, duration_s=period,
                      payload=float(payload.max(initial=0.0)), process_effort=0.0, brake_closed=False)  # fmt: skip
    entries = (
        Entry(MEASURED, None, "measured cycle", "samples", f"{len(t)}", float(len(t)), "", "stated"),
        Entry(MEASURED, None, "measured cycle", "SHA-256 of the samples", "", digest.hexdigest(), "", "derived",
              "of all columns in SI"),
        Entry(MEASURED, None, "measured cycle", "duration used", "", period, "s", "derived",
              "whole cycles of the record"),
    )  # fmt: skip
    return recording, segment, entries


def _closed(values: FloatArray) -> FloatArray:
    """Samples with the first one once more at the end of the period."""
    return np.append(values, values[0])
