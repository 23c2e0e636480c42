"""From what an operator types to readings in SI."""

from __future__ import annotations

from typing import Any

import pytest
from tanks import transmitters, upright

from tankcalc.instruments import DifferentialTransmitter, Side, Transmitter
from tankcalc.tank import Tank
from tankcalc.typed import FIELDS, readings_from_text


def fitted() -> Tank:
    p1 = Transmitter("p1", 0.5, "gauge", range_pa=(0.0, 160_000.0))
    p2 = Transmitter("p2", 2.5, "absolute")
    dp = DifferentialTransmitter(0.0, Side(1.0), Side(11.0), range_pa=(-100_000.0, 0.0))
    return upright(transmitters={"p1": p1, "p2": p2} | transmitters(p3=15.0), dp=dp)


def read(**typed: str) -> Any:
    readings, problems = readings_from_text(fitted(), typed)
    assert problems == {}
    return readings


def problem(name: str, text: str) -> str:
    readings, problems = readings_from_text(fitted(), {name: text})
    assert not readings.given()
    return problems[name]


@pytest.mark.parametrize(
    ("text", "pascal"),
    [
        ("98.2 kPa", 98_200.0),
        ("0.982 bar", 98_200.0),
        ("14.2 psi", 14.2 * 6894.757293168361),
        ("14.2 psig", 14.2 * 6894.757293168361),
        ("98,2 kPa(g)", 98_200.0),
        ("12.0 mA", 80_000.0),
        ("37.5 %", 60_000.0),
        ("-3 mbar", -300.0),
    ],
)
def test_a_pressure_is_read_in_any_unit_or_as_its_signal(text: str, pascal: float) -> None:
    assert read(p1=text).p1_pa == pytest.approx(pascal, rel=1e-14)


def test_a_reversed_range_scales_its_signal() -> None:
    assert read(dp="8 mA").dp_pa == pytest.approx(-75_000.0)


@pytest.mark.parametrize(
    ("tag", "text"), [("p1", "3.5 mA"), ("p1", "21.5 mA"), ("dp", "-3 %"), ("p2", "0 mA")]
)
def test_a_failed_signal_gives_no_pressure_and_is_named(tag: str, text: str) -> None:
    readings = read(**{tag: text}, level="5 m")
    assert readings.given() == {"level_m"}
    assert readings.signals == ((tag, "failed"),)


@pytest.mark.parametrize(
    ("text", "pascal", "worth"),
    [
        ("3.7 mA", -3_000.0, "uncertain"),
        ("-1 %", -1_600.0, "saturated"),
        ("20.5 mA", 165_000.0, "saturated"),
        ("105 %", 168_000.0, "uncertain"),
    ],
)
def test_a_signal_past_its_range_is_read_and_named(text: str, pascal: float, worth: str) -> None:
    readings = read(p1=text, dp="8 mA")
    assert readings.p1_pa == pytest.approx(pascal)
    assert readings.dp_pa == pytest.approx(-75_000.0)
    assert readings.signals == (("p1", worth),)


def test_good_signals_and_pressures_are_not_named() -> None:
    assert read(p1="12 mA", p3="1.5 kPa", dp="100 %").signals == ()


@pytest.mark.parametrize(
    ("name", "text", "says"),
    [
        ("p1", "98.2", "unit"),
        ("p1", "1.98 bara", "p1 reads gauge pressure, this is absolute"),
        ("p2", "14.2 psi", 'Type "psia"'),
        ("p2", "1.2 barg", "p2 reads absolute pressure, this is gauge"),
        ("dp", "-3 kPa(g)", "neither gauge nor absolute"),
        ("p2", "12 mA", "no range"),
        ("p1", "0.5", "unit is missing"),
        ("p1", "12 m", "length"),
        ("p1", "twelve", "number"),
        ("level", "5 kPa", "pressure"),
        ("temperature", "-300 degC", "absolute zero"),
        ("temperature", "5000 degC", "no liquid"),
        ("temperature", "1 m: 18 degC, 21 degC", "needs its elevation"),
        ("temperature", "1 m: 18 degC, 1 m: 21 degC", "at one elevation"),
        ("density", "0 kg/m3", "no liquid"),
        ("sediment_water", "120 %", "between 0 and 100 %"),
        ("barometer", "12 hPa", "no outside pressure"),
        ("barometer", "1 barg", "absolute"),
        ("colour", "blue", "not the name"),
    ],
)
def test_what_cannot_be_meant_is_refused_with_what_to_type(name: str, text: str, says: str) -> None:
    assert says in problem(name, text)


def test_a_transmitter_that_is_not_fitted_is_named_with_those_that_are() -> None:
    _, problems = readings_from_text(upright(), {"p2": "3 kPa"})
    assert "V-1 has no p2 transmitter. Fitted: p1." in problems["p2"]


def test_temperatures_at_elevations() -> None:
    found = read(temperature="1 m: 18 degC, 5 m: 21 degC").temperatures
    assert found == ((1.0, pytest.approx(291.15)), (5.0, pytest.approx(294.15)))
    assert read(temperature="64.4 degF").temperatures == ((None, pytest.approx(291.15)),)


def test_blank_fields_are_not_given_and_bad_ones_are_left_out() -> None:
    readings, problems = readings_from_text(fitted(), {"p1": "  ", "level": "5 m", "p3": "?"})
    assert readings.given() == {"level_m"}
    assert set(problems) == {"p3"}


@pytest.mark.parametrize("field", FIELDS, ids=lambda f: f.name)
def test_every_field_says_what_it_takes(field: Any) -> None:
    assert '"' in field.help
    example = field.help.split('"')[1]
    _, problems = readings_from_text(fitted(), {field.name: example})
    assert problems == {}
