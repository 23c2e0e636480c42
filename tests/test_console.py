"""The console's dealings with the terminal and the disk, short of a screen."""

from __future__ import annotations

import inspect
import io
import json
import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest
from sites import environment, make_site

from tankcalc.tui import terminal
from tankcalc.tui.desk import Desk
from tankcalc.tui.draft import Draft, Journal, orphans, state_folder
from tankcalc.tui.drafts import Drafts, draft_lines

SITE = "/some/site"
DRAFT = Draft(SITE, "V-1", "", {"p1": "98.7 mbar"}, 1_782_869_400_000_000)


class Tty(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_defaults_are_set_and_leave_what_the_user_set() -> None:
    env = {"ESCDELAY": "50"}
    terminal.harden(env)
    assert env["ESCDELAY"] == "50"
    assert env["TEXTUAL_DISABLE_KITTY_KEY"] == "1"


@pytest.mark.parametrize("term", ["", "dumb", "unknown", None])
def test_a_terminal_that_cannot_place_text_is_refused(term: str | None) -> None:
    env = {} if term is None else {"TERM": term}
    assert "TERM" in (terminal.refusal(env, (Tty(), Tty())) or "")


def test_a_pipe_is_refused_and_a_terminal_taken() -> None:
    assert "needs a terminal" in (terminal.refusal({"TERM": "xterm"}, (Tty(), io.StringIO())) or "")
    assert terminal.refusal({"TERM": "xterm"}, (Tty(), Tty())) is None


def test_without_a_terminal_the_command_says_what_to_use_instead(tmp_path: Path) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "tankcalc"],
        env=environment(tmp_path),
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 2
    assert "tankcalc convert" in done.stderr
    assert "Traceback" not in done.stderr


@pytest.mark.parametrize(
    ("env", "encoding", "utf8"),
    [
        ({"LANG": "en_GB.UTF-8"}, "utf-8", True),
        ({"LANG": "C.utf8"}, "utf-8", True),
        ({"LANG": "en_GB.UTF-8", "LC_ALL": "C"}, "utf-8", False),
        ({"LANG": "de_DE.ISO-8859-1"}, "utf-8", False),
        ({"LANG": "de_DE@euro"}, "utf-8", False),
        ({"LANG": "en_GB.UTF-8"}, "latin-1", False),
        ({}, "utf-8", False),
    ],
)
def test_ascii_is_chosen_where_the_locale_knows_no_more(
    env: dict[str, str], encoding: str, utf8: bool
) -> None:
    assert terminal.speaks_utf8(env, encoding) is utf8


def test_any_byte_can_be_typed() -> None:
    decoder = terminal.Decoder()
    assert decoder.decode(b"18\xb0C") == "18\N{REPLACEMENT CHARACTER}C"
    assert decoder.decode("°".encode()[:1]) == ""
    assert decoder.decode("°".encode()[1:]) == "°"


def test_a_terminal_that_is_gone_hangs_the_program_up_once(monkeypatch: pytest.MonkeyPatch) -> None:
    sent: list[int] = []
    monkeypatch.setattr(os, "kill", lambda _pid, number: sent.append(number))
    decoder = terminal.Decoder()
    decoder.decode(b"")
    decoder.decode(b"")
    assert sent == [signal.SIGHUP]


def test_the_library_still_looks_up_what_is_replaced() -> None:
    # Fails when an upgrade makes the replacement in `patch_input` void: then look at it again.
    from textual import _ansi_sequences
    from textual.drivers import linux_driver

    source = inspect.getsource(linux_driver.LinuxDriver.run_input_thread)
    assert 'getincrementaldecoder("utf-8")().decode' in source
    assert isinstance(_ansi_sequences.ANSI_SEQUENCES_KEYS, dict)


def test_the_state_folder_is_private_and_follows_the_standard(tmp_path: Path) -> None:
    assert state_folder({"XDG_STATE_HOME": "/x"}) == Path("/x/tankcalc")
    assert state_folder({"XDG_STATE_HOME": "x"}) == Path.home() / ".local/state/tankcalc"
    Journal(tmp_path / "a" / "b").close()
    assert (tmp_path / "a" / "b").stat().st_mode & 0o777 == 0o700


def left_behind(folder: Path, *drafts: Draft) -> None:
    """Leave a journal as a console does that is killed."""
    journal = Journal(folder)
    for draft in drafts:
        journal.keep(draft)
    os.close(journal._fd)


