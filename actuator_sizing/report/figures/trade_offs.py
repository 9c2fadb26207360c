"""Passing sets by price, mass, energy and reserve; those that no other one beats stand out."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.figures import style
from actuator_sizing.report.formatting import DisplayUnit, display_unit

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.trade_offs import TradeOff, TradeOffs

_LABEL_PT = 6.8
_MOST_NUMBERED = 12  # labels that do not yet hide one another
_MOST_DRAWN = 2_000  # beaten sets; more are a blot
_UNITS = {"mass": DisplayUnit("kg"), "reserve": DisplayUnit("%", 0.01)}
_WORDS = {"price": "price", "mass": "mass", "energy": "energy per cycle", "reserve": "smallest reserve"}


def draw_trade_offs(found: TradeOffs, currency: str = "") -> Figure | None:
    """Draw each criterion against the first; None where fewer than two sets or criteria are known.

    Parameters
    ----------
    found : TradeOffs
        The passing sets.
    currency : str
        In which the catalogs state prices; empty where they do not say.
    """
    compared = [one for one in found.sets if one.is_compared]
    if len(compared) < 2 or len(found.criteria) < 2:
        return None
    first, *others = found.criteria
    figure, axes = style.new_axes(
        2.55, columns=(1.0,) * len(others), left_in=0.72, right_in=0.15, bottom_in=0.5, top_in=0.4,
        column_gap_in=0.68, share_x=False,
    )  # fmt: skip
    for ax, other in zip(axes, others, strict=True):
        _draw_panel(ax, found.front, compared, (first, other), currency)
    front, beaten = axes[0].get_legend_handles_labels()
    axes[0].legend(front, beaten, loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, borderaxespad=0.2,
                   handletextpad=0.4, columnspacing=1.4)  # fmt: skip
    return figure


def _draw_panel(
    ax: Axes, front: tuple[TradeOff, ...], compared: list[TradeOff], names: tuple[str, str], currency: str
) -> None:
    known = {**_UNITS, "price": DisplayUnit(style.shorten(currency, 8))}
    known["energy"] = display_unit("J", [one.values.get("energy") for one in compared])
    units = [known[name] for name in names]

    def at(one: TradeOff) -> tuple[float, float]:
        return tuple(float(u.convert(one.values[n])) for u, n in zip(units, names, strict=True))  # type: ignore[return-value]

    beaten = [at(one) for one in compared if not one.on_front][:_MOST_DRAWN]
    best = [at(one) for one in front]
    ax.plot(*zip(*best, strict=True), linestyle="none", marker="o", markersize=6.5, color=style.DEMAND,
            markeredgecolor="white", zorder=3, label=f"no set is better in everything ({len(front)})")  # fmt: skip
    if beaten:
        ax.plot(*zip(*beaten, strict=True), linestyle="none", marker="o", markersize=3.4, markerfacecolor="white",
                markeredgecolor=style.QUIET, markeredgewidth=0.7, zorder=2, label="beaten")  # fmt: skip
    ax.margins(0.09)
    _number_points(ax, best[:_MOST_NUMBERED])
    across, up = (
        f"{_WORDS[name]} [{unit.label}]" if unit.label else _WORDS[name]
        for name, unit in zip(names, units, strict=True)
    )
    ax.set_xlabel(across)
    ax.set_ylabel(up)


def _number_points(ax: Axes, points: list[tuple[float, float]]) -> None:
    """Number the points in their order; those too close for a number each share a label."""
    ax.autoscale_view()  # the limits decide where the labels are
    to_pt = 72.0 / ax.figure.dpi
    groups: list[tuple[list[int], float, float]] = []  # numbers, and where their label begins [pt]
    for number, point in enumerate(points, start=1):
        x, y = (float(value) * to_pt for value in ax.transData.transform(point))
        mine: tuple[list[int], float, float] = ([number], x, y)
        while True:
            near = next((group for group in groups if _collide(group, mine)), None)
            if near is None:
                break
            groups.remove(near)
            mine = (sorted(near[0] + mine[0]), max(near[1], mine[1]), max(near[2], mine[2]))
        groups.append(mine)
    for numbers, x, y in groups:
        place = tuple(ax.transData.inverted().transform((x / to_pt, y / to_pt)).tolist())
        ax.annotate(
            _span(numbers), place, xytext=(4, 3), textcoords="offset points", fontsize=_LABEL_PT, zorder=4
        )


def _collide(one: tuple[list[int], float, float], other: tuple[list[int], float, float]) -> bool:
    """Whether two labels would touch."""
    first, second = (one, other) if one[1] <= other[1] else (other, one)
    return (
        second[1] - first[1] < 0.66 * _LABEL_PT * len(_span(first[0])) + 2.0
        and abs(first[2] - second[2]) < 1.35 * _LABEL_PT
    )


def _span(numbers: list[int]) -> str:
    """Numbers as short as can be.

    Examples
    --------
    >>> _span([3]), _span([3, 4]), _span([5, 6, 7]), _span([1, 3, 4, 5])
    ('3', '3, 4', '5–7', '1, 3–5')
    """
    runs: list[list[int]] = []
    for number in numbers:
        if runs and number == runs[-1][-1] + 1:
            runs[-1].append(number)
        else:
            runs.append([number])
    parts = [f"{run[0]}–{run[-1]}" if len(run) > 2 else ", ".join(map(str, run)) for run in runs]
    return ", ".join(parts)
