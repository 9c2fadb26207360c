"""Several named cycles in one case: read, judged by the worst, weighed where shares are stated."""

import json
import math
import warnings
from dataclasses import fields, replace
from datetime import date
from io import BytesIO

import numpy as np
import pytest
from openpyxl import load_workbook

from actuator_sizing.case.model import ONCE_COLD, ONCE_WARM, REPEATS, SHORT_TIME, Case, Cycle
from actuator_sizing.case.reading import check_case, read_case
from actuator_sizing.console import verdict_sentence
from actuator_sizing.core.thermal import HeatLoss, periodic_state, steady_state, temperatures_after
from actuator_sizing.core.thermal_run import single_run
from actuator_sizing.errors import ERROR, InputError
from actuator_sizing.report import render_report
from actuator_sizing.report.motion_picture import write_motion
from actuator_sizing.simulation_console import print_simulation
from actuator_sizing.sizing.case_changes import single
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.cycles import cycle_demands, evaluate_cycles
from actuator_sizing.sizing.judging import active_checks, judge_sets
from actuator_sizing.sizing.levers import LEVERS, smallest_change
from actuator_sizing.sizing.resizing import PASS, Resizing
from actuator_sizing.sizing.screening import screen
from actuator_sizing.sizing.set_model import SetModel
from actuator_sizing.sizing.simulation import simulate
from actuator_sizing.sizing.thermal_start import with_following
from tests.made_cases import DRIVE, GEARHEAD, MOTOR, case, cycle
from tests.unit.case_files import small_case, write_folder

AXIS = {"load inertia": 0.08, "friction torque": 0.8}
PART = np.array([[0, 1, 0]])


def turns(angle: float, move_s: float = 0.5, rest_s: float = 0.7):
    return cycle(
        {"law": "cycloidal", "displacement": angle, "duration_s": move_s},
        {"law": "dwell", "duration_s": rest_s},
    )


def several(*cycles: Cycle, **options) -> Case:
    made = case("rotary load", AXIS, cycles[0].segments, **options)
    return replace(made, cycles=tuple(cycles))


NORMAL, WORST = Cycle("normal", turns(6.0)), Cycle("worst", turns(9.0))


def judged(made: Case, index: np.ndarray = PART):
    checks, limits = active_checks(made.limits)
    sets = evaluate_cycles(cycle_demands(made), index)
    return sets, judge_sets(sets, checks, limits)


# -- reading -----------------------------------------------------------------------------------------


def with_cycles(rows: list[list[object]] | None = None):
    """The small case with its duty cycle twice, the second time with more payload."""
    tables = small_case()
    head, *segments = tables["duty_cycle"]
    heavy = [[*row[:4], 9, *row[5:]] for row in segments]
    tables["duty_cycle"] = [
        [*head, "cycle"],
        *([*row, "normal" if i == 0 else ""] for i, row in enumerate(segments)),
        *([*row, "worst" if i == 0 else ""] for i, row in enumerate(heavy)),
    ]
    if rows is not None:
        tables["cycles"] = [["cycle", "runs", "share of time [%]", "repetitions per hour"], *rows]
    return tables


def test_an_empty_cell_means_the_cycle_of_the_row_above(tmp_path):
    made = read_case(write_folder(tmp_path, with_cycles()))
    assert [c.name for c in made.cycles] == ["normal", "worst"]
    assert [len(c.segments) for c in made.cycles] == [4, 4]
    assert [c.segments[0].payload for c in made.cycles] == [5.0, 9.0]
    assert made.cycles[1].segments[0].start_s == 0.0  # each cycle begins by itself
    assert made.segments == made.cycles[0].segments


def test_a_case_that_names_no_cycle_has_none(tmp_path):
    assert read_case(write_folder(tmp_path, small_case())).cycles == ()


