"""The sampled cascade over a whole stretch at once, as long as neither friction nor a limit switches.

While directions of slip, the flank that carries and the absence of limits stay as they are, one sample of
`core.cascade_kernel` is an affine map, and commands that are polynomials in time are the states of a second
linear system. Powers of the joint map give every sample of a stretch by products of matrices: the closed form of
the loop, equal to it up to rounding at a small part of its cost. Every sample is held against the conditions of
its mode; where one fails the stretch ends, and the next begins in the mode that the loop would take.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.cascade_kernel import (
    CURRENT,
    LOAD_SPEED,
    MOTOR_ANGLE,
    MOTOR_SPEED,
    RECORDED,
    TWIST,
)
from actuator_sizing.core.control import LoopSettings
from actuator_sizing.core.linear_loop import INPUTS, OneSample, one_sample
from actuator_sizing.core.plant import Plant

FloatArray = NDArray[np.float64]

_MOST_BLOCK = 256
#: Outputs after the recorded ones: voltage asked for, command minus load, then what pulls at each mass.
_ASKED, LAG, _PULLS = len(RECORDED), len(RECORDED) + 1, len(RECORDED) + 2
_REFERENCE = RECORDED.index("current_reference")


@dataclass(frozen=True)
class Mode:
    """Which flank carries (0: none) and which way each mass slips (0: it sticks), the load first."""

    flank: int
    slips: tuple[int, ...]


@dataclass(frozen=True)
class _Friction:
    """Coulomb friction on one mass: the state that it stops, and what a torque does to all states in a sample."""

    row: int
    column: FloatArray
    level_nm: float

    @property
    def reach(self) -> float:
        """Change of speed within a sample at the full level."""
        return self.level_nm * float(self.column[self.row])


@dataclass(frozen=True)
class _Map:
    """One sample in one mode, ``x' = A x + B u + c`` and ``y = C x + D u + e``."""

    A: FloatArray
    B: FloatArray
    c: FloatArray
    C: FloatArray
    D: FloatArray
    e: FloatArray


class Room:
    """Memory that is used over and over: on many machines fresh memory costs more than what is put into it."""

    def __init__(self) -> None:
        """Start without any."""
        self._kept = np.empty(0)

    def take(self, shape: tuple[int, ...]) -> FloatArray:
        """Give out memory whose content is arbitrary.

        Parameters
        ----------
        shape : tuple of int
            Wanted shape. [-]
        """
        size = math.prod(shape)
        if len(self._kept) < size:
            self._kept = np.empty(size)
        return self._kept[:size].reshape(shape)


