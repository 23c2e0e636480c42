"""What becomes of an entry that the console cannot save."""

from __future__ import annotations

import re
import sqlite3
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest
from log_steps import rows_of, site_of
from postgres_server import running
from test_tui import Console, log_it, play

from tankcalc.shiftlog import open_store

LISBON = ZoneInfo("Europe/Lisbon")
NOON_US = 1_782_903_600_000_000  # 2026-07-01T11:00Z, noon in Lisbon


async def to_save(console: Console, typed: str = "50 kPa") -> None:
    await console.type(typed)
    await console.wait(lambda text: "RESULT *" in text or "RESULT X" in text)
    await console.press("f5")
    await console.wait("LOG THIS READING?")


def test_a_note_that_is_not_saved_is_kept_and_sent_again_as_the_same(tmp_path: Path) -> None:
    folder = tmp_path / "shared"
    folder.write_text("a file where the log's folder should be")

    async def story(console: Console) -> None:
        await console.press("f6")
        await console.type("JD")
        await console.press("down")
        await console.type("gauge stuck")
        await console.press("enter")
        await console.wait("NOT SAVED:")
        await console.press("escape")
        await console.wait("NOT SAVED: note on V-1; it is kept here.")
        await console.press("ctrl+q")
        await console.wait("NOT SAVED: note on V-1. What was typed is kept")
        await console.press("escape")
        folder.unlink()
        await console.press("f6")
        await console.wait("NOT SAVED before")
        assert re.search(r"note +gauge stuck", console.text)
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 1")

    play(story, tmp_path, log=str(folder / "log.sqlite"))
    assert len(open_store(folder / "log.sqlite").tail()) == 1


def test_a_full_disk_and_a_read_only_log_leave_the_entry_on_the_screen(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from tankcalc.shiftlog import sqlite_write

    real = sqlite_write.put
    names = iter(["SQLITE_FULL", "SQLITE_READONLY"])

    def broken(*_: object) -> object:
        error = sqlite3.OperationalError("the story's own")
        error.sqlite_errorname = next(names)
        raise error

    async def story(console: Console) -> None:
        await log_it(console)
        await to_save(console, "51 kPa")
        monkeypatch.setattr("tankcalc.shiftlog.sqlite_store.put", broken)
        await console.press("enter")
        await console.wait("NOT SAVED: no space left for the log")
        assert "Typed: p1 bottom 51 kPa" in console.text
        await console.press("enter")
        await console.wait("read-only here.")
        monkeypatch.setattr("tankcalc.shiftlog.sqlite_store.put", real)
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 2")

    play(story, tmp_path)
    assert [row.entry.typed["p1"] for row in rows_of(tmp_path)] == ["50 kPa", "51 kPa"]


def test_enter_pressed_many_times_logs_once(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await to_save(console)
        await console.burst(*"JD", *["enter"] * 8)
        await console.wait("SAVED, on disk: entry 1")
        await console.pilot.pause(0.2)

    play(story, tmp_path)
    assert len(rows_of(tmp_path)) == 1


def test_every_entry_has_its_texts_in_the_log(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await log_it(console)
        await console.press("ctrl+x")
        await console.wait("SIGN ON OR OFF")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 2")

    play(story, tmp_path)
    store = open_store(str(tmp_path / "log.sqlite"))
    for row in store.tail():
        for version in row.entry.versions.values():
            assert store.get_config(version)
    assert store.verify().flaw is None
    assert site_of(tmp_path).version in {v for r in store.tail() for v in r.entry.versions.values()}
    store.close()


def test_a_lost_server_is_told_and_the_entry_kept_until_it_is_back(tmp_path: Path) -> None:
    server = running()
    address = server.new_database()

    async def story(console: Console) -> None:
        await log_it(console)
        await to_save(console, "51 kPa")
        server.stop()
        await console.press("enter")
        await console.wait("NOT SAVED:")
        assert "Typed: p1 bottom 51 kPa" in console.text
        assert server.password not in console.text
        await console.press("escape")
        await console.wait("NOT SAVED; the entry is kept here.")
        await console.wait("The log cannot be read:")
        server.start()
        await console.press("f5")
        await console.wait("NOT SAVED before")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 2")
        await console.wait("2 entries")

    try:
        play(story, tmp_path, log=address)
    finally:
        server.start()


def test_a_note_left_by_esc_is_named_when_leaving_and_offered_at_the_next_start(
    tmp_path: Path,
) -> None:
    async def left(console: Console) -> None:
        await console.press("f6")
        await console.type("JD")
        await console.press("down")
        await console.type("gauge stuck")
        await console.press("escape")
        await console.wait("Nothing logged.")
        await console.press("ctrl+q")
        await console.wait("Not logged: note on V-1.")
        await console.press("enter")

    async def found(console: Console) -> None:
        await console.wait("note on V-1: who JD")
        await console.press("enter", "f6")
        await console.wait(lambda text: re.search(r"note +gauge stuck", text) is not None)

    play(left, tmp_path)
    play(found, tmp_path)


@pytest.mark.parametrize("left", [True, False])
@pytest.mark.parametrize("kind", ["reading", "note"])
def test_what_was_not_saved_is_the_same_entry_after_a_restart(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, kind: str, left: bool
) -> None:
    from tankcalc.shiftlog import sqlite_write

    real, tried = sqlite_write.put, []

    def broken(*_: object) -> object:
        error = sqlite3.OperationalError("the story's own")
        error.sqlite_errorname = "SQLITE_READONLY"
        raise error

    async def lost(console: Console) -> None:
        if kind == "reading":
            await to_save(console)
            await console.type("JD")
        else:
            await console.press("f6")
            await console.type("JD")
            await console.press("down")
            await console.type("gauge stuck")
        await console.press("enter")
        await console.wait("read-only here.")
        if left:
            await console.press("escape")
            await console.wait("kept here.")
        desk = console.app.desk
        sent = desk.entry.unsaved if kind == "reading" else desk.kept["note on V-1"].sent
        assert sent is not None
        tried.append(sent.entry)

    async def found(console: Console) -> None:
        await console.wait("Unfinished entry from")
        await console.press("enter")
        if kind == "reading":
            await console.wait(lambda text: "RESULT *" in text or "RESULT X" in text)
        await console.press("f5" if kind == "reading" else "f6")
        await console.wait("NOT SAVED before")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 1")

    monkeypatch.setattr("tankcalc.shiftlog.sqlite_store.put", broken)
    play(lost, tmp_path)
    monkeypatch.setattr("tankcalc.shiftlog.sqlite_store.put", real)
    play(found, tmp_path)
    assert [row.entry for row in rows_of(tmp_path)] == tried
