"""Probabilities, quantiles, sensitivities, swings and corners of one set."""

from __future__ import annotations

from collections.abc import Callable, Collection
from dataclasses import dataclass
from itertools import product
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

from actuator_sizing.core.proportion import wilson_interval
from actuator_sizing.core.sobol_indices import Indices, exchanged, sobol_indices
from actuator_sizing.sizing.robustness.evaluator import Judged, SetEvaluator

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]
Progress = Callable[[str, float], None]

REPLICATES = 8  # independent scramblings of the sensitivity design; their scatter is its error
QUANTILES = (0.01, 0.05, 0.5, 0.95, 0.99)
_MOST_CORNERS = 12  # bounded inputs of which every corner is tried, 4096 of them
_MOST_EXACT_CORNERS = 5  # the same where each corner needs the whole chain
_CLIPPED = 10.0  # a utilisation beyond ten times what is allowed, or infinite, says no more than that


@dataclass(frozen=True)
class Sampling:
    """How much is sampled.

    Attributes
    ----------
    samples : int
        Samples of which probabilities and quantiles are taken. [-]
    exact : int
        How many of them go through the whole chain, for the checks that cannot be made all at once. [-]
    sensitivity : int
        Rows of each of the replicated sensitivity designs, a power of two; 0 leaves it out. [-]
    seed : int
        Of everything that is drawn. [-]
    """

    samples: int
    exact: int
    sensitivity: int
    seed: int


def draw(evaluator: SetEvaluator, sampling: Sampling) -> FloatArray:
    """Independent samples of the inputs, shape (N, d), in SI."""
    rng = np.random.default_rng(np.random.SeedSequence(sampling.seed, spawn_key=(0,)))
    return evaluator.inputs.of_scores(rng.standard_normal((sampling.samples, len(evaluator.inputs))))


@dataclass(frozen=True)
class Sampled:
    """N samples judged: by `quick` all of them, through the whole chain the first of them."""

    quick: Judged
    exact: Judged | None
    at_once: NDArray[np.bool_]  # (C,) checks of `quick`

    def of_check(self, column: int) -> Judged:
        """The samples in which one check was made."""
        return self.quick if self.exact is None or self.at_once[column] else self.exact


def passing(judged: Judged, allowed: FloatArray) -> NDArray[np.bool_]:
    """Samples that pass each check, shape (N, C): one that does not apply is passed, one not checked is not."""
    return ~judged.applies | (judged.utilisation <= allowed)


def judge_samples(
    evaluator: SetEvaluator, values: FloatArray, exact: int, progress: Progress | None
) -> Sampled:
    """Judge drawn samples.

    Parameters
    ----------
    evaluator : SetEvaluator
        The set. [-]
    values : ndarray, shape (N, d)
        Values of the inputs, in SI. [-]
    exact : int
        How many go through the whole chain, where a check needs it. [-]
    progress : callable or None
        Called with a stage and the part of it that is done. [-]
    """
    quick = evaluator.quick(values)
    if evaluator.at_once.all():
        return Sampled(quick, None, evaluator.at_once)
    report = None if progress is None else lambda part: progress("exact samples", part)
    return Sampled(quick, evaluator.exact(values[:exact], report), evaluator.at_once)


def check_table(evaluator: SetEvaluator, sampled: Sampled, tried: Collection[str] = ()) -> pd.DataFrame:
    """Probability, its interval and quantiles of the utilisation of each check that applies at all.

    Parameters
    ----------
    evaluator : SetEvaluator
        The set. [-]
    sampled : Sampled
        Its samples. [-]
    tried : collection of str
        Checks that apply at a swing or in a corner, be it in no sample. [-]
    """
    import pandas as pd

    rows: list[dict[str, Any]] = []
    for column, (check, allowed) in enumerate(zip(evaluator.checks, evaluator.allowed, strict=True)):
        judged = sampled.of_check(column)
        use, applies = judged.utilisation[:, column], judged.applies[:, column]
        if np.isnan(evaluator.nominal[column]) and not applies.any() and check.key not in tried:
            continue
        row: dict[str, Any] = {
            "check": check.key,
            "title": check.title,
            "advice": bool(applies.any() and not judged.binds[applies, column].any()),
            "nominal_utilisation": evaluator.nominal[column],
            "allowed_utilisation": allowed,
        } | probability(passing(judged, evaluator.allowed)[:, column])
        # Infinite utilisations are the highest of all; a sample without data is none.
        known = np.sort(use[~np.isnan(use)])
        row |= {f"utilisation_q{round(100 * q):02d}": _quantile(known, q) for q in QUANTILES}
        rows.append(row)
    return pd.DataFrame(rows)


