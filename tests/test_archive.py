"""The oldest entries rolled into a file; and copies made while others write."""

from __future__ import annotations

import os
import shutil
import sqlite3
import stat
import threading
import time
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest
from shiftlog_samples import NOON_US, TEXTS, python, sample, writer
from sites import make_site

from tankcalc.errors import InputError, LogBrokenError, StoreBusyError, StoreError
from tankcalc.profiles import Site, load_site
from tankcalc.shiftlog import Entry, open_store
from tankcalc.shiftlog import archive as archiving
from tankcalc.shiftlog.archive import Archived, archive, archive_of, check_archive, check_beginning
from tankcalc.shiftlog.backup import back_up
from tankcalc.shiftlog.sqlite_store import SqliteStore

YEAR_US = NOON_US  # what was read before this instant is to go
LATER_US = NOON_US + 1
OLD = {"t_us": YEAR_US - 1}
NEW = {"t_us": YEAR_US}


@pytest.fixture
def site(tmp_path: Path) -> Site:
    return load_site(make_site(tmp_path / "site"))


@pytest.fixture
def log(tmp_path: Path) -> Path:
    return tmp_path / "log.sqlite"


def fill(log: Path, *entries: Entry) -> list[Any]:
    with closing(open_store(log)) as store:
        for entry in entries:
            store.append(entry, TEXTS)
        return store.tail(1000)


def roll(log: Path, out: Path, site: Site) -> Archived:
    return archive(log, out, site=site, before_us=YEAR_US, now_us=LATER_US, who="A. Rook")


def rows_of(path: Path) -> list[Any]:
    with closing(SqliteStore(path)) as store:
        result = store.verify()
        assert result.flaw is None
        return list(store.between(None, None))


def test_the_log_goes_on_from_the_archives_last_hash(log: Path, site: Site, tmp_path: Path) -> None:
    before = fill(log, *(sample(**OLD) for _ in range(5)), *(sample(**NEW) for _ in range(3)))
    log.chmod(0o640)
    out = tmp_path / "2025.sqlite"
    found = roll(log, out, site)
    assert (found.entries, found.head, found.kept) == (5, (5, before[4].hash), 0)
    assert rows_of(out) == before[:5]
    after = rows_of(log)
    assert after[:3] == before[5:]
    with closing(SqliteStore(log)) as store:
        assert store.begins() == found.head
        assert archive_of(store) == str(out)
        assert check_archive(store, out) is None
        assert store.count() == 4
        for version, text in TEXTS.items():
            assert store.get_config(version) == text
        assert store.append(sample(), {}).seq == 10
    said = after[3].entry
    assert (said.kind, said.who, said.t_us) == ("note", "A. Rook", LATER_US)
    assert "Entries up to 5 were archived in 2025.sqlite" in said.note
    assert before[4].hash.hex()[:16] in said.note
    assert stat.S_IMODE(out.stat().st_mode) == 0o444
    assert stat.S_IMODE(log.stat().st_mode) == 0o640
    assert sorted(path.name for path in tmp_path.iterdir()) == ["2025.sqlite", "log.sqlite", "site"]


def test_an_archive_can_be_read_where_nothing_can_be_written(
    log: Path, site: Site, tmp_path: Path
) -> None:
    fill(log, sample(**OLD), sample(**NEW))
    out = tmp_path / "old.sqlite"
    roll(log, out, site)
    with closing(open_store(out)) as store:
        assert [row.seq for row in store.tail()] == [1]
        if os.geteuid() != 0:  # permissions do not hold root
            with pytest.raises(StoreError, match="read-only"):
                store.append(sample(), TEXTS)


def test_a_log_is_archived_again_and_again(log: Path, site: Site, tmp_path: Path) -> None:
    before = fill(log, *(sample(**OLD) for _ in range(4)))
    first, second = tmp_path / "a.sqlite", tmp_path / "b.sqlite"
    assert roll(log, first, site).head[0] == 4  # all of it: what is left says so
    assert [row.seq for row in rows_of(log)] == [5]
    fill(log, sample(t_us=LATER_US))
    later = archive(log, second, site=site, before_us=LATER_US + 1, now_us=LATER_US + 2, who="")
    assert (later.entries, later.head[0]) == (2, 6)
    with closing(SqliteStore(second)) as store:
        assert store.begins() == (4, before[3].hash)
        assert check_archive(store, first) is None
    with closing(SqliteStore(log)) as store:
        assert check_archive(store, second) is None
        wrong = check_archive(store, first)
        assert wrong is not None
        assert "does not go on from the archive" in wrong.why
        assert archive_of(store) == str(second)


