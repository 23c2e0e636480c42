"""Rates of change: from two readings, from many, with what they are worth."""

from __future__ import annotations

import math
import random
import statistics

import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import single, transmitters, upright

from tankcalc.errors import InputError
from tankcalc.instruments import Accuracy, Transmitter
from tankcalc.limits.rates import (
    Rate,
    Timed,
    against_declared,
    random_parts,
    rate_of,
    volume_flow,
)
from tankcalc.limits.settings import RANDOM_SHARE
from tankcalc.readings import Readings
from tankcalc.uncertainty import assess

HOUR_US = 3_600_000_000


def points(*values: float, u: float | None = 0.5, key: str = "mass_kg") -> list[Timed]:
    """Values an hour apart."""
    random_part = {} if u is None else {key: u}
    return [Timed(n * HOUR_US, {key: value}, random_part) for n, value in enumerate(values)]


def rate(*values: float, u: float | None = 0.5) -> Rate:
    found = rate_of(points(*values, u=u))
    assert found is not None
    return found


def test_two_readings_by_hand() -> None:
    found = rate(1000.0, 1360.0)
    assert found.per_s == pytest.approx(0.1)
    assert found.uncertainty_per_s == pytest.approx(math.sqrt(2.0) * 0.5 / 3600.0)
    assert (found.count, found.from_us, found.to_us) == (2, 0, HOUR_US)


def test_unequal_uncertainties_add_in_squares() -> None:
    pair = [Timed(0, {"mass_kg": 0.0}, {"mass_kg": 3.0})]
    pair.append(Timed(10_000_000, {"mass_kg": 1.0}, {"mass_kg": 4.0}))
    found = rate_of(pair)
    assert found is not None
    assert found.uncertainty_per_s == pytest.approx(0.5)


def test_static_is_below_two_standard_uncertainties() -> None:
    u = math.sqrt(2.0) * 0.5
    assert rate(0.0, 1.99 * u).static is True
    assert rate(0.0, -1.99 * u).static is True
    assert rate(0.0, 2.01 * u).static is False
    assert rate(0.0, 100.0, u=None).static is None


def test_standard_volume_is_taken_before_mass_and_mass_before_volume() -> None:
    full = {"standard_volume_m3": 1.0, "mass_kg": 850.0, "volume_m3": 1.1}
    keys = list(full)
    for n, key in enumerate(keys):
        held = {name: full[name] for name in keys[n:]}
        found = rate_of([Timed(0, held), Timed(HOUR_US, held)])
        assert found is not None
        assert found.basis == key
    # One of them known at every point is taken before a better one that is not.
    mixed = rate_of([Timed(0, full), Timed(HOUR_US, {"volume_m3": 1.1})])
    assert mixed is not None
    assert mixed.basis == "volume_m3"
    assert "from volume at tank temperature of 2 readings" in mixed.words()


def test_a_figure_whose_uncertainty_is_known_is_taken_before_one_without() -> None:
    held = {"standard_volume_m3": 1.0, "mass_kg": 850.0}
    pair = [Timed(n * HOUR_US, held, {"mass_kg": 1.0}) for n in (0, 1)]
    found = rate_of(pair)
    assert found is not None
    assert (found.basis, found.static) == ("mass_kg", True)


def test_there_is_no_rate_of_one_instant_or_of_nothing_in_common() -> None:
    assert rate_of([]) is None
    assert rate_of(points(1.0)) is None
    assert rate_of([Timed(5, {"mass_kg": 1.0}), Timed(5, {"mass_kg": 2.0})]) is None
    assert rate_of([Timed(0, {"mass_kg": 1.0}), Timed(9, {"volume_m3": 2.0})]) is None
    assert rate_of(points(1.0, 2.0), "volume_m3") is None


def test_what_is_not_finite_is_refused() -> None:
    with pytest.raises(InputError, match="mass_kg"):
        rate_of(points(1.0, math.nan))
    with pytest.raises(InputError, match="below zero"):
        rate_of(points(1.0, 2.0, u=-1.0))


def test_least_squares_against_the_standard_library_and_by_hand() -> None:
    values = [0.0, 3.0, 1.0, 5.0, 4.0]
    found = rate(*values, u=0.001)
    hours = [0.0, 1.0, 2.0, 3.0, 4.0]
    slope, start = statistics.linear_regression(hours, values)
    assert found.per_s * 3600.0 == pytest.approx(slope)
    squares = sum((y - start - slope * t) ** 2 for t, y in zip(hours, values, strict=True))
    by_scatter = math.sqrt(squares / 3.0 / 10.0)  # sum of (t - mean)^2 is 10 h2
    assert found.uncertainty_per_s is not None
    assert found.uncertainty_per_s * 3600.0 == pytest.approx(by_scatter)


def test_three_readings_by_hand() -> None:
    # Off the line by 0.5, -1 and 0.5: s2 = 1.5 with one degree of freedom, sum of squares 2 h2.
    found = rate(0.0, 1.0, 5.0, u=0.001)
    assert found.per_s * 3600.0 == pytest.approx(2.5)
    assert found.uncertainty_per_s is not None
    assert found.uncertainty_per_s * 3600.0 == pytest.approx(math.sqrt(0.75))


def test_a_line_too_good_to_be_true_keeps_the_uncertainty_of_its_readings() -> None:
    found = rate(0.0, 1.0, 2.0, 3.0, 4.0, u=0.2)
    assert found.uncertainty_per_s is not None
    assert found.uncertainty_per_s * 3600.0 == pytest.approx(0.2 / math.sqrt(10.0))


