"""Geometry that cannot close, motions it cannot make, maps and inventories with mistakes; and the good ones."""

from __future__ import annotations

import numpy as np
import pytest
from case_files import small_case, write_folder
from test_bad_input_cells import problems_of as all_problems_of
from test_bad_input_cells import the_only

from actuator_sizing.case.reading import check_case
from actuator_sizing.case.starting import start_case
from actuator_sizing.core.inertias import Part
from actuator_sizing.sizing.comparison import compare


def problems_of(tmp_path, tables):
    """What is wrong beside an inclination that these cases do not state."""
    return tuple(p for p in all_problems_of(tmp_path, tables) if p.column != "inclination")


def made(mechanism, *quantities, cycle=None):
    """The small case with another mechanism; 360° per cycle at the shaft unless something else is given."""
    tables = small_case()
    keep = ("quantity", "title", "nominal bus voltage", "ambient temperature")
    tables["axis"] = [row for row in tables["axis"] if row[0] in keep]
    tables["axis"].insert(1, ["mechanism", mechanism, "", ""])
    tables["axis"] += [[name, value, unit, ""] for name, value, unit in quantities]
    tables["duty_cycle"] = cycle or [
        ["segment", "motion law", "displacement [deg]", "duration [s]"],
        ["out", "cycloidal", 180, 1.0],
        ["back", "cycloidal", -180, 1.0],
    ]
    return tables


LIFT = [["segment", "motion law", "displacement [mm]", "duration [s]"],
        ["out", "cycloidal", 50, 1.0], ["back", "cycloidal", -50, 1.0]]  # fmt: skip
CRANK = (("crank radius", 40, "mm"), ("rod length", 180, "mm"), ("moving mass", 2, "kg"))
MAP = [
    ["shaft angle [deg]", "position [mm]"],
    [0, 0],
    [60, 5],
    [120, 15],
    [180, 20],
    [240, 15],
    [300, 5],
    [360, 0],
]


