"""Pages of the log: as many entries as are looked at, found from where one is reading.

Every call here talks to the store, so it runs in the log's own thread. Nothing reads the whole
log: pages go by the numbers of the entries, and the last page of ten million is like any other.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from itertools import islice
from typing import TYPE_CHECKING

from tankcalc.shiftlog.kinds import ACKNOWLEDGEMENT, CORRECTIONS, WITHDRAWABLE
from tankcalc.shiftlog.shifts import instants_around
from tankcalc.shiftlog.standing import Corrections, Mark

if TYPE_CHECKING:
    from tankcalc.shiftlog import Row, Store
    from tankcalc.shiftlog.store import ShiftKey

PAGE = 100
"""Entries read at once: more than any screen has rows."""

ENOUGH = 25
"""Entries with which going down is content, where more would take more looking."""

LOOKS = (1, 10, 100)
"""Newest corrections that are looked at, more only where those before were not enough."""


@dataclass(frozen=True, slots=True)
class Sought:
    """Which entries are wanted; None: of any tank, kind or shift."""

    tank: str | None = None
    kind: str | None = None
    shift: ShiftKey | None = None

    def takes(self, row: Row) -> bool:
        """Return whether an entry is among them."""
        entry = row.entry
        return (
            self.tank in (None, entry.tank)
            and self.kind in (None, entry.kind)
            and self.shift in (None, (entry.shift_date, entry.shift))
        )


@dataclass(frozen=True, slots=True)
class Seen:
    """An entry, with the original it belongs to and what corrects that one.

    ``history`` is in the order of the log and holds the entry itself.
    """

    row: Row
    history: tuple[Row, ...]

    @property
    def mark(self) -> Mark:
        """What became of the entry."""
        return Corrections(self.history).mark(self.row)

    @property
    def about(self) -> int | None:
        """Number of the entry that this one refers to."""
        ref = self.row.entry.ref
        return next((row.seq for row in self.history if row.entry.uid == ref), None)


@dataclass(frozen=True, slots=True)
class Page:
    """Entries in the order of the log, and whether there are others above and below them.

    ``head`` is the number of the log's newest entry, of whatever kind, when they were read.
    """

    seen: tuple[Seen, ...]
    above: bool
    below: bool
    head: int


@dataclass(frozen=True, slots=True)
class News:
    """What came into the log since a number; ``complete``: that is all of it."""

    rows: tuple[Row, ...]
    complete: bool
    head: int


def last_page(store: Store, sought: Sought) -> Page:
    """Return the newest entries."""
    head = store.head()[0]
    rows = _tail(store, sought, PAGE + 1, head + 1)
    return Page(seen_all(store, rows[-PAGE:]), len(rows) > PAGE, False, head)


def page_before(store: Store, sought: Sought, number: int) -> Page:
    """Return the entries just before a number."""
    rows = _tail(store, sought, PAGE + 1, number)
    return Page(seen_all(store, rows[-PAGE:]), len(rows) > PAGE, True, store.head()[0])


def first_page(store: Store, sought: Sought) -> Page:
    """Return the oldest entries."""
    head = store.head()[0]
    # A shift is found by its time, whatever the site calls its shifts by now.
    window = (None, None) if sought.shift is None else instants_around(sought.shift[0])
    found = store.between(*window, tank=sought.tank, kind=sought.kind)
    rows = list(islice((row for row in found if sought.takes(row)), PAGE + 1))
    return Page(seen_all(store, rows[:PAGE]), False, len(rows) > PAGE, head)


def page_after(store: Store, sought: Sought, number: int) -> Page:
    """Return the entries just after a number.

    A store pages backwards only. So a stretch of numbers is sought that begins at this one and
    holds enough of the wanted entries but not more than a page: it is widened while it holds
    few, and halved while it holds too many. That takes some twenty steps in ten million.
    """
    head = store.head()[0]
    few, crowded, end = number, 0, number + PAGE
    while True:
        rows = [row for row in _tail(store, sought, PAGE + 1, end + 1) if row.seq > number]
        if len(rows) > PAGE:
            crowded = end
        elif len(rows) >= ENOUGH or end >= head:
            newest = _tail(store, sought, 1, head + 1) if end < head else []
            below = bool(newest) and newest[0].seq > rows[-1].seq
            return Page(seen_all(store, rows), True, below, head)
        else:
            few = end
        # A number more is at most one entry more, so between the two lies a stretch that will do.
        end = (few + crowded) // 2 if crowded else number + 4 * (end - number)


def news(store: Store, number: int) -> News:
    """Return what was logged after a number, whatever it is."""
    head = store.head()[0]
    if head == number:
        return News((), True, head)
    rows = store.tail(PAGE, before=head + 1)
    new = tuple(row for row in rows if row.seq > number)
    return News(new, len(new) < len(rows) or len(rows) < PAGE, head)


def opened(store: Store, row: Row) -> Seen:
    """Return an entry with all that refers to it, or to what it refers to."""
    return Seen(row, tuple(store.history(row.entry.uid)))


def seen_all(store: Store, rows: Sequence[Row]) -> tuple[Seen, ...]:
    """Return entries with what became of them; they are in the order of the log."""
    corrected = _corrected_since(store, rows[0].seq) if rows else frozenset()

    def has_history(row: Row) -> bool:
        if row.entry.ref is not None or corrected is None:
            return row.entry.kind in (*WITHDRAWABLE, *CORRECTIONS, ACKNOWLEDGEMENT)
        return row.entry.uid in corrected

    return tuple(opened(store, row) if has_history(row) else Seen(row, (row,)) for row in rows)


def _corrected_since(store: Store, number: int) -> Collection[bytes] | None:
    """Return what was corrected after a number; None where that is too much to be listed.

    An entry is corrected after it was made, mostly soon. To ask for the history of each of a
    page takes a server ten times as long.
    """
    found: set[bytes] = set()
    for kind in CORRECTIONS:
        for n in LOOKS:
            rows = store.tail(n, kind=kind)
            if len(rows) < n or rows[0].seq <= number:
                found.update(r.entry.ref for r in rows if r.entry.ref and r.seq > number)
                break
        else:
            return None
    return found


def _tail(store: Store, sought: Sought, n: int, before: int) -> list[Row]:
    return store.tail(n, tank=sought.tank, kind=sought.kind, shift=sought.shift, before=before)
