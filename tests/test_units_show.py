"""What a value looks like in each system of units."""

from __future__ import annotations

import math

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from tankcalc import units
from tankcalc.units import UNIT_FOR, System, base_words

SHOWN = [
    # SI, dimension, metric, US, imperial
    (12.3456, "length", "12.346 m", "40 ft 6 1/16 in", "40 ft 6 1/16 in"),
    (3.749675, "length", "3.750 m", "12 ft 3 5/8 in", "12 ft 3 5/8 in"),
    (3.6576, "length", "3.658 m", "12 ft 0 in", "12 ft 0 in"),
    (-0.0254, "length", "-0.025 m", "-0 ft 1 in", "-0 ft 1 in"),
    (98_200.0, "pressure", "98.200 kPa", "14.2427 psi", "14.2427 psi"),
    (2.1e9, "pressure", "2100.0 MPa", "304.58 ksi", "304.58 ksi"),
    (845.0, "density", "845.00 kg/m3", "52.752 lb/ft3", "52.752 lb/ft3"),
    (291.15, "temperature", "18.0 degC", "64.4 degF", "64.4 degF"),
    (5.0, "temperature_difference", "5.00 K", "9.00 degF", "9.00 degF"),
    (2.5, "volume", "2.500 m3", "660.4 US gal", "549.9 imp gal"),
    (3769.9112, "volume", "3769.91 m3", "995905.2 US gal", "829264.5 imp gal"),
    (0.05, "volume", "0.050 m3", "13.21 US gal", "11.00 imp gal"),
    (265_432.1, "mass", "265.432 t", "585178 lb", "585178 lb"),
    (12.3456, "mass", "12.35 kg", "27.22 lb", "27.22 lb"),
    (0.001, "fraction", "0.10 %", "0.10 %", "0.10 %"),
    (0.012, "current", "12.000 mA", "12.000 mA", "12.000 mA"),
    (1.12e-5, "expansion", "1.12e-05 1/K", "6.222e-06 1/degF", "6.222e-06 1/degF"),
    (0.02, "dimensionless", "0.02", "0.02", "0.02"),
    (9.80665, "acceleration", "9.80665 m/s2", "9.80665 m/s2", "9.80665 m/s2"),
    (0.1, "volume_flow", "360.00 m3/h", "1585.0 US gal/min", "1319.8 imp gal/min"),
    (45.0, "time", "45 s", "45 s", "45 s"),
    (1800.0, "time", "30 min", "30 min", "30 min"),
    (43_200.0, "time", "12.0 h", "12.0 h", "12.0 h"),
]


@pytest.mark.parametrize(("si", "dimension", "metric", "us", "imperial"), SHOWN)
def test_value_in_each_system(
    si: float, dimension: str, metric: str, us: str, imperial: str
) -> None:
    assert units.show(si, dimension) == metric
    assert units.show(si, dimension, "us") == us
    assert units.show(si, dimension, "imperial") == imperial


@pytest.mark.parametrize("system", ["metric", "us", "imperial"])
@pytest.mark.parametrize("dimension", units.DIMENSIONS)
@pytest.mark.parametrize("tiny", [0.0, -0.0, -1e-12])
def test_nothing_is_shown_as_less_than_nothing(dimension: str, tiny: float, system: System) -> None:
    shown = units.show(tiny, dimension, system, digits=3)
    assert not shown.startswith("-0.000")


@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf])
@pytest.mark.parametrize("system", ["metric", "us", "imperial"])
def test_what_is_not_finite_is_never_shown(bad: float, system: System) -> None:
    with pytest.raises(ValueError, match="length to be shown is not finite"):
        units.show(bad, "length", system)


@pytest.mark.parametrize(
    ("si", "shown"), [(2.0005, "2.001 m"), (1.0015, "1.002 m"), (-2.0005, "-2.001 m")]
)
def test_halves_are_rounded_away_from_zero_as_by_hand(si: float, shown: str) -> None:
    assert units.show(si, "length") == shown


def test_decimals_can_be_asked_for() -> None:
    assert units.show(98_234.5, "pressure", digits=0) == "98 kPa"
    assert units.show(12.3456, "length", "us", digits=2) == "40.50 ft"
    assert units.show(845.0, "density", "us", digits=1) == "52.8 lb/ft3"


def test_halves_of_a_sixteenth_carry_into_inches_and_feet() -> None:
    just_below_13_ft = 13 * 0.3048 - 0.0254 / 64
    assert units.show(just_below_13_ft, "length", "us") == "13 ft 0 in"


@pytest.mark.parametrize("system", ["metric", "us", "imperial"])
def test_every_dimension_has_a_unit_in_every_system(system: System) -> None:
    assert set(UNIT_FOR[system]) == set(units.DIMENSIONS)
    for dimension, unit in UNIT_FOR[system].items():
        assert unit in units.NAMES[dimension]
        assert units.show(1.0, dimension, system)


FIGURES = ("dimensionless", "expansion", "pressure_per_temperature")
"""Dimensions without a usual size: shown with four figures instead of fixed decimals."""

SYSTEMS = st.sampled_from(list(UNIT_FOR))


@given(
    st.sampled_from([d for d in units.DIMENSIONS if d not in {"length", *FIGURES}]),
    st.floats(0.001, 1e6),
    SYSTEMS,
)
def test_what_is_shown_reads_back_within_half_its_last_digit(
    dimension: str, si: float, system: System
) -> None:
    assume(dimension != "temperature" or si > 1.0)
    shown = units.show(si, dimension, system)
    number, unit = shown.split(" ", 1)
    half = 0.5 * 10.0 ** -len(number.partition(".")[2])
    assert abs(float(number) - units.to_unit(si, unit, dimension)) <= half * (1 + 1e-6)
    assert units.si(shown, dimension) == units.from_unit(float(number), unit, dimension)


@given(st.sampled_from(FIGURES), st.floats(1e-9, 1e9), SYSTEMS)
def test_what_is_shown_in_figures_reads_back_to_four_of_them(
    dimension: str, si: float, system: System
) -> None:
    shown = units.show(si, dimension, system)
    assert units.si(shown, dimension) == pytest.approx(si, rel=5.001e-4)


@given(st.floats(-1e3, 1e3))
def test_feet_inches_and_sixteenths_read_back(metres: float) -> None:
    shown = units.show(metres, "length", "us")
    back = units.si(shown, "length")
    assert abs(back - metres) <= 0.0254 / 32 + 1e-9
    assert units.show(back, "length", "us") == shown


def test_a_base_temperature_is_called_by_its_name() -> None:
    assert [base_words(k, fahrenheit=True) for k in (288.15, 293.15, 288.15 + 5.0 / 9.0)] == [
        "15 degC",
        "20 degC",
        "60 degF",
    ]
    assert base_words(298.15, fahrenheit=False) == "25.0 degC"
    assert base_words(298.15, fahrenheit=True) == "77.0 degF"