@pytest.mark.parametrize(
    ("tables", "where", "got", "allowed", "remedy"),
    [
        (made("crank-slider", ("crank radius", 40, "mm"), ("rod length", 30, "mm"), ("moving mass", 2, "kg")),
         ("axis", 7, "rod length"), "30 mm", "above crank radius plus slide offset, 40 mm", "lengthen the rod"),
        (made("four-bar", ("crank radius", 80, "mm"), ("coupler length", 90, "mm"), ("rocker length", 60, "mm"),
              ("ground length", 100, "mm"), ("load inertia", 1, "kg·m²")),
         ("axis", 7, "coupler length"), "80, 90, 60, 100 mm", "close at every crank angle", "Change a length"),
        (made("eccentric", ("eccentricity", 40, "mm"), ("disc radius", 30, "mm"), ("moving mass", 2, "kg")),
         ("axis", 6, "eccentricity"), "40 mm", "below the disc radius, 30 mm", "within the disc"),
        (made("ball screw", ("lead", 0, "mm"), ("moving mass", 2, "kg"), cycle=LIFT),
         ("axis", 6, "lead"), "0 mm", "a number > 0", "Check the value"),
        (made("crank-slider", *CRANK[:2], ("moving mass", -2, "kg")),
         ("axis", 8, "moving mass"), "-2 kg", "a number ≥ 0 kg", "Check the value"),
        (made("crank-slider", *CRANK, ("motion stated at", "load", ""), ("start angle", -90, "°"), cycle=LIFT),
         ("duty_cycle", 2, "displacement"), "50 mm", "dead centre", "Shorten the stroke"),
        (made("crank-slider", *CRANK, ("motion stated at", "load", ""), cycle=LIFT),
         ("duty_cycle", 2, "displacement"), "starts at a dead centre", "moves the load",
         "state the motion at the shaft"),
        (made("toggle lever", ("lever length", 80, "mm"), ("link length", 40, "mm"), ("start angle", -20, "°"),
              ("moving mass", 2, "kg")),
         ("duty_cycle", 2, "displacement"), "180°", "from -9.99997° to 50°", "Shorten the stroke"),
        (made("wheel drive", ("wheel diameter", 100, "mm"), ("adhesion coefficient", 0.02, ""),
              ("moving mass", 20, "kg"), cycle=LIFT),
         ("duty_cycle", 2, ""), "a traction of 6.283 N", "at most 3.923 N", "more gently"),
        (made("winch", ("drum diameter", 100, "mm"), ("moving mass", 0.1, "kg"), ("guide friction force", 5, "N"),
              cycle=LIFT),
         ("duty_cycle", 3, ""), "a rope force of -4.", "taut", "cannot push"),
        (made("winch", ("drum diameter", 100, "mm"), ("rope diameter", 5, "mm"), ("turns per layer", 2, ""),
              ("moving mass", 5, "kg"), cycle=[LIFT[0], ["down", "cycloidal", -50, 1.0], ["up", "cycloidal",
                                                                                          50, 1.0]]),
         ("duty_cycle", 2, "displacement"), "-50 mm", "from 0 mm", "Shorten the stroke"),
        (made("arm", ("arm mass", 5, "kg"), ("arm mass radius", 400, "mm"), ("load inertia", 0.1, "kg·m²")),
         ("axis", 8, "load inertia"), "0.1 kg·m²", "0.8 kg·m²", "about the axis"),
        (made("unwinder", ("web tension", 5, "N"), ("web thickness", 1, "mm"), ("web width", 100, "mm"),
              ("web density", 900, "kg/m³"), ("core diameter", 50, "mm"), ("start diameter", 40, "mm"), cycle=LIFT),
         ("axis", 11, "start diameter"), "40 mm", "50 mm", "Correct"),
        (made("crank-slider", *CRANK, ("rod mass", -1, "kg")),
         ("axis", 9, "rod mass"), "-1 kg", "a number ≥ 0 kg", "Check the value"),
        (made("crank-slider", *CRANK, ("rod inertia", 1, "kg·m²")),
         ("axis", 9, "rod inertia"), "a rod without mass", "'rod mass' above 0", "State the mass"),
        (made("tabulated slider", ("moving mass", 2, "kg")) | {"map": MAP, "duty_cycle": [
            ["segment", "motion law", "displacement [deg]", "duration [s]"],
            ["out", "cycloidal", 400, 1.0], ["back", "cycloidal", -400, 1.0]]},
         ("duty_cycle", 2, "displacement"), "a way to 400°", "from 0° to 360°", "Shorten the stroke"),
        (made("tabulated slider", ("moving mass", 2, "kg"), ("motion stated at", "load", ""),
              ("start angle", 90, "deg"), cycle=[LIFT[0], ["out", "cycloidal", 30, 1.0],
                                                ["back", "cycloidal", -30, 1.0]]) | {"map": MAP},
         ("duty_cycle", 2, "displacement"), "a way to 30 mm", "from -10.", "state the motion at the shaft"),
        (made("lead screw", ("lead", 8, "mm"), ("screw diameter", 20, "mm"), ("thread friction coefficient", 0.1, ""),
              ("collar friction coefficient", 0.1, ""), ("moving mass", 2, "kg"), cycle=LIFT),
         ("axis", None, "collar mean diameter"), "no value beside", "above zero", "leave the collar friction out"),
        (made("lead screw", ("lead", 100, "mm"), ("screw diameter", 8, "mm"),
              ("thread friction coefficient", 0.3, ""),
              ("moving mass", 2, "kg"), cycle=LIFT),
         ("axis", 8, "thread friction coefficient"), "0.3 with a lead of 100 mm", "below 0.251", "Check lead"),
        (made("lead screw", ("lead", 100, "mm"), ("screw diameter", 8, "mm"),
              ("thread friction coefficient", 0.3, ""),
              ("flank angle", 45, "deg"), ("moving mass", 2, "kg"), cycle=LIFT),
         ("axis", 8, "thread friction coefficient"), "0.3 with a lead of 100 mm", "below 0.178", "Check lead"),
    ],
)  # fmt: skip
def test_geometry_and_motion_that_cannot_be(tmp_path, tables, where, got, allowed, remedy):
    problems = [p for p in problems_of(tmp_path, tables) if p.severity == "error"]
    problem = problems[0]  # the way back may ask for the same
    assert {p.allowed for p in problems} == {problem.allowed}
    assert (problem.table, problem.row, problem.column) == where
    assert got in problem.got
    assert allowed in problem.allowed
    assert remedy in problem.remedy


