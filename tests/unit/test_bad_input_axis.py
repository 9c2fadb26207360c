"""Wrong quantities, segments, limits and tolerances."""

from __future__ import annotations

import pytest
from case_files import add_column, row_of, set_cell, small_case, write_folder
from test_bad_input_cells import problems_of, the_only

from actuator_sizing.case.check_names import CHECK_NAMES
from actuator_sizing.case.reading import check_case

# -- axis ---------------------------------------------------------------------------------------------------


def change(tables, quantity, value=None, unit=None):
    row = row_of(tables, "axis", quantity)
    row[1] = row[1] if value is None else value
    row[2] = row[2] if unit is None else unit
    return tables


@pytest.mark.parametrize(
    ("value", "unit", "got", "allowed", "remedy"),
    [
        (18.5, "", "'18.5' without a unit", "a unit of mass", "unit column"),
        (18.5, "mm", "the unit 'mm'", "a unit of mass", "length"),
        ("heavy", "kg", "'heavy'", "a number ≥ 0 kg", "Write a number"),
        (-1, "kg", "-1 kg", "a number ≥ 0 kg", "Check the value and its unit."),
        ("nan", "kg", "'nan'", "a finite number", "Leave the cell empty"),
        ("1e999", "kg", "'1e999'", "a finite number", "finite"),
        ("18 kg", "", "'18 kg' without a unit", "a unit of mass", "unit column"),
        ("18 kg", "kg", "'18 kg'", "a number ≥ 0 kg", "'kg' belongs in the heading or the unit column"),
    ],
)
def test_wrong_value_or_unit(tmp_path, value, unit, got, allowed, remedy):
    problem = the_only(problems_of(tmp_path, change(small_case(), "moving mass", value, unit)))
    assert (problem.table, problem.row, problem.column) == ("axis", 8, "moving mass")
    assert problem.got == got
    assert problem.allowed == allowed
    assert remedy in problem.remedy


def test_percent_without_its_unit(tmp_path):
    problem = the_only(problems_of(tmp_path, change(small_case(), "efficiency", unit="")))
    assert (problem.row, problem.column, problem.got) == (7, "efficiency", "90")
    assert problem.remedy == "If it is meant in percent, write % in the unit column."


def test_missing_required_quantity_with_its_misspelling(tmp_path):
    tables = small_case()
    row_of(tables, "axis", "moving mass")[0] = "moving mas"
    missing, unknown = problems_of(tmp_path, tables)
    assert (missing.table, missing.column, missing.got) == ("axis", "moving mass", "no value")
    assert missing.remedy == "Is 'moving mas' in row 8 meant? Then rename it to 'moving mass'."
    assert (unknown.row, unknown.severity) == (8, "warning")
    assert "Did you mean 'moving mass'?" in unknown.remedy


def test_missing_mechanism_still_reads_the_rest(tmp_path):
    tables = small_case()
    tables["axis"] = [row for row in tables["axis"] if row[0] != "mechanism"]
    set_cell(tables, "duty_cycle", "up", "displacement", "far")
    errors = [p for p in problems_of(tmp_path, tables) if p.severity == "error"]
    assert [(p.table, p.column) for p in errors] == [
        ("axis", "mechanism"),
        ("duty_cycle", "displacement [mm]"),
    ]
    assert "rotary load" in errors[0].allowed


def test_quantity_of_another_mechanism(tmp_path):
    tables = small_case()
    tables["axis"].append(["pulley diameter", 60, "mm", ""])
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.row, problem.column, problem.severity) == (12, "pulley diameter", "warning")
    assert problem.got == "a quantity that a ball screw does not have"


def test_quantity_given_twice(tmp_path):
    tables = small_case()
    tables["axis"].append(["Moving_Mass", 20, "kg", ""])
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.row, problem.column) == (12, "moving mass")
    assert problem.got == "'20 kg', given before in row 8"


def test_value_without_a_name(tmp_path):
    tables = small_case()
    tables["axis"].append(["", 20, "kg", ""])
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column) == ("axis", 12, "quantity")


@pytest.mark.parametrize("column", ["quantity", "value"])
def test_axis_table_without_its_columns(tmp_path, column):
    tables = small_case()
    tables["axis"][0][tables["axis"][0].index(column)] = "stuff"
    errors = [p for p in problems_of(tmp_path, tables) if p.severity == "error"]
    assert (errors[0].table, errors[0].column, errors[0].got) == ("axis", column, "no such column")


