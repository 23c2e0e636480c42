"""Steps of the clock: noticed when something is logged, and logged themselves, never refused.

The numbers order the log, so a wrong clock loses nothing; but a rate taken across a step is
wrong, and only the log can tell of it afterwards.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, NamedTuple

from tankcalc.errors import StoreCorruptError
from tankcalc.shiftlog.make_words import clock_entry
from tankcalc.shiftlog.times import SECOND_US, iso_utc, now_us

if TYPE_CHECKING:
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.make import EntrySite
    from tankcalc.shiftlog.store import Receipt, Store

STEP_US = 2 * SECOND_US
"""Two clocks never quite agree, and one that is being steered moves a little."""


class Step(NamedTuple):
    """A step of the clock: what it showed, or should have by now, and what it shows; µs of UTC."""

    was_us: int
    is_us: int

    def __str__(self) -> str:
        seconds = (self.is_us - self.was_us) / SECOND_US
        return (
            f"this machine's clock shows {iso_utc(self.is_us)} where {iso_utc(self.was_us)} was "
            f"due ({seconds:+.1f} s). The step is logged; look at the clock."
        )


class ClockWatch:
    """Holds this machine's clock against one that nobody can set, for as long as it lives.

    Parameters
    ----------
    wall, steady : callable
        Return the instant, µs of UTC, and the time since some fixed moment, µs.
    """

    def __init__(
        self, wall: Callable[[], int] = now_us, steady: Callable[[], int] | None = None
    ) -> None:
        self._wall = wall
        self._steady = steady or _since_boot_us
        self.settle()

    def step(self) -> Step | None:
        """Return the step since the watch was last settled, or None."""
        is_us = self._wall()
        was_us = self._steady() + self._offset_us
        return Step(was_us, is_us) if abs(is_us - was_us) > STEP_US else None

    def settle(self) -> None:
        """Take the clock as it is now: the step is logged."""
        self._offset_us = self._wall() - self._steady()


def behind(last: Entry | None, now: int) -> Step | None:
    """Return the step back that the log's last entry shows, or None.

    A reading may lie anywhere in the past; it is the instants of entry that follow each other.
    """
    if last is None or now >= last.entered_us - STEP_US:
        return None
    return Step(last.entered_us, now)


def log(
    store: Store,
    entry: Entry,
    configs: Mapping[str, bytes],
    *,
    site: EntrySite,
    watch: ClockWatch | None = None,
    now: int | None = None,
) -> tuple[Receipt, Step | None]:
    """Append an entry, after that of a clock step where there was one.

    ``configs`` holds the site's text as well, which the entry of the step rests on. Returns the
    entry's receipt, and the step for the front end to tell. An entry sent again
    after a lost answer keeps its place, and no step is logged for it.
    """
    now = now_us() if now is None else now
    seen = watch.step() if watch else None
    step = seen or behind(_newest(store), now)
    if step is None or store.history(entry.uid):
        return store.append(entry, configs), None
    about = clock_entry(site=site, was_us=step.was_us, is_us=step.is_us)
    receipts = store.append_many([(about, configs), (entry, configs)])
    if watch:
        watch.settle()
    return receipts[1], step


def _newest(store: Store) -> Entry | None:
    try:
        rows = store.tail(1)
    except StoreCorruptError:
        # A damaged entry is for verify to tell; it must not keep the next one out of the log.
        return None
    return rows[0].entry if rows else None


def _since_boot_us() -> int:
    # Counts while the machine sleeps, which the monotonic clock of Linux does not.
    clock = getattr(time, "CLOCK_BOOTTIME", time.CLOCK_MONOTONIC)
    return time.clock_gettime_ns(clock) // 1000
