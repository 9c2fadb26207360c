"""What the command line prints, where, and with which exit status."""

import csv
import io
import json
import os
import signal
import subprocess
import sys
import time

import pytest

from actuator_sizing import cli, console, start_case
from actuator_sizing.case.writing import csv_bytes
from actuator_sizing.errors import InputError, OutputError, Problem

PROGRAM = [sys.executable, "-m", "actuator_sizing"]


@pytest.fixture
def run(capsys):
    """Run the command line in this process: exit status, stdout, stderr."""

    def call(*arguments):
        with pytest.raises(SystemExit) as left:
            cli.main([str(argument) for argument in arguments])
        out, err = capsys.readouterr()
        return left.value.code, out, err

    return call


@pytest.fixture
def case(tmp_path, monkeypatch):
    """A started case in an otherwise empty current folder."""
    monkeypatch.chdir(tmp_path)
    start_case(tmp_path / "my axis", "belt")
    return tmp_path / "my axis"


def rewrite(case, table, change):
    path = case / f"{table}.csv"
    rows = list(csv.reader(io.StringIO(path.read_text("utf-8-sig"), newline="")))
    path.write_bytes(csv_bytes(change(rows)))


def set_axis(case, quantity, value):
    rewrite(
        case,
        "axis",
        lambda rows: [[r[0], value, *r[2:]] if r[0] == quantity else r for r in rows],
    )


# -- compare -----------------------------------------------------------------------------------------


def test_a_check_without_any_capacity_is_told_in_one_line(case, run):
    set_axis(case, "nominal bus voltage", 12)
    set_axis(case, "minimum bus voltage", 10)
    set_axis(case, "maximum bus voltage", 14)
    rewrite(case, "limits", lambda rows: [[r[0], "no", *r[2:]] if r[0] == "drive bus voltage range" else r
                                          for r in rows])  # fmt: skip
    status, out, _ = run("compare", case)
    first = out.splitlines()[0]
    assert status == 1
    assert first.startswith("No set passes. The nearest is ")
    assert "governs, with no capacity left at all" in first
    sentence, end, honesty = first.partition("; the report shows the working.")
    assert end
    assert len(sentence) < 220
    assert "drive bus voltage range" in honesty  # what was switched off is said beside the verdict


def test_compare_prints_the_verdict_first_and_writes_the_report(case, run, tmp_path):
    status, out, err = run("compare", case)
    lines = out.splitlines()
    assert status == 0
    assert err == ""
    assert lines[0].startswith("example motor + example gearhead + example drive passes every check")
    assert " governs at " in lines[0]
    assert "margin" in lines[0]
    assert lines[2].split()[:5] == ["#", "motor", "gearhead", "ratio", "drive"]
    assert lines[3].split()[0] == "1"
    assert any(line.startswith("2 sets: 1 pass, 1 rejected") for line in lines)
    assert len(lines) < 24  # a small screen
    folder = tmp_path / "reports" / "my axis"
    assert lines[-1].startswith(f"Report: {os.path.join('reports', 'my axis', 'sizing_report.html')}")
    assert {"sizing_report.html", "sizing_tables.xlsx", "results.json"} <= {p.name for p in folder.iterdir()}


def test_a_loser_gives_status_1_and_the_reason(case, run):
    set_axis(case, "moving mass", "180")
    status, out, _ = run("compare", case, "--out", "elsewhere")
    assert status == 1
    assert out.startswith("No set passes. The nearest is ")
    assert "Rejected by: " in out
    assert os.path.isdir("elsewhere")


def test_json_goes_to_stdout_alone(case, run, tmp_path):
    status, out, err = run("compare", case, "--json", "--rank-by", "mass", "--detail", "1")
    results = json.loads(out)
    assert (status, err) == (0, "")
    assert results["schema"] == "actuator-sizing/results/1"
    assert results["sets"][0]["verdict"] == "passes"
    assert not (tmp_path / "reports").exists()
    status, out, _ = run("compare", case, "--json", "--out", "chosen")
    assert json.loads(out) == json.loads((tmp_path / "chosen" / "results.json").read_text("utf-8"))


def test_a_report_that_cannot_be_written_says_so(case, run, tmp_path):
    (tmp_path / "reports").write_text("a file in the way")
    status, out, err = run("compare", case)
    assert status == 2
    assert out == ""
    assert err.startswith("Error: Cannot write")
    assert "Traceback" not in err


