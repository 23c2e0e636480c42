"""The PostgreSQL schema of the log, in numbered steps that only go forward.

Everything lies in a schema of its own, so that a database may hold other things as well. A
tank's name is bytes: text of PostgreSQL cannot hold every name that somebody may have typed.
"""

from __future__ import annotations

from tankcalc.shiftlog.kinds import FIRST_KINDS, LATER_KINDS

SCHEMA = "tankcalc"
LOCK = 0x74636C67
"""Number of the advisory lock that whoever takes a step holds."""

_REFUSE = "BEGIN RAISE EXCEPTION 'the log is append-only'; END"
_ADVANCE = (
    "BEGIN IF NEW.seq = OLD.seq + 1 AND EXISTS (SELECT 1 FROM tankcalc.entry e"
    " WHERE e.seq = NEW.seq AND e.prev = OLD.hash AND e.hash = NEW.hash)"
    " THEN RETURN NEW; END IF;"
    " RAISE EXCEPTION 'the head of the log only moves to the next entry'; END"
)
FUNCTIONS = {"refuse": _REFUSE, "advance": _ADVANCE}
"""Bodies of the guards' functions."""

_TABLES = ("schema_version", "kind", "config", "entry", "head")
_APPEND_ONLY = ("schema_version", "kind", "config", "entry")


def _guards() -> tuple[str, ...]:
    made = []
    for table in _TABLES:
        changes = "DELETE OR UPDATE" if table in _APPEND_ONLY else "DELETE"
        made += [
            f"CREATE TRIGGER no_change BEFORE {changes} ON {table}"
            " FOR EACH ROW EXECUTE FUNCTION refuse()",
            f"CREATE TRIGGER no_truncate BEFORE TRUNCATE ON {table}"
            " FOR EACH STATEMENT EXECUTE FUNCTION refuse()",
        ]
    made.append(
        "CREATE TRIGGER only_forward BEFORE UPDATE ON head FOR EACH ROW EXECUTE FUNCTION advance()"
    )
    # ALWAYS: also for a session that says it is a replica.
    made += [f"ALTER TABLE {table} ENABLE ALWAYS TRIGGER no_change" for table in _TABLES]
    made += [f"ALTER TABLE {table} ENABLE ALWAYS TRIGGER no_truncate" for table in _TABLES]
    return (*made, "ALTER TABLE head ENABLE ALWAYS TRIGGER only_forward")


_FIGURES = "kind IN ('reading', 'amendment')"

_FIRST = (
    "CREATE TABLE schema_version(step integer NOT NULL PRIMARY KEY,"
    " taken timestamptz NOT NULL DEFAULT clock_timestamp())",
    "CREATE TABLE kind(name text NOT NULL PRIMARY KEY)",
    *(f"INSERT INTO kind(name) VALUES ('{name}')" for name in (*FIRST_KINDS, *LATER_KINDS)),
    "CREATE TABLE config(hash bytea NOT NULL PRIMARY KEY CHECK(octet_length(hash) = 32),"
    " body bytea NOT NULL)",
    "CREATE TABLE entry("
    " seq bigint NOT NULL PRIMARY KEY,"
    " uid bytea NOT NULL UNIQUE CHECK(octet_length(uid) = 16),"
    " kind text NOT NULL REFERENCES kind(name),"
    " ref bytea REFERENCES entry(uid),"
    " tank bytea,"
    " t_us bigint NOT NULL,"
    " body text NOT NULL,"
    # Unique: two entries can never follow the same one, so the chain cannot fork.
    " prev bytea NOT NULL UNIQUE CHECK(octet_length(prev) = 32),"
    " hash bytea NOT NULL CHECK(octet_length(hash) = 32),"
    # The server's own clock: not part of the entry, and compared with nothing.
    " written timestamptz NOT NULL DEFAULT clock_timestamp())",
    "CREATE INDEX entry_time ON entry(t_us)",
    "CREATE INDEX entry_tank ON entry(tank, seq)",
    "CREATE INDEX entry_kind ON entry(kind, seq)",
    "CREATE INDEX entry_tank_kind ON entry(tank, kind, seq)",
    "CREATE INDEX entry_ref ON entry(ref, seq) WHERE ref IS NOT NULL",
    f"CREATE INDEX entry_figures ON entry(tank, t_us, seq) WHERE {_FIGURES}",
    "CREATE TABLE head(one integer NOT NULL PRIMARY KEY CHECK(one = 1), seq bigint NOT NULL,"
    " hash bytea NOT NULL CHECK(octet_length(hash) = 32))",
    f"INSERT INTO head(one, seq, hash) VALUES (1, 0, '\\x{bytes(32).hex()}')",
    *(
        f"CREATE FUNCTION {name}() RETURNS trigger LANGUAGE plpgsql AS $guard${body}$guard$"
        for name, body in FUNCTIONS.items()
    ),
    *_guards(),
)

