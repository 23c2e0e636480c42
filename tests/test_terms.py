"""What each correction of an answer is worth."""

from __future__ import annotations

import pytest
from tanks import around, single, stacked, transmitters, upright

from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.vapour import Vapour
from tankcalc.instruments import DifferentialTransmitter, FilledLeg, Side, Transmitter
from tankcalc.readings import Readings
from tankcalc.report import terms_table
from tankcalc.tank import Tank
from tankcalc.terms import Term, terms


def by_name(found: tuple[Term, ...]) -> dict[str, Term]:
    return {term.name: term for term in found}


def blanketed() -> Tank:
    return upright(transmitters=transmitters(p1=0.5, p3=15.0))


FLUID = single(850.0, vapour=Vapour(density_kg_m3=2.5))
READ = Readings(p1_pa=97_295.631, p3_pa=1500.0)


def test_each_correction_of_the_example_by_hand() -> None:
    # dh = dp / (g (rho - rv)) for a pressure left out, -(z3 - h) rv / rho for the vapour's weight.
    found = by_name(terms(blanketed(), FLUID, READ))
    per_metre = 9.81 * 847.5
    assert found["pressure above the liquid"].level_m == pytest.approx(
        -1500.0 / per_metre, abs=2e-4
    )
    assert found["weight of the outside air"].level_m == pytest.approx(1.2 * 14.5 / 847.5, abs=1e-6)
    head = (850.0 * 11.5 + 2.5 * 3.0) / 850.0 - 11.5
    assert found["weight of the vapour above the liquid"].level_m == pytest.approx(-head, abs=1e-4)
    gravity = (97_295.631 - 1500.0) * (1.0 / 9.81 - 1.0 / 9.80665) / 847.5
    assert found["local gravity"].level_m == pytest.approx(gravity, abs=2e-5)
    for term in found.values():
        assert term.mass_kg / term.level_m == pytest.approx(314.159 * 850.0, rel=1e-3)


def test_terms_come_largest_first_and_leave_out_what_is_nothing() -> None:
    found = terms(blanketed(), FLUID, READ)
    sizes = [abs(term.mass_kg) for term in found]
    assert sizes == sorted(sizes, reverse=True)
    assert "temperature of the legs" not in by_name(found)


def test_legs_and_their_temperature_are_corrections_of_their_own() -> None:
    leg = FilledLeg(-2.0, 960.0, 298.15, 1.08e-3)
    tank = upright(transmitters={"p1": Transmitter("p1", 0.5, "gauge", leg=leg)})
    warm = Readings(p1_pa=110_000.0, leg_temperature_k=328.15)
    found = by_name(terms(tank, single(850.0), warm))
    fill = 960.0 / (1.0 + 1.08e-3 * 30.0)
    by_leg = found["legs between tap and sensor"].level_m
    assert by_leg == pytest.approx(-2.5 * (fill - 1.2) / 848.8, abs=5e-3)
    by_heat = found["temperature of the legs"].level_m
    assert by_heat == pytest.approx(2.5 * (960.0 - fill) / 848.8, abs=1e-6)


def test_the_fill_of_a_differential_is_the_largest_of_its_terms() -> None:
    side = {"fill_density_kg_m3": 960.0, "fill_density_at_k": 298.15, "fill_expansion_per_k": 1e-3}
    dp = DifferentialTransmitter(0.0, Side(1.0, **side), Side(11.0, **side))
    tank = upright(transmitters={}, dp=dp, surroundings=around(air_temperature_k=318.15))
    found = terms(tank, single(850.0), Readings(dp_pa=-60_000.0))
    # Without the fill a negative difference has no answer at all, so no figure is made of it.
    assert "fill of the differential's legs" not in by_name(found)
    assert "temperature of the legs" in by_name(found)


def test_water_and_temperature_are_corrections() -> None:
    oil = Expansion(845.0, 288.15, 8.3e-4)
    fluid = stacked((1000.0, 1.5), (oil, None))
    read = Readings(p1_pa=97_000.0, temperatures=((None, 308.15),))
    found = by_name(terms(upright(), fluid, read))
    assert found["the layers below the uppermost"].level_m < 0.0
    assert found["liquid temperature against 15 degC"].level_m > 0.1


def test_a_refused_answer_has_no_terms() -> None:
    assert terms(blanketed(), FLUID, Readings(p1_pa=9e6, p3_pa=0.0)) == ()


def test_the_table_says_what_leaving_a_correction_out_does() -> None:
    table = terms_table(terms(blanketed(), FLUID, READ), "metric")
    assert "pressure above the liquid" in table
    assert "0.180 m" in table
    assert max(len(line) for line in table.splitlines()) <= 80
