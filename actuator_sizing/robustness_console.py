"""What the command line prints of a robustness study: one screen."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import click

from actuator_sizing.console import clean

if TYPE_CHECKING:
    from actuator_sizing.sizing.robustness.results import Robustness

_MOST_CHECKS, _MOST_INPUTS = 12, 4


def print_robustness(study: Robustness, written: Sequence[Path]) -> None:
    """Print what a study found to stdout.

    Parameters
    ----------
    study : Robustness
        The answer.
    written : sequence of Path
        Files that were written.
    """
    from actuator_sizing.report.document.robustness import probability_sentence
    from actuator_sizing.report.formatting import number, percent

    click.echo(clean(probability_sentence(study)))
    if study.wanted_probability == study.wanted_probability:
        click.echo()
        for item in study.shortlist.itertuples():
            word = "reaches" if item.reaches else "does not reach"
            name = " + ".join((item.motor, item.gearhead, item.drive))
            click.echo(f"  {item.rank}. {clean(name)}: {percent(item.probability)}, at least "
                       f"{percent(item.probability_low)}: {word} {percent(study.wanted_probability)}")  # fmt: skip
        if not study.shortlist.empty and not study.shortlist["reaches"].any():
            click.echo("None of them reaches it; the study below is of the leading set.")
    click.echo()
    rows = [("check", "passes with", "95 % interval", "nominal", "95 % below", "allowed")]
    by_key = study.checks.set_index("check")
    for key in study.weakest_first[:_MOST_CHECKS]:
        item = by_key.loc[key]
        allowed = float(item["allowed_utilisation"])
        rows.append(
            (clean(item["title"]) + (" (advice)" if item["advice"] else ""), percent(item["probability"]),
             f"{percent(item['probability_low'])} to {percent(item['probability_high'])}",
             percent(item["nominal_utilisation"], allowed), percent(item["utilisation_q95"], allowed),
             percent(allowed))
        )  # fmt: skip
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    for cells in rows:
        padded = (cell.ljust(width) if i == 0 else cell.rjust(width)
                  for i, (cell, width) in enumerate(zip(cells, widths, strict=True)))  # fmt: skip
        click.echo("  ".join(padded).rstrip())
    if len(by_key) > _MOST_CHECKS:
        click.echo(f"... and {len(by_key) - _MOST_CHECKS} more checks in the tables.")
    for key in study.weakest_that_move[:2]:
        mine = study.sensitivity[study.sensitivity["check"] == key].nlargest(_MOST_INPUTS, "total")
        if len(mine):
            parts = (f"{clean(str(i.inputs))} {number(float(i.total), 2)} ± {number(float(i.total_error), 1)}"
                     for i in mine.itertuples())  # fmt: skip
            click.echo(f"{study.title_of(key)} varies with (total index): {', '.join(parts)}")
    for title in study.not_checked:
        click.echo(f"not checked: {clean(title)}")
    for note in study.notes:
        click.echo(f"note: {clean(note)}")
    if written:
        click.echo(f"Files: {written[0].parent} ({len(written)})")
