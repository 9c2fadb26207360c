"""Commands that study one set or several axes: simulate, headroom, robust, machine."""

from __future__ import annotations

from pathlib import Path

import click

from actuator_sizing.cli_parts import NONE_PASSES, PASSED, case_argument, debug, one_set, report_folder


@click.command()
@click.argument("cases", nargs=-1, required=True, type=click.Path(exists=True, path_type=Path))
@click.option("--name", default="machine", show_default=True, help="Name of the machine, and of its folder.")
@click.option("--out", type=click.Path(file_okay=False, path_type=Path), help="Folder of the report.")
@click.option(
    "--rank-by",
    type=click.Choice(["price", "mass", "reserve", "energy"]),
    help="What the passing sets are ranked by; default: what each case says.",
)
@click.option("--json", "as_json", is_flag=True, help="Print machine.json; no files unless --out is given.")
@click.option("--pdf/--no-pdf", default=None, help="Write the PDF too; default: if its package is installed.")
@debug
def machine(
    cases: tuple[Path, ...], name: str, out: Path | None, rank_by: str | None, as_json: bool, pdf: bool | None
) -> int:
    """Size the axes of one machine, one of CASES each.

    Compares every axis by itself, then says which types repeat, what fewer motor types would cost, and what
    the axes ask together of their bus. The report goes to reports/<name>/. Name a case twice for two equal axes.
    """
    from actuator_sizing.console import ProgressBar
    from actuator_sizing.machine_console import print_machine, read_cases
    from actuator_sizing.report.machine import write_machine
    from actuator_sizing.sizing.machine import compare_machine

    understood = read_cases(cases)
    written: tuple[Path, ...] = ()
    with ProgressBar() as progress:
        compared = compare_machine(understood, name=name, rank_by=rank_by, progress=progress)
        if out is not None or not as_json:
            progress("writing the report", 0.0)
            written = write_machine(compared, out or report_folder(name), pdf=pdf)
    if as_json:
        from actuator_sizing.report.machine.results import render_machine_json

        click.echo(render_machine_json(compared).rstrip(b"\n"))
    else:
        print_machine(compared, written)
    return PASSED if compared.passes else NONE_PASSES


@click.command()
@case_argument("case")
@one_set
@click.option(
    "--input",
    "input_",
    default="cycle",
    show_default=True,
    metavar="cycle|step|sine|stop|FILE",
    help="What is commanded; FILE is a CSV table with time [s], voltage [V] and perhaps load torque [Nm].",
)
@click.option(
    "--set", "changes", multiple=True, metavar="SETTING=VALUE", help="Change a setting of the loops."
)
@click.option(
    "--cycle",
    default="",
    metavar="NAME",
    help="Cycle of a case with several; default: the first, for stops the fastest.",
)
@click.option(
    "--rate",
    type=click.FloatRange(min=0.0, min_open=True),
    metavar="HZ",
    help="Sampling rate; default: the drive's control rate.",
)
@click.option("--winding", type=float, metavar="°C", help="Winding temperature; default: as the case judges.")
@click.option("--cycles", type=click.IntRange(min=1), default=1, metavar="N", help="How many cycles to run.")
@click.option(
    "--out", type=click.Path(file_okay=False, path_type=Path), help="Write tables and figures here."
)
@click.option("--json", "as_json", is_flag=True, help="Print quantities, settings and stops as JSON.")
@debug
def simulate(
    case: Path,
    motor: str | None,
    gearhead: str | None,
    drive: str | None,
    input_: str,
    changes: tuple[str, ...],
    cycle: str,
    rate: float | None,
    winding: float | None,
    cycles: int,
    out: Path | None,
    as_json: bool,
) -> None:
    """Simulate one set of CASE.

    Runs the duty cycle in closed loop, or a voltage step, a sinusoid, stops, or samples from a file, and
    prints errors, settling, saturation, margins and resonance with the settings of the loops.
    """
    import math

    from actuator_sizing.case.reading import read_case
    from actuator_sizing.simulation_console import print_simulation
    from actuator_sizing.sizing.simulation import simulate as simulate_set
    from actuator_sizing.sizing.simulation_request import parse_settings

    if rate is not None and math.isnan(rate):
        raise click.BadParameter("nan is not a sampling rate", param_hint="--rate")
    simulation = simulate_set(
        read_case(case),
        motor=motor,
        gearhead=gearhead,
        drive=drive,
        input=input_,
        settings=parse_settings(changes),
        rate_hz=math.nan if rate is None else rate,
        winding_degc=math.nan if winding is None else winding,
        cycles=cycles,
        cycle=cycle,
    )
    written = simulation.write(out) if out is not None else ()
    if as_json:
        from actuator_sizing.report.simulation_files import render_simulation_json

        click.echo(render_simulation_json(simulation).rstrip(b"\n"))
    else:
        print_simulation(simulation, written)


