"""What a column is: its kind of quantity, bounds, words and help, and how its heading is recognised."""

from __future__ import annotations

import difflib
import math
import re
import unicodedata
from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from actuator_sizing.units import Unit

TEXT, WORDS, YES_NO = "text", "words", "yes/no"
UNITLESS_KINDS = ("ratio", "count", "price")  # a heading of these kinds may leave the unit out

_SLIP_BOUND = 1.0e3  # SI; upper bounds from here on are far beyond anything built

_DASHES = dict.fromkeys(map(ord, "\u2010\u2011\u2012\u2013\u2014\u2015\u2212_-/"), " ")


def fold(name: str) -> str:
    """Spelling of a name with harmless variation removed: case, blanks, underscores, every kind of dash.

    Examples
    --------
    >>> fold("Back_EMF   constant") == fold("back-emf constant")
    True
    """
    text = unicodedata.normalize("NFKC", name).translate(_DASHES).casefold()
    return " ".join(text.split())


def key_of(name: str) -> str:
    """Key of a column: lower case, every other character an underscore.

    Examples
    --------
    >>> key_of("back-EMF constant")
    'back_emf_constant'
    """
    return re.sub(r"[^0-9a-z]+", "_", fold(name)).strip("_")


def nearest(name: str, names: Iterable[str]) -> str | None:
    """Known name that `name` was probably meant to be, or None if none is close.

    Examples
    --------
    >>> nearest("rotor inertai", ["mass", "rotor inertia"])
    'rotor inertia'
    """
    folded = {fold(known): known for known in names}
    close = difflib.get_close_matches(fold(name)[:80], list(folded), n=1, cutoff=0.72)
    return folded[close[0]] if close else None


@dataclass(frozen=True)
class Column:
    """One column of a table, or one quantity of the `axis` table: declared once, read by everything.

    Attributes
    ----------
    name : str
        Name as the user types it in the heading, e.g. ``"rotor inertia"``.
    kind : str or tuple of str
        Kind of quantity (a key of `units.KINDS`), or ``"text"``, ``"words"``, ``"yes/no"``. A pair of kinds
        is (linear, rotary): the mechanism, or the kind of machine in the row, says which holds.
    help : str
        One line for the template and the documentation.
    required : bool
        A value must be given in every row it is relevant to.
    default : float, str or None
        Value assumed where nothing is given, in SI.
    assumed : str
        Why, or where the default comes from, in words.
    words : tuple of str
        Allowed words of a ``"words"`` column.
    several : bool
        More than one word may be given, separated by comma, slash or semicolon.
    minimum, maximum : float
        Allowed range in SI, inclusive.
    positive : bool
        Zero is not allowed either.
    fraction : bool
        An exact fraction such as ``91/6`` is understood too.
    machine : str
        ``"linear"`` or ``"rotary"`` where the column belongs to one kind of machine only.
    example, unit : str or pair of str
        Filled-in example as a user types it and the unit of its heading; a pair is (linear, rotary).
    aliases : tuple of str
        Other names that mean exactly the same.
    """

    name: str
    kind: str | tuple[str, str]
    help: str
    required: bool = False
    default: float | str | None = None
    assumed: str = ""
    words: tuple[str, ...] = ()
    several: bool = False
    minimum: float = -math.inf
    maximum: float = math.inf
    positive: bool = False
    fraction: bool = False
    machine: str = ""
    example: str | tuple[str, str] = ""
    unit: str | tuple[str, str] = ""
    aliases: tuple[str, ...] = ()

    @property
    def key(self) -> str:
        """Key in `Catalog.values`: the name with underscores."""
        return key_of(self.name)

    @property
    def is_number(self) -> bool:
        """Whether cells of this column are numbers with a kind of quantity."""
        return self.kind not in (TEXT, WORDS, YES_NO)

    @property
    def needs_unit(self) -> bool:
        """Whether a heading without unit is an error."""
        return self.is_number and self.kind not in UNITLESS_KINDS

    def kind_for(self, coordinate: str) -> str:
        """Kind of quantity for a ``"linear"`` or ``"rotary"`` axis or machine."""
        return _side(self.kind, coordinate)

    def example_for(self, coordinate: str) -> str:
        """Return the example cell for a ``"linear"`` or ``"rotary"`` axis or machine."""
        return _side(self.example, coordinate)

    def unit_for(self, coordinate: str) -> str:
        """Return the unit of the example for a ``"linear"`` or ``"rotary"`` axis or machine."""
        return _side(self.unit, coordinate)

    def heading_for(self, coordinate: str = "rotary") -> str:
        """Heading of the template, e.g. ``rotor inertia [kg·cm²]``."""
        unit = self.unit_for(coordinate)
        return f"{self.name} [{unit}]" if unit else self.name

    def allowed(self, coordinate: str = "rotary") -> str:
        """Say what a cell may hold, in words and SI units, e.g. ``a number > 0 (N·m)``."""
        if self.kind == YES_NO:
            return "yes or no"
        if self.kind == WORDS:
            listed = ", ".join(self.words)
            return f"one or more of: {listed}" if self.several else f"one of: {listed}"
        if self.kind == TEXT:
            return "text"
        from actuator_sizing.units import Unit, si_unit

        kind = self.kind_for(coordinate)
        label = si_unit(kind)
        return allowed_text(self, Unit(kind, 1.0, 0.0, "" if label == "-" else label))


