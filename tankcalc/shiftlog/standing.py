"""What of the log stands now: amendments applied, withdrawals left out, nothing hidden."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal, NamedTuple

from tankcalc.shiftlog.kinds import AMENDABLE, AMENDMENT, CORRECTIONS, WITHDRAWABLE, WITHDRAWAL

if TYPE_CHECKING:
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row, Store

State = Literal["stands", "amended", "withdrawn"]


class Mark(NamedTuple):
    """What became of one row, and the row that did it."""

    state: State
    by: Row | None = None

    def __str__(self) -> str:
        return self.state if self.by is None else f"{self.state} by entry {self.by.seq}"


@dataclass(frozen=True, slots=True)
class Standing:
    """An original entry, and what became of it.

    Attributes
    ----------
    row : Row
        The original.
    corrections : tuple of Row
        Its amendments and its withdrawal, in the order of the log.
    """

    row: Row
    corrections: tuple[Row, ...] = ()

    @property
    def withdrawn_by(self) -> Row | None:
        """The withdrawal, where there is one: it is final."""
        return next((row for row in self.corrections if row.entry.kind == WITHDRAWAL), None)

    @property
    def amended_by(self) -> Row | None:
        """The last amendment, where there is one."""
        amendments = [row for row in self.corrections if row.entry.kind == AMENDMENT]
        return amendments[-1] if amendments else None

    @property
    def mark(self) -> Mark:
        """What became of it, and the row that did it; its text is "amended by entry 12"."""
        if self.withdrawn_by is not None:
            return Mark("withdrawn", self.withdrawn_by)
        return Mark("stands") if self.amended_by is None else Mark("amended", self.amended_by)

    @property
    def state(self) -> State:
        """What became of it."""
        return self.mark.state

    @property
    def holds(self) -> Row | None:
        """The row whose figures hold now: the last amendment or the original; None: withdrawn."""
        return None if self.withdrawn_by is not None else self.amended_by or self.row

    @property
    def entry(self) -> Entry | None:
        """The entry whose figures hold now; None where it was withdrawn."""
        return None if self.holds is None else self.holds.entry


class Corrections:
    """The amendments and withdrawals of a log, by what they correct."""

    def __init__(self, rows: Iterable[Row]) -> None:
        self._of: dict[bytes, list[Row]] = {}
        for row in rows:
            if row.entry.kind in CORRECTIONS and row.entry.ref is not None:
                self._of.setdefault(row.entry.ref, []).append(row)

    @classmethod
    def in_log(cls, store: Store, tank: str | None = None) -> Corrections:
        """Return those of a store; they are few, and found by an index."""
        found = [r for kind in CORRECTIONS for r in store.between(None, None, tank=tank, kind=kind)]
        return cls(sorted(found, key=lambda row: row.seq))

    def of(self, original: Row) -> Standing:
        """Return what became of an original."""
        given = self._of.get(original.entry.uid, ())
        return Standing(original, tuple(row for row in given if _may_correct(row, original)))

    def mark(self, row: Row) -> Mark:
        """Return what became of any row; an amendment may have been amended in its turn."""
        if row.entry.kind != AMENDMENT or row.entry.ref is None:
            return self.of(row).mark
        others = self._of.get(row.entry.ref, ())
        later = Standing(row, tuple(o for o in others if o.seq > row.seq))
        withdrawn = Standing(row, tuple(others)).withdrawn_by
        return later.mark if withdrawn is None else Mark("withdrawn", withdrawn)


def standing(rows: Iterable[Row]) -> list[Standing]:
    """Return each original among the rows with what became of it, in the order of the log.

    Parameters
    ----------
    rows : iterable of Row
        Entries in the order of the log. A correction whose original is not among them is left
        out: where that matters take `standing_between`, which reads back to the original.

    Notes
    -----
    An entry may be amended more than once: the last amendment in the log holds. A withdrawal is
    final, and an amendment that another console made after it changes nothing. Kinds that can
    be neither amended nor withdrawn always stand.
    """
    known = list(rows)
    corrections = Corrections(known)
    return [corrections.of(row) for row in known if row.entry.kind not in CORRECTIONS]


def standing_between(
    store: Store,
    start_us: int | None,
    end_us: int | None,
    *,
    tank: str | None = None,
    kind: str | None = None,
) -> list[Standing]:
    """Return what became of the entries whose figures lie in [start, end), in the log's order.

    An amendment can move a reading in time: it counts where it lies now, and where it was
    withdrawn, where it lay. ``kind`` is that of the originals.
    """
    rows = {row.seq: row for row in store.between(start_us, end_us, tank=tank, kind=kind)}
    # A correction may have been made long after, so those of all times are looked at.
    for correction in CORRECTIONS:
        rows |= {row.seq: row for row in store.between(None, None, tank=tank, kind=correction)}
    known = {row.entry.uid for row in rows.values()}
    for entry in [row.entry for row in rows.values() if row.entry.kind == AMENDMENT]:
        moved_here = _lies_in(entry.t_us, start_us, end_us) and entry.ref not in known
        if moved_here and entry.ref is not None:
            rows |= {old.seq: old for old in store.history(entry.ref)}
    return [
        found
        for found in standing(rows[seq] for seq in sorted(rows))
        if kind in (None, found.row.entry.kind)
        and _lies_in((found.holds or found.row).entry.t_us, start_us, end_us)
    ]


def _lies_in(t_us: int, start_us: int | None, end_us: int | None) -> bool:
    return (start_us is None or t_us >= start_us) and (end_us is None or t_us < end_us)


def _may_correct(correction: Row, original: Row) -> bool:
    kinds = AMENDABLE if correction.entry.kind == AMENDMENT else WITHDRAWABLE
    return original.entry.kind in kinds
