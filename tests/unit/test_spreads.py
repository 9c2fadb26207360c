"""The table `tolerances`: what is read, and everything that can be wrong with it."""

from __future__ import annotations

import pytest

from actuator_sizing.case.reading import check_case, read_case
from tests.unit.case_files import small_case, write_folder

HEAD = ["quantity", "distribution", "width", "unit", "table", "truncation", "correlation"]


def read(tmp_path, *rows, head=HEAD):
    tables = small_case()
    tables["tolerances"] = [head, *([*row, *[""] * (len(head) - len(row))] for row in rows)]
    return check_case(write_folder(tmp_path / "case", tables))


def complaints(tmp_path, *rows):
    case, problems = read(tmp_path, *rows)
    assert case is None
    return [(p.row, p.column, p.got, p.remedy) for p in problems if p.severity == "error"]


def test_what_is_understood(tmp_path):
    case, problems = read(
        tmp_path,
        ["moving mass", "uniform", 500, "g"],
        ["resistance terminal-to-terminal", "truncated normal", 5, "%", "", 2, "torque constant -0.5"],
        ["torque constant", "normal", 3, "%"],
        ["efficiency", "triangular", 4, "%", "gearheads"],
        ["ambient temperature", "uniform", 5, "K"],
        ["payload", "normal", 0.2, "kg"],
    )
    assert [p for p in problems if p.table == "tolerances"] == []
    mass, resistance, constant, efficiency, ambient, payload = case.tolerances
    assert (mass.table, mass.width, mass.relative) == ("axis", 0.5, False)
    assert (resistance.table, resistance.truncation) == ("motors", 2.0)
    # Each pair once, with the first of the two rows.
    assert resistance.correlations == ((("motors", "torque constant"), -0.5),)
    assert constant.correlations == ()
    assert efficiency.table == "gearheads"
    assert (ambient.width, ambient.relative) == (5.0, False)
    assert (payload.table, payload.width) == ("duty_cycle", pytest.approx(0.2))


def test_a_spread_changes_the_fingerprint(tmp_path):
    first = read(tmp_path / "a", ["torque constant", "normal", 3, "%"])[0]
    second = read(tmp_path / "b", ["torque constant", "truncated normal", 3, "%"])[0]
    third = read(tmp_path / "c", ["torque constant", "truncated normal", 3, "%", "", 2])[0]
    assert len({first.fingerprint, second.fingerprint, third.fingerprint}) == 3


def test_a_name_that_stands_in_several_tables_asks_which(tmp_path):
    ((row, column, _, remedy),) = complaints(tmp_path, ["efficiency", "uniform", 2, "%"])
    assert (row, column) == (2, "table")
    assert remedy == "'efficiency' stands in each: say which one spreads."


def test_wider_than_the_value(tmp_path):
    found = complaints(
        tmp_path,
        ["moving mass", "uniform", 20, "kg"],  # of 18.5 kg
        ["torque constant", "triangular", 100, "%"],
        ["rotor inertia", "normal", 25, "%"],  # five standard deviations reach below zero
        ["thermal resistance housing-ambient", "truncated normal", 40, "%"],  # ends at 3 deviations: 120 %
        ["efficiency", "uniform", 20, "%", "axis"],  # of 90 %, at most 100 %
    )
    assert [row for row, *_ in found] == [2, 3, 4, 5, 6]
    assert {column for _, column, *_ in found} == {"width"}
    assert "truncated normal" in found[2][3]
    assert "truncation" in found[3][3]


@pytest.mark.parametrize(
    "row",
    [
        ["torque constant", "triangular", 99, "%"],
        ["rotor inertia", "normal", 19.9, "%"],
        ["thermal resistance housing-ambient", "truncated normal", 33, "%"],
        ["moving mass", "uniform", 18.4, "kg"],
    ],
)
def test_just_narrow_enough(tmp_path, row):
    case, _ = read(tmp_path, row)
    assert len(case.tolerances) == 1


def test_every_problem_at_once(tmp_path):
    found = complaints(
        tmp_path,
        ["torque constnt", "normal", 3, "%"],
        ["torque constant", "normal", 3, "%"],
        ["Torque_Constant", "normal", 4, "%"],
        ["sets to detail", "normal", 3, "%"],
        ["ambient temperature", "normal", 3, "%"],
        ["rotor inertia", "normal", 3, "%", "", "", "torque 0.5"],
        ["viscous friction", "uniform", 3, "%", "motors", "", "rotor inertia 1.5"],
    )
    assert [row for row, *_ in found] == [2, 4, 5, 6, 7, 8]
    assert found[0][3] == "Did you mean 'torque constant'?"
    assert "used before in row 3" in found[1][2]
    assert "cannot carry a spread" in found[2][3]
    assert "depends on where it is counted from" in found[3][3]


def test_correlations_that_cannot_be(tmp_path):
    """A with B and B with C, but A not with C: eigenvalue 1 − 0.9·√2 < 0."""
    (problem,) = complaints(
        tmp_path,
        ["torque constant", "normal", 3, "%", "", "", "resistance terminal-to-terminal 0.9"],
        ["resistance terminal-to-terminal", "normal", 3, "%", "", "",
         "inductance terminal-to-terminal 0.9"],
        ["inductance terminal-to-terminal", "normal", 3, "%"],
    )  # fmt: skip
    assert problem[1] == "correlation"
    assert "-0.273" in problem[2]


def test_a_whole_family_may_move_as_one(tmp_path):
    case, _ = read(
        tmp_path,
        ["torque constant", "normal", 3, "%", "", "",
         "resistance terminal-to-terminal 1; inductance terminal-to-terminal 1"],
        ["resistance terminal-to-terminal", "normal", 6, "%", "", "", "inductance terminal-to-terminal 1"],
        ["inductance terminal-to-terminal", "normal", 6, "%"],
    )  # fmt: skip
    assert [len(spread.correlations) for spread in case.tolerances] == [2, 1, 0]


def test_one_pair_stated_twice(tmp_path):
    rows = (
        ["torque constant", "normal", 3, "%", "", "", "rotor inertia 0.3"],
        ["rotor inertia", "normal", 3, "%", "", "", "torque constant 0.4"],
    )
    (problem,) = complaints(tmp_path, *rows)
    assert problem[:2] == (3, "correlation")
    rows[1][-1] = "torque constant 0.3"
    assert len(read(tmp_path / "same", *rows)[0].tolerances) == 2


def test_a_quantity_of_another_mechanism_is_left_out_with_a_warning(tmp_path):
    case, problems = read(tmp_path, ["pulley diameter", "uniform", 1, "%"])
    assert case.tolerances == ()
    assert [p.severity for p in problems if p.table == "tolerances"] == ["warning"]


def test_a_case_as_it_is_started_carries_a_spread(tmp_path):
    from actuator_sizing.case.starting import start_case

    start_case(tmp_path / "new")
    assert [spread.quantity for spread in read_case(tmp_path / "new").tolerances] == [
        "resistance terminal-to-terminal"
    ]
