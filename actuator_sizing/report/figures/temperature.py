"""Winding and housing temperature from cold to the periodic state, and over the last cycle."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.report.figures import style
from actuator_sizing.report.formatting import DisplayUnit, display_unit, number

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import SetDetail

HOUSING_DASH = (0, (6, 2))


def draw_temperature(detail: SetDetail) -> Figure | None:
    """Draw the way from cold to the periodic state and, beside it, the last cycle; None without data.

    Parameters
    ----------
    detail : SetDetail
        Curves and levels of the set.
    """
    if detail.warm_up is None:
        return None
    periodic = detail.periodic_temperature
    columns = (1.0,) if periodic is None else (2.2, 1.0)
    figure, axes = style.new_axes(
        3.5, columns=columns, top_in=0.52, right_in=1.45, column_gap_in=0.2, share_x=False
    )
    _draw_bodies(axes[0], detail.warm_up)
    style.legend_above(axes[0], columns=3)
    axes[0].set_ylabel("temperature [°C]")
    if periodic is not None:
        _draw_bodies(axes[1], periodic)
        axes[1].tick_params(labelleft=False)
        axes[1].set_xlabel(axes[1].get_xlabel().replace("time", "last cycle"))
    elif "winding_low_degc" in detail.warm_up:
        axes[0].set_xlabel(f"{axes[0].get_xlabel()}; no equilibrium, the curve ends past the limit")
    else:
        axes[0].set_xlabel(f"{axes[0].get_xlabel().replace('time', 'time from the start of the run')}")
    _share_temperatures(axes, detail)
    return figure


def _draw_bodies(ax: Axes, table: pd.DataFrame) -> None:
    time = table["time_s"].to_numpy(float)
    unit = _time_unit(time)
    shown = unit.convert(time)
    if "winding_low_degc" in table:
        ax.fill_between(
            shown,
            table["winding_low_degc"].to_numpy(float),
            table["winding_high_degc"].to_numpy(float),
            facecolor=style.PEAK_LIMIT,
            alpha=0.25,
            linewidth=0.0,
            label="ripple within a cycle",
        )
    ax.plot(shown, table["winding_degc"], color=style.PEAK_LIMIT, label="winding")
    if np.isfinite(table["housing_degc"].to_numpy(float)).any():
        ax.plot(shown, table["housing_degc"], color=style.DEMAND, linestyle=HOUSING_DASH, label="housing")
    ax.set_xlabel(f"{'time from cold' if 'winding_low_degc' in table else 'time'} [{unit.label}]")


def _time_unit(time: Any) -> DisplayUnit:
    longest = float(time[-1])
    return DisplayUnit("h", 3600.0) if longest > 4.0 * 3600.0 else display_unit("s", (longest,))


def _share_temperatures(axes: list[Axes], detail: SetDetail) -> None:
    """Give both panels one scale from ambient to above the limit, with the lines named at the right."""
    levels = [
        style.Level(value, f"{name} {number(value, 4)} °C", color, dash)
        for name, key, color, dash in (
            ("winding limit", "winding_limit_degc", style.INK, style.LIMIT_DASH),
            ("ambient", "ambient_degc", style.QUIET, style.QUIET_DASH),
        )
        for value in (float(detail.levels.get(key, np.nan)),)
    ]
    low = min(ax.get_ylim()[0] for ax in axes)
    high = max(ax.get_ylim()[1] for ax in axes)
    for ax in axes:
        ax.set_ylim(low, high)
    style.draw_levels(axes[-1], levels, reach=8.0)
    for ax in axes[:-1]:
        ax.set_ylim(axes[-1].get_ylim())
        for level in levels:
            if level.value == level.value:
                ax.axhline(level.value, color=level.color, linestyle=level.dash, linewidth=1.2, zorder=1.5)
