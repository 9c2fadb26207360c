"""Single numbers of one set: SI, named with their unit, None where not known."""

from __future__ import annotations

from typing import Any

import numpy as np

from actuator_sizing.core.duty_types import usual_times
from actuator_sizing.core.overload_heat import insulation_life_factor
from actuator_sizing.core.parameters import CURRENT_BASES
from actuator_sizing.core.permissible_load import LoadedMachine, intermittent_current, short_time_current
from actuator_sizing.core.warm_up import temperatures_after, warm_up
from actuator_sizing.sizing.bus_quantities import bus_quantities
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.checks.drive_limits import pwm_ripple
from actuator_sizing.sizing.checks.motor import current_limited_torque
from actuator_sizing.sizing.energy import energy_quantities
from actuator_sizing.sizing.set_model import SetModel
from actuator_sizing.sizing.stops import stop_quantities

#: Usual short times and cyclic duration factors; practice around IEC 60034-1 (from memory).
SHORT_TIMES_MIN = (10, 30, 60)
DUTY_FACTORS_PERCENT = (15, 25, 40, 60)
COMMISSIONING_TIMES_S = (600.0, 1800.0, 3600.0)

_FROM_PAIRS = (
    "torque_peak_nm", "torque_min_nm", "torque_rms_nm", "shaft_torque_peak_nm",
    "current_peak_a", "current_rms_a",
    "speed_peak_rad_s", "speed_rms_rad_s", "speed_mean_abs_rad_s",
    "voltage_peak_v", "voltage_peak_without_inductance_v", "voltage_peak_at_steps_v", "voltage_available_v",
    "copper_loss_mean_w", "cable_loss_mean_w", "friction_loss_mean_w",
    "energy_airgap_motoring_j", "energy_airgap_regenerated_j",
    "energy_shaft_motoring_j", "energy_shaft_regenerated_j",
    "energy_terminals_motoring_j", "energy_terminals_regenerated_j", "power_terminals_peak_w",
    "winding_max_degc", "winding_min_degc", "winding_mean_degc", "housing_max_degc", "housing_mean_degc",
    "inertia_ratio", "resistance_ohm", "cable_ohm", "torque_constant_nm_per_a", "judged_winding_degc", "magnet_degc",
)  # fmt: skip


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
    answer = pair_quantities(sets, index)
    answer["current_basis"] = CURRENT_BASES[int(model.motor.current_basis[0])]
    answer["speed_torque_margin"] = _margin(sets, index)
    answer.update(_bus_energies(model, answer))
    answer.update(_warm_up_quantities(model, answer["winding_max_degc"]))
    answer["drive_current_peak_a"] = _known(sets.drive_current_peak_a[index])
    answer["drive_current_rms_a"] = _known(sets.drive_current_rms_a[index])
    answer["drive_current_basis"] = CURRENT_BASES[int(model.drive.current_basis[0])]
    ripple, loss = pwm_ripple(sets)
    answer["pwm_ripple_current_a"], answer["pwm_ripple_loss_w"] = _known(ripple[index]), _known(loss[index])
    answer.update(bus_quantities(sets, index))
    answer.update(energy_quantities(model, sets, index))
    answer.update(stop_quantities(sets, index))
    answer.update(_step_quantities(model))
    answer["insulation_life_factor_ratio"] = _insulation_life(model, answer["winding_max_degc"])
    return answer


def _insulation_life(model: SetModel, winding_max_degc: float | None) -> float | None:
    """Life of the insulation over its life at the winding limit, by the rule of thumb; None where not known."""
    if winding_max_degc is None:
        return None
    return _known(insulation_life_factor(winding_max_degc, float(model.motor.winding_limit_degc[0])))


def pair_quantities(sets: Sets, index: int) -> dict[str, Any]:
    """Those quantities of one set that its evaluation has found: of motor and gearhead, without the drive."""
    return {name: _known(getattr(sets.pairs, name)[index]) for name in _FROM_PAIRS}


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
    return answer | _permissible_currents(model)


def _permissible_currents(model: SetModel) -> dict[str, Any]:
    """Current for a short time from cold, and again and again with rests, at the mean speed loss of the cycle."""
    motor, loss = model.motor, model.loss
    machine = LoadedMachine(
        network=model.network,
        resistance_ohm=float(motor.resistance_ohm[0]),
        resistance_coefficient_per_k=float(motor.resistance_coefficient_per_k[0]),
        resistance_reference_degc=float(motor.resistance_reference_degc[0]),
        speed_loss_w=float(loss.speed_loss_w[0] @ loss.duration_s / loss.duration_s.sum()),
        ambient_degc=model.case.surroundings.ambient_degc,
        limit_degc=float(motor.winding_limit_degc[0]),
    )
    answer: dict[str, Any] = {}
    for minutes in SHORT_TIMES_MIN:
        key = f"permissible_short_time_{minutes}_min_current_a"
        answer[key] = _known(short_time_current(machine, 60.0 * minutes))
    for percent in DUTY_FACTORS_PERCENT:
        key = f"permissible_intermittent_{percent}_percent_current_a"
        answer[key] = _known(intermittent_current(machine, *usual_times(percent / 100.0)))
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
