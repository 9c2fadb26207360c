"""Demand against what the voltage allows in the plane of torque over speed."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.capability import voltage_limited_current
from actuator_sizing.core.machine import JudgedMotor, torque_of_current
from actuator_sizing.core.quadrature import largest, series_value, to_series
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.pair_course import PairCourse, per_pair

FloatArray = NDArray[np.float64]


def torque_plane(demand: Demand, c: PairCourse, judged: JudgedMotor) -> dict[str, FloatArray]:
    """Where the torque comes closest to what the voltage allows at that speed.

    Parameters
    ----------
    demand : Demand
        The cycle. [-]
    c : PairCourse
        Courses of B pairs. [-]
    judged : JudgedMotor
        Their motors at judged temperatures and minimum bus. [-]

    Returns
    -------
    dict
        Columns ``plane_...`` of `PairResults`: largest utilisation, torque and capacity there, instant, each of
        shape (B,); infinite utilisation where the voltage allows no such torque at all. [-]

    Notes
    -----
    Motoring and braking have limits of their own; each branch is smooth, so each is searched by itself.
    """
    K, s = per_pair(judged.torque_constant_nm_per_a), per_pair(judged.saturation_per_a2)
    motoring, braking = voltage_limited_current(
        per_pair(judged.voltage_available_v),
        np.abs(c.motor_speed_rad_s),
        per_pair(judged.resistance_ohm),
        K,
        per_pair(judged.reactance_per_speed),
    )
    # Torque rises with current only up to the turning point of the saturation curve.
    turning = 1.0 / np.sqrt(3.0 * np.where(s > 0.0, s, np.finfo(float).tiny))
    direction = demand.direction[:, None]
    torque = c.torque_nm * np.where(direction == 0.0, 1.0, direction)
    answer: dict[str, FloatArray] = {}
    for current_limit, demanded in ((motoring, torque), (braking, -torque)):
        demanded = np.where(direction == 0.0, np.abs(torque), demanded)
        reachable = np.nan_to_num(current_limit, nan=0.0)
        capacity = torque_of_current(np.clip(reachable, 0.0, turning), K, s)
        # Above the no-load speed only braking torque keeps within the voltage, and of it a least one is needed.
        most = torque_of_current(np.clip(current_limit, -turning, 0.0), K, s)
        beyond = (capacity <= 0.0) & ~(demanded <= most)  # NaN: no current at all
        ratio = demanded / np.where(capacity > 0.0, capacity, np.inf)
        utilisation, piece, position = largest(ratio)
        at = demand.instant(piece, position)
        row = np.arange(len(at))
        there = series_value((demanded[row, piece] @ to_series(demanded.shape[2]).T).T, position)
        hopeless = beyond.reshape(len(at), -1)
        first = hopeless.argmax(axis=1)
        never = hopeless.any(axis=1)
        utilisation = np.where(never, np.inf, np.maximum(utilisation, 0.0))
        at = np.where(never, demand.time_s.reshape(-1)[first], at)
        there = np.where(never, np.abs(demanded.reshape(len(at), -1)[np.arange(len(at)), first]), there)
        with np.errstate(invalid="ignore", divide="ignore"):
            available = np.where(never, 0.0, there / utilisation)
        branch = {
            "plane_utilisation": utilisation,
            "plane_torque_nm": there,
            "plane_capacity_nm": available,
            "plane_at_s": at,
        }
        if not answer:
            answer = branch
        worse = utilisation > answer["plane_utilisation"]
        answer = {key: np.where(worse, branch[key], value) for key, value in answer.items()}
    return answer
