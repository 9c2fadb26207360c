"""What the axes of a machine ask together of the bus that feeds them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.power_runs import bus_energy

if TYPE_CHECKING:
    import pandas as pd

    from actuator_sizing.sizing.results import Comparison

FloatArray = NDArray[np.float64]

_SAME_CYCLE = 1e-6  # cycles that differ by less than this part of themselves are of one length
_MOST_CYCLES = 100  # of the shortest axis within one of the longest


@dataclass(frozen=True)
class CommonBus:
    """The leading sets of axes that state the same nominal bus voltage.

    A figure is None where the efficiency of a drive is not known.
    """

    bus_nominal_v: float
    axes: tuple[str, ...]
    unknown: tuple[str, ...]  # axes whose power at the bus is not known
    #: mean power if nothing that comes back is used, and if all of it is used by other axes
    power_mean_most_w: float | None
    power_mean_least_w: float | None
    #: sum of the single peaks: reached where they coincide, never exceeded
    power_peak_most_w: float | None
    #: sum of what the axes give back at most, in the same sense
    power_returned_most_w: float | None
    #: largest and smallest summed power where all cycles start together; None where an axis has several cycles, or
    #: their lengths do not go into one another
    power_peak_together_w: float | None
    power_returned_together_w: float | None
    peak_together_at_s: float | None
    #: time_s, power_w, and power of each axis, where all cycles start together
    together: pd.DataFrame | None


def common_buses(names: Sequence[str], comparisons: Sequence[Comparison]) -> tuple[CommonBus, ...]:
    """Sum up the power of the leading sets, for each nominal bus voltage.

    Parameters
    ----------
    names : sequence of str
        Names of the axes.
    comparisons : sequence of Comparison
        Their comparisons.

    Returns
    -------
    tuple of CommonBus
        Lowest voltage first. [-]

    Notes
    -----
    The timing of one axis against another is not part of a case. Whatever it is, the peak lies between the mean
    power and the sum of the peaks. Where all cycles have the length of the longest, or go into it, the sum is also
    given for a start at one time; it is taken at the nodes of the pieces, both sides of every jump included.
    """
    groups: dict[float, list[int]] = {}
    for index, comparison in enumerate(comparisons):
        groups.setdefault(comparison.case.surroundings.bus_nominal_v, []).append(index)
    return tuple(
        _bus(voltage, [names[i] for i in members], [comparisons[i] for i in members])
        for voltage, members in sorted(groups.items())
    )


@dataclass(frozen=True)
class AxisPower:
    """Power of the leading set of one axis at the bus."""

    #: means over the mix of the cycles; where they have no shares, of the cycle that takes most
    taken_w: float  # stand-by power included
    returned_w: float
    courses: tuple[tuple[FloatArray, FloatArray], ...]  # instants and power over each cycle


def axis_power(comparison: Comparison) -> AxisPower | None:
    """Power of the leading set at the bus; None where the efficiency of its drive is not known. [-]"""
    best = comparison.best
    efficiency = float(comparison.case.drive_parameters.efficiency[best.drive_index])
    runs: Sequence[Any] = best.cycles or (best,)
    if np.isnan(efficiency) or any(run.quantities.get("energy_bus_motoring_j") is None for run in runs):
        return None
    steady = float(best.quantities.get("bus_steady_power_w") or 0.0)
    courses = []
    for run in runs:
        if run.detail is None:
            return None
        cycle = run.detail.cycle
        power = cycle["motor_torque_nm"] * cycle["motor_speed_rad_s"]
        circuit_ohm = run.quantities["resistance_ohm"] + run.quantities["cable_ohm"]  # the cable heats too
        power += circuit_ohm * cycle["current_a"] ** 2
        at_bus = bus_energy(power.to_numpy()[None, :], np.array([efficiency]))[0] + steady
        courses.append((cycle["time_s"].to_numpy(), at_bus))
    if best.mix is not None:
        taken = best.mix["energy_terminals_motoring_per_hour_j"] / efficiency / 3600.0
        returned = best.mix["energy_terminals_regenerated_per_hour_j"] * efficiency / 3600.0
        return AxisPower(taken + steady, returned, tuple(courses))
    spans = [each.demand.cycle_s for each in comparison.cycles] or [comparison.demand.cycle_s]
    taken, returned = max(
        (run.quantities["energy_bus_motoring_j"] / span, run.quantities["energy_bus_regenerated_j"] / span)
        for run, span in zip(runs, spans, strict=True)
    )
    return AxisPower(taken + steady, returned, tuple(courses))


def _bus(voltage: float, names: Sequence[str], comparisons: Sequence[Comparison]) -> CommonBus:
    powers = [axis_power(comparison) for comparison in comparisons]
    unknown = tuple(name for name, power in zip(names, powers, strict=True) if power is None)
    if unknown:
        return CommonBus(voltage, tuple(names), unknown, *(None,) * 8)
    known = [power for power in powers if power is not None]
    single = all(len(power.courses) == 1 for power in known)
    together = _together(names, [power.courses[0] for power in known]) if single else None
    highest = lowest = at = None
    if together is not None:
        summed = together["power_w"].to_numpy()
        highest, lowest = float(summed.max()), float(max(-summed.min(), 0.0))
        at = float(together["time_s"].iloc[int(summed.argmax())])
    taken, returned = sum(power.taken_w for power in known), sum(power.returned_w for power in known)
    extremes = [np.concatenate([course for _, course in power.courses]) for power in known]
    return CommonBus(
        bus_nominal_v=voltage,
        axes=tuple(names),
        unknown=(),
        power_mean_most_w=float(taken),
        power_mean_least_w=float(taken - returned),
        power_peak_most_w=float(sum(max(power.max(), 0.0) for power in extremes)),
        power_returned_most_w=float(sum(max(-power.min(), 0.0) for power in extremes)),
        power_peak_together_w=highest,
        power_returned_together_w=lowest,
        peak_together_at_s=at,
        together=together,
    )


def _together(names: Sequence[str], courses: Sequence[tuple[FloatArray, FloatArray]]) -> pd.DataFrame | None:
    """The courses added up from one start, over the longest cycle; None where a cycle does not go into it."""
    import pandas as pd

    lengths = np.array([time[-1] for time, _ in courses])
    longest = lengths.max()
    repeats = np.rint(longest / lengths)
    fits = np.abs(repeats * lengths - longest) <= _SAME_CYCLE * longest
    if not fits.all() or repeats.max() > _MOST_CYCLES:
        return None
    # Cycles that differ by rounding are made one; each instant is kept with both of its sides.
    spread = [
        (np.concatenate([(time / time[-1] + k) / count for k in range(int(count))]) * longest,
         np.tile(power, int(count)))
        for (time, power), count in zip(courses, repeats, strict=True)
    ]  # fmt: skip
    instants = np.unique(np.concatenate([time for time, _ in spread]))
    columns: dict[str, FloatArray] = {"time_s": np.repeat(instants, 2)}
    for name, (time, power) in zip(names, spread, strict=True):
        columns[name] = np.column_stack(
            [_one_sided(time, power, instants, side) for side in ("left", "right")]
        ).reshape(-1)
    total = np.sum([columns[name] for name in names], axis=0)
    return pd.DataFrame({"time_s": columns.pop("time_s"), "power_w": total, **columns})


def _one_sided(time: FloatArray, power: FloatArray, instants: FloatArray, side: str) -> FloatArray:
    """Power just before (left) or just after (right) each instant; straight between the instants of the course."""
    inside = np.interp(instants, time, power)
    first = np.searchsorted(time, instants, side="left")
    last = np.searchsorted(time, instants, side="right") - 1
    met = last >= first
    index = np.where(side == "left", first, last)
    return np.where(met, power[np.minimum(index, len(power) - 1)], inside)
