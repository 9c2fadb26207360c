"""Wrong cells, headings and rows, each told with table, row, column, what was read, what is allowed, what to do."""

from __future__ import annotations

import math

import pytest
from case_files import add_column, row_of, set_cell, small_case, write_folder, write_workbook

from actuator_sizing.case.problem_list import KEPT_PER_COLUMN
from actuator_sizing.case.reading import check_case
from actuator_sizing.errors import Problem

FORMS = pytest.mark.parametrize("write", [write_folder, write_workbook], ids=["folder", "workbook"])


def problems_of(tmp_path, tables, write=write_folder):
    path = tmp_path / ("case.xlsx" if write is write_workbook else "case")
    case, problems = check_case(write(path, tables))
    assert (case is None) == any(problem.severity == "error" for problem in problems)
    return problems


def the_only(problems) -> Problem:
    assert len(problems) == 1, [str(problem) for problem in problems]
    return problems[0]


def rename(tables, table, old, new):
    headings = tables[table][0]
    headings[headings.index(old)] = new


# -- numbers ------------------------------------------------------------------------------------------------


@FORMS
@pytest.mark.parametrize(
    ("value", "got", "remedy"),
    [
        ("", "an empty cell", "ask the supplier"),
        ("n/a", "'n/a', which means not known", "ask the supplier"),
        ("-", "'-', which means not known", "ask the supplier"),
        ("nan", "'nan'", "Leave the cell empty"),
        ("inf", "'inf'", "Leave the cell empty"),
        ("about 480", "'about 480'", "Write a number"),
        ("400...500", "'400...500'", "on the safe side"),
        ("≥ 480", "'≥ 480'", "Write the one number"),
        ("480 gcm2", "'480 gcm2'", "'gcm2' belongs in the heading"),
        (-480, "-480 g·cm²", "Check the value and the unit"),
        (0, "0 g·cm²", "Check the value and the unit"),
        (1e30, "1e+30 g·cm²", "Check the value and the unit"),
        ("1,234", "'1,234'", "It may mean 1.234 or 1234"),
        ("<script>alert(1)</script>", "'<script>alert(1)</script>'", "Write the one number"),
        ("../x", "'../x'", "Write a number"),
        ("x" * 10_000, f"'{'x' * 60}'… (10000 characters)", "Write a number"),
    ],
)
def test_wrong_number_in_a_required_column(tmp_path, write, value, got, remedy):
    tables = small_case()
    if value == "1,234":  # nothing in the table may prove the decimal mark
        tables = ambiguous_motors()
    set_cell(tables, "motors", "M-10", "rotor inertia", value)
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.row, problem.column) == ("motors", 2, "rotor inertia [g·cm²]")
    assert problem.severity == "error"
    assert problem.got == got
    assert "number" in problem.allowed
    assert remedy in problem.remedy


def ambiguous_motors():
    """Motors with whole numbers only."""
    tables = small_case()
    headings = [str(heading) for heading in tables["motors"][0]]
    for row in tables["motors"][1:]:
        row[:] = [math.ceil(cell) if isinstance(cell, float) else cell for cell in row]
        row[headings.index("peak current [A]")] = 60
    return tables


@FORMS
def test_formula_text_is_a_name_and_no_number(tmp_path, write):
    tables = small_case()
    set_cell(tables, "drives", "D-1", "price", "=1+1")
    problem = next(p for p in problems_of(tmp_path, tables, write) if p.column == "price [EUR]")
    assert (problem.table, problem.row) == ("drives", 2)
    # In a workbook it is a formula that no program has calculated yet, in CSV a text.
    assert problem.got == (
        "the formula in I2 without a stored value" if write is write_workbook else "'=1+1'"
    )
    assert "type the number" in problem.remedy


@pytest.mark.parametrize("name", ["=1+1", "<script>alert(1)</script>", "../x", "a\tb", "😀", "-", "n/a", "0"])
def test_odd_names_are_names(tmp_path, name):
    tables = small_case()
    tables["motors"][1][0] = name
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    assert problems == ()
    assert case.motors.names[0] == " ".join(name.split())


@FORMS
def test_name_that_is_too_long_to_print(tmp_path, write):
    tables = small_case()
    tables["motors"][1][0] = "x" * 10_000
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.row, problem.column) == ("motors", 2, "motor")
    assert problem.got.endswith("(10000 characters)")
    assert problem.allowed == "a name of at most 200 characters"
    assert problem.remedy.startswith("Shorten the name")


