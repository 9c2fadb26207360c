"""Payload against cycle time: the region in which a set passes, each stretch of its edge named by its check."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from actuator_sizing.report.figures import style
from actuator_sizing.report.formatting import DisplayUnit, display_unit, number
from actuator_sizing.report.text import check_name, in_sentence

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.headroom import PayloadMap

_COLORS = (style.PEAK_LIMIT, style.DEMAND, style.THIRD, style.FOURTH, style.CONTINUOUS, style.INK)
_MARKERS = ("o", "s", "^", "D", "v", "X")
_ROOM = 1.35  # of the times that matter


def draw_payload_map(drawn: PayloadMap, unit: DisplayUnit | None = None) -> Figure | None:
    """Draw the map of one set; None where it passes nowhere.

    Parameters
    ----------
    drawn : PayloadMap
        The map.
    unit : DisplayUnit, optional
        Of the payload; by default the usual one for its size.
    """
    rows = [row for row in drawn.rows if row.shortest_s is not None]
    if not rows:
        return None
    unit = unit or display_unit(drawn.payload_unit, (max(row.payload for row in drawn.rows),))
    payload = np.array([unit.convert(row.payload) for row in rows])
    shortest = np.array([row.shortest_s for row in rows], dtype=float)
    longest = np.array([drawn.slowest_s if row.longest_s is None else row.longest_s for row in rows])
    latest = min(
        drawn.slowest_s, _ROOM * max(drawn.present_s, float(np.median(shortest)) * 1.5, shortest[-1])
    )
    figure, (ax,) = style.new_axes(3.6, left_in=0.75, right_in=2.05, bottom_in=0.5, top_in=0.25)
    ax.fill_betweenx(
        payload, shortest, np.minimum(longest, latest), facecolor="#e3f1ea", edgecolor=style.CONTINUOUS,
        hatch="..", linewidth=0.0,
    )  # fmt: skip
    names: dict[str, int] = {}
    edges = [(shortest, [row.shortest_by for row in rows])]
    if any(row.longest_s is not None for row in rows):
        edges.append((np.where(longest < drawn.slowest_s, longest, np.nan), [row.longest_by for row in rows]))
    for time, checks in edges:
        ax.plot(time, payload, color=style.QUIET, linewidth=1.0, zorder=2)
        for t, p, check in zip(time, payload, checks, strict=True):
            if check and np.isfinite(t):
                place = names.setdefault(check, len(names)) % len(_COLORS)
                ax.plot([t], [p], marker=_MARKERS[place], markersize=4.6, color=_COLORS[place], zorder=3,
                        clip_on=t > latest)  # fmt: skip
    _draw_present(ax, drawn, float(unit.convert(drawn.present_payload)))
    ax.set_xlim(max(0.0, 0.75 * float(np.nanmin(shortest))), latest)
    highest = float(unit.convert(drawn.rows[-1].payload))
    ax.set_ylim(0.0, 1.04 * highest)  # a mark on the last row is whole
    _draw_last_step(ax, float(payload[-1]), highest, unit.label)
    ax.set_xlabel("cycle time [s]")
    ax.set_ylabel(f"heaviest payload [{unit.label}]")
    _draw_key(ax, names)
    return figure


def _draw_last_step(ax: Axes, last: float, highest: float, unit: str) -> None:
    """Say that the flat top is the last payload of the grid that passes, and not a limit."""
    ax.axhline(last, color=style.QUIET, linestyle=style.QUIET_DASH, linewidth=1.0, zorder=2)
    tried = "heaviest that was tried" if last == highest else "last step that passes"
    words = f"{tried}, {number(last, 4)} {unit}"
    ax.annotate(words, (1.0, last), xycoords=("axes fraction", "data"), xytext=(-4, -3),
                textcoords="offset points", ha="right", va="top", fontsize=7.0, color=style.QUIET,
                bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6}, zorder=5)  # fmt: skip


def _draw_present(ax: Axes, drawn: PayloadMap, payload: float) -> None:
    ax.plot(
        [drawn.present_s],
        [payload],
        marker="*",
        markersize=11,
        color=style.INK,
        markeredgecolor="white",
        zorder=4,
    )
    ax.annotate("as stated", (drawn.present_s, payload), xytext=(7, 6), textcoords="offset points", fontsize=7.6,
                zorder=5)  # fmt: skip


def _draw_key(ax: Axes, names: dict[str, int]) -> None:
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    from actuator_sizing.sizing.checks import CHECKS

    titles = {check.key: in_sentence(check.title) for check in CHECKS}

    handles: list[Patch | Line2D] = [
        Patch(
            facecolor="#e3f1ea",
            edgecolor=style.CONTINUOUS,
            hatch="..",
            linewidth=0.0,
            label="every check met",
        )
    ]
    handles.append(Line2D([], [], linestyle="none", label="bounded by"))
    handles += [
        Line2D([], [], color=_COLORS[k % len(_COLORS)], marker=_MARKERS[k % len(_MARKERS)], markersize=4.6,
               linestyle="none", label=style.shorten(titles.get(name, check_name(name)), 26))
        for name, k in names.items()
    ]  # fmt: skip
    ax.legend(handles=handles, loc="upper left", bbox_to_anchor=(1.01, 1.0), borderaxespad=0.0, fontsize=7.4,
              handlelength=1.6)  # fmt: skip
