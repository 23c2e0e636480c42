"""Density models made of what their tables in a fluid file hold; each imports its own module."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tankcalc.profiles.tables import Values

if TYPE_CHECKING:
    from tankcalc.fluids.models import DensityModel


def constant(values: Values) -> DensityModel:
    """Return one density at any temperature."""
    from tankcalc.fluids.constant import Constant

    return Constant(values["value"])


def expansion(values: Values) -> DensityModel:
    """Return a reference density with a coefficient of expansion."""
    from tankcalc.fluids.expansion import Expansion

    return Expansion(
        values["reference"], values["at"], values["coefficient"], values["bulk_modulus"]
    )


def table(values: Values) -> DensityModel:
    """Return a table over temperature."""
    from tankcalc.fluids.table import Table

    temperatures, densities = zip(*values["points"], strict=True)
    return Table(temperatures, densities)


def water(values: Values) -> DensityModel:
    """Return fresh or sea water."""
    from tankcalc.fluids.water import Water

    return Water(values["salinity"])


def petroleum(values: Values) -> DensityModel:
    """Return a petroleum liquid of one product group."""
    from tankcalc.fluids.petroleum import Petroleum

    return Petroleum(
        values["group"],
        values["reference"],
        values["at"],
        values["edition"],
        values["expansion"],
    )


def ethanol(values: Values) -> DensityModel:
    """Return a mixture of ethanol and water."""
    from tankcalc.fluids.ethanol import Ethanol

    return Ethanol(values["mass_fraction"])


def solution(values: Values) -> DensityModel:
    """Return one concentration of the user's grid."""
    from tankcalc.fluids.solution import Grid, Solution

    cells = values["grid"]
    grid = Grid(
        tuple(cells["concentrations"]),
        tuple(cells["temperatures"]),
        tuple(map(tuple, cells["densities"])),
        values["grid_source"],
        values["grid_date"],
    )
    return Solution(values["concentration"], grid)


def liquefied_gas(values: Values) -> DensityModel:
    """Return a liquefied gas by the method named, or by the one that suits its composition."""
    from tankcalc.fluids import liquefied_gas as refrigerated

    pairs = values["composition"]
    of_methane = dict(pairs).get("methane", 0.0) >= refrigerated.LEAST_METHANE
    method = values["method"] or (refrigerated.METHOD if of_methane else None)
    if method == refrigerated.METHOD:
        return refrigerated.LiquefiedGas(pairs)
    from tankcalc.fluids.saturated import Saturated

    return Saturated(pairs)


def constituents(values: Values) -> DensityModel:
    """Return a foodstuff by its constituents."""
    from tankcalc.fluids.constituents import Constituents

    return Constituents(values["mass_fractions"])


def samples(values: Values) -> DensityModel:
    """Return densities at elevations."""
    from tankcalc.fluids.samples import Samples

    elevations, densities = zip(*values["points"], strict=True)
    return Samples(elevations, densities, values["beyond"])
