"""Whom to believe: every single fault that would reconcile readings that disagree."""

from __future__ import annotations

import time
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tanks import around, single, stacked, upright

from tankcalc.consistency import Disagreement, Explanation, explain, reading_uncertainties, words
from tankcalc.consistency.problem import Problem
from tankcalc.consistency.refits import refits
from tankcalc.consistency.slips import unit_ratios
from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.vapour import Vapour
from tankcalc.gauging import evaluate
from tankcalc.geometry import sphere
from tankcalc.instruments import (
    Accuracy,
    DifferentialTransmitter,
    FilledLeg,
    Side,
    Transmitter,
)
from tankcalc.readings import Readings
from tankcalc.tank import Tank

PSI = 6894.757293168
TRUE = Readings(p1_pa=97_295.631, p2_pa=80_642.175, p3_pa=1500.0, level_m=12.0, density_kg_m3=850.0)
LIQUID = single(850.0, vapour=Vapour(density_kg_m3=2.5))
OIL = Expansion(850.0, 288.15, 8.3e-4)


def fitted(**more: Any) -> Tank:
    """The tank of the three-transmitter check: taps at 0.5, 2.5 and 15 m; 30, 30 and 15 Pa."""
    taps = {
        tag: Transmitter(tag, z, "gauge", accuracy=Accuracy(fixed=u))
        for tag, z, u in (("p1", 0.5, 30.0), ("p2", 2.5, 30.0), ("p3", 15.0, 15.0))
    }
    return upright(transmitters=taps, **more)


def listed(found: Disagreement) -> list[tuple[str, str]]:
    return [(e.code, e.reading) for e in found.explanations]


def the(found: Disagreement, code: str, reading: str) -> Explanation:
    return next(e for e in found.explanations if (e.code, e.reading) == (code, reading))


# The check set of redundant readings: three transmitters, a dip of 3 mm and a sample of 1 kg/m3;
# p3 is dead. Figures by weighted least squares, coded apart and printed with one decimal.
CHECK = replace(TRUE, p3_pa=0.0)


def test_the_check_set_disagrees_by_its_chi_square() -> None:
    found = explain(fitted(), LIQUID, CHECK)
    assert found.disagrees
    assert found.freedom == 2
    assert found.chi_square == pytest.approx(223.7, abs=0.05)


def test_the_check_set_has_these_single_biases() -> None:
    problem = Problem.of(fitted(), LIQUID, CHECK)
    left = {r.name: r for r in refits(problem)}
    wanted = {"p3": 0.0, "level": 0.0, "density": 44.2, "p2": 155.3, "p1": 215.3}
    assert {n: r.chi_square for n, r in left.items()} == pytest.approx(wanted, abs=0.05)
    assert left["p3"].bias == pytest.approx(-1500.0, abs=0.01)
    assert left["level"].bias == pytest.approx(-0.1804, abs=5e-5)


def test_a_dead_p3_and_a_wrong_dip_cannot_be_told_apart_and_both_are_listed() -> None:
    found = explain(fitted(), LIQUID, CHECK)
    assert listed(found) == [("blanket_missing", "p3"), ("drift", "level")]
    assert found.alike == 2
    dead, dip = found.explanations
    assert dead.size == pytest.approx(1500.0, abs=0.01)
    assert dip.size == pytest.approx(-0.1804, abs=5e-5)
    assert "p3 shows exactly what a dead transmitter shows." in dead.hints
    assert dead.weight + dip.weight == pytest.approx(1.0)
    assert words(found) == [
        "The readings disagree: chi-square 223.7, where 7.4 is allowed with 2 to spare.",
        "p3 is dead: it shows nothing of a pressure of 1.500 kPa: then 12.000 m, 3204.425 t.",
        "The level reads 0.180 m low: then 12.180 m, 3252.603 t.",
    ]


def test_words_are_in_the_units_asked_for() -> None:
    lines = words(explain(fitted(), LIQUID, CHECK), "us")
    assert "The level reads 0 ft 7 1/8 in low" in lines[2]


