"""Whatever stands in the files, reading gives a case or problems; nothing else ever comes out."""

from __future__ import annotations

import random

import numpy as np
import pytest
from case_files import small_case, write_folder, write_workbook
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from actuator_sizing.case.reading import check_case

NASTY = st.sampled_from(
    ["", "-", "0", "-0", "1e308", "-1e308", "5e-324", "1e999", "nan", "inf", "1,234", "1.234.567,8", "=1+1", "#N/A",
     "yes", "rms", "peak", "DC", "dwell", "constant speed", "speed ramp", "sinusoidal", "91/6", "1/0", "95%", "💡",
     "\x1f", "\n", "'", '"', ";", "[", "]", "a [b] [c]", "x [Nm", "[Nm]", "𝟏𝟐", "١٢"]
)  # fmt: skip
CELLS = st.one_of(NASTY, st.text(max_size=12), st.floats().map(repr), st.integers().map(str))


def check(path):
    case, problems = check_case(path)
    errors = [problem for problem in problems if problem.severity == "error"]
    assert (case is None) == bool(errors)
    for problem in problems:
        assert problem.table
        assert problem.got or problem.allowed
        assert len(str(problem)) < 3000
    if case is not None:
        assert len(case.fingerprint) == 64
        assert np.isfinite(case.cycle_duration_s)
        for part in (case.motors, case.gearheads, case.drives):
            for index in range(len(part)):
                case.catalog_entries(part.table, index)
    return case


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_any_text_in_any_cell(tmp_path, data):
    tables = small_case()
    for _ in range(data.draw(st.integers(1, 4))):
        table = tables[data.draw(st.sampled_from(sorted(tables)))]
        row = table[data.draw(st.integers(0, len(table) - 1))]
        row[data.draw(st.integers(0, len(row) - 1))] = data.draw(CELLS)
    check(write_folder(tmp_path / "case", tables, delimiter=data.draw(st.sampled_from(",;\t"))))


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(content=st.one_of(st.binary(max_size=300), st.text(max_size=200).map(lambda text: text.encode())))
def test_any_bytes_in_any_file(tmp_path, content):
    folder = write_folder(tmp_path / "case", small_case())
    (folder / "motors.csv").write_bytes(content)
    check(folder)
    (folder / "axis.csv").write_bytes(content)
    check(folder)


@pytest.mark.parametrize("seed", range(60))
def test_damaged_workbooks(tmp_path, seed):
    """Single bytes changed anywhere in the zip; checksums and the XML parser must catch what matters."""
    path = write_workbook(tmp_path / "case.xlsx", small_case())
    content = bytearray(path.read_bytes())
    chance = random.Random(seed)
    for _ in range(chance.randint(1, 5)):
        content[chance.randrange(len(content))] = chance.randrange(256)
    path.write_bytes(content)
    check(path)


@settings(max_examples=80, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_damaged_xml_in_a_sound_zip(tmp_path, data):
    import zipfile

    path = write_workbook(tmp_path / "good.xlsx", small_case())
    part = data.draw(st.sampled_from(["xl/workbook.xml", "xl/worksheets/sheet3.xml", "xl/styles.xml"]))
    target = tmp_path / "case.xlsx"
    with zipfile.ZipFile(path) as old, zipfile.ZipFile(target, "w") as new:
        for info in old.infolist():
            content = old.read(info)
            if info.filename == part:
                place = data.draw(st.integers(0, len(content) - 1))
                length = data.draw(st.integers(0, 12))
                content = content[:place] + data.draw(st.binary(max_size=6)) + content[place + length :]
            new.writestr(info.filename, content)
    check(target)
