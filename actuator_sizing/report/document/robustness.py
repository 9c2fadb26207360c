"""How sure the leading set passes under the spreads of the case."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import (
    Bullets,
    Cell,
    Column,
    FigureBlock,
    Paragraph,
    Section,
    Table,
    row,
)
from actuator_sizing.report.formatting import display_unit, number, percent
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from collections.abc import Iterable

    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison
    from actuator_sizing.sizing.robustness.results import Robustness

_FIGURES = {
    "robust_probability": "Probability of passing each check under the stated spreads, with its 95 % interval.",
    "robust_swings": "One input at a time at its low and high value: the checks that are passed least often.",
    "robust_sensitivity": "Share of the variance of the utilisation that an input explains alone and with its "
    "interactions.",
}


def robustness_section(comparison: Comparison, figures: Iterable[str]) -> Section | None:
    """Place the study of the leading set; None where the case states no spread that acts on it.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    figures : iterable of str
        Keys of the figures that were drawn.
    """
    study = comparison.robustness
    if study is None:
        return None
    drawn = set(figures)
    blocks: list[Block] = [Paragraph(probability_sentence(study)), _inputs(study), _checks(study)]
    blocks += [
        FigureBlock(key, caption, probability_sentence(study))
        for key, caption in _FIGURES.items()
        if key in drawn
    ]
    blocks.append(Bullets(tuple(clean(note, 600) for note in study.notes)))
    return Section("robustness", "How sure it passes", tuple(blocks))


def probability_sentence(study: Robustness) -> str:
    """Say with which probability the set passes, from how many samples."""
    found = study.probability
    low, high = percent(found["probability_low"], 1.0), percent(found["probability_high"], 1.0)
    return (
        f"{clean(study.label)} passes every check sampled in {percent(found['probability'], 1.0)} of "
        f"{found['samples']} samples of the stated spreads (95 % interval {low} to {high}, by Wilson; seed "
        f"{study.seed}).{_asked_and_judged(study)}"
    )


def _asked_and_judged(study: Robustness) -> str:
    """Say how many samples were asked for and how each check used them; empty where all were judged at once."""
    if study.exact_samples == 0:
        return ""
    at_once = (
        int((study.checks["samples"] == study.samples).sum()) if study.exact_samples < study.samples else 0
    )
    slow = len(study.checks) - at_once
    judged, why = "none was judged at once", "with these spreads no check can be judged at once"
    if at_once:
        judged = f"{at_once} checks were judged at once in all of them"
        why = f"{slow} checks cannot be judged at once"
    return (
        f" Of {study.samples} samples asked for, {judged}; {study.exact_samples} went through the whole chain, as "
        f"{why}. The option exact says how many do."
    )


def _inputs(study: Robustness) -> Table:
    rows = []
    for item in study.inputs.itertuples():
        unit = display_unit(item.unit, (item.value,))
        width = number(item.width / unit.factor, 3)
        together = f"with {clean(item.correlation)}" if item.correlation else ""
        rows.append(
            row(clean(item.input), item.distribution, f"{number(unit.convert(item.value))} {unit.label}".rstrip(),
                f"± {width} {_difference(unit.label)}".rstrip(), Cell(clean(item.source) or "-", together))
        )  # fmt: skip
    columns = (Column("Input", weight=1.8), Column("Distribution"), Column("Value", True), Column("Width", True),
               Column("Source", weight=1.5))  # fmt: skip
    return Table(
        "What spreads; the width is a standard deviation (normal) or a half width", columns, tuple(rows)
    )


def _difference(label: str) -> str:
    return "K" if label == "°C" else label


def _checks(study: Robustness) -> Table:
    corners = study.corners.set_index("check") if len(study.corners) else None
    by_key = study.checks.set_index("check")
    rows = []
    for key in study.weakest_first:
        item = by_key.loc[key]
        allowed = float(item["allowed_utilisation"])
        low, high = percent(item["probability_low"], 1.0), percent(item["probability_high"], 1.0)
        worst = "-"
        if corners is not None and key in corners.index:
            worst = percent(float(corners.loc[key, "utilisation"]), allowed)
        rows.append(
            row(clean(item["title"]) + (" (advice)" if item["advice"] else ""),
                Cell(percent(item["probability"], 1.0), f"{low} to {high} of {item['samples']}"),
                percent(item["nominal_utilisation"], allowed), percent(item["utilisation_q95"], allowed), worst)
        )  # fmt: skip
    columns = (
        Column("Check", weight=1.8),
        Column("Passes with", True, 1.4),
        Column("Utilisation without spread", True),
        Column("Not exceeded in 95 %", True),
        Column("In the worst corner", True),
    )
    return Table("Checks, those that are passed least often first", columns, tuple(rows))
