"""What somebody with a database tool, or a bad disk, can do to a log, and that it is found."""

from __future__ import annotations

import random
import sqlite3
from pathlib import Path

import pytest
from shiftlog_samples import TEXTS, VERSIONS, sample

from tankcalc.errors import StoreCorruptError, StoreError, StoreUnavailableError
from tankcalc.shiftlog import Flaw, open_store
from tankcalc.shiftlog.chain import link
from tankcalc.shiftlog.entry import canonical
from tankcalc.shiftlog.sqlite import LogFile


@pytest.fixture
def log(tmp_path: Path) -> Path:
    """A log of six entries, the third with a reference and the fourth without a tank."""
    path = tmp_path / "log.sqlite"
    store = open_store(path)
    first = sample(note="0")
    for entry in (
        first,
        sample(note="1"),
        sample(note="2", ref=first.uid, reason="about the first"),
        sample(note="3", kind="note", tank=None, fluid=None, result=None),
        sample(note="4", judgement="accepted", signals={"p1": "saturated"}, seen=4),
        sample(note="5", kind="withdrawal", ref=first.uid, reason="of the wrong tank"),
    ):
        store.append(entry, TEXTS)
    assert store.verify().whole
    store.close()
    return path


def tamper(path: Path, *statements: str) -> None:
    """Change the file behind the program's back, its guards taken off and put on again."""
    db = sqlite3.connect(path, isolation_level=None)
    guards = db.execute("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'").fetchall()
    for name, _ in guards:
        db.execute(f"DROP TRIGGER {name}")
    changed = sum(db.execute(statement).rowcount for statement in statements)
    for _, sql in guards:
        db.execute(sql)
    db.close()
    assert changed >= 1


def flaw(path: Path, known_head: tuple[int, str] | None = None) -> Flaw:
    store = open_store(path)
    result = store.verify(known_head)
    store.close()
    assert result.flaw is not None
    assert not result.whole
    assert str(result.flaw).isprintable()
    return result.flaw


@pytest.mark.parametrize(
    ("column", "value"),
    [
        ("uid", "x'00000000000000000000000000000001'"),
        ("kind", "'note'"),
        ("ref", "(SELECT uid FROM entry WHERE seq = 2)"),
        ("ref", "NULL"),
        ("tank", "'T-102'"),
        ("tank", "'T-101' || char(0)"),
        ("tank", "CAST(x'542d313031ff' AS TEXT)"),
        ("tank", "NULL"),
        ("t_us", "t_us + 1"),
        ("body", "replace(body, '85.3 kPa', '85.4 kPa')"),
        ("body", "body || ' '"),
        ("body", "''"),
        ("body", "CAST(x'ff' AS TEXT)"),
        ("prev", "randomblob(32)"),
        ("prev", "(SELECT hash FROM entry WHERE seq = 6)"),
        ("hash", "randomblob(32)"),
        ("hash", "CAST(substr(hash, 2) || substr(hash, 1, 1) AS BLOB)"),
    ],
)
def test_a_change_in_any_column_is_found_at_that_entry(log: Path, column: str, value: str) -> None:
    tamper(log, f"UPDATE entry SET {column} = {value} WHERE seq = 3")
    assert flaw(log).seq == 3


@pytest.mark.parametrize("key", ["who", "user", "shift", "entered_us", "note", "program", "typed"])
def test_a_rewritten_entry_breaks_the_link_to_the_next(log: Path, key: str) -> None:
    """Body and hash agree with each other, as somebody who knows the method would make them."""
    store = open_store(log)
    before, row = store.tail(3)[:2]
    store.close()
    changed = sample(
        **{
            name: getattr(row.entry, name) for name in row.entry.__dataclass_fields__ if name != key
        },
        **{key: {"p1": "1 bar"} if key == "typed" else 7 if key == "entered_us" else "other"},
    )
    body = canonical(changed)
    digest = link(before.hash, body)
    tamper(
        log,
        "UPDATE entry SET body = '" + body.decode().replace("'", "''") + "',"
        f" hash = x'{digest.hex()}' WHERE seq = {row.seq}",
    )
    found = flaw(log)
    assert found.seq == row.seq + 1
    assert "does not follow" in found.why


@pytest.mark.parametrize("seq", [1, 2, 5])
def test_a_removed_entry_is_found_at_the_next(log: Path, seq: int) -> None:
    tamper(log, f"DELETE FROM entry WHERE seq = {seq}")
    assert flaw(log).seq == seq + 1


