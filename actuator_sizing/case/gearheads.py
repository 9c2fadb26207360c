"""Gearheads, with direct drive as the first row."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from actuator_sizing.case.catalogs import assume_default, check_order, check_required
from actuator_sizing.case.columns import Table
from actuator_sizing.case.model import DERIVED, MISSING
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.text_columns import RowRules, TextColumn
from actuator_sizing.core.parameters import GearheadParameters

DIRECT_RULE = "direct drive, no gearhead"
_DIRECT = {"ratio": 1.0, "efficiency": 1.0, "back_driving_efficiency": 1.0, "no_load_running_torque": 0.0,
           "inertia_at_input": 0.0, "backlash": 0.0, "mass": 0.0, "price": 0.0}  # fmt: skip


def understand_gearheads(
    parsed: ParsedTable | None, table: Table, direct_drive: bool, problems: ProblemList
) -> tuple[ParsedTable, GearheadParameters]:
    """Check the rows, derive what is missing, and put direct drive first.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table `gearheads`; None where the case has none.
    table : Table
        Its declaration.
    direct_drive : bool
        Whether a set without gearhead is a candidate.
    problems : ProblemList
        Takes what is wrong.

    Returns
    -------
    ParsedTable, GearheadParameters
        The table with all derived values, and the same as the equations take it.
    """
    if parsed is None:
        parsed = ParsedTable(table, np.zeros(0, dtype=np.int64), problems)
    else:
        _derive(parsed)
    if direct_drive:
        parsed = _with_direct_drive(parsed)
    number = parsed.number
    direct = np.zeros(len(parsed), dtype=bool)
    direct[:1] = direct_drive
    return parsed, GearheadParameters(
        is_direct=direct,
        ratio=number("ratio"),
        efficiency=number("efficiency"),
        efficiency_back=number("back_driving_efficiency"),
        no_load_torque_nm=number("no_load_running_torque"),
        inertia_kg_m2=number("inertia_at_input"),
        continuous_torque_nm=number("continuous_torque"),
        peak_torque_nm=number("peak_torque"),
        emergency_torque_nm=number("emergency_stop_torque"),
        speed_mean_max_rad_s=number("mean_input_speed"),
        speed_max_rad_s=number("maximum_input_speed"),
        stiffness_nm_per_rad=number("torsional_stiffness"),
        backlash_rad=number("backlash"),
        mass_kg=number("mass"),
        price=number("price"),
    )


def _derive(parsed: ParsedTable) -> None:
    check_required(parsed)
    check_order(parsed, "continuous_torque", "peak_torque", remedy="Check both values and their units.")
    check_order(parsed, "peak_torque", "emergency_stop_torque", remedy="Check both values and their units.")
    check_order(
        parsed, "mean_input_speed", "maximum_input_speed", remedy="Check both values and their units."
    )
    back, forward = parsed.number("back_driving_efficiency"), parsed.number("efficiency")
    with np.errstate(invalid="ignore", divide="ignore"):
        above = (back > forward * (1.0 + 1e-9)) & parsed.stated("back_driving_efficiency")
        parsed.problems.report_rows(
            parsed.table.name,
            parsed.rows,
            parsed.heading("back_driving_efficiency"),
            above,
            got=lambda i: parsed.shown_cell("back_driving_efficiency", i),
            allowed=lambda i: f"at most the efficiency of {parsed.shown_cell('efficiency', i)}",
            remedy="Check whether the two are exchanged.",
        )
        everywhere = np.ones(len(parsed), dtype=bool)
        parsed.derive("back_driving_efficiency", everywhere, 2.0 - 1.0 / forward,
                      "2 − 1/efficiency: equal friction loss both ways")  # fmt: skip
    assume_default(parsed, "inertia_at_input")
    parsed.assume("no_load_running_torque", everywhere, 0.0, "not stated: none counted")


def _with_direct_drive(parsed: ParsedTable) -> ParsedTable:
    """Return the same table with the row for direct drive in front."""
    for column in parsed.table.columns:  # every declared column exists from here on
        if column.is_number:
            parsed.number(column.key)
        else:
            parsed.text(column.key)
    count = len(parsed) + 1
    first = np.arange(count) == 0
    values, origins, rules = {}, {}, {}
    for key, column_values in parsed.values.items():
        head = (
            np.array([_DIRECT.get(key, np.nan)]) if column_values.dtype != object else np.array([""], object)
        )
        values[key] = np.concatenate([head, column_values])
        origin = DERIVED if key in _DIRECT else MISSING
        origins[key] = np.concatenate([np.array([origin], dtype=np.int8), parsed.origins[key]])
        shifted = RowRules(count)
        if key in parsed.rules:
            for text, mask in parsed.rules[key].masks():
                shifted.set(np.concatenate([[False], mask]), text)
        if key in _DIRECT:
            shifted.set(first, DIRECT_RULE)
        rules[key] = shifted
    texts = {key: _shifted_text(text) for key, text in parsed.texts.items()}
    return replace(
        parsed,
        rows=np.concatenate([[0], parsed.rows]),
        names=("", *parsed.names),
        values=values,
        origins=origins,
        rules=rules,
        texts=texts,
        bad={key: np.concatenate([[False], bad]) for key, bad in parsed.bad.items()},
    )


def _shifted_text(text: TextColumn) -> TextColumn:
    return TextColumn(["", *text])
