"""A petroleum liquid as a fluid file names it: bases, editions, groups, refusals."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc.errors import FigureError, InputError, RangeError
from tankcalc.fluids import petroleum_1984
from tankcalc.fluids.petroleum import BASES_K, GROUPS, REFINED_GROUPS, Petroleum
from tankcalc.fluids.petroleum_2004 import factors_from_60
from tankcalc.fluids.petroleum_bases import (
    factors_from_base,
)
from tankcalc.fluids.petroleum_groups import (
    CRUDE,
    special,
)

ICE = 273.15

# Figures of an independent calculation, both editions, six decimals.
EDITIONS = [
    ("fuel oil", 850.0, 30.0, 0.987492, 0.987493),
    ("crude", 850.0, 30.0, 0.987200, 0.987206),
    ("gasoline", 740.0, 30.0, 0.981514, 0.981519),
    ("jet fuel", 800.0, 25.0, 0.990680, 0.990685),
    ("lubricating oil", 880.0, 60.0, 0.967606, 0.967608),
]


@pytest.mark.parametrize(("group", "rho15", "t_c", "in_2004", "in_1980"), EDITIONS)
def test_the_editions_differ_in_the_fifth_or_sixth_decimal(
    group: str, rho15: float, t_c: float, in_2004: float, in_1980: float
) -> None:
    there = np.array(ICE + t_c)
    found = [
        float(Petroleum(group, rho15, ICE + 15.0, edition).checked_density(there)) / rho15
        for edition in (2004, 1980)
    ]
    assert found == pytest.approx([in_2004, in_1980], abs=6e-7)
    assert found[0] != found[1]


def liquid(group: str, at_k: float, edition: int = 2004) -> Petroleum:
    """A liquid in the midst of each group."""
    density = {"gasoline": 740.0, "transition": 780.0, "jet fuel": 810.0}.get(group, 880.0)
    return Petroleum(group, density, at_k, edition, 8.3e-4 if group == "special" else None)


@pytest.mark.parametrize("edition", [2004, 1980])
@pytest.mark.parametrize("at_k", BASES_K)
@pytest.mark.parametrize("group", GROUPS)
def test_a_liquid_has_its_reference_density_at_its_base(
    group: str, at_k: float, edition: int
) -> None:
    oil = liquid(group, at_k, edition)
    assert oil.base_k == at_k
    assert float(oil.checked_density(np.array(at_k))) == oil.reference_kg_m3
    assert str(edition) in oil.source
    assert group in oil.source


@pytest.mark.parametrize("edition", [2004, 1980])
@pytest.mark.parametrize("group", GROUPS)
@given(st.floats(-17.0, 90.0), st.sampled_from(BASES_K), st.sampled_from(BASES_K))
def test_standard_density_is_the_inverse_of_density(
    group: str, edition: int, t_c: float, at_k: float, base_k: float
) -> None:
    oil = liquid(group, at_k, edition)
    there = np.array(ICE + t_c)
    found = float(oil.standard_density(oil.checked_density(there), there, base_k))
    assert found == pytest.approx(float(oil.checked_density(np.array(base_k))), abs=1e-8)


@pytest.mark.parametrize("group", GROUPS)
def test_the_bases_agree_on_one_liquid(group: str) -> None:
    at_15 = liquid(group, BASES_K[0])
    there = np.linspace(ICE - 50.0, ICE + 150.0, 9)
    for at_k in BASES_K[1:]:
        same = replace(at_15, reference_kg_m3=float(at_15.density(np.array(at_k))), at_k=at_k)
        assert same.checked_density(there) == pytest.approx(at_15.checked_density(there), rel=1e-12)


@pytest.mark.parametrize("group", GROUPS)
def test_the_bases_of_1980_at_15_and_20_agree_on_one_liquid(group: str) -> None:
    at_15 = liquid(group, BASES_K[0], 1980)
    density20 = float(at_15.density(np.array(BASES_K[1])))
    at_20 = replace(at_15, reference_kg_m3=density20, at_k=BASES_K[1])
    there = np.linspace(ICE - 18.0, ICE + 90.0, 9)
    assert at_20.checked_density(there) == pytest.approx(at_15.checked_density(there), rel=1e-12)


@pytest.mark.parametrize("group", [group for group in GROUPS if group != "special"])
def test_the_editions_are_close_but_not_the_same_at_every_base(group: str) -> None:
    # In the transition zone, where the expansion falls steeply with density, the metric constants
    # of 1980 belong to the same densities at 15 degC as those of the US tables at 60 degF.
    apart = 5e-4 if group == "transition" else 5e-5
    there = np.linspace(ICE, ICE + 60.0, 5)
    for at_k in BASES_K:
        new, old = (liquid(group, at_k, edition) for edition in (2004, 1980))
        assert old.density(there) == pytest.approx(new.density(there), rel=apart)
        assert not np.array_equal(old.density(there), new.density(there))


def test_an_observed_density_is_solved_for_and_not_scaled() -> None:
    oil = Petroleum("crude", 850.0, ICE + 15.0)
    there = np.array(ICE + 60.0)
    other = Petroleum("crude", 700.0, ICE + 15.0)
    observed = other.checked_density(there)
    found = float(oil.standard_density(observed, there, ICE + 15.0))
    assert found == pytest.approx(700.0, abs=1e-9)
    scaled = float(observed * 850.0 / oil.checked_density(there))
    assert abs(scaled - 700.0) > 5.0


def test_a_special_liquid_takes_its_expansion_per_kelvin() -> None:
    oil = Petroleum("special", 853.7, BASES_K[2], 2004, 1.8 * 0.00057634)
    wanted = factors_from_60(special(0.00057634), 853.7, 84.5).ctl
    there = np.array(ICE + (84.5 - 32.0) / 1.8)
    assert float(oil.density(there)) / 853.7 == pytest.approx(float(wanted), rel=1e-13)
    # exp(-a dt (1 + 0.8 a dt)) by hand, a = 0.001 per K, dt = 10 K.
    old = Petroleum("special", 853.7, BASES_K[0], 1980, 0.001)
    wanted_old = math.exp(-0.01 * 1.008)
    assert float(old.density(np.array(ICE + 25.0))) / 853.7 == pytest.approx(wanted_old, rel=1e-12)
    old60 = Petroleum("special", 853.7, BASES_K[2], 1980, 0.001)
    found = float(old60.density(np.array(BASES_K[2] + 10.0))) / 853.7
    assert found == pytest.approx(wanted_old, rel=1e-12)


def test_pressure_factors_of_both_editions() -> None:
    # The compressibilities of 1984 and 2004 were fitted to the same liquids.
    there, gauge = np.array([ICE + 15.0, ICE + 40.0]), np.array([0.0, 3.0e6])
    new = Petroleum("crude", 850.0, ICE + 15.0).pressure_factor(there, gauge)
    old = Petroleum("crude", 850.0, ICE + 15.0, 1980).pressure_factor(there, gauge)
    assert new[0] == old[0] == 1.0
    assert old[1] - 1.0 == pytest.approx(new[1] - 1.0, rel=3e-3)
    wanted = factors_from_base(CRUDE, 850.0, 59.0, 104.0, 3.0e6 / 6894.757).cpl
    assert new[1] == pytest.approx(float(wanted), rel=1e-14)


@pytest.mark.parametrize(
    ("edition", "t_c", "gauge_pa", "match"),
    [
        (2004, 151.0, 0.0, r"\(-58 to 302 degF, -50 to 150 degC\)"),
        (2004, 20.0, 1.1e7, r"\(0 to 1500 psig"),
        (1980, 95.0, 1e5, r"95 degC .* \(-30 to 90 degC\)"),
        (1980, 20.0, 1.1e7, r"11000 kPa gauge .* \(0 to 10300 kPa gauge\)"),
    ],
)
def test_pressure_factors_refuse_beyond_their_limits(
    edition: int, t_c: float, gauge_pa: float, match: str
) -> None:
    oil = Petroleum("crude", 850.0, ICE + 15.0, edition)
    with pytest.raises(RangeError, match=match):
        oil.pressure_factor(np.array(ICE + t_c), np.array(gauge_pa))


def test_the_compressibility_of_1984_asks_nothing_of_a_liquid_not_pressed() -> None:
    assert float(petroleum_1984.pressure_factor(620.0, 120.0, -10.0)) == 1.0
    with pytest.raises(RangeError, match=r"620 kg/m3 at 15 degC"):
        petroleum_1984.pressure_factor(620.0, 20.0, 1.0)


@pytest.mark.parametrize("edition", [2004, 1980])
@pytest.mark.parametrize(
    ("group", "density", "covers"),
    [
        ("fuel oil", 810.0, "jet fuel"),
        ("jet fuel", 780.0, "transition"),
        ("transition", 760.0, "gasoline"),
        ("gasoline", 900.0, "fuel oil"),
    ],
)
def test_a_density_of_another_group_is_refused_and_the_group_named(
    group: str, density: float, covers: str, edition: int
) -> None:
    with pytest.raises(InputError, match=rf'the {edition} .*"{group}", .* The group "{covers}"'):
        Petroleum(group, density, ICE + 15.0, edition)


@pytest.mark.parametrize("edition", [2004, 1980])
@pytest.mark.parametrize("group", ["crude", "lubricating oil", *REFINED_GROUPS])
def test_a_density_of_no_group_is_refused_with_the_limits(group: str, edition: int) -> None:
    with pytest.raises(
        InputError, match=r"1300 kg/m3 at 20 degC .*, [0-9.]+ to [0-9.]+ kg/m3 at 20 degC\.$"
    ):
        Petroleum(group, 1300.0, ICE + 20.0, edition)


@pytest.mark.parametrize("edition", [2004, 1980])
@pytest.mark.parametrize("at_k", BASES_K)
@pytest.mark.parametrize("group", ["crude", "lubricating oil", *REFINED_GROUPS])
def test_the_limits_told_are_the_limits_that_hold(group: str, at_k: float, edition: int) -> None:
    with pytest.raises(FigureError) as refused:
        Petroleum(group, 1300.0, at_k, edition)
    assert refused.value.key == "reference"
    found = re.search(r", ([0-9.]+) to ([0-9.]+) kg/m3 at", str(refused.value))
    assert found is not None
    low, high = map(float, found.groups())
    for inside, outside in ((low + 0.02, low - 0.02), (high - 0.02, high + 0.02)):
        Petroleum(group, inside, at_k, edition)
        with pytest.raises(FigureError):
            Petroleum(group, outside, at_k, edition)


@pytest.mark.parametrize(
    ("arguments", "match"),
    [
        (("diesel", 845.0, ICE + 15.0), "there are crude, fuel oil"),
        (("crude", 845.0, ICE + 25.0), "at 15 degC, 20 degC or 60 degF"),
        (("crude", 845.0, math.nan), "at 15 degC, 20 degC or 60 degF"),
        (("crude", 845.0, ICE + 15.0, 1952), "2004 and 1980"),
        (("crude", 0.0, ICE + 15.0), "above zero"),
        (("crude", math.nan, ICE + 15.0), "above zero"),
        (("special", 845.0, ICE + 15.0), "needs its expansion"),
        (("crude", 845.0, ICE + 15.0, 2004, 8e-4), "state none"),
        (("special", 845.0, ICE + 15.0, 2004, 4.1e-4), r"0\.000414 to 0\.001674 per K"),
        (("special", 845.0, ICE + 15.0, 1980, 4.8e-4), r"0\.000486 to 0\.001674 per degC"),
        (("special", 845.0, BASES_K[2], 1980, 1.7e-3), r"0\.00027 to 0\.00093 per degF"),
        (("special", 500.0, ICE + 15.0, 2004, 8e-4), r"no density at 60 degF of special"),
    ],
)
def test_choices_there_are_not_are_refused(arguments: Any, match: str) -> None:
    with pytest.raises(InputError, match=match):
        Petroleum(*arguments)


def test_temperatures_outside_the_editions_are_refused() -> None:
    new = Petroleum("gasoline", 740.0, ICE + 15.0)
    assert np.all(np.isfinite(new.checked_density(np.array([ICE - 50.0, ICE + 150.0]))))
    with pytest.raises(RangeError, match=r"-50\.00 to 150\.00 degC"):
        new.checked_density(np.array(ICE + 150.1))
    for density, highest in ((740.0, 95.0), (800.0, 125.0), (850.0, 150.0)):
        old = Petroleum("crude", density, ICE + 15.0, 1980)
        assert old.limits_k == pytest.approx((ICE - 18.0, ICE + highest), abs=1e-9)
        with pytest.raises(RangeError, match=rf"-18\.00 to {highest:.2f} degC"):
            old.checked_density(np.array(ICE + highest + 0.1))
        hot = np.array(ICE + highest + 1.0)
        with pytest.raises(RangeError, match=rf"\(-18 to {highest:g} degC\)"):
            old.standard_density(old.density(hot), hot, ICE + 15.0)
    old60 = Petroleum("crude", 850.0, BASES_K[2], 1980)
    assert old60.limits_k == pytest.approx((ICE - 32.0 / 1.8, ICE + 268.0 / 1.8), abs=1e-9)


def test_a_standard_density_outside_the_group_is_refused() -> None:
    for edition in (2004, 1980):
        oil = Petroleum("jet fuel", 800.0, ICE + 15.0, edition)
        with pytest.raises(RangeError, match=rf"of jet fuel in the {edition} equations"):
            oil.standard_density(np.array([800.0, 850.0]), np.array(ICE + 20.0), ICE + 15.0)
    oil = Petroleum("special", 800.0, ICE + 15.0, 1980, 8e-4)
    with pytest.raises(RangeError, match="of no liquid"):
        oil.standard_density(np.array(-1.0), np.array(ICE + 20.0), ICE + 15.0)


def test_the_chain_of_a_gas_oil_begins_with_its_volume_correction() -> None:
    # A worked chain calculated independently: 845 kg/m3 at 15 degC, 32.5 degC in the tank.
    oil = Petroleum("fuel oil", 845.0, ICE + 15.0)
    assert float(oil.density(np.array(BASES_K[2]))) == pytest.approx(844.6069, abs=5e-5)
    found = float(oil.checked_density(np.array(ICE + 32.5))) / 845.0
    assert found == pytest.approx(0.9852842, abs=5e-8)
