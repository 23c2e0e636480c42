"""The one SQLite file a log lives in: opened, built, locked, and its errors put into words.

Rollback journal and ``synchronous=EXTRA``: what was committed is on disk, the folder's record
of the journal's end included. Writers take the lock before they read the head
(``BEGIN IMMEDIATE``), so that two never follow the same entry.
"""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path
from typing import Any

from tankcalc.errors import StoreCorruptError, StoreReadOnlyError, StoreUnavailableError
from tankcalc.shiftlog import schema
from tankcalc.shiftlog.faults import from_os, from_sqlite
from tankcalc.shiftlog.files import make_file, refuse_network
from tankcalc.text import clean

_SETTINGS = (
    "PRAGMA synchronous=EXTRA",
    "PRAGMA foreign_keys=ON",
    # Without this, INSERT OR REPLACE removes a row past the trigger that forbids it.
    "PRAGMA recursive_triggers=ON",
    # A log may come from anybody: run no function that its schema names.
    "PRAGMA trusted_schema=OFF",
)
_LOST = (StoreUnavailableError, StoreCorruptError)
"""Faults after which the file is opened anew."""


class LogFile:
    """A log's file. Nothing is opened before the first call; only writing makes the file.

    Parameters
    ----------
    path : Path
        The file.
    wait_s : float
        How long to wait for another console's write, seconds.
    """

    def __init__(self, path: Path, wait_s: float) -> None:
        self._path = path
        self._wait_s = wait_s
        self._lock = threading.RLock()
        self._db: sqlite3.Connection | None = None
        self._seen = False
        self._built = False

    @property
    def where(self) -> str:
        """The file, made safe to show."""
        return clean(str(self._path))

    def select(self, sql: str, values: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
        """Return the rows of one query; none where there is no log yet."""
        with self._speaking():
            db = self._for_reading()
            return [] if db is None else db.execute(sql, values).fetchall()

    @contextmanager
    def writing(self) -> Iterator[sqlite3.Connection]:
        """One transaction: all of it is on disk when the block ends, or nothing is."""
        with self._speaking():
            db = self._for_writing()
            with _transaction(db):
                yield db

    def copy_to(self, path: Path) -> None:
        """Copy the log as it is at one moment to a new file; others may write meanwhile."""
        with self._speaking():
            db = self._for_reading()
            if db is None:
                raise StoreUnavailableError(f"there is no log at {self.where}.")
            with closing(sqlite3.connect(path, isolation_level=None)) as copy:
                copy.execute("PRAGMA synchronous=EXTRA")
                db.backup(copy)

    def seal(self) -> None:
        """Make the log an archive: from now on it takes no new entries, whoever may write it."""
        with self.writing() as db:
            db.execute(f"PRAGMA application_id={schema.ARCHIVE_ID}")

    def is_there(self) -> bool:
        """Whether there is a log to read."""
        with self._speaking():
            return self._for_reading() is not None

    def close(self) -> None:
        """Let go of the file; the next call opens it again."""
        with self._lock:
            if self._db is not None:
                self._db.close()
            self._db = None
            self._built = False

    def _connection(self) -> sqlite3.Connection:
        if self._db is None:
            refuse_network(self._path)
            self._db = _opened(self._path, self._wait_s)
            self._seen = True
        return self._db

    def _is_new(self) -> bool:
        # A log that was there and is gone is an error, never a reason to begin another.
        if self._seen:
            return False
        try:
            self._path.stat()
        except FileNotFoundError:
            return True
        except OSError as error:
            raise from_os(error, self.where) from error
        return False

    def _for_reading(self) -> sqlite3.Connection | None:
        if self._is_new():
            return None
        db = self._connection()
        return db if self._built or self._version(db) else None

    def _for_writing(self) -> sqlite3.Connection:
        if self._is_new():
            refuse_network(self._path)
            make_file(self._path)
        db = self._connection()
        if not self._built:
            mode = db.execute("PRAGMA journal_mode=DELETE").fetchone()[0]
            if mode != "delete":
                raise StoreUnavailableError(f"the log {self.where} keeps a journal of kind {mode}.")
            self._refuse_archive(db)
            if self._version(db) < len(schema.STEPS):
                with _transaction(db):
                    self._build(db)
            self._built = True
        return db

    def _version(self, db: sqlite3.Connection) -> int:
        """Return the number of schema steps the file has taken; 0: it is an empty file."""
        version: int = db.execute("PRAGMA user_version").fetchone()[0]
        application: int = db.execute("PRAGMA application_id").fetchone()[0]
        if application not in (schema.APPLICATION_ID, schema.ARCHIVE_ID):
            if application or version or db.execute("SELECT 1 FROM sqlite_master").fetchone():
                raise StoreCorruptError(f"{self.where} is no log of this program.")
            return 0
        if version < 1:
            raise StoreCorruptError(f"the log {self.where} is damaged: it has no version.")
        if version > len(schema.STEPS):
            raise StoreUnavailableError(
                f"the log {self.where} was written by a newer version of this program."
            )
        return version

    def _refuse_archive(self, db: sqlite3.Connection) -> None:
        if db.execute("PRAGMA application_id").fetchone()[0] == schema.ARCHIVE_ID:
            raise StoreReadOnlyError(
                f"{self.where} is an archive: it takes no new entries."
                " Name the log that goes on from it."
            )

    def _build(self, db: sqlite3.Connection) -> None:
        # Read again inside the transaction: another console may have built it meanwhile.
        _take_steps(db, self._version(db), len(schema.STEPS))
        db.execute(f"PRAGMA application_id={schema.APPLICATION_ID}")

    @contextmanager
    def _speaking(self) -> Iterator[None]:
        """One call at a time, and what SQLite raises turned into errors people can read."""
        with self._lock:
            try:
                yield
            except (sqlite3.Error, UnicodeDecodeError) as error:
                # What Python itself finds (text that is no UTF-8) has no name.
                name = getattr(error, "sqlite_errorname", "SQLITE_CORRUPT")
                fault = from_sqlite(name, clean(str(error)), self.where)
                if isinstance(fault, _LOST):
                    self.close()
                raise fault from error
            except _LOST:
                self.close()
                raise


def _opened(path: Path, wait_s: float) -> sqlite3.Connection:
    """Return a connection with every setting made; it makes no file."""
    db = sqlite3.connect(
        # mode=rw falls back to reading where writing is not allowed.
        f"{path.absolute().as_uri()}?mode=rw",
        uri=True,
        timeout=wait_s,
        isolation_level=None,
        check_same_thread=False,
    )
    try:
        for setting in _SETTINGS:
            db.execute(setting)
    except BaseException:
        db.close()
        raise
    return db


def tables_of(version: int) -> set[str]:
    """Return the SQL of everything that a sound log of that schema version is made of."""
    with closing(sqlite3.connect(":memory:", isolation_level=None)) as db:
        _take_steps(db, 0, version)
        return {sql for (sql,) in db.execute(schema.MADE_OF)}


def _take_steps(db: sqlite3.Connection, first: int, end: int) -> None:
    strict = sqlite3.sqlite_version_info >= (3, 37)
    for step in range(first, end):
        for statement in schema.statements(step, strict=strict):
            db.execute(statement)
        db.execute(f"PRAGMA user_version={step + 1}")


@contextmanager
def _transaction(db: sqlite3.Connection) -> Iterator[None]:
    db.execute("BEGIN IMMEDIATE")
    try:
        yield
        db.execute("COMMIT")
    except BaseException:
        # SQLite has already rolled back by itself after some errors (a full disk).
        if db.in_transaction:
            db.execute("ROLLBACK")
        raise
