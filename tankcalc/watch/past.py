"""The bounded time back that is read from a log: readings, corrections, faults, actions."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from tankcalc.shiftlog.carried import open_faults
from tankcalc.shiftlog.entry import late
from tankcalc.shiftlog.kinds import (
    ACKNOWLEDGEMENT,
    CLOCK_STEP,
    MOVEMENT,
    NOTE,
    READING,
    WITHDRAWAL,
)
from tankcalc.shiftlog.standing import Standing, standing_between
from tankcalc.watch.actions import actions_from

if TYPE_CHECKING:
    from tankcalc.limits.latch import Action
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row, Store

PAGE = 500


@dataclass(frozen=True, slots=True)
class Past:
    """What is read of a log.

    Attributes
    ----------
    from_us, now_us : int
        The time back that was read, µs of UTC.
    readings, movements : mapping of str to tuple of Standing
        By tank, in the order of the times that hold; withdrawn ones included.
    actions : mapping of str to tuple of Action
        What was done about the alerts of each tank.
    faults : mapping of (str, str) to Row
        The notes that opened a fault which is open, by tank and instrument.
    steps : tuple of Row
        Steps of the clock.
    """

    from_us: int
    now_us: int
    readings: Mapping[str, tuple[Standing, ...]]
    movements: Mapping[str, tuple[Standing, ...]]
    actions: Mapping[str, tuple[Action, ...]]
    faults: Mapping[tuple[str, str], Row]
    steps: tuple[Row, ...]

    def entries(self, tank: str) -> list[Row]:
        """Return the rows of a tank's readings that hold, by their times; rejected ones left out.

        A reading that was refused is evidence and stays; one that somebody rejected is not.
        """
        held = [one.holds for one in self.readings.get(tank, ())]
        return [row for row in held if row is not None and counts(row.entry)]

    def tanks(self) -> list[str]:
        """Return the tanks that are anything known of, sorted."""
        named = {tank for tank, _ in self.faults} | self.actions.keys()
        return sorted((named | self.readings.keys() | self.movements.keys()) - {""})


def counts(entry: Entry) -> bool:
    """Return whether a reading counts: the operator did not reject what it came to."""
    return entry.judgement != "rejected" or entry.status == "refused"


def remarkable(one: Standing) -> str:
    """Return what is to be said of an entry: "late", "amended", "withdrawn"; else empty."""
    if one.state != "stands":
        return one.state
    return "late" if late(one.row.entry) else ""


@dataclass(slots=True)
class Notes:
    """Notes on faults, remembered: they have no age limit, and a log may be long."""

    _rows: dict[int, Row] = field(default_factory=dict, init=False, repr=False)
    _seen: dict[str, int] = field(default_factory=dict, init=False, repr=False)

    def faults(self, store: Store, now_us: int) -> dict[tuple[str, str], Row]:
        """Return the faults open at an instant, by what the log says now."""
        for kind in (NOTE, WITHDRAWAL):
            self._read(store, kind)
        # What was withdrawn at any later time counts as never made.
        return open_faults(
            row
            for _, row in sorted(self._rows.items())
            if row.entry.t_us <= now_us or row.entry.kind == WITHDRAWAL
        )

    def _read(self, store: Store, kind: str) -> None:
        """Read what is newer than at the last time, from the end of the log back."""
        known, before = self._seen.get(kind, 0), None
        while rows := store.tail(PAGE, kind=kind, before=before):
            self._seen[kind] = max(self._seen.get(kind, 0), rows[-1].seq)
            self._rows |= {
                row.seq: row
                for row in rows
                if row.seq > known and (kind == WITHDRAWAL or "fault" in row.entry.typed)
            }
            before = rows[0].seq
            if before <= known:
                return


def read_past(store: Store, from_us: int, now_us: int, notes: Notes | None = None) -> Past:
    """Return what a log says of the time from one instant to another (included), µs of UTC.

    Of a tank that was not read in that time its last reading is there all the same.
    """
    until = now_us + 1
    readings = _by_tank(standing_between(store, from_us, until, kind=READING))
    for tank, row in store.latest().items():
        if tank not in readings and row.entry.t_us < from_us:
            readings[tank] = tuple(_original(store, row))
    return Past(
        from_us,
        now_us,
        readings,
        _by_tank(standing_between(store, from_us, until, kind=MOVEMENT)),
        actions_from(store.between(None, until, kind=ACKNOWLEDGEMENT)),
        (notes or Notes()).faults(store, now_us),
        tuple(store.between(from_us, until, kind=CLOCK_STEP)),
    )


def _original(store: Store, row: Row) -> list[Standing]:
    from tankcalc.shiftlog.standing import standing

    return standing(store.history(row.entry.uid))


def _by_tank(found: list[Standing]) -> dict[str, tuple[Standing, ...]]:
    groups: dict[str, list[Standing]] = {}
    for one in sorted(found, key=lambda s: (s.holds or s.row).entry.t_us):
        groups.setdefault((one.holds or one.row).entry.tank or "", []).append(one)
    return {tank: tuple(group) for tank, group in groups.items()}
