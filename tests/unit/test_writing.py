"""Starting and converting cases: nothing is lost, nothing is overwritten, text stays text."""

import csv
import io
import shutil
import zipfile
from pathlib import Path

import pytest
from openpyxl import load_workbook

from actuator_sizing import check_case, convert_case, read_case, start_case
from actuator_sizing.case.sheets import Sheet
from actuator_sizing.case.starting import example_sheets
from actuator_sizing.case.tables import TABLES
from actuator_sizing.case.workbook_writing import shows_exactly, workbook_bytes
from actuator_sizing.case.writing import csv_bytes
from actuator_sizing.core.mechanisms import MECHANISMS
from actuator_sizing.errors import InputError

NASTY = [
    ["motor", "rotor inertia [kg·cm²]", "price [EUR]", "note", "order code"],
    ["007", "0.10", "420.00", "=1+1", "0012"],
    ["1.50", "1e-3", "+2", "+49 30 1234", "12345678901234567890"],
    ["M-1 <b>&amp;", "2.60", "1 234,5", "=HYPERLINK(\"x\")", "_x0041_"],
    ["@SUM(A1)", "0.000001", "-", "two\nlines, \"quoted\"; and\ttab", " kept blanks "],
    [],
    ["Ωµ°", "91/6", "", "'apostrophe", "2026-01-02"],
]  # fmt: skip


def read_csv(path):
    return [row for row in csv.reader(io.StringIO(path.read_text("utf-8-sig"), newline=""))]


def write_csv(path, rows):
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(csv_bytes(rows))


def trimmed(rows):
    """Rows without empty cells at the end, which a CSV may or may not spell out."""
    result = []
    for row in rows:
        row = list(row)
        while row and not row[-1]:
            row.pop()
        result.append(row)
    return result


@pytest.fixture
def nasty_folder(tmp_path):
    write_csv(tmp_path / "case" / "motors.csv", NASTY)
    write_csv(tmp_path / "case" / "my own remarks.csv", [["what", "x"], ["=A1", "1.20"], ["1,5", "007"]])
    return tmp_path / "case"


def test_folder_to_workbook_to_folder_keeps_every_cell_as_typed(nasty_folder, tmp_path):
    convert_case(nasty_folder, tmp_path / "case.xlsx")
    convert_case(tmp_path / "case.xlsx", tmp_path / "back")
    assert {path.name for path in (tmp_path / "back").iterdir()} == {"motors.csv", "my own remarks.csv"}
    for name in ("motors.csv", "my own remarks.csv"):
        assert trimmed(read_csv(tmp_path / "back" / name)) == trimmed(read_csv(nasty_folder / name))


def test_the_workbook_holds_numbers_as_numbers_and_text_as_text(nasty_folder, tmp_path):
    convert_case(nasty_folder, tmp_path / "case.xlsx")
    page = load_workbook(tmp_path / "case.xlsx")["motors"]
    assert (page["B2"].value, page["B2"].number_format) == (0.1, "0.00")
    assert page["C2"].value == 420
    assert [page[at].data_type for at in ("A2", "A3", "D2", "D4", "E2", "E3")] == ["s"] * 6
    kinds = {cell.data_type for row in page.iter_rows() for cell in row}
    assert "f" not in kinds
    with zipfile.ZipFile(tmp_path / "case.xlsx") as archive:
        sheets = [archive.read(n) for n in archive.namelist() if n.startswith("xl/worksheets/sheet")]
    assert not any(b"<f>" in sheet or b"<hyperlink" in sheet for sheet in sheets)


def test_decimal_comma_keeps_its_meaning(tmp_path):
    """In this file a comma is the decimal mark, so 1,500 is 1.5 and 2.000 is 2000."""
    folder = tmp_path / "case"
    folder.mkdir()
    (folder / "motors.csv").write_text(
        "motor;rotor inertia [kg·cm²];price [EUR];order code\nA,1;1,500;2.000;1,5\nB;0,35;1.234,5;7\n",
        "utf-8",
    )
    convert_case(folder, tmp_path / "case.xlsx")
    page = load_workbook(tmp_path / "case.xlsx")["motors"]
    assert [page[at].value for at in ("A2", "B2", "C2", "B3", "C3", "D2")] == [
        "A,1", 1.5, 2000, 0.35, "1.234,5", "1,5",
    ]  # fmt: skip
    convert_case(tmp_path / "case.xlsx", tmp_path / "back")
    assert read_csv(tmp_path / "back" / "motors.csv")[1:] == [
        ["A,1", "1.500", "2000", "1,5"],
        ["B", "0.35", "1.234,5", "7"],
    ]