def test_the_table_cycles_says_how_each_runs(tmp_path):
    rows = [["worst", "once from warm", "", 6], ["normal", "", 80, ""]]
    made = read_case(write_folder(tmp_path, with_cycles(rows)))
    normal, worst = made.cycles
    assert (normal.runs, normal.share) == (REPEATS, pytest.approx(0.8))
    assert worst.runs == ONCE_WARM
    assert worst.share == pytest.approx(6 * worst.duration_s / 3600.0)


@pytest.mark.parametrize(
    ("rows", "column", "text"),
    [
        ([["wurst", "", "", ""]], "cycle", "'wurst'"),
        ([["normal", "", 80, ""]], "share of time", "no share for 'worst'"),
        ([["normal", "", 80, ""], ["worst", "", 30, ""]], "share of time", "add up to 110"),
        ([["normal", "", 80, 3], ["worst", "", 10, ""]], "share of time [%]", "a share and repetitions"),
        ([["normal", "sometimes", "", ""]], "runs", "sometimes"),
        ([["normal", "once from warm", "", ""], ["worst", "short-time", "", ""]], "runs", "no cycle repeats"),
    ],
)  # fmt: skip
def test_contradictions_of_cycles_are_told_with_the_column(tmp_path, rows, column, text):
    understood, problems = check_case(write_folder(tmp_path, with_cycles(rows)))
    assert understood is None
    found = [p for p in problems if p.severity == ERROR]
    assert [(p.table, p.column) for p in found] == [("cycles", column)]
    assert text in found[0].got
    assert found[0].remedy


def test_rows_before_the_first_name_need_one(tmp_path):
    tables = with_cycles()
    tables["duty_cycle"][1][-1] = ""
    _, problems = check_case(write_folder(tmp_path, tables))
    assert [(p.table, p.row, p.column) for p in problems if p.severity == ERROR] == [
        ("duty_cycle", 2, "cycle")
    ]


def test_each_cycle_may_have_its_own_pace(tmp_path):
    tables = with_cycles()
    tables["cycles"] = [["cycle", "cycles per minute"], ["worst", 20]]
    made = read_case(write_folder(tmp_path, tables))
    assert [c.duration_s for c in made.cycles] == [pytest.approx(2.0), pytest.approx(3.0)]


def test_names_change_the_fingerprint_and_notes_do_not(tmp_path):
    plain = read_case(write_folder(tmp_path / "a", with_cycles([["normal", "", "", ""]])))
    once = read_case(write_folder(tmp_path / "b", with_cycles([["normal", "once from cold", "", ""]])))
    assert plain.fingerprint != once.fingerprint


# -- judging -----------------------------------------------------------------------------------------


def test_each_check_counts_in_the_cycle_where_it_is_worst():
    both = several(NORMAL, Cycle("fast", turns(3.0, 0.2, 4.0)))
    checks, limits = active_checks(both.limits)
    sets, verdicts = judged(both)
    alone = [judge_sets(each, checks, limits) for each in sets]
    worst = np.fmax(*(each.utilisation for each in alone))
    np.testing.assert_array_equal(verdicts.utilisation, worst)
    for column, check in enumerate(checks):
        if not np.isnan(worst[0, column]):
            governing = alone[verdicts.cycle[0, column]]
            assert governing.utilisation[0, column] == worst[0, column], check.key
    assert len(set(verdicts.cycle[0])) == 2  # neither cycle is the worst in everything


def test_results_name_the_cycle_and_its_segment():
    both = several(NORMAL, WORST)
    found = compare(both)
    peak = found.best.check("speed_torque")
    assert (peak.cycle, peak.segment) == ("worst", "segment 2")
    assert found.best.check("rms_current").cycle == "worst"
    assert [own.name for own in found.best.cycles] == ["normal", "worst"]
    assert found.governing.case.cycle.name == found.best.check(found.best.governing_check).cycle


