"""What transmitters read from empty to full, and the ranges to set them to."""

from __future__ import annotations

import json
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import around, single, stacked, transmitters, upright

from tankcalc.errors import InputError, NoAnswerError
from tankcalc.fluids.fluid import Fluid
from tankcalc.fluids.table import Table
from tankcalc.fluids.vapour import Vapour
from tankcalc.gauging import evaluate
from tankcalc.geometry import FlatEnd, HemisphericalEnd, sphere, vertical_cylinder
from tankcalc.instruments import DifferentialTransmitter, FilledLeg, Purge, Side, Transmitter
from tankcalc.readings import Readings
from tankcalc.span import TankSpan, TransmitterSpan, as_json, span_of
from tankcalc.tank import Tank

G, AIR = 9.81, 1.2
WEIGHTLESS = Vapour(density_kg_m3=0.0)


def wet_legs(sensor_m: float = 0.0, **changes: Any) -> DifferentialTransmitter:
    """Two equal legs of 960 kg/m3 at 25 degC, from taps at 1 m and 11 m."""
    fill = (960.0, 298.15, 1.08e-3)
    return DifferentialTransmitter(sensor_m, Side(1.0, *fill), Side(11.0, *fill), **changes)


def legged(dp: DifferentialTransmitter) -> Tank:
    """A tank of 12 m with only a differential transmitter."""
    vessel = vertical_cylinder([(12.0, 5.0)], FlatEnd(), FlatEnd())
    return upright(vessel=vessel, transmitters={}, dp=dp)


def of(tank: Tank, fluid: Fluid, readings: Readings | None = None) -> TransmitterSpan:
    """The span of the only transmitter."""
    (found,) = span_of(tank, [fluid], readings or Readings()).transmitters
    return found


def reading(span: TransmitterSpan, at: str) -> float:
    (point,) = (point for point in span.points if point.at == at)
    (foretold,) = point.readings
    return foretold.reading_pa


def codes(span: TransmitterSpan | TankSpan) -> set[str]:
    return {notice.code for notice in span.warnings}


# Two equal wet legs: dp = rho g (h - z1) - rf g (z3 - z1), worked by hand.
AT_25 = Readings(leg_temperature_k=298.15)


@pytest.mark.parametrize("sensor_m", [-3.0, 0.0, 6.0])
def test_two_wet_legs_read_below_zero_from_empty_to_full(sensor_m: float) -> None:
    tank = legged(wet_legs(sensor_m, range_pa=(-100_000.0, 0.0)))
    found = of(tank, single(850.0, vapour=WEIGHTLESS), AT_25)
    assert reading(found, "empty") == pytest.approx(-94_176.0, abs=0.5)
    assert reading(found, "high_tap") == pytest.approx(-94_176.0, abs=0.5)
    assert reading(found, "low_tap") == pytest.approx(-10_791.0, abs=0.5)
    assert reading(found, "full") == pytest.approx(-10_791.0, abs=0.5)
    assert "all_negative" in codes(found)
    assert found.to_set is not None
    assert (found.to_set.lrv_pa, found.to_set.urv_pa) == (-96_000.0, -10_000.0)
    assert found.covered is True
    assert found.used == pytest.approx(0.83385)


def test_a_range_above_zero_does_not_cover_wet_legs() -> None:
    tank = legged(wet_legs(range_pa=(0.0, 100_000.0)))
    found = of(tank, single(850.0, vapour=WEIGHTLESS), AT_25)
    assert found.covered is False
    assert all(one.current_a is None for point in found.points for one in point.readings)


@pytest.mark.parametrize(("by_k", "error_pa"), [(30.0, 2955.5), (-30.0, -3153.5), (50.0, 4825.0)])
def test_the_legs_temperature_moves_the_whole_span(by_k: float, error_pa: float) -> None:
    tank, fluid = legged(wet_legs()), single(850.0, vapour=WEIGHTLESS)
    other = of(tank, fluid, Readings(leg_temperature_k=298.15 + by_k))
    moved = [reading(other, at) - reading(of(tank, fluid, AT_25), at) for at in ("empty", "full")]
    assert moved == pytest.approx([error_pa, error_pa], abs=0.5)


