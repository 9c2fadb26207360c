"""Frequency responses and what is read off them: margins, crossover, peak of the sensitivity, bandwidth."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_GRID = 2000  # points on which crossings are bracketed


def transfer(
    A: FloatArray, B: FloatArray, C: FloatArray, frequency_rad_s: FloatArray, *, step_s: float = 0.0
) -> ComplexArray:
    """Frequency response of one input to one output.

    Parameters
    ----------
    A : ndarray, shape (n, n)
        System matrix, continuous, or that of one sample. [-]
    B : ndarray, shape (n,)
        Input column. [-]
    C : ndarray, shape (n,)
        Output row. [-]
    frequency_rad_s : ndarray, shape (m,)
        Angular frequencies. [rad/s]
    step_s : float
        Sampling time; 0 for a continuous system. [s]

    Returns
    -------
    ndarray of complex, shape (m,)
        ``C (p 1 − A)⁻¹ B`` with ``p = jω`` or ``p = exp(jωh)``. [-]

    Examples
    --------
    >>> import numpy as np
    >>> abs(transfer(np.array([[-1.0]]), np.ones(1), np.ones(1), np.array([1.0])))
    array([0.7071])
    """
    w = np.asarray(frequency_rad_s, dtype=float)
    points = np.exp(1j * w * step_s) if step_s > 0.0 else 1j * w
    systems = points[:, None, None] * np.eye(len(A)) - A
    columns = np.broadcast_to(np.asarray(B, dtype=complex)[:, None], (len(w), len(A), 1))
    return np.asarray(np.linalg.solve(systems, columns)[:, :, 0] @ C)


@dataclass(frozen=True)
class Margins:
    """Reserve of a loop against instability; infinite or NaN where there is no such crossing.

    Attributes
    ----------
    phase_margin_rad : float
        Smallest distance of the phase from −180° where the gain is one.
    crossover_rad_s : float
        Where that is.
    gain_margin_ratio : float
        Smallest factor above one on the gain that makes the loop unstable.
    phase_crossover_rad_s : float
        Where that is.
    sensitivity_peak_ratio : float
        Largest ``|1/(1+L)|``: the inverse of the distance from −1.
    sensitivity_peak_rad_s : float
        Where that is.
    """

    phase_margin_rad: float
    crossover_rad_s: float
    gain_margin_ratio: float
    phase_crossover_rad_s: float
    sensitivity_peak_ratio: float
    sensitivity_peak_rad_s: float


def margins(loop: Callable[[FloatArray], ComplexArray], low_rad_s: float, high_rad_s: float) -> Margins:
    """Find the margins of an open loop whose response is known at any frequency.

    Parameters
    ----------
    loop : callable
        Angular frequencies [rad/s], shape (m,), to the complex open-loop response.
    low_rad_s, high_rad_s : float
        Range that is searched. [rad/s]

    Returns
    -------
    Margins
        Crossings are refined to rounding, not read off a grid. [-]

    Notes
    -----
    Of several crossings the one with the smallest reserve counts. Crossings closer together than one part in
    2000 of the logarithmic range can be overlooked.

    Examples
    --------
    >>> found = margins(lambda w: 16 / ((1j * w) * (1j * w + 4)), 1e-2, 1e3)
    >>> math.degrees(found.phase_margin_rad)
    51.8273
    """
    w = np.geomspace(low_rad_s, high_rad_s, _GRID)
    L = loop(w)

    def at(frequency: float) -> complex:
        return complex(loop(np.array([frequency]))[0])

    phase_margin, crossover = math.inf, math.nan
    gain = np.log(np.abs(L))
    for k in np.flatnonzero(np.sign(gain[:-1]) * np.sign(gain[1:]) < 0.0):
        here = _crossing(lambda x: math.log(abs(at(x))), w[k], w[k + 1])
        margin = math.remainder(np.angle(at(here)) + math.pi, 2.0 * math.pi)
        if abs(margin) < abs(phase_margin):
            phase_margin, crossover = margin, here
    gain_margin, phase_crossover = math.inf, math.nan
    crossing = (np.sign(L.imag[:-1]) * np.sign(L.imag[1:]) < 0.0) & (L.real[:-1] < 0.0) & (L.real[1:] < 0.0)
    for k in np.flatnonzero(crossing):
        here = _crossing(lambda x: at(x).imag, w[k], w[k + 1])
        factor = -1.0 / at(here).real
        if 1.0 < factor < gain_margin:
            gain_margin, phase_crossover = factor, here
    sensitivity = 1.0 / np.abs(1.0 + L)
    peak = int(sensitivity.argmax())
    return Margins(
        float(phase_margin), float(crossover), float(gain_margin), float(phase_crossover),
        float(sensitivity[peak]), float(w[peak]),
    )  # fmt: skip


def _crossing(function: Callable[[float], float], low: float, high: float) -> float:
    """Zero between two points; the end nearer to zero where rounding took the change of sign away."""
    from scipy.optimize import brentq

    at_low, at_high = function(low), function(high)
    if at_low * at_high >= 0.0:
        return low if abs(at_low) < abs(at_high) else high
    return float(brentq(function, low, high, xtol=1e-12 * low, rtol=1e-13))


def bandwidth(frequency_rad_s: FloatArray, closed: ComplexArray) -> float:
    """Lowest frequency at which a closed loop has fallen by 3 dB from its first value.

    Parameters
    ----------
    frequency_rad_s : ndarray, shape (m,)
        Angular frequencies, ascending. [rad/s]
    closed : ndarray of complex, shape (m,)
        Closed-loop response there. [-]

    Returns
    -------
    float
        Between two points by logarithmic interpolation; NaN if it is never reached. [rad/s]
    """
    size = np.log(np.abs(closed) / abs(closed[0])) + 0.5 * math.log(2.0)
    below = np.flatnonzero(size < 0.0)
    if not len(below) or below[0] == 0:
        return math.nan
    k = int(below[0])
    share = size[k - 1] / (size[k - 1] - size[k])
    log_w = np.log(frequency_rad_s)
    return float(math.exp(log_w[k - 1] + share * (log_w[k] - log_w[k - 1])))


@dataclass(frozen=True)
class StepFigures:
    """What is read off a step response; NaN where it does not exist."""

    rise_time_s: float  # 10 % to 90 % of the final value
    peak_time_s: float
    overshoot_ratio: float
    settling_time_s: float  # last exit from the band


def step_figures(
    time_s: FloatArray, value: FloatArray, final: float, *, band_ratio: float = 0.02
) -> StepFigures:
    """Rise, peak, overshoot and settling of a recorded step response from rest.

    Parameters
    ----------
    time_s : ndarray, shape (n,)
        Instants, ascending, the step at the first of them. [s]
    value : ndarray, shape (n,)
        The response. [-]
    final : float
        The value it settles at, not zero. [-]
    band_ratio : float
        Half width of the band over the final value. [-]

    Returns
    -------
    StepFigures
        Crossings by linear interpolation, the peak by a parabola through three points. [-]
    """
    y, t = np.asarray(value, dtype=float) / final, np.asarray(time_s, dtype=float)
    low, high = _first_above(t, y, 0.1), _first_above(t, y, 0.9)
    k = int(y.argmax())
    peak, peak_time = float(y[k]), float(t[k])
    if 0 < k < len(y) - 1:
        left, middle, right = y[k - 1], y[k], y[k + 1]
        curve = left - 2.0 * middle + right
        if curve < 0.0:
            shift = 0.5 * (left - right) / curve
            peak, peak_time = (
                float(middle - 0.25 * (left - right) * shift),
                float(t[k] + shift * (t[k + 1] - t[k])),
            )
    overshoot = max(peak - 1.0, 0.0)
    outside = np.flatnonzero(np.abs(y - 1.0) > band_ratio)
    if not len(outside):
        settling = float(t[0])
    elif outside[-1] == len(y) - 1:
        settling = math.nan
    else:
        k = int(outside[-1])
        edge = 1.0 + math.copysign(band_ratio, y[k] - 1.0)
        settling = float(t[k] + (edge - y[k]) / (y[k + 1] - y[k]) * (t[k + 1] - t[k]))
    return StepFigures(high - low, peak_time if overshoot > 0.0 else math.nan, overshoot, settling)


def _first_above(t: FloatArray, y: FloatArray, level: float) -> float:
    above = np.flatnonzero(y >= level)
    if not len(above) or above[0] == 0:
        return math.nan if not len(above) else float(t[0])
    k = int(above[0])
    return float(t[k - 1] + (level - y[k - 1]) / (y[k] - y[k - 1]) * (t[k] - t[k - 1]))