def test_a_named_single_cycle_gives_what_an_unnamed_one_gives():
    plain = compare(case("rotary load", AXIS, NORMAL.segments))
    named = compare(several(NORMAL))
    for a, b in zip(plain.sets, named.sets, strict=True):
        assert [(c.check, c.utilisation) for c in a.checks] == [(c.check, c.utilisation) for c in b.checks]
        assert a.quantities == b.quantities
    assert named.cycles == ()


def test_the_same_cycle_twice_changes_nothing():
    once, twice = compare(several(NORMAL)), compare(several(NORMAL, Cycle("again", NORMAL.segments)))
    for a, b in zip(once.sets, twice.sets, strict=True):
        assert [(c.check, c.utilisation, c.verdict) for c in a.checks] == [
            (c.check, c.utilisation, c.verdict) for c in b.checks
        ]
    assert once.rejections == twice.rejections


def test_bounds_over_cycles_stay_below_the_exact_utilisations():
    motors = [{**MOTOR, "torque_constant_nm_per_a": K, "rotor_inertia_kg_m2": J} for K, J in
              ((0.3, 1e-4), (0.5, 2e-4), (0.9, 4e-4))]  # fmt: skip
    gearheads = [{**GEARHEAD, "ratio": ratio} for ratio in (3.0, 7.0, 20.0)]
    drives = [DRIVE, {**DRIVE, "continuous_current_a": 2.0}]
    start = Cycle("start", turns(2.0, 1.5, 0.2), ONCE_WARM)
    made = several(NORMAL, WORST, start, motors=motors, gearheads=gearheads, drives=drives)
    cycles = cycle_demands(made)
    checks, limits = active_checks(made.limits)
    binding = tuple(c for c, x in zip(checks, limits, strict=True) if x.applies == "yes")
    allowed = {c.key: made.limits[c.key].allowed_utilisation for c in binding}
    found = screen(made, cycles, binding, allowed, "price", keep=100, losers=10)
    survivors = {tuple(row) for row in found.survivors.tolist()}
    index = np.array([(m, g, d) for m in range(3) for g in range(3) for d in range(2)])
    verdicts = judge_sets(evaluate_cycles(cycles, index), binding, tuple(made.limits[c.key] for c in binding))
    passing = {tuple(row) for row in index[verdicts.verdict < 3].tolist()}
    assert passing
    assert passing <= survivors
    exact = {tuple(row): float(s) for row, s in zip(index.tolist(), verdicts.severity, strict=True)}
    assert len(found.lost) > 0
    for row, bound in zip(found.lost.tolist(), found.lost_bound.tolist(), strict=True):
        assert bound <= exact[tuple(row)] * (1.0 + 1e-5)  # rounding of single precision, `_ROUNDING`


def test_a_lever_changes_every_cycle():
    one = single(several(NORMAL, Cycle("worst", turns(14.0))), 0, 1, 0)
    resizing = Resizing.of(one, PASS)
    assert not resizing.outcome(resizing.case).is_met
    lever = next(lever for lever in LEVERS if lever.key == "move_time")
    found = smallest_change(resizing, lever)
    assert found is not None
    assert found.answer.needed is not None
    changed = lever.changed(resizing.case, found.answer.needed)
    assert Resizing.of(changed, PASS).outcome(changed).is_met
    factors = [
        after.segments[0].duration_s / before.segments[0].duration_s
        for before, after in zip(one.cycles, changed.cycles, strict=True)
    ]
    assert factors[0] == pytest.approx(factors[1])
    assert factors[0] > 1.0


# -- cycles that do not repeat -----------------------------------------------------------------------


def model(made: Case, number: int = 0) -> SetModel:
    each = cycle_demands(made)[number]
    return SetModel(each.case, each.demand, 0, 1, 0)


