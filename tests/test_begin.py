"""A starter site: written whole or not at all, sound, and over nothing that exists."""

from __future__ import annotations

import os
import re
from pathlib import Path

import pytest

from tankcalc.cli.main import main
from tankcalc.errors import InputError, TankcalcError
from tankcalc.profiles import begin, load_site, vet
from tankcalc.profiles.beginning import STARTER

FILES = ["fluids/gas-oil.toml", "fluids/water.toml", "site.toml", "tanks/T-1.toml"]


def names(folder: Path) -> list[str]:
    return sorted(str(path.relative_to(folder)) for path in folder.rglob("*") if path.is_file())


@pytest.mark.parametrize("place", ["new", "deep/down/new", "."])
def test_a_starter_site_is_written_and_sound(tmp_path: Path, place: str) -> None:
    folder = tmp_path / place
    written = begin(folder)
    assert names(folder) == FILES
    assert [str(path.relative_to(folder)) for path in written] == FILES
    assert vet(None, folder) == []
    assert not list(folder.glob(".*"))


def test_a_starter_site_answers(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = str(tmp_path / "site")
    assert main(["begin", folder]) == 0
    out, err = capsys.readouterr()
    assert [line.removeprefix(folder + "/") for line in out.splitlines()] == FILES
    assert f'tankcalc vet "{folder}"' in err
    assert main(["vet", folder]) == 0
    words = ["convert", "T-1", "--p1", "50 kPa", "--temperature", "15 degC"]
    assert main([*words, "--profiles", folder]) == 0
    assert "level" in capsys.readouterr().out


def test_a_folder_under_version_control_counts_as_empty(tmp_path: Path) -> None:
    (tmp_path / ".git").mkdir()
    begin(tmp_path)
    assert names(tmp_path) == FILES


@pytest.mark.parametrize("held", ["site.toml", "tanks", "notes.txt"])
def test_nothing_that_exists_is_overwritten(tmp_path: Path, held: str) -> None:
    (tmp_path / held).write_text("mine")
    with pytest.raises(InputError, match=f'holds "{held}" already'):
        begin(tmp_path)
    assert names(tmp_path) == [held]
    assert (tmp_path / held).read_text() == "mine"


def test_a_file_is_no_place_for_a_site(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "file").write_text("mine")
    assert main(["begin", str(tmp_path / "file")]) == 2
    assert "is a file. Name a new or an empty folder." in capsys.readouterr().err
    assert main(["begin", str(tmp_path / "file" / "below")]) == 1
    assert "nothing was written: Not a directory." in capsys.readouterr().err


def test_a_full_disk_leaves_the_folder_as_it_was(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    calls = []

    def full(handle: int) -> None:
        calls.append(handle)
        if len(calls) == 3:
            raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    for folder in (tmp_path / "empty", tmp_path / "new"):
        calls.clear()
        if folder.name == "empty":
            folder.mkdir()
        assert main(["begin", str(folder)]) == 1
        assert "nothing was written: No space left on device." in capsys.readouterr().err
    assert list((tmp_path / "empty").iterdir()) == []
    assert not (tmp_path / "new").exists()


def test_a_part_that_cannot_be_put_in_place_takes_the_others_back(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    rename = Path.rename

    def closed(path: Path, target: Path) -> Path:
        if target == tmp_path / "site.toml":
            raise PermissionError(13, "Permission denied")
        return rename(path, target)

    monkeypatch.setattr(Path, "rename", closed)
    with pytest.raises(TankcalcError, match="nothing was written: Permission denied"):
        begin(tmp_path)
    assert list(tmp_path.iterdir()) == []


def test_a_folder_that_cannot_be_made_is_told(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["begin", "/proc/nothing-here"]) == 1
    assert capsys.readouterr().err.startswith('tankcalc: "/proc/nothing-here": nothing was written')


def test_a_folder_with_an_odd_name_is_shown_safely(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["begin", str(tmp_path / "a\x1b[31mb")]) == 0
    out, err = capsys.readouterr()
    assert "\x1b" not in out + err


def shown_keys(text: str) -> str:
    """A starter file with its commented keys and tables taken into use."""
    return re.sub(r"(?m)^# (?=\[|[a-z_0-9]+ = )", "", text)


def test_the_keys_shown_in_comments_are_sound(tmp_path: Path) -> None:
    begin(tmp_path)
    site = tmp_path / "site.toml"
    site.write_text(shown_keys(site.read_text()))
    tank = tmp_path / "tanks" / "T-1.toml"
    text = shown_keys(tank.read_text())
    leg, purge = text.index("[transmitters.p1.leg]"), text.index("[transmitters.p1.purge]")
    dp = text.index("[transmitters.dp]")
    for kept in (text[:leg] + text[purge:], text[:purge] + text[dp:]):
        tank.write_text(kept)
        assert vet(None, tmp_path) == []
    made = load_site(tmp_path).tank("T-1")
    assert made.dp is not None
    assert made.floating_roof is not None
    assert len(made.limits_m) == 6


def test_the_models_shown_in_comments_are_sound(tmp_path: Path) -> None:
    begin(tmp_path)
    shown = (tmp_path / "fluids" / "gas-oil.toml").read_text().replace("\n# ", "\n")
    models = re.findall(r"(?m)^model = .*\n(?:[a-z_.]+ = .*\n)+", shown.partition("instead")[2])
    assert len(models) == 11
    for number, model in enumerate(models):
        (tmp_path / "fluids" / f"model-{number}.toml").write_text(f"[density]\n{model}")
    assert vet(None, tmp_path) == []


def test_every_model_and_key_of_a_fluid_is_in_the_starter() -> None:
    from tankcalc.fluids.petroleum import BASE_NAMES, EDITIONS, GROUPS
    from tankcalc.profiles.density_schema import DENSITY, GRID
    from tankcalc.profiles.fluid_schema import FLUID
    from tankcalc.profiles.vapour_schema import VAPOUR

    text = (STARTER / "fluids" / "gas-oil.toml").read_text()
    for kind, table in DENSITY.tables.items():
        parts = re.findall(rf'(?m)^#? ?model = "{kind}".*\n(?:#? .*\n|[a-z#].*\n)*', text)
        block = "".join(part.partition("\n#\n")[0] for part in parts)
        assert block, kind
        for key in table.keys.keys() - {"uncertainty"}:  # type: ignore[attr-defined]
            assert re.search(rf"\b{key}\b", block), (kind, key)
    for word in (*GROUPS, *BASE_NAMES.values(), *map(str, EDITIONS), "uncertainty"):
        assert word in text
    for key in (*FLUID.keys, *VAPOUR.keys, *GRID.keys):
        assert re.search(rf"\b{key}\b", text), key


def test_every_key_of_a_tank_is_in_the_starter() -> None:
    from tankcalc.profiles.instrument_schema import TRANSMITTERS
    from tankcalc.profiles.shape_schema import SHAPES
    from tankcalc.profiles.shell_schema import CERTIFICATE, FLOATING_ROOF, SHELL
    from tankcalc.profiles.tank_schema import TANK

    text = (STARTER / "tanks" / "T-1.toml").read_text()
    keys = {*TANK.keys, *TRANSMITTERS.keys, *FLOATING_ROOF.keys, *SHELL.keys, *CERTIFICATE.keys}
    # The vapour is shown beside the fluid it belongs to.
    for key in keys - {"vapour"}:
        assert re.search(rf"\b{key}\b", text), key
    for kind in SHAPES:
        assert f'"{kind}"' in text
