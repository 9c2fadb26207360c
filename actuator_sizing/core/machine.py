"""The motor as a DC equivalent: current from torque, voltage from current and speed.

One electrical model serves brushed, six-step and sinusoidal machines: ``u = R i + L di/dt + K ω``,
``T = K i``, loss ``R i²``; the reader has already brought resistance and inductance to the current basis of
the sheet (`core.conventions`). Arrays have a leading candidate axis; trailing axes are instants.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.conventions import model_factor
from actuator_sizing.core.parameters import (
    BASIS_DC,
    BASIS_PEAK,
    BASIS_RMS,
    SINUSOIDAL,
    DriveParameters,
    MotorParameters,
    Surroundings,
)

FloatArray = NDArray[np.float64]

#: Winding temperature at which resistance is judged where neither the case nor the sheet states a limit.
#: Class B of IEC 60085; an assumption on the hot side, not a rating.
ASSUMED_HOT_WINDING_DEGC = 130.0

#: Amplitude of a sinusoidal current that gives the torque of one ampere DC in six-step commutation of the same
#: sinusoidal EMF: ``(3/π) / (√3/2)``, the ratio of the torque constants in `core.conventions`.
SINE_AMPLITUDE_PER_DC = 2.0 * np.sqrt(3.0) / np.pi

#: Model voltage per volt of line-to-line peak, by current basis (amplitude-invariant sinusoidal machine).
_VOLTS_PER_LINE_PEAK = {BASIS_RMS: np.sqrt(3.0 / 2.0), BASIS_PEAK: np.sqrt(3.0) / 2.0}


@dataclass(frozen=True)
class JudgedMotor:
    """Motors at the temperatures at which current and voltage are judged; each field has shape (n,)."""

    winding_degc: FloatArray
    magnet_degc: FloatArray
    resistance_ohm: FloatArray  # of the circuit: winding and motor cable
    cable_ohm: FloatArray  # the cable's part of it
    torque_constant_nm_per_a: FloatArray
    saturation_per_a2: FloatArray
    inductance_h: FloatArray  # zero where not known
    reactance_per_speed: FloatArray  # p L, ohm per rad/s; zero where not counted
    voltage_available_v: FloatArray  # at minimum bus


def model_voltage(bus_v: FloatArray | float, modulation_limit: float, basis: NDArray[np.int8]) -> FloatArray:
    """Largest voltage of the DC-equivalent model at a bus voltage.

    Parameters
    ----------
    bus_v : array_like
        DC bus voltage. [V]
    modulation_limit : float
        Largest line-to-line peak voltage over bus voltage. [-]
    basis : ndarray of int
        Current basis of the motor's sheet. [-]

    Returns
    -------
    ndarray
        Model voltage: ``U m`` (DC), ``U m √(3/2)`` (A rms), ``U m √3/2`` (A peak). [V]

    Notes
    -----
    Power is the same in every basis: ``1.5 û î = u i``. Textbook dq relations, amplitude-invariant.

    Examples
    --------
    >>> import numpy as np
    >>> model_voltage(100.0, 1.0, np.array([0, 1, 2], dtype=np.int8)).tolist()
    [100.0, 122.4745, 86.6025]
    """
    factor = np.ones(np.shape(basis))
    for key, value in _VOLTS_PER_LINE_PEAK.items():
        factor = np.where(basis == key, value, factor)
    return np.asarray(factor * bus_v * modulation_limit)


def resistance_at(motors: MotorParameters, winding_degc: FloatArray) -> FloatArray:
    """DC-equivalent resistance at a winding temperature, shape (n,). [Ω]"""
    rise = winding_degc - motors.resistance_reference_degc
    return np.asarray(motors.resistance_ohm * (1.0 + motors.resistance_coefficient_per_k * rise))


def torque_constant_at(motors: MotorParameters, magnet_degc: FloatArray) -> FloatArray:
    """Unsaturated torque constant at a magnet temperature, shape (n,). [N·m/A]"""
    rise = magnet_degc - motors.magnet_reference_degc
    return np.asarray(motors.torque_constant_nm_per_a * (1.0 + motors.magnet_coefficient_per_k * rise))


def saturation_coefficient(motors: MotorParameters) -> FloatArray:
    """Relative loss of torque per current squared: ``T = K i (1 − s i²)``.

    Parameters
    ----------
    motors : MotorParameters
        Where the sheet states a peak torque below ``K I_peak``, the odd cubic through the slope at zero
        and the peak point is taken; elsewhere the machine is linear. [-]

    Returns
    -------
    ndarray, shape (n,)
        Coefficient s, limited so that torque still rises at the peak current. [1/A²]
    """
    K, I_pk, T_pk = motors.torque_constant_nm_per_a, motors.peak_current_a, motors.peak_torque_nm
    with np.errstate(invalid="ignore", divide="ignore"):
        loss = 1.0 - T_pk / (K * I_pk)
        known = np.isfinite(loss) & (loss > 1e-9)
        # Beyond one third the cubic would turn over before the peak current.
        return np.asarray(np.where(known, np.minimum(loss, 1.0 / 3.0) / I_pk**2, 0.0))


def torque_of_current(current_a: FloatArray, K: FloatArray, saturation: FloatArray) -> FloatArray:
    """Air-gap torque ``K i (1 − s i²)``; all arguments broadcast. [N·m]"""
    return np.asarray(K * current_a * (1.0 - saturation * current_a**2))


def current_of_torque(torque_nm: FloatArray, K: FloatArray, saturation: FloatArray) -> FloatArray:
    """Current that gives an air-gap torque, the inverse of `torque_of_current`; all arguments broadcast.

    Parameters
    ----------
    torque_nm : ndarray
        Air-gap torque. [N·m]
    K : ndarray
        Unsaturated torque constant. [N·m/A]
    saturation : ndarray
        Coefficient s of `saturation_coefficient`. [1/A²]

    Returns
    -------
    ndarray
        Current; beyond the turning point of the cubic, where no current gives the torque, the slope
        there is kept so that the demand stays finite and above the peak current. [A]

    Notes
    -----
    Real root of the depressed cubic by the trigonometric form (Viète).
    """
    i = torque_nm / K
    if not np.any(saturation > 0.0):
        return np.asarray(i)
    with np.errstate(invalid="ignore", divide="ignore"):
        turning = 1.0 / np.sqrt(3.0 * saturation)  # current of the largest torque
        reach = np.abs(i) * 1.5 / turning  # |T| over the torque at the turning point
        inside = 2.0 * turning * np.sin(np.arcsin(np.minimum(reach, 1.0)) / 3.0)
        beyond = turning * reach
        solved = np.copysign(np.where(reach <= 1.0, inside, beyond), i)
    return np.asarray(np.where(saturation > 0.0, solved, i))


def judge(motors: MotorParameters, surroundings: Surroundings) -> JudgedMotor:
    """Motors at judged temperatures and minimum bus voltage.

    Parameters
    ----------
    motors : MotorParameters
        n motors. [-]
    surroundings : Surroundings
        Ambient, bus voltages, judged winding temperature. [-]

    Returns
    -------
    JudgedMotor
        Shape (n,).

    Notes
    -----
    The magnet is at housing temperature; at the judged winding temperature the housing has the share
    ``R_2/(R_1 + R_2)`` of the rise. With one thermal body, or unknown resistances, it is as hot as the winding.
    """
    limit = np.where(np.isnan(motors.winding_limit_degc), ASSUMED_HOT_WINDING_DEGC, motors.winding_limit_degc)
    stated = surroundings.judged_winding_degc
    winding = limit if np.isnan(stated) else np.full(len(motors), stated)
    R_1, R_2 = motors.thermal_resistance_winding_k_w, motors.thermal_resistance_housing_k_w
    with np.errstate(invalid="ignore"):
        share = np.where(np.isnan(R_1) | np.isnan(R_2), 1.0, R_2 / (R_1 + R_2))
    magnet = surroundings.ambient_degc + share * (winding - surroundings.ambient_degc)
    return _judged_at(motors, surroundings, winding, magnet)


def judge_cold(motors: MotorParameters, surroundings: Surroundings) -> JudgedMotor:
    """Motors at the lowest ambient, as after a long rest, and minimum bus voltage: cold magnets raise K.

    Parameters
    ----------
    motors : MotorParameters
        n motors. [-]
    surroundings : Surroundings
        Ambient, the lowest where it is stated, and bus voltages. [-]

    Returns
    -------
    JudgedMotor
        Shape (n,).
    """
    # Of the two the colder: a spread or a change may move the ambient below what is stated as the lowest.
    ambient = np.full(len(motors), np.fmin(surroundings.lowest_ambient_degc, surroundings.ambient_degc))
    return _judged_at(motors, surroundings, ambient, ambient)


def _judged_at(
    motors: MotorParameters, surroundings: Surroundings, winding: FloatArray, magnet: FloatArray
) -> JudgedMotor:
    inductance = np.nan_to_num(motors.inductance_h, nan=0.0)
    reactance = inductance * np.nan_to_num(motors.pole_pairs, nan=0.0)
    cable = model_factor(motors.current_basis) * surroundings.cable_ohm
    return JudgedMotor(
        winding_degc=winding,
        magnet_degc=magnet,
        resistance_ohm=resistance_at(motors, winding) + cable,
        cable_ohm=cable,
        torque_constant_nm_per_a=torque_constant_at(motors, magnet),
        saturation_per_a2=saturation_coefficient(motors),
        inductance_h=inductance,
        reactance_per_speed=reactance,
        voltage_available_v=model_voltage(
            surroundings.bus_min_v, surroundings.modulation_limit, motors.current_basis
        ),
    )


def amplitude_per_unit_current(basis: NDArray[np.int8]) -> FloatArray:
    """Peak amperes per ampere of a basis: √2 for rms, 1 for DC and peak; shape as `basis`. [-]

    A drive's rating and a motor's current are compared as amplitudes, since the switches carry the amplitude.
    Common practice; a DC or block current counts as its own amplitude.
    """
    return np.asarray(np.where(basis == BASIS_RMS, np.sqrt(2.0), 1.0))


def motor_amplitude_per_unit_current(motors: MotorParameters) -> FloatArray:
    """Peak amperes of the drive per ampere of each motor's basis, shape (n,). [-]

    As `amplitude_per_unit_current`, but a motor with sinusoidal commutation whose sheet states A DC is fed with
    sines, whose amplitude is 2√3/π of the DC ampere for the same torque.
    """
    sine = (motors.current_basis == BASIS_DC) & (motors.commutation == SINUSOIDAL)
    return np.where(sine, SINE_AMPLITUDE_PER_DC, amplitude_per_unit_current(motors.current_basis))


def motor_amperes_per_drive_ampere(motors: MotorParameters, drives: DriveParameters) -> FloatArray:
    """Amperes of the motor's basis that one ampere of the drive's basis is, set by set, shape (n,). [-]"""
    return amplitude_per_unit_current(drives.current_basis) / motor_amplitude_per_unit_current(motors)
