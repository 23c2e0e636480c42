"""A floating roof: what it displaces and weighs, afloat, on its legs, and in between."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from tankcalc.gauging.case import FloatArray

if TYPE_CHECKING:
    from tankcalc.gauging.model import Model, State


def displacement_m3(mass_kg: npt.ArrayLike, density_kg_m3: npt.ArrayLike) -> FloatArray:
    """Return the liquid (m3) that a floating roof displaces.

    Parameters
    ----------
    mass_kg : array
        Mass of the roof with what lies on it, kg; both in vacuum, or both against weights in air.
    density_kg_m3 : array
        Density of the liquid that it floats in, at tank temperature, kg/m3.

    Examples
    --------
    >>> round(float(displacement_m3(150_000.0, 850.0)), 3)
    176.471
    """
    return np.asarray(np.asarray(mass_kg) / np.asarray(density_kg_m3))


def roof_adjustment_m3(
    mass_kg: float, density_kg_m3: npt.ArrayLike, included_at_kg_m3: float | None = None
) -> FloatArray:
    """Return what the roof adds to the volume that the table gives at a level, m3.

    Notes
    -----
    -m / rho where the table knows nothing of the roof; m (1 / rho_table - 1 / rho) where it
    allows for it at a density (floating-roof adjustment, API MPMS 12.1.1; from memory).

    Examples
    --------
    >>> round(float(roof_adjustment_m3(150_000.0, 780.0, included_at_kg_m3=850.0)), 3)
    -15.837
    """
    adjustment = -displacement_m3(mass_kg, density_kg_m3)
    if included_at_kg_m3 is not None:
        adjustment = adjustment + mass_kg / included_at_kg_m3
    return np.asarray(adjustment)


def less_roof(
    model: Model, state: State, volume_m3: FloatArray, product_kg: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return volume (m3) and mass (kg) of the liquid below a surface, less the roof in it.

    Parameters
    ----------
    volume_m3, product_kg : array
        As the table and the density profile give them, up to the surface.

    Notes
    -----
    A floating roof displaces its own mass. A table that allows for the roof has taken its volume
    off between landing and floating: there it is put back first, at the density found there. In
    the critical zone the share that floats is taken to grow evenly; no answer rests on it.
    """
    roof = model.case.tank.floating_roof
    if roof is None:
        return volume_m3, product_kg
    span = roof.floats_at_m - roof.lands_at_m
    share = np.clip((state.surface_m - roof.lands_at_m) / span, 0.0, 1.0)
    rho = model.density(state.surface_m, state)
    with np.errstate(divide="ignore"):
        added = roof_adjustment_m3(roof.mass_kg, rho, roof.included_at_kg_m3)
    weight = np.broadcast_to(-roof.mass_kg, state.surface_m.shape)
    if roof.included_at_kg_m3 is not None:
        where = np.full(state.surface_m.shape, 0.5 * (roof.lands_at_m + roof.floats_at_m))
        weight = weight + roof.mass_kg / roof.included_at_kg_m3 * model.density(where, state)
    return volume_m3 + share * added, product_kg + share * weight