def test_the_uncertainty_is_that_of_many_trials() -> None:
    noise = random.Random(5)
    found = [
        rate(*(10.0 * n + noise.gauss(0.0, 2.0) for n in range(6))).per_s * 3600.0
        for _ in range(4000)
    ]
    # The spread of a spread from 4000 trials is 1.1 %: four of these.
    assert statistics.stdev(found) == pytest.approx(2.0 / math.sqrt(17.5), rel=0.045)
    assert statistics.fmean(found) == pytest.approx(10.0, abs=0.05)


@given(
    values=st.lists(st.floats(-1e6, 1e6), min_size=2, max_size=8),
    shift=st.floats(-1e6, 1e6),
    data=st.randoms(),
)
def test_neither_order_nor_a_common_error_changes_a_rate(
    values: list[float], shift: float, data: random.Random
) -> None:
    plain = rate(*values)
    moved = points(*(value + shift for value in values))
    data.shuffle(moved)
    found = rate_of(moved)
    assert found is not None
    assert found.per_s == pytest.approx(plain.per_s, abs=1e-9)
    assert rate(*reversed(values)).per_s == pytest.approx(-plain.per_s, abs=1e-9)


def test_a_change_of_the_clocks_is_nothing_to_a_rate() -> None:
    # 25 October 2026 in Berlin: from 01:30 +02:00 to 03:30 +01:00 are three hours, not two.
    start = 1_792_884_600_000_000
    pair = [Timed(start, {"mass_kg": 0.0}), Timed(start + 3 * HOUR_US, {"mass_kg": 10_800.0})]
    found = rate_of(pair)
    assert found is not None
    assert found.per_s == pytest.approx(1.0)


def test_mass_becomes_a_flow_by_the_density() -> None:
    now = {"mass_kg": 850_000.0, "volume_m3": 1000.0}
    found = volume_flow(rate(0.0, 850.0 * 120.0), now)
    assert found is not None
    assert found[0] * 3600.0 == pytest.approx(120.0)
    assert found[1] is not None
    assert found[1] * 3600.0 == pytest.approx(math.sqrt(2.0) * 0.5 / 850.0)
    assert volume_flow(rate(0.0, 1.0), {}) is None
    plain = rate_of(points(0.0, 7.2, key="volume_m3", u=None))
    assert plain is not None
    assert volume_flow(plain, {}) == (pytest.approx(0.002), None)


@pytest.mark.parametrize(
    ("change", "movement", "code"),
    [
        (100.0, "receiving", None),
        (-100.0, "receiving", "direction_contradicts"),
        (-100.0, "delivering", None),
        (100.0, "delivering", "direction_contradicts"),
        (100.0, "static", "moves_while_static"),
        (0.5, "static", None),
        (0.5, "receiving", "still_while_moving"),
        (0.5, "delivering", "still_while_moving"),
        (100.0, "", None),
    ],
)
def test_what_was_declared_is_held_against_the_rate(
    change: float, movement: str, code: str | None
) -> None:
    notice = against_declared(rate(0.0, change), movement)
    assert (None if notice is None else notice.code) == code


def test_without_an_uncertainty_nothing_is_contradicted() -> None:
    assert against_declared(rate(0.0, 100.0, u=None), "static") is None


def test_words_say_the_way_the_size_and_the_basis() -> None:
    assert rate(0.0, 3600.0).words().startswith("filling, ")
    assert rate(3600.0, 0.0).words().startswith("emptying, ")
    assert rate(0.0, 0.5).words().startswith("static: ")
    unknown = rate(7.0, 7.0, u=None).words()
    assert unknown.startswith("no change, ")
    assert "uncertainty not known, from mass of 2 readings" in unknown


def test_only_the_random_share_of_the_readings_counts() -> None:
    p1 = Transmitter("p1", 0.5, "gauge", accuracy=Accuracy(fixed=30.0))
    tank, fluid = upright(transmitters={"p1": p1}), single(850.0)
    budget = assess(tank, fluid, Readings(p1_pa=80_000.0))
    assert budget is not None
    parts = random_parts(budget)
    # dm/dp1 = rho A / (g (rho - air)) on an upright tank: 30 Pa / 3 on 314.16 m2.
    by_hand = 10.0 * math.pi * 100.0 * 850.0 / (9.81 * (850.0 - 1.2))
    assert pytest.approx(1.0 / 3.0) == RANDOM_SHARE
    assert parts["mass_kg"] == pytest.approx(by_hand, rel=1e-4)
    assert parts["mass_kg"] < 0.2 * budget.standard["mass_kg"]
    assert random_parts(budget, 1.0)["mass_kg"] == pytest.approx(3.0 * by_hand, rel=1e-4)
    assert random_parts(budget, 0.0)["mass_kg"] == 0.0


def test_of_a_typed_volume_no_random_part_is_known() -> None:
    budget = assess(upright(), single(850.0), Readings(volume_m3=1000.0))
    assert budget is not None
    assert random_parts(budget) == {}


def test_a_dip_is_random_in_full() -> None:
    tank = upright(transmitters=transmitters(p1=0.5), level_gauge=Accuracy(fixed=0.002))
    budget = assess(tank, single(850.0), Readings(level_m=8.0))
    assert budget is not None
    assert random_parts(budget)["volume_m3"] == pytest.approx(0.002 * math.pi * 100.0, rel=1e-6)
