"""The report as a document: prepared once from a comparison, rendered by one writer per format."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import date
from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Document, Section
from actuator_sizing.report.document.changes import changes_section
from actuator_sizing.report.document.checks import checks_section, working_section
from actuator_sizing.report.document.closing import (
    cautions_section,
    commissioning_section,
    not_checked_section,
    sign_off_section,
)
from actuator_sizing.report.document.comparing import comparison_section
from actuator_sizing.report.document.cycles import cycles_section
from actuator_sizing.report.document.decisions import decision_sections
from actuator_sizing.report.document.drawings import figures_section
from actuator_sizing.report.document.dynamics import dynamics_section
from actuator_sizing.report.document.inertias import inertias_section
from actuator_sizing.report.document.inputs import assumptions_section, inputs_section
from actuator_sizing.report.document.levers import levers_section
from actuator_sizing.report.document.power import power_section
from actuator_sizing.report.document.robustness import robustness_section
from actuator_sizing.report.document.stopping import stopping_section
from actuator_sizing.report.document.verdict import cover_facts, verdict_section, verdict_sentence
from actuator_sizing.report.text import clean, option

if TYPE_CHECKING:
    from actuator_sizing.report.revision import Revision
    from actuator_sizing.sizing.results import Comparison

__all__ = ["prepare_document"]


def prepare_document(
    comparison: Comparison, day: date, figures: Iterable[str] = (), revision: Revision | None = None
) -> Document:
    """Turn a comparison into a document in the order in which a reviewer thinks.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    day : date
        Date of the report.
    figures : iterable of str
        Keys of the figures that were drawn; only these get a place.
    revision : Revision or None
        What changed since an earlier comparison.
    """
    case = comparison.case
    drawn = tuple(figures)
    sentence, state = verdict_sentence(comparison)
    title = option(case, "title", clean(case.name))
    issue = option(case, "revision")
    sections: list[Section] = [verdict_section(comparison)]
    if revision is not None:
        sections.append(changes_section(revision))
    sections.append(comparison_section(comparison, drawn))
    losers = levers_section(comparison)
    if losers is not None:
        sections.append(losers)
    sections += decision_sections(comparison, drawn)
    if comparison.sets:
        best = comparison.sets[0]
        sections += [checks_section(best), working_section(best)]
        together = cycles_section(comparison, drawn)
        if together is not None:
            sections.append(together)
        shown = comparison.governing  # figures show one cycle
        figure_section = figures_section(shown, drawn)
        if figure_section.blocks:
            sections.append(figure_section)
        stopping = stopping_section(shown, drawn)
        if stopping is not None:
            sections.append(stopping)
        sections.append(power_section(shown, drawn))
        moving = dynamics_section(shown, drawn)
        if moving is not None:
            sections.append(moving)
    sure = robustness_section(comparison, drawn)
    if sure is not None:
        sections.append(sure)
    if comparison.inertias:
        sections.append(inertias_section(comparison))
    sections += [inputs_section(comparison), assumptions_section(comparison), not_checked_section(comparison)]
    if comparison.sets:
        sections.append(commissioning_section(comparison))
    sections += [cautions_section(), sign_off_section(comparison)]
    running = f"{clean(title, 60)}, revision {clean(issue, 20)}" if issue else clean(title, 60)
    return Document(
        title=title,
        subtitle="Actuator sizing report",
        cover=cover_facts(comparison, day),
        verdict=sentence,
        verdict_state=state,
        sections=tuple(sections),
        running_title=running,
        footer=f"Inputs {case.fingerprint[:12]}, actuator_sizing {comparison.version}, {day.isoformat()}",
        date=day.isoformat(),
    )
