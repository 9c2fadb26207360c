"""What feeds a DC bus: its droop under load, its rise under charge, and what a chopper and its resistor stand."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def sagged_voltage(no_load_v: float, resistance_ohm: float, power_w: FloatArray) -> FloatArray:
    """Bus voltage of a supply with internal resistance that feeds a power, without help from the capacitors.

    Parameters
    ----------
    no_load_v : float
        Voltage of the supply without load. [V]
    resistance_ohm : float
        Internal resistance of supply and leads. [Ω]
    power_w : ndarray
        Power taken from the bus; a negative power does not lift the voltage of a rectifier. [W]

    Returns
    -------
    ndarray
        ``U_0/2 + √(U_0²/4 − R P)``; zero beyond the largest power ``U_0²/(4 R)`` that the supply can give. [V]

    Notes
    -----
    The stable root of ``P = U (U_0 − U)/R``. First principles.

    Examples
    --------
    >>> import numpy as np
    >>> float(sagged_voltage(48.0, 0.1, np.array(1000.0)))
    45.817
    """
    under = 0.25 * no_load_v**2 - resistance_ohm * np.maximum(power_w, 0.0)
    return np.asarray(np.where(under >= 0.0, 0.5 * no_load_v + np.sqrt(np.maximum(under, 0.0)), 0.0))


def charged_voltage(no_load_v: float, resistance_ohm: float, returned_w: FloatArray) -> FloatArray:
    """Bus voltage of a supply with internal resistance that takes a power back.

    Parameters
    ----------
    no_load_v : float
        Voltage of the supply without load. [V]
    resistance_ohm : float
        Internal resistance of supply and leads. [Ω]
    returned_w : ndarray
        Power given back, zero or positive. [W]

    Returns
    -------
    ndarray
        ``U_0/2 + √(U_0²/4 + R P)``. [V]

    Examples
    --------
    >>> import numpy as np
    >>> float(charged_voltage(48.0, 0.1, np.array(1000.0)))
    50.0
    """
    return np.asarray(0.5 * no_load_v + np.sqrt(0.25 * no_load_v**2 + resistance_ohm * returned_w))


def hysteresis_energy(
    capacitance_f: FloatArray, threshold_v: FloatArray, hysteresis_v: FloatArray, supply_v: float
) -> FloatArray:
    """Energy that a chopper takes from the capacitors each time before it switches off.

    Parameters
    ----------
    capacitance_f : ndarray
        Capacitance on the bus. [F]
    threshold_v : ndarray
        Bus voltage at which the chopper switches on. [V]
    hysteresis_v : ndarray
        How far below it switches off. [V]
    supply_v : float
        Highest voltage of the supply, below which the bus does not fall. [V]

    Returns
    -------
    ndarray
        ``½ C (U_on² − U_off²)``; the ideal clamp of the energy account leaves it out. [J]

    Examples
    --------
    >>> import numpy as np
    >>> float(hysteresis_energy(np.array(1e-3), np.array(390.0), np.array(10.0), 358.0))
    3.85
    """
    off = np.maximum(threshold_v - hysteresis_v, supply_v)
    return np.asarray(0.5 * capacitance_f * np.maximum(np.square(threshold_v) - np.square(off), 0.0))


def permitted_pulse(curve_s: FloatArray, curve_j: FloatArray, pulse_s: FloatArray) -> FloatArray:
    """Energy that a brake resistor takes in one pulse of some length, from the curve of its data sheet.

    Parameters
    ----------
    curve_s : ndarray, shape (n,)
        Lengths of pulses, ascending. [s]
    curve_j : ndarray, shape (n,)
        Energy permitted in each. [J]
    pulse_s : ndarray
        Length of the pulse in question. [s]

    Returns
    -------
    ndarray
        Straight between the points in logarithmic scales, as such curves are drawn; the first energy holds for
        shorter pulses, which heat only the wire, the last for longer ones, on the safe side. [J]

    Examples
    --------
    >>> import numpy as np
    >>> permitted_pulse(np.array([0.1, 10.0]), np.array([400.0, 4000.0]), np.array([0.01, 1.0])).tolist()
    [400.0, 1264.911]
    """
    at = np.log(np.maximum(pulse_s, curve_s[0]))
    return np.asarray(np.exp(np.interp(at, np.log(curve_s), np.log(curve_j))))
