"""Putting entries into the tables of a log in PostgreSQL, inside a transaction."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from tankcalc.errors import StoreCorruptError, StoreError
from tankcalc.shiftlog.chain import columns, digest_of, link, tank_column
from tankcalc.shiftlog.entry import Entry, canonical
from tankcalc.shiftlog.store import Receipt

if TYPE_CHECKING:
    from psycopg import Connection

_INSERT = (
    b"INSERT INTO entry(seq, uid, kind, ref, tank, t_us, body, prev, hash)"
    b" VALUES (%s, %s, %s, %s, %s, %s, %s, %s, %s) ON CONFLICT (uid) DO NOTHING"
)


def name_bytes(tank: str | None) -> bytes | None:
    """Return a tank's name as the column holds it."""
    column = tank_column(tank)
    return None if column is None else column.encode()


def put(db: Connection[Any], entry: Entry, configs: Mapping[str, bytes]) -> Receipt:
    """Put an entry at the end with its texts, unless it is there; return its receipt.

    Whoever writes holds the one row of the head, so that two never follow the same entry.
    """
    body = canonical(entry)
    head = db.execute(b"SELECT seq, hash FROM head WHERE one = 1 FOR UPDATE").fetchone()
    if head is None:
        raise StoreCorruptError("the head of the log is gone. Verify the log.")
    receipt = _receipt(db, entry, body)
    if receipt is not None:
        return receipt
    _keep(db, entry, configs)
    seq, prev = int(head[0]) + 1, digest_of(head[1])
    digest = link(prev, body)
    uid, kind, ref, _, t_us = columns(entry)
    values = (uid, kind, ref, name_bytes(entry.tank), t_us)
    if db.execute(_INSERT, (seq, *values, body.decode("ascii"), prev, digest)).rowcount != 1:
        raise StoreError(f"entry {entry.id} was put into the log past the lock on its head.")
    db.execute(b"UPDATE head SET seq = %s, hash = %s WHERE one = 1", (seq, digest))
    return Receipt(entry.uid, seq, digest)


def _receipt(db: Connection[Any], entry: Entry, body: bytes) -> Receipt | None:
    asked = b"SELECT seq, body, hash FROM entry WHERE uid = %s"
    found = db.execute(asked, (entry.uid,)).fetchone()
    if found is None:
        return None
    if found[1].encode() != body:
        raise StoreError(f"entry {found[0]} has the identifier {entry.id} and other content.")
    return Receipt(entry.uid, int(found[0]), digest_of(found[2]))


def _keep(db: Connection[Any], entry: Entry, configs: Mapping[str, bytes]) -> None:
    for version, text in configs.items():
        db.execute(
            b"INSERT INTO config(hash, body) VALUES (%s, %s) ON CONFLICT (hash) DO NOTHING",
            (bytes.fromhex(version), text),
        )
    for name, version in entry.versions.items():
        asked = b"SELECT 1 FROM config WHERE hash = %s"
        if db.execute(asked, (bytes.fromhex(version),)).fetchone() is None:
            raise StoreError(
                f"the text of the {name} (version {version[:16]}) was not given to the log:"
                " without it nobody could work the entry out again."
            )
