"""Strength and life of the transmission: closed forms, and the way from the tables to the verdict."""

import numpy as np
import pytest
from case_files import add_column, small_case, write_folder
from scipy.integrate import quad
from scipy.optimize import brentq
from test_bad_input_cells import problems_of, the_only

from actuator_sizing.case.judging import default_limits
from actuator_sizing.case.reading import read_case
from actuator_sizing.core.screws import (
    END_FIXITIES,
    STEEL_DENSITY_KG_M3,
    STEEL_MODULUS_PA,
    buckling_force,
    critical_speed,
    is_slender,
    nut_half_loads,
    nut_life,
)
from actuator_sizing.sizing.checks import CHECKS
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.shaft_loads import radial_force, shaft_bearings
from tests.check_cases import LEVEL, LIFE, sets_of
from tests.made_cases import cycle, segment

CHECK = {check.key: check for check in CHECKS}
STEADY = (segment(2, "constant speed", start_speed=0.1, duration_s=1.0, process_effort=600.0),)


def measured(sets, key):
    m = CHECK[key].measure(sets)
    return float(m.demand[0]), float(m.capacity[0])


# -- screw ------------------------------------------------------------------------------------------
FREQUENCY_EQUATIONS = {
    "fixed-free": (lambda z: np.cosh(z) * np.cos(z) + 1.0, (1.5, 2.5)),
    "supported-supported": (np.sin, (3.0, 3.3)),
    "fixed-supported": (lambda z: np.tan(z) - np.tanh(z), (3.8, 4.1)),
    "fixed-fixed": (lambda z: np.cosh(z) * np.cos(z) - 1.0, (4.5, 5.0)),
}


@pytest.mark.parametrize("fixity", END_FIXITIES)
def test_critical_speed_is_the_first_frequency_of_the_beam(fixity):
    equation, bracket = FREQUENCY_EQUATIONS[fixity]
    root = brentq(equation, *bracket, xtol=1e-14)
    d, L = 0.02, 1.0
    area, moment = np.pi * d**2 / 4.0, np.pi * d**4 / 64.0
    expected = (root / L) ** 2 * np.sqrt(STEEL_MODULUS_PA * moment / (STEEL_DENSITY_KG_M3 * area))
    assert critical_speed(d, L, fixity) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize(
    ("fixity", "factor"),
    [("fixed-free", 3.4), ("supported-supported", 9.7), ("fixed-supported", 15.1), ("fixed-fixed", 21.9)],
)
def test_factors_of_the_trade_are_four_fifths_of_the_critical_speed(fixity, factor):
    """Factors f of ``f d/L² 10⁷`` in 1/min and mm, common in the trade [M]; rounded to 1 to 2 %."""
    allowed = 0.8 * critical_speed(0.02, 1.0, fixity) * 30.0 / np.pi
    assert allowed == pytest.approx(factor * 20.0 / 1000.0**2 * 1e7, rel=0.025)  # that rounding, and steel


def test_johnson_meets_euler_with_the_same_slope():
    d, strength = 0.02, 4e8
    # Euler's stress is half the yield strength at this length.
    L = np.pi * np.sqrt(2.0 * STEEL_MODULUS_PA / strength) * d / 4.0
    longer, shorter = (
        buckling_force(d, L * (1.0 + s), "supported-supported", strength) for s in (1e-7, -1e-7)
    )
    half = 0.5 * strength * np.pi * d**2 / 4.0
    assert (longer, shorter) == pytest.approx((half, half), rel=1e-6)
    step = 1e-4

    def slope(at):
        force = [buckling_force(d, at + s * L * step, "supported-supported", strength) for s in (-1.0, 1.0)]
        return (force[1] - force[0]) / (2.0 * step)

    assert slope(L * (1 + 2 * step)) == pytest.approx(slope(L * (1 - 2 * step)), rel=2e-3)
    assert buckling_force(d, 1e-3, "fixed-fixed", strength) == pytest.approx(
        strength * np.pi * d**2 / 4.0, rel=1e-4
    )


