"""Steps of the clock, with clocks of the tests' own."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from pathlib import Path

import pytest
from shiftlog_samples import NOON_US, TEXTS, VERSIONS, sample

from tankcalc.shiftlog import ClockWatch, Entry, Store, open_store
from tankcalc.shiftlog.clock import STEP_US, log
from tankcalc.shiftlog.kinds import CLOCK_STEP

SECOND_US = 1_000_000


@dataclass(frozen=True)
class Site:
    name: str = "Skerry Point Terminal"
    time_zone: str = "Europe/Lisbon"
    shifts: dict[str, str] = field(default_factory=lambda: {"Day": "06:00", "Night": "18:00"})
    version: str = VERSIONS["site"]


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    opened = open_store(tmp_path / "log.sqlite")
    yield opened
    opened.close()


def entered(at_us: int, **facts: object) -> Entry:
    return sample(entered_us=at_us, **facts)


def kinds(store: Store) -> list[str]:
    return [row.entry.kind for row in store.tail()]


def test_a_clock_behind_the_log_is_logged_first_and_told(store: Store) -> None:
    log(store, entered(NOON_US), TEXTS, site=Site(), now=NOON_US)
    back = NOON_US - 8 * 3600 * SECOND_US
    receipt, step = log(store, entered(back), TEXTS, site=Site(), now=back)
    assert kinds(store) == ["reading", CLOCK_STEP, "reading"]
    about = store.tail()[1].entry
    assert about.typed == {"was": "2026-12-01T12:00:00Z", "is": "2026-12-01T04:00:00Z"}
    assert (about.shift, about.shift_date) == ("Night", "2026-11-30")
    assert receipt.seq == 3
    assert "-28800.0 s" in str(step)
    assert store.verify().whole
    assert log(store, entered(back), TEXTS, site=Site(), now=back)[1] is None
    assert kinds(store)[3:] == ["reading"]


def test_two_clocks_never_quite_agree(store: Store) -> None:
    log(store, entered(NOON_US), TEXTS, site=Site(), now=NOON_US)
    early = NOON_US - STEP_US
    assert log(store, entered(early), TEXTS, site=Site(), now=early)[1] is None
    assert log(store, entered(early - 1), TEXTS, site=Site(), now=NOON_US - STEP_US)[1] is None


def test_a_late_reading_is_no_step(store: Store) -> None:
    log(store, entered(NOON_US), TEXTS, site=Site(), now=NOON_US)
    late = entered(NOON_US + 5, t_us=NOON_US - 3600 * SECOND_US)
    assert log(store, late, TEXTS, site=Site(), now=NOON_US + 5)[1] is None


def test_an_entry_kept_while_the_log_was_lost_is_no_step(store: Store) -> None:
    """It was made before another console's, and is sent after it."""
    log(store, entered(NOON_US), TEXTS, site=Site(), now=NOON_US)
    kept = entered(NOON_US - 60 * SECOND_US)
    assert log(store, kept, TEXTS, site=Site(), now=NOON_US + 1)[1] is None


def test_the_same_entry_again_logs_no_second_step(store: Store) -> None:
    log(store, entered(NOON_US), TEXTS, site=Site(), now=NOON_US)
    back = NOON_US - 60 * SECOND_US
    entry = entered(back)
    first, _ = log(store, entry, TEXTS, site=Site(), now=back)
    again, step = log(store, entry, TEXTS, site=Site(), now=back - 60 * SECOND_US)
    assert (again, step) == (first, None)
    assert kinds(store) == ["reading", CLOCK_STEP, "reading"]


def test_a_damaged_last_entry_keeps_no_other_out(tmp_path: Path, store: Store) -> None:
    log(store, entered(NOON_US), TEXTS, site=Site(), now=NOON_US)
    db = sqlite3.connect(tmp_path / "log.sqlite")
    db.execute("DROP TRIGGER entry_no_update")
    db.execute("UPDATE entry SET body = '{}'")
    db.commit()
    db.close()
    receipt, step = log(store, entered(NOON_US), TEXTS, site=Site(), now=NOON_US)
    assert (receipt.seq, step) == (2, None)
    assert not store.verify().whole


class Clocks:
    """A wall clock that can be set, and one that cannot."""

    def __init__(self) -> None:
        self.wall = NOON_US
        self.steady = 7

    def pass_(self, us: int) -> None:
        self.wall += us
        self.steady += us


def test_a_watch_sees_steps_both_ways_and_no_others() -> None:
    clocks = Clocks()
    watch = ClockWatch(lambda: clocks.wall, lambda: clocks.steady)
    clocks.pass_(9 * 3600 * SECOND_US)
    clocks.wall += STEP_US
    assert watch.step() is None
    clocks.wall += 1
    step = watch.step()
    assert step is not None
    assert step.is_us - step.was_us == STEP_US + 1
    watch.settle()
    assert watch.step() is None
    clocks.wall -= 3600 * SECOND_US
    back = watch.step()
    assert back is not None
    assert back.is_us - back.was_us == -3600 * SECOND_US


def test_a_jump_ahead_is_logged_by_a_console_that_watches(store: Store) -> None:
    clocks = Clocks()
    watch = ClockWatch(lambda: clocks.wall, lambda: clocks.steady)
    clocks.wall += 3600 * SECOND_US
    entry = entered(clocks.wall)
    _, step = log(store, entry, TEXTS, site=Site(), watch=watch, now=clocks.wall)
    assert step is not None
    assert kinds(store) == [CLOCK_STEP, "reading"]
    clocks.pass_(SECOND_US)
    other = replace(entered(clocks.wall))
    assert log(store, other, TEXTS, site=Site(), watch=watch, now=clocks.wall)[1] is None


def test_this_machines_clocks_agree_with_themselves() -> None:
    assert ClockWatch().step() is None
