"""A phase: a stretch of motion that is one polynomial plus one sinusoid of time, hence smooth."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

_REST = 1e-9  # a final speed below this part of the peak speed is rounding


@dataclass(frozen=True)
class Phase:
    """Position ``Σ c_k τ^k + A sin(ω τ + φ)`` in the phase's own time τ.

    Positions count from the start of the segment: a phase starts where the one before it ended. Metres
    stand for radians on a rotary axis.

    Attributes
    ----------
    duration_s : float
        Length of the phase. [s]
    polynomial : tuple of float
        Coefficients ``c_0, c_1, …``; ``c_k`` in m/s^k. [-]
    sine_amplitude : float
        Amplitude A of the position. [m]
    sine_frequency_rad_s : float
        Angular frequency ω. [rad/s]
    sine_phase_rad : float
        Angle φ at the start of the phase. [rad]
    """

    duration_s: float
    polynomial: tuple[float, ...] = (0.0,)
    sine_amplitude: float = 0.0
    sine_frequency_rad_s: float = 0.0
    sine_phase_rad: float = 0.0

    def kinematics(self, tau: ArrayLike) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        """Position and its first three derivatives.

        Parameters
        ----------
        tau : array_like
            Phase time, 0 to `duration_s`, any shape. [s]

        Returns
        -------
        position, speed, acceleration, jerk : ndarray, shape of `tau`
            In m, m/s, m/s², m/s³, or with rad for m. [-]

        Examples
        --------
        >>> [float(part) for part in Phase(1.0, (0.0, 2.0, 3.0)).kinematics(1.0)]
        [5.0, 8.0, 6.0, 0.0]
        """
        t = np.asarray(tau, dtype=np.float64)
        c = self.polynomial
        x, v, a, j = (_horner(_derived(c, order), t) for order in range(4))
        if self.sine_amplitude:
            w = self.sine_frequency_rad_s
            angle = w * t + self.sine_phase_rad
            sine, cosine = self.sine_amplitude * np.sin(angle), self.sine_amplitude * np.cos(angle)
            x, v, a, j = x + sine, v + w * cosine, a - w**2 * sine, j - w**3 * cosine
        return x, v, a, j

    def end(self) -> tuple[float, float]:
        """Position [m] and speed [m/s] at the end of the phase."""
        x, v, _, _ = self.kinematics(self.duration_s)
        return float(x), float(v)

    def scaled(self, displacement: float, duration_s: float) -> Phase:
        """Stretch the phase: position times `displacement` and time times `duration_s`.

        Parameters
        ----------
        displacement : float
            Factor on position, signed. [-]
        duration_s : float
            Factor on time. [-]

        Returns
        -------
        Phase
            Speeds change by ``displacement / duration_s`` and so on. [-]
        """
        return Phase(
            self.duration_s * duration_s,
            tuple(c * displacement / duration_s**k for k, c in enumerate(self.polynomial)),
            self.sine_amplitude * displacement,
            self.sine_frequency_rad_s / duration_s,
            self.sine_phase_rad,
        )


def _derived(coefficients: tuple[float, ...], order: int) -> list[float]:
    return [math.perm(k, order) * c for k, c in enumerate(coefficients)][order:]


def _horner(coefficients: list[float], t: FloatArray) -> FloatArray:
    value = np.zeros_like(t)
    for c in reversed(coefficients):
        value = value * t + c
    return value


def constant_jerk_phases(
    pieces: Iterable[tuple[float, float, float]], start_speed: float = 0.0
) -> tuple[Phase, ...]:
    """Phases of constant jerk, joined in position and speed.

    Parameters
    ----------
    pieces : iterable of (float, float, float)
        Duration [s], acceleration at the start [m/s²] and jerk [m/s³] of each phase; durations of zero are
        left out. [-]
    start_speed : float
        Speed at the start of the first phase. [m/s]

    Returns
    -------
    tuple of Phase
        Starting at position zero. [-]

    Examples
    --------
    >>> up, down = constant_jerk_phases([(1.0, 2.0, 0.0), (1.0, -2.0, 0.0)])
    >>> up.end(), down.end()
    ((1.0, 2.0), (2.0, 0.0))
    """
    phases, x, v = [], 0.0, start_speed
    for duration, a, j in pieces:
        if duration == 0.0:
            continue
        full = (x, v, a / 2.0, j / 6.0)
        phases.append(Phase(duration, full if j else full[: 3 if a else 2]))
        x, v = phases[-1].end()
    return tuple(phases)


def sine_acceleration_phases(
    pieces: Iterable[tuple[float, float, float, float]],
) -> tuple[Phase, ...]:
    """Phases of sinusoidal or constant acceleration from rest, joined in position and speed.

    Parameters
    ----------
    pieces : iterable of (float, float, float, float)
        Duration [s], amplitude [m/s²], angular frequency [rad/s] and starting angle [rad] of the
        acceleration ``amplitude · sin(ω τ + φ)``; frequency zero stands for constant acceleration. [-]

    Returns
    -------
    tuple of Phase
        Starting at position zero and at rest. [-]
    """
    phases, x, v = [], 0.0, 0.0
    for duration, a, w, p in pieces:
        if w == 0.0:
            phase = Phase(duration, (x, v, a * math.sin(p) / 2.0))
        else:
            c0, c1 = x + a / w**2 * math.sin(p), v + a / w * math.cos(p)
            phase = Phase(duration, (c0, c1), -a / w**2, w, p)
        phases.append(phase)
        x, v = phase.end()
    return tuple(phases)


def speed_after(phases: tuple[Phase, ...]) -> float:
    """Speed at which a segment hands over to the next one.

    Parameters
    ----------
    phases : tuple of Phase
        The segment, as planned. [-]

    Returns
    -------
    float
        Final speed; exactly zero where only rounding is left of it. [m/s]
    """
    if not phases:
        return 0.0
    peak = max(float(np.max(np.abs(p.kinematics(np.linspace(0.0, p.duration_s, 9))[1]))) for p in phases)
    final = phases[-1].end()[1]
    return final if abs(final) > _REST * peak else 0.0


def position_range(phases: tuple[Phase, ...]) -> tuple[float, float]:
    """Lowest and highest position of a segment.

    Parameters
    ----------
    phases : tuple of Phase
        The segment, as planned. [-]

    Returns
    -------
    low, high : float
        From the start of the segment; zero and zero at rest. [m]

    Notes
    -----
    Extremes lie at ends of phases or where the speed changes sign, found on a grid and refined by bisection.
    """
    lowest = highest = 0.0
    for phase in phases:
        parts = (
            16 + 8 * int(abs(phase.sine_frequency_rad_s) * phase.duration_s) if phase.sine_amplitude else 64
        )
        tau = np.linspace(0.0, phase.duration_s, parts + 1)
        v = phase.kinematics(tau)[1]
        turns = np.flatnonzero(v[:-1] * v[1:] < 0.0)
        low, high, rising = tau[turns], tau[turns + 1], v[turns] < 0.0
        for _ in range(60):
            middle = 0.5 * (low + high)
            before = (phase.kinematics(middle)[1] < 0.0) == rising
            low, high = np.where(before, middle, low), np.where(before, high, middle)
        x = phase.kinematics(np.concatenate([tau, low]))[0]
        lowest, highest = min(lowest, float(x.min())), max(highest, float(x.max()))
    return lowest, highest
