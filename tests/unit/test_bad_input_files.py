"""Files that are no tables, tables that are not there, and workbooks that try something."""

from __future__ import annotations

import csv
import resource
import time
import zipfile

import pytest
from case_files import small_case, write_folder, write_workbook
from test_bad_input_cells import the_only

from actuator_sizing.case.reading import check_case, read_case
from actuator_sizing.errors import InputError

MEGABYTE = 1024  # ru_maxrss counts kilobytes


def errors_of(path):
    case, problems = check_case(path)
    assert case is None
    return [problem for problem in problems if problem.severity == "error"]


def edit_workbook(tmp_path, change):
    """Write the small case as a workbook, after `change` has changed it."""
    import openpyxl

    path = write_workbook(tmp_path / "case.xlsx", small_case())
    book = openpyxl.load_workbook(path)
    change(book)
    book.save(path)
    return path


# -- paths --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["nowhere", "nowhere.xlsx", "x" * 5000, "a\0b"])
def test_path_that_does_not_exist(tmp_path, name):
    problem = the_only(errors_of(f"{tmp_path}/{name}"))
    assert (problem.got, problem.allowed) == ("nothing there", "a workbook or a folder")
    assert "Check the path" in problem.remedy


def test_single_csv_file(tmp_path):
    folder = write_folder(tmp_path / "case", small_case())
    problem = the_only(errors_of(folder / "axis.csv"))
    assert (problem.table, problem.got) == ("axis.csv", "a single CSV file")
    assert problem.remedy == "Name the folder that holds the file."


def test_empty_folder_names_every_required_table(tmp_path):
    problems = errors_of(tmp_path)
    assert [problem.table for problem in problems] == ["axis", "duty_cycle", "motors", "drives"]
    assert all(problem.got == "no such table" for problem in problems)
    assert "motors.csv with at least the columns: motor, commutation" in problems[2].remedy
    assert "rotor inertia (rotary motor), moving mass (linear motor)" in problems[2].remedy
    assert "catalog folder" in problems[2].allowed


@pytest.mark.parametrize("table", ["axis", "duty_cycle", "motors", "drives"])
def test_one_missing_table(tmp_path, table):
    tables = small_case()
    del tables[table]
    problem = the_only(errors_of(write_workbook(tmp_path / "case.xlsx", tables)))
    assert (problem.table, problem.row, problem.got) == (table, None, "no such table")


def test_gearheads_are_needed_only_without_direct_drive(tmp_path):
    tables = small_case()
    del tables["gearheads"]
    assert read_case(write_folder(tmp_path / "direct", tables)).gearheads.names == ("",)
    tables["axis"].append(["direct drive allowed", "no", "", ""])
    problem = the_only(errors_of(write_folder(tmp_path / "none", tables)))
    assert (problem.table, problem.got) == ("gearheads", "no table, and direct drive is not allowed")


def test_misspelt_file_is_told(tmp_path):
    folder = write_folder(tmp_path / "case", small_case())
    (folder / "motors.csv").rename(folder / "moters.csv")
    case, problems = check_case(folder)
    assert case is None
    assert [(p.table, p.severity) for p in problems] == [("motors", "error"), ("moters.csv", "warning")]
    assert "Did you mean 'motors.csv'?" in problems[1].remedy


def test_two_files_or_sheets_for_one_table(tmp_path):
    folder = write_folder(tmp_path / "case", small_case())
    (folder / "Motors.CSV").write_bytes((folder / "motors.csv").read_bytes())
    problem = the_only(errors_of(folder))
    assert "a second file for the table motors" in problem.got
    problem = the_only(errors_of(edit_workbook(tmp_path, lambda book: book.create_sheet("Duty cycle"))))
    assert (problem.column, problem.got) == ("Duty cycle", "two sheets for the table duty_cycle")


@pytest.mark.parametrize("folder", ["../nowhere", "axis.csv", "x" * 400])
def test_catalog_folder_that_does_not_exist(tmp_path, folder):
    tables = small_case()
    tables["axis"].append(["catalog folder", folder, "", ""])
    problem = the_only(errors_of(write_folder(tmp_path / "case", tables)))
    assert (problem.table, problem.row, problem.column) == ("axis", 12, "catalog folder")
    assert problem.allowed == "a folder that exists, relative to the case"


