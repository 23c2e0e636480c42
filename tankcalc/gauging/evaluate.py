"""Evaluate a tank's contents from its readings."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.amounts import amounts, layer_shares
from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.comparisons import where_of
from tankcalc.gauging.doubts import doubts
from tankcalc.gauging.model import Model
from tankcalc.gauging.solve import solve
from tankcalc.gauging.state import Found
from tankcalc.gauging.under_roof import critical_zone, in_critical_zone, roof_in_water, roof_sunk
from tankcalc.readings import Readings
from tankcalc.result import Notice, Result, Status
from tankcalc.tank import Tank

REMARKS = frozenset({"vapour_pressure_assumed", "shell_temperature_unknown"})
"""Notices that are no doubt of the answer: it does not rest on what they say."""


def evaluate(tank: Tank, fluid: Fluid, readings: Readings) -> Result:
    """Return what is in the tank, how it is known, and what is worth a look.

    Parameters
    ----------
    tank : Tank
        Vessel, instruments, limits and surroundings; elevations in m above the datum.
    fluid : Fluid
        Density profile of the contents.
    readings : Readings
        SI; pressures in Pa in each transmitter's own reference. Pressures, level, ullage,
        volume and mass may be arrays that broadcast together; the answer then has their shape.

    Returns
    -------
    Result
        Every figure in SI. Where the readings contradict the tank, or do not settle the
        question, ``status`` is "refused" and the notices say why; no figure is guessed.

    Notes
    -----
    One equation: the pressure at a tap is the pressure above the liquid plus g times the
    integral of density from the tap to the surface. The pure function of its arguments: no
    clock, no file, no environment.
    """
    try:
        model, found = solve(tank, fluid, readings)
    except (RangeError, InputError) as error:
        notice = Notice("not_computable", str(error), "temperature", refuses=True)
        return Result(tank.name, fluid.name, "nothing", "refused", (notice,))
    notices = [*model.case.liquid.notices, *found.notices]
    refused = np.isnan(found.state.surface_m)
    if not np.all(refused):
        held = np.where(refused, tank.vessel.z_min, found.state.surface_m)
        state = replace(found.state, surface_m=held)
        more, water_above = doubts(model, found, state, refused)
        notices.extend(more)
        refused = refused | water_above
        landing = _landing(model, held) & ~refused
        if np.any(landing):
            notices.append(critical_zone(model, where_of(landing)))
            refused = refused | landing
        sunk = roof_in_water(model, state) & ~refused
        if np.any(sunk):
            notices.append(roof_sunk(where_of(sunk)))
            refused = refused | sunk
    if np.all(refused):
        return _refused(model, found, tuple(notices))
    return _result(model, found, refused, tuple(notices))


def _landing(model: Model, surface_m: FloatArray) -> BoolArray:
    """Return whether a floating roof is neither afloat nor on its legs."""
    roof = model.case.tank.floating_roof
    if roof is None:
        return np.zeros(surface_m.shape, dtype=bool)
    return in_critical_zone(roof, surface_m)


def _refused(model: Model, found: Found, notices: tuple[Notice, ...]) -> Result:
    """Return a refusal; the level is still told where only the roof makes the amounts unsure."""
    case, surface = model.case, found.state.surface_m
    refused = Result(case.tank.name, case.fluid.name, found.basis, "refused", notices)
    sure = {n.code for n in notices if n.refuses} == {"roof_critical_zone"}
    if surface.ndim or not sure or np.isnan(surface):
        return refused
    ullage = case.tank.ullage_reference_m - float(surface)
    return replace(refused, level_m=float(surface), ullage_m=ullage)


def _result(model: Model, found: Found, refused: BoolArray, notices: tuple[Notice, ...]) -> Result:
    """Return the result of a case in which at least one row has an answer."""
    case = model.case
    level = np.where(refused, case.tank.vessel.z_min, found.state.surface_m)
    state = replace(found.state, surface_m=level)
    figures, at_base = amounts(model, state, found.by)
    more: list[Notice] = list(at_base)
    for tag in case.fitted():
        try:
            figures[f"{tag}_pa"] = model.expected(tag, state)
        except InputError as error:
            more.append(Notice("leg_unknown", f"What {tag} should read is not known: {error}", tag))
    notices = (*notices, *more)
    single = level.ndim == 0
    shown: dict[str, Any] = {
        name: _plain(value, refused) if isinstance(value, np.ndarray) else value
        for name, value in figures.items()
    }
    status: Status = "check" if any(n.code not in REMARKS for n in notices) else "good"
    return Result(
        tank=case.tank.name,
        fluid=case.fluid.name,
        basis=found.basis,
        status=status,
        warnings=notices,
        layers=layer_shares(model, state) if single else (),
        refused=None if single else refused,
        **shown,
    )


def _plain(value: FloatArray, refused: BoolArray) -> float | FloatArray | None:
    """Return a float for one reading, or an array whose refused rows hold NaN.

    What an empty tank has none of (a density, a factor) is None.
    """
    if refused.ndim == 0:
        return None if np.isnan(value) else float(value)
    return np.where(refused, np.nan, np.broadcast_to(value, refused.shape))
