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
#: Changes of mode before a run is given up, besides one for each input; each takes a millisecond or two.
_FREE_EVENTS, _MOST_EVENTS = 2_000, 6_000
_SLACK = 1e-12  # of a level: what rests on it to rounding has not left it
_MOST_STEPS = 5_000_000  # some seconds
_BLOCK = 256  # steps of one mode that are taken at once
_KEPT = 20_000  # steps that are recorded; of more, evenly chosen ones
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
    """States at events and at the ends of steps; columns of `core.plant`."""

    time_s: FloatArray
    states: FloatArray
    events: int
    is_complete: bool  # False: stopped at the largest number of events or steps
    steps: int = 0

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


@dataclass(frozen=True)
class _Conditions:
    """Linear functions of the states that stay above zero, or within a level where there is one."""

    rows: FloatArray  # (3, 5)
    constants: FloatArray
    levels: FloatArray  # NaN: above zero
    slack: FloatArray

    def at(self, states: FloatArray) -> FloatArray:
        """Numbers that are above zero while the mode lasts, shape (..., 3)."""
        value = states @ self.rows.T + self.constants
        return np.asarray(np.where(np.isnan(self.levels), value, self.levels - np.abs(value)))

    def broken(self, states: FloatArray) -> NDArray[np.bool_]:
        """Which are no longer met, shape (..., 3)."""
        return np.asarray(self.at(states) < -self.slack)


class _Switched:
    """The plant in its modes; with one mass all friction is on the motor."""

    def __init__(self, plant: Plant):
        self.plant = plant
        self.gap = 0.0 if plant.is_rigid else 0.5 * plant.backlash_rad
        both = plant.motor_coulomb_nm + plant.load_coulomb_nm
        self.levels = (both, 0.0) if plant.is_rigid else (plant.motor_coulomb_nm, plant.load_coulomb_nm)
        self._pulls = {engaged: self._pull_parts(engaged) for engaged in (True, False)}
        self._steps: dict[tuple[_Mode, float], tuple[FloatArray, FloatArray]] = {}
        self._blocks: dict[tuple[_Mode, float], tuple[FloatArray, FloatArray]] = {}

    def _pull_parts(self, engaged: bool) -> tuple[tuple[FloatArray, FloatArray], ...]:
        """Torque on motor and load by states and inputs, without Coulomb friction."""
        p = self.plant
        A, B = p.matrices(engaged=engaged)
        both = p.total_inertia_kg_m2
        inertias = (both, both) if p.is_rigid else (p.motor_inertia_kg_m2, p.load_inertia_kg_m2)
        rows = zip((MOTOR_SPEED, LOAD_SPEED), inertias, strict=True)
        return tuple((A[row] * inertia, B[row] * inertia) for row, inertia in rows)

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

    def steps(self, x: FloatArray, u: FloatArray, mode: _Mode, h: float, count: int) -> FloatArray:
        """States after 1 to count exact steps of length h, shape (count, 5)."""
        if count < _BLOCK and (mode, h) not in self._blocks:
            states = np.empty((count, 5))
            for k in range(count):
                states[k] = x = self.step(x, u, mode, h, keep=True)
            return states
        powers, gains = self.block(mode, h)
        return np.asarray(powers[:count] @ x + gains[:count] @ u)

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
        row, constant = self._pull_row(u, mode, which)
        return float(row @ x) + constant

    def _pull_row(self, u: FloatArray, mode: _Mode, which: int) -> tuple[FloatArray, float]:
        engaged = self.gap == 0.0 or mode.flank != 0
        row, column = self._pulls[engaged][which]
        constant = float(column @ u[:3])
        if self.gap > 0.0 and mode.flank:
            push = self.plant.stiffness_nm_per_rad * self.gap * mode.flank
            constant += push if which == 0 else -push
        return row, constant

    def conditions(self, u: FloatArray, mode: _Mode) -> _Conditions:
        """What holds while the mode lasts, as linear functions of the states: motor, load, flanks."""
        rows, constants = np.zeros((3, 5)), np.full(3, math.inf)
        levels, slack = np.full(3, math.nan), np.zeros(3)
        for which, (direction, row) in enumerate(((mode.motor, MOTOR_SPEED), (mode.load, LOAD_SPEED))):
            if self.levels[which] == 0.0:
                continue
            if direction:
                rows[which, row], constants[which] = direction, 0.0
            else:
                rows[which], constants[which] = self._pull_row(u, mode, which)
                levels[which] = self.levels[which]
                slack[which] = _SLACK * self.levels[which]
        if self.gap > 0.0:
            rows[2, TWIST] = mode.flank or 1.0
            constants[2] = -self.gap if mode.flank else 0.0
            slack[2] = _SLACK * self.gap
            if not mode.flank:
                levels[2] = self.gap
        return _Conditions(rows, constants, levels, slack)

    def block(self, mode: _Mode, h: float) -> tuple[FloatArray, FloatArray]:
        """Exact steps of length h, 2 h, ... from one state under the same inputs."""
        if (mode, h) not in self._blocks:
            A, B = self.system(mode)
            Phi, Gamma = zero_order_hold(A, B, h)
            powers, gains = Phi[None], Gamma[None]
            while len(powers) < _BLOCK:
                last, last_gain = powers[-1], gains[-1]
                gains = np.concatenate([gains, last_gain + last @ gains])
                powers = np.concatenate([powers, powers @ last])
            self._blocks[mode, h] = powers, gains
        return self._blocks[mode, h]

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
        States at steps and events, at most 20 000 of the steps; not complete after 2000 events more than
        there are inputs. [-]

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
    steps = sum(max(held.duration_s / step_s, 1.0) for held in inputs)
    record = _Record(x, max(1, math.ceil(steps / _KEPT)))
    most_events = min(_FREE_EVENTS + len(inputs), _MOST_EVENTS)
    mode: _Mode | None = None
    for held in inputs:
        u = np.array([held.voltage_v, held.motor_torque_nm, held.load_torque_nm, 1.0])
        mode = switched.first_mode(x, u, None if mode is None else mode.flank)
        # Equal parts, so that one exponential serves all of them; after an event one odd step leads back.
        parts = math.ceil(held.duration_s / step_s)
        part, begin, done = held.duration_s / parts, record.time_s, 0
        odd = 0.0  # already gone of the next part
        while done < parts:
            if record.events > most_events or record.steps > _MOST_STEPS:
                return record.course(is_complete=False)
            conditions = switched.conditions(u, mode)
            if odd == 0.0 and parts - done > 1:
                states = switched.steps(x, u, mode, part, min(_BLOCK, parts - done))
                broken = np.flatnonzero(conditions.broken(states).any(axis=1))
                good = int(broken[0]) if len(broken) else len(states)
                if good:
                    x = states[good - 1]
                    record.add(
                        np.asarray(begin + part * np.arange(done + 1.0, done + good + 1.0)), states[:good]
                    )
                    done += good
                if not len(broken):
                    continue
            h = part - odd
            x_new = switched.step(x, u, mode, h, keep=odd == 0.0)
            broken_now = conditions.broken(x_new)
            if not broken_now.any():
                done, odd, x = done + 1, 0.0, x_new
                record.add(np.array([begin + part * done]), x[None])
                continue
            h, which = _first_event(switched, x, u, mode, h, broken_now)
            x, mode = switched.after(switched.path(x, u, mode, h)(h), u, mode, which)
            odd += h
            record.event(begin + part * done + odd, x)
            if part - odd <= 1e-9 * part:
                done, odd = done + 1, 0.0
    return record.course(is_complete=True)