def test_a_removed_entry_is_found_when_the_rest_is_renumbered(log: Path) -> None:
    tamper(
        log,
        "DELETE FROM entry WHERE seq = 2",
        "UPDATE entry SET seq = seq - 1 WHERE seq = 3",
        "UPDATE entry SET seq = seq - 1 WHERE seq = 4",
        "UPDATE entry SET seq = seq - 1 WHERE seq = 5",
        "UPDATE entry SET seq = seq - 1 WHERE seq = 6",
        "UPDATE sqlite_sequence SET seq = 5",
    )
    found = flaw(log)
    assert (found.seq, "does not follow" in found.why) == (2, True)


def test_swapped_entries_are_found(log: Path) -> None:
    tamper(
        log,
        "UPDATE entry SET seq = 99 WHERE seq = 4",
        "UPDATE entry SET seq = 4 WHERE seq = 5",
        "UPDATE entry SET seq = 5 WHERE seq = 99",
    )
    assert flaw(log).seq == 4


def test_an_entry_put_in_between_is_found(log: Path) -> None:
    columns = "uid, kind, ref, tank, t_us, body, prev, hash"
    tamper(
        log,
        "UPDATE entry SET seq = 7 WHERE seq = 6",
        f"INSERT INTO entry(seq, {columns}) SELECT 6, randomblob(16), kind, ref, tank, t_us, body,"
        " randomblob(32), hash FROM entry WHERE seq = 2",
    )
    assert flaw(log).seq == 6


def test_entries_cut_off_the_end_are_found_by_the_count(log: Path) -> None:
    tamper(log, "DELETE FROM entry WHERE seq > 4")
    found = flaw(log)
    assert found.seq is None
    assert "the last entry is 4, but the log has counted to 6" in found.why


def test_entries_cut_off_with_the_count_are_found_by_a_known_head(log: Path) -> None:
    store = open_store(log)
    seq, digest = store.head()
    store.close()
    tamper(log, "DELETE FROM entry WHERE seq > 4", "UPDATE sqlite_sequence SET seq = 4")
    store = open_store(log)
    assert store.verify().whole  # nothing in the file itself can show it
    store.close()
    assert "after 4 are missing" in flaw(log, (seq, digest.hex()[:16])).why


def test_a_log_emptied_altogether_is_found(log: Path) -> None:
    tamper(log, "DELETE FROM entry")
    assert "counted to 6" in flaw(log).why


@pytest.mark.parametrize("column", ["hash", "body"])
def test_a_changed_text_is_found_at_the_first_entry_that_rests_on_it(
    log: Path, column: str
) -> None:
    tamper(log, f"UPDATE config SET {column} = randomblob(32) WHERE hash = x'{VERSIONS['tank']}'")
    found = flaw(log)
    assert (found.seq, "the text of its tank" in found.why) == (1, True)


def test_a_changed_text_is_not_given_out(log: Path) -> None:
    tamper(log, f"UPDATE config SET body = x'00' WHERE hash = x'{VERSIONS['tank']}'")
    store = open_store(log)
    with pytest.raises(StoreCorruptError, match="was changed"):
        store.get_config(VERSIONS["tank"])
    store.close()


def test_a_removed_text_is_found(log: Path) -> None:
    tamper(log, f"DELETE FROM config WHERE hash = x'{VERSIONS['site']}'")
    assert "the text of its site" in flaw(log).why


def test_a_changed_text_that_no_entry_rests_on_is_found(log: Path) -> None:
    tamper(log, "INSERT INTO config(hash, body) VALUES (zeroblob(32), x'00')")
    assert "kept text" in flaw(log).why


@pytest.mark.parametrize("table", ["kind", "config", "entry"])
@pytest.mark.parametrize("action", ["UPDATE", "DELETE"])
def test_guards_taken_off_are_found(log: Path, table: str, action: str) -> None:
    name = f"{table}_no_{action.lower()}"
    db = sqlite3.connect(log)
    db.execute(f"DROP TRIGGER {name}")
    db.close()
    assert "guards" in flaw(log).why
    db = sqlite3.connect(log)
    db.execute(f"CREATE TRIGGER {name} BEFORE {action} ON {table} BEGIN SELECT 1; END")
    db.close()
    assert "guards" in flaw(log).why


