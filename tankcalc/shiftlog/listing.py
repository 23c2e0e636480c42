"""Rows of the log as JSON data and as lines for a terminal."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator
from typing import TYPE_CHECKING, Any, Literal
from zoneinfo import ZoneInfo

from tankcalc.errors import InputError
from tankcalc.shiftlog.times import SECOND_US, iso_local, iso_utc, show_local, zone_named
from tankcalc.shiftlog.uid import show_uid
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row

System = Literal["metric", "us", "imperial"]

LATE_US = 15 * 60 * SECOND_US
"""An entry made this long after its reading says so."""

_WIDTH = 80
_INDENT = " " * 9
_FIGURES = (("level_m", "length"), ("volume_m3", "volume"), ("mass_kg", "mass"))


def as_object(row: Row) -> dict[str, Any]:
    """Return the row as ``shiftlog list --json`` prints it; texts are exactly as entered."""
    entry = row.entry
    return {
        "id": entry.id,
        "number": row.seq,
        "kind": entry.kind,
        "time": iso_utc(entry.t_us),
        "local_time": iso_local(entry.t_us, entry_zone(entry)),
        "entered": iso_utc(entry.entered_us),
        "time_zone": entry.time_zone,
        "shift": entry.shift,
        "shift_date": entry.shift_date,
        "site": entry.site,
        "tank": entry.tank,
        "fluid": entry.fluid,
        "note": entry.note,
        "moving": entry.movement or None,
        "amends": None if entry.ref is None else show_uid(entry.ref),
        "reason": entry.reason,
        "readings": dict(entry.typed),
        "result": None if entry.result is None else dict(entry.result),
        "user": entry.user,
        "who": entry.who,
        "console": entry.console,
        "versions": dict(entry.versions),
        "program": entry.program,
        "hash": row.hash.hex(),
    }


def as_text(row: Row, system: System = "metric") -> str:
    """Return the row as lines of at most 80 columns, safe for any terminal."""
    entry = row.entry
    lines = [_heading(row), *_wrapped(_what(entry, system))]
    if entry.entered_us - entry.t_us >= LATE_US:
        lines += _wrapped(f"entered late, {show_local(entry.entered_us, entry_zone(entry))}")
    if entry.status in ("check", "refused") and entry.result is not None:
        messages = (str(warning.get("message")) for warning in entry.result.get("warnings", ()))
        lines += _wrapped(f"{entry.status}: {' '.join(messages)}")
    if entry.note:
        lines += _wrapped(f"note: {entry.note}")
    return "\n".join(lines)


def entry_zone(entry: Entry) -> ZoneInfo:
    """Return the zone the entry was made in; UTC where this machine does not know it."""
    try:
        return zone_named(entry.time_zone)
    except InputError:
        return ZoneInfo("UTC")


def _heading(row: Row) -> str:
    entry = row.entry
    parts = (
        f"{row.seq:>7}",
        show_local(entry.t_us, entry_zone(entry)),
        _fitted(clean(entry.shift), 10),
        _fitted(clean(entry.tank or ""), 14),
        _fitted(clean(entry.who or entry.user), 19),
    )
    return "  ".join(parts).rstrip()


def _what(entry: Entry, system: System) -> str:
    from tankcalc.units import show

    result = entry.result or {}
    figures = (
        show(result[key], dimension, system)
        for key, dimension in _FIGURES
        if isinstance(result.get(key), int | float)
    )
    typed = ", ".join(f"{name} {text}" for name, text in entry.typed.items())
    return " ".join(part for part in (", ".join(figures), f"({typed})" if typed else "") if part)


def _cells(text: str) -> int:
    """Return how many columns a terminal gives the text."""
    wide = sum(unicodedata.east_asian_width(ch) in "WF" for ch in text)
    return len(text) + wide - sum(bool(unicodedata.combining(ch)) for ch in text)


def _fitted(text: str, width: int) -> str:
    while _cells(text) > width:
        text = text[:-1]
    return text + " " * (width - _cells(text))


def _wrapped(text: str) -> Iterator[str]:
    """Yield the text, cleaned, in indented lines; a word longer than a line is broken."""
    room = _WIDTH - len(_INDENT)
    line = ""
    for word in clean(text, limit=10_000).split(" "):
        rest = f"{line} {word}" if line else word
        if _cells(rest) > room and line:
            yield _INDENT + line
            rest = word
        while _cells(rest) > room:
            head = _fitted(rest, room).rstrip()
            yield _INDENT + head
            rest = rest[len(head) :]
        line = rest
    if line:
        yield _INDENT + line
