"""Process loads over time and position, their kinks, and what the case says about them."""

import numpy as np
import pytest
from scipy.integrate import quad

from actuator_sizing.core.process_load import ProcessLoad
from actuator_sizing.sizing.demand import build_demand
from tests.made_cases import case, cycle
from tests.unit.case_files import small_case

AXIS = {"moving mass": 10.0, "lead": 0.02, "guide friction force": 5.0}


def demand_with(load, law="cycloidal", way=0.3, **row):
    from dataclasses import replace

    there, back = cycle(
        {"law": law, "displacement": way, "duration_s": 0.5},
        {"law": law, "displacement": -way, "duration_s": 0.8},
    )
    there = replace(there, process=load)
    return build_demand(case("ball screw", AXIS, (there, back))), there


def position_at(segment, t):
    return float(segment.phases[0].kinematics(t)[0])


LOADS = {
    "ramp over time": (ProcessLoad("time", (0.0, 0.5), (0.0, 80.0)), lambda t, x: 160.0 * t),
    "window": (ProcessLoad("position", (0.1, 0.2), (50.0, 50.0)), lambda t, x: 50.0 * (0.1 < x < 0.2)),
    "table with a snap": (
        ProcessLoad("position", (0.0, 0.15, 0.15, 0.3), (0.0, 90.0, -20.0, 0.0)),
        lambda t, x: 600.0 * x if x < 0.15 else -20.0 * (0.3 - x) / 0.15,
    ),
    "table over time": (
        ProcessLoad("time", (0.0, 0.2, 0.2, 0.5), (10.0, 10.0, 70.0, 0.0)),
        lambda t, x: 10.0 if t < 0.2 else 70.0 * (0.5 - t) / 0.3,
    ),
}


@pytest.mark.parametrize("name", LOADS)
def test_mean_square_and_energy_by_quadrature(name):
    load, by_hand = LOADS[name]
    demand, segment = demand_with(load)
    phase = segment.phases[0]

    def process(t):
        return by_hand(t, float(phase.kinematics(t)[0]))

    def effort(t, order):
        x, v, a, _ = (float(q) for q in phase.kinematics(t))
        total = 10.0 * a + 5.0 + by_hand(t, x)
        return total**2 if order == 2 else by_hand(t, x) * v

    kinks = np.unique(demand.start_s[demand.segment == 0])[1:]
    first = demand.segment == 0
    for order, values in ((2, demand.effort**2), (1, demand.torque_by_cause["process"] * demand.shaft_speed)):
        from actuator_sizing.core.quadrature import integrate

        ours = integrate(demand.duration_s[first], values[first])
        exact = sum(
            quad(effort, a, b, args=(order,), epsabs=1e-12, epsrel=1e-12)[0]
            for a, b in zip([0.0, *kinks], [*kinks, 0.5], strict=True)
        )
        assert float(ours) == pytest.approx(exact, rel=1e-9)  # the project's goal for energy over a cycle
    assert process(0.25) == pytest.approx(process(0.25))


def test_no_piece_straddles_a_jump():
    demand, segment = demand_with(ProcessLoad("position", (0.1, 0.2), (50.0, 50.0)))
    process = demand.torque_by_cause["process"][demand.segment == 0] * 2 * np.pi / 0.02
    assert set(np.round(np.ptp(process, axis=1), 9)) == {0.0}
    borders = [position_at(segment, t) for t in demand.start_s[demand.segment == 0]]
    for knot in (0.1, 0.2):
        assert min(abs(x - knot) for x in borders) < 1e-14  # bisection to rounding


def test_a_load_that_reverses_always_opposes():
    there, back = cycle(
        {"law": "cycloidal", "displacement": 0.3, "duration_s": 0.5},
        {"law": "cycloidal", "displacement": -0.3, "duration_s": 0.5},
    )
    from dataclasses import replace

    wind = ProcessLoad("time", (0.0, 0.5), (30.0, 30.0), reverses=True)
    demand = build_demand(
        case("ball screw", AXIS, (replace(there, process=wind), replace(back, process=wind)))
    )
    power = demand.torque_by_cause["process"] * demand.shaft_speed
    assert power.min() >= -1e-12  # rounding at the ends, where the speed is zero
    assert demand.mean(power) == pytest.approx(30.0 * 0.6 / 1.0, rel=1e-12)  # force × way / cycle


def test_at_rest_a_reversing_load_is_nothing():
    assert (
        not ProcessLoad("time", (0.0, 1.0), (30.0, 30.0), reverses=True)
        .values(np.linspace(0, 1, 3), 0.0)
        .any()
    )
    kept = ProcessLoad("time", (0.0, 1.0), (30.0, 30.0)).values(np.linspace(0, 1, 3), 0.0)
    assert kept.tolist() == [30.0] * 3


# -- the tables -------------------------------------------------------------------------------------


def understood(tmp_path, tables):
    from actuator_sizing.case.reading import check_case
    from tests.unit.case_files import write_folder

    return check_case(write_folder(tmp_path / "case", tables))


def duty(*rows, extra=()):
    heading = ["segment", "motion law", "displacement [mm]", "duration [s]", "process force [N]", *extra]
    return [heading, *[list(row) for row in rows]]


