"""From cold through very many cycles, without following each: states at chosen cycles, time to a limit."""

from __future__ import annotations

import math

from actuator_sizing.core.thermal_cycle import (
    after_cycles,
    cycle_map,
    moved,
    survey,
    turning_instant,
)
from actuator_sizing.core.thermal_kernel import FLOATS, Coefficients, Steps, linearise

#: With a magnet term the cycle map is only locally affine: one jump moves no temperature by more. [K]
_LARGEST_JUMP_K = 2.0
_MOST_JUMPS = 64
#: Share of the cycles so far by which the search for the limit goes on, and how often at most.
_WIDENING = 1.0
_MOST_LOOKS = 100


class Walker:
    """The state of one candidate at the starts of chosen, ascending cycles."""

    def __init__(self, k: Coefficients, steps: Steps):
        self.k, self.steps = k, steps
        self.span = math.fsum(steps.duration)
        self.cycle, self.x1, self.x2 = 0, k.ambient, k.ambient

    def copy(self) -> Walker:
        """Start a second walker from the same cycle."""
        other = Walker(self.k, self.steps)
        other.cycle, other.x1, other.x2 = self.cycle, self.x1, self.x2
        return other

    def go_to(self, cycle: int) -> None:
        """Walk on to the start of a cycle: one jump where the cycle map is affine, several else."""
        jumps = 0
        while self.cycle < cycle and math.isfinite(self.x1 + self.x2):
            at = cycle_map(self.k, self.steps, FLOATS, self.x1, self.x2)
            count = cycle - self.cycle
            d1, d2 = after_cycles(at, FLOATS, count)
            while self.k.beta != 0.0 and jumps < _MOST_JUMPS and count > 1:
                if max(abs(d1), abs(d2)) <= _LARGEST_JUMP_K:
                    break
                count = max(count // 2, 1)
                d1, d2 = after_cycles(at, FLOATS, count)
            jumps += 1
            self.x1, self.x2, self.cycle = self.x1 + d1, self.x2 + d2, self.cycle + count


def time_to_limit(k: Coefficients, steps: Steps, limit_degc: float) -> float:
    """First instant from cold at which the winding reaches the limit, NaN if not found."""
    walker, step = Walker(k, steps), 1.0
    before = walker.copy()
    for _ in range(_MOST_LOOKS):
        if not survey(k, steps, FLOATS, walker.x1, walker.x2).winding_max < limit_degc:
            break
        before = walker.copy()
        walker.go_to(walker.cycle + int(step))
        step = max(1.0, _WIDENING * walker.cycle)
    else:
        return math.nan
    while walker.cycle - before.cycle > 1:  # the maximum of a cycle rises from cycle to cycle: halve
        middle = before.copy()
        middle.go_to((before.cycle + walker.cycle) // 2)
        if survey(k, steps, FLOATS, middle.x1, middle.x2).winding_max < limit_degc:
            before = middle
        else:
            walker = middle
    inside = _crossing(k, steps, walker.x1, walker.x2, limit_degc)
    return walker.cycle * walker.span + inside


def _crossing(k: Coefficients, steps: Steps, x1: float, x2: float, limit: float) -> float:
    """Instant within one cycle at which the winding reaches the limit; the end of the cycle if not."""
    clock = 0.0
    for h, q, s1, s2, _ in zip(*steps, strict=True):
        if x1 >= limit:
            return clock
        at = linearise(k, FLOATS, x1, x2, q, s1, s2)
        turn = turning_instant(at, FLOATS, h, housing=False)
        for end in (h if math.isnan(turn) else turn, h):
            if not x1 + moved(at, FLOATS, end)[0] < limit:  # what overflows is past the limit, too
                low, high = 0.0, end  # the winding rises all the way to `end`, or first falls and then rises
                for _ in range(60):
                    middle = 0.5 * (low + high)
                    low, high = (
                        (low, middle) if x1 + moved(at, FLOATS, middle)[0] >= limit else (middle, high)
                    )
                return clock + high
        d1, d2 = moved(at, FLOATS, h)
        clock, x1, x2 = clock + h, x1 + d1, x2 + d2
    return clock
