"""Settings of the cascade from the plant by published rules, and what limits the bandwidth."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.cascade_kernel import CURRENT, MOTOR_ANGLE, MOTOR_SPEED
from actuator_sizing.core.control import LoopSettings
from actuator_sizing.core.frequency import Margins, margins, transfer
from actuator_sizing.core.linear_loop import alive_states, one_sample
from actuator_sizing.core.plant import Plant

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

#: Speed loop at most this part of the current loop's bandwidth; position loop of the speed loop's.
#: Separation of nested loops, common practice.
NESTING_RATIO = 4.0
#: Speed loop at most the antiresonance over this; common practice is 3 to 5.
ANTIRESONANCE_RATIO = 3.0
#: Largest peak of the sensitivity that is a reserve at all: at least 29° and a factor of 2. K. J. Åström and
#: T. Hägglund, PID Controllers, 2nd ed., give 1.3 to 2 as usual (from memory).
LARGEST_SENSITIVITY = 2.0
#: The one that the default settings stay below.
CHOSEN_SENSITIVITY = 1.7
_REDUCTION, _TRIES = 0.85, 40
_TEN_TO_NINETY = math.log(9.0)  # rise time of a first-order lag over its time constant

BY_CURRENT, BY_RESONANCE, BY_RESERVE = (
    "current loop", "antiresonance of motor and load", "stability reserve",
)  # fmt: skip


def absolute_optimum(
    resistance_ohm: float, inductance_h: float, small_time_constant_s: float
) -> tuple[float, float]:
    """Current PI by the absolute (modulus) optimum.

    Parameters
    ----------
    resistance_ohm : float
        Resistance. [Ω]
    inductance_h : float
        Inductance. [H]
    small_time_constant_s : float
        Sum of delays and small lags of the loop. [s]

    Returns
    -------
    gain : float
        ``L/(2 T_σ)``, in V/A. [Ω]
    reset_time_s : float
        ``L/R``, which cancels the winding. [s]

    Notes
    -----
    The step response overshoots by 4.3 %. W. Leonhard, Control of Electrical Drives (from memory).

    Examples
    --------
    >>> absolute_optimum(0.05, 1.5e-3, 1e-3)
    (0.75, 0.03)
    """
    return 0.5 * inductance_h / small_time_constant_s, inductance_h / resistance_ohm


def symmetrical_optimum(
    inertia_kg_m2: float, torque_constant_nm_per_a: float, small_time_constant_s: float
) -> tuple[float, float, float]:
    """Speed PI by the symmetrical optimum.

    Parameters
    ----------
    inertia_kg_m2 : float
        Everything that turns. [kg·m²]
    torque_constant_nm_per_a : float
        Torque constant. [N·m/A]
    small_time_constant_s : float
        Time constant of the current loop, with delays. [s]

    Returns
    -------
    gain : float
        ``J/(2 K T_σ)``, in A per rad/s. [-]
    reset_time_s : float
        ``4 T_σ``. [s]
    prefilter_s : float
        ``4 T_σ``: with this filter of the set point the overshoot falls from 43.4 % to 8.1 %. [s]

    Notes
    -----
    C. Kessler's rule as in W. Leonhard, Control of Electrical Drives (from memory).
    """
    gain = inertia_kg_m2 / (2.0 * torque_constant_nm_per_a * small_time_constant_s)
    return gain, 4.0 * small_time_constant_s, 4.0 * small_time_constant_s


def bandwidth_settings(
    plant: Plant, base: LoopSettings, current_rad_s: float, speed_rad_s: float, position_gain: float
) -> LoopSettings:
    """Settings from the wanted bandwidth of each loop.

    Parameters
    ----------
    plant : Plant
        What is moved. [-]
    base : LoopSettings
        Everything that is not a gain. [-]
    current_rad_s, speed_rad_s : float
        Bandwidth of current and speed loop. [rad/s]
    position_gain : float
        Gain of the position loop, in 1/s. [-]

    Returns
    -------
    LoopSettings
        ``K_p = ω_c L``, ``T_i = L/R``; ``K_p = ω_v J/K``, ``T_i = 4/ω_v``; ``K_v``. [-]
    """
    return replace(
        base,
        current_gain_v_per_a=current_rad_s * plant.inductance_h,
        current_reset_time_s=plant.inductance_h / plant.resistance_ohm,
        speed_gain_a_s_per_rad=speed_rad_s * plant.total_inertia_kg_m2 / plant.torque_constant_nm_per_a,
        speed_reset_time_s=4.0 / speed_rad_s,
        position_gain_per_s=position_gain,
    )


@dataclass(frozen=True)
class LinearCascade:
    """The cascade without limits and friction as one linear sampled system, taken from the loop itself."""

    plant: Plant
    settings: LoopSettings

    def states(self) -> tuple[int, ...]:
        """Which states of the loop are alive."""
        return alive_states(self.plant, self.settings)

    def matrices(self) -> tuple[FloatArray, FloatArray]:
        """Matrices of one sample.

        Returns
        -------
        A : ndarray, shape (n, n)
            Of the `states`. [-]
        B : ndarray, shape (n, 4)
            Of commanded angle, commanded speed, current in advance, external torque on the load. [-]

        Notes
        -----
        Backlash has no linear response and is taken as closed.
        """
        sample = one_sample(self.plant, self.settings)
        return sample.A, sample.B

    def poles(self) -> ComplexArray:
        """Poles of one sample of all three loops together; stable inside the unit circle."""
        return np.asarray(np.linalg.eigvals(self.matrices()[0]), dtype=complex)

    @property
    def spectral_radius(self) -> float:
        """Largest magnitude of the poles; the loops are stable below one. [-]"""
        return float(np.abs(self.poles()).max())

    def closed(self, loop: str, frequency_rad_s: FloatArray) -> ComplexArray:
        """Response of one loop, what is inside it closed and what is outside it open.

        Parameters
        ----------
        loop : str
            ``"current"``, ``"speed"`` or ``"position"``: set point to measured value.
        frequency_rad_s : ndarray, shape (m,)
            Angular frequencies up to half the sampling rate. [rad/s]

        Returns
        -------
        ndarray of complex, shape (m,)
            Closed-loop response, filters of the set point left out. [-]
        """
        A, B, C = self.system(loop)
        return transfer(A, B, C, frequency_rad_s, step_s=self.settings.sample_time_s)

    def system(self, loop: str) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Matrices of one loop closed, those outside it open: set point to measured value."""
        return _system(self.plant, self.settings, loop)

    def open(self, loop: str, frequency_rad_s: FloatArray) -> ComplexArray:
        """Open-loop response ``T/(1 − T)`` of one loop; arguments as for `closed`."""
        T = self.closed(loop, frequency_rad_s)
        return np.asarray(T / (1.0 - T))

    def margins(self, loop: str) -> Margins:
        """Margins of one loop, searched up to half the sampling rate."""
        top = 0.999 * math.pi / self.settings.sample_time_s
        return margins(lambda w: self.open(loop, w), 1e-5 * top, top)


