"""A measured cycle: period, closure, smoothing, condensation without loss of means, and what is refused."""

import numpy as np
import pytest

from actuator_sizing.case.reading import check_case
from actuator_sizing.core.condensing import condense
from actuator_sizing.core.measured import find_period
from actuator_sizing.core.periodic_spline import smooth_position
from actuator_sizing.sizing.demand import build_demand
from tests.unit.case_files import small_case, write_folder

RNG = np.random.default_rng(11)


def uneven(count, period):
    t = np.linspace(0.0, period, count, endpoint=False) + RNG.uniform(-0.3, 0.3, count) * period / count
    return np.sort(t - t[0])


# -- core -------------------------------------------------------------------------------------------


@pytest.mark.parametrize("order", [0, 1])
def test_spline_gives_back_a_smooth_motion(order):
    t = uneven(4000, 2.0)
    w = 2.0 * np.pi / 2.0

    def exact(t, n):
        return (0.1 * w**n) * np.sin(w * t + n * np.pi / 2) + 0.03 * (2 * w) ** n * np.cos(
            2 * w * t + n * np.pi / 2
        )

    (spline,) = smooth_position(t, exact(t, order), 2.0, [10.0], 0.0, order)
    at = np.linspace(0.0, 2.0, 333)
    # Degree 5, knots every 1/20 of the period of the faster wave: (ωh)⁶/… below 1e-6, its second derivative 1e-4.
    for n, tolerance in ((1, 1e-5), (2, 1e-3)):
        np.testing.assert_allclose(spline.values(at, n), exact(at, n), atol=tolerance * 0.1 * (2 * w) ** n)
    assert spline.values(np.array([0.0, 2.0]), 2) == pytest.approx([spline.values(np.zeros(1), 2)[0]] * 2)


def test_noise_shrinks_with_the_cut_off():
    t = uneven(20_000, 1.0)
    x = np.sin(2 * np.pi * t) + RNG.normal(0.0, 1e-3, len(t))
    errors = [
        float(np.sqrt(np.mean((spline.values(t, 2) + (2 * np.pi) ** 2 * np.sin(2 * np.pi * t)) ** 2)))
        for spline in smooth_position(t, x, 1.0, (10.0, 20.0, 40.0), 0.0)
    ]
    # Of white noise the second derivative grows with the cut-off to the power 5/2: about 5.7 times per octave.
    assert errors[0] < errors[1] / 3.0 < errors[2] / 9.0


def test_the_period_is_found():
    t = np.sort(RNG.uniform(0.0, 7.3, 5000))
    for period in (1.0, 2.2, 3.3):
        x = np.sin(2 * np.pi * t / period) + 0.5 * np.sin(6 * np.pi * t / period + 1.0)
        assert find_period(t, x + RNG.normal(0.0, 0.02, len(t))) == pytest.approx(period, rel=2e-3)
    assert np.isnan(find_period(t, t**2))
    assert np.isnan(find_period(t, np.zeros_like(t)))


def test_condensing_keeps_every_mean_of_products():
    columns = np.cumsum(RNG.normal(size=(3000, 3)), axis=0) * [1.0, 1e-4, 1e3]
    weight = RNG.uniform(0.0, 1.0, 3000)
    index, kept = condense(columns, weight)
    assert len(index) <= 10
    assert kept.min() > 0.0
    assert kept.sum() == pytest.approx(weight.sum(), rel=1e-11)
    scale = np.abs(columns).max(axis=0)
    for one in range(3):
        z = columns[:, one] / scale[one]
        assert kept @ z[index] == pytest.approx(weight @ z, abs=1e-9 * weight.sum())
        for other in range(3):
            y = columns[:, other] / scale[other]
            assert kept @ (z * y)[index] == pytest.approx(weight @ (z * y), abs=1e-9 * weight.sum())


def test_condensing_a_constant():
    index, kept = condense(np.full((500, 3), 7.0), np.ones(500))
    assert kept.sum() == pytest.approx(500.0)
    assert len(index) == 1


# -- the chain --------------------------------------------------------------------------------------


def measured_case(rows, heading, **axis):
    tables = small_case()
    del tables["duty_cycle"]
    tables["measured"] = [heading, *rows]
    tables["axis"] += [[name.replace("_", " "), *value] for name, value in axis.items()]
    return tables


def errors_of(tmp_path, tables):
    case, problems = check_case(write_folder(tmp_path / "case", tables))
    return case, [p for p in problems if p.severity == "error"], problems


def torque_rms(demand):
    return float(np.sqrt(demand.mean(demand.shaft_torque**2)))


def by_hand(t, T, period):
    """Mean square and peak of samples that are linear in between, closed."""
    t, T = np.append(t, period), np.append(T, T[0])
    a, b = T[:-1], T[1:]
    return float(np.sqrt(np.sum(np.diff(t) * (a * a + a * b + b * b)) / (3.0 * period))), float(
        np.abs(T).max()
    )