def allowed_text(column: Column, unit: Unit | None, value_si: float = 0.0) -> str:
    """Say what a number cell may hold, bounds in the unit of the heading; just a number without a unit.

    A very large upper bound only catches slips of the unit; it is named where `value_si` is above it.
    """
    if unit is None:
        return "a number"

    def bound(value: float) -> str:
        plain = abs(value) < _SLIP_BOUND or column.kind == "count" or value_si > value
        if not math.isfinite(value) or not plain:
            return ""
        return f"{(value - unit.offset) / unit.factor:.6g} {unit.spelling}".rstrip()

    low, high = bound(column.minimum), bound(column.maximum)
    number = "a whole number" if column.kind == "count" else "a number"
    if column.positive:
        return f"{number} > 0 and ≤ {high}" if high else f"{number} > 0"
    if low and high:
        return f"{number} from {low} to {high}"
    if low or high:
        return f"{number} ≥ {low}" if low else f"{number} ≤ {high}"
    return number


def _side(value: str | tuple[str, str], coordinate: str) -> str:
    if isinstance(value, str):
        return value
    return value[0] if coordinate == "linear" else value[1]


@dataclass(frozen=True)
class Table:
    """One table of a case.

    Attributes
    ----------
    name : str
        Name of the sheet or of the file without ending.
    help : str
        What one row is and what the table holds.
    columns : tuple of Column
        Every known column; the first one names the row.
    required : bool
        A case without this table cannot be sized.
    is_catalog : bool
        The table may live in the shared catalog folder.
    one_of : tuple of tuple of str
        Groups of column names of which a row must fill at least one; with the machine they belong to first.
    repeats_names : bool
        Several rows may bear one name.
    in_template : bool
        A new case holds it; other tables are added where they are needed.
    """

    name: str
    help: str
    columns: tuple[Column, ...]
    required: bool = False
    is_catalog: bool = False
    one_of: tuple[tuple[str, tuple[str, ...]], ...] = ()
    repeats_names: bool = False
    in_template: bool = True

    def column(self, name: str) -> Column:
        """Find a declared column by name or key.

        Raises
        ------
        KeyError
            If the table declares no such column.
        """
        found = self.find(name)
        if found is None:
            raise KeyError(name)
        return found

    def find(self, name: str) -> Column | None:
        """Column that a heading names, harmless spelling variants accepted; None if it is unknown."""
        return find(name, self.columns)

    def nearest(self, name: str) -> str | None:
        """Known column name that an unknown heading was probably meant to be."""
        return nearest(name, (column.name for column in self.columns))


def find(name: str, columns: Iterable[Column]) -> Column | None:
    """Column among `columns` that `name` means, harmless spelling variants accepted."""
    folded = fold(name)
    for column in columns:
        if folded == fold(column.name) or any(folded == fold(alias) for alias in column.aliases):
            return column
    return None