@lru_cache(maxsize=16)
def _system(plant: Plant, settings: LoopSettings, loop: str) -> tuple[FloatArray, FloatArray, FloatArray]:
    """One loop closed, those outside it open: from its set point to its measured value."""
    s = replace(settings, setpoint_filter_s=0.0, speed_feedforward_ratio=1.0)
    place, source = _LOOPS[loop]
    if loop == "position":
        s = replace(s, speed_feedforward_ratio=0.0)
    else:
        s = replace(s, position_gain_per_s=0.0)
    if loop == "current":
        s = replace(s, speed_gain_a_s_per_rad=0.0)
    opened = LinearCascade(plant, s)
    A, B = opened.matrices()
    alive = opened.states()
    # With the position loop open the angle runs free, and it acts on nothing.
    keep = [n for n, k in enumerate(alive) if k != MOTOR_ANGLE or loop == "position"]
    return A[np.ix_(keep, keep)], B[keep, source], np.array([1.0 if alive[n] == place else 0.0 for n in keep])


#: State that each loop controls, and the input that carries its set point.
_LOOPS = {"current": (CURRENT, 2), "speed": (MOTOR_SPEED, 1), "position": (MOTOR_ANGLE, 0)}


@dataclass(frozen=True)
class Tuning:
    """Settings with the reasons for them."""

    settings: LoopSettings
    current_rad_s: float
    speed_rad_s: float
    limited_by: str


