"""Properties of several cycles: order, worst of each check, and weights."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from actuator_sizing.case.model import Case, Cycle
from actuator_sizing.sizing.cycles import CycleDemand, cycle_demands, evaluate_cycles
from actuator_sizing.sizing.judging import active_checks, judge_sets
from actuator_sizing.sizing.mix import mix_quantities
from actuator_sizing.sizing.set_model import SetModel
from tests.made_cases import case, cycle

INDEX = np.array([[0, 0, 0], [0, 1, 0]])
MOVES = st.tuples(st.floats(0.5, 12.0), st.floats(0.15, 1.5), st.floats(0.05, 2.0))


def made_of(moves: list[tuple[float, float, float]], shares: list[float] | None = None) -> Case:
    cycles = tuple(
        Cycle(
            f"cycle {number}",
            cycle(
                {"law": "3-4-5 polynomial", "displacement": angle, "duration_s": time},
                {"law": "dwell", "duration_s": rest},
            ),
            share=float("nan") if shares is None else shares[number],
        )
        for number, (angle, time, rest) in enumerate(moves)
    )
    made = case("rotary load", {"load inertia": 0.05, "friction torque": 0.5}, cycles[0].segments)
    return replace(made, cycles=cycles)


def verdicts_of(cycles: tuple[CycleDemand, ...]):
    checks, limits = active_checks(cycles[0].case.limits)
    return judge_sets(evaluate_cycles(cycles, INDEX), checks, limits)


@settings(max_examples=15, deadline=None)
@given(st.lists(MOVES, min_size=2, max_size=3))
def test_every_check_is_the_worst_of_the_cycles_in_any_order(moves):
    cycles = cycle_demands(made_of(moves))
    together, backwards = verdicts_of(cycles), verdicts_of(cycles[::-1])
    alone = [verdicts_of((each,)) for each in cycles]
    np.testing.assert_array_equal(together.utilisation, np.fmax.reduce([v.utilisation for v in alone]))
    np.testing.assert_array_equal(together.utilisation, backwards.utilisation)
    np.testing.assert_array_equal(together.verdict, np.max([v.verdict for v in alone], axis=0))
    np.testing.assert_array_equal(together.verdict, backwards.verdict)


@settings(max_examples=15, deadline=None)
@given(st.lists(MOVES, min_size=2, max_size=2), st.floats(0.0, 1.0))
def test_a_mix_without_rest_lies_between_its_cycles(moves, share):
    cycles = cycle_demands(made_of(moves, [share, 1.0 - share]))
    sets = evaluate_cycles(cycles, INDEX)
    models = tuple(SetModel(each.case, each.demand, 0, 1, 0) for each in cycles)
    mix = mix_quantities(sets, models, 1)
    assert mix["rest_share_ratio"] == pytest.approx(0.0, abs=1e-12)
    for name in ("current_rms_a", "copper_loss_mean_w", "speed_mean_abs_rad_s"):
        own = [float(getattr(each.pairs, name)[1]) for each in sets]
        assert min(own) * (1 - 1e-9) <= mix[name] <= max(own) * (1 + 1e-9), name  # sums of rounded parts
    torque = [each.demand.shaft_torque_equivalent for each in cycles]
    assert min(torque) * (1 - 1e-9) <= mix["gearhead_equivalent_torque_nm"] <= max(torque) * (1 + 1e-9)