def test_a_run_from_cold_is_the_course_from_ambient():
    made = several(Cycle("short", turns(9.0), SHORT_TIME))
    one = model(made)
    (sets,), _ = judged(made)
    ends = np.cumsum(one.demand.duration_s)
    course = temperatures_after(one.network, one.loss, made.surroundings.ambient_degc, ends[:-1])
    assert sets.pairs.winding_min_degc[0] == made.surroundings.ambient_degc
    assert sets.pairs.winding_max_degc[0] >= course.winding_degc.max()
    state = single_run(one.network, one.loss, made.surroundings.ambient_degc, 35.0, 35.0)
    assert state.winding_max_degc[0] == pytest.approx(sets.pairs.winding_max_degc[0], abs=1e-12)


def test_a_run_from_its_own_periodic_state_stays_in_it():
    one = model(several(NORMAL))
    ambient = one.case.surroundings.ambient_degc
    state = periodic_state(one.network, one.loss, ambient)
    run = single_run(one.network, one.loss, ambient, state.winding_start_degc, state.housing_start_degc)
    # The fixed point is found to 1e-11 of its rise.
    for name in ("winding_max_degc", "winding_min_degc", "winding_mean_degc", "housing_max_degc"):
        assert getattr(run, name)[0] == pytest.approx(getattr(state, name)[0], rel=1e-9)


def test_a_start_from_warm_is_hotter_than_the_repeating_cycles_and_than_one_from_cold():
    start = turns(9.0, 0.5, 0.2)
    temperatures = {}
    for runs in (ONCE_COLD, ONCE_WARM):
        sets, _ = judged(several(NORMAL, Cycle("start", start, runs)))
        temperatures[runs] = float(sets[1].pairs.winding_max_degc[0])
        normal = float(sets[0].pairs.winding_max_degc[0])
    assert temperatures[ONCE_COLD] < normal < temperatures[ONCE_WARM]


def test_the_cycle_that_follows_counts_too():
    # A start that is all rest leaves the hottest instant to the cycle after it.
    rest = cycle({"law": "dwell", "duration_s": 0.1})
    sets, _ = judged(several(NORMAL, Cycle("wait", rest, ONCE_WARM)))
    assert sets[1].pairs.winding_max_at_s[0] > 0.1
    assert sets[1].pairs.winding_max_degc[0] > sets[0].pairs.winding_max_degc[0]


def hold(torque: float, span_s: float):
    return cycle({"law": "dwell", "duration_s": span_s, "process_effort": torque})


#: A run whose speed heats the housing.
RUN = Cycle("run", cycle({"law": "cycloidal", "displacement": 2e4, "duration_s": 600.0}), ONCE_WARM)
FAST = {**MOTOR, "viscous_friction_nm_s": 2e-3}


def test_what_follows_a_run_repeats_until_the_winding_has_risen_onto_the_warmer_housing():
    hottest = {}
    for span in (0.5, 2.0, 60.0, 300.0):
        sets, _ = judged(several(Cycle("hold", hold(10.0, span)), RUN, motors=[FAST]))
        hottest[span] = float(sets[1].pairs.winding_max_degc[0])
        assert hottest[span] > sets[0].pairs.winding_max_degc[0] + 10.0
    assert np.ptp(list(hottest.values())) < 0.1, hottest  # physically the same hold


def test_jumped_cycles_after_a_run_are_those_of_it_repeated():
    short = Cycle("short", turns(9.0, 0.5, 0.2))
    made = several(short, RUN, motors=[FAST])
    after, run = model(made, 0), model(made, 1)
    ambient = made.surroundings.ambient_degc
    warm = periodic_state(run.network, after.loss, ambient)
    start = warm.winding_max_degc, warm.housing_max_degc
    found = single_run(run.network, run.loss, ambient, *start, (after.loss,))
    parts = [run.loss] + [after.loss] * 286  # 5 time constants of the winding
    repeated = HeatLoss(
        np.concatenate([part.duration_s for part in parts]),
        np.concatenate([part.copper_loss_w for part in parts], axis=1),
        np.concatenate([part.speed_loss_w for part in parts], axis=1),
        *(getattr(run.loss, f.name) for f in fields(HeatLoss)[3:]),
    )
    all_through = single_run(run.network, repeated, ambient, *start)
    assert found.winding_max_time_s[0] > 610.0
    assert found.winding_max_degc[0] == pytest.approx(all_through.winding_max_degc[0], abs=0.02)
    assert found.housing_max_degc[0] == pytest.approx(all_through.housing_max_degc[0], abs=0.02)
    # What is drawn of very many cycles by their mean reaches the same maximum.
    drawn = with_following(run.loss, after.loss, 1e5)
    assert len(drawn.duration_s) < 3000
    assert drawn.duration_s.sum() == pytest.approx(1e5, abs=short.duration_s)


