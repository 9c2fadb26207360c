"""Power over a cycle, cut into runs of one sign: what the energies of a DC bus are counted from.

Power is positive where the axis takes it from the bus.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import antiderivative_matrix, lobatto, series_value, to_series
from actuator_sizing.core.sign_changes import sign_changes

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class PowerRuns:
    """Power of B candidates over one cycle, cut where it changes sign; N runs in the order of time.

    Runs of no length pad candidates with fewer changes of sign; they carry no energy.
    """

    piece: NDArray[np.intp]  # (N,)
    begin: FloatArray  # (B, N) position in the piece, on [−1, 1]
    end: FloatArray
    energy_j: FloatArray  # (B, N) taken; negative: given back
    series: FloatArray  # (B, P, K) Legendre coefficients of the power
    duration_s: FloatArray  # (P,), or (B, P) where the candidates are cut differently

    def take(self, index: NDArray[np.intp]) -> PowerRuns:
        """Rows `index` of the candidates."""
        return PowerRuns(
            self.piece,
            self.begin[index],
            self.end[index],
            self.energy_j[index],
            self.series[index],
            self.duration_s if self.duration_s.ndim == 1 else self.duration_s[index],
        )

    def piece_duration_s(self) -> FloatArray:
        """Length of the piece that each run lies in, shape (N,) or (B, N). [s]"""
        return np.asarray(self.duration_s[..., self.piece])

    def run_duration_s(self) -> FloatArray:
        """Length of each run, shape (B, N). [s]"""
        return np.asarray(0.5 * (self.end - self.begin) * self.piece_duration_s())

    def end_time_s(self) -> FloatArray:
        """When each run ends, shape (B, N). [s]"""
        return np.cumsum(self.run_duration_s(), axis=1)

    def values(self, series: FloatArray) -> FloatArray:
        """Values at the nodes of every run of functions that are known by their series on the pieces.

        Parameters
        ----------
        series : ndarray, shape (B, P, K)
            Legendre coefficients on the pieces; the unit is the caller's. [-]

        Returns
        -------
        ndarray, shape (B, N, K)
            A polynomial on a piece is the same polynomial on its runs. [-]
        """
        count = series.shape[2]
        share = 0.5 * (lobatto(count)[0] + 1.0)
        x = self.begin[..., None] + share * (self.end - self.begin)[..., None]
        coefficients = np.moveaxis(series[:, self.piece], 2, 0)[..., None]
        return series_value(np.broadcast_to(coefficients, (count, *x.shape)), x)


def power_runs(duration_s: FloatArray, power_w: FloatArray) -> PowerRuns:
    """Cut the power of B candidates into runs of one sign.

    Parameters
    ----------
    duration_s : ndarray, shape (P,) or (B, P)
        Length of each smooth piece. [s]
    power_w : ndarray, shape (B, P, K)
        Power at the nodes; positive motoring. [W]

    Returns
    -------
    PowerRuns
        Runs in the order of time, with their energy in closed form of the interpolant. [-]
    """
    batch, pieces, count = power_w.shape
    series = power_w @ to_series(count).T
    row, piece, position = sign_changes(series)
    key = row * pieces + piece
    first = np.searchsorted(key, key, side="left")
    rank = np.arange(len(key)) - first
    most = int(rank.max()) + 1 if len(rank) else 0
    borders = np.ones((batch, pieces, most + 2))
    borders[:, :, 0] = -1.0
    borders[row, piece, rank + 1] = position
    integral = (series @ antiderivative_matrix(count).T).transpose(2, 0, 1)
    area = np.stack([series_value(integral, borders[:, :, k]) for k in range(most + 2)], axis=2)
    energy = 0.5 * duration_s[..., None] * np.diff(area, axis=2)
    shape = (batch, pieces * (most + 1))
    return PowerRuns(
        piece=np.repeat(np.arange(pieces), most + 1),
        begin=borders[:, :, :-1].reshape(shape),
        end=borders[:, :, 1:].reshape(shape),
        energy_j=energy.reshape(shape),
        series=series,
        duration_s=duration_s,
    )


def bus_energy(terminal_j: FloatArray, efficiency: FloatArray) -> FloatArray:
    """Energy or power at the bus from that at the motor terminals, by the drive's efficiency.

    Parameters
    ----------
    terminal_j : ndarray, shape (B, ...)
        At the terminals; positive motoring. [J]
    efficiency : ndarray, shape (B,)
        Of the drive, in the direction power flows. [-]

    Returns
    -------
    ndarray, shape as `terminal_j`
        ``E/η`` motoring, ``E η`` regenerating. [J]

    Examples
    --------
    >>> import numpy as np
    >>> bus_energy(np.array([[9.0, -10.0]]), np.array([0.9])).tolist()
    [[10.0, -9.0]]
    """
    eta = efficiency.reshape(-1, *[1] * (terminal_j.ndim - 1))
    return np.asarray(np.where(terminal_j > 0.0, terminal_j / eta, terminal_j * eta))


def bus_pieces(
    runs: PowerRuns, efficiency: FloatArray, steady_w: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Power at the bus on smooth pieces: the runs of the terminals through the drive, and what it takes always.

    Parameters
    ----------
    runs : PowerRuns
        Power at the terminals of B candidates. [-]
    efficiency : ndarray, shape (B,)
        Of the drive, in the direction power flows. [-]
    steady_w : ndarray, shape (B,)
        Power that drive and other loads take all the time. [W]

    Returns
    -------
    duration_s : ndarray, shape (B, N)
        Length of each run; some are zero. [s]
    power_w : ndarray, shape (B, N, K)
        Power at the bus at the nodes of each run. [W]
    """
    at_terminals = runs.values(runs.series)
    # At the ends of a run, where the power is nothing but rounding, the sign is that of the run.
    middle = at_terminals[..., at_terminals.shape[2] // 2]
    sign = np.sign(np.where(runs.energy_j == 0.0, middle, runs.energy_j))[..., None]
    at_terminals = np.where(sign > 0.0, np.maximum(at_terminals, 0.0), np.minimum(at_terminals, 0.0))
    return runs.run_duration_s(), bus_energy(at_terminals, efficiency) + steady_w[:, None, None]
