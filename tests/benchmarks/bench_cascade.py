"""Two seconds of the cascade at 16 kHz: the plain loop against a numpy state-space loop, machine code, closed form.

The reference is what a competent user writes: the same cascade with numpy vectors and matrices for the plant, one
sample at a time. Rounds are interleaved in one process; processor
time is taken and the best of each counts, since a shared machine only adds.

Run: ``python tests/benchmarks/bench_cascade.py [rounds]``. Goals: at most 60 ms without a compiler and at least 8
times faster than the reference; with the compiler (extra ``fast``) at least 500 times. Without friction and limits
the closed form of whole stretches is held against the plain loop, samples of commands made beforehand: goal 30 times.
"""

import sys
import time
from dataclasses import replace

import numpy as np
from numpy.polynomial import Polynomial, legendre

from actuator_sizing.core.cascade_kernel import compiled_loop
from actuator_sizing.core.control import Cascade, LoopSettings
from actuator_sizing.core.following import Follower
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


def quintic():
    """Out and back in a second each by the 3-4-5 polynomial, as Legendre series and as samples."""
    law, half = Polynomial([0.0, 0.0, 0.0, 10.0, -15.0, 6.0]), Polynomial([0.5, 0.5])
    rows = np.zeros((4, 6))
    for row, curve in enumerate((50.0 * law, 50.0 * law.deriv(), 0.1 * law.deriv(2))):
        series = legendre.poly2leg(curve(half).coef)
        rows[row, : len(series)] = series
    rows[3, 0] = -0.1
    back = rows * np.array([[-1.0], [-1.0], [-1.0], [1.0]])
    back[0, 0] += 50.0
    xi = -1.0 + 2.0 / RATE_HZ * np.arange(RATE_HZ)
    return [(series, series @ legendre.legvander(xi, 5).T) for series in (rows, back)]


def closed_form(plant, rounds):
    """Best times of the plain loop and of whole stretches, and the largest difference of the angle."""
    smooth = replace(plant, motor_coulomb_nm=0.0, load_coulomb_nm=0.0)
    s, moves = default_tuning(smooth, BASE).settings, quintic()
    best = {"loop": np.inf, "stretches": np.inf}
    for _ in range(rounds):
        loop, follower = Cascade(smooth, s), Follower(Cascade(smooth, s))
        best["loop"] = min(best["loop"], timed(lambda c=loop: [c.advance(*x) for _, x in moves]))
        for _ in range(4):  # the states go on, the commands begin anew: the same work
            best["stretches"] = min(
                best["stretches"],
                timed(lambda f=follower: [f.follow(x, -1.0, 2.0 / RATE_HZ, RATE_HZ) for x, _ in moves]),
            )
    ends = Cascade(smooth, s), Follower(Cascade(smooth, s))
    for series, samples in moves:
        ends[0].advance(*samples)
        ends[1].follow(series, -1.0, 2.0 / RATE_HZ, RATE_HZ)
    return best, abs(ends[0].state[4] - ends[1].cascade.state[4])


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
        best, gap = closed_form(plant, rounds)
        print(
            f"  without friction: loop {best['loop'] * 1e3:.1f} ms, closed form {best['stretches'] * 1e3:.2f} ms, "
            f"{best['loop'] / best['stretches']:.0f} times; angles differ by {gap:.0e} of 50 rad"
        )


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 8)
