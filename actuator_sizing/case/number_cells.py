"""Columns of numbers: clean blocks at once, odd cells one by one, then SI and bounds."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.cells import CellError, is_missing, parse_number, remedy_for, tidy
from actuator_sizing.case.columns import Column, allowed_text
from actuator_sizing.case.headings import Heading
from actuator_sizing.case.model import MISSING, STATED
from actuator_sizing.case.parsed_tables import BAD, ParsedTable
from actuator_sizing.case.problem_list import shown
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.text_columns import LARGEST_MEMORY, TextColumn
from actuator_sizing.errors import WARNING
from actuator_sizing.units import Unit

FloatArray = NDArray[np.float64]


def parse_numbers(parsed: ParsedTable, key: str, heading: Heading, raw: RawTable, *, broken: bool) -> None:
    """Read one column of numbers into `parsed`, in SI, every wrong cell reported.

    Parameters
    ----------
    parsed : ParsedTable
        Takes values, origins and problems.
    key : str
        Key of the column.
    heading : Heading
        What the heading means.
    raw : RawTable
        The table as it stands in the file.
    broken : bool
        The heading itself is wrong, so the numbers cannot be brought to SI.
    """
    column, unit = heading.column, heading.unit
    values = np.empty(len(parsed))
    origins = np.full(len(parsed), STATED, dtype=np.int8)
    text = parsed.texts[key]
    grouped: list[int] = []
    wrong: dict[int, tuple[str, CellError]] = {}
    memory: dict[str, _Reading] = {}
    for start, cells in text.blocks():
        fast = _fast_numbers(cells, raw.decimal)
        stop = start + len(cells)
        if fast is not None:
            values[start:stop] = fast
            origins[start:stop][np.isnan(fast)] = MISSING
            continue
        for index, cell in enumerate(cells, start=start):
            reading = memory.get(cell)
            if reading is None:
                reading = memory[cell] = _slow_number(cell, column, unit, raw.decimal)
            values[index], origins[index] = reading.value, reading.origin
            if reading.grouped:
                grouped.append(index)
            elif reading.error is not None:
                wrong[index] = cell, reading.error
        if len(memory) > LARGEST_MEMORY:
            memory.clear()
    for index, odd in text.odd.items():
        wrong[index] = odd.fault, CellError(odd.remedy, allowed=f"a number, not {odd.fault}")
        values[index], origins[index] = np.nan, BAD
    _report_wrong(parsed, heading, wrong, text)
    _report_grouped(parsed, heading, grouped, text)
    if unit is not None:
        values = values * unit.factor + unit.offset
    if broken or unit is None:
        values[:], origins[origins == STATED] = np.nan, BAD
    parsed.values[key] = values
    parsed.bad[key] = origins == BAD
    origins[origins == BAD] = MISSING
    parsed.origins[key] = origins
    if unit is not None and not broken:
        _check_bounds(parsed, key, heading, unit)


def _fast_numbers(cells: list[str], decimal: str) -> FloatArray | None:
    """Numbers of a clean block (plain numbers and empty cells only); None where a cell needs a closer look."""
    joined = "\n".join(cells)
    if len(joined) == len(cells) - 1:
        return np.full(len(cells), np.nan)
    if "_" in joined:
        return None
    if decimal == ",":
        if "." in joined:
            return None
        converted = joined.replace(",", ".").split("\n")
        if len(converted) != len(cells):
            return None
        cells = converted
    try:
        numbers = np.array([float(cell) if cell else np.nan for cell in cells])
    except ValueError:
        return None
    empty = cells.count("")
    if np.count_nonzero(~np.isfinite(numbers)) != empty:
        return None
    return numbers


class _Reading(NamedTuple):
    """What one cell says, in the unit of the heading."""

    value: float = np.nan
    origin: int = MISSING
    grouped: bool = False  # a lone separator was resolved by the rest of the table
    error: CellError | None = None


def _slow_number(cell: str, column: Column, unit: Unit | None, decimal: str) -> _Reading:
    tidied = tidy(cell)
    if is_missing(cell) or is_missing(tidied):
        return _Reading()
    try:
        if column.kind == "ratio" and tidied.endswith("%") and unit is not None:
            value, grouped = parse_number(tidied[:-1], decimal)
            return _Reading(value * 0.01 / unit.factor, STATED, grouped)
        value, grouped = parse_number(cell, decimal, fraction=column.fraction)
    except CellError as error:
        return _Reading(origin=BAD, error=error)
    return _Reading(value, STATED, grouped)


def _report_wrong(
    parsed: ParsedTable, heading: Heading, wrong: dict[int, tuple[str, CellError]], text: TextColumn
) -> None:
    where = np.zeros(len(parsed), dtype=bool)
    where[list(wrong)] = True

    def allowed(index: int) -> str:
        stated = wrong[index][1].allowed
        return stated if stated != "a number" else allowed_text(heading.column, heading.unit)

    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        heading.text,
        where,
        got=lambda i: wrong[i][0] if i in text.odd else shown(wrong[i][0]),
        allowed=allowed,
        remedy=lambda i: remedy_for(wrong[i][1], heading.column.default, heading.column.assumed),
    )


def _report_grouped(parsed: ParsedTable, heading: Heading, grouped: list[int], text: TextColumn) -> None:
    where = np.zeros(len(parsed), dtype=bool)
    where[grouped] = True
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        heading.text,
        where,
        got=lambda i: f"{shown(text[i])}, read as {text[i].replace('.', '').replace(',', '')}",
        allowed="a number without thousands separator",
        remedy="Other cells of the table show which mark is the decimal one; check that this is meant.",
        severity=WARNING,
    )


def _check_bounds(parsed: ParsedTable, key: str, heading: Heading, unit: Unit) -> None:
    column, values = heading.column, parsed.number(key)
    stated = parsed.stated(key)
    low, high = column.minimum, column.maximum
    slack = 1e-12 * max(abs(low) if np.isfinite(low) else 0.0, abs(high) if np.isfinite(high) else 0.0)
    with np.errstate(invalid="ignore"):
        wrong = (values < low - slack) | (values > high + slack)
        if column.positive:
            wrong |= values <= 0.0
        if column.kind == "count":
            wrong |= values != np.rint(values)
    wrong &= stated
    wrong |= stated & ~np.isfinite(values)
    if not wrong.any():
        return

    def remedy(index: int) -> str:
        value = values[index]
        if column.kind == "ratio" and high == 1.0 and 1.0 < value <= 100.0 and unit.factor == 1.0:
            return f"If it is meant in percent, write the heading as '{column.name} [%]'."
        if column.kind == "count" and value != np.rint(value):
            return "Write a whole number."
        return "Check the value and the unit of the heading."

    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        heading.text,
        wrong,
        got=lambda i: parsed.shown_cell(key, i),
        allowed=lambda i: allowed_text(column, unit, float(values[i])),
        remedy=remedy,
    )
    values[wrong] = np.nan
    parsed.origins[key][wrong] = MISSING
    parsed.bad[key] |= wrong
