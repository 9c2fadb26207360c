"""What would let a set pass: the smallest change of each lever, the cheapest pair, the next part of a catalog.

A lever is a quantity the user may change. For each, the set is sized again with the changed value until every
check passes; the answer is the passing end of the bracket. A set that passes with low reserve is asked what would
give it the reserve that is recommended.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from actuator_sizing.sizing.case_changes import single, whole_case
from actuator_sizing.sizing.cycles import CycleDemand
from actuator_sizing.sizing.levers.declared import LEVERS, Lever
from actuator_sizing.sizing.levers.pairs import PairOfLevers, cheapest_pair
from actuator_sizing.sizing.levers.parts import PartAnswer, other_parts
from actuator_sizing.sizing.levers.singles import LeverAnswer, Single, smallest_change
from actuator_sizing.sizing.resizing import PASS, RESERVE, Resizing

__all__ = [
    "LEVERS",
    "Lever",
    "LeverAnswer",
    "LeverStudy",
    "PairOfLevers",
    "PartAnswer",
    "Single",
    "levers_of",
    "smallest_change",
]


@dataclass(frozen=True)
class LeverStudy:
    """Every lever of one set.

    Attributes
    ----------
    goal : str
        `PASS`: every check met; `RESERVE`: met with the recommended reserve.
    singles : tuple of LeverAnswer
        The smallest change of each lever alone.
    parts : tuple of PartAnswer
        Another part of each catalog.
    pair : PairOfLevers or None
        Two changes that together cost less than any one alone.
    """

    goal: str
    singles: tuple[LeverAnswer, ...]
    parts: tuple[PartAnswer, ...]
    pair: PairOfLevers | None

    def as_mappings(self) -> tuple[Mapping[str, Any], ...]:
        """For results.json and report; the pair last. Every entry says which goal it reaches."""
        answers: list[LeverAnswer | PartAnswer | PairOfLevers] = [*self.singles, *self.parts]
        if self.pair is not None:
            answers.append(self.pair)
        return tuple({**answer.as_mapping(), "goal": self.goal} for answer in answers)


def levers_of(
    cycles: tuple[CycleDemand, ...],
    motor: int,
    gearhead: int,
    drive: int,
    weights: Mapping[str, float] | None = None,
) -> LeverStudy | None:
    """Every lever of one set that fails or has little reserve.

    Parameters
    ----------
    cycles : tuple of CycleDemand
        The cycles of the whole case. [-]
    motor, gearhead, drive : int
        The set, by index into the catalogs. [-]
    weights : mapping of str to float, optional
        What a lever costs more (or less) than another in a pair, by its key; 1 each. [-]

    Returns
    -------
    LeverStudy or None
        None where the set already has the reserve that is recommended.
    """
    case = whole_case(cycles)
    one = single(case, motor, gearhead, drive)
    resizing = Resizing.known(one, cycles, PASS)
    first = resizing.outcome(one)
    if first.is_met:
        resizing = Resizing.known(one, cycles, RESERVE)
        first = resizing.outcome(one)
        if first.is_met:
            return None
    found = [s for s in (smallest_change(resizing, lever, first) for lever in LEVERS) if s is not None]
    return LeverStudy(
        goal=resizing.goal,
        singles=tuple(s.answer for s in found),
        parts=other_parts(cycles, case, motor, gearhead, drive, resizing.goal),
        pair=cheapest_pair(resizing, found, weights),
    )
