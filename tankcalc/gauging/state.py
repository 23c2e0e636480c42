"""Which unknowns the readings determine, and the state of the tank they fix."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from tankcalc.gauging.beginning import first_state, within_sight
from tankcalc.gauging.case import BoolArray
from tankcalc.gauging.direct import DIRECT
from tankcalc.gauging.estimate import FACTOR, SURFACE, VAPOUR
from tankcalc.gauging.groups import Group, groups_of, merged
from tankcalc.gauging.limits_of_sight import contradictions
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.sanity import (
    blanket_unread,
    impossible_density,
    outside,
    too_light,
    unsettled,
)
from tankcalc.gauging.words import listed
from tankcalc.result import Notice

UNKNOWN_WORDS = {
    SURFACE: "the surface",
    FACTOR: "the mean density",
    VAPOUR: "the pressure above the liquid",
}


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
    start, by, notices = first_state(model)
    if not by:
        return Found(start, "nothing that fixes the surface", notices)
    unknown = np.isnan(start.surface_m)
    groups: list[Group] = []
    remarks: list[Notice] = []
    state = start
    if not _closed_form(model, by):
        held, out = within_sight(model, by, start, unknown)
        groups, remarks = groups_of(model, held, out, by)
        state = merged(start, groups)
    unread = model.vent_pa is None and "p3_pa" not in case.given
    found_vapour = any(g.fit and VAPOUR in g.fit.unknowns for g in groups)
    checks = _refusals(model, by, state, groups, unknown, unread and not found_vapour)
    refused = unknown | _rows_of(checks, case.shape)
    return Found(
        replace(state, surface_m=np.where(refused, np.nan, state.surface_m)),
        _basis(model, groups, by),
        (*notices, *remarks, *checks),
        tuple(groups),
        unread and not found_vapour,
        by,
    )


def _refusals(
    model: Model,
    by: str,
    state: State,
    groups: Sequence[Group],
    unknown: BoolArray,
    blind: bool,
) -> tuple[Notice, ...]:
    """Return why states that came out are no answers.

    ``blind``: the space above the liquid has a pressure of its own, and nothing told it.
    """
    impossible = tuple(impossible_density(model, groups))
    if impossible and not model.case.shape:
        return impossible  # what follows from such a density is no news
    if by in DIRECT:
        checks = tuple(outside(model, state, unknown))
    elif blind and by != "dp":
        checks = (blanket_unread(model, by),)
    else:
        checks = contradictions(model, by, state, unknown)
    checks = (*checks, *impossible, *too_light(model, state, unknown))
    if blind and by == "dp" and model.vapour_thins:
        checks = (*checks, blanket_unread(model, by))
    if by not in DIRECT:
        seen = unknown | _rows_of(checks, model.case.shape)
        checks = (*checks, *unsettled(groups, seen))
    return checks


def _closed_form(model: Model, by: str) -> bool:
    """Return whether an array's surface is known already: one pressure under a known vapour.

    The fit would find the same state; for millions of readings it is left out.
    """
    given = model.case.given.keys() - {"p3_pa"}
    known = model.vent_pa is not None or "p3_pa" in model.case.given
    density = model.case.readings.density_kg_m3
    return bool(model.case.shape) and given == {f"{by}_pa"} and known and density is None


def _rows_of(notices: Sequence[Notice], shape: tuple[int, ...]) -> BoolArray:
    """Return the rows that any of the notices refuses."""
    rows = np.zeros(shape, dtype=bool)
    for notice in notices:
        if notice.refuses:
            rows = rows | (True if notice.where is None else notice.where)
    return rows


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