def test_readings_that_agree_have_no_explanations() -> None:
    found = explain(fitted(), LIQUID, TRUE)
    assert not found.disagrees
    assert found.explanations == ()
    assert found.chi_square < 1e-3
    assert words(found)[0].startswith("The readings agree")


def test_every_explanation_gives_the_readings_that_an_answer_follows_from() -> None:
    for wrong in (CHECK, replace(TRUE, p1_pa=TRUE.p1_pa + 500.0)):  # type: ignore[operator]
        for e in explain(fitted(), LIQUID, wrong).explanations:
            answer = evaluate(fitted(), LIQUID, e.readings)
            assert answer.level_m == pytest.approx(e.level_m, abs=1e-6)
            assert answer.mass_kg == pytest.approx(e.mass_kg, rel=1e-7)


@pytest.mark.parametrize(
    ("wrong", "code", "reading", "size"),
    [
        ({"p1_pa": 97_295.631 + 800.0}, "drift", "p1", 800.0),
        ({"p2_pa": 80_642.175 - 800.0}, "drift", "p2", -800.0),
        ({"p3_pa": 900.0}, "drift", "p3", -600.0),
        ({"level_m": 12.1}, "drift", "level", 0.1),
        ({"density_kg_m3": 862.0}, "other_density", "density", 12.0),
        ({"level_m": 12.0 / 0.3048}, "unit", "level", 12.0 / 0.3048 - 12.0),
        ({"level_m": 12.0 * 0.3048}, "unit", "level", 12.0 * 0.3048 - 12.0),
        ({"p1_pa": 97_295.631 + 101_325.0 - 5.9}, "reference", "p1", 101_319.1),
        ({"level_m": 3.0}, "ullage_as_level", "level", -9.0),
    ],
)
def test_a_fault_is_found_with_its_size(
    wrong: dict[str, float], code: str, reading: str, size: float
) -> None:
    found = explain(fitted(), LIQUID, replace(TRUE, **wrong))
    assert (code, reading) in listed(found)[:2]
    explanation = the(found, code, reading)
    assert explanation.size == pytest.approx(size, rel=2e-3)
    assert explanation.level_m == pytest.approx(12.0, abs=2e-3)


def test_an_ullage_is_off_the_other_way() -> None:
    readings = replace(TRUE, level_m=None, ullage_m=3.1)
    found = explain(fitted(), LIQUID, readings)
    drift = the(found, "drift", "ullage")
    assert drift.size == pytest.approx(0.1, abs=1e-4)
    assert drift.readings.ullage_m == pytest.approx(3.0, abs=1e-4)
    typed_as_level = explain(fitted(), LIQUID, replace(readings, ullage_m=12.0))
    assert listed(typed_as_level)[0] == ("level_as_ullage", "ullage")


def test_a_unit_slip_says_the_units_that_were_typed_and_meant() -> None:
    # 14.11 psi, typed as 14.11 kPa.
    wrong = replace(TRUE, p1_pa=97_295.631 / PSI * 1000.0)
    for told in ({}, {"p1": "kPa"}):
        slip = explain(fitted(), LIQUID, wrong, typed_units=told).explanations[0]
        assert (slip.code, slip.typed_unit, slip.meant_unit) == ("unit", "kPa", "psi")
        assert slip.words() == "p1 was typed in kPa but is in psi"
        assert slip.readings.p1_pa == pytest.approx(97_295.631)


def test_a_signal_is_in_no_other_unit() -> None:
    wrong = replace(TRUE, p1_pa=97_295.631 / PSI * 1000.0)
    found = explain(fitted(), LIQUID, wrong, typed_units={"p1": "mA"})
    assert listed(found) == [("drift", "p1")]


def test_pairs_of_units_with_one_ratio_are_one_slip() -> None:
    ratios = unit_ratios("pressure")
    assert ratios["kPa", "bar"] == pytest.approx(100.0)
    assert sum(abs(r / 10.0 - 1.0) < 1e-6 for r in ratios.values()) == 1
    assert set(unit_ratios("pressure", "psi")) == {
        ("psi", other)
        for other in ("kPa", "bar", "mbar", "mH2O", "kgf/cm2", "inH2O@4degC", "mmH2O", "MPa", "Pa")
    }


