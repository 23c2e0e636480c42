r"""The document as Markdown. What was typed is escaped: it makes no link, no table and no markup.

Examples
--------
>>> inert("a | b `c` <b> [x](http://y) [bold]")
'a \\| b \\`c\\` &lt;b&gt; \\[x\\](http&#58;//y) \\[bold\\]'
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator

from tankcalc.handover.document import Card, Document, Fact, Item, Section, Table, Trend

_ENTITIES = {"&": "&amp;", "<": "&lt;", ">": "&gt;"}
_MARKUP = re.compile(r"([\\`*_\[\]|~#$])")
_BEGINNING = re.compile(r"^(\d{1,9})([.)])(?=\s|$)|^([-+=])(?=[-=]*\s*$|\s)")
_ADDRESS = re.compile(r"(?i)(https?|ftp|mailto|xmpp)(:)|(www)(\.)|(@)")


def inert(text: str) -> str:
    """Return a text that stays text in Markdown, also at the beginning of a line."""
    escaped = "".join(_ENTITIES.get(ch, ch) for ch in text)
    escaped = _MARKUP.sub(r"\\\1", escaped)
    escaped = _BEGINNING.sub(lambda m: f"{m[1]}\\{m[2]}" if m[1] else f"\\{m[3]}", escaped)
    return _ADDRESS.sub(_broken, escaped)


def _broken(found: re.Match[str]) -> str:
    """Return an address that no program makes a link of, and that reads the same."""
    name, dot = found[1] or found[3] or "", found[2] or found[4] or found[5]
    return f"{name}&#{ord(dot)};"


def as_markdown(document: Document) -> str:
    """Return the document as Markdown."""
    return "\n".join(_lines(document)) + "\n"


def _lines(document: Document) -> Iterator[str]:
    yield f"# {inert(document.title)}"
    for text in document.banners:
        yield from ("", f"**{inert(text)}**")
    yield ""
    yield from (f"- {inert(fact.label)}: {inert(fact.text)}" for fact in document.facts)
    yield from _section(document.changed)
    yield from _section(document.tanks)
    for card in document.cards:
        yield from _card(card)
    for section in (*document.sections, document.acknowledged):
        yield from _section(section)
    if not document.acknowledged.items:
        yield from ("", "Name: ____________  Date and time: ____________  Signature: ____________")
    yield from ("", "---", "")
    yield from (f"{inert(text)}  " for text in document.cautions)


def _section(section: Section) -> Iterator[str]:
    yield from ("", f"## {inert(section.title)}", "")
    if section.empty:
        yield inert(section.nothing)
    if section.table is not None and section.table.rows:
        yield from (*_table(section.table), "")
    if section.items:
        yield from _items(section.items)


def _items(items: Iterable[Item]) -> Iterator[str]:
    yield "| Time | Tank | What | |"
    yield "|---|---|---|---|"
    for item in items:
        mark = "**!** " if item.urgent else ""
        cells = (item.when, item.subject, item.kind, item.text)
        when, tank, kind, text = (inert(cell) for cell in cells)
        yield f"| {when} | {tank} | {mark}{kind} | {text} |"


def _table(table: Table) -> Iterator[str]:
    yield f"| {' | '.join(inert(name) for name in table.headings)} |"
    yield f"|{'|'.join('---:' if name in table.numbers else '---' for name in table.headings)}|"
    for row in table.rows:
        yield f"| {' | '.join(inert(cell) for cell in row)} |"


def _card(card: Card) -> Iterator[str]:
    title = ", ".join(filter(None, (card.title, card.subtitle)))
    yield from ("", f"### {inert(title)}", "", inert(card.state), "")
    yield from (f"- {_fact(fact)}" for fact in card.facts)
    yield from (f"- {_trend(trend)}" for trend in card.trends[:1])
    yield from (f"- {'**!** ' if item.urgent else ''}{inert(item.text)}" for item in card.items)


def _fact(fact: Fact) -> str:
    give = f" {inert(fact.give)}" if fact.give else ""
    return f"{inert(fact.label)}: {inert(fact.text)}{give}"


def _trend(trend: Trend) -> str:
    """Return a level trend as numbers: about eight of them, from the oldest to the newest."""
    known = [value for _, value in trend.points if value is not None]
    step = max((len(known) - 1) / 7.0, 1.0)
    picked = dict.fromkeys(round(k * step) for k in range(8) if round(k * step) < len(known))
    shown = ", ".join(f"{known[k]:.{trend.digits}f}" for k in picked)
    return f"{trend.label} over the shift and the day before, {trend.unit}: {shown}"
