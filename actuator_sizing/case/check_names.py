"""Names of the checks for the table `limits`, and how each is judged where that table is silent."""

from __future__ import annotations

CHECK_NAMES: tuple[tuple[str, str], ...] = (
    ("speed_torque", "peak torque over speed"),
    ("rms_current", "RMS current"),
    ("winding_temperature", "winding temperature"),
    ("motor_peak_current", "motor peak current"),
    ("motor_speed", "motor speed"),
    ("voltage", "voltage"),
    ("jam_temperature", "winding after a jam"),
    ("stops_temperature", "winding after stops in a row"),
    ("standstill_hold", "hottest phase while holding"),
    ("motor_demagnetisation", "demagnetisation"),
    ("brush_life", "life of the brushes"),
    ("drive_continuous_current", "drive continuous current"),
    ("drive_peak_current", "drive peak current"),
    ("drive_peak_time", "drive peak time"),
    ("drive_bus_voltage", "drive bus voltage range"),
    ("drive_standstill_current", "drive current at standstill"),
    ("drive_output_frequency", "electrical frequency"),
    ("drive_load_inductance", "load inductance"),
    ("pwm_ripple_loss", "loss by PWM ripple"),
    ("cable_voltage_drop", "voltage drop of the motor cable"),
    ("bus_maximum_voltage", "highest bus voltage"),
    ("chopper_release", "chopper release voltage"),
    ("bus_sag", "voltage on a sagging bus"),
    ("bus_minimum_voltage", "lowest bus voltage"),
    ("brake_resistor_value", "brake resistor value"),
    ("brake_resistor_peak_power", "brake resistor peak power"),
    ("brake_resistor_mean_power", "brake resistor mean power"),
    ("brake_resistor_pulse_energy", "brake resistor pulse energy"),
    ("supply_mean_power", "supply mean power"),
    ("supply_peak_power", "supply peak power"),
    ("supply_charging_current", "supply charging current"),
    ("gearhead_equivalent_torque", "gearhead equivalent torque"),
    ("gearhead_peak_torque", "gearhead peak torque"),
    ("gearhead_mean_speed", "gearhead mean input speed"),
    ("gearhead_maximum_speed", "gearhead maximum input speed"),
    ("gearhead_thermal_power", "gearhead thermal power"),
    ("gearhead_life", "gearhead life"),
    ("shaft_radial_force", "radial force on the shaft"),
    ("shaft_axial_force", "axial force on the shaft"),
    ("shaft_bearing_life", "life of the shaft bearings"),
    ("screw_critical_speed", "critical speed of the screw"),
    ("screw_dn_value", "DN value of the screw"),
    ("screw_buckling", "buckling of the screw"),
    ("screw_static_load", "static load of the screw"),
    ("screw_life", "life of the screw"),
    ("screw_pressure_speed", "pressure times speed of the nut"),
    ("belt_tension", "belt tension"),
    ("belt_teeth", "belt teeth in mesh"),
    ("rack_force", "tooth force of the rack"),
    ("coupling_torque", "coupling torque"),
    ("stop_controlled", "controlled stop"),
    ("stop_shorted", "stop by shorted winding"),
    ("stop_brake", "stop by the holding brake"),
    ("motor_shorted_current", "short-circuit current"),
    ("gearhead_emergency_torque", "gearhead emergency torque"),
    ("gearhead_jam_torque", "gearhead torque in a jam"),
    ("holding_brake_static", "holding brake torque"),
    ("holding_brake_energy", "holding brake energy"),
    ("drop_distance", "drop distance"),
    ("holding_brake_wear", "wear of the holding brake"),
    ("holding_brake_stops", "stops of the holding brake"),
    ("inertia_ratio", "inertia ratio"),
    ("settling", "settling within dwell"),
    ("following_error", "following error"),
    ("stability_reserve", "stability reserve"),
    ("resonance", "resonance against bandwidth"),
)

#: Judged as advice unless the limits table says otherwise: rules of thumb, and events that need not be possible.
ADVICE_CHECKS = (
    "pwm_ripple_loss",
    "cable_voltage_drop",
    "stop_shorted",
    "stop_brake",
    "motor_shorted_current",
    "standstill_hold",
    "gearhead_emergency_torque",
    "gearhead_jam_torque",
    "inertia_ratio",
)
#: Parts fit or do not; a reserve would mean nothing.
FITTING_CHECKS = ("drive_bus_voltage", "drive_load_inductance", "chopper_release", "brake_resistor_value")
DEFAULT_ALLOWED_UTILISATION = 1.0
DEFAULT_RECOMMENDED_RESERVE = 0.1
#: Checks whose common practice keeps a distance: a screw turns at up to 80 % of its critical speed, is loaded to half
#: its buckling force and to two thirds of its static rating.
ALLOWED_UTILISATIONS = {"screw_critical_speed": 0.8, "screw_buckling": 0.5, "screw_static_load": 2.0 / 3.0}
#: Checks whose common practice differs: a bus may come within 5 % of the trip, a holding brake has 1.5 times the
#: torque of the load.
RECOMMENDED_RESERVES = {
    **dict.fromkeys(FITTING_CHECKS, 0.0),
    "bus_maximum_voltage": 0.05,
    "holding_brake_static": 0.33,
}
