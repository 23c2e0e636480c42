"""``tankcalc shiftlog``: amending, withdrawing, declaring, and finding it all again."""

from __future__ import annotations

import json
import re
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

import pytest
from shiftlog_samples import NOON_US, sample
from test_cli_shiftlog import TANK, Terminal, terminal

from tankcalc.limits.kinds import ORDER
from tankcalc.shiftlog import iso_utc, now_us, open_store
from tankcalc.shiftlog.carried import open_faults
from tankcalc.shiftlog.store import Row

__all__ = ["terminal"]

HOUR_US = 3_600_000_000


def history(terminal: Terminal, name: str) -> list[dict[str, Any]]:
    said = terminal("history", name, "--json")
    assert said.code == 0
    listed: list[dict[str, Any]] = json.loads(said.out)
    return listed


def test_an_amendment_takes_the_place_of_a_reading_that_stays(terminal: Terminal) -> None:
    at = ("--at", "2025-12-01T08:00Z")
    words = ("--temperature", "18 degC", "--fluid", "brine", "--moving", "static", *at)
    first = terminal.add("T-1", "--p1", "85.3 kPa", *words)
    second = terminal.log_it(
        "amend", first, "--p1", "95.3 kPa", "--reason", "misread", "--who", "B"
    )
    old, new = terminal.listed()
    assert (old["id"], old["state"], old["state_by"]) == (first, "amended", second)
    assert (new["id"], new["state"], new["amends"]) == (second, "stands", first)
    assert (new["kind"], new["reason"], new["who"]) == ("amendment", "misread", "B")
    assert new["readings"] == {"p1": "95.3 kPa", "temperature": "18 degC"}
    assert (new["fluid"], new["moving"], new["time"]) == ("brine", "static", old["time"])
    assert new["entered"] > old["entered"]
    # p = (rho - rho_air) g h above the diaphragm at 0.5 m, with the brine of 1180 kg/m3.
    assert new["result"]["level_m"] == pytest.approx(0.5 + 95300 / ((1180 - 1.2) * 9.8), abs=1e-6)
    text = terminal("list").out
    assert "AMENDED by entry 2" in text
    assert "amends entry 1: " in text
    assert "reason: misread" in text
    assert terminal("verify").code == 0


def test_an_amendment_is_worked_out_with_the_profiles_of_now(terminal: Terminal) -> None:
    identifier = terminal.add("T-1", "--p1", "85.3 kPa")
    (terminal.site / "tanks" / "T-1.toml").write_text(TANK.replace("20 m", "10 m"))
    terminal.log_it("amend", identifier, "--reason", "the diameter was wrong")
    old, new = terminal.listed()
    assert new["readings"] == old["readings"]
    assert new["result"]["volume_m3"] == pytest.approx(old["result"]["volume_m3"] / 4)


def test_an_amendment_of_an_amendment_is_one_of_the_original(terminal: Terminal) -> None:
    first = terminal.add("T-1", "--level", "3 m", "--temperature", "18 degC")
    second = terminal.log_it("amend", first, "--level", "4 m", "--reason", "a")
    third = terminal.log_it("amend", second, "--without", "temperature", "--reason", "b")
    assert [entry["id"] for entry in history(terminal, second)] == [first, second, third]
    assert [entry["state_by"] for entry in terminal.listed()] == [third, third, None]
    assert terminal.listed()[2]["readings"] == {"level": "4 m"}
    assert terminal.listed()[2]["amends"] == first
    said = terminal("amend", "1", "--without", "p9", "--reason", "c")
    assert (said.code, said.out) == (2, "")
    assert "the entry holds level" in said.err


def test_a_refused_amendment_is_logged_and_said(terminal: Terminal) -> None:
    terminal.add("T-1", "--p1", "85.3 kPa")
    said = terminal("amend", "1", "--p1", "900 kPa", "--reason", "so it stood on the form")
    assert said.code == 3
    assert "logged as refused" in said.err
    assert terminal.listed()[1]["judgement"] == "rejected"


