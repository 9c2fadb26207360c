"""A small complete case for the tests of reading, as tables of text, and writers for both file formats."""

from __future__ import annotations

import csv
from pathlib import Path

Tables = dict[str, list[list[object]]]


def small_case() -> Tables:
    """A ball-screw axis with two motors, two gearheads and two drives; invented values."""
    return {
        "axis": [
            ["quantity", "value", "unit", "source"],
            ["mechanism", "ball screw", "", "drawing"],
            ["title", "Test axis", "", ""],
            ["lead", 10, "mm", "drawing"],
            ["screw diameter", 20, "mm", "drawing"],
            ["screw length", 600, "mm", "drawing"],
            ["efficiency", 90, "%", "handbook"],
            ["moving mass", 18.5, "kg", "weighed"],
            ["inclination", 90, "deg", "drawing"],
            ["nominal bus voltage", 48, "V", "supply"],
            ["ambient temperature", 35, "°C", "hall"],
        ],
        "duty_cycle": [
            ["segment", "motion law", "displacement [mm]", "duration [s]", "payload [kg]", "process force [N]",
             "brake closed", "note"],
            ["up", "trapezoid", 200, 0.6, 5, "", "", "loaded"],
            ["wait", "dwell", "", 0.4, 5, "", "yes", ""],
            ["down", "trapezoid", -200, 0.6, 0, "", "", ""],
            ["rest", "dwell", "", 0.4, 0, "", "no", ""],
        ],
        "motors": [
            ["motor", "commutation", "current basis", "resistance terminal-to-terminal [Ω]",
             "inductance terminal-to-terminal [mH]", "torque constant [mNm/A]", "pole pairs",
             "rotor inertia [g·cm²]", "no-load current [mA]", "continuous current [A]", "peak current [A]",
             "maximum speed [rpm]", "thermal class", "magnet material", "mass [kg]", "price [EUR]", "source"],
            ["M-10", "sinusoidal", "rms", 0.62, 0.9, 92, 4, 480, 210, 6.1, 19, 6000, "F", "NdFeB", 1.3, 240,
             "invented"],
            ["B-20", "brushed", "DC", 0.31, 0.11, 60.3, "", 536, 170, 7.2, 40, 5500, "B", "ferrite", 1.1, 150,
             "invented"],
        ],
        "gearheads": [
            ["gearhead", "ratio", "continuous torque [Nm]", "peak torque [Nm]", "maximum input speed [rpm]",
             "efficiency [%]", "inertia at input [g·cm²]", "mass [kg]", "price [EUR]"],
            ["G-3", "91/30", 8, 14, 7000, 95, 60, 0.5, 110],
            ["G-5", 5, 9, 16, 7000, 95, 50, 0.5, 115],
        ],
        "drives": [
            ["drive", "current basis", "commutation", "continuous current [A]", "peak current [A]", "peak time [s]",
             "minimum bus voltage [V]", "maximum bus voltage [V]", "price [EUR]"],
            ["D-1", "rms", "", 7, 20, 2, 20, 60, 180],
            ["D-2", "DC", "brushed / six-step", 10, 30, 1, 12, 60, 130],
        ],
    }  # fmt: skip


def write_folder(folder: Path, tables: Tables, *, delimiter: str = ",", decimal: str = ".") -> Path:
    """Write one CSV file per table."""
    folder.mkdir(parents=True, exist_ok=True)
    for name, rows in tables.items():
        with (folder / f"{name}.csv").open("w", encoding="utf-8", newline="") as stream:
            writer = csv.writer(stream, delimiter=delimiter)
            writer.writerows([[_typed(cell, decimal) for cell in row] for row in rows])
    return folder


def _typed(cell: object, decimal: str) -> str:
    return str(cell).replace(".", decimal) if isinstance(cell, float) else str(cell)


def write_workbook(path: Path, tables: Tables) -> Path:
    """Write one sheet per table."""
    from openpyxl import Workbook

    book = Workbook()
    book.remove(book.active)
    for name, rows in tables.items():
        sheet = book.create_sheet(name)
        for row in rows:
            sheet.append([None if cell == "" else cell for cell in row])
    book.save(path)
    return path


def row_of(tables: Tables, table: str, name: str) -> list[object]:
    """Row of a table by the text in its first cell, to be changed in place."""
    return next(row for row in tables[table] if row[0] == name)


def set_cell(tables: Tables, table: str, name: str, column: str, value: object) -> None:
    """Set the cell of the row called `name` under the heading that starts with `column`."""
    headings = [str(heading) for heading in tables[table][0]]
    index = next(i for i, heading in enumerate(headings) if heading.partition(" [")[0] == column)
    row_of(tables, table, name)[index] = value


def add_column(tables: Tables, table: str, heading: str, *values: object) -> None:
    """Add a column at the right."""
    for row, value in zip(tables[table], (heading, *values), strict=True):
        row.append(value)
