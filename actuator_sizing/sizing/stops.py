"""Stops and falls of S sets from the worst instants of the cycle.

Losses of transmission stages are left out, since they only shorten a stop; so is a process force that helps.
Results are computed from entered data and must be measured on the machine; they say nothing about persons.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.braking import shorted_current, shorted_torque, stop
from actuator_sizing.core.machine import JudgedMotor, judge
from actuator_sizing.core.parameters import _Columns
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.checks.motor import current_limited_torque

FloatArray = NDArray[np.float64]

_SETS_PER_CHUNK = 256


@dataclass(frozen=True)
class StopInstants:
    """Instants from which a stop can be worst; each field has shape (I,).

    The fastest of each segment and direction, and both directions of each segment at rest. Torques are
    at the driven shaft, in the sense of the motion that is to end.
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
class StopResults(_Columns):
    """Stops of one kind from the worst instant; each field has shape (S,). Way in m or rad of the load."""

    distance: FloatArray
    distance_at_s: FloatArray
    time_s: FloatArray
    braking_energy_j: FloatArray  # into motor or brake, largest over the instants
    current_peak_a: FloatArray  # of the shorted winding at the speed left after the delay
    gearhead_torque_nm: FloatArray  # at its output


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
    for number, segment in enumerate(sets.case.segments):
        for sense in (1.0, -1.0, 0.0):
            pieces = np.flatnonzero((demand.segment == number) & (demand.direction == sense))
            if not len(pieces) or (moves and sense == 0.0 and segment.brake_closed):
                continue
            speed = np.abs(demand.shaft_speed[pieces])
            piece, node = np.unravel_index(speed.argmax(), speed.shape)
            where = (pieces[piece], node)
            x = demand.position[where]
            r = float(mechanism.ratio_at(np.array([x]))[0][0])
            for direction in (sense,) if sense else (1.0, -1.0):
                e = _efforts(sets, x, direction * np.sign(r), segment.payload, segment.process_effort)
                inertia, gravity, friction, process = (value / abs(r) for value in e)
                driving = min(direction * np.sign(r) * process, 0.0)
                load = direction * np.sign(r) * gravity + driving
                rows.append(
                    (
                        demand.time_s[where],
                        float(speed[piece, node]),
                        abs(r),
                        inertia / abs(r) + mechanism.shaft_inertia_kg_m2,
                        load,
                        abs(friction) + mechanism.shaft_friction_nm,
                        direction * mechanism.specific_gravity_m_s2,
                        mechanism.specific_friction_m_s2,
                    )
                )
    return StopInstants(*(np.array(column) for column in zip(*rows, strict=True)))


def _efforts(
    sets: Sets, position: float, direction: float, payload: float, process: float
) -> tuple[float, float, float, float]:
    """Inertia per acceleration, gravity, Coulomb friction and process effort at the load."""
    one = np.ones(1)
    e = sets.case.mechanism.efforts(
        position * one, 0.0 * one, one, direction * one, payload * one, process * one
    )
    return tuple(float(np.ravel(part)[0]) for part in (e.inertia, e.gravity, e.friction, e.process))  # type: ignore[return-value]


def controlled_stops(sets: Sets) -> StopResults:
    """Stop at the current limit of motor and drive (stop category 1 or 2 of IEC 60204-1).

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    StopResults
        Shape (S,). [-]
    """
    return _stops(sets, sets.once(stop_instants), np.zeros(len(sets)), current_limited_torque(sets))


def shorted_stops(sets: Sets) -> StopResults:
    """Stop by the shorted winding alone (stop category 0 of IEC 60204-1, power removed at once).

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    StopResults
        Shape (S,); the current is the quasi-steady one. [-]
    """
    return _stops(sets, sets.once(stop_instants), np.zeros(len(sets)), None)


def brake_stops(sets: Sets) -> StopResults:
    """Stop by the holding brake alone after its closing time (stop category 0 of IEC 60204-1).

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    StopResults
        Shape (S,); NaN where brake torque or closing time are not known. [-]
    """
    closing = sets.catalog_values("motors", "brake_closing_time")
    return _stops(sets, sets.once(stop_instants), closing, sets.motors.brake_torque_nm)


def coasting_stops(sets: Sets) -> StopResults:
    """Stop by friction alone (stop category 0 of IEC 60204-1 without brake).

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    StopResults
        Shape (S,); infinite where the load goes on driving. [-]
    """
    return _stops(sets, sets.once(stop_instants), np.zeros(len(sets)), np.zeros(len(sets)))


def _stops(
    sets: Sets, instants: StopInstants, extra_delay_s: FloatArray, torque: FloatArray | None
) -> StopResults:
    """Stops by a torque, or by the shorted winding where none is given."""
    judged = judge(sets.motors, sets.surroundings)
    parts = []
    for start in range(0, len(sets), _SETS_PER_CHUNK):
        some = slice(start, min(start + _SETS_PER_CHUNK, len(sets)))
        mine = None if torque is None else torque[some]
        parts.append(_chunk(sets, some, instants, judged, extra_delay_s[some], mine))
    return StopResults(*(np.concatenate(column) for column in zip(*parts, strict=True)))


