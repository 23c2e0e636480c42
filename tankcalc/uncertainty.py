"""What each number is worth: every input's share of level, volume and mass.

The inputs are moved one at a time by their standard uncertainty, up and down, and the readings
are solved again; half the difference is that input's contribution, correlations through the
solution included (JCGM 100:2008, 5.1.3 note 2). Contributions are added in squares, or with a
correlation matrix, and expanded with k = 2.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging import evaluate
from tankcalc.gauging.inputs import inputs_of
from tankcalc.gauging.solve import solve
from tankcalc.gauging.spread import outputs_of_spread
from tankcalc.readings import Readings
from tankcalc.result import Result
from tankcalc.tank import Tank

FloatArray = npt.NDArray[np.float64]

COVERAGE = 2.0
"""Coverage factor of every expanded uncertainty: about 95 %."""

OUTPUTS = (
    "level_m",
    "volume_m3",
    "product_volume_m3",
    "mass_kg",
    "product_mass_kg",
    "density_kg_m3",
    "standard_volume_m3",
)
"""The figures that get an uncertainty, by their JSON keys; the last where the liquid has one."""


@dataclass(frozen=True, slots=True)
class Share:
    """One input's share.

    Attributes
    ----------
    name : str
        What it is, in words: "p1", "density", "gravity".
    uncertainty : float
        Its standard uncertainty, SI; a share where ``dimension`` is "fraction".
    dimension : str
        What it measures, as units are looked up.
    stated : bool
        Whether the site states it; False: common practice was taken.
    contributions : mapping of str to float
        Signed change of every output for one standard uncertainty, by JSON key.
    """

    name: str
    uncertainty: float
    dimension: str
    stated: bool
    contributions: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Budget:
    """The uncertainty of one answer.

    Attributes
    ----------
    shares : tuple of Share
        Largest share of the mass first.
    standard : mapping of str to float
        Combined standard uncertainty of every output, by JSON key.
    """

    shares: tuple[Share, ...]
    standard: Mapping[str, float]

    @property
    def expanded(self) -> dict[str, float]:
        """Return the expanded uncertainty (k = 2) of every output, by JSON key."""
        return {key: COVERAGE * value for key, value in self.standard.items()}

    def gain_of_halving(self, name: str, key: str = "mass_kg") -> float:
        """Return by how much an output's expanded uncertainty shrinks if one input's halves."""
        total = self.standard[key] ** 2
        share = next(s for s in self.shares if s.name == name).contributions[key] ** 2
        return COVERAGE * (float(np.sqrt(total)) - float(np.sqrt(max(total - 0.75 * share, 0.0))))


def assess(tank: Tank, fluid: Fluid, readings: Readings) -> Budget | None:
    """Return the uncertainty of the answer to one set of readings, None where it is refused.

    Parameters
    ----------
    tank, fluid, readings
        As for ``evaluate``; single readings, not arrays.
    """
    try:
        model, found = solve(tank, fluid, readings)
    except (RangeError, InputError):
        return None
    if model.case.shape or np.isnan(found.state.surface_m):
        return None
    inputs = inputs_of(model, found)
    ups = np.eye(len(inputs))
    deltas = np.concatenate((np.zeros((1, len(inputs))), ups, -ups))
    moved = outputs_of_spread(model, found, inputs, deltas)
    count = len(inputs)
    outputs = [key for key in OUTPUTS if np.isfinite(moved[key][0])]
    shares = [
        Share(
            one.name,
            one.uncertainty,
            one.dimension,
            one.stated,
            {key: float(moved[key][1 + k] - moved[key][1 + count + k]) / 2.0 for key in outputs},
        )
        for k, one in enumerate(inputs)
    ]
    standard = {
        key: float(np.sqrt(sum(s.contributions[key] ** 2 for s in shares))) for key in outputs
    }
    ordered = sorted(shares, key=lambda s: -abs(s.contributions["mass_kg"]))
    return Budget(tuple(ordered), standard)


def with_uncertainty(result: Result, budget: Budget | None) -> Result:
    """Return the result with the expanded uncertainty of its figures."""
    if budget is None or result.status == "refused":
        return result
    return replace(result, expanded_uncertainty=budget.expanded)


def answered(tank: Tank, fluid: Fluid, readings: Readings) -> Result:
    """Return what ``evaluate`` answers to one set of readings, with its uncertainty."""
    return with_uncertainty(evaluate(tank, fluid, readings), assess(tank, fluid, readings))


def simulate(
    tank: Tank, fluid: Fluid, readings: Readings, draws: int, seed: int = 1
) -> dict[str, FloatArray]:
    """Return draws of every output by Monte Carlo (JCGM 101:2008), by JSON key.

    Parameters
    ----------
    draws : int
        How many; normal distributions with the standard uncertainties of the budget.
    seed : int
        Of the random numbers: the same seed gives the same draws.
    """
    model, found = solve(tank, fluid, readings)
    inputs = inputs_of(model, found)
    deltas = np.random.default_rng(seed).standard_normal((draws, len(inputs)))
    drawn = outputs_of_spread(model, found, inputs, deltas)
    return {key: values for key, values in drawn.items() if np.all(np.isfinite(values))}


def propagate(
    function: Callable[[FloatArray], Sequence[float]],
    values: Sequence[float],
    covariance: npt.ArrayLike,
) -> tuple[FloatArray, FloatArray]:
    """Return the outputs of a function and their covariance, by the law of propagation.

    Parameters
    ----------
    function : callable
        Takes an array of inputs, gives the outputs.
    values : sequence of float (n,)
        Estimates of the inputs.
    covariance : array (n, n)
        Their covariance.

    Returns
    -------
    outputs : array (m,)
    covariance : array (m, m)

    References
    ----------
    JCGM 100:2008, equation 13 and its matrix form of annex H.2; the derivatives are central
    differences over one standard uncertainty.
    """
    x, cov = np.asarray(values, dtype=float), np.asarray(covariance, dtype=float)
    steps = np.sqrt(np.diag(cov))
    columns = []
    for k, step in enumerate(steps):
        if step == 0.0:
            columns.append(np.zeros(len(np.atleast_1d(function(x)))))
            continue
        move = np.zeros(len(x))
        move[k] = step
        up, down = np.asarray(function(x + move)), np.asarray(function(x - move))
        columns.append((up - down) / (2.0 * step))
    jacobian = np.stack(columns, axis=1)
    return np.asarray(function(x), dtype=float), jacobian @ cov @ jacobian.T
