"""Where the torque of a cycle comes closest to what the voltage allows at that speed."""

from __future__ import annotations

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

from actuator_sizing.core.capability import voltage_limited_current
from actuator_sizing.core.machine import JudgedMotor, torque_of_current
from actuator_sizing.core.quadrature import lobatto, to_series
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.pair_course import PairCourse

FloatArray = NDArray[np.float64]

_MOTORING, _BRAKING = 0, 1
_POINTS = 33  # per piece, then per neighbourhood of the largest: three rounds leave 1e-4 of a piece
_ROUNDS = 3


def torque_plane(demand: Demand, c: PairCourse, judged: JudgedMotor) -> dict[str, FloatArray]:
    """Largest ratio of torque to voltage-limited torque over the cycle.

    Parameters
    ----------
    demand : Demand
        The cycle, for directions and instants. [-]
    c : PairCourse
        Courses of B pairs. [-]
    judged : JudgedMotor
        Their motors at judged temperatures and minimum bus voltage. [-]

    Returns
    -------
    dict of ndarray, each (B,)
        The ratio (infinite where no torque is left), torque and capacity there, and the instant. [-]

    Notes
    -----
    Torque and speed are polynomials on a piece, but their ratio is not: it has a pole near the no-load speed
    and a kink where saturation begins to limit. So it is evaluated between the nodes, not interpolated.
    Motoring and braking have limits of their own, and each is searched by itself.
    """
    direction = demand.direction[None, :, None]
    omega = np.abs(c.motor_speed_rad_s)
    torque = c.torque_nm * np.where(direction == 0.0, 1.0, direction)
    answer: dict[str, FloatArray] = {}
    for branch in (_MOTORING, _BRAKING):
        demanded = np.where(direction == 0.0, np.abs(torque), torque if branch == _MOTORING else -torque)
        found = _largest_of_branch(branch, demand, demanded, omega, judged)
        if not answer:
            answer = found
        worse = found["plane_utilisation"] > answer["plane_utilisation"]
        answer = {key: np.where(worse, found[key], value) for key, value in answer.items()}
    return answer


def _largest_of_branch(
    branch: int, demand: Demand, demanded: FloatArray, omega: FloatArray, judged: JudgedMotor
) -> dict[str, FloatArray]:
    batch, _, nodes = demanded.shape
    ratio, capacity = plane_ratio(branch, demanded, omega, judged, np.arange(batch)[:, None, None])
    first = ratio.reshape(batch, -1).argmax(axis=1)
    piece, node = np.divmod(first, nodes)
    rows = np.arange(batch)
    best, there, position = ratio[rows, piece, node], demanded[rows, piece, node], lobatto(nodes)[0][node]

    # Between the nodes: pieces whose ceiling of torque over their floor of capacity reaches above the nodes.
    torque_series, speed_series = demanded @ to_series(nodes).T, omega @ to_series(nodes).T
    top_torque, top_speed = (
        s[..., 0] + np.abs(s[..., 1:]).sum(axis=2) for s in (torque_series, speed_series)
    )
    _, at_top = plane_ratio(branch, top_torque, top_speed, judged, rows[:, None])
    floor = 0.98 * np.minimum(capacity.min(axis=2), at_top)
    open_ = np.isfinite(best)  # beyond reach at a node already: nothing is worse
    row, column = np.nonzero((top_torque > np.where(open_, best, 0.0)[:, None] * floor) & open_[:, None])
    low, high = np.full((2, len(row)), -1.0)
    high = -low
    for _ in range(_ROUNDS):
        x = low[:, None] + (high - low)[:, None] * np.linspace(0.0, 1.0, _POINTS)
        basis = legendre.legvander(x, nodes - 1)
        T, w = (np.einsum("ndk,nk->nd", basis, s[row, column]) for s in (torque_series, speed_series))
        value, _ = plane_ratio(branch, T, np.abs(w), judged, row[:, None])
        top = value.argmax(axis=1)
        low, high = (x[np.arange(len(row)), np.clip(top + k, 0, _POINTS - 1)] for k in (-1, 1))
    if len(row):
        found = np.arange(len(row))
        value, T, x = value[found, top], T[found, top], x[found, top]
        order = np.argsort(value, kind="stable")  # the last write below is the largest
        order = order[value[order] > best[row[order]]]
        best[row[order]], there[row[order]] = value[order], T[order]
        piece[row[order]], position[row[order]] = column[order], x[order]
    best = np.maximum(best, 0.0)
    with np.errstate(invalid="ignore", divide="ignore"):
        available = np.where(np.isinf(best), 0.0, there / best)
    return {
        "plane_utilisation": best,
        "plane_torque_nm": np.where(np.isinf(best), np.abs(there), there),
        "plane_capacity_nm": available,
        "plane_at_s": demand.instant(piece, position),
    }


def plane_ratio(
    branch: int, demanded: FloatArray, omega: FloatArray, judged: JudgedMotor, row: NDArray[np.intp]
) -> tuple[FloatArray, FloatArray]:
    """Ratio and capacity at points whose motor is `row` (broadcast); infinite where the torque is out of reach."""
    K, s = judged.torque_constant_nm_per_a[row], judged.saturation_per_a2[row]
    limit = voltage_limited_current(
        judged.voltage_available_v[row], omega, judged.resistance_ohm[row], K, judged.reactance_per_speed[row]
    )[branch]
    # Torque rises with current only up to the turning point of the saturation curve.
    turning = 1.0 / np.sqrt(3.0 * np.where(s > 0.0, s, np.finfo(float).tiny))
    capacity = torque_of_current(np.clip(np.nan_to_num(limit, nan=0.0), 0.0, turning), K, s)
    # Above the no-load speed only braking torque keeps within the voltage, and of it a least one is needed.
    most = torque_of_current(np.clip(limit, -turning, 0.0), K, s)
    beyond = (capacity <= 0.0) & ~(demanded <= most)  # NaN: no current at all
    ratio = demanded / np.where(capacity > 0.0, capacity, np.inf)
    return np.where(beyond, np.inf, ratio), capacity
