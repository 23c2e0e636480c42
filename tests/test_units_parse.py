"""What a typed quantity is read as, and what a person is told when it cannot be read."""

from __future__ import annotations

import subprocess
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc import units
from tankcalc.errors import QuantityError

READ = [
    # text, dimension, SI
    ("98.2 kPa", "pressure", 98_200.0),
    ("1.35 bar", "pressure", 135_000.0),
    ("1.35bar", "pressure", 135_000.0),
    ("  1.35   bar \n", "pressure", 135_000.0),
    ("1.35\u00a0bar", "pressure", 135_000.0),
    ("-2.5 mbar", "pressure", -250.0),
    ("+2.5 mbar", "pressure", 250.0),
    ("\u22122.5 mbar", "pressure", -250.0),
    ("1e5 Pa", "pressure", 1e5),
    ("1.0E+05 Pa", "pressure", 1e5),
    ("2.1 GPa", "pressure", 2.1e9),
    (".5 bar", "pressure", 5e4),
    ("5. bar", "pressure", 5e5),
    ("1 kg/cm2", "pressure", 98_066.5),
    ("1 kgf/cm²", "pressure", 98_066.5),
    ("100 mm w.c.", "pressure", 980.665),
    ("100 inH2O @ 4 °C", "pressure", 24_908.891),
    ("100 in. H2O (60 degF)", "pressure", 24_884.0),
    ("760 mm Hg", "pressure", 101_325.0144354),
    ("845 kg/m3", "density", 845.0),
    ("845 kg / m^3", "density", 845.0),
    ("845 kg/m³", "density", 845.0),
    ("0.845 g/cm^3", "density", 845.0),
    ("0.845 t/m3", "density", 845.0),
    ("18 degC", "temperature", 291.15),
    ("18 °C", "temperature", 291.15),
    ("18 C", "temperature", 291.15),
    ("-40 °F", "temperature", 233.15),
    ("5 degC", "temperature_difference", 5.0),
    ("9 degF", "temperature_difference", 5.0),
    ("1.12e-5 / K", "expansion", 1.12e-5),
    ("1.12e-5 1/K", "expansion", 1.12e-5),
    ("1.12e-5 /°C", "expansion", 1.12e-5),
    ("9e-6 /degF", "expansion", 1.62e-5),
    ("0.001", "fraction", 0.001),
    ("0.1 %", "fraction", 0.001),
    ("1000ppm", "fraction", 0.001),
    ("10 mm/m", "dimensionless", 0.01),
    ("12.0 mA", "current", 0.012),
    ("52.0 deg", "angle", 0.9075712110370514),
    ("52°", "angle", 0.9075712110370514),
    ("28.01 g/mol", "molar_mass", 0.02801),
    ("9.81 m/s²", "acceleration", 9.81),
    ("360 m³/h", "volume_flow", 0.1),
    ("100 US gal", "volume", 0.3785411784),
    ("100 U.S. gal", "volume", 0.3785411784),
    ("100 imp. gal", "volume", 0.454609),
    ("10 bbl(oil)", "volume", 1.58987294928),
    ("10 oil bbl", "volume", 1.58987294928),
    ("2 long tons", "mass", 2032.0938176),
    ("2 metric tons", "mass", 2000.0),
    ("12'", "length", 3.6576),
    ('3"', "length", 0.0762),
    ("12 ft.", "length", 3.6576),
    ("500 ms", "time", 0.5),
]


@pytest.mark.parametrize(("text", "dimension", "si"), READ)
def test_quantity_is_read(text: str, dimension: str, si: float) -> None:
    assert units.si(text, dimension) == pytest.approx(si, rel=1e-14)


FEET = [
    ("12 ft 3 5/8 in", 12 * 12 + 3.625),
    ("12'-3 5/8\"", 12 * 12 + 3.625),
    ("12' 3-5/8\"", 12 * 12 + 3.625),
    ("12′ 3 5/8″", 12 * 12 + 3.625),
    ("12\u2019 3 5/8\u201d", 12 * 12 + 3.625),
    ("12 FT 3 5/8 IN", 12 * 12 + 3.625),
    ("12ft3in", 12 * 12 + 3),
    ("12 ft 3 in", 12 * 12 + 3),
    ("12 feet 3 inches", 12 * 12 + 3),
    ("12 ft - 3 in", 12 * 12 + 3),
    ("12 ft 3.25 in", 12 * 12 + 3.25),
    ("12 ft 0 1/16 in", 12 * 12 + 0.0625),
    ("12 ft 5/8 in", 12 * 12 + 0.625),
    ("3 5/8 in", 3.625),
    ("5/8 in", 0.625),
    ("40 63/64 in", 40 + 63 / 64),
    ("-1 ft 6 in", -18),
]


