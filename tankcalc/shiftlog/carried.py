"""What carries over from shift to shift until somebody closes it: faults, and alerts set aside."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import UTC, datetime
from typing import TYPE_CHECKING

from tankcalc.shiftlog.kinds import ACKNOWLEDGEMENT, NOTE
from tankcalc.shiftlog.standing import standing

if TYPE_CHECKING:
    from tankcalc.shiftlog.store import Row


def open_faults(rows: Iterable[Row]) -> dict[tuple[str, str], Row]:
    """Return the notes that opened a fault which is not closed, by tank and instrument.

    Parameters
    ----------
    rows : iterable of Row
        Entries in the order of the log; all notes of a tank, since a fault has no age limit. One
        that was withdrawn counts as never made. What counts is when each was so, not when it was
        entered.
    """
    found: dict[tuple[str, str], Row] = {}
    for one in sorted(standing(rows), key=lambda one: (one.row.entry.t_us, one.row.seq)):
        entry = one.entry
        if entry is None or entry.kind != NOTE or "fault" not in entry.typed:
            continue
        key = (entry.tank or "", entry.typed.get("instrument", ""))
        if entry.typed["fault"] == "opened":
            found.setdefault(key, one.row)
        else:
            found.pop(key, None)
    return found


def set_aside(rows: Iterable[Row], now_us: int) -> dict[tuple[str, str], Row]:
    """Return the acknowledgements that set an alert aside for now, by tank and the alert's code.

    Of two about one alert the later one in the log counts.
    """
    found: dict[tuple[str, str], Row] = {}
    for row in rows:
        typed = row.entry.typed
        if row.entry.kind != ACKNOWLEDGEMENT or typed.get("of") != "alert":
            continue
        key = (row.entry.tank or "", typed.get("what", ""))
        found.pop(key, None)
        if _instant(typed.get("until", "")) > now_us:
            found[key] = row
    return found


def _instant(text: str) -> int:
    """Return an instant in ISO 8601 as µs of UTC; 0 where the text is none."""
    try:
        moment = datetime.fromisoformat(text)
    except ValueError:
        return 0
    if moment.tzinfo is None:
        return 0
    elapsed = moment - datetime(1970, 1, 1, tzinfo=UTC)
    return (elapsed.days * 86_400 + elapsed.seconds) * 1_000_000 + elapsed.microseconds
