"""Where along one quantity a set starts or ceases to pass: walked outwards, then narrowed."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from actuator_sizing.sizing.resizing import Outcome

#: Parts of the way from the present value to the bound at which the set is tried, nearest first.
STEPS = (0.02, 0.06, 0.15, 0.35, 0.65, 1.0)
_MOST_TURNS = 60
_UNCHANGED = 1e-9  # of a share: rounding


@dataclass(frozen=True)
class Edge:
    """Two values close together, of which one passes and the other fails.

    Attributes
    ----------
    passing, failing : float
        The two values, in the unit of the quantity. [-]
    check : str
        What fails at the failing one.
    outcome : Outcome
        Of the passing one.
    """

    passing: float
    failing: float
    check: str
    outcome: Outcome


@dataclass(frozen=True)
class Walk:
    """What was tried from the present value outwards, in order."""

    tried: tuple[tuple[float, Outcome], ...]

    @property
    def bracket(self) -> tuple[tuple[float, Outcome], tuple[float, Outcome]] | None:
        """The two neighbours between which the outcome changes; None where it never does."""
        last, end = self.tried[-2:] if len(self.tried) > 1 else (self.tried[0], self.tried[0])
        return None if last[1].is_met == end[1].is_met else (last, end)


def walk(
    outcome_at: Callable[[float], Outcome],
    start: float,
    first: Outcome,
    bound: float,
    steps: Sequence[float] = STEPS,
) -> Walk:
    """Try growing distances from a value until passing turns to failing, or failing to passing.

    Parameters
    ----------
    outcome_at : callable
        Value → outcome.
    start : float
        Where to begin. [-]
    first : Outcome
        The outcome there.
    bound : float
        The furthest value. [-]
    steps : sequence of float
        Parts of the way, ascending, the last one 1. [-]

    Returns
    -------
    Walk
        All that was tried, the start first; it ends at the first change or at the bound. [-]

    Notes
    -----
    Where the furthest value leaves the check that fails exactly as it was, the quantity does not act on it, and
    nothing in between is tried.
    """
    tried = [(start, first)]
    furthest = outcome_at(bound)
    if not first.is_met and not _touches(first, furthest):
        return Walk((*tried, (bound, furthest)))
    for step in steps:
        value = start + step * (bound - start)
        outcome = furthest if step == 1.0 else outcome_at(value)
        tried.append((value, outcome))
        if outcome.is_met != first.is_met:
            break
    return Walk(tuple(tried))


def _touches(first: Outcome, other: Outcome) -> bool:
    """Whether what fails at first has changed at all, for better or worse."""
    before, after = first.shares.get(first.check), other.shares.get(first.check)
    return before is None or after is None or abs(after - before) > _UNCHANGED * before


def narrowed(
    outcome_at: Callable[[float], Outcome],
    bracket: tuple[tuple[float, Outcome], tuple[float, Outcome]],
    tolerance: Callable[[float], float],
) -> Edge:
    """Narrow a bracket of one passing and one failing value.

    Parameters
    ----------
    outcome_at : callable
        Value → outcome.
    bracket : tuple
        Two values with their outcomes, in either order. [-]
    tolerance : callable
        Passing value → width at which the search ends. [-]

    Returns
    -------
    Edge
        Both ends of the narrowed bracket. [-]

    Notes
    -----
    Secant with the weight of an end that stays put halved (Illinois), kept off the ends by half the tolerance so
    that the bracket closes from both sides; the bracket is halved where one end has stayed put twice.
    """
    (good, met), (bad, missed) = bracket if bracket[0][1].is_met else bracket[::-1]
    weight_good, weight_bad = met.excess, missed.excess
    stayed = 0  # > 0: the passing end stayed, < 0: the failing one
    for _ in range(_MOST_TURNS):
        width = abs(bad - good)
        if width <= tolerance(good) or width <= 4e-16 * max(abs(good), abs(bad)):
            break
        slope = weight_bad - weight_good
        part = -weight_good / slope if slope > 0.0 and abs(stayed) < 2 else 0.5
        least = min(0.5 * tolerance(good) / width, 0.5)
        value = good + float(np.clip(part, least, 1.0 - least)) * (bad - good)
        outcome = outcome_at(value)
        if outcome.is_met:
            good, met, weight_good = value, outcome, outcome.excess
            weight_bad *= 0.5 if stayed < 0 else 1.0
            stayed = min(stayed, 0) - 1 if stayed > -2 else 0
        else:
            bad, missed, weight_bad = value, outcome, outcome.excess
            weight_good *= 0.5 if stayed > 0 else 1.0
            stayed = max(stayed, 0) + 1 if stayed < 2 else 0
    return Edge(good, bad, missed.check, met)
