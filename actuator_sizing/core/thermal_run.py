"""Temperatures over one run from a given start: a duty that is not repeated until it settles."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike, NDArray

from actuator_sizing.core.thermal_cycle import survey
from actuator_sizing.core.thermal_kernel import ARRAYS, coefficients, sub_steps
from actuator_sizing.core.thermal_network import (
    FloatArray,
    HeatLoss,
    ThermalNetwork,
    known_candidates,
    select_candidates,
)

_HOTTEST_DEGC = 1e9  # beyond this a temperature means nothing


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
        Winding over the run. [°C]
    winding_max_time_s : ndarray
        Instant of the winding's maximum. [s]
    housing_max_degc, housing_mean_degc : ndarray
        Housing over the run; NaN with one body. [°C]
    """

    known: NDArray[np.bool_]
    has_equilibrium: NDArray[np.bool_]
    winding_max_degc: FloatArray
    winding_min_degc: FloatArray
    winding_mean_degc: FloatArray
    winding_max_time_s: FloatArray
    housing_max_degc: FloatArray
    housing_mean_degc: FloatArray


def single_run(
    network: ThermalNetwork,
    loss: HeatLoss,
    ambient_degc: float,
    winding_degc: ArrayLike,
    housing_degc: ArrayLike,
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

    Returns
    -------
    SingleRun
        Fields of shape (B,).

    Notes
    -----
    The exact steps of `periodic_state`, once through and without asking for a fixed point.
    """
    known = known_candidates(network, loss)
    span = float(np.sum(loss.duration_s))
    columns = {f.name: np.full(len(known), np.nan) for f in fields(SingleRun)[2:]}
    rows = np.flatnonzero(known)
    if len(rows):
        winding = np.broadcast_to(np.asarray(winding_degc, dtype=float), known.shape)[rows]
        housing = np.broadcast_to(np.asarray(housing_degc, dtype=float), known.shape)[rows]
        with np.errstate(all="ignore"):  # what overflows is told as not bounded
            chosen = select_candidates(network, loss, rows)
            end = survey(
                coefficients(*chosen, ambient_degc),
                sub_steps(*chosen),
                ARRAYS,
                winding.copy(),
                np.where(np.isnan(housing), winding, housing),
            )
        for name, value in (
            ("winding_max_degc", end.winding_max),
            ("winding_min_degc", end.winding_min),
            ("winding_mean_degc", end.winding_sum / span),
            ("winding_max_time_s", end.max_time),
            ("housing_max_degc", end.housing_max),
            ("housing_mean_degc", end.housing_sum / span),
        ):
            columns[name][rows] = value
    with np.errstate(invalid="ignore"):
        bounded = columns["winding_mean_degc"] < _HOTTEST_DEGC  # the sum shows every number that is none
    for name in ("housing_max_degc", "housing_mean_degc"):
        columns[name][~network.has_housing] = np.nan
    return SingleRun(known, bounded & known, **columns)
