"""The `axis` table: one quantity per row, to mechanism, surroundings and options."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from actuator_sizing.case.cells import CellError, is_missing, parse_number, remedy_for, tidy
from actuator_sizing.case.columns import TEXT, WORDS, Column, allowed_text, find, nearest
from actuator_sizing.case.headings import understand_headings
from actuator_sizing.case.model import Entry
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.strength_columns import MECHANISM_STRENGTH
from actuator_sizing.case.tables import COMMON_QUANTITIES, TABLES, axis_quantities
from actuator_sizing.case.text_columns import OddCell
from actuator_sizing.case.words import canonical_word
from actuator_sizing.core.cable import cable_resistance
from actuator_sizing.core.mechanisms import MECHANISMS, ROTARY, SHAFT, Mechanism
from actuator_sizing.core.parameters import Surroundings
from actuator_sizing.errors import WARNING
from actuator_sizing.units import UnitError, parse_unit, si_unit, to_si

_TABLE = "axis"
_LONGEST_TEXT = 500
BUS_TOLERANCE = 0.10  # of the nominal bus voltage, where no limits are stated; usual mains tolerance
IN_SURROUNDINGS = frozenset(
    {"ambient_temperature", "altitude", "nominal_bus_voltage", "minimum_bus_voltage", "maximum_bus_voltage",
     "modulation_limit", "judged_winding_temperature", "current_loop_rise_time", "mechanism",
     "motor_cable_length", "motor_cable_cross_section", "lowest_ambient_temperature"}
)  # fmt: skip


@dataclass
class Axis:
    """What the `axis` table says.

    `values` holds SI numbers or words by key, None where nothing is known; `rows` the spreadsheet row.
    """

    mechanism: type[Mechanism] | None = None
    values: dict[str, float | str | None] = field(default_factory=dict)
    rows: dict[str, int] = field(default_factory=dict)
    entries: list[Entry] = field(default_factory=list)

    @property
    def coordinate(self) -> str:
        """``"linear"`` or ``"rotary"``, empty where the mechanism is not known."""
        return self.mechanism.coordinate if self.mechanism else ""

    @property
    def motion_coordinate(self) -> str:
        """Kind of the motion of the duty cycle: that of the load, or rotary at the driven shaft."""
        if self.mechanism is None or self.mechanism.drives_linear_motor:
            return self.coordinate
        at_shaft = (self.word("motion_stated_at") or self.mechanism.motion_at) == SHAFT
        return ROTARY if at_shaft else self.coordinate

    def number(self, key: str) -> float:
        """SI value, NaN where nothing is known."""
        value = self.values.get(key)
        return float(value) if isinstance(value, int | float) else np.nan

    def word(self, key: str) -> str:
        """Text or word, empty where nothing is known."""
        value = self.values.get(key)
        return value if isinstance(value, str) else ""


@dataclass(frozen=True)
class _Row:
    number: int
    name: str
    value: str
    unit: str
    source: str

    @property
    def as_entered(self) -> str:
        return f"{self.value} {self.unit}".strip()


def understand_axis(raw: RawTable, problems: ProblemList) -> Axis:
    """Understand every row of the `axis` table and put the defaults where nothing is stated.

    Parameters
    ----------
    raw : RawTable
        The table as it stands in the file.
    problems : ProblemList
        Takes what is wrong.
    """
    axis = Axis()
    rows = _rows(raw, problems)
    if rows is None:
        return axis
    axis.mechanism = _mechanism(rows, problems)
    known = axis_quantities(axis.mechanism)
    unknown: dict[str, _Row] = {}
    broken: set[str] = set()
    for row in rows:
        column = find(row.name, known)
        if column is None:
            _report_unknown(row, axis.mechanism, problems)
            unknown[row.name] = row
        elif column.key in axis.rows:
            problems.report(_TABLE, row.number, column.name,
                            got=f"{shown(row.as_entered)}, given before in row {axis.rows[column.key]}",
                            allowed="each quantity once", remedy="Remove one of the rows.")  # fmt: skip
        else:
            axis.rows[column.key] = row.number
            if not _take(axis, row, column, raw.decimal, problems):
                broken.add(column.key)
    _complete(axis, known, broken, unknown, problems)
    if "minimum_bus_voltage" not in broken and "maximum_bus_voltage" not in broken:
        _check(axis, problems)
    return axis


def _rows(raw: RawTable, problems: ProblemList) -> list[_Row] | None:
    headings = understand_headings(raw, TABLES[_TABLE], problems)
    for needed in ("quantity", "value"):
        if needed not in headings.known:
            problems.report(_TABLE, None, needed, got="no such column", allowed="a required column",
                            remedy="The axis table has the columns quantity, value, unit, source.")  # fmt: skip
            return None
    columns = {key: heading.index for key, heading in headings.known.items()}
    odd = {key: raw.columns[index].odd for key, index in columns.items()}
    rows = []
    for position, (number, cells) in enumerate(raw.records()):
        text = {key: cells[index].strip() for key, index in columns.items()}
        value: str = odd["value"].get(position, text["value"])
        if not text["quantity"]:
            problems.report(_TABLE, number, "quantity", got=f"a value {shown(value)} without a name",
                            allowed="the name of a quantity",
                            remedy="Name the quantity or clear the row.")  # fmt: skip
            continue
        rows.append(_Row(number, text["quantity"], value, text.get("unit", ""), text.get("source", "")))
    if not rows:
        problems.report(_TABLE, None, got="no rows below the headings", allowed="one row for each quantity",
                        remedy="Fill in the table.")  # fmt: skip
        return None
    return rows


def _mechanism(rows: list[_Row], problems: ProblemList) -> type[Mechanism] | None:
    column = COMMON_QUANTITIES[0]
    for row in rows:
        if find(row.name, (column,)):
            word = canonical_word(row.value, column.words)
            return MECHANISMS[word] if word else None
    return None


def _report_unknown(row: _Row, mechanism: type[Mechanism] | None, problems: ProblemList) -> None:
    everywhere = find(row.name, axis_quantities())
    if everywhere is not None and mechanism is not None:
        problems.report(_TABLE, row.number, row.name, got=f"a quantity that a {mechanism.name} does not have",
                        allowed="quantities of the chosen mechanism",
                        remedy="Nothing is calculated with it.", severity=WARNING)  # fmt: skip
        return
    close = nearest(row.name, (column.name for column in axis_quantities(mechanism)))
    problems.report(_TABLE, row.number, row.name[:60], got="an unknown quantity", allowed="a known quantity",
                    remedy=(f"Did you mean '{close}'? " if close else "")
                    + "Nothing is calculated with it.", severity=WARNING)  # fmt: skip


def _take(axis: Axis, row: _Row, column: Column, decimal: str, problems: ProblemList) -> bool:
    """Understand one value; False where it is wrong, which is then reported."""
    if not isinstance(row.value, OddCell) and is_missing(row.value):
        return True
    value: float | str | None
    if column.is_number:
        value = _number(row, column, decimal, problems, axis.coordinate or "linear")
        unit = si_unit(column.kind_for(axis.coordinate or "rotary"))
    else:
        value, unit = _word(row, column, problems), ""
    if value is None:
        return False
    axis.values[column.key] = value
    axis.entries.append(
        Entry(_TABLE, row.number, column.name, "value", row.as_entered, value, unit, "stated", "", row.source)
    )
    return True


def _number(row: _Row, column: Column, decimal: str, problems: ProblemList, coordinate: str) -> float | None:
    kind = column.kind_for(coordinate)
    unit_text = row.unit
    try:
        if not unit_text and column.needs_unit:
            problems.report(_TABLE, row.number, column.name, got=f"{shown(row.value)} without a unit",
                            allowed=f"a unit of {kind}",
                            remedy=f"Write the unit in the unit column, for example "
                            f"'{column.unit_for(coordinate) or si_unit(kind)}'.")  # fmt: skip
            return None
        unit = parse_unit(unit_text, kind)
    except UnitError as error:
        problems.report(_TABLE, row.number, column.name, got=f"the unit {shown(unit_text)}",
                        allowed=f"a unit of {kind}", remedy=str(error))  # fmt: skip
        return None
    try:
        text = row.value if isinstance(row.value, OddCell) else tidy(row.value)
        if kind == "ratio" and text.endswith("%"):
            value = parse_number(text[:-1], decimal)[0] * 0.01
        else:
            value = float(to_si(parse_number(text, decimal, fraction=column.fraction)[0], unit))
    except CellError as error:
        got = row.value.fault if isinstance(row.value, OddCell) else shown(row.value)
        allowed = error.allowed if error.allowed != "a number" else allowed_text(column, unit)
        problems.report(_TABLE, row.number, column.name, got=got, allowed=allowed,
                        remedy=remedy_for(error, column.default, column.assumed))  # fmt: skip
        return None
    slack = 1e-12 * abs(value)
    outside = value < column.minimum - slack or value > column.maximum + slack or not np.isfinite(value)
    not_whole = column.kind == "count" and value != round(value)
    if outside or not_whole or (column.positive and value <= 0.0):
        remedy = "Write a whole number." if not_whole else "Check the value and its unit."
        if column.kind == "ratio" and unit.factor == 1.0 and column.maximum <= 5.0 < value:
            remedy = "If it is meant in percent, write % in the unit column."
        problems.report(_TABLE, row.number, column.name, got=row.as_entered,
                        allowed=allowed_text(column, unit, value), remedy=remedy)  # fmt: skip
        return None
    return value


def _word(row: _Row, column: Column, problems: ProblemList) -> str | None:
    if column.kind == TEXT:
        if len(row.value) > _LONGEST_TEXT:
            problems.report(_TABLE, row.number, column.name, got=shown(row.value),
                            allowed=f"at most {_LONGEST_TEXT} characters",
                            remedy="Shorten the text.")  # fmt: skip
            return None
        return " ".join(row.value.split())
    words = column.words if column.kind == WORDS else ("yes", "no")
    word = canonical_word(row.value, words)
    if word is None:
        close = nearest(row.value, words)
        problems.report(_TABLE, row.number, column.name, got=shown(row.value), allowed=column.allowed(),
                        remedy=f"Did you mean '{close}'?" if close else "Write one of these words.")  # fmt: skip
    return word


def _complete(
    axis: Axis,
    known: tuple[Column, ...],
    broken: set[str],
    unknown: Mapping[str, _Row],
    problems: ProblemList,
) -> None:
    """Report required quantities that are missing, and put the defaults in."""
    mine = known if axis.mechanism else COMMON_QUANTITIES
    for column in mine:
        if column.key in axis.values or column.key in broken:
            continue
        unit = si_unit(column.kind_for(axis.coordinate or "rotary")) if column.is_number else ""
        if column.required:
            close = next((row for row in unknown.values() if nearest(row.name, (column.name,))), None)
            remedy = f"Add a row '{column.name}', for example {column.example_for('rotary')} " \
                     f"{column.unit_for('rotary')}".rstrip() + "."  # fmt: skip
            if close is not None:
                remedy = f"Is '{close.name}' in row {close.number} meant? Then rename it to '{column.name}'."
            problems.report(_TABLE, axis.rows.get(column.key), column.name, got="no value",
                            allowed=column.allowed(axis.coordinate or "rotary"), remedy=remedy)  # fmt: skip
        elif column.default is not None:
            _assume(axis, column.name, column.key, column.default, unit, column.assumed)
            if column.key == "inclination" and column.default == 0.0:  # upright, as of a winch, hides no load
                problems.report(_TABLE, axis.rows.get(column.key), column.name, got="no value, taken as level",
                                allowed="an angle: it decides the load of gravity",
                                remedy="State 0 if the axis is level.", severity=WARNING)  # fmt: skip
    if axis.mechanism is not None and axis.mechanism.motion_at == SHAFT:
        if "motion_stated_at" not in axis.values and "motion_stated_at" not in broken:
            _assume(axis, "motion stated at", "motion_stated_at", SHAFT, "", "usual for this mechanism")
    nominal = axis.number("nominal_bus_voltage")
    if np.isfinite(nominal):
        for key, factor, sign in (("minimum_bus_voltage", 1.0 - BUS_TOLERANCE, "−"),
                                  ("maximum_bus_voltage", 1.0 + BUS_TOLERANCE, "+")):  # fmt: skip
            if key not in axis.values and key not in broken:
                name = key.replace("_", " ")
                rule = f"nominal bus voltage {sign}{BUS_TOLERANCE:.0%}".replace("%", " %")
                _assume(axis, name, key, nominal * factor, "V", rule)


def _assume(axis: Axis, name: str, key: str, value: float | str, unit: str, rule: str) -> None:
    axis.values[key] = value
    axis.entries.append(
        Entry(_TABLE, axis.rows.get(key), name, "value", "", value, unit, "assumed", rule, "")
    )


def _check(axis: Axis, problems: ProblemList) -> None:
    """Compare quantities that must not contradict each other."""
    low, nominal, high = (axis.number(f"{which}_bus_voltage") for which in ("minimum", "nominal", "maximum"))
    for key, value, wrong, side in (
        ("minimum_bus_voltage", low, low > nominal, "at most"),
        ("maximum_bus_voltage", high, high < nominal, "at least"),
    ):
        if wrong:
            problems.report(_TABLE, axis.rows.get(key), key.replace("_", " "), got=f"{value:g} V",
                            allowed=f"{side} the nominal bus voltage of {nominal:g} V",
                            remedy="Check the three bus voltages.")  # fmt: skip
    coldest, ambient = axis.number("lowest_ambient_temperature"), axis.number("ambient_temperature")
    if coldest > ambient:
        problems.report(_TABLE, axis.rows.get("lowest_ambient_temperature"), "lowest ambient temperature",
                        got=f"{coldest:g} °C", allowed=f"at most the ambient temperature of {ambient:g} °C",
                        remedy="Check both temperatures.")  # fmt: skip
    threshold = axis.number("chopper_threshold")
    if threshold < high:
        problems.report(_TABLE, axis.rows.get("chopper_threshold"), "chopper threshold",
                        got=f"{threshold:g} V", allowed=f"above the maximum bus voltage of {high:g} V",
                        remedy="Below it the chopper burns power from the supply.", severity=WARNING)  # fmt: skip
    hysteresis = axis.number("chopper_hysteresis")
    if hysteresis >= threshold:
        problems.report(_TABLE, axis.rows.get("chopper_hysteresis"), "chopper hysteresis",
                        got=f"{hysteresis:g} V", allowed=f"below the chopper threshold of {threshold:g} V",
                        remedy="It is a difference, not the voltage at which it switches off.")  # fmt: skip
    length, section = (axis.number(f"motor_cable_{which}") for which in ("length", "cross_section"))
    if np.isnan(length) != np.isnan(section):
        known, other = ("length", "cross-section") if np.isnan(section) else ("cross-section", "length")
        problems.report(_TABLE, axis.rows.get(f"motor_cable_{known.replace('-', '_')}"), f"motor cable {known}",
                        got=f"no motor cable {other}", allowed="both of them, or neither",
                        remedy=f"Add the motor cable {other}; one alone gives no resistance.")  # fmt: skip
    stated = axis.rows
    if axis.number("screw_root_diameter") >= axis.number("screw_diameter"):
        problems.report(_TABLE, stated.get("screw_root_diameter"), "screw root diameter",
                        got=f"{1e3 * axis.number('screw_root_diameter'):g} mm",
                        allowed=f"below the screw diameter of {1e3 * axis.number('screw_diameter'):g} mm",
                        remedy="Check both diameters and their units.")  # fmt: skip
    diameters = axis.number("screw_diameter"), axis.number("thread_mean_diameter")
    if np.isfinite(axis.number("thread_friction_coefficient")) and np.isnan(diameters).all():
        problems.report(_TABLE, stated.get("thread_friction_coefficient"), "thread friction coefficient",
                        got="no screw diameter", allowed="a screw diameter, which gives the lead angle",
                        remedy="Add the screw diameter, or state the efficiency instead.")  # fmt: skip
    lead_screw = axis.mechanism is not None and axis.mechanism.name == "lead screw"
    if lead_screw and "thread_friction_coefficient" not in stated and "efficiency" not in stated:
        problems.report(_TABLE, None, "efficiency", got="neither efficiency nor thread friction coefficient",
                        allowed="one of them for a lead screw",
                        remedy="A sliding screw loses much: state its efficiency or its friction.")  # fmt: skip


def surroundings_of(axis: Axis) -> Surroundings:
    """Supply and surroundings of a complete axis."""
    cable = cable_resistance(axis.number("motor_cable_length"), axis.number("motor_cable_cross_section"))
    return Surroundings(
        ambient_degc=axis.number("ambient_temperature"),
        altitude_m=axis.number("altitude"),
        bus_nominal_v=axis.number("nominal_bus_voltage"),
        bus_min_v=axis.number("minimum_bus_voltage"),
        bus_max_v=axis.number("maximum_bus_voltage"),
        modulation_limit=axis.number("modulation_limit"),
        judged_winding_degc=axis.number("judged_winding_temperature"),
        current_loop_rise_s=axis.number("current_loop_rise_time"),
        cable_ohm=float(np.nan_to_num(cable)),
        lowest_ambient_degc=axis.number("lowest_ambient_temperature"),
    )


def options_of(axis: Axis) -> dict[str, float | str | None]:
    """Quantities that neither the mechanism nor the surroundings hold, by name."""
    strength = MECHANISM_STRENGTH.get(axis.mechanism.name, ()) if axis.mechanism else ()
    return {
        column.name: axis.values.get(column.key)
        for column in (*COMMON_QUANTITIES, *strength)
        if column.key not in IN_SURROUNDINGS
    }
