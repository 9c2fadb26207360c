"""What no check looks at is said in every report, and only where it matters."""

import pytest
from case_files import row_of, set_cell, small_case, write_folder

from actuator_sizing.case.reading import read_case
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.model_limits import UNUSED_QUANTITIES

UNITS = {"required life": ("h", 1, 90_000)}


def compared(tmp_path, tables):
    return compare(read_case(write_folder(tmp_path / "case", tables)))


def said(comparison):
    return dict(comparison.assumptions)


def with_quantity(name, value, unit):
    tables = small_case()
    tables["axis"].append([name, value, unit, "test"])
    return tables


@pytest.mark.parametrize("name", UNUSED_QUANTITIES)
def test_quantities_called_unused_change_no_result(tmp_path, name):
    unit, low, high = UNITS[name]
    results = []
    for value in (low, high):
        comparison = compared(tmp_path, with_quantity(name, value, unit))
        assert said(comparison)["model: stated, not used"] == f"no check reads {name}"
        results.append([(one.label, one.quantities, [c.utilisation for c in one.checks])
                        for one in comparison.sets])  # fmt: skip
    assert results[0] == results[1]


def test_nothing_is_called_unused_where_nothing_idle_is_stated(tmp_path):
    assert "model: stated, not used" not in said(compared(tmp_path, small_case()))


def test_a_closed_brake_is_not_taken_for_a_checked_one(tmp_path):
    told = said(compared(tmp_path, small_case()))["model: holding brake"]
    assert told.startswith("a brake is taken to hold the load; its torque is not checked; ")
    assert told.endswith(" states none")
    tables = small_case()
    set_cell(tables, "duty_cycle", "wait", "brake closed", "no")
    assert "model: holding brake" not in said(compared(tmp_path, tables))


def test_a_drive_in_hotter_air_or_at_height_is_told(tmp_path):
    assert "not reduced" not in said(compared(tmp_path, small_case()))["model: drive rating"]
    tables = small_case()
    row_of(tables, "axis", "ambient temperature")[1] = 45
    tables["axis"].append(["altitude", 1500, "m", ""])
    told = said(compared(tmp_path, tables))["model: drive rating"]
    assert "peak current is not reduced for the altitude of 1500 m" in told
    assert "peak current is not reduced for 45 °C, above the rated 40 °C" in told


def test_an_assumption_names_the_quantity_it_is_about(tmp_path):
    subjects = [subject for subject, _ in compared(tmp_path, small_case()).assumptions]
    assert "axis: modulation limit" in subjects
    assert "axis: value" not in subjects


def test_statements_name_the_mechanism(tmp_path):
    comparison = compared(tmp_path, small_case())
    assert (
        said(comparison)["model: mechanism"]
        == "not checked: critical speed of the screw; buckling of the screw; life of the screw"
    )
