"""Winding and housing as two bodies: the exact step of their locally linear equations.

The state is ``x = (ϑ_w, ϑ_h)``::

    C_1 ϑ_w' = q(t) r(x) − (ϑ_w − ϑ_h)/R_1
    C_2 ϑ_h' = p(t) + (ϑ_w − ϑ_h)/R_1 − (ϑ_h − ϑ_a)/R_2
    r(x) = (1 + α (ϑ_w − ϑ_R)) / (1 + β (ϑ_m − ϑ_K))²

with the copper loss `q` at the reference temperatures and the speed loss `p`. The magnet is at housing
temperature (two bodies) or at the temperature of the only body. One kernel source serves plain floats
(one candidate, no array overhead) and arrays over candidates.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.thermal_network import FloatArray, HeatLoss, ThermalNetwork

#: A float or an array over candidates: the kernel is written once for both.
Number = Any

#: Magnet factor below which the torque constant counts as lost; the loss is a million times the cold one.
_LEAST_MAGNET_FACTOR = 1e-3
#: A sub-step spans at most this part of the time constant with which the magnet temperature moves.
_STEP_PARTS = 20
#: Sub-steps of one piece are capped: a dwell of hours at constant loss has settled long before.
_MOST_STEPS_PER_PIECE = 64


# -- floats and arrays through one source -----------------------------------------------------------------


class Operations(NamedTuple):
    """Elementary functions for floats or for arrays; none of them raises or warns."""

    sqrt: Callable[[Number], Number]
    hypot: Callable[[Number, Number], Number]
    expm1: Callable[[Number], Number]
    log: Callable[[Number], Number]
    log1p: Callable[[Number], Number]
    maximum: Callable[[Number, Number], Number]
    select: Callable[[Any, Number, Number], Number]
    #: ``(∫_0^h e^{lτ} dτ − h) / l`` from l, h and the integral
    second_integral: Callable[[Number, float, Number], Number]


def _expm1(z: float) -> float:
    return math.inf if z > 700.0 else math.expm1(z)


def _log(z: float) -> float:
    return math.log(z) if z > 0.0 else math.nan


def _second_integral(rate: float, h: float, first: float) -> float:
    z = rate * h
    return (first - h) / rate if abs(z) > 1e-5 else 0.5 * h * h * (1.0 + z / 3.0)


def _second_integrals(rate: FloatArray, h: float, first: FloatArray) -> FloatArray:
    z = rate * h
    return np.where(np.abs(z) > 1e-5, (first - h) / rate, 0.5 * h * h * (1.0 + z / 3.0))


FLOATS = Operations(
    lambda z: math.sqrt(z) if z >= 0.0 else math.nan,
    math.hypot,
    _expm1,
    _log,
    lambda z: math.log1p(z) if z > -1.0 else math.nan,
    lambda a, b: a if a > b else b,
    lambda condition, a, b: a if condition else b,
    _second_integral,
)
#: Call under ``np.errstate(all="ignore")``.
ARRAYS = Operations(np.sqrt, np.hypot, np.expm1, np.log, np.log1p, np.maximum, np.where, _second_integrals)


# -- the kernel -------------------------------------------------------------------------------------------


class Coefficients(NamedTuple):
    """Rates of the two bodies, one candidate (floats) or all of them (arrays)."""

    ambient: Number
    winding_heating: Number  # 1/C_1
    winding_to_housing: Number  # 1/(R_1 C_1), 0 with one body
    winding_to_ambient: Number  # 0 with two bodies
    housing_to_winding: Number  # 1/(R_1 C_2), 0 with one body
    housing_to_ambient: Number  # 1/(R_2 C_2); one body: any rate other than the winding's, never excited
    alpha: Number
    resistance_reference: Number
    beta: Number
    magnet_reference: Number
    magnet_on_winding: Number  # 1 with one body, else 0


class Steps(NamedTuple):
    """Loss of the sub-steps of one cycle, in order."""

    duration: list[float]
    copper: list[Number]  # q [W]
    winding_rate: list[Number]  # speed loss of a one-body machine over C_1 [K/s]
    housing_rate: list[Number]  # speed loss over C_2 [K/s]
    piece: list[int]


class Local(NamedTuple):
    """The equations made linear at a state: ``x' = f + J (x − x_0)``, and what exact steps need."""

    f1: Number
    f2: Number
    a: Number  # J = [[a, b], [c, d]]
    b: Number
    c: Number
    d: Number
    slow: Number  # eigenvalues of J, slow > fast
    fast: Number
    gap: Number  # slow − fast
    ratio: Number  # r at the state
    ratio_winding: Number  # dr/dϑ_w
    ratio_housing: Number  # dr/dϑ_h


