"""RMS, peak and energies of one candidate: exact pieces against 10 kHz vectorised sampling.

The reference has its motion profile ready; only the motor and gearhead change. The exact method is timed as the
package runs it, 256 candidates at a time, and divided. Rounds are interleaved in one process.

Run: ``python tests/benchmarks/bench_candidate.py [rounds]``. Goal: at least 30 times faster, to 1e-9.
"""

import statistics
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[2]))

from actuator_sizing.core.quadrature import largest_magnitude, signed_integrals  # noqa: E402
from actuator_sizing.sizing.demand import build_demand  # noqa: E402
from actuator_sizing.sizing.pair_course import air_gap_torque  # noqa: E402
from tests.benchmarks.sampled import sample_profile, sampled_set  # noqa: E402
from tests.made_cases import GEARHEAD, MOTOR, case, cycle  # noqa: E402

BATCH, RATE = 128, 10_000


def made_case():
    """A lift with gravity, friction, a process force and a dwell, as in algorithms studies: 6 s."""
    rng = np.random.default_rng(3)
    motors = [{**MOTOR, "rotor_inertia_kg_m2": 1e-4 * rng.uniform(0.3, 5.0)} for _ in range(BATCH)]
    segments = cycle(
        {"law": "jerk-limited", "displacement": 0.7, "duration_s": 1.2, "payload": 30.0},
        {"law": "dwell", "duration_s": 0.6, "payload": 30.0},
        {
            "law": "trapezoid",
            "displacement": -0.3,
            "duration_s": 0.8,
            "payload": 10.0,
            "process_effort": 120.0,
        },
        {"law": "dwell", "duration_s": 0.4, "payload": 10.0},
        {"law": "cycloidal", "displacement": -0.4, "duration_s": 1.0},
        {"law": "dwell", "duration_s": 2.0, "brake_closed": True},
    )
    values = {
        "lead": 0.012, "moving mass": 18.0, "inclination": np.pi / 2, "efficiency": 0.88,
        "guide friction force": 25.0, "viscous friction": 40.0, "driven shaft inertia": 1.4e-4,
    }  # fmt: skip
    return case("ball screw", values, segments, motors=motors, gearheads=[{**GEARHEAD, "ratio": 3.0}])


def exact(demand, motors, gearheads):
    """RMS, peak and energies of a batch."""
    torque, speed, _ = air_gap_torque(demand, motors, gearheads)
    rms = np.sqrt(demand.mean(torque**2))
    peak = largest_magnitude(torque)[0]
    motoring, regenerated = signed_integrals(demand.duration_s, torque * speed)
    return rms, peak, motoring, regenerated


def main(rounds):
    """Time both in turns and print one line."""
    made = made_case()
    demand = build_demand(made)
    profile = sample_profile(made, RATE)
    m = made.motor_parameters
    g = made.gearhead_parameters.take(np.zeros(BATCH, dtype=int))

    def sampled(i):
        return sampled_set(
            profile, RATE, 3.0, g.efficiency[i], g.efficiency_back[i], m.rotor_inertia_kg_m2[i],
            g.inertia_kg_m2[i], m.friction_torque_nm[i], g.no_load_torque_nm[i], m.viscous_friction_nm_s[i],
            0.5, 1.2,
        )  # fmt: skip

    slow, fast = [], []
    for _ in range(rounds):
        start = time.perf_counter()
        for i in range(20):
            reference = sampled(i)
        slow.append((time.perf_counter() - start) / 20)
        start = time.perf_counter()
        answer = exact(demand, m, g)
        fast.append((time.perf_counter() - start) / BATCH)
    long, short = statistics.median(slow), statistics.median(fast)
    off = [abs(a[19] / b - 1.0) for a, b in zip(answer, reference, strict=False)]
    print(
        f"one candidate: {long / short:.0f} times faster than 10 kHz sampling ({short * 1e6:.1f} us against "
        f"{long * 1e6:.0f} us, {len(profile[0])} samples, {len(demand.duration_s)} pieces); sampling off by "
        f"{off[0]:.0e} in RMS, {off[1]:.0e} in peak, {off[2]:.0e} in energy"
    )


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 15)
