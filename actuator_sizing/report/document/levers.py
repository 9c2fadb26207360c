"""What would let the nearest losers pass: one table per set that was asked about."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.blocks import Column, Paragraph, Section, Table, row
from actuator_sizing.report.formatting import number, quantity
from actuator_sizing.report.text import check_name, clean

if TYPE_CHECKING:
    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison

_COLUMNS = (
    Column("Change", weight=2.2),
    Column("Now", numeric=True, weight=1.2),
    Column("Needed", numeric=True, weight=1.2),
    Column("In words", weight=2.4),
)


def levers_section(comparison: Comparison) -> Section | None:
    """The smallest single changes, for the sets they were worked out for; None where there are none."""
    blocks: list[Block] = []
    for item in comparison.sets:
        if not item.levers:
            continue
        caption = f"{clean(item.label)}, lost by {check_name(item.governing_check)}"
        blocks.append(Table(caption, _COLUMNS, tuple(row(*_cells(lever)) for lever in item.levers)))
    if not blocks:
        return None
    lead = Paragraph(
        "Each line changes one thing and leaves all else as it is; the set then passes every check. Values are the "
        "smallest change found, sized again with the changed value."
    )
    return Section("levers", "What would let the nearest losers pass", (lead, *blocks))


def _cells(lever: Mapping[str, Any]) -> tuple[str, str, str, str]:
    title, unit, present, needed = (lever[key] for key in ("title", "unit", "present", "needed"))
    if needed is None:
        return clean(title), _shown(present, unit), "-", "no change of this alone helps"
    if isinstance(needed, str):
        return clean(title), clean(present), clean(needed), "cheapest that passes"
    change = needed - present
    if unit == "-" and present != 0.0:
        words = f"{number(abs(change) / abs(present) * 100.0, 3)} % {'more' if change > 0 else 'less'}"
    else:
        words = f"{_shown(abs(change), 'K' if unit == '°C' else unit)} {'more' if change > 0 else 'less'}"
    return clean(title), _shown(present, unit), _shown(needed, unit), words


def _shown(value: Any, unit: str) -> str:
    if isinstance(value, str):
        return clean(value)
    return number(float(value), 4) if unit in ("-", "") else quantity(float(value), unit)
