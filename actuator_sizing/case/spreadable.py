"""Which quantities may carry a spread, and the parameter of the equations that each of them moves."""

from __future__ import annotations

from dataclasses import dataclass

from actuator_sizing.case.columns import Column, fold, key_of
from actuator_sizing.case.tables import COMMON_QUANTITIES, TABLES, mechanism_quantities
from actuator_sizing.core.mechanisms import Mechanism

#: How a spread value becomes a parameter: in proportion to it, inversely, or by the same difference.
PROPORTIONAL, INVERSE, SHIFTED = "proportional", "inverse", "shifted"

_MOTOR: dict[str, tuple[str, str]] = {
    "resistance_terminal_to_terminal": ("resistance_ohm", PROPORTIONAL),
    "resistance_temperature": ("resistance_reference_degc", SHIFTED),
    "resistance_temperature_coefficient": ("resistance_coefficient_per_k", PROPORTIONAL),
    "inductance_terminal_to_terminal": ("inductance_h", PROPORTIONAL),
    "torque_constant": ("torque_constant_nm_per_a", PROPORTIONAL),
    "back_emf_constant": ("torque_constant_nm_per_a", PROPORTIONAL),
    "speed_constant": ("torque_constant_nm_per_a", INVERSE),
    "force_constant": ("torque_constant_nm_per_a", PROPORTIONAL),
    "linear_back_emf_constant": ("torque_constant_nm_per_a", PROPORTIONAL),
    "rotor_inertia": ("rotor_inertia_kg_m2", SHIFTED),  # the parameter holds the brake too
    "moving_mass": ("rotor_inertia_kg_m2", SHIFTED),
    "brake_inertia": ("rotor_inertia_kg_m2", SHIFTED),
    "friction_torque": ("friction_torque_nm", SHIFTED),
    "friction_force": ("friction_torque_nm", SHIFTED),
    "no_load_current": ("friction_torque_nm", PROPORTIONAL),
    "viscous_friction": ("viscous_friction_nm_s", SHIFTED),
    "linear_viscous_friction": ("viscous_friction_nm_s", SHIFTED),
    "continuous_current": ("continuous_current_a", PROPORTIONAL),
    "continuous_torque": ("continuous_current_a", PROPORTIONAL),
    "continuous_force": ("continuous_current_a", PROPORTIONAL),
    "continuous_rating_ambient": ("continuous_ambient_degc", SHIFTED),
    "peak_current": ("peak_current_a", PROPORTIONAL),
    "peak_torque": ("peak_torque_nm", PROPORTIONAL),
    "peak_force": ("peak_torque_nm", PROPORTIONAL),
    "maximum_speed": ("speed_max_rad_s", PROPORTIONAL),
    "maximum_linear_speed": ("speed_max_rad_s", PROPORTIONAL),
    "winding_temperature_limit": ("winding_limit_degc", SHIFTED),
    "thermal_resistance_winding_housing": ("thermal_resistance_winding_k_w", PROPORTIONAL),
    "thermal_resistance_housing_ambient": ("thermal_resistance_housing_k_w", PROPORTIONAL),
    "winding_time_constant": ("winding_time_constant_s", PROPORTIONAL),
    "housing_time_constant": ("housing_time_constant_s", PROPORTIONAL),
    "magnet_temperature_coefficient": ("magnet_coefficient_per_k", PROPORTIONAL),
    "magnet_reference_temperature": ("magnet_reference_degc", SHIFTED),
    "brake_torque": ("brake_torque_nm", PROPORTIONAL),
    "brake_force": ("brake_torque_nm", PROPORTIONAL),
}
_GEARHEAD: dict[str, tuple[str, str]] = {
    "efficiency": ("efficiency", PROPORTIONAL),
    "back_driving_efficiency": ("efficiency_back", SHIFTED),
    "no_load_running_torque": ("no_load_torque_nm", SHIFTED),
    "inertia_at_input": ("inertia_kg_m2", SHIFTED),
    "continuous_torque": ("continuous_torque_nm", PROPORTIONAL),
    "peak_torque": ("peak_torque_nm", PROPORTIONAL),
    "emergency_stop_torque": ("emergency_torque_nm", PROPORTIONAL),
    "mean_input_speed": ("speed_mean_max_rad_s", PROPORTIONAL),
    "maximum_input_speed": ("speed_max_rad_s", PROPORTIONAL),
}
_DRIVE: dict[str, tuple[str, str]] = {
    "continuous_current": ("continuous_current_a", PROPORTIONAL),
    "peak_current": ("peak_current_a", PROPORTIONAL),
    "peak_time": ("peak_time_s", PROPORTIONAL),
    "minimum_bus_voltage": ("bus_voltage_min_v", PROPORTIONAL),
    "maximum_bus_voltage": ("bus_voltage_max_v", PROPORTIONAL),
    "internal_capacitance": ("capacitance_f", PROPORTIONAL),
    "chopper_threshold": ("chopper_threshold_v", PROPORTIONAL),
    "minimum_brake_resistor": ("brake_resistor_min_ohm", PROPORTIONAL),
    "efficiency": ("efficiency", PROPORTIONAL),
}
#: Catalog table -> key of the column -> (field of the parameters, how it moves).
PARAMETER_OF: dict[str, dict[str, tuple[str, str]]] = {
    "motors": _MOTOR,
    "gearheads": _GEARHEAD,
    "drives": _DRIVE,
}

