"""What is derived from a data sheet, each with its rule and origin."""

from __future__ import annotations

import math

import numpy as np
import pytest
from case_files import add_column, set_cell, small_case, write_folder

from actuator_sizing.case.model import ASSUMED, DERIVED, MISSING, STATED
from actuator_sizing.case.reading import check_case, read_case

RPM = 2.0 * math.pi / 60.0


def read(tmp_path, tables):
    return read_case(write_folder(tmp_path / "case", tables))


def derived(case, key, row, table="motors"):
    catalog = getattr(case, table)
    return catalog.values[key][row], catalog.origins[key][row], catalog.rules.get(key, {}).get(row, "")


def without(tables, table, *names):
    """The same tables without some columns."""
    headings = tables[table][0]
    keep = [i for i, heading in enumerate(headings) if str(heading).partition(" [")[0] not in names]
    tables[table] = [[row[i] for i in keep] for row in tables[table]]
    return tables


def test_resistance_and_inductance_by_current_basis(tmp_path):
    case = read(tmp_path, small_case())
    # A rms: 1.5 of terminal-to-terminal; DC: as it is (core.conventions). Tolerance: rounding.
    assert case.motor_parameters.resistance_ohm == pytest.approx([1.5 * 0.62, 0.31], rel=1e-14)
    assert case.motor_parameters.inductance_h == pytest.approx([1.5 * 0.9e-3, 0.11e-3], rel=1e-14)


def test_torque_constant_from_back_emf_with_stated_basis(tmp_path):
    tables = without(small_case(), "motors", "torque constant")
    add_column(tables, "motors", "back-EMF constant [V/krpm]", 10, 6.5)
    add_column(tables, "motors", "back-EMF constant basis", "peak line-to-line", "DC")
    case = read(tmp_path, tables)
    expected = 10 / (1000 * RPM) * math.sqrt(1.5), 6.5 / (1000 * RPM)
    assert case.motor_parameters.torque_constant_nm_per_a == pytest.approx(expected, rel=1e-14)
    value, origin, rule = derived(case, "torque_constant", 0)
    assert origin == DERIVED
    assert rule == "back EMF constant in V peak line-to-line, to the current basis of the row"
    assert value == pytest.approx(expected[0])


def test_torque_constant_from_back_emf_with_basis_in_the_heading(tmp_path):
    tables = without(small_case(), "motors", "torque constant")
    tables["motors"].pop()  # the brushed one has no rms volt
    add_column(tables, "motors", "back-EMF constant [Vrms/krpm]", 10)
    case = read(tmp_path, tables)
    expected = 10 / (1000 * RPM) * math.sqrt(3)
    assert case.motor_parameters.torque_constant_nm_per_a[0] == pytest.approx(expected, rel=1e-14)


def test_basis_of_back_emf_is_assumed_by_commutation_and_said(tmp_path):
    tables = without(small_case(), "motors", "torque constant")
    add_column(tables, "motors", "back-EMF constant [V/krpm]", 10, 6.5)
    case = read(tmp_path, tables)
    assert "assumed to be V rms line-to-line" in derived(case, "torque_constant", 0)[2]
    assert "assumed to be V DC" in derived(case, "torque_constant", 1)[2]
    warning = next(problem for problem in case.problems if "back-EMF" in problem.column)
    assert (warning.table, warning.row, warning.severity) == ("motors", 2, "warning")
    assert "rms line-to-line is assumed" in warning.got
    assert "back-EMF constant basis" in warning.remedy


def test_torque_constant_from_speed_constant(tmp_path):
    tables = without(small_case(), "motors", "torque constant")
    add_column(tables, "motors", "speed constant [rpm/V]", 80, 158)
    add_column(tables, "motors", "speed constant basis", "peak line-to-line", "")
    case = read(tmp_path, tables)
    # K·k_n = 11.695 for A rms against V peak line-to-line, 9.549 for DC (both from the definitions).
    assert case.motor_parameters.torque_constant_nm_per_a == pytest.approx(
        [11.695 / 80, 9.549297 / 158], rel=1e-4
    )


def test_ampere_of_the_heading_is_converted_to_the_basis_of_the_row(tmp_path):
    tables = small_case()
    tables["motors"].pop()
    tables["motors"][0] = [
        str(heading).replace("mNm/A", "mNm/Apk").replace("peak current [A]", "peak current [Apk]")
        for heading in tables["motors"][0]
    ]
    case = read(tmp_path, tables)
    assert case.motor_parameters.torque_constant_nm_per_a[0] == pytest.approx(0.092 * math.sqrt(2), rel=1e-14)
    assert case.motor_parameters.peak_current_a[0] == pytest.approx(19 / math.sqrt(2), rel=1e-14)
    notes = [problem for problem in case.problems if "factor √2" in problem.got]
    assert {note.column for note in notes} == {"torque constant [mNm/Apk]", "peak current [Apk]"}
    assert all(note.severity == "note" for note in notes)


