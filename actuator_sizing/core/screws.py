"""What a screw stands: whirling, buckling, and the speed of its sliding flanks."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

STEEL_MODULUS_PA = 210e9  # Young's modulus of steel, common practice
STEEL_DENSITY_KG_M3 = 7850.0  # plain and alloyed steel, common practice
SOFTEST_STEEL_YIELD_PA = 235e6  # weakest steel that screws are made of (S235 of EN 10025), common practice

#: How the ends of a screw are held: (root of the frequency equation of its bending, effective length for
#: buckling over its length). Roots of beam theory (cosh λ cos λ = −1, sin λ = 0, tan λ = tanh λ, cosh λ cos λ = 1),
#: effective lengths of Euler's columns; e.g. Budynas & Nisbett, Shigley's Mechanical Engineering Design.
END_FIXITIES: dict[str, tuple[float, float]] = {
    "fixed-free": (1.8751040687, 2.0),
    "supported-supported": (np.pi, 1.0),
    "fixed-supported": (3.9266023120, 0.6991556597),
    "fixed-fixed": (4.7300407449, 0.5),
}


def critical_speed(root_diameter_m: float, length_m: float, fixity: str) -> float:
    """Lowest critical (whirling) speed of a slender steel screw.

    Parameters
    ----------
    root_diameter_m : float
        Diameter at the root of the thread. [m]
    length_m : float
        Longest unsupported length. [m]
    fixity : str
        Key of `END_FIXITIES`.

    Returns
    -------
    float
        ``(λ/L)² √(E I/(ρ A))`` with ``√(I/A) = d/4``; NaN where something is not known. [rad/s]

    Notes
    -----
    First bending frequency of a uniform Euler–Bernoulli beam; first principles. The factors 3.4, 9.7, 15.1 and
    21.9 (·10⁷ d/L², in 1/min and mm) of the trade are 0.8 of this, rounded.

    Examples
    --------
    >>> critical_speed(0.02, 1.0, "supported-supported") * 30.0 / 3.141592653589793
    2437.3391
    """
    root = END_FIXITIES[fixity][0]
    return float(
        (root / length_m) ** 2 * np.sqrt(STEEL_MODULUS_PA / STEEL_DENSITY_KG_M3) * root_diameter_m / 4.0
    )


def slenderness(root_diameter_m: float, length_m: float, fixity: str) -> float:
    """Effective length over radius of gyration of a round column. [-]"""
    return END_FIXITIES[fixity][1] * length_m / (root_diameter_m / 4.0)


def buckling_force(root_diameter_m: float, length_m: float, fixity: str, yield_pa: float) -> float:
    """Force at which a steel screw buckles: Euler where it is slender, Johnson's parabola where it is not.

    Parameters
    ----------
    root_diameter_m : float
        Diameter at the root of the thread. [m]
    length_m : float
        Longest loaded length between nut and thrust bearing. [m]
    fixity : str
        Key of `END_FIXITIES`.
    yield_pa : float
        Yield strength; NaN: not known, Euler alone is taken. [Pa]

    Returns
    -------
    float
        ``A π² E/s²``, or ``A σ_y (1 − σ_y s²/(4 π² E))`` where Euler's stress exceeds half the yield strength,
        with the slenderness s. [N]

    Notes
    -----
    Euler (1757) and J. B. Johnson, e.g. Budynas & Nisbett, Shigley's Mechanical Engineering Design, columns; both
    meet with the same slope at ``σ = σ_y/2``.

    Examples
    --------
    >>> buckling_force(0.02, 1.0, "supported-supported", float("nan"))
    16278.2953
    """
    area = np.pi * root_diameter_m**2 / 4.0
    s = slenderness(root_diameter_m, length_m, fixity)
    with np.errstate(divide="ignore"):
        euler = np.pi**2 * STEEL_MODULUS_PA / np.float64(s) ** 2
    if euler <= 0.5 * yield_pa or np.isnan(yield_pa):
        return float(area * euler)
    return float(area * yield_pa * (1.0 - yield_pa / (4.0 * euler)))


def is_slender(root_diameter_m: float, length_m: float, fixity: str) -> bool:
    """Whether Euler holds whatever the steel: slenderness of at least √(2 π² E/σ_y) of the softest, 133.

    Parameters
    ----------
    root_diameter_m : float
        Diameter at the root of the thread. [m]
    length_m : float
        Longest loaded length. [m]
    fixity : str
        Key of `END_FIXITIES`.

    Returns
    -------
    bool
        A screw that is not slender needs its yield strength.

    Notes
    -----
    There Euler's stress is half the yield strength, as in `buckling_force`; the softer the steel, the more slender
    a screw must be for Euler.
    """
    transition = np.sqrt(2.0 * np.pi**2 * STEEL_MODULUS_PA / SOFTEST_STEEL_YIELD_PA)
    return bool(slenderness(root_diameter_m, length_m, fixity) >= transition)


def sliding_speed_per_turn(mean_diameter_m: float, lead_m: float) -> float:
    """Speed along the flank over speed of rotation, ``√((d/2)² + (lead/2π)²)``. [m/rad]

    Parameters
    ----------
    mean_diameter_m : float
        Mean diameter of the thread. [m]
    lead_m : float
        Travel per turn. [m]

    Returns
    -------
    float
        Length of the helix per angle; times rad/s it is m/s. [m]
    """
    return float(np.hypot(0.5 * mean_diameter_m, lead_m / (2.0 * np.pi)))


def nut_half_loads(force_n: FloatArray, preload_n: float) -> tuple[FloatArray, FloatArray]:
    """Axial loads of the two halves of a preloaded nut.

    Parameters
    ----------
    force_n : ndarray
        Axial force of the load, signed. [N]
    preload_n : float
        Force between the halves without load; zero: the half that faces the force carries it alone. [N]

    Returns
    -------
    first_n, second_n : ndarray
        ``F_p (1 ± F/(2√2 F_p))^{3/2}``; beyond ``|F| = 2√2 F_p`` one half carries all and the other nothing. [N]

    Notes
    -----
    Two equal ball contacts, ``δ ∝ F^{2/3}``, pressed together: the displacement ``F/(2√2 F_p)`` of that form is
    the secant of the exact one and meets it where a half comes free. Form of ISO 3408-5, from memory.

    Examples
    --------
    >>> first, second = nut_half_loads(np.array([0.0, 2e3]), 500.0)
    >>> first.tolist(), second.tolist()
    ([500.0, 2000.0], [500.0, 0.0])
    """
    F = np.asarray(force_n, dtype=float)
    reach = 2.0 * np.sqrt(2.0) * preload_n
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.clip(np.where(reach > 0.0, F / reach, np.sign(F)), -1.0, 1.0)
    return (
        np.where(F >= reach, F, preload_n * (1.0 + share) ** 1.5),
        np.where(-F >= reach, -F, preload_n * (1.0 - share) ** 1.5),
    )


def nut_life(first: float, second: float) -> float:
    """Life of a nut from those of its halves, ``(L_1^(−10/9) + L_2^(−10/9))^(−9/10)``.

    Parameters
    ----------
    first, second : float
        Lives in turns; infinite where a half carries nothing. [-]

    Returns
    -------
    float
        Life of both together, in turns. [-]

    Notes
    -----
    Product of the probabilities of survival, Weibull slope 10/9 as for ball bearings (ISO 281).

    Examples
    --------
    >>> nut_life(1e6, float("inf"))
    1000000.0
    """
    lost = first ** (-10.0 / 9.0) + second ** (-10.0 / 9.0)
    return float("inf") if lost == 0.0 else float(lost ** (-0.9))
