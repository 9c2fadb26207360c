"""Stopping, holding and heat of the leading set: what was computed about them, named as IEC 60204-1 names it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Column, Facts, FigureBlock, Paragraph, Section, Table, row
from actuator_sizing.report.formatting import number, quantity

if TYPE_CHECKING:
    from collections.abc import Iterable

    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison, SetResult

#: key in the quantities, what stops the axis, stop category of IEC 60204-1
_STOPS = (
    ("controlled", "motor at the current limit", "1 or 2"),
    ("shorted", "shorted winding alone", "0"),
    ("brake", "holding brake alone, after its closing time", "0"),
    ("coasting", "friction alone", "0"),
)
_FACTS = (
    ("torque of gravity at the motor, without losses and friction", "gravity_torque_nm", "N·m"),
    ("work of the holding brake in one stop", "stop_brake_energy_j", "J"),
    ("first current peak of the shorted winding, motor's kind of ampere", "stop_shorted_current_a", "A"),
    ("hottest the housing gets (compare ISO 13732-1, which sets no limits)", "housing_max_degc", "°C"),
)
_CAUTION = (
    "Computed from the entered data, from the worst instant of the cycle, reaction time included and losses of the "
    "transmission left out. Measure stops and drops on the machine; none of these figures protects persons. The "
    "holding brake of a motor is a parking brake, and its torque falls with heat and wear."
)


def stopping_section(comparison: Comparison, figures: Iterable[str]) -> Section | None:
    """Place what is known of stops, holding and heat; None where the results hold nothing of it."""
    best = comparison.sets[0]
    way = "m" if "stop_controlled_distance_m" in best.quantities else "rad"
    if f"stop_controlled_distance_{way}" not in best.quantities:
        return None
    blocks: list[Block] = [Paragraph(_CAUTION, "note"), _stops(best, way)]
    facts = _facts(best, way)
    if facts:
        blocks.append(Facts(facts, "Holding and heat"))
    if "stops" in set(figures):
        blocks.append(
            FigureBlock(
                "stops",
                "Speed and way of the load after the command to stop, each way of stopping from its own worst "
                "instant; a dot marks rest. Shaded is the reaction time, hatched the time in which the holding brake "
                "closes.",
                f"Controlled stop: {_way(best, 'stop_controlled_distance', way)} in "
                f"{_time(best, 'stop_controlled_time_s')}.",
            )
        )
    return Section("stopping", "Stopping, holding and heat", tuple(blocks))


def _way(best: SetResult, key: str, way: str) -> str:
    value = best.quantities.get(f"{key}_{way}")
    return "not at rest, or not known" if value is None else quantity(float(value), way)


def _time(best: SetResult, key: str) -> str:
    value = best.quantities.get(key)
    return "–" if value is None else quantity(float(value), "s")


def _stops(best: SetResult, way: str) -> Table:
    rows = [
        row(what, category, _way(best, f"stop_{kind}_distance", way), _time(best, f"stop_{kind}_time_s"))
        for kind, what, category in _STOPS
    ]
    columns = (
        Column("What brings the axis to rest", weight=2.4),
        Column("Stop category (IEC 60204-1)", weight=1.2),
        Column("Longest way", numeric=True, weight=1.4),
        Column("Longest time", numeric=True, weight=1.1),
    )
    return Table("Stops from the worst instant of the cycle", columns, tuple(rows))


def _facts(best: SetResult, way: str) -> tuple[tuple[str, str], ...]:
    found = []
    drop = best.quantities.get(f"drop_distance_{way}")
    if drop is not None:
        found.append(("a held load drops until the brake carries it", quantity(float(drop), way)))
    for label, key, unit in _FACTS:
        value = best.quantities.get(key)
        if value is not None and value == value and (value != 0.0 or unit == "°C"):
            found.append((label, quantity(float(value), unit)))
    life = best.quantities.get("insulation_life_factor_ratio")
    if life is not None:
        found.append(
            (
                "insulation life over its life at the limit (rule of thumb, halved per 10 K)",
                "above 100 times" if life > 100.0 else f"{number(life, 3)} times",
            )
        )
    return tuple(found)
