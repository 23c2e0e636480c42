"""What must hold of a log whatever it is kept in: nothing lost, nothing doubled, nothing hidden."""

from __future__ import annotations

import random
import sqlite3
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest
from postgres_server import running
from shiftlog_samples import NOON_US, TEXTS, VERSIONS, sample, writer

from tankcalc.errors import StoreCorruptError, StoreError
from tankcalc.shiftlog import Entry, Store, open_store
from tankcalc.shiftlog.entry import canonical

MINUTE_US = 60_000_000
ROUNDS = 10  # for each of the two stores
WRITERS = 4


@dataclass
class Place:
    """An empty log of one kind, and the way past its guards."""

    address: str
    tamper: Callable[..., None]
    opened: list[Store] = field(default_factory=list)

    def open(self) -> Store:
        self.opened.append(open_store(self.address))
        return self.opened[-1]


def tamper_sqlite(path: str, *statements: str) -> None:
    """Change a file behind the program's back, its guards taken off and put on again."""
    db = sqlite3.connect(path, isolation_level=None)
    guards = db.execute("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'").fetchall()
    for name, _ in guards:
        db.execute(f"DROP TRIGGER {name}")
    changed = sum(db.execute(statement).rowcount for statement in statements)
    for _, sql in guards:
        db.execute(sql)
    db.close()
    assert changed >= len(statements)


def tamper_postgres(address: str, *statements: str) -> None:
    """Change a database as its superuser may, its guards switched off and on again."""
    import psycopg

    with psycopg.connect(address, autocommit=True) as db:
        db.execute("SET search_path = tankcalc")
        db.execute("SET session_replication_role = replica")  # no foreign keys either
        guards = db.execute(
            "SELECT tgrelid::regclass::text, tgname FROM pg_trigger"
            " WHERE NOT tgisinternal AND tgrelid::regclass::text IN ('entry', 'head', 'config')"
        ).fetchall()
        for table, name in guards:
            db.execute(f"ALTER TABLE {table} DISABLE TRIGGER {name}".encode())
        changed = sum(db.execute(statement.encode()).rowcount for statement in statements)
        for table, name in guards:
            db.execute(f"ALTER TABLE {table} ENABLE ALWAYS TRIGGER {name}".encode())
    assert changed >= len(statements)


@pytest.fixture(params=["sqlite", "postgresql"])
def place(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Place]:
    if request.param == "sqlite":
        address, change = str(tmp_path / "log.sqlite"), tamper_sqlite
    else:
        address, change = running().new_database(), tamper_postgres
    made = Place(address, lambda *statements: change(address, *statements))
    yield made
    for store in made.opened:
        store.close()


def filled(place: Place) -> Store:
    """A log of six readings, the third with a reference to the first."""
    store = place.open()
    first = sample(note="0")
    notes = (sample(note=str(number)) for number in range(3, 6))
    about = sample(note="2", kind="amendment", ref=first.uid, reason="about the first")
    for entry in (first, sample(note="1"), about, *notes):
        store.append(entry, TEXTS)
    assert store.verify().whole
    return store


def amendment(original: Entry, **changes: Any) -> Entry:
    facts = {"kind": "amendment", "ref": original.uid, "reason": "a slip of the pen"}
    return sample(**facts | {"t_us": original.t_us, "tank": original.tank} | changes)


def withdrawal(original: Entry, **changes: Any) -> Entry:
    facts = {"kind": "withdrawal", "ref": original.uid, "reason": "wrong tank", "result": None}
    return sample(**facts | {"t_us": original.t_us, "tank": original.tank} | changes)


# The protocol


def test_the_same_entry_again_has_the_same_receipt_whoever_sends_it(place: Place) -> None:
    entry = sample()
    first = place.open().append(entry, TEXTS)
    other = place.open()
    other.append(sample(), TEXTS)
    assert other.append(entry, {}) == first
    with pytest.raises(StoreError, match="other content"):
        other.append(sample(uid=entry.uid, note="changed"), TEXTS)
    assert (other.count(), other.verify().whole) == (2, True)


def test_many_at_once_are_all_there_or_none(place: Place) -> None:
    store = place.open()
    entries = [sample(note=str(number)) for number in range(5)]
    receipts = store.append_many((entry, TEXTS) for entry in entries)
    assert [receipt.seq for receipt in receipts] == [1, 2, 3, 4, 5]
    assert [row.entry for row in store.tail()] == entries
    bad = sample(uid=entries[0].uid, note="other content")
    with pytest.raises(StoreError, match="other content"):
        store.append_many([(sample(), TEXTS), (bad, TEXTS)])
    assert store.count() == 5
    again = store.append_many([(entries[3], TEXTS), (sample(note="new"), TEXTS)])
    assert [receipt.seq for receipt in again] == [4, 6]
    assert store.append_many([]) == []
    assert store.verify().whole


