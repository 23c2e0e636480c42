"""The log's file: private, local, one of ours; and what happens when the disk says no."""

from __future__ import annotations

import errno
import os
import shutil
import sqlite3
import stat
import tempfile
import threading
from collections.abc import Iterator
from pathlib import Path

import pytest
from shiftlog_samples import TEXTS, sample

from tankcalc.errors import (
    StoreCorruptError,
    StoreError,
    StoreFullError,
    StoreReadOnlyError,
    StoreUnavailableError,
)
from tankcalc.shiftlog import Entry, open_store, schema
from tankcalc.shiftlog.faults import from_os, from_sqlite
from tankcalc.shiftlog.files import file_system, refuse_network
from tankcalc.shiftlog.sqlite import LogFile
from tankcalc.shiftlog.sqlite_store import SqliteStore

NOBODY = 65534


@pytest.fixture
def common_folder() -> Iterator[Path]:
    """A folder of an ordinary user, whom the test then is: permissions do not hold root."""
    folder = Path(tempfile.mkdtemp())
    is_root = os.geteuid() == 0
    if is_root:
        os.chown(folder, NOBODY, NOBODY)
        os.setegid(NOBODY)
        os.seteuid(NOBODY)
    yield folder
    if is_root:
        os.seteuid(0)
        os.setegid(0)
    folder.chmod(0o700)
    shutil.rmtree(folder)


def test_the_folder_and_the_file_are_private(tmp_path: Path) -> None:
    path = tmp_path / "new" / "log.sqlite"
    old = os.umask(0)
    try:
        store = open_store(path)
        store.append(sample(), TEXTS)
        store.close()
    finally:
        os.umask(old)
    assert stat.S_IMODE(path.parent.stat().st_mode) == 0o700
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    assert sorted(p.name for p in path.parent.iterdir()) == ["log.sqlite"]