# -- tables without content ---------------------------------------------------------------------------------


@pytest.mark.parametrize("table", ["axis", "duty_cycle", "motors", "gearheads", "drives"])
@pytest.mark.parametrize("write", [write_folder, write_workbook], ids=["folder", "workbook"])
def test_table_with_headings_only(tmp_path, table, write):
    tables = small_case()
    del tables[table][1:]
    path = tmp_path / ("case.xlsx" if write is write_workbook else "case")
    problem = errors_of(write(path, tables))[0]
    assert (problem.table, problem.row, problem.got) == (table, None, "no rows below the headings")
    assert problem.allowed
    assert problem.remedy


@pytest.mark.parametrize("content", [b"", b"\n\n", b";;;\n", b"\xef\xbb\xbf"])
def test_empty_csv_file(tmp_path, content):
    folder = write_folder(tmp_path / "case", small_case())
    (folder / "drives.csv").write_bytes(content)
    problem = the_only(errors_of(folder))
    assert (problem.table, problem.got) == ("drives.csv", "an empty file")
    assert "a heading row" in problem.allowed


def test_empty_sheet(tmp_path):
    def clear(book):
        book["drives"].delete_rows(1, 10)

    problem = the_only(errors_of(edit_workbook(tmp_path, clear)))
    assert (problem.table, problem.got) == ("drives", "an empty sheet")


# -- CSV ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("content", "got"),
    [
        (b"drive,price\n\x00\x01\x02", "a binary file"),
        (b'drive,price\n"D-1,5\n', "unexpected end of data"),
        (b'drive,price\n"D"-1,5\n', "expected after"),
        (b"drive,price\nD\x81-1,5\n", "is not UTF-8"),
    ],
)
def test_broken_csv_file(tmp_path, content, got):
    folder = write_folder(tmp_path / "case", small_case())
    (folder / "drives.csv").write_bytes(content)
    problem = the_only(errors_of(folder))
    assert problem.table == "drives.csv"
    assert got in problem.got
    assert problem.allowed
    assert problem.remedy


def test_unquoted_decimal_comma_in_a_comma_separated_file(tmp_path):
    folder = write_folder(tmp_path / "case", small_case())
    file = folder / "drives.csv"
    file.write_text(file.read_text("utf-8").replace("D-1,rms,,7,", "D-1,rms,,7,5,"), "utf-8")
    problem = errors_of(folder)[0]
    assert (problem.table, problem.row) == ("drives", 2)
    assert problem.got == "10 cells, the last '180'"
    assert problem.allowed == "9 cells, one for each heading"
    assert "decimal comma" in problem.remedy


def test_absurdly_long_cell_and_wide_table(tmp_path):
    folder = write_folder(tmp_path / "case", small_case())
    (folder / "drives.csv").write_text("drive\n" + "x" * 40_000 + "\n")
    problem = next(problem for problem in errors_of(folder) if problem.row == 2)
    assert (problem.table, problem.got) == ("drives", "a cell of 40000 characters")
    assert problem.allowed == "at most 32767 characters"
    (folder / "drives.csv").write_text(",".join(f"c{i}" for i in range(500)) + "\n1\n")
    problem = the_only(errors_of(folder))
    assert (problem.table, problem.got) == ("drives.csv", "500 columns")


# -- workbooks ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("content", "got"),
    [
        (b"not a zip", "a file that is no workbook"),
        (b"", "a file that is no workbook"),
        (b"PK\x03\x04 broken", "a file that is no workbook"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + b"\0" * 600, "an old .xls file or a workbook with a password"),
    ],
)
def test_file_that_is_no_workbook(tmp_path, content, got):
    path = tmp_path / "case.xlsx"
    path.write_bytes(content)
    problem = the_only(errors_of(path))
    assert (problem.table, problem.row, problem.got) == ("case.xlsx", None, got)
    assert problem.allowed == "an .xlsx workbook"
    assert "save it as .xlsx" in problem.remedy


