"""A handover as lines for the console, in the order and the words of the report."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from tankcalc.tui.ascii import columns
from tankcalc.tui.present import Line, wrapped

if TYPE_CHECKING:
    from tankcalc.handover.document import Card, Document, Fact, Item, Section, Table

LABEL_COLUMNS = 20


def lines_of(document: Document, width: int) -> list[Line]:
    """Return all of a handover, what changed first."""
    lines = wrapped(document.title, "title", width)
    for banner in document.banners:
        lines += wrapped(f"! {banner}", "check", width)
    lines += [line for fact in document.facts for line in _fact(fact, width)]
    lines += _section(document.changed, width)
    lines += _section(document.tanks, width)
    for card in document.cards:
        lines += [[], *_card(card, width)]
    for section in document.sections:
        lines += _section(section, width)
    lines += _section(document.acknowledged, width)
    lines.append([])
    for caution in document.cautions:
        lines += wrapped(caution, "", width)
    return lines


def _section(section: Section, width: int) -> list[Line]:
    lines: list[Line] = [[], [(section.title.upper(), "title")]]
    if section.empty:
        return [*lines, *wrapped(f"  {section.nothing}", "", width)]
    if section.table is not None:
        lines += _table(section.table, width)
    for item in section.items:
        lines += _item(item, width)
    return lines


def _table(table: Table, width: int) -> list[Line]:
    """Return a table in columns, or where it is too wide a row of it as words."""
    rows = [table.headings, *table.rows]
    widths = [max(columns(row[n]) for row in rows) for n in range(len(table.headings))]
    if sum(widths) + 2 * len(widths) <= width:
        right = [heading in table.numbers for heading in table.headings]
        shown = [_row(row, widths, right) for row in rows]
        return [[(text, "key" if n == 0 else "")] for n, text in enumerate(shown)]
    lines: list[Line] = []
    for row in table.rows:
        pairs = zip(table.headings[1:], row[1:], strict=True)
        said = ", ".join(f"{heading.lower()} {cell}" for heading, cell in pairs if cell)
        lines += wrapped(f"  {row[0]}: {said}", "", width)
    return lines


def _row(cells: Sequence[str], widths: Sequence[int], right: Sequence[bool]) -> str:
    """Return cells in columns, those of numbers at the right."""
    shown = []
    for cell, room, at_right in zip(cells, widths, right, strict=True):
        fill = " " * (room - columns(cell))
        shown.append(fill + cell if at_right else cell + fill)
    return f"  {'  '.join(shown)}".rstrip()


def _card(card: Card, width: int) -> Iterator[Line]:
    title = ", ".join(part for part in (card.title, card.subtitle) if part)
    yield from wrapped(title, "key", width)
    if card.state:
        yield from wrapped(f"  {card.state}", "", width)
    for fact in card.facts:
        yield from _fact(fact, width)
    for item in card.items:
        mark = "! " if item.urgent else ""
        for row in wrapped(f"{mark}{item.text}", "key" if item.urgent else "", width - 2):
            yield [("  ", ""), *row]


def _fact(fact: Fact, width: int) -> list[Line]:
    give = f" {fact.give}" if fact.give else ""
    rows = wrapped(f"{fact.text}{give}", "", width - LABEL_COLUMNS)
    label = fact.label[: LABEL_COLUMNS - 3].ljust(LABEL_COLUMNS - 2)
    lines: list[Line] = [[(f"  {label}", ""), *(rows[0] if rows else [])]]
    return [*lines, *([(" " * LABEL_COLUMNS, ""), *row] for row in rows[1:])]


def _item(item: Item, width: int) -> list[Line]:
    head = " ".join(part for part in (item.when, item.subject, item.kind) if part)
    mark = "! " if item.urgent else "  "
    words = f"{mark}{head}: {item.text}" if head else f"{mark}{item.text}"
    rows = wrapped(words, "key" if item.urgent else "", width - 2)
    return [[("  ", ""), *row] for row in rows]
