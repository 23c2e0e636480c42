"""Time to a level, exact for every shape, with an early and a late bound."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc.errors import InputError
from tankcalc.limits.levels import HIGH_LIMITS, limit_words
from tankcalc.tank import LIMIT_ORDER, Tank

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel

COVERAGE = 2.0
"""Bounds are quoted for this many standard uncertainties of flow and level."""


@dataclass(frozen=True, slots=True)
class Arrival:
    """When a level is reached, in seconds from the reading.

    Attributes
    ----------
    limit : str
        Name of the limit; empty for a level without one.
    level_m : float
        The level to be reached, m.
    expected_s : float or None
        By the flow as it is; None when it leads away from the level, or nothing flows.
    earliest_s : float or None
        By flow and level moved towards it; None when it is not reached even so.
    latest_s : float or None
        By flow and level moved away from it; None: it may never be reached.
    passed : bool
        Whether the level was reached already at the reading; then the times are zero.
    extrapolates : bool or None
        Whether any of the times lies beyond the next planned reading; None where that is not
        known.
    """

    limit: str
    level_m: float
    expected_s: float | None
    earliest_s: float | None
    latest_s: float | None
    passed: bool = False
    extrapolates: bool | None = None

    def words(self) -> str:
        """Return the times in words, the early one first."""
        name = f"{limit_words(self.limit)} level" if self.limit else "level"
        if self.passed:
            return f"{name}: reached already"
        if self.earliest_s is None:
            return f"{name}: not on the way there"
        late = (
            "may never be reached"
            if self.latest_s is None
            else (f"at the latest in {duration(self.latest_s, up=True)}")
        )
        middle = "" if self.expected_s is None else f"expected in {duration(self.expected_s)}, "
        beyond = {
            True: "; beyond the next planned reading, if the rate holds",
            None: "; if the rate holds",
        }.get(self.extrapolates, "")
        return f"{name}: not before {duration(self.earliest_s)}, {middle}{late}{beyond}"


def duration(seconds: float, *, up: bool = False) -> str:
    """Return a time in hours and minutes, whole minutes that are over, or begun with ``up``.

    Examples
    --------
    >>> duration(12_693.6), duration(12_693.6, up=True), duration(59.0), duration(400_000.0)
    ('3 h 31 min', '3 h 32 min', '0 min', '4 d 15 h 6 min')
    """
    # What is within a microsecond of a whole minute is that minute.
    minutes = math.ceil(seconds / 60.0 - 1e-8) if up else math.floor(seconds / 60.0 + 1e-8)
    days, rest = divmod(minutes, 1440)
    hours, minutes = divmod(rest, 60)
    shown = [f"{days} d"] if days else []
    shown += [f"{hours} h"] if hours or days else []
    return " ".join([*shown, f"{minutes} min"])


def time_to(
    vessel: Vessel,
    level_m: float,
    target_m: float,
    flow_m3_s: float,
    *,
    level_uncertainty_m: float = 0.0,
    flow_uncertainty_m3_s: float = 0.0,
    next_reading_s: float | None = None,
    limit: str = "",
) -> Arrival:
    """Return when a level is reached at a flow that stays what it is.

    Parameters
    ----------
    vessel : Vessel
        Of any shape.
    level_m, target_m : float
        Where the surface is, and the level to be reached, m, both inside the vessel.
    flow_m3_s : float
        Net flow, m3/s; positive into the tank.
    level_uncertainty_m, flow_uncertainty_m3_s : float
        Standard uncertainties, m and m3/s; zero: taken as exact.
    next_reading_s : float or None
        Time to the next planned reading, s; None: not known.
    limit : str
        Name of the limit, carried along.

    Raises
    ------
    RangeError
        A level outside the vessel.
    InputError
        A flow that is not finite, or an uncertainty below zero.

    Notes
    -----
    t = (V(target) - V(h)) / Q. For the early bound Q + 2 u_Q and h + 2 u_h, for the late one
    Q - 2 u_Q and h - 2 u_h (signs turned round for a level below). Expansion of the shell on the
    way is left out.

    Examples
    --------
    A sphere of 6 m radius from 5 m to 9 m at 120 m3/h:

    >>> from tankcalc.geometry import sphere
    >>> round(time_to(sphere(12.0), 5.0, 9.0, 120.0 / 3600.0).expected_s / 3600.0, 3)
    3.526
    """
    numbers = (flow_m3_s, level_uncertainty_m, flow_uncertainty_m3_s)
    if not all(map(math.isfinite, numbers)) or min(numbers[1:]) < 0.0:
        raise InputError("a flow must be finite, and an uncertainty not below zero.")
    way = 1.0 if target_m >= level_m else -1.0
    if limit and limit in LIMIT_ORDER:
        way = 1.0 if limit in HIGH_LIMITS else -1.0
    if way * (target_m - level_m) <= 0.0:
        return Arrival(limit, target_m, 0.0, 0.0, 0.0, passed=True)
    towards, u_flow = way * flow_m3_s, COVERAGE * flow_uncertainty_m3_s
    near = level_m + way * COVERAGE * level_uncertainty_m
    far = level_m - way * COVERAGE * level_uncertainty_m
    expected, earliest, latest = (
        _seconds(_between(vessel, start, target_m, way), flow)
        for start, flow in ((level_m, towards), (near, towards + u_flow), (far, towards - u_flow))
    )
    quoted = [t for t in (expected, earliest, latest) if t is not None]
    beyond = None if next_reading_s is None else any(t > next_reading_s for t in quoted)
    return Arrival(limit, target_m, expected, earliest, latest, extrapolates=beyond)


def times_to_limits(
    tank: Tank,
    level_m: float,
    flow_m3_s: float,
    *,
    level_uncertainty_m: float = 0.0,
    flow_uncertainty_m3_s: float = 0.0,
    next_reading_s: float | None = None,
) -> tuple[Arrival, ...]:
    """Return when each limit of a tank is reached, from the lowest limit up; as for `time_to`."""
    return tuple(
        time_to(
            tank.vessel,
            level_m,
            tank.limits_m[name],
            flow_m3_s,
            level_uncertainty_m=level_uncertainty_m,
            flow_uncertainty_m3_s=flow_uncertainty_m3_s,
            next_reading_s=next_reading_s,
            limit=name,
        )
        for name in _given(tank)
    )


def _given(tank: Tank) -> Sequence[str]:
    return [name for name in LIMIT_ORDER if name in tank.limits_m]


def _between(vessel: Vessel, start_m: float, target_m: float, way: float) -> float:
    """Return the volume (m3) from a level to the target; a start beyond either end is there."""
    start = min(max(start_m, vessel.z_min), vessel.z_max)
    return max(way * (vessel.volume(target_m) - vessel.volume(start)), 0.0)


def _seconds(volume_m3: float, flow_m3_s: float) -> float | None:
    """Return how long a flow takes, None where it never brings the volume."""
    if volume_m3 == 0.0:
        return 0.0
    if not flow_m3_s > 0.0:
        return None
    seconds = volume_m3 / flow_m3_s
    return seconds if math.isfinite(seconds) else None