@pytest.mark.parametrize(
    "part", ["xl/workbook.xml", "xl/worksheets/sheet1.xml", "xl/_rels/workbook.xml.rels"]
)
@pytest.mark.parametrize("content", [None, b"", b"<a", b"<a/>", b"\xff\xfe\x00"])
def test_zip_with_a_missing_or_broken_part(tmp_path, part, content):
    path = write_workbook(tmp_path / "good.xlsx", small_case())
    broken = tmp_path / "case.xlsx"
    replace_part(path, broken, part, content)
    problem = errors_of(broken)[0]
    assert problem.table in ("case.xlsx", "axis", "duty_cycle")
    assert problem.remedy


def replace_part(path, target, part, content):
    with zipfile.ZipFile(path) as old, zipfile.ZipFile(target, "w", zipfile.ZIP_DEFLATED) as new:
        for info in old.infolist():
            data = content if info.filename == part else old.read(info)
            if data is not None:
                new.writestr(info.filename, data)


def test_zip_bomb_is_not_unpacked(tmp_path):
    path = write_workbook(tmp_path / "good.xlsx", small_case())
    bomb = tmp_path / "case.xlsx"
    sheet = b"<worksheet><sheetData>" + b" " * 60_000_000
    replace_part(path, bomb, "xl/worksheets/sheet1.xml", sheet)
    del sheet
    assert bomb.stat().st_size < 200_000
    before, start = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss, time.perf_counter()
    problem = the_only(errors_of(bomb))
    assert problem.table == "case.xlsx"
    assert "60 MB unpacked" in problem.got
    assert problem.remedy.startswith("It was not opened.")
    # Reading the directory of the zip takes milliseconds and no memory worth naming.
    assert time.perf_counter() - start < 2.0
    assert resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before < 20 * MEGABYTE


ENTITIES = b'<!DOCTYPE lolz [<!ENTITY a "ha">' + b"".join(
    b'<!ENTITY %c "%s">' % (98 + i, b"&%c;" % (97 + i) * 10) for i in range(12)
)


@pytest.mark.parametrize("part", ["xl/worksheets/sheet1.xml", "xl/workbook.xml", "xl/styles.xml"])
@pytest.mark.parametrize(
    "trick",
    [ENTITIES + b"]>", b'<!DOCTYPE x [<!ENTITY m SYSTEM "file:///etc/passwd">]>'],
    ids=["entities in entities", "external entity"],
)
def test_xml_entities_are_refused(tmp_path, part, trick):
    path = write_workbook(tmp_path / "good.xlsx", small_case())
    with zipfile.ZipFile(path) as archive:
        xml = archive.read(part)
    head = xml.index(b"?>") + 2 if xml.startswith(b"<?xml") else 0
    used = b"&m;" if b"passwd" in trick else b"&l;"
    body = xml[head:].replace(b">quantity<", b">" + used + b"<")
    target = tmp_path / "case.xlsx"
    replace_part(path, target, part, xml[:head] + trick + body)
    start = time.perf_counter()
    problem = errors_of(target)[0]
    assert problem.table == "case.xlsx"
    assert problem.got == "a workbook with a document type definition, which is refused"
    assert problem.allowed == "an .xlsx workbook"
    assert time.perf_counter() - start < 5.0  # expanding the entities would never end


def test_formula_without_stored_value(tmp_path):
    problem = the_only(
        errors_of(edit_workbook(tmp_path, lambda book: put(book["motors"], "D2", "=0.6+0.02")))
    )
    assert (problem.table, problem.row) == ("motors", 2)
    assert problem.column == "resistance terminal-to-terminal [Ω]"
    assert problem.got == "the formula in D2 without a stored value"
    assert "let it calculate" in problem.remedy


def put(sheet, address, value):
    sheet[address] = value


@pytest.mark.parametrize("error", ["#DIV/0!", "#N/A", "#VALUE!", "#REF!", "#NAME?", "#NUM!", "#NULL!"])
def test_spreadsheet_errors(tmp_path, error):
    def change(book):
        cell = book["motors"]["H2"]
        cell.value, cell.data_type = error, "e"

    problem = the_only(errors_of(edit_workbook(tmp_path, change)))
    assert (problem.table, problem.row, problem.column) == ("motors", 2, "rotor inertia [g·cm²]")
    assert problem.got == f"the spreadsheet error {error} in H2"
    assert problem.remedy == "Mend the formula or type the number."


