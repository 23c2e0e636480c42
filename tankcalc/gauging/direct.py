"""Readings that give the surface without a pressure: level, ullage, volume, mass."""

from __future__ import annotations

import numpy as np

from tankcalc.gauging.case import FloatArray
from tankcalc.gauging.limits_of_sight import ROUNDING_M, refusal
from tankcalc.gauging.model import Model
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
    elif name == "volume_m3":
        low, high, unit = float(vessel.volume(vessel.z_min)), vessel.capacity, "m3"
    elif name == "mass_kg":
        ends = case.filling.mass(np.array([vessel.z_min, vessel.z_max]))
        low, high, unit = float(ends[0]), float(ends[1]), "kg"
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
    elif name == "volume_m3":
        level = np.asarray(vessel.level(held))
    elif name == "mass_kg":
        level = case.filling.level_from_mass(held)
    else:
        level = held
    notices: tuple[Notice, ...] = ()
    if np.any(outside):
        worst = float(np.ravel(value)[np.ravel(outside)][0])
        message = (
            f"{reading} = {worst:.6g} {unit} is outside what {case.tank.name} can hold "
            f"({low:.6g} to {high:.6g} {unit}). Check the unit."
        )
        notices = (refusal(f"{reading}_outside", message, reading, outside),)
    return np.where(outside, np.nan, level), notices
