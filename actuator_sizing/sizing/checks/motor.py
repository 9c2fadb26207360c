"""Checks of the motor: torque over speed, continuous rating, temperature, current, speed, voltage."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.capability import continuous_current
from actuator_sizing.core.machine import (
    judge,
    motor_amperes_per_drive_ampere,
    resistance_at,
    saturation_coefficient,
    torque_of_current,
)
from actuator_sizing.core.parameters import MotorParameters, Surroundings
from actuator_sizing.core.thermal import altitude_factor
from actuator_sizing.sizing.block import Block
from actuator_sizing.sizing.bounds import Bound
from actuator_sizing.sizing.checks.base import SUSTAINED, Check, Measure, Need, Sets, digits
from actuator_sizing.sizing.checks.working import (
    available_voltage_working,
    current_working,
    instant_of,
    rms_working,
    temperature_working,
    torque_working,
    voltage_limit_working,
    voltage_working,
)

FloatArray = NDArray[np.float64]

_IMMENSE = 1e30  # stands for infinite where a product with it must stay a number of single precision
_CONTINUOUS = Need("motors", "continuous_current_a", "continuous current", "continuous force")
_PEAK_CURRENT = Need("motors", "peak_current_a", "peak current")
_LIMIT = Need("motors", "winding_limit_degc", "winding temperature limit")


# -- continuous rating ------------------------------------------------------------------------------
def rerated_continuous_current(
    motors: MotorParameters, surroundings: Surroundings, speed_rad_s: FloatArray
) -> FloatArray:
    """Continuous current at a speed, re-rated from the sheet's ambient to the case's ambient and altitude.

    Parameters
    ----------
    motors : MotorParameters
        n motors. [-]
    surroundings : Surroundings
        Ambient and altitude. [-]
    speed_rad_s : ndarray
        Speed; its friction and iron loss takes part of the permitted rise. Anything that
        broadcasts with (n,). [rad/s]

    Returns
    -------
    ndarray, broadcast shape
        ``√((ΔT − R_2 P_ω)/(R_th R_hot))`` with ``R_th = ΔT_rated/(R_hot I_cont²)``; NaN where data is missing.
        The rating is taken as one near standstill, as sheets state it. [A]
    """
    rise, rating, speed_resistance, hot = _heat_path(motors, surroundings)
    loss = motors.friction_torque_nm * np.abs(speed_rad_s) + motors.viscous_friction_nm_s * speed_rad_s**2
    with np.errstate(divide="ignore", invalid="ignore"):
        return continuous_current(rise, rating, speed_resistance, loss, hot)


def _heat_path(
    motors: MotorParameters, surroundings: Surroundings
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Permitted rise [K], rise per watt of copper loss and of speed loss [K/W], hot resistance [Ω], each (n,)."""
    limit = motors.winding_limit_degc
    hot = resistance_at(motors, limit)
    rise = (limit - surroundings.ambient_degc) * altitude_factor(surroundings.altitude_m)
    with np.errstate(divide="ignore", invalid="ignore"):
        rating = (limit - motors.continuous_ambient_degc) / (hot * motors.continuous_current_a**2)
    R_2 = motors.thermal_resistance_housing_k_w
    return rise, rating, np.where(np.isnan(R_2), rating, np.fmin(R_2, rating)), hot


def continuous_torque_squared(motors: MotorParameters, surroundings: Surroundings) -> FloatArray:
    """Square of the re-rated continuous torque as a polynomial of speed, saturation left out.

    Parameters
    ----------
    motors : MotorParameters
        n motors. [-]
    surroundings : Surroundings
        Ambient and altitude. [-]

    Returns
    -------
    ndarray, shape (3, n)
        Coefficients of 1, ω and ω² of ``(K I_cont(ω))²``, see `rerated_continuous_current`. [-]
    """
    rise, rating, speed_resistance, hot = _heat_path(motors, surroundings)
    K = judge(motors, replace(surroundings, judged_winding_degc=np.nan)).torque_constant_nm_per_a
    per_kelvin = K**2 / (rating * hot)
    return np.stack(
        [
            per_kelvin * np.maximum(rise, 0.0),
            -per_kelvin * speed_resistance * motors.friction_torque_nm,
            -per_kelvin * speed_resistance * motors.viscous_friction_nm_s,
        ]
    )


def _current_at_limit(
    motors: MotorParameters, surroundings: Surroundings, K: FloatArray
) -> FloatArray | float:
    """Current with the winding at its limit over current as judged, for the same torque (saturation left out).

    The rating belongs to the winding limit; a temperature stated for judging voltage must not soften it.
    """
    if np.isnan(surroundings.judged_winding_degc):
        return 1.0
    at_limit = judge(motors, replace(surroundings, judged_winding_degc=np.nan))
    return np.asarray(K / at_limit.torque_constant_nm_per_a)


