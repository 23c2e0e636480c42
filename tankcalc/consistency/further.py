"""Which further reading would allow what was read to be checked."""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from dataclasses import replace
from typing import Any

from tankcalc.consistency.explanation import sentence
from tankcalc.consistency.inquiry import Inquiry
from tankcalc.consistency.problem import Problem, settle
from tankcalc.gauging.groups import COVER_M
from tankcalc.gauging.model import State

NOUNS = {"level_m": "a dip", "density_kg_m3": "the density of a sample"}


def further(inquiry: Inquiry) -> list[tuple[str, ...]]:
    """Return the readings, alone or else in pairs, that would leave one to spare; in words.

    Notes
    -----
    Each is tried: given as the answer foretells it, it must leave more readings than unknowns.
    """
    candidates = dict(_candidates(inquiry))
    for size in (1, 2):
        found = [
            chosen
            for chosen in itertools.combinations(candidates, size)
            if _would_check(inquiry, {name: candidates[name] for name in chosen})
        ]
        if found:
            return [tuple(NOUNS.get(n, n.removesuffix("_pa")) for n in chosen) for chosen in found]
    return []


def advice(inquiry: Inquiry) -> str:
    """Return in a sentence that nothing can be checked, and what would allow it."""
    start = "No more was read than the answer needs: nothing can be checked."
    found = [" with ".join(chosen) for chosen in further(inquiry)]
    if not found:
        return start
    what = found[0] if len(found) == 1 else f"{', '.join(found[:-1])} or {found[-1]}"
    return f"{start} {sentence(what)} would allow it."


def _candidates(inquiry: Inquiry) -> Iterator[tuple[str, float]]:
    """Yield the fields of readings that were not taken, with what they should be."""
    model, state = inquiry.problem.model, inquiry.solution.state
    case = model.case
    surface = float(state.surface_m[0])
    if not case.given.keys() & {"level_m", "ullage_m"}:
        yield "level_m", surface
    for tag in case.fitted():
        felt = tag in ("p3", "dp") or surface > case.tank.transmitters[tag].elevation_m + COVER_M
        if f"{tag}_pa" not in case.given and felt:
            yield f"{tag}_pa", float(model.expected(tag, state)[0])
    density = float((state.factor * model.product.density(state.surface_m))[0])
    if case.readings.density_kg_m3 is None and density > 0.0:  # none inside the free water
        yield "density_kg_m3", density


def _would_check(inquiry: Inquiry, values: dict[str, Any]) -> bool:
    readings = replace(inquiry.readings, **values)
    problem = Problem.of(inquiry.tank, inquiry.fluid, readings)
    state = inquiry.solution.state
    if "density_kg_m3" in values:
        state = State(state.surface_m, state.factor * 0.0 + 1.0, state.vapour_pa)
    solution = settle(problem.model, problem.observations, state)
    return solution.solved and int(solution.freedom[0]) > 0
