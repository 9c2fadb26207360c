"""What the numbers of one data sheet must have to do with each other.

A maker computes most of them from the same few values, so they agree to rounding, tolerance and temperature:
10 to 20 % where the constants enter, more where heat does. A residual is the stated value over the one that
follows from the others; NaN where something is missing. Only stated values are audited: what was derived
agrees by construction.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case import audit_slips as slip
from actuator_sizing.case.model import STATED, Catalog
from actuator_sizing.core.conventions import (
    PEAK_LINE_VOLTS,
    motor_constant,
    torque_constant_from_back_emf,
)
from actuator_sizing.core.parameters import BASIS_DC, SINUSOIDAL, DriveParameters, MotorParameters
from actuator_sizing.units import parse_unit

FloatArray = NDArray[np.float64]

UNITS = (slip.KILOGRAM_FORCE, slip.POUND_INCH, slip.OUNCE_INCH)
CONSTANT = (slip.RMS_PEAK, slip.LINE_PHASE, slip.THREE_HALVES, slip.TERMINAL_PHASE, *UNITS)
SPEED = (slip.PER_MINUTE, slip.REVOLUTIONS)
_FAMILY_SIZE = 3  # windings of one frame that it takes to say which one is odd


@dataclass(frozen=True)
class Identity:
    """One identity, evaluated for every row of a catalog.

    Attributes
    ----------
    column : str
        Key of the column that is held against the others.
    residual : ndarray, shape (n,)
        Stated over expected value; NaN where it cannot be judged. [-]
    low, high : float
        Residual that is taken for honest. [-]
    rule : str
        How the expected value follows.
    slips : tuple
        Slips that are possible.
    """

    column: str
    residual: FloatArray
    low: float
    high: float
    rule: str
    slips: tuple[slip.Slip, ...] = ()

    @property
    def suspect(self) -> NDArray[np.bool_]:
        """Rows whose residual is out of bounds."""
        with np.errstate(invalid="ignore"):
            return (self.residual > 0.0) & ((self.residual < self.low) | (self.residual > self.high))


def _stated(catalog: Catalog, key: str) -> FloatArray:
    """SI values that the sheet states, NaN elsewhere."""
    if key not in catalog.values:
        return np.full(len(catalog), np.nan)
    values = np.asarray(catalog.values[key], dtype=float)
    return np.where(catalog.origins[key] == STATED, values, np.nan)


def _ratio(stated: FloatArray, expected: FloatArray) -> FloatArray:
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        result = stated / expected
    return np.where(np.isfinite(result) & (result > 0.0), result, np.nan)


def motor_identities(catalog: Catalog, motors: MotorParameters) -> Iterator[Identity]:
    """Every identity between the columns of the motor table.

    Parameters
    ----------
    catalog : Catalog
        The motor table.
    motors : MotorParameters
        The same rows as the equations see them.
    """
    yield from _constants(catalog, motors)
    yield from _winding(catalog, motors)
    yield from _points(catalog, motors)
    yield _heat(catalog, motors)
    yield from _families(catalog, motors)


def _constants(catalog: Catalog, motors: MotorParameters) -> Iterator[Identity]:
    """Torque constant against back-EMF and speed constant: the same property of the magnets, said twice."""
    for constant, per_volt, basis_key in (
        ("torque_constant", "back_emf_constant", "back_emf_constant_basis"),
        ("force_constant", "linear_back_emf_constant", "back_emf_constant_basis"),
        ("torque_constant", "speed_constant", "speed_constant_basis"),
    ):
        stated = _stated(catalog, per_volt)
        inverted = per_volt == "speed_constant"
        with np.errstate(divide="ignore", invalid="ignore"):
            back_emf = 1.0 / stated if inverted else stated
        implied = np.full(len(catalog), np.nan)
        volts = _volts(catalog, motors, per_volt, basis_key)
        for word in PEAK_LINE_VOLTS:
            implied = np.where(
                volts == word, torque_constant_from_back_emf(back_emf, word, motors.current_basis), implied
            )
        residual = _ratio(implied, _stated(catalog, constant))
        yield Identity(
            per_volt,
            1.0 / residual if inverted else residual,
            0.9,
            1.1,
            f"the {constant.replace('_', ' ')}, each in its basis",
            (
                slip.RMS_PEAK,
                slip.LINE_PHASE,
                slip.LINE_PHASE_RMS_PEAK,
                slip.LINE_RMS_PHASE_PEAK,
                slip.TERMINAL_PHASE,
                *SPEED,
                *UNITS,
            ),
        )


def _volts(catalog: Catalog, motors: MotorParameters, key: str, basis_key: str) -> NDArray[np.object_]:
    """Which volt each row means: its own word, else that of the heading, else by the commutation."""
    words = np.asarray(catalog.values[basis_key], dtype=object).copy()
    kind = key.replace("_", " ").replace("back emf", "back-EMF")
    spelling = catalog.entered_units.get(key, "")
    heading = parse_unit(spelling, kind).basis if spelling else ""
    if heading in ("rms", "peak"):
        heading += " line-to-line"
    usual = np.where(motors.commutation == SINUSOIDAL, "rms line-to-line", "DC")
    return np.where(words != "", words, heading or usual)


def _winding(catalog: Catalog, motors: MotorParameters) -> Iterator[Identity]:
    """Identities that hold for every machine: constants, resistance, inductance, inertia."""
    R, L, K = motors.resistance_ohm, motors.inductance_h, motors.torque_constant_nm_per_a
    J = _stated(catalog, "rotor_inertia")
    yield Identity(
        "motor_constant",
        _ratio(_stated(catalog, "motor_constant"), motor_constant(K, R)),
        0.9,
        1.1,
        "torque constant over the root of the resistance",
        CONSTANT,
    )
    yield Identity(
        "electrical_time_constant",
        _ratio(_stated(catalog, "electrical_time_constant"), L / R),
        0.85,
        1.18,
        "inductance over resistance",
        (slip.TERMINAL_PHASE, slip.THREE_HALVES),
    )
    yield Identity(
        "mechanical_time_constant",
        _ratio(_stated(catalog, "mechanical_time_constant"), R * J / K**2),
        0.8,
        1.25,
        "resistance times rotor inertia over the square of the torque constant",
        (
            slip.RMS_PEAK_SQUARED,
            slip.LINE_PHASE_SQUARED,
            slip.THREE_HALVES,
            slip.FLYWHEEL,
            slip.POUND_MASS,
            slip.INCH_MASS,
            slip.KILOGRAM_FORCE,
        ),
    )


def _points(catalog: Catalog, motors: MotorParameters) -> Iterator[Identity]:
    """Identities between the no-load, rated, continuous, peak and stall points."""
    R, K = motors.resistance_ohm, motors.torque_constant_nm_per_a
    U = _stated(catalog, "nominal_voltage")
    # Only a DC machine has its nominal voltage at the terminals of the model.
    U = np.where(motors.current_basis == BASIS_DC, U, np.nan)
    no_load = _stated(catalog, "no_load_current")
    I_0 = np.where(np.isnan(no_load), np.nan_to_num(motors.friction_torque_nm) / K, no_load)
    yield Identity(
        "no_load_speed",
        _ratio(_stated(catalog, "no_load_speed"), (U - R * I_0) / K),
        0.88,
        1.14,
        "nominal voltage less the drop of the no-load current, over the torque constant",
        SPEED,
    )
    yield Identity(
        "stall_current",
        _ratio(_stated(catalog, "stall_current"), U / R),
        0.88,
        1.14,
        "nominal voltage over resistance",
        (slip.TERMINAL_PHASE, slip.THREE_HALVES),
    )
    stall_current = _stated(catalog, "stall_current")
    I_A = np.where(np.isnan(stall_current), U / R, stall_current)
    stall_torque = _stated(catalog, "stall_torque")
    yield Identity(
        "stall_torque",
        _ratio(stall_torque, K * I_A),
        0.82,
        1.14,
        "torque constant times stall current",
        CONSTANT,
    )
    # The gradient of the speed-torque line needs no voltage, so it is used where that is not stated.
    without_voltage = np.where(np.isnan(I_A), stall_torque, np.nan)
    with np.errstate(divide="ignore", invalid="ignore"):
        from_gradient = _stated(catalog, "no_load_speed") * K**2 / R
    yield Identity(
        "stall_torque",
        _ratio(without_voltage, from_gradient),
        0.8,
        1.25,
        "no-load speed over the gradient R/K² of the speed-torque line",
        (*CONSTANT, *SPEED),
    )
    yield Identity(
        "rated_current",
        _ratio(_stated(catalog, "rated_current"), _stated(catalog, "rated_torque") / K + I_0),
        0.82,
        1.3,
        "rated torque over the torque constant, plus the no-load current",
        CONSTANT,
    )
    for column in ("continuous_torque", "continuous_force"):
        yield Identity(
            column,
            _ratio(_stated(catalog, column), K * _stated(catalog, "continuous_current")),
            0.75,
            1.14,
            "torque or force constant times continuous current",
            CONSTANT,
        )
    for column in ("peak_torque", "peak_force"):
        yield Identity(
            column,
            _ratio(_stated(catalog, column), K * _stated(catalog, "peak_current")),
            0.4,  # iron saturates: less torque than the constant promises is no contradiction
            1.14,
            "at most torque or force constant times peak current",
            CONSTANT,
        )
    with np.errstate(divide="ignore", invalid="ignore"):
        at_rated = (U - R * _stated(catalog, "rated_torque") / K) / K
    yield Identity(
        "rated_speed",
        _ratio(_stated(catalog, "rated_speed"), at_rated),
        0.0,  # a rated speed below what the voltage allows is a choice
        1.14,
        "at most what the nominal voltage leaves after the resistive drop, over the torque constant",
        SPEED,
    )


def _heat(catalog: Catalog, motors: MotorParameters) -> Identity:
    """Hold the continuous current against the heat that it makes."""
    rise = motors.winding_limit_degc - motors.continuous_ambient_degc
    hot = motors.winding_limit_degc - motors.resistance_reference_degc
    resistance = motors.resistance_ohm * (1.0 + motors.resistance_coefficient_per_k * hot)
    thermal = _stated(catalog, "thermal_resistance_winding_housing") + _stated(
        catalog, "thermal_resistance_housing_ambient"
    )
    with np.errstate(divide="ignore", invalid="ignore"):
        expected = np.sqrt(rise / (resistance * thermal))
    return Identity(
        "continuous_current",
        _ratio(_stated(catalog, "continuous_current"), expected),
        0.75,
        1.25,  # a thermal resistance is good to 15 to 30 %, and the current goes with its root
        "the current whose hot copper loss just heats the winding to its limit through both thermal "
        "resistances",
        (slip.RMS_PEAK, slip.LINE_PHASE, slip.THREE_HALVES),
    )


def _families(catalog: Catalog, motors: MotorParameters) -> Iterator[Identity]:
    """Windings of one frame: R and L go with the square of the turns, the torque constant with the turns.

    A frame is told by equal rotor inertia, mass and length, all stated, under one current basis.
    """
    parts = [_stated(catalog, key) for key in ("rotor_inertia", "mass", "length")]
    known = np.logical_and.reduce([np.isfinite(part) for part in parts[:2]])
    member = np.full(len(known), -1, dtype=np.intp)
    member[known] = _equal_rows(
        [*(np.nan_to_num(part)[known] for part in parts), motors.current_basis[known]]
    )
    K_M = motor_constant(motors.torque_constant_nm_per_a, motors.resistance_ohm)
    yield Identity(
        "resistance_terminal_to_terminal",
        _against_family(1.0 / K_M**2, member),
        0.7,
        1.43,
        "the other windings of this frame, in proportion to the square of the torque constant",
        (slip.TERMINAL_PHASE, slip.THREE_HALVES, slip.LINE_PHASE_SQUARED),
    )
    yield Identity(
        "inductance_terminal_to_terminal",
        _against_family(motors.inductance_h / motors.resistance_ohm, member),
        0.6,
        1.67,  # fill factors differ between thick and thin wire, and inductance is a rough value
        "the other windings of this frame, in proportion to the resistance",
        (slip.TERMINAL_PHASE, slip.THREE_HALVES),
    )


def _equal_rows(columns: Sequence[NDArray[Any]]) -> NDArray[np.intp]:
    """Number of each row, the same for equal rows: columns one by one, far faster than sorting whole rows."""
    number = np.zeros(len(columns[0]), dtype=np.intp)
    for column in columns:
        values, place = np.unique(column, return_inverse=True)
        _, number = np.unique(number * len(values) + place, return_inverse=True)
    return number


def _against_family(value: FloatArray, member: NDArray[np.intp]) -> FloatArray:
    """Value over the median of its family; NaN where the family is too small to tell."""
    residual = np.full(len(value), np.nan)
    usable = np.flatnonzero((member >= 0) & np.isfinite(value) & (value > 0.0))
    order = usable[np.lexsort((value[usable], member[usable]))]
    if len(order) == 0:
        return residual
    families, start, count = np.unique(member[order], return_index=True, return_counts=True)
    low, high = start + (count - 1) // 2, start + count // 2
    median = 0.5 * (value[order][low] + value[order][high])
    position = np.searchsorted(families, member[usable])
    large = count[position] >= _FAMILY_SIZE
    residual[usable[large]] = value[usable][large] / median[position][large]
    return residual


def drive_identities(catalog: Catalog, drives: DriveParameters) -> Iterator[Identity]:
    """Every identity between the columns of the drive table.

    Parameters
    ----------
    catalog : Catalog
        The drive table.
    drives : DriveParameters
        The same rows as the equations see them.
    """
    yield Identity(
        "peak_current",
        _ratio(_stated(catalog, "peak_current"), drives.continuous_current_a),
        0.99,
        5.0,
        "one to five times the continuous current",
        (slip.RMS_PEAK,),
    )
