"""Evaluate a tank's contents from its readings."""

from __future__ import annotations

from typing import Any

import numpy as np

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.amounts import amounts, layer_shares
from tankcalc.gauging.case import BoolArray, Case, FloatArray
from tankcalc.gauging.doubts import doubts
from tankcalc.gauging.surface import Surface, find_surface
from tankcalc.readings import Readings
from tankcalc.result import Notice, Result, Status
from tankcalc.tank import Tank

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
    try:
        case = Case.of(tank, fluid, readings)
    except (RangeError, InputError) as error:
        notice = Notice("density_refused", str(error), "temperature", refuses=True)
        return Result(tank.name, fluid.name, "nothing", "refused", (notice,))
    if tank.floating_roof is not None:
        return Result(tank.name, fluid.name, "nothing", "refused", (_FLOATING_ROOF,))
    surface = find_surface(case)
    notices = [*case.liquid.notices, *surface.notices]
    refused = np.isnan(surface.level_m)
    if not np.all(refused):
        held = np.where(refused, tank.vessel.z_min, surface.level_m)
        more, water_above = doubts(case, surface, held, refused)
        notices.extend(more)
        refused = refused | water_above
    if np.all(refused):
        return Result(tank.name, fluid.name, surface.basis, "refused", tuple(notices))
    return _result(case, surface, refused, tuple(notices))


def _result(
    case: Case, surface: Surface, refused: BoolArray, notices: tuple[Notice, ...]
) -> Result:
    """Return the result of a case in which at least one row has an answer."""
    level = np.where(refused, case.tank.vessel.z_min, surface.level_m)
    figures: dict[str, FloatArray | None] = amounts(case, level)
    for tag in case.fitted():
        figures[f"{tag}_pa"] = case.expected(tag, level)
    single = level.ndim == 0
    shown: dict[str, Any] = {
        name: None if value is None else _plain(value, refused) for name, value in figures.items()
    }
    status: Status = "check" if notices else "good"
    return Result(
        tank=case.tank.name,
        fluid=case.fluid.name,
        basis=surface.basis,
        status=status,
        warnings=notices,
        layers=layer_shares(case, float(level)) if single else (),
        refused=None if single else refused,
        **shown,
    )


def _plain(value: FloatArray, refused: BoolArray) -> float | FloatArray:
    """Return a float for one reading, or an array whose refused rows hold NaN."""
    if refused.ndim == 0:
        return float(value)
    return np.where(refused, np.nan, np.broadcast_to(value, refused.shape))
