"""Cases at the edge of the physics: what fails must be said to fail, and a bound must be a bound."""

from dataclasses import replace

import numpy as np

from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.judging import ORDER, active_checks, judge_sets
from actuator_sizing.sizing.results import FAILS
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.made_cases import GEARHEAD, SURROUNDINGS, case, cycle


def judged(made):
    """Evaluated sets of all combinations and their verdicts."""
    sizes = (len(made.motor_parameters), len(made.gearhead_parameters), len(made.drive_parameters))
    index = np.stack(np.meshgrid(*(np.arange(n) for n in sizes), indexing="ij"), axis=-1).reshape(-1, 3)
    sets = evaluate_sets(made, build_demand(made), index)
    checks, limits = active_checks(made.limits)
    return sets, judge_sets(sets, checks, limits)


def column(verdicts, key):
    return [check.key for check in verdicts.checks].index(key)


def table(**options):
    """A rotary table that turns a quarter and rests."""
    return case(
        "rotary load",
        {"load inertia": 0.02},
        cycle(
            {"law": "cycloidal", "displacement": 1.5, "duration_s": 0.6},
            {"law": "dwell", "duration_s": 0.8},
        ),
        gearheads=[GEARHEAD],
        **options,
    )


def test_an_ambient_above_the_winding_limit_fails_the_winding_temperature():
    made = table(surroundings=replace(SURROUNDINGS, ambient_degc=160.0))
    _, verdicts = judged(made)
    at = column(verdicts, "winding_temperature")
    assert ORDER[verdicts.codes[0, at]] == FAILS
    assert np.isinf(verdicts.utilisation[0, at])
