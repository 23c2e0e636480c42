"""What the console asks before it logs."""

from __future__ import annotations

from pathlib import Path
from zoneinfo import ZoneInfo

import pytest
from log_steps import rows_of
from test_tui import Console, log_it, play

from tankcalc.errors import TimeError
from tankcalc.shiftlog import ClockWatch, parse_time
from tankcalc.tui.asks import typed_time

LISBON = ZoneInfo("Europe/Lisbon")
NOON_US = 1_782_903_600_000_000  # 2026-07-01T11:00Z, noon in Lisbon


async def to_save(console: Console, typed: str = "50 kPa") -> None:
    await console.type(typed)
    await console.wait(lambda text: "RESULT *" in text or "RESULT X" in text)
    await console.press("f5")
    await console.wait("LOG THIS READING?")


def test_what_is_declared_of_a_reading_is_kept(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await to_save(console)
        await console.type("JD")
        await console.press("down", "down", "right", "right")
        await console.wait("< receiving >")
        await console.press("down", "down", "down")
        await console.type("PQ")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 1")

    play(story, tmp_path)
    entry = rows_of(tmp_path)[0].entry
    assert (entry.movement, entry.witness, entry.judgement) == ("receiving", "PQ", "accepted")
    assert entry.seen == 0
    assert entry.source == ""


def test_a_reading_is_held_against_what_other_consoles_logged_meanwhile(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await log_it(console, "60 kPa")
        await to_save(console)
        await console.press("tab", "right")
        await console.wait("< static >")
        await console.wait("The tank was declared at rest, but the mass has fallen")
        await console.press("enter")
        await console.wait("Why is it accepted all the same?")
        await console.type("leaking valve")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 2")

    play(story, tmp_path)
    entry = rows_of(tmp_path)[1].entry
    assert (entry.status, entry.judgement) == ("check", "accepted with reason")
    assert (entry.reason, entry.seen) == ("leaking valve", 1)


def test_a_doubtful_result_without_a_reason_is_judged_by_nobody(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await log_it(console, "60 kPa")
        await to_save(console)
        await console.press("tab", "right", "enter")
        await console.wait("once more logs it without one")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 2")

    play(story, tmp_path)
    assert rows_of(tmp_path)[1].entry.judgement == ""


def test_a_result_is_rejected_for_a_reason_only(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await to_save(console)
        await console.type("JD")
        await console.press("down", "down", "down", "right")
        await console.wait("< reject >")
        await console.press("enter")
        await console.wait("Why is it rejected?")
        await console.type("gauge iced up")
        await console.press("enter")
        await console.wait("GOOD    REJECTED")

    play(story, tmp_path)
    entry = rows_of(tmp_path)[0].entry
    assert (entry.judgement, entry.reason) == ("rejected", "gauge iced up")


def test_esc_keeps_what_was_asked_with_the_readings(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await to_save(console)
        await console.press("down", "down", "right", "down", "down")
        await console.type("why not")
        await console.press("escape")
        await console.wait("Not logged.")
        await console.press("f5")
        await console.wait("< static >")
        assert "why not" in console.row("reason")

    play(story, tmp_path)


def test_a_late_reading_has_its_time_typed(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await to_save(console)
        await console.type("JD")
        await console.press("up")
        await console.wait(">read at")
        await console.type("2026-13-01T10:00")
        await console.press("enter")
        await console.wait("is not on the calendar or the clock")
        await console.press("end", "ctrl+u")
        await console.type("2025-10-26T01:30")
        await console.press("enter")
        await console.wait("happens twice in Europe/Lisbon")
        await console.press("end", "ctrl+u")
        await console.type("2025-10-26T01:30:00+00:00")
        await console.wait("read Sun 26 Oct 01:30 +0000")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 1")

    play(story, tmp_path, size=(120, 40))
    entry = rows_of(tmp_path)[0].entry
    assert entry.t_us == parse_time("2025-10-26T01:30:00Z", LISBON)
    assert entry.entered_us > entry.t_us
    assert (entry.shift, entry.shift_date) == ("Night", "2025-10-25")


@pytest.mark.parametrize(
    ("text", "meant"), [("", None), (" 9:05 ", "08:05"), ("11:59", "10:59"), ("12:04", "11:04")]
)
def test_a_time_of_day_is_meant_today(text: str, meant: str | None) -> None:
    found = typed_time(text, LISBON, NOON_US)
    assert found == (None if meant is None else parse_time(f"2026-07-01T{meant}Z", LISBON))


def test_a_time_of_day_still_to_come_is_asked_about() -> None:
    with pytest.raises(TimeError, match=r'to come\. Type the date as well: "2026-07-01T23:50"'):
        typed_time("23:50", LISBON, NOON_US)


def test_a_time_of_day_that_happens_twice_is_asked_about() -> None:
    after_us = parse_time("2026-10-25T05:00Z", LISBON)
    with pytest.raises(TimeError, match="happens twice"):
        typed_time("01:30", LISBON, after_us)


def test_a_movement_is_logged_for_both_tanks(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("ctrl+t")
        await console.wait("LOG A MOVEMENT")
        await console.type("500 m3")
        await console.wait("V-1: received 500 m3")
        await console.press("down")
        await console.type("v-4")
        await console.press("up", "up", "right", "enter")
        await console.wait("Who is it?")
        await console.type("JD")
        await console.press("enter")
        await console.wait('this site has no tank "v-4". Tanks: V-1, V-3.')
        await console.press("up", "up", "up", "end", "backspace", "3", "enter")
        await console.wait("SAVED, on disk: entry 1")
        await console.wait("moved  JD delivered 500 m3 to V-3")

    play(story, tmp_path)
    entry = rows_of(tmp_path)[0].entry
    assert dict(entry.typed) == {"delivered": "500 m3", "other": "V-3"}
    assert entry.result == {"volume_m3": pytest.approx(-500.0), "mass_kg": None}


def test_what_is_drawn_off_says_so_and_a_quantity_needs_its_unit(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("escape", "m")
        await console.wait("LOG A MOVEMENT")
        await console.press("up")
        await console.type("dr")
        await console.wait("< drawn >")
        await console.press("down", "enter")
        await console.wait("Who is it?")
        await console.type("JD")
        await console.press("enter")
        await console.wait("How much was it?")
        await console.type("3")
        await console.press("enter")
        await console.wait("unit is missing")
        await console.press("up", "down")
        await console.press("end", *" m3", "enter")
        await console.wait("SAVED, on disk: entry 1")

    play(story, tmp_path)
    entry = rows_of(tmp_path)[0].entry
    assert dict(entry.typed) == {"drawn": "3 m3", "other": ""}
    assert entry.result == {"volume_m3": -3.0, "mass_kg": None}


def test_who_signs_on_is_who_logs_from_then_on(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("ctrl+x")
        await console.wait("SIGN ON OR OFF")
        await console.type("AB")
        await console.press("enter")
        await console.wait("sign-on  AB signs on")
        await console.press("escape", "o")
        await console.wait("SIGN ON OR OFF")
        await console.type("off")
        await console.wait("You leave the")
        await console.press("enter")
        await console.wait("sign-off  AB signs off")

    play(story, tmp_path)
    assert [row.entry.kind for row in rows_of(tmp_path)] == ["sign-on", "sign-off"]


def test_a_step_of_the_clock_is_logged_before_what_is_saved_and_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    async def story(console: Console) -> None:
        await log_it(console)
        wall = ClockWatch.step
        monkeypatch.setattr(
            ClockWatch, "step", lambda self: wall(self) or _stepped(self, monkeypatch, wall)
        )
        await log_it(console, "51 kPa")
        await console.wait("CLOCK STEP: this machine's clock shows")

    play(story, tmp_path)
    assert [row.entry.kind for row in rows_of(tmp_path)] == ["reading", "clock-step", "reading"]


def _stepped(watch: ClockWatch, monkeypatch: pytest.MonkeyPatch, real: object) -> object:
    """Say once that the clock was set an hour ahead."""
    from tankcalc.shiftlog import Step, now_us

    monkeypatch.setattr(ClockWatch, "step", real)
    return Step(now_us() - 3_600_000_000, now_us())