def _quantile(ordered: FloatArray, share: float) -> float:
    """Quantile of ordered values by the nearest rank, which infinite values do not spoil. [-]"""
    if not len(ordered):
        return np.nan
    return float(ordered[min(int(np.ceil(share * len(ordered))), len(ordered)) - 1 if share > 0.0 else 0])


def probability(passes: NDArray[np.bool_]) -> dict[str, Any]:
    """Share of samples that pass, with its Wilson interval of 95 %."""
    count, successes = len(passes), int(np.count_nonzero(passes))
    low, high = wilson_interval(successes, count) if count else (0.0, 1.0)
    return {
        "probability": successes / count if count else np.nan,
        "probability_low": low,
        "probability_high": high,
        "samples": count,
    }


def passes_all(evaluator: SetEvaluator, sampled: Sampled) -> NDArray[np.bool_]:
    """Samples that pass every check that a set can fail: all of them, or those of the whole chain."""
    judged = sampled.quick if sampled.exact is None else sampled.exact
    return np.asarray(np.all(passing(judged, evaluator.allowed) | ~judged.binds, axis=1))


def partly_made(evaluator: SetEvaluator, sampled: Sampled) -> tuple[str, ...]:
    """Say which checks apply to some samples only, and which lack data in samples."""
    partly: dict[tuple[int, int], list[str]] = {}
    lacking: dict[tuple[int, int], list[str]] = {}
    for column, check in enumerate(evaluator.checks):
        judged = sampled.of_check(column)
        applies = judged.applies[:, column]
        unknown = applies & np.isnan(judged.utilisation[:, column])
        if applies.any() and not applies.all():
            partly.setdefault((int(np.count_nonzero(applies)), len(applies)), []).append(check.title)
        if unknown.any():
            lacking.setdefault((int(np.count_nonzero(unknown)), len(unknown)), []).append(check.title)
    found = [f"applies to {count} of {of} samples, counts as passed in the others; quantiles are of the former: "
             f"{', '.join(titles)}" for (count, of), titles in partly.items()]  # fmt: skip
    found += [f"not checked in {count} of {of} samples for lack of data, which do not count as passed: "
              f"{', '.join(titles)}" for (count, of), titles in lacking.items()]  # fmt: skip
    return tuple(found)


def quantity_table(sampled: Sampled) -> pd.DataFrame:
    """Quantiles of torque, current, temperature and so on."""
    import pandas as pd

    judged = sampled.quick if sampled.quick.quantities or sampled.exact is None else sampled.exact
    rows = []
    for name, values in judged.quantities.items():
        known = np.sort(values[~np.isnan(values)])
        if len(known):
            rows.append(
                {"quantity": name, "mean": float(known.mean()), "samples": len(known)}
                | {f"q{round(100 * q):02d}": _quantile(known, q) for q in QUANTILES}
            )
    return pd.DataFrame(
        rows, columns=["quantity", "mean", "samples", *(f"q{round(100 * q):02d}" for q in QUANTILES)]
    )


# -- sensitivity ------------------------------------------------------------------------------------------


