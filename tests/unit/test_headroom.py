"""What a set can do at most: at each limit it passes, a thousandth beyond it fails, sized anew."""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.case.model import Cycle
from actuator_sizing.errors import InputError
from actuator_sizing.report.headroom_text import headroom_text, map_rows
from actuator_sizing.sizing.case_changes import moves_of, single, with_cycle_time, with_payload
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.headroom import changed_case, extents, headroom
from actuator_sizing.sizing.resizing import Resizing
from tests.made_cases import DIRECT, DRIVE, MOTOR, SURROUNDINGS, case, cycle
from tests.unit.test_levers import SCREW

WARM = {**MOTOR, "thermal_resistance_winding_k_w": 1.0, "thermal_resistance_housing_k_w": 2.6,
        "continuous_current_a": 3.4}  # fmt: skip


def lift(motor=WARM, dwell_s=0.8, surroundings=SURROUNDINGS, payload=60.0):
    segments = cycle(
        {"law": "trapezoid", "displacement": 0.6, "duration_s": 1.0, "payload": payload},
        {"law": "dwell", "duration_s": dwell_s, "payload": payload},
        {"law": "trapezoid", "displacement": -0.6, "duration_s": 1.0, "payload": payload / 6.0},
        {"law": "dwell", "duration_s": 1.5, "brake_closed": True},
    )
    return case(
        "ball screw", SCREW, segments, motors=[motor], gearheads=[DIRECT], drives=[DRIVE], surroundings=surroundings
    )  # fmt: skip


@pytest.fixture(scope="module")
def found():
    return headroom(lift(), motor="M0", drive="D0", with_map=True)


def passes(changed):
    return Resizing.of(changed).outcome(changed).is_met


def test_at_each_limit_the_set_passes_and_a_thousandth_beyond_it_fails(found):
    bounded = 0
    for extent in extents(found.case):
        answer = found.of(extent.key)
        if answer.limit is None or answer.is_free:
            continue
        bounded += 1
        assert passes(extent.changed(found.case, answer.limit)), extent.key
        outward = 1.0 if extent.outward > extent.present else -1.0
        beyond = answer.limit * (1.0 + outward * np.sign(answer.limit) * 1e-3)
        outcome = Resizing.of(found.case).outcome(extent.changed(found.case, beyond))
        assert not outcome.is_met, extent.key
        assert outcome.check == answer.check, extent.key
    assert bounded >= 5


def test_every_quantity_is_there(found):
    assert {"fastest_cycle", "fastest_move_1", "fastest_move_2", "shortest_dwell", "heaviest_payload",
            "hottest_ambient", "longest_hold"} == {answer.key for answer in found.answers}  # fmt: skip
    hold = found.of("longest_hold")
    assert hold.present == pytest.approx(0.8)
    assert "'segment 3'" in hold.title  # the dwell without brake, and the heavier load


def test_speed_bounds_the_fastest_cycle_in_closed_form():
    fast = lift(motor={**MOTOR, "speed_max_rad_s": 500.0})
    answer = headroom(fast, motor="M0", drive="D0").of("fastest_cycle")
    assert answer.check == "motor_speed"
    # Speed goes as one over the cycle time; limits are found to 2e-4 of themselves.
    expected = fast.cycle_duration_s * build_demand(fast).shaft_speed_peak / 500.0
    assert answer.limit == pytest.approx(expected, rel=2e-4)
    assert answer.limit >= expected


def test_the_map_passes_inside_and_fails_outside(found):
    rows = [row for row in found.map.rows if row.shortest_s is not None]
    assert found.map.present_payload in [row.payload for row in rows]
    assert len(rows) >= 8
    for row in rows[::4]:
        assert passes(changed_case(found.case, row.payload, row.shortest_s))
        assert not passes(changed_case(found.case, row.payload, row.shortest_s * 0.999))
        if row.longest_s is not None:
            assert passes(changed_case(found.case, row.payload, row.longest_s))
            assert not passes(changed_case(found.case, row.payload, row.longest_s * 1.001))
    # More payload never makes the fastest cycle faster here: nothing but inertia, gravity and friction grows.
    shortest = np.array([row.shortest_s for row in rows])
    assert np.all(np.diff(shortest) >= -2e-4 * shortest[1:])


def test_map_and_limits_agree(found):
    at_present = next(row for row in found.map.rows if row.payload == found.map.present_payload)
    # Both are found to 2e-4 of the time.
    assert at_present.shortest_s == pytest.approx(found.of("fastest_cycle").limit, rel=4e-4)
    assert at_present.shortest_by == found.of("fastest_cycle").check


