"""How few motor types a machine can do with, and what fewer types cost."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from itertools import combinations
from math import comb
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.sizing.results import LOW_RESERVE, PASSES

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.results import Comparison

FloatArray = NDArray[np.float64]

_MOST_TRIED = 2_000_000  # combinations of types; beyond that the number of types is left out
_MOST_TYPES = 4


@dataclass(frozen=True)
class TypedSet:
    """The cheapest passing set of one axis with a given motor."""

    axis: str
    motor: str
    gearhead: str
    drive: str
    price: float


@dataclass(frozen=True)
class TypeChoice:
    """The cheapest machine with at most so many motor types."""

    types: int
    motors: tuple[str, ...]
    price: float
    sets: tuple[TypedSet, ...]  # one for each axis


@dataclass(frozen=True)
class CommonMotor:
    """A motor that passes on several axes."""

    motor: str
    sets: tuple[TypedSet, ...]  # one for each axis that it serves
    #: price of the machine with this motor wherever it passes and the cheapest set elsewhere; None: not every axis
    #: has a passing set with a price
    price: float | None


@dataclass(frozen=True)
class MotorTypes:
    """What sharing motor types costs, among the sets that were evaluated exactly."""

    choices: tuple[TypeChoice, ...]  # fewest types first; the last is the cheapest of all
    common: tuple[CommonMotor, ...]  # most axes first, then cheapest
    same_name: tuple[str, ...]  # names under which the catalogs of two axes hold different data
    complete: bool  # whether every set that may pass was evaluated on every axis
    unpriced: tuple[str, ...]  # axes without a passing set whose price is known


def motor_types(names: Sequence[str], comparisons: Sequence[Comparison]) -> MotorTypes:
    """Find the motors that several axes can share, and the cheapest machine for each number of types.

    Parameters
    ----------
    names : sequence of str
        Names of the A axes.
    comparisons : sequence of Comparison
        Their comparisons.

    Returns
    -------
    MotorTypes
        Prices are sums of motor, gearhead and drive over all axes. [-]

    Notes
    -----
    Of the sets with one motor the cheapest that passes counts, so that a machine is a choice of one motor for each
    axis. For each number of types every combination of motors is tried; a motor that another one beats or equals
    on every axis is left out first, which loses no cheapest machine.
    """
    cheapest = [_cheapest(name, comparison) for name, comparison in zip(names, comparisons, strict=True)]
    different = _different(comparisons)
    keys = sorted({key for axis in cheapest for key in axis})
    prices = np.array([[axis[key].price if key in axis else np.inf for axis in cheapest] for key in keys])
    prices = prices.reshape(len(keys), len(names))
    unpriced = tuple(name for name, axis in zip(names, cheapest, strict=True) if not axis)
    return MotorTypes(
        choices=() if unpriced else _choices(keys, prices, cheapest),
        common=_common(keys, prices, cheapest),
        same_name=different,
        complete=all(comparison.rejections.complete for comparison in comparisons),
        unpriced=unpriced,
    )


def _cheapest(axis: str, comparison: Comparison) -> dict[tuple[str, bytes], TypedSet]:
    """The cheapest passing set with each motor; a motor is known by its name and its data."""
    frame = comparison.candidates
    frame = frame[frame["verdict"].isin([PASSES, LOW_RESERVE]) & frame["price"].notna()]
    frame = frame.sort_values(["price", "rank"], kind="stable").drop_duplicates("motor")
    case = comparison.case
    row_of = {name: row for row, name in enumerate(case.motors.names)}
    return {
        (row.motor, _data(case, row_of[row.motor])): TypedSet(
            axis, row.motor, row.gearhead, row.drive, float(row.price)
        )
        for row in frame.itertuples()
    }


def _data(case: Case, row: int) -> bytes:
    """Everything that the equations know of a motor, to tell apart two of one name."""
    motors = case.motor_parameters
    return np.array([float(getattr(motors, field.name)[row]) for field in fields(motors)]).tobytes()


def _different(comparisons: Sequence[Comparison]) -> tuple[str, ...]:
    """Names that stand for different data on different axes."""
    known: dict[str, set[bytes]] = {}
    for case in {id(comparison.case): comparison.case for comparison in comparisons}.values():
        for row, name in enumerate(case.motors.names):
            known.setdefault(name, set()).add(_data(case, row))
    return tuple(sorted(name for name, data in known.items() if len(data) > 1))


def _choices(
    keys: Sequence[tuple[str, bytes]],
    prices: FloatArray,
    cheapest: Sequence[dict[tuple[str, bytes], TypedSet]],
) -> tuple[TypeChoice, ...]:
    """The cheapest machine with one, two ... motor types, as long as another type makes it cheaper."""
    kept = _undominated(prices)
    some = prices[kept]
    free = float(prices.min(axis=0).sum())
    answer: list[TypeChoice] = []
    for types in range(1, min(_MOST_TYPES, prices.shape[1]) + 1):
        if comb(len(kept), types) > _MOST_TRIED:
            break
        best = np.inf
        chosen: tuple[int, ...] = ()
        for group in combinations(range(len(kept)), types):
            price = float(some[list(group)].min(axis=0).sum())
            if price < best:
                best, chosen = price, group
        if np.isfinite(best) and (not answer or best < answer[-1].price):
            answer.append(_choice(kept[list(chosen)], keys, prices, cheapest))
        if best <= free:
            break
    if not answer or answer[-1].price > free:
        answer.append(_choice(np.unique(prices.argmin(axis=0)), keys, prices, cheapest))
    return tuple(answer)


def _choice(
    chosen: NDArray[np.intp],
    keys: Sequence[tuple[str, bytes]],
    prices: FloatArray,
    cheapest: Sequence[dict[tuple[str, bytes], TypedSet]],
) -> TypeChoice:
    """The machine of some motors: on each axis the one of them that is cheapest there."""
    of_axis = chosen[prices[chosen].argmin(axis=0)]
    sets = tuple(axis[keys[motor]] for axis, motor in zip(cheapest, of_axis, strict=True))
    used = tuple(dict.fromkeys(one.motor for one in sets))
    return TypeChoice(len({int(motor) for motor in of_axis}), used, sum(one.price for one in sets), sets)


def _undominated(prices: FloatArray) -> NDArray[np.intp]:
    """Motors that no other one beats or equals on every axis; of equals the first stays."""
    order = np.argsort(np.where(np.isfinite(prices), prices, 1e300).sum(axis=1), kind="stable")
    kept: list[int] = []
    for motor in order.tolist():
        if not any(np.all(prices[other] <= prices[motor]) for other in kept):
            kept.append(motor)
    return np.array(sorted(kept), dtype=np.intp)


def _common(
    keys: Sequence[tuple[str, bytes]],
    prices: FloatArray,
    cheapest: Sequence[dict[tuple[str, bytes], TypedSet]],
) -> tuple[CommonMotor, ...]:
    """Motors that pass on more than one axis."""
    if not len(prices):
        return ()
    lowest = prices.min(axis=0)
    found = []
    for motor, key in enumerate(keys):
        passes = np.isfinite(prices[motor])
        if passes.sum() < 2:
            continue
        total = float(np.where(passes, prices[motor], lowest).sum())
        sets = tuple(axis[key] for axis in cheapest if key in axis)
        found.append(CommonMotor(key[0], sets, total if np.isfinite(total) else None))
    return tuple(
        sorted(found, key=lambda one: (-len(one.sets), np.inf if one.price is None else one.price, one.motor))
    )
