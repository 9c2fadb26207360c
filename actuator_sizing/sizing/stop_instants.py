"""Instants of the cycle that a stop is tried from, and the torques that act on the motor shaft then."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import product

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.mechanisms.base import Transfer
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.sizing.checks.base import Sets

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class StopInstants:
    """Instants from which a stop can be worst; each field has shape (I,).

    The fastest of each segment and direction, where gravity changes along the way also the one that it drives most,
    and both directions of each segment at rest. Torques are at the driven shaft, in the sense of the motion that is
    to end.
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
        At least one for each segment. [-]
    """
    demand, mechanism = sets.demand, sets.case.mechanism
    rows: list[tuple[float, ...]] = []
    moves = bool(np.any(demand.direction))
    pull = demand.torque_by_cause["gravity"]
    for number, segment in enumerate(sets.case.segments):
        for sense in (1.0, -1.0, 0.0):
            pieces = np.flatnonzero((demand.segment == number) & (demand.direction == sense))
            if not len(pieces) or (moves and sense == 0.0 and segment.brake_closed):
                continue
            speed = np.abs(demand.shaft_speed[pieces])
            # Of instants equally fast, the one with the largest lever; at a dead centre the load has none at all.
            lever = np.abs(demand.speed[pieces])
            tried = {int(np.where(speed >= (1.0 - 1e-9) * speed.max(), lever, -1.0).argmax())}
            if sense and float(np.ptp(pull[pieces])) > 1e-9 * float(np.max(np.abs(pull))):
                led = lever > 1e-9 * lever.max()
                tried.add(int(np.where(led, sense * pull[pieces], np.inf).argmin()))
            for flat, direction in product(sorted(tried), (sense,) if sense else (1.0, -1.0)):
                piece, node = np.unravel_index(flat, speed.shape)
                where = (pieces[piece], node)
                x = demand.position[where]
                geometry, r = _geometry(sets, where)
                if moves and not np.isfinite(r):
                    continue  # at rest in a dead centre nothing pulls at the shaft
                own, weight = (
                    float(part[0]) for part in mechanism.shaft_torques(geometry, np.zeros(1), np.ones(1))
                )
                e = _efforts(sets, x, direction * np.sign(r), segment.payload, segment.process_effort)
                inertia, gravity, friction, process = (value / abs(r) for value in e)
                driving = min(direction * np.sign(r) * process, 0.0)
                load = direction * np.sign(r) * gravity + direction * weight + driving
                rows.append(
                    (
                        demand.time_s[where],
                        float(speed[piece, node]),
                        abs(r),
                        inertia / abs(r) + own,
                        load,
                        abs(friction) + mechanism.shaft_friction_nm,
                        direction * mechanism.specific_gravity_m_s2,
                        mechanism.specific_friction_m_s2,
                    )
                )
    return StopInstants(*(np.array(column) for column in zip(*rows, strict=True)))


def _geometry(sets: Sets, where: tuple[np.intp, np.intp]) -> tuple[Transfer, float]:
    """Load and shaft at one node and the ratio between them, on the right side of every dead centre."""
    case, demand = sets.case, sets.demand
    at_shaft = case.motion_at_shaft and case.recording is None
    stated = _stated(case, float(demand.time_s[where])) if at_shaft else float(demand.position[where])
    with np.errstate(divide="ignore", invalid="ignore"):
        geometry = case.mechanism.transfer(np.array([stated]), at_shaft)
        return geometry, float((geometry.shaft_rate / geometry.load_rate)[0])


def _stated(case: Case, time_s: float) -> float:
    """Coordinate of the duty cycle at an instant. [m or rad]"""
    origin = 0.0
    for segment in case.segments:
        for phase in segment.phases:
            if time_s <= phase.duration_s:
                return origin + float(phase.kinematics(max(time_s, 0.0))[0])
            time_s -= phase.duration_s
        origin += segment.phases[-1].end()[0] if segment.phases else 0.0
    return origin


def _efforts(
    sets: Sets, position: float, direction: float, payload: float, process: float
) -> tuple[float, float, float, float]:
    """Inertia per acceleration, gravity, Coulomb friction and process effort at the load."""
    one = np.ones(1)
    e = sets.case.mechanism.efforts(
        position * one, 0.0 * one, one, direction * one, payload * one, process * one
    )
    return tuple(float(np.ravel(part)[0]) for part in (e.inertia, e.gravity, e.friction, e.process))  # type: ignore[return-value]
