"""What each cycle of a case says of one set: its checks alone, its quantities and its curves."""

from __future__ import annotations

from dataclasses import replace
from functools import cache, partial

from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.cycles import CycleDemand
from actuator_sizing.sizing.demand import cycle_quantities
from actuator_sizing.sizing.detail import set_detail
from actuator_sizing.sizing.judging import NOT_APPLICABLE, ORDER, Verdicts, check_results
from actuator_sizing.sizing.quantities import commissioning_quantities, pair_quantities, quantities
from actuator_sizing.sizing.results import CycleOfSet, CycleResult, SetDetail
from actuator_sizing.sizing.set_model import SetModel
from actuator_sizing.sizing.simulation import simulate_prepared


def cycle_results(cycles: tuple[CycleDemand, ...]) -> tuple[CycleResult, ...]:
    """Every cycle of a case that has several; nothing else names them.

    Parameters
    ----------
    cycles : tuple of CycleDemand
        The cycles. [-]

    Returns
    -------
    tuple of CycleResult
        Empty where there is only one. [-]
    """
    if len(cycles) < 2:
        return ()
    return tuple(CycleResult(each.case, each.demand, cycle_quantities(each.demand)) for each in cycles)


def cycles_of_set(
    models: tuple[SetModel, ...],
    several: tuple[Sets, ...],
    index: int,
    verdicts: Verdicts,
    *,
    with_curves: bool,
) -> tuple[CycleOfSet, ...]:
    """One set in each of several cycles.

    Parameters
    ----------
    models : tuple of SetModel
        The set, once for each cycle. [-]
    several : tuple of Sets
        Evaluated sets, once for each cycle. [-]
    index : int
        Which of them it is. [-]
    verdicts : Verdicts
        Their verdicts. [-]
    with_curves : bool
        Whether checks and curves are wanted too, as for the leading set. [-]

    Returns
    -------
    tuple of CycleOfSet
        Empty where there is only one cycle. [-]
    """
    found = []
    for number, alone in enumerate(verdicts.alone):
        model, sets = models[number], several[number]
        if with_curves or number == 0:
            numbers = quantities(model, sets, index)
        else:  # what no study is needed for
            numbers = pair_quantities(sets, index)
        if with_curves and number == 0:
            numbers |= commissioning_quantities(model)
        used = zip(
            verdicts.checks, alone.utilisation[index].tolist(), alone.codes[index].tolist(), strict=True
        )
        found.append(
            CycleOfSet(
                name=sets.case.cycle.name,
                verdict=ORDER[int(alone.verdict[index])],
                governing_check=verdicts.checks[int(alone.governing[index])].key,
                utilisations={
                    check.key: None if use != use else use
                    for check, use, code in used
                    if code != NOT_APPLICABLE
                },
                quantities=numbers,
                checks=check_results(sets, alone, index) if with_curves else None,
                detail=curves(model, sets, index) if with_curves else None,
            )
        )
    return tuple(found)


def curves(model: SetModel, sets: Sets, index: int) -> SetDetail:
    """Curves of one set; its simulation too where the case asks how the axis moves.

    Parameters
    ----------
    model : SetModel
        The set. [-]
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which of them the model is. [-]
    """
    detail = set_detail(model, sets, index)
    if sets.dynamics is None:
        return detail
    motor, gearhead, drive = (int(part) for part in sets.index[index])
    parts = (motor, gearhead, drive)
    # Page, workbook, results and figures all ask for it: simulated once.
    return replace(detail, simulation=cache(partial(simulate_prepared, model.case, model.demand, parts)))
