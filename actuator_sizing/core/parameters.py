"""What the equations know of a part: arrays with one entry per candidate, SI, NaN where not known.

Every class has a leading candidate axis, so that the functions which size one candidate size a million.
Rotary machines use N·m, rad/s and kg·m²; for a linear machine the same fields hold N, m/s and kg.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Self

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int8]

COMMUTATIONS = ("brushed", "six-step", "sinusoidal")
BRUSHED, SIX_STEP, SINUSOIDAL = range(3)
CURRENT_BASES = ("DC", "rms", "peak")
BASIS_DC, BASIS_RMS, BASIS_PEAK = range(3)


class _Columns:
    """Shared behaviour of the column classes: length, and the rows of an index array."""

    def __len__(self) -> int:
        first = getattr(self, fields(self)[0].name)  # type: ignore[arg-type]
        return int(len(first))

    def take(self, index: NDArray[np.intp] | slice) -> Self:
        """Rows `index` of every column."""
        return type(self)(**{f.name: getattr(self, f.name)[index] for f in fields(self)})  # type: ignore[arg-type]

    @classmethod
    def joined(cls, parts: Sequence[Self]) -> Self:
        """Rows of several, one after the other."""
        names = [f.name for f in fields(cls)]  # type: ignore[arg-type]
        return cls(**{name: np.concatenate([getattr(part, name) for part in parts]) for name in names})


@dataclass(frozen=True)
class MotorParameters(_Columns):
    """Motors as the DC-equivalent model needs them; each field has shape (n,).

    Resistance, inductance and torque constant belong together in the current basis of the sheet:
    ``u = R i + L di/dt + K ω``, ``T = K i``, loss ``R i²`` with ``i`` in that basis.
    """

    is_linear: NDArray[np.bool_]
    commutation: IntArray  # index into COMMUTATIONS
    current_basis: IntArray  # index into CURRENT_BASES
    resistance_ohm: FloatArray  # DC-equivalent, at resistance_reference_degc
    resistance_reference_degc: FloatArray
    resistance_coefficient_per_k: FloatArray  # at resistance_reference_degc
    inductance_h: FloatArray  # DC-equivalent
    torque_constant_nm_per_a: FloatArray  # at magnet_reference_degc, unsaturated
    magnet_reference_degc: FloatArray
    magnet_coefficient_per_k: FloatArray  # relative change of the torque constant per kelvin, <= 0
    pole_pairs: FloatArray  # NaN: reactance not counted
    rotor_inertia_kg_m2: FloatArray  # rotor plus built-in brake
    friction_torque_nm: FloatArray  # Coulomb part
    viscous_friction_nm_s: FloatArray
    continuous_current_a: FloatArray  # in the motor's basis, at continuous_ambient_degc
    continuous_ambient_degc: FloatArray
    peak_current_a: FloatArray
    peak_torque_nm: FloatArray
    speed_max_rad_s: FloatArray
    winding_limit_degc: FloatArray
    thermal_resistance_winding_k_w: FloatArray  # winding to housing
    thermal_resistance_housing_k_w: FloatArray  # housing to ambient
    winding_time_constant_s: FloatArray
    housing_time_constant_s: FloatArray
    brake_torque_nm: FloatArray
    brake_coil_w: FloatArray  # heat of the holding brake's coil while it is released; 0 where not stated
    nominal_voltage_v: FloatArray
    mass_kg: FloatArray
    price: FloatArray


@dataclass(frozen=True)
class GearheadParameters(_Columns):
    """Gearheads; each field has shape (n,). Direct drive is a row with ratio 1 and `is_direct`."""

    is_direct: NDArray[np.bool_]
    ratio: FloatArray
    efficiency: FloatArray  # forward, 0..1
    efficiency_back: FloatArray  # back-driving; <= 0 is self-locking
    no_load_torque_nm: FloatArray  # at the input
    inertia_kg_m2: FloatArray  # at the input
    continuous_torque_nm: FloatArray  # at the output
    peak_torque_nm: FloatArray
    emergency_torque_nm: FloatArray
    speed_mean_max_rad_s: FloatArray  # at the input
    speed_max_rad_s: FloatArray
    stiffness_nm_per_rad: FloatArray  # at the output
    backlash_rad: FloatArray
    mass_kg: FloatArray
    price: FloatArray


@dataclass(frozen=True)
class DriveParameters(_Columns):
    """Drives; each field has shape (n,)."""

    current_basis: IntArray
    serves_brushed: NDArray[np.bool_]
    serves_six_step: NDArray[np.bool_]
    serves_sinusoidal: NDArray[np.bool_]
    continuous_current_a: FloatArray  # in the drive's own basis
    continuous_ambient_degc: FloatArray
    peak_current_a: FloatArray
    peak_time_s: FloatArray
    rms_window_s: FloatArray  # NaN: the whole cycle
    bus_voltage_min_v: FloatArray
    bus_voltage_max_v: FloatArray
    capacitance_f: FloatArray
    chopper_threshold_v: FloatArray
    brake_resistor_min_ohm: FloatArray
    efficiency: FloatArray
    mass_kg: FloatArray
    price: FloatArray


@dataclass(frozen=True)
class Surroundings:
    """Where the axis works and what feeds it. Voltages are DC bus voltages."""

    ambient_degc: float
    altitude_m: float
    bus_nominal_v: float
    bus_min_v: float
    bus_max_v: float
    modulation_limit: float  # largest line-to-line peak voltage over bus voltage
    judged_winding_degc: float  # NaN: the winding limit of each motor
    current_loop_rise_s: float
    cable_ohm: float = 0.0  # motor cable, the way there and back
    lowest_ambient_degc: float = math.nan  # NaN: the ambient
