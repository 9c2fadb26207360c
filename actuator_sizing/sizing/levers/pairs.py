"""The cheapest pair of levers: two changes that together let a set pass."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.sizing.edge_search import narrowed, walk
from actuator_sizing.sizing.levers.singles import LeverAnswer, Side, Single, answer
from actuator_sizing.sizing.resizing import Outcome, Resizing

FloatArray = NDArray[np.float64]

_SEARCHED = 2  # pairs that are sized; the others are predicted to cost more
_FINER = 4  # predicted points between two that were tried
_TURNS = 4  # of the golden section on the first lever
_ROUGH, _FINE = 1e-2, 1e-4  # of the change: resolution while searching, and of the answer
_GOLDEN = 0.5 * (5.0**0.5 - 1.0)
_CHEAPER = 0.98  # a pair that saves less than this against one lever alone is not worth two changes


@dataclass(frozen=True)
class PairOfLevers:
    """Two changes that together let the set pass, and what they cost together."""

    first: LeverAnswer
    second: LeverAnswer
    cost: float

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json and report."""
        return {
            "lever": "pair",
            "title": f"{self.first.title}, and {self.second.title}",
            "unit": "",
            "changes": [self.first.as_mapping(), self.second.as_mapping()],
            "cost": self.cost,
            "helps": True,
        }


def cheapest_pair(
    resizing: Resizing, singles: Sequence[Single], weights: Mapping[str, float] | None = None
) -> PairOfLevers | None:
    """The pair of levers that lets the set pass at the least cost.

    Parameters
    ----------
    resizing : Resizing
        The set, and what shall be reached.
    singles : sequence of Single
        What `smallest_change` found for each lever.
    weights : mapping of str to float, optional
        What a lever costs more (or less) than another, by its key; 1 each. [-]

    Returns
    -------
    PairOfLevers or None
        None where no pair was found that costs less than the cheapest lever alone.

    Notes
    -----
    The cost of a change is its size against the present value (see `Lever.cost`), that of a pair the sum. Which
    pairs are worth sizing is predicted: two changes are taken to multiply each utilisation by the product of
    what each does alone. The few best are then searched by sizing, a golden section on the first lever with the
    second at its edge; so the pair given passes, but a pair whose changes act on one another strongly may be missed.
    """
    costs = _Costs(resizing.case, weights or {})
    alone = [
        costs.of(side.lever.key, s.answer.cost) for s in singles for side in s.sides[:1] if s.answer.cost is not None
    ]  # fmt: skip
    ceiling = _CHEAPER * min(alone, default=np.inf)
    sides = [side for one in singles for side in one.sides]
    predicted = sorted(
        (p for a, b in combinations(sides, 2) if a.lever.key != b.lever.key for p in _predicted(costs, a, b)),
        key=lambda p: p.cost,
    )
    best: PairOfLevers | None = None
    for guess in [p for p in predicted if p.cost < ceiling][:_SEARCHED]:
        found = _searched(resizing, costs, guess)
        if found is not None and found.cost < (ceiling if best is None else best.cost):
            best = found
    return best


@dataclass(frozen=True)
class _Costs:
    case: Case
    weights: Mapping[str, float]

    def of(self, lever: str, cost: float) -> float:
        return self.weights.get(lever, 1.0) * cost

    def change(self, side: Side, value: float) -> float:
        return self.of(side.lever.key, side.lever.cost(self.case, side.present, value))


@dataclass(frozen=True)
class _Guess:
    first: Side
    second: Side
    values: tuple[float, float]
    cost: float