def test_a_withdrawn_entry_stays_in_sight_and_is_final(terminal: Terminal) -> None:
    first = terminal.add("T-1", "--level", "3 m")
    last = terminal.log_it("withdraw", "1", "--reason", "it was T-2")
    old, new = terminal.listed()
    assert (old["state"], old["state_by"]) == ("withdrawn", last)
    assert (new["kind"], new["amends"], new["tank"]) == ("withdrawal", first, "T-1")
    text = terminal("list").out
    assert "WITHDRAWN by entry 2" in text
    assert "withdraws entry 1" in text
    for words in (
        ("amend", first, "--level", "4 m", "--reason", "x"),
        ("withdraw", first, "--reason", "x"),
    ):
        said = terminal(*words)
        assert (said.code, said.out) == (2, "")
        assert "entry 1 was withdrawn by entry 2 already" in said.err
    assert open_store(terminal.log).latest() == {}


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("amend", "7", "--reason", "x"), "no entry number 7"),
        (("amend", "0" * 32, "--reason", "x"), "holds no entry 00000000-"),
        (("amend", "last", "--reason", "x"), "names no entry"),
        (("amend", "1"), "--reason"),
        (("amend", "1", "--reason", "  ", "--level", "4 m"), "for a reason"),
        (("amend", "1", "--reason", "x", "--level", "4"), "--level"),
        (("amend", "1", "--reason", "x", "--level", ""), "--level is blank"),
        (("amend", "1", "--reason", "x", "--without", "level"), "no reading was given"),
        (("amend", "1", "--reason", "x", "--received", "3 m3"), "this entry is a reading"),
        (("amend", "2", "--reason", "x", "--level", "3 m"), "this entry is a movement"),
        (("amend", "3", "--reason", "x"), "entry 3 is a note, which cannot be amended"),
        (("withdraw", "1"), "--reason"),
        (("withdraw", "1", "--reason", ""), "for a reason"),
        (("history", "9"), "no entry number 9"),
        (("history", "0" * 32), "no entry"),
        (("move", "T-1"), "--received"),
        (("move", "T-1", "--received", "3 m3", "--delivered", "3 m3"), "not allowed"),
        (("move", "T-1", "--received", "3"), "3"),
        (("move", "T-1", "--received", "3 m3", "--other", "T-1"), "both ends"),
        (("move", "T-1", "--received", "3 m3", "--other", "T-9"), "T-9"),
        (("move", "T-9", "--received", "3 m3"), "T-9"),
        (("sign", "--on"), "--who"),
        (("sign", "--who", "A"), "--on"),
        (("sign", "--on", "--who", " "), "name or initials"),
        (("acknowledge", "alert", "above_high_high", "--who", "A", "--until", "2020-01-01T00:00Z",
          "--reason", "x"), "is past"),
        (("acknowledge", "entry", "99", "--who", "A"), "no entry number 99"),
        (("acknowledge", "entry", "0" * 32, "--who", "A"), "no entry"),
        (("acknowledge", "gossip", "x", "--who", "A"), "gossip"),
        (("fault", "T-1", "p1", "--opened"), "--note"),
        (("fault", "T-1", "p9", "--opened", "--note", "x"), "p1, level gauge"),
        (("fault", "T-1", "p1", "--closed", "--note", "x"), "no fault of p1 is open"),
        (("list", "--tank", "T-9"), "T-1, T-2"),
        (("list", "--kind", "gossip"), "gossip"),
        (("list", "--shift", "Day"), "Day"),
        (("list", "--shift", "2025-12-01 Late"), "Late"),
    ],
)  # fmt: skip
def test_what_cannot_be_done_is_refused_and_nothing_is_logged(
    terminal: Terminal, words: tuple[str, ...], message: str
) -> None:
    terminal.add("T-1", "--level", "3 m")
    terminal.log_it("move", "T-1", "--received", "3 m3")
    terminal.add("T-1", "--note", "x")
    said = terminal(*words)
    assert (said.code, said.out) == (2, "")
    assert message in said.err
    assert len(terminal.listed()) == 3


def test_a_movement_is_logged_and_amended(terminal: Terminal) -> None:
    at = ("--at", "2025-12-01T09:00Z")
    terminal.log_it("move", "T-1", "--delivered", "500 m3", "--other", "T-2", "--note", "n", *at)
    (entry,) = terminal.listed()
    assert (entry["kind"], entry["tank"], entry["readings"]) == ("movement", "T-1", {})
    assert entry["details"] == {"delivered": "500 m3", "other": "T-2"}
    assert entry["result"] == {"volume_m3": -500.0, "mass_kg": None}
    assert "delivered 500 m3 to T-2" in terminal("list").out
    terminal.log_it("amend", "1", "--received", "420 t", "--reason", "the other way")
    _, new = terminal.listed()
    assert new["details"] == {"received": "420 t", "other": "T-2"}
    assert new["result"] == {"volume_m3": None, "mass_kg": 420_000.0}
    assert (new["time"], new["readings"]) == (entry["time"], {})
    terminal.log_it("amend", "1", "--other", "", "--reason", "from a ship")
    assert terminal.listed()[2]["details"] == {"received": "420 t", "other": ""}
    assert open_store(terminal.log).latest() == {}