def test_a_stray_decimal_comma_cannot_turn_a_point_into_thousands(tmp_path):
    """The unknown column proves a decimal comma; without care 1.234 would be read as 1234 beside it."""
    (tmp_path / "case.xlsx").write_bytes(
        workbook_bytes([Sheet("motors", (("motor", "mass [kg]", "my column"), ("A", "1.234", "1,5")))])
    )
    convert_case(tmp_path / "case.xlsx", tmp_path / "case")
    assert read_csv(tmp_path / "case" / "motors.csv")[1] == ["A", "1.2340", "1,5"]


def test_numbers_of_a_spreadsheet_come_out_exactly(tmp_path):
    from xlsxwriter import Workbook

    book = Workbook(tmp_path / "case.xlsx")
    page = book.add_worksheet("motors")
    two = book.add_format({"num_format": "0.00"})
    for column, (value, style) in enumerate(
        [
            (0.1, None),
            (0.1, two),
            (1.2345, two),
            (1e-7, None),
            (123456789012, None),
            (-3.0, None),
            (0.95, None),
        ]
    ):
        page.write(0, column, f"c{column}")
        page.write(1, column, value, style)
    page.write_formula(1, 7, "=1+1", None, 2)
    page.write(0, 7, "c7")
    book.close()
    convert_case(tmp_path / "case.xlsx", tmp_path / "case")
    assert read_csv(tmp_path / "case" / "motors.csv")[1] == [
        "0.1", "0.10", "1.2345", "0.0000001", "123456789012", "-3", "0.95", "2",
    ]  # fmt: skip


def test_a_formula_that_nobody_calculated_is_reported(tmp_path):
    from openpyxl import Workbook

    book = Workbook()
    book.active.title = "motors"
    book.active.append(["motor", "mass [kg]"])
    book.active.append(["A", "=1+1"])
    book.save(tmp_path / "case.xlsx")
    with pytest.raises(InputError, match="motors row 2: got the formula in B2 without a stored value"):
        convert_case(tmp_path / "case.xlsx", tmp_path / "case")
    assert not (tmp_path / "case").exists()


def test_relative_catalog_folder_still_names_the_same_folder(tmp_path):
    write_csv(
        tmp_path / "cases" / "lift" / "axis.csv", [["quantity", "value"], ["catalog folder", "../../parts"]]
    )
    convert_case(tmp_path / "cases" / "lift", tmp_path / "cases" / "lift.xlsx")
    assert load_workbook(tmp_path / "cases" / "lift.xlsx")["axis"]["B2"].value == "../parts"
    convert_case(tmp_path / "cases" / "lift.xlsx", tmp_path / "cases" / "back")
    assert read_csv(tmp_path / "cases" / "back" / "axis.csv")[1] == ["catalog folder", "../../parts"]


DEMO = Path(__file__).parents[2] / "catalogs_demo"


@pytest.mark.parametrize("name", ["tray_lift", "tray_shuttle", "potting_table"])
def test_demo_cases_mean_the_same_in_every_form(tmp_path, name):
    """One of them has semicolons, decimal commas and a shared catalog folder."""
    shutil.copytree(DEMO / "catalog", tmp_path / "catalog")
    shutil.copytree(DEMO / name, tmp_path / name)
    convert_case(tmp_path / name, tmp_path / "sub" / "case.xlsx")
    convert_case(tmp_path / "sub" / "case.xlsx", tmp_path / "back")
    cases = [read_case(tmp_path / each) for each in (name, "sub/case.xlsx", "back")]
    assert len({case.fingerprint for case in cases}) == 1
    entries = [[(e.column, e.value_si, e.origin, e.source) for e in case.entries] for case in cases]
    assert entries[0] == entries[1] == entries[2]