@pytest.mark.parametrize(
    ("quantity", "volts", "allowed"),
    [
        ("minimum bus voltage", 50, "at most the nominal bus voltage of 48 V"),
        ("maximum bus voltage", 40, "at least the nominal bus voltage of 48 V"),
    ],
)
def test_bus_voltages_out_of_order(tmp_path, quantity, volts, allowed):
    tables = small_case()
    tables["axis"].append([quantity, volts, "V", ""])
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column) == ("axis", 12, quantity)
    assert (problem.got, problem.allowed) == (f"{volts} V", allowed)


def test_lead_screw_needs_its_losses(tmp_path):
    tables = change(small_case(), "mechanism", "lead screw")
    tables["axis"] = [row for row in tables["axis"] if row[0] != "efficiency"]
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.column) == ("axis", "efficiency")
    tables["axis"].append(["thread friction coefficient", 0.15, "", ""])
    assert check_case(write_folder(tmp_path / "again", tables))[0] is not None


def test_thread_friction_needs_the_diameter(tmp_path):
    tables = small_case()
    tables["axis"] = [row for row in tables["axis"] if row[0] != "screw diameter"]
    tables["axis"].append(["thread friction coefficient", 0.15, "", ""])
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.column, problem.got) == ("thread friction coefficient", "no screw diameter")


def test_number_of_sets_must_be_whole(tmp_path):
    tables = small_case()
    tables["axis"].append(["sets to detail", 2.5, "", ""])
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.got, problem.remedy) == ("2.5", "Write a whole number.")
    assert problem.allowed == "a whole number from 1 to 1000"


def test_text_that_is_too_long(tmp_path):
    problem = the_only(problems_of(tmp_path, change(small_case(), "title", "t" * 10_000)))
    assert (problem.column, problem.allowed) == ("title", "at most 500 characters")


# -- duty cycle ---------------------------------------------------------------------------------------------


def test_dimension_that_does_not_fit_the_mechanism(tmp_path):
    tables = small_case()
    tables["duty_cycle"][0][2] = "displacement [deg]"
    problem = problems_of(tmp_path, tables)[0]
    assert (problem.table, problem.column, problem.got) == (
        "duty_cycle",
        "displacement [deg]",
        "the unit 'deg'",
    )
    assert problem.allowed == "a unit of length"


@pytest.mark.parametrize("value", [1e300, -1e300, "1e-320"])
def test_absurd_displacement_is_refused(tmp_path, value):
    tables = small_case()
    set_cell(tables, "duty_cycle", "up", "displacement", value)
    problem = problems_of(tmp_path, tables)[0]
    assert (problem.table, problem.row, problem.column) == ("duty_cycle", 2, "displacement [mm]")
    assert problem.severity == "error"
    assert problem.got
    assert problem.allowed
    assert problem.remedy


def test_segment_without_enough_to_plan_it(tmp_path):
    tables = small_case()
    set_cell(tables, "duty_cycle", "up", "duration", "")
    problem = problems_of(tmp_path, tables)[0]
    assert (problem.table, problem.row, problem.severity) == ("duty_cycle", 2, "error")
    assert problem.remedy


def test_duration_that_is_too_short_for_the_limits(tmp_path):
    tables = small_case()
    add_column(tables, "duty_cycle", "maximum speed [mm/s]", 100, "", "", "")
    problem = problems_of(tmp_path, tables)[0]
    assert (problem.table, problem.row, problem.column) == ("duty_cycle", 2, "duration [s]")
    assert problem.severity == "error"


def test_jump_of_speed_between_segments(tmp_path):
    tables = small_case()
    tables["duty_cycle"] = [
        ["segment", "motion law", "end speed [mm/s]", "duration [s]"],
        ["run", "constant speed", 50, 1],
        ["run on", "constant speed", 60, 1],
        ["slower", "speed ramp", 50, 1],
    ]
    errors = [p for p in problems_of(tmp_path, tables) if p.severity == "error"]
    problem = the_only(errors)
    assert (problem.table, problem.row) == ("duty_cycle", 3)
    assert "60 mm/s" in problem.got
    assert "0.05" in problem.allowed
    assert problem.remedy


def test_brake_closed_while_moving(tmp_path):
    tables = small_case()
    set_cell(tables, "duty_cycle", "down", "brake closed", "yes")
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column) == ("duty_cycle", 4, "brake closed")
    assert (problem.got, problem.allowed) == ("yes while moving", "yes only at standstill")


