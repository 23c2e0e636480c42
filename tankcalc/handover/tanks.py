"""The tanks of a handover, worded."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.handover.clocks import HOUR_US, Clock
from tankcalc.handover.document import Card, Fact, Item, Section, Table, Trend
from tankcalc.limits.levels import limit_words
from tankcalc.limits.rates import BASES, COVERAGE
from tankcalc.limits.times import Arrival, duration
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.handover.data import Handover, TankPart
    from tankcalc.limits.rates import Rate
    from tankcalc.units import System
    from tankcalc.watch.state import TankWatch

LEAST_LEVEL_M = 0.1
LEAST_MASS = 0.01
"""What the axis of a trend spans at least: 0.1 m, and a hundredth of the mass."""

_FIRST = (("Level", "level_m", "length", "m"),)
_HELD = (
    ("Mass", "mass_kg", "mass", "kg"),
    ("Standard volume", "standard_volume_m3", "volume", "m3"),
    ("Volume", "volume_m3", "volume", "m3"),
)
_LAST = (
    ("Density", "density_kg_m3", "density", "kg/m3"),
    ("Water level", "water_level_m", "length", "m"),
)
_NONE = "none in 31 d"
_AGES = (
    ("Reading", "reading_us"),
    ("Dip", "dip_us"),
    ("Sample", "sample_us"),
    ("Water dip", "water_dip_us"),
)


def card(part: TankPart, handover: Handover, clock: Clock) -> Card:
    """Return one tank in words and drawn trends."""
    one, system = part.watch, handover.place.system
    return Card(
        name=clean(one.name, 40),
        title=title_of(one),
        subtitle=clean(one.product, 60) or ("" if one.tank is None else "contents not stated"),
        state=_state(one, handover, clock),
        facts=tuple(_facts(one, system)),
        trends=tuple(_trends(part, handover, clock)),
        items=tuple(_items(one, handover, clock)),
    )


def title_of(one: TankWatch) -> str:
    """Return what a tank is called: its file's name, and its own where that is another."""
    name = clean(one.name, 40)
    own = "" if one.tank is None else clean(one.tank.name, 40)
    return name if own in ("", name) else f"{name} ({own})"


def _state(one: TankWatch, handover: Handover, clock: Clock) -> str:
    if one.last is None:
        return "no reading"
    return f"read {clock.show(one.last.entry.t_us)}, {one.movement or 'movement not declared'}"


def _facts(one: TankWatch, system: System) -> Iterator[Fact]:
    yield from _figures(one, _FIRST, system)
    if one.rate is not None:
        yield _rate_fact(one.rate, system)
    yield from _figures(one, _HELD, system)
    for label, volume in (
        ("Room", one.room_m3),
        ("Pumpable", one.pumpable_m3),
        ("Ullage volume", one.ullage_volume_m3),
    ):
        if volume is not None:
            yield Fact(label, units.show(volume, "volume", system), "", volume, "m3")
    yield from _figures(one, _LAST, system)


def _figures(
    one: TankWatch, wanted: Sequence[tuple[str, str, str, str]], system: System
) -> Iterator[Fact]:
    for label, key, dimension, unit in wanted:
        value, half = one.figure(key), one.half(key)
        if value is not None:
            give = "" if half is None else f"+/- {units.show(half, dimension, system)}"
            yield Fact(label, units.show(value, dimension, system), give, value, unit)


def _rate_fact(rate: Rate, system: System) -> Fact:
    dimension = BASES[rate.basis][1]
    unit = "kg/s" if rate.basis == "mass_kg" else "m3/s"
    u = rate.uncertainty_per_s
    give = "" if u is None else f"+/- {units.show(COVERAGE * u, dimension, system)}"
    return Fact("Rate", rate_text(rate, system), give, rate.per_s, unit)


def rate_text(rate: Rate, system: System) -> str:
    """Return a rate in short: "static", or its size with its sign."""
    if rate.static:
        return "static"
    shown = units.show(rate.per_s, BASES[rate.basis][1], system)
    return f"+{shown}" if rate.per_s > 0.0 else shown


def worth_a_card(part: TankPart) -> bool:
    """Return whether there is more to say of a tank than that it was not read."""
    return part.watch.last is not None or bool(part.watch.problem)


def overview(handover: Handover, clock: Clock) -> Section:
    """Return all tanks in a table."""
    rows = tuple(_line(part.watch, handover, clock) for part in handover.tanks)
    return Section(
        "Tanks",
        "The site has no tanks, and the log knows none.",
        table=Table(
            ("Tank", "Product", "Level", "Room", "Mass", "Standard volume", "Rate", "Next limit"),
            rows,
            ("Level", "Room", "Mass", "Standard volume", "Rate"),
        ),
    )


def _line(one: TankWatch, handover: Handover, clock: Clock) -> tuple[str, ...]:
    system = handover.place.system

    def shown(value: float | None, dimension: str) -> str:
        return "" if value is None else units.show(value, dimension, system)

    held = shown(one.figure("standard_volume_m3"), "volume")
    return (
        clean(one.name, 40),
        clean(one.product, 40),
        shown(one.figure("level_m"), "length")
        + (" *" if one.refused else "")
        + _old(one, handover),
        shown(one.room_m3, "volume"),
        shown(one.figure("mass_kg"), "mass"),
        held,
        "" if one.rate is None else rate_text(one.rate, system),
        _next_limit(one, clock) if one.last is not None else _unread(handover),
    )