def test_long_remarks_are_kept(tmp_path):
    tables = small_case()
    set_cell(tables, "motors", "M-10", "source", "y" * 10_000)
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    assert problems == ()
    assert case.motors.values["source"][0] == "y" * 10_000


def test_percent_taken_for_a_ratio(tmp_path):
    tables = small_case()
    rename(tables, "gearheads", "efficiency [%]", "efficiency [-]")
    first, second = problems_of(tmp_path, tables)
    assert (first.table, first.row, first.column) == ("gearheads", 2, "efficiency [-]")
    assert first.got == "95 -"
    assert first.allowed == "a number > 0 and ≤ 1 -"
    assert first.remedy == "If it is meant in percent, write the heading as 'efficiency [%]'."
    assert second.row == 3


def test_pole_pairs_must_be_whole(tmp_path):
    tables = small_case()
    set_cell(tables, "motors", "M-10", "pole pairs", 3.5)
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.row, problem.column, problem.got) == (2, "pole pairs", "3.5")
    assert problem.allowed == "a whole number from 1 to 1000"
    assert problem.remedy == "Write a whole number."


@pytest.mark.parametrize("ratio", [0, -3, "0/5", "5/0", "-91/6", "3:1:2"])
def test_ratio_must_be_above_zero(tmp_path, ratio):
    tables = small_case()
    set_cell(tables, "gearheads", "G-3", "ratio", ratio)
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column) == ("gearheads", 2, "ratio")
    assert str(ratio) in problem.got
    assert "number > 0" in problem.allowed
    assert problem.remedy


def test_lone_thousands_separator_is_resolved_by_the_table_and_told(tmp_path):
    tables = small_case()
    set_cell(tables, "motors", "M-10", "maximum speed", "6,000")
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    warning = the_only(problems)
    assert (warning.row, warning.column, warning.severity) == (2, "maximum speed [rpm]", "warning")
    assert warning.got == "'6,000', read as 6000"
    assert case.motor_parameters.speed_max_rad_s[0] == pytest.approx(6000 * math.pi / 30)


# -- words --------------------------------------------------------------------------------------------------


@FORMS
def test_word_that_is_not_allowed_names_the_nearest(tmp_path, write):
    tables = small_case()
    set_cell(tables, "motors", "B-20", "commutation", "brushd")
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.row, problem.column) == ("motors", 3, "commutation")
    assert problem.got == "'brushd'"
    assert problem.allowed == "one of: brushed, six-step, sinusoidal"
    assert problem.remedy == "Did you mean 'brushed'?"


@pytest.mark.parametrize(
    ("table", "row", "column", "value"),
    [
        ("motors", "M-10", "current basis", "amps"),
        ("motors", "M-10", "thermal class", "Z"),
        ("motors", "M-10", "magnet material", "steel"),
        ("drives", "D-2", "commutation", "brushed, stepper"),
        ("duty_cycle", "wait", "motion law", "wiggle"),
        ("duty_cycle", "wait", "brake closed", "perhaps"),
        ("axis", "mechanism", "value", "windlass"),
    ],
)
def test_other_words_that_are_not_allowed(tmp_path, table, row, column, value):
    tables = small_case()
    set_cell(tables, table, row, column, value)
    problem = problems_of(tmp_path, tables)[0]
    assert (problem.table, problem.got) == (table, repr(value))
    assert problem.row is not None
    assert column in problem.column or problem.column == row
    assert "of: " in problem.allowed or problem.allowed == "yes or no"
    assert problem.remedy


# -- headings -----------------------------------------------------------------------------------------------


@FORMS
@pytest.mark.parametrize(
    ("heading", "got", "remedy"),
    [
        ("rotor inertia", "no unit in square brackets", "'rotor inertia [kg·cm²]'"),
        ("rotor inertia (g·cm²)", "no unit in square brackets", "'rotor inertia [kg·cm²]'"),
        ("rotor inertia []", "no unit in square brackets", "'rotor inertia [kg·cm²]'"),
        ("rotor inertia [Nm]", "the unit 'Nm'", "torque"),
        ("rotor inertia [furlong]", "the unit 'furlong'", "Accepted for inertia"),
    ],
)
def test_unit_that_is_missing_or_wrong(tmp_path, write, heading, got, remedy):
    tables = small_case()
    rename(tables, "motors", "rotor inertia [g·cm²]", heading)
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.row, problem.column) == ("motors", None, heading)
    assert got in problem.got
    assert problem.allowed == "a unit of inertia"
    assert remedy in problem.remedy


