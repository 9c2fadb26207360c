"""Mean products of the demand in many short slices of a long record: what a window or a heated body feels.

Air-gap torque is linear in the six functions of `core.moments`, so that the mean square torque of any motor on
any gearhead in any slice follows from one symmetric matrix per slice.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.quadrature import lobatto
from actuator_sizing.core.transmission import BACK_DRIVING, MOTORING, STANDSTILL

FloatArray = NDArray[np.float64]

_PLACE = {MOTORING: 1, BACK_DRIVING: 2, STANDSTILL: 3}  # of the torque among the six functions
_KINDS = 9  # three directions of power times three signs of motion
_PAIRS = tuple((p, q) for p in range(4) for q in range(p, 4))
_DIRECTION, _SPEED = 4, 5


@dataclass(frozen=True)
class RecordSlices:
    """A periodic record in M slices.

    Attributes
    ----------
    duration_s : ndarray, shape (M,)
        Length of each slice. [s]
    products : ndarray, shape (M, 6, 6)
        ``∫ φ φᵀ dt`` over each slice of the six functions of `core.moments`. [-]
    """

    duration_s: FloatArray
    products: FloatArray

    def squared_torque(self, coefficients: FloatArray) -> FloatArray:
        """Integral of the square of air-gap torques over each slice.

        Parameters
        ----------
        coefficients : ndarray, shape (B, 6)
            Of the six functions, for B motor × gearhead pairs. [-]

        Returns
        -------
        ndarray, shape (B, M)
            Not below zero. [N²·m²·s]
        """
        outer = coefficients[:, :, None] * coefficients[:, None, :]
        found = outer.reshape(len(coefficients), -1) @ self.products.reshape(len(self.products), -1).T
        return np.asarray(np.maximum(found, 0.0))

    def speed_loss(self, friction_nm: FloatArray, viscous_nm_s: FloatArray, ratio: FloatArray) -> FloatArray:
        """Integral of friction and iron loss ``T_c |ω| + c ω²`` of B motors over each slice.

        Parameters
        ----------
        friction_nm : ndarray, shape (B,)
            Coulomb friction of the motor. [N·m]
        viscous_nm_s : ndarray, shape (B,)
            Viscous friction of the motor. [N·m·s/rad]
        ratio : ndarray, shape (B,)
            Turns of the motor per turn of the driven shaft. [-]

        Returns
        -------
        ndarray, shape (B, M)
            Energy. [J]
        """
        way, square = self.products[:, _DIRECTION, _SPEED], self.products[:, _SPEED, _SPEED]
        return np.asarray(np.outer(friction_nm * ratio, way) + np.outer(viscous_nm_s * ratio**2, square))

    def grouped(self, longest_s: float) -> NDArray[np.intp]:
        """First slice of each group of as many slices as last no longer than wanted, at least one.

        Parameters
        ----------
        longest_s : float
            Wanted length of a group. [s]

        Returns
        -------
        ndarray of int, shape (G,)
            Rising, from 0. [-]
        """
        per_group = max(1, int(longest_s / float(self.duration_s.max())))
        return np.arange(0, len(self.duration_s), per_group)


class SliceSums:
    """Adds stretches of a record up to slices."""

    def __init__(self, count: int):
        self.count = count
        self._sums = np.zeros((len(_PAIRS), count * _KINDS))

    def add(
        self,
        slice_of: NDArray[np.intp],
        duration_s: FloatArray,
        flow: NDArray[np.int8],
        direction: FloatArray,
        functions: FloatArray,
    ) -> None:
        """Take S stretches.

        Parameters
        ----------
        slice_of : ndarray of int, shape (S,)
            Slice that holds each stretch. [-]
        duration_s : ndarray, shape (S,)
            Length of each stretch. [s]
        flow : ndarray of int, shape (S,)
            Direction of power at the driven shaft. [-]
        direction : ndarray, shape (S,)
            Sign of motion. [-]
        functions : ndarray, shape (S, K, 3)
            Acceleration, torque and speed at the Gauss–Lobatto nodes. [-]
        """
        share = 0.5 * lobatto(functions.shape[1])[1] * duration_s[:, None]
        member = (slice_of * 3 + flow) * 3 + np.sign(direction).astype(np.intp) + 1
        low = int(member.min()) if len(member) else 0
        columns = (np.ones_like(share), *np.moveaxis(functions, -1, 0))
        for sums, (p, q) in zip(self._sums, _PAIRS, strict=True):
            integral = np.einsum("sk,sk,sk->s", columns[p], columns[q], share)
            found = np.bincount(member - low, integral)
            sums[low : low + len(found)] += found

    def finished(self, duration_s: FloatArray) -> RecordSlices:
        """The slices.

        Parameters
        ----------
        duration_s : ndarray, shape (M,)
            Length of each. [s]
        """
        products = np.zeros((self.count, 6, 6))
        sums = self._sums.reshape(len(_PAIRS), self.count, 3, 3)
        for flow, torque in _PLACE.items():
            for sign in (-1, 0, 1):
                place = (_DIRECTION, 0, torque, _SPEED)  # of 1, acceleration, torque and speed
                factor = (float(sign), 1.0, 1.0, 1.0)
                for k, (p, q) in enumerate(_PAIRS):
                    value = factor[p] * factor[q] * sums[k, :, flow, sign + 1]
                    products[:, place[p], place[q]] += value
                    if p != q:
                        products[:, place[q], place[p]] += value
        return RecordSlices(duration_s, products)
