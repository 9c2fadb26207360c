"""Files of one robustness study: tables as CSV and as a workbook, everything as JSON, figures as SVG."""

from __future__ import annotations

import io
import json
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.simulation_files import known_values
from actuator_sizing.report.workbook.robustness import TABLES, add_robustness
from actuator_sizing.sizing.robustness.results import CONFIDENCE
from actuator_sizing.version import __version__

if TYPE_CHECKING:
    from actuator_sizing.sizing.robustness.results import Robustness

SCHEMA = "actuator-sizing/robustness/1"
_CREATED = datetime(1980, 1, 1)  # of the workbook: the same study gives the same bytes


def robustness_dict(study: Robustness) -> dict[str, Any]:
    """Collect a study in plain types that JSON knows; what is not known or not finite is None.

    Parameters
    ----------
    study : Robustness
        The answer.
    """
    answer: dict[str, Any] = {
        "motor": study.motor,
        "gearhead": None if study.gearhead == "direct" else study.gearhead,
        "drive": study.drive,
        "samples": study.samples,
        "exact_samples": study.exact_samples,
        "sensitivity_samples": study.sensitivity_samples,
        "seed": study.seed,
        "confidence": CONFIDENCE,
        "interval": "Wilson",
        "all_checks": dict(study.probability),
        "wanted_probability": study.wanted_probability,
        "not_checked": list(study.not_checked),
        "largest_deviation": study.largest_deviation,
        "notes": list(study.notes),
    }
    answer |= {name: getattr(study, name).to_dict("records") for name in TABLES}
    known: dict[str, Any] = known_values(answer)
    return known


def render_robustness_json(study: Robustness) -> bytes:
    """Write a study as JSON; the same, byte for byte, for the same study."""
    head = {"schema": SCHEMA, "version": __version__, "case": study.case_name}
    text = json.dumps(head | robustness_dict(study), indent=1, ensure_ascii=False, allow_nan=False)
    return (text + "\n").encode("utf-8", "backslashreplace")


def write_robustness(study: Robustness, folder: str | Path) -> tuple[Path, ...]:
    """Write every file of a study; whole or not at all.

    Parameters
    ----------
    study : Robustness
        The answer.
    folder : str or Path
        Output folder; made if missing.

    Returns
    -------
    tuple of Path
        The files written.

    Raises
    ------
    OutputError
        If a file cannot be written; what was there before is untouched.
    """
    from actuator_sizing.files import replace_folder_files
    from actuator_sizing.report.figures import to_svg

    files = {"robustness.json": render_robustness_json(study), "robustness_tables.xlsx": _workbook(study)}
    for name in TABLES:
        table = getattr(study, name)
        if len(table):
            files[f"robust_{name}.csv"] = table.to_csv(index=False, lineterminator="\r\n").encode("utf-8-sig")
    for name, figure in study.figures().items():
        files[f"figures/{name}.svg"] = to_svg(figure, name)
    return replace_folder_files(folder, files)


def _workbook(study: Robustness) -> bytes:
    from xlsxwriter import Workbook

    from actuator_sizing.report.workbook import BOOK_OPTIONS
    from actuator_sizing.report.workbook.writer import Field, Sheets

    stream = io.BytesIO()
    with Workbook(stream, BOOK_OPTIONS) as book:
        book.set_properties({"title": "Robustness study", "comments": f"actuator_sizing {__version__}",
                             "created": _CREATED})  # fmt: skip
        sheets = Sheets(book)
        found = study.probability
        rows: list[tuple[str, Any]] = [
            ("case", study.case_name), ("set", study.label),
            ("probability of passing all checks", found["probability"]),
            ("95 % interval from (Wilson)", found["probability_low"]), ("to", found["probability_high"]),
            ("samples of all checks", found["samples"]), ("samples", study.samples),
            ("samples through the whole chain", study.exact_samples), ("seed", study.seed),
        ]  # fmt: skip
        rows += [("note", note) for note in study.notes]
        rows += [("not checked", title) for title in study.not_checked]
        sheets.add_table("robust summary", (Field("quantity"), Field("value", "number")), rows)
        add_robustness(sheets, study)
    return stream.getvalue()