@FORMS
def test_heading_that_is_too_long(tmp_path, write):
    tables = small_case()
    add_column(tables, "motors", "g" * 10_000, 1, 2)
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.row, problem.column) == ("motors", None, "column 18")
    assert problem.got.endswith("(10000 characters)")
    assert problem.allowed == "a heading of at most 200 characters"


def test_cells_under_a_broken_heading_are_still_read(tmp_path):
    tables = small_case()
    rename(tables, "motors", "rotor inertia [g·cm²]", "rotor inertia")
    set_cell(tables, "motors", "B-20", "rotor inertia", "heavy")
    heading, cell = problems_of(tmp_path, tables)
    assert (heading.row, cell.row, cell.got) == (None, 3, "'heavy'")


@FORMS
def test_same_quantity_twice(tmp_path, write):
    tables = small_case()
    add_column(tables, "motors", "Rotor_Inertia [kg·cm²]", 0.48, 0.536)
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.column) == ("motors", "Rotor_Inertia [kg·cm²]")
    assert problem.got == "the headings 'rotor inertia [g·cm²]' and 'Rotor_Inertia [kg·cm²]'"
    assert problem.allowed == "one column for each quantity"


@FORMS
def test_misspelt_required_column_is_recognised(tmp_path, write):
    tables = small_case()
    rename(tables, "motors", "rotor inertia [g·cm²]", "rotor inertai [g·cm²]")
    missing, unknown = problems_of(tmp_path, tables, write)
    assert (missing.table, missing.row, missing.column, missing.severity) == (
        "motors",
        None,
        "rotor inertia",
        "error",
    )
    assert missing.got == "no such column"
    assert "'rotor inertai [g·cm²]' meant?" in missing.remedy
    assert (unknown.column, unknown.severity) == ("rotor inertai [g·cm²]", "warning")
    assert "Did you mean 'rotor inertia'?" in unknown.remedy


def test_missing_choice_of_columns(tmp_path):
    tables = small_case()
    rename(tables, "motors", "torque constant [mNm/A]", "box")
    errors = [p for p in problems_of(tmp_path, tables) if p.severity == "error"]
    problem = the_only(errors)
    assert problem.column == "torque constant"
    assert problem.allowed == "a column torque constant or back-EMF constant or speed constant"


def test_filled_column_without_heading(tmp_path):
    tables = small_case()
    tables["motors"][0].insert(3, "")
    for row in tables["motors"][1:]:
        row.insert(3, "stray")
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.severity, problem.column) == ("warning", "column 4")
    assert problem.got == "2 cells without a heading"


# -- rows ---------------------------------------------------------------------------------------------------


@FORMS
@pytest.mark.parametrize("again", ["M-10", "m-10", " M-10 "])
def test_names_must_differ(tmp_path, write, again):
    tables = small_case()
    row_of(tables, "motors", "B-20")[0] = again
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.row, problem.column) == ("motors", 3, "motor")
    assert problem.got == f"{again.strip()!r}, used before in row 2"
    assert problem.allowed == "each name once"
    assert problem.remedy


@pytest.mark.parametrize(
    ("table", "row", "column", "value", "blamed", "allowed"),
    [
        ("motors", "M-10", "peak current", 5, "peak current [A]", "at least the continuous current of 6.1 A"),
        ("gearheads", "G-3", "peak torque", 7, "peak torque [Nm]", "at least the continuous torque of 8 Nm"),
        ("drives", "D-1", "peak current", 6, "peak current [A]", "at least the continuous current of 7 A"),
        (
            "drives",
            "D-1",
            "maximum bus voltage",
            20,
            "maximum bus voltage [V]",
            "above the minimum bus voltage of 20 V",
        ),
    ],
)
def test_values_of_a_row_that_contradict_each_other(tmp_path, table, row, column, value, blamed, allowed):
    tables = small_case()
    set_cell(tables, table, row, column, value)
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column) == (table, 2, blamed)
    assert problem.got.startswith(f"{value} ")
    assert problem.allowed == allowed
    assert problem.remedy


