"""The DC bus over one cycle, and where the energy of a cycle goes."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.report.figures import style
from actuator_sizing.report.figures.over_time import mark_segments, time_axis
from actuator_sizing.report.formatting import DisplayUnit, display_unit, number
from actuator_sizing.report.text import ENERGY_PARTS

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import SetDetail, SetResult

_BACK = "#bfe6d8"  # light, so that its hatch shows in grey
_TAKEN = "#cfe8f8"
_LOSS, _WORK = "#f7e0ae", "#bfe6d8"
_Named = tuple[str, str, str, Any]  # key of the level, words, colour, dashes


def draw_bus(detail: SetDetail) -> Figure | None:
    """Draw bus voltage and power over one cycle in periodic steady state with the levels that bound them.

    Parameters
    ----------
    detail : SetDetail
        Curves of the set; None comes back where they hold no bus.
    """
    if detail.bus is None:
        return None
    bus, levels = detail.bus, detail.levels
    time, unit = time_axis(bus)
    high, low, power = (
        bus[name].to_numpy(float) for name in ("bus_voltage_high_v", "bus_voltage_low_v", "bus_power_w")
    )
    figure, (above, below) = style.new_axes(4.3, rows=2, left_in=0.85, right_in=1.85, top_in=0.62)
    if not np.isnan(high).all():
        above.plot(time, high, color=style.DEMAND, label="from the highest supply voltage", zorder=2.4)
    above.plot(
        time, low, color=style.SECOND, linestyle=style.CONTINUOUS_DASH, label="from the lowest supply voltage"
    )
    above.set_ylabel("bus voltage\n[V]")
    above.margins(y=0.15)
    voltages = (
        ("drive_bus_max_v", "drive switches off", style.PEAK_LIMIT, style.LIMIT_DASH),
        ("chopper_threshold_v", "chopper on", style.THIRD, style.CONTINUOUS_DASH),
        ("chopper_release_v", "chopper off", style.FOURTH, style.QUIET_DASH),
        ("drive_bus_min_v", "drive's minimum", style.PEAK_LIMIT, style.LIMIT_DASH),
    )
    style.draw_levels(above, _levels(levels, voltages, DisplayUnit("V")))
    style.legend_above(above, columns=2, bbox_to_anchor=(0.0, 1.1))
    shown = display_unit("W", power.tolist())
    watts = shown.convert(power)
    for part, color, hatch in ((np.maximum(watts, 0.0), _TAKEN, ""), (np.minimum(watts, 0.0), _BACK, "////")):
        below.fill_between(
            time, 0.0, part, facecolor=color, hatch=hatch, edgecolor=style.QUIET, linewidth=0.0
        )
    below.plot(time, watts, color=style.DEMAND)
    below.axhline(0.0, color=style.INK, linewidth=0.8)
    below.set_ylabel(f"power of the axis\n[{shown.label}]")
    powers = (
        ("supply_peak_power_w", "supply, peak", style.PEAK_LIMIT, style.LIMIT_DASH),
        ("supply_continuous_power_w", "supply, continuous", style.CONTINUOUS, style.CONTINUOUS_DASH),
    )
    style.draw_levels(below, _levels(levels, powers, shown))
    below.set_xlabel(f"time [{unit.label}]; power below zero (hatched) comes back")
    style.align_labels([above, below])
    mark_segments([above, below], detail.cycle, unit)
    return figure


def _levels(levels: Mapping[str, float], named: tuple[_Named, ...], shown: DisplayUnit) -> list[style.Level]:
    """Lines of those levels that are known."""
    found = []
    for key, text, color, dash in named:
        value = levels.get(key, float("nan"))
        if value == value:
            place = float(shown.convert(value))
            found.append(style.Level(place, f"{text} {number(place, 3)} {shown.label}", color, dash))
    return found


def draw_energy_flow(best: SetResult) -> Figure | None:
    """Draw where the energy of one cycle goes, from what the supply gives down to the work that is left.

    Parameters
    ----------
    best : SetResult
        The set; None comes back where its energy is not known.
    """
    parts = {key: best.quantities.get(f"energy_{key}_per_cycle_j") for key, _ in ENERGY_PARTS}
    words = dict(ENERGY_PARTS)
    if parts["supply"] is None:  # the drive's efficiency is not stated: the way starts behind it
        motoring, returned = (
            best.quantities.get(f"energy_terminals_{k}_j") for k in ("motoring", "regenerated")
        )
        parts["supply"] = None if motoring is None or returned is None else motoring - returned
        words["supply"] = "from the drive"
        parts = {key: value for key, value in parts.items() if key not in ("steady", "resistor", "drive")}
    if any(value is None for value in parts.values()):
        return None
    known = [(words[key], float(value)) for key, value in parts.items() if value is not None]
    supply, work = known[0][1], known[-1][1]
    scale = max(abs(supply), abs(work), 1e-300)
    rows = [known[0], *(row for row in known[1:-1] if abs(row[1]) > 5e-4 * scale), known[-1]]
    shown = display_unit("J", [value for _, value in rows])
    figure, (ax,) = style.new_axes(0.85 + 0.26 * len(rows), left_in=1.95, right_in=1.45, top_in=0.15)
    left = supply
    for place, (_, value) in enumerate(rows):
        first, last = place == 0, place == len(rows) - 1
        start, width = (0.0, value) if first or last else (left - value, value)
        look: dict[str, Any] = {"edgecolor": style.INK, "linewidth": 0.6}
        look |= {"facecolor": style.DEMAND if first else _WORK if last else _LOSS}
        look |= {"hatch": "" if first else "////" if last else "xxxx"}
        ax.barh(place, shown.convert(width), left=shown.convert(start), height=0.66, **look)
        if not first:
            edge = shown.convert(np.array([left, left]))
            ax.plot(edge, [place - 1.33, place + 0.33], color=style.QUIET, linewidth=0.7)
        if not first and not last:
            left -= value
        share = "" if supply <= 0.0 else f", {number(100.0 * value / supply, 3)} %"
        ax.annotate(f"{number(float(shown.convert(value)), 3)} {shown.label}{share}", (1.0, place),
                    xycoords=("axes fraction", "data"), xytext=(5, 0), textcoords="offset points", va="center",
                    fontsize=7.6, annotation_clip=False)  # fmt: skip
    ax.set_yticks(range(len(rows)), [name for name, _ in rows])
    ax.set_ylim(len(rows) - 0.5, -0.5)
    ax.axvline(0.0, color=style.INK, linewidth=0.8)
    ax.margins(x=0.02)
    ax.grid(visible=False, axis="y")
    ax.tick_params(axis="y", length=0)
    ax.set_xlabel(f"energy of one cycle [{shown.label}], each part taken from what is left")
    return figure
