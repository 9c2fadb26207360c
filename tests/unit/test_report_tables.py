"""Workbook, results and candidates: values, formulas that agree with them, text that stays text."""

import csv
import dataclasses
import io
import json
import math
import re
import warnings
from datetime import date

import openpyxl
import pytest
from report_demo import DEMO_CASES, demo_comparison
from report_fixture import HOSTILE, build_comparison, build_hostile

from actuator_sizing.report import render_report
from actuator_sizing.report.candidates_csv import MOST_BYTES, render_candidates
from actuator_sizing.report.json_results import render_json
from actuator_sizing.report.workbook import render_workbook
from actuator_sizing.report.workbook.results_sheets import LEADING_CANDIDATES, MOST_CANDIDATES

DAY = date(2025, 3, 4)


@pytest.fixture(scope="module")
def comparison():
    return build_comparison()


@pytest.fixture(scope="module")
def content(comparison):
    return render_workbook(comparison, DAY)


def load(content, **options):
    with warnings.catch_warnings():
        # openpyxl cannot keep the data bars of today's format; it reads the cells all the same
        warnings.filterwarnings("ignore", message=".*extension is not supported", category=UserWarning)
        return openpyxl.load_workbook(io.BytesIO(content), **options)


def column(sheet, title):
    heads = [cell.value for cell in sheet[1]]
    return [row[heads.index(title)] for row in sheet.iter_rows(min_row=2)]


def test_sheets(content):
    assert load(content).sheetnames == [
        "summary", "candidates", "checks", "motion segments", "time series", "warm-up", "speed-torque limits",
        "energy", "bus", "parts used", "inputs and assumptions", "questions",
    ]  # fmt: skip


def test_every_sheet_has_frozen_head_filter_print_titles_and_no_merged_cell(content):
    for sheet in load(content).worksheets:
        assert sheet.freeze_panes is not None, sheet.title
        assert sheet.auto_filter.ref, sheet.title
        assert sheet.print_title_rows == "$1:$1", sheet.title
        assert not sheet.merged_cells.ranges, sheet.title


def test_stored_values_stand_beside_live_formulas(content, comparison):
    formulas, values = load(content)["checks"], load(content, data_only=True)["checks"]
    checks = [check for item in comparison.sets for check in item.checks]
    shown = column(values, "utilisation [-]")
    for formula, cell, check in zip(column(formulas, "utilisation [-]"), shown, checks, strict=True):
        if check.utilisation is None:
            assert cell.value == "not known"
        else:
            assert formula.value == f"=G{formula.row}/H{formula.row}"
            assert cell.value == pytest.approx(check.utilisation, rel=1e-12)  # doubles in, doubles out
    demand, capacity = column(values, "demand [unit beside]"), column(values, "capacity [unit beside]")
    for d, c, cell in zip(demand, capacity, shown, strict=True):
        if cell.value != "not known":
            assert d.value / c.value == pytest.approx(cell.value, rel=1e-12)
    margins = column(values, "margin [-]")
    assert margins[1].value == pytest.approx(checks[1].margin, rel=1e-12)


def test_a_utilisation_that_is_no_plain_ratio_is_stored_as_a_value(comparison):
    best = comparison.best
    odd = dataclasses.replace(best.checks[1], utilisation=0.77)
    changed = dataclasses.replace(comparison, sets=(dataclasses.replace(best, checks=(odd,)),))
    cell = column(load(render_workbook(changed, DAY))["checks"], "utilisation [-]")[0]
    assert cell.value == pytest.approx(0.77)


@pytest.mark.parametrize(
    ("value", "number_format"), [(0.873, "0.0%"), (1.0004, "0.00%"), (0.99996, "0.000%")]
)
def test_percent_formats_never_round_onto_the_limit(comparison, value, number_format):
    best = comparison.best
    odd = dataclasses.replace(best.checks[1], utilisation=value)
    changed = dataclasses.replace(comparison, sets=(dataclasses.replace(best, checks=(odd,)),))
    cell = column(load(render_workbook(changed, DAY))["checks"], "utilisation [-]")[0]
    assert cell.number_format == number_format


def test_key_results_have_named_cells(content, comparison):
    book = load(content, data_only=True)
    named = book.defined_names["result_current_rms_a"].attr_text
    sheet, cell = named.split("!")
    assert book[sheet][cell.replace("$", "")].value == pytest.approx(
        comparison.best.quantities["current_rms_a"]
    )
    assert "governing_utilisation" in book.defined_names


