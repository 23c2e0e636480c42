"""Which entries the log pane shows, as it is typed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc.shiftlog.shifts import shift_at, shift_named
from tankcalc.tui.log_pages import Sought

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.profiles import Site

THIS, ALL = "this", "all"
"""The two words for shifts: the one that is on, and every one."""


@dataclass(frozen=True, slots=True)
class LogFilter:
    """Tank and kind, empty for any; the shift as it was typed."""

    tank: str = ""
    kind: str = ""
    shift: str = THIS

    def sought(self, site: Site, zone: ZoneInfo, now_us: int) -> Sought:
        """Return what that is in the log; a TimeError where the shift is none."""
        return Sought(self.tank or None, self.kind or None, self._shift(site, zone, now_us))

    def _shift(self, site: Site, zone: ZoneInfo, now_us: int) -> tuple[str, str] | None:
        typed = self.shift.strip().casefold()
        if typed == ALL:
            return None
        now = shift_at(now_us, zone, site.shifts)
        shift = now if typed in ("", THIS) else shift_named(self.shift, zone, site.shifts)
        return shift.date, shift.name
