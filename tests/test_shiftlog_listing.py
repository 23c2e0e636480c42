"""Rows as text that fits a terminal, and as JSON that keeps everything."""

from __future__ import annotations

import json
import unicodedata
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from shiftlog_samples import NOON_US, VERSIONS, sample

from tankcalc.shiftlog import Row, as_object, as_text
from tankcalc.shiftlog.entry import JUDGEMENTS, LATE_US
from tankcalc.shiftlog.kinds import KINDS

MINUTE_US = 60_000_000


def row(**changes: Any) -> Row:
    return Row(12, sample(**changes), bytes(range(32)))


def cells(line: str) -> int:
    wide = sum(unicodedata.east_asian_width(ch) in "WF" for ch in line)
    return len(line) + wide - sum(unicodedata.combining(ch) > 0 for ch in line)


def assert_harmless(text: str) -> None:
    for line in text.split("\n"):
        assert cells(line) <= 80
        assert not any(unicodedata.category(ch) in ("Cc", "Cf", "Cs", "Co") for ch in line)


def test_an_entry_is_a_heading_and_its_figures() -> None:
    assert as_text(row(note="steady")).split("\n") == [
        "     12  2026-12-01 12:00+00:00  Day         T-101           A. Rook",
        "         10.100 m, 3173.00 m3, 2681.185 t (p1 85.3 kPa, temperature 18 degC)",
        "         note: steady",
    ]


def test_figures_are_shown_in_the_system_asked_for() -> None:
    assert "ft" in as_text(row(), "us")
    assert "US gal" in as_text(row(), "us")
    assert "imp gal" in as_text(row(), "imperial")


def test_the_local_time_has_the_offset_of_that_day() -> None:
    july = NOON_US - 150 * 24 * 60 * MINUTE_US
    assert "2026-07-04 13:00+01:00" in as_text(row(t_us=july, entered_us=july))


def test_a_late_entry_says_so() -> None:
    assert "late" not in as_text(row(entered_us=NOON_US + LATE_US))
    assert "entered late, 2026-12-01 12:15+00:00" in as_text(row(entered_us=NOON_US + LATE_US + 1))
    assert [as_object(row(entered_us=NOON_US + LATE_US + n))["late"] for n in (0, 1)] == [
        False,
        True,
    ]


@pytest.mark.parametrize("status", ["check", "refused"])
def test_a_result_that_is_not_good_says_why(status: str) -> None:
    warnings = [{"code": "a", "message": "p1 is odd."}, {"code": "b", "message": "Look at p3."}]
    text = as_text(row(result={"status": status, "warnings": warnings}))
    assert f"{status}: p1 is odd. Look at p3." in text
    assert "p1 is odd" not in as_text(row(result={"status": "good", "warnings": warnings}))


def test_a_note_without_a_tank_names_the_login() -> None:
    text = as_text(
        row(kind="note", tank=None, fluid=None, result=None, typed={}, who="", note="n " * 200)
    )
    assert text.startswith(
        "     12  2026-12-01 12:00+00:00  Day                         operator\n"
    )
    assert_harmless(text)
    assert text.count("n") > 199


def test_a_zone_this_machine_does_not_know_is_shown_in_utc() -> None:
    assert "2026-12-01 12:00+00:00" in as_text(row(time_zone="Mars/Olympus"))
    assert as_object(row(time_zone="Mars/Olympus"))["local_time"] == "2026-12-01T12:00:00+00:00"


HOSTILE = st.text(max_size=120) | st.sampled_from(
    ["\x1b[2J\x1b]0;owned\a", "漢" * 60, "e\u0301" * 90, "‮abc", "a\nb\r\nc", "W" * 300, "\udc80"]
)


TYPED = ("p1", "received", "delivered", "other", "of", "what", "until", "fault", "instrument")


@given(
    note=HOSTILE,
    who=HOSTILE,
    tank=HOSTILE,
    shift=HOSTILE,
    typed=st.dictionaries(st.sampled_from(TYPED), HOSTILE),
    message=HOSTILE,
    kind=st.sampled_from(KINDS),
    judgement=st.sampled_from(JUDGEMENTS),
)
def test_hostile_text_stays_inside_80_columns_and_harmless(
    note: str,
    who: str,
    tank: str,
    shift: str,
    typed: dict[str, str],
    message: str,
    kind: str,
    judgement: str,
) -> None:
    hostile = row(
        note=note,
        reason=note,
        kind=kind,
        judgement=judgement,
        who=who,
        tank=tank,
        shift=shift,
        typed=typed,
        result={"status": "check", "level_m": 1.0, "warnings": [{"message": message}]},
    )
    assert_harmless(as_text(hostile))


def test_json_keeps_every_text_exactly() -> None:
    note = "\x1b[31m \x00 ‮ <script> [bold] é"
    data = json.loads(json.dumps(as_object(row(note=note, ref=bytes(16), reason="why"))))
    assert data["note"] == note
    assert data["amends"] == "00000000-0000-0000-0000-000000000000"
    assert data["readings"] == {"p1": "85.3 kPa", "temperature": "18 degC"}
    assert data["result"]["level_m"] == 10.1
    assert data["versions"] == VERSIONS
    assert (data["time"], data["entered"]) == ("2026-12-01T12:00:00Z", "2026-12-01T12:00:00Z")
    assert (data["number"], data["hash"]) == (12, bytes(range(32)).hex())
    assert json.dumps(as_object(row(note=note))).isascii()
