"""Several axes of one machine: totals, shared types against trying everything, the common bus against its parts."""

import io
import itertools
import json
import warnings
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from click.testing import CliRunner

from actuator_sizing.case.reading import read_case
from actuator_sizing.cli import NONE_PASSES, commands
from actuator_sizing.errors import InputError
from actuator_sizing.report.machine import render_machine, write_machine
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.machine import compare_machine
from actuator_sizing.sizing.machine_motors import motor_types
from actuator_sizing.sizing.results import LOW_RESERVE, PASSES
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, case, cycle


def axis(mass, stroke, seconds, name="axis", motors=None, **changes):
    """A screw axis that moves a mass to and fro; motors of four sizes."""
    if motors is None:
        motors = []
        for n, size in enumerate((0.4, 0.7, 1.0, 1.6)):
            motors.append(
                dict(MOTOR, torque_constant_nm_per_a=0.5 * size, rotor_inertia_kg_m2=1.2e-4 * size**2,
                     continuous_current_a=5.0, price=[500.0, 210.0, 260.0, 420.0][n])
            )  # fmt: skip
    segments = cycle(
        {"law": "trapezoid", "displacement": stroke, "duration_s": seconds},
        {"law": "trapezoid", "displacement": -stroke, "duration_s": seconds},
        {"law": "dwell", "duration_s": seconds},
    )
    values = {"lead": 0.02, "moving mass": mass, "efficiency": 0.9}
    drives = [dict(DRIVE), dict(DRIVE, continuous_current_a=20.0, peak_current_a=60.0, price=700.0)]
    made = case("ball screw", values, segments, motors=motors, gearheads=[DIRECT, GEARHEAD], drives=drives)
    return replace(made, name=name, **changes)


@pytest.fixture(scope="module")
def three():
    cases = [axis(8.0, 0.2, 0.5, "feed"), axis(120.0, 0.3, 0.4, "lift"), axis(30.0, 0.3, 0.5, "press")]
    return compare_machine(cases, name="line")


def test_totals_are_sums_of_the_leading_sets(three):
    bests = [one.comparison.best for one in three.axes]
    assert three.passes
    assert three.price == pytest.approx(sum(best.price for best in bests), rel=1e-12)
    assert three.mass_kg == pytest.approx(sum(best.mass_kg for best in bests), rel=1e-12)
    watts = sum(
        best.quantities["energy_bus_motoring_j"] / one.cycle_s
        for best, one in zip(bests, three.axes, strict=True)
    )
    assert three.energy_per_hour_j == pytest.approx(3600.0 * watts, rel=1e-12)
    for part in three.shared_parts:
        field = part.table.removesuffix("s")
        users = [one.name for one in three.axes if getattr(one.best, field) == part.name]
        assert list(part.axes) == users
        assert len(users) > 1


def cheapest_with(comparison, motors):
    """Lowest price of a passing set whose motor is one of some, straight from the list of candidates."""
    frame = comparison.candidates
    frame = frame[frame["verdict"].isin([PASSES, LOW_RESERVE]) & frame["motor"].isin(motors)]
    return float(frame["price"].min()) if len(frame) else np.inf


def test_motor_types_agree_with_trying_every_combination(three):
    names = three.axes[0].comparison.case.motors.names
    comparisons = [one.comparison for one in three.axes]
    by_count = {}
    for count in (1, 2, 3):
        prices = [
            sum(cheapest_with(comparison, group) for comparison in comparisons)
            for group in itertools.combinations(names, count)
        ]
        by_count[count] = min(prices)
    choices = three.motor_types.choices
    assert len(choices) > 1  # else sharing costs nothing here and the test proves little
    for choice in choices:
        assert choice.price == by_count[choice.types]
        assert choice.price == sum(one.price for one in choice.sets)
        for one, comparison in zip(choice.sets, comparisons, strict=True):
            assert one.price == cheapest_with(comparison, [one.motor])
    assert choices[-1].price == by_count[3]
    for common in three.motor_types.common:
        alone = [cheapest_with(comparison, [common.motor]) for comparison in comparisons]
        assert len(common.sets) == np.isfinite(alone).sum() > 1
        rest = [cheapest_with(comparison, names) for comparison in comparisons]
        assert common.price == sum(np.where(np.isfinite(alone), alone, rest))


