"""The `inertias` table: parts from dimensions and material, summed into the axis."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.columns import Column
from actuator_sizing.case.model import ORIGINS, STATED, Entry
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.core.inertias import (
    Part,
    about_offset_axis,
    block_inertia,
    cylinder_inertia,
    cylinder_mass,
)
from actuator_sizing.core.mechanisms import LINEAR, Mechanism
from actuator_sizing.core.parameters import GearheadParameters
from actuator_sizing.units import si_unit

_TABLE = "inertias"
DRIVEN_SHAFT, LOAD, MOTOR = "driven shaft", "load", "motor"
_ROUND = ("solid cylinder", "hollow cylinder", "screw", "pulley", "coupling", "brake")
_SOLID = ("solid cylinder", "screw")


def understand_parts(
    parsed: ParsedTable | None, mechanism: type[Mechanism] | None, problems: ProblemList
) -> tuple[Part, ...]:
    """Find mass and inertia of every part.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table with each cell judged; None where there is none.
    mechanism : type of Mechanism or None
        What the parts belong to.
    problems : ProblemList
        Takes dimensions that are missing or contradict each other.
    """
    if parsed is None:
        return ()
    check_required(parsed)
    for column in parsed.table.columns:
        if isinstance(column.default, float):
            parsed.assume(column.key, _wants(parsed, column), column.default, column.assumed)
    found = [_part(parsed, index, mechanism, problems) for index in range(len(parsed))]
    return tuple(part for part in found if part is not None)


def _wants(parsed: ParsedTable, column: Column) -> np.ndarray:
    """Rows in which a default is used: a density only where neither mass nor inertia is stated."""
    if column.key != "density":
        return np.ones(len(parsed), dtype=bool)
    return np.asarray(np.isnan(parsed.number("mass")) & np.isnan(parsed.number("inertia")))


def _part(
    parsed: ParsedTable, index: int, mechanism: type[Mechanism] | None, problems: ProblemList
) -> Part | None:
    shape = str(parsed.text("shape")[index])
    place = str(parsed.text("referred_to")[index])
    if not shape or not place or any(bad[index] for bad in parsed.bad.values()):
        return None
    row = int(parsed.rows[index])

    def given(key: str) -> float:
        return float(parsed.number(key)[index])

    def wrong(key: str, got: str, allowed: str, remedy: str) -> None:
        problems.report(_TABLE, row, parsed.heading(key), got=got, allowed=allowed, remedy=remedy)

    missing = _missing(shape, given)
    if missing:
        wrong(missing, f"no value for a {shape} without stated inertia", "the dimensions that the shape needs",
              "State it, or the inertia itself.")  # fmt: skip
        return None
    if given("inner_diameter") >= given("diameter"):
        wrong("inner_diameter", parsed.shown_cell("inner_diameter", index),
              f"below the diameter of {parsed.shown_cell('diameter', index)}",
              "Exchange or correct them.")  # fmt: skip
        return None
    mass, inertia, rule = _mass_and_inertia(shape, given)
    if np.isnan(mass) and given("offset") > 0.0:
        wrong("mass", "an offset without a mass", "a mass, which turns about the offset axis",
              "State the mass, or the inertia about the axis itself.")  # fmt: skip
        return None
    if mechanism is not None and not _fits(mechanism, place, mass, wrong):
        return None
    inertia = about_offset_axis(inertia, mass, given("offset"))
    if given("offset") > 0.0 and shape not in ("point mass", "belt"):
        rule += " + m e²"
    count = given("count")
    name = str(parsed.text("part")[index])
    return Part(name, shape, place, mass * count, inertia * count, row, rule)


def _fits(mechanism: type[Mechanism], place: str, mass: float, wrong: object) -> bool:
    """Whether the axis has a place for the part; reports it where not."""
    assert callable(wrong)
    if place == LOAD and mechanism.coordinate == LINEAR and np.isnan(mass):
        wrong("mass", "no mass", "a mass: a load that moves straight has no inertia but mass",
              "State the mass, or its dimensions.")  # fmt: skip
        return False
    field = {LOAD: mechanism.load_parts_field, DRIVEN_SHAFT: mechanism.shaft_parts_field}.get(place, "motor")
    if not field or (place == MOTOR and mechanism.drives_linear_motor):
        wrong("referred_to", place, f"a place that a {mechanism.name} has",
              "Refer the part to another place, or state it with the quantities of the axis.")  # fmt: skip
        return False
    return True


def _missing(shape: str, given: object) -> str:
    """Key of a dimension that is needed and not there; empty where all are."""
    assert callable(given)

    def known(*keys: str) -> list[bool]:
        return [bool(np.isfinite(given(key))) for key in keys]

    if known("inertia")[0]:
        return ""
    needs = {"block": ["length", "width"], "point mass": ["mass"], "belt": ["mass", "diameter"]}.get(
        shape, ["diameter"]
    )
    if shape == "hollow cylinder":
        needs.append("inner_diameter")
    if not known("mass")[0]:
        needs.append("height" if shape == "block" else "length" if shape in _ROUND else "mass")
    return next((key for key in needs if not known(key)[0]), "")


def _mass_and_inertia(shape: str, given: object) -> tuple[float, float, str]:
    """Mass, inertia about the part's own axis, and the rule; the inertia of a point mass is in its offset."""
    assert callable(given)
    mass, stated = given("mass"), given("inertia")
    inner = 0.0 if shape in _SOLID else float(np.nan_to_num(given("inner_diameter")))
    if np.isnan(mass) and shape in _ROUND:
        mass = cylinder_mass(given("diameter"), inner, given("length"), given("density"))
    if np.isnan(mass) and shape == "block":
        mass = given("density") * given("length") * given("width") * given("height")
    if np.isfinite(stated):
        return mass, stated, "stated"
    if shape == "block":
        return mass, block_inertia(mass, given("length"), given("width")), "m (a² + b²)/12"
    if shape == "point mass":
        return mass, 0.0, "m e²"
    if shape == "belt":
        return mass, mass * (0.5 * given("diameter")) ** 2, "m r²"
    return mass, cylinder_inertia(mass, given("diameter"), inner), "m (D² + d²)/8"


