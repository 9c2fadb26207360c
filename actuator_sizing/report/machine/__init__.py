"""The report of a machine of several axes: page, PDF, workbook and results, by the writers of the single axis."""

from __future__ import annotations

from datetime import date as calendar_date
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from actuator_sizing.sizing.machine import Machine

__all__ = ["render_machine", "write_machine"]


def write_machine(
    machine: Machine, folder: str | Path, *, date: calendar_date | None = None, pdf: bool | None = None
) -> tuple[Path, ...]:
    """Write the report of a machine into a folder; whole or not at all.

    Parameters
    ----------
    machine : Machine
        The answer.
    folder : str or Path
        Output folder; made if missing.
    date : datetime.date or None
        Date of the report; by default today, or the day in the environment variable ``SOURCE_DATE_EPOCH``.
    pdf : bool or None
        Write the PDF too; None writes it if the optional package for it is installed.

    Returns
    -------
    tuple of Path
        The files written.

    Raises
    ------
    OutputError
        If a file cannot be written, or the PDF is asked for without its package; what was there before is
        untouched.
    """
    from actuator_sizing.files import replace_folder_files

    files = render_machine(machine, date=date, pdf=pdf)
    return replace_folder_files(folder, files, obsolete=("machine_report.pdf",))


def render_machine(
    machine: Machine, *, date: calendar_date | None = None, pdf: bool | None = None
) -> dict[str, bytes]:
    """Make every file of the report of a machine in memory, keyed by its name.

    Parameters
    ----------
    machine : Machine
        The answer.
    date : datetime.date or None
        Date of the report, see `write_machine`.
    pdf : bool or None
        Make the PDF too, see `write_machine`.
    """
    from actuator_sizing.report import report_day
    from actuator_sizing.report.html import render_html
    from actuator_sizing.report.machine.document import machine_document
    from actuator_sizing.report.machine.figure import draw_buses
    from actuator_sizing.report.machine.results import render_machine_json
    from actuator_sizing.report.machine.workbook import render_machine_workbook
    from actuator_sizing.report.pdf import can_write_pdf, render_pdf

    day = report_day(date)
    figures = draw_buses(machine)
    document = machine_document(machine, day, figures)
    files = {
        "machine_report.html": render_html(document, figures),
        "machine_tables.xlsx": render_machine_workbook(machine, day),
        "machine.json": render_machine_json(machine),
    }
    if pdf or (pdf is None and can_write_pdf()):
        files["machine_report.pdf"] = render_pdf(document, figures)
    return files
