"""Columns of text and of allowed words."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.cells import is_missing
from actuator_sizing.case.columns import TEXT, YES_NO, Column, nearest
from actuator_sizing.case.headings import Heading
from actuator_sizing.case.model import MISSING, STATED
from actuator_sizing.case.parsed_tables import BAD, ParsedTable
from actuator_sizing.case.problem_list import shown
from actuator_sizing.case.text_columns import LARGEST_MEMORY, OddCell
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
            values[index] = value or ""
            if not value:
                origins[index] = MISSING if value == "" else BAD
        if len(understood) > LARGEST_MEMORY:
            understood.clear()
    odd = {index: cell for index, cell in text.odd.items() if not _is_harmless(column, cell)}
    origins[list(odd)] = BAD
    values[list(odd)] = ""
    _report_wrong(parsed, heading, origins == BAD, odd)
    parsed.values[key] = values
    parsed.bad[key] = origins == BAD
    origins[origins == BAD] = MISSING
    parsed.origins[key] = origins


def _is_harmless(column: Column, cell: OddCell) -> bool:
    """Whether an odd cell is as good as its text: a truth value for yes or no, a date in a remark."""
    if column.kind == YES_NO:
        return cell in ("TRUE", "FALSE")
    return column.kind == TEXT and not column.required and not cell.fault.startswith("the ")


def _text_reader(column: Column) -> Callable[[str], str | None]:
    """Make the function from a cell to its text, canonical word or words; None if it is not allowed."""
    if column.kind == TEXT:
        return lambda cell: " ".join(cell.split()) if len(cell) < 1000 else cell.strip()
    if column.kind == YES_NO:
        return lambda cell: "" if is_missing(cell) else canonical_word(cell, ("yes", "no"))
    if column.several:
        return lambda cell: "" if is_missing(cell) else canonical_words(cell, column.words)
    return lambda cell: "" if is_missing(cell) else canonical_word(cell, column.words)


def _report_wrong(
    parsed: ParsedTable, heading: Heading, where: NDArray[np.bool_], odd: Mapping[int, OddCell]
) -> None:
    column, text = heading.column, parsed.texts[heading.column.key]

    def remedy(index: int) -> str:
        if index in odd:
            return odd[index].remedy.replace("number", "text")
        close = nearest(text[index], column.words or ("yes", "no"))
        return f"Did you mean '{close}'?" if close else "Write one of these words."

    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        heading.text,
        where,
        got=lambda i: odd[i].fault if i in odd else shown(text[i]),
        allowed=column.allowed(),
        remedy=remedy,
    )
