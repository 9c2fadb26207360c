"""The loops for the optional compiler say what the matrix products say, compiled or as they stand."""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.sizing import screening
from actuator_sizing.sizing.block import Block, GearheadSide, MotorSide
from actuator_sizing.sizing.checks import CHECKS
from actuator_sizing.sizing.compiled_bounds import BoundsKernel
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.tile import BlockBounds, TileWorker
from actuator_sizing.sizing.tile_kernel import bounds_of_rows, compiled_loops
from tests.unit.test_screening import random_case, screened

LIMIT = 1.00001


def bounds_of(seed, several=False, allowed=1.0):
    made = random_case(seed)
    demands = [build_demand(made)]
    if several:
        demands.append(build_demand(replace(made, segments=made.segments[:2])))
    motors = MotorSide.of(made.motor_parameters, made.surroundings)
    blocks = tuple(
        Block(demand, made.surroundings, 10.0, motors, GearheadSide.of(made.gearhead_parameters, demand))
        for demand in demands
    )
    checks = tuple(check for check in CHECKS if check.bound is not None)
    return BlockBounds.of(blocks, checks, {check.key: allowed for check in checks})


def loops():
    yield pytest.param(bounds_of_rows, id="as they stand")
    compiled = compiled_loops()
    if compiled is not None:
        yield pytest.param(compiled, id="compiled")


@pytest.mark.parametrize("loop", list(loops()))
@pytest.mark.parametrize(("several", "allowed"), [(False, 1.0), (True, 0.8)])
def test_loops_agree_with_matrix_products(loop, several, allowed):
    failing = 0
    for seed in range(6):
        bounds = bounds_of(seed, several, allowed)
        tile = TileWorker(64).work(bounds, slice(0, 6))
        kernel = BoundsKernel(bounds, LIMIT, loop)
        with np.errstate(over="ignore"):
            rows = kernel.work(0, 6, bar=np.inf)  # every pair is of interest
        place = (rows.gearhead, rows.motor)
        assert len(rows.worst) == tile.worst.size
        # 1e-5: single precision, sums in another order.
        for mine, theirs in ((rows.worst, tile.worst), (rows.torque_peak, tile.torque_peak),
                             (rows.mean_square, tile.mean_square)):  # fmt: skip
            np.testing.assert_allclose(mine, theirs[place], rtol=1e-5, atol=1e-9)
        assert rows.by_motor.sum() + rows.by_gearhead.sum() == np.sum(tile.worst > LIMIT)
        failing += int(rows.by_motor.sum())
    assert failing > 20


def test_the_work_goes_on_where_the_room_for_pairs_ended(monkeypatch):
    monkeypatch.setattr("actuator_sizing.sizing.compiled_bounds._MOST_FOUND", 10)
    bounds = bounds_of(2)
    kernel = BoundsKernel(bounds, LIMIT, bounds_of_rows)
    found, first = [], 1
    while first < 6:
        with np.errstate(over="ignore"):
            rows = kernel.work(first, 6, bar=np.inf)
        assert len(rows.by_gearhead) == 1  # 7 motors in 10 places
        found += zip(rows.gearhead.tolist(), rows.motor.tolist(), strict=True)
        first += 1
    assert found == [(j, i) for j in range(1, 6) for i in range(7)]


@pytest.mark.parametrize("key", ["price", "reserve"])
def test_compiled_screening_finds_the_same(monkeypatch, key):
    monkeypatch.setattr(screening, "LISTED_SETS", 0)
    for seed in range(8):
        made = random_case(seed)
        plain = screened(made, key=key)
        with monkeypatch.context() as patch, np.errstate(over="ignore"):
            patch.setattr(screening, "_is_compiled", lambda _pairs, _executor: True)
            compiled = screened(made, key=key)
        assert compiled.rejected_by_check == plain.rejected_by_check
        assert compiled.survivor_count == plain.survivor_count
        for name in ("survivors", "nearest_losers", "nearest_by_drive"):
            np.testing.assert_array_equal(getattr(compiled, name), getattr(plain, name))
