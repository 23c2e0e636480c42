"""``tankcalc shiftlog``: what it prints, what it logs, and how it exits."""

from __future__ import annotations

import json
import os
import pwd
import re
import sqlite3
from datetime import UTC, datetime, timedelta
from hashlib import sha256
from pathlib import Path
from typing import Any, NamedTuple
from zoneinfo import ZoneInfo

import pytest

from tankcalc.cli.main import main
from tankcalc.result import JSON_KEYS
from tankcalc.shiftlog import default_log, open_store

SITE = """\
name = "Skerry Point Terminal"
time_zone = "Europe/Lisbon"
[gravity]
value = "9.8 m/s2"
[air]
density = "1.2 kg/m3"
[shifts]
Day = "06:00"
Night = "18:00"
"""
TANK = """\
name = "Tank one"
contents = "oil"
[shape]
kind = "vertical cylinder"
diameter = "20 m"
height = "15 m"
bottom = { kind = "flat" }
roof = { kind = "flat" }
[transmitters.p1]
elevation = "0.5 m"
reads = "gauge"
"""
OIL = """\
name = "Oil"
[density]
model = "constant"
value = "850 kg/m3"
"""
UUID = re.compile(r"[0-9a-f]{8}-[0-9a-f]{4}-7[0-9a-f]{3}-[89ab][0-9a-f]{3}-[0-9a-f]{12}\n")


class Said(NamedTuple):
    code: int
    out: str
    err: str


class Terminal:
    """The command line on one site and one log."""

    def __init__(self, capsys: pytest.CaptureFixture[str], site: Path, log: Path) -> None:
        self._capsys = capsys
        self.site = site
        self.log = log

    def __call__(self, *words: str) -> Said:
        try:
            code = main(["--profiles", str(self.site), "--log", str(self.log), "shiftlog", *words])
        except SystemExit as left:
            code = int(left.code or 0)
        out, err = self._capsys.readouterr()
        assert "Traceback" not in err
        assert "defect" not in err
        return Said(code, out, err)

    def add(self, *words: str) -> str:
        """Add an entry that must be taken, and return its identifier."""
        return self.log_it("add", *words)

    def log_it(self, *words: str) -> str:
        """Log an entry of any kind that must be taken without a warning."""
        begun = f"tankcalc: this began a new log, {self.log}.\n" if not self.log.exists() else ""
        said = self(*words)
        assert (said.code, said.err) == (0, begun)
        assert UUID.fullmatch(said.out)
        return said.out.strip()

    def listed(self, *words: str) -> list[dict[str, Any]]:
        said = self("list", "--json", *words)
        assert said.code == 0
        listed: list[dict[str, Any]] = json.loads(said.out)
        return listed