def _chunk(
    sets: Sets,
    some: slice,
    instants: StopInstants,
    judged: JudgedMotor,
    extra_delay_s: FloatArray,
    torque: FloatArray | None,
) -> tuple[FloatArray, ...]:
    motors, gearheads = sets.motors.take(some), sets.gearheads.take(some)
    n = gearheads.ratio[:, None]
    own = (motors.rotor_inertia_kg_m2 + gearheads.inertia_kg_m2)[:, None]
    inertia = own + instants.inertia_kg_m2 / n**2
    # A linear motor carries its own mass along: gravity and guide friction act on it too.
    mass = motors.rotor_inertia_kg_m2[:, None]
    load = instants.load_nm / n + mass * instants.own_load_m_s2
    friction = (
        instants.friction_nm / n
        + motors.friction_torque_nm[:, None]
        + gearheads.no_load_torque_nm[:, None]
        + mass * instants.own_friction_m_s2
    )
    R, K, X = (
        value[some][:, None, None]
        for value in (judged.resistance_ohm, judged.torque_constant_nm_per_a, judged.reactance_per_speed)
    )

    def by_winding(omega: FloatArray) -> FloatArray:
        return shorted_torque(omega, R, K, X)

    braking = by_winding if torque is None else torque[:, None]
    delay = (sets.option("stop reaction time") + extra_delay_s)[:, None]
    found = stop(n * instants.speed_rad_s, inertia, load, friction, delay, braking)
    distance = found.angle_rad / (n * instants.ratio)
    row = np.arange(len(distance))
    unknown = np.isnan(delay[:, 0]) | (np.isnan(torque) if torque is not None else False)
    worst = np.where(np.isnan(distance), -1.0, distance).argmax(axis=1)
    current = shorted_current(found.braking_speed_rad_s, R[:, :, 0], K[:, :, 0], X[:, :, 0]).max(axis=1)
    slowing = (load + friction) / inertia
    if torque is None:
        energy = 0.5 * inertia * found.braking_speed_rad_s**2
        through = np.full(len(distance), np.nan)
    else:
        with np.errstate(invalid="ignore"):
            energy = np.where(torque[:, None] > 0.0, torque[:, None] * found.braking_angle_rad, 0.0)
        slowing = slowing + torque[:, None] / inertia
        # What slows the rotor itself does not pass the gearhead.
        through = np.abs(n * (torque[:, None] - own * slowing)).max(axis=1)
    values = (
        distance[row, worst],
        instants.at_s[worst],
        found.time_s.max(axis=1),
        energy.max(axis=1),
        current,
        through,
    )
    return tuple(np.where(unknown, np.nan, value) for value in values)


def gravity_torque(sets: Sets) -> tuple[FloatArray, FloatArray]:
    """Largest torque of gravity at the motor shaft, lossless, without help from friction.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    torque_nm : ndarray, shape (S,)
        Magnitude. [N·m]
    at_s : ndarray, shape (S,)
        When in the cycle. [s]
    """
    demand = sets.demand
    gravity = np.abs(demand.torque_by_cause["gravity"])
    piece, node = np.unravel_index(gravity.argmax(), gravity.shape)
    own = sets.motors.rotor_inertia_kg_m2 * abs(sets.case.mechanism.specific_gravity_m_s2)
    torque = float(gravity[piece, node]) / sets.gearheads.ratio + own
    return torque, np.full(len(sets), float(demand.time_s[piece, node]))


def drop_distance(sets: Sets) -> FloatArray:
    """Way a held load sinks from rest until the holding brake has stopped it.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    ndarray, shape (S,)
        In m or rad of the load, largest over the segments; NaN where brake torque or closing time are not
        known, infinite where the brake does not hold. [-]
    """
    closing = sets.catalog_values("motors", "brake_closing_time")
    resting = sets.once(stop_instants).at_rest()
    return _stops(sets, resting, closing, sets.motors.brake_torque_nm).distance


def stop_quantities(sets: Sets, index: int) -> dict[str, float | None]:
    """Stops of one set for results.json: way in m or rad of the load, time, energy, current.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which set. [-]

    Returns
    -------
    dict
        SI values; None where not known or where the axis never stops. [-]
    """
    way = "m" if sets.case.mechanism.coordinate == "linear" else "rad"
    answer: dict[str, float] = {}
    own = sets.only(index)
    kinds = {
        "controlled": controlled_stops,
        "shorted": shorted_stops,
        "brake": brake_stops,
        "coasting": coasting_stops,
    }
    for kind, study in kinds.items():
        found = own.once(study)
        answer[f"stop_{kind}_distance_{way}"] = found.distance[0]
        answer[f"stop_{kind}_time_s"] = found.time_s[0]
    answer["stop_brake_energy_j"] = own.once(brake_stops).braking_energy_j[0]
    answer["stop_shorted_current_a"] = own.once(shorted_stops).current_peak_a[0]
    answer["gravity_torque_nm"] = own.once(gravity_torque)[0][0]
    answer[f"drop_distance_{way}"] = own.once(drop_distance)[0]
    return {name: float(value) if np.isfinite(value) else None for name, value in answer.items()}
