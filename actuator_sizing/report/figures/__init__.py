"""Figures of the report, one file per family; each function takes results and gives a matplotlib figure."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING

from actuator_sizing.report.curves import leading_detail
from actuator_sizing.report.figures.cycles import draw_cycles
from actuator_sizing.report.figures.dynamics import (
    draw_bode,
    draw_following_error,
    draw_loop_steps,
    draw_response,
)
from actuator_sizing.report.figures.over_time import draw_causes, draw_current, draw_motion
from actuator_sizing.report.figures.payload_map import draw_payload_map
from actuator_sizing.report.figures.power import draw_bus, draw_energy_flow
from actuator_sizing.report.figures.ratio_windows import draw_ratio_windows
from actuator_sizing.report.figures.robustness import (
    ROBUSTNESS_FIGURES,
    draw_probability,
    draw_sensitivity,
    draw_swings,
)
from actuator_sizing.report.figures.speed_torque import draw_speed_torque
from actuator_sizing.report.figures.step import draw_step_response
from actuator_sizing.report.figures.stopping import draw_stops
from actuator_sizing.report.figures.style import house_style, to_svg
from actuator_sizing.report.figures.temperature import draw_temperature
from actuator_sizing.report.figures.trade_offs import draw_trade_offs
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.report.figures.utilisation import draw_utilisation
from actuator_sizing.report.headroom_text import payload_unit

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import Comparison, SetDetail

__all__ = ["FIGURES", "OPTIONAL_FIGURES", "DrawnFigure", "draw", "draw_figures", "house_style", "to_svg"]

#: Keys of all figures, which name their files.
FIGURES = (
    "utilisation",
    "speed_torque",
    "motion",
    "torque_by_cause",
    "current",
    "temperature",
    "bus",
    "energy_flow",
    "step_response",
)
#: Keys of figures that only some cases ask for, or an option of the comparison.
OPTIONAL_FIGURES = (
    "cycles",
    "stops",
    "trade_offs",
    "ratio_windows",
    "payload_map",
    "cycle_response",
    "following_error",
    "loop_steps",
    "bode",
    *ROBUSTNESS_FIGURES,
)


@dataclass(frozen=True)
class DrawnFigure:
    """One figure as vector graphics.

    Attributes
    ----------
    key : str
        Name of the file and prefix of every id inside.
    svg : bytes
        The drawing.
    """

    key: str
    svg: bytes


def draw_figures(comparison: Comparison) -> dict[str, DrawnFigure]:
    """Draw every figure that the results allow, keyed by name, in the order of the report.

    Parameters
    ----------
    comparison : Comparison
        The answer; the figures show its best set.
    """
    drawn: dict[str, DrawnFigure] = {}
    with house_style():
        for key, draw in _figures_of(comparison).items():
            figure = draw()
            if figure is not None:
                drawn[key] = DrawnFigure(key, to_svg(figure, key))
    return drawn


def draw(comparison: Comparison, key: str) -> Figure | None:
    """Draw one figure for a notebook; None where the results lack what it shows.

    Parameters
    ----------
    comparison : Comparison
        The answer; the figure shows its best set.
    key : str
        One of `FIGURES` or `OPTIONAL_FIGURES`.

    Raises
    ------
    ValueError
        If there is no figure of that name.
    """
    known = (*FIGURES, *OPTIONAL_FIGURES)
    if key not in known:
        raise ValueError(f"No figure {key!r}; there are {', '.join(known)}.")
    with house_style():
        make = _figures_of(comparison).get(key)
        return None if make is None else make()


def _figures_of(comparison: Comparison) -> dict[str, Callable[[], Figure | None]]:
    figures: dict[str, Callable[[], Figure | None]] = {
        "utilisation": lambda: draw_utilisation(comparison.sets),
        **_decision_figures(comparison),
    }
    if comparison.cycles:
        several = comparison
        figures["cycles"] = lambda: draw_cycles(several)
    comparison = comparison.governing
    best = comparison.sets[0] if comparison.sets else None
    detail = leading_detail(comparison)
    if best is None or detail is None:
        return figures
    units = AxisUnits.of(comparison.case)
    return {
        "speed_torque": lambda: draw_speed_torque(best, detail, units),
        "motion": lambda: draw_motion(detail.cycle, units),
        "torque_by_cause": lambda: draw_causes(detail, units),
        "current": lambda: draw_current(best, detail),
        "temperature": lambda: draw_temperature(detail),
        "bus": lambda: draw_bus(detail),
        "energy_flow": lambda: draw_energy_flow(best),
        "step_response": lambda: draw_step_response(best, detail, units),
        **_stop_figures(comparison, detail, units),
        **_dynamic_figures(comparison),
        **_robustness_figures(comparison),
    } | figures


def _decision_figures(comparison: Comparison) -> dict[str, Callable[[], Figure | None]]:
    """What was asked for beyond pass and fail."""
    figures: dict[str, Callable[[], Figure | None]] = {}
    windows, headroom, found = comparison.windows, comparison.headroom, comparison.trade_offs
    if windows is not None:
        leading = [item.motor_index for item in comparison.sets]
        figures["ratio_windows"] = lambda: draw_ratio_windows(windows, leading)
    if headroom is not None and headroom.map is not None:
        drawn = headroom.map
        figures["payload_map"] = lambda: draw_payload_map(drawn, payload_unit(comparison.case, drawn))
    if found is not None:
        currency = comparison.case.motors.entered_units.get("price", "")
        figures["trade_offs"] = lambda: draw_trade_offs(found, currency)
    return figures


def _stop_figures(
    comparison: Comparison, detail: SetDetail, units: AxisUnits
) -> dict[str, Callable[[], Figure | None]]:
    """How the leading set stops, where the case asks for it."""
    stops = detail.stops
    if stops is None:
        return {}
    value = comparison.case.options.get("allowed stopping distance")
    allowed = float(value) if isinstance(value, int | float) else math.nan
    return {"stops": lambda: draw_stops(stops, units, allowed)}


def _dynamic_figures(comparison: Comparison) -> dict[str, Callable[[], Figure | None]]:
    """How the leading set moves under its loops."""
    simulation = comparison.dynamics
    if simulation is None:
        return {}
    return {
        "cycle_response": lambda: draw_response(simulation),
        "following_error": lambda: draw_following_error(simulation),
        "loop_steps": lambda: draw_loop_steps(simulation),
        "bode": lambda: draw_bode(simulation),
    }


def _robustness_figures(comparison: Comparison) -> dict[str, Callable[[], Figure | None]]:
    """How sure the leading set passes."""
    study = comparison.robustness
    if study is None:
        return {}
    draws = (draw_probability, draw_swings, draw_sensitivity)
    return {key: partial(draw, study) for key, draw in zip(ROBUSTNESS_FIGURES, draws, strict=True)}
