"""Motion and mechanism to Demand: what the driven shaft must do, before any motor is looked at.

The cycle is cut into pieces at every kink (phase ends of the motion law, reversals, changes of the
direction of power in the mechanism and at the driven shaft), so that everything is smooth on a piece.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, fields, replace
from functools import cached_property, lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.life import BALL_EXPONENT, equivalent_load
from actuator_sizing.core.mechanisms import Mechanism
from actuator_sizing.core.moments import demand_functions
from actuator_sizing.core.motion_laws import Phase
from actuator_sizing.core.process_load import TIME
from actuator_sizing.core.quadrature import NODES, integrate, interpolate, largest_magnitude, lobatto, roots
from actuator_sizing.core.record_slices import RecordSlices
from actuator_sizing.core.transmission import (
    BACK_DRIVING,
    MOTORING,
    STANDSTILL,
    stage_factor,
)

FloatArray = NDArray[np.float64]

CAUSES = ("inertia", "gravity", "friction", "process", "losses")

#: Relative interpolation error that a piece may have where the geometry bends: what `NODES` nodes promise.
_RESOLUTION = 1e-10
_DEEPEST = 14  # halvings of one stretch; a stretch that short is below a part in ten thousand
_RESOLVED = (
    "position", "speed", "effort", "lossless_torque", "shaft_speed", "shaft_acceleration", "inertia_torque",
    "gravity_torque",
)  # fmt: skip


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
    slices: RecordSlices | None = None  # of a condensed record, whose pieces are not in the order of time
    drawn: Demand | None = None  # such a record in the order of time, at instants enough for a drawing

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
        """Equivalent torque at the driven shaft for the wear of a gearhead on ball bearings. [N·m]"""
        return self.equivalent(self.shaft_torque, BALL_EXPONENT)

    def equivalent(self, load: FloatArray, exponent: float) -> float:
        """Equivalent of a load at the nodes, weighted by the turns of the driven shaft, in its own unit. [-]"""
        return equivalent_load(self.duration_s, self.shaft_speed, load, exponent)[0]

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


def build_demand(case: Case, *, in_order: bool = False) -> Demand:
    """Cut the cycle of a case into smooth pieces and find what the driven shaft must do.

    Parameters
    ----------
    case : Case
        The axis as understood. [-]
    in_order : bool
        Whether every instant of a long record is wanted in its order, for simulation; else it is condensed.

    Returns
    -------
    Demand
        Pieces, node values and their moments; independent of any motor. [-]
    """
    if case.recording is not None:
        from actuator_sizing.sizing.measured_demand import recorded_pieces

        known = recorded_pieces(case, case.recording, in_order=in_order)
        drawn = known.pop("drawn", None)
        return Demand(**known, drawn=None if drawn is None else Demand(**drawn))
    pieces = list(_pieces(case))
    stacked: dict[str, Any] = {
        name: np.array([piece[name] for piece in pieces])
        for name in (*(f.name for f in fields(Demand)), "lever")
        if name not in ("torque_by_cause", "load_inertia", "slices", "drawn")
    }
    stacked["flow"] = stacked["flow"].astype(np.int8)
    causes = {cause: np.array([piece["by_cause"][cause] for piece in pieces]) for cause in CAUSES}
    inertia = _largest_inertia(case, stacked["segment"], stacked["position"], stacked["lever"])
    del stacked["lever"]
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

    @property
    def middle(self) -> float:
        """Phase time half way."""
        return 0.5 * (self.begin + self.end)

    def cut(self, at: FloatArray) -> Iterator[_Stretch]:
        """Split at positions on (−1, 1)."""
        borders = [self.begin, *(self.begin + 0.5 * (at + 1.0) * (self.end - self.begin)), self.end]
        for begin, end in zip(borders[:-1], borders[1:], strict=True):
            yield _Stretch(self.phase, begin, end, self.phase_start)


def _largest_inertia(case: Case, segment: NDArray[np.intp], position: FloatArray, lever: FloatArray) -> float:
    """Over every segment with its payload, of load and mechanism at the driven shaft. [kg·m², or kg]"""
    mechanism = case.mechanism
    if mechanism.resolved_by_nodes:
        return float(np.max(mechanism.inertia_at_shaft(np.array([s.payload for s in case.segments]))))
    return max(
        mechanism.inertia_over(position[segment == i], lever[segment == i], case.segments[i].payload)
        for i in np.unique(segment)
    )


@dataclass(frozen=True)
class _Place:
    """What a stretch needs to know of its segment: where it starts, and how finely it must be cut."""

    segment: Segment
    mechanism: Mechanism
    at_shaft: bool
    origin: float
    factors: tuple[float, float, float]  # of the stage, by direction of power
    scale: Mapping[str, float]  # sizes that interpolation errors are held against; empty: nodes resolve it

    def kinks(self, stated: FloatArray) -> FloatArray:
        """Kinks of the geometry within a stretch, in the coordinate of the cycle."""
        ends = np.array([stated.min(), stated.max()]) + self.origin
        return self.mechanism.borders(ends, self.at_shaft)


def _pieces(case: Case) -> Iterator[dict[str, Any]]:
    start = 0.0
    for index, place in enumerate(_places(case)):
        phase_start = 0.0
        for phase in place.segment.phases:
            for part in _halves(phase, phase_start):
                for smooth in _at_kinks(part, place):
                    for stretch in smooth.cut(roots(phase.kinematics(smooth.tau)[1])):
                        for one_way in _one_way(stretch, place):
                            for even in one_way.cut(_process_kinks(one_way, place)):
                                for piece in _same_power(even, place):
                                    yield {"segment": index, "start_s": start, **piece}
                                    start += piece["duration_s"]
            phase_start += phase.duration_s


def _places(case: Case) -> tuple[_Place, ...]:
    factors = _stage_factors(case.mechanism)
    places, origin = [], 0.0
    for segment in case.segments:
        places.append(_Place(segment, case.mechanism, case.motion_at_shaft, origin, factors, {}))
        if segment.phases:
            last = segment.phases[-1]
            origin += float(last.kinematics(np.array([last.duration_s]))[0][0])
    if case.mechanism.resolved_by_nodes:
        return tuple(places)
    scale: dict[str, float] = {name: 0.0 for name in _RESOLVED}
    for place in places:
        for phase in place.segment.phases:
            for part in _halves(phase):
                found = _load(part, place)
                # Causes may cancel, but their rounding does not: the sum of their sizes is the measure.
                size = found["efforts"].size
                found |= {"effort": size, "lossless_torque": size * found["lever"]}
                for name in _RESOLVED:
                    scale[name] = max(scale[name], float(np.max(np.abs(found[name]))))
    return tuple(replace(place, scale=scale) for place in places)


def _stage_factors(mechanism: Mechanism) -> tuple[float, float, float]:
    """`stage_factor` at standstill, motoring and back-driving."""
    forward, back = np.array(mechanism.efficiency_forward), np.array(mechanism.efficiency_back)
    flows = (STANDSTILL, MOTORING, BACK_DRIVING)
    first, second, third = (float(stage_factor(np.array(flow), forward, back)) for flow in flows)
    return first, second, third


def _process_kinks(stretch: _Stretch, place: _Place) -> FloatArray:
    """Where on (−1, 1) the process load of a stretch without reversal has a kink."""
    load = place.segment.process
    if load is None:
        return np.empty(0)

    def position(tau: FloatArray) -> FloatArray:
        stated = place.origin + stretch.phase.kinematics(tau)[0]
        return np.asarray(place.mechanism.transfer(stated, place.at_shaft).position)

    length = stretch.end - stretch.begin
    if load.over == TIME:
        begin = stretch.phase_start + stretch.begin
        tau = load.kinks_between(begin, begin + length) - stretch.phase_start
    else:
        x = position(np.array([stretch.begin, stretch.end]))
        knots = load.kinks_between(float(x.min()), float(x.max()))
        rising = x[1] > x[0]
        low, high = np.full_like(knots, stretch.begin), np.full_like(knots, stretch.end)
        for _ in range(60):  # position is monotonic here: bisection reaches rounding
            middle = 0.5 * (low + high)
            before = (position(middle) < knots) == rising
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


def _halves(phase: Phase, phase_start: float = 0.0) -> Iterator[_Stretch]:
    """The phase in parts of at most half a sine period, which the nodes resolve to rounding."""
    turns = abs(phase.sine_frequency_rad_s) * phase.duration_s / np.pi if phase.sine_amplitude else 0.0
    parts = max(1, int(np.ceil(turns - 1e-9)))
    borders = np.linspace(0.0, phase.duration_s, parts + 1)
    for begin, end in zip(borders[:-1], borders[1:], strict=True):
        yield _Stretch(phase, float(begin), float(end), phase_start)


def _at_kinks(part: _Stretch, place: _Place) -> Iterator[_Stretch]:
    """Cut where the geometry has a kink, so that what follows is smooth."""
    if not place.scale:
        yield part
        return
    stated = part.phase.kinematics(part.tau)[0]
    found = [roots(stated + place.origin - kink) for kink in place.kinks(stated)]
    yield from part.cut(np.unique(np.concatenate(found)) if found else np.empty(0))


def _one_way(stretch: _Stretch, place: _Place) -> Iterator[_Stretch]:
    """Cut at dead centres, where the load turns back under a shaft that turns on; resolve what is left."""
    if not place.scale:
        yield stretch
        return
    for fine in _resolved(stretch, place, ("speed", "shaft_speed")):
        for one_way in fine.cut(roots(_load(fine, place)["speed"])):
            yield from _resolved(one_way, place, tuple(place.scale))


def _resolved(stretch: _Stretch, place: _Place, names: tuple[str, ...], depth: int = 0) -> Iterator[_Stretch]:
    """Halve until the interpolant of each function meets the function at the nodes of both halves."""
    parts = tuple(stretch.cut(np.zeros(1)))
    whole = _load(stretch, place)
    values = np.array([whole[name] for name in names])
    allowed = _RESOLUTION * np.array([place.scale[name] for name in names])
    for part, matrix in zip(parts, _to_halves(), strict=True):
        exact = _load(part, place, whole["load_direction"])
        error = np.max(np.abs(values @ matrix - np.array([exact[name] for name in names])), axis=1)
        if np.any(error > allowed) and depth < _DEEPEST:
            for finer in parts:
                yield from _resolved(finer, place, names, depth + 1)
            return
    yield stretch


@lru_cache(maxsize=1)
def _to_halves() -> tuple[FloatArray, FloatArray]:
    """Matrices from node values to the interpolant at the nodes of the first and second half."""
    first = 0.5 * (lobatto()[0] - 1.0)
    return interpolate(np.eye(NODES), first), interpolate(np.eye(NODES), first + 1.0)


def _same_power(stretch: _Stretch, place: _Place) -> Iterator[dict[str, Any]]:
    """Cut where the power of the load, then that of the driven shaft, changes direction."""
    for one_way in stretch.cut(roots(_load(stretch, place)["effort"])):
        torque = _load(one_way, place)["shaft_torque"]
        for piece in one_way.cut(roots(torque)):
            loaded = _load(piece, place)
            yield loaded | {"by_cause": _by_cause(loaded)}


def _sign(speed: FloatArray) -> float:
    """Direction of motion on a piece, from its middle; 0 at rest."""
    middle, scale = speed[NODES // 2], np.max(np.abs(speed))
    return float(np.sign(middle)) if scale > 0.0 and abs(middle) > 1e-12 * scale else 0.0


def _load(stretch: _Stretch, place: _Place, direction_of_load: float | None = None) -> dict[str, Any]:
    """Everything at the nodes of one stretch, with one direction of motion and of power on all of it."""
    segment, mechanism = place.segment, place.mechanism
    q, dq, ddq, _ = stretch.phase.kinematics(stretch.tau)
    geometry = mechanism.transfer(q + place.origin, place.at_shaft)
    x = geometry.position
    v, a = geometry.load_rate * dq, geometry.load_rate * ddq + geometry.load_bend * dq**2
    shaft_speed = geometry.shaft_rate * dq
    shaft_acceleration = geometry.shaft_rate * ddq + geometry.shaft_bend * dq**2
    lever = geometry.lever
    load_sign = _sign(v) if direction_of_load is None else direction_of_load
    direction = np.full(NODES, load_sign)
    efforts = mechanism.efforts(
        x, v, a, direction, np.full(NODES, segment.payload), _process(stretch, segment, x, direction[0])
    )
    effort = efforts.total
    load_flow = _flow(effort, direction)
    factor = place.factors[load_flow]
    shaft_direction = np.full(NODES, _sign(shaft_speed))
    inertia_torque, gravity_torque = mechanism.shaft_torques(geometry, shaft_speed, shaft_acceleration)
    drag = mechanism.shaft_friction_nm * shaft_direction
    torque = effort * lever * factor + inertia_torque + gravity_torque + drag
    motor_acceleration = (
        shaft_acceleration + mechanism.specific_gravity_m_s2 + mechanism.specific_friction_m_s2 * direction
    )
    return {
        "duration_s": stretch.end - stretch.begin,
        "direction": shaft_direction[0],
        "load_direction": load_sign,
        "lever": lever,
        "flow": _flow(torque, shaft_direction),
        "brake_closed": segment.brake_closed,
        "position": x,
        "speed": v,
        "acceleration": a,
        "effort": effort,
        "efforts": efforts,
        "factor": factor,
        "drag": drag,
        "inertia_torque": inertia_torque,
        "gravity_torque": gravity_torque,
        "lossless_torque": effort * lever,
        "shaft_speed": shaft_speed,
        "shaft_acceleration": shaft_acceleration,
        "shaft_torque": torque,
        "motor_acceleration": motor_acceleration * (0.0 if segment.brake_closed else 1.0),
    }


def _by_cause(loaded: Mapping[str, Any]) -> dict[str, FloatArray]:
    """Torque at the driven shaft in its parts."""
    efforts, lever = loaded["efforts"], loaded["lever"]
    return {
        "inertia": efforts.inertia * lever + loaded["inertia_torque"],
        "gravity": efforts.gravity * lever + loaded["gravity_torque"],
        "friction": efforts.friction * lever + loaded["drag"],
        "process": efforts.process * lever,
        "losses": loaded["lossless_torque"] * (loaded["factor"] - 1.0),
    }


def _flow(torque: FloatArray, direction: FloatArray) -> int:
    """Direction of power on a piece where neither torque nor direction changes sign."""
    if direction[0] == 0.0:
        return STANDSTILL
    # The mean carries the sign of the piece; its ends may be zero or rounding beyond zero.
    return MOTORING if float(np.mean(torque) * direction[0]) >= 0.0 else BACK_DRIVING
