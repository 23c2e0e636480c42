"""The log pane: any length, filters, marks, and entries of other consoles."""

from __future__ import annotations

import re
import time
from dataclasses import replace
from pathlib import Path

import pytest
from log_steps import HOSTILE, logged, notes, put, rows_of, site_of, to_log
from test_tui import Console, log_it, play

from tankcalc.shiftlog import note_entry, now_us, open_store
from tankcalc.tui import log_pages
from tankcalc.tui.log_pages import ENOUGH, PAGE, Seen, Sought, page_after, page_before
from tankcalc.tui.log_window import KEPT, LogWindow

ALL = Sought()


async def other_console_logs(console: Console, tmp_path: Path, first: int) -> None:
    notes(tmp_path, 1, first=first)
    console.app.front.read_log()


def test_home_and_end_jump_through_a_log_of_many_pages(tmp_path: Path) -> None:
    notes(tmp_path, 5 * PAGE)

    async def story(console: Console) -> None:
        await to_log(console)
        await console.wait(f">{time.strftime('%H', time.gmtime())}")
        await console.wait("note 499")
        await console.press("home")
        await console.wait(re.compile(r"note 0\s").search)
        await console.wait("1-9 of 500")
        await console.press("end")
        await console.wait("note 499")
        assert "note 0 " not in console.text

    play(story, tmp_path)


def test_every_entry_is_passed_once_by_paging_up_and_down(tmp_path: Path) -> None:
    count = 2 * PAGE + 37
    notes(tmp_path, count)

    async def seen(console: Console, key: str, until: str) -> list[int]:
        found: list[int] = []
        while True:
            rows = [int(n) for n in re.findall(r"JD note (\d+)\s", console.text)]
            found += [n for n in rows if n not in found]
            if re.search(rf"JD note {until}\s", console.text):
                return found
            before = console.text
            await console.press(key)
            await console.wait(lambda text, before=before: text != before)

    async def story(console: Console) -> None:
        await to_log(console)
        await console.wait(f"note {count - 1}")
        up = await seen(console, "pageup", "0")
        assert sorted(up) == list(range(count))
        down = await seen(console, "pagedown", str(count - 1))
        assert down == list(range(count))

    play(story, tmp_path)


def test_entries_of_other_consoles_appear_and_do_not_move_what_is_read(tmp_path: Path) -> None:
    notes(tmp_path, 40)

    async def story(console: Console) -> None:
        await to_log(console)
        await console.wait("note 39")
        await other_console_logs(console, tmp_path, 40)
        await console.wait("note 40")
        await console.press("pageup")
        await console.gone("note 40")
        rows = console.text.splitlines()[14:23]
        await other_console_logs(console, tmp_path, 41)
        await console.wait("42 entries")
        assert console.text.splitlines()[14:23] == rows
        await console.press("end")
        await console.wait("note 41")

    play(story, tmp_path)


def test_a_correction_by_another_console_marks_what_is_in_sight(tmp_path: Path) -> None:
    from tankcalc.shiftlog import withdrawal_entry

    notes(tmp_path, 3)

    async def story(console: Console) -> None:
        await console.wait("note 2")
        original = rows_of(tmp_path)[1].entry
        taken_back = withdrawal_entry(
            site=site_of(tmp_path), original=original, reason="wrong tank", now_us=now_us(), who="X"
        )
        put(tmp_path, [taken_back])
        console.app.front.read_log()
        await to_log(console)
        await console.wait("WITHDRAWN by 4  JD note 1")
        await console.wait("withdrawal  X withdraws entry 2 wrong tank")

    play(story, tmp_path)


