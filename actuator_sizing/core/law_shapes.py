"""Motion laws from rest to rest, normalised: distance 1 in time 1."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from actuator_sizing.core.phases import Phase, constant_jerk_phases, sine_acceleration_phases

SHORTEST_SHARE = 1e-9  # a phase shorter than this part of the move is rounding, or cannot be told from a jump


@dataclass(frozen=True)
class Shape:
    """A normalised law with its largest speed, acceleration and jerk.

    Attributes
    ----------
    phases : tuple of Phase
        From position 0 to 1 in time 0 to 1. [-]
    peak_speed, peak_acceleration, peak_jerk : float
        Coefficients C_v, C_a, C_j: the largest magnitudes; infinite jerk where acceleration jumps. [-]
    """

    phases: tuple[Phase, ...]
    peak_speed: float
    peak_acceleration: float
    peak_jerk: float

    def shortest_duration(
        self, distance: float, speed_max: float, acceleration_max: float, jerk_max: float
    ) -> float:
        """Shortest time that keeps the limits.

        Parameters
        ----------
        distance : float
            Length of the move, positive. [m]
        speed_max : float
            Limit; infinite for none. [m/s]
        acceleration_max : float
            Limit; infinite for none. [m/s²]
        jerk_max : float
            Limit; infinite for none. [m/s³]

        Returns
        -------
        float
            ``max(C_v h/v, √(C_a h/a), ∛(C_j h/j))``; zero without limits. [s]
        """
        return max(self.durations(distance, speed_max, acceleration_max, jerk_max))

    def durations(
        self, distance: float, speed_max: float, acceleration_max: float, jerk_max: float
    ) -> tuple[float, float, float]:
        """Shortest time for each limit by itself, arguments as in `shortest_duration` [s]."""
        h = distance
        by_jerk = 0.0 if math.isinf(jerk_max) else math.cbrt(self.peak_jerk * h / jerk_max)
        return (
            self.peak_speed * h / speed_max,
            math.sqrt(self.peak_acceleration * h / acceleration_max),
            by_jerk,
        )

    def spread(self, displacement: float, duration_s: float) -> tuple[Phase, ...]:
        """Spread the law over a signed displacement [m] in a duration [s]."""
        end = self.phases[-1].end()[0]  # 1 but for rounding
        return tuple(phase.scaled(displacement / end, duration_s) for phase in self.phases)


def trapezoid(acceleration_share: float, deceleration_share: float) -> Shape:
    """Constant acceleration, cruise, constant deceleration; triangular when the shares add up to 1.

    Parameters
    ----------
    acceleration_share, deceleration_share : float
        Parts of the duration, positive, together at most 1. [-]

    Returns
    -------
    Shape
        ``C_v = 1/(1 − (k_a + k_d)/2)``, ``C_a = C_v / min(k_a, k_d)``; from first principles. [-]
    """
    k_a, k_d = acceleration_share, deceleration_share
    peak = 1.0 / (1.0 - 0.5 * (k_a + k_d))
    phases = constant_jerk_phases(
        [(k_a, peak / k_a, 0.0), (_cruise(k_a, k_d), 0.0, 0.0), (k_d, -peak / k_d, 0.0)]
    )
    return Shape(phases, peak, peak / min(k_a, k_d), math.inf)


def double_s(acceleration_share: float, deceleration_share: float, jerk_share: float) -> Shape:
    """Seven phases of constant jerk; fewer when there is no cruise or no constant acceleration.

    Parameters
    ----------
    acceleration_share, deceleration_share : float
        Parts of the duration spent speeding up and slowing down, positive, together at most 1. [-]
    jerk_share : float
        Part of each of them that each of its two jerk ramps takes, above 0 and at most 1/2. [-]

    Returns
    -------
    Shape
        Peak acceleration of a stage of share k with ramps of share s: ``C_v / (k (1 − s))``, jerk
        ``C_v / (k² s (1 − s))``; from first principles. [-]
    """
    k_a, k_d, s = acceleration_share, deceleration_share, jerk_share
    peak = 1.0 / (1.0 - 0.5 * (k_a + k_d))
    hold = 1.0 - 2.0 * s if 1.0 - 2.0 * s > SHORTEST_SHARE else 0.0

    def stage(k: float, sign: float) -> list[tuple[float, float, float]]:
        a, j = sign * peak / (k * (1.0 - s)), sign * peak / (k**2 * s * (1.0 - s))
        return [(s * k, 0.0, j), (hold * k, a, 0.0), (s * k, a, -j)]

    phases = constant_jerk_phases([*stage(k_a, 1.0), (_cruise(k_a, k_d), 0.0, 0.0), *stage(k_d, -1.0)])
    k = min(k_a, k_d)
    return Shape(phases, peak, peak / (k * (1.0 - s)), peak / (k**2 * s * (1.0 - s)))


def _cruise(k_a: float, k_d: float) -> float:
    share = 1.0 - k_a - k_d
    return share if share > SHORTEST_SHARE else 0.0


def polynomial_345() -> Shape:
    """``10 t³ − 15 t⁴ + 6 t⁵`` (VDI 2143 part 1, 1980, quoted from memory) [-]."""
    return Shape((Phase(1.0, (0.0, 0.0, 0.0, 10.0, -15.0, 6.0)),), 15.0 / 8.0, 10.0 / math.sqrt(3.0), 60.0)


def polynomial_4567() -> Shape:
    """``35 t⁴ − 84 t⁵ + 70 t⁶ − 20 t⁷``: jerk too is zero at the ends; coefficients follow from that [-]."""
    phase = Phase(1.0, (0.0, 0.0, 0.0, 0.0, 35.0, -84.0, 70.0, -20.0))
    return Shape((phase,), 35.0 / 16.0, 84.0 * math.sqrt(5.0) / 25.0, 52.5)


def cycloidal() -> Shape:
    """One period of sine acceleration: ``t − sin(2π t)/(2π)`` [-]."""
    w = 2.0 * math.pi
    return Shape((Phase(1.0, (0.0, 1.0), -1.0 / w, w, 0.0),), 2.0, w, w * w)


def simple_harmonic() -> Shape:
    """Half a period of cosine acceleration: ``(1 − cos(π t))/2``; acceleration jumps at both ends [-]."""
    w = math.pi
    phase = Phase(1.0, (0.5,), -0.5, w, 0.5 * math.pi)
    return Shape((phase,), 0.5 * w, 0.5 * w * w, math.inf)


def modified_sine() -> Shape:
    """Quarter sine of period 1/2, half sine of period 3/2, quarter sine of period 1/2.

    Returns
    -------
    Shape
        ``C_v = 4π/(4 + π)``, ``C_a = π C_v``, ``C_j = 4π C_a``. [-]

    Notes
    -----
    Norton, Cam Design and Manufacturing Handbook, 2nd ed. 2009, family of sine–constant–cosine
    accelerations (quoted from memory); the coefficients follow from the acceleration by integration.
    """
    w, q = 4.0 * math.pi, 0.5 * math.pi
    peak = math.pi * w / (4.0 + math.pi)
    phases = sine_acceleration_phases(
        [(1 / 8, peak, w, 0.0), (3 / 4, peak, w / 3.0, q), (1 / 8, peak, w, 3.0 * q)]
    )
    return Shape(phases, w / (4.0 + math.pi), peak, w * peak)


def modified_trapezoid() -> Shape:
    """Trapezoid of acceleration whose edges are parts of a sine of period 1/2.

    Returns
    -------
    Shape
        ``C_v = 2``, ``C_a = 8π/(2 + π)``, ``C_j = 4π C_a``. [-]

    Notes
    -----
    Source as in `modified_sine`.
    """
    w, q = 4.0 * math.pi, 0.5 * math.pi
    peak = 2.0 * w / (2.0 + math.pi)
    phases = sine_acceleration_phases(
        [
            (1 / 8, peak, w, 0.0),
            (1 / 4, peak, 0.0, q),
            (1 / 4, peak, w, q),
            (1 / 4, peak, 0.0, -q),
            (1 / 8, peak, w, -q),
        ]
    )
    return Shape(phases, 2.0, peak, w * peak)


FIXED: dict[str, Callable[[], Shape]] = {
    "3-4-5 polynomial": polynomial_345,
    "4-5-6-7 polynomial": polynomial_4567,
    "cycloidal": cycloidal,
    "modified sine": modified_sine,
    "modified trapezoid": modified_trapezoid,
    "simple harmonic": simple_harmonic,
}


def fastest_trapezoid(distance: float, speed_max: float, acceleration_max: float) -> Shape:
    """Shape of the fastest trapezoid under limits.

    Parameters
    ----------
    distance : float
        Length of the move, positive. [m]
    speed_max : float
        Limit; infinite for none. [m/s]
    acceleration_max : float
        Limit, finite. [m/s²]

    Returns
    -------
    Shape
        Triangular when the speed limit is not reached. [-]

    Examples
    --------
    >>> fastest_trapezoid(1.0, 1.0, 4.0).peak_speed  # 0.25 s up, 0.75 s cruise, 0.25 s down
    1.25
    """
    ramp = speed_max / acceleration_max
    share = 0.5 if math.isinf(ramp) else ramp / (distance / speed_max + ramp)
    share = 0.5 if share > 0.5 * (1.0 - SHORTEST_SHARE) else share
    return trapezoid(share, share)


def fastest_double_s(distance: float, speed_max: float, acceleration_max: float, jerk_max: float) -> Shape:
    """Shape of the fastest jerk-limited profile under limits.

    Parameters
    ----------
    distance : float
        Length of the move, positive. [m]
    speed_max : float
        Limit; infinite for none. [m/s]
    acceleration_max : float
        Limit; infinite for none. [m/s²]
    jerk_max : float
        Limit, finite. [m/s³]

    Returns
    -------
    Shape
        With cruise and constant acceleration as far as the limits are reached. [-]

    Notes
    -----
    Regimes as in Biagiotti & Melchiorri, Trajectory Planning for Automatic Machines and Robots (Springer
    2008), section 3.4 (quoted from memory), for equal limits both ways; rederived here.
    """
    h, v, a, j = distance, speed_max, acceleration_max, jerk_max
    ramp, stage = _stage_to_speed(v, a, j)
    cruise = h / v - stage
    if cruise <= SHORTEST_SHARE * stage:  # the speed limit is not reached
        ramp = a / j
        stage = math.inf if math.isinf(ramp) else 0.5 * ramp + math.sqrt(0.25 * ramp**2 + h / a)
        if stage < 2.0 * ramp or math.isinf(ramp):  # nor is the acceleration limit
            ramp = math.cbrt(0.5 * h / j)
            stage = 2.0 * ramp
        cruise = 0.0
    share = 0.5 if cruise == 0.0 else stage / (2.0 * stage + cruise)
    return double_s(share, share, min(ramp / stage, 0.5))


def _stage_to_speed(v: float, a: float, j: float) -> tuple[float, float]:
    """Length of one jerk ramp and of the whole stage that reaches speed v; infinite without limit."""
    if math.isinf(v):
        return math.inf, math.inf
    ramp = math.sqrt(v / j)
    if ramp * j <= a:
        return ramp, 2.0 * ramp
    return a / j, a / j + v / a