def test_the_order_of_the_repeating_cycles_does_not_matter_to_a_run():
    light, heavy = Cycle("light", hold(4.0, 300.0)), Cycle("heavy", hold(10.0, 300.0))
    either = [judged(several(*cycles, RUN, motors=[FAST]))[0][2].pairs for cycles in
              ((light, heavy), (heavy, light))]  # fmt: skip
    for name in ("winding_max_degc", "winding_max_at_s", "winding_mean_degc", "housing_max_degc"):
        assert getattr(either[0], name)[0] == getattr(either[1], name)[0], name
    alone = judged(several(heavy, RUN, motors=[FAST]))[0][1].pairs
    assert either[0].winding_max_degc[0] == pytest.approx(alone.winding_max_degc[0], abs=1e-9)


def test_means_and_wear_are_not_judged_in_a_single_run():
    heavy = Cycle("start", turns(9.0, 0.5, 0.01), ONCE_WARM)
    made = several(NORMAL, heavy)
    checks, limits = active_checks(made.limits)
    sets, verdicts = judged(made)
    alone = judge_sets(sets[1], checks, limits)
    keys = [check.key for check in checks]
    for key in ("rms_current", "gearhead_equivalent_torque", "gearhead_mean_speed"):
        assert np.isnan(alone.utilisation[0, keys.index(key)]), key
        assert verdicts.cycle[0, keys.index(key)] == 0, key
    assert verdicts.cycle[0, keys.index("speed_torque")] == 1


def test_the_drive_rests_before_and_after_a_single_run():
    drive = {**DRIVE, "rms_window_s": 10.0}
    made = several(NORMAL, Cycle("start", turns(9.0, 0.5, 0.5), ONCE_WARM), drives=[drive])
    sets, _ = judged(made)
    one = model(made, 1)
    heat = float(np.sum(one.demand.mean(one.course.current_a[0] ** 2) * one.demand.cycle_s))
    assert sets[1].drive_current_rms_a[0] == pytest.approx(math.sqrt(heat / 10.0), rel=1e-9)


# -- the mix -----------------------------------------------------------------------------------------


def test_weighed_quantities_follow_from_those_of_the_cycles():
    made = several(replace(NORMAL, share=0.7), replace(WORST, share=0.1))
    best = compare(made).best
    mix, (a, b) = best.mix, (own.quantities for own in best.cycles)
    assert mix["rest_share_ratio"] == pytest.approx(0.2)
    mean_square = 0.7 * a["current_rms_a"] ** 2 + 0.1 * b["current_rms_a"] ** 2
    assert mix["current_rms_a"] == pytest.approx(math.sqrt(mean_square))
    runs = 3600.0 * 0.7 / NORMAL.duration_s, 3600.0 * 0.1 / WORST.duration_s
    energy = sum(n * q["energy_terminals_motoring_j"] for n, q in zip(runs, (a, b), strict=True))
    assert mix["energy_terminals_motoring_per_hour_j"] == pytest.approx(energy)
    assert mix["housing_mix_degc"] < b["housing_max_degc"]


