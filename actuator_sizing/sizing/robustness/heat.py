"""Hottest winding of many samples of one motor in periodic steady state, started near the answer."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.thermal import HeatLoss, ThermalNetwork, periodic_state, steady_state
from actuator_sizing.core.thermal_cycle import cycle_map, newton_step, runs_away
from actuator_sizing.core.thermal_kernel import (
    ARRAYS,
    Steps,
    coefficients,
    select_coefficients,
    select_steps,
    sub_steps,
)
from actuator_sizing.core.thermal_network import known_candidates, select_candidates

FloatArray = NDArray[np.float64]

_ITERATIONS = 4
#: The last step of Newton's method: it is quadratic, so that what is left after it is a thousandth of this; and what
#: the cycle may miss its start by, of which the hottest instant moves by an unknown part.
_SETTLED_K, _SHORT_K = 0.5, 0.02


@dataclass(frozen=True)
class HeatPlan:
    """How one cycle is stepped through, and where its periodic state lies without spread.

    Attributes
    ----------
    piece : list of int
        Piece of the loss that each step belongs to. [-]
    duration_s : list of float
        Length of each step. [s]
    offset_k : tuple of float
        Start of the cycle above the steady state of the mean loss, winding and housing. [K]
    loss_w : float
        Mean copper loss that this offset belongs to. [W]
    """

    piece: list[int]
    duration_s: list[float]
    offset_k: tuple[float, float]
    loss_w: float

    @classmethod
    def of(cls, network: ThermalNetwork, loss: HeatLoss, ambient_degc: float) -> HeatPlan:
        """Plan from the one candidate without spread."""
        steps = sub_steps(network, loss)
        periodic = periodic_state(network, loss, ambient_degc)
        steady = steady_state(network, loss, ambient_degc)
        offset = (
            periodic.winding_start_degc[0] - steady.winding_degc[0],
            np.nan_to_num(periodic.housing_start_degc[0] - steady.housing_degc[0]),
        )
        known = np.isfinite(offset[0])
        mean = float(loss.copper_loss_w[0] @ loss.duration_s / np.sum(loss.duration_s))
        offsets = (float(offset[0]), float(offset[1])) if known else (0.0, 0.0)
        return cls(steps.piece, steps.duration, offsets, mean)


@dataclass(frozen=True)
class Hottest:
    """Largest winding temperature of B samples, NaN where there is no equilibrium; shape (B,)."""

    known: NDArray[np.bool_]
    has_equilibrium: NDArray[np.bool_]
    winding_max_degc: FloatArray


def hottest_winding(
    plan: HeatPlan, network: ThermalNetwork, loss: HeatLoss, ambient_degc: FloatArray | float
) -> Hottest:
    """Largest winding temperature in periodic steady state.

    Parameters
    ----------
    plan : HeatPlan
        From the candidate without spread. [-]
    network : ThermalNetwork
        B samples. [-]
    loss : HeatLoss
        Their losses. [-]
    ambient_degc : ndarray, shape (B,), or float
        Surroundings. [°C]

    Returns
    -------
    Hottest
        The maximum at the ends of the steps. [-]

    Notes
    -----
    The same cycle map as in `periodic_state`, Newton started from the balance of mean losses rather than from
    ambient. The map is convex and monotone: a step from any start at which its spectral radius is below one lands
    below every fixed point, from where the iterates rise to the least one, so that the start does not choose the
    answer. Where such a start is not found, `periodic_state` decides.
    """
    known = known_candidates(network, loss)
    ambient = np.broadcast_to(np.asarray(ambient_degc, dtype=float), known.shape)
    with np.errstate(all="ignore"):
        steady = steady_state(network, loss, ambient)  # type: ignore[arg-type]
        share = loss.copper_loss_w @ loss.duration_s / (np.sum(loss.duration_s) * plan.loss_w)
        x1 = np.where(steady.has_equilibrium, steady.winding_degc + share * plan.offset_k[0], ambient)
        housing = steady.has_equilibrium & np.isfinite(steady.housing_degc)
        x2 = np.where(housing, steady.housing_degc + share * plan.offset_k[1], ambient)
        k = coefficients(network, loss, ambient)
        steps = _steps(plan, network, loss)
        open_, hottest = known.copy(), np.full(len(known), np.nan)
        for _ in range(_ITERATIONS):
            if not open_.any():
                break
            left = open_.copy()
            own, course = select_coefficients(k, left), select_steps(steps, left)
            at = cycle_map(own, course, ARRAYS, x1[left], x2[left])
            move1, move2 = newton_step(at)
            # The start moves by `move`, the end by `move` less what the cycle was short of: between them lies the
            # hottest instant, each sample by itself whatever the others need.
            settled = (np.abs(at.move1) <= _SHORT_K) & (np.abs(move1) + np.abs(move2) <= _SETTLED_K)
            settled &= ~runs_away(own, at, ARRAYS)
            done = np.flatnonzero(left)[settled]
            hottest[done] = (at.hottest_winding + move1 - 0.5 * at.move1)[settled]
            open_[done] = False
            x1[left] += move1
            x2[left] += move2
    found = known & ~open_
    if open_.any():
        solved = periodic_state(*select_candidates(network, loss, open_), ambient[open_])
        hottest[open_] = solved.winding_max_degc
        found[open_] = solved.has_equilibrium
    return Hottest(known, found, hottest)


def _steps(plan: HeatPlan, network: ThermalNetwork, loss: HeatLoss) -> Steps:
    """The same steps for every sample, whatever others are evaluated with it."""
    two = network.has_housing
    with np.errstate(invalid="ignore"):
        to_winding = np.where(two, 0.0, 1.0 / network.winding_capacity_j_k)
        to_housing = np.where(two, 1.0 / network.housing_capacity_j_k, 0.0)
    copper, speed = loss.copper_loss_w.T, loss.speed_loss_w.T
    return Steps(
        plan.duration_s,
        [copper[p] for p in plan.piece],
        [speed[p] * to_winding for p in plan.piece],
        [speed[p] * to_housing for p in plan.piece],
        plan.piece,
    )
