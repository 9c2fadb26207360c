"""The duty cycle under the sampled cascade, in pieces so that long runs need little memory."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.control import Cascade, LoopSettings, worth_compiling
from actuator_sizing.core.following import WORTH_A_STRETCH, Follower, has_lasting_modes, lag_of
from actuator_sizing.sizing.axis_plant import AxisPlant
from actuator_sizing.sizing.cycle_tally import Tally
from actuator_sizing.sizing.loop_commands import LOAD_ROW

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


@dataclass(frozen=True)
class _Span:
    """Samples one after another within one segment; of one piece where that is long enough for a stretch."""

    cycle: int
    segment: int
    piece: int  # −1: several, or too short
    first: int
    count: int


def run_cycle(axis: AxisPlant, settings: LoopSettings, band: float, cycles: int, rows: int = _ROWS) -> Run:
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
    rows : int
        How many rows of the series are kept. [-]

    Returns
    -------
    Run
        Series thinned to its rows; errors, peaks and settling from every sample. [-]
    """
    commands, case = axis.commands, axis.case
    samples = math.floor(commands.cycle_s * cycles / settings.sample_time_s)
    stride = max(1, math.ceil(samples / rows))
    first = commands.at(np.zeros(1), 0)[:, 0]
    follows = has_lasting_modes(settings)
    cascade = Cascade(
        axis.plant(case.segments[0]), settings, angle_rad=float(first[0]), speed_rad_s=float(first[1]),
        load_torque_nm=float(first[3]), is_compiled=not follows and worth_compiling(samples),
    )  # fmt: skip
    runner = _Runner(axis, cascade, Tally(axis, band), stride)
    current_segment = 0
    for span in _spans(
        axis, settings.sample_time_s, cycles, samples, WORTH_A_STRETCH if follows else samples + 1
    ):
        if span.segment != current_segment:
            cascade.change(axis.plant(case.segments[span.segment]))
            current_segment = span.segment
        runner.advance(span)
    tally = runner.tally
    moves = tally.moves(settings.sample_time_s)
    return Run(
        tally.series(), tally.quantities(moves, settings), moves, _notes(axis, settings, cycles, stride)
    )


def _spans(
    axis: AxisPlant, step_s: float, cycles: int, samples: int, worth: int
) -> Iterator[_Span]:  # fmt: skip
    """All samples in order."""
    commands = axis.commands
    for number in range(cycles):
        begin = number * commands.cycle_s
        # The load acts as in the middle of a sample: the last one of a piece may belong to the next.
        starts = np.ceil((begin + commands.start_s) / step_s - 1e-9).astype(int)
        ends = (
            np.floor((begin + commands.start_s + commands.duration_s) / step_s - 0.5 + 1e-9).astype(int) + 1
        )
        k = math.ceil(begin / step_s - 1e-9)
        waiting = k
        borders = [*np.flatnonzero(np.diff(commands.segment)) + 1, len(starts)]
        last_of_cycle = (
            samples if number == cycles - 1 else math.ceil((begin + commands.cycle_s) / step_s - 1e-9)
        )
        piece = 0
        for border in borders:
            segment = int(commands.segment[piece])
            end = min(int(starts[border]) if border < len(starts) else last_of_cycle, samples)
            waiting = k
            for p in range(piece, border):
                low, high = max(int(starts[p]), k), min(int(ends[p]), end)
                if high - low < worth:
                    continue
                yield from _parts(number, segment, -1, waiting, low)
                yield from _parts(number, segment, p, low, high)
                waiting = high
            yield from _parts(number, segment, -1, waiting, end)
            k, piece = max(end, k), border


def _parts(cycle: int, segment: int, piece: int, first: int, end: int) -> Iterator[_Span]:
    """A span in parts that fit into memory."""
    for start in range(first, end, _CHUNK):
        yield _Span(cycle, segment, piece, start, min(_CHUNK, end - start))