def test_a_mix_of_one_cycle_with_itself_is_that_cycle():
    made = several(replace(NORMAL, share=0.4), Cycle("again", NORMAL.segments, share=0.6))
    best = compare(made).best
    one = best.cycles[0].quantities
    for name in ("current_rms_a", "torque_rms_nm", "copper_loss_mean_w", "speed_mean_abs_rad_s"):
        assert best.mix[name] == pytest.approx(one[name], rel=1e-12), name
    demand = cycle_demands(made)[0].demand
    assert best.mix["gearhead_equivalent_torque_nm"] == pytest.approx(
        demand.shaft_torque_equivalent, rel=1e-12
    )
    each = cycle_demands(made)[0]
    own = SetModel(each.case, each.demand, best.motor_index, best.gearhead_index, best.drive_index)
    state = steady_state(own.network, own.loss, made.surroundings.ambient_degc)
    assert best.mix["winding_mix_degc"] == pytest.approx(float(state.winding_degc[0]), rel=1e-12)


def test_without_shares_there_is_no_mix():
    assert compare(several(NORMAL, WORST)).best.mix is None


# -- a cam law, and one cycle of several simulated -------------------------------------------------------


def cam(*points: list[object], head: str = "master angle [deg]", pace: float | str = 60):
    tables = small_case()
    tables["axis"].append(["cycles per minute", pace, "", ""])
    tables["duty_cycle"] = [
        ["segment", "motion law", "displacement [mm]", "master angle [deg]"],
        ["cam", "spline", "", ""],
        ["back", "cycloidal", -40, 120],
        ["wait", "dwell", "", 60],
    ]
    tables["points"] = [["segment", head, "position [mm]"], *(["cam", *point] for point in points)]
    return tables


def test_a_cam_law_is_stated_over_the_master_angle(tmp_path):
    points = ([0, 0], [60, 10], [120, 32], [180, 40])
    by_angle = read_case(write_folder(tmp_path / "a", cam(*points)))
    by_time = cam(*([angle / 360.0, x] for angle, x in points), head="time [s]")
    by_time["duty_cycle"] = [["segment", "motion law", "displacement [mm]", "duration [s]"],
                             ["cam", "spline", "", ""], ["back", "cycloidal", -40, 120 / 360],
                             ["wait", "dwell", "", 60 / 360]]  # fmt: skip
    timed = read_case(write_folder(tmp_path / "b", by_time))
    assert by_angle.cycle_duration_s == pytest.approx(1.0)
    for a, b in zip(by_angle.segments, timed.segments, strict=True):
        for p, q in zip(a.phases, b.phases, strict=True):
            assert p.duration_s == pytest.approx(q.duration_s, rel=1e-9)
            assert p.end() == pytest.approx(q.end(), rel=1e-9, abs=1e-12)


@pytest.mark.parametrize(
    ("tables", "got"),
    [
        (cam([0, 0], ["", 10], [180, 40]), "neither time nor master angle"),
        (cam([0, 0], [90, 10], [170, 40]), "350° in all"),
        (cam([0, 0], [90, 10], [180, 40], pace=""), "a master angle without pace"),
    ],
)
def test_a_cam_law_with_mistakes_is_told(tmp_path, tables, got):
    understood, problems = check_case(write_folder(tmp_path, tables))
    assert understood is None
    assert any(got in p.got for p in problems if p.severity == ERROR)


def test_one_cycle_of_several_is_simulated(tmp_path):
    made = several(NORMAL, WORST, options={"driven shaft stiffness": 2e4})
    made = replace(
        made, drives=replace(made.drives, values={**made.drives.values, "control_rate": np.array([4000.0])})
    )
    parts = {
        "motor": made.motors.names[0],
        "gearhead": made.gearheads.names[1],
        "drive": made.drives.names[0],
    }
    first, named = simulate(made, **parts), simulate(made, cycle="Worst", **parts)
    assert named.quantities["current_peak_a"] > first.quantities["current_peak_a"]
    with pytest.raises(InputError, match="'normal', 'worst'"):
        simulate(made, cycle="best", **parts)


