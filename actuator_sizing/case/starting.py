"""Start a new case: every table with headings, units, hints and example rows that size to a result."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

from actuator_sizing.case.check_names import (
    ADVICE_CHECKS,
    ALLOWED_UTILISATIONS,
    CHECK_NAMES,
    DEFAULT_ALLOWED_UTILISATION,
    DEFAULT_RECOMMENDED_RESERVE,
    RECOMMENDED_RESERVES,
)
from actuator_sizing.case.columns import Column, Table, nearest
from actuator_sizing.case.cycle_columns import DUTY_TYPES
from actuator_sizing.case.documentation import columns_page
from actuator_sizing.case.duty_types import ALL_TIMES, SEVERAL_LOADS, USED_TIMES
from actuator_sizing.case.sheets import Sheet, is_workbook
from actuator_sizing.case.tables import (
    TABLES,
    axis_quantities,
    table_for,
)
from actuator_sizing.case.writing import write_sheets
from actuator_sizing.core.mechanisms import MECHANISMS, Mechanism
from actuator_sizing.errors import InputError, Problem

DEFAULT_MECHANISM = "ball screw"

# The example motor is the same for every mechanism, so some loads and moves are fitted to it: the examples
# of a new case size to a set that passes.
_EXAMPLES: dict[str, dict[str, str]] = {
    "rotary load": {"load inertia": "0.8"},
    "ball screw": {"lead": "20"},
    "lead screw": {"displacement": "0.1", "duration": "1"},
    "linear motor": {"inclination": "0"},
    "winch": {"moving mass": "10", "counterweight mass": "", "payload": "2", "duration": "1"},
    "conveyor": {"inclination": "0"},
    "wheel drive": {"inclination": "0", "duration": "1.5"},
    "gantry": {"inclination": "0"},
    "arm": {"load inertia": "0.06", "arm mass": "2", "arm mass radius": "120", "payload": "0.2"},
    "unbalanced table": {"load inertia": "0.5"},
    "crank-slider": {"inclination": "0", "displacement": "360", "payload": "0"},
    "Scotch yoke": {"inclination": "0", "displacement": "360", "payload": "0"},
    "toggle lever": {"inclination": "0", "displacement": "60", "payload": "0"},
    "eccentric": {"inclination": "0", "displacement": "360", "payload": "0", "moving mass": "2"},
    "four-bar": {"displacement": "360", "load inertia": "0.2"},
    "tabulated slider": {"inclination": "0", "displacement": "360", "payload": "0"},
    "tabulated lever": {"displacement": "360", "load inertia": "0.2"},
    "fan": {"displacement": "3600", "duration": "10", "payload": "0"},
    "displacement pump": {"displacement": "3600", "duration": "10", "payload": "0"},
    "winder": {"payload": "0", "displacement": "0.5", "duration": "1"},
    "unwinder": {"payload": "0", "displacement": "0.5", "duration": "1"},
}

_NEVER_TURNS_ON = ("toggle lever",)  # between dead centres: no duty type runs on it

# One turn of a plain cam: dwell, lift, dwell, return.
_MAP_ROWS = (("0", "0"), ("45", "0"), ("90", "5"), ("135", "15"), ("180", "20"), ("225", "20"), ("270", "15"),
             ("315", "5"), ("360", "0"))  # fmt: skip


def start_case(
    path: str | Path, mechanism: str = DEFAULT_MECHANISM, *, duty_type: str = ""
) -> tuple[Path, ...]:
    """Write a new case with example rows to fill in.

    Parameters
    ----------
    path : str or Path
        A folder, or a workbook if it ends in ``.xlsx``; nothing of that name may exist, except an
        empty folder.
    mechanism : str
        Word of a mechanism, e.g. ``"ball screw"``.
    duty_type : str
        Duty type of IEC 60034-1, e.g. ``"S3"``, whose table takes the place of the duty cycle; empty: none.

    Returns
    -------
    tuple of Path
        The files written.

    Raises
    ------
    InputError
        If something of that name exists, or the mechanism or duty type is not known.
    OutputError
        If a file cannot be written.
    """
    path = Path(path)
    chosen = _mechanism(mechanism)
    if duty_type:
        _check_word("duty_types", "duty type", duty_type, DUTY_TYPES)
        _check_word(
            "axis", "mechanism", mechanism, [name for name in MECHANISMS if name not in _NEVER_TURNS_ON]
        )
    workbook = is_workbook(path)
    if path.exists() and (workbook or not path.is_dir() or any(path.iterdir())):
        raise InputError(
            [
                Problem(
                    str(path),
                    got="a path where something exists already",
                    allowed="a new name or an empty folder",
                    remedy="Choose another name; nothing was changed.",
                )
            ]
        )
    extras = {} if workbook else {"columns.md": columns_page(chosen).encode()}
    return write_sheets(path, example_sheets(chosen, duty_type), extras)


def _mechanism(word: str) -> type[Mechanism]:
    _check_word("axis", "mechanism", word, MECHANISMS)
    return MECHANISMS[word]


def _check_word(table: str, column: str, word: str, known: Iterable[str]) -> None:
    """Refuse a word that is not among the known ones, with the nearest of them."""
    if word in known:
        return
    near = nearest(word, known)
    raise InputError(
        [
            Problem(
                table,
                column=column,
                got=f"'{word}'",
                allowed=f"one of: {', '.join(known)}",
                remedy=f"Did you mean '{near}'?" if near else "Choose one of them.",
            )
        ]
    )


def example_sheets(mechanism: type[Mechanism], duty_type: str = "") -> tuple[Sheet, ...]:
    """Every table of a new case, from the declarations of its columns."""
    left_out = {name for name, table in TABLES.items() if not table.in_template}
    if duty_type:
        left_out = left_out - {"duty_types"} | {"duty_cycle"}
    if not mechanism.needs_map:
        left_out.add("map")
    if mechanism.drives_linear_motor:  # it has no gearhead, and nothing turns
        left_out |= {"gearheads", "inertias"}
    tables = [table_for(name, mechanism) for name in TABLES if name not in left_out]
    return tuple(_sheet(table, mechanism, duty_type) for table in tables)


def _sheet(table: Table, mechanism: type[Mechanism], duty_type: str = "") -> Sheet:
    coordinate = mechanism.coordinate
    machine = "linear" if mechanism.drives_linear_motor else "rotary"
    if table.is_catalog:
        coordinate = machine
    columns = [column for column in table.columns if column.machine in ("", machine)]
    headings = tuple(column.heading_for(coordinate) for column in columns)
    rows: list[tuple[str, ...]]
    if table.name == "axis":
        rows = _axis_rows(mechanism)
    elif table.name == "duty_cycle":
        rows = _duty_cycle_rows(mechanism, columns)
    elif table.name == "duty_types":
        rows = _duty_type_rows(mechanism, columns, duty_type)
    elif table.name == "map":
        rows = list(_MAP_ROWS)
    elif table.name == "limits":
        rows = _limit_rows(columns)
    else:
        rows = [tuple(column.example_for(coordinate) for column in columns)]
    return Sheet(table.name, (headings, *rows))


def _axis_rows(mechanism: type[Mechanism]) -> list[tuple[str, ...]]:
    rows: list[tuple[str, ...]] = []
    for column in axis_quantities(mechanism):
        value = column.example_for(mechanism.coordinate)
        if column.name in ("mechanism", "title"):
            value = mechanism.name
        value = _EXAMPLES.get(mechanism.name, {}).get(column.name, value)
        unit = column.unit_for(mechanism.coordinate)
        hint = f"example: {column.help}" if value else f"left empty: {column.help}"
        rows.append((column.name, value, unit, hint))
    return rows


def _duty_cycle_rows(mechanism: type[Mechanism], columns: list[Column]) -> list[tuple[str, ...]]:
    """There, wait, back, wait: a cycle that closes."""
    fitted = _EXAMPLES.get(mechanism.name, {})
    example = {
        column.name: fitted.get(column.name, column.example_for(mechanism.coordinate)) for column in columns
    }
    wait = {
        "motion law": "dwell",
        "duration": "0.4",
        "payload": example["payload"],
        "process force": example["process force"],
        "brake closed": "no",
    }
    segments = (
        example | {"segment": "out"},
        wait | {"segment": "wait out"},
        example | {"segment": "back", "displacement": f"-{example['displacement']}"},
        wait | {"segment": "wait back"},
    )
    return [tuple(row.get(column.name, "") for column in columns) for row in segments]


def _duty_type_rows(
    mechanism: type[Mechanism], columns: list[Column], duty_type: str
) -> list[tuple[str, ...]]:
    """One row with the times that the type takes; two loads where it has several."""
    fitted = _EXAMPLES.get(mechanism.name, {})
    example = {c.name: fitted.get(c.name, c.example_for(mechanism.coordinate)) for c in columns}
    used = USED_TIMES[duty_type]
    row = example | {"cycle": f"duty {duty_type}", "duty type": duty_type}
    row |= {c.name: "" for c in columns if c.key in ALL_TIMES and c.key not in used}
    if duty_type not in SEVERAL_LOADS:
        return [tuple(row[c.name] for c in columns)]
    rows = [row | {"payload": "0"}, row]
    if duty_type == "S10":
        rows = [row | {"share of time": "70", "payload": "0"}, row | {"share of time": "30"}]
    return [tuple(each[c.name] for c in columns) for each in rows]


def _limit_rows(columns: list[Column]) -> list[tuple[str, ...]]:
    """Every check with its default, ready to be changed."""
    rows = []
    for key, title in CHECK_NAMES:
        allowed = ALLOWED_UTILISATIONS.get(key, DEFAULT_ALLOWED_UTILISATION)
        reserve = RECOMMENDED_RESERVES.get(key, DEFAULT_RECOMMENDED_RESERVE)
        given = {
            "check": title,
            "applies": "advice" if key in ADVICE_CHECKS else "yes",
            "allowed utilisation": f"{100.0 * allowed:.4g}",
            "recommended reserve": f"{100.0 * reserve:.4g}",
        }
        rows.append(tuple(given.get(column.name, column.example_for("rotary")) for column in columns))
    return rows
