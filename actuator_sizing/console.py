"""What the command line prints: problems, the summary of a comparison, a progress bar."""

from __future__ import annotations

import math
import shutil
import sys
import time
from collections import Counter
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, Self

import click

from actuator_sizing.errors import ERROR, NOTE, WARNING, Problem

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import CheckResult, Comparison, SetResult

_SEVERITIES = (ERROR, WARNING, NOTE)
_COLOURS = {ERROR: "red", WARNING: "yellow", NOTE: "cyan"}
_LISTED = 10  # sets in the summary: a screen, not a book
_PATIENCE_S = 1.0  # no progress bar for anything shorter


def clean(text: str) -> str:
    """Text of a user's table made harmless for a terminal: no control characters, no line breaks."""
    return "".join(c if c.isprintable() else " " for c in text)


# -- problems ----------------------------------------------------------------------------------------


def print_problems(problems: Iterable[Problem], at_most: int | None = None) -> None:
    """Print problems to stderr, grouped by table: tables with errors first, errors first in each.

    Parameters
    ----------
    problems : iterable of Problem
        What to tell.
    at_most : int or None
        Print no more than this and say how many are left out; None prints all. [-]
    """
    ordered = sorted(problems, key=lambda p: _SEVERITIES.index(p.severity))
    tables = list(dict.fromkeys(problem.table for problem in ordered))
    ordered.sort(key=lambda p: (tables.index(p.table), _SEVERITIES.index(p.severity), p.row or 0))
    shown = ordered if at_most is None else ordered[:at_most]
    table = None
    for problem in shown:
        if problem.table != table:
            table = problem.table
            click.secho(clean(table), bold=True, err=True)
        label = click.style(f"{problem.severity:<7}", fg=_COLOURS[problem.severity])
        click.echo(f"  {label}  {clean(_sentence(problem))}", err=True)
    if len(shown) < len(ordered):
        left = len(ordered) - len(shown)
        click.echo(f"... and {left} more: see 'actuator-sizing audit'.", err=True)


def _sentence(problem: Problem) -> str:
    """Word a problem without its table, which stands above it."""
    text = str(problem).removeprefix(problem.table)
    return text.lstrip(" ,:") or problem.table


def count_line(problems: Sequence[Problem]) -> str:
    """How many problems of each severity, and in how many tables.

    Examples
    --------
    >>> count_line([Problem("motors", 2), Problem("motors", 3), Problem("axis", severity="note")])
    '2 errors, 1 note in 2 tables.'
    >>> count_line([])
    'No problems found.'
    """
    if not problems:
        return "No problems found."
    counts = Counter(problem.severity for problem in problems)
    parts = [_plural(counts[severity], severity) for severity in _SEVERITIES if counts[severity]]
    tables = len({problem.table for problem in problems})
    return f"{', '.join(parts)} in {_plural(tables, 'table')}."


def _plural(count: int, noun: str) -> str:
    return f"{count} {noun}" if count == 1 else f"{_grouped(count)} {noun}s"


def _grouped(count: int) -> str:
    return f"{count:,}".replace(",", " ")


# -- the summary of a comparison ---------------------------------------------------------------------


def print_summary(comparison: Comparison, written: Sequence[Path]) -> None:
    """Print what a comparison found to stdout, on one screen.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    written : sequence of Path
        The files of the report.
    """
    click.echo(verdict_sentence(comparison))
    if comparison.sets:
        click.echo()
        _print_table(_HEADINGS, [_row(result) for result in comparison.sets[:_LISTED]])
        if len(comparison.sets) > _LISTED:
            click.echo(f"... and {len(comparison.sets) - _LISTED} more in the report.")
    click.echo()
    for line in rejection_lines(comparison):
        click.echo(line)
    if written:
        click.echo()
        click.echo(f"Report: {_report_line(written)}")


def verdict_sentence(comparison: Comparison) -> str:
    """Say which set wins, which check governs and by how much, and what the limits keep from deciding."""
    from actuator_sizing.case.judging import loosened_checks
    from actuator_sizing.report.document.verdict import unheld_load

    told = _verdict(comparison), *loosened_checks(comparison.case.limits), unheld_load(comparison)
    return " ".join(filter(None, told))


