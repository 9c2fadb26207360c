"""The main job: a case goes in, a ranked and explained comparison comes out."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from concurrent.futures import Executor
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.candidates import candidate_table
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.cycle_results import curves, cycle_results, cycles_of_set
from actuator_sizing.sizing.cycles import CycleDemand, cycle_demands, evaluate_cycles
from actuator_sizing.sizing.demand import cycle_quantities
from actuator_sizing.sizing.dynamic_results import add_dynamics
from actuator_sizing.sizing.fitting import compatible, misfits
from actuator_sizing.sizing.inertias import inertia_shares
from actuator_sizing.sizing.judging import (
    ORDER,
    Verdicts,
    active_checks,
    check_results,
    is_binding,
    judge_sets,
)
from actuator_sizing.sizing.mix import is_weighed, mix_quantities
from actuator_sizing.sizing.provenance import assumptions_of, questions_of
from actuator_sizing.sizing.quantities import commissioning_quantities, quantities
from actuator_sizing.sizing.ranking import RANKINGS, nearest_drives, ranking_key
from actuator_sizing.sizing.ratio_windows import ratio_windows
from actuator_sizing.sizing.results import (
    FAILS,
    LOW_RESERVE,
    NOT_CHECKED,
    Comparison,
    Rejections,
    SetResult,
)
from actuator_sizing.sizing.screening import Screened, screen
from actuator_sizing.sizing.set_model import SetModel
from actuator_sizing.sizing.trade_offs import find_trade_offs
from actuator_sizing.version import __version__

if TYPE_CHECKING:
    from actuator_sizing.sizing.headroom import Headroom

IndexArray = NDArray[np.intp]
Progress = Callable[[str, float], None]

_KEEP = 20_000  # survivors evaluated exactly at most, the best by the ranking
_FAR, _FEWEST_LOSERS = (
    2.0,
    3,
)  # losers beyond twice the allowed value teach nothing, unless there are no others
_NEAREST_LOSERS = 40  # motor × gearhead pairs that came closest, evaluated exactly too


def compare(
    case: Case,
    *,
    rank_by: str | None = None,
    detail: int | None = None,
    levers: int = 0,
    trade_offs: bool = False,
    windows: bool = False,
    headroom: bool = False,
    progress: Progress | None = None,
    executor: Executor | None = None,
    checkpoint: Path | None = None,
    tell: Callable[[str], None] | None = None,
) -> Comparison:
    """Compare every motor × gearhead × drive set of a case.

    Parameters
    ----------
    case : Case
        The axis with its catalogs. [-]
    rank_by : str, optional
        ``"price"``, ``"mass"``, ``"reserve"`` or ``"energy"``; default: what the case says. [-]
    detail : int, optional
        How many sets to list with all their checks; default: what the case says. [-]
    levers : int
        For how many of the nearest losers to find the smallest change that lets them pass; where the leading
        set has low reserve, its levers are found too. [-]
    trade_offs : bool
        Find the passing sets that no other one beats in price, mass, energy and reserve at once too.
    windows : bool
        Work out the ratio windows of every motor too.
    headroom : bool
        Find what the leading set can do at most too, with the map of payload against cycle time.
    progress : callable, optional
        Called with a stage and the part of it that is done, 0 to 1. [-]
    executor : Executor, optional
        Where the screening is done, e.g. `workplaces.local_processes` or `workplaces.cluster`; default: here.
        The answer is the same, bit for bit. [-]
    checkpoint : Path, optional
        File that keeps what a long screening has found, so that it can go on after Ctrl-C; deleted when done. [-]
    tell : callable, optional
        Called with a sentence about the checkpoint that the user should read. [-]

    Returns
    -------
    Comparison
        Ranked sets, reasons of the losers, and what was not checked. [-]

    Raises
    ------
    InputError
        If no set can be formed at all, the ranking is not known, ratio windows are asked of a linear motor, or the
        checkpoint is one of another case.
    StoppedError
        If the screening is interrupted and a checkpoint keeps what was found.
    """
    ranked_by = str(rank_by or case.options["rank by"])
    if ranked_by not in RANKINGS:
        raise InputError(
            [Problem("axis", None, "rank by", ranked_by, " | ".join(RANKINGS), "Choose one of these.")]
        )
    case = _with_named_partners(case, progress)
    wanted = int(detail or case.number("sets to detail"))
    cycles = cycle_demands(case)
    demand = cycles[0].demand
    found_windows = ratio_windows(cycles, progress=_stage(progress, "ratio windows")) if windows else None
    checks, limits = active_checks(case.limits)
    binding = tuple(c for c, limit in zip(checks, limits, strict=True) if is_binding(c, limit))
    allowed = {c.key: case.limits[c.key].allowed_utilisation for c in binding}
    kept = None
    if checkpoint is not None:
        from actuator_sizing.sizing.checkpoint import Checkpoint

        kept = Checkpoint(checkpoint, f"{case.fingerprint} {ranked_by} {_KEEP} {_NEAREST_LOSERS}", tell)
    screened = screen(
        case,
        cycles,
        binding,
        allowed,
        ranked_by,
        keep=_KEEP,
        losers=_NEAREST_LOSERS,
        executor=executor,
        checkpoint=kept,
        progress=_stage(progress, "screening"),
    )
    if screened.screened == 0:
        raise InputError([_no_set(case)])
    losers = nearest_drives(cycles, screened.nearest_losers)
    index = np.unique(np.concatenate([screened.survivors, losers, screened.nearest_by_drive]), axis=0)
    try:
        sets = evaluate_cycles(cycles, index, _stage(progress, "evaluation"))
    except KeyboardInterrupt:
        if kept is None:
            raise
        raise kept.stopped_later() from None

    def leading(number: int, judged: Sets) -> tuple[IndexArray, NDArray[np.bool_]]:
        several = (*sets[:number], judged, *sets[number + 1 :])
        found = judge_sets(several, checks, limits)
        fails = found.verdict == ORDER.index(FAILS)
        ranked = _rank(case, several, found, index, ranked_by)
        return ranked[~fails[ranked]][:wanted], fails

    for number, each in enumerate(cycles):
        moving = add_dynamics(
            each.case,
            each.demand,
            sets[number],
            index,
            partial(leading, number),
            _stage(progress, "simulation"),
        )
        sets = (*sets[:number], moving, *sets[number + 1 :])
    verdicts = judge_sets(sets, checks, limits)
    order = _rank(case, sets, verdicts, index, ranked_by)
    listed = _listed(order, verdicts, index, wanted)
    results = tuple(
        _set_result(case, cycles, sets, verdicts, index, int(i), rank, with_curves=rank == 1)
        for rank, i in enumerate(listed, start=1)
    )
    results = _with_levers(case, cycles, results, levers, _stage(progress, "levers"))
    survivor_rows = _is_survivor(index, screened.survivors)
    if kept is not None:
        kept.remove()
    return Comparison(
        case=case,
        demand=demand,
        ranked_by=ranked_by,
        sets=results,
        rejections=_rejections(case, screened, verdicts, index, survivor_rows),
        candidates=candidate_table(case, sets, verdicts, index, order, screened),
        cycle=cycle_quantities(demand),
        assumptions=assumptions_of(case, results[0]),
        questions=questions_of(results),
        inertias=inertia_shares(case, demand, results[0].ratio),
        version=__version__,
        cycles=cycle_results(cycles),
        trade_offs=find_trade_offs(case, sets, verdicts, index, order) if trade_offs else None,
        windows=found_windows,
        headroom=_headroom(cycles, results[0], progress) if headroom else None,
    )


def _with_named_partners(case: Case, progress: Progress | None) -> Case:
    """The case with the best set of its own case for every axis on the bus whose parts are not named."""
    named = []
    for number, partner in enumerate(case.partners, start=1):
        if not partner.motor and partner.axis is not None:
            best = compare(partner.axis, detail=1).best
            partner = replace(partner, motor=best.motor, gearhead=best.gearhead or "", drive=best.drive)
        named.append(partner)
        if progress is not None:
            progress("axes on the bus", number / len(case.partners))
    return replace(case, partners=tuple(named))


def _headroom(cycles: tuple[CycleDemand, ...], best: SetResult, progress: Progress | None) -> Headroom:
    from actuator_sizing.sizing.headroom import headroom_of

    parts = best.motor_index, best.gearhead_index, best.drive_index
    return headroom_of(cycles, parts, with_map=True, progress=progress)


def _with_levers(
    case: Case,
    cycles: tuple[CycleDemand, ...],
    results: tuple[SetResult, ...],
    count: int,
    progress: Callable[[float], None] | None,
) -> tuple[SetResult, ...]:
    """The results with what would let the nearest losers pass, and the leading set keep the recommended reserve."""
    if count <= 0:
        return results
    from actuator_sizing.sizing.levers import levers_of

    chosen = [item.rank for item in results[:1] if item.verdict == LOW_RESERVE]
    chosen += [item.rank for item in results if item.verdict == FAILS][:count]
    answered = []
    for item in results:
        if item.rank in chosen:
            parts = (item.motor_index, item.gearhead_index, item.drive_index)
            study = levers_of(cycles, *parts)
            if study is not None:
                item = replace(item, levers=study.as_mappings())
            if progress is not None:
                progress((chosen.index(item.rank) + 1) / len(chosen))
        answered.append(item)
    return tuple(answered)


def _stage(progress: Progress | None, name: str) -> Callable[[float], None] | None:
    if progress is None:
        return None
    return lambda done: progress(name, done)


def _no_set(case: Case) -> Problem:
    """Say why not one motor, gearhead and drive fit together."""
    linear = case.mechanism.drives_linear_motor
    kind, other = ("linear", "rotary") if linear else ("rotary", "linear")
    of_kind = case.motor_parameters.is_linear == linear
    if not of_kind.any():
        return Problem(
            "motors",
            None,
            "",
            f"{other} motors only",
            f"at least one {kind} motor, which the mechanism '{case.mechanism.name}' needs",
            f"Add a {kind} motor, or change the mechanism in the table axis.",
        )
    served = compatible(case.motor_parameters, case.drive_parameters).any(axis=1)
    if not (of_kind & served).any():
        return Problem(
            "drives",
            None,
            "commutation",
            "no drive that serves a motor",
            f"at least one {kind} motor and a drive that serves its commutation",
            "Add such a drive, or check commutation and current basis of motors and drives.",
        )
    return Problem(
        "motors",
        None,
        "nominal voltage",
        f"windings that are not made for the bus of {case.surroundings.bus_nominal_v:g} V",
        f"a nominal bus voltage of at most {case.options['largest bus over nominal voltage']:g} times the "
        "nominal voltage of a motor",
        "Add motors with another winding, lower the bus voltage, or raise 'largest bus over nominal voltage' "
        "if the makers allow it.",
    )


def _rank(
    case: Case, sets: tuple[Sets, ...], verdicts: Verdicts, index: IndexArray, ranked_by: str
) -> IndexArray:
    """Passing sets first, by the key; then those not fully checked; then the losers, nearest first."""
    key = ranking_key(case, sets, verdicts, index, ranked_by)
    fails = verdicts.verdict == ORDER.index(FAILS)
    unchecked = verdicts.verdict == ORDER.index(NOT_CHECKED)
    group = np.where(fails, 2, np.where(unchecked, 1, 0))
    key = np.where(fails, verdicts.severity, key)
    return np.lexsort((index[:, 2], index[:, 1], index[:, 0], key, group))


def _listed(order: IndexArray, verdicts: Verdicts, index: IndexArray, wanted: int) -> IndexArray:
    """The sets shown in full: the best, and as many losers, each motor once for each check that governs it."""
    fails = verdicts.verdict[order] == ORDER.index(FAILS)
    best = order[~fails][:wanted]
    nearest: list[int] = []
    seen: set[tuple[int, int]] = set()
    for i in order[fails]:
        if len(nearest) >= _FEWEST_LOSERS and verdicts.severity[i] > _FAR:
            break
        kind = (int(index[i, 0]), int(verdicts.governing[i]))
        if kind not in seen:
            seen.add(kind)
            nearest.append(int(i))
        if len(nearest) == wanted:
            break
    return np.concatenate([best, np.array(nearest, dtype=np.intp)])


def _is_survivor(index: IndexArray, survivors: IndexArray) -> NDArray[np.bool_]:
    known = {tuple(row) for row in survivors.tolist()}
    return np.array([tuple(row) in known for row in index.tolist()], dtype=bool)


def _rejections(
    case: Case, screened: Screened, verdicts: Verdicts, index: IndexArray, survivor: NDArray[np.bool_]
) -> Rejections:
    fails = verdicts.verdict == ORDER.index(FAILS)
    failed = survivor & fails
    counts = Counter(screened.rejected_by_check)
    for column in verdicts.governing[failed]:
        counts[verdicts.checks[column].key] += 1
    # A loser that was evaluated after all counts under what governs it exactly, as the list of candidates says.
    bound_of = {
        tuple(row): int(check) for row, check in zip(screened.lost.tolist(), screened.lost_check, strict=True)
    }
    for row, column in zip(
        index[fails & ~survivor].tolist(), verdicts.governing[fails & ~survivor], strict=True
    ):
        if tuple(row) in bound_of:
            counts[screened.check_names[bound_of[tuple(row)]]] -= 1
            counts[verdicts.checks[column].key] += 1
    passing = survivor & (verdicts.verdict < ORDER.index(NOT_CHECKED))
    rejected = screened.screened - screened.survivor_count + int(failed.sum())
    return Rejections(
        sets_total=screened.sets_total,
        incompatible=screened.incompatible,
        screened=screened.screened,
        rejected=rejected,
        by_check=dict(sorted(((k, n) for k, n in counts.items() if n), key=lambda item: -item[1])),
        survivors=screened.survivor_count,
        confirmed_passing=int(passing.sum()),
        evaluated=int(survivor.sum()),
        complete=screened.survivor_count == len(screened.survivors),
        misfits=misfits(case),
    )


def _set_result(
    case: Case,
    cycles: tuple[CycleDemand, ...],
    several: tuple[Sets, ...],
    verdicts: Verdicts,
    index: IndexArray,
    i: int,
    rank: int,
    *,
    with_curves: bool,
) -> SetResult:
    motor, gearhead, drive = (int(x) for x in index[i])
    models = tuple(SetModel(each.case, each.demand, motor, gearhead, drive) for each in cycles)
    model, sets = models[0], several[0]
    parts = (sets.motors, sets.gearheads, sets.drives)
    price, mass = (float(sum(getattr(part, name)[i] for part in parts)) for name in ("price", "mass_kg"))
    is_direct = bool(sets.gearheads.is_direct[i])
    own = cycles_of_set(models, several, i, verdicts, with_curves=with_curves)
    return SetResult(
        rank=rank,
        motor=case.motors.names[motor],
        gearhead=None if is_direct else case.gearheads.names[gearhead],
        ratio=float(sets.gearheads.ratio[i]),
        drive=case.drives.names[drive],
        verdict=ORDER[int(verdicts.verdict[i])],
        governing_check=verdicts.checks[int(verdicts.governing[i])].key,
        price=price if np.isfinite(price) else None,
        mass_kg=mass if np.isfinite(mass) else None,
        quantities=own[0].quantities if own else _quantities(model, sets, i, with_curves),
        checks=check_results(several, verdicts, i),
        motor_index=motor,
        gearhead_index=gearhead,
        drive_index=drive,
        detail=own[0].detail if own else curves(model, sets, i) if with_curves else None,
        cycles=own,
        mix=mix_quantities(several, models, i) if is_weighed(several) else None,
    )


def _quantities(model: SetModel, sets: Sets, i: int, with_curves: bool) -> dict[str, Any]:
    return quantities(model, sets, i) | (commissioning_quantities(model) if with_curves else {})