def test_the_rms_current_lives_from_the_rows_of_the_segments(content, comparison):
    """The stored values obey the formulas: RMS² times duration, summed and divided by the cycle, is RMS²."""
    formulas, values = load(content), load(content, data_only=True)
    sheet = values["motion segments"]
    rms, duration, integral = (
        [cell.value for cell in column(sheet, title)]
        for title in ("current RMS [A rms]", "duration [s]", "∫ i² dt [A²·s]")
    )
    assert integral == pytest.approx([r * r * d for r, d in zip(rms, duration, strict=True)], rel=1e-12)
    place = formulas.defined_names["result_current_rms_a"].attr_text.replace("$", "").split("!")
    last = 1 + len(rms)
    live = formulas[place[0]][place[1]].value
    assert live == f"=SQRT(SUM('motion segments'!M2:M{last})/SUM('motion segments'!E2:E{last}))"
    stored = values[place[0]][place[1]].value
    assert stored == comparison.best.quantities["current_rms_a"]
    # the same sum of the same doubles in another order
    assert math.sqrt(sum(integral) / sum(duration)) == pytest.approx(stored, rel=1e-12)


@pytest.mark.parametrize("name", DEMO_CASES)
def test_segments_of_the_demo_cases_add_up_to_the_rms_current(name):
    best = demo_comparison(name).best
    cycle_s = sum(segment.duration_s for segment in demo_comparison(name).case.segments)
    squares = best.detail.segments["current_squared_a2_s"]
    assert math.sqrt(squares.sum() / cycle_s) == pytest.approx(best.quantities["current_rms_a"], rel=1e-12)


def test_every_sheet_prints_its_table(content):
    for sheet in load(content).worksheets:
        assert sheet.print_area.split("!")[1].startswith("$A$1:"), sheet.title


