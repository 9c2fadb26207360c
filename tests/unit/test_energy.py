"""The energy account of a set: it closes at every boundary, and each part is what it should be."""

from dataclasses import replace

import numpy as np
import pytest

from actuator_sizing.case.reading import read_case
from actuator_sizing.core.mechanisms.base import GRAVITY_M_S2
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.energy import energy_account, energy_quantities
from actuator_sizing.sizing.set_model import SetModel
from actuator_sizing.sizing.shortlist import evaluate_sets
from tests.made_cases import DIRECT, DRIVE, GEARHEAD, MOTOR, SURROUNDINGS, case, cycle
from tests.unit.case_files import small_case, write_folder

SCREW = {"lead": 0.02, "moving mass": 30.0, "inclination": 0.7, "driven shaft inertia": 2e-4, "efficiency": 0.85,
         "guide friction force": 60.0}  # fmt: skip
LIFT = {**SCREW, "inclination": np.pi / 2, "efficiency": 1.0, "guide friction force": 0.0}
WORKS = cycle({"law": "cycloidal", "displacement": 0.4, "duration_s": 0.8, "payload": 20.0, "process_effort": 150.0},
              {"law": "dwell", "duration_s": 0.3, "payload": 20.0},
              {"law": "trapezoid", "displacement": -0.4, "duration_s": 0.6},
              {"law": "dwell", "duration_s": 0.5, "brake_closed": True})  # fmt: skip
RECTIFIER = {"supply feeds back": "no"}
RESISTOR = {**RECTIFIER, "brake resistor": 60.0, "chopper threshold": 380.0, "chopper hysteresis": 6.0,
            "other power on the bus": 12.0}  # fmt: skip
CLOSES = 1e-9  # of the energy that passes: integrals of some hundred nodes, with kinks cut to rounding


def study(values=SCREW, segments=WORKS, gearhead=GEARHEAD, drive=DRIVE, motor=MOTOR, **options):
    made = case("ball screw", values, segments, motors=(motor,), gearheads=(gearhead,), drives=(drive,),
                options=options, surroundings=replace(SURROUNDINGS, cable_ohm=0.3))  # fmt: skip
    demand = build_demand(made)
    sets = evaluate_sets(made, demand, np.zeros((1, 3), dtype=np.intp))
    return SetModel(made, demand, 0, 0, 0), sets


@pytest.mark.parametrize("gearhead", [GEARHEAD, DIRECT])
@pytest.mark.parametrize("options", [RECTIFIER, RESISTOR, {"supply feeds back": "yes"}])
@pytest.mark.parametrize("values", [SCREW, LIFT])
def test_the_account_closes_at_every_boundary(values, options, gearhead):
    # A bus that only stores must not store for ever: without resistor the capacitors are large enough.
    drive = DRIVE if "brake resistor" in options else dict(DRIVE, capacitance_f=5e-2)
    model, sets = study(values, gearhead=gearhead, drive=drive, **options)
    account, p = energy_account(model, sets, 0), sets.pairs
    passes = float(p.energy_terminals_motoring_j[0] + p.energy_terminals_regenerated_j[0])

    def net(boundary):
        motoring, returned = (
            getattr(p, f"energy_{boundary}_{which}_j")[0] for which in ("motoring", "regenerated")
        )
        return float(motoring - returned)

    at_load = account.work_j + account.mechanism_j
    at_shaft = at_load + account.gearhead_j
    at_gap = at_shaft + account.motor_friction_j
    at_terminals = at_gap + account.winding_j + account.cable_j
    at_bus = at_terminals + account.drive_j + account.steady_j
    assert at_shaft == pytest.approx(net("shaft"), abs=CLOSES * passes)
    assert at_gap == pytest.approx(net("airgap"), abs=CLOSES * passes)
    assert at_terminals == pytest.approx(net("terminals"), abs=CLOSES * passes)
    eta = 0.95
    bus = float(p.energy_terminals_motoring_j[0]) / eta - float(p.energy_terminals_regenerated_j[0]) * eta
    assert at_bus == pytest.approx(bus + account.steady_j, abs=CLOSES * passes)
    assert account.supply_j == pytest.approx(at_bus + account.resistor_j, abs=CLOSES * passes)
    assert sum(account.losses().values()) + account.work_j == pytest.approx(
        account.supply_j, abs=CLOSES * passes
    )
    assert min(account.losses().values()) >= -CLOSES * passes


