"""Shifts: they begin at local wall times, and last as long as UTC says."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import datetime, time, timedelta
from zoneinfo import ZoneInfo

from tankcalc.shiftlog.times import end_of_gap, instants_of, local_date


@dataclass(frozen=True, slots=True)
class Shift:
    """One shift on one date.

    Attributes
    ----------
    name : str
        As the site names it ("Night").
    date : str
        Local date of its start, ISO 8601: the night of the 24th ends on the 25th.
    start_us, end_us : int
        From the first instant to the first instant no longer in it, µs of UTC.
    """

    name: str
    date: str
    start_us: int
    end_us: int


def shift_at(t_us: int, zone: ZoneInfo, shifts: Mapping[str, str]) -> Shift:
    """Return the shift that an instant falls in.

    Parameters
    ----------
    t_us : int
        The instant, µs of UTC.
    zone : ZoneInfo
        The site's time zone.
    shifts : mapping of str to str
        Name to local start time, "HH:MM"; at least one.

    Notes
    -----
    A start that the clocks skip in spring happens at the instant after the gap; one that they
    repeat in autumn happens the first time. Of two starts that fall on one instant for that
    reason the later one counts, so no shift is empty. Rates over a shift divide by
    ``end_us - start_us``, which is 11 or 13 hours for a 12-hour night across a change.

    Examples
    --------
    >>> from tankcalc.shiftlog.times import parse_time
    >>> berlin = ZoneInfo("Europe/Berlin")
    >>> night = shift_at(
    ...     parse_time("2026-10-25T01:00Z", berlin), berlin, {"Day": "06:00", "Night": "18:00"}
    ... )
    >>> night.name, night.date, (night.end_us - night.start_us) / 3_600_000_000
    ('Night', '2026-10-24', 13.0)
    """
    today = local_date(t_us, zone)
    starts = sorted(_starts(today, zone, shifts))
    start_us, wall, name = max(start for start in starts if start[0] <= t_us)
    end_us = min(start[0] for start in starts if start[0] > t_us)
    return Shift(name, wall.date().isoformat(), start_us, end_us)


def _starts(
    today: datetime, zone: ZoneInfo, shifts: Mapping[str, str]
) -> Iterator[tuple[int, datetime, str]]:
    for days in (-1, 0, 1):
        midnight = today + timedelta(days=days)
        for name, text in shifts.items():
            wall = datetime.combine(midnight, time.fromisoformat(text))
            instants = instants_of(wall, zone)
            yield (instants[0] if instants else end_of_gap(wall, zone)), wall, name
