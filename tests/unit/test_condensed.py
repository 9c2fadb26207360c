"""A long record in few pieces: windows and accumulators never milder than the record, heat in order of time,
mechanisms whose ratio changes, and a payload that changes on the way."""

import numpy as np
import pytest

from actuator_sizing.case.reading import check_case
from actuator_sizing.core.mechanisms import GRAVITY_M_S2
from actuator_sizing.core.window_bounds import overload_bound, windowed_rms_bound
from actuator_sizing.core.windows import overload_accumulator, windowed_rms
from actuator_sizing.sizing import compare, condensed_demand, measured_demand
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.pair_course import air_gap_coefficients, air_gap_torque
from tests.unit.case_files import small_case, write_folder

RNG = np.random.default_rng(23)


def samples(count, period):
    t = np.linspace(0.0, period, count, endpoint=False) + RNG.uniform(-0.3, 0.3, count) * period / count
    return np.sort(t - t[0]).round(7)


def written(folder, columns, axis, replaced=()):
    """A case with a record in place of its duty cycle; `replaced` quantities of the small case are left out."""
    tables = small_case()
    del tables["duty_cycle"]
    tables["axis"] = [row for row in tables["axis"] if row[0] not in replaced]
    tables["axis"] += [[name, *value] for name, value in axis.items()]
    rows = zip(*(np.asarray(values).tolist() for values in columns.values()), strict=True)
    tables["measured"] = [list(columns), *(list(row) for row in rows)]
    return write_folder(folder, tables)


def understood(folder, *stated, **kept):
    case, problems = check_case(written(folder, *stated, **kept))
    assert [str(p) for p in problems if p.severity == "error"] == []
    return case


def lift(folder, count=8000, **more):
    t = samples(count, 3.0)
    w = 2.0 * np.pi / 3.0
    columns = {
        "time [s]": t,
        "position [mm]": (100 * (1 - np.cos(w * t))).round(5),
        "process force [N]": (300 * np.sin(w * t) ** 7 + RNG.normal(0, 8.0, count)).round(3),
    }
    axis = {"measured period": [3, "s"], "smoothing cut-off": [6, "Hz"], "remove drift": ["yes", ""]}
    return understood(folder, columns | more, axis)


@pytest.fixture(scope="module")
def lifted(tmp_path_factory):
    return lift(tmp_path_factory.mktemp("lift") / "c")


def in_full(case, monkeypatch):
    monkeypatch.setattr(measured_demand, "EXACT_INTERVALS", 10**9)
    demand = build_demand(case)
    monkeypatch.undo()
    assert demand.slices is None
    return demand


def torques(case, demand):
    return air_gap_torque(demand, case.motor_parameters, case.gearhead_parameters.take(slice(0, 2)))[0]


def test_slices_hold_the_mean_square_torque_of_every_pair(lifted, monkeypatch):
    demand, full = build_demand(lifted), in_full(lifted, monkeypatch)
    coefficients = air_gap_coefficients(lifted.motor_parameters, lifted.gearhead_parameters.take(slice(0, 2)))
    slices = demand.slices.squared_torque(coefficients)
    exact = full.mean(torques(lifted, full) ** 2)
    np.testing.assert_allclose(slices.sum(axis=1) / full.cycle_s, exact, rtol=1e-9)  # sums of 1e4 terms
    np.testing.assert_allclose(demand.mean(torques(lifted, demand) ** 2), exact, rtol=1e-9)
    # In the first tenth of the cycle alone, too.
    edge = np.cumsum(demand.slices.duration_s)
    part = slices[:, edge < 0.3 + 1e-9].sum(axis=1)
    inside = full.start_s + full.duration_s <= edge[edge < 0.3 + 1e-9][-1] + 1e-9
    square = torques(lifted, full) ** 2
    by_hand = (square @ np.array([1.0, 4.0, 1.0]) / 6.0 * full.duration_s)[:, inside].sum(axis=1)
    # One stretch of the full record may lie across the end of the part.
    np.testing.assert_allclose(part, by_hand, rtol=2e-3)


@pytest.mark.parametrize("window", [0.02, 0.4, 2.9, 3.0, 7.3])
def test_windows_are_bounded_from_above_and_closely(lifted, monkeypatch, window):
    demand, full = build_demand(lifted), in_full(lifted, monkeypatch)
    coefficients = air_gap_coefficients(lifted.motor_parameters, lifted.gearhead_parameters.take(slice(0, 2)))
    square = torques(lifted, full) ** 2
    exact = windowed_rms(full.duration_s, square, window)[0]
    slices = demand.slices
    peak = np.sqrt(square.max(axis=(1, 2)))
    bound = windowed_rms_bound(slices.duration_s, slices.squared_torque(coefficients), peak, window)[0]
    assert np.all(bound >= exact * (1.0 - 1e-9))  # sums of thousands of terms
    two = 2.0 * slices.duration_s.max()
    assert np.all(bound**2 <= exact**2 + peak**2 * two / window + 1e-9)


