"""Which unknowns the readings determine, and the state of the tank they fix."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.direct import DIRECT, direct_level
from tankcalc.gauging.estimate import FACTOR, SURFACE, VAPOUR, Fit, determined, fit
from tankcalc.gauging.limits_of_sight import (
    ROUNDING_M,
    contradictions,
    refusal,
    unread_blanket,
)
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import Observation, observations_of
from tankcalc.gauging.words import listed
from tankcalc.hydrostatics import surface_from_pressures
from tankcalc.instruments import tap_from_reading
from tankcalc.result import Notice

COVER_M = 0.1
"""A tap counts as covered when the surface is this far above it: nearer, waves and errors of the
level decide (common practice, no source)."""

HEADROOM = 0.01
"""How far below the top an estimate begins whose first surface was above it, as a share."""

HEAVIEST_VAPOUR = 0.5
"""A vapour heavier than this share of the heaviest liquid is near critical, or mistyped."""

LIGHTEST, HEAVIEST = 0.6, 1.6
"""Measured densities beyond these shares of the profile's are taken for a fault, not a density:
two liquids that share a tank farm are rarely further apart (common practice, no source)."""

UNKNOWN_WORDS = {
    SURFACE: "the surface",
    FACTOR: "the mean density",
    VAPOUR: "the pressure above the liquid",
}


@dataclass(frozen=True, slots=True)
class Group:
    """Rows in which the same readings are of use.

    Attributes
    ----------
    rows : array of bool
        Which of the flattened readings.
    used : tuple of Observation
        The observations of those rows.
    fit : Fit or None
        The estimate; None where a reading gave the surface as it is.
    """

    rows: BoolArray
    used: tuple[Observation, ...]
    fit: Fit | None


@dataclass(frozen=True, slots=True)
class Found:
    """The state that the readings fix, row by row.

    Attributes
    ----------
    state : State
        Arrays of the readings' shape; the surface is NaN where refused.
    basis : str
        In words, which readings fixed which unknowns.
    notices : tuple of Notice
        Refusals and remarks, with the rows they apply to.
    groups : tuple of Group
        How each row was estimated.
    vapour_assumed : bool
        Whether outside pressure was taken for an unread pressure above the liquid.
    by : str
        The reading that the search began with: a field of `DIRECT`, or a transmitter's tag.
    """

    state: State
    basis: str
    notices: tuple[Notice, ...]
    groups: tuple[Group, ...] = ()
    vapour_assumed: bool = False
    by: str = ""


def find_state(model: Model) -> Found:
    """Return the state of the tank behind the readings.

    A level, ullage, volume or mass gives the surface; so does the lowest pressure with the
    density profile. Further readings determine the density and the pressure above the liquid
    where they can; what they do not determine is taken from the profile and said so; and where
    there are more readings than unknowns, the estimate is weighted by their uncertainties.
    """
    case = model.case
    start, by, notices = _start(model)
    if not by:
        return Found(start, "nothing that fixes the surface", notices)
    unknown = np.isnan(start.surface_m)
    groups: list[Group] = []
    remarks: list[Notice] = []
    state = start
    if not _closed_form(model, by):
        held, out = _within_sight(model, by, start, unknown)
        groups, remarks = _groups(model, held, out, by)
        state = _merged(start, groups)
    unread = model.vent_pa is None and "p3_pa" not in case.given
    found_vapour = any(g.fit and VAPOUR in g.fit.unknowns for g in groups)
    checks: tuple[Notice, ...] = tuple(_outside(model, state, unknown)) if by in DIRECT else ()
    if by not in DIRECT:
        checks = contradictions(model, by, state, unknown)
        if any(group.fit is None for group in groups):
            checks = (_unread_blanket(model, by),)
    checks = (*checks, *_impossible_density(model, groups), *_too_light(model, state, unknown))
    if unread and _needs_pressure(model) and by not in DIRECT and not found_vapour:
        checks = (*checks, _unread_blanket(model, by))
    refused = unknown | _rows_of(checks, case.shape)
    return Found(
        replace(state, surface_m=np.where(refused, np.nan, state.surface_m)),
        _basis(model, groups, by),
        (*notices, *remarks, *checks),
        tuple(groups),
        unread and not found_vapour,
        by,
    )


def _closed_form(model: Model, by: str) -> bool:
    """Return whether an array's surface is known already: one pressure under a known vapour.

    The fit would find the same state; for millions of readings it is left out.
    """
    given = model.case.given.keys() - {"p3_pa"}
    known = model.vent_pa is not None or "p3_pa" in model.case.given
    density = model.case.readings.density_kg_m3
    return bool(model.case.shape) and given == {f"{by}_pa"} and known and density is None


def _vapour_start(model: Model) -> FloatArray:
    """Return the pressure above the liquid to begin with, Pa absolute."""
    case = model.case
    if "p3" in case.tank.transmitters and "p3_pa" in case.given:
        read = model.vapour_from_p3(case.given["p3_pa"])
        return np.broadcast_to(read, case.shape).astype(float)
    vent = model.vent_pa
    outside = case.conditions.outside_pa(model.vapour_at_m)
    return np.full(case.shape, outside if vent is None else vent)


def _start(model: Model) -> tuple[State, str, tuple[Notice, ...]]:
    """Return a first state, the reading it comes from, and why there is none."""
    case = model.case
    vapour, one = _vapour_start(model), np.ones(case.shape)
    if np.any(vapour <= 0.0):
        nothing = State(np.full(case.shape, np.nan), one, vapour)
        message = "p3 is below a perfect vacuum. Check the unit and the reference."
        return nothing, "", (refusal("below_vacuum", message, "p3"),)
    for name in DIRECT:
        if name in case.given:
            level, notices = direct_level(model, name)
            return State(level, one, vapour), name, notices
    nan = State(np.full(case.shape, np.nan), one, vapour)
    _, heaviest = case.column.extremes(case.tank.vessel.z_min, case.tank.vessel.z_max)
    if np.any(model.vapour_density(vapour) > HEAVIEST_VAPOUR * heaviest):
        message = "The vapour is as heavy as the liquid: a pressure says nothing of the surface."
        return nan, "", (refusal("vapour_too_heavy", message, "p3"),)
    for tag in ("p1", "dp", "p2"):
        if f"{tag}_pa" not in case.given:
            continue
        if tag not in case.fitted():
            fitted = ", ".join(case.fitted()) or "none"
            message = f"{case.tank.name} has no {tag} transmitter (fitted: {fitted})."
            return nan, "", (refusal("not_fitted", message, tag),)
        return State(_level_behind(model, tag, nan), one, vapour), tag, ()
    message = (
        "Nothing was given that fixes the surface. Give a level, an ullage, a volume, a mass, "
        f"or the pressure of {' or '.join(case.fitted()) or 'a transmitter'}."
    )
    return nan, "", (refusal("not_enough", message),)


def _level_behind(model: Model, tag: str, state: State) -> FloatArray:
    """Return the surface behind one pressure with the profile's density; beyond the ends too."""
    case = model.case
    rv = model.vapour_density(state.vapour_pa)
    reading = np.broadcast_to(case.given[f"{tag}_pa"], case.shape)
    if tag == "dp":
        dp = case.tank.dp
        assert dp is not None
        low_m, high_m = dp.high.elevation_m, dp.low.elevation_m
        difference = reading - model.line_difference(state)
    else:
        transmitter = case.tank.transmitters[tag]
        low_m, high_m = transmitter.elevation_m, model.vapour_at_m
        tap = tap_from_reading(transmitter, reading, case.conditions)
        difference = np.asarray(tap - state.vapour_pa)
    level = surface_from_pressures(case.column, model.gravity, low_m, difference, rv, high_m)
    return np.broadcast_to(level, case.shape)