@pytest.mark.parametrize(("text", "inches"), FEET)
def test_feet_inches_and_fractions_are_read(text: str, inches: float) -> None:
    assert units.si(text, "length") == pytest.approx(inches * 0.0254, rel=1e-14)


REFERENCES = [
    ("98.2 kPa", "kPa", None),
    ("98.2 kPa(g)", "kPa", "gauge"),
    ("98.2 kPa (a)", "kPa", "absolute"),
    ("98.2 kPag", "kPa", "gauge"),
    ("98.2 kPaa", "kPa", "absolute"),
    ("98.2 kPa abs", "kPa", "absolute"),
    ("98.2 kPa(abs)", "kPa", "absolute"),
    ("98.2 kPa gauge", "kPa", "gauge"),
    ("98.2 Pa", "Pa", None),
    ("1.2 barg", "bar", "gauge"),
    ("1.2 bara", "bar", "absolute"),
    ("1.2 bar a", "bar", "absolute"),
    ("1.2 BARA", "bar", "absolute"),
    ("14.7 psia", "psi", "absolute"),
    ("14.7 psig", "psi", "gauge"),
    ("14.7 PSIG", "psi", "gauge"),
    ("14.7 psi", "psi", None),
    ("1 kg/cm2g", "kgf/cm2", "gauge"),
    ("760 mmHg(a)", "mmHg", "absolute"),
    ("1 mbar(g)", "mbar", "gauge"),
]


@pytest.mark.parametrize(("text", "unit", "reference"), REFERENCES)
def test_pressure_reference_is_kept_and_changes_no_number(
    text: str, unit: str, reference: str | None
) -> None:
    read = units.parse(text, "pressure")
    assert (read.unit, read.reference) == (unit, reference)
    assert read.si == units.from_unit(float(text.split()[0]), unit)


@pytest.mark.parametrize("text", ["5 mmHga", "5 inHgg", "5 mg", "5 kPa(g)(a)", "5 kPaga", "5 ma"])
def test_letters_that_make_no_reference_are_refused(text: str) -> None:
    with pytest.raises(QuantityError):
        units.parse(text, "pressure")


