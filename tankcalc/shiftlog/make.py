"""Entries as both front ends make them: the same facts, gathered once.

Readings are here; `make_words` has what people say, `make_corrections` what they take back.
"""

from __future__ import annotations

import os
import pwd
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, Protocol

from tankcalc import __version__
from tankcalc.errors import InputError
from tankcalc.result import as_json
from tankcalc.shiftlog.entry import Entry
from tankcalc.shiftlog.kinds import NOTE, READING
from tankcalc.shiftlog.shifts import shift_at
from tankcalc.shiftlog.times import zone_named
from tankcalc.shiftlog.uid import new_uid

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.result import Result
    from tankcalc.tank import Tank

LONGEST_NOTE = 4000
LONGEST_NAME = 80

_LONGEST = {
    "note": LONGEST_NOTE,
    "reason": LONGEST_NOTE,
    "who": LONGEST_NAME,
    "witness": LONGEST_NAME,
}
_NAMED = {"who": "name", "witness": "witness's name"}


class EntrySite(Protocol):
    """What an entry needs to know of the site."""

    @property
    def name(self) -> str:
        """The site's name."""

    @property
    def time_zone(self) -> str:
        """Its time zone ("Europe/Lisbon")."""

    @property
    def shifts(self) -> Mapping[str, str]:
        """Shift names and their local start times."""

    @property
    def version(self) -> str:
        """SHA-256 (hex) of the site's file."""


def reading_entry(
    *,
    site: EntrySite,
    tank: Tank,
    fluid: Fluid,
    typed: Mapping[str, str],
    result: Result,
    now_us: int,
    t_us: int | None = None,
    note: str = "",
    who: str = "",
    movement: str = "",
    reason: str = "",
    rejected: bool = False,
    witness: str = "",
    source: str = "",
    seen: int = 0,
) -> Entry:
    """Return the entry of a reading: what was typed, and what it came to.

    ``t_us`` is when the reading was taken, ``now_us`` when it is entered; without ``t_us`` they
    are the same. A refused result is kept too: that the instruments contradict the tank is
    evidence. ``reason`` says why a result in doubt is accepted, or, with ``rejected``, why it is
    not; ``seen`` is the number of the newest entry it was held against. Make the entry once, and
    send that same entry again when a store fails.
    """
    if rejected:
        wanted(reason, "a reading is rejected for a reason")
    return entry_of(
        site,
        now_us,
        t_us,
        kind=READING,
        **reading_facts(site, tank, fluid, typed, result, reason, rejected=rejected),
        note=note,
        who=who,
        movement=movement,
        witness=witness,
        source=source,
        seen=seen,
    )


def note_entry(
    *,
    site: EntrySite,
    note: str,
    now_us: int,
    t_us: int | None = None,
    tank: Tank | None = None,
    who: str = "",
) -> Entry:
    """Return the entry of a note, about one tank or about none."""
    if not note.strip():
        raise InputError("a note without words is nothing to log.")
    return entry_of(
        site,
        now_us,
        t_us,
        kind=NOTE,
        tank=None if tank is None else tank.file or tank.name,
        note=note,
        who=who,
        versions=versions_of(site=site.version, tank="" if tank is None else tank.version),
    )


def judgement(status: str, reason: str, *, rejected: bool = False) -> str:
    """Return what stands in the entry of the operator's judgement of a result.

    Examples
    --------
    >>> judgement("good", ""), judgement("check", "dip agrees"), judgement("check", "")
    ('accepted', 'accepted with reason', '')
    """
    if rejected or status == "refused":
        return "rejected"
    if status == "good":
        return "accepted"
    return "accepted with reason" if reason.strip() else ""


def login_name() -> str:
    """Return who the operating system says is logged in; the environment has no say in it."""
    number = os.getuid()
    try:
        return pwd.getpwuid(number).pw_name
    except KeyError:
        return f"uid {number}"


def console_name() -> str:
    """Return this machine and process, as "host:process"."""
    return f"{os.uname().nodename}:{os.getpid()}"


def reading_facts(
    site: EntrySite,
    tank: Tank,
    fluid: Fluid,
    typed: Mapping[str, str],
    result: Result,
    reason: str,
    *,
    rejected: bool,
) -> dict[str, Any]:
    """Return the facts of an entry that a reading and its amendment have alike."""
    from tankcalc.typed import readings_from_text

    readings, _ = readings_from_text(tank, typed)
    return {
        "tank": tank.file or tank.name,
        "fluid": fluid.file or fluid.name,
        "typed": dict(typed),
        "result": as_json(result),
        "signals": dict(readings.signals),
        "reason": reason,
        "judgement": judgement(result.status, reason, rejected=rejected),
        "versions": versions_of(site=site.version, tank=tank.version, fluid=fluid.version),
    }


def entry_of(site: EntrySite, now_us: int, t_us: int | None, **facts: Any) -> Entry:
    """Return an entry with what every entry has: person, place, instants and shift."""
    for name, most in _LONGEST.items():
        size = len(facts.get(name, ""))
        if size > most:
            what = _NAMED.get(name, name)
            raise InputError(f"the {what} has {size} characters; {most} is the most.")
    at_us = now_us if t_us is None else t_us
    shift = shift_at(at_us, zone_named(site.time_zone), site.shifts)
    return Entry(
        uid=new_uid(now_us),
        t_us=at_us,
        entered_us=now_us,
        shift=shift.name,
        shift_date=shift.date,
        time_zone=site.time_zone,
        site=site.name,
        user=login_name(),
        console=console_name(),
        program=__version__,
        **facts,
    )


def wanted(text: str, why: str) -> None:
    """Raise an InputError where a text is blank."""
    if not text.strip():
        raise InputError(f"{why}. Say it in words.")


def versions_of(**versions: str) -> dict[str, str]:
    """Return the versions that there are, by what they are of."""
    return {name: version for name, version in versions.items() if version}
