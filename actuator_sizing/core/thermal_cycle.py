"""One cycle of the thermal network from a given start: its map, its extremes and its means."""

from __future__ import annotations

import math
from typing import Any, NamedTuple

from actuator_sizing.core.thermal_kernel import (
    Coefficients,
    Local,
    Number,
    Operations,
    Steps,
    apply,
    linearise,
)

#: The one "not a number" of this module, so that plain floats can be compared with it by identity.
NAN = math.nan
#: Nearest to −1 that an eigenvalue of the cycle map minus one is taken, so that its logarithm exists.
_FORGOTTEN = -1.0 + 2.0**-52
#: Beyond this a cycle map is rounding, and an equilibrium of no use. [°C]
_HOTTEST_DEGC = 1e9


class CycleMap(NamedTuple):
    """One cycle from a start state: where it ends, and how the end answers to the start."""

    move1: Number  # end minus start
    move2: Number
    n11: Number  # monodromy minus identity
    n12: Number
    n21: Number
    n22: Number
    hottest_winding: Number
    hottest_magnet: Number
    gain: Number  # time integral of q dr/dϑ_w
    gain_housing: Number  # time integral of q dr/dϑ_h


class Survey(NamedTuple):
    """Extremes and time integrals of one cycle."""

    winding_max: Number
    winding_min: Number
    winding_sum: Number
    max_time: Number
    housing_max: Number
    housing_min: Number
    housing_sum: Number
    copper: Number  # energy
    row1: Number  # sensitivity of the winding at its maximum to the start state
    row2: Number


def _compose(n: tuple[Number, ...], at: Local, slow: Number, fast: Number) -> tuple[Number, ...]:
    """``(I + G)(I + N) − I`` with ``G = exp(hJ) − I`` given by its eigenvalues; order 11, 12, 21, 22."""
    slope = (slow - fast) / at.gap
    g11, g12 = fast + slope * (at.a - at.fast), slope * at.b
    g21, g22 = slope * at.c, fast + slope * (at.d - at.fast)
    n11, n12, n21, n22 = n
    return (
        n11 + g11 + g11 * n11 + g12 * n21,
        n12 + g12 + g11 * n12 + g12 * n22,
        n21 + g21 + g21 * n11 + g22 * n21,
        n22 + g22 + g21 * n12 + g22 * n22,
    )


def cycle_map(k: Coefficients, steps: Steps, ops: Operations, x1: Number, x2: Number) -> CycleMap:
    """Follow one cycle from (x1, x2) by exponential Rosenbrock steps.

    Displacement and monodromy minus identity are summed, not the state and the monodromy, so that cycles
    much shorter than the time constants lose no digits.
    """
    d1 = d2 = gain = gain_housing = x1 * 0.0
    n: tuple[Number, ...] = (d1, d1, d1, d1)
    hottest1, hottest2 = x1, x2
    for h, q, s1, s2, _ in zip(*steps, strict=True):
        at = linearise(k, ops, x1 + d1, x2 + d2, q, s1, s2)
        slow, fast = ops.expm1(at.slow * h), ops.expm1(at.fast * h)
        step1, step2 = apply(at, slow / at.slow, fast / at.fast, at.f1, at.f2)
        d1, d2 = d1 + step1, d2 + step2
        n = _compose(n, at, slow, fast)
        gain = gain + h * q * at.ratio_winding
        gain_housing = gain_housing + h * q * at.ratio_housing
        hottest1, hottest2 = ops.maximum(hottest1, x1 + d1), ops.maximum(hottest2, x2 + d2)
    magnet = k.magnet_on_winding * hottest1 + (1.0 - k.magnet_on_winding) * hottest2
    n11, n12, n21, n22 = n
    return CycleMap(d1, d2, n11, n12, n21, n22, hottest1, magnet, gain, gain_housing)


def growth(at: CycleMap, ops: Operations) -> tuple[Number, Number]:
    """Eigenvalues of the monodromy minus one, slow and fast; slow ≥ 0 is runaway."""
    half = 0.5 * (at.n11 - at.n22)
    root = ops.sqrt(half * half + at.n12 * at.n21)
    middle = 0.5 * (at.n11 + at.n22)
    return middle + root, middle - root


def newton_step(at: CycleMap) -> tuple[Number, Number]:
    """``(I − M)^{-1} (F(x) − x)``: from the start state towards the fixed point."""
    determinant = at.n11 * at.n22 - at.n12 * at.n21
    return (
        (at.n12 * at.move2 - at.n22 * at.move1) / determinant,
        (at.n21 * at.move1 - at.n11 * at.move2) / determinant,
    )


def after_cycles(at: CycleMap, ops: Operations, count: Number) -> tuple[Number, Number]:
    """Displacement after `count` cycles by the affine continuation ``Σ M^j (F(x) − x)`` of one cycle."""
    slow, fast = growth(at, ops)
    slow, fast = ops.maximum(slow, _FORGOTTEN), ops.maximum(fast, _FORGOTTEN)
    sum_slow = ops.expm1(count * ops.log1p(slow)) / ops.select(slow == 0.0, 1.0, slow)
    sum_slow = ops.select(slow == 0.0, count, sum_slow)
    sum_fast = ops.expm1(count * ops.log1p(fast)) / ops.select(fast == 0.0, 1.0, fast)
    sum_fast = ops.select(fast == 0.0, count, sum_fast)
    slope = (sum_slow - sum_fast) / ops.maximum(slow - fast, 1e-300)
    v1, v2 = at.move1, at.move2
    return (
        sum_fast * v1 + slope * ((at.n11 - fast) * v1 + at.n12 * v2),
        sum_fast * v2 + slope * (at.n21 * v1 + (at.n22 - fast) * v2),
    )


