"""States that no tank can be in, and readings that leave the state open."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from tankcalc.gauging.beginning import level_behind
from tankcalc.gauging.case import BoolArray
from tankcalc.gauging.estimate import FACTOR
from tankcalc.gauging.groups import Group
from tankcalc.gauging.limits_of_sight import ROUNDING_M, refusal, unread_blanket
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.words import listed
from tankcalc.result import Notice

LIGHTEST, HEAVIEST = 0.6, 1.6
"""Measured densities beyond these shares of the profile's are taken for a fault, not a density:
two liquids that share a tank farm are rarely further apart (common practice, no source)."""


def outside(model: Model, state: State, unknown: BoolArray) -> Iterator[Notice]:
    """Refuse rows whose readings together put the surface outside the vessel."""
    vessel = model.case.tank.vessel
    slack = ROUNDING_M
    out = (state.surface_m < vessel.z_min - slack) | (state.surface_m > vessel.z_max + slack)
    out = (out | np.isnan(state.surface_m)) & ~unknown
    if np.any(out):
        message = "The readings together put the surface outside the tank: one of them is wrong."
        yield refusal("surface_outside", message, where=out)


def too_light(model: Model, state: State, unknown: BoolArray) -> Iterator[Notice]:
    """Refuse rows in which an extended density profile has run out below the surface."""
    vessel, slack = model.case.tank.vessel, 1e-9
    anywhere, _ = model.case.column.extremes(vessel.z_min, vessel.z_max)
    rv = model.vapour_density(state.vapour_pa)
    if anywhere * float(np.min(state.factor, initial=1.0)) > float(np.max(rv, initial=0.0)):
        return  # nowhere in the vessel does the profile run out
    surface = np.where(np.isnan(state.surface_m), vessel.z_min, state.surface_m)
    lightest = np.minimum(model.density(surface - slack, state), model.density(surface, state))
    light = ~(lightest > rv) & ~unknown & ~np.isnan(state.surface_m)
    if np.any(light):
        message = (
            "The density profile, carried on beyond its samples, falls to that of the vapour below "
            "the surface. Take a sample higher up, or hold the last one."
        )
        yield refusal("density_run_out", message, "fluid", light)


def impossible_density(model: Model, groups: Sequence[Group]) -> Iterator[Notice]:
    """Refuse rows whose readings together mean a density that no liquid of this profile has."""
    for group in groups:
        if group.fit is None or FACTOR not in group.fit.unknowns:
            continue
        factor = group.fit.state.factor
        odd = ~((factor >= LIGHTEST) & (factor <= HEAVIEST))
        if not np.any(odd):
            continue
        rows = np.zeros(group.rows.shape, dtype=bool)
        rows[np.flatnonzero(group.rows)[odd]] = True
        first = int(np.flatnonzero(odd)[0])
        rho = float(model.product.density(float(group.fit.state.surface_m[first])))
        names = listed([o.name for o in group.used])
        yield refusal(
            "density_impossible",
            f"{names} together mean {float(factor[first]) * rho:.0f} kg/m3 where the profile says "
            f"{rho:.0f}: one of them is wrong, or the profile is that of another liquid.",
            "density",
            rows.reshape(model.case.shape),
        )


def blanket_unread(model: Model, by: str) -> Notice:
    """Refuse where the readings leave the surface open: an unread pressure above the liquid."""
    relief = model.case.tank.relief_pa
    if relief is None or model.case.shape:
        return unread_blanket(model, None)
    outside = model.case.conditions.outside_pa(model.vapour_at_m)
    levels = []
    for gauge_pa in relief:
        at = State(np.asarray(0.0), np.ones(()), np.asarray(outside + gauge_pa))
        levels.append(float(level_behind(model, by, at)))
    return unread_blanket(model, (levels[0], levels[1]))


def unsettled(groups: Sequence[Group], seen: BoolArray) -> Iterator[Notice]:
    """Refuse rows in which the readings do not determine the surface and nothing else says so."""
    rows = np.zeros(seen.size, dtype=bool)
    for group in groups:
        if group.fit is None:
            rows |= group.rows
    left = rows.reshape(seen.shape) & ~seen
    if np.any(left):
        yield refusal(
            "not_settled", "The readings do not settle the surface. Give a dip.", "", left
        )
