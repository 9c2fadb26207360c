"""Limits of a drive beside its currents: derating, current of one leg, ripple of its pulses."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.parameters import BRUSHED, SINUSOIDAL, SIX_STEP

FloatArray = NDArray[np.float64]

#: Height above sea level up to which ratings of drives hold; common practice, as in IEC 61800-2 (from memory). [m]
RATED_ALTITUDE_M = 1000.0
#: Peak-to-peak ripple of the current is at most this part of ``U/(L f)``: bipolar switching of a bridge at half the
#: duty; one leg that switches alone; centred three-phase modulation at its largest, where a phase passes zero.
RIPPLE_FACTORS = {BRUSHED: 1.0 / 2.0, SIX_STEP: 1.0 / 4.0, SINUSOIDAL: 1.0 / 3.0}


def derating_factor(excess: FloatArray | float, factor_per_unit: FloatArray) -> FloatArray:
    """Part of a rating that is left beyond its rated surroundings.

    Parameters
    ----------
    excess : float or ndarray
        How far the surroundings are beyond the rated ones, in the unit that the derating is stated per. [-]
    factor_per_unit : ndarray, shape (n,)
        Part of the rating lost per unit; NaN where none is stated. [-]

    Returns
    -------
    ndarray, shape (n,)
        ``max(0, 1 − k x)``, 1 within the rated surroundings, NaN beyond them without a stated derating. [-]

    Examples
    --------
    >>> import numpy as np
    >>> derating_factor(5.0, np.array([0.02, np.nan])).tolist()
    [0.9, nan]
    >>> derating_factor(-5.0, np.array([0.02, np.nan])).tolist()
    [1.0, 1.0]
    """
    beyond = np.maximum(excess, 0.0)
    left = np.maximum(1.0 - factor_per_unit * beyond, 0.0)
    return np.asarray(np.where(beyond > 0.0, left, 1.0))


def ripple_current(
    bus_v: float, terminal_inductance_h: FloatArray, pwm_hz: FloatArray, commutation: NDArray[np.int8]
) -> FloatArray:
    """Largest peak-to-peak ripple of the current that pulse-width modulation makes.

    Parameters
    ----------
    bus_v : float
        Bus voltage. [V]
    terminal_inductance_h : ndarray, shape (n,)
        Inductance terminal-to-terminal. [H]
    pwm_hz : ndarray, shape (n,)
        Frequency of the pulses. [Hz]
    commutation : ndarray of int, shape (n,)
        How each motor is fed. [-]

    Returns
    -------
    ndarray, shape (n,)
        ``U/(2 L f)`` for a brushed motor on a bipolar bridge, ``U/(4 L f)`` six-step, ``U/(3 L f)`` sinusoidal,
        with L terminal-to-terminal. [A]

    Notes
    -----
    Volt-seconds of one pulse against its mean, largest over the duty; first principles. Back-EMF and resistance
    do not change the largest value, since it is taken over every duty.

    Examples
    --------
    >>> import numpy as np
    >>> float(ripple_current(325.0, np.array([9e-3]), np.array([8000.0]), np.array([2]))[0])
    1.5046
    """
    factor = np.select([commutation == key for key in RIPPLE_FACTORS], list(RIPPLE_FACTORS.values()), np.nan)
    return np.asarray(factor * bus_v / (terminal_inductance_h * pwm_hz))


def ripple_loss(
    ripple_a: FloatArray, terminal_resistance_ohm: FloatArray, commutation: NDArray[np.int8]
) -> FloatArray:
    """Copper loss of a triangular ripple, at most.

    Parameters
    ----------
    ripple_a : ndarray, shape (n,)
        Peak-to-peak ripple. [A]
    terminal_resistance_ohm : ndarray, shape (n,)
        Resistance terminal-to-terminal. [Ω]
    commutation : ndarray of int, shape (n,)
        How each motor is fed. [-]

    Returns
    -------
    ndarray, shape (n,)
        ``R Δi²/12``; 1.5 times that where three phases carry it, all of them taken at their largest. [W]
    """
    phases = np.where(commutation == SINUSOIDAL, 1.5, 1.0)
    return np.asarray(phases * terminal_resistance_ohm * ripple_a**2 / 12.0)
