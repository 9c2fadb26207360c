"""The demo catalogues are what the laws say, and the demo cases use them."""

import csv
import math
import sys
from collections import defaultdict
from pathlib import Path

import numpy as np
import pytest

from actuator_sizing.case.reading import check_case
from actuator_sizing.sizing import compare

DEMO = Path(__file__).parents[2] / "catalogs_demo"
CASES = ("tray_lift", "potting_table", "tray_shuttle", "roof_vent_arm", "peat_press", "shade_winch", "fan",
         "tray_conveyor", "irrigation_pump")  # fmt: skip
PRINTED = 5e-4  # four significant digits: half a unit in the last place of 1.000 is 5e-4 of it


@pytest.fixture(scope="module")
def makers():
    sys.path.insert(0, str(DEMO))
    try:
        import make_catalogs
        import scaling
    finally:
        sys.path.remove(str(DEMO))
    return make_catalogs, scaling


def _rows(name):
    with (DEMO / "catalog" / name).open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


@pytest.fixture(scope="module")
def case():
    understood, problems = check_case(DEMO / "tray_lift")
    assert understood is not None, problems
    return understood


def test_committed_catalogs_are_what_the_laws_give(makers):
    for name, text in makers[0].catalogs().items():
        assert (DEMO / "catalog" / name).read_bytes() == text.encode("utf-8"), name


def test_there_are_enough_parts_with_names_of_their_own():
    counts = {}
    for name, column in (("motors.csv", "motor"), ("gearheads.csv", "gearhead"), ("drives.csv", "drive")):
        names = [row[column] for row in _rows(name)]
        assert len(set(names)) == len(names)
        counts[column] = len(names)
    assert counts["motor"] >= 60
    assert counts["gearhead"] >= 40
    assert counts["drive"] >= 24
    assert counts["motor"] * (counts["gearhead"] + 1) * counts["drive"] >= 50_000


def test_every_cell_is_a_number_or_text_on_purpose():
    for name in ("motors.csv", "gearheads.csv", "drives.csv"):
        for row in _rows(name):
            for heading, cell in row.items():
                assert cell.casefold() not in ("nan", "inf", "-inf", "none"), (name, heading)
                if "[" in heading and cell:
                    assert float(cell) > 0.0, (name, heading)


def test_some_optional_cells_are_empty():
    motors, gearheads, drives = _rows("motors.csv"), _rows("gearheads.csv"), _rows("drives.csv")
    assert 0 < sum(not row["thermal resistance winding-housing [K/W]"] for row in motors) < len(motors) / 3
    assert 0 < sum(not row["winding time constant [s]"] for row in motors) < len(motors) / 3
    assert 0 < sum(not row["peak torque [Nm]"] for row in gearheads) < len(gearheads) / 3
    assert 0 < sum(not row["peak time [s]"] for row in drives) < len(drives) / 3


def _families(case):
    """Indices of the motors that share a frame: everything before the last dash of the name."""
    families = defaultdict(list)
    for index, name in enumerate(case.motors.names):
        if not case.motor_parameters.is_linear[index]:
            families[name.rpartition("-")[0]].append(index)
    return families


def test_windings_of_a_frame_share_what_the_turns_do_not_change(case):
    """As read back from the tables, so the conversions of units and current bases are in the loop."""
    m = case.motor_parameters
    families = _families(case)
    assert sum(len(members) > 1 for members in families.values()) >= 15
    for name, members in families.items():
        first = members[0]
        for other in members[1:]:
            K, R = m.torque_constant_nm_per_a, m.resistance_ohm
            # K² twice and R once, each printed to four digits
            assert K[other] ** 2 / R[other] == pytest.approx(K[first] ** 2 / R[first], rel=6 * PRINTED), name
            tau = m.inductance_h / R
            assert tau[other] == pytest.approx(tau[first], rel=4 * PRINTED), name
            assert m.mass_kg[other] == m.mass_kg[first], name


def test_rotor_inertia_is_one_per_frame(case):
    for members in _families(case).values():
        inertia = {case.motors.as_entered["rotor_inertia"][index] for index in members}
        assert len(inertia) == 1


