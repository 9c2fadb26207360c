"""Drives: checks of each row and `DriveParameters`."""

from __future__ import annotations

import numpy as np

from actuator_sizing.case.catalogs import assume_default, check_order, check_required
from actuator_sizing.case.model import ASSUMED
from actuator_sizing.case.motor_constants import convert_ampere
from actuator_sizing.case.motors import word_codes
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.core.parameters import COMMUTATIONS, CURRENT_BASES, DriveParameters


def understand_drives(parsed: ParsedTable) -> DriveParameters:
    """Check the rows against themselves and derive what the equations need.

    Parameters
    ----------
    parsed : ParsedTable
        The table `drives`; derived and assumed values are added to it.

    Returns
    -------
    DriveParameters
        One entry per row; NaN where nothing is known.
    """
    check_required(parsed)
    basis = word_codes(parsed, "current_basis", CURRENT_BASES)
    for key in ("continuous_current", "peak_current", "standstill_current"):
        convert_ampere(parsed, key, basis)
    check_order(parsed, "continuous_current", "peak_current",
                remedy="Check both values and the ampere (DC, rms, peak) each one means.")  # fmt: skip
    check_order(parsed, "minimum_bus_voltage", "maximum_bus_voltage", strict=True,
                remedy="Check both voltages; they are DC bus voltages, not mains voltages.")  # fmt: skip
    check_order(parsed, "chopper_threshold", "maximum_bus_voltage",
                remedy="The chopper must act before the drive switches off.")  # fmt: skip
    check_order(parsed, "chopper_hysteresis", "chopper_threshold", strict=True,
                remedy="It is a difference, not the voltage at which the chopper switches off.")  # fmt: skip
    assume_default(parsed, "continuous_rating_ambient")
    _assume_commutation(parsed)
    served = [
        np.array([word in text.split(", ") for text in parsed.text("commutation")], dtype=bool)
        for word in COMMUTATIONS
    ]
    number = parsed.number
    return DriveParameters(
        current_basis=basis,
        serves_brushed=served[0],
        serves_six_step=served[1],
        serves_sinusoidal=served[2],
        continuous_current_a=number("continuous_current"),
        continuous_ambient_degc=number("continuous_rating_ambient"),
        peak_current_a=number("peak_current"),
        peak_time_s=number("peak_time"),
        rms_window_s=number("rms_window"),
        bus_voltage_min_v=number("minimum_bus_voltage"),
        bus_voltage_max_v=number("maximum_bus_voltage"),
        capacitance_f=number("internal_capacitance"),
        chopper_threshold_v=number("chopper_threshold"),
        brake_resistor_min_ohm=number("minimum_brake_resistor"),
        efficiency=number("efficiency"),
        mass_kg=number("mass"),
        price=number("price"),
    )


def _assume_commutation(parsed: ParsedTable) -> None:
    """Put in which motors a drive feeds where the sheet does not say: DC amperes mean brushed and six-step."""
    words, basis = parsed.text("commutation"), parsed.text("current_basis")
    unknown = (words == "") & (basis != "") & ~parsed.is_bad("commutation")
    for rows, word in (
        (unknown & (basis == "DC"), "brushed, six-step"),
        (unknown & (basis != "DC"), "sinusoidal"),
    ):
        words[rows] = word
        parsed.origins["commutation"][rows] = ASSUMED
        if rows.any():
            parsed.note_rule("commutation", rows, "by the current basis of the drive")