def _within_sight(
    model: Model, by: str, start: State, unknown: BoolArray
) -> tuple[State, BoolArray]:
    """Return where to begin the estimate, and the rows in which there is nothing to estimate.

    A first surface below the tap is refused as it stands, and one above the vessel too, unless
    a second pressure may show that the liquid is heavier than its profile says.
    """
    tank = model.case.tank
    surface = np.where(unknown, tank.vessel.z_min, start.surface_m)
    if by in DIRECT:
        return replace(start, surface_m=surface), unknown
    dp = tank.dp
    tap_m = dp.high.elevation_m if by == "dp" and dp else tank.transmitters[by].elevation_m
    top_m = min(tank.vessel.z_max, model.vapour_at_m)
    out = unknown | (surface <= tap_m)
    if len(model.case.given.keys() & {"p1_pa", "p2_pa", "dp_pa"}) > 1:
        surface = np.minimum(surface, top_m - HEADROOM * (top_m - tap_m))
    else:
        out = out | (surface > tank.vessel.z_max)
    return replace(start, surface_m=surface), out


def _groups(
    model: Model, start: State, refused: BoolArray, by: str
) -> tuple[list[Group], list[Notice]]:
    """Return the estimates, one for each set of readings that are of use in some rows."""
    every = observations_of(model)
    if by in ("volume_m3", "mass_kg"):
        return [Group(np.ones(start.surface_m.size, dtype=bool), (), None)], []
    flat = State(*(np.ravel(v) for v in (start.surface_m, start.factor, start.vapour_pa)))
    useful = np.stack([np.ravel(_useful(model, o, start, by)) for o in every])
    groups: list[Group] = []
    remarks: list[Notice] = []
    for pattern in {tuple(p) for p in useful[:, ~np.ravel(refused)].T.tolist()}:
        rows = np.all(useful == np.array(pattern)[:, None], axis=0) & ~np.ravel(refused)
        chosen = [o for o, use in zip(every, pattern, strict=True) if use]
        groups += _estimates(model, chosen, flat, rows)
        remarks += _unused(every, pattern, rows.reshape(start.surface_m.shape))
    return groups, remarks


