"""Read a case: a workbook, or a folder of CSV files, with catalogs perhaps in a shared folder."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from pathlib import Path

from actuator_sizing.case.columns import fold, nearest
from actuator_sizing.case.model import Case
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.tables import CATALOG_TABLES, TABLES
from actuator_sizing.errors import ERROR, WARNING, InputError, Problem

CSV_ENDINGS = (".csv", ".tsv")
CATALOG_WORKBOOK = "catalog.xlsx"


def read_case(path: str | Path) -> Case:
    """Read and understand a case.

    Parameters
    ----------
    path : str or Path
        A workbook (``.xlsx``) or a folder of CSV files.

    Returns
    -------
    Case
        Everything known about the axis, in SI, each value with its source; its problems hold what the audit
        of the data sheets found too, so that a report says it.

    Raises
    ------
    InputError
        If the case cannot be used; it carries every problem found.
    """
    from actuator_sizing.case.audit import audit_catalogs

    case, problems = check_case(path)
    if case is None:
        raise InputError(problem for problem in problems if problem.severity == ERROR)
    return replace(case, problems=tuple(dict.fromkeys((*case.problems, *audit_catalogs(case)))))


def check_case(path: str | Path, *, with_partners: bool = True) -> tuple[Case | None, tuple[Problem, ...]]:
    """Read a case and give it with every problem, warning and note; does not raise for wrong input.

    Parameters
    ----------
    path : str or Path
        A workbook (``.xlsx``) or a folder of CSV files.
    with_partners : bool
        Read the cases of other axes on its bus too.

    Returns
    -------
    case : Case or None
        None where there are errors.
    problems : tuple of Problem
        Errors first.
    """
    from actuator_sizing.case.axis import Axis, understand_axis
    from actuator_sizing.case.partners import join_partners
    from actuator_sizing.case.understanding import understand

    place, problems = Path(path), ProblemList()
    raw = read_raw_tables(place, problems)
    if raw is None:
        return None, problems.finished()
    axis = understand_axis(raw["axis"], problems) if "axis" in raw else Axis()
    folder = axis.word("catalog_folder")
    if folder:
        base = place if place.is_dir() else place.parent
        _add_shared_catalogs(raw, base / folder, axis.rows.get("catalog_folder"), folder, problems)
    _report_missing_tables(raw, problems)
    name = place.resolve().stem if place.is_file() else place.resolve().name
    case = understand(raw, axis, problems, name, place)
    if case is not None and case.partners and with_partners:
        case = join_partners(case, place, problems, lambda other: check_case(other, with_partners=False))
        case = None if problems.has_errors else replace(case, problems=problems.finished())
    return case, problems.finished()


def read_raw_tables(path: Path, problems: ProblemList) -> dict[str, RawTable] | None:
    """Every table of the case itself as it stands in the files; None where the path is no case.

    Parameters
    ----------
    path : Path
        A workbook or a folder of CSV files.
    problems : ProblemList
        Takes what is wrong with the files.
    """
    try:
        is_folder, is_file = path.is_dir(), path.is_file()
    except (OSError, ValueError):
        is_folder = is_file = False
    if is_folder:
        return _read_folder(path, TABLES, problems, tell_strangers=True)
    if not is_file:
        problems.report(shown(str(path)), None, got="nothing there", allowed="a workbook or a folder",
                        remedy="Check the path, or write an empty case with 'actuator-sizing start'.")  # fmt: skip
        return None
    if path.suffix.lower() in CSV_ENDINGS:
        problems.report(path.name, None, got="a single CSV file",
                        allowed="a workbook (.xlsx) or a folder of CSV files",
                        remedy="Name the folder that holds the file.")  # fmt: skip
        return None
    from actuator_sizing.case.workbooks import read_workbook

    before = problems.has_errors
    tables = read_workbook(path, TABLES, problems)
    return None if not tables and problems.has_errors and not before else tables


def _read_folder(
    folder: Path, wanted: Iterable[str], problems: ProblemList, *, tell_strangers: bool = False
) -> dict[str, RawTable] | None:
    from actuator_sizing.case.csv_files import read_csv
    from actuator_sizing.case.headings import split_heading
    from actuator_sizing.case.sample_files import read_samples

    names = {fold(name): name for name in wanted}
    try:
        files = sorted(
            entry for entry in folder.iterdir() if entry.suffix.lower() in CSV_ENDINGS and entry.is_file()
        )
    except OSError as error:
        problems.report(str(folder), None, got=error.strerror or str(error), allowed="a folder",
                        remedy="Check that you may read it.")  # fmt: skip
        return None
    tables: dict[str, RawTable] = {}
    found: dict[str, str] = {}
    for file in files:
        name = names.get(fold(file.stem))
        if name is None:
            if tell_strangers:
                _report_stranger(file, names.values(), problems)
            continue
        if name in found:
            problems.report(file.name, None, got=f"a second file for the table {name} beside {found[name]}",
                            allowed="one file", remedy="Remove or rename one of them.")  # fmt: skip
            continue
        found[name] = file.name
        known = frozenset(
            split_heading(spelling)[0]
            for column in TABLES[name].columns
            for spelling in (column.name, *column.aliases)
        )
        table: RawTable | None = read_samples(file, name) if name == "measured" else None
        if table is None:
            table = read_csv(file, name, known, problems)
        if table is not None:
            tables[name] = table
    return tables


def _report_stranger(file: Path, names: Iterable[str], problems: ProblemList) -> None:
    close = nearest(file.stem, names)
    problems.report(file.name, None, got="a file that is no table of a case",
                    allowed=f"one of: {', '.join(TABLES)}",
                    remedy=(f"Did you mean '{close}{file.suffix}'? " if close else "") + "It is left out.",
                    severity=WARNING)  # fmt: skip


def _add_shared_catalogs(
    raw: dict[str, RawTable], folder: Path, row: int | None, typed: str, problems: ProblemList
) -> None:
    """Read the catalog tables that the case itself does not hold from the shared folder."""
    wanted = [name for name in CATALOG_TABLES if name not in raw]
    try:
        there = folder.is_dir()
    except (OSError, ValueError):
        there = False
    if not there:
        problems.report("axis", row, "catalog folder", got=shown(typed),
                        allowed="a folder that exists, relative to the case",
                        remedy="Correct the path, or put the catalog tables into the case.")  # fmt: skip
        return
    shared = _read_folder(folder, wanted, problems) or {}
    workbook = folder / CATALOG_WORKBOOK
    remaining = [name for name in wanted if name not in shared]
    if remaining and workbook.is_file():
        from actuator_sizing.case.workbooks import read_workbook

        shared |= read_workbook(workbook, remaining, problems)
    raw |= shared


def _report_missing_tables(raw: dict[str, RawTable], problems: ProblemList) -> None:
    for name, table in TABLES.items():
        if name == "duty_cycle" and not raw.keys().isdisjoint(("measured", "duty_types")):
            continue  # the record, or the duty types, are the cycle
        if table.required and name not in raw and not problems.mentions(name):
            where = ", in the case or in its catalog folder" if table.is_catalog else ""
            columns = ", ".join(
                f"{column.name} ({column.machine} motor)" if column.machine else column.name
                for column in table.columns
                if column.required
            )
            problems.report(name, None, got="no such table", allowed=f"a required table{where}",
                            remedy=f"Add a sheet '{name}' or a file {name}.csv with at least the columns: "
                            f"{columns}.")  # fmt: skip
