"""Liquefied gases: a vapour nobody stated, and pressures at which the liquid would boil."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.fluids.liquefied_gas import LiquefiedGas
from tankcalc.gauging.case import BoolArray
from tankcalc.gauging.comparisons import where_of
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.words import pressure
from tankcalc.result import Notice

CLEARLY_ABOVE = 1.05
"""A vapour pressure of this many times the outside one boils in an open tank (rule of thumb: a
barometer that was not read is within 5 %)."""

FAR_BELOW = 0.85
"""A vapour space of less than this share of the vapour pressure is no equilibrium (rule of thumb:
2 K in temperature are about 6 % for propane)."""


def boiling(model: Model, state: State, kept: BoolArray) -> Iterator[Notice]:
    """Yield what a liquefied gas makes doubtful in an answer.

    Parameters
    ----------
    state : State
        With vapour pressures in Pa absolute.
    kept : array of bool
        Rows that have an answer.
    """
    case = model.case
    closed = "p3" in case.tank.transmitters or case.tank.dp is not None
    product = case.liquid.product
    unstated = case.tank.vapour is None and case.fluid.vapour is None
    if closed and unstated and product.kind == LiquefiedGas.kind:
        yield Notice(
            "vapour_unstated",
            "The vapour above this liquefied gas is not known: it is taken as air. State its "
            "molar mass and compressibility under [vapour] in the fluid's file.",
            "fluid",
        )
    kelvin = case.liquid.temperature_k
    boils_at = None if kelvin is None else product.saturation_pa(kelvin)
    if boils_at is None or kelvin is None:
        return
    degrees = f"{kelvin - ICE_POINT_K:.1f} degC"
    if not closed:
        yield from _open(model, boils_at, degrees)
    elif "p3_pa" in case.given:
        yield from _read(boils_at, degrees, state, kept)


def _open(model: Model, boils_at: float, degrees: str) -> Iterator[Notice]:
    """Say so where the liquid would boil in an open tank."""
    outside = model.case.conditions.outside_pa(model.vapour_at_m)
    if boils_at > CLEARLY_ABOVE * outside:
        yield Notice(
            "would_boil",
            f"At {degrees} the liquid's vapour pressure is {pressure(boils_at)} absolute, and "
            f"outside there are {pressure(outside)}: in a tank without p3 or dp it would boil. "
            "Check the temperature and the fluid.",
            "temperature",
        )


def _read(boils_at: float, degrees: str, state: State, kept: BoolArray) -> Iterator[Notice]:
    """Say so where p3 reads far below the vapour pressure."""
    low = (np.broadcast_to(state.vapour_pa, kept.shape) < FAR_BELOW * boils_at) & kept
    if np.any(low):
        read = float(np.broadcast_to(state.vapour_pa, kept.shape)[low].flat[0])
        yield Notice(
            "below_saturation",
            f"p3 gives {pressure(read)} absolute in the vapour space, far below the liquid's "
            f"vapour pressure at {degrees}, {pressure(boils_at)} absolute. Check p3, the "
            "temperature and the fluid.",
            "p3",
            where=where_of(low),
        )
