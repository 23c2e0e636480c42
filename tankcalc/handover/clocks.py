"""Instants of a handover as people read them: local, with the offset where it matters."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo

from tankcalc.limits.times import duration
from tankcalc.shiftlog.times import iso_local, show_local

if TYPE_CHECKING:
    from tankcalc.shiftlog.shifts import Shift

HOUR_US = 3_600_000_000


@dataclass(frozen=True, slots=True)
class Clock:
    """Shows instants (µs of UTC) of one shift.

    A time of the day that begins with the shift is shown as "14:30", with its offset where the
    clocks change in it; any other time with its date as well.
    """

    zone: ZoneInfo
    shift: Shift

    @property
    def changes(self) -> bool:
        """Whether the clocks change within the shift."""
        return self._offset(self.shift.start_us) != self._offset(self.shift.end_us)

    @property
    def hours(self) -> str:
        """How long the shift is."""
        return f"{self.shift.length_us / HOUR_US:g} h"

    def show(self, t_us: int) -> str:
        """Return an instant, in short where that is clear."""
        if not self.near(t_us):
            return self.full(t_us)
        wall = show_local(t_us, self.zone)
        steady = self._offset(self.shift.start_us) == self._offset(self._day_ends_us)
        return wall[11:16] if steady else wall[11:]

    def near(self, t_us: int) -> bool:
        """Return whether an instant lies in the day that begins with the shift."""
        return self.shift.start_us <= t_us < self._day_ends_us

    def full(self, t_us: int) -> str:
        """Return an instant with date and offset."""
        return show_local(t_us, self.zone)

    def ago(self, t_us: int, now_us: int) -> str:
        """Return how long ago an instant was."""
        return duration(max(now_us - t_us, 0) / 1e6)

    def marks(self, from_us: int, to_us: int) -> tuple[tuple[int, str], ...]:
        """Return instants to be marked on an axis: every six hours from the first, and days."""
        ticks = range(from_us, to_us + 1, 6 * HOUR_US)
        return tuple((t, show_local(t, self.zone)[11:16]) for t in ticks)

    @property
    def _day_ends_us(self) -> int:
        return max(self.shift.start_us + 24 * HOUR_US, self.shift.end_us + 1)

    def _offset(self, t_us: int) -> str:
        return iso_local(t_us, self.zone)[-6:]
