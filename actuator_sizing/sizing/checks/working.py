"""The formula of a check with its numbers put in, so that a calculator confirms it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.machine import JudgedMotor, current_of_torque, judge, judge_cold
from actuator_sizing.core.parameters import BASIS_PEAK, BASIS_RMS, GearheadParameters, MotorParameters
from actuator_sizing.core.quadrature import integrate, interpolate
from actuator_sizing.core.transmission import stage_factor
from actuator_sizing.sizing.checks.base import Sets, digits
from actuator_sizing.sizing.pair_course import course

FloatArray = NDArray[np.float64]

_BASIS_FACTOR = {BASIS_RMS: " · √(3/2)", BASIS_PEAK: " · √3/2"}


@dataclass(frozen=True)
class Instant:
    """One set at one instant of the cycle, at judged temperatures or at ambient."""

    motor: MotorParameters  # one row
    gearhead: GearheadParameters  # one row
    judged: JudgedMotor  # one row
    linear: bool
    direction: float
    gearhead_factor: float
    acceleration: float  # motor side
    shaft_torque: float  # driven shaft
    shaft_speed: float
    speed: float  # motor side
    torque: float  # air gap
    current: float
    current_slope: float
    held: bool
    load_acceleration: float  # load coordinate
    causes: Mapping[str, float]  # parts of the torque at the driven shaft

    @property
    def units(self) -> tuple[str, str, str]:
        """Units of torque, speed and acceleration at the motor."""
        return ("N", "m/s", "m/s²") if self.linear else ("N·m", "rad/s", "rad/s²")


def instant_of(sets: Sets, i: int, at_s: float, largest: str, *, cold: bool = False) -> Instant:
    """Set i at an instant; where two pieces meet, the one with the larger `largest` ("torque" or "voltage").

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    i : int
        Which set. [-]
    at_s : float
        Instant within the cycle. [s]
    largest : str
        What decides between the two sides of a border. [-]
    cold : bool
        At ambient instead of the judged temperatures. [-]

    Returns
    -------
    Instant
        Everything that the working of a check names. [-]
    """
    demand = sets.demand
    motor, gearhead = sets.motors.take(slice(i, i + 1)), sets.gearheads.take(slice(i, i + 1))
    judged = (judge_cold if cold else judge)(motor, sets.surroundings)
    c = course(demand, motor, gearhead, judged)
    end = demand.start_s + demand.duration_s
    slack = 1e-9 * demand.cycle_s
    if demand.slices is not None:  # pieces of a condensed record are instants, and stand for others too
        end = demand.start_s
    inside = np.flatnonzero((demand.start_s <= at_s + slack) & (at_s <= end + slack))
    if not len(inside):
        inside = np.array([np.abs(demand.start_s - at_s).argmin()])
    decides = c.voltage_v[0] if largest == "voltage" else np.abs(c.torque_nm[0])

    def read(values: FloatArray, piece: int) -> float:
        x = np.clip(2.0 * (at_s - demand.start_s[piece]) / demand.duration_s[piece] - 1.0, -1.0, 1.0)
        return float(interpolate(values[piece], np.array([x]))[0])

    piece = int(max(inside.tolist(), key=lambda p: read(decides, p)))
    n = float(gearhead.ratio[0])
    factor = stage_factor(demand.flow[piece : piece + 1], gearhead.efficiency, gearhead.efficiency_back)
    torque = np.array([read(c.torque_nm[0], piece)])
    return Instant(
        motor=motor,
        gearhead=gearhead,
        judged=judged,
        linear=bool(motor.is_linear[0]),
        direction=float(demand.direction[piece]),
        gearhead_factor=float(factor[0]),
        acceleration=n * read(demand.motor_acceleration, piece),
        shaft_torque=read(demand.shaft_torque, piece),
        shaft_speed=read(demand.shaft_speed, piece),
        speed=read(c.motor_speed_rad_s[0], piece),
        torque=float(torque[0]),
        current=float(
            current_of_torque(torque, judged.torque_constant_nm_per_a, judged.saturation_per_a2)[0]
        ),
        current_slope=read(c.current_slope_a_s[0], piece),
        held=bool(demand.brake_closed[piece]) and demand.direction[piece] == 0.0,
        load_acceleration=read(demand.acceleration, piece),
        causes={cause: read(torque, piece) for cause, torque in demand.torque_by_cause.items()},
    )


def torque_working(at: Instant) -> str:
    """Air-gap torque from inertia, driven shaft and friction."""
    m, g = at.motor, at.gearhead
    unit, _, alpha_unit = at.units
    n = float(g.ratio[0])
    J = float(m.rotor_inertia_kg_m2[0] + g.inertia_kg_m2[0])
    friction = float(m.friction_torque_nm[0] + g.no_load_torque_nm[0])
    c = float(m.viscous_friction_nm_s[0])
    parts = " + ".join(f"{cause} {digits(value)}" for cause, value in at.causes.items())
    return (
        f"T_shaft = {parts} = {digits(at.shaft_torque)} {unit} at the driven shaft, by cause, "
        f"the load accelerating at {digits(at.load_acceleration)} (SI); "
        f"T = (J_m + J_g) α + k T_shaft/n + (T_c + T_0) sgn ω + c ω = {digits(J)} · {digits(at.acceleration)} "
        f"{alpha_unit} + {digits(at.gearhead_factor)} · {digits(at.shaft_torque)} / {digits(n)} + "
        f"{digits(friction)} · {digits(at.direction)} + {digits(c)} · {digits(at.speed)} "
        f"= {digits(at.torque)} {unit}"
    )


def current_working(at: Instant) -> str:
    """Current from torque."""
    K, s = float(at.judged.torque_constant_nm_per_a[0]), float(at.judged.saturation_per_a2[0])
    unit = "N/A" if at.linear else "N·m/A"
    magnet = f"K = {digits(K)} {unit} with the magnet at {digits(float(at.judged.magnet_degc[0]))} °C"
    if s > 0.0:
        return (
            f"{magnet}; T = K i (1 − s i²) with s = {digits(s)} 1/A² gives i = {digits(at.current)} A: "
            f"{digits(K)} · {digits(at.current)} · (1 − {digits(s)} · {digits(at.current)}²) "
            f"= {digits(K * at.current * (1 - s * at.current**2))}"
        )
    return f"{magnet}; i = T/K = {digits(at.torque)} / {digits(K)} = {digits(at.current)} A"


def voltage_working(at: Instant, *, with_slope: bool) -> str:
    """Voltage from current, speed and, where it raises the voltage, the slope of the current."""
    j = at.judged
    R, L, K, X = (
        float(x[0])
        for x in (j.resistance_ohm, j.inductance_h, j.torque_constant_nm_per_a, j.reactance_per_speed)
    )
    slope = at.current_slope if with_slope else 0.0
    along = R * at.current + K * at.speed + L * slope
    across = X * at.speed * at.current
    cable = float(j.cable_ohm[0])
    with_cable = f" with {digits(cable)} Ω of cable" if cable > 0.0 else ""
    return (
        f"R = {digits(R)} Ω at winding {digits(float(j.winding_degc[0]))} °C{with_cable}; "
        f"R i + K ω + L di/dt = {digits(R)} · {digits(at.current)} + {digits(K)} · {digits(at.speed)} + "
        f"{digits(L)} · {digits(slope)} = {digits(along)} V; p ω L i = {digits(X)} · "
        f"{digits(at.speed)} · {digits(at.current)} = {digits(across)} V; u = √({digits(along)}² + "
        f"{digits(across)}²) = {digits(float(np.hypot(along, across)))} V"
    )


def voltage_limit_working(sets: Sets, i: int, at: Instant) -> str:
    """Largest torque within the voltage at the speed of an instant."""
    j = at.judged
    R, K, sat, X = (
        float(x[0])
        for x in (j.resistance_ohm, j.torque_constant_nm_per_a, j.saturation_per_a2, j.reactance_per_speed)
    )
    U, omega = float(sets.pairs.voltage_available_v[i]), abs(at.speed)
    emf, reactance = K * omega, X * omega
    motoring = at.torque * at.speed >= 0.0
    a, b = R**2 + reactance**2, R * emf
    under = b**2 - a * (emf**2 - U**2)
    if under < 0.0 or (motoring and emf >= U):
        return f"K ω = {digits(K)} · {digits(omega)} = {digits(emf)} V uses up U = {digits(U)} V: no torque is left"
    least = (b - under**0.5) / a
    if emf >= U and abs(at.current) < least:
        return (
            f"K ω = {digits(K)} · {digits(omega)} = {digits(emf)} V is more than U = {digits(U)} V: at this speed "
            f"a braking current of at least {digits(least)} A is needed to stay within the voltage"
        )
    current = (-b + under**0.5) / a if motoring else (b + under**0.5) / a
    sign = "−" if motoring else ""
    torque = K * current * (1.0 - sat * current**2)
    saturation = f" · (1 − {digits(sat)} · {digits(current)}²)" if sat > 0.0 else ""
    unit = at.units[0]
    return (
        f"{available_voltage_working(sets, i)}; K ω = {digits(emf)} V, R = {digits(R)} Ω, "
        f"p ω L = {digits(reactance)} Ω: "
        f"i = ({sign}R K ω + √((R K ω)² − (R² + (p ω L)²)((K ω)² − U²))) / (R² + (p ω L)²) = {digits(current)} A; "
        f"T_available = {digits(K)} · {digits(current)}{saturation} = {digits(torque)} {unit}"
    )


def temperature_working(at: Instant, *, cold: bool) -> str:
    """Which state of the motor governs."""
    winding, magnet = (digits(float(x[0])) for x in (at.judged.winding_degc, at.judged.magnet_degc))
    state = "cold, at the lowest ambient" if cold else "hot"
    return f"the motor {state} governs (winding {winding} °C, magnet {magnet} °C)"


def available_voltage_working(sets: Sets, i: int) -> str:
    """Model voltage at minimum bus."""
    s = sets.surroundings
    factor = _BASIS_FACTOR.get(int(sets.motors.current_basis[i]), "")
    return (
        f"U = {digits(s.bus_min_v)} V · {digits(s.modulation_limit)}{factor} "
        f"= {digits(float(sets.pairs.voltage_available_v[i]))} V"
    )


def rms_working(sets: Sets, i: int) -> str:
    """RMS current from the integral of i² over each segment."""
    demand = sets.demand
    motor, gearhead = sets.motors.take(slice(i, i + 1)), sets.gearheads.take(slice(i, i + 1))
    current = course(demand, motor, gearhead, judge(motor, sets.surroundings)).current_a[0]
    parts = []
    for segment in np.unique(demand.segment):
        mine = demand.segment == segment
        parts.append(float(integrate(demand.duration_s[mine], current[mine] ** 2)))
    shown = " + ".join(digits(part) for part in parts[:12]) + (" + …" if len(parts) > 12 else "")
    return (
        f"I_rms = √(∫ i² dt / T), by segment ({shown}) A²s / {digits(demand.cycle_s)} s: "
        f"√({digits(sum(parts))} / {digits(demand.cycle_s)}) = {digits(float(sets.pairs.current_rms_a[i]))} A"
    )
