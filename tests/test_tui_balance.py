"""The balance in the console: keys in, screen text out."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from test_tui import Console, play
from watch_steps import Logged


@pytest.fixture(autouse=True)
def _no_delay(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tankcalc.tui.app.ENGINE_DELAY_S", 0.001)


async def open_it(console: Console) -> None:
    await console.press("ctrl+y")
    await console.wait("Enter draws the balance")


def test_opening_movements_closing_and_what_is_gained(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(30.0, "50 kPa")
    logged.receive(20.0, "100 t")
    logged.read(10.0, "53 kPa")

    async def story(console: Console) -> None:
        await open_it(console)
        assert ">since            7 d" in console.text
        assert "V-1" in console.row("tank")
        await console.press("enter")
        await console.wait("gain or loss")
        assert "1 movement" in console.row("V-1, ")
        assert "100.000 t" in console.row("received")
        for wanted in ("opening", "book closing", "closing", "+/- (k = 2)", "By mass: "):
            assert wanted in console.text, wanted
        await console.press("f3")
        await console.wait("US")

    play(story, tmp_path)


def test_many_periods_show_cumulative_sums_and_causes(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    for day in range(8):
        logged.read(24.0 * (8 - day), f"{50 - 0.5 * day} kPa")

    async def story(console: Console) -> None:
        await open_it(console)
        await console.press("ctrl+u")
        await console.type("9 d")
        await console.press("enter")
        await console.wait("period to")
        assert "unexplained loss" in console.text
        assert "leak" not in console.text
        await console.press("pagedown")
        await console.wait("Cumulative sums after 7 periods")
        assert "Causes, by mass" in console.text

    play(story, tmp_path)


@pytest.mark.parametrize(
    ("field", "typed", "why"),
    [
        ("since", "yesterday", '"since" "yesterday"'),
        ("since", "", '"since" is empty'),
        ("tank", "V-9", '"tank" "V-9": there is no such tank'),
        ("every", "1 m", '"periods of"'),
        ("until", "8 d", '"until" is not after "since"'),
    ],
)
def test_what_cannot_be_asked_says_why_and_marks_the_field(
    tmp_path: Path, field: str, typed: str, why: str
) -> None:
    Logged(tmp_path)

    async def story(console: Console) -> None:
        await open_it(console)
        console.app.screen.query_one(f"#{field}").focus()
        await console.press("end", "ctrl+u")
        await console.type(typed)
        await console.press("enter")
        await console.wait(f"No balance: {why}")
        label = why.split('"')[1]
        assert f">{label:<15}X" in console.text

    play(story, tmp_path)


def test_slow_work_can_be_left_and_is_not_heard_any_more(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    logged = Logged(tmp_path)
    logged.read(30.0, "50 kPa")
    logged.read(10.0, "50 kPa")
    from tankcalc.tui import balance_ask

    at_once = balance_ask.balanced

    def slow(*args: object) -> object:
        time.sleep(1.5)
        return at_once(*args)  # type: ignore[arg-type]

    monkeypatch.setattr("tankcalc.tui.screens.balance.balanced", slow)

    async def story(console: Console) -> None:
        await open_it(console)
        await console.press("enter")
        await console.wait("working ...")
        await console.press("escape")
        await console.wait("READINGS")
        await console.type("50 kPa")
        await console.wait("RESULT ! CHECK")
        assert "gain or loss" not in console.text

    play(story, tmp_path)


def test_all_tanks_and_one_that_has_no_balance(tmp_path: Path) -> None:
    logged = Logged(tmp_path)
    logged.read(30.0, "50 kPa")
    logged.read(10.0, "50 kPa")
    logged.read(10.0, "50 kPa", "V-3")

    async def story(console: Console) -> None:
        await open_it(console)
        console.app.screen.query_one("#tank").focus()
        await console.press("end", "ctrl+u")
        await console.type("all")
        await console.press("enter")
        await console.wait("1 of 2 tanks balanced.")
        await console.press("pagedown", "pagedown")
        await console.wait("Head of the log: 3:")
        assert "Not a safety function" in console.text

    play(story, tmp_path)


@pytest.mark.parametrize("size", [(80, 24), (120, 40)])
def test_the_balance_fits_the_screen(tmp_path: Path, size: tuple[int, int]) -> None:
    logged = Logged(tmp_path)
    logged.read(30.0, "50 kPa")
    logged.read(10.0, "50 kPa")

    async def story(console: Console) -> None:
        await open_it(console)
        await console.press("enter")
        await console.wait("gain or loss")
        rows = console.text.splitlines()
        assert len(rows) == size[1]
        assert {len(row) for row in rows} == {size[0]}
        assert "~" not in console.text

    play(story, tmp_path, size=size)
