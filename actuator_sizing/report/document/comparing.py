"""The leading sets beside one another, and why the others lost."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Cell, Column, FigureBlock, Paragraph, Section, Table, row
from actuator_sizing.report.document.verdict import describe_set, governing
from actuator_sizing.report.formatting import compared, display_unit, percent, quantity
from actuator_sizing.report.text import check_name, clean, in_sentence, plural
from actuator_sizing.sizing.results import FAILS

if TYPE_CHECKING:
    from collections.abc import Iterable

    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import CheckResult, Comparison, Rejections, SetResult

MOST_LEADING = 12
MOST_LOSERS = 8


def comparison_section(comparison: Comparison, figures: Iterable[str]) -> Section:
    """Show the leading sets, the matrix of utilisation, the reasons of the losers and the nearest of them."""
    blocks: list[Block] = []
    if comparison.sets:
        blocks.append(_leading_table(comparison))
    if "utilisation" in figures:
        blocks.append(
            FigureBlock(
                "utilisation",
                "Utilisation of every check for the sets examined exactly, best first. A framed cell "
                "governs its set; dark cells fail; hatched cells could not be checked.",
                _matrix_alt(comparison),
            )
        )
    blocks.append(Paragraph(_counts_text(comparison)))
    if comparison.rejections.by_check:
        blocks.append(_counts_table(comparison))
    losers = [item for item in comparison.sets if item.verdict == FAILS][:MOST_LOSERS]
    if losers:
        blocks.append(_losers_table(losers))
    return Section("comparison", "Comparison of the sets", tuple(blocks))


def _leading_table(comparison: Comparison) -> Table:
    columns = (
        Column("Rank", numeric=True, weight=0.75),
        Column("Motor", weight=1.7),
        Column("Gearhead", weight=1.5),
        Column("Ratio", numeric=True, weight=0.7),
        Column("Drive", weight=1.4),
        Column("Verdict", weight=1.3),
        Column("Governing check", weight=1.6),
        Column("Utilisation", numeric=True, weight=1.1),
        Column("Margin", numeric=True, weight=1.0),
        Column("Price", numeric=True, weight=0.9),
        Column("Mass [kg]", numeric=True, weight=0.8),
    )
    rows = []
    for item in comparison.sets[:MOST_LEADING]:
        check = governing(item)
        rows.append(
            row(
                str(item.rank),
                clean(item.motor),
                "direct" if item.gearhead is None else clean(item.gearhead),
                f"{item.ratio:.5g}",
                clean(item.drive),
                Cell(item.verdict, verdict=item.verdict),
                check.title if check else check_name(item.governing_check),
                percent(check.utilisation, check.allowed) if check else "not known",
                percent(check.margin, 1.0 / check.allowed - 1.0) if check else "not known",
                "not known" if item.price is None else f"{item.price:.2f}",
                "not known" if item.mass_kg is None else f"{item.mass_kg:.4g}",
            )
        )
    caption = f"Leading sets: those that pass ranked by {comparison.ranked_by}, then the nearest that fail"
    return Table(caption, columns, tuple(rows))


def _counts_text(comparison: Comparison) -> str:
    counts = comparison.rejections
    text = (
        f"The catalogs give {plural(counts.sets_total, 'set')} of motor, gearhead and drive. "
        f"{plural(counts.incompatible, 'set')} cannot be built{_misfits_text(counts)}, "
        f"{plural(counts.screened, 'set')} were compared by bounds that never reject a set which could pass, and "
        f"{plural(counts.rejected, 'set')} were rejected. {plural(counts.evaluated, 'set')} were "
        f"examined exactly; {plural(counts.confirmed_passing, 'set')} pass."
    )
    if counts.not_checked:
        text += f" {plural(counts.not_checked, 'set')} neither pass nor fail, for a check lacks its data."
    if not counts.complete:
        text += (
            f" Not all of the {plural(counts.survivors, 'set')} that might pass were examined exactly: a "
            "set that ranks better could be among the rest."
        )
    return text


def _misfits_text(counts: Rejections) -> str:
    if not counts.misfits:
        return ""
    reasons = "; ".join(f"{reason}: {plural(count, 'set')}" for reason, count in counts.misfits.items())
    return f" ({reasons})"


def _counts_table(comparison: Comparison) -> Table:
    titles = titles_of(comparison.sets)
    ordered = sorted(comparison.rejections.by_check.items(), key=lambda item: (-item[1], item[0]))
    rows = tuple(row(titles.get(key, check_name(key)), f"{count:d}") for key, count in ordered)
    columns = (Column("Check that rejects", weight=3.0), Column("Sets rejected", numeric=True))
    return Table("Why sets lost, by the check that governs each", columns, rows)


def titles_of(sets: Iterable[SetResult]) -> dict[str, str]:
    """Map the keys of checks to their titles."""
    return {check.check: check.title for item in sets for check in item.checks}


def _named(check: CheckResult) -> str:
    return f"{check.title}, cycle {clean(check.cycle, 40)}" if check.cycle else check.title


def _losers_table(losers: list[SetResult]) -> Table:
    columns = (
        Column("Set", weight=3.0),
        Column("Governing check", weight=1.6),
        Column("Demand", numeric=True),
        Column("Capacity", numeric=True),
        Column("Utilisation", numeric=True),
        Column("Also fails", weight=1.6),
    )
    rows = []
    for item in losers:
        check = governing(item)
        others = [
            in_sentence(c.title)
            for c in item.checks
            if c.verdict == FAILS and not c.is_advice and c.check != item.governing_check
        ]
        demand, capacity, unit = shown_pair(check) if check else ("not known", "not known", "")
        rows.append(
            row(
                describe_set(item),
                _named(check) if check else check_name(item.governing_check),
                f"{demand} {unit}".strip(),
                f"{capacity} {unit}".strip(),
                percent(check.utilisation, check.allowed) if check else "not known",
                ", ".join(others) or "nothing else",
            )
        )
    return Table("The sets that came nearest and fail", columns, tuple(rows))


def shown_pair(check: CheckResult) -> tuple[str, str, str]:
    """Write demand and capacity of a check in one display unit: two texts and the unit."""
    unit = display_unit(check.unit, (check.demand, check.capacity))

    def convert(value: float | None) -> float | None:
        return None if value is None else float(unit.convert(value))

    demand, capacity = compared(convert(check.demand), convert(check.capacity))
    return demand, capacity, unit.label


def _matrix_alt(comparison: Comparison) -> str:
    parts = []
    for item in comparison.sets[:5]:
        check = governing(item)
        if check is not None:
            use = percent(check.utilisation, check.allowed)
            parts.append(
                f"{describe_set(item)} {item.verdict}, governed by {in_sentence(check.title)} at {use}"
            )
    return f"Matrix of sets against checks. {'; '.join(parts)}. All values are in the workbook."


def set_quantity(item: SetResult, key: str, label: str) -> str:
    """Write one quantity of a set with its unit; "not known" when it is missing."""
    value = item.quantities.get(key)
    return quantity(None if value is None else float(value), label)
