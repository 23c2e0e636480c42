"""Putting entries into the tables of a log in SQLite, inside a transaction that somebody opened."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from tankcalc.errors import StoreError
from tankcalc.shiftlog.audit import beginning
from tankcalc.shiftlog.chain import columns, digest_of, link
from tankcalc.shiftlog.entry import Entry, canonical
from tankcalc.shiftlog.store import Receipt

if TYPE_CHECKING:
    import sqlite3


def put(db: sqlite3.Connection, entry: Entry, configs: Mapping[str, bytes]) -> Receipt:
    """Put an entry at the end with its texts, unless it is there; return its receipt."""
    body = canonical(entry)
    receipt = _receipt(db, entry, body)
    if receipt is None:
        _keep(db, entry, configs)
        receipt = _insert(db, entry, body)
    return receipt


def go_on_from(db: sqlite3.Connection, head: tuple[int, bytes]) -> None:
    """Make a log that holds nothing yet follow the entry with that number and hash."""
    if db.execute("SELECT 1 FROM entry UNION ALL SELECT 1 FROM beginning").fetchone():
        raise StoreError("the log holds entries already: it cannot go on from another.")
    db.execute("INSERT INTO beginning(one, seq, hash) VALUES (1, ?, ?)", head)
    # SQLite's own counter gives the numbers.
    db.execute("INSERT INTO sqlite_sequence(name, seq) VALUES ('entry', ?)", (head[0],))


def _receipt(db: sqlite3.Connection, entry: Entry, body: bytes) -> Receipt | None:
    found = db.execute(
        "SELECT seq, CAST(body AS BLOB), hash FROM entry WHERE uid = ?", (entry.uid,)
    ).fetchone()
    if found is None:
        return None
    if found[1] != body:
        raise StoreError(f"entry {found[0]} has the identifier {entry.id} and other content.")
    return Receipt(entry.uid, found[0], digest_of(found[2]))


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
    if last is None:
        prev = beginning(lambda sql, values: db.execute(sql, values).fetchall())[1]
    else:
        prev = digest_of(last[0])
    digest = link(prev, body)
    values = (*columns(entry), body.decode("ascii"), prev, digest)
    cursor = db.execute(
        "INSERT INTO entry(uid, kind, ref, tank, t_us, body, prev, hash)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?)",
        values,
    )
    assert cursor.lastrowid is not None
    return Receipt(entry.uid, cursor.lastrowid, digest)
