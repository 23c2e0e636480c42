"""Where the search for the state begins: the first reading that gives a surface."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.direct import DIRECT, direct_level
from tankcalc.gauging.limits_of_sight import refusal
from tankcalc.gauging.model import Model, State
from tankcalc.hydrostatics import surface_from_pressures
from tankcalc.instruments import tap_from_reading
from tankcalc.result import Notice

HEADROOM = 0.01
"""How far below the top an estimate begins whose first surface was above it, as a share."""

THINNING = 3
"""Rounds in which a vapour that thins out upwards is taken into account; each leaves a
ten-thousandth of the error."""

HEAVIEST_VAPOUR = 0.5
"""A vapour heavier than this share of the heaviest liquid is near critical, or mistyped."""


def first_state(model: Model) -> tuple[State, str, tuple[Notice, ...]]:
    """Return a first state, the reading it comes from, and why there is none."""
    case = model.case
    vapour, one = vapour_start(model), np.broadcast_to(1.0, case.shape)
    if np.any(vapour <= 0.0):
        nothing = State(np.full(case.shape, np.nan), one, vapour)
        message = "p3 is below a perfect vacuum. Check the unit and the reference."
        return nothing, "", (refusal("below_vacuum", message, "p3"),)
    for name in DIRECT:
        if name in case.given:
            level, notices = direct_level(model, name)
            return State(level, one, vapour), name, notices
    nan = State(np.full(case.shape, np.nan), one, vapour)
    _, heaviest = case.column.extremes(case.tank.vessel.z_min, case.tank.vessel.z_max)
    if np.any(model.vapour_density(vapour) > HEAVIEST_VAPOUR * heaviest):
        message = "The vapour is as heavy as the liquid: a pressure says nothing of the surface."
        return nan, "", (refusal("vapour_too_heavy", message, "p3"),)
    for tag in ("p1", "dp", "p2"):
        if f"{tag}_pa" not in case.given:
            continue
        if tag not in case.fitted():
            fitted = ", ".join(case.fitted()) or "none"
            message = f"{case.tank.name} has no {tag} transmitter (fitted: {fitted})."
            return nan, "", (refusal("not_fitted", message, tag),)
        return State(level_behind(model, tag, nan), one, vapour), tag, ()
    message = (
        "Nothing was given that fixes the surface. Give a level, an ullage, a volume, a mass, "
        f"or the pressure of {' or '.join(case.fitted()) or 'a transmitter'}."
    )
    return nan, "", (refusal("not_enough", message),)


def vapour_start(model: Model) -> FloatArray:
    """Return the pressure above the liquid to begin with, Pa absolute."""
    case = model.case
    if "p3" in case.tank.transmitters and "p3_pa" in case.given:
        read = model.vapour_from_p3(case.given["p3_pa"])
        return np.broadcast_to(read, case.shape).astype(float)
    vent = model.vent_pa
    outside = case.conditions.outside_pa(model.vapour_at_m)
    return np.broadcast_to(outside if vent is None else vent, case.shape)


def level_behind(model: Model, tag: str, state: State) -> FloatArray:
    """Return the surface behind one pressure with the profile's density; beyond the ends too."""
    case = model.case
    rv = model.vapour_density(state.vapour_pa)
    reading = np.broadcast_to(case.given[f"{tag}_pa"], case.shape)
    if tag == "dp":
        dp = case.tank.dp
        assert dp is not None
        low_m, high_m = dp.high.elevation_m, dp.low.elevation_m
        difference = reading - model.line_difference(state)
    else:
        transmitter = case.tank.transmitters[tag]
        low_m, high_m = transmitter.elevation_m, model.vapour_at_m
        tap = tap_from_reading(transmitter, reading, case.conditions)
        difference = np.asarray(tap - state.vapour_pa)
    level = surface_from_pressures(case.column, model.gravity, low_m, difference, rv, high_m)
    for _ in range(THINNING if model.vapour_thins else 0):
        rv = model.mean_vapour_density(level, high_m, state)
        level = surface_from_pressures(case.column, model.gravity, low_m, difference, rv, high_m)
    return np.broadcast_to(level, case.shape)


def within_sight(
    model: Model, by: str, start: State, unknown: BoolArray
) -> tuple[State, BoolArray]:
    """Return where to begin the estimate, and the rows in which there is nothing to estimate.

    A first surface below the tap is refused as it stands, and one above the vessel too, unless
    a second pressure may show that the liquid is heavier than its profile says.
    """
    tank = model.case.tank
    surface = np.where(unknown, tank.vessel.z_min, start.surface_m)
    if by in DIRECT:
        return replace(start, surface_m=surface), unknown
    dp = tank.dp
    tap_m = dp.high.elevation_m if by == "dp" and dp else tank.transmitters[by].elevation_m
    top_m = min(tank.vessel.z_max, model.vapour_at_m)
    out = unknown | (surface <= tap_m)
    if len(model.case.given.keys() & {"p1_pa", "p2_pa", "dp_pa"}) > 1:
        surface = np.minimum(surface, top_m - HEADROOM * (top_m - tap_m))
    else:
        out = out | (surface > tank.vessel.z_max)
    return replace(start, surface_m=surface), out
