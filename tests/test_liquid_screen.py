"""Trying a liquid in the console: keys in, screen text out."""

from __future__ import annotations

from pathlib import Path

import pytest
from liquid_steps import empty, go, open_it, type_expansion
from sites import make_site
from test_tui import Console, play
from textual import events

LAYERS = """\
[[layer]]
fluid = "water"
top = "1 m"

[[layer]]
fluid = "oil"
"""


@pytest.fixture(autouse=True)
def _no_delay(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tankcalc.tui.app.ENGINE_DELAY_S", 0.001)


def test_a_liquid_is_tried_at_a_temperature_and_drawn(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await type_expansion(console)
        await go(console, "try at")
        await console.type("32.5 degC")
        # 845 / (1 + 8.3e-4 x 17.5), by hand; and its slope there.
        await console.wait("832.90 kg/m3")
        assert "-0.0818 % per K" in console.text
        assert "base, 15 degC" in console.text
        assert "-135.0 to 165.0 degC" in console.text
        assert "DENSITY BY TEMPERATURE  kg/m3 / degC" in console.text
        assert "DENSITY BY ELEVATION       m / kg/m3" in console.text
        assert "15.00 |" in console.text, "the tank is 15 m high"
        assert "▀" in console.text
        assert "72.5 degC" in console.text, "40 K beyond the temperature"
        rows = console.text.splitlines()
        assert len(rows) == 24
        assert "F5 save" in rows[23]
        assert "Esc leaves field" in rows[23]

    play(story, tmp_path)


def test_temperatures_at_elevations_give_a_density_at_each(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await type_expansion(console)
        await go(console, "try at")
        await console.type("1 m: 15 degC, 5 m: 32.5 degC")
        await console.wait("5.00 m 32.5 degC")
        assert "845.00 kg/m3" in console.row("1.00 m 15.0 degC")
        assert "832.90 kg/m3" in console.row("5.00 m 32.5 degC")
        await console.type(", 99 m: 20 degC")
        await console.wait("V-1 reaches from 0.000 m to 15.000 m")
        assert "832.90" not in console.text, "no figure outlives the text it came from"

    play(story, tmp_path)


@pytest.mark.parametrize(
    ("typed", "why"),
    [
        ("845", 'X reference: "845": The unit is missing.'),
        ("845 kg", '"kg" is a mass; a density is wanted'),
        ("-1 kg/m3", "must be above zero"),
    ],
)
def test_a_wrong_figure_is_told_in_the_words_of_the_file_check(
    tmp_path: Path, typed: str, why: str
) -> None:
    async def story(console: Console) -> None:
        await empty(console)
        await console.type(typed)
        await console.wait(lambda text: why in " ".join(text.split()))
        assert ">reference     X " in console.text
        assert "at            X" not in console.text, "what is not typed is missing, not wrong"
        await console.press("f5")
        await console.wait("Nothing to save yet")

    play(story, tmp_path)


def test_figures_that_are_missing_are_named(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await empty(console)
        await console.wait("- Still missing: reference, at, coefficient.")
        assert '? reference: a number with a unit, such as "845 kg/m3"' in console.text

    play(story, tmp_path)


def test_a_temperature_outside_the_limits_is_told_and_the_curve_stays_inside(
    tmp_path: Path,
) -> None:
    async def story(console: Console) -> None:
        await open_it(console)
        await console.press("f8", "right", "right", "right")
        await console.wait("< water >")
        await go(console, "try at")
        await console.type("140 degC")
        await console.wait("140.00 degC is outside what the water density covers")
        assert "0.0 to 100.0 degC" in console.text
        assert "55.0 degC" in console.text

    play(story, tmp_path)


def test_esc_asks_only_where_something_would_be_lost(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await open_it(console)
        await go(console, "try at")
        await console.type("18 degC")
        await console.press("escape")
        await console.wait(">model")
        await console.press("escape")
        await console.wait("READINGS")
        await empty(console)
        await console.type("8")
        await console.press("escape", "escape")
        await console.wait("LEAVE WITHOUT SAVING?")
        await console.press("escape")
        await console.gone("LEAVE WITHOUT SAVING?")
        assert " reference     X 8" in console.text
        await console.press("escape")
        await console.wait("LEAVE WITHOUT SAVING?")
        await console.press("enter")
        await console.wait("READINGS")

    play(story, tmp_path)


def test_clearing_and_beginning_from_another_file_lose_nothing(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await open_it(console)
        await go(console, "value")
        await console.type("1")
        await console.press("f4")
        await console.wait("BEGIN FROM WHICH LIQUID?")
        await console.press("enter")
        await console.wait("< constant >")
        await console.gone("kg/m31")
        await console.press("f8")
        await console.wait("850 kg/m31")
        await console.press("f8")
        await console.gone("850 kg/m31")
        await go(console, "value")
        await console.type("2")
        await console.press("f4")
        await console.wait("LOSE THE OTHER LIQUID?")
        await console.press("escape")
        await console.wait("850 kg/m32")

    play(story, tmp_path)


def test_letters_act_on_the_row_of_the_model_and_units_change_everything(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await open_it(console)
        assert "F5/s save" in console.text
        await console.press("u")
        await console.wait("53.064 lb/ft3")
        assert "ft / lb/ft3" in console.text
        await console.press("s")
        await console.wait("WRITE OVER IT?")
        await console.press("escape", "escape")
        await console.wait("READINGS")
        await console.wait(lambda text: " US " in text.splitlines()[0])

    play(story, tmp_path)


def test_layers_begin_from_the_uppermost_and_samples_are_drawn_over_elevation(
    tmp_path: Path,
) -> None:
    site = make_site(tmp_path / "site")
    points = '[["1 m", "900 kg/m3"], ["9 m", "800 kg/m3"]]'
    (site / "fluids" / "water.toml").write_text('[density]\nmodel = "water"\n')
    (site / "fluids" / "oil.toml").write_text(f'[density]\nmodel = "samples"\npoints = {points}\n')
    (site / "fluids" / "both.toml").write_text(LAYERS)
    tank = site / "tanks" / "V-1.toml"
    tank.write_text(tank.read_text().replace('contents = "oil"', 'contents = "both"'))

    async def story(console: Console) -> None:
        await open_it(console)
        assert "1 m: 900 kg/m3, 9 m: 800" in console.text
        assert "800.00 to 900.00 kg/m3" in console.text
        assert "Temperature has no part in it" in console.text

    play(story, tmp_path)


def test_a_table_is_pasted_from_lines(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await open_it(console)
        await console.press("f8", "right", "right", "down")
        await console.wait(">points")
        lines = "0 degC: 1004 kg/m3\n\n20 degC: 998 kg/m3,\n"
        focused = console.app.screen.focused
        assert focused is not None
        focused.post_message(events.Paste(lines))
        await console.wait("0.0 to 20.0 degC")
        await console.type(", 10 degC: 1001 kg/m3")
        await console.wait("X points: entry 3: does not rise")

    play(story, tmp_path)


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (40, 12), (1, 1)])
def test_in_ascii_nothing_else_goes_out_at_any_size(tmp_path: Path, size: tuple[int, int]) -> None:
    async def story(console: Console) -> None:
        await console.pilot.resize_terminal(80, 24)
        await type_expansion(console)
        await console.pilot.resize_terminal(*size)
        await console.pilot.pause()
        assert console.text.isascii()
        if size[0] >= 80:
            assert any(":" in row.partition("|")[2] for row in console.text.splitlines())
            assert "845.00 kg/m3" in console.text
            assert "~" not in console.text, "nothing is cut off"

    play(story, tmp_path, ascii=True)


def test_a_defect_is_told_and_nothing_older_is_shown(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object) -> None:
        raise ZeroDivisionError("the story's own")

    async def story(console: Console) -> None:
        await type_expansion(console)
        monkeypatch.setattr("tankcalc.tui.screens.liquid.shown_of", broken)
        await console.type("0")
        await console.wait("This program failed; nothing is shown.")
        assert "845.00" not in console.text

    play(story, tmp_path)
    assert "the story's own" in (tmp_path / "state" / "defects.txt").read_text()


def test_a_field_that_holds_more_than_is_seen_is_marked(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await open_it(console)
        await console.press("f8", "right", "right", "down")
        await console.wait(">points")
        await console.type("0 degC: 1004 kg/m3, 20 degC: 998 kg/m3")
        await console.wait(">points         ~")

    play(story, tmp_path)


def test_the_full_answer_turns_to_other_units_where_it_stands(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        await console.press("f9")
        await console.wait("F3 units")
        await console.press("f3")
        await console.wait("US gal")
        assert "IN FULL" in console.text

    play(story, tmp_path)
