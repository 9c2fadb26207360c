"""Sheets of the answer: summary, candidates, checks."""

from __future__ import annotations

import math
from datetime import date
from functools import partial
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.verdict import cover_facts, governing, verdict_sentence
from actuator_sizing.report.headings import heading, name_and_unit
from actuator_sizing.report.text import check_name
from actuator_sizing.report.workbook.case_sheets import rms_formula
from actuator_sizing.report.workbook.writer import Field, Sheets, row_height
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, NOT_CHECKED, PASSES

if TYPE_CHECKING:
    from xlsxwriter.worksheet import Worksheet

    from actuator_sizing.sizing.results import CheckResult, Comparison

#: Of a list with more candidates than the first number, the workbook shows the second; the file beside has all.
MOST_CANDIDATES, LEADING_CANDIDATES = 1_000, 250
_VERDICT_COLORS = {
    PASSES: ("#DDEFE6", "#00583F"),
    LOW_RESERVE: ("#FBEBCB", "#7A4F00"),
    NOT_CHECKED: ("#E6E6E6", "#404040"),
    FAILS: ("#8C2D04", "#FFFFFF"),
}


def add_summary(sheets: Sheets, comparison: Comparison, day: date, rows_in_file: int | None) -> None:
    """Write what was sized, the answer, and the quantities of the leading set as named cells."""
    sentence, state = verdict_sentence(comparison)
    rows: list[tuple[str, Any, str, str]] = [
        (name, value, "", "") for name, value in cover_facts(comparison, day)
    ]
    rows += [("Verdict", state, "", "verdict"), ("In words", sentence, "", "")]
    counts = comparison.rejections
    for name in ("sets_total", "incompatible", "rejected", "evaluated", "confirmed_passing"):
        rows.append((name.replace("_", " "), getattr(counts, name), "sets", name))
    total = len(comparison.candidates)
    in_file = "all" if rows_in_file in (None, total) else f"the first {rows_in_file}"
    listed = (
        "all in sheet candidates"
        if shown_candidates(comparison) == total
        else f"the first {shown_candidates(comparison)} in sheet candidates, {in_file} in candidates.csv"
    )
    rows.append(("candidates listed", total, listed, "candidates_listed"))
    if comparison.sets:
        best = comparison.sets[0]
        rows += [
            ("Motor", best.motor, "", ""),
            ("Gearhead", "direct" if best.gearhead is None else best.gearhead, "", ""),
            ("Ratio", best.ratio, "-", "gear_ratio"),
            ("Drive", best.drive, "", ""),
            ("Price", best.price, "currency of the catalogs", "set_price"),
            ("Mass", best.mass_kg, "kg", "set_mass_kg"),
        ]
        check = governing(best)
        if check is not None:
            rows += [
                ("Governing check", check.title, "", ""),
                ("Governing utilisation", check.utilisation, "-", "governing_utilisation"),
                ("Governing margin", check.margin, "-", "governing_margin"),
            ]
        for key, value in best.quantities.items():
            words, unit = name_and_unit(key)
            rows.append((words, value, unit or ("" if isinstance(value, str) else "-"), f"result_{key}"))
    fields = (Field("quantity"), Field("value", "number"), Field("unit"), Field("name of the cell"))
    sheet = sheets.add_table("summary", fields, rows)
    sheet.set_column(1, 1, 46)
    for index, (_, value, _, name) in enumerate(rows, 1):
        if isinstance(value, str):
            wrapped = sheets.format(text_wrap=True)
            sheets.write(sheet, index, 1, Field("value"), value)
            sheet.set_row(index, row_height(len(value), 46), wrapped)
        if name:
            sheets.book.define_name(name, f"=summary!$B${index + 1}")
        formula = rms_formula(comparison) if name == "result_current_rms_a" else None
        if formula is not None and value is not None:
            sheets.write(sheet, index, 1, Field("", "number", formula=partial(_same, formula)), value)


def _same(formula: str, _row: int) -> str:
    """Make a formula that does not depend on its row."""
    return formula


