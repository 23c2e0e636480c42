"""Petroleum: observed to base and back, and what the equations refuse."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc.errors import RangeError
from tankcalc.fluids.gravity_scales import (
    api_from_density60,
    density60_from_api,
    density60_from_relative,
    relative_from_density60,
)
from tankcalc.fluids.petroleum_2004 import factors_from_60
from tankcalc.fluids.petroleum_bases import (
    base_density_from_observed,
    density60_from_observed,
    density_from_base,
)
from tankcalc.fluids.petroleum_groups import (
    COMMODITIES,
    CRUDE,
    REFINED,
    Commodity,
    special,
)

BASES_DEGF = (60.0, 59.0, 68.0)


@st.composite
def cases(draw: st.DrawFn) -> tuple[Commodity, float, float, float]:
    """A commodity, a density at 60 degF, degF and psig, all within the method."""
    oil = draw(
        st.one_of(
            st.sampled_from([*COMMODITIES.values(), REFINED]),
            st.floats(230e-6, 930e-6).map(special),
        )
    )
    # A special liquid lighter than this can answer twice, hot and at the greatest pressures.
    low = 625.0 if oil.name == "special" else oil.low_kg_m3
    density = draw(st.floats(low, oil.high_kg_m3))
    return oil, density, draw(st.floats(-58.0, 302.0)), draw(st.floats(-5.0, 1500.0))


def step_of(oil: Commodity, density: float) -> float:
    """What a round trip may lose: the step, beside a boundary between groups; else rounding."""
    boundaries = [group.low_kg_m3 for group in oil.groups[1:]]
    return 1e-4 if any(abs(density - edge) < 1e-4 for edge in boundaries) else 1e-8


@given(cases())
def test_observed_to_base_is_the_inverse_at_60(case: tuple[Commodity, float, float, float]) -> None:
    oil, density, t, p = case
    observed = density * float(factors_from_60(oil, density, t, p).ctpl)
    back = float(density60_from_observed(oil, observed, t, p))
    assert back == pytest.approx(density, abs=step_of(oil, density))


@given(cases(), st.sampled_from(BASES_DEGF))
def test_observed_to_base_to_observed(
    case: tuple[Commodity, float, float, float], base: float
) -> None:
    oil, density, t, p = case
    observed = density * float(factors_from_60(oil, density, t, p).ctpl)
    at_base = float(base_density_from_observed(oil, observed, t, p, base))
    again = float(density_from_base(oil, at_base, base, t, p))
    assert again == pytest.approx(observed, abs=3.0 * step_of(oil, density))


@given(cases(), st.floats(1e-3, 50.0))
def test_factors_fall_with_temperature_and_rise_with_pressure(
    case: tuple[Commodity, float, float, float], more: float
) -> None:
    oil, density, t, p = case
    cold, warm = (factors_from_60(oil, density, min(t, 250.0) + step, p) for step in (0.0, more))
    assert warm.ctl < cold.ctl
    pressed = factors_from_60(oil, density, t, min(max(p, 0.0), 1400.0) + more)
    assert pressed.cpl > factors_from_60(oil, density, t, min(p, 1400.0)).cpl
    assert factors_from_60(oil, density, t, -more).cpl == 1.0


def test_groups_of_refined_products_meet_within_the_published_rounding() -> None:
    for lower, upper in zip(REFINED.groups, REFINED.groups[1:], strict=False):
        edge = lower.high_kg_m3
        assert edge == upper.low_kg_m3
        for t in (-58.0, 100.0, 302.0):
            below, above = (
                edge * float(factors_from_60(COMMODITIES[group.name], edge, t).ctl)
                for group in (lower, upper)
            )
            assert abs(above - below) < 1e-4
            middle = (below + above) / 2.0
            assert density60_from_observed(REFINED, middle, t) == pytest.approx(edge, abs=1e-4)


def test_an_array_gives_what_its_rows_give() -> None:
    rng = np.random.default_rng(3)
    density, t = rng.uniform(610.6, 1163.5, (20, 20)), rng.uniform(-58.0, 302.0, (20, 20))
    p = rng.uniform(0.0, 1500.0, 20)
    observed = density * factors_from_60(REFINED, density, t, p).ctpl
    together = density60_from_observed(REFINED, observed, t, p)
    for row, column in np.ndindex(20, 20):
        alone = density60_from_observed(REFINED, observed[row, column], t[row, column], p[column])
        assert together[row, column] == pytest.approx(float(alone), rel=1e-12)


def test_a_density_that_two_liquids_have_is_refused() -> None:
    oil = special(500e-6)
    observed = 612.0 * float(factors_from_60(oil, 612.0, 302.0, 1500.0).ctpl)
    with pytest.raises(RangeError, match=r"comes from two densities .* \(610\.6 to 61[678]"):
        density60_from_observed(oil, observed, 302.0, 1500.0)
    heavier = 625.0 * float(factors_from_60(oil, 625.0, 302.0, 1500.0).ctpl)
    assert density60_from_observed(oil, heavier, 302.0, 1500.0) == pytest.approx(625.0, abs=1e-8)


@pytest.mark.parametrize("observed", [0.0, -850.0, 100.0, 5000.0, math.nan, math.inf])
@pytest.mark.parametrize("oil", [CRUDE, REFINED, COMMODITIES["transition"], special(5e-4)])
def test_an_observed_density_beyond_every_liquid_is_refused(
    oil: Commodity, observed: float
) -> None:
    with pytest.raises(RangeError, match=r"comes from no density at 60 degF"):
        density60_from_observed(oil, np.array([850.0, observed]), 60.0)
    with pytest.raises(RangeError):
        density60_from_observed(oil, observed, 302.0, 1500.0)


@pytest.mark.parametrize("case", [(math.nan, 60.0, 0.0), (850.0, math.nan, 0.0)])
def test_what_is_no_number_is_refused(case: tuple[float, float, float]) -> None:
    with pytest.raises(RangeError):
        factors_from_60(CRUDE, *case)
    with pytest.raises(RangeError, match="nan psig"):
        factors_from_60(CRUDE, 850.0, 60.0, math.nan)


@pytest.mark.parametrize("alpha", [229e-6, 931e-6, math.nan])
def test_a_stated_expansion_outside_the_method_is_refused(alpha: float) -> None:
    with pytest.raises(RangeError, match=r"0\.00023 to 0\.00093 per degF"):
        special(alpha)


@given(st.floats(-100.0, 200.0))
def test_api_gravity_there_and_back(api: float) -> None:
    assert float(api_from_density60(density60_from_api(api))) == pytest.approx(api, abs=1e-10)


def test_gravities_no_liquid_has_are_refused() -> None:
    with pytest.raises(RangeError, match=r"-131\.5"):
        density60_from_api(-131.5)
    for convert in (density60_from_relative, relative_from_density60, api_from_density60):
        with pytest.raises(RangeError, match="above zero"):
            convert(0.0)
