"""The readings as a system of equations with more of them than unknowns, in rows.

A row is one way of looking at the readings: one of them left out, one of them corrected.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from tankcalc.consistency.volume import volume_observation
from tankcalc.errors import RangeError
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.case import BoolArray, Case, FloatArray
from tankcalc.gauging.estimate import determined, fit, weighted_residuals
from tankcalc.gauging.groups import choices
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import Observation, observations_of
from tankcalc.hydrostatics import surface_from_pressures
from tankcalc.instruments import tap_from_reading
from tankcalc.readings import Readings
from tankcalc.tank import Tank

IntArray = npt.NDArray[np.int_]

HEAVIEST_VAPOUR = 0.9
"""A vapour of more than this share of the liquid's density is none that a level can be told under:
near the critical point at best."""

UNSOLVED = -1
"""Place in the choices of a row whose readings determine nothing."""


@dataclass(frozen=True, eq=False)
class Problem:
    """What was read of one tank, as observations of its state.

    Attributes
    ----------
    model : Model
        The hydrostatic equation of the case.
    observations : tuple of Observation
        Values and uncertainties are arrays of one row or more.
    """

    model: Model
    observations: tuple[Observation, ...]

    @classmethod
    def of(cls, tank: Tank, fluid: Fluid, readings: Readings) -> Problem:
        """Make a problem of readings; one of them may be an array, a row for each value.

        Raises
        ------
        RangeError, InputError
            As ``Case.of``.
        """
        return cls.of_model(Model(Case.of(tank, fluid, readings)))

    @classmethod
    def of_model(cls, model: Model) -> Problem:
        """Make a problem of a case with its column."""
        return cls(
            model,
            tuple(
                replace(o, value=np.atleast_1d(o.value), uncertainty=np.atleast_1d(o.uncertainty))
                for o in (*observations_of(model), *volume_observation(model))
            ),
        )

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the readings that bear on the state."""
        return tuple(o.name for o in self.observations)

    def at(self, name: str) -> Observation:
        """Return the observation that a reading makes."""
        return next(o for o in self.observations if o.name == name)

    def spread_out(self, name: str, spread: FloatArray) -> Problem:
        """Return the problem with one reading less certain by a further standard deviation."""
        return Problem(
            self.model,
            tuple(
                replace(o, uncertainty=np.hypot(o.uncertainty, spread)) if o.name == name else o
                for o in self.observations
            ),
        )


def reading_uncertainties(tank: Tank, fluid: Fluid, readings: Readings) -> dict[str, float]:
    """Return the standard uncertainties of single readings, SI, by name.

    Raises
    ------
    RangeError, InputError
        As ``Case.of``.
    """
    scale = {"density": readings.density_kg_m3 or 0.0}
    return {
        o.name: float(o.uncertainty[0]) * scale.get(o.name, 1.0)
        for o in Problem.of(tank, fluid, readings).observations
    }


@dataclass(frozen=True, slots=True)
class Solution:
    """The states that fit best, row by row.

    Attributes
    ----------
    state : State
        Arrays of the rows; as started where nothing is determined.
    choice : array of int
        Which of the sets of unknowns, `choices`, the row has; `UNSOLVED` where none is determined.
    chi_square : array
        Infinite where nothing is determined.
    freedom : array of int
        Observations less unknowns.
    """

    state: State
    choice: IntArray
    chi_square: FloatArray
    freedom: IntArray

    def take(self, row: int) -> Solution:
        """Return the solution of one row."""
        mask = np.zeros(self.chi_square.shape, dtype=bool)
        mask[row] = True
        return Solution(
            self.state.take(mask), self.choice[mask], self.chi_square[mask], self.freedom[mask]
        )

    def unsolved(self) -> Solution:
        """Return the solution as one that determines nothing."""
        return replace(
            self,
            choice=np.full_like(self.choice, UNSOLVED),
            chi_square=np.full_like(self.chi_square, np.inf),
        )

    @property
    def solved(self) -> bool:
        """Whether the (first) row has a state."""
        return bool(self.choice[0] != UNSOLVED)


def settle(
    model: Model, observations: Sequence[Observation], start: State, left_out: int = 0
) -> Solution:
    """Return the states that fit the observations best, from a state in every row.

    Parameters
    ----------
    left_out : int
        How many observations of a row carry no weight (infinite uncertainty).
    """
    rows = start.surface_m.shape
    values = [v.copy() for v in _parts(start)]
    choice = np.full(rows, UNSOLVED)
    chi_square, freedom = np.full(rows, np.inf), np.zeros(rows, dtype=int)
    weighing = len(observations) - left_out
    for place, unknowns in enumerate(choices(model)):
        left = (choice == UNSOLVED) & np.isfinite(start.surface_m)
        if weighing < len(unknowns) or not np.any(left):
            continue
        left[left] = determined(_rows(observations, left), start.take(left), unknowns)
        if not np.any(left):
            continue
        found, left_over = _fitted(_rows(observations, left), start.take(left), unknowns)
        for value, new in zip(values, _parts(found), strict=True):
            value[left] = new
        choice[left], chi_square[left] = place, left_over
        freedom[left] = weighing - len(unknowns)
    choice[~np.isfinite(chi_square)] = UNSOLVED
    return Solution(State(*values), choice, chi_square, freedom)


