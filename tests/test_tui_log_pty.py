"""The log's screens in a real pseudo-terminal: bytes, colours, marks that need none."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from log_steps import HOSTILE, put, site_of
from pty_helper import Terminal, console
from test_tui_pty import ESC, sgr

from tankcalc.shiftlog import note_entry, now_us

F5, F7 = b"\x1b[15~", b"\x1b[18~"
CTRL_T, CTRL_X = b"\x14", b"\x18"


def tour(terminal: Terminal) -> None:
    """Log something of each kind, and open, amend, withdraw and filter it."""

    def act(keys: str | bytes, wanted: str) -> None:
        terminal.send(keys)
        terminal.wait(wanted)

    terminal.send("50 kPa")
    terminal.wait("RESULT *")
    act(F5, "LOG THIS READING?")
    act("JD\r", "SAVED, on disk: entry 2")
    act(CTRL_T, "LOG A MOVEMENT")
    act("500 m3\r", "SAVED, on disk: entry 3")
    act(CTRL_X, "SIGN ON OR OFF")
    act("\r", "SAVED, on disk: entry 4")
    act(F7, ">LOG")
    act(b"\x1b[H\x1b[B\r", "entry 2, reading")
    terminal.send(ESC)
    terminal.wait(lambda text: "entry 2, reading" not in text)
    act("a", "SHOULD HAVE BEEN")
    terminal.wait("RESULT *")
    act(F5, "LOG WHAT THE READING")
    act("why\r", "AMENDED by 5")
    act("w", "TAKE THIS ENTRY BACK?")
    act("why\r", "WITHDRAWN by 6")
    act("x", "FAULT OF AN INSTRUMENT")
    act(ESC, "Nothing logged.")
    act("/", "SHOW WHICH ENTRIES")


def with_hostile_note(tmp_path: Path) -> Path:
    site = site_of(tmp_path)
    put(tmp_path, [note_entry(site=site, note=HOSTILE, now_us=now_us(), who="X")])
    return tmp_path / "site"


def begun(terminal: Terminal) -> Terminal:
    terminal.wait("READINGS  (")
    terminal.wait("1 entry")
    return terminal


@pytest.mark.parametrize("size", [(24, 80), (40, 120)])
def test_an_old_terminal_gets_ascii_and_16_colours_of_every_screen_of_the_log(
    tmp_path: Path, size: tuple[int, int]
) -> None:
    site = with_hostile_note(tmp_path)
    words = ("--ascii", "--log", str(tmp_path / "log.sqlite"))
    with console(tmp_path, site, *words, ESCDELAY="50") as terminal:
        terminal.resize(*size)
        tour(begun(terminal))
        cells = [terminal.screen.buffer[y][x] for y in range(size[0]) for x in range(size[1])]
        assert all(cell.fg == "default" or cell.fg != cell.bg for cell in cells)
    assert max(terminal.raw) < 0x80
    assert not {"38", "48"} & sgr(terminal.raw)
    assert b"Traceback" not in terminal.raw


def test_without_colours_marks_and_focus_are_seen_all_the_same(tmp_path: Path) -> None:
    site = with_hostile_note(tmp_path)
    with console(
        tmp_path, site, "--log", str(tmp_path / "log.sqlite"), NO_COLOR="1", ESCDELAY="50"
    ) as terminal:
        tour(begun(terminal))
        colours = {str(n) for n in (*range(30, 39), *range(40, 49), *range(90, 98))}
        assert not colours & sgr(terminal.raw)
        seen = set()
        for _ in range(3):
            before = terminal.text
            terminal.send(b"\t")
            terminal.wait(lambda text, before=before: text != before)
            while terminal.quiet(0.2):
                pass
            seen.add(next(n for n in range(24, 0, -1) if re.match(r">[a-z]", terminal.row(n))))
        assert len(seen) == 3, "the mark moves with every Tab"


def test_nothing_that_a_log_holds_acts_on_the_terminal(tmp_path: Path) -> None:
    site = with_hostile_note(tmp_path)
    with console(tmp_path, site, "--log", str(tmp_path / "log.sqlite")) as terminal:
        begun(terminal)
        terminal.send(F7)
        terminal.wait(">LOG")
        terminal.send("\r")
        terminal.wait("ENTRY OF THE LOG")
        terminal.wait("[31m2J[bold]x[/] <script>alert(1)</script>")
    assert b"T\x1b[31m" not in terminal.raw
    assert "\x9b".encode() not in terminal.raw
    assert "\u202e".encode() not in terminal.raw
