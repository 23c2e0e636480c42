"""A surface under a floating roof: where it is for an amount, and where no amount is sure."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from tankcalc.gauging.amounts import free_water_m3
from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.words import length
from tankcalc.result import Notice
from tankcalc.tank import FloatingRoof

HALVINGS = 60
"""Rounds for the surface of a given amount under a roof: 100 m come down to rounding."""


def in_critical_zone(roof: FloatingRoof, surface_m: FloatArray) -> BoolArray:
    """Return whether legs and liquid share the roof: what it displaces is not known there."""
    return np.asarray((surface_m > roof.lands_at_m) & (surface_m < roof.floats_at_m))


def roof_in_water(model: Model, state: State) -> BoolArray:
    """Return whether the roof reaches through the product into the free water."""
    roof, top = model.case.tank.floating_roof, model.case.liquid.water_top_m
    if roof is None or top is None:
        return np.zeros(state.surface_m.shape, dtype=bool)
    volume, product, _ = model.contents(state)
    afloat = state.surface_m >= roof.floats_at_m
    water = free_water_m3(model.case, state.surface_m)
    return np.asarray(afloat & ((volume < water) | (product < 0.0)))


def roof_sunk(where: BoolArray | None) -> Notice:
    """Refuse a roof that reaches into the free water: what it displaces is of two liquids."""
    message = (
        "There is less product above the free water than the roof displaces: it reaches into the "
        "water, and how much of each it displaces is not known. Check the water level."
    )
    return Notice("roof_in_water", message, "water_level", True, where)


def critical_zone(model: Model, where: BoolArray | None, reading: str = "") -> Notice:
    """Refuse volume and mass where legs and liquid share the roof, with bounds for one reading."""
    roof = model.case.tank.floating_roof
    assert roof is not None
    message = (
        f"The surface is between {length(roof.lands_at_m)}, where the roof lands, and "
        f"{length(roof.floats_at_m)}, where it floats: what the roof displaces is not known there. "
        "Move the level out of this zone for a volume or a mass."
    )
    two = np.ones(2)
    at = State(np.array([roof.lands_at_m, roof.floats_at_m]), two, two)
    volume, product, water = model.contents(at)
    mass = product + water
    bounds = {
        "volume_m3": (float(min(volume)), float(max(volume))),
        "mass_kg": (float(min(mass)), float(max(mass))),
    }
    return Notice("roof_critical_zone", message, reading, True, where, bounds)


def surface_under_roof(
    model: Model, state: State, amount: FloatArray, *, by_mass: bool
) -> FloatArray:
    """Return the surface (m) of a tank with a floating roof that holds an amount of liquid.

    Parameters
    ----------
    state : State
        Density factor and vapour pressure, of the amount's shape; its surface is not looked at.
    amount : array
        Volume, m3, or mass where ``by_mass``, kg; no more than the tank holds.

    Returns
    -------
    array
        NaN where the amount puts the surface into the critical zone.

    Notes
    -----
    Halving the range on the one side of the critical zone that the amount belongs to: what a
    roof displaces need not rise with the level there.
    """
    roof, vessel = model.case.tank.floating_roof, model.case.tank.vessel
    assert roof is not None

    def held(surface_m: npt.ArrayLike) -> FloatArray:
        at = replace(state, surface_m=np.broadcast_to(surface_m, amount.shape))
        volume, product, water = model.contents(at)
        return product + water if by_mass else volume

    on_legs = amount <= held(roof.lands_at_m)
    between = ~on_legs & (amount < held(roof.floats_at_m))
    left = np.where(on_legs, vessel.z_min, roof.floats_at_m)
    right = np.where(on_legs, roof.lands_at_m, vessel.z_max)
    for _ in range(HALVINGS):
        middle = 0.5 * (left + right)
        less = held(middle) < amount
        left, right = np.where(less, middle, left), np.where(less, right, middle)
    empty = amount <= held(vessel.z_min)
    found = np.where(empty, vessel.z_min, 0.5 * (left + right))
    return np.where(between, np.nan, found)
