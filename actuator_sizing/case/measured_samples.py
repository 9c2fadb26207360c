"""Samples of the `measured` table: read, in order, and columns that fit together."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.axis import Axis
from actuator_sizing.case.headings import understand_headings
from actuator_sizing.case.parsing import parse_table, report_empty_cells
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.raw_tables import RawTable
from actuator_sizing.case.sample_files import NumberTable
from actuator_sizing.case.tables import table_for
from actuator_sizing.errors import NOTE, WARNING

FloatArray = NDArray[np.float64]

MEASURED = "measured"
EFFORTS = ("process_force", "load_force", "shaft_torque", "current")
_FEWEST = 16  # samples that can be called a cycle


def read_samples_of(
    raw: RawTable, axis: Axis, problems: ProblemList
) -> tuple[NDArray[np.int64], dict[str, FloatArray]] | None:
    """SI columns of the table, judged.

    Parameters
    ----------
    raw : RawTable
        The table as it stands in the file.
    axis : Axis
        Says which kinds of quantity hold.
    problems : ProblemList
        Takes what is wrong, with row and remedy.

    Returns
    -------
    rows : ndarray of int, shape (n,)
        Spreadsheet rows. [-]
    values : dict of ndarray, shape (n,)
        By column key; a problem gives None in place of both. [-]
    """
    samples = _samples(raw, axis, problems)
    if samples is None:
        return None
    rows, values = samples
    fits = _in_order(rows, values["time"], problems) and _columns_fit(values, axis, problems)
    return samples if fits and _payload_fits(rows, values, problems) else None


def _samples(
    raw: RawTable, axis: Axis, problems: ProblemList
) -> tuple[NDArray[np.int64], dict[str, FloatArray]] | None:
    table = table_for(MEASURED, axis.mechanism, axis.word("motion_stated_at"))
    values: dict[str, FloatArray] = {}
    if isinstance(raw, NumberTable):
        headings = understand_headings(raw, table, problems, axis.coordinate)
        for key, heading in headings.known.items():
            if heading.unit is not None:
                values[key] = raw.numbers[heading.index] * heading.unit.factor
                if heading.unit.offset:
                    values[key] += heading.unit.offset
    else:
        parsed = parse_table(raw, table, problems, axis.coordinate)
        for key in parsed.headings:
            column = table.find(key) if key in [c.key for c in table.columns] else None
            if column is not None and column.is_number:
                values[key] = parsed.number(key)
                report_empty_cells(parsed, column)
    if "time" not in values:
        if not problems.mentions(MEASURED):
            problems.report(MEASURED, None, "time", got="no such column", allowed="a required column",
                            remedy="Add a column 'time [s]'.")  # fmt: skip
        return None
    if problems.has_errors and problems.mentions(MEASURED):
        return None
    if len(raw) < _FEWEST:
        problems.report(MEASURED, None, got=f"{len(raw)} samples", allowed=f"at least {_FEWEST}",
                        remedy="State so short a cycle as segments of a duty cycle.")  # fmt: skip
        return None
    return raw.rows, values


def _in_order(rows: NDArray[np.int64], t: FloatArray, problems: ProblemList) -> bool:
    step = np.diff(t)
    wrong = np.flatnonzero(~(step > 0.0))
    for which, name, remedy in (
        (wrong[step[wrong] == 0.0], "repeats the time of the row before", "Remove one of the two rows."),
        (wrong[step[wrong] < 0.0], "goes back in time", "Sort the rows by time."),
    ):
        if len(which):
            first = int(which[0]) + 1
            problems.report(MEASURED, int(rows[first]), "time",
                            got=f"{t[first]:.9g} s after {t[first - 1]:.9g} s: it {name}"
                            + (f" ({len(which)} such rows)" if len(which) > 1 else ""),
                            allowed="times that rise from row to row", remedy=remedy)  # fmt: skip
    return not len(wrong)


def _columns_fit(values: dict[str, FloatArray], axis: Axis, problems: ProblemList) -> bool:
    efforts = [key for key in EFFORTS if key in values]
    motions = [key for key in ("position", "speed") if key in values]
    got = allowed = ""
    if len(efforts) > 1:
        got, allowed = " and ".join(efforts).replace("_", " "), "one column of effort"
    elif not efforts and not motions:
        got, allowed = "times only", "a motion (position or speed), an effort, or both"
    elif "current" in efforts and not np.isfinite(axis.number("recorded_torque_constant")):
        got, allowed = "a current", "'recorded torque constant' in the axis table, which makes it a torque"
    elif motions and not np.isfinite(axis.number("smoothing_cut_off")):
        got, allowed = "a measured motion", "'smoothing cut-off' in the axis table"
    if got:
        problems.report(MEASURED, None, got=got, allowed=allowed,
                        remedy="A cut-off of ten times the frequency of the moves is a start; the report says "
                        "what it decides." if "cut-off" in allowed else "Add what is missing or remove a "
                        "column.")  # fmt: skip
        return False
    names: list[str] = list(motions)
    for key in names:
        if np.ptp(values[key]) == 0.0 and (key == "position" or values[key][0] == 0.0):
            problems.report(MEASURED, None, key, got="the same value in every row", allowed="a signal that changes",
                            remedy="Taken as an axis at rest; is the sensor connected?",
                            severity=WARNING)  # fmt: skip
    for key in efforts:
        if np.ptp(values[key]) == 0.0:
            problems.report(MEASURED, None, key.replace("_", " "), got="the same value in every row",
                            allowed="a signal that changes",
                            remedy="Taken as constant; is the sensor connected?", severity=WARNING)  # fmt: skip
    return True


def _payload_fits(rows: NDArray[np.int64], values: dict[str, FloatArray], problems: ProblemList) -> bool:
    payload = values.get("payload", np.zeros(1))
    wrong = np.flatnonzero(payload < 0.0)
    if len(wrong):
        problems.report(MEASURED, int(rows[wrong[0]]), "payload",
                        got=f"{payload[wrong[0]]:.6g} (SI)" + (f" and {len(wrong) - 1} more such rows"
                                                               if len(wrong) > 1 else ""),
                        allowed="at least 0", remedy="Correct the sign, or the zero of the scale.")  # fmt: skip
        return False
    known = {"load_force", "shaft_torque", "current"} & set(values)
    if "payload" in values and known:
        problems.report(MEASURED, None, "payload", got=f"a payload beside a recorded {known.pop().replace('_', ' ')}",
                        allowed="a payload where the mechanism adds inertia and gravity",
                        remedy="The recorded effort holds it already; the payload only tells the inertia of the "
                        "load.", severity=NOTE)  # fmt: skip
    return True
