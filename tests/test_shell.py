"""The vessel under load: shell temperature, stretch under the head, taps that rise with it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from published import Published, published
from scipy.integrate import quad
from tanks import single, stacked, transmitters, upright

from tankcalc.errors import RangeError
from tankcalc.fluids.expansion import Expansion
from tankcalc.gauging import evaluate
from tankcalc.gauging.roof import displacement_m3, roof_adjustment_m3
from tankcalc.gauging.shell import linear_growth, shell_temperature_k
from tankcalc.geometry import (
    ConeEnd,
    Course,
    FlatEnd,
    LoadedVessel,
    Stretch,
    sphere,
    strapped,
    vertical_cylinder,
)
from tankcalc.instruments import Purge, Transmitter
from tankcalc.profiles.shell_schema import EXPANSION_PER_K
from tankcalc.readings import Readings
from tankcalc.sums.book import half_up
from tankcalc.tank import Shell

ROWS = published("shell_roof.csv")
MILD_STEEL_PER_DEGF = 6.2e-6
NAMES = {
    "304 stainless": "stainless steel 304",
    "316 stainless": "stainless steel 316",
    "17-4PH stainless": "stainless steel 17-4PH",
}
STEEL = Shell(expansion_per_k=1.12e-5, calibrated_at_k=288.15)


def rows(quantity: str) -> list[Published]:
    found = [row for row in ROWS if quantity in row.quantity]
    assert found
    return found


def kelvin(degf: float) -> float:
    return (degf - 32.0) / 1.8 + 273.15


@pytest.mark.parametrize("row", rows("linear expansion"), ids=str)
def test_materials_expand_as_published(row: Published) -> None:
    per_kelvin = EXPANSION_PER_K[NAMES[row.inputs["material"]]]
    if row.unit == "1/C":
        row.agrees(per_kelvin)
    else:
        # Printed for both scales, each rounded to three figures or two.
        assert per_kelvin / 1.8 == pytest.approx(float(row.value), rel=3e-3)


@pytest.mark.parametrize("row", rows("CTSh"), ids=str)
def test_the_factor_of_the_shell_is_the_published_one(row: Published) -> None:
    given, base = row.inputs, 60.0
    shell = given.get("TSh_F")
    if shell is None:
        found = shell_temperature_k(given["liquid_F"], given["ambient_F"], insulated=False)
        assert found == 112.5
        # The row takes the tie down; "5 or more goes up" would give 113 degF and 1.00066.
        shell = 112.0
        assert half_up(found, 0) == 113.0
    growth = linear_growth(MILD_STEEL_PER_DEGF * 1.8, kelvin(shell), kelvin(base))
    row.agrees(growth**2)


@pytest.mark.parametrize("row", rows("hoop stretch"), ids=str)
def test_the_head_stretches_the_shell_as_the_ring_formula_says(row: Published) -> None:
    given = row.inputs
    course = Course(0.0, given["H_m"], 0.5 * given["D_m"], given["t_m"])
    stretch = Stretch((course,), given["rho"] * given["g"], given["E_Pa"])
    row.agrees(float(stretch.gain(np.array([given["H_m"]]))[0][0]))


def test_roof_rows() -> None:
    (displaced,), (per_degree,) = rows("displacement deducted"), rows("per degree API")
    given, barrel_gal = displaced.inputs, 42.0
    displaced.agrees(
        float(displacement_m3(given["roof_lb"], given["lb_per_gal_in_air"] * barrel_gal))
    )

    # 1 degAPI either way of 35: density in air from the relative density 141.5 / (131.5 + API),
    # water at 60 degF being 8.32828 lb/gal in air (999.016 kg/m3 less 1.2 kg/m3 of air).
    def pounds(api: float) -> float:
        rho = 141.5 / (131.5 + api) * 999.016
        return 1.000149926 * rho - 1.199407795

    kg = 1_215_000.0 * 0.45359237
    up, down = (float(roof_adjustment_m3(kg, pounds(35.0 + d), pounds(35.0))) for d in (-1, 1))
    per_degree.agrees((up - down) / 2.0 / 0.158987294928)


@given(height=st.floats(0.01, 15.0), plate=st.floats(0.006, 0.03))
def test_courses_add_up_to_an_integral(height: float, plate: float) -> None:
    courses = (Course(0.0, 4.0, 10.0, plate), Course(4.0, 15.0, 10.1, 0.6 * plate))
    stretch = Stretch(courses, 850.0 * 9.81, 2.06e11)
    volume, moment, area = (float(a[0]) for a in stretch.gain(np.array([height])))

    def widened(z: float, surface: float) -> float:
        c = courses[0] if z < 4.0 else courses[1]
        pressure = 850.0 * 9.81 * (surface - z)
        return 2.0 * np.pi * c.radius_m**3 * pressure / (2.06e11 * c.thickness_m)

    edges = [z for z in (4.0,) if z < height]
    wanted = quad(widened, 0.0, height, args=(height,), points=edges or None)[0]
    assert volume == pytest.approx(wanted, rel=1e-9, abs=1e-15)
    step = 1e-4
    up, down = (stretch.gain(np.array([height + s]))[0][0] for s in (step, -step))
    assert area == pytest.approx((up - down) / (2.0 * step), rel=1e-3, abs=1e-9)
    lever = quad(
        lambda z: z * float(stretch.gain(np.array([z]))[2][0]),
        0.0,
        height,
        points=edges or None,
    )[0]
    assert moment == pytest.approx(lever, rel=1e-6, abs=1e-12)


@pytest.mark.parametrize(
    "bare", [sphere(12.0), vertical_cylinder([(15.0, 20.0)], ConeEnd(1.0), FlatEnd())]
)
def test_a_loaded_vessel_is_its_own_inverse(bare: object) -> None:
    stretch = Stretch((Course(0.0, 15.0, 10.0, 0.01),), 9000.0, 2.06e11)
    loaded = LoadedVessel(bare, 1.0008, 1.0008, stretch)  # type: ignore[arg-type]
    levels = np.linspace(loaded.z_min, loaded.z_max, 41)
    assert loaded.level(loaded.volume(levels)) == pytest.approx(levels, abs=1e-9)
    assert np.all(np.diff(loaded.volume(levels)) > 0.0)
    middle = levels[1:-1]
    slope = (loaded.volume(middle + 1e-5) - loaded.volume(middle - 1e-5)) / 2e-5
    assert loaded.area(middle) == pytest.approx(slope, rel=2e-5)
    with pytest.raises(RangeError):
        loaded.volume(loaded.z_max + 0.1)


def test_a_sphere_keeps_its_share_and_grows_by_the_cube() -> None:
    tank = upright(vessel=sphere(12.0), shell=replace(STEEL, insulated=True))
    warm = Readings(level_m=6.0 * (1.0 + 1.12e-5 * 35.0), temperatures=((None, 323.15),))
    found = evaluate(tank, single(510.0), warm)
    assert found.fill == pytest.approx(0.5, abs=1e-12)
    growth = 1.0 + 1.12e-5 * 35.0
    assert found.volume_m3 == pytest.approx(2.0 / 3.0 * np.pi * 6.0**3 * growth**3, rel=1e-12)
    assert found.ctsh == pytest.approx(growth**3, rel=1e-12)


def test_a_bare_shell_is_an_eighth_air() -> None:
    warm = Readings(level_m=10.0, temperatures=((None, 305.65),), air_temperature_k=291.15)
    found = evaluate(upright(shell=STEEL), single(850.0), warm)
    growth = 1.0 + 1.12e-5 * (303.8375 - 288.15)
    assert found.ctsh == pytest.approx(growth**2, rel=1e-14)
    assert found.volume_m3 == pytest.approx(np.pi * 100.0 * 10.0 * growth**2, rel=1e-12)
    insulated = evaluate(upright(shell=replace(STEEL, insulated=True)), single(850.0), warm)
    assert insulated.ctsh == pytest.approx((1.0 + 1.12e-5 * 17.5) ** 2, rel=1e-14)


def test_mass_from_pressure_takes_the_area_factor_once() -> None:
    """A shell 35 K warmer than its calibration, ignored, is 0.078 % of the mass (hand)."""
    warm = {"temperatures": ((None, 323.15),), "air_temperature_k": 323.15}
    bare = replace(upright(), transmitters=transmitters(p1=0.0))
    plain = evaluate(bare, single(850.0), Readings(p1_pa=80_000.0, **warm))
    grown = evaluate(replace(bare, shell=STEEL), single(850.0), Readings(p1_pa=80_000.0, **warm))
    assert grown.level_m == pytest.approx(plain.level_m, rel=1e-12)
    assert grown.mass_kg / plain.mass_kg - 1.0 == pytest.approx(0.000784, abs=5e-7)


def test_taps_rise_with_the_shell_and_a_bubbler_does_not() -> None:
    """Two metres between taps grow by 0.039 % in 35 K, and so falls the density (hand)."""
    tank = upright(transmitters=transmitters(p1=0.5, p2=2.5))
    warm = {"temperatures": ((None, 323.15),), "air_temperature_k": 323.15}
    read = Readings(p1_pa=90_000.0, p2_pa=73_346.544, **warm)
    plain = evaluate(tank, single(850.0), read)
    grown = evaluate(replace(tank, shell=STEEL), single(850.0), read)
    assert plain.density_kg_m3 == pytest.approx(850.0, abs=1e-3)
    share = (grown.density_kg_m3 - 1.2) / (plain.density_kg_m3 - 1.2)
    assert share == pytest.approx(1.0 / (1.0 + 1.12e-5 * 35.0), rel=1e-9)
    tip = Transmitter(
        "p1", 0.5, "gauge", leg=Purge(sensor_elevation_m=16.0, molar_mass_kg_mol=0.028)
    )
    hung = replace(tank, transmitters={"p1": tip})
    low = evaluate(hung, single(850.0), Readings(p1_pa=90_000.0, **warm))
    high = evaluate(replace(hung, shell=STEEL), single(850.0), Readings(p1_pa=90_000.0, **warm))
    assert low.level_m == pytest.approx(high.level_m, rel=1e-12)


def test_a_table_made_for_a_density_leaves_only_the_difference() -> None:
    table = strapped([0.0, 15.0], [0.0, np.pi * 100.0 * 15.0])
    shell = Shell(thickness_m=(0.01,), courses_m=((0.0, 15.0, 10.0),), modulus_pa=2.06e11)
    tank = upright(vessel=table, shell=shell)
    bare = evaluate(upright(vessel=table), single(850.0), Readings(level_m=12.0)).volume_m3
    full = evaluate(tank, single(850.0), Readings(level_m=12.0)).volume_m3 - bare
    assert full == pytest.approx(np.pi * 1000.0 * 850.0 * 9.81 * 144.0 / (2.06e11 * 0.01), rel=1e-9)
    for made_for, share in ((850.0, 0.0), (1000.0, -150.0 / 850.0), (425.0, 0.5)):
        known = replace(tank, shell=replace(shell, table_density_kg_m3=made_for))
        less = evaluate(known, single(850.0), Readings(level_m=12.0))
        assert less.volume_m3 - bare == pytest.approx(share * full, rel=1e-9, abs=1e-9)
    far = replace(tank, shell=replace(shell, table_density_kg_m3=1300.0))
    (doubt,) = evaluate(far, single(850.0), Readings(level_m=12.0)).warnings
    assert doubt.code == "table_density"


def test_a_shell_of_unknown_temperature_is_said_and_is_no_doubt() -> None:
    found = evaluate(upright(shell=STEEL), single(850.0), Readings(level_m=5.0))
    assert [n.code for n in found.warnings] == ["shell_temperature_unknown"]
    assert found.status == "good"
    assert found.ctsh is None


def test_a_mean_temperature_over_the_height_warms_the_shell() -> None:
    oil = Expansion(845.0, 288.15, 8.3e-4)
    read = Readings(
        level_m=10.0, temperatures=((2.0, 293.15), (6.0, 303.15)), air_temperature_k=288.15
    )
    found = evaluate(upright(shell=replace(STEEL, insulated=True)), single(oil), read)
    # Held at 20 degC to 2 m, rising to 30 degC at 6 m, held to the surface at 10 m.
    mean = (2.0 * 20.0 + 4.0 * 25.0 + 4.0 * 30.0) / 10.0
    assert found.ctsh == pytest.approx((1.0 + 1.12e-5 * (mean - 15.0)) ** 2, rel=1e-13)


def test_layers_in_a_warm_stretched_tank_keep_their_masses_together() -> None:
    shell = replace(STEEL, thickness_m=(0.01,), courses_m=((0.0, 15.0, 10.0),))
    tank = upright(shell=shell, transmitters=transmitters(p1=0.0))
    fluid = stacked((1000.0, 0.5), (850.0, None))
    warm = {"temperatures": ((None, 310.15),), "air_temperature_k": 300.15}
    full = evaluate(tank, fluid, Readings(level_m=9.0, **warm))
    back = evaluate(tank, fluid, Readings(p1_pa=full.p1_pa, **warm))
    assert back.mass_kg == pytest.approx(full.mass_kg, rel=1e-9)
    by_mass = evaluate(tank, fluid, Readings(mass_kg=full.mass_kg, **warm))
    by_volume = evaluate(tank, fluid, Readings(volume_m3=full.volume_m3, **warm))
    assert (by_mass.level_m, by_volume.level_m) == pytest.approx((9.0, 9.0), abs=1e-9)


def test_arrays_take_the_load_as_single_readings_do() -> None:
    shell = replace(STEEL, thickness_m=(0.012,), courses_m=((0.0, 15.0, 10.0),))
    tank = upright(shell=shell)
    warm = {"temperatures": ((None, 310.15),), "air_temperature_k": 300.15}
    pressures = np.linspace(20_000.0, 110_000.0, 7)
    many = evaluate(tank, single(850.0), Readings(p1_pa=pressures, **warm))
    ones = [evaluate(tank, single(850.0), Readings(p1_pa=float(p), **warm)) for p in pressures]
    assert many.volume_m3 == pytest.approx([one.volume_m3 for one in ones], rel=1e-12)
    assert many.mass_kg == pytest.approx([one.mass_kg for one in ones], rel=1e-12)


def test_water_at_the_bottom_lies_where_the_shell_is_stretched_most() -> None:
    """D 80 m, 20 mm, 206 GPa, 12 m of 850 kg/m3 with 2 m of water: by quadrature, ring by ring."""
    shell = Shell(thickness_m=(0.020,), courses_m=((0.0, 15.0, 40.0),), modulus_pa=2.06e11)
    wide = vertical_cylinder([(15.0, 80.0)], FlatEnd(), FlatEnd())
    tank = upright(vessel=wide, shell=shell, transmitters=transmitters(p1=0.3))
    fluid = stacked((1000.0, 2.0), (850.0, None))
    found = evaluate(tank, fluid, Readings(level_m=12.0))
    mean = (2.0 * 1000.0 + 13.0 * 850.0) / 15.0  # the one density that stands for the head

    def area(z: float) -> float:
        grown = 2.0 * np.pi * 40.0**3 * mean * 9.81 * (12.0 - z) / (2.06e11 * 0.020)
        return float(np.pi * 1600.0 + grown)

    water, product = quad(area, 0.0, 2.0)[0], quad(area, 2.0, 12.0)[0]
    assert found.water_volume_m3 == pytest.approx(water, rel=1e-12)
    assert found.product_volume_m3 == pytest.approx(product, rel=1e-12)
    assert found.mass_kg == pytest.approx(1000.0 * water + 850.0 * product, rel=1e-12)
    (bottom, top) = found.layers
    assert (bottom.volume_m3, top.volume_m3) == pytest.approx((water, product), rel=1e-12)
    by_pressure = evaluate(tank, fluid, Readings(p1_pa=found.p1_pa))
    assert by_pressure.heel_volume_m3 == pytest.approx(quad(area, 0.0, 0.3)[0], rel=1e-12)
    by_mass = evaluate(tank, fluid, Readings(mass_kg=found.mass_kg))
    assert by_mass.level_m == pytest.approx(12.0, abs=1e-9)


def test_a_density_that_falls_with_height_is_weighed_where_the_shell_is_wide() -> None:
    shell = Shell(thickness_m=(0.01,), courses_m=((0.0, 15.0, 10.0),), modulus_pa=2.06e11)
    oil = Expansion(845.0, 288.15, 8.3e-4)
    read = Readings(level_m=12.0, temperatures=((1.0, 278.15), (6.0, 301.15), (11.0, 349.15)))
    found = evaluate(upright(shell=shell), single(oil), read)
    bare = evaluate(upright(), single(oil), read)
    column = [float(np.interp(z, (1.0, 6.0, 11.0), (278.15, 301.15, 349.15)))
              for z in np.linspace(0.0, 15.0, 3001)]  # fmt: skip
    mean = float(np.mean(oil.density(np.asarray(column))))

    def gain(z: float) -> float:
        kelvin = np.interp(z, (1.0, 6.0, 11.0), (278.15, 301.15, 349.15))
        grown = 2.0 * np.pi * 1000.0 * mean * 9.81 * (12.0 - z) / (2.06e11 * 0.01)
        return float(grown * oil.density(np.asarray(kelvin)))

    wanted = quad(gain, 0.0, 12.0, points=(1.0, 6.0, 11.0))[0]
    # Simpson's rule between courses and layers, and a mean density read off a coarse grid.
    assert found.mass_kg - bare.mass_kg == pytest.approx(wanted, rel=2e-3)
    assert found.mass_kg == pytest.approx(bare.mass_kg + wanted, rel=1e-6)
