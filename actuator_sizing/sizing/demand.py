"""Motion and mechanism to Demand: what the driven shaft must do, before any motor is looked at.

The cycle is cut into pieces at every kink (phase ends of the motion law, reversals, changes of the
direction of power in the mechanism and at the driven shaft), so that everything is smooth on a piece.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, fields
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.mechanisms import Mechanism
from actuator_sizing.core.moments import demand_functions
from actuator_sizing.core.motion_laws import Phase
from actuator_sizing.core.process_load import TIME
from actuator_sizing.core.quadrature import NODES, integrate, largest_magnitude, lobatto, roots
from actuator_sizing.core.transmission import (
    BACK_DRIVING,
    GEAR_EXPONENT,
    MOTORING,
    STANDSTILL,
    equivalent_torque,
    stage_factor,
)

FloatArray = NDArray[np.float64]

CAUSES = ("inertia", "gravity", "friction", "process", "losses")


@dataclass(frozen=True)
class Demand:
    """The cycle at the load and at the driven shaft; P pieces with K nodes each.

    For a linear motor the driven shaft is the carriage: metres and newtons stand for radians and N·m.
    """

    segment: NDArray[np.intp]  # (P,) index of the segment
    start_s: FloatArray  # (P,)
    duration_s: FloatArray  # (P,)
    direction: FloatArray  # (P,) sign of motion; 0 at rest
    flow: NDArray[np.int8]  # (P,) direction of power at the driven shaft
    brake_closed: NDArray[np.bool_]  # (P,)
    position: FloatArray  # (P, K) load coordinate
    speed: FloatArray
    acceleration: FloatArray
    effort: FloatArray
    shaft_speed: FloatArray  # (P, K) driven shaft
    shaft_acceleration: FloatArray
    shaft_torque: FloatArray
    motor_acceleration: FloatArray  # shaft acceleration as the motor's own moving mass feels it
    torque_by_cause: Mapping[str, FloatArray]  # (P, K) parts of shaft_torque
    load_inertia: float  # largest inertia of load and mechanism at the driven shaft
    heat_start: NDArray[np.intp] | None = None  # first piece of each block of a condensed record

    @cached_property
    def functions(self) -> FloatArray:
        """The six functions of `core.moments` at the nodes, shape (6, P, K)."""
        return demand_functions(
            self.flow,
            self.direction,
            self.brake_closed,
            self.motor_acceleration,
            self.shaft_torque,
            self.shaft_speed,
        )

    @property
    def cycle_s(self) -> float:
        """Duration of the cycle. [s]"""
        return float(self.duration_s.sum())

    @cached_property
    def time_s(self) -> FloatArray:
        """Instants of the nodes, shape (P, K). [s]"""
        nodes = lobatto(self.position.shape[1])[0]
        return np.asarray(self.start_s[:, None] + 0.5 * (nodes + 1.0) * self.duration_s[:, None])

    def instant(self, piece: NDArray[np.intp], position: FloatArray) -> FloatArray:
        """Time of a point given by piece and position on [−1, 1]; shapes broadcast. [s]"""
        return np.asarray(self.start_s[piece] + 0.5 * (position + 1.0) * self.duration_s[piece])

    def mean(self, values: FloatArray) -> FloatArray:
        """Mean over the cycle of node values, shape (..., P, K) to (...). [-]"""
        return np.asarray(integrate(self.duration_s, values) / self.cycle_s)

    def peak(self, values: FloatArray) -> float:
        """Largest magnitude over the cycle of node values, shape (P, K). [-]"""
        return float(largest_magnitude(values[None])[0][0])

    @cached_property
    def shaft_torque_peak(self) -> float:
        """Largest torque at the driven shaft, magnitude. [N·m]"""
        return self.peak(self.shaft_torque)

    @cached_property
    def shaft_torque_equivalent(self) -> float:
        """Equivalent torque at the driven shaft for the wear of a gearhead. [N·m]"""
        return equivalent_torque(self.duration_s, self.shaft_speed, self.shaft_torque, GEAR_EXPONENT)[0]

    @cached_property
    def shaft_speed_peak(self) -> float:
        """Largest speed of the driven shaft. [rad/s]"""
        return self.peak(self.shaft_speed)

    @cached_property
    def shaft_speed_mean(self) -> float:
        """Mean of the magnitude of the driven shaft's speed. [rad/s]"""
        return float(self.mean(np.abs(self.shaft_speed)))

    @cached_property
    def shaft_speed_rms(self) -> float:
        """RMS speed of the driven shaft. [rad/s]"""
        return float(np.sqrt(self.mean(self.shaft_speed**2)))


