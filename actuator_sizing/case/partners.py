"""The table `bus_partners`: other axes on the same DC bus, each a case of its own."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.columns import nearest
from actuator_sizing.case.model import BusPartner, Case, Catalog
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.errors import ERROR, WARNING, Problem

_TABLE = "bus_partners"
_SAME_BUS = 0.02  # relative difference of stated bus voltages that nobody minds
_ANOTHER_BUS = 0.3  # beyond it the partner cannot be on this bus

Reader = Callable[[Path], tuple[Case | None, tuple[Problem, ...]]]


def understand_partners(parsed: ParsedTable | None) -> tuple[BusPartner, ...]:
    """Rows of the table, their cases not yet read.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table with each cell judged; None where there is none.
    """
    if parsed is None:
        return ()
    check_required(parsed)
    offset = parsed.number("time_offset")

    def text(key: str, index: int) -> str:
        return str(parsed.text(key)[index])

    return tuple(
        BusPartner(
            row=int(parsed.rows[i]),
            name=text("partner", i),
            path=text("case", i),
            motor=text("motor", i),
            gearhead=text("gearhead", i),
            drive=text("drive", i),
            offset_s=float(offset[i]),
        )
        for i in range(len(parsed))
    )


def join_partners(case: Case, place: Path, problems: ProblemList, read: Reader) -> Case:
    """Read the cases of the partners and hold them against this one.

    Parameters
    ----------
    case : Case
        The case; its partners name other cases.
    place : Path
        Where it was read from.
    problems : ProblemList
        Takes cases that are not there, that cannot be used or that lead back here, and parts they do not have.
    read : callable
        Reads a case without following its own partners.

    Returns
    -------
    Case
        With the cases of its partners in it, which the fingerprint counts too.
    """
    base = place if place.is_dir() else place.parent
    named = {_resolved(base, partner.path) for partner in case.partners}
    joined = []
    for partner in case.partners:
        other = _read(partner, base, place, problems, read)
        if other is None:
            continue
        beyond = {_resolved(_folder(other), further.path) for further in other.partners}
        if place.resolve() in beyond:
            _wrong(problems, partner, "case", f"{shown(partner.path)}, which names this case in turn",
                   "cases that do not lead back here", "State the axes of a bus in one case only.")  # fmt: skip
            continue
        for left_out in sorted(beyond - named):
            got = f"{shown(partner.path)}, which names {left_out.name} as its partner"
            _wrong(problems, partner, "case", got, "every axis of the bus in this table",
                   "Add a row for it if it is on this bus.", WARNING)  # fmt: skip
        if len(other.cycles) > 1:
            # One of them alone may be the mildest, and the sum would look better than the bus ever is.
            _wrong(problems, partner, "case", f"{shown(partner.path)}, a case with {len(other.cycles)} cycles",
                   "a case with one cycle", "Name a copy of that case with the one cycle that asks most of the bus, "
                   "and the parts of that axis here.")  # fmt: skip
            continue
        _same_bus(case, partner, other, problems)
        if _parts_exist(partner, other, problems):
            joined.append(replace(partner, axis=replace(other, partners=())))
    digest = hashlib.sha256(case.fingerprint.encode())
    for partner in joined:
        digest.update(partner.axis.fingerprint.encode() if partner.axis else b"")
    return replace(case, partners=tuple(joined), fingerprint=digest.hexdigest())


def _resolved(base: Path, text: str) -> Path:
    return (base / text).resolve()


def _folder(case: Case) -> Path:
    place = case.path or Path()
    return place if place.is_dir() else place.parent


def _wrong(
    problems: ProblemList, partner: BusPartner, column: str, got: str, allowed: str, remedy: str,
    severity: str = ERROR,
) -> None:  # fmt: skip
    problems.report(_TABLE, partner.row, column, got=got, allowed=allowed, remedy=remedy, severity=severity)


def _read(partner: BusPartner, base: Path, place: Path, problems: ProblemList, read: Reader) -> Case | None:
    if not partner.path:
        return None  # a required cell, which was reported
    try:
        where = _resolved(base, partner.path)
        exists = where.exists()
    except (OSError, ValueError):
        exists = False
    if not exists:
        _wrong(problems, partner, "case", f"{shown(partner.path)}, where there is nothing",
               "a workbook or a folder, relative to this case", "Check the path.")  # fmt: skip
        return None
    if where == place.resolve():
        _wrong(problems, partner, "case", "this case itself", "another case",
               "An axis is on its own bus already. A twin needs a case of its own.")  # fmt: skip
        return None
    other, found = read(where)
    if other is None:
        errors = [problem for problem in found if problem.severity == ERROR]
        first = f", the first: {errors[0]}" if errors else ""
        _wrong(problems, partner, "case", f"{shown(partner.path)}, a case with {len(errors)} errors{first}"[:400],
               "a case that can be used", "Audit that case by itself first.")  # fmt: skip
    return other


def _same_bus(case: Case, partner: BusPartner, other: Case, problems: ProblemList) -> None:
    """One bus has one band of voltage: that of this case counts."""
    for which in ("min", "max"):
        mine, theirs = (getattr(each.surroundings, f"bus_{which}_v") for each in (case, other))
        if abs(theirs - mine) > _SAME_BUS * mine:
            severity = ERROR if abs(theirs - mine) > _ANOTHER_BUS * mine else WARNING
            word = {"min": "minimum", "max": "maximum"}[which]
            _wrong(problems, partner, "case", f"{shown(partner.path)} with a {word} bus voltage of {theirs:g} V",
                   f"the {mine:g} V of this case, since the bus is the same",
                   "Correct one of the two; the voltage of this case is taken for the bus.", severity)  # fmt: skip


def _parts_exist(partner: BusPartner, other: Case, problems: ProblemList) -> bool:
    """Whether the parts named are in the catalogs of the partner; a set is named in full or not at all."""
    if not (partner.motor or partner.gearhead or partner.drive):
        return True
    good = True
    for column, catalog, name in (
        ("motor", other.motors, partner.motor),
        ("gearhead", other.gearheads, partner.gearhead),
        ("drive", other.drives, partner.drive),
    ):
        if not name and column != "gearhead":
            _wrong(problems, partner, column, "no value beside other parts", f"a {column} of that case",
                   "Name motor and drive, or no part: then the best set of that case is taken.")  # fmt: skip
            good = False
        elif name not in catalog.names:
            good = False
            _not_there(partner, column, catalog, name, problems)
    return good


def _not_there(partner: BusPartner, column: str, catalog: Catalog, name: str, problems: ProblemList) -> None:
    close = nearest(name, catalog.names) if name else None
    got = shown(name) if name else "no gearhead, though that case allows no direct drive"
    _wrong(problems, partner, column, got, f"a {column} in the catalogs of that case",
           f"Did you mean '{close}'?" if close else f"Name one of its {column}s.")  # fmt: skip