def test_the_filter_shows_a_tank_a_kind_a_shift_and_all(tmp_path: Path) -> None:
    notes(tmp_path, 2, shift_date="2020-01-05", shift="Night", t_us=1_578_262_000_000_000)

    async def choose(console: Console, *keys: str) -> None:
        await console.press("slash")
        await console.wait("SHOW WHICH ENTRIES")
        await console.press(*keys)
        await console.press("enter")

    async def story(console: Console) -> None:
        await logged(console, "50 kPa")
        await choose(console, "down", "down", "ctrl+u", *"all")
        await console.wait("LOG all shifts: 3 entries")
        assert "2020-01-05 22:06 V-1        note  LATE  JD note 1" in console.text
        await choose(console, "down", *"rea")
        await console.wait("LOG reading only, all shifts: 1 entry")
        assert "note 1" not in console.text
        await choose(console, "v", "minus", "3")
        await console.wait("LOG V-3, reading only, all shifts: 0 entries")
        await console.press("slash")
        await console.wait("SHOW WHICH ENTRIES")
        await console.press("f8")
        await console.wait("LOG this ")
        await console.wait("1 entry")
        await choose(console, "down", "down", "ctrl+u", *"2020-01-05", "space", *"night")
        await console.wait("LOG 2020-01-05 Night: 2 entries")
        await choose(console, "down", "down", "ctrl+u", *"yesterday")
        await console.wait('"yesterday" does not begin with a date')
        await console.press("escape")
        await console.wait("LOG 2020-01-05 Night: 2 entries")

    play(story, tmp_path)


def test_late_entries_and_clock_steps_are_marked(tmp_path: Path) -> None:
    notes(tmp_path, 1)
    hour_us = 3_600_000_000
    last = rows_of(tmp_path)[0].entry
    put(
        tmp_path,
        [
            replace(last, uid=bytes(15) + b"1", entered_us=last.entered_us + hour_us),
            # Whoever logs next finds that the log is ahead of the clock.
            replace(last, uid=bytes(15) + b"2", entered_us=last.entered_us + hour_us, note="ahead"),
        ],
    )

    async def story(console: Console) -> None:
        await console.wait("note  LATE  JD ahead")
        await log_it(console)
        await console.wait("CLOCK STEP: this machine's clock shows")
        await to_log(console)
        await console.wait("CLOCK STEP  the clock stepped")

    play(story, tmp_path)
    assert [row.entry.kind for row in rows_of(tmp_path)][-2:] == ["clock-step", "reading"]


def test_what_a_log_holds_is_inert_in_the_pane_and_in_the_entry(tmp_path: Path) -> None:
    site = site_of(tmp_path)
    entry = note_entry(site=site, note=HOSTILE, now_us=now_us(), who=HOSTILE[:80])
    put(tmp_path, [replace(entry, tank=HOSTILE, user=HOSTILE, console=HOSTILE, shift=entry.shift)])

    async def story(console: Console) -> None:
        await to_log(console)
        await console.wait("1 entry")
        await console.press("enter")
        await console.wait("ENTRY OF THE LOG")
        await console.wait('note      T[31m2J[bold]x[/] <script>alert(1)</script> =HYPERLINK("x")')
        assert all(ch.isprintable() or ch == "\n" for ch in console.text)

    play(story, tmp_path)


