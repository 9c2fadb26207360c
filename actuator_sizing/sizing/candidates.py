"""The table of candidates: one row per set, with what governs it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.judging import NOT_APPLICABLE, ORDER, Verdicts
from actuator_sizing.sizing.results import FAILS
from actuator_sizing.sizing.screening import Screened

if TYPE_CHECKING:
    import pandas as pd

IndexArray = NDArray[np.intp]


def candidate_table(
    case: Case,
    several: tuple[Sets, ...],
    verdicts: Verdicts,
    index: IndexArray,
    order: IndexArray,
    screened: Screened,
) -> pd.DataFrame:
    """Every evaluated set in ranked order, then the sets that the bounds rejected, where they were kept.

    Parameters
    ----------
    case : Case
        The case. [-]
    several : tuple of Sets
        Evaluated sets, once for each cycle. [-]
    verdicts : Verdicts
        Their verdicts. [-]
    index : ndarray of int, shape (S, 3)
        Motor, gearhead and drive. [-]
    order : ndarray of int, shape (S,)
        Ranked order. [-]
    screened : Screened
        What the bounds said. [-]

    Returns
    -------
    pandas.DataFrame
        Columns named with their SI unit; ``evaluated`` says "exactly" or "by bounds". A utilisation by
        bounds is a lower bound; checks that concern no set have no column. Of several cycles the largest values
        stand, and the energy of the first. [-]
    """
    import pandas as pd

    frame = _parts(case, index)
    frame["evaluated"] = "exactly"
    frame["verdict"] = np.array(ORDER, dtype=object)[verdicts.verdict]
    keys = np.array([check.key for check in verdicts.checks], dtype=object)
    frame["governing_check"] = keys[verdicts.governing]
    rows = np.arange(len(index))
    if len(several) > 1:
        names = np.array([sets.case.cycle.name for sets in several], dtype=object)
        frame["governing_cycle"] = names[verdicts.cycle[rows, verdicts.governing]]
    frame["governing_utilisation"] = verdicts.utilisation[rows, verdicts.governing]
    for name in (
        "torque_rms_nm",
        "torque_peak_nm",
        "current_rms_a",
        "current_peak_a",
        "speed_peak_rad_s",
        "winding_max_degc",
        "energy_terminals_motoring_j",
        "inertia_ratio",
    ):
        of_cycle = [getattr(sets.pairs, name) for sets in several]
        frame[name] = of_cycle[0] if name.startswith("energy") else np.max(of_cycle, axis=0)
    concerned = np.any(verdicts.codes != NOT_APPLICABLE, axis=0)
    for column in np.flatnonzero(concerned).tolist():
        check = verdicts.checks[column]
        frame[f"utilisation_{check.key}"] = verdicts.utilisation[:, column]
    frame = frame.iloc[order].reset_index(drop=True)
    if len(screened.lost):
        known = {tuple(row) for row in index.tolist()}
        keep = np.array([tuple(row) not in known for row in screened.lost.tolist()], dtype=bool)
        lost = _parts(case, screened.lost[keep])
        lost["evaluated"] = "by bounds"
        lost["verdict"] = FAILS
        lost["governing_check"] = np.array(screened.check_names, dtype=object)[screened.lost_check[keep]]
        lost["governing_utilisation"] = screened.lost_bound[keep]
        lost = lost.sort_values("governing_utilisation", kind="stable")
        frame = pd.concat([frame, lost], ignore_index=True)
    frame.insert(0, "rank", np.arange(1, len(frame) + 1))
    return frame


def _parts(case: Case, index: IndexArray) -> pd.DataFrame:
    import pandas as pd

    tables = (case.motors, case.gearheads, case.drives)
    names = [
        np.array(table.names, dtype=object)[column] for table, column in zip(tables, index.T, strict=True)
    ]
    gearheads = case.gearhead_parameters
    direct = gearheads.is_direct[index[:, 1]]
    parts = (case.motor_parameters, gearheads, case.drive_parameters)
    totals = {
        name: sum(getattr(part, name)[column] for part, column in zip(parts, index.T, strict=True))
        for name in ("price", "mass_kg")
    }
    return pd.DataFrame(
        {
            "motor": names[0],
            "gearhead": np.where(direct, "direct", names[1]),
            "ratio": gearheads.ratio[index[:, 1]],
            "drive": names[2],
            **totals,
        }
    )
