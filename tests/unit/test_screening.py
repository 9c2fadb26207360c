"""Screening loses no set that passes, counts every set once, and does not depend on its block size."""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.case.model import Limit
from actuator_sizing.core.parameters import DriveParameters
from actuator_sizing.sizing import drive_counts, screening, shard
from actuator_sizing.sizing.block import Block, GearheadSide, MotorSide
from actuator_sizing.sizing.checks import CHECKS
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.drive_counts import DriveRanks
from actuator_sizing.sizing.drive_side import DriveSide
from actuator_sizing.sizing.judging import ORDER, active_checks, is_binding, judge_sets
from actuator_sizing.sizing.results import FAILS
from actuator_sizing.sizing.shortlist import evaluate_sets
from actuator_sizing.sizing.tile import BlockBounds, TileWorker
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, case, catalog, columns, cycle

LAWS = ("trapezoid", "jerk-limited", "3-4-5 polynomial", "cycloidal", "modified sine", "simple harmonic")


def scaled(rng, base, spread, **keep):
    """A part like `base` with its numbers scattered by a factor."""
    made = dict(base)
    for key, value in base.items():
        if isinstance(value, float) and not np.isnan(value) and key not in keep:
            made[key] = value * float(np.exp(rng.uniform(-spread, spread)))
    made.update(keep)
    return made


def random_case(seed):
    rng = np.random.default_rng(seed)
    steady = {"resistance_reference_degc": 25.0, "magnet_reference_degc": 25.0, "pole_pairs": 4.0,
              "magnet_coefficient_per_k": -0.0011, "resistance_coefficient_per_k": 1 / 260,
              "winding_limit_degc": 155.0, "continuous_ambient_degc": 40.0, "nominal_voltage_v": 325.0}  # fmt: skip
    motors = [scaled(rng, MOTOR, 0.9, **steady) for _ in range(7)]
    motors[0]["pole_pairs"] = np.nan
    motors[1]["thermal_resistance_housing_k_w"] = np.nan
    motors[2]["peak_torque_nm"] = 0.7 * motors[2]["peak_current_a"] * motors[2]["torque_constant_nm_per_a"]
    gearheads = [DIRECT] + [
        scaled(rng, GEARHEAD, 0.8, efficiency=rng.uniform(0.6, 0.98), efficiency_back=rng.uniform(-0.3, 0.97))
        for _ in range(5)
    ]
    drives = [
        scaled(rng, DRIVE, 0.8, bus_voltage_min_v=100.0, bus_voltage_max_v=rng.choice([340.0, 400.0]),
               rms_window_s=rng.choice([np.nan, 0.3, 7.0]), efficiency=0.95)
        for _ in range(4)
    ]  # fmt: skip
    law = LAWS[seed % len(LAWS)]
    stroke = rng.uniform(0.1, 0.9)
    values = {
        "lead": rng.choice([0.005, 0.01, 0.02]), "moving mass": rng.uniform(5.0, 60.0),
        "inclination": rng.choice([0.0, 0.5, np.pi / 2]), "efficiency": rng.uniform(0.5, 0.95),
        "guide friction force": rng.uniform(0.0, 80.0), "driven shaft inertia": 1e-4,
    }  # fmt: skip
    segments = cycle(
        {"law": law, "displacement": stroke, "duration_s": stroke / rng.uniform(0.2, 0.7), "payload": 20.0},
        {"law": "dwell", "duration_s": 0.3, "payload": 20.0},
        {"law": law, "displacement": -stroke, "duration_s": stroke / rng.uniform(0.2, 0.7)},
        {"law": "dwell", "duration_s": 0.6, "brake_closed": bool(seed % 2)},
    )
    return case("ball screw", values, segments, motors=motors, gearheads=gearheads, drives=drives)


def brute_force(made):
    """Every set evaluated exactly."""
    sizes = (len(made.motor_parameters), len(made.gearhead_parameters), len(made.drive_parameters))
    index = np.stack(np.meshgrid(*(np.arange(n) for n in sizes), indexing="ij"), axis=-1).reshape(-1, 3)
    demand = build_demand(made)
    checks, limits = active_checks(made.limits)
    return index, judge_sets(evaluate_sets(made, demand, index), checks, limits)


