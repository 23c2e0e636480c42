"""The oldest entries of a log rolled into a file of their own, which the log then goes on from.

The archive is built of entries that are never changed, and checked, while others write. Then
transactions take those entries out of the log, a piece at a time: after each the log is whole,
and begins where the piece ended. The log stays the same file: consoles have it
open, and SQLite finds a journal by its file's name, so one that still had an old file open would
undo the writes of those on a new one of that name. The space is used again, not given back.
"""

from __future__ import annotations

import time
from contextlib import closing
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from tankcalc.errors import InputError, LogBrokenError, StoreBusyError
from tankcalc.shiftlog.audit import beginning
from tankcalc.shiftlog.backup import checked, part_of, publish
from tankcalc.shiftlog.chain import Flaw
from tankcalc.shiftlog.kinds import NOTE
from tankcalc.shiftlog.make import note_entry
from tankcalc.shiftlog.sqlite import LogFile
from tankcalc.shiftlog.sqlite_store import SqliteStore
from tankcalc.shiftlog.sqlite_write import go_on_from, put
from tankcalc.text import clean

if TYPE_CHECKING:
    import sqlite3

    from tankcalc.profiles import Site
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Store

_PAGE = 2000
_PIECE = 10_000
"""Entries taken out of the log at a time: consoles wait for about 0.2 s, and get their turn."""
_PAUSE_S = 0.05

_FIRST_TO_STAY = "SELECT min(seq) FROM entry WHERE t_us >= ?"
_KEPT = "SELECT count(*) FROM entry WHERE seq > ? AND t_us < ?"
# A correction and what it corrects stay in one file: each file can be understood alone.
_CORRECTED = (
    "SELECT min(o.seq) FROM entry c JOIN entry o ON o.uid = c.ref"
    " WHERE c.ref IS NOT NULL AND c.seq > ? AND o.seq <= ?"
)

_CORRECTS = (
    "SELECT max(c.seq) FROM entry c JOIN entry o ON o.uid = c.ref"
    " WHERE c.ref IS NOT NULL AND c.seq > ? AND c.seq <= ? AND o.seq <= ?"
)
_GUARD = "SELECT sql FROM sqlite_master WHERE type = 'trigger' AND name = ?"
_IN_THE_WAY = ("entry_no_delete", "beginning_no_delete")


@dataclass(frozen=True, slots=True)
class Archived:
    """What went into an archive.

    Attributes
    ----------
    entries : int
        Entries in the archive.
    head : (int, bytes)
        Number and hash of its last entry, which the log goes on from.
    kept : int
        Entries from before the date that stay in the log all the same: they were made after
        others that stay, or a later entry corrects one of them.
    """

    entries: int
    head: tuple[int, bytes]
    kept: int


def archive(log: Path, out: Path, *, site: Site, before_us: int, now_us: int, who: str) -> Archived:
    """Roll the entries read before an instant into a read-only file; the log holds the others.

    Numbers and hashes stay as they are. The last entry of the log says what was archived.

    Raises
    ------
    InputError
        There is such a file already, or nothing to archive.
    LogBrokenError
        The log does not verify.
    StoreError
        The log cannot be read or written; it is as it was.
    """
    with closing(LogFile(log, 10.0)) as source, part_of(out) as part:
        newest = checked(log, log).head[0]
        start = beginning(source.select)
        head = _head_of_archive(source, before_us, start[0], newest)
        _copy(source, part, start, head[0])
        if checked(part, log).head != head:
            raise LogBrokenError(f"the copy of the log {clean(str(log))} has another head.")
        part.chmod(0o444)
        kept = source.select(_KEPT, (head[0], before_us))[0][0]
        said = _said(out, head, site, now_us, who)
        with source.writing() as db:
            _refuse_corrected(source, newest, head[0])
            # The archive is in its place, on disk, before the log lets go of what it holds.
            publish(part, out)
            put(db, said, {version: site.text(version) for version in said.versions.values()})
        end = start[0]
        while end < head[0]:
            end = _whole_piece(source, min(end + _PIECE, head[0]), head[0])
            with source.writing() as db:
                _refuse_corrected(source, newest, head[0])
                _let_go(db, end)
            time.sleep(_PAUSE_S)
    checked(log, log)
    return Archived(head[0] - start[0], head, kept)


def check_beginning(store: Store) -> tuple[str, Flaw | None]:
    """Return what a log goes on from, in words, and what is wrong with that.

    There are no words where nothing came before the log.
    """
    if not isinstance(store, SqliteStore) or not store.begins()[0]:
        return "", None
    seq, digest = store.begins()
    words = f"after entry {seq}:{digest.hex()[:16]}"
    named = archive_of(store)
    if named is None:
        return f"{words}; the log does not say where that is", None
    words += f", archived in {clean(named)}"
    if not Path(named).is_file():
        return f"{words}, which is not there now", None
    return words, check_archive(store, Path(named))


