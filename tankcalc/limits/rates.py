"""Rate of change from timed results, with its uncertainty; instants are UTC throughout.

Only the random part of an uncertainty counts: what is the same in all readings of one tank
(elevations, table, density, an instrument's zero) cancels in their difference.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING, Final

from tankcalc import units
from tankcalc.errors import InputError
from tankcalc.limits.settings import RANDOM_SHARE
from tankcalc.result import Notice

if TYPE_CHECKING:
    from tankcalc.uncertainty import Budget
    from tankcalc.units import System

BASES: Final = {
    "standard_volume_m3": ("standard volume", "volume_flow"),
    "mass_kg": ("mass", "mass_flow"),
    "volume_m3": ("volume at tank temperature", "volume_flow"),
}
"""What a rate is taken from, the best first, in words and with its dimension. Heat moves the
volume at tank temperature of a tank at rest."""

COVERAGE = 2.0
"""Below this many standard uncertainties a rate is called static."""

TRANSMITTERS = ("p1", "p2", "p3", "dp")
DIPS = ("level", "ullage")

_NOTHING: Mapping[str, float] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Timed:
    """What a tank held at one instant.

    Attributes
    ----------
    at_us : int
        Instant of the reading, µs of UTC since 1970.
    values : mapping of str to float
        SI, by the keys of `BASES`; what is not known is left out.
    random : mapping of str to float
        Standard uncertainty, random part only, by the same keys; what is not known is left out.
    """

    at_us: int
    values: Mapping[str, float]
    random: Mapping[str, float] = field(default_factory=lambda: _NOTHING)


@dataclass(frozen=True, slots=True)
class Rate:
    """A rate of change.

    Attributes
    ----------
    basis : str
        Key of `BASES`.
    per_s : float
        Change per second, SI of the basis; positive when the tank fills.
    uncertainty_per_s : float or None
        Its standard uncertainty; None where that of the readings is not known.
    count : int
        Readings it comes from.
    from_us, to_us : int
        The first and the last of them, µs of UTC.
    """

    basis: str
    per_s: float
    uncertainty_per_s: float | None
    count: int
    from_us: int
    to_us: int

    @property
    def static(self) -> bool | None:
        """Whether nothing moves as far as can be told; None where the uncertainty is not known."""
        if self.uncertainty_per_s is None:
            return None
        return abs(self.per_s) <= COVERAGE * self.uncertainty_per_s

    def words(self, system: System = "metric") -> str:
        """Return the rate in words: direction, size, what it was taken from."""
        name, dimension = BASES[self.basis]
        size = units.show(abs(self.per_s), dimension, system)
        u = self.uncertainty_per_s
        give = "" if u is None else f" +/- {units.show(COVERAGE * u, dimension, system)}"
        way = "filling," if self.per_s > 0.0 else "emptying,"
        if self.static or self.per_s == 0.0:
            way = "static:" if self.static else "no change,"
        unknown = ", uncertainty not known" if u is None else ""
        return f"{way} {size}{give}{unknown}, from {name} of {self.count} readings"


def rate_of(points: Sequence[Timed], basis: str | None = None) -> Rate | None:
    """Return the rate of change of what a tank holds.

    Parameters
    ----------
    points : sequence of Timed
        Of one tank, in any order.
    basis : str or None
        Key of `BASES`; None: the first of them that every point holds with its uncertainty, or
        else the first that every point holds.

    Returns
    -------
    Rate or None
        None where there are fewer than two instants, or no basis that every point holds.

    Raises
    ------
    InputError
        A figure that is not finite, or an uncertainty below zero.

    Notes
    -----
    Least squares over t: Q = sum (t - tm)(y - ym) / S, S = sum (t - tm)^2. Random errors u of the
    readings give u_Q^2 = sum ((t - tm) u / S)^2, which is sqrt(2) u / dt for two readings. From
    three on the scatter about the line gives s / sqrt(S) as well; the larger of the two is taken,
    so a rate that changed on the way is not quoted too well. Errors of successive readings count
    as independent; where they hang together, as those of a warming leg do, more readings promise
    too much.

    References
    ----------
    Draper and Smith, Applied Regression Analysis, 3rd edition (1998), section 1.4 (from memory).

    Examples
    --------
    >>> hour = 3_600_000_000
    >>> rate = rate_of([Timed(0, {"volume_m3": 100.0}, {"volume_m3": 0.5}),
    ...                 Timed(hour, {"volume_m3": 220.0}, {"volume_m3": 0.5})])
    >>> round(rate.per_s * 3600, 6), round(rate.uncertainty_per_s * 3600, 6), rate.basis
    (120.0, 0.707107, 'volume_m3')
    """
    ordered = sorted(points, key=lambda point: point.at_us)
    key = basis or _basis(ordered)
    if not ordered or key is None or ordered[0].at_us == ordered[-1].at_us:
        return None
    if not all(key in point.values for point in ordered):
        return None
    first, last = ordered[0].at_us, ordered[-1].at_us
    seconds = [(point.at_us - first) / 1e6 for point in ordered]
    values = [_finite(point.values[key], key) for point in ordered]
    per_s, errors = _line(seconds, values)
    known = [_finite(p.random[key], key) for p in ordered if key in p.random]
    u = _uncertainty(seconds, known, errors)
    return Rate(key, per_s, u, len(ordered), first, last)


def _basis(points: Sequence[Timed]) -> str | None:
    held = [key for key in BASES if all(key in point.values for point in points)]
    known = [key for key in held if all(key in point.random for point in points)]
    return next(iter([*known, *held]), None)


def _finite(value: float, key: str) -> float:
    if not math.isfinite(value):
        raise InputError(f"{key}: a figure that is not finite has no rate.")
    return value


def _line(seconds: Sequence[float], values: Sequence[float]) -> tuple[float, list[float]]:
    """Return the slope of the straight line through points, and how far each is off it."""
    t_mean, y_mean = math.fsum(seconds) / len(seconds), math.fsum(values) / len(values)
    spread = math.fsum((t - t_mean) ** 2 for t in seconds)
    pairs = list(zip(seconds, values, strict=True))
    slope = math.fsum((t - t_mean) * (y - y_mean) for t, y in pairs) / spread
    return slope, [y - y_mean - slope * (t - t_mean) for t, y in pairs]


def _uncertainty(
    seconds: Sequence[float], known: Sequence[float], errors: Sequence[float]
) -> float | None:
    """Return the standard uncertainty of a slope, by the readings' own and by their scatter."""
    if any(u < 0.0 for u in known):
        raise InputError("an uncertainty is not below zero.")
    t_mean = math.fsum(seconds) / len(seconds)
    spread = math.fsum((t - t_mean) ** 2 for t in seconds)
    found = []
    if len(known) == len(seconds):
        moved = (((t - t_mean) * u) ** 2 for t, u in zip(seconds, known, strict=True))
        found.append(math.sqrt(math.fsum(moved)) / spread)
    if len(seconds) > 2:
        variance = math.fsum(e * e for e in errors) / (len(seconds) - 2)
        found.append(math.sqrt(variance / spread))
    return max(found, default=None)


