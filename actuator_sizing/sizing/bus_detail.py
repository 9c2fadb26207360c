"""Bus of one set over the cycle, for figures and tables."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.bus import bus_course, bus_cycle, stored_voltage
from actuator_sizing.core.supply import charged_voltage
from actuator_sizing.sizing.bus import own_results
from actuator_sizing.sizing.bus_power import needed_voltage, power_at_bus, terminal_power
from actuator_sizing.sizing.bus_sag import bus_under_load, is_soft
from actuator_sizing.sizing.bus_side import bus_side, clamping_threshold, supply_feeds_back
from actuator_sizing.sizing.checks.base import Sets

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]


def bus_frame(sets: Sets) -> pd.DataFrame:
    """Power and voltage of the bus of one set over one cycle, in periodic steady state.

    Parameters
    ----------
    sets : Sets
        One evaluated set. [-]

    Returns
    -------
    DataFrame
        ``time_s``; ``bus_power_w``, taken from the bus; ``bus_voltage_high_v``, fed from the highest voltage of the
        supply (NaN where it is not known), and ``bus_voltage_low_v``, fed from the lowest. [-]
    """
    import pandas as pd

    s = sets.surroundings
    side = bus_side(sets, clamping_threshold(sets))
    terminals = terminal_power(sets, sets.index[:, :2])
    only = np.zeros(1, dtype=np.intp)
    power = power_at_bus(terminals, only, side)
    one = np.ones(1)
    cycle = bus_cycle(power.runs, one, side.room_j)
    time, stored, watts = bus_course(power.runs, one, side.room_j, cycle)
    if supply_feeds_back(sets):
        resistance = float(np.nan_to_num(sets.option("supply internal resistance"), nan=0.0))
        high = charged_voltage(s.bus_max_v, resistance, np.maximum(-watts, 0.0))
    elif np.isinf(sets.once(own_results).voltage_max_v[0]):
        high = np.full(len(time), np.nan)  # each cycle leaves more than the last: there is no periodic state
    else:
        high = stored_voltage(s.bus_max_v, side.capacitance_f, stored)
    low = np.full(len(time), s.bus_min_v)
    if is_soft(sets):
        under = bus_under_load(sets, needed_voltage(terminals, only), power, side)
        low = np.interp(time, under.time_s[0].ravel(), under.voltage_v[0].ravel())
    return pd.DataFrame(
        {"time_s": time, "bus_power_w": watts, "bus_voltage_high_v": high, "bus_voltage_low_v": low}
    )


def bus_levels(sets: Sets, index: int) -> dict[str, float]:
    """Levels for the figure of the bus; NaN where not known.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    index : int
        Which set. [-]

    Returns
    -------
    dict
        Names end in their unit. [-]
    """
    b, drives = sets.once(own_results), sets.drives
    return {
        "chopper_threshold_v": float(b.threshold_v[index]),
        "chopper_release_v": float(b.release_v[index]),
        "drive_bus_max_v": float(drives.bus_voltage_max_v[index]),
        "drive_bus_min_v": float(drives.bus_voltage_min_v[index]),
        "supply_continuous_power_w": sets.option("supply continuous power"),
        "supply_peak_power_w": sets.option("supply peak power"),
    }