@pytest.mark.parametrize("count", [40, 300, 6000])
def test_a_recorded_torque_is_exact_between_samples(tmp_path, count):
    """RMS and peak by the closed form, whether every stretch is kept or the record is condensed."""
    t = uneven(count, 4.0).round(6)
    T = (2.0 * np.sin(2 * np.pi * t / 4.0) + RNG.normal(0.0, 0.3, count)).round(4)
    tables = measured_case(
        list(zip(t.tolist(), T.tolist(), strict=True)),
        ["time [s]", "shaft torque [Nm]"],
        measured_period=[4, "s"],
    )
    case, errors, _ = errors_of(tmp_path, tables)
    assert errors == []
    demand = build_demand(case)
    rms, peak = by_hand(t, T, 4.0)
    assert demand.cycle_s == pytest.approx(4.0, rel=1e-12)
    assert torque_rms(demand) == pytest.approx(rms, rel=1e-9)  # extremes are given 1e-12 of the cycle each
    assert demand.shaft_torque_peak == pytest.approx(peak, rel=1e-12)
    assert len(demand.duration_s) < 1000


def test_condensed_agrees_with_every_stretch(tmp_path, monkeypatch):
    """The same noisy record with motion, condensed and in full."""
    from actuator_sizing.sizing import measured_demand

    t = uneven(5000, 3.0).round(6)
    x = (100 * (1 - np.cos(2 * np.pi * t / 3.0)) + RNG.normal(0, 0.02, len(t))).round(4)
    F = (30 * np.sin(2 * np.pi * t / 1.5) + RNG.normal(0, 5.0, len(t))).round(3)
    rows = list(zip(t.tolist(), x.tolist(), F.tolist(), strict=True))
    tables = measured_case(rows, ["time [s]", "position [mm]", "process force [N]"], measured_period=[3, "s"],
                           **{"smoothing_cut-off": [6, "Hz"], "remove_drift": ["yes", ""]})  # fmt: skip
    case, errors, problems = errors_of(tmp_path, tables)
    assert errors == []
    assert any("at 12 Hz" in p.got for p in problems)  # what the choice of the cut-off decides
    condensed = build_demand(case)
    monkeypatch.setattr(measured_demand, "EXACT_INTERVALS", 10**6)
    full = build_demand(case)
    assert len(condensed.duration_s) < len(full.duration_s) / 5
    assert torque_rms(condensed) == pytest.approx(torque_rms(full), rel=1e-9)
    for name in ("shaft_speed_rms", "shaft_speed_mean"):
        assert getattr(condensed, name) == pytest.approx(getattr(full, name), rel=1e-9)
    # The fan of directions keeps the extreme of each group of 32 stretches.
    assert condensed.shaft_torque_peak == pytest.approx(full.shaft_torque_peak, rel=1e-6)
    products = [d.mean(d.functions[1] * d.shaft_speed) for d in (condensed, full)]
    assert products[0] == pytest.approx(products[1], rel=1e-9)  # energy while motoring


def test_current_becomes_torque(tmp_path):
    t = uneven(200, 1.0).round(6)
    i = np.sin(2 * np.pi * t).round(5)
    rows = list(zip(t.tolist(), i.tolist(), strict=True))
    heading = ["time [s]", "current [A]"]
    case, errors, _ = errors_of(tmp_path, measured_case(rows, heading, measured_period=[1, "s"],
                                                        recorded_torque_constant=[0.5, "Nm/A"]))  # fmt: skip
    assert errors == []
    assert torque_rms(build_demand(case)) == pytest.approx(0.5 * by_hand(t, i, 1.0)[0], rel=1e-12)
    _, errors, _ = errors_of(tmp_path / "2", measured_case(rows, heading, measured_period=[1, "s"]))
    assert [p.got for p in errors] == ["a current"]


def test_long_files_are_read_the_short_way_with_the_same_result(tmp_path):
    from actuator_sizing.case.sample_files import read_samples

    t = np.arange(30_000) * 1e-4
    T = np.sin(2 * np.pi * t / 3.0).round(5)
    rows = list(zip(t.round(4).tolist(), T.tolist(), strict=True))
    tables = measured_case(rows, ["time [s]", "shaft torque [Nm]"])
    prints = set()
    for delimiter, decimal in ((",", "."), (";", ",")):
        folder = write_folder(tmp_path / decimal / "c", tables, delimiter=delimiter, decimal=decimal)
        assert read_samples(folder / "measured.csv", "measured") is not None
        case, _ = check_case(folder)
        prints.add(case.fingerprint)
        text = (folder / "measured.csv").read_text("utf-8")
        (folder / "measured.csv").write_text(text + f"\n3{decimal}0000{delimiter}x\n", encoding="utf-8")
        broken, problems = check_case(folder)
        assert broken is None
        assert any(p.table == "measured" and p.row and "x" in p.got for p in problems)
    assert len(prints) == 1


