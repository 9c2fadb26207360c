"""Instants of the cycle that a stop is tried from, and the torques that act on the motor shaft then."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.mechanisms.base import Transfer
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.sizing.checks.base import Sets

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

_MOST_COMPARED = 24  # instants that others are held against; where more are needed few can be left out


@dataclass(frozen=True)
class StopInstants:
    """Instants from which a stop can be worst; each field has shape (I,).

    Nodes of the cycle, at rest in both directions, without those that another makes superfluous. Torques are at the
    driven shaft, in the sense of the motion that is to end.
    """

    at_s: FloatArray
    speed_rad_s: FloatArray  # magnitude, driven shaft
    ratio: FloatArray  # |dφ/dx|
    inertia_kg_m2: FloatArray
    load_nm: FloatArray  # gravity, and process where it drives; positive opposes
    friction_nm: FloatArray
    own_load_m_s2: FloatArray  # gravity on the motor's own moving mass (linear motors), as `load_nm`
    own_friction_m_s2: FloatArray

    def at_rest(self) -> StopInstants:
        """The same loads, held by the motor when torque is removed."""
        return replace(self, speed_rad_s=np.zeros_like(self.speed_rad_s))


@dataclass(frozen=True)
class ShaftBalance:
    """What acts on the motor shafts of S sets at I instants, shape (S, I); torques oppose the motion."""

    speed_rad_s: FloatArray
    own_inertia_kg_m2: FloatArray  # rotor and gearhead, shape (S, 1)
    inertia_kg_m2: FloatArray  # everything
    load_nm: FloatArray
    friction_nm: FloatArray

    @classmethod
    def of(
        cls, instants: StopInstants, motors: MotorParameters, gearheads: GearheadParameters
    ) -> ShaftBalance:
        """Bring the instants to the shafts of S motors, each with its gearhead."""
        n = gearheads.ratio[:, None]
        own = (motors.rotor_inertia_kg_m2 + gearheads.inertia_kg_m2)[:, None]
        # A linear motor carries its own mass along: gravity and guide friction act on it too.
        mass = motors.rotor_inertia_kg_m2[:, None]
        friction = motors.friction_torque_nm[:, None] + gearheads.no_load_torque_nm[:, None]
        return cls(
            speed_rad_s=n * instants.speed_rad_s,
            own_inertia_kg_m2=own,
            inertia_kg_m2=own + instants.inertia_kg_m2 / n**2,
            load_nm=instants.load_nm / n + mass * instants.own_load_m_s2,
            friction_nm=instants.friction_nm / n + friction + mass * instants.own_friction_m_s2,
        )


def stop_instants(sets: Sets) -> StopInstants:
    """Instants of the cycle that a stop is tried from.

    Parameters
    ----------
    sets : Sets
        Holds case and cycle. [-]

    Returns
    -------
    StopInstants
        At least one. [-]
    """
    demand = sets.demand
    moves = bool(np.any(demand.direction))
    parts: list[FloatArray] = []
    for number, segment in enumerate(sets.case.segments):
        for sense in (1.0, -1.0, 0.0):
            pieces = np.flatnonzero((demand.segment == number) & (demand.direction == sense))
            if not len(pieces) or (moves and sense == 0.0 and segment.brake_closed):
                continue
            geometry, r = _geometry(sets, pieces)
            for direction in (sense,) if sense else (1.0, -1.0):
                found = _rows(sets, pieces, geometry, r, direction, segment)
                # In a dead centre nothing pulls at the shaft.
                parts.append(found[:, np.isfinite(r)] if moves else found)
    rows = np.concatenate(parts, axis=1)
    return StopInstants(*rows[:, _candidates(StopInstants(*rows))])


def _rows(
    sets: Sets, pieces: IndexArray, geometry: Transfer, r: FloatArray, direction: float, segment: Segment
) -> FloatArray:
    """Fields of `StopInstants` at the nodes of some pieces, shape (8, nodes)."""
    demand, mechanism = sets.demand, sets.case.mechanism
    x, one = demand.position[pieces].ravel(), np.ones(r.shape)
    inertia, weight = mechanism.shaft_torques(geometry, 0.0 * one, one)[:2]
    sense = direction * np.sign(r)
    e = mechanism.efforts(x, 0.0 * one, one, sense, segment.payload * one, segment.process_effort * one)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.abs(r)
        driving = np.minimum(sense * e.process / ratio, 0.0)
        fields = (
            demand.time_s[pieces].ravel(),
            np.abs(demand.shaft_speed[pieces]).ravel(),
            ratio,
            e.inertia / ratio / ratio + inertia,
            sense * e.gravity / ratio + direction * weight + driving,
            np.abs(e.friction / ratio) + mechanism.shaft_friction_nm,
            direction * mechanism.specific_gravity_m_s2 * one,
            mechanism.specific_friction_m_s2 * one,
        )
    return np.stack([np.broadcast_to(np.asarray(field, dtype=float), r.shape) for field in fields])


def _candidates(instants: StopInstants) -> IndexArray:
    """Instants that no other makes superfluous, whatever motor, gearhead, torque and delay; ascending.

    Notes
    -----
    Way, time and energy grow with the speed, and shrink with ratio, load and friction. Over the inertia they are
    monotone, or convex where the load drives: a smaller one gathers more speed within the delay, a larger one takes
    longer to brake. So the worst is where none is worse in all of these with an inertia at least, or at most, as
    large. A load that comes to rest within the delay and falls back goes further with less speed, less inertia and
    more load. The gearhead sees most where the load and friction that slow the rotor are largest or smallest.
    """
    speed, ratio, inertia, load, friction = (
        _rounded(field)
        for field in (
            instants.speed_rad_s,
            instants.ratio,
            instants.inertia_kg_m2,
            instants.load_nm,
            instants.friction_nm,
        )
    )
    total = _rounded(instants.load_nm + instants.friction_nm)
    kept: list[IndexArray] = []
    for own in np.unique(instants.own_load_m_s2):
        some = np.flatnonzero(instants.own_load_m_s2 == own)
        for worse in (
            (speed, -ratio, inertia, -load, -friction),
            (speed, -ratio, -inertia, -load, -friction),
            (-speed, -ratio, -inertia, load, -friction),
            (total, -inertia),
        ):
            kept.append(some[_front(np.stack(worse, axis=1)[some])])
    return np.unique(np.concatenate(kept))


def _rounded(values: FloatArray) -> FloatArray:
    """Values without their last digits, which would tell equal instants apart."""
    finite = np.abs(values[np.isfinite(values)])
    step = 1e-12 * float(finite.max(initial=0.0))
    return np.round(values / step) * step if step > 0.0 else values


def _front(worse: FloatArray) -> IndexArray:
    """Rows that no other row reaches in every column, of equal rows one; with more where there are many of them."""
    # Rows that are large throughout come first: they make most others superfluous.
    span = np.maximum(np.ptp(worse, axis=0), 1e-300)
    left = np.argsort(-(worse / span).sum(axis=1), kind="stable")
    at = 0
    while at < min(len(left), _MOST_COMPARED):
        beyond = np.any(worse[left] > worse[left[at]], axis=1)
        beyond[at] = True
        at = int(np.count_nonzero(beyond[: at + 1]))
        left = left[beyond]
    return left


def _geometry(sets: Sets, pieces: IndexArray) -> tuple[Transfer, FloatArray]:
    """Load and shaft at the nodes of some pieces and the ratio between them, on the right side of dead centres."""
    case, demand = sets.case, sets.demand
    at_shaft = case.motion_at_shaft and case.recording is None
    stated = _stated(case, demand.time_s[pieces]) if at_shaft else demand.position[pieces]
    with np.errstate(divide="ignore", invalid="ignore"):
        geometry = case.mechanism.transfer(stated.ravel(), at_shaft)
        r = geometry.shaft_rate / geometry.load_rate
    return geometry, np.broadcast_to(np.asarray(r, dtype=float), (stated.size,))


def _stated(case: Case, time_s: FloatArray) -> FloatArray:
    """Coordinates of the duty cycle at instants. [m or rad]"""
    left, open_ = time_s.astype(float), np.ones(time_s.shape, dtype=bool)
    origin, answer = 0.0, np.zeros(time_s.shape)
    for segment in case.segments:
        for phase in segment.phases:
            now = open_ & (left <= phase.duration_s)
            if now.any():
                answer[now] = origin + phase.kinematics(np.maximum(left[now], 0.0))[0]
            open_ &= ~now
            left = left - phase.duration_s
        origin += segment.phases[-1].end()[0] if segment.phases else 0.0
    return np.where(open_, origin, answer)
