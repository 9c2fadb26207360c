"""Thermal network of each motor from what its sheet states, for the thermal equations."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.parameters import MotorParameters, Surroundings
from actuator_sizing.core.thermal import ThermalNetwork, altitude_factor

FloatArray = NDArray[np.float64]

#: Heat capacity of a motor without its winding, per kilogram of motor: iron, aluminium and magnets.
#: Common practice (450 to 900), the low end so that temperature swings are not understated.
HOUSING_CAPACITY_J_KG_K = 450.0
#: Copper: share of the motor's mass and specific heat. Common practice (8 to 15 %), the low end.
COPPER_MASS_SHARE = 0.08
COPPER_CAPACITY_J_KG_K = 385.0
#: Most that the winding is given of a total resistance that has to be divided. Common practice (0.2 to 0.7).
LARGEST_WINDING_SHARE = 0.8


def thermal_network(motors: MotorParameters, surroundings: Surroundings) -> ThermalNetwork:
    """Resistances and capacities of the two-body or one-body model.

    Parameters
    ----------
    motors : MotorParameters
        n motors. [-]
    surroundings : Surroundings
        Altitude raises the resistance to the air. [-]

    Returns
    -------
    ThermalNetwork
        Shape (n,); housing fields are NaN for the one-body model, all are NaN where data is missing. [-]

    Notes
    -----
    Two bodies where both resistances are known; a missing time constant then follows from the mass
    (constants above). Where only the total is known but both time constants are, the winding's share follows
    from its heat capacity, ``R_1 = τ_w / C_copper``: one body with the long time constant would smooth out the
    very peaks that a long overload burns. Else one body, with whichever time constant is known.
    """
    factor = altitude_factor(surroundings.altitude_m)
    R_1, R_2 = motors.thermal_resistance_winding_k_w, motors.thermal_resistance_housing_k_w
    tau_1, tau_2 = motors.winding_time_constant_s, motors.housing_time_constant_s
    copper, rest = _capacities(motors)
    R_only = np.where(np.isnan(R_1), R_2, R_1)
    divided = has_divided_resistance(motors)
    two = (~np.isnan(R_1) & ~np.isnan(R_2)) | divided
    with np.errstate(invalid="ignore", divide="ignore"):
        R_1 = np.where(divided, np.minimum(tau_1 / copper, LARGEST_WINDING_SHARE * R_only), R_1)
        R_2 = np.where(divided, R_only - R_1, R_2)
        C_1 = np.where(np.isnan(tau_1), copper, tau_1 / R_1)
        C_2 = np.where(np.isnan(tau_2), rest, tau_2 / R_2)
        C_only = np.where(np.isnan(tau_2), tau_1, tau_2) / R_only
    R_w = np.where(two, R_1, R_only / factor)
    R_h = np.where(two, R_2 / factor, np.nan)
    C_w = np.where(two, C_1, C_only)
    C_h = np.where(two, C_2, np.nan)
    unknown = np.isnan(R_w) | np.isnan(C_w) | (two & np.isnan(C_h))
    return ThermalNetwork(*(np.where(unknown, np.nan, column) for column in (R_w, R_h, C_w, C_h)))


def has_divided_resistance(motors: MotorParameters) -> NDArray[np.bool_]:
    """Motors whose total resistance is divided between winding and housing by heat capacity, shape (n,). [-]"""
    one = np.isnan(motors.thermal_resistance_winding_k_w) | np.isnan(motors.thermal_resistance_housing_k_w)
    both = np.isfinite(motors.winding_time_constant_s) & np.isfinite(motors.housing_time_constant_s)
    return np.asarray(one & both & np.isfinite(_capacities(motors)[0]))


def fastest_time_constant(motors: MotorParameters) -> FloatArray:
    """Time constant of the winding, from the mass or of the whole motor where it is not stated, shape (n,). [s]"""
    stated = np.where(
        np.isnan(motors.winding_time_constant_s),
        _capacities(motors)[0] * motors.thermal_resistance_winding_k_w,
        motors.winding_time_constant_s,
    )
    return np.asarray(np.fmin(stated, motors.housing_time_constant_s))


def _capacities(motors: MotorParameters) -> tuple[FloatArray, FloatArray]:
    """Heat capacity of the copper and of the rest from the mass; NaN where the mass is not known. [J/K]"""
    mass = np.where(motors.mass_kg > 0.0, motors.mass_kg, np.nan)
    return (
        COPPER_MASS_SHARE * mass * COPPER_CAPACITY_J_KG_K,
        HOUSING_CAPACITY_J_KG_K * mass * (1 - COPPER_MASS_SHARE),
    )