def test_linear_over_position(tmp_path):
    tables = small_case()
    tables["duty_cycle"] = duty(
        ["press", "cycloidal", 100, 1, 0, 200, "position"],
        ["back", "cycloidal", -100, 1, 0, "", ""],
        extra=["process force end [N]", "process over"],
    )
    read, problems = understood(tmp_path, tables)
    assert [p for p in problems if p.severity == "error"] == []
    assert read.segments[0].process == ProcessLoad("position", (0.0, pytest.approx(0.1)), (0.0, 200.0))
    assert read.segments[1].process is None


@pytest.mark.parametrize(
    ("rows", "text"),
    [
        ([["press", 10, 0], ["press", 5, 4]], "rising order"),
        ([["press", 0, 0], ["press", 50, 4]], "covers"),
        ([["pres", 0, 0], ["press", 0, 0], ["press", 100, 4]], "name of a segment"),
        ([["press", "", 0], ["press", 100, 4]], "either a time or a position"),
    ],
)
def test_bad_process_table(tmp_path, rows, text):
    tables = small_case()
    tables["duty_cycle"] = duty(["press", "cycloidal", 100, 1, 0], ["back", "cycloidal", -100, 1, 0])
    tables["process"] = [["segment", "position [mm]", "process force [N]"], *rows]
    read, problems = understood(tmp_path, tables)
    errors = [p for p in problems if p.severity == "error"]
    assert read is None
    assert len(errors) == 1
    assert errors[0].table == "process"
    assert errors[0].row is not None
    assert text in errors[0].allowed
    assert errors[0].remedy


def test_windows_that_make_no_sense(tmp_path):
    tables = small_case()
    tables["duty_cycle"] = duty(
        ["a", "cycloidal", 100, 1, 5, 20, ""],
        ["b", "cycloidal", 100, 1, 5, 30, 20],
        ["c", "cycloidal", -200, 1, 5, 300, 400],
        extra=["process from [mm]", "process to [mm]"],
    )
    _, problems = understood(tmp_path, tables)
    errors = [p for p in problems if p.severity == "error"]
    assert [(p.row, p.got) for p in errors] == [
        (2, "half a window"),
        (3, "a window without width"),
        (4, "a window that the segment never enters"),
    ]


# -- points, master angle, pace ----------------------------------------------------------------------


def test_spline_of_a_table(tmp_path):
    tables = small_case()
    tables["duty_cycle"] = duty(["swing", "spline", "", "", 0], ["back", "cycloidal", -100, 1, 0])
    tables["points"] = [["segment", "time [ms]", "position [mm]"], ["swing", 0, 20], ["swing", 300, 90],
                        ["Swing", 800, 120]]  # fmt: skip
    read, problems = understood(tmp_path, tables)
    assert [p for p in problems if p.severity == "error"] == []
    assert read.segments[0].duration_s == pytest.approx(0.8)
    assert read.segments[0].phases[-1].end()[0] == pytest.approx(0.1)
    assert {entry.table for entry in read.entries} >= {"points"}


def test_pace_stretches_and_master_angles_divide(tmp_path):
    tables = small_case()
    tables["axis"].append(["cycles per minute", 30])
    tables["duty_cycle"] = duty(["up", "cycloidal", 100, 1, 0], ["down", "cycloidal", -100, 3, 0])
    read, _ = understood(tmp_path, tables)
    assert [s.duration_s for s in read.segments] == pytest.approx([0.5, 1.5])
    assert read.segments[1].start_s == pytest.approx(0.5)
    tables["duty_cycle"] = [
        ["segment", "motion law", "displacement [mm]", "master angle [deg]"],
        ["up", "cycloidal", 100, 120], ["down", "cycloidal", -100, 150], ["rest", "dwell", "", 90],
    ]  # fmt: skip
    read, problems = understood(tmp_path / "angles", tables)
    assert [p for p in problems if p.severity == "error"] == []
    assert [s.duration_s for s in read.segments] == pytest.approx([2 / 3, 5 / 6, 0.5])
    tables["duty_cycle"][3][3] = 80
    _, problems = understood(tmp_path / "short", tables)
    assert [p.got for p in problems if p.severity == "error"] == ["350° in all"]


def test_pace_against_limits(tmp_path):
    tables = small_case()
    tables["axis"].append(["cycles per minute", 120])
    tables["duty_cycle"] = [
        ["segment", "motion law", "displacement [mm]", "maximum acceleration [m/s²]"],
        ["up", "trapezoid", 100, 1], ["down", "trapezoid", -100, 1],
    ]  # fmt: skip
    _, problems = understood(tmp_path, tables)
    errors = [p for p in problems if p.severity == "error"]
    assert [(p.table, p.column) for p in errors] == [("axis", "cycles per minute")]


def test_blending_rows_join(tmp_path):
    tables = small_case()
    tables["duty_cycle"] = [
        ["segment", "motion law", "displacement [mm]", "end speed [m/s]", "maximum acceleration [m/s²]",
         "maximum deceleration [m/s²]"],
        ["out", "trapezoid", 100, 0.2, 1, 0.5], ["through", "trapezoid", 60, "", 1, 0.5],
        ["back", "trapezoid", -160, "", 1, ""],
    ]  # fmt: skip
    read, problems = understood(tmp_path, tables)
    assert [p for p in problems if p.severity == "error"] == []
    assert read.segments[0].phases[-1].end()[1] == pytest.approx(0.2)
    assert float(read.segments[1].phases[0].kinematics(0.0)[1]) == pytest.approx(0.2)