def add_candidates(sheets: Sheets, comparison: Comparison) -> None:
    """Write one row for each listed candidate, best first; of a very long list only the leading ones."""
    table = comparison.candidates.head(shown_candidates(comparison))
    fields = [_candidate_field(name, table[name].dtype.kind) for name in map(str, table.columns)]
    cells = table.astype(object).where(table.notna(), None)
    if "governing_check" in cells:
        cells["governing_check"] = [check_name(key) if key else None for key in cells["governing_check"]]
    rows = cells.to_numpy().tolist()
    sheet = sheets.add_table("candidates", fields, rows)
    if "verdict" in table and len(table):
        _color_verdicts(sheets, sheet, list(table.columns).index("verdict"), len(table))


def shown_candidates(comparison: Comparison) -> int:
    """Count the candidates that the workbook shows."""
    total = len(comparison.candidates)
    return total if total <= MOST_CANDIDATES else LEADING_CANDIDATES


def _candidate_field(name: str, kind: str) -> Field:
    if name == "gearhead":
        return Field("gearhead (empty: direct)")
    if kind not in "if":
        return Field(heading(name))
    if name == "price":
        return Field("price [currency of the catalogs]", "money")
    if "utilisation" in name:
        return Field(f"{heading(name)} [-]", "percent", bar=True)
    words, unit = name_and_unit(name)
    title = f"{words} [{unit}]" if unit else (f"{words} [-]" if "ratio" in name else words)
    return Field(title, "integer" if kind == "i" else "number")


def add_checks(sheets: Sheets, comparison: Comparison) -> None:
    """Write every check of every set examined, utilisation and margin as formulas with stored values."""
    fields = [
        Field("rank", "integer"), Field("motor"), Field("gearhead"), Field("drive"), Field("check"),
        Field("group"), Field("demand [unit beside]", "number"), Field("capacity [unit beside]", "number"),
        Field("unit"), Field("utilisation [-]", "percent", bar=True),
        Field("allowed utilisation [-]", "percent"), Field("margin [-]", "percent"), Field("verdict"),
        Field("advice only"), Field("at [s]", "number"), Field("segment"),
        Field("formula"), Field("source"), Field("missing data"),
    ]  # fmt: skip
    if comparison.cycles:
        fields.append(Field("cycle"))
    rows, live = [], []
    for item in comparison.sets:
        for check in item.checks:
            known = check.utilisation is not None
            time = "whole cycle" if known and check.at_time_s is None else check.at_time_s
            rows.append(
                (
                    item.rank, item.motor, "direct" if item.gearhead is None else item.gearhead, item.drive,
                    check.title, check.group, check.demand, check.capacity, check.unit or "-",
                    check.utilisation, check.allowed, check.margin, check.shown_verdict, check.is_advice, time,
                    check.segment, check.formula, check.source, ", ".join(check.missing),
                    *((check.cycle,) if comparison.cycles else ()),
                )
            )  # fmt: skip
            live.append(check)
    sheet = sheets.add_table("checks", fields, rows)
    sheet.freeze_panes(1, 5)
    for index, check in enumerate(live, 1):
        _make_live(sheets, sheet, index, check)
    if rows:
        _color_verdicts(sheets, sheet, 12, len(rows))


def _make_live(sheets: Sheets, sheet: Worksheet, row: int, check: CheckResult) -> None:
    """Put formulas behind utilisation and margin where demand over capacity is the stored value."""
    use = check.utilisation
    if use is None or not math.isfinite(use) or check.demand is None or not check.capacity:
        return
    if math.isclose(check.demand / check.capacity, use, rel_tol=1e-9, abs_tol=1e-300):
        sheets.write(sheet, row, 9, Field("", "percent", formula=lambda r: f"=G{r}/H{r}"), use)
    if check.margin is not None:
        sheets.write(sheet, row, 11, Field("", "percent", formula=lambda r: f"=1/J{r}-1"), check.margin)


def _color_verdicts(sheets: Sheets, sheet: Worksheet, column: int, rows: int) -> None:
    for verdict, (background, ink) in _VERDICT_COLORS.items():
        sheet.conditional_format(
            1,
            column,
            rows,
            column,
            {
                "type": "cell",
                "criteria": "==",
                "value": f'"{verdict}"',
                "format": sheets.format(bg_color=background, font_color=ink),
            },
        )
