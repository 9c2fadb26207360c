"""Sheets of the energy of every listed set, and of the DC bus of the leading one."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.curves import leading_detail
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.report.text import ENERGY_PARTS
from actuator_sizing.report.workbook.curves import add_frame
from actuator_sizing.report.workbook.writer import Field

if TYPE_CHECKING:
    from actuator_sizing.report.workbook.writer import Sheets
    from actuator_sizing.sizing.results import Comparison


def add_energy(sheets: Sheets, comparison: Comparison) -> None:
    """Write where the energy of one cycle goes, one row for each listed set."""
    fields = [
        Field("rank", "integer"), Field("motor"), Field("gearhead"), Field("drive"),
        *(Field(f"{words} [J]", "number") for _, words in ENERGY_PARTS),
        Field("from the supply in one hour [J]", "number"), Field("from the supply in one year [J]", "number"),
        Field("cost of one year [currency of the price]", "money"),
    ]  # fmt: skip
    keys = [f"energy_{key}_per_cycle_j" for key, _ in ENERGY_PARTS]
    keys += ["energy_supply_per_hour_j", "energy_supply_per_year_j", "energy_cost_per_year"]
    rows = [
        (
            item.rank,
            item.motor,
            item.gearhead or "direct",
            item.drive,
            *(item.quantities.get(key) for key in keys),
        )
        for item in comparison.sets
    ]
    sheets.add_table("energy", fields, rows)


def add_bus(sheets: Sheets, comparison: Comparison) -> None:
    """Write power and voltage of the bus of the leading set over one cycle in periodic steady state."""
    detail = leading_detail(comparison)
    if detail is not None and detail.bus is not None:
        add_frame(sheets, "bus", detail.bus, AxisUnits.of(comparison.case))