class Stretches:
    """A plant under the cascade, in each of its modes."""

    def __init__(self, plant: Plant, settings: LoopSettings) -> None:
        """Prepare; maps are made when their mode first occurs.

        Parameters
        ----------
        plant : Plant
            What is moved. [-]
        settings : LoopSettings
            The loops, with an ideal encoder: one with steps changes its mode with every count. [-]
        """
        self.plant, self.settings = plant, settings
        self.gap_rad = 0.0 if plant.is_rigid else 0.5 * plant.backlash_rad
        self._samples: dict[bool, OneSample] = {}
        self._maps: dict[Mode, _Map] = {}
        self.alive = self._sample(True).alive

    def _sample(self, engaged: bool) -> OneSample:
        if engaged not in self._samples:
            self._samples[engaged] = one_sample(self.plant, self.settings, engaged=engaged)
        return self._samples[engaged]

    def _frictions(self, engaged: bool) -> tuple[_Friction, ...]:
        """In the order in which the loop lets them act."""
        sample, plant = self._sample(engaged), self.plant
        load = sample.B[:, INPUTS - 1]
        place = {state: k for k, state in enumerate(self.alive)}
        if plant.is_rigid:
            both = plant.motor_coulomb_nm + plant.load_coulomb_nm
            found = [_Friction(place[MOTOR_SPEED], load, both)]
        else:
            found = [
                _Friction(place[LOAD_SPEED], load, plant.load_coulomb_nm),
                _Friction(place[MOTOR_SPEED], sample.motor_torque, plant.motor_coulomb_nm),
            ]
        return tuple(friction for friction in found if friction.level_nm > 0.0)

    def map(self, mode: Mode) -> _Map:
        """Affine map of one sample in a mode.

        Parameters
        ----------
        mode : Mode
            Where the plant is.
        """
        if mode not in self._maps:
            self._maps[mode] = self._made(mode)
        return self._maps[mode]

    def _made(self, mode: Mode) -> _Map:
        engaged = mode.flank != 0
        sample = self._sample(engaged)
        place = {state: k for k, state in enumerate(self.alive)}
        A, B, c = sample.A.copy(), sample.B.copy(), np.zeros(len(sample.A))
        if engaged and self.gap_rad > 0.0:
            # The spring counts its twist from the flank.
            shift = np.zeros(len(A))
            shift[place[TWIST]] = mode.flank * self.gap_rad
            c = shift - A @ shift
        lag, angle = np.zeros(len(A)), np.zeros(INPUTS)
        lag[place[MOTOR_ANGLE]], angle[0] = -1.0, 1.0
        if TWIST in place:
            lag[place[TWIST]] = 1.0
        C, D, e = [*sample.C, lag], [*sample.D, angle], [0.0] * (len(sample.C) + 1)
        for friction, slip in zip(self._frictions(engaged), mode.slips, strict=True):
            row, column = friction.row, friction.column
            C.append(A[row].copy())
            D.append(B[row].copy())
            e.append(float(c[row]))
            if slip:
                c = c - slip * friction.level_nm * column
            else:  # the torque that stops it within the sample
                part = column / column[row]
                A, B, c = A - np.outer(part, A[row]), B - np.outer(part, B[row]), c - part * c[row]
                A[row], B[row], c[row] = 0.0, 0.0, 0.0
        return _Map(A, B, c, np.array(C), np.array(D), np.array(e))

    def mode_at(self, x: FloatArray, u: FloatArray) -> Mode:
        """Mode that the loop takes for one sample, limits aside.

        Parameters
        ----------
        x : ndarray, shape (n,)
            States. [-]
        u : ndarray, shape (4,)
            Inputs. [-]
        """
        flank = 1
        if self.gap_rad > 0.0:
            twist = float(x[self.alive.index(TWIST)])
            flank = 0 if abs(twist) < self.gap_rad else int(math.copysign(1.0, twist))
        slips: tuple[int, ...] = ()
        for friction in self._frictions(flank != 0):
            # A friction that comes later does not change what pulls at this one.
            trial = self.map(Mode(flank, (*slips, *(0,) * (len(self._frictions(flank != 0)) - len(slips)))))
            k = _PULLS + len(slips)
            pull = float(trial.C[k] @ x + trial.D[k] @ u + trial.e[k])
            slips = (*slips, 0 if abs(pull) <= friction.reach else int(math.copysign(1.0, pull)))
        return Mode(flank, slips)

    def holds(self, mode: Mode, y: FloatArray) -> NDArray[np.bool_]:
        """Where the outputs agree with the conditions of a mode and with no limit reached.

        Parameters
        ----------
        mode : Mode
            Assumed mode.
        y : ndarray, shape (q, m)
            Outputs at m samples. [-]

        Returns
        -------
        ndarray of bool, shape (m,)
        """
        s = self.settings
        good = np.ones(y.shape[1], dtype=bool)
        if s.current_limit_a < math.inf:
            good &= np.abs(y[_REFERENCE]) <= s.current_limit_a
        if s.voltage_limit_v < math.inf:
            if s.reactance_ohm_s > 0.0:
                cross = s.reactance_ohm_s * y[MOTOR_SPEED] * y[CURRENT]
                good &= y[_ASKED] ** 2 + cross**2 <= s.voltage_limit_v**2
            else:
                good &= np.abs(y[_ASKED]) <= s.voltage_limit_v
        if self.gap_rad > 0.0:
            twist = y[TWIST]
            good &= mode.flank * twist >= self.gap_rad if mode.flank else np.abs(twist) < self.gap_rad
        for k, (friction, slip) in enumerate(
            zip(self._frictions(mode.flank != 0), mode.slips, strict=True), start=_PULLS
        ):
            good &= slip * y[k] >= friction.reach if slip else np.abs(y[k]) <= friction.reach
        return good

    @property
    def can_switch(self) -> bool:
        """Whether there is more than one mode."""
        return self.gap_rad > 0.0 or bool(self._frictions(True))

    def stretch(self, mode: Mode, series: FloatArray, step: float, count: int) -> Stretch:
        """Prepare a stretch in one mode.

        Parameters
        ----------
        mode : Mode
            The mode.
        series : ndarray, shape (4, K)
            Inputs as Legendre series in ξ.
        step : float
            ξ from one sample to the next. [-]
        count : int
            How many samples at most. [-]
        """
        return Stretch(self.map(mode), series, step, count)


