"""Readings from before the time that is looked at: an alert nobody answered may stem from them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc.shiftlog.kinds import CORRECTIONS, READING
from tankcalc.shiftlog.standing import standing_between
from tankcalc.watch.past import PAGE, counts
from tankcalc.watch.state import Ages, ages_of

if TYPE_CHECKING:
    from tankcalc.limits.looks import Look
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Store
    from tankcalc.watch.looks import Maker

DAY_US = 24 * 3_600_000_000
LONGEST_DAYS = 31
LONGEST_BACK_US = LONGEST_DAYS * DAY_US
"""How far back readings are looked at for alerts. One that has stood for longer counts from
there, without what was acknowledged before: it is raised anew."""

AGES_BACK_US = 31 * DAY_US
"""How far back dips and samples are looked for: they are not taken every week."""


@dataclass(frozen=True, slots=True)
class Stretch:
    """Readings of one tank over a stretch of time, as they stood at a head of the log.

    Attributes
    ----------
    head : int
        Number of the log's last entry then.
    from_us, until_us : int
        Readings in [from, until), µs of UTC.
    looks : tuple of Look
        By their times.
    ages : Ages
        What was last taken in it, no longer than `AGES_BACK_US` before the instant asked for.
    """

    head: int
    from_us: int
    until_us: int
    looks: tuple[Look, ...]
    ages: Ages

    def serves(self, store: Store, tank: str, span: tuple[int, int]) -> bool:
        """Return whether it still is what the log says of [from, until)."""
        head = store.head()[0]
        if not (self.from_us <= span[0] < self.from_us + DAY_US and self.until_us == span[1]):
            return False
        if not 0 <= head - self.head <= PAGE:
            return False
        newer = store.tail(head - self.head, tank=tank) if head > self.head else []
        return not any(
            row.entry.kind in CORRECTIONS or row.entry.t_us < self.until_us
            for row in newer
            if row.seq > self.head
        )


def stretch_before(
    store: Store, tank: str, maker: Maker, now_us: int, until_us: int, known: Mapping[str, Stretch]
) -> Stretch:
    """Return a tank's readings before an instant, at most `LONGEST_BACK_US` before now.

    ``known`` are those of earlier calls: one that the log has not changed is not read again.
    """
    span = (now_us - LONGEST_BACK_US, until_us)
    if tank in known and known[tank].serves(store, tank, span):
        return known[tank]
    head = store.head()[0]
    entries = _entries(store, tank, span)
    recent = [entry for entry in entries if entry.t_us >= now_us - AGES_BACK_US]
    return Stretch(head, *span, maker.older(entries), ages_of(recent))


def ages_before(store: Store, tank: str, now_us: int, until_us: int) -> Ages:
    """Return when things were last taken before an instant, `AGES_BACK_US` before now at most."""
    since = now_us - AGES_BACK_US
    return ages_of(_entries(store, tank, (since, until_us))) if since < until_us else Ages()


def _entries(store: Store, tank: str, span: tuple[int, int]) -> list[Entry]:
    found = standing_between(store, *span, tank=tank, kind=READING)
    held = [s.entry for s in found if s.entry is not None and counts(s.entry)]
    return sorted(held, key=lambda entry: entry.t_us)
