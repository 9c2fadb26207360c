"""What a robustness study gives to its readers: command line, files, report, notebook."""

from __future__ import annotations

import io
import json
import zipfile

import numpy as np
import openpyxl
import pytest
from click.testing import CliRunner

import actuator_sizing as act
from actuator_sizing.cli import commands, main
from actuator_sizing.robustness_console import print_robustness
from tests.unit.case_files import small_case, write_folder
from tests.unit.robust_case import PARTS, spread, with_spreads

HEAD = ["quantity", "distribution", "width", "unit", "table", "truncation", "correlation", "source"]
ROWS = [
    ["torque constant", "normal", 5, "%", "", "", "resistance terminal-to-terminal 0.7", "=1+1 <script>"],
    ["resistance terminal-to-terminal", "truncated normal", 5, "%", "", 2, "", ""],
    ["ambient temperature", "uniform", 5, "K", "", "", "", ""],
]


@pytest.fixture(scope="module")
def case_path(tmp_path_factory):
    tables = small_case()
    tables["tolerances"] = [HEAD, *ROWS]
    return write_folder(tmp_path_factory.mktemp("robust") / "case", tables)


@pytest.fixture(scope="module")
def study():
    return act.robust(
        with_spreads(
            spread("torque constant", 0.05, "motors"),
            spread("ambient temperature", 5.0, "axis", relative=False, shape="uniform"),
        ),
        **PARTS, samples=500, exact=20, sensitivity=32,
    )  # fmt: skip


def run(*arguments):
    return CliRunner().invoke(commands, [str(argument) for argument in arguments], standalone_mode=False)


def test_the_command_prints_one_screen_and_writes_files(case_path, tmp_path):
    result = run("robust", case_path, "--samples", 300, "--exact", 10, "--out", tmp_path / "out")
    assert result.exception is None
    assert "95 % interval" in result.output
    assert "varies with (total index)" in result.output
    names = {path.name for path in (tmp_path / "out").iterdir()}
    assert {
        "robustness.json",
        "robustness_tables.xlsx",
        "robust_checks.csv",
        "robust_sensitivity.csv",
    } <= names
    assert {p.name for p in (tmp_path / "out" / "figures").iterdir()} >= {
        "robust_probability.svg",
        "robust_swings.svg",
    }
    book = openpyxl.load_workbook(io.BytesIO((tmp_path / "out" / "robustness_tables.xlsx").read_bytes()))
    assert "robust checks" in book.sheetnames
    sheet = book["robust inputs"]
    sources = [cell.value for cell in sheet[1]]
    assert sheet.cell(2, sources.index("source") + 1).data_type == "s"  # hostile text stays text


def test_an_input_that_needs_the_whole_chain_is_printed_with_its_sample_counts(tmp_path):
    folder = tmp_path / "belt"
    assert run("start", folder, "--mechanism", "belt").exception is None
    with (folder / "tolerances.csv").open("a", encoding="utf-8") as table:
        table.write("guide friction force,uniform,10,%,axis,,,\n")
    result = run("robust", folder, "--samples", 60, "--exact", 20, "--seed", 1, "--out", tmp_path / "out")
    assert result.exception is None
    headline = result.output.splitlines()[0]
    assert "of 20 samples" in headline
    assert "Of 60 samples asked for" in headline
    assert "20 went through the whole chain" in headline


def test_a_study_without_indices_can_be_ranked_and_drawn(capsys):
    study = act.robust(
        with_spreads(spread("torque constant", 0.05, "motors")), **PARTS, samples=20, exact=5, sensitivity=0
    )
    assert study.sensitivity.empty
    assert {str(study.sensitivity[name].dtype) for name in study.sensitivity.columns[2:]} == {"float64"}
    print_robustness(study, ())
    assert "total index" not in capsys.readouterr().out
    assert "robust_sensitivity" not in study.figures()
    assert "20 were asked for, 5 went through the whole chain" in study._repr_html_()


