"""What the drive sees of the current: RMS over its window and the i²t accumulator, as products of matrices.

Both are linear in the squares of the current at the nodes of the cycle, at any instant that is fixed beforehand, so
that one matrix serves every sample.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import antiderivative_matrix, to_series
from actuator_sizing.sizing.robustness.cycle_nodes import CycleNodes

FloatArray = NDArray[np.float64]

_PER_PIECE = 9  # instants on each piece


@dataclass(frozen=True)
class CurrentHistory:
    """Running integral of the squared current at fixed instants.

    Attributes
    ----------
    time_s : ndarray, shape (J,)
        Instants, ascending, borders of pieces among them. [s]
    integral : ndarray, shape (J, P·K)
        Takes squares at the nodes to their integral from the start of the cycle. [s]
    window : ndarray, shape (I, P·K), or None
        Takes them to their mean over the window, from each of its starts; None without a window. [-]
    """

    time_s: FloatArray
    integral: FloatArray
    window: FloatArray | None

    @classmethod
    def of(cls, nodes: CycleNodes, window_s: float) -> CurrentHistory:
        """Prepare a cycle and the window of a drive; NaN: the whole cycle."""
        borders = np.concatenate([[0.0], np.cumsum(nodes.demand.duration_s)])
        fractions = np.linspace(0.0, 1.0, _PER_PIECE)
        time = np.unique((borders[:-1, None] + nodes.demand.duration_s[:, None] * fractions).ravel())
        integral = _running(nodes, borders, time)
        if not np.isfinite(window_s):
            return cls(time, integral, None)
        cycle = borders[-1]
        turns, rest = divmod(window_s, cycle)
        starts = np.unique(np.concatenate([time, np.mod(time - rest, cycle)]))
        ends = starts + rest
        wraps = ends > cycle
        total = integral[-1]
        inside = _running(nodes, borders, np.where(wraps, ends - cycle, ends)) - _running(
            nodes, borders, starts
        )
        inside = inside + wraps[:, None] * total + turns * total
        return cls(time, integral, inside / window_s)

    def of_basis(self, basis: FloatArray) -> CurrentHistory:
        """The same for squares that are sums over a basis: columns of shape (P·K, n), weights of shape (n, B)."""
        window = None if self.window is None else self.window @ basis
        return CurrentHistory(self.time_s, self.integral @ basis, window)

    def windowed_square(self, squared: FloatArray) -> FloatArray:
        """Largest mean square over the window, squares of shape (P·K, B) to (B,). [A²]"""
        if self.window is None:
            return np.asarray(self.integral[-1] @ squared / self.time_s[-1])
        return np.asarray(np.max(self.window @ squared, axis=0))

    def overload(self, squared: FloatArray, continuous_squared: FloatArray) -> FloatArray:
        """Largest i²t accumulator in the periodic regime.

        Parameters
        ----------
        squared : ndarray, shape (P·K, B)
            Squares of the current at the nodes. [A²]
        continuous_squared : ndarray, shape (B,)
            Square of the continuous current. [A²]

        Returns
        -------
        ndarray, shape (B,)
            As `core.windows.overload_accumulator` has it, at the fixed instants. [A²·s]
        """
        rise = self.integral @ squared - self.time_s[:, None] * continuous_squared
        surplus = rise[-1]
        # Largest rise from an earlier instant of the same cycle, or from any of the cycle before.
        lowest, highest = rise[0].copy(), rise[0].copy()
        largest = np.zeros_like(lowest)
        for level in rise[1:]:
            np.minimum(lowest, level, out=lowest)
            np.maximum(highest, level, out=highest)
            np.maximum(largest, level - lowest, out=largest)
        largest = np.maximum(largest, highest + np.minimum(surplus, 0.0) - lowest)
        return np.where(surplus > 1e-12 * self.time_s[-1] * continuous_squared, np.inf, largest)


def _running(nodes: CycleNodes, borders: FloatArray, at: FloatArray) -> FloatArray:
    """Matrix from node values to their integral from the start of the cycle to each instant, (J, P·K)."""
    count, duration = nodes.count, nodes.demand.duration_s
    pieces = len(duration)
    primitive = antiderivative_matrix(count) @ to_series(
        count
    )  # node values -> series of the integral from −1
    whole = primitive.sum(axis=0)  # every Legendre polynomial is 1 at 1
    matrix = np.zeros((len(at), pieces, count))
    piece = np.clip(np.searchsorted(borders, at, side="right") - 1, 0, pieces - 1)
    local = np.clip(2.0 * (at - borders[piece]) / duration[piece] - 1.0, -1.0, 1.0)
    before = np.arange(pieces)[None, :] < piece[:, None]
    matrix += before[:, :, None] * (0.5 * duration[:, None] * whole)[None]
    partial = legendre.legvander(local, count) @ primitive
    matrix[np.arange(len(at)), piece] = 0.5 * duration[piece][:, None] * partial
    return matrix.reshape(len(at), -1)