@pytest.mark.parametrize("share", [0.3, 0.99, 1.2])
def test_the_accumulator_is_bounded_from_above_and_closely(lifted, monkeypatch, share):
    demand, full = build_demand(lifted), in_full(lifted, monkeypatch)
    coefficients = air_gap_coefficients(lifted.motor_parameters, lifted.gearhead_parameters.take(slice(0, 2)))
    square = torques(lifted, full) ** 2
    limit = full.mean(square) / share
    exact = overload_accumulator(full.duration_s, square, limit)[0]
    slices = demand.slices
    bound = overload_bound(slices.duration_s, slices.squared_torque(coefficients), limit)[0]
    if share > 1.0:
        assert np.all(np.isinf(exact))
        assert np.all(np.isinf(bound))
        return
    assert np.all(bound >= exact * (1.0 - 1e-9))
    two = 2.0 * slices.duration_s.max()
    assert np.all(bound <= exact + two * (square.max(axis=(1, 2)) + limit))


def test_peaks_of_torque_are_those_of_the_record(lifted, monkeypatch):
    demand, full = build_demand(lifted), in_full(lifted, monkeypatch)
    for of_record, of_pieces in ((torques(lifted, full), torques(lifted, demand)),
                                 (full.speed * full.effort, demand.speed * demand.effort)):  # fmt: skip
        whole = np.abs(of_record).max(axis=(-2, -1))
        # The directions of extremes lie closely, not everywhere.
        np.testing.assert_allclose(np.abs(of_pieces).max(axis=(-2, -1)), whole, rtol=2e-3)


def test_the_verdict_does_not_depend_on_condensing(lifted, monkeypatch):
    condensed = compare(lifted)
    monkeypatch.setattr(measured_demand, "EXACT_INTERVALS", 10**9)
    full = compare(lifted)
    for one, other in zip(condensed.sets, full.sets, strict=True):
        assert (one.motor, one.gearhead, one.drive) == (other.motor, other.gearhead, other.drive)
        for name in ("winding_max_degc", "current_rms_a", "current_peak_a", "energy_shaft_motoring_j"):
            # Heat is averaged over a twentieth of the winding's time constant; the rest is exact but the peak.
            if name in one.quantities and one.quantities[name] is None:
                assert other.quantities[name] is None  # no equilibrium
            else:
                assert one.quantities[name] == pytest.approx(other.quantities[name], rel=2e-3)


# -- payload and mechanisms -------------------------------------------------------------------------


@pytest.mark.parametrize("count", [60, 4000])
def test_payload_changes_within_the_cycle(tmp_path, count):
    """Lifted with 20 kg, lowered empty: gravity's work is that of the difference."""
    t = samples(count, 4.0)
    w = 2.0 * np.pi / 4.0
    payload = np.where(t < 2.0, 20.0, 0.0)
    columns = {"time [s]": t, "position [m]": (0.15 * (1 - np.cos(w * t))).round(9), "payload [kg]": payload}
    case = understood(tmp_path / "c", columns, {"measured period": [4, "s"], "smoothing cut-off": [3, "Hz"],
                                               "remove drift": ["yes", ""]})  # fmt: skip
    demand = build_demand(case)
    lead = 0.01 / (2.0 * np.pi)
    gravity = demand.torque_by_cause["gravity"]
    assert np.max(gravity) == pytest.approx(38.5 * GRAVITY_M_S2 * lead, rel=1e-9)
    assert np.min(gravity) == pytest.approx(18.5 * GRAVITY_M_S2 * lead, rel=1e-9)
    work = demand.mean(gravity * demand.shaft_speed) * 4.0
    # Payload is straight over the one step in which it leaves, near the top: the share of that step is small.
    assert work == pytest.approx(20.0 * GRAVITY_M_S2 * 0.3, rel=0.1 * (60 / count) ** 2 + 1e-4)
    assert demand.load_inertia > 38.5 * lead**2


CRANK = {
    "mechanism": ["crank-slider", ""], "crank radius": [40, "mm"], "rod length": [150, "mm"],
    "moving mass": [3, "kg"], "inclination": [90, "deg"], "start angle": [20, "deg"],
    "driven shaft inertia": [20, "kg·cm²"], "guide friction force": [12, "N"], "efficiency": [85, "%"],
}  # fmt: skip
SMALL = ("mechanism", "lead", "screw diameter", "screw length", "efficiency", "moving mass", "inclination")


