"""Speed and way of one stop over time, for drawing it: the same equations as `core.braking`, point by point."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_POINTS = 40  # of one phase
_LEAST_SPEED = 1e-4  # of the speed at which braking begins: where a stop that fades out is drawn to
_ORDER = 8


@dataclass(frozen=True)
class StopCourse:
    """One stop over time at the motor shaft; positive in the sense of the motion when the command came."""

    time_s: FloatArray
    speed_rad_s: FloatArray
    angle_rad: FloatArray
    ends: bool  # at rest at the last point


def stop_course(
    speed_rad_s: float,
    inertia_kg_m2: float,
    load_nm: float,
    friction_nm: float,
    delay_s: float,
    braking_nm: Callable[[FloatArray], FloatArray],
    horizon_s: float,
) -> StopCourse:
    """Follow one stop: a delay without torque, then a braking torque that depends on speed.

    Parameters
    ----------
    speed_rad_s : float
        Speed when the command comes, ≥ 0. [rad/s]
    inertia_kg_m2 : float
        Everything that moves, at the motor shaft. [kg·m²]
    load_nm, friction_nm : float
        Gravity and process, positive where they oppose the motion; Coulomb friction. [N·m]
    delay_s : float
        From command to braking torque. [s]
    braking_nm : callable
        Braking torque of speeds ≥ 0. [N·m]
    horizon_s : float
        Where the course ends if the axis is not at rest before. [s]

    Returns
    -------
    StopCourse
        From the command until rest or the horizon. [-]

    Notes
    -----
    Parabolas while the torque is constant in time, and ``t = ∫ J dω/T(ω)`` by Gauss–Legendre between the points while
    braking. First principles.
    """
    times, speeds, angles = [np.zeros(1)], [np.array([speed_rad_s])], [np.zeros(1)]

    def glide(deceleration: float, until: float) -> None:
        start = float(times[-1][-1])
        tau = np.linspace(0.0, until - start, _POINTS)[1:]
        omega, phi = float(speeds[-1][-1]), float(angles[-1][-1])
        times.append(start + tau)
        speeds.append(omega - deceleration * tau)
        angles.append(phi + omega * tau - 0.5 * deceleration * tau**2)

    slowing = (load_nm + friction_nm) / inertia_kg_m2
    rest = speed_rad_s / slowing if slowing > 0.0 else np.inf
    if min(rest, delay_s) > 0.0:
        glide(slowing, min(rest, delay_s))
    if rest < delay_s:
        # Held by friction, or falling back the way it came until the brake takes hold.
        speeds[-1][-1] = 0.0
        glide(max(load_nm - friction_nm, 0.0) / inertia_kg_m2, delay_s)
    start = float(speeds[-1][-1])
    sense = -1.0 if start < 0.0 else 1.0
    if start == 0.0:
        return StopCourse(np.concatenate(times), np.concatenate(speeds), np.concatenate(angles), True)
    against = sense * load_nm + friction_nm
    share = np.concatenate(
        [np.linspace(1.0, 0.05, _POINTS), np.geomspace(0.05, _LEAST_SPEED, _POINTS)[1:], [0.0]]
    )
    omega = abs(start) * share
    x, w = legendre.leggauss(_ORDER)
    middle, half = 0.5 * (omega[:-1] + omega[1:]), 0.5 * (omega[:-1] - omega[1:])
    inside = middle[:, None] + half[:, None] * x
    torque = braking_nm(inside) + against
    brakes = np.cumprod(np.all(torque > 0.0, axis=1)).astype(bool)
    with np.errstate(divide="ignore"):
        slowness = inertia_kg_m2 / np.where(torque > 0.0, torque, np.inf) * half[:, None]
    time = float(times[-1][-1]) + np.cumsum(slowness @ w)
    angle = float(angles[-1][-1]) + sense * np.cumsum((slowness * inside) @ w)
    kept = brakes & (time <= horizon_s)
    times.append(time[kept])
    speeds.append(sense * omega[1:][kept])
    angles.append(angle[kept])
    ends = bool(kept.all())
    if not ends:
        clock = float(np.concatenate(times)[-1])
        now, way = float(np.concatenate(speeds)[-1]), float(np.concatenate(angles)[-1])

        def change(omega: float) -> float:
            return -(float(braking_nm(np.array([abs(omega)]))[0]) + against) / inertia_kg_m2

        later = _run_on(abs(now), change, np.linspace(clock, max(clock, horizon_s), _POINTS)[1:], clock)
        times.append(later[0])
        speeds.append(sense * later[1])
        angles.append(way + sense * later[2])
    return StopCourse(np.concatenate(times), np.concatenate(speeds), np.concatenate(angles), ends)


def _run_on(
    omega: float, change: Callable[[float], float], instants: FloatArray, clock: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Speed and angle at instants of a stop that does not end, by the midpoint rule between them."""
    speeds, angles, angle = [], [], 0.0
    for instant in instants.tolist():
        steps = 20
        h = (instant - clock) / steps
        for _ in range(steps):
            middle = omega + 0.5 * h * change(omega)
            angle += h * middle
            omega = max(omega + h * change(middle), 0.0)
        clock = instant
        speeds.append(omega)
        angles.append(angle)
    return instants, np.array(speeds), np.array(angles)
