"""Motors: from the conventions of the sheet to `MotorParameters`, every derived value with its rule."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.catalogs import (
    assume_default,
    check_one_of,
    check_order,
    check_required,
    note_rows,
    warn_rows,
)
from actuator_sizing.case.motor_constants import derive_constants
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.core.conventions import (
    copper_coefficient,
    friction_from_no_load,
    model_factor,
    thermal_resistance_from_rating,
)
from actuator_sizing.core.materials import MAGNET_COEFFICIENTS_PER_K, THERMAL_CLASSES
from actuator_sizing.core.parameters import (
    BASIS_DC,
    BRUSHED,
    COMMUTATIONS,
    CURRENT_BASES,
    SINUSOIDAL,
    SIX_STEP,
    MotorParameters,
)

BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int8]


def word_codes(parsed: ParsedTable, key: str, words: tuple[str, ...]) -> IntArray:
    """Index of each row's word in `words`; 0 where none is known (an error was reported)."""
    codes = np.zeros(len(parsed), dtype=np.int8)
    for code, word in enumerate(words):
        codes[parsed.word_is(key, word)] = code
    return codes


def understand_motors(parsed: ParsedTable) -> MotorParameters:
    """Check the rows against themselves and derive what the equations need.

    Parameters
    ----------
    parsed : ParsedTable
        The table `motors`; derived and assumed values are added to it.

    Returns
    -------
    MotorParameters
        One entry per row; NaN where nothing can be derived.
    """
    linear = _machine_of_rows(parsed)
    relevant = {"linear": linear, "rotary": ~linear, "": np.ones(len(parsed), dtype=bool)}
    check_required(parsed, relevant)
    check_one_of(parsed, relevant)
    commutation = word_codes(parsed, "commutation", COMMUTATIONS)
    basis = word_codes(parsed, "current_basis", CURRENT_BASES)
    _check_basis(parsed, commutation, basis)
    derive_constants(parsed, linear, commutation, basis)
    _check_rows(parsed, linear)
    _derive_temperatures(parsed)
    _derive_friction(parsed, linear)
    _derive_ratings(parsed, linear)
    resistance = parsed.number("resistance_terminal_to_terminal") * model_factor(basis)
    _derive_thermal(parsed, resistance)

    def side(rotary: str, straight: str) -> NDArray[np.float64]:
        return np.where(linear, parsed.number(straight), parsed.number(rotary))

    number = parsed.number
    reactive = commutation == SINUSOIDAL
    with np.errstate(invalid="ignore", divide="ignore"):
        poles = np.where(linear, np.pi / number("pole_pitch"), number("pole_pairs"))
    return MotorParameters(
        is_linear=linear,
        commutation=commutation,
        current_basis=basis,
        resistance_ohm=resistance,
        resistance_reference_degc=number("resistance_temperature"),
        resistance_coefficient_per_k=number("resistance_temperature_coefficient"),
        inductance_h=number("inductance_terminal_to_terminal") * model_factor(basis),
        torque_constant_nm_per_a=side("torque_constant", "force_constant"),
        magnet_reference_degc=number("magnet_reference_temperature"),
        magnet_coefficient_per_k=number("magnet_temperature_coefficient"),
        pole_pairs=np.where(reactive, poles, np.nan),
        rotor_inertia_kg_m2=np.where(
            linear,
            number("moving_mass"),
            number("rotor_inertia") + np.nan_to_num(number("brake_inertia"), nan=0.0),
        ),
        friction_torque_nm=side("friction_torque", "friction_force"),
        viscous_friction_nm_s=side("viscous_friction", "linear_viscous_friction"),
        continuous_current_a=number("continuous_current"),
        continuous_ambient_degc=number("continuous_rating_ambient"),
        peak_current_a=number("peak_current"),
        peak_torque_nm=side("peak_torque", "peak_force"),
        speed_max_rad_s=side("maximum_speed", "maximum_linear_speed"),
        winding_limit_degc=number("winding_temperature_limit"),
        thermal_resistance_winding_k_w=number("thermal_resistance_winding_housing"),
        thermal_resistance_housing_k_w=number("thermal_resistance_housing_ambient"),
        winding_time_constant_s=number("winding_time_constant"),
        housing_time_constant_s=number("housing_time_constant"),
        brake_torque_nm=side("brake_torque", "brake_force"),
        brake_coil_w=np.nan_to_num(number("brake_coil_power"), nan=0.0),
        nominal_voltage_v=number("nominal_voltage"),
        mass_kg=number("mass"),
        price=number("price"),
    )


