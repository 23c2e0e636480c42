"""The console in a real pseudo-terminal: bytes in, bytes out, signals, colours, time."""

from __future__ import annotations

import os
import re
import signal
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest
from pty_helper import Terminal, console
from sites import make_site

from tankcalc.tui.draft import orphans

SLOW = 4.0
"""A machine that runs other tests at the same time is slower than a console's by so much."""
F1, F4, F5, F6 = b"\x1bOP", b"\x1bOS", b"\x1b[15~", b"\x1b[17~"
F10, ESC = b"\x1b[21~", b"\x1b"


@pytest.fixture
def site(tmp_path: Path) -> Path:
    return make_site(tmp_path / "site")


def ready(terminal: Terminal) -> Terminal:
    """Wait until the calculation is loaded and the log is read."""
    terminal.wait("READINGS  (")
    terminal.wait("0 entries")
    return terminal


@pytest.fixture(scope="module")
def shared(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Terminal]:
    """One console for the tests that leave nothing behind but text in its first field."""
    home = tmp_path_factory.mktemp("home")
    with console(home, make_site(home / "site"), ESCDELAY="50") as terminal:
        yield ready(terminal)


@pytest.fixture
def terminal(shared: Terminal) -> Terminal:
    return fresh(shared)


def fresh(terminal: Terminal) -> Terminal:
    """Go to the first field and empty it."""
    terminal.send(ESC)
    terminal.wait("> V-1")
    terminal.send(b"\r")
    terminal.wait(">p1 bottom")
    terminal.send(b"\x1b[F\x15")
    terminal.wait(">p1 bottom     .....")
    return terminal


def test_the_demo_opens_in_time_and_answers_what_was_typed_meanwhile(tmp_path: Path) -> None:
    env = {k: v for k, v in os.environ.items() if not k.startswith(("TANKCALC", "XDG_"))}
    env |= {"HOME": str(tmp_path), "TERM": "xterm-256color", "LC_ALL": "C.UTF-8"}
    with Terminal([sys.executable, "-m", "tankcalc"], env) as terminal:
        terminal.wait("F10 quit")
        terminal.send("2")
        seconds = terminal.wait(">p1 bottom     2")
        terminal.send("0 kPa")
        terminal.wait("RESULT !")
        assert "DEMO SITE" in terminal.row(1)
    assert seconds < 0.6 * SLOW


@pytest.mark.parametrize(
    ("wanted", "forms"),
    [
        ("HELP", (F1, b"\x1b[11~", b"\x1b[[A")),
        ("Nothing to log.", (F5, b"\x1bOT", b"\x1b[[E")),
        ("LOG A NOTE", (F6, b"\x1bOU")),
        ("LEAVE THE CONSOLE?", (F10, b"\x1bOY", b"\x11", b"\x03")),
    ],
)
def test_function_keys_of_every_terminal_family(
    terminal: Terminal, wanted: str, forms: tuple[bytes, ...]
) -> None:
    # As xterm, PuTTY (plain and VT100+) and the Linux console send them.
    for form in forms:
        terminal.send("7")
        terminal.wait(">p1 bottom   X 7")
        terminal.send(form)
        terminal.wait(wanted)
        if "?" in wanted or wanted.isupper():
            terminal.send(ESC)
            terminal.wait(lambda text: wanted not in text)
        fresh(terminal)


def test_editing_keys_of_every_terminal_family(terminal: Terminal) -> None:
    terminal.send(b"12\x08\x7f3\x1b[D4\x1b[C\x1bOD\x1bOC5\x1b[H6\x1b[1~7\x1bOF8\x1b[4~9")
    terminal.wait(">p1 bottom   X 7643589")


def test_esc_and_a_letter_close_together_are_esc_and_a_letter(terminal: Terminal) -> None:
    terminal.send(b"\x1bq")
    terminal.wait("LEAVE THE CONSOLE?")
    terminal.send(ESC)
    terminal.wait("> V-1")
    terminal.send(b"\x1b5")
    terminal.wait(">p1 bottom   X 5")


def test_a_byte_that_is_no_utf8_does_no_harm(terminal: Terminal) -> None:
    terminal.send(b"50\xb0\xe9 kPa")
    terminal.wait("6.505 m")