def test_friction_from_no_load_current(tmp_path):
    case = read(tmp_path, small_case())
    value, origin, rule = derived(case, "friction_torque", 0)
    assert value == pytest.approx(0.092 * 0.21, rel=1e-14)
    assert (origin, rule) == (DERIVED, "K·I0, all counted as constant friction")


def test_viscous_part_is_taken_off_the_no_load_torque(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "no-load speed [rpm]", 4500, "")
    add_column(tables, "motors", "viscous friction [mNm/krpm]", 2.0, "")
    case = read(tmp_path, tables)
    value, origin, rule = derived(case, "friction_torque", 0)
    assert value == pytest.approx(0.092 * 0.21 - 2.0e-3 * 4.5, rel=1e-12)
    assert rule == "K·I0 less the viscous part at no-load speed"
    assert derived(case, "viscous_friction", 1)[1] == ASSUMED


def test_continuous_current_from_continuous_torque_and_back(tmp_path):
    tables = without(small_case(), "motors", "continuous current", "peak current")
    add_column(tables, "motors", "continuous torque [Nm]", 0.55, 0.43)
    add_column(tables, "motors", "peak torque [Nm]", 1.6, "")
    case = read(tmp_path, tables)
    assert case.motor_parameters.continuous_current_a == pytest.approx([0.55 / 0.092, 0.43 / 0.0603])
    assert case.motor_parameters.peak_current_a[0] == pytest.approx(1.6 / 0.092)
    assert derived(case, "peak_current", 0)[1:] == (DERIVED, "peak torque over torque constant")
    assert math.isnan(case.motor_parameters.peak_current_a[1])
    assert case.motors.origins["peak_current"][1] == MISSING


def test_limit_from_thermal_class_unless_stated(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "winding temperature limit [°C]", "", 125)
    case = read(tmp_path, tables)
    assert derived(case, "winding_temperature_limit", 0) == (155.0, DERIVED, "thermal class F, IEC 60085")
    assert derived(case, "winding_temperature_limit", 1) == (125.0, STATED, "")


def test_magnet_coefficient_from_material(tmp_path):
    case = read(tmp_path, small_case())
    assert case.motor_parameters.magnet_coefficient_per_k == pytest.approx([-0.0011, -0.002])
    bare = read(tmp_path / "bare", without(small_case(), "motors", "magnet material"))
    value, origin, rule = derived(bare, "magnet_temperature_coefficient", 0)
    assert (value, origin) == (0.0, ASSUMED)
    assert "magnet not known" in rule


def test_copper_coefficient_belongs_to_the_resistance_temperature(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "resistance temperature [°C]", 20, "")
    case = read(tmp_path, tables)
    # IEC 60034-1: R ∝ 235 + ϑ.
    assert case.motor_parameters.resistance_coefficient_per_k == pytest.approx([1 / 255, 1 / 260], rel=1e-14)
    assert derived(case, "resistance_temperature", 1)[1] == ASSUMED


def test_thermal_resistance_from_the_rated_point(tmp_path):
    case = read(tmp_path, small_case())
    motors = case.motor_parameters
    hot = 1.5 * 0.62 * (235 + 155) / (235 + 25)
    assert motors.thermal_resistance_winding_k_w[0] == pytest.approx(130 / (hot * 6.1**2), rel=1e-12)
    assert np.isnan(motors.thermal_resistance_housing_k_w).all()
    assert "rated point" in derived(case, "thermal_resistance_winding_housing", 0)[2]


def test_one_stated_thermal_resistance_leaves_the_rest_to_the_rated_point(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "thermal resistance winding-housing [K/W]", 0.9, 99)
    case = read(tmp_path, tables)
    motors = case.motor_parameters
    total = 130 / (1.5 * 0.62 * 390 / 260 * 6.1**2)
    assert motors.thermal_resistance_housing_k_w[0] == pytest.approx(total - 0.9, rel=1e-12)
    assert math.isnan(motors.thermal_resistance_housing_k_w[1])
    assert any("more than the continuous rating allows" in problem.got for problem in case.problems)


def test_brake_adds_to_the_rotor(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "brake inertia [g·cm²]", 60, "")
    case = read(tmp_path, tables)
    assert case.motor_parameters.rotor_inertia_kg_m2 == pytest.approx([540e-7, 536e-7], rel=1e-14)
    assert case.motors.values["rotor_inertia"][0] == pytest.approx(480e-7)  # as stated