def test_work_is_what_the_payload_gains_and_the_process_takes():
    account = energy_account(*study(), 0)
    # 20 kg stay 0.4 m higher along the slope, against 150 N over 0.4 m; the axis itself comes back.
    lifted = 20.0 * GRAVITY_M_S2 * np.sin(0.7) * 0.4
    assert account.work_j == pytest.approx(lifted + 150.0 * 0.4, rel=1e-9)


def test_friction_of_the_guide_and_of_the_motor():
    # Both are closed forms: 60 N over 0.8 m of way, and Coulomb friction over the turns of the motor.
    level = {"lead": 0.02, "moving mass": 30.0, "guide friction force": 60.0}
    there = cycle({"law": "cycloidal", "displacement": 0.4, "duration_s": 0.8}, {"law": "dwell", "duration_s": 0.2},
                  {"law": "cycloidal", "displacement": -0.4, "duration_s": 0.8})  # fmt: skip
    motor = dict(MOTOR, viscous_friction_nm_s=0.0)
    account = energy_account(*study(level, there, DIRECT, motor=motor, **RECTIFIER), 0)
    assert account.mechanism_j == pytest.approx(60.0 * 0.8, rel=1e-9)
    assert account.motor_friction_j == pytest.approx(0.02 * 0.8 * 2.0 * np.pi / 0.02, rel=1e-9)
    assert account.work_j == pytest.approx(0.0, abs=1e-9)
    assert account.gearhead_j == pytest.approx(0.0, abs=1e-12)


def test_hour_year_and_price():
    year = {"operating time per year": 4000.0 * 3600.0, "price of energy per kWh": 0.30}
    model, sets = study(**RESISTOR, **year)
    q = energy_quantities(model, sets, 0)
    per_cycle, span = q["energy_supply_per_cycle_j"], model.demand.cycle_s
    assert q["energy_supply_per_hour_j"] == pytest.approx(per_cycle * 3600.0 / span, rel=1e-12)
    assert q["energy_supply_per_year_j"] == pytest.approx(4000.0 * q["energy_supply_per_hour_j"], rel=1e-12)
    assert q["energy_cost_per_year"] == pytest.approx(q["energy_supply_per_year_j"] / 3.6e6 * 0.30, rel=1e-12)
    unknown = energy_quantities(*study(**RESISTOR), 0)
    assert unknown["energy_supply_per_year_j"] is None
    assert unknown["energy_cost_per_year"] is None


def test_without_the_efficiency_of_the_drive_its_loss_is_not_known():
    q = energy_quantities(*study(drive=dict(DRIVE, efficiency=np.nan), **RESISTOR), 0)
    assert q["energy_drive_per_cycle_j"] is None
    assert q["energy_supply_per_cycle_j"] is None
    assert q["energy_winding_per_cycle_j"] > 0.0


def test_energy_of_a_case_reaches_its_results(tmp_path):
    tables = small_case()
    tables["axis"] += [
        ["operating time per year", 6000, "h", ""],
        ["price of energy per kWh", 0.28, "EUR", ""],
    ]
    best = compare(read_case(write_folder(tmp_path / "case", tables))).best
    assert best.quantities["energy_work_per_cycle_j"] is not None


def test_work_that_comes_back_whole_is_none_at_all():
    level = {**SCREW, "inclination": 0.0}
    back_and_forth = cycle({"law": "trapezoid", "displacement": 0.3, "duration_s": 0.6, "payload": 12.0},
                           {"law": "dwell", "duration_s": 0.4, "payload": 12.0},
                           {"law": "trapezoid", "displacement": -0.3, "duration_s": 0.6, "payload": 12.0},
                           {"law": "dwell", "duration_s": 0.4, "payload": 12.0})  # fmt: skip
    account = energy_account(*study(level, back_and_forth), 0)
    assert account.work_j == 0.0
    assert account.mechanism_j > 1.0
