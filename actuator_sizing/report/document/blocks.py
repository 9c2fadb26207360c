"""What a report is made of, in any format: sections of paragraphs, tables, figures and lines to sign.

Every text is final: rounded, with unit, cleaned. A renderer only decides how it looks.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Paragraph:
    """Running text; `tone` is ``"plain"``, ``"lead"`` or ``"note"``."""

    text: str
    tone: str = "plain"
    kind: str = "paragraph"


@dataclass(frozen=True)
class Bullets:
    """A list."""

    items: tuple[str, ...]
    kind: str = "bullets"


@dataclass(frozen=True)
class Facts:
    """Names with their values, two columns."""

    rows: tuple[tuple[str, str], ...]
    caption: str = ""
    kind: str = "facts"


@dataclass(frozen=True)
class Cell:
    """One cell of a table.

    Attributes
    ----------
    text : str
        What it says.
    note : str
        Small print under it.
    verdict : str
        Verdict that colours the cell, empty for none; the text says it too.
    share : float or None
        Length of a bar beside the text; 1 is what is allowed. [-]
    """

    text: str
    note: str = ""
    verdict: str = ""
    share: float | None = None


@dataclass(frozen=True)
class Column:
    """Heading of a column; `weight` is its part of the width against the other columns."""

    title: str
    numeric: bool = False
    weight: float = 1.0


@dataclass(frozen=True)
class Table:
    """A table whose first column names the row."""

    caption: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[Cell, ...], ...]
    kind: str = "table"


@dataclass(frozen=True)
class Working:
    """How one number came about, for a reader with a calculator."""

    title: str
    lines: tuple[str, ...]
    facts: tuple[tuple[str, str], ...]
    kind: str = "working"


@dataclass(frozen=True)
class FigureBlock:
    """A figure by the key of its drawing, with caption and a text for those who cannot see it."""

    key: str
    caption: str
    alt: str
    kind: str = "figure"


@dataclass(frozen=True)
class SignOff:
    """Lines to sign."""

    roles: tuple[tuple[str, str], ...]  # (role, name if known)
    kind: str = "sign_off"


Block = Paragraph | Bullets | Facts | Table | Working | FigureBlock | SignOff


@dataclass(frozen=True)
class Section:
    """A heading with what stands under it."""

    key: str
    title: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True)
class Document:
    """The whole report."""

    title: str
    subtitle: str
    cover: tuple[tuple[str, str], ...]
    verdict: str
    verdict_state: str  # "passes", "passes, low reserve", "not checked" or "fails"
    sections: tuple[Section, ...]
    running_title: str
    footer: str
    date: str


def row(*cells: str | Cell) -> tuple[Cell, ...]:
    """Make a row of cells from texts and cells."""
    return tuple(cell if isinstance(cell, Cell) else Cell(cell) for cell in cells)
