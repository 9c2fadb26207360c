"""The bounds of a tile as plain loops over rows of motors, for the optional compiler (extra `fast`).

The same ratios as in `sizing/tile.py`, packed into arrays by `sizing/compiled_bounds.py`. The loops run as they
stand, slowly, which is how they can be tested anywhere. Import it late: the compiler takes half a second to load.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from importlib import import_module
from importlib.util import find_spec
from typing import Any

import numpy as np


def _inner(function: Callable[..., None]) -> Callable[..., None]:
    """Let compiled loops call a function that plain Python can call too."""
    if find_spec("numba") is None:
        return function
    marked: Callable[..., None] = import_module("numba.extending").register_jitable(function)
    return marked


@_inner
def _sum_of(out: Any, rows: Any, columns: Any, j: int, start: int, end: int) -> None:
    """Products of one gearhead with every motor, summed up, into `out`."""
    count = out.shape[0]
    k = start
    left = (end - start) % 4
    if left == 0:
        left = 4
    a = rows[j, k]
    if left == 1:
        for i in range(count):
            out[i] = a * columns[k, i]
    elif left == 2:
        b = rows[j, k + 1]
        for i in range(count):
            out[i] = a * columns[k, i] + b * columns[k + 1, i]
    elif left == 3:
        b, c = rows[j, k + 1], rows[j, k + 2]
        for i in range(count):
            out[i] = a * columns[k, i] + b * columns[k + 1, i] + c * columns[k + 2, i]
    else:
        b, c, d = rows[j, k + 1], rows[j, k + 2], rows[j, k + 3]
        for i in range(count):
            out[i] = (a * columns[k, i] + b * columns[k + 1, i]) + (
                c * columns[k + 2, i] + d * columns[k + 3, i]
            )
    k += left
    while k < end:
        a, b, c, d = rows[j, k], rows[j, k + 1], rows[j, k + 2], rows[j, k + 3]
        for i in range(count):
            out[i] += (a * columns[k, i] + b * columns[k + 1, i]) + (
                c * columns[k + 2, i] + d * columns[k + 3, i]
            )
        k += 4


@_inner
def _any_sum_of(
    out: Any, rows: Any, columns: Any, single_rows: Any, single_columns: Any, form: Any, j: int
) -> None:
    """The same in the precision of the form."""
    if form[0] == 1:
        _sum_of(out, single_rows, single_columns, j, form[1], form[2])
    else:
        _sum_of(out, rows, columns, j, form[1], form[2])


@_inner
def _fraction(
    out: Any,
    bottom: Any,
    spare: Any,
    square: Any,
    peak: Any,
    packed: Any,
    ratio: Any,
    j: int,
    tiny: float,
    runaway: float,
) -> None:
    """One ratio for one gearhead and every motor, into `out`."""
    rows, columns, single_rows, single_columns, vectors, forms = packed
    count = out.shape[0]
    if ratio[2] < 0:
        for i in range(count):
            out[i] = 0.0
    elif ratio[5] < 0:
        _any_sum_of(out, rows, columns, single_rows, single_columns, forms[ratio[2]], j)
    else:
        _any_sum_of(spare, rows, columns, single_rows, single_columns, forms[ratio[2]], j)
        factor = vectors[ratio[5]]
        for i in range(count):
            out[i] = min(spare[i], spare[i] * factor[i])
    if ratio[3] >= 0:
        _any_sum_of(spare, rows, columns, single_rows, single_columns, forms[ratio[3]], j)
        for i in range(count):
            out[i] += spare[i]
    if ratio[6] >= 0:
        factor = vectors[ratio[6]]
        for i in range(count):
            out[i] += peak[i] * factor[i]
    if ratio[7] >= 0:
        factor = vectors[ratio[7]]
        for i in range(count):
            out[i] += square[i] * factor[i]
    if ratio[4] >= 0 or ratio[8] >= 0:
        floor = np.float32(tiny)
        if ratio[4] >= 0:
            _any_sum_of(bottom, rows, columns, single_rows, single_columns, forms[ratio[4]], j)
        else:
            for i in range(count):
                bottom[i] = 1.0
        if ratio[8] >= 0:
            floor = np.float32(runaway)
            factor = vectors[ratio[8]]
            for i in range(count):
                bottom[i] -= square[i] * factor[i]
        for i in range(count):
            spare[i] = max(bottom[i], floor)
        for i in range(count):
            out[i] /= spare[i]
    if ratio[9] == 1:
        for i in range(count):
            out[i] = np.sqrt(out[i])


def bounds_of_rows(
    packed: Any,
    squares: Any,
    peaks: Any,
    repeats: Any,
    ratios: Any,
    scales: Any,
    gearhead_worst: Any,
    first: int,
    limit: float,
    bar: float,
    buffers: Any,
    counts: Any,
    found: Any,
    values: Any,
    tiny: float,
    runaway: float,
) -> int:
    """Work out gearheads from `first` on until the places for pairs of interest may not suffice for another one.

    Parameters
    ----------
    packed : tuple of ndarray
        Rows and columns of the forms in both precisions, vectors and the table of forms. [-]
    squares, peaks, repeats, ratios, scales, gearhead_worst : ndarray
        As in `Packed`. [-]
    first : int
        Gearhead to begin with. [-]
    limit, bar : float
        A pair fails beyond the first; of those that fail, pairs up to the second are of interest. [-]
    buffers : ndarray of float32, shape (7 + 2 C, M)
        Working space. [-]
    counts : ndarray of int, shape (N, checks + 2)
        Takes the number of failing pairs by check; last but one: the gearhead alone governs. [-]
    found : ndarray of int, shape (L, 2)
        Takes gearhead and motor of the pairs that pass or are of interest. [-]
    values : ndarray, shape (L, 3)
        Takes their worst utilisation, lower bound of the peak torque, and mean square torque. [-]
    tiny, runaway : float
        In place of zero and less in a denominator. [-]

    Returns
    -------
    int
        Gearheads that were worked out. `counts[first, -1]` is the number of pairs found. [-]
    """
    # Where the larger of two is taken, the result goes to another row: in its own place the compiler would branch.
    motors, cycles, checks = buffers.shape[1], squares.shape[0], scales.shape[0]
    part, bottom, spare = buffers[0], buffers[1], buffers[2]
    worst, next_worst, which, next_which = buffers[3], buffers[4], buffers[5], buffers[6]
    rows, columns, single_rows, single_columns, _, forms = packed
    zero = np.float32(0.0)
    place = 0
    j = first
    while j < gearhead_worst.shape[0] and place + motors <= found.shape[0]:
        for cycle in range(cycles):
            square, peak = buffers[7 + 2 * cycle], buffers[8 + 2 * cycle]
            _any_sum_of(part, rows, columns, single_rows, single_columns, forms[squares[cycle]], j)
            for i in range(motors):
                square[i] = max(part[i], zero)
                peak[i] = zero
        for n in range(peaks.shape[0]):
            peak = buffers[8 + 2 * peaks[n, 0]]
            _any_sum_of(part, rows, columns, single_rows, single_columns, forms[peaks[n, 1]], j)
            for i in range(motors):
                spare[i] = max(part[i], peak[i])
            for i in range(motors):
                peak[i] = spare[i]
        for i in range(motors):
            worst[i] = zero
            which[i] = zero
        for n in range(ratios.shape[0]):
            square, peak = buffers[7 + 2 * ratios[n, 1]], buffers[8 + 2 * ratios[n, 1]]
            _fraction(part, bottom, spare, square, peak, packed, ratios[n], j, tiny, runaway)
            scale, mark = scales[ratios[n, 0]], np.float32(ratios[n, 0])
            for i in range(motors):
                value = part[i] * scale
                next_which[i] = mark if value > worst[i] else which[i]
                next_worst[i] = max(value, worst[i])
            worst, next_worst = next_worst, worst
            which, next_which = next_which, which
        own, mark = gearhead_worst[j], np.float32(checks)
        for i in range(motors):
            next_which[i] = mark if own > worst[i] else which[i]
            next_worst[i] = max(own, worst[i])
        worst, next_worst = next_worst, worst
        which, next_which = next_which, which
        failing = np.int32(0)
        near = np.int32(0)
        for i in range(motors):
            failing += np.int32(worst[i] > limit)
            near += np.int32((worst[i] > limit) & (worst[i] <= bar))
        for check in range(checks + 1):
            mark = np.float32(check)
            number = np.int32(0)
            for i in range(motors):
                number += np.int32((which[i] == mark) & (worst[i] > limit))
            counts[j, check] = number
        if failing < motors or near > 0:
            square, peak = buffers[7], buffers[8]
            if not repeats[0]:
                for i in range(motors):
                    square[i] = 0.0
            for cycle in range(1, cycles):
                for i in range(motors):
                    peak[i] = max(peak[i], buffers[8 + 2 * cycle, i])
                    if repeats[cycle]:
                        square[i] = max(square[i], buffers[7 + 2 * cycle, i])
            for i in range(motors):
                if worst[i] <= limit or worst[i] <= bar:
                    found[place, 0] = j
                    found[place, 1] = i
                    values[place, 0] = worst[i]
                    values[place, 1] = peak[i]
                    values[place, 2] = square[i]
                    place += 1
        j += 1
    counts[first, checks + 1] = place
    return j - first


@cache
def compiled_loops() -> Callable[..., int] | None:
    """`bounds_of_rows` as machine code that lets other threads run, or None where the compiler is not installed."""
    if find_spec("numba") is None:
        return None
    njit: Any = import_module("numba").njit
    options = {"nogil": True, "fastmath": {"contract"}, "error_model": "numpy"}
    try:
        compiled: Callable[..., int] = njit(cache=True, **options)(bounds_of_rows)
    except RuntimeError:  # no folder to keep the machine code in
        compiled = njit(**options)(bounds_of_rows)
    return compiled