def volume_flow(rate: Rate, now: Mapping[str, float]) -> tuple[float, float | None] | None:
    """Return a rate as a flow at tank temperature (m3/s), with its standard uncertainty.

    Parameters
    ----------
    now : mapping of str to float
        What the tank holds, by the keys of `BASES`: their ratio turns one into the other.

    Returns
    -------
    (float, float or None) or None
        None where the ratio is not known.
    """
    if rate.basis == "volume_m3":
        return rate.per_s, rate.uncertainty_per_s
    held, volume = now.get(rate.basis), now.get("volume_m3")
    if not held or volume is None:
        return None
    u = rate.uncertainty_per_s
    return rate.per_s * volume / held, None if u is None else u * volume / held


def against_declared(rate: Rate, movement: str, system: System = "metric") -> Notice | None:
    """Return how a rate contradicts what was declared of the tank, None where it does not.

    Parameters
    ----------
    movement : {"static", "receiving", "delivering", ""}
        What was declared; empty: nothing.

    Notes
    -----
    Codes "moves_while_static", "direction_contradicts", and "still_while_moving": a receipt or a
    delivery of which nothing is seen is what a stuck gauge looks like. Where the uncertainty is
    not known nothing is said.
    """
    if not movement or rate.static is None:
        return None
    shown = rate.words(system)
    if movement == "static":
        if rate.static:
            return None
        return Notice("moves_while_static", f"The tank was declared at rest, but: {shown}.")
    if rate.static:
        return Notice(
            "still_while_moving",
            f"The tank was declared {movement}, but nothing is seen of it ({shown}): a stuck "
            "instrument, or a movement that has not begun or has ended.",
        )
    if (movement == "receiving") == (rate.per_s > 0.0):
        return None
    return Notice("direction_contradicts", f"The tank was declared {movement}, but: {shown}.")


def random_parts(budget: Budget, share: float = RANDOM_SHARE) -> dict[str, float]:
    """Return the random part of the standard uncertainty of every figure, by its JSON key.

    Parameters
    ----------
    budget : Budget
        Of one answer.
    share : float
        Share of a transmitter's standard uncertainty that differs from reading to reading.

    Notes
    -----
    Of the budget's inputs only the readings of pressure, by that share, and of the surface in
    full (a dip is laid anew every time) count. Gravity, elevations, table, air, vapour, the
    density's standing error and the thermometer's are the same in both readings and are taken to
    cancel; a new sample or another thermometer in between does not cancel and is not seen here.
    Empty where the answer rests on none of these: of a volume or a mass that was typed nothing is
    known.
    """
    counted = dict.fromkeys(TRANSMITTERS, share) | dict.fromkeys(DIPS, 1.0)
    if not any(one.name in counted for one in budget.shares):
        return {}
    return {
        key: math.sqrt(
            math.fsum(
                (counted[s.name] * s.contributions[key]) ** 2
                for s in budget.shares
                if s.name in counted
            )
        )
        for key in budget.standard
    }