@pytest.mark.parametrize("slender", [60.0, 100.0, 120.0, 132.0, 133.0, 150.0])
def test_a_yield_strength_is_asked_for_while_the_softest_steel_could_need_johnson(slender):
    d = 0.02
    L = slender * d / 4.0
    euler, soft = (buckling_force(d, L, "supported-supported", strength) for strength in (np.nan, 235e6))
    assert is_slender(d, L, "supported-supported") == (soft == pytest.approx(euler, rel=1e-12))
    if slender == 100.0:  # Euler would allow a soft screw too much
        s250 = buckling_force(d, L, "supported-supported", 250e6)
        assert euler / s250 == pytest.approx(1.187, abs=5e-4)
        assert not is_slender(d, L, "supported-supported")


def test_life_of_a_screw_under_a_steady_force():
    sets = sets_of(segments=STEADY, **{"screw dynamic load rating": 2e4}, **LIFE)
    force = 600.0 + 150.0  # process and friction of the guide
    required, life = measured(sets, "screw_life")
    assert required == 3.6e7
    assert life == pytest.approx(
        1e6 * (2e4 / force) ** 3 * 0.02 / 0.1, rel=1e-12
    )  # turns of 20 mm at 0.1 m/s


def test_preload_loads_both_halves_until_one_comes_free():
    preload, free = 500.0, 2.0 * np.sqrt(2.0) * 500.0
    first, second = nut_half_loads(np.array([0.0, 300.0, -300.0, free, 2.0 * free]), preload)
    assert first[0] == second[0] == preload
    assert (first[1], second[1]) == pytest.approx((second[2], first[2]), rel=1e-12)
    assert first[3] == pytest.approx(free, rel=1e-12)
    assert (second[3], second[4]) == (0.0, 0.0)
    assert first[1] > preload > second[1] > 0.0
    assert first[1] - second[1] == pytest.approx(300.0, rel=0.07)  # secant for the curve, exact at both ends
    both = sets_of(segments=STEADY, **{"screw dynamic load rating": 2e4, "screw preload": 800.0}, **LIFE)
    loads = [float(half[0]) for half in nut_half_loads(np.array([750.0]), 800.0)]
    lives = [1e6 * (2e4 / load) ** 3 for load in loads]
    assert measured(both, "screw_life")[1] == pytest.approx(nut_life(*lives) * 0.2, rel=1e-12)
    assert nut_life(1e6, 1e6) == pytest.approx(1e6 * 2.0**-0.9, rel=1e-12)


def test_pressure_times_speed_of_a_sliding_nut():
    values = {
        "lead": 0.01,
        "moving mass": 10.0,
        "efficiency": 0.4,
        "screw diameter": 0.02,
        "guide friction force": 0.0,
    }
    sets = sets_of("lead screw", values, STEADY,
                   **{"nut contact area": 3e-4, "allowed nut pressure times speed": 1e7})  # fmt: skip
    sliding = (
        0.1 / 0.01 * np.hypot(np.pi * 0.02, 0.01)
    )  # turns per second times the length of one turn of thread
    assert measured(sets, "screw_pressure_speed")[0] == pytest.approx(600.0 / 3e-4 * sliding, rel=1e-12)


# -- gearhead and shaft -----------------------------------------------------------------------------
@pytest.mark.parametrize(("bearing", "exponent"), [("ball", 3.0), ("roller", 10.0 / 3.0)])
def test_bearings_of_the_gears_choose_the_exponent(bearing, exponent):
    ramp = cycle({"law": "speed ramp", "end_speed": 10.0, "duration_s": 2.0},
                 {"law": "speed ramp", "end_speed": 0.0, "duration_s": 1.0})  # fmt: skip
    sets = sets_of("rotary load", {"load inertia": 0.1, "friction torque": 0.2}, ramp, gearhead={},
                   gearhead_columns={"gear_bearings": bearing}, **{"application factor": 1.5})  # fmt: skip
    torques = ((0.1 * 5.0 + 0.2, 2.0), (abs(-0.1 * 10.0 + 0.2), 1.0))
    turned = [5.0 * time for _, time in torques]
    mean = sum(T**exponent * angle for (T, _), angle in zip(torques, turned, strict=True)) / sum(turned)
    assert measured(sets, "gearhead_equivalent_torque")[0] == pytest.approx(
        1.5 * mean ** (1 / exponent), rel=1e-9
    )


