"""Moves that start and end at any speed, with limits of their own for speeding up and slowing down.

A move goes from its start speed to one cruise speed and on to its end speed; each change of speed is the
fastest stage that the limits allow: constant acceleration, or jerk-limited with or without a stretch of
constant acceleration. Everything counts along the direction of travel.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from actuator_sizing.core.phases import Phase, constant_jerk_phases

_NOTHING = 1e-12  # a cruise shorter than this part of the move is rounding
_SCAN = 256  # cruise speeds tried before a duration is said to be out of reach


@dataclass(frozen=True)
class Blend:
    """Limits and ends of a move along its direction of travel.

    Attributes
    ----------
    distance : float
        Length of the move, positive. [m]
    start_speed, end_speed : float
        Along the direction of travel, zero or positive. [m/s]
    speed_max : float
        Limit; infinite for none. [m/s]
    acceleration_max, deceleration_max : float
        Limits while speeding up and slowing down; infinite for none where jerk is limited. [m/s²]
    jerk_max : float
        Limit; infinite for acceleration that jumps. [m/s³]
    """

    distance: float
    start_speed: float
    end_speed: float
    speed_max: float = math.inf
    acceleration_max: float = math.inf
    deceleration_max: float = math.inf
    jerk_max: float = math.inf

    def stage(self, begin: float, end: float) -> tuple[float, float]:
        """Jerk ramp and whole length of the fastest change of speed.

        Parameters
        ----------
        begin, end : float
            Speeds. [m/s]

        Returns
        -------
        ramp, duration : float
            Length of each jerk ramp and of the whole stage. [s]

        Notes
        -----
        ``|Δv|/a + a/j`` where the acceleration limit is reached, else ``2 √(|Δv|/j)``; from first principles.

        Examples
        --------
        >>> Blend(10.0, 1.0, 0.0, 5.0, 10.0, 10.0, 30.0).stage(1.0, 5.0)
        (0.3333, 0.7333)
        """
        dv, j = abs(end - begin), self.jerk_max
        a = self.acceleration_max if end > begin else self.deceleration_max
        if dv == 0.0:
            return 0.0, 0.0
        if math.isinf(j):
            return 0.0, dv / a
        ramp = math.sqrt(dv / j)
        if ramp * j <= a:
            return ramp, 2.0 * ramp
        return a / j, dv / a + a / j

    def stage_distance(self, begin: float, end: float) -> float:
        """Distance of the fastest change of speed: mean speed times its length. [m]"""
        return 0.5 * (begin + end) * self.stage(begin, end)[1]

    @property
    def shortest_distance(self) -> float:
        """Distance of the direct change from start to end speed; no move is shorter. [m]"""
        return self.stage_distance(self.start_speed, self.end_speed)

    def cruise_distance(self, cruise_speed: float) -> float:
        """Distance left for the cruise; negative where the two stages do not fit. [m]"""
        v = cruise_speed
        return (
            self.distance - self.stage_distance(self.start_speed, v) - self.stage_distance(v, self.end_speed)
        )

    def duration(self, cruise_speed: float) -> float:
        """Time of the move with this cruise speed. [s]"""
        v = cruise_speed
        cruise = self.cruise_distance(v)
        stages = self.stage(self.start_speed, v)[1] + self.stage(v, self.end_speed)[1]
        return stages + (max(cruise, 0.0) / v if v > 0.0 else (0.0 if cruise <= 0.0 else math.inf))

    def fastest_cruise(self) -> float:
        """Cruise speed of the fastest move: the limit, or the one that leaves no cruise.

        Returns
        -------
        float
            Speed. [m/s]

        Notes
        -----
        The two stages lengthen with the cruise speed, so that one speed fits them exactly to the distance.
        """
        low = max(self.start_speed, self.end_speed)
        high = self.speed_max
        if math.isinf(high):
            high = max(low, 1e-150)
            while self.cruise_distance(high) > 0.0:
                high *= 2.0
        if self.cruise_distance(high) >= 0.0:
            return high
        return _root(self.cruise_distance, low, high)

    def cruise_for(self, duration_s: float) -> float | None:
        """Cruise speed with which the move takes a given time.

        Parameters
        ----------
        duration_s : float
            At least the shortest duration. [s]

        Returns
        -------
        float or None
            Fastest such speed; None where no speed above zero makes the move last that long. [m/s]
        """
        upper = self.fastest_cruise()
        last, last_gap = upper, self.duration(upper) - duration_s
        if abs(last_gap) <= 1e-9 * duration_s:
            return upper
        for part in _falling_parts():
            v = part * upper
            if self.cruise_distance(v) < -_NOTHING * self.distance:
                last_gap = math.inf  # the two stages do not fit: a gap between two regimes
                continue
            gap = self.duration(v) - duration_s
            if last_gap <= 0.0 <= gap:
                return _root(lambda speed: self.duration(speed) - duration_s, last, v)
            last, last_gap = v, gap
        return None

    def phases(self, cruise_speed: float, sign: float) -> tuple[Phase, ...]:
        """Phases of the move.

        Parameters
        ----------
        cruise_speed : float
            Along the direction of travel. [m/s]
        sign : float
            Direction of travel, ±1. [-]

        Returns
        -------
        tuple of Phase
            From position zero to the signed distance. [-]
        """
        v = cruise_speed
        cruise_s = max(self.cruise_distance(v), 0.0) / v if v > 0.0 else 0.0
        pieces = self._stage_pieces(self.start_speed, v, sign)
        if cruise_s * v > _NOTHING * self.distance:
            pieces.append((cruise_s, 0.0, 0.0))
        pieces += self._stage_pieces(v, self.end_speed, sign)
        return constant_jerk_phases(pieces, start_speed=sign * self.start_speed)

    def _stage_pieces(self, begin: float, end: float, sign: float) -> list[tuple[float, float, float]]:
        ramp, duration = self.stage(begin, end)
        if duration <= 0.0 or abs(end - begin) <= _NOTHING * max(begin, end):
            return []
        change = sign * (end - begin)
        if ramp == 0.0:
            return [(duration, change / duration, 0.0)]
        a = change / (duration - ramp)
        hold = duration - 2.0 * ramp
        middle = [(hold, a, 0.0)] if hold > _NOTHING * duration else []
        return [(ramp, 0.0, a / ramp), *middle, (ramp, a, -a / ramp)]


def shared_blend(
    displacement: float,
    start_speed: float,
    end_speed: float,
    duration_s: float,
    shares: tuple[float, float, float],
) -> tuple[Phase, ...]:
    """Move of a given time whose two changes of speed take given parts of it.

    Parameters
    ----------
    displacement : float
        Signed distance. [m]
    start_speed, end_speed : float
        Signed. [m/s]
    duration_s : float
        Time of the move. [s]
    shares : tuple of float
        Parts of the time for the first and the last change of speed, and the part of each of these that each
        of its jerk ramps takes (0: acceleration jumps). [-]

    Returns
    -------
    tuple of Phase
        From position zero. [-]

    Notes
    -----
    Distance is the area under the speed: ``v = (h/T − (k_a v_0 + k_d v_1)/2) / (1 − (k_a + k_d)/2)``.

    Examples
    --------
    >>> [p.duration_s for p in shared_blend(1.0, 0.5, 0.5, 2.0, (0.25, 0.25, 0.0))]
    [2.0]
    """
    k_a, k_d, s = shares
    T = duration_s
    v = (displacement / T - 0.5 * (k_a * start_speed + k_d * end_speed)) / (1.0 - 0.5 * (k_a + k_d))
    scale = max(abs(v), abs(start_speed), abs(end_speed))

    def stage(length: float, change: float) -> list[tuple[float, float, float]]:
        if abs(change) <= 1e-14 * scale:
            return [(length, 0.0, 0.0)]
        if s == 0.0:
            return [(length, change / length, 0.0)]
        a, hold = change / (length * (1.0 - s)), 1.0 - 2.0 * s
        middle = [(hold * length, a, 0.0)] if hold > 1e-9 else []
        return [(s * length, 0.0, a / (s * length)), *middle, (s * length, a, -a / (s * length))]

    cruise = (1.0 - k_a - k_d) * T
    pieces = [*stage(k_a * T, v - start_speed), (cruise if cruise > 1e-9 * T else 0.0, 0.0, 0.0)]
    joined: list[tuple[float, float, float]] = []
    for piece in [*pieces, *stage(k_d * T, end_speed - v)]:
        if joined and piece[1:] == joined[-1][1:] == (0.0, 0.0):
            joined[-1] = (joined[-1][0] + piece[0], 0.0, 0.0)
        else:
            joined.append(piece)
    return constant_jerk_phases(joined, start_speed=start_speed)


def _falling_parts() -> Iterator[float]:
    """Parts of the fastest cruise speed: even steps where the regimes change, then towards zero."""
    yield from (1.0 - k / _SCAN for k in range(1, _SCAN))
    yield from (10.0**-k / _SCAN for k in range(1, 10))


def _root(function: Callable[[float], float], one: float, other: float) -> float:
    """Root between two points of unlike sign, by bisection to rounding."""
    f_one = function(one)
    if f_one == 0.0:
        return one
    for _ in range(200):
        middle = 0.5 * (one + other)
        if middle in (one, other):
            break
        f_middle = function(middle)
        if (f_middle > 0.0) == (f_one > 0.0) and f_middle != 0.0:
            one = middle
        else:
            other = middle
    return other