def screened(made, key="price", keep=10_000, **options):
    demand = build_demand(made)
    checks, limits = active_checks(made.limits)
    binding = tuple(c for c, limit in zip(checks, limits, strict=True) if is_binding(c, limit))
    allowed = {c.key: made.limits[c.key].allowed_utilisation for c in binding}
    return screening.screen(made, demand, binding, allowed, key, keep=keep, losers=10, **options)


@pytest.mark.parametrize("seed", range(200))
def test_no_passing_set_is_lost(seed):
    made = random_case(seed)
    index, verdicts = brute_force(made)
    answer = screened(made)
    survivors = {tuple(row) for row in answer.survivors.tolist()}
    passing = {tuple(row) for row in index[verdicts.verdict != ORDER.index(FAILS)].tolist()}
    assert passing <= survivors
    lost = {tuple(row) for row in answer.lost.tolist()}
    assert not lost & survivors
    assert len(lost) + len(survivors) == answer.screened == len(index)
    assert sum(answer.rejected_by_check.values()) == len(lost)


def test_the_random_cases_have_winners_and_losers():
    # Without both, the test above would prove nothing.
    passing = [
        int((brute_force(random_case(seed))[1].verdict != ORDER.index(FAILS)).sum()) for seed in range(30)
    ]
    assert sum(n > 0 for n in passing) > 10
    assert min(passing) < 50


def test_blocks_of_any_size_give_the_same_answer(monkeypatch):
    made = random_case(4)
    whole = screened(made)
    monkeypatch.setattr(screening, "_MOTORS_PER_BLOCK", 2)
    monkeypatch.setattr(screening, "PAIRS_PER_TILE", 2)
    monkeypatch.setattr(shard, "PAIRS_PER_TILE", 2)
    monkeypatch.setattr(screening, "_PAIRS_PER_SHARD", 4)
    pieces = screened(made)
    assert whole.rejected_by_check == pieces.rejected_by_check
    np.testing.assert_array_equal(whole.survivors, pieces.survivors)
    np.testing.assert_array_equal(whole.nearest_losers, pieces.nearest_losers)


@pytest.mark.parametrize("key", ["price", "mass", "reserve", "energy"])
@pytest.mark.parametrize("keep", [3, 10_000])
def test_large_catalogs_are_counted_as_small_ones_are_listed(monkeypatch, key, keep):
    # Drives of large catalogs are counted by their ranks, those of small ones set by set.
    rejected_by_drive = 0
    for seed in range(20):
        made = random_case(seed)
        made = replace(made, motor_parameters=replace(made.motor_parameters, price=np.full(7, np.nan)))
        listed = screened(made, key=key, keep=keep)
        with monkeypatch.context() as patch:
            patch.setattr(screening, "LISTED_SETS", 0)
            patch.setattr(drive_counts, "_LARGEST_TABLE", 3)
            counted = screened(made, key=key, keep=keep)
        assert counted.rejected_by_check == listed.rejected_by_check
        assert counted.survivor_count == listed.survivor_count
        for name in ("survivors", "nearest_losers", "nearest_by_drive"):
            np.testing.assert_array_equal(getattr(counted, name), getattr(listed, name))
        rejected_by_drive += len(listed.nearest_by_drive)
    assert rejected_by_drive > 20  # else the test proves nothing


def test_of_several_cycles_the_worst_counts():
    # The heavier cycle alone, and both together: a lighter one must not lift any bound.
    made = random_case(3)
    lighter = replace(made, segments=made.segments[:2])
    checks = tuple(check for check in CHECKS if check.bound is not None and not check.is_advice)
    keys = {check.key: 1.0 for check in checks}

    def worst(*demands):
        motors = MotorSide.of(made.motor_parameters, made.surroundings)
        sides = [GearheadSide.of(made.gearhead_parameters, demand) for demand in demands]
        blocks = tuple(
            Block(demand, made.surroundings, 10.0, motors, side)
            for demand, side in zip(demands, sides, strict=True)
        )
        tile = TileWorker(64).work(BlockBounds.of(blocks, checks, keys), slice(0, 6))
        return tile.worst.copy(), tile.torque_peak.copy(), tile.mean_square.copy()

    one, other = build_demand(made), build_demand(lighter)
    for both, first, second in zip(worst(one, other), worst(one), worst(other), strict=True):
        np.testing.assert_array_equal(both, np.maximum(first, second))