@pytest.fixture
def terminal(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> Terminal:
    site = tmp_path / "site"
    for name, text in (
        ("site.toml", SITE),
        ("tanks/T-1.toml", TANK),
        ("tanks/T-2.toml", TANK.replace("one", "two")),
        ("fluids/oil.toml", OIL),
        ("fluids/brine.toml", OIL.replace("850", "1180").replace("Oil", "Brine")),
    ):
        (site / name).parent.mkdir(parents=True, exist_ok=True)
        (site / name).write_text(text)
    monkeypatch.delenv("TANKCALC_LOG", raising=False)
    return Terminal(capsys, site, tmp_path / "log.sqlite")


def test_a_reading_is_logged_with_what_it_comes_to(terminal: Terminal) -> None:
    before = datetime.now(UTC)
    identifier = terminal.add("T-1", "--p1", "85.3 kPa", "--who", "A. Rook", "--note", "steady")
    (entry,) = terminal.listed()
    assert entry["id"] == identifier
    assert (entry["kind"], entry["number"]) == ("reading", 1)
    assert (entry["tank"], entry["fluid"]) == ("T-1", "oil")
    assert entry["readings"] == {"p1": "85.3 kPa"}
    assert (entry["note"], entry["who"], entry["amends"]) == ("steady", "A. Rook", None)
    assert entry["user"] == pwd.getpwuid(os.getuid()).pw_name
    assert set(JSON_KEYS) | {"expanded_uncertainty", "warnings"} <= set(entry["result"])
    # p = (rho - rho_air) g h above the diaphragm at 0.5 m.
    assert entry["result"]["level_m"] == pytest.approx(0.5 + 85300 / ((850 - 1.2) * 9.8), abs=1e-6)
    read = datetime.fromisoformat(entry["time"])
    assert before - timedelta(seconds=1) < read <= datetime.now(UTC)
    assert entry["time"].endswith("Z")
    assert entry["entered"] == entry["time"]
    assert datetime.fromisoformat(entry["local_time"]) == read
    lisbon = read.astimezone(ZoneInfo("Europe/Lisbon"))
    assert entry["shift"] == ("Day" if 6 <= lisbon.hour < 18 else "Night")


def test_the_logged_result_is_that_of_convert(
    terminal: Terminal, capsys: pytest.CaptureFixture[str]
) -> None:
    words = ("--p1", "85.3 kPa", "--temperature", "18 degC", "--fluid", "brine")
    terminal.add("T-1", *words)
    assert main(["--profiles", str(terminal.site), "convert", "T-1", *words, "--json"]) == 0
    converted = json.loads(capsys.readouterr().out)
    (entry,) = terminal.listed()
    assert entry["result"] == converted
    assert entry["fluid"] == "brine"


def test_the_texts_behind_a_result_are_kept_as_they_were(terminal: Terminal) -> None:
    terminal.add("T-1", "--p1", "85.3 kPa")
    (terminal.site / "tanks" / "T-1.toml").write_text(TANK.replace("20 m", "21 m"))
    terminal.add("T-1", "--p1", "85.4 kPa")
    first, second = terminal.listed()
    store = open_store(terminal.log)
    assert store.get_config(first["versions"]["tank"]) == TANK.encode()
    assert b"21 m" in store.get_config(second["versions"]["tank"])
    assert store.get_config(first["versions"]["site"]) == SITE.encode()
    assert first["versions"]["fluid"] == sha256(OIL.encode()).hexdigest()
    store.close()


@pytest.mark.parametrize(
    ("second", "says"),
    [
        (("--p1", "85.3 kPa"), "p1 was typed exactly as at the reading before"),
        (("--p1", "95 kPa", "--moving", "static"), "declared at rest, but the mass has risen"),
        (
            ("--p1", "75 kPa", "--moving", "receiving"),
            "declared receiving, but the mass has fallen",
        ),
    ],
)
def test_a_reading_is_held_against_the_one_before(
    terminal: Terminal, second: tuple[str, ...], says: str
) -> None:
    terminal.add("T-1", "--p1", "85.3 kPa", "--at", "2025-12-01T08:00Z")
    said = terminal("add", "T-1", *second, "--at", "2025-12-01T09:00Z")
    assert said.code == 0
    assert says in said.err
    _, entry = terminal.listed()
    assert entry["result"]["status"] == "check"
    assert entry["moving"] == (second[3] if len(second) > 2 else None)
    assert any(says in warning["message"] for warning in entry["result"]["warnings"])


def test_a_note_needs_no_reading(terminal: Terminal) -> None:
    terminal.add("T-2", "--note", "Pump 3 noisy")
    (entry,) = terminal.listed()
    assert (entry["kind"], entry["tank"], entry["note"]) == ("note", "T-2", "Pump 3 noisy")
    assert (entry["result"], entry["readings"]) == (None, {})


def test_a_reading_that_contradicts_the_tank_is_logged_and_said(terminal: Terminal) -> None:
    said = terminal("add", "T-1", "--p1", "900 kPa")
    assert said.code == 3
    assert UUID.fullmatch(said.out)
    assert "logged as refused" in said.err
    (entry,) = terminal.listed()
    assert entry["id"] == said.out.strip()
    assert entry["result"]["status"] == "refused"
    assert entry["result"]["level_m"] is None
    for warning in entry["result"]["warnings"]:
        assert warning["message"] in said.err
    assert "refused:" in terminal("list").out


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("T-1",), "nothing was read"),
        (("T-1", "--note", "  "), "nothing was read"),
        (("T-1", "--note", "x", "--fluid", "brine"), "nothing was read"),
        (("T-1", "--p1", "85.3"), "--p1"),
        (("T-1", "--p1", "85.3 kPa", "--level", "3 apples"), "--level"),
        (("T-1", "--p1", ""), "--p1 is blank"),
        (("T-1", "--p1", "85.3 kPa", "--at", "yesterday"), "no date and time"),
        (("T-1", "--p1", "85.3 kPa", "--at", "2026-03-29T01:30"), "does not exist"),
        (("T-1", "--p1", "85.3 kPa", "--at", "2025-10-26T01:30"), "happens twice"),
        (("T-1", "--p1", "85.3 kPa", "--at", "9000-01-01T00:00Z"), "in the future"),
        (("T-1", "--p1", "85.3 kPa", "--note", "x" * 4001), "4001 characters"),
        (("T-1", "--p1", "85.3 kPa", "--fluid", "oill"), "oil"),
        (("T-9", "--p1", "85.3 kPa"), "T-9"),
        (("\x1b[31mT", "--note", "x"), "tank"),
        ((), "TANK"),
    ],
)
def test_what_cannot_be_read_is_refused_and_nothing_is_logged(
    terminal: Terminal, words: tuple[str, ...], message: str
) -> None:
    said = terminal("add", *words)
    assert (said.code, said.out) == (2, "")
    assert message in said.err
    assert "\x1b" not in said.err
    assert not terminal.log.exists()


