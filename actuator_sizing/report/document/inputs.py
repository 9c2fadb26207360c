"""What went in: as entered, as understood, assumed, derived, and remarked on."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable
from itertools import groupby
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.blocks import Cell, Column, Paragraph, Section, Table, row
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from actuator_sizing.case.model import Entry
    from actuator_sizing.errors import Problem
    from actuator_sizing.sizing.results import Comparison, SetResult

TITLES = {
    "axis": "Axis",
    "duty_cycle": "Duty cycle",
    "duty_types": "Duty types",
    "cycles": "Cycles",
    "motors": "Motor of the leading set",
    "gearheads": "Gearhead of the leading set",
    "drives": "Drive of the leading set",
    "limits": "Limits",
    "tolerances": "Tolerances",
    "map": "Map from driven shaft to load",
    "inertias": "Inertia inventory",
}


def part_entries(comparison: Comparison, item: SetResult | None) -> tuple[Entry, ...]:
    """Collect the catalog values of the parts of one set."""
    if item is None:
        return ()
    case = comparison.case
    parts = [*case.catalog_entries("motors", item.motor_index)]
    if item.gearhead is not None:
        parts += case.catalog_entries("gearheads", item.gearhead_index)
    return (*parts, *case.catalog_entries("drives", item.drive_index))


def understood(entry: Entry) -> str:
    """Write the value as understood, in SI, to six digits."""
    value: Any = entry.value_si
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return "not known"
    if isinstance(value, str):
        return clean(value)
    unit = "" if entry.unit in ("", "-", "1") else f" {entry.unit}"
    return f"{float(value):.6g}{unit}"


def inputs_section(comparison: Comparison) -> Section:
    """List every input of the case and of the leading set's parts, one table for each input table."""
    best = comparison.sets[0] if comparison.sets else None
    entries = [*comparison.case.entries, *part_entries(comparison, best)]
    blocks: list[Paragraph | Table] = [
        Paragraph(
            "As entered is what the tables say, in the unit of the heading; as understood is the value "
            "used, in SI units. Rows are counted as the spreadsheet shows them."
        )
    ]
    for table, rows in groupby(entries, key=lambda e: e.table):
        make = (
            _wide_table
            if table in ("duty_cycle", "duty_types", "cycles", "limits", "tolerances", "map", "inertias")
            else _entry_table
        )
        blocks.append(make(table, list(rows)))
    if comparison.case.problems:
        blocks.append(_remarks_table(comparison.case.problems))
    return Section("inputs", "Inputs as entered and as understood", tuple(blocks))


def _entry_table(table: str, entries: list[Entry]) -> Table:
    """One row a value; what is the same for all of them, as for one part of a catalog, goes to the caption."""
    same = len(entries) > 1
    one_part = same and len({(e.label, e.row) for e in entries}) == 1 and bool(label_of(entries[0]))
    one_source = same and len({e.source for e in entries}) == 1 and bool(entries[0].source)
    caption = TITLES.get(table, table.replace("_", " ").capitalize())
    if one_part:
        where = "" if entries[0].row is None else f" (row {entries[0].row})"
        caption += f": {clean(entries[0].label, 60)}{where}"
    if one_source:
        caption += f". Source: {clean(entries[0].source)}"
    shown: list[tuple[Column, Callable[[Entry], str]]] = [
        (Column("Row", numeric=True, weight=0.5), lambda e: "" if e.row is None else str(e.row)),
        (Column("Name", weight=1.4), lambda e: clean(label_of(e))),
        (Column("Quantity", weight=2.0), quantity_of),
        (Column("As entered", weight=1.4), lambda e: clean(e.as_entered)),
        (Column("As understood", weight=1.6), understood),
        (Column("Origin", weight=2.4), _origin),
        (Column("Source", weight=1.6), lambda e: clean(e.source)),
    ]
    left_out = {"Source"} if one_source else set()
    if one_part:
        left_out |= {"Row", "Name"}
    elif not any(label_of(e) for e in entries):
        left_out |= {"Name"}
    shown = [(column, text) for column, text in shown if column.title not in left_out]
    listed = [e for e in entries if not (one_source and e.column == "source")]
    rows = tuple(row(*(text(entry) for _, text in shown)) for entry in listed)
    return Table(caption, tuple(column for column, _ in shown), rows)


def _origin(entry: Entry) -> str:
    return f"{entry.origin}: {clean(entry.rule, 300)}" if entry.rule else entry.origin


