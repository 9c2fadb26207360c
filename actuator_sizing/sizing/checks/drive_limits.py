"""Checks between drive, cable and winding: one leg at standstill, electrical frequency, ripple, voltage drop."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.conventions import model_factor
from actuator_sizing.core.drive_limits import RIPPLE_FACTORS, ripple_current, ripple_loss
from actuator_sizing.core.machine import (
    amplitude_per_unit_current,
    judge,
    motor_amplitude_per_unit_current,
    resistance_at,
)
from actuator_sizing.core.parameters import BRUSHED, SINUSOIDAL
from actuator_sizing.sizing.checks.base import Check, Measure, Need, Sets, digits
from actuator_sizing.sizing.demand import Demand, build_demand
from actuator_sizing.sizing.derating import derating_of
from actuator_sizing.sizing.pair_course import course

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

#: Below this electrical frequency the same leg carries the top of the sine for long; common practice of drive
#: manuals, which name 1 to 5 Hz (from memory).
SLOW_HZ = 3.0
#: How long a power semiconductor needs to warm up, so that shorter stops do not count; common practice.
HELD_S = 1.0
#: Continuous current at standstill over the rated one where the sheet states none: a leg that carries the amplitude
#: for ever then heats as at the rating, whose effective value it is.
STANDSTILL_SHARE = float(1.0 / np.sqrt(2.0))
#: Of the rated copper loss, which the ripple may add; rule of thumb.
RIPPLE_SHARE = 0.1
#: Of the available voltage, which the cable may take; rule of thumb, 3 to 5 % in installation practice.
CABLE_SHARE = 0.05

_PAIRS_PER_CHUNK = 128
_PIECES_PER_CHUNK = 1_000_000  # of all its pairs together
_ROUNDING = 1e-9  # of a sum of durations
_BY_PIECE = (
    "segment", "start_s", "duration_s", "direction", "flow", "brake_closed", "position", "speed", "acceleration",
    "effort", "shaft_speed", "shaft_acceleration", "shaft_torque", "motor_acceleration",
)  # fmt: skip
_RULE = "rule of thumb"


def _stated(column: str) -> Need:
    return Need("drives", column, column.replace("_", " ").replace("pwm", "PWM"))


# -- one leg at standstill ----------------------------------------------------------------------------
@dataclass(frozen=True)
class _Held:
    amplitude_a: FloatArray  # (S,) largest, zero where nothing is held for long
    at_s: FloatArray


def _held(sets: Sets) -> _Held:
    """Largest current of the sets while the field hardly turns for `HELD_S` or longer."""
    pairs, pair = np.unique(sets.index[:, :2], axis=0, return_inverse=True)
    demand = sets.demand
    if demand.slices is not None:  # condensed: stretches of time are known only in order
        demand = build_demand(sets.case, in_order=True)
    size = int(np.clip(_PIECES_PER_CHUNK // len(demand.duration_s), 1, _PAIRS_PER_CHUNK))
    found = [_held_by(sets, demand, pairs[start : start + size]) for start in range(0, len(pairs), size)]
    current, at = (np.concatenate(column)[pair.reshape(-1)] for column in zip(*found, strict=True))
    return _Held(current * motor_amplitude_per_unit_current(sets.motors), at)


def _held_by(sets: Sets, demand: Demand, pairs: NDArray[np.intp]) -> tuple[FloatArray, FloatArray]:
    motors = sets.case.motor_parameters.take(pairs[:, 0])
    gearheads = sets.case.gearhead_parameters.take(pairs[:, 1])
    per_speed = np.nan_to_num(motors.pole_pairs, nan=1.0) * gearheads.ratio / (2.0 * np.pi)
    slow = per_speed[:, None] * np.abs(demand.shaft_speed).max(axis=1) < SLOW_HZ
    counts = slow & (_stretches(demand.duration_s, slow) >= HELD_S * (1.0 - _ROUNDING))
    kept = np.flatnonzero(counts.any(axis=0))
    if not len(kept):
        return np.zeros(len(pairs)), np.full(len(pairs), np.nan)
    part = replace(demand, **{name: getattr(demand, name)[kept] for name in _BY_PIECE})
    c = course(part, motors, gearheads, judge(motors, sets.surroundings))
    peak = np.where(counts[:, kept], np.abs(c.current_a).max(axis=2), 0.0)
    piece = peak.argmax(axis=1)
    row = np.arange(len(pairs))
    at = np.where(peak[row, piece] > 0.0, part.start_s[piece] + 0.5 * part.duration_s[piece], np.nan)
    return peak[row, piece], at


def _stretches(duration_s: FloatArray, slow: BoolArray) -> FloatArray:
    """Length of the stretch of slow pieces that each piece belongs to, periodic, zero where it is fast."""
    # Thresholds of one speed: pairs that are slow on as many pieces are slow on the same ones.
    _, first, of_row = np.unique(slow.sum(axis=1), return_index=True, return_inverse=True)
    answer = np.zeros((len(first), slow.shape[1]))
    for row, is_slow in enumerate(slow[first]):
        fast = np.flatnonzero(~is_slow)
        if not len(fast):
            answer[row] = duration_s.sum()
            continue
        # From the first fast piece on, no stretch wraps: each ends before the next fast piece.
        turned = np.roll(np.where(is_slow, duration_s, 0.0), -fast[0])
        starts = fast - fast[0]
        lasts = np.repeat(np.add.reduceat(turned, starts), np.diff(starts, append=len(turned)))
        answer[row] = np.where(is_slow, np.roll(lasts, fast[0]), 0.0)
    return answer[of_row.reshape(-1)]


def _stated_standstill(sets: Sets) -> tuple[FloatArray, FloatArray]:
    """Standstill current of the sheet, and what the surroundings leave of it: as of the continuous one. [A], [-]"""
    left = derating_of(sets.case)
    factor = (left.by_ambient * left.by_altitude)[sets.index[:, 2]]
    return sets.catalog_values("drives", "standstill_current"), factor


def _standstill_measure(sets: Sets) -> Measure:
    held = sets.once(_held)
    per_drive = amplitude_per_unit_current(sets.drives.current_basis)
    stated, left = _stated_standstill(sets)
    capacity = np.where(np.isnan(stated), STANDSTILL_SHARE * sets.drives.continuous_current_a, stated * left)
    return Measure(held.amplitude_a / per_drive, capacity, held.at_s)


def _standstill_working(sets: Sets, i: int) -> str:
    stated, left = (float(column[i]) for column in _stated_standstill(sets))
    m = _standstill_measure(sets)
    rule = f"{digits(float(m.capacity[i]))} A as stated"
    if left != 1.0:
        rule = f"{digits(stated)} A as stated · {digits(left)} left in these surroundings"
    if np.isnan(stated):
        rule = f"I_cont / √2 = {digits(float(sets.drives.continuous_current_a[i]))} / √2 A, {_RULE}"
    return f"I_held = {digits(float(m.demand[i]))} A in the drive's basis; I_0 = {rule}; {m.quotient(i)}"


def _feeds_sines(sets: Sets) -> BoolArray:
    return np.asarray(sets.motors.commutation == SINUSOIDAL)


DRIVE_STANDSTILL = Check(
    key="drive_standstill_current",
    title="Drive current at standstill",
    group="drive",
    unit="A",
    formula="max |i| while the electrical frequency stays below 3 Hz for 1 s or longer ≤ I_0, as stated or I_cont/√2",
    source="One leg carries the top of the sine; practice of drive manuals. Only advice where the sheet states no "
    "standstill current",
    needs=(Need("drives", "continuous_current_a", "continuous current in these surroundings"),),
    measure=_standstill_measure,
    working=_standstill_working,
    applies=_feeds_sines,
    binds_where=_stated("standstill_current").known,
)


# -- electrical frequency -----------------------------------------------------------------------------
def _pole_pairs(sets: Sets) -> FloatArray:
    """Pole pairs per turn, or per metre over 2π, as the field sees them; of six-step motors those of the sheet."""
    own = sets.motors.pole_pairs
    return np.where(np.isnan(own), sets.catalog_values("motors", "pole_pairs"), own)


def _frequency_measure(sets: Sets) -> Measure:
    frequency = _pole_pairs(sets) * sets.pairs.speed_peak_rad_s / (2.0 * np.pi)
    return Measure(
        frequency, sets.catalog_values("drives", "maximum_output_frequency"), sets.pairs.speed_peak_at_s
    )


def _frequency_working(sets: Sets, i: int) -> str:
    m, p = _frequency_measure(sets), float(_pole_pairs(sets)[i])
    return (
        f"f = p ω / 2π = {digits(p)} · {digits(float(sets.pairs.speed_peak_rad_s[i]))} rad/s / 2π = "
        f"{digits(float(m.demand[i]))} Hz; {m.quotient(i)}"
    )


DRIVE_FREQUENCY = Check(
    key="drive_output_frequency",
    title="Electrical frequency",
    group="drive",
    unit="Hz",
    formula="max p |ω| / 2π ≤ largest output frequency of the drive",
    source="Largest output frequency of the data sheet",
    needs=(
        Need(
            "motors",
            "pole_pairs",
            "pole pairs",
            "pole pitch",
            known_by=lambda sets: ~np.isnan(_pole_pairs(sets)),
        ),
        _stated("maximum_output_frequency"),
    ),
    measure=_frequency_measure,
    working=_frequency_working,
    applies=lambda sets: np.asarray(sets.motors.commutation != BRUSHED),
    binds_where=_stated("maximum_output_frequency").known,
)


# -- inductance and ripple ----------------------------------------------------------------------------
def _terminal_inductance(sets: Sets) -> FloatArray:
    return np.asarray(sets.motors.inductance_h / model_factor(sets.motors.current_basis))


_INDUCTANCE = Need("motors", "inductance_h", "inductance terminal-to-terminal")


def _inductance_measure(sets: Sets) -> Measure:
    return Measure(sets.catalog_values("drives", "minimum_load_inductance"), _terminal_inductance(sets))


DRIVE_INDUCTANCE = Check(
    key="drive_load_inductance",
    title="Load inductance",
    group="drive",
    unit="H",
    formula="L_min of the drive ≤ L terminal-to-terminal",
    source="Smallest load inductance of the data sheet; below it a choke is needed",
    needs=(_INDUCTANCE, _stated("minimum_load_inductance")),
    measure=_inductance_measure,
    working=lambda sets, i: f"L_min / L = {_inductance_measure(sets).quotient(i)}",
    is_fit=True,
    binds_where=_stated("minimum_load_inductance").known,
)


def pwm_ripple(sets: Sets) -> tuple[FloatArray, FloatArray]:
    """Largest peak-to-peak ripple of the current and its loss at most, per set; NaN where not known.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    ripple_a : ndarray, shape (S,)
        In one phase, peak to peak. [A]
    loss_w : ndarray, shape (S,)
        In the copper at judged temperature. [W]
    """
    pwm = sets.catalog_values("drives", "pwm_frequency")
    ripple = ripple_current(
        sets.surroundings.bus_max_v, _terminal_inductance(sets), pwm, sets.motors.commutation
    )
    resistance = sets.pairs.resistance_ohm / model_factor(sets.motors.current_basis)
    return ripple, ripple_loss(ripple, resistance, sets.motors.commutation)


def _ripple_measure(sets: Sets) -> Measure:
    m = sets.motors
    rated = resistance_at(m, m.winding_limit_degc) * m.continuous_current_a**2
    return Measure(pwm_ripple(sets)[1], RIPPLE_SHARE * rated)


def _ripple_working(sets: Sets, i: int) -> str:
    m = _ripple_measure(sets)
    factor = RIPPLE_FACTORS[int(sets.motors.commutation[i])]
    L, f = float(_terminal_inductance(sets)[i]), float(sets.catalog_values("drives", "pwm_frequency")[i])
    ripple, loss = (float(value[i]) for value in pwm_ripple(sets))
    return (
        f"Δi = U/({digits(1.0 / factor)} L f) = {digits(sets.surroundings.bus_max_v)} V / ({digits(1.0 / factor)} · "
        f"{digits(L)} H · {digits(f)} Hz) = {digits(ripple)} A peak to peak; its loss is at most {digits(loss)} W "
        f"of {digits(float(m.capacity[i]) / RIPPLE_SHARE)} W rated copper loss; {m.quotient(i)}"
    )


PWM_RIPPLE = Check(
    key="pwm_ripple_loss",
    title="Loss by PWM ripple",
    group="motor",
    unit="W",
    formula="Δi = U_bus,max/(k L f), k = 2 brushed, 4 six-step, 3 sinusoidal; Σ R Δi²/12 ≤ 10 % of the rated "
    "copper loss",
    source="Volt-seconds of one pulse, largest over the duty, first principles; the share is a rule of thumb",
    needs=(
        _INDUCTANCE,
        Need("motors", "continuous_current_a", "continuous current", "continuous force"),
        Need("motors", "winding_limit_degc", "winding temperature limit or thermal class"),
        _stated("pwm_frequency"),
    ),
    measure=_ripple_measure,
    working=_ripple_working,
)


# -- cable --------------------------------------------------------------------------------------------
def _drop_measure(sets: Sets) -> Measure:
    drop = sets.pairs.cable_ohm * sets.pairs.current_peak_a
    return Measure(drop, CABLE_SHARE * sets.pairs.voltage_available_v, sets.pairs.torque_peak_at_s)


def _drop_working(sets: Sets, i: int) -> str:
    m = _drop_measure(sets)
    return (
        f"R_cable i = {digits(float(sets.pairs.cable_ohm[i]))} Ω · {digits(float(sets.pairs.current_peak_a[i]))} A "
        f"= {digits(float(m.demand[i]))} V in the motor's basis; {m.quotient(i)}"
    )


CABLE_DROP = Check(
    key="cable_voltage_drop",
    title="Voltage drop of the motor cable",
    group="drive",
    unit="V",
    formula="R_cable max |i| ≤ 5 % of the available voltage; R_cable = 2 ρ l/A at 70 °C",
    source="Conductors of class 5 of IEC 60228; the share is a rule of thumb. The checks of voltage count the drop",
    needs=(),
    measure=_drop_measure,
    working=_drop_working,
    applies=lambda sets: np.full(len(sets), sets.surroundings.cable_ohm > 0.0),
)

DRIVE_LIMIT_CHECKS = (DRIVE_STANDSTILL, DRIVE_FREQUENCY, DRIVE_INDUCTANCE, PWM_RIPPLE, CABLE_DROP)
