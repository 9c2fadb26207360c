"""Demand of a recorded cycle: the effort straight between its samples, the motion a spline.

Up to `EXACT_INTERVALS` stretches stay pieces of their own. A longer record is condensed (`condensed_demand`).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.case.recording import EXACT_INTERVALS, RECORDED_EFFORT, RECORDED_SHAFT, Recording
from actuator_sizing.core.transmission import BACK_DRIVING, MOTORING, STANDSTILL, stage_factor

FloatArray = NDArray[np.float64]

NODES = 3  # straight efforts: their squares are exact, products with the smooth motion to fourth order
_CAUSES = ("inertia", "gravity", "friction", "process", "losses")
_SIGNED = ("speed", "shaft_speed", "effort", "shaft_torque")  # on a stretch each keeps its sign
_STILL = 1e-12  # of the largest speed: rounding
_PARTS = 4  # of an interval between knots
_SAME = 1e-12  # of a cycle: instants closer than this are one


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
    knots = recording.motion.knots_s
    if len(recording.time_s) == 2:  # nothing but a motion: polynomials of fifth degree, in parts
        knots = np.linspace(0.0, knots[-1], _PARTS * (len(knots) - 1) + 1)
    borders = joined(recording, recording.time_s, knots)
    if len(borders) > EXACT_INTERVALS and not in_order:
        from actuator_sizing.sizing.condensed_demand import condensed_pieces

        return condensed_pieces(case, recording, borders)
    whole = stretches_between(case, recording, borders)
    cut = cut_at_signs(case, recording, whole)
    order = np.argsort(cut.column("start_s"))
    return finished(case, recording, {name: cut.column(name)[order] for name in whole})


def joined(recording: Recording, *instants: FloatArray) -> FloatArray:
    """Borders in order, each once, from 0 to the period.

    Parameters
    ----------
    recording : Recording
        Says how long the cycle is. [-]
    *instants : ndarray
        Within the cycle, each in order. [s]

    Returns
    -------
    ndarray, shape (n,)
        Rising. [s]
    """
    borders = np.concatenate(instants)
    borders.sort(kind="stable")  # rows in order: merged rather than sorted
    borders = borders[np.diff(borders, prepend=-1.0) > _SAME * recording.motion.period_s]
    borders[0], borders[-1] = 0.0, recording.motion.period_s
    return borders


def stretches_between(case: Case, recording: Recording, borders: FloatArray) -> dict[str, Any]:
    """Everything at the nodes of the stretches between borders, one direction and flow on each.

    Parameters
    ----------
    case : Case
        The axis. [-]
    recording : Recording
        The record. [-]
    borders : ndarray, shape (n + 1,) or (m, k + 1)
        In order; rows of borders have stretches of their own. None straddles a knot of the motion. [s]

    Returns
    -------
    dict
        Arrays of shape (S,) or (S, NODES), keyed by the fields of `Demand` and the causes. [-]
    """
    mechanism = case.mechanism
    begin, length = borders[..., :-1].ravel(), np.diff(borders, axis=-1).ravel()
    t = begin[:, None] + np.array([0.0, 0.5, 1.0]) * length[:, None]
    q, dq, ddq = recording.motion_at(t)
    geometry = mechanism.transfer(q, case.motion_at_shaft)
    lever = geometry.lever
    x, v = geometry.position, geometry.load_rate * dq
    a = geometry.load_rate * ddq + geometry.load_bend * dq**2
    shaft_speed = geometry.shaft_rate * dq
    shaft_acceleration = geometry.shaft_rate * ddq + geometry.shaft_bend * dq**2
    moving = ~recording.stands(t[:, 1]) & (np.abs(middle(dq)) > _STILL * recording.speed_peak)
    direction = np.where(moving, np.sign(middle(v)), 0.0)[:, None]
    turning = np.where(moving, np.sign(middle(shaft_speed)), 0.0)[:, None]
    recorded, payload = recording.effort_at(t), recording.payload_at(t)
    zero = np.zeros_like(t)
    process = recorded if recording.kind not in (RECORDED_EFFORT, RECORDED_SHAFT) else zero
    if recording.kind == RECORDED_SHAFT:  # what the driven shaft gives is known: nothing is computed
        causes = dict.fromkeys(_CAUSES, zero) | {"process": recorded}
        with np.errstate(divide="ignore", invalid="ignore"):
            effort = np.where(lever != 0.0, recorded / lever, 0.0)
        torque = recorded
    else:
        parts = mechanism.efforts(x, v, a, direction, payload, process)
        if recording.kind == RECORDED_EFFORT:
            effort = recorded
            causes = dict.fromkeys(_CAUSES, zero) | {"process": recorded * lever}
        else:
            effort = parts.total + zero
            causes = {name: getattr(parts, name) * lever + zero for name in _CAUSES[:-1]}
        factor = stage_factor(
            flows(effort, direction),
            np.array(mechanism.efficiency_forward),
            np.array(mechanism.efficiency_back),
        )[:, None]
        causes["losses"] = effort * lever * (factor - 1.0) + zero
        inertia, gravity = mechanism.shaft_torques(geometry, shaft_speed, shaft_acceleration)
        drag = mechanism.shaft_friction_nm * turning
        torque = effort * lever * factor + inertia + gravity + drag
        causes["inertia"] = causes["inertia"] + inertia
        causes["gravity"] = causes["gravity"] + gravity
        causes["friction"] = causes["friction"] + drag
    motor = (
        shaft_acceleration + mechanism.specific_gravity_m_s2 + mechanism.specific_friction_m_s2 * direction
    )
    return {
        "duration_s": length, "start_s": begin, "direction": turning[:, 0], "flow": flows(torque, turning),
        "position": x, "speed": v, "acceleration": a, "effort": effort,
        "shaft_speed": shaft_speed, "shaft_acceleration": shaft_acceleration, "shaft_torque": torque,
        "motor_acceleration": motor + zero, **causes,
    }  # fmt: skip


@dataclass(frozen=True)
class CutStretches:
    """Stretches without a change of sign: those that had none, and the parts of the others behind them.

    Attributes
    ----------
    whole : dict
        Every stretch before cutting. [-]
    kept : ndarray of int, shape (k,)
        Those of `whole` that had no change of sign. [-]
    parts : dict
        What became of the others. [-]
    """

    whole: dict[str, Any]
    kept: NDArray[np.intp]
    parts: dict[str, Any]

    def column(self, name: str) -> FloatArray:
        """One field of all stretches, in the unit of the field. [-]"""
        if len(self.kept) == len(self.whole[name]):
            return np.asarray(self.whole[name])
        return np.concatenate([self.whole[name][self.kept], self.parts[name]])

    def at(self, name: str, row: NDArray[np.intp], node: NDArray[np.intp]) -> FloatArray:
        """One field at chosen nodes of chosen stretches, in the unit of the field. [-]"""
        values = np.empty(len(row))
        own = row < len(self.kept)
        for where, source, rows in (
            (own, self.whole[name], self.kept[row[own]]),
            (~own, self.parts[name], row[~own] - len(self.kept)),
        ):
            values[where] = source[rows] if source.ndim == 1 else source[rows, node[where]]
        return values


def cut_at_signs(case: Case, recording: Recording, stretches: dict[str, Any]) -> CutStretches:
    """Cut where speed, effort or torque changes sign, to second order of a stretch; the order is lost.

    Parameters
    ----------
    case, recording : Case, Recording
        The axis and its record. [-]
    stretches : dict
        From `stretches_between`. [-]

    Returns
    -------
    CutStretches
        The same with the halves in place of what was cut. [-]
    """
    changing = np.zeros(len(stretches["start_s"]), dtype=bool)
    for name in _SIGNED:
        changing |= np.isfinite(_crossings(stretches[name]))
    few = {key: value[changing] for key, value in stretches.items()}
    for name in _SIGNED:
        at = _crossings(few[name])
        changes = np.isfinite(at)
        if not changes.any():
            continue
        low = few["start_s"][changes]
        high = low + few["duration_s"][changes]
        between = low + at[changes] * (high - low)
        halves = stretches_between(case, recording, np.stack([low, between, high], axis=1))
        few = {key: np.concatenate([value[~changes], halves[key]]) for key, value in few.items()}
    return CutStretches(stretches, np.flatnonzero(~changing), few)


def finished(case: Case, recording: Recording, nodes: dict[str, Any]) -> dict[str, Any]:
    """As `Demand` holds them: causes apart, one segment, no brake.

    Parameters
    ----------
    case, recording : Case, Recording
        The axis and its record. [-]
    nodes : dict
        From `stretches_between`. [-]
    """
    count = len(nodes["duration_s"])
    held = {name: value for name, value in nodes.items() if name not in _CAUSES}
    with np.errstate(divide="ignore", invalid="ignore"):
        lever = np.where(nodes["shaft_speed"] != 0.0, nodes["speed"] / nodes["shaft_speed"], 0.0)
    payload = float(np.max(recording.payload, initial=0.0))
    return held | {
        "torque_by_cause": {name: nodes[name] for name in _CAUSES},
        "segment": np.zeros(count, dtype=np.intp),
        "brake_closed": np.zeros(count, dtype=bool),
        "load_inertia": case.mechanism.inertia_over(nodes["position"], lever, payload),
    }


def middle(values: FloatArray) -> FloatArray:
    """Mean of the nodes of each stretch, shape (S, K) to (S,), in the unit of the values [-]."""
    return np.asarray(
        values @ np.full(values.shape[1], 1.0 / values.shape[1])
    )  # a product beats many short sums


def flows(torque: FloatArray, direction: FloatArray) -> NDArray[np.int8]:
    """Direction of power on stretches where neither torque nor direction changes sign.

    Parameters
    ----------
    torque : ndarray, shape (S, K)
        Torque at the nodes, or effort in N. [N·m]
    direction : ndarray, shape (S, 1)
        Sign of the motion. [-]

    Returns
    -------
    ndarray of int, shape (S,)
        STANDSTILL, MOTORING or BACK_DRIVING. [-]
    """
    power = middle(torque) * direction[:, 0]
    moving = np.where(power >= 0.0, MOTORING, BACK_DRIVING)
    return np.where(direction[:, 0] == 0.0, STANDSTILL, moving).astype(np.int8)


def _crossings(value: FloatArray) -> FloatArray:
    """Where on [0, 1] a quantity changes sign within each stretch, NaN where it does not."""
    at = np.full(len(value), np.nan)
    left, right = value[:, 0], value[:, -1]
    changing = np.flatnonzero(left * right < 0.0)
    at[changing] = left[changing] / (left[changing] - right[changing])
    at[(at <= 1e-9) | (at >= 1.0 - 1e-9)] = np.nan
    return at
