"""The log as a table: a row for every entry of every kind, a column for every fact.

Readings stand as they were typed, with their unit, in columns by their names; what was computed
stands in columns "computed …", numbers with the unit in brackets.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc.shiftlog.export_text import visible
from tankcalc.shiftlog.listing import as_object
from tankcalc.shiftlog.standing import Corrections

if TYPE_CHECKING:
    from tankcalc.shiftlog.store import Row, Store

Cell = str | float | int | None
"""Text, a number, or nothing."""

FACTS = {
    "number": "number",
    "id": "id",
    "kind": "kind",
    "time": "time",
    "local time": "local_time",
    "entered": "entered",
    "time zone": "time_zone",
    "shift": "shift",
    "shift date": "shift_date",
    "site": "site",
    "tank": "tank",
    "fluid": "fluid",
    "who": "who",
    "user": "user",
    "console": "console",
    "amends": "amends",
    "reason": "reason",
    "note": "note",
    "moving": "moving",
}
"""Column headings of the facts, each with its key in ``shiftlog list --json``."""

LATER_FACTS = ("judgement", "witness", "source")
DECLARED = (
    *("received", "delivered", "drawn", "other", "fault", "instrument"),
    *("of", "what", "until", "was", "is", "archive", "head"),
)
"""What is typed in entries that are no readings."""

FIGURES = {
    "computed level [m]": "level_m",
    "computed ullage [m]": "ullage_m",
    "computed water level [m]": "water_level_m",
    "computed volume [m3]": "volume_m3",
    "computed product volume [m3]": "product_volume_m3",
    "computed standard volume [m3]": "standard_volume_m3",
    "computed net standard volume [m3]": "net_standard_volume_m3",
    "computed mass [kg]": "mass_kg",
    "computed product mass [kg]": "product_mass_kg",
    "computed density [kg/m3]": "density_kg_m3",
}
"""Column headings of results, each with its key in the result."""

_UNCERTAIN = {
    "uncertainty of level (k = 2) [m]": "level_m",
    "uncertainty of volume (k = 2) [m3]": "volume_m3",
    "uncertainty of mass (k = 2) [kg]": "mass_kg",
}
_AFTER = ("status", "warnings", "versions", "program", "hash")


@dataclass(frozen=True, slots=True)
class Table:
    """A heading and as many rows, each made when it is asked for."""

    heading: tuple[str, ...]
    rows: Iterator[tuple[Cell, ...]]


def as_table(store: Store) -> Table:
    """Return the whole log as a table; nothing in its texts is hidden from the eye."""
    corrections = Corrections.in_log(store)
    rows = (cells(row, str(corrections.mark(row))) for row in store.between(None, None))
    return Table(heading(), rows)


def heading() -> tuple[str, ...]:
    """Return the headings of all columns."""
    typed = (*reading_names(), *DECLARED)
    return (*FACTS, "state", *LATER_FACTS, *typed, *FIGURES, *_UNCERTAIN, *_AFTER)


def reading_names() -> tuple[str, ...]:
    """Return the names of the readings that can be typed, in their order."""
    from tankcalc.typed import FIELDS

    return tuple(field.name for field in FIELDS)


def cells(row: Row, state: str) -> tuple[Cell, ...]:
    """Return the cells of one entry, in the order of the headings; ``state``: what became of it."""
    facts, entry = as_object(row), row.entry
    result = entry.result or {}
    spread = result.get("expanded_uncertainty")
    found: list[object] = [facts[key] for key in FACTS.values()]
    found += [state, *(getattr(entry, name) for name in LATER_FACTS)]
    found += [entry.typed.get(name) for name in (*reading_names(), *DECLARED)]
    found += [result.get(key) for key in FIGURES.values()]
    known = spread if isinstance(spread, Mapping) else {}
    found += [known.get(key) for key in _UNCERTAIN.values()]
    found += [entry.status, _warnings(result.get("warnings"))]
    found += [_pairs(entry.versions), entry.program, row.hash.hex()]
    return tuple(_cell(value) for value in found)


def _cell(value: object) -> Cell:
    if isinstance(value, bool) or value is None or value == "":
        return None if value in (None, "") else str(value)
    return value if isinstance(value, int | float) else visible(str(value))


def _warnings(given: object) -> str:
    if not isinstance(given, list | tuple):
        return ""
    return " ".join(str(one.get("message", "")) for one in given if isinstance(one, Mapping))


def _pairs(texts: Mapping[str, str]) -> str:
    return "; ".join(f"{name} {text}" for name, text in texts.items())