def test_the_report_of_a_very_large_comparison_stays_small(comparison):
    """A million sets leave 20 000 listed candidates; the list is cut where it would pass its size."""
    import pandas as pd

    long = pd.concat([comparison.candidates] * (20_000 // len(comparison.candidates)), ignore_index=True)
    wide = long.assign(**{f"utilisation_{n}": long["utilisation"] * (n + 1) / 7.0 for n in range(24)})
    changed = dataclasses.replace(comparison, candidates=wide)
    listed = render_candidates(changed)
    assert MOST_BYTES - 1000 < len(listed.content) <= MOST_BYTES
    rows = list(csv.reader(io.StringIO(listed.content.decode("utf-8-sig"))))
    assert len(rows) == listed.rows + 1 < len(wide)
    assert all(len(row) == len(wide.columns) for row in rows)
    files = render_report(changed, date=DAY)
    assert sum(map(len, files.values())) < 5_000_000
    said = load(files["sizing_tables.xlsx"])["summary"]
    assert any(
        f"the first {listed.rows} in candidates.csv" in str(cells[2])
        for cells in said.iter_rows(values_only=True)
    )


def test_time_series_is_the_cycle_of_the_leading_set(content, comparison):
    sheet = load(content)["time series"]
    torque = [cell.value for cell in column(sheet, "motor torque [N·m]")]
    assert torque == pytest.approx(comparison.best.detail.cycle["motor_torque_nm"].tolist())
    assert column(sheet, "load position [m]")


def test_text_from_tables_is_never_a_formula_or_a_link():
    book = load(render_workbook(build_hostile(), DAY))
    formulas = [
        (sheet.title, cell.value)
        for sheet in book.worksheets
        for row in sheet.iter_rows()
        for cell in row
        if cell.data_type == "f" or cell.hyperlink
    ]
    own = {
        "checks": r"=G\d+/H\d+|=1/J\d+-1",
        "motion segments": r"=D\d+\+E\d+|=L\d+\^2\*E\d+",
        "summary": r"=SQRT\(SUM\('motion segments'!M2:M\d\)/SUM\('motion segments'!E2:E\d\)\)",
    }
    assert formulas
    assert [(title, text) for title, text in formulas if not re.fullmatch(own.get(title, "none"), text)] == []
    motors = [cell.value for cell in column(book["candidates"], "motor")]
    assert motors[0] == HOSTILE[0]
    assert HOSTILE[2] in motors


def test_a_text_longer_than_a_cell_says_so():
    comparison = build_comparison()
    changed = dataclasses.replace(comparison, assumptions=(("long", "y" * 50_000),))
    sheet = load(render_workbook(changed, DAY))["inputs and assumptions"]
    longest = max((str(cell.value) for row in sheet.iter_rows() for cell in row), key=len)
    assert len(longest) == 32_767
    assert longest.endswith("… (50000 characters)")


def test_a_long_list_of_candidates_goes_to_the_file_beside(comparison):
    import pandas as pd

    long = pd.concat([comparison.candidates] * (MOST_CANDIDATES // len(comparison.candidates) + 1))
    changed = dataclasses.replace(comparison, candidates=long)
    book = load(render_workbook(changed, DAY))
    assert book["candidates"].max_row == 1 + LEADING_CANDIDATES
    said = next(row for row in book["summary"].iter_rows(values_only=True) if row[0] == "candidates listed")
    assert said[1] == len(long)
    assert said[2] == "the first 250 in sheet candidates, all in candidates.csv"
    assert render_candidates(changed).rows == len(long)


def test_the_workbook_is_the_same_every_time(content, comparison):
    assert render_workbook(comparison, DAY) == content


# -- results.json ------------------------------------------------------------------------------------


def strict(content):
    def refuse(name):
        raise AssertionError(f"{name} is no JSON")

    return json.loads(content, parse_constant=refuse)


def test_results_have_the_keys_of_the_schema(comparison):
    results = strict(render_json(comparison))
    assert results["schema"] == "actuator-sizing/results/1"
    assert results["version"] == "0.1.0"
    assert results["fingerprint"] == comparison.case.fingerprint
    assert {"name", "mechanism", "inputs"} <= set(results["case"])
    for entry in results["case"]["inputs"]:
        assert {"table", "row", "column", "value_si", "unit", "as_entered", "origin"} <= set(entry)
    assert results["cycle"]["duration_s"] == 2.0
    assert len(results["sets"]) == len(comparison.sets)
    for item in results["sets"]:
        assert {"rank", "motor", "gearhead", "ratio", "drive", "verdict", "governing_check", "price", "mass_kg",
                "quantities", "checks", "levers"} <= set(item)  # fmt: skip
        for check in item["checks"]:
            assert {"check", "demand", "capacity", "unit", "utilisation", "allowed", "verdict", "at_time_s",
                    "segment", "formula", "source"} <= set(check)  # fmt: skip
    assert results["rejected"]["count"] == comparison.rejections.rejected
    assert results["rejected"]["by_check"] == dict(comparison.rejections.by_check)


def test_results_are_raw_and_null_is_not_known(comparison):
    results = strict(render_json(comparison))
    best, quantities = comparison.best, results["sets"][0]["quantities"]
    assert quantities["torque_rms_nm"] == best.quantities["torque_rms_nm"]  # the very double
    assert quantities["bus_voltage_max_v"] is None
    assert quantities["time_to_limit_s"] is None  # NaN inside
    check = next(c for c in results["sets"][0]["checks"] if c["check"] == "gearhead_peak_torque")
    assert check["capacity"] is None
    assert check["utilisation"] is None
    assert check["verdict"] == "not checked"


def test_direct_drive_is_null(comparison):
    direct = dataclasses.replace(comparison.best, gearhead=None, ratio=1.0)
    results = strict(render_json(dataclasses.replace(comparison, sets=(direct,))))
    assert results["sets"][0]["gearhead"] is None
    assert not any(entry["table"] == "gearheads" for entry in results["case"]["inputs"])


def test_numpy_and_infinite_values_become_plain(comparison):
    import numpy as np

    best = dataclasses.replace(
        comparison.best,
        quantities={
            "a": np.float64(1.5),
            "b": np.array([1.0, math.inf]),
            "c": np.bool_(True),
            "d": np.int64(3),
        },
    )
    results = strict(render_json(dataclasses.replace(comparison, sets=(best,))))
    assert results["sets"][0]["quantities"] == {"a": 1.5, "b": [1.0, None], "c": True, "d": 3}


def test_hostile_names_come_back_as_they_were():
    hostile = build_hostile()
    results = strict(render_json(hostile))
    assert [item["motor"] for item in results["sets"]] == [item.motor for item in hostile.sets]


def test_an_empty_comparison_has_no_sets(comparison):
    assert strict(render_json(dataclasses.replace(comparison, sets=())))["sets"] == []


# -- candidates.csv ----------------------------------------------------------------------------------


def test_candidates_read_back(comparison):
    rows = list(csv.reader(io.StringIO(render_candidates(comparison).content.decode("utf-8-sig"))))
    assert rows[0][-1] == "mass [kg]"
    assert len(rows) == len(comparison.candidates) + 1
    assert float(rows[1][6]) == comparison.candidates["utilisation"].iloc[0]


def test_candidates_hold_no_text_that_a_spreadsheet_would_compute():
    rows = list(csv.reader(io.StringIO(render_candidates(build_hostile()).content.decode("utf-8-sig"))))
    texts = [cell for cells in rows[1:] for cell in cells]
    assert "'=1+1" in texts
    assert not [
        t
        for t in texts
        if t.startswith(("=", "+", "@", "-")) and not t.lstrip("-").replace(".", "").isdigit()
    ]
