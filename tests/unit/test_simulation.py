"""Simulating one set of a case: answers, checks in the comparison, bad input, the command."""

import dataclasses
import json
import math
import warnings
from pathlib import Path

import numpy as np
import pytest

from actuator_sizing import cli
from actuator_sizing.case.reading import read_case
from actuator_sizing.core.tuning import LinearCascade
from actuator_sizing.errors import InputError
from actuator_sizing.simulation_console import print_simulation
from actuator_sizing.sizing import compare
from actuator_sizing.sizing.open_loop import ripple
from actuator_sizing.sizing.simulation import simulate
from actuator_sizing.sizing.simulation_request import find_set
from tests.made_cases import GEARHEAD, MOTOR, case, cycle

DEMO = Path(__file__).parents[2] / "catalogs_demo"

SCREW = {"lead": 0.05, "moving mass": 20.0, "guide friction force": 30.0, "efficiency": 0.9}
MOVE = cycle(
    {"law": "3-4-5 polynomial", "displacement": 0.1, "duration_s": 0.3, "payload": 5.0},
    {"law": "dwell", "duration_s": 0.2, "payload": 5.0},
    {"law": "trapezoid", "displacement": -0.1, "duration_s": 0.4},
    {"law": "dwell", "duration_s": 0.1},
)
NAMES = {"motor": "M0", "gearhead": "G1", "drive": "D0"}


def made(options=None, **changes):
    one = case("ball screw", SCREW | changes.pop("values", {}), MOVE, **changes)
    return dataclasses.replace(one, options={**one.options, **(options or {})})


@pytest.fixture(scope="module")
def moved():
    return simulate(made({"settling band": 1e-4, "allowed following error": 1e-3}), **NAMES)


def test_the_cycle_follows_its_command(moved):
    q = moved.quantities
    assert 0.0 < q["following_error_peak"] < 1e-3
    assert q["following_error_rms"] <= q["following_error_peak"]
    # Angle: 0.1 m at 50 mm and a ratio of 5 are 10 turns.
    assert moved.series["commanded_angle_rad"].max() == pytest.approx(20 * math.pi, rel=1e-9)
    assert moved.series["motor_angle_rad"].max() == pytest.approx(20 * math.pi, rel=1e-3)
    assert q["current_saturated_s"] == 0.0
    assert q["voltage_saturated_s"] == 0.0


def test_current_agrees_with_the_exact_cycle(moved):
    """RMS of the loop against the planned one; 1 %: the loop adds what it needs to settle."""
    best = compare(made()).sets
    exact = next(s for s in best if s.gearhead == "G1").quantities["current_rms_a"]
    assert moved.quantities["current_rms_a"] == pytest.approx(exact, rel=0.01)


def test_every_stop_is_judged(moved):
    assert moved.moves["available_s"].tolist() == pytest.approx([0.2, 0.1])
    assert (moved.moves["settling_time_s"] < moved.moves["available_s"]).all()
    worst = (moved.moves["settling_time_s"] / moved.moves["available_s"]).idxmax()
    assert moved.quantities["settling_time_s"] == moved.moves.loc[worst, "settling_time_s"]


def test_without_feedforward_the_error_is_speed_over_gain():
    """A P position loop lags by v/K_v at constant speed; 2 %: the speed loop is not quite settled."""
    steady = cycle(
        {"law": "trapezoid", "displacement": 0.2, "duration_s": 2.0},
        {"law": "dwell", "duration_s": 0.5},
    )
    one = dataclasses.replace(made(), segments=steady)
    found = simulate(one, **NAMES, settings={"speed_feedforward_ratio": 0.0})
    speed = 0.2 / (2.0 * (1.0 - 1.0 / 3.0))
    gain = found.settings.position_gain_per_s
    assert found.quantities["following_error_peak"] == pytest.approx(speed / gain, rel=0.02)


def test_tight_limits_saturate_and_say_so():
    found = simulate(made({"settling band": 1e-4}), **NAMES, settings={"current_limit_a": 1.0})
    assert found.quantities["current_saturated_s"] > 0.01
    assert found.quantities["current_peak_a"] < 1.1
    assert found.quantities["following_error_peak"] > 1e-3


