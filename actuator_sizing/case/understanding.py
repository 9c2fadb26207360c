"""From raw tables to a Case: every table understood, all problems at once."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from actuator_sizing.case.axis import Axis, options_of, surroundings_of
from actuator_sizing.case.catalogs import to_catalog
from actuator_sizing.case.columns import Column
from actuator_sizing.case.courses import side_tables
from actuator_sizing.case.cycles import understand_cycles
from actuator_sizing.case.drives import understand_drives
from actuator_sizing.case.duty_types import check_turns
from actuator_sizing.case.fingerprint import fingerprint
from actuator_sizing.case.gearheads import understand_gearheads
from actuator_sizing.case.inertias import at_the_motor, table_entries, understand_parts, with_parts
from actuator_sizing.case.judging import understand_limits
from actuator_sizing.case.measured_motion import check_recorded_motion
from actuator_sizing.case.measuring import understand_recording
from actuator_sizing.case.mechanics import build_mechanism, check_motion, understand_map
from actuator_sizing.case.model import MISSING, ORIGINS, STATED, Case, Catalog, Cycle, Entry
from actuator_sizing.case.motion import motion_entries
from actuator_sizing.case.motors import understand_motors
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.parsing import parse_table
from actuator_sizing.case.partners import understand_partners
from actuator_sizing.case.plausible_motion import check_plausible
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.resistor import understand_pulses
from actuator_sizing.case.spreads import understand_tolerances
from actuator_sizing.case.tables import TABLES, table_for
from actuator_sizing.core.mechanisms import SHAFT
from actuator_sizing.errors import NOTE
from actuator_sizing.units import si_unit


def understand(
    raw: Mapping[str, RawTable], axis: Axis, problems: ProblemList, name: str, path: Path | None
) -> Case | None:
    """Understand every table of a case.

    Parameters
    ----------
    raw : mapping of str to RawTable
        Tables as they stand in the files.
    axis : Axis
        The `axis` table, already understood (it names the catalog folder).
    problems : ProblemList
        Takes everything that is wrong.
    name : str
        Name of the case.
    path : Path or None
        Where it was read from.

    Returns
    -------
    Case or None
        None where there are errors.
    """
    parsed = {
        table: _parse(raw[table], axis, problems)
        for table in TABLES
        if table in raw and table not in ("axis", "measured")
    }
    motion = parsed.get("duty_cycle") or parsed.get("duty_types")
    courses = side_tables(parsed, axis.number("cycles_per_minute"))
    cycles = (
        understand_cycles(parsed, axis.motion_coordinate, problems, courses)
        if motion and axis.mechanism
        else ()
    )
    recording = None
    if "measured" in raw and axis.mechanism:
        recording = understand_recording(raw["measured"], axis, problems, motion is not None)
        cycles = (Cycle("", (recording.segment,)),) if recording else ()
    mechanism = build_mechanism(axis, understand_map(parsed.get("map"), axis, problems), problems)
    if mechanism is not None and (motion or recording):
        at_shaft = (axis.word("motion_stated_at") or mechanism.motion_at) == SHAFT
        if recording:
            check_recorded_motion(mechanism, at_shaft, recording, problems)
        else:
            for cycle in cycles:
                table = "duty_types" if cycle.duty_type else "duty_cycle"
                check_motion(mechanism, at_shaft, cycle.segments, problems, table)
                check_plausible(axis.motion_coordinate, cycle.segments, problems, table)
                if cycle.duty_type:
                    check_turns(cycle, mechanism, at_shaft, problems)
    parts = understand_parts(parsed.get("inertias"), axis.mechanism, problems)
    partners = understand_partners(parsed.get("bus_partners"))
    pulses = understand_pulses(parsed.get("resistor_pulses"), problems)
    motors, drives = parsed.get("motors"), parsed.get("drives")
    motor_parameters = understand_motors(motors) if motors else None
    drive_parameters = understand_drives(drives) if drives else None
    gearheads, gearhead_parameters = understand_gearheads(
        _wanted_gearheads(parsed.get("gearheads"), axis, problems),
        TABLES["gearheads"],
        _direct_drive(axis),
        problems,
    )
    if len(gearheads) == 0 and "gearheads" not in parsed:
        problems.report("gearheads", None, got="no table, and direct drive is not allowed",
                        allowed="gearheads, or direct drive",
                        remedy="Add the table, or set 'direct drive allowed' to yes.")  # fmt: skip
    limits, limit_entries = understand_limits(parsed.get("limits"), problems)
    decimal = raw["tolerances"].decimal if "tolerances" in raw else ""
    tolerances = understand_tolerances(parsed.get("tolerances"), decimal, axis, problems)
    if problems.has_errors:
        return None
    if not (
        (motion or recording) and motors and drives and mechanism and motor_parameters and drive_parameters
    ):
        return None  # a required table is missing, which was reported
    named = ("duty_cycle", "duty_types", "cycles", "points", "process")
    described = [parsed[table] for table in named if table in parsed]
    entries = (
        *axis.entries,
        *(entry for table in described for entry in motion_entries(table, axis.coordinate)),
        *(recording.entries if recording else ()),
        *table_entries(parsed.get("map") if mechanism.needs_map else None),
        *table_entries(parsed.get("inertias")),
        *table_entries(parsed.get("resistor_pulses")),
        *table_entries(parsed.get("bus_partners")),
        *limit_entries,
    )
    catalogs = to_catalog(motors), to_catalog(gearheads), to_catalog(drives)
    return Case(
        name=name,
        path=path,
        mechanism=with_parts(mechanism, parts),
        parts=parts,
        resistor_pulses=pulses,
        partners=partners,
        surroundings=surroundings_of(axis),
        segments=cycles[0].segments,
        cycles=cycles if any(cycle.name for cycle in cycles) else (),
        motors=catalogs[0],
        gearheads=catalogs[1],
        drives=catalogs[2],
        motor_parameters=motor_parameters,
        gearhead_parameters=at_the_motor(gearhead_parameters, parts),
        drive_parameters=drive_parameters,
        limits=limits,
        tolerances=tolerances,
        options=options_of(axis),
        entries=entries,
        problems=problems.finished(),
        fingerprint=fingerprint(entries, catalogs, limits, tolerances),
        recording=recording.recording if recording else None,
    )


def _parse(raw: RawTable, axis: Axis, problems: ProblemList) -> ParsedTable:
    table = table_for(raw.name, axis.mechanism, axis.word("motion_stated_at"))
    return parse_table(raw, table, problems, axis.coordinate, broad=axis.mechanism is None)


def _direct_drive(axis: Axis) -> bool:
    linear_motor = axis.mechanism is not None and axis.mechanism.drives_linear_motor
    return linear_motor or axis.word("direct_drive_allowed") != "no"


def _wanted_gearheads(parsed: ParsedTable | None, axis: Axis, problems: ProblemList) -> ParsedTable | None:
    """Give the gearheads, or none for a linear motor."""
    if parsed is not None and axis.mechanism is not None and axis.mechanism.drives_linear_motor:
        problems.report("gearheads", None, got=f"{len(parsed)} gearheads", allowed="none for a linear motor",
                        remedy="They are left out.", severity=NOTE)  # fmt: skip
        return None
    return parsed


def entries_of_row(catalog: Catalog, index: int) -> tuple[Entry, ...]:
    """Every known value of one catalog row, as entered and as understood.

    Parameters
    ----------
    catalog : Catalog
        Part table.
    index : int
        Row index, 0-based. [-]
    """
    declared = TABLES[catalog.table].columns
    entries = [_entry(catalog, index, column, column.key) for column in declared]
    known = {column.key for column in declared}
    for key in catalog.values:
        if key not in known:
            extra = Column(catalog.headings.get(key, key), "text", "")
            entries.append(_entry(catalog, index, extra, key))
    return tuple(entry for entry in entries if entry is not None)


def _entry(catalog: Catalog, index: int, column: Column, key: str) -> Entry | None:
    origin = int(catalog.origins[key][index])
    if origin == MISSING:
        return None
    value = catalog.values[key][index]
    typed = ""
    if origin == STATED and key in catalog.as_entered:
        typed = f"{catalog.as_entered[key][index]} {catalog.entered_units.get(key, '')}".strip()
    machine = "linear" if column.machine == "linear" else "rotary"
    return Entry(
        catalog.table,
        int(catalog.rows[index]) or None,
        catalog.names[index],
        column.name,
        typed,
        float(value) if column.is_number else str(value),
        si_unit(column.kind_for(machine)) if column.is_number else "",
        ORIGINS[origin],
        catalog.rules.get(key, {}).get(index, ""),
        str(catalog.values["source"][index]) if "source" in catalog.values else "",
    )
