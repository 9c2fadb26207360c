"""What was derived or assumed for the leading set, and what to ask the suppliers."""

from __future__ import annotations

from actuator_sizing.case.model import Case, Entry
from actuator_sizing.sizing.model_limits import model_statements
from actuator_sizing.sizing.results import NOT_CHECKED, SetResult
from actuator_sizing.sizing.thermal_data import COPPER_MASS_SHARE, has_divided_resistance

_DIVIDED = (
    f"assumed: the total thermal resistance is divided by the winding's heat capacity, taken as copper of "
    f"{COPPER_MASS_SHARE:.0%} of the motor's mass".replace("%", " %")
)


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
        (_subject(entry), f"{entry.origin}: {entry.rule}")
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
    if has_divided_resistance(case.motor_parameters.take(slice(best.motor_index, best.motor_index + 1)))[0]:
        said.append((f"{best.motor}: winding and housing", _DIVIDED))
    return (*said, *model_statements(case, best))


def _subject(entry: Entry) -> str:
    """Name what an entry of the case is about: a row of `axis` is one quantity, elsewhere the column is."""
    return (
        f"axis: {entry.label}" if entry.table == "axis" else f"{entry.table}: {entry.label}: {entry.column}"
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
            names = {
                "motors": result.motor,
                "gearheads": result.gearhead or "",
                "drives": result.drive,
                "axis": "axis",
            }
            own = names[{"drive": "drives", "gearhead": "gearheads"}.get(check.group, "motors")]
            if not check.missing:
                asked[(own, "data of the part", check.title)] = None
            for datum, table in zip(check.missing, check.missing_from, strict=True):
                asked[(names.get(table, own), datum, check.title)] = None
    return tuple(asked)