def build_demand(case: Case) -> Demand:
    """Cut the cycle of a case into smooth pieces and find what the driven shaft must do.

    Parameters
    ----------
    case : Case
        The axis as understood. [-]

    Returns
    -------
    Demand
        Pieces, node values and their moments; independent of any motor. [-]
    """
    payloads = np.array([segment.payload for segment in case.segments])
    inertia = float(np.max(case.mechanism.inertia_at_shaft(payloads)))
    if case.recording is not None:
        from actuator_sizing.sizing.measured_demand import recorded_pieces

        return Demand(**recorded_pieces(case, case.recording), load_inertia=inertia)
    pieces = list(_pieces(case.segments, case.mechanism))
    stacked: dict[str, Any] = {
        f.name: np.array([piece[f.name] for piece in pieces])
        for f in fields(Demand)
        if f.name not in ("torque_by_cause", "load_inertia", "heat_start")
    }
    stacked["flow"] = stacked["flow"].astype(np.int8)
    causes = {cause: np.array([piece["by_cause"][cause] for piece in pieces]) for cause in CAUSES}
    return Demand(**stacked, torque_by_cause=causes, load_inertia=inertia)


def cycle_quantities(demand: Demand) -> dict[str, Any]:
    """Quantities of the cycle at the load, for report and results.

    Parameters
    ----------
    demand : Demand
        The cycle. [-]

    Returns
    -------
    dict
        Duration, travel (distance, both ways added), peaks and RMS values, in SI. [-]
    """
    return {
        "duration_s": demand.cycle_s,
        "travel": float(integrate(demand.duration_s, np.abs(demand.speed))),
        "speed_peak": demand.peak(demand.speed),
        "acceleration_peak": demand.peak(demand.acceleration),
        "acceleration_rms": float(np.sqrt(demand.mean(demand.acceleration**2))),
        "effort_peak": demand.peak(demand.effort),
        "effort_rms": float(np.sqrt(demand.mean(demand.effort**2))),
        "shaft_speed_peak_rad_s": demand.shaft_speed_peak,
        "shaft_torque_peak_nm": demand.peak(demand.shaft_torque),
        "shaft_torque_rms_nm": float(np.sqrt(demand.mean(demand.shaft_torque**2))),
        "load_inertia_at_shaft_kg_m2": demand.load_inertia,
    }


@dataclass(frozen=True)
class _Stretch:
    """A part of one phase, with what the load asks there."""

    phase: Phase
    begin: float
    end: float
    phase_start: float = 0.0  # time in the segment at which the phase starts

    @property
    def tau(self) -> FloatArray:
        """Phase time at the nodes."""
        return np.asarray(self.begin + 0.5 * (lobatto()[0] + 1.0) * (self.end - self.begin))

    def cut(self, at: FloatArray) -> Iterator[_Stretch]:
        """Split at positions on (−1, 1)."""
        borders = [self.begin, *(self.begin + 0.5 * (at + 1.0) * (self.end - self.begin)), self.end]
        for begin, end in zip(borders[:-1], borders[1:], strict=True):
            yield _Stretch(self.phase, begin, end, self.phase_start)


def _pieces(segments: tuple[Segment, ...], mechanism: Mechanism) -> Iterator[dict[str, Any]]:
    start, origin = 0.0, 0.0
    for index, segment in enumerate(segments):
        phase_start = 0.0
        for phase in segment.phases:
            for reversal_free in _halves(phase, phase_start):
                speed = phase.kinematics(reversal_free.tau)[1]
                for one_way in reversal_free.cut(roots(speed)):
                    for stretch in one_way.cut(_process_kinks(one_way, segment, origin)):
                        for piece in _same_power(stretch, segment, mechanism, origin):
                            yield {"segment": index, "start_s": start, **piece}
                            start += piece["duration_s"]
            phase_start += phase.duration_s
        if segment.phases:
            last = segment.phases[-1]
            origin += float(last.kinematics(np.array([last.duration_s]))[0][0])


def _process_kinks(stretch: _Stretch, segment: Segment, origin: float) -> FloatArray:
    """Where on (−1, 1) the process load of a stretch without reversal has a kink."""
    load = segment.process
    if load is None:
        return np.empty(0)
    length = stretch.end - stretch.begin
    if load.over == TIME:
        begin = stretch.phase_start + stretch.begin
        tau = load.kinks_between(begin, begin + length) - stretch.phase_start
    else:
        x = origin + stretch.phase.kinematics(np.array([stretch.begin, stretch.end]))[0]
        knots = load.kinks_between(float(x.min()), float(x.max()))
        rising = x[1] > x[0]
        low, high = np.full_like(knots, stretch.begin), np.full_like(knots, stretch.end)
        for _ in range(60):  # position is monotonic here: bisection reaches rounding
            middle = 0.5 * (low + high)
            before = (origin + stretch.phase.kinematics(middle)[0] < knots) == rising
            low, high = np.where(before, middle, low), np.where(before, high, middle)
        tau = np.sort(low)
    at = 2.0 * (tau - stretch.begin) / length - 1.0
    return np.asarray(at[np.abs(at) < 1.0 - 1e-9])


