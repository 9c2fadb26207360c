"""Samples of one set against a loop that a competent user would write.

The reference draws the same inputs, evaluates torque, RMS and peak current and voltage of each sample vectorised over
the cycle at 1 kHz, and solves the balance of winding and housing with ``scipy.optimize.fsolve``; of what `robust`
judges it leaves out the speed–torque plane, the i²t accumulator and the ripple of the temperature. Both in one
process, in CPU time, so that other work on the machine matters less.

Run: ``OPENBLAS_NUM_THREADS=1 python tests/benchmarks/bench_robust.py [samples] [case]``. Goal: 100 000 samples of one
set, temperature included, within a second on one core.
"""

import sys
import time
from dataclasses import replace
from pathlib import Path

import numpy as np
from scipy.optimize import fsolve

import actuator_sizing as act
from actuator_sizing.case.model import Tolerance
from actuator_sizing.sizing.case_changes import single
from actuator_sizing.sizing.robustness.evaluator import SetEvaluator
from actuator_sizing.sizing.thermal_data import thermal_network
from tests.benchmarks.sampled import sample_profile, sampled_set

DEMO = Path(__file__).parents[2] / "catalogs_demo"
RATE_HZ = 1000.0
REFERENCE_SAMPLES = 200


def spread(quantity, width, table, shape="normal", *, relative=True):
    """One row of the table `tolerances`."""
    return Tolerance(2, quantity, shape, width, relative, table)


SPREADS = (
    spread("torque constant", 0.03, "motors"),
    spread("resistance terminal-to-terminal", 0.05, "motors"),
    spread("rotor inertia", 0.05, "motors"),
    spread("ambient temperature", 5.0, "axis", "uniform", relative=False),
    spread("minimum bus voltage", 0.03, "axis"),
)


def loop(samples, count):
    """Largest quantities and steady winding temperature, one sample after the other."""
    case = samples.case
    profile = sample_profile(case, RATE_HZ)
    found = []
    for i in range(count):
        m, g = samples.motors.take(slice(i, i + 1)), samples.gearheads.take(slice(i, i + 1))
        K, R = float(m.torque_constant_nm_per_a[0]), float(m.resistance_ohm[0])
        rms, peak, _, _, voltage = sampled_set(
            profile, RATE_HZ, float(g.ratio[0]), float(g.efficiency[0]), float(g.efficiency_back[0]),
            float(m.rotor_inertia_kg_m2[0]), float(g.inertia_kg_m2[0]), float(m.friction_torque_nm[0]),
            float(g.no_load_torque_nm[0]), float(m.viscous_friction_nm_s[0]), K, R,
        )  # fmt: skip
        network = thermal_network(m, case.surroundings)
        alpha, reference = m.resistance_coefficient_per_k[0], m.resistance_reference_degc[0]
        beta, magnet = m.magnet_coefficient_per_k[0], m.magnet_reference_degc[0]
        ambient = float(np.broadcast_to(samples.surroundings.ambient_degc, len(samples))[i])
        total, outer = float(network.total_resistance_k_w[0]), float(network.speed_resistance_k_w[0])

        def balance(
            x,
            q=R * (rms / K) ** 2,
            ambient=ambient,
            total=total,
            outer=outer,
            a=(alpha, reference, beta, magnet),
        ):
            loss = q * (1.0 + a[0] * (x[0] - a[1])) / (1.0 + a[2] * (x[1] - a[3])) ** 2
            return [x[0] - ambient - total * loss, x[1] - ambient - outer * loss]

        found.append((rms / K, peak, voltage, fsolve(balance, [ambient + 20.0, ambient + 10.0])[0]))
    return np.array(found)


def main():
    """Print the time of each and their ratio."""
    count = int(float(sys.argv[1])) if len(sys.argv) > 1 else 100_000
    name = sys.argv[2] if len(sys.argv) > 2 else "tray_shuttle"
    case = replace(act.read_case(DEMO / name), tolerances=SPREADS)
    best = act.compare(case).best
    evaluator = SetEvaluator.of(single(case, best.motor_index, best.gearhead_index, best.drive_index))
    values = evaluator.inputs.of_scores(
        np.random.default_rng(0).standard_normal((count, len(evaluator.inputs)))
    )
    evaluator.quick(values[:5000])  # the set is prepared, and compared with the whole chain, once
    start, wall = time.process_time(), time.perf_counter()
    judged = evaluator.quick(values)
    took, waited = time.process_time() - start, time.perf_counter() - wall
    samples = evaluator.samples(values[:REFERENCE_SAMPLES])
    start = time.process_time()
    reference = loop(samples, REFERENCE_SAMPLES)
    per_sample = (time.process_time() - start) / REFERENCE_SAMPLES
    off = judged.quantities["winding_max_degc"][:REFERENCE_SAMPLES] - reference[:, 3]
    print(f"{name}: {best.label}, {int(evaluator.at_once.sum())} checks, {len(evaluator.inputs)} inputs")
    print(
        f"{count} samples: {took:.2f} s of one core, {waited:.2f} s by the clock, {1e6 * took / count:.1f} us each"
    )
    print(
        f"loop at 1 kHz with fsolve: {1e6 * per_sample:.0f} us each, {per_sample * count / took:.0f} times as long"
    )
    print(
        f"hottest winding {off.mean():.2f} K above the loop's: it leaves out ripple, friction and the brake's coil"
    )
    print(f"largest deviation from the whole chain: {evaluator.largest_deviation:.1e} of what is allowed")


if __name__ == "__main__":
    main()
