"""Faults without a free size: another unit, another reference, an ullage for a level."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from tankcalc import units
from tankcalc.consistency.explanation import Explanation
from tankcalc.consistency.inquiry import Inquiry, corrected
from tankcalc.consistency.plausibility import choice_penalty, spread_penalty
from tankcalc.consistency.problem import Problem, settle, starts
from tankcalc.gauging.inputs import BAROMETER_PA

USUAL_UNITS = {
    "pressure": (
        "kPa",
        "bar",
        "psi",
        "mbar",
        "mH2O",
        "kgf/cm2",
        "inH2O@4degC",
        "mmH2O",
        "MPa",
        "Pa",
    ),
    "length": ("m", "ft", "mm", "cm", "in"),
}
"""By dimension: units that readings are typed in, the most usual first (common practice)."""

SAME_RATIO = 1e-4
"""Two pairs of units whose ratio agrees to this share are one slip."""


SCREEN = 6.0
"""Values further from what the other readings foretell, in standard uncertainties, are not tried:
chi-square would be left at its square."""


@dataclass(frozen=True, slots=True)
class Slip:
    """One value that a reading may have been meant to have.

    Attributes
    ----------
    code : str
        As in `Explanation`.
    value : float
        What was meant, SI.
    share : float
        How likely it is among the slips of its kind in this reading.
    spread : float
        How well the correction is known, a standard deviation.
    typed_unit, meant_unit : str
        Of a unit slip.
    """

    code: str
    value: float
    share: float = 1.0
    spread: float = 0.0
    typed_unit: str = ""
    meant_unit: str = ""


def slips(inquiry: Inquiry) -> Iterator[Explanation]:
    """Yield the slips of pressures and levels that would reconcile the readings."""
    for name in inquiry.problem.names:
        if name in ("density", "volume"):
            continue
        near = [s for s in _slips_of(inquiry, name) if _worth_trying(inquiry, name, s)]
        tried = list(_told_apart(inquiry, name, near))
        if tried:
            yield from _tried(inquiry, name, tried)


@cache
def unit_ratios(dimension: str, typed_unit: str = "") -> dict[tuple[str, str], float]:
    """Return by what a figure is off that was typed in one unit and is in another.

    Parameters
    ----------
    typed_unit : str
        The unit it was typed in; empty where that is not known and any may have been. A signal
        (mA, %) is in no other unit.

    Returns
    -------
    dict of (typed, meant) to float
        The value that was meant over the value typed; of pairs with one ratio, the most usual.
    """
    if typed_unit and typed_unit not in units.NAMES[dimension]:
        return {}
    names = dict.fromkeys((*USUAL_UNITS[dimension], *([typed_unit] if typed_unit else [])))
    size = {name: units.from_unit(1.0, name, dimension) for name in names}
    pairs = sorted(
        itertools.permutations(size, 2), key=lambda pair: sum(list(size).index(u) for u in pair)
    )
    found: dict[tuple[str, str], float] = {}
    for typed, meant in pairs:
        ratio = size[meant] / size[typed]
        known = any(abs(ratio / other - 1.0) < SAME_RATIO for other in found.values())
        if typed_unit in ("", typed) and not known:
            found[typed, meant] = ratio
    return found


def _slips_of(inquiry: Inquiry, name: str) -> Iterator[Slip]:
    """Yield the values that a reading may have been meant to have."""
    dimension = {"level": "length", "ullage": "length"}.get(name, "pressure")
    value = _typed(inquiry, name)
    ratios = unit_ratios(dimension, inquiry.typed_units.get(name, ""))
    total = sum(1.0 / rank for rank in range(1, len(ratios) + 1))
    for rank, ((typed, meant), ratio) in enumerate(ratios.items(), start=1):
        yield Slip("unit", value * ratio, 1.0 / rank / total, 0.0, typed, meant)
    if dimension == "length":
        code = "ullage_as_level" if name == "level" else "level_as_ullage"
        yield Slip(code, inquiry.tank.ullage_reference_m - value)
    elif name != "dp":
        yield _reference_slip(inquiry, name, value)


def _reference_slip(inquiry: Inquiry, tag: str, value: float) -> Slip:
    """Return the slip between gauge and absolute: by the outside pressure at the vent."""
    fitted = inquiry.tank.transmitters[tag]
    outside = inquiry.problem.model.case.conditions.outside_pa(fitted.vent_m)
    read = inquiry.readings.barometer_pa is not None
    known = "read" if read else inquiry.tank.surroundings.outside_pressure_from
    away = -outside if fitted.reads == "gauge" else outside
    return Slip("reference", value + away, spread=BAROMETER_PA[known])


def _told_apart(inquiry: Inquiry, name: str, slips: Iterable[Slip]) -> Iterator[Slip]:
    """Yield slips further from the reading and from likelier slips than its uncertainty."""
    own = inquiry.problem.at(name)
    taken = [_typed(inquiry, name)]
    for slip in slips:
        if all(abs(slip.value - value) > float(own.uncertainty[0]) for value in taken):
            taken.append(slip.value)
            yield slip


def _worth_trying(inquiry: Inquiry, name: str, slip: Slip) -> bool:
    """Return whether a value is anywhere near what the other readings foretell, if they do."""
    refit = inquiry.refits.get(name)
    if refit is None:
        return True
    if not refit.solution.solved:
        return False
    own = inquiry.problem.at(name)
    meant = slip.value
    if name == "ullage":
        meant = inquiry.tank.ullage_reference_m - meant
    foretold = float(own.value[0]) - refit.bias
    return abs(meant - foretold) <= SCREEN * math.hypot(slip.spread, refit.uncertainty)


def _tried(inquiry: Inquiry, name: str, tried: list[Slip]) -> Iterator[Explanation]:
    """Solve the readings with every value in turn, a row for each."""
    values = np.array([slip.value for slip in tried])
    many = corrected(inquiry.readings, name, values)
    problem = Problem.of(inquiry.tank, inquiry.fluid, many)
    problem = problem.spread_out(name, np.array([slip.spread for slip in tried]))
    start = next(starts(problem.model))
    solution = settle(problem.model, problem.observations, start)
    for row, slip in enumerate(tried):
        alone = solution.take(row)
        if not inquiry.reconciles(float(alone.chi_square[0]), int(alone.freedom[0])):
            continue
        foretold = inquiry.prediction_uncertainty(name)
        penalty = choice_penalty(slip.share)
        value = slip.value
        if slip.spread and foretold is not None:
            penalty += spread_penalty(slip.spread, foretold)
        if slip.spread:
            value = float(problem.at(name).expected(alone.state)[0])
        found = inquiry.explanation(
            slip.code, problem.model, alone, penalty, **_facts(inquiry, name, slip, value)
        )
        if found is not None:
            yield found


def _facts(inquiry: Inquiry, name: str, slip: Slip, value: float) -> dict[str, Any]:
    length = name in ("level", "ullage")
    return {
        "reading": name,
        "size": _typed(inquiry, name) - value,
        "dimension": "length" if length else "pressure",
        "uncertainty": 0.0,
        "readings": corrected(inquiry.readings, name, value),
        "typed_unit": slip.typed_unit,
        "meant_unit": slip.meant_unit,
        "hints": ("Ask how it was read, or read it again.",),
    }


def _typed(inquiry: Inquiry, name: str) -> float:
    """Return a pressure, level or ullage as it was given, SI."""
    field = f"{name}_m" if name in ("level", "ullage") else f"{name}_pa"
    return float(getattr(inquiry.readings, field))
