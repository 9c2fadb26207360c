"""Periodic winding temperature against integrating every cycle from cold until it is steady.

The reference is what a competent user writes: ``scipy.integrate.solve_ivp`` over eight housing time constants,
steps short enough to see every piece of the cycle, the winding's largest value in the last cycle read off.
Rounds are interleaved in one process; the line gives the ratio of medians. Because such steps straddle the jumps
of the loss, the reference is itself a few tenths of a kelvin off; the accuracy of the periodic state is therefore
measured apart, by one cycle integrated tightly piece by piece from its own start.

Run: ``python tests/benchmarks/bench_thermal.py [rounds]``. Goal: at least 10 000 times faster, within 0.05 K.
"""

import statistics
import sys
import time
from bisect import bisect_right

import numpy as np
from scipy.integrate import solve_ivp

from actuator_sizing.core.thermal import HeatLoss, ThermalNetwork, periodic_state

AMBIENT = 40.0
R_1, R_2, C_1, C_2 = 1.2, 1.8, 60.0, 1250.0  # 72 s and 2250 s
ALPHA, REFERENCE, BETA = 1.0 / 255.0, 20.0, -0.0011
LONGEST_STEP_S = 0.1


def cycle():
    """Nineteen pieces in 6.06 s with four dwells."""
    random = np.random.default_rng(7)
    duration = random.uniform(0.1, 0.5, 19)
    copper = random.uniform(2.0, 40.0, 19)
    copper[[4, 9, 14, 18]] = 0.0
    speed = random.uniform(0.0, 3.0, 19) * (copper > 0.0)
    return duration * (6.06 / duration.sum()), copper, speed


DURATION, COPPER, SPEED = cycle()


ENDS = np.cumsum(DURATION).tolist()


def rates(copper_w, speed_w, winding, housing):
    """Slopes of both temperatures."""
    ratio = (1.0 + ALPHA * (winding - REFERENCE)) / (1.0 + BETA * (housing - REFERENCE)) ** 2
    across = (winding - housing) / R_1
    return (copper_w * ratio - across) / C_1, (across - (housing - AMBIENT) / R_2 + speed_w) / C_2


def integrated():
    """Largest winding temperature of the last cycle, every cycle integrated from cold."""
    copper, speed = COPPER.tolist(), SPEED.tolist()
    span, last = ENDS[-1], len(ENDS) - 1

    def right(t, x):
        piece = min(bisect_right(ENDS, t % span), last)
        return rates(copper[piece], speed[piece], *x)

    cycles = int(8.0 * R_2 * C_2 / span)
    solution = solve_ivp(right, (0.0, cycles * span), (AMBIENT, AMBIENT), max_step=LONGEST_STEP_S)
    return float(solution.y[0, solution.t >= (cycles - 1) * span].max())


def periodic():
    """The periodic state itself."""
    one = np.ones(1)
    network = ThermalNetwork(R_1 * one, R_2 * one, C_1 * one, C_2 * one)
    loss = HeatLoss(
        DURATION, COPPER[None], SPEED[None], ALPHA * one, REFERENCE * one, BETA * one, REFERENCE * one
    )
    return periodic_state(network, loss, AMBIENT)


def error_of(state):
    """How far the periodic state is off, from the miss of one tightly integrated cycle and its spectral radius."""
    x = start = np.array([state.winding_start_degc[0], state.housing_start_degc[0]])
    for h, copper, speed in zip(DURATION, COPPER, SPEED, strict=True):
        right = lambda _t, y, q=copper, p=speed: rates(q, p, *y)  # noqa: E731
        x = solve_ivp(right, (0.0, h), x, rtol=1e-11, atol=1e-11).y[:, -1]
    return float(np.abs(x - start).max() / (1.0 - state.spectral_radius[0]))


def main(rounds):
    """Time both in turns and print one line."""
    slow, fast = [], []
    for _ in range(rounds):
        start = time.perf_counter()
        reference = integrated()
        slow.append(time.perf_counter() - start)
        for _ in range(200):
            start = time.perf_counter()
            answer = periodic()
            fast.append(time.perf_counter() - start)
    long, short = statistics.median(slow), statistics.median(fast)
    print(
        f"periodic thermal state: {long / short:,.0f} times faster than integrating from cold ({short * 1e6:.0f} us "
        f"against {long:.1f} s, {rounds} rounds), off by {error_of(answer):.1e} K, the integration by "
        f"{reference - answer.winding_max_degc[0]:.1e} K"
    )


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 3)