def test_a_name_cannot_lead_out_of_the_reports_folder():
    assert str(cli.report_folder("../../etc")) == os.path.join("reports", "_.._etc")
    assert str(cli.report_folder("..")) == os.path.join("reports", "case")
    assert str(cli.report_folder("a\nb")) == os.path.join("reports", "a_b")


# -- audit -------------------------------------------------------------------------------------------


def test_audit_of_a_clean_case_draws_its_motion(case, run, tmp_path):
    picture = os.path.join("reports", "my axis", "motion.svg")
    assert run("audit", case) == (0, f"No problems found.\nMotion: {picture}\n", "")
    drawn = (tmp_path / picture).read_text("utf-8")
    assert drawn.startswith("<?xml")
    assert "acceleration" in drawn
    assert "effort at the load" in drawn


def test_audit_tells_all_problems_grouped_with_errors_first(case, run):
    set_axis(case, "moving mass", "-3")
    set_axis(case, "ambient temperature", "warm")

    def spoil(rows):
        at = rows[0].index("rotor inertia [kg·cm²]")
        rows[0].append("colour")
        rows[1].append("red")
        rows[1][at] = "abc"
        return rows

    rewrite(case, "motors", spoil)
    status, out, err = run("audit", case)
    lines = err.splitlines()
    assert status == 2
    assert out == ""
    assert "Traceback" not in err
    assert lines[-1] == "3 errors, 1 warning in 2 tables."
    heads = [line for line in lines[:-1] if not line.startswith(" ")]
    assert sorted(heads) == ["axis", "motors"]
    within = lines[lines.index("motors") + 1 :]
    assert within[0].startswith("  error    row 2, 'rotor inertia [kg·cm²]': got 'abc'")
    assert within[1].startswith("  warning  'colour'")
    assert any("got -3" in line or "got '-3'" in line for line in lines)
    assert run("compare", case)[0] == 2


def test_warnings_alone_do_not_fail(case, run):
    rewrite(case, "drives", lambda rows: [[*rows[0], "colour"], [*rows[1], "red"]])
    status, out, err = run("audit", case)
    assert status == 0
    assert out.splitlines()[0] == "1 warning in 1 table."
    assert "colour" in err


# -- start, convert, columns ---------------------------------------------------------------------------


def test_start_refuses_to_overwrite(case, run):
    before = {path: path.read_bytes() for path in case.iterdir()}
    status, out, err = run("start", case)
    assert (status, out) == (2, "")
    assert "exists already" in err
    assert {path: path.read_bytes() for path in case.iterdir()} == before


def test_start_and_convert(run, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert run("start", "new.xlsx", "--mechanism", "lead screw")[0] == 0
    assert run("audit", "new.xlsx")[0] == 0
    assert run("convert", "new.xlsx", "new")[0] == 0
    assert run("convert", "new.xlsx", "new")[0] == 2
    assert run("convert", "new.xlsx", "new", "--force")[0] == 0
    assert run("start", "other", "--mechanism", "crank")[0] == 2
    assert not (tmp_path / "other").exists()


def test_columns_page(run, tmp_path):
    status, out, _ = run("columns")
    assert status == 0
    assert "`rotor inertia` *" in out
    assert run("columns", "--out", tmp_path / "page.md")[0] == 0
    assert (tmp_path / "page.md").read_text("utf-8") == out


# -- usage and faults ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("arguments", "status", "text"),
    [
        (["--help"], 0, ""),
        (["--version"], 0, ""),
        (["start", "--help"], 0, ""),
        ([], 2, "Usage"),
        (["compar"], 2, "Did you mean 'compare'"),
        (["compare"], 2, "Missing argument"),
        (["compare", "nowhere"], 2, "does not exist"),
        (["compare", ".", "--rank-by", "luck"], 2, "'luck' is not one of"),
        (["compare", ".", "--detail", "0"], 2, "0 is not in the range"),
    ],
)
def test_usage(run, arguments, status, text):
    got, _, err = run(*arguments)
    assert got == status
    assert text in err


def test_start_help_lists_every_mechanism(run):
    from actuator_sizing.core.mechanisms import MECHANISMS

    _, out, _ = run("start", "--help")
    assert all(name in out for name in MECHANISMS)


