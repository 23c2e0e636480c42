"""The log as the balance reads it: standing readings and movements of every tank."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Protocol

from tankcalc.shiftlog.kinds import AMENDMENT, MOVEMENT, READING, WITHDRAWAL
from tankcalc.shiftlog.standing import standing

if TYPE_CHECKING:
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row

HOUR_US = 3_600_000_000
_STEPS_H = (2, 24, 7 * 24, 31 * 24, 366 * 24, None)
"""How far a reading is looked for, step by step: a log may be long."""

MIRROR_US = HOUR_US
"""Movements that two tanks logged of one transfer lie no further apart."""


class Reader(Protocol):
    """What the balance needs of a store."""

    def between(
        self,
        start_us: int | None,
        end_us: int | None,
        *,
        tank: str | None = None,
        kind: str | None = None,
    ) -> Iterator[Row]:
        """Yield the entries whose reading lies in [start, end), in the order of the log."""

    def latest(self) -> dict[str, Row]:
        """Return for each tank the reading with the latest time, as it stands now."""

    def history(self, uid: bytes) -> list[Row]:
        """Return an entry's original and everything that refers to it, in the order of the log."""

    def get_config(self, version: str) -> bytes:
        """Return the text with that SHA-256 (hex); KeyError where the log holds none."""

    def head(self) -> tuple[int, bytes]:
        """Return the number and hash of the last entry."""


@dataclass(slots=True)
class TankLog:
    """Standing readings of one tank that are fit for a balance, looked up as they are needed.

    Attributes
    ----------
    tank : str
        Its name.
    history : History
        The log.
    left_out : set of bytes
        Identifiers of the readings that were passed over: refused, rejected by the operator, or
        without a mass.
    """

    tank: str
    history: History
    left_out: set[bytes] = field(default_factory=set)
    _at: dict[int, Entry | None] = field(default_factory=dict, init=False, repr=False)

    def at(self, t_us: int) -> Entry | None:
        """Return the last reading at or before an instant."""
        if t_us not in self._at:
            self._at[t_us] = self._last_before(t_us)
        return self._at[t_us]

    def _last_before(self, t_us: int) -> Entry | None:
        for hours in _STEPS_H:
            since = None if hours is None else t_us - hours * HOUR_US
            for entry in reversed(self.history.standing(since, t_us + 1, READING, self.tank)):
                if _holds(entry):
                    return entry
                self.left_out.add(entry.uid)
        return None

    def first(self, start_us: int, end_us: int) -> Entry | None:
        """Return the first reading in [start, end]."""
        for hours in _STEPS_H:
            until = end_us if hours is None else min(end_us, start_us + hours * HOUR_US)
            found = self.history.standing(start_us, until + 1, READING, self.tank)
            entry = next((e for e in found if _holds(e)), None)
            if entry is not None or until == end_us:
                return entry
        return None

    def from_to(self, start_us: int, end_us: int) -> list[Entry]:
        """Return the readings in [start, end]."""
        found = self.history.standing(start_us, end_us + 1, READING, self.tank)
        return [e for e in found if _holds(e)]


@dataclass(frozen=True, slots=True)
class LoggedMovement:
    """A movement entry as one tank sees it.

    Attributes
    ----------
    entry : Entry
        The tank's own, or another tank's that names it.
    mirrored : bool
        Whether it is another tank's.
    answered : bool
        Whether the tank at the other end has an entry of its own of the same transfer.
    """

    entry: Entry
    mirrored: bool = False
    answered: bool = False

    @property
    def other(self) -> str:
        """The tank at the other end; empty: the outside."""
        named = self.entry.tank if self.mirrored else self.entry.typed.get("other")
        return (named or "").strip()

    def figure(self, key: str) -> float | None:
        """Return the movement's volume or mass, positive into this tank."""
        value = (self.entry.result or {}).get(key)
        if not isinstance(value, int | float):
            return None
        return -float(value) if self.mirrored else float(value)

    @property
    def inwards(self) -> bool:
        """Whether it goes into this tank."""
        return ("received" in self.entry.typed) is not self.mirrored


