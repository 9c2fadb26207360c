"""The command line: parse, call, print, exit status. Nothing here that a notebook could not do."""

from __future__ import annotations

import gc
import os
import sys
import traceback
from pathlib import Path
from typing import Any, NoReturn, TextIO

import click

from actuator_sizing import __version__, cli_studies
from actuator_sizing.cli_parts import (
    BAD_INPUT,
    BROKEN_PIPE,
    INTERNAL,
    INTERRUPTED,
    NONE_PASSES,
    PASSED,
    case_argument,
    debug,
    report_folder,
)
from actuator_sizing.errors import ActuatorSizingError, InputError, OutputError, StoppedError

_HELP = {"help_option_names": ["-h", "--help"], "max_content_width": 100}


class _StartCommand(click.Command):
    """Lists the mechanisms under the help page; they are looked up only when it is shown."""

    def format_epilog(self, _context: click.Context, formatter: click.HelpFormatter) -> None:
        from actuator_sizing.core.mechanisms import MECHANISMS

        formatter.write_paragraph()
        with formatter.section("Mechanisms"):
            formatter.write_dl([(name, mechanism.help) for name, mechanism in MECHANISMS.items()])


@click.group(context_settings=_HELP)
@click.version_option(__version__, prog_name="actuator-sizing")
@debug
def commands() -> None:
    """Choose the motor, gearhead, drive and supply of a motion axis, and defend the choice.

    A case is a folder of CSV files or one .xlsx workbook. Make one with 'start', fill it in, look it over
    with 'audit', and size it with 'compare'.

    Exit status: 0 a set passes every check, 1 sized but none passes, 2 bad input or usage,
    3 fault of the program.
    """


@commands.command(cls=_StartCommand)
@click.argument("path", type=click.Path(path_type=Path))
@click.option("--mechanism", metavar="NAME", help="Mechanism of the axis; the choices stand below.")
@click.option(
    "--duty-type",
    type=click.Choice(["S1", "S2", "S3", "S4", "S5", "S6", "S8", "S10"]),
    help="Duty type of IEC 60034-1 in place of a duty cycle.",
)
@debug
def start(path: Path, mechanism: str | None, duty_type: str | None) -> None:
    """Write a new case with example rows to PATH.

    It is a workbook if PATH ends in .xlsx, else a folder of CSV files. Every table has its headings with
    units, the allowed values, hints and filled example rows.
    """
    from actuator_sizing.case.starting import DEFAULT_MECHANISM, start_case

    written = start_case(path, mechanism or DEFAULT_MECHANISM, duty_type=duty_type or "")
    click.echo(
        f"Started {_files(len(written))} in {path}" if path.suffix.lower() != ".xlsx" else f"Started {path}"
    )
    click.echo(f"Fill it in, then: actuator-sizing audit {path}")


@commands.command()
@case_argument("case")
@debug
def audit(case: Path) -> int:
    """Report every problem of CASE at once.

    Reads and checks every table, finds the entries of a data sheet that contradict each other, and draws
    the motion to reports/<case name>/motion.svg.
    """
    from actuator_sizing.case.audit import audit_catalogs
    from actuator_sizing.case.reading import check_case
    from actuator_sizing.console import clean, count_line, print_problems

    understood, problems = check_case(case)
    if understood is not None:  # reading may have audited already
        problems = tuple(dict.fromkeys((*problems, *audit_catalogs(understood))))
    print_problems(problems)
    click.echo(count_line(problems), err=understood is None)
    if understood is None:
        return BAD_INPUT
    from actuator_sizing.report.motion_picture import write_motion

    for path, each in zip(
        write_motion(understood, report_folder(understood.name)), understood.by_cycle(), strict=True
    ):
        named = f" {clean(each.cycle.name)}" if each.cycle.name else ""
        click.echo(f"Motion{named}: {path}")
    return PASSED


