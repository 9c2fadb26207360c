"""The robustness study of a case: which set, how many samples, and what comes out."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.proportion import SCORE_95
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.case_changes import single
from actuator_sizing.sizing.robustness.evaluator import SetEvaluator
from actuator_sizing.sizing.robustness.results import Robustness
from actuator_sizing.sizing.robustness.study import (
    REPLICATES,
    Sampled,
    Sampling,
    check_table,
    corner_table,
    draw,
    input_table,
    judge_samples,
    partly_made,
    passes_all,
    probability,
    quantity_table,
    sensitivity_table,
    swing_table,
)

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison, SetResult

FloatArray = NDArray[np.float64]
Progress = Callable[[str, float], None]

SAMPLES = 10_000
#: Samples through the whole chain: where only parts differ they are made together, else one by one.
EXACT_TOGETHER, EXACT_ONE_BY_ONE = 1000, 200
SENSITIVITY = 256
#: What a report takes on its own account, so that it does not wait.
_REPORT = {"samples": 10_000, "exact": 0, "sensitivity": 64}
_SHORTLIST = 10


def robust(
    case_or_comparison: Case | Comparison,
    *,
    motor: str | None = None,
    gearhead: str | None = None,
    drive: str | None = None,
    samples: int = SAMPLES,
    exact: int | None = None,
    sensitivity: int = SENSITIVITY,
    seed: int = 0,
    probability: float | None = None,
    progress: Progress | None = None,
) -> Robustness:
    """Say how sure a set passes under the spreads that a case states.

    Parameters
    ----------
    case_or_comparison : Case or Comparison
        The axis, or its comparison where that is at hand. [-]
    motor, gearhead, drive : str, optional
        The set; by default the best one. Without `gearhead`, direct drive. [-]
    samples : int
        Independent samples of which probabilities and quantiles are taken. [-]
    exact : int, optional
        How many of them go through the whole chain of the comparison, where a check (bus, stopping) or an input
        (times) needs that: a millisecond each where only parts spread, tens of milliseconds where the load or the
        supply does. Default 1000 and 200. [-]
    sensitivity : int
        Rows of each of the eight replicates of the sensitivity design, a power of two; 0 leaves it out. [-]
    seed : int
        The same seed gives the same answer. [-]
    probability : float, optional
        Look for the first set, in the order of the ranking, that passes with this probability, 0 to 1. [-]
    progress : callable, optional
        Called with a stage and the part of it that is done, 0 to 1. [-]

    Returns
    -------
    Robustness
        Probabilities with intervals, quantiles, sensitivities, swings and the worst corner. [-]

    Raises
    ------
    InputError
        If the case states no spread, or none that acts on the set; if a part is not known, or an option is not
        possible.
    """
    from actuator_sizing.sizing.comparison import compare
    from actuator_sizing.sizing.results import Comparison

    comparison = case_or_comparison if isinstance(case_or_comparison, Comparison) else None
    case = case_or_comparison if isinstance(case_or_comparison, Case) else case_or_comparison.case
    named = motor is not None or gearhead is not None or drive is not None
    problems = _option_problems(case, samples, exact, sensitivity, probability, named)
    if problems:
        raise InputError(problems)
    demand = None if comparison is None else comparison.demand
    if named:
        from actuator_sizing.sizing.simulation_request import find_set

        parts = find_set(case, motor, gearhead, drive)
    else:
        comparison = comparison or compare(case, progress=progress)
        demand = comparison.demand
        parts = _parts(comparison.best)
    shortlist: list[dict[str, Any]] = []
    if probability is not None and comparison is not None:
        parts, shortlist = _first_that_passes(comparison, probability, samples, exact, seed, progress)
    evaluator = SetEvaluator.of(single(case, *parts), demand)
    sampling = _sampling(evaluator, samples, exact, sensitivity, seed, probability)
    return _study(evaluator, sampling, progress, shortlist, probability)


def robust_of_leading(comparison: Comparison) -> Robustness | None:
    """The study that a report shows: the leading set, at bounded cost.

    Parameters
    ----------
    comparison : Comparison
        The answer. [-]

    Returns
    -------
    Robustness or None
        None where the case states no spread that acts on the leading set. [-]
    """
    case = comparison.case
    if not case.tolerances or not comparison.sets:
        return None
    try:
        evaluator = SetEvaluator.of(single(case, *_parts(comparison.best)), comparison.demand)
    except InputError:
        return None  # wider than the value of this part: `robust` tells
    if not len(evaluator.inputs) or not evaluator.at_once.any():
        return None
    return _study(evaluator, Sampling(seed=0, **_REPORT), None, [], None)


def _parts(item: SetResult) -> tuple[int, int, int]:
    return item.motor_index, item.gearhead_index, item.drive_index


def _option_problems(
    case: Case, samples: int, exact: int | None, sensitivity: int, probability: float | None, named: bool
) -> list[Problem]:
    """Everything that is wrong with what was asked for."""
    found = []
    if not case.tolerances:
        found.append(
            Problem("tolerances", None, "quantity", "no row", "at least one input that spreads",
                    "State in the table tolerances how far inputs may be from their values.")
        )  # fmt: skip
    for name, value in (("samples", samples), ("exact", samples if exact is None else exact)):
        if value < 1:
            found.append(
                Problem("robust", None, name, str(value), "a whole number ≥ 1", "Ask for some samples.")
            )
    if sensitivity < 0 or sensitivity & (sensitivity - 1):
        found.append(
            Problem("robust", None, "sensitivity", str(sensitivity), "a power of two, or 0",
                    "Sobol sequences are balanced over powers of two, such as 256.")
        )  # fmt: skip
    if probability is not None and not 0.0 < probability < 1.0:
        found.append(
            Problem("robust", None, "probability", f"{probability:g}", "a number above 0 and below 1",
                    "Write 0.99 for 99 %; certainty cannot be sampled.")
        )  # fmt: skip
    if probability is not None and named:
        found.append(
            Problem("robust", None, "probability", "a set by name", "either a probability or a set",
                    "Leave the parts out to search the ranking.")
        )  # fmt: skip
    return found


def _first_that_passes(
    comparison: Comparison,
    wanted: float,
    samples: int,
    exact: int | None,
    seed: int,
    progress: Progress | None,
) -> tuple[tuple[int, int, int], list[dict[str, Any]]]:
    """The first set of the ranking that passes often enough, and what each up to it reaches."""
    from actuator_sizing.sizing.results import FAILS

    passing = [item for item in comparison.sets if item.verdict != FAILS][:_SHORTLIST]
    rows: list[dict[str, Any]] = []
    for place, item in enumerate(passing):
        evaluator = SetEvaluator.of(single(comparison.case, *_parts(item)), comparison.demand)
        sampling = _sampling(evaluator, samples, exact, 0, seed, wanted)
        values = draw(evaluator, sampling)
        # What fails checks that are judged at once needs no dear samples any more: the others only make it worse.
        found = probability(
            passes_all(evaluator.at_once_only(), judge_samples(evaluator.at_once_only(), values, 0, None))
        )
        if found["probability_low"] >= wanted and not evaluator.at_once.all():
            found = probability(
                passes_all(evaluator, judge_samples(evaluator, values, sampling.exact, progress))
            )
        enough = found["probability_low"] >= wanted
        rows.append({"rank": item.rank, "motor": item.motor, "gearhead": item.gearhead or "direct",
                     "drive": item.drive, "price": item.price, **found, "reaches": enough})  # fmt: skip
        if progress is not None:
            progress("sets of the ranking", (place + 1) / len(passing))
        if enough:
            return _parts(item), rows
    return _parts(comparison.best), rows


def _sampling(
    evaluator: SetEvaluator,
    samples: int,
    exact: int | None,
    sensitivity: int,
    seed: int,
    wanted: float | None = None,
) -> Sampling:
    """How much is sampled; by default so many exact ones that the wanted probability can be shown at all."""
    if exact is None:
        exact = EXACT_ONE_BY_ONE if evaluator.one_by_one else EXACT_TOGETHER
        if wanted is not None:
            exact = max(exact, int(np.ceil(2.0 * SCORE_95**2 * wanted / (1.0 - wanted))))
    return Sampling(samples, min(exact, samples), sensitivity, seed)


def _study(
    evaluator: SetEvaluator,
    sampling: Sampling,
    progress: Progress | None,
    shortlist: list[dict[str, Any]],
    wanted: float | None,
) -> Robustness:
    import pandas as pd

    inputs, case = evaluator.inputs, evaluator.case
    if not len(inputs):
        raise InputError([
            Problem("tolerances", None, "quantity", "; ".join(inputs.left_out), "an input of the chosen set",
                    "State spreads of values that the set has.")
        ])  # fmt: skip
    if sampling.exact == 0:
        evaluator = evaluator.at_once_only()
    sampled = judge_samples(evaluator, draw(evaluator, sampling), sampling.exact, progress)
    swings = swing_table(evaluator)
    corners = corner_table(evaluator, swings)
    ends = swings[["utilisation_low", "utilisation_high"]].notna().any(axis=1)
    checks = check_table(evaluator, sampled, {*corners["check"], *swings.loc[ends, "check"]})
    shown = frozenset(checks["check"])
    direct = bool(case.gearhead_parameters.is_direct[0])
    return Robustness(
        case_name=case.name,
        motor=case.motors.names[0],
        gearhead="direct" if direct else case.gearheads.names[0],
        drive=case.drives.names[0],
        samples=sampling.samples,
        exact_samples=0 if sampled.exact is None else len(sampled.exact.utilisation),
        sensitivity_samples=sampling.sensitivity,
        seed=sampling.seed,
        probability=probability(passes_all(evaluator, sampled)),
        inputs=input_table(evaluator),
        checks=checks,
        quantities=quantity_table(sampled),
        sensitivity=sensitivity_table(evaluator, sampling),
        swings=swings[swings["check"].isin(shown)].reset_index(drop=True),
        corners=corners,
        not_checked=tuple(check.title for check in evaluator.not_checked),
        largest_deviation=evaluator.largest_deviation,
        notes=_notes(evaluator, sampling, sampled, shown),
        shortlist=pd.DataFrame(shortlist),
        wanted_probability=np.nan if wanted is None else wanted,
    )


def _notes(
    evaluator: SetEvaluator, sampling: Sampling, sampled: Sampled, shown: frozenset[str]
) -> tuple[str, ...]:
    """Conditions that a reader must know."""
    inputs = evaluator.inputs
    notes = [f"not used: {text}" for text in inputs.left_out]
    notes += [f"not sampled here, see the command robust: {check.title}" for check in evaluator.put_aside]
    if evaluator.put_aside:
        notes.append("nor are checks that apply only with the spread")
    notes += [
        f"not sampled, needs a simulation of every sample: {check.title}" for check in evaluator.simulated
    ]
    notes += partly_made(evaluator, sampled)
    slow = [
        check.title
        for check, quick in zip(evaluator.checks, evaluator.at_once, strict=True)
        if not quick and check.key in shown
    ]
    if sampled.exact is not None and slow:
        notes.append(f"from {sampling.exact} samples through the whole chain: {', '.join(slow)}; all checks together "
                     "too")  # fmt: skip
    if evaluator.at_once.any():
        notes.append(f"the other samples differ from the whole chain by at most {evaluator.largest_deviation:.1e} of "
                     "what is allowed, compared on samples up to two standard deviations out")  # fmt: skip
    if not evaluator.at_once.any():
        notes.append("no sensitivity indices: an input needs the whole chain for every sample")
    elif sampling.sensitivity:
        notes.append(f"sensitivity: first order by Saltelli 2010, total by Jansen 1999, {REPLICATES} independently "
                     f"scrambled Sobol designs of {sampling.sensitivity} rows; the error is their scatter. Inputs "
                     "that vary together count as one group")  # fmt: skip
    if any(not one.is_bounded for one in inputs.inputs):
        notes.append(
            "in swings a normal distribution stands at two standard deviations; in corners at its value"
        )
    if any(one.spread.table == "duty_cycle" for one in inputs.inputs):
        notes.append("a spread of the duty cycle moves every segment alike")
    if any(one.spread.correlations for one in inputs.inputs):
        notes.append("correlations are those of normal scores (Gaussian copula)")
    return tuple(notes)


__all__ = ["SAMPLES", "robust", "robust_of_leading"]