def test_stops_are_those_of_the_fastest_cycle_and_its_name_is_printed(capsys):
    made = several(NORMAL, WORST)
    parts = {"motor": "M0", "gearhead": made.gearheads.names[1], "drive": "D0", "input": "stop"}
    found, named = simulate(made, **parts), simulate(made, cycle="worst", **parts)
    assert found.cycle == "worst"
    assert found.quantities["stop_from_speed_rad_s"] == named.quantities["stop_from_speed_rad_s"]
    print_simulation(found, ())
    assert "input stop of the cycle 'worst'" in capsys.readouterr().out


# -- reports -----------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def reported(tmp_path_factory):
    rows = [["normal", "repeats", 70, ""], ["<b>worst</b>", "once from warm", "", 2]]
    tables = with_cycles(rows)
    for row in tables["duty_cycle"]:
        row[-1] = row[-1].replace("worst", "<b>worst</b>")
    tables["inertias"] = [["part", "shape", "referred to", "inertia [kg·cm²]"],
                          ["coupling", "coupling", "driven shaft", 0.4]]  # fmt: skip
    comparison = compare(read_case(write_folder(tmp_path_factory.mktemp("reported"), tables)))
    return comparison, render_report(comparison, date=date(2025, 1, 1), pdf=False)


def test_results_hold_every_cycle_the_mix_and_the_inertias(reported):
    comparison, files = reported
    results = json.loads(files["results.json"])
    assert [(c["cycle"], c["runs"]) for c in results["cycles"]] == [
        ("normal", REPEATS),
        ("<b>worst</b>", ONCE_WARM),
    ]
    best = results["sets"][0]
    assert {c["cycle"] for c in best["checks"]} <= {"normal", "<b>worst</b>"}
    worst = {c["check"]: c["utilisation"] for c in best["checks"]}
    for key, use in worst.items():
        own = [each["utilisations"].get(key) for each in best["cycles"]]
        assert use is None or use == max(u for u in own if u is not None), key
    assert best["mix"]["rest_share_ratio"] == pytest.approx(0.3 - 2 * 2.0 / 3600.0)
    parts = {part["name"]: part for part in results["inertias"]}
    assert parts["coupling"]["at_shaft_kg_m2"] == pytest.approx(4e-5)
    assert sum(part["share"] for part in results["inertias"]) == pytest.approx(1.0)
    assert comparison.best.mix is not None


def test_page_and_workbook_name_the_cycles_and_escape_them(reported):
    _, files = reported
    page = files["sizing_report.html"].decode()
    assert "<b>worst</b>" not in page
    assert "&lt;b&gt;worst&lt;/b&gt;" in page
    assert "figures/cycles.svg" in files
    with warnings.catch_warnings():
        # openpyxl cannot keep the data bars of today's format; it reads the cells all the same
        warnings.filterwarnings("ignore", message=".*extension is not supported", category=UserWarning)
        book = load_workbook(BytesIO(files["sizing_tables.xlsx"]))
    assert {"cycles", "mix of cycles", "inertia inventory"} <= set(book.sheetnames)
    assert [book["cycles"].cell(r, 1).value for r in (2, 3)] == ["normal", "<b>worst</b>"]
    segments = book["motion segments"]
    heads = [cell.value for cell in segments[1]]
    names = [segments.cell(row, heads.index("cycle") + 1).value for row in range(2, 10)]
    assert names == ["normal"] * 4 + ["<b>worst</b>"] * 4


def test_the_terminal_and_the_notebook_name_the_cycle(reported):
    comparison, _ = reported
    governing = comparison.best.check(comparison.best.governing_check)
    assert f"in the cycle {governing.cycle}" in verdict_sentence(comparison)
    assert "cycle" in comparison.best.checks.table.columns


def test_every_cycle_gets_its_picture(tmp_path):
    paths = write_motion(several(NORMAL, WORST), tmp_path)
    assert [path.name for path in paths] == ["motion_1.svg", "motion_2.svg"]
    assert b"worst" in paths[1].read_bytes()