def test_date_in_a_number_cell(tmp_path):
    import datetime

    def change(book):
        put(book["gearheads"], "C2", datetime.date(2025, 3, 8))
        put(book["axis"], "B8", datetime.datetime(2025, 5, 18, 0, 0))

    first, second = errors_of(edit_workbook(tmp_path, change))
    assert (first.table, first.row, first.column) == ("axis", 8, "moving mass")
    assert first.got == "a date or time in B8"
    assert (second.table, second.row, second.got) == ("gearheads", 2, "a date or time in C2")
    assert "Format the cell as a number" in second.remedy


def test_truth_value_in_a_number_cell_but_not_in_a_yes_no_cell(tmp_path):
    def change(book):
        put(book["duty_cycle"], "G3", True)
        put(book["motors"], "H2", True)

    problem = the_only(errors_of(edit_workbook(tmp_path, change)))
    assert (problem.table, problem.row, problem.got) == ("motors", 2, "a truth value in H2")


def test_merged_cells_name_their_range(tmp_path):
    problem = the_only(errors_of(edit_workbook(tmp_path, lambda book: book["motors"].merge_cells("D2:D3"))))
    assert (problem.table, problem.row) == ("motors", 3)
    assert problem.column == "resistance terminal-to-terminal [Ω]"
    assert problem.got == "part of the merged cells D2:D3"
    assert problem.remedy == "Unmerge the cells and fill in each row."


def test_merged_headings(tmp_path):
    problems = errors_of(edit_workbook(tmp_path, lambda book: book["motors"].merge_cells("D1:E1")))
    problem = next(problem for problem in problems if problem.row == 1)
    assert (problem.table, problem.got) == ("motors", "the merged cells D1:E1 in the heading row")
    assert (problem.allowed, problem.remedy) == ("one heading in each cell", "Unmerge the cells.")


def test_odd_cells_in_unknown_columns_and_other_sheets_do_not_matter(tmp_path):
    def change(book):
        put(book["motors"], "R1", "shelf")
        put(book["motors"], "R2", "=1/0")
        book.create_sheet("scratch")["A1"] = "=nonsense("
        book["motors"].merge_cells("T5:V9")

    case, problems = check_case(edit_workbook(tmp_path, change))
    assert case is not None
    assert [problem.column for problem in problems] == ["shelf"]


# -- large catalogs -----------------------------------------------------------------------------------------


def test_catalog_of_200_000_rows(tmp_path):
    folder = write_folder(tmp_path / "case", small_case())
    headings, first, second = small_case()["motors"]
    with (folder / "motors.csv").open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream)
        writer.writerow(headings)
        for number in range(100_000):
            writer.writerow([f"M-{number}", *first[1:]])
            writer.writerow([f"B-{number}", *second[1:]])
    before, start = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss, time.process_time()
    case = read_case(folder)
    seconds = time.process_time() - start
    grown = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before
    assert len(case.motors) == len(case.motor_parameters) == 200_000
    assert case.motors.as_entered["motor"][199_998] == "M-99999"
    assert case.motor_parameters.torque_constant_nm_per_a[-2:] == pytest.approx([0.092, 0.0603])
    assert case.problems == ()
    # Measured 2.5 s and 190 MB on two busy cores; the bounds leave room for a slow machine and catch a
    # reader that keeps every cell as an object (about 400 MB here) or handles cells one by one (20 s).
    assert seconds < 15.0
    assert grown < 350 * MEGABYTE


def test_many_bad_rows_are_capped_quickly(tmp_path):
    folder = write_folder(tmp_path / "case", small_case())
    headings, first, _ = small_case()["motors"]
    with (folder / "motors.csv").open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream)
        writer.writerow(headings)
        for number in range(20_000):
            writer.writerow([f"M-{number}", *["wrong"] * (len(first) - 1)])
    start = time.perf_counter()
    with pytest.raises(InputError) as caught:
        read_case(folder)
    assert len(caught.value.problems) < 25 * len(headings)
    assert any(problem.got == "19980 more rows with a problem" for problem in caught.value.problems)
    assert time.perf_counter() - start < 20.0
