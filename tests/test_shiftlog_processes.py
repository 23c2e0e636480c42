"""Several consoles on one log, and what is left when one of them is killed."""

from __future__ import annotations

import random
import time
from pathlib import Path

import pytest
from shiftlog_samples import TEXTS, python, sample, writer

from tankcalc.errors import StoreBusyError
from tankcalc.shiftlog import open_store
from tankcalc.shiftlog.sqlite import LogFile
from tankcalc.shiftlog.sqlite_store import SqliteStore

HOLD = """
import sqlite3, sys
db = sqlite3.connect(sys.argv[1], isolation_level=None)
db.execute(sys.argv[2])
db.execute("SELECT count(*) FROM sqlite_master").fetchone()
print("held", flush=True)
sys.stdin.readline()
db.execute("COMMIT")
"""


def acknowledged(said: Path) -> list[str]:
    """What a writer said completely: what follows the last line break was cut off."""
    return said.read_text().rpartition("\n")[0].split()


def test_no_acknowledged_entry_is_lost_or_doubled_when_writers_are_killed(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    moments = random.Random(11)
    promised: list[str] = []
    for turn in range(3):
        said = [tmp_path / f"{turn}-{number}" for number in range(3)]
        writers = [writer(path, file) for file in said]
        deadline = time.monotonic() + 30
        while not all(acknowledged(file) for file in said):
            assert time.monotonic() < deadline
            time.sleep(0.01)
        time.sleep(moments.uniform(0.05, 0.25))
        for process in writers:
            process.kill()
        for process in writers:
            assert process.communicate()[1] == ""
        promised += [uid for file in said for uid in acknowledged(file)]
    store = open_store(path)
    result = store.verify()
    assert result.flaw is None
    kept = [row.entry.uid.hex() for row in store.between(None, None)]
    assert len(kept) == len(set(kept)) == result.entries
    assert len(promised) > 9
    assert set(promised) <= set(kept)
    store.append(sample(), TEXTS)
    assert store.verify().whole
    store.close()


def test_four_writers_share_one_chain(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    said = [tmp_path / str(number) for number in range(4)]
    for process in [writer(path, file, 40) for file in said]:
        assert process.communicate(timeout=60)[1] == ""
        assert process.returncode == 0
    store = open_store(path)
    promised = [uid for file in said for uid in acknowledged(file)]
    assert sorted(promised) == sorted(row.entry.uid.hex() for row in store.tail(1000))
    result = store.verify()
    assert (result.flaw, result.entries) == (None, 160)
    assert sum(len(store.tail(1000, tank=f"T-{n}")) for n in range(5)) == 160
    store.close()


@pytest.mark.parametrize("hold", ["BEGIN IMMEDIATE", "BEGIN EXCLUSIVE", "BEGIN"])
def test_a_log_held_by_another_process_is_busy_and_then_free(tmp_path: Path, hold: str) -> None:
    path = tmp_path / "log.sqlite"
    store = SqliteStore(path, wait_s=0.1)
    store.append(sample(), TEXTS)
    entry = sample()
    other = python(HOLD, str(path), hold)
    assert other.stdout is not None
    assert other.stdout.readline() == "held\n"
    with pytest.raises(StoreBusyError, match="another console holds the log"):
        store.append(entry, TEXTS)
    _, errors = other.communicate("go\n", timeout=10)
    assert errors == ""
    assert store.append(entry, TEXTS).seq == 2
    assert store.verify().whole
    store.close()


def test_a_log_that_was_busy_when_first_opened_is_as_safe_as_any(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    first = open_store(path)
    first.append(sample(), TEXTS)
    first.close()
    other = python(HOLD, str(path), "BEGIN EXCLUSIVE")
    assert other.stdout is not None
    assert other.stdout.readline() == "held\n"
    file = LogFile(path, 0.1)
    with pytest.raises(StoreBusyError):
        file.select("SELECT count(*) FROM entry")
    other.communicate("go\n", timeout=10)
    assert file.select("SELECT count(*) FROM entry") == [(1,)]
    settings = ("synchronous", "recursive_triggers", "foreign_keys")
    assert [file.select(f"PRAGMA {name}")[0][0] for name in settings] == [3, 1, 1]
    file.close()


def test_a_writer_waits_for_another_to_finish(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    store = SqliteStore(path, wait_s=10.0)
    store.append(sample(), TEXTS)
    other = python(
        HOLD.replace("sys.stdin.readline()", "import time; time.sleep(0.5)"),
        str(path),
        "BEGIN EXCLUSIVE",
    )
    assert other.stdout is not None
    assert other.stdout.readline() == "held\n"
    assert store.append(sample(), TEXTS).seq == 2
    other.communicate(timeout=10)
    store.close()


def test_a_write_cut_short_is_undone_by_the_next_reader(tmp_path: Path) -> None:
    """A process that dies inside a transaction leaves a journal that rolls it back."""
    path = tmp_path / "log.sqlite"
    store = open_store(path)
    store.append(sample(note="kept"), TEXTS)
    store.close()
    dying = python(
        "import os, sqlite3, sys\n"
        "db = sqlite3.connect(sys.argv[1], isolation_level=None)\n"
        "db.execute('PRAGMA cache_size=1')\n"
        "db.execute('BEGIN IMMEDIATE')\n"
        "db.execute('INSERT INTO config SELECT randomblob(32), randomblob(300000)')\n"
        "os._exit(9)\n",
        str(path),
    )
    dying.communicate(timeout=10)
    journal = path.with_name(path.name + "-journal")
    assert journal.exists()
    store = open_store(path)
    assert [row.entry.note for row in store.tail()] == ["kept"]
    assert not journal.exists()
    assert store.verify().whole
    store.close()
