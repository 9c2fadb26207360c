"""Curves and quantities of one set, for figures, tables and results."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.capability import voltage_limited_current
from actuator_sizing.core.machine import (
    JudgedMotor,
    amplitude_per_unit_current,
    judge,
    model_voltage,
    torque_of_current,
)
from actuator_sizing.core.parameters import CURRENT_BASES, GearheadParameters, MotorParameters
from actuator_sizing.core.step_response import StepResponse, voltage_step
from actuator_sizing.core.thermal import HeatLoss, ThermalNetwork
from actuator_sizing.core.warm_up import temperature_course, temperatures_after, warm_up
from actuator_sizing.sizing.bus import bus_quantities
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.checks.motor import current_limited_torque, rerated_continuous_current
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.evaluation import PairCourse, course, heat_loss
from actuator_sizing.sizing.results import SetDetail
from actuator_sizing.sizing.thermal_data import thermal_network

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]

_SPEEDS = 241  # points of the speed–torque plane
_STEP_POINTS = 400
COMMISSIONING_TIMES_S = (600.0, 1800.0, 3600.0)


class SetModel:
    """One set with its course over the cycle; what the curves are drawn from."""

    def __init__(self, case: Case, demand: Demand, motor: int, gearhead: int, drive: int):
        """Take the three parts by their index in the catalogs."""
        self.case, self.demand = case, demand
        self.motor: MotorParameters = case.motor_parameters.take(slice(motor, motor + 1))
        self.gearhead: GearheadParameters = case.gearhead_parameters.take(slice(gearhead, gearhead + 1))
        self.drive = case.drive_parameters.take(slice(drive, drive + 1))
        self.judged: JudgedMotor = judge(self.motor, case.surroundings)
        self.course: PairCourse = course(demand, self.motor, self.gearhead, self.judged)

    @property
    def network(self) -> ThermalNetwork:
        """Thermal network of the motor."""
        return thermal_network(self.motor, self.case.surroundings)

    @property
    def loss(self) -> HeatLoss:
        """Heat losses over the cycle."""
        return heat_loss(self.demand, self.motor, self.judged, self.course)

    @property
    def total_inertia(self) -> float:
        """Rotor, gearhead and reflected load at the motor shaft. [kg·m²]"""
        reflected = self.demand.load_inertia / self.gearhead.ratio[0] ** 2
        return float(self.motor.rotor_inertia_kg_m2[0] + self.gearhead.inertia_kg_m2[0] + reflected)

    def step(self) -> StepResponse:
        """Voltage step of motor plus load at nominal bus, friction and gravity left out."""
        voltage = model_voltage(
            self.case.surroundings.bus_nominal_v,
            self.case.surroundings.modulation_limit,
            self.motor.current_basis,
        )
        return voltage_step(
            resistance_ohm=float(self.judged.resistance_ohm[0]),
            inductance_h=float(self.judged.inductance_h[0]),
            torque_constant=float(self.judged.torque_constant_nm_per_a[0]),
            inertia=self.total_inertia,
            viscous=float(self.motor.viscous_friction_nm_s[0]),
            voltage=float(voltage[0]),
        )


def set_detail(model: SetModel, sets: Sets, index: int) -> SetDetail:
    """Curves of one set.

    Parameters
    ----------
    model : SetModel
        The set. [-]
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which of them the model is. [-]

    Returns
    -------
    SetDetail
        Data frames whose column names end in their SI unit. [-]
    """
    import pandas as pd

    surroundings = model.case.surroundings
    limit = float(model.motor.winding_limit_degc[0])
    periodic = temperature_course(model.network, model.loss, surroundings.ambient_degc)
    warming = warm_up(model.network, model.loss, surroundings.ambient_degc, limit)
    step = model.step().series(_STEP_POINTS)
    return SetDetail(
        cycle=_cycle_frame(model),
        periodic_temperature=None
        if periodic is None
        else pd.DataFrame(
            {
                "time_s": periodic.time_s,
                "winding_degc": periodic.winding_degc,
                "housing_degc": periodic.housing_degc,
            }
        ),
        warm_up=None
        if warming is None
        else pd.DataFrame(
            {
                "time_s": warming.time_s,
                "winding_degc": warming.winding_degc,
                "housing_degc": warming.housing_degc,
                "winding_low_degc": warming.winding_low_degc,
                "winding_high_degc": warming.winding_high_degc,
            }
        ),
        envelope=_envelope(model),
        step_response=pd.DataFrame(dict(zip(("time_s", "current_a", "speed_rad_s"), step, strict=True))),
        levels=_levels(model, sets, index),
    )


def _cycle_frame(model: SetModel) -> pd.DataFrame:
    import pandas as pd

    d, c = model.demand, model.course
    n = float(model.gearhead.ratio[0])
    nodes = d.speed.shape[1]
    held = np.where(d.brake_closed & (d.direction == 0.0), 0.0, 1.0)[:, None]
    alpha = n * d.motor_acceleration
    inertia_rotor = (model.motor.rotor_inertia_kg_m2[0] + model.gearhead.inertia_kg_m2[0]) * alpha
    parts = {cause: held * torque / n for cause, torque in d.torque_by_cause.items()}
    parts["losses"] = (
        c.torque_nm[0]
        - inertia_rotor
        - sum(parts[cause] for cause in ("inertia", "gravity", "friction", "process"))
    )
    flat = {
        "time_s": d.time_s,
        "segment": np.repeat(d.segment, nodes),
        "position": d.position,
        "speed": d.speed,
        "acceleration": d.acceleration,
        "effort": d.effort,
        "shaft_torque_nm": d.shaft_torque,
        "motor_speed_rad_s": c.motor_speed_rad_s[0],
        "motor_torque_nm": c.torque_nm[0],
        "motor_shaft_torque_nm": c.shaft_torque_nm[0],
        "current_a": c.current_a[0],
        "voltage_v": c.voltage_v[0],
        "inertia_load_nm": parts["inertia"],
        "inertia_rotor_nm": inertia_rotor,
        "gravity_nm": parts["gravity"],
        "friction_nm": parts["friction"],
        "process_nm": parts["process"],
        "losses_nm": parts["losses"],
    }
    return pd.DataFrame({name: np.ravel(values) for name, values in flat.items()})


def _envelope(model: SetModel) -> pd.DataFrame:
    import pandas as pd

    s = model.case.surroundings
    motor, judged = model.motor, model.judged
    K, sat = judged.torque_constant_nm_per_a, judged.saturation_per_a2
    volts = {
        name: model_voltage(bus, s.modulation_limit, motor.current_basis)
        for name, bus in (("min", s.bus_min_v), ("nominal", s.bus_nominal_v), ("max", s.bus_max_v))
    }
    top = float(motor.speed_max_rad_s[0])
    no_load = float(volts["max"][0] / K[0])
    used = float(np.abs(model.course.motor_speed_rad_s).max())
    reach = max(1.05 * used, min(top, 1.02 * no_load) if np.isfinite(top) else 1.02 * no_load)
    speed = np.linspace(0.0, reach, _SPEEDS)
    to_motor = amplitude_per_unit_current(model.drive.current_basis) / amplitude_per_unit_current(
        motor.current_basis
    )
    peak = np.fmin(motor.peak_current_a, model.drive.peak_current_a * to_motor)
    frame = {"speed_rad_s": speed}

    def torque(current: FloatArray, voltage: FloatArray) -> FloatArray:
        by_voltage, _ = voltage_limited_current(
            voltage, speed, judged.resistance_ohm, K, judged.reactance_per_speed
        )
        allowed = np.fmin(current, np.where(by_voltage >= 0.0, by_voltage, np.nan))
        allowed = np.where(np.isnan(by_voltage) | (by_voltage < 0.0), np.nan, allowed)
        curve = np.fmin(torque_of_current(allowed, K, sat), motor.peak_torque_nm)
        return np.where(np.isnan(allowed) | (speed > top), np.nan, curve)

    for name, voltage in volts.items():
        frame[f"torque_peak_{name}_bus_nm"] = torque(peak, voltage)
    continuous = rerated_continuous_current(motor, s, speed)
    frame["torque_continuous_nm"] = np.where(np.isnan(continuous), np.nan, torque(continuous, volts["min"]))
    return pd.DataFrame(frame)


def _levels(model: SetModel, sets: Sets, index: int) -> dict[str, float]:
    motor, drive, s = model.motor, model.drive, model.case.surroundings
    to_motor = float(
        (amplitude_per_unit_current(drive.current_basis) / amplitude_per_unit_current(motor.current_basis))[0]
    )
    return {
        "motor_peak_current_a": float(motor.peak_current_a[0]),
        "motor_continuous_current_a": float(
            rerated_continuous_current(motor, s, sets.pairs.speed_rms_rad_s[index : index + 1])[0]
        ),
        "drive_peak_current_a": float(drive.peak_current_a[0]) * to_motor,
        "drive_continuous_current_a": float(drive.continuous_current_a[0]) * to_motor,
        "current_rms_a": float(sets.pairs.current_rms_a[index]),
        "torque_rms_nm": float(sets.pairs.torque_rms_nm[index]),
        "speed_rms_rad_s": float(sets.pairs.speed_rms_rad_s[index]),
        "current_limited_torque_nm": float(current_limited_torque(sets)[index]),
        "speed_max_rad_s": float(motor.speed_max_rad_s[0]),
        "winding_limit_degc": float(motor.winding_limit_degc[0]),
        "ambient_degc": s.ambient_degc,
        "voltage_available_v": float(model.judged.voltage_available_v[0]),
        "bus_min_v": s.bus_min_v,
        "bus_nominal_v": s.bus_nominal_v,
        "bus_max_v": s.bus_max_v,
    }


def quantities(model: SetModel, sets: Sets, index: int) -> dict[str, Any]:
    """Quantities of one set for results.json: SI, flat, None where not known.

    Parameters
    ----------
    model : SetModel
        The set. [-]
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which of them the model is. [-]

    Returns
    -------
    dict
        Names carry their unit; currents are in the basis given by ``current_basis``. [-]
    """
    p = sets.pairs
    answer: dict[str, Any] = {name: _known(getattr(p, name)[index]) for name in _FROM_PAIRS}
    answer["current_basis"] = CURRENT_BASES[int(model.motor.current_basis[0])]
    answer["speed_torque_margin"] = _margin(sets, index)
    answer.update(_bus_energies(model, answer))
    answer.update(_warm_up_quantities(model, answer["winding_max_degc"]))
    answer["drive_current_peak_a"] = _known(sets.drive_current_peak_a[index])
    answer["drive_current_rms_a"] = _known(sets.drive_current_rms_a[index])
    answer["drive_current_basis"] = CURRENT_BASES[int(model.drive.current_basis[0])]
    answer.update(bus_quantities(sets, index))
    answer.update(_step_quantities(model))
    return answer


_FROM_PAIRS = (
    "torque_peak_nm", "torque_min_nm", "torque_rms_nm", "shaft_torque_peak_nm",
    "current_peak_a", "current_rms_a",
    "speed_peak_rad_s", "speed_rms_rad_s", "speed_mean_abs_rad_s",
    "voltage_peak_v", "voltage_peak_without_inductance_v", "voltage_peak_at_steps_v", "voltage_available_v",
    "copper_loss_mean_w", "friction_loss_mean_w",
    "energy_airgap_motoring_j", "energy_airgap_regenerated_j",
    "energy_shaft_motoring_j", "energy_shaft_regenerated_j",
    "energy_terminals_motoring_j", "energy_terminals_regenerated_j", "power_terminals_peak_w",
    "winding_max_degc", "winding_min_degc", "winding_mean_degc", "housing_max_degc", "housing_mean_degc",
    "inertia_ratio", "resistance_ohm", "torque_constant_nm_per_a", "judged_winding_degc", "magnet_degc",
)  # fmt: skip


def _known(value: Any) -> float | None:
    number = float(value)
    return number if np.isfinite(number) else None


def _margin(sets: Sets, index: int) -> float | None:
    """Smallest of available over required torque less one, over the whole cycle."""
    current = sets.pairs.torque_peak_nm[index] / current_limited_torque(sets)[index]
    utilisation = max(float(sets.pairs.plane_utilisation[index]), float(np.nan_to_num(current, nan=0.0)))
    if np.isnan(current) or utilisation == 0.0:
        return None
    return 1.0 / utilisation - 1.0


def _bus_energies(model: SetModel, known: dict[str, Any]) -> dict[str, Any]:
    """Energies at the DC bus from the drive's efficiency, in the direction power flows."""
    efficiency = float(model.drive.efficiency[0])
    if not np.isfinite(efficiency):
        return {"energy_bus_motoring_j": None, "energy_bus_regenerated_j": None}
    return {
        "energy_bus_motoring_j": known["energy_terminals_motoring_j"] / efficiency,
        "energy_bus_regenerated_j": known["energy_terminals_regenerated_j"] * efficiency,
    }