def test_the_time_of_the_reading_decides_the_shift(terminal: Terminal) -> None:
    terminal.add("T-1", "--p1", "85.3 kPa", "--at", "2025-10-26T01:30+01:00")
    terminal.add("T-1", "--p1", "85.3 kPa", "--at", "2025-07-01T06:00")
    first, second = terminal.listed()
    assert (first["time"], first["shift"], first["shift_date"]) == (
        "2025-10-26T00:30:00Z",
        "Night",
        "2025-10-25",
    )
    assert first["local_time"] == "2025-10-26T01:30:00+01:00"
    assert (second["time"], second["shift"], second["shift_date"]) == (
        "2025-07-01T05:00:00Z",
        "Day",
        "2025-07-01",
    )
    assert second["entered"] > second["time"]
    assert terminal("list").out.count("entered late") == 2


def test_the_list_is_filtered_and_the_newest_is_last(terminal: Terminal) -> None:
    for hour, tank in ((8, "T-1"), (9, "T-2"), (10, "T-1"), (7, "T-1")):
        terminal.add(
            tank,
            "--level",
            f"3.00{hour} m",
            "--at",
            f"2025-12-01T{hour:02}:00Z",
            "--note",
            f"{hour}",
        )

    def notes(*words: str) -> list[str]:
        return [entry["note"] for entry in terminal.listed(*words)]

    assert notes() == ["8", "9", "10", "7"]
    assert notes("--last", "2") == ["10", "7"]
    assert notes("--tank", "T-1") == ["8", "10", "7"]
    assert notes("--tank", "T-1", "--last", "2") == ["10", "7"]
    assert notes("--since", "2025-12-01T09:00Z") == ["9", "10"]
    assert notes("--since", "2025-12-01T09:00", "--last", "1") == ["10"]
    assert notes("--since", "2025-12-01T09:00", "--tank", "T-2") == ["9"]
    assert notes("--since", "2030-01-01T00:00") == []


@pytest.mark.parametrize(
    "words",
    [("--last", "0"), ("--last", "-1"), ("--last", "x"), ("--last", "9" * 30), ("--since", "now")],
)
def test_a_filter_that_cannot_be_read_is_refused(
    terminal: Terminal, words: tuple[str, ...]
) -> None:
    said = terminal("list", *words)
    assert (said.code, said.out) == (2, "")
    assert said.err


def test_hostile_words_are_kept_exactly_and_printed_clean(terminal: Terminal) -> None:
    note = "\x1b[31mred\x1b]0;x\a [bold]x[/] =HYPERLINK(1) <script> \r\n‮ \udc80 漢字"
    terminal.add("T-1", "--p1", "85.3 kPa", "--note", note, "--who", note[:40])
    said = terminal("list")
    assert said.code == 0
    assert all(ch.isprintable() for line in said.out.splitlines() for ch in line)
    assert "漢字" in said.out
    (entry,) = terminal.listed()
    assert (entry["note"], entry["who"]) == (note, note[:40])
    assert terminal("list", "--json").out.isascii()
    assert terminal("verify").code == 0


def test_the_text_list_fits_80_columns(terminal: Terminal) -> None:
    terminal.add("T-1", "--p1", "85.3 kPa", "--temperature", "18 degC", "--note", "word " * 100)
    for units in ("metric", "us", "imperial"):
        lines = terminal("list", "--units", units).out.splitlines()
        assert len(lines) > 8
        assert max(map(len, lines)) <= 80


