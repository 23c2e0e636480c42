"""The handover in the console: read, taken over by name, written to a file."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from test_tui import Console, play
from watch_steps import HOUR_US, Logged, above

from tankcalc.shiftlog import now_us, shift_at, zone_named
from tankcalc.tui.widgets.word_field import WordField


@pytest.fixture(autouse=True)
def _no_delay(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tankcalc.tui.app.ENGINE_DELAY_S", 0.001)


async def handover(console: Console, logged: Logged) -> str:
    """Open the handover of the shift that is on; return its title."""
    shift = shift_at(now_us(), zone_named(logged.site.time_zone), logged.site.shifts)
    await console.press("ctrl+o")
    await console.wait("WHAT CHANGED THIS SHIFT")
    if now_us() - shift.start_us < 2 * HOUR_US:
        await console.press("right")
        await console.wait(f"HANDOVER {shift.title} (the shift that is on)")
        await console.wait("WHAT CHANGED THIS SHIFT")
    return shift.title


def test_a_handover_is_read_and_taken_over_by_name(tmp_path: Path) -> None:
    logged = above(tmp_path)
    logged.note("\x1b[31m[/] =HYPERLINK(1)")

    async def story(console: Console) -> None:
        title = await handover(console, logged)
        assert f"HANDOVER {title}" in console.text
        await console.press("tab", "tab")
        await console.wait(lambda text: "TANKS" in text.splitlines()[1])
        assert "V-1" in console.text
        await console.press("shift+tab")
        await console.wait(lambda text: "WHAT CHANGED THIS SHIFT" in text.splitlines()[1])
        await console.press("end")
        await console.wait("TAKEN OVER BY")
        assert "Not acknowledged yet." in console.text
        await console.press("k")
        await console.wait("TAKE OVER?")
        await console.type("AB")
        await console.press("down")
        await console.type("asked about V-1")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 5")
        await console.wait("WHAT CHANGED THIS SHIFT")
        await console.press("end")
        await console.wait("AB")
        assert "Not acknowledged yet." not in console.text
        assert "\x1b" not in console.text

    play(story, tmp_path)
    last = logged.entries()[-1]
    assert last.typed["of"] == "handover"
    assert (last.who, last.note) == ("AB", "asked about V-1")


def test_a_handover_is_written_to_a_file_and_none_is_replaced_unasked(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    logged = above(tmp_path)
    monkeypatch.chdir(tmp_path)
    (tmp_path / "old.md").write_text("old")

    async def story(console: Console) -> None:
        await handover(console, logged)
        await console.press("w")
        await console.wait("WRITE THE HANDOVER TO A FILE")
        assert re.search(r">file +handover-\d{4}-\d\d-\d\d-(Day|Night)\.html", console.text)
        await console.press("ctrl+u")
        await console.type("old.txt")
        await console.press("enter")
        await console.wait("NOT WRITTEN")
        await console.press("ctrl+u")
        console.app.screen.query_one("#file", WordField).value = "n" * 300 + ".md"
        await console.press("enter")
        await console.wait("File name too long")
        await console.press("end", "ctrl+u")
        await console.type("old.md")
        await console.press("enter")
        await console.wait("old.md exists. Enter again replaces it.")
        assert (tmp_path / "old.md").read_text() == "old"
        await console.press("enter")
        await console.wait("WRITTEN: ")

    play(story, tmp_path)
    assert "Shift handover, Test Site" in (tmp_path / "old.md").read_text()


def test_another_shift_can_be_chosen(tmp_path: Path) -> None:
    logged = above(tmp_path)

    async def story(console: Console) -> None:
        title = await handover(console, logged)
        await console.press("left")
        await console.wait(lambda text: "HANDOVER" in text and f"HANDOVER {title}" not in text)
        await console.wait("WHAT CHANGED THIS SHIFT")
        await console.press("right")
        await console.wait(f"HANDOVER {title}")
        await console.press("right")
        await console.wait("there is no later one")

    play(story, tmp_path)
