"""All motor × gearhead × drive sets at once, by lower bounds: who can possibly pass, who fails and why.

RMS torque is exact from moments, peaks are lower bounds from support points, so that no set that passes is
ever lost; the survivors are then evaluated exactly. A set whose motor and gearhead fail whatever the drive is
counted under the worst of their checks, the others under the worst check of the drive.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, fields
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import amplitude_per_unit_current
from actuator_sizing.sizing.block import Block, GearheadSide, MotorSide
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.drive_counts import DriveRanks
from actuator_sizing.sizing.drive_side import DriveSide
from actuator_sizing.sizing.fitting import compatible, fits_axis
from actuator_sizing.sizing.tallies import Losses, Pool
from actuator_sizing.sizing.tile import BlockBounds, Tile, TileWorker

if TYPE_CHECKING:
    from actuator_sizing.sizing.checks.base import Check

FloatArray = NDArray[np.float64]

_MOTORS_PER_BLOCK, _PAIRS_PER_TILE = 2048, 32768  # large enough for numpy, small enough for the cache
LISTED_SETS = 200_000  # up to so many sets, each loser is listed with what governs it
_ROUNDING = 1e-5  # of single precision: bounds reject only beyond this part above the allowed value
_LIMIT = np.float32(1.0 + _ROUNDING)
_SETS_PER_STEP = 2**16  # sets looked at at once where they are held against the drives one by one
_KEY_FIELD = {"price": "price", "mass": "mass_kg"}
_LAST = 1e300  # key of what is not known: after everything else, and a sum of three is still a number


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
    demand: Demand,
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
    demand : Demand
        The cycle at the driven shaft. [-]
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
    drives = case.drive_parameters
    total = len(case.motor_parameters) * len(case.gearhead_parameters) * len(drives)
    bounded = tuple(check for check in checks if check.bound is not None)
    drive_side = DriveSide(case, allowed)
    losses = Losses((*(check.key for check in bounded), *drive_side.names), listed=total <= LISTED_SETS)
    pools = (Pool(keep), Pool(losers), Pool(losers))
    run = _Run(case, bounded, allowed, drive_side, key, *pools, losses, TileWorker(_PAIRS_PER_TILE))
    gearhead_side = GearheadSide.of(case.gearhead_parameters.take(gearhead_index), demand)
    recommended = case.number("recommended inertia ratio")
    ranks: dict[int, DriveRanks] = {}
    survivors = screened = done = 0
    for m in _motor_blocks(case, motor_index):
        motor_side = MotorSide.of(case.motor_parameters.take(m), case.surroundings)
        served = np.flatnonzero(compatible(motor_side.motors.take(slice(0, 1)), drives)[0])
        if len(served):
            kind = int(motor_side.motors.commutation[0])
            if kind not in ranks:
                ranks[kind] = DriveRanks(drive_side, served, float(_LIMIT))
            block = Block(demand, case.surroundings, recommended, motor_side, gearhead_side)
            survivors += _screen_block(run, block, _Places(m, gearhead_index, served), ranks[kind])
        screened += len(served) * len(m) * len(gearhead_index)
        done += len(m)
        if progress is not None:
            progress(done / len(motor_index))
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
    worker: TileWorker


@dataclass(frozen=True)
class _Places:
    """Places in the catalogs of the parts of a block."""

    motors: NDArray[np.intp]  # (M,)
    gearheads: NDArray[np.intp]  # (N,)
    drives: NDArray[np.intp]  # (D,) those that can commutate the motors of this block

    def pairs(self, gearhead: NDArray[np.intp], motor: NDArray[np.intp]) -> NDArray[np.intp]:
        """Catalog rows of motor and gearhead for places in the block, shape (n, 2)."""
        return np.column_stack([self.motors[motor], self.gearheads[gearhead]])

    def sets(self, pairs: NDArray[np.intp], drive: NDArray[np.intp]) -> NDArray[np.intp]:
        """Catalog rows of sets, shape (n, 3)."""
        return np.column_stack([pairs, self.drives[drive]])


def _motor_blocks(case: Case, motor_index: NDArray[np.intp]) -> Iterator[NDArray[np.intp]]:
    """Motors in blocks that the same drives serve."""
    commutation = case.motor_parameters.commutation[motor_index]
    for kind in np.unique(commutation):
        members = motor_index[commutation == kind]
        for start in range(0, len(members), _MOTORS_PER_BLOCK):
            yield members[start : start + _MOTORS_PER_BLOCK]


@dataclass(frozen=True)
class _Pairs:
    """K pairs of a block that only a drive can still reject."""

    gearhead: NDArray[np.intp]  # (K,) place in the block
    motor: NDArray[np.intp]  # (K,)
    worst: FloatArray  # (K,) largest bound over allowed
    torque_peak: FloatArray  # (K,) [N·m]
    mean_square: FloatArray  # (K,) [N²·m²]

    def take(self, index: NDArray[np.intp]) -> _Pairs:
        """Some of the pairs."""
        return _Pairs(*(getattr(self, f.name)[index] for f in fields(self)))


def _screen_block(run: _Run, block: Block, places: _Places, ranks: DriveRanks) -> int:
    """Screen every gearhead against the motors of a block; returns how many sets survive."""
    bounds = BlockBounds.of(block, run.checks, run.allowed)
    step = max(1, _PAIRS_PER_TILE // len(block.motors))
    found: list[_Pairs] = []
    with np.errstate(over="ignore"):  # immense ratios stand for what is out of reach
        for start in range(0, len(block.gearheads), step):
            which = slice(start, start + step)
            found.append(_screen_tile(run, bounds, which, run.worker.work(bounds, which), places))
    pairs = _Pairs(*(np.concatenate([getattr(part, f.name) for part in found]) for f in fields(_Pairs)))
    return _screen_drives(run, block, places, pairs, ranks)


def _screen_tile(run: _Run, bounds: BlockBounds, which: slice, tile: Tile, places: _Places) -> _Pairs:
    """Count the pairs that fail whatever the drive is; returns those that may pass."""
    losses, worst = run.losses, tile.worst
    shape = (worst.shape[0], worst.shape[1])
    fails, left, governed = (run.worker.mask(name, shape) for name in ("fails", "left", "governed"))
    np.greater(worst, _LIMIT, out=fails)
    np.copyto(left, fails)
    for number, utilisation in tile.by_motor:
        np.equal(utilisation, worst, out=governed)
        governed &= left
        left ^= governed
        losses.counts[number] += np.count_nonzero(governed) * len(places.drives)
        if losses.listed:
            _list(losses, places, which.start, governed, number, worst)
    # What is left is governed by the gearhead alone.
    if left.any():
        check = bounds.gearhead_check[which]
        np.add.at(losses.counts, check, np.count_nonzero(left, axis=1) * len(places.drives))
        if losses.listed:
            for number in np.unique(check).tolist():
                _list(losses, places, which.start, left & (check == number)[:, None], number, worst)
    near = np.less_equal(worst, run.nearest.bar, out=governed)
    near &= fails
    j, i = _places_of(near)
    if len(i):
        run.nearest.add(places.pairs(which.start + j, i), worst[j, i])
    j, i = _places_of(np.logical_not(fails, out=fails))
    values = (part[j, i].astype(float) for part in (worst, tile.torque_peak, tile.mean_square))
    return _Pairs(which.start + j, i, *values)


def _places_of(mask: NDArray[np.bool_]) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Row and column of what is true; several times faster than `nonzero` of two dimensions."""
    j, i = np.divmod(np.flatnonzero(mask), mask.shape[1])
    return j, i