def test_what_a_later_entry_corrects_stays_with_it(log: Path, site: Site, tmp_path: Path) -> None:
    corrected = sample(**OLD)
    about = sample(kind="amendment", ref=corrected.uid, reason="a slip", **OLD)
    fill(log, sample(**OLD), corrected, sample(**OLD), sample(**NEW), about)
    found = roll(log, tmp_path / "old.sqlite", site)
    assert (found.entries, found.kept) == (1, 3)
    assert [row.seq for row in rows_of(log)] == [2, 3, 4, 5, 6]
    with closing(SqliteStore(log)) as store:
        assert [row.seq for row in store.history(about.uid)] == [2, 5]


def test_what_was_corrected_before_the_date_goes_together(
    log: Path, site: Site, tmp_path: Path
) -> None:
    corrected = sample(**OLD)
    about = sample(kind="amendment", ref=corrected.uid, reason="a slip", **OLD)
    fill(log, corrected, about, sample(**NEW), sample(**OLD))
    found = roll(log, tmp_path / "old.sqlite", site)
    assert (found.entries, found.kept) == (2, 1)  # the last was entered late, and stays


def test_where_there_is_nothing_to_archive_nothing_is_made(
    log: Path, site: Site, tmp_path: Path
) -> None:
    before = fill(log, sample(**NEW), sample(**OLD))
    out = tmp_path / "old.sqlite"
    with pytest.raises(InputError, match="nothing to archive"):
        roll(log, out, site)
    assert not out.exists()
    assert rows_of(log) == before


def test_a_file_that_is_there_is_never_written_over(log: Path, site: Site, tmp_path: Path) -> None:
    before = fill(log, sample(**OLD), sample(**NEW))
    out = tmp_path / "mine"
    out.write_text("mine")
    with pytest.raises(InputError, match="there is a file"):
        roll(log, out, site)
    with pytest.raises(InputError, match="there is a file"):
        back_up(log, out)
    assert out.read_text() == "mine"
    assert rows_of(log) == before


def test_a_log_that_does_not_verify_is_left_as_it_is(log: Path, site: Site, tmp_path: Path) -> None:
    fill(log, *(sample(**OLD) for _ in range(3)), sample(**NEW))
    with closing(sqlite3.connect(log)) as db:
        guard = db.execute("SELECT sql FROM sqlite_master WHERE name = 'entry_no_update'")
        sql = guard.fetchone()[0]
        db.execute("DROP TRIGGER entry_no_update")
        db.execute("UPDATE entry SET body = replace(body, '85.3', '85.4') WHERE seq = 2")
        db.execute(sql)
        db.commit()
    out = tmp_path / "old.sqlite"
    content = log.read_bytes()
    for work in (lambda: roll(log, out, site), lambda: back_up(log, out)):
        with pytest.raises(LogBrokenError, match="entry 2"):
            work()
    assert log.read_bytes() == content
    assert sorted(path.name for path in tmp_path.iterdir()) == ["log.sqlite", "site"]


@pytest.mark.parametrize("step", ["_copy", "_said", "publish", "put", "_let_go"])
def test_wherever_it_is_cut_short_the_log_holds_everything(
    log: Path, site: Site, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, step: str
) -> None:
    before = fill(log, *(sample(**OLD) for _ in range(3)), sample(**NEW))

    def fails(*_: object) -> None:
        raise OSError(5, "Input/output error")

    monkeypatch.setattr(archiving, step, fails)
    with pytest.raises(OSError, match="Input/output"):
        roll(log, tmp_path / "old.sqlite", site)
    said = 1 if step == "_let_go" else 0  # by then the archive is there, and the log says so
    assert rows_of(log)[: len(before)] == before
    assert len(rows_of(log)) == len(before) + said
    left = {path.name for path in tmp_path.iterdir()} - {"old.sqlite"}
    assert left == {"log.sqlite", "site"}
    with closing(open_store(log)) as store:
        assert store.append(sample(), {}).seq == 5 + said


