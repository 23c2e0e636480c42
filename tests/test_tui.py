"""The console as its operator sees it: keys in, screen text out (no real terminal)."""

from __future__ import annotations

import asyncio
import re
from collections.abc import Awaitable, Callable
from pathlib import Path

import pytest
from sites import OIL, TANK, make_site
from textual import events
from textual._context import visible_screen_stack
from textual.pilot import Pilot

from tankcalc.shiftlog import open_store
from tankcalc.tui.actions import Actions
from tankcalc.tui.app import ConsoleApp, Options
from tankcalc.tui.commands import COMMANDS
from tankcalc.tui.messages import EngineReady

PATIENCE_S = 20.0
NAMES = {" ": "space", ".": "full_stop", "?": "question_mark"}
"""Characters that the library knows as keys by another name."""


class Console:
    """A console in front of a test."""

    def __init__(self, app: ConsoleApp, pilot: Pilot[None]) -> None:
        self.app = app
        self.pilot = pilot

    @property
    def text(self) -> str:
        """The screen as text, a line a row."""
        # The one place that looks into the library: it has no public way to the text.
        visible_screen_stack.set(self.app._background_screens)
        strips = self.app.screen._compositor.render_strips()
        return "\n".join(strip.text for strip in strips)

    def row(self, wanted: str) -> str:
        """The first row that holds a text."""
        return next((row for row in self.text.splitlines() if wanted in row), "")

    async def press(self, *keys: str) -> None:
        await self.pilot.press(*keys)

    async def type(self, text: str) -> None:
        await self.burst(*text)

    async def burst(self, *keys: str) -> None:
        """Press keys all at once, as they arrive over a slow line; `press` waits after each."""
        for key in keys:
            character = key if len(key) == 1 else None
            self.app.post_message(events.Key(NAMES.get(key, key), character))
        await self.pilot.pause()

    async def wait(self, wanted: str | Callable[[str], bool]) -> None:
        is_there = (lambda text: wanted in text) if isinstance(wanted, str) else wanted
        loop = asyncio.get_running_loop()
        end = loop.time() + PATIENCE_S
        while not is_there(self.text):
            assert loop.time() < end, f"not on the screen: {wanted!r}\n{self.text}"
            await asyncio.sleep(0.01)

    async def gone(self, unwanted: str) -> None:
        await self.wait(lambda text: unwanted not in text)