def test_free_water_looks_like_a_low_tap_that_reads_high() -> None:
    wet = evaluate(fitted(), LIQUID, replace(TRUE, p1_pa=None, p2_pa=None, water_level_m=0.9))
    found = explain(fitted(), LIQUID, replace(TRUE, p1_pa=wet.p1_pa))
    assert set(listed(found)) == {("water_bottom", "water_level"), ("drift", "p1")}
    water = the(found, "water_bottom", "water_level")
    assert water.size == pytest.approx(0.9, abs=1e-3)
    assert water.mass_kg == pytest.approx(wet.mass_kg, rel=1e-6)
    assert water.words() == "0.900 m of free water on the bottom"
    assert water.hints == ("A water dip would settle it.",)


def test_the_top_of_known_water_may_be_wrong() -> None:
    fluid = stacked((1000.0, 0.7), (850.0, None))
    wet = evaluate(fitted(), fluid, Readings(level_m=12.0, p3_pa=1500.0, water_level_m=1.4))
    read = Readings(
        p1_pa=wet.p1_pa,
        p2_pa=wet.p2_pa,
        p3_pa=1500.0,
        level_m=12.0,
        density_kg_m3=850.0,
        water_level_m=0.7,
    )
    found = explain(fitted(), fluid, read)
    water = the(found, "water_level", "water_level")
    assert water.size == pytest.approx(0.7, abs=1e-3)
    assert water.words() == "the water's top is 0.700 m higher than taken"


def test_no_water_lies_under_a_heavier_product() -> None:
    lye = single(1500.0, vapour=Vapour(density_kg_m3=2.5))
    true = evaluate(fitted(), lye, Readings(level_m=12.0, p3_pa=1500.0))
    read = Readings(
        p1_pa=true.p1_pa - 900.0,  # type: ignore[operator]
        p2_pa=true.p2_pa,
        p3_pa=1500.0,
        level_m=12.0,
        density_kg_m3=1500.0,
    )
    assert listed(explain(fitted(), lye, read)) == [("drift", "p1")]


def legged() -> Tank:
    dp = DifferentialTransmitter(
        0.0,
        Side(1.0, 960.0, 298.15, 1.08e-3),
        Side(11.0, 960.0, 298.15, 1.08e-3),
        accuracy=Accuracy(fixed=40.0),
    )
    return replace(fitted(), dp=dp)


def test_warm_legs_look_like_a_transmitter_that_is_off() -> None:
    tank = legged()
    warm = evaluate(tank, LIQUID, Readings(level_m=9.0, p3_pa=1500.0, leg_temperature_k=318.15))
    read = Readings(
        p1_pa=warm.p1_pa,
        p2_pa=warm.p2_pa,
        p3_pa=1500.0,
        dp_pa=warm.dp_pa,
        level_m=9.0,
        density_kg_m3=850.0,
        leg_temperature_k=288.15,
    )
    found = explain(tank, LIQUID, read)
    assert set(listed(found)) == {("leg_temperature", "leg_temperature"), ("drift", "dp")}
    legs = the(found, "leg_temperature", "leg_temperature")
    assert legs.size == pytest.approx(30.0, abs=0.01)
    assert legs.readings.leg_temperature_k == pytest.approx(318.15, abs=0.01)
    assert legs.words() == "the legs are 30.00 K warmer than taken"


def test_legs_that_do_not_expand_explain_nothing() -> None:
    leg = FilledLeg(-1.0, 960.0)
    bare = {t: replace(x, leg=leg) for t, x in fitted().transmitters.items() if t == "p1"}
    tank = replace(fitted(), transmitters=dict(fitted().transmitters) | bare)
    true = evaluate(tank, LIQUID, Readings(level_m=12.0, p3_pa=1500.0))
    off = replace(TRUE, p1_pa=true.p1_pa - 900.0)  # type: ignore[operator]
    assert listed(explain(tank, LIQUID, off)) == [("drift", "p1")]