def test_continuous_current_just_reaches_the_winding_limit(case):
    m = case.motor_parameters
    rise = m.winding_limit_degc - m.continuous_ambient_degc
    hot = m.resistance_ohm * (235.0 + m.winding_limit_degc) / (235.0 + m.resistance_reference_degc)
    reached = (
        hot
        * m.continuous_current_a**2
        * (m.thermal_resistance_winding_k_w + m.thermal_resistance_housing_k_w)
    )
    known = np.isfinite(reached)  # elsewhere the sheet leaves the resistances out
    assert known.sum() > 50
    for index in known.nonzero()[0]:
        # current twice, resistance and thermal resistance once, four digits each
        assert reached[index] == pytest.approx(rise[index], rel=8 * PRINTED), case.motors.names[index]


def test_no_load_point_agrees_with_the_constants():
    """U = R I0 + K ω0 holds as printed, for the brushed motors that state it instead of friction."""
    rows = [row for row in _rows("motors.csv") if row["no-load speed [min⁻¹]"]]
    assert rows
    for row in rows:
        K, R = (
            float(row["torque constant [mNm/A]"]) / 1e3,
            float(row["resistance terminal-to-terminal [mΩ]"]) / 1e3,
        )
        speed, current = float(row["no-load speed [min⁻¹]"]) * math.pi / 30, float(row["no-load current [A]"])
        assert R * current + K * speed == pytest.approx(float(row["nominal voltage [V]"]), rel=4 * PRINTED)


@pytest.mark.parametrize(
    ("quantity", "exponent"),
    [
        ("torque", 3.0),
        ("inertia", 5.0),
        ("drag", 3.0),
        ("stiffness_nm_arcmin", 3.0),
        ("mass", 3.0),
        ("price", 1.5),
    ],
)
def test_gearheads_scale_with_the_power_of_their_diameter(makers, quantity, exponent):
    gear = makers[1].Gear
    small, large = (getattr(gear(diameter, "25", 2), quantity) for diameter in (0.050, 0.100))
    assert large / small == pytest.approx(2.0**exponent, rel=1e-12)


def test_motor_laws_at_twice_the_size(makers):
    scaling = makers[1]
    small = scaling.Frame(scaling.SINUSOIDAL, 0.060, 0.045)
    large = scaling.Frame(scaling.SINUSOIDAL, 0.120, 0.090)
    expected = {
        "motor_constant": 2.5,
        "inertia": 5.0,
        "mass": 3.0,
        "winding_to_housing": -2.0,
        "housing_to_air": -2.0,
        "friction_torque": 4.0,
        "winding_time_s": 1.0,
        "housing_time_s": 1.0,
    }
    for quantity, exponent in expected.items():
        ratio = getattr(large, quantity) / getattr(small, quantity)
        assert math.log2(ratio) == pytest.approx(exponent, abs=1e-9), quantity


@pytest.fixture(scope="module")
def comparisons():
    found = {}
    for name in CASES:
        understood, problems = check_case(DEMO / name)
        assert understood is not None, problems
        found[name] = compare(understood)
    return found


@pytest.mark.parametrize("name", CASES)
def test_a_middle_sized_motor_wins(name, comparisons):
    comparison = comparisons[name]
    assert comparison.rejections.sets_total >= 50_000
    assert comparison.rejections.rejected > comparison.rejections.confirmed_passing > 0
    best = comparison.sets[0]
    assert best.verdict.startswith("passes")
    motors = comparison.case.motor_parameters
    rotary = motors.mass_kg[~motors.is_linear]
    assert rotary.min() < motors.mass_kg[best.motor_index] < rotary.max()


def test_losers_of_every_kind_occur(comparisons):
    # A drive overloaded for ever loses by its continuous current; no demo axis has the long peaks for which the
    # peak time alone governs.
    lost = {
        check for each in comparisons.values() for check, sets in each.rejections.by_check.items() if sets
    }
    assert lost >= {
        "speed_torque", "rms_current", "winding_temperature", "motor_speed", "motor_peak_current",
        "drive_continuous_current", "drive_peak_current", "drive_bus_voltage",
        "gearhead_equivalent_torque", "gearhead_peak_torque", "gearhead_mean_speed", "gearhead_maximum_speed",
    }  # fmt: skip


def test_workbook_is_the_same_case_as_the_folder():
    folder, _ = check_case(DEMO / "potting_table")
    workbook, _ = check_case(DEMO / "potting_table.xlsx")
    assert workbook.fingerprint == folder.fingerprint
