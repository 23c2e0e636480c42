"""The density at the base temperature behind an observed one: Newton's method, for arrays."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np

from tankcalc.fluids.models import FloatArray

REACH_KG_M3 = 1.0
"""How far beyond its limits a search may go: what it finds there is refused by its caller."""

SETTLED_KG_M3 = 1e-6
"""A step this small was the last: the error after it is of the order of its square."""

LEAST_SLOPE = 0.05
"""What a slope counts as at least: below it a search heads for the limit and is refused there."""

STEPS = 40


class Response(NamedTuple):
    """Density (kg/m3) a base density comes to, and d ln(density) / d ln(base density)."""

    density_kg_m3: FloatArray
    slope: FloatArray


def step(
    response: Response, base_kg_m3: FloatArray, wanted: FloatArray, limits: tuple[float, float]
) -> FloatArray:
    """Return a better base density, kept within ``REACH_KG_M3`` of the limits."""
    slope = np.maximum(response.slope, LEAST_SLOPE)
    moved = base_kg_m3 * (1.0 + (wanted / response.density_kg_m3 - 1.0) / slope)
    return np.clip(moved, limits[0] - REACH_KG_M3, limits[1] + REACH_KG_M3)


def settle(
    respond: Callable[[FloatArray], Response],
    start_kg_m3: FloatArray,
    wanted: FloatArray,
    limits: tuple[float, float],
) -> FloatArray:
    """Return the base densities (kg/m3) that answer to the wanted ones; NaN where none does.

    Parameters
    ----------
    respond : callable
        Density and slope of a base density.
    start_kg_m3, wanted : array
        First guess and observed density, kg/m3, of one shape.
    limits : (float, float)
        Base densities between which answers lie, kg/m3. One found up to 1 kg/m3 beyond is still
        given, for the caller to refuse.
    """
    rho = start_kg_m3
    for _ in range(STEPS):
        better = step(respond(rho), rho, wanted, limits)
        moved = np.abs(better - rho)
        rho = better
        if np.all(moved <= SETTLED_KG_M3):
            return rho
    return np.where(moved <= SETTLED_KG_M3, rho, np.nan)