@pytest.mark.parametrize("code", ["sample_temperature", "sample_converted"])
def test_a_sample_may_be_at_another_temperature(code: str) -> None:
    fluid = single(OIL, vapour=Vapour(density_kg_m3=2.5))
    warm = 313.15
    rho, cold = (float(OIL.density(np.array(t))) for t in (warm, 288.15))
    state = Readings(level_m=12.0, p3_pa=1500.0, temperatures=((None, warm),))
    true = evaluate(fitted(), fluid, state)
    given_density = cold if code == "sample_temperature" else rho * rho / cold
    read = replace(state, p1_pa=true.p1_pa, p2_pa=true.p2_pa, density_kg_m3=given_density)
    found = explain(fitted(), fluid, read)
    assert listed(found)[:2] == [(code, "density"), ("other_density", "density")]
    sample = found.explanations[0]
    assert sample.at_k == pytest.approx(288.15)
    assert sample.readings.density_kg_m3 == pytest.approx(rho, abs=1e-6)
    assert "15.0 degC" in sample.words()


def test_a_density_that_needs_no_temperature_has_no_such_slip() -> None:
    found = explain(fitted(), LIQUID, replace(TRUE, density_kg_m3=862.0))
    assert not {code for code, _ in listed(found)} & {"sample_temperature", "sample_converted"}


def test_a_blanket_in_a_tank_taken_as_open_is_thought_of() -> None:
    taps = {t: x for t, x in fitted().transmitters.items() if t != "p3"}
    tank = upright(transmitters=taps)
    true = evaluate(tank, LIQUID, Readings(level_m=12.0))
    read = Readings(
        p1_pa=true.p1_pa + 1800.0,  # type: ignore[operator]
        p2_pa=true.p2_pa + 1800.0,  # type: ignore[operator]
        level_m=12.0,
        density_kg_m3=850.0,
    )
    found = explain(tank, LIQUID, read)
    assert set(listed(found)) == {("blanket_missing", ""), ("drift", "level")}
    blanket = the(found, "blanket_missing", "")
    assert blanket.size == pytest.approx(1800.0, abs=1.0)
    assert blanket.level_m == pytest.approx(12.0, abs=1e-3)


def test_an_unread_barometer_widens_a_slip_of_reference() -> None:
    # The weather is 1.5 kPa below the stated outside pressure; the correction is known no better.
    wrong = replace(TRUE, p1_pa=97_295.631 + 101_325.0 - 1500.0)
    slip = the(explain(fitted(), LIQUID, wrong), "reference", "p1")
    assert slip.size == pytest.approx(99_825.0, abs=50.0)
    read = replace(wrong, barometer_pa=101_325.0)
    assert ("reference", "p1") not in listed(explain(fitted(), LIQUID, read))


def test_gauge_pressure_typed_for_an_absolute_transmitter_is_found() -> None:
    taps = {
        tag: Transmitter(tag, z, "absolute", accuracy=Accuracy(fixed=40.0))
        for tag, z in (("p1", 0.2), ("p2", 3.0), ("p3", 12.0))
    }
    tank = upright(vessel=sphere(12.0), transmitters=taps)
    true = evaluate(tank, single(580.0), Readings(level_m=7.0, p3_pa=2.5e5))
    read = Readings(
        p1_pa=true.p1_pa,
        p2_pa=true.p2_pa - 101_325.0,  # type: ignore[operator]
        p3_pa=2.5e5,
        level_m=7.0,
        density_kg_m3=580.0,
        barometer_pa=101_325.0,
    )
    first = explain(tank, single(580.0), read).explanations[0]
    assert (first.code, first.reading) == ("reference", "p2")
    assert "p2 is gauge pressure, typed as absolute" in first.words()


def test_two_faults_have_no_single_explanation_and_that_is_said() -> None:
    wrong = replace(TRUE, p1_pa=97_295.631 + 900.0, p2_pa=80_642.175 - 900.0)
    found = explain(fitted(), LIQUID, wrong)
    assert found.disagrees
    assert found.explanations == ()
    assert "at least two are wrong" in found.remark


