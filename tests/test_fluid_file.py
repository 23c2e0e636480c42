"""Writing a fluid file: what was there survives, and nothing is half done."""

from __future__ import annotations

import errno
import os
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest
from sites import make_site

from tankcalc.errors import InputError, ProfileError, TankcalcError
from tankcalc.profiles import Site, load_site
from tankcalc.profiles.fluid_file import Origin, Saved, save_fluid
from tankcalc.profiles.fluid_toml import fluid_text
from tankcalc.profiles.fluid_users import users_of

BRINE = """\
# Spot samples, bottom first.
name = "Brine"

[density]
model = "samples"   # sample again after a receipt
points = [
  ["0.5 m", "1197 kg/m3"],  # the heel
  ["4.0 m", "1172 kg/m3"],
  # none between: the float sticks
  ["9.0 m", "1151 kg/m3"],
]
beyond = "hold"  # as the nearest

[vapour]  # nitrogen
density = "1.2 kg/m3"
"""
HEAVIER = {"model": "constant", "value": "900 kg/m3"}


@pytest.fixture
def site(tmp_path: Path) -> Site:
    return load_site(make_site(tmp_path / "site"))


def origin_of(site: Site, stem: str) -> Origin:
    return Origin(stem, (site.folder / "fluids" / f"{stem}.toml").read_bytes())


def files(site: Site) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in (site.folder / "fluids").iterdir()}


def test_a_new_fluid_is_read_back_as_it_was_stated(site: Site) -> None:
    points = [["1 m", "860 kg/m3"], ["5 m", "850 kg/m3"]]
    density = {"model": "samples", "points": points, "beyond": "extend"}
    saved = save_fluid(site, "slops", "Slops tank", density)
    assert saved == Saved(site.folder / "fluids" / "slops.toml")
    assert tomllib.loads(saved.path.read_text()) == {"name": "Slops tank", "density": density}
    assert '    ["1 m", "860 kg/m3"],\n' in saved.path.read_text(), "a point a line"
    assert site.fluid_names() == ["oil", "slops"]
    assert site.fluid("slops").name == "Slops tank"


def test_a_change_touches_nothing_but_what_changed(site: Site) -> None:
    (site.folder / "fluids" / "brine.toml").write_text(BRINE)
    points = [["0.5 m", "1197 kg/m3"], ["4.0 m", "1170 kg/m3"], ["9.0 m", "1151 kg/m3"]]
    density = {"model": "samples", "points": points, "beyond": "hold"}
    saved = save_fluid(site, "brine", "Brine", density, origin_of(site, "brine"))
    assert saved.path.read_text() == BRINE.replace("1172", "1170")


def test_points_are_added_and_taken_away_between_the_comments() -> None:
    points = [["0.5 m", "1197 kg/m3"], ["4.0 m", "1172 kg/m3"], ["9.0 m", "1151 kg/m3"]]
    for wanted in (points[:1], [*points, ["9.5 m", "1150 kg/m3"]]):
        density = {"model": "samples", "points": wanted, "beyond": "hold"}
        text = fluid_text("Brine", density, BRINE.encode())
        assert tomllib.loads(text)["density"] == density
        assert "# the heel" in text
        assert "# nitrogen" in text


def test_another_model_keeps_the_comments_and_the_other_tables() -> None:
    text = fluid_text("Brine", HEAVIER, BRINE.encode())
    held = tomllib.loads(text)
    assert held == {"name": "Brine", "density": HEAVIER, "vapour": {"density": "1.2 kg/m3"}}
    assert "# Spot samples" in text
    assert "# nitrogen" in text
    assert "# sample again after a receipt" not in text, "it was about the model"


def test_comments_beside_figures_stay_where_the_model_does() -> None:
    old = b'[density]\nmodel = "constant"  # weighed\nvalue = "850 kg/m3"  # mud balance\n'
    text = fluid_text("", HEAVIER, old)
    assert text == old.decode().replace("850", "900")


def test_a_date_without_quotes_stays_as_it_is() -> None:
    old = '[density]\nmodel = "solution"\ngrid_date = 2026-03-01  # of the sheet\n'
    density = {"model": "solution", "grid_date": "2026-03-01"}
    assert fluid_text("", density, old.encode()) == old