def test_loops_named_in_the_answer_are_those_of_the_plant(moved):
    linear = LinearCascade(moved.plant, moved.settings)
    q = moved.quantities
    assert q["speed_phase_margin_rad"] == pytest.approx(linear.margins("speed").phase_margin_rad)
    assert q["resonance_hz"] > q["antiresonance_hz"] > 0.0
    assert moved.limited_by in ("current loop", "antiresonance of motor and load", "stability reserve")
    # Gearhead's stiffness at its output, seen through the ratio.
    assert moved.plant.stiffness_nm_per_rad == pytest.approx(GEARHEAD["stiffness_nm_per_rad"] / 25.0)


def test_springs_of_gearhead_and_shaft_lie_in_series():
    softer = simulate(made({"driven shaft stiffness": 1e4}), **NAMES, input="stop")
    assert softer.plant.stiffness_nm_per_rad == pytest.approx(1e4 / 2.0 / 25.0)


def test_winding_temperature_is_the_callers():
    cold, hot = (simulate(made(), **NAMES, input="stop", winding_degc=t).plant for t in (25.0, 155.0))
    assert cold.resistance_ohm == pytest.approx(MOTOR["resistance_ohm"])
    assert hot.resistance_ohm == pytest.approx(MOTOR["resistance_ohm"] * (1.0 + 130.0 / 260.0))


def test_voltage_step_ends_where_friction_lets_it():
    one = made(values={"guide friction force": 0.0, "efficiency": 1.0})
    found = simulate(one, **NAMES, input="step")
    p, q = found.plant, found.quantities
    R, K = p.resistance_ohm, p.torque_constant_nm_per_a
    friction = p.motor_coulomb_nm + p.load_coulomb_nm
    viscous = p.motor_viscous_nm_s + p.load_viscous_nm_s
    final = (q["step_voltage_v"] - R * friction / K) / (K + R * viscous / K)
    assert q["step_final_speed_rad_s"] == pytest.approx(final, rel=0.01)  # shown for six time constants
    assert q["load_step_speed_change_rad_s"] == pytest.approx(
        -q["load_step_nm"] * R / K**2 / (1 + R * viscous / K**2), rel=0.02
    )


def test_ripple_of_the_sinusoid_is_the_frequency_response():
    """Amplitude of the last periods of the run against the answer; 2 %: held voltage, friction."""
    one = made(values={"guide friction force": 0.0}, motors=[{**MOTOR, "friction_torque_nm": 0.0}],
               gearheads=[{**GEARHEAD, "no_load_torque_nm": 0.0, "backlash_rad": 0.0}])  # fmt: skip
    found = simulate(one, motor="M0", gearhead="G0", drive="D0", input="sine")
    last = found.series[found.series["time_s"] > 0.75 * found.series["time_s"].max()]
    swing = 0.5 * (last["motor_speed_rad_s"].max() - last["motor_speed_rad_s"].min())
    assert found.quantities["ripple_speed_rad_s"] == pytest.approx(swing, rel=0.02)
    p = found.plant.rigid()
    s = 1j * 2.0
    R, L, K, J = p.resistance_ohm, p.inductance_h, p.torque_constant_nm_per_a, p.total_inertia_kg_m2
    b = p.motor_viscous_nm_s + p.load_viscous_nm_s
    assert ripple(p, 2.0)[1] == pytest.approx(K / ((R + L * s) * (b + J * s) + K * K), rel=1e-9)


def test_a_stop_at_the_current_limit_takes_momentum_over_torque():
    one = made(values={"guide friction force": 0.0, "efficiency": 1.0})
    found = simulate(one, **NAMES, input="stop", settings={"current_limit_a": 2.0})
    p, q = found.plant, found.quantities
    torque = 2.0 * p.torque_constant_nm_per_a + p.motor_coulomb_nm + p.load_coulomb_nm
    expected = abs(q["stop_from_speed_rad_s"]) * p.total_inertia_kg_m2 / torque
    # Payload of the segment and the run out of the loop: a fifth.
    assert q["controlled_stop_s"] == pytest.approx(expected, rel=0.2)
    assert q["controlled_stop_distance"] * q["stop_from_speed_rad_s"] > 0.0
    assert q["shorted_stop_s"] > 0.0