@commands.command()
@case_argument("case")
@click.option("--out", type=click.Path(file_okay=False, path_type=Path), help="Folder of the report.")
@click.option(
    "--rank-by",
    type=click.Choice(["price", "mass", "reserve", "energy"]),
    help="What the passing sets are ranked by; default: the case's own, else price.",
)
@click.option(
    "--detail", type=click.IntRange(min=1), metavar="N", help="How many sets to evaluate in detail."
)
@click.option("--json", "as_json", is_flag=True, help="Print results.json; no files unless --out is given.")
@click.option(
    "--since",
    type=click.Path(path_type=Path),
    help="Earlier results.json, or its folder: say which inputs changed and what moved.",
)
@click.option(
    "--levers",
    type=click.IntRange(min=0),
    default=0,
    metavar="N",
    help="For the N nearest losers, find the smallest change of each lever that lets them pass; for a leading "
    "set with low reserve, the change that gives it more.",
)
@click.option(
    "--trade-offs", is_flag=True, help="Find the sets that no other beats in price, mass, energy and reserve."
)
@click.option("--ratios", is_flag=True, help="Work out which transmission ratios each motor can live with.")
@click.option(
    "--headroom", is_flag=True, help="Find what the leading set can do at most, as 'headroom' does."
)
@click.option("--pdf/--no-pdf", default=None, help="Write the PDF too; default: if its package is installed.")
@click.option(
    "--workers",
    type=click.IntRange(min=1),
    metavar="N",
    help="Screen with N processes; default: one, and one for each processor where catalogs are large.",
)
@click.option("--cluster", metavar="ADDRESS", help="Screen on the workers of a dask scheduler.")
@click.option(
    "--checkpoint",
    type=click.Path(dir_okay=False, path_type=Path),
    metavar="FILE",
    help="Keep what a long screening has found, to go on after Ctrl-C; default where catalogs are large: "
    "a file beside the report.",
)
@debug
def compare(
    case: Path,
    out: Path | None,
    rank_by: str | None,
    detail: int | None,
    as_json: bool,
    since: Path | None,
    levers: int,
    trade_offs: bool,
    ratios: bool,
    headroom: bool,
    pdf: bool | None,
    workers: int | None,
    cluster: str | None,
    checkpoint: Path | None,
) -> int:
    """Size CASE and write the report.

    Compares all motor x gearhead x drive sets and ranks those that pass. The report goes to
    reports/<case name>/ below the current folder unless --out says otherwise.
    """
    from actuator_sizing.case.reading import read_case
    from actuator_sizing.console import ProgressBar, print_problems, print_summary
    from actuator_sizing.sizing import compare as compare_sets
    from actuator_sizing.sizing.workplaces import is_kept, workplace

    earlier = None
    if since is not None:
        from actuator_sizing.report.revision import read_results

        earlier = read_results(since)  # before the report, which may replace it
    understood = read_case(case)
    folder = out or report_folder(understood.name)
    if checkpoint is None and is_kept(understood):
        checkpoint = folder / f"screening-{understood.fingerprint[:12]}.checkpoint"
    with ProgressBar() as progress, workplace(understood, workers, cluster) as executor:
        comparison = compare_sets(
            understood,
            rank_by=rank_by,
            detail=detail,
            levers=levers,
            trade_offs=trade_offs,
            windows=ratios,
            headroom=headroom,
            progress=progress,
            executor=executor,
            checkpoint=checkpoint,
            tell=progress.tell,
        )
        written: tuple[Path, ...] = ()
        if out is not None or not as_json:
            from actuator_sizing.report import write_report

            progress("writing the report", 0.0)
            written = write_report(comparison, folder, pdf=pdf, since=earlier)
    print_problems(understood.problems, at_most=10)
    if as_json:
        from actuator_sizing.report.json_results import render_json

        click.echo(render_json(comparison).rstrip(b"\n"))
    else:
        print_summary(comparison, written)
        if earlier is not None:
            from actuator_sizing.report.document.changes import changes_lines
            from actuator_sizing.report.json_results import results_dict
            from actuator_sizing.report.revision import revision_since

            click.echo("\n" + "\n".join(changes_lines(revision_since(earlier, results_dict(comparison)))))
    return PASSED if comparison.passes else NONE_PASSES


