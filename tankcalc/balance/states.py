"""A reading as a state of the balance: amounts, and each share of its budget by origin.

A budget gives one standard uncertainty for a transmitter. For a balance it is taken apart: what
is the same in every reading of that transmitter (zero), what scales with the reading (gain), and
what is new each time.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import replace
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from tankcalc.balance.account import State
from tankcalc.balance.effects import MASS, RANDOM, STANDARD, Effect, split

if TYPE_CHECKING:
    from tankcalc.instruments import Accuracy
    from tankcalc.readings import Readings
    from tankcalc.tank import Tank
    from tankcalc.uncertainty import Budget, Share

NEW_SHARE = 1.0 / 3.0
"""What is new in every pressure reading, as a share of the stated fixed accuracy and drift (common
practice, no source: 10 Pa of 30 Pa). The rest is a zero error that stays."""

SPAN_SHARED = 0.5
"""Share of the variance that stays where the accuracy is a part of span or limit, or is not
stated: zero, linearity and hysteresis in one figure (common practice, no source)."""

DIP_SHARED = 0.75
"""Share of the variance of a dip or a level gauge that stays: reference height and datum, less
the reading itself (common practice, no source)."""

THERMOMETER_SHARED = 0.5
"""Share of the variance of a read temperature that stays: calibration and place of the element,
less the liquid not being of one temperature (common practice, no source)."""

SITE = "site"
"""Key of the origins of what all tanks of a site share."""

Origins = Mapping[str, str]
"""By tag, "level", "geometry", "vapour", "fluid" and "site": what must be the same for an error to
be the same. What is not named has the tank's name."""


def state_of(
    tank: Tank,
    readings: Readings,
    budget: Budget,
    figures: Mapping[str, Any],
    at_us: int,
    origins: Origins | None = None,
) -> State:
    """Return the state that a reading's result stands for.

    Parameters
    ----------
    tank, readings, budget
        The tank, what was read, and the budget of its answer (`tankcalc.uncertainty.assess`).
    figures : mapping
        The result, by JSON key.
    at_us : int
        When it was read, µs of UTC.
    origins : mapping of str to str, optional
        See `Origins`.
    """
    scale = _standard_share(figures)
    named = dict.fromkeys(("level", "geometry", "vapour", "fluid"), tank.name)
    named |= dict.fromkeys((*tank.transmitters, "dp"), tank.name) | {SITE: SITE}
    effects = tuple(_effects(tank, readings, budget, scale, named | dict(origins or {})))
    return replace(state_as_stated(figures, at_us), effects=effects)


def state_as_stated(figures: Mapping[str, Any], at_us: int) -> State:
    """Return the state of a result whose budget cannot be made any more.

    Its expanded uncertainty is taken as random: nothing is known of what it shares.
    """
    amounts = {basis: _number(figures, basis) for basis in (MASS, STANDARD)}
    return State(
        at_us,
        MappingProxyType(amounts),
        tuple(_stated(figures)),
        _number(figures, "level_m"),
        _number(figures, "fill"),
    )


def density_error(budget: Budget, readings: Readings, origins: Origins) -> Effect | None:
    """Return the relative error of the product's density, under mass, with its origin.

    None where the readings themselves give the density.
    """
    for share in budget.shares:
        if share.name == "density":
            origin = _shared(readings, share, origins)[1]
            return Effect("density", origin, MappingProxyType({MASS: share.uncertainty}))
    return None


def _number(figures: Mapping[str, Any], key: str) -> float | None:
    value = figures.get(key)
    if not isinstance(value, int | float) or isinstance(value, bool) or not math.isfinite(value):
        return None
    return float(value)


def _standard_share(figures: Mapping[str, Any]) -> tuple[float, float] | None:
    """Return standard volume per observed volume of the product, and that observed volume."""
    standard, observed = _number(figures, STANDARD), _number(figures, "product_volume_m3")
    if observed is None:
        observed = _number(figures, "volume_m3")
    if standard is None or observed is None or observed <= 0.0:
        return None
    return standard / observed, observed


def _stated(figures: Mapping[str, Any]) -> Iterator[Effect]:
    halves = figures.get("expanded_uncertainty") or {}
    known = {key: _number(halves, key) for key in (MASS, STANDARD)}
    amounts = {key: value / 2.0 for key, value in known.items() if value is not None}
    if amounts:
        yield Effect("readings", RANDOM, MappingProxyType(amounts))


