"""Writing the report: whole or not at all, the same every time, dated as told."""

import dataclasses
import json
import math
import os
from datetime import date

import pytest
from report_fixture import build_comparison, build_hostile

from actuator_sizing.errors import OutputError
from actuator_sizing.report import render_report, write_report
from actuator_sizing.report.figures import FIGURES
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, Checks

DAY = date(2025, 3, 4)
EXPECTED = {"sizing_report.html", "sizing_tables.xlsx", "results.json", "candidates.csv"}


@pytest.fixture(scope="module")
def comparison():
    base = build_comparison()
    return dataclasses.replace(base, sets=base.sets[:3])


def test_all_files_are_written(comparison, tmp_path):
    paths = write_report(comparison, tmp_path / "out", date=DAY)
    names = {path.relative_to(tmp_path / "out").as_posix() for path in paths}
    assert names >= EXPECTED
    assert {name for name in names if name.startswith("figures/")} >= {"figures/speed_torque.svg"}
    assert all(path.stat().st_size > 0 for path in paths)


def test_the_same_comparison_gives_the_same_bytes(comparison):
    assert render_report(comparison, date=DAY) == render_report(comparison, date=DAY)


def test_the_date_follows_the_environment(comparison, monkeypatch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1700000000")  # 2023-11-14 in UTC
    assert b"2023-11-14" in render_report(comparison)["sizing_report.html"]


def test_the_results_do_not_depend_on_the_date(comparison):
    other = render_report(comparison, date=date(1999, 12, 31))
    assert other["results.json"] == render_report(comparison, date=DAY)["results.json"]


def test_figures_and_pdf_of_an_earlier_run_do_not_stay(comparison, tmp_path):
    """They would show another result than the page beside them."""
    write_report(comparison, tmp_path, date=DAY)
    (tmp_path / "sizing_report.pdf").write_bytes(b"old")
    (tmp_path / "figures" / "mine.svg").write_bytes(b"<svg/>")
    best = comparison.best
    cold = dataclasses.replace(best, detail=dataclasses.replace(best.detail, warm_up=None))
    write_report(dataclasses.replace(comparison, sets=(cold,)), tmp_path, date=DAY, pdf=False)
    left = {path.name for path in (tmp_path / "figures").iterdir()}
    assert left == {f"{key}.svg" for key in FIGURES if key != "temperature"} | {"mine.svg"}
    assert not (tmp_path / "sizing_report.pdf").exists()


@pytest.mark.skipif(os.name == "nt", reason="modes of POSIX")
def test_a_folder_that_cannot_be_written_is_an_output_error(comparison, tmp_path):
    blocker = tmp_path / "out"
    blocker.write_text("a file where the folder should be")
    with pytest.raises(OutputError):
        write_report(comparison, blocker, date=DAY)
    assert blocker.read_text() == "a file where the folder should be"


def test_nothing_is_touched_when_one_file_cannot_be_replaced(comparison, tmp_path):
    (tmp_path / "results.json").mkdir()  # a folder where a file has to go
    (tmp_path / "sizing_report.html").write_text("old")
    with pytest.raises(OutputError):
        write_report(comparison, tmp_path, date=DAY)
    assert (tmp_path / "sizing_report.html").read_text() == "old"
    assert not (tmp_path / "sizing_tables.xlsx").exists()


def test_advice_is_worded_as_advice_in_results_and_notebook(comparison):
    best = comparison.best
    asked = dataclasses.replace(best.check("inertia_ratio"), utilisation=6.8, verdict=LOW_RESERVE)
    others = [c for c in best.checks if c.check != "inertia_ratio"]
    advised = dataclasses.replace(best, checks=Checks((*others, asked)))
    files = render_report(dataclasses.replace(comparison, sets=(advised,)), date=DAY, pdf=False)
    (told,) = [
        check
        for check in json.loads(files["results.json"])["sets"][0]["checks"]
        if check["check"] == "inertia_ratio"
    ]
    assert (told["verdict"], told["advice"]) == ("advice not met", True)
    assert advised.checks.table.loc["inertia_ratio", "verdict"] == "advice not met"
    assert "Advice not met, which does not decide the verdict" in files["sizing_report.html"].decode()


def test_hostile_and_empty_comparisons_make_a_report(comparison):
    assert set(render_report(build_hostile(), date=DAY)) >= EXPECTED
    assert set(render_report(dataclasses.replace(comparison, sets=()), date=DAY)) >= EXPECTED


def test_segments_that_are_counted_get_their_names(comparison):
    from actuator_sizing.report.curves import leading_detail

    best = comparison.best
    names = [segment.name for segment in comparison.case.segments]
    numbers = best.detail.cycle["segment"].map(names.index)
    cycle = best.detail.cycle.assign(segment=numbers)
    counted = dataclasses.replace(best, detail=dataclasses.replace(best.detail, cycle=cycle))
    detail = leading_detail(dataclasses.replace(comparison, sets=(counted,)))
    assert detail.cycle["segment"].tolist() == best.detail.cycle["segment"].tolist()


def test_a_check_without_any_capacity_is_reported_in_every_format(comparison):
    best = comparison.best
    stuck = dataclasses.replace(
        best.checks[0], demand=1.4, capacity=0.0, utilisation=math.inf, verdict=FAILS, working="1.4 / 0"
    )
    loser = dataclasses.replace(
        best, checks=(stuck, *best.checks[1:]), governing_check=stuck.check, verdict=FAILS
    )
    files = render_report(dataclasses.replace(comparison, sets=(loser,)), date=DAY)
    page = files["sizing_report.html"].decode()
    assert "uses infinite of the capacity" not in page
    assert "has no capacity left at all" in page
    check = json.loads(files["results.json"])["sets"][0]["checks"][0]
    assert (check["capacity"], check["utilisation"], check["verdict"]) == (0.0, None, "fails")
