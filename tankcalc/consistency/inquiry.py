"""One inquiry into readings that disagree: what every search for a fault needs to know."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np

from tankcalc.consistency.explanation import Explanation
from tankcalc.consistency.plausibility import (
    BEYOND_RELIEF_SCALE_PA,
    IMPROVEMENT,
    LARGEST_DEPARTURE,
    LAST_LEVEL_SCALE_M,
    PROFILE_SCALE,
    tail_penalty,
)
from tankcalc.consistency.problem import Problem, Solution
from tankcalc.consistency.refits import Refit, refits
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.comparisons import CHI_SQUARE
from tankcalc.gauging.model import Model
from tankcalc.readings import Readings
from tankcalc.tank import Tank

ROUNDING = 1e-6
"""Chi-square that is left without freedom where a state fits exactly."""


BRIM_M = 0.02
"""A best estimate this far beyond an end of the vessel is that of a full or an empty one, m."""

STRETCHED = (10.828, 13.816, 16.266, 18.467, 20.515, 22.458)
"""Values that chi-square with 1 to 6 degrees of freedom exceeds once in a thousand times
(NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.4, from memory). A fault that leaves more
than is allowed, but no more than this, is listed after the others: dropping the true one would be
worse than listing one more."""


def stretched(freedom: int) -> float:
    """Return what chi-square may be left at most by a fault that is listed."""
    return STRETCHED[min(freedom, len(STRETCHED)) - 1] if freedom else ROUNDING


def allowed(freedom: int) -> float:
    """Return what chi-square may be with some degrees of freedom; 0 without any."""
    return CHI_SQUARE[min(freedom, len(CHI_SQUARE)) - 1] if freedom else 0.0


@dataclass(frozen=True, eq=False)
class Inquiry:
    """Readings, how they fit together, and what is known besides.

    Attributes
    ----------
    tank, fluid, readings
        Single readings.
    problem : Problem
        Of the readings as they are.
    solution : Solution
        Its best state; one row.
    profile : Model or None
        The case without an observed density; None where the profile has none at this temperature.
    typed_units : mapping of str to str
        By the name of a reading: the unit it was typed in, where that is known.
    last_level_m : float or None
        Level at the last reading, m, where that is known.
    """

    tank: Tank
    fluid: Fluid
    readings: Readings
    problem: Problem
    solution: Solution
    profile: Model | None
    typed_units: Mapping[str, str] = field(default_factory=dict)
    last_level_m: float | None = None

    @property
    def chi_square(self) -> float:
        """Chi-square of the readings as they are."""
        return float(self.solution.chi_square[0])

    @property
    def freedom(self) -> int:
        """Readings less unknowns."""
        return int(self.solution.freedom[0])

    @cached_property
    def refits(self) -> Mapping[str, Refit]:
        """The readings without one of them, by the name of that one; empty without freedom."""
        return {r.name: r for r in refits(self.problem)} if self.freedom else {}

    def departure(self, model: Model, solution: Solution) -> float:
        """Return how far the density of a solution lies from the profile's, as a share."""
        if self.profile is None:
            return 0.0
        surface = solution.state.surface_m
        implied = float((solution.state.factor * model.product.density(surface))[0])
        stated = float(self.profile.product.density(surface)[0])
        # A surface in the free water says nothing of the product.
        return implied / stated - 1.0 if implied and stated else 0.0

    def possible(self, model: Model, solution: Solution) -> bool:
        """Return whether a solution is a state that this tank can be in."""
        if not solution.solved:
            return False
        vessel, surface = self.tank.vessel, float(solution.state.surface_m[0])
        read = model.case.readings.water_level_m
        bottom = vessel.z_min if read is None else max(vessel.z_min, read)
        inside = bottom - BRIM_M <= surface <= vessel.z_max + BRIM_M
        if not inside or min(solution.state.vapour_pa[0], solution.state.factor[0]) <= 0.0:
            return False
        return abs(self.departure(model, solution)) <= LARGEST_DEPARTURE

    def reconciles(self, chi_square: float, freedom: int) -> bool:
        """Return whether a fault leaves hardly a disagreement, and clearly less of it."""
        if chi_square > stretched(freedom):
            return False
        return not self.freedom or self.chi_square - chi_square >= IMPROVEMENT

    def explanation(
        self,
        code: str,
        model: Model,
        solution: Solution,
        penalty: float,
        *,
        given_up: int = 0,
        **facts: Any,
    ) -> Explanation | None:
        """Return a fault as an explanation, or None where it explains nothing.

        Parameters
        ----------
        model, solution : Model, Solution
            The case without the fault and its state; one row.
        penalty : float
            What the fault itself pays.
        given_up : int
            How many degrees of freedom the size of the fault takes beyond the solution's.
        facts
            Further fields of `Explanation`.
        """
        if not self.possible(model, solution):
            return None
        chi_square = float(solution.chi_square[0])
        freedom = int(solution.freedom[0]) - given_up
        if not self.reconciles(chi_square, freedom):
            return None
        vessel = self.tank.vessel
        surface = np.clip(solution.state.surface_m, vessel.z_min, vessel.z_max)
        volume, product, water = model.contents(replace(solution.state, surface_m=surface))
        return Explanation(
            code=code,
            chi_square=chi_square,
            freedom=freedom,
            score=chi_square + penalty + self._whereabouts(model, solution),
            level_m=float(surface[0]),
            volume_m3=float(volume[0]),
            mass_kg=float(product[0] + water[0]),
            **facts,
        )

    def _whereabouts(self, model: Model, solution: Solution) -> float:
        """Return what an explanation pays for the state it leaves the tank in."""
        paid = tail_penalty(self.departure(model, solution), PROFILE_SCALE)
        paid += tail_penalty(self._beyond_relief(model, solution), BEYOND_RELIEF_SCALE_PA)
        if self.last_level_m is not None:
            moved = float(solution.state.surface_m[0]) - self.last_level_m
            paid += tail_penalty(moved, LAST_LEVEL_SCALE_M)
        return paid

    def _beyond_relief(self, model: Model, solution: Solution) -> float:
        """Return how far the pressure above the liquid lies beyond what the tank holds, Pa."""
        outside = model.case.conditions.outside_pa(model.vapour_at_m)
        gauge = float(solution.state.vapour_pa[0]) - outside
        low, high = self.tank.relief_pa or (0.0, math.inf)
        return max(low - gauge, gauge - high, 0.0)

    def prediction_uncertainty(self, name: str) -> float | None:
        """Return how well the other readings fix one (standard uncertainty of its bias)."""
        refit = self.refits.get(name)
        return refit.uncertainty if refit is not None and refit.solution.solved else None


def corrected(readings: Readings, name: str, value: Any) -> Readings:
    """Return the readings with another value of the one of this name, SI."""
    fields = {
        "level": "level_m",
        "ullage": "ullage_m",
        "volume": "volume_m3",
        "density": "density_kg_m3",
    }
    return replace(readings, **{fields.get(name, f"{name}_pa"): value})