def _predicted(costs: _Costs, a: Side, b: Side) -> Iterator[_Guess]:
    """The cheapest combination of two sides by the product of their single effects, if any passes."""
    keys = sorted(set(a.walk.tried[0][1].shares))
    (value_a, effect_a), (value_b, effect_b) = _effects(a, keys), _effects(b, keys)
    start = np.log(np.maximum([a.walk.tried[0][1].shares[key] for key in keys], 1e-9))
    total = start + effect_a[:, None, :] + effect_b[None, :, :]
    passing = np.max(total, axis=2) <= 0.0
    if not passing.any():
        return
    cost_a = np.array([costs.change(a, v) for v in value_a])
    cost_b = np.array([costs.change(b, v) for v in value_b])
    cost = np.where(passing, cost_a[:, None] + cost_b[None, :], np.inf)
    i, j = np.unravel_index(int(cost.argmin()), cost.shape)
    yield _Guess(a, b, (float(value_a[i]), float(value_b[j])), float(cost[i, j]))


def _effects(side: Side, keys: Sequence[str]) -> tuple[FloatArray, FloatArray]:
    """Values along a side, the present one left out, and the logarithm of each share over the present one."""
    tried = side.walk.tried
    values = np.array([value for value, _ in tried])
    # A motion that cannot be made, or a check that no longer applies, has no share: taken as no change for good.
    shares = np.array([[outcome.shares.get(key, 11.0) for key in keys] for _, outcome in tried])
    logs = np.log(np.maximum(shares, 1e-9))
    places = np.linspace(0.0, len(values) - 1.0, (len(values) - 1) * _FINER + 1)[1:]
    steps = np.arange(len(values))
    fine = np.array([np.interp(places, steps, column) for column in (logs - logs[0]).T]).T
    return np.interp(places, steps, values), fine


def _searched(resizing: Resizing, costs: _Costs, guess: _Guess) -> PairOfLevers | None:
    a, b = guess.first, guess.second
    known: dict[float, tuple[float, float] | None] = {}

    def total(x: float) -> float:
        if x not in known:
            known[x] = _second(resizing, guess, x, _ROUGH)
        found = known[x]
        return np.inf if found is None else costs.change(a, x) + costs.change(b, found[0])

    far = a.walk.tried[-1][0] - a.present
    middle = (guess.values[0] - a.present) / far
    x = _golden(lambda part: total(a.present + part * far), 0.4 * middle, min(1.0, 1.6 * middle))
    first = float(a.present + x * far)
    found = _second(resizing, guess, first, _FINE)
    if found is None:
        return None
    case = resizing.case
    answers = answer(case, a.lever, a.present, first), answer(case, b.lever, b.present, found[0])
    return PairOfLevers(*answers, float(costs.change(a, first) + costs.change(b, found[0])))


def _golden(f: Callable[[float], float], low: float, high: float) -> float:
    """Where f is least on an interval, by the golden section; the best point that was tried."""
    inner = [high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)]
    values = [f(x) for x in inner]
    best = min(zip(values, inner, strict=True))
    for _ in range(_TURNS):
        if values[0] <= values[1]:
            high, inner[1], values[1] = inner[1], inner[0], values[0]
            inner[0] = high - _GOLDEN * (high - low)
            values[0] = f(inner[0])
            best = min(best, (values[0], inner[0]))
        else:
            low, inner[0], values[0] = inner[0], inner[1], values[1]
            inner[1] = low + _GOLDEN * (high - low)
            values[1] = f(inner[1])
            best = min(best, (values[1], inner[1]))
    return best[1]


def _second(
    resizing: Resizing, guess: _Guess, first_value: float, resolution: float
) -> tuple[float, float] | None:
    """Least value of the second lever that passes while the first has its value, and the failing one beside it."""
    a, b = guess.first, guess.second

    def at(value: float) -> Outcome:
        return resizing.outcome(b.lever.changed(a.lever.changed(resizing.case, first_value), value))

    begin = at(b.present)
    if begin.is_met:
        return None  # the first lever does it alone
    far = b.walk.tried[-1][0]
    share = (guess.values[1] - b.present) / (far - b.present)
    steps = sorted({min(1.0, share * k) for k in (0.9, 1.1, 1.5, 2.5)} | {1.0})
    bracket = walk(at, b.present, begin, far, steps).bracket
    if bracket is None:
        return None
    edge = narrowed(at, bracket, lambda value: resolution * abs(value - b.present))
    return edge.passing, edge.failing