def _list(
    losses: Losses,
    places: _Places,
    first: int,
    governed: NDArray[np.bool_],
    number: int,
    worst: NDArray[np.float32],
) -> None:
    """List the sets of pairs that one check governs, each with every drive."""
    j, i = _places_of(governed)
    count = len(places.drives)
    pairs = np.repeat(places.pairs(first + j, i), count, axis=0)
    sets = places.sets(pairs, np.tile(np.arange(count), len(i)))
    losses.keep(sets, np.full(len(sets), number), np.repeat(worst[j, i], count))


def _screen_drives(run: _Run, block: Block, places: _Places, pairs: _Pairs, ranks: DriveRanks) -> int:
    """Hold the pairs that may pass against every drive; returns how many sets survive."""
    K = block.judged.torque_constant_nm_per_a
    per_torque = (amplitude_per_unit_current(block.motors.current_basis) / K)[pairs.motor]
    peak_a, rms_a = pairs.torque_peak * per_torque, np.sqrt(pairs.mean_square) * per_torque
    key = _pair_key(run, block, places, pairs)
    cheapest = _drive_key(run, places.drives).min() if len(places.drives) else 0.0
    total = 0
    step = max(1, _SETS_PER_STEP // len(places.drives))
    for start in range(0, len(peak_a), step):
        some = slice(start, start + step)
        counts = ranks.count(peak_a[some], rms_a[some], run.by_drive.bar)
        total += int(counts.passing.sum())
        run.losses.counts[-3:] += counts.rejected
        # Only what can still get into a list is looked at set by set.
        wanted = counts.nearly | ((counts.passing > 0) & (key[some] + cheapest <= run.pool.bar))
        k = start + np.flatnonzero(wanted | run.losses.listed)
        if len(k):
            _list_sets(run, places, pairs.take(k), peak_a[k], rms_a[k], key[k])
    return total


def _list_sets(
    run: _Run, places: _Places, pairs: _Pairs, peak_a: FloatArray, rms_a: FloatArray, key: FloatArray
) -> None:
    """Offer the sets of K pairs with every drive to the lists of survivors and of losers."""
    stack = run.drive_side.utilisations(peak_a, rms_a, places.drives)
    drive_worst = stack.max(axis=0)
    survives = drive_worst <= _LIMIT
    k, d = _places_of(~survives)
    lost = places.sets(places.pairs(pairs.gearhead[k], pairs.motor[k]), d)
    run.losses.keep(lost, len(run.checks) + stack.argmax(axis=0)[k, d], drive_worst[k, d])
    run.by_drive.add(lost, drive_worst[k, d])
    k, d = _places_of(survives)
    if len(k):
        sets = places.sets(places.pairs(pairs.gearhead[k], pairs.motor[k]), d)
        if run.key == "reserve":
            keys = np.maximum(key[k], drive_worst[k, d])
        else:
            keys = key[k] + _drive_key(run, places.drives)[d]
        run.pool.add(sets, keys)


def _pair_key(run: _Run, block: Block, places: _Places, pairs: _Pairs) -> FloatArray:
    """What motor and gearhead add to the key that survivors are ordered by, (K,); smaller is better."""
    if run.key == "reserve":
        return pairs.worst
    if run.key == "energy":
        j = block.judged
        loss = j.resistance_ohm / j.torque_constant_nm_per_a**2
        return np.asarray(loss[pairs.motor] * pairs.mean_square)
    name = _KEY_FIELD[run.key]
    motors, gearheads = run.case.motor_parameters, run.case.gearhead_parameters
    return _finite(
        getattr(motors, name)[places.motors[pairs.motor]]
        + getattr(gearheads, name)[places.gearheads[pairs.gearhead]]
    )


def _drive_key(run: _Run, drives: NDArray[np.intp]) -> FloatArray:
    """What drives add to the key, (D,)."""
    if run.key not in _KEY_FIELD:
        return np.zeros(len(drives))
    return _finite(getattr(run.case.drive_parameters, _KEY_FIELD[run.key])[drives])


def _finite(values: FloatArray) -> FloatArray:
    """Unknown values at the end of every order."""
    return np.asarray(np.nan_to_num(values, nan=_LAST))
