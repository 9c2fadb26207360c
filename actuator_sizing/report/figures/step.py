"""Current and speed of motor and load after a step of voltage."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.figures import style
from actuator_sizing.report.figures.units import AxisUnits, current_label
from actuator_sizing.report.formatting import display_unit, number

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import SetDetail, SetResult


def draw_step_response(best: SetResult, detail: SetDetail, units: AxisUnits) -> Figure | None:
    """Draw current and speed after a voltage step to the unloaded axis at rest; None without data.

    Parameters
    ----------
    best : SetResult
        Set with its quantities.
    detail : SetDetail
        Curves of the set.
    units : AxisUnits
        Units and words to draw in.
    """
    table = detail.step_response
    if table is None or table.empty:
        return None
    time = table["time_s"].to_numpy(float)
    unit, speed_unit = display_unit("s", (float(time[-1]),)), units.motor_speed()
    figure, (top, bottom) = style.new_axes(3.6, rows=2, left_in=0.95, top_in=0.15)
    top.plot(unit.convert(time), table["current_a"], color=style.DEMAND)
    top.margins(y=0.12)
    peak = table["current_a"].max()
    style.draw_levels(
        top, [style.Level(float(peak), f"peak {number(float(peak), 3)} A", style.QUIET, style.QUIET_DASH)]
    )
    top.set_ylabel(current_label(best.quantities.get("current_basis")).replace(" [", "\n["))
    speed = speed_unit.convert(table["speed_rad_s"].to_numpy(float))
    bottom.plot(unit.convert(time), speed, color=style.DEMAND)
    bottom.margins(y=0.12)
    final = best.quantities.get("step_final_speed_rad_s")
    shown = float(speed_unit.convert(final)) if final is not None else float("nan")
    text = f"final {number(shown, 4)} {speed_unit.label}"
    style.draw_levels(bottom, [style.Level(shown, text, style.QUIET, style.QUIET_DASH)])
    bottom.set_ylabel(f"motor speed\n[{speed_unit.label}]")
    bottom.set_xlabel(f"time after the step [{unit.label}], positive along +x")
    style.align_labels([top, bottom])
    return figure