@click.command()
@case_argument("case")
@one_set
@click.option("--map", "with_map", is_flag=True, help="Work out the map of payload against cycle time too.")
@click.option(
    "--out", type=click.Path(file_okay=False, path_type=Path), help="Write tables, results and the map here."
)
@click.option("--json", "as_json", is_flag=True, help="Print the limits as JSON.")
@debug
def headroom(
    case: Path,
    motor: str | None,
    gearhead: str | None,
    drive: str | None,
    with_map: bool,
    out: Path | None,
    as_json: bool,
) -> int:
    """Find what one set of CASE can do at most.

    Drives cycle time, each move, payload, ambient, holding and dwell to their limits, one at a time, and names
    the check that bounds each.
    """
    from actuator_sizing.case.reading import read_case
    from actuator_sizing.console import ProgressBar
    from actuator_sizing.headroom_console import print_headroom
    from actuator_sizing.report.headroom_files import render_headroom_json, write_headroom
    from actuator_sizing.sizing.headroom import headroom as find_headroom

    with ProgressBar() as progress:
        found = find_headroom(
            read_case(case), motor=motor, gearhead=gearhead, drive=drive, with_map=with_map, progress=progress
        )
    written = write_headroom(found, out) if out is not None else ()
    if as_json:
        click.echo(render_headroom_json(found).rstrip(b"\n"))
    else:
        print_headroom(found, written)
    return PASSED if found.present.is_met else NONE_PASSES


@click.command()
@case_argument("case")
@one_set
@click.option("--samples", type=click.IntRange(min=1), metavar="N", help="Samples; default 10000.")
@click.option(
    "--exact",
    type=click.IntRange(min=1),
    metavar="N",
    help="How many of them go through the whole chain where a check needs it; default 1000, or 200 where each "
    "takes tens of milliseconds.",
)
@click.option("--seed", type=click.IntRange(min=0), default=0, show_default=True, help="Of everything drawn.")
@click.option(
    "--probability",
    type=float,
    metavar="P",
    help="Look for the first set of the ranking that passes with this probability, such as 0.99.",
)
@click.option(
    "--out", type=click.Path(file_okay=False, path_type=Path), help="Write tables and figures here."
)
@click.option("--json", "as_json", is_flag=True, help="Print the whole study as JSON.")
@debug
def robust(
    case: Path,
    motor: str | None,
    gearhead: str | None,
    drive: str | None,
    samples: int | None,
    exact: int | None,
    seed: int,
    probability: float | None,
    out: Path | None,
    as_json: bool,
) -> int:
    """Say how sure a set of CASE passes.

    Draws the spreads that the table 'tolerances' states and prints the probability of passing each check and
    all of them, with its interval, and which input drives it. The exit status is 0 when the probability that was
    asked for is reached, else 1; without one, 0 when the set passes in more than half of the samples.
    """
    from actuator_sizing.case.reading import read_case
    from actuator_sizing.console import ProgressBar
    from actuator_sizing.robustness_console import print_robustness
    from actuator_sizing.sizing.robustness.robust import SAMPLES
    from actuator_sizing.sizing.robustness.robust import robust as robust_set

    understood = read_case(case)
    with ProgressBar() as progress:
        study = robust_set(
            understood,
            motor=motor,
            gearhead=gearhead,
            drive=drive,
            samples=SAMPLES if samples is None else samples,
            exact=exact,
            seed=seed,
            probability=probability,
            progress=progress,
        )
    written = study.write(out) if out is not None else ()
    if as_json:
        from actuator_sizing.report.robustness_files import render_robustness_json

        click.echo(render_robustness_json(study).rstrip(b"\n"))
    else:
        print_robustness(study, written)
    return PASSED if study.passes_with(0.5 if probability is None else probability) else NONE_PASSES
