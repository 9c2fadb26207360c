"""From a parsed catalog table to the frozen `Catalog`, and what every catalog table shares."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.columns import Column
from actuator_sizing.case.model import MISSING, STATED, Catalog
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.parsing import report_empty_cells, report_missing_column
from actuator_sizing.errors import NOTE, WARNING

BoolArray = NDArray[np.bool_]


def check_required(parsed: ParsedTable, relevant: dict[str, BoolArray] | None = None) -> None:
    """Report empty cells of required columns; a column of one kind of machine only where it matters.

    Parameters
    ----------
    parsed : ParsedTable
        Table to check.
    relevant : dict of str to ndarray of bool, optional
        Rows of ``"linear"`` and of ``"rotary"`` machines.
    """
    for column in parsed.table.columns:
        if not column.required:
            continue
        rows = relevant[column.machine] if relevant and column.machine else None
        if rows is not None and rows.any() and column.key not in parsed.headings:
            report_missing_column(parsed, column, parsed.problems)
        report_empty_cells(parsed, column, rows)


def check_one_of(parsed: ParsedTable, relevant: dict[str, BoolArray]) -> None:
    """Report rows that state none of the columns of a group of which one is needed."""
    for machine, group in parsed.table.one_of:
        columns = [parsed.table.column(name) for name in group]
        known = np.zeros(len(parsed), dtype=bool)
        for column in columns:
            known |= parsed.stated(column.key) | parsed.is_bad(column.key)
        present = [column for column in columns if column.key in parsed.headings]
        missing = relevant[machine] & ~known
        if not missing.any():
            continue
        listed = " or ".join(group)
        if not present:
            misspelt = [parsed.headings[key] for key in parsed.unknown
                        if parsed.table.nearest(parsed.headings[key].partition("[")[0]) in group]  # fmt: skip
            hint = f"Is the column '{misspelt[0]}' meant? " if misspelt else ""
            parsed.problems.report(parsed.table.name, None, columns[0].name, got="no such column",
                                   allowed=f"a column {listed}",
                                   remedy=f"{hint}Add one of these columns.")  # fmt: skip
            continue
        parsed.problems.report_rows(
            parsed.table.name, parsed.rows, parsed.headings[present[0].key], missing, got="an empty cell",
            allowed=f"a value for {listed}",
            remedy="Fill in one of them; ask the supplier where the data sheet states none.",
        )  # fmt: skip


def check_order(parsed: ParsedTable, small: str, large: str, *, strict: bool = False, remedy: str) -> None:
    """Report rows in which the value of `small` is above that of `large`."""
    with np.errstate(invalid="ignore"):
        low, high = parsed.number(small), parsed.number(large)
        wrong = low >= high if strict else low > high * (1.0 + 1e-9)
    wrong &= parsed.stated(small) & parsed.stated(large)
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        parsed.heading(large),
        wrong,
        got=lambda i: parsed.shown_cell(large, i),
        allowed=lambda i: (
            f"{'above' if strict else 'at least'} the {parsed.table.column(small).name} of "
            f"{parsed.shown_cell(small, i)}"
        ),
        remedy=remedy,
    )


def assume_default(parsed: ParsedTable, key: str) -> None:
    """Put the declared default where nothing is stated."""
    column: Column = parsed.table.column(key)
    if isinstance(column.default, float):
        parsed.assume(key, np.ones(len(parsed), dtype=bool), column.default, column.assumed)


def note_rows(
    parsed: ParsedTable, key: str, where: BoolArray, text: str, *, severity: str = NOTE, remedy: str = ""
) -> None:
    """Report once for a whole column, at its first row, how cells were understood.

    The message is the cell followed by `text`.
    """
    count = int(np.count_nonzero(where))
    if count:
        first = int(np.flatnonzero(where)[0])
        more = f" (so in {count} rows)" if count > 1 else ""
        parsed.problems.report(
            parsed.table.name,
            int(parsed.rows[first]),
            parsed.heading(key),
            got=f"{parsed.shown_cell(key, first)}, {text}{more}",
            remedy=remedy,
            severity=severity,
        )


def warn_rows(parsed: ParsedTable, key: str, where: BoolArray, text: str, remedy: str) -> None:
    """Report a likely slip, once for a whole column."""
    note_rows(parsed, key, where, text, severity=WARNING, remedy=remedy)


def to_catalog(parsed: ParsedTable) -> Catalog:
    """Freeze a parsed catalog table; every declared column is there, also where the file has none."""
    for column in parsed.table.columns:
        if column.is_number:
            parsed.number(column.key)
        else:
            parsed.text(column.key)
    values = dict(parsed.values)
    origins = dict(parsed.origins)
    for key in parsed.unknown:
        cells = np.array([cell.strip() for cell in parsed.texts[key]], dtype=object)
        values[key] = cells
        origins[key] = np.where(cells == "", MISSING, STATED).astype(np.int8)
    for array in (*values.values(), *origins.values()):
        array.flags.writeable = False
    return Catalog(
        table=parsed.table.name,
        names=parsed.names,
        rows=parsed.rows,
        values=values,
        origins=origins,
        headings=dict(parsed.headings),
        as_entered=dict(parsed.texts),
        rules=dict(parsed.rules),
        entered_units={key: unit.spelling for key, unit in parsed.units.items()},
    )
