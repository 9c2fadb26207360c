"""The tables of a comparison as one workbook: one topic a sheet, formulas that live, values beside them."""

from __future__ import annotations

import io
from datetime import date, datetime
from typing import TYPE_CHECKING

from actuator_sizing.report.text import option
from actuator_sizing.report.workbook.case_sheets import add_inputs, add_parts, add_questions, add_segments
from actuator_sizing.report.workbook.curves import add_speed_torque, add_time_series, add_warm_up
from actuator_sizing.report.workbook.cycle_sheets import add_cycles, add_inertias
from actuator_sizing.report.workbook.decision_sheets import (
    add_headroom,
    add_levers,
    add_ratio_windows,
    add_trade_offs,
)
from actuator_sizing.report.workbook.dynamics_sheet import add_dynamics
from actuator_sizing.report.workbook.power_sheets import add_bus, add_energy
from actuator_sizing.report.workbook.results_sheets import add_candidates, add_checks, add_summary
from actuator_sizing.report.workbook.robustness import add_robustness
from actuator_sizing.report.workbook.writer import Sheets

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison

__all__ = ["BOOK_OPTIONS", "render_workbook"]

BOOK_OPTIONS = {
    "in_memory": True,
    "strings_to_formulas": False,  # text from tables stays text, also when it begins with "="
    "strings_to_urls": False,
    "strings_to_numbers": False,
}


def render_workbook(comparison: Comparison, day: date, rows_in_file: int | None = None) -> bytes:
    """Write summary, candidates, checks, segments, curves, parts and inputs as an ``.xlsx`` workbook.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    day : date
        Date of the report; the workbook is the same, byte for byte, for the same comparison and date.
    rows_in_file : int or None
        How many candidates the file beside lists; None if it lists all.
    """
    from xlsxwriter import Workbook

    stream = io.BytesIO()
    with Workbook(stream, BOOK_OPTIONS) as book:
        book.set_properties(
            {
                "title": option(comparison.case, "title", comparison.case.name)[:250],
                "subject": "Actuator sizing tables",
                "author": option(comparison.case, "prepared by")[:250],
                "comments": f"inputs {comparison.case.fingerprint}, actuator_sizing {comparison.version}",
                "created": datetime(day.year, day.month, day.day),
            }
        )
        book.set_calc_mode("auto")
        sheets = Sheets(book)
        add_summary(sheets, comparison, day, rows_in_file)
        add_candidates(sheets, comparison)
        add_checks(sheets, comparison)
        add_cycles(sheets, comparison)
        add_levers(sheets, comparison)
        add_trade_offs(sheets, comparison)
        add_ratio_windows(sheets, comparison)
        add_headroom(sheets, comparison)
        add_segments(sheets, comparison)
        add_time_series(sheets, comparison)
        add_warm_up(sheets, comparison)
        add_speed_torque(sheets, comparison)
        add_energy(sheets, comparison)
        add_bus(sheets, comparison)
        add_dynamics(sheets, comparison)
        if comparison.robustness is not None:
            add_robustness(sheets, comparison.robustness)
        add_inertias(sheets, comparison)
        add_parts(sheets, comparison)
        add_inputs(sheets, comparison)
        add_questions(sheets, comparison)
    return stream.getvalue()
