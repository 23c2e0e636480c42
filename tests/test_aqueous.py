"""Ethanol, solutions by a grid, foodstuffs, and tables of published figures."""

from __future__ import annotations

import math

import numpy as np
import pytest
from correlations import ICE, LALIBERTE, coolprop, grid_of, laliberte
from hypothesis import given
from hypothesis import strategies as st
from published import Published, published

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.constituents import DENSITIES, Constituents, constituent_density
from tankcalc.fluids.ethanol import Ethanol
from tankcalc.fluids.models import DensityModel
from tankcalc.fluids.solution import Grid, Solution
from tankcalc.fluids.table import Table

CHEMICALS = published("chemicals.csv")

INCOMPRESSIBLE = {
    "CoolProp INCOMP::MPG": "MPG",
    "CoolProp INCOMP::MEG": "MEG",
    "CoolProp INCOMP::MNA": "MNA",
}

BEYOND_THE_CORRELATION = {"07-005", "07-006", "07-009"}
"""Sulphuric acid above 75 %: the published correlation is 4 to 190 kg/m3 off there."""


def rho(model: DensityModel, t_c: float) -> float:
    return float(model.checked_density(np.array(t_c + ICE)))


def rows(**wanted: object) -> list[Published]:
    """Rows of the chemicals whose inputs hold these keys (True), or these values."""
    return [
        row
        for row in CHEMICALS
        if all(
            key in row.inputs if value is True else row.inputs.get(key) == value
            for key, value in wanted.items()
        )
    ]


# Ethanol


@pytest.mark.parametrize("row", rows(ethanol_mass_fraction=True) + rows(solute="ethanol"), ids=str)
def test_published_ethanol(row: Published) -> None:
    share = row.inputs.get("ethanol_mass_fraction", row.inputs.get("mass_pct", 0.0) / 100.0)
    row.agrees(rho(Ethanol(share), row.inputs["t_C"]))


def test_ethanol_agrees_with_the_checks_computed_from_the_directive() -> None:
    # Worked from the annex of 76/766/EEC, to the last digit printed.
    for share, t_c, wanted in [(0.0, 20, 998.201), (1.0, 20, 789.239), (0.95, 30, 795.465)]:
        assert rho(Ethanol(share), t_c) == pytest.approx(wanted, abs=6e-4)


@given(st.floats(0.0, 0.99), st.floats(-20.0, 40.0))
def test_more_ethanol_is_lighter_above_the_freezing_of_water(share: float, t_c: float) -> None:
    t = max(t_c, 5.0)
    assert rho(Ethanol(share + 0.01), t) < rho(Ethanol(share), t)


@pytest.mark.parametrize("t_c", [-20.01, 40.01])
def test_ethanol_refuses_temperatures_outside_the_formula(t_c: float) -> None:
    with pytest.raises(RangeError, match=r"ethanol density covers \(-20\.00 to 40\.00 degC\)"):
        rho(Ethanol(0.5), t_c)


@pytest.mark.parametrize("share", [-0.01, 1.01, math.nan])
def test_ethanol_refuses_shares_that_are_none(share: float) -> None:
    with pytest.raises(InputError, match="between 0 and 1"):
        Ethanol(share)


# Solutions


@pytest.mark.parametrize(
    "row",
    [row for row in rows(solute=True) if row.inputs["solute"] in LALIBERTE
     and row.id not in BEYOND_THE_CORRELATION],
    ids=str,
)  # fmt: skip
def test_published_solutions_from_a_grid_of_a_correlation(row: Published) -> None:
    solute = row.inputs["solute"]
    grid = grid_of(lambda w, t: laliberte(solute, w, t), 0.75)
    row.agrees(rho(Solution(row.inputs["mass_pct"] / 100.0, grid), row.inputs["t_C"]))


