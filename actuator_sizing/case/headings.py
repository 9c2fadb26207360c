"""What the headings of a table mean: the column, the unit, and what is wrong with them."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from actuator_sizing.case.columns import Column, Table, fold, key_of
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.errors import WARNING
from actuator_sizing.units import Unit, UnitError, parse_unit, si_unit

LONGEST_HEADING = 200
_BRACKETS = re.compile(r"(.*?)\s*\[([^\[\]]*)\]\s*\*?\s*", re.DOTALL)
_ROUND = re.compile(r"(.*?)\s*\(([^()]*)\)\s*", re.DOTALL)


def split_heading(heading: str) -> tuple[str, str | None]:
    """Folded name and unit text of a heading; the unit is None where there are no brackets.

    Examples
    --------
    >>> split_heading("Rotor_inertia [g·cm²]")
    ('rotor inertia', 'g·cm²')
    """
    match = _BRACKETS.fullmatch(heading)
    if match:
        return fold(match.group(1)), match.group(2).strip()
    return fold(heading.rstrip("* ")), None


@dataclass(frozen=True)
class Heading:
    """One understood heading."""

    index: int  # column in the raw table
    text: str  # as typed
    column: Column
    unit: Unit | None


@dataclass(frozen=True)
class Headings:
    """Understood headings of one table."""

    known: dict[str, Heading] = field(default_factory=dict)  # by column key
    unknown: dict[str, int] = field(default_factory=dict)  # key -> column in the raw table
    broken: frozenset[str] = frozenset()  # keys of columns whose heading is an error


def understand_headings(
    raw: RawTable, table: Table, problems: ProblemList, coordinate: str = "", broad: bool = False
) -> Headings:
    """Match every heading of a raw table with the declared columns.

    Parameters
    ----------
    raw : RawTable
        The table as it stands in the file.
    table : Table
        Its declaration.
    problems : ProblemList
        Takes duplicates, missing or wrong units, and unknown headings.
    coordinate : str
        ``"linear"`` or ``"rotary"``: which kind of a (linear, rotary) pair holds.
    broad : bool
        Accept either kind of a pair, because the mechanism is not known.
    """
    headings, broken = Headings(), set()
    seen: dict[str, str] = {}
    for index, text in enumerate(raw.headings):
        if not text:
            _report_nameless(raw, index, problems)
            continue
        if len(text) > LONGEST_HEADING:
            problems.report(raw.name, None, f"column {index + 1}", got=shown(text),
                            allowed=f"a heading of at most {LONGEST_HEADING} characters",
                            remedy="Shorten the heading.")  # fmt: skip
            continue
        name, unit_text = split_heading(text)
        column = table.find(name)
        if column is None:
            column, unit_text = _round_brackets(text, table, unit_text)
        key = column.key if column else f"other_{key_of(name)}"
        if key in seen:
            problems.report(raw.name, None, text, got=f"the headings {shown(seen[key])} and {shown(text)}",
                            allowed="one column for each quantity",
                            remedy="Remove or rename one of them.")  # fmt: skip
            broken.add(key)
            continue
        seen[key] = text
        if column is None:
            headings.unknown[key] = index
            _report_unknown(raw, text, table, problems)
            continue
        unit = None
        if column.is_number:
            unit = _unit(raw, text, unit_text, column, coordinate, broad, problems)
            if unit is None:
                broken.add(key)
        headings.known[key] = Heading(index, text, column, unit)
    return Headings(headings.known, headings.unknown, frozenset(broken))


def _round_brackets(text: str, table: Table, unit_text: str | None) -> tuple[Column | None, str | None]:
    """Find the column of a heading with its unit in round brackets, so that the message can say so."""
    match = _ROUND.fullmatch(text)
    if match and unit_text is None:
        return table.find(match.group(1)), None
    return None, unit_text


def _unit(
    raw: RawTable,
    text: str,
    unit_text: str | None,
    column: Column,
    coordinate: str,
    broad: bool,
    problems: ProblemList,
) -> Unit | None:
    kind: str | tuple[str, ...] = column.kind
    if isinstance(kind, tuple) and not broad:
        kind = column.kind_for(coordinate)
    if not unit_text:
        if not column.needs_unit:
            return parse_unit("", kind) if column.kind != "price" else Unit("price", 1.0, 0.0, "", "")
        example = column.heading_for(coordinate or "rotary")
        if "[" not in example:
            example = f"{column.name} [{si_unit(column.kind_for(coordinate or 'rotary'))}]"
        problems.report(raw.name, None, text, got="no unit in square brackets",
                        allowed=f"a unit of {' or '.join([kind] if isinstance(kind, str) else kind)}",
                        remedy=f"Write the heading as name [unit], for example {example!r}.")  # fmt: skip
        return None
    try:
        return parse_unit(unit_text, kind)
    except UnitError as error:
        problems.report(raw.name, None, text, got=f"the unit {shown(unit_text)}",
                        allowed=f"a unit of {' or '.join([kind] if isinstance(kind, str) else kind)}",
                        remedy=_sentence(str(error)))  # fmt: skip
        return None


def _sentence(text: str) -> str:
    return text if text.endswith((".", "!", "?")) else f"{text}."


def _report_unknown(raw: RawTable, text: str, table: Table, problems: ProblemList) -> None:
    name, _ = split_heading(text)
    close = table.nearest(name)
    remedy = f"Did you mean '{close}'?" if close else "Rename it if it is meant to count."
    problems.report(raw.name, None, text, got="an unknown column", allowed="a known column name",
                    remedy=f"{remedy} It is kept, but nothing is calculated with it.",
                    severity=WARNING)  # fmt: skip


def _report_nameless(raw: RawTable, index: int, problems: ProblemList) -> None:
    filled = sum(1 for cell in raw.columns[index] if cell.strip())
    if filled:
        problems.report(raw.name, None, f"column {index + 1}", got=f"{filled} cells without a heading",
                        allowed="a heading over every filled column",
                        remedy="Name the column or clear it.", severity=WARNING)  # fmt: skip
