"""Courses of stops for the diagram: they end where the stops of the checks end, and the report shows them."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import solve_ivp

import actuator_sizing as act
from actuator_sizing.core.stop_course import stop_course
from actuator_sizing.report.figures import house_style
from actuator_sizing.report.figures.stopping import LOOKS, draw_stops
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.sizing import stop_instants
from actuator_sizing.sizing import stops as stops_of_sets
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.shortlist import evaluate_sets
from actuator_sizing.sizing.stop_courses import (
    BRAKE,
    COASTING,
    CONTROLLED,
    DROP,
    SHORTED,
    stop_courses,
)
from actuator_sizing.sizing.stops import brake_stops, coasting_stops, controlled_stops, drops, shorted_stops
from tests.check_cases import LEVEL, LIFT, sets_of

DEMO = Path(__file__).parents[2] / "catalogs_demo"
BRAKED = {"motor": {"brake_torque_nm": 2.0}, "motor_columns": {"brake_closing_time": 0.03}}
STUDIES = {CONTROLLED: controlled_stops, SHORTED: shorted_stops, BRAKE: brake_stops, COASTING: coasting_stops,
           DROP: drops}  # fmt: skip


@pytest.mark.parametrize(
    "values", [LEVEL, LIFT, {**LIFT, "moving mass": 30.0}], ids=["level", "lift", "heavy"]
)
@pytest.mark.parametrize("gearhead", [None, {}], ids=["direct", "geared"])
def test_courses_end_where_the_stops_end(values, gearhead):
    sets = sets_of(values=values, gearhead=gearhead, **BRAKED, **{"allowed stopping distance": 1.0})
    found = stop_courses(sets)
    assert (found.reaction_s, found.closing_s) == (0.01, 0.03)
    for kind, part in found.frame.groupby("kind"):
        result = STUDIES[kind](sets)
        if not np.isfinite(result.distance[0]):
            assert part["speed"].iloc[-1] != 0.0
            continue
        # Panels of eight nodes against panels of sixteen: both resolve a smooth quotient to rounding.
        assert np.max(np.abs(part["way"])) == pytest.approx(float(result.distance[0]), rel=1e-6), kind
        assert part["speed"].iloc[-1] == 0.0
        assert np.all(np.diff(part["time_s"]) >= 0.0)
    assert (DROP in set(found.frame["kind"])) == (values is not LEVEL)


def test_a_load_on_a_shorted_winding_creeps_at_the_speed_where_torques_balance():
    K, R, load = 0.5, 2.0, -0.4
    course = stop_course(100.0, 4e-4, load, 0.05, 0.01, lambda omega: K**2 * omega / R, 0.5)
    assert not course.ends
    assert course.speed_rad_s[-1] == pytest.approx((0.4 - 0.05) * R / K**2, rel=1e-6)
    exact = solve_ivp(lambda t, y: [(-(K**2) * y[0] / R - 0.05 - load) / 4e-4, y[0]], (0.0, 0.49),
                      [100.0 + 0.35 / 4e-4 * 0.01, 0.0], rtol=1e-10, atol=1e-10)  # fmt: skip
    way = 100.0 * 0.01 + 0.5 * 0.35 / 4e-4 * 1e-4 + exact.y[1, -1]
    # The last stretch is drawn by the midpoint rule: a thousandth is thinner than the line.
    assert course.angle_rad[-1] == pytest.approx(way, rel=1e-3)


def test_nothing_is_drawn_where_nothing_asks():
    assert stop_courses(sets_of()) is None
    assert stop_courses(sets_of(**{"allowed stopping distance": 1.0, "stop reaction time": np.nan})) is None


def test_the_diagram_names_every_way_and_the_limit():
    sets = sets_of(values=LIFT, **BRAKED)
    with house_style():
        figure = draw_stops(stop_courses(sets), AxisUnits(True, False), 0.004)
    legend = [text.get_text() for text in figure.axes[0].get_legend().get_texts()]
    assert legend == [label for _, _, _, label in LOOKS]
    assert any("allowed" in text.get_text() for text in figure.axes[1].texts)
    assert "reaction time" in figure.axes[1].get_xlabel()
    assert all("safe" not in label for label in legend)


@pytest.mark.parametrize("name", ["roof_vent_arm", "shade_winch", "tray_lift"])
def test_no_instant_that_is_left_out_is_worse(name, monkeypatch):
    case = act.read_case(DEMO / name)
    motors, gearheads = len(case.motors.names), len(case.gearheads.names)
    closing = {**case.motors.values, "brake_closing_time": np.full(motors, 0.03)}
    case = replace(case, motors=replace(case.motors, values=closing))
    some = np.array([(m, (7 * m) % gearheads, 0) for m in range(0, motors, 3)][:8], dtype=np.intp)

    def stops():
        sets = evaluate_sets(case, build_demand(case), some)
        # Every motor with a brake, so that falls and brake stops are known.
        sets = replace(
            sets, motors=replace(sets.motors, brake_torque_nm=sets.motors.continuous_current_a * 0.5)
        )
        return [
            study(sets) for study in (controlled_stops, shorted_stops, brake_stops, coasting_stops, drops)
        ]

    few = stops()
    monkeypatch.setattr(stop_instants, "_candidates", lambda instants: np.arange(len(instants.at_s)))
    monkeypatch.setattr(stops_of_sets, "_FEW", 10**6)
    for one, other in zip(few, stops(), strict=True):
        for field in ("distance", "time_s", "braking_energy_j", "current_peak_a", "gearhead_torque_nm"):
            assert getattr(one, field) == pytest.approx(getattr(other, field), rel=1e-9, nan_ok=True), field


def test_on_an_arm_the_stop_begins_where_gravity_drives_most_at_full_speed():
    """The speed is the same all along the plateau: its first node is not the worst."""
    case = act.read_case(DEMO / "roof_vent_arm")
    demand = build_demand(case)
    sets = evaluate_sets(case, demand, np.zeros((1, 3), dtype=np.intp))
    instants = stop_instants.stop_instants(sets)
    sense, speed = demand.direction[:, None], np.abs(demand.shaft_speed)
    process = np.minimum(sense * demand.torque_by_cause["process"], 0.0)  # counts where it drives
    pull = sense * demand.torque_by_cause["gravity"] + process
    fastest = speed > (1.0 - 1e-9) * speed.max()
    assert np.ptp(pull[fastest]) > 0.1 * np.abs(pull).max()
    tried = instants.speed_rad_s > (1.0 - 1e-9) * speed.max()
    assert instants.load_nm[tried].min() == pytest.approx(pull[fastest].min(), rel=1e-6)