@dataclass(slots=True)
class History:
    """The entries of a log as they stand now."""

    reader: Reader
    _corrections: dict[str, list[Row]] = field(default_factory=dict, init=False, repr=False)

    def tank(self, name: str) -> TankLog:
        """Return a tank's readings."""
        return TankLog(name, self)

    def tanks(self, start_us: int) -> list[str]:
        """Return the names of the tanks that were read at or after an instant, sorted."""
        latest = self.reader.latest().items()
        return sorted(name for name, row in latest if row.entry.t_us >= start_us)

    def movements(self, start_us: int, end_us: int) -> dict[str, list[LoggedMovement]]:
        """Return the movements in (start, end] by tank, in the order of their times.

        A transfer that only one of its tanks logged counts for both; where both did, each has
        its own entry.
        """
        own = [LoggedMovement(e) for e in self.standing(start_us + 1, end_us + 1, MOVEMENT, None)]
        by_tank: dict[str, list[LoggedMovement]] = {}
        times: dict[tuple[str, str, bool], list[int]] = {}
        for one in own:
            by_tank.setdefault(one.entry.tank or "", []).append(one)
            times.setdefault(_ends(one), []).append(one.entry.t_us)
        for one in own:
            source, target, by_target = _ends(one)
            answers = times.get((source, target, not by_target), [])
            near = next((t for t in answers if abs(t - one.entry.t_us) <= MIRROR_US), None)
            if near is not None:
                answers.remove(near)
                mine = by_tank[one.entry.tank or ""]
                mine[mine.index(one)] = replace(one, answered=True)
            elif one.other:
                by_tank.setdefault(one.other, []).append(LoggedMovement(one.entry, mirrored=True))
        for found in by_tank.values():
            found.sort(key=lambda m: m.entry.t_us)
        return by_tank

    def standing(
        self, start_us: int | None, end_us: int, kind: str, tank: str | None
    ) -> list[Entry]:
        """Return the entries of a kind in [start, end), of a tank or of all, by their times."""
        rows = {r.seq: r for r in self.reader.between(start_us, end_us, tank=tank, kind=kind)}
        for uid in self._doubtful(list(rows.values()), start_us, end_us, tank):
            found = self.reader.history(uid)
            if found and found[0].entry.kind == kind:
                rows |= {row.seq: row for row in found}
        held = [one.entry for one in standing(rows[seq] for seq in sorted(rows))]
        inside = [e for e in held if e is not None and _within(e, start_us, end_us, tank)]
        return sorted(inside, key=lambda e: e.t_us)

    def _doubtful(
        self, rows: list[Row], start_us: int | None, end_us: int, tank: str | None
    ) -> set[bytes]:
        """Return the originals that may have been corrected, or moved into the span."""
        if tank is None:  # a correction may be made at any later time
            moved = self.reader.between(start_us, end_us, kind=AMENDMENT)
            return {r.entry.uid for r in rows} | {r.entry.ref for r in moved if r.entry.ref}
        if tank not in self._corrections:
            self._corrections[tank] = [
                row
                for kind in (AMENDMENT, WITHDRAWAL)
                for row in self.reader.between(None, None, tank=tank, kind=kind)
            ]
        known = {row.entry.uid for row in rows}
        return {
            row.entry.ref
            for row in self._corrections[tank]
            if row.entry.ref is not None
            and (row.entry.ref in known or _within(row.entry, start_us, end_us, tank))
        }


def _within(entry: Entry, start_us: int | None, end_us: int, tank: str | None) -> bool:
    after = start_us is None or entry.t_us >= start_us
    return after and entry.t_us < end_us and tank in (None, entry.tank)


def _holds(entry: Entry) -> bool:
    """Return whether a reading's figures are fit for a balance."""
    result: Mapping[str, object] = entry.result or {}
    if result.get("status") == "refused" or entry.judgement == "rejected":
        return False
    return isinstance(result.get("mass_kg"), int | float)


def _ends(own: LoggedMovement) -> tuple[str, str, bool]:
    """Return from where a movement goes, where to, and which of the two logged it."""
    tank = own.entry.tank or ""
    return (own.other, tank, True) if own.inwards else (tank, own.other, False)