def test_a_log_that_cannot_be_read_says_so_and_comes_back(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    notes(tmp_path, 2)

    def broken(*_: object, **__: object) -> None:
        raise ZeroDivisionError("the story's own")

    async def story(console: Console) -> None:
        await console.wait("note 1")
        with monkeypatch.context() as patched:
            patched.setattr("tankcalc.shiftlog.sqlite_store.SqliteStore.head", broken)
            console.app.front.read_log()
            await console.wait("The log cannot be read: this program failed (ZeroDivisionError")
        console.app.front.read_log()
        await console.wait("note 1")

    play(story, tmp_path)


@pytest.mark.parametrize("size", [(80, 24), (120, 40)])
def test_the_pane_grows_while_it_is_read_and_the_result_stays_in_sight(
    tmp_path: Path, size: tuple[int, int]
) -> None:
    notes(tmp_path, 30)

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("* GOOD")
        await console.wait("note 29")
        before = console.text.count("JD note")
        await to_log(console)
        await console.wait(lambda text: text.count("JD note") > 2 * before)
        assert "RESULT * GOOD" in console.text
        assert "no safety function" in console.text
        assert console.text.splitlines()[-1].startswith("Enter open  a amend  w withdraw")
        await console.press("escape")
        await console.wait(lambda text: text.count("JD note") == before)

    play(story, tmp_path, size=size)


def opened(tmp_path: Path, count: int) -> None:
    """A log of two tanks in turn, with a note of no tank every fiftieth entry."""
    site = site_of(tmp_path)
    tanks = [site.tank(name) for name in site.tank_names()]
    at = now_us()
    put(
        tmp_path,
        [
            note_entry(
                site=site,
                note=f"{n}",
                now_us=at,
                tank=None if n % 50 == 49 else tanks[n // 300 % 2],
                who="JD",
            )
            for n in range(count)
        ],
    )


@pytest.mark.parametrize("sought", [ALL, Sought(tank="V-1"), Sought(tank="V-3", kind="note")])
def test_pages_forwards_and_backwards_hold_every_entry_once(tmp_path: Path, sought: Sought) -> None:
    opened(tmp_path, 1500)
    store = open_store(str(tmp_path / "log.sqlite"))
    wanted = [row.seq for row in store.tail(5000) if sought.takes(row)]
    page = log_pages.first_page(store, sought)
    found = [one.row.seq for one in page.seen]
    while page.below:
        page = page_after(store, sought, found[-1])
        assert page.seen
        assert len(page.seen) >= ENOUGH or not page.below
        found += [one.row.seq for one in page.seen]
    assert found == wanted
    page = log_pages.last_page(store, sought)
    found = [one.row.seq for one in page.seen]
    while page.above:
        page = page_before(store, sought, found[0])
        found = [*(one.row.seq for one in page.seen), *found]
    assert found == wanted
    store.close()


def test_the_last_page_of_a_long_log_opens_in_50_ms(tmp_path: Path) -> None:
    opened(tmp_path, 5000)
    seconds = []
    for _ in range(3):
        store = open_store(str(tmp_path / "log.sqlite"))
        begun = time.perf_counter()
        page = log_pages.last_page(store, ALL)
        seconds.append(time.perf_counter() - begun)
        store.close()
    assert len(page.seen) == PAGE
    assert min(seconds) < 0.05


def page_of(first: int, count: int, **ends: bool) -> log_pages.Page:
    """Entries of which only the numbers matter."""
    from shiftlog_samples import sample

    from tankcalc.shiftlog import Row

    entry = sample()
    rows = [Row(n, entry, bytes(32)) for n in range(first, first + count)]
    return log_pages.Page(tuple(Seen(row, (row,)) for row in rows), **ends, head=first + count)  # type: ignore[arg-type]


def numbers(window: LogWindow) -> list[int]:
    return [one.row.seq for one in window.in_sight]


def test_a_window_holds_no_more_than_it_should_and_keeps_its_place() -> None:
    window = LogWindow()
    window.fit(5)
    window.open(page_of(1000, PAGE, above=True, below=False), at_end=True)
    assert numbers(window) == [1095, 1096, 1097, 1098, 1099]
    first = 1000
    for _ in range(6):
        window.page(-len(window.seen))
        here = numbers(window)
        assert window.wants() == "above"
        first -= PAGE
        window.grow(page_of(first, PAGE, above=True, below=True), "above")
        assert numbers(window) == here
        assert window.marked is not None
        assert window.marked.row.seq in here
    assert len(window.seen) == KEPT
    assert window.below, "the newest were let go of"
    window.page(len(window.seen))
    here = numbers(window)
    assert window.wants() == "below"
    last = window.seen[-1].row.seq
    window.grow(page_of(last + 1, PAGE, above=True, below=False), "below")
    assert numbers(window) == here
    assert len(window.seen) == KEPT
    assert window.above


def test_a_window_on_nothing_is_empty_and_can_be_moved_in() -> None:
    window = LogWindow()
    window.open(page_of(1, 0, above=False, below=False), at_end=True)
    window.move(-1)
    window.page(1)
    assert window.marked is None
    assert numbers(window) == []
    window.add(page_of(1, 1, above=False, below=False).seen)
    assert numbers(window) == [1]
    assert window.at_end


def test_a_slow_disk_stops_no_key(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    notes(tmp_path, 3)
    real = log_pages.last_page

    def slow(*given: object) -> log_pages.Page:
        time.sleep(3.0)
        return real(*given)  # type: ignore[arg-type]

    async def story(console: Console) -> None:
        await console.wait("note 2")
        monkeypatch.setattr(log_pages, "last_page", slow)
        await to_log(console)
        begun = time.perf_counter()
        await console.press("end", "5")
        await console.wait(">p1 bottom   X 5")
        assert time.perf_counter() - begun < 2.0
        monkeypatch.undo()

    play(story, tmp_path)