@pytest.mark.parametrize("target", ["taken.xlsx", "other"])
def test_nothing_is_overwritten_unless_asked(nasty_folder, tmp_path, target):
    (tmp_path / "taken.xlsx").write_bytes(b"precious")
    write_csv(tmp_path / "other" / "motors.csv", [["precious"]])
    source = nasty_folder
    if target == "other":
        convert_case(nasty_folder, tmp_path / "source.xlsx")
        source = tmp_path / "source.xlsx"
    with pytest.raises(InputError, match="exists already"):
        convert_case(source, tmp_path / target)
    assert (tmp_path / "taken.xlsx").read_bytes() == b"precious"
    assert read_csv(tmp_path / "other" / "motors.csv") == [["precious"]]
    convert_case(source, tmp_path / target, overwrite=True)
    assert (tmp_path / "taken.xlsx").read_bytes() != b"precious" or target == "other"


def test_same_form_and_wrong_endings_are_refused(nasty_folder, tmp_path):
    with pytest.raises(InputError, match="a folder to be made from a folder"):
        convert_case(nasty_folder, tmp_path / "other")
    with pytest.raises(InputError, match=r"'\.ods'"):
        convert_case(nasty_folder, tmp_path / "case.ods")


def test_what_does_not_fit_a_workbook_is_reported(tmp_path):
    sheets = [Sheet("a" * 32, (("x",),)), Sheet("b", (("x",), ("y" * 32_768,))), Sheet("c/d", (("x",),))]
    with pytest.raises(InputError) as caught:
        workbook_bytes(sheets)
    assert [problem.table for problem in caught.value.problems] == ["a" * 32, "b", "c/d"]


def test_the_same_tables_give_the_same_bytes():
    sheets = example_sheets(MECHANISMS["ball screw"])
    assert workbook_bytes(sheets) == workbook_bytes(sheets)


@pytest.mark.parametrize("text", ["0", "12", "-3.50", "0.1", "100000000000000", "0.000"])
def test_exact_numbers(text):
    assert shows_exactly(text)
    assert f"{float(text):.{len(text.partition('.')[2])}f}" == text


# -- a started case ----------------------------------------------------------------------------------


@pytest.mark.parametrize("mechanism", MECHANISMS)
@pytest.mark.parametrize("ending", ["", ".xlsx"])
def test_a_started_case_is_understood_without_a_word(tmp_path, mechanism, ending):
    path = tmp_path / f"new{ending}"
    start_case(path, mechanism)
    case, problems = check_case(path)
    assert [str(problem) for problem in problems] == []
    assert case.mechanism.name == mechanism
    assert abs(sum(segment.phases[0].duration_s for segment in case.segments)) > 0


def test_both_forms_of_a_started_case_say_the_same(tmp_path):
    start_case(tmp_path / "a", "belt")
    start_case(tmp_path / "a.xlsx", "belt")
    convert_case(tmp_path / "a", tmp_path / "b.xlsx")
    prints = {check_case(tmp_path / name)[0].fingerprint for name in ("a", "a.xlsx", "b.xlsx")}
    assert len(prints) == 1


def test_the_workbook_guides_the_hand(tmp_path):
    start_case(tmp_path / "new.xlsx", "lead screw")
    book = load_workbook(tmp_path / "new.xlsx")
    assert book.sheetnames == [name for name in TABLES if name != "map"]  # a lead screw has none
    motors = book["motors"]
    assert motors.freeze_panes == "B2"
    assert "Required." in motors["A1"].comment.text
    lists = {str(v.sqref).split(":")[0]: v.formula1 for v in motors.data_validations.dataValidation}
    assert lists["B2"] == '"brushed,six-step,sinusoidal"'
    axis = book["axis"]
    assert any("lead screw" in v.formula1 for v in axis.data_validations.dataValidation)
    assert all(row[0].comment is not None for row in axis.iter_rows(min_row=2))


def test_start_refuses_what_exists_and_what_it_does_not_know(tmp_path):
    (tmp_path / "full").mkdir()
    (tmp_path / "full" / "x").write_text("precious")
    for name in ("full", "full/x"):
        with pytest.raises(InputError, match="exists already"):
            start_case(tmp_path / name)
    assert [path.name for path in (tmp_path / "full").iterdir()] == ["x"]
    with pytest.raises(InputError, match="Did you mean 'ball screw'"):
        start_case(tmp_path / "new", "bal screw")
    assert not (tmp_path / "new").exists()
    (tmp_path / "empty").mkdir()
    assert {path.name for path in start_case(tmp_path / "empty")} == {"columns.md"} | {
        f"{t}.csv" for t in TABLES if t != "map"
    }
