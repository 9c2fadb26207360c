"""A table in columns of SI numbers and words, every cell judged on its own; one row against another later."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.cells import CellError, is_missing, parse_number, tidy
from actuator_sizing.case.columns import TEXT, YES_NO, Column, Table, fold, nearest
from actuator_sizing.case.headings import Heading, understand_headings
from actuator_sizing.case.model import ASSUMED, DERIVED, MISSING, STATED
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.text_columns import OddCell, RowRules, TextColumn
from actuator_sizing.case.words import canonical_word, canonical_words
from actuator_sizing.errors import WARNING
from actuator_sizing.units import Unit, from_si

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
_BAD = 9  # origin code while reading: the cell is wrong and was reported
LONGEST_NAME = 200


@dataclass
class ParsedTable:
    """Columns of one table while it is being understood.

    `values[key]` is SI float (NaN where missing or wrong) or an object array of str; `origins[key]` is
    MISSING, STATED, DERIVED or ASSUMED per row; `bad[key]` marks cells that were reported as wrong.
    """

    table: Table
    rows: NDArray[np.int64]
    problems: ProblemList
    names: tuple[str, ...] = ()
    values: dict[str, NDArray[np.float64] | NDArray[np.object_]] = field(default_factory=dict)
    origins: dict[str, NDArray[np.int8]] = field(default_factory=dict)
    bad: dict[str, BoolArray] = field(default_factory=dict)
    rules: dict[str, RowRules] = field(default_factory=dict)
    headings: dict[str, str] = field(default_factory=dict)
    units: dict[str, Unit] = field(default_factory=dict)
    texts: dict[str, TextColumn] = field(default_factory=dict)
    unknown: tuple[str, ...] = ()

    def __len__(self) -> int:
        return len(self.rows)

    def number(self, key: str) -> FloatArray:
        """SI values of a number column, NaN where nothing is known."""
        if key not in self.values:
            self._absent(key, np.full(len(self), np.nan))
        return self.values[key]  # type: ignore[return-value]

    def text(self, key: str) -> NDArray[np.object_]:
        """Text or words of a column, empty where nothing is stated."""
        if key not in self.values:
            empty = np.full(len(self), "", dtype=object)
            self._absent(key, empty)
        return self.values[key]  # type: ignore[return-value]

    def _absent(self, key: str, values: NDArray[np.float64] | NDArray[np.object_]) -> None:
        self.values[key] = values
        self.origins[key] = np.zeros(len(self), dtype=np.int8)
        self.bad[key] = np.zeros(len(self), dtype=bool)

    def stated(self, key: str) -> BoolArray:
        """Rows in which the sheet states the value."""
        if key not in self.origins:
            return np.zeros(len(self), dtype=bool)
        return self.origins[key] == STATED

    def is_bad(self, key: str) -> BoolArray:
        """Rows in which the cell was reported as wrong."""
        return self.bad.get(key, np.zeros(len(self), dtype=bool))

    def word_is(self, key: str, word: str) -> BoolArray:
        """Rows in which a words column holds `word`."""
        return np.asarray(self.text(key) == word)

    def fill(self, key: str, where: BoolArray, values: FloatArray | float, origin: int, rule: str) -> None:
        """Put derived or assumed numbers where nothing is known yet; wrong cells stay unknown."""
        column = self.number(key)
        take = where & np.isnan(column) & ~self.bad[key]
        fitting = np.broadcast_to(np.asarray(values, dtype=float), column.shape)
        take &= np.isfinite(fitting)
        if take.any():
            column[take] = fitting[take]
            self.origins[key][take] = origin
            self.note_rule(key, take, rule)

    def derive(self, key: str, where: BoolArray, values: FloatArray | float, rule: str) -> None:
        """Fill values that follow from others."""
        self.fill(key, where, values, DERIVED, rule)

    def assume(self, key: str, where: BoolArray, values: FloatArray | float, rule: str) -> None:
        """Fill values that nobody stated."""
        self.fill(key, where, values, ASSUMED, rule)

    def note_rule(self, key: str, where: BoolArray, rule: str) -> None:
        """Keep the rule in words for some rows."""
        self.rules.setdefault(key, RowRules(len(self))).set(where, rule)

    def shown_cell(self, key: str, row: int) -> str:
        """Cell as typed with the unit of its heading, for a message."""
        if key not in self.texts:
            return ""
        unit = self.units[key].spelling if key in self.units else ""
        return f"{self.texts[key][row]} {unit}".strip()

    def heading(self, key: str) -> str:
        """Heading as typed, or the declared name where the column is absent."""
        return self.headings.get(key, self.table.column(key).name)


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
            _parse_numbers(parsed, key, heading, raw, broken=key in headings.broken)
        else:
            _parse_text(parsed, key, heading)
    for key, index in headings.unknown.items():
        parsed.headings[key], parsed.texts[key] = raw.headings[index], raw.columns[index]
    _take_names(parsed)
    _report_absent(parsed, problems)
    if len(raw) == 0:
        problems.report(raw.name, None, got="no rows below the headings", allowed="at least one row",
                        remedy="Fill in the table.")  # fmt: skip
    return parsed


# -- numbers ------------------------------------------------------------------------------------------------


def _parse_numbers(parsed: ParsedTable, key: str, heading: Heading, raw: RawTable, *, broken: bool) -> None:
    column, unit = heading.column, heading.unit
    values = np.empty(len(parsed))
    origins = np.full(len(parsed), STATED, dtype=np.int8)
    text = parsed.texts[key]
    grouped: list[int] = []
    for start, cells in text.blocks():
        fast = _fast_numbers(cells, raw.decimal)
        stop = start + len(cells)
        if fast is not None:
            values[start:stop] = fast
            origins[start:stop][np.isnan(fast)] = MISSING
            continue
        for index, plain in enumerate(cells, start=start):
            cell = text.odd.get(index, plain)
            try:
                values[index], origins[index], lone = _slow_number(cell, column, unit, raw.decimal)
                if lone:
                    grouped.append(index)
            except CellError as error:
                _report_cell(parsed, heading, index, cell, error)
                values[index], origins[index] = np.nan, _BAD
    for index, cell in text.odd.items():
        if origins[index] != _BAD:
            error = CellError(cell.remedy, allowed=f"a number, not {cell.fault}")
            _report_cell(parsed, heading, index, cell, error)
            values[index], origins[index] = np.nan, _BAD
    _report_grouped(parsed, heading, grouped, text)
    if unit is not None:
        values = values * unit.factor + unit.offset
    if broken or unit is None:
        values[:], origins[origins == STATED] = np.nan, _BAD
    parsed.values[key] = values
    parsed.bad[key] = origins == _BAD
    origins[origins == _BAD] = MISSING
    parsed.origins[key] = origins
    if unit is not None and not broken:
        _check_bounds(parsed, key, heading, unit)


def _fast_numbers(cells: list[str], decimal: str) -> FloatArray | None:
    """Numbers of a clean block (plain numbers and empty cells only); None where a cell needs a closer look."""
    joined = "\n".join(cells)
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


def _slow_number(cell: str, column: Column, unit: Unit | None, decimal: str) -> tuple[float, int, bool]:
    """One cell: number in the unit of the heading, origin code, whether a lone separator was resolved."""
    if is_missing(cell) or is_missing(tidy(cell)):
        return np.nan, MISSING, False
    stripped = tidy(cell)
    if column.kind == "ratio" and stripped.endswith("%") and unit is not None:
        value, grouped = parse_number(stripped[:-1], decimal)
        return value * 0.01 / unit.factor, STATED, grouped
    value, grouped = parse_number(cell, decimal, fraction=column.fraction)
    return value, STATED, grouped


def _report_cell(parsed: ParsedTable, heading: Heading, index: int, cell: str, error: CellError) -> None:
    got = cell.fault if isinstance(cell, OddCell) else shown(cell)
    parsed.problems.report(
        parsed.table.name,
        int(parsed.rows[index]),
        heading.text,
        got=got,
        allowed=error.allowed if error.allowed != "a number" else allowed_text(heading.column, heading.unit),
        remedy=error.remedy,
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


def allowed_text(column: Column, unit: Unit | None) -> str:
    """Say what a number cell may hold, bounds in the unit of the heading."""
    if unit is None:
        return "a number"
    label = f" {unit.spelling}" if unit.spelling else ""
    low = f"{from_si(column.minimum, unit):.6g}{label}" if np.isfinite(column.minimum) else ""
    high = f"{from_si(column.maximum, unit):.6g}{label}" if np.isfinite(column.maximum) else ""
    if column.positive:
        return f"a number > 0 and ≤ {high}" if high else "a number > 0"
    if low and high:
        return f"a number from {low} to {high}"
    if low or high:
        return f"a number ≥ {low}" if low else f"a number ≤ {high}"
    return "a number"


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

    whole = "a whole number, " if column.kind == "count" else ""
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        heading.text,
        wrong,
        got=lambda i: parsed.shown_cell(key, i),
        allowed=whole + allowed_text(column, unit),
        remedy=remedy,
    )
    values[wrong] = np.nan
    parsed.origins[key][wrong] = MISSING
    parsed.bad[key] |= wrong


# -- words and text -----------------------------------------------------------------------------------------


def _parse_text(parsed: ParsedTable, key: str, heading: Heading) -> None:
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
                values[index], origins[index] = "", _BAD
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
        if origins[index] != _BAD:
            parsed.problems.report(
                parsed.table.name,
                int(parsed.rows[index]),
                heading.text,
                got=odd.fault,
                allowed=column.allowed(),
                remedy=odd.remedy.replace("number", "text"),
            )
            values[index], origins[index] = "", _BAD
    parsed.values[key] = values
    parsed.bad[key] = origins == _BAD
    origins[origins == _BAD] = MISSING
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


def _take_names(parsed: ParsedTable) -> None:
    """Names of the rows: there must be one, short enough to print, and no two alike."""
    first = parsed.table.columns[0]
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


# -- what is not there --------------------------------------------------------------------------------------


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
        remedy="Fill in the value; ask the supplier where the data sheet does not state it.",
    )


def _empty(parsed: ParsedTable, key: str, index: int) -> str:
    text = parsed.texts[key][index].strip()
    return f"{shown(text)}, which means not known" if text else "an empty cell"
