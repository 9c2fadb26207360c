"""Columns of text and of allowed words."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from actuator_sizing.case.cells import is_missing
from actuator_sizing.case.columns import TEXT, YES_NO, Column, nearest
from actuator_sizing.case.headings import Heading
from actuator_sizing.case.model import MISSING, STATED
from actuator_sizing.case.parsed_tables import BAD, ParsedTable
from actuator_sizing.case.problem_list import shown
from actuator_sizing.case.words import canonical_word, canonical_words


def parse_text(parsed: ParsedTable, key: str, heading: Heading) -> None:
    """Read one column of text or words into `parsed`, every cell with a word that is not allowed reported."""
    column, text = heading.column, parsed.texts[key]
    values = np.empty(len(parsed), dtype=object)
    origins = np.full(len(parsed), STATED, dtype=np.int8)
    understood: dict[str, str | None] = {}
    reader = _text_reader(column)
    for start, cells in text.blocks():
        for index, cell in enumerate(cells, start=start):
            if cell not in understood:
                understood[cell] = reader(cell)
            value = understood[cell]
            if value is None:
                _report_word(parsed, heading, index, cell)
                values[index], origins[index] = "", BAD
            else:
                values[index] = value
                if not value:
                    origins[index] = MISSING
        if len(understood) > 100_000:
            understood.clear()
    for index, odd in text.odd.items():
        if column.kind == YES_NO and odd in ("TRUE", "FALSE"):
            continue
        if column.kind == TEXT and not column.required and not odd.fault.startswith("the "):
            continue  # a date or a truth value in a remark is as good as its text
        if origins[index] != BAD:
            parsed.problems.report(
                parsed.table.name,
                int(parsed.rows[index]),
                heading.text,
                got=odd.fault,
                allowed=column.allowed(),
                remedy=odd.remedy.replace("number", "text"),
            )
            values[index], origins[index] = "", BAD
    parsed.values[key] = values
    parsed.bad[key] = origins == BAD
    origins[origins == BAD] = MISSING
    parsed.origins[key] = origins


def _text_reader(column: Column) -> Callable[[str], str | None]:
    """Make the function from a cell to its text, canonical word or words; None if it is not allowed."""
    if column.kind == TEXT:
        return lambda cell: " ".join(cell.split()) if len(cell) < 1000 else cell.strip()
    if column.kind == YES_NO:
        return lambda cell: "" if is_missing(cell) else canonical_word(cell, ("yes", "no"))
    if column.several:
        return lambda cell: "" if is_missing(cell) else canonical_words(cell, column.words)
    return lambda cell: "" if is_missing(cell) else canonical_word(cell, column.words)


def _report_word(parsed: ParsedTable, heading: Heading, index: int, cell: str) -> None:
    words = heading.column.words or ("yes", "no")
    close = nearest(cell, words)
    parsed.problems.report(
        parsed.table.name,
        int(parsed.rows[index]),
        heading.text,
        got=shown(cell),
        allowed=heading.column.allowed(),
        remedy=f"Did you mean '{close}'?" if close else "Write one of these words.",
    )