@pytest.mark.parametrize(
    ("motion", "got", "allowed"),
    [
        (["cycloidal", 50, 1e-6], "an acceleration of 3.14e+11 m/s²", "below 1e5 m/s²"),
        (["jerk-limited", 50, 2.6e-3], "a jerk of", "below 1e9 m/s³"),
    ],
)
def test_absurd_accelerations_and_jerks_are_told(tmp_path, motion, got, allowed):
    tables = small_case()
    heading = ["segment", "motion law", "displacement [mm]", "duration [s]", "jerk share"]
    share = 0.01 if motion[0] == "jerk-limited" else ""
    tables["duty_cycle"] = [heading, ["out", *motion, share], ["back", "cycloidal", -50, 1.0, ""]]
    warning = the_only(problems_of(tmp_path, tables))
    assert (warning.severity, warning.table, warning.row, warning.column) == (
        "warning", "duty_cycle", 2, "displacement",
    )  # fmt: skip
    assert got in warning.got
    assert allowed in warning.allowed
    assert "units" in warning.remedy


def test_self_locking_is_said(tmp_path):
    tables = made("lead screw", ("lead", 4, "mm"), ("screw diameter", 30, "mm"), ("moving mass", 2, "kg"),
                  ("thread friction coefficient", 0.15, ""), cycle=LIFT)  # fmt: skip
    note = the_only(problems_of(tmp_path, tables))
    assert (note.severity, note.row, note.column) == ("note", 9, "thread friction coefficient")
    assert "self-locking" in note.got


def test_everything_wrong_is_told_at_once(tmp_path):
    tables = made(
        "crank-slider", ("crank radius", 40, "mm"), ("rod length", 30, "mm"), ("moving mass", 2, "kg")
    )
    tables["motors"][1][3] = "much"
    tables["inertias"] = [
        ["part", "shape", "referred to", "diameter [mm]"],
        ["disc", "solid cylinder", "motor", 80],
    ]
    found = {(p.table, p.column) for p in problems_of(tmp_path, tables) if p.severity == "error"}
    assert {
        ("axis", "rod length"),
        ("motors", "resistance terminal-to-terminal [Ω]"),
        ("inertias", "length"),
    } == found


def test_dead_centre_is_passed_when_the_shaft_is_led(tmp_path):
    case, problems = check_case(write_folder(tmp_path / "c", made("crank-slider", *CRANK)))
    assert [p for p in problems if p.column != "inclination"] == []
    assert case.motion_at_shaft
    assert case.segments[0].phases[-1].end()[0] == pytest.approx(np.pi)


def test_payload_of_an_arm_is_a_mass(tmp_path):
    tables = made("arm", ("arm mass", 1, "kg"), ("arm mass radius", 100, "mm"), ("load inertia", 0.1, "kg·m²"),
                  ("payload radius", 200, "mm"))  # fmt: skip
    tables["duty_cycle"][0].append("payload [kg]")
    for row in tables["duty_cycle"][1:]:
        row.append(0.5)
    case, problems = check_case(write_folder(tmp_path / "c", tables))
    assert [p for p in problems if p.column != "inclination"] == []
    assert float(case.mechanism.inertia_at_shaft(np.array([case.segments[0].payload]))[0]) == pytest.approx(
        0.12
    )


