"""What stands of a log after amendments and withdrawals, as pure data and through a store."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from shiftlog_samples import NOON_US, TEXTS, sample

from tankcalc.errors import InputError
from tankcalc.shiftlog import (
    Corrections,
    Entry,
    Row,
    Store,
    open_store,
    standing_between,
    to_correct,
)
from tankcalc.shiftlog.kinds import AMENDMENT, KINDS, MOVEMENT, NOTE, SIGN_ON, WITHDRAWAL
from tankcalc.shiftlog.sqlite import LogFile
from tankcalc.shiftlog.standing import standing

MINUTE_US = 60_000_000


def rows_of(*entries: Entry) -> list[Row]:
    return [Row(n, entry, bytes([n]) * 32) for n, entry in enumerate(entries, 1)]


def about(original: Entry, kind: str, **facts: Any) -> Entry:
    return sample(kind=kind, ref=original.uid, reason="a slip of the pen", **facts)


def test_the_last_amendment_holds_and_the_original_stays() -> None:
    reading = sample()
    rows = rows_of(
        reading, about(reading, AMENDMENT, note="1"), about(reading, AMENDMENT, note="2")
    )
    (found,) = standing(rows)
    assert found.row == rows[0]
    assert (found.state, found.holds, found.entry) == ("amended", rows[2], rows[2].entry)
    assert str(found.mark) == "amended by entry 3"
    marks = Corrections(rows)
    assert [str(marks.mark(row)) for row in rows] == [
        "amended by entry 3",
        "amended by entry 3",
        "stands",
    ]


def test_a_withdrawal_is_final() -> None:
    reading = sample()
    rows = rows_of(reading, about(reading, WITHDRAWAL), about(reading, AMENDMENT))
    (found,) = standing(rows)
    assert (found.state, found.holds, found.entry) == ("withdrawn", None, None)
    assert str(found.mark) == "withdrawn by entry 2"
    marks = Corrections(rows)
    assert [marks.mark(row).state for row in rows] == ["withdrawn", "stands", "withdrawn"]


@pytest.mark.parametrize(
    ("kind", "correction", "state"),
    [
        (MOVEMENT, AMENDMENT, "amended"),
        (MOVEMENT, WITHDRAWAL, "withdrawn"),
        (NOTE, WITHDRAWAL, "withdrawn"),
        (NOTE, AMENDMENT, "stands"),
        (SIGN_ON, WITHDRAWAL, "stands"),
    ],
)
def test_only_what_can_be_corrected_is(kind: str, correction: str, state: str) -> None:
    original = sample(kind=kind)
    (found,) = standing(rows_of(original, about(original, correction)))
    assert found.state == state


def test_a_correction_of_something_out_of_sight_is_left_out() -> None:
    assert standing(rows_of(about(sample(), AMENDMENT))) == []


@given(st.lists(st.sampled_from([AMENDMENT, WITHDRAWAL]), max_size=6))
def test_what_holds_is_the_original_the_last_amendment_or_nothing(kinds: list[str]) -> None:
    reading = sample()
    rows = rows_of(reading, *(about(reading, kind) for kind in kinds))
    (found,) = standing(rows)
    if WITHDRAWAL in kinds:
        assert found.holds is None
    else:
        assert found.holds == rows[-1]
    assert [row.seq for row in found.corrections] == list(range(2, len(rows) + 1))


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    opened = open_store(tmp_path / "log.sqlite")
    yield opened
    opened.close()


def put(store: Store, *entries: Entry) -> None:
    store.append_many([(entry, TEXTS) for entry in entries])


def test_the_latest_reading_of_a_tank_is_the_one_that_stands(store: Store) -> None:
    first, second = sample(t_us=NOON_US), sample(t_us=NOON_US + MINUTE_US)
    put(store, first, second, sample(kind=NOTE, t_us=NOON_US + 9 * MINUTE_US))
    assert store.latest()["T-101"].entry == second
    amended = about(second, AMENDMENT, t_us=NOON_US + MINUTE_US, note="anew")
    put(store, amended)
    assert store.latest()["T-101"].entry == amended
    put(store, about(second, WITHDRAWAL, t_us=NOON_US + 5 * MINUTE_US, result=None))
    assert store.latest()["T-101"].entry == first
    put(store, about(first, WITHDRAWAL, result=None))
    assert store.latest() == {}


def test_an_amendment_can_put_a_reading_where_it_belongs_in_time(store: Store) -> None:
    first, second = sample(t_us=NOON_US), sample(t_us=NOON_US + 60 * MINUTE_US)
    put(store, first, second)
    moved = about(second, AMENDMENT, t_us=NOON_US - MINUTE_US)
    put(store, moved)
    assert store.latest()["T-101"].entry == first
    put(store, about(second, AMENDMENT, t_us=NOON_US + MINUTE_US, note="no, then"))
    assert store.latest()["T-101"].entry.note == "no, then"


def test_the_amendment_of_a_movement_is_no_reading(store: Store) -> None:
    reading, moved = sample(), sample(kind=MOVEMENT, t_us=NOON_US + MINUTE_US)
    put(store, reading, moved, about(moved, AMENDMENT, t_us=NOON_US + 2 * MINUTE_US))
    assert store.latest()["T-101"].entry == reading


def test_the_history_of_an_entry_is_found_from_any_part_of_it(store: Store) -> None:
    reading = sample()
    first, second = about(reading, AMENDMENT), about(reading, AMENDMENT)
    put(store, sample(), reading, sample(), first, second, about(reading, WITHDRAWAL))
    for entry in (reading, first, second):
        assert [row.seq for row in store.history(entry.uid)] == [2, 4, 5, 6]
    assert store.history(bytes(16)) == []


def test_a_window_of_time_holds_what_lies_in_it_now(store: Store) -> None:
    moved_in, moved_out = sample(t_us=NOON_US - MINUTE_US), sample(t_us=NOON_US + 2)
    gone, stays = sample(t_us=NOON_US + 3), sample(t_us=NOON_US + 4)
    moved = sample(kind=MOVEMENT, t_us=NOON_US + 5)
    put(store, moved_in, moved_out, gone, stays, moved)
    put(
        store,
        about(moved_in, AMENDMENT, t_us=NOON_US + 1),
        about(moved_out, AMENDMENT, t_us=NOON_US - 5),
        about(gone, WITHDRAWAL, t_us=NOON_US + 60 * MINUTE_US),
    )
    found = standing_between(store, NOON_US, NOON_US + MINUTE_US)
    assert [(one.row.entry.uid, one.state) for one in found] == [
        (moved_in.uid, "amended"),
        (gone.uid, "withdrawn"),
        (stays.uid, "stands"),
        (moved.uid, "stands"),
    ]
    readings = standing_between(store, NOON_US, None, tank="T-101", kind="reading")
    assert [one.row.entry.uid for one in readings] == [moved_in.uid, gone.uid, stays.uid]
    assert standing_between(store, None, None, tank="T-9") == []


def test_what_may_be_corrected_is_found_or_refused_in_words(store: Store) -> None:
    reading, words, sign = sample(), sample(kind=NOTE), sample(kind=SIGN_ON)
    amended = about(reading, AMENDMENT)
    put(store, reading, words, sign, amended)
    assert to_correct(store, amended.uid, AMENDMENT).row.entry == reading
    assert to_correct(store, words.uid, WITHDRAWAL).row.entry == words
    for uid, kind, says in (
        (words.uid, AMENDMENT, "entry 2 is a note, which cannot be amended"),
        (sign.uid, WITHDRAWAL, "entry 3 is a sign-on, which cannot be withdrawn"),
        (bytes(16), WITHDRAWAL, "holds no entry 00000000-"),
    ):
        with pytest.raises(InputError, match=says):
            to_correct(store, uid, kind)
    put(store, about(reading, WITHDRAWAL))
    with pytest.raises(InputError, match="entry 1 was withdrawn by entry 5 already"):
        to_correct(store, amended.uid, AMENDMENT)


def test_the_tail_by_kind_and_by_shift(store: Store) -> None:
    put(
        store,
        sample(note="0"),
        sample(note="1", kind=NOTE),
        sample(note="2", tank="T-2"),
        sample(note="3", shift="Night", shift_date="2026-11-30", t_us=NOON_US - 600 * MINUTE_US),
        sample(note='4 "shift":"Day","shift_date":"2026-11-30","site":', shift="Night"),
        sample(note="5", shift='D"ay\x1b', kind=NOTE),
    )

    def notes(n: int = 500, **only: Any) -> list[str]:
        return [row.entry.note[0] for row in store.tail(n, **only)]

    assert notes(kind=NOTE) == ["1", "5"]
    assert notes(1, kind="reading", tank="T-101") == ["4"]
    assert notes(shift=("2026-12-01", "Day")) == ["0", "1", "2"]
    assert notes(2, shift=("2026-12-01", "Day")) == ["1", "2"]
    assert notes(2, shift=("2026-12-01", "Day"), before=3) == ["0", "1"]
    assert notes(shift=("2026-12-01", "Day"), tank="T-2", kind="reading") == ["2"]
    assert notes(shift=("2026-11-30", "Night")) == ["3"]
    assert notes(shift=("2026-11-30", "Day")) == []
    assert notes(shift=("2026-12-01", 'D"ay\x1b')) == ["5"]
    with pytest.raises(InputError, match="no date"):
        store.tail(shift=("1 December", "Day"))


def test_counts_and_windows_by_kind(store: Store) -> None:
    assert store.count() == 0
    put(store, sample(), sample(kind=NOTE), sample(tank="T-2", t_us=NOON_US + MINUTE_US))
    assert (store.count(), store.count(kind=NOTE), store.count(tank="T-101")) == (3, 1, 2)
    assert store.count(tank="T-2", kind=NOTE) == 0
    assert [row.seq for row in store.between(None, None, kind="reading")] == [1, 3]
    assert [row.seq for row in store.between(NOON_US, NOON_US + 1, kind="reading")] == [1]


def test_many_entries_are_one_transaction(store: Store) -> None:
    entries = [sample(note=str(n)) for n in range(5)]
    bad = sample(ref=bytes(16), kind=WITHDRAWAL)
    with pytest.raises(Exception, match="did not take the entry"):
        store.append_many([*((entry, TEXTS) for entry in entries), (bad, TEXTS)])
    assert store.tail() == []
    first = store.append(entries[2], TEXTS)
    receipts = store.append_many((entry, TEXTS) for entry in entries)
    assert [receipt.seq for receipt in receipts] == [2, 3, 1, 4, 5]
    assert receipts[2] == first
    assert store.append_many([]) == []
    assert store.verify().whole


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_is_taken(store: Store, kind: str) -> None:
    put(store, sample(kind=kind))
    assert store.tail(kind=kind)[0].entry.kind == kind
    assert store.verify().whole


def test_no_page_and_no_latest_reading_reads_the_whole_log(
    store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    """What takes milliseconds in a log of ten million entries goes through an index."""
    reading = sample()
    put(store, reading, about(reading, AMENDMENT))
    asked: list[tuple[str, tuple[Any, ...]]] = []
    select = LogFile.select

    def listening(self: LogFile, sql: str, values: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
        asked.append((sql, values))
        return select(self, sql, values)

    monkeypatch.setattr(LogFile, "select", listening)
    store.tail(tank="T-101")
    store.tail(kind=NOTE, before=9)
    store.tail(tank="T-101", kind=NOTE)
    store.tail(tank="T-101", kind=NOTE, shift=("2026-12-01", "Day"))
    store.latest()
    store.history(reading.uid)
    list(store.between(None, None, tank="T-101", kind=AMENDMENT))
    monkeypatch.undo()
    assert len(asked) >= 8
    db = sqlite3.connect(store.where)
    for sql, values in asked:
        plan = [row[3] for row in db.execute(f"EXPLAIN QUERY PLAN {sql}", values)]
        assert plan
        walks = [step for step in plan if step.startswith("SCAN entry")]
        assert not walks, sql
    db.close()