def _fitted(
    observations: list[Observation], start: State, unknowns: tuple[int, ...]
) -> tuple[State, FloatArray]:
    """Return the best states and their chi-square, infinite where a search runs away.

    Readings that are grossly wrong can drive a search to where a compressible column has no
    pressure; such a row is solved apart from the others.
    """
    count = start.surface_m.size
    try:
        with np.errstate(all="ignore"):
            state = fit(observations, start, unknowns).state
            chi_square = np.sum(weighted_residuals(observations, state) ** 2, axis=-1)
        return state, np.where(np.isfinite(chi_square), chi_square, np.inf)
    except (np.linalg.LinAlgError, RangeError):
        if count == 1:
            return start, np.full(1, np.inf)
    each = [np.arange(count) == row for row in range(count)]
    alone = [_fitted(_rows(observations, row), start.take(row), unknowns) for row in each]
    parts = zip(*(_parts(state) for state, _ in alone), strict=True)
    return State(*map(np.concatenate, parts)), np.concatenate([chi for _, chi in alone])


def best(problem: Problem, starts: Sequence[State]) -> Solution:
    """Return the best solution of the only row, from several states to start with."""
    parts = zip(*(_parts(start) for start in starts), strict=True)
    tried = settle(problem.model, problem.observations, State(*map(np.concatenate, parts)))
    return tried.take(int(np.argmin(tried.chi_square)))


def starts(model: Model, without: str = "") -> Iterator[State]:
    """Yield states to begin with, each from one reading, the most direct first.

    Parameters
    ----------
    without : str
        Name of a reading that has no part in it.
    """
    case = model.case
    shape = case.shape or (1,)
    vapour = np.broadcast_to(_vapour(model, without), shape)
    one, vessel = np.ones(shape), case.tank.vessel
    for name in ("level_m", "ullage_m"):
        if name in case.given and f"{without}_m" != name:
            read = case.given[name]
            level = case.tank.ullage_reference_m - read if name == "ullage_m" else read
            yield State(
                np.clip(np.broadcast_to(level, shape), vessel.z_min, vessel.z_max), one, vapour
            )
    if "volume_m3" in case.given and without != "volume":
        held = np.clip(case.given["volume_m3"], vessel.volume(vessel.z_min), vessel.capacity)
        yield State(np.broadcast_to(vessel.level(held), shape), one, vapour)
    for tag in ("p1", "dp", "p2"):
        if f"{tag}_pa" in case.given and tag in case.fitted() and tag != without:
            surface = _surface(model, tag, State(np.zeros(shape), one, vapour))
            held = np.clip(np.broadcast_to(surface, shape), vessel.z_min, vessel.z_max)
            yield State(held, one, vapour)


def _vapour(model: Model, without: str) -> FloatArray:
    """Return the pressure above the liquid to begin with, Pa absolute."""
    case = model.case
    outside = case.conditions.outside_pa(model.vapour_at_m)
    if "p3" in case.tank.transmitters and "p3_pa" in case.given and without != "p3":
        read = model.vapour_from_p3(case.given["p3_pa"])
        return np.where(read > 0.0, read, outside)
    return np.asarray(outside)


def _surface(model: Model, tag: str, state: State) -> FloatArray:
    """Return the surface (m) behind one pressure with the profile's density.

    NaN under a vapour that would be as heavy as the liquid, its pressure being read wrong, and
    where the column cannot carry the pressure.
    """
    case = model.case
    reading, rv = case.given[f"{tag}_pa"], model.vapour_density(state.vapour_pa)
    if tag == "dp":
        dp = case.tank.dp
        assert dp is not None
        low_m, high_m = dp.high.elevation_m, dp.low.elevation_m
        difference = reading - model.line_difference(state)
    else:
        transmitter = case.tank.transmitters[tag]
        low_m, high_m = transmitter.elevation_m, model.vapour_at_m
        difference = tap_from_reading(transmitter, reading, case.conditions) - state.vapour_pa
    lightest, _ = case.column.extremes(case.tank.vessel.z_min, case.tank.vessel.z_max)
    sinks = rv >= HEAVIEST_VAPOUR * lightest
    light = np.where(sinks, 0.0, rv)
    with np.errstate(all="ignore"):
        surface = surface_from_pressures(
            case.column, model.gravity, low_m, np.asarray(difference), light, high_m
        )
    return np.where(sinks, np.nan, surface)


def _rows(observations: Sequence[Observation], rows: BoolArray) -> list[Observation]:
    """Return observations of some rows."""
    return [
        replace(
            o,
            value=np.broadcast_to(o.value, rows.shape)[rows],
            uncertainty=np.broadcast_to(o.uncertainty, rows.shape)[rows],
        )
        for o in observations
    ]


def _parts(state: State) -> tuple[FloatArray, FloatArray, FloatArray]:
    return state.surface_m, state.factor, state.vapour_pa
