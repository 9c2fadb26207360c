"""The page: self-contained, inert, accessible in structure, deaf to markup in names."""

import re
from datetime import date
from html.parser import HTMLParser

import pytest
from report_fixture import build_comparison, build_hostile

from actuator_sizing.report.document import prepare_document
from actuator_sizing.report.figures import draw_figures
from actuator_sizing.report.html import render_html

VOID = {"meta", "col", "br", "hr", "img", "link", "input"}


class Outline(HTMLParser):
    """Collects what the tests ask about and checks that elements are closed in order."""

    def __init__(self):
        super().__init__()
        self.open, self.tags, self.attributes, self.headings = [], [], [], []

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        self.attributes.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)
        if re.fullmatch("h[1-6]", tag):
            self.headings.append(int(tag[1]))

    def handle_startendtag(self, tag, attrs):
        self.tags.append(tag)
        self.attributes.append((tag, dict(attrs)))

    def handle_endtag(self, tag):
        assert self.open.pop() == tag


def render(comparison) -> str:
    figures = draw_figures(comparison)
    return render_html(prepare_document(comparison, date(2025, 3, 4), figures), figures).decode("utf-8")


@pytest.fixture(scope="module")
def page():
    return render(build_comparison())


@pytest.fixture(scope="module")
def hostile():
    return render(build_hostile())


def outline(text: str) -> Outline:
    parser = Outline()
    parser.feed(text)
    parser.close()
    assert parser.open == []
    return parser


def test_elements_nest_and_headings_never_jump(page):
    headings = outline(page).headings
    assert headings[0] == 1
    assert headings.count(1) == 1
    assert all(after - before <= 1 for before, after in zip(headings, headings[1:], strict=False))


def test_nothing_is_fetched_and_nothing_runs(page, hostile):
    for text in (page, hostile):
        parser = outline(text)
        assert not {"script", "link", "iframe", "object", "embed", "img", "form", "base"} & set(parser.tags)
        for tag, attributes in parser.attributes:
            for name, value in attributes.items():
                assert not name.startswith("on"), (tag, name)
                if name in ("src", "href", "xlink:href"):
                    assert value.startswith("#"), (tag, value)
        assert "@import" not in text
        assert not re.search(r"url\((?!#)", text)
        assert "default-src 'none'" in text


def test_tables_have_captions_and_scoped_headers(page):
    parser = outline(page)
    assert parser.tags.count("table") == parser.tags.count("caption")
    heads = [attributes for tag, attributes in parser.attributes if tag == "th"]
    assert heads
    assert all(attributes.get("scope") in ("row", "col") for attributes in heads)


def test_figures_have_a_text_for_those_who_cannot_see_them(page):
    drawings = [attributes for tag, attributes in outline(page).attributes if tag == "svg"]
    assert len(drawings) == 9
    assert all(a.get("role") == "img" and len(a.get("aria-label", "")) > 20 for a in drawings)


def test_ids_are_unique_and_links_lead_somewhere(page):
    parser = outline(page)
    ids = [attributes["id"] for _, attributes in parser.attributes if "id" in attributes]
    assert len(ids) == len(set(ids))
    targets = {a["href"][1:] for tag, a in parser.attributes if tag == "a"}
    assert targets <= set(ids)
    assert 'lang="en"' in page


def test_names_stay_text(hostile):
    assert "<script>" not in hostile
    assert "&lt;script&gt;alert(1)&lt;/script&gt;" in hostile
    assert "{{ 7*7 }}" in hostile  # shown as typed, not computed
    assert "\x00" not in hostile
    assert "\u202e" not in hostile


def test_the_page_is_the_same_every_time(page):
    assert render(build_comparison()) == page


def test_every_number_of_the_governing_check_is_on_the_page(page):
    check = build_comparison().best.check("voltage")
    assert f"{100 * check.utilisation:.1f} %" in page
    assert "215.7" in page
    assert "335.1" in page
