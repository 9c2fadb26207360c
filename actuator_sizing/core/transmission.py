"""Torque through a transmission stage, by the direction of power.

Conventions (physics of the whole package): torque and speed positive in the positive sense of motion; power
``T ω > 0`` is motoring. A stage's efficiency is power out over power in, in the direction power flows.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

STANDSTILL, MOTORING, BACK_DRIVING = 0, 1, 2


def stage_factor(flow: NDArray[np.int8], efficiency: FloatArray, efficiency_back: FloatArray) -> FloatArray:
    """Torque at the input of a stage times its ratio, per torque at its output.

    Parameters
    ----------
    flow : ndarray of int
        STANDSTILL, MOTORING or BACK_DRIVING. [-]
    efficiency : ndarray
        Forward efficiency. [-]
    efficiency_back : ndarray
        Back-driving efficiency; ≤ 0 is self-locking. [-]

    Returns
    -------
    ndarray
        ``1/η`` motoring, ``η_b`` back-driving; at rest 1 (friction is not counted on), 0 if self-locking. [-]

    Notes
    -----
    A self-locking stage gives a negative factor when the load would drive: the motor must push the load
    down, and at rest it need not hold. Statics of a lossy stage, first principles.
    """
    holding = np.where(efficiency_back > 0.0, 1.0, 0.0)
    return np.asarray(
        np.select([flow == MOTORING, flow == BACK_DRIVING], [1.0 / efficiency, efficiency_back], holding)
    )
