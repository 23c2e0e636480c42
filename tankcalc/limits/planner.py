"""How much fits, when to call stop, and how full a tank may be for a warm day."""

from __future__ import annotations

import math
from dataclasses import dataclass

from tankcalc.errors import InputError
from tankcalc.limits.mixing import Contents, after_adding
from tankcalc.limits.times import COVERAGE, Arrival, time_to

STEPS = 200
"""Halvings of a mass that is looked for; a double is used up after about 60."""


@dataclass(frozen=True, slots=True)
class Receivable:
    """How much of the product may come in, up to a level.

    Attributes
    ----------
    target_m : float
        The level, m.
    room_m3 : float
        Volume in the tank from the surface up to it, m3; negative when it is passed.
    mass_kg, volume_m3 : float
        Of what arrives, the volume at its own temperature; zero when the level is passed.
    standard_m3 : float or None
        The same as standard volume; None where the density model knows no temperature.
    """

    target_m: float
    room_m3: float
    mass_kg: float
    volume_m3: float
    standard_m3: float | None


@dataclass(frozen=True, slots=True)
class StopCall:
    """When to call stop so that a level is not passed.

    Attributes
    ----------
    target_m : float
        The level not to be passed, m.
    margin_m3 : float
        What still flows after the call, m3.
    call_m : float or None
        Level at which to call, m; None where the vessel has none such: call before the start.
    arrival : Arrival or None
        When that level is reached; None where it lies beyond the vessel.
    reaches_m : float or None
        Where the surface comes to rest when stop is called now, m; None: beyond the vessel.
    too_late : bool
        Whether the level is passed even if stop is called now.
    """

    target_m: float
    margin_m3: float
    call_m: float | None
    arrival: Arrival | None
    reaches_m: float | None
    too_late: bool


def receivable(
    contents: Contents, target_m: float, at_k: float | None = None, *, mixed: bool = True
) -> Receivable:
    """Return how much of the product can be received up to a level.

    Parameters
    ----------
    target_m : float
        Level, inside the vessel, m.
    at_k : float or None
        Temperature of what arrives, K; None: that of the tank.
    mixed : bool
        Whether it mixes with what is there, as for `after_adding`.

    Raises
    ------
    RangeError
        The level lies outside the vessel, or a temperature outside the density model.
    InputError
        A temperature is needed and not known.

    Notes
    -----
    The mass m with V(m0 + m) = V(target), found by halving: the volume grows with the mass for
    any liquid whose density changes by less than its own size.
    """
    goal = contents.volume_at(target_m)
    room = goal - contents.below_m3 - contents.product_m3
    base = contents.base_kg_m3
    own = at_k is None or at_k == contents.temperature_k or not contents.expands
    density = contents.density_kg_m3 if own or at_k is None else contents.density(at_k)
    if room <= 0.0:
        return Receivable(target_m, room, 0.0, 0.0, None if base is None else 0.0)
    low, high = 0.0, room * max(density, contents.density_kg_m3)
    while after_adding(contents, high, at_k, mixed=mixed).volume_m3 < goal:
        high *= 2.0
    for _ in range(STEPS):
        middle = 0.5 * (low + high)
        if middle in (low, high):
            break
        if after_adding(contents, middle, at_k, mixed=mixed).volume_m3 < goal:
            low = middle
        else:
            high = middle
    return Receivable(target_m, room, low, low / density, None if base is None else low / base)


def stop_call(
    contents: Contents,
    target_m: float,
    flow_m3_s: float,
    *,
    closing_s: float = 0.0,
    drain_back_m3: float = 0.0,
    level_uncertainty_m: float = 0.0,
    flow_uncertainty_m3_s: float = 0.0,
    next_reading_s: float | None = None,
) -> StopCall:
    """Return when to call stop so that the surface comes to rest at a level.

    Parameters
    ----------
    target_m : float
        Level not to be passed, inside the vessel, m.
    flow_m3_s : float
        Net flow, m3/s; positive into the tank. Not zero.
    closing_s : float
        From the call until the valve is shut, s.
    drain_back_m3 : float
        What drains from the line into the tank afterwards, m3; of no account in a delivery.
    level_uncertainty_m, flow_uncertainty_m3_s, next_reading_s
        As for `time_to`.

    Raises
    ------
    InputError
        No flow, or a time or volume below zero.
    RangeError
        A level outside the vessel.

    Notes
    -----
    V(call) = V(target) - (Q + 2 u_Q) t - V(drain): the whole flow is taken to last until the valve
    is shut, which is early by up to half (common practice, no source).
    """
    if flow_m3_s == 0.0 or min(closing_s, drain_back_m3) < 0.0:
        raise InputError("a call needs a flow, and neither time nor volume below zero.")
    way = 1.0 if flow_m3_s > 0.0 else -1.0
    margin = (abs(flow_m3_s) + COVERAGE * flow_uncertainty_m3_s) * closing_s
    margin += drain_back_m3 if way > 0.0 else 0.0
    if not math.isfinite(margin):
        raise InputError("what still flows after the call is beyond all measure.")
    goal, held = contents.volume_at(target_m), contents.volume_at(contents.level_m)
    call, rest = goal - way * margin, held + way * margin
    lowest = contents.volume_at(contents.vessel.z_min)
    call_m = contents.level_at(call) if call >= lowest else None
    reaches = contents.level_at(rest) if rest >= lowest else None
    too_late = way * (rest - goal) > 1e-12 * abs(goal)
    if call_m is None:
        return StopCall(target_m, margin, None, None, reaches, too_late)
    arrival = _arrival(
        contents,
        call_m,
        way,
        flow_m3_s / contents.shell,
        level_uncertainty_m,
        flow_uncertainty_m3_s / contents.shell,
        next_reading_s,
    )
    return StopCall(target_m, margin, call_m, arrival, reaches, too_late)


def _arrival(
    contents: Contents,
    call_m: float,
    way: float,
    flow_m3_s: float,
    level_u_m: float,
    flow_u_m3_s: float,
    next_reading_s: float | None,
) -> Arrival:
    if way * (call_m - contents.level_m) <= 0.0:
        return Arrival("", call_m, 0.0, 0.0, 0.0, passed=True)
    return time_to(
        contents.vessel,
        contents.level_m,
        call_m,
        flow_m3_s,
        level_uncertainty_m=level_u_m,
        flow_uncertainty_m3_s=flow_u_m3_s,
        next_reading_s=next_reading_s,
    )


def highest_for_growth(contents: Contents, target_m: float, design_k: float) -> float | None:
    """Return the highest level now from which the product grows no further than another level.

    Parameters
    ----------
    target_m : float
        Level not to be passed at the design temperature, m; the vessel's top: never liquid-full.
    design_k : float
        Design temperature, K.

    Returns
    -------
    float or None
        Level of product at the temperature it has now, m; None where the free water alone is
        higher than that.

    Raises
    ------
    InputError
        The temperature now is not known.
    RangeError
        A temperature outside what the density model covers, or a level outside the vessel.
    """
    room = contents.volume_at(target_m) - contents.below_m3
    if room < 0.0:
        return None
    if contents.expands:
        if contents.temperature_k is None:
            raise InputError("the temperature of the product is not known. Give it.")
        room *= contents.density(design_k) / contents.density_kg_m3
    most = contents.shell * contents.vessel.capacity
    return contents.level_at(min(contents.below_m3 + room, most))
