"""Collects problems while reading; keeps a sensible number per column and says how many more there are."""

from __future__ import annotations

from collections.abc import Callable, Iterable

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.errors import ERROR, NOTE, WARNING, Problem

KEPT_PER_COLUMN = 20  # of one severity; a fault of export repeats in every row
LONGEST_SHOWN = 60  # characters of a cell shown in a message
_ORDER = {ERROR: 0, WARNING: 1, NOTE: 2}


def shown(text: object) -> str:
    """Text of a cell for a message: quoted, cut when long, control characters escaped.

    Examples
    --------
    >>> shown("abc")
    "'abc'"
    """
    plain = str(text)
    if len(plain) > LONGEST_SHOWN:
        return f"{plain[:LONGEST_SHOWN]!r}… ({len(plain)} characters)"
    return repr(plain)


class ProblemList:
    """Every problem found so far, in the order of finding."""

    def __init__(self) -> None:
        self._kept: list[Problem] = []
        self._counts: dict[tuple[str, str, str], int] = {}

    def add(self, problem: Problem) -> None:
        """Take one problem in; beyond `KEPT_PER_COLUMN` for a column it is only counted."""
        place = (problem.table, problem.column, problem.severity)
        self._counts[place] = self._counts.get(place, 0) + 1
        if self._counts[place] <= KEPT_PER_COLUMN:
            self._kept.append(problem)

    def report(
        self,
        table: str,
        row: int | None = None,
        column: str = "",
        *,
        got: str = "",
        allowed: str = "",
        remedy: str = "",
        severity: str = ERROR,
    ) -> None:
        """Take in one problem by its parts."""
        self.add(Problem(table, row, column, got, allowed, remedy, severity))

    def report_rows(
        self,
        table: str,
        rows: NDArray[np.int64],
        column: str,
        where: NDArray[np.bool_],
        *,
        got: Callable[[int], str] | str = "",
        allowed: Callable[[int], str] | str = "",
        remedy: Callable[[int], str] | str = "",
        severity: str = ERROR,
    ) -> None:
        """Take in one problem for each row index where `where` is true; texts may depend on the index."""
        indices = np.flatnonzero(where)
        for index in indices[:KEPT_PER_COLUMN].tolist():
            self.report(
                table,
                int(rows[index]),
                column,
                got=got(index) if callable(got) else got,
                allowed=allowed(index) if callable(allowed) else allowed,
                remedy=remedy(index) if callable(remedy) else remedy,
                severity=severity,
            )
        place = (table, column, severity)
        more = max(len(indices) - KEPT_PER_COLUMN, 0)
        if more:
            self._counts[place] = self._counts.get(place, 0) + more

    def extend(self, problems: Iterable[Problem]) -> None:
        """Take in several problems."""
        for problem in problems:
            self.add(problem)

    @property
    def has_errors(self) -> bool:
        """Whether the work cannot go on."""
        return any(severity == ERROR for _, _, severity in self._counts)

    def mentions(self, table: str) -> bool:
        """Whether an error about this table, or the file that should hold it, is already known."""
        return any(
            severity == ERROR and (name == table or name.rpartition(".")[0] == table)
            for name, _, severity in self._counts
        )

    def finished(self) -> tuple[Problem, ...]:
        """All problems, errors first, with a count of those that were left out."""
        more = [
            Problem(
                table,
                None,
                column,
                got=f"{count - KEPT_PER_COLUMN} more rows with a problem",
                remedy="Only the first ones are listed; mend those and read again.",
                severity=severity,
            )
            for (table, column, severity), count in self._counts.items()
            if count > KEPT_PER_COLUMN
        ]
        seen = list(dict.fromkeys(table for table, _, _ in self._counts))

        def order(problem: Problem) -> tuple[int, int, bool, int]:
            counted = problem.row is None and problem in more
            return _ORDER[problem.severity], seen.index(problem.table), counted, problem.row or 0

        return tuple(sorted((*self._kept, *more), key=order))