def test_a_draft_of_a_dead_console_is_found_again(tmp_path: Path) -> None:
    left_behind(tmp_path, Draft(SITE, "V-1", "", {"p1": "9"}, 1), DRAFT)
    found = list(orphans(tmp_path, SITE))
    assert [orphan.drafts for orphan in found] == [[DRAFT]]
    found[0].remove()
    assert list(tmp_path.iterdir()) == []


def test_a_draft_of_a_living_console_is_left_alone(tmp_path: Path) -> None:
    journal = Journal(tmp_path)
    journal.keep(DRAFT)
    assert list(orphans(tmp_path, SITE)) == []
    journal.close()
    assert len(list(orphans(tmp_path, SITE))) == 1


def test_two_consoles_keep_two_journals(tmp_path: Path) -> None:
    first, second = Journal(tmp_path), Journal(tmp_path)
    first.keep(DRAFT)
    second.keep(Draft(SITE, "V-2", "", {"p1": "1 bar"}, 2))
    first.close()
    second.close()
    found = [draft.tank for orphan in orphans(tmp_path, SITE) for draft in orphan.drafts]
    assert sorted(found) == ["V-1", "V-2"]


def test_a_draft_is_taken_by_one_console_only(tmp_path: Path) -> None:
    left_behind(tmp_path, DRAFT)
    first = list(orphans(tmp_path, SITE))
    assert list(orphans(tmp_path, SITE)) == []
    first[0].release()
    assert len(list(orphans(tmp_path, SITE))) == 1


def test_what_was_logged_or_cleared_leaves_nothing(tmp_path: Path) -> None:
    journal = Journal(tmp_path)
    journal.keep(DRAFT)
    journal.keep(Draft(SITE, "V-1", "", {}, 2))
    assert journal.path.read_bytes() == b""
    journal.close()
    assert list(tmp_path.iterdir()) == []


def test_a_line_cut_short_is_skipped(tmp_path: Path) -> None:
    left_behind(tmp_path, DRAFT)
    (path,) = tmp_path.iterdir()
    with path.open("ab") as file:
        file.write(b'{"site":"/some/site","tank":"V-1","typ\xff')
    assert [orphan.drafts for orphan in orphans(tmp_path, SITE)] == [[DRAFT]]


def test_a_draft_of_another_site_waits_for_that_site(tmp_path: Path) -> None:
    left_behind(tmp_path, DRAFT)
    assert list(orphans(tmp_path, "/another")) == []
    assert len(list(orphans(tmp_path, SITE))) == 1


def test_drafts_are_adopted_and_their_journal_goes(tmp_path: Path) -> None:
    left_behind(tmp_path, DRAFT)
    drafts, desk = Drafts(tmp_path, SITE), Desk(["V-0", "V-1"])
    drafts.open()
    drafts.adopt(desk)
    assert desk.tank_name == "V-1"
    assert desk.entry.fields == {"p1": "98.7 mbar"}
    drafts.close()
    (mine,) = tmp_path.iterdir()
    assert json.loads(mine.read_text())["typed"] == {"p1": "98.7 mbar"}


def test_the_banner_tells_when_and_what(tmp_path: Path) -> None:
    later = DRAFT.at_us + 14 * 60_000_000
    text = "".join(word for line in draft_lines([DRAFT], later, 200) for word, _ in line)
    assert text.startswith("Unfinished entry from ")
    assert text.endswith("(14 min ago), V-1: p1 bottom 98.7 mbar")


def test_a_state_folder_that_is_a_file_is_told_and_stops_nothing(tmp_path: Path) -> None:
    (tmp_path / "state").write_text("")
    drafts, desk = Drafts(tmp_path / "state", SITE), Desk(["V-1"])
    drafts.open()
    assert "NOT KEPT" in drafts.trouble
    drafts.keep(desk, "V-1", 1)
    drafts.settle()
    drafts.close()


def test_the_options_of_the_command(tmp_path: Path) -> None:
    site = make_site(tmp_path / "site")
    done = subprocess.run(
        [sys.executable, "-m", "tankcalc", "console", "--help", "--profiles", str(site)],
        env=environment(tmp_path),
        capture_output=True,
        text=True,
        check=True,
    )
    for option in ("--ascii", "--mouse", "--profiles", "--log", "--units"):
        assert option in done.stdout
