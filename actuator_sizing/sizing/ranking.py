"""What makes one passing set better than another, and which drive shows a loser at its best."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import amplitude_per_unit_current, motor_amplitude_per_unit_current
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.derating import derated_drives
from actuator_sizing.sizing.evaluation import evaluate_pairs
from actuator_sizing.sizing.fitting import compatible
from actuator_sizing.sizing.judging import Verdicts

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

RANKINGS = ("price", "mass", "reserve", "energy")


def ranking_key(case: Case, sets: Sets, verdicts: Verdicts, index: IndexArray, ranked_by: str) -> FloatArray:
    """Smaller is better, shape (S,); infinite where not known.

    Parameters
    ----------
    case : Case
        The case. [-]
    sets : Sets
        Evaluated sets. [-]
    verdicts : Verdicts
        Their verdicts. [-]
    index : ndarray of int, shape (S, 3)
        Motor, gearhead and drive. [-]
    ranked_by : str
        Price or mass of the three parts, utilisation over allowed of the governing check, or energy taken
        at the motor terminals per cycle (less what comes back, if the supply feeds back). [-]

    Returns
    -------
    ndarray, shape (S,)
        In the currency of the catalogs, kg, 1 or J. [-]
    """
    if ranked_by == "reserve":
        key = verdicts.severity
    elif ranked_by == "energy":
        key = sets.pairs.energy_terminals_motoring_j
        if case.options.get("supply feeds back") == "yes":
            key = key - sets.pairs.energy_terminals_regenerated_j
    else:
        name = "price" if ranked_by == "price" else "mass_kg"
        key = sum(getattr(part, name) for part in (sets.motors, sets.gearheads, sets.drives))
    return np.asarray(np.nan_to_num(np.asarray(key, dtype=float), nan=np.inf))


def nearest_drives(case: Case, demand: Demand, pairs: IndexArray) -> IndexArray:
    """The drive that shows each losing pair at its best: large enough, then cheapest.

    Parameters
    ----------
    case : Case
        The case. [-]
    demand : Demand
        The cycle. [-]
    pairs : ndarray of int, shape (L, 2)
        Motor and gearhead of losing pairs. [-]

    Returns
    -------
    ndarray of int, shape (L, 3)
        With the drive; pairs that no drive serves are left out. [-]
    """
    if not len(pairs):
        return np.empty((0, 3), dtype=np.intp)
    motors = case.motor_parameters.take(pairs[:, 0])
    results = evaluate_pairs(demand, motors, case.gearhead_parameters.take(pairs[:, 1]), case.surroundings)
    drives, s = derated_drives(case), case.surroundings
    amplitude = motor_amplitude_per_unit_current(motors)[:, None]
    per_drive = amplitude_per_unit_current(drives.current_basis)[None, :]
    with np.errstate(invalid="ignore"):
        need = np.fmax(
            results.current_peak_a[:, None] * amplitude / (drives.peak_current_a * per_drive),
            results.current_rms_a[:, None] * amplitude / (drives.continuous_current_a * per_drive),
        )
        bus = np.fmax(s.bus_max_v / drives.bus_voltage_max_v, drives.bus_voltage_min_v / s.bus_min_v)
    need = np.fmax(need, np.nan_to_num(bus, nan=0.0)[None, :])
    served = compatible(motors, drives)
    price = np.nan_to_num(drives.price, nan=np.finfo(float).max)
    enough = need <= 1.0
    score = np.where(enough, price / (1.0 + price.max()), 1.0 + need)
    score = np.where(served, score, np.inf)
    best = score.argmin(axis=1)
    kept = served.any(axis=1)
    return np.column_stack([pairs, best])[kept]
