"""Two seconds of the cascade at 16 kHz: the plain loop against a numpy state-space loop, and machine code.

The reference is what a competent user writes: the same cascade with numpy vectors and matrices for the plant, one
sample at a time. Rounds are interleaved in one process; processor
time is taken and the best of each counts, since a shared machine only adds.

Run: ``python tests/benchmarks/bench_cascade.py [rounds]``. Goals: at most 60 ms without a compiler and at least 8
times faster than the reference; with the compiler (extra ``fast``) at least 500 times.
"""

import sys
import time
from dataclasses import replace

import numpy as np

from actuator_sizing.core.cascade_kernel import compiled_loop
from actuator_sizing.core.control import Cascade, LoopSettings
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.propagation import zero_order_hold
from actuator_sizing.core.tuning import default_tuning

RATE_HZ, SECONDS = 16_000, 2.0
RIGID = Plant(
    resistance_ohm=1.2, inductance_h=4e-3, torque_constant_nm_per_a=0.5, motor_inertia_kg_m2=2e-4,
    load_inertia_kg_m2=8e-4, motor_viscous_nm_s=1e-4, motor_coulomb_nm=0.02, load_coulomb_nm=0.05,
)  # fmt: skip
SOFT = replace(RIGID, stiffness_nm_per_rad=500.0, damping_nm_s=5e-3)
BASE = LoopSettings(
    sample_time_s=1.0 / RATE_HZ, position_gain_per_s=0.0, speed_gain_a_s_per_rad=0.0, speed_reset_time_s=1.0,
    current_gain_v_per_a=0.0, current_reset_time_s=1.0, current_limit_a=18.0, voltage_limit_v=300.0,
)  # fmt: skip
N = int(RATE_HZ * SECONDS)
T = np.arange(N) / RATE_HZ
ANGLE, SPEED = 50.0 * (T - np.sin(np.pi * T) / np.pi), 50.0 * (1.0 - np.cos(np.pi * T))
ZERO, LOAD = np.zeros(N), np.full(N, -0.1)


def vectors(plant, s):
    """The cascade with numpy vectors, friction on the load implicit."""
    Phi, Gamma = zero_order_hold(*plant.matrices(), s.sample_time_s)
    row = 1 if plant.is_rigid else 3
    level = plant.load_coulomb_nm + (plant.motor_coulomb_nm if plant.is_rigid else 0.0)
    K, h = plant.torque_constant_nm_per_a, s.sample_time_s
    x, out = np.zeros(5), np.empty((N, 5))
    speed_part = current_part = last = 0.0
    for k in range(N):
        out[k] = x
        e = SPEED[k] + s.position_gain_per_s * (ANGLE[k] - x[4]) - x[1]
        wanted = s.speed_gain_a_s_per_rad * e + speed_part
        i_ref = np.clip(wanted, -s.current_limit_a, s.current_limit_a)
        speed_part += s.speed_gain_a_s_per_rad * h / s.speed_reset_time_s * e
        d = i_ref - x[0]
        u = s.current_gain_v_per_a * d + current_part + K * x[1]
        u = np.clip(u, -s.voltage_limit_v, s.voltage_limit_v)
        current_part += s.current_gain_v_per_a * h / s.current_reset_time_s * d
        x = Phi @ x + Gamma @ np.array([last, 0.0, LOAD[k]])
        x = x + Gamma[:, 2] * np.clip(-x[row] / Gamma[row, 2], -level, level)
        last = u
    return out


def timed(action):
    """Seconds of processor time of one call."""
    start = time.process_time()
    action()
    return time.process_time() - start


def main(rounds):
    """Time all in turns and print one line for each plant."""
    for name, plant in (("one mass", RIGID), ("two masses", SOFT)):
        s = default_tuning(plant, BASE).settings
        runs = {
            "numpy": lambda p=plant, s=s: vectors(p, s),
            "plain": lambda p=plant, s=s: Cascade(p, s).advance(ANGLE, SPEED, ZERO, LOAD),
        }
        if compiled_loop() is not None:
            runs["compiled"] = lambda p=plant, s=s: Cascade(p, s, is_compiled=True).advance(
                ANGLE, SPEED, ZERO, LOAD
            )
            runs["compiled"]()  # the compiler's own time is not measured
        best = dict.fromkeys(runs, np.inf)
        for _ in range(rounds):
            for key, run in runs.items():
                for _ in range(1 if key == "numpy" else 4):
                    best[key] = min(best[key], timed(run))
        gain = best["numpy"] / best["plain"]
        line = f"cascade, {name}: plain {best['plain'] * 1e3:.1f} ms, {gain:.1f} times the numpy loop"
        if "compiled" in best:
            line += (
                f"; compiled {best['compiled'] * 1e3:.2f} ms, {best['numpy'] / best['compiled']:.0f} times"
            )
        print(line + f" ({best['numpy'] * 1e3:.0f} ms, {rounds} rounds)")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 8)
