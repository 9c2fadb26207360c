"""From cold to the periodic state: the course of a cycle, the warm-up, and when the limit is reached."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from actuator_sizing.core.thermal_cycle import (
    CycleMap,
    growth,
    moved,
    survey,
)
from actuator_sizing.core.thermal_kernel import (
    FLOATS,
    Coefficients,
    Steps,
    as_floats,
    coefficients,
    linearise,
    sub_steps,
)
from actuator_sizing.core.thermal_network import (
    FloatArray,
    HeatLoss,
    ThermalNetwork,
    known_candidates,
    select_candidates,
)
from actuator_sizing.core.thermal_periodic import solve_one
from actuator_sizing.core.thermal_walk import Walker, time_to_limit

#: Points of a warm-up, of which each costs one cycle; and steps within a cycle drawn one by one.
_POINTS = 90
_MOST_DRAWN_STEPS = 800
#: Share of the rise still missing where the drawn warm-up ends.
_END_MISSING = 0.01
#: A runaway without a limit is drawn up to here. [°C]
_END_OF_RUNAWAY_DEGC = 500.0


_Row = tuple[float, float, float, float, float]


@dataclass(frozen=True)
class TemperatureCourse:
    """Winding and housing of one candidate against time; each field has shape (n,).

    Attributes
    ----------
    time_s : ndarray
        Instants, ascending. [s]
    winding_degc, housing_degc : ndarray
        Temperatures at those instants; housing is NaN with one body. [°C]
    """

    time_s: FloatArray
    winding_degc: FloatArray
    housing_degc: FloatArray


@dataclass(frozen=True)
class WarmUp:
    """Warm-up of one candidate from both bodies at ambient; the arrays have shape (n,).

    Attributes
    ----------
    time_s : ndarray
        Instants, ascending: 0, then instants within cycles where there are few, else middles of cycles. [s]
    winding_degc, housing_degc : ndarray
        Temperatures: at those instants, or means over the cycle around them. [°C]
    winding_low_degc, winding_high_degc : ndarray
        Range of the winding within the cycle around the instant; equal to `winding_degc` where the points
        lie within cycles. [°C]
    time_to_limit_s : float
        From cold until the winding first reaches the limit; NaN if it never does. [s]
    is_runaway : bool
        Whether no periodic state exists; the course then ends past the limit.
    by_cycles : bool
        Whether the points stand for whole cycles.
    """

    time_s: FloatArray
    winding_degc: FloatArray
    housing_degc: FloatArray
    winding_low_degc: FloatArray
    winding_high_degc: FloatArray
    time_to_limit_s: float
    is_runaway: bool
    by_cycles: bool


def _single(
    network: ThermalNetwork, loss: HeatLoss, ambient_degc: float, candidate: int
) -> tuple[Coefficients, Steps, bool, bool]:
    """Plain floats of one candidate, whether its data suffice, whether it has a housing."""
    with np.errstate(all="ignore"):
        chosen = select_candidates(network, loss, np.array([candidate]))
        known = bool(known_candidates(*chosen)[0])
        k, steps = as_floats(coefficients(*chosen, ambient_degc), sub_steps(*chosen))
    return k, steps, known, bool(chosen[0].has_housing[0])


def _inside(
    k: Coefficients, steps: Steps, x1: float, x2: float, most: int
) -> list[tuple[float, float, float]]:
    """(time, winding, housing) within one cycle from a start, long steps divided; at most about `most`."""
    rate = max(k.winding_to_housing + k.winding_to_ambient, 1e-300)
    span = math.fsum(steps.duration)
    parts_left = max(most - len(steps.duration), 0)
    clock, points = 0.0, [(0.0, x1, x2)]
    for h, q, s1, s2, _ in zip(*steps, strict=True):
        at = linearise(k, FLOATS, x1, x2, q, s1, s2)
        parts = 1 + min(math.ceil(min(h * rate, 50.0) / 0.1), int(parts_left * h / span))
        for part in range(1, parts + 1):
            t = h * part / parts
            d1, d2 = moved(at, FLOATS, t)
            points.append((clock + t, x1 + d1, x2 + d2))
        clock, x1, x2 = clock + h, points[-1][1], points[-1][2]
    return points


def temperature_course(
    network: ThermalNetwork, loss: HeatLoss, ambient_degc: float, candidate: int = 0, points: int = 200
) -> TemperatureCourse | None:
    """Winding and housing over one cycle of the periodic steady state.

    Parameters
    ----------
    network, loss : ThermalNetwork, HeatLoss
        As for `periodic_state`.
    ambient_degc : float
        Temperature of the surroundings. [°C]
    candidate : int
        Row to follow. [-]
    points : int
        About how many points to draw; every piece border is among them. [-]

    Returns
    -------
    TemperatureCourse or None
        None where there is no equilibrium or data are missing.
    """
    k, steps, known, has_housing = _single(network, loss, ambient_degc, candidate)
    state = solve_one(k, steps)[1] if known else None
    if state is None:
        return None
    time, winding, housing = np.array(_inside(k, steps, *state, points)).T
    return TemperatureCourse(time, winding, housing if has_housing else np.full_like(housing, np.nan))


def run_course(
    network: ThermalNetwork,
    loss: HeatLoss,
    ambient_degc: float,
    winding_degc: float,
    housing_degc: float,
    points: int = 200,
) -> TemperatureCourse | None:
    """Winding and housing of one candidate over a single run from a given state.

    Parameters
    ----------
    network, loss : ThermalNetwork, HeatLoss
        As for `single_run`; the first candidate is followed.
    ambient_degc : float
        Temperature of the surroundings. [°C]
    winding_degc, housing_degc : float
        State at the start; a missing housing is taken at the winding's temperature. [°C]
    points : int
        About how many points to draw; every piece border is among them. [-]

    Returns
    -------
    TemperatureCourse or None
        None where data are missing.
    """
    k, steps, known, has_housing = _single(network, loss, ambient_degc, 0)
    if not known:
        return None
    start = winding_degc if math.isnan(housing_degc) else housing_degc
    time, winding, housing = np.array(_inside(k, steps, winding_degc, start, points)).T
    return TemperatureCourse(time, winding, housing if has_housing else np.full_like(housing, np.nan))


def temperatures_after(
    network: ThermalNetwork, loss: HeatLoss, ambient_degc: float, times_s: ArrayLike, candidate: int = 0
) -> TemperatureCourse | None:
    """Winding and housing at given times after a cold start, for comparison at commissioning.

    Parameters
    ----------
    network, loss : ThermalNetwork, HeatLoss
        As for `periodic_state`.
    ambient_degc : float
        Temperature of the surroundings and of both bodies at the start. [°C]
    times_s : array_like, shape (n,)
        Times after the start, ascending, e.g. 600, 1800 and 3600. [s]
    candidate : int
        Row to follow. [-]

    Returns
    -------
    TemperatureCourse or None
        At those times; None where data are missing. A runaway grows without bound.

    Notes
    -----
    Whole cycles are jumped by the affine continuation of one cycle: exact without magnet term, else in
    jumps of at most 2 K.
    """
    k, steps, known, has_housing = _single(network, loss, ambient_degc, candidate)
    if not known:
        return None
    walker = Walker(k, steps)
    times = np.atleast_1d(np.asarray(times_s, dtype=float))
    found = []
    for time in times.tolist():
        walker.go_to(int(time // walker.span))
        x1, x2, left = walker.x1, walker.x2, time - walker.cycle * walker.span
        for h, q, s1, s2, _ in zip(*steps, strict=True):
            t = min(h, max(left, 0.0))
            d1, d2 = moved(linearise(k, FLOATS, x1, x2, q, s1, s2), FLOATS, t)
            x1, x2, left = x1 + d1, x2 + d2, left - h
            if left <= 0.0:
                break
        found.append((x1, x2))
    winding, housing = np.array(found).T
    return TemperatureCourse(times, winding, housing if has_housing else np.full_like(housing, np.nan))


def warm_up(
    network: ThermalNetwork, loss: HeatLoss, ambient_degc: float, limit_degc: float, candidate: int = 0
) -> WarmUp | None:
    """Warm-up of one candidate from cold, both bodies at ambient, starting with the first segment.

    Parameters
    ----------
    network, loss : ThermalNetwork, HeatLoss
        As for `periodic_state`.
    ambient_degc : float
        Temperature of the surroundings and of both bodies at the start. [°C]
    limit_degc : float
        Winding limit; NaN: none. [°C]
    candidate : int
        Row to follow. [-]

    Returns
    -------
    WarmUp or None
        Up to 99 % of the rise, or past the limit where there is no equilibrium; None where data are missing.

    Notes
    -----
    Few cycles are drawn step by step. Of many, about 90 are followed exactly and those between are jumped
    by the affine continuation of the cycle before (exact without magnet term, else in jumps of at most
    2 K), so that the work does not grow with the number of cycles: at most some thousand cycles are followed,
    whatever the input. The crossing of the limit is the exact root of the locally linear equations within
    the first cycle that reaches it.
    """
    k, steps, known, has_housing = _single(network, loss, ambient_degc, candidate)
    if not known:
        return None
    at, state = solve_one(k, steps)
    is_runaway = state is None
    has_limit = not math.isnan(limit_degc)
    end_degc = limit_degc if has_limit else _END_OF_RUNAWAY_DEGC
    limit_time, drawn_until = math.nan, 0.0
    if state is None:
        drawn_until = time_to_limit(k, steps, end_degc)
        limit_time = drawn_until if has_limit else math.nan
    elif survey(k, steps, FLOATS, *state).winding_max >= limit_degc:
        limit_time = drawn_until = time_to_limit(k, steps, limit_degc)
    drawn_until = drawn_until if math.isfinite(drawn_until) else 0.0
    walker = Walker(k, steps)
    last = int(1.02 * drawn_until / walker.span) if is_runaway else _last_cycle(at, drawn_until / walker.span)
    by_cycles = (last + 1) * len(steps.duration) > _MOST_DRAWN_STEPS
    rows = [(0.0, k.ambient, k.ambient, k.ambient, k.ambient)]
    if by_cycles:
        for cycle in _looked_at(last):
            walker.go_to(cycle)
            end = survey(k, steps, FLOATS, walker.x1, walker.x2)
            means = end.winding_sum / walker.span, end.housing_sum / walker.span
            rows.append(((cycle + 0.5) * walker.span, *means, end.winding_min, end.winding_max))
    else:
        per_cycle = _MOST_DRAWN_STEPS // (last + 1)
        for cycle in range(last + 1):
            walker.go_to(cycle)
            inside = _inside(k, steps, walker.x1, walker.x2, per_cycle)
            rows += [(cycle * walker.span + t, x1, x2, x1, x1) for t, x1, x2 in inside[1:]]
    if is_runaway:
        rows = _until_past(rows, end_degc)
    time, winding, housing, low, high = np.array(rows).T
    if not has_housing:
        housing = np.full_like(housing, np.nan)
    return WarmUp(time, winding, housing, low, high, limit_time, is_runaway, by_cycles)


def _until_past(rows: list[_Row], limit: float) -> list[_Row]:
    """Rows up to the first past the limit; what cannot be drawn is dropped."""
    kept = []
    for row in rows:
        if not all(map(math.isfinite, row)):
            break
        kept.append(row)
        if row[4] > limit:
            break
    return kept


def _last_cycle(at: CycleMap, at_least: float) -> int:
    """Last cycle to draw: 99 % of the slow mode, or the one in which the limit falls."""
    slow = min(max(growth(at, FLOATS)[0], -1.0 + 1e-16), -1e-18)
    count = math.log(_END_MISSING) / math.log1p(slow)
    return int(min(math.ceil(max(count, at_least)), 2**52))


def _looked_at(last: int) -> list[int]:
    """Cycles to draw: every one if few, else denser at the start, where the winding is fast."""
    if last <= _POINTS:
        return list(range(last + 1))
    return sorted({round(last * (i / _POINTS) ** 2) for i in range(_POINTS + 1)})
