"""The readings without one of them: what the others say that it should have been."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from tankcalc.consistency.problem import Problem, Solution, settle, starts
from tankcalc.gauging.case import FloatArray
from tankcalc.gauging.estimate import weighted_slopes
from tankcalc.gauging.groups import choices
from tankcalc.gauging.model import State
from tankcalc.gauging.observations import Observation


@dataclass(frozen=True, slots=True)
class Refit:
    """One reading with a free bias, which is the estimate without it.

    Attributes
    ----------
    name : str
        Of the reading.
    bias : float
        Reading less what the others foretell, in the unit of its observation: a level for an
        ullage, a share for a density.
    uncertainty : float
        Standard uncertainty of the bias: of the reading and of what is foretold.
    solution : Solution
        One row; its freedom counts the bias as an unknown.
    """

    name: str
    bias: float
    uncertainty: float
    solution: Solution

    @property
    def chi_square(self) -> float:
        """What is left of the disagreement; infinite where the others determine nothing."""
        return float(self.solution.chi_square[0])


def refits(problem: Problem) -> list[Refit]:
    """Return the estimates with one reading left out at a time, in the order of the readings.

    Notes
    -----
    A free bias of one reading takes up its whole residual, so that adding the bias and leaving
    the reading out are the same estimate. All are found in one go, a row for each.
    """
    count = len(problem.observations)
    begun = [_start(problem, name) for name in problem.names]
    start = State(
        np.array([float(s.surface_m[0]) for s in begun]),
        np.ones(count),
        np.array([float(s.vapour_pa[0]) for s in begun]),
    )
    observations = _left_out(problem)
    solution = settle(problem.model, observations, start, left_out=1)
    return [_refit(problem, observations, solution, row) for row in range(count)]


def _start(problem: Problem, without: str) -> State:
    """Return a state to begin with that one reading has no part in; NaN where there is none."""
    nan = np.full(1, np.nan)
    return next(starts(problem.model, without), State(nan, np.ones(1), nan))


def _left_out(problem: Problem) -> list[Observation]:
    """Return the observations in rows, each without weight in the row of its own place."""
    count = len(problem.observations)
    rows = []
    for place, o in enumerate(problem.observations):
        uncertainty = np.full(count, float(o.uncertainty[0]))
        uncertainty[place] = np.inf
        rows.append(replace(o, value=np.full(count, float(o.value[0])), uncertainty=uncertainty))
    return rows


def _refit(
    problem: Problem, observations: list[Observation], solution: Solution, row: int
) -> Refit:
    own = problem.observations[row]
    alone = solution.take(row)
    if not alone.solved:
        return Refit(own.name, np.nan, np.nan, alone)
    bias = float((own.value - own.expected(alone.state))[0])
    unknowns = choices(problem.model)[int(alone.choice[0])]
    others = [
        replace(o, value=o.value[row : row + 1], uncertainty=o.uncertainty[row : row + 1])
        for o in observations
    ]
    with np.errstate(all="ignore"):
        weighted = weighted_slopes(others, alone.state, unknowns)[0]
        slopes = np.array([float(own.slopes(alone.state)[k][0]) for k in unknowns])
    if not (np.all(np.isfinite(weighted)) and np.all(np.isfinite(slopes))):
        return Refit(own.name, np.nan, np.nan, alone.unsolved())
    foretold = _standard_uncertainty(weighted, slopes)
    return Refit(own.name, bias, float(np.hypot(own.uncertainty[0], foretold)), alone)


def _standard_uncertainty(weighted: FloatArray, slopes: FloatArray) -> float:
    """Return that of a figure with these slopes, from the weighted slopes of the readings."""
    size = np.linalg.norm(weighted, axis=0)
    size = np.where(size > 0.0, size, 1.0)
    return float(np.linalg.norm((slopes / size) @ np.linalg.pinv(weighted / size)))
