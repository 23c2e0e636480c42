"""From the tank to standard volume: one liquid, several temperatures, layers, the user's factor."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import quad
from tanks import single, transmitters, upright

from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.petroleum import Petroleum
from tankcalc.fluids.samples import Samples
from tankcalc.fluids.vapour import Vapour
from tankcalc.fluids.water import Water
from tankcalc.gauging import evaluate
from tankcalc.geometry import horizontal_cylinder, sphere
from tankcalc.geometry.ends import EllipsoidalEnd
from tankcalc.readings import Readings
from tankcalc.uncertainty import assess

GAS_OIL = Petroleum("fuel oil", 845.0, 288.15)
WARM = ((None, 305.65),)


def test_standard_volume_is_observed_volume_times_the_factor() -> None:
    found = evaluate(upright(), single(GAS_OIL), Readings(level_m=10.0, temperatures=WARM))
    # CTL of 845 kg/m3 at 32.5 degC: 0.9852842 (worked chain, computed apart from this program).
    assert found.ctl == pytest.approx(0.9852842, abs=5e-8)
    assert found.standard_volume_m3 == pytest.approx(1000.0 * np.pi * found.ctl, rel=1e-12)
    assert found.reference_density_kg_m3 == pytest.approx(845.0, rel=1e-12)
    assert found.product_mass_kg == pytest.approx(845.0 * found.standard_volume_m3, rel=1e-12)
    assert found.reference_temperature_c == 15.0
    assert found.net_standard_volume_m3 is None


def test_sediment_and_water_come_off_the_standard_volume() -> None:
    read = Readings(level_m=10.0, temperatures=WARM, sediment_water=0.001)
    found = evaluate(upright(), single(GAS_OIL), read)
    assert found.net_standard_volume_m3 == pytest.approx(0.999 * found.standard_volume_m3)
    assert found.net_mass_kg == pytest.approx(0.999 * found.product_mass_kg, rel=1e-12)
    assert found.net_weight_in_air_kg == pytest.approx(
        found.net_mass_kg * (1.0 - 1.2 / 845.0) / (1.0 - 1.2 / 8000.0), rel=1e-12
    )


@pytest.mark.parametrize(
    "vessel",
    [sphere(12.0), horizontal_cylinder(3.0, 12.0, EllipsoidalEnd(), EllipsoidalEnd())],
    ids=["sphere", "bullet"],
)
def test_many_temperatures_are_integrated_not_averaged(vessel: object) -> None:
    tank = upright(vessel=vessel)
    top = 0.8 * vessel.z_max  # type: ignore[attr-defined]
    levels, kelvins = (0.1 * top, 0.5 * top, 0.9 * top), (283.15, 303.15, 318.15)
    read = Readings(level_m=top, temperatures=tuple(zip(levels, kelvins, strict=True)))
    found = evaluate(tank, single(GAS_OIL), read)

    def factor(z: float) -> float:
        kelvin = float(np.interp(z, levels, kelvins))
        return float(GAS_OIL.density(np.asarray(kelvin))) / 845.0

    wanted = quad(lambda z: vessel.area(z) * factor(z), 0.0, top, points=levels, limit=400)[0]  # type: ignore[attr-defined]
    assert found.standard_volume_m3 == pytest.approx(wanted, rel=2e-7)
    mean = evaluate(tank, single(GAS_OIL), replace(read, temperatures=((None, np.mean(kelvins)),)))
    assert abs(mean.standard_volume_m3 / wanted - 1.0) > 1e-4


def test_an_element_in_the_vapour_has_no_part() -> None:
    cold = Readings(level_m=5.0, temperatures=((1.0, 293.15), (9.0, 263.15)))
    found = evaluate(upright(), single(GAS_OIL), cold)
    alone = evaluate(upright(), single(GAS_OIL), replace(cold, temperatures=((1.0, 293.15),)))
    assert found.standard_volume_m3 == pytest.approx(alone.standard_volume_m3, rel=1e-14)
    assert "element_in_vapour" in {n.code for n in found.warnings}


def test_pressure_temperatures_and_a_dip_tell_the_reference_density() -> None:
    true = Petroleum("fuel oil", 861.0, 288.15)
    read = Readings(level_m=10.0, temperatures=((1.0, 298.15), (9.0, 308.15)))
    pressure = evaluate(upright(), single(true), read).p1_pa
    found = evaluate(upright(), single(GAS_OIL), replace(read, p1_pa=pressure))
    # The profile is scaled as a whole, its slope with temperature being that of 845 kg/m3.
    assert found.reference_density_kg_m3 == pytest.approx(861.0, abs=0.02)


def test_an_observed_density_goes_back_to_the_base_by_the_equations() -> None:
    observed = float(Petroleum("fuel oil", 861.0, 288.15).density(np.asarray(305.65)))
    read = Readings(level_m=10.0, temperatures=WARM, density_kg_m3=observed)
    found = evaluate(upright(), single(GAS_OIL), read)
    assert found.reference_density_kg_m3 == pytest.approx(861.0, abs=1e-6)
    assert found.standard_volume_m3 == pytest.approx(1000.0 * np.pi * observed / 861.0, rel=1e-9)


@pytest.mark.parametrize(
    ("vessel", "levels", "kelvins"),
    [
        (sphere(12.0), (1.0, 4.0, 7.5), (278.15, 283.15, 313.15)),
        (upright().vessel, (1.0, 5.0), (283.15, 313.15)),
        (upright().vessel, (1.0, 4.0), (283.15, 303.15)),
    ],
)
def test_an_observed_density_is_that_of_the_mean_liquid(
    vessel: object, levels: tuple[float, ...], kelvins: tuple[float, ...]
) -> None:
    """The reference density solves mass = rho_ref times the integral of A CTL(rho_ref, T) dz."""
    tank, top = upright(vessel=vessel), 8.0
    read = Readings(
        level_m=top, temperatures=tuple(zip(levels, kelvins, strict=True)), density_kg_m3=690.0
    )
    found = evaluate(tank, single(Petroleum("gasoline", 700.0, 288.15)), read)
    other = Petroleum("gasoline", float(found.reference_density_kg_m3), 288.15)

    def factor(z: float) -> float:
        kelvin = float(np.interp(z, levels, kelvins))
        return float(other.density(np.asarray(kelvin))) / other.reference_kg_m3

    whole = quad(lambda z: vessel.area(z) * factor(z), 0.0, top, points=levels, limit=200)[0]  # type: ignore[attr-defined]
    mass = 690.0 * float(found.volume_m3)
    assert found.reference_density_kg_m3 == pytest.approx(mass / whole, rel=2e-6)
    # The same profile said with one more element up to the surface changes nothing.
    more = replace(read, temperatures=(*read.temperatures, (top - 1e-6, kelvins[-1])))
    again = evaluate(tank, single(Petroleum("gasoline", 700.0, 288.15)), more)
    assert again.standard_volume_m3 == pytest.approx(found.standard_volume_m3, rel=1e-8)


def test_a_density_outside_the_equations_leaves_the_rest_standing() -> None:
    read = Readings(level_m=10.0, temperatures=WARM, density_kg_m3=700.0)
    found = evaluate(upright(), single(GAS_OIL), read)
    assert found.mass_kg == pytest.approx(700.0 * 1000.0 * np.pi)
    assert (found.standard_volume_m3, found.ctl) == (None, None)
    (doubt,) = [n for n in found.warnings if n.code == "standard_unknown"]
    assert "838" in doubt.message


def test_the_user_s_own_factor() -> None:
    read = Readings(level_m=10.0, ctl=0.98)
    found = evaluate(upright(), single(850.0), read)
    assert found.standard_volume_m3 == pytest.approx(980.0 * np.pi, rel=1e-12)
    assert found.reference_density_kg_m3 == pytest.approx(850.0 / 0.98, rel=1e-12)
    # It wins over the profile's.
    over = evaluate(upright(), single(GAS_OIL), replace(read, temperatures=WARM))
    assert over.ctl == pytest.approx(0.98, rel=1e-12)


def test_what_has_no_base_temperature_has_no_standard_volume() -> None:
    for model in (850.0, Samples((1.0, 5.0), (860.0, 852.0))):
        found = evaluate(upright(), single(model), Readings(level_m=10.0, temperatures=WARM))
        assert (found.standard_volume_m3, found.ctl) == (None, None)
        assert found.status == "good"


def test_layers_add_their_standard_volumes() -> None:
    light = Petroleum("fuel oil", 839.0, 288.15)
    layers = (Layer("water", Water(), 0.5), Layer("heavy", GAS_OIL, 4.0), Layer("light", light))
    read = Readings(level_m=10.0, temperatures=WARM)
    found = evaluate(upright(), Fluid("three", layers), read)
    heavy = 3.5 * 100.0 * np.pi * float(GAS_OIL.density(np.asarray(305.65))) / 845.0
    rest = 6.0 * 100.0 * np.pi * float(light.density(np.asarray(305.65))) / 839.0
    assert found.standard_volume_m3 == pytest.approx(heavy + rest, rel=1e-10)
    mixed = (layers[1], replace(layers[2], model=Petroleum("fuel oil", 839.0, 293.15)))
    other = evaluate(upright(), Fluid("two bases", mixed), read)
    assert other.standard_volume_m3 is None
    assert "standard_bases_differ" in {n.code for n in other.warnings}


def test_the_site_says_the_base_of_what_has_none_of_its_own() -> None:
    tank = upright()
    around = replace(tank.surroundings, standard_temperature_k=293.15)
    found = evaluate(
        replace(tank, surroundings=around),
        single(Water()),
        Readings(level_m=5.0, temperatures=WARM),
    )
    assert found.reference_temperature_c == 20.0
    assert found.reference_density_kg_m3 == pytest.approx(998.2067, abs=5e-5)


def test_a_liquid_under_pressure_is_denser() -> None:
    light = Petroleum("crude", 650.0, 288.15)
    tank = upright(
        vessel=sphere(12.0), transmitters=transmitters(p1=0.5, p3=12.0), vapour=Vapour(5.0)
    )
    read = Readings(level_m=6.0, p3_pa=500_000.0, temperatures=WARM)
    found = evaluate(tank, single(light), read)
    pressed = float(light.pressure_factor(np.asarray(305.65), np.asarray(500_000.0)))
    assert pressed > 1.0005
    assert found.cpl == pytest.approx(pressed, rel=1e-9)
    plain = float(light.density(np.asarray(305.65)))
    assert found.density_kg_m3 == pytest.approx(plain * pressed, rel=1e-9)
    assert found.ctl == pytest.approx(plain / 650.0, rel=1e-9)


def test_an_empty_tank_has_no_factor() -> None:
    found = evaluate(upright(), single(GAS_OIL), Readings(level_m=0.0, temperatures=WARM))
    assert found.standard_volume_m3 == 0.0
    assert (found.ctl, found.reference_density_kg_m3) == (None, None)


def test_the_uncertainty_of_the_standard_volume() -> None:
    """From pressure, temperature moves the level and the factor against each other.

    A vertical tank: mass is fixed by the pressure, so the temperature leaves the standard volume
    alone and the density moves it one to one, less what the tap's height leaves (hand).
    """
    oil = Expansion(845.0, 288.15, 8.3e-4)
    tank = replace(upright(), transmitters=transmitters(p1=0.0))
    budget = assess(tank, single(oil), Readings(p1_pa=80_000.0, temperatures=WARM))
    shares = {s.name: s.contributions for s in budget.shares}
    total = evaluate(tank, single(oil), Readings(p1_pa=80_000.0, temperatures=WARM))
    assert abs(shares["temperature"]["standard_volume_m3"]) < 1e-5 * total.standard_volume_m3
    relative = shares["density"]["standard_volume_m3"] / total.standard_volume_m3
    assert relative == pytest.approx(-1.0 / total.density_kg_m3, rel=0.01)
    dip = assess(tank, single(oil), Readings(level_m=9.0, temperatures=WARM))
    by_level = {s.name: s.contributions for s in dip.shares}
    assert by_level["density"]["standard_volume_m3"] == pytest.approx(0.0, abs=1e-6)
    assert abs(by_level["temperature"]["standard_volume_m3"]) == pytest.approx(
        0.5 * 8.3e-4 / 1.014 * 900.0 * np.pi * 0.9857, rel=0.01
    )


def test_rows_with_densities_of_their_own() -> None:
    tank = replace(upright(), transmitters=transmitters(p1=0.5, p2=2.5))
    rho = np.array([815.0, 832.0, 850.0])
    p1 = 9.81 * rho * 9.5 - 1.2 * 9.81 * (15.0 - 0.5) + 1.2 * 9.81 * (15.0 - 10.0)
    p2 = 9.81 * rho * 7.5 - 1.2 * 9.81 * (15.0 - 2.5) + 1.2 * 9.81 * (15.0 - 10.0)
    many = evaluate(tank, single(GAS_OIL), Readings(p1_pa=p1, p2_pa=p2, temperatures=WARM))
    for k in range(3):
        one = evaluate(
            tank,
            single(GAS_OIL),
            Readings(p1_pa=float(p1[k]), p2_pa=float(p2[k]), temperatures=WARM),
        )
        if one.standard_volume_m3 is not None and many.standard_volume_m3 is not None:
            assert many.standard_volume_m3[k] == pytest.approx(one.standard_volume_m3, rel=1e-9)
    assert many.standard_volume_m3 is None  # 815 kg/m3 is lighter than any fuel oil


def test_a_gas_column_thins_out_upwards() -> None:
    """Nitrogen, 103.325 kPa, 293.15 K: 116.56 Pa over 10 m (by hand); its mass by quadrature."""
    nitrogen = Vapour(molar_mass_kg_mol=0.0280134)
    tank = upright(vessel=sphere(10.0), transmitters=transmitters(p1=0.0, p3=10.0), vapour=nitrogen)
    read = Readings(level_m=0.0, p3_pa=103_325.0 - 101_325.0 + 1.2 * 9.81 * 10.0)
    read = replace(read, temperatures=((None, 293.15),))
    found = evaluate(tank, single(850.0), read)
    top = 103_325.0
    bottom = found.p1_pa + 101_325.0
    k = 0.0280134 * 9.81 / (8.314462618 * 293.15)
    assert bottom - top == pytest.approx(top * np.expm1(10.0 * k), abs=0.01)
    assert bottom - top == pytest.approx(116.56, abs=0.005)

    def per_metre(z: float) -> float:
        area = np.pi * z * (10.0 - z)
        return float(area * top * np.exp(k * (10.0 - z)) * 0.0280134 / (8.314462618 * 293.15))

    assert found.vapour_mass_kg == pytest.approx(quad(per_metre, 0.0, 10.0)[0], rel=1e-6)


@pytest.mark.parametrize("shape", [(), (5,)])
def test_heavy_vapour_that_thins_leads_back_to_the_level(shape: tuple[int, ...]) -> None:
    gas = Vapour(molar_mass_kg_mol=0.0441, compressibility=0.84)
    tank = upright(vessel=sphere(12.0), transmitters=transmitters(p1=0.5, p3=12.0), vapour=gas)
    warm = {"temperatures": ((None, 293.15),), "p3_pa": 836_000.0 - 101_325.0}
    there = evaluate(tank, single(510.0), Readings(level_m=6.0, **warm))
    pressure = np.full(shape, there.p1_pa) if shape else there.p1_pa
    back = evaluate(tank, single(510.0), Readings(p1_pa=pressure, **warm))
    assert np.all(np.abs(back.level_m - 6.0) < 1e-8)
