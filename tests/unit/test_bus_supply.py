"""Supplies that give way, choppers with hysteresis, pulse curves, stand-by: checks and closed forms."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from actuator_sizing.case.reading import read_case
from actuator_sizing.core.supply import charged_voltage, permitted_pulse
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.bus_quantities import bus_quantities
from actuator_sizing.sizing.joint_bus import bus_results
from actuator_sizing.sizing.results import FAILS, NOT_CHECKED, PASSES
from tests.made_cases import DRIVE, MOTOR
from tests.unit.case_files import small_case, write_folder
from tests.unit.test_power_checks import MOVES, RESISTOR, sets_of, verdict

SOFT = {"supply": "DC supply"}
LIMIT_A = (
    3.0  # the peak of the cycle asks for 734 W, the limit leaves 600 W at the lowest voltage of the drive
)


def with_drive(sets, **columns):
    """The same sets with columns of the catalog of drives that no parameter holds."""
    known = {key: np.array([value]) for key, value in columns.items()}
    drives = replace(sets.case.drives, values={**sets.case.drives.values, **known})
    return replace(sets, case=replace(sets.case, drives=drives), _found={})


def fails(sets):
    return {key for key in (c.key for c in active(sets)) if (r := verdict(sets, key)) and r.verdict == FAILS}


def active(sets):
    from actuator_sizing.sizing.judging import active_checks

    return active_checks(sets.case.limits)[0]


# -- current limit ------------------------------------------------------------------------------------
def power_over_time(sets):
    """Power at the bus as a function of time, straight from the courses of the pair."""
    from actuator_sizing.core.machine import judge
    from actuator_sizing.core.quadrature import interpolate
    from actuator_sizing.sizing.pair_course import course

    judged = judge(sets.motors, sets.surroundings)
    c = course(sets.demand, sets.motors, sets.gearheads, judged)
    watts = (c.torque_nm * c.motor_speed_rad_s + judged.resistance_ohm[0] * c.current_a**2)[0]
    start, duration = sets.demand.start_s, sets.demand.duration_s

    def power(t):
        piece = int(np.clip(np.searchsorted(start, t, side="right") - 1, 0, len(start) - 1))
        x = np.clip(2.0 * (t - start[piece]) / duration[piece] - 1.0, -1.0, 1.0)
        p = float(interpolate(watts[piece], np.array([x]))[0])
        return p / 0.95 if p > 0.0 else p * 0.95

    return power, start, sets.demand.cycle_s


def bridged(sets, limit_a, given):
    """Lowest voltage of a bus whose capacitors bridge a current limit, by events; `given` is the supply's power."""
    power, start, cycle_s = power_over_time(sets)
    top, C = 290.0, 5e-4
    voltage, lowest = top, top
    for _ in range(2):
        for begin, end in zip(start, [*start[1:], cycle_s], strict=True):
            t = begin
            while t < end - 1e-12:

                def rate(s, y, begin=begin, end=end):
                    return [(given(limit_a, y[0]) - power(min(max(s, begin), end))) / (C * y[0])]

                if voltage >= top * (1 - 1e-13) and rate(t + 1e-9, [top])[0] >= 0.0:

                    def leaves(s, y, end=end):
                        return power(min(s, end)) - given(limit_a, top)

                    leaves.terminal, leaves.direction = True, 1
                    run = solve_ivp(
                        lambda s, y: [0.0], (t, end), [0.0], events=leaves, max_step=(end - begin) / 50
                    )
                    t = run.t[-1] + 1e-12
                    continue

                def full(s, y):
                    return y[0] - top

                full.terminal, full.direction = True, 1
                run = solve_ivp(rate, (t, end), [voltage], events=full, rtol=1e-11, atol=1e-9,
                                max_step=(end - begin) / 50)  # fmt: skip
                lowest = min(lowest, float(run.y[0].min()))
                t, voltage = run.t[-1] + 1e-12, float(run.y[0, -1])
                if run.t_events[0].size:
                    voltage = top
    return lowest


def test_capacitors_bridge_a_current_limit_as_in_a_simulation():
    sets = sets_of(**SOFT, **{"supply current limit": LIMIT_A})
    floor = 200.0  # minimum bus voltage of the drive
    found = float(sets.once(bus_results).voltage_min_v[0])
    assert found < 289.0  # the capacitors do help
    expected = bridged(sets, LIMIT_A, lambda amperes, volts: amperes * floor)
    # 1e-6: tolerance of the events; the lowest voltage lies at the end of a run, where nodes are exact.
    assert found == pytest.approx(expected, rel=1e-6)
    # A supply that gives the current at the voltage there is gives more: the model is on the safe side.
    assert bridged(sets, LIMIT_A, lambda amperes, volts: amperes * volts) > found