def archive_of(store: SqliteStore) -> str | None:
    """Return the file that holds what came before the log, as it was named; None: nothing did."""
    for row in store.between(None, None, kind=NOTE) if store.begins()[0] else ():
        said = row.entry.typed
        number = said.get("head", "").partition(":")[0]
        if "archive" in said and number.isdecimal() and int(number) >= store.begins()[0]:
            return said["archive"]
    return None


def check_archive(store: SqliteStore, path: Path) -> Flaw | None:
    """Return what is wrong with an archive, or with the log's going on from it; None: nothing."""
    with closing(SqliteStore(path)) as archived:
        result = archived.verify()
        if result.flaw is not None:
            return Flaw(None, f"the archive {archived.where} does not verify: {result.flaw}")
        # Where taking entries out was cut short, the log still holds the archive's last ones.
        start = store.begins()
        held = [(row.seq, row.hash) for row in archived.tail(1, before=start[0] + 1)]
        if held != [start]:
            return Flaw(None, f"the log does not go on from the archive {archived.where}")
    return None


def _head_of_archive(source: LogFile, before_us: int, start: int, newest: int) -> tuple[int, bytes]:
    """Return number and hash of the last entry to archive.

    An archive is a stretch of the log from its first entry on: it ends before the first entry
    that is not to go, and before one that a later entry corrects.
    """
    first: int | None = source.select(_FIRST_TO_STAY, (before_us,))[0][0]
    last = newest if first is None else min(first - 1, newest)
    while True:
        corrected = source.select(_CORRECTED, (last, last))[0][0]
        if corrected is None:
            break
        last = corrected - 1
    if last <= start:
        raise InputError("there is nothing to archive before that date.")
    found = source.select("SELECT seq, hash FROM entry WHERE seq = ?", (last,))
    return found[0][0], found[0][1]


def _copy(source: LogFile, path: Path, start: tuple[int, bytes], end: int) -> None:
    """Copy all texts, and the entries up to a number, to a new file that begins as the log does."""
    with closing(LogFile(path, 10.0)) as target:
        with target.writing() as db:
            if start[0]:
                go_on_from(db, start)
            texts = source.select("SELECT hash, body FROM config")
            db.executemany("INSERT INTO config(hash, body) VALUES (?, ?)", texts)
        names = [name for (name,) in source.select("SELECT name FROM pragma_table_info('entry')")]
        asked = f"SELECT {', '.join(names)} FROM entry WHERE seq > ? AND seq <= ?"
        put_in = f"INSERT INTO entry({', '.join(names)}) VALUES ({', '.join('?' * len(names))})"
        last = start[0]
        while last < end:
            page = source.select(f"{asked} ORDER BY seq LIMIT ?", (last, end, _PAGE))
            with target.writing() as db:
                db.executemany(put_in, page)
            last = page[-1][names.index("seq")]
        target.seal()


def _refuse_corrected(source: LogFile, newest: int, last: int) -> None:
    """Raise StoreBusyError where an entry after ``newest`` corrects one up to ``last``."""
    if source.select(_CORRECTED, (newest, last))[0][0] is not None:
        raise StoreBusyError(
            "another console corrected an entry that was to be archived, which therefore stays."
            " Archive again, to another file."
        )


def _whole_piece(source: LogFile, end: int, last: int) -> int:
    """Return a number from ``end`` on that parts no correction from what it corrects."""
    while True:
        found: int | None = source.select(_CORRECTS, (end, last, end))[0][0]
        if found is None:
            return end
        end = found


def _let_go(db: sqlite3.Connection, end: int) -> None:
    """Take the entries up to a number out of the log, and let it begin after them.

    The guards are off only inside the transaction: nobody else ever sees the log without them.
    """
    (digest,) = db.execute("SELECT hash FROM entry WHERE seq = ?", (end,)).fetchone()
    guards = [db.execute(_GUARD, (name,)).fetchone()[0] for name in _IN_THE_WAY]
    for name in _IN_THE_WAY:
        db.execute(f"DROP TRIGGER {name}")
    db.execute("DELETE FROM entry WHERE seq <= ?", (end,))
    db.execute("DELETE FROM beginning")
    db.execute("INSERT INTO beginning(one, seq, hash) VALUES (1, ?, ?)", (end, digest))
    for guard in guards:
        db.execute(guard)


def _said(out: Path, head: tuple[int, bytes], site: Site, now_us: int, who: str) -> Entry:
    """Return the entry in which the log says what was archived, by whom, and where it is."""
    seq, digest = head
    note = (
        f"Entries up to {seq} were archived in {clean(out.name)};"
        f" its head is {seq}:{digest.hex()[:16]}."
    )
    entry = note_entry(site=site, note=note, now_us=now_us, who=who)
    return replace(entry, typed={"archive": str(out.absolute()), "head": f"{seq}:{digest.hex()}"})
