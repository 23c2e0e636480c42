"""Alerts and limits in the console: keys in, screen text and log out."""

from __future__ import annotations

import asyncio
import os
import re
import time
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest
from pty_helper import console as terminal_console
from test_tui import Console, play
from watch_steps import HOUR_US, Logged, above

from tankcalc.errors import StoreUnavailableError
from tankcalc.limits.alerts import Alert
from tankcalc.tui.alerts_present import detail_lines, list_lines
from tankcalc.tui.front import is_read_only
from tankcalc.tui.present import CAUTION


@pytest.fixture(autouse=True)
def _no_delay(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tankcalc.tui.app.ENGINE_DELAY_S", 0.001)


async def alerts(console: Console) -> None:
    await console.wait("! ALERTS")
    await console.press("ctrl+g")
    await console.wait(" ALERTS: ")


def test_the_main_screen_says_which_tanks_have_alerts(tmp_path: Path) -> None:
    above(tmp_path)

    async def story(console: Console) -> None:
        await console.wait("! ALERTS 1 raised: V-1 level 14.191 m is above the high-high")
        assert console.text.splitlines()[2].startswith("*!V-1   ALERT ")
        assert "ALERT" not in console.text.splitlines()[3], "V-3 has none"
        assert "Ctrl+G" in console.row("! ALERTS")
        assert "not a safety function" in console.text
        assert len(console.text.splitlines()) == 24
        await console.type("5")
        await console.wait("*!V-1+  ALERT ")

    play(story, tmp_path)


def test_until_the_first_look_is_done_the_row_says_so(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    above(tmp_path)
    monkeypatch.setattr("tankcalc.tui.watching.Watching.look", lambda _self: None)

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        assert console.row("ALERTS").startswith("? ALERTS: not looked at yet")

    play(story, tmp_path)


@pytest.mark.parametrize("locked", ["log.sqlite", ""])
def test_a_log_that_cannot_be_written_is_said_at_start(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, locked: str
) -> None:
    logged = above(tmp_path)
    away = logged.path.parent / locked
    access = os.access

    def no_access(path: Path, mode: int) -> bool:
        # Stands in for the file's mode: whoever tests as root may write everything.
        return not (Path(path) == away and mode == os.W_OK) and access(path, mode)

    async def story(console: Console) -> None:
        await console.wait("LOG IS READ-ONLY: nothing can be saved")

    with monkeypatch.context() as patch:
        patch.setattr("tankcalc.tui.front.os.access", no_access)
        play(story, tmp_path)
    assert not is_read_only(str(logged.path), logged.site)
    assert not is_read_only(str(tmp_path / "none.sqlite"), logged.site)
    assert not is_read_only("postgresql://nowhere/log", logged.site)


def test_the_handover_says_what_this_program_is_not(tmp_path: Path) -> None:
    for size, words in (((80, 24), "no safety function"), ((120, 40), CAUTION)):

        async def story(console: Console, words: str = words) -> None:
            await console.press("ctrl+o")
            await console.wait("(the shift that is on)" if words == CAUTION else "HANDOVER")
            assert words in console.row("HANDOVER")

        play(story, tmp_path, size=size)


AT_US = 1_782_871_200_000_000  # 2026-07-01 02:00 UTC, a Wednesday


def one(times: int, since_us: int = AT_US) -> Alert:
    return Alert("V-1", "high", "set aside", "high", False, since_us, since_us, times=times)


def told(alert: Alert, now_us: int) -> str:
    zone = ZoneInfo("UTC")
    lines = list_lines([("V-1", alert)], 0, now_us, zone, 5, 80)
    lines += detail_lines("V-1", alert, zone, 80)
    return "\n".join(text for line in lines for text, _ in line)


def test_an_alert_that_was_never_raised_is_not_said_to_be_on() -> None:
    never, once = told(one(0), AT_US), told(one(1), AT_US)
    assert "not raised V-1" in never
    assert "It was not raised." in never
    assert "On since" not in never
    assert "02:00" not in never
    assert "On since Wed 01 Jul 02:00" in once


def test_the_time_of_an_alert_of_another_day_has_its_date() -> None:
    assert "Wed 02:00 V-1" in told(one(1), AT_US + HOUR_US)
    assert "01 Jul 02:00 V-1" in told(one(1), AT_US + 23 * HOUR_US)
    assert "01 Jul 02:00 V-1" in told(one(1), AT_US + 7 * 24 * HOUR_US), "a Wednesday again"


def test_there_is_no_row_about_alerts_where_none_is_open(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(1.0, "50 kPa")

    async def story(console: Console) -> None:
        watching = console.app.watching
        while watching.found is None:
            await asyncio.sleep(0.01)
        await console.pilot.pause()
        assert "ALERT" not in console.text
        assert "* V-1" in console.text

    play(story, tmp_path)


def test_a_reading_that_is_logged_raises_its_alert_at_once(tmp_path: Path) -> None:
    Logged(tmp_path)

    async def story(console: Console) -> None:
        await console.type("114 kPa")
        await console.press("tab")
        await console.type("15 degC")
        await console.press("f5")
        await console.wait("LOG THIS READING?")
        await console.type("JD")
        for _ in range(3):
            if "SAVED" not in console.text:
                await console.press("enter")
                await console.type("sure")
        await console.wait("! ALERTS 1 raised: V-1 level 14.191 m")

    play(story, tmp_path)


def test_an_alert_is_acknowledged_by_name_and_the_log_has_it(tmp_path: Path) -> None:
    logged = above(tmp_path)

    async def story(console: Console) -> None:
        await alerts(console)
        assert "not a safety function" in console.text
        assert re.search(
            r"> ! RAISED +\w{2,3}( \w{3})? \d\d:\d\d +V-1 level 14.191 m", console.text
        )
        assert "with it: level 14.191 m is above the maximum working level" in console.text
        await console.press("enter")
        await console.wait("ACKNOWLEDGE THIS ALERT?")
        await console.press("enter")
        await console.wait("Who is it?")
        await console.type("AB")
        await console.press("enter")
        await console.wait("* ackn.")
        await console.wait("Acknowledged by AB")
        assert "SAVED, on disk: entry 4" in console.text
        await console.press("k")
        await console.wait("AB has acknowledged it already.")
        await console.press("escape")
        await console.wait("* ALERTS 1 acknowledged: V-1")
        assert console.text.splitlines()[2].startswith("*=V-1   ackn. ")

    play(story, tmp_path)
    last = logged.entries()[-1]
    assert last.typed == {"of": "alert", "what": "above_high_high"}
    assert (last.who, last.tank, last.kind) == ("AB", "V-1", "acknowledgement")


def test_an_alert_is_set_aside_for_a_reason_until_a_time_and_brought_back(tmp_path: Path) -> None:
    logged = above(tmp_path)

    async def story(console: Console) -> None:
        await alerts(console)
        await console.press("s")
        await console.wait("SET THIS ALERT ASIDE?")
        await console.wait("It comes back by itself")
        await console.type("AB")
        await console.press("enter")
        await console.wait("Why is it set aside?")
        await console.type("gauge is being changed")
        await console.press("down", "ctrl+u")
        await console.type("soon")
        await console.press("enter")
        await console.wait('"06:00" (the next one)')
        await console.press("ctrl+u")
        await console.type("8 h")
        await console.press("enter")
        await console.wait("~ aside")
        await console.wait("Reason: gauge is being changed.")
        await console.press("escape")
        await console.wait("~ ALERTS 1 set aside")
        assert console.text.splitlines()[2].startswith("*~V-1   aside ")
        await console.press("ctrl+g")
        await console.wait("~ aside")
        await console.press("b")
        await console.wait("BRING THIS ALERT BACK?")
        assert "AB" in console.row("who"), "the name is remembered"
        await console.press("enter")
        await console.wait("! RAISED")

    play(story, tmp_path)
    aside, back = logged.entries()[-2:]
    assert aside.reason == "gauge is being changed"
    assert "until" in aside.typed
    assert "until" not in back.typed


def test_an_alert_that_has_ended_does_not_hide_one_that_is_on(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(3.0, "2 kPa")  # below the minimum working level
    logged.read(2.0, "114 kPa")

    async def story(console: Console) -> None:
        await alerts(console)
        await console.wait("above the high-high")
        await console.press("enter")
        await console.wait("ACKNOWLEDGE THIS ALERT?")
        await console.type("AB")
        await console.press("enter")
        await console.wait("* ackn.")
        await console.press("escape")
        await console.wait("1 returned, 1 acknowledged")
        assert console.text.splitlines()[2].startswith("*=V-1   ackn. ")

    play(story, tmp_path)


def test_an_alert_that_somebody_leaves_is_as_it_was(tmp_path: Path) -> None:
    logged = above(tmp_path)

    async def story(console: Console) -> None:
        await alerts(console)
        await console.press("b")
        await console.wait("It is not set aside.")
        await console.press("enter")
        await console.wait("ACKNOWLEDGE THIS ALERT?")
        await console.press("escape")
        await console.wait("Nothing logged.")
        assert "! RAISED" in console.text

    play(story, tmp_path)
    assert len(logged.entries()) == 3


def test_the_limits_of_a_tank_are_told_with_rate_and_times(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(2.0, "50 kPa")
    logged.read(1.0, "60 kPa")

    async def story(console: Console) -> None:
        await console.press("ctrl+g")
        await console.wait("V-1, Oil: entry 2")
        # 0.5 + 60000 / (9.81 x 848.8) m, and pi 100 m2 times what is left to 13.6 m: by hand.
        assert "level 7.706 m +/- " in console.text
        assert re.search(r"rate: filling, [\d.]+ m3/h \+/- [\d.]+ m3/h", console.text)
        assert "not on the way" in console.row("minimum working     0.900 m")
        row = console.row("maximum working")
        assert re.search(r"13\.600 m +1851\.\d+ m3 +\w{3} \d\d:\d\d +\w{3} \d\d:\d\d", row), row
        await console.press("down")
        await console.wait("V-3: no reading of the last days")
        await console.press("u")
        await console.wait("US")

    play(story, tmp_path)


def test_a_tank_at_rest_has_no_times(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(2.0, "50 kPa")
    logged.read(1.0, "50 kPa")

    async def story(console: Console) -> None:
        await console.press("ctrl+g")
        await console.wait("static: no limit is on the way")
        assert "not before" not in console.text

    play(story, tmp_path)


def test_alerts_that_cannot_be_looked_at_are_not_taken_for_none(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    above(tmp_path)

    async def story(console: Console) -> None:
        await console.wait("! ALERTS")

        def fail(*_: object, **__: object) -> None:
            raise StoreUnavailableError("the disk is away.")

        monkeypatch.setattr("tankcalc.watch.watch", fail)
        console.app.watching.look()
        await console.wait("? ALERTS NOT KNOWN: the disk is away.")
        assert "raised" not in console.text
        await console.press("ctrl+g")
        await console.wait("? NOT KNOWN: the disk is away.")

    play(story, tmp_path)


def test_a_slow_look_stops_no_key(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    above(tmp_path)
    import tankcalc.watch

    at_once = tankcalc.watch.watch

    def slow(*args: object, **more: object) -> object:
        time.sleep(1.0)
        return at_once(*args, **more)  # type: ignore[arg-type]

    monkeypatch.setattr("tankcalc.watch.watch", slow)

    async def story(console: Console) -> None:
        await console.wait(lambda _text: console.app.watching.began_us > 0)
        await console.type("50 kPa")
        await console.wait("6.505 m")
        assert console.app.watching.found is None, "the answer came while it was being looked"
        await console.wait("! ALERTS")

    play(story, tmp_path)


def test_the_screens_of_the_shift_hold_at_120_by_40_and_in_ascii(tmp_path: Path) -> None:
    above(tmp_path)

    async def story(console: Console) -> None:
        await console.wait("! ALERTS 1 raised")
        assert re.search(r"\*!V-1 +ALERT", console.text)
        for key, wanted in (
            ("ctrl+g", "with it: level"),
            ("ctrl+p", "CAN TAKE nothing"),
            ("ctrl+o", "WHAT CHANGED THIS SHIFT"),
            ("ctrl+y", "BALANCE"),
        ):
            await console.press(key)
            await console.wait(wanted)
            rows = console.text.splitlines()
            assert len(rows) == 40
            assert {len(row) for row in rows} == {120}
            assert console.text.isascii()
            await console.press("escape")
            await console.wait("READINGS")

    play(story, tmp_path, size=(120, 40), ascii=True)


def sgr(raw: bytes) -> set[str]:
    """Every attribute that was set on a terminal."""
    codes = re.findall(rb"\x1b\[([0-9;]*)m", raw)
    return {part for code in codes for part in code.decode().split(";")}


@pytest.mark.parametrize("no_color", ["", "1"])
def test_a_terminal_of_sixteen_colours_or_none_shows_all_of_it(
    tmp_path: Path, no_color: str
) -> None:
    logged = above(tmp_path)
    more = {"NO_COLOR": no_color} if no_color else {}
    log = str(logged.path)
    with terminal_console(
        tmp_path, logged.folder, TANKCALC_LOG=log, ESCDELAY="50", **more
    ) as terminal:
        terminal.wait("! ALERTS 1 raised")
        for key, wanted in (
            (b"\x07", "> ! RAISED"),
            (b"\x10", "CAN TAKE"),
            (b"\x0f", "WHAT CHANGED"),
            (b"\x19", ">since"),
        ):
            terminal.send(key)
            terminal.wait(wanted)
            terminal.send(b"\x1b")
            terminal.wait("READINGS")
        attributes = sgr(terminal.raw)
    assert "38" not in attributes
    assert "48" not in attributes
    colours = {str(n) for n in (*range(30, 39), *range(40, 49), *range(90, 98))}
    assert bool(colours & attributes) == (not no_color)