def sensitivity_table(evaluator: SetEvaluator, sampling: Sampling) -> pd.DataFrame:
    """First-order and total indices of the checks that are judged at once.

    Parameters
    ----------
    evaluator : SetEvaluator
        The set. [-]
    sampling : Sampling
        Rows of the design, and the seed. [-]

    Returns
    -------
    pandas.DataFrame
        One row per check and group of inputs; inputs that vary together are one group. Empty where nothing can
        be judged at once. [-]
    """
    import pandas as pd

    names = ["check", "inputs", "first", "first_error", "total", "total_error"]
    columns = np.flatnonzero(evaluator.at_once)
    groups = evaluator.inputs.groups
    if not len(columns) or not groups or sampling.sensitivity == 0:
        return _with_float_indices(pd.DataFrame(columns=names))
    indices = _indices(evaluator, sampling, columns, groups)
    rows = []
    for place, column in enumerate(columns):
        if np.isnan(indices.first[place]).all():
            continue  # nothing that spreads acts on this check
        for g, group in enumerate(groups):
            figures = (indices.first, indices.first_error, indices.total, indices.total_error)
            rows.append(
                (
                    evaluator.checks[column].key,
                    evaluator.inputs.group_label(group),
                    *(f[place, g] for f in figures),
                )
            )
    return _with_float_indices(pd.DataFrame(rows, columns=names))


def _with_float_indices(table: pd.DataFrame) -> pd.DataFrame:
    """Without rows pandas knows no type, and what is no number cannot be ranked."""
    return table.astype(dict.fromkeys(table.columns[2:], float))


def _indices(
    evaluator: SetEvaluator,
    sampling: Sampling,
    columns: NDArray[np.intp],
    groups: tuple[tuple[int, ...], ...],
) -> Indices:
    from scipy.stats import qmc

    n, d = sampling.sensitivity, len(evaluator.inputs)
    designs = []
    for replicate in range(REPLICATES):
        rng = np.random.default_rng(np.random.SeedSequence(sampling.seed, spawn_key=(1, replicate)))
        uniform = qmc.Sobol(2 * d, scramble=True, seed=rng).random(n)
        scores = ndtri(np.clip(uniform, 1e-12, 1.0 - 1e-12))
        a, b = scores[:, :d], scores[:, d:]
        designs.append(np.concatenate([a[None], b[None], exchanged(a, b, groups)]))
    scores = np.stack(designs)  # (R, 2 + G, n, d)
    judged = evaluator.quick(evaluator.inputs.of_scores(scores.reshape(-1, d)))
    # What does not apply uses nothing of its limit.
    use = np.where(judged.applies, judged.utilisation, 0.0)[:, columns]
    most = _CLIPPED * evaluator.allowed[columns]
    use = np.minimum(np.nan_to_num(use, nan=np.inf, posinf=np.inf), most)
    results = use.reshape(REPLICATES, 2 + len(groups), n, -1)
    return sobol_indices(results[:, 0], results[:, 1], results[:, 2:])


# -- swings and corners -----------------------------------------------------------------------------------


def judge_few(evaluator: SetEvaluator, values: FloatArray) -> Judged:
    """Every check for few values of the inputs, through the whole chain where it is needed."""
    if evaluator.at_once.all():
        return evaluator.quick(values)
    return evaluator.exact(values)


def swing_table(evaluator: SetEvaluator) -> pd.DataFrame:
    """Utilisation of each check with one input at a time at its low and at its high value."""
    import pandas as pd

    inputs = evaluator.inputs
    values = np.repeat(inputs.nominal[None], 2 * len(inputs), axis=0)
    for i, one in enumerate(inputs.inputs):
        values[2 * i : 2 * i + 2, i] = one.swing
    use = judge_few(evaluator, values).utilisation
    rows = [
        {
            "check": check.key,
            "input": one.label,
            "unit": one.unit,
            "low": one.swing[0],
            "high": one.swing[1],
            "utilisation_low": use[2 * i, column],
            "utilisation_nominal": evaluator.nominal[column],
            "utilisation_high": use[2 * i + 1, column],
        }
        for column, check in enumerate(evaluator.checks)
        for i, one in enumerate(inputs.inputs)
    ]
    names = [
        "check",
        "input",
        "unit",
        "low",
        "high",
        "utilisation_low",
        "utilisation_nominal",
        "utilisation_high",
    ]
    return pd.DataFrame(rows, columns=names)


