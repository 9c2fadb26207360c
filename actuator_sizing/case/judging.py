"""The tables `limits` and `tolerances`: how checks are judged, and how inputs spread."""

from __future__ import annotations

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.cells import CellError, parse_number
from actuator_sizing.case.columns import fold, nearest
from actuator_sizing.case.model import Entry, Limit, Tolerance
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.tables import (
    ADVICE_CHECKS,
    CHECK_NAMES,
    DEFAULT_ALLOWED_UTILISATION,
    DEFAULT_RECOMMENDED_RESERVE,
    quantity_kinds,
)
from actuator_sizing.units import UnitError, parse_unit


def default_limits() -> dict[str, Limit]:
    """Limits of a case that says nothing about them, by check key."""
    return {
        key: Limit(
            key,
            "advice" if key in ADVICE_CHECKS else "yes",
            DEFAULT_ALLOWED_UTILISATION,
            DEFAULT_RECOMMENDED_RESERVE,
        )
        for key, _ in CHECK_NAMES
    }


def understand_limits(parsed: ParsedTable | None) -> tuple[dict[str, Limit], list[Entry]]:
    """Limits of every check; those not listed, and cells left empty, keep their defaults.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table `limits`; None where the case has none.
    """
    limits, entries = default_limits(), []
    keys = {title: key for key, title in CHECK_NAMES}
    stated: dict[str, int] = {}
    if parsed is not None:
        check_required(parsed)
        for index, title in enumerate(parsed.names):
            if title in keys:
                stated[keys[title]] = index
    for key, title in CHECK_NAMES:
        found = stated.get(key)
        values = {
            "applies": limits[key].applies,
            "allowed utilisation": limits[key].allowed_utilisation,
            "recommended reserve": limits[key].recommended_reserve,
        }
        for name in values:
            row, shown_cell, origin = None, "", "assumed"
            if parsed is not None and found is not None:
                row = int(parsed.rows[found])
                column_key = name.replace(" ", "_")
                if parsed.stated(column_key)[found]:
                    value = parsed.values[column_key][found]
                    values[name] = str(value) if name == "applies" else float(value)
                    shown_cell, origin = parsed.shown_cell(column_key, found), "stated"
            unit = "" if name == "applies" else "-"
            rule = "" if origin == "stated" else "default"
            entries.append(Entry("limits", row, title, name, shown_cell, values[name], unit, origin, rule))
        limits[key] = Limit(
            key,
            str(values["applies"]),
            float(values["allowed utilisation"]),
            float(values["recommended reserve"]),
        )
    return limits, entries


def understand_tolerances(
    parsed: ParsedTable | None, decimal: str, problems: ProblemList
) -> tuple[Tolerance, ...]:
    """Spreads of input quantities.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table `tolerances`; None where the case has none.
    decimal : str
        Decimal mark of the table.
    problems : ProblemList
        Takes what is wrong.
    """
    if parsed is None:
        return ()
    check_required(parsed)
    found = []
    for index, name in enumerate(parsed.names):
        row = int(parsed.rows[index])
        column = quantity_kinds().get(fold(str(name)))
        width, unit_text = str(parsed.text("width")[index]), str(parsed.text("unit")[index])
        if not name or not width or not unit_text:
            continue
        if column is None:
            close = nearest(str(name), (known.name for known in quantity_kinds().values()))
            problems.report("tolerances", row, parsed.heading("quantity"), got=shown(name),
                            allowed="an axis quantity, or a motor, gearhead or drive column with numbers",
                            remedy=f"Did you mean '{close}'?" if close else "Check the name.")  # fmt: skip
            continue
        relative = unit_text == "%"
        kinds = ("ratio",) if relative else column.kind if isinstance(column.kind, tuple) else (column.kind,)
        try:
            unit = parse_unit(unit_text, kinds)
            value = parse_number(width, decimal)[0] * unit.factor
        except UnitError as error:
            problems.report("tolerances", row, parsed.heading("unit"), got=shown(unit_text),
                            allowed=f"% or a unit of {' or '.join(kinds)}", remedy=str(error))  # fmt: skip
            continue
        except CellError as error:
            problems.report("tolerances", row, parsed.heading("width"), got=shown(width),
                            allowed="a number > 0", remedy=error.remedy)  # fmt: skip
            continue
        if not value > 0.0:
            problems.report("tolerances", row, parsed.heading("width"), got=f"{width} {unit_text}",
                            allowed="a number > 0", remedy="Remove the row if there is no spread.")  # fmt: skip
            continue
        found.append(Tolerance(row, column.name, str(parsed.text("distribution")[index]), value, relative))
    return tuple(found)