def test_one_name_with_two_sets_of_data_is_not_one_type():
    one = axis(8.0, 0.2, 0.5, "feed", motors=[dict(MOTOR)])
    other = axis(8.0, 0.2, 0.5, "push", motors=[dict(MOTOR, rotor_inertia_kg_m2=1.3e-4)])
    found = motor_types(["feed", "push"], [compare(one), compare(other)])
    assert found.same_name == one.motors.names
    assert found.common == ()
    assert [choice.types for choice in found.choices] == [2]


def test_an_axis_that_no_set_passes_on_leaves_no_sum():
    heavy = axis(9000.0, 0.3, 0.2, "heavy")
    machine = compare_machine([axis(8.0, 0.2, 0.5, "feed"), heavy])
    assert not machine.passes
    assert machine.motor_types.unpriced == ("heavy",)
    assert machine.motor_types.choices == ()
    text = render_machine(machine, pdf=False)["machine_report.html"].decode()
    assert "No set passes on heavy" in text


# -- the common bus ----------------------------------------------------------------------------------


def test_the_peak_of_one_axis_is_that_of_its_own_report(three):
    bus = compare_machine([axis(60.0, 0.3, 0.5)]).buses[0]
    best = compare(axis(60.0, 0.3, 0.5)).best
    # 1e-3: taken at the nodes of the pieces, while the report of the axis refines between them.
    assert bus.power_peak_most_w == pytest.approx(best.quantities["supply_power_peak_w"], rel=1e-3)
    assert bus.power_peak_together_w == bus.power_peak_most_w


def test_the_heat_of_the_cable_comes_from_the_bus():
    made = axis(60.0, 0.3, 0.5)
    made = replace(made, surroundings=replace(made.surroundings, cable_ohm=2.0))
    bus, best = compare_machine([made]).buses[0], compare(made).best
    # 1e-3: taken at the nodes of the pieces.
    assert bus.power_peak_most_w == pytest.approx(best.quantities["supply_power_peak_w"], rel=1e-3)


def test_equal_axes_that_start_together_double_every_figure():
    one, two = axis(60.0, 0.3, 0.5), axis(60.0, 0.3, 0.5)
    alone, both = compare_machine([one]).buses[0], compare_machine([one, two]).buses[0]
    assert both.axes == ("axis", "axis (2)")
    for name in ("power_mean_most_w", "power_mean_least_w", "power_peak_most_w", "power_peak_together_w",
                 "power_returned_most_w", "power_returned_together_w"):  # fmt: skip
        assert getattr(both, name) == pytest.approx(2.0 * getattr(alone, name), rel=1e-12)


def test_whatever_the_timing_the_peak_lies_between_mean_and_sum(three):
    bus = three.buses[0]
    assert bus.power_mean_least_w <= bus.power_mean_most_w <= bus.power_peak_most_w
    assert bus.power_peak_together_w is None  # 1.5 s and 1.2 s do not go into one another
    together = compare_machine([axis(60.0, 0.3, 0.5), axis(8.0, 0.2, 0.25)]).buses[0]
    assert together.power_mean_least_w < together.power_peak_together_w < together.power_peak_most_w


def test_the_sum_over_time_is_that_of_the_axes_and_keeps_the_energy():
    machine = compare_machine([axis(60.0, 0.3, 0.5), axis(8.0, 0.2, 0.25, "fast")])
    bus = machine.buses[0]
    frame = bus.together
    np.testing.assert_allclose(frame["power_w"], frame["axis"] + frame["fast"], rtol=1e-12, atol=1e-9)
    net = np.trapezoid(frame["power_w"], frame["time_s"]) / frame["time_s"].iloc[-1]
    # 2e-3: straight lines between the nodes of pieces on which the power is curved.
    assert net == pytest.approx(bus.power_mean_least_w, rel=2e-3)
    assert frame["time_s"].iloc[-1] == pytest.approx(1.5, rel=1e-12)


def test_several_cycles_of_an_axis_count_with_their_shares():
    made = read_case("catalogs_demo/tray_conveyor")
    machine = compare_machine([made])
    best, one = machine.axes[0].best, machine.axes[0]
    assert len(best.cycles) > 1
    assert one.cycle_s is None
    bus = machine.buses[0]
    peaks = [each.quantities["supply_power_peak_w"] for each in best.cycles]
    # 1e-3: taken at the nodes of the pieces.
    assert bus.power_peak_most_w == pytest.approx(max(peaks), rel=1e-3)
    means = [
        each.quantities["energy_bus_motoring_j"] / cycle.demand.cycle_s
        for each, cycle in zip(best.cycles, one.comparison.cycles, strict=True)
    ]
    steady = best.quantities["bus_steady_power_w"]
    assert steady > 0.0
    assert min(means) <= one.power.taken_w - steady <= max(means)
    assert bus.power_peak_together_w is None
    assert f"{len(best.cycles)} cycles" in render_machine(machine, pdf=False)["machine_report.html"].decode()