class _Runner:
    """Takes the loops over one span after another and keeps what is asked for."""

    def __init__(self, axis: AxisPlant, cascade: Cascade, tally: Tally, stride: int) -> None:
        self.axis, self.cascade, self.tally, self.stride = axis, cascade, tally, stride
        self._follower = Follower(cascade)
        self._inputs: dict[int, FloatArray] = {}

    def advance(self, span: _Span) -> None:
        """Run over one span."""
        commands, step = self.axis.commands, self.cascade.settings.sample_time_s
        time = np.asarray(np.arange(span.first, span.first + span.count) * step, dtype=float)
        begin = span.cycle * commands.cycle_s
        # Thinned by the number of the sample, so that spans fit together.
        keep = np.arange(-span.first % self.stride, span.count, self.stride)
        if span.piece < 0:
            seen, lag, shown = self._through_the_loop(span, time - begin, keep)
        else:
            seen = self._along_the_piece(span, float(time[0]) - begin)
            lag, shown = seen["lag"], commands.at(time[keep] - begin, span.segment)
        error = lag / self._ratio(span, time - begin)
        self.tally.add(seen, error, time)
        self.tally.watch_stop(span.segment, time, error, begin)
        direct = {
            column: seen[name][keep]
            for name, column in (
                ("direct_current", "direct_current_a"),
                ("direct_voltage", "direct_voltage_v"),
            )
            if name in seen
        }
        self.tally.rows.append(
            {
                "time_s": time[keep],
                "segment": np.full(len(keep), span.segment),
                "position": shown[4],
                "following_error": error[keep],
                "commanded_speed_rad_s": shown[1],
                "motor_speed_rad_s": seen["motor_speed"][keep],
                "commanded_angle_rad": shown[0] + span.cycle * commands.angle_travel_rad,
                "motor_angle_rad": seen["motor_angle"][keep],
                "load_angle_rad": (seen["motor_angle"] - seen["twist"])[keep],
                "current_reference_a": seen["current_reference"][keep],
                "current_a": seen["current"][keep],
                "voltage_v": seen["voltage"][keep],
                "saturated": seen["saturated"][keep],
                **direct,
            }
        )

    def _through_the_loop(
        self, span: _Span, within_s: FloatArray, keep: NDArray[np.intp]
    ) -> tuple[Mapping[str, FloatArray], FloatArray, FloatArray]:
        commands, settings = self.axis.commands, self.cascade.settings
        planned = commands.at(within_s, span.segment)
        load = commands.at(within_s + 0.5 * settings.sample_time_s, span.segment, LOAD_ROW)[0]
        angle = planned[0] + span.cycle * commands.angle_travel_rad
        forward = planned[2] * settings.torque_feedforward_ratio
        seen = self.cascade.advance(angle, planned[1], forward, load)
        return seen, lag_of(angle, seen), planned[:, keep]

    def _along_the_piece(self, span: _Span, first_s: float) -> Mapping[str, FloatArray]:
        commands, settings = self.axis.commands, self.cascade.settings
        if span.piece not in self._inputs:
            self._inputs[span.piece] = commands.inputs(
                span.piece, settings.sample_time_s, settings.torque_feedforward_ratio
            )
        inputs = self._inputs[span.piece].copy()
        inputs[0, 0] += span.cycle * commands.angle_travel_rad
        start = float(commands.argument(span.piece, np.array([first_s]))[0])
        step = 2.0 * settings.sample_time_s / float(commands.duration_s[span.piece])
        return self._follower.follow(inputs, start, step, span.count)

    def _ratio(self, span: _Span, within_s: FloatArray) -> FloatArray:
        """Motor angle per unit of the load's coordinate."""
        commands = self.axis.commands
        if commands.has_constant_ratio:
            return np.asarray(commands.series[5, :1, 0])
        return np.asarray(commands.at(within_s, span.segment, slice(5, 6))[0])


def _notes(axis: AxisPlant, settings: LoopSettings, cycles: int, stride: int) -> tuple[str, ...]:
    notes = [f"{cycles} cycle{'s' if cycles > 1 else ''} from equilibrium at the start of the cycle"]
    if stride > 1:
        notes.append(f"series: every {stride}th sample; errors and peaks are those of all samples")
    if any(segment.brake_closed for segment in axis.case.segments):
        notes.append("a closed brake takes the external load off the motor; its clamping is not modelled")
    return tuple(notes)
