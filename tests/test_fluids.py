"""Density models and density profiles over elevation."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from published import Published, published
from scipy.integrate import quad
from scipy.optimize import minimize_scalar

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.column import Column, column_of_layers
from tankcalc.fluids.constant import Constant
from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.fluid import Layer
from tankcalc.fluids.models import Temperatures
from tankcalc.fluids.samples import Samples
from tankcalc.fluids.table import Table
from tankcalc.fluids.water import Water, density_at_0_1_mpa

ICE = 273.15


def water(t_c: float) -> float:
    return float(Water().checked_density(np.array(t_c + ICE)))


@pytest.mark.parametrize("row", published("water.csv"), ids=str)
def test_published_water_density(row: Published) -> None:
    if row.quantity == "temperature of maximum density":
        best = minimize_scalar(lambda t: -water(t), bounds=(0.0, 10.0), method="bounded")
        row.agrees(best.x)
    elif "T_K" in row.inputs:
        row.agrees(float(density_at_0_1_mpa(np.array(row.inputs["T_K"]))))
    elif "t_F" in row.inputs:
        row.agrees(water((row.inputs["t_F"] - 32.0) / 1.8))
    else:
        row.agrees(water(row.inputs["t_C"]))


def test_the_two_water_equations_meet_without_a_step() -> None:
    below, above = water(40.0), water(40.0 + 1e-9)
    assert above == pytest.approx(below, rel=1e-10)


@pytest.mark.parametrize("t_c", [-0.01, 100.01, math.nan])
def test_water_refuses_temperatures_it_does_not_cover(t_c: float) -> None:
    with pytest.raises(RangeError, match=r"outside what the water density covers"):
        water(t_c)


def test_expansion_is_the_reference_density_at_its_own_temperature() -> None:
    oil = Expansion(845.0, ICE + 15.0, 8.3e-4)
    assert oil.density(np.array(ICE + 15.0)) == 845.0
    assert oil.density(np.array(ICE + 25.0)) == pytest.approx(845.0 / 1.0083, rel=1e-15)


def test_expansion_refuses_temperatures_far_from_its_reference() -> None:
    with pytest.raises(RangeError, match="expansion density"):
        Expansion(845.0, ICE + 15.0, 8.3e-4).checked_density(np.array(ICE + 200.0))


def test_table_passes_through_its_points_and_stays_between_them() -> None:
    table = Table((ICE, ICE + 10.0, ICE + 30.0), (1004.0, 1001.0, 990.0))
    assert table.density(np.array([ICE, ICE + 10.0, ICE + 30.0])) == pytest.approx(
        [1004.0, 1001.0, 990.0], rel=1e-15
    )
    between = table.density(np.linspace(ICE, ICE + 30.0, 301))
    assert np.all(np.diff(between) < 0.0)


def test_table_refuses_to_extrapolate() -> None:
    table = Table((ICE, ICE + 10.0), (1004.0, 1001.0))
    with pytest.raises(RangeError, match=r"0\.00 to 10\.00 degC"):
        table.checked_density(np.array(ICE + 10.5))


@pytest.mark.parametrize(
    "make",
    [
        lambda: Constant(0.0),
        lambda: Constant(math.nan),
        lambda: Expansion(-1.0, ICE, 1e-3),
        lambda: Expansion(800.0, ICE, 0.5),
        lambda: Expansion(800.0, ICE, 1e-3, bulk_modulus_pa=1.0),
        lambda: Table((ICE,), (1.0,)),
        lambda: Table((ICE + 1.0, ICE), (1.0, 1.0)),
        lambda: Table((ICE, ICE + 1.0), (1.0, -1.0)),
        lambda: Samples((), ()),
        lambda: Samples((1.0, 1.0), (850.0, 840.0)),
        lambda: Samples((1.0, 2.0), (850.0, 0.0)),
        lambda: Samples((1.0,), (850.0,), beyond="extend"),
    ],
)
def test_models_refuse_figures_that_are_no_liquid(make: object) -> None:
    with pytest.raises(InputError):
        make()  # type: ignore[operator]


def samples_column(beyond: str = "hold") -> Column:
    samples = Samples((1.0, 5.0, 9.0), (860.0, 852.0, 846.0), beyond)  # type: ignore[arg-type]
    return column_of_layers((Layer("oil", samples),), None)


def test_sampled_column_reproduces_its_integral_by_hand() -> None:
    # 1 m at 860, 4 m at the mean 856, 4 m at the mean 849, 1 m at 846.
    assert samples_column().areal_mass(0.0, 10.0) == pytest.approx(
        860.0 + 4 * 856.0 + 4 * 849.0 + 846.0, rel=1e-15
    )


def test_samples_are_held_or_extended_beyond_the_outermost() -> None:
    assert samples_column().density([0.0, 10.0]) == pytest.approx([860.0, 846.0])
    assert samples_column("extend").density([0.0, 10.0]) == pytest.approx([862.0, 844.5])


@st.composite
def columns(draw: st.DrawFn) -> Column:
    """Layers of sampled, expanding and constant liquids, heaviest below."""
    tops = sorted(draw(st.sets(st.integers(1, 90), max_size=3)))
    temperatures = Temperatures((280.0, 300.0, 295.0), (1.0, 4.0, 7.5))
    layers = []
    for index, top in enumerate([*tops, None]):
        rho = 1100.0 - 80.0 * index
        model = draw(
            st.sampled_from(
                [
                    Constant(rho),
                    Expansion(rho, 288.15, 9e-4),
                    Samples((0.5, 3.0, 8.0), (rho, rho - 8.0, rho - 11.0)),
                ]
            )
        )
        layers.append(Layer(f"layer {index}", model, None if top is None else top / 10.0))
    return column_of_layers(layers, temperatures)


@given(columns(), st.floats(-2.0, 10.0), st.floats(0.0, 10.0))
def test_areal_mass_is_the_integral_of_density(column: Column, low: float, thick: float) -> None:
    high = low + thick
    kinks = [z for z in column.edges_m if low < z < high]
    pieces = zip([low, *kinks], [*kinks, high], strict=True)
    wanted = sum(quad(lambda z: float(column.density(z)), a, b)[0] for a, b in pieces)
    assert column.areal_mass(low, high) == pytest.approx(wanted, rel=1e-9, abs=1e-6)


@given(columns(), st.floats(0.0, 2.0), st.floats(-1.0, 12.0), st.floats(0.0, 20.0))
def test_height_for_is_the_inverse_of_areal_mass(
    column: Column, start: float, height: float, vapour: float
) -> None:
    weight = column.areal_mass(start, height) - vapour * (height - start)
    assert column.height_for(weight, start, vapour) == pytest.approx(height, abs=1e-9)
    as_array = column.height_for(np.array([weight, weight]), start, np.array([vapour, vapour]))
    assert as_array == pytest.approx([height, height], abs=1e-9)


def test_temperatures_between_elements_follow_the_model_closely() -> None:
    temperatures = Temperatures((ICE + 5.0, ICE + 35.0), (0.0, 10.0))
    column = column_of_layers((Layer("water", Water()),), temperatures)
    z = np.linspace(0.0, 10.0, 1001)
    wanted = Water().density(temperatures.at(z))
    assert np.max(np.abs(column.density(z) / wanted - 1.0)) < 2e-7


def test_inverted_density_is_found_where_it_begins() -> None:
    heavy_on_top = column_of_layers(
        (Layer("light", Constant(800.0), 2.0), Layer("heavy", Constant(900.0))), None
    )
    assert heavy_on_top.rising_density_below(5.0, 0.0) == 2.0
    assert heavy_on_top.rising_density_below(1.5, 0.0) is None
    assert samples_column().rising_density_below(10.0, 0.0) is None
    rising = Samples((1.0, 5.0), (850.0, 860.0))
    assert column_of_layers((Layer("x", rising),), None).rising_density_below(4.0, 0.0) == 1.0


def test_extremes_see_both_sides_of_an_interface() -> None:
    stacked = column_of_layers(
        (Layer("water", Constant(1000.0), 0.5), Layer("oil", Constant(850.0))), None
    )
    assert stacked.extremes(0.0, 5.0) == (850.0, 1000.0)
    assert stacked.extremes(0.5, 5.0) == (850.0, 1000.0)