def test_a_volume_beside_the_pressures_is_checked_too() -> None:
    true = evaluate(fitted(), LIQUID, replace(TRUE, p1_pa=None, p2_pa=None))
    read = replace(TRUE, level_m=None, volume_m3=true.volume_m3)
    assert not explain(fitted(), LIQUID, read).disagrees
    wrong = replace(read, volume_m3=true.volume_m3 + 60.0)  # type: ignore[operator]
    drift = the(explain(fitted(), LIQUID, wrong), "drift", "volume")
    assert drift.size == pytest.approx(60.0, abs=0.1)


def test_without_readings_to_spare_nothing_can_be_checked_and_what_would_is_said() -> None:
    found = explain(fitted(), LIQUID, Readings(p1_pa=97_295.631, p3_pa=1500.0))
    assert (found.disagrees, found.freedom) == (False, 0)
    assert found.remark == (
        "No more was read than the answer needs: nothing can be checked. A dip with p2, a dip "
        "with the density of a sample or p2 with the density of a sample would allow it."
    )
    three = explain(fitted(), LIQUID, Readings(p1_pa=97_295.631, p3_pa=1500.0, level_m=12.0))
    assert three.remark.endswith("p2 or the density of a sample would allow it.")


def test_what_the_readings_do_not_settle_is_not_checked() -> None:
    found = explain(fitted(), LIQUID, Readings(p1_pa=97_295.631))
    assert not found.disagrees
    assert "do not settle" in found.remark
    assert "do not settle" in explain(fitted(), LIQUID, Readings()).remark


def test_a_reading_that_alone_tells_an_unknown_cannot_be_the_fault() -> None:
    # Without p3 nothing tells the pressure above the liquid: it takes up any fault of p3.
    read = Readings(p1_pa=97_295.631, p2_pa=80_642.175, p3_pa=1500.0, density_kg_m3=862.0)
    found = explain(fitted(), LIQUID, read)
    assert found.freedom == 1
    assert ("drift", "p3") not in listed(found)
    assert ("other_density", "density") in listed(found)


def test_one_pressure_above_a_full_tank_is_explained_by_its_slips() -> None:
    tank = upright()
    true = evaluate(tank, single(850.0), Readings(level_m=9.0)).p1_pa
    typed_as_psi = Readings(p1_pa=true / 1000.0 * PSI)  # type: ignore[operator]
    assert evaluate(tank, single(850.0), typed_as_psi).status == "refused"
    found = explain(tank, single(850.0), typed_as_psi, typed_units={"p1": "psi"})
    assert found.disagrees
    assert found.freedom == 0
    assert ("psi", "kPa") in [(e.typed_unit, e.meant_unit) for e in found.explanations]
    assert all(0.0 <= e.level_m <= 15.0 for e in found.explanations)
    near = explain(
        tank, single(850.0), typed_as_psi, typed_units={"p1": "psi"}, last_level_m=9.2
    ).explanations[0]
    assert (near.meant_unit, near.level_m) == ("kPa", pytest.approx(9.0))


def test_one_absolute_pressure_on_a_gauge_transmitter_is_explained_by_its_reference() -> None:
    true = evaluate(upright(), single(850.0), Readings(level_m=9.0)).p1_pa
    read = Readings(p1_pa=true + 101_325.0, barometer_pa=101_325.0)  # type: ignore[operator]
    first = explain(upright(), single(850.0), read, typed_units={"p1": "kPa"}).explanations[0]
    assert first.code == "reference"
    assert first.level_m == pytest.approx(9.0, abs=0.01)


def test_a_tank_that_may_be_empty_is_no_contradiction() -> None:
    found = explain(upright(), single(850.0), Readings(p1_pa=-20.0))
    assert not found.disagrees
    assert explain(upright(), single(850.0), Readings(p1_pa=-60_000.0)).disagrees


def test_a_density_that_no_such_liquid_has_is_a_contradiction() -> None:
    # p1 in the wrong unit leaves a level in the tank, under a liquid of 30 000 kg/m3.
    wrong = Readings(p1_pa=97_295.631 / 1000.0 * PSI, p2_pa=80_642.175, p3_pa=1500.0)
    found = explain(fitted(), LIQUID, wrong, typed_units={"p1": "psi"})
    assert found.disagrees
    assert found.explanations[0].words() == "p1 was typed in psi but is in kPa"