def _machine_of_rows(parsed: ParsedTable) -> BoolArray:
    """Rows of linear motors: those that fill a column which only a linear motor has."""
    filled = {"linear": np.zeros(len(parsed), dtype=bool), "rotary": np.zeros(len(parsed), dtype=bool)}
    first: dict[str, str] = {}
    for column in parsed.table.columns:
        if column.machine and column.key in parsed.headings and column.is_number:
            given = parsed.stated(column.key) | parsed.is_bad(column.key)
            filled[column.machine] |= given
            if given.any():
                first.setdefault(column.machine, column.key)
    both = filled["linear"] & filled["rotary"]
    if both.any():
        parsed.problems.report_rows(
            parsed.table.name,
            parsed.rows,
            parsed.heading(first["linear"]),
            both,
            got=f"values of a linear motor beside '{parsed.heading(first['rotary'])}' of a rotary one",
            allowed="one kind of machine in a row",
            remedy="Clear the columns that do not belong to this motor.",
        )
    return filled["linear"] & ~filled["rotary"]


def _check_basis(parsed: ParsedTable, commutation: IntArray, basis: IntArray) -> None:
    """A brushed or six-step motor has direct current; rms and peak belong to sinusoidal machines."""
    known = parsed.stated("current_basis") & parsed.stated("commutation")
    wrong = known & (basis != BASIS_DC) & ((commutation == BRUSHED) | (commutation == SIX_STEP))
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        parsed.heading("current_basis"),
        wrong,
        got=lambda i: f"{CURRENT_BASES[basis[i]]} for a {COMMUTATIONS[commutation[i]]} motor",
        allowed="DC for brushed and six-step motors",
        remedy="State the direct (block) current, or set the commutation to sinusoidal if the sheet's "
        "amperes are of a sine.",
    )
    odd = known & (basis == BASIS_DC) & (commutation == SINUSOIDAL)
    note_rows(parsed, "current_basis", odd, "for a sinusoidal motor taken as its six-step equivalent")


def _check_rows(parsed: ParsedTable, linear: BoolArray) -> None:
    """Compare values of a row that must not contradict each other."""
    check = "Check both values and the ampere (DC, rms, peak) each one means."
    check_order(parsed, "continuous_current", "peak_current", remedy=check)
    check_order(parsed, "continuous_torque", "peak_torque", remedy="Check both values and their units.")
    check_order(parsed, "continuous_force", "peak_force", remedy="Check both values and their units.")
    check_order(parsed, "continuous_rating_ambient", "winding_temperature_limit", strict=True,
                remedy="Check both temperatures.")  # fmt: skip
    with np.errstate(invalid="ignore"):
        swapped = parsed.number("winding_time_constant") > parsed.number("housing_time_constant")
    warn_rows(parsed, "winding_time_constant", swapped, "longer than the housing time constant",
              "Check whether the two are exchanged, or seconds and minutes mixed up.")  # fmt: skip


