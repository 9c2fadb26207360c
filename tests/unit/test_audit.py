"""Contradictions within a data sheet are found, and the probable slip is named.

The motors are made up and consistent: every stated value is computed from K, R, L and J by the identity
named in the test. A slip multiplies one entry by its factor.
"""

import csv
import math

import numpy as np
import pytest
from case_files import add_column, set_cell, small_case, write_folder

from actuator_sizing import audit_case, check_case, start_case
from actuator_sizing.case import audit_identities, audit_slips
from actuator_sizing.case.audit import KEPT_PER_IDENTITY, audit_catalogs
from actuator_sizing.case.audit_slips import name_slip
from actuator_sizing.case.reading import read_case
from actuator_sizing.case.writing import csv_bytes

SQRT2, SQRT3 = math.sqrt(2.0), math.sqrt(3.0)
RPM = 2.0 * math.pi / 60.0


def dc_motor():
    """A brushed motor: K 0.06 N·m/A, R 0.8 Ω, L 0.4 mH, J 50 g·cm² at 48 V."""
    K, R, L, J, U, I_0 = 0.06, 0.8, 0.4e-3, 50e-7, 48.0, 0.2
    T_N, I_c = 0.15, 2.6
    # Thermal resistances that heat the winding from 25 to 155 °C at the continuous current.
    hot = R * (235.0 + 155.0) / (235.0 + 25.0)
    R_th = 130.0 / (hot * I_c**2)
    return {
        "motor": "D-1",
        "commutation": "brushed",
        "current basis": "DC",
        "resistance terminal-to-terminal [Ω]": R,
        "inductance terminal-to-terminal [mH]": L * 1e3,
        "torque constant [mNm/A]": K * 1e3,
        "back-EMF constant [V/krpm]": K * 1000.0 * RPM,
        "speed constant [rpm/V]": 1.0 / K / RPM,
        "rotor inertia [g·cm²]": J * 1e7,
        "no-load current [A]": I_0,
        "no-load speed [rpm]": (U - R * I_0) / K / RPM,
        "nominal voltage [V]": U,
        "continuous current [A]": I_c,
        "continuous torque [mNm]": K * I_c * 1e3,
        "peak current [A]": 12.0,
        "peak torque [mNm]": K * 12.0 * 1e3,
        "maximum speed [rpm]": 9000.0,
        "thermal class": "F",
        "thermal resistance winding-housing [K/W]": R_th / 3.0,
        "thermal resistance housing-ambient [K/W]": R_th * 2.0 / 3.0,
        "mass [kg]": 0.5,
        "rated torque [mNm]": T_N * 1e3,
        "rated speed [rpm]": 0.98 * (U - R * T_N / K) / K / RPM,
        "rated current [A]": T_N / K + I_0,
        "stall torque [mNm]": K * U / R * 1e3,
        "stall current [A]": U / R,
        "motor constant [mNm/√W]": K / math.sqrt(R) * 1e3,
        "mechanical time constant [ms]": R * J / K**2 * 1e3,
        "electrical time constant [ms]": L / R * 1e3,
    }


def servo_motor():
    """A sinusoidal motor in A rms: K 0.9 N·m/A; 3 E I = T ω gives K_e = K/√3 in V rms line-to-line."""
    K, R, L, J = 0.9, 2.0, 8e-3, 2e-4
    return {
        "motor": "S-1",
        "commutation": "sinusoidal",
        "current basis": "rms",
        "resistance terminal-to-terminal [Ω]": R,
        "inductance terminal-to-terminal [mH]": L * 1e3,
        "torque constant [Nm/Arms]": K,
        "back-EMF constant [Vrms/krpm]": K / SQRT3 * 1000.0 * RPM,
        "rotor inertia [kg·cm²]": J * 1e4,
        "continuous current [A]": 5.0,
        "peak current [A]": 20.0,
        "maximum speed [rpm]": 6000.0,
        "thermal class": "F",
        "mass [kg]": 4.0,
        # loss 1.5 R I² belongs to A rms, so K_M and τ_m take 1.5 R
        "motor constant [N·m/√W]": K / math.sqrt(1.5 * R),
        "mechanical time constant [ms]": 1.5 * R * J / K**2 * 1e3,
        "electrical time constant [ms]": L / R * 1e3,
    }