def turning_instant(at: Local, ops: Operations, h: float, housing: bool) -> Number:
    """Instant inside a step at which a temperature turns, NaN if none; exact for the linear step."""
    own, cross, diagonal = (at.f2, at.c * at.f1, at.d) if housing else (at.f1, at.b * at.f2, at.a)
    slow = ((diagonal - at.fast) * own + cross) / at.gap  # x' = slow e^{l1 t} + fast e^{l2 t}
    fast = own - slow
    instant = ops.log(-fast / ops.select(slow == 0.0, 1e-300, slow)) / at.gap
    return ops.select((instant > 0.0) & (instant < h), instant, NAN)


def moved(at: Local, ops: Operations, t: Number) -> tuple[Number, Number]:
    """Displacement at `t` within a step."""
    return apply(at, ops.expm1(at.slow * t) / at.slow, ops.expm1(at.fast * t) / at.fast, at.f1, at.f2)


def survey(k: Coefficients, steps: Steps, ops: Operations, x1: Number, x2: Number) -> Survey:
    """Extremes and means of the cycle that starts at (x1, x2); maxima inside steps included."""
    zero = x1 * 0.0
    d1 = d2 = w_sum = h_sum = copper = max_time = zero
    w_max = w_min = x1 + zero
    h_max = h_min = x2 + zero
    n: tuple[Number, ...] = (zero, zero, zero, zero)
    row1, row2 = zero + 1.0, zero
    clock = 0.0
    for h, q, s1, s2, _ in zip(*steps, strict=True):
        y1, y2 = x1 + d1, x2 + d2
        at = linearise(k, ops, y1, y2, q, s1, s2)
        turn1 = turning_instant(at, ops, h, housing=False)
        turn2 = turning_instant(at, ops, h, housing=True)
        for instant in (turn1, h):
            if instant is NAN:
                continue  # plain floats: the winding does not turn within this step
            slow, fast = ops.expm1(at.slow * instant), ops.expm1(at.fast * instant)
            step1, step2 = apply(at, slow / at.slow, fast / at.fast, at.f1, at.f2)
            there = _compose(n, at, slow, fast)
            winding = y1 + step1
            rises = winding > w_max
            w_max = ops.select(rises, winding, w_max)
            max_time = ops.select(rises, clock + instant, max_time)
            row1 = ops.select(rises, 1.0 + there[0], row1)
            row2 = ops.select(rises, there[1], row2)
            w_min = ops.select(winding < w_min, winding, w_min)
        for housing in (y2 + step2,) if turn2 is NAN else (y2 + step2, y2 + moved(at, ops, turn2)[1]):
            h_max = ops.select(housing > h_max, housing, h_max)
            h_min = ops.select(housing < h_min, housing, h_min)
        area1, area2 = apply(
            at,
            ops.second_integral(at.slow, h, slow / at.slow),
            ops.second_integral(at.fast, h, fast / at.fast),
            at.f1,
            at.f2,
        )
        w_sum, h_sum = w_sum + h * y1 + area1, h_sum + h * y2 + area2
        copper = copper + q * (h * at.ratio + at.ratio_winding * area1 + at.ratio_housing * area2)
        n = there
        d1, d2 = d1 + step1, d2 + step2
        clock += h
    return Survey(w_max, w_min, w_sum, max_time, h_max, h_min, h_sum, copper, row1, row2)


def cycles_until(
    k: Coefficients, at: CycleMap, end: Survey, ops: Operations, x1: Number, x2: Number, missing: float
) -> Number:
    """Cycles from cold after which the winding, at its instant of maximum, misses that share of its rise.

    ``A λ_1^n + B λ_2^n`` is missing after n cycles by the cycle map at the periodic state (x1, x2). Newton
    on its logarithm, which is convex in n for positive B and concave for negative B, from the side from
    which it does not overshoot; 0 where the first cycle is enough.
    """
    slow, fast = growth(at, ops)
    slow, fast = ops.maximum(slow, _FORGOTTEN), ops.maximum(fast, _FORGOTTEN)
    u1, u2 = x1 - k.ambient, x2 - k.ambient
    first = end.row1 * u1 + end.row2 * u2
    slow_part = end.row1 * ((at.n11 - fast) * u1 + at.n12 * u2) + end.row2 * (
        at.n21 * u1 + (at.n22 - fast) * u2
    )
    A = slow_part / ops.maximum(slow - fast, 1e-300)
    B = first - A
    log_slow, log_fast = ops.log1p(slow), ops.log1p(fast)
    target = ops.maximum(missing * (end.winding_max - k.ambient), 1e-300)
    upper = -ops.log(ops.maximum(A / target, 1.0)) / log_slow
    n = ops.select(B < 0.0, upper, x1 * 0.0)
    for _ in range(10):
        part_slow = A * (1.0 + ops.expm1(n * log_slow))
        part_fast = B * (1.0 + ops.expm1(n * log_fast))
        left = ops.maximum(part_slow + part_fast, 1e-300)
        rate = (part_slow * log_slow + part_fast * log_fast) / left
        n = ops.maximum(n - ops.log(left / target) / ops.select(rate < 0.0, rate, log_slow), 0.0)
    return ops.select(first > target, n, x1 * 0.0)


def runs_away(k: Coefficients, at: CycleMap, ops: Operations) -> Any:
    """Whether a cycle from below the periodic state shows that there is none.

    Either the cycle map grows, or the torque constant is as good as gone within the cycle, or the winding is
    hotter than any number that means something.
    """
    slow = growth(at, ops)[0]
    magnet = 1.0 + k.beta * (at.hottest_magnet - k.magnet_reference)
    return (slow >= 0.0) | (slow != slow) | (magnet < 2e-3) | (at.hottest_winding > _HOTTEST_DEGC)