def test_back_driving_efficiency_above_the_efficiency(tmp_path):
    tables = small_case()
    add_column(tables, "gearheads", "back-driving efficiency [%]", 97, "")
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.got) == ("gearheads", 2, "97 %")
    assert problem.allowed == "at most the efficiency of 95 %"


@pytest.mark.parametrize("commutation", ["brushed", "six-step"])
@pytest.mark.parametrize("basis", ["rms", "peak"])
def test_direct_current_motor_with_sinusoidal_amperes(tmp_path, commutation, basis):
    tables = small_case()
    set_cell(tables, "motors", "B-20", "commutation", commutation)
    set_cell(tables, "motors", "B-20", "current basis", basis)
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column) == ("motors", 3, "current basis")
    assert problem.got == f"{basis} for a {commutation} motor"
    assert problem.allowed == "DC for brushed and six-step motors"


def test_rms_ampere_in_the_heading_over_a_direct_current_row(tmp_path):
    tables = small_case()
    rename(tables, "motors", "peak current [A]", "peak current [Arms]")
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.row, problem.column) == (3, "peak current [Arms]")
    assert problem.got == "40 Arms where the current basis is DC"


def test_back_emf_volt_that_does_not_exist(tmp_path):
    tables = small_case()
    rename(tables, "motors", "torque constant [mNm/A]", "back-EMF constant [mV/rpm]")
    add_column(tables, "motors", "back-EMF constant basis", "DC", "rms phase")
    first, second = problems_of(tmp_path, tables)
    assert (first.row, first.column, first.got) == (2, "back-EMF constant basis", "V DC")
    assert (second.row, second.got, second.allowed) == (3, "V rms phase", "DC for a brushed motor")


def test_heading_and_column_contradict_on_the_volt(tmp_path):
    tables = small_case()
    tables["motors"].pop()
    add_column(tables, "motors", "back-EMF constant [Vpk/krpm]", 9)
    add_column(tables, "motors", "back-EMF constant basis", "rms phase")
    problem = the_only(problems_of(tmp_path, tables))
    assert problem.got == "'rms phase' beside the heading 'back-EMF constant [Vpk/krpm]'"
    assert problem.allowed == "the same volt in both"


def test_row_that_is_rotary_and_linear_at_once(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "moving mass [kg]", 3, "")
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.table, problem.row, problem.column) == ("motors", 2, "moving mass [kg]")
    assert problem.allowed == "one kind of machine in a row"


def test_many_problems_are_capped_and_counted(tmp_path):
    tables = small_case()
    template = tables["motors"][1]
    for number in range(100):
        row = list(template)
        row[0] = f"X-{number}"
        tables["motors"].append(row)
        set_cell(tables, "motors", f"X-{number}", "rotor inertia", "bad")
    problems = problems_of(tmp_path, tables)
    assert len(problems) == KEPT_PER_COLUMN + 1
    assert problems[-1].got == f"{100 - KEPT_PER_COLUMN} more rows with a problem"
    assert (problems[-1].table, problems[-1].column) == ("motors", "rotor inertia [g·cm²]")


def test_all_tables_are_told_at_once(tmp_path):
    tables = small_case()
    set_cell(tables, "motors", "M-10", "rotor inertia", "a")
    set_cell(tables, "gearheads", "G-3", "ratio", "b")
    set_cell(tables, "drives", "D-1", "peak current", "c")
    set_cell(tables, "duty_cycle", "up", "displacement", "d")
    row_of(tables, "axis", "lead")[1] = "e"
    problems = problems_of(tmp_path, tables)
    assert sorted(problem.got for problem in problems) == ["'a'", "'b'", "'c'", "'d'", "'e'"]


@FORMS
@pytest.mark.parametrize("column", ["payload", "process force"])
def test_an_empty_cell_is_no_advice_where_it_counts_as_nothing(tmp_path, write, column):
    tables = small_case()
    set_cell(tables, "duty_cycle", "up", column, "NaN")
    problem = the_only(problems_of(tmp_path, tables, write))
    assert (problem.table, problem.column.partition(" [")[0]) == ("duty_cycle", column)
    assert "worst case" in problem.remedy
    assert "Leave" not in problem.remedy
