"""Gravity, outside air and its pressure, at one site."""

from __future__ import annotations

from tankcalc.surroundings.air import moist_air_density, standard_pressure, standard_temperature
from tankcalc.surroundings.gravity import GRS80, WGS84, Ellipsoid, normal_gravity
from tankcalc.surroundings.site import Surroundings, surroundings

__all__ = [
    "GRS80",
    "WGS84",
    "Ellipsoid",
    "Surroundings",
    "moist_air_density",
    "normal_gravity",
    "standard_pressure",
    "standard_temperature",
    "surroundings",
]