@pytest.mark.parametrize("row", rows(mass_fraction=True), ids=str)
def test_published_brines_from_a_grid_of_the_library(row: Published) -> None:
    fluid = INCOMPRESSIBLE[row.inputs["fluid"]]
    grid = grid_of(lambda w, t: coolprop(fluid, w, t), 0.2 if fluid == "MNA" else 0.5, 40)
    row.agrees(rho(Solution(row.inputs["mass_fraction"], grid), row.inputs["t_C"]))


def test_published_methanol_from_a_grid_of_the_library() -> None:
    (half,) = rows(solute="methanol", mass_pct=50)
    grid = grid_of(lambda w, t: coolprop("MMA", w, t), 0.6, 40)
    half.agrees(rho(Solution(0.5, grid), half.inputs["t_C"]))


@pytest.mark.parametrize("row", [row for row in CHEMICALS if row.id in BEYOND_THE_CORRELATION])
def test_strong_acid_is_entered_as_it_is_printed(row: Published) -> None:
    """The printed column at 20 degC, held over temperature: what goes in comes out."""
    printed = [each for each in rows(solute="H2SO4") if each.inputs["mass_pct"] >= 70]
    shares = tuple(each.inputs["mass_pct"] / 100.0 for each in printed)
    values = tuple((float(each.value), float(each.value)) for each in printed)
    grid = Grid(shares, (ICE + 15.0, ICE + 25.0), values, "handbook", "2021")
    row.agrees(rho(Solution(row.inputs["mass_pct"] / 100.0, grid), row.inputs["t_C"]))


@given(st.floats(0.05, 0.25), st.floats(0.0, 50.0))
def test_between_its_steps_a_grid_follows_the_correlation(share: float, t_c: float) -> None:
    grid = BRINE
    wanted = laliberte("Sodium chloride", share, t_c)
    assert rho(Solution(share, grid), t_c) == pytest.approx(wanted, abs=0.1)


BRINE = grid_of(lambda w, t: laliberte("Sodium chloride", w, t), 0.25)


def test_a_grid_passes_through_its_own_figures() -> None:
    for share, row in zip(BRINE.concentrations, BRINE.densities_kg_m3, strict=True):
        found = Solution(share, BRINE).density(np.array(BRINE.temperatures_k))
        assert found == pytest.approx(row, rel=1e-15)


def test_a_solution_says_whose_figures_it_uses() -> None:
    assert Solution(0.1, BRINE).source == "a correlation, 2004"


@pytest.mark.parametrize(("share", "named"), [(0.04, "4 %"), (0.26, "26 %")])
def test_a_concentration_outside_the_grid_is_refused(share: float, named: str) -> None:
    with pytest.raises(InputError, match=rf"{named} is outside the grid's, 5 to 25 %"):
        Solution(share, BRINE)


@pytest.mark.parametrize("t_c", [-0.1, 50.1])
def test_a_temperature_outside_the_grid_is_refused(t_c: float) -> None:
    with pytest.raises(RangeError, match=r"solution density covers \(0\.00 to 50\.00 degC\)"):
        rho(Solution(0.1, BRINE), t_c)


@pytest.mark.parametrize(
    ("shares", "temperatures", "densities", "said"),
    [
        ((0.1,), (280.0, 290.0), ((1.0, 1.0),), "two concentrations"),
        ((0.2, 0.1), (280.0, 290.0), ((1.0, 1.0),) * 2, "above the one before"),
        ((0.1, 0.2), (290.0, 290.0), ((1.0, 1.0),) * 2, "two temperatures"),
        ((0.1, 1.2), (280.0, 290.0), ((1.0, 1.0),) * 2, "between 0 and 1"),
        ((0.1, 0.2), (280.0, 290.0), ((1.0, 1.0),), "as many rows"),
        ((0.1, 0.2), (280.0, 290.0), ((1.0, 1.0), (1.0,)), "row 2"),
        ((0.1, 0.2), (280.0, 290.0), ((1.0, 1.0), (1.0, 0.0)), "above zero"),
    ],
)
def test_a_grid_that_does_not_fit_is_refused(
    shares: tuple[float, ...],
    temperatures: tuple[float, ...],
    densities: tuple[tuple[float, ...], ...],
    said: str,
) -> None:
    with pytest.raises(InputError, match=said):
        Grid(shares, temperatures, densities, "x", "y")