def test_a_set_that_fails_is_driven_inwards():
    failing = headroom(lift(motor={**WARM, "continuous_current_a": 2.6}), motor="M0", drive="D0")
    assert not failing.present.is_met
    payload = failing.of("heaviest_payload")
    assert 0.0 < payload.limit < payload.present
    assert passes(with_payload(failing.case, payload.limit))
    assert not passes(with_payload(failing.case, payload.limit * 1.001))


def test_texts_round_to_the_safe_side(found):
    titles = {}
    for answer in found.answers:
        text = headroom_text(found.case, answer, titles)
        if answer.limit is None or answer.is_free or answer.unit != "s":
            continue
        number, unit = text.limit.split(" ")
        seconds = float(number) * {"s": 1.0, "ms": 1e-3, "min": 60.0}[unit]
        smaller = answer.key.startswith(("fastest", "shortest"))
        assert seconds >= answer.limit * (1 - 1e-12) if smaller else seconds <= answer.limit * (1 + 1e-12)
    assert len(list(map_rows(found.case, found.map, titles))) == len(found.map.rows)


def test_times_scale_speed_and_process_knots_alike():
    slower = with_cycle_time(lift(), 2.0)
    before, after = build_demand(lift()), build_demand(slower)
    assert after.cycle_s == pytest.approx(2.0 * before.cycle_s)
    assert after.shaft_speed_peak == pytest.approx(before.shaft_speed_peak / 2.0)


def test_moves_are_from_standstill_to_standstill():
    ramps = cycle(
        {"law": "speed ramp", "end_speed": 1.0, "duration_s": 0.2},
        {"law": "constant speed", "duration_s": 0.5},
        {"law": "speed ramp", "end_speed": 0.0, "duration_s": 0.2},
        {"law": "dwell", "duration_s": 0.3},
        {"law": "trapezoid", "displacement": -0.7, "duration_s": 0.6},
    )
    made = case("ball screw", SCREW, ramps)
    assert [move.segments for move in moves_of(made)] == [(0, 1, 2), (4,)]


def test_a_motion_that_the_mechanism_cannot_make_bounds_too():
    values = {
        "moving mass": 200.0,
        "wheel diameter": 0.2,
        "adhesion coefficient": 0.15,
        "driven weight share": 0.5,
    }
    run = cycle(
        {"law": "trapezoid", "displacement": 2.0, "duration_s": 4.0}, {"law": "dwell", "duration_s": 1.0}
    )
    made = single(case("wheel drive", values, run, gearheads=[{**DIRECT}]), 0, 0, 0)
    resizing = Resizing.of(made)
    assert resizing.outcome(with_cycle_time(made, 0.2)).check == "motion"


def test_an_unknown_part_is_named():
    with pytest.raises(InputError, match="M7"):
        headroom(lift(), motor="M7", drive="D0")


def test_payload_of_an_axis_without_one_starts_at_nothing():
    made = headroom(replace(lift(payload=0.0), name="empty"), motor="M0", drive="D0")
    assert made.of("heaviest_payload").present == 0.0
    assert made.of("heaviest_payload").limit > 0.0


def test_several_cycles_go_together():
    first = lift()
    second = cycle(
        {"law": "trapezoid", "displacement": 0.6, "duration_s": 1.4, "payload": 90.0},
        {"law": "trapezoid", "displacement": -0.6, "duration_s": 1.4, "payload": 90.0},
        {"law": "dwell", "duration_s": 1.0, "brake_closed": True},
    )
    both = replace(first, cycles=(Cycle("usual", first.segments), Cycle("heavy", second)))
    made = headroom(both, motor="M0", drive="D0")
    assert {answer.key for answer in made.answers} == {
        "fastest_cycle", "shortest_dwell", "heaviest_payload", "hottest_ambient"
    }  # fmt: skip
    assert made.notes
    payload = made.of("heaviest_payload")
    assert payload.present == 90.0
    assert passes(with_payload(made.case, payload.limit))
    assert not passes(with_payload(made.case, payload.limit * 1.001))


def test_a_check_that_loses_its_data_on_the_way_is_not_met():
    """No derating is stated: beyond the ambient of its data sheet nobody knows what the drive carries."""
    answer = headroom(lift(), motor="M0", drive="D0").of("hottest_ambient")
    assert answer.limit == pytest.approx(DRIVE["continuous_ambient_degc"], rel=1e-3)
    assert answer.check == "drive_continuous_current"
