"""The duty cycle under the sampled cascade, in pieces so that long runs need little memory."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.control import Cascade, LoopSettings, worth_compiling
from actuator_sizing.sizing.axis_plant import LOAD_ROW, AxisPlant

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

_CHUNK = 65_536  # samples in memory at a time
_ROWS = 20_000  # of the series that is kept


@dataclass(frozen=True)
class Run:
    """What a run gives to the simulation."""

    series: pd.DataFrame
    quantities: Mapping[str, Any]
    moves: pd.DataFrame
    notes: tuple[str, ...] = ()


@dataclass
class _Stop:
    """A standstill after a move, seen while the run goes on."""

    segment: str
    start_s: float
    available_s: float
    direction: float
    last_outside_s: float
    overshoot: float = 0.0
    end_error: float = 0.0


@dataclass
class _Tally:
    """Sums and peaks of a run."""

    samples: int = 0
    error_peak: float = 0.0
    error_peak_at_s: float = 0.0
    error_square: float = 0.0
    current_saturated: int = 0
    voltage_saturated: int = 0
    current_peak: float = 0.0
    current_square: float = 0.0
    voltage_peak: float = 0.0
    stops: list[_Stop] = field(default_factory=list)
    rows: list[dict[str, FloatArray]] = field(default_factory=list)


def run_cycle(axis: AxisPlant, settings: LoopSettings, band: float, cycles: int) -> Run:
    """Run the duty cycle in closed loop.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    settings : LoopSettings
        The loops. [-]
    band : float
        Settling band in the coordinate of the load; NaN: settling is not judged. [-]
    cycles : int
        How many cycles, one after the other. [-]

    Returns
    -------
    Run
        Series thinned to 20 000 rows; errors, peaks and settling from every sample. [-]
    """
    import pandas as pd

    commands, case = axis.commands, axis.case
    samples = math.floor(commands.cycle_s * cycles / settings.sample_time_s)
    stride = max(1, math.ceil(samples / _ROWS))
    first = commands.at(np.zeros(1), 0)[:, 0]
    cascade = Cascade(
        axis.plant(case.segments[0]), settings, angle_rad=float(first[0]), speed_rad_s=float(first[1]),
        load_torque_nm=float(first[3]), is_compiled=worth_compiling(samples),
    )  # fmt: skip
    tally = _Tally()
    current_segment = 0
    for number, segment, k in _chunks(axis, settings.sample_time_s, cycles, samples):
        if segment != current_segment:
            cascade.change(axis.plant(case.segments[segment]))
            current_segment = segment
        _advance(axis, cascade, tally, number, segment, k, band, stride)
    series = pd.DataFrame({name: np.concatenate([row[name] for row in tally.rows]) for name in tally.rows[0]})
    moves = pd.DataFrame(
        [
            {
                "segment": stop.segment,
                "start_s": stop.start_s,
                "available_s": stop.available_s,
                "settling_time_s": _settling(stop, settings.sample_time_s) if band == band else math.nan,
                "overshoot": stop.overshoot,
                "end_error": stop.end_error,
            }
            for stop in tally.stops
        ],
        columns=["segment", "start_s", "available_s", "settling_time_s", "overshoot", "end_error"],
    )
    return Run(series, _quantities(tally, moves, settings, axis), moves, _notes(axis, cycles, stride))


def _settling(stop: _Stop, step_s: float) -> float:
    """Last exit from the band after the command stands still; infinite if still outside at the end."""
    if stop.last_outside_s < stop.start_s:
        return 0.0
    if stop.last_outside_s > stop.start_s + stop.available_s - 1.5 * step_s:
        return math.inf
    return stop.last_outside_s + step_s - stop.start_s


def _chunks(
    axis: AxisPlant, step_s: float, cycles: int, samples: int
) -> Iterator[tuple[int, int, NDArray[np.int64]]]:
    """Number of the cycle, segment, and the samples in it."""
    cycle_s = axis.commands.cycle_s
    ends = np.cumsum([segment.duration_s for segment in axis.case.segments])
    k = 0
    for number in range(cycles):
        for segment, end in enumerate(ends):
            border = number * cycle_s + float(end)
            last = (
                samples if number == cycles - 1 and segment == len(ends) - 1 else math.ceil(border / step_s)
            )
            while k < min(last, samples):
                count = min(last - k, _CHUNK, samples - k)
                yield number, segment, np.arange(k, k + count)
                k += count


def _advance(
    axis: AxisPlant, cascade: Cascade, tally: _Tally, number: int, segment: int, k: NDArray[np.int64],
    band: float, stride: int,
) -> None:  # fmt: skip
    commands, step = axis.commands, cascade.settings.sample_time_s
    time = np.asarray(k * step, dtype=float)
    within = np.asarray(time - number * commands.cycle_s)
    angle, speed, current, _, position, ratio = commands.at(within, segment)
    load = commands.at(within + 0.5 * step, segment, LOAD_ROW)[0]
    angle = angle + number * commands.angle_travel_rad
    forward = current * cascade.settings.torque_feedforward_ratio
    seen = cascade.advance(angle, speed, forward, load)
    error = (angle - (seen["motor_angle"] - seen["twist"])) / ratio
    _add(tally, seen, error, time)
    _watch_stop(axis, tally, segment, time, error, within, band)
    # Thinned by the number of the sample, so that chunks fit together.
    keep = np.flatnonzero(k % stride == 0)
    tally.rows.append(
        {
            "time_s": time[keep],
            "segment": np.full(len(keep), segment),
            "position": position[keep],
            "following_error": error[keep],
            "commanded_speed_rad_s": speed[keep],
            "motor_speed_rad_s": seen["motor_speed"][keep],
            "commanded_angle_rad": angle[keep],
            "motor_angle_rad": seen["motor_angle"][keep],
            "load_angle_rad": (seen["motor_angle"] - seen["twist"])[keep],
            "current_reference_a": seen["current_reference"][keep],
            "current_a": seen["current"][keep],
            "voltage_v": seen["voltage"][keep],
            "saturated": seen["saturated"][keep],
        }
    )


def _add(tally: _Tally, seen: Mapping[str, FloatArray], error: FloatArray, time: FloatArray) -> None:
    size = np.abs(error)
    top = int(size.argmax())
    if size[top] > tally.error_peak:
        tally.error_peak, tally.error_peak_at_s = float(size[top]), float(time[top])
    tally.samples += len(error)
    tally.error_square += float(error @ error)
    tally.current_square += float(seen["current"] @ seen["current"])
    tally.current_saturated += int(np.count_nonzero(np.asarray(seen["saturated"], dtype=int) & 1))
    tally.voltage_saturated += int(np.count_nonzero(np.asarray(seen["saturated"], dtype=int) & 2))
    tally.current_peak = max(tally.current_peak, float(np.abs(seen["current"]).max()))
    tally.voltage_peak = max(tally.voltage_peak, float(np.abs(seen["voltage"]).max()))


def _watch_stop(
    axis: AxisPlant, tally: _Tally, segment: int, time: FloatArray, error: FloatArray, within: FloatArray,
    band: float,
) -> None:  # fmt: skip
    """Follow the error through a dwell that comes after a move."""
    segments = axis.case.segments
    if not _stands(axis, segment):
        return
    start = float(time[0] - within[0]) + sum(s.duration_s for s in segments[:segment])
    before = segment - 1
    if not tally.stops or abs(tally.stops[-1].start_s - start) > 1e-9 * max(start, 1.0):
        if _stands(axis, before % len(segments)) or (start == 0.0):
            if not tally.stops or start == 0.0:
                return  # the run starts at rest: there was no move before
            last = tally.stops[-1]
            if abs(last.start_s + last.available_s - start) > 1e-9 * max(start, 1.0):
                return
            last.available_s += segments[segment].duration_s  # one dwell after another
            start = last.start_s
        else:
            moved = axis.model.demand.direction[axis.model.demand.segment == before % len(segments)]
            tally.stops.append(
                _Stop(segments[before % len(segments)].name, start, segments[segment].duration_s,
                      float(moved[moved != 0.0][-1]), -math.inf)
            )  # fmt: skip
    stop = tally.stops[-1]
    if band == band:
        outside = np.flatnonzero(np.abs(error) > band)
        if len(outside):
            stop.last_outside_s = float(time[outside[-1]])
    stop.overshoot = max(stop.overshoot, float((-error * stop.direction).max()))
    stop.end_error = float(error[-1])


def _stands(axis: AxisPlant, segment: int) -> bool:
    demand = axis.model.demand
    return bool(np.all(demand.direction[demand.segment == segment] == 0.0))


def _quantities(
    tally: _Tally, moves: pd.DataFrame, settings: LoopSettings, axis: AxisPlant
) -> dict[str, Any]:
    h = settings.sample_time_s
    first = axis.commands.at(np.zeros(1), 0)
    ratio = abs(float(first[5, 0]))
    answer: dict[str, Any] = {
        "following_error_peak": tally.error_peak,
        "following_error_peak_at_s": tally.error_peak_at_s,
        "following_error_rms": math.sqrt(tally.error_square / tally.samples),
        "current_peak_a": tally.current_peak,
        "current_rms_a": math.sqrt(tally.current_square / tally.samples),
        "voltage_peak_v": tally.voltage_peak,
        "current_saturated_s": tally.current_saturated * h,
        "voltage_saturated_s": tally.voltage_saturated * h,
        "overshoot": float(moves["overshoot"].max()) if len(moves) else math.nan,
        "settling_time_s": math.nan,
        "settling_available_s": math.nan,
        "settling_at_s": math.nan,
        "encoder_step_at_load": settings.encoder_step_rad / ratio,
    }
    judged = moves.dropna(subset=["settling_time_s"])
    if len(judged):
        worst = (judged["settling_time_s"] / judged["available_s"]).idxmax()
        answer["settling_time_s"] = float(judged.loc[worst, "settling_time_s"])
        answer["settling_available_s"] = float(judged.loc[worst, "available_s"])
        answer["settling_at_s"] = float(judged.loc[worst, "start_s"])
    return answer


def _notes(axis: AxisPlant, cycles: int, stride: int) -> tuple[str, ...]:
    notes = [f"{cycles} cycle{'s' if cycles > 1 else ''} from equilibrium at the start of the cycle"]
    if stride > 1:
        notes.append(f"series: every {stride}th sample; errors and peaks are those of all samples")
    if any(segment.brake_closed for segment in axis.case.segments):
        notes.append("a closed brake takes the external load off the motor; its clamping is not modelled")
    return tuple(notes)
