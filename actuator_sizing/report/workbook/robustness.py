"""Sheets of a robustness study."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.headings import heading
from actuator_sizing.report.workbook.writer import Field, Sheets

if TYPE_CHECKING:
    from actuator_sizing.sizing.robustness.results import Robustness

#: Tables of a study, which name its sheets and files.
TABLES = ("inputs", "checks", "quantities", "sensitivity", "swings", "corners", "shortlist")


def add_robustness(sheets: Sheets, study: Robustness) -> None:
    """Write the tables of a study as sheets of a workbook, those of the inputs first.

    Parameters
    ----------
    sheets : Sheets
        The workbook.
    study : Robustness
        The answer.
    """
    for name in TABLES:
        table = getattr(study, name)
        if not len(table):
            continue
        fields = [
            Field(_heading(str(column)), _style(str(column), table[column].dtype.kind))
            for column in table.columns
        ]
        rows = table.astype(object).where(table.notna(), None).to_numpy().tolist()
        sheets.add_table(f"robust {name}", fields, rows)


def _heading(column: str) -> str:
    plain = column.startswith(("utilisation", "probability", "nominal", "allowed", "first", "total"))
    return f"{column.replace('_', ' ')} [-]" if plain else heading(column)


def _style(column: str, kind: str) -> str:
    if kind == "i":
        return "integer"
    if kind != "f":
        return "text"
    return (
        "percent" if column.startswith(("utilisation", "probability", "nominal_", "allowed_")) else "number"
    )