def crank_by_hand(phi, speed, acceleration):
    """Effort at the slider and its speed, from x(φ) differentiated by sympy."""
    import sympy as sp

    q = sp.Symbol("q")
    x = 0.04 * sp.cos(q) + sp.sqrt(0.15**2 - (0.04 * sp.sin(q)) ** 2)
    u, du = (sp.lambdify(q, sp.diff(x, q, n), "numpy")(phi) for n in (1, 2))
    v, a = u * speed, u * acceleration + du * speed**2
    return 3.0 * (a + GRAVITY_M_S2) + 12.0 * np.sign(v), v


@pytest.mark.parametrize("count", [150, 6000])
def test_a_recorded_turn_of_a_crank(tmp_path, count):
    t = samples(count, 1.0)
    angle = 2.0 * np.pi * t + 0.3 * np.sin(2.0 * np.pi * t)
    columns = {"time [s]": t, "position [deg]": np.degrees(angle).round(9)}
    if count > 1000:
        columns["process force [N]"] = np.zeros(count)
    axis = CRANK | {"measured period": [1, "s"], "smoothing cut-off": [12, "Hz"]}
    demand = build_demand(understood(tmp_path / "c", columns, axis, replaced=SMALL))
    assert (demand.slices is None) == (count == 150)
    at = np.linspace(0.0, 1.0, 20_001)
    phi = 2.0 * np.pi * at + 0.3 * np.sin(2.0 * np.pi * at) + np.radians(20.0)
    speed = 2.0 * np.pi + 0.6 * np.pi * np.cos(2.0 * np.pi * at)
    bend = -1.2 * np.pi**2 * np.sin(2.0 * np.pi * at)
    F, v = crank_by_hand(phi, speed, bend)
    # The spline has 24 knots in a period of one smooth wave: acceleration errs by less than 1e-4 of it.
    assert demand.peak(demand.effort) == pytest.approx(np.abs(F).max(), rel=2e-3)
    assert np.sqrt(demand.mean(demand.effort**2)) == pytest.approx(np.sqrt(np.mean(F**2)), rel=2e-3)
    power = F * v
    shaft = np.where(power > 0.0, power / 0.85, power * (2.0 - 1.0 / 0.85)) + 2e-3 * bend * speed
    work = demand.mean(demand.shaft_torque * demand.shaft_speed)
    assert work == pytest.approx(np.mean(shaft), rel=2e-3)
    friction = demand.mean(demand.torque_by_cause["friction"] * demand.shaft_speed)
    # Two strokes of about 80 mm against 12 N; the way is exact in both.
    assert friction == pytest.approx(np.mean(12.0 * np.abs(v)), rel=1e-3)


@pytest.mark.parametrize("mechanism", ["toggle lever", "tabulated slider"])
def test_a_recorded_load_on_other_changing_ratios(tmp_path, mechanism):
    """Motion recorded at the load of a toggle, and at the shaft of a map, against the planned motion."""
    t = samples(3000, 2.0)
    sweep = 0.5 * (1.0 - np.cos(np.pi * t))
    if mechanism == "toggle lever":
        own = {"mechanism": [mechanism, ""], "lever length": [60, "mm"], "link length": [70, "mm"],
               "start angle": [-63, "deg"], "moving mass": [3, "kg"], "motion stated at": ["load", ""]}  # fmt: skip
        columns = {"time [s]": t, "position [mm]": (12.0 * sweep).round(9)}
    else:
        own = {"mechanism": [mechanism, ""], "moving mass": [3, "kg"], "map period": [360, "deg"]}
        columns = {"time [s]": t, "position [deg]": (90.0 * sweep).round(9)}
    axis = own | {"measured period": [2, "s"], "smoothing cut-off": [8, "Hz"], "remove drift": ["yes", ""]}
    folder = written(tmp_path / "c", columns, axis, replaced=SMALL)
    if mechanism == "tabulated slider":
        angle = np.arange(0, 361, 30)
        rows = [f"{a},{20 * (1 - np.cos(np.radians(a))):.6f}" for a in angle]
        (folder / "map.csv").write_text("shaft angle [deg],position [mm]\n" + "\n".join(rows), "utf-8")
    case, problems = check_case(folder)
    assert [str(p) for p in problems if p.severity == "error"] == []
    demand = build_demand(case)
    lever = demand.speed / np.where(demand.shaft_speed == 0.0, 1.0, demand.shaft_speed)
    moving = np.abs(demand.shaft_speed) > 0.2 * demand.shaft_speed_peak
    torque = demand.torque_by_cause["inertia"]
    np.testing.assert_allclose(
        torque[moving], (3.0 * demand.acceleration * lever)[moving], atol=1e-9 * np.abs(torque).max()
    )
    top = 0.012 if mechanism == "toggle lever" else 0.02
    assert np.ptp(demand.position) == pytest.approx(
        top, rel=1e-4
    )  # the smallest and largest are kept as instants
    assert demand.mean(np.abs(demand.speed)) * 2.0 == pytest.approx(2.0 * top, rel=1e-4)


