"""Passing sets by price, mass, energy and reserve; those that no other one beats stand out."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.figures import style
from actuator_sizing.report.formatting import DisplayUnit, display_unit

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.trade_offs import TradeOff, TradeOffs

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
    for number, (x, y) in enumerate(best[:_MOST_NUMBERED], start=1):
        ax.annotate(str(number), (x, y), xytext=(4, 4), textcoords="offset points", fontsize=6.8, zorder=4)
    ax.margins(0.09)
    across, up = (
        f"{_WORDS[name]} [{unit.label}]" if unit.label else _WORDS[name]
        for name, unit in zip(names, units, strict=True)
    )
    ax.set_xlabel(across)
    ax.set_ylabel(up)
