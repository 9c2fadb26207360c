"""Torque through a transmission stage, by the direction of power.

Conventions (physics of the whole package): torque and speed positive in the positive sense of motion; power
``T ω > 0`` is motoring. A stage's efficiency is power out over power in, in the direction power flows.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

STANDSTILL, MOTORING, BACK_DRIVING = 0, 1, 2

GEAR_EXPONENT = 3.0  # equivalent torque of gears and ball bearings; common practice, no source


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


def equivalent_torque(
    duration_s: FloatArray, speed_rad_s: FloatArray, torque_nm: FloatArray, exponent: float
) -> tuple[float, float]:
    """Equivalent torque of a gear for wear: weighted by revolutions.

    Parameters
    ----------
    duration_s : ndarray, shape (P,)
        Length of each smooth piece. [s]
    speed_rad_s : ndarray, shape (P, K)
        Speed of the shaft at the nodes of each piece. [rad/s]
    torque_nm : ndarray, shape (P, K)
        Torque of the same shaft. [N·m]
    exponent : float
        3 for gears and ball bearings, 10/3 for roller bearings. [-]

    Returns
    -------
    torque_nm : float
        ``(∫ |ω| |T|^p dt / ∫ |ω| dt)^{1/p}``; zero for a shaft that never turns. [N·m]
    angle_rad : float
        Angle turned per cycle, both directions added. [rad]

    Notes
    -----
    Same weighting by revolutions as the equivalent load of ISO 3408-5; exponent 3 is common practice.

    Examples
    --------
    >>> import numpy as np
    >>> speed = np.full((2, 3), 100.0)
    >>> torque = np.array([[10.0] * 3, [20.0] * 3])
    >>> equivalent_torque(np.array([1.0, 1.0]), speed, torque, 3.0)[0]
    16.5096
    """
    from actuator_sizing.core.quadrature import integrate

    turned = float(integrate(duration_s, np.abs(speed_rad_s)))
    if turned == 0.0:
        return 0.0, 0.0
    # Scaled by the largest torque: the cube of a very small or large torque would leave the number range.
    scale = float(np.max(np.abs(torque_nm)))
    if scale == 0.0:
        return 0.0, turned
    worked = float(integrate(duration_s, np.abs(speed_rad_s) * np.abs(torque_nm / scale) ** exponent))
    return scale * (worked / turned) ** (1.0 / exponent), turned
