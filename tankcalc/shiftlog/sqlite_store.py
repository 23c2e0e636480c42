"""The store of one machine: several consoles may write to one SQLite file at once."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from hashlib import sha256
from pathlib import Path
from typing import TYPE_CHECKING, Any

from tankcalc.errors import StoreCorruptError, StoreError, StoreUnavailableError
from tankcalc.shiftlog.audit import audit
from tankcalc.shiftlog.chain import GENESIS, Flaw, VerifyResult, columns, link, tank_column
from tankcalc.shiftlog.entry import Entry, canonical, decoded
from tankcalc.shiftlog.sqlite import LogFile, tables_of
from tankcalc.shiftlog.store import Receipt, Row

if TYPE_CHECKING:
    import sqlite3

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
        body = canonical(entry)
        for version, text in configs.items():
            if sha256(text).hexdigest() != version:
                raise ValueError(f"the text is not that of version {version[:16]}")
        with self._file.writing() as db:
            receipt = _receipt(db, entry, body)
            if receipt is None:
                _keep(db, entry, configs)
                receipt = _insert(db, entry, body)
        return receipt

    def tail(
        self, n: int = 500, *, tank: str | None = None, before: int | None = None
    ) -> list[Row]:
        """Return the last entries, newest last."""
        where, values = _condition({"tank =": tank_column(tank), "seq <": before})
        rows = self._file.select(f"{_ROW}{where} ORDER BY seq DESC LIMIT ?", (*values, n))
        return [self._row(row) for row in reversed(rows)]

    def between(
        self, start_us: int | None, end_us: int | None, *, tank: str | None = None
    ) -> Iterator[Row]:
        """Yield the entries whose reading lies in [start, end), in the order of the log."""
        window = {"t_us >=": start_us, "t_us <": end_us}
        where, values = _condition(window)
        # The time index finds the stretch of the log; within it, the numbers give the order.
        ends = self._file.select(f"SELECT min(seq), max(seq) FROM entry{where}", values)
        first, last = ends[0] if ends else (None, None)
        while first is not None:
            where, values = _condition(
                {"seq >=": first, "seq <=": last, "tank =": tank_column(tank), **window}
            )
            rows = self._file.select(f"{_ROW}{where} ORDER BY seq LIMIT ?", (*values, _PAGE))
            yield from (self._row(row) for row in rows)
            first = rows[-1][0] + 1 if len(rows) == _PAGE else None

    def latest(self) -> dict[str, Row]:
        """Return for each tank its reading with the latest time."""
        # Steps from tank to tank through the index: a GROUP BY would read the whole log.
        rows = self._file.select(
            "WITH RECURSIVE t(tank) AS ("
            " SELECT min(tank) FROM entry WHERE kind = 'reading' UNION ALL"
            " SELECT (SELECT min(tank) FROM entry WHERE kind = 'reading' AND tank > t.tank)"
            " FROM t WHERE t.tank IS NOT NULL) "
            f"{_ROW} WHERE seq IN (SELECT (SELECT seq FROM entry"
            " WHERE kind = 'reading' AND tank = t.tank ORDER BY t_us DESC, seq DESC LIMIT 1)"
            " FROM t WHERE t.tank IS NOT NULL)"
        )
        found = (self._row(row) for row in rows)
        return {row.entry.tank: row for row in found if row.entry.tank is not None}

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
        return (rows[0][0], _digest(rows[0][1])) if rows else (0, GENESIS)

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

    def _row(self, row: tuple[Any, ...]) -> Row:
        seq, body, digest = row
        try:
            return Row(seq, decoded(body), _digest(digest))
        except ValueError as error:
            raise StoreCorruptError(
                f"entry {seq} of the log {self.where} cannot be read: {error}. Verify the log."
            ) from error


def _condition(terms: Mapping[str, Any]) -> tuple[str, tuple[Any, ...]]:
    """Return the WHERE of those terms that have a value, and the values."""
    used = {term: value for term, value in terms.items() if value is not None}
    text = " AND ".join(f"{term} ?" for term in used)
    return (f" WHERE {text}" if text else ""), tuple(used.values())


def _receipt(db: sqlite3.Connection, entry: Entry, body: bytes) -> Receipt | None:
    found = db.execute(f"{_ROW} WHERE uid = ?", (entry.uid,)).fetchone()
    if found is None:
        return None
    if found[1] != body:
        raise StoreError(f"entry {found[0]} has the identifier {entry.id} and other content.")
    return Receipt(entry.uid, found[0], _digest(found[2]))


def _digest(value: object) -> bytes:
    """Return a hash as the file gives it; a damaged file may give anything."""
    if isinstance(value, bytes) and len(value) == len(GENESIS):
        return value
    raise StoreCorruptError("the hash of an entry is damaged. Verify the log.")


def _keep(db: sqlite3.Connection, entry: Entry, configs: Mapping[str, bytes]) -> None:
    db.executemany(
        "INSERT OR IGNORE INTO config(hash, body) VALUES (?, ?)",
        [(bytes.fromhex(version), text) for version, text in configs.items()],
    )
    for name, version in entry.versions.items():
        held = db.execute("SELECT 1 FROM config WHERE hash = ?", (bytes.fromhex(version),))
        if held.fetchone() is None:
            raise StoreError(
                f"the text of the {name} (version {version[:16]}) was not given to the log:"
                " without it nobody could work the entry out again."
            )


def _insert(db: sqlite3.Connection, entry: Entry, body: bytes) -> Receipt:
    last = db.execute("SELECT hash FROM entry ORDER BY seq DESC LIMIT 1").fetchone()
    prev = GENESIS if last is None else _digest(last[0])
    digest = link(prev, body)
    values = (*columns(entry), body.decode("ascii"), prev, digest)
    cursor = db.execute(
        "INSERT INTO entry(uid, kind, ref, tank, t_us, body, prev, hash)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?)",
        values,
    )
    assert cursor.lastrowid is not None
    return Receipt(entry.uid, cursor.lastrowid, digest)
