"""A table in columns of SI numbers and words, every cell judged on its own; one row against another later."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.columns import Table
from actuator_sizing.case.model import ASSUMED, DERIVED, STATED
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.text_columns import RowRules, TextColumn
from actuator_sizing.units import Unit

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
BAD = 9  # origin code while reading: the cell is wrong and was reported


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
        return np.asarray(self.origins[key] == STATED, dtype=bool)

    def is_bad(self, key: str) -> BoolArray:
        """Rows in which the cell was reported as wrong."""
        return self.bad.get(key, np.zeros(len(self), dtype=bool))

    def word_is(self, key: str, word: str) -> BoolArray:
        """Rows in which a words column holds `word`."""
        return np.asarray(self.text(key) == word, dtype=bool)

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