REFUSED = [
    # text, dimension, in the reason, in the advice
    ("12 ton", "mass", "not clear", '"short ton"'),
    ("12 tons", "mass", "2240 lb", '"t"'),
    ("12 ton/h", "mass_flow", "not clear", '"t/h"'),
    ("5 gal", "volume", "not clear", '"US gal" or "imp gal"'),
    ("5 gallons", "volume", "not clear", '"US gal" or "imp gal"'),
    ("5 bbl", "volume", "not clear", '"oil bbl"'),
    ("5 barrels", "volume", "not clear", '"oil bbl"'),
    ("7 lb/gal", "density", "not clear", '"lb/US gal"'),
    ("7 ppg", "density", "not clear", '"lb/US gal"'),
    ("0.845 SG", "density", "relative density", '"845 kg/m3"'),
    ("36 API", "density", "relative density", '"845 kg/m3"'),
    ("36 °API", "density", "relative density", '"845 kg/m3"'),
    ("40 inH2O", "pressure", "water's temperature", '"inH2O@60degF"'),
    ("40 in w.c.", "pressure", "water's temperature", '"inH2O@4degC"'),
    ("40 ftH2O", "pressure", "water's temperature", '"ftH2O@4degC"'),
    ("3 psid", "pressure", "takes no letter", '"psi"'),
    ("300 gpm", "volume_flow", "not clear", '"US gal/min"'),
    ("3 pints", "volume", "not clear", '"L"'),
    # capitals
    ("1 mPa", "pressure", 'not read as "MPa"', '"MPa"'),
    ("1 mpa", "pressure", 'not read as "MPa"', '"MPa"'),
    ("1 Mbar", "pressure", 'not read as "mbar"', '"mbar"'),
    ("12 M", "length", 'not read as "m"', '"m"'),
    ("12 MM", "length", 'not read as "mm"', '"mm"'),
    ("12 T", "mass", 'not read as "t"', '"t"'),
    ("12 MA", "current", 'not read as "mA"', '"mA"'),
    ("300 k", "temperature", 'not read as "K"', '"K"'),
    # units of something else, of nothing
    ("98.2 m", "pressure", '"m" is a length; a pressure is wanted', ""),
    ("98.2 kPa", "length", '"kPa" is a pressure; a length is wanted', ""),
    ("5 kPa(g)", "volume", '"kPa(g)" is a pressure', ""),
    ("8 kg", "pressure", '"kg" is a mass', ""),
    ("98.2 kPs", "pressure", 'Unknown unit "kPs"', '"kPa"'),
    ("98.2 meterz", "length", 'Unknown unit "meterz"', '"meter"'),
    ("98.2 xyzzy", "pressure", 'Unknown unit "xyzzy"', "kPa, bar, mbar"),
    ("845 water", "density", 'Unknown unit "water"', "kg/m3"),
    ("3 furlongs", "length", "Unknown unit", "m, mm, cm, ft, in"),
    # numbers
    ("98.2", "pressure", "The unit is missing", '"98.2 kPa"'),
    ("12", "length", "The unit is missing", '"12 m"'),
    ("", "pressure", "Nothing is typed; a pressure is wanted", ""),
    ("   ", "pressure", "Nothing is typed", ""),
    ("kPa", "pressure", "The number is missing", ""),
    ("nan kPa", "pressure", "Not a finite number", ""),
    ("-inf m", "length", "Not a finite number", ""),
    ("1e400 m", "length", "too large", "exponent"),
    ("1e16 Pa", "pressure", "too large", "exponent"),
    ("1e-400 m", "length", "Too small", "exponent"),
    ("1e-51/K", "expansion", "Too small", "exponent"),
    ("12e3456 m", "length", "Unknown unit", ""),
    ("12 345 kPa", "pressure", "Not one number and one unit", "blanks"),
    ("1.2.3 m", "length", "Not one number and one unit", ""),
    ("--5 m", "length", "Not one number and one unit", ""),
    ("5 m 3", "length", "Unknown unit", ""),
    ("9**9**9", "length", "Not one number and one unit", ""),
    ("2*3 m", "length", "Not one number and one unit", ""),
    ("-300 degC", "temperature", "absolute zero", "sign"),
    ("-1 bara", "pressure", "never below zero", "reference"),
    # commas
    ("1,250 kPa", "pressure", "thousands or decimals", "decimal point"),
    ("0,125 m", "length", "thousands or decimals", "decimal point"),
    ("1,250,000 Pa", "pressure", "Not one number", ""),
    ("1.250,5 kPa", "pressure", "Not one number", ""),
    ("1,250.5 kPa", "pressure", "Not one number", ""),
    ("12, kPa", "pressure", "No digit follows the comma", "decimal point"),
    # feet and inches
    ("12 ft 3", "length", "Not feet and inches", '"12 ft 3 5/8 in"'),
    ("12'3", "length", "Not feet and inches", '"12 ft 3 5/8 in"'),
    ("12.5 ft 3 in", "length", "Not feet and inches", "whole feet"),
    ("1/2 ft", "length", "Not feet and inches", ""),
    ("12 ft 14 in", "length", "Twelve inches or more", "Carry"),
    ("3 5/7 in", "length", "not divided into 7", "sixteenths"),
    ("3 5/0 in", "length", "not divided into 0", "sixteenths"),
    ("3 9/8 in", "length", "a whole inch or more", "Carry"),
    ("3.5 5/8 in", "length", "Decimals and a fraction", "one of them"),
    ("12 ft 3 in", "pressure", "Unknown unit", ""),
    # characters
    ("２ bar", "pressure", "U+FF12", "plain digits"),
    ("٣ bar", "pressure", "U+0663", "plain digits"),
    ("½ in", "length", "U+00BD", "plain digits"),
    ("2 bar\ufffd", "pressure", "U+FFFD", "plain digits"),
    ("2\u200b bar", "pressure", "U+200B", "plain digits"),
    ("\u202e2 bar", "pressure", "U+202E", "plain digits"),
    ("2 bar\x00", "pressure", "U+0000", "plain digits"),
    ("\x1b[31m2 bar", "pressure", "U+001B", "plain digits"),
    ("5 \u2103", "temperature", "U+2103", "plain digits"),
    ("1" * 50 + " m", "length", "Too long", "one number and one unit"),
]


