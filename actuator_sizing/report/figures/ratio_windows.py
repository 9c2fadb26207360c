"""One row per motor: the ratios that keep its limits, the best one, and those of the catalog among them."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from actuator_sizing.report.figures import style
from actuator_sizing.report.text import check_name

if TYPE_CHECKING:
    from collections.abc import Sequence

    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.ratio_results import MotorWindow, RatioWindows

#: Rows that one page carries.
MOST_ROWS = 20
_ROW_IN = 0.24
_MARGIN = 1.6  # of the ratios, beyond the outermost mark
_LABEL_LETTERS, _BOUND_LETTERS = 24, 34


def draw_ratio_windows(windows: RatioWindows, leading: Sequence[int] = ()) -> Figure | None:
    """Draw the windows of the motors that matter; None where no motor has one.

    Parameters
    ----------
    windows : RatioWindows
        Of every motor.
    leading : sequence of int
        Motors to show first, by index into the catalog.
    """
    rows = shown_rows(windows, leading)
    if not any(row.intervals for row in rows):
        return None
    low, high = _reach(windows, rows)
    figure, (ax,) = style.new_axes(
        1.3 + _ROW_IN * len(rows), left_in=1.75, right_in=2.0, bottom_in=0.5, top_in=0.6
    )
    for ratio in windows.catalog_ratios:
        if low <= ratio <= high:
            ax.axvline(ratio, color=style.GRID, linewidth=0.7, zorder=0)
    for y, row in enumerate(rows):
        _draw_row(ax, y, row, low, high)
    ax.set_xscale("log")
    ax.set_xlim(low, high)
    ax.set_ylim(len(rows) - 0.5, -0.5)
    ax.grid(False)
    ax.set_yticks(range(len(rows)), [style.shorten(row.motor, _LABEL_LETTERS) for row in rows])
    ax.tick_params(axis="y", length=0)
    ax.tick_params(axis="both", labelsize=7.2)
    ax.set_xlabel("ratio, motor turns per turn of the driven shaft [-]")
    _number_decades(ax, low, high)
    _draw_key(ax)
    return figure


def shown_rows(windows: RatioWindows, leading: Sequence[int]) -> list[MotorWindow]:
    """The motors of one page: those of the leading sets, then those with most catalog ratios."""
    places = {index: place for place, index in enumerate(dict.fromkeys(leading))}

    def order(window: MotorWindow) -> tuple[int, bool, int, int]:
        place = places.get(window.motor_index, len(places))
        return place, not window.intervals, -len(window.catalog), window.motor_index

    return sorted(windows.motors, key=order)[:MOST_ROWS]


def _reach(windows: RatioWindows, rows: Sequence[MotorWindow]) -> tuple[float, float]:
    """Ends of the axis: every window that has an end, the catalog ratios in them, and the best ratios."""
    ends = [value for row in rows for part in row.intervals for value, check in
            ((part.low, part.low_check), (part.high, part.high_check)) if check]  # fmt: skip
    ends += [c.ratio for row in rows for c in row.catalog]
    ends += [row.best_ratio for row in rows if 0.0 < row.best_ratio < math.inf]
    if not ends:
        ends = list(windows.catalog_ratios) or [1.0]
    return min(ends) / _MARGIN, max(ends) * _MARGIN


def _draw_row(ax: Axes, y: int, row: MotorWindow, low: float, high: float) -> None:
    for part in row.intervals:
        left, right = max(part.low, low), min(part.high, high)
        ax.barh(
            y, right - left, left=left, height=0.5, color=style.SECOND, edgecolor=style.DEMAND, linewidth=0.8
        )
    for mark in {c.ratio for c in row.catalog}:
        ax.plot([mark, mark], [y - 0.36, y + 0.36], color=style.INK, linewidth=1.8, solid_capstyle="butt")
    if low <= row.best_ratio <= high:
        ax.plot(
            [row.best_ratio], [y], marker="D", markersize=4.2, color=style.PEAK_LIMIT, markeredgecolor="white"
        )
    ax.annotate(
        style.shorten(_bounds(row), _BOUND_LETTERS), (1.0, y), xycoords=("axes fraction", "data"), xytext=(5, 0),
        textcoords="offset points", va="center", fontsize=6.6,
        color=style.INK if row.intervals else style.QUIET, annotation_clip=False,
    )  # fmt: skip


def _bounds(row: MotorWindow) -> str:
    """What bounds a row at its two ends, for the margin."""
    if row.missing:
        return "not known: data missing"
    if not row.intervals:
        return "no ratio"
    first, last = row.intervals[0], row.intervals[-1]
    text = f"{_end(first.low_check)} | {_end(last.high_check)}"
    return text if len(row.intervals) == 1 else f"{len(row.intervals)} windows: {text}"


def _end(check: str) -> str:
    short = {"speed_torque": "torque over speed", "motor_peak_current": "peak current", "motor_speed": "speed",
             "rms_current": "RMS current"}  # fmt: skip
    return short.get(check, check_name(check)) if check else "no limit"


def _number_decades(ax: Axes, low: float, high: float) -> None:
    from matplotlib.ticker import FixedLocator, FuncFormatter, NullFormatter

    steps = (1.0, 2.0, 5.0) if high / low < 300.0 else (1.0,)
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    ax.xaxis.set_major_locator(FixedLocator([step * 10.0**d for d in decades for step in steps]))
    ax.xaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
    ax.xaxis.set_minor_formatter(NullFormatter())


def _draw_key(ax: Axes) -> None:
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    handles = [
        Patch(facecolor=style.SECOND, edgecolor=style.DEMAND, label="every limit kept"),
        Line2D([], [], color=style.INK, marker="|", markersize=8, markeredgewidth=1.8, linestyle="none",
               label="catalog ratio that fits"),
        Line2D([], [], color=style.GRID, linewidth=1.2, label="catalog ratio"),
        Line2D([], [], color=style.PEAK_LIMIT, marker="D", markersize=4.2, linestyle="none",
               label="least RMS torque"),
    ]  # fmt: skip
    style.legend_above(ax, handles=handles, fontsize=7.4, loc="upper left", bbox_to_anchor=(0.0, 1.0),
                       bbox_transform=ax.figure.transFigure)  # fmt: skip
    ax.annotate("bounded by: below | above", (1.0, 1.0), xycoords="axes fraction", xytext=(5, 4),
                textcoords="offset points", fontsize=6.8, color=style.QUIET, annotation_clip=False)  # fmt: skip
