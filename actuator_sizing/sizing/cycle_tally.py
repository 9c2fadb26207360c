"""What is kept of a simulated cycle: sums, peaks, and how each stop settles, from every sample."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.control import LoopSettings
from actuator_sizing.sizing.axis_plant import AxisPlant

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

MOVES = ("segment", "start_s", "available_s", "settling_time_s", "overshoot", "end_error")


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
class Tally:
    """Sums and peaks of a run, and the rows of its series."""

    axis: AxisPlant
    band: float  # settling band in the coordinate of the load; NaN: not judged
    samples: int = 0
    error_peak: float = 0.0
    error_peak_at_s: float = 0.0
    error_square: float = 0.0
    current_saturated: int = 0
    voltage_saturated: int = 0
    current_peak: float = 0.0
    current_square: float = 0.0
    voltage_peak: float = 0.0
    direct_peak: float = math.nan  # of a machine in dq states
    stops: list[_Stop] = field(default_factory=list)
    rows: list[dict[str, FloatArray]] = field(default_factory=list)

    def add(self, seen: Mapping[str, FloatArray], error: FloatArray, time_s: FloatArray) -> None:
        """Take in samples.

        Parameters
        ----------
        seen : mapping of str to ndarray
            What the loop recorded. [-]
        error : ndarray, shape (n,)
            Command minus load in the coordinate of the load. [-]
        time_s : ndarray, shape (n,)
            From the start of the run. [s]
        """
        size = np.abs(error)
        top = int(size.argmax())
        if size[top] > self.error_peak:
            self.error_peak, self.error_peak_at_s = float(size[top]), float(time_s[top])
        self.samples += len(error)
        # Not a product of vectors: that may start threads, which take longer than the sum.
        self.error_square += float(np.einsum("i,i", error, error))
        self.current_square += float(np.einsum("i,i", seen["current"], seen["current"]))
        flags = np.asarray(seen["saturated"], dtype=int)
        if flags.any():
            self.current_saturated += int(np.count_nonzero(flags & 1))
            self.voltage_saturated += int(np.count_nonzero(flags & 2))
        self.current_peak = max(self.current_peak, _largest(seen["current"]))
        voltage = seen["voltage"]
        if "direct_current" in seen:
            voltage = np.hypot(voltage, seen["direct_voltage"])
            self.direct_peak = float(np.fmax(self.direct_peak, _largest(seen["direct_current"])))
        self.voltage_peak = max(self.voltage_peak, _largest(voltage))

    def watch_stop(self, segment: int, time_s: FloatArray, error: FloatArray, start_s: float) -> None:
        """Follow the error through a dwell that comes after a move.

        Parameters
        ----------
        segment : int
            Which segment. [-]
        time_s : ndarray, shape (n,)
            From the start of the run. [s]
        error : ndarray, shape (n,)
            As for `add`. [-]
        start_s : float
            Start of the cycle. [s]
        """
        segments = self.axis.case.segments
        if not self._stands(segment):
            return
        start = start_s + sum(s.duration_s for s in segments[:segment])
        before = (segment - 1) % len(segments)
        if not self.stops or abs(self.stops[-1].start_s - start) > 1e-9 * max(start, 1.0):
            if self._stands(before) or (start == 0.0):
                if not self.stops or start == 0.0:
                    return  # the run starts at rest: there was no move before
                last = self.stops[-1]
                end = last.start_s + last.available_s
                if abs(end - start) <= 1e-9 * max(start, 1.0):
                    last.available_s += segments[segment].duration_s  # one dwell after another
                elif not last.start_s < start < end:
                    return
            else:
                moved = self.axis.model.demand.direction[self.axis.model.demand.segment == before]
                self.stops.append(
                    _Stop(segments[before].name, start, segments[segment].duration_s,
                          float(moved[moved != 0.0][-1]), -math.inf)
                )  # fmt: skip
        stop = self.stops[-1]
        if not math.isnan(self.band):
            outside = np.flatnonzero(np.abs(error) > self.band)
            if len(outside):
                stop.last_outside_s = float(time_s[outside[-1]])
        stop.overshoot = max(stop.overshoot, float((-error * stop.direction).max()))
        stop.end_error = float(error[-1])

    def _stands(self, segment: int) -> bool:
        demand = self.axis.model.demand
        return bool(np.all(demand.direction[demand.segment == segment] == 0.0))

    def series(self) -> pd.DataFrame:
        """The rows kept, one after another."""
        import pandas as pd

        return pd.DataFrame({name: np.concatenate([row[name] for row in self.rows]) for name in self.rows[0]})

    def moves(self, step_s: float) -> pd.DataFrame:
        """Each stop with how it settled.

        Parameters
        ----------
        step_s : float
            Sampling time. [s]
        """
        import pandas as pd

        rows = [
            (stop.segment, stop.start_s, stop.available_s,
             math.nan if math.isnan(self.band) else _settling(stop, step_s), stop.overshoot, stop.end_error)
            for stop in self.stops
        ]  # fmt: skip
        return pd.DataFrame(rows, columns=list(MOVES))

    def quantities(self, moves: pd.DataFrame, settings: LoopSettings) -> dict[str, Any]:
        """What the run answers, by name.

        Parameters
        ----------
        moves : DataFrame
            From `moves`. [-]
        settings : LoopSettings
            The loops. [-]
        """
        h = settings.sample_time_s
        ratio = abs(float(self.axis.commands.at(np.zeros(1), 0)[5, 0]))
        answer: dict[str, Any] = {
            "following_error_peak": self.error_peak,
            "following_error_peak_at_s": self.error_peak_at_s,
            "following_error_rms": math.sqrt(self.error_square / self.samples),
            "current_peak_a": self.current_peak,
            "current_rms_a": math.sqrt(self.current_square / self.samples),
            "direct_current_peak_a": self.direct_peak,
            "voltage_peak_v": self.voltage_peak,
            "current_saturated_s": self.current_saturated * h,
            "voltage_saturated_s": self.voltage_saturated * h,
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


def _largest(values: FloatArray) -> float:
    return max(float(values.max()), -float(values.min()))


def _settling(stop: _Stop, step_s: float) -> float:
    """Last exit from the band after the command stands still; infinite if still outside at the end."""
    if stop.last_outside_s < stop.start_s:
        return 0.0
    if stop.last_outside_s > stop.start_s + stop.available_s - 1.5 * step_s:
        return math.inf
    return stop.last_outside_s + step_s - stop.start_s
