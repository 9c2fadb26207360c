"""Cases made from plain numbers, without tables, for tests of the sizing chain."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import fields
from typing import Any

import numpy as np

from actuator_sizing.case.judging import default_limits
from actuator_sizing.case.model import MISSING, Case, Catalog, Limit, Segment
from actuator_sizing.case.tables import TABLES
from actuator_sizing.core.mechanisms import MECHANISMS
from actuator_sizing.core.motion_laws import plan_segment, speed_after
from actuator_sizing.core.parameters import DriveParameters, GearheadParameters, MotorParameters, Surroundings

MOTOR = dict(
    is_linear=False, commutation=2, current_basis=1, resistance_ohm=1.2, resistance_reference_degc=25.0,
    resistance_coefficient_per_k=1 / 260.0, inductance_h=4e-3, torque_constant_nm_per_a=0.5,
    magnet_reference_degc=25.0, magnet_coefficient_per_k=-0.0011, pole_pairs=4.0, rotor_inertia_kg_m2=1.2e-4,
    friction_torque_nm=0.02, viscous_friction_nm_s=5e-5, continuous_current_a=5.0, continuous_ambient_degc=40.0,
    peak_current_a=18.0, peak_torque_nm=7.5, speed_max_rad_s=600.0, winding_limit_degc=155.0,
    thermal_resistance_winding_k_w=0.6, thermal_resistance_housing_k_w=1.1, winding_time_constant_s=40.0,
    housing_time_constant_s=1500.0, brake_torque_nm=np.nan, brake_coil_w=0.0, nominal_voltage_v=325.0, mass_kg=2.5,
    price=300.0,
)  # fmt: skip

GEARHEAD = dict(
    is_direct=False, ratio=5.0, efficiency=0.94, efficiency_back=0.936, no_load_torque_nm=0.02,
    inertia_kg_m2=2e-5, continuous_torque_nm=40.0, peak_torque_nm=80.0, emergency_torque_nm=160.0,
    speed_mean_max_rad_s=350.0, speed_max_rad_s=600.0, stiffness_nm_per_rad=1e4, backlash_rad=1e-3, mass_kg=1.5,
    price=250.0,
)  # fmt: skip

DIRECT = dict(
    GEARHEAD, is_direct=True, ratio=1.0, efficiency=1.0, efficiency_back=1.0, no_load_torque_nm=0.0,
    inertia_kg_m2=0.0, mass_kg=0.0, price=0.0, stiffness_nm_per_rad=np.nan, backlash_rad=np.nan,
)  # fmt: skip

DRIVE = dict(
    current_basis=1, serves_brushed=False, serves_six_step=False, serves_sinusoidal=True,
    continuous_current_a=8.0, continuous_ambient_degc=40.0, peak_current_a=20.0, peak_time_s=2.0,
    rms_window_s=np.nan, bus_voltage_min_v=200.0, bus_voltage_max_v=400.0, capacitance_f=5e-4,
    chopper_threshold_v=np.nan, brake_resistor_min_ohm=np.nan, efficiency=0.95, mass_kg=1.0, price=400.0,
)  # fmt: skip

SURROUNDINGS = Surroundings(
    ambient_degc=35.0,
    altitude_m=0.0,
    bus_nominal_v=325.0,
    bus_min_v=290.0,
    bus_max_v=360.0,
    modulation_limit=0.95,
    judged_winding_degc=float("nan"),
    current_loop_rise_s=1e-3,
)


def columns(cls: type, rows: Sequence[dict[str, Any]]) -> Any:
    """Rows of plain numbers as one of the parameter classes."""
    kinds = {"is_linear": bool, "is_direct": bool, "commutation": np.int8, "current_basis": np.int8}
    values = {}
    for f in fields(cls):
        kind = bool if f.name.startswith("serves_") else kinds.get(f.name, float)
        values[f.name] = np.array([row[f.name] for row in rows], dtype=kind)
    return cls(**values)


def catalog(table: str, count: int, names: Sequence[str] | None = None) -> Catalog:
    """A catalog of names only."""
    names = tuple(names or (f"{table[0].upper()}{i}" for i in range(count)))
    columns_of_table = [column.key for column in TABLES[table].columns]
    return Catalog(
        table=table,
        names=names,
        rows=np.arange(2, count + 2),
        values={key: np.full(count, np.nan) for key in columns_of_table},
        origins={key: np.full(count, MISSING, dtype=np.int8) for key in columns_of_table},
        headings={},
        as_entered={},
    )


def segment(row: int, law: str, *, start_s: float = 0.0, start_speed: float = 0.0, **given: Any) -> Segment:
    """One segment; payload, process and brake are taken out of the request."""
    own = {key: given.pop(key, default) for key, default in
           (("payload", 0.0), ("process_effort", 0.0), ("brake_closed", False))}  # fmt: skip
    phases = plan_segment(law, start_speed=start_speed, **given)
    duration = sum(phase.duration_s for phase in phases)
    return Segment(row=row, name=f"segment {row}", law=law, phases=phases, start_s=start_s, duration_s=duration,
                   **own)  # fmt: skip


def cycle(*rows: dict[str, Any]) -> tuple[Segment, ...]:
    """Segments one after the other."""
    made: list[Segment] = []
    start, speed = 0.0, 0.0
    for number, row in enumerate(rows, start=2):
        one = segment(number, start_s=start, start_speed=speed, **row)
        made.append(one)
        start += one.duration_s
        speed = speed_after(one.phases)
    return tuple(made)


def case(
    mechanism: str,
    values: dict[str, float],
    segments: tuple[Segment, ...],
    *,
    motors: Sequence[dict[str, Any]] = (MOTOR,),
    gearheads: Sequence[dict[str, Any]] = (DIRECT, GEARHEAD),
    drives: Sequence[dict[str, Any]] = (DRIVE,),
    surroundings: Surroundings = SURROUNDINGS,
    limits: dict[str, Limit] | None = None,
    options: dict[str, Any] | None = None,
) -> Case:
    """A case of plain numbers; the supply takes everything back unless `options` says otherwise."""
    return Case(
        name="made",
        path=None,
        mechanism=MECHANISMS[mechanism].from_values(values),
        surroundings=surroundings,
        segments=segments,
        motors=catalog("motors", len(motors)),
        gearheads=catalog("gearheads", len(gearheads)),
        drives=catalog("drives", len(drives)),
        motor_parameters=columns(MotorParameters, motors),
        gearhead_parameters=columns(GearheadParameters, gearheads),
        drive_parameters=columns(DriveParameters, drives),
        limits={**default_limits(), **(limits or {})},
        tolerances=(),
        options={
            "rank by": "price",
            "sets to detail": 10.0,
            "recommended inertia ratio": 10.0,
            "largest bus over nominal voltage": 2.0,
            "supply feeds back": "yes",
            **(options or {}),
        },
        entries=(),
        problems=(),
        fingerprint="made",
    )