def test_an_empty_log_lists_as_empty_and_is_not_made(terminal: Terminal) -> None:
    said = terminal("list", "--json")
    assert (said.code, json.loads(said.out)) == (0, [])
    assert "nothing is logged yet" in said.err
    assert terminal("list").out == ""
    said = terminal("verify")
    assert said.code == 1
    assert "no log" in said.err
    assert not terminal.log.exists()


def test_a_whole_log_verifies(terminal: Terminal) -> None:
    for level in (1, 2, 3):
        terminal.add("T-1", "--level", f"{level} m")
    said = terminal("verify")
    assert (said.code, said.err) == (0, "")
    last = terminal.listed()[-1]
    assert said.out == f"entries 3\nhead    3:{last['hash']}\n"
    assert terminal("verify", "--head", f"3:{last['hash'][:16]}").code == 0


def test_a_changed_log_does_not_verify(terminal: Terminal) -> None:
    for level in (1, 2, 3):
        terminal.add("T-1", "--level", f"{level} m")
    db = sqlite3.connect(terminal.log)
    db.execute("DROP TRIGGER entry_no_update")
    db.execute("UPDATE entry SET body = replace(body, '2 m', '4 m') WHERE seq = 2")
    db.commit()
    db.close()
    said = terminal("verify")
    assert said.code == 4
    assert said.out.splitlines()[0] == "entries 1"
    assert "flaw    entry 2: its content or its hash was changed" in said.out
    assert "does not verify: entry 2: its content" in said.err


def test_a_log_that_is_shorter_than_it_was_does_not_verify(terminal: Terminal) -> None:
    terminal.add("T-1", "--level", "1 m")
    said = terminal("verify", "--head", "2:0123456789abcdef")
    assert said.code == 4
    assert "missing" in said.err


@pytest.mark.parametrize("head", ["", "2", "2:123", "x:0123456789abcdef", "2:" + "a" * 65])
def test_a_head_that_cannot_be_read_is_refused(terminal: Terminal, head: str) -> None:
    assert terminal("verify", "--head", head).code == 2


def test_a_file_that_is_no_log(terminal: Terminal) -> None:
    terminal.log.write_text("my notes\n" * 200)
    assert terminal("verify").code == 4
    said = terminal("add", "T-1", "--level", "1 m")
    assert (said.code, said.out) == (1, "")
    assert "not saved" in said.err
    assert terminal("list").code == 1
    assert terminal.log.read_text() == "my notes\n" * 200


def test_an_entry_that_cannot_be_saved_prints_no_identifier(terminal: Terminal) -> None:
    terminal.log = terminal.site / "site.toml" / "log.sqlite"
    said = terminal("add", "T-1", "--level", "1 m")
    assert (said.code, said.out) == (1, "")
    assert "not saved: the log" in said.err


def test_a_log_that_cannot_be_kept_is_refused_in_words(
    terminal: Terminal, capsys: pytest.CaptureFixture[str]
) -> None:
    words = ["--log", "mysql://op:secret@db/log", "shiftlog", "verify"]
    assert main(["--profiles", str(terminal.site), *words]) == 1
    said = capsys.readouterr()
    assert "no log is kept at" in said.err
    assert "secret" not in said.err


def test_verify_with_a_named_log_needs_no_site(
    terminal: Terminal, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    terminal.add("T-1", "--level", "1 m")
    (terminal.site / "site.toml").write_text("broken")
    assert terminal("verify").code == 0
    monkeypatch.setenv("TANKCALC_LOG", str(terminal.log))
    assert main(["--profiles", str(terminal.site), "shiftlog", "verify"]) == 0
    capsys.readouterr()


def test_without_an_option_the_log_is_in_the_users_data_folder(
    terminal: Terminal,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path / "data"))
    words = ["--profiles", str(terminal.site), "shiftlog", "add", "T-1", "--level", "1 m"]
    assert main(words) == 0
    assert UUID.fullmatch(capsys.readouterr().out)
    path = default_log("Skerry Point Terminal")
    assert path == tmp_path / "data" / "tankcalc" / "skerry-point-terminal.sqlite"
    store = open_store(path)
    assert store.head()[0] == 1
    store.close()


@pytest.mark.parametrize("words", [(), ("--help",), ("add", "--help"), ("list", "--help")])
def test_help_names_what_there_is(terminal: Terminal, words: tuple[str, ...]) -> None:
    said = terminal(*words)
    assert said.code == (0 if words else 2)
    assert re.search(r"ACTION|TANK|--since", said.out + said.err)
