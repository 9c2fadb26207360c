"""Stopping an axis: by torque of the motor, by shorted windings, by a holding brake, or by nothing but friction.

Speeds and torques are magnitudes at the motor shaft in the sense of the motion that is to end: a braking torque
is positive, a load torque is positive where it opposes the motion (lifting) and negative where it drives it.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_DECADES = 8  # of speed on which a stop is integrated; the last stretch to rest is one panel
_ORDER = 16
_NEWTON_STEPS = 5  # for the instant of the first current peak: to rounding
_NO_OVERSHOOT = 12.0  # resistance over reactance from which the overshoot is below 1e-15


@dataclass(frozen=True)
class Stop:
    """Stops from given speeds; each field has the shape of the speeds. Infinite where the axis never stops."""

    time_s: FloatArray  # from the command
    angle_rad: FloatArray  # largest excursion from where the command came
    braking_speed_rad_s: FloatArray  # when the brake takes hold
    braking_angle_rad: FloatArray  # turned while it brakes
    braking_time_s: FloatArray


@lru_cache(maxsize=2)
def _speed_shares(order: int) -> tuple[FloatArray, FloatArray]:
    """Nodes and weights on (0, 1), one panel per decade, so that a stop that fades out is resolved too."""
    x, w = legendre.leggauss(order)
    borders = np.concatenate([[0.0], 10.0 ** np.arange(-_DECADES, 1)])
    low, width = borders[:-1, None], np.diff(borders)[:, None]
    return (low + 0.5 * (x + 1.0) * width).ravel(), (0.5 * w * width).ravel()


def stop(
    speed_rad_s: FloatArray,
    inertia_kg_m2: FloatArray,
    load_nm: FloatArray,
    friction_nm: FloatArray,
    delay_s: FloatArray,
    braking_nm: FloatArray | Callable[[FloatArray], FloatArray],
    order: int = _ORDER,
) -> Stop:
    """Stop after a delay without torque, then by a torque that depends on speed.

    Parameters
    ----------
    speed_rad_s : ndarray
        Speed when the command comes, ≥ 0. [rad/s]
    inertia_kg_m2 : ndarray
        Everything that moves, at the motor shaft. [kg·m²]
    load_nm : ndarray
        Torque of gravity and process, positive where it opposes the motion. [N·m]
    friction_nm : ndarray
        Coulomb friction, ≥ 0. [N·m]
    delay_s : ndarray
        From command to braking torque; gravity and friction act meanwhile. [s]
    braking_nm : ndarray or callable
        Constant braking torque, or a function of speeds, shape (..., n), to torques of that shape. [N·m]
    order : int
        Nodes per decade of speed for such a function; few tell which of many stops is the longest. [-]

    Returns
    -------
    Stop
        Shape of the arguments broadcast. [-]

    Notes
    -----
    ``t = ∫ J dω / T(ω)`` and ``φ = ∫ J ω dω / T(ω)``: in closed form for a constant torque, else by Gauss–Legendre
    on decades of speed. A load that is lifted
    may come to rest within the delay and fall back until the brake takes hold; the larger of the two ways counts.
    First principles; losses of transmission stages are the caller's to leave out, since they shorten a stop.
    """
    omega, J, load, friction, delay = np.broadcast_arrays(
        speed_rad_s, inertia_kg_m2, load_nm, friction_nm, delay_s
    )
    slowing = (load + friction) / J
    with np.errstate(divide="ignore", invalid="ignore"):
        to_rest = np.where(slowing > 0.0, omega / np.where(slowing > 0.0, slowing, 1.0), np.inf)
    rests = to_rest <= delay
    moving = np.minimum(to_rest, delay)
    free_angle = omega * moving - 0.5 * slowing * moving**2
    left = np.where(rests, 0.0, np.maximum(omega - slowing * moving, 0.0))
    falls = rests & (load > friction)
    falling = np.where(falls, (load - friction) / J, 0.0)
    remaining = np.where(falls, delay - moving, 0.0)
    fall_speed, fall_angle = falling * remaining, 0.5 * falling * remaining**2
    start = np.where(falls, fall_speed, left)
    against = np.where(falls, -load, load) + friction
    time, angle = _braked(start, J, against, braking_nm, order)
    excursion = np.where(falls, np.maximum(free_angle, fall_angle + angle - free_angle), free_angle + angle)
    waited = np.where(rests & ~falls, moving, delay)
    return Stop(
        time_s=waited + time,
        angle_rad=excursion,
        braking_speed_rad_s=start,
        braking_angle_rad=angle,
        braking_time_s=time,
    )


def _braked(
    start: FloatArray,
    J: FloatArray,
    against: FloatArray,
    braking_nm: FloatArray | Callable[[FloatArray], FloatArray],
    order: int,
) -> tuple[FloatArray, FloatArray]:
    if not callable(braking_nm):
        torque = braking_nm + against
        with np.errstate(divide="ignore", invalid="ignore"):
            time = np.where(torque > 0.0, J * start / torque, np.inf)
        time = np.where(start == 0.0, 0.0, np.where(np.isnan(torque), np.nan, time))
        return time, np.asarray(0.5 * start * time)
    shares, weights = _speed_shares(order)
    omega = start[..., None] * shares
    torque = braking_nm(omega) + against[..., None]
    # A torque that is gone on the way leaves the axis running for ever.
    stops = np.all(torque > 0.0, axis=-1) | (start == 0.0)
    with np.errstate(divide="ignore"):
        slowness = J[..., None] / np.where(torque > 0.0, torque, np.inf)
    time = start * (slowness @ weights)
    angle = start * ((slowness * omega) @ weights)
    return np.where(stops, time, np.inf), np.where(stops, angle, np.inf)


def shorted_torque(
    speed_rad_s: FloatArray, resistance_ohm: FloatArray, torque_constant: FloatArray, reactance: FloatArray
) -> FloatArray:
    """Braking torque of a machine whose terminals are shorted, in quasi-steady state.

    Parameters
    ----------
    speed_rad_s : ndarray
        Motor speed. [rad/s]
    resistance_ohm : ndarray
        Model resistance. [Ω]
    torque_constant : ndarray
        Model torque constant K. [N·m/A]
    reactance : ndarray
        ``p L``, reactance per speed; zero for a DC machine. [Ω·s/rad]

    Returns
    -------
    ndarray
        ``K² R ω / (R² + (p ω L)²)``; largest at ``ω = R/(p L)``. [N·m]

    Notes
    -----
    dq equations with u = 0 and steady currents; textbook form.
    """
    X = reactance * speed_rad_s
    return np.asarray(torque_constant**2 * resistance_ohm * speed_rad_s / (resistance_ohm**2 + X**2))


def shorted_current(
    speed_rad_s: FloatArray, resistance_ohm: FloatArray, torque_constant: FloatArray, reactance: FloatArray
) -> FloatArray:
    """Current of a machine whose terminals are shorted, in quasi-steady state.

    Parameters
    ----------
    speed_rad_s : ndarray
        Motor speed. [rad/s]
    resistance_ohm : ndarray
        Model resistance. [Ω]
    torque_constant : ndarray
        Model torque constant K. [N·m/A]
    reactance : ndarray
        ``p L``, reactance per speed; zero for a DC machine. [Ω·s/rad]

    Returns
    -------
    ndarray
        ``K |ω| / √(R² + (p ω L)²)``, in the motor's basis. [A]
    """
    X = reactance * speed_rad_s
    return np.asarray(torque_constant * np.abs(speed_rad_s) / np.sqrt(resistance_ohm**2 + X**2))


def shorted_current_peak(
    speed_rad_s: FloatArray, resistance_ohm: FloatArray, torque_constant: FloatArray, reactance: FloatArray
) -> FloatArray:
    """First peak of the current after the terminals of a turning machine are shorted, without current before.

    Parameters
    ----------
    speed_rad_s : ndarray
        Motor speed, held over the half electrical turn that the peak takes. [rad/s]
    resistance_ohm : ndarray
        Model resistance. [Ω]
    torque_constant : ndarray
        Model torque constant K. [N·m/A]
    reactance : ndarray
        ``p L``, reactance per speed; zero for a DC machine, whose current rises without overshoot. [Ω·s/rad]

    Returns
    -------
    ndarray
        Largest magnitude, in the motor's basis; up to twice the steady current where the resistance is small. [A]

    Notes
    -----
    ``L di/dt = −(R + j ω_e L) i − j K ω`` with ``i = i_d + j i_q``: the steady current times
    ``|1 − e^{−(x + j)τ}|`` with ``x = R/(ω_e L)``, largest where ``x cos τ + sin τ = x e^{−xτ}``.
    dq equations, textbook form.
    """
    steady = shorted_current(speed_rad_s, resistance_ohm, torque_constant, reactance)
    X = np.abs(reactance * speed_rad_s)
    with np.errstate(divide="ignore", invalid="ignore"):
        x = np.where(X > 0.0, resistance_ohm / np.where(X > 0.0, X, 1.0), np.inf)
    overshoots = x < _NO_OVERSHOOT
    x = np.where(overshoots, x, 1.0)
    tau = np.pi - np.arctan(x)  # the root but for the right side, which is small there
    for _ in range(_NEWTON_STEPS):
        fading = x * np.exp(-x * tau)
        tau = tau - (x * np.cos(tau) + np.sin(tau) - fading) / (np.cos(tau) - x * np.sin(tau) + x * fading)
    factor = np.hypot(1.0 - np.exp(-x * tau) * np.cos(tau), np.exp(-x * tau) * np.sin(tau))
    return np.asarray(steady * np.where(overshoots, np.maximum(factor, 1.0), 1.0))


@dataclass(frozen=True)
class RheostaticStop:
    """Dynamic braking of a DC machine into a resistor, with inductance and a constant load torque."""

    rates_per_s: tuple[complex, complex]  # decay rates, the slower first
    final_speed_rad_s: float  # approached if the load torque goes on acting
    peak_current_a: float  # negative: against the motoring current
    peak_current_time_s: float
    time_to_rest_s: float  # infinite where rest is only approached


def rheostatic_stop(
    resistance_ohm: float,
    inductance_h: float,
    torque_constant: float,
    inertia_kg_m2: float,
    load_nm: float,
    speed_rad_s: float,
    current_a: float = 0.0,
) -> RheostaticStop:
    """Stop of a DC machine whose terminals are closed over a resistor, armature inductance included.

    Parameters
    ----------
    resistance_ohm : float
        Armature and braking resistor together. [Ω]
    inductance_h : float
        Armature inductance. [H]
    torque_constant : float
        K. [N·m/A]
    inertia_kg_m2 : float
        Everything that turns. [kg·m²]
    load_nm : float
        Constant torque against the motion. [N·m]
    speed_rad_s : float
        Speed at the start. [rad/s]
    current_a : float
        Current at the start, positive motoring. [A]

    Returns
    -------
    RheostaticStop
        From the exact solution of ``L di/dt = −R i − K ω``, ``J dω/dt = K i − T``. [-]
    """
    from scipy.optimize import brentq

    R, L, K, J = resistance_ohm, inductance_h, torque_constant, inertia_kg_m2
    i_end, omega_end = load_nm / K, -R * load_nm / K**2
    system = np.array([[-R / L, -K / L], [K / J, 0.0]], dtype=complex)
    values, vectors = np.linalg.eig(system)
    weight = np.linalg.solve(vectors, np.array([current_a - i_end, speed_rad_s - omega_end], dtype=complex))

    def state(t: float) -> tuple[float, float]:
        i, omega = (vectors @ (weight * np.exp(values * t))).real
        return float(i + i_end), float(omega + omega_end)

    def slope(t: float) -> float:
        return float((vectors @ (weight * values * np.exp(values * t))).real[0])

    slowest = 1.0 / float(np.min(-values.real))
    grid = np.linspace(0.0, 40.0 * slowest, 20001)
    courses = (vectors @ (weight[:, None] * np.exp(np.outer(values, grid)))).real
    omega = courses[1] + omega_end
    crossing = np.flatnonzero(omega <= 0.0)
    rest = np.inf
    if len(crossing) and crossing[0] > 0:
        n = int(crossing[0])
        rest = float(brentq(lambda t: state(t)[1], grid[n - 1], grid[n], xtol=1e-14))
    current = np.abs(courses[0] + i_end)
    n = int(current.argmax())
    at = float(grid[n])
    if 0 < n < len(grid) - 1 and slope(grid[n - 1]) * slope(grid[n + 1]) < 0.0:
        at = float(brentq(slope, grid[n - 1], grid[n + 1], xtol=1e-14))
    first, second = sorted((complex(-value) for value in values), key=lambda rate: rate.real)
    return RheostaticStop((first, second), omega_end, state(at)[0], at, rest)