def test_one_bad_segment_does_not_hide_the_next(tmp_path):
    tables = small_case()
    set_cell(tables, "duty_cycle", "up", "duration", -1)
    set_cell(tables, "duty_cycle", "rest", "duration", "long")
    assert [problem.row for problem in problems_of(tmp_path, tables)] == [2, 5]


@pytest.mark.parametrize("law", ["speed ramp", "constant speed"])
def test_a_row_that_takes_over_the_speed_of_a_bad_row_is_not_blamed(tmp_path, law):
    tables = small_case()
    tables["duty_cycle"] = [
        ["segment", "motion law", "end speed [mm/s]", "duration [s]"],
        ["faster", "speed ramp", "quick", 1],
        ["next", law, 0 if law == "speed ramp" else "", 1],
        ["slower", "speed ramp", 0, 1] if law == "constant speed" else ["wait", "dwell", "", 1],
    ]
    errors = [p for p in problems_of(tmp_path, tables) if p.severity == "error"]
    assert [(p.row, p.column) for p in errors] == [(2, "end speed [mm/s]")]


def test_the_first_row_is_not_blamed_for_a_bad_last_row(tmp_path):
    tables = small_case()
    tables["duty_cycle"] = [
        ["segment", "motion law", "end speed [mm/s]", "duration [s]"],
        ["run", "constant speed", 50, 1],
        ["faster", "speed ramp", 60, 1],
        ["slower", "speed ramp", "less", 1],
    ]
    errors = [p for p in problems_of(tmp_path, tables) if p.severity == "error"]
    assert [(p.row, p.column) for p in errors] == [(4, "end speed [mm/s]")]


# -- limits and tolerances ----------------------------------------------------------------------------------


def test_unknown_check(tmp_path):
    tables = small_case()
    tables["limits"] = [["check", "applies"], ["RMS curent", "yes"], ["voltage", "maybe"]]
    first, second = problems_of(tmp_path, tables)
    assert (first.table, first.row, first.column, first.got) == ("limits", 2, "check", "'RMS curent'")
    assert first.remedy == "Did you mean 'RMS current'?"
    assert (second.row, second.column, second.got) == (3, "applies", "'maybe'")


@pytest.mark.parametrize("word", ["no", "advice"])
def test_limits_that_nothing_could_fail(tmp_path, word):
    tables = small_case()
    tables["limits"] = [["check", "applies"], *([title, word] for _, title in CHECK_NAMES)]
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.column, problem.severity) == ("limits", "applies", "error")
    assert (problem.got, problem.remedy) == (
        "no check with 'yes'",
        "Write yes for the checks that a set must pass.",
    )
    tables["limits"][1][1] = "yes"
    found = [(p.table, p.severity) for p in problems_of(tmp_path / "one", tables)]
    assert found == ([("limits", "warning")] if word == "no" else [])


@pytest.mark.parametrize(
    ("row", "column", "got"),
    [
        (["moving mas", "normal", 5, "%"], "quantity", "'moving mas'"),
        (["moving mass", "gauss", 5, "%"], "distribution", "'gauss'"),
        (["moving mass", "normal", "wide", "%"], "width", "'wide'"),
        (["moving mass", "normal", 0, "%"], "width", "0 %"),
        (["moving mass", "normal", -5, "%"], "width", "-5 %"),
        (["moving mass", "normal", 5, "mm"], "unit", "'mm'"),
        (["moving mass", "normal", 5, ""], "unit", "an empty cell"),
    ],
)
def test_wrong_tolerance(tmp_path, row, column, got):
    tables = small_case()
    tables["tolerances"] = [["quantity", "distribution", "width", "unit"], row]
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column, problem.got) == ("tolerances", 2, column, got)
    assert problem.allowed
    assert problem.remedy


def test_an_inclination_that_is_not_stated_is_warned_of(tmp_path):
    for value in ("", None):
        tables = change(small_case(), "inclination", "")
        if value is None:
            tables["axis"].remove(row_of(tables, "axis", "inclination"))
        problem = the_only(problems_of(tmp_path / str(value), tables))
        assert (problem.table, problem.column, problem.severity) == ("axis", "inclination", "warning")
        assert problem.got == "no value, taken as level"


def test_an_empty_cell_is_no_advice_where_it_counts_as_a_value(tmp_path):
    problem = the_only(problems_of(tmp_path, change(small_case(), "inclination", "NaN")))
    assert "worst case" in problem.remedy
    assert "Leave" not in problem.remedy
