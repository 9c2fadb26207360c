"""Conventions of motor data against published factors.

Codes: S printed number seen in the source; M quoted from memory and recomputed; D follows from the definition.
"""

from __future__ import annotations

import numpy as np
import pytest

from actuator_sizing.core.conventions import (
    ampere_ratio,
    model_factor,
    motor_constant,
    torque_constant_from_back_emf,
)
from actuator_sizing.core.parameters import BASIS_DC, BASIS_PEAK, BASIS_RMS

RPM = 2.0 * np.pi / 60.0


@pytest.mark.published("A6.1")
def test_volts_line_to_line_per_thousand_rpm_to_torque_per_rms_ampere():
    # Commonly quoted factor 0.01654 N·m/A per V/(1000 1/min), M and D; tolerance: half its last printed digit.
    constant = torque_constant_from_back_emf([1.0 / (1000.0 * RPM)], "rms line-to-line", [BASIS_RMS])
    assert constant[0] == pytest.approx(0.01654, abs=5e-6)
    # The same recomputed from 3 E I = T ω; tolerance: the digits it is given with.
    assert constant[0] == pytest.approx(0.0165399, abs=1e-6)


@pytest.mark.published("A6.2")
def test_published_motor_table_agrees_with_root_three():
    # Electrical Engineering Stack Exchange, "BLDC Motor Constants: why is my Kt and Ke different?" (S):
    # 0.318 V rms l-l per rad/s and 0.55 N·m/A rms. 0.55 is printed to two digits, hence ±0.005.
    constant = torque_constant_from_back_emf([0.318], "rms line-to-line", [BASIS_RMS])
    assert constant[0] == pytest.approx(0.55, abs=0.005)


@pytest.mark.published("A6.3")
def test_speed_constant_of_peak_line_volts_times_torque_per_peak_ampere():
    # Widely published relation of open-source drives, K_t·K_v = 8.27 (S); tolerance: half the last digit.
    constant = torque_constant_from_back_emf([1.0 / RPM], "peak line-to-line", [BASIS_PEAK])
    assert constant[0] == pytest.approx(8.27, abs=0.005)


@pytest.mark.published("A6.4")
def test_convention_factors_of_a_star_winding():
    # Definitions (D): R_ll = 2 R_ph, copper loss 1.5 R_ll I_rms² = 1.5 R_ph I_peak², K_rms/K_peak = √2.
    dc, rms, peak = model_factor([BASIS_DC, BASIS_RMS, BASIS_PEAK])
    assert (dc, rms, peak) == (1.0, 1.5, 0.75)
    assert peak * 2.0 == 1.5  # per phase resistance
    per_rms = torque_constant_from_back_emf([1.0], "peak phase", [BASIS_RMS])
    per_peak = torque_constant_from_back_emf([1.0], "peak phase", [BASIS_PEAK])
    assert per_rms[0] / per_peak[0] == pytest.approx(np.sqrt(2.0), abs=1e-12)


@pytest.mark.published("A6.5")
def test_six_step_against_sine_at_equal_loss_and_equal_peak_emf():
    # Pillay & Krishnan, IEEE Trans. Ind. Appl. 27 (1991) 986-996: about 15 % more output (M, D): 2/√3,
    # tolerance: the 1.1547 as printed. Loss R_ll i² in both models, flat-top EMF for six-step.
    dc_current = np.sqrt(1.0 / model_factor([BASIS_DC])[0])
    peak_current = np.sqrt(1.0 / model_factor([BASIS_PEAK])[0])
    flat = torque_constant_from_back_emf([1.0], "DC", [BASIS_DC])[0] * dc_current
    # The phase EMF of the flat-top machine is half its line value; the sine has the same peak per phase.
    sine = torque_constant_from_back_emf([0.5], "peak phase", [BASIS_PEAK])[0] * peak_current
    assert flat / sine == pytest.approx(1.1547, abs=1e-4)


@pytest.mark.published("A6.6")
def test_motor_constant_does_not_depend_on_the_winding():
    # Definition (D): twice the turns at half the area doubles K and quadruples R; K per peak ampere,
    # phase resistance 2 Ω, loss 1.5 R I². Tolerance: rounding.
    resistance = model_factor([BASIS_PEAK, BASIS_PEAK]) * 2.0 * np.array([2.0, 8.0])
    constants = motor_constant([0.5, 1.0], resistance)
    assert constants == pytest.approx([0.2886751, 0.2886751], abs=1e-7)
    assert constants[0] == pytest.approx(constants[1], rel=1e-14)


@pytest.mark.parametrize(
    ("current_basis", "volts", "ratio"),
    [
        # K_t over K_e of the usual pairs of conventions, computed from the definitions (D).
        (BASIS_DC, "DC", 1.0),
        (BASIS_DC, "peak line-to-line", 3.0 / np.pi),
        (BASIS_PEAK, "peak line-to-line", np.sqrt(3.0) / 2.0),
        (BASIS_RMS, "rms line-to-line", np.sqrt(3.0)),
        (BASIS_PEAK, "peak phase", 1.5),
        (BASIS_RMS, "rms phase", 3.0),
    ],
)
def test_fingerprint_of_torque_over_back_emf_constant(current_basis, volts, ratio):
    assert torque_constant_from_back_emf([1.0], volts, [current_basis])[0] == pytest.approx(ratio, rel=1e-14)


@pytest.mark.parametrize("volts", ["rms line-to-line", "peak line-to-line", "rms phase", "peak phase"])
@pytest.mark.parametrize("basis", [BASIS_RMS, BASIS_PEAK])
def test_power_is_the_same_in_every_convention(volts, basis):
    # The machine: 1 V peak per phase per rad/s, 1 A peak, so T ω = 1.5 W at 1 rad/s. Tolerance: rounding.
    per_peak_phase = {"peak phase": 1.0, "rms phase": 1 / np.sqrt(2), "peak line-to-line": np.sqrt(3),
                      "rms line-to-line": np.sqrt(1.5)}  # fmt: skip
    amperes = {BASIS_PEAK: 1.0, BASIS_RMS: 1.0 / np.sqrt(2.0)}
    constant = torque_constant_from_back_emf([per_peak_phase[volts]], volts, [basis])[0]
    assert constant * amperes[basis] == pytest.approx(1.5, rel=1e-14)


def test_direct_volts_do_not_exist_in_a_sinusoidal_basis():
    assert np.isnan(torque_constant_from_back_emf([1.0, 1.0], "DC", [BASIS_RMS, BASIS_PEAK])).all()


def test_amperes_convert_both_ways_and_never_to_direct_current():
    assert ampere_ratio("rms", [BASIS_RMS, BASIS_PEAK]) == pytest.approx([1.0, np.sqrt(2.0)])
    assert ampere_ratio("peak", [BASIS_RMS, BASIS_PEAK]) == pytest.approx([1.0 / np.sqrt(2.0), 1.0])
    assert np.isnan(ampere_ratio("rms", [BASIS_DC])).all()
