"""Something besides the readings that may be otherwise than it was taken, and how far."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from tankcalc.consistency.problem import Problem, Solution
from tankcalc.gauging.case import FloatArray
from tankcalc.gauging.estimate import weighted_residuals, weighted_slopes
from tankcalc.gauging.groups import choices
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import Observation

ROUNDS = 12
"""Steps towards the size of a cause: the readings are nearly linear in it, three or four do."""

HOPELESS, TRIED = 100.0, 2
"""A cause whose best value would leave chi-square above the first after the second step explains
nothing, and is not followed to the end."""

STILL = 1e-6
"""A step below this share of a cause's scale ends the search."""


@dataclass(frozen=True, slots=True)
class Cause:
    """Something besides the readings that may be otherwise than it was taken.

    Attributes
    ----------
    code, reading, dimension, hint : str
        As in `Explanation`.
    model_of : callable
        The case with a value of it.
    field : str
        The field of the readings that states it.
    taken : float
        Its value as it was taken: what the size counts from.
    start, low, high : float
        Where the search begins, and between which values.
    scale : float
        Scale of its prior, see `plausibility`.
    """

    code: str
    reading: str
    dimension: str
    hint: str
    model_of: Callable[[float], Model]
    field: str
    taken: float
    start: float
    low: float
    high: float
    scale: float


@dataclass(frozen=True, slots=True)
class Followed:
    """A cause with its best value, that value's standard uncertainty, and the state with it."""

    value: float
    uncertainty: float
    model: Model
    solution: Solution


def follow(problem: Problem, solution: Solution, cause: Cause) -> Followed | None:
    """Return a cause at the value that fits best, None where the readings do not tell it.

    Notes
    -----
    Gauss-Newton in the state and the cause together; the derivatives by the cause are
    differences. The uncertainties stay those of the readings as they were.
    """
    unknowns = choices(problem.model)[int(solution.choice[0])]
    state, value = solution.state, cause.start
    for taken in range(ROUNDS):
        here = _observations(problem, cause.model_of(value))
        slopes = _slopes(problem, cause, here, state, value, unknowns)
        size = np.linalg.norm(slopes, axis=0)
        if not np.all(size > 0.0) or not np.all(np.isfinite(size)):
            return None
        inverse = np.linalg.pinv(slopes / size) / size[:, None]
        if np.linalg.matrix_rank(slopes / size, 1e-9) < len(size):
            return None
        residuals = weighted_residuals(here, state)[0]
        step = inverse @ residuals
        if taken >= TRIED and np.sum((residuals - slopes @ step) ** 2) > HOPELESS:
            return None
        state = _moved(state, unknowns, step)
        moved = float(np.clip(value + step[-1], cause.low, cause.high)) - value
        value += moved
        if abs(moved) <= STILL * cause.scale and abs(step[0]) <= STILL:
            return _arrived(problem, cause, value, state, unknowns, inverse)
    return None


def _arrived(
    problem: Problem,
    cause: Cause,
    value: float,
    state: State,
    unknowns: tuple[int, ...],
    inverse: FloatArray,
) -> Followed | None:
    """Return the cause at its best value, None at an end of its range: the best lies beyond."""
    if not cause.low < value < cause.high:
        return None
    model = cause.model_of(value)
    here = _observations(problem, model)
    chi_square = np.sum(weighted_residuals(here, state) ** 2, axis=-1)
    freedom = np.array([len(here) - len(unknowns)])
    solution = Solution(state, np.zeros(1, dtype=int), chi_square, freedom)
    return Followed(value, float(np.linalg.norm(inverse[-1])), model, solution)


def _observations(problem: Problem, model: Model) -> list[Observation]:
    """Return the observations under another model, as certain as they were."""
    other = Problem.of_model(model)
    return [
        replace(o, uncertainty=was.uncertainty)
        for o, was in zip(other.observations, problem.observations, strict=True)
    ]


def _slopes(
    problem: Problem,
    cause: Cause,
    here: list[Observation],
    state: State,
    value: float,
    unknowns: tuple[int, ...],
) -> FloatArray:
    """Return the weighted derivatives by the unknowns and the cause, (observations, unknowns)."""
    step = 1e-3 * min(cause.high - cause.low, cause.scale)
    if value + step > cause.high:
        step = -step
    there = _observations(problem, cause.model_of(value + step))
    change = weighted_residuals(here, state) - weighted_residuals(there, state)
    return np.column_stack((weighted_slopes(here, state, unknowns)[0], change[0] / step))


def _moved(state: State, unknowns: tuple[int, ...], step: FloatArray) -> State:
    values = [state.surface_m, state.factor, state.vapour_pa]
    for place, k in enumerate(unknowns):
        values[k] = values[k] + step[place]
    return State(*values)