def _process(stretch: _Stretch, segment: Segment, x: FloatArray, direction: float) -> FloatArray:
    """Process effort at the nodes of a stretch that holds no kink of it."""
    if segment.process is None:
        return np.full(NODES, segment.process_effort)
    at = stretch.phase_start + stretch.tau if segment.process.over == TIME else x
    return segment.process.values(at, direction)


def _halves(phase: Phase, phase_start: float) -> Iterator[_Stretch]:
    """The phase in parts of at most half a sine period, which the nodes resolve to rounding."""
    turns = abs(phase.sine_frequency_rad_s) * phase.duration_s / np.pi if phase.sine_amplitude else 0.0
    parts = max(1, int(np.ceil(turns - 1e-9)))
    borders = np.linspace(0.0, phase.duration_s, parts + 1)
    for begin, end in zip(borders[:-1], borders[1:], strict=True):
        yield _Stretch(phase, float(begin), float(end), phase_start)


def _same_power(
    stretch: _Stretch, segment: Segment, mechanism: Mechanism, origin: float
) -> Iterator[dict[str, Any]]:
    """Cut where the power of the load, then that of the driven shaft, changes direction."""
    for one_way in stretch.cut(roots(_load(stretch, segment, mechanism, origin)["effort"])):
        torque = _load(one_way, segment, mechanism, origin)["shaft_torque"]
        for piece in one_way.cut(roots(torque)):
            yield _load(piece, segment, mechanism, origin)


def _load(stretch: _Stretch, segment: Segment, mechanism: Mechanism, origin: float) -> dict[str, Any]:
    """Everything at the nodes of one stretch, with one direction of motion and of power on all of it."""
    x, v, a, _ = stretch.phase.kinematics(stretch.tau)
    x = x + origin
    middle_speed = v[NODES // 2]
    scale = np.max(np.abs(v))
    moving = scale > 0.0 and abs(middle_speed) > 1e-12 * scale
    direction = np.full(NODES, np.sign(middle_speed) if moving else 0.0)
    efforts = mechanism.efforts(
        x, v, a, direction, np.full(NODES, segment.payload), _process(stretch, segment, x, direction[0])
    )
    effort = efforts.total
    r, dr = mechanism.ratio_at(x)
    shaft_speed, shaft_acceleration = r * v, r * a + dr * v**2
    load_flow = _flow(effort, direction)
    factor = float(
        stage_factor(
            np.array(load_flow),
            np.array(mechanism.efficiency_forward),
            np.array(mechanism.efficiency_back),
        )
    )
    inertia_torque = mechanism.shaft_inertia_kg_m2 * shaft_acceleration
    drag = mechanism.shaft_friction_nm * direction * np.sign(r)
    torque = effort / r * factor + inertia_torque + drag
    motor_acceleration = (
        shaft_acceleration + mechanism.specific_gravity_m_s2 + mechanism.specific_friction_m_s2 * direction
    )
    return {
        "duration_s": stretch.end - stretch.begin,
        "direction": direction[0] * np.sign(r[0]),
        "flow": _flow(torque, direction * np.sign(r)),
        "brake_closed": segment.brake_closed,
        "position": x,
        "speed": v,
        "acceleration": a,
        "effort": effort,
        "shaft_speed": shaft_speed,
        "shaft_acceleration": shaft_acceleration,
        "shaft_torque": torque,
        "motor_acceleration": motor_acceleration * (0.0 if segment.brake_closed else 1.0),
        "by_cause": {
            "inertia": efforts.inertia / r + inertia_torque,
            "gravity": efforts.gravity / r,
            "friction": efforts.friction / r + drag,
            "process": efforts.process / r,
            "losses": effort / r * (factor - 1.0),
        },
    }


def _flow(torque: FloatArray, direction: FloatArray) -> int:
    """Direction of power on a piece where neither torque nor direction changes sign."""
    if direction[0] == 0.0:
        return STANDSTILL
    # The mean carries the sign of the piece; its ends may be zero or rounding beyond zero.
    return MOTORING if float(np.mean(torque) * direction[0]) >= 0.0 else BACK_DRIVING
