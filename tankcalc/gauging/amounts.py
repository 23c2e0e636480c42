"""Level becomes volume, mass and what is left of the tank."""

from __future__ import annotations

import numpy as np

from tankcalc.constants import (
    CONVENTIONAL_AIR_DENSITY_KG_M3,
    CONVENTIONAL_WEIGHT_DENSITY_KG_M3,
)
from tankcalc.gauging.case import Case, FloatArray
from tankcalc.result import LayerShare


def amounts(case: Case, level_m: FloatArray) -> dict[str, FloatArray | None]:
    """Return the figures of a result for surfaces inside the vessel, by their JSON names.

    Parameters
    ----------
    case : Case
        Tank, column and readings.
    level_m : array of any shape
        Surface elevations, m, inside the vessel.
    """
    vessel, tank = case.tank.vessel, case.tank
    volume, moment = vessel.volume_and_moment(level_m)
    mass = case.filling.mass_from(level_m, volume, moment)
    water_volume, water_mass = _free_water(case, level_m)
    product_volume, product_mass = volume - water_volume, mass - water_mass
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
        "vapour_mass_kg": case.vapour_space.density_kg_m3 * empty if vapour else None,
        "weight_in_air_kg": weight_in_air(product_mass, product_volume),
        "density_kg_m3": _mean_density(case, level_m, mass, volume),
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


def _free_water(case: Case, level_m: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return volume (m3) and mass (kg) of the free water below surfaces (m)."""
    top = case.liquid.water_top_m
    if top is None:
        return np.zeros(level_m.shape), np.zeros(level_m.shape)
    vessel = case.tank.vessel
    upper = np.minimum(level_m, min(max(top, vessel.z_min), vessel.z_max))
    volume, moment = vessel.volume_and_moment(upper)
    if case.column.bulk_modulus_pa is None:
        return volume, case.filling.mass_from(upper, volume, moment)
    return volume, case.filling.mass(upper)


def _water_level(case: Case, level_m: FloatArray) -> FloatArray:
    """Return the top of the free water (m), no higher than the surface."""
    top = case.liquid.water_top_m
    assert top is not None
    return np.minimum(level_m, top)


def _mean_density(
    case: Case, level_m: FloatArray, mass_kg: FloatArray, volume_m3: FloatArray
) -> FloatArray:
    """Return mass / volume (kg/m3); in an empty vessel the density at its bottom."""
    at_bottom = case.column.density(np.full(level_m.shape, case.tank.vessel.z_min))
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(volume_m3 > 0.0, mass_kg / volume_m3, at_bottom)


def _volume_to(case: Case, limit: str, volume_m3: FloatArray) -> FloatArray | None:
    """Return the volume (m3) still to come up to a limit; negative above it."""
    at = case.tank.limits_m.get(limit)
    return None if at is None else np.asarray(case.tank.vessel.volume(at)) - volume_m3


def _volume_above(case: Case, limit: str, volume_m3: FloatArray) -> FloatArray | None:
    """Return the volume (m3) above a limit; negative below it."""
    at = case.tank.limits_m.get(limit)
    return None if at is None else volume_m3 - np.asarray(case.tank.vessel.volume(at))


def layer_shares(case: Case, level_m: float) -> tuple[LayerShare, ...]:
    """Return the layers as they lie below one surface (m), from the bottom up."""
    vessel, shares, bottom = case.tank.vessel, [], case.tank.vessel.z_min
    for layer in case.liquid.layers:
        top = level_m if layer.top_m is None else min(layer.top_m, level_m)
        if top <= bottom:
            continue
        volume = float(vessel.volume(top)) - float(vessel.volume(bottom))
        areal = float(case.column.areal_mass(bottom, top))
        shares.append(LayerShare(layer.name, bottom, top, areal / (top - bottom), volume))
        bottom = top
    return tuple(shares)