@pytest.mark.parametrize("reaction_s", [0.0, 0.05])
def test_a_shorted_stop_counts_the_reactance_as_the_comparison_does(reaction_s):
    """A heavy rotor: the transient, which the steady torque of the comparison leaves out, is 3e-3 of the way."""
    heavy = made({"stop reaction time": reaction_s}, motors=[{**MOTOR, "rotor_inertia_kg_m2": 2e-2}])
    found = simulate(heavy, motor="M0", gearhead="G0", drive="D0", input="stop")
    assert found.plant.is_rigid
    assert found.plant.reactance_ohm_s > 0.0
    q, compared = found.quantities, compare(heavy).sets
    stop = next(s for s in compared if s.gearhead is None).quantities
    assert q["shorted_stop_distance"] == pytest.approx(stop["stop_shorted_distance_m"], rel=4e-3)
    assert q["shorted_stop_peak_current_a"] == pytest.approx(stop["stop_shorted_current_a"], rel=0.02)


def test_a_shorted_stop_that_never_ends_and_a_stop_along_minus_x_are_said_in_words(capsys):
    """A hanging load goes on sinking, whatever the shorted winding does."""
    down = cycle({"law": "3-4-5 polynomial", "displacement": -0.1, "duration_s": 0.3},
                 {"law": "dwell", "duration_s": 0.2})  # fmt: skip
    values = SCREW | {"inclination": math.pi / 2.0, "guide friction force": 1.0}
    found = simulate(case("ball screw", values, down), motor="M0", gearhead="G0", drive="D0", input="stop")
    assert math.isnan(found.quantities["shorted_stop_s"])
    assert found.quantities["controlled_stop_distance"] < 0.0
    print_simulation(found, ())
    shown = capsys.readouterr().out
    assert "shorted stop: does not come to rest" in shown
    assert "m against +x" in shown
    assert "distance: -" not in shown


def test_a_stop_counts_its_reaction_time():
    """Without torque, friction and gravity the axis goes on at its speed: later and longer by exactly that."""
    one = made(values={"guide friction force": 0.0, "efficiency": 1.0},
               motors=[{**MOTOR, "friction_torque_nm": 0.0, "viscous_friction_nm_s": 0.0}],
               gearheads=[{**GEARHEAD, "no_load_torque_nm": 0.0, "backlash_rad": 0.0}])  # fmt: skip
    names = {"motor": "M0", "gearhead": "G0", "drive": "D0", "input": "stop"}
    at_once = simulate(one, **names)
    late = simulate(dataclasses.replace(one, options={**one.options, "stop reaction time": 0.05}), **names)
    assert late.quantities["stop_reaction_s"] == pytest.approx(0.05)
    ratio = 2.0 * math.pi / 0.05 * float(one.gearhead_parameters.ratio[find_set(one, "M0", "G0", "D0")[1]])
    way = 0.05 * late.quantities["stop_from_speed_rad_s"] / ratio
    for kind in ("controlled", "shorted"):
        # The winding starts without the current that held the speed: a thousandth of the stop.
        gone = [s.quantities[f"{kind}_stop_distance"] for s in (late, at_once)]
        assert gone[0] - gone[1] == pytest.approx(way, rel=0.02)
        took = [s.quantities[f"{kind}_stop_s"] for s in (late, at_once)]
        assert took[0] - took[1] == pytest.approx(0.05, rel=0.05)
    assert any("reaction" in note for note in at_once.notes)


