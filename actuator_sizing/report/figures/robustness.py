"""How sure a set passes: probability of each check, swings of one input at a time, sensitivities."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.report.figures import style
from actuator_sizing.report.formatting import DisplayUnit, display_unit, number, percent

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.robustness.results import Robustness

#: Keys of the figures, as they are named in reports and files.
ROBUSTNESS_FIGURES = ("robust_probability", "robust_swings", "robust_sensitivity")
_MOST_CHECKS = 18  # rows that one page carries
_MOST_PANELS, _MOST_INPUTS = 3, 8
_ROW_IN = 0.22
_LETTERS = 34


def draw_robustness(study: Robustness) -> dict[str, Figure]:
    """Draw every figure that a study allows, by name.

    Parameters
    ----------
    study : Robustness
        The answer.
    """
    with style.house_style():
        figures = {"robust_probability": draw_probability(study)}
        swings, sensitivity = draw_swings(study), draw_sensitivity(study)
        if swings is not None:
            figures["robust_swings"] = swings
        if sensitivity is not None:
            figures["robust_sensitivity"] = sensitivity
        return figures


def draw_probability(study: Robustness) -> Figure:
    """Draw the probability of passing each check with its interval, all checks together on top.

    Parameters
    ----------
    study : Robustness
        The answer.
    """
    by_key = study.checks.set_index("check")
    keys = study.weakest_first[:_MOST_CHECKS]
    rows: list[tuple[str, Any, bool]] = [("all checks together", study.probability, False)]
    for key in keys:
        advice = bool(by_key["advice"][key])
        rows.append((by_key["title"][key] + (" (advice)" if advice else ""), by_key.loc[key], advice))
    figure, (ax,) = style.new_axes(
        1.15 + _ROW_IN * len(rows), left_in=2.45, right_in=1.45, bottom_in=0.75, top_in=0.2
    )
    lowest = min(float(row["probability_low"]) for _, row, advice in rows if not advice)
    for y, (_, row, advice) in enumerate(rows):
        low, p, high = (float(row[name]) for name in ("probability_low", "probability", "probability_high"))
        color = style.QUIET if advice else style.DEMAND
        ax.plot([low, high], [y, y], color=color, linewidth=2.4, solid_capstyle="butt")
        ax.plot([p], [y], marker="D" if y == 0 else "o", color=color, markersize=6.0 if y == 0 else 4.5)
        outside = "← " if advice and high < lowest else ""
        text = f"{outside}{percent(p, 1.0)} of {row['samples']}"
        ax.annotate(text, (1.0, y), xycoords=("axes fraction", "data"), xytext=(6, 0), textcoords="offset points",
                    va="center", fontsize=7.4, color=style.INK, annotation_clip=False)  # fmt: skip
    span = max(1.0 - lowest, 0.01)
    if study.wanted_probability == study.wanted_probability:
        ax.axvline(
            study.wanted_probability, color=style.PEAK_LIMIT, linestyle=style.LIMIT_DASH, linewidth=1.2
        )
        span = max(span, 1.3 * (1.0 - study.wanted_probability))
    ax.axhline(0.5, color=style.QUIET, linewidth=0.8)
    ax.set_ylim(len(rows) - 0.5, -0.5)
    ax.set_xlim(max(1.0 - 1.06 * span, -0.02), 1.0 + 0.03 * span)
    ax.set_yticks(range(len(rows)), [style.shorten(title, _LETTERS) for title, _, _ in rows])
    ax.grid(axis="y", visible=False)
    ax.xaxis.set_major_formatter(lambda value, _: f"{100.0 * value:.6g}")
    left_out = len(by_key) - len(keys)
    more = f"; {left_out} more checks in the tables" if left_out else ""
    dashed = "; dashed: what was asked for" if study.wanted_probability == study.wanted_probability else ""
    ax.set_xlabel(f"probability of passing [%], bars: 95 % interval (Wilson){dashed}{more}\n"
                  f"{style.shorten(study.label, 60)}, seed {study.seed}")  # fmt: skip
    return figure


def draw_swings(study: Robustness) -> Figure | None:
    """Draw utilisation with one input at a time at its low and high value; None where nothing moves.

    Parameters
    ----------
    study : Robustness
        The answer.
    """
    keys = study.weakest_that_move[:_MOST_PANELS]
    if not keys:
        return None
    panels = [_ordered_swings(study.swings[study.swings["check"] == key]) for key in keys]
    figure, axes = _panels([len(panel) for panel in panels], top_in=0.42)
    for ax, key, panel in zip(axes, keys, panels, strict=True):
        nominal = float(panel["utilisation_nominal"].iloc[0])
        allowed = float(study.checks.set_index("check")["allowed_utilisation"][key])
        most = max(2.0 * allowed, nominal)
        for y, swing in enumerate(panel.itertuples()):
            ends = (float(swing.utilisation_low), float(swing.utilisation_high))
            unit = display_unit(swing.unit, (swing.low, swing.high))
            for end, value, color, hatch, name in (
                (ends[0], swing.low, style.SECOND, "", "input low"),
                (ends[1], swing.high, style.THIRD, "////", "input high"),
            ):
                reach = min(end, most) - nominal
                ax.barh(y, reach, left=nominal, height=0.62, color=color, hatch=hatch, edgecolor="white",
                        linewidth=0.0, label=name if y == 0 and ax is axes[0] else None)  # fmt: skip
                to_left = end < nominal or (end == nominal and value == swing.low)
                _name_end(ax, min(end, most), y, _with_unit(value, unit, end > most), to_left)
        ax.axvline(nominal, color=style.INK, linewidth=1.0)
        if allowed < ax.get_xlim()[1] + 2.0 * np.ptp(ax.get_xlim()):
            ax.axvline(allowed, color=style.PEAK_LIMIT, linestyle=style.LIMIT_DASH, linewidth=1.3,
                       label="allowed" if ax is axes[0] else None)  # fmt: skip
        _finish(ax, [str(name) for name in panel["input"]], study.title_of(key))
        low, high = ax.get_xlim()
        ax.set_xlim(low - 0.22 * (high - low), high + 0.18 * (high - low))
        ax.xaxis.set_major_formatter(lambda value, _: f"{100.0 * value:.4g}")
    axes[-1].set_xlabel("utilisation [%], all other inputs at their values (vertical line)")
    style.legend_above(axes[0], columns=3, bbox_to_anchor=(0.0, 1.0 + 0.25 / style_height_in(axes[0])))
    return figure


def draw_sensitivity(study: Robustness) -> Figure | None:
    """Draw first-order and total indices of the weakest checks; None where there are none.

    Parameters
    ----------
    study : Robustness
        The answer.
    """
    known = set(study.sensitivity["check"]) if len(study.sensitivity) else set()
    keys = [key for key in study.weakest_that_move if key in known][:_MOST_PANELS]
    if not keys:
        return None
    panels = [
        study.sensitivity[study.sensitivity["check"] == key].nlargest(_MOST_INPUTS, "total", keep="first")
        for key in keys
    ]
    figure, axes = _panels([len(panel) for panel in panels], top_in=0.42)
    error = {"ecolor": style.INK, "elinewidth": 0.9, "capsize": 2.0}
    for ax, key, panel in zip(axes, keys, panels, strict=True):
        y = np.arange(len(panel))
        first = ax is axes[0]
        ax.barh(y - 0.19, panel["first"], height=0.34, color=style.DEMAND, xerr=panel["first_error"], error_kw=error,
                label="first order: alone" if first else None)  # fmt: skip
        ax.barh(y + 0.19, panel["total"], height=0.34, color=style.SECOND, hatch="////", edgecolor="white",
                linewidth=0.0, xerr=panel["total_error"], error_kw=error,
                label="total: with interactions" if first else None)  # fmt: skip
        _finish(ax, [str(name) for name in panel["inputs"]], study.title_of(key))
        ax.set_xlim(min(0.0, 1.1 * float(panel["first"].min())), 1.05)
    axes[-1].set_xlabel("share of the variance of the utilisation [-], whiskers: standard error")
    style.legend_above(axes[0], columns=2, bbox_to_anchor=(0.0, 1.0 + 0.25 / style_height_in(axes[0])))
    return figure


def _with_unit(value: float, unit: DisplayUnit, beyond: bool) -> str:
    """Value of an input in a unit of the trade; with an arrow where its bar leaves the panel."""
    return f"{number(unit.convert(value), 3)} {unit.label}".rstrip() + (" →" if beyond else "")


def _name_end(ax: Axes, x: float, y: float, text: str, to_left: bool) -> None:
    """Write the value of an input beside the end of its bar."""
    ax.annotate(
        text, (x, y), xytext=(-3 if to_left else 3, 0), textcoords="offset points", va="center", fontsize=6.6,
        ha="right" if to_left else "left", color=style.INK,
        bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6},
    )  # fmt: skip


def _ordered_swings(panel: pd.DataFrame) -> pd.DataFrame:
    """The widest swings, widest first; inputs that do nothing are left out."""
    width = (panel["utilisation_high"] - panel["utilisation_low"]).abs().fillna(np.inf)
    kept = panel[width > 0.0]
    order = width[width > 0.0].sort_values(ascending=False, kind="stable").index
    return kept.loc[order].head(_MOST_INPUTS)


def _panels(counts: list[int], top_in: float) -> tuple[Figure, list[Axes]]:
    """Panels above one another, each as high as its rows, with room for a title."""
    title_in = 0.28
    heights = [_ROW_IN * 1.15 * count + 0.12 for count in counts]
    total = top_in + 0.6 + sum(heights) + title_in * len(counts) + 0.22 * (len(counts) - 1)
    figure, first = style.new_axes(total, left_in=2.45, right_in=0.35)
    first[0].remove()
    axes, y = [], total - top_in
    for height in heights:
        y -= title_in + height
        place = (2.45 / style.WIDTH_IN, y / total, (style.WIDTH_IN - 2.8) / style.WIDTH_IN, height / total)
        axes.append(figure.add_axes(place))
        y -= 0.22
    return figure, axes


def style_height_in(ax: Axes) -> float:
    """Height of a panel on paper. [in]"""
    return style.panel_size_pt(ax)[1] / 72.0


def _finish(ax: Axes, names: list[str], title: str) -> None:
    ax.set_yticks(range(len(names)), [style.shorten(name, _LETTERS) for name in names])
    ax.set_ylim(len(names) - 0.45, -0.55)
    ax.grid(axis="y", visible=False)
    ax.set_title(style.shorten(title, 60), loc="left", fontsize=8.6, color=style.INK, pad=3.0)