def test_the_lowest_voltage_is_held_against_the_drive():
    sets = sets_of(**SOFT, **{"supply current limit": LIMIT_A})
    lowest = float(sets.once(bus_results).voltage_min_v[0])
    for factor, expected in ((0.8, PASSES), (1.001, FAILS)):
        drive = dict(DRIVE, bus_voltage_min_v=lowest * factor)
        # The floor of the model is the drive's own minimum, so that the lowest voltage moves with it.
        again = sets_of(drive=drive, **SOFT, **{"supply current limit": LIMIT_A * 200.0 / (lowest * factor)})
        assert float(again.once(bus_results).voltage_min_v[0]) == pytest.approx(lowest, rel=1e-12)
        assert verdict(again, "bus_minimum_voltage").verdict == expected


def test_a_limit_below_the_mean_lets_the_bus_collapse():
    sets = sets_of(**SOFT, **{"supply current limit": 0.1})
    assert float(sets.once(bus_results).voltage_min_v[0]) == 0.0
    for key in ("bus_minimum_voltage", "bus_sag"):
        assert verdict(sets, key).verdict == FAILS


def test_what_a_dc_supply_must_state():
    found = verdict(sets_of(**SOFT), "bus_minimum_voltage")
    assert found.verdict == NOT_CHECKED
    assert found.missing == ("supply current limit",)
    blind = sets_of(drive=dict(DRIVE, capacitance_f=np.nan), **SOFT, **{"supply current limit": LIMIT_A})
    assert verdict(blind, "bus_minimum_voltage").missing == ("internal capacitance",)
    ample = sets_of(drive=dict(DRIVE, capacitance_f=np.nan), **SOFT, **{"supply current limit": 60.0})
    assert verdict(ample, "bus_minimum_voltage").verdict == PASSES
    assert verdict(sets_of(), "bus_minimum_voltage") is None  # rectified mains without resistance are stiff


@pytest.mark.parametrize("key", ["bus_sag", "bus_minimum_voltage"])
@pytest.mark.parametrize(
    "supply", [{"supply internal resistance": 4.0}, {**SOFT, "supply current limit": LIMIT_A}]
)
def test_what_a_drive_loses_makes_the_bus_sag(key, supply):
    assert verdict(sets_of(**supply), key).verdict != NOT_CHECKED
    silent = sets_of(drive=dict(DRIVE, efficiency=np.nan), **supply)
    found = verdict(silent, key)
    assert found.verdict == NOT_CHECKED
    assert found.missing == ("efficiency",)
    assert bus_quantities(silent, 0)["bus_voltage_min_v"] is None


def test_droop_alone_fails_the_minimum():
    sets = sets_of(drive=dict(DRIVE, bus_voltage_min_v=280.0), **{"supply internal resistance": 4.0})
    peak = float(sets.once(bus_results).supply_power_peak_w[0])
    lowest = 145.0 + np.sqrt(145.0**2 - 4.0 * peak)
    found = verdict(sets, "bus_minimum_voltage")
    # The peak lies at the end of a piece, where the nodes have it.
    assert found.capacity == pytest.approx(lowest, rel=1e-9)
    assert found.verdict == FAILS


# -- battery ------------------------------------------------------------------------------------------
def test_a_battery_takes_back_what_it_may():
    battery = {"supply": "battery", "supply current limit": 60.0}
    found = verdict(sets_of(**battery), "supply_charging_current")
    assert found.missing == ("supply charging current",)
    b = sets_of(**battery).once(bus_results)
    current = float(b.returned_power_peak_w[0]) / 290.0
    assert current > 0.0
    for factor, expected in ((1.2, PASSES), (0.999, FAILS)):
        sets = sets_of(**battery, **{"supply charging current": current * factor})
        assert verdict(sets, "supply_charging_current").verdict == expected
    assert fails(sets) == {"supply_charging_current"}
    assert float(b.brake_energy_j[0]) == 0.0
    soft = sets_of(**battery, **{"supply internal resistance": 0.5}).once(bus_results)
    rise = charged_voltage(360.0, 0.5, b.returned_power_peak_w)
    assert soft.voltage_max_v == pytest.approx(rise, rel=1e-12)
    assert float(rise[0]) > 360.0


