"""Where the surface is: which reading fixes it, and what no reading can fix."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tankcalc.gauging.case import BoolArray, Case, FloatArray
from tankcalc.gauging.words import length, pressure
from tankcalc.hydrostatics import surface_from_pressures
from tankcalc.instruments import tap_from_reading
from tankcalc.result import Notice

ROUNDING_M = 1e-9
"""Surfaces this close to an end of the vessel are taken to be there, m."""

WORDS = {
    "level_m": "the level as given",
    "ullage_m": "the ullage as given",
    "volume_m3": "the volume as given and the tank's geometry",
    "mass_kg": "the mass as given, the density profile and the tank's geometry",
}


@dataclass(frozen=True, slots=True)
class Surface:
    """The surface that the readings fix.

    Attributes
    ----------
    level_m : array
        Elevation of the surface, m; NaN where refused.
    by : str
        Field of the reading that fixed it; empty when none did.
    basis : str
        In words, which readings fixed which unknowns.
    notices : tuple of Notice
        Refusals, with the rows they apply to.
    """

    level_m: FloatArray
    by: str
    basis: str
    notices: tuple[Notice, ...] = ()


def find_surface(case: Case) -> Surface:
    """Return the surface, by the first reading that fixes it.

    Level, ullage, volume and mass fix it directly; otherwise the lowest pressure reading does,
    against the pressure above the liquid and the density profile. Readings that are not needed
    are compared with the answer, not averaged into it.
    """
    for name in ("level_m", "ullage_m", "volume_m3", "mass_kg"):
        if name in case.given:
            return _direct(case, name)
    for tag in ("p1", "dp", "p2"):
        if f"{tag}_pa" in case.given:
            return _by_pressure(case, tag)
    nan = np.full(case.shape, np.nan)
    message = (
        "Nothing was given that fixes the surface. Give a level, an ullage, a volume, a mass, "
        f"or the pressure of {' or '.join(case.fitted()) or 'a transmitter'}."
    )
    return Surface(nan, "", "nothing that fixes the surface", (_refusal("not_enough", message),))


def _refusal(code: str, message: str, reading: str = "", where: BoolArray | None = None) -> Notice:
    return Notice(code, message, reading, refuses=True, where=where)


def _direct(case: Case, name: str) -> Surface:
    """Return the surface of a level, ullage, volume or mass."""
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
        notices = (_refusal(f"{reading}_outside", message, reading, outside),)
    return Surface(np.where(outside, np.nan, level), name, WORDS[name], notices)


def _by_pressure(case: Case, tag: str) -> Surface:
    """Return the surface behind the reading of p1, p2 or the differential transmitter."""
    space, g = case.vapour_space, case.conditions.gravity_m_s2
    reading = np.broadcast_to(case.given[f"{tag}_pa"], case.shape)
    if tag == "dp":
        if case.tank.dp is None:
            return _not_fitted(case, tag)
        low_m, high_m = case.tank.dp.high.elevation_m, case.tank.dp.low.elevation_m
        difference = reading - case.line_difference_pa()
        against = "between its two taps"
    else:
        if tag not in case.tank.transmitters:
            return _not_fitted(case, tag)
        transmitter = case.tank.transmitters[tag]
        low_m, high_m = transmitter.elevation_m, space.at_m
        difference = tap_from_reading(transmitter, reading, case.conditions) - space.pressure_pa
        against = {
            "p3": "against p3",
            "vent": "against the outside air at the top of the tank",
            "assumed": "with nothing known of the pressure above the liquid",
        }[space.known_by]
    basis = f"{tag} {against}, with the density profile, fixes the surface"
    if not _lighter_than_liquid(case, low_m, high_m):
        message = "The vapour is as heavy as the liquid: a pressure says nothing of the surface."
        nan = np.full(case.shape, np.nan)
        return Surface(nan, f"{tag}_pa", basis, (_refusal("vapour_too_heavy", message),))
    level = surface_from_pressures(case.column, g, low_m, difference, space.density_kg_m3, high_m)
    level = np.broadcast_to(level, case.shape)
    if tag != "dp" and space.known_by == "assumed":
        return _unknown_blanket(case, tag, basis)
    notices = _contradictions(case, tag, reading, level, low_m, high_m)
    refused = np.zeros(case.shape, dtype=bool)
    for notice in notices:
        refused |= True if notice.where is None else notice.where
    return Surface(np.where(refused, np.nan, level), f"{tag}_pa", basis, notices)


def _lighter_than_liquid(case: Case, low_m: float, high_m: float) -> bool:
    """Return whether the vapour is lighter than any liquid between two elevations."""
    lightest, _ = case.column.extremes(min(low_m, high_m), max(low_m, high_m))
    return bool(np.all(case.vapour_space.density_kg_m3 < lightest))


def _not_fitted(case: Case, tag: str) -> Surface:
    """Refuse a reading of a transmitter that the tank has not got."""
    fitted = ", ".join(case.fitted()) or "none"
    message = f"{case.tank.name} has no {tag} transmitter (fitted: {fitted})."
    nan = np.full(case.shape, np.nan)
    return Surface(
        nan, "", "nothing that fixes the surface", (_refusal("not_fitted", message, tag),)
    )


def _unknown_blanket(case: Case, tag: str, basis: str) -> Surface:
    """Refuse a level under an unknown vapour pressure: it is part of what the tap feels."""
    message = (
        f"{case.tank.name} has a vapour space with a pressure of its own (p3) that was not read: "
        f"1 kPa of it is {length(1000.0 / _metre_of_liquid(case))} of level. Give p3, or a dip."
    )
    nan = np.full(case.shape, np.nan)
    return Surface(nan, f"{tag}_pa", basis, (_refusal("p3_not_read", message, "p3"),))


def _metre_of_liquid(case: Case) -> float:
    """Return the pressure of one metre of the lightest liquid in the tank, Pa."""
    vessel = case.tank.vessel
    lightest, _ = case.column.extremes(vessel.z_min, vessel.z_max)
    return lightest * case.conditions.gravity_m_s2


def _contradictions(
    case: Case,
    tag: str,
    reading: FloatArray,
    level: FloatArray,
    low_m: float,
    high_m: float,
) -> tuple[Notice, ...]:
    """Return the refusals of surfaces that no liquid in this tank can have."""
    vessel, notices = case.tank.vessel, []
    below = ~(level > low_m) & ~np.isnan(level)
    above = (level > vessel.z_max + ROUNDING_M) | np.isnan(level)
    covered = (level > high_m + ROUNDING_M) & ~above
    if np.any(below):
        volume = float(vessel.volume(min(max(low_m, vessel.z_min), vessel.z_max)))
        message = (
            f"{_shown(case, tag, reading, below)} is no more than {tag} shows with liquid just at "
            f"its tap ({_range(case, tag, low_m)}): the level is below {length(low_m)}, the "
            f"volume between {vessel.volume(vessel.z_min):.6g} and {volume:.6g} m3. A dip would "
            "settle it."
        )
        notices.append(_refusal("below_tap", message, tag, below))
    if np.any(above):
        message = (
            f"{_shown(case, tag, reading, above)} is above what a full {case.tank.name} can show "
            f"({_range(case, tag, vessel.z_max)}; empty {_range(case, tag, low_m)}). Check the "
            f"unit, the reference, the elevation of the diaphragm and the density."
        )
        notices.append(_refusal("above_top", message, tag, above))
    if np.any(covered):
        upper = "p3" if tag != "dp" else "the low side of dp"
        message = (
            f"The surface would be above {upper} at {length(high_m)}: {upper} is then under "
            "liquid and the two pressures no longer say where the surface is. Give a dip."
        )
        notices.append(_refusal("p3_covered", message, upper if upper == "p3" else tag, covered))
    return tuple(notices)


def _shown(case: Case, tag: str, reading: FloatArray, where: BoolArray) -> str:
    first = float(np.ravel(reading)[np.ravel(where)][0])
    return f"{tag} = {pressure(first)}"


def _range(case: Case, tag: str, surface_m: float) -> str:
    """Return in words what a transmitter would read with the surface at an elevation."""
    return pressure(float(np.ravel(case.expected(tag, surface_m))[0]))