@pytest.mark.parametrize(
    ("old", "name", "wanted"),
    [
        ('[density]\nmodel = "water"\n', "Rain", {"name": "Rain", "density": HEAVIER}),
        ('name = "A"\n[density]\nmodel = "water"\n', "", {"density": HEAVIER}),
        ('density = { model = "water" }  # short\n', "", {"density": HEAVIER}),
        ('density.model = "water"\n', "B", {"name": "B", "density": HEAVIER}),
        ('\ufeffname = "A"\r\n\r\n[density]\r\nmodel = "water"\r\n', "A", None),
        ("# nothing but a comment\n", "C", {"name": "C", "density": HEAVIER}),
    ],
)
def test_every_way_to_write_a_table_can_be_changed(
    old: str, name: str, wanted: dict[str, object] | None
) -> None:
    text = fluid_text(name, HEAVIER, old.encode())
    assert tomllib.loads(text) == (wanted or {"name": "A", "density": HEAVIER})
    for line in (line for line in old.splitlines() if "#" in line):
        assert line.partition("#")[2] in text


def test_nested_tables_of_a_model_are_written_and_changed() -> None:
    grid = {"temperatures": ["0 degC", "20 degC"], "densities": [["1 kg/m3", "2 kg/m3"]]}
    density = {"model": "solution", "concentration": 0.5, "grid": grid}
    first = fluid_text("Acid", density)
    assert tomllib.loads(first)["density"] == density
    changed = density | {"grid": grid | {"densities": [["1 kg/m3", "3 kg/m3"]]}}
    again = fluid_text("Acid", changed, first.encode())
    assert tomllib.loads(again)["density"] == changed


def test_the_old_file_is_kept_under_a_name_of_its_own_each_time(site: Site) -> None:
    held = []
    for value in ("900 kg/m3", "910 kg/m3", "920 kg/m3"):
        origin = origin_of(site, "oil")
        held.append(origin.held)
        density = {"model": "constant", "value": value}
        saved = save_fluid(site, "oil", "Oil", density, origin)
        assert saved.kept is not None
        assert saved.kept.read_bytes() == origin.held
    kept = files(site)
    assert kept.keys() == {"oil.toml", "oil.toml.old", "oil.toml.old2", "oil.toml.old3"}
    assert [kept[f"oil.toml.old{n}"] for n in (3, 2, "")] == held, "the newest has no number"
    assert site.fluid_names() == ["oil"], "what is kept is no fluid"


def test_saving_what_is_there_already_changes_nothing(site: Site) -> None:
    before = files(site)
    density = {"model": "constant", "value": "850 kg/m3"}
    assert save_fluid(site, "oil", "Oil", density, origin_of(site, "oil")).kept is None
    assert files(site) == before


def test_a_copy_under_another_name_leaves_the_first_alone(site: Site) -> None:
    (site.folder / "fluids" / "brine.toml").write_text(BRINE)
    before = files(site)
    saved = save_fluid(site, "brine-2", "Brine 2", HEAVIER, origin_of(site, "brine"))
    assert saved.kept is None
    text = saved.path.read_text()
    assert "#" not in text, "comments are about the other liquid"
    assert tomllib.loads(text)["vapour"] == {"density": "1.2 kg/m3"}
    assert {**before, "brine-2.toml": saved.path.read_bytes()} == files(site)


def test_a_new_file_takes_a_name_made_of_its_own(site: Site) -> None:
    saved = save_fluid(site, "my-gasoline", "", HEAVIER, origin_of(site, "oil"))
    assert tomllib.loads(saved.path.read_text())["name"] == "My gasoline"


def test_older_files_keep_their_numbers_where_the_disk_fails(
    site: Site, monkeypatch: pytest.MonkeyPatch
) -> None:
    save_fluid(site, "oil", "Oil", HEAVIER, origin_of(site, "oil"))
    before = files(site)

    def full(_from: Path, _to: Path) -> Path:
        raise OSError(errno.ENOSPC, "no space")

    monkeypatch.setattr(Path, "replace", full)
    lighter = {"model": "constant", "value": "800 kg/m3"}
    with pytest.raises(TankcalcError, match="the disk is full"):
        save_fluid(site, "oil", "Oil", lighter, origin_of(site, "oil"))
    assert files(site) == before


def test_who_uses_a_fluid_is_found(site: Site) -> None:
    layers = '[[layer]]\nfluid = "water"\ntop = "1 m"\n\n[[layer]]\nfluid = "oil"\n'
    (site.folder / "fluids" / "both.toml").write_text(layers)
    tank = site.folder / "tanks" / "V-1.toml"
    other = tank.read_text().replace('contents = "oil"', 'contents = "both"')
    tank.with_name("V-2.toml").write_text(other)
    tank.with_name("V-3.toml").write_text("no TOML")
    assert users_of(site, "oil") == (("V-1", "V-2"), ("both",))
    assert users_of(site, "both") == (("V-2",), ())
    assert users_of(site, "brine") == ((), ())


