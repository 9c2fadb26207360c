"""Text that tries to be something else comes out literally, in every column of every format.

The texts go into every place that a user types into: names of parts and segments, notes, sources, units as entered,
title, revision, author, case name, remarks.
"""

import csv
import html
import io
import json
import re
import warnings
import xml.etree.ElementTree as ElementTree
from datetime import date

import openpyxl
import pytest
from report_fixture import HOSTILE, build_hostile

from actuator_sizing.report import render_report
from actuator_sizing.report.text import clean

DAY = date(2025, 3, 4)
LETTERS = "x" * 10_000


@pytest.fixture(scope="module")
def files():
    return render_report(build_hostile(), date=DAY)


def expected_on_paper(text):
    """What a page shows: one line, no control characters, and how long the text was where it is cut."""
    return clean(text)


def test_page(files):
    shown = html.unescape(re.sub(r"<[^>]*>", "\x1f", files["sizing_report.html"].decode("utf-8")))
    for text in HOSTILE:
        assert expected_on_paper(text) in shown, text[:20]
    assert "(10000 characters)" in shown


def test_workbook(files):
    with warnings.catch_warnings():
        # openpyxl cannot keep the data bars of today's format; it reads the cells all the same
        warnings.filterwarnings("ignore", message=".*extension is not supported", category=UserWarning)
        book = openpyxl.load_workbook(io.BytesIO(files["sizing_tables.xlsx"]))
    cells = [cell for sheet in book.worksheets for row in sheet.iter_rows() for cell in row]
    texts = {
        str(cell.value).replace("_x000D_", "\r") for cell in cells if cell.data_type in ("s", "inlineStr")
    }
    for text in HOSTILE:
        literal = text.replace("\x00", "\ufffd").replace("\x0b", "\ufffd")
        lines = literal.replace("\r\n", "\n")
        assert {literal, lines} & {found.replace("\r\n", "\n") for found in texts} | {literal} & texts, text[
            :20
        ]
    assert not [cell for cell in cells if cell.hyperlink]


def test_candidates(files):
    rows = list(csv.reader(io.StringIO(files["candidates.csv"].decode("utf-8-sig"), newline="")))
    names = {row[0] for row in rows[1:]}
    for text in HOSTILE:
        literal = text.replace("\x00", "\ufffd")
        assert {literal, f"'{literal}"} & names, text[:20]


def test_results(files):
    results = json.loads(files["results.json"])
    assert {item["motor"] for item in results["sets"]} == set(HOSTILE)
    assert set(HOSTILE) <= {entry["source"] for entry in results["case"]["inputs"]}
    assert set(HOSTILE) <= {entry["as_entered"] for entry in results["case"]["inputs"]}


def test_figures(files):
    """Names are text of the drawing, cut to the room there is, and never elements of it."""
    drawing = files["figures/utilisation.svg"]
    root = ElementTree.fromstring(drawing)
    assert {node.tag.rpartition("}")[2] for node in root.iter()} <= {
        "svg", "g", "text", "tspan", "path", "defs", "style", "clipPath", "rect", "use", "pattern", "metadata", "RDF",
        "Work", "title", "type", "date", "format", "creator", "Agent",
    }  # fmt: skip
    shown = " ".join("".join(node.itertext()) for node in root.iter("{http://www.w3.org/2000/svg}text"))
    assert "<scri" in shown
    assert "=1+1" in shown
    assert "\N{ROCKET}" in shown


def test_pdf(files):
    pypdf = pytest.importorskip("pypdf")
    pytest.importorskip("typst")
    reader = pypdf.PdfReader(io.BytesIO(files["sizing_report.pdf"]))
    text = re.sub(r"[\s\u200b]", "", " ".join(page.extract_text() for page in reader.pages))
    for hostile in HOSTILE:
        if hostile.isascii() and hostile.isprintable() and len(hostile) < 200:
            assert re.sub(r"\s", "", hostile) in text, hostile
    assert "(10000characters)" in text
    assert LETTERS[:100] in text
    assert reader.metadata.title.startswith("<script>alert(1)</script>")
