"""Saving a liquid from the console: keys in, a file out."""

from __future__ import annotations

import errno
import os
import tomllib
from pathlib import Path

import pytest
from liquid_steps import go, open_it, type_expansion
from sites import OIL, make_site
from test_tui import Console, play

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


def test_a_new_fluid_is_saved_and_can_be_chosen_at_once(tmp_path: Path) -> None:
    async def story(console: Console) -> None:
        await console.press("tab")
        await console.type("15 degC")
        await console.press("up")
        await console.type("50 kPa")
        await console.wait("6.505 m")
        await type_expansion(console)
        await console.press("f5")
        await console.wait("Type the name of the file, then F5 again.")
        await console.type("gas-oil")
        await console.press("f5")
        await console.wait('fluids/gas-oil.toml is a new file, shown as "Gas oil".')
        assert "coefficient 8.3e-4 / K" in console.text
        await console.press("enter")
        await console.wait("SAVED, on disk: fluids/gas-oil.toml. F4 chooses it")
        await console.press("f4")
        await console.press("g", "enter")
        # 0.5 m + 50 kPa / (9.81 m/s2 x (845 - 1.2 kg/m3)), by hand.
        await console.wait("6.540 m")

    play(story, tmp_path)
    held = (tmp_path / "site" / "fluids" / "gas-oil.toml").read_text()
    assert tomllib.loads(held)["density"] == {
        "model": "expansion",
        "reference": "845 kg/m3",
        "at": "15 degC",
        "coefficient": "8.3e-4 / K",
    }


def test_a_file_is_changed_in_place_and_the_answer_follows(tmp_path: Path) -> None:
    site = make_site(tmp_path / "site")
    oil = site / "fluids" / "oil.toml"
    oil.write_text(OIL.replace('850 kg/m3"', '850 kg/m3"   # by the mud balance'))
    old = oil.read_bytes()

    async def story(console: Console) -> None:
        await console.type("50 kPa")
        await console.wait("6.505 m")
        await open_it(console)
        await go(console, "value")
        await console.press(*["backspace"] * 9)
        await console.type("1000 kg/m3")
        await console.wait("1000.00 kg/m3")
        await console.press("f5")
        await console.wait("WRITE OVER IT?")
        await console.wait("its comments stay, and the old file is kept")
        assert "value: 850 kg/m3 -> 1000 kg/m3" in console.text
        assert "Calculated with it from then on: V-1, V-3." in console.text
        assert "ANOTHER MODEL" not in console.text
        await console.press("escape")
        await console.wait("Not saved; everything typed is still here.")
        assert oil.read_bytes() == old
        await console.press("f5")
        await console.wait("WRITE OVER IT?")
        await console.press("enter")
        await console.wait("the old file is oil.toml.old.")
        await console.wait("5.603 m")

    play(story, tmp_path)
    assert oil.read_text() == old.decode().replace("850", "1000")
    assert oil.with_name("oil.toml.old").read_bytes() == old


def test_a_folder_that_takes_no_file_is_told_and_nothing_typed_is_lost(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened_before = os.open

    def refuse(path: str, flags: int, *rest: int, **more: int) -> int:
        if flags & os.O_CREAT and "fluids" in str(path):
            raise OSError(errno.EACCES, os.strerror(errno.EACCES))
        return opened_before(path, flags, *rest, **more)

    async def story(console: Console) -> None:
        await type_expansion(console)
        await go(console, "file name")
        await console.type("gas-oil")
        monkeypatch.setattr(os, "open", refuse)
        await console.press("f5")
        await console.wait("SAVE THIS LIQUID?")
        await console.press("enter")
        await console.wait("NOT SAVED: fluids/gas-oil.toml: not saved: you may not write")
        assert "8.3e-4 / K" in console.text

    play(story, tmp_path)


@pytest.mark.parametrize(
    ("name", "is_demo", "why"),
    [
        ("oil", False, "fluids/oil.toml is there already"),
        ("../x", False, "cannot be the name of a file"),
        ("new", True, "The demo site is not written to"),
    ],
)
def test_a_name_that_cannot_be_is_told(tmp_path: Path, name: str, is_demo: bool, why: str) -> None:
    async def story(console: Console) -> None:
        await type_expansion(console)
        await go(console, "file name")
        await console.type(name)
        if not is_demo:
            await console.wait(lambda text: why in " ".join(text.split()))
            assert ">file name     X" in console.text, "while it is typed"
        await console.press("f5")
        await console.wait(lambda text: why in " ".join(text.split()))
        assert "SAVE THIS LIQUID?" not in console.text

    play(story, tmp_path, is_demo=is_demo)
    assert [path.name for path in (tmp_path / "site" / "fluids").iterdir()] == ["oil.toml"]