def test_permissions_of_the_file_stay(site: Site) -> None:
    path = site.folder / "fluids" / "oil.toml"
    path.chmod(0o640)
    saved = save_fluid(site, "oil", "Oil", HEAVIER, origin_of(site, "oil"))
    assert saved.kept is not None
    assert [each.stat().st_mode & 0o777 for each in (saved.path, saved.kept)] == [0o640, 0o640]


def test_a_link_to_a_shared_file_stays_a_link(site: Site, tmp_path: Path) -> None:
    shared = tmp_path / "shared.toml"
    shared.write_text(BRINE)
    link = site.folder / "fluids" / "brine.toml"
    link.symlink_to(shared)
    save_fluid(site, "brine", "Brine", HEAVIER, origin_of(site, "brine"))
    assert link.is_symlink()
    assert tomllib.loads(shared.read_text())["density"] == HEAVIER


@pytest.mark.parametrize(
    "stem", ["", " ", "../oil", "a/b", ".hidden", "x\x00", "a\nb", "c" * 61, "oil\x1b[31m", "-x"]
)
def test_what_cannot_be_a_file_name_is_refused(site: Site, stem: str) -> None:
    before = files(site)
    with pytest.raises(InputError, match="cannot be the name of a file"):
        save_fluid(site, stem, "", HEAVIER)
    assert files(site) == before


def test_a_name_that_is_taken_is_refused(site: Site) -> None:
    before = files(site)
    with pytest.raises(InputError, match=r"fluids/oil\.toml is there already"):
        save_fluid(site, "oil", "", HEAVIER)
    assert files(site) == before


@pytest.mark.parametrize("theirs", [None, b'[density]\nmodel = "water"\n'])
def test_what_somebody_else_changed_meanwhile_is_not_written_over(
    site: Site, theirs: bytes | None
) -> None:
    origin = origin_of(site, "oil")
    path = site.folder / "fluids" / "oil.toml"
    path.unlink()
    if theirs is not None:
        path.write_bytes(theirs)
    before = files(site)
    with pytest.raises(InputError, match="changed by somebody else"):
        save_fluid(site, "oil", "", HEAVIER, origin)
    assert files(site) == before


def test_the_demo_site_is_not_written_to(site: Site) -> None:
    before = files(site)
    with pytest.raises(InputError, match="demo site is not written to"):
        save_fluid(replace(site, is_demo=True), "new", "", HEAVIER)
    assert files(site) == before


def test_what_a_site_could_not_read_again_is_not_written(site: Site) -> None:
    before = files(site)
    with pytest.raises(ProfileError, match=r"fluids/new\.toml.*density\.value"):
        save_fluid(site, "new", "", {"model": "constant", "value": "900"})
    assert files(site) == before


@pytest.mark.parametrize("old", [b'[[layer]]\nfluid = "oil"\n', b"name = ", b"\xff"])
def test_layers_and_what_is_no_toml_are_nothing_to_begin_from(old: bytes) -> None:
    with pytest.raises(InputError, match="Begin a new one"):
        fluid_text("", HEAVIER, old)


@pytest.mark.parametrize(
    ("function", "number", "why"),
    [
        ("open", errno.EROFS, "read-only disk"),
        ("open", errno.EACCES, "may not write in this folder"),
        ("fsync", errno.ENOSPC, "the disk is full"),
        ("fsync", errno.EIO, "Input/output error"),
        ("replace", errno.ENOSPC, "the disk is full"),
    ],
)
def test_a_disk_that_takes_nothing_is_told_and_nothing_is_left(
    site: Site, monkeypatch: pytest.MonkeyPatch, function: str, number: int, why: str
) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise OSError(number, os.strerror(number))

    origin, before = origin_of(site, "oil"), files(site)
    target = Path if function == "replace" else os
    with monkeypatch.context() as broken:
        broken.setattr(target, function, refuse)
        with pytest.raises(TankcalcError, match=f"fluids/oil.toml: not saved: .*{why}"):
            save_fluid(site, "oil", "", HEAVIER, origin)
    assert files(site) == before


@pytest.mark.skipif(os.geteuid() == 0, reason="this user may write everywhere")
def test_a_read_only_folder_is_told(site: Site) -> None:
    folder = site.folder / "fluids"
    folder.chmod(0o555)
    try:
        with pytest.raises(TankcalcError, match="may not write in this folder"):
            save_fluid(site, "new", "", HEAVIER)
    finally:
        folder.chmod(0o755)
