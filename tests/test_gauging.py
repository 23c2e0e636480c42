"""The one calculation: what readings say of a tank, and what they cannot."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import around, single, stacked, transmitters, upright

from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.samples import Samples
from tankcalc.fluids.vapour import Vapour
from tankcalc.gauging import evaluate
from tankcalc.geometry import EllipsoidalEnd, FlatEnd, sphere, strapped, vertical_cylinder
from tankcalc.instruments import (
    Accuracy,
    DifferentialTransmitter,
    DryLeg,
    FilledLeg,
    Purge,
    Side,
    Transmitter,
)
from tankcalc.readings import Readings
from tankcalc.result import JSON_KEYS, Result, as_json
from tankcalc.tank import Tank
from tankcalc.uncertainty import assess


def codes(result: Result) -> set[str]:
    return {notice.code for notice in result.warnings}


def blanketed(**changes: Any) -> Tank:
    """The tank of the three-transmitter check: taps at 0.5, 2.5 and 15 m."""
    return upright(transmitters=transmitters(p1=0.5, p2=2.5, p3=15.0), **changes)


HEAVY_VAPOUR = Vapour(density_kg_m3=2.5)


def test_three_transmitter_check_set() -> None:
    # Check figures by direct evaluation of the hydrostatic equation with vapour and air.
    fluid = single(850.0, vapour=HEAVY_VAPOUR)
    found = evaluate(blanketed(), fluid, Readings(p1_pa=97_295.631, p3_pa=1500.0))
    assert found.level_m == pytest.approx(12.0, abs=2e-6)
    assert found.p2_pa == pytest.approx(80_642.175, abs=2e-3)
    assert found.mass_kg == pytest.approx(3_204_424.5, rel=3e-7)
    assert found.mass_kg - 133_517.7 == pytest.approx(3_070_906.8, rel=3e-7)


def test_two_taps_measure_the_density() -> None:
    exact = {t: Transmitter(t, z, "gauge", accuracy=Accuracy(fixed=30.0))
             for t, z in (("p1", 0.5), ("p2", 2.5), ("p3", 15.0))}  # fmt: skip
    found = evaluate(
        upright(transmitters=exact),
        single(840.0, vapour=HEAVY_VAPOUR),
        Readings(p1_pa=97_295.631, p2_pa=80_642.175, p3_pa=1500.0),
    )
    assert found.density_kg_m3 == pytest.approx(850.0, abs=1e-4)
    assert found.level_m == pytest.approx(12.0, abs=2e-6)
    assert codes(found) == {"density_differs"}
    assert found.basis == (
        "p1, p2 and p3 fix the surface, the mean density and the pressure above the liquid"
    )


def test_a_dip_beside_the_pressure_measures_the_mean_density_and_the_mass() -> None:
    found = evaluate(
        blanketed(),
        single(845.0, vapour=HEAVY_VAPOUR),
        Readings(p1_pa=97_295.631, p3_pa=1500.0, level_m=12.0),
    )
    assert found.density_kg_m3 == pytest.approx(850.0, abs=1e-4)
    assert found.level_m == 12.0
    assert found.mass_kg == pytest.approx(3_204_424.5, rel=3e-7)


def test_water_between_the_taps_is_pointed_at_as_a_mixture() -> None:
    # 0.4 m of water and 1.6 m of product between the taps look like 880 kg/m3.
    fluid = stacked((1000.0, 0.9), (850.0, None))
    true = evaluate(blanketed(), fluid, Readings(level_m=12.0, water_level_m=0.9, p3_pa=0.0))
    read = Readings(p1_pa=true.p1_pa, p2_pa=true.p2_pa, p3_pa=0.0)
    found = evaluate(blanketed(), single(850.0), read)
    assert found.density_kg_m3 == pytest.approx(880.0, abs=0.5)
    assert "0.40 m of free water above p1" in found.warnings[0].message
    probed = evaluate(blanketed(), fluid, replace(read, water_level_m=0.9))
    assert probed.level_m == pytest.approx(12.0, abs=1e-6)
    assert probed.layers[1].density_kg_m3 == pytest.approx(850.0, abs=1e-3)


def test_an_uncovered_middle_tap_says_nothing_of_the_density() -> None:
    true = evaluate(blanketed(), single(850.0), Readings(level_m=2.0, p3_pa=0.0))
    read = Readings(p1_pa=true.p1_pa, p2_pa=true.p2_pa, p3_pa=0.0)
    found = evaluate(blanketed(), single(840.0), read)
    assert codes(found) == {"p2_uncovered"}
    assert found.mass_kg == pytest.approx(true.mass_kg, rel=0.005)


def test_a_dip_under_an_unread_blanket_tells_the_blanket() -> None:
    true = evaluate(blanketed(), single(850.0), Readings(level_m=9.0, p3_pa=1500.0))
    found = evaluate(blanketed(), single(850.0), Readings(level_m=9.0, p1_pa=true.p1_pa))
    assert found.p3_pa == pytest.approx(1500.0, abs=1e-6)
    assert "the pressure above the liquid" in found.basis


def test_an_unread_blanket_is_bounded_by_its_relief_valves() -> None:
    tank = blanketed(relief_pa=(-500.0, 2000.0))
    true = evaluate(tank, single(850.0), Readings(level_m=9.0, p3_pa=1500.0))
    found = evaluate(tank, single(850.0), Readings(p1_pa=true.p1_pa))
    assert found.status == "refused"
    low, high = found.bounds["level_m"]
    assert low < 9.0 < high
    assert high - low == pytest.approx(2500.0 / (9.81 * 848.8), rel=1e-3)


def test_more_readings_than_unknowns_are_weighted() -> None:
    true = evaluate(blanketed(), single(850.0), Readings(level_m=12.0, p3_pa=1500.0))
    read = Readings(
        level_m=12.002, p1_pa=true.p1_pa, p2_pa=true.p2_pa + 20.0, p3_pa=1500.0, density_kg_m3=850.0
    )
    found = evaluate(blanketed(), single(800.0), read)
    assert "weighted by their uncertainties (2 to spare)" in found.basis
    assert 12.0 < found.level_m < 12.002
    assert codes(found) == set()


def test_the_same_column_read_back_from_its_level() -> None:
    fluid = single(850.0, vapour=HEAVY_VAPOUR)
    found = evaluate(blanketed(), fluid, Readings(level_m=12.0, p3_pa=1500.0))
    assert found.p1_pa == pytest.approx(97_295.631, abs=1e-3)
    assert found.p2_pa == pytest.approx(80_642.175, abs=1e-3)
    assert found.p3_pa == pytest.approx(1500.0, abs=1e-9)


def test_an_open_tank_under_air_is_plain_hydrostatics() -> None:
    found = evaluate(upright(), single(850.0), Readings(p1_pa=9.81 * (850.0 - 1.2) * 11.5))
    assert found.level_m == pytest.approx(12.0, abs=1e-12)
    assert found.status == "good"
    assert found.volume_m3 == pytest.approx(3769.9112, abs=1e-4)


def test_heavy_vapour_in_an_open_tank_adds_to_the_tap() -> None:
    found = evaluate(upright(), single(850.0, vapour=HEAVY_VAPOUR), Readings(level_m=12.0))
    by_hand = 9.81 * (850.0 * 11.5 + 2.5 * 3.0) - 9.81 * 1.2 * 14.5
    assert found.p1_pa == pytest.approx(by_hand, abs=1e-9)


def test_absolute_and_gauge_transmitters_tell_the_same() -> None:
    fittings = {
        "p1": Transmitter("p1", 0.5, "absolute"),
        "p3": Transmitter("p3", 15.0, "gauge", vent_elevation_m=1.0),
    }
    tank = upright(transmitters=fittings)
    at_vent = 101_325.0 - 1.2 * 9.81 * 1.0
    p1 = at_vent + 1500.0 + 9.81 * (850.0 * 11.5 + 1.2 * 3.0)
    found = evaluate(tank, single(850.0), Readings(p1_pa=p1, p3_pa=1500.0))
    assert found.level_m == pytest.approx(12.0, abs=1e-9)


def test_the_barometer_moves_an_absolute_reading_of_an_open_tank() -> None:
    tank = upright(transmitters={"p1": Transmitter("p1", 0.5, "absolute")})
    p1 = 101_325.0 - 1.2 * 9.81 * 15.0 + 9.81 * (850.0 * 11.5 + 1.2 * 3.0)
    high = evaluate(tank, single(850.0), Readings(p1_pa=p1 - 3000.0, barometer_pa=98_325.0))
    assert high.level_m == pytest.approx(12.0, abs=1e-9)


def test_vapour_density_follows_pressure_and_temperature() -> None:
    # n-butane at 2.08 bar absolute and 20 degC with Z = 0.95: 5.22 kg/m3.
    tank = upright(
        vessel=sphere(12.0),
        transmitters={tag: Transmitter(tag, z, "absolute") for tag, z in (("p1", 0.2), ("p3", 12))},
        vapour=Vapour(molar_mass_kg_mol=0.058122, compressibility=0.95),
    )
    found = evaluate(
        tank, single(580.0), Readings(level_m=6.0, p3_pa=2.08e5, temperatures=((None, 293.15),))
    )
    assert found.vapour_mass_kg is not None
    assert found.vapour_mass_kg / (0.5 * 904.7787) == pytest.approx(5.22, abs=0.005)


def test_dp_with_two_equal_filled_legs_does_not_depend_on_the_sensor() -> None:
    # Taps at 1 and 11 m, fill 960: empty -94 176 Pa, full -10 791 Pa, by hand.
    for sensor in (0.0, 5.0):
        dp = DifferentialTransmitter(sensor, Side(1.0, 960.0), Side(11.0, 960.0))
        tank = upright(transmitters={}, dp=dp, surroundings=around(air_density_kg_m3=1e-9))
        full = evaluate(tank, single(850.0), Readings(dp_pa=-10_791.0))
        assert full.level_m == pytest.approx(11.0, abs=1e-9)
        part = evaluate(tank, single(850.0), Readings(dp_pa=-94_176.0 + 850.0 * 9.81 * 4.0))
        assert part.level_m == pytest.approx(5.0, abs=1e-9)


def test_a_warm_leg_shifts_the_reading_as_its_fill_thins() -> None:
    # 960 kg/m3 at 25 degC, 1.08e-3 per kelvin, 10 m of leg, 30 K warmer: +2955.5 Pa.
    legs = {
        "high": Side(1.0, 960.0, 298.15, 1.08e-3),
        "low": Side(11.0, 960.0, 298.15, 1.08e-3),
    }
    tank = upright(transmitters={}, dp=DifferentialTransmitter(0.0, **legs))
    cold = evaluate(tank, single(850.0), Readings(level_m=6.0, leg_temperature_k=298.15))
    warm = evaluate(tank, single(850.0), Readings(level_m=6.0, leg_temperature_k=328.15))
    assert warm.dp_pa - cold.dp_pa == pytest.approx(2955.5, abs=0.05)


@pytest.mark.parametrize(
    "leg",
    [
        FilledLeg(-2.0, 960.0, 298.15, 1.08e-3),
        DryLeg(8.0, gas_density_kg_m3=5.22),
        DryLeg(8.0, molar_mass_kg_mol=0.0581),
        Purge(15.5, molar_mass_kg_mol=0.0280134, friction_pa=35.0),
    ],
)
def test_every_leg_is_undone_by_its_own_column(leg: Any) -> None:
    tank = upright(transmitters={"p1": Transmitter("p1", 0.5, "gauge", leg=leg)})
    foretold = evaluate(tank, single(850.0), Readings(level_m=9.0))
    back = evaluate(tank, single(850.0), Readings(p1_pa=foretold.p1_pa))
    assert back.level_m == pytest.approx(9.0, abs=1e-9)


def test_a_purge_line_reads_less_by_its_gas_column() -> None:
    # Nitrogen at 200 kPa absolute and 293.15 K weighs 2.2986 kg/m3: 338.24 Pa over 15 m, and
    # 0.29 Pa more because it grows denser downwards (half of 338.24^2 / 200 000).
    tank = upright(
        transmitters={"p1": Transmitter("p1", 0.5, "absolute", leg=Purge(15.5, 0.0280134))},
        surroundings=around(air_temperature_k=293.15),
    )
    found = evaluate(tank, single(850.0), Readings(level_m=12.0))
    tip = 101_325.0 - 1.2 * 9.81 * 15.0 + 9.81 * (850.0 * 11.5 + 1.2 * 3.0)
    assert tip - found.p1_pa == pytest.approx(338.53 * found.p1_pa / 2e5, rel=2e-5)


def test_water_and_product_are_told_apart() -> None:
    fluid = stacked((1000.0, 0.5), (850.0, None))
    tank = upright(transmitters=transmitters(p1=0.1), surroundings=around(air_density_kg_m3=1e-9))
    found = evaluate(tank, fluid, Readings(p1_pa=99_816.75, water_level_m=0.5))
    assert found.level_m == pytest.approx(12.0, abs=1e-6)
    assert found.water_volume_m3 == pytest.approx(157.08, abs=0.005)
    assert found.product_volume_m3 == pytest.approx(3612.8, abs=0.05)
    assert found.product_mass_kg == pytest.approx(3612.83 * 850.0, rel=1e-5)


def test_a_water_dip_puts_water_under_a_single_liquid() -> None:
    found = evaluate(upright(), single(850.0), Readings(level_m=5.0, water_level_m=0.3))
    assert found.water_level_m == 0.3
    assert found.layers[0].density_kg_m3 == pytest.approx(999.1026, abs=1e-4)
    assert codes(found) == {"temperature_assumed"}


def test_water_above_the_surface_is_refused() -> None:
    found = evaluate(upright(), single(850.0), Readings(level_m=0.2, water_level_m=0.3))
    assert found.status == "refused"
    assert codes(found) == {"temperature_assumed", "water_above_surface"}


def test_observed_density_replaces_that_of_the_product() -> None:
    fluid = stacked((1000.0, 0.5), (850.0, None))
    found = evaluate(upright(), fluid, Readings(level_m=5.0, density_kg_m3=830.0))
    assert [layer.density_kg_m3 for layer in found.layers] == pytest.approx([1000.0, 830.0])


def test_level_below_the_tap_is_bounded_not_guessed() -> None:
    found = evaluate(upright(), single(850.0), Readings(p1_pa=-10.0))
    assert found.status == "refused"
    assert found.level_m is None
    assert codes(found) == {"below_tap"}
    assert "between 0 and 157.08 m3" in found.warnings[0].message


def test_a_pressure_above_a_full_tank_is_no_answer_and_says_what_full_and_empty_read() -> None:
    found = evaluate(upright(), single(850.0), Readings(p1_pa=420_000.0))
    assert found.status == "refused"
    message = found.warnings[0].message
    assert "p1 = 420.000 kPa is above what a full V-1 can show (120.738 kPa; empty 0.000" in message


def test_a_full_and_an_empty_tank_are_answers() -> None:
    tank, fluid = upright(transmitters=transmitters(p1=-0.1)), single(850.0)
    for level in (0.0, 15.0):
        foretold = evaluate(tank, fluid, Readings(level_m=level))
        assert evaluate(tank, fluid, Readings(p1_pa=foretold.p1_pa)).level_m == pytest.approx(
            level, abs=1e-9
        )


def test_a_fitted_but_unread_vapour_pressure_is_not_guessed() -> None:
    found = evaluate(blanketed(), single(850.0), Readings(p1_pa=97_000.0))
    assert found.status == "refused"
    assert codes(found) == {"p3_not_read"}
    assert "0.120 m of level" in found.warnings[0].message


def test_a_vapour_pressure_below_vacuum_is_refused() -> None:
    found = evaluate(blanketed(), single(850.0), Readings(level_m=3.0, p3_pa=-2e5))
    assert codes(found) == {"below_vacuum"}


def test_a_hopeless_pressure_under_a_read_blanket_is_above_the_top_not_unread() -> None:
    found = evaluate(blanketed(), single(850.0), Readings(p1_pa=9e5, p3_pa=1500.0))
    assert codes(found) == {"above_top"}


def test_two_taps_find_a_liquid_so_heavy_that_one_alone_would_overflow() -> None:
    true = evaluate(blanketed(), single(1000.0), Readings(level_m=14.5, p3_pa=1500.0))
    read = Readings(p1_pa=true.p1_pa, p3_pa=1500.0)
    assert codes(evaluate(blanketed(), single(800.0), read)) == {"above_top"}
    both = replace(read, p2_pa=true.p2_pa)
    assert evaluate(blanketed(), single(800.0), both).level_m == pytest.approx(14.5, abs=1e-6)


def test_p3_under_liquid_is_refused() -> None:
    tank = upright(transmitters=transmitters(p1=0.5, p3=10.0))
    found = evaluate(tank, single(850.0), Readings(p1_pa=100_000.0, p3_pa=1000.0))
    assert codes(found) == {"p3_covered"}
    assert found.status == "refused"
    assert found.bounds["level_m"] == (10.0, 15.0)


def test_nothing_that_fixes_the_surface_is_refused() -> None:
    found = evaluate(upright(), single(850.0), Readings(density_kg_m3=840.0))
    assert codes(found) == {"not_enough"}
    assert "the pressure of p1" in found.warnings[0].message


def test_a_reading_of_a_transmitter_that_is_not_fitted_is_refused() -> None:
    found = evaluate(upright(), single(850.0), Readings(p2_pa=1000.0))
    assert codes(found) == {"not_fitted"}


@pytest.mark.parametrize(
    ("readings", "code"),
    [
        (Readings(level_m=15.1), "level_outside"),
        (Readings(level_m=-0.1), "level_outside"),
        (Readings(ullage_m=16.0), "ullage_outside"),
        (Readings(volume_m3=5000.0), "volume_outside"),
        (Readings(mass_kg=-1.0), "mass_outside"),
        (Readings(mass_kg=1e9), "mass_outside"),
    ],
)
def test_what_the_tank_cannot_hold_is_refused(readings: Readings, code: str) -> None:
    found = evaluate(upright(), single(850.0), readings)
    assert codes(found) == {code}
    assert found.status == "refused"


def test_a_temperature_outside_the_model_is_refused_in_words() -> None:
    cold = Readings(level_m=5.0, temperatures=((None, 100.0),))
    found = evaluate(upright(), single(Expansion(845.0, 288.15, 8e-4)), cold)
    assert found.status == "refused"
    assert "outside what the expansion density covers" in found.warnings[0].message


def test_assumptions_are_said() -> None:
    tank = upright(surroundings=around(gravity_from="standard", air_from="assumed"))
    found = evaluate(tank, single(Expansion(845.0, 288.15, 8e-4)), Readings(level_m=5.0))
    assert codes(found) == {"gravity_standard", "air_assumed", "temperature_assumed"}
    assert found.status == "check"


def test_an_inverted_density_is_pointed_at() -> None:
    found = evaluate(upright(), stacked((850.0, 2.0), (900.0, None)), Readings(level_m=5.0))
    assert codes(found) == {"density_inverted"}
    calm = evaluate(upright(), stacked((850.0, 2.0), (900.0, None)), Readings(level_m=1.0))
    assert "density_inverted" not in codes(calm)


def test_readings_that_are_not_needed_are_compared_with_the_answer() -> None:
    fluid = single(850.0, vapour=HEAVY_VAPOUR)
    readings = Readings(p1_pa=97_295.631, p2_pa=80_642.0, p3_pa=1500.0, level_m=12.0)
    assert codes(evaluate(blanketed(), fluid, readings)) == set()
    readings = Readings(p1_pa=97_295.631, p2_pa=78_000.0, p3_pa=1500.0, level_m=12.0)
    assert "disagreement" in codes(evaluate(blanketed(), fluid, readings))
    readings = Readings(volume_m3=3000.0, p1_pa=97_295.631, p3_pa=1500.0)
    assert codes(evaluate(blanketed(), fluid, readings)) == {"disagreement"}


def test_limits_and_ranges_are_watched() -> None:
    tank = upright(
        limits_m={"minimum_working": 0.9, "maximum_working": 13.0, "high_high": 14.0},
        transmitters={"p1": Transmitter("p1", 0.5, "gauge", range_pa=(0.0, 100_000.0))},
    )
    assert codes(evaluate(tank, single(850.0), Readings(level_m=13.5))) == {"above_maximum_working"}
    assert codes(evaluate(tank, single(850.0), Readings(level_m=0.6))) == {"below_minimum_working"}
    high = evaluate(tank, single(850.0), Readings(p1_pa=115_000.0))
    assert codes(high) == {"above_high_high", "outside_range"}
    calm = evaluate(tank, single(850.0), Readings(level_m=5.0))
    assert calm.room_m3 == pytest.approx(100.0 * np.pi * 8.0)
    assert calm.pumpable_m3 == pytest.approx(100.0 * np.pi * 4.1)


def test_a_table_that_starts_above_zero_counts_what_is_below_it() -> None:
    tank = upright(vessel=strapped([0.5, 5.0], [7.9, 79.0]))
    found = evaluate(tank, single(1000.0), Readings(level_m=0.5))
    assert found.volume_m3 == pytest.approx(7.9)
    assert found.mass_kg == pytest.approx(7900.0)


SAMPLED = Samples((1.0, 5.0, 9.0), (860.0, 852.0, 846.0))


@pytest.mark.parametrize(
    "fluid", [single(850.0), single(SAMPLED), stacked((1000.0, 0.5), (SAMPLED, None))]
)
@pytest.mark.parametrize(
    "vessel", [vertical_cylinder([(15.0, 20.0)], FlatEnd(), FlatEnd()), sphere(15.0)]
)
def test_every_quantity_leads_back_to_the_same_answer(fluid: Any, vessel: Any) -> None:
    tank = upright(vessel=vessel)
    first = evaluate(tank, fluid, Readings(p1_pa=81_000.0))
    for name in ("level_m", "ullage_m", "volume_m3", "mass_kg", "p1_pa"):
        again = evaluate(tank, fluid, Readings(**{name: getattr(first, name)}))
        assert again.level_m == pytest.approx(first.level_m, abs=1e-9), name
        assert again.mass_kg == pytest.approx(first.mass_kg, rel=1e-10), name
        assert again.p1_pa == pytest.approx(81_000.0, rel=1e-10), name


def test_an_array_answers_as_its_readings_one_by_one() -> None:
    fluid = stacked((1000.0, 0.5), (SAMPLED, None))
    tank = upright(limits_m={"maximum_working": 8.0})
    pressures = np.array([[-5.0, 20_000.0, 60_000.0], [90_000.0, 110_000.0, 500_000.0]])
    many = evaluate(tank, fluid, Readings(p1_pa=pressures))
    assert many.refused is not None
    assert many.refused.tolist() == [[True, False, False], [False, False, True]]
    for place, pressure in np.ndenumerate(pressures):
        one = evaluate(tank, fluid, Readings(p1_pa=float(pressure)))
        for key in JSON_KEYS[4:]:
            figures, figure = getattr(many, key), getattr(one, key)
            if one.status == "refused":
                assert np.isnan(many.level_m[place])
            elif figure is None:
                assert figures is None
            else:
                assert figures[place] == pytest.approx(figure, rel=1e-12)
        applying = {n.code for n in many.warnings if n.where is None or n.where[place]}
        assert applying == codes(one)


@given(st.floats(-1e9, 1e9), st.floats(-1e6, 1e6))
def test_any_pressures_give_an_answer_or_a_refusal_never_a_hole(p1: float, p3: float) -> None:
    found = evaluate(blanketed(), single(SAMPLED), Readings(p1_pa=p1, p3_pa=p3))
    if found.status == "refused":
        assert found.level_m is None
        assert found.refusals
    else:
        assert 0.0 <= found.level_m <= 15.0
        assert np.isfinite(found.mass_kg)


def test_json_has_every_key_of_the_interface() -> None:
    data = as_json(evaluate(upright(), single(850.0), Readings(level_m=5.0)))
    assert set(JSON_KEYS) | {"expanded_uncertainty", "bounds", "warnings"} == set(data)
    assert data["level_m"] == 5.0
    assert data["ctl"] is None


def test_weather_is_level_where_a_vent_is_blocked() -> None:
    # 30 hPa of barometer are 360 mm at 850 kg/m3.
    tank = upright(transmitters={"p1": Transmitter("p1", 0.5, "absolute")})
    read = Readings(p1_pa=190_000.0)
    levels = [
        evaluate(tank, single(850.0), replace(read, barometer_pa=b)).level_m
        for b in (101_325.0, 104_325.0)
    ]
    assert levels[0] - levels[1] == pytest.approx(0.360, abs=5e-4)


def test_a_gauge_reading_taken_for_absolute_is_twelve_metres_of_gas_oil() -> None:
    tall = upright(vessel=vertical_cylinder([(40.0, 20.0)], FlatEnd(), FlatEnd()))
    gauge = evaluate(tall, single(845.0), Readings(p1_pa=80_000.0))
    slipped = evaluate(tall, single(845.0), Readings(p1_pa=80_000.0 + 101_325.0))
    assert slipped.level_m - gauge.level_m == pytest.approx(12.2, abs=0.05)


def test_vapour_of_propane_is_stock() -> None:
    # Propane at 8.36 bar absolute and 20 degC with Z = 0.84: 18.0 kg/m3.
    tank = upright(
        vessel=sphere(12.0),
        transmitters={"p3": Transmitter("p3", 12.0, "absolute")},
        vapour=Vapour(molar_mass_kg_mol=0.044096, compressibility=0.84),
    )
    found = evaluate(
        tank, single(500.0), Readings(level_m=6.0, p3_pa=8.36e5, temperatures=((None, 293.15),))
    )
    assert found.vapour_mass_kg / (0.5 * 904.7787) == pytest.approx(18.0, abs=0.05)


def test_a_sampled_column_gives_its_pressure_and_its_level() -> None:
    # 860, 852 and 846 kg/m3 at 1, 5 and 9 m: 79 421.76 Pa at 0.5 m under 10 m, by hand.
    tank = upright(surroundings=around(air_density_kg_m3=0.0))
    found = evaluate(tank, single(SAMPLED), Readings(p1_pa=79_421.76))
    assert found.level_m == pytest.approx(10.0, abs=2e-6)
    top_only = evaluate(tank, single(846.0), Readings(p1_pa=79_421.76))
    assert top_only.level_m == pytest.approx(10.0697, abs=5e-5)


def test_elements_in_the_vapour_do_not_count() -> None:
    oil = single(Expansion(845.0, 288.15, 8.3e-4))
    hung = Readings(p1_pa=60_000.0, temperatures=((1.0, 293.15), (4.0, 293.15), (12.0, 333.15)))
    found = evaluate(upright(), oil, hung)
    assert codes(found) == {"element_in_vapour"}
    plain = evaluate(upright(), oil, replace(hung, temperatures=((None, 293.15),)))
    assert found.level_m == pytest.approx(plain.level_m, abs=1e-9)


def test_a_failed_signal_makes_no_level_and_is_said() -> None:
    failed = Readings(signals=(("p1", "failed"),))
    found = evaluate(upright(), single(850.0), failed)
    assert found.status == "refused"
    assert codes(found) == {"signal_failed", "not_enough"}
    dipped = evaluate(upright(), single(850.0), replace(failed, level_m=5.0))
    assert dipped.level_m == 5.0
    assert codes(dipped) == {"signal_failed"}


def test_readings_that_mean_an_impossible_density_are_refused() -> None:
    slipped = Readings(level_m=12.0, p1_pa=14.0 * 97_295.631, p3_pa=1500.0)
    found = evaluate(blanketed(), single(850.0), slipped)
    assert found.status == "refused"
    assert "density_impossible" in codes(found)


def test_a_water_dip_never_takes_a_product_layer_away() -> None:
    fluid = stacked((1200.0, 2.0), (800.0, None))
    plain = evaluate(upright(), fluid, Readings(level_m=5.0))
    dry = evaluate(upright(), fluid, Readings(level_m=5.0, water_level_m=0.0))
    assert dry.mass_kg == pytest.approx(plain.mass_kg)
    wet = evaluate(upright(), fluid, Readings(level_m=5.0, water_level_m=0.1))
    assert [layer.name for layer in wet.layers] == ["free water", "layer 0", "layer 1"]


def test_dp_and_a_bottom_pressure_tell_the_pressure_between_them() -> None:
    dp = DifferentialTransmitter(0.0, Side(1.0, 960.0), Side(14.0, 960.0))
    tank = upright(dp=dp)
    true = evaluate(blanketed(dp=dp), single(850.0), Readings(level_m=9.0, p3_pa=20_000.0))
    alone = evaluate(tank, single(850.0), Readings(p1_pa=true.p1_pa))
    assert codes(alone) == {"p3_not_read"}
    both = evaluate(tank, single(850.0), Readings(p1_pa=true.p1_pa, dp_pa=true.dp_pa))
    assert both.level_m == pytest.approx(9.0, abs=1e-6)
    assert "the pressure above the liquid" in both.basis


def test_a_vapour_whose_density_follows_an_unread_pressure_is_not_guessed() -> None:
    dp = DifferentialTransmitter(0.0, Side(0.3), Side(11.9))
    tank = upright(
        vessel=sphere(12.0),
        transmitters=transmitters(p3=12.0),
        dp=dp,
        vapour=Vapour(molar_mass_kg_mol=0.0441, compressibility=0.86),
    )
    assert evaluate(tank, single(510.0), Readings(dp_pa=28_500.0)).status == "refused"
    read = evaluate(tank, single(510.0), Readings(dp_pa=28_500.0, p3_pa=7e5))
    assert read.status == "good" or codes(read) == {"temperature_assumed"}


def test_p3_under_liquid_is_said_and_its_head_allowed_for() -> None:
    tank = upright(transmitters=transmitters(p1=0.5, p3=6.5))
    found = evaluate(tank, single(850.0), Readings(level_m=6.7, p3_pa=10_000.0))
    assert codes(found) == {"p3_covered"}
    assert found.p3_pa == pytest.approx(10_000.0, abs=1e-6)
    assert found.p1_pa - found.p3_pa == pytest.approx(9.81 * (850.0 - 1.2) * 6.0, abs=1e-6)


def test_an_extended_density_is_used_where_it_still_is_one() -> None:
    steep = single(Samples((1.0, 2.0), (900.0, 700.0), "extend"))
    low = evaluate(upright(), steep, Readings(p1_pa=15_000.0))
    assert low.status == "good"
    assert codes(evaluate(upright(), steep, Readings(level_m=7.0))) == {"density_run_out"}
    assert codes(evaluate(upright(), steep, Readings(mass_kg=28_000.0))) == {"density_run_out"}


def test_a_gas_leg_of_unknown_temperature_costs_only_its_own_reading() -> None:
    leg = DryLeg(8.0, molar_mass_kg_mol=0.0581)
    taps = transmitters(p1=0.5) | {"p2": Transmitter("p2", 2.5, "gauge", leg=leg)}
    tank = upright(transmitters=taps, surroundings=around(air_temperature_k=None))
    found = evaluate(tank, single(850.0), Readings(level_m=5.0))
    assert found.p2_pa is None
    assert found.p1_pa == pytest.approx(9.81 * 848.8 * 4.5)
    assert codes(found) == {"leg_unknown"}


def test_a_mass_beside_a_level_is_compared() -> None:
    found = evaluate(upright(), single(850.0), Readings(level_m=8.0, mass_kg=1000.0))
    assert codes(found) == {"disagreement"}


def test_three_pressures_in_a_sphere_by_the_closed_formulas() -> None:
    # rho and h by the equations for uniform density, vents at their own instruments.
    tank = upright(vessel=sphere(12.0), transmitters=transmitters(p1=0.3, p2=2.3, p3=11.9))
    g, ra, rv, z1, z2, z3 = 9.81, 1.2, 2.5, 0.3, 2.3, 11.9
    p1, p2, p3 = 58_000.0, 48_200.0, 4_000.0
    rho = (p1 - p2) / (g * (z2 - z1)) + ra
    h = ((p1 - p3) / g + rho * z1 - rv * z3 + ra * (z3 - z1)) / (rho - rv)
    found = evaluate(
        tank, single(510.0, vapour=HEAVY_VAPOUR), Readings(p1_pa=p1, p2_pa=p2, p3_pa=p3)
    )
    volume = np.pi * h**2 * (18.0 - h) / 3.0
    assert found.level_m == pytest.approx(h, abs=1e-9)
    assert found.volume_m3 == pytest.approx(volume, rel=1e-9)
    assert found.mass_kg == pytest.approx(rho * volume, rel=1e-9)


def test_a_dip_in_a_dished_vessel_with_an_absolute_p1_and_a_gauge_p3() -> None:
    # Mean density by the difference of the two pressures in one frame; volume of the dish closed.
    vessel = vertical_cylinder([(6.0, 4.0)], EllipsoidalEnd(), FlatEnd())
    fittings = {
        "p1": Transmitter("p1", 0.2, "absolute"),
        "p3": Transmitter("p3", 6.0, "gauge", vent_elevation_m=1.0),
    }
    tank = upright(vessel=vessel, transmitters=fittings)
    g, ra, barometer, h = 9.81, 1.2, 100_200.0, 4.4
    p1, p3 = 142_000.0, 3_000.0
    above = p3 + barometer - ra * g * 1.0
    rho = ((p1 - above) / g - ra * (6.0 - h)) / (h - 0.2)
    read = Readings(p1_pa=p1, p3_pa=p3, level_m=h, barometer_pa=barometer)
    found = evaluate(tank, single(900.0), read)
    volume = 2.0 / 3.0 * np.pi * 4.0 * 1.0 + np.pi * 4.0 * h
    assert found.density_kg_m3 == pytest.approx(rho, rel=1e-9)
    assert found.mass_kg == pytest.approx(rho * volume, rel=1e-9)


def sharp(**elevations: float) -> dict[str, Transmitter]:
    """Gauge transmitters with a stated accuracy of 30 Pa."""
    return {
        tag: Transmitter(tag, z, "gauge", accuracy=Accuracy(fixed=30.0))
        for tag, z in elevations.items()
    }


@pytest.mark.parametrize("pascal", [-60.0, 0.0, 3.0, 60.0])
def test_a_bare_tap_and_one_just_covered_cannot_be_told_apart(pascal: float) -> None:
    found = evaluate(upright(transmitters=sharp(p1=0.5)), single(850.0), Readings(p1_pa=pascal))
    assert codes(found) == {"below_tap"}
    low, high = found.bounds["level_m"]
    assert (low, high) == (0.0, pytest.approx(0.5 + 90.0 / (9.81 * 850.0), abs=1e-6))


def test_a_surface_at_the_upper_tap_is_not_pinned_there() -> None:
    tank = upright(transmitters=sharp(p1=0.5, p2=3.5, p3=11.8))
    true = evaluate(tank, single(850.0), Readings(level_m=13.0, p3_pa=2000.0))
    read = Readings(p1_pa=true.p1_pa, p2_pa=true.p2_pa, p3_pa=true.p3_pa)
    found = evaluate(tank, single(850.0), read)
    assert found.status == "refused"
    low, high = found.bounds["level_m"]
    assert low < 11.8 < 13.0 < high


def test_an_impossible_density_is_the_only_thing_said_of_it() -> None:
    tank = upright(transmitters=sharp(p1=0.5, p2=3.5, p3=11.8))
    found = evaluate(tank, single(850.0), Readings(p1_pa=46_868.0, p2_pa=46_867.0, p3_pa=1025.0))
    assert codes(found) == {"density_impossible"}
    assert found.bounds == {}


def test_legs_of_unknown_temperature_are_said_and_uncertain() -> None:
    leg = FilledLeg(-2.0, 960.0, 298.15, 1.08e-3)
    fitted = {"p1": Transmitter("p1", 0.5, "gauge", accuracy=Accuracy(30.0), leg=leg)}
    unknown = upright(transmitters=fitted, surroundings=around(air_temperature_k=None))
    found = evaluate(unknown, single(850.0), Readings(p1_pa=90_000.0))
    assert codes(found) == {"leg_temperature_assumed"}
    wide = assess(unknown, single(850.0), Readings(p1_pa=90_000.0))
    narrow = assess(unknown, single(850.0), Readings(p1_pa=90_000.0, leg_temperature_k=298.15))
    assert wide is not None
    assert narrow is not None
    assert wide.standard["level_m"] > narrow.standard["level_m"]


def test_no_element_in_the_liquid_is_said() -> None:
    oil = single(Expansion(845.0, 288.15, 8.3e-4))
    hung = Readings(p1_pa=40_000.0, temperatures=((8.0, 308.15),))
    assert "no_element_in_liquid" in codes(evaluate(upright(), oil, hung))


def test_an_uncertain_signal_is_worth_less() -> None:
    p1 = Transmitter("p1", 0.5, "gauge", range_pa=(0.0, 1e5), accuracy=Accuracy(30.0))
    fitted = {"p1": p1}
    plain = assess(upright(transmitters=fitted), single(850.0), Readings(p1_pa=98_000.0))
    doubted = Readings(p1_pa=98_000.0, signals=(("p1", "uncertain"),))
    wide = assess(upright(transmitters=fitted), single(850.0), doubted)
    assert plain is not None
    assert wide is not None
    assert wide.standard["level_m"] > 10.0 * plain.standard["level_m"]


def test_a_given_mass_is_as_good_as_given_and_its_level_is_not() -> None:
    budget = assess(upright(), single(850.0), Readings(mass_kg=400_000.0))
    assert budget is not None
    assert budget.standard["mass_kg"] == pytest.approx(0.0, abs=1e-6)
    assert budget.standard["level_m"] > 0.001
    by_volume = assess(upright(), single(850.0), Readings(volume_m3=400.0))
    assert by_volume is not None
    assert by_volume.standard["volume_m3"] == pytest.approx(0.0, abs=1e-9)