def test_a_record_that_leaves_the_geometry_names_the_row(tmp_path):
    t = samples(400, 1.0)
    columns = {"time [s]": t, "position [mm]": (60.0 * (1.0 - np.cos(2 * np.pi * t))).round(6)}
    axis = CRANK | {
        "motion stated at": ["load", ""],
        "measured period": [1, "s"],
        "smoothing cut-off": [8, "Hz"],
    }
    _, problems = check_case(written(tmp_path / "c", columns, axis, replaced=SMALL))
    found = [p for p in problems if p.severity == "error"]
    assert [p.table for p in found] == ["measured"]
    assert 2 < found[0].row < 202
    assert "dead centre" in found[0].allowed


def test_a_recorded_hoist_that_lets_the_rope_go_slack(tmp_path):
    t = samples(400, 1.0)
    columns = {"time [s]": t, "position [mm]": (150.0 * (1.0 - np.cos(2 * np.pi * t))).round(6)}
    axis = {"mechanism": ["winch", ""], "drum diameter": [120, "mm"], "rope diameter": [8, "mm"],
            "moving mass": [30, "kg"], "measured period": [0.999, "s"], "smoothing cut-off": [8, "Hz"],
            "remove drift": ["yes", ""], "motion stated at": ["load", ""]}  # fmt: skip
    gentle = check_case(written(tmp_path / "a", columns, axis, replaced=SMALL))[1]
    assert [str(p) for p in gentle if p.severity == "error"] == []
    columns["position [mm]"] = columns["position [mm]"] * 2.0
    hard = check_case(written(tmp_path / "b", columns, axis, replaced=SMALL))[1]
    assert ["rope" in p.got for p in hard if p.severity == "error"] == [True]


def test_noise_at_rest_is_no_motion(tmp_path):
    """A stop recorded with noise: friction neither chatters nor works."""
    t = samples(6000, 4.0)
    moving = np.clip(t, 0.0, 1.0) - np.clip(t - 2.0, 0.0, 1.0)
    x = 200.0 * (10 * moving**3 - 15 * moving**4 + 6 * moving**5) + RNG.normal(0.0, 0.01, len(t))
    columns = {"time [s]": t, "position [mm]": x.round(5)}
    axis = {"measured period": [4, "s"], "smoothing cut-off": [8, "Hz"], "remove drift": ["yes", ""],
            "guide friction force": [50, "N"], "standstill speed": [3, "mm/s"]}  # fmt: skip
    case = understood(tmp_path / "c", columns, axis)
    demand = build_demand(case)
    still = demand.direction == 0.0
    rest = demand.mean(np.ones_like(demand.speed) * still[:, None]) * 4.0
    assert rest == pytest.approx(
        2.0, abs=0.3
    )  # two stops of 1 s, less the knots in which motion starts or ends
    assert np.all(demand.torque_by_cause["friction"][still] == 0.0)
    assert any("standstill" in p.remedy for p in case.problems)


def test_what_the_cut_off_decides_is_told(lifted):
    """RMS and peak of acceleration and of torque at the shaft, with half and twice the stated cut-off."""
    told = [p.got for p in lifted.problems if p.severity == "note" and " at 12 Hz" in p.got]
    assert [line.split(" (")[0] for line in told] == ["acceleration", "torque at the driven shaft"]
    assert all(" at 3 Hz; " in line and " at 6 Hz; " in line for line in told)
    stated = told[1].split("; ")[1].split(" at ")[0].split(" and ")
    demand = build_demand(lifted)
    lossless = demand.shaft_torque - demand.torque_by_cause["losses"]
    assert float(stated[0]) == pytest.approx(
        np.sqrt(demand.mean(lossless**2)), rel=0.02
    )  # noise, here and there
    assert float(stated[1]) == pytest.approx(demand.peak(lossless), rel=0.1)


def test_extreme_directions_cover_every_sign():
    signs = {tuple(np.sign(row)) for row in condensed_demand._directions((-1.0, 0.0, 1.0))}
    assert len(signs) == 26