def test_axes_of_different_voltage_have_buses_of_their_own_and_an_unknown_efficiency_is_said():
    other = axis(8.0, 0.2, 0.5, "low")
    other = replace(other, surroundings=replace(other.surroundings, bus_nominal_v=300.0))
    silent = axis(8.0, 0.2, 0.5, "silent")
    drives = replace(silent.drive_parameters, efficiency=np.full(2, np.nan))
    machine = compare_machine([axis(8.0, 0.2, 0.5), other, replace(silent, drive_parameters=drives)])
    assert [(bus.bus_nominal_v, bus.axes, bus.unknown) for bus in machine.buses] == [
        (300.0, ("low",), ()),
        (325.0, ("axis", "silent"), ("silent",)),
    ]
    assert machine.buses[1].power_peak_most_w is None
    assert machine.energy_per_hour_j is None
    text = render_machine(machine, pdf=False)["machine_report.html"].decode()
    assert "efficiency of the drive not known on silent" in text


# -- report and command line -------------------------------------------------------------------------

HOSTILE = '<script>alert(1)</script>=1+1\x07"'


def read_sheets(path):
    return pd.read_excel(io.BytesIO(path.read_bytes()), sheet_name=None)


def test_the_report_holds_every_figure_and_escapes_hostile_names(tmp_path):
    cases = [axis(8.0, 0.2, 0.5, HOSTILE), axis(60.0, 0.3, 0.5, "=2+2")]
    machine = compare_machine(cases, name=HOSTILE)
    written = write_machine(machine, tmp_path, pdf=False)
    assert sorted(path.name for path in written) == [
        "machine.json",
        "machine_report.html",
        "machine_tables.xlsx",
    ]
    page = (tmp_path / "machine_report.html").read_text()
    assert "<script>" not in page
    assert f"{machine.price:.2f}" in page
    assert "all cycles started together" in page
    answer = json.loads((tmp_path / "machine.json").read_text())
    assert answer["schema"] == "actuator-sizing/machine/1"
    assert answer["price"] == machine.price
    assert [one["axis"] for one in answer["axes"]] == [HOSTILE, "=2+2"]
    assert answer["buses"][0]["power_peak_together_w"] == machine.buses[0].power_peak_together_w
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", UserWarning)  # the reader does not know data bars
        sheets = read_sheets(tmp_path / "machine_tables.xlsx")
    assert list(sheets["axes"]["price"]) == [one.best.price for one in machine.axes]
    assert sheets["summary"].set_index("quantity")["value"]["Price"] == machine.price
    assert sheets["axes"]["axis"][1] == "=2+2"  # text, no formula
    again = compare_machine(cases, name=HOSTILE)
    assert render_machine(again, pdf=False) == render_machine(machine, pdf=False)


def test_the_pdf_is_written_where_its_package_is(three):
    pytest.importorskip("typst")
    assert render_machine(three, pdf=True)["machine_report.pdf"].startswith(b"%PDF")


def test_the_command_compares_the_axes_of_a_machine(tmp_path):
    arguments = ["machine", "catalogs_demo/fan", "catalogs_demo/fan", "--out", str(tmp_path), "--no-pdf"]
    run = CliRunner().invoke(commands, arguments, standalone_mode=False)
    assert run.exception is None
    assert run.return_value in (0, NONE_PASSES)
    assert "fan (2)" in run.output
    assert "leads on fan, fan (2)." in run.output
    assert (tmp_path / "machine.json").exists()


def test_the_problems_of_every_case_are_told_at_once(tmp_path):
    for name in ("one", "two"):
        (tmp_path / name).mkdir()
        (tmp_path / name / "axis.csv").write_text("quantity,value,unit\nmechanism,no such,\n")
    run = CliRunner().invoke(commands, ["machine", str(tmp_path / "one"), str(tmp_path / "two")])
    assert isinstance(run.exception, InputError)
    tables = {problem.table for problem in run.exception.problems}
    assert any("one: " in table for table in tables)
    assert any("two: " in table for table in tables)


def test_a_machine_without_axes_is_told():
    with pytest.raises(InputError, match="one case for each axis"):
        compare_machine([])
