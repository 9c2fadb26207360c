"""The cycles of a case side by side, and what they come to together."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Column, FigureBlock, Paragraph, Section, Table, row
from actuator_sizing.report.document.verdict import governing
from actuator_sizing.report.formatting import number, percent, quantity
from actuator_sizing.report.headings import name_and_unit
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from collections.abc import Iterable

    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison

_FOLLOWED = (
    "the repeating cycle that then gets hottest follows, and the hottest instant of both counts. RMS current, "
    "mean powers and wear are not judged in it; the drive is taken to have rested before it, bus and brake resistor "
    "to stand as if it repeated."
)
_MEANING = {
    "repeats": "A cycle that repeats is judged in its periodic state, as if it ran for ever.",
    "short-time": "A short-time cycle starts with winding and housing at ambient and is cold again before the next: "
    "its temperature counts, its RMS current does not.",
    "once from cold": f"A cycle that runs once from cold starts at ambient; {_FOLLOWED}",
    "once from warm": "A cycle that runs once from warm starts with winding and housing each at the highest "
    f"temperature that the repeating cycles bring; {_FOLLOWED}",
}

_MIX = {
    "rest_share_ratio": "time left over, at rest without current",
    "copper_loss_mean_w": "mean copper loss, winding at judged temperature",
    "friction_loss_mean_w": "mean friction and iron loss",
    "speed_mean_abs_rad_s": "mean speed of motor and gearhead input",
    "torque_rms_nm": "RMS torque (air gap)",
    "current_rms_a": "RMS current",
    "speed_rms_rad_s": "RMS speed",
    "energy_terminals_motoring_per_hour_j": "energy taken at the motor terminals in one hour",
    "energy_terminals_regenerated_per_hour_j": "energy given back at the motor terminals in one hour",
    "gearhead_equivalent_torque_nm": "equivalent torque of the gearhead",
    "winding_mix_degc": "mean temperature of the winding",
    "housing_mix_degc": "mean temperature of the housing",
    "housing_time_constant_s": "time constant of the housing",
    "relative_thermal_life_ratio": "relative thermal life",
}


def cycles_section(comparison: Comparison, figures: Iterable[str] = ()) -> Section | None:
    """Hold the cycles of the leading set against each other; None where the case has one.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    figures : iterable of str
        Keys of the figures that were drawn.
    """
    if not comparison.cycles or not comparison.sets:
        return None
    runs = dict.fromkeys(each.case.cycle.runs for each in comparison.cycles)
    meant = " ".join(_MEANING[word] for word in runs)
    blocks: list[Block] = [
        Paragraph(
            "A set must pass every check in every cycle; each check shows the cycle in which it is nearest to its "
            f"limit. {meant}"
        ),
        _table(comparison),
    ]
    if "cycles" in set(figures):
        names = ", ".join(clean(each.case.cycle.name, 40) for each in comparison.cycles)
        caption = "Motor torque (air gap) of the leading set over one run of each cycle."
        blocks.append(FigureBlock("cycles", caption, f"Cycles from top to bottom: {names}."))
    if comparison.sets[0].mix is not None:
        blocks += _mix(comparison)
    return Section("cycles", "Cycles", tuple(blocks))


def _table(comparison: Comparison) -> Table:
    columns = (
        Column("Cycle", weight=1.8),
        Column("Runs", weight=1.2),
        Column("Time of one run", numeric=True),
        Column("Share of time", numeric=True),
        Column("RMS current", numeric=True),
        Column("Peak torque", numeric=True),
        Column("Hottest winding", numeric=True),
        Column("Governing check", weight=1.8),
        Column("Utilisation", numeric=True),
    )
    rows = []
    for each in comparison.by_cycle():
        best, cycle = each.sets[0], each.case.cycle
        check = governing(best)
        linear = comparison.case.mechanism.drives_linear_motor
        rows.append(
            row(
                clean(f"{cycle.name} ({cycle.duty_type})" if cycle.duty_type else cycle.name, 60),
                cycle.runs,
                quantity(cycle.duration_s, "s"),
                "" if math.isnan(cycle.share) else percent(cycle.share, 0.0),
                _shown(best.quantities.get("current_rms_a"), "A"),
                _shown(best.quantities.get("torque_peak_nm"), "N" if linear else "N·m"),
                _shown(best.quantities.get("winding_max_degc"), "°C"),
                check.title if check else "",
                percent(check.utilisation, check.allowed) if check else "",
            )
        )
    return Table("The leading set in each cycle", columns, tuple(rows))


def _shown(value: float | None, unit: str) -> str:
    return "not known" if value is None else quantity(value, unit)


def _mix(comparison: Comparison) -> list[Block]:
    """What the cycles come to, weighed by their shares of time."""
    mix = comparison.sets[0].mix
    assert mix is not None
    rows = []
    for key, value in mix.items():
        unit = name_and_unit(key)[1]
        shown = "not known" if value is None else number(value) if not unit else quantity(value, unit)
        if key.endswith("share_ratio"):
            shown = percent(value, 0.0)
        rows.append(row(_MIX.get(key, key), shown))
    slow = mix.get("housing_time_constant_s")
    turns = "the time constant of the housing"
    if slow is not None:
        turns = f"{quantity(slow, 's')}, {turns}"
    columns = (Column("Quantity", weight=2.0), Column("Value", numeric=True))
    return [
        Table("All cycles together, weighed by share of time", columns, tuple(rows)),
        Paragraph(
            "Energy and wear add up in whatever order the cycles come. RMS current and mean temperature of the mix "
            f"hold only where the cycles take turns in much less than {turns}; a cycle that lasts longer heats as "
            "the table above says. Relative thermal life is that of the insulation over its life at the winding "
            "limit, each cycle at its hottest and rest at ambient, by the rule of thumb that 10 K more halve it "
            "(Montsinger).",
            "note",
        ),
    ]
