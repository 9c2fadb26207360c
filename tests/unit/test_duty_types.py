"""Duty types of IEC 60034-1 made into cycles: times, segments, refusals, and the load that they permit."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from actuator_sizing.case.cycle_columns import DUTY_TYPES
from actuator_sizing.case.model import REPEATS, SHORT_TIME, Cycle
from actuator_sizing.case.reading import check_case, read_case
from actuator_sizing.case.starting import start_case
from actuator_sizing.core.duty_types import loaded_time, relative_life
from actuator_sizing.core.permissible_load import (
    LoadedMachine,
    intermittent_current,
    rest_time,
    short_time_current,
)
from actuator_sizing.errors import ERROR, NOTE, InputError
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.cycles import cycle_demands, evaluate_cycles
from actuator_sizing.sizing.results import NOT_CHECKED
from actuator_sizing.sizing.set_model import SetModel
from tests.bare_axis import BARE_MOTOR
from tests.made_cases import DIRECT, case, segment
from tests.unit.case_files import small_case, write_folder

HEAD = ["cycle", "duty type", "speed [m/min]", "process force [N]", "operating time [s]", "rest time [s]",
        "cyclic duration factor [%]", "starting time [s]", "braking time [s]", "share of time [%]"]  # fmt: skip


def tables(*rows: list[object], keep_duty_cycle: bool = False):
    made = small_case()
    if not keep_duty_cycle:
        del made["duty_cycle"]
    made["duty_types"] = [HEAD, *rows]
    return made


def read(tmp_path, *rows: list[object], **more):
    return read_case(write_folder(tmp_path, tables(*rows, **more)))


def shape(cycle) -> list[tuple[str, float]]:
    return [(s.name, round(s.duration_s, 9)) for s in cycle.segments]


def test_every_type_has_the_parts_of_its_definition(tmp_path):
    made = read(
        tmp_path,
        ["a", "S1", 6, 50, "", "", "", "", "", ""],
        ["b", "S2", 6, 50, 600, "", "", 1, 2, ""],
        ["c", "S3", 6, 50, 600, "", 25, "", "", ""],
        ["d", "S4", 6, 50, 18, 40, "", 2, "", ""],
        ["e", "S5", 6, 50, "", 60, 40, 1, 3, ""],
        ["f", "S6", 6, 50, "", "", 40, "", "", ""],
        ["g", "S8", 6, 50, 20, "", "", 1, "", ""],
        ["g", "S8", 3, 80, 10, "", "", 2, "", ""],
        ["h", "S10", 6, 20, "", "", "", "", "", 60],
        ["h", "S10", 0, 90, "", "", "", "", "", 10],
    )
    by_name = {c.name: c for c in made.cycles}
    assert [name for name, _ in shape(by_name["a"])] == ["load"]
    assert shape(by_name["b"]) == [("start", 1.0), ("load", 600.0), ("electric braking", 2.0)]
    assert shape(by_name["c"]) == [("load", 600.0), ("rest", 1800.0)]
    assert shape(by_name["d"]) == [("start", 2.0), ("load", 18.0), ("rest", 40.0)]
    assert shape(by_name["e"]) == [("start", 1.0), ("load", 36.0), ("electric braking", 3.0), ("rest", 60.0)]
    assert shape(by_name["f"]) == [("load", 240.0), ("no load", 360.0)]  # 10 min where nothing else is said
    assert shape(by_name["g"]) == [("change to load 1", 1.0), ("load 1", 20.0), ("change to load 2", 2.0),
                                   ("load 2", 10.0)]  # fmt: skip
    assert [name for name in by_name if name.startswith("h")] == ["h, load 1", "h, load 2"]
    assert [by_name[name].share for name in ("h, load 1", "h, load 2")] == [0.6, pytest.approx(0.1)]
    assert {c.name: c.runs for c in made.cycles if c.runs != REPEATS} == {"b": SHORT_TIME}
    assert [c.duty_type for c in made.cycles] == ["S1", "S2", "S3", "S4", "S5", "S6", "S8", "S10", "S10"]
    no_load = by_name["f"].segments[1]
    assert (no_load.process_effort, no_load.phases[0].end()[1]) == (0.0, pytest.approx(0.1))
    assert by_name["g"].segments[0].phases[0].kinematics(0.0)[1] == pytest.approx(0.05)  # from the last load


def test_what_is_carried_is_carried_at_rest_too(tmp_path):
    made = tables(
        ["c", "S3", 6, 50, 600, "", 25, "", "", "", 12], ["e", "S6", 6, 50, "", "", 40, "", "", "", 12]
    )
    made["duty_types"][0] = [*HEAD, "payload [kg]"]
    found = read_case(write_folder(tmp_path, made))
    load, rest = found.cycles[0].segments
    assert (load.payload, rest.payload, rest.process_effort) == (12.0, 12.0, 0.0)
    assert found.cycles[1].segments[1].payload == 0.0  # no load is what S6 says
    assert [p.row for p in found.problems if p.column == "payload" and p.severity == NOTE] == [2]


def test_a_duty_type_stands_beside_the_duty_cycle(tmp_path):
    made = tables(["hot", "S1", 6, 50, "", "", "", "", "", ""], keep_duty_cycle=True)
    _, problems = check_case(write_folder(tmp_path / "a", made))
    assert [(p.table, p.column) for p in problems if p.severity == ERROR] == [("duty_cycle", "cycle")]
    made["duty_cycle"] = [
        [*made["duty_cycle"][0], "cycle"],
        *([*row, "normal"] for row in made["duty_cycle"][1:]),
    ]
    assert [c.name for c in read_case(write_folder(tmp_path / "b", made)).cycles] == ["normal", "hot"]


@pytest.mark.parametrize(
    ("row", "column", "got"),
    [
        (["a", "S3", 6, 50, 600, 1800, 25, "", "", ""], "cyclic duration factor", "operating time, rest time"),
        (["a", "S3", 6, 50, "", "", "", "", "", ""], "cyclic duration factor", "too few"),
        (["a", "S3", 6, 50, 600, "", 25, 1, "", ""], "starting time", "1 s in S3"),
        (["a", "S5", 6, 50, 600, "", 25, 1, "", ""], "braking time", "nothing in S5"),
        (["a", "S5", 6, 50, "", 1, 25, 1, 2, ""], "cyclic duration factor", "25 %"),
        (["a", "S2", 6, 50, "", "", "", "", "", ""], "operating time", "nothing in S2"),
        (["a", "S1", 0, 50, "", "", "", "", "", ""], "speed", "0"),
        (["a", "S3", 6, 50, "", "", 100, "", "", ""], "cyclic duration factor", "100 %"),
        (["a", "S7", 6, 50, "", "", "", "", "", ""], "duty type", "'S7'"),
        (["a", "S1", 6, 50, "", "", "", "", "", 50], "share of time", "50 % in S1"),
    ],
)  # fmt: skip
def test_times_that_contradict_the_type_are_told(tmp_path, row, column, got):
    understood, problems = check_case(write_folder(tmp_path, tables(row)))
    assert understood is None
    (found,) = [p for p in problems if p.severity == ERROR]
    assert (found.table, found.row, found.column.partition(" [")[0]) == ("duty_types", 2, column)
    assert got in found.got
    assert found.remedy


def test_what_a_type_leaves_out_is_said(tmp_path):
    made = read(tmp_path, ["a", "S3", 6, 50, "", "", 40, "", "", ""])
    assert any(p.table == "duty_types" and p.severity == NOTE for p in made.problems)


@given(st.floats(0.1, 1e5), st.floats(0.01, 0.99))
def test_loaded_time_undoes_rest_time(on_s, factor):
    # a few roundings of a quotient near 1
    assert loaded_time(rest_time(on_s, factor), factor) == pytest.approx(on_s, rel=1e-12)


# -- the load that a type permits ------------------------------------------------------------------------

_K = BARE_MOTOR["torque_constant_nm_per_a"]


def _case_of(current_a: float, on_s: float, off_s: float, runs: str):
    """A bare motor that is loaded with a current at constant speed, then at rest; pieces without starts."""
    load = segment(2, "constant speed", start_speed=10.0, duration_s=on_s, process_effort=_K * current_a)
    rows = [load]
    if off_s > 0.0:
        rows.append(segment(3, "dwell", start_s=on_s, duration_s=off_s))
    made = case("rotary load", {"load inertia": 1e-9}, tuple(rows), motors=[BARE_MOTOR], gearheads=[DIRECT])
    return replace(made, cycles=(Cycle("duty", made.segments, runs),))


def _hottest(made) -> float:
    (sets,) = evaluate_cycles(cycle_demands(made), np.array([[0, 0, 0]]))
    return float(sets.pairs.winding_max_degc[0])


def _machine() -> LoadedMachine:
    made = _case_of(1.0, 1.0, 0.0, REPEATS)
    (each,) = cycle_demands(made)
    network = SetModel(each.case, each.demand, 0, 0, 0).network
    m = BARE_MOTOR
    return LoadedMachine(
        network, m["resistance_ohm"], m["resistance_coefficient_per_k"], m["resistance_reference_degc"],
        0.0, made.surroundings.ambient_degc, m["winding_limit_degc"],
    )  # fmt: skip


def test_the_permissible_short_time_current_just_reaches_the_limit():
    current = short_time_current(_machine(), 600.0)
    # halving to twelve digits of the current, which counts twice in the rise of about 100 K
    assert _hottest(_case_of(current, 600.0, 0.0, SHORT_TIME)) == pytest.approx(155.0, abs=1e-6)
    assert _hottest(_case_of(current, 600.0, 0.0, REPEATS)) > 155.0


def test_the_permissible_intermittent_current_just_reaches_the_limit():
    current = intermittent_current(_machine(), 240.0, 360.0)
    assert _hottest(_case_of(current, 240.0, 360.0, REPEATS)) == pytest.approx(155.0, abs=1e-6)


def test_relative_life_of_discrete_loads():
    """Half the time at the limit, half 10 K above: damage 0.5 + 0.5 · 2; from the definition."""
    assert relative_life([0.5, 0.5], [0.0, 10.0]) == pytest.approx(1.0 / 1.5)
    assert relative_life([1.0], [-10.0]) == pytest.approx(2.0)


@given(st.lists(st.tuples(st.floats(0.01, 1.0), st.floats(-60.0, 30.0)), min_size=1, max_size=5))
def test_relative_life_lies_between_its_loads(loads):
    weights = np.array([w for w, _ in loads])
    lives = [2.0 ** (-t / 10.0) for _, t in loads]
    life = relative_life(weights / weights.sum(), [t for _, t in loads])
    assert min(lives) * (1.0 - 1e-9) <= life <= max(lives) * (1.0 + 1e-9)


def test_a_short_time_duty_is_sized_by_its_temperature(tmp_path):
    made = read(tmp_path, ["s2", "S2", 6, 50, 600, "", "", 1, 2, ""])
    best = compare(made).best
    keys = [check.check for check in best.checks]
    assert "winding_temperature" in keys
    assert "rms_current" not in keys
    # The small case states no thermal data: what takes the place of the RMS current is asked for, not passed.
    assert best.check("winding_temperature").verdict == NOT_CHECKED
    assert best.verdict == NOT_CHECKED


@pytest.mark.parametrize(
    ("mechanism", "duty_type"),
    [*(("rotary load", word) for word in DUTY_TYPES), ("conveyor", "S5"), ("linear motor", "S8"),
     ("crank-slider", "S1"), ("crank-slider", "S3"), ("crank-slider", "S10")],
)  # fmt: skip
def test_a_case_started_with_a_duty_type_sizes_to_a_result(tmp_path, mechanism, duty_type):
    start_case(tmp_path / "new", mechanism, duty_type=duty_type)
    made = read_case(tmp_path / "new")
    assert {c.duty_type for c in made.cycles} == {duty_type}
    assert compare(made).passes


def test_start_refuses_a_duty_type_that_it_does_not_know(tmp_path):
    with pytest.raises(InputError, match="S1, S2"):
        start_case(tmp_path / "new", duty_type="S9")
    with pytest.raises(InputError, match="mechanism"):
        start_case(tmp_path / "new", "toggle lever", duty_type="S1")


def test_many_turns_of_a_changing_ratio_are_refused(tmp_path):
    start_case(tmp_path / "new", "crank-slider", duty_type="S3")
    table = tmp_path / "new" / "duty_types.csv"
    table.write_text(table.read_text(encoding="utf-8-sig").replace(",8,", ",80,"), encoding="utf-8")
    _, problems = check_case(tmp_path / "new")
    (found,) = [p for p in problems if p.severity == ERROR]
    assert (found.table, found.column) == ("duty_types", "operating time")
    assert "turns of a crank-slider" in found.got
