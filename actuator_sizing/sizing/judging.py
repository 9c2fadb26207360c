"""Utilisation to verdict: hold S sets against every check and find what governs."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Limit
from actuator_sizing.sizing.checks import CHECKS, Check, Measure, Sets
from actuator_sizing.sizing.checks.base import WAY, way_unit
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, NOT_CHECKED, PASSES, CheckResult, Checks

FloatArray = NDArray[np.float64]

#: Verdicts from best to worst; a set is as good as its worst check.
ORDER = (PASSES, LOW_RESERVE, NOT_CHECKED, FAILS)
_PASSES, _LOW, _UNKNOWN, _FAILS = range(4)
NOT_APPLICABLE = -1

#: Utilisation, code, nearness to the limit and whether it binds, each (S, C).
_Held = tuple[FloatArray, NDArray[np.int8], FloatArray, NDArray[np.bool_]]


@dataclass(frozen=True)
class Verdicts:
    """S sets against C checks."""

    checks: tuple[Check, ...]
    limits: tuple[Limit, ...]
    utilisation: FloatArray  # (S, C), NaN where not checked or not applicable
    codes: NDArray[np.int8]  # (S, C), index into ORDER, or NOT_APPLICABLE
    verdict: NDArray[np.int8]  # (S,)
    governing: NDArray[np.intp]  # (S,) column of the check that governs
    severity: FloatArray  # (S,) utilisation over allowed of the governing check
    binds: NDArray[np.bool_]  # (S, C) whether the set can fail the check, or is only advised by it
    cycle: NDArray[np.intp]  # (S, C) cycle in which each check is nearest to its limit
    alone: tuple[Verdicts, ...] = ()  # in each of several cycles, as if there were no other


def active_checks(limits: Mapping[str, Limit]) -> tuple[tuple[Check, ...], tuple[Limit, ...]]:
    """The checks that the case applies, with their limits, in the order of the list. [-]"""
    kept = [(check, limits[check.key]) for check in CHECKS if limits[check.key].applies != "no"]
    return tuple(check for check, _ in kept), tuple(limit for _, limit in kept)


def is_binding(check: Check, limit: Limit) -> bool:
    """Whether a set can fail this check, or is only advised by it."""
    return limit.applies == "yes"


def judge_sets(
    sets: Sets | tuple[Sets, ...], checks: tuple[Check, ...], limits: tuple[Limit, ...]
) -> Verdicts:
    """Hold S sets against the checks.

    Parameters
    ----------
    sets : Sets or tuple of Sets
        Evaluated sets; the same sets once for each cycle, where there are several. [-]
    checks : tuple of Check
        Active checks. [-]
    limits : tuple of Limit
        Their limits, in the same order. [-]

    Returns
    -------
    Verdicts
        Utilisation, verdict and governing check. Comparisons use unrounded values; a check whose data is
        missing is "not checked", never passed. Of several cycles the worst counts for each check: one that
        fails, else one that could not be judged, else the highest utilisation. [-]
    """
    several = sets if isinstance(sets, tuple) else (sets,)
    held = [_held(each, checks, limits) for each in several]
    utilisation, codes, relative, binds = held[0]
    cycle = np.zeros(codes.shape, dtype=np.intp)
    for number, (other_utilisation, other_codes, other_relative, other_binds) in enumerate(held[1:], start=1):
        binds = binds | other_binds
        worse = other_codes > codes
        with np.errstate(invalid="ignore"):
            worse |= (other_codes == codes) & (other_utilisation > utilisation)
        utilisation = np.where(worse, other_utilisation, utilisation)
        relative = np.where(worse, other_relative, relative)
        codes = np.where(worse, other_codes, codes)
        cycle[worse] = number
    found = _verdicts(checks, limits, (utilisation, codes, relative.copy(), binds), cycle)
    if len(held) < 2:
        return found
    here = np.zeros_like(cycle)
    return replace(found, alone=tuple(_verdicts(checks, limits, each, here) for each in held))


def _verdicts(
    checks: tuple[Check, ...], limits: tuple[Limit, ...], held: _Held, cycle: NDArray[np.intp]
) -> Verdicts:
    """Verdict and governing check of each set from what its checks say."""
    utilisation, codes, relative, binds = held
    _let_numbers_govern(relative, codes, checks)
    verdict = np.max(np.where(binds, codes, _PASSES), axis=1, initial=_PASSES).astype(np.int8)
    unjudged = ~np.any(binds & (codes != NOT_APPLICABLE), axis=1)
    verdict[unjudged] = _UNKNOWN  # no check that could fail it applies to this set
    governing = relative.argmax(axis=1)
    return Verdicts(
        checks,
        limits,
        utilisation,
        codes,
        verdict,
        governing,
        relative[np.arange(len(governing)), governing],
        binds,
        cycle,
    )


def _held(sets: Sets, checks: tuple[Check, ...], limits: tuple[Limit, ...]) -> _Held:
    """Utilisation, code, nearness to the limit and whether it binds, of S sets in one cycle, each (S, C)."""
    count = len(sets)
    utilisation = np.full((count, len(checks)), np.nan)
    codes = np.full((count, len(checks)), NOT_APPLICABLE, dtype=np.int8)
    relative = np.full((count, len(checks)), -np.inf)
    binds = np.zeros((count, len(checks)), dtype=bool)
    for column, (check, limit) in enumerate(zip(checks, limits, strict=True)):
        applies = check.applies(sets)
        if not check.concerns_cycle(sets.case.cycle.runs) or not applies.any():
            continue  # nothing to measure, and a study for nothing is dear
        known = applies.copy()
        for need in check.needs:
            known &= need.known(sets)
        ratio = check.measure(sets).ratio()
        known &= ~np.isnan(ratio)
        code = np.full(count, _UNKNOWN, dtype=np.int8)
        code[known] = _PASSES
        fits = np.full(count, check.is_fit)
        reserve = np.full(count, limit.allowed_utilisation * (1.0 - limit.recommended_reserve))
        if check.is_fit_where is not None:
            fits |= check.is_fit_where(sets)
            reserve[fits] = limit.allowed_utilisation
        code[known & (ratio > reserve)] = _LOW
        beyond = known & (ratio > limit.allowed_utilisation)
        binding = np.full(count, is_binding(check, limit))
        if check.binds_where is not None:
            binding &= check.binds_where(sets)
        binds[:, column] = binding
        # Advice that was not followed is said in its own row, not in the verdict of the set.
        code[beyond] = np.where(binding, _FAILS, _LOW)[beyond]
        codes[applies, column] = code[applies]
        utilisation[known, column] = ratio[known]
        # Advice never governs while a limit is there to govern.
        relative[known, column] = np.where(binding, ratio / limit.allowed_utilisation, -1.0)[known]
        relative[known & ~beyond & fits & binding, column] = -0.5
    return utilisation, codes, relative, binds


def _let_numbers_govern(relative: FloatArray, codes: NDArray[np.int8], checks: tuple[Check, ...]) -> None:
    """Keep an infinite check from governing where the check it yields to fails and says by how much."""
    column_of = {check.key: column for column, check in enumerate(checks)}
    for column, check in enumerate(checks):
        other = column_of.get(check.yields_to)
        if other is not None:
            told = np.isinf(relative[:, column]) & (codes[:, other] == _FAILS)
            relative[told, column] = -1.0


def check_results(several: Sets | tuple[Sets, ...], verdicts: Verdicts, index: int) -> Checks:
    """The checks of one set in full, for report and results.

    Parameters
    ----------
    several : Sets or tuple of Sets
        Evaluated sets, once for each cycle. [-]
    verdicts : Verdicts
        Their verdicts. [-]
    index : int
        Which set. [-]

    Returns
    -------
    Checks
        In the order of the checks; those that do not apply are left out. [-]
    """
    results = []
    by_cycle = several if isinstance(several, tuple) else (several,)
    linear = bool(by_cycle[0].motors.is_linear[index])
    for column, (check, limit) in enumerate(zip(verdicts.checks, verdicts.limits, strict=True)):
        code = int(verdicts.codes[index, column])
        if code == NOT_APPLICABLE:
            continue
        sets = by_cycle[verdicts.cycle[index, column]]
        measure: Measure = check.measure(sets)
        known = code != _UNKNOWN
        lacking = [need for need in check.needs if not need.known(sets)[index]]
        missing = tuple(
            need.linear_column if linear and need.linear_column else need.column for need in lacking
        )
        at = float(measure.at_s[index]) if known and measure.at_s is not None else None
        if at is not None and not np.isfinite(at):
            at = None
        unit = check.linear_unit if linear and check.linear_unit else check.unit
        unit = way_unit(sets) if unit == WAY else unit
        results.append(
            CheckResult(
                check=check.key,
                title=check.title,
                group=check.group,
                demand=_number(measure.demand[index]) if known else None,
                capacity=_number(measure.capacity[index]) if known else None,
                unit=unit,
                utilisation=float(verdicts.utilisation[index, column]) if known else None,
                allowed=limit.allowed_utilisation,
                recommended_reserve=limit.recommended_reserve,
                verdict=ORDER[code],
                at_time_s=at,
                segment=_segment_name(sets, at),
                cycle=sets.case.cycle.name or None,
                formula=check.formula,
                source=check.source,
                working=check.working(sets, index) if known else "",
                missing=missing,
                missing_from=tuple(need.part for need in lacking),
                is_advice=not verdicts.binds[index, column],
            )
        )
    return Checks(results)


def _number(value: float) -> float | None:
    return float(value) if not np.isnan(value) else None


def _segment_name(sets: Sets, at_s: float | None) -> str | None:
    demand = sets.demand
    if at_s is None or at_s > (1.0 + 1e-9) * demand.cycle_s:  # after a cycle that runs once
        return None
    piece = int(np.clip(np.searchsorted(demand.start_s, at_s, side="left") - 1, 0, len(demand.start_s) - 1))
    return sets.case.segments[int(demand.segment[piece])].name
