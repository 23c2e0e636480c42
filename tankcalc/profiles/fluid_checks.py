"""What is worth a look in a fluid file although it can be true."""

from __future__ import annotations

import itertools
from typing import TYPE_CHECKING

import numpy as np

from tankcalc import units
from tankcalc.profiles.findings import At, Findings

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.fluids.models import DensityModel

USUAL_K = 288.15
STEP_K = 0.5
DENSITIES_KG_M3 = (300.0, 3000.0)
"""Liquids weigh as much as this, but for liquefied gases and metals (rule of thumb)."""

EXPANSIONS_PER_K = (-7e-5, 3e-3)
"""Water's at 0 degC, the lowest of any common liquid, and that of light hydrocarbons."""

KEYS = {"constant": "value", "expansion": "reference", "petroleum": "reference"}
"""The key that states the density, by model; \"points\" where there is a list."""


def note_fluid_doubts(fluid: Fluid, findings: Findings) -> None:
    """Note what can be true of a liquid and seldom is; layers are looked at in their own files."""
    model = fluid.layers[0].model
    if len(fluid.layers) > 1 or model.kind == "liquefied gas":
        return
    if not model.needs_temperature:
        _note_stated(model, findings)
        return
    low, high = model.limits_k
    at = min(max(USUAL_K, low), high)
    key = KEYS.get(model.kind)
    where: At = ("density",) if key is None else ("density", key)
    rho = float(model.density(np.asarray(at)))
    _note_density(rho, f" at {units.show(at, 'temperature')}", where, findings)
    if model.kind == "expansion":
        where = ("density", "coefficient")
    if model.kind == "table":
        _note_table(model, findings)
    elif np.isfinite(rho) and rho > 0.0:
        ends = np.clip(np.array([at - STEP_K, at + STEP_K]), low, high)
        _note_expansion(ends, np.asarray(model.density(ends)), where, findings)


def _note_stated(model: DensityModel, findings: Findings) -> None:
    """Note the densities a file states as they are in the tank."""
    rho = model.pieces(None).density_kg_m3
    key = "points" if model.kind == "samples" else KEYS.get(model.kind, "value")
    for extreme in {float(rho.min()), float(rho.max())}:
        _note_density(extreme, "", ("density", key), findings)


def _note_table(model: DensityModel, findings: Findings) -> None:
    """Note each step of a table over which the liquid grows or shrinks too much."""
    knots = np.asarray(getattr(model, "temperatures_k"))  # noqa: B009 - of one model only
    for n, ends in enumerate(itertools.pairwise(knots), start=1):
        pair = np.asarray(ends)
        _note_expansion(pair, np.asarray(model.density(pair)), ("density", "points", n), findings)


def _note_density(rho: float, at: str, where: At, findings: Findings) -> None:
    low, high = DENSITIES_KG_M3
    if not low <= rho <= high:
        findings.add(
            where,
            f"{rho:.6g} kg/m3{at} is no usual density of a liquid ({low:g} to {high:g} kg/m3).",
            "Check the figure and its unit.",
        )


def _note_expansion(
    t_k: np.ndarray[tuple[int], np.dtype[np.float64]],
    rho: np.ndarray[tuple[int], np.dtype[np.float64]],
    where: At,
    findings: Findings,
) -> None:
    expansion = -float((rho[1] - rho[0]) / (t_k[1] - t_k[0]) / (0.5 * (rho[0] + rho[1])))
    low, high = EXPANSIONS_PER_K
    if not low <= expansion <= high:
        which = "shrinks with warmth" if expansion < 0.0 else "expands"
        findings.add(
            where,
            f"the liquid {which} by {abs(expansion):.3g} per K, and few do "
            f"({low:g} to {high:g} per K).",
            "Check the figure, its sign and its unit.",
        )
