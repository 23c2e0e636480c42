"""The demo site: sound, of every shape and density model, and coherent figures throughout."""

from __future__ import annotations

import pytest

from tankcalc.fluids.models import Temperatures
from tankcalc.gauging import evaluate
from tankcalc.profiles import load_site, vet
from tankcalc.profiles.density_schema import DENSITY
from tankcalc.profiles.shape_schema import SHAPES
from tankcalc.profiles.where import demo_folder
from tankcalc.readings import Readings
from tankcalc.tank import Tank

SITE = load_site(demo_folder(), is_demo=True)
TANKS = SITE.tank_names()


def with_p1(tank: Tank, level_m: float) -> Readings:
    """A level with a vapour pressure where p3 is fitted, at 15 degC."""
    p3 = 2_000.0 if "p3" in tank.transmitters else None
    return Readings(level_m=level_m, p3_pa=p3, temperatures=((None, 288.15),))


def test_it_is_sound() -> None:
    assert vet(None, SITE) == []


def test_it_is_the_terminal_of_the_documentation() -> None:
    assert SITE.name == "Skerry Point Terminal"
    assert SITE.is_demo
    assert SITE.time_zone == "Europe/Lisbon"
    assert dict(SITE.shifts) == {"Day": "06:00", "Night": "18:00"}
    assert SITE.surroundings.gravity_from == "latitude"
    assert SITE.surroundings.air_from == "state"


def test_it_has_eight_to_ten_tanks_of_every_shape() -> None:
    assert 8 <= len(TANKS) <= 10
    assert {SITE.tank(name).kind for name in TANKS} == set(SHAPES)


def test_it_has_every_kind_of_density_profile_and_layers_in_a_tank() -> None:
    fluids = [SITE.fluid(name) for name in SITE.fluid_names()]
    assert {layer.model.kind for fluid in fluids for layer in fluid.layers} == set(DENSITY.tables)
    assert any(len(SITE.fluid_for(SITE.tank(name), None).layers) > 1 for name in TANKS)


@pytest.mark.parametrize("name", TANKS)
def test_its_names_are_those_of_its_files(name: str) -> None:
    assert SITE.tank(name).name == name


@pytest.mark.parametrize("name", TANKS)
def test_its_taps_lie_below_the_minimum_working_level(name: str) -> None:
    tank = SITE.tank(name)
    assert tank.transmitters["p1"].elevation_m < tank.limits_m["minimum_working"]
    for tag in {"p3"} & tank.transmitters.keys():
        assert tank.transmitters[tag].elevation_m > tank.limits_m["critical_high"]


@pytest.mark.parametrize("name", TANKS)
def test_its_ranges_cover_a_tank_at_its_highest_level(name: str) -> None:
    tank = SITE.tank(name)
    fluid = SITE.fluid_for(tank, None)
    for level in (tank.limits_m["minimum_working"], tank.limits_m["critical_high"]):
        result = evaluate(tank, fluid, with_p1(tank, level))
        assert result.status != "refused"
        fitted = {**tank.transmitters, **({"dp": tank.dp} if tank.dp else {})}
        for tag, transmitter in fitted.items():
            reading = getattr(result, f"{tag}_pa")
            if tag == "p2" and level < transmitter.elevation_m:
                continue
            assert transmitter.range_pa is not None
            low, high = transmitter.range_pa
            assert low <= reading <= high, tag


@pytest.mark.parametrize("name", TANKS)
def test_a_pressure_finds_the_level_again(name: str) -> None:
    tank = SITE.tank(name)
    fluid = SITE.fluid_for(tank, None)
    level = 0.5 * (tank.limits_m["minimum_working"] + tank.limits_m["maximum_working"])
    there = evaluate(tank, fluid, with_p1(tank, level))
    p3 = 2_000.0 if "p3" in tank.transmitters else None
    back = evaluate(
        tank, fluid, Readings(p1_pa=there.p1_pa, p3_pa=p3, temperatures=((None, 288.15),))
    )
    assert back.level_m == pytest.approx(level, abs=2e-6)


def test_its_stratified_brine_is_heavier_below() -> None:
    (layer,) = SITE.fluid("brine").layers
    pieces = layer.model.pieces(Temperatures((288.15,)))
    assert (pieces.slope <= 0.0).all()
    assert (pieces.slope < 0.0).any()
