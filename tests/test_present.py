"""What the console says, as plain text: no terminal library is needed to check it."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import single, upright

from tankcalc.gauging import evaluate
from tankcalc.readings import Readings
from tankcalc.report import rows
from tankcalc.shiftlog import Row
from tankcalc.shiftlog.entry import Entry
from tankcalc.tui import present
from tankcalc.tui.ascii import columns, to_ascii
from tankcalc.tui.commands import COMMANDS, footer
from tankcalc.tui.desk import Answer, Desk
from tankcalc.tui.desk import Entry as Typed
from tankcalc.tui.fields import FIELDS, NOTE, READINGS, fields_of, takes
from tankcalc.tui.help_text import help_lines
from tankcalc.tui.log_lines import clock, log_row
from tankcalc.tui.log_pages import Seen
from tankcalc.tui.present import Line, figure
from tankcalc.tui.scene import bands, labels
from tankcalc.typed import NAMES

HOSTILE = "T\x1b[31m\x9b2J\u202e[bold][/]\nx"
TANK = upright(file="V-1", limits_m={"high_high": 14.0, "maximum_working": 13.6})
OIL = single(850.0)


def words(lines: list[Line]) -> str:
    return "\n".join("".join(text for text, _ in line) for line in lines)


def answered(**readings: float) -> Answer:
    result = evaluate(TANK, OIL, Readings(**readings))
    return Answer(TANK, OIL, {"p1": "50 kPa"}, {}, result)


GOOD = answered(p1_pa=50_000.0)
REFUSED = answered(p1_pa=900_000.0)


@pytest.mark.parametrize(
    ("status", "word"), [("good", "* GOOD"), ("check", "! CHECK"), ("refused", "X REFUSED")]
)
def test_the_status_is_a_symbol_and_a_word(status: str, word: str) -> None:
    assert GOOD.result is not None
    answer = replace(GOOD, result=replace(GOOD.result, status=status))
    assert word in words([present.result_title(answer)])


@pytest.mark.parametrize("system", ["metric", "us", "imperial"])
def test_the_result_block_shows_what_matters_first_and_whole_figures(system: str) -> None:
    assert GOOD.result is not None
    shown = rows(GOOD.result, system)  # type: ignore[arg-type]
    block = present.result_block(shown, 6, 35)
    text = words(block)
    for label in ("level", "ullage", "volume", "mass", "mean density", "room"):
        row = next(row for row in shown if row.label == label)
        assert f"{row.label} " in text
        assert row.value in text, "a figure is never cut"
    assert all(columns(line) <= 35 for line in text.splitlines())


@given(value=st.text("0123456789", min_size=1, max_size=30), width=st.integers(10, 60))
def test_a_label_gives_way_to_its_figure(value: str, width: int) -> None:
    line = words([present.figure("a label that is rather long", value, width)])
    assert value in line


def test_a_refusal_says_why_and_shows_no_figure() -> None:
    text = words(present.messages(REFUSED, "", "", 79, 10))
    assert text.startswith("X p1 = 900.000 kPa is above what a full V-1 can show")


def test_messages_that_find_no_room_are_counted() -> None:
    assert GOOD.result is not None
    notice = REFUSED.result.warnings[0] if REFUSED.result else None
    assert notice is not None
    answer = replace(GOOD, result=replace(GOOD.result, warnings=(notice,) * 9))
    shown = present.messages(answer, "", "a hint", 79, 4)
    assert len(shown) == 4
    assert "more lines: F9)" in words(shown)
    assert len(present.all_messages(answer, 79)) > 9


def test_nothing_from_outside_reaches_the_screen_as_it_came() -> None:
    answer = Answer(problems={HOSTILE: HOSTILE}, why=HOSTILE)
    lines = [
        *present.messages(answer, HOSTILE, HOSTILE, 60, 9),
        present.header(HOSTILE, True, ["metric"], 80),
        present.tank_line(HOSTILE, "+", True, True, 30),
        *present.log_subject(answer, [], HOSTILE, HOSTILE, 60),
        log_row(seen(note=HOSTILE, who=HOSTILE, tank=HOSTILE), ZONE, "metric", 80),
    ]
    assert all(ch.isprintable() for line in lines for text, _ in line for ch in text)
    assert "[bold][/]" in words(lines), "markup is shown, not followed"


ZONE = ZoneInfo("Europe/Lisbon")
AT_US = 1_782_869_400_000_000  # 2026-07-01T01:30Z, 02:30 in Lisbon


def entry(**changes: object) -> Entry:
    stated: dict[str, object] = {
        "uid": bytes(16),
        "kind": "reading",
        "t_us": AT_US,
        "entered_us": AT_US,
        "shift": "Night",
        "shift_date": "2026-06-30",
        "time_zone": ZONE.key,
        "site": "Test Site",
        "user": "op",
        "console": "host:1",
        "program": "0",
        "tank": "V-1",
        "who": "JD",
        "result": {"level_m": 6.005, "mass_kg": 1_603_000.0, "status": "check"},
    }
    return Entry(**(stated | changes))  # type: ignore[arg-type]


def seen(**changes: object) -> Seen:
    row = Row(1, entry(**changes), bytes(32))
    return Seen(row, (row,))


def test_a_log_row_tells_local_time_tank_level_mass_status_who_and_note() -> None:
    row = words([log_row(seen(note="valve V3 shut"), ZONE, "metric", 80)])
    assert row.split() == [
        *("02:30", "V-1", "6.005", "m", "1603.000", "t", "CHECK", "JD", "valve", "V3", "shut")
    ]


def test_a_note_and_a_refused_reading_have_rows_without_figures() -> None:
    note = words([log_row(seen(kind="note", result=None, note="gauge stuck"), ZONE, "us", 80)])
    assert "note  JD gauge stuck" in note
    empty = {"level_m": None, "mass_kg": None, "status": "refused"}
    refused = words([log_row(seen(result=empty), ZONE, "us", 80)])
    assert "REFUSED" in refused
    assert columns(refused) <= 80


def test_the_clock_shows_its_offset() -> None:
    assert clock(AT_US, ZONE) == "Wed 01 Jul 02:30 +0100"


def test_bands_and_labels_follow_the_result() -> None:
    assert GOOD.result is not None
    level = GOOD.result.level_m
    assert [band.top_m for band in bands(GOOD.result)] == [level]
    found = {label.text: label.rank for label in labels(TANK, GOOD.result, "metric")}
    assert found == {f"{level:.3f} m": 0, "high-high": 2, "max. working": 2, "p1 tap": 2}
    assert bands(None) == []


@pytest.mark.parametrize("letters", [False, True])
@pytest.mark.parametrize("width", [40, 80, 120])
def test_the_footer_fits_and_keeps_what_is_needed_most(width: int, letters: bool) -> None:
    line = words([present.foot(width, letters)])
    assert columns(line.rstrip()) <= width
    assert {"F1", "F5", "F10"} <= {key.split("/")[0] for key, _ in footer(width, letters)}


def test_every_command_has_its_own_key_and_letter_and_is_in_the_help() -> None:
    assert len({c.key for c in COMMANDS}) == len({c.letter for c in COMMANDS}) == len(COMMANDS)
    keys = [command.key for command in COMMANDS]
    assert not {"f11", "f12"} & set(keys)
    text = words(help_lines(79, "p1"))
    for command in COMMANDS:
        assert f"{command.shown_key:<4} {command.letter}" in text
        assert command.label in text


def test_the_help_tells_what_every_field_takes_and_what_this_program_is_not() -> None:
    text = " ".join(words(help_lines(79)).split())
    for field in FIELDS:
        assert field.label in text
        assert takes(field.name)[:40] in text
    assert "no safety function" in text


def test_every_reading_of_the_calculation_has_a_field() -> None:
    assert set(READINGS) == set(NAMES)
    assert NOTE in {field.name for field in FIELDS}
    shown = [field.name for field in fields_of({"p1", "p3"})]
    assert "p2" not in shown
    assert shown[:3] == ["p1", "p3", "temperature"]


def test_a_cleared_entry_comes_back_once_and_a_logged_one_does_not() -> None:
    typed = Typed()
    typed.type("p1", "98.7 kPa")
    typed.clear()
    assert typed.fields == {}
    typed.clear()
    assert typed.fields == {"p1": "98.7 kPa"}
    typed.done()
    typed.clear()
    assert typed.fields == {}


def test_what_is_typed_stays_with_its_tank() -> None:
    desk = Desk(["A", "B"])
    desk.entry.type("p1", "1 bar")
    desk.tank_name = "B"
    assert desk.entry.fields == {}
    assert desk.unfinished == {"A"}
    assert "Loading" in desk.answer().why


@given(st.text())
def test_ascii_takes_the_same_columns(text: str) -> None:
    plain = to_ascii(text)
    assert plain.isascii()
    assert len(plain) == columns(text) or any(columns(ch) == 0 for ch in text)


def test_presenting_needs_no_terminal_library() -> None:
    code = (
        "import tankcalc.tui.present, tankcalc.tui.draw, tankcalc.tui.scene, "
        "tankcalc.tui.log_lines, tankcalc.tui.help_text, tankcalc.tui.desk, sys; "
        "sys.exit(bool({'textual', 'rich'} & set(sys.modules)))"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_a_unit_of_two_words_is_left_out_whole() -> None:
    line = figure("volume", "1020.5 US gal", 42, "+/- 15.91 US gal")
    assert "".join(span for span, _ in line).endswith(" +/- 15.91")
    line = figure("level", "40 ft 6 1/8 in", 41, "+/- 0.1 in")
    assert "".join(span for span, _ in line).endswith(" +/- 0.1")


def test_the_help_is_said_to_hold_what_the_footer_has_no_room_for() -> None:
    assert footer(80)[0] == ("F1", "help: all")
    assert footer(500)[0] == ("F1", "help")


def test_keys_of_the_log_pane_stand_two_spaces_apart_and_fit() -> None:
    foot = words([present.pane_foot()])
    assert foot.startswith("Enter open  a amend  w withdraw  / filter")
    assert len(foot) <= 80


def test_the_help_tells_the_mark_of_an_acknowledged_alert_from_the_tank_in_front() -> None:
    text = words(help_lines(80))
    assert "= acknowledged" in text
    assert "! = ~ -" in text
