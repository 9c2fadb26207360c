"""How long an overload may last under a first-order thermal model of the protected part."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray


def overload_trip_time(
    time_constant_s: ArrayLike,
    current_a: ArrayLike,
    limit_current_a: ArrayLike,
    preload_current_a: ArrayLike = 0.0,
) -> NDArray[np.float64]:
    """Time until a constant current heats a first-order body to its limit.

    Parameters
    ----------
    time_constant_s : array_like
        Thermal time constant. [s]
    current_a : array_like
        Overload current from time zero on. [A]
    limit_current_a : array_like
        Current that would reach the limit only after endless time, in the same basis. [A]
    preload_current_a : array_like
        Current carried until equilibrium before; below the limit current. [A]

    Returns
    -------
    ndarray, shape of the arguments broadcast
        Time to the limit; infinite when the current is not above the limit current. [s]

    Notes
    -----
    ``t = τ ln((I² − I_p²)/(I² − I_l²))``, the form of IEC 60255-149 with the factor k inside the limit
    current; it also follows from the first-order step response. It is a model of its own: the i²t
    accumulator and the windowed RMS give other times.

    Examples
    --------
    >>> float(overload_trip_time(600.0, 2.0, 1.05)) / 60.0
    3.2245
    """
    tau = np.asarray(time_constant_s, dtype=np.float64)
    square, limit, preload = (
        np.asarray(current, dtype=np.float64) ** 2
        for current in (current_a, limit_current_a, preload_current_a)
    )
    trips = square > limit
    surplus = np.where(trips, square - limit, 1.0)
    # log1p keeps digits when the preload is close to the limit.
    return np.asarray(np.where(trips, tau * np.log1p((limit - preload) / surplus), np.inf))