@pytest.mark.parametrize("stiffness", [1e4, 1e6, 1e8])
def test_a_stop_through_a_stiff_loose_gearhead_ends(stiffness):
    """Millions of periods of the contact: whole blocks of steps, and at most a couple of thousand contacts."""
    stiff = {**GEARHEAD, "stiffness_nm_per_rad": stiffness, "backlash_rad": 2e-3}
    found = simulate(made({"damping ratio": 0.001}, gearheads=[stiff]), motor="M0", gearhead="G0", drive="D0",
                     input="stop")  # fmt: skip
    assert len(found.series) < 40_000
    # So stiff that the drive cannot see the contact, it may keep rattling; a number is what it must be.
    assert math.isfinite(found.quantities["controlled_stop_final_speed_rad_s"])
    assert found.quantities["controlled_stop_s"] > 0.0 or stiffness == 1e8


def samples(folder, text):
    path = folder / "samples.csv"
    path.write_text(text, encoding="utf-8")
    return path


def test_samples_from_a_file(tmp_path):
    rows = "\n".join(f"{k},{10 if k < 50 else 0},0.1" for k in range(100))
    path = samples(tmp_path, f"time [ms],voltage [V],load torque [Nm]\n{rows}\n")
    found = simulate(made(), **NAMES, input=path)
    assert found.series["time_s"].max() == pytest.approx(0.099)
    assert found.quantities["speed_peak_rad_s"] > 1.0


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("time [s],voltage [V]\n0,1\n1,nan\n2,1\n", "row 3"),
        ("time [s],voltage [V]\n0,1\n1,\n2,1\n", "row 3"),
        ("time [s],voltage [V]\n0,1\n1,inf\n2,1\n", "row 3"),
        ("time [s],voltage [V]\n0,1\n2,1\n1,1\n", "row 4"),
        ("time [s],voltage [V]\n0,1\n", "samples"),
        ("time [s],current [A]\n0,1\n1,2\n", "voltage"),
        ("time,voltage [V]\n0,1\n1,2\n", "unit"),
        ("time [V],voltage [V]\n0,1\n1,2\n", "time"),
    ],
)
def test_bad_files_say_where(tmp_path, text, words):
    with pytest.raises(InputError, match=words):
        simulate(made(), **NAMES, input=samples(tmp_path, text))


def test_a_missing_file_is_an_input_error(tmp_path):
    with pytest.raises(InputError, match=r"nowhere\.csv"):
        simulate(made(), **NAMES, input=tmp_path / "nowhere.csv")


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"settings": {"speed_gain_a_s_per_rad": 1e4}}, "unstable"),
        ({"settings": {"position_gain_per_s": math.nan}}, "position_gain_per_s"),
        ({"settings": {"speed_gian": 1.0}}, "speed_gian"),
        ({"rate_hz": 0.0}, "rate_hz"),
        ({"rate_hz": 5.0}, "stable|samples"),
        ({"rate_hz": math.inf}, "rate_hz"),
        ({"cycles": 10**6}, "samples"),
        ({"cycles": 0}, "cycles"),
        ({"settling_band": -1.0}, "settling_band"),
        ({"motor": "M00"}, "M0"),
        ({"drive": None}, "drive"),
    ],
)
def test_bad_requests_are_refused_in_words(change, words):
    with pytest.raises(InputError, match=words):
        simulate(made(), **(NAMES | change))


def test_a_long_run_keeps_a_bounded_series():
    found = simulate(made(), **NAMES, cycles=30)
    assert len(found.series) <= 20_001
    assert found.series["time_s"].max() == pytest.approx(30.0, rel=1e-3)


def test_direct_drive_is_rigid_and_says_so():
    found = simulate(made(), motor="M0", drive="D0", input="stop")
    assert found.plant.is_rigid
    assert any("one mass" in note for note in found.notes)
    assert find_set(made(), "M0", "direct", "D0") == (0, 0, 0)


def verdicts(options):
    result = compare(made(options, gearheads=[GEARHEAD])).sets[0]
    return {c.check: c for c in result.checks if c.check in DYNAMIC}, result


DYNAMIC = ("settling", "following_error", "stability_reserve", "resonance")


def test_checks_do_not_apply_until_the_case_asks():
    assert verdicts({})[0] == {}