def corner_table(evaluator: SetEvaluator, swings: pd.DataFrame) -> pd.DataFrame:
    """Worst corner of the bounded inputs for each check.

    Parameters
    ----------
    evaluator : SetEvaluator
        The set. [-]
    swings : pandas.DataFrame
        From `swing_table`; says the way to go where there are too many corners to try them all. [-]

    Returns
    -------
    pandas.DataFrame
        Utilisation in the worst corner, and where each bounded input stands there. Every combination counts, also
        one that a correlation makes unlikely; inputs without ends keep their value. [-]
    """
    import pandas as pd

    inputs = evaluator.inputs
    bounded = [i for i, one in enumerate(inputs.inputs) if one.is_bounded]
    names = ["check", "utilisation", "passes", "corner", "complete"]
    if not bounded:
        return pd.DataFrame(columns=names)
    most = _MOST_CORNERS if evaluator.at_once.all() else _MOST_EXACT_CORNERS
    complete = len(bounded) <= most
    if complete:
        sides = np.array(list(product((0, 1), repeat=len(bounded))))
    else:
        sides = _likely_corners(evaluator, swings, bounded)
    values = np.repeat(inputs.nominal[None], len(sides), axis=0)
    for place, i in enumerate(bounded):
        values[:, i] = np.array(inputs.inputs[i].distribution.bounds)[sides[:, place]]
    judged = judge_few(evaluator, values)
    # The worst is one without data, the best one to which the check does not apply.
    use = np.where(judged.applies, np.nan_to_num(judged.utilisation, nan=np.inf, posinf=np.inf), -np.inf)
    worst = use.argmax(axis=0)
    rows = []
    for column, check in enumerate(evaluator.checks):
        at = worst[column]
        if not judged.applies[at, column]:
            continue  # in no corner
        same = (
            np.ptp(use[:, column]) <= 1e-12 * use[at, column] if np.isfinite(use[:, column]).all() else False
        )
        where = "; ".join(
            f"{inputs.inputs[i].label} {('low', 'high')[sides[at, place]]}" for place, i in enumerate(bounded)
        )
        passes = bool(use[at, column] <= evaluator.allowed[column])
        rows.append((check.key, use[at, column], passes, "" if same else where, complete))
    return pd.DataFrame(rows, columns=names)


def _likely_corners(evaluator: SetEvaluator, swings: pd.DataFrame, bounded: list[int]) -> NDArray[np.intp]:
    """One corner for each check: every input on the side on which its swing is worse."""
    corners = []
    for check in evaluator.checks:
        mine = swings[swings["check"] == check.key]
        # Where a check does not apply is the better side.
        low, high = (mine[f"utilisation_{end}"].fillna(-np.inf).to_numpy(float) for end in ("low", "high"))
        worse = (high > low).astype(int)
        corners.append(worse[bounded])
    return np.unique(np.array(corners, dtype=np.intp), axis=0)


def input_table(evaluator: SetEvaluator) -> pd.DataFrame:
    """The inputs as they were drawn, SI."""
    import pandas as pd

    rows = []
    for i, one in enumerate(evaluator.inputs.inputs):
        low, high = one.distribution.bounds
        together = [
            f"{other.label} {evaluator.inputs.correlation[i, j]:g}"
            for j, other in enumerate(evaluator.inputs.inputs)
            if j != i and evaluator.inputs.correlation[i, j] != 0.0
        ]
        rows.append(
            {
                "input": one.label,
                "table": one.spread.table,
                "row": one.spread.row,
                "distribution": one.distribution.shape,
                "value": one.distribution.centre,
                "width": one.distribution.width,
                "standard_deviation": one.distribution.standard_deviation,
                "low": low,
                "high": high,
                "unit": one.unit,
                "correlation": "; ".join(together),
                "source": one.spread.source,
            }
        )
    names = ["input", "table", "row", "distribution", "value", "width", "standard_deviation", "low", "high", "unit",
             "correlation", "source"]  # fmt: skip
    return pd.DataFrame(rows, columns=names)
