"""The document as one self-contained page: no script, nothing fetched, light, good on paper."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from html import escape

from tankcalc.handover.document import Card, Document, Fact, Item, Section, Table
from tankcalc.handover.page_style import STYLE
from tankcalc.handover.trend import svg

_KEY = (
    "Trends: the shift in grey, the day before it in white; a dot is a reading, a cross one that "
    "was refused; limits are dashed, an arrow points to the next one that lies off the paper."
)
_POLICY = "default-src 'none'; style-src 'unsafe-inline'"


def as_html(document: Document) -> str:
    """Return the page. Every text in it is escaped: none of it is ever markup."""
    return "\n".join(_page(document)) + "\n"


def _page(document: Document) -> Iterator[str]:
    yield '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">'
    yield f'<meta http-equiv="Content-Security-Policy" content="{escape(_POLICY)}">'
    yield '<meta name="viewport" content="width=device-width, initial-scale=1">'
    yield f"<title>{escape(document.title)}</title>\n<style>{STYLE}</style>"
    yield "</head>\n<body>\n<main>"
    yield f"<h1>{escape(document.title)}</h1>"
    yield from (f'<p class="banner">{escape(text)}</p>' for text in document.banners)
    yield from _facts(document.facts, "head")
    yield from _section(document.changed)
    yield from _section(document.tanks)
    if any(card.trends for card in document.cards):
        yield f'<p class="key">{escape(_KEY)}</p>'
    for card in document.cards:
        yield from _card(card)
    for section in document.sections:
        yield from _section(section)
    yield from _acknowledged(document.acknowledged)
    yield "<footer>"
    yield from (f"<p>{escape(text)}</p>" for text in document.cautions)
    yield "</footer>\n</main>\n</body>\n</html>"


def _facts(facts: Iterable[Fact], kind: str) -> Iterator[str]:
    yield f'<dl class="{kind}">'
    for fact in facts:
        give = f' <span class="give">{escape(fact.give)}</span>' if fact.give else ""
        yield f"<div><dt>{escape(fact.label)}</dt><dd>{escape(fact.text)}{give}</dd></div>"
    yield "</dl>"


def _section(section: Section) -> Iterator[str]:
    yield f"<section><h2>{escape(section.title)}</h2>"
    if section.empty:
        yield f'<p class="nothing">{escape(section.nothing)}</p>'
    if section.table is not None and section.table.rows:
        yield from _table(section.table)
    if section.items:
        yield from _items(section.items)
    yield "</section>"


def _items(items: Iterable[Item]) -> Iterator[str]:
    yield '<table class="items">'
    for item in items:
        mark = '<span class="mark">!</span>' if item.urgent else ""
        kind = f'<span class="kind">{escape(item.kind)}</span>'
        row = '<tr class="urgent">' if item.urgent else "<tr>"
        yield (
            f'{row}<td class="when">{escape(item.when)}</td>'
            f'<td class="tank">{escape(item.subject)}</td><td class="what">{mark}{kind}</td>'
            f"<td>{escape(item.text)}</td></tr>"
        )
    yield "</table>"


def _table(table: Table) -> Iterator[str]:
    numbers = [' class="number"' * (name in table.numbers) for name in table.headings]
    heads = zip(table.headings, numbers, strict=True)
    yield '<table class="overview"><thead><tr>'
    yield "".join(f"<th{kind}>{escape(name)}</th>" for name, kind in heads)
    yield "</tr></thead><tbody>"
    for row in table.rows:
        cells = zip(row, numbers, strict=True)
        yield "<tr>" + "".join(f"<td{kind}>{escape(text)}</td>" for text, kind in cells) + "</tr>"
    yield "</tbody></table>"


def _card(card: Card) -> Iterator[str]:
    yield '<article class="card">'
    yield (
        f"<h3>{escape(card.title)} <span>{escape(card.subtitle)}</span>"
        f'<span class="state">{escape(card.state)}</span></h3>'
    )
    if card.facts:
        yield from _facts(card.facts, "figures")
    if card.trends:
        yield '<div class="trends">' + "".join(svg(trend) for trend in card.trends) + "</div>"
    if card.items:
        yield '<ul class="said">'
        for item in card.items:
            mark = '<span class="mark">!</span>' if item.urgent else ""
            yield f"<li>{mark}{escape(item.text)}</li>"
        yield "</ul>"
    yield "</article>"


def _acknowledged(section: Section) -> Iterator[str]:
    yield from _section(section)
    if not section.items:
        rooms = ("Name", "Date and time", "Signature")
        lines = "".join(f"<div><span></span>{room}</div>" for room in rooms)
        yield f'<div class="sign">{lines}</div>'