# Foodstuffs


@pytest.mark.parametrize("row", rows(constituent=True), ids=str)
def test_published_constituents(row: Published) -> None:
    row.agrees(float(constituent_density(row.inputs["constituent"], np.array(row.inputs["t_C"]))))


@pytest.mark.parametrize("row", rows(composition=True), ids=str)
def test_published_milk(row: Published) -> None:
    milk = Constituents(tuple(row.inputs["composition"].items()))
    row.agrees(rho(milk, row.inputs["t_C"]))


def test_volumes_of_constituents_are_added() -> None:
    # 0.5 / 995.74 + 0.5 / 917.24 of water and fat at 20 degC, by hand.
    half = Constituents((("water", 0.5), ("fat", 0.5)))
    assert rho(half, 20.0) == pytest.approx(954.88, abs=0.01)
    for name in DENSITIES:
        alone = float(constituent_density(name, np.array(20.0)))
        assert rho(Constituents(((name, 1.0),)), 20.0) == pytest.approx(alone, rel=1e-14)


@pytest.mark.parametrize(
    ("fractions", "said"),
    [
        ((("water", 0.9), ("fat", 0.05)), "mass fractions sum to 0.95, not to 1"),
        ((("water", 1.2), ("fat", -0.2)), "water must be between 0 and 1"),
        ((("water", 0.9), ("salt", 0.1)), "salt is no constituent"),
        ((), "sum to 0"),
    ],
)
def test_fractions_that_make_no_food_are_refused(
    fractions: tuple[tuple[str, float], ...], said: str
) -> None:
    with pytest.raises(InputError, match=said):
        Constituents(fractions)


# Tables of published figures


def asphalt(*left_out: float) -> Table:
    """Published factors to 60 degF as densities of a material of 1000 kg/m3 there."""
    factors = {row.inputs["t_F"]: float(row.value) for row in rows(t_F=True)} | {60.0: 1.0}
    points = sorted((t, 1000.0 * vcf) for t, vcf in factors.items() if t not in left_out)
    return Table(
        tuple((t - 32.0) / 1.8 + ICE for t, _ in points), tuple(value for _, value in points)
    )


@pytest.mark.parametrize("row", rows(t_F=True), ids=str)
def test_published_asphalt_factors_make_a_table(row: Published) -> None:
    row.agrees(rho(asphalt(), (row.inputs["t_F"] - 32.0) / 1.8) / 1000.0)


def test_an_asphalt_factor_left_out_is_found_between_its_neighbours() -> None:
    (left_out,) = rows(t_F=50)
    left_out.agrees(rho(asphalt(50), 10.0) / 1000.0)


def test_asphalt_is_not_carried_beyond_the_table() -> None:
    with pytest.raises(RangeError, match="table density"):
        rho(asphalt(200), 93.0)


@pytest.mark.parametrize("row", rows(product="asphalt column A (metric)"), ids=str)
def test_published_metric_asphalt_factors_make_a_table(row: Published) -> None:
    printed = rows(product="asphalt column A (metric)")
    table = Table(
        tuple(each.inputs["t_C"] + ICE for each in printed),
        tuple(1000.0 * float(each.value) for each in printed),
    )
    row.agrees(rho(table, row.inputs["t_C"]) / 1000.0)


def test_published_sulphur_lies_in_a_table_of_handbook_figures() -> None:
    (row,) = rows(product="molten sulphur")
    # Rounded figures of liquid sulphur near its melting point and above, kg/m3, from memory.
    sulphur = Table((ICE + 115.0, ICE + 130.0, ICE + 150.0), (1808.0, 1796.0, 1780.0))
    row.agrees(rho(sulphur, row.inputs["t_C"]))
