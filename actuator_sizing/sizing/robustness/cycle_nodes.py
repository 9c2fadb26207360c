"""The cycle at few nodes: what the driven shaft must do, for one demand or for a demand per sample.

Arrays of node values have the shape (P, K, B) here, samples last: long rows are what numpy is fast on.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.life import BALL_EXPONENT, ROLLER_EXPONENT
from actuator_sizing.core.machine import saturation_coefficient
from actuator_sizing.core.process_load import TIME
from actuator_sizing.core.quadrature import (
    NODES,
    differentiation_matrix,
    interpolate,
    lobatto,
    to_series,
)
from actuator_sizing.core.transmission import BACK_DRIVING, MOTORING, STANDSTILL, stage_factor
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.robustness.state import Samples

FloatArray = NDArray[np.float64]

_NOTHING = 1e-11  # Legendre coefficients below this part of the largest value are rounding
_FEWEST, _FEWEST_CURVED = 4, 8  # nodes of a piece; the second where current bends with torque
_DENSE = 17  # points per piece between which the largest value is taken from a parabola


@dataclass(frozen=True)
class CycleNodes:
    """A cycle resampled at the fewest nodes that hold it, with what integrates over it."""

    demand: Demand  # every array at K nodes
    q: FloatArray  # (P, K) stated coordinate, its speed and acceleration
    dq: FloatArray
    ddq: FloatArray
    load_direction: FloatArray  # (P,)
    payload: FloatArray  # (P,)
    process: FloatArray  # (P, K) effort of the process as the load feels it
    at_shaft: bool

    @property
    def count(self) -> int:
        """K, nodes of a piece."""
        return int(self.q.shape[1])

    @cached_property
    def weights(self) -> FloatArray:
        """Weights of the mean over the cycle, shape (P·K,). [-]"""
        w = 0.5 * lobatto(self.count)[1] * self.demand.duration_s[:, None] / self.demand.cycle_s
        return np.asarray(w.ravel())

    def mean(self, values: FloatArray) -> FloatArray:
        """Mean over the cycle, shape (P, K, B) to (B,). [-]"""
        return np.asarray(self.weights @ values.reshape(len(self.weights), -1))

    def slope(self, values: FloatArray, pieces: NDArray[np.intp]) -> FloatArray:
        """Derivative with respect to time on some pieces, shape (p, K, B), per second. [-]"""
        scale = (2.0 / self.demand.duration_s[pieces])[:, None, None]
        return np.asarray((differentiation_matrix(self.count) @ values) * scale)

    @cached_property
    def dense(self) -> FloatArray:
        """Matrix from nodes to evenly spaced points of a piece, shape (D, K). [-]"""
        points = np.linspace(-1.0, 1.0, _DENSE)
        return np.asarray(legendre.legvander(points, self.count - 1) @ to_series(self.count))


def cycle_nodes(case: Case, demand: Demand) -> CycleNodes:
    """Resample a demand at the fewest nodes that hold it.

    Parameters
    ----------
    case : Case
        The case of the demand. [-]
    demand : Demand
        Its cycle; not a condensed record. [-]

    Returns
    -------
    CycleNodes
        With K so large that squares of torque are held too, at most as many nodes as the demand has. [-]
    """
    motion = _stated_motion(case, demand)
    middle = demand.speed[:, demand.speed.shape[1] // 2]
    moving = np.abs(middle) > 1e-12 * np.max(np.abs(demand.speed), initial=0.0)
    load_direction = np.where(moving, np.sign(middle), 0.0)
    process = _process(case, demand, load_direction)
    held = np.stack(
        [
            *motion[1:],
            demand.effort,
            demand.shaft_torque,
            demand.shaft_speed,
            demand.shaft_acceleration,
            process,
        ]
    )
    size = np.max(np.abs(held), axis=(1, 2), keepdims=True) + 1e-300
    series = np.abs((held / size) @ to_series(held.shape[2]).T)
    degree = int(np.max(np.nonzero((series > _NOTHING).any(axis=(0, 1)))[0], initial=0))
    fewest = _FEWEST_CURVED if np.any(saturation_coefficient(case.motor_parameters) > 0.0) else _FEWEST
    count = int(np.clip(2 * degree + 1, fewest, demand.position.shape[1]))
    at = lobatto(count)[0]

    def few(values: FloatArray) -> FloatArray:
        return interpolate(values, at) if count < NODES else values

    names = ("position", "speed", "acceleration", "effort", "shaft_speed", "shaft_acceleration", "shaft_torque",
             "motor_acceleration")  # fmt: skip
    resampled: dict[str, Any] = {name: few(getattr(demand, name)) for name in names}
    reduced = replace(
        demand,
        **resampled,
        torque_by_cause={cause: few(values) for cause, values in demand.torque_by_cause.items()},
    )
    return CycleNodes(
        demand=reduced,
        q=few(motion[0]),
        dq=few(motion[1]),
        ddq=few(motion[2]),
        load_direction=load_direction,
        payload=np.array([case.segments[i].payload for i in demand.segment]),
        process=few(process),
        at_shaft=case.motion_at_shaft,
    )


def _process(case: Case, demand: Demand, direction: FloatArray) -> FloatArray:
    """Effort of the process at the nodes, shape (P, K)."""
    begin = np.array([segment.start_s for segment in case.segments])
    efforts = np.empty_like(demand.position)
    for piece, index in enumerate(demand.segment.tolist()):
        segment = case.segments[index]
        load = segment.process
        if load is None:
            efforts[piece] = segment.process_effort
        else:
            at = demand.time_s[piece] - begin[index] if load.over == TIME else demand.position[piece]
            efforts[piece] = load.values(at, float(direction[piece]))
    return efforts


def _stated_motion(case: Case, demand: Demand) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Stated coordinate, speed and acceleration at the nodes, counted from the start of the cycle."""
    q, dq, ddq = np.zeros((3, *demand.position.shape))
    origin = 0.0
    middle = demand.start_s + 0.5 * demand.duration_s
    start = 0.0
    for index, segment in enumerate(case.segments):
        for phase in segment.phases:
            mine = (demand.segment == index) & (middle > start) & (middle < start + phase.duration_s)
            tau = np.clip(demand.time_s[mine] - start, 0.0, phase.duration_s)
            position, dq[mine], ddq[mine], _ = phase.kinematics(tau)
            q[mine] = position + origin
            start += phase.duration_s
        if segment.phases:
            last = segment.phases[-1]
            origin += float(last.kinematics(np.array([last.duration_s]))[0][0])
    return q, dq, ddq


