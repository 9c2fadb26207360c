"""Worked examples of RMS load given as a record, from the table `measured` to the evaluated pair.

Sources as in `test_rms_published`:
[S] Gupta & Singhal, Fundamentals of Electric Drives and Control, Ex. 4.6, p. 59.
[J] J. B. Gupta, Elements of Electric Drives, Ex. 58, p. 152, and Ex. 60, p. 153.
[K] G. K. Dubey, Fundamentals of Electrical Drives, Ex. 4.2, p. 52, recomputed.

The recorded quantity stands for the torque at the driven shaft whatever its unit in the book. A jump of the book
is a rise within 10 µs here, which moves the RMS value by less than one part in a million.
"""

import numpy as np
import pytest

from actuator_sizing.case.reading import check_case
from actuator_sizing.sizing.demand import build_demand
from tests.unit.case_files import small_case, write_folder

JUMP_S = 1e-5
DENSE = 3000  # samples along a straight line change nothing, but the record is then condensed


def rms_of_record(folder, corners, dense):
    """RMS torque at the driven shaft of a record through (time, torque) corners, repeated every last time."""
    time, torque = np.array(corners, dtype=float).T
    period = time[-1]
    time[np.flatnonzero(np.diff(time, append=period) == 0.0)] -= JUMP_S  # the record closes with a jump, too
    at = np.union1d(time, np.linspace(0.0, time[-1], DENSE if dense else 20))
    rows = np.stack([at, np.interp(at, time, torque)], axis=1)
    tables = small_case()
    del tables["duty_cycle"]
    tables["axis"] += [["measured period", float(period), "s"]]
    tables["measured"] = [["time [s]", "shaft torque [Nm]"], *rows.tolist()]
    case, problems = check_case(write_folder(folder, tables))
    assert [str(p) for p in problems if p.severity == "error"] == []
    demand = build_demand(case)
    assert (demand.slices is not None) == dense
    return float(np.sqrt(demand.mean(demand.shaft_torque**2)))


def staircase(levels, lengths):
    ends = np.cumsum(lengths)
    corners = []
    for level, length, end in zip(levels, lengths, ends, strict=True):
        corners += [(end - length, level), (end, level)]
    return corners


@pytest.mark.published("A2.1", "A2.2", "A2.3", "A2.5")
@pytest.mark.parametrize("dense", [False, True])
@pytest.mark.parametrize(
    ("corners", "printed", "digits"),
    [
        (staircase([50.0, 100.0, 150.0, 120.0, 0.0], [20.0, 20.0, 10.0, 20.0, 15.0]), 94.74, 5e-3),  # [S]
        (staircase([240.0, 140.0, 300.0, 200.0], [1200.0, 600.0, 600.0, 1200.0]), 225.389, 5e-4),  # [J] 58
        # [J] 60, printed without decimals
        ([(0, 0), (15, 1050), (15, 600), (85, 600), (85, -200), (95, 0), (120, 0)], 507.0, 0.5),
        # [K]: 83 775.8 N·m at the reversals, printed without decimals
        (staircase([25e3, 0.0, 83775.8, 0.0, 20e3, 0.0, 83775.8, 0.0],
                   [10.0, 1.0, 5.0, 1.0, 15.0, 1.0, 5.0, 1.0]), 45975.0, 0.5),
    ],
)  # fmt: skip
def test_printed_rms_values_of_records(tmp_path, corners, printed, digits, dense):
    assert rms_of_record(tmp_path / "case", corners, dense) == pytest.approx(printed, abs=digits)