@pytest.mark.parametrize(
    ("error", "status", "text"),
    [
        (InputError([Problem("motors", 2, "mass [kg]", "-1", "> 0")]), 2, "row 2, 'mass [kg]': got -1"),
        (OutputError("Cannot write 'x': the disk is full."), 2, "the disk is full"),
        (MemoryError(), 2, "not enough memory"),
        (ZeroDivisionError("division by zero"), 3, "Fault of the program"),
        (KeyboardInterrupt(), 130, "Stopped."),
        (BrokenPipeError(), 141, ""),
    ],
)
def test_no_error_shows_a_traceback(run, monkeypatch, case, error, status, text):
    def fail(*_arguments, **_options):
        raise error

    monkeypatch.setattr("actuator_sizing.case.reading.read_case", fail)
    got, out, err = run("compare", case)
    assert (got, out) == (status, "")
    assert text in err
    assert "Traceback" not in err
    if isinstance(error, Exception) and status != 141:
        for arguments in (["compare", case, "--debug"], ["--debug", "compare", case]):
            got, _, err = run(*arguments)
            assert got == status
            assert "Traceback" in err


def test_a_closed_pipe_ends_quietly(case):
    with subprocess.Popen(
        [*PROGRAM, "columns"], stdout=subprocess.PIPE, stderr=subprocess.PIPE, cwd=case.parent
    ) as process:
        process.stdout.close()
        err = process.stderr.read()
        status = process.wait()
    assert err == b""
    assert status == cli.BROKEN_PIPE


@pytest.mark.skipif(os.name == "nt", reason="signals of Unix")
def test_an_interrupt_ends_quietly():
    code = (
        "import actuator_sizing.case.documentation as d, time, sys\n"
        "d.columns_page = lambda: (print('ready', file=sys.stderr, flush=True), time.sleep(60))\n"
        "from actuator_sizing.cli import main\nmain(['columns'])"
    )
    with subprocess.Popen([sys.executable, "-c", code], stderr=subprocess.PIPE, text=True) as process:
        assert process.stderr.readline() == "ready\n"
        process.send_signal(signal.SIGINT)
        err = process.stderr.read()
        status = process.wait()
    assert (err, status) == ("Stopped.\n", 130)


def test_an_ascii_terminal_gets_question_marks_not_an_error(case):
    done = subprocess.run(
        [*PROGRAM, "columns"],
        capture_output=True,
        env={**os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0"},
    )
    assert done.returncode == 0
    assert done.stderr == b""


# -- console -------------------------------------------------------------------------------------------


def test_text_of_a_table_cannot_steer_the_terminal(capsys):
    console.print_problems([Problem("mot\x1b[2Jors", 2, "mass\n[kg]", "\x07bell")])
    err = capsys.readouterr().err
    assert "\x1b" not in err
    assert "\x07" not in err
    assert len(err.splitlines()) == 2


def test_a_long_list_is_cut_only_where_asked(capsys):
    many = [Problem("motors", row, severity="warning") for row in range(30)]
    console.print_problems(many)
    assert len(capsys.readouterr().err.splitlines()) == 31
    console.print_problems(many, at_most=10)
    assert "... and 20 more" in capsys.readouterr().err


def test_progress_is_silent_without_a_terminal(capsys):
    with console.ProgressBar() as bar:
        bar("screening", 0.5)
    assert capsys.readouterr() == ("", "")


def test_progress_shows_on_a_terminal_after_a_second(monkeypatch):
    class Terminal(io.StringIO):
        def isatty(self):
            return True

    terminal = Terminal()
    monkeypatch.setattr(sys, "stderr", terminal)
    now = time.monotonic()
    monkeypatch.setattr(console.time, "monotonic", lambda: now)
    with console.ProgressBar() as bar:
        bar("screening", 0.1)
        assert terminal.getvalue() == ""
        monkeypatch.setattr(console.time, "monotonic", lambda: now + 2.0)
        bar("screening", 0.5)
    assert "screening" in terminal.getvalue()


def test_a_terminal_gets_a_table_without_markup(monkeypatch):
    class Terminal(io.StringIO):
        def isatty(self):
            return True

    terminal = Terminal()
    monkeypatch.setattr(sys, "stdout", terminal)
    console._print_table(("#", "motor"), [("1", "[red]name[/red]")])
    assert "[red]name[/red]" in terminal.getvalue()