def _warm_up_quantities(model: SetModel, winding_max_degc: float | None) -> dict[str, Any]:
    """When the winding passes its limit from cold; None where it never does or where data is missing."""
    limit = float(model.motor.winding_limit_degc[0])
    if winding_max_degc is not None and not winding_max_degc > limit:
        return {"time_to_limit_s": None}
    warming = warm_up(model.network, model.loss, model.case.surroundings.ambient_degc, limit)
    return {"time_to_limit_s": None if warming is None else _known(warming.time_to_limit_s)}


def commissioning_quantities(model: SetModel) -> dict[str, Any]:
    """Winding and housing temperature after given times from cold, to compare on the machine."""
    ambient = model.case.surroundings.ambient_degc
    after = temperatures_after(model.network, model.loss, ambient, COMMISSIONING_TIMES_S)
    answer: dict[str, Any] = {}
    for position, time in enumerate(COMMISSIONING_TIMES_S):
        minutes = f"{time / 60.0:.0f}_min"
        for body in ("winding", "housing"):
            value = None if after is None else _known(getattr(after, f"{body}_degc")[position])
            answer[f"{body}_after_{minutes}_degc"] = value
    return answer


def _step_quantities(model: SetModel) -> dict[str, Any]:
    step = model.step()
    answer: dict[str, Any] = {
        "step_voltage_v": step.voltage_v,
        "step_inertia_kg_m2": model.total_inertia,
        "step_electrical_time_constant_s": step.electrical_time_constant_s,
        "step_mechanical_time_constant_s": step.mechanical_time_constant_s,
        "step_final_speed_rad_s": step.final_speed_rad_s,
        "step_rise_time_s": step.rise_time_s,
        "step_peak_time_s": step.peak_time_s,
        "step_overshoot_ratio": step.overshoot_ratio,
        "step_settling_time_s": step.settling_time_s,
        "step_peak_current_a": step.peak_current_a,
        "step_peak_current_time_s": step.peak_current_time_s,
    }
    for number, pole in enumerate(step.poles_per_s, start=1):
        answer[f"step_pole_{number}_real_per_s"] = pole.real
        answer[f"step_pole_{number}_imag_per_s"] = pole.imag
    return {name: _known(value) for name, value in answer.items()}
