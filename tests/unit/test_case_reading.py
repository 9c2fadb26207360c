"""Cases in every form they are kept in, and what the axis and duty cycle become."""

from __future__ import annotations

import math
import shutil

import pytest
from case_files import add_column, row_of, set_cell, small_case, write_folder, write_workbook

from actuator_sizing.case.check_names import CHECK_NAMES
from actuator_sizing.case.model import Case
from actuator_sizing.case.reading import check_case, read_case
from actuator_sizing.errors import InputError


@pytest.fixture
def case(tmp_path) -> Case:
    return read_case(write_folder(tmp_path / "axis_7", small_case()))


def test_small_case_is_understood_without_a_word(case):
    assert case.problems == ()
    assert case.name == "axis_7"
    assert case.mechanism.name == "ball screw"
    assert case.mechanism.lead == pytest.approx(0.01)
    assert case.mechanism.inclination == pytest.approx(math.pi / 2)
    assert case.cycle_duration_s == pytest.approx(2.0)


def test_defaults_are_marked_as_assumed(case):
    assumed = {
        entry.label: entry for entry in case.entries if entry.table == "axis" and entry.origin == "assumed"
    }
    assert assumed["minimum bus voltage"].value_si == pytest.approx(43.2)
    assert assumed["minimum bus voltage"].rule == "nominal bus voltage −10 %"
    assert assumed["modulation limit"].value_si == 0.95
    assert assumed["guide friction force"].value_si == 0.0
    assert case.surroundings.bus_max_v == pytest.approx(52.8)
    assert math.isnan(case.surroundings.judged_winding_degc)
    assert case.options["rank by"] == "price"
    assert case.options["sets to detail"] == 10


def test_stated_values_keep_row_source_and_spelling(case):
    mass = next(entry for entry in case.entries if entry.label == "moving mass")
    assert (mass.row, mass.as_entered, mass.value_si, mass.unit) == (8, "18.5 kg", 18.5, "kg")
    assert (mass.origin, mass.source) == ("stated", "weighed")


def test_segments_follow_each_other(case):
    up, wait, down, rest = case.segments
    assert [segment.start_s for segment in case.segments] == pytest.approx([0.0, 0.6, 1.0, 1.6])
    assert (up.name, up.row, up.payload, up.note) == ("up", 2, 5.0, "loaded")
    assert wait.brake_closed
    assert not rest.brake_closed
    assert sum(phase.duration_s for phase in down.phases) == pytest.approx(0.6)


def test_limits_keep_their_defaults(case):
    assert set(case.limits) == {key for key, _ in CHECK_NAMES}
    assert case.limits["rms_current"].allowed_utilisation == 1.0
    assert case.limits["rms_current"].recommended_reserve == 0.1
    assert case.limits["inertia_ratio"].applies == "advice"


def test_limits_and_tolerances_are_read(tmp_path):
    tables = small_case()
    tables["limits"] = [
        ["check", "applies", "allowed utilisation [%]", "recommended reserve [%]"],
        ["RMS current", "", 90, ""],
        ["inertia ratio", "no", "", ""],
        ["gearhead_mean_speed", "advice", "", 5],
    ]
    tables["tolerances"] = [
        ["quantity", "distribution", "width", "unit"],
        ["moving mass", "uniform", 500, "g"],
        ["torque constant", "normal", "5", "%"],
    ]
    case = read_case(write_workbook(tmp_path / "case.xlsx", tables))
    assert case.limits["rms_current"].allowed_utilisation == pytest.approx(0.9)
    assert case.limits["rms_current"].applies == "yes"
    assert case.limits["inertia_ratio"].applies == "no"
    assert case.limits["gearhead_mean_speed"].recommended_reserve == pytest.approx(0.05)
    mass, constant = case.tolerances
    assert (mass.width, mass.relative, mass.distribution) == (0.5, False, "uniform")
    assert (constant.width, constant.relative) == (pytest.approx(0.05), True)


def test_every_form_of_the_same_case_has_the_same_fingerprint(tmp_path, case):
    tables = small_case()
    forms = [
        write_folder(tmp_path / "other name", tables),
        write_folder(tmp_path / "semicolon", tables, delimiter=";", decimal=","),
        write_folder(tmp_path / "tab", tables, delimiter="\t"),
        write_workbook(tmp_path / "book.xlsx", tables),
    ]
    assert {read_case(form).fingerprint for form in forms} == {case.fingerprint}
    assert len(case.fingerprint) == 64


