"""The SQLite schema of the log, in numbered steps that only go forward."""

from __future__ import annotations

from tankcalc.shiftlog.kinds import LATER_KINDS

APPLICATION_ID = 0x74636C67
"""Marks the file as a log of this program ("tclg")."""

ARCHIVE_ID = 0x74636C61
"""Marks the file as an archive ("tcla"): a log that takes no new entries."""

_FIRST = (
    # Kinds live in a table and not in a CHECK, which SQLite cannot widen later.
    "CREATE TABLE kind(name TEXT NOT NULL PRIMARY KEY) STRICT",
    "INSERT INTO kind(name) VALUES ('reading'), ('note')",
    "CREATE TABLE config(hash BLOB NOT NULL PRIMARY KEY CHECK(length(hash) = 32),"
    " body BLOB NOT NULL) STRICT",
    "CREATE TABLE entry("
    " seq INTEGER PRIMARY KEY AUTOINCREMENT,"
    " uid BLOB NOT NULL UNIQUE CHECK(length(uid) = 16),"
    " kind TEXT NOT NULL REFERENCES kind(name),"
    " ref BLOB REFERENCES entry(uid),"
    " tank TEXT,"
    " t_us INTEGER NOT NULL,"
    " body TEXT NOT NULL,"
    # Unique: two entries can never follow the same one, so the chain cannot fork.
    " prev BLOB NOT NULL UNIQUE CHECK(length(prev) = 32),"
    " hash BLOB NOT NULL CHECK(length(hash) = 32)) STRICT",
    "CREATE INDEX entry_time ON entry(t_us)",
    "CREATE INDEX entry_tank ON entry(tank)",
    "CREATE INDEX entry_reading ON entry(tank, t_us) WHERE kind = 'reading'",
    *(
        f"CREATE TRIGGER {table}_no_{action} BEFORE {action.upper()} ON {table}"
        " BEGIN SELECT RAISE(ABORT, 'the log is append-only'); END"
        for table in ("kind", "config", "entry")
        for action in ("update", "delete")
    ),
)

_SECOND = (
    "INSERT INTO kind(name) VALUES " + ", ".join(f"('{name}')" for name in LATER_KINDS),
    # The head of the archive that this log goes on from; no row: it begins at nothing.
    "CREATE TABLE beginning(one INTEGER NOT NULL PRIMARY KEY CHECK(one = 1),"
    " seq INTEGER NOT NULL CHECK(seq > 0),"
    " hash BLOB NOT NULL CHECK(length(hash) = 32)) STRICT",
    *(
        f"CREATE TRIGGER beginning_no_{action} BEFORE {action.upper()} ON beginning"
        " BEGIN SELECT RAISE(ABORT, 'the log is append-only'); END"
        for action in ("update", "delete")
    ),
    "CREATE INDEX entry_ref ON entry(ref) WHERE ref IS NOT NULL",
    "CREATE INDEX entry_kind ON entry(kind)",
    "CREATE INDEX entry_tank_kind ON entry(tank, kind)",
    "CREATE INDEX entry_tank_time ON entry(tank, t_us)",
    "DROP INDEX entry_reading",
)

STEPS: tuple[tuple[str, ...], ...] = (_FIRST, _SECOND)
"""Statements of each step; a file's ``user_version`` is the number of steps it has taken."""

LATEST = """
WITH RECURSIVE t(tank) AS (
 SELECT min(tank) FROM entry
 UNION ALL SELECT (SELECT min(tank) FROM entry WHERE tank > t.tank)
 FROM t WHERE t.tank IS NOT NULL)
SELECT (SELECT c.seq FROM entry c WHERE c.tank = t.tank
 AND (+c.kind = 'reading' OR (+c.kind = 'amendment' AND EXISTS (
  SELECT 1 FROM entry o WHERE o.uid = c.ref AND +o.kind = 'reading')))
 AND NOT EXISTS (SELECT 1 FROM entry x
  WHERE x.ref = CASE c.kind WHEN 'amendment' THEN c.ref ELSE c.uid END
  AND (+x.kind = 'withdrawal' OR (+x.kind = 'amendment' AND x.seq > c.seq)))
 ORDER BY c.t_us DESC, c.seq DESC LIMIT 1)
FROM t WHERE t.tank IS NOT NULL
"""
"""Query for the number of the entry that holds each tank's latest figures.

It steps from tank to tank through an index, since a GROUP BY would read the whole log, and within
a tank back from the latest time to the first entry that was neither withdrawn nor amended later.
The unary plus keeps SQLite from the index on kind, which would find nearly every entry.
"""

HISTORY = """
WITH RECURSIVE up(uid, ref) AS (
 SELECT uid, ref FROM entry WHERE uid = ?
 UNION SELECT e.uid, e.ref FROM entry e JOIN up ON e.uid = up.ref),
down(uid) AS (
 SELECT uid FROM up WHERE ref IS NULL OR ref = uid
 UNION SELECT e.uid FROM entry e JOIN down ON e.ref = down.uid)
SELECT seq FROM entry WHERE uid IN (SELECT uid FROM down) ORDER BY seq
"""
"""Query for the numbers of an entry's original and of everything that refers to it."""


# STRICT depends on the SQLite that made the file; the counter's table is SQLite's own.
MADE_OF = (
    "SELECT replace(sql, ' STRICT', '') FROM sqlite_master"
    " WHERE sql IS NOT NULL AND name <> 'sqlite_sequence'"
)
"""Query for the SQL of every table, index and guard of a log."""


def statements(step: int, *, strict: bool) -> tuple[str, ...]:
    """Return the SQL of one step; without STRICT where SQLite is older than 3.37."""
    if strict:
        return STEPS[step]
    return tuple(sql.removesuffix(" STRICT") for sql in STEPS[step])
