"""The workbook reader against openpyxl and against what other writers store."""

from __future__ import annotations

import datetime
import zipfile

import pytest
from case_files import small_case, write_workbook

from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.reading import read_case
from actuator_sizing.case.text_columns import OddCell
from actuator_sizing.case.workbook_xml import WorkbookError, column_letters, open_parts, sheet_rows
from actuator_sizing.case.workbooks import read_workbook


def read_axis(path):
    problems = ProblemList()
    table = read_workbook(path, ["axis"], problems)["axis"]
    assert problems.finished() == ()
    return table


@pytest.mark.parametrize("column", [0, 1, 25, 26, 51, 52, 701, 702, 16383])
def test_column_letters_agree_with_openpyxl(column):
    from openpyxl.utils import get_column_letter

    assert column_letters(column) == get_column_letter(column + 1)


def test_values_agree_with_openpyxl(tmp_path):
    import openpyxl

    path = write_workbook(tmp_path / "case.xlsx", small_case())
    for name, expected in small_case().items():
        sheet = openpyxl.load_workbook(path)[name]
        with zipfile.ZipFile(path) as archive:
            rows = dict(sheet_rows(archive, open_parts(archive).sheets[name]))
        assert sorted(rows) == list(range(1, len(expected) + 1))
        stored = {(row, cell.column) for row, cells in rows.items() for cell in cells}
        assert stored == {
            (cell.row, cell.column - 1)
            for line in sheet.iter_rows()
            for cell in line
            if cell.value is not None
        }


@pytest.mark.parametrize("value", [0.1, 1 / 3, 1e-300, 123456789012345.0, -2.5e-7, 3])
def test_numbers_are_read_exactly(tmp_path, value):
    # openpyxl writes 16 digits, which is exact for these values; no tolerance.
    path = write_workbook(tmp_path / "case.xlsx", {"axis": [["quantity", "value"], ["x", value]]})
    assert float(read_axis(path).columns[1][0]) == value


def test_shared_and_inline_texts_with_runs_and_phonetics(tmp_path):
    path = tmp_path / "case.xlsx"
    with zipfile.ZipFile(path, "w") as archive:
        archive.writestr(
            "xl/workbook.xml",
            '<x:workbook xmlns:x="m" xmlns:r="n"><x:sheets><x:sheet name="Axis" r:id="a"/></x:sheets></x:workbook>',
        )
        archive.writestr(
            "xl/_rels/workbook.xml.rels",
            '<Relationships><Relationship Id="a" Type="t/worksheet" Target="/xl/one.xml"/>'
            '<Relationship Id="b" Type="t/sharedStrings" Target="texts.xml"/></Relationships>',
        )
        archive.writestr(
            "xl/texts.xml",
            "<sst><si><t>quantity</t></si><si><r><t>mov</t></r><r><t>ing mass</t></r><rPh><t>x</t></rPh></si></sst>",
        )
        archive.writestr(
            "xl/one.xml",
            '<x:worksheet xmlns:x="m"><x:sheetData><x:row><x:c t="s"><x:v>0</x:v></x:c><x:c t="inlineStr"><x:is>'
            '<x:t>value</x:t></x:is></x:c></x:row><x:row r="5"><x:c r="A5" t="s"><x:v>1</x:v></x:c>'
            "<x:c><x:v>18.5</x:v></x:c></x:row></x:sheetData></x:worksheet>",
        )
    table = read_axis(path)
    assert table.headings == ("quantity", "value")
    assert list(table.records()) == [(5, ["moving mass", "18.5"])]


@pytest.mark.parametrize(
    ("part", "content"),
    [
        ("xl/one.xml", "<worksheet><sheetData><row><c t='s'><v>9</v></c></row></sheetData></worksheet>"),
        ("xl/one.xml", "<worksheet><sheetData><row><c r='5'><v>9</v></c></row></sheetData></worksheet>"),
        ("xl/one.xml", "<worksheet><sheetData><row r='x'/></sheetData></worksheet>"),
        ("xl/one.xml", "<worksheet><sheetData><row><c t='q'><v>9</v></c></row></sheetData></worksheet>"),
        ("xl/one.xml", "<worksheet><sheetData><row><c><v>nine</v></c></row></sheetData></worksheet>"),
        ("xl/workbook.xml", "<workbook/>"),
    ],
)
def test_nonsense_inside_a_workbook_is_one_problem(tmp_path, part, content):
    parts = {
        "xl/workbook.xml": '<workbook><sheets><sheet name="axis" id="a"/></sheets></workbook>',
        "xl/_rels/workbook.xml.rels": '<a><Relationship Id="a" Type="t/worksheet" Target="one.xml"/></a>',
        "xl/one.xml": "<worksheet/>",
        part: content,
    }
    path = tmp_path / "case.xlsx"
    with zipfile.ZipFile(path, "w") as archive:
        for name, text in parts.items():
            archive.writestr(name, text)
    problems = ProblemList()
    assert read_workbook(path, ["axis"], problems) == {}
    (problem,) = problems.finished()
    assert problem.table == "case.xlsx"
    assert problem.allowed == "an .xlsx workbook"


def test_zip_without_workbook(tmp_path):
    path = tmp_path / "case.xlsx"
    with zipfile.ZipFile(path, "w") as archive:
        archive.writestr("readme.txt", "hello")
    with zipfile.ZipFile(path) as archive, pytest.raises(WorkbookError, match="holds no workbook"):
        open_parts(archive)


@pytest.mark.parametrize("from_1904", [False, True])
def test_dates_show_the_day_they_mean(tmp_path, from_1904):
    import openpyxl
    from openpyxl.utils.datetime import CALENDAR_MAC_1904

    book = openpyxl.Workbook()
    if from_1904:
        book.epoch = CALENDAR_MAC_1904
    sheet = book.active
    sheet.title = "axis"
    for row in (["quantity", "value"], ["x", datetime.date(2025, 3, 8)], ["y", datetime.time(6, 30)]):
        sheet.append(row)
    book.save(tmp_path / "case.xlsx")
    column = read_axis(tmp_path / "case.xlsx").columns[1]
    assert list(column) == ["2025-03-08", "06:30:00"]
    assert isinstance(column.odd[0], OddCell)
    assert column.odd[0].fault == "a date or time in B2"


def test_decimal_mark_is_proven_by_typed_text_only(tmp_path):
    rows = [["quantity", "value"], ["a", 1.5], ["b", "2,5"], ["c", "1,234"]]
    assert read_axis(write_workbook(tmp_path / "case.xlsx", {"axis": rows})).decimal == ","
    rows = [["quantity", "value"], ["a", 1.5], ["c", "1,234"]]
    assert read_axis(write_workbook(tmp_path / "other.xlsx", {"axis": rows})).decimal == ""


def test_sheet_names_in_other_spellings(tmp_path):
    tables = small_case()
    tables["Duty Cycle"] = tables.pop("duty_cycle")
    tables["MOTORS"] = tables.pop("motors")
    assert len(read_case(write_workbook(tmp_path / "case.xlsx", tables)).motors) == 2
