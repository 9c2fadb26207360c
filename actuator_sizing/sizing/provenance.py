"""What was derived or assumed for the leading set, and what to ask the suppliers."""

from __future__ import annotations

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import ASSUMED_HOT_WINDING_DEGC
from actuator_sizing.sizing.results import NOT_CHECKED, SetResult


def assumptions_of(case: Case, best: SetResult) -> tuple[tuple[str, str], ...]:
    """Every derived or assumed value of the axis and of the parts of one set.

    Parameters
    ----------
    case : Case
        The case. [-]
    best : SetResult
        The set whose parts are named. [-]

    Returns
    -------
    tuple of (subject, statement)
        In the order axis, duty cycle, motor, gearhead, drive, model. [-]
    """
    said = [
        (f"{entry.table}: {entry.column}", f"{entry.origin}: {entry.rule}")
        for entry in case.entries
        if entry.origin in ("derived", "assumed") and entry.rule
    ]
    parts = (
        ("motors", best.motor, best.motor_index),
        ("gearheads", best.gearhead, best.gearhead_index),
        ("drives", best.drive, best.drive_index),
    )
    for table, name, index in parts:
        if name is None:
            continue
        said += [
            (f"{name}: {entry.column}", f"{entry.origin}: {entry.rule}")
            for entry in case.catalog_entries(table, index)
            if entry.origin in ("derived", "assumed")
        ]
    return (*said, *_model_statements(case))


def _model_statements(case: Case) -> tuple[tuple[str, str], ...]:
    s = case.surroundings
    judged = (
        f"each motor's winding limit ({ASSUMED_HOT_WINDING_DEGC:g} °C where the sheet states none)"
        if s.judged_winding_degc != s.judged_winding_degc
        else f"{s.judged_winding_degc:g} °C"
    )
    return (
        ("model: hot winding", f"current and voltage are judged with the winding at {judged}"),
        ("model: minimum bus", f"voltage and speed–torque limits are judged at {s.bus_min_v:g} V"),
        (
            "model: standstill",
            "holding is taken without help from friction; with the brake closed no current flows",
        ),
        ("model: cycle", "the cycle repeats for ever; dwell counts in RMS values"),
        ("model: stiffness", "load, gearhead and motor turn as one rigid body"),
    )


def questions_of(results: tuple[SetResult, ...]) -> tuple[tuple[str, str, str], ...]:
    """Data missing for checks of the listed sets: what to ask, of which part, for which check.

    Parameters
    ----------
    results : tuple of SetResult
        The listed sets. [-]

    Returns
    -------
    tuple of (part, datum, check)
        Each question once. [-]
    """
    asked: dict[tuple[str, str, str], None] = {}
    for result in results:
        for check in result.checks:
            if check.verdict != NOT_CHECKED:
                continue
            part = {"drive": result.drive, "gearhead": result.gearhead or ""}.get(check.group, result.motor)
            for datum in check.missing or ("data of the part",):
                asked[(part, datum, check.title)] = None
    return tuple(asked)