def _useful(model: Model, observation: Observation, state: State, by: str) -> BoolArray:
    """Return in which rows an observation bears on the state: covered taps, p3 in the vapour."""
    tank, name = model.case.tank, observation.name
    if name == by:
        return np.ones(state.surface_m.shape, dtype=bool)
    if name in ("p1", "p2"):
        return np.asarray(state.surface_m > tank.transmitters[name].elevation_m + COVER_M)
    if name == "p3" and by not in DIRECT:
        return np.asarray(state.surface_m < tank.transmitters["p3"].elevation_m)
    if name == "dp":
        assert tank.dp is not None
        return np.asarray(state.surface_m < tank.dp.low.elevation_m)
    return np.ones(state.surface_m.shape, dtype=bool)


def _estimates(
    model: Model, chosen: Sequence[Observation], start: State, rows: BoolArray
) -> Iterator[Group]:
    """Yield the best states of some rows, each with as many unknowns as they determine."""
    left = rows.copy()
    for unknowns in _choices(model):
        if len(chosen) < len(unknowns) or not np.any(left):
            continue
        used = _rows_only(chosen, left)
        # Only a density can be determined in one row and not in the next.
        sample = left if FACTOR in unknowns else _first_row(left)
        able = determined(_rows_only(chosen, sample), start.take(sample), unknowns)
        done = left.copy()
        done[sample] = able
        if FACTOR not in unknowns and not np.all(able):
            continue
        if np.any(done):
            used = _rows_only(chosen, done)
            yield Group(done, used, fit(used, start.take(done), unknowns))
        left &= ~done
    if np.any(left):
        yield Group(left, _rows_only(chosen, left), None)


def _rows_only(observations: Sequence[Observation], rows: BoolArray) -> tuple[Observation, ...]:
    """Return observations of some rows of the flattened readings."""
    return tuple(
        replace(o, value=np.ravel(o.value)[rows], uncertainty=np.ravel(o.uncertainty)[rows])
        for o in observations
    )


def _first_row(rows: BoolArray) -> BoolArray:
    """Return a mask of only the first of some rows."""
    first = np.zeros(rows.shape, dtype=bool)
    first[np.flatnonzero(rows)[0]] = True
    return first


def _choices(model: Model) -> Iterator[tuple[int, ...]]:
    """Yield sets of unknowns, the largest first."""
    if model.vent_pa is None:
        yield (SURFACE, FACTOR, VAPOUR)
        yield (SURFACE, VAPOUR)
        if model.case.given.keys() & {"level_m", "ullage_m", "dp_pa"}:
            yield (SURFACE,)
    else:
        yield (SURFACE, FACTOR)
        yield (SURFACE,)


def _unused(
    every: Sequence[Observation], pattern: Sequence[bool], where: BoolArray
) -> Iterator[Notice]:
    """Say which readings were of no use, and why."""
    shown = where if where.ndim else None
    for observation, use in zip(every, pattern, strict=True):
        if use or observation.name not in ("p2", "p3"):
            continue
        if observation.name == "p2":
            message = (
                "p2's tap is not safely under liquid: it says nothing of the density, which is "
                "taken from the profile or the other readings."
            )
            yield Notice("p2_uncovered", message, "p2", where=shown)
        else:
            message = "p3's tap is under liquid: it does not show the pressure above it."
            yield Notice("p3_covered", message, "p3", where=shown)


