"""Sheets of what to change, what is possible and what is traded for what; each only where it was asked for."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.comparing import titles_of
from actuator_sizing.report.headroom_text import bounded_by, headroom_text
from actuator_sizing.report.lever_text import lever_text
from actuator_sizing.report.workbook.writer import Field, Sheets

MOST_TRADED = 500  # sets of the trade-offs; those that no other one beats come first

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison


def add_levers(sheets: Sheets, comparison: Comparison) -> None:
    """Write every lever of the sets asked about: raw values in SI, and the words of the report beside them."""
    fields = [
        Field("rank", "integer"), Field("motor"), Field("gearhead"), Field("drive"), Field("goal"),
        Field("lever"), Field("now [unit beside]", "number"), Field("needed [unit beside]", "number"),
        Field("unit"), Field("cost of the change [-]", "number"), Field("now"), Field("needed"), Field("in words"),
    ]  # fmt: skip
    goals = {"pass": "every check met", "reserve": "recommended reserve kept"}
    rows: list[tuple[Any, ...]] = []
    for item in comparison.sets:
        for lever in item.levers:
            text = lever_text(comparison.case, lever)
            numbers = [lever.get(key) if lever.get("unit") else "" for key in ("present", "needed")]
            rows.append(
                (
                    item.rank, item.motor, "direct" if item.gearhead is None else item.gearhead, item.drive,
                    goals[lever["goal"]], text.change, *numbers, lever.get("unit", ""),
                    "" if lever.get("cost") is None else lever["cost"], text.now, text.needed, text.words,
                )
            )  # fmt: skip
    if rows:
        sheets.add_table("levers", fields, rows).freeze_panes(1, 4)


def add_trade_offs(sheets: Sheets, comparison: Comparison) -> None:
    """Write the passing sets that no other one beats, then the others with who beats them."""
    found = comparison.trade_offs
    if found is None or len(found.sets) < 2:
        return
    styles = {"price": "money", "reserve": "percent"}
    titles = {"price": "price [currency of the catalogs]", "mass": "mass [kg]", "energy": "energy per cycle [J]",
              "reserve": "smallest reserve [-]"}  # fmt: skip
    fields = [
        Field("motor"), Field("gearhead"), Field("drive"),
        *(Field(titles[name], styles.get(name, "number")) for name in found.criteria),
        Field("beaten by no other"), Field("beaten by"),
    ]  # fmt: skip
    ordered = sorted(found.sets, key=lambda one: (not one.on_front, not one.is_compared))
    rows = [
        (
            one.motor, one.gearhead, one.drive, *(one.values[name] for name in found.criteria),
            one.on_front if one.is_compared else "not compared",
            "" if one.dominated_by is None else found.sets[one.dominated_by].label,
        )
        for one in ordered[:MOST_TRADED]
    ]  # fmt: skip
    sheets.add_table("trade-offs", fields, rows)


def add_ratio_windows(sheets: Sheets, comparison: Comparison) -> None:
    """Write the ratio windows of every motor, one row a window."""
    windows = comparison.windows
    if windows is None:
        return
    titles = titles_of(comparison.sets)
    fields = [
        Field("motor"), Field("ratio from [-]", "number"), Field("ratio to [-]", "number"), Field("bounded below by"),
        Field("bounded above by"), Field("catalog ratios that fit"), Field("gearheads that fit"),
        Field("best ratio [-]", "number"), Field("RMS torque there [N·m]", "number"),
        Field("power rate [W/s]", "number"), Field("power rate asked for [W/s]", "number"), Field("why none"),
    ]  # fmt: skip
    rows: list[tuple[Any, ...]] = []
    for window in windows.motors:
        ratios = ", ".join(f"{ratio:.5g}" for ratio in sorted({c.ratio for c in window.catalog}))
        gearheads = ", ".join(c.gearhead or "direct drive" for c in window.catalog)
        for part in window.intervals or (None,):
            ends = ("", "", "", "")
            if part is not None:
                ends = (
                    part.low if part.low_check else "no limit", part.high if part.high_check else "no limit",
                    bounded_by(part.low_check, titles), bounded_by(part.high_check, titles),
                )  # type: ignore[assignment]  # fmt: skip
            rows.append(
                (
                    window.motor, *ends, ratios, gearheads, window.best_ratio, window.best_torque_rms_nm,
                    window.power_rate, window.power_rate_needed, window.reason,
                )
            )  # fmt: skip
    sheets.add_table("ratio windows", fields, rows)


def add_headroom(sheets: Sheets, comparison: Comparison) -> None:
    """Write the limits of the leading set, and on a sheet of its own the map of payload against cycle time."""
    found = comparison.headroom
    if found is None:
        return
    titles = titles_of(comparison.sets)
    fields = [
        Field("quantity"), Field("now [unit beside]", "number"), Field("limit [unit beside]", "number"),
        Field("unit"), Field("bounded by"), Field("now"), Field("limit"), Field("in words"),
    ]  # fmt: skip
    rows: list[tuple[Any, ...]] = []
    for answer in found.answers:
        text = headroom_text(comparison.case, answer, titles)
        limit = "" if answer.limit is None else answer.limit
        rows.append(
            (
                text.quantity,
                answer.present,
                limit,
                answer.unit,
                text.bounded_by,
                text.now,
                text.limit,
                text.words,
            )
        )
    sheets.add_table("headroom", fields, rows)
    if found.map is None:
        return
    edges = [
        Field(f"heaviest payload [{found.map.payload_unit}]", "number"), Field("shortest cycle [s]", "number"),
        Field("bounded by"), Field("longest cycle [s]", "number"), Field("longest bounded by"),
    ]  # fmt: skip
    sheets.add_table(
        "payload map",
        edges,
        [
            (
                one.payload, "none" if one.shortest_s is None else one.shortest_s,
                bounded_by(one.shortest_by, titles),
                "no limit" if one.longest_s is None else one.longest_s, bounded_by(one.longest_by, titles),
            )
            for one in found.map.rows
        ],
    )  # fmt: skip
