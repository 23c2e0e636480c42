"""What people did about alerts, read from the acknowledgements of the log."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from tankcalc.limits.latch import Action
from tankcalc.shiftlog.kinds import ACKNOWLEDGEMENT

if TYPE_CHECKING:
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row


def actions_from(rows: Iterable[Row]) -> dict[str, tuple[Action, ...]]:
    """Return what was done about the alerts of each tank, in the order of the log.

    Parameters
    ----------
    rows : iterable of Row
        Entries in the order of the log; those that acknowledge no alert are passed over.

    Notes
    -----
    An acknowledgement "until" a time sets the alert aside. One without, of an alert that is set
    aside at that instant, brings it back: it stands raised again, to be acknowledged by itself.
    """
    found: dict[str, list[Action]] = {}
    aside: dict[tuple[str, str], int] = {}
    for row in rows:
        entry = row.entry
        if entry.kind != ACKNOWLEDGEMENT or entry.typed.get("of") != "alert":
            continue
        tank, key = entry.tank or "", entry.typed.get("what", "")
        until = until_us(entry)
        by, at_us = entry.who.strip() or entry.user or "unnamed", entry.t_us
        if until is not None:
            reason = entry.reason.strip() or "no reason given"
            action = Action(key, "set aside", by, at_us, until, reason)
        elif aside.get((tank, key), 0) > at_us:
            action = Action(key, "bring back", by, at_us)
        else:
            action = Action(key, "acknowledge", by, at_us)
        aside[tank, key] = until or 0
        found.setdefault(tank, []).append(action)
    return {tank: tuple(actions) for tank, actions in found.items()}


def until_us(entry: Entry) -> int | None:
    """Return until when an entry sets an alert aside, µs of UTC; None where it does not."""
    from tankcalc.errors import InputError
    from tankcalc.shiftlog.times import parse_time, zone_named

    text = entry.typed.get("until", "")
    if not text:
        return None
    try:
        until = parse_time(text, zone_named("UTC"))
    except InputError:
        return None  # an entry may come from anywhere; what is no time sets nothing aside
    return until if until > entry.t_us else None
