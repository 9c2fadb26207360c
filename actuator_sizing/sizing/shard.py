"""One shard of the screening: some gearheads against some motors that the same drives serve, with every drive.

A shard can be worked out anywhere: it is plain data, and so is its answer. The blocks and tiles in it do not depend
on how the work is shared out, so that the sum of the shards is the same, bit for bit, wherever they ran.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, fields
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import REPEATS
from actuator_sizing.core.machine import motor_amplitude_per_unit_current
from actuator_sizing.core.parameters import DriveParameters, GearheadParameters, MotorParameters, Surroundings
from actuator_sizing.sizing.block import Block, GearheadSide, MotorSide
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.drive_counts import DriveRanks
from actuator_sizing.sizing.drive_side import DriveSide
from actuator_sizing.sizing.tallies import Losses, Pool
from actuator_sizing.sizing.tile import BlockBounds, Tile, TileWorker

if TYPE_CHECKING:
    from actuator_sizing.sizing.checks.base import Check

FloatArray = NDArray[np.float64]

PAIRS_PER_TILE = 32768  # large enough for numpy, small enough for the cache
_ROUNDING = 1e-5  # of single precision: bounds reject only beyond this part above the allowed value
LIMIT = np.float32(1.0 + _ROUNDING)
_SETS_PER_STEP = 2**16  # sets looked at at once where they are held against the drives one by one
_KEY_FIELD = {"price": "price", "mass": "mass_kg"}
_LAST = 1e300  # key of what is not known: after everything else, and a sum of three is still a number


@dataclass(frozen=True)
class Bars:
    """Keys beyond which nothing can get into the lists any more: a hint that saves work and changes no answer."""

    survivors: float = np.inf
    losers: float = np.inf
    by_drive: float = np.inf


@dataclass(frozen=True)
class Load:
    """One cycle as the screening sees it."""

    demand: Demand
    runs: str = REPEATS  # how it runs, which decides the checks that concern it


@dataclass(frozen=True)
class Common:
    """What all shards of one screening share."""

    loads: tuple[Load, ...]  # of each bound the largest counts
    surroundings: Surroundings
    recommended_inertia_ratio: float
    check_keys: tuple[str, ...]  # those that have a bound
    allowed: Mapping[str, float]
    gearheads: GearheadParameters  # (N,)
    gearhead_index: NDArray[np.intp]  # (N,) rows of the catalog
    drive_side: DriveSide
    drive_key: FloatArray  # (D,) what each drive of the catalog adds to the key
    key: str  # what the survivors are ordered by
    keep: int
    losers: int
    listed: bool  # whether every loser is listed
    compiled: bool = (
        False  # whether the optional compiler works out the bounds; not where every loser is listed
    )

    @property
    def checks(self) -> tuple[Check, ...]:
        """The checks themselves; they are found by their names wherever the shard is worked out."""
        from actuator_sizing.sizing.checks import CHECKS

        by_key = {check.key: check for check in CHECKS}
        return tuple(by_key[key] for key in self.check_keys)

    @cached_property
    def gearhead_sides(self) -> tuple[GearheadSide, ...]:
        """All gearheads with the demand of each cycle brought to their input."""
        return tuple(GearheadSide.of(self.gearheads, load.demand) for load in self.loads)

    @property
    def loss_names(self) -> tuple[str, ...]:
        """Checks by which sets are counted: those with a bound, then those of the drive."""
        return (*self.check_keys, *self.drive_side.names)


@dataclass(frozen=True)
class Shard:
    """Which part of the work: M motors against some of the gearheads, with every drive that serves them."""

    number: int
    motors: MotorParameters  # (M,)
    motor_index: NDArray[np.intp]  # (M,) rows of the catalog
    drives: NDArray[np.intp]  # (D,) rows of the catalog
    first_gearhead: int
    end_gearhead: int

    @property
    def pairs(self) -> int:
        """Motor × gearhead pairs. [-]"""
        return len(self.motor_index) * (self.end_gearhead - self.first_gearhead)


@dataclass(frozen=True)
class Found:
    """What one shard, or many, found."""

    survivor_count: int
    losses: Losses
    survivors: Pool
    losers: Pool
    by_drive: Pool

    @classmethod
    def nothing(cls, common: Common, bars: Bars | None = None) -> Found:
        """The answer before anything was screened."""
        bars = bars or Bars()
        return cls(
            0,
            Losses(common.loss_names, listed=common.listed),
            Pool(common.keep, 3, bars.survivors),
            Pool(common.losers, 2, bars.losers),
            Pool(common.losers, 3, bars.by_drive),
        )

    @property
    def bars(self) -> Bars:
        """What the lists still take."""
        return Bars(self.survivors.bar, self.losers.bar, self.by_drive.bar)

    def with_found(self, other: Found) -> Found:
        """Both together; the lists of this one are extended in place."""
        self.losses.extend(other.losses)
        self.survivors.extend(other.survivors)
        self.losers.extend(other.losers)
        self.by_drive.extend(other.by_drive)
        return Found(
            self.survivor_count + other.survivor_count,
            self.losses,
            self.survivors,
            self.losers,
            self.by_drive,
        )


def screen_shard(common: Common, shard: Shard, bars: Bars) -> Found:
    """Screen one shard.

    Parameters
    ----------
    common : Common
        What all shards share. [-]
    shard : Shard
        Which part. [-]
    bars : Bars
        What the lists still take. [-]

    Returns
    -------
    Found
        Counts, and the best of the part. [-]
    """
    found = Found.nothing(common, bars)
    motor_side = MotorSide.of(shard.motors, common.surroundings)
    blocks = tuple(
        Block(load.demand, common.surroundings, common.recommended_inertia_ratio, motor_side, side, load.runs)
        for load, side in zip(common.loads, common.gearhead_sides, strict=True)
    )
    bounds = BlockBounds.of(blocks, common.checks, common.allowed)
    run = _Run(common, shard, bounds, found, TileWorker(PAIRS_PER_TILE))
    passing = list(_compiled_rows(run) if common.compiled else _tiles(run))
    pairs = _Pairs(*(np.concatenate([getattr(part, f.name) for part in passing]) for f in fields(_Pairs)))
    return Found(_screen_drives(run, pairs), found.losses, found.survivors, found.losers, found.by_drive)


@dataclass(frozen=True)
class _Run:
    """A shard at work."""

    common: Common
    shard: Shard
    bounds: BlockBounds
    found: Found
    worker: TileWorker

    def pairs(self, gearhead: NDArray[np.intp], motor: NDArray[np.intp]) -> NDArray[np.intp]:
        """Catalog rows of motor and gearhead for places in the block, shape (n, 2)."""
        return np.column_stack([self.shard.motor_index[motor], self.common.gearhead_index[gearhead]])

    def sets(self, pairs: NDArray[np.intp], drive: NDArray[np.intp]) -> NDArray[np.intp]:
        """Catalog rows of sets, shape (n, 3)."""
        return np.column_stack([pairs, self.shard.drives[drive]])


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


def _tiles(run: _Run) -> Iterator[_Pairs]:
    """Screen the shard in tiles; gives the pairs that may pass."""
    shard = run.shard
    step = max(1, PAIRS_PER_TILE // len(shard.motors))
    with np.errstate(over="ignore"):  # immense ratios stand for what is out of reach
        for start in range(shard.first_gearhead, shard.end_gearhead, step):
            which = slice(start, min(start + step, shard.end_gearhead))
            yield _screen_tile(run, which, run.worker.work(run.bounds, which))


def _compiled_rows(run: _Run) -> Iterator[_Pairs]:
    """The same by compiled loops."""
    from actuator_sizing.sizing.compiled_bounds import BoundsKernel

    shard, losses, drives = run.shard, run.found.losses, len(run.shard.drives)
    kernel = BoundsKernel(run.bounds, float(LIMIT))
    first = shard.first_gearhead
    while first < shard.end_gearhead:
        rows = kernel.work(first, shard.end_gearhead, run.found.losers.bar)
        for (number, _, _), count in zip(run.bounds.by_motor, rows.by_motor, strict=True):
            losses.counts[number] += count * drives
        check = run.bounds.gearhead_check[first : first + len(rows.by_gearhead)]
        np.add.at(losses.counts, check, rows.by_gearhead * drives)
        near = rows.worst > LIMIT
        run.found.losers.add(run.pairs(rows.gearhead[near], rows.motor[near]), rows.worst[near])
        kept = ~near
        yield _Pairs(
            rows.gearhead[kept],
            rows.motor[kept],
            *(part[kept].astype(float) for part in (rows.worst, rows.torque_peak, rows.mean_square)),
        )
        first += len(rows.by_gearhead)


def _screen_tile(run: _Run, which: slice, tile: Tile) -> _Pairs:
    """Count the pairs that fail whatever the drive is; returns those that may pass."""
    losses, worst, drives = run.found.losses, tile.worst, len(run.shard.drives)
    shape = (worst.shape[0], worst.shape[1])
    fails, left, governed = (run.worker.mask(name, shape) for name in ("fails", "left", "governed"))
    np.greater(worst, LIMIT, out=fails)
    np.copyto(left, fails)
    for number, utilisation in tile.by_motor:
        np.equal(utilisation, worst, out=governed)
        governed &= left
        left ^= governed
        losses.counts[number] += np.count_nonzero(governed) * drives
        if losses.listed:
            _list(run, which.start, governed, number, worst)
    # What is left is governed by the gearhead alone.
    if left.any():
        check = run.bounds.gearhead_check[which]
        np.add.at(losses.counts, check, np.count_nonzero(left, axis=1) * drives)
        if losses.listed:
            for number in np.unique(check).tolist():
                _list(run, which.start, left & (check == number)[:, None], number, worst)
    near = np.less_equal(worst, run.found.losers.bar, out=governed)
    near &= fails
    j, i = _places_of(near)
    if len(i):
        run.found.losers.add(run.pairs(which.start + j, i), worst[j, i])
    j, i = _places_of(np.logical_not(fails, out=fails))
    values = (part[j, i].astype(float) for part in (worst, tile.torque_peak, tile.mean_square))
    return _Pairs(which.start + j, i, *values)


def _places_of(mask: NDArray[np.bool_]) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Row and column of what is true; several times faster than `nonzero` of two dimensions."""
    j, i = np.divmod(np.flatnonzero(mask), mask.shape[1])
    return j, i