# -- chopper ------------------------------------------------------------------------------------------
@pytest.mark.parametrize(("hysteresis", "expected"), [(0.0, PASSES), (20.0, PASSES), (20.1, FAILS)])
def test_a_chopper_must_be_able_to_switch_off(hysteresis, expected):
    sets = sets_of(
        drive=dict(DRIVE, brake_resistor_min_ohm=40.0), **RESISTOR, **{"chopper hysteresis": hysteresis}
    )
    found = verdict(sets, "chopper_release")
    assert found.verdict == expected
    assert found.capacity == 380.0 - hysteresis
    if expected == FAILS:
        assert fails(sets) == {"chopper_release"}


def test_each_pulse_takes_what_the_hysteresis_costs():
    plain, wide = (sets_of(**RESISTOR, **{"chopper hysteresis": h}).once(bus_results) for h in (0.0, 8.0))
    more = 0.5 * 5e-4 * (380.0**2 - 372.0**2)
    assert float(wide.brake_pulse_j[0] - plain.brake_pulse_j[0]) == pytest.approx(more, rel=1e-9)
    assert float(wide.brake_energy_j[0] - plain.brake_energy_j[0]) == pytest.approx(
        more, rel=1e-9
    )  # one pulse
    supplied = (wide.supply_power_mean_w - plain.supply_power_mean_w)[0] * 3.0
    assert float(supplied) == pytest.approx(more, rel=1e-9)  # the account of the bus closes


def test_recommended_resistor_needs_no_resistor():
    sets = sets_of(drive=dict(DRIVE, chopper_threshold_v=380.0, brake_resistor_min_ohm=33.0))
    with_one = sets_of(drive=dict(DRIVE, brake_resistor_min_ohm=33.0), **RESISTOR).once(bus_results)
    q = bus_quantities(sets, 0)
    assert q["brake_power_peak_w"] == 0.0  # there is none
    assert q["brake_resistor_smallest_ohm"] == 33.0
    assert q["brake_resistor_largest_ohm"] == pytest.approx(380.0**2 / float(with_one.brake_power_peak_w[0]))
    assert q["brake_resistor_recommended_power_w"] == pytest.approx(
        1.3 * float(with_one.brake_power_mean_w[0])
    )
    assert q["brake_resistor_recommended_pulse_j"] == pytest.approx(float(with_one.brake_pulse_j[0]))
    # The recommended value passes its own checks.
    good = sets_of(drive=dict(DRIVE, brake_resistor_min_ohm=33.0), **{
        "chopper threshold": 380.0, "brake resistor": 0.9 * q["brake_resistor_largest_ohm"],
        "brake resistor continuous power": q["brake_resistor_recommended_power_w"],
        "brake resistor pulse energy": 1.2 * q["brake_resistor_recommended_pulse_j"]})  # fmt: skip
    assert fails(good) == set()


def test_pulse_curve():
    curve = ((0.1, 40.0), (1.0, 120.0), (10.0, 300.0))
    seconds, joules = (np.array(column) for column in zip(*curve, strict=True))
    assert permitted_pulse(seconds, joules, np.array([0.05, 0.1, 10.0, 99.0])).tolist() == pytest.approx(
        [40.0, 40.0, 300.0, 300.0]
    )
    options = {k: v for k, v in RESISTOR.items() if k != "brake resistor pulse energy"}
    sets = sets_of(**options)
    assert verdict(sets, "brake_resistor_pulse_energy").missing == ("brake resistor pulse energy",)
    pulse = float(sets.once(bus_results).brake_pulse_j[0])
    lasts = float(sets.once(bus_results).brake_pulse_s[0])
    assert 0.0 < lasts < MOVES[2].duration_s
    for factor, expected in ((1.2, PASSES), (0.99, FAILS)):
        energy = pulse * factor
        curve = ((lasts / 2, energy / 2), (lasts, energy), (3 * lasts, 2 * energy))
        held = replace(sets, case=replace(sets.case, resistor_pulses=curve), _found={})
        found = verdict(held, "brake_resistor_pulse_energy")
        assert found.verdict == expected
        assert found.capacity == pytest.approx(energy, rel=1e-9)


