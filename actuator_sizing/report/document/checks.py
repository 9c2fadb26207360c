"""Every check of the leading set, and the working of those that govern."""

from __future__ import annotations

import re
from itertools import groupby
from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Cell, Column, Paragraph, Section, Table, Working, row
from actuator_sizing.report.document.comparing import shown_pair
from actuator_sizing.report.document.verdict import describe_check, describe_set
from actuator_sizing.report.formatting import percent, quantity
from actuator_sizing.report.text import clean
from actuator_sizing.sizing.results import FAILS, NOT_CHECKED

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import CheckResult, SetResult

#: Checks whose working is shown: the governing one, those that fail, and the nearest to their limit.
MOST_WORKINGS = 4
_LONGEST_BAR = 10.0
_GROUPS = {
    "motor": "Motor",
    "drive": "Drive",
    "gearhead": "Gearhead",
    "mechanism": "Mechanism",
    "axis": "Axis",
}

_COLUMNS = (
    Column("Check", weight=4.6),
    Column("Demand", numeric=True, weight=0.9),
    Column("Capacity", numeric=True, weight=1.0),
    Column("Unit", weight=0.9),
    Column("Utilisation", numeric=True, weight=1.35),
    Column("Margin", numeric=True, weight=0.95),
    Column("Verdict", weight=1.1),
    Column("Where in the cycle", weight=1.3),
)


def checks_section(best: SetResult) -> Section:
    """List the checks of the leading set by group."""
    tables: list[Paragraph | Table] = [Paragraph(f"Set {best.rank}: {describe_set(best)}.")]
    by_group = sorted(best.checks, key=lambda c: _group_order(c.group))
    for group, checks in groupby(by_group, key=lambda c: c.group):
        rows = tuple(_check_row(check) for check in checks)
        tables.append(Table(f"Checks: {_GROUPS.get(group, group).lower()}", _COLUMNS, rows))
    return Section("checks", "Checks of the leading set", tuple(tables))


def _group_order(group: str) -> int:
    known = list(_GROUPS)
    return known.index(group) if group in known else len(known)


def _check_row(check: CheckResult) -> tuple[Cell, ...]:
    demand, capacity, unit = shown_pair(check)
    title = f"{check.title} (advice)" if check.is_advice else check.title
    note = f"{clean(check.formula, 300)}. Source: {clean(check.source, 300)}."
    if check.missing:
        note += f" Missing: {', '.join(clean(item) for item in check.missing)}."
    share, verdict = None, check.shown_verdict
    if check.utilisation is not None and check.allowed > 0.0:
        share = min(check.utilisation / check.allowed, _LONGEST_BAR)  # infinite where there is no capacity
    text = percent(check.utilisation, check.allowed)
    allowed = "" if check.allowed == 1.0 else f"{percent(check.allowed)} allowed"
    where = "whole cycle" if check.at_time_s is None else f"{quantity(check.at_time_s, 's')}"
    if check.verdict == NOT_CHECKED:
        where = ""
    else:
        parts = (clean(check.cycle or "", 40), where, clean(check.segment or "", 40))
        where = ", ".join(part for part in parts if part)
    return row(
        Cell(title, note=note),
        demand,
        capacity,
        unit,
        Cell(text, note=allowed, share=share, verdict=verdict),
        percent(check.margin, 1.0 / check.allowed - 1.0) if check.allowed > 0.0 else "not known",
        Cell(verdict, verdict=verdict),
        where,
    )


def working_section(best: SetResult) -> Section:
    """Show how the governing numbers came about, with the values put in."""
    known = [c for c in best.checks if c.utilisation is not None and not c.is_advice]
    known.sort(key=lambda c: (c.check != best.governing_check, c.verdict != FAILS, -_strain(c)))
    blocks: list[Paragraph | Working] = [
        Paragraph(
            "Values are rounded for print; a calculator reproduces the result to the digits shown. All "
            "values are in SI units unless another unit stands beside them."
        )
    ]
    for check in known[:MOST_WORKINGS]:
        facts = [("Formula", clean(check.formula, 1000)), ("Source", clean(check.source, 1000))]
        if check.inputs:
            inputs = "; ".join(f"{clean(name)} ({origin})" for name, origin in check.inputs)
            facts.append(("Inputs used", inputs))
        steps = re.split(r";\s+|\n", check.working)  # one step a line
        lines = tuple(clean(step, 2000) for step in steps if step.strip())
        blocks.append(Working(describe_check(check), lines, tuple(facts)))
    return Section("working", "The working of the governing checks", tuple(blocks))


def _strain(check: CheckResult) -> float:
    assert check.utilisation is not None
    return check.utilisation / check.allowed if check.allowed > 0.0 else float("inf")