# -- map ------------------------------------------------------------------------------------------------------


def mapped(rows, *quantities):
    tables = made("tabulated slider", ("moving mass", 2, "kg"), *quantities)
    tables["map"] = rows
    return tables


def test_a_map_is_read_with_its_units(tmp_path):
    case, problems = check_case(write_folder(tmp_path / "c", mapped(MAP, ("map period", 360, "°"))))
    assert [p for p in problems if p.column != "inclination"] == []
    x, u, _ = case.mechanism.load_of_shaft(np.radians([60.0, 420.0, 180.0, 0.0]))
    np.testing.assert_allclose(x, [5e-3, 5e-3, 20e-3, 0.0], atol=1e-15)
    assert abs(u[3]) < 1e-9  # symmetric map: a dead centre where it repeats


@pytest.mark.parametrize(
    ("rows", "quantities", "where", "got", "allowed"),
    [
        (MAP[:4], (), ("map", None, ""), "3 rows", "at least 4 rows"),
        ([*MAP[:3], MAP[2], *MAP[3:]], (), ("map", 4, "shaft angle [deg]"), "60 deg",
         "above the angle of the row before"),
        ([*MAP[:-1], [360, 3]], (("map period", 360, "°"),), ("axis", 7, "map period"), "away from the first",
         "the same position"),
        (MAP[:-1], (("map period", 360, "°"),), ("axis", 7, "map period"), "span 300°", "one period apart"),
        (MAP[:4] + MAP[4:5], (), ("duty_cycle", 2, "displacement"), "180°", "from 0° to 120°"),
        ([MAP[0], *([angle, 7] for angle, _ in MAP[1:])], (), ("map", None, "position [mm]"), "the same position",
         "positions that change"),
    ],
)  # fmt: skip
def test_maps_with_mistakes(tmp_path, rows, quantities, where, got, allowed):
    if where[0] == "duty_cycle":
        rows = [MAP[0], [0, 0], [40, 5], [80, 15], [120, 20]]
    problem = the_only([p for p in problems_of(tmp_path, mapped(rows, *quantities)) if p.severity == "error"])
    assert (problem.table, problem.row, problem.column) == where
    assert got in problem.got
    assert allowed in problem.allowed


def test_a_map_that_is_missing_and_one_that_is_not_wanted(tmp_path):
    tables = made("tabulated slider", ("moving mass", 2, "kg"))
    assert the_only(problems_of(tmp_path, tables)).table == "map"
    tables = small_case() | {"map": MAP}
    note = the_only(problems_of(tmp_path / "b", tables))
    assert (note.table, note.severity) == ("map", "note")


# -- inertias ---------------------------------------------------------------------------------------------------

HEAD = ["part", "shape", "referred to", "inertia [kg·cm²]", "mass [kg]", "diameter [mm]", "inner diameter [mm]",
        "length [mm]", "width [mm]", "height [mm]", "density [kg/m³]", "offset [mm]", "count"]  # fmt: skip


def inventory(*rows):
    return small_case() | {"inertias": [HEAD, *([*row, *[""] * (len(HEAD) - len(row))] for row in rows)]}


