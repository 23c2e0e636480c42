"""Level becomes volume, mass and what is left of the tank."""

from __future__ import annotations

import numpy as np

from tankcalc.constants import (
    CONVENTIONAL_AIR_DENSITY_KG_M3,
    CONVENTIONAL_WEIGHT_DENSITY_KG_M3,
)
from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.model import Model, State
from tankcalc.result import LayerShare


def amounts(model: Model, state: State) -> dict[str, FloatArray | None]:
    """Return the figures of a result for surfaces inside the vessel, by their JSON names.

    Parameters
    ----------
    model : Model
        Tank, column and readings.
    state : State
        Surfaces inside the vessel, densities and vapour pressures; arrays of any shape.
    """
    case, level_m = model.case, state.surface_m
    vessel, tank = case.tank.vessel, case.tank
    volume, product_mass, water_mass = model.contents(state)
    water_volume = _free_water(case, level_m)
    product_volume, mass = volume - water_volume, product_mass + water_mass
    has_water = case.liquid.water_top_m is not None
    vapour = tank.vapour or case.fluid.vapour
    empty = vessel.capacity - volume
    return {
        "level_m": level_m,
        "ullage_m": tank.ullage_reference_m - level_m,
        "fill": volume / vessel.capacity,
        "water_level_m": _water_level(case, level_m) if has_water else None,
        "water_volume_m3": water_volume if has_water else None,
        "volume_m3": volume,
        "product_volume_m3": product_volume,
        "mass_kg": mass,
        "product_mass_kg": product_mass,
        "vapour_mass_kg": model.vapour_density(state.vapour_pa) * empty if vapour else None,
        "weight_in_air_kg": weight_in_air(product_mass, product_volume),
        "density_kg_m3": _mean_density(model, state, mass, volume),
        "room_m3": _volume_to(case, "maximum_working", volume),
        "pumpable_m3": _volume_above(case, "minimum_working", volume),
    }


def weight_in_air(mass_kg: FloatArray, volume_m3: FloatArray) -> FloatArray:
    """Return the apparent mass (kg) of a liquid against reference weights in conventional air.

    Notes
    -----
    W = m (1 - ra / rho) / (1 - ra / rw) with ra = 1.2 kg/m3 and rw = 8000 kg/m3, the
    conventional values of OIML D 28 (2004). With rho = m / V the buoyancy of the liquid is
    ra V, so that an empty tank weighs nothing.

    Examples
    --------
    >>> import numpy as np
    >>> round(float(weight_in_air(np.array(850.0), np.array(1.0))) / 850.0, 6)
    0.998738
    """
    buoyancy = CONVENTIONAL_AIR_DENSITY_KG_M3 * volume_m3
    weights = 1.0 - CONVENTIONAL_AIR_DENSITY_KG_M3 / CONVENTIONAL_WEIGHT_DENSITY_KG_M3
    return np.asarray((mass_kg - buoyancy) / weights)


def _free_water(case: Case, level_m: FloatArray) -> FloatArray:
    """Return the volume (m3) of the free water below surfaces (m)."""
    top = case.liquid.water_top_m
    if top is None:
        return np.zeros(level_m.shape)
    vessel = case.tank.vessel
    upper = np.minimum(level_m, min(max(top, vessel.z_min), vessel.z_max))
    return np.asarray(vessel.volume(upper))


def _water_level(case: Case, level_m: FloatArray) -> FloatArray:
    """Return the top of the free water (m), no higher than the surface."""
    top = case.liquid.water_top_m
    assert top is not None
    return np.minimum(level_m, top)


def _mean_density(
    model: Model, state: State, mass_kg: FloatArray, volume_m3: FloatArray
) -> FloatArray:
    """Return mass / volume (kg/m3); in an empty vessel the density at its bottom."""
    bottom = np.full(state.surface_m.shape, model.case.tank.vessel.z_min)
    with np.errstate(divide="ignore", invalid="ignore"):
        mean = mass_kg / volume_m3
    return np.where(volume_m3 > 0.0, mean, model.density(bottom, state))


def _volume_to(case: Case, limit: str, volume_m3: FloatArray) -> FloatArray | None:
    """Return the volume (m3) still to come up to a limit; negative above it."""
    at = case.tank.limits_m.get(limit)
    return None if at is None else np.asarray(case.tank.vessel.volume(at)) - volume_m3


def _volume_above(case: Case, limit: str, volume_m3: FloatArray) -> FloatArray | None:
    """Return the volume (m3) above a limit; negative below it."""
    at = case.tank.limits_m.get(limit)
    return None if at is None else volume_m3 - np.asarray(case.tank.vessel.volume(at))


def layer_shares(model: Model, state: State) -> tuple[LayerShare, ...]:
    """Return the layers as they lie below the surface of a state of one row, from the bottom up."""
    case, level = model.case, float(state.surface_m)
    vessel, shares, bottom = case.tank.vessel, [], case.tank.vessel.z_min
    for index, layer in enumerate(case.liquid.layers):
        top = level if layer.top_m is None else min(layer.top_m, level)
        if top <= bottom:
            continue
        volume = float(vessel.volume(top)) - float(vessel.volume(bottom))
        is_water = index == 0 and case.liquid.water_top_m is not None
        factor = 1.0 if is_water else float(state.factor)
        density = factor * float(case.column.areal_mass(bottom, top)) / (top - bottom)
        shares.append(LayerShare(layer.name, bottom, top, density, volume))
        bottom = top
    return tuple(shares)