def test_permissions_that_somebody_chose_are_left_alone(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    path.touch()
    path.chmod(0o660)
    store = open_store(path)
    store.append(sample(), TEXTS)
    store.close()
    assert stat.S_IMODE(path.stat().st_mode) == 0o660


def test_reading_makes_nothing(tmp_path: Path) -> None:
    path = tmp_path / "new" / "log.sqlite"
    store = open_store(path)
    assert store.tail() == []
    assert store.head()[0] == 0
    with pytest.raises(StoreUnavailableError, match="no log"):
        store.verify()
    assert not path.parent.exists()


def test_the_settings_that_make_saved_mean_saved(tmp_path: Path) -> None:
    file = LogFile(tmp_path / "log.sqlite", 10.0)
    with file.writing() as db:
        settings = {
            name: db.execute(f"PRAGMA {name}").fetchone()[0]
            for name in (
                "journal_mode",
                "synchronous",
                "recursive_triggers",
                "foreign_keys",
                "busy_timeout",
                "application_id",
                "user_version",
            )
        }
        assert db.in_transaction
    assert settings == {
        "journal_mode": "delete",
        "synchronous": 3,  # EXTRA
        "recursive_triggers": 1,
        "foreign_keys": 1,
        "busy_timeout": 10_000,
        "application_id": schema.APPLICATION_ID,
        "user_version": len(schema.STEPS),
    }
    file.close()


def _until_full(store: SqliteStore) -> tuple[Entry, int]:
    """Append until the store says no; return the entry it did not take, and how many it holds."""
    for saved in range(1, 10_000):
        entry = sample()
        try:
            store.append(entry, TEXTS)
        except StoreFullError:
            return entry, saved
    raise AssertionError("it never filled")


def test_a_full_log_takes_nothing_and_loses_nothing(tmp_path: Path) -> None:
    store = SqliteStore(tmp_path / "log.sqlite")
    store.append(sample(), TEXTS)
    limit = store._file.select("PRAGMA page_count")[0][0] + 2
    store._file.select(f"PRAGMA max_page_count={limit}")
    entry, saved = _until_full(store)
    assert saved > 1
    assert [row.seq for row in store.tail()] == list(range(1, saved + 1))
    assert store.verify().whole
    with pytest.raises(StoreFullError, match=r"no space left .* save again"):
        store.append(entry, TEXTS)
    store._file.select("PRAGMA max_page_count=1000000")
    assert store.append(entry, TEXTS).seq == saved + 1
    store.close()


def test_a_full_disk_is_told_when_the_file_is_made(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*_: object) -> int:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    store = open_store(tmp_path / "log.sqlite")
    with monkeypatch.context() as patch:
        patch.setattr(os, "open", full)
        with pytest.raises(StoreFullError, match="no space left"):
            store.append(sample(), TEXTS)
    assert store.append(sample(), TEXTS).seq == 1
    store.close()


def test_a_read_only_log_lists_and_verifies_but_takes_nothing(common_folder: Path) -> None:
    path = common_folder / "log.sqlite"
    store = open_store(path)
    entry = sample()
    store.append(entry, TEXTS)
    store.close()
    path.chmod(0o444)
    common_folder.chmod(0o555)
    store = open_store(path)
    assert [row.entry for row in store.tail()] == [entry]
    assert store.verify().whole
    with pytest.raises(StoreReadOnlyError, match="read-only"):
        store.append(sample(), TEXTS)
    assert len(store.tail()) == 1
    store.close()


def test_a_read_only_folder_takes_no_entry(common_folder: Path) -> None:
    path = common_folder / "log.sqlite"
    store = open_store(path)
    store.append(sample(), TEXTS)
    common_folder.chmod(0o555)
    with pytest.raises(StoreError, match=str(path)):
        store.append(sample(), TEXTS)
    assert len(store.tail()) == 1
    common_folder.chmod(0o755)
    store.append(sample(), TEXTS)
    store.close()


def test_a_log_cannot_be_made_where_nothing_may_be_written(common_folder: Path) -> None:
    common_folder.chmod(0o555)
    for path in (common_folder / "log.sqlite", common_folder / "deeper" / "log.sqlite"):
        with pytest.raises(StoreReadOnlyError, match="cannot be written"):
            open_store(path).append(sample(), TEXTS)


def test_a_log_nobody_may_read_is_told(common_folder: Path) -> None:
    path = common_folder / "log.sqlite"
    store = open_store(path)
    store.append(sample(), TEXTS)
    store.close()
    path.chmod(0)
    with pytest.raises(StoreUnavailableError, match="cannot be reached"):
        open_store(path).tail()
    common_folder.chmod(0)
    with pytest.raises(StoreReadOnlyError, match="Permission denied"):
        open_store(path).tail()


def test_a_path_that_leads_nowhere_is_told(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("not a folder")
    (tmp_path / "folder").mkdir()
    for path in (
        tmp_path / "file" / "log.sqlite",
        tmp_path / "file" / "deeper" / "log.sqlite",
        tmp_path / "folder",
        tmp_path / ("n" * 300),
    ):
        store = open_store(path)
        with pytest.raises(StoreUnavailableError, match="cannot be reached") as caught:
            store.append(sample(), TEXTS)
        assert str(caught.value).isprintable()


@pytest.mark.parametrize("content", [b"# notes\n" * 100, b"SQLite format 3\0", b"\0" * 4096])
def test_a_file_of_another_kind_is_refused_and_left_as_it_is(
    tmp_path: Path, content: bytes
) -> None:
    path = tmp_path / "notes.txt"
    path.write_bytes(content)
    store = open_store(path)
    for call in (lambda: store.append(sample(), TEXTS), store.tail, store.head):
        with pytest.raises(StoreCorruptError):
            call()
    assert not store.verify().whole
    assert path.read_bytes() == content


def test_a_database_of_another_program_is_refused_and_left_as_it_is(tmp_path: Path) -> None:
    path = tmp_path / "other.sqlite"
    db = sqlite3.connect(path)
    db.execute("CREATE TABLE entry(seq, body)")
    db.close()
    before = path.read_bytes()
    store = open_store(path)
    for call in (lambda: store.append(sample(), TEXTS), store.tail):
        with pytest.raises(StoreCorruptError, match="no log of this program"):
            call()
    assert path.read_bytes() == before


def test_a_log_of_a_newer_version_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    store = open_store(path)
    store.append(sample(), TEXTS)
    store.close()
    db = sqlite3.connect(path)
    db.execute(f"PRAGMA user_version={len(schema.STEPS) + 1}")
    db.close()
    store = open_store(path)
    for call in (lambda: store.append(sample(), TEXTS), store.tail, store.verify):
        with pytest.raises(StoreUnavailableError, match="newer version"):
            call()


def test_a_log_takes_the_schema_steps_it_lacks(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "log.sqlite"
    store = open_store(path)
    store.append(sample(), TEXTS)
    store.close()
    further = ("INSERT INTO kind(name) VALUES ('rumour')",)
    monkeypatch.setattr(schema, "STEPS", (*schema.STEPS, further))
    store = open_store(path)
    assert len(store.tail()) == 1
    store.append(sample(kind="rumour"), TEXTS)
    assert store.verify().whole
    store.close()


def test_an_older_sqlite_gets_the_same_tables_without_strict() -> None:
    db = sqlite3.connect(":memory:")
    for statement in schema.statements(0, strict=False):
        assert "STRICT" not in statement
        db.execute(statement)
    names = {name for (name,) in db.execute("SELECT name FROM sqlite_master WHERE type = 'table'")}
    assert {"entry", "config", "kind"} <= names
    db.close()


def test_a_log_that_was_deleted_while_open_is_an_error_not_a_new_log(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    store = open_store(path)
    store.append(sample(), TEXTS)
    aside = path.rename(tmp_path / "aside")
    for _ in range(2):
        with pytest.raises(StoreUnavailableError):
            store.append(sample(), TEXTS)
        assert not path.exists()
    aside.rename(path)
    assert store.append(sample(), TEXTS).seq == 2
    store.close()


def test_a_file_put_in_the_place_of_the_log_is_looked_at_anew(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    store = open_store(path)
    store.append(sample(), TEXTS)
    path.rename(tmp_path / "aside")
    path.write_text("my notes\n" * 100)
    with pytest.raises(StoreUnavailableError, match="moved or deleted"):
        store.append(sample(), TEXTS)
    with pytest.raises(StoreCorruptError, match="is no log"):
        store.append(sample(), TEXTS)
    assert path.read_text() == "my notes\n" * 100
    store.close()


def test_a_log_whose_journal_somebody_switched_is_switched_back(tmp_path: Path) -> None:
    path = tmp_path / "log.sqlite"
    store = open_store(path)
    store.append(sample(), TEXTS)
    store.close()
    db = sqlite3.connect(path)
    assert db.execute("PRAGMA journal_mode=WAL").fetchone()[0] == "wal"
    db.close()
    store = open_store(path)
    store.append(sample(), TEXTS)
    store.close()
    assert path.read_bytes()[18:20] == b"\1\1"  # file format: rollback journal


def test_a_store_may_be_used_from_several_threads(tmp_path: Path) -> None:
    store = open_store(tmp_path / "log.sqlite")
    threads = [
        threading.Thread(target=lambda: [store.append(sample(), TEXTS) for _ in range(10)])
        for _ in range(3)
    ]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    result = store.verify()
    assert (result.flaw, result.entries) == (None, 30)
    store.close()


def test_many_pages_are_read_in_order(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tankcalc.shiftlog.sqlite_store._PAGE", 3)
    monkeypatch.setattr("tankcalc.shiftlog.audit._PAGE", 3)
    store = open_store(tmp_path / "log.sqlite")
    for count in range(1, 8):
        store.append(sample(), TEXTS)
        assert [row.seq for row in store.between(None, None)] == list(range(1, count + 1))
        assert store.verify().entries == count
    store.close()


MOUNTS = """\
/dev/vda / ext4 rw 0 0
server:/export /mnt/share nfs4 rw 0 0
//server/x /mnt/my\\040share cifs rw 0 0
tmpfs /mnt/share/local tmpfs rw 0 0
sshfs /home/op/far fuse.sshfs rw 0 0
/dev/sdb1 /home/op/disk fuseblk rw 0 0
x /over 9p rw 0 0
y /over ext4 rw 0 0
short line
"""


@pytest.mark.parametrize(
    ("path", "kind", "refused"),
    [
        ("/var/log/x.sqlite", "ext4", False),
        ("/mnt/share/x.sqlite", "nfs4", True),
        ("/mnt/share/a/b/../c/x.sqlite", "nfs4", True),
        ("/mnt/shared/x.sqlite", "ext4", False),
        ("/mnt/my share/x.sqlite", "cifs", True),
        ("/mnt/share/local/x.sqlite", "tmpfs", False),
        ("/home/op/far/x.sqlite", "fuse.sshfs", True),
        ("/home/op/disk/x.sqlite", "fuseblk", False),
        ("/over/x.sqlite", "ext4", False),
    ],
)
def test_a_network_file_system_is_refused_by_name(
    tmp_path: Path, path: str, kind: str, refused: bool
) -> None:
    mounts = tmp_path / "mounts"
    mounts.write_text(MOUNTS)
    assert file_system(Path(path), mounts) == kind
    if refused:
        with pytest.raises(StoreUnavailableError, match=rf"network file system \({kind}\)"):
            refuse_network(Path(path), mounts)
    else:
        refuse_network(Path(path), mounts)


def test_a_share_is_seen_through_a_link(tmp_path: Path) -> None:
    share = tmp_path / "share"
    share.mkdir()
    (tmp_path / "link").symlink_to(share)
    mounts = tmp_path / "mounts"
    mounts.write_text(f"/dev/vda / ext4 rw 0 0\nserver:/ {share} nfs rw 0 0\n")
    assert file_system(tmp_path / "link" / "log.sqlite", mounts) == "nfs"


def test_where_the_system_names_no_mounts_nothing_is_refused(tmp_path: Path) -> None:
    assert file_system(tmp_path, tmp_path / "none") == ""
    refuse_network(tmp_path, tmp_path / "none")


def test_a_share_is_refused_by_every_call(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "log.sqlite"
    monkeypatch.setattr("tankcalc.shiftlog.files.file_system", lambda *_: "nfs4")
    store = open_store(path)
    with pytest.raises(StoreUnavailableError, match="network file system"):
        store.append(sample(), TEXTS)
    assert not path.exists()
    path.touch()
    with pytest.raises(StoreUnavailableError, match="network file system"):
        store.tail()


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("SQLITE_FULL", StoreFullError),
        ("SQLITE_READONLY_DIRECTORY", StoreReadOnlyError),
        ("SQLITE_READONLY_ROLLBACK", StoreReadOnlyError),
        ("SQLITE_READONLY_DBMOVED", StoreUnavailableError),
        ("SQLITE_IOERR_FSYNC", StoreUnavailableError),
        ("SQLITE_CANTOPEN", StoreUnavailableError),
        ("SQLITE_CORRUPT_INDEX", StoreCorruptError),
        ("SQLITE_NOTADB", StoreCorruptError),
        ("SQLITE_TOOBIG", StoreError),
    ],
)
def test_every_result_of_sqlite_has_words(name: str, expected: type[StoreError]) -> None:
    error = from_sqlite(name, "what it said", "/a/log.sqlite")
    assert type(error) is expected
    assert "/a/log.sqlite" in str(error)


@pytest.mark.parametrize(
    ("number", "expected"),
    [
        (errno.EDQUOT, StoreFullError),
        (errno.EROFS, StoreReadOnlyError),
        (errno.EIO, StoreUnavailableError),
    ],
)
def test_every_error_of_the_system_has_words(number: int, expected: type[StoreError]) -> None:
    error = from_os(OSError(number, os.strerror(number)), "/a/log.sqlite")
    assert type(error) is expected
    assert "/a/log.sqlite" in str(error)
