"""Levers, ratio windows, headroom and trade-offs in page, workbook, results and files of their own."""

import io
import json
from dataclasses import replace
from datetime import date

import pytest
from openpyxl import load_workbook
from report_demo import FOLDER

import actuator_sizing as act
from actuator_sizing.report import render_report
from actuator_sizing.report.document import prepare_document
from actuator_sizing.report.headroom_files import render_headroom_json, write_headroom


@pytest.fixture(scope="module")
def comparison():
    case = act.read_case(FOLDER / "potting_table")
    return act.compare(case, detail=2, levers=1, trade_offs=True, windows=True, headroom=True)


@pytest.fixture(scope="module")
def files(comparison):
    return render_report(comparison, date=date(2026, 1, 5), pdf=False)


def not_asked(comparison):
    return replace(comparison, trade_offs=None, windows=None, headroom=None)


def test_page_has_a_section_for_each_question(comparison):
    document = prepare_document(comparison, date(2026, 1, 5), ("trade_offs", "ratio_windows", "payload_map"))
    sections = {section.key: section for section in document.sections}
    for key in ("levers", "trade_offs", "ratio_windows", "headroom"):
        tables = [block for block in sections[key].blocks if block.kind == "table"]
        assert tables, key
        assert all(cell.text for table in tables for row in table.rows for cell in row[:1]), key
    figures = [b.key for s in document.sections for b in s.blocks if b.kind == "figure"]
    assert {"trade_offs", "ratio_windows", "payload_map"} <= set(figures)


def test_figures_are_files_and_leave_with_the_question(comparison, files, tmp_path):
    wanted = {f"figures/{key}.svg" for key in ("trade_offs", "ratio_windows", "payload_map")}
    assert wanted <= set(files)
    comparison.write_report(tmp_path, date=date(2026, 1, 5), pdf=False)
    assert all((tmp_path / name).exists() for name in wanted)
    not_asked(comparison).write_report(tmp_path, date=date(2026, 1, 5), pdf=False)
    assert not any((tmp_path / name).exists() for name in wanted)


def test_results_hold_raw_and_displayed_values(comparison, files):
    results = json.loads(files["results.json"])
    levers = [lever for item in results["sets"] for lever in item["levers"]]
    assert {"lever", "title", "unit", "present", "needed", "cost", "goal", "helps", "displayed"} <= set(
        levers[0]
    )
    windows = results["ratio_windows"]["motors"]
    assert len(windows) == len(comparison.windows.motors)
    one = next(window for window in windows if window["windows"])
    assert one["windows"][0]["from"] < one["windows"][0]["to"]
    limits = {entry["quantity"]: entry for entry in results["headroom"]["quantities"]}
    assert limits["heaviest_payload"]["unit"] == "kg·m²"
    assert limits["fastest_cycle"]["displayed"]["limit"].endswith("s")
    assert len(results["headroom"]["payload_against_cycle_time"]["rows"]) >= 10
    front = [item for item in results["trade_offs"]["sets"] if item["on_front"]]
    assert front
    assert all(item["dominated_by"] for item in results["trade_offs"]["sets"] if not item["on_front"])


def test_results_say_null_where_nothing_was_asked(comparison):
    results = json.loads(
        render_report(not_asked(comparison), date=date(2026, 1, 5), pdf=False)["results.json"]
    )
    assert (results["trade_offs"], results["ratio_windows"], results["headroom"]) == (None, None, None)


@pytest.mark.filterwarnings("ignore:.*extension is not supported")
def test_workbook_has_a_sheet_for_each(files, comparison):
    book = load_workbook(io.BytesIO(files["sizing_tables.xlsx"]))
    for name in ("levers", "trade-offs", "ratio windows", "headroom", "payload map"):
        assert book[name].max_row > 2, name
    assert book["ratio windows"].max_row == 1 + len(comparison.windows.table)


def test_headroom_writes_files_of_its_own(comparison, tmp_path):
    found = comparison.headroom
    written = write_headroom(found, tmp_path)
    assert {path.name for path in written} == {
        "headroom.json", "headroom.csv", "payload_map.csv", "payload_map.svg"
    }  # fmt: skip
    plain = json.loads(render_headroom_json(found))
    assert plain["schema"] == "actuator-sizing/headroom/1"
    assert plain["passes"]


def test_notebook_shows_tables(comparison):
    for shown in (comparison.windows, comparison.headroom, comparison.trade_offs):
        assert "<table" in shown._repr_html_()
    assert comparison.ratio_windows() is comparison.windows
