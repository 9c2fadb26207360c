"""All motor × gearhead × drive sets at once, by lower bounds: who can possibly pass, who fails and why.

RMS torque is exact from moments, peaks are lower bounds from support points, so that no set that passes is
ever lost; the survivors are then evaluated exactly. A set whose motor and gearhead fail whatever the drive is
counted under the worst of their checks, the others under the worst check of the drive.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import motor_amplitude_per_unit_current
from actuator_sizing.sizing.block import Block, GearheadSide, MotorSide
from actuator_sizing.sizing.cycles import CycleDemand
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.drive_side import DriveSide
from actuator_sizing.sizing.fitting import compatible, fits_axis
from actuator_sizing.sizing.tallies import Losses, Pool

if TYPE_CHECKING:
    from actuator_sizing.sizing.checks.base import Check

FloatArray = NDArray[np.float64]

_MOTORS_PER_BLOCK, _GEARHEADS_PER_BLOCK = 2048, 16  # arrays of 256 kB stay in the L2 cache
LISTED_SETS = 200_000  # up to so many sets, each loser is listed with what governs it
_ROUNDING = 1e-5  # of single precision: bounds reject only beyond this part above the allowed value


@dataclass(frozen=True)
class Screened:
    """What the bounds say about all sets."""

    sets_total: int
    incompatible: int
    screened: int
    rejected_by_check: Mapping[str, int]
    survivor_count: int
    #: sets that may pass, at most `keep` of them, best key first: motor, gearhead, drive index
    survivors: NDArray[np.intp]  # (S, 3)
    #: motor, gearhead index of the rejected pairs that came closest, nearest first
    nearest_losers: NDArray[np.intp]  # (L, 2)
    #: motor, gearhead, drive index of the sets that only their drive rejects, nearest first
    nearest_by_drive: NDArray[np.intp]  # (L, 3)
    #: the rejected sets with what governs them, only where all sets are at most `LISTED_SETS`
    lost: NDArray[np.intp]  # (R, 3)
    lost_check: NDArray[np.intp]  # (R,) index into check_names
    lost_bound: FloatArray  # (R,) lower bound of the utilisation over allowed
    check_names: tuple[str, ...]


def screen(
    case: Case,
    demand: Demand | tuple[CycleDemand, ...],
    checks: tuple[Check, ...],
    allowed: Mapping[str, float],
    key: str,
    *,
    keep: int,
    losers: int,
    progress: Callable[[float], None] | None = None,
) -> Screened:
    """Screen every set of a case.

    Parameters
    ----------
    case : Case
        The case with its catalogs. [-]
    demand : Demand or tuple of CycleDemand
        The cycle at the driven shaft; every cycle, where there are several: of each bound the largest counts. [-]
    checks : tuple of Check
        Checks that can fail a set. [-]
    allowed : mapping
        Allowed utilisation by check key. [-]
    key : str
        ``"price"``, ``"mass"``, ``"reserve"`` or ``"energy"``: what the survivors are ordered by. [-]
    keep : int
        Most survivors kept. [-]
    losers : int
        Most nearest losers kept. [-]
    progress : callable, optional
        Called with the part done, 0 to 1. [-]

    Returns
    -------
    Screened
        Counts, survivors and nearest losers. [-]
    """
    motor_index, gearhead_index = fits_axis(case)
    # Motors that the same drives serve lie together: their sets are then counted in one stroke.
    motor_index = motor_index[np.argsort(case.motor_parameters.commutation[motor_index], kind="stable")]
    drives = case.drive_parameters
    total = len(case.motor_parameters) * len(case.gearhead_parameters) * len(drives)
    bounded = tuple(check for check in checks if check.bound is not None)
    drive_side = DriveSide(case, allowed)
    names = (*(check.key for check in bounded), *drive_side.names)
    losses = Losses(names, listed=total <= LISTED_SETS)
    pools = (Pool(keep), Pool(losers), Pool(losers))
    run = _Run(case, bounded, allowed, drive_side, key, *pools, losses)
    cycles = demand if isinstance(demand, tuple) else (CycleDemand(case, demand),)
    gearheads = case.gearhead_parameters.take(gearhead_index)
    gearhead_sides = [GearheadSide.of(gearheads, each.demand) for each in cycles]
    gearhead_parts = []
    for start in range(0, len(gearhead_index), _GEARHEADS_PER_BLOCK):
        some = slice(start, start + _GEARHEADS_PER_BLOCK)
        gearhead_parts.append((gearhead_index[some], [side.part(some) for side in gearhead_sides]))
    recommended = case.number("recommended inertia ratio")
    survivors = screened = 0
    for start in range(0, len(motor_index), _MOTORS_PER_BLOCK):
        m = motor_index[start : start + _MOTORS_PER_BLOCK]
        motor_side = MotorSide.of(case.motor_parameters.take(m), case.surroundings)
        served = compatible(motor_side.motors, drives)
        for g, parts in gearhead_parts:
            blocks = tuple(
                Block(each.demand, case.surroundings, recommended, motor_side, part, each.cycle.runs)
                for each, part in zip(cycles, parts, strict=True)
            )
            with np.errstate(over="ignore"):  # immense ratios stand for what is out of reach
                survivors += _screen_tile(run, _Tile(blocks, m, g, served))
        screened += int(served.sum()) * len(gearhead_index)
        if progress is not None:
            progress((start + len(m)) / len(motor_index))
    counts: dict[str, int] = {}
    for name, number in zip(losses.names, losses.counts, strict=True):
        counts[name] = counts.get(name, 0) + int(number)
    lost, lost_check, lost_bound = losses.table()
    return Screened(
        sets_total=total,
        incompatible=total - screened,
        screened=screened,
        rejected_by_check={name: count for name, count in counts.items() if count},
        survivor_count=survivors,
        survivors=run.pool.sorted(3),
        nearest_losers=run.nearest.sorted(2),
        nearest_by_drive=run.by_drive.sorted(3),
        lost=lost,
        lost_check=lost_check,
        lost_bound=lost_bound,
        check_names=losses.names,
    )


@dataclass(frozen=True)
class _Run:
    """What all blocks of one screening share: how to judge, and where to put what is found."""

    case: Case
    checks: tuple[Check, ...]
    allowed: Mapping[str, float]
    drive_side: DriveSide
    key: str
    pool: Pool
    nearest: Pool
    by_drive: Pool
    losses: Losses


@dataclass(frozen=True)
class _Tile:
    """One block for each cycle with the place of its N gearheads and M motors in the catalogs."""

    blocks: tuple[Block, ...]
    motor_index: NDArray[np.intp]  # (M,)
    gearhead_index: NDArray[np.intp]  # (N,)
    served: NDArray[np.bool_]  # (M, D) which drive can commutate which motor

    @property
    def block(self) -> Block:
        """The block of the first cycle; motors and gearheads are the same in all of them."""
        return self.blocks[0]

    def pairs(self, gearhead: NDArray[np.intp], motor: NDArray[np.intp]) -> NDArray[np.intp]:
        """Catalog rows of motor and gearhead for places in the block, shape (n, 2)."""
        return np.column_stack([self.motor_index[motor], self.gearhead_index[gearhead]])


def _screen_tile(run: _Run, tile: _Tile) -> int:
    """Screen one block; returns how many sets survive."""
    losses = run.losses
    gearhead_worst, gearhead_check, others = _utilisations(run, tile.blocks)
    worst = np.broadcast_to(gearhead_worst, tile.block.mean_square.shape).copy()
    for _, utilisation in others:
        np.fmax(worst, utilisation, out=worst)  # NaN, not known, is never the worst
    fails = worst > 1.0 + _ROUNDING

    drives_per_motor = tile.served.sum(axis=1)
    left = fails.copy()
    by_gearhead = (
        (number, np.where(gearhead_check == number, gearhead_worst, np.nan))
        for number in np.unique(gearhead_check).tolist()
    )
    for number, utilisation in (*others, *by_gearhead):
        governed = utilisation == worst
        governed &= left
        left ^= governed
        losses.count(number, governed, drives_per_motor)
        if losses.listed:
            j, i, drive = np.nonzero(governed[:, :, None] & tile.served)
            losses.keep(np.column_stack([tile.pairs(j, i), drive]), np.full(len(i), number), worst[j, i])
    j, i = np.nonzero(fails & (worst <= run.nearest.bar) & (drives_per_motor > 0))
    if len(i):
        run.nearest.add(tile.pairs(j, i), worst[j, i])
    return _screen_drives(run, tile, ~fails, worst)


def _utilisations(
    run: _Run, blocks: tuple[Block, ...]
) -> tuple[FloatArray, NDArray[np.intp], list[tuple[int, FloatArray]]]:
    """Utilisation over allowed of every motor and gearhead check.

    Those that depend on the gearhead alone come as the worst of them and which it is, both (N, 1); the others
    with their number in the list of checks, each (N, M).
    """
    block = blocks[0]
    worst = np.zeros((len(block.gearheads), 1))
    check_number = np.zeros(worst.shape, dtype=np.intp)
    others = []
    for number, check in enumerate(run.checks):
        bounds = [check.bound(each) for each in blocks if check.bound and check.concerns_cycle(each.runs)]
        if not bounds:
            continue
        utilisation = bounds[0]
        for other in bounds[1:]:
            utilisation = np.fmax(utilisation, other)
        if run.allowed[check.key] != 1.0:
            utilisation = utilisation / run.allowed[check.key]
        if check.group == "gearhead":
            utilisation = np.where(block.gearheads.is_direct[:, None], 0.0, utilisation)
            higher = utilisation > worst
            worst = np.where(higher, utilisation, worst)
            check_number = np.where(higher, number, check_number)
        else:
            others.append((number, utilisation))
    return worst, check_number, others


def _screen_drives(run: _Run, tile: _Tile, passing: NDArray[np.bool_], worst: FloatArray) -> int:
    """Hold the pairs that may pass against every drive; returns how many sets survive."""
    side, block, losses = run.drive_side, tile.block, run.losses
    columns, rows = np.nonzero(passing)  # gearheads, motors
    amplitude = motor_amplitude_per_unit_current(block.motors)
    total = 0
    step = max(1, 2**16 // max(1, len(side)))
    for start in range(0, len(rows), step):
        r, c = rows[start : start + step], columns[start : start + step]
        ok = tile.served[r]
        peak = np.max([each.current_peak[c, r] for each in tile.blocks], axis=0)
        # A cycle that runs once has no mean for the drive's continuous rating.
        rms = np.max([each.current_rms[c, r] * each.repeats for each in tile.blocks], axis=0)
        stack = side.utilisations(peak * amplitude[r], rms * amplitude[r])
        drive_worst = stack.max(axis=0)
        survives = ok & (drive_worst <= 1.0 + _ROUNDING)
        check = len(run.checks) + stack.argmax(axis=0)
        out_row, out_drive = np.nonzero(ok & ~survives)
        losses.add(check[out_row, out_drive], np.ones(len(out_row), dtype=np.intp))
        lost = np.column_stack([tile.pairs(c[out_row], r[out_row]), out_drive])
        losses.keep(lost, check[out_row, out_drive], drive_worst[out_row, out_drive])
        run.by_drive.add(lost, drive_worst[out_row, out_drive])
        k, d = np.nonzero(survives)
        total += len(k)
        if len(k):
            sets = np.column_stack([tile.pairs(c[k], r[k]), d])
            bound = np.maximum(worst[c[k], r[k]], drive_worst[k, d])
            run.pool.add(sets, _key(run, block, sets, r[k], c[k], bound))
    return total


def _key(
    run: _Run,
    block: Block,
    sets: NDArray[np.intp],
    row: NDArray[np.intp],
    column: NDArray[np.intp],
    bound: FloatArray,
) -> FloatArray:
    """What the survivors are ordered by; smaller is better, unknown comes last."""
    case = run.case
    if run.key == "reserve":
        return bound
    if run.key == "energy":
        j = block.judged
        loss = j.resistance_ohm[row] / j.torque_constant_nm_per_a[row] ** 2 * block.mean_square[column, row]
        return np.asarray(loss)
    name = "price" if run.key == "price" else "mass_kg"
    parts = (case.motor_parameters, case.gearhead_parameters, case.drive_parameters)
    total = sum(getattr(part, name)[index] for part, index in zip(parts, sets.T, strict=True))
    return np.asarray(np.nan_to_num(np.asarray(total), nan=np.finfo(float).max))
