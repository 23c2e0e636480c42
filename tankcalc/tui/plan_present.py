"""A plan as lines for the console: what matters first with the time of day, then all of it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.cli.plan_text import plan_lines
from tankcalc.limits.levels import limit_words
from tankcalc.limits.times import duration
from tankcalc.tui.log_lines import clock
from tankcalc.tui.moments import moment
from tankcalc.tui.plan_subject import MIXES, in_labels
from tankcalc.tui.present import Line, table, wrapped
from tankcalc.tui.widgets.word_form import Asked

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.limits.plans import Plan
    from tankcalc.limits.times import Arrival
    from tankcalc.tui.plan_subject import Subject
    from tankcalc.units import System

COLUMNS = (
    (
        Asked("to", "to", 'a limit such as "maximum working" or "high-high", or a level, "13.2 m"'),
        Asked("rate", "rate", 'net flow; into the tank is positive: "120 m3/h", "-80 t/h"'),
        Asked("rate-uncertainty", "rate +/- (k=1)", 'standard uncertainty of the rate: "2 m3/h"'),
        Asked("closing-time", "closing time", 'from the call until the valve is shut: "90 s"'),
        Asked("drain-back", "drain back", 'what drains from the line afterwards: "4 m3"'),
    ),
    (
        Asked("add", "add", 'a receipt of the same product: "500 t", "600 m3"; "-50 t" leaves'),
        Asked("at-temperature", "arriving at", 'temperature of what arrives: "25 degC"'),
        Asked(MIXES, "it mixes", '"yes", or "no": it lies apart at its own temperature'),
        Asked("design-temperature", "design temp.", 'the warmest (or coldest) it gets: "45 degC"'),
        Asked("next-reading", "next reading", 'time to the next planned reading: "1 h"'),
    ),
)
LABELS = {one.name: f'"{one.label}"' for column in COLUMNS for one in column}

STOP_NOW = frozenset({"stop_too_late"})


def source_words(subject: Subject, now_us: int, zone: ZoneInfo) -> str:
    """Return which reading a plan starts from, and how old it is."""
    if subject.entry is None:
        return "from the reading in front"
    age = duration(max(now_us - subject.at_us, 0) / 1e6)
    read = clock(subject.at_us, zone)
    return f"from entry {subject.entry} of the log, read {read}, {age} ago"


def lines_of(
    plan: Plan, subject: Subject, now_us: int, system: System, zone: ZoneInfo, width: int
) -> list[Line]:
    """Return a plan: what to do and when, then every figure of it."""
    source = source_words(subject, now_us, zone)
    lines = wrapped(f"Plan {source}. All times count from then.", "", width)
    if subject.instead:
        words = "! What is typed in front gives no answer; this is an older reading."
        lines += wrapped(words, "check", width)
    if _past(plan, subject.at_us, now_us):
        words = "! CALL STOP: that time may be past. Read the tank again."
        lines += wrapped(words, "refused", width)
    for notice in plan.notices:
        if notice.code in STOP_NOW:
            lines += wrapped(f"! STOP NOW: {notice.message}", "refused", width)
    for words in _first(plan, system, subject.at_us, zone):
        lines += wrapped(words, "figure", width)
    spoken = replace(
        plan, notices=tuple(replace(n, message=in_labels(n.message, LABELS)) for n in plan.notices)
    )
    return [*lines, [], *table("\n".join(plan_lines(spoken, subject.result, system)))]


def _first(plan: Plan, system: System, at_us: int, zone: ZoneInfo) -> Iterator[str]:
    """Yield what is asked most, in a line each."""
    name, target = plan.question.limit, units.show(plan.question.target_m, "length", system)
    to = f"{limit_words(name)}, {target}" if name else target
    room = plan.receivable
    if room.room_m3 > 0.0:
        volume = units.show(room.volume_m3, "volume", system)
        yield f"CAN TAKE {volume}, {units.show(room.mass_kg, 'mass', system)}, up to {to}"
    else:
        yield f"CAN TAKE nothing: {to} is reached"
    if plan.stop is not None and plan.stop.call_m is not None and plan.stop.arrival is not None:
        call = units.show(plan.stop.call_m, "length", system)
        yield f"CALL STOP at {call}, {_when(plan.stop.arrival, at_us, zone)}"
    elif plan.stop is not None:
        yield "CALL STOP before the start: what flows after the call is more than there is room for"
    for word, state in (("AFTERWARDS", plan.after), ("WHEN WARM OR COLD", plan.grown)):
        if state is not None:
            level = "it does NOT FIT"
            if state.level_m is not None:
                level = f"level {units.show(state.level_m, 'length', system)}"
            yield f"{word} {level}"


def _past(plan: Plan, at_us: int, now_us: int) -> bool:
    """Return whether the call to stop may have been due by now."""
    arrival = None if plan.stop is None else plan.stop.arrival
    if arrival is None or arrival.passed or arrival.earliest_s is None:
        return False
    return at_us + arrival.earliest_s * 1e6 < now_us


def _when(arrival: Arrival, at_us: int, zone: ZoneInfo) -> str:
    """Return the early and the late bound of an arrival as times of day."""
    if arrival.passed:
        return "which is passed: now"
    if arrival.earliest_s is None:
        return "which is not on the way"
    early = moment(at_us, arrival.earliest_s, zone)
    if arrival.latest_s is None:
        return f"not before {early}"
    return f"{early} at the earliest, {moment(at_us, arrival.latest_s, zone)} at the latest"
