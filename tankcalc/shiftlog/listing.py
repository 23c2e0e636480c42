"""Rows of the log as JSON data and as lines for a terminal."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator
from typing import TYPE_CHECKING, Any, Literal
from zoneinfo import ZoneInfo

from tankcalc.errors import InputError
from tankcalc.shiftlog.entry import late
from tankcalc.shiftlog.export_text import visible
from tankcalc.shiftlog.kinds import (
    ACKNOWLEDGEMENT,
    AMENDMENT,
    CLOCK_STEP,
    NOTE,
    READING,
    SIGN_OFF,
    SIGN_ON,
    WAYS,
    WITHDRAWAL,
)
from tankcalc.shiftlog.standing import Mark
from tankcalc.shiftlog.times import iso_local, iso_utc, show_local, zone_named
from tankcalc.shiftlog.uid import show_uid
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row

System = Literal["metric", "us", "imperial"]

STANDS = Mark("stands")

_WIDTH = 80
_INDENT = " " * 9
_FIGURES = (("level_m", "length"), ("volume_m3", "volume"), ("mass_kg", "mass"))


def as_object(row: Row, mark: Mark = STANDS) -> dict[str, Any]:
    """Return the row as ``shiftlog list --json`` prints it; texts are exactly as entered.

    ``readings`` are those of a reading or of its amendment; what was typed of any other kind is
    in ``details``. ``mark`` says what became of the entry.
    """
    entry = row.entry
    is_reading = holds_readings(entry)
    about = None if entry.ref is None else show_uid(entry.ref)
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
        "amends": about if entry.kind not in (ACKNOWLEDGEMENT, NOTE) else None,
        "about": about,
        "reason": entry.reason,
        "state": mark.state,
        "state_by": None if mark.by is None else mark.by.entry.id,
        "readings": dict(entry.typed) if is_reading else {},
        "details": {} if is_reading else dict(entry.typed),
        "signals": dict(entry.signals),
        "judgement": entry.judgement or None,
        "late": late(entry),
        "result": None if entry.result is None else dict(entry.result),
        "user": entry.user,
        "who": entry.who,
        "witness": entry.witness,
        "source": entry.source or "typed",
        "console": entry.console,
        "versions": dict(entry.versions),
        "program": entry.program,
        "hash": row.hash.hex(),
    }


def as_text(
    row: Row, system: System = "metric", mark: Mark = STANDS, about: int | None = None
) -> str:
    """Return the row as lines of at most 80 columns, safe for any terminal.

    What was amended or withdrawn is shown like everything else, and marked. ``about`` is the
    number of the entry that this one refers to, where the caller knows it.
    """
    entry = row.entry
    lines = [_heading(row)]
    if mark.by is not None:
        lines += _wrapped(f"{mark.state.upper()} by entry {mark.by.seq}")
    lines += [*_wrapped(what_it_says(entry, system, about)), *_wrapped(_judged(entry))]
    if late(entry):
        lines += _wrapped(f"entered late, {show_local(entry.entered_us, entry_zone(entry))}")
    if entry.status in ("check", "refused") and entry.result is not None:
        messages = (str(warning.get("message")) for warning in entry.result.get("warnings", ()))
        lines += _wrapped(f"{entry.status}: {' '.join(messages)}")
    if entry.note:
        lines += _wrapped(f"note: {entry.note}")
    return "\n".join(lines)


def holds_readings(entry: Entry) -> bool:
    """Return whether what was typed are readings: of a reading, or of an amendment of one."""
    moved = set(WAYS) & entry.typed.keys()
    return entry.kind == READING or (entry.kind == AMENDMENT and not moved)


def what_it_says(entry: Entry, system: System, about: int | None = None) -> str:
    """Return in one line what an entry of any kind holds, as typed and as computed."""
    other = "an earlier entry" if about is None else f"entry {about}"
    if entry.kind == WITHDRAWAL:
        return f"withdraws {other}"
    if entry.kind in (SIGN_ON, SIGN_OFF):
        return "signs on" if entry.kind == SIGN_ON else "signs off"
    if entry.kind == CLOCK_STEP:
        return (
            f"the clock stepped: {entry.typed.get('was')} was due, it was {entry.typed.get('is')}"
        )
    if entry.kind == ACKNOWLEDGEMENT:
        return _acknowledged(entry, other)
    if "fault" in entry.typed:
        return f"fault of {entry.typed.get('instrument')} {entry.typed['fault']}"
    said = _moved(entry) if entry.kind != NOTE and not holds_readings(entry) else ""
    said = said or _figures(entry, system)
    return f"amends {other}: {said}" if entry.kind == AMENDMENT else said


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


def _figures(entry: Entry, system: System) -> str:
    from tankcalc.units import show

    result = entry.result or {}
    figures = (
        show(result[key], dimension, system)
        for key, dimension in _FIGURES
        if isinstance(result.get(key), int | float)
    )
    typed = ", ".join(f"{name} {text}" for name, text in entry.typed.items())
    return " ".join(part for part in (", ".join(figures), f"({typed})" if typed else "") if part)


def _moved(entry: Entry) -> str:
    way = next((way for way in WAYS if way in entry.typed), "delivered")
    other = entry.typed.get("other")
    end = "" if not other else f" {'from' if way == 'received' else 'to'} {other}"
    return f"{way} {entry.typed.get(way, '')}{end}"


def _acknowledged(entry: Entry, other: str) -> str:
    of, until = entry.typed.get("of", ""), entry.typed.get("until")
    if of == "entry":
        return f"acknowledges {other}"
    what = f"{of} {entry.typed.get('what', '')}"
    return f"acknowledges {what}" if until is None else f"sets aside {what} until {until}"


def _judged(entry: Entry) -> str:
    if entry.judgement == "rejected" and entry.status != "refused":
        return f"rejected by the operator: {entry.reason}"
    if entry.judgement == "accepted with reason" and entry.kind == READING:
        return f"accepted: {entry.reason}"
    return f"reason: {entry.reason}" if entry.reason else ""


def _cells(text: str) -> int:
    """Return how many columns a terminal gives the text."""
    wide = sum(unicodedata.east_asian_width(ch) in "WF" for ch in text)
    return len(text) + wide - sum(bool(unicodedata.combining(ch)) for ch in text)


def _fitted(text: str, width: int) -> str:
    while _cells(text) > width:
        text = text[:-1]
    return text + " " * (width - _cells(text))


def _wrapped(text: str) -> Iterator[str]:
    """Yield the text, nothing in it hidden, in indented lines; a longer word is broken."""
    room = _WIDTH - len(_INDENT)
    line = ""
    for word in clean(visible(text), limit=10_000).split(" "):
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
