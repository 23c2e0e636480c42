"""What no pressure can show: surfaces below the tap, above the top, above the upper tap."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import pressure_uncertainty
from tankcalc.gauging.words import length, pressure
from tankcalc.instruments import DifferentialTransmitter
from tankcalc.result import Bounds, Notice

TELLING = 3.0
"""A surface within this many standard uncertainties of a tap cannot be told from a bare tap."""

ROUNDING_M = 1e-9
"""Surfaces this close to an end of the vessel are taken to be there, m."""


def refusal(
    code: str,
    message: str,
    reading: str = "",
    where: BoolArray | None = None,
    bounds: Bounds | None = None,
) -> Notice:
    """Return a notice that refuses, with bounds where physics gives them."""
    return Notice(code, message, reading, refuses=True, where=where, bounds=bounds)


def contradictions(model: Model, tag: str, state: State, unknown: BoolArray) -> tuple[Notice, ...]:
    """Return the refusals of surfaces that no liquid in this tank can have.

    Parameters
    ----------
    tag : str
        The pressure that the surface rests on: "p1", "p2" or "dp".
    state : State
        What the readings give, beyond the ends of the vessel too.
    unknown : array of bool
        Rows for which the profile's density never weighs enough.
    """
    return tuple(_contradictions(model, tag, state, unknown))


def sight_m(model: Model, tag: str, state: State) -> FloatArray:
    """Return how well a pressure tells a surface near its tap: its standard uncertainty, m.

    Zero where the accuracy of the transmitter is not stated: nothing is then known of it.
    """
    case, dp = model.case, model.case.tank.dp
    fitted = dp if tag == "dp" and dp is not None else case.tank.transmitters[tag]
    if fitted.accuracy is None:
        return np.zeros(())
    reading = np.broadcast_to(case.given[f"{tag}_pa"], case.shape)
    if isinstance(fitted, DifferentialTransmitter):
        tap_m = fitted.high.elevation_m
    else:
        tap_m = fitted.elevation_m
    per_metre = model.gravity * model.density(np.full(case.shape, tap_m), state)
    return np.asarray(pressure_uncertainty(case, fitted, reading) / per_metre)


def _contradictions(model: Model, tag: str, state: State, unknown: BoolArray) -> Iterator[Notice]:
    case, level = model.case, state.surface_m
    vessel, dp = case.tank.vessel, case.tank.dp
    reading = np.broadcast_to(case.given[f"{tag}_pa"], case.shape)
    if tag == "dp":
        assert dp is not None
        low_m, high_m, upper = dp.high.elevation_m, dp.low.elevation_m, "the low side of dp"
    else:
        low_m, high_m = case.tank.transmitters[tag].elevation_m, model.vapour_at_m
        upper = "p3"
    near = TELLING * sight_m(model, tag, state)
    above = (level > vessel.z_max + ROUNDING_M) | unknown
    below = ~(level > low_m + near) & ~unknown
    # A tap at the top of the vessel is covered by no level there is.
    margin = near if high_m < vessel.z_max - ROUNDING_M else -ROUNDING_M
    covered = (level > high_m - margin) & ~above & ~below

    def would_read(surface_m: float) -> str:
        at = State(np.full(case.shape, surface_m), np.ones(case.shape), state.vapour_pa)
        return pressure(float(np.ravel(model.expected(tag, at))[0]))

    if np.any(below):
        edge = low_m + float(np.max(near))
        bounds = bounds_between(model, vessel.z_min, min(max(edge, vessel.z_min), vessel.z_max))
        low, high = bounds["volume_m3"]
        message = (
            f"{_shown(tag, reading, below)} is no more than {tag} shows with liquid just at its "
            f"tap ({would_read(low_m)}): the level is below {length(edge)}, the volume between "
            f"{low:.6g} and {high:.6g} m3. A dip would settle it."
        )
        yield refusal("below_tap", message, tag, below, bounds)
    if np.any(above):
        message = (
            f"{_shown(tag, reading, above)} is above what a full {case.tank.name} can show "
            f"({would_read(vessel.z_max)}; empty {would_read(low_m)}). Check the unit, the "
            "reference, the elevation of the diaphragm and the density."
        )
        yield refusal("above_top", message, tag, above)
    if np.any(covered):
        bounds = bounds_between(
            model, max(high_m - float(np.max(near)), vessel.z_min), vessel.z_max
        )
        message = (
            f"The surface would be at {upper}, {length(high_m)}, or above: {upper} is then under "
            "liquid and the two pressures no longer say where the surface is. Give a dip."
        )
        yield refusal("p3_covered", message, "p3" if tag != "dp" else tag, covered, bounds)


def unread_blanket(model: Model, level_at: tuple[float, float] | None) -> Notice:
    """Refuse a level under an unread pressure above the liquid, bounded by its relief valves.

    Parameters
    ----------
    level_at : (float, float) or None
        Surfaces (m) that the reading means at the vacuum and the relief setting; None where the
        tank file states none.
    """
    case = model.case
    vessel = case.tank.vessel
    lightest, _ = case.column.extremes(vessel.z_min, vessel.z_max)
    per_kpa = length(1000.0 / (lightest * model.gravity))
    message = (
        f"{case.tank.name} has a vapour space with a pressure of its own that was not read: 1 kPa "
        f"of it is {per_kpa} of level. Give {'p3' if 'p3' in case.fitted() else 'dp'}, or a dip."
    )
    if level_at is None:
        return refusal("p3_not_read", message, "p3")
    low, high = sorted(min(max(z, vessel.z_min), vessel.z_max) for z in level_at)
    message += f" Between its vacuum and relief settings: {length(low)} to {length(high)}."
    return refusal("p3_not_read", message, "p3", bounds=bounds_between(model, low, high))


def bounds_between(model: Model, low_m: float, high_m: float) -> Bounds:
    """Return what the tank holds at least and at most, for surfaces between two elevations (m)."""
    two = np.ones(2)
    volume, product, water = model.contents(State(np.array([low_m, high_m]), two, two))
    mass = product + water
    return {
        "level_m": (low_m, high_m),
        "volume_m3": (float(volume[0]), float(volume[1])),
        "mass_kg": (float(mass[0]), float(mass[1])),
    }


def _shown(tag: str, reading: FloatArray, where: BoolArray) -> str:
    first = float(np.ravel(reading)[np.ravel(where)][0])
    return f"{tag} = {pressure(first)}"
