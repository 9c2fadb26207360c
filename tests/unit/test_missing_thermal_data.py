"""A sheet without thermal data is sized all the same; what cannot be judged is called not checked."""

from case_files import set_cell, small_case, write_folder

from actuator_sizing.case.reading import read_case
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.results import FAILS, NOT_CHECKED


def test_motors_without_thermal_resistances(tmp_path):
    tables = small_case()
    set_cell(tables, "duty_cycle", "up", "payload", 1)
    tables["axis"] += [["counterweight mass", 18, "kg", ""]]
    comparison = compare(read_case(write_folder(tmp_path / "case", tables)))
    best = comparison.best
    assert best.verdict in (NOT_CHECKED, FAILS)
    check = best.check("winding_temperature")
    assert (check.verdict, check.utilisation) == (NOT_CHECKED, None)
    assert check.missing
    assert best.quantities["winding_max_degc"] is None
    assert best.quantities["winding_after_30_min_degc"] is None
    asked = [
        what for part, what, title in comparison.questions if part == best.motor and title == check.title
    ]
    assert set(asked) == set(check.missing)
