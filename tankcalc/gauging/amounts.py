"""Level becomes volume, mass and what is left of the tank."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from tankcalc.constants import (
    CONVENTIONAL_AIR_DENSITY_KG_M3,
    CONVENTIONAL_WEIGHT_DENSITY_KG_M3,
    ICE_POINT_K,
)
from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.standard import Standard, standard
from tankcalc.result import LayerShare, Notice


def amounts(model: Model, state: State, by: str) -> tuple[dict[str, Any], tuple[Notice, ...]]:
    """Return the figures of a result for surfaces inside the vessel, and doubts about them.

    Parameters
    ----------
    model : Model
        Tank, column and readings.
    state : State
        Surfaces inside the vessel, densities and vapour pressures; arrays of any shape.
    by : str
        The reading that the search for the surface began with.

    Returns
    -------
    dict
        Arrays of the readings' shape by JSON name, floats where the figure is one of all rows,
        None where it cannot be known.
    tuple of Notice
    """
    case, level_m = model.case, state.surface_m
    vessel, tank = case.tank.vessel, case.tank
    volume, product_mass, water_mass = model.contents(state)
    water_volume = free_water_m3(case, level_m)
    product_volume, mass = volume - water_volume, product_mass + water_mass
    has_water = case.liquid.water_top_m is not None
    vapour = tank.vapour or case.fluid.vapour
    at_base = standard(model, state, product_volume, product_mass)
    known = {
        "level_m": level_m,
        "ullage_m": tank.ullage_reference_m - level_m,
        "fill": volume / vessel.capacity,
        "water_level_m": _water_level(case, level_m) if has_water else None,
        "water_volume_m3": water_volume if has_water else None,
        "volume_m3": volume,
        "product_volume_m3": product_volume,
        "mass_kg": mass,
        "product_mass_kg": product_mass,
        "vapour_mass_kg": model.vapour_mass(state) if vapour else None,
        "weight_in_air_kg": _weight(product_mass, product_volume, at_base),
        "density_kg_m3": _mean_density(model, state, mass, volume),
        "ctsh": case.shell.factor,
        "room_m3": _room(model, state, volume),
        "pumpable_m3": _pumpable(model, state, volume),
    }
    figures = known | _at_base(case, at_base) | _heel(model, state, by)
    return figures, (*at_base.notices, *_unused(case, at_base))


def _unused(case: Case, at_base: Standard) -> Iterator[Notice]:
    """Say so where sediment and water were given and there is nothing to take them off."""
    if case.readings.sediment_water is not None and at_base.volume_m3 is None:
        message = (
            "Sediment and water come off the standard volume, which this liquid has none of: no "
            "figure is net of them."
        )
        yield Notice("sediment_water_unused", message, "sediment_water")


def _at_base(case: Case, at_base: Standard) -> dict[str, Any]:
    """Return the figures of the product at its base temperature, net of sediment and water."""
    net: FloatArray | None = None
    if at_base.volume_m3 is not None and case.readings.sediment_water is not None:
        net = at_base.volume_m3 * (1.0 - case.readings.sediment_water)
    dense = at_base.density_kg_m3
    net_mass = None if net is None or dense is None else net * dense
    return {
        "standard_volume_m3": at_base.volume_m3,
        "net_standard_volume_m3": net,
        "net_mass_kg": net_mass,
        "net_weight_in_air_kg": None
        if net is None or net_mass is None
        else weight_in_air(net_mass, net),
        "reference_temperature_c": None
        if at_base.base_k is None
        else round(at_base.base_k - ICE_POINT_K, 9),
        "reference_density_kg_m3": dense,
        "ctl": at_base.ctl,
        "cpl": None if at_base.ctl is None else case.liquid.pressure_factor,
    }


def _weight(mass_kg: FloatArray, volume_m3: FloatArray, at_base: Standard) -> FloatArray:
    """Return the product's weight in air; the trade weighs it at its base temperature."""
    return weight_in_air(mass_kg, volume_m3 if at_base.volume_m3 is None else at_base.volume_m3)


def _heel(model: Model, state: State, by: str) -> dict[str, FloatArray | None]:
    """Return what lies below the tap that the answer rests on: assumed, not measured."""
    case = model.case
    taps = {tag: t.elevation_m for tag, t in case.tank.transmitters.items()}
    if case.tank.dp is not None:
        taps["dp"] = case.tank.dp.high.elevation_m
    if by not in taps or taps[by] <= case.tank.vessel.z_min:
        return {"heel_volume_m3": None, "heel_mass_kg": None}
    tap = np.minimum(min(taps[by], case.tank.vessel.z_max), state.surface_m)
    volume, product, water = model.without_roof().contents(replace(state, surface_m=tap))
    under_load = case.tank.vessel.volume_below(tap, state.surface_m)
    with np.errstate(invalid="ignore"):
        wider = np.where(volume > 0.0, under_load / volume, 1.0)
    return {"heel_volume_m3": under_load, "heel_mass_kg": wider * (product + water)}


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


def free_water_m3(case: Case, level_m: FloatArray) -> FloatArray:
    """Return the volume (m3) of the free water below surfaces (m)."""
    top = case.liquid.water_top_m
    if top is None:
        return np.zeros(level_m.shape)
    vessel = case.tank.vessel
    upper = np.minimum(level_m, min(max(top, vessel.z_min), vessel.z_max))
    return np.asarray(vessel.volume_below(upper, level_m))


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


def _at_limit(model: Model, state: State, limit: str) -> FloatArray | None:
    """Return the volume (m3) that the tank holds at a limit."""
    at = model.case.tank.limits_m.get(limit)
    if at is None:
        return None
    return model.volume(replace(state, surface_m=np.full(state.surface_m.shape, at)))


def _room(model: Model, state: State, volume_m3: FloatArray) -> FloatArray | None:
    """Return the volume (m3) still to come up to the maximum working level; negative above it."""
    held = _at_limit(model, state, "maximum_working")
    return None if held is None else held - volume_m3


def _pumpable(model: Model, state: State, volume_m3: FloatArray) -> FloatArray | None:
    """Return the volume (m3) above the minimum working level; negative below it."""
    held = _at_limit(model, state, "minimum_working")
    return None if held is None else volume_m3 - held


def layer_shares(model: Model, state: State) -> tuple[LayerShare, ...]:
    """Return the layers as they lie below the surface of a state of one row, from the bottom up."""
    case, level = model.case, float(state.surface_m)
    vessel, shares, bottom = case.tank.vessel, [], case.tank.vessel.z_min
    for index, layer in enumerate(case.liquid.layers):
        top = level if layer.top_m is None else min(layer.top_m, level)
        if top <= bottom:
            continue
        ends = vessel.volume_below(np.array([bottom, top]), np.asarray(level))
        volume = float(ends[1] - ends[0])
        is_water = index == 0 and case.liquid.water_top_m is not None
        factor = 1.0 if is_water else float(state.factor)
        density = factor * float(case.column.areal_mass(bottom, top)) / (top - bottom)
        shares.append(LayerShare(layer.name, bottom, top, density, volume))
        bottom = top
    return tuple(shares)