def test_order_of_columns_and_sheets_units_and_remarks_do_not_change_the_fingerprint(tmp_path, case):
    tables = dict(reversed(small_case().items()))
    tables["motors"] = [row[:1] + row[:0:-1] for row in tables["motors"]]
    inertia = next(i for i, heading in enumerate(tables["motors"][0]) if "rotor inertia" in str(heading))
    tables["motors"][0][inertia] = "rotor inertia [kg·m²]"
    for row in tables["motors"][1:]:
        row[inertia] = float(row[inertia]) * 1e-7
    tables["axis"] = [tables["axis"][0], *reversed(tables["axis"][1:])]
    row_of(tables, "axis", "moving mass")[3] = "another source"
    add_column(tables, "motors", "shelf", "A", "B")
    assert read_case(write_workbook(tmp_path / "book.xlsx", tables)).fingerprint == case.fingerprint


@pytest.mark.parametrize(
    ("table", "row", "column", "value"),
    [
        ("axis", "moving mass", "value", 18.6),
        ("axis", "revision", None, None),
        ("duty_cycle", "up", "payload", 5.1),
        ("duty_cycle", "wait", "brake closed", "no"),
        ("motors", "M-10", "rotor inertia", 481),
        ("motors", "M-10", "motor", "M-11"),
        ("gearheads", "G-5", "ratio", 5.01),
        ("drives", "D-1", "peak time", 3),
    ],
)
def test_any_value_changes_the_fingerprint(tmp_path, case, table, row, column, value):
    tables = small_case()
    if column is None:
        tables[table].append([row, "B", "", ""])
    else:
        set_cell(tables, table, row, column, value)
    assert read_case(write_folder(tmp_path / "changed", tables)).fingerprint != case.fingerprint


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16", "cp1252"])
def test_encodings_of_exports(tmp_path, case, encoding):
    folder = write_folder(tmp_path / "case", small_case())
    for file in folder.glob("*.csv"):
        text = file.read_text("utf-8").replace("[Ω]", "[ohm]")
        file.write_bytes(text.encode(encoding))
    again, problems = check_case(folder)
    assert again.fingerprint == case.fingerprint
    # Windows-1252 is told, because a wrong guess would change special letters.
    expected = {"axis.csv", "motors.csv", "gearheads.csv"} if encoding == "cp1252" else set()
    assert {problem.table for problem in problems if "Windows-1252" in problem.remedy} == expected
    assert all(problem.severity == "note" for problem in problems)


def test_quotes_blank_lines_and_announced_separator(tmp_path, case):
    folder = write_folder(tmp_path / "case", small_case(), delimiter=";", decimal=",")
    axis = (folder / "axis.csv").read_text("utf-8")
    (folder / "axis.csv").write_text('sep=;\n\n;;;\n"' + axis.replace(";", '";"', 3).replace("\n", '"\n', 1))
    again = read_case(folder)
    assert again.fingerprint == case.fingerprint
    assert next(entry for entry in again.entries if entry.label == "mechanism").row == 4


def test_decimal_comma_in_quotes_in_a_comma_separated_file(tmp_path, case):
    folder = write_folder(tmp_path / "case", small_case(), decimal=",")  # the csv module quotes what needs it
    assert read_case(folder).fingerprint == case.fingerprint


def test_percent_cells_of_a_workbook_mean_what_they_show(tmp_path, case):
    import openpyxl

    path = write_workbook(tmp_path / "case.xlsx", small_case())
    book = openpyxl.load_workbook(path)
    for row in book["gearheads"].iter_rows(min_row=2):
        row[5].value, row[5].number_format = 0.95, "0%"
    book.save(path)
    assert read_case(path).fingerprint == case.fingerprint


def test_formula_with_stored_value_counts_as_its_value(tmp_path, case):
    import xlsxwriter

    path = tmp_path / "case.xlsx"
    with xlsxwriter.Workbook(str(path)) as book:
        for name, rows in small_case().items():
            sheet = book.add_worksheet(name)
            for i, row in enumerate(rows):
                for j, cell in enumerate(row):
                    if cell == 18.5:
                        sheet.write_formula(i, j, "=17+1.5", None, 18.5)
                    elif cell != "":
                        sheet.write(i, j, cell)
    assert read_case(path).fingerprint == case.fingerprint


