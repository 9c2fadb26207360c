"""Ends of the ratio windows of many motors at once, to rounding: a grid, narrow gaps, then roots."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.sizing.motor_limits import MotorLimits

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

_POINTS = 33  # of the grid of one interval, equally spaced in the logarithm
_BEYOND = 1e-6  # of a ratio: how far outside the closed form the grid begins
_ROUNDING = 2e-13  # of a ratio: width of a bracket at which it is a root
_MOST_TURNS = 80
_GOLDEN = 0.5 * (np.sqrt(5.0) - 1.0)
_HOPELESS, _SAFE = 1.0, 0.2  # a grid this far from its limit does not reach it between two points
_DIPS = 24  # turns of the search for a window between two points of the grid: to 1e-5 of their distance


@dataclass(frozen=True)
class RatioInterval:
    """A closed interval of ratios that keep every limit; an end without a check has no limit."""

    low: float
    high: float
    low_check: str
    high_check: str

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json; None where there is no limit."""
        return {
            "from": self.low if self.low_check else None,
            "to": self.high if self.high_check else None,
            "bounded_below_by": self.low_check or None,
            "bounded_above_by": self.high_check or None,
        }


@dataclass(frozen=True)
class _Courses:
    """Excess over the ratio for many motors, each on the same transmission."""

    limits: MotorLimits
    motors: MotorParameters
    transmission: GearheadParameters

    def at(self, motor: IndexArray, log_ratio: FloatArray) -> tuple[FloatArray, IndexArray]:
        gearheads = self.transmission.take(np.zeros(len(motor), dtype=np.intp))
        gearheads = type(gearheads)(**{**vars(gearheads), "ratio": np.exp(log_ratio)})
        return self.limits.excess(self.motors.take(motor), gearheads)


def search_intervals(
    limits: MotorLimits,
    motors: MotorParameters,
    transmission: GearheadParameters,
    outer: Sequence[Sequence[tuple[float, float]]],
) -> list[tuple[RatioInterval, ...]]:
    """The windows of M motors within given intervals.

    Parameters
    ----------
    limits : MotorLimits
        The checks that bound them.
    motors : MotorParameters
        M motors. [-]
    transmission : GearheadParameters
        One row: losses and inertia. [-]
    outer : sequence of sequences of (float, float)
        For each motor the intervals in which its window lies. [-]

    Returns
    -------
    list of tuple of RatioInterval
        For each motor, ascending. A window or gap narrower than 1e-5 of the distance between two points of the grid
        (a 32nd of the interval in the logarithm) may be missed.
    """
    courses = _Courses(limits, motors, transmission)
    spans = [(m, low, high) for m, parts in enumerate(outer) for low, high in parts]
    found: list[list[RatioInterval]] = [[] for _ in outer]
    if not spans:
        return [tuple(part) for part in found]
    motor = np.array([m for m, _, _ in spans], dtype=np.intp)
    low = np.log([low for _, low, _ in spans]) - _BEYOND
    high = np.log([high for _, _, high in spans]) + _BEYOND
    x = low[:, None] + (high - low)[:, None] * np.linspace(0.0, 1.0, _POINTS)
    flat, check = courses.at(np.repeat(motor, _POINTS), x.ravel())
    excess, check = flat.reshape(x.shape), check.reshape(x.shape)
    grids = _with_turns(courses, motor, x, excess, check)
    brackets = _Brackets()
    for i, (points, values, checks) in enumerate(grids):
        for k in np.flatnonzero((values[1:] <= 0.0) != (values[:-1] <= 0.0)):
            brackets.add(i, int(motor[i]), points[k : k + 2], values[k : k + 2], checks[k : k + 2])
    ends = brackets.solved(courses)
    for i, (points, values, _) in enumerate(grids):
        found[motor[i]] += _intervals(ends.get(i, []), points, values, limits)
    return [tuple(part) for part in found]


def _with_turns(
    courses: _Courses, motor: IndexArray, x: FloatArray, excess: FloatArray, check: IndexArray
) -> list[tuple[FloatArray, FloatArray, IndexArray]]:
    """Each grid with the bottom of every dip and the top of every hump that may cross zero between its points."""
    before, inner, after = excess[:, :-2], excess[:, 1:-1], excess[:, 2:]
    dip = (inner > 0.0) & (inner < _HOPELESS) & (inner <= before) & (inner <= after)
    hump = (inner <= 0.0) & (inner > -_SAFE) & (inner >= before) & (inner >= after)
    row, place = np.nonzero(dip | hump)
    sense = np.where(dip[row, place], 1.0, -1.0)
    points, values, checks = _turns(courses, motor[row], x[row, place], x[row, place + 2], sense)
    grids = []
    for i in range(len(x)):
        mine = row == i
        along = np.concatenate([x[i], points[mine]])
        order = np.argsort(along, kind="stable")
        grids.append(
            (
                along[order],
                np.concatenate([excess[i], values[mine]])[order],
                np.concatenate([check[i], checks[mine]])[order],
            )
        )
    return grids


