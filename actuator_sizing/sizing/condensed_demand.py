"""A long record in few pieces, whose means, extremes and windows are those of all its samples.

Each of `BLOCKS` parts of the cycle keeps few instants whose means and mean products are those of all its
stretches, so that RMS values, losses and energies stay exact, and the instants that are extreme in a fan of
directions over acceleration, torque and speed are kept besides. What follows the order of time – windows, the
i²t accumulator, heat – goes by the mean products in many more slices of the cycle (`core.record_slices`).
What is lost is the voltage of changing current.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.case.recording import Recording
from actuator_sizing.core.condensing import condense
from actuator_sizing.core.quadrature import lobatto
from actuator_sizing.core.record_slices import SliceSums
from actuator_sizing.sizing.measured_demand import (
    NODES,
    CutStretches,
    cut_at_signs,
    finished,
    joined,
    stretches_between,
)

FloatArray = NDArray[np.float64]

BLOCKS = 24
_SLICES_PER_BLOCK = 85  # at most
_STRETCHES_PER_SLICE = 8  # at least
_GROUPS_PER_KNOT = 64  # of stretches, in which motion hardly changes: only extremes of torque matter there
_DRAWN_PARTS = 20  # of a block, each drawn at its largest and smallest torque
_FEW = 2000  # stretches that tell usual sizes
_SIGNED_SHARES = (-1.0, -0.5, 0.0, 0.5, 1.0)
_SHARES = (0.0, 0.02, 0.05, 0.12, 0.25, 0.5, 1.0)  # of three quantities in the directions of extremes
_MOMENTS = ("motor_acceleration", "shaft_torque", "shaft_speed")
_FIELDS = (
    *_MOMENTS, "position", "speed", "acceleration", "effort", "shaft_acceleration", "inertia", "gravity",
    "friction", "process", "losses",
)  # fmt: skip


_FIRST_FIELD = 4  # column of a row of instants


def condensed_pieces(case: Case, recording: Recording, borders: FloatArray) -> dict[str, Any]:
    """Fields of a `Demand`: constant pieces of condensed instants, extremes, and the slices.

    Parameters
    ----------
    case, recording : Case, Recording
        The axis and its record. [-]
    borders : ndarray, shape (n + 1,)
        Between stretches, in order. [s]

    Returns
    -------
    dict
        Arrays of P pieces, keyed by the fields of `Demand`. [-]
    """
    period = recording.motion.period_s
    per_block = int(np.clip(len(borders) // (BLOCKS * _STRETCHES_PER_SLICE), 1, _SLICES_PER_BLOCK))
    edges = np.linspace(0.0, period, BLOCKS * per_block + 1)
    borders = joined(recording, borders, edges)
    sums = SliceSums(len(edges) - 1)
    group = max(1, len(borders) // (_GROUPS_PER_KNOT * len(recording.motion.coefficients)))
    extremes = _Extremes(_scale(case, recording, borders), group)
    pieces: list[FloatArray] = []  # columns as of `_rows`
    drawn: list[FloatArray] = []
    share = 0.5 * lobatto(NODES)[1]
    ends = np.searchsorted(borders, edges[::per_block] - 1e-3 * edges[1])
    for block, (begin, end) in enumerate(zip(ends[:-1], ends[1:], strict=True)):
        stretches = stretches_between(case, recording, borders[begin : end + 1])
        drawn.append(_drawn_instants(stretches, block))
        points = cut_at_signs(case, recording, stretches)
        length, direction = points.column("duration_s"), points.column("direction")
        flow = points.column("flow").astype(np.int8)
        moments = np.stack([points.column(name) for name in _MOMENTS], axis=-1)  # (S, K, 3)
        middle = points.column("start_s") + 0.5 * length
        sums.add((middle * (len(edges) - 1) / period).astype(np.intp), length, flow, direction, moments)
        kinds = _kinds(flow, direction)
        for kind in np.unique(kinds).tolist():
            mine = np.flatnonzero(kinds == kind)
            flat = moments[mine].reshape(-1, len(_MOMENTS))
            index, weight = condense(flat, (length[mine, None] * share).ravel())
            rows_of = partial(_instants, points, mine, block, kind)
            pieces.append(rows_of(index, weight))
            extremes.offer(flat, kind, rows_of)
    return finished(case, recording, _in_blocks(np.concatenate([*pieces, *extremes.found()]), period)) | {
        "slices": sums.finished(np.diff(edges)),
        "drawn": finished(case, recording, _in_time(np.concatenate(drawn), period)),
    }


def _instants(
    points: CutStretches,
    mine: NDArray[np.intp],
    block: int,
    kind: int,
    index: NDArray[np.intp],
    weight: FloatArray | float = 0.0,
) -> FloatArray:
    """Chosen nodes of chosen stretches."""
    row, node = mine[index // NODES], index % NODES
    first = np.zeros_like(row)
    time = points.at("start_s", row, first) + points.at("duration_s", row, first) * node / (NODES - 1)
    return _rows(weight, time, block, kind, [points.at(name, row, node) for name in _FIELDS])


def _rows(
    weight: FloatArray | float,
    time: FloatArray,
    block: int,
    kind: NDArray[np.intp] | int,
    fields: list[FloatArray],
) -> FloatArray:
    """Instants as rows: duration that each stands for, instant, block, class, then `_FIELDS`."""
    same = np.ones(len(time))
    return np.stack([weight * same, time, block * same, kind * same, *fields], axis=1)


def _kinds(flow: NDArray[np.int8], direction: FloatArray) -> NDArray[np.intp]:
    """Classes in which torque and friction have one sign: direction of power and of motion."""
    return np.asarray(3 * flow.astype(np.intp) + np.sign(direction).astype(np.intp) + 1)


def _drawn_instants(stretches: dict[str, Any], block: int) -> FloatArray:
    """Instants with the largest and the smallest torque of each part of a block, in order, and its first."""
    torque = stretches["shaft_torque"][:, 0]
    edges = np.unique(np.linspace(0, len(torque), _DRAWN_PARTS + 1).astype(np.intp))
    chosen = {0}
    for begin, end in zip(edges[:-1].tolist(), edges[1:].tolist(), strict=True):
        chosen |= {begin + int(torque[begin:end].argmax()), begin + int(torque[begin:end].argmin())}
    row = np.array(sorted(chosen), dtype=np.intp)
    kinds = _kinds(stretches["flow"][row], stretches["direction"][row])
    return _rows(0.0, stretches["start_s"][row], block, kinds, [stretches[name][row, 0] for name in _FIELDS])


def _in_time(rows: FloatArray, period: float) -> dict[str, Any]:
    """Constant pieces from each instant to the next."""
    return _constant_pieces(rows, np.diff(rows[:, 1], append=period))


def _in_blocks(rows: FloatArray, period: float) -> dict[str, Any]:
    """Constant pieces in the order of blocks; within a block by falling power: what the load gives comes last."""
    torque, speed = (rows[:, _FIRST_FIELD + _FIELDS.index(name)] for name in ("shaft_torque", "shaft_speed"))
    rows = rows[np.lexsort((-torque * speed, rows[:, 2]))]
    # An extreme lasts next to nothing here: its share of the means is in the condensed instants already.
    duration = np.maximum(rows[:, 0], 1e-12 * period)
    return _constant_pieces(rows, duration * (period / duration.sum()))


def _constant_pieces(rows: FloatArray, duration: FloatArray) -> dict[str, Any]:
    """Pieces that last as said and keep the instant at which the record holds their values."""
    kind = rows[:, 3].astype(np.intp)
    values = zip(_FIELDS, rows[:, _FIRST_FIELD:].T, strict=True)
    nodes = {name: np.repeat(value[:, None], 2, axis=1) for name, value in values}
    return nodes | {
        "duration_s": duration,
        "start_s": rows[:, 1].copy(),
        "flow": (kind // 3).astype(np.int8),
        "direction": (kind % 3 - 1).astype(float),
    }


class _Extremes:
    """Instants that are extreme in a fan of directions over acceleration, torque and speed, class by class.

    What a motor adds to torque and voltage has the sign of acceleration, torque and speed: directions in
    which all three count alike are laid closely, whichever of them prevails. Powers and reactance go with
    speed times acceleration and torque, which are two more quantities.
    """

    def __init__(self, scale: FloatArray, group: int) -> None:
        near = _directions(_SHARES)
        near = np.concatenate([near, -near, _directions(_SIGNED_SHARES)])
        fan = np.zeros((2 * len(near), 5))
        fan[: len(near), :3] = fan[len(near) :, 2:] = near  # of the three, and of speed and the two products
        self.scale = np.where(scale > 0.0, scale, 1.0)
        self.fan = np.unique(fan, axis=0)
        self.group = group * NODES
        self.high: dict[int, FloatArray] = {}
        self.rows: dict[int, FloatArray] = {}

    def offer(
        self, moments: FloatArray, kind: int, rows_of: Callable[[NDArray[np.intp]], FloatArray]
    ) -> None:
        """Take the points of one class of one block; `rows_of` gives what is to be kept of some of them."""
        index = np.arange(len(moments))
        if self.group > NODES:
            whole = len(moments) // self.group * self.group
            torque = moments[:whole, 1].reshape(-1, self.group)
            first = index[: whole : self.group]
            index = np.concatenate(
                [first + torque.argmax(axis=1), first + torque.argmin(axis=1), index[whole:]]
            )
        sized = moments[index] / self.scale
        score = np.concatenate([sized, sized[:, :2] * sized[:, 2:]], axis=1) @ self.fan.T
        top = score.argmax(axis=0)
        high = score[top, np.arange(len(self.fan))]
        better = high > self.high.get(kind, np.full(len(self.fan), -np.inf))
        if not better.any():
            return
        rows = rows_of(index[top[better]])
        if kind not in self.high:
            self.high[kind], self.rows[kind] = high, rows
            return
        self.high[kind][better], self.rows[kind][better] = high[better], rows

    def found(self) -> list[FloatArray]:
        """Distinct rows, one array per class."""
        return [np.unique(rows, axis=0) for rows in self.rows.values()]


def _directions(shares: Sequence[float]) -> FloatArray:
    """Every combination of shares of which the largest is one, shape (D, 3)."""
    every = np.stack(np.meshgrid(*3 * [shares], indexing="ij"), axis=-1).reshape(-1, 3)
    return np.asarray(every[np.abs(every).max(axis=1) == 1.0])


def _scale(case: Case, recording: Recording, borders: FloatArray) -> FloatArray:
    """Usual sizes of what `_MOMENTS` names, from stretches here and there."""
    step = max(1, len(borders) // _FEW)
    some = np.stack([borders[:-1:step], borders[1::step]], axis=1)
    points = stretches_between(case, recording, some)
    return np.array([np.abs(points[name]).max() for name in _MOMENTS])