def test_an_altered_table_is_found(log: Path) -> None:
    db = sqlite3.connect(log)
    db.execute("ALTER TABLE entry ADD COLUMN mine TEXT")
    db.close()
    assert "tables" in flaw(log).why


def test_a_changed_kind_is_found(log: Path) -> None:
    tamper(log, "UPDATE kind SET name = 'gossip' WHERE name = 'note'")
    assert "refers to something that is not there" in flaw(log).why


STATEMENTS = (
    "UPDATE entry SET tank = 'X' WHERE seq = 1",
    "UPDATE entry SET seq = 99 WHERE seq = 1",
    "DELETE FROM entry WHERE seq = 6",
    "DELETE FROM entry",
    "INSERT OR REPLACE INTO entry SELECT * FROM entry WHERE seq = 6",
    "REPLACE INTO entry(seq, uid, kind, t_us, body, prev, hash)"
    " SELECT 6, uid, 'note', 0, '{}', prev, hash FROM entry WHERE seq = 6",
    "UPDATE OR REPLACE entry SET uid = (SELECT uid FROM entry WHERE seq = 1) WHERE seq = 2",
    "INSERT INTO entry SELECT * FROM entry WHERE seq = 6 ON CONFLICT DO UPDATE SET tank = 'X'",
    "UPDATE config SET body = x'00'",
    "DELETE FROM config",
    "INSERT OR REPLACE INTO config SELECT hash, x'00' FROM config",
    "UPDATE kind SET name = 'x'",
    "DELETE FROM kind",
)


@pytest.mark.parametrize("statement", STATEMENTS)
def test_through_the_programs_own_connection_nothing_is_changed_or_removed(
    log: Path, statement: str
) -> None:
    file = LogFile(log, 1.0)
    everything = "SELECT * FROM entry", "SELECT * FROM config", "SELECT * FROM kind"
    before = [file.select(sql) for sql in everything]
    with pytest.raises(StoreError, match=r"append-only|UNIQUE"), file.writing() as db:
        db.execute(statement)
    assert [file.select(sql) for sql in everything] == before
    file.close()


def test_a_flipped_bit_in_the_content_of_an_entry_is_found(log: Path) -> None:
    whole = log.read_bytes()
    store = open_store(log)
    bodies = [canonical(row.entry) for row in store.tail()]
    store.close()
    places = random.Random(5)
    for body in bodies:
        start = whole.index(body)
        for _ in range(5):
            spot = start + places.randrange(len(body))
            changed = bytes([whole[spot] ^ 1 << places.randrange(8)])
            log.write_bytes(whole[:spot] + changed + whole[spot + 1 :])
            flaw(log)
    log.write_bytes(whole)


def test_a_flipped_bit_anywhere_is_found_or_changes_nothing(log: Path) -> None:
    """Header counters and unused bytes of a page mean nothing; everything else is noticed."""
    whole = log.read_bytes()
    store = open_store(log)
    rows = store.tail()
    store.close()
    places = random.Random(7)
    found = 0
    for _ in range(150):
        spot = places.randrange(len(whole))
        changed = bytes([whole[spot] ^ 1 << places.randrange(8)])
        log.write_bytes(whole[:spot] + changed + whole[spot + 1 :])
        store = open_store(log)
        if store.verify().whole:
            assert store.tail() == rows
        else:
            found += 1
        store.close()
    assert found > 10


@pytest.mark.parametrize("keep", [100, 4096, 8192, -1])
def test_a_file_cut_short_is_found(log: Path, keep: int) -> None:
    log.write_bytes(log.read_bytes()[:keep])
    flaw(log)


@pytest.mark.parametrize("setting", ["user_version", "application_id"])
def test_a_header_put_to_nothing_is_found(log: Path, setting: str) -> None:
    db = sqlite3.connect(log)
    db.execute(f"PRAGMA {setting}=0")
    db.close()
    flaw(log)


def test_a_file_emptied_is_no_log(log: Path) -> None:
    log.write_bytes(b"")
    store = open_store(log)
    with pytest.raises(StoreUnavailableError, match="no log"):
        store.verify()
    store.close()


def test_an_entry_that_cannot_be_read_says_so_when_listed(log: Path) -> None:
    tamper(log, "UPDATE entry SET body = '{}' WHERE seq = 4")
    store = open_store(log)
    with pytest.raises(StoreCorruptError, match=r"entry 4 .* Verify the log"):
        store.tail()
    assert [row.seq for row in store.tail(2)] == [5, 6]
    store.close()