def test_every_shape(tmp_path):
    tables = inventory(
        ["shaft", "solid cylinder", "driven shaft", "", "", 25, "", 1000],
        ["hub", "hollow cylinder", "driven shaft", "", "", 80, 50, 60],
        ["cam", "block", "driven shaft", "", 4, "", "", 200, 100, "", "", 150],
        ["bolt", "point mass", "driven shaft", "", 0.5, "", "", "", "", "", "", 40, 3],
        ["belt", "belt", "driven shaft", "", 0.4, 60],
        ["coupling", "coupling", "motor", 0.7],
        ["plate", "block", "load", "", "", "", "", 200, 100, 10, 2700],
    )
    case, problems = check_case(write_folder(tmp_path / "c", tables))
    assert [p for p in problems if p.column != "inclination"] == []
    # Definitions, see tests/reference; the rest is arithmetic.
    expected = [3.01044e-4, 1.60500e-3, 0.106667, 3 * 0.5 * 0.04**2, 0.4 * 0.03**2, 0.7e-4]
    assert [part.inertia_kg_m2 for part in case.parts[:6]] == pytest.approx(expected, rel=1e-5)
    assert all(isinstance(part, Part) for part in case.parts)
    assert case.parts[6].mass_kg == pytest.approx(0.54)
    assert case.mechanism.moving_mass == pytest.approx(18.5 + 0.54)
    assert case.mechanism.driven_shaft_inertia == pytest.approx(sum(expected[:5]), rel=1e-5)
    plain, _ = check_case(write_folder(tmp_path / "plain", small_case()))
    np.testing.assert_allclose(
        case.gearhead_parameters.inertia_kg_m2 - plain.gearhead_parameters.inertia_kg_m2, 0.7e-4
    )
    assert case.fingerprint != plain.fingerprint


def test_shares_add_up_and_reach_the_report(tmp_path):
    from datetime import date

    from actuator_sizing.report.document import prepare_document

    tables = inventory(["disc", "solid cylinder", "driven shaft", "", "", 60, "", 10], ["hub", "coupling",
                                                                                        "motor", 0.2],
                       ["jaw", "block", "load", "", 1.2, "", "", 10, 10])  # fmt: skip
    case, _ = check_case(write_folder(tmp_path / "c", tables))
    comparison = compare(case)
    shares = {share.name: share for share in comparison.inertias}
    assert list(shares) == ["disc", "hub", "jaw", "rest of the axis"]
    assert sum(share.share for share in shares.values()) == pytest.approx(1.0)
    n = comparison.best.ratio
    assert shares["hub"].at_motor_kg_m2 == pytest.approx(0.2e-4)
    assert shares["jaw"].at_motor_kg_m2 == pytest.approx(1.2 * (0.01 / (2 * np.pi)) ** 2 / n**2)
    behind = sum(share.at_shaft_kg_m2 for share in shares.values()) - 0.2e-4 * n**2
    assert behind == pytest.approx(comparison.demand.load_inertia)
    section = next(s for s in prepare_document(comparison, date(2026, 1, 1)).sections if s.key == "inertias")
    assert "disc" in str(section)


@pytest.mark.parametrize(
    ("row", "column", "got"),
    [
        (["disc", "solid cylinder", "motor"], "diameter [mm]", "no value"),
        (["ring", "hollow cylinder", "motor", "", "", 80, 90, 10], "inner diameter [mm]", "90 mm"),
        (["bolt", "point mass", "driven shaft"], "mass [kg]", "no value"),
        (["plate", "block", "driven shaft", "", 1, "", "", 10], "width [mm]", "no value"),
        (["nut", "coupling", "load", 3], "mass [kg]", "no mass"),
        (
            ["nut", "coupling", "motor", 3, "", "", "", "", "", "", "", 10],
            "mass [kg]",
            "an offset without a mass",
        ),
        (["disc", "solid cylinder", "motor", "", -1, 20], "mass [kg]", "-1"),
    ],
)
def test_parts_with_mistakes(tmp_path, row, column, got):
    problem = the_only(problems_of(tmp_path, inventory(row)))
    assert (problem.table, problem.row, problem.column) == ("inertias", 2, column)
    assert got in problem.got


def test_a_linear_motor_has_no_shaft_for_parts(tmp_path):
    start_case(tmp_path / "c", "linear motor")
    (tmp_path / "c" / "inertias.csv").write_text(
        "part,shape,referred to,mass [kg],offset [mm]\na,point mass,motor,1,5\n"
    )
    case, problems = check_case(tmp_path / "c")
    assert case is None
    assert the_only(problems).column == "referred to"
