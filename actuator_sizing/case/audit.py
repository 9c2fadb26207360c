"""Look over the data sheets of a case: which entries contradict each other, and the probable slip by name."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from actuator_sizing.case.audit_identities import Identity, drive_identities, motor_identities
from actuator_sizing.case.audit_slips import name_slip
from actuator_sizing.case.model import Catalog
from actuator_sizing.case.tables import TABLES
from actuator_sizing.core.conventions import ampere_ratio
from actuator_sizing.core.parameters import IntArray
from actuator_sizing.errors import WARNING, Problem
from actuator_sizing.units import from_si, parse_unit

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case

KEPT_PER_IDENTITY = 10  # a slip of export repeats in every row


def audit_case(path: str | Path) -> tuple[Problem, ...]:
    """Read a case, check it, and audit its data sheets; every problem at once.

    Parameters
    ----------
    path : str or Path
        A folder, or a workbook that ends in ``.xlsx``.

    Returns
    -------
    tuple of Problem
        Errors, warnings and notes of reading, then the contradictions within data sheets as warnings.
    """
    from actuator_sizing.case.reading import check_case

    case, problems = check_case(path)
    if case is None:
        return problems
    return tuple(dict.fromkeys((*problems, *audit_catalogs(case))))  # reading may have audited already


def audit_catalogs(case: Case) -> tuple[Problem, ...]:
    """Find the entries of the catalogs that contradict each other.

    Parameters
    ----------
    case : Case
        The case as understood.

    Returns
    -------
    tuple of Problem
        Warnings, at most `KEPT_PER_IDENTITY` for each identity and a count of the rest.

    Notes
    -----
    A data sheet states most properties more than once: torque constant and back-EMF constant, stall torque
    and torque constant, time constants and what they are made of. Identities of the DC-equivalent model
    hold them against each other; see `audit_identities` for the honest scatter that is allowed.
    """
    found = [
        *_problems(
            case.motors,
            case.motor_parameters.current_basis,
            motor_identities(case.motors, case.motor_parameters),
        ),
        *_problems(
            case.drives,
            case.drive_parameters.current_basis,
            drive_identities(case.drives, case.drive_parameters),
        ),
    ]
    return tuple(found)


def _problems(catalog: Catalog, basis: IntArray, identities: Iterable[Identity]) -> Iterator[Problem]:
    for identity in identities:
        indices = np.flatnonzero(identity.suspect)
        for index in indices[:KEPT_PER_IDENTITY].tolist():
            yield _problem(catalog, int(basis[index]), identity, index)
        if len(indices) > KEPT_PER_IDENTITY:
            yield Problem(
                catalog.table,
                None,
                _heading(catalog, identity.column),
                got=f"{len(indices) - KEPT_PER_IDENTITY} more rows like this",
                remedy="Only the first ones are listed.",
                severity=WARNING,
            )


def _problem(catalog: Catalog, basis: int, identity: Identity, index: int) -> Problem:
    residual = float(identity.residual[index])
    slips = name_slip(residual, identity.slips)
    return Problem(
        catalog.table,
        int(catalog.rows[index]),
        _heading(catalog, identity.column),
        got=_as_entered(catalog, identity.column, index),
        allowed=f"{_expected(catalog, basis, identity, index)} ({identity.rule})",
        remedy=f"{_name(catalog, index)}: the stated value is {residual:.3g} times that. "
        + (f"Probably {slips}." if slips else "Check both against the data sheet."),
        severity=WARNING,
    )


def _expected(catalog: Catalog, basis: int, identity: Identity, index: int) -> str:
    """Word the value that would fit, in the unit of the heading."""
    column = TABLES[catalog.table].column(identity.column)
    spelling = catalog.entered_units.get(identity.column, "")
    unit = parse_unit(spelling, column.kind)
    value = float(np.asarray(catalog.values[identity.column], dtype=float)[index])
    if column.kind == "current" and unit.basis in ("rms", "peak"):
        value /= float(ampere_ratio(unit.basis, [basis])[0])  # the row may count another ampere
    fitting = f"{from_si(value / float(identity.residual[index]), unit):.4g} {spelling}".rstrip()
    return f"at most about {fitting}" if identity.low == 0.0 else f"about {fitting}"


def _as_entered(catalog: Catalog, key: str, index: int) -> str:
    spelling = catalog.entered_units.get(key, "")
    return f"{catalog.as_entered[key][index]} {spelling}".strip()


def _heading(catalog: Catalog, key: str) -> str:
    return catalog.headings.get(key, key.replace("_", " "))


def _name(catalog: Catalog, index: int) -> str:
    return f"'{catalog.names[index]}'"