def _old(one: TankWatch, handover: Handover) -> str:
    """Return the age of a level that is older than the shift or the planned reading interval."""
    if one.held is None or one.figure("level_m") is None:
        return ""
    t_us = one.held.entry.t_us
    age_s = (handover.at_us - t_us) / 1e6
    every_s = handover.read_every_s
    if t_us >= handover.shift.start_us and (every_s is None or age_s <= every_s):
        return ""
    days = int(age_s // 86400)
    return f", {days} d old" if days >= 2 else f", {duration(max(age_s, 0.0))} old"


def _unread(handover: Handover) -> str:
    return "not read" if handover.begins is None else "archived before"


def _next_limit(one: TankWatch, clock: Clock) -> str:
    """Return which limit comes next, and from when to when."""
    coming = [a for a in one.arrivals if not a.passed and a.expected_s is not None]
    if not coming or one.held is None:
        return ""
    first = min(coming, key=lambda arrival: arrival.expected_s or 0.0)
    name, from_us = limit_words(first.limit), one.held.entry.t_us
    early, late = _between(first, from_us, clock)
    last_s = first.latest_s
    if last_s is not None and clock.near(from_us + round(last_s * 1e6)):
        return f"{name} {early} to {late}"
    return f"{name} not before {early}"


def _between(arrival: Arrival, from_us: int, clock: Clock) -> tuple[str, str]:
    early = clock.full(from_us + round((arrival.earliest_s or 0.0) * 1e6))
    if arrival.latest_s is None:
        return early, "never"
    return early, clock.full(from_us + round(arrival.latest_s * 1e6))


def _items(one: TankWatch, handover: Handover, clock: Clock) -> Iterator[Item]:
    name = clean(one.name, 40)
    for line in one.problem.splitlines():
        yield Item(f"A file cannot be read: {clean(line, 400)}", "profile", name, urgent=True)
    if one.last is None:
        yield Item("Never read, as far as the log was looked at.", "reading", name)
    elif one.refused:
        when = "there is none" if one.held is None else clock.show(one.held.entry.t_us)
        yield Item(
            f"The last reading was refused; figures are those of the one before: {when}.",
            "reading",
            name,
            clock.show(one.last.entry.t_us),
            one.last.entry.t_us,
            urgent=True,
        )
    if one.contradiction is not None:
        yield Item(clean(one.contradiction.message, 400), "movement", name, urgent=True)
    yield from (
        _arrival(a, one, clock, handover.place.system)
        for a in one.arrivals
        if not a.passed and a.expected_s
    )


def _arrival(arrival: Arrival, one: TankWatch, clock: Clock, system: System) -> Item:
    assert one.held is not None
    from_us = one.held.entry.t_us
    early, late = _between(arrival, from_us, clock)
    expected = clock.full(from_us + round((arrival.expected_s or 0.0) * 1e6))
    ending = "; it may never be reached" if arrival.latest_s is None else f", at the latest {late}"
    beyond = "" if arrival.extrapolates is False else ", if the rate holds"
    size = units.show(arrival.level_m, "length", system)
    return Item(
        f"{limit_words(arrival.limit).capitalize()} level ({size}): not before {early}, "
        f"expected {expected}{ending}{beyond}.",
        "time to limit",
        clean(one.name, 40),
    )


def _trends(part: TankPart, handover: Handover, clock: Clock) -> Iterator[Trend]:
    start = handover.shift.start_us
    span = (start - 24 * HOUR_US, handover.at_us)
    points = [point for point in part.trend if span[0] <= point[0] <= span[1]]
    if len([p for p in points if p[1] is not None]) < 2:
        return
    ticks = clock.marks(*span)
    limits = () if part.watch.tank is None else tuple(part.watch.tank.limits_m.items())
    lines = tuple((limit_words(name), level) for name, level in limits)
    system = handover.place.system
    foot = 1.0 if system == "metric" else units.from_unit(1.0, "ft")
    level_unit, mass_unit = ("m", "t") if system == "metric" else ("ft", "lb")
    yield Trend(
        "Level",
        level_unit,
        tuple((t, None if level is None else level / foot) for t, level, _ in points),
        tuple((name, level / foot) for name, level in lines),
        span,
        start,
        ticks,
        LEAST_LEVEL_M / foot,
        2,
    )
    scale = units.from_unit(1.0, mass_unit)
    masses = tuple((t, None if mass is None else mass / scale) for t, _, mass in points)
    known = [mass for _, mass in masses if mass is not None]
    if len(known) > 1:
        least = max(LEAST_MASS * max(map(abs, known)), 1e-3)
        digits = 0 if max(map(abs, known)) >= 100.0 else 2
        yield Trend("Mass", mass_unit, masses, (), span, start, ticks, least, digits)


def ages(handover: Handover) -> Section:
    """Return how old readings, dips and samples are, tank by tank."""
    rows = []
    for one in (part.watch for part in handover.tanks if part.watch.last is not None):
        times = [getattr(one.ages, key) for _, key in _AGES]
        cells = [_NONE if t_us is None else _age(t_us, handover) for t_us in times]
        rows.append((clean(one.name, 40), *cells))
    headings = tuple(label for label, _ in _AGES)
    table = Table(("Tank", *headings), tuple(rows), headings)
    return Section("Ages of readings, dips and samples", "No tank was read.", table=table)


def _age(t_us: int, handover: Handover) -> str:
    return duration(max(handover.at_us - t_us, 0) / 1e6)
