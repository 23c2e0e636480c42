"""Faults that change the column: free water, the temperature of legs, what lies above."""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from tankcalc.consistency.cause import Cause, follow
from tankcalc.consistency.explanation import Explanation
from tankcalc.consistency.inquiry import Inquiry
from tankcalc.consistency.plausibility import (
    BATCH_SCALE,
    BLANKET_SCALE_PA,
    LEG_SCALE_K,
    WATER_SCALE_M,
    size_penalty,
)
from tankcalc.consistency.problem import Solution
from tankcalc.constants import ICE_POINT_K
from tankcalc.fluids.water import Water
from tankcalc.gauging.case import Case
from tankcalc.gauging.estimate import FACTOR, VAPOUR, fit, weighted_residuals
from tankcalc.gauging.groups import choices
from tankcalc.gauging.model import Model
from tankcalc.instruments import FilledLeg

LARGEST_LEG_K = 100.0
"""Legs further from the temperature taken than this are at none that a line on a wall has, K."""


def causes(inquiry: Inquiry) -> Iterator[Explanation]:
    """Yield the causes which, being otherwise than taken, would reconcile the readings."""
    if not inquiry.freedom:
        return
    yield from _largest(inquiry, _waters(inquiry))
    yield from _largest(inquiry, _legs(inquiry))
    yield from _freed(inquiry)


def _largest(inquiry: Inquiry, tried: Iterator[Cause]) -> Iterator[Explanation]:
    """Yield the best explanation of several of one kind, if there is any."""
    found = [e for e in (_explained(inquiry, cause) for cause in tried) if e is not None]
    yield from sorted(found, key=lambda e: e.score)[:1]


def _explained(inquiry: Inquiry, cause: Cause) -> Explanation | None:
    followed = follow(inquiry.problem, inquiry.solution, cause)
    if followed is None:
        return None
    size = followed.value - cause.taken
    otherwise: dict[str, Any] = {cause.field: followed.value}
    return inquiry.explanation(
        cause.code,
        followed.model,
        followed.solution,
        size_penalty(size, followed.uncertainty, cause.scale),
        given_up=1,
        reading=cause.reading,
        size=size,
        dimension=cause.dimension,
        uncertainty=followed.uncertainty,
        readings=replace(inquiry.readings, **otherwise),
        hints=(cause.hint,),
    )


def _waters(inquiry: Inquiry) -> Iterator[Cause]:
    """Yield free water of a height in every stretch between two taps: it is felt anew in each."""
    case = inquiry.problem.model.case
    surface = float(inquiry.solution.state.surface_m[0])
    taken = case.liquid.water_top_m
    layered = taken is not None
    if not layered and not _water_sinks(inquiry, surface):
        return
    bottom = case.tank.vessel.z_min

    def model_of(top_m: float) -> Model:
        read = replace(inquiry.readings, water_level_m=top_m)
        return Model(Case.of(inquiry.tank, inquiry.fluid, read))

    taps = {case.tank.transmitters[t].elevation_m for t in case.tank.transmitters}
    if case.tank.dp is not None:
        taps.add(case.tank.dp.high.elevation_m)
    edges = sorted({max(z, bottom) for z in taps if z < surface} | {surface})
    for low, high in itertools.pairwise(edges):
        yield Cause(
            "water_level" if layered else "water_bottom",
            "water_level",
            "length",
            "A water dip would settle it.",
            model_of,
            "water_level_m",
            bottom if taken is None else taken,
            0.5 * (low + high),
            low,
            high,
            WATER_SCALE_M,
        )


def _water_sinks(inquiry: Inquiry, surface_m: float) -> bool:
    """Return whether water is a liquid at the tank's temperatures, and heavier than the product."""
    case, water = inquiry.problem.model.case, Water()
    read = [kelvin for _, kelvin in inquiry.readings.temperatures]
    air_k = inquiry.readings.air_temperature_k or case.tank.surroundings.air_temperature_k
    temperatures = read or [ICE_POINT_K + 15.0 if air_k is None else air_k]
    low, high = water.limits_k
    if min(temperatures) < low or max(temperatures) > high:
        return False
    return bool(np.min(water.density(np.array(temperatures))) > case.column.density(surface_m))


