"""Sheets of what to change, what is possible and what is traded for what; each only where it was asked for."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from actuator_sizing.report.lever_text import lever_text
from actuator_sizing.report.workbook.writer import Field, Sheets

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison


def add_levers(sheets: Sheets, comparison: Comparison) -> None:
    """Write every lever of the sets asked about: raw values in SI, and the words of the report beside them."""
    fields = [
        Field("rank", "integer"), Field("motor"), Field("gearhead"), Field("drive"), Field("goal"),
        Field("lever"), Field("now [unit beside]", "number"), Field("needed [unit beside]", "number"),
        Field("unit"), Field("cost of the change [-]", "number"), Field("now"), Field("needed"), Field("in words"),
    ]  # fmt: skip
    goals = {"pass": "every check met", "reserve": "recommended reserve kept"}
    rows: list[tuple[Any, ...]] = []
    for item in comparison.sets:
        for lever in item.levers:
            text = lever_text(comparison.case, lever)
            numbers = [lever.get(key) if lever.get("unit") else "" for key in ("present", "needed")]
            rows.append(
                (
                    item.rank, item.motor, "direct" if item.gearhead is None else item.gearhead, item.drive,
                    goals[lever["goal"]], text.change, *numbers, lever.get("unit", ""),
                    "" if lever.get("cost") is None else lever["cost"], text.now, text.needed, text.words,
                )
            )  # fmt: skip
    if rows:
        sheets.add_table("levers", fields, rows).freeze_panes(1, 4)
