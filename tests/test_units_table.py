"""Every unit of the table against pint, the published factors and its own spellings."""

from __future__ import annotations

import math
from typing import Any

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st
from published import Published, published

from tankcalc import units
from tankcalc.units.table import NAMES, WORDS, Unit

TABLE = {(d, name): WORDS[d][name] for d, names in NAMES.items() for name in names}

SI_UNIT = {
    "length": "m",
    "area": "m**2",
    "volume": "m**3",
    "mass": "kg",
    "pressure": "Pa",
    "density": "kg/m**3",
    "temperature": "K",
    "temperature_difference": "K",
    "time": "s",
    "angle": "rad",
    "fraction": "",
    "dimensionless": "",
    "current": "A",
    "acceleration": "m/s**2",
    "expansion": "1/K",
    "molar_mass": "kg/mol",
    "volume_flow": "m**3/s",
    "mass_flow": "kg/s",
    "speed": "m/s",
    "pressure_per_temperature": "Pa/K",
}

BY_PINT = {
    "length": {
        "m": "m",
        "mm": "mm",
        "cm": "cm",
        "ft": "international_foot",
        "in": "international_inch",
        "km": "km",
        "US survey ft": "survey_foot",
    },
    "area": {"m2": "m**2", "cm2": "cm**2", "mm2": "mm**2", "ft2": "foot**2", "in2": "inch**2"},
    "volume": {
        "m3": "m**3",
        "L": "liter",
        "US gal": "gallon",
        "imp gal": "imperial_gallon",
        "oil bbl": "oil_bbl",
        "ft3": "foot**3",
        "hL": "hectoliter",
        "kL": "kiloliter",
        "mL": "milliliter",
        "in3": "inch**3",
    },
    "mass": {
        "kg": "kg",
        "g": "g",
        "t": "tonne",
        "lb": "pound",
        "long ton": "long_ton",
        "short ton": "short_ton",
    },
    "pressure": {
        "kPa": "kPa",
        "bar": "bar",
        "mbar": "mbar",
        "Pa": "Pa",
        "psi": "psi",
        "kgf/cm2": "kilogram_force/cm**2",
        "hPa": "hPa",
        "MPa": "MPa",
        "GPa": "GPa",
        "ksi": "ksi",
        "atm": "atm",
        "mmH2O": "1000 kg/m**3 * g_0 * mm",
        "cmH2O": "1000 kg/m**3 * g_0 * cm",
        "mH2O": "1000 kg/m**3 * g_0 * m",
        "inH2O@4degC": "1000 kg/m**3 * g_0 * inch",
        "inH2O@68degF": "998.2067 kg/m**3 * g_0 * inch",
        "ftH2O@4degC": "1000 kg/m**3 * g_0 * foot",
        "ftH2O@68degF": "998.2067 kg/m**3 * g_0 * foot",
        "mmHg": "13.5951 kg/liter * g_0 * mm",
        "inHg": "13.5951 kg/liter * g_0 * inch",
        "torr": "torr",
    },
    "density": {
        "kg/m3": "kg/m**3",
        "g/cm3": "g/cm**3",
        "kg/L": "kg/liter",
        "g/mL": "g/mL",
        "g/L": "g/liter",
        "t/m3": "tonne/m**3",
        "lb/ft3": "pound/foot**3",
        "lb/US gal": "pound/gallon",
        "lb/imp gal": "pound/imperial_gallon",
    },
    "temperature_difference": {
        "K": "K",
        "degC": "delta_degC",
        "degF": "delta_degF",
        "degR": "delta_degF",
    },
    "time": {"s": "s", "ms": "ms", "min": "min", "h": "hour", "d": "day"},
    "angle": {"deg": "degree", "rad": "rad"},
    "fraction": {"1": "", "%": "percent", "g/kg": "g/kg", "ppm": "ppm"},
    "dimensionless": {
        "1": "",
        "%": "percent",
        "ppm": "ppm",
        "mm/m": "mm/m",
        "m/m": "m/m",
        "in/ft": "inch/foot",
    },
    "current": {"mA": "mA", "A": "A"},
    "acceleration": {"m/s2": "m/s**2", "ft/s2": "foot/s**2"},
    "expansion": {
        "1/K": "1/K",
        "1/degC": "1/delta_degC",
        "1/degF": "1/delta_degF",
        "ppm/K": "ppm/K",
        "%/K": "percent/K",
    },
    "molar_mass": {
        "g/mol": "g/mol",
        "kg/mol": "kg/mol",
        "kg/kmol": "kg/kmol",
        "lb/lbmol": "g/mol",  # a pound-mole is defined by this
    },
    "volume_flow": {
        "m3/h": "m**3/hour",
        "m3/min": "m**3/min",
        "m3/s": "m**3/s",
        "m3/d": "m**3/day",
        "L/s": "liter/s",
        "L/min": "liter/min",
        "L/h": "liter/hour",
        "US gal/min": "gallon/min",
        "imp gal/min": "imperial_gallon/min",
        "oil bbl/h": "oil_bbl/hour",
        "oil bbl/d": "oil_bbl/day",
        "ft3/min": "foot**3/min",
        "ft3/h": "foot**3/hour",
    },
    "mass_flow": {
        "t/h": "tonne/hour",
        "t/d": "tonne/day",
        "kg/h": "kg/hour",
        "kg/min": "kg/min",
        "kg/s": "kg/s",
        "lb/h": "pound/hour",
        "lb/min": "pound/min",
        "lb/s": "pound/s",
    },
    "speed": {
        "m/s": "m/s",
        "m/min": "m/min",
        "m/h": "m/hour",
        "mm/s": "mm/s",
        "mm/min": "mm/min",
        "mm/h": "mm/hour",
        "cm/h": "cm/hour",
        "km/h": "km/hour",
        "ft/s": "foot/s",
        "ft/min": "foot/min",
        "ft/h": "foot/hour",
        "in/min": "inch/min",
        "in/h": "inch/hour",
    },
    "pressure_per_temperature": {
        "Pa/K": "Pa/K",
        "hPa/K": "hPa/K",
        "kPa/K": "kPa/K",
        "mbar/K": "mbar/K",
        "bar/K": "bar/K",
        "psi/degF": "psi/delta_degF",
    },
}