STEPS: tuple[tuple[str, ...], ...] = (_FIRST,)
"""Statements of each step; ``schema_version`` holds the numbers of those that were taken."""

COLUMNS = {
    "schema_version": "step integer, taken timestamp with time zone",
    "kind": "name text",
    "config": "hash bytea, body bytea",
    "entry": "seq bigint, uid bytea, kind text, ref bytea, tank bytea, t_us bigint,"
    " body text, prev bytea, hash bytea, written timestamp with time zone",
    "head": "one integer, seq bigint, hash bytea",
}
"""What the tables are made of, as the server's catalogue tells it."""

GUARDS = {
    *((table, "no_change", "refuse") for table in _TABLES),
    *((table, "no_truncate", "refuse") for table in _TABLES),
    ("head", "only_forward", "advance"),
}
"""Table, guard and function of every guard."""

LATEST = f"""
WITH RECURSIVE t(tank) AS (
 (SELECT tank FROM entry WHERE {_FIGURES} AND tank IS NOT NULL
  ORDER BY tank, t_us, seq LIMIT 1)
 UNION ALL SELECT (SELECT e.tank FROM entry e WHERE e.{_FIGURES} AND e.tank > t.tank
  ORDER BY e.tank, e.t_us, e.seq LIMIT 1) FROM t WHERE t.tank IS NOT NULL)
SELECT l.seq, l.body, l.hash FROM t CROSS JOIN LATERAL (
 SELECT c.seq, c.body, c.hash FROM entry c WHERE c.{_FIGURES} AND c.tank = t.tank
 AND (c.kind = 'reading' OR EXISTS (
  SELECT 1 FROM entry o WHERE o.uid = c.ref AND o.kind = 'reading'))
 AND NOT EXISTS (SELECT 1 FROM entry x
  WHERE x.ref = CASE c.kind WHEN 'amendment' THEN c.ref ELSE c.uid END
  AND (x.kind = 'withdrawal' OR (x.kind = 'amendment' AND x.seq > c.seq)) OFFSET 0)
 ORDER BY c.t_us DESC, c.seq DESC LIMIT 1) l
"""
"""Query for the entry that holds each tank's latest figures, from tank to tank by an index.

The OFFSET keeps the planner from joining all corrections to all entries: it looks them up. The
order, longer than it need be, is that of the index that holds nothing but figures.
"""

HISTORY = """
WITH RECURSIVE up(uid, ref) AS (
 SELECT uid, ref FROM entry WHERE uid = %s
 UNION SELECT e.uid, e.ref FROM entry e JOIN up ON e.uid = up.ref),
down(uid) AS (
 SELECT uid FROM up WHERE ref IS NULL
 UNION SELECT e.uid FROM entry e JOIN down ON e.ref = down.uid)
SELECT seq, body, hash FROM entry WHERE uid IN (SELECT uid FROM down) ORDER BY seq
"""
"""Query for an entry's original and everything that refers to it."""