class Stretch:
    """Samples of one mode under commands that are one polynomial.

    Its joint state is that of the loop followed by the Legendre polynomials at ξ.
    """

    def __init__(self, one: _Map, series: FloatArray, step: float, count: int) -> None:
        """Build the powers of the joint map.

        Parameters
        ----------
        one : _Map
            One sample. [-]
        series : ndarray, shape (4, K)
            Inputs as Legendre series in ξ. [-]
        step : float
            ξ from one sample to the next. [-]
        count : int
            How many samples at most. [-]
        """
        n, K = len(one.A), series.shape[1]
        joint = np.zeros((n + K, n + K))
        joint[:n, :n], joint[:n, n:] = one.A, one.B @ series
        joint[:n, n] += one.c
        joint[n:, n:] = shift_matrix(K, step)
        output = np.concatenate([one.C, one.D @ series], axis=1)
        output[:, n] += one.e
        block = 1
        outputs, power, self._powers = output[:, None, :], joint, [joint]
        while block < _MOST_BLOCK and block * block < 4 * count:
            outputs = np.concatenate([outputs, outputs @ power], axis=1)
            power = power @ power
            self._powers.append(power)
            block *= 2
        self._n, self._step, self._block, self._jump = n, step, block, np.ascontiguousarray(power[:n])
        self._outputs = np.ascontiguousarray(outputs.transpose(0, 2, 1))  # output, joint state, sample

    def run(self, joint: FloatArray, start: float, count: int, room: Room) -> tuple[FloatArray, FloatArray]:
        """Outputs of samples in a row.

        Parameters
        ----------
        joint : ndarray, shape (n + K,)
            Joint state at the first of them. [-]
        start : float
            ξ at the first of them. [-]
        count : int
            How many are wanted. [-]
        room : Room
            Where the outputs go.

        Returns
        -------
        y : ndarray, shape (q, count)
            Outputs; good until `room` is used again. [-]
        starts : ndarray, shape (blocks + 1, n + K)
            Joint state at the start of each block, for `at`. [-]
        """
        blocks, n = -(-count // self._block), self._n
        starts = np.empty((blocks + 1, len(joint)))
        # Taken from ξ itself: polynomials carried along by powers would gather rounding.
        at = np.asarray(start + self._step * self._block * np.arange(blocks + 1), dtype=float)
        starts[:, n:] = polynomials(at, len(joint) - n)
        starts[0, :n] = joint[:n]
        for k in range(blocks):
            np.dot(self._jump, starts[k], out=starts[k + 1, :n])
        y = np.matmul(starts[:-1], self._outputs, out=room.take((len(self._outputs), blocks, self._block)))
        return y.reshape(len(y), -1)[:, :count], starts

    def at(self, starts: FloatArray, sample: int) -> FloatArray:
        """Joint state before one sample of a run.

        Parameters
        ----------
        starts : ndarray, shape (blocks + 1, n + K)
            From `run`. [-]
        sample : int
            Counted from the start of the run; at most its length. [-]

        Returns
        -------
        ndarray, shape (n + K,)
        """
        k, left = divmod(sample, self._block)
        joint = starts[k]
        for bit, power in enumerate(self._powers):
            if left >> bit & 1:
                joint = power @ joint
        return np.asarray(joint)


def polynomials(at: FloatArray, terms: int) -> FloatArray:
    """Legendre polynomials by their recurrence.

    Parameters
    ----------
    at : ndarray, shape (m,)
        Arguments ξ. [-]
    terms : int
        How many polynomials. [-]

    Returns
    -------
    ndarray, shape (m, terms)
        Their values. [-]

    Examples
    --------
    >>> polynomials(np.array([0.5]), 3).tolist()
    [[1.0, 0.5, -0.125]]
    """
    values = np.empty((terms, len(at)))
    values[0] = 1.0
    if terms > 1:
        values[1] = at
    for k in range(1, terms - 1):
        values[k + 1] = ((2.0 * k + 1.0) * at * values[k] - k * values[k - 1]) / (k + 1.0)
    return values.T


@cache
def _nodes(terms: int) -> tuple[FloatArray, FloatArray]:
    """Points and the Legendre polynomials there."""
    points = np.cos(np.pi * (np.arange(terms) + 0.5) / terms)
    return points, polynomials(points, terms)


def shift_matrix(terms: int, step: float) -> FloatArray:
    """Matrix that turns Legendre polynomials at ξ into those at ξ + step.

    Parameters
    ----------
    terms : int
        How many polynomials. [-]
    step : float
        Shift. [-]

    Returns
    -------
    ndarray, shape (terms, terms)
        By interpolation, which is exact for polynomials. [-]

    Examples
    --------
    >>> shift_matrix(2, 0.5).tolist()
    [[1.0, 0.0], [0.5, 1.0]]
    """
    points, values = _nodes(terms)
    shifted = polynomials(points + step, terms)
    return np.tril(np.linalg.solve(values, shifted).T)