# -- refusals ---------------------------------------------------------------------------------------

TIMES = [round(0.05 * k, 3) for k in range(40)]


@pytest.mark.parametrize(
    ("change", "row", "got"),
    [
        (lambda rows: rows.insert(6, [rows[5][0], 1.0]), 8, "repeats the time"),
        (lambda rows: rows.insert(6, [0.01, 1.0]), 8, "goes back in time"),
        (lambda rows: rows.__delitem__(slice(8, None)), None, "8 samples"),
        (lambda rows: rows[20].__setitem__(1, "lost"), 22, "lost"),
    ],
)
def test_bad_samples_name_the_row(tmp_path, change, row, got):
    rows = [[t, round(float(np.sin(np.pi * t)), 5)] for t in TIMES]
    change(rows)
    case, errors, _ = errors_of(tmp_path, measured_case(rows, ["time [s]", "shaft torque [Nm]"],
                                                        measured_period=[2, "s"]))  # fmt: skip
    assert case is None
    assert errors[0].row == row
    assert got in errors[0].got
    assert errors[0].remedy


def test_gap_and_constant_signal_are_told(tmp_path):
    rows = [[t, 3.0] for t in TIMES if not 0.4 < t < 1.3]
    case, errors, problems = errors_of(tmp_path, measured_case(rows, ["time [s]", "shaft torque [Nm]"],
                                                               measured_period=[2, "s"]))  # fmt: skip
    assert errors == []
    told = [p for p in problems if p.severity == "warning" and p.table == "measured"]
    assert any("gap of 0.9 s" in p.got and p.row == 11 for p in told)
    assert any("same value" in p.got for p in told)
    assert torque_rms(build_demand(case)) == pytest.approx(3.0, rel=1e-12)


def test_a_record_that_never_repeats(tmp_path):
    rows = [[t, round(t * t, 4)] for t in TIMES]
    _, errors, _ = errors_of(tmp_path, measured_case(rows, ["time [s]", "shaft torque [Nm]"]))
    assert ["neither repeats" in p.got for p in errors] == [True]
    assert errors[0].row == 41


def test_motion_needs_a_cut_off_within_reach(tmp_path):
    rows = [[t, round(float(np.sin(np.pi * t)), 5)] for t in TIMES]
    heading = ["time [s]", "position [mm]"]
    _, errors, _ = errors_of(tmp_path, measured_case(rows, heading, measured_period=[2, "s"]))
    assert ["cut-off" in p.allowed for p in errors] == [True]
    cut_off = {"smoothing_cut-off": [500, "Hz"]}
    _, errors, _ = errors_of(
        tmp_path / "2", measured_case(rows, heading, measured_period=[2, "s"], **cut_off)
    )
    assert [p.column for p in errors] == ["smoothing cut-off"]
    assert "at most 10 Hz" in errors[0].allowed


def test_absurd_acceleration_is_told(tmp_path):
    rows = [[t, round(float(1e6 * np.sin(np.pi * t)), 5)] for t in TIMES]
    cut_off = {"smoothing_cut-off": [5, "Hz"]}
    _, _, problems = errors_of(tmp_path, measured_case(rows, ["time [s]", "position [m]"], measured_period=[2, "s"],
                                                       **cut_off))  # fmt: skip
    assert any(p.severity == "warning" and "an axis can have" in p.allowed for p in problems)


def test_the_demo_case_is_two_cycles_of_a_shuttle():
    from pathlib import Path

    folder = Path(__file__).parents[2] / "catalogs_demo" / "tray_shuttle_measured"
    case, problems = check_case(folder)
    assert [p for p in problems if p.severity in ("error", "warning")] == []
    demand = build_demand(case)
    assert demand.cycle_s == pytest.approx(18.0)
    # Made from moves of 2.4 m there and back, twice, with 0.05 mm of noise on the position.
    assert demand.mean(np.abs(demand.speed)) * 18.0 == pytest.approx(9.6, rel=2e-3)
    # Made with 30 N in 2.6 s of each 9 s and 18 N in the rest, with 1.5 N of noise around them.
    process = demand.torque_by_cause["process"] * demand.shaft_speed / demand.speed.clip(1e-9, None)
    moving = demand.speed > 0.3
    assert float(np.mean(process[moving])) == pytest.approx(30.0, abs=1.0)


@pytest.mark.parametrize("order", [0, 1])
def test_noise_of_the_speed_is_foretold(order):
    from actuator_sizing.case.measuring import speed_noise

    t = uneven(20_000, 10.0)
    value = RNG.normal(0.0, 1e-4, len(t))
    (spline,) = smooth_position(t, value, 10.0, (20.0,), 0.0, order)
    found = float(np.std(spline.values(np.linspace(0.0, 10.0, 5000), 1)))
    # A spline's edge at the cut-off is not sharp: it passes somewhat more of what grows with frequency.
    assert found / speed_noise(spline, t, value, order) == pytest.approx(1.0, abs=0.35)
