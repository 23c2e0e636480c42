"""A liquid tried, as figures and curves: at a temperature, over temperature, over elevation."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from tankcalc import units
from tankcalc.errors import TankcalcError
from tankcalc.fluids.column import Column
from tankcalc.tui.chart import Axis, Plot, nice_axis
from tankcalc.tui.liquid_trial import Trial, is_density, tried, usual_k

if TYPE_CHECKING:
    from tankcalc.fluids.models import DensityModel, FloatArray, Temperatures
    from tankcalc.tank import Tank
    from tankcalc.tui.liquid_draft import LiquidDraft
    from tankcalc.units import System

REACH_K = 40.0
"""How far to each side of the temperature the curve goes, inside the model's limits."""
POINTS = 241
STEP_K = 0.25
"""Half the difference over which the expansion is taken; the error is of its square."""


@dataclass(frozen=True, slots=True)
class Shown:
    """A trial, with its figures and curves in the units of the console; words for no curve."""

    trial: Trial = field(default_factory=Trial)
    figures: Sequence[tuple[str, str]] = ()
    over_temperature: Plot | str = ""
    over_elevation: Plot | str = ""


def shown_of(draft: LiquidDraft, tank: Tank, system: System) -> Shown:
    """Return everything there is to show of a draft."""
    # Figures that make no sense may divide by zero: what comes of it is looked at each time.
    with np.errstate(all="ignore"):
        trial = tried(draft, tank)
        return Shown(
            trial,
            figures(trial, tank, system),
            over_temperature(trial, system),
            over_elevation(trial, tank, system),
        )


def figures(trial: Trial, tank: Tank, system: System) -> list[tuple[str, str]]:
    """Return (label, value): density where it was tried, its base, its change, its limits."""
    model, temperatures = trial.model, trial.temperatures
    if model is None:
        return []
    if not model.needs_temperature:
        return [("density", _stated(model, system)), ("", "as it is in the tank")]
    rows: list[tuple[str, str]] = []
    for z, t in _elements(temperatures):
        where = "at" if z is None else units.show(z, "length", system, digits=2)
        at = units.show(t, "temperature", system)
        rows.append((f"{where} {at}", units.show(_density(model, t), "density", system)))
        if z is None:
            rows.append(("changes", _change(model, t, system)))
    base_k = model.base_k
    if base_k is None:
        base_k = tank.surroundings.standard_temperature_k
    if model.limits_k[0] <= base_k <= model.limits_k[1]:
        base = _density(model, base_k)
        label = f"base, {units.base_words(base_k, system != 'metric')}"
        rows.append((label, units.show(base, "density", system) if base > 0.0 else "none"))
    return [*rows, ("limits", limits(model, system))]


def limits(model: DensityModel, system: System) -> str:
    """Return the temperatures a model covers, in words."""
    low, high = model.limits_k
    if not math.isfinite(high):
        return "any temperature"
    shown = [units.show(t, "temperature", system) for t in (low, high)]
    return f"{shown[0].rpartition(' ')[0]} to {shown[1]}"


def _elements(temperatures: Temperatures | None) -> list[tuple[float | None, float]]:
    if temperatures is None:
        return []
    if not temperatures.elevations_m:
        return [(None, temperatures.values_k[0])]
    return list(zip(temperatures.elevations_m, temperatures.values_k, strict=True))


def _stated(model: DensityModel, system: System) -> str:
    """Return the one density that is stated, or the least and the largest."""
    stated = model.pieces(None).density_kg_m3
    shown = [units.show(float(rho), "density", system) for rho in (stated.min(), stated.max())]
    return shown[0] if shown[0] == shown[1] else f"{shown[0].rpartition(' ')[0]} to {shown[1]}"


def _density(model: DensityModel, t_k: float) -> float:
    return float(model.checked_density(np.asarray(t_k)))