def _verdict(comparison: Comparison) -> str:
    from actuator_sizing.report.formatting import percent
    from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, NOT_CHECKED

    if not comparison.sets:
        return "No set can be formed: no drive of the case serves a motor that fits the mechanism."
    best = comparison.best
    name = clean(best.label)
    governing = _governing(best)
    if governing is None or governing.utilisation is None:
        how = "nothing could be checked"
    elif math.isinf(governing.utilisation):
        where = _place(governing)
        how = f"{governing.title} governs, with no capacity left at all{where}; the report shows the working"
    else:
        how = f"{governing.title} governs at {percent(governing.utilisation, governing.allowed)}"
        if governing.allowed != 1.0:
            how += f" of {percent(governing.allowed)} allowed"
        how += f", margin {percent(governing.margin, 0.0)}"
        how += _place(governing)
    if best.verdict == FAILS:
        return f"No set passes. The nearest is {name}: {how}."
    if best.verdict == NOT_CHECKED:
        missing = [c for c in best.checks if c.verdict == NOT_CHECKED]
        wanted = "; ".join(f"{c.title} (missing: {', '.join(c.missing) or 'data'})" for c in missing)
        return f"No set is confirmed. {name} fails nothing, but was not checked for: {clean(wanted)}; {how}."
    reserve = ", with low reserve" if best.verdict == LOW_RESERVE else ""
    loose = any(limit.applies == "no" for limit in comparison.case.limits.values())
    every = "every check that was judged" if loose else "every check"
    return f"{name} passes {every}{reserve}: {how}."


def _place(check: CheckResult) -> str:
    """Cycle and segment in which a check governs, as far as they have names."""
    cycle = f", in the cycle {clean(check.cycle)}" if check.cycle else ""
    return cycle + (f", in segment {clean(check.segment)}" if check.segment else "")


def rejection_lines(comparison: Comparison) -> list[str]:
    """How many sets there were, how many passed, and which checks the others lost by."""
    from actuator_sizing.case.check_names import CHECK_NAMES

    counts = comparison.rejections
    titles = dict(CHECK_NAMES)
    at_least = "" if counts.complete else "at least "
    parts = [
        f"{at_least}{_grouped(counts.confirmed_passing)} pass",
        f"{_grouped(counts.rejected)} rejected",
    ]
    if counts.not_checked:
        parts.append(f"{_grouped(counts.not_checked)} not checked")
    if counts.incompatible:
        parts.append(f"{_grouped(counts.incompatible)} incompatible")
    if not counts.complete:
        parts.append(f"{_grouped(counts.survivors - counts.evaluated)} possible ones not evaluated exactly")
    lines = [f"{_plural(counts.sets_total, 'set')}: {', '.join(parts)}."]
    ranked = sorted(counts.by_check.items(), key=lambda item: -item[1])
    reasons = [f"{titles.get(check, check)} {_grouped(count)}" for check, count in ranked if count]
    if reasons:
        lines.append(f"Rejected by: {', '.join(reasons)}.")
    return lines


def _governing(result: SetResult) -> Any:
    return next((check for check in result.checks if check.check == result.governing_check), None)


_HEADINGS = ("#", "motor", "gearhead", "ratio", "drive", "price", "governing check", "utilisation", "verdict")
_RIGHT = (0, 3, 5, 7)  # columns of numbers
_SPARE = (3, 5)  # ratio and price: the first columns to go where a terminal is narrow
_TEXTS = (1, 2, 4, 6)  # names of parts and check: the columns that may be cut
_GAP, _NARROWEST = 2, 8  # letters between columns; letters that a cut column keeps


def _row(result: SetResult) -> tuple[str, ...]:
    from actuator_sizing.report.formatting import number, percent

    governing = _governing(result)
    return (
        str(result.rank),
        clean(result.motor),
        clean(result.gearhead or "direct"),
        number(result.ratio),
        clean(result.drive),
        "-" if result.price is None else number(result.price, 6),
        governing.title if governing else "-",
        percent(governing.utilisation, governing.allowed) if governing else "-",
        result.verdict,
    )


