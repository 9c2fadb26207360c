"""Periodic steady state of winding and housing, solved as a periodic state and not by waiting for it."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.thermal_cycle import (
    CycleMap,
    cycle_map,
    cycles_until,
    growth,
    newton_step,
    runs_away,
    survey,
)
from actuator_sizing.core.thermal_kernel import (
    ARRAYS,
    FLOATS,
    Coefficients,
    Number,
    Operations,
    Steps,
    as_floats,
    coefficients,
    select_coefficients,
    select_steps,
    sub_steps,
)
from actuator_sizing.core.thermal_network import (
    FloatArray,
    HeatLoss,
    ThermalNetwork,
    known_candidates,
    select_candidates,
)

#: Up to this number of candidates plain floats, one after the other, are faster than arrays (measured).
_FEW = 24
_MOST_ITERATIONS = 100
#: Newton stops when the state moves by less than this part of one kelvin plus its rise.
_TOLERANCE = 1e-11
#: ... or, where rounding is in the way (cycles far shorter than the time constants), after this many steps
#: by less than this part.
_PATIENCE = 12
_ROUNDING = 1e-8
#: Share of the rise still missing when a warm-up counts as done.
_MISSING = 0.05


@dataclass(frozen=True)
class PeriodicState:
    """Periodic steady state of candidates; each field has shape (B,).

    Temperatures are NaN where there is no equilibrium or where data are missing. With one body the
    housing temperatures are NaN.

    Attributes
    ----------
    known : ndarray of bool
        Whether the data suffice.
    has_equilibrium : ndarray of bool
        Whether a periodic state exists (below 1e9 °C); False: thermal runaway, or not known.
    winding_max_degc, winding_min_degc, winding_mean_degc : ndarray
        Winding over the cycle. [°C]
    winding_max_time_s : ndarray
        Instant of the winding's maximum within the cycle. [s]
    housing_max_degc, housing_min_degc, housing_mean_degc : ndarray
        Housing over the cycle. [°C]
    winding_start_degc, housing_start_degc : ndarray
        State at the start of the cycle. [°C]
    mean_copper_loss_w, mean_speed_loss_w : ndarray
        Mean losses at the temperatures of the periodic state. [W]
    loop_gain : ndarray
        Further loss that a loss causes through temperature, mean over the cycle; 1 is runaway for short
        cycles. Where there is no equilibrium: at the state at which that was recognised. [-]
    spectral_radius : ndarray
        Largest eigenvalue of the cycle map; ≥ 1 is runaway. [-]
    cycles_to_95 : ndarray
        Cycles from cold after which the winding, at its instant of maximum, has made 95 % of its rise: a
        real number from the eigenvalues of the cycle map, 0 if within the first cycle. [-]
    """

    known: NDArray[np.bool_]
    has_equilibrium: NDArray[np.bool_]
    winding_max_degc: FloatArray
    winding_min_degc: FloatArray
    winding_mean_degc: FloatArray
    winding_max_time_s: FloatArray
    housing_max_degc: FloatArray
    housing_min_degc: FloatArray
    housing_mean_degc: FloatArray
    winding_start_degc: FloatArray
    housing_start_degc: FloatArray
    mean_copper_loss_w: FloatArray
    mean_speed_loss_w: FloatArray
    loop_gain: FloatArray
    spectral_radius: FloatArray
    cycles_to_95: FloatArray


class _Answer:
    """Columns of the answer while they are filled, row by row or block by block."""

    def __init__(self, network: ThermalNetwork, loss: HeatLoss, count: int):
        self.columns = {f.name: np.full(count, np.nan) for f in fields(PeriodicState)}
        self.found = np.zeros(count, dtype=bool)
        self.span = float(np.sum(loss.duration_s))
        self.total = network.total_resistance_k_w
        self.housing = self.total - network.winding_resistance_k_w

    def runaway_margin(self, rows: NDArray[np.intp] | int, at: CycleMap, ops: Operations) -> None:
        """Loop gain and spectral radius of these rows."""
        gain = at.gain * self.total[rows] + at.gain_housing * self.housing[rows]
        self.columns["loop_gain"][rows] = gain / self.span
        self.columns["spectral_radius"][rows] = 1.0 + growth(at, ops)[0]

    def equilibrium(
        self,
        rows: NDArray[np.intp] | int,
        k: Coefficients,
        steps: Steps,
        ops: Operations,
        at: CycleMap,
        state: tuple[Number, Number],
    ) -> None:
        """Everything that is read off a periodic state."""
        end = survey(k, steps, ops, *state)
        self.found[rows] = True
        for name, value in (
            ("winding_max_degc", end.winding_max),
            ("winding_min_degc", end.winding_min),
            ("winding_mean_degc", end.winding_sum / self.span),
            ("winding_max_time_s", end.max_time),
            ("housing_max_degc", end.housing_max),
            ("housing_min_degc", end.housing_min),
            ("housing_mean_degc", end.housing_sum / self.span),
            ("winding_start_degc", state[0]),
            ("housing_start_degc", state[1]),
            ("mean_copper_loss_w", end.copper / self.span),
            ("cycles_to_95", cycles_until(k, at, end, ops, *state, _MISSING)),
        ):
            self.columns[name][rows] = value


def periodic_state(
    network: ThermalNetwork, loss: HeatLoss, ambient_degc: FloatArray | float
) -> PeriodicState:
    """Periodic steady state under a repeating cycle, or the finding that there is none.

    Parameters
    ----------
    network : ThermalNetwork
        Thermal data, fields of shape (B,).
    loss : HeatLoss
        Losses, pieces on the last axis, shape (B, P); `subpiece_means` splits pieces whose loss varies.
    ambient_degc : float, or ndarray of shape (B,)
        Temperature of the surroundings. [°C]

    Returns
    -------
    PeriodicState
        Fields of shape (B,).

    Notes
    -----
    Each piece is followed by the exact solution of the equations made linear at its start (exponential
    Rosenbrock: exact for resistance that grows linearly with temperature, second order in the magnet
    term, for which pieces are divided). The cycle map ``x → F(x)`` and its derivative M follow, and Newton
    ``x ← x + (I − M)^{-1} (F(x) − x)`` from ambient gives the fixed point. The system is cooperative and its
    loss convex, so the iterates rise to the least periodic state if there is one: an iterate at which the
    spectral radius of M reaches 1 proves that there is none. Derived from first principles; the steps are
    those of Hochbruck & Ostermann, Exponential integrators, Acta Numerica 19 (2010).
    """
    known = known_candidates(network, loss)
    answer = _Answer(network, loss, len(known))
    rows = np.flatnonzero(known)
    with np.errstate(all="ignore"):  # candidates on their way to runaway overflow, and are dropped
        chosen = select_candidates(network, loss, rows)
        ambient = np.broadcast_to(np.asarray(ambient_degc, dtype=float), known.shape)[rows]
        k, steps = coefficients(*chosen, ambient), sub_steps(*chosen)
        if len(rows) > _FEW:
            _solve_many(answer, rows, k, steps)
        else:
            for position, row in enumerate(rows.tolist()):
                _solve_alone(answer, row, *as_floats(k, steps, position))
    columns = answer.columns
    mean_speed = loss.speed_loss_w @ np.asarray(loss.duration_s, dtype=float) / answer.span
    columns["mean_speed_loss_w"] = np.where(answer.found, mean_speed, np.nan)
    for name, column in columns.items():
        if name.startswith("housing"):
            column[~network.has_housing] = np.nan
    return PeriodicState(**(columns | {"known": known, "has_equilibrium": answer.found}))


def _is_settled(iteration: int, is_affine: Any, moved: Number, rise: Number) -> Any:
    """Whether Newton is done; where the equations are affine its first step is exact."""
    tolerance = _TOLERANCE if iteration < _PATIENCE else _ROUNDING
    return is_affine | (moved <= tolerance * (1.0 + abs(rise)))


def solve_one(k: Coefficients, steps: Steps) -> tuple[CycleMap, tuple[float, float] | None]:
    """Newton for one candidate in plain floats: last cycle map, and the start state or None for runaway."""
    x1 = x2 = k.ambient
    for iteration in range(_MOST_ITERATIONS):
        at = cycle_map(k, steps, FLOATS, x1, x2)
        if runs_away(k, at, FLOATS):
            break
        step1, step2 = newton_step(at)
        x1, x2 = x1 + step1, x2 + step2
        if not math.isfinite(x1 + x2):
            break
        if _is_settled(iteration, k.beta == 0.0, abs(step1) + abs(step2), x1 - k.ambient):
            return at, (x1, x2)
    return at, None


def _solve_alone(answer: _Answer, row: int, k: Coefficients, steps: Steps) -> None:
    at, state = solve_one(k, steps)
    answer.runaway_margin(row, at, FLOATS)
    if state is not None:
        answer.equilibrium(row, k, steps, FLOATS, at, state)


def _solve_many(answer: _Answer, rows: NDArray[np.intp], k: Coefficients, steps: Steps) -> None:
    """Newton for many candidates at once; those that are done leave the batch when they are its half."""
    count = len(rows)
    maps = CycleMap(*(np.full(count, np.nan) for _ in CycleMap._fields))
    final1, final2 = np.full(count, np.nan), np.full(count, np.nan)
    found = np.zeros(count, dtype=bool)
    left, k_left, steps_left = np.arange(count), k, steps
    x1, x2 = k.ambient.copy(), k.ambient.copy()
    open_ = np.ones(count, dtype=bool)  # of those that are left in the batch
    for iteration in range(_MOST_ITERATIONS):
        at = cycle_map(k_left, steps_left, ARRAYS, x1, x2)
        step1, step2 = newton_step(at)
        x1, x2 = x1 + step1, x2 + step2
        lost = runs_away(k_left, at, ARRAYS) | ~np.isfinite(x1 + x2)
        moved = np.abs(step1) + np.abs(step2)
        settled = ~lost & _is_settled(iteration, k_left.beta == 0.0, moved, x1 - k_left.ambient)
        done = open_ & (lost | settled | (iteration == _MOST_ITERATIONS - 1))
        for kept, column in zip(maps, at, strict=True):
            kept[left[done]] = column[done]
        final1[left[done]], final2[left[done]] = x1[done], x2[done]
        found[left[done & settled]] = True
        open_ &= ~done
        if not open_.any():
            break
        if open_.sum() <= 0.5 * len(left):
            left, x1, x2 = left[open_], x1[open_], x2[open_]
            k_left, steps_left = select_coefficients(k_left, open_), select_steps(steps_left, open_)
            open_ = np.ones(len(left), dtype=bool)
    answer.runaway_margin(rows, maps, ARRAYS)
    if found.any():
        answer.equilibrium(
            rows[found],
            select_coefficients(k, found),
            select_steps(steps, found),
            ARRAYS,
            CycleMap(*(column[found] for column in maps)),
            (final1[found], final2[found]),
        )
