"""The balance: what cancels between opening and closing, what scales, and what it is worth."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import around, single, upright

from tankcalc.balance.account import Account, Movement, State, account, together, verdict
from tankcalc.balance.effects import MASS, STANDARD, Effect, combined, net, split
from tankcalc.balance.states import state_as_stated, state_of
from tankcalc.balance.transfers import Side, Transfer, compare, over_many
from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.vapour import Vapour
from tankcalc.gauging import evaluate
from tankcalc.geometry import sphere
from tankcalc.instruments import Accuracy, Transmitter
from tankcalc.readings import Readings
from tankcalc.result import as_json
from tankcalc.tank import TableCertificate, Tank
from tankcalc.uncertainty import assess

RHO, G, AREA = 850.0, 9.81, math.pi * 100.0


def example(**accuracy: float) -> Tank:
    """The tank of the published checks with one transmitter of this accuracy."""
    stated: dict[str, Any] = {"fixed": 30.0} | accuracy
    taps = {"p1": Transmitter("p1", 0.5, "gauge", accuracy=Accuracy(**stated))}
    return upright(
        name="H1",
        transmitters=taps,
        surroundings=around(gravity_uncertainty_m_s2=9.81e-5, air_uncertainty_kg_m3=0.05),
        table=TableCertificate(uncertainty=0.001),
    )


def weightless(rho: float = RHO) -> Fluid:
    """A liquid under nothing: a pascal is A/g of it, as in the published check."""
    layer = Layer("liquid", single(rho).layers[0].model, None, 1.0)
    return Fluid("liquid", (layer,), Vapour(density_kg_m3=0.0))


def state(tank: Tank, fluid: Fluid, level: float, origins: dict[str, str] | None = None) -> State:
    """The state of a tank filled to a level, read by its p1."""
    p1 = evaluate(tank, fluid, Readings(level_m=level)).p1_pa
    readings = Readings(p1_pa=p1)
    budget = assess(tank, fluid, readings)
    assert budget is not None
    figures = as_json(evaluate(tank, fluid, readings))
    if figures[STANDARD] is None:
        figures[STANDARD] = 0.98 * figures["volume_m3"]
    return state_of(tank, readings, budget, figures, 0, origins)


def emptied(**accuracy: float) -> Account:
    tank, fluid = example(**accuracy), weightless()
    found = account(MASS, state(tank, fluid, 12.0), state(tank, fluid, 4.0), [])
    assert found is not None
    return found


def test_the_published_check_of_a_delivery_with_its_covariances() -> None:
    # method: 12 m to 4 m; 10 Pa random each, 30 Pa zero, 0.02 % gain, 0.1 % area. The fixed 30 Pa
    # are split 10 Pa random and the rest zero, which cancels.
    u = emptied(of_reading=0.0002).uncertainties
    assert emptied().difference == pytest.approx(-AREA * RHO * 8.0, rel=1e-9)
    assert u["p1 random"] == pytest.approx(452.9, abs=0.05)
    assert u["p1 gain"] == pytest.approx(427.3, abs=0.05)
    assert u["geometry"] == pytest.approx(2136.3, abs=0.05)
    assert u["p1 zero"] == pytest.approx(0.0, abs=1e-3)
    assert u["p1 elevation"] == pytest.approx(0.0, abs=1e-3)
    assert u["outside air"] == pytest.approx(0.0, abs=1e-3)
    assert combined({k: u[k] for k in ("p1 random", "p1 gain", "geometry")}) == pytest.approx(
        2225.2, abs=0.05
    )
    # What is beside them is gravity, which scales with the difference: 1e-5 of it.
    assert u["gravity"] == pytest.approx(21.4, abs=0.3)


def test_a_zero_error_taken_as_independent_would_add_what_is_published() -> None:
    zero = Effect("p1 zero", "p1", {MASS: 30.0 * AREA / G})
    own = [split(zero, 0.0, "")[0] for _ in range(2)]
    terms = [(1.0, [own[0]]), (-1.0, [own[1]])]
    assert combined(net(terms, MASS)) == pytest.approx(1358.7, abs=0.05)
    assert combined(net([(1.0, [zero]), (-1.0, [zero])], MASS)) == 0.0


def test_a_transmitter_that_was_changed_in_between_does_not_cancel() -> None:
    tank, fluid = example(), weightless()
    opening = state(tank, fluid, 12.0, {"p1": "old"})
    closing = state(tank, fluid, 4.0, {"p1": "new"})
    found = account(MASS, opening, closing, [])
    assert found is not None
    zero = 30.0 * math.sqrt(8.0) / 3.0 * AREA / G * math.sqrt(2.0)
    assert found.uncertainties["p1 zero"] == pytest.approx(zero, rel=1e-6)
    assert found.uncertainties["p1 elevation"] == pytest.approx(
        0.003 * (RHO - 1.2) * AREA * math.sqrt(2.0), rel=1e-3
    )


def test_another_product_or_another_table_does_not_cancel() -> None:
    tank, fluid = example(), weightless()
    same = account(MASS, state(tank, fluid, 8.0), state(tank, fluid, 8.0), [])
    other = account(
        MASS,
        state(tank, fluid, 8.0, {"fluid": "a", "geometry": "a"}),
        state(tank, fluid, 8.0, {"fluid": "b", "geometry": "b"}),
        [],
    )
    assert same is not None
    assert other is not None
    assert same.uncertainties["density"] == pytest.approx(0.0, abs=1e-6)
    assert same.uncertainties["geometry"] == pytest.approx(0.0, abs=1e-6)
    # Half a metre of heel below the tap is what the density bears on.
    heel = AREA * 0.5 * 1.0 * math.sqrt(2.0)
    assert other.uncertainties["density"] == pytest.approx(heel, rel=0.01)
    whole = 0.001 * AREA * 8.0 * RHO * math.sqrt(2.0)
    assert other.uncertainties["geometry"] == pytest.approx(whole, rel=1e-6)


def test_the_vapour_cancels_only_in_part() -> None:
    tank = example()
    fluid = replace(weightless(), vapour=Vapour(density_kg_m3=2.5, uncertainty_kg_m3=0.5))
    found = account(MASS, state(tank, fluid, 12.0), state(tank, fluid, 4.0), [])
    alone = account(MASS, state(tank, fluid, 4.0), state(tank, fluid, 4.0), [])
    assert found is not None
    assert alone is not None
    # 0.5 kg/m3 of error in 8 m more of vapour; the same height of it cancels.
    assert found.uncertainties["vapour density"] == pytest.approx(0.5 * 8.0 * AREA, rel=0.01)
    assert alone.uncertainties["vapour density"] == pytest.approx(0.0, abs=1e-6)


@given(st.floats(0.6, 14.5), st.floats(0.6, 14.5))
def test_what_scales_is_in_proportion_to_the_difference(first: float, second: float) -> None:
    tank, fluid = example(of_reading=0.0002), weightless()
    found = account(MASS, state(tank, fluid, first), state(tank, fluid, second), [])
    assert found is not None
    moved = abs(found.difference)
    u = found.uncertainties
    assert u["geometry"] == pytest.approx(0.001 * moved, rel=1e-4, abs=1e-3)
    assert u["p1 gain"] == pytest.approx(0.0002 * moved, rel=1e-4, abs=1e-3)
    assert u["p1 random"] == pytest.approx(452.9, abs=0.1)
    assert u["p1 zero"] == pytest.approx(0.0, abs=1e-2)


@given(st.floats(1.0, 13.0), st.floats(5.0, 200.0), st.floats(0.0, 1e-3), st.floats(0.0, 1e-3))
def test_the_parts_of_a_transmitter_are_the_whole_of_it(
    level: float, fixed: float, of_reading: float, of_span: float
) -> None:
    tank = example(fixed=fixed, of_reading=of_reading, of_span=of_span, drift=3.0)
    tap = replace(tank.transmitters["p1"], range_pa=(0.0, 160e3))
    tank, fluid = replace(tank, transmitters={"p1": tap}), weightless()
    p1 = evaluate(tank, fluid, Readings(level_m=level)).p1_pa
    budget = assess(tank, fluid, Readings(p1_pa=p1))
    assert budget is not None
    share = next(s for s in budget.shares if s.name == "p1")
    parts = [e for e in state(tank, fluid, level).effects if e.name.startswith("p1 ")]
    parts = [e for e in parts if e.name != "p1 elevation"]
    assert math.hypot(*(e.amounts[MASS] for e in parts)) == pytest.approx(
        abs(share.contributions[MASS]), rel=1e-9
    )


@given(
    st.lists(st.tuples(st.floats(-1e3, 1e3), st.floats(-1e3, 1e3)), min_size=1, max_size=6),
    st.floats(0.0, 1.0),
)
def test_a_partly_shared_effect_has_the_covariance_of_its_share(
    pulls: list[tuple[float, float]], shared: float
) -> None:
    terms: list[tuple[float, Any]] = []
    expected = 0.0
    for k, (one, two) in enumerate(pulls):
        effects = [Effect(f"cause {k}", "", {MASS: pull}) for pull in (one, two)]
        terms += [
            (1.0, split(effects[1], shared, f"origin {k}")),
            (-1.0, split(effects[0], shared, f"origin {k}")),
        ]
        expected += one**2 + two**2 - 2.0 * shared * one * two
    assert combined(net(terms, MASS)) ** 2 == pytest.approx(expected, rel=1e-9, abs=1e-6)


def test_a_monte_carlo_of_the_shared_inputs_gives_the_same_uncertainty() -> None:
    # Both states are solved again with one draw of what they share: an independent way to u.
    tank, fluid = example(of_reading=0.0002), weightless()
    rng = np.random.default_rng(6)
    true = {level: evaluate(tank, fluid, Readings(level_m=level)).p1_pa for level in (12.0, 4.0)}
    zero = 30.0 * math.sqrt(8.0) / 3.0
    found = []
    for _ in range(400):
        shared = rng.standard_normal(6)
        g = G + 9.81e-5 * shared[0]
        air = 1.2 + 0.05 * shared[1]
        tap = replace(tank.transmitters["p1"], elevation_m=0.5 + 0.003 * shared[2])
        moved = replace(
            tank,
            transmitters={"p1": tap},
            surroundings=replace(tank.surroundings, gravity_m_s2=g, air_density_kg_m3=air),
        )
        masses = []
        for level in (12.0, 4.0):
            p1 = float(true[level] or 0.0)
            p1 += zero * shared[3] + 0.0002 * p1 * shared[4] + 10.0 * rng.standard_normal()
            read = evaluate(moved, fluid, Readings(p1_pa=p1)).mass_kg
            masses.append(float(read or 0.0) * (1.0 + 0.001 * shared[5]))
        found.append(masses[1] - masses[0])
    # 400 draws know a standard deviation to 3.5 %.
    u = emptied(of_reading=0.0002).standard_uncertainty
    assert float(np.std(found, ddof=1)) == pytest.approx(u, rel=0.11)


def test_a_book_worked_by_hand() -> None:
    opening = State(0, {MASS: 1000.0, STANDARD: 1.2}, (Effect("u", "", {MASS: 3.0}),))
    closing = State(1, {MASS: 1285.0, STANDARD: 1.55}, (Effect("u", "", {MASS: 4.0}),))
    movements = [
        Movement(
            1, "received", {MASS: 500.0, STANDARD: 0.6}, (Effect("meters", "", {MASS: 12.0}),)
        ),
        Movement(1, "delivered", {MASS: -150.0, STANDARD: -0.2}),
        Movement(1, "transfer out", {MASS: -40.0, STANDARD: -0.05}),
        Movement(1, "water drawn", {MASS: -10.0, STANDARD: -0.01}),
    ]
    found = account(MASS, opening, closing, movements)
    assert found is not None
    # 1000 + 500 - 150 - 40 - 10 = 1300; 1285 - 1300 = -15; u = sqrt(9 + 16 + 144) = 13.
    assert found.book == 1300.0
    assert found.difference == -15.0
    assert found.standard_uncertainty == pytest.approx(13.0)
    assert found.significance == pytest.approx(-15.0 / 26.0)
    assert found.throughput == 700.0
    assert found.of_throughput == pytest.approx(-15.0 / 700.0)
    # Standard volume is the product's: 1.2 + 0.6 - 0.2 - 0.05 = 1.55, the water does not count.
    standard = account(STANDARD, opening, closing, movements)
    assert standard is not None
    assert standard.difference == pytest.approx(0.0, abs=1e-12)
    assert standard.significance is None


def test_there_is_no_balance_where_an_amount_is_unknown() -> None:
    known, unknown = State(0, {MASS: 1.0, STANDARD: None}), State(1, {MASS: 1.0, STANDARD: None})
    assert account(STANDARD, known, unknown, []) is None
    assert account(MASS, known, unknown, [Movement(1, "received", {MASS: None})]) is None
    assert account(MASS, known, unknown, []) is not None
    assert together(MASS, []) is None


def test_tanks_as_one_share_gravity_and_cancel_their_transfers() -> None:
    def pair(name: str, before: float, after: float) -> tuple[State, State]:
        made = [
            State(k, {MASS: mass}, (Effect("gravity", "site", {MASS: 0.01 * mass}),))
            for k, mass in enumerate((before, after))
        ]
        return made[0], made[1]

    out = Movement(1, "transfer out", {MASS: -100.0}, (Effect("meters", "t", {MASS: -1.0}),))
    into = Movement(1, "transfer in", {MASS: 100.0}, (Effect("meters", "t", {MASS: 1.0}),))
    first, second = pair("A", 500.0, 400.0), pair("B", 200.0, 298.0)
    total = together(MASS, [(*first, [out]), (*second, [into])])
    assert total is not None
    assert total.difference == pytest.approx(-2.0)
    assert total.throughput == 0.0
    assert total.of_throughput is None
    # Gravity: 1 % of the 2 kg that are missing, not of the 100 kg that moved; the meter cancels.
    assert total.uncertainties["gravity"] == pytest.approx(0.02)
    assert total.uncertainties["meters"] == pytest.approx(0.0, abs=1e-12)


def test_words_of_a_difference_name_no_cause() -> None:
    assert verdict(-2.34) == "unexplained loss, significance 2.3"
    assert verdict(1.0) == "not significant"
    assert verdict(-1.001) == "unexplained loss, significance 1.1"
    assert verdict(None) == "of unknown significance"


def test_a_temperature_counts_for_standard_volume_and_hardly_for_mass() -> None:
    # A level gauge: mass goes with the density at the temperature, standard volume as well; a
    # pressure: mass and standard volume both hardly.
    from tankcalc.fluids.expansion import Expansion

    fluid = single(Expansion(RHO, 288.15, 8e-4))
    warm = ((None, 298.15),)
    for readings, expected in ((Readings(level_m=8.0), 1.0), (Readings(p1_pa=65e3), 0.1)):
        tank = upright(level_gauge=Accuracy(fixed=0.003))
        readings = replace(readings, temperatures=warm)
        budget = assess(tank, fluid, readings)
        assert budget is not None
        figures = as_json(evaluate(tank, fluid, readings))
        volume = figures["volume_m3"]
        figures[STANDARD] = volume * figures["mass_kg"] / volume / RHO
        effects = [
            e
            for e in state_of(tank, readings, budget, figures, 0).effects
            if e.name == "temperature"
        ]
        relative = math.hypot(*(e.amounts[STANDARD] for e in effects)) / figures[STANDARD]
        in_mass = math.hypot(*(e.amounts[MASS] for e in effects)) / figures["mass_kg"]
        # 0.5 K of 8e-4 per kelvin.
        assert relative == pytest.approx(in_mass, rel=1e-5)
        assert relative < 4.0e-4 * expected * 1.01


def test_a_wrong_reference_density_leaves_the_standard_volume_of_a_dip_alone() -> None:
    tank, fluid = upright(level_gauge=Accuracy(fixed=0.003)), single(RHO)
    readings = Readings(level_m=8.0)
    budget = assess(tank, fluid, readings)
    assert budget is not None
    figures = as_json(evaluate(tank, fluid, readings)) | {STANDARD: 2400.0}
    effects = {e.name: e for e in state_of(tank, readings, budget, figures, 0).effects}
    assert effects["density"].amounts[STANDARD] == pytest.approx(0.0, abs=1e-9)
    assert effects["density"].amounts[MASS] > 1000.0


def test_a_reading_without_a_budget_keeps_its_stated_uncertainty_as_random() -> None:
    figures = {MASS: 500.0, STANDARD: None, "expanded_uncertainty": {MASS: 8.0}}
    one = state_as_stated(figures, 5)
    assert [(e.origin, e.amounts[MASS]) for e in one.effects] == [("", 4.0)]
    assert state_as_stated({MASS: 500.0}, 5).effects == ()


def side(tank: Tank, name: str, before: float, after: float) -> Side:
    fluid = weightless()
    other = {"p1": name, "geometry": name, "fluid": "oil"}
    return Side(name, state(tank, fluid, before, other), state(tank, fluid, after, other))


def test_a_transfer_is_held_against_the_other_tank() -> None:
    tank = example()
    found = compare(MASS, side(tank, "A", 12.0, 8.0), side(tank, "B", 2.0, 5.99))
    assert found is not None
    assert found.out == pytest.approx(4.0 * AREA * RHO, rel=1e-9)
    assert found.difference == pytest.approx(-0.01 * AREA * RHO, rel=1e-6)
    # Two tables of 0.1 % and four readings of 10 Pa; gravity is one and the same and cancels.
    expected = math.hypot(0.001 * found.out, 0.001 * found.into, math.sqrt(4.0) * 10.0 * AREA / G)
    assert found.standard_uncertainty == pytest.approx(expected, rel=1e-3)
    assert found.significance == pytest.approx(found.difference / (2.0 * expected), rel=1e-3)


def test_other_movements_are_taken_off_a_transfer() -> None:
    tank = example()
    source = side(tank, "A", 12.0, 8.0)
    sold = Movement(1, "delivered", {MASS: -1000.0}, (Effect("meters", "", {MASS: -5.0}),))
    found = compare(MASS, replace(source, others=(sold,)), side(tank, "B", 2.0, 6.0))
    plain = compare(MASS, source, side(tank, "B", 2.0, 6.0))
    assert found is not None
    assert plain is not None
    assert found.out == pytest.approx(plain.out - 1000.0)
    assert found.standard_uncertainty > plain.standard_uncertainty


def test_many_transfers_find_a_scale_that_no_single_one_shows() -> None:
    rng = np.random.default_rng(11)
    moved = rng.uniform(2e5, 8e5, 40)
    single_ones = [
        Transfer("A", "B", m, 0.998 * m + 900.0 * rng.standard_normal(), 900.0) for m in moved
    ]
    assert sum(abs(t.significance or 0.0) > 1.0 for t in single_ones) < 10
    many = over_many(single_ones)
    assert many is not None
    assert many.share == pytest.approx(-0.002, abs=3.0 * many.standard_uncertainty)
    assert (many.significance or 0.0) < -2.0
    assert over_many(single_ones[:2]) is None


def test_a_sphere_shares_what_its_level_lets_it_share() -> None:
    # The tap's height bears on the mass by the area at the surface: it cancels only where that is
    # the same.
    tank = replace(example(), vessel=sphere(14.0))
    fluid = weightless()
    low, mirrored = state(tank, fluid, 3.0), state(tank, fluid, 11.0)
    equator = state(tank, fluid, 7.0)
    same = account(MASS, low, mirrored, [])
    apart = account(MASS, low, equator, [])
    assert same is not None
    assert apart is not None
    area = math.pi * (7.0**2 - (7.0 - 3.0) ** 2)
    wider = math.pi * 49.0 - area
    assert apart.uncertainties["p1 elevation"] == pytest.approx(
        0.003 * (RHO - 1.2) * wider, rel=0.01
    )
    assert same.uncertainties["p1 elevation"] < 0.01 * apart.uncertainties["p1 elevation"]
