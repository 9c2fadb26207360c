"""Derating, current at standstill, electrical frequency, load inductance, ripple and cable of a drive."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import brentq

from actuator_sizing.case.reading import read_case
from actuator_sizing.core.drive_limits import derating_factor, ripple_current, ripple_loss
from actuator_sizing.core.parameters import BRUSHED, SINUSOIDAL, SIX_STEP
from actuator_sizing.sizing.checks.drive_limits import _held
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.judging import active_checks, check_results, judge_sets
from actuator_sizing.sizing.levers import single
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, NOT_CHECKED, PASSES
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.made_cases import DIRECT, DRIVE, MOTOR, SURROUNDINGS, case, cycle

LIFT = {"lead": 0.02, "moving mass": 30.0, "inclination": np.pi / 2, "driven shaft inertia": 2e-4}


def there_and_back(rest_s):
    return cycle(
        {"law": "trapezoid", "displacement": 0.3, "duration_s": 1.0},
        {"law": "dwell", "duration_s": rest_s},
        {"law": "trapezoid", "displacement": -0.3, "duration_s": 1.0},
        {"law": "dwell", "duration_s": 0.6},
    )


RESTS, HOLDS = there_and_back(0.7), there_and_back(2.0)


def sets_of(*, motor=MOTOR, drive=DRIVE, segments=HOLDS, surroundings=SURROUNDINGS, **columns):
    made = case("ball screw", LIFT, segments, motors=(motor,), gearheads=(DIRECT,), drives=(drive,),
                surroundings=surroundings)  # fmt: skip
    known = {key: np.array([value]) for key, value in columns.items()}
    made = replace(made, drives=replace(made.drives, values={**made.drives.values, **known}))
    return evaluate_sets(made, build_demand(made), np.zeros((1, 3), dtype=np.intp))


def judged(sets):
    checks, limits = active_checks(sets.case.limits)
    verdicts = judge_sets(sets, checks, limits)
    results = check_results(sets, verdicts, 0)
    return {result.check: result for result in results}


def fails(sets):
    return {key for key, result in judged(sets).items() if result.verdict == FAILS}


# -- derating -----------------------------------------------------------------------------------------
HOT, HIGH = replace(SURROUNDINGS, ambient_degc=48.0), replace(SURROUNDINGS, altitude_m=1800.0)


def test_derating_by_ambient_and_altitude():
    both = replace(HOT, altitude_m=1800.0)
    sets = sets_of(surroundings=both, ambient_derating=0.02, altitude_derating_per_100_m=0.01)
    found = judged(sets)["drive_continuous_current"]
    # 8 K above 40 °C at 2 %/K, 800 m above 1000 m at 1 % per 100 m.
    assert found.capacity == pytest.approx(8.0 * (1.0 - 0.16) * (1.0 - 0.08), rel=1e-12)
    assert "0.84" in found.working
    assert float(sets.overload_a2s[0]) == 0.0 or np.isfinite(sets.overload_a2s[0])


@pytest.mark.parametrize(
    ("surroundings", "datum", "column"),
    [(HOT, "ambient derating", "ambient_derating"),
     (HIGH, "altitude derating per 100 m", "altitude_derating_per_100_m")],
)  # fmt: skip
def test_beyond_the_rated_surroundings_a_derating_is_asked_for(surroundings, datum, column):
    for key in ("drive_continuous_current", "drive_peak_time"):
        found = judged(sets_of(surroundings=surroundings))[key]
        assert found.verdict == NOT_CHECKED
        assert found.missing == (datum,)
    assert (
        judged(sets_of(surroundings=surroundings, **{column: 0.001}))["drive_continuous_current"].verdict
        == PASSES
    )


def test_derating_alone_fails_the_continuous_current():
    rms = float(sets_of().drive_current_rms_a[0])
    left = rms / 8.0
    # 8 K above the rated ambient at this derating leaves 0.1 % less than the cycle needs.
    # With a peak time the i²t accumulator would grow for ever and fail too.
    drive = dict(DRIVE, peak_time_s=np.nan)
    sets = sets_of(
        surroundings=HOT, drive=drive, ambient_derating=(1.0 - 0.999 * left) / 8.0, standstill_current=8.0
    )
    assert fails(sets) == {"drive_continuous_current"}
    assert judged(sets)["drive_peak_current"].verdict == PASSES


def test_derating_never_turns_negative():
    assert derating_factor(100.0, np.array([0.02])).tolist() == [0.0]


def test_a_lever_keeps_the_columns_of_its_own_parts():
    made = case("ball screw", LIFT, HOLDS, motors=(MOTOR, MOTOR), gearheads=(DIRECT,), drives=(DRIVE, DRIVE))
    values = {**made.drives.values, "stand_by_power": np.array([11.0, 22.0])}
    one = single(replace(made, drives=replace(made.drives, values=values)), 1, 0, 1)
    assert one.drives.values["stand_by_power"].tolist() == [22.0]
    assert one.drives.names == ("D1",)
    assert len(one.motors) == len(one.gearheads) == 1


# -- standstill ---------------------------------------------------------------------------------------
def test_the_amplitude_of_a_long_hold_is_compared():
    sets = sets_of(standstill_current=8.0)
    K, s = float(sets.pairs.torque_constant_nm_per_a[0]), (1.0 - 7.5 / (0.5 * 18.0)) / 18.0**2
    gravity = 30.0 * 9.80665 * 0.02 / (2.0 * np.pi)
    found = judged(sets)["drive_standstill_current"]
    assert found.demand == pytest.approx(
        brentq(lambda i: K * i * (1.0 - s * i**2) - gravity, 0.0, 5.0), rel=1e-9
    )
    assert found.segment == "segment 3"
    for factor, expected in ((1.2, PASSES), (0.999, FAILS)):
        again = sets_of(standstill_current=found.demand * factor)
        assert judged(again)["drive_standstill_current"].verdict == expected
    assert fails(again) == {"drive_standstill_current"}


def test_a_stated_standstill_current_is_derated_as_the_continuous_one():
    both = replace(HOT, altitude_m=1800.0)
    sets = sets_of(
        surroundings=both, ambient_derating=0.02, altitude_derating_per_100_m=0.01, standstill_current=6.0
    )
    found = judged(sets)["drive_standstill_current"]
    assert found.capacity == pytest.approx(6.0 * (1.0 - 0.16) * (1.0 - 0.08), rel=1e-12)
    assert "0.7728" in found.working


def test_short_stops_do_not_count():
    # The last dwell goes on into the first move; no stop of this cycle reaches a second.
    assert judged(sets_of(segments=RESTS))["drive_standstill_current"].demand == 0.0


def test_without_a_stated_current_the_rule_of_thumb_only_advises():
    weak = sets_of(drive=dict(DRIVE, continuous_current_a=2.3))
    found = judged(weak)["drive_standstill_current"]
    assert found.capacity == pytest.approx(2.3 / np.sqrt(2.0), rel=1e-12)
    assert found.is_advice
    assert found.verdict == LOW_RESERVE
    assert found.utilisation > 1.0
    assert "drive_standstill_current" not in fails(weak)


def test_a_long_record_is_held_as_long_as_in_its_order():
    made = read_case("catalogs_demo/tray_shuttle_measured")
    index = np.array([[0, 0, 0], [3, 2, 1]])
    condensed, full = (
        evaluate_sets(made, build_demand(made, in_order=in_order), index) for in_order in (False, True)
    )
    assert condensed.demand.slices is not None
    found, expected = (_held(sets) for sets in (condensed, full))
    assert expected.amplitude_a.min() > 0.0
    np.testing.assert_array_equal(found.amplitude_a, expected.amplitude_a)


# -- electrical frequency -----------------------------------------------------------------------------
def test_electrical_frequency():
    sets = sets_of(maximum_output_frequency=400.0)
    found = judged(sets)["drive_output_frequency"]
    assert found.demand == pytest.approx(
        4.0 * float(sets.pairs.speed_peak_rad_s[0]) / (2.0 * np.pi), rel=1e-12
    )
    assert found.verdict == PASSES
    low = sets_of(maximum_output_frequency=0.999 * found.demand)
    assert fails(low) == {"drive_output_frequency"}
    assert judged(sets_of())["drive_output_frequency"].missing == ("maximum output frequency",)
    blind = sets_of(motor=dict(MOTOR, pole_pairs=np.nan), maximum_output_frequency=400.0)
    assert judged(blind)["drive_output_frequency"].missing == ("pole pairs",)


# -- inductance and ripple ----------------------------------------------------------------------------
TERMINAL_H = 4e-3 / 1.5  # of the made motor, whose inductance is the model's, per A rms


def test_load_inductance_is_a_matter_of_fit():
    for smallest, expected in ((TERMINAL_H, PASSES), (1.001 * TERMINAL_H, FAILS)):
        assert judged(sets_of(minimum_load_inductance=smallest))["drive_load_inductance"].verdict == expected
    assert fails(sets_of(minimum_load_inductance=2.0 * TERMINAL_H)) == {"drive_load_inductance"}
    unknown = judged(sets_of())["drive_load_inductance"]
    assert unknown.missing == ("minimum load inductance",)
    assert unknown.is_advice  # it asks, and does not withhold the verdict
    none = judged(sets_of(motor=dict(MOTOR, inductance_h=np.nan), minimum_load_inductance=1e-3))
    assert none["drive_load_inductance"].missing == ("inductance terminal-to-terminal",)
    assert not none["drive_load_inductance"].is_advice


def ripple_by_pulses(modulation, angle, samples=4000):
    """Peak-to-peak current of phase a over one period of centred three-phase pulses, per U/(L_tt f)."""
    references = modulation * np.cos(angle - np.array([0.0, 2.0, 4.0]) * np.pi / 3.0)
    references -= 0.5 * (references.max() + references.min())  # zero vectors halved
    duty = 0.5 + references
    carrier = np.abs(2.0 * (np.arange(samples) + 0.5) / samples - 1.0)
    legs = (carrier[:, None] < duty).astype(float)
    phase = legs[:, 0] - legs.mean(axis=1)
    current = np.cumsum(phase - phase.mean()) / samples / 0.5  # L of a phase is half of terminal-to-terminal
    return np.ptp(current)


def test_ripple_of_centred_pulses_is_largest_at_full_modulation():
    largest = max(
        ripple_by_pulses(m, a) for m in np.linspace(0.05, 0.577, 15) for a in np.linspace(0.0, np.pi, 25)
    )
    # A pattern of 4000 samples has its edges within 1/4000 of the period; 0.577 is the largest modulation, rounded.
    assert largest == pytest.approx(1.0 / 3.0, abs=2e-3)
    assert ripple_current(1.0, np.ones(1), np.ones(1), np.array([SINUSOIDAL]))[0] == pytest.approx(1.0 / 3.0)


@pytest.mark.parametrize(("commutation", "low", "high"), [(BRUSHED, -1.0, 1.0), (SIX_STEP, 0.0, 1.0)])
def test_ripple_of_a_bridge(commutation, low, high):
    duty = np.linspace(0.01, 0.99, 99)
    mean = low + (high - low) * duty
    largest = ((high - mean) * duty).max()  # volt-seconds of the pulse above the mean
    factor = ripple_current(1.0, np.ones(1), np.ones(1), np.array([commutation]))[0]
    assert factor == pytest.approx(largest, rel=1e-12)


def test_loss_of_a_triangle():
    time = (np.arange(20000) + 0.5) / 20000
    triangle = np.abs(2.0 * time - 1.0) - 0.5  # 1 A peak to peak
    rms = np.mean(triangle**2)
    # The mean of the samples is exact to the square of their spacing.
    assert ripple_loss(np.ones(1), np.ones(1), np.array([BRUSHED]))[0] == pytest.approx(rms, rel=1e-7)
    three = ripple_loss(np.ones(1), np.ones(1), np.array([SINUSOIDAL]))[0]
    assert three == pytest.approx(3 * 0.5 * rms, rel=1e-7)


def test_ripple_advice():
    found = judged(sets_of(pwm_frequency=16000.0))["pwm_ripple_loss"]
    ripple = 360.0 / (3.0 * TERMINAL_H * 16000.0)
    hot = 1.2 / 1.5 * (1.0 + 130.0 / 260.0)
    assert found.demand == pytest.approx(1.5 * hot * ripple**2 / 12.0, rel=1e-9)
    assert found.is_advice
    assert found.utilisation < 1.0
    ironless = judged(sets_of(motor=dict(MOTOR, inductance_h=1e-4), pwm_frequency=8000.0))["pwm_ripple_loss"]
    assert ironless.utilisation > 1.0
    assert judged(sets_of())["pwm_ripple_loss"].missing == ("PWM frequency",)


# -- cable --------------------------------------------------------------------------------------------
def test_cable_drop_advice():
    assert "cable_voltage_drop" not in judged(sets_of())
    sets = sets_of(surroundings=replace(SURROUNDINGS, cable_ohm=1.0))
    found = judged(sets)["cable_voltage_drop"]
    assert found.demand == pytest.approx(1.5 * float(sets.pairs.current_peak_a[0]), rel=1e-12)
    assert found.capacity == pytest.approx(0.05 * float(sets.pairs.voltage_available_v[0]), rel=1e-12)
    assert found.is_advice
