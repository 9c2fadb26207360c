"""Where the energy of a cycle goes: from the supply through drive, cable, motor and gearhead to the load."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from actuator_sizing.core.quadrature import integrate
from actuator_sizing.sizing.bus import own_results
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.set_model import SetModel

HOUR_S = 3600.0
_NOISE = 1e-9  # of the energy that goes back and forth
#: Parts of the torque at the driven shaft that do work on the load, against those that only heat.
_WORK, _HEAT = ("process", "gravity", "inertia"), ("friction", "losses")


@dataclass(frozen=True)
class EnergyAccount:
    """Energy of one cycle of one set by where it goes; the parts add up to what the supply gives. NaN: not known.

    What a supply takes back is already subtracted from what it gives.
    """

    supply_j: float
    steady_j: float  # stand-by of the drive and other loads
    resistor_j: float
    drive_j: float
    cable_j: float
    winding_j: float
    motor_friction_j: float  # and iron
    gearhead_j: float
    mechanism_j: float  # friction and efficiency of mechanism and guides
    work_j: float  # on process and payload

    def losses(self) -> dict[str, float]:
        """Everything but supply and work, by name without unit. [J]"""
        names = [f.name for f in fields(self) if f.name not in ("supply_j", "work_j")]
        return {name.removesuffix("_j"): getattr(self, name) for name in names}


def energy_account(model: SetModel, sets: Sets, index: int) -> EnergyAccount:
    """Energy of one cycle of one set.

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
    EnergyAccount
        Integrals over the cycle, each by itself, so that their sum is a test of all. [J]

    Notes
    -----
    Stored energy returns to its value after a cycle, or counts as work where the payload was lifted for good. The
    copper loss is that at judged temperatures, as everywhere at the terminals.
    """
    d, c, p = model.demand, model.course, sets.pairs
    b = sets.once(own_results)
    T = d.cycle_s
    held = np.where(d.brake_closed & (d.direction == 0.0), 0.0, 1.0)[:, None]

    def by_cause(causes: tuple[str, ...]) -> float:
        torque = sum(d.torque_by_cause[cause] for cause in causes)
        power = held * torque * d.shaft_speed
        energy = float(integrate(d.duration_s, power))
        # What is given and taken back alike leaves only the noise of the last bits.
        return energy if abs(energy) > _NOISE * float(integrate(d.duration_s, np.abs(power))) else 0.0

    at_motor = float(integrate(d.duration_s, c.shaft_torque_nm[0] * c.motor_speed_rad_s[0]))
    at_load = float(integrate(d.duration_s, held * d.shaft_torque * d.shaft_speed))
    efficiency = float(model.drive.efficiency[0])
    motoring, returned = (
        float(getattr(p, f"energy_terminals_{which}_j")[index]) for which in ("motoring", "regenerated")
    )
    return EnergyAccount(
        supply_j=float(b.supply_power_mean_w[index]) * T,
        steady_j=float(b.steady_power_w[index]) * T,
        resistor_j=float(b.brake_energy_j[index]),
        drive_j=motoring * (1.0 / efficiency - 1.0) + returned * (1.0 - efficiency),
        cable_j=float(p.cable_loss_mean_w[index]) * T,
        winding_j=float(p.copper_loss_mean_w[index]) * T,
        motor_friction_j=float(p.friction_loss_mean_w[index]) * T,
        gearhead_j=at_motor - at_load,
        mechanism_j=by_cause(_HEAT),
        work_j=by_cause(_WORK),
    )


def energy_quantities(model: SetModel, sets: Sets, index: int) -> dict[str, float | None]:
    """Energy of one set per cycle, hour and year, by where it goes, for results.json.

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
        SI values; None where not known, or where the case states neither hours nor price. [-]
    """
    account = energy_account(model, sets, index)
    answer = {
        f"energy_{f.name.removesuffix('_j')}_per_cycle_j": getattr(account, f.name) for f in fields(account)
    }
    mean = account.supply_j / model.demand.cycle_s if sets.case.cycle.repeats else np.nan
    year = mean * sets.option("operating time per year")
    answer["energy_supply_per_hour_j"] = mean * HOUR_S
    answer["energy_supply_per_year_j"] = year
    answer["energy_cost_per_year"] = year / (1000.0 * HOUR_S) * sets.option("price of energy per kWh")
    return {name: float(value) if np.isfinite(value) else None for name, value in answer.items()}