@commands.command()
@case_argument("case")
@click.argument("target", type=click.Path(path_type=Path))
@click.option("--force", is_flag=True, help="Replace TARGET if it exists.")
@debug
def convert(case: Path, target: Path, force: bool) -> None:
    """Rewrite CASE as a folder or a workbook.

    A folder becomes the workbook TARGET, a workbook the folder TARGET, without loss.
    """
    from actuator_sizing.case.converting import convert_case

    convert_case(case, target, overwrite=force)
    click.echo(f"Wrote {target}")


@commands.command()
@click.option(
    "--out", type=click.Path(dir_okay=False, path_type=Path), help="Write here instead of printing."
)
@debug
def columns(out: Path | None) -> None:
    """Print what every table and column may hold.

    The page is Markdown: columns, units, bounds, words, and what is assumed where nothing is given.
    """
    from actuator_sizing.case.documentation import columns_page

    page = columns_page().encode()
    if out is None:
        click.echo(page, nl=False)
        return
    from actuator_sizing.files import write_atomically

    write_atomically(out, page)
    click.echo(f"Wrote {out}")


for _command in (cli_studies.machine, cli_studies.simulate, cli_studies.headroom, cli_studies.robust):
    commands.add_command(_command)


def main(arguments: list[str] | None = None) -> NoReturn:
    """Run the command line and leave with its exit status.

    Parameters
    ----------
    arguments : list of str or None
        Command-line arguments; None takes those of the process.

    Raises
    ------
    SystemExit
        Always, with the exit status.
    """
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")  # an ASCII terminal gets "?" for Ω, not an error
    if arguments is None:
        # A process of its own keeps nearly all it makes until its end: looking through that again and again for
        # garbage in cycles took a tenth of a comparison.
        gc.set_threshold(50_000, 20, 20)
    state: dict[str, Any] = {}
    try:
        # Not commands.main: it ends a broken pipe with status 1, which here means that no set passes.
        given = sys.argv[1:] if arguments is None else list(arguments)
        with commands.make_context("actuator-sizing", given, obj=state) as context:
            status = commands.invoke(context)
        sys.stdout.flush()
    except BrokenPipeError:
        _silence(sys.stdout)
        status = BROKEN_PIPE
    except Exception as error:  # the outermost edge: no user ever meets a bare traceback
        if state.get("debug"):
            traceback.print_exc()
        status = _tell(error)
    except KeyboardInterrupt:
        click.echo("Stopped.", err=True)
        status = INTERRUPTED
    sys.exit(status or PASSED)


def _tell(error: Exception) -> int:
    """Say what went wrong on stderr and return the exit status."""
    if isinstance(error, click.exceptions.Exit):
        return error.exit_code
    if isinstance(error, click.ClickException):
        error.show()
        return BAD_INPUT
    if isinstance(error, InputError):
        from actuator_sizing.console import count_line, print_problems

        print_problems(error.problems)
        click.echo(count_line(error.problems), err=True)
        return BAD_INPUT
    if isinstance(error, StoppedError):
        click.echo(str(error), err=True)
        return INTERRUPTED
    if isinstance(error, OutputError | ActuatorSizingError):
        click.echo(f"Error: {error}", err=True)
        return BAD_INPUT
    if isinstance(error, MemoryError):
        click.echo("Error: not enough memory for this case.", err=True)
        return BAD_INPUT
    click.echo(
        f"Fault of the program, not of the case: {type(error).__name__}: {error}\n"
        "Run the same command with --debug and report what it prints.",
        err=True,
    )
    return INTERNAL


def _silence(stream: TextIO) -> None:
    """Point a broken stream at nothing, so that the flush at exit does not complain."""
    try:
        os.dup2(os.open(os.devnull, os.O_WRONLY), stream.fileno())
    except (OSError, ValueError):  # no real file behind the stream
        return


def _files(count: int) -> str:
    return f"{count} file" if count == 1 else f"{count} files"