def test_checks_of_settling_and_error_pass_and_fail():
    found, result = verdicts({"settling band": 1e-4, "allowed following error": 1e-3})
    assert set(found) == {"settling", "following_error", "stability_reserve"}
    assert all(c.verdict.startswith("passes") for c in found.values())
    tight, result = verdicts({"allowed following error": 1e-9})
    assert tight["following_error"].verdict == "fails"
    assert result.verdict == "fails"
    assert result.governing_check == "following_error"
    assert "settling" not in tight


def test_following_error_check_is_at_its_limit_exactly():
    error = verdicts({"allowed following error": 1e-3})[0]["following_error"].demand
    assert verdicts({"allowed following error": error})[0]["following_error"].utilisation == 1.0
    assert verdicts({"allowed following error": error * (1 - 1e-9)})[0]["following_error"].verdict == "fails"


def test_required_bandwidth_is_held_against_the_resonance():
    low = verdicts({"required speed bandwidth": 1.0})[0]["resonance"]
    high = verdicts({"required speed bandwidth": 1e4})[0]["resonance"]
    assert low.verdict == "passes"
    assert high.verdict == "fails"
    assert low.capacity == high.capacity


def test_without_stiffness_nothing_is_judged():
    unknown = {**GEARHEAD, "stiffness_nm_per_rad": np.nan}
    result = compare(
        made({"settling band": 1e-4, "required speed bandwidth": 1.0}, gearheads=[unknown])
    ).sets[0]
    for key in ("settling", "stability_reserve", "resonance"):
        check = result.check(key)
        assert check.verdict == "not checked"
        assert "torsional stiffness" in check.missing[0]


def test_figures_and_files(moved, tmp_path):
    written = moved.write(tmp_path / "out")
    names = {path.name for path in written}
    assert {"simulation.json", "series.csv", "bode.svg", "response.svg", "following_error.svg"} <= names
    answer = json.loads((tmp_path / "out" / "simulation.json").read_text("utf-8"))
    assert answer["settings"]["position_gain_per_s"] == moved.settings.position_gain_per_s
    assert answer["quantities"]["following_error_peak"] == moved.quantities["following_error_peak"]


def run(capsys, *arguments):
    with pytest.raises(SystemExit) as left:
        cli.main(["simulate", "catalogs_demo/potting_table", *arguments])
    return left.value.code, capsys.readouterr()


@pytest.fixture
def potting(monkeypatch):
    monkeypatch.chdir(cli.__file__.rsplit("/actuator_sizing/", 1)[0])
    best = compare(read_case("catalogs_demo/potting_table"), detail=1).best
    return [
        "--motor",
        best.motor,
        "--drive",
        best.drive,
        *(["--gearhead", best.gearhead] if best.gearhead else []),
    ]


def test_the_command(potting, capsys):
    status, shown = run(capsys, *potting, "--set", "is_delayed=no", "--json")
    answer = json.loads(shown.out)
    assert status == 0
    assert answer["settings"]["is_delayed"] is False
    assert answer["quantities"]["following_error_peak"] > 0.0
    status, shown = run(capsys, *potting, "--input", "stop")
    assert status == 0
    assert "controlled stop" in shown.out
    status, shown = run(capsys, *potting, "--set", "position_gain_per_s=1e9")
    assert status == 2
    assert "unstable" in shown.err


def test_default_loops_are_stable_with_every_payload():
    heavy = cycle(
        {"law": "cycloidal", "displacement": 0.1, "duration_s": 2.0, "payload": 900.0},
        {"law": "dwell", "duration_s": 0.2},
        {"law": "cycloidal", "displacement": -0.1, "duration_s": 2.0},
    )
    one = dataclasses.replace(made(gearheads=[GEARHEAD]), segments=heavy)
    found = simulate(one, motor="M0", gearhead="G0", drive="D0")
    assert found.quantities["following_error_peak"] < 0.01
    light = dataclasses.replace(
        found.plant, load_inertia_kg_m2=found.plant.load_inertia_kg_m2 * 20.0 / 920.0
    )  # moving mass alone; the shaft itself has no inertia here
    assert LinearCascade(light, found.settings).spectral_radius < 1.0