def _turns(
    courses: _Courses, motor: IndexArray, low: FloatArray, high: FloatArray, sense: FloatArray
) -> tuple[FloatArray, FloatArray, IndexArray]:
    """Where the excess is least (sense 1) or largest (−1) between two points, by the golden section, all at once."""
    count = len(motor)
    if not count:
        return np.empty(0), np.empty(0), np.empty(0, dtype=np.intp)
    low, high = low.copy(), high.copy()
    inner = np.stack([high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)])
    value, check = courses.at(np.tile(motor, 2), inner.ravel())
    values, checks = value.reshape(2, count), check.reshape(2, count)
    for _ in range(_DIPS):
        best = np.min(sense * values, axis=0)
        # Once on the other side of zero, that is all one needs to know.
        open_ = np.flatnonzero(np.where(sense > 0.0, best > 0.0, best >= 0.0))
        if not len(open_):
            break
        left = (sense * values)[0, open_] <= (sense * values)[1, open_]
        to_left, to_right = open_[left], open_[~left]
        high[to_left], inner[1, to_left] = inner[1, to_left], inner[0, to_left]
        values[1, to_left], checks[1, to_left] = values[0, to_left], checks[0, to_left]
        inner[0, to_left] = high[to_left] - _GOLDEN * (high[to_left] - low[to_left])
        low[to_right], inner[0, to_right] = inner[0, to_right], inner[1, to_right]
        values[0, to_right], checks[0, to_right] = values[1, to_right], checks[1, to_right]
        inner[1, to_right] = low[to_right] + _GOLDEN * (high[to_right] - low[to_right])
        fresh = np.where(left, 0, 1)
        values[fresh, open_], checks[fresh, open_] = courses.at(motor[open_], inner[fresh, open_])
    which, each = (sense * values).argmin(axis=0), np.arange(count)
    return inner[which, each], values[which, each], checks[which, each]


class _Brackets:
    """Pairs of ratios of which one passes and one fails, narrowed all at once."""

    def __init__(self) -> None:
        self._rows: list[tuple[int, int, float, float, float, float, int]] = []

    def add(self, span: int, motor: int, x: FloatArray, excess: FloatArray, check: IndexArray) -> None:
        good = 0 if excess[0] <= 0.0 else 1
        bad = 1 - good
        self._rows.append(
            (
                span,
                motor,
                float(x[good]),
                float(x[bad]),
                float(excess[good]),
                float(excess[bad]),
                int(check[bad]),
            )
        )

    def solved(self, courses: _Courses) -> dict[int, list[tuple[float, bool, str]]]:
        """By span: passing end, whether it is a lower end, and what fails beyond it."""
        if not self._rows:
            return {}
        table = np.array([row[2:6] for row in self._rows])
        good, bad, f_good, f_bad = table.T.copy()
        motor = np.array([row[1] for row in self._rows], dtype=np.intp)
        check = np.array([row[6] for row in self._rows], dtype=np.intp)
        stayed = np.zeros(len(good), dtype=int)
        for _ in range(_MOST_TURNS):
            width = bad - good
            open_ = np.flatnonzero(np.abs(width) > _ROUNDING)
            if not len(open_):
                break
            g, b = f_good[open_], f_bad[open_]
            part = np.where(np.abs(stayed[open_]) < 2, -g / (b - g), 0.5)
            least = np.minimum(0.4 * _ROUNDING / np.abs(width[open_]), 0.5)
            x = good[open_] + np.clip(part, least, 1.0 - least) * width[open_]
            value, which = courses.at(motor[open_], x)
            met = value <= 0.0
            at, other = open_[met], open_[~met]
            # Illinois: the weight of an end that stays put is halved.
            f_bad[at] *= np.where(stayed[at] < 0, 0.5, 1.0)
            f_good[other] *= np.where(stayed[other] > 0, 0.5, 1.0)
            good[at], f_good[at] = x[met], value[met]
            bad[other], f_bad[other], check[other] = x[~met], value[~met], which[~met]
            stayed[at] = np.where(stayed[at] <= -2, 0, np.minimum(stayed[at], 0) - 1)
            stayed[other] = np.where(stayed[other] >= 2, 0, np.maximum(stayed[other], 0) + 1)
        ends: dict[int, list[tuple[float, bool, str]]] = {}
        for k, row in enumerate(self._rows):
            key = courses.limits.checks[int(check[k])].key
            ends.setdefault(row[0], []).append((float(np.exp(good[k])), bool(bad[k] < good[k]), key))
        return ends


def _intervals(
    ends: list[tuple[float, bool, str]], x: FloatArray, excess: FloatArray, limits: MotorLimits
) -> list[RatioInterval]:
    """Ends in order to intervals; where the grid itself passes at its border there is no limit."""
    edges = list(ends)
    if excess[0] <= 0.0:
        edges.insert(0, (float(np.exp(x[0])), True, ""))
    if excess[-1] <= 0.0:
        edges.append((float(np.exp(x[-1])), False, ""))
    lows = [edge for edge in edges if edge[1]]
    highs = [edge for edge in edges if not edge[1]]
    return [RatioInterval(a[0], b[0], a[2], b[2]) for a, b in zip(lows, highs, strict=True)]