def _print_table(headings: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """Aligned plain text when piped; on a terminal one line a set, cut to its width."""
    if not sys.stdout.isatty():
        print_plain_table(headings, rows, _RIGHT)
        return
    from rich.box import SIMPLE_HEAD
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    room = shutil.get_terminal_size().columns
    kept, lines = fit_columns([headings, *rows], room)
    table = Table(box=SIMPLE_HEAD, pad_edge=False, show_edge=False, padding=(0, 1, 0, 0))
    for index, heading in zip(kept, lines[0], strict=True):
        table.add_column(Text(heading), justify="right" if index in _RIGHT else "left", no_wrap=True)
    for cells in lines[1:]:
        table.add_row(*(Text(cell) for cell in cells))  # Text: a name such as "[b]" is no markup
    Console(width=room).print(table)


def print_plain_table(headings: Sequence[str], rows: Sequence[Sequence[str]], right: Sequence[int]) -> None:
    """Print a table as aligned text.

    Parameters
    ----------
    headings : sequence of str
        Names of the columns.
    rows : sequence of sequence of str
        Cells.
    right : sequence of int
        Columns of numbers, which stand to the right. [-]
    """
    widths = [max(map(len, column)) for column in zip(headings, *rows, strict=True)]
    for cells in (headings, *rows):
        padded = (
            cell.rjust(width) if index in right else cell.ljust(width)
            for index, (cell, width) in enumerate(zip(cells, widths, strict=True))
        )
        click.echo("  ".join(padded).rstrip())


def fit_columns(rows: Sequence[Sequence[str]], room: int) -> tuple[list[int], list[list[str]]]:
    """Leave out what a narrow terminal can spare, then cut the widest columns, so that a row takes one line.

    Parameters
    ----------
    rows : sequence of sequence of str
        Cells, headings first.
    room : int
        Letters of a line. [-]

    Returns
    -------
    kept : list of int
        Columns that are left.
    rows : list of list of str
        Their cells, the longer ones cut with an ellipsis.
    """
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    kept = list(range(len(widths)))

    def too_wide() -> int:
        return sum(widths[index] + _GAP for index in kept) - room

    for index in _SPARE:
        if too_wide() > 0:
            kept.remove(index)
    while too_wide() > 0 and max(widths[index] for index in _TEXTS) > _NARROWEST:
        widths[max(_TEXTS, key=lambda index: widths[index])] -= 1
    return kept, [[_cut(row[index], widths[index]) for index in kept] for row in rows]


def _cut(text: str, width: int) -> str:
    """Cut a text in its middle: names of one family differ at their ends."""
    if len(text) <= width:
        return text
    tail = (width - 1) // 2
    return f"{text[: width - 1 - tail]}…{text[len(text) - tail :]}"


def _report_line(written: Sequence[Path]) -> str:
    """Name the page to open first, and where the rest is."""
    pages = [path for path in written if path.suffix == ".html"]
    first = pages[0] if pages else written[0]
    others = len(written) - 1
    return f"{first}" + (f" (and {_plural(others, 'more file')} in {first.parent})" if others else "")


# -- progress ----------------------------------------------------------------------------------------


class ProgressBar:
    """A bar on stderr for work over a second; silent when stderr is not a terminal."""

    def __init__(self) -> None:
        self._enabled = sys.stderr.isatty()
        self._started = time.monotonic()
        self._bar: Any = None
        self._task: Any = None
        self._stage, self._stage_started, self._first_part = "", 0.0, 0.0

    def __enter__(self) -> Self:
        return self

    def __call__(self, stage: str, part_done: float) -> None:
        """Show how far the work is.

        Parameters
        ----------
        stage : str
            What is being done.
        part_done : float
            Part of it that is done, 0 to 1. [-]
        """
        if not self._enabled:
            return
        if self._bar is None:
            if time.monotonic() - self._started < _PATIENCE_S:
                return
            self._bar, self._task = _rich_bar()
            self._bar.start()
        self._bar.update(
            self._task, completed=part_done, description=clean(stage) + self._left(stage, part_done)
        )

    def _left(self, stage: str, part_done: float) -> str:
        """Time left in a stage, judged by the part of it that is done."""
        now = time.monotonic()
        if stage != self._stage:
            self._stage, self._stage_started, self._first_part = stage, now, part_done
        done, took = part_done - self._first_part, now - self._stage_started
        if done <= 0.0 or took < _PATIENCE_S:
            return ""
        minutes, seconds = divmod(round(took * (1.0 - part_done) / done), 60)
        return f", {minutes}:{seconds:02d} left"

    def tell(self, sentence: str) -> None:
        """Print a sentence on stderr, above the bar where there is one."""
        if self._bar is not None:
            self._bar.console.print(clean(sentence), markup=False, highlight=False)
        else:
            click.echo(clean(sentence), err=True)

    def __exit__(self, *_exception: object) -> None:
        if self._bar is not None:
            self._bar.stop()


def _rich_bar() -> tuple[Any, Any]:
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn

    bar = Progress(
        TextColumn("{task.description}", markup=False),
        BarColumn(),
        TimeElapsedColumn(),
        console=Console(stderr=True),
        transient=True,
    )
    return bar, bar.add_task("", total=1.0)