def test_three_transmitters_read_the_check_set() -> None:
    # g = 9.81, taps at 0.5, 2.5 and 15 m, 850 under 2.5 kg/m3, 12 m, 1500 Pa: by hand.
    tank = upright(
        transmitters=transmitters(p1=0.5, p2=2.5, p3=15.0), limits_m={"maximum_working": 12.0}
    )
    fluid = single(850.0, vapour=Vapour(density_kg_m3=2.5))
    p1, p2, p3 = span_of(tank, [fluid], Readings(p3_pa=1500.0)).transmitters
    assert reading(p1, "maximum_working") == pytest.approx(97_295.631, abs=1e-3)
    assert reading(p2, "maximum_working") == pytest.approx(80_642.175, abs=1e-3)
    assert reading(p3, "maximum_working") == pytest.approx(1500.0, abs=1e-6)


def test_an_open_tank_by_hand() -> None:
    p1 = Transmitter("p1", 0.5, "gauge", range_pa=(0.0, 160_000.0))
    limits = {"minimum_working": 0.9, "critical_high": 14.5, "low_low": 0.3}
    found = of(upright(transmitters={"p1": p1}, limits_m=limits), single(850.0))
    names = ["empty", "low_low", "tap", "minimum_working", "critical_high", "full"]
    assert [point.at for point in found.points] == names
    assert [point.level_m for point in found.points] == [0.0, 0.3, 0.5, 0.9, 14.5, 15.0]
    weight = G * (850.0 - AIR)
    wanted = [0.0, 0.0, 0.0, 0.4 * weight, 14.0 * weight, 14.5 * weight]
    assert [point.readings[0].reading_pa for point in found.points] == pytest.approx(
        wanted, abs=1e-6
    )
    share = 14.5 * weight / 160_000.0
    assert found.points[-1].readings[0].share == pytest.approx(share)
    assert found.points[-1].readings[0].current_a == pytest.approx(0.004 + 0.016 * share)
    assert found.to_set is not None
    assert (found.to_set.lrv_pa, found.to_set.urv_pa) == (0.0, 125_000.0)


def test_the_lightest_and_the_heaviest_liquid_set_the_range() -> None:
    fluids = [Fluid(name, single(rho).layers) for name, rho in (("acid", 1840.0), ("oil", 850.0))]
    (found,) = span_of(upright(), fluids, Readings()).transmitters
    assert [one.fluid for one in found.points[-1].readings] == ["oil", "acid"]
    assert found.lowest_pa == pytest.approx(0.0, abs=1e-6)
    assert found.highest_pa == pytest.approx(G * (1840.0 - AIR) * 14.5)
    span = span_of(upright(), fluids, Readings())
    assert [(x.name, round(x.density_kg_m3, 6)) for x in span.liquids] == [
        ("acid", 1840.0),
        ("oil", 850.0),
    ]


@given(st.floats(0.7, 14.9), st.floats(500.0, 2000.0), st.floats(-1000.0, 5000.0))
def test_the_gauging_reads_the_level_back(level_m: float, rho: float, p3_pa: float) -> None:
    leg = FilledLeg(-1.0, 960.0, 298.15, 1.08e-3)
    taps = {
        "p1": Transmitter("p1", 0.5, "absolute", leg=leg),
        "p3": Transmitter("p3", 15.5, "gauge", vent_elevation_m=1.0),
    }
    tank = upright(transmitters=taps, limits_m={"maximum_working": level_m})
    fluid = single(rho, vapour=Vapour(molar_mass_kg_mol=0.058))
    p1, p3 = span_of(tank, [fluid], Readings(p3_pa=p3_pa)).transmitters
    assert reading(p3, "maximum_working") == pytest.approx(p3_pa, abs=1e-6)
    read = Readings(p1_pa=reading(p1, "maximum_working"), p3_pa=p3_pa)
    assert evaluate(tank, fluid, read).level_m == pytest.approx(level_m, abs=1e-8)


