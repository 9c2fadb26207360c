"""The `measured` table: samples checked, period found, motion smoothed, and what the smoothing decides."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.axis import Axis
from actuator_sizing.case.headings import understand_headings
from actuator_sizing.case.model import Entry, Segment
from actuator_sizing.case.parsing import parse_table, report_empty_cells
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.recording import (
    EXACT_INTERVALS,
    RECORDED_EFFORT,
    RECORDED_PROCESS,
    RECORDED_SHAFT,
    Recording,
)
from actuator_sizing.case.sample_files import NumberTable
from actuator_sizing.case.tables import TABLES
from actuator_sizing.core.measured import (
    PeriodicSpline,
    find_period,
    knots_for,
    largest_gap,
    smooth_position,
)
from actuator_sizing.errors import NOTE, WARNING

FloatArray = NDArray[np.float64]

_TABLE = "measured"
_EFFORTS = ("process_force", "load_force", "shaft_torque", "current")
_FEWEST = 16  # samples that can be called a cycle
_OPEN = 0.02  # part of the range by which the ends of one cycle may differ unnoticed
_MOST_KNOTS = 20_000
_GAP = 10.0  # times the usual spacing


@dataclass(frozen=True)
class UnderstoodRecording:
    """The record, the segment that stands for it, and its entries."""

    recording: Recording
    segment: Segment
    entries: tuple[Entry, ...]


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
        problems.report(_TABLE, None, got="a measured cycle beside a duty cycle", allowed="one of the two",
                        remedy="Move one of the tables out of the case.")  # fmt: skip
        return None
    before = len(problems.finished())
    samples = _samples(raw, axis.coordinate, problems)
    if samples is None or len(problems.finished()) > before and problems.has_errors:
        return None
    rows, values = samples
    if not _in_order(rows, values["time"], problems) or not _columns_fit(values, axis, problems):
        return None
    t = values["time"] - values["time"][0]
    period = _period(rows, t, values, axis, problems)
    if period is None:
        return None
    kept = t < period * (1.0 - 1e-9)
    motion = _motion(rows[kept], t[kept], {k: v[kept] for k, v in values.items()}, period, axis, problems)
    if motion is None:
        return None
    stretches = int(kept.sum()) + len(motion.coefficients)
    if stretches > EXACT_INTERVALS:
        problems.report(_TABLE, None, got=f"{stretches} stretches between instants",
                        allowed=f"up to {EXACT_INTERVALS} one by one",
                        remedy="Condensed: means, RMS values and losses stay exact; the order within a short part of "
                        "the cycle, and the voltage that a changing current takes, are left out.",
                        severity=NOTE)  # fmt: skip
    return _understood(t[kept], {k: v[kept] for k, v in values.items()}, period, motion, axis)


def _samples(
    raw: RawTable, coordinate: str, problems: ProblemList
) -> tuple[NDArray[np.int64], dict[str, FloatArray]] | None:
    table = TABLES[_TABLE]
    values: dict[str, FloatArray] = {}
    if isinstance(raw, NumberTable):
        headings = understand_headings(raw, table, problems, coordinate)
        for key, heading in headings.known.items():
            if heading.unit is not None:
                values[key] = raw.numbers[heading.index] * heading.unit.factor + heading.unit.offset
    else:
        parsed = parse_table(raw, table, problems, coordinate)
        for key in parsed.headings:
            column = table.find(key) if key in [c.key for c in table.columns] else None
            if column is not None and column.is_number:
                values[key] = parsed.number(key)
                report_empty_cells(parsed, column)
    if "time" not in values:
        if not problems.mentions(_TABLE):
            problems.report(_TABLE, None, "time", got="no such column", allowed="a required column",
                            remedy="Add a column 'time [s]'.")  # fmt: skip
        return None
    if problems.has_errors and problems.mentions(_TABLE):
        return None
    if len(raw) < _FEWEST:
        problems.report(_TABLE, None, got=f"{len(raw)} samples", allowed=f"at least {_FEWEST}",
                        remedy="State so short a cycle as segments of a duty cycle.")  # fmt: skip
        return None
    return raw.rows, values


def _in_order(rows: NDArray[np.int64], t: FloatArray, problems: ProblemList) -> bool:
    step = np.diff(t)
    wrong = np.flatnonzero(~(step > 0.0))
    for which, name, remedy in (
        (wrong[step[wrong] == 0.0], "repeats the time of the row before", "Remove one of the two rows."),
        (wrong[step[wrong] < 0.0], "goes back in time", "Sort the rows by time."),
    ):
        if len(which):
            first = int(which[0]) + 1
            problems.report(_TABLE, int(rows[first]), "time",
                            got=f"{t[first]:.9g} s after {t[first - 1]:.9g} s: it {name}"
                            + (f" ({len(which)} such rows)" if len(which) > 1 else ""),
                            allowed="times that rise from row to row", remedy=remedy)  # fmt: skip
    return not len(wrong)


def _columns_fit(values: dict[str, FloatArray], axis: Axis, problems: ProblemList) -> bool:
    efforts = [key for key in _EFFORTS if key in values]
    motions = [key for key in ("position", "speed") if key in values]
    got = allowed = ""
    if len(efforts) > 1:
        got, allowed = " and ".join(efforts).replace("_", " "), "one column of effort"
    elif not efforts and not motions:
        got, allowed = "times only", "a motion (position or speed), an effort, or both"
    elif "current" in efforts and not np.isfinite(axis.number("recorded_torque_constant")):
        got, allowed = "a current", "'recorded torque constant' in the axis table, which makes it a torque"
    elif motions and not np.isfinite(axis.number("smoothing_cut_off")):
        got, allowed = "a measured motion", "'smoothing cut-off' in the axis table"
    if got:
        problems.report(_TABLE, None, got=got, allowed=allowed,
                        remedy="A cut-off of ten times the frequency of the moves is a start; the report says "
                        "what it decides." if "cut-off" in allowed else "Add what is missing or remove a "
                        "column.")  # fmt: skip
        return False
    names: list[str] = list(motions)
    for key in names:
        if np.ptp(values[key]) == 0.0 and (key == "position" or values[key][0] == 0.0):
            problems.report(_TABLE, None, key, got="the same value in every row", allowed="a signal that changes",
                            remedy="Taken as an axis at rest; is the sensor connected?",
                            severity=WARNING)  # fmt: skip
    for key in efforts:
        if np.ptp(values[key]) == 0.0:
            problems.report(_TABLE, None, key.replace("_", " "), got="the same value in every row",
                            allowed="a signal that changes",
                            remedy="Taken as constant; is the sensor connected?", severity=WARNING)  # fmt: skip
    return True


def _period(
    rows: NDArray[np.int64], t: FloatArray, values: dict[str, FloatArray], axis: Axis, problems: ProblemList
) -> float | None:
    """Time of the whole cycles that are used."""
    spacing = float(np.median(np.diff(t)))
    span = float(t[-1]) + spacing
    stated = axis.number("measured_period")
    key = next(k for k in ("speed", *_EFFORTS, "position") if k in values)
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
        problems.report(_TABLE, None, "time", got=f"a cycle that repeats every {found:.6g} s",
                        allowed="one cycle or several",
                        remedy=f"{whole / found:.0f} whole cycles are used; 'measured period' in the axis table "
                        "overrules this.", severity=NOTE)  # fmt: skip
        return float(min(whole, span))
    gap = abs(signal[-1] - signal[0]) / max(float(np.ptp(signal)), 1e-300)
    if gap > 0.1 and np.ptp(signal) > 0.0:
        problems.report(_TABLE, int(rows[-1]), key.replace("_", " "),
                        got=f"a record that neither repeats nor ends where it began ({gap:.0%} of its range "
                        "apart)".replace("%", " %"),
                        allowed="a whole cycle, or several alike",
                        remedy="Cut the record to one cycle, or state 'measured period'.")  # fmt: skip
        return None
    problems.report(_TABLE, None, "time", got="no repetition", allowed="one cycle or several",
                    remedy=f"The whole record of {span:.6g} s is taken as one cycle.", severity=NOTE)  # fmt: skip
    return span


def _motion(
    rows: NDArray[np.int64],
    t: FloatArray,
    values: dict[str, FloatArray],
    period: float,
    axis: Axis,
    problems: ProblemList,
) -> PeriodicSpline | None:
    still = PeriodicSpline(period, np.zeros(8), 0.0)
    key = next((k for k in ("position", "speed") if k in values and np.any(values[k] != values[k][0])), None)
    gap, after = largest_gap(t, period)
    usual = float(np.median(np.diff(t)))
    if gap > _GAP * usual:
        problems.report(_TABLE, int(rows[after]), "time", got=f"a gap of {gap:.6g} s before this row",
                        allowed=f"samples about every {usual:.3g} s",
                        remedy="Values are taken as straight across the gap; is that what happened?",
                        severity=WARNING)  # fmt: skip
    if key is None:
        steady = "speed" in values and values["speed"][0] != 0.0 and "position" not in values
        return PeriodicSpline(period, np.zeros(8), float(values["speed"][0]) * period) if steady else still
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
    fits = {
        factor: smooth_position(t, values[key], period, factor * cut_off, drift, order)
        for factor in (0.5, 1.0, 2.0)
        if period / knots_for(period, factor * cut_off) >= gap
        and knots_for(period, factor * cut_off) < _MOST_KNOTS
    }
    _report_effect(fits, cut_off, axis.coordinate, problems)
    return fits[1.0]


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
    linear = axis.coordinate == "linear"
    shown = f"{drift:.6g} m" if linear else f"{np.degrees(drift):.6g}°"
    part = abs(drift) / max(travel, 1e-300)
    if removed:
        problems.report(_TABLE, int(rows[-1]), got=f"an end {shown} away from the start", allowed="a closed cycle",
                        remedy="The drift is removed evenly over the cycle, as the axis table asks.",
                        severity=NOTE)  # fmt: skip
        return 0.0
    if part > _OPEN or linear:
        problems.report(_TABLE, int(rows[-1]), got=f"an end {shown} away from the start", allowed="a closed cycle",
                        remedy="Taken as an axis that moves on by this with every cycle; 'remove drift' in the axis "
                        "table closes it.", severity=WARNING if linear and part > _OPEN else NOTE)  # fmt: skip
    return drift


def _report_effect(
    fits: dict[float, PeriodicSpline], cut_off: float, coordinate: str, problems: ProblemList
) -> None:
    """Say what the cut-off decides: RMS and peak of the acceleration with half and twice of it."""
    unit = "m/s²" if coordinate == "linear" else "rad/s²"
    parts = []
    for factor, fit in fits.items():
        rms, peak = acceleration_figures(fit)
        parts.append(f"{rms:.4g} and {peak:.4g} {unit} at {factor * cut_off:g} Hz")
    rms, peak = acceleration_figures(fits[1.0])
    absurd = peak > (1e5 if coordinate == "linear" else 1e7)
    problems.report(_TABLE, None, got="acceleration (RMS and peak) " + "; ".join(parts),
                    allowed="a cut-off above which there is only noise" if not absurd
                    else "an acceleration that an axis can have",
                    remedy="Raise the cut-off while these figures still grow by more than noise explains."
                    if not absurd else "Lower 'smoothing cut-off', or check the units of the columns.",
                    severity=WARNING if absurd else NOTE)  # fmt: skip


def acceleration_figures(motion: PeriodicSpline) -> tuple[float, float]:
    """RMS and peak of the acceleration of a smoothed motion [m/s²]."""
    per = 8
    t = np.linspace(0.0, motion.period_s, per * len(motion.coefficients) + 1)
    a = motion.values(t, 2)
    return float(np.sqrt(np.mean(a[:-1] ** 2))), float(np.abs(a).max())


def _understood(
    t: FloatArray, values: dict[str, FloatArray], period: float, motion: PeriodicSpline, axis: Axis
) -> UnderstoodRecording:
    key = next((k for k in _EFFORTS if k in values), None)
    kind = {"load_force": RECORDED_EFFORT, "shaft_torque": RECORDED_SHAFT, "current": RECORDED_SHAFT}.get(
        key or "", RECORDED_PROCESS
    )
    time, effort = np.array([0.0, period]), np.zeros(2)
    if key is not None:
        factor = axis.number("recorded_torque_constant") if key == "current" else 1.0
        time, effort = np.append(t, period), factor * np.append(values[key], values[key][0])
    speed_peak = float(np.abs(motion.values(motion.knots_s, 1)).max())
    recording = Recording(time, effort, kind, motion, speed_peak == 0.0, speed_peak)
    digest = hashlib.sha256()
    for name in sorted(values):
        digest.update(name.encode() + np.ascontiguousarray(values[name]).tobytes())
    segment = Segment(row=1, name="measured cycle", law="measured", phases=(), start_s=0.0, duration_s=period,
                      payload=0.0, process_effort=0.0, brake_closed=False)  # fmt: skip
    entries = (
        Entry(_TABLE, None, "measured cycle", "samples", f"{len(t)}", float(len(t)), "", "stated"),
        Entry(_TABLE, None, "measured cycle", "SHA-256 of the samples", "", digest.hexdigest(), "", "derived",
              "of all columns in SI"),
        Entry(_TABLE, None, "measured cycle", "duration used", "", period, "s", "derived",
              "whole cycles of the record"),
    )  # fmt: skip
    return UnderstoodRecording(recording, segment, entries)
