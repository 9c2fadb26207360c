"""The tables of a machine as one workbook; the total price is a live formula."""

from __future__ import annotations

import io
from datetime import date, datetime
from functools import partial
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.verdict import governing
from actuator_sizing.report.machine.document import machine_sentence
from actuator_sizing.report.workbook import BOOK_OPTIONS
from actuator_sizing.report.workbook.writer import Field, Sheets

if TYPE_CHECKING:
    from actuator_sizing.sizing.machine import Machine


def render_machine_workbook(machine: Machine, day: date) -> bytes:
    """Write axes, shared types and buses as an ``.xlsx`` workbook.

    Parameters
    ----------
    machine : Machine
        The answer.
    day : date
        Date of the report; the workbook is the same, byte for byte, for the same answer and date.
    """
    from xlsxwriter import Workbook

    stream = io.BytesIO()
    with Workbook(stream, BOOK_OPTIONS) as book:
        book.set_properties(
            {
                "title": machine.name[:250],
                "subject": "Axes of one machine",
                "comments": f"actuator_sizing {machine.version}",
                "created": datetime(day.year, day.month, day.day),
            }
        )
        book.set_calc_mode("auto")
        sheets = Sheets(book)
        _add_summary(sheets, machine)
        _add_axes(sheets, machine)
        _add_types(sheets, machine)
        _add_buses(sheets, machine)
    return stream.getvalue()


def _add_summary(sheets: Sheets, machine: Machine) -> None:
    last = len(machine.axes) + 1
    rows: list[tuple[str, Any, str, str]] = [
        ("Machine", machine.name, "", ""),
        ("In words", machine_sentence(machine), "", ""),
        ("Price", machine.price, "currency of the catalogs", "F"),
        ("Mass", machine.mass_kg, "kg", "G"),
        ("Energy per hour", machine.energy_per_hour_j, "J", ""),
    ]
    fields = (Field("quantity"), Field("value", "number"), Field("unit"))
    sheet = sheets.add_table("summary", fields, [row[:3] for row in rows])
    sheet.set_column(1, 1, 46)
    for index, (_, value, _, column) in enumerate(rows, 1):
        if isinstance(value, str):
            sheets.write(sheet, index, 1, Field("value"), value)
        if column and value is not None:
            formula = partial(_sum_of, column, last)
            sheets.write(sheet, index, 1, Field("value", "number", formula=formula), value)


def _sum_of(column: str, last: int, _row: int) -> str:
    return f"=SUM(axes!{column}2:{column}{last})"


def _add_axes(sheets: Sheets, machine: Machine) -> None:
    fields = (
        Field("axis"),
        Field("motor"),
        Field("gearhead"),
        Field("drive"),
        Field("verdict"),
        Field("price", "money"),
        Field("mass [kg]", "number"),
        Field("governing check"),
        Field("utilisation", "percent", bar=True),
        Field("mean power taken [W]", "number"),
        Field("mean power returned [W]", "number"),
        Field("cycle [s]", "number"),
        Field("nominal bus voltage [V]", "number"),
    )
    rows = []
    for axis in machine.axes:
        best, check = axis.best, governing(axis.best)
        rows.append(
            (
                axis.name,
                best.motor,
                "direct" if best.gearhead is None else best.gearhead,
                best.drive,
                best.verdict,
                best.price,
                best.mass_kg,
                check.title if check else "",
                check.utilisation if check else None,
                None if axis.power is None else axis.power.taken_w,
                None if axis.power is None else axis.power.returned_w,
                axis.cycle_s,
                axis.comparison.case.surroundings.bus_nominal_v,
            )
        )
    sheets.add_table("axes", fields, rows)


def _add_types(sheets: Sheets, machine: Machine) -> None:
    shared = (Field("table"), Field("type"), Field("axis"))
    rows = [(part.table, part.name, axis) for part in machine.shared_parts for axis in part.axes]
    sheets.add_table("types that repeat", shared, rows)
    one_set = (
        Field("axis"),
        Field("motor"),
        Field("gearhead"),
        Field("drive"),
        Field("price of the set", "money"),
    )
    choices = [
        (choice.types, choice.price, s.axis, s.motor, s.gearhead, s.drive, s.price)
        for choice in machine.motor_types.choices
        for s in choice.sets
    ]
    fields = (Field("motor types", "integer"), Field("price of the machine", "money"), *one_set)
    sheets.add_table("fewest motor types", fields, choices)
    common = [
        (len(one.sets), one.price, s.axis, s.motor, s.gearhead, s.drive, s.price)
        for one in machine.motor_types.common
        for s in one.sets
    ]
    fields = (Field("axes that it serves", "integer"), Field("price of the machine", "money"), *one_set)
    sheets.add_table("common motors", fields, common)


def _add_buses(sheets: Sheets, machine: Machine) -> None:
    fields = (
        Field("nominal bus voltage [V]", "number"),
        Field("axes"),
        Field("power not known on"),
        Field("mean power, nothing returned used [W]", "number"),
        Field("mean power, all returned used [W]", "number"),
        Field("peak power, peaks coincide [W]", "number"),
        Field("peak power returned, peaks coincide [W]", "number"),
        Field("peak power, started together [W]", "number"),
        Field("peak power returned, started together [W]", "number"),
    )
    rows = [
        (
            bus.bus_nominal_v,
            ", ".join(bus.axes),
            ", ".join(bus.unknown),
            bus.power_mean_most_w,
            bus.power_mean_least_w,
            bus.power_peak_most_w,
            bus.power_returned_most_w,
            bus.power_peak_together_w,
            bus.power_returned_together_w,
        )
        for bus in machine.buses
    ]
    sheets.add_table("buses", fields, rows)
    for bus in machine.buses:
        if bus.together is None or len(bus.axes) < 2:
            continue
        names = ("time [s]", "all axes [W]", *(f"{axis} [W]" for axis in bus.axes))
        values = bus.together.to_numpy().tolist()
        sheets.add_table(
            f"power at {bus.bus_nominal_v:g} V", [Field(name, "number") for name in names], values
        )
