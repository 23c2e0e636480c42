"""A liquid tried: what was typed, read into a density model and temperatures, or told why not."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from itertools import takewhile
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import TankcalcError
from tankcalc.fluids.models import Temperatures
from tankcalc.profiles.findings import Finding, Findings
from tankcalc.profiles.fluid_schema import FLUID
from tankcalc.tui import liquid_text
from tankcalc.tui.liquid_draft import MODEL, NAME, TEMPERATURE, LiquidDraft, id_of
from tankcalc.typed import readings_from_text

if TYPE_CHECKING:
    from tankcalc.fluids.models import DensityModel, FloatArray
    from tankcalc.tank import Tank

NO_DENSITY = "The figures give no density there, which is below zero or beyond all bounds."
USUAL_K = ICE_POINT_K + 15.0
"""Temperature where nothing is typed, K."""


@dataclass(frozen=True, slots=True)
class Trial:
    """What a draft comes to.

    Attributes
    ----------
    model : DensityModel or None
        None where a figure is missing or cannot be used.
    temperatures : Temperatures or None
        What was typed to try it at; None where that cannot be used.
    problems : dict of str to str
        By the id of the field: what is wrong, what to do.
    """

    model: DensityModel | None = None
    temperatures: Temperatures | None = None
    problems: dict[str, str] = field(default_factory=dict)


def tried(draft: LiquidDraft, tank: Tank) -> Trial:
    """Return what a draft comes to, read by the schema that reads the files."""
    findings = Findings(Path())
    held = {"density": draft.stated()} | ({"name": draft.name} if draft.name.strip() else {})
    values = FLUID.values(held, (), findings)
    stated = values["density"]
    problems: dict[str, str] = {}
    for finding in findings.listed():
        id = _field_of(finding, draft)
        if id == MODEL or draft.text(id).strip():
            problems.setdefault(id, _words(finding))
    model = None if stated is None else stated.model
    temperatures, wrong = _temperatures(draft.temperature, tank, model)
    if wrong:
        problems[TEMPERATURE] = wrong
    return Trial(model, temperatures, problems)


def _field_of(finding: Finding, draft: LiquidDraft) -> str:
    """Return the id of the field that a finding belongs to."""
    if finding.at[:1] == ("name",):
        return NAME
    ids = [one.id for one in draft.fields()]
    path = tuple(str(key) for key in takewhile(lambda key: isinstance(key, str), finding.at[1:]))
    near = (id_of(path[:n]) for n in range(len(path), 0, -1))
    found = next((id for id in near if id in ids), MODEL)
    if found != MODEL or not path:
        return found
    # A table of several fields: the first of them that is empty is what it lacks.
    inside = [id for id in ids if id.startswith(f"{id_of(path)}-")]
    empty = [id for id in inside if not draft.text(id).strip()]
    return [*empty, *inside, MODEL][0]


def _words(finding: Finding) -> str:
    entry = next((key + 1 for key in finding.at if isinstance(key, int)), None)
    where = "" if entry is None else f"entry {entry}: "
    return liquid_text.as_typed(f"{where}{finding.what} {finding.advice}".rstrip())


def _temperatures(
    text: str, tank: Tank, model: DensityModel | None
) -> tuple[Temperatures | None, str]:
    """Return the temperatures to try a model at, and why what was typed is none."""
    if not text.strip():
        usual = Temperatures((usual_k(model),))
        return (usual, "") if model is None else _covered(model, usual)
    readings, wrong = readings_from_text(tank, {"temperature": text})
    if wrong:
        return None, wrong["temperature"]
    pairs = [(0.0 if z is None else z, t) for z, t in readings.temperatures]
    pairs.sort()
    elevations = tuple(z for z, _ in pairs) if len(pairs) > 1 else ()
    found = Temperatures(tuple(t for _, t in pairs), elevations)
    return (found, "") if model is None else _covered(model, found)


def _covered(model: DensityModel, found: Temperatures) -> tuple[Temperatures | None, str]:
    """Return the temperatures where a model gives a density at them, or why it does not."""
    if not model.needs_temperature:
        return found, ""
    try:
        rho = model.checked_density(np.asarray(found.values_k))
    except TankcalcError as error:
        return None, str(error)
    return (found, "") if is_density(rho) else (None, NO_DENSITY)


def is_density(rho: FloatArray) -> bool:
    """Return whether all of these are densities that a liquid can have."""
    return bool(np.all(np.isfinite(rho) & (rho > 0.0)))


def usual_k(model: DensityModel | None) -> float:
    """Return the usual temperature; the middle of a model's limits where it lies outside."""
    low, high = (0.0, math.inf) if model is None else model.limits_k
    return USUAL_K if low <= USUAL_K <= high else 0.5 * (low + high)
