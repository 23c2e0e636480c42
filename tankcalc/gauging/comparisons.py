"""Readings held against each other, and against what the answer foretells."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.estimate import FACTOR
from tankcalc.gauging.groups import Group
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import UNSTATED_DIP_M, observations_of
from tankcalc.gauging.state import Found
from tankcalc.gauging.words import length, listed, pressure
from tankcalc.result import Notice

CHI_SQUARE = (5.024, 7.378, 9.348, 11.143, 12.833, 14.449)
"""Values that chi-square with 1 to 6 degrees of freedom exceeds once in forty times: NIST/SEMATECH
e-Handbook of Statistical Methods, 1.3.6.7.4 (from memory). One false alarm in forty rather than
in twenty: a console asks the question at every reading."""

APART = 3.0
"""A reading that was not needed is called apart beyond this many standard uncertainties."""

DENSITY_WORTH_SAYING = 0.003
"""A measured density nearer to the profile's than this share is not mentioned."""

FRESH_WATER_KG_M3 = 999.0
"""What free water is taken to weigh where a message estimates how much of it there could be."""

UNSTATED_SHARE = 0.003
"""What a volume or a mass that was given may be off by besides its level: the table's and the
density's share (common practice, no source)."""


def where_of(mask: BoolArray) -> BoolArray | None:
    """Return the rows a notice applies to; None for a single reading."""
    return mask if mask.ndim else None


def density_measured(model: Model, found: Found, kept: BoolArray) -> Iterator[Notice]:
    """Compare a density that the readings gave with that of the profile."""
    for group in found.groups:
        if group.fit is None or FACTOR not in group.fit.unknowns:
            continue
        if "density" in {o.name for o in group.used}:
            continue
        uncertainty = group.fit.uncertainty(FACTOR)
        away = group.fit.state.factor - 1.0
        apart = np.zeros(kept.size, dtype=bool)
        apart[group.rows] = np.abs(away) > np.maximum(APART * uncertainty, DENSITY_WORTH_SAYING)
        apart = apart.reshape(kept.shape) & kept
        if not np.any(apart):
            continue
        first = int(np.argmax(np.abs(away)))
        factor = float(group.fit.state.factor[first])
        surface = float(group.fit.state.surface_m[first])
        rho = float(model.product.density(surface))
        message = (
            f"The readings give {factor * rho:.1f} kg/m3 where the profile says {rho:.1f} "
            f"({100.0 * (factor - 1.0):+.2f} %): another batch, another temperature, or"
        )
        yield Notice(
            "density_differs",
            f"{message} {_lookalike(model, group, factor, rho)}.",
            "density",
            where=where_of(apart),
        )


def _lookalike(model: Model, group: Group, factor: float, rho: float) -> str:
    """Return in words what else would look like such a density."""
    names = {o.name for o in group.used}
    if factor < 1.0 or not {"p1", "p2"} <= names or model.water is not None or rho > 990.0:
        return "an instrument that is off"
    taps = model.case.tank.transmitters
    apart_m = taps["p2"].elevation_m - taps["p1"].elevation_m
    water_m = apart_m * (factor - 1.0) * rho / (FRESH_WATER_KG_M3 - rho)
    if water_m > apart_m:
        return "an instrument that is off"
    return (
        f"{water_m:.2f} m of free water above p1, which looks the same: a mixture, not a density. "
        "A water dip would settle it"
    )


def misfit(found: Found, kept: BoolArray) -> Iterator[Notice]:
    """Say so where more readings than unknowns do not agree within their uncertainties."""
    for group in found.groups:
        if group.fit is None or not group.fit.freedom:
            continue
        allowed = CHI_SQUARE[min(group.fit.freedom, len(CHI_SQUARE)) - 1]
        apart = np.zeros(kept.size, dtype=bool)
        apart[group.rows] = group.fit.chi_square > allowed
        apart = apart.reshape(kept.shape) & kept
        if np.any(apart):
            worst = float(np.max(group.fit.chi_square))
            names = listed([o.name for o in group.used])
            yield Notice(
                "disagreement",
                f"{names} do not agree within their uncertainties (chi-square {worst:.1f}, "
                f"at most {allowed:.1f} is ordinary): at least one of them is wrong.",
                group.used[0].name,
                where=where_of(apart),
            )


def unneeded(model: Model, found: Found, state: State, kept: BoolArray) -> Iterator[Notice]:
    """Compare every reading that had no part in the estimate with what the answer foretells."""
    fitted = {o.name for g in found.groups if g.fit is not None for o in g.used}
    g = model.gravity
    for observation in observations_of(model):
        if observation.name in fitted:
            continue
        foretold = observation.expected(state)
        away = observation.value - foretold
        if observation.name in ("level", "ullage"):
            per_metre: FloatArray | float = 1.0
        elif observation.name == "density":
            continue
        else:
            per_metre = g * model.density(state.surface_m, state)
        allowed = APART * np.hypot(observation.uncertainty, UNSTATED_DIP_M * per_metre)
        apart = (np.abs(away) > allowed) & kept
        if np.any(apart):
            first = np.flatnonzero(np.ravel(apart))[0]
            read = float(np.ravel(observation.value)[first])
            wanted = float(np.ravel(foretold)[first])
            shown = pressure if observation.name[0] in "pd" else length
            millimetres = 1000.0 * float(np.ravel(away / per_metre)[first])
            yield Notice(
                "disagreement",
                f"{observation.name} is {shown(read)}; for this answer it should be "
                f"{shown(wanted)} ({millimetres:+.0f} mm of liquid).",
                observation.name,
                where=where_of(apart),
            )
    yield from _amount_apart(model, found, state, kept)


def _amount_apart(model: Model, found: Found, state: State, kept: BoolArray) -> Iterator[Notice]:
    """Compare a volume or a mass that had no part in the estimate with that of the answer."""
    case, vessel = model.case, model.case.tank.vessel
    area = np.asarray(vessel.area(state.surface_m))
    volume, product, water = model.contents(state)
    surface_density = model.density(state.surface_m, state)
    for name, foretold, per_metre in (
        ("volume_m3", volume, area),
        ("mass_kg", product + water, area * surface_density),
    ):
        if name not in case.given or found.by == name:
            continue
        reading = np.broadcast_to(case.given[name], case.shape)
        allowed = APART * UNSTATED_DIP_M * per_metre + UNSTATED_SHARE * foretold
        apart = (np.abs(reading - foretold) > allowed) & kept
        if np.any(apart):
            first = np.flatnonzero(np.ravel(apart))[0]
            what, unit = name.split("_")
            yield Notice(
                "disagreement",
                f"{what} was given as {float(np.ravel(reading)[first]):.6g} {unit}; for this "
                f"answer it is {float(np.ravel(foretold)[first]):.6g} {unit}.",
                what,
                where=where_of(apart),
            )
