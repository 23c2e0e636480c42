"""The connection to a log in PostgreSQL: opened, built, kept within a time, and opened anew.

What was committed is on the server's disk (``synchronous_commit``, and a server that flushes).
Nothing waits for ever: the server ends a statement that takes too long, and when even the
server says nothing the connection is cut from this side.
"""

from __future__ import annotations

import os
import socket
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from typing import TYPE_CHECKING, Any, TypeVar

from tankcalc.errors import (
    StoreCorruptError,
    StoreReadOnlyError,
    StoreUnavailableError,
)
from tankcalc.shiftlog.postgres_address import read_address
from tankcalc.shiftlog.postgres_faults import from_postgres, is_lost
from tankcalc.shiftlog.postgres_schema import LOCK, SCHEMA, STEPS

if TYPE_CHECKING:
    from psycopg import Connection

Result = TypeVar("Result")

CONNECT_S = 5
"""Seconds to wait for a server that does not answer."""

_SETTINGS = b"""
SELECT set_config('client_encoding', 'UTF8', false), set_config('search_path', %s, false),
 -- Compiling one of these queries takes ten times as long as carrying it out.
 set_config('jit', 'off', false),
 set_config('synchronous_commit', 'on', false),
 set_config('default_transaction_isolation', 'read committed', false),
 set_config('statement_timeout', %s::text, false), set_config('lock_timeout', %s::text, false),
 set_config('idle_in_transaction_session_timeout', %s::text, false)
"""

_GRACE_S = 3.0
"""Seconds after which a server that should have ended a statement itself is given up."""