def test_shocks_load_gearhead_and_coupling_alike():
    sets = sets_of(gearhead={}, **{"application factor": 2.0, "coupling torque limit": 10.0})
    peak = 2.0 * sets.demand.shaft_torque_peak
    for key in ("gearhead_peak_torque", "coupling_torque"):
        assert measured(sets, key)[0] == pytest.approx(peak, rel=1e-6), key
    assert "application factor 2" in CHECK["gearhead_peak_torque"].working(sets, 0)


def test_thermal_power_is_the_mean_of_what_enters():
    sets = sets_of(segments=STEADY, gearhead={}, gearhead_columns={"thermal_power": 100.0})
    omega = 0.1 * 2.0 * np.pi / 0.02
    torque = 750.0 * 0.02 / (2.0 * np.pi)
    entering = torque * omega / 0.94 + 0.02 * 2.0 * omega
    assert measured(sets, "gearhead_thermal_power")[0] == pytest.approx(entering, rel=1e-9)


def test_radial_forces_of_belt_and_rack():
    belt = sets_of("belt", {"pulley diameter": 0.05, "moving mass": 5.0}, **{"belt pretension": 150.0})
    assert np.all(radial_force(belt) == 300.0)
    rack = sets_of(
        "rack and pinion", {"pinion diameter": 0.05, "moving mass": 5.0}, STEADY, **{"pressure angle": 0.35}
    )
    assert radial_force(rack) == pytest.approx(600.0 / np.cos(0.35), rel=1e-12)
    shocks = {"pressure angle": 0.35, "application factor": 2.0}
    shocked = sets_of("rack and pinion", {"pinion diameter": 0.05, "moving mass": 5.0}, STEADY, **shocks)
    assert radial_force(shocked) == pytest.approx(1200.0 / np.cos(0.35), rel=1e-12)
    own = sets_of("belt", {"pulley diameter": 0.05, "moving mass": 5.0},
                  **{"belt pretension": 150.0, "shaft radial force": 90.0})  # fmt: skip
    assert np.all(radial_force(own) == 90.0)


def test_a_belt_with_a_slack_strand_pulls_with_the_whole_force():
    belt = {"pulley diameter": 0.05, "moving mass": 5.0}
    tight, slack, shocked = (
        radial_force(sets_of("belt", belt, STEADY, **given))
        for given in (
            {"belt pretension": 400.0},
            {"belt pretension": 250.0},
            {"belt pretension": 400.0, "application factor": 1.5},
        )
    )
    assert (tight.max(), slack.max(), shocked.max()) == pytest.approx((800.0, 600.0, 900.0), rel=1e-12)


def test_permissible_radial_force_moves_with_the_lever():
    columns = {"permissible_radial_force": 500.0, "radial_force_position": 0.02, "bearing_lever": 0.03}
    loaded = {"shaft radial force": 200.0}
    further = sets_of(motor_columns=columns, **loaded, **{"shaft force position": 0.07})
    assert shaft_bearings(further).radial_n[0] == pytest.approx(500.0 * 0.05 / 0.10, rel=1e-12)
    without = {**columns, "bearing_lever": np.nan}
    nearer = sets_of(motor_columns=without, **loaded, **{"shaft force position": 0.01})
    assert shaft_bearings(nearer).radial_n[0] == 500.0
    beyond = sets_of(motor_columns=without, **loaded, **{"shaft force position": 0.03})
    lacking = [need.column for need in CHECK["shaft_radial_force"].needs if not need.known(beyond)[0]]
    assert lacking == ["bearing lever"]


def test_bearing_life_adds_radial_and_axial_shares():
    columns = {"permissible_radial_force": 500.0, "radial_force_position": 0.02, "permissible_axial_force": 400.0,
               "bearing_life": 7.2e7, "bearing_life_speed": 100.0, "shaft_bearings": "roller"}  # fmt: skip
    sets = sets_of(segments=STEADY, motor_columns=columns, **LIFE,
                    **{"shaft radial force": 200.0, "shaft axial force": 100.0,
                       "shaft force position": 0.02})  # fmt: skip
    speed = 0.1 * 2.0 * np.pi / 0.02
    expected = 7.2e7 * (0.4 + 0.25) ** (-10.0 / 3.0) * 100.0 / speed
    assert measured(sets, "shaft_bearing_life")[1] == pytest.approx(expected, rel=1e-12)