def with_parts(mechanism: Mechanism, parts: Sequence[Part]) -> Mechanism:
    """Mechanism with the parts at load and driven shaft added to what is stated."""
    added: dict[str, float] = {}
    for part in parts:
        if part.referred_to == LOAD:
            amount = part.mass_kg if mechanism.coordinate == LINEAR else part.inertia_kg_m2
            added[mechanism.load_parts_field] = added.get(mechanism.load_parts_field, 0.0) + amount
        elif part.referred_to == DRIVEN_SHAFT:
            field = mechanism.shaft_parts_field
            added[field] = added.get(field, 0.0) + part.inertia_kg_m2
    if not added:
        return mechanism
    return replace(mechanism, **{field: getattr(mechanism, field) + more for field, more in added.items()})  # type: ignore[type-var]


def at_the_motor(gearheads: GearheadParameters, parts: Sequence[Part]) -> GearheadParameters:
    """Gearheads, direct drive included, with the parts between motor and gearhead added to their input."""
    added = sum(part.inertia_kg_m2 for part in parts if part.referred_to == MOTOR)
    return replace(gearheads, inertia_kg_m2=gearheads.inertia_kg_m2 + added) if added else gearheads


def table_entries(parsed: ParsedTable | None) -> list[Entry]:
    """Every value of a table of the case as entered and as understood."""
    if parsed is None:
        return []
    entries = []
    for index, name in enumerate(parsed.names):
        for column in parsed.table.columns:
            key = column.key
            if (column is parsed.table.columns[0] and not column.is_number) or key not in parsed.origins:
                continue
            origin = int(parsed.origins[key][index])
            if not origin:
                continue
            value = parsed.values[key][index]
            entries.append(
                Entry(
                    parsed.table.name,
                    int(parsed.rows[index]),
                    str(name),
                    column.name,
                    parsed.shown_cell(key, index) if origin == STATED else "",
                    float(value) if column.is_number else str(value),
                    si_unit(column.kind_for(LINEAR)) if column.is_number else "",
                    ORIGINS[origin],
                    parsed.rules[key].get(index, "") if key in parsed.rules else "",
                    "",
                )
            )
    return entries