class _Record:
    """States as they come, thinned where there are very many."""

    def __init__(self, start: FloatArray, stride: int):
        self.stride, self.steps, self.events = stride, 0, 0
        self.time_s, self._last = 0.0, start
        self._times, self._states = [np.zeros(1)], [start[None]]

    def add(self, times: FloatArray, states: FloatArray) -> None:
        """Take in steps of which every so manieth is kept."""
        first = -self.steps % self.stride
        self._times.append(times[first :: self.stride])
        self._states.append(states[first :: self.stride])
        self.steps += len(times)
        self.time_s, self._last = float(times[-1]), states[-1]

    def event(self, time_s: float, state: FloatArray) -> None:
        """Take in an event."""
        self._times.append(np.array([time_s]))
        self._states.append(state[None])
        self.events += 1
        self.time_s, self._last = time_s, state

    def course(self, *, is_complete: bool) -> Course:
        """What was recorded, the last state always among it."""
        time, states = np.concatenate(self._times), np.concatenate(self._states)
        if time[-1] != self.time_s:
            time, states = np.append(time, self.time_s), np.vstack([states, self._last])
        return Course(time, states, self.events, is_complete, self.steps)


def _first_event(
    switched: _Switched, x: FloatArray, u: FloatArray, mode: _Mode, h: float, broken: NDArray[np.bool_]
) -> tuple[float, int]:
    """Instant within the step at which the first condition reaches zero, and which it is."""
    from scipy.optimize import brentq

    first, which = math.inf, 0
    conditions = switched.conditions(u, mode)
    begin = conditions.at(x)
    path = switched.path(x, u, mode, h)
    for k in np.flatnonzero(broken):

        def guard(part: float, k: int = int(k)) -> float:
            return float(conditions.at(path(part))[k])

        # A condition that begins at zero belongs to the event just passed: look behind it.
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
            first, which = at, int(k)
    return first, which
