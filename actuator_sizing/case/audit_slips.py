"""Names for the factors by which data sheets go wrong."""

from __future__ import annotations

import math

# A factor, and what was probably mixed up. The factors of conventions follow from the sinusoidal machine
# (see `core.conventions`), those of units from their definitions.
RMS_PEAK = (math.sqrt(2.0), "×√2: rms and peak values mixed up")
LINE_PHASE = (math.sqrt(3.0), "×√3: line-to-line and phase values mixed up")
RMS_PEAK_SQUARED = (2.0, "×2: rms and peak values mixed up (the constant counts squared)")
LINE_PHASE_SQUARED = (3.0, "×3: line-to-line and phase values mixed up (the constant counts squared)")
TERMINAL_PHASE = (2.0, "×2: terminal-to-terminal and phase values of the winding mixed up")
THREE_HALVES = (1.5, "×3/2: power of one phase and of three mixed up, or a DC basis for a sinusoidal motor")
LINE_PHASE_RMS_PEAK = (math.sqrt(6.0), "×√6: rms phase and peak line-to-line values mixed up")
LINE_RMS_PHASE_PEAK = (math.sqrt(1.5), "×√(3/2): rms line-to-line and peak phase values mixed up")
FLYWHEEL = (4.0, "×4: GD² (flywheel effect) entered as moment of inertia")
KILOGRAM_FORCE = (9.80665, "×9.81: kgf (kp) and N mixed up")
REVOLUTIONS = (2.0 * math.pi, "×2π: revolutions and radians mixed up")
PER_MINUTE = (60.0 / (2.0 * math.pi), "×60/2π: 1/min and rad/s mixed up")
POUND_INCH = (8.8507, "×8.85: lb·in and N·m mixed up")
OUNCE_INCH = (141.61, "×141.6: oz·in and N·m mixed up")
POUND_MASS = (32.174, "×32.2: lb·ft² and lb·ft·s² mixed up")
INCH_MASS = (386.09, "×386: lb·in² and lb·in·s² mixed up")

Slip = tuple[float, str]

_NEAR = math.log(1.08)  # honest scatter of a data sheet beside the factor
_DECADES = 9


def name_slip(factor: float, slips: tuple[Slip, ...]) -> str:
    """Name the slips that explain a wrong factor, nearest first, two at most.

    Parameters
    ----------
    factor : float
        Stated over expected value, above zero. [-]
    slips : tuple of (float, str)
        Slips that are possible here; powers of ten are always tried.

    Returns
    -------
    str
        The names, joined by "or"; empty if none is near.

    Examples
    --------
    >>> name_slip(1 / 1.72, (RMS_PEAK, LINE_PHASE))
    '×√3: line-to-line and phase values mixed up'
    >>> name_slip(1.0e-3, ())
    '×1000: a unit prefix is wrong'
    >>> name_slip(1.17, (RMS_PEAK,))
    ''
    """
    size = abs(math.log(factor))
    decades = ((10.0**k, f"×{10**k}: a unit prefix is wrong") for k in range(1, _DECADES + 1))
    ranked = sorted((abs(size - math.log(value)), text) for value, text in (*slips, *decades))
    return ", or ".join(text for distance, text in ranked[:2] if distance <= _NEAR)
