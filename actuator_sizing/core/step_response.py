"""A motor with its load at a step of voltage: closed form of the linear DC model, no time stepping."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

#: Settling: last exit from this part of the final speed around it. [-]
SETTLING_BAND = 0.02
_RISE_FROM, _RISE_TO = 0.1, 0.9


class _Modes(NamedTuple):
    """Poles of the second-order motion, real or a conjugate pair."""

    slow: float  # real poles: the slower; pair: the real part
    gap: float  # real poles: slower minus faster
    frequency: float  # pair: the imaginary part, else 0

    def free(self, value: float, slope: float, t: FloatArray) -> FloatArray:
        """Free motion from a start value and start slope."""
        decay = np.exp(self.slow * t)
        if self.frequency > 0.0:
            sine = np.sin(self.frequency * t) / self.frequency
            return np.asarray(
                decay * (value * np.cos(self.frequency * t) + (slope - self.slow * value) * sine)
            )
        window = -np.expm1(-self.gap * t) / self.gap if self.gap > 0.0 else t
        return np.asarray(decay * (value + (slope - self.slow * value) * window))


@dataclass(frozen=True)
class StepResponse:
    """Speed and current after a step of voltage from rest, both starting at zero.

    NaN stands for what does not exist: rise and settling where the final speed is zero or is not held, the
    instant of a peak that is only approached.

    Attributes
    ----------
    voltage_v : float
        Height of the step. [V]
    electrical_time_constant_s : float
        ``L/R``; 0 without inductance. [s]
    mechanical_time_constant_s : float
        ``R J/K²``; infinite without torque. [s]
    poles_per_s : tuple of complex
        Slow and fast pole; only one without inductance. [1/s]
    final_speed_rad_s, final_current_a : float
        Where both end. [rad/s], [A]
    rise_time_s : float
        From 10 % to 90 % of the final speed. [s]
    peak_speed_rad_s, peak_time_s : float
        Largest speed and its instant; the final speed and NaN without overshoot. [rad/s], [s]
    overshoot_ratio : float
        Peak over final speed, minus one. [-]
    settling_time_s : float
        Last exit from ±2 % of the final speed; infinite if undamped. [s]
    peak_current_a, peak_current_time_s : float
        Largest current and its instant; the final current and NaN if it is only approached. [A], [s]
    """

    voltage_v: float
    electrical_time_constant_s: float
    mechanical_time_constant_s: float
    poles_per_s: tuple[complex, ...]
    final_speed_rad_s: float
    final_current_a: float
    rise_time_s: float
    peak_speed_rad_s: float
    peak_time_s: float
    overshoot_ratio: float
    settling_time_s: float
    peak_current_a: float
    peak_current_time_s: float
    _modes: _Modes
    _start_slope_a_per_s: float  # of the current; NaN: it jumps
    _jump_a: float  # current at once after the step, without inductance

    def speed_at(self, time_s: ArrayLike) -> FloatArray:
        """Evaluate the speed at instants after the step.

        Parameters
        ----------
        time_s : array_like, shape (n,)
            Instants, ≥ 0. [s]

        Returns
        -------
        ndarray, shape (n,)
            Speed. [rad/s]
        """
        t = np.asarray(time_s, dtype=float)
        slope = self._modes.slow * -self.final_speed_rad_s if math.isnan(self._start_slope_a_per_s) else 0.0
        return self.final_speed_rad_s + self._modes.free(-self.final_speed_rad_s, slope, t)

    def current_at(self, time_s: ArrayLike) -> FloatArray:
        """Evaluate the current at instants after the step.

        Parameters
        ----------
        time_s : array_like, shape (n,)
            Instants, ≥ 0. [s]

        Returns
        -------
        ndarray, shape (n,)
            Current. [A]
        """
        t = np.asarray(time_s, dtype=float)
        if math.isnan(self._start_slope_a_per_s):
            start = self._jump_a - self.final_current_a
            return self.final_current_a + self._modes.free(start, self._modes.slow * start, t)
        return self.final_current_a + self._modes.free(-self.final_current_a, self._start_slope_a_per_s, t)

    def series(
        self, count: int = 400, end_s: float | None = None
    ) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Time, current and speed for a figure.

        Parameters
        ----------
        count : int
            Number of points. [-]
        end_s : float, optional
            Last instant; by default the response has then settled. [s]

        Returns
        -------
        tuple of ndarray, each shape (count,)
            Time, current, speed; early points are closer together. [s], [A], [rad/s]
        """
        if end_s is None:
            rates = [abs(pole.real) for pole in self.poles_per_s if pole.real < 0.0]
            end_s = 5.0 / min(rates) if rates else 1.0
            if math.isfinite(self.settling_time_s):
                end_s = 1.4 * self.settling_time_s
        t = end_s * np.linspace(0.0, 1.0, count) ** 2
        return t, self.current_at(t), self.speed_at(t)


