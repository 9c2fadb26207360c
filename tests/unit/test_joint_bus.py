"""Several axes on one DC bus: exact sums against an independent walk, bounds, and what a case may name."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import brentq

from actuator_sizing.case.model import BusPartner
from actuator_sizing.case.reading import check_case, read_case
from actuator_sizing.core.machine import judge
from actuator_sizing.core.quadrature import interpolate
from actuator_sizing.errors import ERROR, InputError
from actuator_sizing.sizing.bus import own_results
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.joint_bus import bus_results, joint_rule
from actuator_sizing.sizing.pair_course import course
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.made_cases import DIRECT, DRIVE, MOTOR, case, cycle
from tests.unit.case_files import add_column, small_case, write_folder
from tests.unit.test_power_checks import LIFT, RESISTOR, verdict

ETA = 0.95
GAUSS = np.polynomial.legendre.leggauss(30)
RECTIFIER = {"supply feeds back": "no", "stop reaction time": 0.05}


def moves(way, move_s, rest_s):
    rest = {"law": "dwell", "duration_s": rest_s}
    there, back = (
        {"law": "cycloidal", "displacement": sign * way, "duration_s": move_s} for sign in (1.0, -1.0)
    )
    return cycle(there, rest, back, rest)


def axis(segments, **options):
    return case("ball screw", LIFT, segments, motors=(MOTOR,), gearheads=(DIRECT,), drives=(DRIVE,),
                options={**RECTIFIER, **options})  # fmt: skip


def partner(segments, offset_s, name="second"):
    return BusPartner(2, name, name, "M0", "G0", "D0", offset_s, axis(segments))


LONG, SHORT = moves(0.5, 0.8, 0.7), moves(0.4, 0.6, 0.4)  # 3 s and 2 s: together after 6 s
ODD = moves(0.4, 0.6, 0.4 * np.sqrt(2.0))


def sets_of(*partners, segments=LONG, **options):
    made = replace(axis(segments, **options), partners=partners)
    return evaluate_sets(made, build_demand(made), np.zeros((1, 3), dtype=np.intp))


def power_of(segments):
    """Power at the bus over time, straight from the course of the pair, and its borders."""
    made = axis(segments)
    demand = build_demand(made)
    motor = made.motor_parameters
    judged = judge(motor, made.surroundings)
    c = course(demand, motor, made.gearhead_parameters, judged)
    watts = (c.torque_nm * c.motor_speed_rad_s + judged.resistance_ohm[0] * c.current_a**2)[0]
    start, duration, period = demand.start_s, demand.duration_s, demand.cycle_s

    def power(t, inside):
        piece = int(
            np.clip(np.searchsorted(start, np.mod(inside, period), side="right") - 1, 0, len(start) - 1)
        )
        base = np.floor(inside / period) * period + start[piece]
        x = np.clip(2.0 * (t - base) / duration[piece] - 1.0, -1.0, 1.0)
        p = interpolate(watts[piece], np.atleast_1d(x))
        return np.where(p > 0.0, p / ETA, p * ETA)

    return power, start, period


def walked(first, second, offset, room, together):
    """Clipped energy from border to border and sign to sign by Gauss–Legendre quadrature; two periods to settle."""
    (p, starts, period), (q, others, span) = power_of(first), power_of(second)
    borders = {0.0, together}
    borders |= {s + k * period for s in starts for k in range(int(round(together / period)))}
    turns = range(int(round(together / span)))
    borders |= {float(np.mod(s + offset + k * span, together)) for s in others for k in turns}
    borders = sorted(borders)
    stored = peak = dumped = supplied = 0.0
    top = 0.0
    for _ in range(2):
        dumped = supplied = 0.0
        peak = stored
        for a, b in zip(borders[:-1], borders[1:], strict=True):
            if b - a < 1e-12:
                continue
            middle = 0.5 * (a + b)

            def total(t, middle=middle):
                return p(t, middle) + q(t - offset, middle - offset)  # at instants of one smooth piece

            grid = np.linspace(a, b, 101)
            values = total(grid)
            top = max(top, *values)
            cuts = [a]
            for place in np.flatnonzero(values[:-1] * values[1:] < 0.0):
                cuts.append(brentq(lambda t: float(total(t)[0]), grid[place], grid[place + 1]))
            cuts.append(b)
            for s, t in zip(cuts[:-1], cuts[1:], strict=True):
                after = stored - 0.5 * (t - s) * float(GAUSS[1] @ total(s + 0.5 * (t - s) * (GAUSS[0] + 1.0)))
                supplied += max(-after, 0.0)
                dumped += max(after - room, 0.0)
                stored = float(np.clip(after, 0.0, room))
                peak = max(peak, stored)
    return {"peak": peak, "dumped": dumped, "supplied": supplied, "top": top}


@pytest.mark.parametrize("offset", [0.0, 0.37, 1.3, -0.4])
def test_exact_over_the_common_period(offset):
    sets = sets_of(partner(SHORT, offset), **RESISTOR)
    b = sets.once(bus_results)
    C = 2 * 5e-4  # the capacitors of both drives
    room = 0.5 * C * (380.0**2 - 360.0**2)
    expected = walked(LONG, SHORT, offset, room, 6.0)
    # 1e-6 of the energy that passes in the common period: the tolerance of the quadrature is far below.
    scale = 1e-6 * (expected["supplied"] + expected["dumped"])
    assert float(b.brake_power_mean_w[0]) * 6.0 == pytest.approx(expected["dumped"], abs=scale)
    assert float(b.supply_power_mean_w[0]) * 6.0 == pytest.approx(expected["supplied"], abs=scale)
    assert float(b.voltage_max_v[0]) == pytest.approx(
        np.sqrt(360.0**2 + 2.0 * expected["peak"] / C), rel=1e-6
    )
    # The walk sees the largest power only on its grid of 100 points between borders.
    assert float(b.supply_power_peak_w[0]) == pytest.approx(expected["top"], rel=1e-3)
    assert "over 2 cycles" in joint_rule(sets)


def test_the_account_of_the_sum_closes():
    b = sets_of(partner(SHORT, 0.37), **RESISTOR).once(bus_results)
    net = 0.0
    for segments, period in ((LONG, 3.0), (SHORT, 2.0)):
        p = sets_of(segments=segments).pairs
        taken = p.energy_terminals_motoring_j[0] / ETA - p.energy_terminals_regenerated_j[0] * ETA
        net += taken / period
    assert float(b.supply_power_mean_w[0] - b.brake_power_mean_w[0]) == pytest.approx(net, rel=1e-9)


def test_a_free_offset_is_never_better_than_a_stated_one():
    free = sets_of(partner(SHORT, np.nan), **RESISTOR).once(bus_results)
    apart = [sets_of(partner(SHORT, k * 2.0 / 48), **RESISTOR).once(bus_results) for k in range(0, 48, 5)]
    for name in (
        "voltage_max_v",
        "brake_power_mean_w",
        "brake_pulse_j",
        "brake_power_peak_w",
        "supply_power_peak_w",
    ):
        found = np.array([float(getattr(each, name)[0]) for each in apart])
        assert float(getattr(free, name)[0]) >= found.max() * (1.0 - 1e-12), name
        assert (
            np.ptp(found) > 0.0 or name == "voltage_max_v"
        )  # the offset matters; the clamp holds the voltage
    assert "worst of 48 offsets" in joint_rule(sets_of(partner(SHORT, np.nan)))


def test_without_a_common_period_the_extremes_coincide():
    sets = sets_of(partner(ODD, np.nan), **RESISTOR)
    b = sets.once(bus_results)
    alone = [sets_of(segments=s, **RESISTOR) for s in (LONG, ODD)]
    peaks = sum(float(each.once(own_results).supply_power_peak_w[0]) for each in alone)
    assert float(b.supply_power_peak_w[0]) == pytest.approx(peaks, rel=1e-12)
    assert "no common one" not in joint_rule(alone[0])
    assert "have no common one" in joint_rule(sets)
    assert "coincide" in verdict(sets, "brake_resistor_mean_power").working


@pytest.mark.parametrize("soft", [{}, {"supply internal resistance": 1.5}])
def test_the_bound_is_never_below_the_exact_sum(soft):
    # Two free partners are not sought through: the bound for them must hold for any offset of both.
    options = {**RESISTOR, **soft}
    bound = sets_of(partner(SHORT, np.nan), partner(SHORT, np.nan, "third"), **options).once(bus_results)
    for one, two in ((0.0, 0.0), (0.3, 0.9), (1.1, 0.2)):
        exact = sets_of(partner(SHORT, one), partner(SHORT, two, "third"), **options).once(bus_results)
        names = [
            "voltage_max_v",
            "brake_power_mean_w",
            "brake_power_peak_w",
            "supply_power_peak_w",
            "supply_power_mean_w",
        ]
        for name in names + (["sag_utilisation"] if soft else []):
            high, low = (float(getattr(each, name)[0]) for each in (bound, exact))
            assert high >= low * (1.0 - 1e-9), name
        if soft:
            assert float(bound.voltage_min_v[0]) <= float(exact.voltage_min_v[0])


@pytest.mark.parametrize(("segments", "offset_s"), [(SHORT, 0.2), (SHORT, np.nan), (ODD, np.nan)])
def test_a_partner_whose_drive_hides_its_losses_leaves_the_supply_unknown(segments, offset_s):
    stated = partner(segments, offset_s)
    silent_axis = replace(
        stated.axis, drive_parameters=replace(stated.axis.drive_parameters, efficiency=np.array([np.nan]))
    )
    rated = {"supply peak power": 1e5, "supply continuous power": 1e5, "supply internal resistance": 0.1}
    for other, expected in ((stated, "passes"), (replace(stated, axis=silent_axis), "not checked")):
        sets = sets_of(other, **rated)
        for key in ("supply_peak_power", "supply_mean_power", "bus_sag", "bus_minimum_voltage"):
            found = verdict(sets, key)
            assert found.verdict == expected, key
            if expected != "passes":
                assert found.missing == ("efficiency of the drives of all other axes on the bus",)
    b = sets.once(bus_results)
    for name in ("supply_power_mean_w", "supply_power_peak_w", "supply_power_rms_w", "voltage_min_v"):
        assert np.isnan(getattr(b, name)).all(), name
    assert np.isfinite(b.voltage_max_v).all()  # all that comes back counted: on the safe side


def test_a_partner_alone_fails_the_supply():
    own = sets_of().once(own_results)
    rated = {"supply peak power": 1.2 * float(own.supply_power_peak_w[0]), "supply continuous power": 1e4}
    assert verdict(sets_of(**rated), "supply_peak_power").verdict == "passes"
    found = verdict(sets_of(partner(SHORT, np.nan), **rated), "supply_peak_power")
    assert found.verdict == "fails"


def test_own_energy_is_not_that_of_the_partner():
    alone, joint = sets_of(), sets_of(partner(SHORT, 0.2))
    assert joint.once(own_results).supply_power_mean_w == pytest.approx(
        alone.once(own_results).supply_power_mean_w
    )


# -- the case -----------------------------------------------------------------------------------------
HEAD = ["partner", "case", "motor", "gearhead", "drive", "time offset [s]"]


def complete():
    """The small case with drives that state their efficiency."""
    tables = small_case()
    add_column(tables, "drives", "efficiency [%]", 95, 95)
    return tables


def two_cases(tmp_path, *rows, other=None):
    write_folder(tmp_path / "other", other or complete())
    return write_folder(tmp_path / "case", complete() | {"bus_partners": [HEAD, *map(list, rows)]})


def test_the_best_set_of_the_partner_is_taken(tmp_path):
    made = read_case(two_cases(tmp_path, ["twin", "../other", "", "", "", ""]))
    alone = compare(read_case(tmp_path / "other"))
    comparison = compare(made)
    named = comparison.case.partners[0]
    assert (named.motor, named.gearhead or None, named.drive) == (
        alone.best.motor, alone.best.gearhead, alone.best.drive,
    )  # fmt: skip
    assert comparison.best.quantities["supply_power_peak_w"] > alone.best.quantities["supply_power_peak_w"]
    assert made.fingerprint != read_case(tmp_path / "other").fingerprint


def test_a_partner_without_parts_needs_a_comparison(tmp_path):
    made = read_case(two_cases(tmp_path, ["twin", "../other", "", "", "", ""]))
    with pytest.raises(InputError, match="no parts"):
        evaluate_sets(made, build_demand(made), np.zeros((1, 3), dtype=np.intp))


@pytest.mark.parametrize(
    ("row", "words"),
    [
        (["x", "../nowhere", "", "", "", ""], "where there is nothing"),
        (["x", ".", "", "", "", ""], "this case itself"),
        (["x", "../other", "M-99", "", "D-1", ""], "M-99"),
        (["x", "../other", "", "", "D-1", ""], "beside other parts"),
        (["x", "", "", "", "", ""], "case"),
        (["x", "../other", "", "", "", "1e9"], "time offset"),
        (["x", "../other", "", "", "", "soon"], "time offset"),
    ],
)
def test_rows_that_cannot_be(tmp_path, row, words):
    case_, problems = check_case(two_cases(tmp_path, row))
    assert case_ is None
    errors = [str(problem) for problem in problems if problem.severity == ERROR]
    assert any("bus_partners" in text and words in text for text in errors), errors


def test_cases_that_name_each_other(tmp_path):
    back = small_case() | {"bus_partners": [HEAD, ["first", "../case", "", "", "", ""]]}
    _, problems = check_case(two_cases(tmp_path, ["second", "../other", "", "", "", ""], other=back))
    assert any("names this case in turn" in str(problem) for problem in problems)


def test_a_partner_that_cannot_be_used(tmp_path):
    broken = small_case()
    broken["axis"] = [row for row in broken["axis"] if row[0] != "nominal bus voltage"]
    _, problems = check_case(two_cases(tmp_path, ["second", "../other", "", "", "", ""], other=broken))
    assert any("a case with 1 errors" in str(problem) for problem in problems), problems


@pytest.mark.parametrize(("volts", "usable"), [(60, True), (300, False)])
def test_another_bus_voltage_is_told(tmp_path, volts, usable):
    other = small_case()
    next(row for row in other["axis"] if row[0] == "nominal bus voltage")[1] = volts
    made, problems = check_case(two_cases(tmp_path, ["second", "../other", "", "", "", ""], other=other))
    assert sum("since the bus is the same" in str(problem) for problem in problems) == 2
    assert (made is not None) == usable


def test_a_partner_with_several_cycles_is_not_taken_for_its_first(tmp_path):
    other = complete()
    head, *rows = other["duty_cycle"]
    other["duty_cycle"] = [["cycle", *head], *([name, *row] for name in ("light", "heavy") for row in rows)]
    made, problems = check_case(two_cases(tmp_path, ["second", "../other", "", "", "", ""], other=other))
    assert made is None
    told = [str(problem) for problem in problems if "a case with 2 cycles" in str(problem)]
    assert len(told) == 1
    assert "bus_partners" in told[0]
    assert "one cycle that asks most" in told[0]