def test_suggested_limits_are_common_practice():
    limits = default_limits()
    assert limits["screw_critical_speed"].allowed_utilisation == 0.8
    assert limits["screw_buckling"].allowed_utilisation == 0.5
    assert limits["screw_static_load"].allowed_utilisation == pytest.approx(2.0 / 3.0)
    assert limits["standstill_hold"].applies == "advice"


def test_mean_power_agrees_with_quadrature():
    """The nodes of the cycle integrate what an adaptive quadrature of the motion integrates."""
    sets = sets_of("lead screw", {**LEVEL, "screw diameter": 0.02, "efficiency": 0.5, "guide friction force": 20.0},
                   cycle({"law": "cycloidal", "displacement": 0.1, "duration_s": 1.0}),
                   **{"nut contact area": 1e-4, "allowed nut pressure times speed": 1e7})  # fmt: skip
    slides = np.hypot(0.01, 0.02 / (2.0 * np.pi)) * 2.0 * np.pi / 0.02

    def pressed(t):
        v, a = 0.1 * (1.0 - np.cos(2.0 * np.pi * t)), 0.1 * 2.0 * np.pi * np.sin(2.0 * np.pi * t)
        return abs(10.0 * a + 20.0) / 1e-4 * v * slides

    expected = quad(pressed, 0.0, 1.0, epsabs=1e-10, epsrel=1e-12)[0]
    assert measured(sets, "screw_pressure_speed")[0] == pytest.approx(expected, rel=1e-9)


# -- from the tables --------------------------------------------------------------------------------
def with_screw(**changed):
    tables = small_case()
    given = {"screw root diameter": (17, "mm"), "screw unsupported length": (700, "mm"),
             "screw end fixity": ("fixed-supported", ""), "screw dynamic load rating": (12, "kN"),
             "screw static load rating": (20, "kN"), "required life": (20000, "h")} | changed  # fmt: skip
    tables["axis"] += [[name, value, unit, "drawing"] for name, (value, unit) in given.items()]
    return tables


def test_quantities_reach_the_verdict(tmp_path):
    comparison = compare(read_case(write_folder(tmp_path / "case", with_screw())))
    assert comparison.best.check("screw_critical_speed").capacity == pytest.approx(
        critical_speed(0.017, 0.7, "fixed-supported"), rel=1e-12
    )
    assert comparison.best.check("screw_life").utilisation is not None
    assert "model: mechanism" not in dict(comparison.assumptions)
    assert "model: stated, not used" not in dict(comparison.assumptions)


def test_what_is_missing_is_asked_of_the_axis(tmp_path):
    tables = with_screw(**{"screw unsupported length": (100, "mm")})
    comparison = compare(read_case(write_folder(tmp_path / "case", tables)))
    assert comparison.best.check("screw_buckling").missing == ("screw yield strength",)
    assert ("axis", "screw yield strength", "Buckling of the screw") in comparison.questions


def test_a_root_above_the_diameter_is_a_slip(tmp_path):
    tables = with_screw(**{"screw root diameter": (170, "mm")})
    problem = the_only(problems_of(tmp_path, tables))
    assert (problem.column, problem.got) == ("screw root diameter", "170 mm")


def test_an_unknown_fixity_names_the_known_ones(tmp_path):
    problem = the_only(problems_of(tmp_path, with_screw(**{"screw end fixity": ("bolted", "")})))
    assert "fixed-supported" in problem.allowed


def test_columns_of_a_catalog_reach_the_verdict(tmp_path):
    tables = with_screw()
    add_column(tables, "motors", "demagnetisation current [A]", 1.0, 1.0)
    comparison = compare(read_case(write_folder(tmp_path / "case", tables)))
    found = comparison.sets[0].check("motor_demagnetisation")
    assert found.capacity == 1.0
