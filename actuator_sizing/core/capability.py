"""What a motor can give at each speed: voltage limit, peak limit, continuous limit."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def terminal_voltage(
    current_a: FloatArray,
    speed_rad_s: FloatArray,
    current_slope_a_s: FloatArray,
    R: FloatArray,
    L: FloatArray,
    K: FloatArray,
    reactance_per_speed: FloatArray,
) -> FloatArray:
    """Magnitude of the model voltage; all arguments broadcast.

    Parameters
    ----------
    current_a : ndarray
        Current in the motor's basis. [A]
    speed_rad_s : ndarray
        Motor speed. [rad/s]
    current_slope_a_s : ndarray
        ``di/dt``; zero to leave inductance out. [A/s]
    R : ndarray
        DC-equivalent resistance. [Ω]
    L : ndarray
        DC-equivalent inductance. [H]
    K : ndarray
        Torque constant, equal to the voltage constant in SI. [N·m/A]
    reactance_per_speed : ndarray
        Pole pairs times inductance; zero for DC and six-step machines. [Ω·s/rad]

    Returns
    -------
    ndarray
        ``√((R i + K ω + L di/dt)² + (p ω L i)²)``. [V]

    Notes
    -----
    Sinusoidal machine at ``i_d = 0``; textbook dq equations.
    """
    along = R * current_a + K * speed_rad_s + L * current_slope_a_s
    across = reactance_per_speed * speed_rad_s * current_a
    return np.asarray(np.sqrt(along * along + across * across))  # half the time of np.hypot


def voltage_limited_current(
    voltage_v: FloatArray,
    speed_rad_s: FloatArray,
    R: FloatArray,
    K: FloatArray,
    reactance_per_speed: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Largest motoring and largest braking current at a speed ≥ 0; all arguments broadcast.

    Parameters
    ----------
    voltage_v : ndarray
        Model voltage available. [V]
    speed_rad_s : ndarray
        Magnitude of speed. [rad/s]
    R : ndarray
        DC-equivalent resistance. [Ω]
    K : ndarray
        Torque constant. [N·m/A]
    reactance_per_speed : ndarray
        Pole pairs times inductance. [Ω·s/rad]

    Returns
    -------
    motoring, braking : ndarray
        The currents at which the voltage is just used up, both as positive magnitudes; a negative motoring
        value means that the speed is above what the voltage allows, NaN that no current at all does. [A]

    Notes
    -----
    Roots of ``(R² + X²) i² + 2 R K ω i + K² ω² − U² = 0`` with ``X = p ω L``, steady (``di/dt = 0``).
    """
    X = reactance_per_speed * speed_rad_s
    emf = K * speed_rad_s
    a = R**2 + X**2
    b = R * emf
    with np.errstate(invalid="ignore"):
        root = np.sqrt(b**2 - a * (emf**2 - voltage_v**2))
    return (-b + root) / a, (b + root) / a


def continuous_current(
    rise_k: FloatArray,
    rating_resistance_k_w: FloatArray,
    speed_resistance_k_w: FloatArray,
    speed_loss_w: FloatArray,
    hot_resistance_ohm: FloatArray,
) -> FloatArray:
    """Continuous current whose steady winding rise just reaches the permitted rise; arguments broadcast.

    Parameters
    ----------
    rise_k : ndarray
        Permitted rise of the winding over ambient, altitude included. [K]
    rating_resistance_k_w : ndarray
        Rise per watt of copper loss. [K/W]
    speed_resistance_k_w : ndarray
        Rise per watt of friction and iron loss (housing to ambient). [K/W]
    speed_loss_w : ndarray
        Friction and iron loss at the speed in question. [W]
    hot_resistance_ohm : ndarray
        DC-equivalent resistance at the winding limit. [Ω]

    Returns
    -------
    ndarray
        ``√(max(ΔT − R_2 P_ω, 0) / (R_th R_hot))``. [A]
    """
    left = np.maximum(rise_k - speed_resistance_k_w * speed_loss_w, 0.0)
    return np.asarray(np.sqrt(left / (rating_resistance_k_w * hot_resistance_ohm)))
