"""Stops and falls of S sets from the worst instants of the cycle.

Losses of transmission stages are left out, since they only shorten a stop; so is a process force that helps.
Results are computed from entered data and must be measured on the machine; they say nothing about persons.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.braking import Stop, shorted_current_peak, shorted_torque, stop
from actuator_sizing.core.machine import JudgedMotor, judge
from actuator_sizing.core.parameters import _Columns
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.checks.motor import current_limited_torque
from actuator_sizing.sizing.stop_instants import ShaftBalance, StopInstants, stop_instants

FloatArray = NDArray[np.float64]

_SETS_PER_CHUNK = 256
#: Instants, the longest by a rough integration, from which a stop by the winding is integrated in full.
_FEW = 6
_ROUGH_ORDER = 1


@dataclass(frozen=True)
class StopResults(_Columns):
    """Stops of one kind from the worst instant; each field has shape (S,). Way in m or rad of the load."""

    distance: FloatArray
    distance_at_s: FloatArray
    time_s: FloatArray
    braking_energy_j: FloatArray  # into motor or brake, largest over the instants
    current_peak_a: FloatArray  # first peak of the shorted winding at the speed left after the delay
    gearhead_torque_nm: FloatArray  # at its output
    instant: NDArray[np.intp]  # which of `stop_instants` is the worst


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
        Shape (S,); the current is its first peak. [-]
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
    return _stops(sets, sets.once(stop_instants), closing, brake_torque(sets))


def brake_torque(sets: Sets) -> FloatArray:
    """Torque of the holding brake, hot and worn as the case says, shape (S,); NaN where not known. [N·m]"""
    factor = sets.option("brake torque factor")
    return np.asarray(sets.motors.brake_torque_nm * (1.0 if np.isnan(factor) else factor))


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
    return StopResults.joined(parts)


def _chunk(
    sets: Sets,
    some: slice,
    instants: StopInstants,
    judged: JudgedMotor,
    extra_delay_s: FloatArray,
    torque: FloatArray | None,
) -> StopResults:
    motors, gearheads = sets.motors.take(some), sets.gearheads.take(some)
    at = ShaftBalance.of(instants, motors, gearheads)
    n, load, friction = gearheads.ratio[:, None], at.load_nm, at.friction_nm
    R, K, X = (
        value[some][:, None, None]
        for value in (judged.resistance_ohm, judged.torque_constant_nm_per_a, judged.reactance_per_speed)
    )

    def by_winding(omega: FloatArray) -> FloatArray:
        return shorted_torque(omega, R, K, X)

    delay = (sets.option("stop reaction time") + extra_delay_s)[:, None]
    if torque is None:
        found = _stops_by_winding(at, delay, by_winding, n * instants.ratio)
    else:
        found = stop(at.speed_rad_s, at.inertia_kg_m2, load, friction, delay, torque[:, None])
    distance = found.angle_rad / (n * instants.ratio)
    row = np.arange(len(distance))
    unknown = np.isnan(delay[:, 0]) | (np.isnan(torque) if torque is not None else False)
    worst = np.where(np.isnan(distance), -1.0, distance).argmax(axis=1)
    endless = np.isinf(distance)
    fastest_endless = np.where(endless, found.braking_speed_rad_s, -1.0).argmax(axis=1)
    worst = np.where(endless.any(axis=1), fastest_endless, worst)
    fastest = found.braking_speed_rad_s.max(axis=1)
    current = shorted_current_peak(fastest, *(value[:, 0, 0] for value in (R, K, X)))
    slowing = (load + friction) / at.inertia_kg_m2
    if torque is None:
        energy = 0.5 * at.inertia_kg_m2 * found.braking_speed_rad_s**2
        through = np.full(len(distance), np.nan)
    else:
        with np.errstate(invalid="ignore"):
            energy = np.where(torque[:, None] > 0.0, torque[:, None] * found.braking_angle_rad, 0.0)
        slowing = slowing + torque[:, None] / at.inertia_kg_m2
        # What slows the rotor itself does not pass the gearhead.
        through = np.abs(n * (torque[:, None] - at.own_inertia_kg_m2 * slowing)).max(axis=1)

    def known(values: FloatArray) -> FloatArray:
        return np.where(unknown, np.nan, values)

    return StopResults(
        distance=known(distance[row, worst]),
        distance_at_s=known(instants.at_s[worst]),
        time_s=known(found.time_s.max(axis=1)),
        braking_energy_j=known(energy.max(axis=1)),
        current_peak_a=known(current),
        gearhead_torque_nm=known(through),
        instant=worst,
    )


def _stops_by_winding(
    at: ShaftBalance, delay_s: FloatArray, braking: Callable[[FloatArray], FloatArray], scale: FloatArray
) -> Stop:
    """Stops by a torque that must be integrated, in full only from the instants that can be the worst.

    Angle and time of the others are zero, or infinite.
    """
    given = (at.speed_rad_s, at.inertia_kg_m2, at.load_nm, at.friction_nm)
    if at.speed_rad_s.shape[1] <= 2 * _FEW:
        return stop(*given, delay_s, braking)
    rough = stop(*given, delay_s, braking, _ROUGH_ORDER)
    longest = [
        np.argpartition(np.nan_to_num(-values, nan=np.inf), _FEW, axis=1)[:, :_FEW]
        for values in (rough.angle_rad / scale, rough.time_s)
    ]
    chosen = np.concatenate(longest, axis=1)
    whole = np.broadcast_arrays(*given)
    speed, inertia, load, friction = (np.take_along_axis(value, chosen, axis=1) for value in whole)
    found = stop(speed, inertia, load, friction, delay_s, braking)

    def placed(all_: FloatArray, some: FloatArray) -> FloatArray:
        answer = np.where(np.isfinite(all_), 0.0, all_)
        np.put_along_axis(answer, chosen, some, axis=1)
        return answer

    return replace(
        rough,
        time_s=placed(rough.time_s, found.time_s),
        angle_rad=placed(rough.angle_rad, found.angle_rad),
    )


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


def drops(sets: Sets) -> StopResults:
    """Fall of a held load from rest until the holding brake has stopped it.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    StopResults
        Shape (S,), from the worst segment; NaN where brake torque or closing time are not known, infinite where the
        brake does not hold. [-]
    """
    closing = sets.catalog_values("motors", "brake_closing_time")
    return _stops(sets, sets.once(stop_instants).at_rest(), closing, brake_torque(sets))


def drop_distance(sets: Sets) -> FloatArray:
    """Way that a held load sinks, in m or rad of the load, shape (S,); NaN and infinite as for `drops`. [-]"""
    return sets.once(drops).distance


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