def current_bandwidth(sample_time_s: float, current_rise_s: float, *, is_delayed: bool = True) -> float:
    """Bandwidth of the current loop by the absolute optimum for its delays, or by its stated rise time.

    Parameters
    ----------
    sample_time_s : float
        Sampling time. [s]
    current_rise_s : float
        Rise time 10 % to 90 % as stated; 0: as fast as the sampling allows. [s]
    is_delayed : bool
        Whether the voltage acts one sample late.

    Returns
    -------
    float
        The slower of both. [rad/s]
    """
    fastest = 0.5 / ((1.5 if is_delayed else 0.5) * sample_time_s)
    return min(fastest, _TEN_TO_NINETY / current_rise_s) if current_rise_s > 0.0 else fastest


def default_tuning(plant: Plant, base: LoopSettings, *, current_rise_s: float = 0.0) -> Tuning:
    """Fastest settings that the loops inside, the antiresonance and the stability reserve allow.

    Parameters
    ----------
    plant : Plant
        What is moved. [-]
    base : LoopSettings
        Everything that is not a gain. [-]
    current_rise_s : float
        Rise time of the current loop as stated; 0: as fast as the sampling rate allows. [s]

    Returns
    -------
    Tuning
        The current loop by the absolute optimum for its delays (1.5 samples with delay, 0.5 without), not
        faster than the stated rise time; the speed loop a quarter of it, at most a third of the
        antiresonance, then lower until the peak of the sensitivity is at most 1.7; the position gain a quarter
        of the speed loop. [-]

    Raises
    ------
    ValueError
        If no setting is stable with reserve: the sampling rate is too low for this plant.
    """
    current = current_bandwidth(base.sample_time_s, current_rise_s, is_delayed=base.is_delayed)
    speed, limited_by = current / NESTING_RATIO, BY_CURRENT
    if not plant.is_rigid and plant.antiresonance_rad_s / ANTIRESONANCE_RATIO < speed:
        speed, limited_by = plant.antiresonance_rad_s / ANTIRESONANCE_RATIO, BY_RESONANCE
    for _ in range(_TRIES):
        settings = bandwidth_settings(plant, base, current, speed, speed / NESTING_RATIO)
        if has_reserve(LinearCascade(plant, settings)):
            return Tuning(settings, current, speed, limited_by)
        speed, limited_by = speed * _REDUCTION, BY_RESERVE
    raise ValueError(
        f"no settings of the loops are stable at a sampling rate of {1.0 / base.sample_time_s:g} Hz; "
        "raise the rate, or state more damping"
    )


def has_reserve(cascade: LinearCascade) -> bool:
    """Whether all loops are stable and the speed loop keeps its distance from −1.

    Parameters
    ----------
    cascade : LinearCascade
        Plant and settings.

    Returns
    -------
    bool
        Stable with a peak of the sensitivity of at most 1.7.
    """
    if not cascade.spectral_radius < 1.0:
        return False
    top = 0.999 * math.pi / cascade.settings.sample_time_s
    grid = np.geomspace(1e-4 * top, top, 240)
    if not cascade.plant.is_rigid:
        around = cascade.plant.resonance_rad_s * np.linspace(0.8, 1.25, 121)
        grid = np.sort(np.concatenate([grid, around[around < top]]))
    sensitivity = np.abs(1.0 - cascade.closed("speed", grid))
    return bool(sensitivity.max() <= CHOSEN_SENSITIVITY)
