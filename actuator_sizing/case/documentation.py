"""The page of every table, column, unit and word, written from the declarations."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from actuator_sizing.case.columns import TEXT, WORDS, YES_NO, Column, Table
from actuator_sizing.case.tables import COMMON_QUANTITIES, TABLES, mechanism_quantities
from actuator_sizing.core.mechanisms import MECHANISMS, Mechanism

_INTRODUCTION = """\
# Tables and columns of a case

A case is a folder with one CSV file per table, or one `.xlsx` workbook with one sheet per table; names and
columns are the same in both. The first row holds the headings: `name [unit]`, for instance
`rotor inertia [g·cm²]`. Any unit of the right kind is understood, see the list at the end. A column of
numbers without unit is an error, except plain ratios, counts and prices. Unknown columns are kept and
reported. Bounds below are in SI units.

CSV may use a comma or a semicolon between cells, a decimal point or a decimal comma, with or without a
byte-order mark. The catalog tables (motors, gearheads, drives) may live in a shared folder that the `axis`
table names as `catalog folder`.
"""


def column_facts(column: Column, coordinate: str = "rotary") -> list[str]:
    """Say what a column means and may hold, one fact per line.

    Parameters
    ----------
    column : Column
        The declaration.
    coordinate : str
        ``"linear"`` or ``"rotary"``: which of a pair of kinds holds.

    Returns
    -------
    list of str
        Help, allowed values, what is assumed when nothing is given.
    """
    facts = [_sentence(column.help), f"Allowed: {column.allowed(coordinate)}."]
    default = default_text(column, coordinate)
    if column.required:
        facts.append("Required.")
    elif default:
        facts.append(f"If not given: {default}.")
    return facts


def default_text(column: Column, coordinate: str = "rotary") -> str:
    """Name the value assumed where nothing is given, and why; empty if nothing is assumed."""
    if column.default is None:
        return column.assumed
    text = str(column.default)
    if isinstance(column.default, float):
        text = f"{column.default:g} {_si(column, coordinate)}".strip()
    if column.assumed.startswith(text):
        return column.assumed
    return f"{text} ({column.assumed})" if column.assumed else text


def columns_page(mechanism: type[Mechanism] | None = None) -> str:
    """Every table, column, unit spelling, bound and word as a Markdown page.

    Parameters
    ----------
    mechanism : type of Mechanism or None
        List the quantities of this mechanism only; None lists those of all.

    Returns
    -------
    str
        The page.
    """
    parts = [_INTRODUCTION]
    for table in TABLES.values():
        parts.append(
            f"## {table.name}\n\n{table.help}" + ("" if table.required else " The table is optional.")
        )
        parts.append(_column_table(table.columns))
        parts += _alternatives(table)
        if table.name == "axis":
            parts += _axis_section(mechanism)
    parts.append(_units_section())
    return "\n\n".join(part.strip("\n") for part in parts) + "\n"


def _axis_section(mechanism: type[Mechanism] | None) -> list[str]:
    parts = ["### Quantities of every axis", _column_table(COMMON_QUANTITIES)]
    for each in MECHANISMS.values() if mechanism is None else (mechanism,):
        parts.append(f"### Quantities of the mechanism `{each.name}`\n\n{_sentence(each.help)}")
        parts.append(_column_table(mechanism_quantities(each)))
    return parts


def _alternatives(table: Table) -> list[str]:
    lines = []
    for machine, names in table.one_of:
        which = f"A {machine} motor needs" if machine else "Every row needs"
        lines.append(f"- {which} at least one of: {', '.join(f'`{name}`' for name in names)}.")
    return ["\n".join(lines)] if lines else []


def _column_table(columns: Iterable[Column]) -> str:
    rows = [
        (
            f"`{column.name}`" + (" *" if column.required else ""),
            _units_of(column),
            _allowed(column),
            default_text(column),
            _help(column),
        )
        for column in columns
    ]
    return _markdown(("name (* required)", "unit, for instance", "allowed", "if not given", "meaning"), rows)


def _help(column: Column) -> str:
    text = _sentence(column.help)
    if column.machine:
        text += f" Only for a {column.machine} motor."
    if column.aliases:
        text += f" Also called: {', '.join(column.aliases)}."
    return text


def _units_of(column: Column) -> str:
    units = [column.unit] if isinstance(column.unit, str) else list(dict.fromkeys(column.unit))
    return " or ".join(unit for unit in units if unit)


def _allowed(column: Column) -> str:
    if column.kind in (TEXT, WORDS, YES_NO) or isinstance(column.kind, str):
        return column.allowed()
    return " or ".join(dict.fromkeys(column.allowed(side) for side in ("linear", "rotary")))


def _units_section() -> str:
    from actuator_sizing.units import KINDS

    rows = [(name, kind.si_unit, ", ".join(kind.examples)) for name, kind in KINDS.items()]
    return (
        "## Kinds of quantity and their units\n\n"
        "Prefixes (m, µ, k, M ...) and the usual ways to write a product or a power (`·`, `*`, `-`, `²`, "
        "`^2`, `2`) are understood.\n\n" + _markdown(("kind", "SI unit", "spellings, for instance"), rows)
    )


def _markdown(headings: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    lines = [_line(headings), _line(["---"] * len(headings))]
    lines += [_line([cell.replace("|", "\\|") for cell in row]) for row in rows]
    return "\n".join(lines)


def _line(cells: Sequence[str]) -> str:
    return f"| {' | '.join(cells)} |"


def _sentence(text: str) -> str:
    """Text that begins with a capital and ends with a point; names such as 'yes:' keep their look."""
    first = text[:1].upper() + text[1:]
    return first if first.endswith(".") else f"{first}."


def _si(column: Column, coordinate: str) -> str:
    from actuator_sizing.units import si_unit

    unit = si_unit(column.kind_for(coordinate))
    return "" if unit == "-" else unit