def linearise(
    k: Coefficients, ops: Operations, x1: Number, x2: Number, q: Number, s1: Number, s2: Number
) -> Local:
    """Linearise the network at winding `x1`, housing `x2` for one loss."""
    on_winding = k.magnet_on_winding
    magnet = ops.maximum(
        1.0 + k.beta * (on_winding * x1 + (1.0 - on_winding) * x2 - k.magnet_reference), _LEAST_MAGNET_FACTOR
    )
    inverse_square = 1.0 / (magnet * magnet)
    copper = 1.0 + k.alpha * (x1 - k.resistance_reference)
    by_magnet = -2.0 * k.beta * copper * inverse_square / magnet
    ratio = copper * inverse_square
    ratio_winding = k.alpha * inverse_square + on_winding * by_magnet
    ratio_housing = (1.0 - on_winding) * by_magnet
    heating = q * k.winding_heating
    between = x1 - x2
    f1 = heating * ratio + s1 - k.winding_to_housing * between - k.winding_to_ambient * (x1 - k.ambient)
    f2 = s2 + k.housing_to_winding * between - k.housing_to_ambient * (x2 - k.ambient)
    a = heating * ratio_winding - k.winding_to_housing - k.winding_to_ambient
    b = k.winding_to_housing + heating * ratio_housing
    c = k.housing_to_winding
    d = -k.housing_to_winding - k.housing_to_ambient
    half = 0.5 * (a - d)
    root = ops.hypot(half, ops.sqrt(b * c))  # real: b, c >= 0
    middle = 0.5 * (a + d)
    # 1e-200 keeps 0/0 out of ∫e^{lτ}dτ = expm1(l h)/l at l = 0 and changes nothing else
    slow, fast = middle + root + 1e-200, middle - root + 1e-200
    return Local(f1, f2, a, b, c, d, slow, fast, 2.0 * root, ratio, ratio_winding, ratio_housing)


def apply(at: Local, g_slow: Number, g_fast: Number, v1: Number, v2: Number) -> tuple[Number, Number]:
    """Multiply a vector by a function of J, given by its values at the two eigenvalues."""
    slope = (g_slow - g_fast) / at.gap
    return (
        g_fast * v1 + slope * ((at.a - at.fast) * v1 + at.b * v2),
        g_fast * v2 + slope * (at.c * v1 + (at.d - at.fast) * v2),
    )


def coefficients(network: ThermalNetwork, loss: HeatLoss, ambient_degc: FloatArray | float) -> Coefficients:
    """Rates of every candidate as arrays of shape (B,)."""
    two = network.has_housing
    R_1, C_1 = network.winding_resistance_k_w, network.winding_capacity_j_k
    C_2 = np.where(two, network.housing_capacity_j_k, 1.0)
    R_2 = np.where(two, network.housing_resistance_k_w, 1.0)
    rate = 1.0 / (R_1 * C_1)
    return Coefficients(
        np.array(np.broadcast_to(np.asarray(ambient_degc, dtype=float), R_1.shape)),
        1.0 / C_1,
        np.where(two, rate, 0.0),
        np.where(two, 0.0, rate),
        np.where(two, 1.0 / (R_1 * C_2), 0.0),
        np.where(two, 1.0 / (R_2 * C_2), 2.0 * rate),
        loss.resistance_coefficient_per_k,
        loss.resistance_reference_degc,
        loss.magnet_coefficient_per_k,
        loss.magnet_reference_degc,
        np.where(two, 0.0, 1.0),
    )


def sub_steps(network: ThermalNetwork, loss: HeatLoss) -> Steps:
    """Split the pieces so far as the magnet term asks, for all candidates alike.

    Within a piece the loss is constant and the step is exact but for the magnet term, whose rate is that
    of the housing (two bodies) or of the winding (one body): a sub-step spans at most 1/20 of the
    smallest such time constant of the batch, at most 64 sub-steps per piece.
    """
    duration = np.asarray(loss.duration_s, dtype=float)
    two = network.has_housing
    C_1, C_2 = network.winding_capacity_j_k, network.housing_capacity_j_k
    speed, copper = loss.speed_loss_w.T, loss.copper_loss_w.T
    winding_rate = speed * np.where(two, 0.0, 1.0 / C_1)
    housing_rate = speed * np.where(two, 1.0 / C_2, 0.0)
    piece = np.arange(len(duration))
    constant = np.where(two, network.housing_resistance_k_w * C_2, network.winding_resistance_k_w * C_1)
    nonlinear = (loss.magnet_coefficient_per_k != 0.0) & (constant > 0.0)  # not known: nothing to divide by
    if nonlinear.any():
        step = float(constant[nonlinear].min()) / _STEP_PARTS
        counts = np.clip(np.ceil(duration / step), 1, _MOST_STEPS_PER_PIECE).astype(int)
        counts = np.where((copper > 0.0).any(axis=1), counts, 1)
        piece = np.repeat(piece, counts)
        duration = (duration / counts)[piece]
    return Steps(
        duration.tolist(),
        list(copper[piece]),
        list(winding_rate[piece]),
        list(housing_rate[piece]),
        piece.tolist(),
    )


def select_coefficients(k: Coefficients, rows: NDArray[np.bool_]) -> Coefficients:
    """Coefficients of the candidates of a mask."""
    return Coefficients(*(column[rows] for column in k))


def select_steps(steps: Steps, rows: NDArray[np.bool_]) -> Steps:
    """Take the steps of the candidates of a mask."""
    return Steps(
        steps.duration,
        [value[rows] for value in steps.copper],
        [value[rows] for value in steps.winding_rate],
        [value[rows] for value in steps.housing_rate],
        steps.piece,
    )


def as_floats(k: Coefficients, steps: Steps, row: int = 0) -> tuple[Coefficients, Steps]:
    """Coefficients and steps of one row of a batch as plain floats."""
    return (
        Coefficients(*(float(column[row]) for column in k)),
        Steps(
            steps.duration,
            [float(value[row]) for value in steps.copper],
            [float(value[row]) for value in steps.winding_rate],
            [float(value[row]) for value in steps.housing_rate],
            steps.piece,
        ),
    )
