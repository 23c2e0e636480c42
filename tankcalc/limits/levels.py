"""Levels of concern: room and volumes up to them, and how far apart they must lie.

The names are the trade's (`tankcalc.tank.LIMIT_ORDER`); the rule for their distance is that of API
Std 2350 as cited in public text, from memory of the field. Nothing here says that a tank complies.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.result import Notice
from tankcalc.tank import LIMIT_ORDER, Tank

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel
    from tankcalc.units import System

HIGH_LIMITS = LIMIT_ORDER[2:]
"""Limits that are told when the level is above them."""

LOW_LIMITS = LIMIT_ORDER[:2]
"""Limits that are told when the level is below them."""

LEAST_RESPONSE_S = 300.0
"""Least time between two high levels: 5 min (API Std 2350 as cited in public text), s."""

LEAST_DISTANCE_M = 0.075
"""Least distance between two high levels: 75 mm (API Std 2350 as cited in public text), m."""

_PAIRS = (("high_high", "critical_high"), ("maximum_working", "high_high"))
_STEP_M, _STEP_FEET_M = 0.001, 0.0254 / 16.0
"""The last digit of a level that is shown, m: what is the highest is rounded down to it."""


@dataclass(frozen=True, slots=True)
class Distance:
    """How far a level is from a limit.

    Attributes
    ----------
    limit : str
        Name of `LIMIT_ORDER`.
    level_m : float
        The limit above the datum, m.
    volume_m3 : float
        What the vessel holds up to it, m3.
    room_m3 : float
        From the level up to the limit, m3; negative when the level is above it.
    """

    limit: str
    level_m: float
    volume_m3: float
    room_m3: float


def limit_words(name: str) -> str:
    """Return a limit's name as it is spoken.

    Examples
    --------
    >>> limit_words("high_high"), limit_words("maximum_working")
    ('high-high', 'maximum working')
    """
    return name.replace("_", "-" if name in ("high_high", "low_low") else " ")


def limit_named(words: str) -> str | None:
    """Return the limit that is meant by words, None where it is none.

    Examples
    --------
    >>> limit_named("High-High"), limit_named("maximum working"), limit_named("5 m")
    ('high_high', 'maximum_working', None)
    """
    name = "_".join(words.lower().replace("-", " ").replace("_", " ").split())
    return name if name in LIMIT_ORDER else None


def distances(tank: Tank, level_m: float, shell: float = 1.0) -> tuple[Distance, ...]:
    """Return how far a level is from every limit of a tank, from the lowest limit up.

    Parameters
    ----------
    level_m : float
        Inside the vessel, m.
    shell : float
        Volume in the tank over that of the vessel at calibration temperature.

    Raises
    ------
    RangeError
        The level lies outside the vessel.
    """
    held = shell * tank.vessel.volume(level_m)
    given = [(name, tank.limits_m[name]) for name in LIMIT_ORDER if name in tank.limits_m]
    volumes = [(name, z, shell * tank.vessel.volume(z)) for name, z in given]
    return tuple(Distance(name, z, volume, volume - held) for name, z, volume in volumes)


def ullage_volume_m3(vessel: Vessel, level_m: float) -> float:
    """Return the empty volume above a level (m), up to the vessel's top, m3."""
    return vessel.capacity - vessel.volume(level_m)


def pumpable_m3(tank: Tank, level_m: float) -> float | None:
    """Return the volume (m3) between the minimum working level and a level (m).

    Negative below it; None where the tank states no such level.
    """
    lowest = tank.limits_m.get("minimum_working")
    return None if lowest is None else tank.vessel.volume(level_m) - tank.vessel.volume(lowest)


def highest_level_m(
    vessel: Vessel, upper_m: float, inflow_m3_s: float | None, response_s: float | None
) -> float | None:
    """Return the highest place of a level below another one, for a response in time.

    Parameters
    ----------
    vessel : Vessel
        Of any shape.
    upper_m : float
        The level that must not be reached, m.
    inflow_m3_s : float or None
        Largest flow in, m3/s, above zero; None: not stated, only the least distance counts.
    response_s : float or None
        Time from the lower level until the receipt has stopped, s; None or a shorter one:
        `LEAST_RESPONSE_S`.

    Returns
    -------
    float or None
        Level, m; None where not even the empty vessel leaves that much time.

    Notes
    -----
    V(h) = V(upper) - Q t, and h <= upper - 75 mm. The uncertainty of the level and its thermal
    growth come on top.

    References
    ----------
    API Std 2350, 5th edition (2020), as cited in public text.

    Examples
    --------
    A tank of 20 m diameter, 600 m3/h, 15 min:

    >>> from tankcalc.geometry import FlatEnd, vertical_cylinder
    >>> tank = vertical_cylinder([(15.0, 20.0)], FlatEnd(), FlatEnd())
    >>> round(highest_level_m(tank, 14.5, 600.0 / 3600.0, 900.0), 4)
    14.0225
    """
    highest = upper_m - LEAST_DISTANCE_M
    if inflow_m3_s is not None:
        seconds = max(response_s or 0.0, LEAST_RESPONSE_S)
        volume = vessel.volume(upper_m) - inflow_m3_s * seconds
        if volume < vessel.volume(vessel.z_min):
            return None
        highest = min(highest, vessel.level(volume))
    return highest if highest >= vessel.z_min else None


def spacing_notices(tank: Tank, system: System = "metric") -> tuple[Notice, ...]:
    """Return the high levels of a tank that lie too close below the next one.

    The largest inflow is the tank's `largest_in_m3_s`, the response its `response_time_s`; of the
    two pairs high-high below critical high, and maximum working below high-high. Code
    "limits_too_close"; no notice means only that nothing was found.
    """
    return tuple(_spacing(tank, system))


def _spacing(tank: Tank, system: System) -> Iterator[Notice]:
    inflow, response = tank.largest_in_m3_s, tank.response_time_s
    for low, high in _PAIRS:
        if low not in tank.limits_m or high not in tank.limits_m:
            continue
        highest = highest_level_m(tank.vessel, tank.limits_m[high], inflow, response)
        if highest is not None and tank.limits_m[low] <= highest + 1e-9:
            continue
        if highest is None:
            place = f"no place of the {limit_words(low)} level leaves"
        else:
            step = _STEP_M if system == "metric" else _STEP_FEET_M
            shown = units.show(math.floor(highest / step + 1e-6) * step, "length", system)
            place = f"{shown} is the highest that leaves"
        yield Notice(
            "limits_too_close",
            f"The {limit_words(low)} level, {units.show(tank.limits_m[low], 'length', system)}, is "
            f"too close below {limit_words(high)}: {place} {_wanted(tank, system)}.",
            low,
        )


def _wanted(tank: Tank, system: System) -> str:
    """Return in words what must fit between two levels."""
    least = units.show(LEAST_DISTANCE_M, "length", system)
    if tank.largest_in_m3_s is None:
        return f"the least distance, {least}"
    stated = tank.response_time_s
    minutes = max(stated or 0.0, LEAST_RESPONSE_S) / 60.0
    whose = "the response time" if stated is not None else "the least time, no response is stated"
    flow = units.show(tank.largest_in_m3_s, "volume_flow", system)
    return f"{minutes:g} min ({whose}) at {flow}, and {least}"