def test_hostile_pastes_are_inert(terminal: Terminal) -> None:
    hostile = ["\x1b]0;x\x07", "\x9b31m", "[/]", "\x00\x08", "\u202e50 kPa", "1e999 kPa", "%s{0}"]
    hostile += ["9" * 300, "-- kPa", "5 kPa; rm", "'\"\\", "nan kPa", "inf bar", "\t", "ﷺ", "١ kPa"]
    before = len(terminal.raw)
    for text in hostile * 5:
        terminal.send(f"\x1b[200~{text}\x1b[201~\x1b[F\x15")
    terminal.send("50 kPa")
    terminal.wait("6.505 m")
    sent = terminal.raw[before:]
    assert b"\x1b]0;x" not in sent
    assert "\u202e".encode() not in sent
    assert "\x9b".encode() not in sent


def test_another_size_is_taken_at_once(terminal: Terminal) -> None:
    terminal.resize(10, 40)
    terminal.wait("need 80x24, have 40x10")
    terminal.resize(40, 120)
    terminal.wait(lambda _: terminal.row(40).startswith("F1 help"))
    terminal.resize(24, 80)
    terminal.wait(lambda _: terminal.row(24).startswith("F1 help"))


def test_nothing_is_sent_while_nothing_happens(terminal: Terminal) -> None:
    terminal.send("50 kPa")
    terminal.wait("6.505 m")
    if time.time() % 60 > 55:
        time.sleep(61 - time.time() % 60)  # the clock in the header is due
    while terminal.quiet(0.3):
        pass
    assert terminal.quiet(3.0) == b""


def test_a_key_has_its_effect_soon_and_sends_little(terminal: Terminal) -> None:
    terminal.send("50.5 kPa\x1b[D\x1b[D\x1b[D\x1b[D")
    terminal.wait("6.565 m")
    terminal.quiet(0.3)
    seconds, sizes = [], []
    for n in range(20):
        wanted, key = ("6.570 m", "4") if n % 2 == 0 else ("6.565 m", "\x7f")
        begun, length = time.perf_counter(), len(terminal.raw)
        terminal.send(key)
        terminal.wait(lambda text, wanted=wanted: text.count(wanted) == 2)
        seconds.append(time.perf_counter() - begun)
        terminal.quiet(0.03)
        sizes.append(len(terminal.raw) - length)
    assert sorted(seconds)[18] < 0.03 * SLOW
    assert max(sizes) < 700


def test_what_is_saved_and_what_is_not_both_outlive_a_dropped_link(
    tmp_path: Path, site: Path
) -> None:
    with console(tmp_path, site) as terminal:
        ready(terminal).send("50 kPa")
        terminal.wait("* GOOD")
        terminal.send(F5)
        terminal.wait("LOG THIS READING?")
        terminal.send("JD\tvalve shut\r\r\r")
        terminal.wait("SAVED, on disk: entry 1")
        # An Enter too many has moved on to some field; without one a digit goes to the first.
        terminal.send(b"\x1b")
        terminal.wait("F1/?")
        terminal.send("98.7 mbar")
        terminal.wait("98.7 mbar")
        terminal.wait("RESULT *")
        assert terminal.hang_up() == 128 + signal.SIGHUP
    with console(tmp_path, site) as terminal:
        terminal.wait("Unfinished entry from")
        assert "p1 bottom 98.7 mbar" in terminal.text
        terminal.send(b"\r")
        terminal.wait(">p1 bottom     98.7 mbar")
        terminal.wait("1 entry")
        assert re.search(r"V-1 +6\.505 m +\S+ t GOOD +JD valve shut", terminal.text)


def drafts(home: Path, site: Path) -> list[dict[str, str]]:
    """What dead consoles of this user left."""
    found = list(orphans(home / ".local" / "state" / "tankcalc", str(site)))
    for orphan in found:
        orphan.release()
    return [dict(draft.typed) for orphan in found for draft in orphan.drafts]