# -- a demand per sample ----------------------------------------------------------------------------------


@dataclass(frozen=True)
class MovedLoad:
    """What the driven shaft must do in B samples.

    Attributes
    ----------
    functions : ndarray, shape (6, P, K, B)
        As in `core.moments`. [-]
    torque : ndarray, shape (P, K, B)
        At the driven shaft. [N·m]
    torque_equivalent : mapping of float to ndarray of shape (B,)
        For the wear of a gearhead, by exponent. [N·m]
    load_inertia : ndarray, shape (B,)
        Largest, at the driven shaft. [kg·m²]
    """

    functions: FloatArray
    torque: FloatArray
    torque_equivalent: Mapping[float, FloatArray]
    load_inertia: FloatArray


def moved_load(nodes: CycleNodes, samples: Samples) -> MovedLoad:
    """Evaluate mechanism and payload of every sample at the nodes of the one cycle.

    Parameters
    ----------
    nodes : CycleNodes
        The cycle, cut where the power turns without spread. [-]
    samples : Samples
        B samples whose mechanism, payload or process spreads. [-]

    Returns
    -------
    MovedLoad
        The direction of power is decided node by node; where it turns within a piece only a kink is integrated over,
        with the small difference of the two directions' losses as its height. [-]
    """
    mechanism = replace(samples.case.mechanism, **samples.mechanism)  # type: ignore[type-var]
    shape = (*nodes.q.shape, len(samples))

    def spread(values: FloatArray) -> FloatArray:
        return np.broadcast_to(values[..., None], shape)

    geometry = mechanism.transfer(spread(nodes.q), nodes.at_shaft)
    dq, ddq = nodes.dq[..., None], nodes.ddq[..., None]
    speed = geometry.load_rate * dq
    acceleration = geometry.load_rate * ddq + geometry.load_bend * dq**2
    shaft_speed = geometry.shaft_rate * dq
    shaft_acceleration = geometry.shaft_rate * ddq + geometry.shaft_bend * dq**2
    load_direction, direction = nodes.load_direction[:, None, None], nodes.demand.direction[:, None, None]
    payload = _payloads(nodes, samples)
    efforts = mechanism.efforts(
        geometry.position,
        speed,
        acceleration,
        np.broadcast_to(load_direction, shape),
        payload,
        _efforts(nodes, samples),
    )
    effort = efforts.total
    forward, back = np.asarray(mechanism.efficiency_forward), np.asarray(mechanism.efficiency_back)
    factor = stage_factor(_flow(effort, load_direction), forward, back)
    inertia, friction = mechanism.shaft_inertia_kg_m2, mechanism.shaft_friction_nm
    torque = effort * geometry.lever * factor + inertia * shaft_acceleration + friction * direction
    closed = nodes.demand.brake_closed[:, None, None]
    of_motor = (
        shaft_acceleration + mechanism.specific_gravity_m_s2 + mechanism.specific_friction_m_s2 * direction
    )
    flow = _flow(torque, direction)
    functions = np.stack(
        [
            np.where(closed, 0.0, of_motor) * np.ones(shape),
            np.where(flow == MOTORING, torque, 0.0),
            np.where(flow == BACK_DRIVING, torque, 0.0),
            np.where((flow == STANDSTILL) & ~closed, torque, 0.0),
            np.broadcast_to(direction, shape),
            shaft_speed * np.ones(shape),
        ]
    )
    each = np.array([s.payload for s in samples.case.segments])
    carried = np.stack([_changed_payload(samples, value) for value in each])
    turned = nodes.mean(np.abs(functions[5]))
    with np.errstate(divide="ignore", invalid="ignore"):
        equivalent = {
            p: np.where(
                turned > 0.0,
                (nodes.mean(np.abs(functions[5]) * np.abs(torque) ** p) / turned) ** (1.0 / p),
                0.0,
            )
            for p in (BALL_EXPONENT, ROLLER_EXPONENT)
        }
    return MovedLoad(
        functions=functions,
        torque=torque * np.ones(shape),
        torque_equivalent=equivalent,
        load_inertia=np.max(mechanism.inertia_at_shaft(carried) * np.ones(carried.shape), axis=0),
    )


def _flow(effort: FloatArray, direction: FloatArray) -> NDArray[np.int8]:
    """Direction of power at each node."""
    moving = np.where(effort * direction >= 0.0, MOTORING, BACK_DRIVING)
    return np.where(direction == 0.0, STANDSTILL, moving).astype(np.int8)


def _changed_payload(samples: Samples, value: float) -> FloatArray:
    change = samples.segments.get("payload")
    return np.full(len(samples), value) if change is None else change.of(value)


def _payloads(nodes: CycleNodes, samples: Samples) -> FloatArray:
    """Payload at each piece, shape (P, 1, B)."""
    by_value = {value: _changed_payload(samples, value) for value in np.unique(nodes.payload).tolist()}
    return np.stack([by_value[value] for value in nodes.payload.tolist()])[:, None, :]


def _efforts(nodes: CycleNodes, samples: Samples) -> FloatArray:
    """Process effort at the nodes, shape (P, K, B) or (P, K, 1)."""
    process = nodes.process[..., None]
    change = samples.segments.get("process force")
    if change is None:
        return process
    return np.where(process == 0.0, 0.0, process * change.factor + np.copysign(1.0, process) * change.added)
