"""Readings that give the surface without a pressure: level, ullage, volume, mass."""

from __future__ import annotations

import numpy as np

from tankcalc.gauging.case import FloatArray
from tankcalc.gauging.limits_of_sight import ROUNDING_M, refusal
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.under_roof import critical_zone, surface_under_roof
from tankcalc.result import Notice

DIRECT = {
    "level_m": "the level as given fixes the surface; taken as known: the density profile",
    "ullage_m": "the ullage as given fixes the surface; taken as known: the density profile",
    "volume_m3": "the volume as given fixes the surface; taken as known: the tank's geometry and "
    "the density profile",
    "mass_kg": "the mass as given fixes the surface; taken as known: the tank's geometry and the "
    "density profile",
}
"""Fields of such readings, with the basis of an answer that rests on one alone."""


def direct_level(model: Model, name: str) -> tuple[FloatArray, tuple[Notice, ...]]:
    """Return the surface (m) of such a reading, NaN and a refusal where the tank cannot hold it."""
    case = model.case
    vessel, value = case.tank.vessel, np.broadcast_to(case.given[name], case.shape)
    reading = name.rsplit("_", 1)[0]
    low, high, unit = vessel.z_min, vessel.z_max, "m"
    if name == "ullage_m":
        reference = case.tank.ullage_reference_m
        low, high = reference - vessel.z_max, reference - vessel.z_min
    elif name in ("volume_m3", "mass_kg"):
        low, high = ends(model, by_mass=name == "mass_kg")
        unit = name.rsplit("_", 1)[1]
    if name == "mass_kg" and case.column.extremes(vessel.z_min, vessel.z_max)[0] <= 0.0:
        message = (
            "The density profile, carried on beyond its samples, falls to nothing in the tank."
        )
        nan = np.full(case.shape, np.nan)
        return nan, (refusal("density_run_out", message, "fluid"),)
    slack = ROUNDING_M if unit == "m" else 1e-12 * high
    outside = ~((value >= low - slack) & (value <= high + slack))
    held = np.clip(np.where(outside, low, value), low, high)
    if name == "ullage_m":
        level = case.tank.ullage_reference_m - held
    elif name in ("volume_m3", "mass_kg"):
        level = level_of_amount(model, held, by_mass=name == "mass_kg")
    else:
        level = held
    notices: tuple[Notice, ...] = ()
    if np.any(np.isnan(level)):
        unsettled = np.isnan(level) & ~outside
        notices = (critical_zone(model, unsettled, reading),)
    if np.any(outside):
        worst = float(np.ravel(value)[np.ravel(outside)][0])
        message = (
            f"{reading} = {worst:.6g} {unit} is outside what {case.tank.name} can hold "
            f"({low:.6g} to {high:.6g} {unit}). Check the unit."
        )
        notices = (*notices, refusal(f"{reading}_outside", message, reading, outside))
    return np.where(outside, np.nan, level), notices


def ends(model: Model, *, by_mass: bool) -> tuple[float, float]:
    """Return the least and the most that the tank holds: volumes (m3) or masses (kg)."""
    vessel, two = model.case.tank.vessel, np.ones(2)
    state = State(np.array([vessel.z_min, vessel.z_max]), two, two)
    volume, product, water = model.contents(state)
    low, high = product + water if by_mass else volume
    return float(low), float(high)


def level_of_amount(model: Model, amount: FloatArray, *, by_mass: bool) -> FloatArray:
    """Return the surface (m) below which the tank holds volumes (m3) or masses (kg).

    The density is the profile's. NaN where a floating roof is neither afloat nor on its legs.
    """
    if model.case.tank.floating_roof is not None:
        one = np.ones(amount.shape)
        return surface_under_roof(model, State(one, one, one), amount, by_mass=by_mass)
    if by_mass:
        return model.case.filling.level_from_mass(amount)
    return np.asarray(model.case.tank.vessel.level(amount))
