"""Plans: how much fits, when to call stop, what mixing and warming do."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import single, stacked, upright

from tankcalc.errors import InputError, NoAnswerError, RangeError
from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.fluid import Fluid
from tankcalc.fluids.water import Water
from tankcalc.gauging import evaluate
from tankcalc.geometry import sphere
from tankcalc.limits.mixing import Contents, after_adding, at_temperature, contents_of
from tankcalc.limits.planner import highest_for_growth, receivable, stop_call
from tankcalc.limits.plans import Question, plan_of
from tankcalc.readings import Readings
from tankcalc.tank import Tank

AREA_M2 = math.pi * 100.0
PER_HOUR = 1.0 / 3600.0
C = 273.15
OIL = Expansion(reference_kg_m3=845.0, at_k=15.0 + C, coefficient_per_k=8.3e-4)
WATER = Water()


def density(celsius: float) -> float:
    """Oil by hand."""
    return 845.0 / (1.0 + 8.3e-4 * (celsius - 15.0))


def contents(
    level_m: float = 5.0,
    celsius: float | None = 15.0,
    tank: Tank | None = None,
    fluid: Fluid | None = None,
    **more: float,
) -> Contents:
    tank, fluid = tank or upright(), fluid or single(OIL)
    temperatures = () if celsius is None else ((None, celsius + C),)
    readings = Readings(level_m=level_m, temperatures=temperatures, **more)
    return contents_of(tank, fluid, readings, evaluate(tank, fluid, readings))


def test_contents_are_those_of_the_answer() -> None:
    now = contents(5.0, 25.0)
    assert now.product_m3 == pytest.approx(5.0 * AREA_M2)
    assert now.density_kg_m3 == pytest.approx(density(25.0))
    assert (now.temperature_k, now.base_k) == (25.0 + C, 15.0 + C)
    assert now.base_kg_m3 == pytest.approx(845.0)
    assert (now.below_m3, now.shell) == (0.0, pytest.approx(1.0))


def test_a_density_that_was_observed_scales_the_curve() -> None:
    now = contents(5.0, 25.0, density_kg_m3=830.0)
    assert now.density(25.0 + C) == pytest.approx(830.0)
    assert now.density(45.0 + C) == pytest.approx(830.0 * density(45.0) / density(25.0))
    assert now.base_kg_m3 == pytest.approx(830.0 * 845.0 / density(25.0))


def test_adding_500_t_at_25_degrees_by_hand() -> None:
    now = contents(5.0, 15.0)
    after = after_adding(now, 500_000.0, 25.0 + C)
    held = 5.0 * AREA_M2 * 845.0
    mean = (held * 15.0 + 500_000.0 * 25.0) / (held + 500_000.0)
    volume = (held + 500_000.0) / density(mean)
    assert after.temperature_k == pytest.approx(mean + C)
    assert after.volume_m3 == pytest.approx(volume, rel=1e-12)
    assert after.level_m == pytest.approx(volume / AREA_M2, rel=1e-12)
    assert after.mass_kg == pytest.approx(held + 500_000.0, rel=1e-12)


def test_not_mixed_each_keeps_its_own_volume() -> None:
    # Water between 2 and 20 degC mixes to less than its parts: the curve bends.
    now = contents(5.0, 2.0, fluid=single(WATER))
    apart = after_adding(now, 1e6, 20.0 + C, mixed=False)
    mixed = after_adding(now, 1e6, 20.0 + C)
    cold, warm = (float(WATER.density(np.asarray(t + C))) for t in (2.0, 20.0))
    assert now.density_kg_m3 == pytest.approx(cold, rel=1e-9)
    assert apart.volume_m3 == pytest.approx(5.0 * AREA_M2 + 1e6 / warm, rel=1e-9)
    assert mixed.volume_m3 < apart.volume_m3
    assert mixed.mass_kg == apart.mass_kg


def test_a_delivery_leaves_the_temperature() -> None:
    after = after_adding(contents(5.0, 15.0), -100_000.0, 40.0 + C)
    assert after.temperature_k == 15.0 + C
    assert after.volume_m3 == pytest.approx(5.0 * AREA_M2 - 100_000.0 / 845.0)
    empty = after_adding(contents(5.0, 15.0), -contents(5.0, 15.0).product_kg)
    assert empty.level_m == pytest.approx(0.0, abs=1e-9)
    with pytest.raises(InputError, match="more is taken out"):
        after_adding(contents(5.0, 15.0), -2e6)


def test_an_empty_tank_takes_the_temperature_of_what_arrives() -> None:
    after = after_adding(contents(0.0, 15.0), 100_000.0, 40.0 + C)
    assert after.temperature_k == 40.0 + C
    assert after.volume_m3 == pytest.approx(100_000.0 / density(40.0))


def test_free_water_stays_as_it_is() -> None:
    fluid = stacked((1000.0, 0.5), (OIL, None))
    now = contents(5.0, 15.0, fluid=fluid)
    assert now.below_m3 == pytest.approx(0.5 * AREA_M2)
    assert now.below_kg == pytest.approx(0.5 * AREA_M2 * 1000.0)
    warm = at_temperature(now, 45.0 + C)
    grown = 4.5 * AREA_M2 * (1.0 + 8.3e-4 * 30.0)
    assert warm.volume_m3 == pytest.approx(0.5 * AREA_M2 + grown)


def test_what_does_not_fit_is_told_by_how_much() -> None:
    after = after_adding(contents(14.0, 15.0), 845.0 * 2.0 * AREA_M2)
    assert after.level_m is None
    assert after.over_m3 == pytest.approx(AREA_M2, rel=1e-9)


def test_growth_by_hand_and_back() -> None:
    now = contents(13.0, 15.0)
    warm = at_temperature(now, 45.0 + C)
    assert warm.level_m == pytest.approx(13.0 * (1.0 + 8.3e-4 * 30.0), rel=1e-12)
    assert warm.mass_kg == pytest.approx(now.product_kg, rel=1e-12)
    highest = highest_for_growth(now, 13.6, 45.0 + C)
    assert highest == pytest.approx(13.6 / (1.0 + 8.3e-4 * 30.0), rel=1e-12)


def test_liquefied_gas_is_never_liquid_full_at_the_design_temperature() -> None:
    # Liquid propane by a straight line, 2.9e-3 per kelvin, in a sphere of 12 m, from 15 to 50 degC.
    propane = single(Expansion(508.0, 15.0 + C, 2.9e-3))
    tank = upright(vessel=sphere(12.0))
    full = 4.0 / 3.0 * math.pi * 216.0
    now = contents(10.9, 15.0, tank=tank, fluid=propane)
    plan = plan_of(tank, now, Question("", 12.0, design_k=50.0 + C))
    assert plan.grown is not None
    assert plan.grown.level_m is None
    assert "liquid_full_at_design_temperature" in {n.code for n in plan.notices}
    assert plan.highest_m is not None
    allowed = math.pi * plan.highest_m**2 * (6.0 - plan.highest_m / 3.0)
    assert allowed == pytest.approx(full / (1.0 + 2.9e-3 * 35.0), rel=1e-9)
    below = contents(plan.highest_m - 0.01, 15.0, tank=tank, fluid=propane)
    assert at_temperature(below, 50.0 + C).level_m is not None


def test_cooling_makes_room_but_never_more_than_the_tank() -> None:
    now = contents(13.0, 45.0)
    assert highest_for_growth(now, 15.0, 15.0 + C) == pytest.approx(15.0)
    water = stacked((1000.0, 2.0), (OIL, None))
    assert highest_for_growth(contents(5.0, 15.0, fluid=water), 1.0, 45.0 + C) is None


def test_room_at_one_temperature_by_hand() -> None:
    fits = receivable(contents(5.0, 25.0), 13.6)
    assert fits.room_m3 == pytest.approx(8.6 * AREA_M2)
    assert fits.volume_m3 == pytest.approx(8.6 * AREA_M2)
    assert fits.mass_kg == pytest.approx(8.6 * AREA_M2 * density(25.0))
    assert fits.standard_m3 == pytest.approx(8.6 * AREA_M2 * density(25.0) / 845.0)


def test_above_the_limit_nothing_can_be_received() -> None:
    fits = receivable(contents(14.0, 15.0), 13.6)
    assert (fits.mass_kg, fits.volume_m3, fits.standard_m3) == (0.0, 0.0, 0.0)
    assert fits.room_m3 == pytest.approx(-0.4 * AREA_M2)


@given(
    level=st.floats(0.0, 12.0),
    target=st.floats(0.1, 15.0),
    own=st.floats(1.0, 40.0),
    other=st.floats(1.0, 40.0),
    mixed=st.booleans(),
    liquid=st.sampled_from([OIL, WATER]),
)
def test_what_can_be_received_fills_up_to_the_level(
    level: float, target: float, own: float, other: float, mixed: bool, liquid: Expansion | Water
) -> None:
    now = contents(level, own, fluid=single(liquid))
    fits = receivable(now, target, other + C, mixed=mixed)
    if target <= level:
        assert fits.mass_kg == 0.0
        return
    after = after_adding(now, fits.mass_kg, other + C, mixed=mixed)
    assert after.level_m == pytest.approx(target, abs=1e-9)


def test_a_fluid_without_temperature_neither_grows_nor_has_a_standard_volume() -> None:
    now = contents(5.0, None, fluid=single(850.0))
    fits = receivable(now, 13.6, 40.0 + C)
    assert fits.standard_m3 is None
    assert fits.mass_kg == pytest.approx(8.6 * AREA_M2 * 850.0)
    assert at_temperature(now, 60.0 + C).level_m == pytest.approx(5.0)
    tank = upright()
    plan = plan_of(tank, now, Question("", 13.6, design_k=60.0 + C))
    assert [n.code for n in plan.notices] == ["no_expansion"]


def test_an_unknown_temperature_is_asked_for() -> None:
    now = replace(contents(5.0, 15.0), temperature_k=None)
    for ask in (
        lambda: after_adding(now, 1000.0, 25.0 + C),
        lambda: at_temperature(now, 25.0 + C),
        lambda: highest_for_growth(now, 13.6, 25.0 + C),
    ):
        with pytest.raises(InputError, match="temperature of the product is not known"):
            ask()


def test_temperatures_beyond_the_model_are_refused() -> None:
    now = contents(5.0, 15.0, fluid=single(WATER))
    with pytest.raises(RangeError, match="outside what the water density covers"):
        at_temperature(now, 180.0 + C)


def test_there_is_no_plan_from_a_refused_answer() -> None:
    with pytest.raises(NoAnswerError):
        contents(16.0, 15.0)


def test_the_elements_in_the_liquid_are_averaged() -> None:
    tank, fluid = upright(), single(OIL)
    elements = ((1.0, 10.0 + C), (3.0, 14.0 + C), (12.0, 30.0 + C))
    readings = Readings(level_m=5.0, temperatures=elements)
    now = contents_of(tank, fluid, readings, evaluate(tank, fluid, readings))
    assert now.temperature_k == pytest.approx(12.0 + C)


def test_a_call_by_hand() -> None:
    # 600 m3/h for 90 s is 15 m3; 4 m3 drain back; 1 m3/h of uncertainty adds 0.05 m3.
    now = contents(5.0, 15.0)
    stop = stop_call(
        now,
        13.6,
        600.0 * PER_HOUR,
        closing_s=90.0,
        drain_back_m3=4.0,
        flow_uncertainty_m3_s=PER_HOUR,
    )
    assert stop.margin_m3 == pytest.approx(19.05)
    assert stop.call_m == pytest.approx(13.6 - 19.05 / AREA_M2)
    assert stop.arrival is not None
    assert stop.arrival.expected_s == pytest.approx((8.6 * AREA_M2 - 19.05) / (600.0 * PER_HOUR))
    assert stop.reaches_m == pytest.approx(5.0 + 19.05 / AREA_M2)
    assert not stop.too_late


def test_a_call_that_is_due_and_one_that_is_too_late() -> None:
    due = stop_call(contents(13.599, 15.0), 13.6, 600.0 * PER_HOUR, closing_s=1.0)
    assert due.arrival is not None
    assert not due.arrival.passed
    late = stop_call(contents(13.59, 15.0), 13.6, 600.0 * PER_HOUR, closing_s=90.0)
    assert late.arrival is not None
    assert (late.arrival.passed, late.too_late) == (True, True)
    assert late.reaches_m == pytest.approx(13.59 + 15.0 / AREA_M2)
    over = stop_call(contents(14.9, 15.0), 15.0, 600.0 * PER_HOUR, closing_s=3600.0)
    assert over.reaches_m is None
    plan = plan_of(
        upright(), contents(14.9, 15.0), Question("", 15.0, 0.0, 1.0, 0.0, 3600.0, 0.0, 60.0)
    )
    assert [n.message for n in plan.notices if n.code == "stop_too_late"] == [
        "Stop called now comes too late for this level: the surface comes to rest outside the tank."
    ]


def test_a_tank_too_small_for_its_line_has_no_level_to_call_at() -> None:
    stop = stop_call(contents(0.0, 15.0), 0.01, 0.1, closing_s=600.0)
    assert (stop.call_m, stop.arrival, stop.too_late) == (None, None, True)


def test_a_delivery_stops_above_its_level() -> None:
    stop = stop_call(contents(5.0, 15.0), 0.9, -300.0 * PER_HOUR, closing_s=60.0, drain_back_m3=4.0)
    assert stop.margin_m3 == pytest.approx(5.0)
    assert stop.call_m == pytest.approx(0.9 + 5.0 / AREA_M2)
    assert stop.reaches_m == pytest.approx(5.0 - 5.0 / AREA_M2)
    late = stop_call(contents(0.901, 15.0), 0.9, -300.0 * PER_HOUR, closing_s=60.0)
    assert late.too_late


@pytest.mark.parametrize(
    ("flow", "more"), [(0.0, {}), (1.0, {"closing_s": -1.0}), (1.0, {"drain_back_m3": -1.0})]
)
def test_a_call_that_cannot_be_is_refused(flow: float, more: dict[str, float]) -> None:
    with pytest.raises(InputError):
        stop_call(contents(5.0, 15.0), 13.6, flow, **more)


@given(
    level=st.floats(1.0, 11.0),
    target=st.floats(1.0, 11.0),
    flow=st.floats(-1.0, 1.0).filter(lambda q: abs(q) > 1e-3),
    closing=st.floats(0.0, 300.0),
    drain=st.floats(0.0, 10.0),
)
def test_called_at_its_level_the_surface_rests_at_the_target(
    level: float, target: float, flow: float, closing: float, drain: float
) -> None:
    tank = upright(vessel=sphere(12.0))
    stop = stop_call(
        contents(level, 15.0, tank=tank), target, flow, closing_s=closing, drain_back_m3=drain
    )
    if stop.call_m is None:
        return
    at_call = contents(stop.call_m, 15.0, tank=tank)
    again = stop_call(at_call, target, flow, closing_s=closing, drain_back_m3=drain)
    assert again.reaches_m == pytest.approx(target, abs=1e-7)


def test_a_plan_names_the_highest_limit_that_is_passed() -> None:
    tank = upright(limits_m={"minimum_working": 0.9, "maximum_working": 6.0, "high_high": 7.0})
    now = contents(5.0, 15.0, tank=tank)
    question = Question("maximum_working", 6.0, added_kg=845.0 * 3.0 * AREA_M2)
    codes = [n.code for n in plan_of(tank, now, question).notices]
    assert codes == ["above_high_high_after_adding"]
    out = replace(question, added_kg=-845.0 * 4.5 * AREA_M2)
    assert [n.code for n in plan_of(tank, now, out).notices] == [
        "below_minimum_working_after_adding"
    ]


def test_a_receipt_and_a_warm_day_together() -> None:
    tank = upright()
    now = contents(5.0, 15.0)
    both = Question("", 13.6, added_kg=845_000.0, arriving_k=25.0 + C, design_k=45.0 + C)
    plan = plan_of(tank, now, both)
    assert plan.grown is not None
    mass = 5.0 * AREA_M2 * 845.0 + 845_000.0
    assert plan.grown.volume_m3 == pytest.approx(mass / density(45.0))
    assert [n.code for n in plan.notices] == ["mixing_assumed"]
