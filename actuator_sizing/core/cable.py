"""The cable between drive and motor: resistance that the current passes on its way."""

from __future__ import annotations

#: Resistivity of flexible copper conductors at 20 °C, on the upper side of class 5 of IEC 60228 from 0.5 to 6 mm²
#: (from memory): 0.020 Ω·mm²/m against 0.0172 of solid copper, since strands are twisted and plated. [Ω·m]
CONDUCTOR_RESISTIVITY_OHM_M = 2.0e-8
#: Rise of that resistivity per kelvin at 20 °C (annealed copper, IEC 60028). [1/K]
CONDUCTOR_COEFFICIENT_PER_K = 0.00393
#: Usual limit of a conductor in PVC; drop and loss are judged there. [°C]
HOT_CONDUCTOR_DEGC = 70.0


def cable_resistance(length_m: float, cross_section_m2: float) -> float:
    """Resistance of the way there and back, hot; what it adds between two terminals of the motor.

    Parameters
    ----------
    length_m : float
        Length of the cable. [m]
    cross_section_m2 : float
        Cross-section of one conductor. [m²]

    Returns
    -------
    float
        ``2 ρ l/A`` at 70 °C. [Ω]

    Examples
    --------
    >>> cable_resistance(10.0, 1.5e-6)
    0.31907
    """
    rise = HOT_CONDUCTOR_DEGC - 20.0
    resistivity = CONDUCTOR_RESISTIVITY_OHM_M * (1.0 + CONDUCTOR_COEFFICIENT_PER_K * rise)
    return 2.0 * resistivity * length_m / cross_section_m2
