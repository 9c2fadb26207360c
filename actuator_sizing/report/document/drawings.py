"""Captions of the figures, and what they show in words for those who cannot see them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import FigureBlock, Section
from actuator_sizing.report.document.comparing import set_quantity
from actuator_sizing.report.document.verdict import describe_set
from actuator_sizing.report.formatting import quantity
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from collections.abc import Iterable

    from actuator_sizing.sizing.results import Comparison, SetResult


def figures_section(comparison: Comparison, figures: Iterable[str]) -> Section:
    """Place the figures of the leading set that were drawn."""
    best = comparison.sets[0]
    around = comparison.case.surroundings
    cycle = comparison.case.cycle.name
    conditions = (
        (
            f"Cycle: {clean(cycle, 60)}, in which the governing check is nearest to its limit. "
            if cycle
            else ""
        )
        + f"Set: {describe_set(best)}. Inputs: {clean(comparison.case.name)}, ambient "
        f"{quantity(around.ambient_degc, '°C')}, actuator_sizing {comparison.version}."
    )
    texts = _texts(best)
    if not comparison.case.cycle.repeats:
        texts["temperature"] = _single_run(best)
    blocks = tuple(
        FigureBlock(key, f"{texts[key][0]} {conditions}", texts[key][1])
        for key in texts
        if key in set(figures)
    )
    return Section("figures", "Figures", blocks)


def _single_run(best: SetResult) -> tuple[str, str]:
    """Caption and alternative text of the temperatures of a cycle that does not repeat."""
    return (
        "Winding and housing over one run of the cycle and, where one follows, over the next; the limit is that of "
        "the motor's data sheet or insulation class. Computed temperatures, not measured ones.",
        f"The winding reaches {set_quantity(best, 'winding_max_degc', '°C')}, the housing "
        f"{set_quantity(best, 'housing_max_degc', '°C')}.",
    )


def _texts(best: SetResult) -> dict[str, tuple[str, str]]:
    """Caption and alternative text of every figure that shows one set."""

    def show(key: str, label: str) -> str:
        return set_quantity(best, key, label)

    torque, speed = show("torque_peak_nm", "N·m"), show("speed_peak_rad_s", "rad/s")
    return {
        "speed_torque": (
            "Speed–torque plane of the motor. The path is the duty cycle, arrows give its direction; the "
            "hatched region may last, the outer lines are the peak at minimum, nominal and maximum bus "
            "voltage, from the data sheets of motor and drive. Limits are drawn alike in all quadrants, which "
            "leaves out what the voltage adds while braking.",
            f"The cycle reaches {torque} in the air gap and {speed}; RMS torque "
            f"{show('torque_rms_nm', 'N·m')} at RMS speed {show('speed_rms_rad_s', 'rad/s')}.",
        ),
        "temperature": (
            "Winding and housing from cold, both bodies at ambient, to the periodic state, and over the last "
            "cycle; the limit is that of the motor's data sheet or insulation class. Computed temperatures, not "
            "measured ones.",
            f"The winding reaches {show('winding_max_degc', '°C')}, the housing "
            f"{show('housing_max_degc', '°C')} in the periodic state.",
        ),
        "current": (
            "Motor current over one cycle with the limits of motor and drive from their data sheets, all in the "
            "motor's kind of ampere.",
            f"Peak {show('current_peak_a', 'A')}, RMS {show('current_rms_a', 'A')}.",
        ),
        "motion": (
            "Motion of the load and torque of the motor (air gap) over one cycle.",
            f"One cycle: the motor reaches {speed} and {torque}.",
        ),
        "torque_by_cause": (
            "Air-gap torque over one cycle, stacked by what asks for it: causes that drive along +x above zero, "
            "causes that act along −x below; the line is their sum.",
            f"The sum peaks at {torque}; the parts are in the workbook, sheet time series.",
        ),
        "step_response": (
            "Response of motor and load to a step of voltage from rest, without a controller and without "
            "limits of current.",
            "Current rises and falls while the speed settles; the values are in the results file.",
        ),
    }
