"""Evaluate a tank's contents from its readings."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.amounts import amounts, layer_shares
from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.doubts import doubts
from tankcalc.gauging.model import Model
from tankcalc.gauging.solve import solve
from tankcalc.gauging.state import Found
from tankcalc.readings import Readings
from tankcalc.result import Notice, Result, Status
from tankcalc.tank import Tank

REMARKS = frozenset({"vapour_pressure_assumed"})
"""Notices that are no doubt of the answer: it does not rest on what they say."""

_FLOATING_ROOF = Notice(
    "floating_roof",
    "The tank has a floating roof: what it displaces and weighs is not computed by this version, "
    "and without it neither volume nor mass would be right.",
    refuses=True,
)


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
    if tank.floating_roof is not None:
        return Result(tank.name, fluid.name, "nothing", "refused", (_FLOATING_ROOF,))
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
    if np.all(refused):
        return Result(tank.name, fluid.name, found.basis, "refused", tuple(notices))
    return _result(model, found, refused, tuple(notices))


def _result(model: Model, found: Found, refused: BoolArray, notices: tuple[Notice, ...]) -> Result:
    """Return the result of a case in which at least one row has an answer."""
    case = model.case
    level = np.where(refused, case.tank.vessel.z_min, found.state.surface_m)
    state = replace(found.state, surface_m=level)
    figures: dict[str, FloatArray | None] = amounts(model, state)
    more: list[Notice] = []
    for tag in case.fitted():
        try:
            figures[f"{tag}_pa"] = model.expected(tag, state)
        except InputError as error:
            more.append(Notice("leg_unknown", f"What {tag} should read is not known: {error}", tag))
    notices = (*notices, *more)
    single = level.ndim == 0
    shown: dict[str, Any] = {
        name: None if value is None else _plain(value, refused) for name, value in figures.items()
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


def _plain(value: FloatArray, refused: BoolArray) -> float | FloatArray:
    """Return a float for one reading, or an array whose refused rows hold NaN."""
    if refused.ndim == 0:
        return float(value)
    return np.where(refused, np.nan, np.broadcast_to(value, refused.shape))
