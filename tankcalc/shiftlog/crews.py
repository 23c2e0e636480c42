"""Crews: who works a shift, by a roster that repeats over the dates.

A shift belongs to the local date it starts on, and the roster counts dates, never hours: changes of
the clocks do not touch it.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import date
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo

from tankcalc.errors import InputError
from tankcalc.shiftlog.shifts import Shift, shift_at
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.profiles.crews_schema import Roster

LONGEST_SEARCH = 1000
"""Shifts looked through for the next one of a crew: more than any roster has."""


def crew_of(shift: Shift, roster: Roster) -> str | None:
    """Return the crew that works a shift, None where the roster has no line for it.

    Notes
    -----
    The line's entry (date - begins) modulo its length; it holds before ``begins`` as well.

    Examples
    --------
    >>> from tankcalc.profiles.crews_schema import Roster
    >>> roster = Roster(date(2026, 1, 5), {"Day": ("A", "B"), "Night": ("C", "C", "D")})
    >>> crew_of(Shift("Night", "2026-01-07", 0, 1), roster)
    'D'
    """
    line = roster.crews.get(shift.name)
    if not line:
        return None
    days = (date.fromisoformat(shift.date) - roster.begins).days
    return line[days % len(line)]


def next_shift_of(
    crew: str, t_us: int, zone: ZoneInfo, shifts: Mapping[str, str], roster: Roster
) -> Shift:
    """Return the first shift of a crew that begins after an instant (µs of UTC).

    Raises
    ------
    InputError
        The roster knows no such crew.
    """
    known = {name for line in roster.crews.values() for name in line}
    for shift in _following(t_us, zone, shifts):
        if crew not in known:
            break
        if crew_of(shift, roster) == crew:
            return shift
    raise InputError(f'no shift of crew "{clean(crew, 40)}" is near. Known: {_listed(known)}.')


def _following(t_us: int, zone: ZoneInfo, shifts: Mapping[str, str]) -> Iterator[Shift]:
    at_us = shift_at(t_us, zone, shifts).end_us
    for _ in range(LONGEST_SEARCH):
        shift = shift_at(at_us, zone, shifts)
        yield shift
        at_us = shift.end_us


def _listed(names: set[str]) -> str:
    return ", ".join(clean(name, 40) for name in sorted(names)[:12])
