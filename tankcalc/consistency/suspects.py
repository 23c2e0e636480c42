"""Whom to believe: every single fault that would reconcile readings that disagree."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from dataclasses import replace
from types import MappingProxyType

import numpy as np

from tankcalc.consistency.causes import causes
from tankcalc.consistency.drifts import drifts
from tankcalc.consistency.explanation import Disagreement, Explanation
from tankcalc.consistency.further import advice
from tankcalc.consistency.inquiry import ROUNDING, Inquiry, allowed
from tankcalc.consistency.problem import Problem, Solution, best, starts
from tankcalc.consistency.samples import samples
from tankcalc.consistency.slips import slips
from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.case import Case
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.solve import solve
from tankcalc.readings import Readings
from tankcalc.tank import Tank

CONTRADICTIONS = frozenset(
    {
        "above_top",
        "below_tap",
        "density_impossible",
        "p3_covered",
        "level_outside",
        "ullage_outside",
        "volume_outside",
    }
)
"""Refusals that say that a reading and the tank contradict each other."""

PRESSURES = frozenset({"p1", "p2", "p3", "dp"})

EMPTY_SLACK = 3.0
"""A pressure below what an empty tank shows by more than this many standard uncertainties is not
that of an empty tank."""

NONE_ALONE = (
    "No single fault reconciles the readings: at least two are wrong, or the liquid is not as the "
    "profile says."
)
CONTRADICTED = "The readings contradict the tank, and no single slip that was tried explains it."
NEARLY = "It leaves a little more disagreement than chance does."
NOT_SETTLED = "The readings do not settle what is in the tank: nothing can be checked."
NOTHING_TOLD: Mapping[str, str] = MappingProxyType({})


def explain(
    tank: Tank,
    fluid: Fluid,
    readings: Readings,
    *,
    typed_units: Mapping[str, str] = NOTHING_TOLD,
    last_level_m: float | None = None,
) -> Disagreement:
    """Return whether readings agree, and every single fault that would explain it if not.

    Parameters
    ----------
    tank, fluid, readings
        As for ``evaluate``; single readings, not arrays.
    typed_units : mapping of str to str
        By the name of a reading ("p1", "level"): the unit it was typed in, by its canonical
        name. Where it is not told, a slip of units may have been from any usual one.
    last_level_m : float or None
        Level at the last reading, m; explanations that leave the level near it rank higher.

    Returns
    -------
    Disagreement
        As data; nothing is chosen. A mass that was given has no part in it.

    Raises
    ------
    ValueError
        A reading is an array.

    Notes
    -----
    The best estimate is that of weighted least squares; it is consistent while chi-square is
    within the value that chance exceeds once in forty times. Each fault is then tried alone: a
    free bias of each reading in turn, each named slip, each cause that changes the column. Those
    that leave chi-square within its allowed value are listed, by what `plausibility` says of
    them.

    References
    ----------
    Weighted least squares, the chi-square test and the search for single gross errors: as in
    VDI 2048 (from memory).
    """
    if any(np.ndim(getattr(readings, name)) for name in readings.given() - {"temperatures"}):
        raise ValueError("explain takes one set of readings, not arrays")
    try:
        model, found = solve(tank, fluid, readings)
    except (RangeError, InputError) as error:
        return Disagreement(0.0, 0, 0.0, False, remark=str(error))
    kept = model.case.readings
    problem = Problem.of_model(model)
    solution = _solution(problem, found.state)
    if solution is None:
        return Disagreement(0.0, 0, 0.0, False, remark=NOT_SETTLED)
    profile = _profile(tank, fluid, kept)
    inquiry = Inquiry(tank, fluid, kept, problem, solution, profile, typed_units, last_level_m)
    refused = {n.code for n in found.notices if n.refuses}
    return _found(inquiry, bool(refused & CONTRADICTIONS))


def _solution(problem: Problem, found: State) -> Solution | None:
    """Return the best solution, from the answer if there is one; None with nothing to begin from.

    Where that one leaves a disagreement, the others are tried as well.
    """
    answered = State(*(np.atleast_1d(v) for v in (found.surface_m, found.factor, found.vapour_pa)))
    first = best(problem, [answered])
    if first.solved and first.chi_square[0] <= allowed(int(first.freedom[0])):
        return first
    begun = list(starts(problem.model))
    if not begun:
        return None
    second = best(problem, begun)
    return min(first, second, key=lambda solution: float(solution.chi_square[0]))


def _found(inquiry: Inquiry, refused: bool) -> Disagreement:
    """Return what an inquiry finds."""
    solved, freedom = inquiry.solution.solved, inquiry.freedom
    apart = solved and freedom > 0 and inquiry.chi_square > allowed(freedom)
    if solved:
        contradiction = not inquiry.possible(inquiry.problem.model, inquiry.solution)
    else:
        contradiction = refused and not _may_be_empty(inquiry)
    if not apart and not contradiction:
        return _agreement(inquiry)
    listed = _weighed([*drifts(inquiry), *slips(inquiry), *samples(inquiry), *causes(inquiry)])
    remark = NONE_ALONE if freedom else CONTRADICTED
    return Disagreement(
        inquiry.chi_square, freedom, allowed(freedom), True, listed, "" if listed else remark
    )


def _agreement(inquiry: Inquiry) -> Disagreement:
    if inquiry.freedom:
        return Disagreement(inquiry.chi_square, inquiry.freedom, allowed(inquiry.freedom), False)
    remark = advice(inquiry) if inquiry.solution.solved else NOT_SETTLED
    return Disagreement(0.0, 0, 0.0, False, remark=remark)


def _may_be_empty(inquiry: Inquiry) -> bool:
    """Return whether the pressures are those of a tank with nothing above its taps."""
    problem, state = inquiry.problem, inquiry.solution.state
    empty = State(np.array([inquiry.tank.vessel.z_min]), state.factor * 0.0 + 1.0, state.vapour_pa)
    pressures = [o for o in problem.observations if o.name in PRESSURES]
    together = math.hypot(*(float(o.uncertainty[0]) for o in pressures))
    return all(
        abs(float((o.value - o.expected(empty))[0])) <= EMPTY_SLACK * together for o in pressures
    )


def _profile(tank: Tank, fluid: Fluid, readings: Readings) -> Model | None:
    """Return the case without an observed density, None where the profile has none to give."""
    try:
        return Model(Case.of(tank, fluid, replace(readings, density_kg_m3=None)))
    except (RangeError, InputError):
        # The observed density stands for a profile that does not cover this temperature.
        return None


def _weighed(found: Iterable[Explanation]) -> tuple[Explanation, ...]:
    """Return explanations with their shares of the evidence, the most plausible first.

    Those that leave more than is allowed come last.
    """
    within, beyond = [], []
    for e in sorted(found, key=lambda e: e.score):
        if e.chi_square <= max(allowed(e.freedom), ROUNDING):
            within.append(e)
        else:
            beyond.append(replace(e, hints=(*e.hints, NEARLY)))
    listed = within + beyond
    least = min((e.score for e in listed), default=0.0)
    evidence = [math.exp(0.5 * (least - e.score)) for e in listed]
    return tuple(
        replace(e, weight=w / sum(evidence)) for e, w in zip(listed, evidence, strict=True)
    )
