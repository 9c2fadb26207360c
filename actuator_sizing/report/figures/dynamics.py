"""How the axis moves: response with saturation, following error, step responses, Bode diagrams."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.report.figures import style
from actuator_sizing.report.figures.units import AxisUnits, current_label
from actuator_sizing.report.formatting import display_unit, number

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.simulation_results import Simulation

#: loop, colour, dashes: the same in every figure
_LOOPS = (
    ("current", style.THIRD, (0, (3, 1.5))),
    ("speed", style.DEMAND, "-"),
    ("position", style.CONTINUOUS, (0, (6, 2))),
)
_CURRENT_LIMITED, _VOLTAGE_LIMITED = 1, 2


def draw_simulation(simulation: Simulation) -> dict[str, Figure]:
    """Draw every figure that a simulation allows, by name.

    Parameters
    ----------
    simulation : Simulation
        The answer.
    """
    with style.house_style():
        figures = {"response": draw_response(simulation)}
        if "following_error" in simulation.series:
            figures["following_error"] = draw_following_error(simulation)
        figures["loop_steps"] = draw_loop_steps(simulation)
        figures["bode"] = draw_bode(simulation)
        return figures


def _units(simulation: Simulation) -> AxisUnits:
    return AxisUnits(simulation.is_linear_load, simulation.is_linear_motor)


def draw_response(simulation: Simulation) -> Figure:
    """Draw motor speed, current and voltage over time; where a limit acted the panel is shaded.

    Parameters
    ----------
    simulation : Simulation
        Any input.
    """
    series, units = simulation.series, _units(simulation)
    if "stop" in series:
        return _draw_stops(simulation)
    time = series["time_s"].to_numpy(float)
    unit, speed_unit = display_unit("s", (float(time[-1]),)), units.motor_speed()
    has_voltage = "voltage_v" in series
    figure, axes = style.new_axes(
        4.6 if has_voltage else 3.6, rows=3 if has_voltage else 2, left_in=0.95, top_in=0.55
    )
    top = axes[0]
    if "commanded_speed_rad_s" in series:
        top.plot(unit.convert(time), speed_unit.convert(series["commanded_speed_rad_s"].to_numpy(float)),
                 color=style.INK, linestyle=(0, (1.2, 1.4)), linewidth=1.2, label="commanded", zorder=3)  # fmt: skip
    top.plot(unit.convert(time), speed_unit.convert(series["motor_speed_rad_s"].to_numpy(float)),
             color=style.DEMAND, label="motor")  # fmt: skip
    if "load_speed_rad_s" in series and not simulation.plant.is_rigid:
        top.plot(unit.convert(time), speed_unit.convert(series["load_speed_rad_s"].to_numpy(float)),
                 color=style.SECOND, linestyle=(0, (6, 2)), linewidth=1.2, label="load")  # fmt: skip
    top.set_ylabel(f"motor-side speed\n[{speed_unit.label}]")
    axes[1].plot(unit.convert(time), series["current_a"], color=style.DEMAND)
    axes[1].set_ylabel(current_label(simulation.current_basis).replace(" [", "\n["))
    for ax in axes:
        ax.margins(y=0.12)
        ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
    closed = has_voltage
    if closed:
        is_dq = "direct_voltage_v" in series
        axes[2].plot(unit.convert(time), series["voltage_v"], color=style.DEMAND,
                     label="quadrature" if is_dq else None)  # fmt: skip
        if is_dq:
            axes[2].plot(unit.convert(time), series["direct_voltage_v"], color=style.SECOND,
                         linestyle=(0, (6, 2)), linewidth=1.2, label="direct")  # fmt: skip
        axes[2].set_ylabel("voltage of the\nDC equivalent [V]")
        saturated = series["saturated"].to_numpy(int)
        shade(axes[1], unit.convert(time), saturated & _CURRENT_LIMITED > 0, "current limited")
        shade(axes[2], unit.convert(time), saturated & _VOLTAGE_LIMITED > 0, "voltage limited")
        style.draw_levels(axes[1], _both_signs(simulation.settings.current_limit_a, "limit", "A"))
        style.draw_levels(axes[2], _both_signs(simulation.settings.voltage_limit_v, "lowest bus", "V"))
        for ax in axes[1:]:
            if ax.get_legend_handles_labels()[0]:
                ax.legend(loc="upper right", frameon=True, framealpha=0.85, edgecolor="none")
    axes[-1].set_xlabel(f"time [{unit.label}], positive along +x")
    style.legend_above(top, columns=3)
    axes[0].set_xlim(0.0, float(unit.convert(time[-1])))
    style.align_labels(axes)
    return figure


def _draw_stops(simulation: Simulation) -> Figure:
    series, units = simulation.series, _units(simulation)
    speed_unit = units.motor_speed()
    figure, axes = style.new_axes(3.6, rows=2, left_in=0.95, right_in=0.25, top_in=0.5)
    unit = display_unit("s", (float(series["time_s"].max()),))
    looks = (("controlled", style.DEMAND, "-"), ("shorted winding", style.PEAK_LIMIT, (0, (6, 2))))
    for name, color, dash in looks:
        part = series[series["stop"] == name]
        time = unit.convert(part["time_s"].to_numpy(float))
        axes[0].plot(time, speed_unit.convert(part["motor_speed_rad_s"].to_numpy(float)), color=color,
                     linestyle=dash, label=name)  # fmt: skip
        axes[1].plot(time, part["current_a"], color=color, linestyle=dash)
    axes[0].set_ylabel(f"motor speed\n[{speed_unit.label}]")
    axes[1].set_ylabel(current_label(simulation.current_basis).replace(" [", "\n["))
    axes[1].set_xlabel(f"time from the command [{unit.label}], positive along +x")
    for ax in axes:
        ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
        ax.margins(y=0.12)
    stopped = [simulation.quantities[key] for key in ("controlled_stop_s", "shorted_stop_s")]
    known = [value for value in stopped if math.isfinite(value)]
    if known:
        axes[0].set_xlim(0.0, float(unit.convert(min(3.0 * max(known), float(series["time_s"].max())))))
    style.legend_above(axes[0], columns=2)
    style.align_labels(axes)
    return figure


def draw_following_error(simulation: Simulation) -> Figure:
    """Draw the difference between commanded and true position of the load, with the bands.

    Parameters
    ----------
    simulation : Simulation
        A simulated cycle.
    """
    series, units = simulation.series, _units(simulation)
    time = series["time_s"].to_numpy(float)
    error = series["following_error"].to_numpy(float)
    unit = display_unit("s", (float(time[-1]),))
    bands = [value for value in simulation.bands.values() if math.isfinite(value)]
    shown = units.position([*np.abs(error), *bands])
    figure, (ax,) = style.new_axes(2.7, left_in=0.95, right_in=1.75, top_in=0.15)
    ax.plot(unit.convert(time), shown.convert(error), color=style.DEMAND, linewidth=1.2)
    ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
    ax.margins(y=0.12)
    levels = [style.Level(float(shown.convert(simulation.quantities["following_error_peak"])),
                          f"peak {number(float(shown.convert(simulation.quantities['following_error_peak'])), 3)} "
                          f"{shown.label}", style.QUIET, style.QUIET_DASH)]  # fmt: skip
    for key, name, color, dash in (
        ("settling_band", "settling band", style.CONTINUOUS, style.CONTINUOUS_DASH),
        ("allowed_following_error", "allowed error", style.PEAK_LIMIT, style.LIMIT_DASH),
    ):
        value = simulation.bands.get(key, math.nan)
        if math.isfinite(value):
            levels += _both_signs(float(shown.convert(value)), name, shown.label, color, dash)
    style.draw_levels(ax, levels)
    ax.set_ylabel(f"command minus load\n[{shown.label}]")
    ax.set_xlabel(f"time [{unit.label}], positive: the load is behind along +x")
    ax.set_xlim(0.0, float(unit.convert(time[-1])))
    return figure


def draw_loop_steps(simulation: Simulation) -> Figure:
    """Draw the unit steps of the three loops, each over its own time.

    Parameters
    ----------
    simulation : Simulation
        Any input.
    """
    loops = [loop for loop in _LOOPS if f"{loop[0]}_response" in simulation.steps]
    figure, axes = style.new_axes(
        2.5, left_in=0.75, right_in=0.25, top_in=0.4, columns=(1.0,) * max(len(loops), 1),
        column_gap_in=0.4, share_x=False,
    )  # fmt: skip
    for ax, (loop, color, _) in zip(axes, loops, strict=False):
        rows = simulation.steps[[f"{loop}_time_s", f"{loop}_response"]].dropna()
        time = rows[f"{loop}_time_s"].to_numpy(float)
        unit = display_unit("s", (float(time[-1]),))
        ax.plot(unit.convert(time), rows[f"{loop}_response"], color=color)
        ax.axhline(1.0, color=style.QUIET, linewidth=0.8, linestyle=style.QUIET_DASH)
        ax.set_xlabel(f"time [{unit.label}]")
        over = simulation.quantities[f"{loop}_step_overshoot_ratio"]
        ax.set_title(f"{loop} loop, overshoot {number(100.0 * over, 3)} %", fontsize=8.0)
        ax.set_ylim(bottom=0.0)
    axes[0].set_ylabel("response to a unit step [-]")
    return figure


def draw_bode(simulation: Simulation) -> Figure:
    """Draw the open loops with their margins, and where motor and load resonate.

    Parameters
    ----------
    simulation : Simulation
        Any input.
    """
    table, q = simulation.frequency, simulation.quantities
    frequency = table["frequency_hz"].to_numpy(float)
    figure, (gain, phase) = style.new_axes(4.2, rows=2, left_in=0.75, right_in=1.9, top_in=0.5)
    phase_marks: list[style.Level] = []
    for loop, color, dash in _LOOPS:
        if f"{loop}_open_gain" not in table:
            continue
        decibels = 20.0 * np.log10(table[f"{loop}_open_gain"].to_numpy(float))
        degrees = np.degrees(_wrapped(table[f"{loop}_open_phase_rad"].to_numpy(float)))
        gain.plot(frequency, decibels, color=color, linestyle=dash, label=f"{loop} loop")
        phase.plot(frequency, _broken(degrees), color=color, linestyle=dash)
        crossover, margin = q[f"{loop}_crossover_hz"], math.degrees(q[f"{loop}_phase_margin_rad"])
        if math.isfinite(crossover):
            gain.plot([crossover], [0.0], marker="o", color=color, markersize=4.5)
            phase.plot([crossover, crossover], [-180.0, margin - 180.0], color=color, marker="o", markersize=3.5,
                       linewidth=1.4, linestyle="-")  # fmt: skip
            phase_marks.append(
                style.Level(margin - 180.0, f"{loop}: margin {number(margin, 3)}°, {_gain_text(q, loop)}",
                            "none", style.QUIET_DASH)
            )  # fmt: skip
    gain.axhline(0.0, color=style.INK, linewidth=0.9)
    phase.axhline(-180.0, color=style.INK, linewidth=0.9)
    gain.set_xscale("log")
    # House style shows text as it is written, so powers of ten must not come as formulas.
    phase.xaxis.set_major_formatter(lambda value, _: f"{value:g}")
    gain.xaxis.set_minor_formatter(lambda *_: "")
    gain.set_ylim(-60.0, 60.0)
    phase.set_ylim(-270.0, 0.0)
    phase.set_yticks([-270, -225, -180, -135, -90, -45, 0])
    style.draw_levels(phase, phase_marks)
    phase.set_ylim(-270.0, 0.0)
    for name, key, dash in (("antiresonance", "antiresonance_hz", style.CONTINUOUS_DASH),
                            ("resonance", "resonance_hz", style.LIMIT_DASH)):  # fmt: skip
        value = q[key]
        if frequency[0] < value < frequency[-1]:
            for ax in (gain, phase):
                ax.axvline(value, color=style.FOURTH, linewidth=1.0, linestyle=dash)
            style_note(gain, value, f"{name} {number(value, 3)} Hz", name == "resonance")
    gain.set_ylabel("open-loop gain [dB]")
    phase.set_ylabel("phase [°]")
    phase.set_xlabel("frequency [Hz]; dots: gain one, and the phase margin above −180°")
    gain.set_xlim(frequency[0], frequency[-1])
    style.legend_above(gain, columns=3)
    return figure


def style_note(ax: Axes, x: float, text: str, to_the_right: bool) -> None:
    """Name a vertical line near its foot, on the side where there is room."""
    ax.annotate(
        text, (x, 0.04), xycoords=("data", "axes fraction"), xytext=(4 if to_the_right else -4, 0),
        textcoords="offset points", ha="left" if to_the_right else "right", va="bottom", fontsize=7.5,
        color=style.INK, annotation_clip=False,
    )  # fmt: skip


def _gain_text(q: Any, loop: str) -> str:
    factor = q[f"{loop}_gain_margin_ratio"]
    return f"×{number(factor, 3)}" if math.isfinite(factor) else "no limit of gain"


def _wrapped(phase: Any) -> Any:
    """Phase between −360° and 0°."""
    return -np.mod(-phase, 2.0 * math.pi)


def _broken(degrees: Any) -> Any:
    """Leave a gap where the phase jumps by a full turn."""
    shown = degrees.copy()
    shown[1:][np.abs(np.diff(degrees)) > 180.0] = np.nan
    return shown


def shade(ax: Axes, time: Any, limited: Any, label: str) -> None:
    """Shade the times in which a limit acted."""
    edges = np.flatnonzero(np.diff(np.concatenate([[0], limited.astype(int), [0]])))
    for start, end in zip(edges[::2], edges[1::2], strict=True):
        ax.axvspan(time[start], time[min(end, len(time) - 1)], facecolor=style.PEAK_LIMIT, alpha=0.25,
                   hatch="////", edgecolor=style.PEAK_LIMIT, linewidth=0.0, zorder=0.5,
                   label=label if start == edges[0] else None)  # fmt: skip


def _both_signs(
    value: float, name: str, unit: str, color: str = style.PEAK_LIMIT, dash: Any = style.LIMIT_DASH
) -> list[style.Level]:
    if not math.isfinite(value):
        return []
    return [
        style.Level(value, f"{name} {number(value, 3)} {unit}", color, dash),
        style.Level(-value, f"{name} −{number(value, 3)} {unit}", color, dash),
    ]
