"""Temperatures over one run from a given start: a duty that is not repeated until it settles."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike, NDArray

from actuator_sizing.core.thermal_cycle import after_cycles, cycle_map, survey
from actuator_sizing.core.thermal_kernel import ARRAYS, Coefficients, Steps, coefficients, sub_steps
from actuator_sizing.core.thermal_network import (
    FloatArray,
    HeatLoss,
    ThermalNetwork,
    known_candidates,
    select_candidates,
)

_HOTTEST_DEGC = 1e9  # beyond this a temperature means nothing
#: Time constants of the winding over which it is followed after the run: it has risen onto the housing by then.
_CONSTANTS_AFTER = 5.0
#: Cycles of that time that are looked at; those between are jumped.
_MOST_LOOKS = 24


@dataclass(frozen=True)
class SingleRun:
    """Temperatures of candidates over one run; each field has shape (B,), NaN where not known.

    Attributes
    ----------
    known : ndarray of bool
        Whether the data suffice.
    has_equilibrium : ndarray of bool
        Whether the run ends at temperatures that mean something; False also where not known. A run needs no
        equilibrium: the name is that of `PeriodicState`, for which the same checks ask.
    winding_max_degc, winding_min_degc, winding_mean_degc : ndarray
        Winding over the run; the mean with the first of the cycles that follow. [°C]
    winding_max_time_s : ndarray
        Instant of the winding's maximum, from the start of the run. [s]
    housing_max_degc, housing_mean_degc : ndarray
        Housing likewise; NaN with one body. [°C]
    follower : ndarray
        Number of what follows and makes the winding hottest; NaN where nothing follows. [-]
    """

    known: NDArray[np.bool_]
    has_equilibrium: NDArray[np.bool_]
    winding_max_degc: FloatArray
    winding_min_degc: FloatArray
    winding_mean_degc: FloatArray
    winding_max_time_s: FloatArray
    housing_max_degc: FloatArray
    housing_mean_degc: FloatArray
    follower: FloatArray


def single_run(
    network: ThermalNetwork,
    loss: HeatLoss,
    ambient_degc: float,
    winding_degc: ArrayLike,
    housing_degc: ArrayLike,
    following: Sequence[HeatLoss] = (),
) -> SingleRun:
    """Temperatures over one run of the losses from a given state.

    Parameters
    ----------
    network, loss : ThermalNetwork, HeatLoss
        As for `periodic_state`, B candidates.
    ambient_degc : float
        Temperature of the surroundings. [°C]
    winding_degc, housing_degc : array_like
        State at the start, broadcast to (B,); a missing housing is taken at the winding's temperature. [°C]

    following : sequence of HeatLoss
        Cycles one of which repeats after the run; the worst of them counts for each candidate. [-]

    Returns
    -------
    SingleRun
        Fields of shape (B,).

    Notes
    -----
    The exact steps of `periodic_state`, once through and without asking for a fixed point. What follows starts
    on a housing that the run has warmed, and repeats until the winding has risen onto it.
    """
    known = known_candidates(network, loss)
    for other in following:
        known &= known_candidates(network, other)
    columns = {f.name: np.full(len(known), np.nan) for f in fields(SingleRun)[2:]}
    rows = np.flatnonzero(known)
    if len(rows):
        winding = np.broadcast_to(np.asarray(winding_degc, dtype=float), known.shape)[rows].copy()
        housing = np.broadcast_to(np.asarray(housing_degc, dtype=float), known.shape)[rows]
        housing = np.where(np.isnan(housing), winding, housing)
        with np.errstate(all="ignore"):  # what overflows is told as not bounded
            chosen = select_candidates(network, loss, rows)
            k, steps = coefficients(*chosen, ambient_degc), sub_steps(*chosen)
            found = _over(k, steps, winding, housing)
            if following:
                constant = chosen[0].winding_resistance_k_w * chosen[0].winding_capacity_j_k
                run = cycle_map(k, steps, ARRAYS, winding, housing)
                winding, housing = winding + run.move1, housing + run.move2
                after = [
                    _repeating(
                        k, sub_steps(*select_candidates(network, other, rows)), constant, winding, housing
                    )
                    for other in following
                ]
                found = _joined(found, _worst(after))
        span = found.pop("span_s")
        for name in ("winding_mean_degc", "housing_mean_degc"):
            found[name] = found[name] / span
        for name, value in found.items():
            columns[name][rows] = value
    with np.errstate(invalid="ignore"):
        # The sum shows every number that is none.
        bounded = (columns["winding_mean_degc"] < _HOTTEST_DEGC) & (
            columns["winding_max_degc"] < _HOTTEST_DEGC
        )
    for name in ("housing_max_degc", "housing_mean_degc"):
        columns[name][~network.has_housing] = np.nan
    return SingleRun(known, bounded & known, **columns)


def _over(k: Coefficients, steps: Steps, x1: FloatArray, x2: FloatArray) -> dict[str, FloatArray]:
    """Columns of a `SingleRun` over the steps, the means still as integrals over `span_s`."""
    end = survey(k, steps, ARRAYS, x1, x2)
    return {
        "winding_max_degc": end.winding_max,
        "winding_min_degc": end.winding_min,
        "winding_mean_degc": end.winding_sum,
        "winding_max_time_s": end.max_time,
        "housing_max_degc": end.housing_max,
        "housing_mean_degc": end.housing_sum,
        "span_s": np.full(len(x1), float(np.sum(steps.duration))),
    }


def _repeating(
    k: Coefficients, steps: Steps, constant_s: FloatArray, x1: FloatArray, x2: FloatArray
) -> dict[str, FloatArray]:
    """Columns of a cycle that repeats from a state: its first, and the one that makes the winding hottest.

    The cycles between those looked at are jumped by the affine continuation of one: exact without magnet term.
    """
    first = _over(k, steps, x1, x2)
    span = first["span_s"]
    last = np.ceil(_CONSTANTS_AFTER * constant_s / span)
    stride = np.maximum(np.ceil(last / _MOST_LOOKS), 1.0)
    number, hottest = np.zeros(len(x1)), np.full(len(x1), -np.inf)
    best: tuple[FloatArray, ...] = (number, x1, x2)
    for _ in range(int(np.max(np.ceil(last / stride))) + 1):
        at = cycle_map(k, steps, ARRAYS, x1, x2)
        hotter = at.hottest_winding > hottest
        hottest = np.where(hotter, at.hottest_winding, hottest)
        here = (number, x1, x2)
        best = tuple(np.where(hotter, new, old) for new, old in zip(here, best, strict=True))
        on = np.minimum(stride, last - number)  # none after the last
        step1, step2 = after_cycles(at, ARRAYS, on)
        number, x1, x2 = number + on, x1 + step1, x2 + step2
    then = _over(k, steps, best[1], best[2])
    rises = then["winding_max_degc"] > first["winding_max_degc"]
    return first | {
        "winding_max_degc": np.where(rises, then["winding_max_degc"], first["winding_max_degc"]),
        "winding_max_time_s": np.where(
            rises, best[0] * span + then["winding_max_time_s"], first["winding_max_time_s"]
        ),
        "winding_min_degc": np.minimum(first["winding_min_degc"], then["winding_min_degc"]),
        "housing_max_degc": np.maximum(first["housing_max_degc"], then["housing_max_degc"]),
    }


def _worst(after: list[dict[str, FloatArray]]) -> dict[str, FloatArray]:
    """What makes the winding hottest; of those alike, as where all of them cool, what has the higher mean."""
    worst = after[0] | {"follower": np.zeros(len(after[0]["span_s"]))}
    for number, other in enumerate(after[1:], start=1):
        mean, most = (each["winding_mean_degc"] / each["span_s"] for each in (other, worst))
        peak, highest = other["winding_max_degc"], worst["winding_max_degc"]
        worse = (peak > highest) | ((peak == highest) & (mean > most))
        column = other | {"follower": np.full(len(peak), float(number))}
        worst = {name: np.where(worse, column[name], value) for name, value in worst.items()}
    return worst


def _joined(run: dict[str, FloatArray], after: dict[str, FloatArray]) -> dict[str, FloatArray]:
    """Columns of a run and of what follows on it."""
    rises = after["winding_max_degc"] > run["winding_max_degc"]
    later = run["span_s"] + after["winding_max_time_s"]
    return {
        "winding_max_degc": np.where(rises, after["winding_max_degc"], run["winding_max_degc"]),
        "winding_max_time_s": np.where(rises, later, run["winding_max_time_s"]),
        "winding_min_degc": np.minimum(run["winding_min_degc"], after["winding_min_degc"]),
        "housing_max_degc": np.maximum(run["housing_max_degc"], after["housing_max_degc"]),
        "follower": after["follower"],
        **{name: run[name] + after[name] for name in ("winding_mean_degc", "housing_mean_degc", "span_s")},
    }
