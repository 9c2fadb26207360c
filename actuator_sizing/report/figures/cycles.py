"""Several cycles of one case under one another."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.curves import leading_detail
from actuator_sizing.report.figures import style
from actuator_sizing.report.figures.over_time import draw_over_cycle
from actuator_sizing.report.figures.units import AxisUnits

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import Comparison

_MOST = 8  # panels: a page holds no more


def draw_cycles(comparison: Comparison) -> Figure | None:
    """Draw the motor torque of the leading set over one run of each cycle; None where there is one.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    """
    shown = [(each, leading_detail(each)) for each in comparison.by_cycle()[:_MOST]]
    drawn = [(each.case.cycle.name, detail.cycle) for each, detail in shown if detail is not None]
    if len(drawn) < 2:
        return None
    units = AxisUnits.of(comparison.case)
    unit = units.effort([value for _, cycle in drawn for value in cycle["motor_torque_nm"]])
    figure, axes = style.new_axes(
        0.9 + 1.5 * len(drawn), rows=len(drawn), gap_in=0.62, top_in=0.35, right_in=0.25, share_x=False
    )
    for ax, (name, cycle) in zip(axes, drawn, strict=True):
        time = draw_over_cycle(ax, cycle, unit.convert(cycle["motor_torque_nm"].to_numpy(float)))
        ax.set_ylabel(f"{style.shorten(name, 18)}\n{units.effort_word} [{unit.label}]")
        ax.set_xlabel(
            f"time [{time.label}]" if ax is not axes[-1] else f"time [{time.label}], positive drives +x"
        )
    low, high = min(ax.get_ylim()[0] for ax in axes), max(ax.get_ylim()[1] for ax in axes)
    for ax in axes:
        ax.set_ylim(low, high)
    style.align_labels(axes)
    return figure