def voltage_step(
    resistance_ohm: float,
    inductance_h: float,
    torque_constant: float,
    inertia: float,
    viscous: float,
    voltage: float,
) -> StepResponse:
    """Response of motor and rigid load to a step of voltage.

    Parameters
    ----------
    resistance_ohm : float
        DC-equivalent resistance, > 0. [Ω]
    inductance_h : float
        DC-equivalent inductance; 0 or NaN: current follows at once. [H]
    torque_constant : float
        Torque or force constant, equal to the back-EMF constant, ≥ 0. [N·m/A or N/A]
    inertia : float
        All inertia or mass referred to the motor, > 0. [kg·m² or kg]
    viscous : float
        All viscous friction referred to the motor, ≥ 0. [N·m·s/rad or N·s/m]
    voltage : float
        Height of the step, any sign. [V]

    Returns
    -------
    StepResponse
        Closed form and its figures.

    Notes
    -----
    ``L i' = u − R i − K ω``, ``J ω' = K i − b ω``: poles of ``s² + (R/L + b/J) s + (R b + K²)/(L J)``.
    Extremes are at the roots of the derivative in closed form; instants of 10, 90 and ±2 % are bracketed
    by them and refined to rounding. Textbook model, e.g. Franklin, Powell & Emami-Naeini, Feedback Control
    of Dynamic Systems. Coulomb friction and saturation are left out.

    Examples
    --------
    >>> voltage_step(1.0, 0.5, 0.01, 0.01, 0.1, 1.0).final_speed_rad_s
    0.0999
    """
    R, L, K, J = resistance_ohm, inductance_h, torque_constant, inertia
    b, u = viscous, voltage
    stiffness = R * b + K * K
    final_speed = K * u / stiffness if stiffness > 0.0 else 0.0
    final_current = b * u / stiffness if stiffness > 0.0 else u / R
    mechanical = R * J / (K * K) if K * K > 0.0 else math.inf
    has_lag = L > 0.0 and math.isfinite(R / L)
    if has_lag:
        modes, poles = _second_order(R / L, b / J, K * K / (L * J))
        peak_current_time = _current_peak_time(modes, R / L, K * K / (L * J))
        start_slope = u / L
    else:
        modes, poles = _Modes(-stiffness / (R * J), 0.0, 0.0), (complex(-stiffness / (R * J)),)
        peak_current_time, start_slope = (0.0 if K > 0.0 else math.nan), math.nan
    if u == 0.0:
        peak_current_time = math.nan
    rise, settling, peak_time, overshoot = _speed_figures(modes, has_lag, moves=final_speed != 0.0)
    bare = StepResponse(
        voltage_v=u,
        electrical_time_constant_s=L / R if has_lag else 0.0,
        mechanical_time_constant_s=mechanical,
        poles_per_s=poles,
        final_speed_rad_s=final_speed,
        final_current_a=final_current,
        rise_time_s=rise,
        peak_speed_rad_s=final_speed * (1.0 + overshoot) if final_speed != 0.0 else 0.0,
        peak_time_s=peak_time,
        overshoot_ratio=overshoot,
        settling_time_s=settling,
        peak_current_a=final_current,
        peak_current_time_s=peak_current_time,
        _modes=modes,
        _start_slope_a_per_s=start_slope,
        _jump_a=u / R,
    )
    if math.isnan(peak_current_time):
        return bare
    peak_current = float(bare.current_at(peak_current_time))
    return StepResponse(**{**vars(bare), "peak_current_a": peak_current})


