"""One entry of the log in full: everything that was kept of it, as lines of words."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import UTC
from types import SimpleNamespace
from typing import TYPE_CHECKING, Any, cast

from tankcalc.report import rows as report_rows
from tankcalc.result import JSON_KEYS
from tankcalc.shiftlog.entry import late
from tankcalc.shiftlog.kinds import AMENDMENT
from tankcalc.shiftlog.listing import entry_zone, holds_readings, what_it_says
from tankcalc.text import clean
from tankcalc.tui.fields import label_of
from tankcalc.tui.log_lines import marks_of, wall
from tankcalc.tui.present import STATUS_WORDS, Line, figure, wrapped

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc import units
    from tankcalc.result import Result
    from tankcalc.shiftlog import Entry
    from tankcalc.tui.log_pages import Seen

LABEL_COLUMNS = 10
LONGEST = 5000


def heading(seen: Seen, place: int, width: int) -> list[Line]:
    """Return which entry of a history this is, and what became of it."""
    entry, count = seen.row.entry, len(seen.history)
    name = f"entry {seen.row.seq}, {entry.kind}, {place + 1} of {count} in its history"
    lines: list[Line] = wrapped(f"{name}: {clean(entry.tank or 'no tank')}", "title", width)
    marks = "; ".join(marks_of(seen))
    if marks:
        style = "refused" if seen.mark.by is not None else "check"
        lines += wrapped(f"! {marks}", style, width)
    return lines


def entry_lines(seen: Seen, place: int, system: units.System, width: int) -> list[Line]:
    """Return all of an entry; ``place`` is its place in its history."""
    entry = seen.row.entry
    lines = heading(seen, place, width)
    what = what_it_says(entry, system, seen.about)
    if what and not holds_readings(entry):
        lines += wrapped(what, "figure", width)
    for label, words in (*_times(entry), *_people(entry), *_words(entry)):
        lines += _pair(label, words, width)
    lines += [*_readings(entry, width), *_result(entry, system, width)]
    lines += [[], [("RECORD (hash and versions: SHA-256)", "title")]]
    for label, words in _record(seen):
        lines += _pair(label, words, width)
    return lines


def moment(t_us: int, zone: ZoneInfo) -> str:
    """Return an instant as local time with its offset, and as UTC."""
    local = wall(t_us, zone)
    utc = local.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
    return f"{local.isoformat(' ', 'seconds')} {zone.key} = {utc}"


def _times(entry: Entry) -> Iterator[tuple[str, str]]:
    zone = entry_zone(entry)
    minutes = (entry.entered_us - entry.t_us) // 60_000_000
    yield "read", moment(entry.t_us, zone)
    yield "entered", moment(entry.entered_us, zone) + (f", {minutes} min late" * late(entry))
    yield "shift", f"{entry.shift_date} {entry.shift}, {entry.site}"


def _people(entry: Entry) -> Iterator[tuple[str, str]]:
    yield "name", f"{entry.who or '-'} (as typed)"
    yield "login", f"{entry.user} (from the operating system), console {entry.console}"
    if entry.witness:
        yield "witness", entry.witness


def _words(entry: Entry) -> Iterator[tuple[str, str]]:
    if entry.movement:
        yield "declared", entry.movement
    if entry.judgement:
        yield "judged", entry.judgement
    elif entry.status == "check":
        yield "judged", "by nobody yet"
    if entry.reason:
        yield "reason", entry.reason
    if entry.note:
        yield "note", entry.note


def _readings(entry: Entry, width: int) -> Iterator[Line]:
    """Yield what was typed, exactly as it was typed, and what was said against a signal."""
    if not entry.typed:
        return
    yield []
    source = entry.source or "typed by hand"
    yield [(f"AS TYPED (source: {clean(source, 60)})", "title")]
    for name, text in entry.typed.items():
        signal = entry.signals.get(name, "")
        said = f"{text}{'   ! signal ' if signal else ''}{signal}"
        yield from _pair(label_of(name), said, width, 14)


def _result(entry: Entry, system: units.System, width: int) -> Iterator[Line]:
    """Yield the figures with their uncertainty, and the warnings."""
    if entry.result is None:
        return
    status = clean(entry.status, 20)
    known = status in STATUS_WORDS
    words = STATUS_WORDS[cast("Any", status)].partition(":")[0] if known else status
    fluid = f" with {clean(entry.fluid, 60)}" if entry.fluid else ""
    yield []
    yield [(f"RESULT{fluid} ", "title"), (words, status if known else "")]
    for row in report_rows(_as_result(entry.result), system):
        yield figure(row.label, row.value, width, row.give)
    if isinstance(entry.result.get("basis"), str):
        yield from wrapped(f"Basis: {entry.result['basis']}.", "", width)
    style, mark = ("refused", "X") if status == "refused" else ("check", "!")
    for warning in _warnings(entry.result):
        yield from wrapped(f"{mark} {warning}", style, width)


def _as_result(data: Mapping[str, Any]) -> Result:
    """Return the kept figures as what the report takes; a log may hold what is no figure."""
    figures = {key: _number(data.get(key)) for key in JSON_KEYS}
    worth = data.get("expanded_uncertainty")
    halves = worth if isinstance(worth, Mapping) else {}
    known = {key: half for key, half in halves.items() if _number(half) is not None}
    return cast("Result", SimpleNamespace(**figures, expanded_uncertainty=known))


def _number(value: object) -> float | None:
    return float(value) if isinstance(value, int | float) and not isinstance(value, bool) else None


def _warnings(data: Mapping[str, Any]) -> Iterator[str]:
    warnings = data.get("warnings")
    for warning in warnings if isinstance(warnings, list) else ():
        if isinstance(warning, Mapping):
            yield str(warning.get("message", ""))


def _record(seen: Seen) -> Iterator[tuple[str, str]]:
    entry = seen.row.entry
    if entry.ref is not None:
        about = "an earlier entry" if seen.about is None else f"entry {seen.about}"
        yield ("amends" if entry.kind == AMENDMENT else "about"), about
    yield "number", str(seen.row.seq)
    yield "id", entry.id
    yield "hash", seen.row.hash.hex()
    yield from entry.versions.items()
    yield "program", f"tankcalc {entry.program}"
    if entry.seen:
        yield "held against", f"the log up to entry {entry.seen}"


def _pair(label: str, words: str, width: int, column: int = LABEL_COLUMNS) -> list[Line]:
    """Return a label and its words; the words in a column of their own."""
    name = clean(label, 40)
    room = max(column, len(name) + 1)
    found = wrapped(clean(words, LONGEST), "", max(width - room, 10)) or [[("-", "")]]
    first: Line = [(name.ljust(room), "key"), *found[0]]
    return [first, *([(" " * room, ""), *line] for line in found[1:])]
