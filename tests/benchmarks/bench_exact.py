"""Exact evaluation of sets with every check: evaluation of the pairs, the studies behind the checks, the verdicts.

The case is a lift with gravity, friction and a dwell; it states what makes the optional checks apply: resistor,
supply, allowed ways, screw, life, events. Every set has its own motor × gearhead pair, the dearest case. Reported is
time of one core (`time.process_time`), so that a busy machine counts less.

Run: ``python tests/benchmarks/bench_exact.py [rounds]``. Goal: at least 2000 sets/s on one core.
"""

import cProfile
import pstats
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[2]))

from actuator_sizing.sizing.demand import build_demand  # noqa: E402
from actuator_sizing.sizing.judging import active_checks, judge_sets  # noqa: E402
from actuator_sizing.sizing.shortlist import evaluate_sets  # noqa: E402
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, case, cycle  # noqa: E402

MOTORS = 512
PLAIN = {"supply feeds back": "no", "stop reaction time": 0.05}
ASKED = {
    **PLAIN, "brake resistor": 60.0, "chopper threshold": 380.0, "brake resistor continuous power": 500.0,
    "brake resistor pulse energy": 1000.0, "supply continuous power": 1e3, "supply peak power": 3e3,
    "supply internal resistance": 1.0, "allowed stopping distance": 0.2, "allowed drop distance": 0.1,
    "screw root diameter": 0.02, "screw unsupported length": 0.8, "screw end fixity": "fixed-supported",
    "screw dynamic load rating": 2e4, "screw static load rating": 4e4, "required life": 7e7, "jam duration": 0.5,
    "stops in a row": 3.0, "coupling torque limit": 20.0,
}  # fmt: skip


def made_case(options):
    """As many motors as one batch, scattered; direct drive and one gearhead."""
    rng = np.random.default_rng(3)
    motors = [
        {
            **MOTOR,
            "rotor_inertia_kg_m2": 1e-4 * rng.uniform(0.3, 5.0),
            "torque_constant_nm_per_a": rng.uniform(0.3, 0.9),
            "brake_torque_nm": rng.uniform(2.0, 6.0),
        }
        for _ in range(MOTORS)
    ]
    segments = cycle(
        {"law": "jerk-limited", "displacement": 0.7, "duration_s": 1.2, "payload": 30.0},
        {"law": "dwell", "duration_s": 0.6, "payload": 30.0},
        {"law": "trapezoid", "displacement": -0.3, "duration_s": 0.8, "payload": 10.0},
        {"law": "cycloidal", "displacement": -0.4, "duration_s": 1.0},
        {"law": "dwell", "duration_s": 2.0},
    )
    values = {"lead": 0.012, "moving mass": 18.0, "inclination": np.pi / 2, "guide friction force": 25.0}
    return case(
        "ball screw", values, segments, motors=motors, gearheads=[DIRECT, {**GEARHEAD, "ratio": 3.0}],
        drives=[DRIVE], options=options,
    )  # fmt: skip


def judged(made, demand, index):
    checks, limits = active_checks(made.limits)
    return judge_sets(evaluate_sets(made, demand, index), checks, limits)


def main():
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 3
    for name, options in (("plain case", PLAIN), ("every optional check asked", ASKED)):
        made = made_case(options)
        demand = build_demand(made)
        index = np.stack(np.meshgrid(np.arange(MOTORS), np.arange(2), [0], indexing="ij"), -1).reshape(-1, 3)
        judged(made, demand, index)
        best = np.inf
        for _ in range(rounds):
            start = time.process_time()
            judged(made, demand, index)
            best = min(best, time.process_time() - start)
        print(f"{name}: {len(index) / best:.0f} sets/s ({len(demand.duration_s)} pieces, best of {rounds})")
        if "--profile" in sys.argv:
            profile = cProfile.Profile()
            profile.runcall(judged, made, demand, index)
            pstats.Stats(profile).sort_stats("tottime").print_stats(22)


if __name__ == "__main__":
    main()
