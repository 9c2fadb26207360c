"""The cycle divided for heating: means of losses over parts that are short against the winding's time constant."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.parameters import MotorParameters
from actuator_sizing.core.thermal import subpiece_counts, subpiece_durations, subpiece_means
from actuator_sizing.sizing.robustness.cycle_nodes import CycleNodes
from actuator_sizing.sizing.thermal_data import fastest_time_constant

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class HeatParts:
    """Parts of a cycle, S of them.

    Attributes
    ----------
    duration_s : ndarray, shape (S,)
        Their lengths. [s]
    matrices : tuple of ndarray
        For each piece, from node values to means over its parts. [-]
    released : ndarray, shape (S,)
        One where the coil of the holding brake is fed. [-]
    of_speed : tuple of ndarray, shape (S,)
        Means of magnitude and square of the speed of the driven shaft. [-]
    """

    duration_s: FloatArray
    matrices: tuple[FloatArray, ...]
    released: FloatArray
    of_speed: tuple[FloatArray, FloatArray]

    @classmethod
    def of(cls, nodes: CycleNodes, motors: MotorParameters) -> HeatParts:
        """Divide a cycle for the one motor without spread, so that no sample depends on the others."""
        tau = float(fastest_time_constant(motors)[0])
        demand = nodes.demand
        varies = demand.shaft_torque[None] ** 2 + demand.shaft_acceleration[None] ** 2
        counts = subpiece_counts(demand.duration_s, varies, tau if np.isfinite(tau) else np.inf)
        eye = np.eye(nodes.count)[:, None, :]
        matrices = tuple(subpiece_means(eye, np.array([count])).T for count in counts)
        fed = ~(demand.brake_closed & (demand.direction == 0.0))
        speed = demand.shaft_speed[..., None]
        return cls(
            subpiece_durations(demand.duration_s, counts),
            matrices,
            np.repeat(fed, counts).astype(float),
            (_means(matrices, np.abs(speed))[0], _means(matrices, speed**2)[0]),
        )

    def means(self, values: FloatArray) -> FloatArray:
        """Means over the parts, shape (P, K, B) to (B, S). [-]"""
        return _means(self.matrices, values)


def _means(matrices: tuple[FloatArray, ...], values: FloatArray) -> FloatArray:
    if all(len(matrix) == 1 for matrix in matrices):
        return np.asarray((matrices[0] @ values)[:, 0].T)
    return np.concatenate([m @ v for m, v in zip(matrices, values, strict=True)]).T