def test_two_consoles_of_one_person_keep_an_entry_each_even_when_killed(
    tmp_path: Path, site: Path
) -> None:
    with console(tmp_path, site) as first, console(tmp_path, site) as second:
        first.wait("F10 quit")
        second.wait("F10 quit")
        first.send("50")
        second.send("60")
        first.wait(">p1 bottom   X 50")
        second.wait(">p1 bottom   X 60")
        second.process.kill()
        second.process.wait()
        assert drafts(tmp_path, site) == [{"p1": "60"}]
        first.process.kill()
        first.process.wait()
    assert sorted(draft["p1"] for draft in drafts(tmp_path, site)) == ["50", "60"]


def test_termination_restores_the_screen(tmp_path: Path, site: Path) -> None:
    with console(tmp_path, site) as terminal:
        terminal.wait("F10 quit")
        terminal.process.terminate()
        assert terminal.end() == 128 + signal.SIGTERM
        assert b"\x1b[?1049l" in terminal.raw
        assert b"\x1b[?25h" in terminal.raw
        assert b"Traceback" not in terminal.raw


def tour(terminal: Terminal) -> None:
    """Go through every kind of screen, save something and be refused something."""
    ready(terminal).send("50 kPa")
    terminal.wait("* GOOD")
    for key, wanted in ((F1, "HELP"), (F4, "DENSITY PROFILE"), (F10, "LEAVE"), (F5, "LOG THIS")):
        terminal.send(key)
        terminal.wait(wanted)
        if key != F5:
            terminal.send(ESC)
            terminal.wait(lambda text, wanted=wanted: wanted not in text)
    terminal.send("JD\r")
    terminal.wait("SAVED, on disk: entry 1")
    terminal.send("900 kPa")
    terminal.wait("X REFUSED")


def sgr(raw: bytes) -> set[str]:
    """Every attribute that was set."""
    codes = re.findall(rb"\x1b\[([0-9;]*)m", raw)
    return {part for code in codes for part in code.decode().split(";")}


def test_no_color_means_none_and_the_focus_is_seen_all_the_same(tmp_path: Path, site: Path) -> None:
    with console(tmp_path, site, NO_COLOR="1", ESCDELAY="50") as terminal:
        tour(terminal)
        colours = {str(n) for n in (*range(30, 39), *range(40, 49), *range(90, 98))}
        assert not colours & sgr(terminal.raw)
        seen = set()
        for _ in range(4):
            before = terminal.text
            terminal.send(b"\t")
            terminal.wait(lambda text, before=before: text != before)
            seen.add(next(n for n in range(1, 25) if re.search(r">[a-z]", terminal.row(n))))
        assert len(seen) == 4, "the mark moves with every Tab"


def test_an_old_terminal_gets_ascii_16_colours_and_nothing_invisible(
    tmp_path: Path, site: Path
) -> None:
    oil = site / "fluids" / "oil.toml"
    oil.write_text(oil.read_text().replace('"Oil"', '"Öl, 1 m³, 日本"'), encoding="utf-8")
    with console(tmp_path, site, "--ascii", ESCDELAY="50") as terminal:
        tour(terminal)
        cells = [terminal.screen.buffer[y][x] for y in range(24) for x in range(80)]
        assert all(cell.fg == "default" or cell.fg != cell.bg for cell in cells)
        terminal.send(F10 + b"\r")
        assert terminal.end() == 0
    assert max(terminal.raw) < 0x80
    assert not {"38", "48"} & sgr(terminal.raw)
    assert b"Traceback" not in terminal.raw


def test_a_disk_that_takes_nothing_is_told_and_the_entry_kept(tmp_path: Path, site: Path) -> None:
    words = [sys.executable, "-m", "tankcalc", "--profiles", str(site), "--log"]
    limited = ["sh", "-c", 'ulimit -f 0; exec "$@"', "sh", *words, str(tmp_path / "log.sqlite")]
    env = {k: v for k, v in os.environ.items() if not k.startswith("XDG_")}
    with Terminal(limited, env | {"HOME": str(tmp_path), "TERM": "xterm"}) as terminal:
        ready(terminal).send("50 kPa")
        terminal.wait("NOT KEPT")
        terminal.wait("* GOOD")
        terminal.send(F5)
        terminal.wait("LOG THIS READING?")
        terminal.send("JD\r")
        terminal.wait("NOT SAVED:")
        terminal.send(ESC)
        terminal.wait("NOT SAVED; the entry is kept here.")
        assert "50 kPa" in terminal.text
        assert "6.505 m" in terminal.text
