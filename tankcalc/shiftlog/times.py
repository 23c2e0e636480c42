"""Instants: integer microseconds of UTC inside, local wall time with its offset at the edges.

Two local times are never subtracted, and a local time that a change of the clocks skips or
repeats is never guessed: it is refused with what to type instead.
"""

from __future__ import annotations

import re
import time
from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

from tankcalc.errors import InputError, TimeError
from tankcalc.text import clean

SECOND_US = 1_000_000
FUTURE_US = 5 * 60 * SECOND_US
"""How far ahead of this machine's clock a reading may lie: two clocks never quite agree."""
LAST_US = 253_370_764_799_999_999
"""9998-12-31T23:59:59.999999Z: the last instant that every zone can show."""

# Wall time: offsets are taken off by hand.
_EPOCH = datetime(1970, 1, 1)
_TICK = timedelta(microseconds=1)
_SHAPE = re.compile(
    r"(\d{4}-\d\d-\d\d|\d{8}|\d{4}-?W\d\d-?\d)"
    r"(?P<clock>[T ]\d\d(:?\d\d(:?\d\d([.,]\d{1,9})?)?)?(Z|[+-]\d\d(:?\d\d)?)?)?",
    re.ASCII,
)
_EXAMPLE = 'Type it as "2026-12-01T14:30" (local) or "2026-12-01T14:30Z".'


def now_us() -> int:
    """Return the present instant by this machine's clock, µs of UTC."""
    return time.time_ns() // 1000


def zone_named(name: str) -> ZoneInfo:
    """Return the time zone of that name; an InputError where there is none."""
    try:
        return ZoneInfo(name)
    # An unknown name is a KeyError, a malformed one a ValueError, a folder's an OSError.
    except (KeyError, ValueError, OSError) as error:
        raise InputError(
            f'"{clean(name)}" is no time zone. Type one as "Europe/Lisbon".'
        ) from error


def parse_time(text: str, zone: ZoneInfo, now: int | None = None) -> int:
    """Return the instant a text stands for.

    Parameters
    ----------
    text : str
        ISO 8601 date and time with an offset or ``Z``; or without, as wall time of the site.
    zone : ZoneInfo
        The site's time zone.
    now : int or None
        The present instant, µs of UTC. When given, a time more than five minutes ahead of it is
        refused; None: any time will do (a filter, not a reading).

    Returns
    -------
    int
        Microseconds of UTC since 1970-01-01T00:00Z.

    Raises
    ------
    TimeError
        The text is no time, has no time of day, lies outside the years 1970 to 9998 or in the
        future, or is a wall time that does not exist or exists twice.

    Examples
    --------
    >>> lisbon = ZoneInfo("Europe/Lisbon")
    >>> parse_time("2026-07-01T12:00", lisbon) == parse_time("2026-07-01T11:00Z", lisbon)
    True
    """
    shown = clean(text, limit=60)
    moment = _read(text, shown)
    t_us = _only_instant(moment, zone, shown) if moment.tzinfo is None else _from_wall(moment)
    if not 0 <= t_us <= LAST_US:
        raise TimeError(f'"{shown}" lies outside the years 1970 to 9998.')
    if now is not None and t_us > now + FUTURE_US:
        raise TimeError(
            f'"{shown}" is in the future: it is now {show_local(now, zone)}. '
            "A reading is logged after it is taken."
        )
    return t_us


def instants_of(wall: datetime, zone: ZoneInfo) -> tuple[int, ...]:
    """Return every instant at which the zone's clocks show this wall time.

    None in the hour that is skipped in spring, two in the hour that is repeated in autumn,
    otherwise one; earliest first, µs of UTC.
    """
    found = set()
    for fold in (0, 1):
        offset = wall.replace(fold=fold, tzinfo=zone).utcoffset() or timedelta(0)
        t_us = (wall - offset - _EPOCH) // _TICK
        if _wall_at(t_us, zone) == wall:
            found.add(t_us)
    return tuple(sorted(found))


