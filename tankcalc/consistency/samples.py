"""A sample's density taken at one temperature for that at another."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from tankcalc.consistency.explanation import Explanation
from tankcalc.consistency.inquiry import Inquiry
from tankcalc.consistency.plausibility import choice_penalty, spread_penalty
from tankcalc.consistency.problem import Problem, settle, starts
from tankcalc.constants import ICE_POINT_K
from tankcalc.fluids.models import DensityModel
from tankcalc.gauging.inputs import TEMPERATURE_K

LABORATORY_K = (ICE_POINT_K + 15.0, ICE_POINT_K + 20.0)
"""Temperatures that densities are stated at, besides that of the fluid's own model."""

APART_K = 1.0
"""Temperatures nearer to each other than this are not told apart: 60 degF is 15.6 degC."""

SCREEN = 6.0
"""Densities further from what the other readings foretell, in standard uncertainties, are not
tried: chi-square would be left at its square."""


@dataclass(frozen=True, slots=True)
class Sample:
    """A density that may have been meant: code, value (kg/m3), its spread, its temperature (K)."""

    code: str
    density_kg_m3: float
    spread_kg_m3: float
    at_k: float


def samples(inquiry: Inquiry) -> Iterator[Explanation]:
    """Yield the mistakes of temperature in an observed density that reconcile the readings."""
    tried = list(samples_of(inquiry))
    for sample in tried:
        if not _worth_trying(inquiry, sample):
            continue
        given = replace(inquiry.readings, density_kg_m3=sample.density_kg_m3)
        problem = Problem.of(inquiry.tank, inquiry.fluid, given)
        share = sample.spread_kg_m3 / sample.density_kg_m3
        problem = problem.spread_out("density", np.array([share]))
        solution = settle(problem.model, problem.observations, next(starts(problem.model)))
        foretold = inquiry.prediction_uncertainty("density")
        penalty = choice_penalty(1.0 / len(tried))
        penalty += 0.0 if foretold is None else spread_penalty(share, foretold)
        found = inquiry.explanation(
            sample.code,
            problem.model,
            solution,
            penalty,
            reading="density",
            size=float(inquiry.readings.density_kg_m3 or 0.0) - sample.density_kg_m3,
            dimension="density",
            uncertainty=0.0,
            readings=given,
            at_k=sample.at_k,
            hints=("Look at the sample's slip for its temperature.",),
        )
        if found is not None:
            yield found


def samples_of(inquiry: Inquiry) -> Iterator[Sample]:
    """Yield the densities that may have been meant by the one given, by the model's expansion."""
    observed, profile = inquiry.readings.density_kg_m3, inquiry.profile
    model = inquiry.fluid.layers[-1].model
    if observed is None or profile is None or not model.needs_temperature:
        return
    tank_k = profile.case.liquid.temperature_k
    if tank_k is None:
        return
    for at_k in _temperatures(model, tank_k):
        warm, cold, step = _densities(model, (tank_k, at_k, _beside(model, tank_k)))
        spread = abs(step - warm)
        yield Sample("sample_temperature", observed * warm / cold, spread, at_k)
        yield Sample("sample_converted", observed * cold / warm, spread, at_k)


def _temperatures(model: DensityModel, tank_k: float) -> list[float]:
    """Return the temperatures (K) that a sample may be at, which the model covers."""
    low, high = model.limits_k
    found: list[float] = []
    for at_k in (getattr(model, "at_k", LABORATORY_K[0]), *LABORATORY_K):
        apart = all(abs(at_k - other) >= APART_K for other in (*found, tank_k))
        if low <= at_k <= high and apart:
            found.append(at_k)
    return found


def _beside(model: DensityModel, tank_k: float) -> float:
    """Return a temperature (K) off by what that of a tank is uncertain by, which is covered."""
    high = model.limits_k[1]
    return tank_k + TEMPERATURE_K if tank_k + TEMPERATURE_K <= high else tank_k - TEMPERATURE_K


def _densities(model: DensityModel, temperatures_k: tuple[float, ...]) -> list[float]:
    return [float(rho) for rho in model.checked_density(np.array(temperatures_k))]


def _worth_trying(inquiry: Inquiry, sample: Sample) -> bool:
    """Return whether a density is anywhere near what the other readings foretell."""
    refit = inquiry.refits.get("density")
    if refit is None or not refit.solution.solved:
        return True
    observed = inquiry.readings.density_kg_m3 or 0.0
    foretold = observed * (1.0 - refit.bias)
    spread = np.hypot(sample.spread_kg_m3, refit.uncertainty * observed)
    return bool(abs(sample.density_kg_m3 - foretold) <= SCREEN * spread)