def test_formatted_but_empty_cells_are_no_rows(tmp_path, case):
    import openpyxl
    from openpyxl.styles import PatternFill

    path = write_workbook(tmp_path / "case.xlsx", small_case())
    book = openpyxl.load_workbook(path)
    for row in (100, 500):
        book["motors"].cell(row, 30).fill = PatternFill("solid", fgColor="FFFF00")
    book["motors"].cell(2000, 2).value = "   "
    book.save(path)
    again = read_case(path)
    assert len(again.motors) == 2
    assert again.fingerprint == case.fingerprint


def test_catalogs_in_a_shared_folder_and_one_in_the_case(tmp_path, case):
    tables = small_case()
    shared = tmp_path / "shared"
    write_folder(shared, {name: tables[name] for name in ("motors", "gearheads", "drives")})
    other = small_case()
    other["drives"].pop()
    mine = {"axis": tables["axis"] + [["catalog folder", "../shared", "", ""]],
            "duty_cycle": tables["duty_cycle"]}  # fmt: skip
    assert read_case(write_folder(tmp_path / "a", mine)).fingerprint == case.fingerprint
    with_drives = read_case(write_folder(tmp_path / "b", {**mine, "drives": other["drives"]}))
    assert with_drives.drives.names == ("D-1",)  # the table in the case wins
    shutil.rmtree(shared)
    shared.mkdir()
    write_workbook(
        shared / "catalog.xlsx", {name: tables[name] for name in ("motors", "gearheads", "drives")}
    )
    assert read_case(tmp_path / "a").fingerprint == case.fingerprint


def test_linear_motor_axis_takes_no_gearhead(tmp_path):
    tables = small_case()
    keep = {"quantity", "title", "moving mass", "nominal bus voltage"}
    tables["axis"] = [row for row in tables["axis"] if row[0] in keep] + [
        ["mechanism", "linear motor", "", ""]
    ]
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    assert case.gearheads.names == ("",)
    assert [(p.table, p.severity) for p in problems if p.column != "inclination"] == [("gearheads", "note")]


def test_rotary_axis_may_turn_on(tmp_path):
    tables = small_case()
    tables["axis"] = [["quantity", "value", "unit", "source"], ["mechanism", "rotary load", "", ""],
                      ["load inertia", 0.2, "kg·m²", ""], ["nominal bus voltage", 48, "V", ""]]  # fmt: skip
    tables["duty_cycle"] = [["segment", "motion law", "displacement [deg]", "duration [ms]", "payload [kg·cm²]"],
                            ["index", "modified sine", 30, 300, 20], ["wait", "dwell", "", 200, 20]]  # fmt: skip
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    assert case.segments[0].payload == pytest.approx(20e-4)
    (note,) = problems
    assert (note.table, note.row, note.column, note.severity) == ("duty_cycle", 3, "displacement", "note")
    assert note.got == "an end 30° away from the start"


def test_linear_cycle_that_walks_on_is_a_warning(tmp_path):
    tables = small_case()
    set_cell(tables, "duty_cycle", "down", "displacement", -150)
    _, (warning,) = check_case(write_folder(tmp_path / "case", tables))
    assert (warning.severity, warning.got) == ("warning", "an end 0.05 m away from the start")


def test_speed_is_handed_from_segment_to_segment(tmp_path):
    tables = small_case()
    tables["duty_cycle"] = [
        ["segment", "motion law", "end speed [mm/s]", "duration [s]"],
        ["run", "constant speed", 50, 1],
        ["faster", "speed ramp", 80, 0.2],
        ["fast", "constant speed", "", 1],
        ["slower", "speed ramp", 50, 0.2],
    ]
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    assert [problem.severity for problem in problems] == ["warning"]  # it walks on
    speeds = [float(segment.phases[0].kinematics([0.0])[1][0]) for segment in case.segments]
    assert speeds == pytest.approx([0.05, 0.05, 0.08, 0.08])


def test_read_case_raises_with_every_error(tmp_path):
    tables = small_case()
    set_cell(tables, "motors", "M-10", "rotor inertia", -1)
    set_cell(tables, "drives", "D-1", "peak current", "much")
    row_of(tables, "axis", "lead")[1] = ""
    with pytest.raises(InputError) as caught:
        read_case(write_folder(tmp_path / "case", tables))
    assert {problem.table for problem in caught.value.problems} == {"motors", "drives", "axis"}
    assert str(caught.value).count("\n") == 2
