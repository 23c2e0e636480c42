"""The store of one machine: several consoles may write to one SQLite file at once."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from hashlib import sha256
from pathlib import Path
from typing import Any

from tankcalc.errors import StoreCorruptError, StoreUnavailableError
from tankcalc.shiftlog import schema
from tankcalc.shiftlog.audit import audit, beginning
from tankcalc.shiftlog.chain import GENESIS, Flaw, VerifyResult, check_texts, digest_of, tank_column
from tankcalc.shiftlog.entry import Entry, decoded, shift_text
from tankcalc.shiftlog.shifts import instants_around
from tankcalc.shiftlog.sqlite import LogFile, tables_of
from tankcalc.shiftlog.sqlite_write import go_on_from, put
from tankcalc.shiftlog.store import Receipt, Row, ShiftKey

_PAGE = 2000
"""Entries read at a time: a reader holds the lock for one page only, so writers get through."""

_ROW = "SELECT seq, CAST(body AS BLOB), hash FROM entry"


class SqliteStore:
    """A log in one SQLite file; see ``Store`` for what each method promises."""

    def __init__(self, path: Path, *, wait_s: float = 10.0) -> None:
        self._file = LogFile(path, wait_s)

    @property
    def where(self) -> str:
        """The file, made safe to show."""
        return self._file.where

    def append(self, entry: Entry, configs: Mapping[str, bytes]) -> Receipt:
        """Put an entry and the texts it rests on at the end, in one transaction."""
        return self.append_many([(entry, configs)])[0]

    def append_many(self, entries: Iterable[tuple[Entry, Mapping[str, bytes]]]) -> list[Receipt]:
        """Put entries and their texts at the end, in one transaction."""
        given = list(entries)
        for _, configs in given:
            check_texts(configs)
        if not given:
            return []
        with self._file.writing() as db:
            return [put(db, entry, configs) for entry, configs in given]

    def go_on_from(self, head: tuple[int, bytes]) -> None:
        """Make a new log that follows the head of an archive: its number and its hash."""
        with self._file.writing() as db:
            go_on_from(db, head)

    def begins(self) -> tuple[int, bytes]:
        """Return the number and hash that the first entry follows."""
        return beginning(self._file.select)

    def tail(
        self,
        n: int = 500,
        *,
        tank: str | None = None,
        kind: str | None = None,
        shift: ShiftKey | None = None,
        before: int | None = None,
    ) -> list[Row]:
        """Return the last entries, newest last."""
        terms: dict[str, Any] = {"tank =": tank_column(tank), "kind =": kind, "seq <": before}
        if shift is not None:
            # Unary plus keeps SQLite to the index on time: a shift is a short stretch of a log.
            terms = {f"+{term}": value for term, value in terms.items()}
            start_us, end_us = instants_around(shift[0])
            terms |= {"t_us >=": start_us, "t_us <": end_us, "0 < instr(body,": shift_text(shift)}
        where, values = _condition(terms)
        order = "seq" if shift is None else "+seq"
        rows = self._file.select(f"{_ROW}{where} ORDER BY {order} DESC LIMIT ?", (*values, n))
        return [self._row(row) for row in reversed(rows)]

    def between(
        self,
        start_us: int | None,
        end_us: int | None,
        *,
        tank: str | None = None,
        kind: str | None = None,
    ) -> Iterator[Row]:
        """Yield the entries whose reading lies in [start, end), in the order of the log."""
        window = {"t_us >=": start_us, "t_us <": end_us}
        first, last = self._stretch(window)
        while first is not None:
            where, values = _condition(
                {
                    "seq >=": first,
                    "seq <=": last,
                    "tank =": tank_column(tank),
                    "kind =": kind,
                    **window,
                }
            )
            rows = self._file.select(f"{_ROW}{where} ORDER BY seq LIMIT ?", (*values, _PAGE))
            yield from (self._row(row) for row in rows)
            first = rows[-1][0] + 1 if len(rows) == _PAGE else None

    def latest(self) -> dict[str, Row]:
        """Return for each tank the reading with the latest time, as it stands now."""
        rows = self._file.select(f"{_ROW} WHERE seq IN ({schema.LATEST})")
        found = (self._row(row) for row in rows)
        return {row.entry.tank: row for row in found if row.entry.tank is not None}

    def history(self, uid: bytes) -> list[Row]:
        """Return an entry's original and everything that refers to it."""
        rows = self._file.select(f"{_ROW} WHERE seq IN ({schema.HISTORY}) ORDER BY seq", (uid,))
        return [self._row(row) for row in rows]

    def count(self, *, tank: str | None = None, kind: str | None = None) -> int:
        """Return how many entries there are."""
        if tank is None and kind is None:
            return self.head()[0] - self.begins()[0]
        where, values = _condition({"tank =": tank_column(tank), "kind =": kind})
        rows = self._file.select(f"SELECT count(*) FROM entry{where}", values)
        return int(rows[0][0]) if rows else 0

    def get_config(self, version: str) -> bytes:
        """Return the text with that SHA-256 (hex)."""
        rows = self._file.select(
            "SELECT CAST(body AS BLOB) FROM config WHERE hash = ?", (bytes.fromhex(version),)
        )
        if not rows:
            raise KeyError(version)
        text = bytes(rows[0][0] or b"")
        if sha256(text).hexdigest() != version:
            raise StoreCorruptError(f"the kept text of version {version[:16]} was changed.")
        return text

    def head(self) -> tuple[int, bytes]:
        """Return the number and hash of the last entry."""
        rows = self._file.select("SELECT seq, hash FROM entry ORDER BY seq DESC LIMIT 1")
        return (rows[0][0], digest_of(rows[0][1])) if rows else self.begins()

    def verify(self, known_head: tuple[int, str] | None = None) -> VerifyResult:
        """Check chain, texts, columns, guards and the file itself."""
        try:
            if not self._file.is_there():
                raise StoreUnavailableError(f"there is no log at {self.where}.")
            return audit(self._file.select, tables_of, known_head)
        except StoreCorruptError as error:
            return VerifyResult(0, (0, GENESIS), Flaw(None, str(error)))

    def close(self) -> None:
        """Let go of the file."""
        self._file.close()

    def _stretch(self, window: Mapping[str, Any]) -> tuple[int | None, int | None]:
        """Return the first and last number in a window of time: within it, numbers give order."""
        where, values = _condition(window)
        ends = f"SELECT min(seq), max(seq) FROM entry{where}"
        if not values:
            # Each for itself, SQLite finds them at the ends of the table.
            ends = "SELECT (SELECT min(seq) FROM entry), (SELECT max(seq) FROM entry)"
        found = self._file.select(ends, values)
        return (found[0][0], found[0][1]) if found else (None, None)

    def _row(self, row: tuple[Any, ...]) -> Row:
        seq, body, digest = row
        try:
            return Row(seq, decoded(body), digest_of(digest))
        except ValueError as error:
            raise StoreCorruptError(
                f"entry {seq} of the log {self.where} cannot be read: {error}. Verify the log."
            ) from error


def _condition(terms: Mapping[str, Any]) -> tuple[str, tuple[Any, ...]]:
    """Return the WHERE of those terms that have a value, and the values."""
    used = {term: value for term, value in terms.items() if value is not None}
    text = " AND ".join(f"{term} ?)" if "(" in term else f"{term} ?" for term in used)
    return (f" WHERE {text}" if text else ""), tuple(used.values())
