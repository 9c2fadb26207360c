"""Every cycle of a case through the chain that sizes one: demands, evaluated sets, and the worst of the verdicts.

Each cycle is a case of its own to that chain. A set must pass every check in each of them.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import ONCE_WARM, SHORT_TIME, Case, Cycle
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.demand import Demand, build_demand
from actuator_sizing.sizing.shortlist import evaluate_sets
from actuator_sizing.sizing.thermal_start import ThermalStart

IndexArray = NDArray[np.intp]


@dataclass(frozen=True)
class CycleDemand:
    """One cycle of a case with what it asks of the driven shaft."""

    case: Case  # with this cycle alone
    demand: Demand

    @property
    def cycle(self) -> Cycle:
        """Name, share and how it runs."""
        return self.case.cycle


def cycle_demands(case: Case) -> tuple[CycleDemand, ...]:
    """Demand of every cycle of a case.

    Parameters
    ----------
    case : Case
        The axis as understood. [-]

    Returns
    -------
    tuple of CycleDemand
        At least one; in the order of the case. [-]
    """
    return tuple(CycleDemand(each, build_demand(each)) for each in case.by_cycle())


def evaluate_cycles(
    cycles: tuple[CycleDemand, ...], index: IndexArray, progress: Callable[[float], None] | None = None
) -> tuple[Sets, ...]:
    """Evaluate sets exactly in every cycle.

    Parameters
    ----------
    cycles : tuple of CycleDemand
        The cycles. [-]
    index : ndarray of int, shape (S, 3)
        Motor, gearhead and drive of each set. [-]
    progress : callable, optional
        Called with the part done, 0 to 1. [-]

    Returns
    -------
    tuple of Sets
        One for each cycle, in the same order. [-]
    """
    found: dict[int, Sets] = {}
    # What runs once out of the warm state needs the temperatures of the others.
    order = sorted(range(len(cycles)), key=lambda number: not cycles[number].cycle.repeats)
    for done, number in enumerate(order):
        each = cycles[number]
        start = None if each.cycle.repeats else _start(each, cycles, found, len(index))
        found[number] = evaluate_sets(each.case, each.demand, index, _part(progress, done, len(order)), start)
    return tuple(found[number] for number in range(len(cycles)))


def _start(
    each: CycleDemand, cycles: tuple[CycleDemand, ...], found: dict[int, Sets], count: int
) -> ThermalStart:
    """State before a cycle that does not repeat."""
    ambient = np.full(count, each.case.surroundings.ambient_degc)
    repeating = [number for number, other in enumerate(cycles) if other.cycle.repeats]
    following: tuple[Demand, ...] = ()
    if each.cycle.runs != SHORT_TIME:
        following = tuple(cycles[number].demand for number in repeating)
    if each.cycle.runs != ONCE_WARM:
        return ThermalStart(ambient, ambient, following)
    warm = [found[number].pairs for number in repeating]
    # The hottest of both bodies, though not at one instant: no start within a cycle is hotter.
    winding = np.max([pairs.winding_max_degc for pairs in warm], axis=0)
    return ThermalStart(winding, np.max([pairs.housing_max_degc for pairs in warm], axis=0), following)


def _part(progress: Callable[[float], None] | None, done: int, count: int) -> Callable[[float], None] | None:
    if progress is None:
        return None
    return lambda part: progress((done + part) / count)
