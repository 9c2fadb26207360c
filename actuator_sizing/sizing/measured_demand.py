"""Demand of a recorded cycle: the effort straight between its samples, the motion a spline.

Up to `EXACT_INTERVALS` stretches stay pieces of their own. A longer record is condensed: each 24th part of the
cycle keeps few instants whose means and mean products are those of all its samples, so that RMS values,
losses and energies stay exact, and the instants that are extreme in a fan of directions over acceleration,
torque and speed are kept besides. What is lost is the order of the instants inside such a part, and the
voltage of changing current.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.case.recording import EXACT_INTERVALS, RECORDED_EFFORT, RECORDED_SHAFT, Recording
from actuator_sizing.core.condensing import condense
from actuator_sizing.core.quadrature import lobatto
from actuator_sizing.core.transmission import BACK_DRIVING, MOTORING, STANDSTILL, stage_factor

FloatArray = NDArray[np.float64]

NODES = 3  # straight efforts: their squares are exact, products with the smooth motion to fourth order
BLOCKS = 24
_GROUP = 32  # stretches of which only the largest and the smallest torque can be extreme
_FAN = 5  # directions of each of three axes in which extremes are looked for


def recorded_pieces(case: Case, recording: Recording, *, in_order: bool = False) -> dict[str, Any]:
    """Fields of a `Demand` for a recorded cycle.

    Parameters
    ----------
    case : Case
        The axis. [-]
    recording : Recording
        The record as understood. [-]
    in_order : bool
        Never condense.

    Returns
    -------
    dict
        Arrays of P pieces with K nodes, keyed by the fields of `Demand`. [-]
    """
    borders = np.unique(np.concatenate([recording.time_s, recording.motion.knots_s]))
    borders = borders[np.diff(borders, prepend=-1.0) > 1e-12 * recording.motion.period_s]
    borders[0], borders[-1] = 0.0, recording.motion.period_s
    if in_order or len(borders) <= EXACT_INTERVALS:
        return _finished(_nodes(case, recording, _split(case, recording, borders)))
    return _condensed(case, recording, borders)


def _condensed(case: Case, recording: Recording, borders: FloatArray) -> dict[str, Any]:
    """Constant pieces: condensed instants of each block, and the extremes of the whole cycle."""
    rows, weights, blocks, classes = [], [], [], []
    extremes = _Extremes()
    period = recording.motion.period_s
    edges = np.searchsorted(borders, np.linspace(0.0, period, BLOCKS + 1)[1:-1])
    weight_of_node = 0.5 * lobatto(NODES)[1]
    for block, (begin, end) in enumerate(zip([0, *edges], [*edges, len(borders) - 1], strict=True)):
        if begin == end:
            continue
        points = _cut(case, recording, _nodes(case, recording, borders[begin : end + 1]))
        kind = 3 * points["flow"].astype(int) + np.sign(points["direction"]).astype(int) + 1
        length = points["duration_s"]
        for value in np.unique(kind):
            mine = np.flatnonzero(kind == value)
            flat = np.stack([points[name][mine].ravel() for name in _NODE_FIELDS], axis=1)
            share = (length[mine, None] * weight_of_node).ravel()
            extremes.offer(flat, int(value), block)
            index, weight = condense(flat[:, _MOMENTS], share)
            rows.append(flat[index])
            weights.append(weight)
            blocks.append(np.full(len(index), block))
            classes.append(np.full(len(index), value))
    peak_rows, peak_classes, peak_blocks = extremes.found()
    flat = np.concatenate([*rows, peak_rows])
    # An extreme lasts next to nothing here: its share of the means is in the condensed instants already.
    duration = np.concatenate([*weights, np.full(len(peak_rows), 1e-12 * period)])
    kinds = np.concatenate([*classes, peak_classes])
    block_of = np.concatenate([*blocks, peak_blocks])
    torque = flat[:, _NODE_FIELDS.index("shaft_torque")]
    order = np.lexsort(
        (np.abs(torque), block_of)
    )  # heaviest together: never milder for a window than the record
    flat, duration, kinds = flat[order], duration[order], kinds[order]
    duration *= period / duration.sum()
    out: dict[str, Any] = {
        name: np.repeat(flat[:, k, None], 3, axis=1) for k, name in enumerate(_NODE_FIELDS)
    }
    out["duration_s"] = duration
    out["start_s"] = np.concatenate([[0.0], np.cumsum(duration)[:-1]])
    out["flow"] = (kinds // 3).astype(np.int8)
    out["direction"] = (kinds % 3 - 1).astype(float)
    out["heat_start"] = np.flatnonzero(np.diff(block_of[order], prepend=-1))
    return _finished(out)


class _Extremes:
    """Instants that are extreme in a fan of directions over acceleration, torque and speed, class by class."""

    def __init__(self) -> None:
        axis = np.linspace(-1.0, 1.0, _FAN)
        fan = np.stack(np.meshgrid(axis, axis, axis), axis=-1).reshape(-1, 3)
        self.fan = fan[np.abs(fan).max(axis=1) == 1.0]
        self.scale: FloatArray | None = None
        self.best: dict[int, tuple[FloatArray, FloatArray, NDArray[np.intp]]] = {}

    def offer(self, rows: FloatArray, kind: int, block: int) -> None:
        """Take the points of one class of one block."""
        if (
            len(rows) > 8 * _GROUP * NODES
        ):  # motion hardly changes within a group: its extremes of torque suffice
            torque = rows[: len(rows) // (_GROUP * NODES) * _GROUP * NODES, _MOMENTS[1]].reshape(
                -1, _GROUP * NODES
            )
            first = np.arange(len(torque)) * _GROUP * NODES
            rest = np.arange(torque.size, len(rows))
            rows = rows[np.concatenate([first + torque.argmax(axis=1), first + torque.argmin(axis=1), rest])]
        values = rows[:, _MOMENTS]
        if self.scale is None:
            self.scale = np.maximum(np.abs(values).max(axis=0), 1e-300)
        score = (values / self.scale) @ self.fan.T
        top = score.argmax(axis=0)
        high = score[top, np.arange(len(self.fan))]
        if kind not in self.best:
            self.best[kind] = (high, rows[top], np.full(len(self.fan), block))
            return
        known, kept, where = self.best[kind]
        better = high > known
        self.best[kind] = (
            np.where(better, high, known),
            np.where(better[:, None], rows[top], kept),
            np.where(better, block, where),
        )

    def found(self) -> tuple[FloatArray, NDArray[np.intp], NDArray[np.intp]]:
        """Distinct extreme points with their class and block."""
        rows, kinds, blocks = [], [], []
        for kind, (_, kept, where) in self.best.items():
            distinct, index = np.unique(kept, axis=0, return_index=True)
            rows.append(distinct)
            kinds.append(np.full(len(index), kind))
            blocks.append(where[index])
        return np.concatenate(rows), np.concatenate(kinds), np.concatenate(blocks)


def _crossings(nodes: dict[str, Any], name: str) -> FloatArray:
    """Where on [0, 1] a quantity changes sign within each stretch, NaN where it does not."""
    left, right = nodes[name][:, 0], nodes[name][:, -1]
    with np.errstate(invalid="ignore", divide="ignore"):
        at = left / (left - right)
    return np.where((left * right < 0.0) & (at > 1e-9) & (at < 1.0 - 1e-9), at, np.nan)


def _cut(case: Case, recording: Recording, nodes: dict[str, Any]) -> dict[str, Any]:
    """Stretches without a change of sign, and those with one, cut there."""
    for name in ("speed", "effort", "shaft_torque"):
        at = _crossings(nodes, name)
        changing = np.isfinite(at)
        if not changing.any():
            continue
        low = nodes["start_s"][changing]
        high = low + nodes["duration_s"][changing]
        middle = low + at[changing] * (high - low)
        halves = _nodes(case, recording, np.stack([low, middle, high], axis=1))
        kept = {key: value[~changing] for key, value in nodes.items()}
        nodes = {key: np.concatenate([kept[key], halves[key]]) for key in kept}
    return nodes


def _split(case: Case, recording: Recording, borders: FloatArray) -> FloatArray:
    """Borders with those added where speed, effort or torque changes sign, to second order of a stretch."""
    nodes = _cut(case, recording, _nodes(case, recording, borders))
    starts = np.sort(nodes["start_s"])
    return np.append(starts, borders[-1])


_NODE_FIELDS = (
    "position", "speed", "acceleration", "effort", "shaft_speed", "shaft_acceleration", "shaft_torque",
    "motor_acceleration", "inertia", "gravity", "friction", "process", "losses",
)  # fmt: skip
_MOMENTS = [_NODE_FIELDS.index(name) for name in ("motor_acceleration", "shaft_torque", "shaft_speed")]


def _nodes(case: Case, recording: Recording, borders: FloatArray) -> dict[str, Any]:
    """Everything at the nodes of the stretches between borders, one direction and flow on each.

    Borders may be rows of borders, each with stretches of its own.
    """
    mechanism = case.mechanism
    begin, length = borders[..., :-1].ravel(), np.diff(borders, axis=-1).ravel()
    t = begin[:, None] + np.array([0.0, 0.5, 1.0]) * length[:, None]
    x, v, a = _motion(recording, borders, length)
    middle = v.mean(axis=1)
    moving = np.abs(middle) > 1e-12 * max(recording.speed_peak, 1e-300)
    direction = np.where(moving, np.sign(middle), 0.0)[:, None]
    recorded = recording.effort_at(t)
    process = recorded if recording.kind not in (RECORDED_EFFORT, RECORDED_SHAFT) else np.zeros_like(t)
    parts = mechanism.efforts(x, v, a, direction, np.full_like(t, recording.payload), process)
    geometry = mechanism.transfer(x, False)
    r, dr = geometry.shaft_rate, geometry.shaft_bend
    zero = np.zeros_like(t)
    causes = {name: getattr(parts, name) / r + zero for name in ("inertia", "gravity", "friction", "process")}
    effort = parts.total + zero
    if recording.kind == RECORDED_EFFORT:
        effort = recorded
        causes = dict.fromkeys(causes, zero) | {"process": effort / r}
    shaft_speed, shaft_acceleration = r * v, r * a + dr * v**2
    turning = direction * np.sign(r)
    if recording.kind == RECORDED_SHAFT:
        torque, losses = recorded, zero
        effort = torque * r
        causes = dict.fromkeys(causes, zero) | {"process": torque}
    else:
        load_flow = _flows(effort, direction)
        forward, back = np.array(mechanism.efficiency_forward), np.array(mechanism.efficiency_back)
        factor = stage_factor(load_flow, forward, back)[:, None]
        inertia = mechanism.shaft_inertia_kg_m2 * shaft_acceleration
        drag = mechanism.shaft_friction_nm * turning
        losses = effort / r * (factor - 1.0)
        torque = effort / r * factor + inertia + drag
        causes["inertia"] = causes["inertia"] + inertia
        causes["friction"] = causes["friction"] + drag
    motor = (
        shaft_acceleration + mechanism.specific_gravity_m_s2 + mechanism.specific_friction_m_s2 * direction
    )
    return {
        "duration_s": length, "start_s": begin, "direction": turning[:, 0],
        "flow": _flows(torque, turning), "position": x, "speed": v, "acceleration": a, "effort": effort,
        "shaft_speed": shaft_speed, "shaft_acceleration": shaft_acceleration, "shaft_torque": torque,
        "motor_acceleration": motor + zero, **causes, "losses": losses + zero,
    }  # fmt: skip


def _motion(
    recording: Recording, borders: FloatArray, length: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Position, speed and acceleration at both ends and in the middle of each stretch.

    The middle follows from the ends by Hermite's formula, whose error is of fourth order in the length.
    """
    shape = (len(length), NODES)
    if recording.at_rest:
        return np.zeros(shape), np.zeros(shape), np.zeros(shape)
    at_borders = [recording.motion.values(borders, order) for order in range(4)]
    filled = []
    for value, slope in zip(at_borders[:3], at_borders[1:], strict=True):
        left, right = value[..., :-1].ravel(), value[..., 1:].ravel()
        bend = (slope[..., :-1] - slope[..., 1:]).ravel()
        filled.append(np.stack([left, 0.5 * (left + right) + length / 8.0 * bend, right], axis=1))
    return filled[0], filled[1], filled[2]


def _finished(nodes: dict[str, Any]) -> dict[str, Any]:
    """As `Demand` holds them: causes apart, one segment, no brake."""
    causes = {name: nodes[name] for name in ("inertia", "gravity", "friction", "process", "losses")}
    count = len(nodes["duration_s"])
    held = {name: value for name, value in nodes.items() if name not in causes}
    return held | {
        "torque_by_cause": causes,
        "segment": np.zeros(count, dtype=np.intp),
        "brake_closed": np.zeros(count, dtype=bool),
    }


def _flows(torque: FloatArray, direction: FloatArray) -> NDArray[np.int8]:
    power = torque.mean(axis=1) * direction[:, 0]
    moving = np.where(power >= 0.0, MOTORING, BACK_DRIVING)
    return np.where(direction[:, 0] == 0.0, STANDSTILL, moving).astype(np.int8)
