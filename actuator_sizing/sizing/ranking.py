"""What makes one passing set better than another, and which drive shows a loser at its best."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import amplitude_per_unit_current, motor_amplitude_per_unit_current
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.cycles import CycleDemand
from actuator_sizing.sizing.derating import derated_drives
from actuator_sizing.sizing.evaluation import evaluate_pairs
from actuator_sizing.sizing.fitting import compatible
from actuator_sizing.sizing.judging import Verdicts

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

RANKINGS = ("price", "mass", "reserve", "energy")


def ranking_key(
    case: Case, several: tuple[Sets, ...], verdicts: Verdicts, index: IndexArray, ranked_by: str
) -> FloatArray:
    """Smaller is better, shape (S,); infinite where not known.

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
    ranked_by : str
        Price or mass of the three parts, utilisation over allowed of the governing check, or energy taken
        at the motor terminals per cycle (less what comes back, if the supply feeds back); of several cycles per
        second of the mix, or of the first where no mix is stated. [-]

    Returns
    -------
    ndarray, shape (S,)
        In the currency of the catalogs, kg, 1, J or W. [-]
    """
    sets = several[0]
    if ranked_by == "reserve":
        key = verdicts.severity
    elif ranked_by == "energy":
        key = np.asarray(_weights(several)) @ np.array([_energy(case, each) for each in several])
    else:
        name = "price" if ranked_by == "price" else "mass_kg"
        key = sum(getattr(part, name) for part in (sets.motors, sets.gearheads, sets.drives))
    return np.asarray(np.nan_to_num(np.asarray(key, dtype=float), nan=np.inf))


def _energy(case: Case, sets: Sets) -> FloatArray:
    """Energy per run of one cycle that the motor takes for good, shape (S,). [J]"""
    taken = sets.pairs.energy_terminals_motoring_j
    if case.options.get("supply feeds back") == "yes":
        taken = taken - sets.pairs.energy_terminals_regenerated_j
    return taken


def _weights(several: tuple[Sets, ...]) -> list[float]:
    """What one run of each cycle counts: runs per second of the mix, else the first cycle alone."""
    cycles = [sets.case.cycle for sets in several]
    if all(np.isnan(cycle.share) for cycle in cycles):
        return [float(number == 0) for number in range(len(cycles))]
    return [float(np.nan_to_num(cycle.share)) / cycle.duration_s for cycle in cycles]


def nearest_drives(cycles: tuple[CycleDemand, ...], pairs: IndexArray) -> IndexArray:
    """The drive that shows each losing pair at its best: large enough, then cheapest.

    Parameters
    ----------
    cycles : tuple of CycleDemand
        The cycles of the case. [-]
    pairs : ndarray of int, shape (L, 2)
        Motor and gearhead of losing pairs. [-]

    Returns
    -------
    ndarray of int, shape (L, 3)
        With the drive; pairs that no drive serves are left out. [-]
    """
    if not len(pairs):
        return np.empty((0, 3), dtype=np.intp)
    case = cycles[0].case
    motors = case.motor_parameters.take(pairs[:, 0])
    gearheads = case.gearhead_parameters.take(pairs[:, 1])
    results = [evaluate_pairs(each.demand, motors, gearheads, case.surroundings) for each in cycles]
    peak = np.max([each.current_peak_a for each in results], axis=0)
    rms = np.max([each.current_rms_a for each in results], axis=0)
    drives, s = derated_drives(case), case.surroundings
    amplitude = motor_amplitude_per_unit_current(motors)[:, None]
    per_drive = amplitude_per_unit_current(drives.current_basis)[None, :]
    with np.errstate(invalid="ignore"):
        need = np.fmax(
            peak[:, None] * amplitude / (drives.peak_current_a * per_drive),
            rms[:, None] * amplitude / (drives.continuous_current_a * per_drive),
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