# -- stand-by -----------------------------------------------------------------------------------------
def test_standby_is_taken_all_the_time():
    sets = sets_of(**RESISTOR, **{"other power on the bus": 7.0})
    more = with_drive(sets, stand_by_power=18.0)
    plain = sets_of(**RESISTOR).once(bus_results)
    b = more.once(bus_results)
    assert float(b.steady_power_w[0]) == 25.0
    # What the stand-by takes while braking is not burnt; all of it passes through the supply or is saved from it.
    balance = b.supply_power_mean_w - b.brake_power_mean_w
    before = plain.supply_power_mean_w - plain.brake_power_mean_w
    assert balance - before == pytest.approx([25.0], rel=1e-9)
    assert float(b.brake_energy_j[0]) < float(plain.brake_energy_j[0])
    assert b.supply_power_peak_w - plain.supply_power_peak_w == pytest.approx([25.0], rel=1e-9)


# -- the case -----------------------------------------------------------------------------------------
def case_with(tmp_path, *rows, **tables):
    made = small_case() | tables
    made["axis"] = made["axis"] + [list(row) for row in rows]
    return read_case(write_folder(tmp_path / "case", made))


def test_words_and_curve_of_a_case(tmp_path):
    curve = [["pulse duration [s]", "pulse energy [kJ]"], [0.5, 1.0], [5, 2.5]]
    made = case_with(tmp_path, ["supply", "battery", "", ""], resistor_pulses=curve)
    assert made.options["supply"] == "battery"
    assert made.resistor_pulses == ((0.5, 1000.0), (5.0, 2500.0))
    assert any(entry.table == "resistor_pulses" for entry in made.entries)


@pytest.mark.parametrize(
    ("rows", "words"),
    [
        ([[1, 1.0], [1, 2.0]], "longer than in the row before"),
        ([[1, 1.0], [2, 0.5]], "at least the energy"),
        ([[1, 1.0], [2, 2.5]], "at most the power"),
        ([[0, 1.0]], "pulse duration"),
        ([["", 1.0]], "pulse duration"),
    ],
)
def test_curves_that_cannot_be(tmp_path, rows, words):
    with pytest.raises(InputError, match=words):
        case_with(tmp_path, resistor_pulses=[["pulse duration [s]", "pulse energy [kJ]"], *rows])


def test_hysteresis_is_a_difference(tmp_path):
    with pytest.raises(InputError, match="chopper hysteresis"):
        case_with(tmp_path, ["chopper threshold", 60, "V", ""], ["chopper hysteresis", 60, "V", ""])


# -- one check alone ----------------------------------------------------------------------------------
#: Needs nine tenths of the voltage there is on a stiff bus.
FAST_MOTOR = dict(MOTOR, torque_constant_nm_per_a=1.07, peak_torque_nm=np.nan)
SOUND = dict(DRIVE, brake_resistor_min_ohm=33.0, bus_voltage_max_v=420.0)


def sound(drive=SOUND, **options):
    """A bus that passes everything, but for what is changed."""
    return sets_of(drive=drive, **{**RESISTOR, **options})


@pytest.mark.parametrize(
    ("key", "change"),
    [
        ("bus_maximum_voltage", lambda b: {"drive": dict(SOUND, bus_voltage_max_v=379.0)}),
        ("brake_resistor_value", lambda b: {"drive": dict(SOUND, brake_resistor_min_ohm=61.0)}),
        ("brake_resistor_peak_power", lambda b: {"brake resistor": 1.01 * 380.0**2 / b.brake_power_peak_w[0]}),
        ("brake_resistor_mean_power", lambda b: {"brake resistor continuous power": 0.99 * b.brake_power_mean_w[0]}),
        ("brake_resistor_pulse_energy", lambda b: {"brake resistor pulse energy": 0.99 * b.brake_pulse_j[0]}),
        ("supply_mean_power", lambda b: {"supply continuous power": 0.99 * b.supply_power_mean_w[0],
                                         "supply peak power": 1e5}),
        ("supply_peak_power", lambda b: {"supply peak power": 0.99 * b.supply_power_peak_w[0],
                                         "supply continuous power": 1e5}),
        ("bus_minimum_voltage", lambda b: {"drive": dict(SOUND, bus_voltage_min_v=287.0),
                                           "supply internal resistance": 2.0}),
        ("bus_sag", lambda b: {"motor": FAST_MOTOR, "supply internal resistance": 12.0}),
    ],
)  # fmt: skip
def test_one_thing_wrong_fails_one_check(key, change):
    good = sound()
    assert fails(good) == set()
    assert fails(sound(**change(good.once(bus_results)))) == {key}