def _rms_measure(sets: Sets) -> Measure:
    capacity = rerated_continuous_current(sets.motors, sets.surroundings, sets.pairs.speed_rms_rad_s)
    K = sets.pairs.torque_constant_nm_per_a
    return Measure(sets.pairs.current_rms_a * _current_at_limit(sets.motors, sets.surroundings, K), capacity)


def _rms_bound(block: Block) -> Bound:
    m, K = block.motors, block.judged.torque_constant_nm_per_a
    rise, rating, speed_resistance, hot = _heat_path(m, block.surroundings)
    per_torque = _current_at_limit(m, block.surroundings, K) / K
    with np.errstate(divide="ignore", invalid="ignore"):
        per_square = per_torque**2 * rating * hot / rise
        share = speed_resistance / rise
    # In air hotter than the limit no current at all is permitted.
    per_square = np.where(rise <= 0.0, _IMMENSE, np.where(per_square > 0.0, per_square, 0.0))
    share = np.where(rise > 0.0, share, 0.0)
    return (block.of_square(per_square, share * m.friction_torque_nm, share * m.viscous_friction_nm_s),)


def _rms_working(sets: Sets, i: int) -> str:
    m, p = sets.motors, sets.pairs
    limit, hot = m.winding_limit_degc[i], resistance_at(m, m.winding_limit_degc)[i]
    rating = (limit - m.continuous_ambient_degc[i]) / (hot * m.continuous_current_a[i] ** 2)
    R_2 = m.thermal_resistance_housing_k_w[i]
    share = rating if np.isnan(R_2) else min(R_2, rating)
    omega = p.speed_rms_rad_s[i]
    loss = m.friction_torque_nm[i] * omega + m.viscous_friction_nm_s[i] * omega**2
    altitude = altitude_factor(sets.surroundings.altitude_m)
    rise = (limit - sets.surroundings.ambient_degc) * altitude
    measure = _rms_measure(sets)
    demand, capacity = float(measure.demand[i]), float(measure.capacity[i])
    same = demand == p.current_rms_a[i]
    at_limit = "" if same else f"with K at the winding limit {digits(demand)} A; "
    return (
        f"{rms_working(sets, i)}; {at_limit}"
        f"R_th = ({digits(limit)} − {digits(m.continuous_ambient_degc[i])}) °C / ({digits(hot)} Ω · "
        f"({digits(m.continuous_current_a[i])} A)²) = {digits(rating)} K/W; "
        f"ΔT = ({digits(limit)} − {digits(sets.surroundings.ambient_degc)}) · {digits(altitude)} = {digits(rise)} K; "
        f"P_ω at ω_rms {digits(omega)} rad/s = {digits(loss)} W; "
        f"I_cont = √(({digits(rise)} − {digits(share)} · {digits(loss)}) / ({digits(rating)} · {digits(hot)})) "
        f"= {digits(capacity)} A; I_rms/I_cont = {digits(demand)} / {digits(capacity)} "
        f"= {digits(demand / capacity) if capacity else '∞'}"
    )


RMS_CURRENT = Check(
    key="rms_current",
    title="RMS current",
    group="motor",
    unit="A",
    formula="I_rms = √(1/T ∫ i² dt) ≤ I_cont(ω_rms) = √((ΔT − R_2 P_ω) / (R_th R_hot))",
    source="Continuous rating of the data sheet, re-rated to ambient and altitude by the steady heat balance; "
    "duty as in IEC 60034-1",
    needs=(_CONTINUOUS, _LIMIT),
    measure=_rms_measure,
    bound=_rms_bound,
    working=_rms_working,
    concerns=SUSTAINED,
)


# -- torque over the speed–torque plane -------------------------------------------------------------
def peak_current(sets: Sets) -> FloatArray:
    """Smaller peak current of motor and drive in the motor's basis, shape (S,); NaN where neither is known. [A]"""
    to_motor = motor_amperes_per_drive_ampere(sets.motors, sets.drives)
    return np.asarray(np.fmin(sets.motors.peak_current_a, sets.drives.peak_current_a * to_motor))


def current_limited_torque(sets: Sets) -> FloatArray:
    """Air-gap torque at the smaller of the peak currents of motor and drive, shape (S,). [N·m]"""
    K = sets.pairs.torque_constant_nm_per_a
    torque = torque_of_current(peak_current(sets), K, saturation_coefficient(sets.motors))
    # A peak torque stated on the sheet is a limit of its own, also where the current would allow more.
    return np.fmin(torque, sets.motors.peak_torque_nm)