def _derive_temperatures(parsed: ParsedTable) -> None:
    everywhere = np.ones(len(parsed), dtype=bool)
    assume_default(parsed, "resistance_temperature")
    assume_default(parsed, "continuous_rating_ambient")
    reference = parsed.number("resistance_temperature")
    with np.errstate(divide="ignore", invalid="ignore"):
        parsed.assume("resistance_temperature_coefficient", everywhere, copper_coefficient(reference),
                      "copper, 1/(235 K + reference temperature), IEC 60034-1")  # fmt: skip
    parsed.assume("magnet_reference_temperature", everywhere, reference, "the resistance temperature")
    for name, limit in THERMAL_CLASSES.items():
        parsed.derive("winding_temperature_limit", parsed.word_is("thermal_class", name), limit,
                      f"thermal class {name}, IEC 60085")  # fmt: skip
    for material, coefficient in MAGNET_COEFFICIENTS_PER_K.items():
        parsed.derive("magnet_temperature_coefficient", parsed.word_is("magnet_material", material),
                      coefficient, f"typical for {material}")  # fmt: skip
    none = parsed.word_is("magnet_material", "none")
    parsed.derive("magnet_temperature_coefficient", none, 0.0, "no magnets")
    parsed.assume("magnet_temperature_coefficient", everywhere, 0.0,
                  "magnet not known: no change with temperature counted")  # fmt: skip
    with np.errstate(invalid="ignore"):
        cold = parsed.number("winding_temperature_limit") <= parsed.number("continuous_rating_ambient")
    cold &= parsed.stated("winding_temperature_limit") & ~parsed.stated("continuous_rating_ambient")
    warn_rows(parsed, "winding_temperature_limit", cold, "at or below the ambient of the rating",
              "Check the temperature and its unit.")  # fmt: skip


def _derive_friction(parsed: ParsedTable, linear: BoolArray) -> None:
    constant, current = parsed.number("torque_constant"), parsed.number("no_load_current")
    viscous = parsed.number("viscous_friction").copy()
    split = np.isfinite(viscous) & np.isfinite(parsed.number("no_load_speed"))
    friction = friction_from_no_load(constant, current, parsed.number("no_load_speed"), viscous)
    parsed.derive("friction_torque", ~linear & split, friction, "K·I0 less the viscous part at no-load speed")
    parsed.derive("friction_torque", ~linear, friction, "K·I0, all counted as constant friction")
    for key, rows in (("friction_torque", ~linear), ("viscous_friction", ~linear),
                      ("friction_force", linear), ("linear_viscous_friction", linear)):  # fmt: skip
        parsed.assume(key, rows, 0.0, "not stated: none counted")


def _derive_ratings(parsed: ParsedTable, linear: BoolArray) -> None:
    for rows, constant, continuous, peak in (
        (~linear, "torque_constant", "continuous_torque", "peak_torque"),
        (linear, "force_constant", "continuous_force", "peak_force"),
    ):
        K = parsed.number(constant)
        with np.errstate(divide="ignore", invalid="ignore"):
            word = constant.replace("_", " ")
            parsed.derive("continuous_current", rows, parsed.number(continuous) / K,
                          f"{continuous.replace('_', ' ')} over {word}")  # fmt: skip
            parsed.derive(continuous, rows, parsed.number("continuous_current") * K,
                          f"continuous current times {word}")  # fmt: skip
            parsed.derive("peak_current", rows, parsed.number(peak) / K,
                          f"{peak.replace('_', ' ')} over {word}")  # fmt: skip


def _derive_thermal(parsed: ParsedTable, resistance: NDArray[np.float64]) -> None:
    """Thermal resistances from the rated point, where the sheet does not state both."""
    total = thermal_resistance_from_rating(
        resistance,
        parsed.number("resistance_temperature"),
        parsed.number("resistance_temperature_coefficient"),
        parsed.number("continuous_current"),
        parsed.number("winding_temperature_limit"),
        parsed.number("continuous_rating_ambient"),
    )
    inner, outer = "thermal_resistance_winding_housing", "thermal_resistance_housing_ambient"
    known_inner, known_outer = np.isfinite(parsed.number(inner)), np.isfinite(parsed.number(outer))
    rule = "rated point, ΔT = R_th·R(limit)·I²"
    with np.errstate(invalid="ignore"):
        for key, other, rows in ((outer, inner, known_inner & ~known_outer),
                                 (inner, outer, known_outer & ~known_inner)):  # fmt: skip
            rest = total - parsed.number(other)
            stated_only = rows & (rest <= 0.0)
            parsed.derive(key, rows & (rest > 0.0), rest, f"{rule}, less the stated part")
            warn_rows(parsed, other, stated_only, "more than the continuous rating allows in total",
                      "Check it against continuous current, resistance and temperature limit.")  # fmt: skip
    parsed.derive(inner, ~known_inner & ~known_outer, total, f"{rule}; total to ambient")
