"""One set judged for many samples: at once where the physics allows it, else one after the other."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case, Limit
from actuator_sizing.sizing.checks import Check, Sets
from actuator_sizing.sizing.cycles import CycleDemand, cycle_demands, evaluate_cycles
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.dynamic_results import wishes
from actuator_sizing.sizing.judging import NOT_APPLICABLE, ORDER, Verdicts, active_checks, judge_sets
from actuator_sizing.sizing.results import NOT_CHECKED
from actuator_sizing.sizing.robustness.inputs import SpreadInputs, spread_inputs
from actuator_sizing.sizing.robustness.sampled_sets import SAMPLED_CHECKS, SAMPLED_QUANTITIES, Sampler
from actuator_sizing.sizing.robustness.state import Samples, samples_of

FloatArray = NDArray[np.float64]
Progress = Callable[[float], None]

#: Largest deviation from the exact chain, relative to the allowed utilisation, with which samples are taken at once.
_AGREEMENT = 2e-3
#: Samples of one cycle that go through the whole chain at a time: below what it takes in one piece itself.
_TOGETHER = 125
_UNKNOWN = ORDER.index(NOT_CHECKED)


@dataclass(frozen=True)
class Judged:
    """N samples against C checks; `quantities` hold one array of shape (N,) by name, the largest of all cycles."""

    utilisation: FloatArray  # (N, C), NaN where the check was not made
    codes: NDArray[np.int8]  # (N, C), as of `Verdicts`; NOT_APPLICABLE also where nothing was judged
    binds: NDArray[np.bool_]  # (N, C), whether the sample can fail the check, or is only advised by it
    quantities: dict[str, FloatArray]

    @property
    def applies(self) -> NDArray[np.bool_]:
        """Samples to which each check applies, shape (N, C)."""
        return np.asarray(self.codes != NOT_APPLICABLE)


@dataclass(frozen=True)
class SetEvaluator:
    """One set of a case with its spread inputs.

    Attributes
    ----------
    case : Case
        A case of one set. [-]
    cycles : tuple of CycleDemand
        Its cycles without spread. [-]
    inputs : SpreadInputs
        The d inputs. [-]
    checks, limits : tuple of Check, tuple of Limit
        The C active checks, without those of `not_checked` and `simulated`. Which apply is decided in every
        sample: a brake resistor that idles without spread may burn with it. [-]
    not_checked : tuple of Check
        Checks that apply, but whose data are missing. [-]
    nominal : ndarray, shape (C,)
        Utilisation without spread; NaN where the check does not apply. [-]
    simulated : tuple of Check
        Checks that the case asks for, left out because they need a simulation of every sample. [-]
    put_aside : tuple of Check
        Checks that were left out because they need the whole chain for every sample. [-]
    """

    case: Case
    cycles: tuple[CycleDemand, ...]
    inputs: SpreadInputs
    checks: tuple[Check, ...]
    limits: tuple[Limit, ...]
    not_checked: tuple[Check, ...]
    nominal: FloatArray
    simulated: tuple[Check, ...] = ()
    put_aside: tuple[Check, ...] = ()

    @classmethod
    def of(cls, case: Case, demand: Demand | None = None) -> SetEvaluator:
        """Prepare a case of one set, as from `case_changes.single`, perhaps with the demand of its one cycle."""
        one = demand is not None and len(case.cycles) < 2
        cycles = (CycleDemand(case, demand),) if one and demand is not None else cycle_demands(case)
        inputs = spread_inputs(case)
        checks, limits = active_checks(case.limits)
        sets = evaluate_cycles(cycles, np.zeros((1, 3), dtype=np.intp))
        verdicts = judge_sets(sets, checks, limits)
        of_motion = [any(need.part == "dynamics" for need in check.needs) for check in checks]
        asked = replace(sets[0], dynamics=wishes(case))
        known = [i for i, code in enumerate(verdicts.codes[0]) if code != _UNKNOWN and not of_motion[i]]
        return cls(
            case,
            cycles,
            inputs,
            tuple(checks[i] for i in known),
            tuple(limits[i] for i in known),
            tuple(c for c, code in zip(checks, verdicts.codes[0], strict=True) if code == _UNKNOWN),
            verdicts.utilisation[0, known],
            tuple(c for c, moves in zip(checks, of_motion, strict=True) if moves and c.applies(asked).any()),
        )

    @cached_property
    def allowed(self) -> FloatArray:
        """Allowed utilisation of each check, shape (C,). [-]"""
        return np.array([limit.allowed_utilisation for limit in self.limits])

    @cached_property
    def at_once(self) -> NDArray[np.bool_]:
        """Checks that `quick` judges, shape (C,); none where an input does not allow it."""
        names = np.array([check.key in SAMPLED_CHECKS for check in self.checks], dtype=bool)
        return names if self._deviation[0] else np.zeros_like(names)

    def at_once_only(self) -> SetEvaluator:
        """The same set with those checks only that are judged at once."""
        kept = np.flatnonzero(self.at_once)
        other = replace(
            self,
            checks=tuple(self.checks[i] for i in kept),
            limits=tuple(self.limits[i] for i in kept),
            nominal=self.nominal[kept],
            put_aside=tuple(self.checks[i] for i in np.flatnonzero(~self.at_once & ~np.isnan(self.nominal))),
        )
        # They depend on the set and its inputs, not on the checks left, and are dear.
        other.__dict__.update(_sampler=self._sampler, _deviation=self._deviation, one_by_one=self.one_by_one)
        return other

    @property
    def largest_deviation(self) -> float:
        """Largest deviation of `quick` from the exact chain, relative to the limit; NaN if not used. [-]"""
        return self._deviation[1]

    @cached_property
    def one_by_one(self) -> bool:
        """Whether exact samples need the whole chain for each, at tens of milliseconds.

        They do where each has a cycle of its own, and where a check takes the surroundings as one number: that is
        found by trying, since a check may come from anywhere.
        """
        samples = self.samples(
            self.inputs.of_scores(np.linspace(-1.0, 1.0, 3)[:, None] * np.ones(len(self.inputs)))
        )
        if samples.moves_demand or samples.options:
            return True
        if not samples.moves_surroundings:
            return False
        try:
            together = self._exact_part(samples).utilisation
        except (TypeError, ValueError):
            return True
        alone = np.concatenate(
            [self._exact_part(samples.part(slice(i, i + 1))).utilisation for i in range(3)]
        )
        return not np.allclose(together, alone, rtol=1e-9, equal_nan=True)

    def samples(self, values: FloatArray) -> Samples:
        """Samples from values of the inputs, shape (N, d)."""
        return samples_of(self.case, self.inputs, values)

    @cached_property
    def _sampler(self) -> Sampler | None:
        first = self.cycles[0]
        can = len(self.cycles) == 1 and first.cycle.repeats and first.demand.slices is None
        if not can or "duration" in {one.column.name for one in self.inputs.inputs}:
            return None
        return Sampler.of(self.case, first.demand)

    @cached_property
    def _deviation(self) -> tuple[bool, float]:
        """Whether samples can be taken at once, and how far that is from the exact chain on some of them."""
        if self._sampler is None:
            return False, np.nan
        scores = np.concatenate([2.0 * np.eye(len(self.inputs)), -2.0 * np.eye(len(self.inputs))])
        scores = np.concatenate([scores, np.random.default_rng(0).standard_normal((6, len(self.inputs)))])
        values = self.inputs.of_scores(scores)
        columns = np.array([check.key in SAMPLED_CHECKS for check in self.checks], dtype=bool)
        try:
            quick = self._quick(values, columns).utilisation[:, columns]
        except (AttributeError, TypeError, ValueError):
            return False, np.nan  # a mechanism or a check whose formulas take one value at a time
        exact = self.exact(values).utilisation[:, columns]
        both = np.isfinite(quick) & np.isfinite(exact)
        same_kind = np.array_equal(np.isfinite(quick), np.isfinite(exact))
        difference = np.abs(np.where(both, quick, 0.0) - np.where(both, exact, 0.0))
        scale = np.maximum(self.allowed[columns], np.where(both, exact, 0.0))
        worst = float(np.max(difference / scale, initial=0.0))
        return same_kind and worst <= _AGREEMENT, worst

    def quick(self, values: FloatArray) -> Judged:
        """Judge samples all at once by the checks of `at_once`.

        Parameters
        ----------
        values : ndarray, shape (N, d)
            Values of the inputs, in SI. [-]
        """
        return self._quick(values, self.at_once)

    def _quick(self, values: FloatArray, columns: NDArray[np.bool_]) -> Judged:
        shape = (len(values), len(self.checks))
        utilisation, codes = np.full(shape, np.nan), np.full(shape, NOT_APPLICABLE, dtype=np.int8)
        binds = np.zeros(shape, dtype=bool)
        sampler = self._sampler
        if sampler is None or not columns.any() or not len(values):
            return Judged(utilisation, codes, binds, {})
        sets = sampler.sets(self.samples(values))
        chosen = np.flatnonzero(columns)
        found = self._judge(sets, tuple(chosen))
        utilisation[:, chosen], codes[:, chosen], binds[:, chosen] = (
            found.utilisation,
            found.codes,
            found.binds,
        )
        return Judged(utilisation, codes, binds, _quantities(sets))

    def exact(self, values: FloatArray, progress: Progress | None = None) -> Judged:
        """Judge samples by every check through the whole exact chain.

        Parameters
        ----------
        values : ndarray, shape (N, d)
            Values of the inputs, in SI. [-]
        progress : callable, optional
            Called with the part done, 0 to 1. [-]
        """
        samples = self.samples(values)
        count = max(len(values), 1)
        size = 1 if self.one_by_one else _TOGETHER
        parts = []
        for start in range(0, count, size):
            parts.append(self._exact_part(samples.part(slice(start, start + size))))
            if progress is not None:
                progress(min(1.0, (start + size) / count))
        return Judged(
            np.concatenate([part.utilisation for part in parts]),
            np.concatenate([part.codes for part in parts]),
            np.concatenate([part.binds for part in parts]),
            {name: np.concatenate([part.quantities[name] for part in parts]) for name in SAMPLED_QUANTITIES},
        )

    def _exact_part(self, samples: Samples) -> Judged:
        """Few samples through the whole chain: one of them with cycles of its own, or several of the same cycles."""
        everything = tuple(range(len(self.checks)))
        case = samples.one(0) if len(samples) == 1 else samples.parts_only()
        if samples.moves_demand:
            cycles = cycle_demands(case)
        else:
            known = zip(case.by_cycle(), self.cycles, strict=True)
            cycles = tuple(CycleDemand(one, each.demand) for one, each in known)
        index = np.repeat(np.arange(len(samples), dtype=np.intp)[:, None], 3, axis=1)
        sets = evaluate_cycles(cycles, index)
        found = [_quantities(each) for each in sets]
        largest = {name: np.fmax.reduce([one[name] for one in found]) for name in SAMPLED_QUANTITIES}
        verdicts = self._judge(sets, everything)
        return Judged(verdicts.utilisation, verdicts.codes, verdicts.binds, largest)

    def _judge(self, sets: Sets | tuple[Sets, ...], columns: tuple[int, ...]) -> Verdicts:
        checks, limits = tuple(self.checks[i] for i in columns), tuple(self.limits[i] for i in columns)
        return judge_sets(sets, checks, limits)


def _quantities(sets: Sets) -> dict[str, FloatArray]:
    return {name: getattr(sets.pairs, name) for name in SAMPLED_QUANTITIES}
