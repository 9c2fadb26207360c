"""The report as one HTML file: nothing is fetched, nothing runs, everything prints."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from functools import lru_cache
from importlib import resources
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.blocks import FigureBlock
from actuator_sizing.report.states import headline, state_of

if TYPE_CHECKING:
    from jinja2 import Template

    from actuator_sizing.report.document.blocks import Column, Document
    from actuator_sizing.report.figures import DrawnFigure


def render_html(document: Document, figures: Mapping[str, DrawnFigure]) -> bytes:
    """Write the document as a self-contained HTML page.

    Parameters
    ----------
    document : Document
        The prepared report.
    figures : mapping of str to DrawnFigure
        Drawings by key; every figure block of the document has one.

    Returns
    -------
    bytes
        UTF-8 text of the page.
    """
    from markupsafe import Markup

    numbers = figure_numbers(document)

    def drawing(block: FigureBlock) -> Markup:
        return Markup(inline_svg(figures[block.key], f"{numbers[block.key]}. {block.alt}"))

    text = _template().render(
        document=document,
        css=Markup(_asset("sizing_report.css")),
        page_css=Markup(_page_css(document)),
        drawing=drawing,
        figure_name=lambda block: f"{numbers[block.key]}.",
        state=state_of,
        verdict_word=headline,
        widths=_widths,
        bar_width=lambda share: f"{100.0 * min(max(share, 0.0), 1.0):.1f}",
    )
    return text.encode("utf-8")


@lru_cache(maxsize=1)
def _template() -> Template:
    from jinja2 import Environment, StrictUndefined

    environment = Environment(
        autoescape=True,
        trim_blocks=True,
        lstrip_blocks=True,
        undefined=StrictUndefined,
        keep_trailing_newline=True,
    )
    return environment.from_string(_asset("sizing_report.html.j2"))


def _asset(name: str) -> str:
    folder = resources.files("actuator_sizing.report") / "templates"
    return (folder / name).read_text(encoding="utf-8")


def figure_numbers(document: Document) -> dict[str, str]:
    """Give every figure its number, in the order in which the document shows them."""
    blocks = (block for section in document.sections for block in section.blocks)
    keys = [block.key for block in blocks if isinstance(block, FigureBlock)]
    return {key: f"Figure {count}" for count, key in enumerate(keys, 1)}


def inline_svg(figure: DrawnFigure, label: str) -> str:
    """Turn a drawing into an element of the page that scales with it and names itself.

    Parameters
    ----------
    figure : DrawnFigure
        The drawing as a file.
    label : str
        What it shows, for those who cannot see it.
    """
    from markupsafe import escape

    text = figure.svg.decode("utf-8")
    text = text[text.index("<svg") :]
    text = re.sub(r"<metadata>.*?</metadata>", "", text, flags=re.DOTALL)
    head, rest = text.split(">", 1)
    head = re.sub(r'\s(width|height|version)="[^"]*"', "", head)
    return f'{head} role="img" aria-label="{escape(label)}">{rest}'


def _widths(columns: Sequence[Column]) -> list[str]:
    total = sum(column.weight for column in columns)
    return [f"{100.0 * column.weight / total:.2f}" for column in columns]


def _page_css(document: Document) -> str:
    """Put running title and page numbers into the margins of a print."""
    title, footer = _css_text(document.running_title), _css_text(document.footer)
    return (
        "@page { size: A4; margin: 18mm 14mm 16mm; "
        f"@top-left {{ content: {title}; font: 8pt 'DejaVu Sans', sans-serif; color: #595959; }} "
        f"@bottom-left {{ content: {footer}; font: 8pt 'DejaVu Sans', sans-serif; color: #595959; }} "
        "@bottom-right { content: counter(page) ' / ' counter(pages); "
        "font: 8pt 'DejaVu Sans', sans-serif; color: #595959; } }"
    )


def _css_text(value: Any) -> str:
    r"""Write any text as a CSS string in which nothing can end the string, the rule or the element.

    Examples
    --------
    >>> _css_text('a"</style>')
    '"a\\22 \\3c \\2f style\\3e "'
    """
    escaped = "".join(c if c.isalnum() or c in " ,.-" else f"\\{ord(c):x} " for c in str(value))
    return f'"{escaped}"'
