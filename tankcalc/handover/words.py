"""A handover as a document: what is said, in which order."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace
from typing import TYPE_CHECKING

from tankcalc.balance.beginning import words as beginning_words
from tankcalc.handover.balances import balances
from tankcalc.handover.clocks import Clock
from tankcalc.handover.document import Document, Fact, Item, Section
from tankcalc.handover.happened import MOST_LATE, changed, said_by
from tankcalc.handover.tanks import ages, card, overview, rate_text, worth_a_card
from tankcalc.report import CAUTION
from tankcalc.shiftlog.kinds import SIGN_ON
from tankcalc.shiftlog.times import zone_named
from tankcalc.text import clean
from tankcalc.watch.older import LONGEST_DAYS
from tankcalc.watch.past import remarkable

if TYPE_CHECKING:
    from tankcalc.handover.data import Handover, TankPart
    from tankcalc.limits.alerts import Alert
    from tankcalc.shiftlog.store import Row

LONGEST = 4000
"""Characters of a note that are shown: all of them."""

_NOT_LOOKED_AT = f"Alerts older than {LONGEST_DAYS} days are not looked at."


def document_of(handover: Handover) -> Document:
    """Return a handover in words."""
    clock = Clock(zone_named(handover.place.time_zone), handover.shift)
    sections = (_beginning(handover, one) for one in _sections(handover, clock))
    site = clean(handover.place.site, 80)
    return Document(
        title=f"Shift handover, {site}, {clean(handover.shift.title, 80)}",
        banners=tuple(_banners(handover, clock)),
        facts=tuple(_facts(handover, clock)),
        changed=_beginning(
            handover,
            Section(
                "What changed this shift",
                "Nothing was logged, raised or corrected in this shift.",
                tuple(changed(handover, clock)),
            ),
        ),
        tanks=overview(handover, clock),
        cards=tuple(card(p, handover, clock) for p in handover.tanks if worth_a_card(p)),
        sections=tuple(sections),
        acknowledged=Section(
            "Taken over by",
            "Not acknowledged yet.",
            tuple(_item(r, "acknowledged", "", clock) for r in handover.acknowledgements),
        ),
        cautions=tuple(_cautions(handover)),
    )


def _beginning(handover: Handover, section: Section) -> Section:
    """Return a section that says where the log begins, instead of that there was nothing."""
    if handover.begins is None:
        return section
    return replace(section, nothing=f"Not known: {beginning_words(handover.begins)}.")


def _banners(handover: Handover, clock: Clock) -> Iterator[str]:
    if handover.place.is_demo:
        yield "Demo site: not a real plant."
    if handover.head[0] == 0:
        yield "The log is empty: nothing was ever logged in it."
    if handover.begins is not None:
        where = beginning_words(handover.begins)
        yield f"{where[0].upper()}{where[1:]}: what this shift held before it is not shown."
    if handover.running:
        yield f"The shift is not over: this is its state at {clock.full(handover.at_us)}."
    if clock.changes:
        yield f"The clocks change in this shift: it is {clock.hours} long. Times show their offset."


def _facts(handover: Handover, clock: Clock) -> Iterator[Fact]:
    shift, place = handover.shift, handover.place
    yield Fact("Site", ", ".join(filter(None, (clean(place.site, 80), clean(place.place, 80)))))
    yield Fact("Shift", clean(shift.title, 80))
    yield Fact("From", clock.full(shift.start_us))
    yield Fact("To", clock.full(shift.end_us))
    yield Fact("Length", clock.hours, number=shift.length_us / 1e6, unit="s")
    yield Fact("Time zone", clean(place.time_zone, 60))
    if handover.crew is not None:
        yield Fact("Crew", clean(handover.crew, 60))
    yield Fact("Made", clock.full(handover.made_us))


def _sections(handover: Handover, clock: Clock) -> Iterator[Section]:
    parts = handover.tanks
    moving = tuple(_moving(parts, clock, handover))
    yield Section("Movements in progress", "No tank was declared moving.", moving)
    faults = tuple(_faults(parts, clock, handover))
    yield Section("Instruments in fault", "No fault is open.", faults)
    alerts = tuple(_alert(tank, alert, clock) for tank, alert in handover.alerts)
    yield Section("Open alerts", f"No alert is open. {_NOT_LOOKED_AT}", alerts)
    yield ages(handover)
    yield balances(handover)
    yield Section(
        "Late, amended and withdrawn entries",
        "Every entry of this shift stands as it was made, in time.",
        tuple(_remarkable(handover, clock)),
    )
    notes = tuple(_item(row, "note", row.entry.note, clock) for row in handover.notes)
    yield Section("Notes", "No note was made.", notes)
    people = tuple(
        _item(r, "signed on" if r.entry.kind == SIGN_ON else "signed off", "", clock)
        for r in handover.people
    )
    yield Section("People", "Nobody signed on or off.", people)


def _item(row: Row, kind: str, text: str, clock: Clock) -> Item:
    entry = row.entry
    words = [said_by(row), clean(text or entry.note, LONGEST)]
    return Item(
        ": ".join(filter(None, words)),
        kind,
        clean(entry.tank or "", 40),
        clock.show(entry.t_us),
        entry.t_us,
    )


def _moving(parts: Iterable[TankPart], clock: Clock, handover: Handover) -> Iterator[Item]:
    """Yield movements that were declared with the last reading, with what was noted of them."""
    for part in parts:
        if not part.moving:
            continue
        one, first = part.watch, part.moving[0].entry
        rate = "" if one.rate is None else f", {rate_text(one.rate, handover.place.system)}"
        noted = [r.entry.note for r in part.moving if r.entry.note.strip()]
        notes = "".join(f". Note: {clean(note, LONGEST)}" for note in noted[-3:])
        text = f"{one.movement} since {clock.show(first.t_us)} or earlier{rate}{notes}"
        when = clock.show(part.moving[-1].entry.t_us)
        yield Item(text, "movement", clean(one.name, 40), when, part.moving[-1].entry.t_us)


def _faults(parts: Iterable[TankPart], clock: Clock, handover: Handover) -> Iterator[Item]:
    for part in parts:
        for fault in part.watch.faults:
            old = clock.ago(fault.since_us, handover.at_us)
            text = (
                f"{clean(fault.instrument, 40)} in fault since {clock.full(fault.since_us)} "
                f"({old}), noted by {said_by(fault.row)}: {clean(fault.row.entry.note, LONGEST)}"
            )
            tank = clean(part.watch.name, 40)
            when = clock.show(fault.since_us)
            yield Item(text, "fault", tank, when, fault.since_us, urgent=True)


def _alert(tank: str, alert: Alert, clock: Clock) -> Item:
    said = [f"{alert.symbol} {alert.state}"]
    if alert.by and alert.by_us is not None:
        said.append(f"by {clean(alert.by, 80)} at {clock.show(alert.by_us)}")
    if alert.until_us is not None:
        said.append(f"until {clock.full(alert.until_us)} ({clean(alert.reason, 400)})")
    text = f"{' '.join(said)}: {clean(alert.text, 400)}"
    if alert.consequences:
        text += f"; with it: {clean('; '.join(alert.consequences), 400)}"
    urgent = alert.state in ("raised", "returned")
    since = alert.since_us
    return Item(text, "alert", clean(tank, 40), clock.show(since), since, urgent=urgent)


def _remarkable(handover: Handover, clock: Clock) -> Iterator[Item]:
    for one in handover.remarkable[: MOST_LATE * 4]:
        entry = one.row.entry
        by = one.mark.by
        if by is None:
            text = f"entry {one.row.seq} entered late, {clock.full(entry.entered_us)}"
            text += f", by {said_by(one.row)}"
        else:
            text = f"entry {one.row.seq} {one.mark}, {clock.full(by.entry.entered_us)}"
            text += f", by {said_by(by)}: {clean(by.entry.reason, LONGEST)}"
        kind = f"{entry.kind} {remarkable(one)}"
        when = clock.show(entry.t_us)
        yield Item(text, kind, clean(entry.tank or "", 40), when, entry.t_us)


def _cautions(handover: Handover) -> Iterator[str]:
    number, digest = handover.head
    yield CAUTION
    yield f"Alerts are not alarms: no alert does not mean that a tank is safe. {_NOT_LOOKED_AT}"
    yield "Uncertainties are expanded, k = 2. Figures with * are older than the last reading."
    yield f"Head of the log: {number}:{digest}"
    yield f"tankcalc {clean(handover.program, 40)}"
