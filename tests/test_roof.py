"""Floating roofs: afloat, on their legs, and the zone between, where nothing exact is said."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from tanks import single, stacked, transmitters, upright

from tankcalc.gauging import evaluate
from tankcalc.gauging.roof import roof_adjustment_m3
from tankcalc.geometry import strapped
from tankcalc.readings import Readings
from tankcalc.tank import FloatingRoof
from tankcalc.uncertainty import assess

ROOF = FloatingRoof(150_000.0, 1.5, 2.2)
ROOFED = upright(floating_roof=ROOF, limits_m={"maximum_working": 13.0, "minimum_working": 2.5})
AREA = np.pi * 100.0


def test_the_adjustment_of_a_table_made_for_another_density() -> None:
    """150 t, 850 to 780 kg/m3: -15.837 m3 (worked by hand)."""
    assert float(roof_adjustment_m3(150_000.0, 780.0, 850.0)) == pytest.approx(-15.837, abs=5e-4)


def test_afloat_the_roof_displaces_its_mass() -> None:
    found = evaluate(ROOFED, single(850.0), Readings(level_m=10.0))
    assert found.volume_m3 == pytest.approx(AREA * 10.0 - 150_000.0 / 850.0, rel=1e-12)
    assert found.mass_kg == pytest.approx(AREA * 10.0 * 850.0 - 150_000.0, rel=1e-12)
    assert found.density_kg_m3 == pytest.approx(850.0, rel=1e-12)
    assert found.room_m3 == pytest.approx(AREA * 3.0, rel=1e-12)
    assert found.pumpable_m3 == pytest.approx(AREA * 7.5, rel=1e-12)


def test_on_its_legs_it_displaces_nothing() -> None:
    found = evaluate(ROOFED, single(850.0), Readings(level_m=1.2))
    assert found.volume_m3 == pytest.approx(AREA * 1.2, rel=1e-12)
    assert found.mass_kg == pytest.approx(AREA * 1.2 * 850.0, rel=1e-12)


def test_pressure_weighs_the_roof_with_the_liquid() -> None:
    """Areal mass times area, plus the heel, less the roof: the rule of the pressure method."""
    found = evaluate(ROOFED, single(850.0), Readings(p1_pa=80_000.0))
    # Open tank: air of 1.2 kg/m3 above the liquid cancels against that outside.
    areal = 80_000.0 / 9.81 + 1.2 * (15.0 - 0.5) - 1.2 * (15.0 - found.level_m)
    assert found.mass_kg == pytest.approx(AREA * (areal + 850.0 * 0.5) - 150_000.0, rel=1e-9)
    assert found.heel_volume_m3 == pytest.approx(AREA * 0.5, rel=1e-12)
    assert found.heel_mass_kg == pytest.approx(AREA * 0.5 * 850.0, rel=1e-12)


def test_a_measured_density_is_that_of_the_liquid_round_the_roof() -> None:
    tank = replace(ROOFED, transmitters=transmitters(p1=0.5, p2=2.5))
    true = evaluate(tank, single(850.0), Readings(level_m=10.0))
    read = Readings(p1_pa=true.p1_pa, p2_pa=true.p2_pa)
    found = evaluate(tank, single(800.0), read)
    assert found.mass_kg == pytest.approx(true.mass_kg, rel=1e-9)
    assert found.volume_m3 == pytest.approx(true.volume_m3, rel=1e-9)


def test_the_critical_zone_has_a_level_and_bounds_and_no_amounts() -> None:
    found = evaluate(ROOFED, single(850.0), Readings(level_m=1.9))
    assert found.status == "refused"
    assert [n.code for n in found.refusals] == ["roof_critical_zone"]
    assert found.level_m == pytest.approx(1.9)
    assert (found.volume_m3, found.mass_kg, found.room_m3) == (None, None, None)
    low, high = found.bounds["volume_m3"]
    assert low == pytest.approx(AREA * 1.5, rel=1e-12)
    assert high == pytest.approx(AREA * 2.2 - 150_000.0 / 850.0, rel=1e-12)
    by_pressure = evaluate(ROOFED, single(850.0), Readings(p1_pa=1.4 * 9.81 * 848.8))
    assert [n.code for n in by_pressure.refusals] == ["roof_critical_zone"]


@pytest.mark.parametrize("level", [0.7, 1.5, 2.2, 6.0, 14.9])
def test_volume_and_mass_lead_back_to_the_level(level: float) -> None:
    for fluid in (single(850.0), stacked((1000.0, 0.4), (830.0, None))):
        known = evaluate(ROOFED, fluid, Readings(level_m=level))
        by_volume = evaluate(ROOFED, fluid, Readings(volume_m3=known.volume_m3))
        by_mass = evaluate(ROOFED, fluid, Readings(mass_kg=known.mass_kg))
        assert by_volume.level_m == pytest.approx(level, abs=1e-9)
        assert by_mass.level_m == pytest.approx(level, abs=1e-9)


def test_an_amount_inside_the_zone_is_refused() -> None:
    found = evaluate(ROOFED, single(850.0), Readings(volume_m3=AREA * 1.5 + 5.0))
    assert [n.code for n in found.refusals] == ["roof_critical_zone"]
    assert found.level_m is None


def test_a_table_that_allows_for_the_roof_gets_the_difference() -> None:
    """The table takes 150 t at 845 kg/m3 off between landing and floating."""
    taken = 150_000.0 / 845.0
    table = strapped(
        [0.0, 1.5, 2.2, 15.0],
        [0.0, AREA * 1.5, AREA * 2.2 - taken, AREA * 15.0 - taken],
    )
    roof = replace(ROOF, included_at_kg_m3=845.0)
    tank = upright(vessel=table, floating_roof=roof)
    at_table = evaluate(tank, single(845.0), Readings(level_m=10.0))
    assert at_table.volume_m3 == pytest.approx(AREA * 10.0 - taken, rel=1e-12)
    light = evaluate(tank, single(780.0), Readings(level_m=10.0))
    assert light.volume_m3 == pytest.approx(AREA * 10.0 - 150_000.0 / 780.0, rel=1e-12)
    assert light.mass_kg == pytest.approx(AREA * 10.0 * 780.0 - 150_000.0, rel=1e-12)
    landed = evaluate(tank, single(780.0), Readings(level_m=1.0))
    assert landed.volume_m3 == pytest.approx(AREA, rel=1e-12)


def test_rows_in_the_zone_are_refused_one_by_one() -> None:
    many = evaluate(ROOFED, single(850.0), Readings(level_m=np.array([1.0, 1.9, 5.0])))
    assert many.refused.tolist() == [False, True, False]
    assert np.isnan(many.volume_m3[1])
    assert many.volume_m3[2] == pytest.approx(AREA * 5.0 - 150_000.0 / 850.0, rel=1e-12)


def test_the_roof_s_mass_is_an_input_of_the_mass() -> None:
    budget = assess(ROOFED, single(850.0), Readings(p1_pa=80_000.0))
    (share,) = [s for s in budget.shares if s.name == "roof"]
    assert share.contributions["mass_kg"] == pytest.approx(-3000.0, rel=1e-9)
    assert share.contributions["volume_m3"] == pytest.approx(-3000.0 / 850.0, rel=1e-9)
    assert share.contributions["level_m"] == pytest.approx(0.0, abs=1e-12)
    resting = assess(ROOFED, single(850.0), Readings(level_m=1.0))
    assert "roof" not in {s.name for s in resting.shares}


@pytest.mark.parametrize(("level", "water"), [(10.0, 9.8), (2.3, 2.2), (2.4, 2.4)])
def test_a_roof_that_reaches_into_the_water_is_refused(level: float, water: float) -> None:
    read = Readings(level_m=level, water_level_m=water)
    found = evaluate(ROOFED, single(850.0), read)
    assert found.status == "refused"
    assert [n.code for n in found.refusals] == ["roof_in_water"]
    enough = evaluate(ROOFED, single(850.0), replace(read, level_m=water + 0.6))
    assert enough.status != "refused"
    assert enough.product_volume_m3 == pytest.approx(AREA * 0.6 - 150_000.0 / 850.0, rel=1e-9)


def test_nothing_in_the_tank_is_nothing() -> None:
    for read in (Readings(mass_kg=0.0), Readings(volume_m3=0.0)):
        assert evaluate(ROOFED, single(850.0), read).level_m == 0.0