def test_json_is_json_and_says_what_it_is(case_path):
    result = run("robust", case_path, "--samples", 50, "--exact", 5, "--json")
    answer = json.loads(result.output)
    assert answer["schema"] == "actuator-sizing/robustness/1"
    assert answer["interval"] == "Wilson"
    assert {row["input"] for row in answer["inputs"]} == {row[0] for row in ROWS}
    assert answer["inputs"][0]["low"] is None  # a normal distribution has no end


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["--probability", "1.2"], "above 0 and below 1"),
        (["--motor", "M-1O", "--drive", "D-1"], "Did you mean"),
        (
            ["--motor", "M-10", "--drive", "D-1", "--gearhead", "G-3", "--probability", "0.9"],
            "either a probability",
        ),
    ],
)
def test_bad_options_end_with_status_2(case_path, arguments, said, capsys):
    with pytest.raises(SystemExit) as left:
        main(["robust", str(case_path), *arguments])
    assert left.value.code == 2
    assert said in capsys.readouterr().err


def test_a_bad_table_ends_with_status_2_and_every_problem(tmp_path, capsys):
    tables = small_case()
    tables["tolerances"] = [
        HEAD,
        ["torque constant", "normal", 50, "%", "", "", "", ""],
        ["rotor inertai", "normal", 5, "%", "", "", "", ""],
        ["moving mass", "uniform", 30, "kg", "", "", "", ""],
    ]
    with pytest.raises(SystemExit) as left:
        main(["robust", str(write_folder(tmp_path / "case", tables))])
    assert left.value.code == 2
    said = capsys.readouterr().err
    assert "Did you mean 'rotor inertia'?" in said
    assert said.count("error") >= 3


def test_a_case_without_spreads_says_what_to_do(tmp_path, capsys):
    with pytest.raises(SystemExit) as left:
        main(["robust", str(write_folder(tmp_path / "case", small_case()))])
    assert left.value.code == 2
    assert "table tolerances" in capsys.readouterr().err


def test_the_report_has_a_section_with_figures(case_path, tmp_path):
    comparison = act.compare(act.read_case(case_path))
    written = comparison.write_report(tmp_path / "report", pdf=False)
    page = (tmp_path / "report" / "sizing_report.html").read_text(encoding="utf-8")
    assert "How sure it passes" in page
    assert "=1+1 &lt;script&gt;" in page  # the source of a spread as the user typed it
    assert {"robust_probability.svg", "robust_swings.svg", "robust_sensitivity.svg"} <= {
        p.name for p in written
    }
    results = json.loads((tmp_path / "report" / "results.json").read_text(encoding="utf-8"))
    assert results["robustness"]["all_checks"]["samples"] == 10_000
    with zipfile.ZipFile(tmp_path / "report" / "sizing_tables.xlsx") as book:
        assert 'name="robust checks"' in book.read("xl/workbook.xml").decode()


def test_a_report_without_spreads_says_nothing_of_them(tmp_path):
    comparison = act.compare(act.read_case(write_folder(tmp_path / "case", small_case())))
    assert comparison.robustness is None
    files = {p.name for p in comparison.write_report(tmp_path / "report", pdf=False)}
    assert not any(name.startswith("robust") for name in files)
    assert "How sure it passes" not in (tmp_path / "report" / "sizing_report.html").read_text(
        encoding="utf-8"
    )


def test_figures_and_notebook(study):
    figures = study.figures()
    assert set(figures) == {"robust_probability", "robust_swings", "robust_sensitivity"}
    bars = figures["robust_swings"].axes[0].patches
    check = study.weakest_that_move[0]
    mine = study.swings[study.swings["check"] == check]
    ends = np.concatenate([mine["utilisation_low"], mine["utilisation_high"]])
    drawn = [bar.get_x() + bar.get_width() for bar in bars]
    # A bar ends where its swing does, or at twice what is allowed (here 1).
    assert max(drawn) == pytest.approx(min(ends.max(), max(2.0, mine["utilisation_nominal"].max())))
    assert study.title_of(check) in figures["robust_swings"].axes[0].get_title(loc="left")
    page = study._repr_html_()
    assert "samples" in page
    assert study.label in page


def test_the_order_of_the_weakest(study):
    table = study.checks.set_index("check")
    order = list(study.weakest_first)
    advice = [bool(table["advice"][key]) for key in order]
    assert advice == sorted(advice)
    binding = [table["probability"][key] for key in order if not table["advice"][key]]
    assert binding == sorted(binding)
    assert study.passes_with(0.0)
