"""A reading held against the earlier ones of its tank in the log."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any, cast

from tankcalc.errors import InputError, RangeError
from tankcalc.shiftlog.kinds import READING
from tankcalc.shiftlog.standing import standing

if TYPE_CHECKING:
    from tankcalc.consistency.history import Moment, Movement
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.result import Result
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row, Store
    from tankcalc.tank import Tank

ENOUGH = 8
"""Earlier readings that are looked at."""

LOOK = 64
"""Entries of the tank among which they are sought."""

FIGURES = ("level_m", "volume_m3", "mass_kg")


def recent_rows(store: Store, tank: Tank, before: int | None = None) -> list[Row]:
    """Return the entries of a tank that a reading is held against; ``before`` a number: those."""
    return store.tail(LOOK, tank=tank.file or tank.name, before=before)


def held_against_log(
    result: Result,
    rows: Iterable[Row],
    tank: Tank,
    fluid: Fluid,
    typed: Mapping[str, str],
    t_us: int,
    movement: str = "",
    instead_of: bytes | None = None,
) -> Result:
    """Return the result with what is odd about it, seen against earlier readings of its tank.

    Parameters
    ----------
    rows : iterable of Row
        Entries of the log, newest last; those of other tanks and notes are passed over, and so is
        what was withdrawn or rejected. Of an amended reading the amendment counts.
    typed : mapping of str to str
        The readings as typed.
    t_us : int
        Instant of the reading, µs of UTC.
    movement : str
        What was declared: "static", "receiving", "delivering", or nothing.
    instead_of : bytes or None
        ``uid`` of the reading that this one amends: it is not held against itself.
    """
    from tankcalc.consistency.history import against_history
    from tankcalc.result import as_json

    entries = _standing_entries(rows, tank.file or tank.name, instead_of)
    earlier = [
        _moment(tank, fluid, e.t_us, e.typed, e.result or {}, e.movement) for e in entries[-ENOUGH:]
    ]
    now = _moment(tank, fluid, t_us, typed, as_json(result), movement)
    notices = against_history(tank, earlier, now)
    if not notices:
        return result
    status = "check" if result.status == "good" else result.status
    return replace(result, status=status, warnings=(*result.warnings, *notices))


def _standing_entries(rows: Iterable[Row], tank: str, instead_of: bytes | None) -> list[Entry]:
    readings = (
        found.entry
        for found in standing(rows)
        if found.row.entry.kind == READING and found.row.entry.uid != instead_of
    )
    return [
        entry
        for entry in readings
        if entry is not None
        and entry.tank == tank
        and (entry.judgement != "rejected" or entry.status == "refused")
    ]


def _moment(
    tank: Tank,
    fluid: Fluid,
    t_us: int,
    typed: Mapping[str, str],
    data: Mapping[str, Any],
    movement: str,
) -> Moment:
    """Return what the checks need of a reading; what cannot be read any more is left out."""
    from tankcalc.consistency import reading_uncertainties
    from tankcalc.consistency.history import Moment
    from tankcalc.typed import readings_from_text

    readings, _ = readings_from_text(tank, typed)
    try:
        own = reading_uncertainties(tank, fluid, readings)
    except (RangeError, InputError):
        own = {}  # a reading without an uncertainty is not checked for having moved
    expanded = data.get("expanded_uncertainty") or {}
    known = {key: value / 2.0 for key, value in expanded.items() if isinstance(value, float)}
    return Moment(
        at_us=t_us,
        readings=readings,
        typed=typed,
        uncertainty={**own, **known},
        movement=cast("Movement", movement),
        **{key: data.get(key) for key in FIGURES},
    )
