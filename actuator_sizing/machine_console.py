"""What the command line prints about a machine of several axes, and how it reads their cases."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import click

from actuator_sizing.console import clean, print_plain_table
from actuator_sizing.errors import InputError, Problem

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.machine import Machine

_HEADINGS = ("axis", "motor", "gearhead", "drive", "price", "governing check", "utilisation", "verdict")
_RIGHT = (4, 6)


def read_cases(paths: Sequence[Path]) -> list[Case]:
    """Read every case; the problems of all of them at once.

    Parameters
    ----------
    paths : sequence of Path
        Folders or workbooks.

    Raises
    ------
    InputError
        With the problems of every case that cannot be used, each with the name of its case.
    """
    from actuator_sizing.case.reading import read_case

    cases: dict[Path, Case] = {}
    problems: list[Problem] = []
    for path in dict.fromkeys(paths):
        try:
            cases[path] = read_case(path)
        except InputError as error:
            problems += [replace(problem, table=f"{path}: {problem.table}") for problem in error.problems]
    if problems:
        raise InputError(problems)
    return [cases[path] for path in paths]


def print_machine(machine: Machine, written: Sequence[Path]) -> None:
    """Print the axes, what they share and what they ask of their buses, on one screen.

    Parameters
    ----------
    machine : Machine
        The answer.
    written : sequence of Path
        The files of the report.
    """
    from actuator_sizing.report.document.verdict import governing
    from actuator_sizing.report.formatting import number, percent, quantity
    from actuator_sizing.report.machine.document import machine_sentence, money

    click.echo(clean(machine_sentence(machine)))
    click.echo()
    rows = []
    for axis in machine.axes:
        best, check = axis.best, governing(axis.best)
        rows.append(
            (
                clean(axis.name),
                clean(best.motor),
                clean(best.gearhead or "direct"),
                clean(best.drive),
                money(best.price),
                check.title if check else "-",
                percent(check.utilisation, check.allowed) if check else "-",
                best.verdict,
            )
        )
    print_plain_table(_HEADINGS, rows, _RIGHT)
    click.echo()
    for part in machine.shared_parts:
        if part.table == "motors":
            click.echo(f"{clean(part.name)} leads on {', '.join(map(clean, part.axes))}.")
    for choice in machine.motor_types.choices:
        types = "1 motor type" if choice.types == 1 else f"{choice.types} motor types"
        click.echo(f"Cheapest with {types}: {money(choice.price)} ({', '.join(map(clean, choice.motors))}).")
    for bus in machine.buses:
        label = f"Bus of {number(bus.bus_nominal_v)} V"
        if bus.unknown:
            click.echo(
                f"{label}: not checked, efficiency of the drive not known on {', '.join(map(clean, bus.unknown))}."
            )
            continue
        line = f"{label}: mean power at most {quantity(bus.power_mean_most_w, 'W')}, peak at most "
        line += quantity(bus.power_peak_most_w, "W")
        if bus.power_peak_together_w is not None and len(bus.axes) > 1:
            line += f", {quantity(bus.power_peak_together_w, 'W')} if all cycles start together"
        click.echo(f"{line}.")
    if written:
        click.echo(f"\nReport: {written[0]} (and {len(written) - 1} more files in {written[0].parent})")