def test_the_tail_by_tank_kind_and_shift_goes_back_page_by_page(place: Place) -> None:
    store = place.open()
    for number in range(9):
        day = number % 2 == 0
        store.append(
            sample(
                note=str(number),
                tank=f"T-{number % 3}",
                kind="reading" if number < 6 else "note",
                shift="Day" if day else "Night",
                t_us=NOON_US + number * MINUTE_US,
            ),
            TEXTS,
        )

    def notes(**terms: Any) -> str:
        return "".join(row.entry.note for row in store.tail(**terms))

    assert notes(n=3) == "678"
    assert notes(n=3, before=store.tail(3)[0].seq) == "345"
    assert notes(tank="T-1") == "147"
    assert notes(tank="T-1", kind="reading") == "14"
    assert notes(kind="note", n=2) == "78"
    assert notes(shift=("2026-12-01", "Night")) == "1357"
    assert notes(shift=("2026-12-01", "Night"), tank="T-1", n=1) == "7"
    assert notes(shift=("2026-11-30", "Night")) == ""
    assert store.count() == 9
    assert store.count(tank="T-1") == 3
    assert store.count(tank="T-1", kind="note") == 1
    assert notes(tank="T-9") == ""


def test_between_is_half_open_in_the_order_of_the_log_and_by_kind(place: Place) -> None:
    store = place.open()
    for minute in (3, 1, 5, 2, 4):
        kind = "note" if minute == 2 else "reading"
        store.append(sample(t_us=NOON_US + minute * MINUTE_US, kind=kind), TEXTS)

    def minutes(start: int, end: int, **terms: str) -> list[int]:
        rows = store.between(NOON_US + start * MINUTE_US, NOON_US + end * MINUTE_US, **terms)
        return [(row.entry.t_us - NOON_US) // MINUTE_US for row in rows]

    assert minutes(2, 5) == [3, 2, 4]
    assert minutes(2, 5, kind="reading") == [3, 4]
    assert minutes(0, 9, tank="T-9") == []
    assert len(list(store.between(None, None))) == 5


def test_the_latest_reading_is_as_it_stands_now(place: Place) -> None:
    store = place.open()
    old = sample(tank="A", t_us=NOON_US)
    new = sample(tank="A", t_us=NOON_US + 1)
    other = sample(tank="B", t_us=NOON_US)
    nothing = sample(tank="C", kind="note", result=None)
    for entry in (old, new, other, nothing):
        store.append(entry, TEXTS)

    def latest() -> dict[str, bytes]:
        return {tank: row.entry.uid for tank, row in store.latest().items()}

    assert latest() == {"A": new.uid, "B": other.uid}
    first, second = amendment(new, note="1"), amendment(new, note="2")
    store.append(first, TEXTS)
    store.append(second, TEXTS)
    assert latest() == {"A": second.uid, "B": other.uid}
    store.append(withdrawal(new), TEXTS)
    assert latest() == {"A": old.uid, "B": other.uid}
    earlier = amendment(other, t_us=NOON_US - 5)
    store.append(earlier, TEXTS)
    assert latest()["B"] == earlier.uid
    store.append(withdrawal(old), TEXTS)
    assert latest() == {"B": earlier.uid}


def test_the_history_of_an_entry_is_found_from_any_of_its_parts(place: Place) -> None:
    store = place.open()
    original, stranger = sample(), sample()
    corrections = [amendment(original), amendment(original), withdrawal(original)]
    for entry in (original, stranger, *corrections):
        store.append(entry, TEXTS)
    expected = [original.uid, *(entry.uid for entry in corrections)]
    for entry in (original, *corrections):
        assert [row.entry.uid for row in store.history(entry.uid)] == expected
    assert [row.entry for row in store.history(stranger.uid)] == [stranger]
    assert store.history(bytes(16)) == []


def test_a_correction_of_nothing_is_refused(place: Place) -> None:
    store = place.open()
    with pytest.raises(StoreError, match="did not take"):
        store.append(amendment(sample()), TEXTS)
    assert store.count() == 0


def test_the_texts_an_entry_rests_on_are_kept_once(place: Place) -> None:
    store = place.open()
    with pytest.raises(StoreError, match="was not given"):
        store.append(sample(), {})
    store.append(sample(), TEXTS)
    store.append(sample(), {})
    for version, text in TEXTS.items():
        assert place.open().get_config(version) == text
    with pytest.raises(ValueError, match="not that of version"):
        store.append(sample(), {VERSIONS["tank"]: b"another text"})
    with pytest.raises(KeyError):
        store.get_config("00" * 32)


# What somebody with a database tool can do


@pytest.mark.parametrize(
    ("statement", "seq"),
    [
        ("UPDATE entry SET body = replace(body, '85.3 kPa', '85.4 kPa') WHERE seq = 3", 3),
        ("UPDATE entry SET kind = 'note' WHERE seq = 2", 2),
        ("UPDATE entry SET t_us = t_us + 1 WHERE seq = 4", 4),
        ("UPDATE entry SET tank = NULL WHERE seq = 4", 4),
        ("UPDATE entry SET ref = NULL WHERE seq = 3", 3),
        ("UPDATE entry SET prev = (SELECT hash FROM entry WHERE seq = 6) WHERE seq = 5", 5),
        ("UPDATE entry SET hash = (SELECT hash FROM entry WHERE seq = 1) WHERE seq = 5", 5),
        ("DELETE FROM entry WHERE seq = 2", 3),
        ("DELETE FROM entry WHERE seq = 1", 2),
        ("DELETE FROM entry WHERE seq = 6", None),
    ],
)
def test_a_change_in_the_tables_is_found(place: Place, statement: str, seq: int | None) -> None:
    store = filled(place)
    place.tamper(statement)
    result = store.verify()
    assert result.flaw is not None
    assert result.flaw.seq == seq


def test_one_changed_character_anywhere_in_an_entry_is_found(place: Place) -> None:
    store = filled(place)
    body = canonical(store.tail()[3].entry).decode()
    places = random.Random(3)
    for spot in (0, len(body) - 1, *(places.randrange(len(body)) for _ in range(18))):
        other = "x" if body[spot] != "x" else "y"
        changed = body[:spot] + other + body[spot + 1 :]
        for text in (changed, body):
            quoted = text.replace("'", "''")
            place.tamper(f"UPDATE entry SET body = '{quoted}' WHERE seq = 4")
            result = store.verify()
            assert (result.flaw and result.flaw.seq) == (4 if text is changed else None)


def test_swapped_entries_are_found(place: Place) -> None:
    store = filled(place)
    place.tamper(
        "UPDATE entry SET seq = 99 WHERE seq = 4",
        "UPDATE entry SET seq = 4 WHERE seq = 5",
        "UPDATE entry SET seq = 5 WHERE seq = 99",
    )
    result = store.verify()
    assert result.flaw is not None
    assert result.flaw.seq == 4


def test_a_changed_text_is_found_and_not_given_out(place: Place) -> None:
    store = filled(place)
    version = VERSIONS["fluid"]
    is_file = place.address.endswith("sqlite")
    literal = f"x'{version}'" if is_file else f"decode('{version}', 'hex')"
    place.tamper(f"UPDATE config SET body = hash WHERE hash = {literal}")
    result = store.verify()
    assert result.flaw is not None
    assert "the text of its fluid" in result.flaw.why
    with pytest.raises(StoreCorruptError, match="was changed"):
        store.get_config(version)


def test_a_tail_cut_off_is_found_by_a_head_that_was_printed_before(place: Place) -> None:
    store = filled(place)
    seq, digest = store.head()
    assert store.verify((seq, digest.hex()[:16])).whole
    assert not store.verify((seq, "0" * 16)).whole
    result = store.verify((seq + 1, "0" * 16))
    assert result.flaw is not None
    assert "are missing" in result.flaw.why


# Several writers, and what is left when they are killed


def acknowledged(said: Path) -> list[str]:
    """What a writer said completely: what follows the last line break was cut off."""
    return said.read_text().rpartition("\n")[0].split()


def test_no_acknowledged_entry_is_lost_or_doubled_when_four_writers_are_killed(
    place: Place, tmp_path: Path
) -> None:
    moments = random.Random(11)
    promised: list[str] = []
    for turn in range(ROUNDS):
        said = [tmp_path / f"{turn}-{number}" for number in range(WRITERS)]
        writers = [writer(place.address, file) for file in said]  # type: ignore[arg-type]
        deadline = time.monotonic() + 60
        while not all(acknowledged(file) for file in said):
            assert time.monotonic() < deadline
            time.sleep(0.01)
        time.sleep(moments.uniform(0.0, 0.1))
        for process in writers:
            process.kill()
        for process in writers:
            assert process.communicate()[1] == ""
        promised += [uid for file in said for uid in acknowledged(file)]
    store = place.open()
    result = store.verify()
    assert result.flaw is None
    kept = [row.entry.uid.hex() for row in store.between(None, None)]
    assert len(kept) == len(set(kept)) == result.entries == store.count()
    assert len(promised) >= ROUNDS * WRITERS
    assert set(promised) <= set(kept)
    assert store.append(sample(), TEXTS).seq == result.entries + 1
