"""The errors a user of the package can meet, and the problem record that they carry."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

ERROR, WARNING, NOTE = "error", "warning", "note"


@dataclass(frozen=True)
class Problem:
    """One thing to tell the user about one place in the input.

    Attributes
    ----------
    table : str
        Name of the table as the user knows it, e.g. ``"motors"``; a file name where no table applies.
    row : int or None
        Row number as the user's spreadsheet shows it (the heading row is 1), or None for the whole table.
    column : str
        Heading or quantity concerned; empty for the whole row or table.
    got : str
        What was read, as the user typed it.
    allowed : str
        What is allowed there, with unit.
    remedy : str
        What to do.
    severity : str
        ``"error"`` stops the work, ``"warning"`` is a likely slip, ``"note"`` is worth knowing.
    """

    table: str
    row: int | None = None
    column: str = ""
    got: str = ""
    allowed: str = ""
    remedy: str = ""
    severity: str = ERROR

    def __str__(self) -> str:
        where = self.table
        if self.row is not None:
            where += f" row {self.row}"
        if self.column:
            where += f", '{self.column}'"
        parts = [f"got {self.got}"] if self.got else []
        if self.allowed:
            parts.append(f"expected {self.allowed}" if self.got else self.allowed)
        text = f"{where}: {', '.join(parts)}" if parts else where
        return f"{text}. {self.remedy}" if self.remedy else text


class ActuatorSizingError(Exception):
    """Base of every error that the package raises on purpose."""


class InputError(ActuatorSizingError, ValueError):
    """The input cannot be used; carries every problem found, not only the first."""

    def __init__(self, problems: Iterable[Problem]):
        self.problems: tuple[Problem, ...] = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class MotionError(ActuatorSizingError, ValueError):
    """A segment of the duty cycle cannot be planned; names the column at fault."""

    def __init__(self, column: str, got: str, allowed: str, remedy: str):
        self.column, self.got, self.allowed, self.remedy = column, got, allowed, remedy
        super().__init__(f"'{column}': got {got}, expected {allowed}. {remedy}")


class OutputError(ActuatorSizingError, OSError):
    """A result could not be written; what was there before is untouched."""


class StoppedError(ActuatorSizingError):
    """The user has stopped the work; the message says what is kept and how to go on."""
