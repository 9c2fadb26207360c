"""Times of the periodic duty types, and how mixed loads age an insulation."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

#: Cycle to which a cyclic duration factor refers where nothing else is said; IEC 60034-1 (from memory).
USUAL_CYCLE_S = 600.0
#: Rise that halves the life of an insulation: Montsinger's rule, a rule of thumb.
LIFE_HALVING_K = 10.0


def loaded_time(rest_s: float, duration_factor: float) -> float:
    """Time under load of a cycle from its rest and the cyclic duration factor.

    Parameters
    ----------
    rest_s : float
        Resting time. [s]
    duration_factor : float
        Loaded time over the time of the cycle, above 0 and below 1. [-]

    Returns
    -------
    float
        Loaded time, the inverse of `permissible_load.rest_time`. [s]

    Examples
    --------
    >>> loaded_time(1800.0, 0.25)
    600.0
    """
    return rest_s * duration_factor / (1.0 - duration_factor)


def usual_times(duration_factor: float) -> tuple[float, float]:
    """Loaded and resting time of a cycle of 10 min.

    Parameters
    ----------
    duration_factor : float
        Loaded time over the time of the cycle. [-]

    Returns
    -------
    tuple of float
        Loaded and resting time. [s]

    Examples
    --------
    >>> usual_times(0.4)
    (240.0, 360.0)
    """
    return USUAL_CYCLE_S * duration_factor, USUAL_CYCLE_S * (1.0 - duration_factor)


def relative_life(share: ArrayLike, excess_k: ArrayLike) -> float:
    """Thermal life of an insulation under loads that take turns, over its life at the reference temperature.

    Parameters
    ----------
    share : array_like, shape (n,)
        Part of the time spent at each load; together 1. [-]
    excess_k : array_like, shape (n,)
        Temperature of the winding at each load less the reference temperature. [K]

    Returns
    -------
    float
        ``1 / Σ s_i 2^(Δϑ_i / 10 K)``. [-]

    Notes
    -----
    Montsinger's rule (1930), by which life halves for every 10 K, summed over the loads as damage. IEC 60034-1
    states a relative thermal life of duty type S10 in the same form, with an exponent that belongs to the insulation
    (from memory). A rule of thumb, no guarantee.

    Examples
    --------
    >>> relative_life([0.5, 0.5], [0.0, 10.0])
    0.6667
    """
    damage = np.asarray(share) @ 2.0 ** (np.asarray(excess_k, dtype=float) / LIFE_HALVING_K)
    return float(1.0 / damage)
