"""Single numbers of the bus of one set, and the brake resistor that it needs."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from actuator_sizing.sizing.bus_side import supply_feeds_back
from actuator_sizing.sizing.checks.base import Sets
from actuator_sizing.sizing.joint_bus import bus_results

#: Continuous power of a brake resistor over the mean that it burns; common practice asks for 30 to 50 %.
RESISTOR_RESERVE = 1.3


def bus_quantities(sets: Sets, index: int) -> dict[str, float | None]:
    """Quantities of the bus of one set for results.json.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which set. [-]

    Returns
    -------
    dict
        SI values; None where not known. [-]
    """
    b = sets.once(bus_results)
    low = sets.surroundings.bus_min_v
    answer = {
        "bus_voltage_max_v": b.voltage_max_v[index],
        "bus_voltage_min_v": b.voltage_min_v[index],
        "bus_capacitance_f": b.capacitance_f[index],
        "bus_steady_power_w": b.steady_power_w[index],
        "brake_energy_per_cycle_j": b.brake_energy_j[index],
        "brake_pulse_energy_j": b.brake_pulse_j[index],
        "brake_power_mean_w": b.brake_power_mean_w[index],
        "brake_power_peak_w": b.brake_power_peak_w[index],
        "returned_power_mean_w": b.returned_power_mean_w[index],
        "returned_power_peak_w": b.returned_power_peak_w[index],
        "supply_power_mean_w": b.supply_power_mean_w[index],
        "supply_power_peak_w": b.supply_power_peak_w[index],
        "supply_power_rms_w": b.supply_power_rms_w[index],
        "supply_current_mean_a": b.supply_power_mean_w[index] / low,
        "supply_current_peak_a": b.supply_power_peak_w[index] / low,
        "supply_current_rms_a": b.supply_power_rms_w[index] / low,
        **_recommended_resistor(sets.only(index)),
    }
    return {name: float(value) if np.isfinite(value) else None for name, value in answer.items()}


def _recommended_resistor(sets: Sets) -> dict[str, float]:
    """What a brake resistor must be, for one set: from the smallest to the largest value, pulse and continuous power.

    Nothing but the smallest value where no chopper is known, or where nothing has to be burnt.
    """
    answer = {"brake_resistor_smallest_ohm": float(sets.drives.brake_resistor_min_ohm[0])}
    if supply_feeds_back(sets):
        return answer
    stated = sets.option("brake resistor")
    if np.isnan(stated):  # any value will do: it decides no energy
        options = {**sets.case.options, "brake resistor": 1.0}
        sets = replace(sets, case=replace(sets.case, options=options), _found={})
    b = bus_results(sets)
    peak = float(b.brake_power_peak_w[0])
    if not peak > 0.0:
        return answer
    U, C = float(b.threshold_v[0]), float(b.capacitance_f[0])
    span = float(np.nan_to_num(U**2 - b.release_v[0] ** 2))
    strongest = peak if np.isnan(stated) else U**2 / stated
    return answer | {
        "brake_resistor_largest_ohm": U**2 / peak,
        "brake_resistor_recommended_power_w": RESISTOR_RESERVE * float(b.brake_power_mean_w[0]),
        "brake_resistor_recommended_pulse_j": float(b.brake_pulse_j[0]),
        # It switches most often while half the power of the resistor comes back.
        "chopper_switching_frequency_max_hz": strongest / (2.0 * C * span) if span > 0.0 else np.nan,
    }
