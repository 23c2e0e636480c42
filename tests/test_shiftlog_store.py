"""What every store promises: the same tests for each kind of store."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import closing
from hashlib import sha256
from pathlib import Path

import pytest
from postgres_server import running
from shiftlog_samples import NOON_US, TEXTS, VERSIONS, sample

from tankcalc.errors import StoreError, StoreUnavailableError
from tankcalc.shiftlog import Store, open_store

MINUTE_US = 60_000_000
HOSTILE = (
    "\x1b[31mred\x1b[0m \x00 \x07 \r\n\t",
    '[bold]markup[/] <script>alert(1)</script> =HYPERLINK("http://x")',
    "'; DROP TABLE entry; --",
    "‮right to left‬ \u200b \ufeff \U000e0041",
    "\udc80 a byte that was no UTF-8",
    "0x1.8p+0",
    '{"float": "0x1.8p+0"}',
    "漢字 é e\u0301 ﷺ",
)

Opener = Callable[[], Store]


@pytest.fixture(params=["sqlite", "postgresql"])
def opener(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Opener]:
    is_file = request.param == "sqlite"
    address = str(tmp_path / "folder" / "log.sqlite") if is_file else running().new_database()
    opened: list[Store] = []

    def one_more() -> Store:
        opened.append(open_store(address))
        return opened[-1]

    yield one_more
    for store in opened:
        store.close()


@pytest.fixture
def store(opener: Opener) -> Store:
    return opener()


def test_a_log_that_does_not_exist_reads_as_empty(store: Store) -> None:
    assert store.head() == (0, bytes(32))
    assert store.tail() == []
    assert list(store.between(None, None)) == []
    assert store.latest() == {}
    with pytest.raises(KeyError):
        store.get_config(VERSIONS["site"])


def test_there_is_nothing_to_verify_where_there_is_no_log(store: Store) -> None:
    with pytest.raises(StoreUnavailableError, match="no log"):
        store.verify()
    with pytest.raises(StoreUnavailableError, match="no log"):
        store.verify()


def test_an_entry_comes_back_as_it_was_given(opener: Opener) -> None:
    entry = sample()
    receipt = opener().append(entry, TEXTS)
    (row,) = opener().tail()
    assert row.entry == entry
    assert (row.seq, row.hash) == (receipt.seq, receipt.hash)
    assert receipt.uid == entry.uid


@pytest.mark.parametrize("text", HOSTILE)
def test_hostile_text_is_kept_exactly(store: Store, text: str) -> None:
    entry = sample(note=text, who=text, tank=text, shift=text, typed={"p1": text}, reason=text)
    store.append(entry, TEXTS)
    assert store.tail()[0].entry == entry
    assert [row.entry.tank for row in store.tail(tank=text)] == [text]
    assert set(store.latest()) == {text}
    assert store.verify().whole


def test_the_same_entry_again_gets_the_same_receipt(opener: Opener) -> None:
    entry = sample()
    first = opener().append(entry, TEXTS)
    opener().append(sample(), TEXTS)
    assert opener().append(entry, {}) == first
    assert len(opener().tail()) == 2


def test_the_same_identifier_with_other_content_is_refused(store: Store) -> None:
    entry = sample()
    store.append(entry, TEXTS)
    with pytest.raises(StoreError, match="other content"):
        store.append(sample(uid=entry.uid, note="changed"), TEXTS)
    assert [row.entry for row in store.tail()] == [entry]


def test_each_entry_is_chained_to_the_one_before(store: Store) -> None:
    receipts = [store.append(sample(), TEXTS) for _ in range(3)]
    assert [receipt.seq for receipt in receipts] == [1, 2, 3]
    assert store.head() == (3, receipts[2].hash)
    assert len({receipt.hash for receipt in receipts}) == 3
    result = store.verify()
    assert (result.whole, result.entries, result.head) == (True, 3, store.head())


def test_the_tail_is_read_page_by_page(store: Store) -> None:
    for number in range(7):
        store.append(sample(note=str(number)), TEXTS)
    last = store.tail(3)
    assert [row.entry.note for row in last] == ["4", "5", "6"]
    earlier = store.tail(3, before=last[0].seq)
    assert [row.entry.note for row in earlier] == ["1", "2", "3"]
    assert [row.entry.note for row in store.tail(3, before=earlier[0].seq)] == ["0"]
    assert store.tail(3, before=1) == []


def test_the_tail_of_one_tank(store: Store) -> None:
    for number, tank in enumerate(("T-1", "T-2", "T-1", None, "T-1")):
        store.append(sample(kind="note", result=None, tank=tank, note=str(number)), TEXTS)
    assert [row.entry.note for row in store.tail(2, tank="T-1")] == ["2", "4"]
    assert [row.entry.note for row in store.tail(2, tank="T-1", before=5)] == ["0", "2"]
    assert store.tail(tank="T-9") == []


def test_between_is_half_open_and_in_the_order_of_the_log(store: Store) -> None:
    for minute in (3, 1, 5, 2, 4):
        store.append(sample(t_us=NOON_US + minute * MINUTE_US, tank=f"T-{minute % 2}"), TEXTS)

    def minutes(start: int | None, end: int | None, tank: str | None = None) -> list[int]:
        bounds = (None if m is None else NOON_US + m * MINUTE_US for m in (start, end))
        rows = store.between(*bounds, tank=tank)
        return [(row.entry.t_us - NOON_US) // MINUTE_US for row in rows]

    assert minutes(2, 5) == [3, 2, 4]
    assert minutes(None, 3) == [1, 2]
    assert minutes(4, None) == [5, 4]
    assert minutes(None, None) == [3, 1, 5, 2, 4]
    assert minutes(1, 5, "T-1") == [3, 1]
    assert minutes(6, 9) == []


def test_latest_is_by_the_time_of_the_reading(store: Store) -> None:
    newest = sample(t_us=NOON_US + 9, note="newest")
    for entry in (
        sample(t_us=NOON_US),
        newest,
        sample(t_us=NOON_US + 5, note="entered late"),
        sample(t_us=NOON_US + 20, kind="note", result=None),
        sample(tank="T-102", t_us=NOON_US, note="first of two at one time"),
        sample(tank="T-102", t_us=NOON_US, note="second of two at one time"),
        sample(tank="A", t_us=NOON_US - 5),
    ):
        store.append(entry, TEXTS)
    latest = store.latest()
    assert set(latest) == {"A", "T-101", "T-102"}
    assert latest["T-101"].entry == newest
    assert latest["T-102"].entry.note == "second of two at one time"


def test_the_texts_an_entry_rests_on_are_kept_once(store: Store) -> None:
    store.append(sample(), TEXTS)
    store.append(sample(), {})
    for version, text in TEXTS.items():
        assert store.get_config(version) == text


def test_an_entry_whose_texts_nobody_has_is_refused(store: Store) -> None:
    some = {VERSIONS["site"]: TEXTS[VERSIONS["site"]]}
    with pytest.raises(StoreError, match="text of the tank"):
        store.append(sample(), some)
    assert store.tail() == []
    with pytest.raises(KeyError):
        store.get_config(VERSIONS["site"])


def test_a_text_under_a_wrong_version_is_a_defect(store: Store) -> None:
    with pytest.raises(ValueError, match="not that of version"):
        store.append(sample(), TEXTS | {sha256(b"a").hexdigest(): b"b"})
    assert store.tail() == []


def test_an_entry_may_refer_only_to_one_that_is_there(store: Store) -> None:
    first = sample()
    store.append(first, TEXTS)
    store.append(sample(ref=first.uid, reason="about that"), TEXTS)
    assert store.tail()[1].entry.ref == first.uid
    with pytest.raises(StoreError):
        store.append(sample(ref=bytes(16)), TEXTS)
    assert store.head()[0] == 2


def test_a_kind_the_log_does_not_know_is_refused(store: Store) -> None:
    with pytest.raises(StoreError):
        store.append(sample(kind="rumour"), TEXTS)
    assert store.tail() == []


def test_verify_against_a_head_seen_earlier(store: Store) -> None:
    receipts = [store.append(sample(), TEXTS) for _ in range(3)]
    assert store.verify((2, receipts[1].hash.hex()[:16])).whole
    assert store.verify((3, receipts[2].hash.hex())).whole
    other = store.verify((2, "00000000"))
    assert other.flaw is not None
    assert other.flaw.seq == 2
    assert "once 00000000" in other.flaw.why
    cut = store.verify((5, receipts[1].hash.hex()[:16]))
    assert cut.flaw is not None
    assert "after 3 are missing" in cut.flaw.why


def test_two_consoles_see_each_others_entries(opener: Opener) -> None:
    ours, theirs = opener(), opener()
    ours.append(sample(note="ours"), TEXTS)
    theirs.append(sample(note="theirs"), TEXTS)
    assert [row.entry.note for row in ours.tail()] == ["ours", "theirs"]
    assert [row.entry.note for row in theirs.tail()] == ["ours", "theirs"]


def test_closing_twice_is_harmless(opener: Opener) -> None:
    with closing(opener()) as store:
        store.append(sample(), TEXTS)
        store.close()
        assert len(store.tail()) == 1
