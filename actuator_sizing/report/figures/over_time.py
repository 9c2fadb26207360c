"""Curves over one cycle: motion, torque by cause, and current against the limits of drive and motor."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.report.figures import style
from actuator_sizing.report.figures.units import AxisUnits, current_label
from actuator_sizing.report.formatting import DisplayUnit, display_unit, number

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import SetDetail, SetResult

# Light fillings let the hatch show in grey; only the inertia of the load is dark, and plain.
#: column of the cycle, name in the legend, filling, hatch
_CAUSES = (
    ("gravity_nm", "gravity", "#bfe6d8", r"\\\\"),
    ("friction_nm", "friction", "#f7e0ae", "xxxx"),
    ("process_nm", "process", "#f0d5e4", "||||"),
    ("losses_nm", "losses of gear and motor", "#f2b896", "----"),
    ("inertia_load_nm", "load inertia", style.DEMAND, ""),
    ("inertia_rotor_nm", "rotor inertia", "#cfe8f8", "////"),
)


def draw_motion(cycle: pd.DataFrame, units: AxisUnits, name: str = "") -> Figure:
    """Draw position, speed and acceleration of the load over one cycle, and what asks for them.

    Parameters
    ----------
    cycle : DataFrame
        Curves over one cycle; the last panel is the air-gap torque of the motor, or the effort at the load
        as long as no motor is chosen.
    units : AxisUnits
        Units and words to draw in.
    name : str
        Name of the cycle, said below; empty where there is one.
    """
    time, unit = time_axis(cycle)
    effort = "motor_torque_nm" if "motor_torque_nm" in cycle else "effort"
    whose = f"motor {units.effort_word}" if effort == "motor_torque_nm" else "effort at the load"
    panels = (
        ("position", units.position(cycle["position"]), "position"),
        ("speed", units.speed(), "speed"),
        ("acceleration", units.acceleration(), "acceleration"),
        (
            effort,
            units.effort(cycle[effort]) if effort != "effort" else units.load_effort(cycle[effort]),
            whose,
        ),
    )
    figure, axes = style.new_axes(5.4, rows=len(panels), left_in=0.95, right_in=0.25, top_in=0.32)
    for ax, (column, shown, label) in zip(axes, panels, strict=True):
        ax.plot(time, shown.convert(cycle[column].to_numpy(float)), color=style.DEMAND)
        ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
        ax.set_ylabel(f"{label}\n[{shown.label}]")
        ax.margins(y=0.12)
    style.align_labels(axes)
    mark_segments(axes, cycle, unit)
    of_cycle = f" in the cycle {style.shorten(name, 40)}" if name else ""
    axes[-1].set_xlabel(f"time{of_cycle} [{unit.label}], all values positive along +x")
    return figure


def draw_causes(detail: SetDetail, units: AxisUnits) -> Figure:
    """Draw the air-gap torque over one cycle, stacked by what asks for it: helpers below zero, the rest above.

    Parameters
    ----------
    detail : SetDetail
        Curves of the set.
    units : AxisUnits
        Units and words to draw in.
    """
    cycle = detail.cycle
    time, unit = time_axis(cycle)
    total = cycle["motor_torque_nm"].to_numpy(float)
    parts = [cause for cause in _CAUSES if cause[0] in cycle and np.nanmax(np.abs(cycle[cause[0]])) > 0.0]
    values = [cycle[column].to_numpy(float) for column, *_ in parts]
    shown = units.effort([*total, *(v for part in values for v in part)])
    needed = _corners(time, np.array([total, *values]))
    values, area_time = [part[needed] for part in values], time[needed]
    figure, (ax,) = style.new_axes(3.9, right_in=0.25, top_in=0.78)
    above, below = np.zeros_like(area_time), np.zeros_like(area_time)
    for (_, name, color, hatch), part in zip(parts, values, strict=True):
        look: dict[str, Any] = {
            "facecolor": color,
            "hatch": hatch,
            "edgecolor": style.INK,
            "linewidth": 0.0,
            "zorder": 1.2,
        }
        for base, piece in ((above, np.maximum(part, 0.0)), (below, np.minimum(part, 0.0))):
            if np.any(piece):
                ax.fill_between(
                    area_time, shown.convert(base), shown.convert(base + piece), label=name, **look
                )
                name = "_"  # named once, whether it helps or asks
            base += piece
    ax.plot(
        time, shown.convert(total), color="white", linewidth=4.0, zorder=2.4
    )  # a rim, seen on any filling
    ax.plot(time, shown.convert(total), color=style.INK, linewidth=2.0, label="sum (air gap)", zorder=2.5)
    ax.axhline(0.0, color=style.INK, linewidth=0.8)
    ax.set_ylabel(f"{units.effort_word} at the motor [{shown.label}]")
    ax.set_xlabel(f"time [{unit.label}], positive drives +x")
    mark_segments([ax], cycle, unit)
    style.legend_above(ax, columns=4, bbox_to_anchor=(0.0, 1.08))
    return figure


def _corners(time: Any, curves: Any) -> Any:
    """Index of the points that are not on the straight line between their neighbours in every curve.

    A filled area draws each point that it is given; most of a duty cycle is straight.
    """
    size = np.ptp(curves, axis=1, keepdims=True)
    before, after = time[1:-1] - time[:-2], time[2:] - time[1:-1]
    span = np.where(before + after > 0.0, before + after, 1.0)
    line = curves[:, :-2] + (curves[:, 2:] - curves[:, :-2]) * before / span
    bent = np.any(np.abs(curves[:, 1:-1] - line) > 1e-9 * size, axis=0)
    return np.flatnonzero(np.concatenate([[True], bent | (before == 0.0) | (after == 0.0), [True]]))


def draw_current(best: SetResult, detail: SetDetail) -> Figure:
    """Draw the motor current over one cycle with the limits of motor and drive.

    Parameters
    ----------
    best : SetResult
        Set with its quantities.
    detail : SetDetail
        Curves and levels of the set, in the motor's kind of ampere.
    """
    cycle = detail.cycle
    time, unit = time_axis(cycle)
    current = cycle["current_a"].to_numpy(float)
    figure, (ax,) = style.new_axes(3.3, top_in=0.32)
    ax.plot(time, current, color=style.DEMAND)
    ax.margins(y=0.12)
    ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
    rms = best.quantities.get("current_rms_a")
    levels = [
        _level(detail, "motor_peak_current_a", "motor peak", style.PEAK_LIMIT, style.LIMIT_DASH),
        _level(detail, "drive_peak_current_a", "drive peak", style.PEAK_LIMIT, (0, (6, 2, 1, 2))),
        _level(detail, "drive_continuous_current_a", "drive continuous", style.CONTINUOUS, (0, (3, 1.5))),
        _level(detail, "motor_continuous_current_a", "motor continuous", style.CONTINUOUS, (0, (6, 2, 1, 2))),
    ]
    if rms is not None:
        levels.append(style.Level(rms, f"RMS of the cycle {number(rms, 3)} A", style.INK, style.QUIET_DASH))
    style.draw_levels(ax, levels)
    basis = best.quantities.get("current_basis")
    ax.set_ylabel(current_label(basis))
    ax.set_xlabel(f"time [{unit.label}], positive current drives +x; limits hold for both signs")
    mark_segments([ax], cycle, unit)
    return figure


def draw_over_cycle(ax: Axes, cycle: pd.DataFrame, values: Any) -> DisplayUnit:
    """Draw one curve over one cycle into a panel, its segments named above.

    Parameters
    ----------
    ax : Axes
        An empty panel.
    cycle : DataFrame
        Curves over one cycle; gives time and segments.
    values : array_like
        The curve, in display units.

    Returns
    -------
    DisplayUnit
        Of the time.
    """
    time, unit = time_axis(cycle)
    ax.plot(time, values, color=style.DEMAND)
    ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
    ax.margins(y=0.12)
    mark_segments([ax], cycle, unit)
    return unit


def _level(detail: SetDetail, key: str, name: str, color: str, dash: Any) -> style.Level:
    value = float(detail.levels.get(key, np.nan))
    return style.Level(value, f"{name} {number(value, 3)} A", color, dash)


def time_axis(cycle: pd.DataFrame) -> tuple[Any, DisplayUnit]:
    """Take the instants of curves over a cycle in the unit that suits its length, and that unit."""
    time = cycle["time_s"].to_numpy(float)
    unit = display_unit("s", (float(time[-1]),))
    return unit.convert(time), unit


def mark_segments(axes: list[Axes], cycle: pd.DataFrame, unit: DisplayUnit) -> None:
    """Draw the borders of the segments through every panel and name them over the first one."""
    time = unit.convert(cycle["time_s"].to_numpy(float))
    names = cycle["segment"].astype(str).to_numpy()
    starts = np.concatenate([[0], np.flatnonzero(names[1:] != names[:-1]) + 1])
    ends = np.append(starts[1:], len(names) - 1)
    top = axes[0]
    width_pt = style.panel_size_pt(top)[0]
    span = max(float(time[-1] - time[0]), 1e-300)
    for count, (start, end) in enumerate(zip(starts, ends, strict=True), 1):
        for ax in axes:
            if start > 0:
                ax.axvline(time[start], color=style.QUIET, linewidth=0.6, linestyle=style.QUIET_DASH)
        room = int((time[end] - time[start]) / span * width_pt / 4.9)  # about 4.9 pt a letter at size 7.5
        text = style.shorten(names[start], max(room, 1))
        if len(text) < min(len(names[start]), 5):
            text = str(count) if room >= 2 else ""
        top.annotate(
            text,
            ((time[start] + time[end]) / 2.0, 1.0),
            xycoords=("data", "axes fraction"),
            xytext=(0, 4),
            textcoords="offset points",
            ha="center",
            va="bottom",
            fontsize=7.5,
            color=style.QUIET,
            annotation_clip=False,
        )
    axes[0].set_xlim(time[0], time[-1])