@pytest.fixture(autouse=True)
def _no_delay(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tankcalc.tui.app.ENGINE_DELAY_S", 0.001)


Story = Callable[[Console], Awaitable[None]]


def play(
    story: Story,
    tmp_path: Path,
    *,
    size: tuple[int, int] = (80, 24),
    opening: str = "READINGS  (",
    **options: object,
) -> None:
    """Open a console on the test site, let a story happen in it, and leave it in order."""
    site = tmp_path / "site"
    if not site.exists():
        make_site(site)
    stated: dict[str, object] = {"folder": site, "log": str(tmp_path / "log.sqlite")}
    app = ConsoleApp(Options(state=tmp_path / "state", **(stated | options)))  # type: ignore[arg-type]

    async def run() -> None:
        async with app.run_test(size=size) as pilot:
            console = Console(app, pilot)
            await console.wait(opening)
            await story(console)
            app.exit()

    asyncio.run(run())


def test_one_screen_of_80_by_24_shows_everything(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("* GOOD")
        text = console.text
        for wanted in (
            *("Test Site", "metric", "TANKS", "* V-1", "V-3", "READINGS", ">p1 bottom", "50 kPa"),
            *("temperature", "level, dip", "water level", "note", "RESULT * GOOD"),
            *("level", "ullage", "volume", "mass", "mean density", "6.505 m", "Basis: p1"),
            *("▓", "<6.505 m", "LOG", "not a safety function", "F1 help", "F10 quit"),
        ):
            assert wanted in text, wanted
        rows = text.splitlines()
        assert len(rows) == 24
        assert rows[23].startswith("F1 help")

    play(story, tmp_path)


def test_the_result_follows_every_key_and_goes_when_the_text_is_not_valid(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        await console.press("backspace")
        await console.wait("RESULT - none")
        assert "6.505" not in console.text, "no figure outlives the text it came from"
        assert "▓" not in console.text
        assert "X 50 kP" in console.text
        assert 'p1 bottom: "50 kP"' in console.text
        await console.press("a")
        await console.wait("6.505 m")

    play(story, tmp_path)


@pytest.mark.parametrize(
    ("typed", "why"),
    [
        ("50", "unit is missing"),
        ("50 kg", "is a mass"),
        ("50 kPa(a)", "p1 reads gauge pressure"),
        ("2.0 mA", "is that of a failed transmitter"),
        ("900 kPa", "above what a full V-1 can show"),
        ("1,500 kPa", "1,500"),
    ],
)
def test_what_cannot_be_says_why(tmp_path: Path, typed: str, why: str) -> None:
    async def story(console: Console) -> None:
        await console.type(typed)
        await console.wait(why)
        assert "p1 bottom   X" in console.text
        assert "* GOOD" not in console.text

    play(story, tmp_path)


def test_one_bad_field_blanks_the_result_of_the_others(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("* GOOD")
        await console.press("tab")
        await console.type("18 degX")
        await console.wait("RESULT - none")
        assert "temperature X" in console.text

    play(story, tmp_path)


def test_what_is_typed_before_the_calculation_is_loaded_is_answered_when_it_is(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("tankcalc.tui.app.ENGINE_DELAY_S", 0.5)

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("50 kPa")
        assert "Loading the calculation" in console.text
        await console.wait("6.505 m")

    play(story, tmp_path, opening="F10 quit")


def test_another_tank_has_its_own_fields_and_keeps_its_own_text(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        assert "p3 vapour" not in console.text
        await console.type("50 kPa")
        await console.press("f2", "down", "enter")
        await console.wait("p3 vapour")
        await console.wait(lambda text: "50 kPa" not in text)
        assert "+" in console.row("  V-1"), "the first tank is marked as unfinished"
        await console.press("f2", "up")
        await console.wait("50 kPa")

    play(story, tmp_path)


def test_keys_that_arrive_together_act_in_their_order(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.burst(*"9 kPa", "f2", "down", "enter", *"50 kPa", "tab", *"1 kPa")
        await console.wait("* V-3")
        await console.wait("p1 bottom     50 kPa")
        await console.wait(">p3 vapour     1 kPa")
        await console.burst("f5", *"JD", "enter")
        await console.wait("SAVED, on disk: entry 1")
        await console.burst("f2", "up", "enter")
        await console.wait(">p1 bottom     9 kPa")

    play(story, tmp_path)


def test_another_density_profile_is_a_few_keys_away(tmp_path: Path) -> None:
    site = make_site(tmp_path / "site")
    (site / "fluids" / "water.toml").write_text(OIL.replace("Oil", "Water").replace("850", "1000"))

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        await console.press("f4")
        await console.wait("> oil  (usual contents)")
        await console.press("w", "enter")
        await console.wait("5.603 m")
        assert "Water" in console.row("V-1") + console.text.splitlines()[2]

    play(story, tmp_path)


def test_units_change_what_is_shown_and_not_what_was_typed(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        await console.press("f3")
        await console.wait("21 ft 4")
        assert "50 kPa" in console.text
        assert "…" not in console.text
        await console.press("f3")
        await console.wait("imp gal")
        await console.press("f3")
        await console.wait("6.505 m")

    play(story, tmp_path)


async def log_it(console: Console, typed: str = "50 kPa") -> None:
    await console.type(typed)
    await console.wait("* GOOD")
    await console.press("f5")
    await console.wait("LOG THIS READING?")
    await console.type("JD")
    await console.press("enter")
    await console.wait("SAVED, on disk")


def test_a_reading_is_shown_confirmed_saved_and_listed(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.press("tab", "tab", "tab", "tab")
        await console.type("shut v3")
        await console.press("f5")
        await console.wait("LOG THIS READING?")
        assert "V-1, Oil" in console.text
        assert "Typed: p1 bottom 50 kPa" in console.text
        assert "level 6.505 m" in console.text
        assert "shut v3" in console.row("note")
        await console.press("enter")
        await console.wait("Who is it?")
        await console.type("JD")
        await console.press("enter", "enter", "enter")
        await console.wait("SAVED, on disk: entry 1")
        await console.wait("1 entry")
        assert re.search(r"\d\d:\d\d V-1 +6\.505 m +\S+ t GOOD +JD shut v3", console.text)
        assert "RESULT - none" in console.text, "the entry is done"

    play(story, tmp_path)
    (row,) = open_store(tmp_path / "log.sqlite").tail()
    assert row.entry.typed == {"p1": "50 kPa"}
    assert (row.entry.who, row.entry.note, row.entry.tank) == ("JD", "shut v3", "V-1")
    assert row.entry.result is not None
    assert row.entry.result["level_m"] == pytest.approx(6.505, abs=1e-3)


def test_the_name_is_remembered_and_esc_logs_nothing(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await log_it(console)
        await console.type("60 kPa")
        await console.wait("* GOOD")
        await console.press("f5")
        await console.wait("LOG THIS READING?")
        assert "JD" in console.row("who")
        await console.press("escape")
        await console.wait("Not logged.")
        assert "60 kPa" in console.text

    play(story, tmp_path)
    assert len(open_store(tmp_path / "log.sqlite").tail()) == 1


def test_a_restart_shows_the_entries_of_the_shift(tmp_path: Path) -> None:
    play(log_it, tmp_path)

    async def story(console: Console) -> None:
        await console.wait("1 entry")
        assert "JD" in console.text

    play(story, tmp_path)


def test_a_note_is_logged_without_a_reading(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("f6")
        await console.wait("LOG A NOTE")
        await console.type("JD")
        await console.press("enter")
        await console.wait("a note without words")
        await console.type("gauge stuck")
        await console.press("enter")
        await console.wait("note  JD gauge stuck")

    play(story, tmp_path)


def test_a_refused_reading_is_logged_as_evidence(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("900 kPa")
        await console.wait("X REFUSED")
        await console.press("f5")
        await console.wait("with no figures")
        await console.type("JD")
        await console.press("enter")
        await console.wait("Why is it logged all the same?")
        await console.press("enter")
        await console.wait("SAVED")
        await console.wait("REFUSED JD")

    play(story, tmp_path)


def test_nothing_is_logged_while_a_field_cannot_be_read(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50")
        await console.press("f5")
        await console.wait("Nothing to log.")
        assert "LOG THIS READING?" not in console.text

    play(story, tmp_path)


def test_what_could_not_be_saved_is_kept_and_sent_again(tmp_path: Path) -> None:
    folder = tmp_path / "shared"
    folder.write_text("a file where the log's folder should be")

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("* GOOD")
        await console.press("f5")
        await console.wait("LOG THIS READING?")
        await console.type("JD")
        await console.press("enter")
        await console.wait("NOT SAVED:")
        await console.press("escape")
        await console.wait("NOT SAVED; the entry is kept here.")
        assert "50 kPa" in console.text
        folder.unlink()
        await console.press("f5")
        await console.wait("NOT SAVED before")
        await console.press("enter")
        await console.wait("SAVED, on disk: entry 1")

    play(story, tmp_path, log=str(folder / "log.sqlite"))
    assert len(open_store(folder / "log.sqlite").tail()) == 1


def test_a_site_that_cannot_be_read_says_so(tmp_path: Path) -> None:
    site = make_site(tmp_path / "site")
    (site / "site.toml").write_text("name = 7\n")

    async def story(console: Console) -> None:
        await console.press("f5")
        await console.press("f10")
        await console.wait("LEAVE THE CONSOLE?")

    play(story, tmp_path, opening="site.toml:1: name")


def test_a_tank_that_cannot_be_read_is_marked_and_told_and_the_others_work(tmp_path: Path) -> None:
    site = make_site(tmp_path / "site")
    (site / "tanks" / "V-2.toml").write_text(TANK.replace("diameter", "diametre"))

    async def story(console: Console) -> None:
        await console.wait(lambda text: "!" in text.splitlines()[3][:14])
        await console.press("f2", "down")
        await console.wait("diametre")
        await console.press("down")
        await console.wait("p3 vapour")

    play(story, tmp_path)


def test_a_defect_shows_no_figure_and_is_written_down(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object) -> None:
        raise ZeroDivisionError("the story's own")

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        monkeypatch.setattr("tankcalc.gauging.evaluate", broken)
        await console.type("s")
        await console.press("backspace")
        await console.wait("This program failed")
        assert "6.505" not in console.text

    play(story, tmp_path)
    assert "the story's own" in (tmp_path / "state" / "defects.txt").read_text()


def test_every_command_has_its_action_and_acts_by_key_and_by_letter(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    seen: list[str] = []
    for command in COMMANDS:
        monkeypatch.setattr(Actions, command.id, lambda _self, id=command.id: seen.append(id))

    async def story(console: Console) -> None:
        for command in COMMANDS:
            await console.press(command.key)
        await console.press("escape")
        for command in COMMANDS:
            await console.press(NAMES.get(command.letter, command.letter))

    play(story, tmp_path)
    assert seen == [command.id for command in COMMANDS] * 2


def test_letters_are_text_while_a_field_is_typed_in(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("qt")
        await console.wait("qt")
        assert "LEAVE" not in console.text

    play(story, tmp_path)


def test_esc_leaves_the_field_and_loses_nothing_and_a_digit_goes_back(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("escape")
        await console.wait("> V-1")
        assert "F1/?" in console.text, "the letters that act now are shown"
        await console.type("5 kPa")
        await console.wait(">p1 bottom     5 kPa")

    play(story, tmp_path)


def test_down_reaches_the_fields_below_and_says_how_many(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.wait("9 more below")
        await console.press(*["down"] * 6)
        await console.wait(">density")
        await console.wait("6 more below")

    play(story, tmp_path)


def test_quitting_asks_and_keeps_an_unfinished_entry_for_the_next_start(tmp_path: Path) -> None:
    async def leave(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("* GOOD")
        await console.press("ctrl+q")
        await console.wait("Not logged: V-1")
        await console.press("escape")
        await console.gone("LEAVE THE CONSOLE?")
        await console.press("ctrl+c")
        await console.wait("LEAVE THE CONSOLE?")
        await console.press("enter")

    play(leave, tmp_path)

    async def keep(console: Console) -> None:
        assert "p1 bottom 50 kPa" in console.text
        await console.press("enter")
        await console.wait("6.505 m")
        await console.press("f8")
        await console.wait("RESULT - none")
        await console.press("f8")
        await console.wait("6.505 m")

    play(keep, tmp_path, opening="Unfinished entry from")

    async def discard(console: Console) -> None:
        await console.press("delete")
        await console.gone("Unfinished entry")
        assert "50 kPa" not in console.text

    play(discard, tmp_path, opening="Unfinished entry from")

    async def nothing_left(console: Console) -> None:
        assert "Unfinished entry" not in console.text

    play(nothing_left, tmp_path)


def test_a_larger_screen_is_used(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("p1 should read")
        rows = console.text.splitlines()
        assert len(rows) == 40
        assert "F10 quit" in rows[39]
        assert "F7 shift" in rows[39]

    play(story, tmp_path, size=(120, 40))


@pytest.mark.parametrize("size", [(79, 24), (80, 23), (40, 10), (20, 5), (1, 1)])
def test_too_small_a_screen_says_so_and_still_answers(
    tmp_path: Path, size: tuple[int, int]
) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        if size[1] >= 10:
            await console.wait("6.505 m")
        await console.pilot.resize_terminal(80, 24)
        await console.wait("TANKS")
        await console.wait("6.505 m")

    opening = f"need 80x24, have {size[0]}x{size[1]}"[: size[0]]
    play(story, tmp_path, size=size, opening=opening)


def test_the_demo_says_that_it_is_the_demo(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        assert "DEMO SITE" in console.text.splitlines()[0]

    play(story, tmp_path, is_demo=True)


def test_the_help_begins_with_the_field_and_can_be_read_to_its_end(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("tab", "f1")
        await console.wait("THIS FIELD: temperature")
        await console.press("end")
        await console.wait("end of text")
        assert "No warning does not mean safe" in console.text
        await console.press("escape")
        await console.wait(">temperature")

    play(story, tmp_path)


def test_everything_is_shown_in_full_on_request(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("* GOOD")
        await console.press("f9")
        await console.wait("V-1 IN FULL")
        assert "p1 should read" in console.text
        assert "Basis: p1" in console.text

    play(story, tmp_path)


def test_hostile_names_and_notes_are_inert(tmp_path: Path) -> None:
    site = make_site(tmp_path / "site")
    hostile = "[bold]x[/][@click=app.exit]y[/x] {0} %s"
    for name in ("V-1", "V-3"):
        path = site / "tanks" / f"{name}.toml"
        path.write_text(path.read_text().replace(f'name = "{name}"', f'service = "{hostile}"'))

    async def story(console: Console) -> None:
        await console.press(*["down"] * 4)
        await console.type("[/]a[@click")
        await console.press("up", "up", "up", "up")
        await log_it(console)
        await console.wait("JD [/]a[@click")
        assert "V-1 [bold]x[/][@click" in console.text

    play(story, tmp_path)


def test_what_no_quantity_holds_is_not_typed_and_not_pasted(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("left_square_bracket", "question_mark")
        await console.wait("no part of a number with its unit")
        await console.press("7")
        await console.wait(">p1 bottom   X 7 ")
        await console.press("backspace")
        console.app.screen.focused.post_message(events.Paste("\n 50\u00a0kPa \n60 kPa"))  # type: ignore[union-attr]
        await console.wait("6.505 m")
        assert "50 kPa" in console.text

    play(story, tmp_path)


def test_the_log_pane_moves_and_stays_where_it_was(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        for count in range(5):
            await console.press("f6")
            await console.wait("LOG A NOTE")
            await console.type("JD" if count == 0 else "")
            await console.press(*(["down"] if count == 0 else []))
            await console.type(f"note {count}")
            await console.press("enter")
            await console.wait(f"JD note {count}")
        assert "JD note 0" not in console.text
        await console.press("pageup")
        await console.wait("JD note 0")
        await console.wait("2 below")
        await console.press("f7", "end")
        await console.wait("JD note 4")
        assert ">LOG" in console.text

    play(story, tmp_path)


def test_the_engine_posts_a_site_once(tmp_path: Path) -> None:
    posted: list[object] = []
    from tankcalc.tui import engine

    engine.load(make_site(tmp_path / "site"), False, tmp_path, posted.append)
    assert isinstance(posted[0], EngineReady)
    assert len(posted) == 2


def test_a_command_that_fails_is_told_and_the_console_goes_on(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(_self: Actions) -> None:
        raise ZeroDivisionError("the story's own")

    monkeypatch.setattr(Actions, "units", broken)

    async def story(console: Console) -> None:
        await console.press("f3")
        await console.wait("This program failed. ZeroDivisionError: the story's own")
        await console.type("50 kPa")
        await console.wait("6.505 m")

    play(story, tmp_path)


def test_an_entry_that_makes_the_log_fail_is_not_saved_and_kept(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object) -> None:
        raise ZeroDivisionError("the story's own")

    monkeypatch.setattr("tankcalc.shiftlog.sqlite_store.SqliteStore.append", broken)

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("* GOOD")
        await console.burst("f5", *"JD", "enter")
        await console.wait("NOT SAVED: this program failed (ZeroDivisionError")
        await console.press("escape")
        await console.wait("6.505 m")

    play(story, tmp_path)


def test_a_defect_of_the_screen_itself_ends_in_words(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    async def story(console: Console) -> None:
        def broken(*_: object) -> None:
            raise ZeroDivisionError("the story's own")

        monkeypatch.setattr(console.app.main, "answer", broken)
        await console.type("5")
        while console.app.is_running:
            await asyncio.sleep(0.01)

    with pytest.raises(ZeroDivisionError):
        play(story, tmp_path)
    said = capsys.readouterr().err
    assert "tankcalc: stopped. ZeroDivisionError: the story's own" in said
    assert "Traceback" not in said
    assert "the story's own" in (tmp_path / "state" / "defects.txt").read_text()


def test_the_figures_come_with_what_they_are_worth(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m +/-")

    play(story, tmp_path)


def test_the_answer_in_full_has_its_pages(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        await console.press("f9")
        await console.wait("[1 figures]")
        await console.press("2")
        await console.wait("Halving the uncertainty of")
        await console.press("right")
        await console.wait("Left out, the answer would be off by")
        await console.press("4")
        await console.wait("[4 agreement]")
        await console.wait("can be checked")
        await console.press("escape")
        await console.wait("READINGS  (")

    play(story, tmp_path)


def test_readings_that_disagree_name_their_suspects(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("14.5 bar")
        await console.press("down", "down")
        await console.type("12 m")
        await console.wait("X REFUSED")
        await console.press("f9")
        await console.press("4")
        await console.wait("was typed in")

    play(story, tmp_path)
