"""Everything that can be wrong with a log in PostgreSQL, the first thing first."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace
from hashlib import sha256
from typing import Any

from tankcalc.shiftlog.chain import GENESIS, Flaw, RawRow, VerifyResult, follow
from tankcalc.shiftlog.postgres_schema import COLUMNS, FUNCTIONS, GUARDS, SCHEMA

Select = Callable[[str, tuple[Any, ...]], list[tuple[Any, ...]]]

_PAGE = 2000
_PIECE = 100_000
_RAW = (
    "SELECT seq, uid, kind, ref, tank, t_us, body, prev, hash FROM entry"
    " WHERE seq > %s AND seq <= %s ORDER BY seq LIMIT %s"
)
# One statement, so that both are of one moment.
_ENDS = (
    "SELECT h.seq, h.hash, e.seq, e.hash FROM (SELECT 1) AS one"
    " LEFT JOIN head h ON true"
    " LEFT JOIN (SELECT seq, hash FROM entry ORDER BY seq DESC LIMIT 1) e ON true"
)
_COLUMNS = (
    "SELECT c.relname::text, string_agg(a.attname || ' ' || format_type(a.atttypid, a.atttypmod),"
    " ', ' ORDER BY a.attnum) FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace"
    " JOIN pg_attribute a ON a.attrelid = c.oid AND a.attnum > 0 AND NOT a.attisdropped"
    " WHERE n.nspname = %s AND c.relkind IN ('r', 'p', 'v', 'm', 'f') GROUP BY c.relname"
)
# 'A' is a guard that is on for every session; nothing else was ever set.
_GUARDS = (
    "SELECT c.relname::text, t.tgname::text, p.proname::text, p.prosrc, t.tgenabled = 'A',"
    " p.pronamespace = n.oid, t.tgqual IS NULL AND t.tgattr = ''::int2vector, t.tgtype::int"
    " FROM pg_trigger t JOIN pg_class c ON c.oid = t.tgrelid"
    " JOIN pg_namespace n ON n.oid = c.relnamespace JOIN pg_proc p ON p.oid = t.tgfoid"
    " WHERE n.nspname = %s AND NOT t.tgisinternal"
)
_ORPHANS = (
    "SELECT seq FROM entry e WHERE seq > %s AND seq <= %s"
    " AND (NOT EXISTS (SELECT 1 FROM kind k WHERE k.name = e.kind)"
    " OR (ref IS NOT NULL AND NOT EXISTS (SELECT 1 FROM entry r WHERE r.uid = e.ref)))"
    " ORDER BY seq LIMIT 1"
)
# Bits of pg_trigger.tgtype (catalog/pg_trigger.h): 1 row, 2 before, 8 delete, 16 update,
# 32 truncate.
_BITS = {"no_truncate": 34, "only_forward": 19}
_BITS_NO_CHANGE = {"head": 11}


def audit(select: Select, known_head: tuple[int, str] | None) -> VerifyResult:
    """Return what a check of the whole log finds.

    Entries that other consoles add meanwhile are left for the next check.
    """
    counted, counted_hash, newest, newest_hash = select(_ENDS, ())[0]
    texts, bad_text = _texts(select)
    result = follow(_rows(select, newest or 0), texts.__contains__, known_head)
    if result.flaw is None:
        why = (
            bad_text
            or _why_cut((newest or 0, newest_hash or GENESIS), (counted, counted_hash))
            or _why_altered(select)
            or _why_torn(select, newest or 0)
        )
        if why:
            return replace(result, flaw=Flaw(None, why))
    return result


def _rows(select: Select, newest: int) -> Iterator[RawRow]:
    last = -(1 << 63)
    while True:
        page = select(_RAW, (last, newest, _PAGE))
        for row in page:
            raw = RawRow(*row)
            body = raw.body.encode() if isinstance(raw.body, str) else raw.body
            yield raw._replace(tank=_text(raw.tank), body=body)
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
    for version, text in select("SELECT hash, body FROM config", ()):
        if sha256(text).digest() == version:
            whole.add(version.hex())
        else:
            bad = f"the kept text of version {version.hex()[:16]} was changed"
    return whole, bad


def _why_cut(newest: tuple[int, bytes], counted: tuple[int | None, bytes | None]) -> str | None:
    if newest == counted:
        return None
    return f"the last entry is {newest[0]}, but the log has counted to {counted[0] or 0}"


def _why_altered(select: Select) -> str | None:
    if dict(select(_COLUMNS, (SCHEMA,))) != COLUMNS:
        return "its tables were altered"
    found = set()
    for table, guard, function, source, is_on, is_ours, is_plain, bits in select(
        _GUARDS, (SCHEMA,)
    ):
        if not (is_on and is_ours and is_plain and source == FUNCTIONS.get(function)):
            return f"the guard {guard} against changing the table {table} was altered"
        if bits != _BITS.get(guard, _BITS_NO_CHANGE.get(table, 27)):
            return f"the guard {guard} against changing the table {table} was altered"
        found.add((table, guard, function))
    return None if found == GUARDS else "the guards against changing an entry were altered"


def _why_torn(select: Select, newest: int) -> str | None:
    # In pieces, each within the time a statement may take.
    for start in range(0, newest, _PIECE):
        orphan = select(_ORPHANS, (start, min(start + _PIECE, newest)))
        if orphan:
            return f"entry {orphan[0][0]} refers to something that is not there"
    return None