def _plane_measure(sets: Sets) -> Measure:
    p = sets.pairs
    by_current = current_limited_torque(sets)
    with np.errstate(divide="ignore", invalid="ignore"):
        current_utilisation = p.torque_peak_nm / by_current
    voltage_governs = p.plane_utilisation >= current_utilisation
    return Measure(
        demand=np.where(voltage_governs, p.plane_torque_nm, p.torque_peak_nm),
        capacity=np.where(voltage_governs, p.plane_capacity_nm, by_current),
        at_s=np.where(voltage_governs, p.plane_at_s, p.torque_peak_at_s),
        utilisation=np.where(voltage_governs, p.plane_utilisation, current_utilisation),
    )


def _plane_bound(block: Block) -> Bound:
    return (block.of_peak(block.torque_limit), *block.voltage_plane)


def _plane_working(sets: Sets, i: int) -> str:
    m = _plane_measure(sets)
    p = sets.pairs
    by_current = float(current_limited_torque(sets)[i])
    by_voltage = bool(p.plane_utilisation[i] >= p.torque_peak_nm[i] / by_current)
    cold = by_voltage and bool(p.plane_is_cold[i])
    at = instant_of(sets, i, m.instant(i), "torque", cold=cold)
    unit = at.units[0]
    if by_voltage:
        limit = f"{temperature_working(at, cold=cold)}; {voltage_limit_working(sets, i, at)}"
    else:
        limit = f"T_available = {digits(by_current)} {unit} at the smaller peak current of motor and drive"
    return f"{torque_working(at)}; {limit}; {m.quotient(i)}"


SPEED_TORQUE = Check(
    key="speed_torque",
    title="Peak torque over speed",
    group="motor",
    unit="N·m",
    linear_unit="N",
    formula="max over the cycle of |T| / T_available(ω), T_available from peak current and from "
    "√((R i + K ω)² + (p ω L i)²) ≤ U at minimum bus voltage, hot winding or motor at the "
    "lowest ambient, whichever is worse",
    source="Speed–torque plane of a DC-equivalent machine; textbook dq relations at i_d = 0",
    needs=(
        Need("motors", "peak_current_a", "peak current"),
        Need("drives", "peak_current_a", "peak current"),
    ),
    measure=_plane_measure,
    bound=_plane_bound,
    working=_plane_working,
)


# -- winding temperature ----------------------------------------------------------------------------
def _temperature_measure(sets: Sets) -> Measure:
    ambient = sets.surroundings.ambient_degc
    runaway = sets.pairs.thermal_known & ~sets.pairs.has_equilibrium
    rise = np.where(runaway, np.inf, sets.pairs.winding_max_degc - ambient)
    # In air hotter than the limit no rise at all is permitted: the ratio must not turn negative and pass.
    permitted = np.maximum(sets.motors.winding_limit_degc - ambient, 0.0)
    return Measure(rise, permitted, sets.pairs.winding_max_at_s)


def _temperature_bound(block: Block) -> Bound:
    # A single run may end before anything is warm.
    return (block.winding_rise,) if block.repeats else ()


def _temperature_working(sets: Sets, i: int) -> str:
    ambient = sets.surroundings.ambient_degc
    limit = sets.motors.winding_limit_degc[i]
    if not sets.pairs.has_equilibrium[i]:
        if sets.start is not None:
            return "in one run the winding grows hotter than any temperature that means something"
        return "no equilibrium: each cycle leaves the winding hotter than the last"
    peak = sets.pairs.winding_max_degc[i]
    if limit <= ambient:
        return f"the air at {digits(ambient)} °C leaves no rise up to the limit of {digits(limit)} °C"
    over = "in periodic steady state"
    if sets.start is not None:
        over = f"in one run from {digits(sets.start.winding_degc[i])} °C"
        over += " and the cycle that follows" if sets.start.following else ""
    mean = sets.pairs.housing_mean_degc[i]
    housing = "one thermal body" if np.isnan(mean) else f"housing mean {digits(mean)} °C"
    return (
        f"ϑ_max = {digits(peak)} °C {over} (mean {digits(sets.pairs.winding_mean_degc[i])} °C, "
        f"{housing}); rise ({digits(peak)} − {digits(ambient)}) / "
        f"({digits(limit)} − {digits(ambient)}) = {digits((peak - ambient) / (limit - ambient))}"
    )