def end_of_gap(wall: datetime, zone: ZoneInfo) -> int:
    """Return the instant at which the clocks jump over a wall time that does not exist.

    The jump lies between the two instants that the offsets before and after it would give;
    offsets change on whole seconds, so halving finds it exactly.
    """
    bounds = []
    for fold in (1, 0):
        offset = wall.replace(fold=fold, tzinfo=zone).utcoffset() or timedelta(0)
        bounds.append((wall - offset - _EPOCH) // timedelta(seconds=1))
    before, after = bounds
    old_offset = _offset_at(before * SECOND_US, zone)
    while after - before > 1:
        middle = (before + after) // 2
        if _offset_at(middle * SECOND_US, zone) == old_offset:
            before = middle
        else:
            after = middle
    return after * SECOND_US


def show_local(t_us: int, zone: ZoneInfo) -> str:
    """Return the wall time to the minute, always with its offset.

    Examples
    --------
    >>> show_local(1_793_000_000_000_000, ZoneInfo("Europe/Lisbon"))
    '2026-10-26 07:33+00:00'
    """
    return _aware(t_us, zone).isoformat(" ", "minutes")


def iso_local(t_us: int, zone: ZoneInfo) -> str:
    """Return the wall time to the microsecond in ISO 8601, with its offset."""
    return _aware(t_us, zone).isoformat()


def iso_utc(t_us: int) -> str:
    """Return the instant in ISO 8601, UTC.

    Examples
    --------
    >>> iso_utc(1_793_000_000_000_000)
    '2026-10-26T07:33:20Z'
    """
    return _wall_utc(t_us).isoformat() + "Z"


def local_date(t_us: int, zone: ZoneInfo) -> datetime:
    """Return midnight, as wall time, of the local date at that instant."""
    return _wall_at(t_us, zone).replace(hour=0, minute=0, second=0, microsecond=0)


def _read(text: str, shown: str) -> datetime:
    upper = text.strip().upper()
    shape = _SHAPE.fullmatch(upper)
    if shape is None:
        raise TimeError(f'"{shown}" is no date and time in ISO 8601. {_EXAMPLE}')
    if shape["clock"] is None:
        raise TimeError(f'"{shown}" has no time of day. {_EXAMPLE}')
    try:
        return datetime.fromisoformat(upper)
    except ValueError as error:
        raise TimeError(f'"{shown}" is not on the calendar or the clock. {_EXAMPLE}') from error


def _only_instant(wall: datetime, zone: ZoneInfo, shown: str) -> int:
    if not 1970 <= wall.year <= 9998:
        raise TimeError(f'"{shown}" lies outside the years 1970 to 9998.')
    instants = instants_of(wall, zone)
    if not instants:
        jump = end_of_gap(wall, zone)
        before, after = iso_local(jump - SECOND_US, zone), iso_local(jump, zone)
        raise TimeError(
            f'"{shown}" does not exist in {zone.key}: the clocks go from '
            f"{before} straight to {after}. Type a time before or after."
        )
    if len(instants) > 1:
        first, second = (iso_local(t_us, zone) for t_us in instants)
        raise TimeError(
            f'"{shown}" happens twice in {zone.key}: type "{first}" for the first, '
            f'"{second}" for the second.'
        )
    return instants[0]


def _from_wall(moment: datetime) -> int:
    offset = moment.utcoffset() or timedelta(0)
    return ((moment.replace(tzinfo=None) - _EPOCH) - offset) // _TICK


def _wall_utc(t_us: int) -> datetime:
    return _EPOCH + timedelta(microseconds=t_us)


def _aware(t_us: int, zone: ZoneInfo) -> datetime:
    return _wall_utc(t_us).replace(tzinfo=UTC).astimezone(zone)


def _wall_at(t_us: int, zone: ZoneInfo) -> datetime:
    return _aware(t_us, zone).replace(tzinfo=None, fold=0)


def _offset_at(t_us: int, zone: ZoneInfo) -> timedelta:
    return _aware(t_us, zone).utcoffset() or timedelta(0)
