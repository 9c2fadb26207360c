"""A table as it stands in the file: headings and text, nothing understood yet."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.text_columns import BLOCK_ROWS, OddCell, TextColumn

MAX_ROWS = 1_048_576  # the row limit of spreadsheets
MAX_COLUMNS = 400


@dataclass(frozen=True)
class RawTable:
    """Headings and raw text of one table.

    Attributes
    ----------
    name : str
        Table name, e.g. ``"motors"``.
    place : str
        File, or workbook and sheet, that the table was read from.
    headings : tuple of str
        Headings as typed; empty where a column has none.
    rows : ndarray of int, shape (n,)
        Row number of each data row as a spreadsheet shows it. [-]
    columns : tuple of TextColumn
        One column per heading, n cells each.
    decimal : str
        Decimal mark that the table proves: ``"."``, ``","``, or ``""`` where nothing shows it.
    """

    name: str
    place: str
    headings: tuple[str, ...]
    rows: NDArray[np.int64]
    columns: tuple[TextColumn, ...]
    decimal: str = ""

    def __len__(self) -> int:
        return len(self.rows)

    def records(self) -> Iterator[tuple[int, list[str]]]:
        """Spreadsheet row number and cells of every data row."""
        for row, *cells in zip(self.rows.tolist(), *self.columns, strict=True):
            yield row, cells


@dataclass
class TableBuilder:
    """Takes rows one by one and packs them; rows without any text are left out."""

    headings: Sequence[str]
    _numbers: list[int] = field(default_factory=list)
    _buffer: list[Sequence[str]] = field(default_factory=list)
    _columns: list[TextColumn] = field(default_factory=list)
    _odd: list[tuple[int, int, OddCell]] = field(default_factory=list)

    def __post_init__(self) -> None:
        self._columns = [TextColumn() for _ in self.headings]

    def add(self, number: int, cells: Sequence[str]) -> None:
        """Take one row; it has exactly one cell per heading."""
        self._numbers.append(number)
        self._buffer.append(cells)
        if len(self._buffer) == BLOCK_ROWS:
            self._pack()

    def mark_odd(self, column: int, cell: OddCell) -> None:
        """Remember an odd cell of the row that was added last."""
        self._odd.append((len(self._numbers) - 1, column, cell))

    def _pack(self) -> None:
        for column, cells in zip(self._columns, zip(*self._buffer, strict=True), strict=True):
            column.append_block(cells)
        self._buffer = []

    def finish(self, name: str, place: str, decimal: str) -> RawTable:
        """Give the table."""
        if self._buffer:
            self._pack()
        for row, column, cell in self._odd:
            self._columns[column].mark_odd(row, cell)
        numbers = np.array(self._numbers, dtype=np.int64)
        return RawTable(name, place, tuple(self.headings), numbers, tuple(self._columns), decimal)
