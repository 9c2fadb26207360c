"""From a raw table to a parsed one: headings, cells, names of rows, and what is not there."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.columns import Column, Table, allowed_text, fold
from actuator_sizing.case.headings import understand_headings
from actuator_sizing.case.model import MISSING
from actuator_sizing.case.number_cells import parse_numbers
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.text_cells import parse_text

BoolArray = NDArray[np.bool_]
LONGEST_NAME = 200


def parse_table(
    raw: RawTable, table: Table, problems: ProblemList, coordinate: str = "", broad: bool = False
) -> ParsedTable:
    """Judge every cell of a raw table and bring the numbers to SI.

    Parameters
    ----------
    raw : RawTable
        The table as it stands in the file.
    table : Table
        Its declaration.
    problems : ProblemList
        Takes every cell that is wrong.
    coordinate : str
        ``"linear"`` or ``"rotary"``: which kind of a (linear, rotary) pair holds.
    broad : bool
        Accept either kind of a pair, because the mechanism is not known.
    """
    headings = understand_headings(raw, table, problems, coordinate, broad)
    parsed = ParsedTable(table, raw.rows, problems, unknown=tuple(headings.unknown))
    for key, heading in headings.known.items():
        parsed.headings[key] = heading.text
        parsed.texts[key] = raw.columns[heading.index]
        if heading.unit is not None:
            parsed.units[key] = heading.unit
        if heading.column.is_number:
            parse_numbers(parsed, key, heading, raw, broken=key in headings.broken)
        else:
            parse_text(parsed, key, heading)
    for key, index in headings.unknown.items():
        parsed.headings[key], parsed.texts[key] = raw.headings[index], raw.columns[index]
    _take_names(parsed)
    _report_absent(parsed, problems)
    if len(raw) == 0:
        problems.report(raw.name, None, got="no rows below the headings", allowed="at least one row",
                        remedy="Fill in the table.")  # fmt: skip
    return parsed


def _take_names(parsed: ParsedTable) -> None:
    """Names of the rows: there must be one, short enough to print, and no two alike."""
    first = parsed.table.columns[0]
    if first.is_number:  # rows are points, not parts
        parsed.names = ("",) * len(parsed)
        return
    values = parsed.text(first.key)
    parsed.names = tuple(values)
    lengths = np.fromiter(map(len, parsed.names), dtype=np.int64, count=len(parsed))
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        parsed.heading(first.key),
        lengths > LONGEST_NAME,
        got=lambda i: shown(values[i]),
        allowed=f"a name of at most {LONGEST_NAME} characters",
        remedy="Shorten the name; put remarks in the note column.",
    )
    if parsed.table.name == "duty_cycle":
        return  # the same move may occur twice
    seen: dict[str, int] = {}
    repeated: dict[int, int] = {}
    for index, name in enumerate(parsed.names):
        if name:
            earlier = seen.setdefault(" ".join(name.split()).casefold(), index)
            if earlier != index:
                repeated[index] = earlier
    where = np.zeros(len(parsed), dtype=bool)
    where[list(repeated)] = True
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        parsed.heading(first.key),
        where,
        got=lambda i: f"{shown(values[i])}, used before in row {parsed.rows[repeated[i]]}",
        allowed="each name once",
        remedy="Rename or remove one of the rows.",
    )


def _report_absent(parsed: ParsedTable, problems: ProblemList) -> None:
    """Report required columns that no heading names, with the unknown heading that comes nearest."""
    for column in parsed.table.columns:
        if column.required and not column.machine and column.key not in parsed.headings:
            report_missing_column(parsed, column, problems)


def report_missing_column(parsed: ParsedTable, column: Column, problems: ProblemList) -> None:
    """Report one required column that is not there."""
    misspelt = [
        parsed.headings[key]
        for key in parsed.unknown
        if parsed.table.nearest(fold(parsed.headings[key].partition("[")[0])) == column.name
    ]
    remedy = f"Add a column '{column.heading_for()}'."
    if misspelt:
        remedy = f"Is the column {shown(misspelt[0])} meant? Then rename it to '{column.heading_for()}'."
    problems.report(parsed.table.name, None, column.name, got="no such column",
                    allowed="a required column", remedy=remedy)  # fmt: skip


def report_empty_cells(parsed: ParsedTable, column: Column, relevant: BoolArray | None = None) -> None:
    """Report rows without a value in a required column that is there."""
    key = column.key
    if key not in parsed.headings:
        return
    empty = (parsed.origins[key] == MISSING) & ~parsed.is_bad(key)
    if relevant is not None:
        empty &= relevant
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        parsed.headings[key],
        empty,
        got=lambda i: _empty(parsed, key, i),
        allowed=allowed_text(column, parsed.units.get(key)) if column.is_number else column.allowed(),
        remedy="Fill in the value; ask the supplier where the data sheet does not state it."
        if parsed.table.is_catalog and column.is_number
        else "Fill in the cell, or clear the whole row.",
    )


def _empty(parsed: ParsedTable, key: str, index: int) -> str:
    text = parsed.texts[key][index].strip()
    return f"{shown(text)}, which means not known" if text else "an empty cell"
