"""Entries of the log as rows of a pane."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.shiftlog.entry import late
from tankcalc.shiftlog.kinds import AMENDMENT, CLOCK_STEP, MOVEMENT, NOTE, READING, WITHDRAWAL
from tankcalc.shiftlog.listing import holds_readings, what_it_says
from tankcalc.text import clean
from tankcalc.tui.ascii import columns
from tankcalc.tui.log_filter import THIS
from tankcalc.tui.present import Line, clip

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.shiftlog import Entry
    from tankcalc.tui.log_filter import LogFilter
    from tankcalc.tui.log_pages import Seen, Sought
    from tankcalc.tui.log_window import LogWindow

LEVEL_COLUMNS = {"metric": 10, "us": 16, "imperial": 16}
MASS_COLUMNS = 13
TANK_COLUMNS = 10
STATUS_COLUMNS = 8

WORDS = {MOVEMENT: "moved", CLOCK_STEP: "CLOCK STEP"}
"""What a kind without figures is called, where that is not its name."""

CAN_BE_LATE = (READING, NOTE, MOVEMENT)


def wall(t_us: int, zone: ZoneInfo) -> datetime:
    """Return the local time of an instant, with its offset."""
    utc = datetime(1970, 1, 1, tzinfo=UTC) + timedelta(microseconds=t_us)
    return utc.astimezone(zone)


def clock(t_us: int, zone: ZoneInfo) -> str:
    """Return day and time to the minute, with the offset from UTC."""
    return wall(t_us, zone).strftime("%a %d %b %H:%M %z")


def log_title(
    chosen: LogFilter, sought: Sought, window: LogWindow, head: int, *, is_on: bool = True
) -> str:
    """Return the title of the log pane: what is shown of the log, and where in it this is.

    ``is_on``: the shift that is shown as "this" one has not ended meanwhile.
    """
    this = is_on and chosen.shift == THIS
    names = [chosen.tank, chosen.kind and f"{chosen.kind} only", _shift_words(sought, this)]
    what = ", ".join(clean(name, 24) for name in names if name)
    above, below = window.hidden
    if window.above or window.below:
        here = [one.row.seq for one in window.in_sight] or [0]
        return f"LOG {what}: {here[0]}-{here[-1]} of {head}"
    count = len(window.seen)
    parts = [f"LOG {what}: {'1 entry' if count == 1 else f'{count} entries'}"]
    parts += [f"{above} above"] if above else []
    parts += [f"{below} below"] if below else []
    return ", ".join(parts)


def _shift_words(sought: Sought, this: bool) -> str:
    if sought.shift is None:
        return "all shifts"
    date, name = sought.shift
    return f"this {name}" if this else f"{date} {name}"


def log_rows(
    window: Sequence[Seen],
    zone: ZoneInfo,
    system: units.System,
    width: int,
    marked: Seen | None = None,
    *,
    dated: bool = False,
) -> list[Line]:
    """Return a row for each entry; the marked one is where the keys go."""
    return [log_row(one, zone, system, width, dated=dated, marked=one is marked) for one in window]


def log_row(
    seen: Seen,
    zone: ZoneInfo,
    system: units.System,
    width: int,
    *,
    dated: bool = False,
    marked: bool = False,
) -> Line:
    """Return local time, tank, level, mass, status, marks, who and note of one entry."""
    entry = seen.row.entry
    time = wall(entry.t_us, zone).strftime("%Y-%m-%d %H:%M" if dated else "%H:%M")
    tank = clip(clean(entry.tank or "-"), TANK_COLUMNS)
    lead = f"{'>' if marked else ' '}{time} {tank}{' ' * (TANK_COLUMNS - columns(tank))} "
    line: Line = [(lead, "focus" if marked else "")]
    if entry.result is not None and holds_readings(entry):
        line += _figures(entry, system, stands=seen.mark.by is None)
    else:
        line.append((f"{WORDS.get(entry.kind, entry.kind)}  ", ""))
    marks = "; ".join(marks_of(seen))
    room = max(width - sum(columns(text) for text, _ in line), 0)
    shown = clip(f"{marks}  " if marks else "", room)
    return [*line, (shown, "key"), (clip(_said(seen, system), room - columns(shown)), "")]


def marks_of(seen: Seen) -> list[str]:
    """Return in words what is to be known of an entry before its figures are believed."""
    entry, mark = seen.row.entry, seen.mark
    found = [f"{mark.state.upper()} by {mark.by.seq}"] if mark.by is not None else []
    if entry.judgement == "rejected" and entry.status != "refused":
        found.append("REJECTED")
    if entry.kind in CAN_BE_LATE and late(entry):
        found.append("LATE")
    if entry.kind == AMENDMENT and holds_readings(entry):
        found.append(f"amends {seen.about or 'an earlier entry'}")
    return found


def _figures(entry: Entry, system: units.System, *, stands: bool) -> Line:
    level = _shown(entry, "level_m", "length", system).rjust(LEVEL_COLUMNS[system])
    mass = _shown(entry, "mass_kg", "mass", system).rjust(MASS_COLUMNS)
    status = clean(entry.status, STATUS_COLUMNS).upper()
    style = entry.status if stands and entry.status in ("good", "check", "refused") else ""
    return [
        (f"{level} {mass} ", "figure" if stands else ""),
        (status, style),
        (" " * (STATUS_COLUMNS - len(status)), ""),
    ]


def _said(seen: Seen, system: units.System) -> str:
    """Return who, what and why, as far as the figures do not say it."""
    entry = seen.row.entry
    plain_note = entry.kind == NOTE and "fault" not in entry.typed
    figures = entry.result is not None and holds_readings(entry)
    what = "" if plain_note or figures else what_it_says(entry, system, seen.about)
    why = entry.reason if entry.kind in (WITHDRAWAL, AMENDMENT) or entry.typed.get("of") else ""
    words = [clean(entry.who, 20), clean(what), clean(why), clean(entry.note)]
    return " ".join(word for word in words if word)


def _shown(entry: Entry, key: str, dimension: str, system: units.System) -> str:
    value = None if entry.result is None else entry.result.get(key)
    return units.show(float(value), dimension, system) if isinstance(value, int | float) else "-"
