"""What was entered in the log during a shift, whatever time it is about."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tankcalc.shiftlog.shifts import Shift
    from tankcalc.shiftlog.store import Row, Store

PAGE = 500


def made_in(store: Store, shift: Shift, at_us: int) -> list[Row]:
    """Return the entries that were made in a shift up to an instant, in the order of the log.

    The log is paged back from beyond the last entry that is about the shift, so that an old
    shift is found without reading all that came after.
    """
    about = [row.seq for row in store.between(shift.start_us, shift.end_us)]
    newest = store.head()[0]
    before = newest + 1
    if about and newest - max(about) > PAGE and _over(store, max(about) + PAGE, shift):
        before = max(about) + PAGE
    found: list[Row] = []
    while rows := store.tail(PAGE, before=before):
        found += [row for row in rows if shift.start_us <= row.entry.entered_us <= at_us]
        before = rows[0].seq
        if all(row.entry.entered_us < shift.start_us for row in rows):
            break
    return sorted((r for r in found if r.entry.entered_us < shift.end_us), key=lambda r: r.seq)


def _over(store: Store, number: int, shift: Shift) -> bool:
    """Return whether the entry before a number was made after the shift."""
    rows = store.tail(1, before=number)
    return bool(rows) and rows[0].entry.entered_us >= shift.end_us
