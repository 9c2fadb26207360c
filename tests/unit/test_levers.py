"""Each lever's answer lets the set pass, and a little less does not."""

import numpy as np
import pytest

from actuator_sizing.sizing.case_changes import single
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.cycles import cycle_demands
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.levers import LEVERS, levers_of, smallest_change
from actuator_sizing.sizing.resizing import RESERVE, Resizing
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, SURROUNDINGS, case, cycle

SCREW = {
    "lead": 0.012, "moving mass": 18.0, "inclination": np.pi / 2, "efficiency": 0.88,
    "guide friction force": 120.0, "driven shaft inertia": 1.4e-4,
}  # fmt: skip


def lift(
    *, move_s=0.8, dwell_s=0.3, brake_closed=True, motor=MOTOR, surroundings=SURROUNDINGS, drives=(DRIVE,)
):
    segments = cycle(
        {"law": "trapezoid", "displacement": 0.6, "duration_s": move_s, "payload": 60.0},
        {"law": "trapezoid", "displacement": -0.6, "duration_s": move_s, "payload": 10.0},
        {"law": "dwell", "duration_s": dwell_s, "brake_closed": brake_closed},
    )
    return case(
        "ball screw", SCREW, segments, motors=[motor], gearheads=[DIRECT, {**GEARHEAD, "ratio": 1.5}],
        surroundings=surroundings, drives=drives,
    )  # fmt: skip


HOT = {**MOTOR, "thermal_resistance_winding_k_w": 1.2, "thermal_resistance_housing_k_w": 3.4}
FAILING = {
    "hot winding": lift(motor=HOT),
    "too fast": lift(move_s=0.55),
    "small drive": lift(drives=[{**DRIVE, "continuous_current_a": 3.0, "peak_current_a": 9.0}]),
}


def sized(one, goal="pass"):
    return Resizing.of(one, goal)


@pytest.mark.parametrize(("name", "gearhead"), [("hot winding", 0), ("too fast", 1), ("small drive", 0)])
def test_the_answer_passes_and_a_thousandth_less_change_fails(name, gearhead):
    resizing = sized(single(FAILING[name], 0, gearhead, 0))
    assert not resizing.outcome(resizing.case).is_met
    helped = 0
    for lever in LEVERS:
        found = smallest_change(resizing, lever)
        if found is None or found.answer.needed is None:
            continue
        helped += 1
        answer = found.answer
        # Sized anew, with nothing kept from the search.
        again = lever.changed(resizing.case, answer.needed)
        assert sized(again).outcome(again).is_met, lever.key
        # The change is found to 1e-4 of itself; a thousandth less of it is outside that.
        less = lever.changed(resizing.case, answer.needed - 1e-3 * answer.change)
        assert not sized(less).outcome(less).is_met, lever.key
        assert answer.cost == pytest.approx(lever.cost(resizing.case, answer.present, answer.needed))
    assert helped


def test_a_lever_that_cannot_help_says_so():
    # Too slow a motor is not helped by cooler air or less friction.
    resizing = sized(single(lift(motor={**MOTOR, "speed_max_rad_s": 200.0}), 0, 0, 0))
    found = {lever.key: smallest_change(resizing, lever) for lever in LEVERS}
    assert found["ambient"].answer.needed is None
    assert found["friction"].answer.needed is None
    assert found["ratio"] is None  # direct drive has no ratio
    assert found["stiffness"] is None  # nothing asks how the axis moves
    needed = found["move_time"].answer.needed / found["move_time"].answer.present
    assert needed == pytest.approx(
        build_demand(lift()).shaft_speed_peak / 200.0, rel=2e-4
    )  # speed goes as one over time; the answer is found to 1e-4 of the change
    # Speed goes as 1/(1 − share) over the same way in the same time: trapezoid, first principles.
    share = found["acceleration_share"].answer
    assert share.needed is None or (1.0 - share.needed) == pytest.approx(2 / 3 / needed, rel=2e-4)


def test_levers_are_in_the_units_of_the_axis():
    resizing = sized(single(FAILING["hot winding"], 0, 0, 0))
    answers = {s.answer.lever: s.answer for s in (smallest_change(resizing, lever) for lever in LEVERS) if s}
    assert (answers["payload"].present, answers["payload"].unit) == (60.0, "kg")
    assert (answers["move_time"].present, answers["move_time"].unit) == (1.6, "s")
    assert (answers["friction"].present, answers["friction"].unit) == (120.0, "N")
    assert answers["acceleration_share"].present == pytest.approx(1 / 3)


def test_levers_come_with_the_comparison():
    small = {**DRIVE, "continuous_current_a": 1.0, "peak_current_a": 4.0, "price": 100.0}
    made = lift(move_s=1.2, drives=[small, DRIVE])
    assert all(not item.levers for item in compare(made).sets)
    losers = [item for item in compare(made, levers=1).sets if item.levers and item.verdict == "fails"]
    assert len(losers) == 1
    by_name = {entry["lever"]: entry for entry in losers[0].levers}
    assert by_name["other_drive"]["needed"] == "D1"
    assert by_name["other_drive"]["next_step"] == "D1"


def test_a_leading_set_with_low_reserve_is_told_what_gives_it_more():
    made = lift(
        move_s=1.2, brake_closed=False,
        drives=[{**DRIVE, "continuous_current_a": 3.2}],
    )  # fmt: skip
    best = compare(made, levers=1).best
    assert best.verdict == "passes, low reserve"
    assert {entry["goal"] for entry in best.levers} == {RESERVE}
    helped = [entry for entry in best.levers if entry["helps"] and entry["unit"]]
    one = single(made, best.motor_index, best.gearhead_index, best.drive_index)
    for entry in helped:
        lever = next(lever for lever in LEVERS if lever.key == entry["lever"])
        changed = lever.changed(one, entry["needed"])
        assert compare(changed).best.verdict == "passes", lever.key
    assert helped


# Two things are wrong: the motor is too slow, and too weak for the current.
TWICE_WRONG = lift(motor={**MOTOR, "continuous_current_a": 2.9, "speed_max_rad_s": 560.0})


@pytest.fixture(scope="module")
def twice_wrong():
    return levers_of(cycle_demands(TWICE_WRONG), 0, 0, 0)


def test_the_cheapest_pair_passes_costs_less_than_one_lever_and_needs_both(twice_wrong):
    one, pair = single(TWICE_WRONG, 0, 0, 0), twice_wrong.pair
    assert pair is not None
    alone = [answer.cost for answer in twice_wrong.singles if answer.cost is not None]
    assert pair.cost < min(alone, default=np.inf)
    assert pair.cost == pytest.approx(pair.first.cost + pair.second.cost)
    first, second = (next(v for v in LEVERS if v.key == a.lever) for a in (pair.first, pair.second))

    def outcome(value_1, value_2):
        changed = second.changed(first.changed(one, value_1), value_2)
        return sized(changed).outcome(changed)

    assert outcome(pair.first.needed, pair.second.needed).is_met
    less = pair.second.needed - 1e-3 * pair.second.change
    assert not outcome(pair.first.needed, less).is_met
    assert not outcome(pair.first.present, pair.second.needed).is_met
    assert not outcome(pair.first.needed, pair.second.present).is_met
