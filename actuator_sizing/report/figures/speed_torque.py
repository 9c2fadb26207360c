"""The speed–torque plane: what the cycle asks for against what motor, drive and supply can give."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.report.figures import style
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.report.formatting import quantity

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import SetDetail, SetResult

FloatArray = NDArray[np.float64]

_PEAK_CURVES = (
    ("torque_peak_min_bus_nm", "peak at minimum bus", "-", 1.5),
    ("torque_peak_nominal_bus_nm", "peak at nominal bus", (0, (6, 2)), 1.1),
    ("torque_peak_max_bus_nm", "peak at maximum bus", (0, (1.2, 1.4)), 1.1),
)
_ARROWS = 7


def draw_speed_torque(best: SetResult, detail: SetDetail, units: AxisUnits) -> Figure:
    """Draw the cycle as a path in the speed–torque plane inside the limits of the set.

    Parameters
    ----------
    best : SetResult
        Set with its quantities and checks.
    detail : SetDetail
        Curves of the set.
    units : AxisUnits
        Units and words to draw in.
    """
    envelope = detail.envelope
    torque = detail.cycle["motor_torque_nm"].to_numpy(float)
    peaks = np.concatenate([envelope[name].to_numpy(float) for name, *_ in _PEAK_CURVES])
    effort_unit, speed_unit = units.effort([*torque, *peaks]), units.motor_speed()
    figure, (ax,) = style.new_axes(4.6, right_in=0.35, bottom_in=1.15, top_in=0.5)
    speed_shown = speed_unit.convert(detail.cycle["motor_speed_rad_s"].to_numpy(float))
    torque_shown = effort_unit.convert(torque)
    quadrants = _quadrants(speed_shown, torque_shown)
    _draw_limits(ax, detail, quadrants, speed_unit.convert, effort_unit.convert)
    ax.plot(speed_shown, torque_shown, color=style.DEMAND, linewidth=1.8, label="duty cycle", zorder=3)
    _draw_points(ax, best, detail, speed_unit.convert, effort_unit.convert, units)
    _set_ranges(ax, quadrants)
    _draw_arrows(ax, speed_shown, torque_shown)
    ax.axhline(0.0, color=style.QUIET, linewidth=0.8)
    ax.axvline(0.0, color=style.QUIET, linewidth=0.8)
    ax.set_xlabel(f"motor speed [{speed_unit.label}], positive with +x")
    ax.set_ylabel(f"air-gap {units.effort_word} [{effort_unit.label}], positive drives +x")
    if not units.linear_motor:
        top = ax.secondary_xaxis(
            "top", functions=(_times(speed_unit.factor), _times(1.0 / speed_unit.factor))
        )
        top.set_xlabel("[rad/s]", fontsize=7.5, labelpad=2)
        top.tick_params(labelsize=7.5)
    handles, labels = ax.get_legend_handles_labels()
    figure.legend(
        handles, labels, loc="lower center", ncols=3, bbox_to_anchor=(0.5, 0.005), columnspacing=1.6
    )
    return figure


def _times(factor: float) -> Callable[[Any], Any]:
    return lambda values: values * factor


def _quadrants(speed: FloatArray, torque: FloatArray) -> tuple[tuple[int, ...], tuple[int, ...]]:
    """Signs of speed and torque that the cycle visits by more than a hair."""

    def signs(values: FloatArray) -> tuple[int, ...]:
        size = float(np.max(np.abs(values), initial=0.0))
        visited = [1] if values.max(initial=0.0) > 0.05 * size or size == 0.0 else []
        return tuple(visited + ([-1] if values.min(initial=0.0) < -0.05 * size else []))

    return signs(speed), signs(torque)


def _draw_limits(ax: Axes, detail: SetDetail, quadrants: Any, to_speed: Any, to_effort: Any) -> None:
    envelope = detail.envelope
    speed = to_speed(envelope["speed_rad_s"].to_numpy(float))
    first = True

    def once(label: str) -> str | None:
        return label if first else None

    for sign_w in quadrants[0]:
        for sign_t in quadrants[1]:
            continuous = to_effort(envelope["torque_continuous_nm"].to_numpy(float))
            ax.fill_between(
                sign_w * speed,
                0.0,
                sign_t * continuous,
                facecolor="#d3eee5",
                zorder=0.4,
                hatch="////",
                edgecolor=style.CONTINUOUS,
                linewidth=0.0,
                label=once("continuous region"),
            )
            for name, label, dash, width in _PEAK_CURVES:
                curve = _closed(speed, to_effort(envelope[name].to_numpy(float)))
                ax.plot(
                    sign_w * curve[0],
                    sign_t * curve[1],
                    color=style.PEAK_LIMIT,
                    linestyle=dash,
                    linewidth=width,
                    label=once(label),
                )
            first = False
        limit = detail.levels.get("speed_max_rad_s", np.nan)
        if np.isfinite(limit):
            ax.axvline(
                sign_w * to_speed(limit),
                color=style.INK,
                linestyle=(0, (6, 2, 1, 2)),
                linewidth=1.1,
                label="motor speed limit" if sign_w == quadrants[0][0] else None,
            )


def _closed(speed: FloatArray, torque: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Bring a limit that ends above zero down to the axis at the speed where it ends."""
    known = np.isfinite(torque)
    speed, torque = speed[known], torque[known]
    if torque.size and torque[-1] > 0.0:
        return np.append(speed, speed[-1]), np.append(torque, 0.0)
    return speed, torque


