"""One entry of the log in the console: read, amended, withdrawn; faults of instruments."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from log_steps import HOSTILE, logged, notes, put, rows_of, site_of, to_log
from test_tui import Console, log_it, play

from tankcalc.shiftlog import movement_entry, note_entry, now_us, withdrawal_entry


async def amended(console: Console, text: str, reason: str) -> None:
    """Amend the marked reading: another p1, and why."""
    await console.press("a")
    await console.wait("SHOULD HAVE BEEN")
    await console.wait("RESULT *")
    await console.press("end", "ctrl+u")
    await console.type(text)
    await console.wait("RESULT *")
    await console.press("f5")
    await console.wait("LOG WHAT THE READING SHOULD HAVE BEEN?")
    await console.type(reason)
    await console.press("enter")
    await console.wait("SAVED, on disk")


def test_an_entry_opens_with_everything_that_was_kept_of_it(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await logged(console, "50 kPa")
        await console.press("enter")
        await console.wait("entry 1, reading, 1 of 1 in its history: V-1")
        whole = console.text
        await console.press("end")
        await console.wait("end of text")
        whole += console.text
        row = rows_of(tmp_path)[0]
        entry = row.entry
        for wanted in (
            *("+00:00 Europe/Lisbon = 2", "Z", "(as typed)", "(from the operating system)"),
            *(entry.user, entry.console, entry.shift_date, "AS TYPED (source: typed by hand)"),
            *("p1 bottom     50 kPa", "* GOOD", "6.505 m +/-", "judged    accepted", "Basis: p1"),
            *(entry.id, row.hash.hex(), f"tankcalc {entry.program}", *entry.versions.values()),
        ):
            assert wanted in whole, wanted
        await console.press("escape")
        await console.wait(">LOG")

    play(story, tmp_path, size=(80, 40))


@pytest.mark.parametrize("size", [(80, 24), (120, 40)])
def test_an_amended_reading_stays_marked_and_its_history_can_be_turned(
    tmp_path: Path, size: tuple[int, int]
) -> None:
    async def story(console: Console) -> None:
        await logged(console, "50 kPa", "52 kPa")
        await console.press("home")
        await amended(console, "51 kPa", "misread the gauge")
        await console.wait("AMENDED by 3")
        await console.wait("amends 1  JD misread the")
        assert "6.625 m" in console.row("amends 1"), "the sum: 51 kPa over 850 kg/m3"
        await console.press("enter")
        await console.wait("entry 1, reading, 1 of 2 in its history")
        assert "! AMENDED by 3" in console.text
        assert "50 kPa" in console.text
        await console.press("right")
        await console.wait("entry 3, amendment, 2 of 2 in its history")
        assert "misread the gauge" in console.text
        assert "51 kPa" in console.text
        await console.press("left")
        await console.wait("1 of 2 in its history")

    play(story, tmp_path, size=size)
    original, _, amendment = (row.entry for row in rows_of(tmp_path))
    assert amendment.kind == "amendment"
    assert amendment.ref == original.uid
    assert amendment.t_us == original.t_us
    assert (amendment.reason, amendment.who) == ("misread the gauge", "JD")
    assert amendment.typed == {"p1": "51 kPa"}
    assert original.typed == {"p1": "50 kPa"}


def test_an_amendment_needs_a_reason_and_esc_keeps_what_was_typed(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await logged(console, "50 kPa")
        await console.press("a")
        await console.wait("RESULT * GOOD")
        assert ">p1 bottom     50 kPa" in console.text
        await console.press("end", "ctrl+u")
        await console.type("49 kP")
        await console.wait("RESULT - none")
        await console.press("f5")
        await console.wait("Nothing to log.")
        await console.type("a")
        await console.wait("RESULT *")
        await console.press("f5")
        await console.wait("LOG WHAT THE READING SHOULD HAVE BEEN?")
        await console.press("enter")
        await console.wait("Why is it amended?")
        await console.press("escape")
        await console.wait("Nothing logged.")
        await console.press("a")
        await console.wait(">p1 bottom     49 kPa")
        await console.press("escape")
        await console.wait("READINGS")
        assert console.row(">p1") == "", "the readings of the desk are another thing"

    play(story, tmp_path)
    assert len(rows_of(tmp_path)) == 1


def test_a_withdrawn_entry_is_marked_for_good(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await logged(console, "50 kPa")
        await console.press("w")
        await console.wait("A withdrawal is final.")
        await console.press("enter")
        await console.wait("Why is it taken back?")
        await console.type("wrong tank")
        await console.press("enter")
        await console.wait("WITHDRAWN by 2")
        await console.wait("withdraws entry 1 wrong tank")
        await console.press("w")
        await console.wait("entry 1 was withdrawn by entry 2 already.")
        await console.press("a")
        await console.wait("entry 1 was withdrawn by entry 2 already.")

    play(story, tmp_path)
    _, withdrawal = (row.entry for row in rows_of(tmp_path))
    assert (withdrawal.kind, withdrawal.reason) == ("withdrawal", "wrong tank")


def test_what_another_console_withdrew_meanwhile_is_not_amended(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await logged(console, "50 kPa")
        original = rows_of(tmp_path)[0].entry
        back = withdrawal_entry(
            site=site_of(tmp_path), original=original, reason="mine", now_us=now_us(), who="X"
        )
        put(tmp_path, [back])
        await console.press("w")
        await console.wait("entry 1 was withdrawn by entry 2 already.")
        await console.type("why")
        await console.press("enter")
        await console.pilot.pause(0.1)
        assert "TAKE THIS ENTRY BACK?" in console.text
        await console.press("escape")

    play(story, tmp_path)
    assert len(rows_of(tmp_path)) == 2


def test_what_cannot_be_amended_says_so(tmp_path: Path) -> None:
    notes(tmp_path, 1)

    async def story(console: Console) -> None:
        await console.wait("note 0")
        await to_log(console)
        await console.press("a")
        await console.wait("entry 1 is a note, which cannot be amended. Log a note about it.")

    play(story, tmp_path)


def test_an_empty_log_has_no_entry_to_open(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await to_log(console)
        for key in ("enter", "a", "w"):
            await console.press(key)
            await console.wait("No entry is marked in the log.")

    play(story, tmp_path)


def test_a_movement_is_amended_in_its_own_form(tmp_path: Path) -> None:
    site = site_of(tmp_path)
    tanks = [site.tank(name) for name in ("V-1", "V-3")]
    moved = movement_entry(
        site=site, tank=tanks[0], received="500 m3", other=tanks[1], now_us=now_us(), who="JD"
    )
    put(tmp_path, [moved])

    async def story(console: Console) -> None:
        await to_log(console)
        await console.wait("received 500 m3 from V-3")
        await console.press("a")
        await console.wait("LOG WHAT THE MOVEMENT SHOULD HAVE BEEN")
        await console.press("up", "up", "up", "end", *["backspace"] * 4)
        await console.type("1 m3")
        await console.wait("V-1: received 501 m3 from V-3")
        await console.press("down", "down", "down")
        await console.type("ticket")
        await console.press("down", "down")
        await console.type("JD")
        await console.press("enter")
        await console.wait("AMENDED by 2")
        await console.wait("amends entry 1: received 501 m3 from V-3")

    play(story, tmp_path)
    amendment = rows_of(tmp_path)[1].entry
    assert amendment.result is not None
    assert amendment.result["volume_m3"] == pytest.approx(501.0)
    assert amendment.reason == "ticket"
    assert amendment.t_us == moved.t_us


def test_a_fault_is_opened_once_and_closed_once(tmp_path: Path) -> None:
    async def fault(console: Console, *keys: str) -> None:
        await console.press("x")
        await console.wait("FAULT OF AN INSTRUMENT OF V-1")
        await console.press(*keys)

    async def story(console: Console) -> None:
        await to_log(console)
        await fault(console, *"JD", "down", "down", "down", *"drifts", "enter")
        await console.wait("JD fault of p1 opened drifts")
        await fault(console)
        await console.wait("! open: p1 since")
        await console.press("down", "down", *"again", "enter")
        await console.wait("a fault of p1 is open since entry 1. Close it, or log a note.")
        await console.press("up", "right", "enter")
        await console.wait("fault of p1 closed again")
        await fault(console)
        await console.wait("No fault of this tank is open.")
        await console.press("down", "right", "down", *"x", "enter")
        await console.wait("no fault of p1 is open on this tank.")

    play(story, tmp_path)
    first, second = (row.entry for row in rows_of(tmp_path))
    assert second.ref == first.uid
    assert dict(second.typed) == {"fault": "closed", "instrument": "p1"}


def test_hostile_texts_are_inert_where_they_are_typed_over(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await log_it(console)
        entry = rows_of(tmp_path)[0].entry
        put(
            tmp_path,
            [replace(entry, uid=bytes(16), note=HOSTILE, typed={"p1": "50 kPa", HOSTILE: HOSTILE})],
        )
        console.app.front.read_log()
        await to_log(console)
        await console.wait("2 entries")
        await console.press("end", "a")
        await console.wait("note          T[31m2J[bold]x[/] <script>")
        assert all(ch.isprintable() or ch == "\n" for ch in console.text)
        await console.press("f5")
        await console.wait("SHOULD HAVE BEEN?")
        assert all(ch.isprintable() or ch == "\n" for ch in console.text)

    play(story, tmp_path)


def test_a_note_on_a_tank_that_is_gone_still_opens(tmp_path: Path) -> None:
    site = site_of(tmp_path)
    gone = note_entry(site=site, note="old", now_us=now_us(), who="JD")
    put(tmp_path, [replace(gone, tank="V-9")])

    async def story(console: Console) -> None:
        await to_log(console)
        await console.wait("V-9")
        await console.press("enter")
        await console.wait("entry 1, note, 1 of 1 in its history: V-9")
        await console.press("x")
        await console.wait("V-9")
        await console.wait("no tank")

    play(story, tmp_path)
