"""What lies behind the trying of a liquid: text to figures and back, and the drawn curve."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from sites import make_site
from tanks import upright

from tankcalc.profiles import load_site
from tankcalc.profiles.fluid_file import Origin
from tankcalc.profiles.fluid_users import Users
from tankcalc.profiles.leaves import choice, flag, fraction, listed, number, pair, quantity, text
from tankcalc.profiles.tables import ByKind, Named, Table, need
from tankcalc.tui.chart import ASCII, UNICODE, Axis, Plot, chart, nice_axis
from tankcalc.tui.liquid_curves import over_elevation, over_temperature, shown_of
from tankcalc.tui.liquid_draft import LiquidDraft, id_of, keys_of, models, opened
from tankcalc.tui.liquid_present import to_save
from tankcalc.tui.liquid_text import meant, problems_with, shown, takes
from tankcalc.tui.liquid_trial import tried


def test_the_form_follows_the_schema_of_every_model() -> None:
    for model in models():
        fields = {field.id: field for field in LiquidDraft(model=model).fields()}
        for path, key in keys_of(model).items():
            assert fields[id_of(path)].needed == key.needed
            assert fields[id_of(path)].takes
        assert list(fields)[-3:] == ["own-temperature", "own-name", "own-file"]


def test_every_demo_fluid_is_opened_tried_and_stated_as_its_file_has_it() -> None:
    from tankcalc.profiles.where import demo_folder

    site = load_site(demo_folder())
    tank = site.tank("T-101")
    for stem in site.fluid_names():
        draft = opened(site, stem)
        assert draft.origin is not None
        held = tomllib.loads(draft.origin.held.decode())
        assert draft.stated() == held["density"], stem
        assert not draft.changed
        result = shown_of(draft, tank, "us")
        assert result.trial.model is not None, (stem, result.trial.problems)
        assert result.figures
        assert isinstance(result.over_elevation, Plot)


def test_figures_go_along_to_a_model_that_takes_them() -> None:
    draft = LiquidDraft(model="expansion")
    draft.type("key-reference", "845 kg/m3")
    draft.type("key-uncertainty", "1 kg/m3")
    while draft.model != "table":
        draft.turn(1)
    assert draft.text("key-uncertainty") == "1 kg/m3"
    while draft.model != "petroleum":
        draft.turn(1)
    assert draft.text("key-reference") == "845 kg/m3", "also over models that do not take it"
    while draft.model != "table":
        draft.turn(-1)
    draft.type("key-points", "0 degC: 1004 kg/m3, 20 degC: 998 kg/m3")
    while draft.model != "samples":
        draft.turn(1)
    assert draft.text("key-points") == "", "temperatures are no elevations"
    while draft.model != "expansion":
        draft.turn(-1)
    assert draft.text("key-reference") == "845 kg/m3"


AWKWARD = (
    *("845 kg/m3", "15 degC", "-50 degC", "0.02 / K", "-0.02 / K", "40 %", "1e300 kg/m3", "2004"),
    *(
        "1 m: 9 kg/m3, 2 m: 800 kg/m3",
        "0 degC: 1 kg/m3, 1 degC: 2 kg/m3; 2 degC: 3 kg/m3",
        "special",
    ),
    *("methane: 0.9, ethane: 0.1", "crude", "hold", "extend", "[", "{}", '"', ":", ",", "1:2:3"),
    *("[[1, 2], {}]", "{ a = { b = 1 } }", "nan", "inf K", "\x1b[31m", "300 MPa", "1e-300 kg/m3"),
)


@given(data=st.data())
def test_nothing_that_is_typed_is_an_error_of_the_program(data: st.DataObject) -> None:
    draft = LiquidDraft(model=data.draw(st.sampled_from(models())))
    for field in draft.fields():
        draft.type(field.id, data.draw(st.sampled_from(("", *AWKWARD))))
    result = shown_of(draft, upright(), "us")
    for plot in (result.over_temperature, result.over_elevation):
        if isinstance(plot, Plot):
            assert words(plot, 36, 9)


def test_a_model_with_nothing_typed_has_nothing_wrong() -> None:
    for model in models():
        draft = LiquidDraft(model=model)
        assert tried(draft, upright()).problems == {}, model


def test_a_composition_typed_wrongly_is_told_how_it_is_typed() -> None:
    draft = LiquidDraft(model="liquefied gas")
    draft.type("key-composition", "propane")
    said = tried(draft, upright()).problems["key-composition"]
    assert "such as methane: 0.92, ethane: 0.08" in said
    assert "{" not in said


def begun(name: str) -> LiquidDraft:
    old = b'name = "Oil"\n[density]\nmodel = "constant"\nvalue = "850 kg/m3"\n'
    draft = LiquidDraft("constant", name=name, stem="oil", origin=Origin("oil", old))
    draft.type("key-value", "850 kg/m3")
    draft.began = draft._state()
    return draft


def test_a_new_file_is_shown_by_the_name_typed_or_one_made_of_its_own() -> None:
    draft = begun("Oil")
    assert draft.shown_name == "Oil"
    draft.type("own-file", "my-gasoline")
    assert draft.shown_name == "My gasoline", "another's name does not go along"
    draft.type("own-name", "Naphtha")
    assert draft.shown_name == "Naphtha"
    draft.type("own-name", "")
    assert draft.shown_name == "My gasoline"


def asked(draft: LiquidDraft, users: Users) -> str:
    return "\n".join(span for line in to_save(draft, users, 78) for span, _ in line)


def test_writing_over_a_file_tells_what_changes_and_for_whom() -> None:
    draft = begun("Oil")
    draft.model = "water"
    said = asked(draft, Users(tuple(f"T-{n}" for n in range(101, 107)), ("both",)))
    assert "! ANOTHER MODEL: constant -> water" in said
    assert "value: 850 kg/m3 -> none" in said
    assert "Calculated with it from then on: T-101, T-102, T-103 and 3 more." in said
    assert "A layer of: both." in said
    draft.type("own-file", "rain")
    said = asked(draft, Users())
    assert said.startswith('fluids/rain.toml is a new file, shown as "Rain".')
    assert "->" not in said


POINTS = listed(pair(quantity("length"), quantity("density", "positive")))


@pytest.mark.parametrize(
    ("holds", "typed", "value"),
    [
        (quantity("density"), " 845 kg/m3 ", "845 kg/m3"),
        (fraction(), "0.5", 0.5),
        (fraction(), '"0.5"', "0.5"),
        (fraction(), "50 %", "50 %"),
        (number(), "2", 2),
        (number(), "two", "two"),
        (flag(), "yes", True),
        (choice("hold", "extend"), "extend", "extend"),
        (POINTS, "1 m: 9 kg/m3; 2 m: 8 kg/m3,", [["1 m", "9 kg/m3"], ["2 m", "8 kg/m3"]]),
        (POINTS, "1 m", [["1 m"]]),
        (POINTS, "1 m: 2: 3", [["1 m", "2", "3"]]),
        (POINTS, '[["1 m", "9 kg/m3"]]', [["1 m", "9 kg/m3"]]),
        (POINTS, "[1 m", [["[1 m"]]),
        (listed(listed(quantity("density"))), "1 kg/m3, 2 kg/m3; 3 kg/m3",
         [["1 kg/m3", "2 kg/m3"], ["3 kg/m3"]]),
        (listed(number()), "1, 2.5, -3e2", [1, 2.5, -300.0]),
    ],
)  # fmt: skip
def test_what_is_typed_is_what_a_file_would_state(holds: object, typed: str, value: object) -> None:
    assert meant(holds, typed) == value
    assert meant(holds, shown(holds, value)) == value


def test_values_that_the_short_form_cannot_hold_are_shown_as_in_the_file() -> None:
    awkward = [["1 m, and: more", "9 kg/m3"]]
    assert shown(POINTS, awkward) == '[["1 m, and: more", "9 kg/m3"]]'
    nested = ByKind("kind", {"a": Table({"x": need(text())})})
    value = {"kind": "a", "x": 'with "quotes"'}
    assert meant(nested, shown(nested, value)) == value
    assert not problems_with(nested, value)
    mixed = Named(Table({"x": need(number())}))
    assert meant(mixed, shown(mixed, {"a b": {"x": 1}})) == {"a b": {"x": 1}}


def test_what_a_key_takes_is_said_by_the_schema() -> None:
    assert takes(POINTS) == "12.5 m: 845 kg/m3, and so on, a comma between"
    assert takes(choice("hold", "extend")) == 'Choose from "hold", "extend"'
    assert takes(flag()) == "true or false, without quotes"


def words(plot: Plot, width: int, height: int, *, ascii: bool = False) -> list[str]:
    lines = chart(plot, width, height, ASCII if ascii else UNICODE)
    return ["".join(span for span, _ in line) for line in lines]


def test_a_curve_goes_from_corner_to_corner_without_a_gap() -> None:
    axis = Axis(0.0, 10.0, 0, "m")
    plot = Plot("line", [(0.0, 0.0), (10.0, 10.0)], [(5.0, 5.0)], axis, axis)
    rows = words(plot, 24, 12)
    assert len(rows) == 12
    assert all(len(row) == 24 for row in rows)
    assert rows[0].startswith("10 |")
    assert rows[9].startswith(" 0 |")
    assert rows[0].rstrip()[-1] in "▀▄█"
    assert rows[9][4] in "▀▄█"
    assert all(set(row[4:]) & set("▀▄█o") for row in rows[:10])
    assert rows[11].split() == ["0", "5", "10", "m"]
    assert "".join(words(plot, 24, 12, ascii=True)).isascii()


def test_a_step_is_drawn_and_a_flat_curve_has_an_axis() -> None:
    steps = Plot(
        "step", [(1.0, 0.0), (1.0, 5.0), (2.0, 5.0), (2.0, 10.0)], [],
        Axis(1.0, 2.0, 1, "x"), Axis(0.0, 10.0, 0, "m"),
    )  # fmt: skip
    rows = words(steps, 24, 12)
    assert max(row.count("▀") + row.count("▄") + row.count("█") for row in rows) == 20
    flat = nice_axis([850.0, 850.0], "kg/m3")
    assert flat.low < 850.0 < flat.high
    assert (flat.label(0.0), flat.label(1.0)) == ("849.0", "851.0")


@pytest.mark.parametrize("size", [(1, 1), (10, 3), (7, 4)])
def test_a_chart_in_no_room_is_no_error(size: tuple[int, int]) -> None:
    axis = nice_axis([1.0, 2.0], "m")
    assert words(Plot("", [(1.0, 1.0), (2.0, 2.0)], [], axis, axis), *size)


# With 0.02 per kelvin from 15 degC the volume is zero at -35 degC.
@pytest.mark.parametrize("temperature", ["-35 degC", "-60 degC"])
def test_where_the_figures_make_no_density_none_is_shown(temperature: str) -> None:
    draft = steep(temperature)
    result = shown_of(draft, upright(), "metric")
    assert "give no density there" in result.trial.problems["own-temperature"]
    assert result.over_elevation == ""
    assert not any(label.startswith("at") for label, _ in result.figures)


def test_a_curve_that_runs_into_no_density_is_not_drawn() -> None:
    result = shown_of(steep("0 degC"), upright(), "metric")
    assert not result.trial.problems
    assert "no density over the whole" in str(result.over_temperature)
    assert isinstance(result.over_elevation, Plot)


def steep(temperature: str) -> LiquidDraft:
    draft = LiquidDraft(model="expansion", temperature=temperature)
    draft.type("key-reference", "845 kg/m3")
    draft.type("key-at", "15 degC")
    draft.type("key-coefficient", "0.02 / K")
    return draft


def test_a_profile_that_falls_to_nothing_in_the_tank_is_told(tmp_path: Path) -> None:
    tank = load_site(make_site(tmp_path / "site")).tank("V-1")
    draft = LiquidDraft(model="samples")
    draft.type("key-points", "1 m: 900 kg/m3, 2 m: 800 kg/m3")
    draft.type("key-beyond", "extend")
    trial = tried(draft, tank)
    assert "falls to zero" in str(over_elevation(trial, tank, "metric"))
    assert "no part in it" in str(over_temperature(trial, "metric"))
