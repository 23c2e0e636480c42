"""A handover gathered from the log and the profiles."""

from __future__ import annotations

from dataclasses import replace
from itertools import takewhile
from typing import TYPE_CHECKING

from tankcalc import __version__
from tankcalc.balance.beginning import beginning_after
from tankcalc.errors import TankcalcError
from tankcalc.handover.changes import changes_of
from tankcalc.handover.data import Correction, Handover, Place, TankPart
from tankcalc.handover.made import made_in
from tankcalc.shiftlog.crews import crew_of
from tankcalc.shiftlog.kinds import (
    ACKNOWLEDGEMENT,
    CORRECTIONS,
    MOVEMENT,
    NOTE,
    READING,
    SIGN_OFF,
    SIGN_ON,
)
from tankcalc.shiftlog.standing import Standing, standing, standing_between
from tankcalc.watch.looks import answered
from tankcalc.watch.older import DAY_US, ages_before
from tankcalc.watch.past import remarkable
from tankcalc.watch.site import BACK_US, Kept, watch

if TYPE_CHECKING:
    from collections.abc import Sequence

    from tankcalc.balance.site import TankBalance
    from tankcalc.profiles import Site
    from tankcalc.shiftlog.shifts import Shift
    from tankcalc.shiftlog.store import Row, Store
    from tankcalc.units import System
    from tankcalc.watch.site import Watched
    from tankcalc.watch.state import TankWatch


_LATE = (READING, MOVEMENT, NOTE)
"""What is logged about a time of its own; a note on a fault is a note."""


def build(
    store: Store, site: Site, shift: Shift, now_us: int, *, system: System | None = None
) -> Handover:
    """Return the handover of a shift, by what the log says now.

    Parameters
    ----------
    shift : Shift
        One that has begun.
    now_us : int
        The present instant, µs of UTC; a shift that runs is described as it is now.
    system : System or None
        Of units; None: the site's own.

    Notes
    -----
    What was entered later about the shift, an amendment or a late reading, counts: the report of
    a past shift says what is known of it now.
    """
    number, digest = store.head()
    at_us = min(now_us, shift.end_us - 1)
    kept = Kept()
    watched = watch(store, site, at_us, back_us=at_us - shift.start_us + BACK_US, kept=kept)
    watched = _with_older_ages(store, watched, kept)
    stood = standing_between(store, shift.start_us, at_us + 1)
    made = made_in(store, shift, now_us)
    corrections = _corrections(store, made)
    late = _late(store, shift, made)
    balances, unbalanced = _balances(store, site, (shift.start_us, min(now_us, shift.end_us)))
    shown = system or site.units
    rows = [one.holds for one in stood if one.holds is not None]
    return Handover(
        place=Place(site.name, site.place, site.is_demo, site.time_zone, shown),
        shift=shift,
        crew=None if site.crews is None else crew_of(shift, site.crews),
        at_us=at_us if at_us == now_us else shift.end_us,
        made_us=now_us,
        changes=replace(
            changes_of(watched, shift, stood, corrections, site.alerts, shown), late=late
        ),
        tanks=_parts(watched, shift, balances),
        unbalanced=unbalanced,
        remarkable=(*late, *(one for one in stood if remarkable(one))),
        notes=tuple(row for row in rows if _is_note(row)),
        people=tuple(r for r in rows if r.entry.kind in (SIGN_ON, SIGN_OFF)),
        acknowledgements=_acknowledged(store, shift),
        head=(number, digest.hex()),
        program=__version__,
        read_every_s=site.rates.read_every_s,
        begins=beginning_after(store, shift.start_us),
    )


def _with_older_ages(store: Store, watched: Watched, kept: Kept) -> Watched:
    """Return the tanks with dips and samples from before the time that was read."""
    tanks = []
    for one in watched.tanks:
        older = kept.older.get(one.name)
        if older is not None:
            tanks.append(replace(one, ages=one.ages.or_else(older.ages)))
        elif one.last is not None and one.tank is None and not one.ages.complete:
            before = ages_before(store, one.name, watched.now_us, watched.from_us)
            tanks.append(replace(one, ages=one.ages.or_else(before)))
        else:
            tanks.append(one)
    return replace(watched, tanks=tuple(tanks))


def _balances(
    store: Store, site: Site, span: tuple[int, int]
) -> tuple[dict[str, TankBalance], str]:
    from tankcalc.balance.contents import Evaluated
    from tankcalc.balance.history import History
    from tankcalc.balance.site import balance

    if span[1] <= span[0]:
        return {}, "the shift has only begun."
    try:
        found = balance(History(store), Evaluated(site, store), span)
    except TankcalcError as error:
        return {}, str(error)
    return {one.tank: one for one in found.tanks}, ""


def _parts(
    watched: Watched, shift: Shift, balances: dict[str, TankBalance]
) -> tuple[TankPart, ...]:
    return tuple(
        TankPart(
            one,
            _trend(one, watched, shift.start_us - DAY_US),
            balances.get(one.name),
            _moving(one, watched),
        )
        for one in watched.tanks
    )


def _moving(one: TankWatch, watched: Watched) -> tuple[Row, ...]:
    """Return the latest readings with which one movement was declared."""
    if one.movement not in ("receiving", "delivering"):
        return ()
    rows = reversed(watched.past.entries(one.name))
    run = list(takewhile(lambda row: row.entry.movement == one.movement, rows))
    return tuple(reversed(run))


def _trend(
    one: TankWatch, watched: Watched, from_us: int
) -> tuple[tuple[int, float | None, float | None], ...]:
    points = []
    for row in watched.past.entries(one.name):
        entry = row.entry
        if entry.t_us >= from_us:
            data = entry.result or {} if answered(entry) else {}
            points.append((entry.t_us, _number(data.get("level_m")), _number(data.get("mass_kg"))))
    return tuple(points)


def _number(value: object) -> float | None:
    return float(value) if isinstance(value, int | float) else None


def _corrections(store: Store, made: Sequence[Row]) -> list[Correction]:
    rows = (row for row in made if row.entry.kind in CORRECTIONS)
    return [
        Correction(row, next((r.seq for r in store.history(row.entry.uid)), None)) for row in rows
    ]


def _late(store: Store, shift: Shift, made: Sequence[Row]) -> tuple[Standing, ...]:
    """Return what was entered in a shift about the time before it, as it stands now."""
    rows = [r for r in made if r.entry.kind in _LATE and r.entry.t_us < shift.start_us]
    found = (standing(store.history(row.entry.uid))[:1] or [Standing(row)] for row in rows)
    return tuple(one for several in found for one in several)


def _is_note(row: Row) -> bool:
    """Return whether words were logged that no other part of the report shows."""
    entry = row.entry
    shown = entry.kind in (SIGN_ON, SIGN_OFF, ACKNOWLEDGEMENT) or "fault" in entry.typed
    return bool(entry.note.strip()) and not shown


def _acknowledged(store: Store, shift: Shift) -> tuple[Row, ...]:
    found = store.between(shift.start_us, None, kind=ACKNOWLEDGEMENT)
    wanted = {"of": "handover", "what": shift.title}
    return tuple(r for r in found if wanted.items() <= r.entry.typed.items())
