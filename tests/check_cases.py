"""Small cases for every check: one that fails it and nothing else, one that lacks a datum for it.

A new check needs an entry in `FAILING` and, if it needs data at all, one in `LACKING`;
`tests/unit/test_check_pairs.py` fails until it has both.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np

from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.dynamic_results import DynamicResults
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, SURROUNDINGS, case, cycle

LEVEL = {"lead": 0.02, "moving mass": 10.0, "guide friction force": 150.0}
LIFT = {**LEVEL, "inclination": np.pi / 2, "screw diameter": 0.02, "guide friction force": 10.0}
#: Slow enough that no advice of a comfortable axis is missed.
MOVES = cycle(
    {"law": "cycloidal", "displacement": 0.1, "duration_s": 1.0},
    {"law": "dwell", "duration_s": 0.5},
    {"law": "cycloidal", "displacement": -0.1, "duration_s": 1.0},
    {"law": "dwell", "duration_s": 0.5},
)
HELD = cycle(
    {"law": "cycloidal", "displacement": 0.1, "duration_s": 1.0},
    {"law": "dwell", "duration_s": 0.5, "brake_closed": True},
    {"law": "cycloidal", "displacement": -0.1, "duration_s": 1.0},
    {"law": "dwell", "duration_s": 0.5, "brake_closed": True},
)
STANDS = cycle(
    {"law": "cycloidal", "displacement": 0.1, "duration_s": 1.0},
    {"law": "dwell", "duration_s": 2.0},
    {"law": "cycloidal", "displacement": -0.1, "duration_s": 1.0},
    {"law": "dwell", "duration_s": 2.0},
)
RECTIFIER = {"supply feeds back": "no"}
CHOPPER = {**RECTIFIER, "brake resistor": 60.0, "chopper threshold": 361.0, "brake resistor continuous power": 500.0,
           "brake resistor pulse energy": 1000.0}  # fmt: skip
LIFE = {"required life": 3.6e7}

#: Stands the current of a shorted winding at the speeds of these cases.
STRONG = dict(MOTOR, peak_current_a=28.0, peak_torque_nm=12.0)

Columns = dict[str, Any]

#: What the comfortable drive states of itself beside its ratings.
SWITCHING = {"standstill_current": 100.0, "maximum_output_frequency": 600.0, "minimum_load_inductance": 1e-5,
             "pwm_frequency": 1e6}  # fmt: skip


def sets_of(
    mechanism: str = "ball screw",
    values: dict[str, float] = LEVEL,
    segments: Any = MOVES,
    *,
    motor: Columns | None = None,
    gearhead: Columns | None = None,
    drive: Columns | None = None,
    motor_columns: Columns | None = None,
    gearhead_columns: Columns | None = None,
    drive_columns: Columns | None = None,
    dynamics: Columns | None = None,
    cable_ohm: float = 0.01,
    **options: Any,
) -> Sets:
    """One set; `*_columns` are columns of the catalogs by key, a tuple where a second part states another value."""
    motors = [dict(STRONG, **(motor or {}))]
    gearheads = [dict(DIRECT if gearhead is None else dict(GEARHEAD, ratio=2.0), **(gearhead or {}))]
    drives = [dict(DRIVE, **(drive or {}))]
    tables = {
        "motors": motor_columns,
        "gearheads": gearhead_columns,
        "drives": SWITCHING | (drive_columns or {}),
    }
    count = 2 if any(isinstance(v, tuple) for part in tables.values() for v in (part or {}).values()) else 1
    made = case(mechanism, values, segments, motors=motors * count, gearheads=gearheads * count,
                drives=drives * count, surroundings=replace(SURROUNDINGS, cable_ohm=cable_ohm),
                options={"stop reaction time": 0.01, **options})  # fmt: skip
    for name, given in tables.items():
        catalog = getattr(made, name)
        known = {}
        for key, value in (given or {}).items():
            both = value if isinstance(value, tuple) else (value,) * count
            known[key] = np.array(both, dtype=object if isinstance(both[0], str) else float)
        made = replace(made, **{name: replace(catalog, values={**catalog.values, **known})})
    sets = evaluate_sets(made, build_demand(made), np.zeros((1, 3), dtype=np.intp))
    return sets if dynamics is None else replace(sets, dynamics=_dynamics(dynamics))


def _dynamics(given: Columns) -> DynamicResults:
    """A simulated set that is better than asked, but for what is given."""
    good = {
        "settling_band": 1e-3, "allowed_following_error": 1e-2, "required_bandwidth_rad_s": 100.0,
        "is_left_out": False, "is_simulated": 1.0, "stiffness_nm_per_rad": 1e4, "achievable_bandwidth_rad_s": 300.0,
        "settling_time_s": 0.1, "settling_available_s": 0.5, "settling_at_s": 1.0, "following_error": 1e-3,
        "following_error_at_s": 0.5, "sensitivity_peak_ratio": 1.4,
    }  # fmt: skip
    wishes = ("settling_band", "allowed_following_error", "required_bandwidth_rad_s")
    values = {**good, **given}
    return DynamicResults(**{name: v if name in wishes else np.array([v]) for name, v in values.items()})


def _braked(torque: float, closing: float = 0.03, **columns: Any) -> Columns:
    return {"motor": {"brake_torque_nm": torque},
            "motor_columns": {"brake_closing_time": closing, "brake_energy_per_stop": 500.0, **columns}}  # fmt: skip


_SCREW = {"screw root diameter": 0.017, "screw unsupported length": 0.5, "screw end fixity": "fixed-supported",
          "screw yield strength": 4e8}  # fmt: skip
_BELT = {"pulley diameter": 0.05, "moving mass": 5.0}
_RACK = {"pinion diameter": 0.05, "moving mass": 5.0}
_SHAFT = {
    "permissible_radial_force": 500.0, "radial_force_position": 0.02, "bearing_lever": 0.03,
    "permissible_axial_force": 200.0, "bearing_life": 7.2e7, "bearing_life_speed": 100.0,
}  # fmt: skip
_SIMULATED = "simulation: only leading sets with a cycle of at most four million samples are simulated"
_LOADED = {"shaft radial force": 200.0, "shaft force position": 0.02}

#: Fails this check and nothing else.
FAILING: dict[str, Callable[[], Sets]] = {
    "speed_torque": lambda: sets_of(motor={"peak_torque_nm": 0.1}),
    "rms_current": lambda: sets_of(motor={"continuous_current_a": 0.05}),
    "winding_temperature": lambda: sets_of(
        motor={"thermal_resistance_winding_k_w": 40.0, "thermal_resistance_housing_k_w": 40.0}
    ),
    "motor_peak_current": lambda: sets_of(
        motor={"peak_current_a": 1.1, "peak_torque_nm": np.nan, "resistance_ohm": 25.0}
    ),
    "motor_speed": lambda: sets_of(motor={"speed_max_rad_s": 50.0}),
    "voltage": lambda: sets_of(motor={"inductance_h": 900.0, "pole_pairs": np.nan}),
    "jam_temperature": lambda: sets_of(**{"jam duration": 60.0}),
    "stops_temperature": lambda: sets_of(
        values={**LEVEL, "moving mass": 2500.0}, gearhead={"ratio": 5.0, "emergency_torque_nm": 1e4},
        motor={"peak_current_a": 60.0}, **{"stops in a row": 200.0},
    ),
    "standstill_hold": lambda: sets_of(
        values=LIFT, motor={"thermal_resistance_winding_k_w": 95.0, "winding_time_constant_s": 0.2}
    ),
    "motor_demagnetisation": lambda: sets_of(
        motor={"peak_current_a": 28.0}, motor_columns={"demagnetisation_current": 19.0}
    ),
    "brush_life": lambda: sets_of(
        motor={"commutation": 0, "current_basis": 0, "pole_pairs": np.nan},
        drive={"current_basis": 0, "serves_brushed": True}, motor_columns={"brush_life": 3.6e6}, **LIFE,
    ),
    "drive_continuous_current": lambda: sets_of(drive={"continuous_current_a": 1.0, "rms_window_s": 0.05}),
    "drive_peak_current": lambda: sets_of(
        drive={"peak_current_a": 1.1, "continuous_current_a": 1.0, "peak_time_s": 20.0}
    ),
    "drive_peak_time": lambda: sets_of(
        drive={"continuous_current_a": 1.0, "peak_current_a": 5.0, "peak_time_s": 1e-3}
    ),
    "drive_bus_voltage": lambda: sets_of(drive={"bus_voltage_min_v": 300.0}),
    "drive_standstill_current": lambda: sets_of(
        values=LIFT, segments=STANDS, drive_columns={"standstill_current": 0.1}
    ),
    "drive_output_frequency": lambda: sets_of(drive_columns={"maximum_output_frequency": 10.0}),
    "drive_load_inductance": lambda: sets_of(drive_columns={"minimum_load_inductance": 1.0}),
    "pwm_ripple_loss": lambda: sets_of(drive_columns={"pwm_frequency": 200.0}),
    "cable_voltage_drop": lambda: sets_of(cable_ohm=25.0),
    "bus_maximum_voltage": lambda: sets_of(values=LIFT, drive={"capacitance_f": 1e-6}, **RECTIFIER),
    "bus_sag": lambda: sets_of(
        gearhead={"ratio": 9.0, "speed_mean_max_rad_s": 600.0}, motor={"peak_current_a": 60.0},
        drive={"bus_voltage_min_v": 50.0},
        **{"supply internal resistance": 125.0},
    ),
    "bus_minimum_voltage": lambda: sets_of(
        drive={"bus_voltage_min_v": 285.0}, **{"supply internal resistance": 60.0}
    ),
    "supply_charging_current": lambda: sets_of(values=LIFT, **{"supply charging current": 1e-3}),
    "chopper_release": lambda: sets_of(
        values=LIFT, drive={"brake_resistor_min_ohm": 10.0}, **{**CHOPPER, "chopper hysteresis": 20.0}
    ),
    "brake_resistor_value": lambda: sets_of(values=LIFT, drive={"brake_resistor_min_ohm": 70.0}, **CHOPPER),
    "brake_resistor_peak_power": lambda: sets_of(
        values=LIFT, drive={"brake_resistor_min_ohm": 10.0}, **{**CHOPPER, "brake resistor": 1e5}
    ),
    "brake_resistor_mean_power": lambda: sets_of(
        values=LIFT, drive={"brake_resistor_min_ohm": 10.0}, **{**CHOPPER, "brake resistor continuous power": 0.1}
    ),
    "brake_resistor_pulse_energy": lambda: sets_of(
        values=LIFT, drive={"brake_resistor_min_ohm": 10.0}, **{**CHOPPER, "brake resistor pulse energy": 0.1}
    ),
    "supply_mean_power": lambda: sets_of(**{"supply continuous power": 0.1, "supply peak power": 1e4}),
    "supply_peak_power": lambda: sets_of(**{"supply continuous power": 1e4, "supply peak power": 0.1}),
    "gearhead_equivalent_torque": lambda: sets_of(gearhead={"continuous_torque_nm": 0.1}),
    "gearhead_peak_torque": lambda: sets_of(gearhead={"peak_torque_nm": 0.1}),
    "gearhead_mean_speed": lambda: sets_of(gearhead={"speed_mean_max_rad_s": 30.0}),
    "gearhead_maximum_speed": lambda: sets_of(gearhead={"speed_max_rad_s": 100.0}),
    "gearhead_thermal_power": lambda: sets_of(gearhead={}, gearhead_columns={"thermal_power": 1.0}),
    "gearhead_life": lambda: sets_of(
        gearhead={}, gearhead_columns={"rated_life": 3600.0, "rated_torque": 0.1, "rated_input_speed": 100.0}, **LIFE
    ),
    "shaft_radial_force": lambda: sets_of(
        motor_columns=_SHAFT, **{"shaft radial force": 400.0, "shaft force position": 0.04}
    ),
    "shaft_axial_force": lambda: sets_of(gearhead={}, gearhead_columns=_SHAFT, **{"shaft axial force": 300.0}),
    "shaft_bearing_life": lambda: sets_of(motor_columns={**_SHAFT, "bearing_life": 3600.0}, **_LOADED, **LIFE),
    "screw_critical_speed": lambda: sets_of(**{**_SCREW, "screw unsupported length": 4.5}),
    "screw_dn_value": lambda: sets_of(values={**LEVEL, "screw diameter": 0.02}, **{"screw DN limit": 1e4}),
    "screw_buckling": lambda: sets_of(
        segments=cycle({"law": "cycloidal", "displacement": 0.1, "duration_s": 1.0, "process_effort": 2500.0},
                       {"law": "cycloidal", "displacement": -0.1, "duration_s": 1.0}),
        gearhead={"ratio": 3.0}, **{**_SCREW, "screw root diameter": 0.008, "screw unsupported length": 0.45},
    ),
    "screw_static_load": lambda: sets_of(**{"screw static load rating": 5.0}),
    "screw_life": lambda: sets_of(**{"screw dynamic load rating": 30.0, "screw static load rating": 1e4}, **LIFE),
    "screw_pressure_speed": lambda: sets_of(
        "lead screw", {**LIFT, "efficiency": 0.5},
        **{"nut contact area": 1e-4, "allowed nut pressure times speed": 1e4},
    ),
    "belt_tension": lambda: sets_of("belt", _BELT, **{"belt pretension": 100.0, "allowed belt tension": 101.0},
                                    gearhead={}),
    "belt_teeth": lambda: sets_of("belt", _BELT, **{"teeth in mesh": 20.0, "allowed force per tooth": 0.2},
                                  gearhead={}),
    "rack_force": lambda: sets_of("rack and pinion", _RACK, **{"allowed tangential force": 2.0}, gearhead={}),
    "coupling_torque": lambda: sets_of(**{"coupling torque limit": 0.01}),
    "stop_controlled": lambda: sets_of(
        drive={"peak_current_a": 1.3, "continuous_current_a": 1.0, "peak_time_s": 20.0},
        **{"allowed stopping distance": 2.0e-3},
    ),
    "stop_shorted": lambda: sets_of(motor={"resistance_ohm": 12.0}, **{"allowed stopping distance": 2.0e-3}),
    "stop_brake": lambda: sets_of(**_braked(0.2), **{"allowed stopping distance": 2.2e-3}),
    "motor_shorted_current": lambda: sets_of(motor={"peak_current_a": 8.0}),
    "holding_brake_static": lambda: sets_of(values=LIFT, **_braked(0.2, np.nan)),
    "holding_brake_energy": lambda: sets_of(values=LIFT, **_braked(2.0, brake_energy_per_stop=0.01)),
    "drop_distance": lambda: sets_of(values=LIFT, **_braked(2.0), **{"allowed drop distance": 1e-4}),
    "holding_brake_wear": lambda: sets_of(
        values=LIFT, **_braked(2.0, brake_work_until_wear=1.0), **{"brake stops in life": 1e4}
    ),
    "holding_brake_stops": lambda: sets_of(
        **_braked(2.0, brake_stops_allowed=100.0), **{"brake stops in life": 200.0}
    ),
    "gearhead_emergency_torque": lambda: sets_of(
        gearhead={"ratio": 2.0, "efficiency": 0.5, "efficiency_back": 0.4, "emergency_torque_nm": 10.0},
        values={**LEVEL, "moving mass": 300.0},
    ),
    "gearhead_jam_torque": lambda: sets_of(gearhead={"emergency_torque_nm": 12.0}),
    "inertia_ratio": lambda: sets_of(**{"recommended inertia ratio": 0.5}),
    "settling": lambda: sets_of(dynamics={"settling_time_s": 0.6}),
    "following_error": lambda: sets_of(dynamics={"following_error": 0.02}),
    "stability_reserve": lambda: sets_of(dynamics={"sensitivity_peak_ratio": 2.5}),
    "resonance": lambda: sets_of(dynamics={"achievable_bandwidth_rad_s": 50.0}),
}  # fmt: skip

#: Fail with a check by necessity, whatever the case: the speed–torque plane ends at the peak currents.
IMPLIED = {"motor_peak_current": {"speed_torque"}, "drive_peak_current": {"speed_torque"}}

#: Lacks what this check needs: the case, and what the report must ask for.
LACKING: dict[str, tuple[Callable[[], Sets], str]] = {
    "speed_torque": (lambda: sets_of(motor={"peak_current_a": np.nan}), "peak current"),
    "rms_current": (lambda: sets_of(motor={"continuous_current_a": np.nan}), "continuous current"),
    "winding_temperature": (
        lambda: sets_of(motor=dict.fromkeys(
            ("thermal_resistance_winding_k_w", "thermal_resistance_housing_k_w"), np.nan)),
        "thermal resistance and time constant of winding and housing",
    ),
    "motor_peak_current": (lambda: sets_of(motor={"peak_current_a": np.nan}), "peak current"),
    "motor_speed": (lambda: sets_of(motor={"speed_max_rad_s": np.nan}), "maximum speed"),
    "jam_temperature": (
        lambda: sets_of(motor={"winding_limit_degc": np.nan}, **{"jam duration": 0.1}), "winding temperature limit"
    ),
    "stops_temperature": (
        lambda: sets_of(motor={"peak_current_a": np.nan}, **{"stops in a row": 2.0}), "peak current"
    ),
    "standstill_hold": (
        lambda: sets_of(values=LIFT, motor={"thermal_resistance_housing_k_w": np.nan, "mass_kg": np.nan}),
        "thermal resistance winding-housing",
    ),
    "motor_demagnetisation": (
        lambda: sets_of(motor_columns={"demagnetisation_current": (np.nan, 50.0)}), "demagnetisation current"
    ),
    "brush_life": (
        lambda: sets_of(
            motor={"commutation": 0, "current_basis": 0, "pole_pairs": np.nan},
            drive={"current_basis": 0, "serves_brushed": True}, motor_columns={"brush_life": (np.nan, 3.6e6)}, **LIFE,
        ),
        "brush life",
    ),
    "drive_continuous_current": (lambda: sets_of(drive={"continuous_current_a": np.nan}), "continuous current"),
    "drive_peak_current": (lambda: sets_of(drive={"peak_current_a": np.nan}), "peak current"),
    "drive_peak_time": (lambda: sets_of(drive={"peak_time_s": np.nan}), "peak time"),
    "drive_standstill_current": (
        lambda: sets_of(values=LIFT, segments=STANDS, drive={"continuous_current_a": np.nan}),
        "continuous current in these surroundings",
    ),
    "drive_output_frequency": (
        lambda: sets_of(drive_columns={"maximum_output_frequency": np.nan}), "maximum output frequency"
    ),
    "drive_load_inductance": (
        lambda: sets_of(drive_columns={"minimum_load_inductance": np.nan}), "minimum load inductance"
    ),
    "pwm_ripple_loss": (lambda: sets_of(drive_columns={"pwm_frequency": np.nan}), "PWM frequency"),
    "drive_bus_voltage": (lambda: sets_of(drive={"bus_voltage_max_v": np.nan}), "maximum bus voltage"),
    "bus_maximum_voltage": (
        lambda: sets_of(values=LIFT, drive={"capacitance_f": np.nan}, **RECTIFIER), "internal capacitance"
    ),
    "bus_sag": (lambda: sets_of(supply="battery"), "supply current limit"),
    "bus_minimum_voltage": (
        lambda: sets_of(drive={"bus_voltage_min_v": np.nan}, **{"supply internal resistance": 1.0}),
        "minimum bus voltage",
    ),
    "supply_charging_current": (
        lambda: sets_of(supply="battery", **{"supply current limit": 100.0}), "supply charging current"
    ),
    "brake_resistor_value": (lambda: sets_of(values=LIFT, **CHOPPER), "minimum brake resistor"),
    "brake_resistor_peak_power": (
        lambda: sets_of(values=LIFT, **{**CHOPPER, "chopper threshold": np.nan}), "chopper threshold"
    ),
    "brake_resistor_mean_power": (
        lambda: sets_of(values=LIFT, **{**CHOPPER, "brake resistor continuous power": np.nan}),
        "brake resistor continuous power",
    ),
    "brake_resistor_pulse_energy": (
        lambda: sets_of(values=LIFT, **{**CHOPPER, "brake resistor pulse energy": np.nan}),
        "brake resistor pulse energy",
    ),
    "supply_mean_power": (
        lambda: sets_of(drive={"efficiency": np.nan}, **{"supply continuous power": 1e3}), "efficiency"
    ),
    "supply_peak_power": (
        lambda: sets_of(drive={"efficiency": np.nan}, **{"supply peak power": 1e3}), "efficiency"
    ),
    "gearhead_equivalent_torque": (
        lambda: sets_of(gearhead={"continuous_torque_nm": np.nan}), "continuous torque"
    ),
    "gearhead_peak_torque": (lambda: sets_of(gearhead={"peak_torque_nm": np.nan}), "peak torque"),
    "gearhead_mean_speed": (lambda: sets_of(gearhead={"speed_mean_max_rad_s": np.nan}), "mean input speed"),
    "gearhead_maximum_speed": (lambda: sets_of(gearhead={"speed_max_rad_s": np.nan}), "maximum input speed"),
    "gearhead_thermal_power": (
        lambda: sets_of(gearhead={}, gearhead_columns={"thermal_power": (np.nan, 100.0)}), "thermal power"
    ),
    "gearhead_life": (
        lambda: sets_of(
            gearhead={}, gearhead_columns={"rated_life": (np.nan, 1e7), "rated_input_speed": 100.0}, **LIFE
        ),
        "rated life",
    ),
    "shaft_radial_force": (
        lambda: sets_of(gearhead={}, motor_columns=_SHAFT, **_LOADED), "permissible radial force"
    ),
    "shaft_axial_force": (lambda: sets_of(**{"shaft axial force": 100.0}), "permissible axial force"),
    "shaft_bearing_life": (
        lambda: sets_of(motor_columns={**_SHAFT, "bearing_life": np.nan}, **_LOADED, **LIFE), "bearing life"
    ),
    "screw_critical_speed": (lambda: sets_of(**{"screw unsupported length": 0.5}), "screw end fixity"),
    "screw_dn_value": (lambda: sets_of(**{"screw DN limit": 1e5}), "screw diameter"),
    "screw_buckling": (
        lambda: sets_of(**{**_SCREW, "screw unsupported length": 0.1, "screw yield strength": np.nan}),
        "screw yield strength",
    ),
    "screw_static_load": (
        lambda: sets_of(**{"screw dynamic load rating": 1e4}, **LIFE), "screw static load rating"
    ),
    "screw_life": (lambda: sets_of(**{"screw dynamic load rating": 1e4}), "required life"),
    "screw_pressure_speed": (
        lambda: sets_of("lead screw", LEVEL, **{"allowed nut pressure times speed": 1e6}), "nut contact area"
    ),
    "belt_tension": (
        lambda: sets_of("belt", _BELT, **{"allowed belt tension": 1e3}, gearhead={}), "belt pretension"
    ),
    "belt_teeth": (
        lambda: sets_of("belt", _BELT, **{"teeth in mesh": 9.0}, gearhead={}), "allowed force per tooth"
    ),
    "rack_force": (
        lambda: sets_of("rack and pinion", _RACK, **{"pressure angle": 0.35}, gearhead={}),
        "allowed tangential force",
    ),
    "coupling_torque": (lambda: sets_of(**{"application factor": 1.5}), "coupling torque limit"),
    "stop_controlled": (
        lambda: sets_of(motor={"peak_current_a": np.nan}, **{"allowed stopping distance": 1.0}), "peak current"
    ),
    "stop_shorted": (
        lambda: sets_of(**{"allowed stopping distance": 1.0, "stop reaction time": np.nan}), "stop reaction time"
    ),
    "stop_brake": (
        lambda: sets_of(**_braked(2.0, np.nan), **{"allowed stopping distance": 1.0}), "brake closing time"
    ),
    "motor_shorted_current": (lambda: sets_of(motor={"peak_current_a": np.nan}), "peak current"),
    "holding_brake_static": (lambda: sets_of(values=LIFT, segments=HELD), "brake torque"),
    "holding_brake_energy": (
        lambda: sets_of(values=LIFT, **_braked(2.0, brake_energy_per_stop=np.nan)), "brake energy per stop"
    ),
    "drop_distance": (
        lambda: sets_of(values=LIFT, **_braked(2.0, np.nan), **{"allowed drop distance": 1.0}), "brake closing time"
    ),
    "holding_brake_wear": (
        lambda: sets_of(**_braked(2.0, brake_work_until_wear=(np.nan, 1e6)), **{"brake stops in life": 10.0}),
        "brake work until wear",
    ),
    "holding_brake_stops": (
        lambda: sets_of(**_braked(2.0, brake_stops_allowed=(np.nan, 1e3)), **{"brake stops in life": 10.0}),
        "brake stops allowed",
    ),
    "gearhead_emergency_torque": (
        lambda: sets_of(gearhead={"emergency_torque_nm": np.nan}), "emergency-stop torque"
    ),
    "gearhead_jam_torque": (lambda: sets_of(gearhead={"emergency_torque_nm": np.nan}), "emergency-stop torque"),
    "settling": (
        lambda: sets_of(dynamics={"stiffness_nm_per_rad": np.nan}),
        "torsional stiffness (or driven shaft stiffness of the axis)",
    ),
    "following_error": (
        lambda: sets_of(dynamics={"is_simulated": np.nan}), _SIMULATED
    ),
    "stability_reserve": (
        lambda: sets_of(dynamics={"is_simulated": np.nan}), _SIMULATED
    ),
    "resonance": (
        lambda: sets_of(dynamics={"stiffness_nm_per_rad": np.nan}),
        "torsional stiffness (or driven shaft stiffness of the axis)",
    ),
}  # fmt: skip
