"""The power of every common bus over time, where the cycles of its axes go into one another."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.figures import DrawnFigure, style
from actuator_sizing.report.formatting import display_unit
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.machine import Machine
    from actuator_sizing.sizing.machine_bus import CommonBus

_LINES = (
    (style.SECOND, style.CONTINUOUS_DASH),
    (style.THIRD, style.QUIET_DASH),
    (style.FOURTH, style.LIMIT_DASH),
    (style.CONTINUOUS, (0, (4, 1, 1, 1))),
)


def figure_key(bus: CommonBus) -> str:
    """Name of the drawing of a bus."""
    return f"bus_{bus.bus_nominal_v:g}_v".replace(".", "_")


def draw_buses(machine: Machine) -> dict[str, DrawnFigure]:
    """Draw the summed power of each bus that feeds several axes whose cycles start together.

    Parameters
    ----------
    machine : Machine
        The answer.
    """
    drawn: dict[str, DrawnFigure] = {}
    with style.house_style():
        for bus in machine.buses:
            if bus.together is not None and len(bus.axes) > 1:
                key = figure_key(bus)
                drawn[key] = DrawnFigure(key, style.to_svg(_draw(bus), key))
    return drawn


def _draw(bus: CommonBus) -> Figure:
    frame = bus.together
    assert frame is not None
    power = display_unit("W", frame["power_w"].tolist())
    time = display_unit("s", (float(frame["time_s"].iloc[-1]),))
    figure, (ax,) = style.new_axes(3.1, right_in=0.25, top_in=0.55)
    x = time.convert(frame["time_s"].to_numpy())
    few = bus.axes if len(bus.axes) <= len(_LINES) else ()
    for axis, (color, dash) in zip(few, _LINES, strict=False):
        ax.plot(x, power.convert(frame[axis].to_numpy()), color=color, linestyle=dash, linewidth=1.1,
                label=style.shorten(clean(axis), 24))  # fmt: skip
    ax.plot(x, power.convert(frame["power_w"].to_numpy()), color=style.DEMAND, label="all axes")
    ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
    ax.set_xlabel(f"time [{time.label}], all cycles started together")
    ax.set_ylabel(f"power at the bus [{power.label}]")
    style.legend_above(ax, columns=5)
    return figure
