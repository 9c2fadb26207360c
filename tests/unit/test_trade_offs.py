"""Which sets no other one beats: against brute force, with ties and values that are not known."""

import numpy as np

from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.trade_offs import dominated_by
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, case, cycle


def beaten(cost):
    """Whether another row is at least as small everywhere and smaller somewhere, pair by pair."""
    count = len(cost)
    return [
        any(np.all(cost[j] <= cost[i]) and np.any(cost[j] < cost[i]) for j in range(count))
        for i in range(count)
    ]


def test_front_is_that_of_brute_force():
    random = np.random.default_rng(7)
    for width in (1, 2, 3, 4):
        cost = random.integers(0, 6, size=(120, width)).astype(float)  # integers: many ties
        found = dominated_by(cost)
        assert (found >= 0).tolist() == beaten(cost)
        for row, by in enumerate(found):
            if by >= 0:
                assert found[by] < 0, "who beats is on the front"
                assert np.all(cost[by] <= cost[row])
                assert np.any(cost[by] < cost[row])


def test_a_row_that_is_not_known_neither_beats_nor_is_beaten():
    cost = np.array([[1.0, 1.0], [np.inf, 0.0], [2.0, 2.0], [0.0, np.nan]])
    assert dominated_by(cost).tolist() == [-1, -1, 0, -1]
    assert dominated_by(np.empty((0, 3))).tolist() == []


def turning(**changes):
    segments = cycle(
        {"law": "trapezoid", "displacement": 2.0, "duration_s": 0.6}, {"law": "dwell", "duration_s": 0.4}
    )
    dear = {**DRIVE, "price": 900.0}
    unknown = {**DRIVE, "price": np.nan}
    return case(
        "rotary load", {"load inertia": 0.05}, segments, motors=[MOTOR, {**MOTOR, "mass_kg": 2.0, "price": 380.0}],
        gearheads=[DIRECT, GEARHEAD], drives=[DRIVE, dear, unknown], **changes,
    )  # fmt: skip


def test_a_comparison_says_by_whom_a_set_is_beaten():
    found = compare(turning(), trade_offs=True).trade_offs
    assert found.criteria == ("price", "mass", "energy", "reserve")
    assert all(one.is_compared == (one.drive != "D2") for one in found.sets)
    dear = [one for one in found.sets if one.drive == "D1"]
    assert dear
    for one in dear:
        better = found.sets[one.dominated_by]
        assert better.on_front
        assert all(better.values[k] <= one.values[k] for k in ("price", "mass", "energy"))
        assert better.values["reserve"] >= one.values["reserve"]
    front = {one.label for one in found.front}
    assert front == set(
        found.table.loc[found.table["on_front"], ["motor", "gearhead", "drive"]].agg(" + ".join, axis=1)
    )


def test_a_criterion_that_is_known_of_no_set_is_left_out():
    made = turning()
    parameters = made.motor_parameters
    blind = type(parameters)(**{**vars(parameters), "price": np.full(2, np.nan)})
    found = compare(type(made)(**{**vars(made), "motor_parameters": blind}), trade_offs=True).trade_offs
    assert found.criteria == ("mass", "energy", "reserve")
    assert found.front


def test_where_nothing_passes_there_is_nothing_to_trade():
    weak = {**MOTOR, "continuous_current_a": 0.01}
    made = case(
        "rotary load", {"load inertia": 0.5},
        cycle({"law": "trapezoid", "displacement": 2.0, "duration_s": 0.6}), motors=[weak], gearheads=[DIRECT],
    )  # fmt: skip
    assert compare(made, trade_offs=True).trade_offs.sets == ()
