"""The PDF: tagged, searchable, numbered, the same every time, deaf to markup in names."""

import dataclasses
import io
import sys
from datetime import date

import pytest
from report_demo import DEMO_CASES, demo_comparison
from report_fixture import build_comparison, build_hostile

from actuator_sizing.errors import OutputError
from actuator_sizing.report import render_report
from actuator_sizing.report.document import prepare_document
from actuator_sizing.report.document.comparing import shown_pair
from actuator_sizing.report.document.inputs import part_entries
from actuator_sizing.report.document.verdict import verdict_sentence
from actuator_sizing.report.figures import draw_figures
from actuator_sizing.report.html import figure_numbers
from actuator_sizing.report.pdf import _breakable, render_pdf

pypdf = pytest.importorskip("pypdf")
pytest.importorskip("typst")

DAY = date(2025, 3, 4)


def render(comparison) -> bytes:
    figures = draw_figures(comparison)
    return render_pdf(prepare_document(comparison, DAY, figures), figures)


def plain(text: str) -> str:
    return " ".join(text.replace("\u200b", "").replace("\u00a0", " ").split())


@pytest.fixture(scope="module")
def content():
    return render(build_comparison())


@pytest.fixture(scope="module")
def reader(content):
    return pypdf.PdfReader(io.BytesIO(content))


@pytest.fixture(scope="module")
def text(reader):
    return plain(" ".join(page.extract_text() for page in reader.pages))


def test_text_is_searchable_in_tables_and_figures(text):
    for words in (
        "Tray lift",
        "Lynx 60-B + Planet 70/5 + Brook 5 passes every check that could be made",
        "winding limit 130 °C",  # inside a figure
        "The working of the governing checks",
        "Risk assessment (ISO 12100)",
        "9c6f2b1d" * 8,
    ):
        assert words in text


@pytest.mark.parametrize("name", DEMO_CASES)
def test_it_tells_verdict_every_check_and_every_unit(name):
    comparison = demo_comparison(name)
    reader = pypdf.PdfReader(io.BytesIO(render(comparison)))
    text = plain(" ".join(page.extract_text() for page in reader.pages))
    compact = text.replace(" ", "")  # where a line or a cell breaks is the typesetter's affair
    sentence, _ = verdict_sentence(comparison)
    assert sentence.replace(" ", "") in compact
    for check in comparison.best.checks:
        assert check.title.replace(" ", "") in compact, check.title
        demand, capacity, unit = shown_pair(check)
        assert f"{demand} {capacity} {unit}".strip() in text, (check.title, demand, capacity, unit)
    units = {entry.unit for entry in (*comparison.case.entries, *part_entries(comparison, comparison.best))}
    assert len(units) > 15
    assert [unit for unit in units if unit not in text] == []


def test_it_is_tagged_titled_and_dated(reader):
    root = reader.trailer["/Root"]
    assert root["/MarkInfo"]["/Marked"]
    assert "/StructTreeRoot" in root
    assert root["/Lang"] == "en"
    assert reader.metadata.title == "Tray lift, revision B – Actuator sizing report"
    assert reader.metadata.author == "M. Okafor"
    assert reader.metadata.creation_date.date() == DAY


def test_figures_have_an_alternative_text(reader):
    alternatives = []

    def walk(node):
        node = node.get_object() if hasattr(node, "get_object") else node
        if isinstance(node, list):
            for child in node:
                walk(child)
        elif isinstance(node, dict):
            if node.get("/S") == "/Figure":
                alternatives.append(node.get("/Alt"))
            if "/K" in node:
                walk(node["/K"])

    walk(reader.trailer["/Root"]["/StructTreeRoot"]["/K"])
    comparison = build_comparison()
    figures = draw_figures(comparison)
    assert len(alternatives) == len(figure_numbers(prepare_document(comparison, DAY, figures)))
    assert all(text and len(text) > 20 for text in alternatives)


def test_pages_are_numbered_and_carry_the_running_title(reader):
    pages = [plain(page.extract_text()) for page in reader.pages]
    assert len(pages) > 3
    for number, page in enumerate(pages, 1):
        assert f"{number} / {len(pages)}" in page
        assert number == 1 or "Tray lift, revision B" in page


def test_the_head_of_a_table_is_repeated_on_the_next_page():
    base = build_comparison()
    long = dataclasses.replace(base, assumptions=tuple((f"subject {n}", f"text {n}") for n in range(150)))
    reader = pypdf.PdfReader(io.BytesIO(render(long)))
    heads = sum("What was assumed or derived" in plain(page.extract_text()) for page in reader.pages)
    pages = sum("subject" in page.extract_text() for page in reader.pages)
    assert heads == pages > 1


def test_the_same_document_gives_the_same_bytes(content):
    assert render(build_comparison()) == content


def test_names_are_never_read_as_markup():
    reader = pypdf.PdfReader(io.BytesIO(render(build_hostile())))
    text = plain(" ".join(page.extract_text() for page in reader.pages))
    assert "<script>alert(1)</script>" in text
    assert '#panic("x") $a$ *b*' in text
    assert "{{ 7*7 }}" in text


def test_a_comparison_without_sets_is_typeset():
    empty = dataclasses.replace(build_comparison(), sets=())
    reader = pypdf.PdfReader(io.BytesIO(render(empty)))
    assert "No set could be compared" in plain(reader.pages[0].extract_text())


def test_without_the_package_the_rest_is_written_and_the_pdf_says_what_to_do(monkeypatch):
    comparison = build_comparison()
    monkeypatch.setitem(sys.modules, "typst", None)
    assert "sizing_report.pdf" not in render_report(comparison, date=DAY, pdf=False)
    with pytest.raises(OutputError, match="pip install"):
        render_report(comparison, date=DAY, pdf=True)


def test_the_report_has_the_pdf_when_the_package_is_there():
    assert render_report(build_comparison(), date=DAY)["sizing_report.pdf"].startswith(b"%PDF")


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("short words stay", "short words stay"),
        ("abcdefghij", "abcd\u200befgh\u200bij"),
        ("ab-cd-ef-gh-ij", "ab-cd-ef-gh-ij"),  # breaks at its hyphens already
    ],
)
def test_long_words_get_places_to_break(text, shown):
    assert _breakable(text, 8) == shown
