"""The SQLite schema of the log, in numbered steps that only go forward."""

from __future__ import annotations

APPLICATION_ID = 0x74636C67
"""Marks the file as a log of this program ("tclg")."""

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

STEPS: tuple[tuple[str, ...], ...] = (_FIRST,)
"""Statements of each step; a file's ``user_version`` is the number of steps it has taken."""


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
