"""Entries of the log as rows of a pane."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.text import clean
from tankcalc.tui.ascii import columns
from tankcalc.tui.present import Line, clip

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.shiftlog import Entry, Row, Shift

LEVEL_COLUMNS = {"metric": 10, "us": 16, "imperial": 16}
MASS_COLUMNS = 13
TANK_COLUMNS = 10


def wall(t_us: int, zone: ZoneInfo) -> datetime:
    """Return the local time of an instant, with its offset."""
    utc = datetime(1970, 1, 1, tzinfo=UTC) + timedelta(microseconds=t_us)
    return utc.astimezone(zone)


def clock(t_us: int, zone: ZoneInfo) -> str:
    """Return day and time to the minute, with the offset from UTC."""
    return wall(t_us, zone).strftime("%a %d %b %H:%M %z")


def log_title(shift: Shift, zone: ZoneInfo, count: int) -> str:
    """Return the title of the log pane."""
    start = wall(shift.start_us, zone).strftime("%H:%M")
    entries = "1 entry" if count == 1 else f"{count} entries"
    return f"LOG {clean(shift.name, 20)} from {start}: {entries}"


def log_rows(rows: Sequence[Row], zone: ZoneInfo, system: units.System, width: int) -> list[Line]:
    """Return a row for each entry."""
    return [log_row(row.entry, zone, system, width) for row in rows]


def log_row(entry: Entry, zone: ZoneInfo, system: units.System, width: int) -> Line:
    """Return local time, tank, level, mass, status, who and note of one entry."""
    time = wall(entry.t_us, zone).strftime("%H:%M")
    tank = clip(clean(entry.tank or "-"), TANK_COLUMNS)
    lead = f" {time} {tank}{' ' * (TANK_COLUMNS - columns(tank))} "
    said = " ".join(word for word in (clean(entry.who, 20), clean(entry.note)) if word)
    if entry.result is None:
        return [(lead, ""), (clip(f"note  {said}", width - columns(lead)), "")]
    level = _shown(entry, "level_m", "length", system).rjust(LEVEL_COLUMNS[system])
    mass = _shown(entry, "mass_kg", "mass", system).rjust(MASS_COLUMNS)
    status = clean(entry.status, 8).upper()
    used = columns(lead) + len(level) + len(mass) + 10
    style = entry.status if entry.status in ("good", "check", "refused") else ""
    return [
        (lead, ""),
        (f"{level} {mass} ", "figure"),
        (status, style),
        (" " * (8 - len(status)) + clip(said, max(width - used, 0)), ""),
    ]


def _shown(entry: Entry, key: str, dimension: str, system: units.System) -> str:
    value = None if entry.result is None else entry.result.get(key)
    return units.show(float(value), dimension, system) if isinstance(value, int | float) else "-"