def _merged(start: State, groups: Sequence[Group]) -> State:
    """Return the state of all rows from those of the groups."""
    shape = start.surface_m.shape
    values = [np.ravel(v).copy() for v in (start.surface_m, start.factor, start.vapour_pa)]
    for group in groups:
        if group.fit is not None:
            fitted = group.fit.state
            for value, new in zip(
                values, (fitted.surface_m, fitted.factor, fitted.vapour_pa), strict=True
            ):
                value[group.rows] = new
    return State(*(value.reshape(shape) for value in values))


def _rows_of(notices: Sequence[Notice], shape: tuple[int, ...]) -> BoolArray:
    """Return the rows that any of the notices refuses."""
    rows = np.zeros(shape, dtype=bool)
    for notice in notices:
        if notice.refuses:
            rows = rows | (True if notice.where is None else notice.where)
    return rows


def _outside(model: Model, state: State, unknown: BoolArray) -> Iterator[Notice]:
    """Refuse rows whose readings together put the surface outside the vessel."""
    vessel = model.case.tank.vessel
    slack = ROUNDING_M
    out = (state.surface_m < vessel.z_min - slack) | (state.surface_m > vessel.z_max + slack)
    out = (out | np.isnan(state.surface_m)) & ~unknown
    if np.any(out):
        message = "The readings together put the surface outside the tank: one of them is wrong."
        yield refusal("surface_outside", message, where=out)


def _needs_pressure(model: Model) -> bool:
    """Return whether the vapour's density follows from a pressure that has to be known."""
    vapour = model.case.tank.vapour or model.case.fluid.vapour
    return vapour is not None and vapour.density_kg_m3 is None


def _too_light(model: Model, state: State, unknown: BoolArray) -> Iterator[Notice]:
    """Refuse rows in which an extended density profile has run out below the surface."""
    bottom, slack = model.case.tank.vessel.z_min, 1e-9
    surface = np.where(np.isnan(state.surface_m), bottom, state.surface_m)
    lightest = np.minimum(model.density(surface - slack, state), model.density(surface, state))
    rv = model.vapour_density(state.vapour_pa)
    light = ~(lightest > rv) & ~unknown & ~np.isnan(state.surface_m)
    if np.any(light):
        message = (
            "The density profile, carried on beyond its samples, falls to that of the vapour below "
            "the surface. Take a sample higher up, or hold the last one."
        )
        yield refusal("density_run_out", message, "fluid", light)


def _impossible_density(model: Model, groups: Sequence[Group]) -> Iterator[Notice]:
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


def _unread_blanket(model: Model, by: str) -> Notice:
    """Refuse where the readings leave the surface open: an unread pressure above the liquid."""
    relief = model.case.tank.relief_pa
    if relief is None or model.case.shape:
        return unread_blanket(model, None)
    outside = model.case.conditions.outside_pa(model.vapour_at_m)
    levels = []
    for gauge_pa in relief:
        at = State(np.asarray(0.0), np.ones(()), np.asarray(outside + gauge_pa))
        levels.append(float(_level_behind(model, by, at)))
    return unread_blanket(model, (levels[0], levels[1]))


def _basis(model: Model, groups: Sequence[Group], by: str) -> str:
    """Return in words which readings fix which unknowns, and what is taken as known."""
    fitted = [g for g in groups if g.fit is not None]
    if not fitted and by in DIRECT:
        return DIRECT[by]
    if fitted:
        group = max(fitted, key=lambda g: int(np.count_nonzero(g.rows)))
        names, fit_of = [o.name for o in group.used], group.fit
        assert fit_of is not None
        unknowns, freedom = fit_of.unknowns, fit_of.freedom
    elif groups:
        return "the readings do not settle the surface"
    else:
        p3 = "p3_pa" in model.case.given
        names, freedom = [by, *(["p3"] if p3 else [])], 0
        unknowns = (SURFACE, VAPOUR) if p3 else (SURFACE,)
    taken = [] if FACTOR in unknowns else ["the density profile"]
    if model.vent_pa is not None:
        taken.append("outside air above the liquid")
    verb = "fixes" if len(names) == 1 else "fix"
    words = f"{listed(names)} {verb} {listed([UNKNOWN_WORDS[k] for k in unknowns])}"
    if freedom:
        words += f", weighted by their uncertainties ({freedom} to spare)"
    return words + (f"; taken as known: {listed(taken)}" if taken else "")
