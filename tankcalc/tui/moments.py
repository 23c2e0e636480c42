"""Instants that are still to come, as short as they are clear."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tankcalc.limits.times import duration
from tankcalc.tui.log_lines import wall

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

DAY_S = 86_400.0
WEEK_S = 6 * DAY_S
"""Below this the day of the week is enough."""
YEAR_S = 366 * DAY_S


def moment(at_us: int, seconds: float, zone: ZoneInfo) -> str:
    """Return the local minute that lies some time (s) after an instant.

    Examples
    --------
    >>> from zoneinfo import ZoneInfo
    >>> moment(0, 3600.0, ZoneInfo("UTC")), moment(0, 7 * 86_400.0, ZoneInfo("UTC"))
    ('Thu 01:00', 'Thu 08 Jan 00:00')
    """
    if seconds > YEAR_S:
        return f"in {duration(seconds)}"
    form = "%a %H:%M" if seconds < WEEK_S else "%a %d %b %H:%M"
    return wall(at_us + round(seconds * 1e6), zone).strftime(form)