def test_reactance_counts_only_for_a_sinusoidal_motor(tmp_path):
    tables = small_case()
    set_cell(tables, "motors", "B-20", "pole pairs", 7)
    set_cell(tables, "motors", "B-20", "commutation", "six-step")
    case = read(tmp_path, tables)
    assert case.motor_parameters.pole_pairs[0] == 4
    assert math.isnan(case.motor_parameters.pole_pairs[1])
    assert case.motors.values["pole_pairs"][1] == 7


def test_linear_motor_in_the_same_table(tmp_path):
    tables = small_case()
    for row, values in zip(
        tables["motors"],
        (
            ["force constant [N/A]", "moving mass [kg]", "maximum linear speed [m/s]", "pole pitch [mm]"],
            ["", "", "", ""],
            ["", "", "", ""],
        ),
        strict=True,
    ):
        row += values
    headings = [str(heading).partition(" [")[0] for heading in tables["motors"][0]]
    linear = {"motor": "L-1", "commutation": "sinusoidal", "current basis": "peak",
              "resistance terminal-to-terminal": 4.0, "inductance terminal-to-terminal": 20,
              "continuous current": 3, "force constant": 60, "moving mass": 2.5, "maximum linear speed": 5,
              "pole pitch": 16, "thermal class": "B"}  # fmt: skip
    tables["motors"].append([linear.get(name, "") for name in headings])
    case = read(tmp_path, tables)
    motors = case.motor_parameters
    assert motors.is_linear.tolist() == [False, False, True]
    assert motors.torque_constant_nm_per_a[2] == 60.0
    assert motors.rotor_inertia_kg_m2[2] == 2.5
    assert motors.speed_max_rad_s[2] == 5.0
    assert motors.resistance_ohm[2] == pytest.approx(3.0)
    assert motors.pole_pairs[2] == pytest.approx(math.pi / 0.016)
    assert motors.friction_torque_nm[2] == 0.0


def test_gearheads_start_with_direct_drive(tmp_path):
    case = read(tmp_path, small_case())
    gearheads = case.gearhead_parameters
    assert case.gearheads.names == ("", "G-3", "G-5")
    assert gearheads.is_direct.tolist() == [True, False, False]
    assert gearheads.ratio == pytest.approx([1.0, 91 / 30, 5.0], rel=1e-15)
    assert gearheads.efficiency_back == pytest.approx([1.0, 2 - 1 / 0.95, 2 - 1 / 0.95])
    assert case.gearheads.as_entered["ratio"][1] == "91/30"
    assert case.gearheads.rules["back_driving_efficiency"][1].startswith("2 − 1/efficiency")


def test_direct_drive_can_be_excluded(tmp_path):
    tables = small_case()
    tables["axis"].append(["direct drive allowed", "no", "", ""])
    case = read(tmp_path, tables)
    assert case.gearheads.names == ("G-3", "G-5")
    assert not case.gearhead_parameters.is_direct.any()


def test_served_commutations_of_drives(tmp_path):
    case = read(tmp_path, small_case())
    drives = case.drive_parameters
    assert drives.serves_sinusoidal.tolist() == [True, False]
    assert drives.serves_brushed.tolist() == [False, True]
    assert drives.serves_six_step.tolist() == [False, True]
    assert case.drives.origins["commutation"].tolist() == [ASSUMED, STATED]


def test_entries_of_a_row_say_what_was_typed_and_what_it_became(tmp_path):
    case = read(tmp_path, small_case())
    entries = {entry.column: entry for entry in case.catalog_entries("motors", 0)}
    inertia = entries["rotor inertia"]
    assert (inertia.row, inertia.as_entered, inertia.unit, inertia.origin) == (
        2,
        "480 g·cm²",
        "kg·m²",
        "stated",
    )
    assert inertia.value_si == pytest.approx(480e-7)
    assert inertia.source == "invented"
    assert entries["friction torque"].origin == "derived"
    assert entries["friction torque"].as_entered == ""
    assert entries["continuous-rating ambient"].origin == "assumed"
    assert "peak torque" not in entries


def test_unknown_columns_are_kept(tmp_path):
    tables = small_case()
    add_column(tables, "motors", "Encoder", "absolute", "")
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    assert case.motors.values["other_encoder"].tolist() == ["absolute", ""]
    assert case.motors.headings["other_encoder"] == "Encoder"
    assert any(entry.column == "Encoder" for entry in case.catalog_entries("motors", 0))
    (warning,) = problems
    assert (warning.table, warning.column, warning.severity) == ("motors", "Encoder", "warning")
