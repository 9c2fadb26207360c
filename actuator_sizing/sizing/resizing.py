"""One set sized again after a change: does it pass, by how much not, and which check says so."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property, partial

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.mechanics import check_motion
from actuator_sizing.case.model import Case
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.cycles import CycleDemand, cycle_demands, evaluate_cycles
from actuator_sizing.sizing.dynamic_results import add_dynamics
from actuator_sizing.sizing.judging import ORDER, Verdicts, active_checks, is_binding, judge_sets
from actuator_sizing.sizing.results import FAILS, NOT_CHECKED

IndexArray = NDArray[np.intp]

#: What a change shall reach: every check met, or met with the reserve that is recommended.
PASS, RESERVE = "pass", "reserve"
#: What bounds a change that no check is asked about: the mechanism cannot make such a motion.
MOTION = "motion"

_WORST = 10.0  # a check beyond ten times its limit says no more than that


@dataclass(frozen=True)
class Outcome:
    """How far one set is from its limits.

    Attributes
    ----------
    excess : float
        Largest demand over what is allowed, less one; positive where the goal is missed. [-]
    check : str
        Key of the check that decides, or `MOTION`.
    shares : mapping of str to float
        Demand over what is allowed, by check. [-]
    unknown : frozenset of str
        Binding checks that apply but lack data.
    """

    excess: float
    check: str
    shares: dict[str, float] = field(default_factory=dict)
    unknown: frozenset[str] = frozenset()

    @property
    def is_met(self) -> bool:
        """Whether the goal is reached."""
        return self.excess <= 0.0


@dataclass(frozen=True)
class Resizing:
    """Sizes the one set of a case again under changes.

    Attributes
    ----------
    case : Case
        A case of one set, from `case_changes.single`.
    goal : str
        `PASS` or `RESERVE`.
    cycles : tuple of CycleDemand
        Its cycles, reused by changes that do not touch them.
    """

    case: Case
    cycles: tuple[CycleDemand, ...]
    goal: str = PASS

    @classmethod
    def of(cls, case: Case, goal: str = PASS) -> Resizing:
        """Prepare a case of one set."""
        return cls(case, cycle_demands(case), goal)

    @classmethod
    def known(cls, case: Case, cycles: tuple[CycleDemand, ...], goal: str = PASS) -> Resizing:
        """Prepare a case of one set whose cycles ask what those of the whole case ask."""
        return cls(case, _as_changed(case, cycles), goal)

    def outcome(self, changed: Case) -> Outcome:
        """Size the set again.

        Parameters
        ----------
        changed : Case
            The case of this one set with something changed. [-]

        Returns
        -------
        Outcome
            A motion that the mechanism cannot make is as far beyond as can be, and so is a check that can be judged
            as the case is but lacks data after the change. [-]
        """
        if changed is self.case:
            return self._present
        found = self._sized(changed)
        if found.is_met and found.unknown:
            for check in sorted(found.unknown & self._present.shares.keys()):
                return Outcome(_WORST, check, {**found.shares, check: _WORST + 1.0}, found.unknown)
        return found

    @cached_property
    def _present(self) -> Outcome:
        return self._sized(self.case)

    def _sized(self, changed: Case) -> Outcome:
        same = changed.segments is self.case.segments and changed.mechanism is self.case.mechanism
        if not same and not _can_move(changed):
            return Outcome(_WORST, MOTION)
        try:
            cycles = _as_changed(changed, self.cycles) if same else cycle_demands(changed)
        except InputError:  # a geometry that jams
            return Outcome(_WORST, MOTION)
        return _worst(_judged(cycles), self.goal)

    def at(self, change: Callable[[Case, float], Case], value: float) -> Outcome:
        """The outcome after a change to a value, in the unit of the change [-]."""
        return self.outcome(change(self.case, value))


def _can_move(case: Case) -> bool:
    if case.recording is not None:
        return True
    problems = ProblemList()
    for one in case.by_cycle():
        check_motion(one.mechanism, one.motion_at_shaft, one.segments, problems)
    return not problems.has_errors


def _as_changed(case: Case, cycles: tuple[CycleDemand, ...]) -> tuple[CycleDemand, ...]:
    """Demands that are known still hold where the rest of the case is another."""
    return tuple(CycleDemand(one, known.demand) for one, known in zip(case.by_cycle(), cycles, strict=True))


def _judged(cycles: tuple[CycleDemand, ...]) -> Verdicts:
    """Verdicts of the one set by the checks that can fail it; simulated where the case asks how it moves."""
    pairs = zip(*active_checks(cycles[0].case.limits), strict=True)
    binding = [(check, limit) for check, limit in pairs if is_binding(check, limit)]
    checks, limits = tuple(check for check, _ in binding), tuple(limit for _, limit in binding)
    index = np.zeros((1, 3), dtype=np.intp)

    several = evaluate_cycles(cycles, index)

    def leading(number: int, sets: Sets) -> tuple[IndexArray, NDArray[np.bool_]]:
        judged = (*several[:number], sets, *several[number + 1 :])
        fails = judge_sets(judged, checks, limits).verdict == ORDER.index(FAILS)
        return np.flatnonzero(~fails), fails

    for number, each in enumerate(cycles):
        moving = add_dynamics(each.case, each.demand, several[number], index, partial(leading, number))
        several = (*several[:number], moving, *several[number + 1 :])
    return judge_sets(several, checks, limits)


def _worst(verdicts: Verdicts, goal: str) -> Outcome:
    shares: dict[str, float] = {}
    lacks = verdicts.binds[0] & (verdicts.codes[0] == ORDER.index(NOT_CHECKED))
    unknown = frozenset(verdicts.checks[column].key for column in np.flatnonzero(lacks))
    for column, (check, limit) in enumerate(zip(verdicts.checks, verdicts.limits, strict=True)):
        utilisation = float(verdicts.utilisation[0, column])
        if np.isnan(utilisation) or not verdicts.binds[0, column]:
            continue
        kept = 0.0 if goal == PASS else limit.recommended_reserve
        allowed = limit.allowed_utilisation * (1.0 - kept)
        share = utilisation / allowed if allowed > 0.0 else (np.inf if utilisation > 0.0 else 0.0)
        # Parts that fit are no reason for anything, however close they fit.
        shares[check.key] = min(share, 0.0 if check.is_fit and share <= 1.0 else _WORST + 1.0)
    for check in verdicts.checks:  # infinite where another check says by how much
        if shares.get(check.key, 0.0) > _WORST and shares.get(check.yields_to, 0.0) > 1.0:
            del shares[check.key]
    if not shares:
        return Outcome(-1.0, "", {}, unknown)
    governing = max(shares, key=lambda key: shares[key])
    return Outcome(shares[governing] - 1.0, governing, shares, unknown)
