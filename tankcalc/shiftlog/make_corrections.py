"""Entries that amend or withdraw earlier ones: those stay as they are, and in sight."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING

from tankcalc.errors import InputError
from tankcalc.shiftlog.kinds import (
    AMENDABLE,
    AMENDMENT,
    CORRECTIONS,
    READING,
    WITHDRAWABLE,
    WITHDRAWAL,
)
from tankcalc.shiftlog.make import EntrySite, entry_of, reading_facts, versions_of, wanted
from tankcalc.shiftlog.make_words import movement_entry
from tankcalc.shiftlog.standing import Standing, standing
from tankcalc.shiftlog.uid import show_uid

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.result import Result
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Store
    from tankcalc.tank import Tank

_WHY = "an earlier entry is corrected for a reason"


def to_correct(store: Store, uid: bytes, kind: str) -> Standing:
    """Return the original behind an identifier and what became of it so far.

    ``kind`` is what is to be done, an amendment or a withdrawal; ``uid`` may also be that of an
    earlier amendment.

    Raises
    ------
    InputError
        There is no such entry, it is of a kind that cannot be corrected, or it is withdrawn.
    """
    rows = store.history(uid)
    asked = next((row for row in rows if row.entry.uid == uid), None)
    if asked is None:
        raise InputError(f"the log holds no entry {show_uid(uid)}.")
    original = rows[0]
    amend = kind == AMENDMENT
    if asked is not original and asked.entry.kind not in CORRECTIONS:
        raise InputError(f"a {asked.entry.kind} cannot be {'amended' if amend else 'withdrawn'}.")
    if original.entry.kind not in (AMENDABLE if amend else WITHDRAWABLE):
        raise InputError(
            f"entry {original.seq} is a {original.entry.kind}, which cannot be"
            f" {'amended' if amend else 'withdrawn'}. Log a note about it."
        )
    (found,) = (one for one in standing(rows) if one.row is original)
    if found.withdrawn_by is not None:
        raise InputError(f"entry {original.seq} was {found.mark} already.")
    return found


def amended_reading(
    *,
    site: EntrySite,
    original: Entry,
    tank: Tank,
    fluid: Fluid,
    typed: Mapping[str, str],
    result: Result,
    reason: str,
    now_us: int,
    t_us: int | None = None,
    note: str = "",
    who: str = "",
    movement: str = "",
    rejected: bool = False,
    witness: str = "",
    seen: int = 0,
) -> Entry:
    """Return the entry that stands for a reading from now on, all of it anew.

    ``original`` is the reading itself, however often it was amended; without ``t_us`` the time
    is that of the reading.
    """
    wanted(reason, _WHY)
    if original.kind != READING:
        raise InputError(f"a {original.kind} is no reading.")
    return entry_of(
        site,
        now_us,
        original.t_us if t_us is None else t_us,
        kind=AMENDMENT,
        ref=original.uid,
        **reading_facts(site, tank, fluid, typed, result, reason, rejected=rejected),
        note=note,
        who=who,
        movement=movement,
        witness=witness,
        seen=seen,
    )


def amended_movement(
    *,
    site: EntrySite,
    original: Entry,
    tank: Tank,
    other: Tank | None,
    received: str = "",
    delivered: str = "",
    drawn: str = "",
    reason: str,
    now_us: int,
    t_us: int | None = None,
    note: str = "",
    who: str = "",
) -> Entry:
    """Return the entry that stands for a metered movement from now on."""
    wanted(reason, _WHY)
    anew = movement_entry(
        site=site,
        tank=tank,
        received=received,
        delivered=delivered,
        drawn=drawn,
        other=other,
        now_us=now_us,
        t_us=original.t_us if t_us is None else t_us,
        note=note,
        who=who,
    )
    return replace(anew, kind=AMENDMENT, ref=original.uid, reason=reason)


def withdrawal_entry(
    *,
    site: EntrySite,
    original: Entry,
    reason: str,
    now_us: int,
    who: str = "",
) -> Entry:
    """Return the entry that takes an earlier one back, for good."""
    wanted(reason, _WHY)
    if original.kind not in WITHDRAWABLE:
        raise InputError(f"a {original.kind} cannot be withdrawn.")
    return entry_of(
        site,
        now_us,
        None,
        kind=WITHDRAWAL,
        ref=original.uid,
        reason=reason,
        tank=original.tank,
        who=who,
        note="",
        versions=versions_of(site=site.version),
    )
