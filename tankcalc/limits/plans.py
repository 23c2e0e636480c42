"""One plan: everything that is asked of one set of readings, and its answers as data."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import asdict, dataclass
from typing import Any

from tankcalc import units
from tankcalc.limits.levels import (
    HIGH_LIMITS,
    LOW_LIMITS,
    Distance,
    distances,
    limit_words,
    spacing_notices,
)
from tankcalc.limits.mixing import After, Contents, after_adding, at_temperature
from tankcalc.limits.planner import (
    Receivable,
    StopCall,
    highest_for_growth,
    receivable,
    stop_call,
)
from tankcalc.limits.times import Arrival, times_to_limits
from tankcalc.result import Notice
from tankcalc.tank import Tank


@dataclass(frozen=True, slots=True)
class Question:
    """What is asked of a plan, SI.

    Attributes
    ----------
    limit, target_m : str, float
        The limit (empty: none) and the level that is planned to, m.
    level_uncertainty_m : float
        Standard uncertainty of the level now, m.
    flow_m3_s, flow_uncertainty_m3_s : float or None
        Net flow, positive into the tank, not zero, and its standard uncertainty, m3/s; None: not
        given.
    closing_s, drain_back_m3, next_reading_s
        As for `planner.stop_call`.
    added_kg : float or None
        A receipt; below zero a delivery.
    arriving_k : float or None
        Temperature of what arrives, K; None: that of the tank.
    mixed : bool
        Whether it mixes.
    design_k : float or None
        Temperature to be planned for, K.
    """

    limit: str
    target_m: float
    level_uncertainty_m: float = 0.0
    flow_m3_s: float | None = None
    flow_uncertainty_m3_s: float | None = None
    closing_s: float = 0.0
    drain_back_m3: float = 0.0
    next_reading_s: float | None = None
    added_kg: float | None = None
    arriving_k: float | None = None
    mixed: bool = True
    design_k: float | None = None


@dataclass(frozen=True, slots=True)
class Plan:
    """The answers; what was not asked is None.

    Attributes
    ----------
    question : Question
    contents : Contents
        The tank now.
    distances : tuple of Distance
        To every limit, from the lowest up.
    receivable : Receivable
        Up to the target.
    arrivals : tuple of Arrival
        At every limit.
    stop : StopCall or None
    after : After or None
        With the receipt.
    grown : After or None
        At the design temperature: the tank as it is, or as it is after the receipt.
    highest_m : float or None
        Highest level now that stays below the target at the design temperature, m.
    notices : tuple of Notice
        What is worth a look, and what was assumed.
    """

    question: Question
    contents: Contents
    distances: tuple[Distance, ...]
    receivable: Receivable
    arrivals: tuple[Arrival, ...]
    stop: StopCall | None
    after: After | None
    grown: After | None
    highest_m: float | None
    notices: tuple[Notice, ...]


def plan_of(tank: Tank, contents: Contents, question: Question) -> Plan:
    """Return the answers to what is asked.

    Raises
    ------
    InputError
        A temperature is needed and not known, or more is taken out than there is.
    RangeError
        A temperature outside what the density model covers.
    """
    after = grown = highest = None
    if question.added_kg is not None:
        after = after_adding(contents, question.added_kg, question.arriving_k, mixed=question.mixed)
    if question.design_k is not None:
        grown = _grown(contents, question, after)
        highest = highest_for_growth(contents, question.target_m, question.design_k)
    fits = receivable(contents, question.target_m, question.arriving_k, mixed=question.mixed)
    stop = _stop(contents, question)
    notices = (
        *spacing_notices(tank),
        *_assumed(contents, question),
        *_late(stop),
        *_beyond(tank, after, "after_adding", "after that"),
        *_beyond(tank, grown, "at_design_temperature", "at the design temperature"),
    )
    return Plan(
        question=question,
        contents=contents,
        distances=distances(tank, contents.level_m, contents.shell),
        receivable=fits,
        arrivals=_arrivals(tank, contents, question),
        stop=stop,
        after=after,
        grown=grown,
        highest_m=highest,
        notices=notices,
    )


def _grown(contents: Contents, question: Question, after: After | None) -> After:
    """Return the tank at the design temperature, with the receipt where there is one."""
    assert question.design_k is not None
    if after is None:
        return at_temperature(contents, question.design_k)
    if not contents.expands:
        return after
    product_kg = after.mass_kg - contents.below_kg
    volume = contents.below_m3 + product_kg / contents.density(question.design_k)
    return contents.holding(volume, after.mass_kg, question.design_k)


def _stop(contents: Contents, question: Question) -> StopCall | None:
    if question.flow_m3_s is None:
        return None
    return stop_call(
        contents,
        question.target_m,
        question.flow_m3_s,
        closing_s=question.closing_s,
        drain_back_m3=question.drain_back_m3,
        level_uncertainty_m=question.level_uncertainty_m,
        flow_uncertainty_m3_s=question.flow_uncertainty_m3_s or 0.0,
        next_reading_s=question.next_reading_s,
    )


def _arrivals(tank: Tank, contents: Contents, question: Question) -> tuple[Arrival, ...]:
    if question.flow_m3_s is None:
        return ()
    return times_to_limits(
        tank,
        contents.level_m,
        question.flow_m3_s / contents.shell,
        level_uncertainty_m=question.level_uncertainty_m,
        flow_uncertainty_m3_s=(question.flow_uncertainty_m3_s or 0.0) / contents.shell,
        next_reading_s=question.next_reading_s,
    )


def _assumed(contents: Contents, question: Question) -> Iterator[Notice]:
    thermal = question.arriving_k is not None or question.design_k is not None
    if thermal and not contents.expands:
        yield Notice(
            "no_expansion",
            "The density of this fluid is stated without temperature: nothing grows or shrinks in "
            "this plan. Choose a fluid with a density model that knows temperature.",
            "fluid",
        )
    if question.added_kg is not None and question.added_kg > 0.0 and thermal and contents.expands:
        how = (
            "the two mix, with equal heat capacity and no heat to shell or air"
            if question.mixed
            else "the two do not mix, and keep their temperatures"
        )
        yield Notice("mixing_assumed", f"What arrives is the same product; {how}.")
    if question.flow_m3_s is not None and question.flow_uncertainty_m3_s is None:
        yield Notice(
            "rate_taken_as_exact",
            "The rate is taken as exact: early and late differ by the level alone. Give its "
            "standard uncertainty with --rate-uncertainty.",
        )
    if question.flow_m3_s is not None and question.next_reading_s is None:
        yield Notice(
            "next_reading_unknown",
            "All times hold only while the rate stays what it is, and it is not known when the "
            "tank is read next. Give --next-reading, or read_every in [rates] of site.toml.",
        )


def _late(stop: StopCall | None) -> Iterator[Notice]:
    if stop is not None and stop.too_late:
        where = "outside the tank" if stop.reaches_m is None else f"at {stop.reaches_m:.3f} m"
        yield Notice(
            "stop_too_late",
            f"Stop called now comes too late for this level: the surface comes to rest {where}.",
        )


def _beyond(tank: Tank, state: After | None, code: str, when: str) -> Iterator[Notice]:
    """Say which limit a state is beyond, or that it does not fit."""
    if state is None:
        return
    if state.level_m is None:
        yield Notice(
            f"liquid_full_{code}",
            f"The tank is liquid-full {when}, and {units.show(state.over_m3, 'volume')} do not "
            "fit.",
        )
        return
    for name in (n for n in reversed(HIGH_LIMITS) if n in tank.limits_m):
        if state.level_m > tank.limits_m[name]:
            yield Notice(f"above_{name}_{code}", _words(state.level_m, "above", name, when))
            break
    for name in (n for n in LOW_LIMITS if n in tank.limits_m):
        if state.level_m < tank.limits_m[name]:
            yield Notice(f"below_{name}_{code}", _words(state.level_m, "below", name, when))
            break


def _words(level_m: float, side: str, name: str, when: str) -> str:
    return f"The level {when}, {level_m:.3f} m, is {side} the {limit_words(name)} level."


def as_json(plan: Plan, warnings: Sequence[Notice] = ()) -> dict[str, Any]:
    """Return a plan as plain JSON data, SI, with the warnings of the answer it rests on."""
    now = plan.contents
    notices = (*warnings, *plan.notices)
    return {
        "level_m": now.level_m,
        "volume_m3": now.below_m3 + now.product_m3,
        "mass_kg": now.below_kg + now.product_kg,
        "product_volume_m3": now.product_m3,
        "product_mass_kg": now.product_kg,
        "density_kg_m3": now.density_kg_m3,
        "temperature_k": now.temperature_k,
        "standard_temperature_k": now.base_k,
        "ullage_volume_m3": now.volume_at(now.vessel.z_max) - now.volume_at(now.level_m),
        "question": asdict(plan.question),
        "limits": [asdict(one) for one in plan.distances],
        "receivable": asdict(plan.receivable),
        "times": [asdict(one) for one in plan.arrivals],
        "stop": None if plan.stop is None else asdict(plan.stop),
        "after": None if plan.after is None else asdict(plan.after),
        "at_design_temperature": None if plan.grown is None else asdict(plan.grown),
        "highest_now_m": plan.highest_m,
        "warnings": [{"code": n.code, "message": n.message} for n in notices],
    }
