"""Sections beyond pass and fail: ratio windows, what the leading set can do, and which sets no other one beats."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Cell, Column, FigureBlock, Paragraph, Section, Table, row
from actuator_sizing.report.document.comparing import titles_of
from actuator_sizing.report.figures.ratio_windows import MOST_ROWS, shown_rows
from actuator_sizing.report.formatting import number, percent, quantity
from actuator_sizing.report.headroom_text import headroom_text, map_rows
from actuator_sizing.report.text import check_name, clean, in_sentence, plural

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.ratio_results import MotorWindow
    from actuator_sizing.sizing.results import Comparison
    from actuator_sizing.sizing.trade_offs import TradeOff

MOST_TRADED = 12  # sets of the front in the table
_MOST_RATIOS = 8  # catalog ratios of one motor in a cell


def decision_sections(comparison: Comparison, figures: Iterable[str]) -> list[Section]:
    """The sections that were asked for."""
    drawn = set(figures)
    made = (
        _trade_offs(comparison, drawn),
        _ratio_windows(comparison, drawn),
        _headroom(comparison, drawn),
    )
    return [section for section in made if section is not None]


# -- trade-offs --------------------------------------------------------------------------------------
def _trade_offs(comparison: Comparison, figures: set[str]) -> Section | None:
    found = comparison.trade_offs
    if found is None or len(found.sets) < 2 or len(found.criteria) < 2:
        return None
    front = found.front
    unknown = sum(not one.is_compared for one in found.sets)
    text = (
        f"Of {plural(len(found.sets), 'set')} that pass, {len(front)} are beaten by no other one in "
        f"{_listed(found.criteria)} at once. Every other one is at most as good in all of these as one of them, "
        "and worse in something; the workbook says by which one."
    )
    if unknown:
        text += f" {plural(unknown, 'set')} could not be compared, since one of these is not known of them."
    blocks: list[Block] = [Paragraph(text)]
    if "trade_offs" in figures:
        blocks.append(
            FigureBlock(
                "trade_offs",
                "Passing sets by price, mass, energy taken at the motor terminals per cycle and smallest reserve "
                "against what is allowed. Numbers as in the table.",
                f"{len(front)} of {len(found.sets)} sets are beaten by no other one; the table names them.",
            )
        )
    columns = (
        Column("No.", numeric=True, weight=0.5),
        Column("Set", weight=3.0),
        *(Column(title, numeric=True) for title in (_TITLES[name] for name in found.criteria)),
        Column("Beats", numeric=True, weight=0.8),
    )
    places = {one.parts: place for place, one in enumerate(found.sets)}
    beaten: dict[int, int] = {}
    for one in found.sets:
        if one.dominated_by is not None:
            beaten[one.dominated_by] = beaten.get(one.dominated_by, 0) + 1
    rows = tuple(
        row(
            str(place), clean(one.label), *(_value(one, name) for name in found.criteria),
            f"{beaten.get(places[one.parts], 0):d}",
        )
        for place, one in enumerate(front[:MOST_TRADED], start=1)
    )  # fmt: skip
    more = f"; {len(front) - MOST_TRADED} more are in the workbook" if len(front) > MOST_TRADED else ""
    blocks.append(Table(f"Sets that no other one beats in everything{more}", columns, rows))
    return Section("trade_offs", "What is traded for what", tuple(blocks))


_TITLES = {"price": "Price", "mass": "Mass", "energy": "Energy per cycle", "reserve": "Smallest reserve"}


def _listed(criteria: tuple[str, ...]) -> str:
    words = [in_sentence(_TITLES[name]) for name in criteria]
    return f"{', '.join(words[:-1])} and {words[-1]}"


def _value(one: TradeOff, name: str) -> str:
    value = one.values[name]
    if name == "price":
        return f"{value:.2f}"
    if name == "reserve":
        return percent(value, 0.0)
    return quantity(value, "kg" if name == "mass" else "J")


# -- ratio windows -----------------------------------------------------------------------------------
def _ratio_windows(comparison: Comparison, figures: set[str]) -> Section | None:
    windows = comparison.windows
    if windows is None:
        return None
    titles = titles_of(comparison.sets)
    blocks: list[Block] = [
        Paragraph(
            "The ratios at which each motor keeps RMS torque, peak, speed and voltage on this cycle, whatever drive "
            f"comes after, with a {windows.assumption}. A catalog ratio counts with losses and inertia of its own "
            "gearhead; ratio 1 is direct drive. The best ratio has the smallest RMS torque; the power rate is the "
            "square of the continuous torque over rotor inertia, and what the load asks for is its value at the best "
            "ratio."
        )
    ]
    if "ratio_windows" in figures:
        blocks.append(
            FigureBlock(
                "ratio_windows",
                "Ratio windows, the motors of the leading sets first. To the right, what bounds each window below "
                "and above.",
                "One row per motor with the span of ratios that keep its limits; the table holds the numbers.",
            )
        )
    leading = [item.motor_index for item in comparison.sets]
    rows = shown_rows(windows, leading)
    columns = (
        Column("Motor", weight=1.6),
        Column("Ratios", numeric=True, weight=1.3),
        Column("Bounded by", weight=1.8),
        Column("Catalog ratios that fit", weight=1.7),
        Column("Best", numeric=True, weight=0.7),
        Column("RMS torque there", numeric=True, weight=1.0),
        Column("Power rate: has, needs [kW/s]", numeric=True, weight=1.2),
    )
    more = len(windows.motors) - len(rows)
    caption = f"Ratio windows{f'; {more} more motors are in the workbook' if more > 0 else ''}"
    blocks.append(Table(caption, columns, tuple(line for one in rows for line in _window_rows(one, titles))))
    assert len(rows) <= MOST_ROWS
    return Section("ratio_windows", "Which ratios each motor can live with", tuple(blocks))


def _window_rows(window: MotorWindow, titles: Mapping[str, str]) -> list[tuple[Cell, ...]]:
    best = number(window.best_ratio, 4) if math.isfinite(window.best_ratio) else "-"
    rates = [number(1e-3 * value, 3) for value in (window.power_rate, window.power_rate_needed)]
    rest = (best, quantity(window.best_torque_rms_nm, "N·m"), ", ".join(rates))
    if not window.intervals:
        return [row(clean(window.motor), "none", clean(window.reason), _ratios(window), *rest)]
    made = []
    for place, part in enumerate(window.intervals):
        low = inward(part.low, up=True) if part.low_check else "any small one"
        high = inward(part.high, up=False) if part.high_check else "no limit"
        bounds = ", ".join(
            in_sentence(titles.get(check, check_name(check))) if check else "nothing"
            for check in (part.low_check, part.high_check)
        )
        first = place == 0
        made.append(
            row(
                clean(window.motor) if first else "", f"{low} to {high}", bounds,
                _ratios(window) if first else "", *(rest if first else ("", "", "")),
            )
        )  # fmt: skip
    return made


def _ratios(window: MotorWindow) -> str:
    ratios = sorted({c.ratio for c in window.catalog})
    shown = ", ".join(f"{ratio:.4g}" for ratio in ratios[:_MOST_RATIOS])
    return (shown or "none") + (f", {len(ratios) - _MOST_RATIOS} more" if len(ratios) > _MOST_RATIOS else "")


def inward(value: float, *, up: bool, digits: int = 4) -> str:
    """Write the end of a window rounded into it.

    Examples
    --------
    >>> inward(1.74948, up=True), inward(3.47826, up=False)
    ('1.75', '3.478')
    """
    if value <= 0.0 or not math.isfinite(value):
        return number(value, digits)
    step = 10.0 ** (math.floor(math.log10(value)) - digits + 1)
    turns = value / step
    kept = math.ceil(turns - 1e-9) if up else math.floor(turns + 1e-9)
    return number(kept * step, digits)


# -- headroom ----------------------------------------------------------------------------------------
def _headroom(comparison: Comparison, figures: set[str]) -> Section | None:
    found = comparison.headroom
    if found is None:
        return None
    titles = titles_of(comparison.sets)
    columns = (
        Column("Quantity", weight=2.6),
        Column("Now", numeric=True),
        Column("Limit", numeric=True),
        Column("Bounded by", weight=1.6),
        Column("In words", weight=2.0),
    )
    rows = tuple(row(*headroom_text(comparison.case, answer, titles)) for answer in found.answers)
    blocks: list[Block] = [
        Paragraph(
            "Each quantity is driven to its limit while all else stays as it is; the set passes at the limit and "
            "fails a thousandth beyond. Limits are rounded to their safe side."
        ),
        Table(clean(found.label), columns, rows),
    ]
    if found.map is not None:
        if "payload_map" in figures:
            blocks.append(
                FigureBlock(
                    "payload_map",
                    f"Payload against cycle time for {clean(found.label)}: inside the region every check is met; the "
                    "marks on its edge name the check that fails beyond. Moves and dwells are stretched alike.",
                    "The region of cycle times that pass for each payload; the table holds the numbers.",
                )
            )
        edge = (
            Column("Heaviest payload", numeric=True),
            Column("Shortest cycle", numeric=True),
            Column("Bounded by", weight=1.8),
            Column("Longest cycle", numeric=True),
            Column("Bounded by", weight=1.8),
        )
        made = tuple(row(*cells) for cells in map_rows(comparison.case, found.map, titles))
        blocks.append(Table("Cycle times that pass, by payload", edge, made))
    return Section("headroom", "What the leading set can do at most", tuple(blocks))
