"""What the command line prints of the headroom of a set: a table of limits, and the map if it was asked for."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import click

from actuator_sizing.console import clean

if TYPE_CHECKING:
    from actuator_sizing.sizing.headroom import Headroom

_HEADINGS = ("quantity", "now", "limit", "bounded by", "in words")
_MAP_HEADINGS = ("heaviest payload", "shortest cycle", "bounded by", "longest cycle", "bounded by")


def print_headroom(found: Headroom, written: Sequence[Path]) -> None:
    """Print what a set can do at most to stdout.

    Parameters
    ----------
    found : Headroom
        The answer.
    written : sequence of Path
        Files that were written.
    """
    from actuator_sizing.report.headroom_text import headroom_text, map_rows
    from actuator_sizing.report.text import check_name
    from actuator_sizing.sizing.checks import CHECKS

    titles = {check.key: check.title for check in CHECKS}
    verdict = "passes" if found.present.is_met else f"fails by {check_name(found.present.check)}"
    click.echo(f"{clean(found.label)}: {verdict} as it is")
    click.echo()
    _print([_HEADINGS, *(headroom_text(found.case, answer, titles) for answer in found.answers)])
    if found.map is not None:
        click.echo()
        _print([_MAP_HEADINGS, *map_rows(found.case, found.map, titles)])
    if written:
        click.echo(f"\nFiles: {written[0].parent} ({len(written)})")


def _print(rows: Sequence[Sequence[str]]) -> None:
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    for cells in rows:
        click.echo(
            "  ".join(clean(cell).ljust(width) for cell, width in zip(cells, widths, strict=True)).rstrip()
        )