def _list(
    run: _Run,
    first: int,
    governed: NDArray[np.bool_],
    number: int,
    worst: NDArray[np.float32],
) -> None:
    """List the sets of pairs that one check governs, each with every drive."""
    j, i = _places_of(governed)
    count = len(run.shard.drives)
    pairs = np.repeat(run.pairs(first + j, i), count, axis=0)
    sets = run.sets(pairs, np.tile(np.arange(count), len(i)))
    run.found.losses.keep(sets, np.full(len(sets), number), np.repeat(worst[j, i], count))


def _screen_drives(run: _Run, pairs: _Pairs) -> int:
    """Hold the pairs that may pass against every drive; returns how many sets survive."""
    common, drives, found = run.common, run.shard.drives, run.found
    motors, K = run.shard.motors, run.bounds.blocks[0].judged.torque_constant_nm_per_a
    per_torque = (motor_amplitude_per_unit_current(motors) / K)[pairs.motor]
    peak_a, rms_a = pairs.torque_peak * per_torque, np.sqrt(pairs.mean_square) * per_torque
    key = _pair_key(run, pairs)
    cheapest = common.drive_key[drives].min()
    ranks = DriveRanks(common.drive_side, drives, float(LIMIT))
    total = 0
    step = max(1, _SETS_PER_STEP // len(drives))
    for start in range(0, len(peak_a), step):
        some = slice(start, start + step)
        counts = ranks.count(peak_a[some], rms_a[some], found.by_drive.bar)
        total += int(counts.passing.sum())
        found.losses.counts[-3:] += counts.rejected
        # Only what can still get into a list is looked at set by set.
        wanted = counts.nearly | ((counts.passing > 0) & (key[some] + cheapest <= found.survivors.bar))
        k = start + np.flatnonzero(wanted | common.listed)
        if len(k):
            _list_sets(run, pairs.take(k), peak_a[k], rms_a[k], key[k])
    return total


def _list_sets(run: _Run, pairs: _Pairs, peak_a: FloatArray, rms_a: FloatArray, key: FloatArray) -> None:
    """Offer the sets of K pairs with every drive to the lists of survivors and of losers."""
    common, drives, found = run.common, run.shard.drives, run.found
    stack = common.drive_side.utilisations(peak_a, rms_a, drives)
    drive_worst = stack.max(axis=0)
    survives = drive_worst <= LIMIT
    # What cannot get into a list is not even written down.
    k, d = _places_of(~survives & (common.listed | (drive_worst <= found.by_drive.bar)))
    lost = run.sets(run.pairs(pairs.gearhead[k], pairs.motor[k]), d)
    found.losses.keep(lost, len(common.check_keys) + stack.argmax(axis=0)[k, d], drive_worst[k, d])
    found.by_drive.add(lost, drive_worst[k, d])
    if common.key == "reserve":
        keys = np.maximum(key[:, None], drive_worst)
    else:
        keys = key[:, None] + common.drive_key[drives]
    k, d = _places_of(survives & (keys <= found.survivors.bar))
    found.survivors.add(run.sets(run.pairs(pairs.gearhead[k], pairs.motor[k]), d), keys[k, d])


def _pair_key(run: _Run, pairs: _Pairs) -> FloatArray:
    """What motor and gearhead add to the key that survivors are ordered by, (K,); smaller is better."""
    if run.common.key == "reserve":
        return pairs.worst
    if run.common.key == "energy":
        j = run.bounds.blocks[0].judged
        loss = j.resistance_ohm / j.torque_constant_nm_per_a**2
        return np.asarray(loss[pairs.motor] * pairs.mean_square)
    name = _KEY_FIELD[run.common.key]
    motors, gearheads = getattr(run.shard.motors, name), getattr(run.common.gearheads, name)
    return _finite(motors[pairs.motor] + gearheads[pairs.gearhead])


def drive_keys(key: str, drives: DriveParameters) -> FloatArray:
    """What drives add to the key that survivors are ordered by, shape (D,).

    Parameters
    ----------
    key : str
        ``"price"``, ``"mass"``, ``"reserve"`` or ``"energy"``. [-]
    drives : DriveParameters
        D drives. [-]

    Returns
    -------
    ndarray, shape (D,)
        Price or mass; nothing for what the drive does not decide. [-]
    """
    if key not in _KEY_FIELD:
        return np.zeros(len(drives))
    return _finite(getattr(drives, _KEY_FIELD[key]))


def _finite(values: FloatArray) -> FloatArray:
    """Unknown values at the end of every order."""
    return np.asarray(np.nan_to_num(values, nan=_LAST))
