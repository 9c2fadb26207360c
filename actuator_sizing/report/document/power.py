"""Supply, bus, brake resistor and the energy of a cycle, of the leading set and of the others beside it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import (
    Cell,
    Column,
    FigureBlock,
    Paragraph,
    Section,
    Table,
    row,
)
from actuator_sizing.report.document.verdict import describe_set
from actuator_sizing.report.formatting import display_unit, number, quantity
from actuator_sizing.report.text import ENERGY_PARTS, clean

if TYPE_CHECKING:
    from collections.abc import Iterable

    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison, SetResult

_BUS = (
    ("bus_voltage_max_v", "highest bus voltage, periodic steady state", "V"),
    ("bus_voltage_min_v", "lowest bus voltage under load", "V"),
    ("bus_capacitance_f", "capacitance on the bus", "F"),
    ("bus_steady_power_w", "stand-by of the drive and other loads", "W"),
    ("supply_power_mean_w", "mean power of the supply", "W"),
    ("supply_power_rms_w", "RMS power of the supply, without help from the capacitors", "W"),
    ("supply_power_peak_w", "peak power of the supply, without help from the capacitors", "W"),
    ("supply_current_mean_a", "mean current of the supply at the lowest bus voltage", "A"),
    ("supply_current_peak_a", "peak current of the supply at the lowest bus voltage", "A"),
    ("returned_power_peak_w", "largest power given back to the supply", "W"),
    ("brake_energy_per_cycle_j", "energy into the brake resistor per cycle", "J"),
    ("brake_power_mean_w", "mean power of the brake resistor", "W"),
    ("brake_power_peak_w", "peak power that the chopper must pass", "W"),
    ("chopper_switching_frequency_max_hz", "the chopper switches at most", "Hz"),
    ("pwm_ripple_current_a", "PWM ripple of the motor current, peak to peak, at most", "A"),
    ("cable_loss_mean_w", "mean loss in the motor cable", "W"),
)
_ONLY_IF_ANY = frozenset(
    {"bus_steady_power_w", "returned_power_peak_w", "brake_energy_per_cycle_j", "brake_power_mean_w",
     "brake_power_peak_w", "cable_loss_mean_w"}
)  # fmt: skip
_HIGHER_MEANS_LESS = 1e-4  # a part below this of the whole is not worth a row


def power_section(comparison: Comparison, figures: Iterable[str]) -> Section:
    """Tell what the bus does and where the energy goes.

    Parameters
    ----------
    comparison : Comparison
        The answer, in the cycle that the figures show.
    figures : iterable of str
        Keys of the figures that were drawn.
    """
    best, drawn = comparison.sets[0], set(figures)
    cycle = comparison.case.cycle.name
    in_cycle = f" Cycle: {clean(cycle, 60)}." if cycle else ""
    blocks: list[Block] = [
        Paragraph(f"Set {best.rank}: {describe_set(best)}.{in_cycle}"),
        _two_columns("DC bus", _facts(best)),
    ]
    if comparison.case.partners:
        blocks.append(_partners(comparison))
    resistor = _resistor(best)
    if resistor:
        blocks.append(_two_columns("A brake resistor for this set", resistor))
    if "bus" in drawn:
        blocks.append(
            FigureBlock(
                "bus",
                "DC bus over one cycle in periodic steady state, fed from the highest and from the lowest voltage of "
                "the supply, and the power that this axis takes and gives back, as if it had the bus to itself.",
                f"The bus reaches {_shown(best, 'bus_voltage_max_v', 'V')}; the supply gives "
                f"{_shown(best, 'supply_power_peak_w', 'W')} at most, {_shown(best, 'supply_power_mean_w', 'W')} "
                "on average.",
            )
        )
    if "energy_flow" in drawn:
        blocks.append(
            FigureBlock(
                "energy_flow",
                "Energy of one cycle on its way to the load: each bar is taken from what is left above it; shares "
                "are of the first. It begins behind the drive where the drive's efficiency is not stated. Copper "
                "loss at judged temperature.",
                f"Of {_shown(best, 'energy_supply_per_cycle_j', 'J')} from the supply, "
                f"{_shown(best, 'energy_work_per_cycle_j', 'J')} are work on process and payload.",
            )
        )
    blocks.append(_parts(best))
    blocks.append(_beside(comparison))
    return Section("power", "Supply, bus and energy", tuple(blocks))


def _shown(item: SetResult, key: str, unit: str) -> str:
    value = item.quantities.get(key)
    return quantity(None if value is None else float(value), unit)


def _two_columns(caption: str, facts: tuple[tuple[str, str], ...]) -> Table:
    columns = (Column("Quantity", weight=3.0), Column("Value", numeric=True))
    return Table(caption, columns, tuple(row(*fact) for fact in facts))


def _facts(best: SetResult) -> tuple[tuple[str, str], ...]:
    rows = []
    for key, words, unit in _BUS:
        value = best.quantities.get(key)
        if value is None or (key in _ONLY_IF_ANY and value == 0.0):
            continue
        rows.append((words, quantity(float(value), unit)))
    return tuple(rows)


def _partners(comparison: Comparison) -> Table:
    """List the other axes on the bus, which every number above counts in."""
    rows = []
    for partner in comparison.case.partners:
        offset = "free" if partner.offset_s != partner.offset_s else quantity(partner.offset_s, "s")
        parts = " + ".join(
            clean(part, 60) for part in (partner.motor, partner.gearhead or "direct", partner.drive)
        )
        rows.append(row(clean(partner.name, 60), clean(partner.path, 80), parts, offset))
    columns = (Column("Axis"), Column("Case"), Column("Set", weight=2.0), Column("Time offset", numeric=True))
    return Table("Other axes on this bus, counted in above", columns, tuple(rows))


def _resistor(best: SetResult) -> tuple[tuple[str, str], ...]:
    q = best.quantities
    if q.get("brake_resistor_largest_ohm") is None:
        return ()
    return (
        ("smallest value, that the drive stands", _shown(best, "brake_resistor_smallest_ohm", "Ω")),
        ("largest value, that takes the peak", _shown(best, "brake_resistor_largest_ohm", "Ω")),
        (
            "continuous power, with 30 % over the mean",
            _shown(best, "brake_resistor_recommended_power_w", "W"),
        ),
        ("energy of one pulse", _shown(best, "brake_resistor_recommended_pulse_j", "J")),
    )


def _parts(best: SetResult) -> Table:
    """Energy of a cycle by where it goes."""
    supply = best.quantities.get("energy_supply_per_cycle_j")
    year = best.quantities.get("energy_supply_per_year_j")
    per_year = display_unit("J", fixed="kWh")
    rows = []
    for key, words in ENERGY_PARTS:
        value = best.quantities.get(f"energy_{key}_per_cycle_j")
        if (
            value is not None
            and key not in ("supply", "work")
            and abs(value) <= _HIGHER_MEANS_LESS * abs(supply or 0.0)
        ):
            continue
        share = "not known" if value is None or not supply else f"{number(100.0 * value / supply, 3)} %"
        cells = [words, quantity(value, "J"), share]
        if year is not None:
            part = None if value is None or not supply else float(per_year.convert(value / supply * year))
            cells.append("not known" if part is None else f"{number(part, 3)} kWh")
        rows.append(row(*cells))
    columns = [Column("Part", weight=2.4), Column("In one cycle", True), Column("Share of the supply", True)]
    if year is not None:
        columns.append(Column("In one year", True))
    return Table("Energy of one cycle, by where it goes", tuple(columns), tuple(rows))


def _beside(comparison: Comparison) -> Table:
    """Energy of the listed sets side by side."""
    priced = any(item.quantities.get("energy_cost_per_year") is not None for item in comparison.sets)
    yearly = any(item.quantities.get("energy_supply_per_year_j") is not None for item in comparison.sets)
    columns = [
        Column("Set", weight=2.6), Column("In one cycle", True), Column("Per hour", True), Column("Losses", True),
        Column("Largest loss", weight=1.4),
    ]  # fmt: skip
    if yearly:
        columns.append(Column("Per year", True))
    if priced:
        columns.append(Column("Cost per year", True))
    rows = []
    for item in comparison.sets:
        q = item.quantities
        hour, year, cost = (
            q.get(f"energy_{key}") for key in ("supply_per_hour_j", "supply_per_year_j", "cost_per_year")
        )
        losses = [(words, q.get(f"energy_{key}_per_cycle_j")) for key, words in ENERGY_PARTS[1:-1]]
        known = [(words, float(value)) for words, value in losses if value is not None]
        total = None if len(known) < len(losses) else sum(value for _, value in known)
        largest = max(known, key=lambda loss: loss[1]) if known else ("not known", 0.0)
        cells: list[str | Cell] = [
            Cell(f"{item.rank} {describe_set(item)}"), _shown(item, "energy_supply_per_cycle_j", "J"),
            _energy_of_time(hour), quantity(total, "J"), largest[0],
        ]  # fmt: skip
        if yearly:
            cells.append(_energy_of_time(year))
        if priced:
            cells.append("not known" if cost is None else number(float(cost), 4))
        rows.append(row(*cells))
    return Table("Energy of the listed sets from the supply", tuple(columns), tuple(rows))


def _energy_of_time(value: float | None) -> str:
    if value is None:
        return "not known"
    return f"{number(float(display_unit('J', fixed='kWh').convert(value)), 3)} kWh"
