"""The planner in the console: keys in, screen text out."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from test_tui import Console, play
from watch_steps import Logged


@pytest.fixture(autouse=True)
def _no_delay(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tankcalc.tui.app.ENGINE_DELAY_S", 0.001)


async def plan_from(console: Console, p1: str = "60 kPa") -> None:
    """Type a reading, and open the planner on it."""
    await console.type(p1)
    await console.press("tab")
    await console.type("15 degC")
    await console.wait("7.706 m")
    await console.press("ctrl+p")
    await console.wait("Plan from the reading in front")


def test_room_and_call_to_stop_are_told_as_they_are_typed(tmp_path: Path) -> None:
    Logged(tmp_path)

    async def story(console: Console) -> None:
        await plan_from(console)
        # pi 10^2 (13.6 - 7.7058) m3, by hand.
        await console.wait("CAN TAKE 1851.7")
        assert "up to maximum working, 13.600 m" in console.text
        assert ">to" in console.text
        assert "not a safety function" in console.text
        await console.press("enter")
        await console.type("120 m3/h")
        await console.wait("CALL STOP at 13.600 m")
        row = console.row("CALL STOP")
        assert re.search(r"\w{3} \d\d:\d\d at the earliest", row), row
        await console.press("enter", "enter")
        await console.type("90 s")
        # 120 m3/h for 90 s are 3 m3, and 3 / (pi 10^2) m is 9.5 mm.
        await console.wait("CALL STOP at 13.590 m")
        await console.press("up", "up", "ctrl+u")
        await console.type("120")
        await console.wait('X No plan: "rate"')
        assert "CALL STOP" not in console.text, "nothing older stays"
        assert re.search(r">rate +X 120", console.text)
        assert "--" not in console.text, "the command's options are not the console's words"

    play(story, tmp_path)


def test_what_a_receipt_and_a_warm_day_do(tmp_path: Path) -> None:
    Logged(tmp_path)

    async def story(console: Console) -> None:
        await plan_from(console)
        await console.press("tab", "tab", "tab", "tab", "tab")
        await console.type("500 t")
        await console.press("tab")
        await console.type("25 degC")
        # 2057.70 t at 15 degC and 500 t at 25 degC make 2557.70 t at 16.96 degC: with 8e-4 / K
        # 848.67 kg/m3, on 314.16 m2; by hand.
        await console.wait("AFTERWARDS level 9.593 m")
        await console.press("tab", "tab")
        await console.type("45 degC")
        await console.wait("WHEN WARM OR COLD level")
        await console.press("pagedown")
        await console.wait("After adding 500.000 t at 25.0 degC:")
        await console.press("pagedown", "pagedown", "pagedown")
        await console.wait("-- end of text: PgUp --")

    play(story, tmp_path)


def test_a_level_of_ones_own_and_another_system_of_units(tmp_path: Path) -> None:
    Logged(tmp_path)

    async def story(console: Console) -> None:
        await plan_from(console)
        await console.type("high-high")
        await console.wait("up to high-high, 14.000 m")
        await console.press("f3")
        await console.wait("45 ft 11")
        await console.press("ctrl+u")
        await console.type("7 m")
        await console.wait("CAN TAKE nothing")
        await console.press("f8")
        await console.wait("up to maximum working")
        await console.press("f8")
        await console.wait("CAN TAKE nothing")

    play(story, tmp_path)


def test_a_plan_begins_with_the_last_reading_of_the_log_where_none_is_typed(
    tmp_path: Path,
) -> None:
    logged = Logged(tmp_path)
    logged.read(3.0, "60 kPa")

    async def story(console: Console) -> None:
        await console.press("ctrl+p")
        await console.wait("Plan from entry 1 of the log, read ")
        await console.wait("3 h 0 min ago")
        await console.wait("CAN TAKE 1851.7")
        await console.press("down")
        await console.type("2000 m3/h")
        await console.wait("! CALL STOP: that time may be past. Read the tank again.")
        await console.press("escape")
        await console.type("50 kPb")
        await console.press("ctrl+p")
        await console.wait("What is typed in front gives no answer; this is an older reading.")
        assert "2000 m3/h" in console.row("rate"), "what was typed for the tank is kept"

    play(story, tmp_path)


def test_the_rate_of_the_log_is_a_key_away(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(1.0, "50 kPa")
    logged.read(0.0, "60 kPa")

    async def story(console: Console) -> None:
        while console.app.watching.found is None:
            await console.pilot.pause(0.01)
        await console.press("ctrl+p")
        await console.wait("CAN TAKE")
        await console.press("f5")
        # 10000 / (9.81 x 848.8) m in an hour, on pi 10^2 m2: by hand.
        await console.wait("rate             377.29 m3/h")
        await console.wait("CALL STOP at 13.600 m")
        assert re.search(r"rate \+/- \(k=1\) +[\d.]+ m3/h", console.text)

    play(story, tmp_path)


def test_a_tank_at_rest_has_no_rate_to_plan_with(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(1.0, "50 kPa")
    logged.read(0.0, "50 kPa")

    async def story(console: Console) -> None:
        while console.app.watching.found is None:
            await console.pilot.pause(0.01)
        await console.press("ctrl+p")
        await console.wait("CAN TAKE")
        await console.press("f5")
        await console.wait("The log shows no rate")

    play(story, tmp_path)


def test_nothing_to_plan_from_says_so(tmp_path: Path) -> None:
    Logged(tmp_path)

    async def story(console: Console) -> None:
        await console.press("ctrl+p")
        await console.wait("V-1 has no reading in the log.")
        await console.type("7 m")
        assert "CAN TAKE" not in console.text
        await console.press("escape")
        await console.wait("READINGS")

    play(story, tmp_path)


def test_what_was_typed_for_one_tank_is_not_asked_of_another(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(1.0, "60 kPa")
    logged.read(1.0, "50 kPa", "V-3")

    async def story(console: Console) -> None:
        await console.press("ctrl+p")
        await console.wait("CAN TAKE")
        await console.type("9.9 m")
        await console.wait("up to 9.900 m")
        await console.press("escape", "escape", "down")
        await console.wait("* V-3" if "* V-3" in console.text else "V-3")
        await console.press("ctrl+p")
        await console.wait("PLAN FOR V-3")
        assert "9.9 m" not in console.row(" to ")

    play(story, tmp_path)


@pytest.mark.parametrize("size", [(80, 24), (120, 40)])
def test_the_planner_fits_the_screen(tmp_path: Path, size: tuple[int, int]) -> None:
    Logged(tmp_path)

    async def story(console: Console) -> None:
        await plan_from(console)
        await console.wait("CAN TAKE")
        rows = console.text.splitlines()
        assert len(rows) == size[1]
        assert {len(row) for row in rows} == {size[0]}
        assert "~" not in console.text
        assert "Esc back" in rows[-1]

    play(story, tmp_path, size=size)
