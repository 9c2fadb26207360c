"""The smallest change of one lever that lets a set pass."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from actuator_sizing.case.model import Case
from actuator_sizing.sizing.edge_search import Walk, narrowed, walk
from actuator_sizing.sizing.levers.declared import Lever
from actuator_sizing.sizing.resizing import Outcome, Resizing

_RESOLUTION = 1e-4  # of the change itself: how closely the smallest change is found


@dataclass(frozen=True)
class LeverAnswer:
    """The smallest change of one lever that lets the set pass; `needed` is None where none helps."""

    lever: str
    title: str
    unit: str
    present: float
    needed: float | None
    cost: float | None = None  # see `Lever.cost`
    entered: tuple[str, str] = ("", "")

    @property
    def change(self) -> float | None:
        """Needed less present, in the unit of the lever [-]."""
        return None if self.needed is None else self.needed - self.present

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json and report."""
        return {
            "lever": self.lever,
            "title": self.title,
            "unit": self.unit,
            "present": self.present,
            "needed": self.needed,
            "change": self.change,
            "cost": self.cost,
            "helps": self.needed is not None,
            "entered": list(self.entered),
        }


@dataclass(frozen=True)
class Side:
    """One direction of one lever with what was tried there."""

    lever: Lever
    present: float
    walk: Walk


@dataclass(frozen=True)
class Single:
    """The answer of one lever and its sides, from which pairs are made."""

    answer: LeverAnswer
    sides: tuple[Side, ...]


def smallest_change(resizing: Resizing, lever: Lever, first: Outcome | None = None) -> Single | None:
    """Smallest change of one lever that lets the one set of a case reach the goal.

    Parameters
    ----------
    resizing : Resizing
        The set, and what shall be reached.
    lever : Lever
        What may change.
    first : Outcome or None
        The outcome as it is, where that is known already.

    Returns
    -------
    Single or None
        None where the lever does not exist for this set.

    Notes
    -----
    Tried at growing distances in each direction, then narrowed to 1e-4 of the change. A window of values
    narrower than the distance between two trials can be missed where the dependence is not monotone.
    """
    case = resizing.case
    present = lever.present(case)
    if present is None:
        return None
    begin = first or resizing.outcome(case)
    at = outcomes(resizing, lever)
    sides, best = [], None
    for bound in lever.bounds(case, present):
        tried = walk(at, present, begin, bound)
        sides.append(Side(lever, present, tried))
        if tried.bracket is None:
            continue
        edge = narrowed(at, tried.bracket, lambda value: _RESOLUTION * abs(value - present))
        if best is None or abs(edge.passing - present) < abs(best - present):
            best = edge.passing
    return Single(answer(case, lever, present, best), tuple(sides))


def outcomes(resizing: Resizing, lever: Lever) -> Callable[[float], Outcome]:
    """The outcome over the value of a lever."""
    return lambda value: resizing.at(lever.changed, value)


def answer(case: Case, lever: Lever, present: float, needed: float | None) -> LeverAnswer:
    """What to tell of a lever and the value that it needs; None where no value helps."""
    cost = None if needed is None else lever.cost(case, present, needed)
    return LeverAnswer(lever.key, lever.title, lever.unit(case), present, needed, cost, lever.entered)
