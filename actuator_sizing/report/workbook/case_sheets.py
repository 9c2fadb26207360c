"""Sheets of the case: segments, parts used, inputs with assumptions, questions to the supplier."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.inputs import part_entries
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.report.workbook.writer import Field, Sheets

if TYPE_CHECKING:
    from actuator_sizing.case.model import Entry
    from actuator_sizing.sizing.results import Comparison

SEGMENTS = "motion segments"
_ENTRY_FIELDS = (
    Field("table"), Field("row", "integer"), Field("name"), Field("quantity"), Field("as entered"),
    Field("as understood [unit beside]", "number"), Field("unit"), Field("origin"),
    Field("rule of the derived or assumed value"), Field("source"),
)  # fmt: skip


def add_segments(sheets: Sheets, comparison: Comparison) -> None:
    """Write the duty cycle, one row a segment, with the leading set's share of the RMS current in each."""
    units = AxisUnits.of(comparison.case)
    payload = "kg" if comparison.case.mechanism.carries_mass() else "kg·m²"
    effort = "N" if units.linear_load else "N·m"
    fields = [
        Field("row", "integer"), Field("segment"), Field("motion law"), Field("start [s]", "number"),
        Field("duration [s]", "number"), Field("end [s]", "number", formula=lambda r: f"=D{r}+E{r}"),
        Field(f"payload [{payload}]", "number"), Field(f"process effort [{effort}]", "number"),
        Field("brake closed"), Field("note"),
    ]  # fmt: skip
    views = comparison.by_cycle()
    rows: list[tuple[Any, ...]] = [
        (
            s.row, s.name, s.law, s.start_s, s.duration_s, s.start_s + s.duration_s, s.payload,
            s.process_effort, s.brake_closed, s.note,
        )
        for each in views
        for s in each.case.segments
    ]  # fmt: skip
    shares = [share for each in views for share in _shares(each)]
    if shares:
        basis = comparison.sets[0].quantities.get("current_basis") or ""
        fields += [
            Field(f"motor {units.effort_word} RMS [{'N' if units.linear_motor else 'N·m'}]", "number"),
            Field(f"current RMS [A {basis}]".replace(" ]", "]"), "number"),
            Field("∫ i² dt [A²·s]", "number", formula=lambda r: f"=L{r}^2*E{r}"),
        ]
        rows = [row + share for row, share in zip(rows, shares, strict=True)]
    if comparison.cycles:
        fields.append(Field("cycle"))
        names = [each.case.cycle.name for each in views for _ in each.case.segments]
        rows = [(*row, name) for row, name in zip(rows, names, strict=True)]
    sheets.add_table(SEGMENTS, fields, rows)


def _shares(comparison: Comparison) -> list[tuple[float, ...]]:
    """RMS torque and current, and integral of the squared current, of every segment of one cycle."""
    detail = comparison.sets[0].detail if comparison.sets else None
    if detail is None or detail.segments is None:
        return []
    columns = detail.segments[["torque_rms_nm", "current_rms_a", "current_squared_a2_s"]]
    return [tuple(share) for share in columns.to_numpy().tolist()]


def rms_formula(comparison: Comparison) -> str | None:
    """Formula of the RMS current from the rows of the sheet of segments; None where it has no such column.

    Of several cycles it is that of the first, whose rows come first.
    """
    if not _shares(comparison):
        return None
    last = len(comparison.case.segments) + 1
    return f"=SQRT(SUM('{SEGMENTS}'!M2:M{last})/SUM('{SEGMENTS}'!E2:E{last}))"


def add_parts(sheets: Sheets, comparison: Comparison) -> None:
    """Write the data sheets of the leading set's parts, as entered and as understood."""
    best = comparison.sets[0] if comparison.sets else None
    sheets.add_table("parts used", _ENTRY_FIELDS, [_entry_row(e) for e in part_entries(comparison, best)])


def add_inputs(sheets: Sheets, comparison: Comparison) -> None:
    """Write every input with its origin, then the assumptions of the method and the remarks of the audit."""
    rows: list[tuple[Any, ...]] = [_entry_row(entry) for entry in comparison.case.entries]
    rows += [
        ("assumption", "", subject, "", "", "", "", "assumed", text, "")
        for subject, text in comparison.assumptions
    ]
    rows += [
        (
            p.table, "" if p.row is None else p.row, f"remark: {p.severity}", p.column, p.got, "", "", "",
            f"{p.allowed} {p.remedy}".strip(), "",
        )
        for p in comparison.case.problems
    ]  # fmt: skip
    sheets.add_table("inputs and assumptions", _ENTRY_FIELDS, rows)


def add_questions(sheets: Sheets, comparison: Comparison) -> None:
    """Write what to ask the suppliers."""
    fields = (Field("part"), Field("data missing"), Field("check not made"), Field("answer"))
    sheets.add_table("questions", fields, [(*question, None) for question in comparison.questions])


def _entry_row(entry: Entry) -> tuple[Any, ...]:
    row: Any = "" if entry.row is None else entry.row
    unit = entry.unit or ("" if isinstance(entry.value_si, str) else "-")
    return (
        entry.table, row, entry.label, entry.column, entry.as_entered, entry.value_si, unit,
        entry.origin, entry.rule, entry.source,
    )  # fmt: skip
