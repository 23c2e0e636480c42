"""The store of several machines: consoles of several hosts write to one PostgreSQL database."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from hashlib import sha256
from typing import Any

from tankcalc.errors import StoreCorruptError, StoreUnavailableError
from tankcalc.shiftlog.chain import GENESIS, Flaw, VerifyResult, check_texts, digest_of
from tankcalc.shiftlog.entry import Entry, decoded, shift_text
from tankcalc.shiftlog.postgres import PostgresLog
from tankcalc.shiftlog.postgres_audit import audit
from tankcalc.shiftlog.postgres_schema import HISTORY, LATEST
from tankcalc.shiftlog.postgres_write import name_bytes, put
from tankcalc.shiftlog.shifts import instants_around
from tankcalc.shiftlog.store import Receipt, Row, ShiftKey

_PAGE = 2000
"""Entries read at a time: a log need not fit into memory."""

_ROW = "SELECT seq, body, hash FROM entry"


class PostgresStore:
    """A log in a PostgreSQL database; see ``Store`` for what each method promises."""

    def __init__(self, address: str, *, wait_s: float = 10.0) -> None:
        self._log = PostgresLog(address, wait_s)

    @property
    def where(self) -> str:
        """The address without its password."""
        return self._log.where

    @property
    def dump_command(self) -> str:
        """The command that makes a backup of the database, without the password."""
        return self._log.address.dump

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
        return self._log.write(lambda db: [put(db, entry, configs) for entry, configs in given])

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
        terms: dict[str, Any] = {"tank =": name_bytes(tank), "kind =": kind, "seq <": before}
        if shift is not None:
            start_us, end_us = instants_around(shift[0])
            terms |= {"t_us >=": start_us, "t_us <": end_us}
            terms["0 < strpos(body,"] = shift_text(shift)
        where, values = _condition(terms)
        asked = f"{_ROW}{where}" if shift is None else _by_time(f"{_ROW}{where}")
        rows = self._log.select(f"{asked} ORDER BY seq DESC LIMIT %s", (*values, n))
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
        window: dict[str, Any] = {"t_us >=": start_us, "t_us <": end_us}
        where, values = _condition(window)
        # The time index finds the stretch of the log; within it, the numbers give the order.
        stretch = _by_time(f"{_ROW}{where}") if values else _ROW
        ends = self._log.select(f"SELECT min(seq), max(seq) FROM ({stretch}) AS s", values)
        first, last = ends[0] if ends else (None, None)
        while first is not None:
            terms = {"seq >=": first, "seq <=": last, "tank =": name_bytes(tank), "kind =": kind}
            where, values = _condition(terms | window)
            rows = self._log.select(f"{_ROW}{where} ORDER BY seq LIMIT %s", (*values, _PAGE))
            yield from (self._row(row) for row in rows)
            first = rows[-1][0] + 1 if len(rows) == _PAGE else None

    def latest(self) -> dict[str, Row]:
        """Return for each tank the reading with the latest time, as it stands now."""
        found = (self._row(row) for row in self._log.select(LATEST))
        return {row.entry.tank: row for row in found if row.entry.tank is not None}

    def history(self, uid: bytes) -> list[Row]:
        """Return an entry's original and everything that refers to it."""
        return [self._row(row) for row in self._log.select(HISTORY, (uid,))]

    def count(self, *, tank: str | None = None, kind: str | None = None) -> int:
        """Return how many entries there are."""
        if tank is None and kind is None:
            return self.head()[0]
        where, values = _condition({"tank =": name_bytes(tank), "kind =": kind})
        rows = self._log.select(f"SELECT count(*) FROM entry{where}", values)
        return int(rows[0][0]) if rows else 0

    def get_config(self, version: str) -> bytes:
        """Return the text with that SHA-256 (hex)."""
        asked = "SELECT body FROM config WHERE hash = %s"
        rows = self._log.select(asked, (bytes.fromhex(version),))
        if not rows:
            raise KeyError(version)
        text = bytes(rows[0][0])
        if sha256(text).hexdigest() != version:
            raise StoreCorruptError(f"the kept text of version {version[:16]} was changed.")
        return text

    def head(self) -> tuple[int, bytes]:
        """Return the number and hash of the last entry."""
        rows = self._log.select("SELECT seq, hash FROM entry ORDER BY seq DESC LIMIT 1")
        return (int(rows[0][0]), digest_of(rows[0][1])) if rows else (0, GENESIS)

    def verify(self, known_head: tuple[int, str] | None = None) -> VerifyResult:
        """Check chain, texts, columns, head and guards."""
        try:
            if not self._log.is_there():
                raise StoreUnavailableError(f"there is no log at {self.where}.")
            return audit(self._log.select, known_head)
        except StoreCorruptError as error:
            return VerifyResult(0, (0, GENESIS), Flaw(None, str(error)))

    def close(self) -> None:
        """Let go of the connection."""
        self._log.close()

    def _row(self, row: tuple[Any, ...]) -> Row:
        seq, body, digest = row
        try:
            return Row(seq, decoded(body.encode()), digest_of(digest))
        except ValueError as error:
            raise StoreCorruptError(
                f"entry {seq} of the log {self.where} cannot be read: {error}. Verify the log."
            ) from error


def _by_time(asked: str) -> str:
    """Return a query that finds a stretch of time before it puts it in order.

    Without the OFFSET the planner may walk through all numbers until it meets that time.
    """
    return f"SELECT seq, body, hash FROM ({asked} OFFSET 0) AS stretch"


def _condition(terms: Mapping[str, Any]) -> tuple[str, tuple[Any, ...]]:
    """Return the WHERE of those terms that have a value, and the values."""
    used = {term: value for term, value in terms.items() if value is not None}
    text = " AND ".join(f"{term} %s)" if "(" in term else f"{term} %s" for term in used)
    return (f" WHERE {text}" if text else ""), tuple(used.values())
