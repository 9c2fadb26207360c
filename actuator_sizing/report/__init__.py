"""Writers: one per format, all fed the same comparison; no number is born here."""

from __future__ import annotations

import os
from collections.abc import Mapping
from datetime import UTC, date, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison

__all__ = ["render_report", "write_report"]


def write_report(
    comparison: Comparison,
    folder: str | Path,
    *,
    date: date | None = None,
    pdf: bool | None = None,
    since: Mapping[str, Any] | None = None,
) -> tuple[Path, ...]:
    """Write page, PDF, workbook, results, candidates and figures into a folder; whole or not at all.

    Figures and PDF of an earlier run that this one does not make are removed.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    folder : str or Path
        Output folder; made if missing.
    date : datetime.date or None
        Date of the report; by default today, or the day in the environment variable ``SOURCE_DATE_EPOCH``.
    pdf : bool or None
        Write the PDF too; None writes it if the optional package for it is installed.
    since : mapping or None
        Earlier results, as from `read_results`: the report then says what changed.

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

    files = render_report(comparison, date=date, pdf=pdf, since=since)
    return replace_folder_files(folder, files, obsolete=_own_names())


def _own_names() -> tuple[str, ...]:
    """Names of files that a report may or may not have: one left by an earlier run would contradict it."""
    from actuator_sizing.report.figures import FIGURES, OPTIONAL_FIGURES

    return ("sizing_report.pdf", *(f"figures/{key}.svg" for key in (*FIGURES, *OPTIONAL_FIGURES)))


def render_report(
    comparison: Comparison,
    *,
    date: date | None = None,
    pdf: bool | None = None,
    since: Mapping[str, Any] | None = None,
) -> dict[str, bytes]:
    """Make every file of the report in memory, keyed by its path in the folder.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    date : datetime.date or None
        Date of the report, see `write_report`.
    pdf : bool or None
        Make the PDF too, see `write_report`.
    since : mapping or None
        Earlier results, see `write_report`.
    """
    from concurrent.futures import ThreadPoolExecutor

    from actuator_sizing.report.candidates_csv import render_candidates
    from actuator_sizing.report.document import prepare_document
    from actuator_sizing.report.figures import draw_figures
    from actuator_sizing.report.html import render_html
    from actuator_sizing.report.json_results import render_json, results_dict
    from actuator_sizing.report.pdf import can_write_pdf, render_pdf
    from actuator_sizing.report.revision import revision_since
    from actuator_sizing.report.workbook import render_workbook

    day = report_day(date)
    figures = draw_figures(comparison)
    revision = None if since is None else revision_since(since, results_dict(comparison))
    document = prepare_document(comparison, day, figures, revision)
    with ThreadPoolExecutor(1) as second_core:  # the typesetter is compiled and lets the other writers run
        wanted = pdf or (pdf is None and can_write_pdf())
        typeset = second_core.submit(render_pdf, document, figures) if wanted else None
        candidates = render_candidates(comparison)
        files = {
            "sizing_report.html": render_html(document, figures),
            "sizing_tables.xlsx": render_workbook(comparison, day, candidates.rows),
            "results.json": render_json(comparison, revision),
            "candidates.csv": candidates.content,
        }
        if typeset is not None:
            files["sizing_report.pdf"] = typeset.result()
    return files | {f"figures/{figure.key}.svg": figure.svg for figure in figures.values()}


def report_day(stated: date | None) -> date:
    """The day that stands on a report: the one asked for, else that of a reproducible build, else today."""
    if stated is not None:
        return stated
    epoch = os.environ.get("SOURCE_DATE_EPOCH", "").strip()
    if epoch.isdigit():
        return datetime.fromtimestamp(int(epoch), UTC).date()
    return datetime.now().date()