def _wide_table(table: str, entries: list[Entry]) -> Table:
    """Keep the shape of a table whose rows are segments or checks: as entered, below it as understood."""
    names = list(dict.fromkeys(quantity_of(e) for e in entries))
    by_row: dict[tuple[int | None, str], dict[str, Cell]] = {}
    for entry in entries:
        by_row.setdefault((entry.row, clean(entry.label)), {})[quantity_of(entry)] = _wide_cell(entry)
    columns = (
        Column("Row", numeric=True, weight=0.5),
        Column("Name", weight=1.5),
        *(Column(name[:1].upper() + name[1:], weight=1.6 if name == "note" else 1.0) for name in names),
    )
    rows = [
        row("" if number is None else str(number), label, *(cells.get(name, "") for name in names))
        for (number, label), cells in by_row.items()
    ]
    return Table(TITLES.get(table, table), columns, tuple(rows))


def _wide_cell(entry: Entry) -> Cell:
    known, typed = _unbroken(understood(entry)), _unbroken(clean(entry.as_entered))
    if not typed:
        return Cell(known, note=_origin(entry))
    return Cell(typed, note="" if known == typed else f"=\N{NO-BREAK SPACE}{known}")


def _unbroken(text: str) -> str:
    """Keep a number and its unit on one line."""
    return (
        text.replace(" ", "\N{NO-BREAK SPACE}") if len(text) <= 14 and text[:1] in "-+.0123456789" else text
    )


def quantity_of(entry: Entry) -> str:
    """Name the quantity: the axis table has one quantity a row, the others one a column."""
    return clean(entry.label if entry.table == "axis" else entry.column)


def label_of(entry: Entry) -> str:
    """Name the part, segment or check that an entry belongs to; empty on the axis table."""
    return "" if entry.table == "axis" or entry.label == entry.column else entry.label


def _remarks_table(problems: Iterable[Problem]) -> Table:
    columns = (
        Column("Kind", weight=0.8),
        Column("Table", weight=1.0),
        Column("Row", numeric=True, weight=0.5),
        Column("Column", weight=1.3),
        Column("Read", weight=1.2),
        Column("Expected", weight=1.6),
        Column("What to do", weight=2.4),
    )
    rows = tuple(
        row(
            p.severity,
            clean(p.table),
            "" if p.row is None else str(p.row),
            clean(p.column),
            clean(p.got),
            clean(p.allowed),
            clean(p.remedy, 300),
        )
        for p in problems
    )
    return Table("Remarks of the audit on the input", columns, rows)


def assumptions_section(comparison: Comparison) -> Section:
    """List what nobody entered: values assumed or derived, and the assumptions of the method."""
    best = comparison.sets[0] if comparison.sets else None
    entries = [
        entry
        for entry in (*comparison.case.entries, *part_entries(comparison, best))
        if entry.origin in ("assumed", "derived")
    ]
    told = {f"{entry.origin}: {entry.rule}" for entry in entries}
    method = [(subject, text) for subject, text in comparison.assumptions if text not in told]
    rows = [*_entry_statements(entries), *(row(clean(s), clean(text, 400), "", "") for s, text in method)]
    columns = (
        Column("Subject", weight=2.0),
        Column("What was assumed or derived", weight=4.0),
        Column("Value", weight=1.2),
        Column("Origin", weight=0.8),
    )
    if not rows:
        return Section("assumptions", "Assumptions and derived values", (Paragraph("None."),))
    table = Table("Confirm these before the design is released", columns, tuple(rows))
    return Section("assumptions", "Assumptions and derived values", (table,))


def _entry_statements(entries: Iterable[Entry]) -> list[tuple[Cell, ...]]:
    """Make one row of each statement; the same default in many rows of a table is said once."""
    labels: dict[tuple[str, ...], list[str]] = {}
    for entry in entries:
        statement = (entry.table, quantity_of(entry), entry.rule, understood(entry), entry.origin)
        labels.setdefault(statement, []).append(clean(label_of(entry), 60))
    rows = []
    for (table, name, rule, value, origin), found in labels.items():
        if len(found) > 1:
            subject = f"{name} ({len(found)} rows of {table.replace('_', ' ')})"
        else:
            subject = f"{found[0]}: {name}" if found[0] else name
        rows.append(row(subject, clean(rule, 300), value, origin))
    return rows
