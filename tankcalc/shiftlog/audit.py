"""Everything that can be wrong with a log in SQLite, the first thing first."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace
from hashlib import sha256
from typing import Any

from tankcalc.errors import StoreCorruptError
from tankcalc.shiftlog import schema
from tankcalc.shiftlog.chain import GENESIS, Flaw, RawRow, VerifyResult, follow

Select = Callable[[str, tuple[Any, ...]], list[tuple[Any, ...]]]

_PAGE = 2000
_RAW = (
    "SELECT seq, uid, CAST(kind AS BLOB), ref, CAST(tank AS BLOB), t_us, CAST(body AS BLOB),"
    " prev, hash FROM entry WHERE seq > ? AND seq <= ? ORDER BY seq LIMIT ?"
)
_ENDS = (
    "SELECT (SELECT max(seq) FROM entry),"
    " (SELECT max(seq) FROM sqlite_sequence WHERE name = 'entry')"
)


def audit(
    select: Select, tables_of: Callable[[int], set[str]], known_head: tuple[int, str] | None
) -> VerifyResult:
    """Return what a check of the whole log finds.

    ``tables_of`` gives what a sound log of a schema version is made of. Entries that other
    consoles add meanwhile are left for the next check.
    """
    newest, counter = select(_ENDS, ())[0]
    texts, bad_text = _texts(select)
    start = beginning(select)
    result = follow(_rows(select, newest or 0), texts.__contains__, known_head, start)
    if result.flaw is None:
        why = (
            bad_text
            or _why_cut(newest or start[0], counter or 0)
            or _why_altered(select, tables_of)
            or _why_torn(select)
        )
        if why:
            return replace(result, flaw=Flaw(None, why))
    return result


def beginning(select: Select) -> tuple[int, bytes]:
    """Return the number and hash that the log's first entry follows."""
    if not select("SELECT 1 FROM sqlite_master WHERE name = 'beginning'", ()):
        return 0, GENESIS
    found = select("SELECT seq, hash FROM beginning", ())
    if not found:
        return 0, GENESIS
    seq, digest = found[0]
    if not isinstance(seq, int) or not isinstance(digest, bytes) or len(digest) != len(GENESIS):
        raise StoreCorruptError("what the log goes on from is damaged.")
    return seq, digest


def _rows(select: Select, newest: int) -> Iterator[RawRow]:
    last = -(1 << 63)
    while True:
        try:
            page = select(_RAW, (last, newest, _PAGE))
        except StoreCorruptError as error:
            raise StoreCorruptError(f"after entry {max(last, 0)}, {error}") from error
        for row in page:
            raw = RawRow(*row)
            yield raw._replace(kind=_text(raw.kind), tank=_text(raw.tank))
        if len(page) < _PAGE:
            return
        last = page[-1][0]


def _text(raw: object) -> object:
    # Bytes that are no UTF-8 were not written by this program; they then match nothing.
    return raw.decode("utf-8", "replace") if isinstance(raw, bytes) else raw


def _texts(select: Select) -> tuple[set[str], str | None]:
    """Return the versions whose texts are whole, and what is wrong with one that is not."""
    whole: set[str] = set()
    bad = None
    for version, body in select("SELECT CAST(hash AS BLOB), CAST(body AS BLOB) FROM config", ()):
        if version is not None and body is not None and sha256(body).digest() == version:
            whole.add(version.hex())
        else:
            bad = f"the kept text of version {(version or b'').hex()[:16]} was changed"
    return whole, bad


def _why_cut(newest: int, counter: int) -> str | None:
    if newest == counter:
        return None
    return f"the last entry is {newest}, but the log has counted to {counter}"


def _why_altered(select: Select, tables_of: Callable[[int], set[str]]) -> str | None:
    version = select("PRAGMA user_version", ())[0][0]
    if {sql for (sql,) in select(schema.MADE_OF, ())} == tables_of(version):
        return None
    return "its tables, or the guards against changing an entry, were altered"


def _why_torn(select: Select) -> str | None:
    orphan = select("PRAGMA foreign_key_check", ())
    if orphan:
        return f"entry {orphan[0][1]} refers to something that is not there"
    told = select("PRAGMA integrity_check(1)", ())[0][0]
    return None if told == "ok" else f"the file is damaged: {told}"
