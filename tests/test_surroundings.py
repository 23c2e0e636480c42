"""Gravity, outside air and its pressure at a site."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st
from published import Published, published

from tankcalc.constants import STANDARD_GRAVITY_M_S2
from tankcalc.errors import InputError
from tankcalc.surroundings import (
    GRS80,
    WGS84,
    Ellipsoid,
    moist_air_density,
    normal_gravity,
    standard_pressure,
    standard_temperature,
    surroundings,
)

ICE = 273.15
ELLIPSOIDS = {"WGS84": WGS84, "GRS80": GRS80}


def found(row: Published) -> float:
    """What this program says to the question of a published row."""
    given_ = row.inputs
    if "geometric_altitude_m" in given_:
        return standard_pressure(given_["geometric_altitude_m"])
    if "xCO2" in given_:
        t, p, humidity = given_["t_C"] + ICE, given_["p_Pa"], given_["RH"]
        return moist_air_density(p, t, humidity, given_["xCO2"])
    if row.quantity == "g_n":
        return STANDARD_GRAVITY_M_S2
    if row.quantity == "Somigliana constant k":
        return ELLIPSOIDS[given_["ellipsoid"]].somigliana
    if "GRS80_lat_deg" in given_:
        latitude = math.radians(given_["GRS80_lat_deg"])
        below, above = (normal_gravity(latitude, h, GRS80) for h in (0.0, given_["h_m"]))
        return below - above
    latitude = math.radians(given_["lat_deg"])
    return normal_gravity(latitude, given_["h_m"], ELLIPSOIDS[given_["ellipsoid"]])


@pytest.mark.parametrize("row", published("gravity_air.csv"), ids=str)
def test_published_gravity_and_air(row: Published) -> None:
    row.agrees(found(row))


@pytest.mark.parametrize(
    ("ellipsoid", "gravity_at_pole"),
    # NIMA TR8350.2 Table 3.4; Moritz, J. Geodesy 74 (2000): both printed to ten decimals.
    [(WGS84, 9.8321849378), (GRS80, 9.8321863685)],
    ids=["WGS84", "GRS80"],
)
def test_ellipsoid_is_consistent_with_its_gravity_at_the_pole(
    ellipsoid: Ellipsoid, gravity_at_pole: float
) -> None:
    assert normal_gravity(math.pi / 2, 0.0, ellipsoid) == pytest.approx(gravity_at_pole, abs=1e-9)
    f = ellipsoid.flattening
    assert ellipsoid.eccentricity_squared == pytest.approx(f * (2 - f), rel=1e-11)
    k = (1 - f) * gravity_at_pole / ellipsoid.gravity_at_equator_m_s2 - 1
    assert ellipsoid.somigliana == pytest.approx(k, abs=2e-11)


@given(st.floats(-90.0, 90.0))
def test_gravity_near_the_international_formula_of_1980(degrees: float) -> None:
    """9.780327 (1 + 0.0053024 sin2 L - 0.0000058 sin2 2L), good to 1e-6 m/s2 (Moritz 2000)."""
    latitude = math.radians(degrees)
    s, s2 = math.sin(latitude) ** 2, math.sin(2 * latitude) ** 2
    series = 9.780327 * (1 + 0.0053024 * s - 0.0000058 * s2)
    assert normal_gravity(latitude, 0.0, GRS80) == pytest.approx(series, abs=2e-6)


@given(st.floats(-math.pi / 2, math.pi / 2), st.floats(-1000.0, 5000.0))
def test_gravity_falls_with_height_and_is_the_same_south(latitude: float, height: float) -> None:
    here = normal_gravity(latitude, height)
    assert normal_gravity(-latitude, height) == here
    fall = (here - normal_gravity(latitude, height + 1000.0)) / 1000.0
    assert fall == pytest.approx(3.086e-6, rel=5e-3)


def oiml_r_111(hectopascal: float, celsius: float, percent: float) -> float:
    """OIML R 111-1 (2004), eq. (E.3-1); for 900 to 1100 hPa, 10 to 30 degC, humidity to 80 %."""
    vapour = 0.009 * percent * math.exp(0.061 * celsius)
    return (0.34848 * hectopascal - vapour) / (273.15 + celsius)


@given(st.floats(900.0, 1100.0), st.floats(10.0, 30.0), st.floats(0.0, 80.0))
def test_air_density_near_the_approximate_formula(
    hectopascal: float, celsius: float, percent: float
) -> None:
    twice_its_standard_uncertainty = 4e-4
    wanted = oiml_r_111(hectopascal, celsius, percent)
    density = moist_air_density(100 * hectopascal, celsius + ICE, percent / 100)
    assert density == pytest.approx(wanted, rel=twice_its_standard_uncertainty)


REAL_AIR = [
    # Pa, degC, relative humidity, kg/m3: real moist air of ASHRAE RP-1485 (Herrmann, Kretzschmar,
    # Gatley 2009), computed with CoolProp 8.0.0.
    (101_325, -40.0, 0.0, 1.51602),
    (101_325, -20.0, 0.0, 1.39568),
    (101_325, 0.0, 0.5, 1.29162),
    (78_000, 10.0, 0.5, 0.9572),
    (101_325, 40.0, 0.8, 1.10275),
    (60_000, 20.0, 0.3, 0.71005),
    (110_000, 50.0, 0.2, 1.176),
    (101_325, 60.0, 0.3, 1.03604),
]


@pytest.mark.parametrize(("p", "celsius", "humidity", "density"), REAL_AIR)
def test_air_density_far_outside_the_recommended_range(
    p: float, celsius: float, humidity: float, density: float
) -> None:
    assert moist_air_density(p, celsius + ICE, humidity) == pytest.approx(density, rel=3e-4)


@given(st.floats(5e4, 1.1e5), st.floats(-60.0, 59.0), st.floats(0.0, 0.9))
def test_air_is_lighter_when_warmer_moister_or_thinner(p: float, t: float, h: float) -> None:
    here = moist_air_density(p, t + ICE, h)
    assert moist_air_density(p, t + ICE + 1.0, h) < here
    assert moist_air_density(p, t + ICE, h + 0.1) < here
    assert moist_air_density(p - 1000.0, t + ICE, h) < here


AIR_REFUSED = [
    (101_325.0, 293.15, 1.01, "air humidity: 1.01"),
    (101_325.0, 293.15, 50.0, "humidity: 50"),
    (101_325.0, 293.15, -0.1, "humidity: -0.1"),
    (101_325.0, 18.0, 0.5, "air temperature: -255.15"),
    (101_325.0, 343.15, 0.5, "air temperature: 70"),
    (1013.25, 293.15, 0.5, "air pressure: 10.1325"),
    (math.nan, 293.15, 0.5, "air pressure: nan"),
    (101_325.0, math.nan, 0.5, "air temperature: nan"),
]


@pytest.mark.parametrize(("p", "t", "humidity", "message"), AIR_REFUSED)
def test_air_of_no_place_on_earth_is_refused(
    p: float, t: float, humidity: float, message: str
) -> None:
    with pytest.raises(InputError, match=message):
        moist_air_density(p, t, humidity)


def test_carbon_dioxide_makes_air_heavier() -> None:
    usual, more = (moist_air_density(101_325.0, 293.15, 0.0, x) for x in (4e-4, 1.4e-3))
    # 1.4446 / 3.483740 of the difference in mole fraction: Picard et al. 2008, eq. (2).
    assert more / usual - 1 == pytest.approx(1e-3 * 1.4446 / 3.483740, rel=1e-6)


@given(st.floats(-1999.0, 19_000.0))
def test_standard_atmosphere_is_in_equilibrium(height: float) -> None:
    """dp/dz = -rho g0 (r / (r + z))^2 with the gas constant of the standard itself."""
    above, below = standard_pressure(height + 1.0), standard_pressure(height - 1.0)
    density = standard_pressure(height) * 28.9644e-3 / (8.31432 * standard_temperature(height))
    g = 9.80665 * (6_356_766.0 / (6_356_766.0 + height)) ** 2
    assert (below - above) / 2.0 == pytest.approx(density * g, rel=1e-5)


def test_standard_atmosphere_is_continuous_at_the_tropopause() -> None:
    tropopause = 11_000.0 * 6_356_766.0 / (6_356_766.0 - 11_000.0)
    below, above = (standard_pressure(tropopause + d) for d in (-1e-6, 1e-6))
    assert below == pytest.approx(above, rel=1e-9)
    # U.S. Standard Atmosphere 1976, Table 4 and text: 226.3206 mb at 11 km'.
    assert above == pytest.approx(22_632.06, abs=0.05)
    assert standard_temperature(15_000.0) == pytest.approx(216.65, abs=1e-9)


@pytest.mark.parametrize("height", [-2001.0, 20_001.0, math.nan, math.inf])
def test_height_outside_the_standard_atmosphere_is_refused(height: float) -> None:
    with pytest.raises(InputError, match="height"):
        standard_pressure(height)


def test_site_that_states_nothing_is_assumed_at_sea_level() -> None:
    here = surroundings()
    assert (here.gravity_m_s2, here.gravity_from) == (9.80665, "standard")
    assert (here.outside_pressure_pa, here.outside_pressure_from) == (101_325.0, "assumed")
    assert (here.air_from, here.air_temperature_k) == ("assumed", None)
    assert here.air_density_kg_m3 == moist_air_density(101_325.0, 288.15, 0.5)


def test_site_with_latitude_and_height() -> None:
    # Check value of gravity: 25 deg, 2240 m, from the WGS 84 formula.
    here = surroundings(latitude_rad=math.radians(25.0), height_m=2240.0)
    assert here.gravity_from == "latitude"
    assert here.gravity_m_s2 == pytest.approx(9.782643, abs=1e-6)
    assert here.outside_pressure_from == "height"
    assert here.outside_pressure_pa == standard_pressure(2240.0)
    assert here.air_from == "assumed"
    assert here.air_density_kg_m3 == pytest.approx(0.98, abs=0.01)


def test_site_that_states_its_air() -> None:
    here = surroundings(outside_pressure_pa=100_000.0, air_temperature_k=313.15, humidity=0.8)
    assert (here.air_from, here.outside_pressure_from) == ("state", "value")
    assert here.air_temperature_k == 313.15
    assert here.air_density_kg_m3 == moist_air_density(100_000.0, 313.15, 0.8)
    dry = surroundings(outside_pressure_pa=100_000.0, air_temperature_k=313.15)
    assert dry.air_density_kg_m3 == moist_air_density(100_000.0, 313.15, 0.5)


def test_site_that_states_gravity_and_air_density() -> None:
    here = surroundings(gravity_m_s2=9.8124, air_density_kg_m3=1.19, air_temperature_k=298.15)
    assert (here.gravity_m_s2, here.gravity_from) == (9.8124, "value")
    assert (here.air_density_kg_m3, here.air_from) == (1.19, "density")
    assert here.air_temperature_k == 298.15


def test_air_is_known_only_with_barometer_and_temperature() -> None:
    assert surroundings(outside_pressure_pa=99_000.0).air_from == "assumed"
    assert surroundings(air_temperature_k=280.0).air_from == "assumed"
    both = surroundings(outside_pressure_pa=99_000.0, air_temperature_k=280.0)
    assert both.air_from == "state"


SITES_REFUSED = [
    ({"gravity_m_s2": 9.69}, "gravity: 9.69"),
    ({"gravity_m_s2": 32.2}, "gravity: 32.2"),
    ({"gravity_m_s2": math.nan}, "gravity: nan"),
    ({"gravity_m_s2": 9.81, "latitude_rad": 0.9, "height_m": 0.0}, "gravity: stated twice"),
    ({"latitude_rad": 0.9}, "needs the height"),
    ({"latitude_rad": 1.6, "height_m": 0.0}, "latitude: 91.67"),
    ({"latitude_rad": math.nan, "height_m": 0.0}, "latitude: nan"),
    ({"latitude_rad": 0.9, "height_m": 12_000.0}, "height: 12000"),
    ({"height_m": -1500.0}, "height: -1500"),
    ({"height_m": math.inf}, "height: inf"),
    ({"air_density_kg_m3": 0.4}, "air density: 0.4"),
    ({"air_density_kg_m3": 1.2, "humidity": 0.5}, "air: a density and a humidity"),
    ({"outside_pressure_pa": 0.0}, "air pressure: 0 "),
    ({"outside_pressure_pa": 0.0, "air_density_kg_m3": 1.2}, "air pressure: 0 "),
    ({"humidity": 55.0}, "air humidity: 55"),
    ({"air_temperature_k": 400.0}, "air temperature: 126.85"),
    ({"air_temperature_k": 400.0, "air_density_kg_m3": 1.2}, "air temperature: 126.85"),
    ({"outside_pressure_pa": 101_325.0, "height_m": 2240.0}, "reduced to sea level"),
]


@pytest.mark.parametrize(("stated", "message"), SITES_REFUSED)
def test_site_of_no_place_on_earth_is_refused(stated: dict[str, float], message: str) -> None:
    with pytest.raises(InputError, match=message):
        surroundings(**stated)


@given(st.floats(-0.09, 0.06), st.floats(-400.0, 6000.0))
def test_any_weather_is_believed_at_any_height(weather: float, height: float) -> None:
    barometer = standard_pressure(height) * (1 + weather)
    here = surroundings(outside_pressure_pa=barometer, height_m=height)
    assert here.outside_pressure_from == "value"