def test_the_step_of_the_encoder_is_held_against_the_band():
    found = simulate(made({"settling band": 1e-4, "encoder counts per turn": 4096.0}), **NAMES, cycles=1)
    step = 0.05 / 4096.0 / 5.0 if found.gearhead == "G1" else math.nan
    assert found.quantities["encoder_step_at_load"] == pytest.approx(step, rel=1e-9)
    assert found.quantities["encoder_step_over_band_ratio"] == pytest.approx(step / 1e-4, rel=1e-9)


def test_every_setting_has_its_unit(moved):
    from actuator_sizing.report.loop_settings import SETTING_UNITS

    assert list(SETTING_UNITS) == list(moved.gains)


def test_results_and_workbook_hold_the_dynamics_of_the_leading_set():
    from datetime import date
    from io import BytesIO

    import openpyxl

    from actuator_sizing.report.json_results import results_dict
    from actuator_sizing.report.workbook import render_workbook

    one = made({"settling band": 1e-4, "allowed following error": 1e-3}, gearheads=[GEARHEAD])
    comparison = compare(one)
    answer = results_dict(comparison)["dynamics"]
    checks = {check.check: check for check in comparison.best.checks}
    assert answer["quantities"]["following_error_peak"] == pytest.approx(checks["following_error"].demand)
    assert answer["quantities"]["speed_sensitivity_peak_ratio"] == pytest.approx(
        checks["stability_reserve"].demand
    )
    assert answer["settings"]["position_gain_per_s"] > 0.0
    assert answer["limited_by"] in ("current loop", "antiresonance of motor and load", "stability reserve")
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # openpyxl does not know data bars
        book = openpyxl.load_workbook(BytesIO(render_workbook(comparison, date(2026, 1, 5))))
    rows = list(book["dynamics"].iter_rows(values_only=True))
    assert (
        "setting",
        "position_gain_per_s",
        pytest.approx(answer["settings"]["position_gain_per_s"]),
        "1/s",
    ) in rows
    assert any(row[1] == "following error peak" and row[3] == "m" for row in rows)
    plain = compare(made(gearheads=[GEARHEAD]))
    assert results_dict(plain)["dynamics"] is None


def test_a_long_record_is_simulated_in_its_order():
    """The record keeps its order though the comparison condenses it; its planned current is that of the cycle."""
    case_ = read_case("catalogs_demo/tray_shuttle_measured")
    best = compare(case_, detail=1).best
    found = simulate(case_, motor=best.motor, gearhead=best.gearhead, drive=best.drive, rate_hz=2000.0)
    assert found.quantities["current_rms_a"] == pytest.approx(best.quantities["current_rms_a"], rel=0.03)


def test_a_cycle_too_long_for_a_comparison_is_not_checked():
    """It does not fail: nothing was found wrong with it, and the page says what to do."""
    long = cycle(
        {"law": "cycloidal", "displacement": 0.1, "duration_s": 2.0},
        {"law": "dwell", "duration_s": 400.0},
        {"law": "cycloidal", "displacement": -0.1, "duration_s": 2.0},
    )
    one = dataclasses.replace(made({"settling band": 1e-4}, gearheads=[GEARHEAD]), segments=long)
    comparison = compare(one)
    check = comparison.best.check("settling")
    assert check.verdict == "not checked"
    assert "four million samples" in check.missing[0]
    assert comparison.dynamics is None


def test_a_process_that_opposes_does_not_turn_the_axis_round_after_a_stop():
    """The air of a fan brakes it and is gone at rest."""
    found = simulate(read_case(DEMO / "fan"), input="stop")
    for way in ("controlled", "shorted"):
        left = found.quantities[f"{way}_stop_final_speed_rad_s"]
        # stopped is below 1 % of the speed at the command
        assert abs(left) <= 0.01 * found.quantities["stop_from_speed_rad_s"]
        assert math.isfinite(found.quantities[f"{way}_stop_s"])
