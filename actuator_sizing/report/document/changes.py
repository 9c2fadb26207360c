"""What changed since an earlier revision."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.blocks import Cell, Column, Paragraph, Section, Table, row
from actuator_sizing.report.formatting import number, percent, quantity
from actuator_sizing.report.headings import name_and_unit
from actuator_sizing.report.text import check_name, clean, plural
from actuator_sizing.units import suffix_unit

if TYPE_CHECKING:
    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.report.revision import Revision

MOST_ROWS = 24


def changes_section(revision: Revision) -> Section:
    """Say which inputs changed, and which results and verdicts moved with them."""
    blocks: list[Block] = [Paragraph(changes_sentence(revision), "lead")]
    if revision.inputs:
        shown = revision.inputs[:MOST_ROWS]
        blocks.append(
            Table(
                _caption("Inputs that changed", len(shown), len(revision.inputs)),
                (
                    Column("Table and row", weight=1.1),
                    Column("Of", weight=1.4),
                    Column("Quantity", weight=1.6),
                    Column("Before", weight=1.5),
                    Column("Now", weight=1.5),
                ),
                tuple(
                    row(
                        clean(change.table if change.row is None else f"{change.table} row {change.row}"),
                        clean(change.label),
                        clean(change.column),
                        clean(change.old) or "not there",
                        clean(change.new) or "not there",
                    )
                    for change in shown
                ),
            )
        )
    if revision.checks:
        turned = [change for change in revision.checks if change.turned][:MOST_ROWS]
        rest = [
            change
            for change in revision.checks
            if not change.turned and change.set_label == revision.new_leader
        ]
        ordered = [*turned, *rest][:MOST_ROWS]
        blocks.append(
            Table(
                _caption(
                    "Verdicts that turned, then the leading set's checks that moved",
                    len(ordered),
                    len(revision.checks),
                ),
                (
                    Column("Set", weight=2.4),
                    Column("Check", weight=1.5),
                    Column("Before", weight=1.2),
                    Column("Now", weight=1.2),
                ),
                tuple(
                    row(
                        clean(change.set_label),
                        change.title,
                        _verdict_cell(change.old_verdict, change.old_utilisation, change.allowed),
                        _verdict_cell(change.new_verdict, change.new_utilisation, change.allowed),
                    )
                    for change in ordered
                ),
            )
        )
    if revision.results:
        shown_results = revision.results[:MOST_ROWS]
        blocks.append(
            Table(
                _caption("Results of the leading set that moved", len(shown_results), len(revision.results)),
                (
                    Column("Result", weight=2.4),
                    Column("Before", numeric=True),
                    Column("Now", numeric=True),
                    Column("Change", numeric=True, weight=0.8),
                ),
                tuple(
                    row(
                        name_and_unit(change.name)[0],
                        _value(change.name, change.old),
                        _value(change.name, change.new),
                        _relative(change.old, change.new),
                    )
                    for change in shown_results
                ),
            )
        )
    return Section("changes", "Changes since the earlier revision", tuple(blocks))


def changes_sentence(revision: Revision) -> str:
    """The difference in one or two sentences, for report and terminal."""
    earlier = (
        f"the earlier comparison (inputs {revision.old_fingerprint[:12]}, version {revision.old_version})"
    )
    if revision.is_same:
        return f"Nothing changed since {earlier}: inputs, results and verdicts are the same."
    turned = sum(change.turned for change in revision.checks)
    counts = (
        f"{plural(len(revision.inputs), 'input')} changed since {earlier}, and "
        f"{plural(turned, 'verdict')} of single checks turned."
    )
    if revision.old_leader != revision.new_leader:
        return (
            f"{counts} The leading set was {clean(revision.old_leader)} (“{revision.old_verdict}”) and is now "
            f"{clean(revision.new_leader)} (“{revision.new_verdict}”)."
        )
    if revision.old_verdict != revision.new_verdict:
        return (
            f"{counts} The leading set is the same; its verdict was “{revision.old_verdict}” and is now "
            f"“{revision.new_verdict}”."
        )
    return f"{counts} The leading set is the same, and so is its verdict."


def changes_lines(revision: Revision, at_most: int = 12) -> list[str]:
    """The difference as lines for a terminal: the sentence, then inputs and turned verdicts."""
    lines = [changes_sentence(revision)]
    for change in revision.inputs:
        where = change.table if change.row is None else f"{change.table} row {change.row}"
        old, new = clean(change.old) or "not there", clean(change.new) or "not there"
        lines.append(f"  {clean(where)}, {clean(change.label)}, {clean(change.column)}: {old} -> {new}")
    for turn in revision.checks:
        if turn.turned:
            lines.append(
                f"  {clean(turn.set_label)}: {turn.title} {turn.old_verdict or 'not there'} -> {turn.new_verdict}"
            )
    left = len(lines) - 1 - at_most
    return lines if left <= 0 else [*lines[: at_most + 1], f"  ... and {left} more in the report."]


def _caption(text: str, shown: int, of: int) -> str:
    return text if shown == of else f"{text} (the first {shown} of {of}; all are in results.json)"


def _verdict_cell(verdict: str, utilisation: float | None, allowed: float) -> Cell:
    if not verdict:
        return Cell("not there")
    return Cell(verdict, note="" if utilisation is None else percent(utilisation, allowed), verdict=verdict)


def _relative(old: Any, new: Any) -> str:
    """By how much a number moved, against what it was; empty where that says nothing."""
    numbers = all(isinstance(value, int | float) and not isinstance(value, bool) for value in (old, new))
    if not numbers or not old:
        return ""
    change = new / old - 1.0
    return ("+" if change > 0.0 else "") + percent(change, 0.0)


def _value(name: str, value: Any) -> str:
    if value is None:
        return "not known"
    if isinstance(value, bool | str):
        return check_name(value) if name == "governing_check" else clean(str(value))
    unit = suffix_unit(name)
    return quantity(float(value), unit) if unit else number(float(value))