def _legs(inquiry: Inquiry) -> Iterator[Cause]:
    """Yield legs at another temperature, where any leg's fill expands."""
    model = inquiry.problem.model
    taken = model.case.conditions.leg_temperature_k
    if taken is None or not _expanding(model.case):
        return

    def model_of(temperature_k: float) -> Model:
        conditions = replace(model.case.conditions, leg_temperature_k=temperature_k)
        return Model(replace(model.case, conditions=conditions))

    yield Cause(
        "leg_temperature",
        "leg_temperature",
        "temperature_difference",
        "Feel or measure the legs' temperature: sun, frost or tracing on one side.",
        model_of,
        "leg_temperature_k",
        taken,
        taken,
        taken - LARGEST_LEG_K,
        taken + LARGEST_LEG_K,
        LEG_SCALE_K,
    )


def _expanding(case: Case) -> bool:
    """Return whether the leg of an instrument that was read changes with its temperature."""
    read = [t for tag, t in case.tank.transmitters.items() if f"{tag}_pa" in case.given]
    lines: list[Any] = [t.leg for t in read if isinstance(t.leg, FilledLeg)]
    if case.tank.dp is not None and "dp_pa" in case.given:
        lines += [case.tank.dp.high, case.tank.dp.low]
    return any(x.fill_expansion_per_k and x.fill_density_at_k is not None for x in lines)


def _freed(inquiry: Inquiry) -> Iterator[Explanation]:
    """Yield what was taken as known of the state itself: the pressure above, the density."""
    model, solution = inquiry.problem.model, inquiry.solution
    unknowns = choices(model)[int(solution.choice[0])]
    if VAPOUR not in unknowns and model.vent_pa is not None:
        yield from _with_unknown(inquiry, VAPOUR, "blanket_missing")
    if FACTOR not in unknowns:
        yield from _with_unknown(inquiry, FACTOR, "other_density")


def _with_unknown(inquiry: Inquiry, unknown: int, code: str) -> Iterator[Explanation]:
    """Yield what the readings make of one more unknown of the state, if it reconciles them."""
    problem, base = inquiry.problem, inquiry.solution
    unknowns = (*choices(problem.model)[int(base.choice[0])], unknown)
    found = fit(problem.observations, base.state, unknowns)
    chi_square = np.sum(weighted_residuals(problem.observations, found.state) ** 2, axis=-1)
    solution = Solution(found.state, base.choice, chi_square, np.array([found.freedom]))
    if not inquiry.reconciles(float(chi_square[0]), found.freedom):
        return
    uncertainty = float(found.uncertainty(unknown)[0])
    facts: dict[str, Any] = {"reading": "", "readings": inquiry.readings}
    if unknown == VAPOUR:
        size = float((found.state.vapour_pa - base.state.vapour_pa)[0])
        penalty = size_penalty(size, uncertainty, BLANKET_SCALE_PA)
        facts |= {"size": size, "dimension": "pressure", "uncertainty": uncertainty}
        facts["hints"] = ("Look at the vent and its valve.",)
    else:
        share = float(found.state.factor[0]) - 1.0
        rho = float(problem.model.product.density(found.state.surface_m)[0])
        penalty = size_penalty(share, uncertainty, BATCH_SCALE)
        sampled = replace(inquiry.readings, density_kg_m3=rho * (1.0 + share))
        facts |= {"size": -share * rho, "dimension": "density", "uncertainty": uncertainty * rho}
        facts |= {"readings": sampled, "hints": ("Take a sample.",)}
    explained = inquiry.explanation(code, problem.model, solution, penalty, **facts)
    if explained is not None:
        yield explained