WINDING_TEMPERATURE = Check(
    key="winding_temperature",
    title="Winding temperature",
    group="motor",
    unit="K",
    formula="max over the periodic steady state of ϑ_w − ϑ_a ≤ ϑ_limit − ϑ_a, over its run where a cycle does not "
    "repeat; two bodies, R(ϑ) and K(ϑ) fed back",
    source="Two-body thermal network; periodic state by the cycle map; classes of IEC 60085",
    needs=(
        _LIMIT,
        Need("pairs", "thermal_known", "thermal resistance and time constant of winding and housing"),
    ),
    measure=_temperature_measure,
    bound=_temperature_bound,
    working=_temperature_working,
)


# -- peak current -----------------------------------------------------------------------------------
def _current_measure(sets: Sets) -> Measure:
    return Measure(sets.pairs.current_peak_a, sets.motors.peak_current_a, sets.pairs.torque_peak_at_s)


def _current_working(sets: Sets, i: int) -> str:
    m = _current_measure(sets)
    at = instant_of(sets, i, m.instant(i), "torque")
    return f"{torque_working(at)}; {current_working(at)}; |i| / I_peak = {m.quotient(i)}"


MOTOR_PEAK_CURRENT = Check(
    key="motor_peak_current",
    title="Motor peak current",
    group="motor",
    unit="A",
    formula="max |i| ≤ I_peak; T = K(ϑ_magnet) i (1 − s i²), s from the stated peak torque",
    source="Peak current of the data sheet (demagnetisation or saturation limit)",
    needs=(_PEAK_CURRENT,),
    measure=_current_measure,
    bound=lambda block: (block.of_peak(block.judged.torque_constant_nm_per_a * block.motors.peak_current_a),),
    working=_current_working,
)


# -- speed ------------------------------------------------------------------------------------------
def _speed_measure(sets: Sets) -> Measure:
    return Measure(sets.pairs.speed_peak_rad_s, sets.motors.speed_max_rad_s, sets.pairs.speed_peak_at_s)


def _speed_working(sets: Sets, i: int) -> str:
    m = _speed_measure(sets)
    unit = "m/s" if sets.motors.is_linear[i] else "rad/s"
    return (
        f"ω_max = n · max |ω_shaft| = {digits(float(sets.gearheads.ratio[i]))} · "
        f"{digits(sets.demand.shaft_speed_peak)} {unit} = {digits(float(m.demand[i]))} {unit}; "
        f"{m.quotient(i)}"
    )


MOTOR_SPEED = Check(
    key="motor_speed",
    title="Motor speed",
    group="motor",
    unit="rad/s",
    linear_unit="m/s",
    formula="max |ω| = n max |ω_shaft| ≤ ω_max",
    source="Maximum speed of the data sheet",
    needs=(Need("motors", "speed_max_rad_s", "maximum speed", "maximum linear speed"),),
    measure=_speed_measure,
    bound=lambda block: (block.of_speed(block.demand.shaft_speed_peak, block.motors.speed_max_rad_s),),
    working=_speed_working,
)


# -- voltage ----------------------------------------------------------------------------------------
def _voltage_measure(sets: Sets) -> Measure:
    return Measure(sets.pairs.voltage_peak_v, sets.pairs.voltage_available_v, sets.pairs.voltage_peak_at_s)


def _voltage_working(sets: Sets, i: int) -> str:
    m = _voltage_measure(sets)
    cold = bool(sets.pairs.voltage_is_cold[i])
    at = instant_of(sets, i, m.instant(i), "voltage", cold=cold)
    with_slope = sets.pairs.voltage_peak_v[i] > sets.pairs.voltage_peak_without_inductance_v[i]
    note = "" if with_slope else " (the value without L di/dt governs)"
    return (
        f"{torque_working(at)}; {temperature_working(at, cold=cold)}; {current_working(at)}; "
        f"{voltage_working(at, with_slope=bool(with_slope))}{note}; "
        f"{available_voltage_working(sets, i)}; {m.quotient(i)}"
    )


VOLTAGE = Check(
    key="voltage",
    title="Voltage",
    group="motor",
    unit="V",
    formula="max √((R i + K ω + L di/dt)² + (p ω L i)²) ≤ U_bus,min · m in the motor's basis; hot (R large) or at "
    "the lowest ambient (cold magnets: K large), whichever is worse",
    source="DC-equivalent machine; textbook dq relations at i_d = 0; the larger of the values with and without "
    "L di/dt counts",
    needs=(),
    measure=_voltage_measure,
    bound=lambda block: block.voltage,
    working=_voltage_working,
)