def test_who_is_on_and_what_was_taken_note_of(terminal: Terminal) -> None:
    terminal.log_it("sign", "--on", "--who", "B. Tern", "--note", "quiet")
    first = terminal.add("T-1", "--level", "3 m")
    terminal.log_it("acknowledge", "handover", "2025-12-01 Day", "--who", "B. Tern")
    terminal.log_it("acknowledge", "entry", "2", "--who", "B. Tern")
    until = iso_utc(now_us() // 1_000_000 * 1_000_000 + HOUR_US)
    words = ("--tank", "T-1", "--until", until, "--reason", "being filled", "--who", "B. Tern")
    terminal.log_it("acknowledge", "alert", "above_high_high", *words)
    terminal.log_it("sign", "--off", "--who", "B. Tern")
    kinds = ["sign-on", "reading", *["acknowledgement"] * 3, "sign-off"]
    listed = terminal.listed()
    assert [entry["kind"] for entry in listed] == kinds
    assert listed[4]["details"] == {"of": "alert", "what": "above_high_high", "until": until}
    assert [entry["number"] for entry in history(terminal, first)] == [2, 4]
    text = terminal("list").out
    for said in (
        "signs on",
        "acknowledges handover 2025-12-01 Day",
        "acknowledges entry 2",
        "sets aside alert above_high_high until",
        "reason: being filled",
        "signs off",
    ):
        assert said in text
    assert max(map(len, text.splitlines())) <= 80


def test_a_fault_is_opened_once_and_closed(terminal: Terminal) -> None:
    first = terminal.log_it("fault", "T-1", "p1", "--opened", "--note", "reads nothing")
    said = terminal("fault", "T-1", "P1", "--opened", "--note", "still")
    assert said.code == 2
    assert "open since entry 1" in said.err
    terminal.log_it("fault", "T-1", "level-gauge", "--opened", "--note", "sticks")
    terminal.log_it("fault", "T-1", "p1", "--closed", "--note", "fuse")
    listed = terminal.listed()
    assert [entry["kind"] for entry in listed] == ["note"] * 3
    assert listed[1]["details"] == {"fault": "opened", "instrument": "level gauge"}
    assert (listed[2]["about"], listed[2]["amends"]) == (first, None)
    assert "fault of p1 closed" in terminal("list").out
    assert terminal("fault", "T-1", "p1", "--closed", "--note", "x").code == 2


def test_a_result_in_doubt_is_accepted_or_rejected_with_a_reason(terminal: Terminal) -> None:
    terminal.add("T-1", "--p1", "85.3 kPa", "--at", "2025-12-01T08:00Z")
    words = ("add", "T-1", "--p1", "85.3 kPa")
    assert terminal(*words, "--at", "2025-12-01T09:00Z", "--reason", "quiet").code == 0
    assert terminal(*words, "--at", "2025-12-01T10:00Z", "--reject").code == 2
    more = ("--reject", "--reason", "no", "--witness", "C")
    assert terminal(*words, "--at", "2025-12-01T10:00Z", *more).code == 0
    listed = terminal.listed()
    assert [entry["judgement"] for entry in listed] == [
        "accepted",
        "accepted with reason",
        "rejected",
    ]
    assert listed[2]["witness"] == "C"
    text = terminal("list").out
    assert "accepted: quiet" in text
    assert "rejected by the operator: no" in text


def test_the_status_of_an_instrument_is_kept(terminal: Terminal) -> None:
    ranged = TANK + 'range = ["0 kPa", "160 kPa"]\n'
    (terminal.site / "tanks" / "T-1.toml").write_text(ranged)
    terminal("add", "T-1", "--p1", "3.5 mA", "--level", "3 m")
    assert terminal.listed()[0]["signals"] == {"p1": "failed"}


def test_the_list_by_kind_and_by_shift(terminal: Terminal) -> None:
    for hour in ("05", "07", "13", "19"):
        terminal.add("T-1", "--level", f"3.0{hour} m", "--at", f"2025-12-01T{hour}:00Z")
    terminal.log_it("move", "T-1", "--received", "3 m3", "--at", "2025-12-01T08:00Z")

    def numbers(*words: str) -> list[int]:
        return [entry["number"] for entry in terminal.listed(*words)]

    assert numbers("--kind", "movement") == [5]
    assert numbers("--shift", "2025-12-01 Day") == [2, 3, 5]
    assert numbers("--shift", "2025-12-01 day", "--kind", "reading", "--last", "1") == [3]
    assert numbers("--shift", "2025-11-30 Night") == [1]
    assert numbers("--shift", "2025-12-01 Day", "--since", "2025-12-01T07:30Z") == [3, 5]
    assert numbers("--kind", "reading", "--since", "2025-12-01T07:00Z") == [2, 3, 4]
    assert numbers("--kind", "reading", "--last", "2") == [3, 4]


def test_the_head_stands_at_the_end_of_a_list(terminal: Terminal) -> None:
    terminal.add("T-1", "--level", "3 m")
    (entry,) = terminal.listed()
    last = terminal("list").out.splitlines()[-1]
    assert last == f"head    1:{entry['hash'][:16]}"
    assert terminal("list", "--json").err == f"{last}\n"
    assert terminal("history", "1").out.splitlines()[-1] == last
    assert terminal("verify", "--head", last.removeprefix("head").strip()).code == 0


def test_a_log_that_is_begun_is_said(terminal: Terminal, tmp_path: Path) -> None:
    terminal.add("T-1", "--level", "3 m")
    assert "began" not in terminal("add", "T-1", "--level", "3 m", "--moving", "static").err
    terminal.log = tmp_path / "lgo.sqlite"
    said = terminal("add", "T-1", "--level", "3 m")
    assert said.code == 0
    assert f"this began a new log, {terminal.log}" in said.err


def test_a_clock_that_stepped_back_is_said_and_logged(
    terminal: Terminal, monkeypatch: pytest.MonkeyPatch
) -> None:
    terminal.add("T-1", "--level", "3 m")
    back = now_us() - 2 * HOUR_US
    for module in ("tankcalc.shiftlog.clock", "tankcalc.cli.shiftlog.adding"):
        monkeypatch.setattr(f"{module}.now_us", lambda: back)
    said = terminal("add", "T-1", "--level", "3.1 m")
    assert said.code == 0
    assert re.search(r"clock shows \S+Z where \S+Z was due \(-7(200|199)\.\d s\)", said.err)
    listed = terminal.listed()
    assert [entry["kind"] for entry in listed] == ["reading", "clock-step", "reading"]
    assert listed[2]["id"] == said.out.strip()
    was, is_ = (datetime.fromisoformat(listed[1]["details"][key]) for key in ("was", "is"))
    assert abs(was - is_ - timedelta(hours=2)) < timedelta(minutes=1)
    assert is_ < datetime.now(UTC)
    assert "the clock stepped" in terminal("list").out


def test_results_come_out_again_or_are_listed(
    terminal: Terminal, monkeypatch: pytest.MonkeyPatch
) -> None:
    terminal.add("T-1", "--p1", "85.3 kPa", "--temperature", "18 degC")
    terminal.log_it("amend", "1", "--p1", "85.4 kPa", "--reason", "x")
    terminal("add", "T-1", "--p1", "900 kPa")
    (terminal.site / "tanks" / "T-1.toml").unlink()
    said = terminal("verify", "--recompute")
    assert (said.code, said.err) == (0, "")
    assert said.out.splitlines()[-1] == "results 3, of which 0 come out otherwise"
    monkeypatch.setattr("tankcalc.result.JSON_KEYS", ("level_m",))
    monkeypatch.setattr("tankcalc.shiftlog.recompute.__version__", "9.9")
    said = terminal("verify", "--recompute")
    assert said.code == 1
    assert re.search(r"entry 1 \(by version [\d.]+\): volume_m3 was [\d.]+, is missing", said.out)
    assert "3 of 3 results" in said.err


@pytest.mark.parametrize(
    "action", ["amend", "withdraw", "move", "sign", "acknowledge", "fault", "history", "verify"]
)
def test_every_action_has_help(terminal: Terminal, action: str) -> None:
    said = terminal(action, "--help")
    assert said.code == 0
    assert f"shiftlog {action}" in said.out


def test_water_drawn_off_is_out_of_the_tank_and_to_nowhere(terminal: Terminal) -> None:
    terminal.log_it("move", "T-1", "--drawn", "2 m3")
    (entry,) = terminal.listed()
    assert entry["details"] == {"drawn": "2 m3", "other": ""}
    assert entry["result"] == {"volume_m3": -2.0, "mass_kg": None}
    assert "drawn 2 m3" in terminal("list").out
    said = terminal("move", "T-1", "--drawn", "2 m3", "--other", "T-2")
    assert said.code == 2
    assert "to no other tank" in said.err
    terminal.log_it("amend", "1", "--drawn", "3 m3", "--reason", "misread")
    assert terminal.listed()[1]["details"] == {"drawn": "3 m3", "other": ""}


def test_an_amendment_keeps_the_note_unless_another_is_given(terminal: Terminal) -> None:
    terminal.add("T-1", "--level", "3 m", "--note", "dip agrees")
    terminal.log_it("move", "T-1", "--received", "3 m3", "--note", "from a lorry")
    terminal.log_it("amend", "1", "--level", "3.1 m", "--reason", "typed wrong")
    terminal.log_it("amend", "2", "--received", "4 m3", "--reason", "typed wrong")
    terminal.log_it("amend", "1", "--level", "3.2 m", "--note", "", "--reason", "again")
    terminal.log_it("amend", "1", "--level", "3.2 m", "--note", "dipped", "--reason", "again")
    notes = [entry["note"] for entry in terminal.listed()[2:]]
    assert notes == ["dip agrees", "from a lorry", "", "dipped"]


def test_a_fault_is_not_closed_before_it_was_opened(terminal: Terminal) -> None:
    opened = ("--opened", "--at", "2025-12-01T10:00Z", "--note", "reads nothing")
    terminal.log_it("fault", "T-1", "p1", *opened)
    closed = ("fault", "T-1", "p1", "--closed", "--note", "fuse", "--at")
    said = terminal(*closed, "2025-12-01T09:59Z")
    assert said.code == 2
    assert "was opened 2025-12-01 10:00" in said.err
    terminal.log_it(*closed, "2025-12-01T10:01Z")
    assert len(terminal.listed()) == 2


def test_faults_are_open_by_the_time_they_are_of_and_not_by_when_they_were_entered() -> None:
    opened = {"fault": "opened", "instrument": "p1"}
    entries = (
        sample(kind="note", tank="T-1", typed=opened | {"fault": "closed"}, t_us=NOON_US - 1),
        sample(kind="note", tank="T-1", typed=opened, t_us=NOON_US - 2),
        sample(kind="note", tank="T-2", typed=opened, t_us=NOON_US - 1),
        sample(kind="note", tank="T-2", typed=opened | {"fault": "closed"}, t_us=NOON_US - 2),
    )
    rows = [Row(seq, entry, bytes(32)) for seq, entry in enumerate(entries, 1)]
    assert open_faults(rows) == {("T-2", "p1"): rows[2]}


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("alert", "high_high"), "above_high_high"),
        (("handover", "2025-12-01 Late"), "Day, Night"),
        (("handover", "2099-12-01 Day"), "has not begun"),
    ],
)
def test_what_there_is_not_is_not_acknowledged(
    terminal: Terminal, words: tuple[str, ...], message: str
) -> None:
    said = terminal("acknowledge", *words, "--who", "A. Rook")
    assert (said.code, said.out) == (2, "")
    assert message in said.err