def _change(model: DensityModel, t_k: float, system: System) -> str:
    """Return how the density changes with temperature, per cent per degree."""
    low, high = model.limits_k
    ends = np.array([max(t_k - STEP_K, low), min(t_k + STEP_K, high)])
    rho = model.checked_density(ends)
    per_k = float((rho[1] - rho[0]) / (ends[1] - ends[0])) / _density(model, t_k)
    unit = units.UNIT_FOR[system]["temperature_difference"]
    degree = units.from_unit(1.0, unit, "temperature_difference")
    return f"{100.0 * per_k * degree:+.4f} % per {unit}"


def over_temperature(trial: Trial, system: System) -> Plot | str:
    """Return the curve of density against temperature, or why there is none."""
    model = trial.model
    if model is None:
        return ""
    if not model.needs_temperature:
        return "Temperature has no part in it: the density is stated as it is in the tank."
    marked = () if trial.temperatures is None else trial.temperatures.values_k
    low, high = _window(model, marked or (usual_k(model),))
    try:
        t = np.linspace(low, high, POINTS)
        rho = model.checked_density(t)
        marks = [(each, _density(model, each)) for each in marked]
    except TankcalcError as error:
        return str(error)
    if not is_density(rho):
        return "The figures give no density over the whole of this range."
    x = _axis(low, high, "temperature", system)
    points = [*zip(t.tolist(), rho.tolist(), strict=True)]
    return _plot("density", ("temperature", "density"), points, marks, x, None, system)


def _window(model: DensityModel, marked: Sequence[float]) -> tuple[float, float]:
    """Return the temperatures to draw: round the given ones, inside the model's limits."""
    low = max(model.limits_k[0], min(marked) - REACH_K)
    return low, min(model.limits_k[1], max(marked) + REACH_K)


def over_elevation(trial: Trial, tank: Tank, system: System) -> Plot | str:
    """Return the curve of density against elevation in a tank, or why there is none."""
    model, temperatures = trial.model, trial.temperatures
    if model is None or (temperatures is None and model.needs_temperature):
        return ""
    low, high = tank.vessel.z_min, tank.vessel.z_max
    try:
        column = Column.of([(model.pieces(temperatures), np.inf)])
    except TankcalcError as error:
        return str(error)
    z = _elevations(column, low, high)
    rho = column.density(z)
    if not is_density(rho):
        return "Carried on to the ends of the tank, the density falls to zero."
    points = [*zip(rho.tolist(), z.tolist(), strict=True)]
    marks = [(float(column.density(at)), at) for at, _ in _elements(temperatures) if at is not None]
    y = _axis(low, high, "length", system)
    return _plot("density over elevation", ("density", "length"), points, marks, None, y, system)


def _elevations(column: Column, low: float, high: float) -> FloatArray:
    """Return elevations to draw at: evenly spaced, and every corner of the profile."""
    inside = column.edges_m[(column.edges_m > low) & (column.edges_m < high)]
    return np.sort(np.concatenate((np.linspace(low, high, POINTS), inside)))


def _axis(low: float, high: float, dimension: str, system: System) -> Axis:
    """Return an axis that ends where the data do."""
    unit = units.UNIT_FOR[system][dimension]
    ends = [units.to_unit(end, unit, dimension) for end in (low, high)]
    return Axis(ends[0], ends[1], 1 if dimension == "temperature" else 2, unit)


def _plot(
    title: str,
    dimensions: tuple[str, str],
    points: Sequence[tuple[float, float]],
    marks: Sequence[tuple[float, float]],
    x: Axis | None,
    y: Axis | None,
    system: System,
) -> Plot:
    """Return a plot in the units of a system; an axis that is not given suits the density."""
    names = [units.UNIT_FOR[system][dimension] for dimension in dimensions]

    def shown(point: tuple[float, float]) -> tuple[float, float]:
        first, second = (
            units.to_unit(value, unit, dimension)
            for value, unit, dimension in zip(point, names, dimensions, strict=True)
        )
        return first, second

    drawn = [shown(point) for point in points]
    x = x or nice_axis([first for first, _ in drawn], names[0])
    y = y or nice_axis([second for _, second in drawn], names[1])
    return Plot(title, drawn, [shown(mark) for mark in marks], x, y)