@pytest.fixture
def audited(tmp_path):
    """Write motors into a started case and give what the audit says of their table."""

    def run(*motors):
        folder = tmp_path / "case"
        if not folder.exists():
            start_case(folder, "rotary load")
        headings = list(dict.fromkeys(key for motor in motors for key in motor))
        rows = [[str(motor.get(heading, "")) for heading in headings] for motor in motors]
        (folder / "motors.csv").write_bytes(csv_bytes([headings, *rows]))
        case, problems = check_case(folder)
        assert case is not None, problems
        return [problem for problem in audit_catalogs(case) if problem.table == "motors"]

    return run


def test_consistent_sheets_are_not_suspected(audited):
    assert audited(dc_motor()) == []
    assert audited(servo_motor()) == []


@pytest.mark.parametrize(
    ("column", "factor", "found_in", "slip"),
    [
        ("back-EMF constant [V/krpm]", 1 / SQRT2, "back-EMF constant", "×√2"),
        ("back-EMF constant [V/krpm]", 60 / (2 * math.pi), "back-EMF constant", "×60/2π"),
        ("speed constant [rpm/V]", SQRT3, "speed constant", "×√3"),
        ("no-load speed [rpm]", 0.1, "no-load speed", "×10:"),
        ("stall current [A]", 2.0, "stall current", "×2"),
        ("stall torque [mNm]", 1 / 9.80665, "stall torque", "×9.81"),
        ("stall torque [mNm]", 1000.0, "stall torque", "×1000"),
        ("motor constant [mNm/√W]", 1 / SQRT3, "motor constant", "×√3"),
        ("mechanical time constant [ms]", 2.0, "mechanical time constant", "×2"),
        ("rotor inertia [g·cm²]", 4.0, "mechanical time constant", "GD²"),
        ("electrical time constant [ms]", 1.5, "electrical time constant", "×3/2"),
        ("rated current [A]", 1 / SQRT2, "rated current", "×√2"),
        ("continuous torque [mNm]", 9.80665, "continuous torque", "×9.81"),
        ("peak torque [mNm]", SQRT2, "peak torque", "×√2"),
    ],
)
def test_a_slip_is_found_and_named(audited, column, factor, found_in, slip):
    motor = dc_motor()
    motor[column] *= factor
    if motor["peak torque [mNm]"] < motor["continuous torque [mNm]"]:
        motor["peak torque [mNm]"] = ""  # the reader refuses that contradiction before the audit sees it
    problems = audited(motor)
    mine = [problem for problem in problems if problem.column.startswith(found_in)]
    assert len(mine) == 1, problems
    assert slip in mine[0].remedy
    assert mine[0].row == 2
    assert mine[0].severity == "warning"


def test_the_expected_value_is_in_the_unit_of_the_heading(audited):
    motor = servo_motor()
    right = motor["back-EMF constant [Vrms/krpm]"]
    motor["back-EMF constant [Vrms/krpm]"] = right / SQRT3
    (problem,) = audited(motor)
    assert problem.allowed.startswith(f"about {right:.4g} Vrms/krpm (")
    assert problem.got == f"{right / SQRT3} Vrms/krpm"
    assert "line-to-line and phase" in problem.remedy


def test_the_ampere_of_the_heading_counts(audited):
    """The same motor said in peak amperes and in peak line-to-line volts is as consistent."""
    motor = servo_motor()
    motor["torque constant [Nm/Apk]"] = motor.pop("torque constant [Nm/Arms]") / SQRT2
    motor["back-EMF constant [Vpk/krpm]"] = motor.pop("back-EMF constant [Vrms/krpm]") * SQRT2
    assert audited(motor) == []


def test_continuous_current_against_heat(audited):
    motor = dc_motor()
    motor["thermal resistance housing-ambient [K/W]"] *= 3.0
    problems = audited(motor)
    assert [problem.column for problem in problems] == ["continuous current [A]"]


def test_the_odd_winding_of_a_family(audited):
    """Windings of one frame: R and L with the square of K. One states a phase resistance."""
    family = []
    for index, turns in enumerate((1.0, 1.5, 2.0, 3.0)):
        motor = {
            "motor": f"F-{index}",
            "commutation": "sinusoidal",
            "current basis": "rms",
            "resistance terminal-to-terminal [Ω]": 2.0 * turns**2,
            "inductance terminal-to-terminal [mH]": 8.0 * turns**2,
            "torque constant [Nm/A]": 0.5 * turns,
            "rotor inertia [kg·cm²]": 2.0,
            "continuous current [A]": 5.0 / turns,
            "peak current [A]": 20.0 / turns,
            "maximum speed [rpm]": 6000.0,
            "thermal class": "F",
            "mass [kg]": 4.0,
        }
        family.append(motor)
    assert audited(*family) == []
    family[2]["resistance terminal-to-terminal [Ω]"] /= 2.0
    problems = audited(*family)
    assert {(problem.row, problem.column.partition(" [")[0]) for problem in problems} == {
        (4, "resistance terminal-to-terminal"),
        (4, "inductance terminal-to-terminal"),
    }
    assert all("×2: terminal-to-terminal and phase" in problem.remedy for problem in problems)
    assert audited(*family[1:3]) == []  # two windings cannot tell which one is odd