def _effects(
    tank: Tank,
    readings: Readings,
    budget: Budget,
    scale: tuple[float, float] | None,
    origins: Origins,
) -> Iterator[Effect]:
    for share in budget.shares:
        whole = Effect(share.name, RANDOM, _amounts(share, scale))
        if share.name in ("p1", "p2", "p3", "dp"):
            yield from _pressure(tank, readings, share, whole, origins)
        else:
            yield from split(whole, *_shared(readings, share, origins))


def _amounts(share: Share, scale: tuple[float, float] | None) -> Mapping[str, float]:
    """Return what one share does to mass and standard volume.

    Standard volume is observed volume times CTL, and CTL moves with the density at the liquid's
    temperature: by the temperature, while a wrong reference density leaves it as it is.
    """
    found = {MASS: share.contributions[MASS]}
    if STANDARD in share.contributions:
        found[STANDARD] = share.contributions[STANDARD]
    elif scale is not None:
        ratio, observed = scale
        moved = share.contributions["product_volume_m3"]
        if share.name == "temperature":
            moved += observed * share.uncertainty
        found[STANDARD] = ratio * moved
    return MappingProxyType(found)


def _shared(readings: Readings, share: Share, origins: Origins) -> tuple[float, str]:
    """Return how much of a share's variance stays from reading to reading, and its origin."""
    name = share.name
    if name.endswith(" elevation"):
        return 1.0, origins[name.removesuffix(" elevation")]
    if name == "density" and readings.density_kg_m3 is not None:
        # The same figure again is the same sample.
        return 1.0, f"{origins['fluid']}, sample {readings.density_kg_m3!r}"
    read = bool(readings.temperatures)
    return {
        "level": (DIP_SHARED, origins["level"]),
        "ullage": (DIP_SHARED, origins["level"]),
        "gravity": (1.0, origins[SITE]),
        "outside air": (1.0, origins[SITE]),
        "vapour density": (1.0, origins["vapour"]),
        "geometry": (1.0, origins["geometry"]),
        "density": (1.0, origins["fluid"]),
        "temperature": (THERMOMETER_SHARED if read else 0.0, origins["level"]),
        "water level": (0.0 if readings.water_level_m is not None else 1.0, origins["fluid"]),
    }.get(name, (0.0, RANDOM))


def _pressure(
    tank: Tank, readings: Readings, share: Share, whole: Effect, origins: Origins
) -> Iterator[Effect]:
    """Yield zero, gain and random part of a transmitter; together they are the whole of it."""
    tag = share.name
    fitted = tank.dp if tag == "dp" else tank.transmitters[tag]
    reading = getattr(readings, f"{tag}_pa")
    if fitted is None or reading is None:
        yield whole
        return
    zero, gain = _parts(fitted.accuracy, fitted.range_pa, float(reading), share.uncertainty)
    rest = max(1.0 - zero**2 - gain**2, 0.0) ** 0.5
    for word, origin, part in (
        ("zero", origins[tag], zero),
        ("gain", origins[tag], gain),
        ("random", RANDOM, rest),
    ):
        if part != 0.0:
            yield Effect(f"{tag} {word}", origin, whole.times(part).amounts)


def _parts(
    accuracy: Accuracy | None, span: tuple[float, float] | None, reading_pa: float, whole_pa: float
) -> tuple[float, float]:
    """Return zero and gain of a transmitter as shares of its standard uncertainty.

    The gain has the sign of the reading: one gain error moves two readings in proportion.
    """
    if accuracy is None:
        return SPAN_SHARED**0.5, 0.0
    low, high = span or (0.0, 0.0)
    stays = (1.0 - NEW_SHARE**2) * (accuracy.fixed**2 + accuracy.drift**2 / 3.0)
    of_range = (accuracy.of_span * (high - low)) ** 2
    of_range += (accuracy.of_limit * max(abs(low), abs(high))) ** 2
    stays += SPAN_SHARED * of_range / accuracy.coverage**2
    gain = accuracy.of_reading * reading_pa / accuracy.coverage
    return stays**0.5 / whole_pa, gain / whole_pa