def test_a_correction_made_meanwhile_stops_it(
    log: Path, site: Site, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    corrected = sample(**OLD)
    fill(log, corrected, sample(**NEW))
    said = archiving._said

    def meanwhile(*args: Any) -> Entry:
        fill(log, sample(kind="amendment", ref=corrected.uid, reason="a slip"))
        return said(*args)

    monkeypatch.setattr(archiving, "_said", meanwhile)
    out = tmp_path / "old.sqlite"
    with pytest.raises(StoreBusyError, match="Archive again"):
        roll(log, out, site)
    assert not out.exists()
    assert len(rows_of(log)) == 3


def test_what_a_log_goes_on_from_is_said_and_checked(log: Path, site: Site, tmp_path: Path) -> None:
    before = fill(log, *(sample(**OLD) for _ in range(3)), sample(**NEW))
    out = tmp_path / "old.sqlite"
    with closing(SqliteStore(log)) as store:
        assert check_beginning(store) == ("", None)
        roll(log, out, site)
        words = f"after entry 3:{before[2].hash.hex()[:16]}, archived in {out}"
        assert check_beginning(store) == (words, None)
        out.rename(tmp_path / "aside")
        assert check_beginning(store) == (f"{words}, which is not there now", None)
        back_up(log, out)  # another log in its place
        found = check_beginning(store)[1]
        assert found is not None
        assert "does not go on from the archive" in found.why
        out.unlink()
        out.write_bytes((tmp_path / "aside").read_bytes()[:-4096])
        found = check_beginning(store)[1]
        assert found is not None
        assert "does not verify" in found.why


# Consoles that have the log open


@pytest.fixture
def archived_under(log: Path, site: Site, tmp_path: Path) -> Iterator[SqliteStore]:
    """A console that had the log open, and did something, before it was archived."""
    fill(log, *(sample(**OLD) for _ in range(3)), sample(note="stays", **NEW))
    with closing(SqliteStore(log, wait_s=5.0)) as console:
        assert len(console.tail()) == 4
        console.append(sample(note="mine", **NEW), {})
        roll(log, tmp_path / "old.sqlite", site)
        yield console


def test_another_console_writes_on(log: Path, archived_under: SqliteStore) -> None:
    entry = sample(note="after")
    assert archived_under.append(entry, {}).seq == 7
    assert [row.entry.uid for row in rows_of(log)][-1] == entry.uid


def test_another_console_reads_what_the_log_holds_now(
    archived_under: SqliteStore, log: Path
) -> None:
    assert [row.seq for row in archived_under.tail()] == [4, 5, 6]
    fill(log, sample(note="by somebody else"))
    assert archived_under.tail(1)[0].entry.note == "by somebody else"


def test_a_console_that_waits_meanwhile_goes_on_from_there(
    log: Path, site: Site, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    fill(log, *(sample(**OLD) for _ in range(3)), sample(**NEW))
    receipts: list[Any] = []
    console = SqliteStore(log)
    assert len(console.tail()) == 4
    waiting = threading.Thread(target=lambda: receipts.append(console.append(sample(), {})))
    let_go = archiving._let_go

    def slowly(*args: Any) -> None:
        waiting.start()
        time.sleep(0.3)  # long enough to stand at the lock
        assert not receipts
        assert [row.seq for row in console_that_reads.tail()] == [1, 2, 3, 4, 5]
        let_go(*args)

    monkeypatch.setattr(archiving, "_let_go", slowly)
    with closing(SqliteStore(log)) as console_that_reads:
        roll(log, tmp_path / "old.sqlite", site)
        waiting.join(timeout=20)
        assert [row.seq for row in console_that_reads.tail()] == [4, 5, 6]
    console.close()
    assert [receipt.seq for receipt in receipts] == [6]


def test_the_guards_are_as_before(log: Path, site: Site, tmp_path: Path) -> None:
    fill(log, sample(**OLD), sample(**NEW))
    roll(log, tmp_path / "old.sqlite", site)
    with closing(sqlite3.connect(log)) as db:
        for statement in (
            "DELETE FROM entry",
            "DELETE FROM beginning",
            "UPDATE beginning SET seq=9",
        ):
            with pytest.raises(sqlite3.IntegrityError, match="append-only"):
                db.execute(statement)


@pytest.mark.parametrize("pieces", [0, 1, 3])
def test_killed_in_the_middle_the_two_files_hold_everything(
    log: Path, site: Site, tmp_path: Path, pieces: int
) -> None:
    """The process dies inside the transaction that takes a piece out of the log."""
    before = fill(log, *(sample(**OLD) for _ in range(50)), sample(**NEW))
    out = tmp_path / "old.sqlite"
    code = (
        "import os, sys\n"
        "from pathlib import Path\n"
        "from tankcalc.profiles import load_site\n"
        "from tankcalc.shiftlog import archive\n"
        "let_go, done = archive._let_go, []\n"
        "def dies(db, end):\n"
        "    let_go(db, end)\n"
        "    if len(done) == int(sys.argv[5]):\n"
        "        os.kill(os.getpid(), 9)\n"
        "    done.append(end)\n"
        "archive._let_go, archive._PIECE = dies, 10\n"
        "log, out, site = map(Path, sys.argv[1:4])\n"
        "archive.archive(log, out, site=load_site(site), before_us=int(sys.argv[4]),"
        " now_us=int(sys.argv[4]) + 1, who='')\n"
    )
    process = python(code, str(log), str(out), str(site.folder), str(YEAR_US), str(pieces))
    assert process.communicate(timeout=60)[1] == ""
    assert process.returncode == -9
    left = rows_of(log)
    assert left[:-1] == before[10 * pieces :]
    assert rows_of(out) == before[:50]
    with closing(SqliteStore(log)) as store:
        words, flaw = check_beginning(store)
        assert (bool(words), flaw) == (pieces > 0, None)
        assert store.append(sample(), {}).seq == 53


def test_a_piece_parts_no_correction_from_what_it_corrects(
    log: Path, site: Site, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    entries = [sample(**OLD) for _ in range(9)]
    about = sample(kind="amendment", ref=entries[1].uid, reason="a slip", **OLD)
    fill(log, *entries[:5], about, *entries[5:], sample(**NEW))
    ends = []
    let_go = archiving._let_go

    def noted(db: sqlite3.Connection, end: int) -> None:
        ends.append(end)
        let_go(db, end)

    monkeypatch.setattr(archiving, "_PIECE", 3)
    monkeypatch.setattr(archiving, "_let_go", noted)
    assert roll(log, tmp_path / "old.sqlite", site).entries == 10
    assert ends == [6, 9, 10]
    assert len(rows_of(tmp_path / "old.sqlite")) == 10
    assert [row.seq for row in rows_of(log)] == [11, 12]


def test_nothing_is_lost_or_doubled_when_it_is_archived_under_its_writers(
    log: Path, site: Site, tmp_path: Path
) -> None:
    fill(log, *(sample(**OLD) for _ in range(20)))
    said = [tmp_path / f"said-{number}" for number in range(3)]
    writers = [writer(log, file, 60) for file in said]
    deadline = time.monotonic() + 60
    while not all(file.read_text() for file in said):
        assert time.monotonic() < deadline
        time.sleep(0.01)
    out = tmp_path / "old.sqlite"
    roll(log, out, site)
    for process in writers:
        assert process.communicate(timeout=60)[1] == ""
    promised = [uid for file in said for uid in file.read_text().split()]
    kept = [row.entry.uid.hex() for path in (out, log) for row in rows_of(path)]
    assert len(promised) == 180
    assert len(kept) == len(set(kept)) == 20 + 180 + 1
    assert set(promised) <= set(kept)
    with closing(SqliteStore(log)) as store:
        assert check_archive(store, out) is None


# Backups


def test_a_backup_is_whole_while_others_write(log: Path, tmp_path: Path) -> None:
    fill(log, sample())
    said = tmp_path / "said"
    process = writer(log, said, 150)
    deadline = time.monotonic() + 30
    while not said.read_text():
        assert time.monotonic() < deadline
        time.sleep(0.01)
    for number in range(5):
        out = tmp_path / f"copy-{number}"
        done = said.read_text().rpartition("\n")[0].split()
        found = back_up(log, out)
        kept = {row.entry.uid.hex() for row in rows_of(out)}
        assert set(done) <= kept
        assert found.entries == len(kept)
        assert stat.S_IMODE(out.stat().st_mode) == 0o600
    assert process.communicate(timeout=60)[1] == ""


def test_a_backup_takes_the_logs_place(log: Path, tmp_path: Path) -> None:
    before = fill(log, sample(), sample())
    back_up(log, tmp_path / "copy")
    log.unlink()
    shutil.copy(tmp_path / "copy", log)
    assert rows_of(log) == before
    with closing(open_store(log)) as store:
        assert store.append(sample(), {}).seq == 3


def test_where_there_is_no_log_there_is_no_backup(log: Path, tmp_path: Path) -> None:
    with pytest.raises(StoreError, match="there is no log"):
        back_up(log, tmp_path / "copy")
    assert list(tmp_path.iterdir()) == []
    fill(log, sample())
    with pytest.raises(InputError, match=r"there is no folder .*nowhere"):
        back_up(log, tmp_path / "nowhere" / "copy")


def test_an_archive_takes_no_new_entries_whoever_writes(
    log: Path, site: Site, tmp_path: Path
) -> None:
    fill(log, sample(**OLD), sample(**NEW))
    out = tmp_path / "old.sqlite"
    roll(log, out, site)
    out.chmod(0o600)
    copy = tmp_path / "copy.sqlite"
    back_up(out, copy)
    for path in (out, copy):
        with closing(open_store(path)) as store:
            for _ in range(2):
                with pytest.raises(StoreError, match="is an archive: it takes no new entries"):
                    store.append(sample(), TEXTS)
        assert [row.seq for row in rows_of(path)] == [1]
    fill(log, sample(**NEW))


def test_what_is_damaged_is_said_of_the_log_and_with_one_full_stop(
    log: Path, tmp_path: Path
) -> None:
    fill(log, *(sample() for _ in range(1, 200)))
    data = bytearray(log.read_bytes())
    page = int.from_bytes(data[16:18], "big")
    data[2 * page :] = bytes(len(data) - 2 * page)
    log.write_bytes(data)
    with pytest.raises((LogBrokenError, StoreError)) as caught:
        back_up(log, tmp_path / "copy.sqlite")
    said = str(caught.value)
    assert str(log) in said
    assert ".part" not in said
    assert said.endswith(".")
    assert not said.endswith("..")