def test_output_is_bounded(audited):
    motors = []
    for index in range(50):
        motor = dc_motor() | {"motor": f"D-{index}"}
        motor["stall current [A]"] *= 2.0
        motor["stall torque [mNm]"] *= 2.0
        motors.append(motor)
    problems = audited(*motors)
    assert len(problems) == KEPT_PER_IDENTITY + 1
    assert problems[-1].got == "40 more rows like this"


def test_audit_case_tells_reading_and_audit_together(audited, tmp_path):
    motor = dc_motor()
    motor["stall current [A]"] *= 2.0
    motor["stall torque [mNm]"] *= 2.0
    audited(motor)
    problems = audit_case(tmp_path / "case")
    assert [problem.column for problem in problems] == ["stall current [A]"]
    with (tmp_path / "case" / "axis.csv").open("a", encoding="utf-8", newline="") as stream:
        csv.writer(stream).writerow(["inclinatoin", "3", "deg", ""])
    assert any("inclinatoin" in str(problem) for problem in audit_case(tmp_path / "case"))


@pytest.mark.parametrize("factor", [1 / SQRT3, SQRT3, 1.05 * SQRT3])
def test_slips_are_named_both_ways_and_with_scatter(factor):
    assert name_slip(factor, (audit_slips.RMS_PEAK, audit_slips.LINE_PHASE)).startswith("×√3")


def test_near_slips_are_both_offered_nearest_first():
    """9.81 and 10 are 2 % apart, which no data sheet can tell."""
    text = name_slip(9.9, (audit_slips.KILOGRAM_FORCE,))
    assert text.startswith("×9.81")
    assert "×10:" in text


def test_no_slip_is_invented():
    rng = np.random.default_rng(1)
    for factor in rng.uniform(1.15, 1.30, 20):
        assert name_slip(float(factor), (audit_slips.RMS_PEAK, audit_slips.LINE_PHASE)) == ""


def test_contradictions_belong_to_the_case_that_is_sized(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "back-EMF constant [Vrms/krpm]", 5.56, "")
    consistent = read_case(write_folder(tmp_path / "consistent", tables))
    set_cell(tables, "motors", "M-10", "back-EMF constant", 5.56 * 3**0.5)
    case = read_case(write_folder(tmp_path / "slip", tables))
    found = [problem for problem in case.problems if problem not in consistent.problems]
    assert found
    assert {(problem.table, problem.row, problem.severity) for problem in found} == {("motors", 2, "warning")}
    assert set(audit_case(tmp_path / "slip")) == set(case.problems)  # nothing is told twice


def test_equal_rows_get_equal_numbers():
    rng = np.random.default_rng(3)
    columns = [
        rng.choice([1.5e-5, 2e-5, 0.0], 400),
        rng.integers(0, 3, 400).astype(float),
        rng.integers(0, 2, 400),
    ]
    number = audit_identities._equal_rows(columns)
    names = {}
    for row, one in zip(zip(*columns, strict=True), number.tolist(), strict=True):
        assert names.setdefault(row, one) == one
    assert len(set(names.values())) == len(names) > 10
    assert audit_identities._equal_rows([np.array([]), np.array([])]).tolist() == []


def test_checks_that_the_limits_loosen_are_warned_of(tmp_path):
    tables = small_case()
    tables["limits"] = [
        ["check", "applies", "allowed utilisation [%]"],
        ["RMS current", "no", ""],
        ["voltage", "no", ""],
        ["inertia ratio", "no", ""],
        ["winding temperature", "yes", 130],
        ["motor speed", "advice", 150],
    ]
    found = [p for p in audit_case(write_folder(tmp_path / "case", tables)) if p.table == "limits"]
    assert [p.severity for p in found] == ["warning", "warning"]
    off, over = sorted(found, key=lambda p: p.column != "applies")
    assert off.got == "no for RMS current, voltage"  # advice decides nothing
    assert over.got == "winding temperature (130 %)"