BY_PRINTED_FACTOR = {
    # NIST SP 811 (2008), Appendix B.8: no definition has more digits than the table prints.
    ("pressure", "inH2O@39.2degF"): 249.082,
    ("pressure", "inH2O@60degF"): 248.84,
    ("pressure", "ftH2O@39.2degF"): 2988.98,
    ("pressure", "ftH2O@60degF"): 2986.08,
    ("pressure", "inHg@60degF"): 3376.85,
}

EXPRESSIONS = {(d, name): text for d, row in BY_PINT.items() for name, text in row.items()}


@pytest.fixture(scope="module")
def registry() -> Any:
    return pint.UnitRegistry()


def test_every_unit_is_held_against_another_source() -> None:
    temperatures = {("temperature", name) for name in NAMES["temperature"]}
    assert set(TABLE) == set(EXPRESSIONS) | set(BY_PRINTED_FACTOR) | temperatures


@pytest.mark.parametrize("key", EXPRESSIONS, ids="-".join)
def test_unit_against_pint(key: tuple[str, str], registry: Any) -> None:
    one = registry.Quantity(1.0, "") * registry.parse_expression(EXPRESSIONS[key])
    wanted = one.to(SI_UNIT[key[0]]).magnitude
    assert TABLE[key].to_si(1.0) == pytest.approx(wanted, rel=1e-12)


@pytest.mark.parametrize("name", NAMES["temperature"])
@pytest.mark.parametrize("number", [-40.0, 0.0, 15.0, 212.0])
def test_temperature_against_pint(name: str, number: float, registry: Any) -> None:
    wanted = registry.Quantity(number, name).to("K").magnitude
    assert units.from_unit(number, name) == pytest.approx(wanted, rel=1e-12)


@pytest.mark.parametrize("key", BY_PRINTED_FACTOR, ids="-".join)
def test_unit_against_a_printed_factor(key: tuple[str, str]) -> None:
    last_digit = 2e-5 if key[1].startswith("ft") else 0.0
    assert TABLE[key].to_si(1.0) == pytest.approx(BY_PRINTED_FACTOR[key], rel=last_digit)


