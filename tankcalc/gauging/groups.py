"""Which readings are of use in which rows, and how many unknowns they determine there."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from tankcalc.gauging.case import BoolArray
from tankcalc.gauging.direct import DIRECT
from tankcalc.gauging.estimate import FACTOR, SURFACE, VAPOUR, Fit, determined, fit
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import Observation, observations_of
from tankcalc.result import Notice

COVER_M = 0.1
"""A tap counts as covered when the surface is this far above it: nearer, waves and errors of the
level decide (common practice, no source)."""


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


def groups_of(
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
    for unknowns in choices(model):
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


def choices(model: Model) -> tuple[tuple[int, ...], ...]:
    """Return the sets of unknowns that readings may determine, the largest first."""
    if model.vent_pa is not None:
        return (SURFACE, FACTOR), (SURFACE,)
    sets: tuple[tuple[int, ...], ...] = ((SURFACE, FACTOR, VAPOUR), (SURFACE, VAPOUR))
    if model.case.given.keys() & {"level_m", "ullage_m", "dp_pa"}:
        sets += ((SURFACE,),)
    return sets


def _unused(
    every: Sequence[Observation], pattern: Sequence[bool], where: BoolArray
) -> Iterator[Notice]:
    """Say where p2 was of no use; a drowned p3 is told when the surface is known."""
    for observation, use in zip(every, pattern, strict=True):
        if observation.name == "p2" and not use:
            message = (
                "p2's tap is not safely under liquid: it says nothing of the density, which is "
                "taken from the profile or the other readings."
            )
            yield Notice("p2_uncovered", message, "p2", where=where if where.ndim else None)


def merged(start: State, groups: Sequence[Group]) -> State:
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
