"""RMS torque of any motor on any gearhead from moments of the demand, and peaks from support points.

Air-gap torque is linear in six functions of time that do not depend on motor or ratio,
``φ = (α_m, T₊, T₋, T₀, s, ω)``: acceleration, driven-shaft torque while motoring, back-driving and at rest,
direction and speed. So its mean square is a quadratic form in the mean products of φ, and its extremes lie on
the convex hull of φ.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.parameters import GearheadParameters
from actuator_sizing.core.quadrature import integrate
from actuator_sizing.core.transmission import BACK_DRIVING, MOTORING, STANDSTILL

FloatArray = NDArray[np.float64]

_DIRECTIONS = 9  # support directions; more only tightens the lower bound


def demand_functions(
    flow: NDArray[np.int8],
    direction: FloatArray,
    brake_closed: NDArray[np.bool_],
    motor_acceleration: FloatArray,
    shaft_torque: FloatArray,
    shaft_speed: FloatArray,
) -> FloatArray:
    """The six functions φ at the nodes.

    Parameters
    ----------
    flow : ndarray of int, shape (P,)
        Direction of power at the driven shaft. [-]
    direction : ndarray, shape (P,)
        Sign of motion. [-]
    brake_closed : ndarray of bool, shape (P,)
        Holding brake closed: no motor torque at rest. [-]
    motor_acceleration : ndarray, shape (P, K)
        Driven-shaft acceleration as the motor's own mass feels it. [rad/s²]
    shaft_torque : ndarray, shape (P, K)
        Torque at the driven shaft. [N·m]
    shaft_speed : ndarray, shape (P, K)
        Speed of the driven shaft. [rad/s]

    Returns
    -------
    ndarray, shape (6, P, K)
        ``(α_m, T₊, T₋, T₀, s, ω)`` in SI. [-]
    """
    rest = ((flow == STANDSTILL) & ~brake_closed)[:, None]
    return np.stack(
        [
            motor_acceleration,
            np.where((flow == MOTORING)[:, None], shaft_torque, 0.0),
            np.where((flow == BACK_DRIVING)[:, None], shaft_torque, 0.0),
            np.where(rest, shaft_torque, 0.0),
            np.broadcast_to(direction[:, None], shaft_speed.shape),
            shaft_speed,
        ]
    )


def mean_products(duration_s: FloatArray, functions: FloatArray) -> FloatArray:
    """Matrix of mean products ``(1/T) ∫ φ φᵀ dt``.

    Parameters
    ----------
    duration_s : ndarray, shape (P,)
        Length of each piece. [s]
    functions : ndarray, shape (6, P, K)
        The six functions of `demand_functions`. [-]

    Returns
    -------
    ndarray, shape (6, 6)
        Symmetric, positive semidefinite. [-]
    """
    products = functions[:, None] * functions[None, :]
    return np.asarray(integrate(duration_s, products) / duration_s.sum())


def gearhead_rows(gearheads: GearheadParameters) -> FloatArray:
    """How torque at the motor depends on φ, for each gearhead.

    Parameters
    ----------
    gearheads : GearheadParameters
        N gearheads. [-]

    Returns
    -------
    ndarray, shape (N, 4, 6)
        Rows: torque without a motor's share; per rotor inertia; per friction torque; per viscous friction. [-]
    """
    n, J_g = gearheads.ratio, gearheads.inertia_kg_m2
    rows = np.zeros((len(gearheads), 4, 6))
    rows[:, 0, 0] = J_g * n
    rows[:, 0, 1] = 1.0 / (n * gearheads.efficiency)
    rows[:, 0, 2] = gearheads.efficiency_back / n
    rows[:, 0, 3] = np.where(gearheads.efficiency_back > 0.0, 1.0, 0.0) / n
    rows[:, 0, 4] = gearheads.no_load_torque_nm
    rows[:, 1, 0] = n
    rows[:, 2, 4] = 1.0
    rows[:, 3, 5] = n
    return rows


def motor_columns(J: FloatArray, T_c: FloatArray, b: FloatArray) -> FloatArray:
    """What multiplies the rows of `gearhead_rows`: 1, inertia, Coulomb friction, viscous friction.

    Parameters
    ----------
    J : ndarray, shape (M,)
        Rotor inertia. [kg·m²]
    T_c : ndarray, shape (M,)
        Coulomb friction of the motor. [N·m]
    b : ndarray, shape (M,)
        Viscous friction of the motor. [N·m·s/rad]

    Returns
    -------
    ndarray, shape (M, 4)
        Columns in SI. [-]
    """
    return np.stack([np.ones_like(J), J, T_c, b], axis=1)


_UPPER = tuple((i, j) for i in range(4) for j in range(i, 4))


def motor_products(columns: FloatArray) -> FloatArray:
    """Products of the motor columns, shape (M, 4) to (M, 10), to be multiplied with `gearhead_products`. [-]"""
    return np.stack([columns[:, i] * columns[:, j] for i, j in _UPPER], axis=1)


def gearhead_products(products: FloatArray, rows: FloatArray) -> FloatArray:
    """Mean products of torque parts for each gearhead.

    Parameters
    ----------
    products : ndarray, shape (6, 6)
        Mean products of φ. [-]
    rows : ndarray, shape (N, 4, 6)
        From `gearhead_rows`. [-]

    Returns
    -------
    ndarray, shape (10, N)
        ``motor_products @ gearhead_products`` is the exact mean square of the air-gap torque, (M, N). [N²·m²]
    """
    gram = rows @ products @ rows.transpose(0, 2, 1)  # (N, 4, 4)
    return np.stack([gram[:, i, j] * (1.0 if i == j else 2.0) for i, j in _UPPER])


@dataclass(frozen=True)
class SupportPoints:
    """Instants that can govern the peak: columns of φ, and the sign that makes the torque positive."""

    functions: FloatArray  # (V, 6)
    sign: FloatArray  # (V,)


def support_points(functions: FloatArray, flow: NDArray[np.int8]) -> SupportPoints:
    """Instants of extreme torque over a fan of load-to-motor weightings.

    Parameters
    ----------
    functions : ndarray, shape (6, P, K)
        φ at the nodes. [-]
    flow : ndarray of int, shape (P,)
        Direction of power on each piece. [-]

    Returns
    -------
    SupportPoints
        The largest torque over these instants is a lower bound of the largest over the cycle, equal to it
        where the governing instant is among them (always so for constant acceleration and torque). [-]

    Notes
    -----
    On a piece the torque in the direction of motion is ``n J (s α) + k (s T)/n + …`` with weights ≥ 0: for
    any motor and gearhead its extremes are vertices of the convex hull of ``(s α, s T)`` whose outward normal
    lies in the first or third quadrant. Self-locking gearheads (k < 0) only lose sharpness.
    """
    flat = functions.reshape(6, -1)
    kind = np.repeat(flow, functions.shape[2])
    torque = flat[1] + flat[2] + flat[3]
    direction = np.where(flat[4] == 0.0, 1.0, flat[4])
    a, t = direction * flat[0], direction * torque
    weight = np.concatenate([[0.0], np.logspace(-2.0, 2.0, _DIRECTIONS - 2), [np.inf]])
    scale_a, scale_t = np.max(np.abs(a)) or 1.0, np.max(np.abs(t)) or 1.0
    found: dict[tuple[float, float, float, int], int] = {}
    for key in (MOTORING, BACK_DRIVING, STANDSTILL):
        members = np.flatnonzero(kind == key)
        if not len(members):
            continue
        for sense in (1.0, -1.0):
            for w in weight:
                mix = (a[members] / scale_a, 0.0) if np.isinf(w) else (w * a[members] / scale_a, 1.0)
                score = sense * (mix[0] + mix[1] * t[members] / scale_t)
                best = int(members[score.argmax()])
                found[(sense * a[best], sense * t[best], sense, key)] = best
    corners = list(found)
    kept = [p for p in corners if not any(_outdoes(q, p) for q in corners if q != p)]
    index = np.array([found[p] for p in kept], dtype=np.intp)
    return SupportPoints(flat[:, index].T, np.array([p[2] for p in kept]) * direction[index])


def _outdoes(q: tuple[float, float, float, int], p: tuple[float, float, float, int]) -> bool:
    """Whether corner q gives at least the torque of corner p for every motor and (not locking) gearhead."""
    same_stage = q[3] == p[3] or (q[3] == MOTORING and q[1] >= 0.0)
    return same_stage and q[0] >= p[0] and q[1] >= p[1] and q[2] >= p[2]