def test_water_at_20_degc_against_the_published_equation() -> None:
    """Tanaka et al., Metrologia 38 (2001) 301, eq. (1): air-free water, printed to 1e-4 kg/m3."""
    t = 20.0
    turned = (t - 3.983035) ** 2 * (t + 301.797) / (522528.9 * (t + 69.34881))
    density = 999.974950 * (1.0 - turned)
    inch = units.from_unit(1.0, "inH2O@68degF")
    assert inch / (9.80665 * 0.0254) == pytest.approx(density, abs=1e-4)


PUBLISHED_AS = {
    "inch of water (conventional, 4 C defn rho=1000)": "inH2O@4degC",
    "inch of water (39.2 F)": "inH2O@39.2degF",
    "inch of water (60 F)": "inH2O@60degF",
    "foot of water (39.2 F)": "ftH2O@39.2degF",
    "millimetre of mercury (conventional)": "mmHg",
    "torr": "torr",
    "inch of mercury (conventional)": "inHg",
    "inch of mercury (60 F)": "inHg@60degF",
    "pound-force per square inch": "psi",
    "standard atmosphere": "atm",
    "technical atmosphere kgf/cm2": "kgf/cm2",
    "barrel (42 US gal)": "oil bbl",
    "cubic foot via lb/ft3": "lb/ft3",
    "pound per US gallon": "lb/US gal",
    "pound per imperial gallon": "lb/imp gal",
    "pound avoirdupois": "lb",
    "inch": "in",
    "foot": "ft",
    "US survey foot": "US survey ft",
    "cmH2O conventional": "cmH2O",
    "mH2O conventional": "mH2O",
    "bar": "bar",
    "mmH2O conventional": "mmH2O",
}


@pytest.mark.parametrize("row", published("units.csv"), ids=str)
def test_published_factor(row: Published) -> None:
    row.agrees(units.from_unit(1.0, PUBLISHED_AS[row.inputs["unit"]]))


SPELLINGS = [(d, word, unit) for d, words in WORDS.items() for word, unit in words.items()]


@pytest.mark.parametrize(("dimension", "word", "unit"), SPELLINGS)
def test_every_spelling_is_read(dimension: str, word: str, unit: Unit) -> None:
    text = "7" if word == "1" else f"7 {word}"
    read = units.parse(text, dimension)
    assert (read.unit, read.dimension) == (unit.name, dimension)
    assert read.si == pytest.approx(unit.to_si(7.0), rel=1e-15)


def test_no_word_means_two_units_of_one_dimension() -> None:
    for dimension, words in WORDS.items():
        by_fold: dict[str, Unit] = {}
        for word, unit in words.items():
            assert by_fold.setdefault(word.lower(), unit) is unit, f"{dimension}: {word}"


@given(st.sampled_from(list(TABLE.values())), st.floats(-1e6, 1e6))
def test_conversion_has_its_inverse(unit: Unit, number: float) -> None:
    back = unit.from_si(unit.to_si(number))
    assert math.isclose(back, number, rel_tol=1e-12, abs_tol=1e-10)


def test_unit_of_no_table_is_a_defect_not_a_guess() -> None:
    with pytest.raises(KeyError, match="furlong"):
        units.from_unit(1.0, "furlong")


BY_FULL_NAME = [
    ("decibar", "pressure", 1e4),
    ("Kilopascals", "pressure", 1e3),
    ("decimetres", "length", 0.1),
    ("yards", "length", 0.9144),
    ("nautical miles", "length", 1852.0),
    ("cubic yards", "volume", 0.9144**3),
    ("imperial pint", "volume", 4.54609e-3 / 8),
    ("square feet", "area", 0.3048**2),
    ("hectare", "area", 1e4),
    ("milligrams", "mass", 1e-6),
    ("long hundredweight", "mass", 112 * 0.45359237),
    ("technical atmosphere", "pressure", 98066.5),
    ("mile per hour", "speed", 1609.344 / 3600),
]


@pytest.mark.parametrize(("name", "dimension", "one"), BY_FULL_NAME)
def test_unit_outside_the_table_by_its_full_name(name: str, dimension: str, one: float) -> None:
    assert units.si(f"3 {name}", dimension) == pytest.approx(3 * one, rel=1e-12)