def test_a_full_tank_is_no_contradiction() -> None:
    tank = replace(fitted(), transmitters={"p1": fitted().transmitters["p1"]})
    true = evaluate(tank, LIQUID, Readings(level_m=15.0))
    read = Readings(p1_pa=true.p1_pa, level_m=15.0005, density_kg_m3=850.0)
    assert not explain(tank, LIQUID, read).disagrees


def test_what_leaves_a_little_too_much_is_listed_last_and_says_so() -> None:
    # p2 is off by 120 Pa besides: the true fault leaves more than is allowed with one to spare.
    wrong = replace(TRUE, p2_pa=80_642.175 + 120.0, level_m=12.2)
    found = explain(fitted(), LIQUID, wrong)
    drift = the(found, "drift", "level")
    assert 5.024 < drift.chi_square < 10.828
    assert "It leaves a little more disagreement than chance does." in drift.hints


def test_what_cannot_be_modelled_is_said_in_words() -> None:
    cold = replace(TRUE, temperatures=((None, 100.0),), density_kg_m3=None)
    assert (
        "outside what the expansion density covers" in explain(fitted(), single(OIL), cold).remark
    )


def test_arrays_are_refused() -> None:
    with pytest.raises(ValueError, match="one set of readings"):
        explain(fitted(), LIQUID, replace(TRUE, p1_pa=np.array([1.0, 2.0])))


def test_an_observed_density_stands_for_a_profile_that_does_not_cover_the_temperature() -> None:
    fluid = single(OIL, vapour=Vapour(density_kg_m3=2.5))
    hot = replace(CHECK, temperatures=((None, 450.0),))
    assert listed(explain(fitted(), fluid, hot))[0] == ("blanket_missing", "p3")


def test_a_pressure_beyond_the_relief_valves_speaks_against_p3() -> None:
    wrong = replace(TRUE, p3_pa=4500.0)
    assert listed(explain(fitted(), LIQUID, wrong))[0] == ("drift", "level")
    relieved = fitted(relief_pa=(-200.0, 2000.0))
    assert listed(explain(relieved, LIQUID, wrong))[0] == ("drift", "p3")


def test_uncertainties_are_told_by_the_name_of_the_reading() -> None:
    told = reading_uncertainties(fitted(), LIQUID, TRUE)
    assert told == pytest.approx(
        {"p1": 30.0, "p2": 30.0, "p3": 15.0, "level": 0.003, "density": 1.0}
    )


def test_the_whole_search_is_quick() -> None:
    tank, readings = legged(), replace(CHECK, level_m=9.0, dp_pa=-40_000.0)
    runs = []
    for _ in range(5):
        began = time.process_time()
        explain(tank, LIQUID, readings)
        runs.append(time.process_time() - began)
    # A tenth of a second on a quiet machine; a slow one is slow, not wrong.
    assert min(runs) < 0.5


@settings(max_examples=60)
@given(
    p1=st.one_of(st.none(), st.floats(-2e5, 2e6)),
    p2=st.one_of(st.none(), st.floats(-2e5, 2e6)),
    p3=st.one_of(st.none(), st.floats(-9e4, 5e4)),
    level=st.one_of(st.none(), st.floats(-1.0, 60.0)),
    density=st.one_of(st.none(), st.floats(50.0, 2000.0)),
)
def test_any_readings_are_explained_or_said_not_to_be(
    p1: float | None,
    p2: float | None,
    p3: float | None,
    level: float | None,
    density: float | None,
) -> None:
    read = Readings(p1_pa=p1, p2_pa=p2, p3_pa=p3, level_m=level, density_kg_m3=density)
    found = explain(fitted(surroundings=around()), LIQUID, read)
    assert not found.disagrees or found.explanations or found.remark
    assert words(found) or not found.freedom
    for e in found.explanations:
        assert np.all(np.isfinite([e.size, e.score, e.level_m, e.mass_kg, e.chi_square]))
        assert 0.0 <= e.level_m <= 15.0
        assert e.words()
