"""What would let the nearest losers pass, and give the leading set its reserve: one table per set asked about."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Column, Paragraph, Section, Table, row
from actuator_sizing.report.document.verdict import governing
from actuator_sizing.report.formatting import number
from actuator_sizing.report.lever_text import lever_text
from actuator_sizing.report.text import check_name, clean, in_sentence
from actuator_sizing.sizing.results import FAILS

if TYPE_CHECKING:
    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison, SetResult

_COLUMNS = (
    Column("Change", weight=2.3),
    Column("Now", numeric=True, weight=1.1),
    Column("Needed", numeric=True, weight=1.3),
    Column("In words", weight=2.2),
)


def levers_section(comparison: Comparison) -> Section | None:
    """The smallest changes, for the sets they were worked out for; None where there are none."""
    blocks: list[Block] = []
    for item in comparison.sets:
        if not item.levers:
            continue
        texts = [(lever["helps"], lever_text(comparison.case, lever)) for lever in item.levers]
        helping = tuple(row(*text) for helps, text in texts if helps)
        idle = "; ".join(text.change for helps, text in texts if not helps)
        if helping:
            blocks.append(Table(_caption(item), _COLUMNS, helping))
        else:
            blocks.append(Paragraph(f"{_caption(item)}."))
        if idle:
            blocks.append(Paragraph(f"No change of one of these alone helps: {idle}.", "note"))
        blocks.append(Paragraph(_about_pairs(item), "note"))
    if not blocks:
        return None
    lead = Paragraph(
        "Each line changes one thing and leaves all else as it is; the set then meets what the caption of its table "
        "says. Values are the smallest change found, sized again with the changed value and rounded to its safe side."
    )
    return Section("levers", "What would let the nearest losers pass", (lead, *blocks))


def _caption(item: SetResult) -> str:
    check = governing(item)
    name = in_sentence(check.title) if check else check_name(item.governing_check)
    if item.verdict == FAILS:
        return f"{clean(item.label)}, lost by {name}: every check met"
    return f"{clean(item.label)}, least reserve in {name}: every check met with the recommended reserve"


def _about_pairs(item: SetResult) -> str:
    """Say what a pair of levers saves, and how its cost is counted."""
    alone = [lever["cost"] for lever in item.levers if lever.get("unit") and lever.get("cost") is not None]
    pair = next((lever for lever in item.levers if lever["lever"] == "pair"), None)
    counted = (
        "The cost of a change is its size against the present value; of ambient against the rise that the winding is "
        "permitted, of an added dwell against the cycle. A pair costs the sum."
    )
    if pair is None:
        return f"No pair of levers was found that costs less than the cheapest lever alone. {counted}"
    if not alone:
        return f"The pair costs {number(pair['cost'], 3)}; no lever helps alone. {counted}"
    return f"The pair costs {number(pair['cost'], 3)}, the cheapest lever alone {number(min(alone), 3)}. {counted}"
