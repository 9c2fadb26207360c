"""Stop and drop diagram: speed and way over time for every way of stopping, from its worst instant."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.figures import style
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.report.formatting import display_unit

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.stop_courses import StopCourses

#: kind of `sizing.stop_courses`, colour, dashes, what the legend says
LOOKS: tuple[tuple[str, str, Any, str], ...] = (
    ("controlled stop", style.DEMAND, "-", "controlled (category 1 or 2)"),
    ("shorted winding", style.PEAK_LIMIT, (0, (6, 2)), "shorted winding (category 0)"),
    ("holding brake", style.CONTINUOUS, (0, (3, 1.5)), "holding brake (category 0)"),
    ("coasting", style.QUIET, (0, (1, 1.5)), "coasting (category 0)"),
    ("drop from rest", style.FOURTH, (0, (6, 1.5, 1, 1.5)), "drop from rest until braked"),
)


def draw_stops(stops: StopCourses, units: AxisUnits, allowed: float = math.nan) -> Figure:
    """Draw speed and way of the load after the command to stop.

    Parameters
    ----------
    stops : StopCourses
        Courses of one set.
    units : AxisUnits
        Units of the load.
    allowed : float
        Allowed stopping distance, in m or rad; NaN: none stated. [-]
    """
    frame = stops.frame
    time_unit = display_unit("s", (float(frame["time_s"].max()),))
    way_unit, speed_unit = units.position(frame["way"]), units.speed()
    figure, axes = style.new_axes(4.6, rows=2, left_in=0.95, right_in=1.75, top_in=0.72)
    for kind, color, dash, label in LOOKS:
        part = frame[frame["kind"] == kind]
        if not len(part):
            continue
        time = time_unit.convert(part["time_s"].to_numpy(float))
        for ax, column, unit in zip(axes, ("speed", "way"), (speed_unit, way_unit), strict=True):
            values = unit.convert(part[column].to_numpy(float))
            ax.plot(time, values, color=color, linestyle=dash, label=label if ax is axes[0] else None)
            if part["speed"].iloc[-1] == 0.0:
                ax.plot(time[-1:], values[-1:], color=color, marker="o", markersize=3.0, linestyle="none")
    reaction = float(time_unit.convert(stops.reaction_s))
    closing = float(time_unit.convert(stops.reaction_s + stops.closing_s))
    for ax in axes:
        ax.axvspan(0.0, reaction, color=style.GRID, alpha=0.9, linewidth=0.0, zorder=0)
        if closing == closing:
            ax.axvspan(reaction, closing, facecolor="none", edgecolor=style.QUIET, hatch="////", linewidth=0.0,
                       zorder=0)  # fmt: skip
        ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
        ax.margins(y=0.1)
    axes[0].set_ylabel(f"speed of the load\n[{speed_unit.label}]")
    axes[1].set_ylabel(f"way since the command\n[{way_unit.label}]")
    style.draw_levels(
        axes[1],
        [style.Level(float(way_unit.convert(allowed)), "allowed stopping\ndistance", style.PEAK_LIMIT)],
    )
    for ax in axes:
        ax.set_xlim(0.0, float(time_unit.convert(frame["time_s"].max())))
    shaded = "shaded: reaction time" + ("; hatched: the brake closes" if closing == closing else "")
    axes[-1].set_xlabel(f"time since the command [{time_unit.label}]; {shaded}")
    style.legend_above(axes[0], columns=2)
    style.align_labels(axes)
    return figure