@given(st.floats(1.0, 2.0), st.floats(500.0, 2000.0))
def test_readings_never_fall_as_the_tank_fills(heavier: float, rho: float) -> None:
    limits = {"low_low": 1.0, "minimum_working": 2.5, "maximum_working": 5.0, "high_high": 9.0}
    tank = upright(vessel=sphere(10.0), transmitters=transmitters(p1=0.2, p2=3.0), limits_m=limits)
    fluid = stacked((heavier * rho, 1.5), (rho, None))
    for one in span_of(tank, [fluid], Readings()).transmitters:
        values = [point.readings[0].reading_pa for point in one.points]
        assert values == sorted(values)
        assert "falls_with_level" not in codes(one)


def test_a_bottom_below_the_datum_is_where_empty_is() -> None:
    vessel = vertical_cylinder([(5.0, 4.0)], HemisphericalEnd(), FlatEnd())
    found = of(upright(vessel=vessel, transmitters=transmitters(p1=-1.5)), single(1000.0))
    assert (found.points[0].at, found.points[0].level_m) == ("empty", -2.0)
    assert found.highest_pa == pytest.approx(G * (1000.0 - AIR) * 6.5)


def test_a_tap_outside_the_vessel_is_no_level_of_interest() -> None:
    found = of(upright(transmitters=transmitters(p1=-0.4)), single(1000.0))
    assert [point.at for point in found.points] == ["empty", "full"]


def test_a_purge_line_reads_its_friction_when_empty() -> None:
    bubbler = Transmitter("p1", 0.5, "gauge", vent_elevation_m=0.5, leg=Purge(0.5, 0.029, 35.0))
    found = of(upright(transmitters={"p1": bubbler}), single(1000.0))
    assert found.lowest_pa == pytest.approx(35.0)
    assert found.highest_pa == pytest.approx(35.0 + G * (1000.0 - AIR) * 14.5)


def test_an_absolute_transmitter_moves_with_the_barometer() -> None:
    tank = upright(transmitters={"p1": Transmitter("p1", 0.5, "absolute")})
    usual = of(tank, single(850.0))
    low = of(tank, single(850.0), Readings(barometer_pa=98_000.0))
    assert usual.lowest_pa == pytest.approx(101_325.0 - AIR * G * 0.5)
    assert usual.lowest_pa - low.lowest_pa == pytest.approx(3_325.0)
    assert "98.000 kPa" in low.warnings[0].message
    assert codes(usual) == {"moves_with_barometer"}


def test_p3_has_no_range_from_levels_but_one_from_its_relief() -> None:
    # At 14.9 m, below the top of 15 m: a full tank covers its tap.
    plain = upright(transmitters=transmitters(p1=0.5, p3=14.9))
    span = span_of(plain, [single(850.0)], Readings())
    p1, p3 = span.transmitters
    assert p3.highest_pa == pytest.approx(G * (850.0 - AIR) * 0.1)
    assert p3.to_set is None
    assert "one_vapour_pressure" in codes(p1)
    assert "vapour_pressure_assumed" in codes(span)
    relieved = upright(transmitters=transmitters(p1=0.5, p3=15.0), relief_pa=(-500.0, 2000.0))
    span = span_of(relieved, [single(850.0)], Readings())
    p1, p3 = span.transmitters
    assert p3.to_set is not None
    assert (p3.to_set.lrv_pa, p3.to_set.urv_pa) == (-500.0, 2000.0)
    assert p1.lowest_pa == pytest.approx(-500.0)
    assert p1.highest_pa == pytest.approx(G * (850.0 - AIR) * 14.5 + 2000.0)
    assert reading(p1, "empty") == pytest.approx(0.0, abs=1e-6)
    assert "relief_allowed_for" in codes(span)
    assert "one_vapour_pressure" not in codes(p1)


