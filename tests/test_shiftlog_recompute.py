"""Logged results worked out again: from the kept texts alone, figure by figure."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest
from shiftlog_samples import NOON_US

from tankcalc.errors import InputError
from tankcalc.gauging import evaluate
from tankcalc.profiles import Site, load_site
from tankcalc.shiftlog import (
    Entry,
    Store,
    amended_reading,
    held_against_log,
    open_store,
    reading_entry,
    recent_rows,
)
from tankcalc.shiftlog.kept_files import files_of_fluid, files_of_tank, tank_and_fluid
from tankcalc.shiftlog.recompute import Recomputed, differences, recompute
from tankcalc.shiftlog.sqlite_store import SqliteStore
from tankcalc.typed import readings_from_text
from tankcalc.uncertainty import assess, with_uncertainty

MINUTE_US = 60_000_000
SITE = """\
name = "Skerry Point Terminal"
time_zone = "Europe/Lisbon"
[gravity]
value = "9.8 m/s2"
[air]
density = "1.2 kg/m3"
[shifts]
Day = "06:00"
Night = "18:00"
"""
TANK = """\
name = "Tank one"
contents = "oil"
[shape]
kind = "vertical cylinder"
diameter = "20 m"
height = "15 m"
bottom = { kind = "flat" }
roof = { kind = "flat" }
[transmitters.p1]
elevation = "0.5 m"
reads = "gauge"
range = ["0 kPa", "160 kPa"]
"""
STRAPPED = """\
name = "Strapped"
contents = "both"
[transmitters.p1]
elevation = "0.5 m"
reads = "gauge"
[shape]
kind = "strapped"
file = "S-1.csv"
"""
TABLE = "# as measured\nlevel [m], volume [m3]\n0, 0\n5, 1000\n10, 2100\n"
OIL = 'name = "Oil"\n[density]\nmodel = "constant"\nvalue = "850 kg/m3"\n'
WATER = '[density]\nmodel = "water"\n'
BOTH = '[[layer]]\nfluid = "water"\ntop = "1 m"\n[[layer]]\nfluid = "oil"\n'


def write(folder: Path, files: dict[str, str]) -> None:
    for name, text in files.items():
        (folder / name).parent.mkdir(parents=True, exist_ok=True)
        (folder / name).write_text(text)


@pytest.fixture
def site(tmp_path: Path) -> Site:
    folder = tmp_path / "site"
    write(
        folder,
        {
            "site.toml": SITE,
            "tanks/T-1.toml": TANK,
            "tanks/S-1.toml": STRAPPED,
            "tanks/S-1.csv": TABLE,
            "fluids/oil.toml": OIL,
            "fluids/water.toml": WATER,
            "fluids/both.toml": BOTH,
        },
    )
    return load_site(folder)


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    opened = open_store(tmp_path / "log.sqlite")
    yield opened
    opened.close()


def logged(
    site: Site, store: Store, name: str, typed: dict[str, str], minute: int, movement: str = ""
) -> Entry:
    """Return a reading as both front ends make it, put into the log."""
    tank = site.tank(name)
    fluid = site.fluid_for(tank, None)
    readings, problems = readings_from_text(tank, typed)
    assert not problems
    found = with_uncertainty(evaluate(tank, fluid, readings), assess(tank, fluid, readings))
    at = NOON_US + minute * MINUTE_US
    rows = recent_rows(store, tank)
    entry = reading_entry(
        site=site,
        tank=tank,
        fluid=fluid,
        typed=typed,
        result=held_against_log(found, rows, tank, fluid, typed, at, movement),
        movement=movement,
        now_us=at,
        seen=store.head()[0],
    )
    put(site, store, entry)
    return entry


def put(site: Site, store: Store, entry: Entry) -> None:
    store.append(entry, {version: site.text(version) for version in entry.versions.values()})


def test_every_result_comes_out_again_from_the_kept_texts_alone(site: Site, store: Store) -> None:
    logged(site, store, "T-1", {"p1": "85.3 kPa", "temperature": "18 degC"}, 0)
    logged(site, store, "S-1", {"p1": "50 kPa"}, 1)
    stuck = logged(site, store, "T-1", {"p1": "85.3 kPa"}, 60, "receiving")
    refused = logged(site, store, "T-1", {"p1": "900 kPa"}, 61)
    current = logged(site, store, "T-1", {"p1": "20.3 mA", "level": "14 m"}, 90)
    assert stuck.result is not None
    assert stuck.result["status"] == "check"
    assert (refused.status, refused.judgement) == ("refused", "rejected")
    assert current.signals == {"p1": "saturated"}
    for name in ("tanks/T-1.toml", "tanks/S-1.csv", "fluids/oil.toml", "site.toml"):
        (site.folder / name).unlink()
    found = list(recompute(store))
    assert [one.row.seq for one in found] == [1, 2, 3, 4, 5]
    assert [str(d) for one in found for d in one.differences] == []
    assert all(one.reproduced and not one.program for one in found)


def test_an_amendment_comes_out_again_and_is_not_held_against_itself(
    site: Site, store: Store
) -> None:
    original = logged(site, store, "T-1", {"p1": "85.3 kPa"}, 0)
    tank = site.tank("T-1")
    fluid = site.fluid_for(tank, None)
    typed = {"p1": "85.3 kPa", "temperature": "18 degC"}
    readings, _ = readings_from_text(tank, typed)
    found = with_uncertainty(evaluate(tank, fluid, readings), assess(tank, fluid, readings))
    at = NOON_US + MINUTE_US
    rows = recent_rows(store, tank)
    held = held_against_log(found, rows, tank, fluid, typed, at, "", original.uid)
    assert held == found
    put(
        site,
        store,
        amended_reading(
            site=site,
            original=original,
            tank=tank,
            fluid=fluid,
            typed=typed,
            result=held,
            reason="temperature was left out",
            now_us=at,
            t_us=at,
            seen=1,
        ),
    )
    logged(site, store, "T-1", typed, 2)
    assert [one.reproduced for one in recompute(store)] == [True, True, True]


def test_a_figure_that_is_not_what_the_readings_come_to_is_listed(site: Site, store: Store) -> None:
    entry = logged(site, store, "T-1", {"p1": "85.3 kPa"}, 0)
    assert entry.result is not None
    altered = dict(entry.result) | {"level_m": entry.result["level_m"] + 0.1, "extra": 1}
    altered["warnings"] = [{"code": "a", "message": "b"}]
    put(site, store, replace(entry, uid=bytes(range(16)), result=altered, seen=0, program="0.0.9"))
    whole, found = recompute(store)
    assert whole.reproduced
    assert not found.reproduced
    assert found.program == "0.0.9"
    keys = {difference.key for difference in found.differences}
    assert {"level_m", "extra", "warnings.0.code", "warnings.0.message"} <= keys
    said = [str(d) for d in found.differences if d.key == "extra"]
    assert said == ["extra was 1, is missing"]


def test_what_cannot_be_worked_out_says_why(site: Site, store: Store) -> None:
    entry = logged(site, store, "T-1", {"p1": "85.3 kPa"}, 0)
    for number, changes in enumerate(
        (
            {"typed": {"p1": "85.3"}},
            {"tank": "../T-1"},
            {"fluid": None},
            {"versions": dict(entry.versions) | {"tank": entry.versions["fluid"]}},
            {"versions": {}},
        ),
        1,
    ):
        put(site, store, replace(entry, uid=bytes([number]) * 16, **changes))
    problems = [one.problem for one in recompute(store)]
    assert problems[0] == ""
    for problem, says in zip(
        problems[1:], ("p1", "no name for a profile", "rests on", "", "rests on"), strict=True
    ):
        assert problem
        assert says in problem


def test_after_an_archive_what_earlier_readings_said_is_left_out(
    site: Site, store: Store, tmp_path: Path
) -> None:
    logged(site, store, "T-1", {"p1": "85.3 kPa"}, 0)
    copied = logged(site, store, "T-1", {"p1": "85.3 kPa"}, 60)
    assert copied.status == "check"
    after = SqliteStore(tmp_path / "after.sqlite")
    after.go_on_from((1, store.tail()[0].hash))
    put(site, after, copied)
    altered = dict(copied.result or {}) | {"level_m": 1.0}
    put(site, after, replace(copied, uid=bytes(16), result=altered))
    found = list(recompute(after))
    assert [[d.key for d in one.differences] for one in found] == [[], ["level_m"]]
    after.close()


def test_what_is_no_reading_is_passed_over(site: Site, store: Store) -> None:
    entry = logged(site, store, "T-1", {"p1": "85.3 kPa"}, 0)
    for kind, typed in (("movement", {"received": "3 m3"}), ("amendment", {"delivered": "3 m3"})):
        put(site, store, replace(entry, uid=kind[:8].encode() * 2, kind=kind, typed=typed))
    assert [one.row.seq for one in recompute(store)] == [1]
    assert all(isinstance(one, Recomputed) for one in recompute(store))


def test_only_rounding_is_no_difference() -> None:
    assert list(differences({"a": 1.0}, {"a": 1.0 + 1e-13})) == []
    assert [d.key for d in differences({"a": 1.0}, {"a": 1.0 + 1e-11})] == ["a"]
    assert [d.key for d in differences({"a": None}, {"a": 0.0})] == ["a"]
    assert [d.key for d in differences({"a": True}, {"a": 2})] == ["a"]
    assert [d.key for d in differences({"a": [1, 2]}, {"a": [1]})] == ["a.1"]


@pytest.mark.parametrize(
    "table", [TABLE, TABLE.removeprefix("# as measured\n"), "0 m;0 m3\n9 m;9 m3"]
)
@pytest.mark.parametrize("ending", ["\n", ""])
def test_a_table_is_parted_from_its_tank(tmp_path: Path, table: str, ending: str) -> None:
    own = STRAPPED.rstrip("\n") + ending
    if not ending and table.startswith("#"):
        own += "\n"  # a comment on the last line would be one of the tank's
    folder = tmp_path / "site"
    write(
        folder,
        {
            "site.toml": SITE,
            "tanks/S-1.toml": own,
            "tanks/S-1.csv": table,
            "fluids/oil.toml": OIL,
        },
    )
    there = load_site(folder)
    tank, fluid = there.tank("S-1"), there.fluid("oil")
    _, again, _ = tank_and_fluid(
        SITE.encode(), ("S-1", there.text(tank.version)), ("oil", there.text(fluid.version))
    )
    assert again.version == tank.version
    for level in (0.0, 2.5, 8.0):
        assert again.vessel.volume(level) == tank.vessel.volume(level)


@pytest.mark.parametrize("ending", ["\n", ""])
def test_the_liquids_of_layers_are_parted(tmp_path: Path, ending: str) -> None:
    folder = tmp_path / "site"
    third = '[[layer]]\nfluid = "oil"\ntop = "2 m"\n[[layer]]\nfluid = "water"\ntop = "3 m"\n'
    stack = BOTH.replace('[[layer]]\nfluid = "oil"\n', third + '[[layer]]\nfluid = "light"\n')
    light = OIL.replace("850", "700").replace("Oil", "Light") + '[vapour]\ndensity = "2 kg/m3"\n'
    texts = {"both": stack, "water": WATER, "oil": OIL, "light": light}
    write(folder, {"site.toml": SITE, "tanks/T-1.toml": TANK})
    write(folder, {f"fluids/{n}.toml": t.rstrip("\n") + ending for n, t in texts.items()})
    there = load_site(folder)
    tank, fluid = there.tank("T-1"), there.fluid("both")
    _, _, again = tank_and_fluid(
        SITE.encode(), ("T-1", there.text(tank.version)), ("both", there.text(fluid.version))
    )
    assert again == fluid
    assert [layer.name for layer in again.layers] == ["water", "Oil", "water", "Light"]


def test_a_single_file_is_taken_whole_first() -> None:
    assert next(files_of_tank("T-1", TANK.encode())) == {"T-1.toml": TANK.encode()}
    assert next(files_of_fluid("oil", OIL.encode())) == {"oil.toml": OIL.encode()}


@pytest.mark.parametrize("text", [b"", b"\xff\xfe", b"[" * 5000, b"name = 1", b"a.b.c"])
def test_a_text_that_is_no_profile_is_refused(text: bytes) -> None:
    for site, tank, fluid in (
        (text or b"[air]\nx=1", TANK.encode(), OIL.encode()),
        (SITE.encode(), text, OIL.encode()),
        (SITE.encode(), TANK.encode(), text),
    ):
        with pytest.raises(InputError):
            tank_and_fluid(site, ("T-1", tank), ("oil", fluid))