#: Surroundings that may spread -> field. The judged winding temperature is a rule of judging, not a tolerance.
SURROUNDING_OF = {
    "ambient_temperature": "ambient_degc",
    "altitude": "altitude_m",
    "nominal_bus_voltage": "bus_nominal_v",
    "minimum_bus_voltage": "bus_min_v",
    "maximum_bus_voltage": "bus_max_v",
    "modulation_limit": "modulation_limit",
    "current_loop_rise_time": "current_loop_rise_s",
}
#: Options of the axis that a check reads as a number.
OPTIONS_THAT_SPREAD = frozenset(
    {"bus_capacitance", "chopper_threshold", "brake_resistor", "brake_resistor_continuous_power",
     "brake_resistor_pulse_energy", "supply_continuous_power", "supply_peak_power", "supply_internal_resistance",
     "stop_reaction_time"}
)  # fmt: skip
#: Columns of the duty cycle; the spread of one moves every segment alike.
DUTY_CYCLE_THAT_SPREADS = ("payload", "process force", "duration")


@dataclass(frozen=True)
class Target:
    """One quantity that may carry a spread."""

    table: str
    column: Column


def targets(name: str, mechanism: type[Mechanism] | None) -> tuple[Target, ...]:
    """Every place in which a quantity of that name may carry a spread.

    Parameters
    ----------
    name : str
        As typed. [-]
    mechanism : type or None
        Mechanism of the case. [-]

    Returns
    -------
    tuple of Target
        Axis first, then duty cycle and catalogs; empty where there is none. [-]
    """
    return tuple(target for target in _every_target(mechanism) if fold(name) in _names(target.column))


def names_that_spread(mechanism: type[Mechanism] | None) -> tuple[str, ...]:
    """Names of all quantities that may carry a spread."""
    return tuple(dict.fromkeys(target.column.name for target in _every_target(mechanism)))


def _names(column: Column) -> tuple[str, ...]:
    return tuple(fold(known) for known in (column.name, column.key, *column.aliases))


def _every_target(mechanism: type[Mechanism] | None) -> tuple[Target, ...]:
    found = [
        Target("axis", column)
        for column in COMMON_QUANTITIES
        if column.is_number and (column.key in SURROUNDING_OF or column.key in OPTIONS_THAT_SPREAD)
    ]
    if mechanism is not None:
        found += [Target("axis", column) for column in mechanism_quantities(mechanism)]
    duty = TABLES["duty_cycle"].columns
    found += [Target("duty_cycle", column) for column in duty if column.name in DUTY_CYCLE_THAT_SPREADS]
    for table, fields in PARAMETER_OF.items():
        found += [
            Target(table, column)
            for column in TABLES[table].columns
            if key_of(column.name) in fields and _fits(column, mechanism)
        ]
    return tuple(found)


def _fits(column: Column, mechanism: type[Mechanism] | None) -> bool:
    """Whether the motors of the axis, linear or rotary ones, have that column."""
    if mechanism is None or not column.machine:
        return True
    return (column.machine == "linear") == mechanism.drives_linear_motor


__all__ = [
    "DUTY_CYCLE_THAT_SPREADS",
    "INVERSE",
    "OPTIONS_THAT_SPREAD",
    "PARAMETER_OF",
    "PROPORTIONAL",
    "SHIFTED",
    "SURROUNDING_OF",
    "Target",
    "names_that_spread",
    "targets",
]