def test_a_pressure_above_the_liquid_adds_to_every_reading() -> None:
    tank = upright(transmitters=transmitters(p1=0.5, p3=15.0))
    lifted = span_of(tank, [single(850.0)], Readings(p3_pa=700e3)).transmitters[0]
    assert lifted.lowest_pa == pytest.approx(700e3)
    assert lifted.to_set is not None
    assert lifted.to_set.lrv_pa == pytest.approx(700e3)


def test_exchanged_sides_are_noticed() -> None:
    dp = DifferentialTransmitter(0.0, Side(11.0, 960.0), Side(1.0, 960.0))
    assert "falls_with_level" in codes(of(legged(dp), single(850.0)))


def test_the_legs_temperature_is_named_where_it_matters() -> None:
    tank = legged(wet_legs())
    (known,) = (n for n in of(tank, single(850.0), AT_25).warnings if n.code == "leg_temperature")
    assert "25.0 degC" in known.message
    unknown = upright(
        vessel=tank.vessel,
        transmitters={},
        dp=tank.dp,
        surroundings=around(air_temperature_k=None),
    )
    found = of(unknown, single(850.0, vapour=WEIGHTLESS))
    assert found.lowest_pa == pytest.approx(-94_176.0, abs=0.5)
    (said,) = (n for n in found.warnings if n.code == "leg_temperature")
    assert "no other is known" in said.message
    leg = FilledLeg(-1.0, 960.0, 298.15, 1.08e-3)
    p1 = Transmitter("p1", 0.5, "gauge", leg=leg)
    assert "leg_temperature" in codes(of(upright(transmitters={"p1": p1}), single(850.0)))


def test_no_range_no_signal() -> None:
    found = of(upright(), single(850.0))
    assert found.covered is None
    assert found.used is None
    assert {one.share for point in found.points for one in point.readings} == {None}


def test_what_the_site_leaves_open_is_said() -> None:
    tank = upright(surroundings=around(gravity_from="standard", air_from="assumed"))
    span = span_of(tank, [single(850.0), single(850.0)], Readings())
    assert [notice.code for notice in span.warnings] == ["gravity_standard", "air_assumed"]


@pytest.mark.parametrize(
    ("tank", "readings", "tags", "says"),
    [
        (upright(transmitters={}), Readings(), (), "no pressure transmitter"),
        (upright(), Readings(), ("p2",), "no p2 transmitter. Fitted: p1."),
    ],
)
def test_questions_without_sense(
    tank: Tank, readings: Readings, tags: tuple[str, ...], says: str
) -> None:
    with pytest.raises(InputError, match=says):
        span_of(tank, [single(850.0)], readings, tags)


def test_what_the_gauging_refuses_is_not_foretold() -> None:
    closed = upright(transmitters=transmitters(p1=0.5, p3=15.0))
    with pytest.raises(NoAnswerError, match="below a perfect vacuum"):
        span_of(closed, [single(850.0)], Readings(p3_pa=-101_326.0))
    cold = Readings(temperatures=((None, 250.0),))
    with pytest.raises(NoAnswerError, match="liquid in V-1"):
        span_of(upright(), [single(Table((280.0, 300.0), (999.0, 997.0)))], cold)


def test_json_is_plain_data() -> None:
    tank = legged(wet_legs(range_pa=(-100_000.0, 0.0)))
    data = json.loads(json.dumps(as_json(span_of(tank, [single(850.0)], AT_25)), allow_nan=False))
    assert set(data) == {"tank", "liquids", "vapour_pa", "transmitters", "warnings"}
    (dp,) = data["transmitters"]
    assert dp["to_set"] == {"lrv_pa": -96_000.0, "urv_pa": -10_000.0, "step_pa": 2000.0}
    assert set(dp["points"][0]["readings"][0]) == {"fluid", "reading_pa", "share", "current_a"}
    assert {tuple(notice) for notice in dp["warnings"]} == {("code", "message", "reading")}
