"""Entries as both front ends make them: the same facts, gathered once."""

from __future__ import annotations

import os
import pwd
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, Protocol

from tankcalc import __version__
from tankcalc.errors import InputError
from tankcalc.result import as_json
from tankcalc.shiftlog.entry import Entry
from tankcalc.shiftlog.shifts import shift_at
from tankcalc.shiftlog.times import zone_named
from tankcalc.shiftlog.uid import new_uid

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.result import Result
    from tankcalc.tank import Tank

LONGEST_NOTE = 4000
LONGEST_NAME = 80


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
) -> Entry:
    """Return the entry of a reading: what was typed, and what it came to.

    ``t_us`` is when the reading was taken, ``now_us`` when it is entered; without ``t_us`` they
    are the same. A refused result is kept too: that the instruments contradict the tank is
    evidence. Make the entry once, and send that same entry again when a store fails.
    """
    return _entry(
        site,
        now_us,
        t_us,
        kind="reading",
        tank=tank.file or tank.name,
        fluid=fluid.file or fluid.name,
        typed=dict(typed),
        result=as_json(result),
        note=note,
        who=who,
        versions=_versions(site=site.version, tank=tank.version, fluid=fluid.version),
        movement=movement,
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
    return _entry(
        site,
        now_us,
        t_us,
        kind="note",
        tank=None if tank is None else tank.file or tank.name,
        note=note,
        who=who,
        versions=_versions(site=site.version, tank="" if tank is None else tank.version),
    )


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


def _entry(site: EntrySite, now_us: int, t_us: int | None, **facts: Any) -> Entry:
    note, who = facts["note"], facts["who"]
    if len(note) > LONGEST_NOTE:
        raise InputError(f"the note has {len(note)} characters; {LONGEST_NOTE} is the most.")
    if len(who) > LONGEST_NAME:
        raise InputError(f"the name has {len(who)} characters; {LONGEST_NAME} is the most.")
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


def _versions(**versions: str) -> dict[str, str]:
    return {name: version for name, version in versions.items() if version}