def test_the_codes_of_alerts_are_in_the_help(terminal: Terminal) -> None:
    words = terminal("acknowledge", "--help").out.replace(",", " ").split()
    assert set(ORDER) <= {word.rstrip(".") for word in words}


@pytest.mark.parametrize(
    ("amount", "message"),
    [
        # The tank is 20 m wide and 15 m high: 1500 pi m3.
        ("4712 m3", ""),
        ("4713 m3", "is more than the tank holds (4712.39 m3)"),
        ("4712 t", ""),
        ("4713 t", "is more than the tank holds of water (4712.39 t)"),
    ],
)
def test_a_movement_of_more_than_the_tank_holds_is_logged_and_said(
    terminal: Terminal, amount: str, message: str
) -> None:
    terminal.log_it("move", "T-1", "--received", "1 m3")
    for words in (
        ("move", "T-1", "--delivered", amount),
        ("amend", "1", "--received", amount, "--reason", "misread"),
    ):
        said = terminal(*words)
        assert said.code == 0
        assert message in said.err
        assert bool(message) == bool("more than" in said.err)


def test_what_a_screen_would_hide_is_shown(terminal: Terminal) -> None:
    terminal.add("T-1", "--note", "red\x1b[31m next\u202e")
    assert "note: red␛[31m next<U+202E>" in terminal("list").out
    assert "note: red␛[31m next<U+202E>" in terminal("history", "1").out


@pytest.mark.parametrize("name", ["", ".", "/"])
@pytest.mark.parametrize("words", [("archive", "--before", "2025"), ("backup",), ("export",)])
def test_a_name_that_names_no_file_is_refused(
    terminal: Terminal, words: tuple[str, ...], name: str
) -> None:
    terminal.add("T-1", "--level", "3 m", "--at", "2024-12-01T10:00Z")
    said = terminal(*words, name)
    assert (said.code, said.out) == (2, "")
    assert "names no file" in said.err
