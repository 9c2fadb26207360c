"""Sheets that only some cases have: the cycles with their mix, and the inertia inventory."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.headings import name_and_unit
from actuator_sizing.report.workbook.writer import Field, Sheets

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison


def add_cycles(sheets: Sheets, comparison: Comparison) -> None:
    """Write every cycle with what the leading set does in it, then the weighed mix; nothing for a single cycle."""
    if not comparison.cycles or not comparison.sets:
        return
    best = comparison.sets[0]
    keys = list(best.cycles[0].quantities)
    names = [name_and_unit(key) for key in keys]
    fields = [
        Field("cycle"), Field("runs"), Field("duty type"), Field("duration [s]", "number"),
        Field("share of time [-]", "percent"), Field("verdict"), Field("governing check"),
        *(Field(f"{words} [{unit}]" if unit else words, _style(best.cycles[0].quantities[key]))
          for key, (words, unit) in zip(keys, names, strict=True)),
    ]  # fmt: skip
    rows: list[tuple[Any, ...]] = []
    for each, own in zip(comparison.cycles, best.cycles, strict=True):
        cycle = each.case.cycle
        rows.append(
            (
                cycle.name, cycle.runs, cycle.duty_type, cycle.duration_s,
                None if math.isnan(cycle.share) else cycle.share, own.verdict, own.governing_check,
                *(own.quantities.get(key) for key in keys),
            )
        )  # fmt: skip
    sheets.add_table("cycles", fields, rows)
    if best.mix is not None:
        mixed = [(words, value, unit or "-") for (words, unit), value in
                 ((name_and_unit(key), value) for key, value in best.mix.items())]  # fmt: skip
        sheets.add_table("mix of cycles", (Field("quantity"), Field("value", "number"), Field("unit")), mixed)


def _style(value: Any) -> str:
    return "text" if isinstance(value, str) else "number"


def add_inertias(sheets: Sheets, comparison: Comparison) -> None:
    """Write the inertia inventory referred to driven shaft and motor; nothing without one."""
    if not comparison.inertias:
        return
    fields = (
        Field("part"), Field("shape"), Field("referred to"), Field("rule"), Field("mass [kg]", "number"),
        Field("inertia about its own turning axis [kg·m²]", "number"),
        Field("at driven shaft [kg·m²]", "number"), Field("at motor [kg·m²]", "number"),
        Field("share [-]", "percent", bar=True),
    )  # fmt: skip
    rows = [
        (
            part.name, part.shape, part.referred_to, part.rule,
            None if math.isnan(part.mass_kg) else part.mass_kg,
            None if math.isnan(part.inertia_kg_m2) else part.inertia_kg_m2,
            part.at_shaft_kg_m2, part.at_motor_kg_m2, part.share,
        )
        for part in comparison.inertias
    ]  # fmt: skip
    sheets.add_table("inertia inventory", fields, rows)
