"""dp/dz = -rho g: pressures, masses and surfaces of columns in vessels."""

from __future__ import annotations

import math

import numpy as np
import pytest
from published import Published, published
from scipy.integrate import quad
from tanks import single, stacked

from tankcalc.constants import GAS_CONSTANT_J_MOL_K
from tankcalc.errors import RangeError
from tankcalc.fluids.column import Column, column_of
from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.samples import Samples
from tankcalc.geometry import FlatEnd, sphere, vertical_cylinder
from tankcalc.hydrostatics import Filling, head_pa, surface_from_pressures
from tankcalc.instruments import Conditions, Purge, Transmitter, sensor_from_tap

G = 9.80665


def soft(density: float, modulus: float) -> Column:
    return column_of(single(Expansion(density, 288.15, 0.0, bulk_modulus_pa=modulus)), None)


@pytest.mark.parametrize("row", published("hydrostatics.csv"), ids=str)
def test_published_columns(row: Published) -> None:
    data = row.inputs
    if "K_Pa" in data:
        column = soft(data["rho0"], data["K_Pa"])
        row.agrees(float(head_pa(column, data["g"], 0.0, data["depth_m"])))
    elif "layers" in data:
        (oil, oil_depth), (water, water_depth) = data["layers"]
        column = column_of(stacked((float(water), water_depth), (float(oil), None)), None)
        row.agrees(float(head_pa(column, data["g"], 0.0, water_depth + oil_depth)))
    else:
        # The row takes an older gas constant: the molar mass is brought to ours.
        molar_mass = data["M"] * GAS_CONSTANT_J_MOL_K / data["R"]
        line = Purge(sensor_elevation_m=0.0, molar_mass_kg_mol=molar_mass)
        around = Conditions(data["g"], 1.2, data["p_top_Pa"], data["t_C"] + 273.15)
        bottom = sensor_from_tap(Transmitter("p1", data["height_m"], "absolute", leg=line),
                                 data["p_top_Pa"], around)  # fmt: skip
        row.agrees(float(bottom - data["p_top_Pa"]))


@pytest.mark.parametrize(
    ("modulus", "density", "depth", "excess_percent"),
    [(1.5e9, 850.0, 20.0, 0.0111), (3e8, 500.0, 15.0, 0.0245)],
)
def test_density_at_the_bottom_of_a_compressed_column(
    modulus: float, density: float, depth: float, excess_percent: float
) -> None:
    # Values by direct integration of d rho / d p = rho / K.
    pressure = float(head_pa(soft(density, modulus), 9.81, 0.0, depth))
    bottom = density * math.exp(pressure / modulus)
    assert 100.0 * (bottom / density - 1.0) == pytest.approx(excess_percent, abs=6e-5)


def test_a_compressed_column_gives_its_surface_back() -> None:
    column = soft(500.0, 3e8)
    vapour = np.array([0.0, 16.0])
    surface = 11.3
    pressure = head_pa(column, 9.81, 0.5, surface) + 9.81 * vapour * (12.0 - surface)
    found = surface_from_pressures(column, 9.81, 0.5, pressure, vapour, 12.0)
    assert found == pytest.approx([surface, surface], abs=1e-10)


def test_compressed_mass_in_a_sphere_agrees_with_quadrature() -> None:
    column, vessel, top = soft(500.0, 3e8), sphere(12.0), 9.3

    def per_metre(z: float) -> float:
        rho = 500.0 / (1.0 - 9.81 * 500.0 * (top - z) / 3e8)
        return float(vessel.area(z)) * rho

    wanted = quad(per_metre, 0.0, top, epsabs=0.0, epsrel=1e-12)[0]
    filling = Filling(vessel, column, 9.81)
    assert filling.mass(top) == pytest.approx(wanted, rel=1e-9)
    assert filling.mass(np.array([2.0, top]))[1] == pytest.approx(wanted, rel=1e-9)


def test_mass_of_a_sampled_column_in_a_sphere_agrees_with_a_published_style_check() -> None:
    # Sphere of 5 m radius filled to 8 m, rho = 870 - 4 z: 399 577.1 kg by quadrature.
    sampled = Samples((0.0, 10.0), (870.0, 830.0))
    filling = Filling(sphere(10.0), column_of(single(sampled), None), 9.81)
    assert filling.mass(8.0) == pytest.approx(399_577.1, abs=0.05)
    wrong = 0.5 * (870.0 + 838.0) * 469.1445
    assert wrong / float(filling.mass(8.0)) - 1.0 == pytest.approx(0.00268, abs=2e-5)


def test_level_from_mass_is_the_inverse_of_mass() -> None:
    column = column_of(stacked((1000.0, 0.5), (Samples((1.0, 9.0), (860.0, 846.0)), None)), None)
    filling = Filling(sphere(10.0), column, 9.81)
    levels = np.array([[0.0, 1e-4, 0.3], [0.5, 7.0, 10.0]])
    found = filling.level_from_mass(filling.mass(levels))
    assert found == pytest.approx(levels, abs=1e-7)  # flat at the very top of a sphere
    assert filling.mass(found) == pytest.approx(filling.mass(levels), rel=1e-13)


def test_level_from_mass_refuses_more_than_fits() -> None:
    vessel = vertical_cylinder([(2.0, 1.0)], FlatEnd(), FlatEnd())
    filling = Filling(vessel, column_of(single(1000.0), None), 9.81)
    with pytest.raises(RangeError, match="fit into the tank"):
        filling.level_from_mass(2000.0)
    with pytest.raises(RangeError):
        filling.level_from_mass(np.array([100.0, math.nan]))


def test_water_bottom_of_a_column_counts_in_the_pressure() -> None:
    # 0.4 m of water and 11.5 m of oil above the tap: 99 816.75 Pa, by hand.
    column = column_of(stacked((1000.0, 0.5), (850.0, None)), None)
    assert head_pa(column, 9.81, 0.1, 12.0) == pytest.approx(99_816.75, abs=1e-6)
    one_density = column_of(single(850.0), None)
    level = surface_from_pressures(one_density, 9.81, 0.1, 99_816.75, 0.0, 15.0)
    assert level - 12.0 == pytest.approx(0.0706, abs=5e-5)