def test_the_ranks_of_drives_agree_with_asking_every_drive():
    rng = np.random.default_rng(5)
    made = random_case(0)
    drives = [scaled(rng, DRIVE, 1.2, bus_voltage_min_v=100.0, efficiency=0.95,
                     bus_voltage_max_v=rng.choice([340.0, 400.0])) for _ in range(40)]  # fmt: skip
    drives[0]["peak_current_a"] = drives[1]["continuous_current_a"] = np.nan
    made = replace(
        made, drives=catalog("drives", len(drives)), drive_parameters=columns(DriveParameters, drives)
    )
    allowed = {"drive_peak_current": 0.9, "drive_continuous_current": 0.8, "drive_bus_voltage": 1.0}
    side = DriveSide(made, allowed)
    peak, rms = rng.uniform(0.0, 60.0, 500), rng.uniform(0.0, 20.0, 500)
    every = np.arange(len(drives))
    stack = side.utilisations(peak, rms, every)
    worst = stack.max(axis=0)
    counts = DriveRanks(side, every, 1.0).count(peak, rms, bar=1.05)
    np.testing.assert_array_equal(counts.passing, (worst <= 1.0).sum(axis=1))
    governing = stack.argmax(axis=0)[worst > 1.0]
    assert list(counts.rejected) == np.bincount(governing, minlength=3).tolist()
    assert min(counts.rejected) > 0
    near = ((worst > 1.0) & (worst <= 1.05)).any(axis=1)
    assert not np.any(near & ~counts.nearly)


def test_bounds_are_below_exact_utilisations():
    for seed in range(12):
        made = random_case(seed)
        index, verdicts = brute_force(made)
        answer = screened(made)
        exact = {tuple(row): u for row, u in zip(index.tolist(), verdicts.severity, strict=True)}
        for row, bound in zip(answer.lost.tolist(), answer.lost_bound, strict=True):
            # 1e-5: rounding of single precision in the bounds.
            assert bound <= exact[tuple(row)] * (1.0 + 1e-5)


def overloaded(limits=None):
    """Passes but for the drive, whose continuous current is just below the RMS current of the cycle."""
    segments = cycle({"law": "trapezoid", "displacement": 0.3, "duration_s": 0.5},
                     {"law": "trapezoid", "displacement": -0.3, "duration_s": 0.5})  # fmt: skip
    values = {"lead": 0.02, "moving mass": 40.0, "efficiency": 0.9}
    rms = compare(case("ball screw", values, segments, gearheads=(DIRECT,))).best.quantities["current_rms_a"]
    drive = dict(DRIVE, continuous_current_a=float(rms) / 1.02)
    return compare(
        case("ball screw", values, segments, gearheads=(DIRECT,), drives=(drive,), limits=limits)
    ).best


def test_a_drive_overloaded_for_ever_is_told_by_how_much():
    best = overloaded()
    assert best.check("drive_peak_time").utilisation == np.inf
    assert best.check("drive_peak_time").verdict == FAILS
    assert best.governing_check == "drive_continuous_current"
    # 1e-9: rounding; the factor is put in above.
    assert best.check("drive_continuous_current").utilisation == pytest.approx(1.02, rel=1e-9)


@pytest.mark.parametrize("applies", ["no", "advice"])
def test_the_peak_time_governs_where_the_continuous_current_is_no_limit(applies):
    best = overloaded({"drive_continuous_current": Limit("drive_continuous_current", applies, 1.0, 0.1)})
    assert (best.verdict, best.governing_check) == (FAILS, "drive_peak_time")


def test_a_comparison_lists_passing_sets_by_price_and_then_the_nearest_losers():
    made = random_case(0)
    comparison = compare(made)
    verdicts = [one.verdict for one in comparison.sets]
    assert verdicts == sorted(verdicts, key=lambda v: v == FAILS)
    prices = [one.price for one in comparison.sets if one.verdict != FAILS]
    assert prices == sorted(prices)
    assert (
        comparison.rejections.rejected + comparison.rejections.confirmed_passing
        <= comparison.rejections.screened
    )


@pytest.mark.parametrize("seed", range(12))
def test_the_counts_of_losers_agree_with_the_list_of_candidates(seed):
    comparison = compare(random_case(seed))
    frame = comparison.candidates
    listed = frame[frame["verdict"] == FAILS]["governing_check"].value_counts().to_dict()
    assert listed == dict(comparison.rejections.by_check)
