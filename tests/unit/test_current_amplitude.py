"""Amplitude of a motor's current at the drive, for every basis of a sheet."""

import numpy as np
import pytest

from actuator_sizing.core.conventions import torque_constant_from_back_emf
from actuator_sizing.core.machine import motor_amperes_per_drive_ampere, motor_amplitude_per_unit_current
from actuator_sizing.core.parameters import BASIS_DC, BASIS_PEAK, BASIS_RMS, DriveParameters, MotorParameters
from actuator_sizing.sizing.checks.motor import current_limited_torque
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.made_cases import DIRECT, DRIVE, MOTOR, case, columns, cycle

SINUSOIDAL, SIX_STEP = 2, 1


def motors_of(*rows):
    return columns(MotorParameters, [dict(MOTOR, commutation=c, current_basis=b) for c, b in rows])


def test_one_torque_one_amplitude_whatever_the_sheet_states():
    bases = (BASIS_DC, BASIS_RMS, BASIS_PEAK)
    K = torque_constant_from_back_emf(np.full(3, 0.4), "peak line-to-line", bases)
    amplitude = motor_amplitude_per_unit_current(motors_of(*((SINUSOIDAL, basis) for basis in bases)))
    per_torque = amplitude / K  # peak amperes for one N·m: a property of the machine, not of its sheet
    assert per_torque == pytest.approx(np.full(3, per_torque[2]), rel=1e-12)
    assert float(amplitude[0]) == pytest.approx(2.0 * np.sqrt(3.0) / np.pi, rel=1e-15)


def test_a_block_current_is_its_own_amplitude():
    assert motor_amplitude_per_unit_current(motors_of((SIX_STEP, BASIS_DC), (0, BASIS_DC))).tolist() == [
        1.0,
        1.0,
    ]


def test_amperes_of_the_drive_in_the_basis_of_the_motor():
    drives = columns(DriveParameters, [dict(DRIVE, current_basis=BASIS_RMS)] * 2)
    ratio = motor_amperes_per_drive_ampere(
        motors_of((SINUSOIDAL, BASIS_DC), (SINUSOIDAL, BASIS_PEAK)), drives
    )
    assert ratio == pytest.approx([np.sqrt(2.0) * np.pi / (2.0 * np.sqrt(3.0)), np.sqrt(2.0)], rel=1e-12)


def test_the_same_machine_asks_the_same_of_the_drive():
    moves = cycle(
        {"law": "cycloidal", "displacement": 0.4, "duration_s": 0.8}, {"law": "dwell", "duration_s": 0.3}
    )
    K = torque_constant_from_back_emf(np.full(2, 0.4), "peak line-to-line", (BASIS_DC, BASIS_RMS))
    # A motor that is linear without a stated peak torque; its own peak current far away, so that the drive limits.
    rows = [
        dict(MOTOR, commutation=SINUSOIDAL, current_basis=basis, torque_constant_nm_per_a=constant,
             peak_torque_nm=np.nan, peak_current_a=1e3)
        for basis, constant in zip((BASIS_DC, BASIS_RMS), K, strict=True)
    ]  # fmt: skip
    made = case("ball screw", {"lead": 0.02, "moving mass": 30.0}, moves, motors=rows, gearheads=(DIRECT,))
    sets = evaluate_sets(made, build_demand(made), np.array([[0, 0, 0], [1, 0, 0]]))
    for name in ("drive_current_peak_a", "drive_current_rms_a", "overload_a2s"):
        first, second = getattr(sets, name)
        assert first == pytest.approx(second, rel=1e-12), name
    by_current = current_limited_torque(sets)
    assert by_current[0] == pytest.approx(by_current[1], rel=1e-12)
