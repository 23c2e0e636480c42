"""What changed during a shift, worded."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.handover.document import Item
from tankcalc.shiftlog.listing import what_it_says
from tankcalc.text import clean
from tankcalc.watch.actions import until_us

if TYPE_CHECKING:
    from tankcalc.handover.clocks import Clock
    from tankcalc.handover.data import Handover, TankRun
    from tankcalc.shiftlog.standing import Standing
    from tankcalc.shiftlog.store import Row
    from tankcalc.units import System

MOST_LATE = 50
"""Late entries that are shown one by one: a spreadsheet brings thousands."""

_SHORT = 12
"""Characters of a version that are shown: enough to tell two apart."""


def changed(handover: Handover, clock: Clock) -> Iterator[Item]:
    """Yield what changed: what asks for an eye first, then what was logged."""
    changes, system = handover.changes, handover.place.system
    for alert in changes.alerts:
        yield Item(
            clean(alert.text, 400),
            f"alert {alert.what}",
            clean(alert.tank, 40),
            clock.show(alert.at_us),
            alert.at_us,
            urgent=alert.what == "raised",
        )
    for row in changes.faults:
        kind = f"fault {row.entry.typed['fault']}"
        text = f"{clean(row.entry.typed.get('instrument', ''), 40)}: {clean(row.entry.note, 4000)}"
        yield _from(row, kind, text, clock, urgent=row.entry.typed["fault"] == "opened")
    for row in changes.answers:
        yield _from(row, "alert answered", _answered(row, clock), clock)
    for standing in changes.movements:
        held = standing.holds or standing.row
        mark = "" if standing.state == "stands" else f" ({standing.mark})"
        yield _from(held, "movement", f"{_said(held, system)}{mark}", clock)
    for correction in changes.corrections:
        row = correction.row
        what = clean(what_it_says(row.entry, system, correction.about), 4000)
        text = f"{what}; reason: {clean(row.entry.reason, 4000)}"
        yield _from(row, row.entry.kind, text, clock)
    yield from _late(changes.late, clock, system)
    for change in changes.profiles:
        text = (
            f"the {change.what} file is another version from entry {change.row.seq} on: "
            f"{clean(change.was, _SHORT)} is now {clean(change.now, _SHORT)}"
        )
        yield _from(change.row, "profile changed", text, clock)
    for row in changes.steps:
        yield _from(row, "clock", _said(row, system), clock, urgent=True)
    for run in changes.runs:
        yield _run(run, clock, system)


def _late(late: Sequence[Standing], clock: Clock, system: System) -> Iterator[Item]:
    """Yield what was entered late about earlier shifts, each with its own time."""
    for one in late[:MOST_LATE]:
        entered = clock.show(one.row.entry.entered_us)
        mark = "" if one.state == "stands" else f" ({one.mark})"
        told = (_said(one.row, system), clean(one.row.entry.note, 4000))
        what = "; ".join(dict.fromkeys(text for text in told if text.strip()))
        text = f"entered {entered} about an earlier shift: {what}{mark}"
        yield _from(one.row, f"{one.row.entry.kind}, late", text, clock)
    if len(late) > MOST_LATE:
        first, last = late[MOST_LATE].row.seq, late[-1].row.seq
        text = f"{len(late) - MOST_LATE} more about earlier shifts, entries {first} to {last}"
        yield Item(text, "entries, late")


def said_by(row: Row) -> str:
    """Return who made an entry: the name as typed, with the login beside it."""
    entry = row.entry
    who, user = clean(entry.who, 80), clean(entry.user, 40)
    return f"{who} ({user})" if who and user and who != user else who or user


def _from(row: Row, kind: str, text: str, clock: Clock, *, urgent: bool = False) -> Item:
    entry = row.entry
    tank = clean(entry.tank or "", 40)
    return Item(
        f"{text}; by {said_by(row)}", kind, tank, clock.show(entry.t_us), entry.t_us, urgent=urgent
    )


def _said(row: Row, system: System) -> str:
    return clean(what_it_says(row.entry, system), 4000)


def _answered(row: Row, clock: Clock) -> str:
    """Return what was done about an alert, with times as people read them."""
    entry = row.entry
    name = clean(entry.typed.get("what", ""), 60).replace("_", " ")
    until = until_us(entry)
    if until is None:
        return f"{name}: acknowledged, or brought back"
    return f"{name}: set aside until {clock.show(until)} ({clean(entry.reason, 4000)})"


def _run(run: TankRun, clock: Clock, system: System) -> Item:
    count = "1 reading" if run.count == 1 else f"{run.count} readings"
    if run.refused:
        count += f", {run.refused} refused"
    parts = [count]
    if run.first is not None and run.last is not None:
        first, last = run.first.entry.result or {}, run.last.entry.result or {}
        for name, key, dimension in (("level", "level_m", "length"), ("mass", "mass_kg", "mass")):
            was, now = first.get(key), last.get(key)
            if isinstance(was, int | float) and isinstance(now, int | float):
                change = units.show(now - was, dimension, system)
                sign = "+" if now > was else ""
                shown = units.show(now, dimension, system)
                parts.append(f"{name} {shown} ({sign}{change} from first to last)")
    at_us = None if run.last is None else run.last.entry.t_us
    when = "" if at_us is None else clock.show(at_us)
    return Item(", ".join(parts), "readings", clean(run.tank, 40), when, at_us)
