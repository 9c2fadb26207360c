"""What the cycle commands to the loops of one set, at the motor shaft."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.plant import Plant
from actuator_sizing.core.quadrature import antiderivative_matrix, to_series
from actuator_sizing.core.stretches import polynomials, shift_matrix
from actuator_sizing.sizing.set_model import SetModel

FloatArray = NDArray[np.float64]

#: Place of the load torque among the commands.
LOAD_ROW = slice(3, 4)
_SHORT = 64  # samples of a piece below which it is not worth a product of its own
_SAME = 1e-13  # of a ratio: rounding of its series
_NEGLIGIBLE = 1e-15  # of the largest coefficient of a command: less than its rounding


@dataclass(frozen=True)
class Commands:
    """The cycle at the motor shaft as Legendre series on each piece; the rows are quantities."""

    start_s: FloatArray  # (P,)
    duration_s: FloatArray  # (P,)
    segment: NDArray[np.intp]  # (P,)
    series: (
        FloatArray  # (6, P, K + 1): angle, speed, current, load torque, position, motor angle per load unit
    )
    angle_travel_rad: float  # over one cycle

    @classmethod
    def of(cls, model: SetModel, plants: Sequence[Plant]) -> Commands:
        """Angle from the integral of speed; load torque is what the plant's own terms leave of the demand.

        Parameters
        ----------
        model : SetModel
            The set. [-]
        plants : sequence of Plant
            Its plant in each segment. [-]
        """
        demand, n = model.demand, float(model.gearhead.ratio[0])
        speed, torque = model.course.motor_speed_rad_s[0], model.course.torque_nm[0]

        def of_segment(name: str) -> FloatArray:
            return np.array([getattr(plants[s], name) for s in demand.segment])[:, None]

        direction = demand.direction[:, None]
        coulomb = (of_segment("motor_coulomb_nm") + of_segment("load_coulomb_nm")) * direction
        viscous = (of_segment("motor_viscous_nm_s") + of_segment("load_viscous_nm_s")) * speed
        inertia = of_segment("total_inertia_kg_m2") * n * demand.shaft_acceleration
        load = -(torque - inertia - viscous - coulomb)
        held = demand.brake_closed & (demand.direction == 0.0)
        load[held] = 0.0
        ratio = n * model.case.mechanism.ratio_at(demand.position)[0]
        nodes = np.stack(
            [speed, torque / model.judged.torque_constant_nm_per_a[0], load, demand.position, ratio]
        )
        coefficients = nodes @ to_series(nodes.shape[2]).T
        half = 0.5 * demand.duration_s[:, None]
        angle = (coefficients[0] @ antiderivative_matrix(nodes.shape[2]).T) * half
        gained = angle.sum(axis=1)  # every Legendre polynomial is one at the end of its piece
        angle[:, 0] += np.concatenate([[0.0], np.cumsum(gained)[:-1]])
        padded = np.concatenate([coefficients, np.zeros((*coefficients.shape[:2], 1))], axis=2)
        return cls(
            demand.start_s, demand.duration_s, demand.segment, np.concatenate([angle[None], padded]),
            float(gained.sum()),
        )  # fmt: skip

    @property
    def cycle_s(self) -> float:
        """Duration of the cycle. [s]"""
        return float(self.duration_s.sum())

    @cached_property
    def has_constant_ratio(self) -> bool:
        """Whether the motor turns by the same angle for each unit of the load's coordinate."""
        first = self.series[5, 0, 0]
        return bool(
            np.all(np.abs(self.series[5] - first * np.eye(1, self.series.shape[2])) <= _SAME * abs(first))
        )

    def at(self, time_s: FloatArray, segment: int, rows: slice = slice(None)) -> FloatArray:
        """Commands at instants within one segment.

        Parameters
        ----------
        time_s : ndarray, shape (n,)
            Instants from the start of the cycle, ascending; those outside the segment take its nearest end. [s]
        segment : int
            Which segment. [-]
        rows : slice
            Which of the quantities.

        Returns
        -------
        ndarray, shape (6, n)
            Angle, speed, current, load torque, position, motor angle per load unit; of these the rows. [-]
        """
        pieces = np.flatnonzero(self.segment == segment)
        starts = np.concatenate([[0], np.searchsorted(time_s, self.start_s[pieces[1:]]), [len(time_s)]])
        series = self.series[rows]
        if len(time_s) < _SHORT * len(pieces):
            each = pieces[np.repeat(np.arange(len(pieces)), np.diff(starts))]
            x = np.clip(2.0 * (time_s - self.start_s[each]) / self.duration_s[each] - 1.0, -1.0, 1.0)
            return np.asarray(np.einsum("qnk,nk->qn", series[:, each], polynomials(x, series.shape[2])))
        found = np.empty((len(series), len(time_s)))
        for piece, first, last in zip(pieces, starts[:-1], starts[1:], strict=True):
            if first == last:
                continue
            x = np.clip(self.argument(int(piece), time_s[first:last]), -1.0, 1.0)
            np.matmul(series[:, piece], polynomials(x, series.shape[2]).T, out=found[:, first:last])
        return found

    def argument(self, piece: int, time_s: FloatArray) -> FloatArray:
        """Argument ξ of the series of a piece, −1 to 1.

        Parameters
        ----------
        piece : int
            Which piece. [-]
        time_s : ndarray, shape (n,)
            Instants from the start of the cycle. [s]
        """
        return np.asarray(2.0 * (time_s - self.start_s[piece]) / self.duration_s[piece] - 1.0)

    def inputs(self, piece: int, step_s: float, feedforward_ratio: float) -> FloatArray:
        """What the loop takes over one piece.

        Parameters
        ----------
        piece : int
            Which piece. [-]
        step_s : float
            Sampling time; the load acts as in the middle of each sample. [s]
        feedforward_ratio : float
            Part of the planned current that is added in advance. [-]

        Returns
        -------
        ndarray, shape (4, K)
            Legendre series of angle, speed, current in advance and load torque, as short as they are. [-]
        """
        rows = self.series[:4, piece].copy()
        rows[2] *= feedforward_ratio
        size = np.abs(rows)
        alive = (size > _NEGLIGIBLE * size.max(axis=1, keepdims=True)).any(axis=0)
        terms = int(np.flatnonzero(alive)[-1]) + 1 if alive.any() else 1
        rows = rows[:, :terms]
        rows[3] = rows[3] @ shift_matrix(terms, step_s / float(self.duration_s[piece]))
        return np.asarray(rows)