def _second_order(
    electrical: float, mechanical: float, coupling: float
) -> tuple[_Modes, tuple[complex, ...]]:
    """Poles of ``(s + electrical)(s + mechanical) + coupling``."""
    half_difference, middle = 0.5 * (electrical - mechanical), 0.5 * (electrical + mechanical)
    discriminant = half_difference * half_difference - coupling
    if discriminant < 0.0:
        frequency = math.sqrt(-discriminant)
        return _Modes(-middle, 0.0, frequency), (complex(-middle, frequency), complex(-middle, -frequency))
    root = math.sqrt(discriminant)
    fast = -(middle + root)
    # the product of the poles gives the slow one without cancellation
    slow = (electrical * mechanical + coupling) / fast if fast < 0.0 else 0.0
    return _Modes(slow, slow - fast if root > 0.0 else 0.0, 0.0), (complex(slow), complex(fast))


def _current_peak_time(modes: _Modes, electrical: float, coupling: float) -> float:
    """Root of ``i'``, which starts as ``i'' = −(R/L) i'`` and obeys the same equation; NaN if none."""
    lead = electrical + modes.slow
    if modes.frequency > 0.0:
        return math.atan2(modes.frequency, lead) / modes.frequency
    if not (lead > 0.0 and coupling > 0.0):
        return math.nan
    if modes.gap <= 0.5 * lead:
        return -math.log1p(-modes.gap / lead) / modes.gap if modes.gap > 0.0 else 1.0 / lead
    # (R/L + p_1)(R/L + p_2) = K²/(L J) gives 1 − gap/lead without cancellation
    return (2.0 * math.log(lead) - math.log(coupling)) / modes.gap


def _speed_figures(modes: _Modes, has_lag: bool, moves: bool) -> tuple[float, float, float, float]:
    """Rise time, settling time, peak time, overshoot of the speed."""
    if not moves:
        return math.nan, math.nan, math.nan, math.nan
    start_slope = 0.0 if has_lag else -modes.slow

    def missing(t: float) -> float:
        return float(modes.free(1.0, -start_slope, np.float64(t)))  # type: ignore[arg-type]

    peak_time, overshoot = math.nan, 0.0
    if modes.frequency > 0.0:
        half_turn = math.pi / modes.frequency
        peak_time, overshoot = half_turn, math.exp(modes.slow * half_turn)
        end = half_turn
        if modes.slow == 0.0:
            settling = math.inf
        else:
            # extremes at multiples of the half turn fall as exp(slow t): the last one outside the band
            turns = math.floor(math.log(SETTLING_BAND) / (modes.slow * half_turn))
            level = SETTLING_BAND if turns % 2 == 0 else -SETTLING_BAND
            start = turns * half_turn
            settling = _root(lambda t: missing(t) - level, start, start + half_turn)
    else:
        if modes.slow == 0.0:
            return math.nan, math.nan, math.nan, math.nan
        end = 1.0 / -modes.slow
        while missing(end) > 0.5 * SETTLING_BAND:
            end *= 2.0
        settling = _root(lambda t: missing(t) - SETTLING_BAND, 0.0, end)
    first = _root(lambda t: missing(t) - (1.0 - _RISE_FROM), 0.0, end)
    last = _root(lambda t: missing(t) - (1.0 - _RISE_TO), first, end)
    return last - first, settling, peak_time, overshoot


def _root(function: Callable[[float], float], low: float, high: float) -> float:
    """Root between two instants of different sign: secant steps kept inside the bracket, else halving."""
    f_low, f_high = function(low), function(high)
    if f_low == 0.0:
        return low
    for _ in range(200):
        width = high - low
        guess = high - f_high * width / (f_high - f_low) if f_high != f_low else low
        inner = 0.01 * width
        middle = min(max(guess, low + inner), high - inner)
        for point in (middle, 0.5 * (low + high)):
            if not low < point < high:
                continue
            value = function(point)
            if value == 0.0:
                return point
            if (value > 0.0) == (f_low > 0.0):
                low, f_low = point, value
            else:
                high, f_high = point, value
        if high - low >= width or high - low <= 4e-16 * high:
            break
    return 0.5 * (low + high)
