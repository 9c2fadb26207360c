"""All motor × gearhead × drive sets at once, by lower bounds: who can possibly pass, who fails and why.

RMS torque is exact from moments, peaks are lower bounds from support points, so that no set that passes is
ever lost; the survivors are then evaluated exactly. A set whose motor and gearhead fail whatever the drive is
counted under the worst of their checks, the others under the worst check of the drive.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import Executor, ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import dataclass
from importlib.util import find_spec
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.sizing.cycles import CycleDemand
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.drive_side import DriveSide
from actuator_sizing.sizing.executing import Interruption, work_through
from actuator_sizing.sizing.fitting import compatible, fits_axis
from actuator_sizing.sizing.shard import PAIRS_PER_TILE, Common, Found, Load, Shard, drive_keys, screen_shard

if TYPE_CHECKING:
    from actuator_sizing.sizing.checkpoint import Checkpoint
    from actuator_sizing.sizing.checks.base import Check

FloatArray = NDArray[np.float64]

_MOTORS_PER_BLOCK = 2048
_PAIRS_PER_SHARD = 2**23  # a few tenths of a second
_COMPILED_PAIRS = 1e8
LISTED_SETS = 200_000  # up to so many sets, each loser is listed with what governs it


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
    executor: Executor | None = None,
    checkpoint: Checkpoint | None = None,
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
    executor : Executor, optional
        Where the shards are worked out; default: here, one after the other. The answer is the same, bit for bit. [-]
    checkpoint : Checkpoint, optional
        Where what was found is kept, so that a stopped screening can go on. [-]
    progress : callable, optional
        Called with the part done, 0 to 1. [-]

    Returns
    -------
    Screened
        Counts, survivors and nearest losers. [-]

    Raises
    ------
    StoppedError
        If the work is interrupted and a checkpoint keeps what was found.
    """
    motor_index, gearhead_index = fits_axis(case)
    drives = case.drive_parameters
    total = len(case.motor_parameters) * len(case.gearhead_parameters) * len(drives)
    common = Common(
        loads=_loads(demand),
        surroundings=case.surroundings,
        recommended_inertia_ratio=case.number("recommended inertia ratio"),
        check_keys=tuple(check.key for check in checks if check.bound is not None),
        allowed=dict(allowed),
        gearheads=case.gearhead_parameters.take(gearhead_index),
        gearhead_index=gearhead_index,
        drive_side=DriveSide(case, allowed),
        drive_key=drive_keys(key, drives),
        key=key,
        keep=keep,
        losers=losers,
        listed=total <= LISTED_SETS,
        compiled=total > LISTED_SETS and _is_compiled(len(motor_index) * len(gearhead_index), executor),
    )
    shards = tuple(_shards(case, motor_index, len(gearhead_index)))
    found = _work(common, shards, executor, checkpoint, progress)
    screened = sum(shard.pairs * len(shard.drives) for shard in shards)
    losses = found.losses
    counts: dict[str, int] = {}
    for name, number in zip(losses.names, losses.counts, strict=True):
        counts[name] = counts.get(name, 0) + int(number)
    lost, lost_check, lost_bound = losses.table()
    return Screened(
        sets_total=total,
        incompatible=total - screened,
        screened=screened,
        rejected_by_check={name: count for name, count in counts.items() if count},
        survivor_count=found.survivor_count,
        survivors=found.survivors.best()[0],
        nearest_losers=found.losers.best()[0],
        nearest_by_drive=found.by_drive.best()[0],
        lost=lost,
        lost_check=lost_check,
        lost_bound=lost_bound,
        check_names=losses.names,
    )


def _is_compiled(pairs: int, executor: Executor | None) -> bool:
    """Whether the optional compiler pays: it takes seconds to load. The workers of a cluster may not have it."""
    local = executor is None or isinstance(executor, ThreadPoolExecutor | ProcessPoolExecutor)
    return local and pairs >= _COMPILED_PAIRS and find_spec("numba") is not None


def _loads(demand: Demand | tuple[CycleDemand, ...]) -> tuple[Load, ...]:
    if isinstance(demand, tuple):
        return tuple(Load(each.demand, each.cycle.runs) for each in demand)
    return (Load(demand),)


def _shards(case: Case, motor_index: NDArray[np.intp], gearheads: int) -> Iterator[Shard]:
    """Motors in blocks that the same drives serve, against as many gearheads as make a shard."""
    commutation = case.motor_parameters.commutation[motor_index]
    number = 0
    for kind in np.unique(commutation):
        members = motor_index[commutation == kind]
        one = case.motor_parameters.take(members[:1])
        drives = np.flatnonzero(compatible(one, case.drive_parameters)[0])
        if not len(drives):
            continue
        for start in range(0, len(members), _MOTORS_PER_BLOCK):
            block = members[start : start + _MOTORS_PER_BLOCK]
            motors = case.motor_parameters.take(block)
            tile = max(1, PAIRS_PER_TILE // len(block))
            span = tile * max(1, _PAIRS_PER_SHARD // (tile * len(block)))
            for first in range(0, gearheads, span):
                yield Shard(number, motors, block, drives, first, min(first + span, gearheads))
                number += 1


def _work(
    common: Common,
    shards: tuple[Shard, ...],
    executor: Executor | None,
    checkpoint: Checkpoint | None,
    progress: Callable[[float], None] | None,
) -> Found:
    """Work the shards out and add up what they found, going on from a checkpoint where there is one."""
    found = Found.nothing(common)
    done: set[int] = set()
    if checkpoint is not None:
        found, done = checkpoint.load(found)
    pairs = sum(shard.pairs for shard in shards)
    worked = sum(shard.pairs for shard in shards if shard.number in done)

    def tasks() -> Iterator[tuple[Shard, tuple[object, ...]]]:
        for shard in shards:
            if shard.number not in done:
                yield shard, (common, shard, found.bars)

    with Interruption(held_back=checkpoint is not None) as interruption:
        try:
            for shard, part in work_through(screen_shard, tasks(), executor):
                found = found.with_found(part)
                done.add(shard.number)
                worked += shard.pairs
                if checkpoint is not None:
                    checkpoint.save(found, done, worked / pairs)
                if progress is not None:
                    progress(worked / pairs)
                interruption.raise_if_requested()
        except KeyboardInterrupt:
            if checkpoint is None:
                raise
            raise checkpoint.stopped(found, done, worked / pairs) from None
    if checkpoint is not None and shards:
        checkpoint.save(found, done, 1.0, at_once=True)
    return found
