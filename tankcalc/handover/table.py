"""The document as rows for a spreadsheet: a line for every figure and for everything said.

Figures stand as text, as they are shown, and as a number with its SI unit.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator

from tankcalc.handover.document import Card, Document, Fact, Item, Section
from tankcalc.shiftlog.export_text import guarded
from tankcalc.shiftlog.times import iso_utc

HEADING = ("section", "tank", "item", "text", "number", "unit", "time", "urgent")

_Line = tuple[str, str, str, str, float | None, str, str, str]


def as_csv(document: Document) -> str:
    """Return the document as CSV; what begins like a formula gets an apostrophe before it."""
    out = io.StringIO()
    writer = csv.writer(out)
    writer.writerow(HEADING)
    for line in _lines(document):
        writer.writerow([_cell(value) for value in line])
    return out.getvalue()


def _cell(value: str | float | None) -> str:
    if value is None:
        return ""
    return guarded(value) if isinstance(value, str) else repr(value)


def _lines(document: Document) -> Iterator[_Line]:
    yield from (_words("Handover", text) for text in (document.title, *document.banners))
    yield from (_fact("Handover", "", fact) for fact in document.facts)
    yield from _section(document.changed)
    yield from _section(document.tanks)
    for card in document.cards:
        yield from _card(card)
    for section in (*document.sections, document.acknowledged):
        yield from _section(section)
    yield from (_words("Cautions", text) for text in document.cautions)


def _section(section: Section) -> Iterator[_Line]:
    if section.empty:
        yield _words(section.title, section.nothing)
    if section.table is not None:
        names = section.table.headings[1:]
        for tank, *cells in section.table.rows:
            for name, text in zip(names, cells, strict=True):
                yield (section.title, tank, name, text, None, "", "", "")
    yield from (_item(section.title, item) for item in section.items)


def _card(card: Card) -> Iterator[_Line]:
    yield ("Tank", card.name, "Product", card.subtitle, None, "", "", "")
    yield ("Tank", card.name, "State", card.state, None, "", "", "")
    yield from (_fact("Tank", card.name, fact) for fact in card.facts)
    yield from (_item("Tank", item) for item in card.items)


def _words(section: str, text: str) -> _Line:
    return (section, "", "", text, None, "", "", "")


def _fact(section: str, tank: str, fact: Fact) -> _Line:
    text = f"{fact.text} {fact.give}".strip()
    return (section, tank, fact.label, text, fact.number, fact.unit, "", "")


def _item(section: str, item: Item) -> _Line:
    time = "" if item.at_us is None else iso_utc(item.at_us)
    urgent = "yes" if item.urgent else ""
    return (section, item.subject, item.kind, item.text, None, "", time, urgent)