class PostgresLog:
    """A log's place in a database. Nothing is opened before the first call.

    Parameters
    ----------
    address : str
        ``postgresql://…``; it may hold a password, which is never shown.
    wait_s : float
        How long one statement may take, waiting for another console included, seconds.
    """

    def __init__(self, address: str, wait_s: float) -> None:
        self.address = read_address(address)
        self._wait_s = wait_s
        self._lock = threading.RLock()
        self._db: Connection[Any] | None = None
        self._built = False
        self._is_durable = False

    @property
    def where(self) -> str:
        """The address without its password."""
        return self.address.where

    def select(self, sql: str, values: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
        """Return the rows of one query; none where there is no log yet."""

        def work(db: Connection[Any]) -> list[tuple[Any, ...]]:
            if not self._built and not self._version(db):
                return []
            return db.execute(sql.encode(), values).fetchall()

        return self._carry_out(work)

    def write(self, work: Callable[[Connection[Any]], Result]) -> Result:
        """Carry out one transaction: all of it is on disk on return, or nothing is.

        After a lost connection ``work`` may be done again: it must find what it did before.
        """

        def transaction(db: Connection[Any]) -> Result:
            self._ready(db)
            with db.transaction():
                return work(db)

        return self._carry_out(transaction)

    def is_there(self) -> bool:
        """Whether there is a log to read."""
        return self._carry_out(lambda db: bool(self._version(db)))

    def close(self) -> None:
        """Let go of the connection; the next call opens another."""
        with self._lock:
            if self._db is not None:
                self._db.close()
            self._db = None
            self._built = self._is_durable = False

    def _carry_out(self, work: Callable[[Connection[Any]], Result]) -> Result:
        from_before = self._db is not None
        try:
            return self._once(work)
        except StoreUnavailableError:
            if not from_before:
                raise
        # The connection was an old one: a server that was started again takes a new one.
        return self._once(work)

    def _once(self, work: Callable[[Connection[Any]], Result]) -> Result:
        psycopg = _psycopg()
        with self._lock:
            try:
                if self._db is None:
                    self._db = self._opened()
                with _no_longer_than(self._db, self._wait_s + _GRACE_S):
                    return work(self._db)
            except psycopg.Error as error:
                fault = from_postgres(error, self.address)
                if is_lost(error) or isinstance(fault, StoreCorruptError):
                    self.close()
                raise fault from None
            except (StoreUnavailableError, StoreCorruptError):
                self.close()
                raise

    def _opened(self) -> Connection[Any]:
        psycopg = _psycopg()
        limit_ms = max(1, round(self._wait_s * 1000))
        db: Connection[Any] = psycopg.connect(
            **{
                "connect_timeout": CONNECT_S,
                "tcp_user_timeout": CONNECT_S * 1000,
                "keepalives_idle": 10,
                "keepalives_interval": 5,
                "keepalives_count": 3,
                "application_name": "tankcalc",
                **self._given(),
            },
            autocommit=True,
            prepare_threshold=None,
        )
        try:
            with _no_longer_than(db, CONNECT_S):
                db.execute(_SETTINGS, (SCHEMA, limit_ms, limit_ms, 2 * limit_ms))
        except BaseException:
            db.close()
            raise
        return db

    def _given(self) -> dict[str, Any]:
        """Return what the address says, by libpq's names."""
        psycopg = _psycopg()
        try:
            given: dict[str, Any] = psycopg.conninfo.conninfo_to_dict(self.address.text)
        except psycopg.Error:
            # libpq's own words quote the address, password included.
            raise StoreUnavailableError(
                f"the address of the log {self.where} cannot be read. Check its options, and that"
                " every special character in the password is written as %XX."
            ) from None
        return given

    def _version(self, db: Connection[Any]) -> int:
        """Return the number of schema steps the log has taken; 0: there is no log."""
        named = (f"{SCHEMA}.schema_version",)
        there = db.execute("SELECT to_regclass(%s) IS NOT NULL", named).fetchone()
        if not there or not there[0]:
            return 0
        found = db.execute("SELECT max(step) FROM schema_version").fetchone()
        version = int(found[0] or 0) if found else 0
        if version > len(STEPS):
            raise StoreUnavailableError(
                f"the log {self.where} was written by a newer version of this program."
            )
        self._built = version == len(STEPS)
        return version

    def _ready(self, db: Connection[Any]) -> None:
        """See that the log is built, and that what it acknowledges will be on disk."""
        if not self._is_durable:
            if db.execute("SELECT current_setting('fsync')").fetchone() != ("on",):
                raise StoreReadOnlyError(
                    f"the server of the log {self.where} does not flush to disk (fsync is off):"
                    " an entry could be lost after it was acknowledged. Switch fsync on."
                )
            self._is_durable = True
        if not self._built and self._version(db) < len(STEPS):
            with db.transaction():
                db.execute("SELECT pg_advisory_xact_lock(%s)", (LOCK,))
                self._build(db)
            self._version(db)

    def _build(self, db: Connection[Any]) -> None:
        # Read again behind the lock: another console may have built it meanwhile.
        db.execute(f"CREATE SCHEMA IF NOT EXISTS {SCHEMA}".encode())
        for step in range(self._version(db), len(STEPS)):
            for statement in STEPS[step]:
                db.execute(statement.encode())
            db.execute("INSERT INTO schema_version(step) VALUES (%s)", (step + 1,))


def _psycopg() -> Any:
    try:
        import psycopg
    except ImportError as error:
        raise StoreUnavailableError(
            "a log in PostgreSQL needs psycopg, which is not installed:"
            ' pip install "tankcalc[postgres]".'
        ) from error
    return psycopg


@contextmanager
def _no_longer_than(db: Connection[Any], seconds: float) -> Iterator[None]:
    """Cut the connection when a call takes longer, so that a frozen server freezes nobody."""
    # A descriptor of its own: psycopg may close the other one while the clock is running.
    handle = socket.socket(fileno=os.dup(db.fileno()))
    clock = threading.Timer(seconds, lambda: _cut(handle))
    clock.daemon = True
    clock.start()
    try:
        yield
    finally:
        clock.cancel()
        clock.join()
        handle.close()


def _cut(handle: socket.socket) -> None:
    # It may be cut already.
    with suppress(OSError):
        handle.shutdown(socket.SHUT_RDWR)
