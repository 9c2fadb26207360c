"""Robustness studies: probabilities against closed forms, samples against the exact chain, what must not matter."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.stats import norm

import actuator_sizing as act
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.robustness.sampled_sets import SAMPLED_CHECKS
from tests.unit.robust_case import PARTS, evaluator, plain_case, spread, with_spreads

DEMO = Path(__file__).parents[2] / "catalogs_demo"


def study(*spreads, **options):
    options = {"samples": 4000, "sensitivity": 0, "exact": 20} | options
    return act.robust(with_spreads(*spreads), **PARTS, **options)


def row(table, check):
    return table.set_index("check").loc[check]


# -- probabilities against closed forms -----------------------------------------------------------------------


def covers(found, exact):
    """Within the interval of 95 %, widened to four standard errors: the seed is fixed, so this is no gamble."""
    half = 0.5 * (found["probability_high"] - found["probability_low"])
    return abs(found["probability"] - exact) < 2.04 * half


def test_a_limit_that_is_normal():
    """Passes while the speed limit lies above the demand: Φ((μ − ω)/σ) (D)."""
    probe = evaluator(spread("maximum speed", 0.05, "motors"))
    column = [check.key for check in probe.checks].index("motor_speed")
    width = abs(1.0 - probe.nominal[column])  # the demand lies one standard deviation from the limit
    limit = plain_case().motor_parameters.speed_max_rad_s[0]
    found = row(study(spread("maximum speed", width * limit, "motors", relative=False, shape="truncated normal",
                             truncation=min(3.0, 0.99 / width))).checks, "motor_speed")  # fmt: skip
    k = min(3.0, 0.99 / width)
    share = (norm.cdf(k) - norm.cdf((probe.nominal[column] - 1.0) / width)) / (norm.cdf(k) - norm.cdf(-k))
    assert 0.05 < share < 0.95
    assert covers(found, share)


@pytest.mark.parametrize("rho", [-0.6, 0.0, 0.8])
def test_two_limits_that_vary_together(rho):
    """Highest bus below what the drive stands: Φ of the gap over √(σ₁² + σ₂² − 2ρσ₁σ₂) (D)."""
    bus, limit = plain_case().surroundings.bus_max_v, plain_case().drive_parameters.bus_voltage_max_v[0]
    gap, s1, s2 = limit - bus, 6.0, 9.0
    found = row(study(
        spread("maximum bus voltage", s1, "axis", relative=False,
               correlations=[(("drives", "maximum bus voltage"), rho)]),
        spread("maximum bus voltage", s2, "drives", relative=False),
    ).checks, "drive_bus_voltage")  # fmt: skip
    assert covers(found, norm.cdf(gap / np.sqrt(s1**2 + s2**2 - 2.0 * rho * s1 * s2)))


def test_uniform_and_triangular_limits():
    bus, limit = plain_case().surroundings.bus_max_v, plain_case().drive_parameters.bus_voltage_max_v[0]
    half = 2.0 * (limit - bus)  # the limit is exceeded from the middle of the upper half on
    for shape, exact in (("uniform", 0.75), ("triangular", 0.875)):
        found = study(spread("maximum bus voltage", half, "axis", relative=False, shape=shape))
        assert covers(row(found.checks, "drive_bus_voltage"), exact)


def test_quantiles_of_a_current_that_goes_with_one_over_the_torque_constant():
    found = study(spread("torque constant", 0.04, "motors"), samples=20_000)
    nominal = plain_case()
    base = row(found.checks, "motor_peak_current")
    for name, z in (("q05", -1.6449), ("q50", 0.0), ("q95", 1.6449)):
        # Four standard errors of a quantile, √(p(1−p)/N)/density, are below half a percent here.
        assert base[f"utilisation_{name}"] == pytest.approx(
            base["nominal_utilisation"] / (1.0 - 0.04 * z), rel=5e-3
        )
    assert nominal.tolerances == ()


# -- samples against the exact chain ---------------------------------------------------------------------------

EVERYTHING = (
    spread("torque constant", 0.05, "motors", correlations=[(("motors", "resistance terminal-to-terminal"), 0.7)]),
    spread("resistance terminal-to-terminal", 0.08, "motors"),
    spread("rotor inertia", 0.1, "motors"),
    spread("ambient temperature", 10.0, "axis", relative=False, shape="uniform"),
    spread("minimum bus voltage", 0.1, "axis", shape="triangular"),
    spread("efficiency", 0.05, "gearheads", shape="uniform"),
    spread("continuous current", 0.1, "drives"),
)  # fmt: skip
LOAD = (
    spread("payload", 0.2, "duty_cycle", shape="triangular"),
    spread("moving mass", 0.1, "axis"),
    spread("efficiency", 0.08, "axis", shape="uniform"),
    spread("lead", 0.02, "axis", shape="uniform"),
)


@pytest.mark.parametrize("spreads", [EVERYTHING, LOAD, EVERYTHING + LOAD], ids=["parts", "load", "both"])
def test_samples_at_once_agree_with_the_exact_chain(spreads):
    probe = evaluator(*spreads)
    scores = np.random.default_rng(3).standard_normal((12, len(probe.inputs)))
    values = probe.inputs.of_scores(scores)
    quick, exact = probe.quick(values).utilisation, probe.exact(values).utilisation
    keys = [check.key for check in probe.checks]
    assert "winding_temperature" in keys
    assert set(keys) & SAMPLED_CHECKS == {
        k for k, at_once in zip(keys, probe.at_once, strict=True) if at_once
    }
    # 2e-4: kinks inside pieces where the power turns, and the i²t accumulator at fixed instants.
    tight = [i for i, key in enumerate(keys) if key in SAMPLED_CHECKS and key != "drive_peak_time"]
    np.testing.assert_allclose(quick[:, tight], exact[:, tight], rtol=2e-4)
    loose = keys.index("drive_peak_time")
    np.testing.assert_allclose(quick[:, loose], exact[:, loose], rtol=2e-2, atol=2e-4)


def test_the_exact_chain_one_by_one_and_together():
    probe = evaluator(*EVERYTHING)
    assert not probe.one_by_one
    values = probe.inputs.of_scores(np.random.default_rng(4).standard_normal((3, len(probe.inputs))))
    alone = np.concatenate([probe.exact(values[i : i + 1]).utilisation for i in range(3)])
    np.testing.assert_allclose(probe.exact(values).utilisation, alone, rtol=1e-9)


def test_times_go_through_the_exact_chain():
    probe = evaluator(spread("duration", 0.05, "duty_cycle", shape="uniform"))
    assert not probe.at_once.any()
    slow = probe.exact(np.array([[1.1 * probe.inputs.nominal[0]]]))
    # All times 10 % longer: every speed falls by that (D).
    assert slow.quantities["speed_peak_rad_s"][0] == pytest.approx(
        probe.exact(probe.inputs.nominal[None]).quantities["speed_peak_rad_s"][0] / 1.1
    )
    found = study(spread("duration", 0.05, "duty_cycle", shape="uniform"), samples=30)
    assert found.sensitivity.empty
    assert any("no sensitivity" in note for note in found.notes)


# -- what must not matter, and what must -----------------------------------------------------------------------


def test_the_same_seed_gives_the_same_answer_and_another_does_not():
    spreads = EVERYTHING[:3]
    first, again, other = (study(*spreads, seed=seed, sensitivity=16) for seed in (5, 5, 6))
    for name in ("checks", "quantities", "sensitivity", "swings", "corners", "inputs"):
        pd.testing.assert_frame_equal(getattr(first, name), getattr(again, name))
    assert not first.checks.equals(other.checks)


@pytest.mark.parametrize("spreads", [EVERYTHING, LOAD], ids=["parts", "load"])
def test_the_size_of_a_chunk_does_not_matter(spreads):
    probe = evaluator(*spreads)
    samples = probe.samples(
        probe.inputs.of_scores(np.random.default_rng(0).standard_normal((50, len(probe.inputs))))
    )
    whole, cut = (probe._sampler.sets(samples, chunk) for chunk in (1000, 7))
    for name in (
        "torque_rms_nm",
        "torque_peak_nm",
        "voltage_peak_v",
        "plane_utilisation",
        "winding_max_degc",
    ):
        # Rounding of matrix products of another shape; the thermal steps are the same for every sample.
        np.testing.assert_allclose(getattr(whole.pairs, name), getattr(cut.pairs, name), rtol=1e-9)


@settings(max_examples=25, deadline=None)
@given(scores=st.lists(st.floats(-4.0, 4.0), min_size=len(EVERYTHING), max_size=len(EVERYTHING)))
def test_a_hotter_room_and_a_lower_bus_never_help(scores):
    probe = evaluator(*EVERYTHING)
    values = np.repeat(probe.inputs.of_scores(np.array([scores])), 3, axis=0)
    labels = [one.label for one in probe.inputs.inputs]
    values[1, labels.index("ambient temperature")] += 5.0
    values[2, labels.index("minimum bus voltage")] *= 0.97
    use = probe.quick(values).utilisation
    keys = [check.key for check in probe.checks]
    slack = 1e-9
    for check in ("winding_temperature", "rms_current"):
        assert use[1, keys.index(check)] >= use[0, keys.index(check)] - slack
    for check in ("voltage", "speed_torque"):
        assert use[2, keys.index(check)] >= use[0, keys.index(check)] - slack


def test_sensitivity_of_a_linear_check():
    """Utilisation of the fit of the bus is linear in the bus and nearly so in one over the limit: shares of variance
    σ_i² u_i² (D); the curvature of 1/x at 2 % is below 1e-3 of the variance."""
    spreads = (
        spread("maximum bus voltage", 0.01, "axis"),
        spread("maximum bus voltage", 0.02, "drives"),
        spread("rotor inertia", 0.05, "motors"),
    )  # fmt: skip
    found = study(*spreads, sensitivity=256).sensitivity
    mine = found[found["check"] == "drive_bus_voltage"]
    for share, index, error in zip((0.2, 0.8, 0.0), mine["total"], mine["total_error"], strict=True):
        assert abs(index - share) < 4.0 * error + 2e-3
    assert mine["first"].sum() == pytest.approx(1.0, abs=0.02)


def test_swings_and_the_worst_corner():
    found = study(
        spread("maximum bus voltage", 0.05, "axis", shape="uniform"),
        spread("maximum bus voltage", 0.10, "drives", shape="triangular"),
        spread("rotor inertia", 0.05, "motors"),
    )
    swings = found.swings[found.swings["check"] == "drive_bus_voltage"].set_index("input")
    nominal = row(found.checks, "drive_bus_voltage")["nominal_utilisation"]
    assert swings.loc["axis maximum bus voltage", "utilisation_high"] == pytest.approx(1.05 * nominal)
    assert swings.loc["drives maximum bus voltage", "utilisation_low"] == pytest.approx(nominal / 0.9)
    worst = row(found.corners, "drive_bus_voltage")
    assert worst["utilisation"] == pytest.approx(1.05 * nominal / 0.9)
    assert worst["corner"] == "axis maximum bus voltage high; drives maximum bus voltage low"
    assert worst["complete"]
    assert "rotor inertia" not in worst["corner"]  # it has no end


def test_more_corners_than_can_be_tried_follow_the_swings():
    names = ("rotor inertia", "torque constant", "resistance terminal-to-terminal", "inductance terminal-to-terminal",
             "continuous current", "peak current", "maximum speed", "winding temperature limit")  # fmt: skip
    spreads = [
        spread(
            name,
            2.0 if "temperature" in name else 0.02,
            "motors",
            relative="temperature" not in name,
            shape="uniform",
        )
        for name in names
    ]
    spreads += [spread(name, 0.02, "drives", shape="uniform") for name in ("continuous current", "peak current",
                                                                           "maximum bus voltage")]  # fmt: skip
    spreads += [
        spread(name, 0.02, "axis", shape="uniform") for name in ("moving mass", "minimum bus voltage")
    ]
    found = study(*spreads, samples=20)
    corners = found.corners
    assert not corners["complete"].any()
    swings = found.swings.groupby("check")[["utilisation_low", "utilisation_high"]].max().max(axis=1)
    for check, use in zip(corners["check"], corners["utilisation"], strict=True):
        assert use >= swings[check] * (1.0 - 1e-9)


def test_missing_data_is_not_a_pass():
    """A drive without a peak time is not checked for it, and the study says so."""
    case = with_spreads(spread("torque constant", 0.02, "motors"))
    drives = replace(case.drive_parameters, peak_time_s=np.full(len(case.drives), np.nan))
    found = act.robust(replace(case, drive_parameters=drives), **PARTS, samples=50, sensitivity=0, exact=5)
    assert "drive_peak_time" not in set(found.checks["check"])
    assert any("peak time" in title.lower() for title in found.not_checked)


# -- checks that apply to some samples only --------------------------------------------------------------------


def lift(capacitance_f, pulse_j, *spreads, **options):
    """The demo lift, whose resistor burns or not with the capacitance of the bus and the payload."""
    case = act.read_case(DEMO / "tray_lift")
    stated = {"bus capacitance": capacitance_f, "brake resistor pulse energy": pulse_j} | options
    spreads = spreads or (spread("payload", 0.3, "duty_cycle", shape="uniform"),)
    case = replace(case, options=case.options | stated, tolerances=spreads)
    return replace(case, options={key: value for key, value in case.options.items() if value is not None})


LIFT_PARTS = {"motor": "sine-80m-325f", "gearhead": "planet-60-3", "drive": "feed-325-3rms"}


@pytest.fixture(scope="module")
def burns_when_heavy():
    made = lift(0.0182, 1.0, **{"brake resistor": 100.0})  # no smaller than the chopper allows
    return act.robust(made, **LIFT_PARTS, samples=40, exact=40, sensitivity=0)


def test_a_check_that_applies_only_with_the_spread(burns_when_heavy):
    """Without spread nothing burns; a heavier payload gives pulses far beyond a resistor of 1 J."""
    found = row(burns_when_heavy.checks, "brake_resistor_pulse_energy")
    assert np.isnan(found["nominal_utilisation"])
    assert found["utilisation_q99"] > 10.0
    assert 0.0 < burns_when_heavy.probability["probability"] <= found["probability"] < 1.0
    assert any(
        "Brake resistor pulse energy" in note and "applies to" in note for note in burns_when_heavy.notes
    )
    worst = row(burns_when_heavy.corners, "brake_resistor_pulse_energy")
    assert worst["corner"] == "payload high"
    assert not worst["passes"]


def test_a_study_with_such_checks_is_drawn_and_written(burns_when_heavy, tmp_path):
    assert burns_when_heavy.write(tmp_path / "study")


@pytest.mark.parametrize("capacitance_f", [0.0155, 0.0162], ids=["burns without spread", "just not"])
def test_where_a_check_does_not_apply_it_is_passed(capacitance_f, tmp_path):
    """No rating is exceeded in any sample: those without a pulse pass like those with one."""
    study = act.robust(lift(capacitance_f, 1500.0), **LIFT_PARTS, samples=40, exact=40, sensitivity=0)
    for check in ("brake_resistor_peak_power", "brake_resistor_mean_power", "brake_resistor_pulse_energy"):
        found = row(study.checks, check)
        assert found["utilisation_q99"] < 1.0
        assert found["probability"] == 1.0
        assert row(study.corners, check)["passes"]
        assert row(study.corners, check)["corner"] == "payload high"
    assert study.write(tmp_path / "study")


def test_what_cannot_be_checked_in_a_sample_is_not_passed():
    study = act.robust(lift(0.0182, None), **LIFT_PARTS, samples=40, exact=40, sensitivity=0)
    assert row(study.checks, "brake_resistor_pulse_energy")["probability"] < 1.0
    assert any("not checked in" in note and "Brake resistor pulse energy" in note for note in study.notes)


def test_advice_where_the_sheet_states_nothing_fails_no_sample(burns_when_heavy):
    """The drive states no standstill current: the rule of thumb is advice, as in a comparison."""
    found = row(burns_when_heavy.checks, "drive_standstill_current")
    assert found["advice"]
    assert found["probability"] < burns_when_heavy.probability["probability"]


def test_checks_that_need_a_simulation_are_named_as_left_out():
    options = {"settling band": 1e-4, "driven shaft stiffness": 1000.0}
    study = act.robust(lift(560e-6, 1500.0, **options), **LIFT_PARTS, samples=5, exact=5, sensitivity=0)
    left_out = [note for note in study.notes if "needs a simulation" in note]
    assert any(note.endswith("Settling within dwell") for note in left_out)
    assert not any("ollowing error" in note for note in left_out)  # not asked for
    assert "settling" not in set(study.checks["check"])


def test_the_first_set_that_passes_often_enough():
    case = with_spreads(spread("payload", 0.1, "duty_cycle"), spread("torque constant", 0.05, "motors"))
    comparison = act.compare(case)
    found = act.robust(comparison, probability=0.9, samples=400, sensitivity=0, exact=60)
    assert found.wanted_probability == 0.9
    assert list(found.shortlist["reaches"][:-1]) == [False] * (len(found.shortlist) - 1)
    if found.shortlist["reaches"].iloc[-1]:
        last = found.shortlist.iloc[-1]
        assert (found.motor, found.gearhead, found.drive) == (last["motor"], last["gearhead"], last["drive"])
        assert last["probability_low"] >= 0.9


def test_what_cannot_be_asked():
    case = with_spreads(spread("torque constant", 0.02, "motors"))
    with pytest.raises(InputError) as raised:
        act.robust(case, samples=0, sensitivity=3, probability=1.5, motor="M-10", drive="D-1")
    assert [problem.column for problem in raised.value.problems] == ["samples", "exact", "sensitivity", "probability",
                                                                     "probability"]  # fmt: skip
    with pytest.raises(InputError, match="no row"):
        act.robust(plain_case())
    with pytest.raises(InputError, match="M-1O"):
        act.robust(case, motor="M-1O", gearhead="G-3", drive="D-1")


def test_a_width_that_one_part_cannot_have():
    case = with_spreads(spread("rotor inertia", 1.0, "motors", relative=False))  # of 480 g·cm²
    with pytest.raises(InputError, match="M-10"):
        act.robust(case, **PARTS, samples=10)


def test_a_spread_that_does_not_act_is_named():
    found = study(
        spread("torque constant", 0.02, "motors"), spread("brake torque", 0.1, "motors"), samples=20
    )
    assert any(note == "not used: brake torque: M-10 states no value" for note in found.notes)
    with pytest.raises(InputError, match="M-10 states no value"):
        study(spread("brake torque", 0.1, "motors"), samples=20)


def test_a_derived_rating_does_not_move_with_the_torque_constant():
    """A motor of lower torque constant stands the same current, not more (first principles)."""
    probe = evaluator(spread("torque constant", 0.05, "motors"))
    moved = probe.samples(np.array([[0.9 * probe.inputs.nominal[0]]]))
    assert moved.motors.torque_constant_nm_per_a[0] == pytest.approx(
        0.9 * probe.case.motor_parameters.torque_constant_nm_per_a[0]
    )
    assert moved.motors.continuous_current_a[0] == probe.case.motor_parameters.continuous_current_a[0]
    assert (
        moved.motors.thermal_resistance_winding_k_w[0]
        == (probe.case.motor_parameters.thermal_resistance_winding_k_w[0])
    )


def test_back_driving_follows_the_efficiency_that_it_was_derived_from():
    probe = evaluator(spread("efficiency", 0.05, "gearheads", shape="uniform"))
    moved = probe.samples(np.array([[0.92]]))
    assert moved.gearheads.efficiency_back[0] == pytest.approx(2.0 - 1.0 / 0.92)