def _draw_points(
    ax: Axes, best: SetResult, detail: SetDetail, to_speed: Any, to_effort: Any, units: AxisUnits
) -> None:
    rms = best.quantities.get("torque_rms_nm"), best.quantities.get("speed_rms_rad_s")
    if None not in rms:
        ax.plot(
            to_speed(rms[1]),
            to_effort(rms[0]),
            linestyle="none",
            marker="^",
            markersize=8,
            markerfacecolor="white",
            markeredgecolor=style.INK,
            markeredgewidth=1.4,
            zorder=5,
            label=f"RMS {units.effort_word} at RMS speed",
        )
    point = governing_row(best, detail)
    if point is not None:
        time, segment, speed, torque = point
        ax.plot(
            to_speed(speed),
            to_effort(torque),
            linestyle="none",
            marker="D",
            markersize=7,
            markerfacecolor=style.PEAK_LIMIT,
            markeredgecolor=style.INK,
            markeredgewidth=1.0,
            zorder=6,
            label=f"governs: {style.shorten(segment, 18)}, {quantity(time, 's')}",
        )


def governing_row(best: SetResult, detail: SetDetail) -> tuple[float, str, float, float] | None:
    """Place the point that governs the speed–torque check: its time, segment, speed, torque.

    Time, segment and torque are those of the check; the cycle tells the speed at that time and the sign.
    """
    check = next((c for c in best.checks if c.check == "speed_torque"), None)
    if check is None or check.at_time_s is None or check.demand is None:
        return None
    cycle, at = detail.cycle, float(check.at_time_s)
    time, speed, torque = (
        cycle[name].to_numpy(float) for name in ("time_s", "motor_speed_rad_s", "motor_torque_nm")
    )
    rows = np.flatnonzero(np.abs(time - at) <= 1e-9 * max(float(time[-1]), 1e-12))
    if rows.size:  # at a jump, the one-sided value that the check took
        row = int(rows[int(np.argmin(np.abs(np.abs(torque[rows]) - check.demand)))])
        found, sign = float(speed[row]), float(torque[row])
    else:
        found, sign = float(np.interp(at, time, speed)), float(np.interp(at, time, torque))
    return at, str(check.segment or ""), found, math.copysign(check.demand, sign)


def _set_ranges(ax: Axes, quadrants: tuple[tuple[int, ...], tuple[int, ...]]) -> None:
    """Show the quadrants that the cycle visits, and a little of the others."""
    for get, put, signs in (
        (ax.get_xlim, ax.set_xlim, quadrants[0]),
        (ax.get_ylim, ax.set_ylim, quadrants[1]),
    ):
        low, high = get()
        size = 1.04 * max(abs(low), abs(high), 1e-12)
        put(-size if -1 in signs else -0.06 * size, size if 1 in signs else 0.06 * size)


def _draw_arrows(ax: Axes, x: FloatArray, y: FloatArray) -> None:
    """Mark the direction of the path at places evenly spread along it, as seen on the page."""
    width, height = np.ptp(ax.get_xlim()), np.ptp(ax.get_ylim())
    step = np.hypot(np.diff(x) / width, np.diff(y) / height)
    length = np.concatenate([[0.0], np.cumsum(step)])
    if length[-1] <= 0.0:
        return
    for place in (np.arange(_ARROWS) + 0.5) / _ARROWS * length[-1]:
        piece = int(np.clip(np.searchsorted(length, place) - 1, 0, len(step) - 1))
        if step[piece] <= 0.0:
            continue
        share = (place - length[piece]) / step[piece]
        dx, dy = x[piece + 1] - x[piece], y[piece + 1] - y[piece]
        tip = (x[piece] + share * dx, y[piece] + share * dy)
        back = 0.012 / step[piece]
        ax.annotate(
            "",
            xy=tip,
            xytext=(tip[0] - back * dx, tip[1] - back * dy),
            arrowprops={"arrowstyle": "-|>", "color": style.DEMAND, "mutation_scale": 11, "linewidth": 0},
            zorder=4,
        )
