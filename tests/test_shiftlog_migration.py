"""A log of the first schema: read as it is, taken forward by the first append, never lost."""

from __future__ import annotations

import sqlite3
from pathlib import Path

import pytest
from shiftlog_samples import TEXTS, sample

from tankcalc.errors import StoreError, StoreUnavailableError
from tankcalc.shiftlog import Row, open_store, schema
from tankcalc.shiftlog.kinds import AMENDMENT, WITHDRAWAL
from tankcalc.shiftlog.sqlite_store import SqliteStore


def version(path: Path) -> int:
    db = sqlite3.connect(path)
    found: int = db.execute("PRAGMA user_version").fetchone()[0]
    db.close()
    return found


@pytest.fixture
def old(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> tuple[Path, list[Row]]:
    """A log of the first schema, and what is in it."""
    path = tmp_path / "log.sqlite"
    monkeypatch.setattr(schema, "STEPS", schema.STEPS[:1])
    store = open_store(path)
    first = sample()
    for entry in (first, sample(kind="note", result=None), sample(tank="T-2")):
        store.append(entry, TEXTS)
    with pytest.raises(StoreError, match="did not take"):
        store.append(sample(kind=AMENDMENT, ref=first.uid), TEXTS)
    rows = store.tail()
    store.close()
    monkeypatch.undo()
    assert version(path) == 1
    return path, rows


def test_an_old_log_is_read_and_verified_as_it_is(old: tuple[Path, list[Row]]) -> None:
    path, rows = old
    store = open_store(path)
    assert store.tail() == rows
    assert set(store.latest()) == {"T-101", "T-2"}
    assert store.history(rows[0].entry.uid) == rows[:1]
    assert (store.count(), store.head()[0]) == (3, 3)
    assert store.verify().whole
    store.close()
    assert version(path) == 1


def test_the_first_append_takes_it_forward_and_keeps_every_hash(
    old: tuple[Path, list[Row]],
) -> None:
    path, rows = old
    store = open_store(path)
    withdrawal = sample(kind=WITHDRAWAL, ref=rows[0].entry.uid, result=None, judgement="")
    store.append(withdrawal, TEXTS)
    assert version(path) == len(schema.STEPS)
    assert store.tail()[:3] == rows
    assert set(store.latest()) == {"T-2"}
    assert store.verify((3, rows[2].hash.hex())).whole
    store.close()


def test_a_log_of_a_newer_program_is_refused_by_name(old: tuple[Path, list[Row]]) -> None:
    path, _ = old
    db = sqlite3.connect(path)
    db.execute(f"PRAGMA user_version={len(schema.STEPS) + 1}")
    db.close()
    store = open_store(path)
    with pytest.raises(StoreUnavailableError, match=r"log\.sqlite was written by a newer version"):
        store.append(sample(), TEXTS)


def test_a_log_goes_on_from_the_head_of_another(tmp_path: Path) -> None:
    before = SqliteStore(tmp_path / "2026.sqlite")
    for _ in range(3):
        before.append(sample(), TEXTS)
    head = before.head()
    before.close()
    store = SqliteStore(tmp_path / "2027.sqlite")
    store.go_on_from(head)
    assert (store.head(), store.begins(), store.count()) == (head, head, 0)
    assert store.verify().whole
    receipt = store.append(sample(), TEXTS)
    assert (receipt.seq, store.count()) == (4, 1)
    result = store.verify(None)
    assert (result.whole, result.entries, result.head) == (True, 1, store.head())
    assert store.verify((3, head[1].hex()[:16])).whole
    assert "entry 3 is in the archive; its hash was once 00" in str(store.verify((3, "00")).flaw)
    with pytest.raises(StoreError, match="holds entries already"):
        store.go_on_from(head)
    store.close()


@pytest.mark.parametrize(
    ("statement", "says"),
    [
        ("UPDATE beginning SET seq = 2", "an entry is missing before it"),
        ("UPDATE beginning SET hash = zeroblob(32)", "does not follow the entry before it"),
        ("DELETE FROM beginning", "an entry is missing before it"),
    ],
)
def test_a_changed_beginning_is_found(tmp_path: Path, statement: str, says: str) -> None:
    path = tmp_path / "log.sqlite"
    store = SqliteStore(path)
    store.go_on_from((7, bytes(range(32))))
    store.append(sample(), TEXTS)
    store.close()
    db = sqlite3.connect(path, isolation_level=None)
    with pytest.raises(sqlite3.IntegrityError, match="append-only"):
        db.execute(statement)
    guards = db.execute("SELECT name, sql FROM sqlite_master WHERE tbl_name = 'beginning'")
    triggers = [(name, sql) for name, sql in guards if sql and "TRIGGER" in sql]
    for name, _ in triggers:
        db.execute(f"DROP TRIGGER {name}")
    db.execute(statement)
    for _, sql in triggers:
        db.execute(sql)
    db.close()
    store = SqliteStore(path)
    flaw = store.verify().flaw
    store.close()
    assert flaw is not None
    assert says in str(flaw)
