"""Sheets of curves of the leading set, and the speed–torque plane as a chart of the workbook."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.curves import leading_detail
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.report.headings import name_and_unit
from actuator_sizing.report.workbook.writer import Field, Sheets

if TYPE_CHECKING:
    import pandas as pd

    from actuator_sizing.sizing.results import Comparison, SetDetail

_PEAKS = (
    ("torque_peak_min_bus_nm", "peak at minimum bus", "solid"),
    ("torque_peak_nominal_bus_nm", "peak at nominal bus", "dash"),
    ("torque_peak_max_bus_nm", "peak at maximum bus", "round_dot"),
)
_CHART_COLUMNS = 12  # of the usual width, which the chart covers
_DEMAND, _LIMIT, _CONTINUOUS = "#0072B2", "#D55E00", "#009E73"


def add_time_series(sheets: Sheets, comparison: Comparison) -> None:
    """Write one cycle of the leading set in periodic state, both one-sided values at every jump."""
    _add_frames(sheets, "time series", comparison, lambda detail: detail.cycle)


def add_warm_up(sheets: Sheets, comparison: Comparison) -> None:
    """Write the temperatures from cold to the periodic state."""
    _add_frames(sheets, "warm-up", comparison, lambda detail: detail.warm_up)


def add_speed_torque(sheets: Sheets, comparison: Comparison) -> None:
    """Write the limits over speed and draw them with the cycle as a chart."""
    detail = leading_detail(comparison)
    if detail is None:
        return
    units = AxisUnits.of(comparison.case)
    add_frame(sheets, "speed-torque limits", detail.envelope, units)
    sheet = sheets.book.get_worksheet_by_name("speed-torque limits")
    chart = sheets.book.add_chart({"type": "scatter", "subtype": "straight"})
    columns = list(map(str, detail.envelope.columns))
    last = len(detail.envelope)
    speed = columns.index("speed_rad_s")
    for name, label, dash in (*_PEAKS, ("torque_continuous_nm", "continuous", "long_dash")):
        color = _CONTINUOUS if label == "continuous" else _LIMIT
        chart.add_series(
            {
                "name": label,
                "categories": ["speed-torque limits", 1, speed, last, speed],
                "values": ["speed-torque limits", 1, columns.index(name), last, columns.index(name)],
                "line": {"color": color, "width": 1.5, "dash_type": dash},
                "marker": {"type": "none"},
            }
        )
    cycle = list(map(str, detail.cycle.columns))
    first = 1
    for each in comparison.by_cycle():
        own = leading_detail(each)
        if own is None:
            continue
        end = first + len(own.cycle) - 1
        speed_at, torque_at = cycle.index("motor_speed_rad_s"), cycle.index("motor_torque_nm")
        chart.add_series(
            {
                "name": f"cycle {each.case.cycle.name}" if comparison.cycles else "duty cycle",
                "categories": ["time series", first, speed_at, end, speed_at],
                "values": ["time series", first, torque_at, end, torque_at],
                "line": {"color": _DEMAND, "width": 2.0},
                "marker": {"type": "none"},
            }
        )
        first = end + 1
    effort = "N" if units.linear_motor else "N·m"
    speed_unit = "m/s" if units.linear_motor else "rad/s"
    grid = {"visible": True, "line": {"color": "#D9D9D9", "width": 0.5}}
    chart.set_x_axis(
        {
            "name": f"motor speed [{speed_unit}], positive with +x",
            "label_position": "low",
            "major_gridlines": grid,
        }
    )
    chart.set_y_axis(
        {
            "name": f"air-gap {units.effort_word} [{effort}], positive drives +x",
            "label_position": "low",
            "major_gridlines": grid,
        }
    )
    chart.set_legend({"position": "bottom"})
    chart.set_size({"width": 760, "height": 460})
    chart.show_na_as_empty_cell()
    description = "Duty cycle of the leading set in the speed-torque plane with its limits"
    sheets.set_print_area(sheet, last, len(columns) + 1 + _CHART_COLUMNS)
    sheet.insert_chart(1, len(columns) + 1, chart, {"description": description})


def _add_frames(
    sheets: Sheets, name: str, comparison: Comparison, pick: Callable[[SetDetail], pd.DataFrame | None]
) -> None:
    """Write a frame of curves of the leading set, of several cycles one below the other with a column of names."""
    import pandas as pd

    frames = []
    for each in comparison.by_cycle():
        detail = leading_detail(each)
        frame = None if detail is None else pick(detail)
        if frame is not None:
            frames.append(frame.assign(cycle=each.case.cycle.name) if comparison.cycles else frame)
    if frames:
        whole = frames[0] if len(frames) == 1 else pd.concat(frames, ignore_index=True)
        add_frame(sheets, name, whole, AxisUnits.of(comparison.case))


def add_frame(sheets: Sheets, name: str, table: pd.DataFrame, units: AxisUnits) -> None:
    """Write a frame of curves; what is not known leaves its cell empty, so that charts show a gap."""
    fields = [Field(_curve_heading(str(column), units), _style(table[column])) for column in table.columns]
    sheet = sheets.add_table(name, fields, [])
    for column, (field, label) in enumerate(zip(fields, table.columns, strict=True)):
        style = sheets.format(num_format=_column_format(table[label]) if field.style == "number" else "@")
        for row, value in enumerate(table[label].tolist(), 1):
            if field.style == "text":
                sheets.write(sheet, row, column, field, value)
            elif value == value and abs(value) != float("inf"):
                sheet.write_number(row, column, value, style)
        sheet.set_column(column, column, 18 if field.style == "text" else 13)
    sheets.set_head_height(sheet, fields, [18 if field.style == "text" else 13 for field in fields])
    sheet.autofilter(0, 0, max(len(table), 1), len(fields) - 1)
    sheets.set_print_area(sheet, len(table), len(fields))


def _column_format(values: pd.Series) -> str:
    """Give a column of curves five digits at its largest value, the same for every row."""
    size = values.abs().max()
    if not 0.0 < size < float("inf"):
        return "0"
    decimals = max(0, min(9, 4 - math.floor(math.log10(size))))
    return f"0.{'0' * decimals}" if decimals else "0"


def _style(values: Any) -> str:
    return "number" if values.dtype.kind in "if" else "text"


def _curve_heading(name: str, units: AxisUnits) -> str:
    """Name a column of curves; load coordinates and a linear motor's columns carry their own units."""
    load = {
        "position": "m" if units.linear_load else "rad",
        "speed": "m/s" if units.linear_load else "rad/s",
        "acceleration": "m/s²" if units.linear_load else "rad/s²",
    }
    if name in load:
        return f"load {name} [{load[name]}]"
    words, unit = name_and_unit(name)
    if units.linear_motor and unit in ("N·m", "rad/s"):
        words = words.replace("torque", "force")
        unit = {"N·m": "N", "rad/s": "m/s"}[unit]
    return f"{words} [{unit}]" if unit else words
