"""The report of a machine as a document: the axes, what they share, what they ask of their buses."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import date
from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import (
    Bullets,
    Cell,
    Column,
    Document,
    Facts,
    FigureBlock,
    Paragraph,
    Section,
    SignOff,
    Table,
    row,
)
from actuator_sizing.report.document.closing import cautions_section
from actuator_sizing.report.document.verdict import describe_set, governing
from actuator_sizing.report.formatting import NOT_KNOWN, number, percent, quantity
from actuator_sizing.report.machine.figure import figure_key
from actuator_sizing.report.text import clean, plural
from actuator_sizing.sizing.results import FAILS, VERDICTS

if TYPE_CHECKING:
    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.machine import Machine, MachineAxis
    from actuator_sizing.sizing.machine_bus import CommonBus
    from actuator_sizing.sizing.machine_motors import TypedSet

MOST_COMMON = 12
_PARTS = {"motors": "motor", "gearheads": "gearhead", "drives": "drive"}


def machine_document(machine: Machine, day: date, figures: Iterable[str] = ()) -> Document:
    """Turn the answer for a machine into a document.

    Parameters
    ----------
    machine : Machine
        The answer.
    day : date
        Date of the report.
    figures : iterable of str
        Keys of the figures that were drawn.
    """
    title = clean(machine.name, 60)
    prints = ", ".join(axis.comparison.case.fingerprint[:12] for axis in machine.axes)
    sections = [
        _axes_section(machine),
        _sharing_section(machine),
        _bus_section(machine, tuple(figures)),
        _basis_section(machine),
        cautions_section(),
        Section(
            "sign_off",
            "Sign-off",
            (SignOff((("Prepared by", ""), ("Checked by", ""), ("Approved by", ""))),),
        ),
    ]
    return Document(
        title=title,
        subtitle="Axes of one machine",
        cover=(
            ("Machine", title),
            ("Axes", ", ".join(clean(axis.name, 40) for axis in machine.axes)),
            ("Date", day.isoformat()),
            ("Fingerprints of the inputs", prints),
            ("Computed with", f"actuator_sizing {machine.version}"),
        ),
        verdict=machine_sentence(machine),
        verdict_state=worst_verdict(machine),
        sections=tuple(sections),
        running_title=title,
        footer=f"Inputs {clean(prints, 60)}, actuator_sizing {machine.version}, {day.isoformat()}",
        date=day.isoformat(),
    )


def worst_verdict(machine: Machine) -> str:
    """Verdict of the axis that is worst off."""
    return max((axis.best.verdict for axis in machine.axes), key=VERDICTS.index)


def machine_sentence(machine: Machine) -> str:
    """Say whether every axis has a set that passes, and what all of them come to."""
    failing = [clean(axis.name, 40) for axis in machine.axes if axis.best.verdict == FAILS]
    unsure = [clean(axis.name, 40) for axis in machine.axes if not axis.passes and axis.best.verdict != FAILS]
    if failing:
        text = f"No set passes on {', '.join(failing)}."
    elif unsure:
        text = f"Not confirmed for want of data: {', '.join(unsure)}."
    else:
        text = (
            f"Each of the {plural(len(machine.axes), 'axis').replace('axiss', 'axes')} has a set that passes."
        )
    return f"{text} The leading sets cost {money(machine.price)} and weigh {quantity(machine.mass_kg, 'kg')}."


def money(price: float | None) -> str:
    """A price as the report prints it."""
    return NOT_KNOWN if price is None else f"{price:.2f}"


def _axes_section(machine: Machine) -> Section:
    columns = (
        Column("Axis", weight=1.5),
        Column("Leading set", weight=3.0),
        Column("Governing check", weight=1.8),
        Column("Utilisation", numeric=True, weight=1.1),
        Column("Price", numeric=True),
        Column("Mass", numeric=True),
        Column("Mean power", numeric=True, weight=1.1),
        Column("Cycle", numeric=True),
    )
    total = row(
        Cell("All axes"),
        "",
        "",
        "",
        money(machine.price),
        quantity(machine.mass_kg, "kg"),
        NOT_KNOWN if machine.energy_per_hour_j is None else quantity(machine.energy_per_hour_j / 3600.0, "W"),
        "",
    )
    rows = (*(_axis_row(axis) for axis in machine.axes), total)
    notes = [
        "Prices are in the currency of the catalogs. Power is taken from the DC bus, as a mean over the cycle; "
        "nothing that comes back is counted off; a mean of 1 W is 3.6 kJ an hour. Of several cycles the mix counts, "
        "or without shares of time the cycle that takes most. Each axis has its own report: actuator-sizing compare.",
    ]
    return Section(
        "axes",
        "The axes and their leading sets",
        (Table("Leading set of each axis", columns, rows), Bullets(tuple(notes))),
    )


def _axis_row(axis: MachineAxis) -> tuple[Cell, ...]:
    best, check = axis.best, governing(axis.best)
    return row(
        Cell(clean(axis.name, 40), note=clean(axis.comparison.case.mechanism.name)),
        Cell(describe_set(best), note=best.verdict, verdict=best.verdict),
        check.title if check else "-",
        percent(check.utilisation, check.allowed) if check else "-",
        money(best.price),
        quantity(best.mass_kg, "kg"),
        quantity(None if axis.power is None else axis.power.taken_w, "W"),
        f"{len(axis.comparison.cycles)} cycles" if axis.cycle_s is None else quantity(axis.cycle_s, "s"),
    )


def _sharing_section(machine: Machine) -> Section:
    blocks: list[Block] = []
    if machine.shared_parts:
        columns = (Column("Part", weight=1.0), Column("Type", weight=1.6), Column("Leads on", weight=3.0))
        rows = tuple(
            row(_PARTS[part.table], clean(part.name, 60), ", ".join(clean(axis, 40) for axis in part.axes))
            for part in machine.shared_parts
        )
        blocks.append(Table("Types that repeat among the leading sets", columns, rows))
    else:
        blocks.append(Paragraph("No motor, gearhead or drive leads on more than one axis."))
    blocks += _type_blocks(machine)
    return Section("sharing", "Types that the axes share", tuple(blocks))


def _type_blocks(machine: Machine) -> list[Block]:
    types = machine.motor_types
    blocks: list[Block] = []
    if types.choices:
        counted = (
            Column("Motor types", numeric=True, weight=0.9),
            Column("Price of the machine", numeric=True, weight=1.2),
            Column("Sets", weight=4.5),
        )
        blocks.append(
            Table(
                "Cheapest machine for each number of motor types",
                counted,
                tuple(row(str(c.types), money(c.price), _sets(c.sets)) for c in types.choices),
            )
        )
    if types.common:
        lowest = types.choices[-1].price if types.choices else None
        columns = (
            Column("Motor", weight=1.4),
            Column("Passes on", weight=3.0),
            Column("Price of the machine with it", numeric=True, weight=1.3),
            Column("More than the cheapest", numeric=True, weight=1.2),
        )
        rows = tuple(
            row(
                clean(one.motor, 60),
                f"{len(one.sets)}: " + ", ".join(clean(s.axis, 40) for s in one.sets),
                money(one.price),
                "-" if one.price is None or lowest is None else f"{max(one.price - lowest, 0.0):.2f}",
            )
            for one in types.common[:MOST_COMMON]
        )
        blocks.append(Table("Motors that pass on several axes", columns, rows))
        if len(types.common) > MOST_COMMON:
            blocks.append(Paragraph(f"{len(types.common) - MOST_COMMON} more stand in the workbook.", "note"))
    else:
        blocks.append(Paragraph("No motor passes on more than one axis."))
    return [*blocks, Bullets(tuple(_type_notes(machine)))]


def _type_notes(machine: Machine) -> list[str]:
    types = machine.motor_types
    notes = [
        "With a motor the cheapest gearhead and drive that pass with it are counted; axes that it does not serve "
        "take their cheapest set."
    ]
    if not types.complete:
        notes.append(
            "Only the best sets of each axis by its ranking were evaluated; a cheaper common type may be among the "
            "others."
        )
    if types.unpriced:
        names = ", ".join(clean(axis, 40) for axis in types.unpriced)
        notes.append(f"Without a passing set whose price is known, and so without a sum: {names}.")
    if types.same_name:
        names = ", ".join(clean(name, 40) for name in types.same_name[:10])
        notes.append(
            f"The catalogs of the axes hold different data under one name; not taken for one type: {names}."
        )
    return notes


def _sets(sets: tuple[TypedSet, ...]) -> str:
    return "; ".join(
        f"{clean(s.axis, 40)}: {clean(s.motor, 40)} + {clean(s.gearhead, 40)} + {clean(s.drive, 40)}"
        for s in sets
    )


def _bus_section(machine: Machine, figures: tuple[str, ...]) -> Section:
    blocks: list[Block] = [
        Paragraph(
            "Axes that state the same nominal bus voltage are taken to share one bus. How their cycles are timed "
            "against one another is not part of a case: whatever it is, the peak lies between the least mean and "
            "the sum of the single peaks."
        )
    ]
    for bus in machine.buses:
        blocks.append(Facts(tuple(_bus_facts(bus))))
        key = figure_key(bus)
        if key in figures:
            caption = f"Power at the bus of {number(bus.bus_nominal_v)} V where all cycles start together."
            blocks.append(FigureBlock(key, caption, f"{caption} Negative power comes back from the axes."))
    return Section("buses", "What the axes ask of their buses", tuple(blocks))


def _bus_facts(bus: CommonBus) -> list[tuple[str, str]]:
    facts = [
        ("Nominal bus voltage", quantity(bus.bus_nominal_v, "V")),
        ("Axes", ", ".join(clean(axis, 40) for axis in bus.axes)),
    ]
    if bus.unknown:
        names = ", ".join(clean(axis, 40) for axis in bus.unknown)
        return [*facts, ("Not checked", f"efficiency of the drive not known on {names}; ask the supplier")]
    facts += [
        ("Mean power, nothing that comes back used", quantity(bus.power_mean_most_w, "W")),
        ("Mean power, all that comes back used by other axes", quantity(bus.power_mean_least_w, "W")),
        ("Peak power, peaks coincide", quantity(bus.power_peak_most_w, "W")),
        ("Peak power that comes back, peaks coincide", quantity(bus.power_returned_most_w, "W")),
    ]
    if len(bus.axes) == 1:
        return facts
    if bus.power_peak_together_w is None:
        return [
            *facts,
            (
                "Started together",
                "not defined: several cycles on an axis, or lengths that do not go into one another",
            ),
        ]
    return [
        *facts,
        (
            "Peak power, all cycles started together",
            f"{quantity(bus.power_peak_together_w, 'W')} at {quantity(bus.peak_together_at_s, 's')}",
        ),
        ("Peak power that comes back, started together", quantity(bus.power_returned_together_w, "W")),
    ]


def _basis_section(machine: Machine) -> Section:
    """What this report leaves to those of the single axes."""
    return Section(
        "basis",
        "What this report rests on",
        (
            Bullets(
                (
                    "Each axis was compared by itself, with its own inputs, assumptions and limits; they stand in "
                    "its own report, as do the checks and what was not checked.",
                    "Drives are judged one for each axis. Supply, capacitance, chopper and brake resistor of a "
                    "common bus are not sized here.",
                    "Power is that of the leading sets in periodic steady state, losses of the drives by their "
                    "efficiency, stand-by power and further loads as each case states them.",
                )
            ),
            Facts(
                tuple((clean(axis.name, 40), axis.comparison.case.fingerprint) for axis in machine.axes),
                "Fingerprints of the inputs",
            ),
        ),
    )
