"""Open-loop motion with friction that sticks and flanks that part: linear between events, events located.

Between two events the plant is linear and is propagated exactly; the instant of an event is found by bisection
of the exact solution, so that the result does not depend on the step.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.plant import LOAD_SPEED, MOTOR_SPEED, TWIST, Plant
from actuator_sizing.core.propagation import zero_order_hold

FloatArray = NDArray[np.float64]

_PARTS_OF_PERIOD = 20.0  # steps per period of the fastest oscillation, so that no crossing pair is missed
_MOST_EVENTS = 100_000
_MOST_TERMS = 40  # of a Taylor series; needed where a step is longer than the fastest decay


@dataclass(frozen=True)
class Held:
    """Inputs that stay for a while."""

    duration_s: float
    voltage_v: float
    load_torque_nm: float = 0.0  # external torque on the load, positive where it speeds up
    motor_torque_nm: float = 0.0


@dataclass(frozen=True)
class Course:
    """States at the ends of all steps and events; columns of `core.plant`."""

    time_s: FloatArray
    states: FloatArray
    events: int
    is_complete: bool  # False: stopped at the largest number of events

    @property
    def end(self) -> FloatArray:
        """States at the end, shape (5,)."""
        return np.asarray(self.states[-1])


@dataclass(frozen=True)
class _Mode:
    """Direction of slip of both masses (0: stuck) and which flanks touch (0: none)."""

    motor: int
    load: int
    flank: int


class _Switched:
    """The plant in its modes; with one mass all friction is on the motor."""

    def __init__(self, plant: Plant):
        self.plant = plant
        self.gap = 0.0 if plant.is_rigid else 0.5 * plant.backlash_rad
        both = plant.motor_coulomb_nm + plant.load_coulomb_nm
        self.levels = (both, 0.0) if plant.is_rigid else (plant.motor_coulomb_nm, plant.load_coulomb_nm)
        self._steps: dict[tuple[_Mode, float], tuple[FloatArray, FloatArray]] = {}

    def system(self, mode: _Mode) -> tuple[FloatArray, FloatArray]:
        """Matrices; inputs are voltage, both torques, and one for what the mode adds."""
        p = self.plant
        A, B = p.matrices(engaged=self.gap == 0.0 or mode.flank != 0)
        extra = -mode.motor * self.levels[0] * B[:, 1] - mode.load * self.levels[1] * B[:, 2]
        if self.gap > 0.0 and mode.flank:
            push = p.stiffness_nm_per_rad * self.gap * mode.flank
            extra += push * (B[:, 1] - B[:, 2])
        B = np.column_stack([B, extra])
        A = A.copy()
        for row, direction, level in zip((MOTOR_SPEED, LOAD_SPEED), (mode.motor, mode.load),
                                         self.levels, strict=True):  # fmt: skip
            if direction == 0 and level > 0.0:
                A[row], B[row] = 0.0, 0.0
        if p.is_rigid:
            A[LOAD_SPEED], B[LOAD_SPEED] = A[MOTOR_SPEED], B[MOTOR_SPEED]
        return A, B

    def step(self, x: FloatArray, u: FloatArray, mode: _Mode, h: float, *, keep: bool) -> FloatArray:
        """Exact step of length h."""
        found = self._steps.get((mode, h))
        if found is None:
            found = zero_order_hold(*self.system(mode), h)
            if keep:
                self._steps[mode, h] = found
        return np.asarray(found[0] @ x + found[1] @ u)

    def path(self, x: FloatArray, u: FloatArray, mode: _Mode, h: float) -> Callable[[float], FloatArray]:
        """States at any instant of a step: the Taylor series of the exact solution, else exponentials."""
        if h == 0.0:
            return lambda _: x
        A, B = self.system(mode)
        terms = [x]
        v = (A @ x + B @ u) * h
        size = np.abs(x).max() + np.abs(v).max()
        for order in range(1, _MOST_TERMS):
            terms.append(v)
            if np.abs(v).max() <= 1e-18 * size:
                series = np.array(terms)
                powers = np.arange(len(series))
                return lambda part: np.asarray((part / h) ** powers @ series)
            v = A @ v * (h / (order + 1.0))
            size = max(size, np.abs(v).max())
        return lambda part: self.step(x, u, mode, part, keep=False)

    def pull(self, x: FloatArray, u: FloatArray, mode: _Mode, which: int) -> float:
        """Torque on one mass without its Coulomb friction. [N·m]"""
        p = self.plant
        A, B = p.matrices(engaged=self.gap == 0.0 or mode.flank != 0)
        row = (MOTOR_SPEED, LOAD_SPEED)[which]
        inertia = (
            p.total_inertia_kg_m2 if p.is_rigid else (p.motor_inertia_kg_m2, p.load_inertia_kg_m2)[which]
        )
        torque = float(A[row] @ x + B[row] @ u[:3]) * inertia
        if self.gap > 0.0 and mode.flank:
            torque += p.stiffness_nm_per_rad * self.gap * mode.flank * (1.0 if which == 0 else -1.0)
        return torque

    def guards(self, x: FloatArray, u: FloatArray, mode: _Mode) -> list[float]:
        """Numbers that stay above zero while the mode lasts: motor, load, flanks."""
        values = []
        for which, direction in enumerate((mode.motor, mode.load)):
            level = self.levels[which]
            if level == 0.0:
                values.append(math.inf)
            elif direction:
                values.append(float(x[(MOTOR_SPEED, LOAD_SPEED)[which]]) * direction)
            else:
                values.append(level - abs(self.pull(x, u, mode, which)))
        if self.gap == 0.0:
            values.append(math.inf)
        elif mode.flank:
            values.append(mode.flank * float(x[TWIST]) - self.gap)
        else:
            values.append(self.gap - abs(float(x[TWIST])))
        return values

    def after(self, x: FloatArray, u: FloatArray, mode: _Mode, which: int) -> tuple[FloatArray, _Mode]:
        """States and mode once guard `which` has reached zero."""
        x = x.copy()
        if which == 2:
            flank = 0 if mode.flank else int(math.copysign(1.0, x[TWIST]))
            x[TWIST] = math.copysign(self.gap, x[TWIST])
            return x, _Mode(mode.motor, mode.load, flank)
        direction = (mode.motor, mode.load)[which]
        if direction:
            x[(MOTOR_SPEED, LOAD_SPEED)[which]] = 0.0
            if self.plant.is_rigid:
                x[LOAD_SPEED] = 0.0
        pull = self.pull(x, u, mode, which)
        moved = 0 if direction and abs(pull) <= self.levels[which] else int(math.copysign(1.0, pull))
        return x, (
            _Mode(moved, mode.load, mode.flank) if which == 0 else _Mode(mode.motor, moved, mode.flank)
        )

    def first_mode(self, x: FloatArray, u: FloatArray, flank: int | None) -> _Mode:
        """Mode from the states alone; at rest what pulls decides."""
        if flank is None:
            flank = 0 if abs(x[TWIST]) < self.gap else int(math.copysign(1.0, x[TWIST]))
        mode = _Mode(1, 1, flank if self.gap > 0.0 else 0)
        directions = []
        for which, row in enumerate((MOTOR_SPEED, LOAD_SPEED)):
            level = self.levels[which]
            if level == 0.0 or x[row] != 0.0:
                directions.append(int(math.copysign(1.0, x[row])))
                continue
            pull = self.pull(x, u, mode, which)
            directions.append(0 if abs(pull) <= level else int(math.copysign(1.0, pull)))
        return _Mode(directions[0], directions[1], mode.flank)


def run_open_loop(
    plant: Plant, inputs: Sequence[Held], step_s: float, start: FloatArray | None = None
) -> Course:
    """Move the plant through held inputs, every stick, slip and contact located.

    Parameters
    ----------
    plant : Plant
        What is moved. [-]
    inputs : sequence of Held
        One after the other. [-]
    step_s : float
        Distance of recorded instants; shortened where the plant oscillates faster. [s]
    start : ndarray, shape (5,), optional
        States at the start; by default at rest. [-]

    Returns
    -------
    Course
        States at every step and event; not complete after 100 000 events. [-]

    Examples
    --------
    >>> plant = Plant(resistance_ohm=1.0, inductance_h=1e-3, torque_constant_nm_per_a=0.1,
    ...               motor_inertia_kg_m2=1e-4, motor_coulomb_nm=0.2)
    >>> float(run_open_loop(plant, [Held(1.0, 1.5)], 0.01).end[1])  # 1.5 A give 0.15 N·m: it sticks
    0.0
    """
    switched = _Switched(plant)
    fastest = max(
        (abs(np.linalg.eigvals(plant.matrices(engaged=e)[0]).imag).max() for e in (True, False)), default=0.0
    )
    if fastest > 0.0:
        step_s = min(step_s, 2.0 * math.pi / fastest / _PARTS_OF_PERIOD)
    x = np.zeros(5) if start is None else np.asarray(start, dtype=float)
    time, times, states = 0.0, [0.0], [x]
    mode: _Mode | None = None
    events = 0
    for held in inputs:
        u = np.array([held.voltage_v, held.motor_torque_nm, held.load_torque_nm, 1.0])
        mode = switched.first_mode(x, u, None if mode is None else mode.flank)
        left = held.duration_s
        # Equal parts, so that one exponential serves all of them; after an event one odd step leads back.
        part = left / math.ceil(left / step_s)
        while left > 1e-9 * part:
            odd = math.fmod(left, part)
            on_grid = min(odd, part - odd) < 1e-6 * part
            h = min(part, left) if on_grid else odd
            if on_grid and abs(h - part) < 1e-6 * part:
                h = part
            x_new = switched.step(x, u, mode, h, keep=on_grid)
            low = switched.guards(x_new, u, mode)
            if min(low) < 0.0:
                h, which = _first_event(switched, x, u, mode, h, low)
                x_new, mode = switched.after(switched.path(x, u, mode, h)(h), u, mode, which)
                events += 1
                if events > _MOST_EVENTS:
                    return Course(np.array(times), np.array(states), events, is_complete=False)
            time, left, x = time + h, left - h, x_new
            times.append(time)
            states.append(x)
    return Course(np.array(times), np.array(states), events, is_complete=True)


def _first_event(
    switched: _Switched, x: FloatArray, u: FloatArray, mode: _Mode, h: float, low: list[float]
) -> tuple[float, int]:
    """Instant within the step at which the first guard reaches zero, and which it is."""
    from scipy.optimize import brentq

    first, which = math.inf, 0
    begin = switched.guards(x, u, mode)
    path = switched.path(x, u, mode, h)
    for k, value in enumerate(low):
        if value >= 0.0:
            continue

        def guard(part: float, k: int = k) -> float:
            return switched.guards(path(part), u, mode)[k]

        # A guard that begins at zero belongs to the event just passed: look behind it.
        start = 0.0
        if begin[k] <= 0.0:
            start = next((h * 0.5**n for n in range(50, 0, -1) if guard(h * 0.5**n) > 0.0), 0.0)
        if start == 0.0 and begin[k] <= 0.0:
            at = 0.0
        elif guard(h) >= 0.0:
            at = h  # the series and the exponential differ by rounding about the sign at the end
        else:
            at = float(brentq(guard, start, h, xtol=1e-15 * h + 1e-300, rtol=8.9e-16))
        if at < first:
            first, which = at, k
    return first, which
