"""What the headings of a table mean: readings with their unit, facts, and what only people read."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from typing import NamedTuple

from tankcalc.errors import QuantityError
from tankcalc.shiftlog.export import DECLARED, heading, reading_names
from tankcalc.shiftlog.export_text import unguarded
from tankcalc.shiftlog.spreadsheet import Cells
from tankcalc.text import clean

FACTS = (
    *("time", "tank", "fluid", "kind", "id", "amends", "reason", "note", "who", "moving", "site"),
    *("judgement", "witness"),
    *DECLARED,
)
"""Columns that are read; the others that an export writes are left alone."""

_WITH_UNIT = re.compile(r"(?P<name>.+?)\s*\[(?P<unit>[^\[\]]+)\]")
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,3})?", re.ASCII)


class _Reading(NamedTuple):
    """A column of a reading; without a unit every cell holds its own."""

    heading: str
    name: str
    unit: str


@dataclass(frozen=True, slots=True)
class Columns:
    """The columns of one table, and what is wrong with its headings."""

    readings: tuple[_Reading, ...]
    facts: dict[str, str]
    problems: tuple[str, ...]

    def fact(self, cells: Cells, name: str) -> str:
        """Return the text of a fact in a row; empty where there is none."""
        return cells.get(self.facts.get(name, ""), "").strip()

    def typed(self, cells: Cells) -> tuple[dict[str, str], list[str]]:
        """Return the readings of a row as somebody would type them, and what is no number."""
        typed: dict[str, str] = {}
        problems = []
        for column in self.readings:
            # A CSV file that went through a spreadsheet still has the apostrophe in its cells.
            text = unguarded(cells.get(column.heading, "").strip())
            if text and column.unit and not _NUMBER.fullmatch(text):
                what = f'"{clean(text, 40)}" is no number with a decimal point.'
                problems.append(f"{column.heading}: {what}")
            elif text:
                typed[column.name] = f"{text} {column.unit}" if column.unit else text
        return typed, problems


def columns_of(headings: Sequence[str]) -> Columns:
    """Return what the headings of a table mean."""
    names = reading_names()
    for_people = {_plain(text) for text in heading()}
    readings: list[_Reading] = []
    facts: dict[str, str] = {}
    problems = []
    for text in headings:
        found = _WITH_UNIT.fullmatch(text)
        name = _plain(found["name"] if found else text)
        if name in names:
            unit = found["unit"].strip() if found else ""
            problems += _why_not(name, unit, text, readings)
            readings.append(_Reading(text, name, unit))
        elif _plain(text) in FACTS:
            facts[_plain(text)] = text
        elif _plain(text) not in for_people:
            problems.append(_unknown(text, names))
    if "time" not in facts:
        problems.append('there is no column "time".')
    return Columns(tuple(readings), facts, tuple(problems))


def _why_not(name: str, unit: str, text: str, earlier: list[_Reading]) -> list[str]:
    from tankcalc.typed import NAMES, PRESSURES
    from tankcalc.units import parse_any

    problems = []
    if any(name == other.name for other in earlier):
        problems.append(f'heading "{clean(text)}": {name} stands in another column already.')
    if unit:
        dimensions = ("pressure", "current", "fraction") if name in PRESSURES else ()
        try:
            parse_any(f"1 {unit}", dimensions or (NAMES[name].dimension,))
        except QuantityError as error:
            problems.append(f'heading "{clean(text)}": {error}')
    return problems


def _unknown(text: str, names: Sequence[str]) -> str:
    near = get_close_matches(_plain(text.partition("[")[0]), (*names, *FACTS), n=1)
    advice = f' Did you mean "{near[0]}"?' if near else " Remove the column, or name a reading."
    return f'heading "{clean(text)}" is not known.{advice}'


def _plain(text: str) -> str:
    return re.sub(r"[\s_-]+", "_", text.strip().lower())
