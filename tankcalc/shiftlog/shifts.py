"""Shifts: they begin at local wall times, and last as long as UTC says.

A shift is named by the local date it starts on and its name, "2026-12-01 Day".
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import datetime, time, timedelta
from zoneinfo import ZoneInfo

from tankcalc.errors import InputError, TimeError
from tankcalc.shiftlog.times import SECOND_US, end_of_gap, instants_of, local_date, show_local
from tankcalc.text import clean

LONGEST_RUN = 20_000
"""Shifts listed at once: some eighteen years of three a day."""


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

    @property
    def title(self) -> str:
        """Its date and name, as `shift_named` takes them."""
        return f"{self.date} {self.name}"

    @property
    def length_us(self) -> int:
        """How long it lasts, µs: 11 to 13 hours of a 12-hour night where the clocks change."""
        return self.end_us - self.start_us


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


def instants_around(date: str) -> tuple[int, int]:
    """Return instants before and after every shift that begins on a local date, in any zone.

    Local dates begin at most 14 hours before and 12 after that date of UTC, and a shift is no
    longer than the 25 hours of a day.

    Raises
    ------
    InputError
        The text is no date of ISO 8601.

    Examples
    --------
    >>> start_us, end_us = instants_around("2026-12-01")
    >>> (end_us - start_us) / 3_600_000_000
    78.0
    """
    try:
        midnight = datetime.fromisoformat(f"{date}T00:00:00+00:00")
    except ValueError as error:
        raise InputError(f'"{clean(date)}" is no date. Type it as "2026-12-01".') from error
    hours = int(midnight.timestamp()) // 3600
    return (hours - 15) * 3600 * SECOND_US, (hours + 63) * 3600 * SECOND_US


def shift_named(text: str, zone: ZoneInfo, shifts: Mapping[str, str]) -> Shift:
    """Return the shift of a date and a name, "2026-12-01 Day".

    Parameters
    ----------
    text : str
        Date in ISO 8601 and the shift's name; capitals do not matter where the name stays clear.
        The date alone will do where a site has one shift a day.
    zone : ZoneInfo
        The site's time zone.
    shifts : mapping of str to str
        Name to local start time, "HH:MM"; at least one.

    Raises
    ------
    TimeError
        No such date or shift, or one that a change of the clocks leaves no time on that date.

    Examples
    --------
    >>> berlin = ZoneInfo("Europe/Berlin")
    >>> night = shift_named("2026-10-24 night", berlin, {"Day": "06:00", "Night": "18:00"})
    >>> night.title, night.length_us / 3_600_000_000
    ('2026-10-24 Night', 13.0)
    """
    shown = clean(text, 60)
    written, _, words = text.strip().partition(" ")
    day = _date(written, shown, shifts)
    name = _name(words, shown, shifts)
    start_us = _start(datetime.combine(day, time.fromisoformat(shifts[name])), zone)
    shift = shift_at(start_us, zone, shifts)
    if (shift.name, shift.date) != (name, day.date().isoformat()):
        raise TimeError(
            f'"{shown}" has no time of its own: at {show_local(start_us, zone)} the clocks change, '
            f'and "{shift.title}" begins at the same instant.'
        )
    return shift


def shifts_between(
    from_us: int, until_us: int, zone: ZoneInfo, shifts: Mapping[str, str]
) -> Iterator[Shift]:
    """Yield every shift with any time in [from, until), µs of UTC, in their order.

    Raises
    ------
    TimeError
        There are more than `LONGEST_RUN`.
    """
    at_us = from_us
    for _ in range(LONGEST_RUN):
        if at_us >= until_us:
            return
        shift = shift_at(at_us, zone, shifts)
        yield shift
        at_us = shift.end_us
    raise TimeError(f"more than {LONGEST_RUN} shifts lie between these times. Take a shorter span.")


def _date(written: str, shown: str, shifts: Mapping[str, str]) -> datetime:
    try:
        day = datetime.strptime(written, "%Y-%m-%d")
    except ValueError as error:
        example = f'Type a date and a shift, as in "2026-12-01 {next(iter(shifts))}".'
        raise TimeError(f'"{shown}" does not begin with a date. {example}') from error
    if not 1970 < day.year < 9998:
        raise TimeError(f'"{shown}" lies outside the years 1971 to 9997.')
    return day


def _name(words: str, shown: str, shifts: Mapping[str, str]) -> str:
    """Return the shift that is meant: the exact name, or the only one spelt alike."""
    typed = " ".join(words.split())
    if typed in shifts:
        return typed
    if not typed and len(shifts) == 1:
        return next(iter(shifts))
    alike = [name for name in shifts if name.casefold() == typed.casefold()]
    if len(alike) == 1:
        return alike[0]
    known = ", ".join(clean(name, 30) for name in shifts)
    raise TimeError(f'"{shown}" names no shift of this site. Shifts here: {known}.')


def _start(wall: datetime, zone: ZoneInfo) -> int:
    """Return when a shift begins whose clock shows this: the first time, or right after a gap."""
    instants = instants_of(wall, zone)
    return instants[0] if instants else end_of_gap(wall, zone)


def _starts(
    today: datetime, zone: ZoneInfo, shifts: Mapping[str, str]
) -> Iterator[tuple[int, datetime, str]]:
    for days in (-1, 0, 1):
        midnight = today + timedelta(days=days)
        for name, text in shifts.items():
            wall = datetime.combine(midnight, time.fromisoformat(text))
            yield _start(wall, zone), wall, name
