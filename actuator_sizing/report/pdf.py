"""The report as a tagged PDF, typeset by the optional `typst` package from the same document as the page."""

from __future__ import annotations

import dataclasses
import json
import re
from collections.abc import Mapping
from datetime import UTC, datetime, time
from datetime import date as calendar_date
from functools import lru_cache
from importlib import resources
from pathlib import Path
from typing import TYPE_CHECKING, Any

from actuator_sizing.errors import OutputError
from actuator_sizing.report.states import headline, state_of

if TYPE_CHECKING:
    from actuator_sizing.report.document.blocks import Document, Table
    from actuator_sizing.report.figures import DrawnFigure

MISSING_EXTRA = (
    "Cannot write the PDF: the package 'typst' is not installed. Install it with "
    "pip install 'actuator-sizing[pdf]', or print sizing_report.html from a browser."
)
# A word breaks only where it may; longer runs of letters than a column or a line holds get places to break.
_LONGEST_IN_COLUMN, _LONGEST_IN_LINE = 16, 70
_ISOLATES = re.compile("[\u2066-\u2069]")  # typst finds the direction of each text by itself
_REPLACEMENT = "\N{REPLACEMENT CHARACTER}"


def can_write_pdf() -> bool:
    """Whether the optional package is there."""
    from importlib.util import find_spec

    return find_spec("typst") is not None


def render_pdf(document: Document, figures: Mapping[str, DrawnFigure]) -> bytes:
    """Typeset the document as PDF/UA-1: tagged, searchable, with page numbers and repeated table heads.

    Parameters
    ----------
    document : Document
        The prepared report.
    figures : mapping of str to DrawnFigure
        Drawings by key; every figure block of the document has one.

    Returns
    -------
    bytes
        The file; the same, byte for byte, for the same document.

    Raises
    ------
    OutputError
        If the package `typst` is missing, or it refuses the document.
    """
    try:
        import typst
    except ImportError as error:
        raise OutputError(MISSING_EXTRA) from error
    template = resources.files("actuator_sizing.report") / "templates" / "sizing_report.typ"
    day = calendar_date.fromisoformat(document.date)
    try:
        compile_pdf: Any = typst.compile
        content: bytes = compile_pdf(
            template.read_bytes(),
            font_paths=[_font_folder()],
            ignore_system_fonts=True,  # the fonts are those of the figures, on every computer
            sys_inputs={"document": json.dumps(_data(document, figures, day), allow_nan=False)},
            format="pdf",
            pdf_standards=["ua-1"],
            timestamp=int(datetime.combine(day, time(), UTC).timestamp()),
        )
    except typst.TypstError as error:
        raise OutputError(f"Cannot typeset the PDF: {error}. Print sizing_report.html instead.") from error
    return content


def _font_folder() -> str:
    import matplotlib

    return str(Path(matplotlib.get_data_path()) / "fonts" / "ttf")


@lru_cache(maxsize=1)
def _known_letters() -> frozenset[str]:
    """Letters that the font of the report has, and those that only shape the line."""
    from matplotlib.ft2font import FT2Font

    return frozenset("\n\u200b").union(
        map(chr, FT2Font(str(Path(_font_folder()) / "DejaVuSans.ttf")).get_charmap())
    )


def _data(document: Document, figures: Mapping[str, DrawnFigure], day: calendar_date) -> dict[str, Any]:
    """Turn the document into plain data, with every text printable in the report's font."""
    sections = [
        {"title": section.title, "blocks": [_block(block, figures) for block in section.blocks]}
        for section in document.sections
    ]
    data: dict[str, Any] = _printable(
        {
            "title": document.title,
            "subtitle": document.subtitle,
            "running_title": document.running_title,
            "footer": document.footer,
            "author": dict(document.cover).get("Prepared by", ""),
            "cover": document.cover,
            "verdict": document.verdict,
            "verdict_word": headline(document.verdict_state),
            "state": state_of(document.verdict_state),
            "sections": sections,
        }
    )
    return data | {"day": [day.year, day.month, day.day]}


def _block(block: Any, figures: Mapping[str, DrawnFigure]) -> dict[str, Any]:
    if block.kind == "table":
        return _table(block)
    data = dataclasses.asdict(block)
    if block.kind == "figure":
        data["svg"] = figures[block.key].svg.decode("utf-8")
    return data


def _table(table: Table) -> dict[str, Any]:
    return {
        "kind": table.kind,
        "caption": table.caption,
        "columns": [dataclasses.asdict(column) for column in table.columns],
        "rows": [
            [
                {
                    "text": _breakable(cell.text, _LONGEST_IN_COLUMN),
                    "note": _breakable(cell.note, _LONGEST_IN_COLUMN),
                    "state": state_of(cell.verdict),
                    "share": cell.share,
                }
                for cell in cells
            ]
            for cells in table.rows
        ],
    }


def _breakable(text: str, longest: int) -> str:
    """Let runs of more than `longest` letters break, by zero-width spaces."""
    return re.sub(
        rf"[^\s\u200b-]{{{longest + 1},}}", lambda match: _with_breaks(match.group(), longest // 2), text
    )


def _with_breaks(word: str, step: int) -> str:
    return "\u200b".join(word[start : start + step] for start in range(0, len(word), step))


def _printable(value: Any) -> Any:
    """Make every text inside `value` fit the line and the font; PDF/UA forbids missing letters."""
    if isinstance(value, str):
        return _in_font(_breakable(_ISOLATES.sub("", value), _LONGEST_IN_LINE))
    if isinstance(value, Mapping):
        return {key: _in_font(item) if key == "svg" else _printable(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_printable(item) for item in value]
    return value


def _in_font(text: str) -> str:
    missing = set(text) - _known_letters()
    return text.translate(dict.fromkeys(map(ord, missing), _REPLACEMENT)) if missing else text