@pytest.mark.parametrize(("text", "dimension", "why", "advice"), REFUSED)
def test_refusal_says_why_and_what_to_type(
    text: str, dimension: str, why: str, advice: str
) -> None:
    with pytest.raises(QuantityError) as refused:
        units.parse(text, dimension)
    assert why in refused.value.why
    assert advice in refused.value.advice
    assert str(refused.value).isprintable()


def test_every_piece_of_advice_on_an_ambiguous_word_can_be_typed() -> None:
    from tankcalc.units.ambiguous import AMBIGUOUS

    for word, (_why, advice) in AMBIGUOUS.items():
        quoted = advice.split('"')[1::2]
        assert quoted, word
        for text in quoted:
            typed = text if text[0].isdigit() else f"7 {text}"
            assert units.parse_any(typed, tuple(units.DIMENSIONS)).si > 0.0


@pytest.mark.parametrize("dimension", units.DIMENSIONS)
def test_example_of_every_dimension_is_read(dimension: str) -> None:
    example = units.DIMENSIONS[dimension].example
    assert units.parse(example, dimension).si > 0.0


@given(st.integers(0, 10**6), st.integers(0, 99))
def test_decimal_comma_of_two_digits_is_a_point(whole: int, hundredths: int) -> None:
    with_comma = units.si(f"{whole},{hundredths:02} kPa", "pressure")
    assert with_comma == units.si(f"{whole}.{hundredths:02} kPa", "pressure")


@given(st.integers(0, 10**6), st.integers(0, 999))
def test_comma_before_three_digits_is_never_guessed(whole: int, thousandths: int) -> None:
    with pytest.raises(QuantityError, match="thousands or decimals"):
        units.parse(f"{whole},{thousandths:03} kPa", "pressure")


def test_first_of_several_dimensions_that_fits_is_taken() -> None:
    p1 = ("pressure", "current", "fraction")
    read = [units.parse_any(text, p1) for text in ("98.2 kPa", "12.0 mA", "37.5 %")]
    assert [r.dimension for r in read] == ["pressure", "current", "fraction"]
    assert [r.si for r in read] == [98_200.0, 0.012, 0.375]


def test_bare_number_is_no_fraction_where_a_pressure_may_be_meant() -> None:
    with pytest.raises(QuantityError, match="unit is missing") as refused:
        units.parse_any("0.5", ("pressure", "current", "fraction"))
    assert '"0.5 kPa"' in refused.value.advice


def test_every_dimension_that_is_wanted_is_named() -> None:
    with pytest.raises(QuantityError, match="a pressure, a current or a fraction is wanted"):
        units.parse_any("3 m", ("pressure", "current", "fraction"))


def test_harmless_capitals_are_forgiven() -> None:
    slips = ("1 KPA", "1 kpa", "1 KPa", "1 Kpa")
    assert [units.parse(text, "pressure").unit for text in slips] == ["kPa"] * 4
    assert units.parse("1 Kg", "mass").unit == "kg"
    assert units.parse("1 TONNE", "mass").unit == "t"
    assert units.parse("1 Metre", "length").unit == "m"
    assert units.parse("1 Torr", "pressure").unit == "torr"
    assert units.parse("845 KG/M3", "density").unit == "kg/m3"
    assert units.parse("60 degf", "temperature").unit == "degF"


def test_text_is_kept_as_typed() -> None:
    read = units.parse("  12,5   kPa ", "pressure")
    assert (read.text, read.si) == ("12,5 kPa", 12_500.0)


def test_dimension_that_does_not_exist_is_a_defect() -> None:
    with pytest.raises(KeyError, match="colour"):
        units.parse("5 m", "colour")


def test_reading_text_loads_nothing_heavy() -> None:
    code = (
        "from tankcalc import units\n"
        "units.parse('12 ft 3 5/8 in', 'length'); units.parse('98,2 kPa(g)', 'pressure')\n"
        "import sys\nprint(*sorted(sys.modules))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert not {"pint", "numpy", "decimal", "difflib"} & set(done.stdout.split())
